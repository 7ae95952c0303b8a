"""Equilibrium of all joints at once: rank, mechanism, and the whole exact solution.

The unknown of a bar is its tension coefficient t = N / L, force per length (Müller-Breslau; Southwell). A
joint's equations then need coordinates only: sum of t (dx, dy) + load = 0, and lengths, the surds, appear
at the very end in N = t L. A support link is a bar to the ground along its direction.

The count m + r = 2j proves nothing; stability is the exact rank. Elimination is sympy's sparse
Gauss-Jordan over rows and columns in order along the truss (1,600 unknowns in some 20 ms). Where roots in
the coordinates can be scaled away row by row and column by column (a 60 degree Warren: every y a multiple
of sqrt(3)) the elimination is rational all the same.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from sympy.polys.matrices.sdm import sdm_irref

from trusscalc.errors import UnstableTrussError
from trusscalc.exact import UNIT_KEY, ZERO, Exact, Key, in_one_field, plain
from trusscalc.loads import LoadCase
from trusscalc.roots import sqrt
from trusscalc.statics.scaling import scaled, scaling
from trusscalc.truss import Truss

GROUND = ""
"""The name of the ground among joints; no joint can have it."""

MOST_NAMED = 100
"""Joints named in one message."""

Row = dict[int, Any]


@dataclass(frozen=True, slots=True)
class Bar:
    """A member or a support link: what carries one unknown.

    Attributes
    ----------
    name : str
        Member or reaction name.
    start, end : str
        Joints; ``end`` is GROUND for a link.
    dx, dy : Exact
        From start to end (a link: its written direction). Pulled, it draws its start along (dx, dy).
    """

    name: str
    start: str
    end: str
    dx: Exact
    dy: Exact

    @property
    def is_link(self) -> bool:
        """True for a support link."""
        return self.end == GROUND

    @property
    def length_squared(self) -> Exact:
        """The square of the length (for a link: of its written direction)."""
        return self.dx * self.dx + self.dy * self.dy

    @property
    def length(self) -> Exact:
        """The length, for printing and for the force N = t L."""
        return sqrt(self.length_squared, proven=False)


def bars_of(truss: Truss) -> tuple[Bar, ...]:
    """Return the truss's members, then its support links, as bars."""
    place = {joint.name: joint for joint in truss.joints}
    members = []
    for member in truss.members:
        a, b = place[member.start], place[member.end]
        members.append(Bar(member.name, a.name, b.name, b.x - a.x, b.y - a.y))
    return (*members, *(Bar(link.name, link.joint, GROUND, link.dx, link.dy) for link in truss.links))


@dataclass(frozen=True, slots=True)
class Equilibrium:
    """The exact solution of all joint equations.

    Attributes
    ----------
    bars : tuple of Bar
        Members, then links.
    tensions : dict of str to Exact
        t = N / L of every member and link that equilibrium alone decides.
    undecided : tuple of str
        Members and links that statics alone does not decide.
    rank : int
        Exact rank of the equilibrium matrix, 2j for every truss that gets here.
    sharing : tuple of tuple of str
        Groups of undecided bars that share redundancies: within a group a change of one force changes others,
        between groups nothing passes.
    internal_degree : int
        Independent states of self-stress among the members alone.
    """

    bars: tuple[Bar, ...]
    tensions: Mapping[str, Exact]
    undecided: tuple[str, ...]
    rank: int
    sharing: tuple[tuple[str, ...], ...] = ()
    internal_degree: int = 0

    @property
    def degree(self) -> int:
        """The degree of static indeterminacy, m + r - 2j."""
        return len(self.bars) - self.rank

    @property
    def external_degree(self) -> int:
        """The part of the degree that the reactions bring in: nothing of it is left when they are known."""
        return self.degree - self.internal_degree

    @property
    def forces(self) -> dict[str, Exact]:
        """Axial forces and reactions, tension (or along the written direction) positive."""
        return {bar.name: self.tensions[bar.name] * bar.length for bar in self.bars if bar.name in self.tensions}


