"""Drawing-office symbols: supports, forces, dimensions, slope triangles, section ends.

Sizes in mm. A symbol is put on the side of its joint where no bar is in the way.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Final

from trusscalc.sheet.board import (
    CENTRE,
    HEAVY,
    LIGHT,
    MEDIUM,
    SOUGHT,
    THIN,
    Board,
    along,
    angle_between,
    around,
    compass,
    unit,
)
from trusscalc.sheet.lettering import Point, box_of, touch
from trusscalc.sheet.marks import Ink, Label, Ring, Stroke
from trusscalc.sheet.sections import SectionLine
from trusscalc.truss import Support, Truss

FORCE_SIZE: Final = 8.5
VALUE_SIZE: Final = 8.0
SMALL_SIZE: Final = 7.5
SLOPE_SIZE: Final = 7.0
LOAD_LENGTH: Final = 8.0
GAP: Final = 1.2
PIN_WIDTH: Final = 4.2
PIN_DEPTH: Final = 3.4
GROUND_LINE: Final = 6.6
ROLLER_GAP: Final = 0.9
LINK_LENGTH: Final = 5.0
STROKE_LENGTH: Final = 2.3
CLEAR_ANGLE: Final = 28.0
DOWN: Final = (0.0, -1.0)


@dataclass
class Sketch:
    """A truss (or part of one) on the board: where its joints are, and which directions are taken there."""

    board: Board
    place: Mapping[str, Point]
    taken: dict[str, list[Point]] = field(default_factory=dict)

    def take(self, joint: str, direction: Point) -> None:
        """Note that something leaves a joint in a direction."""
        self.taken.setdefault(joint, []).append(direction)

    def clearance(self, joint: str, direction: Point) -> float:
        """Return the angle in degrees to the nearest direction taken."""
        return min((angle_between(direction, other) for other in self.taken.get(joint, ())), default=180.0)


# --- supports ---------------------------------------------------------------------------------------------


def support_directions(sketch: Sketch, truss: Truss) -> dict[str, list[Point]]:
    """Return for each support joint the directions from it into its symbols.

    Pins are turned alike, the first of below, left, right, above that is free at all of them. A roller's symbol stands
    square to its reaction, on the side the reaction comes from, or on the other when bars are there.
    """
    pins = [support.joint for support in truss.supports if support.kind == "pin" and support.joint in sketch.place]
    sides = [DOWN, (-1.0, 0.0), (1.0, 0.0), (0.0, 1.0)]
    common = next((side for side in sides if all(sketch.clearance(j, side) >= CLEAR_ANGLE for j in pins)), None)
    found: dict[str, list[Point]] = {}
    for support in truss.supports:
        joint = support.joint
        if joint not in sketch.place:
            continue
        if support.kind == "pin":
            best = common or max(sides, key=lambda side: sketch.clearance(joint, side))
            found[joint] = [best]
            continue
        ways = []
        for link in support.links:
            ux, uy = unit((0.0, 0.0), (float(link.dx), float(link.dy)))
            behind, ahead = sketch.clearance(joint, (-ux, -uy)), sketch.clearance(joint, (ux, uy))
            ways.append((-ux, -uy) if behind >= CLEAR_ANGLE or behind >= ahead else (ux, uy))
        found[joint] = ways
    return found


def draw_support(sketch: Sketch, support: Support, ways: Sequence[Point]) -> float:
    """Draw a support's symbol and return its depth."""
    board, place = sketch.board, sketch.place[support.joint]
    for way in ways:
        sketch.take(support.joint, way)
    if support.kind == "links" and len(support.links) > 1:
        for way in ways:
            end = along(place, way, LINK_LENGTH)
            board.line(place, end, width=LIGHT, layer="symbol")
            _ground(board, along(end, way, 0.5), way, PIN_WIDTH)
            board.joint(end, diameter=1.0)
        return LINK_LENGTH + 0.5
    way = ways[0]
    across = (-way[1], way[0])
    foot = along(place, way, PIN_DEPTH)
    corners = (place, along(foot, across, PIN_WIDTH / 2), along(foot, across, -PIN_WIDTH / 2))
    board.put("symbol", Stroke(corners, LIGHT, closed=True))
    depth = PIN_DEPTH if support.kind == "pin" else PIN_DEPTH + ROLLER_GAP
    _ground(board, along(place, way, depth), way, GROUND_LINE)
    return depth


