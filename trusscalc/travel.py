"""Trains over an influence line: where they stand for the largest and the least force, exactly.

Rules: a train travels forward, from the first joint of the chain to the last, or backward; the position of its leading
axle is measured along the chain from the first joint either way and may lie beyond the chain. Axles off the chain
count nothing, and its ends belong to it. Axles that help stay, unless the train omits them. Impact is on the axles
alone, the share on everything. Lane load, and uniform load before and behind a group, stand on adverse lengths only;
uniform load that follows a train is whole. Of equal maxima the smallest position, and there forward first; a value
that is only approached, with an axle just off an end of the chain, is taken when no position has it. A train that
acts best while it is beyond the chain, by its uniform load alone, does so from there to infinity: then the position
counts as smallest in which the end of that load stands over the end of the chain.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Final, Literal, Protocol

from trusscalc.chains import Chain
from trusscalc.criticalpositions import Course, Way, courses, with_knots
from trusscalc.errors import InputError, TrusscalcError
from trusscalc.exact import ZERO, Exact
from trusscalc.loadedline import LoadedLine, Ordinates, ordinates_of, with_zeros, zeros_of
from trusscalc.loads import JointLoad
from trusscalc.passage import Arrangement, Passage
from trusscalc.trains import Train

Direction = Literal["forward", "backward"]
DIRECTIONS: Final[tuple[Direction, Direction]] = ("forward", "backward")
Patch = tuple[Exact, Exact, Exact]


class TravelError(TrusscalcError, ArithmeticError):
    """The loads of a train do not give the force they were placed for: a fault of this program."""


class Line(Protocol):
    """What is needed of an influence line: positions along its chain, and the force for a unit load at each."""

    @property
    def positions(self) -> tuple[Exact, ...]:
        """Increasing, from 0."""
        ...

    @property
    def ordinates(self) -> tuple[Exact, ...]:
        """One for each position."""
        ...


@dataclass(frozen=True, slots=True)
class Stand:
    """Where a train stands.

    Attributes
    ----------
    train : str
        Its name.
    direction : str
        ``forward``, from the first joint of the chain to its last, or ``backward``.
    lead_axle_at : Exact
        Position of the leading axle along the chain from its first joint; may lie beyond either end.
    axles_at : tuple of (Exact or None)
        Position of each axle that counts; None for one off the chain, and for one that is left out.
    spacing : tuple of Exact
        The spacings taken.
    at_limit : bool
        Whether an axle stands just off an end of the chain: the value is approached, no position has it.
    """

    train: str
    direction: Direction
    lead_axle_at: Exact
    axles_at: tuple[Exact | None, ...]
    spacing: tuple[Exact, ...]
    at_limit: bool


@dataclass(frozen=True, slots=True)
class Extreme:
    """The largest or the least force that trains can cause.

    Attributes
    ----------
    value : Exact
        Not below zero for the largest, not above for the least; zero when nothing is adverse.
    stand : Stand or None
        None when no position is adverse (the value may still come from the lane load).
    parts : tuple of (str, Exact)
        What ``axles``, ``lane``, ``follow`` and ``beside`` contribute, as far as the train has them, share included.
    patches : tuple of (Exact, Exact, Exact)
        Uniform load as placed: from, to, force per length with the share.
    train : str
        The train that governs.
    ordinates : tuple of Exact
        Those of the line, which ``placed`` proves its loads with.
    """

    value: Exact
    stand: Stand | None
    parts: tuple[tuple[str, Exact], ...]
    patches: tuple[Patch, ...]
    train: str
    ordinates: tuple[Exact, ...] = field(default=(), repr=False)


def extremes(line: Line, trains: Sequence[Train]) -> tuple[Extreme, Extreme]:
    """Return the largest and the least force that trains cause, each from the train that governs.

    Parameters
    ----------
    line : InfluenceLine
        Force for a unit load at the joints of a chain, straight between them.
    trains : sequence of Train
        One train, or those of a load model; of equal ones the first governs.

    Raises
    ------
    InputError
        When there is no train.
    InexactNumberError
        When an ordinate holds a symbol, or when numbers are larger than floats can be.

    Examples
    --------
    >>> from trusscalc.exact import rational
    >>> from types import SimpleNamespace
    >>> moment = SimpleNamespace(positions=(rational(0), rational(10), rational(20)),
    ...                          ordinates=(rational(0), rational(5), rational(0)))
    >>> largest, least = extremes(moment, [Train("pair", (6, 24), (4,))])
    >>> largest.value, largest.stand.direction, largest.stand.lead_axle_at, least.value, least.stand
    (Exact('138'), 'backward', Exact('6'), Exact('0'), None)
    """
    if not trains:
        message = "no train is given; name at least one"
        raise InputError(message)
    ordinates = ordinates_of(line.ordinates)
    crossings = [_crossing(line.positions, ordinates, train) for train in trains]
    return _governing(crossings, 1), _governing(crossings, -1)


def _governing(crossings: Sequence[_Crossing], sense: int) -> Extreme:
    """Return the extreme of the train that governs."""
    best = crossings[0].extreme(sense)
    for crossing in crossings[1:]:
        extreme = crossing.extreme(sense)
        if sense * extreme.value > sense * best.value:
            best = extreme
    return best


# --- one train over one line ------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Found:
    """An exact effect and the stand that has it."""

    value: Exact
    passage: Passage
    arrangement: Arrangement
    direction: Direction
    lead: Exact

    def is_preferred_to(self, other: _Found) -> bool:
        """Return whether the effect is larger, or equal and the stand comes first by the rules."""
        if self.value != other.value:
            return self.value > other.value
        if self.arrangement.at_limit != other.arrangement.at_limit:
            return other.arrangement.at_limit
        return self.lead < other.lead  # at the same position the first stays, and forward is tried first


@dataclass(frozen=True, slots=True)
class _Crossing:
    """One train over one line: its critical positions in both directions, the line as it meets it in each.

    ``fine`` is the line with its zero points among the knots where the signs of ordinates matter to loads that move.
    """

    train: Train
    courses: tuple[Course, Course]
    lines: tuple[tuple[Way, Ordinates], tuple[Way, Ordinates]]
    fine: tuple[tuple[Way, Ordinates], tuple[Way, Ordinates]]

    def extreme(self, sense: int) -> Extreme:
        """Return the largest or the least force, put together from where the loads stand."""
        train, line = self.train, LoadedLine(*self.lines[0], sense)
        names = ["axles", *(name for name in ("lane", "follow", "beside") if getattr(train, name))]
        parts = dict.fromkeys(names, ZERO)
        patches: list[Patch] = []
        stand = None
        if sense in line.ordinates.signs and train.share:
            if train.lane:
                lengths, area = line.adverse_lengths()
                parts["lane"] = train.lane * area
                patches += [(start, stop, train.lane) for start, stop in lengths]
            if best := self._best(sense):
                stand = _stand(train, best, line.way.knots[-1])
                parts["axles"] = _axle_effect(train, stand, line)
                patches += _travelling(best, line, parts)
                if sum((parts[name] for name in names if name != "lane"), ZERO) != best.value:
                    message = f"train {train.name!r}: its loads as placed do not add up to the effect found"
                    raise TravelError(message)
        signed = tuple((name, sense * train.share * value) for name, value in parts.items())
        return Extreme(
            sum((value for _, value in signed), ZERO),
            stand,
            signed,
            tuple((start, stop, train.share * amount) for start, stop, amount in patches),
            train.name,
            line.ordinates.exact,
        )

    def _best(self, sense: int) -> _Found | None:
        """Return the stand with the largest effect, or None when no stand has an effect above zero."""
        passages = [
            Passage(course, LoadedLine(*line, sense), LoadedLine(*fine, sense), self.train)
            for course, line, fine in zip(self.courses, self.lines, self.fine, strict=True)
        ]
        near_best = max(passage.near_best() for passage in passages)
        if near_best < -max(passage.margin for passage in passages):
            return None
        best: _Found | None = None
        for direction, passage in zip(DIRECTIONS, passages, strict=True):
            for arrangement in passage.near(near_best):
                at = arrangement.spots[0].at
                lead = at if direction == "forward" else passage.course.way.knots[-1] - at
                found = _Found(arrangement.value, passage, arrangement, direction, lead)
                if best is None or found.is_preferred_to(best):
                    best = found
        return best if best and best.value.sign() > 0 else None


def _crossing(positions: tuple[Exact, ...], ordinates: Ordinates, train: Train) -> _Crossing:
    forward, backward = courses(positions, train)
    lines = (forward.way, ordinates), (backward.way, ordinates.turned())
    zeros = zeros_of(positions, ordinates) if train.beside or (train.omit and train.follow) else ()
    if not zeros:
        return _Crossing(train, (forward, backward), lines, lines)
    turned = [positions[-1] - zero for zero in reversed(zeros)]
    fine = with_zeros(*lines[0], zeros), with_zeros(*lines[1], turned)
    if len(forward.groups) == 1:  # else the zero points come in with the runs
        forward, backward = with_knots(forward, zeros), with_knots(backward, turned)
    return _Crossing(train, (forward, backward), lines, fine)


def _spacing_taken(train: Train, best: _Found) -> tuple[Exact, ...]:
    """Return the spacings of an arrangement: the fixed ones, and between two groups what is left."""
    between = [
        here.at - behind.at - group.offsets[-1]
        for (here, behind), group in zip(pairwise(best.arrangement.spots), best.passage.course.groups, strict=False)
    ]
    left = iter(between)
    return tuple(low if low == high else next(left) for low, high in train.spacing)


def _stand(train: Train, best: _Found, end: Exact) -> Stand:
    axles_at: list[Exact | None] = [None] * len(train.axles)
    for group, spot in zip(best.passage.course.groups, best.arrangement.spots, strict=True):
        for axle, location in best.passage.standing(group, spot):
            if location is not None:
                axles_at[axle] = location if best.direction == "forward" else end - location
    spacing = _spacing_taken(train, best)
    return Stand(train.name, best.direction, best.lead, tuple(axles_at), spacing, best.arrangement.at_limit)


def _axle_effect(train: Train, stand: Stand, line: LoadedLine) -> Exact:
    """Return what the axles do in a stand, with impact."""
    counted = [(load, at) for load, at in zip(train.axles, stand.axles_at, strict=True) if at is not None]
    return sum((load * line.at(at) for load, at in counted), ZERO) * (1 + train.impact)


def _travelling(best: _Found, line: LoadedLine, parts: dict[str, Exact]) -> list[Patch]:
    """Return uniform load that travels with the train, as it stands along the chain, and add its effect to its part."""
    stop = line.way.knots[-1]
    patches: list[Patch] = []
    for group, spot in zip(best.passage.course.groups, best.arrangement.spots, strict=True):
        for kind, distance in group.ends:
            end = spot.at - distance
            low, high = (end, stop) if kind == "before" else (ZERO, end)
            if best.direction == "backward":
                low, high = stop - high, stop - low
            name = "follow" if kind == "follow" else "beside"
            whole = [(ZERO, stop)] if kind == "follow" else line.adverse_lengths()[0]
            amount = best.passage.intensity[kind]
            for a, b in ((max(a, low), min(b, high)) for a, b in whole):
                if a < b and amount:
                    patches.append((a, b, amount))
                    parts[name] = parts[name] + amount * (line.area_to(b) - line.area_to(a))
    return sorted(patches, key=lambda patch: patch[0])


# --- as joint loads ---------------------------------------------------------------------------------------


def placed(extreme: Extreme, chain_positions: Sequence[Exact], chain: Chain, train: Train) -> tuple[JointLoad, ...]:
    """Return the joint loads of an extreme: every load shared to the panel points as a simple beam between them does.

    Parameters
    ----------
    extreme : Extreme
        What ``extremes`` found.
    chain_positions : sequence of Exact
        Positions of the chain's joints.
    chain : Chain
        The chain.
    train : Train
        The train that governs, ``extreme.train``.

    Returns
    -------
    tuple of JointLoad
        Downward loads on the joints that get any, in the order of the chain; none for an axle that is left out, off
        the chain or just off its end.

    Raises
    ------
    TravelError
        When the loads times the ordinates do not add up to the extreme's value, exactly.
    """
    shares = [ZERO] * len(chain.joints)
    if train.name != extreme.train or not len(chain.joints) == len(chain_positions) == len(extreme.ordinates):
        message = (
            f"the extreme is that of train {extreme.train!r} over {len(extreme.ordinates)} joints; give both as found"
        )
        raise InputError(message)
    if extreme.stand:
        for load, at in zip(train.axles, extreme.stand.axles_at, strict=True):
            if at is not None:
                _share_axle(load * (1 + train.impact) * train.share, at, chain_positions, shares)
    for patch in extreme.patches:
        _share_patch(patch, chain_positions, shares)
    total = sum((share * ordinate for share, ordinate in zip(shares, extreme.ordinates, strict=True)), ZERO)
    if total != extreme.value:
        message = (
            f"train {train.name!r}: its loads on the joints of chain {chain.name!r} do not give the force they were "
            f"found for; give the train and the chain they were found with"
        )
        raise TravelError(message)
    return tuple(JointLoad(joint, ZERO, -share) for joint, share in zip(chain.joints, shares, strict=True) if share)


def _share_axle(load: Exact, at: Exact, positions: Sequence[Exact], shares: list[Exact]) -> None:
    """Share a load to the two joints beside it, by moments about either."""
    for panel, (a, b) in enumerate(pairwise(positions)):
        if a <= at <= b:
            farther = load * (at - a) / (b - a)
            shares[panel] = shares[panel] + load - farther
            shares[panel + 1] = shares[panel + 1] + farther
            return
    message = "an axle that counts stands off the chain"
    raise TravelError(message)


def _share_patch(patch: Patch, positions: Sequence[Exact], shares: list[Exact]) -> None:
    """Share uniform load panel by panel, by moments of its resultant."""
    start, stop, amount = patch
    for panel, (a, b) in enumerate(pairwise(positions)):
        low, high = max(a, start), min(b, stop)
        if low < high:
            load = amount * (high - low)
            farther = load * ((low + high) / 2 - a) / (b - a)
            shares[panel] = shares[panel] + load - farther
            shares[panel + 1] = shares[panel + 1] + farther
