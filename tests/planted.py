"""Blunders planted into other analyses' results, made without the library's own altered models.

A truss is altered as text (``stated_truss.Stated``) or its table as numbers, solved, and printed to four significant
figures. The model with stiff joints is a plain frame of our own: whole stiffness matrices of members, added up.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import trade_trusses as trade
from random_trusses import random_truss
from replay import value
from stated_truss import Pair, Stated

from trusscalc import stiffness
from trusscalc.errors import InputError, TrusscalcWarning
from trusscalc.loads import Combination, LoadCase
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

WORST = 1e5
"""Condition of a planted model: beyond it is no truss an engineer would analyse."""
CHANGE = 20
"""A blunder counts where it changes some value by more than so many roundings."""

Loads = dict[str, Pair]
Table = dict[str, float]


@dataclass(frozen=True)
class Project:
    """A truss with load cases and combinations, and what was compared."""

    stated: Stated
    cases: Mapping[str, Loads]
    combinations: Mapping[str, Mapping[str, str]]
    compared: str

    @property
    def file(self) -> TrussFile:
        """The library's record."""
        return TrussFile(
            self.stated.truss,
            tuple(LoadCase(name, loads) for name, loads in self.cases.items()),
            tuple(Combination(name, factors) for name, factors in self.combinations.items()),
        )

    @property
    def factors(self) -> dict[str, float]:
        """The cases compared with their factors."""
        if self.compared in self.cases:
            return {self.compared: 1.0}
        return {case: float(factor) for case, factor in self.combinations[self.compared].items()}

    def total(self, factors: Mapping[str, float] | None = None) -> dict[str, tuple[float, float]]:
        """Return the loads of cases with their factors, those compared or others."""
        found: dict[str, tuple[float, float]] = {}
        for case, factor in (self.factors if factors is None else factors).items():
            for joint, (fx, fy) in self.cases[case].items():
                x, y = found.get(joint, (0.0, 0.0))
                found[joint] = (x + factor * float(value(fx)), y + factor * float(value(fy)))
        return found


@dataclass(frozen=True)
class Analysis:
    """What another analysis does: its model, the joints stiff at a slenderness (0: hinges), what it does to its table."""

    stated: Stated
    loads: Mapping[str, tuple[float, float]]
    slenderness: float = 0.0
    after: tuple[Callable[[Table], Table], ...] = ()

    def table(self) -> Table | None:
        """Return the member forces it prints, or None for a truss that hardly stands."""
        table = solved(self.stated, self.loads)
        if table is not None and self.slenderness:
            table = frame_forces(self.stated.truss, self.loads, self.slenderness)
        for change in self.after:
            table = table and change(table)
        return table


@dataclass(frozen=True)
class Planted:
    """Results with blunders in them: kinds, places and how they were made, and the table as printed."""

    project: Project
    kinds: tuple[str, ...]
    where: tuple[tuple[str, ...], ...]
    told: str
    printed: dict[str, str]

    @property
    def forces(self) -> Table:
        """The printed values."""
        return {name: float(text) for name, text in self.printed.items()}

    @property
    def half_units(self) -> Table:
        """Half a unit of the last digit of each."""
        return {name: half_unit(text) for name, text in self.printed.items()}


def half_unit(text: str) -> float:
    """Return half a unit of the last digit of a printed number.

    >>> half_unit("80"), half_unit("-12.30"), half_unit("1.2e+04")
    (0.5, 0.005, 500.0)
    """
    digits, _, exponent = text.partition("e")
    return 0.5 * 10.0 ** (int(exponent or 0) - len(digits.partition(".")[2]))


def solved(truss: Stated, loads: Mapping[str, tuple[float, float]]) -> Table | None:
    """Return the member forces, or None for a truss that hardly stands."""
    try:
        model = truss.truss
    except (InputError, TrusscalcWarning):
        return None
    found = stiffness.solve(model, LoadCase("x", {joint: pair for joint, pair in loads.items() if any(pair)}))
    return found.forces if found.condition < WORST else None


# --- projects ---------------------------------------------------------------------------------------------


def any_random(draw: random.Random) -> Stated:
    """Return a random truss of 6 to 16 joints."""
    while True:
        try:
            stated = random_truss(draw, draw.randint(6, 16), draw.choice(["rational", "rational", "surd"]))
        except ZeroDivisionError:  # two joints fell together
            continue
        if _without_warning(stated):
            return stated


SHAPES: tuple[Callable[[random.Random], Stated], ...] = (
    lambda draw: trade.pratt(draw.choice([6, 8, 10]), draw.choice(["5", "3.75", "4.2"]), draw.choice(["6", "4.25"])),
    lambda draw: trade.howe(draw.choice([6, 8]), "3.6", draw.choice(["4", "5.2"])),
    lambda _: trade.parker(),
    lambda draw: trade.warren(draw.choice([5, 7]), "6", draw.choice(["5", "3*sqrt(3)"])),
    lambda draw: trade.warren(draw.choice([6, 8]), "4.8", "5.5", verticals=True),
    lambda draw: trade.k_truss(draw.choice([6, 8]), outwards=draw.random() < 0.5),
    lambda _: trade.baltimore(8),
    lambda draw: trade.fink(eight=draw.random() < 0.5),
    lambda _: trade.fan(),
    lambda _: trade.scissors(),
    lambda draw: trade.cantilever(draw.choice([4, 5, 6])),
    lambda draw: trade.three_hinged_arch(tied=draw.random() < 0.5),
    lambda _: trade.hinged_spans(),
    lambda _: trade.crossing_diagonals(),
)


