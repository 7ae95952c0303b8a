"""Scales of force: so many units of force to a centimetre (or an inch) of paper."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction

from trusscalc.sheet.inscriptions import STEPS, Scale

INCH_UNITS = ("lbf", "kip")
INCH = 25.4
CENTIMETRE = 10.0


@dataclass(frozen=True, slots=True)
class Extent:
    """What has to fit: width and height in units of force, and the room in mm."""

    width: float
    height: float
    wide: float
    high: float


def force_scale(unit: str, extent: Extent) -> Scale:
    """Return the largest usual scale at which a diagram of forces fits: ``1 cm = 20 kN``.

    Examples
    --------
    >>> force_scale("kN", Extent(300, 100, 80, 60))
    Scale(paper=0.2, text='1 cm = 50 kN')
    >>> force_scale("kip", Extent(0, 7, 80, 60)).text
    '1 in = 5 kip'
    """
    length, name = (INCH, "in") if unit in INCH_UNITS else (CENTIMETRE, "cm")
    needed = max(extent.width / extent.wide, extent.height / extent.high) * length
    power = math.floor(math.log10(needed)) if needed > 0 else 0
    sizes = [step * Fraction(10) ** exponent for exponent in (power, power + 1) for step in STEPS]
    size = next(size for size in sizes if float(size) >= needed * (1 - 1e-12))
    text = f"{float(size):g}" if size < 1 or size.denominator > 1 else str(size)
    return Scale(length / float(size), f"1 {name} = {text} {unit}")
