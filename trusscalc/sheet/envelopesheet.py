"""An envelope as a calculation sheet: from the loads as they stand to the hand checks of what governs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from trusscalc.envelopes import Envelope
from trusscalc.errors import InputError
from trusscalc.exacttext import to_text
from trusscalc.files import writes
from trusscalc.governing import GoverningCheck
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.project import LINES, Project
from trusscalc.sheet import envelopefront, front, record
from trusscalc.sheet.blocks import Block, Heading, Inline, Items, Origin, Picture, Run, Sheet
from trusscalc.sheet.compose import derivations, proven_options, read_again
from trusscalc.sheet.detail import Detail
from trusscalc.sheet.envelopedetail import ShownStates, shown_states
from trusscalc.sheet.envelopeelevation import envelope_elevation
from trusscalc.sheet.envelopefigure import envelope_diagrams
from trusscalc.sheet.envelopetables import (
    ALL_COMBINATIONS,
    EXTREMES,
    MOST_RIVALS,
    States,
    case_force_table,
    combination_blocks,
    reaction_table,
    rival_table,
    superposition_table,
)
from trusscalc.sheet.front import FURTHER, MOST_NAMED
from trusscalc.sheet.inputecho import input_echo
from trusscalc.sheet.loadinventory import load_inventory
from trusscalc.sheet.movingparts import moving_parts
from trusscalc.sheet.numbering import numbered_through
from trusscalc.sheet.sameinput import differences
from trusscalc.sheet.states import heading, state_blocks, state_writer
from trusscalc.sheet.traintables import moving_loads
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.trussfile import TrussFile

NOT_VERBATIM = (
    "The truss file is not printed word by word: these tables, with loads, combinations, trains and the title block, "
    "say all that it states of them. Its digest stands under Basis."
)
METHOD = (
    "each load case is solved exactly by the equilibrium of all joints; a combination is the sum of factored case "
    "forces; a train's worst position is found exactly on the influence line. What governs is put on the joints and "
    "derived anew by hand: joints and sections, one equation for one unknown where there is one, in exact arithmetic. "
    "Independently: displacement method in floating point. The routes share the stated truss and loads only"
)
CODES = (
    "Combinations, factors and trains are the engineer's choice. What is marked as published is to be confirmed in the "
    "edition adopted where the structure stands; local codes govern, and this sheet gives no opinion on them."
)
CAUTIONS = (
    record.AXIAL_ONLY,
    record.LICENSED,
    CODES,
    "Prepared for the project, loads and revision named above; not for use elsewhere.",
)


def compose_envelope(
    found: Envelope,
    checks: Sequence[GoverningCheck],
    project: Project | None = None,
    *,
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    detail: Detail = "members",
) -> Sheet:
    """Return the calculation sheet of an envelope.

    Parameters
    ----------
    found : Envelope
        The extremes.
    checks : sequence of GoverningCheck
        The hand checks of what governs (``governing_checks``).
    project : Project, optional
        The title block; without it, that of the file.
    truss_text : str
        The truss file as it was read, for echo and digest; '' writes one.
    places : int
        Decimal places, 0 to 12.
    drawings : bool
        Whether figures are drawn.
    detail : str
        ``members``: all derivations in the main part; of more than twelve members those that govern, the others in an
        appendix. ``all``: all in the main part, each with its own free body, and the truss file word by word.
        ``summary``: none, and the scope says so.

    Raises
    ------
    InputError
        When ``truss_text`` states other things than were looked at, places are out of range, or for another detail.
    """
    proven_options(places, detail)
    project = project or found.stated.project
    text = truss_text or writes(replace(found.stated, project=project))
    stated = read_again(text)
    faults = differences(stated, found.stated)
    if faults:
        message = f"the text of the truss file states other {listed(faults)} than were looked at"
        raise InputError(message)
    found = replace(found, stated=stated)  # the echo is of the text, groups and all
    states = States(found, tuple(checks))
    numbered = [
        replace(check, truss=stated.truss.at_values()) for check in numbered_through(each.check for each in checks)
    ]
    shown = shown_states(states, numbered, detail)
    told = detail != "summary"
    summary = tuple(envelopefront.summary(states, places, derived=told))
    drawn = drawings and bool(found.members)
    main = _main_parts(states, numbered, shown, places, drawings=drawings, detail=detail)
    blocks: list[Block] = [
        front.title_block(stated.truss, project),
        *envelopefront.opening(states, project),
        *summary,
        *([Picture((envelope_elevation(found),))] if drawn else []),
        *envelopefront.scope(states, detail, shown.members),
        *record.basis(stated.truss, found.tolerance, text, places, method=METHOD, codes=references(stated)),
        *_echo(stated, project, text, places, verbatim=detail == "all"),
        *load_inventory(stated, found.cases, places, drawings=drawings),
        *combination_blocks(found),
        *_trains(found),
        *main,
        *_cross_check(states, numbered, places),
        *record.cautions(CAUTIONS),
        *record.revisions(project),
        *_further_parts(states, numbered, shown, places, drawings=drawings),
    ]
    title = f"{envelopefront.TITLE}: {stated.truss.title}" if stated.truss.title else envelopefront.TITLE
    return Sheet(
        title, tuple(blocks), summary, _origin(states, project, text, places, drawings=drawings, detail=detail)
    )


def _echo(stated: TrussFile, project: Project, text: str, places: int, *, verbatim: bool) -> list[Block]:
    symbols = dict(stated.truss.symbols) | {name: value for case in stated.cases for name, value in case.symbols}
    amounts = [part for case in stated.cases for load in case.loads for part in (load.fx, load.fy)]
    amounts += [factor for each in stated.combinations for _, factors in each.factors for factor in factors]
    return input_echo(
        stated.truss,
        LoadCase("", {}, symbols=list(symbols.items())),
        project,
        text,
        places,
        verbatim=verbatim,
        amounts=amounts,
        not_verbatim=NOT_VERBATIM,
    )


def references(stated: TrussFile) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return which published tables and trains are used, with edition and mark; what is the user's own is said so."""
    items: list[tuple[str, tuple[Inline, ...]]] = []
    own = [each.name for each in stated.combinations]
    if stated.published is not None:
        table = stated.published.published
        items.append(("Combinations", (Run(f"{table.name}: {table.edition}; {table.mark}"),)))
    if own:
        several = f"{own[0]} to {own[-1]}" if len(own) > MOST_NAMED else listed(own)
        items.append(("Own combinations", (Run(f"{several}: factors are the user's own"),)))
    sources: dict[str, list[str]] = {}
    for load in stated.moving:
        for train in load.trains:
            sources.setdefault(train.source or "the user's own", []).append(train.name)
    items += [("Trains", (Run(f"{listed(dict.fromkeys(names))}: {source}"),)) for source, names in sources.items()]
    return items or list(record.NO_CODES)


