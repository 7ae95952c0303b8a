"""Critical positions of a train on a chain: a finite set of places in which its effect is largest somewhere.

Here a train travels the way positions grow; for the other direction the chain is turned round.

What lies between two variable spacings is a rigid *group* of axles. The effect of a train is a sum over its groups,
each a function of the group's own position: straight between positions in which an axle stands over a joint of the
chain, parabolic where an end of a uniform load moves along. Take an arrangement of largest effect, and call groups
held together by a spacing at one of its limits a *run*. A run that has no axle (and no end of a uniform load) over a
joint, and whose effect has no level summit there, can be shifted to one side without loss until it has one or meets
the next run. So only positions that come from a joint under some axle, through spacings at their limits, are needed,
and the level summits, which depend on the line and are added by ``passage``. That a vertex lies under an axle is the
textbook rule for moving loads; the argument is that of the vertices of a linear program.

An influence line may jump at the ends of the chain, where axles come on and go off. The ends belong to the chain, so
besides the position itself its limits from either side count: ``side`` -1, 0 or 1. Positions are ordered by (at,
side), and so are the limits of spacings: two groups may be just off together.

Floats are only for finding a place in a list; where two of them are nearer than their rounding, exact numbers decide.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cmp_to_key, lru_cache
from itertools import pairwise
from typing import Any, Final, Literal

from trusscalc.exact import ZERO, Exact
from trusscalc.trains import Train

EndKind = Literal["before", "behind", "follow"]
ROUNDING: Final = 2.0**-50
"""Eight times half a unit in the last place: more than a position gathers on its way into a float."""
SIDES: Final = (-1, 0, 1)


@dataclass(frozen=True, slots=True)
class Group:
    """A rigid part of a train.

    Attributes
    ----------
    axles : tuple of int
        Which axles of the train.
    offsets : tuple of Exact
        Their distances behind the group's first axle.
    ends : tuple of (str, Exact)
        Ends of uniform load that move with it: its kind, and its distance behind the first axle. ``before`` lies on
        everything beyond its end, ``behind`` and ``follow`` on everything up to it.
    """

    axles: tuple[int, ...]
    offsets: tuple[Exact, ...]
    ends: tuple[tuple[EndKind, Exact], ...] = ()


@dataclass(frozen=True, slots=True)
class Way:
    """A chain in the direction of travel.

    Attributes
    ----------
    knots : tuple of Exact
        Its joints, from 0, and perhaps the zero points of a line between them.
    near : tuple of float
        The same as floats.
    slack : float
        What rounding may hide: nearer positions are told apart by their exact values.
    """

    knots: tuple[Exact, ...]
    near: tuple[float, ...]
    slack: float

    def carries(self, location: Exact, side: int = 0) -> bool:
        """Return whether an axle there, or just to one side of there, is on the chain."""
        start = location.sign()
        if start < 0 or (start == 0 and side < 0):
            return False
        end = (location - self.knots[-1]).sign()
        return end < 0 or (end == 0 and side <= 0)

    def piece_at(self, location: Exact) -> int:
        """Return the piece between two knots that has a location of the chain in it."""
        near = float(location)
        piece = min(max(bisect_right(self.near, near) - 1, 0), len(self.near) - 2)
        if near - self.near[piece] < self.slack or self.near[piece + 1] - near < self.slack:
            piece = min(bisect_right(self.knots, location) - 1, len(self.knots) - 2)
        return piece


@dataclass(frozen=True, slots=True)
class Spot:
    """A position of a group's first axle: exact, as a float, and from which side it is approached."""

    at: Exact
    near: float
    side: int = 0


@dataclass(frozen=True, slots=True)
class Places:
    """Where a group stands at each of its spots.

    Attributes
    ----------
    spots : tuple of Spot
        In the order of (at, side).
    columns : tuple of tuple of (int, float)
        For each axle and spot: the panel it stands in and how far into it, 0 to 1; the number of panels for an axle
        that is off the chain.
    """

    spots: tuple[Spot, ...]
    columns: tuple[tuple[tuple[int, float], ...], ...]


@dataclass(frozen=True, slots=True)
class Course:
    """A train's critical positions on a chain, in one direction.

    Attributes
    ----------
    way : Way
        The chain.
    groups : tuple of Group
        From the leading one.
    gaps : tuple of (Exact, Exact)
        From the first axle of each group to the first of the next: smallest and largest distance.
    places : tuple of Places
        For each group.
    windows : tuple of tuple of (int, int)
        For each group but the last, for each of its spots: the spots of the next group that the spacing allows, as
        first and one after the last.
    reach : float
        Chain and train together: no position is larger.
    """

    way: Way
    groups: tuple[Group, ...]
    gaps: tuple[tuple[Exact, Exact], ...]
    places: tuple[Places, ...]
    windows: tuple[tuple[tuple[int, int], ...], ...]
    reach: float


