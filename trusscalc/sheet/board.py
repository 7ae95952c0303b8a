"""The drawing board: marks collected in layers, and labels put where there is room.

Coordinates are millimetres on paper from any origin; finishing the figure moves everything to the lower
left corner. Labels look for room among what is drawn already, so lines come first.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import replace
from typing import Final, Literal

from trusscalc.sheet.lettering import Box, Obstacles, Point, box_of, boxes_of
from trusscalc.sheet.marks import Arrow, Figure, Ink, Label, Mark, Ring, Stroke

THIN: Final = 0.18
MEDIUM: Final = 0.35
LIGHT: Final = 0.25
HEAVY: Final = 0.70
SOUGHT: Final = 0.50
TIE: Final = 0.45
STRUT: Final = 1.15
STRUT_INSIDE: Final = 0.62
JOINT: Final = 1.5
FORCE_SIZE: Final = 8.5
VALUE_SIZE: Final = 8.0
SMALL_SIZE: Final = 7.5
SLOPE_SIZE: Final = 7.0
CENTRE: Final = 3.5
CENTRE_DOT: Final = 1.2
CENTRE_GAP: Final = CENTRE / 2 + 0.4
"""Bars stop so far from a moment centre drawn at their joint."""
FULL_WIDTH: Final = 170.0
"""Text width of a sheet, mm."""
HIGHEST: Final = 110.0
MARGIN: Final = 0.5
GRID: Final = 5.0
"""Heights of figures are multiples of this, so that text beside them keeps its lines."""
SHORTEST: Final = 0.05
"""Lines and gaps shorter than this are not seen."""
LAYERS: Final = ("dimension", "bar", "inside", "symbol", "joint", "lettering")
Layer = Literal["dimension", "bar", "inside", "symbol", "joint", "lettering"]
Style = Literal["plain", "italic", "bold italic"]


def unit(start: Point, end: Point) -> Point:
    """Return the unit vector from one point to another (to the right for equal points)."""
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = math.hypot(dx, dy)
    return (dx / length, dy / length) if length else (1.0, 0.0)


def along(point: Point, direction: Point, distance: float) -> Point:
    """Return the point at a distance from another in a direction."""
    return point[0] + distance * direction[0], point[1] + distance * direction[1]


def angle_between(first: Point, second: Point) -> float:
    """Return the angle between two unit vectors in degrees, 0 to 180."""
    dot = max(-1.0, min(1.0, first[0] * second[0] + first[1] * second[1]))
    return math.degrees(math.acos(dot))


def fall_together(first: tuple[Point, Point], second: tuple[Point, Point], near: float) -> bool:
    """Return whether the second of two lines runs on the first, closer than a distance, for some of its length."""
    way = unit(*first)
    ahead = [(x - first[0][0], y - first[0][1]) for x, y in second]
    if max(abs(way[0] * y - way[1] * x) for x, y in ahead) > near:
        return False
    low, high = sorted(way[0] * x + way[1] * y for x, y in ahead)
    return min(high, math.dist(*first)) - max(low, 0.0) > SHORTEST


class Board:
    """Marks in layers, the room they take, and the labels that found none (left out, or forced over a line)."""

    def __init__(self) -> None:
        self._layers: dict[str, list[Mark]] = {layer: [] for layer in LAYERS}
        self.obstacles = Obstacles()
        self.left_out: list[Label] = []
        self.forced: list[Label] = []

    def put(self, layer: Layer, *marks: Mark, room: bool = True) -> None:
        """Draw marks; ``room`` False lets labels be written over them."""
        self._layers[layer].extend(marks)
        if room:
            for mark in marks:
                self.obstacles.add(boxes_of(mark), lettering=isinstance(mark, Label))

    def line(
        self,
        *points: Point,
        width: float,
        layer: Layer = "bar",
        ink: Ink = "black",
        room: bool = True,
        dash: Literal["solid", "section", "dashed", "break"] = "solid",
    ) -> None:
        """Draw a line through points."""
        self.put(layer, Stroke(tuple(points), width, ink, dash), room=room)

    def sense_line(self, start: Point, end: Point, sense: str | None) -> None:
        """Draw a line in the style of a sense: T single, C double, anything else thin."""
        if sense == "C":
            self.line(start, end, width=STRUT)
            self.line(start, end, width=STRUT_INSIDE, layer="inside", ink="white", room=False)
        else:
            self.line(start, end, width=TIE if sense == "T" else THIN)

    def joint(self, place: Point, *, diameter: float = JOINT) -> None:
        """Draw a joint."""
        self.put("joint", Ring(place, diameter, LIGHT))

    def moment_centre(self, place: Point) -> None:
        """Draw a moment centre: a ring with a dot."""
        self.put("joint", Ring(place, CENTRE, MEDIUM, "accent"))
        self.put("joint", Ring(place, CENTRE_DOT, THIN, "accent", "accent"))

    def arrow(
        self,
        tail: Point,
        tip: Point,
        *,
        width: float = MEDIUM,
        ink: Ink = "black",
        open_head: bool = False,
        small: bool = False,
    ) -> None:
        """Draw an arrow."""
        head = (2.2, 1.2) if small else (2.6, 1.5)
        self.put("symbol", Arrow(tail, tip, width, ink, open_head, *head))

    def write(self, places: Iterable[Label], *, must: bool = True, gap: float = 0.25) -> bool:
        """Write a label at the first of several places that is free.

        Parameters
        ----------
        places : iterable of Label
            The same label at the places to be tried, best first.
        must : bool
            When no place is free: write it where it meets only lines, and over the fewest; never over another
            label while any place is clear of labels. False: leave it out and remember it.
        gap : float
            Clearance in mm.

        Returns
        -------
        bool
            Whether it stands free of everything.
        """
        best: tuple[tuple[int, int], Label] | None = None
        for label in places:
            hits = self.obstacles.hits(box_of(label), gap)
            if hits == (0, 0):
                self.put("lettering", label)
                return True
            if best is None or hits < best[0]:
                best = (hits, label)
        if best is None:
            return False
        if must and not best[0][0]:
            self.put("lettering", best[1])
            self.forced.append(best[1])
        else:
            self.left_out.append(best[1])
        return False

    @property
    def bounds(self) -> tuple[float, float, float, float]:
        """Left, lower, right and upper edge of everything drawn."""
        edges = [box.bounds for layer in LAYERS for mark in self._layers[layer] for box in boxes_of(mark)]
        if not edges:
            return 0.0, 0.0, 0.0, 0.0
        lefts, lowers, rights, uppers = zip(*edges, strict=True)
        return min(lefts), min(lowers), max(rights), max(uppers)

    def figure(self, caption: str, alt: str, *, width: float | None = None) -> Figure:
        """Return the finished figure, everything moved to the lower left corner.

        Parameters
        ----------
        caption, alt : str
            What stands below it, and the figure in words.
        width : float, optional
            The figure's width when what is drawn is narrower (it is then centred).
        """
        left, lower, right, upper = self.bounds
        wide = right - left + 2 * MARGIN
        high = math.ceil((upper - lower + 2 * MARGIN) / GRID - 1e-6) * GRID
        full = max(wide, width or 0.0)
        dx = MARGIN - left + (full - wide) / 2
        dy = (high - (upper - lower)) / 2 - lower
        marks = tuple(moved(mark, dx, dy) for layer in LAYERS for mark in self._layers[layer])
        return Figure(round(full, 2), round(high, 2), marks, caption, alt)


def moved(mark: Mark, dx: float, dy: float) -> Mark:
    """Return a mark moved; coordinates are kept to a thousandth of a millimetre."""

    def shift(point: Point) -> Point:
        return round(point[0] + dx, 3), round(point[1] + dy, 3)

    if isinstance(mark, Stroke):
        return replace(mark, points=tuple(shift(point) for point in mark.points))
    if isinstance(mark, Arrow):
        return replace(mark, tail=shift(mark.tail), tip=shift(mark.tip))
    if isinstance(mark, Ring):
        return replace(mark, centre=shift(mark.centre))
    return replace(mark, place=shift(mark.place), angle=round(mark.angle, 3))


def around(place: Point, label: Label, distance: float, directions: Iterable[Point]) -> Iterator[Label]:
    """Yield a label beside a point, its box clear of the point by a distance, in one direction after the other."""
    box = box_of(Label((0.0, 0.0), label.text, label.size, label.subscript, "centre", label.angle, style=label.style))
    for ux, uy in directions:
        # the box is pushed out until its nearest edge, not its corner, is clear: labels stay close to level
        reach = _push(box, ux, uy) + distance
        spot = place[0] + reach * ux, place[1] + reach * uy
        # written out: dataclasses.replace costs more than all the rest here
        yield Label(spot, label.text, label.size, label.subscript, angle=label.angle, ink=label.ink, style=label.style)


def along_line(start: Point, end: Point, label: Label, gap: float, inside: Point) -> Iterator[Label]:
    """Yield a label along a line, readable from below or from the right: its middle first, away from a point first."""
    way = unit(start, end)
    angle = math.degrees(math.atan2(way[1], way[0]))
    if angle > 90.001 or angle <= -89.999:  # noqa: PLR2004 - readable from below or from the right
        angle += 180.0 if angle < 0 else -180.0
    normal = (-way[1], way[0])
    middle = ((start[0] + end[0]) / 2, (start[1] + end[1]) / 2)
    outside = (middle[0] - inside[0]) * normal[0] + (middle[1] - inside[1]) * normal[1]
    sides = [normal, (-normal[0], -normal[1])] if outside >= 0 else [(-normal[0], -normal[1]), normal]
    turned = replace(label, angle=angle)
    for shift in (0.0, 0.06, -0.06, 0.12, -0.12, 0.18, -0.18):
        spot = along(middle, way, shift * math.dist(start, end))
        for side in sides:
            yield from around(spot, turned, gap, [side])


def _push(box: Box, ux: float, uy: float) -> float:
    """Return how far a box's centre must move along a direction to leave the point it stood on."""
    wide, high = abs(ux * box.cos + uy * box.sin), abs(-ux * box.sin + uy * box.cos)
    limits = [half / part for half, part in ((box.half_width, wide), (box.half_height, high)) if part > 1e-9]  # noqa: PLR2004
    return min(limits)


def compass(first: Point, count: int = 8) -> list[Point]:
    """Return directions all round, the nearest to the first one first, the right-hand side before the left."""
    start = math.atan2(first[1], first[0])
    turns = [0.0]
    for step in range(1, count // 2 + 1):
        turns += [-step * 2 * math.pi / count, step * 2 * math.pi / count]
    return [(math.cos(start + turn), math.sin(start + turn)) for turn in turns[:count]]
