"""Ratios that a whole table may be off by: units, load factors, halves and doubles."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import permutations
from typing import Final

from trusscalc.units import FORCES, LENGTHS

LOAD_FACTORS: Final = (
    *(0.3, 0.4, 0.5, 0.525, 0.6, 0.65, 0.7, 0.75, 0.8, 0.85, 0.9, 0.95, 1.05, 1.1, 1.15, 1.2, 1.25, 1.3, 1.33),
    *(1.35, 1.4, 1.45, 1.5, 1.6, 1.65, 1.7, 1.75, 1.8),
)
"""Factors of common combinations; common practice, no source."""


MOST_WORDS: Final = 2
"""Meanings of one ratio that are told."""


def known_ratios(stated: Iterable[float] = (), force: str = "", length: str = "") -> list[tuple[float, str]]:
    """Return known ratios of a table of forces to the right one, each once, with its words; the likelier words first.

    Parameters
    ----------
    stated : iterable of float
        Load factors the user's own combinations have.
    force, length : str
        The units the right table is in.

    Examples
    --------
    >>> [words for ratio, words in known_ratios([1.37]) if abs(ratio - 1.37) < 1e-9]
    ['a load factor 1.37']
    >>> [words for ratio, words in known_ratios((), "kip", "ft") if abs(ratio - 4.4482) < 1e-4]
    ['kN for kip or N for lbf']
    """
    words: dict[str, list[str]] = {}
    values: dict[str, float] = {}
    for ratio, told in _told(stated, force, length):
        key = f"{ratio:.9g}"
        values.setdefault(key, ratio)
        words.setdefault(key, []).append(told)
    return [(values[key], " or ".join(told[:MOST_WORDS])) for key, told in words.items() if values[key] != 1.0]


def _told(stated: Iterable[float], force: str, length: str) -> Iterator[tuple[float, str]]:
    yield from ((2.0, "everything twice"), (0.5, "one half of everything"))
    for factor in dict.fromkeys((*stated, *LOAD_FACTORS)):
        if factor > 0:
            yield factor, f"a load factor {factor:g}"
            yield 1 / factor, f"a load factor {factor:g} not applied"
    areas = {f"{unit}2": metres**2 for unit, metres in LENGTHS.items()}
    for units, ours in ((FORCES, force), (LENGTHS, length), (areas, f"{length}2")):
        for one, other in permutations(sorted(units, key=ours.__ne__), 2):
            yield float(units[one] / units[other]), f"{other} for {one}"
    per_length, per_area = (FORCES["kip"] / FORCES["kN"] / LENGTHS["ft"] ** power for power in (1, 2))
    for ratio, one, other in ((per_length, "kip/ft", "kN/m"), (per_area / 1000, "lbf/ft2", "kN/m2")):
        yield float(ratio), f"{other} for {one}"
        yield 1 / float(ratio), f"{one} for {other}"
    for gravity in (float(FORCES["tf"] / 1000), 9.81, 10.0):
        yield gravity, f"gravity of {gravity:g} m/s2 once too often"
        yield 1 / gravity, "kg taken for N"
