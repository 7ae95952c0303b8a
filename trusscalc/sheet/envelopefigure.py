"""The bars of an envelope: the largest tension and the largest compression of each member on one scale."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Final, Literal

from trusscalc.decimals import rounded
from trusscalc.exact import Exact
from trusscalc.sheet import words
from trusscalc.sheet.arranging import aligned
from trusscalc.sheet.board import FULL_WIDTH, LIGHT, SMALL_SIZE, THIN, VALUE_SIZE, Board, unit
from trusscalc.sheet.forcescale import Extent, force_scale
from trusscalc.sheet.hatching import HatchedBoard
from trusscalc.sheet.inscriptions import MINUS, Scale
from trusscalc.sheet.lettering import Point, box_of, text_width
from trusscalc.sheet.marks import Figure, Label, Stroke
from trusscalc.sheet.ordinates import BETWEEN

if TYPE_CHECKING:
    from trusscalc.envelopes import Choice, Envelope, MemberEnvelope

IN_A_ROW: Final = 24
IN_A_FIGURE: Final = 2 * IN_A_ROW
MOST_MEMBERS: Final = 2 * IN_A_FIGURE
HIGHEST_BARS: Final = 55.0
"""Room from the largest compression to the largest tension in a row, mm."""
WIDEST_PITCH: Final = 20.0
ROOM: Final = 164.0
BESIDE: Final = 1.7
"""How far two bars of one sign stand from the member's middle, mm."""
TENSION_BAR: Final = 0.7
COMPRESSION_BAR: Final = 1.5
BAR_EDGE: Final = 0.27
AT_END: Final = 0.9
ROW_GAP: Final = 1.6
SHORTEST_GUIDE: Final = 2.5
LEGEND_LINE: Final = 13.0
LEGEND_GAP: Final = 6.0
FIGURES: Final = 4
MOST_PLACES: Final = 3
MOST_TOLD: Final = 12
Anchor = Literal["left", "right", "lower", "upper"]
SENSES: Final = (
    ("T", "T, tension: single line"),
    ("C", "C, compression: double line"),
    ("0", "0, no force: thin line"),
)


@dataclass(frozen=True, slots=True)
class _Bar:
    """One bar of the diagram: its size, where it stands, and what is written at its end."""

    x: float
    value: Exact
    text: str
    up: bool


def sense_of(value: Exact) -> str:
    """Return ``T``, ``C`` or ``0``."""
    return {1: "T", -1: "C", 0: "0"}[value.sign()]


def envelope_diagrams(found: Envelope, *, width: float = FULL_WIDTH) -> tuple[Figure, ...]:
    """Return bars of the largest tension and compression of each member, on one scale.

    Parameters
    ----------
    found : Envelope
        What to draw; members that statics does not decide are told in the caption.
    width : float
        Width on paper in mm.

    Returns
    -------
    tuple of Figure
        Two rows of 24 members on each; beyond 96 members only the largest are drawn, which the caption says.
        Empty when no member is decided.
    """
    listed = list(found.members.values())
    drawn = _largest(listed) if len(listed) > MOST_MEMBERS else listed
    if not drawn:
        return ()
    numbers = {each.name: number for number, each in enumerate(found.combinations, 1)}
    places = decimal_places(drawn)
    values = [float(choice.value) for each in drawn for choice in (each.max, each.min)]
    scale = force_scale(found.stated.truss.force, Extent(0.0, max(*values, 0.0) - min(*values, 0.0), 1.0, HIGHEST_BARS))
    figures = []
    for members in _parts(drawn, IN_A_FIGURE):
        boards = [_row(row, numbers, places, scale, width) for row in _parts(members, IN_A_ROW)]
        draw_legend(
            boards[-1], {sense_of(choice.value) for each in members for choice in (each.max, each.min)}, draw_bar
        )
        text = _diagram_caption(found, members, numbers, scale)
        if len(drawn) < len(listed):
            text += f" Only the {len(drawn)} of {len(listed)} members with the largest forces are drawn."
        figures.append(aligned(boards, text, _diagram_alt(found, members, places), width=width))
    return tuple(figures)


