"""A step of the derivation as blocks: heading, why this cut, free body, labelled lines, result, check.

The lines are written from the step's own terms, in their order. Each written line is proven before it is
handed on: with the digits printed it sums to what stands on its right, or the rest is told.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.errors import TrusscalcError
from trusscalc.exact import ONE, ZERO, Exact, rational, sqrt, symbol
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
    Name,
    Paragraph,
    Picture,
    Power,
    Product,
    Run,
    Table,
    Value,
)
from trusscalc.sheet.marks import Figure
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
)
from trusscalc.sheet.words import Symbols, Teller, about_words, bar, found_in, letters_of, listed, sum_label, symbols_of
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.steps import Equation, Step, Term, points_backwards

MOST_LOADS: Final = 8
"""Loads on one free body beyond which they are collected to their resultant."""
FEWEST_ALIKE: Final = 3
"""Equal loads from which on they are written once, with the sum of their arms."""

RESULT_COLUMNS: Final = (
    Column("exact", "right"),
    Column("decimal", "right"),
    Column("T/C", "centre"),
    Column("stiffness route", "right"),
    Column("difference", "right"),
    Column("verdict", "right"),
)


class WrittenLineError(TrusscalcError, ArithmeticError):
    """A written line that does not hold: an error in this program, never in the input."""


@dataclass(frozen=True, slots=True)
class Entry:
    """A term on its way to paper: sign apart, so that coefficient and amount are written as they stand.

    Attributes
    ----------
    coefficient : Exact
        Signed.
    symbol : Name
        What the force is called.
    amount : Exact
        Its value.
    plain : bool
        A load: equal ones may be written together.
    """

    coefficient: Exact
    symbol: Name
    amount: Exact
    plain: bool = False


@dataclass(frozen=True, slots=True)
class Writer:
    """Writes the steps of one check.

    Attributes
    ----------
    check : MemberCheck
        What is written about.
    teller : Teller
        Words.
    symbols : Symbols
        What forces are called.
    places : int
        Decimal places.
    """

    check: MemberCheck
    teller: Teller
    symbols: Symbols
    places: int

    # --- the step as a whole ------------------------------------------------------------------------------

    def derivation(self, step: Step, figures: Sequence[Figure] = ()) -> Derivation:
        """Return a step as a block."""
        lines, notes, tables = self._lines(step)
        check, check_notes = self._check(step)
        tables = [*tables, *self._numbered(step)]
        return Derivation(
            Heading(3, self.teller.title(step), str(step.number), self._right(step)),
            Paragraph((Run(self.teller.reason(step)),)),
            Picture(tuple(figures)) if figures else None,
            Lines(tuple(lines)),
            tuple(tables),
            self._result(step),
            Lines(tuple(check)) if check else None,
            tuple(Paragraph((Run(text),), "note") if isinstance(text, str) else text for text in notes + check_notes),
        )

    def _right(self, step: Step) -> str:
        return "   ".join(self._told(step, name) for name in found_in(step))

    def _told(self, step: Step, name: str) -> str:
        if name in step.partial:
            return f"in terms of {listed(set_of_carried(self.check, step.partial[name]))}"
        value = self.check.case.value(step.results[name])
        words = [decimal_text(value, self.places).replace("-", "−"), self.check.truss.force]
        return " ".join(words + ([] if self.teller.is_link(name) else [sense(value)]))

    def forces(self, name: str) -> ForceCheck | None:
        """Return the verdict on a force, None for one that was only met on the way."""
        return self.check.members.get(name) or self.check.reactions.get(name)

    # --- lines --------------------------------------------------------------------------------------------

    def _lines(self, step: Step) -> tuple[list[Labelled], list[str | Paragraph], list[Table]]:
        lines: list[Labelled] = []
        notes: list[str | Paragraph] = []
        tables: list[Table] = []
        for equation in step.equations:
            entries, table = self._entries(equation, () if step.kind == "close" else found_in(step))
            tables += [table] if table else []
            label = sum_label(equation, self.teller.body(equation.cut))
            lines.append(Labelled(label, formula(self._in_symbols(equation, entries), _number(Value(ZERO)))))
            if any(not entry.symbol.sought for entry in entries):
                written, sought = self._with_values(equation, entries)
                lines.append(Labelled("with values", formula((*written, *sought), _number(Value(ZERO)))))
        hence, hence_notes = self._hence(step)
        notes += hence_notes
        written = {line.formula for line in lines}
        return lines + [line for line in hence if line.formula not in written], notes, tables

    def _entries(self, equation: Equation, solves: Sequence[str]) -> tuple[list[Entry], Table | None]:
        """Return an equation's terms as they are written, many loads collected to their resultant."""
        loads = [term for term in equation.terms if term.kind == "load"]
        table = None
        entries = []
        for term in equation.terms:
            if term.kind == "load" and len(loads) > MOST_LOADS:
                if table is None:
                    collected, table = self._resultant(equation, loads)
                    entries += collected
                continue
            sought = term.kind != "load" and term.name in solves
            symbol = self.symbols.of(term, sought=sought)
            entries.append(Entry(term.coefficient, symbol, term.force, plain=term.kind == "load"))
        return entries, table

    def _in_symbols(self, equation: Equation, entries: Sequence[Entry]) -> tuple[Product, ...]:
        """Return the sum in symbols."""
        return tuple(self._product(equation, entry, entry.symbol) for entry in entries)

    def _with_values(
        self, equation: Equation, entries: Sequence[Entry]
    ) -> tuple[tuple[Product, ...], tuple[Product, ...]]:
        """Return the known terms with their values, and the sought ones in symbols."""
        known = [entry for entry in entries if not entry.symbol.sought]
        written = self._valued(equation, known)
        sought = tuple(self._product(equation, entry, entry.symbol) for entry in entries if entry.symbol.sought)
        return written, sought

    def _valued(self, equation: Equation, entries: Sequence[Entry]) -> tuple[Product, ...]:
        """Return terms with their values, runs of equal loads written once."""
        written: list[Product] = []
        place = 0
        while place < len(entries):
            alike = _alike(entries, place)
            first = entries[place]
            if len(alike) < FEWEST_ALIKE:
                written.append(self._product(equation, first, self._number_of(first.amount)))
                place += 1
                continue
            written.append(self._together(equation, alike))
            place += len(alike)
        return tuple(written)

    def _number_of(self, value: Exact) -> Value | Decimals:
        return printed(value, self.check.case)

    def _product(self, equation: Equation, entry: Entry, force: Name | Value | Decimals) -> Product:
        size = abs(entry.coefficient)
        negative = entry.coefficient.sign() < 0
        if size == ONE:
            return Product(negative, (force,))
        return Product(negative, (self._coefficient(equation, size), force))

    def _coefficient(self, equation: Equation, size: Exact) -> Value | Decimals:
        return printed(size, self.check.case, "arm" if equation.about.sum == "moment" else "cosine")

    def _together(self, equation: Equation, alike: Sequence[Entry]) -> Product:
        """Return equal loads as one product: sum of arms, or their count, times the load."""
        negative = alike[0].coefficient.sign() < 0
        amount = self._number_of(alike[0].amount)
        if all(entry.coefficient == alike[0].coefficient for entry in alike):
            factors = [Value(rational(len(alike)))]
            size = abs(alike[0].coefficient)
            if size != ONE:
                return Product(negative, (*factors, self._coefficient(equation, size), amount))
            return Product(negative, (*factors, amount))
        arms = tuple(Product(False, (self._coefficient(equation, abs(entry.coefficient)),)) for entry in alike)
        return Product(negative, (Bracket(arms), amount))

    # --- hence --------------------------------------------------------------------------------------------

    def _hence(self, step: Step) -> tuple[list[Labelled], list[str | Paragraph]]:
        if step.kind == "close":
            return self._hence_closed(step), []
        if len(step.equations) == 1:
            return self._hence_one(step.equations[0], found_in(step)[0])
        if len(step.equations) == 2:  # noqa: PLR2004 - a pair
            return self._hence_two(step), []
        lines = [
            Labelled(
                f"hence, from the {len(step.equations)} equations together" if place == 0 else "",
                formula((Product(False, (self._sought(step, name),)),), _number(self._number_of(found(step, name)))),
            )
            for place, name in enumerate(found_in(step))
        ]
        return lines, []

    def _hence_closed(self, step: Step) -> list[Labelled]:
        """Collect each equation in the carried forces, then tell what they are."""
        letters = {name: letter for earlier in self.check.steps for name, letter in earlier.carries.items()}
        zeros = {letters[name]: ZERO for name in step.solves}
        lines = []
        for place, equation in enumerate(step.equations):
            factor = sqrt(equation.terms[0].scale, proven=False) / equation.terms[0].scale
            total = equation.residual * factor
            constant = total.substitute(zeros)
            left = []
            for name in step.solves:
                size = total.substitute({**zeros, letters[name]: ONE}) - constant
                if size:
                    written = self._product(equation, Entry(size, Name("", ""), ZERO), Value(symbol(letters[name])))
                    left.append(written)
            label = "hence, collected" if place == 0 else ""
            lines.append(Labelled(label, formula(tuple(left), _number(self._number_of(-constant)))))
        label = "hence" if len(step.solves) == 1 else f"hence, from the {len(step.equations)} equations together"
        for name in step.solves:
            own = (Product(False, (self._sought(step, name),)),)
            lines.append(Labelled(label, formula(own, _number(self._number_of(step.results[name])))))
            label = ""
        return lines

    def _hence_one(self, equation: Equation, name: str) -> tuple[list[Labelled], list[str | Paragraph]]:
        entries, _ = self._entries(equation, (name,))
        own = next(entry for entry in entries if entry.symbol.sought)
        amount = _minus_rest(equation, {name})
        _must_hold(amount == own.coefficient * own.amount, name)
        written, _ = self._with_values(equation, entries)
        return [self._solved_line("hence", equation, own.coefficient, own.symbol, amount)], self._pencil(written, amount)

    def _pencil(self, written: tuple[Product, ...], amount: Exact) -> list[str | Paragraph]:
        """Return the note on what a pencil finds where rounded digits stand in a line."""
        if not holds_decimals(written):
            return []
        left = self.check.case.value(amount) + pencil_sum(written, self.check.case)
        content: list[Inline] = [
            Run(f"Numbers too long to be read are printed with {DIGITS} significant digits; the calculation is exact. ")
        ]
        if left:
            content += [Run("With the digits printed, the known terms miss their exact sum by "), _size(left), Run(".")]
        else:
            content.append(Run("With the digits printed the known terms give their exact sum."))
        return [Paragraph(tuple(content), "note")]

    def _solved_line(
        self, label: str, equation: Equation, coefficient: Exact, symbol: Name, amount: Exact
    ) -> Labelled:
        """Return ``coefficient times unknown = number``, the coefficient made positive."""
        if coefficient.sign() < 0:
            coefficient, amount = -coefficient, -amount
        left = (self._product(equation, Entry(coefficient, symbol, ZERO), symbol),)
        return Labelled(label, formula(left, _number(self._number_of(amount))))

    def _sought(self, step: Step, name: str) -> Name:
        for equation in step.equations:
            for term in equation.terms:
                if term.name == name and term.kind != "load":
                    return self.symbols.of(term, sought=True)
        message = f"{name} stands in no equation of step {step.number}"
        raise WrittenLineError(message)

    def _hence_two(self, step: Step) -> list[Labelled]:
        """Eliminate the unknown that leaves the first of ``solves``, then put that into one equation."""
        first, second = found_in(step)
        rows = [
            ({t.name: t for t in e.terms if t.kind != "load"}, _minus_rest(e, (first, second)), e)
            for e in step.equations
        ]
        coefficients = [[_coefficient_of(terms, name) for name in (first, second)] for terms, _, _ in rows]
        (a1, b1), (a2, b2) = coefficients
        r1, r2 = rows[0][1], rows[1][1]
        equation = rows[1][2]
        if not b1:  # the first equation already holds only the first unknown
            alone, amount, label, equation = a1, r1, "hence, from the first equation", rows[0][2]
        elif not b2:
            alone, amount, label = a2, r2, "hence, from the second equation"
        else:
            alone, amount, label = a2 - b2 * a1 / b1, r2 - b2 * r1 / b1, "hence, with the first equation"
        first_force = found(step, first)
        _must_hold(alone * first_force == amount, first)
        lines = [self._solved_line(label, equation, alone, self._sought(step, first), amount)]
        place = 0 if b1 else 1
        b, a, r = ((b1, a1, r1), (b2, a2, r2))[place]
        rest = r - a * first_force
        _must_hold(b * found(step, second) == rest, second)
        which = ("first", "second")[place]
        label = f"and from the {which} equation"
        return [*lines, self._solved_line(label, rows[place][2], b, self._sought(step, second), rest)]

    # --- resultant ----------------------------------------------------------------------------------------

    def _resultant(self, equation: Equation, loads: Sequence[Term]) -> tuple[list[Entry], Table]:
        """Return the loads of a body as one force for each axis, and the table behind them."""
        moment = equation.about.sum == "moment"
        entries = []
        rows: list[tuple[Inline | None, ...]] = []
        for axis in "xy":
            own = [term for term in loads if term.axis == axis]
            if not own:
                continue
            signs = [self._along_axis(term) for term in own]
            force = sum((sign * term.force for sign, term in zip(signs, own, strict=True)), start=ZERO)
            product = sum((term.coefficient * term.force for term in own), start=ZERO)
            for sign, term in zip(signs, own, strict=True):
                arm, added = sign * term.coefficient, term.coefficient * term.force
                rows.append((Run(f"{term.name}, {axis}"), *self._cells(sign * term.force, arm, added)))
            if not force or (product / force).symbols:  # a couple, or an arm that depends on symbols
                entries.append(Entry(ONE, Name("M", f"P,{axis}"), product))
                rows.append((Run(f"sum, {axis}"), *self._cells(force, None, product)))
                continue
            rows.append((Run(f"sum, {axis}"), *self._cells(force, product / force, product)))
            backwards = points_backwards(force)
            size = -force if backwards else force
            entries.append(Entry(product / size, Name("ΣP", axis), size))
        columns = (
            Column("load at"),
            Column("force along the axis", "right"),
            Column("arm" if moment else "cosine", "right"),
            Column("adds to the sum", "right"),
        )
        where = self.teller.body(equation.cut)
        caption = (
            f"Loads on the {where} collected to their resultant, for {about_words(equation.about)}. "
            f"{'The arm of a sum is the arm at which it acts.' if moment else ''}"
        )
        return entries, Table(columns, tuple(rows), caption.strip())

    def _along_axis(self, term: Term) -> int:
        """Return 1 when a load acts along its axis, -1 when against it."""
        load = self.teller.structure.loads[term.name]["xy".index(term.axis)]
        return -1 if points_backwards(load) else 1

    def _cells(self, force: Exact, arm: Exact | None, added: Exact) -> tuple[Inline | None, ...]:
        return self._number_of(force), None if arm is None else self._number_of(arm), self._number_of(added)

    # --- result and check ---------------------------------------------------------------------------------

    def _result(self, step: Step) -> Table:
        rows, strong = [], []
        told = {**step.results, **step.partial}
        if step.kind == "close":
            told |= self._now_decided(step)
        for place, (name, force) in enumerate(told.items()):
            judged = self.forces(name)
            if name in step.partial:
                rows.append((Run(bar(name)), self._number_of(force), *[None] * 5))
                continue
            if judged is not None and judged.verdict != "agrees":
                strong.append(place)
            rows.append((Run(bar(name)), *self.result_cells(name, force, judged)))
        links = all(self.teller.is_link(name) for name in told)
        caption = ""
        if any(self.forces(name) is None for name in told if name not in step.partial):
            caption = (
                "Without a stiffness value: found on the way to a member asked for; the cross-check closes its joints."
            )
        if step.kind == "close" and len(told) > len(step.solves):
            caption = f"The forces told in terms of what was carried, with its value put in. {caption}".strip()
        columns = (Column("reaction" if links else "member"), *RESULT_COLUMNS)
        if links:
            columns, rows = without_sense(columns, rows)
        return Table(columns, tuple(rows), caption, tuple(strong), role="result")

    def _now_decided(self, step: Step) -> dict[str, Exact]:
        """Return the forces that were told in terms of what a closing step decides."""
        letters = {name: letter for earlier in self.check.steps for name, letter in earlier.carries.items()}
        values = {letters[name]: force for name, force in step.results.items()}
        return {
            name: force.substitute(values)
            for earlier in self.check.steps
            if earlier.number < step.number
            for name, force in earlier.partial.items()
            if set(force.symbols) & set(values)
        }

    def result_cells(self, name: str, exact: Exact | None, judged: ForceCheck | None) -> tuple[Inline | None, ...]:
        """Return exact, decimal, sense, stiffness value, difference and verdict of a force."""
        check = self.check
        slack = check.tolerance * check.largest_force
        cells: list[Inline | None] = [None, None, None]
        if exact is not None:
            value = check.case.value(exact)
            letter = None if self.teller.is_link(name) else Run(sense(value))
            cells = [self._number_of(exact), Decimals(decimal_text(value, self.places)), letter]
        if judged is None:
            return (*cells, None, None, None)
        numeric = None if judged.stiffness is None else Decimals(float_text(judged.stiffness, self.places, slack))
        apart = None if judged.difference is None else difference(judged.difference, slack, self.places)
        return (*cells, numeric, apart, Run(judged.verdict))

    def _check(self, step: Step) -> tuple[list[Labelled], list[str | Paragraph]]:
        equation = step.check
        if equation is None:
            where = "the sums under Reactions" if step.kind == "whole" else "the cross-check"
            return [], [f"No other equation of this free body holds known forces alone; see {where}."]
        entries, _ = self._entries(equation, ())
        written = self._valued(equation, entries)
        where = self.teller.body(equation.cut)
        label = f"Check, not used before: {where}, {about_words(equation.about)}"
        values = tuple(self._evaluated(product) for product in written)
        total = sum((entry.coefficient * entry.amount for entry in entries), start=ZERO)
        _must_hold(total == ZERO, label)
        lines = [
            Labelled(label, formula(written, ())),
            Labelled("", formula(values, _number(Value(ZERO)))),
        ]
        notes: list[str | Paragraph] = []
        if holds_decimals(values):
            left = pencil_sum(values, self.check.case)
            content: tuple[Inline, ...] = (Run("With the digits printed the check leaves "), _size(left), Run("; exactly it is 0."))
            notes = [Paragraph(content, "note")] if left else []
        return lines, notes

    def _evaluated(self, product: Product) -> Product:
        """Return a product of numbers multiplied out, its sign in front where it has one."""
        value = ONE
        for factor in product.factors:
            match factor:
                case Value(number):
                    value = value * number
                case Bracket(terms):
                    value = value * pencil_sum(terms, self.check.case)
                case Decimals():
                    value = value * pencil_sum((Product(False, (factor,)),), self.check.case)
        negative = product.negative
        if points_backwards(value):
            negative, value = not negative, -value
        return Product(negative, (self._number_of(value),))

    def _numbered(self, step: Step) -> list[Table]:
        """Return which force a number stands for, where names do not fit a subscript."""
        equations = [*step.equations, *([step.check] if step.check else [])]
        used = dict.fromkeys(term.name for equation in equations for term in equation.terms)
        rows = tuple(
            (Run(f"({self.symbols.numbers[name]})"), Run(bar(name))) for name in used if name in self.symbols.numbers
        )
        columns = (Column("number"), Column("member, reaction or joint"))
        return [Table(columns, rows, "Names that do not fit a subscript.")] if rows else []