def _ground(board: Board, centre: Point, way: Point, width: float) -> None:
    across = (-way[1], way[0])
    board.line(along(centre, across, width / 2), along(centre, across, -width / 2), width=MEDIUM, layer="symbol")


# --- forces -----------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Force:
    """A load or reaction to be drawn: direction, lettering, and how it looks."""

    joint: str
    direction: Point
    value: str = ""
    name: tuple[str, str] | None = None
    ink: Ink = "black"
    reaction: bool = False
    small: bool = False


def draw_force(sketch: Sketch, force: Force, *, gap: float = GAP, length: float = LOAD_LENGTH) -> None:
    """Draw a load or reaction at its joint on the clear side, its value at the free end, its name at the shaft."""
    place, (ux, uy) = sketch.place[force.joint], force.direction
    ahead, behind = sketch.clearance(force.joint, (ux, uy)), sketch.clearance(force.joint, (-ux, -uy))
    towards = behind >= CLEAR_ANGLE or behind >= ahead
    if not force.reaction:  # a load hangs below its joint when it can, else it pushes from the other side
        towards = ahead < CLEAR_ANGLE and behind > ahead
    if towards:
        tip, tail = along(place, force.direction, -gap), along(place, force.direction, -gap - length)
        end, out = tail, (-ux, -uy)
    else:
        tail, tip = along(place, force.direction, gap), along(place, force.direction, gap + length)
        end, out = tip, (ux, uy)
    sketch.take(force.joint, out)
    width = SOUGHT if force.ink == "accent" else LIGHT if force.small else MEDIUM
    sketch.board.arrow(tail, tip, width=width, ink=force.ink, open_head=force.reaction, small=force.small)
    if force.value:
        write_at_end(sketch.board, end, out, force.value, SMALL_SIZE if force.small else VALUE_SIZE, force.ink)
    if force.name:
        label = Label(end, force.name[0], FORCE_SIZE, force.name[1], ink=force.ink, style="italic")
        sketch.board.write(beside(tail, tip, label))


def write_at_end(board: Board, end: Point, out: Point, text: str, size: float, ink: Ink = "black") -> None:
    """Write a value at the free end of an arrow; upright along the shaft when its neighbours leave no width."""
    label = Label(end, text, size, ink=ink)
    places = list(around(end, label, 0.7, [out]))
    places += list(around(end, Label(end, text, size, ink=ink, angle=90.0), 0.7, [out]))
    places += list(around(end, label, 0.9, compass(out)[1:]))
    board.write(places)


def beside(tail: Point, tip: Point, label: Label, distance: float = 0.8) -> Iterable[Label]:
    """Yield a label beside an arrow's shaft, to the right of it or above it first."""
    ux, uy = unit(tail, tip)
    sides = [(uy, -ux), (-uy, ux)]
    sides.sort(key=lambda side: (-round(side[0], 6), -round(side[1], 6)))
    if abs(uy) < 0.3:  # noqa: PLR2004 - a level arrow: above first
        sides.sort(key=lambda side: -round(side[1], 6))
    for share in (0.5, 0.75, 0.25, 1.0):
        spot = (tail[0] + share * (tip[0] - tail[0]), tail[1] + share * (tip[1] - tail[1]))
        for side in sides:
            yield from around(spot, label, distance, [side])
    yield from around(tip, label, distance, compass((ux, uy)))
    yield from around(tail, label, distance, compass((-ux, -uy)))


# --- joints and sections ----------------------------------------------------------------------------------