def _largest(members: Sequence[MemberEnvelope]) -> list[MemberEnvelope]:
    """Return the members with the largest forces, in the order given."""
    sizes = [max(abs(float(each.max.value)), abs(float(each.min.value))) for each in members]
    kept = set(sorted(range(len(members)), key=lambda place: -sizes[place])[:MOST_MEMBERS])
    return [each for place, each in enumerate(members) if place in kept]


def _parts(members: Sequence[MemberEnvelope], size: int) -> Iterator[Sequence[MemberEnvelope]]:
    """Yield parts of about equal size, none larger than given."""
    count = math.ceil(len(members) / size)
    size = math.ceil(len(members) / count)
    for start in range(0, len(members), size):
        yield members[start : start + size]


def decimal_places(members: Iterable[MemberEnvelope]) -> int:
    """Return decimal places that leave about four figures of the largest force."""
    sizes = [abs(float(choice.value)) for each in members for choice in (each.max, each.min)]
    power = math.floor(math.log10(max(sizes))) if any(sizes) else 2
    return max(0, min(MOST_PLACES, FIGURES - 1 - power)) or int(power < FIGURES)


def force_text(value: Exact, places: int) -> str:
    """Return a force with its sign and letter, rounded once."""
    if not value:
        return "0"
    return f"{rounded(value, places):f} {sense_of(value)}".replace("-", MINUS)


# --- bars -------------------------------------------------------------------------------------------------


def _row(
    members: Sequence[MemberEnvelope], numbers: Mapping[str, int], places: int, scale: Scale, width: float
) -> HatchedBoard:
    """Return a row of bars about a zero line, names below."""
    board = HatchedBoard()
    pitch = min(WIDEST_PITCH, min(ROOM, width - 2 * ROW_GAP) / len(members))
    centres = [(place + 0.5) * pitch for place in range(len(members))]
    board.line((0.0, 0.0), (pitch * len(members), 0.0), width=LIGHT, layer="symbol")
    pairs = [_bars(each, x, numbers, places) for each, x in zip(members, centres, strict=True)]
    angle = 0.0 if _is_level([bar for pair in pairs for bar in pair]) else 90.0
    lowest = []
    for pair in pairs:
        for bar in pair:
            if bar.value:
                draw_bar(board, (bar.x, 0.0), (bar.x, float(bar.value) * scale.paper), sense_of(bar.value))
        lowest.append(min(0.0, *(_letter_bar(board, bar, scale, angle) for bar in pair)))
    names = [words.bar(each.member) for each in members]
    level = board.bounds[1] - ROW_GAP
    upright = max(text_width(name, SMALL_SIZE) for name in names) + BETWEEN > pitch
    for x, name, low in zip(centres, names, lowest, strict=True):
        if low - level > SHORTEST_GUIDE:
            board.thin([((x, low), (x, level))])
        label = Label((x, level), name, SMALL_SIZE, anchor="upper")
        board.put("lettering", replace(label, anchor="right", angle=90.0) if upright else label)
    board.draw_thin()
    return board


def _bars(each: MemberEnvelope, x: float, numbers: Mapping[str, int], places: int) -> list[_Bar]:
    """Return the two bars of a member: on one upright line if they are of different sign, else side by side."""
    texts = [f"{force_text(choice.value, places)} ({numbers[choice.combination]})" for choice in (each.max, each.min)]
    highest, lowest = each.max.value.sign(), each.min.value.sign()
    if each.max.value == each.min.value:
        return [_Bar(x, each.max.value, texts[0], highest >= 0)]
    apart = BESIDE if highest * lowest > 0 else 0.0
    # no force is lettered on the side where the other bar is not
    return [
        _Bar(x - apart, each.max.value, texts[0], highest >= 0),
        _Bar(x + apart, each.min.value, texts[1], lowest > 0),
    ]


def _is_level(bars: Sequence[_Bar]) -> bool:
    """Return whether the texts of neighbouring bars have room beside each other without being turned."""
    for side in (True, False):
        row = [bar for bar in bars if bar.up == side]
        for a, b in itertools.pairwise(sorted(row, key=lambda bar: bar.x)):
            if b.x - a.x < (text_width(a.text, SMALL_SIZE) + text_width(b.text, SMALL_SIZE)) / 2 + BETWEEN:
                return False
    return True


