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

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from sympy.polys.matrices.sdm import sdm_irref

from trusscalc.errors import UnstableTrussError
from trusscalc.exact import ONE, UNIT_KEY, ZERO, Exact, Key, in_one_field, plain
from trusscalc.loads import LoadCase
from trusscalc.roots import sqrt
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
    bars = bars_of(truss)
    order = _joint_order(truss)
    columns = sorted(range(len(bars)), key=lambda index: _bar_place(bars[index], order))
    rows = _equations(bars, columns, order)
    loads = _right_sides(case, order)
    result = _rational_solution(rows, loads, len(bars)) or _field_solution(rows, loads, len(bars))
    pivots, free_of, values = result
    if len(pivots) < len(rows):
        raise _mechanism(truss, bars, rows, order)
    tensions: dict[str, Exact] = {}
    for place, column in enumerate(columns):
        if place in pivots and not free_of[place]:
            tensions[bars[column].name] = values[place]
    undecided = tuple(bar.name for bar in bars if bar.name not in tensions)
    if not undecided:
        return Equilibrium(bars, tensions, undecided, len(pivots))
    names = {place: bars[column].name for place, column in enumerate(columns)}
    groups = _sharing([{names[c] for c in circuit} for circuit in _circuits(free_of, len(columns), pivots)])
    order_of = {bar.name: place for place, bar in enumerate(bars)}
    sharing = tuple(tuple(sorted(group, key=order_of.__getitem__)) for group in groups)
    return Equilibrium(bars, tensions, undecided, len(pivots), sharing, _internal_degree(bars, columns, rows))


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

Solution = tuple[set[int], dict[int, tuple[int, ...]], dict[int, Exact]]
"""Pivot columns, the free columns in each pivot's row, and the value with free columns at zero."""


def _field_solution(rows: list[dict[int, Exact]], loads: Mapping[int, Exact], width: int) -> Solution:
    """Eliminate in the number field itself."""
    matrix = {
        index: {**row, **({width: loads[index]} if index in loads else {})}
        for index, row in enumerate(rows)
        if row or index in loads
    }
    return _read_off(matrix, width, lambda row: row.get(width, ZERO))


def _read_off(matrix: dict[int, Row], width: int, value: Callable[[Row], Exact]) -> Solution:
    reduced, pivots, _ = sdm_irref(matrix)
    found = [pivot for pivot in pivots if pivot < width]
    free_of: dict[int, tuple[int, ...]] = {}
    values = {}
    for place, pivot in enumerate(found):
        row = reduced[place]
        free_of[pivot] = tuple(sorted(column for column in row if column < width and column != pivot))
        values[pivot] = value(row)
    return set(found), free_of, values


def _rational_solution(rows: list[dict[int, Exact]], loads: Mapping[int, Exact], width: int) -> Solution | None:
    """Eliminate over the rationals after scaling rows and columns; None when no scaling makes them rational.

    A right side with roots is split into one rational column for each root.
    """
    scaling = _scaling(rows, width)
    if scaling is None:
        return None
    row_scale, column_scale = scaling
    matrix: dict[int, Row] = {}
    keys: dict[Key, int] = {}
    sides: dict[tuple[int, int], Any] = {}
    for index, row in enumerate(rows):
        scaled: Row = {}
        for column, entry in row.items():
            factor = _scaled(_scaled(entry, row_scale[index]), column_scale[column])
            scaled[column] = factor.terms[UNIT_KEY]
        if index in loads:
            side = _scaled(loads[index], row_scale[index])
            if side.tower:
                return None
            for key, coefficient in side.terms.items():
                sides[index, width + keys.setdefault(key, len(keys))] = coefficient
        if scaled or index in loads:
            matrix[index] = scaled
    for (index, column), coefficient in in_one_field(sides).items():
        matrix[index][column] = coefficient

    def value(row: Row) -> Exact:
        terms = {key: plain(row[width + place]) for key, place in keys.items() if width + place in row}
        return Exact(terms, rounded=any_rounded)

    any_rounded = any(part.rounded for row in rows for part in row.values()) or any(
        part.rounded for part in loads.values()
    )
    pivots, free_of, values = _read_off(matrix, width, value)
    return pivots, free_of, {column: _scaled(amount, column_scale[column]) for column, amount in values.items()}


def _scaled(value: Exact, scale: Exact) -> Exact:
    """Return a product that costs nothing for the usual scale 1."""
    return value if scale is ONE else value * scale


def _scaling(rows: list[dict[int, Exact]], width: int) -> tuple[list[Exact], list[Exact]] | None:
    """Return factors for rows and columns that make every entry rational, or None."""
    if all(part.is_rational for row in rows for part in row.values()):
        return [ONE] * len(rows), [ONE] * width
    row_scale, column_scale = _spread_scales(rows, width)
    fits = all(
        (row_scale[index] * entry * column_scale[column]).is_rational
        for index, row in enumerate(rows)
        for column, entry in row.items()
    )
    if not fits:
        return None
    return [row_scale[index] for index in range(len(rows))], [column_scale.get(c, ONE) for c in range(width)]


def _spread_scales(rows: list[dict[int, Exact]], width: int) -> tuple[dict[int, Exact], dict[int, Exact]]:
    """Return factors that make one entry of every row and column rational, passed on from entry to entry."""
    in_column: list[list[int]] = [[] for _ in range(width)]
    for index, row in enumerate(rows):
        for column in row:
            in_column[column].append(index)
    row_scale: dict[int, Exact] = {}
    column_scale: dict[int, Exact] = {}
    for start in range(len(rows)):
        waiting = [] if start in row_scale else [start]
        row_scale.setdefault(start, ONE)
        while waiting:
            index = waiting.pop()
            for column, entry in rows[index].items():
                if column in column_scale:
                    continue
                column_scale[column] = _root_part(row_scale[index] * entry).inverse()
                new = [other for other in in_column[column] if other not in row_scale]
                for other in new:
                    row_scale[other] = _root_part(rows[other][column] * column_scale[column]).inverse()
                waiting += new
    return row_scale, column_scale


def _root_part(value: Exact) -> Exact:
    """Return the root of a one-term number without its rational factor (other numbers as they are)."""
    if len(value.terms) == 1 and not value.symbols:
        return Exact({next(iter(value.terms)): ONE.terms[UNIT_KEY]}, value.tower)
    return value


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
