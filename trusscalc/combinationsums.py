"""The sums a published table stands for, over the cases assigned to its letters.

A printed expression stands for many sums: alternatives in brackets, several winds, the leading action each in turn,
loads that may stay away. Letters without a case are left out, and what then says no more than another sum is dropped.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Final

from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.loads import factor_text
from trusscalc.publishedcombinations import PublishedRow, PublishedTable

_TOKEN: Final = re.compile(r"[0-9.]+|or\b|[A-Z][A-Za-z_]*|[+−()]")

Cases = Mapping[str, Sequence[str]]
"""Letters of a table, and the cases that stand for each."""


@dataclass(frozen=True, slots=True)
class Part:
    """A case in a sum, its factor or pair of factors, and what of these is not the table's."""

    case: str
    factors: tuple[Exact, ...]
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class PublishedSum:
    """Sums of one row: its permanent parts, and groups of variable parts of which one alternative each acts."""

    row: PublishedRow
    permanent: tuple[Part, ...]
    variable: tuple[tuple[tuple[Part, ...], ...], ...]


@dataclass(frozen=True, slots=True)
class LeftOut:
    """A row of which nothing is left to say, and why."""

    number: str
    reason: str


# --- expressions of numbers and letters -------------------------------------------------------------------

Variant = tuple[tuple[str, Exact], ...]


@cache
def variants_of(expression: str) -> tuple[Variant, ...]:
    """Return the sums of letters that a printed expression allows, one for each choice among its alternatives.

    Examples
    --------
    >>> [[(letter, factor_text(factor)) for letter, factor in each] for each in variants_of("D + 0.75(0.6W or R)")]
    [[('D', '1'), ('W', '0.45')], [('D', '1'), ('R', '0.75')]]
    """
    tokens = _TOKEN.findall(expression)
    try:
        whole = "".join(tokens) == expression.replace(" ", "")
        found = tuple(_alternatives(tokens))
    except IndexError:  # it ends too early
        whole, found = False, ()
    if tokens or not whole:
        message = f"{expression!r} cannot be read"
        raise ValueError(message)
    return found


def _alternatives(tokens: list[str]) -> list[Variant]:
    """Read what stands between brackets: sums with ``or`` between them."""
    found = _sum(tokens)
    while tokens[:1] == ["or"]:
        del tokens[0]
        found += _sum(tokens)
    return found


def _sum(tokens: list[str]) -> list[Variant]:
    found: list[Variant] = [()]
    sign = ONE
    while True:
        term = _term(tokens, sign)
        found = [(*before, *after) for before in found for after in term]
        if tokens[:1] not in (["+"], ["−"]):
            return found
        sign = ONE if tokens.pop(0) == "+" else -ONE


def _term(tokens: list[str], sign: Exact) -> list[Variant]:
    factor = sign * number(tokens.pop(0)) if tokens[0][0].isdigit() else sign
    if tokens[0] != "(":
        return [((tokens.pop(0), factor),)]
    del tokens[0]
    inner = _alternatives(tokens)
    del tokens[0]
    return [tuple((letter, factor * each) for letter, each in variant) for variant in inner]


# --- tables whose expressions hold their factors ----------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Draft:
    """A variant of a row with the letters that have cases: its factors, and whether no letter was left out."""

    row: PublishedRow
    factors: Mapping[str, Exact]
    remarks: Mapping[str, str]
    whole: bool


def own_names(table: PublishedTable) -> list[str]:
    """Return the names of factors that the user may replace, such as ``gamma_Q`` or ``3a L``."""
    if table.factors:
        return [name for name, _ in table.factors]
    return list(
        dict.fromkeys(
            f"{row.number} {letter}"
            for row in table.rows
            for variant in variants_of(row.expression)
            for letter, _ in variant
        )
    )