def name_joint(sketch: Sketch, name: str, middle: Point, *, ink: Ink = "black", distance: float = 1.1) -> None:
    """Write a joint's name where there is room: outwards from the middle of the truss first."""
    place = sketch.place[name]
    label = Label(place, name, SMALL_SIZE, ink=ink)
    outwards = 1.0 if place[1] >= middle[1] else -1.0
    side = -1.0 if place[0] <= middle[0] else 1.0
    first = [(0.0, outwards), (side * 0.8, outwards * 0.6), (-side * 0.8, outwards * 0.6), (side, 0.0), (-side, 0.0)]
    ways = [way for way in first if sketch.clearance(name, unit((0, 0), way)) > CLEAR_ANGLE]
    rest = [way for way in compass((side, 0.0), 16) if way not in ways]
    ways += sorted(rest, key=lambda way: -round(min(sketch.clearance(name, way), 40.0)))
    units = [unit((0.0, 0.0), way) for way in ways]
    sketch.board.write([*around(place, label, distance, units), *around(place, label, distance + 1.2, units)])


def draw_section_line(board: Board, line: SectionLine, letter: str, kept: Point) -> None:
    """Draw a section line with thick ends, viewing arrows towards the kept part, and its letter."""
    points = (*line.points, line.points[0]) if line.closed else line.points
    board.line(*points, width=LIGHT, layer="symbol", dash="section")
    label = Label((0.0, 0.0), letter, 9.0, style="bold italic")
    if line.closed:
        board.write(around(line.points[0], label, 1.2, compass((0.0, 1.0))))
        return
    for end, inner in ((line.points[0], line.points[1]), (line.points[-1], line.points[-2])):
        back = unit(end, inner)
        board.line(end, along(end, back, 3.2), width=HEAVY, layer="symbol")
        normal = (-back[1], back[0])
        if (kept[0] - end[0]) * normal[0] + (kept[1] - end[1]) * normal[1] < 0:
            normal = (back[1], -back[0])
        board.arrow(end, along(end, normal, 5.0), width=LIGHT)
        board.write(around(end, label, 0.9, [(-normal[0], -normal[1]), (-back[0], -back[1]), *compass(normal)]))


# --- dimensions -------------------------------------------------------------------------------------------


def tick(board: Board, place: Point) -> None:
    """Draw the oblique stroke that ends a dimension."""
    half = STROKE_LENGTH / 2 * 0.7071
    board.line((place[0] - half, place[1] - half), (place[0] + half, place[1] + half), width=MEDIUM, layer="dimension")


def level_dimension(board: Board, start: Point, end: Point, level: float, text: str, *, upright: bool = False) -> None:
    """Draw a dimension between two points: on a level line at a height, or on an upright line at a distance."""

    def turned(u: float, v: float) -> Point:
        return (v, u) if upright else (u, v)

    axis = 1 if upright else 0
    u0, u1 = sorted((start[axis], end[axis]))
    for point in (start, end):
        side = 1.0 if level > point[1 - axis] else -1.0
        first = turned(point[axis], point[1 - axis] + side * 2.0)
        board.line(
            first, turned(point[axis], level + side * 1.2), width=THIN, layer="dimension", ink="grey", room=False
        )
    board.line(turned(u0, level), turned(u1, level), width=THIN, layer="dimension")
    tick(board, turned(u0, level))
    tick(board, turned(u1, level))
    middle = turned((u0 + u1) / 2, level)
    label = Label(middle, text, SMALL_SIZE, angle=90.0 if upright else 0.0)
    out = [(-1.0, 0.0), (1.0, 0.0)] if upright else [(0.0, 1.0), (0.0, -1.0)]
    board.write([*around(middle, label, 0.7, out), *_outside(turned, u0, u1, level, label)])


def _outside(turned, u0: float, u1: float, level: float, label: Label) -> Iterable[Label]:  # type: ignore[no-untyped-def]
    """Yield places of a dimension's text beyond its ends, for a dimension shorter than its text."""
    along_it = turned(1.0, 0.0)
    yield from around(turned(u1, level), label, 1.8, [along_it])
    yield from around(turned(u0, level), label, 1.8, [(-along_it[0], -along_it[1])])


