"""Free bodies an engineer would draw: single joints, the whole truss, what a straight line or a hinge parts.

A body is a bit mask of joints. Straight sections are found from the lines through two near joints, turned
or shifted a hair: every way of parting points by a line touches two of them. In a long truss only a window
round the wanted member is searched; what lies outside hangs together in far groups that are kept or not
kept whole, so the work does not grow with the truss.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from trusscalc.statics.incidence import Layout, bits

MOST_CUT = 7
"""Sections that cut more bars than this are not proposed."""
REACH = 2
"""Joints within so many bars of each other span the section lines that are tried."""
HAIR = 1e-9


@dataclass(frozen=True, slots=True)
class Group:
    """Joints outside the window that hang together: their mask, their neighbours inside, the bars they cut."""

    joints: int
    neighbours: int
    cut: int


@dataclass(frozen=True, slots=True)
class Window:
    """The part of the truss that is searched.

    Attributes
    ----------
    near : int
        Joints that may be parted from each other.
    far : tuple of Group
        Groups of joints that stay together.
    rim : int
        Joints of the far groups tied to near ones; they say on which side of a line a group lies.
    """

    near: int
    far: tuple[Group, ...]
    rim: int


@dataclass(frozen=True, slots=True)
class Body:
    """A free body: its joints, the bars it cuts, how it was found, and the surplus pieces of both sides.

    ``found`` is joint, whole, line, hinge or other.
    """

    kept: int
    cut: int
    found: str
    surplus: int = 0


def everything(layout: Layout) -> int:
    """Return the mask of all joints."""
    return (1 << len(layout.joints)) - 1


def window_round(layout: Layout, core: int, size: int) -> Window:
    """Return the window of at least so many joints round some (all joints if there are no more)."""
    near = edge = core
    while edge and near.bit_count() < size:
        edge = _neighbours(layout, edge) & ~near
        near |= edge
    rest = everything(layout) & ~near
    groups = []
    while rest:
        joints, neighbours, cut = _flooded(layout, rest)
        groups.append(Group(joints, neighbours & near, cut))
        rest &= ~joints
    return Window(near, tuple(groups), _neighbours(layout, near) & ~near)


def stretches(layout: Layout, length: int) -> list[int]:
    """Return for each joint the stretch of the truss it lies in: so many joints in order along its longer direction.

    Members of one stretch share a window, and which stretch a member lies in depends on the truss alone.
    """
    spans = [max(axis) - min(axis) for axis in (layout.x, layout.y)]
    places = (
        list(zip(layout.x, layout.y, strict=True))
        if spans[0] >= spans[1]
        else list(zip(layout.y, layout.x, strict=True))
    )
    order = sorted(range(len(places)), key=places.__getitem__)
    found = [0] * len(order)
    for start in range(0, len(order), length):
        mask = 0
        for joint in order[start : start + length]:
            mask |= 1 << joint
        for joint in order[start : start + length]:
            found[joint] = mask
    return found


def whole_window(layout: Layout) -> Window:
    """Return the window that holds every joint."""
    return Window(everything(layout), (), 0)


def _neighbours(layout: Layout, mask: int) -> int:
    found = 0
    for joint in bits(mask):
        found |= layout.neighbours[joint]
    return found


def _flooded(layout: Layout, mask: int) -> tuple[int, int, int]:
    """Return the piece of a set of joints that holds its first: joints, all their neighbours, bars cut."""
    joints = edge = mask & -mask
    neighbours = cut = 0
    while edge:
        found = 0
        for joint in bits(edge):
            found |= layout.neighbours[joint]
            cut ^= layout.at[joint]  # a bar with both ends inside comes twice and vanishes
        neighbours |= found
        edge = found & mask & ~joints
        joints |= edge
    return joints, neighbours, cut


def boundary(layout: Layout, kept: int, window: Window | None = None) -> int:
    """Return the mask of members and links with exactly one end among the kept joints."""
    cut = 0
    for group in window.far if window else ():
        if kept & group.joints:
            cut ^= group.cut
            kept &= ~group.joints
    for joint in bits(kept):
        cut ^= layout.at[joint]
    return cut


def pieces_of(layout: Layout, mask: int, window: Window | None = None) -> list[int]:
    """Return the connected pieces of a set of joints, far groups whole."""
    far = window.far if window else ()
    pieces = []
    while mask:
        piece = 0
        edge = mask & -mask
        while edge:
            found = 0
            for group in far:
                if edge & group.joints:
                    edge &= ~group.joints
                    piece |= group.joints
                    found |= group.neighbours
            piece |= edge
            for joint in bits(edge):
                found |= layout.neighbours[joint]
            edge = found & mask & ~piece
        pieces.append(piece)
        mask &= ~piece
    return pieces


def bodies_in(layout: Layout, window: Window) -> list[Body]:
    """Return all proposed bodies, without repeats, joints first."""
    found: dict[int, Body] = {}
    for joint in bits(window.near):
        found[1 << joint] = Body(1 << joint, layout.at[joint], "joint")
    whole = everything(layout)
    found.setdefault(whole, Body(whole, boundary(layout, whole, window), "whole"))
    for side in _line_sides(layout, window):
        cut = boundary(layout, side, window)
        if (cut & layout.members).bit_count() > 3 * MOST_CUT:
            continue
        for part in (side, whole & ~side):
            for piece in pieces_of(layout, part, window):
                _propose(layout, found, piece, "line", window)
    for piece in _hinge_sides(layout, window.near):
        _propose(layout, found, piece, "hinge", window)
    return list(found.values())


def hinge_bodies(layout: Layout) -> list[Body]:
    """Return the bodies that meet the rest of the truss in a single joint, with and without it."""
    found: dict[int, Body] = {}
    for piece in _hinge_sides(layout, everything(layout)):
        _propose(layout, found, piece, "hinge", None)
    return list(found.values())


def _propose(layout: Layout, found: dict[int, Body], kept: int, how: str, window: Window | None) -> None:
    if kept in found or not kept:
        return
    cut = boundary(layout, kept, window)
    if (cut & layout.members).bit_count() > MOST_CUT:
        return
    rest = everything(layout) & ~kept
    surplus = len(pieces_of(layout, rest, window)) - 1 if rest else 0
    found[kept] = Body(kept, cut, how, surplus)


def _line_sides(layout: Layout, window: Window) -> Iterable[int]:
    """Yield one side of every straight parting of the window's joints, far groups kept whole."""
    seen: set[int] = set()
    points = [(joint, layout.x[joint], layout.y[joint]) for joint in bits(window.near | window.rim)]
    for first in bits(window.near):
        reach = 1 << first
        for _ in range(REACH):
            reach |= _neighbours(layout, reach)
        for second in bits(reach & window.near & -(2 << first)):
            for side in _sides(layout, points, first, second):
                full = _with_far(side, window)
                if full is not None and full not in seen:
                    seen.add(full)
                    yield full


