"""Blunders planted into other analyses' results, and what the library makes of them.

Results are printed to four significant figures, the last zeros cut as ``{:.4g}`` does, which leaves less to go by.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any

import numpy as np
from other_analyses import Analysis, Project, Table, project, solved
from replay import value
from stated_truss import Stated

from trusscalc.comparison import ABSOLUTE, RELATIVE
from trusscalc.diagnosis import explain
from trusscalc.explanations import Explanation
from trusscalc.fits import Printed

CHANGE = 20
"""A blunder counts where it changes some value by more than so many roundings."""

Blunder = tuple[tuple[str, ...], str, Analysis] | None
"""Where, how it was done, and the analysis with it."""


@dataclass(frozen=True)
class Planted:
    """Results with blunders in them: kinds, places and how they were made, and the table as printed."""

    project: Project
    kinds: tuple[str, ...]
    where: tuple[tuple[str, ...], ...]
    told: str
    printed: dict[str, str]

    def explain(self) -> tuple[Explanation, ...]:
        """Return what the library makes of it."""
        return explained(self.project, self.printed)


def explained(given: Project, table: Mapping[str, str]) -> tuple[Explanation, ...]:
    """Return what the library makes of a printed table, within the tolerance a comparison has of itself."""
    right = solved(given.stated, given.total()) or {}
    largest = max(map(abs, right.values()), default=0.0)
    share, part = float(RELATIVE), float(ABSOLUTE) * largest
    printed = Printed(
        {name: float(text) for name, text in table.items()},
        {name: half_unit(text) for name, text in table.items()},
        allowed={name: share * abs(force) + part for name, force in right.items()},
    )
    return explain(given.file, given.compared, printed)


def half_unit(text: str) -> float:
    """Return half a unit of the last digit of a printed number.

    >>> half_unit("80"), half_unit("-12.30"), half_unit("1.2e+04")
    (0.5, 0.005, 500.0)
    """
    digits, _, exponent = text.partition("e")
    return 0.5 * 10.0 ** (int(exponent or 0) - len(digits.partition(".")[2]))


def plant(draw: random.Random, kinds: str, family: str) -> Planted:
    """Return results with one blunder in them, or with two, ``"load-missing+sign"``."""
    listed = tuple(kinds.split("+"))
    while True:
        extra = draw.choice([1, 2, 3]) if "member-missing" in listed else draw.choice([0, 0, 0, 1])
        given = project(draw, family, extra=extra)
        analyses = [Analysis(given.stated, given.total())]
        places, told = [], []
        for kind in listed:
            found = BLUNDERS[kind](draw, given, analyses[-1])
            if found is None:
                break
            places.append(found[0])
            told.append(found[1])
            analyses.append(found[2])
        tables = [table for analysis in analyses if (table := analysis.table())]
        if len(tables) == len(listed) + 1 and all(changed(before, after) for before, after in pairwise(tables)):
            return Planted(given, listed, tuple(places), "; ".join(told), as_printed(tables[-1]))


def as_printed(table: Table) -> dict[str, str]:
    """Return a table rounded to four significant figures, its last zeros cut."""
    return {name: f"{force:.4g}" for name, force in table.items()}


def changed(right: Table, table: Table) -> bool:
    """Return whether some value that both have is changed by more than 20 roundings to four figures, noise aside."""
    noise = 1e-6 * max(map(abs, right.values()))
    if not noise:
        return any(table.values())

    def roundings(name: str) -> float:
        size = max(abs(right[name]), abs(table[name]), noise)
        return abs(right[name] - table[name]) / (0.5 * 10.0 ** (np.floor(np.log10(size)) - 3))

    return any(roundings(name) > CHANGE for name in table if name in right)


# --- blunders ---------------------------------------------------------------------------------------------


def neighbours(stated: Stated, joint: str) -> list[str]:
    """Return the joints a joint has members to."""
    ends = [name.split("-") for name in stated.members]
    return [b if a == joint else a for a, b in ends if joint in (a, b)]


def _sign(_: random.Random, __: Project, now: Analysis) -> Blunder:
    after = (*now.after, lambda table: {name: -force for name, force in table.items()})
    return (), "all signs", replace(now, after=after)


def _scale(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    units = [1000, 0.001, 4.4482216152605, 1 / 4.4482216152605, 12, 1 / 12, 0.3048, 1 / 0.3048, 25.4]
    factor = draw.choice([draw.choice(units), draw.choice([1.35, 1.5, 1.6, 1 / 1.2, 9.80665, 2, 0.5, 1.4, 1.25])])
    after = (*now.after, lambda table: {name: factor * force for name, force in table.items()})
    return (f"{factor:.6g}",), f"times {factor:g}", replace(now, after=after)


def _added(now: Analysis, loads: Mapping[str, tuple[float, float]], factor: float) -> Analysis:
    total = dict(now.loads)
    for joint, (fx, fy) in loads.items():
        x, y = total.get(joint, (0.0, 0.0))
        total[joint] = (x + factor * fx, y + factor * fy)
    return replace(now, loads=total)


def _case_missing(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    case = draw.choice(list(given.factors))
    lost = given.total({case: given.factors[case]})
    return ((case,), case, _added(now, lost, -1)) if len(given.factors) > 1 else None


def _case_doubled(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    case = draw.choice(list(given.factors))
    return (case,), case, _added(now, given.total({case: given.factors[case]}), 1)


def _wrong_combination(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    states = {name: {name: 1.0} for name in given.cases}
    states |= {name: {case: float(f) for case, f in factors.items()} for name, factors in given.combinations.items()}
    other = draw.choice([name for name in states if name != given.compared])
    return (other,), other, _added(_added(now, given.total(), -1), given.total(states[other]), 1)


def _load(factor: float) -> Callable[[random.Random, Project, Analysis], Blunder]:
    def planted(draw: random.Random, given: Project, now: Analysis) -> Blunder:
        loads = given.total()
        joint = draw.choice(list(loads))
        return (joint,), joint, _added(now, {joint: loads[joint]}, factor - 1)

    return planted


def _load_moved(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    loads = given.total()
    joint = draw.choice(list(loads))
    other = draw.choice(neighbours(given.stated, joint))
    moved = _added(_added(now, {joint: loads[joint]}, -1), {other: loads[joint]}, 1)
    return (joint, other), f"{joint} to {other}", moved


def _links(support: Any) -> int:
    return 2 if support == "pin" else len(support) if isinstance(support, list) else 1


def _rollers(now: Analysis) -> list[str]:
    return [joint for joint, support in now.stated.supports.items() if _links(support) == 1]


def _supported(now: Analysis, changes: Mapping[str, Any]) -> Analysis:
    return replace(now, stated=replace(now.stated, supports={**now.stated.supports, **changes}))


def _support_exchanged(_: random.Random, __: Project, now: Analysis) -> Blunder:
    supports, rollers = now.stated.supports, _rollers(now)
    pins = [joint for joint in supports if joint not in rollers]
    if not pins or not rollers:
        return None
    one, other = pins[0], rollers[-1]
    return (one, other), f"{one}, {other}", _supported(now, {one: supports[other], other: supports[one]})


def _support_extra(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    rollers = _rollers(now)
    joint = draw.choice(rollers) if rollers else ""
    return ((joint,), joint, _supported(now, {joint: "pin"})) if rollers else None


def _support_turned(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    rollers = _rollers(now)
    if not rollers:
        return None
    joint = draw.choice(rollers)
    support = now.stated.supports[joint]
    dx, dy = ("0", "1") if support == "roller" else support["reaction"]
    turned = draw.choice([(dy, dx), (f"-({dx})", dy), ("1", "0"), ("0", "1"), ("1", "2"), ("-3", "4"), ("1", "1")])
    return (joint,), f"{joint} {turned}", _supported(now, {joint: {"reaction": turned}})


def _mirrored(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    places = {joint: (float(value(x)), float(value(y))) for joint, (x, y) in given.stated.joints.items()}
    across = [x for x, _ in places.values()]
    middle = min(across) + max(across)
    image = {
        joint: next((o for o, (u, v) in places.items() if abs(u - middle + x) < 1e-9 and abs(v - y) < 1e-9), "")
        for joint, (x, y) in places.items()
    }
    ways = ["truss"]
    there = {frozenset(name.split("-")): name for name in given.stated.members}
    partner = {name: there.get(frozenset(image[end] for end in name.split("-")), "") for name in given.stated.members}
    if all(image.values()):
        ways += ["loads", *["table"] * all(partner.values())]
    way = draw.choice(ways)
    if way == "table":
        after = (*now.after, lambda table: {name: table[partner[name]] for name in table})
        return (), way, replace(now, after=after)
    if way == "loads":
        return (), way, replace(now, loads={image[joint]: load for joint, load in now.loads.items()})
    joints = {joint: (f"{middle!r}-({x})", y) for joint, (x, y) in now.stated.joints.items()}
    return (), way, replace(now, stated=replace(now.stated, joints=joints))


def _rows_exchanged(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    one, other = draw.sample(given.stated.members, 2)

    def exchanged(table: Table) -> Table:
        return table | {one: table[other], other: table[one]} if one in table and other in table else {}

    return (one, other), f"{one}, {other}", replace(now, after=(*now.after, exchanged))


def _member_missing(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    gone = draw.choice(given.stated.members)
    rest = replace(now.stated, members=tuple(name for name in now.stated.members if name != gone))
    more = {gone: 0.0} if draw.random() < 0.5 else {}
    return (gone,), gone, replace(now, stated=rest, after=(*now.after, lambda table: table | more))


def _joint_displaced(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    joint = draw.choice(list(now.stated.joints))
    axis = draw.choice([0, 1])
    number = float(value(now.stated.joints[joint][axis]))
    typed = f"{number:.{draw.choice([3, 4, 6])}f}".rstrip("0").rstrip(".")
    slipped = draw.choice([_digits_exchanged, _sign_turned, _point_moved])(draw, typed)
    if slipped is None or float(slipped) == float(typed):
        return None
    pair = list(now.stated.joints[joint])
    pair[axis] = slipped
    joints = {**now.stated.joints, joint: (pair[0], pair[1])}
    told = f"{joint} {'xy'[axis]} {typed} typed {slipped}"
    return (joint,), told, replace(now, stated=replace(now.stated, joints=joints))


def _digits_exchanged(draw: random.Random, typed: str) -> str | None:
    digits = [place for place, letter in enumerate(typed) if letter.isdigit()][:5]
    pairs = [(a, b) for a, b in pairwise(digits) if typed[a] != typed[b]]
    if not pairs:
        return None
    one, other = draw.choice(pairs)
    letters = list(typed)
    letters[one], letters[other] = letters[other], letters[one]
    return "".join(letters)


def _sign_turned(_: random.Random, typed: str) -> str:
    return typed[1:] if typed.startswith("-") else f"-{typed}"


def _point_moved(draw: random.Random, typed: str) -> str:
    if "." in typed and draw.random() < 0.5:
        return typed.replace(".", "")
    return f"{float(typed) * draw.choice([10, 0.1]):.9g}"


def _stiff_joints(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    slenderness = 10 ** draw.uniform(1.2, 2.1)
    return (), f"mean length / radius {slenderness:.0f}", replace(now, slenderness=slenderness)


BLUNDERS: dict[str, Callable[[random.Random, Project, Analysis], Blunder]] = {
    "sign": _sign,
    "scale": _scale,
    "case-missing": _case_missing,
    "case-doubled": _case_doubled,
    "load-missing": _load(0.0),
    "load-doubled": _load(2.0),
    "load-reversed": _load(-1.0),
    "load-moved": _load_moved,
    "support-exchanged": _support_exchanged,
    "support-extra": _support_extra,
    "support-turned": _support_turned,
    "mirrored": _mirrored,
    "rows-exchanged": _rows_exchanged,
    "member-missing": _member_missing,
    "joint-displaced": _joint_displaced,
    "wrong-combination": _wrong_combination,
    "stiff-joints": _stiff_joints,
}
