"""Verdicts: one force by both routes, and what is to be made of the difference."""

from __future__ import annotations

import math
import sys
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Literal

from trusscalc.exact import ZERO, Exact
from trusscalc.loads import LoadCase
from trusscalc.samples import sign_depends
from trusscalc.statics.cuts import Structure
from trusscalc.statics.matrix import Bar, Equilibrium
from trusscalc.statics.steps import Step
from trusscalc.symbolparts import Monomial, by_monomial, monomial_text

Verdict = Literal["agrees", "differs", "undecided"]
Sense = Literal["T", "C", "0"]

TOLERANCE = 1e-9
"""Share of the largest force within which two routes agree: what floats of a well-conditioned truss reach."""
WIDEST_TOLERANCE = 1e-6
"""Beyond this share the numeric route is too ill-conditioned to judge anything."""


@dataclass(frozen=True, slots=True)
class Coefficient:
    """What stands before a product of symbols in a force, by both routes (the numeric one under unit values)."""

    symbols: str
    exact: Exact
    decimal: float
    stiffness: float
    agrees: bool


@dataclass(frozen=True, slots=True)
class Sample:
    """A formula in symbolic dimensions beside the numeric route, at one set of the symbols' values."""

    values: tuple[tuple[str, Exact], ...]
    decimal: float
    stiffness: float
    agrees: bool


@dataclass(frozen=True, slots=True)
class ForceCheck:
    """One member force or reaction, by both routes.

    Attributes
    ----------
    name : str
        Member as the truss spells it, or reaction.
    exact : Exact or None
        By hand, tension (or along the written direction) positive; may hold symbols. None: statics does not
        decide it.
    decimal : float or None
        The nearest float, symbols at their values.
    sense : str or None
        ``T``, ``C`` or ``0``; None for a reaction's or an undecided member's.
    stiffness : float or None
        By the numeric route.
    difference : float or None
        decimal - stiffness.
    verdict : str
        ``agrees``, ``differs`` or ``undecided``.
    reason : str
        Why it is undecided or differs, else ''.
    steps : tuple of int
        All steps the value rests on, the solving one last.
    coefficients : tuple of Coefficient
        For loads with symbols: the formula compared coefficient by coefficient.
    samples : tuple of Sample
        For dimensions with symbols: the formula compared at several sets of values, the stated ones first.
    """

    name: str
    exact: Exact | None
    decimal: float | None
    sense: Sense | None
    stiffness: float | None
    difference: float | None
    verdict: Verdict
    reason: str
    steps: tuple[int, ...]
    coefficients: tuple[Coefficient, ...] = ()
    samples: tuple[Sample, ...] = ()

    @property
    def sign_depends(self) -> bool:
        """Whether tension or compression depends on the values of the symbols (which are positive)."""
        return self.exact is not None and sign_depends(self.exact)

    @property
    def exactness(self) -> str:
        """``exact``, or ``angle rounded`` when an angle that is no surd was rounded on the way in."""
        return "angle rounded" if self.exact is not None and self.exact.rounded else "exact"


@dataclass(frozen=True, slots=True)
class Runs:
    """What the numeric route gave: at the stated values, under unit values of load symbols, at other samples."""

    forces: Mapping[str, float]
    condition: float
    units: Mapping[Monomial, Mapping[str, float]]
    samples: tuple[tuple[Mapping[str, Exact], Mapping[str, float], float], ...]


