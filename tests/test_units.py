"""Unit factors against the exact definitions.

NIST SP 811 (2008), appendix B.8, and the international yard and pound agreement of 1959: values from memory.
"""

from __future__ import annotations

from fractions import Fraction
from itertools import permutations

import pytest

from trusscalc.errors import TrusscalcError, UnitError
from trusscalc.units import FORCES, LENGTHS, factor, unknown_unit

POUND = Fraction("0.45359237")  # kg, exact
GRAVITY = Fraction("9.80665")  # m/s2, exact


@pytest.mark.parametrize(
    ("unit", "into", "expected"),
    [
        ("ft", "m", Fraction("0.3048")),
        ("in", "mm", Fraction("25.4")),
        ("ft", "in", Fraction(12)),
        ("m", "mm", Fraction(1000)),
        ("cm", "mm", Fraction(10)),
        ("lbf", "N", POUND * GRAVITY),
        ("kip", "kN", POUND * GRAVITY),
        ("kip", "lbf", Fraction(1000)),
        ("tf", "kN", GRAVITY),
        ("MN", "kN", Fraction(1000)),
        ("kN", "N", Fraction(1000)),
    ],
)
def test_factors_are_the_defined_ones(unit: str, into: str, expected: Fraction) -> None:
    """Exact, as fractions."""
    assert factor(unit, into) == expected


@pytest.mark.parametrize(
    ("unit", "into", "printed"),
    [
        ("lbf", "N", "4.448222"),  # SP 811 prints seven digits: pound-force (lbf) to newton 4.448 222 E+00
        ("kip", "N", "4448.222"),  # kip (1 kip = 1000 lbf) to newton 4.448 222 E+03
        ("ft", "m", "0.3048"),
        ("in", "cm", "2.54"),
        ("tf", "N", "9806.65"),  # ton-force, metric: 1000 kilogram-force
    ],
)
def test_factors_agree_with_the_printed_digits(unit: str, into: str, printed: str) -> None:
    """Rounded to the digits of NIST SP 811 (from memory)."""
    digits = len(printed.partition(".")[2])
    assert round(factor(unit, into), digits) == Fraction(printed)


@pytest.mark.parametrize("table", [LENGTHS, FORCES], ids=["lengths", "forces"])
def test_there_and_back(table: dict[str, Fraction]) -> None:
    """Every pair, exactly, and every way round."""
    for a, b in permutations(table, 2):
        assert factor(a, b) * factor(b, a) == 1
        for c in table:
            assert factor(a, b) * factor(b, c) == factor(a, c)


@pytest.mark.parametrize(
    ("unit", "into", "message"),
    [
        ("m", "kN", "m and kN measure different things"),
        ("kips", "kN", "unknown unit 'kips'.*did you mean kip"),
        ("m", "meter", "unknown unit 'meter'"),
        ("", "m", "unknown unit ''"),
        ("M", "m", "unknown unit 'M'"),
        ("lb", "N", "did you mean lbf"),
    ],
)
def test_wrong_units(unit: str, into: str, message: str) -> None:
    """Named, with the nearest known one."""
    with pytest.raises(UnitError, match=message) as caught:
        factor(unit, into)
    assert isinstance(caught.value, TrusscalcError)
    assert isinstance(caught.value, ValueError)


def test_a_long_name_is_cut() -> None:
    """What comes from a file may be of any length."""
    assert len(unknown_unit("x" * 10_000, LENGTHS)) < 200
