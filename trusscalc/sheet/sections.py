"""The section line: one line on paper that crosses every cut bar once and no other bar.

Tried in this order, everything in millimetres on paper: a straight upright line, a straight line at another
angle, an upright or level line that steps aside for joints on the wrong side, and a chain through the cut
bars in the order round the body. Whatever comes out is proven on the drawing: crossings are counted, and a line
that meets a bar it should not is thrown away.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.sheet.board import along, unit
from trusscalc.sheet.lettering import Point

Segment = tuple[Point, Point]
Levels = Mapping[float, tuple[float, float]]

CLEAR: Final = 1.6
"""How near a section line may come to a joint."""
BEHIND: Final = 3.0
"""How far behind a joint it passes when it goes round it."""
STUB: Final = 7.0
"""How far from the kept part it runs in a free body."""
STEP_HEIGHT: Final = 8.0
BEYOND: Final = 9.0
SHORT_BEYOND: Final = 5.0
"""How far it reaches beyond the outermost bar; the shorter one where other bars are near."""
GOOD_GAP: Final = 5.0
MOST_BARS_IN_A_CHAIN: Final = 7
SLACK: Final = 1e-9
DIRECTIONS: Final = 60
STRAIGHT_TRIALS: Final = 6
LEVEL_PENALTY: Final = 4.0


@dataclass(frozen=True, slots=True)
class SectionLine:
    """A section line: its points, and where it crosses each cut bar."""

    points: tuple[Point, ...]
    crossings: Mapping[str, Point]
    closed: bool = False


@dataclass(frozen=True, slots=True)
class CutBars:
    """What a section line has to do: cut bars from their kept to their other end, and all other bars."""

    cut: Mapping[str, Segment]
    others: tuple[Segment, ...]

    def proven(self, points: Sequence[Point], *, closed: bool = False) -> SectionLine | None:
        """Return the line with its crossings if it crosses each cut bar once and nothing else."""
        line = [*points, points[0]] if closed else list(points)
        pieces = list(itertools.pairwise(line))
        crossings: dict[str, Point] = {}
        for name, bar in self.cut.items():
            found = [point for piece in pieces if (point := crossing(piece, bar)) is not None]
            if len(found) != 1 or min(_distance(found[0], end) for end in bar) < CLEAR - 1e-6:
                return None
            crossings[name] = found[0]
        box = _bounds(line)
        for bar in self.others:
            if _apart(box, bar):
                continue
            if any(crossing(piece, bar) is not None for piece in pieces):
                return None
        return SectionLine(tuple(points), crossings, closed)


def section_line(
    cut: Mapping[str, Segment], others: Iterable[Segment], *, near_kept: bool, share: float = 0.5
) -> SectionLine | None:
    """Return a section line, or None when none could be proven.

    Parameters
    ----------
    cut : mapping of name to (kept end, other end)
        Places of the cut bars on paper, mm.
    others : iterable of segments
        All other bars.
    near_kept : bool
        True: run near the kept part (free bodies). False: in the middle (elevations).
    share : float
        Where between kept part and the rest a straight line runs in an elevation.
    """
    if not cut:
        return None
    bars = CutBars(dict(cut), tuple(others))
    for beyond in (BEYOND, SHORT_BEYOND):
        for trial in _trials(bars, near_kept, share, beyond):
            found = bars.proven(trial)
            if found:
                return found
    return _chain(bars, near_kept)


def _trials(bars: CutBars, near_kept: bool, share: float, beyond: float) -> Iterator[Sequence[Point]]:
    straight = list(_straight(bars, near_kept, share, beyond))
    good = [points for score, points in straight if score >= GOOD_GAP]
    yield from good[:STRAIGHT_TRIALS]
    if len(bars.cut) == 1:
        return
    yield from (
        points
        for points in (
            _stepped(bars, near_kept, beyond, upright=True),
            _stepped(bars, near_kept, beyond, upright=False),
        )
        if points
    )
    yield from (points for score, points in straight if score < GOOD_GAP)


def _straight(bars: CutBars, near_kept: bool, share: float, beyond: float) -> list[tuple[float, Sequence[Point]]]:
    """Return straight lines that part kept from other ends, with the width of the gap they run in, best first."""
    found = []
    for place in range(DIRECTIONS):
        # upright first, then leaning more and more to either side
        lean = (place + 1) // 2 * (1 if place % 2 else -1) * math.pi / DIRECTIONS
        normal = (math.cos(lean), math.sin(lean))
        kept = [_dot(bar[0], normal) for bar in bars.cut.values()]
        rest = [_dot(bar[1], normal) for bar in bars.cut.values()]
        for sign in (1.0, -1.0):
            low, high = max(sign * u for u in kept), min(sign * u for u in rest)
            gap = high - low
            if gap < 2 * CLEAR:
                continue
            offset = low + (min(gap / 2, STUB) if near_kept else gap * share)
            line = (sign * normal[0], sign * normal[1])
            tilt = abs(math.degrees(lean))
            tilt = min(tilt, 90.0 - tilt + LEVEL_PENALTY)  # level is nearly as good as upright
            score = min(gap, 3 * STUB) - 0.25 * tilt
            if len(bars.cut) == 1:  # a single bar is cut square
                ((start, end),) = bars.cut.values()
                score = 50.0 * abs(_dot(unit(start, end), normal))
            if place == 0 and gap >= GOOD_GAP:
                score += 100.0
            found.append((score, gap, _across(bars, line, offset, beyond)))
    found.sort(key=lambda item: -item[0])
    return [(gap, points) for _, gap, points in found]


def _across(bars: CutBars, normal: Point, offset: float, beyond: float) -> tuple[Point, Point]:
    """Return the piece of a straight line that reaches beyond all cut bars."""
    direction = (-normal[1], normal[0])
    reaches = []
    for start, end in bars.cut.values():
        u0, u1 = _dot(start, normal), _dot(end, normal)
        share = (offset - u0) / (u1 - u0)
        point = (start[0] + share * (end[0] - start[0]), start[1] + share * (end[1] - start[1]))
        reaches.append(_dot(point, direction))
    base = (normal[0] * offset, normal[1] * offset)
    low, high = min(reaches) - beyond, max(reaches) + beyond
    return along(base, direction, low), along(base, direction, high)


# --- a line that steps aside ------------------------------------------------------------------------------


def _stepped(bars: CutBars, near_kept: bool, beyond: float, *, upright: bool) -> list[Point] | None:
    """Return an upright (or level) line that passes each joint on its right side, with soft steps between."""

    def turned(point: Point) -> Point:
        return point if upright else (point[1], point[0])

    ends = [(turned(bar[0]), turned(bar[1])) for bar in bars.cut.values()]
    middle_kept = sum(kept[0] for kept, _ in ends) / len(ends)
    middle_rest = sum(rest[0] for _, rest in ends) / len(ends)
    side = 1.0 if middle_rest >= middle_kept else -1.0
    levels = _levels(ends, side)
    if any(low > high for low, high in levels.values()):
        return None
    heights = sorted(levels)
    base = _base(levels, heights, near_kept)
    values = [_held(base, *levels[height]) for height in heights]
    points: list[Point] = [(values[0], heights[0] - beyond)]
    for (v0, u0), (v1, u1) in itertools.pairwise(zip(heights, values, strict=True)):
        points += _soft_step(v0, u0, v1, u1)
    points.append((values[-1], heights[-1] + beyond))
    return [turned((side * u, v)) for u, v in points]


def _levels(ends: Sequence[Segment], side: float) -> dict[float, tuple[float, float]]:
    """Return for every height with joints the range in which the line has to pass."""
    levels: dict[float, tuple[float, float]] = {}
    for kept, rest in ends:
        for (u, v), is_kept in ((kept, True), (rest, False)):
            height = next((known for known in levels if abs(known - v) < 1.0), v)
            low, high = levels.get(height, (-math.inf, math.inf))
            if is_kept:
                low = max(low, side * u + BEHIND)
            else:
                high = min(high, side * u - BEHIND)
            levels[height] = (low, high)
    return levels


def _base(levels: Levels, heights: Sequence[float], near_kept: bool) -> float:
    """Return where the line runs when nothing pushes it aside: between the joints of its outermost heights."""
    outer = [levels[heights[0]], levels[heights[-1]]]
    low = max((low for low, _ in outer), default=-math.inf)
    high = min((high for _, high in outer), default=math.inf)
    if low == -math.inf:
        low = max(low for low, _ in levels.values())
    if high == math.inf:
        high = min((high for _, high in levels.values() if high > low), default=low + 2 * STUB)
    if near_kept:
        return min((low + high) / 2, low - BEHIND + STUB)
    return (low + high) / 2


def _held(value: float, low: float, high: float) -> float:
    return max(low, min(high, value))


def _soft_step(v0: float, u0: float, v1: float, u1: float) -> list[Point]:
    """Return half a cosine wave between two heights, straight before and after it."""
    if abs(u1 - u0) < 1e-6:  # noqa: PLR2004
        return [(u0, v0), (u1, v1)]
    height = min(STEP_HEIGHT, 0.8 * (v1 - v0))
    start = (v0 + v1 - height) / 2
    count = 12
    wave = [
        (u0 + (u1 - u0) * (1 - math.cos(math.pi * place / count)) / 2, start + height * place / count)
        for place in range(count + 1)
    ]
    return [(u0, v0), *wave, (u1, v1)]


# --- a chain through the cut bars -------------------------------------------------------------------------


def _chain(bars: CutBars, near_kept: bool) -> SectionLine | None:
    """Return a line through points of the cut bars in an order in which it meets nothing between them."""
    if len(bars.cut) > MOST_BARS_IN_A_CHAIN:
        return None
    spots = {name: _spot(bar, near_kept) for name, bar in bars.cut.items()}
    walls = [*bars.others, *bars.cut.values()]
    clear = {
        pair: not any(_meets((spots[pair[0]], spots[pair[1]]), wall) for wall in walls)
        for pair in itertools.permutations(spots, 2)
    }
    best: tuple[float, SectionLine] | None = None
    for order in itertools.permutations(spots):
        if order[0] > order[-1] or not all(clear[pair] for pair in itertools.pairwise(order)):
            continue
        inner = [spots[name] for name in order]
        first = _way_out(bars, order[0], inner[0], inner[1:2], walls)
        last = _way_out(bars, order[-1], inner[-1], inner[-2:-1], walls)
        if first is None or last is None:
            continue
        points = [first, *inner, last]
        length = sum(_distance(a, b) for a, b in itertools.pairwise(points))
        if best is not None and length >= best[0]:
            continue
        for line in (_rounded(points), points):
            found = bars.proven(line)
            if found:
                best = (length, found)
                break
    if best:
        return best[1]
    return _closed_chain(bars, spots, clear)


def _closed_chain(
    bars: CutBars, spots: Mapping[str, Point], clear: Mapping[tuple[str, str], bool]
) -> SectionLine | None:
    """Return a closed line round a body that lies within the truss."""
    first, *rest = spots
    for order in itertools.permutations(rest):
        ring = (first, *order, first)
        if all(clear[pair] for pair in itertools.pairwise(ring) if pair[0] != pair[1]) and len(rest) > 1:
            found = bars.proven([spots[name] for name in ring[:-1]], closed=True)
            if found:
                return found
    return None


def _spot(bar: Segment, near_kept: bool) -> Point:
    length = _distance(*bar)
    return along(bar[0], unit(*bar), min(length / 2, STUB) if near_kept else length / 2)


def _way_out(bars: CutBars, name: str, spot: Point, towards: Sequence[Point], walls: Sequence[Segment]) -> Point | None:
    """Return the end of a line that leaves the truss from a cut bar, square to it if it can."""
    ux, uy = unit(*bars.cut[name])
    normal = (-uy, ux)
    if towards and _dot(unit(spot, towards[0]), normal) > 0:
        normal = (uy, -ux)
    far = 2 * max(_distance(spot, end) for wall in walls for end in wall) + BEYOND
    for turn in (0, -15, 15, -30, 30, -45, 45, -60, 60):
        c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
        out = (normal[0] * c - normal[1] * s, normal[0] * s + normal[1] * c)
        start = along(spot, out, 0.01)
        if not any(_meets((start, along(spot, out, far)), wall) for wall in walls):
            return along(spot, out, BEYOND)
    return None


def _rounded(points: Sequence[Point], radius: float = 3.0) -> list[Point]:
    """Return the chain with its corners rounded off."""
    found = [points[0]]
    for before, corner, after in zip(points, points[1:], points[2:], strict=False):
        cut = min(radius, 0.45 * _distance(before, corner), 0.45 * _distance(corner, after))
        a, b = along(corner, unit(corner, before), cut), along(corner, unit(corner, after), cut)
        for step in range(9):
            t = step / 8
            wa, wc, wb = (1 - t) ** 2, 2 * t * (1 - t), t * t
            found.append((wa * a[0] + wc * corner[0] + wb * b[0], wa * a[1] + wc * corner[1] + wb * b[1]))
    return [*found, points[-1]]


# --- plane geometry ---------------------------------------------------------------------------------------


def crossing(first: Segment, second: Segment) -> Point | None:
    """Return where two segments cross; the first one's end does not count, so that a line's corner counts once."""
    (ax, ay), (bx, by) = first
    (cx, cy), (dx, dy) = second
    below = (bx - ax) * (dy - cy) - (by - ay) * (dx - cx)
    if abs(below) < 1e-12:  # noqa: PLR2004
        return None
    t = ((cx - ax) * (dy - cy) - (cy - ay) * (dx - cx)) / below
    s = ((cx - ax) * (by - ay) - (cy - ay) * (bx - ax)) / below
    if 0 <= t < 1 and -SLACK <= s <= 1 + SLACK:
        return ax + t * (bx - ax), ay + t * (by - ay)
    return None


def _meets(piece: Segment, wall: Segment) -> bool:
    """Return whether a piece crosses a bar other than at the piece's own ends."""
    point = crossing(piece, wall)
    return point is not None and min(_distance(point, end) for end in piece) > 1e-6  # noqa: PLR2004


def _dot(point: Point, direction: Point) -> float:
    return point[0] * direction[0] + point[1] * direction[1]


def _distance(first: Point, second: Point) -> float:
    return math.hypot(first[0] - second[0], first[1] - second[1])


def _bounds(points: Sequence[Point]) -> tuple[float, float, float, float]:
    xs, ys = zip(*points, strict=True)
    return min(xs), min(ys), max(xs), max(ys)


def _apart(box: tuple[float, float, float, float], bar: Segment) -> bool:
    (ax, ay), (bx, by) = bar
    return max(ax, bx) < box[0] or min(ax, bx) > box[2] or max(ay, by) < box[1] or min(ay, by) > box[3]
