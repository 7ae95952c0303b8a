"""What an equation costs the reader: the price by which cuts are compared.

Ten is one term of a known bar. Prices and rules are common practice, no source: they were set so that the
cuts of textbook trusses come out as an engineer would draw them. Min terms alone would give lumps and bent
cuts, so what makes a cut natural (a straight line, both sides in one piece, a centre at a joint, axis sums)
has its price too. An equation without any of the penalties is called natural.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

from trusscalc.statics.bodies import Body, everything
from trusscalc.statics.incidence import AXIS_X, AXIS_Y, Layout, Point, bits

Preference = Literal["", "sections", "joints"]

EQUATION = 6.0
TERM = 10.0
OBLIQUE_TERM = 3.0
ZERO_TERM = 1.0
DROPPED = 2.0
LOAD = 8.0
LOAD_WITHOUT_ARM = 1.0
MOST_LOADS = 5
REACTION = 12.0
DEPTH = 3.0
CENTRE = 1.0
CENTRE_AWAY_FROM_CUT = 10.0
CENTRE_OFF_JOINTS = 30.0
CENTRE_OUTSIDE = 6.0
OBLIQUE_SUM = 45.0
CHORD_SUM = 12.0
SHARED_LINE_SUM = 6.0
SINGLE_DROP_SUM = 18.0
SINGLE_JOINT = -4.0
MORE_BARS = 8.0
EXTRA_PIECE = 25.0
BENT = 37.0
UPRIGHT_SECTION = -2.0
RIGHT_HALF = 1.0
PAIR = 16.0
NOT_PREFERRED = 150.0
ALL_BUT_A_JOINT = 20.0
"""Whoever cuts off one joint writes its equations, not those of all the rest."""
FEW_BARS = 3
MANY_BARS = 5
CHORD_BARS = 4


@dataclass(frozen=True, slots=True)
class Candidate:
    """One equation of one body.

    Attributes
    ----------
    body : Body
        The free body.
    point : tuple
        Centre or direction, see ``incidence``.
    recipe : tuple
        How to write it exactly: ("axis", 0 or 1), ("joint", j), ("meet", b, c) or ("across", b).
    live : int
        Bars with a coefficient.
    price : float
        All but the terms of bars.
    terms : float
        The terms of all bars with a coefficient, as if known.
    natural : bool
        No penalty in it.
    place : tuple of float
        Where the cut is, for ties: left, then low, then small.
    """

    body: Body
    point: Point
    recipe: tuple[str, int, int]
    live: int
    price: float
    terms: float
    natural: bool
    place: tuple[float, ...]


class Prices:
    """Prices of one structure: what is fixed for it, worked out once."""

    def __init__(self, layout: Layout, zero: int, prefer: Preference = "") -> None:
        """Fix the layout, the mask of bars whose force is exactly zero, and what the engineer prefers."""
        self.prefer = prefer
        self.layout = layout
        self.whole = everything(layout)
        xs, ys = layout.x, layout.y
        self.box = (min(xs), max(xs), min(ys), max(ys))
        self.diagonal = math.hypot(self.box[1] - self.box[0], self.box[3] - self.box[2]) or 1.0
        self.terms: list[float] = []
        self.slant: list[float] = []
        for index, (_, dx, dy) in enumerate(layout.lines):
            slant = bool(dx and dy)
            self.slant.append(OBLIQUE_TERM if slant and layout.ends[index][1] >= 0 else 0.0)
            if layout.ends[index][1] < 0:
                self.terms.append(0.0 if zero >> index & 1 else REACTION)
            else:
                self.terms.append(ZERO_TERM if zero >> index & 1 else TERM + (OBLIQUE_TERM if slant else 0.0))
        self.chords = self._chord_directions()
        self.loaded = sum(1 << j for j, (fx, fy) in enumerate(layout.loads) if fx or fy)

    def _chord_directions(self) -> set[Point]:
        """Return the directions of straight lines that hold at least four members."""
        layout = self.layout
        lines: dict[tuple[Point, Point], int] = {}
        for bar in bits(layout.members):
            along = layout.across(bar)
            c, dx, dy = layout.lines[bar]
            key = (along, layout.normal((-dy, dx, c)))
            lines[key] = lines.get(key, 0) + 1
        return {along for (along, _), count in lines.items() if count >= CHORD_BARS}

    def solving(self, candidate: Candidate, unknown: int) -> float:
        """Return the price of an equation that solves for a bar, all its other bars being known."""
        return candidate.price + candidate.terms - self.terms[unknown] + self.slant[unknown]

    def independent(self, first: Candidate, second: Candidate, e: int, f: int) -> bool:
        """Return whether two equations in the same two unknowns decide both."""
        a, b = (self.coefficient(first, bar) for bar in (e, f))
        c, d = (self.coefficient(second, bar) for bar in (e, f))
        return bool((a * d - b * c) % self.layout.prime)

    def coefficient(self, candidate: Candidate, bar: int) -> int:
        """Return the lever of a bar in an equation, modulo the prime."""
        px, py, pw = candidate.point
        c, dx, dy = self.layout.lines[bar]
        sign = 1 if candidate.body.kept >> self.layout.ends[bar][0] & 1 else -1
        return sign * (pw * c - px * dy + py * dx)

    # --- candidates of a body ---------------------------------------------------------------------------

    def candidates(self, body: Body) -> list[Candidate]:
        """Return every equation of a body worth considering."""
        layout = self.layout
        bars = bits(body.cut)
        fixed, natural, place = self._body_price(body, bars)
        found = []
        for point, recipe in self._points(body, bars).items():
            live = dropped = 0
            terms = 0.0
            for bar in bars:
                if layout.passes(bar, point):
                    dropped |= 1 << bar
                else:
                    live |= 1 << bar
                    terms += self.terms[bar]
            if not live:
                continue
            about, plain = self._about_price(body, point, recipe, dropped)
            price = fixed + about + DROPPED * (dropped & layout.members).bit_count() + self._loads_price(body, point)
            key = (*place, float(len(recipe[0])), *self._where(recipe))
            found.append(Candidate(body, point, recipe, live, price, terms, natural and plain, key))
        return found

    def _points(self, body: Body, bars: list[int]) -> dict[Point, tuple[str, int, int]]:
        layout = self.layout
        points: dict[Point, tuple[str, int, int]] = {AXIS_X: ("axis", 0, 0), AXIS_Y: ("axis", 1, 0)}
        if body.found == "joint":
            for bar in bars:
                points.setdefault(layout.across(bar), ("across", bar, 0))
            if body.cut & layout.members == body.cut:
                return points
            # a support's joint is the end section: moments about the far ends of its bars read well
        self._add_centres(points, bars)
        return points

    def _add_centres(self, points: dict[Point, tuple[str, int, int]], bars: list[int]) -> None:
        """Add the ends of the cut bars, and where two of their lines meet."""
        layout = self.layout
        for bar in bars:
            for joint in layout.ends[bar]:
                if joint >= 0:
                    points.setdefault(layout.points[joint], ("joint", joint, 0))
        for place, first in enumerate(bars):
            for second in bars[place + 1 :]:
                point = layout.meeting(first, second)
                if point is None or point in points:
                    continue
                joint = layout.places.get(point, -1)
                if joint >= 0:
                    points[point] = ("joint", joint, 0)
                else:
                    points[point] = ("meet", first, second) if point[2] else ("across", first, 0)

    def _body_price(self, body: Body, bars: list[int]) -> tuple[float, bool, tuple[float, ...]]:
        layout = self.layout
        members = [bar for bar in bars if layout.ends[bar][1] >= 0]
        spans = [sorted((layout.x[a], layout.x[b])) for a, b in (layout.ends[bar] for bar in members)]
        heights = [layout.y[a] + layout.y[b] for a, b in (layout.ends[bar] for bar in members)]
        left = sum(low + high for low, high in spans) / (2 * len(spans) or 1)
        low = sum(heights) / (2 * len(heights) or 1)
        place = (round(left / self.diagonal, 6), round(low / self.diagonal, 6), float(body.kept.bit_count()))
        if body.found == "joint":
            away = self.prefer == "sections"
            return EQUATION + SINGLE_JOINT + (NOT_PREFERRED if away else 0.0), not away, place
        price = EQUATION
        natural = True
        if self.prefer == "joints" and body.kept != self.whole:
            price += NOT_PREFERRED
            natural = False
        price += MORE_BARS * max(0, len(members) - FEW_BARS)
        if len(members) >= MANY_BARS or body.surplus:
            natural = False
        price += EXTRA_PIECE * body.surplus
        if body.found == "other":
            price += BENT
            natural = False
        if (self.whole & ~body.kept).bit_count() == 1:
            price += ALL_BUT_A_JOINT
            natural = False
        if spans and max(low for low, _ in spans) < min(high for _, high in spans) - 1e-9 * self.diagonal:
            price += UPRIGHT_SECTION
        if body.kept != self.whole and self._lies_right(body):
            price += RIGHT_HALF
        return price, natural, place

    def _lies_right(self, body: Body) -> bool:
        """Return whether the body holds the rightmost joint but not the leftmost."""
        return bool(body.kept >> (len(self.layout.joints) - 1) & 1) and not body.kept & 1

    def _about_price(self, body: Body, point: Point, recipe: tuple[str, int, int], dropped: int) -> tuple[float, bool]:
        layout = self.layout
        kind, index, _ = recipe
        if kind == "axis":
            return 0.0, True
        if kind == "meet":
            return CENTRE_OFF_JOINTS + self._outside(recipe), False
        if kind == "joint":
            near = bool(layout.at[index] & body.cut)
            return CENTRE + (0.0 if near else CENTRE_AWAY_FROM_CUT), near
        if body.found != "joint":
            return (CHORD_SUM, True) if point in self.chords else (OBLIQUE_SUM, False)
        if dropped.bit_count() > 1:
            return SHARED_LINE_SUM, True
        at_support = body.cut & ~layout.members
        return (OBLIQUE_SUM if at_support else SINGLE_DROP_SUM), False

    def _meeting_place(self, recipe: tuple[str, int, int]) -> tuple[float, float]:
        layout = self.layout
        (a, _), (b, _) = layout.ends[recipe[1]], layout.ends[recipe[2]]
        (ux, uy), (vx, vy) = layout.slopes[recipe[1]], layout.slopes[recipe[2]]
        below = ux * vy - uy * vx
        if not below:
            return math.inf, math.inf
        share = ((layout.x[b] - layout.x[a]) * vy - (layout.y[b] - layout.y[a]) * vx) / below
        return layout.x[a] + share * ux, layout.y[a] + share * uy

    def _outside(self, recipe: tuple[str, int, int]) -> float:
        x, y = self._meeting_place(recipe)
        west, east, south, north = self.box
        off = math.hypot(max(west - x, x - east, 0.0), max(south - y, y - north, 0.0)) / self.diagonal
        if not math.isfinite(off):
            return CENTRE_OUTSIDE * 100
        return round(CENTRE_OUTSIDE * (1 + max(0.0, math.log2(4 * off))), 6) if off > 1e-9 else 0.0  # noqa: PLR2004

    def _where(self, recipe: tuple[str, int, int]) -> tuple[float, float]:
        kind, index, _ = recipe
        if kind == "axis":
            return float(index), 0.0
        if kind == "joint":
            return float(index), 0.0
        if kind == "meet":
            x, y = self._meeting_place(recipe)
            return (round(x / self.diagonal, 6), round(y / self.diagonal, 6)) if math.isfinite(x) else (0.0, 0.0)
        dx, dy = self.layout.slopes[index]
        return round(math.atan2(dy, dx) % math.pi, 6), 0.0

    def _loads_price(self, body: Body, point: Point) -> float:
        """Return the price of the loads on the body, those without arm nearly free, at most five counted."""
        mask = body.kept & self.loaded
        total = 0.0
        while mask and total < LOAD * MOST_LOADS:
            low = mask & -mask
            mask ^= low
            total += LOAD if self._has_arm(low.bit_length() - 1, point) else LOAD_WITHOUT_ARM
        return min(total, LOAD * MOST_LOADS)

    def _has_arm(self, joint: int, point: Point) -> bool:
        layout = self.layout
        fx, fy = layout.loads[joint]
        if point == AXIS_X:
            return bool(fx)
        if point == AXIS_Y:
            return bool(fy)
        if point == layout.points[joint]:
            return False
        if not fx and point[2]:  # a vertical load and a centre straight above or below
            return point[0] != layout.points[joint][0]
        if not fy and point[2]:
            return point[1] != layout.points[joint][1]
        return True


def all_candidates(prices: Prices, bodies: Iterable[Body]) -> list[Candidate]:
    """Return the equations of all bodies."""
    return [candidate for body in bodies for candidate in prices.candidates(body)]
