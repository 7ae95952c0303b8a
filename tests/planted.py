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
class Planted:
    """Results with a blunder in them: the explanations that are right, and the table as printed."""

    project: Project
    kind: str
    where: tuple[str, ...]
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

Blunder = tuple[str, tuple[str, ...], str, Table | None]
"""Kind, where, how it was done, and the table."""


def neighbours(stated: Stated, joint: str) -> list[str]:
    """Return the joints a joint has members to."""
    ends = [name.split("-") for name in stated.members]
    return [b if a == joint else a for a, b in ends if joint in (a, b)]


def plant(draw: random.Random, kind: str, family: str) -> Planted:
    """Return results with a blunder of one kind in them."""
    while True:
        extra = draw.choice([1, 2, 3]) if kind == "member-missing" else draw.choice([0, 0, 0, 1])
        given = project(draw, family, extra=extra)
        found = BLUNDERS[kind](draw, given)
        right = solved(given.stated, given.total())
        if found is None or found[3] is None or right is None:
            continue
        _, where, told, table = found
        if changed(right, table):
            return Planted(given, kind, where, told, {name: f"{force:.4g}" for name, force in table.items()})


def changed(right: Table, table: Table) -> bool:
    """Return whether some value is changed by more than 20 roundings to four figures, noise aside."""
    noise = 1e-6 * max(map(abs, right.values()))

    def roundings(name: str) -> float:
        size = max(abs(right[name]), abs(table[name]), noise)
        return abs(right[name] - table[name]) / (0.5 * 10.0 ** (np.floor(np.log10(size)) - 3))

    return any(roundings(name) > CHANGE for name in table) or (set(table) != set(right))


def sign(_: random.Random, given: Project) -> Blunder:
    table = solved(given.stated, given.total())
    return "sign", (), "all signs", table and {name: -force for name, force in table.items()}


def scale(draw: random.Random, given: Project) -> Blunder:
    factor = draw.choice([1000, 0.001, 4.4482216152605, 1 / 4.4482216152605, 12, 1 / 12, 0.3048, 1 / 0.3048])
    factor = draw.choice([factor, 1.35, 1.5, 1.6, 1 / 1.2, 9.80665, 2, 0.5, 1.4, 1.25, 25.4])
    table = solved(given.stated, given.total())
    return "scale", (), f"times {factor:g}", table and {name: factor * force for name, force in table.items()}


def _combination(draw: random.Random, given: Project) -> Project:
    return replace(given, compared=draw.choice(list(given.combinations)))


def case_missing(draw: random.Random, given: Project) -> Blunder | None:
    case = draw.choice(list(given.factors))
    factors = {name: factor for name, factor in given.factors.items() if name != case}
    return ("case-missing", (case,), case, solved(given.stated, given.total(factors))) if factors else None


def case_doubled(draw: random.Random, given: Project) -> Blunder:
    case = draw.choice(list(given.factors))
    factors = {**given.factors, case: 2 * given.factors[case]}
    return "case-doubled", (case,), case, solved(given.stated, given.total(factors))


def wrong_combination(draw: random.Random, given: Project) -> Blunder:
    states = {name: {name: 1.0} for name in given.cases}
    states |= {name: {case: float(f) for case, f in factors.items()} for name, factors in given.combinations.items()}
    other = draw.choice([name for name in states if name != given.compared])
    return "wrong-combination", (other,), other, solved(given.stated, given.total(states[other]))


def _load(kind: str, factor: float) -> Callable[[random.Random, Project], Blunder]:
    def planted(draw: random.Random, given: Project) -> Blunder:
        loads = given.total()
        joint = draw.choice(list(loads))
        loads[joint] = (factor * loads[joint][0], factor * loads[joint][1])
        return kind, (joint,), joint, solved(given.stated, loads)

    return planted


def load_moved(draw: random.Random, given: Project) -> Blunder:
    loads = given.total()
    joint = draw.choice(list(loads))
    other = draw.choice(neighbours(given.stated, joint))
    (fx, fy), (x, y) = loads.pop(joint), loads.get(other, (0.0, 0.0))
    loads[other] = (x + fx, y + fy)
    return "load-moved", (joint, other), f"{joint} to {other}", solved(given.stated, loads)


def _links(support: Any) -> int:
    return 2 if support == "pin" else len(support) if isinstance(support, list) else 1


def support_exchanged(_: random.Random, given: Project) -> Blunder | None:
    supports = dict(given.stated.supports)
    pins = [joint for joint, support in supports.items() if _links(support) == 2]
    rollers = [joint for joint, support in supports.items() if _links(support) == 1]
    if not pins or not rollers:
        return None
    one, other = pins[0], rollers[-1]
    supports[one], supports[other] = supports[other], supports[one]
    altered = replace(given.stated, supports=supports)
    return "support-exchanged", (one, other), f"{one}, {other}", solved(altered, given.total())


