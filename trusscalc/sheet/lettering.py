"""Lettering: how wide a label is, where its letters stand, and which boxes touch.

Text is measured with the face's own advance widths. A label is laid out here, run by run, and drawn as laid
out: what the overlap test sees is what is on paper. Boxes are rectangles at any angle; whether two touch is
decided by separating axes.
"""

from __future__ import annotations

import itertools
import math
import unicodedata
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

from trusscalc.sheet.glyphs import CHARACTERS_BY_WIDTH
from trusscalc.sheet.marks import Arrow, Figure, Label, Ring, Stroke

POINT: Final = 25.4 / 72
"""Millimetres in a point."""
SMALLEST: Final = 7.0
"""No lettering is smaller, in points."""
SUBSCRIPT_SHARE: Final = 0.72
SUBSCRIPT_DROP: Final = 0.22
"""How far a subscript's base line lies below, as a share of the type size."""
ASCENT: Final = 0.68
DESCENT: Final = 0.22
DESCENDERS: Final = frozenset("gjpqyQ(),;[]{}|/_ß$§çþµβγζημξρφχψ")
UPRIGHT: Final = 1e-9
UNKNOWN_WIDTH: Final = 760
FULL_WIDTH: Final = 1000
Point = tuple[float, float]


@lru_cache(maxsize=4096)
def _advance(character: str, style: str) -> int:
    if unicodedata.combining(character):
        return 0
    for candidate in (character, unicodedata.normalize("NFD", character)[0]):
        for name in (style, "plain"):
            width = _WIDTHS[name].get(candidate)
            if width is not None:
                return width
    return FULL_WIDTH if unicodedata.east_asian_width(character) in "WF" else UNKNOWN_WIDTH


_WIDTHS: Final = {
    style: {character: width for width, characters in table.items() for character in characters}
    for style, table in CHARACTERS_BY_WIDTH.items()
}


def text_width(text: str, size: float, style: str = "plain") -> float:
    """Return the width of a text in mm, its size given in points.

    Examples
    --------
    >>> round(text_width("120", 8), 3)
    4.233
    """
    return sum(_advance(character, style) for character in text) / 1000 * size * POINT


@dataclass(frozen=True, slots=True)
class TextRun:
    """A piece of a label in one size: offset of its base line's left end from the centre of the label's box, mm."""

    text: str
    x: float
    y: float
    size: float
    style: str


@dataclass(frozen=True, slots=True)
class Box:
    """A rectangle at an angle: centre, half sides, and the unit vector (cos, sin) along its length."""

    x: float
    y: float
    half_width: float
    half_height: float
    cos: float = 1.0
    sin: float = 0.0

    def reach(self, ux: float, uy: float) -> float:
        """Return how far the box reaches from its centre along a unit vector."""
        along = abs(ux * self.cos + uy * self.sin) * self.half_width
        return along + abs(-ux * self.sin + uy * self.cos) * self.half_height

    @property
    def is_upright(self) -> bool:
        """Whether its sides are level and upright, so that its bounds are the box itself."""
        return abs(self.sin) < UPRIGHT or abs(self.cos) < UPRIGHT

    @property
    def bounds(self) -> tuple[float, float, float, float]:
        """Left, lower, right and upper edge of the upright box around it."""
        wide, high = self.reach(1.0, 0.0), self.reach(0.0, 1.0)
        return self.x - wide, self.y - high, self.x + wide, self.y + high


def subscript_size(size: float) -> float:
    """Return the type size of a subscript, never below the smallest legible one."""
    return max(SMALLEST, SUBSCRIPT_SHARE * size)


def label_size(label: Label) -> tuple[float, float, float]:
    """Return width, ascent and descent of a label's text in mm."""
    width = text_width(label.text, label.size, label.style)
    descent = DESCENT if DESCENDERS & set(label.text) else 0.02
    below = descent * label.size
    if label.subscript:
        small = subscript_size(label.size)
        width += 0.03 * label.size * POINT + text_width(label.subscript, small)
        inside = DESCENT if DESCENDERS & set(label.subscript) else 0.02
        below = max(below, SUBSCRIPT_DROP * label.size + inside * small)
    return width, ASCENT * label.size * POINT, below * POINT


def box_of(label: Label) -> Box:
    """Return the rectangle a label's text fills."""
    width, ascent, descent = label_size(label)
    half_width, half_height = width / 2, (ascent + descent) / 2
    turn = math.radians(label.angle)
    cos, sin = math.cos(turn), math.sin(turn)
    along, across = {
        "centre": (0.0, 0.0),
        "left": (half_width, 0.0),
        "right": (-half_width, 0.0),
        "lower": (0.0, half_height),
        "upper": (0.0, -half_height),
    }[label.anchor]
    x = label.place[0] + along * cos - across * sin
    y = label.place[1] + along * sin + across * cos
    return Box(x, y, half_width, half_height, cos, sin)


