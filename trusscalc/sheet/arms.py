"""The lengths a moment equation uses, found in its terms and drawn from its centre."""

from __future__ import annotations

from typing import Protocol

from trusscalc.exact import Exact
from trusscalc.sheet.board import LIGHT, SMALL_SIZE, Board, along, around, unit
from trusscalc.sheet.dimensions import level_dimension, running_dimension
from trusscalc.sheet.folding import Fold, Resultant, collected
from trusscalc.sheet.inscriptions import Scale, arm
from trusscalc.sheet.lettering import Point
from trusscalc.sheet.marks import Label
from trusscalc.sheet.symbols import (
    Sketch,
)
from trusscalc.statics.cuts import About, Structure
from trusscalc.statics.steps import Equation, Term


class _Ground(Protocol):
    """What the arms need of a drawing of a free body."""

    board: Board
    sketch: Sketch
    structure: Structure
    scale: Scale
    fold: Fold
    kept: dict[str, None]
    arms: list[tuple[Resultant, Equation]]

    def centre(self, about: About) -> Point: ...

    def is_near(self, about: About) -> bool: ...


Ticks = dict[float, tuple[str, float]]
"""Coordinate on paper to the text of the distance and how far back its extension line starts."""


def draw_arms(drawing: _Ground, equation: Equation) -> None:
    """Draw the lengths of a moment equation: level ones below the body, upright ones beside it."""
    level, upright = _ticks(drawing, equation)
    board, about = drawing.board, equation.about
    centre, near = drawing.centre(about), drawing.is_near(about)
    if level:
        ticks = [(u, text, height) for u, (text, height) in sorted(level.items())]
        running_dimension(board, centre[0] if near else None, ticks, board.bounds[1] - 4.5, towards=centre[0])
    left, _, right, _ = board.bounds
    xs = [x for x, _ in drawing.sketch.place.values()]
    side = right + 3.8 if centre[0] >= (min(xs) + max(xs)) / 2 else left - 3.8
    if len(upright) == 1 and near:
        ((v, (text, u)),) = upright.items()
        level_dimension(board, centre, (u, v), side, text, upright=True)
    elif upright:
        ticks = [(v, text, u) for v, (text, u) in sorted(upright.items())]
        running_dimension(board, centre[1] if near else None, ticks, side, towards=centre[1], upright=True)


def _ticks(drawing: _Ground, equation: Equation) -> tuple[Ticks, Ticks]:
    """Return where level and upright distances end."""
    both: tuple[Ticks, Ticks] = ({}, {})
    about = equation.about

    def note(axis: int, length: Exact, spot: Point) -> None:
        if length:
            both[axis][round(spot[axis], 6)] = (arm(abs(length)), spot[1 - axis])

    summed = {id(term) for term in collected(equation)}
    for term in equation.terms:
        joint, has_x, has_y = _acts_at(drawing, term)
        if id(term) in summed or joint not in drawing.sketch.place:
            continue
        place, spot = drawing.structure.joints[joint], drawing.sketch.place[joint]
        if has_y:
            note(0, place.x - about.x, spot)
        if has_x:
            note(1, place.y - about.y, spot)
    for item, its_equation in drawing.arms:
        if its_equation is equation:
            spot = drawing.fold.place((float(item.x) * drawing.scale.paper, float(item.y) * drawing.scale.paper))
            note(0, item.x - about.x, spot) if item.axis == "y" else note(1, item.y - about.y, spot)
    return both


def _acts_at(drawing: _Ground, term: Term) -> tuple[str, bool, bool]:
    """Return the body's joint a force acts at, and whether it has a level and an upright part."""
    if term.kind == "load":
        return term.name, term.axis == "x", term.axis == "y"
    bar = drawing.structure.bars[term.name]
    return bar.start if bar.start in drawing.kept else bar.end, bool(bar.dx), bool(bar.dy)


def point_to_centre(board: Board, place: Point, about: About) -> None:
    """Point towards a moment centre off the paper and say where it is."""
    left, lower, right, upper = board.bounds
    middle = ((left + right) / 2, (lower + upper) / 2)
    way = unit(middle, place)
    spot = (left - 2.0 if way[0] < 0 else right + 2.0, middle[1] + 12.0 * way[1])
    if abs(way[0]) < abs(way[1]):
        spot = (middle[0] + 12.0 * way[0], lower - 3.0 if way[1] < 0 else upper + 3.0)
    board.arrow(spot, along(spot, way, 7.0), width=LIGHT, ink="accent", small=True)
    at = f"({arm(about.x)}, {arm(about.y)})"
    text = f"moment centre {about.joint} at {at}" if about.joint else f"moment centre at {at}"
    label = Label(spot, text, SMALL_SIZE, ink="accent")
    back = (-way[0], -way[1])
    level = [(0.0, 1.0), (0.0, -1.0)]
    board.write([*around(spot, label, 1.0, [back, *level]), *around(along(spot, way, 3.5), label, 4.5, level)])
