"""Bow's notation: the spaces between the forces on a plane truss, and what stands between which two of them.

A force on a joint stands between two spaces: a member between two panels, or a panel and the outside; a load or
reaction between two parts of the outside (Bow, Economics of Construction in Relation to Framed Structures, 1873).
The spaces are the faces of the drawing, found from the order of members and forces round every joint. Angles are
floats, for order alone; forces are exact.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.exact import Exact
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.atvalues import at_values
from trusscalc.statics.cuts import Structure, structure_of

LETTERS: Final = "ABCDEFGHJKLMNPQRSTUVWXYZ"
"""Without I and O, which read as digits."""
MARGIN: Final = 30.0
"""Degrees that a force keeps off the members where its own direction is not free."""
FULL: Final = 360.0
Wheels = Mapping[str, Sequence["Spoke"]]
Corner = tuple[str, int]
"""A joint, and the place of the spoke after which the corner lies, clockwise."""


@dataclass(frozen=True, slots=True)
class Force:
    """A force as it acts on a joint, in numbers.

    Attributes
    ----------
    kind : str
        ``member``, ``reaction`` or ``load``.
    name : str
        Member or reaction; for a load its joint.
    axis : str
        ``x`` or ``y`` for a load, which is taken in its components; else ''.
    joint : str
        Where it acts.
    size : Exact
        Axial force or reaction, tension (or along the written direction) positive; a load's component.
    x, y : Exact
        Its components, to the right and upwards.
    """

    kind: Literal["member", "reaction", "load"]
    name: str
    axis: str
    joint: str
    size: Exact
    x: Exact
    y: Exact


@dataclass(frozen=True, slots=True)
class Spoke:
    """What leaves a joint in some direction: a member to another joint, or a load or reaction with its place outside.

    ``angle`` in degrees, anticlockwise from the right: where it is drawn, not where a force points.
    """

    angle: float
    member: str = ""
    far: str = ""
    force: Force | None = None


@dataclass(frozen=True, slots=True)
class Space:
    """A space between forces: a panel, or a part of the outside from one load or reaction to the next, clockwise.

    ``path`` are the joints round it: of a panel all, anticlockwise; outside, from one force to the other.
    """

    name: str
    outside: bool
    path: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Between:
    """A force and the spaces before and after it, clockwise round its joint; for a member round its first joint."""

    force: Force
    before: str
    after: str


@dataclass(frozen=True, slots=True)
class Notation:
    """A truss in Bow's notation.

    Attributes
    ----------
    spaces : tuple of Space
        Clockwise outside, then panels from left to right.
    members, outside : tuple of Between
        Every member, in the truss's order; every load and reaction, clockwise.
    wheels : dict of str to tuple of Spoke
        What stands round every joint, clockwise.
    """

    spaces: tuple[Space, ...]
    members: tuple[Between, ...]
    outside: tuple[Between, ...]
    wheels: Wheels


# --- forces -----------------------------------------------------------------------------------------------


def found_forces(check: MemberCheck) -> dict[str, Exact]:
    """Return every member force and reaction that the check holds, in numbers."""
    found = {name: force for step in check.steps for name, force in step.results.items()}
    judged = {**check.members, **check.reactions}
    found |= {name: item.exact for name, item in judged.items() if item.exact is not None}
    return {name: check.value(force) for name, force in found.items()}


def numbers_of(check: MemberCheck) -> Structure:
    """Return truss and loads with every symbol at its value."""
    drawn = at_values(check)
    structure = structure_of(drawn.truss, drawn.case)
    loads = {joint: (check.value(fx), check.value(fy)) for joint, (fx, fy) in structure.loads.items()}
    return Structure(structure.joints, structure.bars, structure.bars_at, loads)


def bar_force(structure: Structure, name: str, joint: str, size: Exact) -> Force:
    """Return the force of a member or reaction on a joint."""
    bar = structure.bars[name]
    pull = size / bar.length if bar.start == joint else -size / bar.length
    return Force("reaction" if bar.is_link else "member", name, "", joint, size, pull * bar.dx, pull * bar.dy)


def loads_on(structure: Structure, joint: str) -> list[Force]:
    """Return the loads on a joint by their components, without those that are zero."""
    if joint not in structure.loads:
        return []
    fx, fy = structure.loads[joint]
    zero = fx - fx
    parts = [Force("load", joint, "x", joint, fx, fx, zero), Force("load", joint, "y", joint, fy, zero, fy)]
    return [part for part in parts if part.size]


def outer_forces(structure: Structure, found: Mapping[str, Exact]) -> dict[str, list[Force]]:
    """Return reactions and loads that are not zero, by joint; reactions must all be found."""
    forces: dict[str, list[Force]] = {}
    for name, bar in structure.bars.items():
        if bar.is_link and found[name]:
            forces.setdefault(bar.start, []).append(bar_force(structure, name, bar.start, found[name]))
    for joint in structure.joints:
        forces.setdefault(joint, []).extend(loads_on(structure, joint))
    return {joint: listed for joint, listed in forces.items() if listed}


# --- round a joint ----------------------------------------------------------------------------------------


def direction(structure: Structure, name: str, joint: str) -> float:
    """Return the direction in which a bar leaves a joint, in degrees."""
    bar = structure.bars[name]
    sign = 1.0 if bar.start == joint else -1.0
    return math.degrees(math.atan2(sign * float(bar.dy), sign * float(bar.dx))) % FULL


def member_wheel(structure: Structure, joint: str) -> list[Spoke]:
    """Return the members at a joint, clockwise."""
    spokes = []
    for name in structure.bars_at[joint]:
        bar = structure.bars[name]
        if not bar.is_link:
            far = bar.end if bar.start == joint else bar.start
            spokes.append(Spoke(direction(structure, name, joint), name, far))
    return sorted(spokes, key=lambda spoke: -spoke.angle)


def widest_corner(wheel: Sequence[Spoke]) -> int:
    """Return the spoke after which the widest corner lies."""
    return max(range(len(wheel)), key=lambda place: (round(_width(wheel, place), 6), -place), default=-1)


def _width(wheel: Sequence[Spoke], place: int) -> float:
    start, end = wheel[place].angle, wheel[(place + 1) % len(wheel)].angle
    return (start - end) % FULL or FULL


def seated(wheel: Sequence[Spoke], forces: Iterable[Force], corners: Sequence[int]) -> list[Spoke]:
    """Return a wheel with loads and reactions in its open corners, each where it can be drawn.

    A reaction comes from outside, a load stands where there is most room: on either side of the joint in its own
    line, or, where members are in the way, beside them.
    """
    if not wheel:
        return sorted((Spoke(_line_of(force), force=force) for force in forces), key=lambda spoke: -spoke.angle)
    placed: dict[int, list[Spoke]] = {}
    for force in sorted(forces, key=lambda force: force.kind == "load"):
        corner, angle = min(
            (trial for corner in corners for trial in _seats(wheel, corner, force, placed.get(corner, []))),
            key=lambda trial: trial[0],
        )[1:]
        placed.setdefault(corner, []).append(Spoke(angle, force=force))
    result: list[Spoke] = []
    for place, spoke in enumerate(wheel):
        own = placed.get(place, [])
        result += [spoke, *sorted(own, key=lambda other: (spoke.angle - other.angle) % FULL)]
    return result


def _line_of(force: Force) -> float:
    return math.degrees(math.atan2(float(force.y), float(force.x))) % FULL


def _seats(
    wheel: Sequence[Spoke], corner: int, force: Force, others: Sequence[Spoke]
) -> Iterator[tuple[tuple[float, ...], int, float]]:
    """Yield (cost, corner, angle) of the places of a force in a corner."""
    start, width = wheel[corner].angle, _width(wheel, corner)
    margin = min(MARGIN, width / 3)
    line = _line_of(force)
    for side in (0.0, FULL / 2):
        turn = (start - line - side) % FULL
        if turn > width + (FULL - width) / 2:
            turn -= FULL  # nearer to the corner's other edge
        own = min(max(turn, margin), width - margin)
        moves = [own, *(own + step for step in (15.0, -15.0, 30.0, -30.0, 8.0, -8.0) if 0 < own + step < width)]
        for place, at in enumerate(moves):
            angle = (start - at) % FULL
            apart = min((_apart(angle, other.angle) for other in others), default=FULL)
            clear = min(at, width - at, apart)
            inside = force.kind == "reaction" and not side  # its arrow would run away from the truss
            cost = (float(apart < 7.0), round(abs(at - turn), 3), float(inside), float(place), -round(clear, 3))  # noqa: PLR2004
            yield cost, corner, angle


def _apart(first: float, second: float) -> float:
    turn = abs(first - second) % FULL
    return min(turn, FULL - turn)


# --- spaces -----------------------------------------------------------------------------------------------


def outer_corners(structure: Structure) -> dict[str, list[int]]:
    """Return for each joint the corners that open to the outside (of a connected truss without crossings)."""
    wheels = {joint: member_wheel(structure, joint) for joint in structure.joints}
    parts = _parts(wheels)
    first = min(structure.joints.values(), key=lambda joint: (float(joint.x), float(joint.y))).name
    wheel = wheels[first]
    # nothing lies to the left of this joint, so the corner that looks to the left is outside
    place = min(range(len(wheel)), key=lambda i: (wheel[i].angle - FULL / 2) % FULL)
    outside = parts[first, place]
    found: dict[str, list[int]] = {}
    for (joint, corner), part in parts.items():
        if part == outside:
            found.setdefault(joint, []).append(corner)
    return found


def _parts(wheels: Wheels) -> dict[Corner, Corner]:
    """Return for every corner one that stands for its whole space."""
    above: dict[Corner, Corner] = {(joint, i): (joint, i) for joint, wheel in wheels.items() for i in range(len(wheel))}

    def top(corner: Corner) -> Corner:
        while above[corner] != corner:
            above[corner] = above[above[corner]]
            corner = above[corner]
        return corner

    for joint, wheel in wheels.items():
        for place, spoke in enumerate(wheel):
            if spoke.member:
                far = wheels[spoke.far]
                back = next(i for i, other in enumerate(far) if other.member == spoke.member)
                # what is left of a member seen from one end is right of it seen from the other
                above[top((joint, (place - 1) % len(wheel)))] = top((spoke.far, back))
    return {corner: top(corner) for corner in above}


def _walk(wheels: Wheels, start: Corner) -> tuple[str, ...]:
    """Return the joints round a space, from one of its corners to a load or reaction, or all round."""
    joints = [start[0]]
    corner = start
    while True:
        joint, place = corner
        spoke = wheels[joint][(place + 1) % len(wheels[joint])]
        if not spoke.member:
            return tuple(joints)
        back = next(i for i, other in enumerate(wheels[spoke.far]) if other.member == spoke.member)
        corner = (spoke.far, back)
        if corner == start:
            return tuple(joints)
        joints.append(spoke.far)


def notation(structure: Structure, found: Mapping[str, Exact]) -> Notation:
    """Return the spaces of a truss and what stands between them.

    Parameters
    ----------
    structure : Structure
        In numbers; without crossing members, in one piece, loads and reactions on outer joints, at least one.
    found : mapping of str to Exact
        Every member force and reaction.
    """
    corners = outer_corners(structure)
    forces = outer_forces(structure, found)
    wheels: dict[str, list[Spoke]] = {}
    for joint in structure.joints:
        wheel = member_wheel(structure, joint)
        wheels[joint] = seated(wheel, forces[joint], corners[joint]) if joint in forces else wheel
    parts = _parts(wheels)
    outside = _clockwise(structure, wheels, parts)
    named: dict[Corner, str] = {}
    spaces = []
    panels = _panels(structure, wheels, parts, {parts[corner] for corner in outside})
    names = _names(len(outside), len(panels))
    for start, name in zip((*outside, *panels), names, strict=True):
        named[parts[start]] = name
        spaces.append(Space(name, start in outside, _walk(wheels, start)))
    members = {}
    outer = {}
    for joint, wheel in wheels.items():
        for place, spoke in enumerate(wheel):
            before, after = named[parts[joint, (place - 1) % len(wheel)]], named[parts[joint, place]]
            if spoke.force is not None:
                outer[joint, place] = Between(spoke.force, before, after)
            elif structure.bars[spoke.member].start == joint:
                force = bar_force(structure, spoke.member, joint, found[spoke.member])
                members[spoke.member] = Between(force, before, after)
    ordered = tuple(members[name] for name, bar in structure.bars.items() if not bar.is_link)
    return Notation(tuple(spaces), ordered, tuple(outer[corner] for corner in outside), wheels)


def _clockwise(structure: Structure, wheels: Wheels, parts: Mapping[Corner, Corner]) -> list[Corner]:
    """Return the corner after every load and reaction, clockwise round the truss, first that over the truss.

    It comes after the last force at the leftmost support.
    """
    outside = [(joint, i) for joint, wheel in wheels.items() for i, spoke in enumerate(wheel) if not spoke.member]
    following = {parts[joint, (i - 1) % len(wheels[joint])]: (joint, i) for joint, i in outside}
    order = [outside[0]]
    while (corner := following[parts[order[-1]]]) != order[0]:
        order.append(corner)

    def from_left(corner: Corner) -> tuple[bool, float, float]:
        force, spot = wheels[corner[0]][corner[1]].force, structure.joints[corner[0]]
        return force is None or force.kind == "load", float(spot.x), float(spot.y)

    support = min(order, key=from_left)[0]
    last = next((n for n, corner in enumerate(order) if corner[0] == support != order[(n + 1) % len(order)][0]), 0)
    return order[last:] + order[:last]


def _panels(structure: Structure, wheels: Wheels, parts: Mapping[Corner, Corner], outside: set[Corner]) -> list[Corner]:
    """Return one corner of every panel, from left to right and from top to bottom."""
    inside = [corner for corner, part in parts.items() if corner == part and part not in outside]

    def place(corner: Corner) -> tuple[float, float]:
        spots = [structure.joints[joint] for joint in _walk(wheels, corner)]
        middle = [sum(map(float, axis)) / len(spots) for axis in zip(*((p.x, p.y) for p in spots), strict=True)]
        return round(middle[0], 6), -round(middle[1], 6)

    return sorted(inside, key=place)


def _names(outside: int, panels: int) -> list[str]:
    """Return letters for all spaces, or, where they run out, letters outside and numbers for the panels."""

    def letters() -> Iterator[str]:
        for times in itertools.count(1):
            yield from (letter * times for letter in LETTERS)

    if outside + panels <= len(LETTERS):
        return list(itertools.islice(letters(), outside + panels))
    return [*itertools.islice(letters(), outside), *(str(number) for number in range(1, panels + 1))]
