"""What is written on figures: forces by name, amounts, arms, slopes, scales.

A short decimal is written exactly; what is none is rounded once, from the exact value. An amount with
symbols keeps them.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from math import floor
from typing import Final

from trusscalc.decimals import rounded
from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.units import LENGTHS

MINUS: Final = "−"
DASH: Final = "–"
PLACES: Final = 3
LONGEST_ARM: Final = 8
"""Arms whose exact text is longer are written as decimals."""
STEPS: Final = (Fraction(1), Fraction(2), Fraction(5, 2), Fraction(5))
BRIDGE_STEPS: Final = (Fraction(3), Fraction(4))
"""On the scale rule between 1:250 and 1:500, where whole bridges are drawn (common practice, no source)."""
FEET_TO_AN_INCH: Final = (1, 2, 3, 4, 5, 6, 8, 10, 15, 20, 30, 40, 50, 60, 80)
LARGEST_LEG: Final = 99


def decimal_text(value: Decimal) -> str:
    """Return a decimal without idle zeros, with a true minus sign."""
    text = f"{value:f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    if text in ("-0", ""):
        text = "0"
    return text.replace("-", MINUS)


def amount(value: Exact, places: int = PLACES) -> str:
    """Return a force or length for a figure: short decimals exactly, others rounded, symbols kept.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> amount(parse("-25/2")), amount(parse("10/3")), amount(parse("3*P/2", ["P"]))
    ('−12.5', '3.333', '3P/2')
    """
    if value.symbols:
        return exact_text(value)
    return decimal_text(rounded(value, places))


def exact_text(value: Exact) -> str:
    """Return exact text as an engineer letters it, a raised dot where a product could be misread.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> exact_text(parse("5*sqrt(3)/2")), exact_text(parse("P*sqrt(3)/16", ["P"]))
    ('5√3/2', 'P/16·√3')
    """
    text = re.sub(r"sqrt\((\d+)\)", r"√\1", to_text(value))
    text = re.sub(r"sqrt\(", "√(", text)
    # after a denominator the product keeps its dot: P/16·√3 is not P/(16√3)
    text = re.sub(r"(?<![\d/.])(\d+)\*(?=[^\W\d]|√)", r"\1", text)
    return text.replace("*", "·").replace("-", MINUS)


def arm(value: Exact) -> str:
    """Return an arm as the equation has it, if that is short, else as a decimal.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> arm(parse("2.5")), arm(parse("5*sqrt(3)/2")), arm(parse("8/3"))
    ('2.5', '5√3/2', '8/3')
    """
    near = rounded(value, PLACES) if not value.symbols else None
    if near is not None and value == Fraction(near):
        return decimal_text(near)
    text = exact_text(value)
    if near is None or len(text) <= LONGEST_ARM:
        return text
    return decimal_text(near)


@dataclass(frozen=True, slots=True)
class Scale:
    """A drawing scale: millimetres on paper for one unit of the truss, and how it is written."""

    paper: float
    text: str


def scales(unit: str) -> list[Scale]:
    """Return the drawing office's scales for a unit of length, largest first."""
    if unit in ("ft", "in"):
        one = 25.4 if unit == "ft" else 25.4 / 12
        feet = [Fraction(1, 8), Fraction(1, 4), Fraction(1, 2)]
        feet += [Fraction(n * 10**power) for power in range(4) for n in FEET_TO_AN_INCH if power == 0 or n >= 10]  # noqa: PLR2004
        return [Scale(float(one / n), f"1 in = {n} ft" if n >= 1 else f"1 in = {n * 12} in") for n in sorted(set(feet))]
    one = float(LENGTHS[unit] * 1000)
    found = []
    for power in range(-3, 8):
        for step in sorted((*STEPS, *BRIDGE_STEPS)):
            n = step * Fraction(10) ** power
            if step in BRIDGE_STEPS and power != 2:  # noqa: PLR2004 - 1:300 and 1:400
                continue
            text = f"1:{n}" if n >= 1 and n.denominator == 1 else f"{1 / n}:1"
            if n.denominator == 1 or (1 / n).denominator == 1:
                found.append(Scale(one / float(n), text))
    return found


def slope(dx: Exact, dy: Exact) -> tuple[str, str, str]:
    """Return the legs and the length of a slope triangle, in the smallest whole numbers if there are small ones."""
    dx, dy = abs(dx), abs(dy)
    ratio = dx / dy
    if ratio.is_rational:
        part = ratio.as_fraction()
        if max(part.numerator, part.denominator) <= LARGEST_LEG:
            hypotenuse = _root_text(part.numerator**2 + part.denominator**2)
            return str(part.numerator), str(part.denominator), hypotenuse
    if ratio > 1:
        return arm(ratio), "1", ""
    return "1", arm(1 / ratio), ""


def _root_text(square: int) -> str:
    outside, inside = 1, square
    for n in range(floor(square**0.5), 1, -1):
        if square % (n * n) == 0:
            outside, inside = n, square // (n * n)
            break
    if inside == 1:
        return str(outside)
    return f"{outside if outside > 1 else ''}√{inside}"
