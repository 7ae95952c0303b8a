"""A train where it stands: axles over an influence line and on the truss, their distances, its uniform loads."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.sheet import words
from trusscalc.sheet.board import LIGHT, MEDIUM, SMALL_SIZE, THIN, Board, along, around
from trusscalc.sheet.dimensions import level_dimension, tick
from trusscalc.sheet.hatching import HatchedBoard
from trusscalc.sheet.inscriptions import amount, arm
from trusscalc.sheet.lettering import Point, text_width
from trusscalc.sheet.loadbands import draw_band, level_band
from trusscalc.sheet.marks import Arrow, Label
from trusscalc.sheet.ordinates import BETWEEN, LETTER_HEIGHT, LineOnPaper, reading, row_style
from trusscalc.sheet.wholetruss import WholeTruss

if TYPE_CHECKING:
    from trusscalc.influence import InfluenceLine
    from trusscalc.trains import Train
    from trusscalc.travel import Extreme, Stand

ABOVE_LINE: Final = 1.5
AXLE_LENGTH: Final = 8.0
BAND_HEIGHT: Final = 2.6
BAND_GAP: Final = 0.8
LETTERING: Final = 3.2
"""Room for a row of lettering, mm."""
TRAVEL_LENGTH: Final = 9.0
TRAVEL_GAP: Final = 4.0
ON_CHAIN: Final = 5.0
"""Length of an axle's arrow on the truss, mm."""
OFF_CHAIN: Final = 0.9
"""How far its tip or tail keeps from the chain, mm."""
PAST_NAMES: Final = 4.2
"""The same on a crowded drawing, whose few names of joints stand between."""
OVER_TICK: Final = 1.1
"""How far a distance between axles keeps from its line, clear of the oblique strokes, mm."""


@dataclass(frozen=True, slots=True)
class Axle:
    """An axle that stands on the chain: its number from the front, its load as it counts, its position."""

    number: int
    load: Exact
    position: Exact


def axles_on(train: Train, stand: Stand | None) -> tuple[Axle, ...]:
    """Return the axles that stand on the chain, the leading one first, their loads with impact and share."""
    factor = train.share * (ONE + train.impact)
    places = stand.axles_at if stand is not None else ()
    return tuple(
        Axle(number, load * factor, place)
        for number, (load, place) in enumerate(zip(train.axles, places, strict=False), 1)
        if place is not None
    )


def draw_train(board: HatchedBoard, drawn: LineOnPaper, extreme: Extreme, train: Train, force: str) -> list[str]:
    """Draw a train over its influence line: uniform loads, axles, distances, direction of travel.

    Parameters
    ----------
    board : HatchedBoard
        Holds the line already.
    drawn : LineOnPaper
        The line.
    extreme : Extreme
        Where the train stands.
    train : Train
        Its axles.
    force : str
        Unit of force.

    Returns
    -------
    list of str
        What the drawing leaves out, for the caption.
    """
    notes = _uniform_loads(board, drawn, extreme, force)
    stand, standing = extreme.stand, axles_on(train, extreme.stand)
    if stand is None or not standing:
        return notes
    level = board.bounds[3] + ABOVE_LINE
    xs = [drawn.x(axle.position) for axle in standing]
    for axle, x in zip(standing, xs, strict=True):
        board.arrow((x, level + AXLE_LENGTH), (x, level), width=LIGHT, small=True)
        board.thin([((x, level), drawn.point(axle.position)), ((x, 0.0), drawn.point(axle.position))])
    _travel(board, drawn, xs, level + AXLE_LENGTH / 2, forward=stand.direction == "forward")
    notes += _axle_loads(board, standing, xs, level + AXLE_LENGTH)
    notes += _axle_distances(board, drawn, standing, board.bounds[3] + ABOVE_LINE)
    lead = standing[0].position
    if lead:
        level = board.bounds[3] + 2 * ABOVE_LINE
        ends = (drawn.start, level - LETTERING), (drawn.x(lead), level - LETTERING)
        level_dimension(board, *ends, level, f"{reading(lead)} {drawn.length}")
    return notes


