"""A train passing over a line in one direction: screened in floats, decided in exact numbers.

The effect at every critical position is first found in plain floats. Whatever comes within the rounding of the best,
bounded for the sizes at hand, is then worked out and compared exactly; the rest cannot be the largest.
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from trusscalc.criticalpositions import (
    Course,
    EndKind,
    Group,
    Places,
    Spot,
    places_of,
    places_of_run,
    runs,
    widened,
)
from trusscalc.errors import InexactNumberError
from trusscalc.exact import ZERO, Exact
from trusscalc.loadedline import LoadedLine
from trusscalc.trains import Train

SAFETY: Final = 2.0**-47
"""64 times half a unit in the last place, for each of the terms that are added: far more than they can gather."""
TOWARDS: Final[dict[EndKind, int]] = {"before": -1, "behind": 1, "follow": 1}
"""Whether a uniform load grows or shrinks while its end moves on."""
IMPOSSIBLE: Final = -float("inf")


@dataclass(frozen=True, slots=True)
class Arrangement:
    """An exact effect, and the spot of each group that has it; ``at_limit`` when one is only approached."""

    value: Exact
    at_limit: bool
    spots: tuple[Spot, ...]


class Passage:
    """One train over one line in the direction of growing positions, adverse ordinates positive.

    Effects are those of the axles with impact and of the uniform loads that travel with them, before the train's
    share and without its lane load.

    Parameters
    ----------
    course : Course
        The train's critical positions in this direction.
    line, fine : LoadedLine
        The line over the joints of the chain; and with its zero points among the knots, where signs of ordinates
        matter to loads that move (else the same).
    train : Train
        The train.
    """

    def __init__(self, course: Course, line: LoadedLine, fine: LoadedLine, train: Train) -> None:
        self.course, self.line, self.fine, self.train = course, line, fine, train
        self.heavier = 1 + train.impact
        self.weights = [float(axle * self.heavier) for axle in train.axles]
        self.intensity: dict[EndKind, Exact] = {}
        if train.beside:
            self.intensity |= {"before": train.beside[1], "behind": train.beside[1]}
        if train.follow:
            self.intensity["follow"] = train.follow[1]
        self.areas = {kind: fine.near_area(adverse=kind != "follow") for kind in self.intensity}
        self.values = [*line.near_values()[:-1], 0.0]  # at the start of each panel; the last for what is off the chain
        self.rises = [b - a for a, b in pairwise(line.near_values())] + [0.0]
        self.margin = self._margin()
        self.spots = [places.spots for places in course.places]
        self.effects = [self._effects(*pair) for pair in self._groups_and_places()]
        self.totals = self._totals()
        if any(self.intensity.values()):
            self._add_level_summits()
            self.totals = self._totals()
        self.found: dict[tuple[int, int], Arrangement] = {}

    # --- in floats ----------------------------------------------------------------------------------------

    def near_best(self) -> float:
        """Return the largest effect, as nearly as floats have it."""
        return max(self.totals[0])

    def _groups_and_places(self) -> Iterator[tuple[Group, Places]]:
        return zip(self.course.groups, self.course.places, strict=True)

    def _margin(self) -> float:
        """Return a bound of what rounding can change in a difference of effects."""
        height = max(map(abs, self.line.ordinates.near))
        steepness = max(map(abs, self.fine.near_slopes()))
        reach = self.course.reach
        uniform = sum(map(float, self.intensity.values()))
        terms = len(self.weights) + len(self.fine.way.knots) + 16
        margin = SAFETY * terms * (sum(self.weights) + uniform * reach) * (height + steepness * reach)
        if not math.isfinite(margin):
            message = f"train {self.train.name!r}: loads, lengths and ordinates are together too large to be compared"
            raise InexactNumberError(message)
        return margin

    def _effects(self, group: Group, places: Places) -> list[float]:
        """Return the effect of a group at each of its spots."""
        values, rises = self.values, self.rises
        totals = [0.0] * len(places.spots)
        for axle, column in zip(group.axles, places.columns, strict=True):
            weight = self.weights[axle]
            ordinates = [values[panel] + rises[panel] * part for panel, part in column]
            if self.train.omit:
                ordinates = [max(ordinate, 0.0) for ordinate in ordinates]
            totals = [total + weight * ordinate for total, ordinate in zip(totals, ordinates, strict=True)]
        for kind, distance in group.ends:
            amount, behind, area = TOWARDS[kind] * float(self.intensity[kind]), float(distance), self.areas[kind]
            whole = area(self.course.way.near[-1]) if kind == "before" else 0.0
            totals = [
                total + amount * (area(spot.near - behind) - whole)
                for total, spot in zip(totals, places.spots, strict=True)
            ]
        return totals

    def _totals(self) -> list[list[float]]:
        """Return for each group and spot the largest effect of this group and all behind it."""
        totals = [self.effects[-1]]
        for effects, windows in zip(self.effects[-2::-1], self.course.windows[::-1], strict=True):
            behind = totals[0]
            best = [max(behind[first:after], default=IMPOSSIBLE) for first, after in windows]
            totals.insert(0, [here + there for here, there in zip(effects, best, strict=True)])
        return totals

    # --- level summits ------------------------------------------------------------------------------------

    def _add_level_summits(self) -> None:
        """Add positions in which the effect of a run with uniform loads has a level summit between two others."""
        groups, best = self.course.groups, self.near_best() - 2 * self.margin
        if len(groups) == 1:
            summits = self._level_summits(groups[0], self.course.places[0], self.effects[0], best)
            more = places_of(self.course.way, groups[0], [Spot(at, float(at)) for at in summits])
            self.spots = [self.spots[0] + more.spots]
            self.effects = [self.effects[0] + self._effects(groups[0], more)]
            return
        most = [self._ceiling(*both) for both in zip(groups, self.course.places, self.effects, strict=True)]
        extra: list[list[Exact]] = [[] for _ in groups]
        for run, first, behind in runs(groups, self.course.gaps):
            others = sum(most[:first] + most[first + len(behind) :])
            places = places_of_run(self.course.way, self.fine.way, run)
            for at in self._level_summits(run, places, self._effects(run, places), best - others):
                for group, distance in enumerate(behind, first):
                    extra[group].append(at - distance)
        if any(extra):
            self.course = widened(self.course, extra)
            self.spots = [places.spots for places in self.course.places]
            self.effects = [self._effects(*pair) for pair in self._groups_and_places()]

    def _level_summits(self, run: Group, places: Places, effects: Sequence[float], floor: float) -> list[Exact]:
        """Return the level summits of a run's effect that may come up to the floor.

        They lie between two neighbouring spots, where the effect is a parabola bent downwards.
        """
        found = []
        for a, b, left, right, sag in self._bent(run, places, effects):
            # a parabola through both has its summit between them when it sags by more than they differ
            if sag < -self.margin or abs(right - left) > sag + 2 * self.margin or max(left, right) + sag < floor:
                continue
            summit = self._summit_between(run, a, b)
            if summit is not None:
                found.append(summit)
        return found

    def _ceiling(self, group: Group, places: Places, effects: Sequence[float]) -> float:
        """Return a bound of a group's effect, between its spots as well."""
        return max(
            [*effects, *(max(left, right) + sag for _, _, left, right, sag in self._bent(group, places, effects))]
        )

    def _bent(
        self, run: Group, places: Places, effects: Sequence[float]
    ) -> Iterator[tuple[Spot, Spot, float, float, float]]:
        """Return the neighbouring spots between which the effect is bent: both, their effects, four times the rise."""
        slopes = {kind: self.fine.near_slopes(adverse=kind != "follow") for kind in self.intensity}
        ends = [(TOWARDS[kind] * float(self.intensity[kind]), slopes[kind], end, float(end)) for kind, end in run.ends]
        for (a, b), (left, right) in zip(pairwise(places.spots), pairwise(effects), strict=True):
            if not ends or (a.near == b.near and a.at == b.at):
                continue
            bends = [amount * slope[self._piece_between(a, b, end, near)] for amount, slope, end, near in ends]
            if any(bends):
                yield a, b, left, right, -sum(bends) * (b.near - a.near) ** 2 / 2

    def _piece_between(self, a: Spot, b: Spot, distance: Exact, near_distance: float) -> int:
        """Return the piece an end of load runs through between two spots; off the way -1, or how many there are."""
        if b.near - a.near > 4 * self.fine.way.slack:
            return bisect_right(self.fine.way.near, (a.near + b.near) / 2 - near_distance) - 1
        return bisect_right(self.fine.way.knots, (a.at + b.at) / 2 - distance) - 1

    def _summit_between(self, run: Group, a: Spot, b: Spot) -> Exact | None:
        """Return where the slope of the effect vanishes between two neighbouring positions, if there is a summit."""
        middle = (a.at + b.at) / 2
        slope = bend = ZERO
        for axle, offset in zip(run.axles, run.offsets, strict=True):
            location = middle - offset
            if self.course.way.carries(location, 0) and not (self.train.omit and self.fine.at(location).sign() <= 0):
                slope = slope + self.train.axles[axle] * self.heavier * self.fine.slope(
                    self.fine.way.piece_at(location)
                )
        for kind, distance in run.ends:
            location = middle - distance
            if not self.course.way.carries(location, 0):
                continue
            ordinate = self.fine.at(location)
            if kind == "follow" or ordinate.sign() > 0:
                amount = TOWARDS[kind] * self.intensity[kind]
                slope = slope + amount * ordinate
                bend = bend + amount * self.fine.slope(self.fine.way.piece_at(location))
        if bend.sign() >= 0:
            return None
        summit = middle - slope / bend
        # at a zero point of the line a parabola may end level: that is its summit too
        return summit if a.at <= summit <= b.at else None

    # --- exactly ------------------------------------------------------------------------------------------

    def near(self, best: float) -> Iterator[Arrangement]:
        """Return the exact arrangement for each spot of the leading group that may come up to a value."""
        for index in self._nearly(0, range(len(self.totals[0])), best):
            yield self._arrangement(0, index)

    def _nearly(self, group: int, indices: range, best: float) -> list[int]:
        totals = self.totals[group]
        return [index for index in indices if totals[index] >= best - self.margin]

    def _arrangement(self, group: int, index: int) -> Arrangement:
        """Return the best exact arrangement of a group at a spot and all behind it; of equal ones the closest."""
        if (group, index) in self.found:
            return self.found[group, index]
        spot = self.spots[group][index]
        spots: tuple[Spot, ...] = (spot,)
        value, at_limit = self._exact_effect(self.course.groups[group], spot), spot.side != 0
        if group + 1 < len(self.course.groups):
            first, after = self.course.windows[group][index]
            nearly = self._nearly(group + 1, range(first, after), max(self.totals[group + 1][first:after]))
            best: Arrangement | None = None
            for place in reversed(nearly):
                behind = self._arrangement(group + 1, place)
                if best is None or is_better(behind, best):
                    best = behind
            assert best is not None  # noqa: S101 - a spot without any behind it is impossible, and left out before
            value, at_limit, spots = value + best.value, at_limit or best.at_limit, (spot, *best.spots)
        self.found[group, index] = Arrangement(value, at_limit, spots)
        return self.found[group, index]

    def _exact_effect(self, group: Group, spot: Spot) -> Exact:
        total = ZERO
        for axle, location in self.standing(group, spot):
            if location is not None:
                total = total + self.train.axles[axle] * self.line.at(location)
        total = total * self.heavier
        for kind, distance in group.ends:
            area = self.fine.area_to(spot.at - distance, adverse=kind != "follow")
            if kind == "before":
                area = area - self.fine.area_to(self.course.way.knots[-1], adverse=True)
            total = total + TOWARDS[kind] * self.intensity[kind] * area
        return total

    def standing(self, group: Group, spot: Spot) -> list[tuple[int, Exact | None]]:
        """Return where each axle of a group stands; None off the chain, and for one left out as it adds nothing."""
        found: list[tuple[int, Exact | None]] = []
        for axle, offset in zip(group.axles, group.offsets, strict=True):
            location = spot.at - offset
            stands = self.course.way.carries(location, spot.side)
            if stands and self.train.omit:
                stands = self.line.at(location).sign() > 0
            found.append((axle, location if stands else None))
        return found


def is_better(one: Arrangement, other: Arrangement) -> bool:
    """Return whether an effect is larger, or equal and attained where the other is only approached."""
    if one.value != other.value:
        return one.value > other.value
    return other.at_limit and not one.at_limit
