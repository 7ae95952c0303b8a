"""Every load case as it was stated: rule by rule what stands where, which joint takes which share, and the totals."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Final

from trusscalc.exact import ZERO, Exact
from trusscalc.loadrules import LineLoad, SelfWeight, weight_per_length
from trusscalc.loads import JointLoad, LoadCase, factor_text
from trusscalc.panelloads import HALVED, SHARED, Spread
from trusscalc.panelshares import FIXED_DIRECTIONS, SpreadLine, Sums, moved, total
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Items, Paragraph, Picture, Run, Table
from trusscalc.sheet.compact import ends_within, together, without_columns
from trusscalc.sheet.inscriptions import arm
from trusscalc.sheet.loadfigure import load_figure, rule_words
from trusscalc.sheet.values import decimal_text, in_table
from trusscalc.sheet.words import bar, capital, listed
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

MOST_RULES: Final = 7
"""Columns of a table that shows joint by joint what each rule gives."""
EXACT_PLACES: Final = 6
"""Decimal places up to which a sum is read without being rounded."""
DIRECTION_PLACES: Final = 3
MOST_LISTED: Final = 4
"""Panels in a row that are named one by one."""
BY_STATICS: Final = "What is stated and the joint loads have the same sums and the same moment, exactly."
NOT_BY_STATICS: Final = "The sums are NOT the same: the joint loads do not stand for what is stated."
DOWN: Final = FIXED_DIRECTIONS["down"]

Row = tuple[Inline | None, ...]


def load_inventory(stated: TrussFile, used: Iterable[str], places: int, *, drawings: bool = True) -> list[Block]:
    """Return the load cases that combinations use, those that stand still.

    Parameters
    ----------
    stated : TrussFile
        Whose cases they are.
    used : iterable of str
        Cases that enter a combination; the others are named.
    places : int
        Decimal places, where an exact number is no short decimal.
    drawings : bool
        Whether each case is drawn.
    """
    chosen = set(used)
    blocks: list[Block] = [Heading(2, "Loads")]
    idle = [case.name for case in stated.acting if case.name not in chosen]
    if idle:
        text = f"In no combination, and so without effect here: {listed(f'“{name}”' for name in idle)}."
        blocks.append(Paragraph((Run(text),)))
    spreads = stated.spreads()
    for case in stated.acting:
        if case.name in chosen:
            own = [each for each in spreads if each.rule.case == case.name]
            blocks += _of_case(stated, case, own, places, drawings=drawings)
    remarks = [remark for remark in (SHARED, HALVED) if any(spread.note.startswith(remark) for spread in spreads)]
    return [*blocks, *([Paragraph((Run(" ".join(remarks)),), "note")] if remarks else [])]


def _of_case(
    stated: TrussFile, case: LoadCase, spreads: Sequence[Spread], places: int, *, drawings: bool
) -> list[Block]:
    at_joints = next((each for each in stated.cases if each.name == case.name), LoadCase(case.name, {}))
    blocks: list[Block] = [Heading(3, f"Load case {case.name}")]
    if not case.loads:
        return [*blocks, Paragraph((Run("This case states no loads."),))]
    items = []
    for number, spread in enumerate(spreads, 1):
        told = rule_words(spread, stated.truss)
        told = capital(told) if isinstance(spread.rule, SelfWeight) else told  # others begin with a number or a symbol
        words = [f"{told}.", *_factors(spread, stated.truss)]
        items.append((f"({number})", (Run(" ".join(words)),)))
    blocks += [Items(tuple(items))] if items else []
    blocks += [_spread_table(stated, case, spreads)] if spreads else []
    blocks += [Picture((load_figure(stated.truss, case, spreads),))] if drawings else []
    blocks += _joint_tables(stated, case, spreads, at_joints, places)
    return [*blocks, *(_totals(stated, case, spreads, at_joints) if spreads else [])]


def _factors(spread: Spread, truss: Truss) -> list[str]:
    """Return how a load per length comes from what is stated, and the lever rule."""
    rule = spread.rule
    unit = f"{truss.force}/{truss.length}"
    told = []
    if isinstance(rule, LineLoad) and rule.width is not None and rule.start == rule.end:
        size, width, product = (factor_text(part) for part in (rule.start, rule.width, rule.start * rule.width))
        told.append(f"{size} {unit}² · {width} {truss.length} = {product} {unit}.")
    if isinstance(rule, SelfWeight) and rule.density is not None and rule.section is not None:
        density = f"{factor_text(rule.density)} {_unit(rule.density_unit or f'{unit}3')}"
        section = f"{factor_text(rule.section)} {_unit(rule.section_unit or f'{truss.length}2')}"
        told.append(f"{density} · {section} = {factor_text(weight_per_length(rule, truss))} {unit}.")
    lever = spread.note.removeprefix(SHARED).removeprefix(HALVED).strip()
    return [*told, *([lever] if lever else [])]


def _unit(text: str) -> str:
    return text.replace("2", "²").replace("3", "³")


# --- what stands where ------------------------------------------------------------------------------------


def _spread_table(stated: TrussFile, case: LoadCase, spreads: Sequence[Spread]) -> Table:
    """Return what stands on each panel or member with its shares, lines of equal numbers together."""
    truss = stated.truss
    rows: list[Row] = []
    for number, spread in enumerate(spreads, 1):
        alike: dict[object, list[SpreadLine]] = {}
        for line in spread.lines:
            alike.setdefault(_numbers(line), []).append(line)
        for place, lines in enumerate(alike.values()):
            cells = _cells(lines, case, in_a_row=_is_in_a_row(spread, lines))
            rows.append((Run(f"({number})") if place == 0 else None, *cells))
    columns = (
        Column("load"),
        Column("stands on"),
        Column(f"over, {truss.length}", "right"),
        Column(f"{truss.force}/{truss.length}", "right"),
        Column("to", "right"),
        Column(f"resultant, {truss.force}", "right"),
        Column("acts along"),
        Column(f"at, {truss.length}", "right"),
        Column("first joint takes", "right"),
        Column("second joint takes", "right"),
    )
    down = all(line.direction == DOWN for spread in spreads for line in spread.lines)
    caption = "Places are counted from the first joint of each panel or member; what stands at a joint is all its own."
    if len(rows) < sum(len(spread.lines) for spread in spreads):
        caption += " Lines that differ in nothing but their place are told once."
    caption += " All act downwards." if down else ""
    ways = {part for spread in spreads for line in spread.lines for part in line.direction}
    caption += "" if all(ends_within(way, DIRECTION_PLACES) for way in ways) else " Directions to three decimals."

    def idle(place: int, cells: Sequence[Inline | None]) -> bool:
        return (down and columns[place].head == "acts along") or all(cell is None for cell in cells)

    return without_columns(Table(columns, tuple(rows), caption), idle)


def _numbers(line: SpreadLine) -> object:
    """Return what a line says apart from its place."""
    start = line.reach[0]
    at = None if line.at is None else line.at - start
    shares = tuple(share for _, share in line.shares)
    size = line.reach[1] - start
    return line.start - start, line.end - start, line.intensities, line.resultant, line.direction, at, shares, size


def _is_in_a_row(spread: Spread, lines: Sequence[SpreadLine]) -> bool:
    """Return whether lines are panels of a chain that follow each other."""
    first = spread.lines.index(lines[0])
    return isinstance(spread.rule, LineLoad) and tuple(lines) == spread.lines[first : first + len(lines)]


def _cells(lines: Sequence[SpreadLine], case: LoadCase, *, in_a_row: bool) -> Row:
    line = lines[0]
    names = [bar(each.stands_on) for each in lines]
    told = f"{names[0]} to {names[-1]}" if in_a_row and len(names) > MOST_LISTED else listed(names)
    told += ", each" if len(lines) > 1 else ""
    ends: list[Inline | None] = [None, None, None]
    if line.intensities:
        first, last = line.intensities
        ends = [in_table(line.end - line.start, case), in_table(first, case), in_table(last, case)]
        ends[2] = None if first == last else ends[2]
    at = None if line.at is None or len(line.shares) == 1 else in_table(line.at - line.reach[0], case)
    shares: list[Inline | None] = [in_table(share, case) for _, share in line.shares]
    shares += [None] * (2 - len(shares))
    return Run(told), *ends, in_table(line.resultant, case), Run(_way(line)), at, *shares


def _way(line: SpreadLine) -> str:
    known = next((word for word, way in FIXED_DIRECTIONS.items() if way == line.direction), "")
    return known or f"({', '.join(arm(part) for part in line.direction)})"


# --- what comes to the joints -----------------------------------------------------------------------------


def _joint_tables(
    stated: TrussFile, case: LoadCase, spreads: Sequence[Spread], at_joints: LoadCase, places: int
) -> list[Block]:
    """Return for each axis with loads what every rule gives each joint, and the sums the case acts with."""
    sources = [(f"({number})", spread.loads) for number, spread in enumerate(spreads, 1)]
    if at_joints.loads and spreads:
        sources.append(("stated at joints", at_joints.loads))
    blocks: list[Block] = []
    for axis, way in (("x", "to the right"), ("y", "upwards")):
        own = [(name, loads) for name, loads in sources if any(along(load, axis) for load in loads)]
        if own or any(along(load, axis) for load in case.loads):
            columns = own if 1 < len(own) <= MOST_RULES else []
            whole = f"together, {stated.truss.force}" if columns else f"F{axis}, {stated.truss.force}"
            caption = f"Joint loads of {case.name} in {axis}, positive {way}."
            blocks.append(by_joint(stated.truss, [*columns, (whole, case.loads)], axis, case, places, caption))
    return blocks


def along(load: JointLoad, axis: str) -> Exact:
    """Return a load's part along an axis, ``x`` or ``y``."""
    return load.fx if axis == "x" else load.fy