def writer_of(check: MemberCheck, places: int = 3) -> Writer:
    """Return the writer of a check's steps."""
    structure = structure_of(check.truss, check.case)
    solved_in = {name: step.number for step in check.steps for name in found_in(step)}
    groups: Mapping[str, str] = {member.name: member.group for member in check.truss.members}
    teller = Teller(structure, letters_of(structure, check.steps), solved_in, groups)
    return Writer(check, teller, symbols_of(structure), places)


def without_sense(
    columns: tuple[Column, ...], rows: Sequence[tuple[Inline | None, ...]]
) -> tuple[tuple[Column, ...], list[tuple[Inline | None, ...]]]:
    """Return a table of reactions without the column T/C, which is for members."""
    place = next(n for n, column in enumerate(columns) if column.head == "T/C")
    return (*columns[:place], *columns[place + 1 :]), [(*row[:place], *row[place + 1 :]) for row in rows]


def found(step: Step, name: str) -> Exact:
    """Return the force a step finds, in terms of carried forces where it is."""
    return step.results[name] if name in step.results else step.partial[name]


def set_of_carried(check: MemberCheck, value: Exact) -> list[str]:
    """Return the carried forces that stand in a value."""
    letters = {letter for step in check.steps for letter in step.carries.values()}
    return [name for name in value.symbols if name in letters]