def running_dimension(
    board: Board, origin: float, ticks: Sequence[tuple[float, str, float]], level: float, *, upright: bool = False
) -> None:
    """Draw distances counted from a moment centre.

    Parameters
    ----------
    board : Board
        Where to draw.
    origin : float
        The centre's coordinate along the line.
    ticks : sequence of (coordinate, text, height)
        Where a distance ends, how it reads, and how far back its extension line starts.
    level : float
        The line's own place across.
    """

    def turned(u: float, v: float) -> Point:
        return (v, u) if upright else (u, v)

    places = sorted({origin, *(u for u, _, _ in ticks)})
    board.line(turned(places[0], level), turned(places[-1], level), width=THIN, layer="dimension")
    for u, _, height in ticks:
        side = 1.0 if height > level else -1.0
        if abs(height - level) > 2.0:  # noqa: PLR2004 - no room for an extension line
            board.line(
                turned(u, level + side * 4.2), turned(u, level - side * 1.2), width=THIN, layer="dimension", ink="grey"
            )
        tick(board, turned(u, level))
    board.put("joint", Ring(turned(origin, level), JOINT_MARK, MEDIUM, "accent"))
    texts = [(origin, "0"), *((u, text) for u, text, _ in ticks)]
    labels = [Label(turned(u, level), text, SMALL_SIZE) for u, text in texts]
    out = (1.0, 0.0) if upright else (0.0, -1.0)
    placed = [next(iter(around(label.place, label, 1.5, [out]))) for label in labels]
    crowded = any(touch(box_of(a), box_of(b), 0.4) for i, a in enumerate(placed) for b in placed[i + 1 :])
    for label in labels:
        turned_label = Label(label.place, label.text, SMALL_SIZE, angle=90.0)
        first, second = (turned_label, label) if crowded and not upright else (label, turned_label)
        board.write(
            [
                *around(label.place, first, 1.5, [out]),
                *around(label.place, second, 1.5, [out]),
                *around(label.place, first, 1.5, [(-out[0], -out[1])]),
                *around(label.place, first, 4.8, [out]),
            ]
        )


JOINT_MARK: Final = 1.5
CENTRE_GAP: Final = CENTRE / 2 + 0.4


def slope_triangle(board: Board, start: Point, direction: Point, legs: tuple[str, str]) -> None:
    """Draw a slope triangle on a line from a point on: legs level and upright, lettered, on the freer side."""
    ux, uy = direction
    size = 4.0
    trials = []
    for shift in (0.6, 2.4, 4.2, -1.2):
        a = along(start, direction, shift)
        level, upright = size * ux, size * uy
        longest = max(abs(level), abs(upright))
        level, upright = level * size / longest, upright * size / longest
        b = (a[0] + level, a[1] + upright)
        for corner in ((b[0], a[1]), (a[0], b[1])):
            trials.append((a, b, corner))
    best = None
    for a, b, corner in trials:
        below = corner[1] == a[1]
        beside_x = b[0] if below else a[0]
        level_side = (0.0, -1.0 if (b[1] > a[1]) == below else 1.0)
        upright_side = (1.0 if (b[0] > a[0]) == below else -1.0, 0.0)
        level_middle = ((a[0] + b[0]) / 2, corner[1])
        upright_middle = (beside_x, (a[1] + b[1]) / 2)
        texts = [
            next(iter(around(level_middle, Label(level_middle, legs[0], SLOPE_SIZE), 0.4, [level_side]))),
            next(iter(around(upright_middle, Label(upright_middle, legs[1], SLOPE_SIZE), 0.5, [upright_side]))),
        ]
        hits = [board.obstacles.hits(box_of(text), 0.15) for text in texts]
        cost = (sum(hit[0] for hit in hits), sum(hit[1] for hit in hits))
        if best is None or cost < best[0]:
            best = (cost, a, corner, b, texts)
    assert best is not None  # noqa: S101 - there are always trials
    _, a, corner, b, texts = best
    board.line(a, corner, b, width=THIN, layer="dimension")
    for text in texts:
        board.put("lettering", text)