def _trains(found: Envelope) -> list[Block]:
    loads = [load for load in found.stated.moving if load.name in found.moving]
    blocks = moving_loads(found.stated, loads)
    return [Heading(2, "Moving loads"), *blocks] if blocks else []


# --- parts that grow with the members ---------------------------------------------------------------------


def _main_parts(
    states: States,
    numbered: Sequence[MemberCheck],
    shown: ShownStates,
    places: int,
    *,
    drawings: bool,
    detail: Detail,
) -> list[Block]:
    """Return what governs and why, then the governing states."""
    found = states.found
    if not found.members:
        return []
    blocks: list[Block] = [
        Heading(2, "What governs"),
        rival_table(found, shown.members, places),
        *(Picture((figure,)) for figure in (envelope_diagrams(found) if drawings else ())),
        Heading(2, "Superposition"),
        case_force_table(found, shown.members, places),
    ]
    for name in shown.members:
        each = found.members[name]
        blocks += [superposition_table(found, each, which, places) for which in each.senses]
    if detail == "summary":
        return blocks
    parts = moving_parts(states, shown.members, places, drawings=drawings)
    blocks += [Heading(2, "Influence lines"), *parts] if parts else []
    for number, (check, steps) in enumerate(zip(numbered, shown.main, strict=True), 1):
        if steps:
            each_drawn = detail == "all"
            blocks += state_blocks(states, number, check, steps, places, drawings=drawings, each_drawn=each_drawn)
    return blocks