def _sides(
    layout: Layout, points: list[tuple[int, float, float]], first: int, second: int
) -> tuple[int, int, int, int]:
    """Return the joints left of the line through two joints, for its four smallest shifts and turns."""
    ax, ay = layout.x[first], layout.y[first]
    dx, dy = layout.x[second] - ax, layout.y[second] - ay
    slack = HAIR * (abs(dx) + abs(dy))
    left = on = before = 0
    half = (dx * dx + dy * dy) / 2
    for joint, x, y in points:
        px, py = x - ax, y - ay
        height = dx * py - dy * px
        near = slack * (abs(px) + abs(py))
        if height > near:
            left |= 1 << joint
        elif height >= -near:
            on |= 1 << joint
            if px * dx + py * dy < half:
                before |= 1 << joint
    return left, left | on, left | before, left | on & ~before


def _with_far(side: int, window: Window) -> int | None:
    """Return the side with the far groups that lie on it, None when the line parts a group."""
    full = side & window.near
    for group in window.far:
        rim = group.joints & window.rim
        inside = side & rim
        if inside == rim:
            full |= group.joints
        elif inside:
            return None
    return full


def _hinge_sides(layout: Layout, near: int) -> Iterable[int]:
    """Yield the parts of the truss that meet in one of the near joints, with and without it."""
    whole = everything(layout)
    for joint in bits(near):
        if not _may_part(layout, joint):
            continue
        pieces = pieces_of(layout, whole & ~(1 << joint))
        if len(pieces) > 1:
            for piece in pieces:
                yield piece
                yield piece | 1 << joint


def _may_part(layout: Layout, joint: int) -> bool:
    """Return whether the joint's neighbours are not tied to each other near it: a quick look before a long one."""
    around = layout.neighbours[joint]
    reached = edge = around & -around
    for _ in range(4):
        edge = _neighbours(layout, edge) & ~reached & ~(1 << joint)
        reached |= edge
        if not around & ~reached:
            return False
    return True
