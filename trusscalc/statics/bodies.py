"""Free bodies an engineer would draw: single joints, the whole truss, what a straight line or a hinge parts.

A body is a bit mask of joints. Straight sections are found from the lines through two near joints, turned
or shifted a hair: every way of parting points by a line touches two of them. In a long truss only a window
round the wanted member is searched; what lies outside hangs together in far parts that are kept or not
kept whole.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from trusscalc.statics.incidence import Layout

MOST_CUT = 7
"""Sections that cut more bars than this are not proposed."""
REACH = 2
"""Joints within so many bars of each other span the section lines that are tried."""
HAIR = 1e-9


@dataclass(frozen=True, slots=True)
class Window:
    """The part of the truss that is searched.

    Attributes
    ----------
    near : int
        Joints that may be parted from each other.
    far : tuple of int
        Groups of joints that stay together.
    rim : int
        Joints of the far groups tied to near ones; they say on which side of a line a group lies.
    """

    near: int
    far: tuple[int, ...]
    rim: int


@dataclass(frozen=True, slots=True)
class Body:
    """A free body: its joints, the bars it cuts, and how it was found (joint, whole, line, hinge, other)."""

    kept: int
    cut: int
    found: str
    pieces: int = 1


def everything(layout: Layout) -> int:
    """Return the mask of all joints."""
    return (1 << len(layout.joints)) - 1


def boundary(layout: Layout, kept: int) -> int:
    """Return the mask of members and links with exactly one end among the kept joints."""
    if kept.bit_count() * 4 < len(layout.joints):
        cut = 0
        for joint in layout.bits(kept):
            cut ^= layout.at[joint]  # a bar with both ends inside comes twice and vanishes
        return cut
    cut = 0
    for joint in layout.bits(everything(layout) & ~kept):
        cut ^= layout.at[joint]
    links = 0
    for index in range(len(layout.ends) - 1, -1, -1):
        start, end = layout.ends[index]
        if end >= 0:
            break
        if kept >> start & 1:
            links |= 1 << index
    return cut & layout.members | links


def window_round(layout: Layout, bar: int, size: int) -> Window:
    """Return the window of at least so many joints round a bar (all joints if there are no more)."""
    start, end = layout.ends[bar]
    near = 1 << start | (1 << end if end >= 0 else 0)
    edge = near
    while edge and near.bit_count() < size:
        edge = _neighbours(layout, edge) & ~near
        near |= edge
    rest = everything(layout) & ~near
    far = tuple(pieces_of(layout, rest))
    return Window(near, far, _neighbours(layout, near) & rest)


def whole_window(layout: Layout) -> Window:
    """Return the window that holds every joint."""
    return Window(everything(layout), (), 0)


def _neighbours(layout: Layout, mask: int) -> int:
    found = 0
    for joint in layout.bits(mask):
        found |= layout.neighbours[joint]
    return found


def pieces_of(layout: Layout, mask: int) -> list[int]:
    """Return the connected pieces of a set of joints, leftmost first."""
    pieces = []
    while mask:
        piece = edge = mask & -mask
        while edge:
            edge = _neighbours(layout, edge) & mask & ~piece
            piece |= edge
        pieces.append(piece)
        mask &= ~piece
    return pieces


def bodies_in(layout: Layout, window: Window) -> list[Body]:
    """Return all proposed bodies, without repeats, joints first."""
    found: dict[int, Body] = {}
    for joint in layout.bits(window.near):
        found[1 << joint] = Body(1 << joint, layout.at[joint], "joint")
    whole = everything(layout)
    found.setdefault(whole, Body(whole, boundary(layout, whole), "whole"))
    for side in _line_sides(layout, window):
        cut = boundary(layout, side)
        if (cut & layout.members).bit_count() > 3 * MOST_CUT:
            continue
        for part in (side, whole & ~side):
            for piece in pieces_of(layout, part):
                _propose(layout, found, piece, "line")
    for piece in _hinge_sides(layout, window.near):
        _propose(layout, found, piece, "hinge")
    return list(found.values())


def hinge_bodies(layout: Layout) -> list[Body]:
    """Return the bodies that meet the rest of the truss in a single joint, with and without it."""
    found: dict[int, Body] = {}
    for piece in _hinge_sides(layout, everything(layout)):
        _propose(layout, found, piece, "hinge")
    return list(found.values())


def _propose(layout: Layout, found: dict[int, Body], kept: int, how: str) -> None:
    if kept in found or not kept:
        return
    cut = boundary(layout, kept)
    if (cut & layout.members).bit_count() > MOST_CUT:
        return
    rest = everything(layout) & ~kept
    found[kept] = Body(kept, cut, how, len(pieces_of(layout, rest)) if rest else 1)


def _line_sides(layout: Layout, window: Window) -> Iterable[int]:
    """Yield one side of every straight parting of the window's joints, far groups kept whole."""
    seen: set[int] = set()
    points = layout.bits(window.near | window.rim)
    for first in layout.bits(window.near):
        reach = 1 << first
        for _ in range(REACH):
            reach |= _neighbours(layout, reach)
        for second in layout.bits(reach & window.near):
            if second <= first:
                continue
            for side in _sides(layout, points, first, second):
                full = _with_far(side, window)
                if full is not None and full not in seen:
                    seen.add(full)
                    yield full


def _sides(layout: Layout, points: list[int], first: int, second: int) -> tuple[int, int, int, int]:
    """Return the joints left of the line through two joints, for its four smallest shifts and turns."""
    ax, ay = layout.x[first], layout.y[first]
    dx, dy = layout.x[second] - ax, layout.y[second] - ay
    slack = HAIR * (abs(dx) + abs(dy))
    left = on = before = 0
    half = (dx * dx + dy * dy) / 2
    for joint in points:
        px, py = layout.x[joint] - ax, layout.y[joint] - ay
        height = dx * py - dy * px
        if height > slack * (abs(px) + abs(py)):
            left |= 1 << joint
        elif height >= -slack * (abs(px) + abs(py)):
            on |= 1 << joint
            if px * dx + py * dy < half:
                before |= 1 << joint
    return left, left | on, left | before, left | on & ~before


def _with_far(side: int, window: Window) -> int | None:
    """Return the side with the far groups that lie on it, None when the line parts a group."""
    full = side & window.near
    for group in window.far:
        rim = group & window.rim
        inside = side & rim
        if inside == rim:
            full |= group
        elif inside:
            return None
    return full


def _hinge_sides(layout: Layout, near: int) -> Iterable[int]:
    """Yield the parts of the truss that meet in one of the near joints, with and without it."""
    whole = everything(layout)
    for joint in layout.bits(near):
        around = layout.neighbours[joint]
        if not around:
            continue
        rest = whole & ~(1 << joint)
        pieces = pieces_of(layout, rest) if _may_part(layout, joint) else []
        if len(pieces) > 1:
            for piece in pieces:
                yield piece
                yield piece | 1 << joint


def _may_part(layout: Layout, joint: int) -> bool:
    """Return whether the joint's neighbours fall into groups without it and without going far: a quick first look."""
    around = layout.neighbours[joint]
    reached = edge = around & -around
    for _ in range(4):
        edge = _neighbours(layout, edge) & ~reached & ~(1 << joint)
        reached |= edge
        if not around & ~reached:
            return False
    return True