def solve(truss: Truss, case: LoadCase) -> Equilibrium:
    """Return the exact solution of all joint equations.

    Raises
    ------
    UnstableTrussError
        When the matrix is short of rank; names the joints that move.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> solve(truss, LoadCase("dead", {"C": (0, -2)})).forces["A-C"]
    Exact('-sqrt(5)')
    """
    return solve_all(truss, (case,))[0]


def solve_all(truss: Truss, cases: Sequence[LoadCase]) -> tuple[Equilibrium, ...]:
    """Return the exact solutions for many load cases, in their order, from one elimination with many right sides.

    Raises
    ------
    UnstableTrussError
        When the matrix is short of rank; names the joints that move.
    """
    bars = bars_of(truss)
    order = _joint_order(truss)
    columns = sorted(range(len(bars)), key=lambda index: _bar_place(bars[index], order))
    rows = _equations(bars, columns, order)
    loads = [_right_sides(case, order) for case in cases]
    result = _rational_solution(rows, loads, len(bars)) or _field_solution(rows, loads, len(bars))
    pivots, free_of, values = result
    if len(pivots) < len(rows):
        raise _mechanism(truss, bars, rows, order)
    names = {place: bars[column].name for place, column in enumerate(columns)}
    decided = [place for place in names if place in pivots and not free_of[place]]
    undecided = tuple(sorted(set(names.values()) - {names[place] for place in decided}, key=_place_of(bars)))
    sharing: tuple[tuple[str, ...], ...] = ()
    internal = 0
    if undecided:
        groups = _sharing([{names[c] for c in circuit} for circuit in _circuits(free_of, len(columns), pivots)])
        sharing = tuple(tuple(sorted(group, key=_place_of(bars))) for group in groups)
        internal = _internal_degree(bars, columns, rows)
    tensions = [{names[place]: of_case[place] for place in decided} for of_case in values]
    return tuple(Equilibrium(bars, found, undecided, len(pivots), sharing, internal) for found in tensions)


def _place_of(bars: tuple[Bar, ...]) -> Callable[[str], int]:
    """Return the key that sorts names of bars in the order of the truss."""
    return {bar.name: place for place, bar in enumerate(bars)}.__getitem__


def _circuits(free_of: Mapping[int, tuple[int, ...]], width: int, pivots: set[int]) -> list[set[int]]:
    """Return for every free column the columns of its state of self-stress."""
    circuits = {column: {column} for column in range(width) if column not in pivots}
    for pivot, free in free_of.items():
        for column in free:
            circuits[column].add(pivot)
    return list(circuits.values())


def _sharing(circuits: list[set[str]]) -> list[set[str]]:
    """Merge the circuits that have a bar in common."""
    groups: list[set[str]] = []
    for circuit in circuits:
        merged = set(circuit)
        apart = []
        for group in groups:
            if group & merged:
                merged |= group
            else:
                apart.append(group)
        groups = [*apart, merged]
    return groups


def _internal_degree(bars: tuple[Bar, ...], columns: list[int], rows: list[dict[int, Exact]]) -> int:
    """Return the number of states of self-stress without reactions."""
    links = {place for place, column in enumerate(columns) if bars[column].is_link}
    members = {
        index: {place: entry for place, entry in row.items() if place not in links} for index, row in enumerate(rows)
    }
    _, pivots, _ = sdm_irref({index: row for index, row in members.items() if row})
    return len(bars) - len(links) - len(pivots)


def joint_residuals(
    bars: tuple[Bar, ...], case: LoadCase, tensions: Mapping[str, Exact]
) -> dict[str, tuple[Exact, Exact]]:
    """Return load plus bar forces at every joint, exactly; zero where the joint is in equilibrium.

    Parameters
    ----------
    bars, case, tensions
        All bars, the loads, and t = N / L of every bar.
    """
    totals: dict[str, tuple[Exact, Exact]] = {}

    def add(joint: str, fx: Exact, fy: Exact) -> None:
        x, y = totals.get(joint, (ZERO, ZERO))
        totals[joint] = (x + fx, y + fy)

    for load in case.loads:
        add(load.joint, load.fx, load.fy)
    for bar in bars:
        fx, fy = tensions[bar.name] * bar.dx, tensions[bar.name] * bar.dy
        add(bar.start, fx, fy)
        if not bar.is_link:
            add(bar.end, -fx, -fy)
    return totals


