"""A step of the derivation as a block: heading, why this cut, free body, labelled lines, result, check."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.exact import ZERO, Exact
from trusscalc.loads import LoadCase
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.sheet.blocks import (
    Bracket,
    Column,
    Decimals,
    Derivation,
    Heading,
    Inline,
    Labelled,
    Lines,
    Paragraph,
    Picture,
    Product,
    Run,
    Table,
    Value,
)
from trusscalc.sheet.equations import EquationWriter, plus
from trusscalc.sheet.hence import hence, must_hold
from trusscalc.sheet.marks import Figure
from trusscalc.sheet.reasons import Teller
from trusscalc.sheet.values import (
    DIGITS,
    decimal_text,
    difference,
    float_text,
    formula,
    holds_decimals,
    pencil_sum,
    printed,
    scientific,
    told,
)
from trusscalc.sheet.words import about_words, bar, found_in, letters_of, listed, sum_label, symbols_of
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.steps import Step

RESULT_COLUMNS: Final = (
    Column("exact", "right"),
    Column("decimal", "right"),
    Column("T/C", "centre"),
    Column("stiffness route", "right"),
    Column("difference", "right"),
    Column("verdict", "right"),
)
NOTHING: Final = (plus(Value(ZERO)),)
ON_THE_WAY: Final = (
    "Without a stiffness value: found on the way to a member asked for; the cross-check closes its joints."
)


@dataclass(frozen=True, slots=True)
class Writer:
    """Writes the steps of one check.

    Attributes
    ----------
    check : MemberCheck
        What is written about.
    equations : EquationWriter
        Equations on paper.
    places : int
        Decimal places.
    sums : str
        What the sums of loads and reactions are called.
    """

    check: MemberCheck
    equations: EquationWriter
    places: int
    sums: str = "the sums under Reactions"

    @property
    def teller(self) -> Teller:
        """What tells of steps in words."""
        return self.equations.teller

    def derivation(self, step: Step, figures: Sequence[Figure] = (), *, drawn_with: int = 0) -> Derivation:
        """Return a step as a block; ``drawn_with`` is the step beside which its free body stands, if not this one."""
        lines, notes, tables = self._lines(step)
        check, check_notes = self._check(step)
        return Derivation(
            heading=Heading(3, self.teller.title(step), str(step.number), self._right(step)),
            reason=Paragraph((Run(self.teller.reason(step) + (f" Free body: step {drawn_with}." * bool(drawn_with))),)),
            picture=Picture(tuple(figures)) if figures else None,
            lines=Lines(tuple(lines)),
            tables=(*tables, *self._numbered(step)),
            result=self._result(step),
            check=Lines(tuple(check)) if check else None,
            notes=self._notes(notes + check_notes),
        )

    def _notes(self, notes: Sequence[tuple[Inline, ...]]) -> tuple[Paragraph, ...]:
        """Return notes as paragraphs; in brief they share one."""
        if self.equations.brief and notes:
            joined = [piece for content in notes for piece in (*content, Run(" "))]
            return (Paragraph(tuple(joined[:-1]), "note"),)
        return tuple(Paragraph(content, "note") for content in notes)

    def _right(self, step: Step) -> str:
        return ", ".join(self._told(step, name) for name in found_in(step))

    def _told(self, step: Step, name: str) -> str:
        if name in step.partial:
            letters = set(self.teller.carried.values())
            return f"in terms of {listed(letter for letter in step.partial[name].symbols if letter in letters)}"
        value = self.check.case.value(step.results[name])
        words = [decimal_text(value, self.places).replace("-", "−"), self.check.truss.force]
        return " ".join(words + ([] if self.teller.is_link(name) else [sense(value)]))

    # --- lines --------------------------------------------------------------------------------------------

    def _lines(self, step: Step) -> tuple[list[Labelled], list[tuple[Inline, ...]], list[Table]]:
        lines: list[Labelled] = []
        notes: list[tuple[Inline, ...]] = []
        tables: list[Table] = []
        for equation in step.equations:
            entries, table = self.equations.entries(equation, () if step.kind == "close" else found_in(step))
            tables += [table] if table else []
            label = sum_label(equation, self.teller.body(equation.cut))
            lines.append(Labelled(label, formula(self.equations.in_symbols(equation, entries), NOTHING)))
            known = [entry for entry in entries if not entry.symbol.sought]
            if not known:
                continue
            written = self.equations.with_values(equation, known)
            sought = self.equations.in_symbols(equation, [entry for entry in entries if entry.symbol.sought])
            products = tuple(term.product for term in written)
            lines.append(Labelled("with values", formula((*products, *sought), NOTHING)))
            notes += self._pencil(products, sum((term.value for term in written), start=ZERO))
        told = {line.formula for line in lines}
        return lines + [line for line in hence(self.equations, step) if line.formula not in told], notes, tables

    def _pencil(self, written: tuple[Product, ...], total: Exact) -> list[tuple[Inline, ...]]:
        """Return the note on what a pencil finds where rounded digits stand in a line."""
        if not holds_decimals(written):
            return []
        start = f"Long numbers are printed with {DIGITS} significant digits."
        at_values = self.check.case.value(total)
        if at_values.symbols:
            return [(Run(start),)]
        left = pencil_sum(written, self.check.case) - pencil_sum((plus(Value(at_values)),), self.check.case)
        if not left:
            return [(Run(start),)]
        return [
            (
                Run(f"{start} With these the known terms miss their exact sum by "),
                scientific(left, 1),
                Run("."),
            )
        ]

    def _check(self, step: Step) -> tuple[list[Labelled], list[tuple[Inline, ...]]]:
        """Return the equation not used before, with all values; none while a force is only carried."""
        equation = step.check
        if step.partial:
            return [], []
        if equation is None:
            where = self.sums if step.kind == "whole" else "the cross-check"
            return [], [(Run(f"No other equation of this free body holds known forces alone; see {where}."),)]
        must_hold(not equation.residual, f"the check of step {step.number}")
        entries, _ = self.equations.entries(equation)
        written = self.equations.with_values(equation, entries)
        products = tuple(term.product for term in written)
        values = tuple(self.equations.evaluated(term) for term in written)
        label = f"Check, not used before: {self.teller.body(equation.cut)}, {about_words(equation.about)}"
        lines = [Labelled(label, formula(products, ()))] if any(map(_is_product, products)) else []
        lines.append(Labelled("" if lines else label, formula(values, NOTHING)))
        return lines, self._check_note(values)

    def _check_note(self, values: tuple[Product, ...]) -> list[tuple[Inline, ...]]:
        if not holds_decimals(values):
            return []
        left = pencil_sum(values, self.check.case)
        if not left:
            return []
        return [(Run("With the digits printed, the check leaves "), scientific(left, 1), Run("; exactly it is 0."))]

    # --- results ------------------------------------------------------------------------------------------

    def forces(self, name: str) -> ForceCheck | None:
        """Return the verdict on a force, None for one that was only met on the way."""
        return self.check.members.get(name) or self.check.reactions.get(name)

    def _result(self, step: Step) -> Table:
        if step.partial:
            rows = tuple((Run(bar(name)), printed(force, self.check.case)) for name, force in step.partial.items())
            return Table((Column("member"), Column("in terms of what is carried", "right")), rows, role="result")
        told = {**step.results, **self._now_decided(step)}
        judged = {name: self.forces(name) for name in told}
        cells = [(Run(bar(name)), *self.result_cells(name, force, judged[name])) for name, force in told.items()]
        strong = tuple(n for n, found in enumerate(judged.values()) if found is not None and found.verdict != "agrees")
        caption = (
            "Forces told in terms of what was carried, now with its value put in. "
            if len(told) > len(step.results)
            else ""
        )
        caption += ON_THE_WAY if None in judged.values() else ""
        links = all(self.teller.is_link(name) for name in told)
        columns: tuple[Column, ...] = (Column("reaction" if links else "member"), *RESULT_COLUMNS)
        if links:
            columns, cells = without_sense(columns, cells)
        return Table(columns, tuple(cells), caption.strip(), strong, role="result")

    def _now_decided(self, step: Step) -> dict[str, Exact]:
        """Return the forces that were told in terms of what a closing step decides."""
        if step.kind != "close":
            return {}
        values = {self.teller.carried[name]: force for name, force in step.results.items()}
        return {
            name: force.substitute(values)
            for earlier in self.check.steps
            for name, force in earlier.partial.items()
            if earlier.number < step.number and self.teller.solved_in[name] == step.number
        }

    def result_cells(self, name: str, exact: Exact | None, judged: ForceCheck | None) -> tuple[Inline | None, ...]:
        """Return exact, decimal, sense, stiffness value, difference and verdict of a force."""
        check = self.check
        slack = check.tolerance * check.largest_force
        cells: list[Inline | None] = [None, None, None]
        if exact is not None:
            value = check.case.value(exact)
            letter = None if self.teller.is_link(name) else Run(sense(value))
            cells = [told(exact, check.case), Decimals(decimal_text(value, self.places)), letter]
        if judged is None:
            return (*cells, None, None, None)
        numeric = None if judged.stiffness is None else Decimals(float_text(judged.stiffness, self.places, slack))
        apart = None if judged.difference is None else difference(judged.difference, slack, self.places)
        return (*cells, numeric, apart, Run(judged.verdict))

    def _numbered(self, step: Step) -> list[Table]:
        """Return which force a number stands for, where names do not fit a subscript."""
        loaded = self.teller.structure.loads
        drawn = {
            name
            for equation in step.equations
            for name in (*equation.cut.bars, *(joint for joint in equation.cut.kept if joint in loaded))
        }
        numbers = self.equations.symbols.numbers
        rows = tuple((Run(f"({number})"), Run(bar(name))) for name, number in numbers.items() if name in drawn)
        columns = (Column("number"), Column("member, reaction or joint"))
        return [Table(columns, rows, "Names that do not fit a subscript.")] if rows else []


def writer_of(
    check: MemberCheck, places: int = 3, *, brief: bool = False, by_case: tuple[tuple[str, LoadCase], ...] = ()
) -> Writer:
    """Return the writer of a check's steps; ``brief`` and ``by_case`` as in ``EquationWriter``."""
    structure = structure_of(check.truss, check.case)
    groups = {member.name: member.group for member in check.truss.members}
    teller = Teller(structure, letters_of(structure, check.steps), *_sources(check), groups)
    return Writer(
        check, EquationWriter(check.case, teller, symbols_of(structure), brief=brief, by_case=by_case), places
    )


