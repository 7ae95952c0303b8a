r"""The numeric route: every member force, reaction and displacement by the displacement method, in floats.

With G = sqrt(EA/L) B, B the elongations of all members under unit displacements, the stiffness matrix is
K = G^T G. K is never formed: G is factored as QR, which keeps rounding errors near ``eps * cond(G)``, while a
factor of K would bring ``eps * cond(G)**2`` (measured on a Pratt truss of 400 panels: 2e-11 and 1e-7 of the
largest force). The joints are taken in breadth-first levels from one end of the truss. A member joins joints
of the same or of neighbouring levels, so R is block bidiagonal and the work grows with the length of the
truss, not its cube (5,000 members: 0.15 s). R^T R u = f is solved with two steps of refinement (corrected
seminormal equations: A. Björck, Numerical Methods for Least Squares Problems, SIAM 1996; from memory). What
is still unbalanced is taken from the member forces summed up so far, not from the displacements: these are
large where the truss is slender, and their rounding would come back multiplied by the stiffness. After one
step the forces of the same truss are right to 1e-15.

All members have the same EA; in a statically determinate truss the forces do not depend on it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from trusscalc.errors import InputError
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

Floats = NDArray[np.float64]
Whole = NDArray[np.intp]

BLOCK: Final = 24
"""Levels are merged to blocks of at least so many displacements: fewer, larger numpy calls (measured)."""

REFINEMENTS: Final = 2

NO_PIVOT: Final = 1e-13
"""A pivot below this part of the norm of G is a mechanism. Verdicts end at a condition of 5e8, long before."""

PARALLEL: Final = 8 * float(np.finfo(np.float64).eps)
"""Links of one joint whose smaller singular value is below this part of the larger are one direction."""

MOST_ESTIMATES: Final = 5
"""Steps of the norm estimate; two or three are usual."""


@dataclass(frozen=True, slots=True)
class StiffnessResult:
    """What the stiffness route found.

    Attributes
    ----------
    forces : dict of str to float
        Axial force by member name, tension positive, in the truss's unit of force.
    reactions : dict of str to float
        Reaction by link name, on the truss, positive along the link's direction as stated.
    displacements : dict of str to (float, float)
        Displacement of each joint for EA = 1: divide by EA for a length (force times length over EA).
    residual : float
        The largest imbalance of forces at any joint, as part of the largest force, load or reaction.
    condition : float
        Estimate of the condition number of G in the 2-norm, or of the worst supported joint's links where that
        is larger; does not depend on units. ``inf``: the numbers mean nothing.
    """

    forces: dict[str, float]
    reactions: dict[str, float]
    displacements: dict[str, tuple[float, float]]
    residual: float
    condition: float


@dataclass(frozen=True, slots=True)
class Response:
    """The kernel's answer as arrays, in the order and units of its input; see ``StiffnessResult``.

    Attributes
    ----------
    forces : (members,) float
    reactions : (links,) float
    displacements : (joints, 2) float
    residual, condition : float
    """

    forces: Floats
    reactions: Floats
    displacements: Floats
    residual: float
    condition: float


def member_forces(truss: Truss, case: LoadCase) -> dict[str, float]:
    """Return the axial force of every member by name, tension positive, in the truss's unit of force.

    Raises
    ------
    InputError
        When the case loads a joint the truss does not have.

    Examples
    --------
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> {name: round(force, 9) for name, force in member_forces(roof, LoadCase("snow", {"C": (0, -12)})).items()}
    {'A-B': 8.0, 'A-C': -10.0, 'C-B': -10.0}
    """
    return solve(truss, case).forces


def solve(truss: Truss, case: LoadCase) -> StiffnessResult:
    """Return forces, reactions, displacements and their quality for one load case.

    Statically indeterminate trusses are solved for the same EA in all members. Of more links at a joint than it
    has directions each takes its share as if all were equally stiff (the least sum of squares).

    Raises
    ------
    InputError
        When the case loads a joint the truss does not have.

    Notes
    -----
    A mechanism is no error here: the joint displacements no member resists are held, ``residual`` shows what
    the hold carries, and ``condition`` is ``inf``.

    Examples
    --------
    >>> prop = Truss({"A": (0, 0), "B": (0, 3), "C": (4, 0)}, ["A-C", "B-C"], {"A": "pin", "B": "pin"})
    >>> found = solve(prop, LoadCase("lamp", {"C": (0, -6)}))
    >>> {name: round(reaction, 9) for name, reaction in found.reactions.items()}
    {'A.x': 8.0, 'A.y': 0.0, 'B.x': -8.0, 'B.y': 6.0}
    >>> found.residual < 1e-14, found.condition < 5
    (True, True)
    """
    return solve_all(truss, (case,))[0]


def solve_all(truss: Truss, cases: Sequence[LoadCase]) -> tuple[StiffnessResult, ...]:
    """Return what ``solve`` does for many load cases, in their order, from one factor.

    Raises
    ------
    InputError
        When a case loads a joint the truss does not have.
    """
    faults = [fault for case in cases for fault in case.faults(truss)]
    if faults:
        raise InputError(faults)
    model = truss.as_floats()
    index = {name: place for place, name in enumerate(model.joints)}
    factored = Factored(
        np.array(list(model.joints.values()), dtype=np.float64),
        np.array([(index[start], index[end]) for _, start, end in model.members], dtype=np.intp),
        np.array([index[joint] for _, joint, _, _ in model.links], dtype=np.intp),
        np.array([(dx, dy) for _, _, dx, dy in model.links], dtype=np.float64),
    )
    results = []
    for case in cases:
        loads = np.zeros((len(index), 2))
        for joint, force in case.as_floats().items():
            loads[index[joint]] += force
        found = factored.response(loads)
        moves: list[list[float]] = found.displacements.tolist()
        results.append(
            StiffnessResult(
                forces=dict(zip((name for name, _, _ in model.members), found.forces.tolist(), strict=True)),
                reactions=dict(zip((name for name, *_ in model.links), found.reactions.tolist(), strict=True)),
                displacements={name: (x, y) for name, (x, y) in zip(index, moves, strict=True)},
                residual=found.residual,
                condition=found.condition,
            )
        )
    return tuple(results)


class Factored:
    """A plane truss with EA = 1 in all members, factored once for any number of loads."""

    def __init__(self, places: Floats, ends: Whole, held: Whole, directions: Floats) -> None:
        """Factor the truss.

        Parameters
        ----------
        places : (joints, 2) float
            Coordinates.
        ends : (members, 2) int
            The joints each member connects.
        held : (links,) int
            The joint each support link holds.
        directions : (links, 2) float
            The links' unit vectors.
        """
        # a hopeless truss may overflow; that is seen in what comes out
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            self._bars = _bars(places, ends)
            self._supports = _supports(len(places), held, directions)
            self._factor = _factor(self._bars, self._supports)
            self._condition = max(self._factor.condition(), self._supports.condition)

    def response(self, loads: Floats) -> Response:
        """Return the response to loads, (joints, 2): forces on the joints.

        Forces are in the unit of the loads, displacements in that unit times the unit of the coordinates.
        """
        bars, condition = self._bars, self._condition
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            load_unit = _binary_order(loads)
            scaled = np.ldexp(loads, -load_unit)
            forces, moves = np.zeros(len(bars.lengths)), np.zeros_like(loads)
            for _ in range(1 + REFINEMENTS):
                further = self._factor.moves(scaled + _pull(bars, forces))
                moves += further
                forces += _elongations(bars, further) / bars.lengths
            if not (np.isfinite(forces).all() and np.isfinite(moves).all()):
                forces, moves, condition = np.zeros_like(forces), np.zeros_like(moves), np.inf
            reactions, residual = _balance(bars, self._supports, forces, scaled)
            return Response(
                forces=np.ldexp(forces, load_unit),
                reactions=np.ldexp(reactions, load_unit),
                displacements=np.ldexp(np.ldexp(moves, load_unit), bars.unit),
                residual=residual,
                condition=condition if bars.sound else np.inf,
            )


# --- bars and supports ------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Bars:
    """Members with the longest scaled to between 1/2 and 1 by the power of two ``unit``."""

    joints: int
    start: Whole
    end: Whole
    cosines: Floats
    lengths: Floats
    unit: int
    sound: bool
    """No member's ends round to the same place."""


