"""Drawing-office symbols: supports, forces, names of joints, section lines.

Sizes in mm. A symbol is put on the side of its joint where no bar is in the way.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Final

from trusscalc.sheet.board import (
    CENTRE,
    FORCE_SIZE,
    HEAVY,
    LIGHT,
    MEDIUM,
    SMALL_SIZE,
    SOUGHT,
    VALUE_SIZE,
    Board,
    along,
    angle_between,
    around,
    compass,
    unit,
)
from trusscalc.sheet.lettering import Point, box_of, boxes_of, touch
from trusscalc.sheet.marks import Arrow, Ink, Label, Stroke
from trusscalc.sheet.sections import SectionLine
from trusscalc.truss import Support, Truss

LOAD_LENGTH: Final = 8.0
GAP: Final = 1.2
PIN_WIDTH: Final = 4.2
PIN_DEPTH: Final = 3.4
GROUND_LINE: Final = 6.6
ROLLER_GAP: Final = 0.9
LINK_LENGTH: Final = 5.0
ASIDE: Final = 2.4
"""How far beside the bars in its line a force is drawn."""
CLEAR_ANGLE: Final = 28.0
EDGE: Final = 0.5
LEVEL: Final = 0.2
"""Sine below which an arrow counts as level."""
DOWN: Final = (0.0, -1.0)


@dataclass
class Sketch:
    """A truss (or part of one) on the board: where its joints are, and which directions are taken there."""

    board: Board
    place: Mapping[str, Point]
    taken: dict[str, list[Point]] = field(default_factory=dict)
    pending: list[tuple[Label, Iterator[Label]]] = field(default_factory=list)

    @property
    def middle(self) -> Point:
        """The middle of what is drawn."""
        xs, ys = zip(*self.place.values(), strict=True)
        return (min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2

    def take(self, joint: str, direction: Point) -> None:
        """Note that something leaves a joint in a direction."""
        self.taken.setdefault(joint, []).append(direction)

    def write_pending(self) -> None:
        """Write the lettering of forces; it waits until every line is drawn."""
        for first, others in self.pending:
            self.board.write(itertools.chain([first], others))
        self.pending.clear()

    def letter(self, places: Iterator[Label]) -> None:
        """Note lettering to be written once every line is drawn."""
        self.pending.append((next(places), places))

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
    """Draw a load or reaction at its joint on the clear side, its value at the free end, its name at the shaft.

    Where bars run in its line on both sides it is drawn beside them.
    """
    place, (ux, uy) = sketch.place[force.joint], force.direction
    ahead, behind = sketch.clearance(force.joint, (ux, uy)), sketch.clearance(force.joint, (-ux, -uy))
    towards = behind >= CLEAR_ANGLE or behind >= ahead
    if not force.reaction:  # a load stands outside the truss if it can: it hangs from it, or pushes at it
        inwards = ux * (sketch.middle[0] - place[0]) + uy * (sketch.middle[1] - place[1]) > EDGE
        blocked = ahead < CLEAR_ANGLE
        towards = (behind >= CLEAR_ANGLE and (inwards or blocked)) or (blocked and behind > ahead)
    if max(ahead, behind) < CLEAR_ANGLE:
        tail, tip = _beside_bars(sketch, force, length)
        towards = force.reaction
    elif towards:
        tip, tail = along(place, force.direction, -gap), along(place, force.direction, -gap - length)
    else:
        tail, tip = along(place, force.direction, gap), along(place, force.direction, gap + length)
    end, out = (tail, (-ux, -uy)) if towards else (tip, (ux, uy))
    sketch.take(force.joint, out)
    width = SOUGHT if force.ink == "accent" else LIGHT if force.small else MEDIUM
    sketch.board.arrow(tail, tip, width=width, ink=force.ink, open_head=force.reaction, small=force.small)
    if force.value:
        size = SMALL_SIZE if force.small else VALUE_SIZE
        sketch.letter(places_at_end(end, out, Label(end, force.value, size, ink=force.ink)))
    if force.name:
        label = Label(end, force.name[0], FORCE_SIZE, force.name[1], ink=force.ink, style="italic")
        sketch.letter(beside(tail, tip, label))


def _beside_bars(sketch: Sketch, force: Force, length: float) -> tuple[Point, Point]:
    """Return tail and tip of a force that is drawn beside the bars in its line, where it meets least."""
    place, (ux, uy) = sketch.place[force.joint], force.direction
    best: tuple[int, Point, Point] | None = None
    for side in ((-uy, ux), (uy, -ux)):
        for start in (GAP, -GAP - length):
            tail = along(along(place, side, ASIDE), force.direction, start)
            tip = along(tail, force.direction, length)
            cost = sum(sum(sketch.board.obstacles.hits(box)) for box in boxes_of(Arrow(tail, tip, MEDIUM)))
            if best is None or cost < best[0]:
                best = (cost, tail, tip)
    assert best is not None  # noqa: S101 - there are always four trials
    return best[1], best[2]


def places_at_end(end: Point, out: Point, label: Label) -> Iterator[Label]:
    """Yield places of a value at the free end of an arrow; upright where its neighbours leave no width."""
    yield from around(end, label, 0.7, [out])
    yield from around(end, replace(label, angle=90.0), 0.7, [out])
    yield from around(end, label, 0.9, compass(out)[1:])


def beside(tail: Point, tip: Point, label: Label, distance: float = 0.8) -> Iterator[Label]:
    """Yield a label beside an arrow's shaft, to the right of it or above it first."""
    ux, uy = unit(tail, tip)
    sides = [(uy, -ux), (-uy, ux)]
    sides.sort(key=lambda side: (-round(side[0], 6), -round(side[1], 6)))
    if abs(uy) < 0.3:  # noqa: PLR2004 - a level arrow: above first
        sides.sort(key=lambda side: -round(side[1], 6))
    for away in (distance, 2.5 * distance):
        for share in (0.6, 0.75, 0.45, 0.25, 1.0):
            spot = (tail[0] + share * (tip[0] - tail[0]), tail[1] + share * (tip[1] - tail[1]))
            for side in sides:
                yield from around(spot, label, away, [side])
    yield from around(tip, label, distance, compass((ux, uy)))
    yield from around(tail, label, distance, compass((-ux, -uy)))


