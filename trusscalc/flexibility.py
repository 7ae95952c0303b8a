"""What small changes of one truss do to its forces: the numeric route, for thousands of changes at once.

Every force under every unit load is worked out once, by G = QR as in ``stiffness`` but dense. A change that touches
few displacements (a joint elsewhere, a member taken out, a joint held) is then a correction of low rank (the
Sherman-Morrison-Woodbury formula), which costs less than a solution of its own by two orders of magnitude. The
answers are good enough to pick candidates; what is reported is run again by ``stiffness``.

All members have EA = 1.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from trusscalc.truss import FloatTruss

Floats = NDArray[np.float64]
Whole = NDArray[np.intp]

NO_PIVOT: Final = 1e-11
"""A pivot below this part of the largest is a mechanism, as far as a choice of candidates goes."""

ESSENTIAL: Final = 1e-9
"""A member that keeps less than this share of a pull at its ends for the others cannot be taken out."""


@dataclass(frozen=True, slots=True)
class Flexibility:
    """A truss with its forces and displacements under every unit load.

    Attributes
    ----------
    places : (joints, 2) float
    start, end : (members,) int
    cosines : (members, 2) float
    lengths : (members,) float
    held : (links,) int
        The joint each support link holds.
    directions : (links, 2) float
    forces : (members, 2 joints) float
        Member forces for a unit load on each joint along x, then along y, joint by joint.
    moves : (2 joints, 2 joints) float
        Displacements for the same.
    """

    places: Floats
    start: Whole
    end: Whole
    cosines: Floats
    lengths: Floats
    held: Whole
    directions: Floats
    forces: Floats
    moves: Floats

    def implied(self, forces: Floats) -> Floats:
        """Return what holds the joints in equilibrium with member forces, (joints, 2): loads and reactions."""
        total = np.zeros_like(self.places)
        for axis in (0, 1):
            parts = forces * self.cosines[:, axis]
            np.add.at(total[:, axis], self.start, -parts)
            np.add.at(total[:, axis], self.end, parts)
        return total

    def free_parts(self) -> Floats:
        """Return the projections (joints, 2, 2) on the directions in which each joint is not held."""
        ways = free_ways(len(self.places), self.held, self.directions)
        parts = ways.reshape(len(self.places), 2, -1)
        return np.asarray(np.einsum("jxw,jyw->jxy", parts, parts), dtype=np.float64)

    def elsewhere(self, joint: int, spots: Floats, loads: Floats) -> Floats:
        """Return the member forces (members, spots) with one joint at each of the spots (spots, 2).

        Parameters
        ----------
        joint : int
            The joint that moves, its load and its supports with it.
        spots : (spots, 2) float
            Where to.
        loads : (2 joints,) float
            The joint loads.
        """
        mine = np.flatnonzero((self.start == joint) | (self.end == joint))
        others = np.where(self.start[mine] == joint, self.end[mine], self.start[mine])
        touched = np.concatenate((_axes(np.array([joint])), _axes(others)))
        vectors = self.places[others][None] - spots[:, None]
        lengths = np.hypot(vectors[..., 0], vectors[..., 1])
        with np.errstate(divide="ignore", invalid="ignore"):
            new = _elongation_rows(vectors / lengths[..., None])
            outward = (self.places[others] - self.places[joint])[None]
            old = _elongation_rows(outward / self.lengths[mine][None, :, None])
            change = np.einsum("sm,smi,smj->sij", 1 / lengths, new, new)
            change -= np.einsum("m,smi,smj->sij", 1 / self.lengths[mine], old, old)
            change[~np.isfinite(change)] = 0.0
            local = self.moves[np.ix_(touched, touched)]
            before = self.moves[touched] @ loads
            equal = np.eye(len(touched)) + change @ local
            held = _solved(equal, change @ before)
            found = (self.forces @ loads)[:, None] - self.forces[:, touched] @ held.T
            after = before[None] - held @ local.T
            found[mine] = (np.einsum("smi,si->sm", new, after) / lengths).T
        return found

    def without_each(self, forces: Floats) -> Floats:
        """Return the member forces with each member taken out in turn, (members, members); nan where it cannot be.

        Parameters
        ----------
        forces : (members,) float
            Forces with all members. Column m of the result is the truss without member m.
        """
        pulled = self._pulled()
        rest = 1 - np.diagonal(pulled)
        with np.errstate(divide="ignore", invalid="ignore"):
            found = forces[:, None] + pulled * (forces / rest)
        found[:, rest < ESSENTIAL] = np.nan
        np.fill_diagonal(found, np.where(rest < ESSENTIAL, np.nan, 0.0))
        return found

    def holding_each(self, loads: Floats) -> Floats:
        """Return the member forces (members, 2 joints) with each joint held along x, then along y, in turn."""
        give = np.diagonal(self.moves)
        with np.errstate(divide="ignore", invalid="ignore"):
            share = np.where(give > ESSENTIAL * give.max(initial=0.0), (self.moves @ loads) / give, 0.0)
        return np.asarray((self.forces @ loads)[:, None] - self.forces * share, dtype=np.float64)

    def own_weight(self) -> Floats:
        """Return the loads (2 joints,) of a unit weight per length of member, half to each end, downward."""
        halves = np.zeros_like(self.places)
        np.add.at(halves[:, 1], self.start, -self.lengths / 2)
        np.add.at(halves[:, 1], self.end, -self.lengths / 2)
        return halves.ravel()

    def _pulled(self) -> Floats:
        """Return the forces (members, members) under a unit pull on the ends of each member."""
        pulls = np.zeros((len(self.lengths), 2 * len(self.places)))
        rows = np.arange(len(self.lengths))
        for axis in (0, 1):
            pulls[rows, 2 * self.end + axis] += self.cosines[:, axis]
            pulls[rows, 2 * self.start + axis] -= self.cosines[:, axis]
        return np.asarray(self.forces @ pulls.T, dtype=np.float64)


def flexibility(truss: FloatTruss) -> Flexibility | None:
    """Return a truss's forces and displacements under every unit load; None for a mechanism."""
    index = {name: place for place, name in enumerate(truss.joints)}
    places = np.array(list(truss.joints.values()), dtype=np.float64)
    start = np.array([index[first] for _, first, _ in truss.members], dtype=np.intp)
    end = np.array([index[last] for *_, last in truss.members], dtype=np.intp)
    held = np.array([index[joint] for _, joint, _, _ in truss.links], dtype=np.intp)
    directions = np.array([(dx, dy) for *_, dx, dy in truss.links], dtype=np.float64).reshape(-1, 2)
    vectors = places[end] - places[start]
    lengths = np.hypot(vectors[:, 0], vectors[:, 1])
    if not lengths.all():
        return None
    cosines = vectors / lengths[:, None]
    free = free_ways(len(places), held, directions)
    rows = np.zeros((len(start), 2 * len(places)))
    members = np.arange(len(start))
    for axis in (0, 1):
        rows[members, 2 * end + axis] = cosines[:, axis] / np.sqrt(lengths)
        rows[members, 2 * start + axis] = -cosines[:, axis] / np.sqrt(lengths)
    if len(start) < free.shape[1]:
        return None
    orthogonal, triangle = np.linalg.qr(rows @ free)
    pivots = np.abs(np.diagonal(triangle))
    if pivots.min(initial=np.inf) <= NO_PIVOT * pivots.max(initial=0.0):
        return None
    to_free = np.linalg.inv(triangle)
    forces = (orthogonal @ to_free.T @ free.T) / np.sqrt(lengths)[:, None]
    half = free @ to_free
    return Flexibility(places, start, end, cosines, lengths, held, directions, forces, half @ half.T)


