"""Loads as they stand on a truss: bands along chains, forces between joints, members with weight."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Final

from trusscalc.exact import Exact
from trusscalc.sheet.board import LIGHT, SHORTEST, SMALL_SIZE, along, along_line, around, compass, unit
from trusscalc.sheet.lettering import Point
from trusscalc.sheet.loadbands import Band, draw_band
from trusscalc.sheet.marks import Label
from trusscalc.sheet.wholetruss import IN_LINE, WholeTruss

if TYPE_CHECKING:
    from trusscalc.panelloads import Spread
    from trusscalc.panelshares import SpreadLine

TALLEST: Final = 7.0
LOWEST: Final = 2.2
"""Heights of the most and the least intense band, mm."""
OFF_CHAIN: Final = 4.4
"""How far bands keep from the chain, so that joints are named between, mm."""
OFF_SUPPORT: Final = 0.8
TIP: Final = 1.0
"""How far a force keeps from the chain, mm."""
ACROSS: Final = 0.4
"""Part of a load across its chain (sine of the angle, on average) from which its arrows stand on the chain."""
LETTERING: Final = 3.6
"""Room over a band for its lettering, mm."""
FORCE_LENGTH: Final = 8.0
NEAR: Final = 0.02


@dataclass(frozen=True, slots=True)
class _Piece:
    """A band with the panels it stands on."""

    band: Band
    panels: tuple[frozenset[str], ...]


class Stands:
    """Loads being drawn on a truss, one rule after the other.

    Parameters
    ----------
    whole : WholeTruss
        The truss.
    value : callable
        Puts symbols at their values.
    largest : float
        The largest intensity of any rule.
    """

    def __init__(self, whole: WholeTruss, value: Callable[[Exact], Exact], largest: float) -> None:
        self.whole, self.value, self.largest = whole, value, largest
        self._taken: dict[tuple[frozenset[str], bool], float] = {}
        self._waiting: list[tuple[Label, list[Label]]] = []

    def spread_load(self, spread: Spread, text: str) -> None:
        """Draw a load along a chain as bands, its intensity at the longest of them."""
        pieces = list(self._pieces(spread))
        if not pieces:
            return
        base = max(self._level(piece) for piece in pieces)
        for piece in pieces:
            band = _shifted(piece.band, base)
            draw_band(self.whole.board, band)
            for panel in piece.panels:
                self._taken[panel, _points_up(band.side)] = base + max(band.heights) + LETTERING
        band = _shifted(max(pieces, key=lambda piece: round(math.dist(*piece.band.base), 3)).band, base)
        label = Label((0.0, 0.0), text, SMALL_SIZE)
        foot, edge = band.at(0.5)
        ahead = unit(*band.base)
        spots = [
            *along_line(*band.outer, label, 0.7, foot),
            *around(edge, label, 1.0, [band.side, *compass(band.side)]),
        ]
        for share, way in ((0.0, (-ahead[0], -ahead[1])), (1.0, ahead)):  # before it and behind it
            spots += around(band.at(share)[1], label, 1.0, [way])
            spots += around(band.at(share)[0], label, 1.0, [way])
        self._letter(spots)

    def force(self, spread: Spread, text: str) -> None:
        """Draw a force at its place, beyond the bands that stand there."""
        line = spread.lines[0]
        foot, panel = self._at(line, line.start), frozenset(joint for joint, _ in line.shares)
        way = self._way(line, positive=self._float(line.resultant) >= 0)
        press = self._score(spread, (-way[0], -way[1])) <= 0
        side = (-way[0], -way[1]) if press else way
        start = max(
            (size for (joints, up), size in self._taken.items() if joints & panel and up == _points_up(side)),
            default=0.0,
        )
        near, far = along(foot, side, TIP), along(foot, side, max(start, TIP) + FORCE_LENGTH)
        self.whole.board.arrow(*((far, near) if press else (near, far)), width=LIGHT, small=True)
        label = Label(far, text, SMALL_SIZE)
        self._letter([*around(far, label, 0.7, [side]), *around(far, label, 0.9, compass(side))])

    def weight(self, spread: Spread, text: str) -> None:
        """Letter the weight of members along the longest of them that has room."""
        label = Label((0.0, 0.0), text, SMALL_SIZE)
        names = sorted(
            (line.stands_on for line in spread.lines), key=lambda name: -round(math.dist(*self.whole.ends(name)), 3)
        )
        self._letter(
            [spot for name in names for spot in along_line(*self.whole.ends(name), label, 0.9, self.whole.middle)]
        )

    def write(self) -> list[str]:
        """Write the lettering, once every line is drawn; return what found no room."""
        missing = []
        for label, spots in self._waiting:
            if not self.whole.board.write(spots, must=False):
                self.whole.board.left_out.pop()
                missing.append(label.text)
        self._waiting.clear()
        return missing

    def _letter(self, spots: list[Label]) -> None:
        self._waiting.append((spots[0], spots))

    # --- where things stand -------------------------------------------------------------------------------

    def _pieces(self, spread: Spread) -> Iterator[_Piece]:
        """Yield the bands of a rule, panels in one line taken together."""
        found: list[_Piece] = []
        factor, lengthwise = self._factor(spread), self._is_lengthwise(spread)
        for line in spread.lines:
            for piece in self._panel(spread, line, factor, lengthwise=lengthwise):
                joined = _joined(found[-1], piece) if found else None
                if joined is not None:
                    found[-1] = joined
                else:
                    found.append(piece)
        yield from found

    def _factor(self, spread: Spread) -> float:
        """Return the height of a unit of intensity: one for all rules, more for those too low to be seen."""
        most = max((abs(self._float(w)) for line in spread.lines for w in line.intensities), default=0.0)
        return max(TALLEST / self.largest, LOWEST / most) if most else 0.0

    def _panel(self, spread: Spread, line: SpreadLine, factor: float, *, lengthwise: bool) -> Iterator[_Piece]:
        """Yield the band on one panel, or two where the load changes its sign there."""
        first, second = (self._float(w) for w in line.intensities)
        a, b = self._at(line, line.start), self._at(line, line.end)
        ends = [(a, first), (b, second)]
        if first * second < 0:
            share = first / (first - second)
            zero = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1])), 0.0
            ends.insert(1, zero)
        for (start, low), (end, high) in itertools.pairwise(ends):
            size = low + high
            if not size or math.dist(start, end) < SHORTEST:
                continue
            way = self._way(line, positive=size > 0)
            ahead = unit(start, end)
            side = self._side(spread, (-ahead[1], ahead[0]) if lengthwise else (-way[0], -way[1]))
            heights = (factor * abs(low), factor * abs(high))
            yield _Piece(
                Band((start, end), heights, side, way, lengthwise), (frozenset(joint for joint, _ in line.shares),)
            )

    def _is_lengthwise(self, spread: Spread) -> bool:
        """Return whether a load acts more along its chain than across it."""
        across = length = 0.0
        for line in spread.lines:
            a, b = (self._at(line, place) for place in line.reach)
            ahead, way = unit(a, b), self._way(line, positive=True)
            across += math.dist(a, b) * abs(ahead[0] * way[1] - ahead[1] * way[0])
            length += math.dist(a, b)
        return across < ACROSS * length

    def _side(self, spread: Spread, first: Point) -> Point:
        """Return the side of the chain on which a load is drawn: that of fewer bars, the first where both are equal."""
        return first if self._score(spread, first) <= 0 else (-first[0], -first[1])

    def _score(self, spread: Spread, side: Point) -> float:
        """Return how far the bars at a rule's joints, but those along it, lie on a side."""
        joints = {joint for line in spread.lines for joint, _ in line.shares}
        place = self.whole.flat
        score = 0.0
        for member in self.whole.truss.members:
            for near, far in ((member.start, member.end), (member.end, member.start)):
                if near in joints and far not in joints:
                    way = unit(place[near], place[far])
                    score += side[0] * way[0] + side[1] * way[1]
        return round(score, 6)

    def _level(self, piece: _Piece) -> float:
        """Return how far from the chain a band may begin: beyond what stands there, and beyond supports."""
        side = piece.band.side
        levels = [self._taken.get((panel, _points_up(side)), OFF_CHAIN) for panel in piece.panels]
        for joint in frozenset().union(*piece.panels) & self.whole.depth.keys():
            ways, depth = self.whole.depth[joint]
            if any(side[0] * way[0] + side[1] * way[1] > IN_LINE for way in ways):
                levels.append(depth + OFF_SUPPORT)
        return max(levels)

    def _way(self, line: SpreadLine, *, positive: bool) -> Point:
        dx, dy = (self._float(part) for part in line.direction)
        return unit((0.0, 0.0), (dx, dy) if positive else (-dx, -dy))

    def _at(self, line: SpreadLine, position: Exact) -> Point:
        """Return a place along a panel on the paper."""
        a, b = (self.whole.flat[line.shares[end][0]] for end in (0, -1))
        low, high, here = (self._float(place) for place in (*line.reach, position))
        share = (here - low) / (high - low) if high > low else 0.0
        return a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1])

    def _float(self, number: Exact) -> float:
        return float(self.value(number))


def _points_up(side: Point) -> bool:
    return side[1] > NEAR or (abs(side[1]) <= NEAR and side[0] > 0)


def _shifted(band: Band, distance: float) -> Band:
    a, b = band.base
    return replace(band, base=(along(a, band.side, distance), along(b, band.side, distance)))


def _joined(first: _Piece, second: _Piece) -> _Piece | None:
    """Return two bands as one when the second goes on in the line of the first."""
    a, b = first.band, second.band
    (start, middle), (again, end) = a.base, b.base
    if math.dist(middle, again) > NEAR or math.dist(a.side, b.side) > NEAR or math.dist(a.way, b.way) > NEAR:
        return None
    share = math.dist(start, middle) / math.dist(start, end)
    whole = replace(a, base=(start, end), heights=(a.heights[0], b.heights[1]))
    foot, edge = whole.at(share)
    if math.dist(foot, middle) > NEAR or math.dist(edge, a.outer[1]) > NEAR or math.dist(edge, b.outer[0]) > NEAR:
        return None
    return _Piece(whole, (*first.panels, *second.panels))
