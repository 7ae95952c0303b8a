"""The benchmark runs; what it measures is no test (see RATIOS.md)."""

from __future__ import annotations

import pytest
import ratios


def test_the_benchmark_runs_on_tiny_sizes(capsys: pytest.CaptureFixture[str]) -> None:
    """All four tables are printed, every command ends well."""
    assert ratios.main(["--quick"]) == 0
    tables = capsys.readouterr().out.split("\n\n")
    heads = [table.splitlines()[0] for table in tables if table.strip()]
    assert len(heads) == 4
    assert "limit" in heads[0]
    assert all("exponent" in table for table in tables[1:4])


def test_the_growth_exponent() -> None:
    """Times that double with the size have the exponent 1, those that grow eightfold 3."""
    assert ratios.exponent([10, 20, 40], [1.0, 2.0, 4.0]) == pytest.approx(1)
    assert ratios.exponent([10, 20], [1.0, 8.0]) == pytest.approx(3)
