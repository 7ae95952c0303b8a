"""Equations on paper: each term with its sign, coefficient and force, in symbols and with values.

The lines follow the step's own terms in their order. Products and sums are formed in the number field, as
lever times tension coefficient; the lengths, which may be nested roots, enter only what is printed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.exact import ONE, ZERO, Exact, rational
from trusscalc.loads import LoadCase
from trusscalc.roots import sqrt
from trusscalc.sheet.blocks import Bracket, Column, Decimals, Inline, Name, Product, Run, Table, Value
from trusscalc.sheet.reasons import Teller
from trusscalc.sheet.values import Number, multiplied, printed
from trusscalc.sheet.words import Symbols, about_words
from trusscalc.statics.steps import Equation, Term

MOST_LOADS: Final = 8
"""Loads on one free body beyond which they are collected to their resultant."""
FEWEST_ALIKE: Final = 3
"""Equal loads from which on they are written once, with the sum of their arms."""


@dataclass(frozen=True, slots=True)
class Entry:
    """A term on its way to paper.

    Attributes
    ----------
    coefficient : Exact
        Signed arm or cosine.
    symbol : Name
        What the force is called.
    amount : Exact
        The force.
    product : Exact
        Coefficient times amount, formed in the field.
    is_load : bool
        Equal loads may be written together.
    """

    coefficient: Exact
    symbol: Name
    amount: Exact
    product: Exact
    is_load: bool = False


@dataclass(frozen=True, slots=True)
class Written:
    """A product as it stands on paper, and its exact value (sign included)."""

    product: Product
    value: Exact


@dataclass(frozen=True, slots=True)
class EquationWriter:
    """Writes equations of one check.

    Attributes
    ----------
    case : LoadCase
        Gives symbols their values where decimals are printed.
    teller : Teller
        Words.
    symbols : Symbols
        What forces are called.
    """

    case: LoadCase
    teller: Teller
    symbols: Symbols

    def entries(self, equation: Equation, sought: Sequence[str] = ()) -> tuple[list[Entry], Table | None]:
        """Return an equation's terms as they are written; many loads collected, with the table behind them."""
        loads = [term for term in equation.terms if term.kind == "load"]
        many = len(loads) > MOST_LOADS
        table = None
        found = []
        for term in equation.terms:
            if term.kind == "load" and many:
                if table is None:
                    collected, table = self._resultant(equation, loads)
                    found += collected
                continue
            symbol = self.symbols.of(term, sought=term.kind != "load" and term.name in sought)
            product = unscaled(term.product, term.scale)
            found.append(Entry(term.coefficient, symbol, term.force, product, is_load=term.kind == "load"))
        return found, table

    def in_symbols(self, equation: Equation, entries: Sequence[Entry]) -> tuple[Product, ...]:
        """Return a sum in symbols."""
        return tuple(self.product(equation, entry.coefficient, entry.symbol) for entry in entries)

    def with_values(self, equation: Equation, entries: Sequence[Entry]) -> list[Written]:
        """Return terms with their values, runs of equal loads written once."""
        written: list[Written] = []
        place = 0
        while place < len(entries):
            alike = _alike(entries, place)
            first = entries[place]
            if len(alike) < FEWEST_ALIKE:
                force = printed(first.amount, self.case)
                written.append(Written(self.product(equation, first.coefficient, force), first.product))
                place += 1
                continue
            written.append(self._together(equation, alike))
            place += len(alike)
        return written

    def product(self, equation: Equation, coefficient: Exact, force: Name | Number) -> Product:
        """Return coefficient times force; a coefficient 1 is not written."""
        return times(equation, coefficient, force, self.case)

    def evaluated(self, written: Written) -> Product:
        """Return a product multiplied out: exactly, or as a pencil does where rounded digits stand in it."""
        rough = multiplied(written.product, self.case)
        if rough is not None:
            return Product(rough.text.startswith("-"), (Decimals(rough.text.removeprefix("-")),))
        return signed(printed(written.value, self.case))

    def _together(self, equation: Equation, alike: Sequence[Entry]) -> Written:
        """Return equal loads as one product: sum of arms, or their count, times the load."""
        first = alike[0]
        negative = first.coefficient.reads_negative()
        value = sum((entry.product for entry in alike), start=ZERO)
        amount = printed(first.amount, self.case)
        sizes = [entry.coefficient.written_size() for entry in alike]
        factors: tuple[Number, ...]
        if all(size == sizes[0] for size in sizes):
            coefficient = () if sizes[0] == ONE else (coefficient_of(equation, sizes[0], self.case),)
            factors = (Value(rational(len(alike))), *coefficient)
        else:
            factors = (Bracket(tuple(plus(coefficient_of(equation, size, self.case)) for size in sizes)),)
        return Written(Product(negative, (*factors, amount)), value)

    # --- many loads ---------------------------------------------------------------------------------------

    def _resultant(self, equation: Equation, loads: Sequence[Term]) -> tuple[list[Entry], Table]:
        """Return the loads of a body as one force for each axis, and the table behind them."""
        entries: list[Entry] = []
        rows: list[tuple[Inline | None, ...]] = []
        for axis in "xy":
            own = [term for term in loads if term.axis == axis]
            if own:
                entry, some = self._resultant_along(axis, own)
                entries.append(entry)
                rows += some
        moment = equation.about.sum == "moment"
        columns = (
            Column("load at"),
            Column("force along the axis", "right"),
            Column("arm" if moment else "cosine", "right"),
            Column("adds to the sum", "right"),
        )
        where, what = self.teller.body(equation.cut), about_words(equation.about)
        acts = " The arm of a sum is the arm at which it acts." if moment else ""
        if any(entry.symbol.base == "M" for entry in entries):
            acts = " M is what these loads add to the sum together."
        return entries, Table(columns, tuple(rows), f"Loads on the {where}, collected for {what}.{acts}")

    def _resultant_along(self, axis: str, loads: Sequence[Term]) -> tuple[Entry, list[tuple[Inline | None, ...]]]:
        signed_forces = [self._along_axis(term) * term.tension for term in loads]
        products = [unscaled(term.product, term.scale) for term in loads]
        rows: list[tuple[Inline | None, ...]] = [
            self._row(term.name, axis, force, product)
            for term, force, product in zip(loads, signed_forces, products, strict=True)
        ]
        force, product = sum(signed_forces, start=ZERO), sum(products, start=ZERO)
        if not force or (product / force).symbols:  # a couple, or an arm that depends on symbols
            rows.append((Run(f"sum, {axis}"), printed(force, self.case), None, printed(product, self.case)))
            return Entry(ONE, Name("M", f"P,{axis}"), product, product), rows
        rows.append(self._row("sum", axis, force, product))
        size = -force if force.reads_negative() else force
        return Entry(product / size, Name("ΣP", axis), size, product), rows

    def _along_axis(self, term: Term) -> int:
        """Return 1 when a load acts along its axis, -1 when against it."""
        load = self.teller.structure.loads[term.name]["xy".index(term.axis)]
        return -1 if load.reads_negative() else 1

    def _row(self, name: str, axis: str, force: Exact, product: Exact) -> tuple[Inline | None, ...]:
        numbers = (printed(number, self.case) for number in (force, product / force, product))
        return (Run(f"{name}, {axis}"), *numbers)