def _binary_order(amounts: Floats) -> int:
    """Return the power of two just above the largest amount: scaling by it rounds nothing."""
    return int(np.frexp(np.abs(amounts).max(initial=0.0))[1])


def _bars(places: Floats, ends: Whole) -> _Bars:
    start, end = ends.T
    outer = _binary_order(places)
    scaled = np.ldexp(places, -outer)
    vectors = scaled[end] - scaled[start]
    inner = _binary_order(vectors)
    vectors = np.ldexp(vectors, -inner)
    lengths = np.hypot(*vectors.T)
    lost = lengths == 0  # exactly apart, but not in floats: such a member has no direction and carries nothing
    lengths[lost] = 1.0
    return _Bars(len(places), start, end, vectors / lengths[:, None], lengths, outer + inner, not lost.any())


def _elongations(bars: _Bars, moves: Floats) -> Floats:
    """Return B u, (members,), under joint displacements (joints, 2)."""
    return np.asarray(((moves[bars.end] - moves[bars.start]) * bars.cosines).sum(axis=1), dtype=np.float64)


def _pull(bars: _Bars, forces: Floats) -> Floats:
    """Return -B^T N, (joints, 2): what the members do to the joints."""
    total = np.zeros((bars.joints, 2))
    for axis in (0, 1):
        parts = forces * bars.cosines[:, axis]
        total[:, axis] = np.bincount(bars.start, parts, bars.joints) - np.bincount(bars.end, parts, bars.joints)
    return total


