"""An influence line on paper: base line, ordinates, areas with their signs, zero points, distances below."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Final, Literal

from trusscalc.exact import Exact
from trusscalc.sheet.board import LIGHT, SMALL_SIZE, TIE, VALUE_SIZE, around, compass, unit
from trusscalc.sheet.hatching import OBLIQUE, UPRIGHT, HatchedBoard, hatched
from trusscalc.sheet.inscriptions import MINUS, Scale, amount, arm, exact_text
from trusscalc.sheet.lettering import Point, box_of, text_width
from trusscalc.sheet.marks import Ink, Label, Ring

if TYPE_CHECKING:
    from trusscalc.influence import InfluenceLine

POSITIVE_SPACING: Final = 1.8
NEGATIVE_SPACING: Final = 1.3
ZERO_RING: Final = 1.2
LETTER_HEIGHT: Final = 2.3
"""Of a turned label across its neighbours, mm."""
LETTER_MARGIN: Final = 0.8
"""Clear height and width kept round the lettering of an area, mm."""
TRIED: Final = 48
"""Places tried along an area."""
BETWEEN: Final = 0.8
"""Least distance of two labels in a row, mm."""
ROW_GAP: Final = 1.2
LONGEST_FRACTION: Final = 5
"""Characters of a fraction that is read as easily as its decimal."""
SMALL_DENOMINATOR: Final = 16
BESIDE_BASE: Final = 1.8
"""Height of lettering over the base line, from its middle, mm."""
BESIDE_ORDINATE: Final = 0.7
"""Distance from an ordinate, mm, within which no hatching runs beside it."""


def reading(value: Exact) -> str:
    """Return a distance or an area as it is read off a figure: exact where that is short, else a decimal.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> reading(parse("40/3")), reading(parse("672/23")), reading(parse("3*sqrt(61)/4"))
    ('40/3', '29.217', '5.858')
    """
    text = arm(value)
    return text if value.is_rational and len(text) <= LONGEST_FRACTION else amount(value)


def readings(values: Sequence[Exact]) -> list[str]:
    """Return ordinates as they are read off a figure: fractions if all of them are simple ones, else all decimals.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> readings([parse("2/3"), parse("-1/2")]), readings([parse("2/3"), parse("-sqrt(2)/4")])
    (['2/3', '−1/2'], ['0.667', '−0.354'])
    """
    decimals = [amount(value) for value in values]
    if all(value.is_rational and value.as_fraction().denominator <= SMALL_DENOMINATOR for value in values):
        fits = all(arm(value) == decimal for value, decimal in zip(values, decimals, strict=True))
        return decimals if fits else [exact_text(value) for value in values]
    return decimals


@dataclass(frozen=True, slots=True)
class Area:
    """A stretch of one sign: where it begins and ends along the chain, and its size with its sign."""

    start: Exact
    end: Exact
    size: Exact


def areas(line: InfluenceLine) -> tuple[Area, ...]:
    """Return the stretches of one sign of an influence line, in order.

    Their sizes are force for a unit of load per length, negative below the base line.
    """
    found: list[Area] = []
    for (start, low), (end, high) in itertools.pairwise(line.corners):
        size = (end - start) * (low + high) / 2
        if not size:
            continue
        before = found[-1] if found else None
        if before is not None and before.end == start and before.size.sign() == size.sign():
            found[-1] = Area(before.start, end, before.size + size)
        else:
            found.append(Area(start, end, size))
    return tuple(found)


@dataclass(frozen=True, slots=True)
class LineOnPaper:
    """An influence line about to be drawn.

    Attributes
    ----------
    line : InfluenceLine
        The line.
    start : float
        Where the chain's first joint stands on the paper, mm.
    along : float
        Millimetres for a unit of length; negative when the chain goes to the left.
    heights : Scale
        Millimetres for an ordinate of 1.
    letters : (str, str)
        How the positive and the negative areas are marked.
    length : str
        Unit of length.
    """

    line: InfluenceLine
    start: float
    along: float
    heights: Scale
    letters: tuple[str, str]
    length: str

    def x(self, position: Exact) -> float:
        """Return where a position along the chain is on the paper."""
        return self.start + float(position) * self.along

    def point(self, position: Exact) -> Point:
        """Return the point of the line at a position, the base line at height 0."""
        return self.x(position), float(self.line.at(position)) * self.heights.paper

    @property
    def knots(self) -> list[Point]:
        """The line's points at the joints of the chain."""
        return [
            (self.x(position), float(ordinate) * self.heights.paper)
            for position, ordinate in zip(self.line.positions, self.line.ordinates, strict=True)
        ]

    @property
    def edges(self) -> tuple[float, float]:
        """The abscissas of the chain's ends, left and right."""
        ends = self.start, self.x(self.line.positions[-1])
        return min(ends), max(ends)

    def outline(self, area: Area) -> list[Point]:
        """Return the corners of an area: its ends on the base line, and the line between them."""
        inner = [
            point
            for position, point in zip(self.line.positions, self.knots, strict=True)
            if area.start <= position <= area.end
        ]
        return [(self.x(area.start), 0.0), *inner, (self.x(area.end), 0.0)]


