"""The first sheet of a comparison: whether the submitted results agree, what differs most, what would explain it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.comparison import ComparedForce, Comparison
from trusscalc.explanations import Explanation
from trusscalc.membercheck import MemberCheck
from trusscalc.project import Project
from trusscalc.sheet.blocks import Block, Heading, Inline, Items, Paragraph, Run, Seal
from trusscalc.sheet.comparisontables import cell_text, difference_cell, force_table, given_text, ours_text
from trusscalc.sheet.diagnosisblocks import clean, explains_all, with_dashes
from trusscalc.sheet.front import MOST_NAMED, NOT_COVERED, loads_words
from trusscalc.sheet.inscriptions import amount
from trusscalc.sheet.words import bar, capital, counted, listed, number_word

TITLE: Final = "Verification of submitted member forces"
MOST_ROWS: Final = 12
"""Members in the table of the first sheet; all of them stand further back."""
FEW: Final = ("the one", "both")
MOST_TOLD: Final = 6
"""Names in a sentence of the conclusion."""
LIMIT: Final = (
    "agreement shows that both analyses carried the same loads over the same geometry and supports. An error that both "
    "share passes; compare the input with the drawings"
)
OTHERS: Final = "the other forces are exact solutions of the equilibrium of all joints"
NO_DERIVATION: Final = (
    "none on this sheet: ours are exact solutions of the equilibrium of all joints, and how a force follows by "
    "sections and joints is not shown"
)


@dataclass(frozen=True, slots=True)
class Verification:
    """What a verification sheet is about.

    Attributes
    ----------
    comparison : Comparison
        Submitted results beside ours.
    explanations : tuple of Explanation
        What would explain the differences, the best first.
    check : MemberCheck
        Our reactions, and the members derived on the sheet, by hand.
    """

    comparison: Comparison
    explanations: tuple[Explanation, ...]
    check: MemberCheck

    @property
    def own_faults(self) -> tuple[str, ...]:
        """Where our own routes disagree, with each other or with what is derived by hand."""
        found = list(self.comparison.own_faults)
        for name, item in {**self.check.members, **self.check.reactions}.items():
            if item.verdict == "differs":
                found.append(f"{name}: by hand {item.reason}")
            ours = self.comparison.ours.exact.get(name)
            if item.exact is not None and ours is not None and self.check.value(item.exact) != ours:
                found.append(f"{name}: the derivation gives another value than the equilibrium of all joints")
        found += [f"joint {joint}: out of balance with the values found by hand" for joint in self.check.residuals]
        return tuple(dict.fromkeys(found))

    @property
    def agreed(self) -> bool:
        """Whether our own routes agree and the submitted results agree with them."""
        return self.comparison.agreed and not self.own_faults


def opening(found: Verification, project: Project) -> list[Block]:
    """Return title and the line that says what is compared."""
    comparison = found.comparison
    case = comparison.case.name
    text = f"Load case “{case}”: {loads_words(project)}. Forces in {comparison.truss.force}, tension positive."
    called = ""
    if comparison.their_case:
        same = comparison.their_case == case
        called = f", where the case is called {'the same' if same else f'“{cell_text(comparison.their_case)}”'}"
    submitted = f"Submitted: {comparison.submitted.source}{called}."
    return [Heading(1, TITLE), Paragraph((Run(text),)), Paragraph((Run(submitted),)), *_symbol_values(found.check)]


def _symbol_values(check: MemberCheck) -> list[Block]:
    used = {name for load in check.case.loads for part in (load.fx, load.fy) for name in part.symbols}
    used |= {name for name, _ in check.truss.symbols}
    told = [f"{name} = {amount(value)}" for name, value in check.case.symbols if name in used]
    return [Paragraph((Run(f"Everything is compared at {listed(told)}."),))] if told else []


# --- conclusion -------------------------------------------------------------------------------------------


def summary(found: Verification, places: int) -> list[Block]:
    """Return conclusion and table: the sheet in short."""
    comparison = found.comparison
    shown = _shown(comparison)
    table = force_table(comparison, shown, places, brief=True)
    return [Paragraph(tuple(_conclusion(found, places)), "conclusion"), table, *_note(comparison, shown)]


def _shown(comparison: Comparison) -> list[str]:
    """Return the members of the first table: all of few; of many those that differ most, are missing or nearest to it.

    In the truss's order.
    """
    members = comparison.members
    if len(members) <= MOST_ROWS:
        return list(members)
    urgent = [name for name, item in members.items() if item.verdict != "agrees"]
    wanted = sorted(urgent or members, key=lambda name: -_urgency(members[name]))
    chosen = set(wanted[: MOST_ROWS if urgent else MOST_ROWS // 2])
    return [name for name in members if name in chosen]


def _urgency(item: ComparedForce) -> float:
    """Return how far a value is off in terms of what is allowed, a flipped sense before all others."""
    if item.difference is None or item.digits is None:
        return 0.0
    allowed = item.tolerance + float(item.digits)
    if item.flipped:
        return float("inf")
    return abs(item.difference) / allowed if allowed else abs(item.difference) * 1e30


def _conclusion(found: Verification, places: int) -> list[Inline]:
    comparison = found.comparison
    told = [("strong", text) for text in _own(found)]
    if comparison.differing or comparison.missing:
        told += [("strong", text) for text in _counts(comparison)]
        told += [("plain", text) for text in _particulars(comparison, places)]
    elif found.own_faults:
        told.append(("plain", "The submitted forces agree with ours as they stand."))
    else:
        told.append(("strong", _agreeing(comparison)))
    told += [("plain", text) for text in _closing(found)]
    content: list[Inline] = []
    for style, text in told:
        content += [Run(text, "strong" if style == "strong" else "plain"), Run(" ")]
    return content[:-1]


def _own(found: Verification) -> list[str]:
    faults = found.own_faults
    if not faults:
        return []
    told = "; ".join(with_dashes(fault, found.comparison.truss) for fault in faults[:MOST_TOLD])
    more = f"; and {len(faults) - MOST_TOLD} more" if len(faults) > MOST_TOLD else ""
    return [f"Our own two routes do not agree: {told}{more}. Until that is settled this sheet verifies nothing."]


def _agreeing(comparison: Comparison) -> str:
    text = f"Agrees: {_which(len(comparison.members), 'member')}"
    if comparison.reactions:
        text += f" and {counted(len(comparison.reactions), 'reaction')}"
    several = len(comparison.members) + len(comparison.reactions) > 1
    text += f" of the submitted table {'are' if several else 'is'} within the criterion of ours, and of the same sense."
    return f"{text} Ours agree with our own second route."


def _which(count: int, what: str) -> str:
    if count <= len(FEW):
        return f"{FEW[count - 1]} {what}{'s' * (count > 1)}"
    return f"all {counted(count, what)}"


def _counts(comparison: Comparison) -> list[str]:
    """Return how many differ and how many are missing."""
    told = []
    for what, items in (("member", comparison.members), ("reaction", comparison.reactions)):
        differing = [name for name, item in items.items() if item.verdict == "differs"]
        if differing:
            whole = counted(len(items), what)
            verb = "differs" if len(differing) == 1 else "differ"
            told.append(
                f"{number_word(len(differing))} of {whole} {verb}" if len(items) > 1 else f"the one {what} differs"
            )
    if comparison.missing:
        count = len(comparison.missing)
        told.append(f"{counted(count, 'member')} {'is' if count == 1 else 'are'} missing from the table")
    return [f"Does not agree: {'; '.join(told)}."]


def _particulars(comparison: Comparison, places: int) -> list[str]:
    items = {**comparison.members, **comparison.reactions}
    differing = [items[name] for name in comparison.differing]
    force = comparison.truss.force
    told = []
    if differing:
        most = max(differing, key=lambda item: abs(item.difference or 0.0))
        apart = difference_cell(most, places)
        size = f"{apart.text} {force}" if isinstance(apart, Run) else "less than the last decimal printed"
        values = f"submitted {_signed(given_text(most, places))}, ours {_signed(ours_text(comparison, most, places))}"
        told.append(f"Largest difference: {bar(most.name)} by {size} ({values}).")
    flipped = [bar(item.name) for item in differing if item.flipped]
    if flipped:
        told.append(f"Of reversed sense: {some(flipped)}.")
    if comparison.missing:
        told.append(f"Missing: {some([bar(name) for name in comparison.missing])}.")
    return told


def _signed(text: str) -> str:
    return text.replace("-", "−")


def some(names: Sequence[str], most: int = MOST_TOLD) -> str:
    """Return names as a list, of many the first ones and how many more."""
    if len(names) <= most:
        return listed(names)
    return f"{', '.join(names[:most])} and {len(names) - most} more"


def _closing(found: Verification) -> list[str]:
    """Return what the joints say, what would explain it, displacements, and the order of things."""
    comparison = found.comparison
    told = []
    off = [load.joint for load in comparison.implied if load.differs]
    if off:
        told.append(f"By their own equilibrium the submitted forces carry other loads or reactions at {some(off)}.")
    told += _explained(found)
    apart = [f"{item.joint},{item.axis}" for item in comparison.displacements if not item.in_proportion]
    if apart:
        told.append(f"Displacements out of proportion, on which the verdict does not rest: {some(apart)}.")
    if comparison.order:
        told.append(f"{capital(comparison.order)}.")
    return told


def _explained(found: Verification) -> list[str]:
    if not found.explanations:
        return []
    best = found.explanations[0]
    text = capital(clean(best, found.comparison.truss))
    if best.explanation == "unexplained":
        return [f"Unexplained: {text[:1].lower()}{text[1:]}."]
    reach = "the numbers" if explains_all(best) else "most of the differences, not all of them"
    return [f"{text}. That would explain {reach}; it does not prove what was done."]


def _note(comparison: Comparison, shown: Sequence[str]) -> list[Block]:
    force = comparison.truss.force
    text = (
        f"Forces in {force}. T tension, C compression, 0 no force. Ours: decimals are rounded once, from the exact "
        "value, half to even. Difference: submitted minus ours. The criterion stands under Submitted results."
    )
    rest = len(comparison.members) - len(shown)
    if rest:
        urgent = [name for name, item in comparison.members.items() if item.verdict != "agrees"]
        which = "furthest from what is allowed, or missing" if urgent else "nearest to what is allowed"
        text += f" Shown: the members {which}; all {len(comparison.members)} stand under Members compared."
    return [Paragraph((Run(text),), "note")]


# --- scope ------------------------------------------------------------------------------------------------


def scope(found: Verification) -> list[Block]:
    """Return what was compared, what was not, and what no comparison can see; with room to sign and to seal."""
    comparison = found.comparison
    there = [name for name, item in comparison.members.items() if item.verdict != "missing"]
    count = f"{len(there)} of {len(comparison.truss.members)} members"
    names = f" ({listed(map(bar, there))})" if len(there) <= MOST_NAMED else ", listed under Members compared"
    compared = f"axial force in {count}{names}"
    if comparison.reactions:
        compared += f"; reactions {listed(map(bar, comparison.reactions))}"
    if comparison.displacements:
        compared += f"; {counted(len(comparison.displacements), 'displacement')}, in proportion only"
    items = [
        ("Compared", f"{compared}; this load case only"),
        ("Not compared", _not_compared(comparison, there)),
        ("Not covered", NOT_COVERED),
        ("Derivations", _derived(found)),
        ("Limit", LIMIT),
    ]
    return [Heading(2, "Scope"), Items(tuple((term, (Run(text),)) for term, text in items)), Seal()]


def _not_compared(comparison: Comparison, there: Sequence[str]) -> str:
    rest = [member.name for member in comparison.truss.members if member.name not in there]
    told = []
    if rest:
        names = f": {listed(map(bar, rest))}" if len(rest) <= MOST_NAMED else ""
        told.append(f"{counted(len(rest), 'member')}{names}")
    if not comparison.reactions:
        told.append("reactions, which the table does not give")
    return "; ".join([*told, "other load cases"])


def _derived(found: Verification) -> str:
    derived = [name for name, item in found.check.members.items() if item.exact is not None]
    left = [name for name in found.check.members if name not in derived]
    told = f"of {listed(map(bar, derived))}, by sections and joints; {OTHERS}" if derived else NO_DERIVATION
    return f"{told}. Not decided by statics, so not derived: {listed(map(bar, left))}" if left else told
