"""The measurement of envelopes runs."""

from __future__ import annotations

import enveloping
import pytest


def test_it_runs(capsys: pytest.CaptureFixture[str]) -> None:
    """In a small size, both heights."""
    assert enveloping.main(["--quick"]) == 0
    assert capsys.readouterr().out.count("checks of one case") == 2
