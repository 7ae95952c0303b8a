"""An influence line as a train meets it: in the direction of travel, adverse ordinates positive.

Straight between its knots, nothing off its ends. Exact, and as floats for screening.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from itertools import accumulate, pairwise

from trusscalc.criticalpositions import Way
from trusscalc.exact import ZERO, Exact


@dataclass(frozen=True, slots=True)
class Ordinates:
    """The ordinates of an influence line at its knots: as they are, as floats, and their signs."""

    exact: tuple[Exact, ...]
    near: tuple[float, ...]
    signs: tuple[int, ...]

    def turned(self) -> Ordinates:
        """Return them from the other end."""
        return Ordinates(self.exact[::-1], self.near[::-1], self.signs[::-1])


def ordinates_of(values: Sequence[Exact]) -> Ordinates:
    """Return ordinates; every number becomes a float once, here."""
    return Ordinates(tuple(values), tuple(map(float, values)), tuple(value.sign() for value in values))


def zeros_of(knots: Sequence[Exact], ordinates: Ordinates) -> tuple[Exact, ...]:
    """Return the points between two knots where the line changes its sign."""
    return tuple(
        zero_between(a, b, left, right)
        for (a, b), (left, right), (before, after) in zip(
            pairwise(knots), pairwise(ordinates.exact), pairwise(ordinates.signs), strict=True
        )
        if before * after < 0
    )


def zero_between(a: Exact, b: Exact, left: Exact, right: Exact) -> Exact:
    """Return where a line with ordinates of different signs at a and b is zero."""
    return a + (b - a) * left / (left - right)


def with_zeros(way: Way, ordinates: Ordinates, zeros: Sequence[Exact]) -> tuple[Way, Ordinates]:
    """Return the way and its ordinates with the zero points among the knots."""
    knots, near = list(way.knots), list(way.near)
    exact, near_values, signs = list(ordinates.exact), list(ordinates.near), list(ordinates.signs)
    for zero in zeros:
        place = way.piece_at(zero) + 1 + len(knots) - len(way.knots)
        knots.insert(place, zero)
        near.insert(place, float(zero))
        exact.insert(place, ZERO)
        near_values.insert(place, 0.0)
        signs.insert(place, 0)
    fine = replace(way, knots=tuple(knots), near=tuple(near))
    return fine, Ordinates(tuple(exact), tuple(near_values), tuple(signs))


@dataclass(frozen=True, slots=True)
class LoadedLine:
    """An influence line over a way, taken in one sense.

    Attributes
    ----------
    way : Way
        Its knots.
    ordinates : Ordinates
        At each of them.
    sense : int
        1 when positive ordinates are adverse, -1 when negative ones are; everything below is times the sense.
    """

    way: Way
    ordinates: Ordinates
    sense: int

    def slope(self, piece: int) -> Exact:
        """Return the slope of a piece."""
        values, knots = self.ordinates.exact, self.way.knots
        slope = (values[piece + 1] - values[piece]) / (knots[piece + 1] - knots[piece])
        return slope if self.sense > 0 else -slope

    def at(self, location: Exact) -> Exact:
        """Return the ordinate at a location of the chain."""
        values, knots = self.ordinates.exact, self.way.knots
        piece = self.way.piece_at(location)
        part = (location - knots[piece]) / (knots[piece + 1] - knots[piece])
        value = values[piece] + (values[piece + 1] - values[piece]) * part if part else values[piece]
        return value if self.sense > 0 else -value

    def area_to(self, location: Exact, *, adverse: bool = False) -> Exact:
        """Return the area from the start to a location (anywhere): of the whole line, or of its adverse lengths.

        For the adverse lengths the zero points must be among the knots.
        """
        total = ZERO
        values, signs = self.ordinates.exact, self.ordinates.signs
        for piece, (a, b) in enumerate(pairwise(self.way.knots)):
            if not location > a:
                break
            if adverse and self.sense * signs[piece] <= 0 and self.sense * signs[piece + 1] <= 0:
                continue
            left, right = values[piece], values[piece + 1]
            if location < b:
                right = left + (right - left) * (location - a) / (b - a)
                b = location  # noqa: PLW2901 - the part of the piece
            total = total + (left + right) * (b - a)
        return total * self.sense / 2

    def adverse_lengths(self) -> tuple[list[tuple[Exact, Exact]], Exact]:
        """Return where ordinates are adverse, from and to, and the area there."""
        knots, values, signs = self.way.knots, self.ordinates.exact, self.ordinates.signs
        found: list[tuple[Exact, Exact]] = []
        total = ZERO
        for piece, (a, b) in enumerate(pairwise(knots)):
            before, after = self.sense * signs[piece], self.sense * signs[piece + 1]
            if before <= 0 and after <= 0:
                continue
            left, right = values[piece], values[piece + 1]
            if before * after < 0:
                zero = zero_between(a, b, left, right)
                a, b, left, right = (a, zero, left, ZERO) if before > 0 else (zero, b, ZERO, right)  # noqa: PLW2901
            total = total + (left + right) * (b - a)
            if found and before >= 0 and found[-1][1] is a:
                found[-1] = (found[-1][0], b)
            else:
                found.append((a, b))
        return found, total * self.sense / 2

    # --- in floats ----------------------------------------------------------------------------------------

    def near_values(self) -> list[float]:
        """Return the ordinates."""
        return [value * self.sense for value in self.ordinates.near]

    def near_slopes(self, *, adverse: bool = False) -> list[float]:
        """Return the slope of every piece, 0 for one that is not adverse when only those count; twice 0 behind."""
        ordinates = self.near_values()
        slopes = []
        for piece, ((a, b), (left, right)) in enumerate(zip(pairwise(self.way.near), pairwise(ordinates), strict=True)):
            if adverse and left <= 0 and right <= 0:
                slopes.append(0.0)
            elif b - a > self.way.slack:
                slopes.append((right - left) / (b - a))
            else:
                slopes.append(float(self.slope(piece)))
        return [*slopes, 0.0, 0.0]  # for pieces len and -1: off the chain

    def near_area(self, *, adverse: bool = False) -> Callable[[float], float]:
        """Return the function of the area up to a location, as ``area_to`` but in floats."""
        knots, values, slopes = self.way.near, self.near_values(), self.near_slopes(adverse=adverse)
        if adverse:
            values = [max(value, 0.0) for value in values]
        pieces = [
            (left + right) / 2 * (b - a)
            for (a, b), (left, right) in zip(pairwise(knots), pairwise(values), strict=True)
        ]
        sums = list(accumulate(pieces, initial=0.0))

        def area(location: float) -> float:
            if location <= knots[0]:
                return 0.0
            if location >= knots[-1]:
                return sums[-1]
            piece = bisect_right(knots, location) - 1
            inward = location - knots[piece]
            return sums[piece] + inward * (values[piece] + slopes[piece] * inward / 2)

        return area
