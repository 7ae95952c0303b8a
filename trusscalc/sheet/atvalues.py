"""A check with symbolic dimensions, at the stated values of its symbols: what its drawings are made from."""

from __future__ import annotations

from dataclasses import replace

from trusscalc.exact import Exact
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.statics.cuts import About
from trusscalc.statics.steps import Equation, Step, Term


def at_values(check: MemberCheck) -> MemberCheck:
    """Return the check with its dimensions as numbers; one without symbolic dimensions is returned as it is.

    The steps stay the same steps: the same cuts, centres and letters. Only what is drawn changes, so symbols
    in loads stay symbols.
    """
    if not check.truss.symbols:
        return check
    values = dict(check.truss.symbols)
    case = check.case
    loads = [JointLoad(load.joint, load.fx.substitute(values), load.fy.substitute(values)) for load in case.loads]
    return replace(
        check,
        truss=check.truss.at_values(),
        case=LoadCase(case.name, loads, symbols=case.symbols),
        steps=tuple(_step(step, values) for step in check.steps),
    )


def _step(step: Step, values: dict[str, Exact]) -> Step:
    return replace(
        step,
        equations=tuple(_equation(equation, values) for equation in step.equations),
        results={name: force.substitute(values) for name, force in step.results.items()},
        partial={name: force.substitute(values) for name, force in step.partial.items()},
        check=_equation(step.check, values) if step.check else None,
    )


def _equation(equation: Equation, values: dict[str, Exact]) -> Equation:
    about = equation.about
    return replace(
        equation,
        about=About(about.sum, about.x.substitute(values), about.y.substitute(values), about.joint, about.along),
        terms=tuple(_term(term, values) for term in equation.terms),
    )


def _term(term: Term, values: dict[str, Exact]) -> Term:
    return replace(
        term,
        lever=term.lever.substitute(values),
        length_squared=term.length_squared.substitute(values),
        tension=term.tension.substitute(values),
        scale=term.scale.substitute(values),
    )