@dataclass(frozen=True, slots=True)
class _Supports:
    """The ways the joints can still move, and how links share what they carry."""

    directions: Floats
    free_joint: Whole
    free_direction: Floats
    shares: tuple[tuple[int, Whole, Floats], ...]
    """Joint, its links, and the (links, 2) matrix from a force on the links to each one's part."""
    condition: float


def _supports(joints: int, held: Whole, directions: Floats) -> _Supports:
    by_joint: dict[int, list[int]] = {}
    for link, joint in enumerate(held.tolist()):
        by_joint.setdefault(joint, []).append(link)
    ways: list[Floats] = [np.eye(2)] * joints
    shares, condition = [], 1.0
    for joint, listed in by_joint.items():
        links = np.array(listed, dtype=np.intp)
        left, sizes, right = np.linalg.svd(directions[links])
        rank = int((sizes > PARALLEL * sizes[0]).sum())
        shares.append((joint, links, (left[:, :rank] / sizes[:rank]) @ right[:rank]))
        ways[joint] = right[rank:]
        condition = max(condition, float(sizes[0] / sizes[rank - 1]))
    free_joint = np.repeat(np.arange(joints), [len(way) for way in ways])
    return _Supports(directions, free_joint, np.concatenate(ways), tuple(shares), condition)


def _balance(bars: _Bars, supports: _Supports, forces: Floats, loads: Floats) -> tuple[Floats, float]:
    """Return the reactions, and the largest imbalance they leave as part of the largest force."""
    unbalanced = loads + _pull(bars, forces)
    reactions = np.zeros(len(supports.directions))
    for joint, links, share in supports.shares:
        reactions[links] = -share @ unbalanced[joint]
        unbalanced[joint] += reactions[links] @ supports.directions[links]
    largest = max(float(np.abs(amounts).max(initial=0.0)) for amounts in (forces, reactions, loads))
    return reactions, float(np.hypot(*unbalanced.T).max()) / largest if largest else 0.0


# --- levels -----------------------------------------------------------------------------------------------


def _levels(bars: _Bars) -> Whole:
    """Return a level for each joint such that members join joints of equal or neighbouring levels."""
    neighbours: list[list[int]] = [[] for _ in range(bars.joints)]
    for start, end in zip(bars.start.tolist(), bars.end.tolist(), strict=True):
        neighbours[start].append(end)
        neighbours[end].append(start)
    level = np.full(bars.joints, -1, dtype=np.intp)
    for seed in range(bars.joints):
        if level[seed] < 0:  # the first joint, or one of a part not joined to what went before
            for depth, joints in enumerate(_levels_from_an_end(neighbours, seed)):
                level[joints] = depth
    return level


