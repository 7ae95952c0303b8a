"""Every bar that one equation can give, whatever the body looks like.

About a centre P, bars through P drop out, and so do known bars. An unknown e off P is then given by one
equation exactly when e is a bridge of the graph (ground included) of the other unknown bars: some set of
joints is held by e and, besides it, only by bars that are known or drop out. All centres are tried: joints,
meetings of unknown bars' lines, their directions, the axes.
"""

from __future__ import annotations

from trusscalc.statics.bodies import Body, boundary, pieces_of
from trusscalc.statics.incidence import AXIS_X, AXIS_Y, Layout, Point

MOST_CENTRES = 20000


def bridge_bodies(layout: Layout, known: int, decided: int) -> list[Body]:
    """Return bodies that give a bar not yet known, one for each bar and centre that has one.

    Parameters
    ----------
    layout : Layout
        The structure as numbers.
    known, decided : int
        Masks of the bars already known, and of those statics decides.
    """
    unknown = [bar for bar in range(len(layout.bars)) if not known >> bar & 1]
    found: dict[int, Body] = {}
    for point in _centres(layout, unknown):
        live = [bar for bar in unknown if not layout.passes(bar, point)]
        for bar, kept in _bridges(layout, live):
            if decided >> bar & 1 and kept not in found:
                rest = ((1 << len(layout.joints)) - 1) & ~kept
                surplus = len(pieces_of(layout, kept)) - 1 + (len(pieces_of(layout, rest)) - 1 if rest else 0)
                found[kept] = Body(kept, boundary(layout, kept), "other", surplus)
    return list(found.values())


def _centres(layout: Layout, unknown: list[int]) -> list[Point]:
    points: dict[Point, None] = {AXIS_X: None, AXIS_Y: None}
    for point in layout.points:
        points[point] = None
    for bar in unknown:
        points[layout.across(bar)] = None
    for place, first in enumerate(unknown):
        if len(points) > MOST_CENTRES:
            break
        for second in unknown[place + 1 :]:
            crossing = layout.meeting(first, second)
            if crossing is not None:
                points[crossing] = None
    return list(points)


def _bridges(layout: Layout, live: list[int]) -> list[tuple[int, int]]:
    """Return the bridges of the graph of live bars, each with the joints on its side away from the ground.

    Depth-first search with lowest reachable entry times, without recursion; parallel bars are no bridges.
    """
    ground = len(layout.joints)
    edges: list[list[tuple[int, int]]] = [[] for _ in range(ground + 1)]
    for bar in live:
        start, end = layout.ends[bar]
        end = ground if end < 0 else end
        edges[start].append((end, bar))
        edges[end].append((start, bar))
    entered = [-1] * (ground + 1)
    lowest = [0] * (ground + 1)
    below = [0] * (ground + 1)
    clock = 0
    bridges: list[tuple[int, int]] = []
    for root in (ground, *range(ground)):
        if entered[root] >= 0:
            continue
        entered[root] = lowest[root] = clock
        clock += 1
        below[root] = 0 if root == ground else 1 << root
        stack = [(root, -1, iter(edges[root]))]
        while stack:
            vertex, came_by, rest = stack[-1]
            for other, bar in rest:
                if bar == came_by:
                    continue
                if entered[other] >= 0:
                    lowest[vertex] = min(lowest[vertex], entered[other])
                    continue
                entered[other] = lowest[other] = clock
                clock += 1
                below[other] = 1 << other
                stack.append((other, bar, iter(edges[other])))
                break
            else:
                stack.pop()
                if stack:
                    parent = stack[-1][0]
                    lowest[parent] = min(lowest[parent], lowest[vertex])
                    below[parent] |= below[vertex]
                    if lowest[vertex] > entered[parent]:
                        bridges.append((came_by, below[vertex]))
    return bridges
