"""Graphic statics as figures: the force polygon of a free body, and Maxwell's diagram in Bow's notation.

Published methods: Bow, Economics of Construction in Relation to Framed Structures, 1873; Maxwell, On Reciprocal
Figures and Diagrams of Forces, 1864 (both from memory). Every point is exact; floats only draw.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Final

from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.board import (
    FORCE_SIZE,
    MEDIUM,
    SOUGHT,
    VALUE_SIZE,
    Board,
    along,
    along_line,
    around,
    compass,
    fall_together,
    unit,
)
from trusscalc.sheet.derivation import sense
from trusscalc.sheet.forcescale import Extent, force_scale
from trusscalc.sheet.inscriptions import Scale, amount
from trusscalc.sheet.lettering import Point, box_of, label_size
from trusscalc.sheet.marks import Figure, Ink, Label
from trusscalc.sheet.maxwell import maxwell_diagram
from trusscalc.sheet.reciprocal import Vector, bow_names, resultant, why_no_maxwell
from trusscalc.sheet.spaces import (
    Force,
    bar_force,
    found_forces,
    loads_on,
    member_wheel,
    numbers_of,
    seated,
    widest_corner,
)
from trusscalc.sheet.words import Symbols, bar, letters_of, listed, symbols_of
from trusscalc.sheet.words import body as body_words
from trusscalc.statics.cuts import Cut, Structure
from trusscalc.statics.steps import Step, Term

WIDE: Final = 56.0
HIGH: Final = 50.0
"""Room for the lines of a force polygon, mm."""
BESIDE: Final = 1.8
"""How far apart lines are drawn that would fall on one another."""
FORCE_GAP: Final = 0.85
SAME: Final = 0.05
FULL: Final = 360.0


def force_polygon(check: MemberCheck, step: Step) -> Figure | None:
    """Return the force polygon of a step's free body: all its forces tip to tail, clockwise round it.

    Parameters
    ----------
    check : MemberCheck
        Holds the forces.
    step : Step
        One of its steps; of several bodies the first is drawn.

    Returns
    -------
    Figure or None
        None where the sheet does not hold every force on the body, or all of them are zero.

    Notes
    -----
    The closing error is the exact sum of the forces drawn. It is printed, and a polygon that does not close says so.
    """
    structure, found = numbers_of(check), found_forces(check)
    cut = step.cut
    if any(name not in found for name in cut.bars):
        return None
    forces = [force for force in _round_body(structure, cut, found) if force.size]
    if not forces:
        return None
    forces = _known_first(forces, step.solves)
    error = resultant(forces)
    scale = _scale(check.truss.force, forces)
    board, moved_apart = _drawn(forces, scale, symbols_of(structure), set(step.solves))
    where = body_words(structure, cut, letters_of(structure, check.steps))
    return board.figure(
        _caption(check, structure, cut, found, where, scale, error, board, moved_apart), _alt(where, forces, error)
    )


# --- order ------------------------------------------------------------------------------------------------


def _round_body(structure: Structure, cut: Cut, found: Mapping[str, Exact]) -> list[Force]:
    """Return the forces on a body clockwise round it, those of zero size too."""
    kept = set(cut.kept)
    bars = []
    for name in cut.bars:
        held = structure.bars[name]
        bars.append(bar_force(structure, name, held.start if held.start in kept else held.end, found[name]))
    loads = [load for joint in cut.kept for load in loads_on(structure, joint)]
    if cut.kind == "joint":
        wheel = member_wheel(structure, cut.kept[0])
        own = {force.name: force for force in bars}
        outer = [force for force in bars if force.kind == "reaction"] + loads
        spokes = seated(wheel, outer, [widest_corner(wheel)])
        return [own[spoke.member] if spoke.force is None else spoke.force for spoke in spokes]
    spots = {joint: (float(structure.joints[joint].x), float(structure.joints[joint].y)) for joint in structure.joints}
    inside = [spots[joint] for joint in cut.kept]
    middle = (sum(x for x, _ in inside) / len(inside), sum(y for _, y in inside) / len(inside))

    def turn(force: Force) -> float:
        spot = spots[force.joint]
        if force.kind == "member":
            held = structure.bars[force.name]
            (a, b), (c, d) = spots[held.start], spots[held.end]
            spot = ((a + c) / 2, (b + d) / 2)
        return -round(math.degrees(math.atan2(spot[1] - middle[1], spot[0] - middle[0])) % FULL, 6)

    return sorted([*bars, *loads], key=turn)


def _known_first(forces: list[Force], solves: Sequence[str]) -> list[Force]:
    """Return a cyclic order begun so that what the step finds comes last and closes the polygon."""
    sought = [force.kind != "load" and force.name in solves for force in forces]
    for place in range(len(forces)):
        if sought[place - 1] and not sought[place]:
            return forces[place:] + forces[:place]
    return forces


# --- drawing ----------------------------------------------------------------------------------------------


def _vertices(forces: Sequence[Force], scale: float) -> list[Point]:
    x, y = ZERO, ZERO
    points = [(0.0, 0.0)]
    for force in forces:
        x, y = x + force.x, y + force.y
        points.append((float(x) * scale, float(y) * scale))
    return points


def _scale(unit_name: str, forces: Sequence[Force]) -> Scale:
    xs, ys = zip(*_vertices(forces, 1.0), strict=True)
    return force_scale(unit_name, Extent(max(xs) - min(xs), max(ys) - min(ys), WIDE, HIGH))


def _drawn(forces: Sequence[Force], scale: Scale, symbols: Symbols, solves: set[str]) -> tuple[Board, bool]:
    """Return the polygon, and whether lines were moved apart."""
    board = Board()
    points = _vertices(forces, scale.paper)
    middle = (sum(x for x, _ in points) / len(points), sum(y for _, y in points) / len(points))
    lines = _side_by_side(list(itertools.pairwise(points)))
    for force, (start, end) in zip(forces, lines, strict=True):
        sought = force.kind != "load" and force.name in solves
        ink: Ink = "accent" if sought else "black"
        board.arrow(start, end, width=SOUGHT if sought else MEDIUM, ink=ink, open_head=force.kind == "reaction")
    if math.dist(points[0], points[-1]) > SAME:
        board.line(points[-1], points[0], width=MEDIUM, ink="accent", dash="dashed")
    # the shortest lines have the least choice
    for force, (start, end) in sorted(zip(forces, lines, strict=True), key=lambda item: round(math.dist(*item[1]), 6)):
        sought = force.kind != "load" and force.name in solves
        name = symbols.of_bar(force.name, is_link=force.kind == "reaction")
        if force.kind == "load":
            name = symbols.of(Term("load", force.name, force.axis, ONE, ONE, ZERO))
        inked: Ink = "accent" if sought else "black"
        symbol = Label((0, 0), name.base, FORCE_SIZE, name.subscript, ink=inked, style="italic")
        _write(board, symbol, Label((0, 0), _value(force), VALUE_SIZE, ink=inked), start, end, middle)
    return board, lines != list(itertools.pairwise(points))


def _write(  # noqa: PLR0917 - two labels at one line
    board: Board, symbol: Label, value: Label, start: Point, end: Point, middle: Point
) -> None:
    """Write a force's symbol and value, one behind the other, where both have room at its line."""
    both = replace(symbol, text=f"{symbol.text} {value.text}")
    best: tuple[tuple[int, int], Label, Label] | None = None
    for trial in _places(start, end, both, middle):
        pair = _apart(trial, symbol, value)
        letters, lines = (sum(n) for n in zip(*(board.obstacles.hits(box_of(label)) for label in pair), strict=True))
        if best is None or (letters, lines) < best[0]:
            best = ((letters, lines), *pair)
        if (letters, lines) == (0, 0):
            break
    assert best is not None  # noqa: S101 - there are always trials
    if best[0][0]:
        board.left_out += best[1:]
    else:
        board.put("lettering", *best[1:])
        board.forced += best[1:] if best[0][1] else ()


