"""A governing state on the sheet: how its joint loads add up, its reactions, and the steps of its hand check."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import replace

from trusscalc.envelopes import Choice, Envelope
from trusscalc.governing import factored_cases
from trusscalc.loads import JointLoad, LoadCase, factor_text
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import record
from trusscalc.sheet.blocks import Block, Heading, Paragraph, Run
from trusscalc.sheet.compose import derivations
from trusscalc.sheet.derivation import Writer, writer_of
from trusscalc.sheet.envelopetables import States, absent_words, choice_words, extreme_words
from trusscalc.sheet.loadinventory import along, by_joint
from trusscalc.sheet.traintables import share_columns, stand_words
from trusscalc.sheet.values import decimal_text
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.standing import train_of

MOST_IN_HEADING = 3
"""Members that a state's heading names one by one."""
MOST_COLUMNS = 9
"""Columns of factored loads beside each other; with more there is their sum alone."""


def state_blocks(
    states: States,
    number: int,
    numbered: MemberCheck,
    steps: Collection[int],
    places: int,
    *,
    drawings: bool,
    each_drawn: bool,
) -> list[Block]:
    """Return one governing state.

    Parameters
    ----------
    states : States
        All of them.
    number : int
        Which one.
    numbered : MemberCheck
        Its hand check, with the step numbers of this sheet.
    steps : collection of int
        Those shown.
    places : int
        Decimal places.
    drawings, each_drawn : bool
        Whether free bodies are drawn, and each in its own step.
    """
    found, check = states.found, states.checks[number - 1]
    writer = state_writer(states, number, numbered, places)
    return [
        Heading(2, heading(states, number)),
        Paragraph((Run(words(found, check.choice)),)),
        *joint_loads(states, number, numbered.case, places),
        *derivations(writer, steps, drawings=drawings, each_drawn=each_drawn, headed=False),
        *record.balance(writer),
        _equal(states, number, places),
    ]


def state_writer(states: States, number: int, numbered: MemberCheck, places: int) -> Writer:
    """Return the writer of a state's steps: loads on the whole truss by case, decimals for long fractions."""
    cases = factored_cases(states.found.stated, states.checks[number - 1].choice)
    by_case = tuple((f"{factor_text(factor)} {name}", loads) for name, factor, loads in cases)
    return replace(writer_of(numbered, places, brief=True, by_case=by_case), sums="the sums at the end of this state")


def heading(states: States, number: int) -> str:
    """Return what a state is called."""
    members = states.found.members
    pairs = states.checks[number - 1].members
    governed = [f"{bar(name)}, {extreme_words(members[name], which)}" for name, which in pairs]
    told = "; ".join(governed) if len(governed) <= MOST_IN_HEADING else f"of {counted(len(governed), 'force')}"
    return f"Governing state {number}: {told}"


def words(found: Envelope, choice: Choice) -> str:
    """Return what acts in a state: the combination as it is taken, and where trains stand."""
    text = f"{choice.combination}, as taken: {choice_words(choice)}.{absent_words(found, choice)}"
    loads = {load.name: load for load in found.stated.moving}
    for case, _, extreme in choice.stands:
        train = train_of(extreme, loads[case].trains)
        if train is not None:
            line = next(iter(found.moving[case].lines.values()))
            text += f" As {case} acts {train.name}{stand_words(line, extreme, train)}."
    return text


def joint_loads(states: States, number: int, case: LoadCase, places: int) -> list[Block]:
    """Return for each axis with loads what every factored case puts on the joints, and their sums."""
    found, truss = states.found, states.found.stated.truss
    columns = _columns(states, number)
    blocks: list[Block] = []
    for axis, way in (("x", "to the right"), ("y", "upwards")):
        own = [(name, loads) for name, loads in columns if any(along(load, axis) for load in loads)]
        if own or any(along(load, axis) for load in case.loads):
            caption = (
                f"Joint loads of state {number} in {axis}, positive {way}: cases with their factors, and their sum."
            )
            if axis == "y" and found.moving:
                caption += " Before its factor a train load by load, shared to two joints each."
            whole = (f"together, {truss.force}", case.loads)
            blocks.append(by_joint(truss.at_values(), [*own, whole], axis, case, places, caption))
    return blocks


def _columns(states: States, number: int) -> list[tuple[str, Sequence[JointLoad]]]:
    """Return the joint loads of each factored case, before a train's those of its loads, as far as there is room."""
    found, check = states.found, states.checks[number - 1]
    cases = factored_cases(found.stated, check.choice)
    if len(cases) > MOST_COLUMNS:
        return []
    extremes = {name: extreme for name, _, extreme in check.choice.stands}
    trains = {load.name: load.trains for load in found.stated.moving}
    columns: list[tuple[str, Sequence[JointLoad]]] = []
    for name, factor, loads in cases:
        train = train_of(extremes[name], trains[name]) if name in extremes else None
        if train is not None and len(extremes) == 1:
            line = found.moving[name].lines[check.members[0][0]]
            shares = [(f"{name}: {what}", own) for what, own in share_columns(line, extremes[name], train)]
            columns += shares if len(cases) + len(shares) <= MOST_COLUMNS else []
        columns.append((f"{factor_text(factor)} {name}", loads.loads))
    return columns


def _equal(states: States, number: int, places: int) -> Paragraph:
    """Return what the steps give beside what the superposition gave."""
    check = states.checks[number - 1]
    told = []
    for name, which in check.members:
        value = states.found.members[name].state(which).value
        text = decimal_text(value, places).replace("-", "−")
        told.append(f"{bar(name)} {text} {states.found.stated.truss.force}")
    if check.differing:
        names = listed(map(bar, check.differing))
        return Paragraph(
            (Run(f"By superposition: {listed(told)}. The steps give another value for {names}.", "strong"),)
        )
    return Paragraph((Run(f"By superposition: {listed(told)}. The steps give the same, exactly."),))