def runs(label: Label) -> tuple[TextRun, ...]:
    """Return the pieces of a label, each to be set on its own base line before the label is turned."""
    width, ascent, descent = label_size(label)
    left, base = -width / 2, (descent - ascent) / 2
    found = [TextRun(label.text, left, base, label.size, label.style)]
    if label.subscript:
        across = text_width(label.text, label.size, label.style) + 0.03 * label.size * POINT
        drop = SUBSCRIPT_DROP * label.size * POINT
        found.append(TextRun(label.subscript, left + across, base - drop, subscript_size(label.size), "plain"))
    return tuple(run for run in found if run.text)


def line_box(start: Point, end: Point, width: float) -> Box:
    """Return the rectangle of a line of a given width."""
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = math.hypot(dx, dy)
    cos, sin = (dx / length, dy / length) if length else (1.0, 0.0)
    return Box((start[0] + end[0]) / 2, (start[1] + end[1]) / 2, length / 2, width / 2, cos, sin)


def touch(first: Box, second: Box, gap: float = 0.0) -> bool:
    """Return whether two rectangles overlap or come closer than a gap (by separating axes)."""
    dx, dy = second.x - first.x, second.y - first.y
    for box in (first, second):
        for ux, uy in ((box.cos, box.sin), (-box.sin, box.cos)):
            if abs(dx * ux + dy * uy) >= first.reach(ux, uy) + second.reach(ux, uy) + gap - 1e-9:
                return False
    return True


def boxes_of(mark: Stroke | Arrow | Ring | Label) -> Iterator[Box]:
    """Yield the rectangles that cover a mark."""
    if isinstance(mark, Label):
        yield box_of(mark)
    elif isinstance(mark, Ring):
        yield Box(*mark.centre, mark.diameter / 2, mark.diameter / 2)
    elif isinstance(mark, Arrow):
        dx, dy = mark.tip[0] - mark.tail[0], mark.tip[1] - mark.tail[1]
        length = math.hypot(dx, dy) or 1.0
        share = min(1.0, mark.head_length / length)
        neck = (mark.tip[0] - share * dx, mark.tip[1] - share * dy)
        yield line_box(mark.tail, neck, mark.width)
        yield line_box(neck, mark.tip, mark.head_width)
    else:
        points = (*mark.points, mark.points[0]) if mark.closed else mark.points
        for start, end in itertools.pairwise(points):
            yield line_box(start, end, mark.width)


class Obstacles:
    """Boxes already on the drawing, found again by place (a grid of squares, so that large drawings stay quick)."""

    SQUARE: Final = 8.0

    def __init__(self) -> None:
        self._squares: dict[tuple[int, int], list[tuple[Box, tuple[float, float, float, float], bool]]] = {}

    def _covered(self, bounds: tuple[float, float, float, float]) -> Iterator[tuple[int, int]]:
        left, lower, right, upper = bounds
        for column in range(math.floor(left / self.SQUARE), math.floor(right / self.SQUARE) + 1):
            for row in range(math.floor(lower / self.SQUARE), math.floor(upper / self.SQUARE) + 1):
                yield column, row

    def add(self, boxes: Iterable[Box], *, lettering: bool = False) -> None:
        """Take up boxes; ``lettering`` marks those of labels, which may never be written over."""
        for box in boxes:
            for piece in _in_pieces(box, 2 * self.SQUARE):
                bounds = piece.bounds
                for square in self._covered(bounds):
                    self._squares.setdefault(square, []).append((piece, bounds, lettering))

    def hits(self, box: Box, gap: float = 0.25) -> tuple[int, int]:
        """Return how many labels and how many other boxes a box would touch."""
        upright = box.is_upright
        letters: set[int] = set()
        lines: set[int] = set()
        left, lower, right, upper = box.bounds
        slack = gap - UPRIGHT  # what only just keeps the gap does not touch
        left, lower, right, upper = left - slack, lower - slack, right + slack, upper + slack
        for square in self._covered((left, lower, right, upper)):
            for other, (west, south, east, north), lettering in self._squares.get(square, ()):
                if west > right or east < left or south > upper or north < lower:
                    continue
                if (upright and other.is_upright) or touch(box, other, gap):
                    (letters if lettering else lines).add(id(other))
        return len(letters), len(lines)


def _in_pieces(box: Box, longest: float) -> Iterator[Box]:
    """Split a long thin box, so that an oblique bar does not fill every square of its upright box."""
    count = max(1, math.ceil(2 * box.half_width / longest))
    half = box.half_width / count
    for place in range(count):
        along = -box.half_width + (2 * place + 1) * half
        yield Box(box.x + along * box.cos, box.y + along * box.sin, half, box.half_height, box.cos, box.sin)


def overlaps(figure: Figure) -> tuple[tuple[Label, Label], ...]:
    """Return all pairs of labels of a figure that overlap.

    Examples
    --------
    >>> apart = (Label((0, 0), "U1", 8), Label((9, 0), "U2", 8))
    >>> overlaps(Figure(20, 5, apart, "", ""))
    ()
    """
    labels = [(mark, box_of(mark)) for mark in figure.marks if isinstance(mark, Label)]
    labels.sort(key=lambda item: item[1].bounds[0])
    found = []
    for place, (label, box) in enumerate(labels):
        right = box.bounds[2]
        for other, its_box in labels[place + 1 :]:
            if its_box.bounds[0] > right:
                break
            if touch(box, its_box):
                found.append((label, other))
    return tuple(found)
