"""Ratios that a whole table may be off by: units, load factors, halves and doubles."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import permutations
from typing import Final

from trusscalc.units import FORCES, LENGTHS

LOAD_FACTORS: Final = (
    *(0.3, 0.4, 0.5, 0.525, 0.6, 0.65, 0.7, 0.75, 0.8, 0.85, 0.9, 0.95, 1.05, 1.1, 1.15, 1.2, 1.25, 1.3, 1.33),
    *(1.35, 1.4, 1.45, 1.5, 1.6, 1.65, 1.7, 1.75, 1.8),
)
"""Factors of common combinations; common practice, no source."""


def known_ratios(stated: Iterable[float] = ()) -> list[tuple[float, str]]:
    """Return known ratios of a table of forces to the right one, each with its words; the likelier of equals first.

    Parameters
    ----------
    stated : iterable of float
        Load factors the user's own combinations have.

    Examples
    --------
    >>> [words for ratio, words in known_ratios([1.37]) if abs(ratio - 1.37) < 1e-9]
    ['a load factor 1.37']
    >>> [words for ratio, words in known_ratios() if abs(ratio - 12) < 1e-9]
    ['in for ft']
    """
    found = [(2.0, "everything twice"), (0.5, "one half of everything")]
    for factor in dict.fromkeys((*stated, *LOAD_FACTORS)):
        if factor > 0:
            found += [(factor, f"a load factor {factor:g}"), (1 / factor, f"a load factor {factor:g} not applied")]
    for units in (FORCES, LENGTHS):
        found += [(float(units[one] / units[other]), f"{other} for {one}") for one, other in permutations(units, 2)]
    per_length, per_area = (FORCES["kip"] / FORCES["kN"] / LENGTHS["ft"] ** power for power in (1, 2))
    for ratio, one, other in ((per_length, "kip/ft", "kN/m"), (per_area / 1000, "lbf/ft2", "kN/m2")):
        found += [(float(ratio), f"{other} for {one}"), (1 / float(ratio), f"{one} for {other}")]
    for gravity in (float(FORCES["tf"] / 1000), 9.81, 10.0):
        found += [(gravity, f"gravity of {gravity:g} m/s2 once too often"), (1 / gravity, "kg taken for N")]
    return [each for each in found if each[0] != 1.0]
