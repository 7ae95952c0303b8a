"""The load figure: a truss with the loads of one case as they stand, and below it the joint loads they become."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from trusscalc.exact import ZERO, Exact
from trusscalc.loadrules import Beside, Direction, LineLoad, PointLoad, SelfWeight
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.sheet import words
from trusscalc.sheet.arranging import aligned, largest
from trusscalc.sheet.board import FULL_WIDTH, LIGHT, MEDIUM, SMALL_SIZE, Board, along, around
from trusscalc.sheet.elevation import METRES
from trusscalc.sheet.inscriptions import Scale, amount, arm
from trusscalc.sheet.lettering import Point, box_of, boxes_of, text_width
from trusscalc.sheet.loadstands import Stands
from trusscalc.sheet.marks import Arrow, Figure, Label
from trusscalc.sheet.ordinates import row_style
from trusscalc.sheet.symbols import ASIDE, CLEAR_ANGLE, GAP, LOAD_LENGTH
from trusscalc.sheet.wholetruss import WholeTruss
from trusscalc.truss import Truss

if TYPE_CHECKING:
    from trusscalc.panelloads import Spread

HIGHEST_TRUSS: Final = 70.0
DIRECTION_WORDS: Final = {
    "down": "downwards",
    "up": "upwards",
    "left": "to the left",
    "right": "to the right",
    "normal": "at right angles to the chain",
}


@dataclass
class _Drawing:
    """Both drawings at one scale."""

    above: WholeTruss
    below: WholeTruss | None
    missing: Sequence[str]

    @property
    def boards(self) -> tuple[Board, ...]:
        return (self.above.board,) if self.below is None else (self.above.board, self.below.board)


def load_figure(truss: Truss, case: LoadCase, spreads: Iterable[Spread] = (), *, width: float = FULL_WIDTH) -> Figure:
    """Return the truss with the loads of a case as they stand and, below, as the joint loads they become.

    Parameters
    ----------
    truss : Truss
        The truss.
    case : LoadCase
        All joint loads of the case, those of its rules among them.
    spreads : iterable of Spread
        What became of the rules; those of other cases are passed over. What ``case`` has beyond them is drawn as
        loads stated at joints.
    width : float
        Width on paper in mm.
    """
    rules = [spread for spread in spreads if spread.rule.case == case.name]
    drawn = truss.at_values()
    stated = _stated(case, rules)

    def value(number: Exact) -> Exact:
        return truss.value(case.value(number))

    def draw(scale: Scale) -> _Drawing:
        above, missing = _standing(drawn, stated, rules, scale, value)
        return _Drawing(above, _at_joints(drawn, case, scale) if rules else None, missing)

    drawing = largest(drawn, draw, lambda made: made.boards, width=width, highest=HIGHEST_TRUSS)
    caption = _caption(truss, case, rules, drawing)
    return aligned(drawing.boards, caption, _alt(truss, case, rules, stated), width=width)


def _stated(case: LoadCase, rules: Sequence[Spread]) -> LoadCase:
    """Return what a case has at joints beyond its rules."""
    taken = [JointLoad(load.joint, -load.fx, -load.fy) for spread in rules for load in spread.loads]
    rest = LoadCase(case.name, [*case.loads, *taken], symbols=case.symbols).loads
    return LoadCase(case.name, [load for load in rest if load.fx or load.fy], symbols=case.symbols)


# --- drawing ----------------------------------------------------------------------------------------------


def _standing(
    truss: Truss, stated: LoadCase, rules: Sequence[Spread], scale: Scale, value: Callable[[Exact], Exact]
) -> tuple[WholeTruss, list[str]]:
    """Return the truss with the loads as they stand, and the lettering that found no room."""
    whole = WholeTruss(truss, scale)
    heavy = {line.stands_on for spread in rules if _is_weight(spread) for line in spread.lines}
    whole.bars(lambda name: MEDIUM if name in heavy else LIGHT)
    whole.supports()
    sizes = [abs(float(value(w))) for spread in rules if not _is_weight(spread) for w in _intensities(spread)]
    stands = Stands(whole, value, max(sizes, default=0.0))
    kinds = {_is_weight: stands.weight, _is_band: stands.spread_load, _is_force: stands.force}
    for kind, stand in kinds.items():  # forces reach beyond the bands, so they come last
        for number, spread in enumerate(rules, 1):
            if kind(spread):
                stand(spread, f"({number}) {_amount_text(spread, truss)}")
    _draw_loads(whole, stated)
    missing = stands.write()
    whole.joints()
    return whole, missing


def _at_joints(truss: Truss, case: LoadCase, scale: Scale) -> WholeTruss:
    whole = WholeTruss(truss, scale)
    whole.bars(lambda _: LIGHT)
    whole.supports()
    _draw_loads(whole, case)
    whole.joints()
    return whole


def _draw_loads(whole: WholeTruss, case: LoadCase) -> None:
    """Draw joint loads with their values: the upright ones first, so that level ones find a place beside them."""
    upright = [load for load in case.loads if load.fy]
    rows = [[load for load in upright if _points_down(whole, load.joint) == down] for down in (False, True)]
    styles = [_style(whole, row) for row in rows]
    if any(angle for angle, _ in styles):
        for row, (_, every) in zip(rows, styles, strict=True):
            _draw_row(whole, row, every)
    else:
        plain = [JointLoad(load.joint, ZERO, load.fy) for load in upright]
        whole.loads(LoadCase(case.name, plain, symbols=case.symbols))
    level = [JointLoad(load.joint, load.fx, ZERO) for load in case.loads if load.fx]
    if level and whole.crowded:
        whole.notes.append("Level loads on joints are not drawn, all are in the table")
        level = []
    hemmed_in = [load for load in level if _has_bars_on_both_sides(whole, load.joint)]
    whole.loads(LoadCase(case.name, [load for load in level if load not in hemmed_in], symbols=case.symbols))
    whole.sketch.write_pending()
    for load in hemmed_in:
        _draw_over_bars(whole, load)


def _points_down(whole: WholeTruss, joint: str) -> bool:
    """Return whether an upright load is drawn below its joint: at a lower joint without a support."""
    return joint not in whole.depth and whole.sketch.place[joint][1] < whole.middle[1]


def _style(whole: WholeTruss, row: Sequence[JointLoad]) -> tuple[float, int]:
    places = [(whole.sketch.place[load.joint][0], text_width(_text(load), SMALL_SIZE)) for load in row]
    return row_style(places) if len({round(x, 3) for x, _ in places}) == len(places) else (0.0, 1)


def _text(load: JointLoad) -> str:
    return amount(_size(load.fy))


def _draw_row(whole: WholeTruss, row: Sequence[JointLoad], every: int) -> None:
    """Draw upright loads close together, their values turned; of very many, some are lettered."""
    for number, load in enumerate(sorted(row, key=lambda load: whole.sketch.place[load.joint])):
        out = (0.0, -1.0) if _points_down(whole, load.joint) else (0.0, 1.0)
        place = whole.sketch.place[load.joint]
        near, far = along(place, out, GAP), along(place, out, GAP + LOAD_LENGTH)
        back = load.fy.reads_negative() == (out[1] > 0)
        whole.board.arrow(*((far, near) if back else (near, far)), width=LIGHT, small=True)
        whole.sketch.take(load.joint, out)
        if number % every == 0:
            whole.board.write(around(far, Label(far, _text(load), SMALL_SIZE, angle=90.0), 0.7, [out]))
    if every > 1:
        whole.notes.append(f"One joint load in {every} is lettered, all are in the table")


def _has_bars_on_both_sides(whole: WholeTruss, joint: str) -> bool:
    return max(whole.sketch.clearance(joint, way) for way in ((1.0, 0.0), (-1.0, 0.0))) < CLEAR_ANGLE


def _draw_over_bars(whole: WholeTruss, load: JointLoad) -> None:
    """Draw a level load over (or under) the bars at its joint, where its arrow and its value meet least."""
    x, y = whole.sketch.place[load.joint]
    back = load.fx.reads_negative()
    best: tuple[tuple[int, int], Point, Point, Label] | None = None
    outwards = 1.0 if y >= whole.middle[1] else -1.0
    for height, side in itertools.product((ASIDE, 1.5 * ASIDE, 2.0 * ASIDE, -ASIDE), (-1.0, 1.0)):
        level = y + outwards * height
        near, far = (x + side * GAP, level), (x + side * (GAP + LOAD_LENGTH), level)
        ends = (far, near) if (side < 0) != back else (near, far)
        label = next(around(far, Label(far, amount(_size(load.fx)), SMALL_SIZE), 0.7, [(side, 0.0)]))
        boxes = [*boxes_of(Arrow(*ends, LIGHT)), box_of(label)]
        hits = [whole.board.obstacles.hits(box, 0.3) for box in boxes]
        cost = (sum(letters for letters, _ in hits), sum(lines for _, lines in hits))
        if best is None or cost < best[0]:
            best = (cost, *ends, label)
    assert best is not None  # noqa: S101 - there are always trials
    whole.board.arrow(best[1], best[2], width=LIGHT, small=True)
    whole.board.put("lettering", best[3])


def _is_weight(spread: Spread) -> bool:
    return isinstance(spread.rule, SelfWeight)


def _is_band(spread: Spread) -> bool:
    return isinstance(spread.rule, LineLoad)


def _is_force(spread: Spread) -> bool:
    return isinstance(spread.rule, PointLoad)


def _intensities(spread: Spread) -> list[Exact]:
    return [intensity for line in spread.lines for intensity in line.intensities]


def _amount_text(spread: Spread, truss: Truss) -> str:
    """Return what stands beside a rule on the drawing: its intensity or force, as this truss carries it."""
    sizes = _intensities(spread)
    if not sizes:
        return f"{amount(_size(spread.lines[0].resultant))} {truss.force}"
    first, last = sizes[0], sizes[-1]
    ends = amount(_size(first)) if first == last else f"{amount(_size(first))} to {amount(_size(last))}"
    return f"{ends} {truss.force}/{truss.length}"


def _size(number: Exact) -> Exact:
    """Return a load without its sign, which its arrows show."""
    return -number if number.reads_negative() else number


# --- words ------------------------------------------------------------------------------------------------


def _caption(truss: Truss, case: LoadCase, rules: Sequence[Spread], drawing: _Drawing) -> str:
    whole = drawing.above
    text = f"Loads of case {case.name}, {whole.scale.text}, in {truss.force}"
    text += " and lengths in " + METRES[truss.length]
    if not rules:
        return f"{text}, as stated at joints.{whole.remarks()}"
    text += ": above as they stand, below the joint loads they become."
    text += " " + " ".join(f"({number}) {rule_words(spread, truss)}." for number, spread in enumerate(rules, 1))
    if any(_is_weight(spread) for spread in rules):
        text += " Medium lines: members with weight."
    text += f" {_sums(rules, truss)}"
    if drawing.missing:
        text += f" No room in the drawing for: {', '.join(drawing.missing)}."
    remarks = [made.remarks() for made in (whole, drawing.below) if made is not None]
    return text + "".join(dict.fromkeys(remarks))


def _sums(rules: Sequence[Spread], truss: Truss) -> str:
    """Return the sums of forces and moments of all rules, the same as they stand and at the joints."""
    fx, fy, moment = (sum((spread.at_joints[axis] for spread in rules), start=ZERO) for axis in range(3))
    return (
        f"Sums of {_numbered(len(rules))}, the same above and below: ΣFx {amount(fx)} {truss.force}, ΣFy {amount(fy)} "
        f"{truss.force}, ΣM about (0, 0) {amount(moment)} {truss.force} {truss.length}, anticlockwise positive."
    )


def _numbered(count: int) -> str:
    return "(1)" if count == 1 else f"(1) to ({count})"


def rule_words(spread: Spread, truss: Truss) -> str:
    """Return what a rule says: how much, where, and the way it acts."""
    rule = spread.rule
    if isinstance(rule, SelfWeight):
        members = words.listed(words.bar(name) for name in rule.members) if rule.members else "all members"
        return f"self-weight of {members}, {_amount_text(spread, truss)}{_share(rule.beside)}"
    first, last = spread.lines[0].shares[0][0], spread.lines[-1].shares[-1][0]
    where = f"on {first} to {last}" if first != last else f"at {first}"
    way = _way(rule.direction)
    if isinstance(rule, PointLoad):
        place = "" if first == last else f", {arm(rule.at)} {truss.length} from the start of the chain,"
        return f"{amount(rule.force)} {truss.force} {where}{place} {way}{_share(rule.beside)}"
    per = "plan" if rule.per == "plan" else "true"
    stretch = _stretch(rule, truss.length)
    size = amount(rule.start) if rule.start == rule.end else f"{amount(rule.start)} to {amount(rule.end)}"
    if rule.width is not None:
        size += f" {truss.force}/{truss.length}² on {amount(rule.width)} {truss.length} of width"
    else:
        size += f" {truss.force}/{truss.length}"
    return f"{size} of {per} length {where}{stretch}, {way}{_share(rule.beside)}"


def _stretch(rule: LineLoad, length: str) -> str:
    if rule.begins is None and rule.ends is None:
        return ""
    ends = [arm(place) if place is not None else "its end" for place in (rule.begins or ZERO, rule.ends)]
    return f" from {ends[0]} to {ends[1]} {length if rule.ends is not None else ''}".rstrip()


def _way(direction: Direction) -> str:
    if isinstance(direction, str):
        return DIRECTION_WORDS[direction]
    return f"along ({arm(direction[0])}, {arm(direction[1])})"


def _share(beside: Beside | None) -> str:
    return f", of which this truss carries {arm(beside.share)}" if beside is not None else ""


def _alt(truss: Truss, case: LoadCase, rules: Sequence[Spread], stated: LoadCase) -> str:
    text = f"Loads of case {case.name}."
    if rules:
        text += f" As they stand: {'; '.join(rule_words(spread, truss) for spread in rules)}"
        text += f"; and at joints {_loads_words(stated)}." if stated.loads else "."
    return f"{text} Joint loads in {truss.force}, x to the right and y upwards: {_loads_words(case)}."


def _loads_words(case: LoadCase) -> str:
    listed = [f"{load.joint} ({amount(load.fx)}, {amount(load.fy)})" for load in case.loads]
    return ", ".join(listed) if listed else "none"
