"""Two blunders at once: pairs of alterations that together come near printed results.

Loads add up, so all pairs of load blunders are weighed by one product of matrices. A blunder of the table is looked for
on top of every other one. For the rest the first blunder is taken from a bounded list of those that explain most,
and the second is looked for in the altered model.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Final

import numpy as np

from trusscalc.altered import Alteration
from trusscalc.fitting import unbalanced_joints
from trusscalc.flexibility import flexibility
from trusscalc.screening import (
    MOST_FITTING,
    NEAREST,
    SLACK,
    Floats,
    Screen,
    altered_floats,
    changes,
    forces_of,
    misfits,
)

MOST_LOADS: Final = 1600
"""Load blunders paired with each other."""
BEST_PAIRS: Final = 12
FIRST_PLACES: Final = 10
FIRST_OTHERS: Final = 14
FIRST_LOADS: Final = 6
"""How many of each kind are taken for the first of two, in a truss of up to ``USUAL`` joints; else fewer."""
USUAL: Final = 60

Pair = tuple[Alteration, Alteration]


def of_loads(look: Screen, tried: Sequence[Alteration], forces: Floats) -> list[Pair]:
    """Return the pairs of load blunders that leave the least squares of differences.

    Parameters
    ----------
    tried : sequence of Alteration
        Single blunders.
    forces : (members, alterations) float
        What each alone leads to.
    """
    listed = [place for place, one in enumerate(tried) if one.of_loads_alone]
    listed = sorted(listed, key=lambda place: tried[place].strain)[:MOST_LOADS]
    if not listed:
        return []
    given = look.given
    weights = 1 / look.sharp[given, None]
    effects = (forces[given][:, listed] - look.forces[given, None]) * weights
    off = ((look.values - look.forces) / look.sharp)[given]
    single = (effects * effects).sum(axis=0) - 2 * off @ effects
    left = single[:, None] + single[None] + 2 * effects.T @ effects
    left[np.tril_indices(len(listed))] = np.inf
    best = np.argpartition(left, min(BEST_PAIRS, left.size - 1), axis=None)[:BEST_PAIRS]
    best = best[np.argsort(left.ravel()[best], kind="stable")]
    couples = (divmod(place, len(listed)) for place in best.tolist())
    return [(tried[listed[one]], tried[listed[other]]) for one, other in couples]


def near_in_proportion(look: Screen, forces: Floats) -> list[int]:
    """Return the places of alterations whose forces, all multiplied by one ratio, come nearest the printed ones."""
    given = look.given
    weighed = forces[given] / look.sharp[given, None]
    theirs = (look.values / look.sharp)[given]
    with np.errstate(invalid="ignore", divide="ignore"):
        ratios = theirs @ weighed / (weighed * weighed).sum(axis=0)
    apart = misfits(look, forces * ratios, look.sharp)
    nearest = np.argsort(apart, kind="stable")[:BEST_PAIRS].tolist()
    return [place for place in nearest if np.isfinite(apart[place])]


def few_rows_off(look: Screen, forces: Floats, most: int) -> list[int]:
    """Return the places of alterations that leave only a few printed values unexplained, the fewest first."""
    given = look.given
    with np.errstate(invalid="ignore"):
        off = ~(np.abs(look.values[given, None] - forces[given]) <= look.rounding[given, None])
    count = off.sum(axis=0)
    return [place for place in np.argsort(count, kind="stable")[:BEST_PAIRS].tolist() if count[place] <= most]


def first_blunders(look: Screen, tried: Sequence[Alteration], forces: Floats) -> list[Alteration]:
    """Return the blunders worth altering the model by before a second one is looked for."""
    apart = misfits(look, forces, look.sharp)
    places = [place for place, one in enumerate(tried) if len(one.places) == 1]
    loads = [place for place, one in enumerate(tried) if one.of_loads_alone]
    others = sorted(set(range(len(tried))) - set(places) - set(loads))
    astray = unbalanced_joints(look, [tried[place] for place in places])
    by_balance = sorted(range(len(places)), key=lambda n: (astray[n], apart[places[n]]))
    part = min(1.0, USUAL / len(look.index))
    found = [places[n] for n in by_balance[: math.ceil(part * FIRST_PLACES)]]
    found += sorted(others, key=lambda place: (tried[place].strain, apart[place]))[: math.ceil(part * FIRST_OTHERS)]
    found += sorted(loads, key=lambda place: apart[place])[: math.ceil(part * FIRST_LOADS)]
    return [tried[place] for place in found]


def on_altered_models(look: Screen, tried: Sequence[Alteration], first: Sequence[Alteration]) -> list[Pair]:
    """Return the pairs that come nearest, one blunder of the first and then any other.

    Parameters
    ----------
    tried : sequence of Alteration
        Blunders for the second, as enumerated for the unaltered model.
    first : sequence of Alteration
        Blunders for the first.
    """
    found: list[tuple[float, bool, Pair]] = []
    for one in first:
        beside = altered_screen(look, one)
        if beside is None:
            continue
        listed = [other for other in tried if not _in_conflict(one, other)]
        forces = forces_of(beside, listed)
        sharp, rough = misfits(beside, forces, beside.sharp), misfits(beside, forces, beside.rounding)
        best = np.argsort(sharp, kind="stable")[:BEST_PAIRS].tolist()
        found += [
            (sharp[place], rough[place] <= SLACK, (one, listed[place])) for place in best if np.isfinite(sharp[place])
        ]
    found.sort(key=lambda each: each[0])
    fitting = [pair for _, fits, pair in found if fits]
    return fitting[:MOST_FITTING] or [pair for *_, pair in found[:NEAREST]]


def altered_screen(look: Screen, one: Alteration) -> Screen | None:
    """Return an altered model laid beside the printed results; None for a mechanism."""
    truss = altered_floats(look, one)
    model = flexibility(truss)
    if model is None:
        return None
    kept = np.array([name != one.without for name in look.members])
    return replace(
        look,
        members=tuple(name for name, _, _ in truss.members),
        truss=truss,
        flexibility=model,
        loads=look.loads + changes(look, [one])[:, 0],
        values=look.values[kept],
        sharp=look.sharp[kept],
        rounding=look.rounding[kept],
    )


def _in_conflict(one: Alteration, other: Alteration) -> bool:
    """Return whether two blunders change the same thing, so that one would undo the other."""
    moved, held = {place[0] for place in one.places}, {joint for joint, _ in one.supports}
    return bool(
        moved & {place[0] for place in other.places}
        or held & {joint for joint, _ in other.supports}
        or (one.without and other.without)
    )