def _further_parts(
    states: States, numbered: Sequence[MemberCheck], shown: ShownStates, places: int, *, drawings: bool
) -> list[Block]:
    """Return the appendix: all combinations of each member, and the derivations that are not in the main part."""
    found = states.found
    rest = [name for name in found.members if name not in shown.members]
    blocks: list[Block] = []
    if found.members and (len(found.combinations) > MOST_RIVALS or rest):
        blocks += [Heading(2, ALL_COMBINATIONS), rival_table(found, list(found.members), places, None)]
    if not any(shown.further):
        return blocks
    blocks.append(Heading(2, FURTHER))
    for name in rest:
        each = found.members[name]
        blocks += [superposition_table(found, each, which, places) for which in each.senses]
    blocks += moving_parts(states, rest, places, drawings=drawings)
    for number, (check, steps) in enumerate(zip(numbered, shown.further, strict=True), 1):
        if steps and shown.main[number - 1]:
            blocks.append(Heading(2, f"{heading(states, number)}, continued"))
            writer = state_writer(states, number, check, places)
            blocks += derivations(writer, steps, drawings=drawings, headed=False)
        elif steps:
            blocks += state_blocks(states, number, check, steps, places, drawings=drawings, each_drawn=False)
    return blocks


def _cross_check(states: States, numbered: Sequence[MemberCheck], places: int) -> list[Block]:
    """Return what the independent route says, case by case and state by state."""
    found = states.found
    items: list[tuple[str, tuple[Inline, ...]]] = []
    if numbered:
        first = numbered[0]
        items.append(("Count and rank", (Run(record.count_and_rank(first)),)))
        items += record.shared_redundancy(first)
        items.append(("Joints in every state", (Run(_joints(numbered)),)))
    differing = [f"{bar(member)} under {case}" for case, member in found.differing]
    wrong = [str(number) for number, check in enumerate(states.checks, 1) if not check.agreed]
    text = f"agree on all case forces, influence lines and reactions of {listed([*found.cases, *found.moving])}"
    if differing:
        text = f"DIFFER: {listed(differing)}"
    if wrong:
        text += f"; do NOT agree in state {listed(wrong)}"
    elif states.checks:
        text += f", and with the superposition in {counted(len(states.checks), 'governing state')}"
    items.append(("Both routes", (Run(text),)))
    conditions = [each.condition for each in found.cases.values()] + [each.condition for each in found.moving.values()]
    stiffness: list[Inline] = [Run("estimated condition number "), record.condition_size(max(conditions, default=0.0))]
    if numbered:
        worst = record.noise(max(check.stiffness_residual for check in numbered))
        stiffness += [Run("; imbalance at the worst joint "), worst, Run(" of the largest force")]
    items.append(("Stiffness route", tuple(stiffness)))
    rest = envelopefront.unchecked(states)
    if len(rest) > MOST_NAMED:
        items.append(("Members not checked", (Run(listed(map(bar, rest))),)))
    items.append(("Independence", (Run(record.INDEPENDENCE),)))
    return [Heading(2, "Cross-check"), reaction_table(found, places), Items(tuple(items))]


def _joints(numbered: Sequence[MemberCheck]) -> str:
    statics = numbered[0].statics
    bad = [str(number) for number, check in enumerate(numbered, 1) if check.residuals]
    if not statics.determinate:
        return "not closed exactly: the truss is statically indeterminate"
    if bad:
        return f"NOT in equilibrium in state {listed(bad)}"
    return f"loads, reactions and all member forces sum to exactly zero at each of the {statics.joints} joints"


def _origin(states: States, project: Project, text: str, places: int, *, drawings: bool, detail: Detail) -> Origin:
    found = states.found
    return Origin(
        truss_text=text,
        case="",
        members=found.asked,
        places=places,
        project=tuple((key, getattr(project, key)) for key in LINES if getattr(project, key)),
        stated=tuple(
            (f"{each.member} {EXTREMES[which]}", to_text(each.state(which).value)) for each, which in states.of_members
        ),
        agreed=found.agreed and all(check.agreed for check in states.checks),
        program=record.program(),
        names=tuple(sorted(project.names.items())),
        drawings=drawings,
        detail=detail,
        task="envelope",
    )
