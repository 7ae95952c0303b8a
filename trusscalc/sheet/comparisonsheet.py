"""A comparison with submitted results as a sheet to file: verdict, tables, joint loads, diagnosis, what it rests on."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Final

from trusscalc.comparison import ComparedForce, Comparison
from trusscalc.errors import InputError
from trusscalc.exacttext import to_text
from trusscalc.explanations import Explanation
from trusscalc.files import writes
from trusscalc.membercheck import MemberCheck
from trusscalc.project import LINES, Project
from trusscalc.sheet import comparisonfront, front, record
from trusscalc.sheet.blocks import (
    Block,
    Heading,
    Inline,
    Items,
    Listing,
    Origin,
    Paragraph,
    Picture,
    Run,
    Sheet,
    SubmittedTable,
)
from trusscalc.sheet.comparisonfront import Verification, some
from trusscalc.sheet.comparisontables import (
    cell_text,
    displacement_table,
    force_table,
    implied_table,
    reaction_table,
    reading_table,
)
from trusscalc.sheet.compose import derivations, proven_options, read_again
from trusscalc.sheet.derivation import writer_of
from trusscalc.sheet.diagnosisblocks import diagnosis, with_dashes
from trusscalc.sheet.impliedfigure import implied_figure
from trusscalc.sheet.inputecho import input_echo
from trusscalc.sheet.sameinput import differences, same_loads
from trusscalc.sheet.words import bar, capital, counted, listed
from trusscalc.submitted.kept import kept
from trusscalc.trussfile import TrussFile

METHOD: Final = (
    "ours: exact equilibrium of all joints at once, beside it the displacement method in floating point, held against "
    "each other before anything submitted; reactions and derived members besides by joints and sections. Submitted: as "
    "read from the table, never calculated anew. The joint loads they imply: exact equilibrium of each joint, without "
    "any stiffness"
)
NOT_VERBATIM: Final = (
    "The truss file is not printed word by word: these tables, with the loads and the title block, say all that it "
    "states of this load case; the diagnosis tried its other cases and combinations as well. Its digest stands under "
    "Basis."
)
IMPLIED: Final = (
    "At each joint load and reaction together are minus what its members pull, whatever model gave their forces. No "
    "stiffness and no support enters, so these are the joint loads that the submitted analysis carried, seen on the "
    "geometry stated here."
)
ONE_CASE: Final = (
    "This sheet compares axial forces of one load case with those of an ideal truss. It says nothing about the "
    "strength, stability, connections, fatigue or serviceability of any member, nor about anything else in the "
    "submitted analysis."
)
NOT_DECIDED: Final = (
    "statics alone does not decide them; ours are from the stiffness route with the same EA in all members. Other "
    "areas give other forces there, so that a difference need be no error"
)
CAUTIONS: Final = (ONE_CASE, *record.CAUTIONS[1:])


def compose_comparison(
    comparison: Comparison,
    explanations: Sequence[Explanation],
    check: MemberCheck,
    project: Project | None = None,
    *,
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    verbatim: bool = False,
) -> Sheet:
    """Return the verification sheet of a comparison.

    Parameters
    ----------
    comparison : Comparison
        Submitted results beside ours.
    explanations : sequence of Explanation
        What ``diagnose`` found, the best first.
    check : MemberCheck
        Our reactions (``check_reactions``), or the members to be derived on the sheet (``check_members``).
    project : Project, optional
        The title block; without it, that of the truss file.
    truss_text : str
        The truss file as it was read, for echo and digest; '' writes one.
    places : int
        Decimal places, 0 to 12.
    drawings : bool
        Whether figures are drawn.
    verbatim : bool
        Whether truss file and submitted table are printed word by word.

    Raises
    ------
    InputError
        When the check is of another truss or other loads, ``truss_text`` states others, or places are out of range.
    """
    proven_options(places)
    project = project or comparison.stated.project
    text = truss_text or writes(replace(_with_case(comparison, check), project=project))
    stated = read_again(text)
    _refuse_others(comparison, check, stated, text_given=bool(truss_text))
    check = replace(check, truss=stated.truss)  # the echo is of the text, groups and all
    found = Verification(comparison, tuple(explanations), check)
    summary = tuple(comparisonfront.summary(found, places))
    figure = [Picture((implied_figure(comparison),))] if drawings else []
    blocks: list[Block] = [
        front.title_block(stated.truss, project),
        *comparisonfront.opening(found, project),
        *summary,
        *figure,
        *comparisonfront.scope(found),
        *_submitted(comparison, places),
        *_members(comparison, places),
        *_joints(comparison, places),
        *diagnosis(comparison, found.explanations, own_faults=bool(found.own_faults)),
        *record.basis(stated.truss, check.tolerance, text, places, method=METHOD),
        *_echo(found, project, text, places, verbatim=verbatim),
        *_ours(found, places, drawings=drawings),
        *_cross_check(found),
        *record.cautions(CAUTIONS),
        *record.revisions(project),
    ]
    title = f"{comparisonfront.TITLE}: {stated.truss.title}" if stated.truss.title else comparisonfront.TITLE
    origin = _origin(found, project, text, places)
    origin = replace(origin, drawings=drawings, detail="all" if verbatim else "members")
    return Sheet(title, tuple(blocks), summary, origin)


def _with_case(comparison: Comparison, check: MemberCheck) -> TrussFile:
    """Return what is stated, with the loads compared as a case of their own if they are no case or combination."""
    stated, name = comparison.stated, check.case.name
    known = [case.name for case in stated.cases] + [each.name for each in stated.all_combinations]
    known += [case.name for case in stated.acting]
    return stated if name in known else replace(stated, cases=(*stated.cases, check.case))


def _refuse_others(comparison: Comparison, check: MemberCheck, stated: TrussFile, *, text_given: bool) -> None:
    """Raise an InputError unless the text, the check and the comparison are of the same truss and loads."""
    problems = []
    if check.case.name != comparison.case.name or not same_loads(stated.case(comparison.case.name), check.case):
        problems.append("the check is of other loads than were compared")
    if not check.own_checks:
        problems.append("the check was made without the steps' own checks; make it with own_checks=True")
    faults = differences(stated, comparison.stated) if text_given else []
    if faults:
        problems.append(f"the text of the truss file states other {listed(faults)} than were compared")
    if problems:
        raise InputError(problems)


# --- parts ------------------------------------------------------------------------------------------------


def _submitted(comparison: Comparison, places: int) -> list[Block]:
    """Return what was compared: the file, how it was read, in which order, and what agrees."""
    table = comparison.submitted
    called = f"“{cell_text(comparison.their_case)}”" if comparison.their_case else "the table has no load cases"
    values = [counted(len(table.rows), "member force")]
    values += [counted(len(table.reactions), "reaction")] if table.reactions else []
    values += [counted(len(table.displacements), "displacement")] if table.displacements else []
    items: list[tuple[str, str]] = [
        ("File", table.source),
        ("Digest", f"SHA-256 {table.digest}"),
        ("Load case there", called),
        ("Read", f"{listed(values)} of this load case"),
        ("Unit and sign", f"{table.unit or 'no forces'}; {table.convention}"),
    ]
    items += [("How it was read", capital(note)) for note in table.notes[:1]]
    items += [("", capital(note)) for note in table.notes[1:]]
    noted = [with_dashes(note, comparison.truss) for note in comparison.notes]
    items += [("Noted" if place == 0 else "", capital(note)) for place, note in enumerate(noted)]
    if comparison.order:
        items += [("Blind", capital(comparison.order)), ("Digest of ours", f"SHA-256 {comparison.frozen}")]
    criterion = comparison.criterion.text(comparison.largest, comparison.truss.force)
    items.append(("Criterion", capital(criterion)))
    told = tuple((term, (Run(text),)) for term, text in items)
    return [Heading(2, "Submitted results"), Items(told), reading_table(comparison, places)]


def _members(comparison: Comparison, places: int) -> list[Block]:
    """Return the whole table, what is missing on either side, and why a value of ours is not exact."""
    blocks: list[Block] = [Heading(2, "Members compared"), force_table(comparison, comparison.members, places)]
    given = {row.member for row in comparison.submitted.rows}
    beyond = [name for name in given if name not in comparison.members]
    beyond = [member.name for member in comparison.truss.members if member.name in beyond]
    items: list[tuple[str, tuple[Inline, ...]]] = []
    if comparison.missing:
        items.append(("Missing from the table", (Run(listed(map(bar, comparison.missing)), "strong"),)))
    if beyond:
        items.append(("Given, not asked for", (Run(listed(map(bar, beyond))),)))
    items += _by_stiffness(comparison.members)
    blocks += [Items(tuple(items))] if items else []
    if comparison.reactions:
        blocks += [Heading(2, "Reactions compared"), reaction_table(comparison, places)]
        items = _by_stiffness(comparison.reactions)
        blocks += [Items(tuple(items))] if items else []
    if comparison.displacements:
        blocks += [Heading(2, "Displacements compared"), displacement_table(comparison)]
    return blocks


def _by_stiffness(items: Mapping[str, ComparedForce]) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return which of ours are not exact, and what a difference there need not be."""
    names = [bar(name) for name, item in items.items() if item.exact is None]
    return [("By stiffness", (Run(f"{listed(names)}: {NOT_DECIDED}"),))] if names else []


