"""The influence line figure: the truss to scale, below it the line on the same abscissas, and a train on both."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from trusscalc.sheet import words
from trusscalc.sheet.arranging import aligned, largest
from trusscalc.sheet.board import FULL_WIDTH, HEAVY, LIGHT, MEDIUM, THIN, unit
from trusscalc.sheet.elevation import METRES
from trusscalc.sheet.forcescale import Extent, force_scale
from trusscalc.sheet.hatching import HatchedBoard
from trusscalc.sheet.inscriptions import Scale
from trusscalc.sheet.marks import Figure, Ring
from trusscalc.sheet.ordinates import LineOnPaper, draw_line, reading, readings
from trusscalc.sheet.symbols import Force, draw_force
from trusscalc.sheet.traindrawing import Axle, axles_on, draw_on_chain, draw_train, train_alt, train_caption
from trusscalc.sheet.wholetruss import IN_LINE, SMALL_JOINT, WholeTruss
from trusscalc.truss import Truss

if TYPE_CHECKING:
    from trusscalc.influence import InfluenceLine
    from trusscalc.trains import Train
    from trusscalc.travel import Extreme

HIGHEST_TRUSS: Final = 80.0
HIGHEST_LINE: Final = 30.0
"""Room between the largest and the least ordinate, mm."""
SMALLEST_JOINT: Final = 0.9
BEYOND: Final = 3.0
CLEAR: Final = 1.4
UP: Final = (0.0, 1.0)
DOWN: Final = (0.0, -1.0)


@dataclass
class _Drawing:
    """Truss and line at one scale, with what they leave out."""

    whole: WholeTruss
    below: HatchedBoard
    drawn: LineOnPaper
    notes: list[str]


def influence_figure(
    line: InfluenceLine, extreme: Extreme | None = None, train: Train | None = None, *, width: float = FULL_WIDTH
) -> Figure:
    """Return the truss with its loaded chain and, below it, the influence line, with a train on both if given.

    Parameters
    ----------
    line : InfluenceLine
        What to draw; positive ordinates upwards.
    extreme, train : Extreme and Train, optional
        Where a train stands, and the train itself.
    width : float
        Width on paper in mm.
    """
    truss = line.truss.at_values()
    moving = (extreme, train) if extreme is not None and train is not None else None
    standing = axles_on(train, extreme.stand) if extreme is not None and train is not None else ()

    def draw(scale: Scale) -> _Drawing:
        whole = _truss_drawing(truss, line, scale, standing)
        drawn = _on_paper(truss, line, whole)
        board = HatchedBoard()
        notes = draw_line(board, drawn, [axle.position for axle in standing])
        if moving is not None:
            notes += draw_train(board, drawn, *moving, truss.force)
        board.draw_thin()
        return _Drawing(whole, board, drawn, notes)

    drawing = largest(truss, draw, lambda made: (made.whole.board, made.below), width=width, highest=HIGHEST_TRUSS)
    texts = [_caption(truss, line, drawing)]
    alts = [_alt(truss, line)]
    if moving is not None:
        texts.append(train_caption(line, *moving))
        alts.append(train_alt(line, *moving))
    return aligned((drawing.whole.board, drawing.below), " ".join(texts), " ".join(alts), width=width)


# --- drawing ----------------------------------------------------------------------------------------------


def _truss_drawing(truss: Truss, line: InfluenceLine, scale: Scale, standing: Sequence[Axle]) -> WholeTruss:
    """Return the truss with the member sought heavy, the loaded chain with filled joints, and the axles on it."""
    whole = WholeTruss(truss, scale)
    pieces = {frozenset(pair) for pair in itertools.pairwise(line.chain.joints)}
    path = {member.name for member in truss.members if {member.start, member.end} in pieces}
    whole.bars(lambda name: HEAVY if name == line.target else MEDIUM if name in path else THIN)
    whole.supports()
    if line.kind == "reaction":
        _reaction(whole, line.target)
    if line.kind == "shear":
        _section(whole, line)
    points = [whole.sketch.place[joint] for joint in line.chain.joints]
    draw_on_chain(whole, line, standing, UP if _is_above(truss, line) else DOWN)
    whole.sketch.write_pending()
    whole.joints(named=[line.target] if line.kind == "member" else [])
    for point in points:
        whole.board.put("joint", Ring(point, SMALLEST_JOINT if whole.crowded else SMALL_JOINT, LIGHT, fill="black"))
    return whole


def _reaction(whole: WholeTruss, name: str) -> None:
    """Draw the reaction sought, behind its support's symbol if it acts along it."""
    link = next(link for link in whole.truss.links if link.name == name)
    way = unit((0.0, 0.0), (float(link.dx), float(link.dy)))
    sides, depth = whole.depth[link.joint]
    taken = whole.sketch.taken[link.joint]
    side = next((side for side in sides if side[0] * way[0] + side[1] * way[1] < -IN_LINE), None)
    if side in taken:
        taken.remove(side)
    force = Force(link.joint, way, name=("R", words.bar(name)), ink="accent", reaction=True)
    draw_force(whole.sketch, force, gap=depth + CLEAR if side else CLEAR)
    taken += [side] if side else []


