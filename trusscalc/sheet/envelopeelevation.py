"""The truss with the largest and the least force of each member of an envelope."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from trusscalc.sheet import words
from trusscalc.sheet.arranging import largest
from trusscalc.sheet.board import FULL_WIDTH, HIGHEST, SMALL_SIZE, along_line
from trusscalc.sheet.elevation import HIGHEST_ROWS, MOST_ROWS, ROW_FRAME, stacked
from trusscalc.sheet.envelopefigure import (
    decimal_places,
    disagreement_words,
    draw_legend,
    force_text,
    sense_of,
    some_names,
    undecided_words,
    values_words,
)
from trusscalc.sheet.inscriptions import Scale, scales
from trusscalc.sheet.lettering import Point, box_of, text_width, touch
from trusscalc.sheet.marks import Figure, Label
from trusscalc.sheet.wholetruss import EDGE, STRUT_GAP, VALUE_GAP, WholeTruss
from trusscalc.truss import Truss

if TYPE_CHECKING:
    from trusscalc.envelopes import Envelope, MemberEnvelope

Span = tuple[float, float]


def envelope_elevation(found: Envelope, *, width: float = FULL_WIDTH) -> Figure:
    """Return the truss with the largest and the least force of each member asked for, where they fit.

    Parameters
    ----------
    found : Envelope
        What to draw. Line styles are those of the larger of both forces.
    width : float
        Width on paper in mm.

    Notes
    -----
    A long truss is drawn in two to four rows when more values fit so. A value without room is told in the caption.
    """
    truss = found.stated.truss.at_values()
    places = decimal_places(found.members.values())

    def draw(scale: Scale) -> WholeTruss:
        return _drawing(found, truss, scale, places, None)

    rows = [largest(truss, draw, lambda made: (made.board,), width=width, highest=HIGHEST)]
    # a few members of many stand in the table too: values told there only are no reason for a second row
    if rows[0].without_room and 2 * len(found.members) >= len(truss.members):
        rows = _in_rows(found, truss, places, width, rows)
    senses = {sense_of(each.state(each.governing).value) for each in found.members.values()}
    draw_legend(rows[-1].board, senses)
    figures = [row.board.figure("", "", width=width) for row in rows]
    alt = f"Truss with the largest and the least force of its members. {values_words(found.members.values(), places)}"
    return stacked(figures, _caption(found, rows), alt)


def _drawing(found: Envelope, truss: Truss, scale: Scale, places: int, span: Span | None) -> WholeTruss:
    """Return the truss, or a stretch of it, with both forces of its members."""
    whole = WholeTruss(truss, scale, span)
    for member in truss.members:
        each = found.members.get(member.name)
        for start, end in whole.pieces(member.name):
            whole.board.sense_line(start, end, sense_of(each.state(each.governing).value) if each else None)
    whole.supports()
    whole.joints(named=found.members)
    here = [each for each in found.members.values() if _belongs(whole, each.member)]
    for each in sorted(here, key=lambda each: round(math.dist(*whole.ends(each.member)), 6)):
        if not _letter_both(whole, each, places):
            whole.without_room.append(each.member)
    whole.continued()
    return whole


def _belongs(whole: WholeTruss, name: str) -> bool:
    """Return whether a member's values stand on this stretch: the one that holds its middle."""
    if whole.span is None:
        return True
    middle = sum(x for x, _ in whole.ends(name)) / 2
    low, high = whole.span
    last = high >= max(x for x, _ in whole.flat.values()) - EDGE
    return low - EDGE <= middle < high - EDGE or (last and abs(middle - high) <= EDGE)


def _in_rows(found: Envelope, truss: Truss, places: int, width: float, best: list[WholeTruss]) -> list[WholeTruss]:
    """Return the drawing in as many rows as leave the fewest values without room."""
    for count in range(2, MOST_ROWS + 1):
        spans = _spans(truss, count)
        longest = max(high - low for low, high in spans)
        room = width - ROW_FRAME
        scale = next((each for each in scales(truss.length) if longest * each.paper <= room), None)
        if scale is None:
            continue
        rows = [_drawing(found, truss, scale, places, span) for span in spans]
        heights = [upper - lower for _, lower, _, upper in (row.board.bounds for row in rows)]
        widths = [right - left for left, _, right, _ in (row.board.bounds for row in rows)]
        if sum(heights) > HIGHEST_ROWS or max(widths) > width:
            continue
        if _missing(rows) < _missing(best):
            best = rows
        if not _missing(best):
            break
    return best


def _missing(rows: Sequence[WholeTruss]) -> int:
    return sum(len(row.without_room) for row in rows)


def _spans(truss: Truss, count: int) -> list[Span]:
    """Return stretches of about equal length that end at joints."""
    xs = sorted({float(joint.x) for joint in truss.joints})
    reach = (xs[-1] - xs[0]) / count
    edges = {min(xs, key=lambda x: (abs(x - xs[0] - number * reach), x)) for number in range(count + 1)}
    return list(itertools.pairwise(sorted(edges)))


def _letter_both(whole: WholeTruss, each: MemberEnvelope, places: int) -> bool:
    """Write both forces of a member: one on either side of it, or one after the other; False when neither fits."""
    governing = each.state(each.governing).value
    other = each.min.value if each.governing == "max" else each.max.value
    gap = (STRUT_GAP if governing.sign() < 0 else VALUE_GAP) - 0.35
    ends = whole.ends(each.member)

    def spots(text: str) -> list[Label]:
        label = Label((0.0, 0.0), text, SMALL_SIZE)
        if text_width(text, SMALL_SIZE) > math.dist(*ends):
            return []
        return list(along_line(*ends, label, gap, whole.middle))

    def free(label: Label) -> bool:
        return whole.board.obstacles.hits(box_of(label), 0.15) == (0, 0)

    first, second = force_text(governing, places), force_text(other, places)
    if governing != other:
        one, two = ([label for label in spots(text) if free(label)] for text in (first, second))
        pairs = ((a, b) for a, b in itertools.product(one, two) if not _on_one_side(a, b, ends))
        pair = next(pairs, None)
        if pair is not None:
            whole.board.put("lettering", *pair)
            return True
    joined = next(filter(free, spots(first if governing == other else f"{first}, {second}")), None)
    if joined is None:
        return False
    whole.board.put("lettering", joined)
    return True


def _on_one_side(first: Label, second: Label, ends: tuple[Point, Point]) -> bool:
    """Return whether two labels stand on the same side of a member, or touch."""
    (x0, y0), (x1, y1) = ends

    def side(label: Label) -> bool:
        return (x1 - x0) * (label.place[1] - y0) - (y1 - y0) * (label.place[0] - x0) > 0

    return side(first) == side(second) or touch(box_of(first), box_of(second), 0.15)


# --- words ------------------------------------------------------------------------------------------------


def _caption(found: Envelope, rows: Sequence[WholeTruss]) -> str:
    text = disagreement_words(found) + (
        f"Largest and least force of each member over {words.counted(len(found.combinations), 'combination')}, "
        f"{rows[0].scale.text}, in {found.stated.truss.force}; the line style is that of the larger one."
    )
    if len(rows) > 1:
        text += f" Drawn in {len(rows)} rows; the joints where one ends stand in the next one again."
    if len(found.asked) < len(found.stated.truss.members):
        text += " Thin lines without a value: members not asked for."
    missing = [words.bar(name) for row in rows for name in row.without_room]
    if missing:
        text += f" No room in the drawing for the values of {some_names(missing)}: see the table."
    return text + undecided_words(found) + "".join(dict.fromkeys(row.remarks() for row in rows))