def _joints(comparison: Comparison, places: int) -> list[Block]:
    """Return the joint loads that the submitted forces imply."""
    blocks: list[Block] = [Heading(2, "Joint loads implied"), Paragraph((Run(IMPLIED),))]
    implied = comparison.implied
    if not implied:
        text = "The table gives all members of no joint, so that nothing is implied."
        return [*blocks, Paragraph((Run(text),))]
    blocks.append(implied_table(comparison, places))
    whole = {load.joint for load in implied}
    left_out = [joint.name for joint in comparison.truss.joints if joint.name not in whole]
    off = [load.joint for load in implied if load.differs]
    items: list[tuple[str, tuple[Inline, ...]]] = []
    if off:
        items.append(("Differ", (Run(listed(off), "strong"),)))
    if left_out:
        text = f"{some(left_out, front.MOST_NAMED)}: the table lacks a member there"
        items.append(("Nothing implied", (Run(text),)))
    return [*blocks, Items(tuple(items))] if items else blocks


def _echo(found: Verification, project: Project, text: str, places: int, *, verbatim: bool) -> list[Block]:
    check = found.check
    blocks = input_echo(
        check.truss,
        check.case,
        project,
        text,
        places,
        verbatim=verbatim,
        amounts=[part for load in check.case.loads for part in (load.fx, load.fy)],
        not_verbatim=NOT_VERBATIM,
    )
    kind, content = kept(found.comparison.submitted.table)
    words = {"text": "as handed in", "base64": "its bytes in base64", "cells": "its cells, row by row"}
    return [*blocks, Listing(content, f"The submitted table, {words[kind]}")] if verbatim else blocks