def by_joint(  # noqa: PLR0917 - a table's parts in their order
    truss: Truss,
    columns: Sequence[tuple[str, Sequence[JointLoad]]],
    axis: str,
    case: LoadCase,
    places: int,
    caption: str,
) -> Table:
    """Return loads joint by joint, one column for each set of them, with sums.

    Parameters
    ----------
    truss : Truss
        Gives the order of the joints.
    columns : sequence of (str, loads)
        Heads, and what stands below; the last one is what the others add up to.
    axis : str
        ``x`` or ``y``.
    case : LoadCase
        Gives symbols their values.
    places : int
        Decimal places.
    caption : str
        What stands below the table.
    """
    amounts = [{load.joint: along(load, axis) for load in loads} for _, loads in columns]
    joints = [joint.name for joint in truss.joints if any(amount.get(joint.name) for amount in amounts)]
    lines = [(joint, [amount.get(joint, ZERO) for amount in amounts]) for joint in joints]
    lines.append(("total", [sum(amount.values(), start=ZERO) for amount in amounts]))
    exact = all(ends_within(case.value(amount), EXACT_PLACES) for _, line in lines for amount in line)
    rows: list[Row] = []
    for name, line in lines:
        rows.append((Run(name), *(_amount(amount, case, places, exact=exact) for amount in line)))
    heads = (Column("joint"), *(Column(head, "right") for head, _ in columns))
    if not exact:
        caption += " Each decimal is rounded once, from its exact value."
    *each, total_row = rows
    return Table(heads, (*together(each), total_row), caption, totals=1)


