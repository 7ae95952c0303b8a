"""The tables behind an envelope: combinations, what each case gives, how they add up, and that others do not govern."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.envelopes import Choice, Envelope, MemberEnvelope, Sense
from trusscalc.exact import Exact
from trusscalc.governing import GoverningCheck
from trusscalc.loads import Combination, LoadCase, factor_text
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Items, Paragraph, Run, Table
from trusscalc.sheet.compact import without_columns
from trusscalc.sheet.derivation import sense
from trusscalc.sheet.values import decimal_text, float_text, in_a_row
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.trussfile import TrussFile

MOST_CASES: Final = 6
"""Load cases that have a column of their own in the table of combinations."""
MOST_RIVALS: Final = 6
"""Combinations told for each member in the main part; the others stand in the appendix."""
LONGEST_NAME: Final = 24
"""Characters of a combination's name beyond which tables that compare many give its number."""
OWN: Final = "the user's own"
EXTREMES: Final[Mapping[Sense, str]] = {"max": "largest", "min": "least"}
PAIR: Final = "Of two factors each member takes the adverse one, in either sense."
ABSENT: Final = "A case in brackets is tried absent too."
NO_CASE: Final = LoadCase("", {})

Row = tuple[Inline | None, ...]


def extreme_words(each: MemberEnvelope, which: Sense) -> str:
    """Return what an extreme is to an engineer: ``largest compression`` for the least force where it is one."""
    sign = each.state(which).value.sign()
    if not sign:
        return "no force"
    size = "largest" if (sign > 0) == (which == "max") else "least"
    return f"{size} {'tension' if sign > 0 else 'compression'}"


@dataclass(frozen=True, slots=True)
class States:
    """The governing states of an envelope by number, and what their hand checks say.

    Attributes
    ----------
    found : Envelope
        The envelope.
    checks : tuple of GoverningCheck
        State 1, 2, 3.
    """

    found: Envelope
    checks: tuple[GoverningCheck, ...]

    def number(self, member: str, which: Sense) -> int | None:
        """Return the number of the state that governs a member, None where it is not derived."""
        pairs = ((n, check) for n, check in enumerate(self.checks, 1))
        return next((n for n, check in pairs if (member, which) in check.members), None)

    def verdict(self, member: str, which: Sense) -> str:
        """Return the verdict of its hand check, '' where there is none."""
        number = self.number(member, which)
        if number is None:
            return ""
        check = self.checks[number - 1]
        return "differs" if member in check.differing else check.check.members[member].verdict

    @property
    def of_members(self) -> Iterator[tuple[MemberEnvelope, Sense]]:
        """Every decided member in both senses, in the order asked."""
        senses: tuple[Sense, Sense] = ("max", "min")
        return ((each, which) for each in self.found.members.values() for which in senses)


# --- combinations -----------------------------------------------------------------------------------------


def combination_blocks(found: Envelope) -> list[Block]:
    """Return the combinations with their factors and where they are from, and what of a published table is left out."""
    stated = found.stated
    if not stated.all_combinations:
        text = "No combinations are stated: every load case is looked at alone, with factor 1."
        return [Heading(2, "Combinations"), Paragraph((Run(text),))]
    names = list(dict.fromkeys(case for each in found.combinations for case, _ in each.factors))
    table = stated.published.table if stated.published else ""
    blocks: list[Block] = [Heading(2, "Combinations"), combination_table(found.combinations, names, table)]
    if stated.published is not None:
        blocks += published_words(stated)
    return blocks


def combination_table(combinations: Sequence[Combination], names: Sequence[str], table: str = "") -> Table:
    """Return the combinations: a column for each case while they are few, else all factors in one.

    Parameters
    ----------
    combinations : sequence of Combination
        In their order.
    names : sequence of str
        The cases.
    table : str
        The published table's name, which stands below.
    """
    own = not any(each.source for each in combinations)
    few = len(names) <= MOST_CASES
    rows = []
    for number, each in enumerate(combinations, 1):
        factors = {case: _factors(each, case, pair) for case, pair in each.factors}
        if few:
            cells: list[Inline | None] = [Run(factors[name]) if name in factors else None for name in names]
        else:
            cells = [Run("; ".join(f"{factor} {case}" for case, factor in factors.items()))]
        source = each.source.removeprefix(f"{table}, ") or OWN
        rows.append((Run(f"({number})"), Run(each.name), *cells, Run(source)))
    heads = [Column(name, "right") for name in names] if few else [Column("factors")]
    pairs = [PAIR] if any(len(pair) > 1 for each in combinations for _, pair in each.factors) else []
    absent = [ABSENT] if any(each.optional for each in combinations) else []
    caption = " ".join([*pairs, *absent, *(["All factors are the user's own."] if own else [])])
    columns = (Column("no."), Column("combination"), *heads, Column("source"))
    return without_columns(
        Table(columns, tuple(rows), caption), lambda place, _: own and columns[place].head == "source"
    )