def _levels_from_an_end(neighbours: list[list[int]], seed: int) -> list[list[int]]:
    """Return the levels from a joint as far as possible from another (pseudo-peripheral): many and thin."""
    found = _levels_from(neighbours, seed)
    while True:
        far = min(found[-1], key=lambda joint: len(neighbours[joint]))
        farther = _levels_from(neighbours, far)
        if len(farther) <= len(found):
            return farther if len(farther) == len(found) else found
        found = farther


def _levels_from(neighbours: list[list[int]], start: int) -> list[list[int]]:
    seen = {start}
    found = [[start]]
    while found[-1]:
        following = []
        for joint in found[-1]:
            for other in neighbours[joint]:
                if other not in seen:
                    seen.add(other)
                    following.append(other)
        found.append(following)
    return found[:-1]


# --- the orthogonal factor --------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Factor:
    """R of G = QR, in blocks: each block's inverse on the diagonal and its coupling to the next block."""

    joint: Whole
    direction: Floats
    """Joint and direction of each free displacement, in the order of the blocks."""
    joints: int
    bounds: list[int]
    inverses: list[Floats]
    couplings: list[Floats]
    norm: float
    sound: bool
    """No pivot vanished."""

    def moves(self, forces: Floats) -> Floats:
        """Return the joint displacements (joints, 2) of R^T R u = f under joint forces (joints, 2)."""
        free = self.solve((forces[self.joint] * self.direction).sum(axis=1))
        parts = [np.bincount(self.joint, free * self.direction[:, axis], self.joints) for axis in (0, 1)]
        return np.stack(parts, axis=1)

    def solve(self, loads: Floats) -> Floats:
        """Return u of R^T R u = f, both in the order of the blocks."""
        blocks = list(zip(self.bounds[:-1], self.bounds[1:], self.inverses, self.couplings, strict=True))
        found = np.array(loads)
        carried: Floats | float = 0.0
        for begin, end, inverse, coupling in blocks:
            found[begin:end] = (found[begin:end] - carried) @ inverse
            carried = found[begin:end] @ coupling
        beyond = found[:0]
        for begin, end, inverse, coupling in reversed(blocks):
            found[begin:end] = inverse @ (found[begin:end] - coupling @ beyond)
            beyond = found[begin:end]
        return found

    def condition(self) -> float:
        """Return an estimate of cond_2(G): the root of the norms of K and of its inverse.

        The 1-norm of the inverse by Hager's ascent and Higham's safeguard (N. J. Higham, Accuracy and Stability
        of Numerical Algorithms, SIAM 2002, chapter 15; from memory), with a fixed start.
        """
        count = len(self.joint)
        if not count:
            return 1.0
        if not self.sound:
            return np.inf
        trial = np.full(count, 1 / count)
        largest = 0.0
        for _ in range(MOST_ESTIMATES):
            answer = self.solve(trial)
            size = float(np.abs(answer).sum())
            if size <= largest:
                break
            largest = size
            slope = self.solve(np.where(answer < 0, -1.0, 1.0))
            steepest = int(np.abs(slope).argmax())
            if abs(slope[steepest]) <= slope @ trial:
                break
            trial = np.zeros(count)
            trial[steepest] = 1.0
        waves = (1 + np.arange(count) / max(count - 1, 1)) * np.where(np.arange(count) % 2, -1.0, 1.0)
        largest = max(largest, 2 * float(np.abs(self.solve(waves)).sum()) / (3 * count))
        found = self.norm * float(np.sqrt(largest))
        return max(found, 1.0) if np.isfinite(found) else np.inf


