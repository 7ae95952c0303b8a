"""The first sheet of an envelope: conclusion, table of extremes, flags, scope."""

from __future__ import annotations

from collections.abc import Collection
from typing import Final

from trusscalc.envelopes import MemberEnvelope, Sense
from trusscalc.exact import ZERO
from trusscalc.project import Project
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Items, Paragraph, Run, Seal, Table
from trusscalc.sheet.compact import without_columns
from trusscalc.sheet.derivation import sense
from trusscalc.sheet.detail import Detail
from trusscalc.sheet.envelopetables import NO_CASE, States, extreme_words
from trusscalc.sheet.front import FURTHER, LIMIT, MOST_NAMED, NOT_DERIVED, loads_words
from trusscalc.sheet.values import DIGITS, decimal_text, is_readable, printed, scientific, told
from trusscalc.sheet.words import bar, capital, counted, listed

TITLE: Final = "Envelope of truss member forces, independently checked"
SUPERPOSED: Final = "superposed"
"""Verdict of an extreme whose state is not derived."""
SENSES: Final[tuple[Sense, Sense]] = ("max", "min")
NOT_COVERED: Final = (
    "strength, buckling, connections, fatigue, bracing, foundations, deflection; bending of members loaded between "
    "their joints; dynamic effects beyond the impact stated; sideways distribution beyond the share stated"
)


def opening(states: States, project: Project) -> list[Block]:
    """Return title and the line that says what loads these are."""
    found = states.found
    names = [*found.cases, *found.moving]
    text = (
        f"{capital(counted(len(found.combinations), 'combination'))} of {counted(len(names), 'load case')} "
        f"({listed(names)}): {loads_words(project)}. Forces in {found.stated.truss.force}, tension positive."
    )
    blocks: list[Block] = [Heading(1, TITLE), Paragraph((Run(text),))]
    symbols = dict(found.stated.truss.symbols) | {n: v for case in found.stated.cases for n, v in case.symbols}
    if symbols:
        content: list[Inline] = [Run("All values are at ")]
        for place, (name, value) in enumerate(symbols.items()):
            content += [Run(f"{', ' if place else ''}{name} = "), printed(value, NO_CASE)]
        blocks.append(Paragraph((*content, Run("."))))
    return blocks


def summary(states: States, places: int, *, derived: bool = True) -> list[Block]:
    """Return conclusion, table and notes; ``derived`` says whether it may point at the states."""
    found = states.found
    reasons = tuple((bar(name), (Run(f"undecided: {reason}"),)) for name, reason in found.undecided.items())
    return [
        Paragraph(tuple(_conclusion(states, places)), "conclusion"),
        extremes_table(states, places, derived=derived),
        _notes(states),
        *([Items(reasons)] if reasons else []),
    ]


def extremes_table(states: States, places: int, *, derived: bool = True) -> Table:
    """Return the largest and the least force of each member, each with what governs and the verdict of its check."""
    rows: list[tuple[Inline | None, ...]] = []
    strong = []
    for name in states.found.asked:
        if name not in states.found.members:
            rows.append((Run(bar(name)), None, None, None, None, None, None, Run("undecided")))
            strong.append(len(rows) - 1)
            continue
        each = states.found.members[name]
        for which in SENSES:
            if _is_bad(states, each, which):
                strong.append(len(rows))
            rows.append(_row(states, each, which, places, derived=derived))
    columns = (
        Column("member"),
        Column("reverses"),
        Column("force"),
        Column("exact", "right"),
        Column("decimal", "right"),
        Column("T/C", "centre"),
        Column("governed by"),
        Column("hand check", "right"),
    )
    table = Table(columns, tuple(rows), strong_rows=tuple(strong))
    reversing = any(each.reversal for each in states.found.members.values())
    idle = {"reverses"} if not reversing else set()
    idle |= {"hand check"} if not states.checks else set()
    return without_columns(table, lambda place, _: columns[place].head in idle)


