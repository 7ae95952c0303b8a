"""Drawn examples are the same on every run, so that the suite neither passes nor fails by luck."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import settings

settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")


def pytest_ignore_collect(collection_path: Path, config: pytest.Config) -> bool | None:
    """Leave the browser's tests, and what only they can import, alone unless they are asked for."""
    asked = config.option.markexpr == "browser"
    return True if collection_path.name == "browser" and collection_path.is_dir() and not asked else None
