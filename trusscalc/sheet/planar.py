"""Whether a truss can be drawn in Bow's notation: no members that cross, one piece, loads and reactions outside."""

from __future__ import annotations

from typing import Final

from trusscalc.sheet.spaces import member_wheel
from trusscalc.statics.cuts import Structure

NEAR: Final = 1e-9
"""Share of a coordinate within which two members are looked at exactly."""


def crossing_members(structure: Structure) -> tuple[str, str] | None:
    """Return two members that meet anywhere but in a joint of both, None when there are none (exact)."""
    bars = [bar for bar in structure.bars.values() if not bar.is_link]
    near = {joint.name: (float(joint.x), float(joint.y)) for joint in structure.joints.values()}
    boxes = []
    for bar in bars:
        (x, y), (u, v) = near[bar.start], near[bar.end]
        boxes.append((min(x, u), min(y, v), max(x, u), max(y, v)))
    order = sorted(range(len(bars)), key=lambda index: boxes[index][0])
    for place, first in enumerate(order):
        left, lower, right, upper = boxes[first]
        slack = NEAR * (1 + abs(left) + abs(right) + abs(lower) + abs(upper))
        for second in order[place + 1 :]:
            if boxes[second][0] > right + slack:
                break
            if boxes[second][1] > upper + slack or boxes[second][3] < lower - slack:
                continue
            a, b = bars[first], bars[second]
            if _meet(structure, (a.start, a.end), (b.start, b.end)):
                return a.name, b.name
    return None


def _meet(structure: Structure, first: tuple[str, str], second: tuple[str, str]) -> bool:
    """Return whether two members have a point in common that is no joint of both."""

    def side(a: str, b: str, c: str) -> int:
        p, q, r = (structure.joints[name] for name in (a, b, c))
        return ((q.x - p.x) * (r.y - p.y) - (q.y - p.y) * (r.x - p.x)).sign()

    shared = set(first) & set(second)
    if shared:
        (joint,) = shared
        far, other = (next(name for name in pair if name != joint) for pair in (first, second))
        if side(joint, far, other):
            return False
        p, q, r = (structure.joints[name] for name in (joint, far, other))
        return ((q.x - p.x) * (r.x - p.x) + (q.y - p.y) * (r.y - p.y)).sign() > 0
    sides = [side(*first, second[0]), side(*first, second[1]), side(*second, first[0]), side(*second, first[1])]
    if any(sides):
        return sides[0] * sides[1] <= 0 and sides[2] * sides[3] <= 0
    places = [(structure.joints[name].x, structure.joints[name].y) for name in (*first, *second)]
    (start, end), (other_start, other_end) = sorted(places[:2]), sorted(places[2:])
    return max(start, other_start) <= min(end, other_end)


def is_in_one_piece(structure: Structure) -> bool:
    """Return whether members alone connect all joints."""
    waiting = [next(iter(structure.joints))]
    reached = set(waiting)
    while waiting:
        for spoke in member_wheel(structure, waiting.pop()):
            if spoke.far not in reached:
                reached.add(spoke.far)
                waiting.append(spoke.far)
    return len(reached) == len(structure.joints)