# --- assembling -------------------------------------------------------------------------------------------


def _joint_order(truss: Truss) -> dict[str, int]:
    """Return each joint's place along the truss's longer direction, which keeps the elimination narrow."""
    places = {joint.name: (float(joint.x), float(joint.y)) for joint in truss.at_values().joints}
    spans = [max(p[axis] for p in places.values()) - min(p[axis] for p in places.values()) for axis in (0, 1)]
    first = 0 if spans[0] >= spans[1] else 1
    ordered = sorted(places, key=lambda name: (places[name][first], places[name][1 - first]))
    return {name: place for place, name in enumerate(ordered)}


def _bar_place(bar: Bar, order: Mapping[str, int]) -> tuple[int, int]:
    ends = [order[end] for end in (bar.start, bar.end) if end != GROUND]
    return min(ends), max(ends)


def _equations(bars: tuple[Bar, ...], columns: list[int], order: Mapping[str, int]) -> list[dict[int, Exact]]:
    rows: list[dict[int, Exact]] = [{} for _ in range(2 * len(order))]
    for place, column in enumerate(columns):
        bar = bars[column]
        for axis, part in ((0, bar.dx), (1, bar.dy)):
            if part:
                rows[2 * order[bar.start] + axis][place] = part
                if not bar.is_link:
                    rows[2 * order[bar.end] + axis][place] = -part
    return rows


def _right_sides(case: LoadCase, order: Mapping[str, int]) -> dict[int, Exact]:
    sides: dict[int, Exact] = {}
    for load in case.loads:
        for axis, part in ((0, load.fx), (1, load.fy)):
            if part:
                sides[2 * order[load.joint] + axis] = -part
    return sides


# --- elimination ------------------------------------------------------------------------------------------

Sides = Mapping[int, Exact]
"""The right side of one load case: minus the load in each row that has one."""

Solution = tuple[set[int], dict[int, tuple[int, ...]], list[dict[int, Exact]]]
"""Pivot columns, the free columns in each pivot's row, and for each case the values with free columns at zero."""


def _field_solution(rows: list[dict[int, Exact]], loads: Sequence[Sides], width: int) -> Solution:
    """Eliminate in the number field itself."""
    matrix: dict[int, Row] = {index: dict(row) for index, row in enumerate(rows) if row}
    for place, sides in enumerate(loads):
        for index, side in sides.items():
            matrix.setdefault(index, {})[width + place] = side
    return _read_off(matrix, width, lambda row: [row.get(width + place, ZERO) for place in range(len(loads))])


def _read_off(matrix: dict[int, Row], width: int, value: Callable[[Row], list[Exact]]) -> Solution:
    reduced, pivots, _ = sdm_irref(matrix)
    found = [pivot for pivot in pivots if pivot < width]
    free_of: dict[int, tuple[int, ...]] = {}
    values = []
    for place, pivot in enumerate(found):
        row = reduced[place]
        free_of[pivot] = tuple(sorted(column for column in row if column < width and column != pivot))
        values.append(value(row))
    return set(found), free_of, [dict(zip(found, of_case, strict=True)) for of_case in zip(*values, strict=True)]


