"""Drawn examples are the same on every run, so that the suite neither passes nor fails by luck."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")
