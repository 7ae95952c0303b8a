"""A drawing as data: marks on paper, in millimetres, y upwards, origin at the lower left.

Nothing here knows how a mark gets onto the page; ``render.draw`` does. Widths, lengths and type sizes are
the drawing-office values of ``sheet.figures``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Ink = Literal["black", "grey", "accent", "white"]
Dash = Literal["solid", "section", "dashed", "break"]


@dataclass(frozen=True, slots=True)
class Stroke:
    """A line through points, width in mm."""

    points: tuple[tuple[float, float], ...]
    width: float
    ink: Ink = "black"
    dash: Dash = "solid"
    closed: bool = False
    filled: bool = False


@dataclass(frozen=True, slots=True)
class Arrow:
    """An arrow from tail to tip; a reaction's head is open."""

    tail: tuple[float, float]
    tip: tuple[float, float]
    width: float
    ink: Ink = "black"
    open_head: bool = False
    head_length: float = 2.6
    head_width: float = 1.5


@dataclass(frozen=True, slots=True)
class Ring:
    """A circle: joint, moment centre; filled white unless said otherwise."""

    centre: tuple[float, float]
    diameter: float
    width: float
    ink: Ink = "black"
    fill: Ink = "white"


@dataclass(frozen=True, slots=True)
class Label:
    """A piece of lettering: text with an optional subscript, size in points.

    ``anchor`` names the point of the text's box (centre, or compass-like: left, right, lower, upper) that
    lies at ``place``; ``angle`` in degrees, readable from below or from the right.
    """

    place: tuple[float, float]
    text: str
    size: float
    subscript: str = ""
    anchor: Literal["centre", "left", "right", "lower", "upper"] = "centre"
    angle: float = 0.0
    ink: Ink = "black"
    style: Literal["plain", "italic", "bold italic"] = "plain"


Mark = Stroke | Arrow | Ring | Label


@dataclass(frozen=True, slots=True)
class Figure:
    """A finished drawing.

    Attributes
    ----------
    width, height : float
        Size on paper, mm.
    marks : tuple of Mark
        In drawing order.
    caption : str
        What stands below it: scale, units, meaning of signs.
    alt : str
        The figure in words, for those who cannot see it.
    """

    width: float
    height: float
    marks: tuple[Mark, ...]
    caption: str
    alt: str