def _uniform_loads(board: HatchedBoard, drawn: LineOnPaper, extreme: Extreme, force: str) -> list[str]:
    """Draw the uniform loads in as many rows as it takes that none lies on another."""
    rows: list[Exact] = []  # where the last band of each row ends
    first = board.bounds[3] + BAND_GAP
    missing = []
    for start, end, intensity in sorted(extreme.patches, key=lambda patch: (float(patch[0]), float(patch[1]))):
        row = next((row for row, taken in enumerate(rows) if taken <= start), len(rows))
        rows[row : row + 1] = [end]
        level = first + row * (BAND_HEIGHT + LETTERING + BAND_GAP)
        a, b = sorted((drawn.x(start), drawn.x(end)))
        draw_band(board, level_band(a, b, level, BAND_HEIGHT))
        text = _patch_text((start, end, intensity), force, drawn.length)
        label = Label((0.0, 0.0), text, SMALL_SIZE)
        width = text_width(text, SMALL_SIZE)
        low, high = (
            min(drawn.start, drawn.x(drawn.line.positions[-1])),
            max(drawn.start, drawn.x(drawn.line.positions[-1])),
        )
        x = min(max((a + b) / 2, low + width / 2), high - width / 2)
        if not board.write(around((x, level + BAND_HEIGHT), label, 0.6, [(0.0, 1.0)]), must=False):
            missing.append(text)
    return [f"Uniform loads, {'; '.join(missing)}"] if missing else []


def _travel(board: HatchedBoard, drawn: LineOnPaper, xs: Sequence[float], level: float, *, forward: bool) -> None:
    """Draw an arrow in the direction of travel before the leading axle, or behind the last where there is no room."""
    way = 1.0 if (drawn.along > 0) == forward else -1.0
    edges = drawn.edges
    reach = TRAVEL_GAP + TRAVEL_LENGTH
    tail = xs[0] + way * TRAVEL_GAP
    if not edges[0] <= xs[0] + way * reach <= edges[1] and edges[0] <= xs[-1] - way * reach <= edges[1]:
        tail = xs[-1] - way * reach
    ends = (tail, level), (tail + way * TRAVEL_LENGTH, level)
    board.arrow(*ends, width=MEDIUM)
    middle = (ends[0][0] + ends[1][0]) / 2
    board.write(around((middle, level), Label((0.0, 0.0), "travel", SMALL_SIZE, style="italic"), 1.0, [(0.0, 1.0)]))


def _axle_loads(board: HatchedBoard, standing: Sequence[Axle], xs: Sequence[float], level: float) -> list[str]:
    texts = [amount(axle.load) for axle in standing]
    angle, every = row_style([(x, text_width(text, SMALL_SIZE)) for x, text in zip(xs, texts, strict=True)])
    for x, text in list(zip(xs, texts, strict=True))[::every]:
        label = Label((x, level), text, SMALL_SIZE, angle=angle)
        board.write(around((x, level), label, 0.7, [(0.0, 1.0)]))
    return [f"The load of one axle in {every} is lettered"] if every > 1 else []


def _axle_distances(board: HatchedBoard, drawn: LineOnPaper, standing: Sequence[Axle], level: float) -> list[str]:
    """Draw the distances between axles in one row; equal neighbours together where a single one is short."""
    if len(standing) == 1:
        return []
    xs = [drawn.x(axle.position) for axle in standing]
    for x in xs:
        tick(board, (x, level))
    board.line((xs[0], level), (xs[-1], level), width=THIN, layer="dimension")
    gaps = [
        (abs(after.position - before.position), sorted((a, b)))
        for (before, a), (after, b) in itertools.pairwise(zip(standing, xs, strict=True))
    ]
    missing = []
    for size, run in itertools.groupby(gaps, key=lambda gap: gap[0]):
        spans = [span for _, span in run]
        text, together = reading(size), f"{len(spans)} × {reading(size)}"
        whole = [min(low for low, _ in spans), max(high for _, high in spans)]
        if text_width(text, SMALL_SIZE) + BETWEEN <= spans[0][1] - spans[0][0]:
            _letter_spans(board, spans, level, text, 0.0)
        elif len(spans) > 1 and text_width(together, SMALL_SIZE) + BETWEEN <= whole[1] - whole[0]:
            _letter_spans(board, [whole], level, together, 0.0)
        elif spans[0][1] - spans[0][0] >= LETTER_HEIGHT + BETWEEN:
            _letter_spans(board, spans, level, text, 90.0)
        else:
            missing.append(together if len(spans) > 1 else text)
    return [f"Distances between axles without room: {', '.join(missing)} {drawn.length}"] if missing else []


def _letter_spans(board: Board, spans: Sequence[Sequence[float]], level: float, text: str, angle: float) -> None:
    for low, high in spans:
        middle = ((low + high) / 2, level)
        board.write(around(middle, Label(middle, text, SMALL_SIZE, angle=angle), OVER_TICK, [(0.0, 1.0)]))