def sums_of_loads(
    table: PublishedTable, cases: Cases, own: Mapping[str, Exact]
) -> tuple[list[PublishedSum], list[LeftOut]]:
    """Return the sums of a table whose expressions hold their factors, and the rows that say nothing more.

    Parameters
    ----------
    table : PublishedTable
        A table without named factors.
    cases : mapping of letter to cases
        Letters that are missing have no case.
    own : mapping of "row letter" to number
        The user's factors.
    """
    acts = {letter.symbol: letter.acts for letter in table.letters}
    permanent = [symbol for symbol, kind in acts.items() if kind == "permanent"]
    drafts = [_draft(row, variant, cases, own) for row in table.rows for variant in variants_of(row.expression)]
    kept = [draft for place, draft in enumerate(drafts) if _says_more(place, drafts, permanent)]
    sums = []
    for draft in kept:
        parts = {
            letter: [Part(case, (factor,), tuple(filter(None, [draft.remarks.get(letter)]))) for case in cases[letter]]
            for letter, factor in draft.factors.items()
        }
        sums.append(
            PublishedSum(
                draft.row,
                tuple(part for letter in permanent for part in parts.get(letter, ())),
                tuple(
                    tuple((part,) for part in each) if acts[letter] == "in turn" else (tuple(each),)
                    for letter, each in parts.items()
                    if letter not in permanent
                ),
            )
        )
    return sums, _left_out(table, drafts, kept, cases, permanent)


def _draft(row: PublishedRow, variant: Variant, cases: Cases, own: Mapping[str, Exact]) -> _Draft:
    factors, remarks = {}, {}
    for letter, printed in variant:
        if letter not in cases:
            continue
        name = f"{row.number} {letter}"
        factor = own.get(name, printed)
        if name in own:
            remarks[letter] = _own_remark(f"factor of {letter}", factor, printed)
        factors[letter] = factor
    return _Draft(row, factors, remarks, all(letter in cases for letter, _ in variant))


def _own_remark(name: str, factor: Exact, printed: Exact) -> str:
    return f"{name} {factor_text(factor)}, the user's own in place of {factor_text(printed)}"


def _says_more(place: int, drafts: Sequence[_Draft], permanent: Sequence[str]) -> bool:
    """Return whether a draft is as printed, or says more than every other; of equal ones the first does."""
    draft = drafts[place]
    if draft.whole:
        return True
    for other_place, other in enumerate(drafts):
        if other is not draft and _covers(other.factors, draft.factors, permanent):
            equal = _covers(draft.factors, other.factors, permanent)
            if not equal or other.whole or other_place < place:
                return False
    return True


def _covers(wide: Mapping[str, Exact], narrow: Mapping[str, Exact], permanent: Sequence[str]) -> bool:
    """Return whether no effect under one sum can pass what the other allows.

    Where the permanent loads have the same factors and every variable load, which may stay away, has at least as
    large a factor of the same sign, the effects of one lie among those of the other. Permanent loads alone say
    nothing more than the same with larger factors: nothing is there for them to resist.
    """
    variable = [letter for letter in narrow if letter not in permanent and narrow[letter]]
    if not variable:
        return all(narrow[letter] <= wide.get(letter, ZERO) for letter in permanent if letter in narrow)
    return all(wide.get(letter, ZERO) == narrow.get(letter, ZERO) for letter in permanent) and all(
        letter in wide and (wide[letter] * narrow[letter]).sign() > 0 and abs(narrow[letter]) <= abs(wide[letter])
        for letter in variable
    )


def _left_out(
    table: PublishedTable, drafts: Sequence[_Draft], kept: Sequence[_Draft], cases: Cases, permanent: Sequence[str]
) -> list[LeftOut]:
    """Return each row without a kept draft, the letters it lacks and a kept row that covers it."""
    left_out = []
    said = {draft.row.number for draft in kept}
    for row in dict.fromkeys(draft.row for draft in drafts if draft.row.number not in said):
        # the fullest of its variants: what covers that covers the row
        draft = max((each for each in drafts if each.row is row), key=lambda each: len(each.factors))
        there = {letter for variant in variants_of(row.expression) for letter, _ in variant}
        without = [letter.symbol for letter in table.letters if letter.symbol in there - set(cases)]
        covering = next(each.row.number for each in kept if _covers(each.factors, draft.factors, permanent))
        left_out.append(LeftOut(row.number, f"without {', '.join(without)} it says no more than {covering}"))
    return left_out


