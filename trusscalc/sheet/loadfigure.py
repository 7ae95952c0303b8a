"""The load figure: a truss with the loads of one case as they stand, and below it the joint loads they become."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from trusscalc.exact import ZERO, Exact
from trusscalc.loadrules import Beside, Direction, LineLoad, PointLoad, SelfWeight
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.sheet import words
from trusscalc.sheet.arranging import aligned, largest
from trusscalc.sheet.board import FULL_WIDTH, LIGHT, MEDIUM, Board
from trusscalc.sheet.elevation import METRES
from trusscalc.sheet.inscriptions import Scale, amount, arm
from trusscalc.sheet.jointloads import draw_joint_loads, unsigned
from trusscalc.sheet.loadstands import Stands
from trusscalc.sheet.marks import Figure
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
    draw_joint_loads(whole, stated)
    missing = stands.write()
    whole.joints()
    return whole, missing


def _at_joints(truss: Truss, case: LoadCase, scale: Scale) -> WholeTruss:
    whole = WholeTruss(truss, scale)
    whole.bars(lambda _: LIGHT)
    whole.supports()
    draw_joint_loads(whole, case)
    whole.joints()
    return whole


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
        return f"{amount(unsigned(spread.lines[0].resultant))} {truss.force}"
    first, last = sizes[0], sizes[-1]
    ends = amount(unsigned(first)) if first == last else f"{amount(unsigned(first))} to {amount(unsigned(last))}"
    return f"{ends} {truss.force}/{truss.length}"


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