def draw_on_chain(whole: WholeTruss, line: InfluenceLine, standing: Sequence[Axle], side: Point) -> None:
    """Draw axles as short arrows on the truss, on the free side of the chain.

    Parameters
    ----------
    whole : WholeTruss
        The truss.
    line : InfluenceLine
        Gives the chain.
    standing : sequence of Axle
        What stands on it.
    side : (x, y)
        Upwards when the axles stand on the chain from above, downwards when they hang from it.
    """
    path, places = [whole.sketch.place[joint] for joint in line.chain.joints], line.positions
    gap = PAST_NAMES if whole.crowded else OFF_CHAIN
    for axle in standing:
        last = next(index for index, place in enumerate(places[1:], 1) if axle.position <= place)
        share = float((axle.position - places[last - 1]) / (places[last] - places[last - 1]))
        (x0, y0), (x1, y1) = path[last - 1], path[last]
        foot = x0 + share * (x1 - x0), y0 + share * (y1 - y0)
        near, far = along(foot, side, gap), along(foot, side, gap + ON_CHAIN)
        ends = (far, near) if side[1] > 0 else (near, far)
        whole.board.put("symbol", Arrow(*ends, LIGHT, head_length=1.8, head_width=1.1))


# --- words ------------------------------------------------------------------------------------------------


def train_caption(line: InfluenceLine, extreme: Extreme, train: Train) -> str:
    """Return what a caption tells of a train over an influence line."""
    unit, length, start = line.truss.force, line.truss.length, line.chain.joints[0]
    text = f"{train.name}: {value_words(line, extreme)}"
    stand = extreme.stand
    if stand is None:
        return f"{text}; no position of axles on {start} to {line.chain.joints[-1]} is adverse."
    ends = (start, line.chain.joints[-1]) if stand.direction == "forward" else (line.chain.joints[-1], start)
    text += (
        f", travelling from {ends[0]} to {ends[1]}, leading axle {reading(stand.lead_axle_at)} {length} from {start}."
    )
    added = [f"{name} {arm(size)}" for name, size, none in _factors(train) if size != none]
    text += f" Axle loads in {unit}{', with ' + words.listed(added) if added else ''}."
    off, helping = _without_place(line, stand)
    if off:
        text += f" {_numbered(off)} off the chain, not drawn."
    if helping:
        text += f" {_numbered(helping)} left out, for {'it helps' if len(helping) == 1 else 'they help'}."
    if stand.at_limit:
        text += " An axle stands just off an end of the chain."
    return text


def train_alt(line: InfluenceLine, extreme: Extreme, train: Train) -> str:
    """Return a train over an influence line in words, with all numbers."""
    unit, length, start = line.truss.force, line.truss.length, line.chain.joints[0]
    standing = axles_on(train, extreme.stand)
    parts = [f"{amount(axle.load)} {unit} at {reading(axle.position)} {length}" for axle in standing]
    parts += [_patch_text(patch, unit, length) for patch in extreme.patches]
    loads = words.listed(parts) if parts else "no load"
    way = f" {extreme.stand.direction}," if extreme.stand is not None else ""
    return f"{train.name},{way} distances from {start}: {loads}; together {value_words(line, extreme)}."


def value_words(line: InfluenceLine, extreme: Extreme) -> str:
    """Return an extreme with its unit, and the letter of its sense where it is a member's."""
    letter = {1: " T", -1: " C", 0: ""}[extreme.value.sign()] if line.kind == "member" else ""
    return f"{amount(extreme.value)} {line.truss.force}{letter}"


def _patch_text(patch: tuple[Exact, Exact, Exact], force: str, length: str) -> str:
    start, end, intensity = patch
    return f"{amount(intensity)} {force}/{length}, {reading(start)} to {reading(end)} {length}"


def _factors(train: Train) -> tuple[tuple[str, Exact, Exact], ...]:
    return ("impact", train.impact, ZERO), ("share", train.share, ONE)


def _without_place(line: InfluenceLine, stand: Stand) -> tuple[list[int], list[int]]:
    """Return the numbers of the axles off the chain, and of those on it that are left out."""
    place = stand.lead_axle_at
    off: list[int] = []
    helping: list[int] = []
    for number, (drawn, gap) in enumerate(zip(stand.axles_at, (*stand.spacing, ZERO), strict=True), 1):
        if drawn is None:
            (helping if ZERO <= place <= line.positions[-1] else off).append(number)
        place = place - gap if stand.direction == "forward" else place + gap
    return off, helping


def _numbered(numbers: Sequence[int]) -> str:
    if len(numbers) == 1:
        return f"Axle {numbers[0]} is"
    in_a_row = len(numbers) > 2 and numbers[-1] - numbers[0] == len(numbers) - 1  # noqa: PLR2004
    return f"Axles {f'{numbers[0]} to {numbers[-1]}' if in_a_row else words.listed(map(str, numbers))} are"
