"""The whole truss on paper: elevation with sections, result drawing, bare truss, mechanism."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Collection, Iterable, Sequence
from typing import Final

from trusscalc.errors import UnstableTrussError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.board import (
    FULL_WIDTH,
    HEAVY,
    HIGHEST,
    LIGHT,
    moved,
)
from trusscalc.sheet.chains import draw_dimensions
from trusscalc.sheet.inscriptions import Scale, scales
from trusscalc.sheet.marks import Figure, Mark
from trusscalc.sheet.wholetruss import WholeTruss, value_text
from trusscalc.statics.cuts import cut_of, structure_of
from trusscalc.truss import Truss

HIGHEST_TOWER: Final = 150.0
MOST_TRIALS: Final = 4
FRAME: Final = 20.0
MOST_ROWS: Final = 4
ROW_FRAME: Final = 10.0
HIGHEST_ROWS: Final = 230.0
METRES: Final = {"m": "metres", "mm": "millimetres", "cm": "centimetres", "ft": "feet", "in": "inches"}


def elevation(check: MemberCheck, *, width: float = FULL_WIDTH) -> Figure:
    """Return the whole truss: supports, loads, reactions, sections, members checked, dimensions.

    Parameters
    ----------
    check : MemberCheck
        What to draw.
    width : float
        Width on paper in mm.
    """
    heavy = set(check.members)

    def draw(scale: Scale) -> WholeTruss:
        drawing = WholeTruss(check.truss, scale)
        drawing.bars(lambda name: HEAVY if name in heavy else LIGHT)
        drawing.supports()
        drawing.loads(check.case)
        drawing.reactions(check)
        drawing.sections(check)
        drawing.sketch.write_pending()
        drawing.joints(named=check.members)
        draw_dimensions(drawing.board, check.truss, drawing.sketch.place)
        return drawing

    def caption(drawing: WholeTruss) -> str:
        unit_words = f"lengths in {METRES[check.truss.length]}, loads and reactions in {check.truss.force}"
        text = f"Elevation {drawing.scale.text}, {unit_words}. Heavy lines: members checked here."
        text += drawing.remarks()
        if drawing.letters:
            named = ", ".join(words.section(letter) for letter in drawing.letters)
            text += f" {named}: section{'s' if len(drawing.letters) > 1 else ''}, arrows towards the part kept."
        return text

    alt = f"Elevation of the truss with {len(check.truss.members)} members; checked: {_names(check.members)}."
    return _fitted(check.truss, width, draw, caption, alt)


def result_drawing(check: MemberCheck, *, width: float = FULL_WIDTH) -> Figure:
    """Return the whole truss with the forces of the members checked.

    Parameters
    ----------
    check : MemberCheck
        What to draw.
    width : float
        Width on paper in mm.

    Notes
    -----
    Tension is a single line, compression a double one, no force a thin one; each value carries its letter and
    sign. A value that finds no room is named in the caption, never dropped in silence.
    """
    places = value_places(check)
    listed = [
        f"{words.bar(name)} {value_text(check.case, item, places)}"
        for name, item in check.members.items()
        if item.exact is not None
    ]
    alt = f"Member forces: {words.listed(listed)}."

    def draw(scale: Scale) -> WholeTruss:
        return _results(check, scale, places)

    single = _fitted_drawing(check.truss, width, draw)
    missing = len(single.without_room)
    # a few members of many stand in the summary too: values told there only are no reason for a second row
    few = 2 * len(check.members) < len(check.truss.members)
    rows = in_rows(check, places, width, missing) if missing and not few else []
    drawings = rows or [single]
    figures = [drawing.board.figure("", "", width=width) for drawing in drawings]
    return stacked(figures, _result_caption(check, drawings), alt)


def _results(
    check: MemberCheck,
    scale: Scale,
    places: int,
    span: tuple[float, float] | None = None,
    without: Collection[str] = (),
    *,
    legend: bool = True,
) -> WholeTruss:
    """Return the result drawing of a truss or of a stretch of it."""
    drawing = WholeTruss(check.truss, scale, span)
    drawing.senses(check)
    drawing.supports()
    drawing.loads(check.case, without=without)
    drawing.reactions(check)
    drawing.sketch.write_pending()
    drawing.joints(named=check.members)
    drawing.values(check, places)
    drawing.continued()
    if legend:
        drawing.legend(check)
    return drawing


def _result_caption(check: MemberCheck, drawings: Sequence[WholeTruss]) -> str:
    text = f"Member forces {drawings[0].scale.text}, in {check.truss.force}, rounded once from the exact values."
    if len(drawings) > 1:
        text += f" Drawn in {len(drawings)} rows; the joints where one ends stand in the next one again."
    text += "".join(dict.fromkeys(drawing.remarks() for drawing in drawings))
    if len(check.members) < len(check.truss.members):
        text += " Thin lines without a value: members not checked here."
    undecided = [name for name, item in check.members.items() if item.decimal is None]
    if undecided:
        text += f" Not decided by statics, thin without a value: {_names(undecided)}."
    missing = [name for drawing in drawings for name in drawing.without_room]
    if missing:
        text += f" No room in the drawing for the values of {_names(missing)}: see the summary."
    return text


def in_rows(check: MemberCheck, places: int, width: float, missing: int) -> list[WholeTruss]:
    """Return the result drawing in two to four rows, cut at panel points; [] when rows leave no fewer values out."""
    best: list[WholeTruss] = []
    for count in range(2, MOST_ROWS + 1):
        spans = _spans(check.truss, count)
        longest = max(high - low for low, high in spans)
        fitting = [s for s in scales(check.truss.length) if longest * s.paper <= width - ROW_FRAME]
        rows: list[WholeTruss] = []
        for scale in fitting[:MOST_TRIALS]:
            rows = _rows(check, scale, places, spans)
            if all(row.board.bounds[2] - row.board.bounds[0] + 1 <= width for row in rows):
                break
        left_out = sum(len(row.without_room) for row in rows)
        height = sum(row.board.bounds[3] - row.board.bounds[1] for row in rows)
        if height > HIGHEST_ROWS:
            break
        if left_out < missing:
            best, missing = rows, left_out
        if not left_out:
            break
    return best


def _rows(check: MemberCheck, scale: Scale, places: int, spans: Sequence[tuple[float, float]]) -> list[WholeTruss]:
    """Return one drawing for each stretch; a load at a joint that stands in two is drawn once."""
    rows: list[WholeTruss] = []
    drawn: set[str] = set()
    for place, span in enumerate(spans):
        rows.append(_results(check, scale, places, span, drawn, legend=place == len(spans) - 1))
        drawn |= set(rows[-1].sketch.place)
    return rows


def _spans(truss: Truss, count: int) -> list[tuple[float, float]]:
    """Return stretches of about equal length that end at panel points, where no bar is cut if it can be helped."""
    xs = sorted({round(float(joint.x), 9) for joint in truss.joints})
    place = {joint.name: float(joint.x) for joint in truss.joints}
    spans = [sorted((place[member.start], place[member.end])) for member in truss.members]
    edges = [xs[0]]
    for index in range(1, count):
        target = xs[0] + (xs[-1] - xs[0]) * index / count
        inner = [x for x in xs if edges[-1] < x < xs[-1]] or [target]
        cuts = {x: sum(1 for low, high in spans if low < x - 1e-9 and high > x + 1e-9) for x in inner}
        reach = (xs[-1] - xs[0]) / count
        edges.append(min(inner, key=lambda x: (abs(x - target) > 0.3 * reach, cuts[x], abs(x - target), x)))
    edges.append(xs[-1])
    return list(itertools.pairwise(edges))


def stacked(figures: Sequence[Figure], caption: str, alt: str) -> Figure:
    """Return figures one below the other as one."""
    width, height = max(figure.width for figure in figures), sum(figure.height for figure in figures)
    marks: list[Mark] = []
    top = height
    for figure in figures:
        top -= figure.height
        marks += [moved(mark, 0.0, top) for mark in figure.marks]
    return Figure(width, round(height, 2), tuple(marks), caption, alt)


def truss_figure(truss: Truss, case: LoadCase | None = None, *, width: float = FULL_WIDTH) -> Figure:
    """Return the bare truss with supports, dimensions and, if given, loads.

    Parameters
    ----------
    truss : Truss
        What to draw.
    case : LoadCase, optional
        Its loads.
    width : float
        Width on paper in mm.
    """

    def draw(scale: Scale) -> WholeTruss:
        drawing = WholeTruss(truss, scale)
        drawing.bars(lambda _: LIGHT)
        drawing.supports()
        if case is not None:
            drawing.loads(case)
        drawing.sketch.write_pending()
        drawing.joints()
        draw_dimensions(drawing.board, truss, drawing.sketch.place)
        return drawing

    def caption(drawing: WholeTruss) -> str:
        loads = f", loads in {truss.force}" if case is not None and case.loads else ""
        return f"Elevation {drawing.scale.text}, lengths in {METRES[truss.length]}{loads}.{drawing.remarks()}"

    alt = f"Truss with {len(truss.joints)} joints and {len(truss.members)} members."
    return _fitted(truss, width, draw, caption, alt)


def cut_figure(truss: Truss, kept: Collection[str], *, width: float = FULL_WIDTH) -> Figure:
    """Return the truss with a cut of the engineer's own: what is cut in heavy lines, the section line where it has one.

    Parameters
    ----------
    truss : Truss
        The truss.
    kept : collection of str
        The joints on the kept side.
    width : float
        Width on paper in mm.
    """
    truss = truss.at_values()
    cut = cut_of(structure_of(truss, LoadCase("", {})), kept)

    def draw(scale: Scale) -> WholeTruss:
        drawing = WholeTruss(truss, scale)
        drawing.bars(lambda name: HEAVY if name in cut.bars else LIGHT)
        drawing.supports()
        if cut.kind == "section":
            drawing.section(cut, "a")
        drawing.sketch.write_pending()
        drawing.joints()
        return drawing

    def caption(drawing: WholeTruss) -> str:
        line = " Section line: arrows towards the part kept." if drawing.letters else ""
        return f"Elevation {drawing.scale.text}. Heavy lines: members cut.{line}{drawing.remarks()}"

    alt = f"Truss with a cut; joints kept: {words.listed(cut.kept)}; cut: {_names(cut.bars)}."
    return _fitted(truss, width, draw, caption, alt)


def mechanism_figure(truss: Truss, error: UnstableTrussError, *, width: float = FULL_WIDTH) -> Figure:
    """Return the truss with the movement it cannot resist: thin as it stands, black as it would move.

    Parameters
    ----------
    truss : Truss
        The unstable truss.
    error : UnstableTrussError
        Tells the movement of each joint.
    width : float
        Width on paper in mm.
    """

    def draw(scale: Scale) -> WholeTruss:
        drawing = WholeTruss(truss, scale)
        drawing.mechanism(error.mechanism)
        drawing.supports()
        drawing.joints()
        return drawing

    def caption(drawing: WholeTruss) -> str:
        return (
            f"Movement without resistance, {drawing.scale.text}. Thin: as stated; medium: displaced. The size of the "
            "movement means nothing, only its shape."
        )

    return _fitted(truss, width, draw, caption, f"Mechanism: {_names(error.joints)} move.")


def _fitted(
    truss: Truss,
    width: float,
    draw: Callable[[Scale], WholeTruss],
    caption: Callable[[WholeTruss], str],
    alt: str,
) -> Figure:
    """Return the figure at the largest scale at which it fits the width."""
    drawing = _fitted_drawing(truss, width, draw)
    return drawing.board.figure(caption(drawing), alt, width=width)


def _fitted_drawing(truss: Truss, width: float, draw: Callable[[Scale], WholeTruss]) -> WholeTruss:
    xs = [float(joint.x) for joint in truss.joints]
    ys = [float(joint.y) for joint in truss.joints]
    wide, high = max(xs) - min(xs), max(ys) - min(ys)
    limit = HIGHEST_TOWER if high > wide else HIGHEST
    listed = scales(truss.length)
    fitting = [s for s in listed if wide * s.paper <= width and high * s.paper <= limit] or listed[-1:]
    for scale in fitting[:MOST_TRIALS]:
        drawing = draw(scale)
        left, lower, right, upper = drawing.board.bounds
        if right - left + 1 <= width and upper - lower <= limit + FRAME:
            break
    return drawing


def _names(names: Iterable[str], most: int = 12) -> str:
    listed = [words.bar(name) for name in names]
    if len(listed) > most:
        return f"{', '.join(listed[:most])} and {len(listed) - most} more"
    return words.listed(listed)


def value_places(check: MemberCheck) -> int:
    """Return decimal places that leave about four figures of the largest force."""
    largest = max((abs(item.decimal) for item in check.members.values() if item.decimal), default=1.0)
    return max(0, min(3, 3 - math.floor(math.log10(largest)))) if largest < 1000 else 1 if largest < 10000 else 0  # noqa: PLR2004