def _rational_solution(rows: list[dict[int, Exact]], loads: Sequence[Sides], width: int) -> Solution | None:
    """Eliminate over the rationals after scaling rows and columns; None when no scaling makes them rational.

    A right side with roots is split into one rational column for each root.
    """
    scales = scaling(rows, width)
    if scales is None:
        return None
    row_scale, column_scale = scales
    matrix: dict[int, Row] = {}
    for index, row in enumerate(rows):
        if row:
            matrix[index] = {
                column: scaled(scaled(entry, row_scale[index]), column_scale[column]).terms[UNIT_KEY]
                for column, entry in row.items()
            }
    split = _split_sides(loads, row_scale)
    if split is None:
        return None
    columns = {owner: width + place for place, owner in enumerate(dict.fromkeys(owner for _, owner in split))}
    for (index, owner), coefficient in in_one_field(split).items():
        matrix.setdefault(index, {})[columns[owner]] = coefficient
    owners = list(columns)
    in_rows = any(part.rounded for row in rows for part in row.values())
    is_rounded = [in_rows or any(part.rounded for part in sides.values()) for sides in loads]

    def value(row: Row) -> list[Exact]:
        terms: list[dict[Key, Any]] = [{} for _ in loads]
        for column, coefficient in row.items():
            if column >= width:
                case, key = owners[column - width]
                terms[case][key] = plain(coefficient)
        return [Exact(own, rounded=rounded) for own, rounded in zip(terms, is_rounded, strict=True)]

    pivots, free_of, values = _read_off(matrix, width, value)
    return (
        pivots,
        free_of,
        [{column: scaled(amount, column_scale[column]) for column, amount in of_case.items()} for of_case in values],
    )


def _split_sides(loads: Sequence[Sides], row_scale: list[Exact]) -> dict[tuple[int, tuple[int, Key]], Any] | None:
    """Return the coefficient of every root in every right side, by row and by case and root; None for nested roots."""
    split: dict[tuple[int, tuple[int, Key]], Any] = {}
    for case, sides in enumerate(loads):
        for index, load in sides.items():
            side = scaled(load, row_scale[index])
            if side.tower:
                return None
            for key, coefficient in side.terms.items():
                split[index, (case, key)] = coefficient
    return split


# --- mechanism --------------------------------------------------------------------------------------------


def _mechanism(
    truss: Truss, bars: tuple[Bar, ...], rows: list[dict[int, Exact]], order: Mapping[str, int]
) -> UnstableTrussError:
    """Return the error that names the joints that move, from the exact null vectors of the transposed matrix."""
    transposed: dict[int, Row] = {}
    for index, row in enumerate(rows):
        for column, entry in row.items():
            transposed.setdefault(column, {})[index] = entry
    reduced, pivots, _ = sdm_irref(transposed)
    free = sorted(set(range(len(rows))) - set(pivots))
    touched = set(free) | {pivot for place, pivot in enumerate(pivots) if len(reduced[place]) > 1}
    first = free[0]
    moves = {first: 1.0}
    for place, pivot in enumerate(pivots):
        if first in reduced[place]:
            moves[pivot] = -float(reduced[place][first])
    largest = max(abs(move) for move in moves.values())
    names = [joint.name for joint in truss.joints if {2 * order[joint.name], 2 * order[joint.name] + 1} & touched]
    shape = {
        joint.name: (
            moves.get(2 * order[joint.name], 0.0) / largest,
            moves.get(2 * order[joint.name] + 1, 0.0) / largest,
        )
        for joint in truss.joints
        if {2 * order[joint.name], 2 * order[joint.name] + 1} & set(moves)
    }
    message = _instability_text(truss, bars, len(pivots), names)
    return UnstableTrussError(message, joints=names, mechanism=shape, truss=truss)


def _instability_text(truss: Truss, bars: tuple[Bar, ...], rank: int, names: list[str]) -> str:
    joints, links = len(truss.joints), len(truss.links)
    members = len(bars) - links
    unknowns = members + links
    count = f"m + r = {members} + {links} = {unknowns} against 2j = {2 * joints}, rank {rank}"
    if unknowns < 2 * joints:
        missing = 2 * joints - unknowns
        cause = "one bar or support link too few" if missing == 1 else f"{missing} bars or support links too few"
    elif rank == unknowns or unknowns == 2 * joints:
        cause = "the count is right but the arrangement is not (a critical form, or one part held too often)"
    else:
        cause = "one part is held more than once and another not at all"
    shown = ", ".join(names[:MOST_NAMED]) + (f" and {len(names) - MOST_NAMED} more" if len(names) > MOST_NAMED else "")
    who = f"{'the whole truss can move, ' if len(names) == joints else ''}joints that can move: {shown}"
    return f"the truss is unstable ({count}): {cause}; {who}. Add or rearrange members or supports there."