def tension_of(check: MemberCheck, name: str) -> Exact | None:
    """Return t = N / L of a force as a step found it, None when no step did."""
    for step in check.steps:
        for equation in step.equations:
            for term in equation.terms:
                if term.name == name and term.kind != "load" and name in step.results and step.kind != "close":
                    return term.tension
    return None


def without_sense(
    columns: tuple[Column, ...], rows: Sequence[tuple[Inline | None, ...]]
) -> tuple[tuple[Column, ...], list[tuple[Inline | None, ...]]]:
    """Return a table of reactions without the column T/C, which is for members."""
    place = next(n for n, column in enumerate(columns) if column.head == "T/C")
    return (*columns[:place], *columns[place + 1 :]), [(*row[:place], *row[place + 1 :]) for row in rows]


def sense(value: Exact) -> str:
    """Return T, C or 0 for a force without symbols."""
    return ("0", "T", "C")[value.sign()]


def _is_product(product: Product) -> bool:
    return len(product.factors) > 1 or isinstance(product.factors[0], Bracket)


def _sources(check: MemberCheck) -> tuple[Mapping[str, int], Mapping[str, int], Mapping[str, str]]:
    """Return the step from which each force is known, the step it was told in, and the letters carried."""
    carried = {name: letter for step in check.steps for name, letter in step.carries.items()}
    told_in = {name: step.number for step in check.steps for name in step.solves_in}
    solved_in = dict.fromkeys(told_in, check.steps[-1].number + 1 if check.steps else 1)
    waiting: dict[str, set[str]] = {}
    for step in check.steps:
        solved_in |= dict.fromkeys(step.solves, step.number)
        waiting |= {name: set(force.symbols) & set(carried.values()) for name, force in step.partial.items()}
        if step.kind == "close":
            decided = {carried[name] for name in step.solves}
            solved_in |= {name: step.number for name, letters in waiting.items() if letters and letters <= decided}
            waiting = {name: letters - decided for name, letters in waiting.items()}
    return solved_in, told_in, carried


__all__ = ["RESULT_COLUMNS", "Writer", "sense", "tension_of", "without_sense", "writer_of"]