def _amount(amount: Exact, case: LoadCase, places: int, *, exact: bool) -> Inline | None:
    if not amount:
        return None
    return in_table(amount, case) if exact else Decimals(decimal_text(case.value(amount), places))


def _totals(stated: TrussFile, case: LoadCase, spreads: Sequence[Spread], at_joints: LoadCase) -> list[Block]:
    """Return the sums of every rule as it stands, and those of the joint loads."""
    truss = stated.truss
    told = [(f"({number})", spread.applied) for number, spread in enumerate(spreads, 1)]
    if at_joints.loads:
        told.append(("stated at joints", _sums(truss, at_joints)))
    as_stated, here = total(sums for _, sums in told), _sums(truss, case)
    apart: Sums = (as_stated[0] - here[0], as_stated[1] - here[1], as_stated[2] - here[2])
    told += [("together, as they stand", as_stated), ("the joint loads", here), ("difference", apart)]
    rows = tuple((Run(name), *(in_table(value, case) for value in sums)) for name, sums in told)
    columns = (
        Column("load"),
        Column(f"ΣFx, {truss.force}", "right"),
        Column(f"ΣFy, {truss.force}", "right"),
        Column(f"ΣM about (0, 0), {truss.force} {truss.length}", "right"),
    )
    caption = f"Sums of {case.name}. {NOT_BY_STATICS if any(apart) else BY_STATICS}"
    return [Table(columns, rows, caption, (len(rows) - 1,) if any(apart) else (), totals=3)]


def _sums(truss: Truss, case: LoadCase) -> Sums:
    places = {joint.name: (joint.x, joint.y) for joint in truss.joints}
    return total(moved((load.fx, load.fy), places[load.joint]) for load in case.loads)


__all__ = ["along", "by_joint", "load_inventory"]