def places_at_pull(tail: Point, tip: Point, label: Label, beyond: Point | None = None) -> Iterator[Label]:
    """Yield places for the name of a pull: over or under a level arrow's tip, beyond an oblique one's.

    ``beyond`` is a moment centre in which the arrow ends; the name may stand on its far side.
    """
    way = unit(tail, tip)
    if abs(way[1]) < LEVEL:
        yield from around(along(tip, way, -2.0), label, 1.0, [(0.0, 1.0), (0.0, -1.0)])
    elif abs(way[0]) < LEVEL:
        yield from around(along(tip, way, -3.0), label, 1.0, [(1.0, 0.0), (-1.0, 0.0)])
    if beyond is not None:
        right, up = math.copysign(1.0, way[0]), math.copysign(1.0, way[1])
        ways = [(0.45 * right, up), (0.45 * right, -up), (right, 0.0), (0.0, up), (0.0, -up)]
        yield from around(beyond, label, CENTRE / 2 + 0.3, [unit((0.0, 0.0), corner) for corner in ways])
    yield from around(tip, label, 0.6, [unit((0, 0), (1.0 if way[0] > 0 else -1.0, 0.3 * way[1])), way])
    yield from around(tip, label, 0.8, compass(way, 12))
    yield from beside(tail, tip, label)
    for distance in (2.0, 3.5):
        yield from around(tip, label, distance, compass(way, 12))
    yield from around(along(tip, way, -4.0), label, 1.0, compass(way, 12))


# --- joints and sections ----------------------------------------------------------------------------------


def name_joint(sketch: Sketch, name: str, middle: Point, *, ink: Ink = "black", distance: float = 1.1) -> None:
    """Write a joint's name where there is room: outwards from the middle of the truss first."""
    place = sketch.place[name]
    label = Label(place, name, SMALL_SIZE, ink=ink)
    outwards = 1.0 if place[1] >= middle[1] else -1.0
    side = -1.0 if place[0] <= middle[0] else 1.0
    if outwards > 0:
        first = [(0.0, 1.0), (side * 0.7, 0.7), (-side * 0.7, 0.7), (side, 0.0), (-side, 0.0)]
    else:
        first = [(-0.75, -0.66), (0.75, -0.66), (side * 0.7, 0.7), (side, 0.0), (0.0, -1.0), (-side, 0.0)]
    ways = [way for way in first if sketch.clearance(name, unit((0, 0), way)) > CLEAR_ANGLE]
    rest = [way for way in compass((side, 0.0), 16) if way not in ways]
    ways += sorted(rest, key=lambda way: -round(min(sketch.clearance(name, way), 40.0)))
    units = [unit((0.0, 0.0), way) for way in ways]
    sketch.board.write([*around(place, label, distance, units), *around(place, label, distance + 1.2, units)])


def draw_section_line(sketch: Sketch, line: SectionLine, letter: str, kept: Point) -> None:
    """Draw a section line with thick ends, viewing arrows towards the kept part, and its letter."""
    board = sketch.board
    points = (*line.points, line.points[0]) if line.closed else line.points
    label = Label((0.0, 0.0), letter, 9.0, style="bold italic")
    if line.closed:
        board.line(*points, width=LIGHT, layer="symbol", dash="section")
        board.write(around(line.points[0], label, 1.2, compass((0.0, 1.0))))
        return
    ends = []
    for end, inner in ((line.points[0], line.points[1]), (line.points[-1], line.points[-2])):
        ends.append(_section_end(sketch, end, unit(end, inner), label, kept))
    points = (ends[0], *line.points[1:-1], ends[1])
    board.line(*points, width=LIGHT, layer="symbol", dash="section")


def _section_end(sketch: Sketch, place: Point, back: Point, label: Label, kept: Point) -> Point:
    """Draw one end of a section line, further out or in when something is in its way; return where it is."""
    board = sketch.board
    spoken_for = [box_of(first) for first, _ in sketch.pending]  # where values of forces will stand
    normal = (-back[1], back[0])
    if (kept[0] - place[0]) * normal[0] + (kept[1] - place[1]) * normal[1] < 0:
        normal = (back[1], -back[0])
    best: tuple[tuple[int, int], Point, Arrow, Label] | None = None
    for shift in (0.0, 2.0, -2.0, 4.0, -3.5, 6.0, 8.0, 10.0):
        end = along(place, back, -shift)
        arrow = Arrow(end, along(end, normal, 5.0), LIGHT)
        letter = next(iter(around(end, label, 0.9, [(-normal[0], -normal[1])])))
        boxes = [box for mark in (arrow, letter) for box in boxes_of(mark)]
        hits = [board.obstacles.hits(box, 0.3) for box in boxes]
        kept_free = sum(touch(box, other, 0.3) for box in boxes for other in spoken_for)
        cost = (sum(letters for letters, _ in hits) + kept_free, sum(lines for _, lines in hits))
        if best is None or cost < best[0]:
            best = (cost, end, arrow, letter)
        if cost == (0, 0):
            break
    assert best is not None  # noqa: S101 - there are always trials
    _, end, arrow, letter = best
    board.line(end, along(end, back, 3.2), width=HEAVY, layer="symbol")
    board.put("symbol", arrow)
    board.put("lettering", letter)
    return end