def draw_line(board: HatchedBoard, drawn: LineOnPaper, marked: Sequence[Exact] = ()) -> list[str]:
    """Draw an influence line, its base line at height 0, and below it the joints with their distances.

    Parameters
    ----------
    board : HatchedBoard
        Where to draw; nothing stands between the base line and the line yet.
    drawn : LineOnPaper
        What to draw.
    marked : sequence of Exact
        Positions between joints whose ordinates are lettered too, such as those of axles.

    Returns
    -------
    list of str
        What the drawing leaves out, for the caption.
    """
    knots = drawn.knots
    ends = (knots[0][0], 0.0), (knots[-1][0], 0.0)
    board.line(*ends, width=LIGHT)
    for a, b in itertools.pairwise([ends[0], *knots, ends[1]]):
        if a != b:
            board.line(a, b, width=TIE)
    between = [position for position in drawn.line.zeros if position not in drawn.line.positions]
    for position in between:
        board.put("joint", Ring((drawn.x(position), 0.0), ZERO_RING, LIGHT))
    found = areas(drawn.line)
    for area in found:
        _letter_area(board, drawn, area)
        style = (UPRIGHT, POSITIVE_SPACING) if area.size.sign() > 0 else (OBLIQUE, NEGATIVE_SPACING)
        board.thin(
            hatch
            for hatch in hatched(drawn.outline(area), *style)
            if style[0] != UPRIGHT or all(abs(x - hatch[0][0]) > BESIDE_ORDINATE for x, _ in knots)
        )
    board.thin((((x, 0.0), (x, y)) for x, y in knots if y), ink="black")
    marked = [position for position in dict.fromkeys(marked) if position not in drawn.line.positions]
    texts = readings([*drawn.line.ordinates, *map(drawn.line.at, marked)])
    notes = _letter_ordinates(board, knots, texts[: len(knots)])
    for position in between:
        label = Label((0.0, 0.0), f"{reading(position)} {drawn.length}", SMALL_SIZE)
        board.write(_beside_zero(drawn, position, label))
    notes += _letter_marked(board, drawn, dict(zip(marked, texts[len(knots) :], strict=True)))
    notes += _rows_below(board, drawn)
    return notes


# --- lettering --------------------------------------------------------------------------------------------


def _letter_area(board: HatchedBoard, drawn: LineOnPaper, area: Area) -> None:
    """Write an area's letter, its sign and its size where there is room for them; else its letter and sign alone."""
    sign = "+" if area.size.sign() > 0 else MINUS
    letter = drawn.letters[area.size.sign() < 0]
    size = f"area {sign}{reading(abs(area.size))} {drawn.length}"
    texts = [f"{letter}, {size}", f"{letter} {sign}"] if letter else [size, sign]
    low, high = sorted((drawn.x(area.start), drawn.x(area.end)))
    corners = drawn.outline(area)
    for text in texts:
        label = Label((0.0, 0.0), text, VALUE_SIZE)
        box = box_of(label)
        half, needed = box.half_width + LETTER_MARGIN, 2 * (box.half_height + LETTER_MARGIN)
        places = [low + (high - low) * share / TRIED for share in range(1, TRIED)]
        places = [x for x in places if low <= x - half and x + half <= high]
        heights = [_least_height(corners, x - half, x + half) for x in places]
        if not places or max(heights) < needed:
            continue
        middle = (low + high) / 2
        height, x = max(zip(heights, places, strict=True), key=lambda h: (round(h[0], 3), -abs(h[1] - middle)))
        board.put("lettering", replace(label, place=(x, math.copysign(height / 2, area.size.sign()))))
        return


def _least_height(corners: Sequence[Point], low: float, high: float) -> float:
    """Return the least distance of an outline from the base line over a stretch."""
    found = [abs(y) for x, y in corners if low < x < high]
    for (x0, y0), (x1, y1) in itertools.pairwise(corners):
        cut = [x for x in (low, high) if min(x0, x1) <= x <= max(x0, x1) and x0 != x1]
        found += [abs(y0 + (y1 - y0) * (x - x0) / (x1 - x0)) for x in cut]
    return min(found, default=0.0)


