"""The measurement of rates runs; what it measures is in DIAGNOSIS.md."""

from __future__ import annotations

import diagnosis_rates
import pytest
from planted import BLUNDERS


@pytest.mark.slow
def test_the_measurement_runs_on_one_of_each(capsys: pytest.CaptureFixture[str]) -> None:
    """All three tables are printed, every kind with both families of trusses."""
    assert diagnosis_rates.main(["--quick"]) == 0
    single, double, others = capsys.readouterr().out.strip().split("\n\n")
    assert [line.split("|")[1].strip() for line in single.splitlines()[2:]] == list(BLUNDERS)
    assert len(double.splitlines()) == 4
    assert all(line.split("|")[4].strip() == "0" for line in others.splitlines()[2:] if "sound" in line)
