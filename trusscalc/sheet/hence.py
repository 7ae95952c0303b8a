"""The lines that follow from an equation: the unknown times its coefficient, and a number.

Every such line is proven in the number field before it is handed on.
"""

from __future__ import annotations

from collections.abc import Sequence

from trusscalc.errors import TrusscalcError
from trusscalc.exact import ONE, ZERO, Exact, symbol
from trusscalc.roots import sqrt
from trusscalc.sheet.blocks import Formula, Labelled, Name, Product, Value
from trusscalc.sheet.equations import EquationWriter, plus, signed, unscaled
from trusscalc.sheet.values import formula
from trusscalc.sheet.words import found_in
from trusscalc.statics.steps import Equation, Step

PAIR = 2


class WrittenLineError(TrusscalcError, ArithmeticError):
    """A written line that does not hold: an error in this program, never in the input."""


def hence(writer: EquationWriter, step: Step) -> list[Labelled]:
    """Return what follows from a step's equations, down to each unknown.

    Raises
    ------
    WrittenLineError
        When a line does not hold: a defect of the program, caught before anything is printed.
    """
    if step.kind == "close":
        return _closed(writer, step)
    if len(step.equations) == 1:
        return [_alone(writer, step, step.equations[0], found_in(step)[0], "hence")]
    if len(step.equations) == PAIR:
        return _two(writer, step)
    return _results(writer, step)


def force_of(step: Step, name: str) -> Exact:
    """Return the force a step finds, in terms of carried forces where it is."""
    return step.results[name] if name in step.results else step.partial[name]


def _results(writer: EquationWriter, step: Step) -> list[Labelled]:
    """Return the unknowns of equations solved together, one line each."""
    count = len(step.equations)
    label = "hence" if count == 1 else f"hence, from the {count} equations together"
    lines = []
    for name in found_in(step):
        lines.append(Labelled(label, _line(plus(_sought(writer, name)), writer, force_of(step, name))))
        label = ""
    return lines


def _alone(writer: EquationWriter, step: Step, equation: Equation, name: str, label: str) -> Labelled:
    """Return the line of an equation that holds one unknown."""
    term = next(term for term in equation.terms if term.kind != "load" and term.name == name)
    rest = _rest(equation, (name,))
    must_hold(term.product == rest, f"{name} in step {step.number}")
    return _solved(writer, equation, name, term.lever, rest, label)


def _two(writer: EquationWriter, step: Step) -> list[Labelled]:
    """Eliminate the second unknown, then put the first into an equation that holds the second."""
    first, second = found_in(step)
    one, other = step.equations
    (a1, b1), (a2, b2) = (_levers(equation, (first, second)) for equation in (one, other))
    r1, r2 = (_rest(equation, (first, second)) for equation in (one, other))
    tensions = {term.name: term.tension for equation in (one, other) for term in equation.terms if term.kind != "load"}
    if not b1:
        lever, rest, equation, label = a1, r1, one, "hence, from the first equation"
    elif not b2:
        lever, rest, equation, label = a2, r2, other, "hence, from the second equation"
    else:
        share = b2 / b1
        lever, rest, equation, label = a2 - share * a1, r2 - share * r1, other, "hence, with the first equation"
    must_hold(lever * tensions[first] == rest, f"{first} in step {step.number}")
    lines = [_solved(writer, equation, first, lever, rest, label)]
    a, b, r, equation, which = (a1, b1, r1, one, "first") if b1 else (a2, b2, r2, other, "second")
    rest = r - a * tensions[first]
    must_hold(b * tensions[second] == rest, f"{second} in step {step.number}")
    return [*lines, _solved(writer, equation, second, b, rest, f"and from the {which} equation")]


def _closed(writer: EquationWriter, step: Step) -> list[Labelled]:
    """Collect each equation in the carried forces, then tell what they are."""
    letters = writer.teller.carried
    zeros = {letters[name]: ZERO for name in step.solves}
    values = {letters[name]: force for name, force in step.results.items()}
    lines = []
    for place, equation in enumerate(step.equations):
        scale = equation.terms[0].scale
        total = unscaled(equation.residual, scale)
        must_hold(not total.substitute(values), f"closing step {step.number}")
        constant = total.substitute(zeros)
        sizes = [(name, total.substitute({**zeros, letters[name]: ONE}) - constant) for name in step.solves]
        left = tuple(writer.product(equation, size, Value(symbol(letters[name]))) for name, size in sizes if size)
        label = "hence, collected" if place == 0 else ""
        lines.append(Labelled(label, formula(left, (signed(writer.printed(-constant)),))))
    return [*lines, *_results(writer, step)]


def _levers(equation: Equation, names: Sequence[str]) -> tuple[Exact, ...]:
    levers = {term.name: term.lever for term in equation.terms if term.kind != "load"}
    return tuple(levers.get(name, ZERO) for name in names)


def _rest(equation: Equation, unknown: Sequence[str]) -> Exact:
    """Return what stands on the right when the known terms go there, in the field."""
    total = ZERO
    for term in equation.terms:
        if term.kind == "load" or term.name not in unknown:
            total = total - term.product
    return total


def _solved(  # noqa: PLR0917 - the parts of one line, in its order
    writer: EquationWriter, equation: Equation, name: str, lever: Exact, rest: Exact, label: str
) -> Labelled:
    """Return ``coefficient times unknown = number``, the coefficient made positive."""
    squared = writer.teller.structure.bars[name].length_squared
    scale = equation.terms[0].scale
    if lever.reads_negative():
        lever, rest = -lever, -rest
    coefficient = lever / squared / scale * sqrt(squared * scale, proven=False)
    left = writer.product(equation, coefficient, _sought(writer, name))
    return Labelled(label, _line(left, writer, unscaled(rest, scale)))


def _line(left: Product, writer: EquationWriter, right: Exact) -> Formula:
    return formula((left,), (signed(writer.printed(right)),))


def _sought(writer: EquationWriter, name: str) -> Name:
    return writer.symbols.of_bar(name, is_link=writer.teller.is_link(name), sought=True)


def must_hold(holds: bool, what: str) -> None:
    """Raise WrittenLineError when a line does not hold."""
    if not holds:
        message = f"the written line for {what} does not hold"
        raise WrittenLineError(message)