def _letter_ordinates(board: HatchedBoard, knots: Sequence[Point], texts: Sequence[str]) -> list[str]:
    """Write the ordinates at the joints, all turned upright where they would crowd each other."""
    angle, every = row_style([(x, text_width(text, SMALL_SIZE)) for (x, _), text in zip(knots, texts, strict=True)])
    heights = [y for _, y in knots]
    kept = {0, len(knots) - 1, heights.index(max(heights)), heights.index(min(heights))} if every > 1 else set()
    kept |= set(range(0, len(knots), every))
    for place in sorted(kept, key=lambda place: (-abs(heights[place]), place)):
        label = Label(knots[place], texts[place], SMALL_SIZE, angle=angle)
        ways = _away(knots, place)
        spots = [spot for distance in (0.8, 1.8, 3.0) for spot in around(knots[place], label, distance, ways)]
        board.write(spots)
    return [f"One ordinate in {every} is lettered, and the largest of either sign"] if every > 1 else []


def _away(knots: Sequence[Point], place: int) -> list[Point]:
    """Return directions for an ordinate's lettering: away from the base line first, never through the line itself."""
    y = knots[place][1]
    before, after = knots[max(0, place - 1)], knots[min(len(knots) - 1, place + 1)]
    up = 1.0 if y > 0 or (y == 0 and before[1] + after[1] < 0) else -1.0
    across = unit(before, after)
    normal = (-across[1], across[0]) if across[0] * up > 0 else (across[1], -across[0])
    return [(0.0, up), normal, *compass((0.0, up), 12)[1:]]


def _beside_zero(drawn: LineOnPaper, position: Exact, label: Label) -> Iterator[Label]:
    """Yield places beside a zero point, outside the areas first."""
    x = drawn.x(position)
    knots = zip(drawn.line.positions, drawn.line.ordinates, strict=True)
    rises = next(ordinate for place, ordinate in knots if place > position).sign() > 0
    outside = -1.0 if rises == (drawn.along > 0) else 1.0
    for up in (1.0, -1.0):
        for side in (outside * up, -outside * up):
            anchor: Literal["right", "left"] = "right" if side < 0 else "left"
            yield replace(label, place=(x + side * ZERO_RING, up * BESIDE_BASE), anchor=anchor)
    yield from around((x, 0.0), label, ZERO_RING / 2 + 0.4, compass((0.0, 1.0)))


def _letter_marked(board: HatchedBoard, drawn: LineOnPaper, marked: Mapping[Exact, str]) -> list[str]:
    """Write the ordinates at other places where there is room, outside the area or, turned, inside it."""
    missing = []
    for position, text in marked.items():
        x, y = drawn.point(position)
        up = 1.0 if y >= 0 else -1.0
        label = Label((x, y), text, SMALL_SIZE, ink="grey")
        upright = replace(label, angle=90.0)
        ways = [(0.0, up), unit((0.0, 0.0), (0.6, up)), unit((0.0, 0.0), (-0.6, up))]
        spots = [*around((x, y), label, 0.8, ways), *around((x, y), upright, 0.8, ways)]
        spots += around((x, y), upright, 0.8, [(0.0, -up)])
        if not board.write(spots, must=False):
            board.left_out.pop()
            missing.append(f"{text} at {reading(position)} {drawn.length}")
    return [f"Further ordinates under axles: {', '.join(missing)}"] if missing else []


# --- below the line ---------------------------------------------------------------------------------------


def _rows_below(board: HatchedBoard, drawn: LineOnPaper) -> list[str]:
    """Write the joints of the chain and their distances from its first in two rows below everything."""
    xs = [x for x, _ in drawn.knots]
    rows: list[tuple[Sequence[str], Ink]] = [
        (drawn.line.chain.joints, "black"),
        ([reading(position) for position in drawn.line.positions], "grey"),
    ]
    notes = []
    for texts, ink in rows:
        level = board.bounds[1] - ROW_GAP
        angle, every = row_style([(x, text_width(text, SMALL_SIZE)) for x, text in zip(xs, texts, strict=True)])
        for x, text in list(zip(xs, texts, strict=True))[::every]:
            # turned lettering ends at the row's upper edge, level lettering hangs from it
            anchor: Literal["right", "upper"] = "right" if angle else "upper"
            board.put("lettering", Label((x, level), text, SMALL_SIZE, anchor=anchor, angle=angle, ink=ink))
        if every > 1:
            notes.append(f"One joint in {every} is named below")
    return notes


def row_style(row: Sequence[tuple[float, float]]) -> tuple[float, int]:
    """Return at which angle the texts of a row are written, given place and width of each, and one in how many."""
    ordered = sorted(row)
    pairs = list(itertools.pairwise(ordered))
    if all(b - a >= (u + v) / 2 + BETWEEN for (a, u), (b, v) in pairs):
        return 0.0, 1
    closest = min(b - a for (a, _), (b, _) in pairs)
    return 90.0, max(1, math.ceil(LETTER_HEIGHT / closest))
