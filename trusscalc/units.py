"""Exact factors between the units a truss file may state.

The pound, the foot and the standard acceleration of gravity are defined exactly (1 lb = 0.45359237 kg,
1 ft = 0.3048 m, 9.80665 m/s2), so every factor here is a fraction. The twelve factors are kept by hand: a
units library takes longer to import than the whole table is worth.
"""

from __future__ import annotations

import difflib
from fractions import Fraction

from trusscalc.errors import UnitError

LENGTHS: dict[str, Fraction] = {
    "m": Fraction(1),
    "mm": Fraction(1, 1000),
    "cm": Fraction(1, 100),
    "ft": Fraction(3048, 10000),
    "in": Fraction(254, 10000),
}
"""Metres in one unit of length."""

FORCES: dict[str, Fraction] = {
    "N": Fraction(1),
    "kN": Fraction(1000),
    "MN": Fraction(1_000_000),
    "lbf": Fraction(8896443230521, 2000000000000),
    "kip": Fraction(8896443230521, 2000000000),
    "tf": Fraction(980665, 100),
}
"""Newtons in one unit of force; tf is the tonne-force."""


def factor(unit: str, into: str) -> Fraction:
    """Return the exact number of ``into`` in one ``unit``.

    Parameters
    ----------
    unit, into : str
        Two units of length or two units of force.

    Raises
    ------
    UnitError
        For an unknown unit, or two units of different kinds.

    Examples
    --------
    >>> factor("ft", "in"), float(factor("kip", "kN"))
    (Fraction(12, 1), 4.4482216152605)
    """
    for kind in (LENGTHS, FORCES):
        if unit in kind and into in kind:
            return kind[unit] / kind[into]
    for name in (unit, into):
        if name not in LENGTHS and name not in FORCES:
            raise UnitError(unknown_unit(name, {**LENGTHS, **FORCES}))
    message = f"{unit} and {into} measure different things"
    raise UnitError(message)


def unknown_unit(name: object, known: dict[str, Fraction]) -> str:
    """Return what to say about a unit that is not in the table."""
    near = difflib.get_close_matches(str(name)[:40], known, n=1, cutoff=0.3)
    guess = f"; did you mean {near[0]}?" if near else ""
    return f"unknown unit {str(name)[:40]!r}; known are {', '.join(known)}{guess}"