def _section(whole: WholeTruss, line: InfluenceLine) -> None:
    """Draw a chain line through the panel whose shear is sought."""
    joints = line.target.removeprefix("V(").removesuffix(")")
    pairs = itertools.pairwise(line.chain.joints)
    first, second = next(pair for pair in pairs if joints in (f"{pair[0]}-{pair[1]}", f"{pair[1]}-{pair[0]}"))
    x = (whole.sketch.place[first][0] + whole.sketch.place[second][0]) / 2
    ys = [y for _, y in whole.sketch.place.values()]
    whole.board.line((x, min(ys) - BEYOND), (x, max(ys) + BEYOND), width=LIGHT, layer="symbol", dash="section")


def _is_above(truss: Truss, line: InfluenceLine) -> bool:
    """Return whether the chain's joints have more bars below than above them, so that loads can stand on it."""
    heights = {joint.name: float(joint.y) for joint in truss.joints}
    on_chain = set(line.chain.joints)
    balance = 0
    for member in truss.members:
        for near, far in ((member.start, member.end), (member.end, member.start)):
            if near in on_chain and far not in on_chain:
                balance += (heights[far] < heights[near]) - (heights[far] > heights[near])
    return balance > 0


def _on_paper(truss: Truss, line: InfluenceLine, whole: WholeTruss) -> LineOnPaper:
    first, last = (whole.sketch.place[line.chain.joints[end]][0] for end in (0, -1))
    ordinates = [float(ordinate) for ordinate in line.ordinates]
    reach = max(*ordinates, 0.0) - min(*ordinates, 0.0)
    heights = force_scale(truss.force, Extent(0.0, reach, 1.0, HIGHEST_LINE))
    scale = Scale(heights.paper, heights.text.removesuffix(f" {truss.force}"))
    letters = ("T", "C") if line.kind == "member" else ("", "")
    along = whole.scale.paper if last > first else -whole.scale.paper
    return LineOnPaper(line, first, along, scale, letters, truss.length)


# --- words ------------------------------------------------------------------------------------------------


def target_words(line: InfluenceLine) -> str:
    """Return what an influence line is of: ``the force in U2–U3``, ``the reaction L0,y``, ``the shear in L2–L3``."""
    if line.kind == "shear":
        return f"the shear in panel {words.bar(line.target.removeprefix('V(').removesuffix(')'))}"
    return f"the {'force in' if line.kind == 'member' else 'reaction'} {words.bar(line.target)}"


def _caption(truss: Truss, line: InfluenceLine, drawing: _Drawing) -> str:
    joints = line.chain.joints
    on_top = "T, tension, upwards, C, compression, downwards" if line.kind == "member" else "positive upwards"
    marked = {
        "member": f" Heavy: {words.bar(line.target)}.",
        "reaction": f" Arrow: {words.bar(line.target)}.",
        "shear": " Chain line: the panel; positive where the forces left of it act upwards.",
    }[line.kind]
    text = "" if line.agreed else "The routes do not agree on this line: see its table. "
    text += (
        f"Influence line of {target_words(line)}, {drawing.whole.scale.text}, ordinates {drawing.drawn.heights.text}: "
        f"the force for a unit load downwards on {joints[0]} to {joints[-1]} (filled joints), {on_top}.{marked} "
        f"Upright hatching: positive; oblique: negative."
    )
    if any(place not in line.positions for place in line.zeros):
        text += f" Rings: zero points with their distance from {joints[0]}."
    text += f" {_area_words(line, truss.length)}"
    text += f" Below: joints and their distances from {joints[0]} in {METRES[truss.length]}."
    left_out = [label.text for label in drawing.below.left_out]
    notes = [*drawing.notes]
    if left_out:
        notes.append(f"No room for: {', '.join(dict.fromkeys(left_out))}")
    return text + drawing.whole.remarks() + "".join(f" {note}." for note in dict.fromkeys(notes))


def _area_words(line: InfluenceLine, length: str) -> str:
    return (
        f"Positive area {reading(line.positive_area)} {length}, negative area {reading(line.negative_area)} {length}."
    )


def _alt(truss: Truss, line: InfluenceLine) -> str:
    pairs = zip(line.chain.joints, readings(line.ordinates), strict=True)
    ordinates = ", ".join(f"{joint} {ordinate}" for joint, ordinate in pairs)
    zeros = [f"{reading(place)} {truss.length}" for place in line.zeros if place not in line.positions]
    crossing = f" It is zero {words.listed(zeros)} from {line.chain.joints[0]}." if zeros else ""
    return (
        f"Influence line of {target_words(line)}; ordinates: {ordinates}.{crossing} {_area_words(line, truss.length)}"
    )
