"""Maxwell's diagram on paper: the truss with a letter in every space, and the diagram of its forces beside it."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from typing import Final

from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.atvalues import at_values
from trusscalc.sheet.board import (
    FULL_WIDTH,
    GRID,
    LIGHT,
    SHORTEST,
    THIN,
    VALUE_SIZE,
    Board,
    along,
    around,
    compass,
    fall_together,
    moved,
    unit,
)
from trusscalc.sheet.forcescale import Extent, force_scale
from trusscalc.sheet.inscriptions import Scale, amount, scales
from trusscalc.sheet.lettering import Point
from trusscalc.sheet.marks import Figure, Label
from trusscalc.sheet.reciprocal import Reciprocal, reciprocal
from trusscalc.sheet.spaces import Space, Spoke
from trusscalc.sheet.wholetruss import WholeTruss
from trusscalc.sheet.words import counted

ARROW: Final = 7.0
"""Length of a load or reaction in the drawing of the spaces, mm."""
ARROW_PLACE: Final = 5.6
"""Its middle from its joint."""
ROUND: Final = 22.0
"""What arrows and letters take of the room on both sides together."""
BESIDE: Final = (76.0, 84.0)
BELOW: Final = (FULL_WIDTH, 84.0)
GAP: Final = 8.0
HIGHEST_BESIDE: Final = 110.0
HIGHEST: Final = 200.0
"""Of both drawings, one below the other: what a page holds with its heading."""
RAYS: Final = 24
PANEL_TRIALS: Final = 6
TRIALS: Final = 24
"""Steps of the search for the middle of a panel, each way."""
TOLD: Final = 3


def maxwell_diagram(check: MemberCheck, *, width: float = FULL_WIDTH) -> Figure | None:
    """Return the reciprocal diagram of the whole truss in Bow's notation, None where there is none.

    Parameters
    ----------
    check : MemberCheck
        With all member forces; ``why_no_maxwell`` tells why there is no diagram.
    width : float
        Width on paper in mm.

    Notes
    -----
    Left or above the truss, a capital in every space; then the diagram of forces to a stated scale, a point with the
    same letter, small, for every space. A member is named by its two spaces; between their points lies its force,
    parallel to it, tension as a single line and compression as a double one. Positions are exact, floats only draw.
    """
    diagram = reciprocal(check)
    if diagram is None:
        return None
    spaces, scale = _spaces(check, diagram, *BESIDE)
    if spaces.left_out or spaces.forced:
        spaces, scale = _spaces(check, diagram, width, BELOW[1])
    left = spaces.figure("", "")
    beside = left.width <= BESIDE[0] + 1
    room = width - left.width - GAP if beside else width
    below = HIGHEST - left.height
    forces, force_text = _forces(check, diagram, room, HIGHEST_BESIDE if beside else below)
    if beside and forces.left_out:
        beside = False
        forces, force_text = _forces(check, diagram, width, below)
    right = forces.figure("", "")
    caption = _caption(check, diagram, scale, force_text, [*spaces.left_out, *forces.left_out])
    return _joined(left, right, width, beside=beside, caption=caption, alt=_alt(check, diagram))


def _joined(left: Figure, right: Figure, width: float, *, beside: bool, caption: str, alt: str) -> Figure:
    """Return two drawings side by side, in the middle of each other, or one below the other."""
    if beside:
        height = max(left.height, right.height)
        space = (width - left.width - right.width) / 3
        places = [(space, (height - left.height) / 2), (2 * space + left.width, (height - right.height) / 2)]
    else:
        height = left.height + right.height + GRID
        places = [((width - left.width) / 2, right.height + GRID), ((width - right.width) / 2, 0.0)]
    marks = [moved(mark, *place) for figure, place in zip((left, right), places, strict=True) for mark in figure.marks]
    return Figure(round(width, 2), round(height, 2), tuple(marks), caption, alt)


# --- the truss and its spaces -----------------------------------------------------------------------------


def _spaces(check: MemberCheck, diagram: Reciprocal, wide: float, high: float) -> tuple[Board, Scale]:
    """Return the truss with its spaces lettered, and its scale."""
    truss = at_values(check).truss
    xs, ys = ([float(part) for part in axis] for axis in zip(*((j.x, j.y) for j in truss.joints), strict=True))
    extent = (max(xs) - min(xs), max(ys) - min(ys))
    listed = scales(truss.length)
    fitting = (s for s in listed if extent[0] * s.paper <= wide - ROUND and extent[1] * s.paper <= high - ROUND)
    scale = next(fitting, listed[-1])
    drawing = WholeTruss(truss, scale)
    drawing.senses(check)
    place, board = drawing.flat, drawing.board
    for spot in place.values():
        board.joint(spot, diameter=1.0)
    for joint, wheel in diagram.notation.wheels.items():
        for spoke in wheel:
            _outer_arrow(board, place[joint], spoke)
    for space in diagram.notation.spaces:
        label = Label((0.0, 0.0), space.name, VALUE_SIZE)
        if space.outside:
            board.write(_outside(diagram, space, place, label))
        else:
            board.write(_in_panel([place[joint] for joint in space.path], label))
    return board, scale


def _outer_arrow(board: Board, joint: Point, spoke: Spoke) -> None:
    """Draw a load or reaction in its place outside, as it acts."""
    if spoke.force is None:
        return
    turn = math.radians(spoke.angle)
    middle = along(joint, (math.cos(turn), math.sin(turn)), ARROW_PLACE)
    way = unit((0.0, 0.0), (float(spoke.force.x), float(spoke.force.y)))
    tail, tip = along(middle, way, -ARROW / 2), along(middle, way, ARROW / 2)
    board.arrow(tail, tip, width=LIGHT, open_head=spoke.force.kind == "reaction", small=True)


def _in_panel(corners: Sequence[Point], label: Label) -> Iterator[Label]:
    """Yield places in a panel, those with most room round them first."""
    xs, ys = zip(*corners, strict=True)
    edges = list(zip(corners, (*corners[1:], corners[0]), strict=True))
    trials = []
    for column, row in itertools.product(range(1, TRIALS), repeat=2):
        x = min(xs) + (max(xs) - min(xs)) * column / TRIALS
        y = min(ys) + (max(ys) - min(ys)) * row / TRIALS
        if _is_inside((x, y), edges):
            trials.append((-round(min(_distance((x, y), *edge) for edge in edges), 3), round(x, 3), round(y, 3)))
    for _, x, y in sorted(trials)[:PANEL_TRIALS]:
        yield Label((x, y), label.text, label.size)


def _is_inside(point: Point, edges: Sequence[tuple[Point, Point]]) -> bool:
    x, y = point
    crossings = sum(
        (a[1] > y) != (b[1] > y) and x < a[0] + (y - a[1]) / (b[1] - a[1]) * (b[0] - a[0]) for a, b in edges
    )
    return crossings % 2 == 1


def _distance(point: Point, start: Point, end: Point) -> float:
    way = unit(start, end)
    share = (point[0] - start[0]) * way[0] + (point[1] - start[1]) * way[1]
    return math.dist(point, along(start, way, min(max(share, 0.0), math.dist(start, end))))


def _outside(diagram: Reciprocal, space: Space, place: dict[str, Point], label: Label) -> Iterator[Label]:
    """Yield places of the letter of an outer space: beside the middle of the members it runs along, outwards."""
    path = [place[joint] for joint in space.path]
    stretches = [(a, b) for a, b in itertools.pairwise(path) if math.dist(a, b) > 0]
    if not stretches:  # between two forces on one joint
        yield from _between_forces(diagram, space, path[0], label)
        return
    whole = sum(math.dist(a, b) for a, b in stretches)
    before = 0.0
    ranked = []
    for start, end in stretches:
        length = math.dist(start, end)
        ranked.append((abs(before + length / 2 - whole / 2) - length / 2, start, end))
        before += length
    for distance in (2.5, 4.0, 6.0):
        for _, start, end in sorted(ranked, key=lambda entry: round(entry[0], 3)):
            way = unit(start, end)
            outwards = (-way[1], way[0])  # a space lies to the left of the way round it
            for share in (0.5, 0.35, 0.65, 0.2, 0.8):
                spot = along(start, way, share * math.dist(start, end))
                yield from around(spot, label, distance, [outwards])


def _between_forces(diagram: Reciprocal, space: Space, spot: Point, label: Label) -> Iterator[Label]:
    """Yield places between two forces on one joint."""
    wheel = diagram.notation.wheels[space.path[0]]
    after = {between.force: between.after for between in diagram.notation.outside}
    first = next(n for n, spoke in enumerate(wheel) if spoke.force and after[spoke.force] == space.name)
    start, end = wheel[first].angle, wheel[(first + 1) % len(wheel)].angle
    width = (start - end) % 360 or 360.0
    for distance in (3.0, 5.0, 7.0, 9.0, 11.0):
        for share in (0.5, 0.35, 0.65):
            turn = math.radians(start - share * width)
            yield from around(spot, label, distance, [(math.cos(turn), math.sin(turn))])


# --- the diagram of forces --------------------------------------------------------------------------------


def _forces(check: MemberCheck, diagram: Reciprocal, wide: float, high: float) -> tuple[Board, str]:
    """Return the diagram of forces and its scale in words."""
    near = {space: (float(x), float(y)) for space, (x, y) in diagram.points.items()}
    xs, ys = zip(*near.values(), strict=True)
    scale = force_scale(check.truss.force, Extent(max(xs) - min(xs), max(ys) - min(ys), wide - 12.0, high - 12.0))
    point = {space: (x * scale.paper, y * scale.paper) for space, (x, y) in near.items()}
    board = Board()
    lines: dict[str, list[tuple[Point, Point]]] = {"T": [], "C": []}
    for between in diagram.notation.outside:
        board.line(point[between.before], point[between.after], width=LIGHT)
    for between in diagram.notation.members:
        force = between.force
        if force.size:
            start = point[between.before]
            end = (start[0] + float(force.x) * scale.paper, start[1] + float(force.y) * scale.paper)
            sense = "T" if force.size.sign() > 0 else "C"
            board.sense_line(start, end, sense)
            lines[sense].append((start, end))
    for tie in lines["T"]:
        if any(fall_together(strut, tie, SHORTEST) for strut in lines["C"]):
            board.line(*tie, width=THIN, layer="symbol", room=False)
    middle = ((max(xs) + min(xs)) * scale.paper / 2, (max(ys) + min(ys)) * scale.paper / 2)
    for names in _together(diagram):
        spot = point[names[0].upper()]
        label = Label((0.0, 0.0), ", ".join(names), VALUE_SIZE, style="italic" if names[0].isalpha() else "plain")
        board.write(_beside_point(spot, middle, label))
    return board, scale.text


def _beside_point(spot: Point, middle: Point, label: Label) -> Iterator[Label]:
    outwards = unit(middle, spot) if math.dist(middle, spot) > 1 else (1.0, 0.0)
    for distance in (0.9, 1.5, 2.4, 3.6, 5.0):
        yield from around(spot, label, distance, compass(outwards, RAYS))


# --- words ------------------------------------------------------------------------------------------------


def _caption(check: MemberCheck, diagram: Reciprocal, scale: Scale, forces: str, left_out: Sequence[Label]) -> str:
    text = (
        f"Spaces {scale.text} and Maxwell’s diagram {forces}, letters after Bow, clockwise round every joint. A member "
        "is named by the spaces on its two sides, and the points of the same letters are the ends of its force. "
        "Single line: tension; double line: compression; three lines: one on the other; thin: loads and reactions. "
    )
    together = [", ".join(names) for names in _together(diagram) if len(names) > 1]
    if together:
        text += f"Points that fall together: no force between them ({'; '.join(together)}). "
    if check.truss.symbols or check.case.symbols:
        text += "Symbols at their values. "
    if left_out:
        text += f"No room for: {', '.join(label.text for label in left_out)}. "
    return text + _closing(check, diagram)


def _together(diagram: Reciprocal) -> list[list[str]]:
    """Return the letters of every point of the diagram."""
    found: dict[object, list[str]] = {}
    for space in diagram.notation.spaces:
        found.setdefault(diagram.points[space.name], []).append(space.name.lower())
    return list(found.values())


def _closing(check: MemberCheck, diagram: Reciprocal) -> str:
    """Return whether the diagram closes, from the exact values."""
    joints = counted(len(check.truss.joints), "joint")
    if diagram.closes:
        return f"Closing error, from the exact values: 0 for loads and reactions and at each of the {joints}."
    wrong = [("loads and reactions", diagram.outer_error)] if any(diagram.outer_error) else []
    wrong += [(f"joint {joint}", error) for joint, error in diagram.joint_errors.items()]
    told = "; ".join(f"{name} by ({amount(x)}, {amount(y)}) {check.truss.force}" for name, (x, y) in wrong[:TOLD])
    more = f"; and {counted(len(wrong) - TOLD, 'other')}" if len(wrong) > TOLD else ""
    return f"DOES NOT CLOSE: {told}{more}."


def _alt(check: MemberCheck, diagram: Reciprocal) -> str:
    outside = sum(space.outside for space in diagram.notation.spaces)
    panels = len(diagram.notation.spaces) - outside
    closed = "closes" if diagram.closes else "does not close"
    return (
        f"Maxwell diagram of the truss with {counted(len(check.truss.members), 'member')}: "
        f"{counted(outside, 'outer space')}, {counted(panels, 'panel')}; it {closed}."
    )