def any_trade(draw: random.Random) -> Stated:
    """Return a truss of the trade."""
    return draw.choice(SHAPES)(draw)


def _without_warning(stated: Stated) -> bool:
    try:
        return bool(stated.truss)
    except (InputError, TrusscalcWarning):
        return False


FAMILIES: dict[str, Callable[[random.Random], Stated]] = {"random": any_random, "trade": any_trade}


def project(draw: random.Random, family: str, *, extra: int = 0) -> Project:
    """Return a project of one of the families, with so many members more than statics needs."""
    while True:
        stated = FAMILIES[family](draw)
        spare = len(stated.members) + extra
        for _ in range(30 * extra):  # not every pair of joints has room for a member
            if len(stated.members) < spare:
                stated = _stiffened(draw, stated)
        if len(stated.members) < spare:
            continue
        names = list(stated.joints)
        cases: dict[str, Loads] = {
            "dead": dict(stated.loads),
            "live": {joint: ("0", f"-{draw.randint(20, 99)}") for joint in names if draw.random() < 0.5},
            "wind": {joint: (f"{draw.randint(5, 30)}", f"{draw.choice([0, 0, 12])}") for joint in names[::3]},
        }
        combinations = {
            "1.4D": {"dead": "1.4"},
            "1.2D+1.6L": {"dead": "1.2", "live": "1.6"},
            "1.2D+L+W": {"dead": "1.2", "live": "1", "wind": "1"},
            "0.9D+W": {"dead": "0.9", "wind": "1"},
        }
        if all(cases.values()):
            compared = draw.choice([*cases, *combinations])
            found = Project(stated, cases, combinations, compared)
            if solved(stated, found.total()):
                return found


def _stiffened(draw: random.Random, stated: Stated) -> Stated:
    """Return the truss with one more member, or as it was if that one cannot be."""
    ends = draw.sample(list(stated.joints), 2)
    there = {frozenset(name.split("-")) for name in stated.members}
    more = replace(stated, members=(*stated.members, "-".join(ends)))
    return more if frozenset(ends) not in there and _without_warning(more) else stated


# --- blunders ---------------------------------------------------------------------------------------------

Blunder = tuple[tuple[str, ...], str, Analysis] | None
"""Where, how it was done, and the analysis with it."""


def neighbours(stated: Stated, joint: str) -> list[str]:
    """Return the joints a joint has members to."""
    ends = [name.split("-") for name in stated.members]
    return [b if a == joint else a for a, b in ends if joint in (a, b)]


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
        tables = [analysis.table() for analysis in analyses]
        if len(tables) == len(listed) + 1 and all(tables):
            steps = zip(tables, tables[1:], strict=False)
            if all(changed(before, after) for before, after in steps if before and after) and tables[-1]:
                printed = {name: f"{force:.4g}" for name, force in tables[-1].items()}
                return Planted(given, listed, tuple(places), "; ".join(told), printed)


def changed(right: Table, table: Table) -> bool:
    """Return whether some value that both have is changed by more than 20 roundings to four figures, noise aside."""
    noise = 1e-6 * max(map(abs, right.values()))
    if not noise:
        return any(table.values())

    def roundings(name: str) -> float:
        size = max(abs(right[name]), abs(table[name]), noise)
        return abs(right[name] - table[name]) / (0.5 * 10.0 ** (np.floor(np.log10(size)) - 3))

    return any(roundings(name) > CHANGE for name in table if name in right)


def sign(_: random.Random, __: Project, now: Analysis) -> Blunder:
    after = (*now.after, lambda table: {name: -force for name, force in table.items()})
    return (), "all signs", replace(now, after=after)


def scale(draw: random.Random, _: Project, now: Analysis) -> Blunder:
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