def _apart(both: Label, symbol: Label, value: Label) -> tuple[Label, Label]:
    """Return symbol and value on one base line, at the two ends of the room of both."""
    turn = math.radians(both.angle)
    way, up = (math.cos(turn), math.sin(turn)), (-math.sin(turn), math.cos(turn))
    sizes = [label_size(label) for label in (both, symbol, value)]
    base, _, own_base = ((below - above) / 2 for _, above, below in sizes)
    width = sizes[0][0]
    first = along(both.place, way, (sizes[1][0] - width) / 2)
    second = along(along(both.place, way, (width - sizes[2][0]) / 2), up, base - own_base)
    return replace(symbol, place=first, angle=both.angle), replace(value, place=second, angle=both.angle)


def _value(force: Force) -> str:
    if force.kind == "member":
        return f"{amount(force.size)} {sense(force.size)}"
    return amount(abs(force.size))


def _side_by_side(lines: list[tuple[Point, Point]]) -> list[tuple[Point, Point]]:
    """Return lines moved sideways where they would fall on earlier ones."""
    placed: list[tuple[Point, Point]] = []
    for start, end in lines:
        way = unit(start, end)
        normal = max((way[1], -way[0]), (-way[1], way[0]))
        shift = 0.0
        while any(fall_together(_moved(start, end, normal, shift), other, BESIDE / 2) for other in placed):
            shift += BESIDE
        placed.append(_moved(start, end, normal, shift))
    return placed