def _factors(combination: Combination, case: str, pair: Sequence[Exact]) -> str:
    text = " or ".join(map(factor_text, pair))
    return (f"({text})" if case in combination.optional else text).replace("-", "−")


def published_words(stated: TrussFile) -> list[Block]:
    """Return edition and mark of a published table, its notes, the letters of the cases, and the rows left out."""
    choice = stated.published
    if choice is None:
        return []
    table = choice.published
    letters = "; ".join(f"{letter} is {listed(f'“{name}”' for name in names)}" for letter, names in choice.cases)
    items = [(table.name, f"{table.edition}; {table.mark}"), ("Letters", letters)]
    items += [("Note", note) for note in table.notes]
    if choice.own:
        told_own = ", ".join(f"{name} {factor_text(value)}" for name, value in choice.own)
        items.append(("In place of the table's", f"{told_own}: the user's own, not the published values"))
    left_out = "; ".join(f"{each.number}: {each.reason}" for each in choice.left_out())
    items += [("Rows left out", left_out)] if left_out else []
    return [Items(tuple((term, (Run(text),)) for term, text in items))]


# --- what each case gives ---------------------------------------------------------------------------------


def case_force_table(found: Envelope, names: Sequence[str], places: int) -> Table:
    """Return the force of each member under each case, factor 1, by both routes."""
    rows: list[Row] = []
    strong = []
    for name in names:
        first = Run(bar(name))
        for case in found.cases.values():
            value, numeric = case.exact[name], Decimals(float_text(case.numeric[name], places, case.bound))
            wrong = name in case.differing
            strong += [len(rows)] if wrong else []
            rows.append((first, Run(case.name), *_force(value, places), numeric, Run("differs" if wrong else "agrees")))
        for moving in found.moving.values():
            for word, extreme in zip(("largest", "least"), moving.extremes[name], strict=True):
                if not extreme.value:
                    continue
                wrong = name in moving.differing
                strong += [len(rows)] if wrong else []
                cells = _force(extreme.value, places)
                verdict = Run("line differs" if wrong else "line agrees")
                rows.append((first, Run(f"{moving.name}, {word}"), *cells, None, verdict))
    columns = (
        Column("member"),
        Column("case"),
        Column("exact", "right"),
        Column("decimal", "right"),
        Column("T/C", "centre"),
        Column("stiffness route", "right"),
        Column("verdict", "right"),
    )
    caption = f"Forces in {found.stated.truss.force} under each case with factor 1, from the equilibrium of all joints."
    if found.moving:
        caption += " Of a load that moves, where it is adverse: its influence line by both routes, see below."
    return Table(columns, tuple(rows), caption, tuple(strong))


def _force(value: Exact, places: int) -> Row:
    return in_a_row(value), Decimals(decimal_text(value, places)), Run(sense(value))


def superposition_table(found: Envelope, each: MemberEnvelope, which: Sense, places: int) -> Table:
    """Return how an extreme adds up: factor times case force, case by case."""
    choice = each.state(which)
    rows: list[Row] = []
    for case, factor in choice.factors:
        rows.append(_product(case, factor, found.cases[case].exact[each.member], places))
    for case, factor, extreme in choice.stands:
        rows.append(_product(f"{case}: {extreme.train}", factor, extreme.value, places))
    total = choice.value
    rows.append((Run("sum"), None, None, None, in_a_row(total), Decimals(decimal_text(total, places))))
    force = found.stated.truss.force
    columns = (
        Column("case"),
        Column("factor", "right"),
        Column(f"force exact, {force}", "right"),
        Column("decimal", "right"),
        Column("product exact", "right"),
        Column("decimal", "right"),
    )
    away = absent_words(found, choice)
    caption = f"{bar(each.member)}, {extreme_words(each, which)}: {choice.combination}.{away}"
    return Table(columns, tuple(rows), caption, totals=1)