class Judge:
    """Turns a name into its ForceCheck; holds what all verdicts share."""

    def __init__(  # noqa: PLR0917 - built in one place
        self,
        case: LoadCase,
        structure: Structure,
        equilibrium: Equilibrium,
        steps: tuple[Step, ...],
        tensions: Mapping[str, Exact],
        runs: Runs,
    ) -> None:
        self.runs = runs
        self.symbol_values = {**structure.values, **dict(case.symbols)}
        self.case = case
        self.structure = structure
        self.equilibrium = equilibrium
        self.numeric = runs.forces
        self.by_hand = {name: result for step in steps for name, result in step.results.items()}
        self.tensions = tensions
        self.rests_on = _foundations(steps)
        self.tolerance = tolerance_at(runs.condition)
        loads = [abs(part) for pair in case.as_floats().values() for part in pair]
        confirmed = largest_confirmed(self.numeric, equilibrium, structure.bars, self._at_values)
        self.largest = max([confirmed, *loads])

    def verdict(self, name: str) -> ForceCheck:
        """Return a member or reaction by both routes, judged."""
        steps = self.rests_on.get(name, ())
        numeric = self.numeric.get(name)
        if name not in self.by_hand:
            reason = undecided_reason(self.equilibrium, name)
            return ForceCheck(name, None, None, None, numeric, None, "undecided", reason, steps)
        value = self.by_hand[name]
        at_values = self._at_values(value)
        decimal = float(at_values)
        sense: Sense | None = None
        if not self.structure.bars[name].is_link:
            sense = ("0", "T", "C")[at_values.sign()]
        if numeric is None:
            reason = "the numeric route gives no value"
            return ForceCheck(name, value, decimal, sense, None, None, "undecided", reason, steps)
        difference = decimal - numeric
        coefficients = self._coefficients(name, value)
        tried = self._samples(name, value)
        verdict, reason = self._judgement(name, difference)
        if verdict == "agrees" and not all(sample.agrees for sample in tried):
            verdict, reason = "differs", "the routes differ at another sample of the symbols"
        wrong = [item.symbols for item in coefficients if not item.agrees]
        if verdict == "agrees" and wrong:
            verdict, reason = "differs", f"the routes differ in the coefficient of {', '.join(wrong)}"
        return ForceCheck(name, value, decimal, sense, numeric, difference, verdict, reason, steps, coefficients, tried)

    def _at_values(self, amount: Exact) -> Exact:
        return amount.substitute(self.symbol_values) if self.symbol_values else amount

    def _samples(self, name: str, value: Exact) -> tuple[Sample, ...]:
        found = []
        for values, forces, condition in self.runs.samples:
            decimal = float(value.substitute(values))
            largest = max((abs(force) for force in forces.values() if math.isfinite(force)), default=0.0)
            agrees = abs(decimal - forces[name]) <= tolerance_at(condition) * largest
            found.append(Sample(tuple(values.items()), decimal, forces[name], agrees))
        return tuple(found)

    def _coefficients(self, name: str, value: Exact) -> tuple[Coefficient, ...]:
        if not self.runs.units:
            return ()
        exact = by_monomial(value)
        found = []
        for monomial, numeric in self.runs.units.items():
            part = exact.get(monomial, ZERO)
            largest = max((abs(force) for force in numeric.values() if math.isfinite(force)), default=0.0)
            agrees = abs(float(part) - numeric[name]) <= self.tolerance * largest
            found.append(Coefficient(monomial_text(monomial), part, float(part), numeric[name], agrees))
        stray = [monomial for monomial in exact if monomial not in self.runs.units and exact[monomial]]
        found += [Coefficient(monomial_text(m), exact[m], float(exact[m]), 0.0, agrees=False) for m in stray]
        return tuple(found)

    def _judgement(self, name: str, difference: float) -> tuple[Verdict, str]:
        if name in self.equilibrium.tensions and self.tensions[name] != self.equilibrium.tensions[name]:
            return "differs", "the step's value differs from the exact solution of all joint equations"
        return compared(difference, self.tolerance, self.largest)


def compared(difference: float, tolerance: float, largest: float) -> tuple[Verdict, str]:
    """Return what is to be made of a difference between the routes, and why where they do not agree.

    Parameters
    ----------
    difference : float
        Exact less numeric value.
    tolerance : float
        Share of the largest force that the numeric route can be trusted to.
    largest : float
        The largest force.
    """
    if tolerance > WIDEST_TOLERANCE:
        return "undecided", (
            f"the geometry is so close to a critical form that the numeric route is good for no more than "
            f"{tolerance:.0e} of the largest force"
        )
    # written so that a difference that is not a number never passes
    if abs(difference) <= tolerance * largest:
        return "agrees", ""
    return "differs", "the two routes differ by more than the tolerance"


def tolerance_at(condition: float) -> float:
    """Return the share of the largest force that the numeric route can be trusted to."""
    bound = 10 * sys.float_info.epsilon * condition
    return max(TOLERANCE, bound) if math.isfinite(bound) else math.inf


def largest_confirmed(
    numeric: Mapping[str, float],
    equilibrium: Equilibrium,
    bars: Mapping[str, Bar],
    value: Callable[[Exact], Exact],
) -> float:
    """Return the largest numeric force that the exact solution confirms in size.

    A wrong value of the numeric route, infinite at worst, must not widen the tolerance of all others.
    """
    tensions = equilibrium.tensions
    finite = {name: abs(force) for name, force in numeric.items() if name in tensions and math.isfinite(force)}
    for name in sorted(finite, key=finite.__getitem__, reverse=True):
        length = math.sqrt(float(value(bars[name].length_squared)))
        if finite[name] <= 2 * length * abs(float(value(tensions[name]))):
            return finite[name]
    return 0.0


def undecided_reason(equilibrium: Equilibrium, name: str) -> str:
    """Return why statics alone does not decide a member or reaction."""
    group = next((group for group in equilibrium.sharing if name in group), ())
    others = [other for other in group if other != name]
    shown = ", ".join(others[:8]) + (f" and {len(others) - 8} more" if len(others) > 8 else "")  # noqa: PLR2004
    return (
        f"statics alone does not decide it: the truss is statically indeterminate (degree {equilibrium.degree}), "
        f"and it shares the redundancy with {shown}"
    )


def _foundations(steps: tuple[Step, ...]) -> dict[str, tuple[int, ...]]:
    """Return for everything solved the numbers of all steps it rests on, the solving one last."""
    solved_in: dict[str, int] = {}
    below: dict[int, set[int]] = {}
    for step in steps:
        own: set[int] = set()
        for name in step.uses:
            number = solved_in[name]
            own |= below[number] | {number}
        below[step.number] = own
        for name in (*step.carries, *step.solves_in, *step.solves):
            solved_in[name] = step.number
    return {name: (*sorted(below[number]), number) for name, number in solved_in.items()}