def _moved(start: Point, end: Point, normal: Point, shift: float) -> tuple[Point, Point]:
    return along(start, normal, shift), along(end, normal, shift)


def _places(start: Point, end: Point, label: Label, middle: Point) -> Iterator[Label]:
    """Yield places of a label at a line of force: along it where it is long enough, else beside and beyond it."""
    width = label_size(label)[0]
    if math.dist(start, end) > width:
        yield from along_line(start, end, label, FORCE_GAP, middle)
    spot = ((start[0] + end[0]) / 2, (start[1] + end[1]) / 2)
    way = unit(start, end)
    outwards = (way[1], -way[0])
    if (spot[0] - middle[0]) * outwards[0] + (spot[1] - middle[1]) * outwards[1] < -SAME:
        outwards = (-outwards[0], -outwards[1])
    for distance in (1.2, 2.2, 3.4):
        yield from around(spot, label, distance, [outwards, (-outwards[0], -outwards[1])])
    for distance in (1.2, 2.2, 3.4):
        yield from around(spot, label, distance, compass(outwards, 16))
    for distance in (1.0, 2.0, 3.4, 5.0, 7.0, 9.0):
        for end_point in (start, end):
            yield from around(end_point, label, distance, compass(outwards, 16))


# --- words ------------------------------------------------------------------------------------------------


def _caption(  # noqa: PLR0917 - in one place
    check: MemberCheck,
    structure: Structure,
    cut: Cut,
    found: Mapping[str, Exact],
    where: str,
    scale: Scale,
    error: Vector,
    board: Board,
    moved_apart: bool,
) -> str:
    text = (
        f"Force polygon of the {where}, {scale.text}, clockwise round it. Forces in {check.truss.force}, as they act. "
    )
    text = text.replace("the joint", "joint")
    if moved_apart:
        text += "Lines that would fall on one another stand side by side. "
    zero = [bar(name) for name in cut.bars if not found[name]]
    if zero:
        text += f"Without force: {listed(zero)}. "
    numbers = symbols_of(structure).numbers
    told = [f"({numbers[name]}) {bar(name)}" for name in (*cut.bars, *cut.kept) if name in numbers]
    if told:
        text += f"{', '.join(told)}. "
    if check.truss.symbols or check.case.symbols:
        text += "Symbols at their values. "
    if board.left_out:
        text += f"No room for: {', '.join(label.text + label.subscript for label in board.left_out)}. "
    return text + closing(error, check.truss.force)


def closing(error: Vector, force: str) -> str:
    """Return what a polygon misses its start by, in words."""
    if not any(error):
        return "Closing error, from the exact values: 0."
    x, y = (amount(part) for part in error)
    return f"DOES NOT CLOSE: the forces add up to ({x}, {y}) {force} instead of 0, drawn dashed."


def _alt(where: str, forces: Sequence[Force], error: Vector) -> str:
    names = [f"{'load at ' * (force.kind == 'load')}{bar(force.name)} {_value(force)}" for force in forces]
    closed = "closes" if not any(error) else "does not close"
    return f"Force polygon of {where}: {listed(names)}; it {closed}."


__all__ = ["bow_names", "closing", "force_polygon", "maxwell_diagram", "why_no_maxwell"]