def _letter_bar(board: Board, bar: _Bar, scale: Scale, angle: float) -> float:
    """Write a bar's value at its end, tension above and compression below, and return how low it reaches."""
    up = 1.0 if bar.up else -1.0
    label = Label((bar.x, float(bar.value) * scale.paper + up * AT_END), bar.text, SMALL_SIZE, angle=angle)
    anchors: tuple[Anchor, Anchor] = ("left", "right") if angle else ("lower", "upper")
    label = replace(label, anchor=anchors[0] if bar.up else anchors[1])
    board.put("lettering", label)
    return box_of(label).bounds[1]


def draw_bar(board: Board, start: Point, end: Point, sense: str) -> None:
    """Draw a bar of the diagram in the line style of its sense, the double line of C closed at its end."""
    if sense != "C":
        board.line(start, end, width=TENSION_BAR if sense == "T" else THIN)
        return
    way = unit(start, end)
    half = (-way[1] * COMPRESSION_BAR / 2, way[0] * COMPRESSION_BAR / 2)
    corners = [
        (x + sign * half[0], y + sign * half[1]) for (x, y), sign in ((start, 1), (end, 1), (end, -1), (start, -1))
    ]
    board.put("bar", Stroke(tuple(corners), BAR_EDGE, closed=True))


def draw_legend(
    board: Board, senses: Iterable[str], line: Callable[[Board, Point, Point, str], None] = Board.sense_line
) -> None:
    """Draw what the line styles mean, below everything."""
    found = set(senses)
    entries = [(sense, text) for sense, text in SENSES if sense in found]
    left, lower, right, _ = board.bounds
    level = lower - LEGEND_GAP
    lengths = [LEGEND_LINE + 2.0 + text_width(text, VALUE_SIZE) for _, text in entries]
    space = 2 * LEGEND_GAP
    x = (left + right) / 2 - (sum(lengths) + space * (len(entries) - 1)) / 2
    for (sense, text), length in zip(entries, lengths, strict=True):
        line(board, (x, level), (x + LEGEND_LINE, level), sense)
        board.put("lettering", Label((x + LEGEND_LINE + 2.0, level), text, VALUE_SIZE, anchor="left"))
        x += length + space


# --- words ------------------------------------------------------------------------------------------------


def _diagram_caption(
    found: Envelope, members: Sequence[MemberEnvelope], numbers: Mapping[str, int], scale: Scale
) -> str:
    governing = {choice.combination for each in members for choice in (each.max, each.min)}
    listed = [f"({number}) {name}" for name, number in numbers.items() if name in governing]
    text = disagreement_words(found) + (
        f"Largest tension and largest compression of each member over "
        f"{words.counted(len(found.combinations), 'combination')}, {scale.text}: tension upwards, compression "
        f"downwards from the zero line; two bars of one kind where a member is always pulled or always pressed. In "
        f"brackets the governing combination: {', '.join(listed)}."
    )
    reversing = [words.bar(each.member) for each in members if each.reversal]
    if reversing:
        text += f" The force reverses in {some_names(reversing)}."
    return text + undecided_words(found)


def disagreement_words(found: Envelope) -> str:
    """Return the sentence that opens a caption when the routes do not agree, '' when they do."""
    if not found.differing:
        return ""
    return (
        f"The routes do not agree for {some_names([words.bar(name) for _, name in found.differing])}: see the table. "
    )


def undecided_words(found: Envelope) -> str:
    """Return the sentence on members that statics does not decide, '' when there are none."""
    names = [words.bar(name) for name in found.undecided]
    return f" Not decided by statics: {some_names(names)}." if names else ""


def some_names(names: Sequence[str]) -> str:
    """Return the first dozen of some names, and how many more there are."""
    each = list(dict.fromkeys(names))
    if len(each) > MOST_TOLD:
        return f"{', '.join(each[:MOST_TOLD])} and {len(each) - MOST_TOLD} more"
    return words.listed(each)


def _diagram_alt(found: Envelope, members: Sequence[MemberEnvelope], places: int) -> str:
    return f"Envelope of member forces in {found.stated.truss.force}. {values_words(members, places)}"


def values_words(members: Iterable[MemberEnvelope], places: int) -> str:
    """Return both forces of each member with their combinations."""

    def told(choice: Choice) -> str:
        return f"{force_text(choice.value, places)} by {choice.combination}"

    parts = [f"{words.bar(each.member)}: {told(each.max)}, {told(each.min)}" for each in members]
    return f"{'; '.join(parts)}."