def case_missing(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    case = draw.choice(list(given.factors))
    lost = given.total({case: given.factors[case]})
    return ((case,), case, _added(now, lost, -1)) if len(given.factors) > 1 else None


def case_doubled(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    case = draw.choice(list(given.factors))
    return (case,), case, _added(now, given.total({case: given.factors[case]}), 1)


def wrong_combination(draw: random.Random, given: Project, now: Analysis) -> Blunder:
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


def load_moved(draw: random.Random, given: Project, now: Analysis) -> Blunder:
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


def support_exchanged(_: random.Random, __: Project, now: Analysis) -> Blunder:
    supports, rollers = now.stated.supports, _rollers(now)
    pins = [joint for joint in supports if joint not in rollers]
    if not pins or not rollers:
        return None
    one, other = pins[0], rollers[-1]
    return (one, other), f"{one}, {other}", _supported(now, {one: supports[other], other: supports[one]})


def support_extra(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    rollers = _rollers(now)
    joint = draw.choice(rollers) if rollers else ""
    return ((joint,), joint, _supported(now, {joint: "pin"})) if rollers else None


def support_turned(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    rollers = _rollers(now)
    if not rollers:
        return None
    joint = draw.choice(rollers)
    support = now.stated.supports[joint]
    dx, dy = ("0", "1") if support == "roller" else support["reaction"]
    turned = draw.choice([(dy, dx), (f"-({dx})", dy), ("1", "0"), ("0", "1"), ("1", "2"), ("-3", "4"), ("1", "1")])
    return (joint,), f"{joint} {turned}", _supported(now, {joint: {"reaction": turned}})


def mirrored(draw: random.Random, given: Project, now: Analysis) -> Blunder:
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


def rows_exchanged(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    one, other = draw.sample(given.stated.members, 2)

    def exchanged(table: Table) -> Table:
        return table | {one: table[other], other: table[one]} if one in table and other in table else {}

    return (one, other), f"{one}, {other}", replace(now, after=(*now.after, exchanged))


def member_missing(draw: random.Random, given: Project, now: Analysis) -> Blunder:
    gone = draw.choice(given.stated.members)
    rest = replace(now.stated, members=tuple(name for name in now.stated.members if name != gone))
    more = {gone: 0.0} if draw.random() < 0.5 else {}
    return (gone,), gone, replace(now, stated=rest, after=(*now.after, lambda table: table | more))


def joint_displaced(draw: random.Random, _: Project, now: Analysis) -> Blunder:
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
    pairs = [(a, b) for a, b in zip(digits, digits[1:], strict=False) if typed[a] != typed[b]]
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


def stiff_joints(draw: random.Random, _: Project, now: Analysis) -> Blunder:
    slenderness = 10 ** draw.uniform(1.2, 2.1)
    return (), f"mean length / radius {slenderness:.0f}", replace(now, slenderness=slenderness)


def frame_forces(truss: Truss, acting: Mapping[str, tuple[float, float]], slenderness: float) -> Table:
    """Return the axial forces of a frame with EA and EI the same for all members, by whole member matrices."""
    index = {joint.name: 3 * place for place, joint in enumerate(truss.joints)}
    places = {joint.name: np.array((float(joint.x), float(joint.y))) for joint in truss.joints}
    lengths = [float(np.linalg.norm(places[m.end] - places[m.start])) for m in truss.members]
    bending = (float(np.mean(lengths)) / slenderness) ** 2
    matrix = np.zeros((3 * len(index),) * 2)
    parts = []
    for member, length in zip(truss.members, lengths, strict=True):
        c, s = (places[member.end] - places[member.start]) / length
        turn = np.kron(np.eye(2), np.array(((c, s, 0), (-s, c, 0), (0, 0, 1))))
        a, b, d, e = 1 / length, 12 * bending / length**3, 6 * bending / length**2, 2 * bending / length
        local = np.array(
            (
                (a, 0, 0, -a, 0, 0),
                (0, b, d, 0, -b, d),
                (0, d, 2 * e, 0, -d, e),
                (-a, 0, 0, a, 0, 0),
                (0, -b, -d, 0, b, -d),
                (0, d, e, 0, -d, 2 * e),
            )
        )
        own = [index[member.start] + k for k in range(3)] + [index[member.end] + k for k in range(3)]
        matrix[np.ix_(own, own)] += turn.T @ local @ turn
        parts.append((member.name, own, (local @ turn)[3]))
    rigid = 1e9 * matrix.diagonal().max()  # links as stiff springs
    for link in truss.links:
        way = np.array((float(link.dx), float(link.dy)))
        own = [index[link.joint], index[link.joint] + 1]
        matrix[np.ix_(own, own)] += rigid * np.outer(way, way) / (way @ way)
    loads = np.zeros(len(matrix))
    for joint, pair in acting.items():
        loads[index[joint] : index[joint] + 2] += pair
    moves = np.linalg.solve(matrix, loads)
    return {name: float(row @ moves[own]) for name, own, row in parts}


BLUNDERS: dict[str, Callable[[random.Random, Project, Analysis], Blunder]] = {
    "sign": sign,
    "scale": scale,
    "case-missing": case_missing,
    "case-doubled": case_doubled,
    "load-missing": _load(0.0),
    "load-doubled": _load(2.0),
    "load-reversed": _load(-1.0),
    "load-moved": load_moved,
    "support-exchanged": support_exchanged,
    "support-extra": support_extra,
    "support-turned": support_turned,
    "mirrored": mirrored,
    "rows-exchanged": rows_exchanged,
    "member-missing": member_missing,
    "joint-displaced": joint_displaced,
    "wrong-combination": wrong_combination,
    "stiff-joints": stiff_joints,
}