@lru_cache(maxsize=16)
def courses(knots: tuple[Exact, ...], train: Train) -> tuple[Course, Course]:
    """Return the critical positions of a train on a chain: travelling forward, and backward on the chain turned round.

    Parameters
    ----------
    knots : tuple of Exact
        Positions of the joints, from 0.
    train : Train
        The train.
    """
    groups, gaps = rigid_groups(train)
    distances = [abs(distance) for group in groups for _, distance in group.ends]
    reach = float(sum((high for _, high in train.spacing), sum(distances, knots[-1])))
    found = []
    for turned in (knots, tuple(knots[-1] - knot for knot in reversed(knots))):
        way = Way(turned, tuple(map(float, turned)), ROUNDING * reach)
        own = [_own_positions(group, turned) for group in groups]
        found.append(_laid_out(Course(way, groups, gaps, (), (), reach), _shifted(own, gaps)))
    return found[0], found[1]


def with_knots(known: Course, knots: Iterable[Exact]) -> Course:
    """Return the course of a rigid train with the positions that have something over more knots: zero points."""
    (group,) = known.groups
    offsets = (*group.offsets, *(end for _, end in group.ends))
    return widened(known, [[knot + offset for knot in knots for offset in offsets]])


def widened(known: Course, extra: Sequence[Iterable[Exact]]) -> Course:
    """Return a course with more positions: for each group some."""
    places = tuple(
        _merged(known.way, group, before, [Spot(at, float(at)) for at in more])
        for group, before, more in zip(known.groups, known.places, extra, strict=True)
    )
    return replace(known, places=places, windows=_windows_between(known, places))


# --- groups and runs --------------------------------------------------------------------------------------


def rigid_groups(train: Train) -> tuple[tuple[Group, ...], tuple[tuple[Exact, Exact], ...]]:
    """Return a train's rigid groups, and the distances allowed from the first axle of each to that of the next."""
    axles: list[list[int]] = [[0]]
    offsets: list[list[Exact]] = [[ZERO]]
    gaps = []
    for index, (low, high) in enumerate(train.spacing, 1):
        if low == high:
            axles[-1].append(index)
            offsets[-1].append(offsets[-1][-1] + low)
        else:
            gaps.append((offsets[-1][-1] + low, offsets[-1][-1] + high))
            axles.append([index])
            offsets.append([ZERO])
    ends: list[list[tuple[EndKind, Exact]]] = [[] for _ in axles]
    if train.beside:
        ends[0].append(("before", -train.beside[0]))
        ends[-1].append(("behind", offsets[-1][-1] + train.beside[0]))
    if train.follow:
        ends[-1].append(("follow", offsets[-1][-1] + train.follow[0]))
    groups = tuple(Group(tuple(a), tuple(o), tuple(e)) for a, o, e in zip(axles, offsets, ends, strict=True))
    return groups, tuple(gaps)


def runs(groups: Sequence[Group], gaps: Sequence[tuple[Exact, Exact]]) -> list[tuple[Group, int, tuple[Exact, ...]]]:
    """Return every run with an end of uniform load: as one group, its first group, and how far behind each one is."""
    found = []
    for first in range(len(groups)):
        grown: list[tuple[Group, tuple[Exact, ...]]] = [(groups[first], (ZERO,))]
        for last in range(first, len(groups)):
            if last > first:
                grown = [
                    (_joined(run, groups[last], behind[-1] + gap), (*behind, behind[-1] + gap))
                    for run, behind in grown
                    for gap in gaps[last - 1]
                ]
            found += [(run, first, behind) for run, behind in grown if run.ends]
    return found


def _joined(run: Group, group: Group, behind: Exact) -> Group:
    return Group(
        (*run.axles, *group.axles),
        (*run.offsets, *(behind + offset for offset in group.offsets)),
        (*run.ends, *((kind, behind + offset) for kind, offset in group.ends)),
    )


def places_of_run(way: Way, fine: Way, run: Group) -> Places:
    """Return the places of a run that travels alone, over all knots of the line."""
    return _places(way, run, _own_positions(run, fine.knots))


# --- positions --------------------------------------------------------------------------------------------


def _own_positions(group: Group, knots: Sequence[Exact]) -> dict[Exact, bool]:
    """Return the positions with something of the group over a knot, and whether an axle is over an end of the chain."""
    found: dict[Exact, bool] = {}
    for place, knot in enumerate(knots):
        for offset in group.offsets:
            at = knot + offset
            found[at] = found.get(at, False) or place in {0, len(knots) - 1}
        for _, offset in group.ends:
            found.setdefault(knot + offset, False)
    return found