def _row(
    states: States, each: MemberEnvelope, which: Sense, places: int, *, derived: bool
) -> tuple[Inline | None, ...]:
    choice = each.state(which)
    number = states.number(each.member, which)
    verdict = states.verdict(each.member, which) or SUPERPOSED
    first = which == "max"
    return (
        Run(bar(each.member)),
        Run("yes") if first and each.reversal else None,
        Run(extreme_words(each, which)),
        told(choice.value, NO_CASE),
        Decimals(decimal_text(choice.value, places)),
        Run(sense(choice.value)),
        Run(choice.combination),
        Run(f"{verdict}, state {number}" if number and derived else verdict),
    )


def _is_bad(states: States, each: MemberEnvelope, which: Sense) -> bool:
    wrong = each.member in {member for _, member in states.found.differing}
    return wrong or states.verdict(each.member, which) not in ("", "agrees")


# --- conclusion -------------------------------------------------------------------------------------------


def _conclusion(states: States, places: int) -> list[Inline]:
    found = states.found
    bad = [*_disagreements(states), *flags(states, places)]
    content: list[Inline] = []
    for sentence in bad:
        content += [Run(sentence, "strong"), Run(" ")]
    good = [name for name in found.members if not any(_is_bad(states, found.members[name], which) for which in SENSES)]
    if good:
        which = "the member below" if len(found.asked) == 1 else f"{counted(len(good), 'member')} below"
        which = f"the {which}" if len(good) == len(found.asked) > 1 else which
        text = f"The largest and the least force of {which} are found by superposition of exact case forces. "
        sound = [check for check in states.checks if check.agreed]
        if sound:
            count = counted(len(sound), "governing state")
            several = len(sound) > 1
            if len(sound) < len(states.checks):
                count = f"the {counted(len(sound), 'other governing state')}"
            text += (
                f"{capital(count)} {'are' if several else 'is'} derived by sections and joints: the hand "
                f"check{'s' if several else ''} {'give' if several else 'gives'} the same values exactly, and "
                f"{'agree' if several else 'agrees'} with a separate stiffness solution of the whole truss. "
            )
        content.append(Run(text))
        content.append(Run(_largest(states, good, places)))
        reversing = [bar(name) for name in good if found.members[name].reversal]
        if reversing:
            content.append(Run(f"The force reverses in {listed(reversing)}. "))
    if not any(text.startswith("Flag:") for text in bad):
        content.append(Run("No member or bearing is flagged."))
    return content


def _largest(states: States, names: list[str], places: int) -> str:
    unit = states.found.stated.truss.force
    senses: tuple[tuple[Sense, int, str], ...] = (("min", -1, "compression"), ("max", 1, "tension"))
    text = ""
    for which, sign, word in senses:
        choices = {name: states.found.members[name].state(which) for name in names}
        own = {name: choice for name, choice in choices.items() if choice.value.sign() == sign}
        if own:
            most = max(own, key=lambda name: abs(float(own[name].value)))
            size = decimal_text(abs(own[most].value), places)
            text += f"Largest {word}: {size} {unit} in {bar(most)} under {own[most].combination}. "
    return text


def _disagreements(states: States) -> list[str]:
    found = states.found
    told_ones = []
    if found.undecided:
        count = len(found.undecided)
        names = listed(map(bar, found.undecided))
        verb = "is" if count == 1 else "are"
        told_ones.append(f"{capital(counted(count, 'member'))} {verb} undecided by statics: {names}.")
    for case in dict.fromkeys(case for case, _ in found.differing):
        names = listed(bar(member) for other, member in found.differing if other == case)
        told_ones.append(f"The two routes differ under {case}: {names}.")
    for number, check in enumerate(states.checks, 1):
        if check.differing:
            names = listed(map(bar, check.differing))
            told_ones.append(f"The hand check of state {number} gives another value than the superposition: {names}.")
        if not check.check.agreed:
            told_ones.append(f"The two routes do not agree on everything in state {number}.")
    return told_ones


