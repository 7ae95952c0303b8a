"""Slips of typing in a number: two digits exchanged, the sign turned, the decimal point lost or moved."""

from __future__ import annotations

from itertools import combinations
from typing import Final

DIGITS_READ: Final = 12
"""Significant digits of a float that are taken for what was typed, before noise."""
DIGITS_EXCHANGED: Final = 7
"""Among so many leading digits any two may have been exchanged."""
SHIFTS: Final = (1, -1, 2, -2, 3, -3, 4)
"""Places the decimal point may have moved by; lost, it moves by as many as there were decimals."""


def slips(value: float) -> list[tuple[float, str]]:
    """Return what a number may have become by one slip, with the slip in words; without doubles.

    Examples
    --------
    >>> for number, words in slips(3.25)[:5]:
    ...     print(f"{number:g}: {words}")
    -3.25: its sign turned
    2.35: digits 3 and 2 exchanged
    5.23: digits 3 and 5 exchanged
    0.253: digits 3 and 0 exchanged
    3.52: digits 2 and 5 exchanged
    >>> slips(0)
    []
    """
    if not value:
        return []
    found = {-value: "its sign turned"}
    for slipped, words in _exchanged(value):
        found.setdefault(slipped, words)
    for places in SHIFTS:
        way = "right" if places > 0 else "left"
        count = "one place" if abs(places) == 1 else f"{abs(places)} places"
        found.setdefault(value * 10.0**places, f"its decimal point moved {count} to the {way}")
    found.pop(value, None)
    return list(found.items())


def _exchanged(value: float) -> list[tuple[float, str]]:
    """Return the number with any two of its leading digits exchanged; one zero may follow its decimals."""
    text = f"{abs(value):.{DIGITS_READ}g}"
    if "e" in text:
        return []
    whole, _, decimals = text.partition(".")
    if decimals:
        decimals += "0"
    digits = [(digit, len(whole) - 1 - place) for place, digit in enumerate(whole + decimals)]
    leading = next(place for place, (digit, _) in enumerate(digits) if digit != "0")
    sign = 1 if value > 0 else -1
    found = []
    for (one, high), (other, low) in combinations(digits[max(leading - 1, 0) : leading + DIGITS_EXCHANGED], 2):
        if one != other:
            change = (int(other) - int(one)) * (10.0**high - 10.0**low)
            found.append((_tidy(value + sign * change), f"digits {one} and {other} exchanged"))
    return found


def _tidy(value: float) -> float:
    """Return the value without the noise of the sum."""
    return float(f"{value:.15g}")
