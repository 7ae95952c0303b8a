"""The benchmark of many cases runs; what it measures is no test."""

from __future__ import annotations

import comparing
import pytest


def test_the_benchmark_runs_on_a_small_truss(capsys: pytest.CaptureFixture[str]) -> None:
    """Every row is compared, and agrees."""
    assert comparing.main(["--quick"]) == 0
    assert capsys.readouterr().out.startswith("116 rows, 29 members, 4 cases")
