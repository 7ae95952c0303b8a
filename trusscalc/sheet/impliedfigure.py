"""The joint loads a comparison is about: those stated here above, those that the submitted forces imply below.

Both drawings have the same scale and stand straight below each other, so that a joint is compared with its like. What
differs is black in both; at supports, where load and reaction cannot be told apart, both drawings show their sum.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from trusscalc.comparison import Comparison, ImpliedLoad
from trusscalc.decimals import rounded
from trusscalc.exact import Exact, exact, rational
from trusscalc.loads import LoadCase
from trusscalc.sheet import words
from trusscalc.sheet.arranging import aligned, largest
from trusscalc.sheet.board import FULL_WIDTH, HEAVY, LIGHT, THIN, VALUE_SIZE, Board
from trusscalc.sheet.elevation import METRES
from trusscalc.sheet.inscriptions import MINUS, Scale, amount
from trusscalc.sheet.jointloads import draw_joint_loads
from trusscalc.sheet.marks import Figure, Label
from trusscalc.sheet.wholetruss import WholeTruss

HIGHEST_TRUSS: Final = 45.0
MOST_NAMED: Final = 12
MOST_PLACES: Final = 3
FIGURES: Final = 4
"""Of the largest joint load that are lettered."""

Pair = tuple[float, float]


@dataclass(frozen=True, slots=True)
class _Side:
    """Joint loads of one side as they are drawn: at supports load and reaction together."""

    loads: Mapping[str, Pair]
    heavy: Collection[str]
    missing: Collection[str]
    title: str


@dataclass(frozen=True, slots=True)
class _Drawing:
    above: WholeTruss
    below: WholeTruss

    @property
    def boards(self) -> tuple[Board, ...]:
        return self.above.board, self.below.board


def implied_figure(comparison: Comparison, *, width: float = FULL_WIDTH) -> Figure:
    """Return our joint loads and, below them, those that the submitted member forces imply.

    Parameters
    ----------
    comparison : Comparison
        What was compared.
    width : float
        Width on paper in mm.

    Notes
    -----
    What rounding and the tolerance leave open is not drawn. Members that differ are heavy, members that the table does
    not give are dashed; at their joints nothing is implied.
    """
    implied = {load.joint: load for load in comparison.implied}
    places = _places(comparison)
    given = {row.member for row in comparison.submitted.rows}
    missing = [member.name for member in comparison.truss.members if member.name not in given]
    ours = _Side(_ours(comparison), (), (), "stated here")
    slack = float(comparison.criterion.absolute) * comparison.largest
    theirs = {joint: _told(load, slack) for joint, load in implied.items()}
    heavy = [name for name in comparison.differing if name in comparison.members]
    below = _Side(theirs, heavy, missing, "implied by the submitted forces")
    marked = [joint for joint, load in implied.items() if load.differs]

    def draw(scale: Scale) -> _Drawing:
        sides = [_drawn(comparison, side, scale, places, marked) for side in (ours, below)]
        left = min(whole.board.bounds[0] for whole in sides)
        for whole, side in zip(sides, (ours, below), strict=True):
            title = Label((left, whole.board.bounds[3] + 2.5), side.title, VALUE_SIZE, anchor="left", style="italic")
            whole.board.put("lettering", title)
        return _Drawing(*sides)

    drawing = largest(comparison.truss, draw, lambda made: made.boards, width=width, highest=HIGHEST_TRUSS)
    caption = _caption(comparison, drawing, marked, missing)
    return aligned(drawing.boards, caption, _alt(implied.values(), places), width=width)


# --- drawing ----------------------------------------------------------------------------------------------


def _ours(comparison: Comparison) -> dict[str, Pair]:
    """Return our loads, at supports with our reactions, as far as they are more than noise."""
    found = {load.joint: (float(load.fx), float(load.fy)) for load in comparison.case.loads}
    for support in comparison.truss.supports:
        fx, fy = found.get(support.joint, (0.0, 0.0))
        rx, ry = (comparison.ours.reaction(support.joint, axis)[1] for axis in "xy")
        found[support.joint] = (fx + rx, fy + ry)
    noise = comparison.ours.noise
    return {joint: _without(pair, (noise, noise)) for joint, pair in found.items()}


def _told(load: ImpliedLoad, slack: float) -> Pair:
    """Return what a joint carries by the submitted forces, as far as it is more than rounding and tolerance."""
    pair = float(load.theirs[0]), float(load.theirs[1])
    return _without(pair, (load.bound[0] + slack, load.bound[1] + slack))


def _without(pair: Pair, open_: Pair) -> Pair:
    fx, fy = (part if abs(part) > least else 0.0 for part, least in zip(pair, open_, strict=True))
    return fx, fy


def _drawn(comparison: Comparison, side: _Side, scale: Scale, places: int, marked: Collection[str]) -> WholeTruss:
    truss = comparison.truss
    whole = WholeTruss(truss, scale)
    for member in truss.members:
        absent = member.name in side.missing
        line_width = THIN if absent else HEAVY if member.name in side.heavy else LIGHT
        for start, end in whole.pieces(member.name):
            whole.board.line(start, end, width=line_width, dash="dashed" if absent else "solid")
    whole.supports()
    free = {joint: pair for joint, pair in side.loads.items() if joint not in whole.depth}
    shown = {joint: tuple(_rounded(part, places) for part in pair) for joint, pair in free.items()}
    draw_joint_loads(whole, LoadCase(comparison.case.name, {j: pair for j, pair in shown.items() if any(pair)}))
    for joint in whole.depth:
        for way, part in zip(((1.0, 0.0), (0.0, 1.0)), side.loads.get(joint, (0.0, 0.0)), strict=True):
            size = _rounded(part, places)
            if size:
                back = size.sign() < 0
                direction = (-way[0], -way[1]) if back else way
                whole.reaction(joint, direction, amount(abs(size), places))
    whole.sketch.write_pending()
    whole.joints(named=side.heavy, marked=marked)
    return whole


def _rounded(value: float, places: int) -> Exact:
    return rational(Fraction(rounded(exact(value), places)))


def _places(comparison: Comparison) -> int:
    """Return decimal places that leave about four figures of the largest of our joint loads."""
    most = max((abs(part) for pair in _ours(comparison).values() for part in pair), default=0.0)
    return min(MOST_PLACES, max(0, FIGURES - 1 - math.floor(math.log10(most)))) if most else MOST_PLACES


# --- words ------------------------------------------------------------------------------------------------


def _caption(comparison: Comparison, drawing: _Drawing, marked: Sequence[str], missing: Sequence[str]) -> str:
    truss = comparison.truss
    text = (
        f"Joint loads, {drawing.above.scale.text}, in {truss.force}, lengths in {METRES[truss.length]}: above as "
        "stated here, below as the submitted member forces imply them by the equilibrium of each joint. Open "
        "arrowheads, at supports: load and reaction together."
    )
    if marked:
        text += f" Black joints: {_some(marked)}, where the two differ by more than rounding and tolerance leave open."
    if any(name in comparison.members for name in comparison.differing):
        text += " Heavy lines: members that differ."
    if missing:
        text += " Dashed: members that the table does not give; nothing is implied at their joints."
    remarks = f"{drawing.above.remarks()} {drawing.below.remarks()}".split(". ")
    return text + "".join(f" {remark}." for remark in dict.fromkeys(each.strip(" .") for each in remarks) if remark)


def _alt(implied: Collection[ImpliedLoad], places: int) -> str:
    def pair(parts: tuple[float, float]) -> str:
        return f"({', '.join(f'{rounded(exact(part), places):f}'.replace('-', MINUS) for part in parts)})"

    differing = [
        f"{load.joint} {pair(load.ours)} here and {pair((float(load.theirs[0]), float(load.theirs[1])))} implied"
        for load in implied
        if load.differs
    ]
    more = f" and {len(differing) - MOST_NAMED} more" if len(differing) > MOST_NAMED else ""
    told = "; ".join(differing[:MOST_NAMED]) + more if differing else "none"
    return f"Truss with its joint loads, twice. Joints that differ, x to the right and y upwards: {told}."


def _some(names: Sequence[str]) -> str:
    if len(names) <= MOST_NAMED:
        return words.listed(names)
    return f"{', '.join(names[:MOST_NAMED])} and {len(names) - MOST_NAMED} more"