def times(equation: Equation, coefficient: Exact, force: Name | Number, case: LoadCase) -> Product:
    """Return coefficient times force as it stands in an equation; a coefficient 1 is not written."""
    size = coefficient.written_size()
    before = () if size == ONE else (coefficient_of(equation, size, case),)
    return Product(coefficient.reads_negative(), (*before, force))


def coefficient_of(equation: Equation, size: Exact, case: LoadCase) -> Number:
    """Return an arm or a cosine, without its sign, as it is printed."""
    return printed(size, case, "arm" if equation.about.sum == "moment" else "cosine")


def unscaled(product: Exact, scale: Exact) -> Exact:
    """Return a product as it is written: the whole sum divided by the root of ``scale``."""
    return product if scale == ONE else product / scale * sqrt(scale, proven=False)


def signed(number: Number) -> Product:
    """Return a number as a term: its sign apart."""
    match number:
        case Value(value, role) if value.reads_negative():
            return Product(negative=True, factors=(Value(-value, role),))
        case Decimals(text) if text.startswith("-"):
            return Product(negative=True, factors=(Decimals(text[1:]),))
    return plus(number)


def plus(number: Name | Number) -> Product:
    """Return a number or a force as a term with a plus sign."""
    return Product(negative=False, factors=(number,))


def _alike(entries: Sequence[Entry], place: int) -> Sequence[Entry]:
    """Return the run of loads from a place on that are equal and add with the same sign."""
    first = entries[place]
    end = place
    while (
        end < len(entries)
        and entries[end].is_load
        and entries[end].amount == first.amount
        and entries[end].coefficient.reads_negative() == first.coefficient.reads_negative()
    ):
        end += 1
    return entries[place:end]