def support_extra(draw: random.Random, given: Project) -> Blunder | None:
    rollers = [joint for joint, support in given.stated.supports.items() if _links(support) == 1]
    if not rollers:
        return None
    joint = draw.choice(rollers)
    altered = replace(given.stated, supports={**given.stated.supports, joint: "pin"})
    return "support-extra", (joint,), joint, solved(altered, given.total())


def support_turned(draw: random.Random, given: Project) -> Blunder | None:
    rollers = [joint for joint, support in given.stated.supports.items() if _links(support) == 1]
    if not rollers:
        return None
    joint = draw.choice(rollers)
    support = given.stated.supports[joint]
    dx, dy = ("0", "1") if support == "roller" else support["reaction"]
    turned = draw.choice([(dy, dx), (f"-({dx})", dy), ("1", "0"), ("0", "1"), ("1", "2"), ("-3", "4"), ("1", "1")])
    altered = replace(given.stated, supports={**given.stated.supports, joint: {"reaction": turned}})
    return "support-turned", (joint,), f"{joint} {turned}", solved(altered, given.total())


def mirrored(draw: random.Random, given: Project) -> Blunder | None:
    places = {joint: (float(value(x)), float(value(y))) for joint, (x, y) in given.stated.joints.items()}
    across = [x for x, _ in places.values()]
    middle = min(across) + max(across)
    image = {
        joint: next((o for o, (u, v) in places.items() if abs(u - middle + x) < 1e-9 and abs(v - y) < 1e-9), "")
        for joint, (x, y) in places.items()
    }
    loads = given.total()
    ways = ["truss"]
    if all(image.values()):
        ways.append("loads")
        there = {frozenset(name.split("-")): name for name in given.stated.members}
        partner = {name: there.get(frozenset(image[end] for end in name.split("-"))) for name in given.stated.members}
        ways += ["table"] * all(partner.values())
    way = draw.choice(ways)
    if way == "table":
        table = solved(given.stated, loads)
        return "mirrored", (), way, table and {name: table[partner[name]] for name in table}
    if way == "loads":
        return "mirrored", (), way, solved(given.stated, {image[joint]: load for joint, load in loads.items()})
    joints = {joint: (f"{middle!r}-({x})", y) for joint, (x, y) in given.stated.joints.items()}
    return "mirrored", (), way, solved(replace(given.stated, joints=joints), loads)


def rows_exchanged(draw: random.Random, given: Project) -> Blunder:
    table = solved(given.stated, given.total())
    assert table
    one, other = draw.sample(list(table), 2)
    table[one], table[other] = table[other], table[one]
    return "rows-exchanged", (one, other), f"{one}, {other}", table


def member_missing(draw: random.Random, given: Project) -> Blunder:
    gone = draw.choice(given.stated.members)
    rest = replace(given.stated, members=tuple(name for name in given.stated.members if name != gone))
    table = solved(rest, given.total())
    if table is not None and draw.random() < 0.5:
        table[gone] = 0.0
    whole = solved(given.stated, given.total())
    if table is None or whole is None or not changed({name: whole[name] for name in table}, table):
        table = None
    return "member-missing", (gone,), gone, table


def joint_displaced(draw: random.Random, given: Project) -> Blunder | None:
    joint = draw.choice(list(given.stated.joints))
    axis = draw.choice([0, 1])
    number = float(value(given.stated.joints[joint][axis]))
    typed = f"{number:.{draw.choice([3, 4, 6])}f}".rstrip("0").rstrip(".")
    slipped = draw.choice([_digits_exchanged, _sign_turned, _point_moved])(draw, typed)
    if slipped is None or float(slipped) == float(typed):
        return None
    pair = list(given.stated.joints[joint])
    pair[axis] = slipped
    altered = replace(given.stated, joints={**given.stated.joints, joint: (pair[0], pair[1])})
    told = f"{joint} {'xy'[axis]} {typed} typed {slipped}"
    return "joint-displaced", (joint,), told, solved(altered, given.total())


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


def stiff_joints(draw: random.Random, given: Project) -> Blunder:
    slenderness = 10 ** draw.uniform(1.2, 2.1)
    return "stiff-joints", (), f"mean length / radius {slenderness:.0f}", frame_forces(given, slenderness)


def frame_forces(given: Project, slenderness: float) -> Table:
    """Return the axial forces of a frame with EA and EI the same for all members, by whole member matrices."""
    truss: Truss = given.stated.truss
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
    for joint, pair in given.total().items():
        loads[index[joint] : index[joint] + 2] += pair
    moves = np.linalg.solve(matrix, loads)
    return {name: float(row @ moves[own]) for name, own, row in parts}


BLUNDERS: dict[str, Callable[[random.Random, Project], Blunder | None]] = {
    "sign": sign,
    "scale": scale,
    "case-missing": case_missing,
    "case-doubled": case_doubled,
    "load-missing": _load("load-missing", 0.0),
    "load-doubled": _load("load-doubled", 2.0),
    "load-reversed": _load("load-reversed", -1.0),
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
