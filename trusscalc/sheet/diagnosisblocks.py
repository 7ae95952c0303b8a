"""What would explain the differences, ranked: how well each fits, what it leaves, and what that does not prove."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Final

from trusscalc.comparison import Comparison
from trusscalc.explanations import Explanation, share
from trusscalc.sheet.blocks import Block, Column, Heading, Inline, Items, Paragraph, Run, Table
from trusscalc.sheet.compact import is_blank, without_columns
from trusscalc.sheet.words import bar, capital, listed
from trusscalc.truss import Truss

DIAGNOSIS: Final = "Diagnosis"
KINDS: Final = {
    "sign": "signs reversed",
    "scale": "common ratio",
    "case-missing": "load case missing",
    "case-doubled": "load case doubled",
    "load-missing": "load missing",
    "load-doubled": "load doubled",
    "load-moved": "load on another joint",
    "load-reversed": "load reversed",
    "support-exchanged": "supports exchanged",
    "support-extra": "pin for roller",
    "support-turned": "roller turned",
    "mirrored": "mirrored",
    "rows-exchanged": "rows exchanged",
    "member-missing": "member missing",
    "joint-displaced": "joint displaced",
    "wrong-combination": "another combination",
    "stiff-joints": "stiff joints",
    "unexplained": "unexplained",
}
"""Explanations in words of the trade."""
TRIED: Final = (
    "every blunder named here was put into the stated model, or into its table, and run: common ratios of units and "
    "load factors, signs, load cases and loads missing, doubled, reversed or on another joint, supports exchanged, "
    "added or turned, the truss or its loads mirrored, rows exchanged, a member missing, a joint displaced by a slip "
    "of typing, other cases and combinations, stiff joints; and two of them together where one leaves a remainder"
)
NOT_PROVEN: Final = (
    "an explanation that fits shows a model that gives the printed numbers, not that this is what was done. Other "
    "models may give the same numbers, and blunders that cancel each other leave no trace. Whoever made the submitted "
    "analysis has to find the cause in it"
)
CONSISTENT: Final = "consistent with"
"""How the text of an explanation begins that leaves no value outside the tolerance."""
UNEXPLAINED: Final = (
    "None of the blunders tried explains the differences. They are unexplained, and have to be settled."
)
NOTHING: Final = "No value asked for differs, so no explanation was looked for."
ONLY_MISSING: Final = "No value that is there differs, so no explanation was looked for; members are missing."
NOT_DIAGNOSED: Final = (
    "Not diagnosed: our own two routes do not agree with each other, so ours cannot be the measure of theirs."
)
_KIND: Final = re.compile("|".join(rf"\b{kind}\b(?= \()" for kind in KINDS if "-" in kind))
_WORD: Final = re.compile(r"[^\s,;:()]+-[^\s,;:()]+")
_MINUS: Final = re.compile(r"(?<![^\s(])-(?=\d)")


def diagnosis(comparison: Comparison, found: Sequence[Explanation], *, own_faults: bool) -> list[Block]:
    """Return the ranked explanations, each with its fit, what is left, its ties, and what none of it proves."""
    blocks: list[Block] = [Heading(2, DIAGNOSIS)]
    if own_faults:
        return [*blocks, Paragraph((Run(NOT_DIAGNOSED, "strong"),))]
    if not found:
        return [*blocks, Paragraph((Run(ONLY_MISSING if comparison.missing else NOTHING),))]
    if found[0].explanation == "unexplained":
        blocks.append(Paragraph((Run(UNEXPLAINED, "strong"),)))
    blocks.append(_table(found))
    told = [(f"({number})", (Run(f"{capital(clean(one, comparison.truss))}."),)) for number, one in enumerate(found, 1)]
    return [
        *blocks,
        Items(tuple(told)),
        Items((("Tried", (Run(TRIED),)), ("Not proven", (Run(NOT_PROVEN),)))),
    ]


def _table(found: Sequence[Explanation]) -> Table:
    rows: list[tuple[Inline | None, ...]] = []
    ties = [{(one.explanation, one.where), *one.ties} if one.ties else set() for one in found]
    for number, one in enumerate(found, 1):
        alike = [str(n) for n, other in enumerate(found, 1) if n != number and _name(other) in ties[number - 1]]
        rows.append(
            (
                Run(f"({number})"),
                Run(_words(one.explanation) + (f" and {_words(one.second[0])}" if one.second else "")),
                Run(_where(one)),
                Run(_fit(one)),
                Run(share(one.remainder)),
                Run(listed(f"({n})" for n in alike)),
            )
        )
    columns = (
        Column("rank"),
        Column("explanation"),
        Column("where"),
        Column("reproduces"),
        Column("largest difference left"),
        Column("the same values as"),
    )
    caption = (
        "Explanations, the best first. Left: the largest difference between submitted and reproduced member forces, "
        "over the largest force."
    )
    return without_columns(Table(columns, tuple(rows), caption), lambda _, cells: is_blank(cells))


def _name(one: Explanation) -> tuple[str, tuple[str, ...]]:
    return one.explanation, one.where


def _words(kind: str) -> str:
    return KINDS.get(kind, kind)


def _where(one: Explanation) -> str:
    places = [*one.where, *(one.second[1] if one.second else ())]
    return listed(map(bar, places))


def _fit(one: Explanation) -> str:
    if one.explanation == "unexplained":
        return "nothing"
    if one.fits:
        return "every value within its rounding"
    return "every value within the tolerance" if explains_all(one) else "not every value"


def explains_all(one: Explanation) -> bool:
    """Return whether an explanation reproduces every value, within the tolerance at least, as its own text says."""
    return one.fits or one.text.startswith(CONSISTENT)


def clean(one: Explanation, truss: Truss) -> str:
    """Return an explanation's text as it is printed: kinds in words, true minus signs, members with their dash."""
    return with_dashes(_KIND.sub(lambda found: KINDS[found[0]], _MINUS.sub("−", one.text)), truss)


def with_dashes(text: str, truss: Truss) -> str:
    """Return a text with the members it names as they are printed; names with blanks in them stay."""
    members = {member.name for member in truss.members}
    return _WORD.sub(lambda found: bar(found[0]) if found[0] in members else found[0], text)
