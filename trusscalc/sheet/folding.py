"""Long bodies with a stretch left out: positions along the body's length, with gaps closed up.

Stretches that matter are drawn at true scale; what lies between two of them is drawn as a gap of fixed width,
bounded by break lines.
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.exact import ZERO, Exact
from trusscalc.sheet.board import THIN, Board
from trusscalc.sheet.equations import MOST_LOADS
from trusscalc.sheet.lettering import Point
from trusscalc.statics.cuts import Structure
from trusscalc.statics.steps import Equation, Term

GAP_WIDTH: Final = 9.0
"""Width on paper of a stretch left out, mm."""


@dataclass(frozen=True, slots=True)
class Fold:
    """Which stretches along an axis are drawn, and where they come to lie.

    Attributes
    ----------
    axis : int
        0 along x, 1 along y.
    drawn : tuple of (float, float)
        Stretches drawn at true scale, in mm before folding, in order; empty when nothing is left out.
    """

    axis: int
    drawn: tuple[tuple[float, float], ...] = ()

    def at(self, u: float) -> float:
        """Return where a position along the axis comes to lie."""
        if not self.drawn:
            return u
        start = place = self.drawn[0][0]
        if u <= start:
            return u
        end = start
        for index, (low, high) in enumerate(self.drawn):
            if index:
                if u < low:
                    return place + GAP_WIDTH * (u - end) / (low - end)
                place += GAP_WIDTH
            if u <= high:
                return place + u - low
            place += high - low
            end = high
        return place + u - end

    def place(self, point: tuple[float, float]) -> tuple[float, float]:
        """Return where a point comes to lie."""
        if self.axis == 0:
            return self.at(point[0]), point[1]
        return point[0], self.at(point[1])

    def holds(self, u: float) -> bool:
        """Return whether a position lies in a stretch that is drawn."""
        return not self.drawn or any(low <= u <= high for low, high in self.drawn)

    @property
    def gaps(self) -> tuple[tuple[float, float], ...]:
        """The stretches left out, in mm before folding."""
        return tuple((first[1], second[0]) for first, second in itertools.pairwise(self.drawn))

    def pieces(self, first: tuple[float, float], second: tuple[float, float]) -> list[tuple[Point, Point]]:
        """Return the pieces of a line that lie in drawn stretches, folded."""
        if not self.drawn:
            return [(first, second)]
        u0, u1 = first[self.axis], second[self.axis]
        if u0 > u1:
            first, second, u0, u1 = second, first, u1, u0
        found = []
        for low, high in self.drawn:
            if u1 < low or u0 > high:
                continue
            ends = []
            for limit, point, outside in ((low, first, u0 < low), (high, second, u1 > high)):
                if outside:
                    share = (limit - u0) / (u1 - u0)
                    point = (first[0] + share * (second[0] - first[0]), first[1] + share * (second[1] - first[1]))  # noqa: PLW2901
                ends.append(point)
            shift = self.at(low) - low
            moved = [(x + shift, y) if self.axis == 0 else (x, y + shift) for x, y in ends]
            found.append((moved[0], moved[1]))
        return found


def folded(axis: int, wanted: Sequence[tuple[float, float]], whole: tuple[float, float]) -> Fold:
    """Return a fold that draws the wanted stretches; stretches with little between them become one."""
    merged: list[list[float]] = []
    for low, high in sorted(wanted):
        low, high = max(low, whole[0]), min(high, whole[1])  # noqa: PLW2901
        if merged and low - merged[-1][1] < 2 * GAP_WIDTH:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    if len(merged) == 1 and merged[0][0] <= whole[0] and merged[0][1] >= whole[1]:
        return Fold(axis)
    return Fold(axis, tuple((low, high) for low, high in merged))


@dataclass(frozen=True, slots=True)
class Resultant:
    """The resultant of parallel loads left out of a drawing.

    Attributes
    ----------
    axis : str
        ``x`` or ``y``: the direction of the loads.
    size : Exact
        Their sum, positive for the direction it is drawn in.
    direction : (float, float)
        Unit vector it acts along.
    x, y : Exact
        A point of its line of action.
    joints : tuple of str
        The loaded joints, in order along the body.
    """

    axis: Literal["x", "y"]
    size: Exact
    direction: Point
    x: Exact
    y: Exact
    joints: tuple[str, ...]


def collected(equation: Equation) -> tuple[Term, ...]:
    """Return the load terms an equation writes as their resultant: all of them when they are many."""
    loads = tuple(term for term in equation.terms if term.kind == "load")
    return loads if len(loads) > MOST_LOADS else ()


def resultant_of(structure: Structure, joints: Sequence[str], axis: Literal["x", "y"]) -> Resultant:
    """Return the resultant of one component of the loads on several joints; size zero when they sum to zero."""
    index = "xy".index(axis)
    total, x, y = ZERO, ZERO, ZERO
    for name in joints:
        joint, size = structure.joints[name], structure.loads[name][index]
        total, x, y = total + size, x + size * joint.x, y + size * joint.y
    ordered = sorted(joints, key=lambda name: (float(structure.joints[name].x), float(structure.joints[name].y)))
    way = (1.0, 0.0) if axis == "x" else (0.0, 1.0)
    if not total or (x / total).symbols or (y / total).symbols:
        return Resultant(axis, ZERO, way, ZERO, ZERO, tuple(ordered))
    back = total.reads_negative()
    direction = (-way[0], -way[1]) if back else way
    return Resultant(axis, -total if back else total, direction, x / total, y / total, tuple(ordered))


def break_line(board: Board, axis: int, place: float, low: float, high: float) -> None:
    """Draw a break line across a body: straight with a zigzag in the middle."""
    middle = (low + high) / 2
    points = [(place, low), (place, middle - 1.5), (place + 1.3, middle - 0.5), (place - 1.3, middle + 0.5)]
    points += [(place, middle + 1.5), (place, high)]
    board.line(*(point if axis == 0 else (point[1], point[0]) for point in points), width=THIN)