def _shifted(own: Sequence[Mapping[Exact, bool]], gaps: Sequence[tuple[Exact, Exact]]) -> list[dict[Exact, bool]]:
    """Return for each group its own positions and those that other groups pass on through spacings at their limits."""
    found = [dict(positions) for positions in own]
    for start, positions in enumerate(own):
        for onward in (range(start + 1, len(own)), range(start - 1, -1, -1)):
            shifts = {ZERO}
            for group in onward:
                pair = tuple(-gap for gap in gaps[group - 1]) if group > start else gaps[group]
                shifts = {shift + gap for shift in shifts for gap in pair}
                for at, is_end in positions.items():
                    for shift in shifts:
                        found[group][at + shift] = found[group].get(at + shift, False) or is_end
    return found


def _laid_out(known: Course, positions: Sequence[Mapping[Exact, bool]]) -> Course:
    places = tuple(_places(known.way, group, of_group) for group, of_group in zip(known.groups, positions, strict=True))
    return replace(known, places=places, windows=_windows_between(known, places))


def _places(way: Way, group: Group, positions: Mapping[Exact, bool]) -> Places:
    spots = [
        Spot(at, near, side)
        for at, is_end in positions.items()
        for near in [float(at)]
        for side in (SIDES if is_end else (0,))
    ]
    spots.sort(key=_by_position(way.slack))
    return places_of(way, group, spots)


def places_of(way: Way, group: Group, spots: Sequence[Spot]) -> Places:
    """Return where a group stands at chosen spots."""
    columns = []
    for offset in group.offsets:
        near_offset = float(offset)
        columns.append(tuple(_panel_and_part(way, spot, offset, near_offset) for spot in spots))
    return Places(tuple(spots), tuple(columns))


def _merged(way: Way, group: Group, known: Places, spots: Sequence[Spot]) -> Places:
    """Return places with more spots among them; one that is there already does no harm."""
    added = places_of(way, group, spots)
    both = [(spot, places, place) for places in (known, added) for place, spot in enumerate(places.spots)]
    order = _by_position(way.slack)
    both.sort(key=lambda item: order(item[0]))
    columns = tuple(tuple(places.columns[axle][place] for _, places, place in both) for axle in range(len(group.axles)))
    return Places(tuple(spot for spot, _, _ in both), columns)


def _by_position(slack: float) -> Callable[[Spot], Any]:
    """Return the key that sorts spots by (at, side)."""

    def compare(a: Spot, b: Spot) -> int:
        return _order(a.near - b.near, a, b, ZERO, slack)

    return cmp_to_key(compare)


def _order(apart: float, a: Spot, b: Spot, shift: Exact, slack: float) -> int:
    """Return the sign of (a, side) - (b + shift, side); ``apart`` is the float of the first part."""
    if abs(apart) > slack:
        return 1 if apart > 0 else -1
    return (a.at - b.at - shift).sign() or a.side - b.side


def _windows_between(known: Course, places: Sequence[Places]) -> tuple[tuple[tuple[int, int], ...], ...]:
    return tuple(
        _windows(here.spots, behind.spots, gap, known.way.slack)
        for (here, behind), gap in zip(pairwise(places), known.gaps, strict=True)
    )


def _windows(
    here: Sequence[Spot], behind: Sequence[Spot], gap: tuple[Exact, Exact], slack: float
) -> tuple[tuple[int, int], ...]:
    """Return for each spot the range of spots of the next group that are behind it by what the gap allows."""
    (low, high), (near_low, near_high) = gap, map(float, gap)
    first = after = 0
    found = []
    for spot in here:
        while first < len(behind) and (
            _order(spot.near - behind[first].near - near_high, spot, behind[first], high, slack) > 0
        ):
            first += 1
        while after < len(behind) and (
            _order(spot.near - behind[after].near - near_low, spot, behind[after], low, slack) >= 0
        ):
            after += 1
        found.append((first, after))
    return tuple(found)


def _panel_and_part(way: Way, spot: Spot, offset: Exact, near_offset: float) -> tuple[int, float]:
    """Return the panel and the part of it that lies before the axle; the number of panels when it is off the chain."""
    location = spot.near - near_offset
    panels, end = len(way.near) - 1, way.near[-1]
    if location < way.slack or location > end - way.slack:
        is_far = location < -way.slack or location > end + way.slack
        if is_far or not way.carries(spot.at - offset, spot.side):
            return panels, 0.0
    panel = min(max(bisect_right(way.near, location) - 1, 0), panels - 1)
    width = way.near[panel + 1] - way.near[panel]
    return panel, (location - way.near[panel]) / width if width else 0.0
