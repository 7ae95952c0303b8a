"""Equations on paper: each term with its sign, coefficient and force, in symbols and with values.

The lines follow the step's own terms in their order. Products and sums are formed in the number field, as
lever times tension coefficient; the lengths, which may be nested roots, enter only what is printed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal

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
    brief : bool
        Whether decimals of ten digits take the place of longer fractions already.
    by_case : tuple of (str, LoadCase)
        Cases that add up to the loads: many loads on the whole truss are collected case by case, not joint by joint.
    """

    case: LoadCase
    teller: Teller
    symbols: Symbols
    brief: bool = False
    by_case: tuple[tuple[str, LoadCase], ...] = ()

    def printed(self, value: Exact, role: Literal["amount", "arm", "cosine"] = "amount") -> Number:
        """Return a number as it stands in an equation of this writer."""
        return printed(value, self.case, role, brief=self.brief)

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
                force = self.printed(first.amount)
                written.append(Written(self.product(equation, first.coefficient, force), first.product))
                place += 1
                continue
            written.append(self._together(equation, alike))
            place += len(alike)
        return written

    def product(self, equation: Equation, coefficient: Exact, force: Name | Number) -> Product:
        """Return coefficient times force; a coefficient 1 is not written."""
        return times(equation, coefficient, force, self.case, brief=self.brief)

    def evaluated(self, written: Written) -> Product:
        """Return a product multiplied out: exactly, or as a pencil does where rounded digits stand in it."""
        rough = multiplied(written.product, self.case)
        if rough is not None:
            return Product(rough.text.startswith("-"), (Decimals(rough.text.removeprefix("-")),))
        return signed(self.printed(written.value))

    def _together(self, equation: Equation, alike: Sequence[Entry]) -> Written:
        """Return equal loads as one product: sum of arms, or their count, times the load."""
        first = alike[0]
        negative = first.coefficient.reads_negative()
        value = sum((entry.product for entry in alike), start=ZERO)
        amount = self.printed(first.amount)
        sizes = [entry.coefficient.written_size() for entry in alike]
        factors: tuple[Number, ...]
        if all(size == sizes[0] for size in sizes):
            coefficient = () if sizes[0] == ONE else (coefficient_of(equation, sizes[0], self.case, brief=self.brief),)
            factors = (Value(rational(len(alike))), *coefficient)
        else:
            arms = (coefficient_of(equation, size, self.case, brief=self.brief) for size in sizes)
            factors = (Bracket(tuple(map(plus, arms))),)
        return Written(Product(negative, (*factors, amount)), value)

    # --- many loads ---------------------------------------------------------------------------------------

    def _resultant(self, equation: Equation, loads: Sequence[Term]) -> tuple[list[Entry], Table]:
        """Return the loads of a body as one force for each axis, and the table behind them."""
        entries: list[Entry] = []
        rows: list[tuple[Inline | None, ...]] = []
        for axis in "xy":
            own = [term for term in loads if term.axis == axis]
            if own:
                entry, some = self._resultant_along(axis, self._contributions(equation, axis, own))
                entries.append(entry)
                rows += some
        moment = equation.about.sum == "moment"
        whole = bool(self.by_case) and equation.cut.kind == "whole"
        columns = (
            Column("load case" if whole else "load at"),
            Column("force along the axis", "right"),
            Column("arm" if moment else "cosine", "right"),
            Column("adds to the sum", "right"),
        )
        where, what = self.teller.body(equation.cut), about_words(equation.about)
        acts = " The arm of a sum is the arm at which it acts." if moment else ""
        if whole and moment and equation.about.joint:
            acts = f" A load at {equation.about.joint} itself has no arm and is not in it.{acts}"
        if any(entry.symbol.base == "M" for entry in entries):
            acts = " M is what these loads add to the sum together."
        return entries, Table(columns, tuple(rows), f"Loads on the {where}, collected for {what}.{acts}")

    def _contributions(self, equation: Equation, axis: str, loads: Sequence[Term]) -> list[tuple[str, Exact, Exact]]:
        """Return what the loads along an axis add to a sum, joint by joint or case by case: name, force, product."""
        by_joint = [
            (term.name, self._along_axis(term) * term.tension, unscaled(term.product, term.scale)) for term in loads
        ]
        if not self.by_case or equation.cut.kind != "whole":
            return by_joint
        joints, about = self.teller.structure.joints, equation.about
        found = []
        for name, case in self.by_case:
            amounts = [
                (
                    load.fx if axis == "x" else load.fy,
                    about.axis_lever(axis, joints[load.joint].x, joints[load.joint].y),
                )
                for load in case.loads
            ]
            amounts = [(amount, lever) for amount, lever in amounts if amount and lever]
            force = sum((amount for amount, _ in amounts), start=ZERO)
            product = sum((amount * lever for amount, lever in amounts), start=ZERO)
            found += [(name, force, unscaled(product, loads[0].scale))] if amounts else []
        return found if _totals(found) == _totals(by_joint) else by_joint  # else these cases are not what acts

    def _resultant_along(
        self, axis: str, parts: Sequence[tuple[str, Exact, Exact]]
    ) -> tuple[Entry, list[tuple[Inline | None, ...]]]:
        rows = [self._row(name, axis, force, product) for name, force, product in parts]
        force, product = _totals(parts)
        if not force or (product / force).symbols:  # a couple, or an arm that depends on symbols
            rows.append((Run(f"sum, {axis}"), self.printed(force), None, self.printed(product)))
            return Entry(ONE, Name("M", f"P,{axis}"), product, product), rows
        rows.append(self._row("sum", axis, force, product))
        size = -force if force.reads_negative() else force
        return Entry(product / size, Name("ΣP", axis), size, product), rows

    def _along_axis(self, term: Term) -> int:
        """Return 1 when a load acts along its axis, -1 when against it."""
        load = self.teller.structure.loads[term.name]["xy".index(term.axis)]
        return -1 if load.reads_negative() else 1

    def _row(self, name: str, axis: str, force: Exact, product: Exact) -> tuple[Inline | None, ...]:
        arm = self.printed(product / force) if force else None  # a couple has none
        return (Run(f"{name}, {axis}"), self.printed(force), arm, self.printed(product))


def _totals(parts: Sequence[tuple[str, Exact, Exact]]) -> tuple[Exact, Exact]:
    return sum((force for _, force, _ in parts), start=ZERO), sum((product for *_, product in parts), start=ZERO)


def times(
    equation: Equation, coefficient: Exact, force: Name | Number, case: LoadCase, *, brief: bool = False
) -> Product:
    """Return coefficient times force as it stands in an equation; a coefficient 1 is not written."""
    size = coefficient.written_size()
    before = () if size == ONE else (coefficient_of(equation, size, case, brief=brief),)
    return Product(coefficient.reads_negative(), (*before, force))


def coefficient_of(equation: Equation, size: Exact, case: LoadCase, *, brief: bool = False) -> Number:
    """Return an arm or a cosine, without its sign, as it is printed."""
    return printed(size, case, "arm" if equation.about.sum == "moment" else "cosine", brief=brief)


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
