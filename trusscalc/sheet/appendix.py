"""The appendix of graphic statics: Maxwell's diagram with the names it gives, and the force polygons."""

from __future__ import annotations

from trusscalc.exact import Exact
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Paragraph, Picture, Run, Table
from trusscalc.sheet.derivation import sense
from trusscalc.sheet.marks import Figure
from trusscalc.sheet.polygons import bow_names, force_polygon, maxwell_diagram, why_no_maxwell
from trusscalc.sheet.values import decimal_text
from trusscalc.sheet.words import bar
from trusscalc.statics.steps import Step

TITLE = "Graphic statics"
SIDE_BY_SIDE = 2
ABOUT = (
    "The forces found by calculation, drawn to scale; a polygon that closes shows that they are in equilibrium. "
    "Methods: Bow, Economics of Construction in Relation to Framed Structures, 1873; Maxwell, On Reciprocal Figures "
    "and Diagrams of Forces, 1864. Positions are calculated exactly; scaled off paper they are good to some tenths of "
    "a millimetre."
)
NO_POLYGON = "No force polygon: of no free body are all forces on this sheet."


def graphic_statics(check: MemberCheck, places: int) -> list[Block]:
    """Return Maxwell's diagram, or why there is none, and the polygons of free bodies whose forces are all known.

    Those of sections only where there is no Maxwell diagram, which holds them.
    """
    blocks: list[Block] = [Heading(2, TITLE)]
    diagram = maxwell_diagram(check)
    if diagram is None:
        blocks.append(Paragraph((Run(why_no_maxwell(check)),)))
    else:
        blocks += [Picture((diagram,)), _names(check, places)]
    blocks.append(Paragraph((Run(ABOUT),), "note"))
    polygons = _polygons(check, sections=diagram is None)
    if not polygons:
        blocks.append(Paragraph((Run(NO_POLYGON),)))
    for place in range(0, len(polygons), SIDE_BY_SIDE):
        blocks.append(Picture(tuple(polygons[place : place + SIDE_BY_SIDE])))
    return blocks


def _names(check: MemberCheck, places: int) -> Table:
    """Return which member lies between which spaces."""
    rows = []
    for name, spaces in bow_names(check).items():
        force = check.members[name].exact if name in check.members else _on_the_way(check, name)
        value = check.value(force) if force is not None else None
        cells = (None, None) if value is None else (Decimals(decimal_text(value, places)), Run(sense(value)))
        rows.append((Run(bar(name)), Run(spaces), *cells))
    columns = (
        Column("member"),
        Column("spaces"),
        Column(f"force, {check.truss.force}", "right"),
        Column("T/C", "centre"),
    )
    return Table(columns, tuple(rows), "Members by the spaces on their two sides.")


def _on_the_way(check: MemberCheck, name: str) -> Exact | None:
    return next((step.results[name] for step in check.steps if name in step.results), None)


def _polygons(check: MemberCheck, *, sections: bool) -> list[Figure]:
    """Return one polygon for each free body, in the order of the steps."""
    by_body: dict[tuple[str, ...], Step] = {}
    for step in check.steps:
        if sections or step.cut.kind != "section":
            by_body.setdefault(step.cut.kept, step)
    found = (force_polygon(check, step) for step in by_body.values())
    return [figure for figure in found if figure is not None]
