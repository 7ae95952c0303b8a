"""Hatching: areas told apart by the direction of thin lines, interrupted where something is lettered."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Sequence
from typing import Final

from trusscalc.sheet.board import SHORTEST, THIN, Board, Layer
from trusscalc.sheet.lettering import Box, Point, box_of, line_box
from trusscalc.sheet.marks import Ink, Label, Mark

LETTER_GAP: Final = 0.6
"""How far a hatching line keeps from lettering, mm."""
UPRIGHT: Final = 90.0
OBLIQUE: Final = 45.0
EDGE: Final = 1e-6

Segment = tuple[Point, Point]


def hatched(outline: Sequence[Point], angle: float, spacing: float) -> Iterator[Segment]:
    """Yield the lines that hatch an area.

    Parameters
    ----------
    outline : sequence of (x, y)
        Corners of the area in order, mm; it need not be convex.
    angle : float
        Direction of the lines in degrees.
    spacing : float
        Their distance, mm; lines of neighbouring areas with the same angle lie on one raster.

    Examples
    --------
    >>> ((u, v),) = hatched([(0.0, 0.0), (2.0, 0.0), (2.0, 2.0), (0.0, 2.0)], 90.0, 1.0)
    >>> round(u[0], 3), round(u[1], 3), round(v[0], 3), round(v[1], 3)
    (1.0, 0.0, 1.0, 2.0)
    """
    turn = math.radians(angle)
    cos, sin = math.cos(turn), math.sin(turn)
    # turned so that the hatching lies level: u along the lines, v across them
    corners = [(x * cos + y * sin, -x * sin + y * cos) for x, y in outline]
    levels = [v for _, v in corners]
    # a line that only just meets the edge is none
    first, last = math.floor(min(levels) / spacing + EDGE) + 1, math.ceil(max(levels) / spacing - EDGE) - 1
    for number in range(first, last + 1):
        v = number * spacing
        crossings = sorted(
            a + (b - a) * (v - low) / (high - low)
            for (a, low), (b, high) in itertools.pairwise([*corners, corners[0]])
            if (low <= v) != (high <= v)
        )
        for u0, u1 in zip(crossings[::2], crossings[1::2], strict=True):
            if u1 - u0 > SHORTEST:
                yield (u0 * cos - v * sin, u0 * sin + v * cos), (u1 * cos - v * sin, u1 * sin + v * cos)


def interrupted(line: Segment, boxes: Iterable[Box], gap: float = LETTER_GAP) -> list[Segment]:
    """Return what is left of a line outside lettering.

    Examples
    --------
    >>> interrupted(((0.0, 0.0), (10.0, 0.0)), [Box(5.0, 0.0, 1.0, 1.0)], gap=0.5)
    [((0.0, 0.0), (3.5, 0.0)), ((6.5, 0.0), (10.0, 0.0))]
    """
    (x0, y0), (x1, y1) = line
    free = [(0.0, 1.0)]
    for box in boxes:
        inside = _inside(line, box, gap)
        if inside is None:
            continue
        low, high = inside
        free = [piece for a, b in free for piece in ((a, min(b, low)), (max(a, high), b)) if piece[1] > piece[0]]
    length = math.dist(*line)
    return [
        ((x0 + a * (x1 - x0), y0 + a * (y1 - y0)), (x0 + b * (x1 - x0), y0 + b * (y1 - y0)))
        for a, b in free
        if (b - a) * length > SHORTEST
    ]


def _inside(line: Segment, box: Box, gap: float) -> tuple[float, float] | None:
    """Return between which shares of its length a line runs inside a box, None when it passes by."""
    low, high = 0.0, 1.0
    ends = [(x - box.x, y - box.y) for x, y in line]
    for half, (ux, uy) in (
        (box.half_width + gap, (box.cos, box.sin)),
        (box.half_height + gap, (-box.sin, box.cos)),
    ):
        a, b = (x * ux + y * uy for x, y in ends)
        if abs(b - a) < SHORTEST:
            if abs(a) >= half:
                return None
            continue
        enter, leave = sorted(((-half - a) / (b - a), (half - a) / (b - a)))
        low, high = max(low, enter), min(high, leave)
    return (low, high) if high > low else None


class HatchedBoard(Board):
    """A drawing board whose thin lines wait until everything is lettered, and then give way to the lettering."""

    def __init__(self) -> None:
        super().__init__()
        self._lettered: list[Box] = []
        self._waiting: list[tuple[Segment, Ink]] = []

    def put(self, layer: Layer, *marks: Mark, room: bool = True) -> None:
        """Draw marks; see ``Board.put``."""
        super().put(layer, *marks, room=room)
        self._lettered += [box_of(mark) for mark in marks if isinstance(mark, Label)]

    def thin(self, lines: Iterable[Segment], *, ink: Ink = "grey") -> None:
        """Note thin lines, which take no room from labels."""
        self._waiting += [(line, ink) for line in lines]

    def draw_thin(self) -> None:
        """Draw the thin lines noted, interrupted at all lettering so far."""
        for line, ink in self._waiting:
            left, lower, right, upper = line_box(*line, LETTER_GAP).bounds
            near = [
                box
                for box in self._lettered
                if (bounds := box.bounds)[0] <= right + LETTER_GAP
                and bounds[2] >= left - LETTER_GAP
                and bounds[1] <= upper + LETTER_GAP
                and bounds[3] >= lower - LETTER_GAP
            ]
            for start, end in interrupted(line, near):
                self.line(start, end, width=THIN, layer="dimension", ink=ink, room=False)
        self._waiting.clear()
