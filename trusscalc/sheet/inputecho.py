"""What was stated, so that it can be compared with the drawings: joints, members, supports, the truss file itself."""

from __future__ import annotations

from collections.abc import Sequence

from trusscalc.exact import Exact
from trusscalc.loads import LoadCase
from trusscalc.project import Project
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Listing, Paragraph, Run, Table
from trusscalc.sheet.compact import ends_within, is_blank, together, without_columns
from trusscalc.sheet.values import decimal_text, is_readable, printed
from trusscalc.sheet.words import bar, capital, counted
from trusscalc.statics.cuts import structure_of
from trusscalc.truss import Truss

INPUT = "Input"
NOT_VERBATIM = (
    "The truss file is not printed word by word: these tables, with the loads and the title block, say all that it "
    "states of this load case. Its digest stands under Basis."
)
UNGROUPED = "members"
"""What members are called that were stated without groups."""


def input_echo(
    truss: Truss,
    case: LoadCase,
    project: Project,
    truss_text: str,
    places: int,
    *,
    verbatim: bool = True,
    amounts: Sequence[Exact] = (),
    not_verbatim: str = NOT_VERBATIM,
) -> list[Block]:
    """Return joints, members with their lengths, supports, other names, and the truss file itself where it is needed.

    Parameters
    ----------
    truss : Truss
        As stated.
    case : LoadCase
        Gives symbols their values; the loads are told elsewhere.
    project : Project
        Names elsewhere.
    truss_text : str
        The truss file.
    places : int
        Decimal places.
    verbatim : bool
        Whether the file is printed word by word.
    amounts : sequence of Exact
        What is told elsewhere; the file is printed also where one of them or of the tables is too long to be read.
    not_verbatim : str
        What is said where the file is not printed.
    """
    other = project.names
    joints = tuple(
        (Run(joint.name), *_both(joint.x, case, places), *_both(joint.y, case, places), Run(other.get(joint.name, "")))
        for joint in truss.joints
    )
    bars = structure_of(truss, case).bars
    members = []
    for member in truss.members:
        length = bars[member.name].length
        others = next((other[n] for n in (member.name, f"{member.end}-{member.start}") if n in other), "")
        cells = (Run(bar(member.name)), Run(member.group), *_both(length, case, places), Run(others))
        members.append((*cells, Run(_behaviour(truss, member.name))))
    unit = truss.length
    joint_table = Table(
        (
            Column("joint"),
            Column(f"x exact, {unit}", "right"),
            Column("decimal", "right"),
            Column(f"y exact, {unit}", "right"),
            Column("decimal", "right"),
            Column("name elsewhere"),
        ),
        joints,
        f"{capital(counted(len(joints), 'joint'))}.",
    )
    member_table = Table(
        (
            Column("member"),
            Column("group"),
            Column(f"length exact, {unit}", "right"),
            Column("decimal", "right"),
            Column("name elsewhere"),
            Column("stated behaviour"),
        ),
        together(members),
        f"{capital(counted(len(members), 'member'))}; lengths calculated from the joints.",
    )
    stated = [part for joint in truss.joints for part in (joint.x, joint.y)]
    directions = [part for link in truss.links for part in (link.dx, link.dy)]
    whole = all(map(is_readable, (*stated, *directions, *amounts)))
    blocks: list[Block] = [
        Heading(2, INPUT),
        _close(joint_table, stated, places),
        _close(member_table, [bars[member.name].length for member in truss.members], places),
        _supports(truss, case),
    ]
    if verbatim or not whole:
        blocks.append(Listing(truss_text, "The truss file, as read"))
    else:
        blocks.append(Paragraph((Run(not_verbatim),), "note"))
    return blocks


def _close(table: Table, values: Sequence[Exact], places: int) -> Table:
    """Return a table without what tells nothing: empty columns, one group for all, decimals of short decimals."""
    exact = all(ends_within(value, places) for value in values)

    def idle(place: int, cells: Sequence[Inline | None]) -> bool:
        head = table.columns[place].head
        ungrouped = head == "group" and set(cells) == {Run(UNGROUPED)}
        return is_blank(cells) or ungrouped or (head == "decimal" and exact)

    return without_columns(table, idle)


def _both(value: Exact, case: LoadCase, places: int) -> tuple[Inline, Inline]:
    return printed(value, case), Decimals(decimal_text(case.value(value), places))


def _behaviour(truss: Truss, name: str) -> str:
    listed_names = {truss.member(other).name for other in truss.tension_only}
    return "tension only" if name in listed_names else ""


def _supports(truss: Truss, case: LoadCase) -> Table:
    rows = []
    for support in truss.supports:
        kind = {"pin": "pin", "roller": "roller"}.get(support.kind, counted(len(support.links), "link"))
        for place, link in enumerate(support.links):
            head = (Run(support.joint), Run(kind)) if place == 0 else (None, None)
            uplift = "no uplift" if place == 0 and support.joint in truss.no_uplift else ""
            direction = (printed(link.dx, case), printed(link.dy, case))
            rows.append((*head, Run(bar(link.name)), *direction, Run(uplift)))
    columns = (
        Column("support"),
        Column("kind"),
        Column("reaction"),
        Column("direction x", "right"),
        Column("direction y", "right"),
        Column("stated behaviour"),
    )
    return Table(columns, tuple(rows), "A reaction is positive when it acts on the truss along its direction.")