# --- tables with a leading action -------------------------------------------------------------------------

Action = tuple[tuple[str, ...], ...]
"""A variable action: alternatives of which one acts at a time, each of cases that act together."""


def actions_of(table: PublishedTable, cases: Cases, categories: Mapping[str, str]) -> list[Action]:
    """Return the variable actions among the cases of Q and of Q1, Q2, ...

    Imposed loads of whatever category are one action together (EN 1991-1-1 3.3.1, from memory); winds of several
    directions, and arrangements of snow or temperature, exclude each other.
    """
    kinds = {category.name: category.kind for category in table.categories}
    imposed = tuple(case for case in cases.get("Q", ()) if kinds.get(categories.get(case, "")) == "imposed")
    groups: dict[str, list[tuple[str, ...]]] = {}
    for letter, names in cases.items():
        for case in names if letter != "G" else ():
            kind = kinds.get(categories.get(case, ""), "")
            if letter != "Q":
                groups.setdefault(f"letter {letter}", []).append((case,))
            elif kind == "imposed":
                groups["kind imposed"] = [imposed]
            else:
                groups.setdefault(f"kind {kind}" if kind else f"case {case}", []).append((case,))
    return [tuple(group) for group in groups.values()]


def sums_of_actions(
    table: PublishedTable,
    cases: Cases,
    actions: Sequence[Action],
    psi0: Mapping[str, tuple[Exact, str]],
    own: Mapping[str, Exact],
) -> tuple[list[PublishedSum], list[LeftOut]]:
    """Return the sums of a table with named factors: each variable action leads in turn.

    Parameters
    ----------
    table : PublishedTable
        A table with named factors.
    cases : mapping of letter to cases
        Of which G is read here.
    actions : sequence of Action
        The variable actions.
    psi0 : mapping of case name to (psi0, remark)
        Needed for every case that accompanies another action.
    own : mapping of name to number
        The user's factors.
    """
    factors = dict(table.factors) | dict(own)
    said = {name: (_own_remark(name, own[name], printed),) if name in own else () for name, printed in table.factors}

    def permanent(row: PublishedRow) -> tuple[Part, ...]:
        largest, least = factors["gamma_G_sup"], factors["gamma_G_inf"]
        remarks = said["gamma_G_sup"] + said["gamma_G_inf"]
        if row.reduces_permanent:  # xi goes with the unfavourable factor alone
            largest *= factors["xi"]
            remarks += said["xi"]
        pair = (largest,) if largest == least else (largest, least)
        return tuple(Part(case, pair, remarks) for case in cases.get("G", ()))

    def part(case: str, *, leads: bool) -> Part:
        if leads:
            return Part(case, (factors["gamma_Q"],), said["gamma_Q"])
        reduction, remark = psi0[case]
        return Part(case, (factors["gamma_Q"] * reduction,), (*said["gamma_Q"], remark))

    def group(action: Action, *, leads: bool) -> tuple[tuple[Part, ...], ...]:
        return tuple(tuple(part(case, leads=leads) for case in alternative) for alternative in action)

    sums, left_out = [], []
    for row in table.rows:
        if row.reduces_permanent and not actions:
            left_out.append(LeftOut(row.number, f"without Q it says no more than {table.rows[0].number}"))
        elif row.reduces_leading or not actions:
            sums.append(PublishedSum(row, permanent(row), tuple(group(action, leads=False) for action in actions)))
        else:
            for leader, leading in enumerate(actions):
                others = [group(action, leads=False) for place, action in enumerate(actions) if place != leader]
                sums.append(PublishedSum(row, permanent(row), (group(leading, leads=True), *others)))
    return sums, left_out