def _product(case: str, factor: Exact, force: Exact, places: int) -> Row:
    product = factor * force
    return (
        Run(case),
        Run(factor_text(factor).replace("-", "−")),
        in_a_row(force),
        Decimals(decimal_text(force, places)),
        in_a_row(product),
        Decimals(decimal_text(product, places)),
    )


def absent_words(found: Envelope, choice: Choice) -> str:
    """Return which cases of a combination stay away in a state, or ''."""
    combination = next(each for each in found.combinations if each.name == choice.combination)
    there = {case for case, _ in choice.factors} | {case for case, *_ in choice.stands}
    away = [case for case, _ in combination.factors if case not in there]
    return f" {listed(away)} {'stay' if len(away) > 1 else 'stays'} away." if away else ""


def choice_words(choice: Choice) -> str:
    """Return a state as a sum: ``1.25 DC + 0.9 DW + 1.75 LL``."""
    parts = [(factor, case) for case, factor in choice.factors] + [(factor, case) for case, factor, _ in choice.stands]
    text = ""
    for factor, case in parts:
        minus = factor.sign() < 0
        sign = (" − " if minus else " + ") if text else ("−" if minus else "")
        text += f"{sign}{factor_text(abs(factor))} {case}"
    return text or "no load"


# --- the others do not govern -----------------------------------------------------------------------------


def rival_table(found: Envelope, names: Sequence[str], places: int, most: int | None = MOST_RIVALS) -> Table:
    """Return the largest and the least force of each combination, the governing one first, the nearest next.

    Parameters
    ----------
    found : Envelope
        The envelope.
    names : sequence of str
        Members.
    places : int
        Decimal places.
    most : int or None
        Combinations told for each member; None for all.
    """
    numbers = {each.name: number for number, each in enumerate(found.combinations, 1)}
    long = max(map(len, numbers)) > LONGEST_NAME

    def cells(choice: Choice) -> Row:
        name = f"({numbers[choice.combination]})" if long else choice.combination
        return Run(name), Decimals(decimal_text(choice.value, places)), Run(sense(choice.value))

    rows: list[Row] = []
    for name in names:
        each = found.members[name]
        sides = [(each.state(which), *each.runners_up(which)) for which in ("max", "min")]
        for place, (largest, least) in enumerate(zip(*sides, strict=True)):
            if most is not None and place >= most:
                break
            first = Run(bar(name))
            word = Run("governs" if place == 0 else str(place + 1))
            rows.append((first, word, *cells(largest), *cells(least)))
    force = found.stated.truss.force
    columns = (
        Column("member"),
        Column("order"),
        Column("largest under"),
        Column(force, "right"),
        Column("T/C", "centre"),
        Column("least under"),
        Column(force, "right"),
        Column("T/C", "centre"),
    )
    count = counted(len(found.combinations), "combination")
    caption = f"Largest and least of each of {count}, tension positive, the nearest to the governing one first."
    caption += " Numbers as under Combinations." if long else ""
    if most is not None and len(found.combinations) > most:
        caption += f" The first {most}; all stand in the appendix “{ALL_COMBINATIONS}”."
    return Table(columns, tuple(rows), caption)


ALL_COMBINATIONS: Final = "All combinations"


def reaction_table(found: Envelope, places: int) -> Table:
    """Return the largest and the least of every reaction that statics decides."""
    rows: list[Row] = []
    for name, each in found.reactions.items():
        largest, least = each.max, each.min
        cells = [
            part
            for choice in (largest, least)
            for part in (Decimals(decimal_text(choice.value, places)), Run(choice.combination))
        ]
        rows.append((Run(bar(name)), *cells))
    force = found.stated.truss.force
    columns = (
        Column("reaction"),
        Column(f"largest, {force}", "right"),
        Column("under"),
        Column(f"least, {force}", "right"),
        Column("under"),
    )
    caption = "Forces on the truss along their written directions, by superposition; not derived step by step here."
    return Table(columns, tuple(rows), caption)


__all__ = [
    "ALL_COMBINATIONS",
    "EXTREMES",
    "MOST_RIVALS",
    "States",
    "absent_words",
    "case_force_table",
    "choice_words",
    "combination_blocks",
    "extreme_words",
    "reaction_table",
    "rival_table",
    "superposition_table",
]