def sense(value: Exact) -> str:
    """Return T, C or 0 for a force without symbols."""
    return ("0", "T", "C")[value.sign()]


def _number(number: Value | Decimals) -> tuple[Product, ...]:
    """Return a number as the right side of a line."""
    match number:
        case Value(value, role) if points_backwards(value):
            return (Product(True, (Value(-value, role),)),)
        case Decimals(text) if text.startswith("-"):
            return (Product(True, (Decimals(text[1:]),)),)
    return (Product(False, (number,)),)


def _alike(entries: Sequence[Entry], place: int) -> Sequence[Entry]:
    """Return the run of loads from a place on that are equal and add with the same sign."""
    first = entries[place]
    end = place
    while (
        end < len(entries)
        and entries[end].plain
        and entries[end].amount == first.amount
        and entries[end].coefficient.sign() == first.coefficient.sign()
    ):
        end += 1
    return entries[place:end]


def _minus_rest(equation: Equation, unknown: Sequence[str] | set[str]) -> Exact:
    """Return what stands on the right when the known terms go there, in the scale the equation is written in."""
    total = ZERO
    scale = ONE
    for term in equation.terms:
        scale = term.scale
        if term.kind == "load" or term.name not in unknown:
            total = total - term.product
    return total / scale * sqrt(scale, proven=False)


def _coefficient_of(terms: Mapping[str, Term], name: str) -> Exact:
    return terms[name].coefficient if name in terms else ZERO


def _size(left: Exact) -> Power:
    return scientific(abs(float(left)), 1)


def _must_hold(holds: bool, what: str) -> None:
    if not holds:
        message = f"a written line for {what} does not hold"
        raise WrittenLineError(message)


__all__ = ["RESULT_COLUMNS", "Writer", "WrittenLineError", "sense", "without_sense", "writer_of"]