def _factor(bars: _Bars, supports: _Supports) -> _Factor:
    level = _levels(bars)
    order = np.argsort(level[supports.free_joint], kind="stable")
    joint, direction = supports.free_joint[order], supports.free_direction[order]
    block, bounds = _blocks(level, joint)
    columns, values = _elongation_rows(bars, joint, direction)
    norm = _norm_bound(columns, values)
    # a member's row is eliminated with the earlier of its two joints
    turn = np.minimum(block[bars.start], block[bars.end])
    by_turn = np.argsort(turn, kind="stable")
    turns = np.searchsorted(turn[by_turn], np.arange(len(bounds))).tolist()
    inverses: list[Floats] = []
    couplings: list[Floats] = []
    sound = True
    carried = np.zeros((0, bounds[min(1, len(bounds) - 1)]))
    for here, (begin, end) in enumerate(pairwise(bounds)):
        width, beyond = end - begin, bounds[min(here + 2, len(bounds) - 1)] - end
        mine = by_turn[turns[here] : turns[here + 1]]
        # one column too many takes the entries of ends that cannot move
        front = np.zeros((len(carried) + len(mine), width + beyond + 1))
        front[: len(carried), :width] = carried
        rows = np.arange(len(carried), len(front))[:, None]
        front[rows, np.where(columns[mine] < 0, width + beyond, columns[mine] - begin)] = values[mine]
        triangle, whole = _triangle(front[:, :-1], width, norm)
        sound = sound and whole
        inverses.append(np.asarray(np.linalg.inv(triangle[:width, :width]), dtype=np.float64))
        couplings.append(triangle[:width, width:])
        carried = triangle[width:, width:]
    return _Factor(joint, direction, bars.joints, bounds, inverses, couplings, norm, sound)


def _blocks(level: Whole, joint: Whole) -> tuple[Whole, list[int]]:
    """Return the block of each joint, whole levels merged, and the bounds of the blocks' displacements."""
    bounds, reached = [0], 0
    block_of_level = []
    for size in np.bincount(level[joint], minlength=int(level.max()) + 1).tolist():
        block_of_level.append(len(bounds) - 1)
        reached += size
        if reached - bounds[-1] >= BLOCK:
            bounds.append(reached)
    if reached > bounds[-1]:
        bounds.append(reached)
    return np.array(block_of_level, dtype=np.intp)[level], bounds


def _elongation_rows(bars: _Bars, joint: Whole, direction: Floats) -> tuple[Whole, Floats]:
    """Return the rows of G, (members, 4): places of two displacements at each end (-1: held), and entries."""
    place = np.full((bars.joints, 2), -1, dtype=np.intp)
    for number, owner in enumerate(joint.tolist()):
        place[owner, int(place[owner, 0] >= 0)] = number
    columns = np.concatenate((place[bars.start], place[bars.end]), axis=1)
    along = np.zeros((len(bars.start), 4))
    if len(joint):
        along = np.einsum("mkx,mx->mk", direction[columns], bars.cosines)
    signs = np.array((-1.0, -1.0, 1.0, 1.0))
    return columns, np.where(columns < 0, 0.0, along * signs / np.sqrt(bars.lengths)[:, None])


def _norm_bound(columns: Whole, values: Floats) -> float:
    """Return a bound on the 2-norm of G from its largest row and column sums, seldom twice too large."""
    sizes = np.abs(values)
    by_column = np.bincount(columns.ravel() + 1, sizes.ravel())
    return float(np.sqrt(sizes.sum(axis=1).max(initial=0.0)) * np.sqrt(by_column.max(initial=0.0)))


def _triangle(front: Floats, width: int, norm: float) -> tuple[Floats, bool]:
    """Return R of the front, with at least ``width`` rows, and whether every pivot was one.

    A displacement without a pivot gets a hold of its own, as stiff as the truss, so that the work can go on.
    """
    short = max(width - len(front), 0)
    padded = np.concatenate((front, np.zeros((short, front.shape[1]))))
    triangle = np.asarray(np.linalg.qr(padded, mode="r"), dtype=np.float64)
    missing = np.flatnonzero(np.abs(np.diagonal(triangle)[:width]) <= NO_PIVOT * norm)
    if not len(missing):
        return triangle, True
    holds = np.zeros((len(missing), front.shape[1]))
    holds[np.arange(len(missing)), missing] = norm or 1.0
    return np.asarray(np.linalg.qr(np.concatenate((padded, holds)), mode="r"), dtype=np.float64), False