def _ours(found: Verification, places: int, *, drawings: bool) -> list[Block]:
    """Return our loads and reactions with their balance, and the members derived by hand."""
    check = found.check
    writer = writer_of(check, places)
    derived = bool(check.members)
    blocks = [*record.loads(writer), *record.reactions(writer, steps=derived)]
    if derived:
        blocks += derivations(writer, [step.number for step in check.steps], drawings=drawings)
    return blocks


def _cross_check(found: Verification) -> list[Block]:
    """Return what our own routes say of each other."""
    comparison, check = found.comparison, found.check
    faults = found.own_faults
    exact = sum(name in comparison.ours.exact for name in comparison.ours.decimal)
    text = f"agree on all {exact} member forces and reactions that statics decides"
    if faults:
        text = f"DIFFER: {'; '.join(faults)}"
    joints = "loads, reactions and all member forces of ours sum to exactly zero at each joint"
    if not check.statics.determinate:
        joints = "not closed exactly: the truss is statically indeterminate"
    elif check.residuals:
        joints = f"NOT in equilibrium: {listed(check.residuals)}"
    items: list[tuple[str, tuple[Inline, ...]]] = [
        ("Count and rank", (Run(record.count_and_rank(check)),)),
        *record.shared_redundancy(check),
        ("Our two routes", (Run(text),)),
        ("Joints", (Run(joints),)),
        (
            "Stiffness route",
            (
                Run("imbalance at the worst joint "),
                record.noise(check.stiffness_residual),
                Run(" of the largest force; estimated condition number "),
                record.condition_size(check.condition),
            ),
        ),
        ("Independence", (Run(record.INDEPENDENCE),)),
    ]
    return [Heading(2, "Cross-check"), Items(tuple(items))]


# --- origin -----------------------------------------------------------------------------------------------


def _origin(found: Verification, project: Project, text: str, places: int) -> Origin:
    comparison = found.comparison
    items = {**comparison.members, **comparison.reactions}
    stated = [(name, to_text(item.exact)) for name, item in items.items() if item.exact is not None]
    stated += [(f"{name}, verdict", item.verdict) for name, item in items.items()]
    return Origin(
        truss_text=text,
        case=comparison.case.name,
        members=tuple(comparison.members),
        places=places,
        project=tuple((key, getattr(project, key)) for key in LINES if getattr(project, key)),
        stated=tuple(stated),
        agreed=found.agreed,
        program=record.program(),
        cuts=tuple((name, tuple(joints)) for name, joints in sorted(found.check.cuts.items())),
        prefer=found.check.prefer,
        names=tuple(sorted(project.names.items())),
        task="comparison",
        submitted=_table(found),
    )


def _table(found: Verification) -> SubmittedTable:
    comparison, check = found.comparison, found.check
    kind, content = kept(comparison.submitted.table)
    reading = comparison.submitted.reading
    known = [member.name for member in comparison.truss.members if member.name in comparison.ours.decimal]
    return SubmittedTable(
        name=comparison.submitted.source,
        kind=kind,
        content=content,
        columns=tuple(sorted((role, str(column)) for role, column in reading.columns)),
        renamed=None if reading.names is None else tuple(sorted(reading.names)),
        convention=reading.convention,
        unit=reading.unit,
        case=reading.case,
        decimal=reading.decimal,
        others=reading.others,
        theirs=comparison.theirs,
        relative=to_text(comparison.criterion.relative),
        absolute=to_text(comparison.criterion.absolute),
        blind="no" if not comparison.frozen else "read before" if comparison.read_before else "in order",
        written_down=comparison.written_down,
        frozen_members=tuple(known) if len(known) < len(comparison.truss.members) else (),
        derived=tuple(check.members),
    )
