"""The choice of candidates: thousands of alterations solved roughly, those that come near printed results kept.

What is chosen here is run again as a model of its own (``altered``, ``stiffness``) before it is reported.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from trusscalc.alterations import Compared
from trusscalc.altered import Alteration
from trusscalc.fits import NOISE, Printed
from trusscalc.flexibility import Flexibility, flexibility
from trusscalc.truss import FloatTruss

Floats = NDArray[np.float64]
Whole = NDArray[np.intp]
Flags = NDArray[np.bool_]

SLACK: Final = 1.02
"""The rough solution may be off by so much of the tolerance."""
MOST_FITTING: Final = 40
"""Candidates that fit and are run again."""
NEAREST: Final = 6
"""Candidates run again where none fits."""
PAIR: Final = 2
MOST_EXCHANGED: Final = 6
"""Rows exchanged among each other, at the most."""


@dataclass(frozen=True, slots=True)
class Screen:
    """Printed results beside one truss and its loads, as arrays in the order of the truss.

    Attributes
    ----------
    members : tuple of str
    index : dict of str to int
        Place of each joint.
    truss : FloatTruss
    origin : (2,) float
        What its coordinates are counted from.
    flexibility : Flexibility
    loads : (2 joints,) float
    values : (members,) float
        Printed forces, nan where none is.
    sharp, rounding : (members,) float
        Tolerances, see ``Printed.sharp`` and ``Printed.half_units``.
    """

    members: tuple[str, ...]
    index: dict[str, int]
    truss: FloatTruss
    origin: Floats
    flexibility: Flexibility
    loads: Floats
    values: Floats
    sharp: Floats
    rounding: Floats

    @property
    def forces(self) -> Floats:
        """The unaltered truss's member forces, (members,)."""
        return np.asarray(self.flexibility.forces @ self.loads, dtype=np.float64)

    @property
    def given(self) -> Flags:
        """Which members have a printed value, (members,)."""
        return np.asarray(~np.isnan(self.values), dtype=np.bool_)


def screen(what: Compared, printed: Printed) -> Screen | None:
    """Return printed results laid beside a truss and its loads; None where the truss is a mechanism."""
    truss = what.truss.as_floats()
    found = flexibility(truss)
    if found is None:
        return None
    index = {name: place for place, name in enumerate(truss.joints)}
    loads = np.zeros((len(index), 2))
    for joint, force in what.case.as_floats().items():
        loads[index[joint]] += force
    members = tuple(name for name, _, _ in truss.members)
    first = what.truss.joints[0]
    sharp, noise = printed.sharp(), NOISE * printed.largest
    return Screen(
        members=members,
        index=index,
        truss=truss,
        origin=np.array([float(first.x), float(first.y)]) - truss.joints[first.name],
        flexibility=found,
        loads=loads.ravel(),
        values=np.array([printed.forces.get(name, np.nan) for name in members]),
        sharp=np.array([sharp.get(name, np.nan) for name in members]),
        rounding=np.array([printed.half_units.get(name, np.nan) + noise for name in members]),
    )


# --- forces of many alterations ---------------------------------------------------------------------------


def forces_of(look: Screen, tried: Sequence[Alteration]) -> Floats:
    """Return member forces (members, alterations) of altered models; nan for one that is a mechanism."""
    found = np.full((len(look.members), len(tried)), np.nan)
    by_loads: list[int] = []
    by_joint: dict[str, list[int]] = {}
    by_member: list[int] = []
    by_hold: list[int] = []
    for place, one in enumerate(tried):
        if one.of_loads_alone:
            by_loads.append(place)
        elif len(one.places) == 1 and not (one.loads or one.supports or one.without):
            by_joint.setdefault(one.places[0][0], []).append(place)
        elif one.without and not (one.loads or one.places or one.supports):
            by_member.append(place)
        elif _is_plain_hold(look, one):
            by_hold.append(place)
        else:
            found[:, place] = _forces_anew(look, one)
    if by_loads:
        found[:, by_loads] = look.forces[:, None] + look.flexibility.forces @ changes(
            look, [tried[p] for p in by_loads]
        )
    for joint, listed in by_joint.items():
        spots = np.array([tried[place].places[0][1:] for place in listed]) - look.origin
        found[:, listed] = look.flexibility.elsewhere(look.index[joint], spots, look.loads)
    if by_member:
        each = look.flexibility.without_each(look.forces)
        found[:, by_member] = each[:, [look.members.index(tried[place].without) for place in by_member]]
    if by_hold:
        each = look.flexibility.holding_each(look.loads)
        holds = [tried[place].supports[0] for place in by_hold]
        found[:, by_hold] = each[:, [2 * look.index[joint] + (link == (0.0, 1.0)) for joint, (link,) in holds]]
    return found


def _is_plain_hold(look: Screen, one: Alteration) -> bool:
    """Return whether nothing is altered but a free joint, held along an axis."""
    if one.loads or one.places or one.without or len(one.supports) != 1:
        return False
    joint, links = one.supports[0]
    return links in (((1.0, 0.0),), ((0.0, 1.0),)) and look.index[joint] not in look.flexibility.held


