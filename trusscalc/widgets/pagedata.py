"""What the page is told: the truss once, and after each move everything that is drawn. Plain numbers and words.

The page computes no force and no cut. What it draws of a cut (where the section line runs, where each cut bar is
pulled, which reactions act) is worked out here, and every word in it is ours.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import Any, Final

from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.elevation import value_places
from trusscalc.sheet.inscriptions import amount
from trusscalc.sheet.sections import crossing, section_line
from trusscalc.sheet.wholetruss import value_text
from trusscalc.statics.cuts import About
from trusscalc.truss import Truss
from trusscalc.widgets.answers import Answer
from trusscalc.widgets.choices import Choices

Spot = tuple[float, float]
Data = dict[str, Any]

PAPER: Final = 170.0
"""Millimetres the truss is wide when its section line is laid out, as on a sheet."""
MOST_HIGH: Final = 110.0


def truss_data(truss: Truss) -> Data:
    """Return what is drawn of a truss: joints, members with their groups, supports with the ways they hold."""
    at_values = truss.at_values()
    place = {joint.name: number for number, joint in enumerate(truss.joints)}
    return {
        "title": truss.title,
        "length": truss.length,
        "force": truss.force,
        "joints": [[joint.name, float(joint.x), float(joint.y)] for joint in at_values.joints],
        "members": [[m.name, place[m.start], place[m.end], m.group] for m in truss.members],
        "supports": [
            [place[support.joint], support.kind, [[float(link.dx), float(link.dy)] for link in support.links]]
            for support in at_values.supports
        ],
    }


def load_data(truss: Truss, case: LoadCase) -> list[list[Any]]:
    """Return the loads of a case: joint, the way each acts, its size in words."""
    place = {joint.name: number for number, joint in enumerate(truss.joints)}
    found: list[list[Any]] = []
    for load in case.loads:
        for way, size in (((1, 0), load.fx), ((0, 1), load.fy)):
            if size:
                sign = -1 if case.value(size).reads_negative() else 1
                found.append([place[load.joint], sign * way[0], sign * way[1], amount(size * sign)])
    return found


def state_data(
    truss: Truss, case: LoadCase, choices: Choices, answer: Answer | None, check: MemberCheck | None
) -> Data:
    """Return everything that is drawn of the present choices and of what they give."""
    at_values = truss.at_values()
    places = {joint.name: (float(joint.x), float(joint.y)) for joint in at_values.joints}
    line = _line(at_values, places, choices)
    solved = tuple(answer.solved) if answer else ()
    shown = choices.about or (answer.steps[0].equations[0].about if answer and len(answer.steps) == 1 else None)
    return {
        "loads": load_data(truss, case),
        "members": list(choices.members),
        "cut": list(choices.cut_members(truss)),
        "kept": list(choices.kept),
        "line": {**line, "letter": answer.letter if answer else ""} if line else None,
        "pulls": _pulls(at_values, places, choices, line),
        "reactions": _reactions(truss, answer),
        "solved": list(solved),
        "dropped": list(answer.dropped) if answer else [],
        "about": _about(truss, shown),
        "values": _values(check, answer),
    }


# --- the cut as it is drawn -------------------------------------------------------------------------------


def _line(truss: Truss, places: Mapping[str, Spot], choices: Choices) -> Data | None:
    """Return the section line: as the engineer drew it, else the one a sheet would draw round the joints kept."""
    if choices.line:
        points = [(float(x), float(y)) for x, y in choices.line]
        left = _kept_left(truss, places, choices, _pieces(points, closed=choices.closed))
        return {"points": points, "closed": choices.closed, "drawn": True, "keptLeft": left}
    if not choices.kept or len(choices.kept) == len(places):
        return None
    xs, ys = zip(*places.values(), strict=True)
    scale = min(PAPER / (max(xs) - min(xs) or 1), MOST_HIGH / (max(ys) - min(ys) or 1))
    inside = set(choices.kept)
    cut, others = {}, []
    for member in truss.members:
        a, b = member.start, member.end
        near, far = (a, b) if a in inside else (b, a)
        ends = (_scaled(places[near], scale), _scaled(places[far], scale))
        if (a in inside) == (b in inside):
            others.append(ends)
        else:
            cut[member.name] = ends
    found = section_line(cut, others, near_kept=False)
    if found is None:
        return None
    points = [_scaled(point, 1 / scale) for point in found.points]
    left = _kept_left(truss, places, choices, _pieces(points, closed=found.closed))
    return {"points": points, "closed": found.closed, "drawn": False, "keptLeft": left}


def _pieces(points: Sequence[Spot], *, closed: bool) -> list[tuple[Spot, Spot]]:
    return list(pairwise([*points, points[0]] if closed else points))


def _scaled(spot: Spot, scale: float) -> Spot:
    return spot[0] * scale, spot[1] * scale


def _kept_left(
    truss: Truss, places: Mapping[str, Spot], choices: Choices, pieces: Sequence[tuple[Spot, Spot]]
) -> bool | None:
    """Return whether the part kept lies to the left, going along the line; None while nothing is kept."""
    inside = set(choices.kept)
    for start, end in pieces:
        for member in truss.members:
            if (member.start in inside) == (member.end in inside):
                continue
            if crossing((start, end), (places[member.start], places[member.end])) is None:
                continue
            x, y = places[member.start if member.start in inside else member.end]
            return (end[0] - start[0]) * (y - start[1]) - (end[1] - start[1]) * (x - start[0]) > 0
    return None


def _pulls(truss: Truss, places: Mapping[str, Spot], choices: Choices, line: Data | None) -> dict[str, list[float]]:
    """Return for each cut member where the line meets it and which way the member is pulled out of the body."""
    inside = set(choices.kept)
    pieces = _pieces(line["points"], closed=line["closed"]) if line else []
    found: dict[str, list[float]] = {}
    for member in truss.members:
        if not inside or (member.start in inside) == (member.end in inside):
            continue
        near, far = (member.start, member.end) if member.start in inside else (member.end, member.start)
        (ax, ay), (bx, by) = places[near], places[far]
        met = [point for piece in pieces if (point := crossing(piece, (places[near], places[far])))]
        x, y = met[0] if met else ((ax + bx) / 2, (ay + by) / 2)
        length = math.hypot(bx - ax, by - ay)
        found[member.name] = [x, y, (bx - ax) / length, (by - ay) / length]
    return found


def _reactions(truss: Truss, answer: Answer | None) -> list[list[Any]]:
    """Return the reactions on the body: joint, the way each is written, its value in words; no zeros."""
    if answer is None:
        return []
    place = {joint.name: number for number, joint in enumerate(truss.joints)}
    found: list[list[Any]] = []
    for link in truss.at_values().links:
        exact = answer.check.reactions[link.name].exact
        if link.name in answer.reactions and exact is not None and exact:
            size = math.hypot(float(link.dx), float(link.dy))
            found.append([place[link.joint], float(link.dx) / size, float(link.dy) / size, amount(exact)])
    return found


def _about(truss: Truss, about: About | None) -> Data | None:
    """Return the equation shown: its centre or its direction."""
    if about is None:
        return None
    spot = [float(truss.value(about.x)), float(truss.value(about.y))]
    return {"sum": about.sum, "at": spot, "joint": about.joint}


def _values(check: MemberCheck | None, answer: Answer | None) -> dict[str, list[str | None]]:
    """Return for members checked, and those this cut gives, value with letter, and letter alone."""
    found: dict[str, list[str | None]] = {}
    for each, names in (
        (check, check.members if check else ()),
        (answer and answer.check, answer.solved if answer else ()),
    ):
        if each:
            places = value_places(each)
            told = {name: each.members[name] for name in names if name in each.members}
            found |= {name: [value_text(each.case, item, places), item.sense] for name, item in told.items()}
    return found
