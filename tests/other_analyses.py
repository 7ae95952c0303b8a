"""Another analysis of the same truss: its model and what it does to its table, solved without altered models of ours.

A truss is altered as text (``stated_truss.Stated``). The model with stiff joints is a plain frame of our own: whole
stiffness matrices of members, added up, its links by multipliers.
"""

from __future__ import annotations

import random
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

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
    """What another analysis does: its model, the slenderness of its stiff members (0: hinges), changes of its table."""

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


def sound(stated: Stated) -> Truss | None:
    """Return the library's record of a truss, or None for one it refuses or warns of."""
    with warnings.catch_warnings():
        warnings.simplefilter("error", TrusscalcWarning)
        try:
            return stated.truss
        except (InputError, TrusscalcWarning):
            return None


def solved(truss: Stated, loads: Mapping[str, tuple[float, float]]) -> Table | None:
    """Return the member forces, or None for a truss that hardly stands."""
    model = sound(truss)
    if model is None:
        return None
    found = stiffness.solve(model, LoadCase("x", {joint: pair for joint, pair in loads.items() if any(pair)}))
    return found.forces if found.condition < WORST else None


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
    links = np.zeros((len(truss.links), len(matrix)))  # each holds a displacement at zero, its reaction unknown
    for row, link in zip(links, truss.links, strict=True):
        row[index[link.joint] : index[link.joint] + 2] = float(link.dx), float(link.dy)
    loads = np.zeros(len(matrix) + len(links))
    for joint, pair in acting.items():
        loads[index[joint] : index[joint] + 2] += pair
    bordered = np.block([[matrix, links.T], [links, np.zeros((len(links),) * 2)]])
    moves = np.linalg.solve(bordered, loads)
    return {name: float(row @ moves[own]) for name, own, row in parts}


# --- projects ---------------------------------------------------------------------------------------------


def any_random(draw: random.Random) -> Stated:
    """Return a random truss of 6 to 16 joints."""
    while True:
        try:
            stated = random_truss(draw, draw.randint(6, 16), draw.choice(["rational", "rational", "surd"]))
        except ZeroDivisionError:  # two joints fell together
            continue
        if sound(stated):
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
    return more if frozenset(ends) not in there and sound(more) else stated
