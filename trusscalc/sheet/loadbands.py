"""Spread loads on paper: a band as high as the load is intense, with small arrows the way it acts."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

from trusscalc.sheet.board import LIGHT, THIN, Board, along
from trusscalc.sheet.lettering import Point
from trusscalc.sheet.marks import Arrow, Stroke

ARROW_SPACING: Final = 4.0
LEVEL_SPACING: Final = 6.5
LEVEL_ARROW: Final = 4.0
HEAD: Final = (1.5, 0.9)
LOWEST_ARROW: Final = 1.2
"""Height of a band, mm, below which it holds no arrow."""


@dataclass(frozen=True, slots=True)
class Band:
    """A spread load to be drawn.

    Attributes
    ----------
    base : (Point, Point)
        The edge along which it acts, from its start to its end, mm.
    heights : (float, float)
        How high it is at both ends, mm.
    side : Point
        Unit vector from the base to the other edge.
    way : Point
        Unit vector in which the load acts.
    lengthwise : bool
        Whether its arrows lie in the band, for a load along its line, instead of standing between the edges.
    """

    base: tuple[Point, Point]
    heights: tuple[float, float]
    side: Point
    way: Point
    lengthwise: bool = False

    def at(self, share: float) -> tuple[Point, Point]:
        """Return the points of base and other edge at a share of the length."""
        (x0, y0), (x1, y1) = self.base
        foot = x0 + share * (x1 - x0), y0 + share * (y1 - y0)
        height = self.heights[0] + share * (self.heights[1] - self.heights[0])
        return foot, along(foot, self.side, height)

    @property
    def outer(self) -> tuple[Point, Point]:
        """The edge away from the base."""
        return self.at(0.0)[1], self.at(1.0)[1]


def draw_band(board: Board, band: Band) -> None:
    """Draw a band with its arrows."""
    (a, b), (c, d) = band.base, band.outer
    corners = tuple(dict.fromkeys((a, c, d, b)))
    board.put("symbol", Stroke(corners, THIN, closed=True))
    for tail, tip in _arrows(band):
        width = LIGHT if math.dist(tail, tip) > 2 * HEAD[0] else THIN
        board.put("symbol", Arrow(tail, tip, width, head_length=HEAD[0], head_width=HEAD[1]))


def _arrows(band: Band) -> Iterator[tuple[Point, Point]]:
    length = math.dist(*band.base)
    if band.lengthwise:
        count = max(1, math.floor(length / LEVEL_SPACING))
        half = min(LEVEL_ARROW, length) / 2
        for number in range(count):
            foot, edge = band.at((number + 0.5) / count)
            if math.dist(foot, edge) >= LOWEST_ARROW:
                middle = ((foot[0] + edge[0]) / 2, (foot[1] + edge[1]) / 2)
                yield along(middle, band.way, -half), along(middle, band.way, half)
        return
    presses = band.way[0] * band.side[0] + band.way[1] * band.side[1] < 0
    count = max(1, round(length / ARROW_SPACING))
    for number in range(count + 1):
        foot, edge = band.at(number / count)
        if math.dist(foot, edge) >= LOWEST_ARROW:
            yield (edge, foot) if presses else (foot, edge)


def level_band(start: float, end: float, level: float, height: float) -> Band:
    """Return a band of even height on a level base that presses downwards."""
    low, high = sorted((start, end))
    return Band(((low, level), (high, level)), (height, height), (0.0, 1.0), (0.0, -1.0))