def changes(look: Screen, tried: Sequence[Alteration]) -> Floats:
    """Return the loads added, (2 joints, alterations)."""
    added = np.zeros((len(look.loads), len(tried)))
    for place, one in enumerate(tried):
        for joint, fx, fy in one.loads:
            added[2 * look.index[joint], place] += fx
            added[2 * look.index[joint] + 1, place] += fy
    return added


def _forces_anew(look: Screen, one: Alteration) -> Floats:
    """Return the member forces (members,) of a structure altered in any way."""
    model = flexibility(altered_floats(look, one))
    found = np.full(len(look.members), np.nan)
    if model is not None:
        forces = model.forces @ (look.loads + changes(look, [one])[:, 0])
        kept = np.array([name != one.without for name in look.members])
        found[kept], found[~kept] = forces, 0.0
    return found


def altered_floats(look: Screen, one: Alteration) -> FloatTruss:
    """Return an altered structure as floats."""
    truss = look.truss
    spots = {joint: (x - float(look.origin[0]), y - float(look.origin[1])) for joint, x, y in one.places}
    anew = dict(one.supports)
    links = [link for link in truss.links if link[1] not in anew]
    for joint, directions in anew.items():
        for dx, dy in directions:
            size = float(np.hypot(dx, dy))
            links.append((joint, joint, dx / size, dy / size))
    members = tuple(member for member in truss.members if member[0] != one.without)
    return FloatTruss({**truss.joints, **spots}, members, tuple(links))


# --- fits -------------------------------------------------------------------------------------------------


def misfits(look: Screen, forces: Floats, tolerance: Floats) -> Floats:
    """Return the largest difference of each column of forces from the printed ones, in tolerances (columns,)."""
    given = look.given
    if not given.any():
        return np.zeros(forces.shape[1])
    off = np.abs(look.values[given, None] - forces[given]) / tolerance[given, None]
    return np.where(np.isnan(off).any(axis=0), np.inf, off.max(axis=0))


def shortlist(look: Screen, tried: Sequence[Alteration], forces: Floats) -> list[Alteration]:
    """Return the alterations worth running: all that fit the roundings, the closest first; else the nearest few."""
    rough = misfits(look, forces, look.rounding)
    sharp = misfits(look, forces, look.sharp)
    fitting = [place for place in np.argsort(sharp, kind="stable").tolist() if rough[place] <= SLACK]
    if fitting:
        fitting.sort(key=lambda place: (sharp[place] > SLACK, tried[place].strain))
        return [tried[place] for place in fitting[:MOST_FITTING]]
    remainder = misfits(look, forces, np.ones_like(look.sharp))
    nearest = np.argsort(remainder, kind="stable")[:NEAREST].tolist()
    return [tried[place] for place in nearest if np.isfinite(remainder[place])]


# --- slips of the table ------------------------------------------------------------------------------------


def ratio_range(look: Screen, forces: Floats, tolerance: Floats) -> tuple[float, float]:
    """Return the least and the largest ratio of the printed values to forces within a tolerance; empty if crossed."""
    given = look.given & (np.abs(forces) > tolerance)
    zero = look.given & ~given
    if not given.any() or (np.abs(look.values[zero]) > tolerance[zero] + np.abs(forces[zero])).any():
        return np.inf, -np.inf
    ends = (look.values[given] + np.outer((-1, 1), tolerance[given])) / forces[given]
    return float(ends.min(axis=0).max()), float(ends.max(axis=0).min())


def best_ratio(look: Screen, forces: Floats) -> float:
    """Return the ratio of the printed values to forces that leaves the least squares, weighted by the roundings."""
    given = look.given
    mine, theirs = forces[given] / look.sharp[given], look.values[given] / look.sharp[given]
    square = float(mine @ mine)
    return float(mine @ theirs) / square if square else 0.0


def exchanged_rows(look: Screen, forces: Floats) -> list[tuple[str, str]]:
    """Return the rows whose printed values are each other's, as (member, whose value it has); nothing if not so.

    Few rows may differ, and the values printed there are the same as those that should be.
    """
    wrong = _rows_off(look, forces)
    if not PAIR <= len(wrong) <= MOST_EXCHANGED:
        return []
    theirs = wrong[np.argsort(look.values[wrong], kind="stable")]
    ours = wrong[np.argsort(forces[wrong], kind="stable")]
    if (np.abs(look.values[theirs] - forces[ours]) <= look.rounding[theirs]).all():
        return [(look.members[row], look.members[source]) for row, source in zip(theirs, ours, strict=True)]
    return []


def rows_off(look: Screen, forces: Floats) -> list[str]:
    """Return the members whose printed values are not a model's."""
    return [look.members[row] for row in _rows_off(look, forces).tolist()]


def _rows_off(look: Screen, forces: Floats) -> Whole:
    with np.errstate(invalid="ignore"):
        return np.flatnonzero(look.given & ~(np.abs(look.values - forces) <= look.rounding))