def flags(states: States, places: int) -> list[str]:
    """Return what was stated not to happen and happens in some state, and what could not be looked at."""
    found, truss = states.found, states.found.stated.truss
    unit = truss.force
    told_ones = []
    for name in (truss.member(other).name for other in truss.tension_only):
        each = found.members.get(name)
        if each is not None and each.min.value.sign() < 0:
            size = decimal_text(each.min.value, places).replace("-", "−")
            told_ones.append(
                f"Flag: {bar(name)} is stated to take tension only, but comes to {size} {unit} under "
                f"{each.min.combination}."
            )
    unseen = [bar(name) for name in truss.tension_only if truss.member(name).name not in found.members]
    if unseen:
        told_ones.append(f"Flag: stated to take tension only and not looked at here: {listed(unseen)}.")
    for joint in truss.no_uplift:
        bearing = found.bearings.get(joint)
        if bearing is None:
            told_ones.append(f"Flag: statics does not decide whether the bearing at {joint}, stated not to lift, does.")
        elif bearing.min.value < ZERO:
            size = decimal_text(bearing.min.value, places).replace("-", "−")
            told_ones.append(
                f"Flag: stated not to take uplift, but the bearing at {joint} would have to pull down: {size} {unit} "
                f"under {bearing.min.combination}."
            )
    if any(each.state(which).value.rounded for each, which in states.of_members):
        told_ones.append(
            "Flag: angle rounded. An angle in the input has no sine and cosine in square roots; they were rounded "
            "once to 30 digits, and all that follows is exact from there on."
        )
    return told_ones


def _notes(states: States) -> Paragraph:
    found = states.found
    content: list[Inline] = [
        Run(
            f"Forces in {found.stated.truss.force}. T tension, C compression, 0 no force. Decimals are rounded once, "
            "from the exact value, half to even. The governing extreme of each member is derived by hand, both where "
            f"the force reverses; “{SUPERPOSED}”: found by superposition alone. Agreement: within "
        ),
        scientific(found.tolerance, 2),
        Run(" of the largest force of the case. "),
    ]
    if any(not is_readable(each.state(which).value) for each, which in states.of_members):
        content.append(Run(f"≈ marks a value too long to be read, given to {DIGITS} significant digits. "))
    rounded = [bar(name) for name, each in found.members.items() if each.max.value.rounded or each.min.value.rounded]
    if rounded:
        content.append(Run(f"Angle rounded, not exact: {listed(rounded)}."))
    return Paragraph(tuple(content), "note")


# --- scope ------------------------------------------------------------------------------------------------


def unchecked(states: States) -> list[str]:
    """Return the members no force is stated for."""
    return [each.name for each in states.found.stated.truss.members if each.name not in states.found.members]


def scope(states: States, detail: Detail, main: tuple[str, ...]) -> list[Block]:
    """Return what was checked, what was not, and what no such check can see; with room to sign and to seal.

    Parameters
    ----------
    states : States
        What was found.
    detail : str
        How much is derived.
    main : tuple of str
        Members whose derivations stand in the main part.
    """
    found = states.found
    rest = unchecked(states)
    named = ": " + listed(map(bar, rest)) if rest else ""
    if len(rest) > MOST_NAMED:
        named = ", listed under Cross-check"
    checked = listed(map(bar, found.members)) or "none"
    count = f"{len(found.members)} of {len(found.stated.truss.members)} members"
    moving = "; every position of the trains on their chains, in both directions" if found.moving else ""
    by_hand = f"by hand {counted(len(states.checks), 'governing state')} with all reactions"
    items = [
        ("Checked", f"largest and least axial force in {count} ({checked}) over the combinations{moving}; {by_hand}"),
        ("Not checked", f"{counted(len(rest), 'member')}{named}; other loads, combinations and trains"),
        ("Not covered", NOT_COVERED),
        *_derived(found.members, detail, main),
        ("Limit", LIMIT),
    ]
    return [Heading(2, "Scope"), Items(tuple((term, (Run(text),)) for term, text in items)), Seal()]


def _derived(members: Collection[str], detail: Detail, main: tuple[str, ...]) -> list[tuple[str, str]]:
    if detail == "summary":
        return [("Derivations", NOT_DERIVED)]
    if len(main) == len(members):
        return []
    text = f"of {listed(map(bar, main))} in the main part; of the others in the appendix “{FURTHER}”"
    return [("Derivations", text)]
