"""Drawn examples are the same on every run: a suite that passes by luck says nothing, and one that fails by luck less."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")