def free_ways(joints: int, held: Whole, directions: Floats) -> Floats:
    """Return the independent unit displacements the supports leave, as columns (2 joints, ways)."""
    ways = np.eye(2 * joints)
    kept = np.ones(2 * joints, dtype=np.bool_)
    for joint in sorted(set(held.tolist())):
        _, sizes, right = np.linalg.svd(directions[held == joint])
        taken = int((sizes > NO_PIVOT * sizes[0]).sum())
        ways[2 * joint : 2 * joint + 2, 2 * joint : 2 * joint + 2] = right.T
        kept[2 * joint : 2 * joint + taken] = False
    return ways[:, kept]


def _axes(joints: Whole) -> Whole:
    """Return the places of both displacements of each joint."""
    return np.stack((2 * joints, 2 * joints + 1), axis=1).ravel()


def _elongation_rows(outward: Floats) -> Floats:
    """Return the elongations (spots, members, touched) for unit displacements of the joint, then of each far end."""
    spots, members, _ = outward.shape
    rows = np.zeros((spots, members, 2 + 2 * members))
    rows[:, :, :2] = -outward
    for member in range(members):
        rows[:, member, 2 + 2 * member : 4 + 2 * member] = outward[:, member]
    return rows


def _solved(matrices: Floats, sides: Floats) -> Floats:
    """Return the solutions (n, k) of n systems (n, k, k), nan for a singular one."""
    try:
        return np.asarray(np.linalg.solve(matrices, sides[..., None])[..., 0], dtype=np.float64)
    except np.linalg.LinAlgError:
        found = np.full(sides.shape, np.nan)
        for place, (matrix, side) in enumerate(zip(matrices, sides, strict=True)):
            if np.linalg.cond(matrix) < 1 / NO_PIVOT:
                found[place] = np.linalg.solve(matrix, side)
        return found
