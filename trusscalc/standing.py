"""A train where it stands, load by load: what each adds to the force, and which joints take which share of it.

``travel`` finds the worst position; here it is laid open, so that its value can be followed with a pencil: ordinate
times axle load, area times load per length, and every load shared to two joints like the reactions of a simple beam.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

from trusscalc.exact import ZERO, Exact
from trusscalc.influence import InfluenceLine
from trusscalc.trains import Train
from trusscalc.travel import Extreme, TravelError, placed

AXLE = "axle"
UNIFORM = "uniform load"
KINDS = {"lane": "lane load", "follow": "load behind the axles", "beside": "load before and behind the axles"}


@dataclass(frozen=True, slots=True)
class StandingLoad:
    """One load of a train where it stands.

    Attributes
    ----------
    what : str
        ``axle 2``, ``lane load`` and the like.
    stated : Exact
        As the train states it: the axle's load, or force per length.
    amount : Exact
        As it counts: with impact (axles only) and share.
    start, end : Exact
        Where it stands, along the chain from its first joint; equal for an axle.
    ordinate : Exact
        The influence line's ordinate at an axle, its area below a uniform load.
    effect : Exact
        What it adds to the force: amount times ordinate or area.
    shares : tuple of (str, Exact)
        Downward forces on the joints, in the order of the chain.
    """

    what: str
    stated: Exact
    amount: Exact
    start: Exact
    end: Exact
    ordinate: Exact
    effect: Exact
    shares: tuple[tuple[str, Exact], ...]

    @property
    def is_axle(self) -> bool:
        """Whether it is an axle."""
        return self.start == self.end


def standing_loads(line: InfluenceLine, extreme: Extreme, train: Train) -> tuple[StandingLoad, ...]:
    """Return the loads of a train that count where it stands, the leading axle first, then uniform load.

    Parameters
    ----------
    line : InfluenceLine
        The line over which the train stands.
    extreme : Extreme
        What ``extremes`` found.
    train : Train
        The train that governs.

    Raises
    ------
    TravelError
        When they do not add up to the extreme's value, or their shares not to its joint loads, exactly.
    """
    found = [*_axles(line, extreme, train), *_uniform(line, extreme, train)]
    shares = dict.fromkeys(line.chain.joints, ZERO)
    for load in found:
        for joint, share in load.shares:
            shares[joint] = shares[joint] + share
    at_joints = {load.joint: -load.fy for load in placed(extreme, line.positions, line.chain, train)}
    if sum((load.effect for load in found), ZERO) != extreme.value or at_joints != {
        joint: share for joint, share in shares.items() if share
    }:
        message = f"train {train.name!r}: its loads one by one do not add up to the force they were placed for"
        raise TravelError(message)
    return tuple(found)


def _axles(line: InfluenceLine, extreme: Extreme, train: Train) -> Iterator[StandingLoad]:
    places = extreme.stand.axles_at if extreme.stand else ()
    for number, (load, at) in enumerate(zip(train.axles, places, strict=False), 1):
        if at is None:
            continue
        amount = load * (1 + train.impact) * train.share
        panel = next(n for n, (a, b) in enumerate(pairwise(line.positions)) if a <= at <= b)
        start, end = line.positions[panel : panel + 2]
        farther = amount * (at - start) / (end - start)
        shares = _shares(line, panel, amount - farther, farther)
        ordinate = line.at(at)
        yield StandingLoad(f"{AXLE} {number}", load, amount, at, at, ordinate, amount * ordinate, shares)


def _uniform(line: InfluenceLine, extreme: Extreme, train: Train) -> Iterator[StandingLoad]:
    for start, end, amount in extreme.patches:
        shares: dict[str, Exact] = {}
        area = ZERO
        for panel, (a, b) in enumerate(pairwise(line.positions)):
            low, high = max(a, start), min(b, end)
            if low < high:
                area = area + (high - low) * (line.at(low) + line.at(high)) / 2
                load = amount * (high - low)
                farther = load * ((low + high) / 2 - a) / (b - a)
                for joint, share in _shares(line, panel, load - farther, farther):
                    shares[joint] = shares.get(joint, ZERO) + share
        stated = amount / train.share
        what = _kind(train, stated)
        yield StandingLoad(what, stated, amount, start, end, area, amount * area, tuple(shares.items()))


def _shares(line: InfluenceLine, panel: int, near: Exact, far: Exact) -> tuple[tuple[str, Exact], ...]:
    pairs = zip(line.chain.joints[panel : panel + 2], (near, far), strict=True)
    return tuple((joint, share) for joint, share in pairs if share)


def _kind(train: Train, stated: Exact) -> str:
    """Return which of the train's uniform loads it is, by its size; one that could be two has no name of its own."""
    sizes = {
        "lane": train.lane,
        "follow": train.follow[1] if train.follow else ZERO,
        "beside": train.beside[1] if train.beside else ZERO,
    }
    kinds = [KINDS[kind] for kind, size in sizes.items() if size == stated]
    return kinds[0] if len(kinds) == 1 else UNIFORM


def train_of(extreme: Extreme, trains: Sequence[Train]) -> Train | None:
    """Return the train an extreme is of, None where no train of the load is adverse anywhere."""
    return next((train for train in trains if train.name == extreme.train), None)
