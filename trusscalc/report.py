"""The result of a check as plain data, in the promised JSON form."""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from typing import Any

from trusscalc.decimals import rounded
from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.statics.cuts import About, Cut
from trusscalc.statics.steps import Equation, Step

FORMAT = 1
MOST_LOADS = 8
"""Loads of one body written out in a line; more are only counted."""
CAUTION = (
    "Axial forces of an ideal truss only, no strength or stability of members or connections; both routes share the "
    "input.\nLocal codes and the judgement of a licensed engineer govern."
)
WIDEST_EXACT = 48
"""Characters of an exact value in a terminal; JSON and sheets have all of them."""


def check_data(check: MemberCheck) -> dict[str, Any]:
    """Return a MemberCheck as the dictionary that ``check --json`` prints."""
    statics = check.statics
    data: dict[str, Any] = {
        "format": FORMAT,
        "title": check.truss.title,
        "case": check.case.name,
        "statics": {
            "joints": statics.joints,
            "members": statics.members,
            "reactions": statics.reactions,
            "rank": statics.rank,
            "stable": statics.stable,
            "determinate": statics.determinate,
        },
        "reactions": {name: _reaction_data(item) for name, item in check.reactions.items()},
        "members": {name: _member_data(item) for name, item in check.members.items()},
        "steps": [_step_data(step, check.truss.force) for step in check.steps],
        "agreed": check.agreed,
    }
    if check.zero_members:
        data["zero_members"] = dict(check.zero_members)
    if check.unstable_where:
        data["unstable_where"] = list(check.unstable_where)
    if check.redundancy is not None:
        data["redundancy"] = {
            "degree": check.redundancy.degree,
            "external": check.redundancy.external,
            "internal": check.redundancy.internal,
            "sharing": [list(group) for group in check.redundancy.sharing],
        }
    return data


def _reaction_data(item: ForceCheck) -> dict[str, Any]:
    data: dict[str, Any] = {
        "exact": None if item.exact is None else to_text(item.exact),
        "exactness": item.exactness,
        "decimal": item.decimal,
        "stiffness": _number(item.stiffness),
        "verdict": item.verdict,
        "steps": list(item.steps),
    }
    if item.coefficients:
        data["coefficients"] = {
            part.symbols: {
                "exact": to_text(part.exact),
                "decimal": part.decimal,
                "stiffness": _number(part.stiffness),
                "agrees": part.agrees,
            }
            for part in item.coefficients
        }
    if item.samples:
        data["samples"] = [
            {
                "values": {name: to_text(value) for name, value in sample.values},
                "decimal": sample.decimal,
                "stiffness": sample.stiffness,
                "agrees": sample.agrees,
            }
            for sample in item.samples
        ]
        data["sign_depends"] = item.sign_depends
    if item.reason:
        data["reason"] = item.reason
    return data


def _number(value: float | None) -> float | None:
    """Return a float as JSON can hold it: what is not finite (and disagrees) is null."""
    return value if value is not None and math.isfinite(value) else None


def _member_data(item: ForceCheck) -> dict[str, Any]:
    return {**_reaction_data(item), "sense": item.sense}


def _step_data(step: Step, unit: str) -> dict[str, Any]:
    data: dict[str, Any] = {"number": step.number, "kind": step.kind}
    several = len({equation.cut.kept for equation in step.equations}) > 1
    if not several:
        data |= _cut_data(step.cut)
    if step.carries:
        data["carries"] = list(step.carries)
    if step.solves_in:
        data["solves_in"] = list(step.solves_in)
    data |= {
        "equations": [
            {**_about_data(equation.about), **(_cut_data(equation.cut) if several else {})}
            for equation in step.equations
        ],
        "solves": list(step.solves),
        "uses": list(step.uses),
        "text": "\n".join([*map(_equation_text, step.equations), *_result_texts(step, unit)]),
    }
    return data


def _equation_text(equation: Equation) -> str:
    """Return an equation as one line: what is summed, then coefficient * force for every term."""
    about = equation.about
    place = f"({to_text(about.x)}, {to_text(about.y)})"
    if about.sum == "moment":
        label = f"moments about {about.joint or place}"
    else:
        label = f"forces in {about.axis}" if about.axis else f"forces along {place}"
    loads = [term for term in equation.terms if term.kind == "load"]
    collected = len(loads) > MOST_LOADS
    pieces = []
    for term in equation.terms:
        if term.kind == "load":
            if not collected:
                pieces.append(f"({to_text(term.coefficient)})*P[{term.name}.{term.axis}]")
            elif term is loads[0]:
                pieces.append(f"[{len(loads)} loads]")
        else:
            pieces.append(f"({to_text(term.coefficient)})*{'R' if term.kind == 'reaction' else 'N'}[{term.name}]")
    return f"{label}: {' + '.join(pieces)} = 0"


def _result_texts(step: Step, unit: str) -> list[str]:
    lines = [f"let {name} be {letter}" for name, letter in step.carries.items()]
    return lines + [f"{name} = {to_text(value)} {unit}" for name, value in {**step.partial, **step.results}.items()]


def _cut_data(cut: Cut) -> dict[str, Any]:
    return {"kept": list(cut.kept), "cut": list(cut.bars)}


def _about_data(about: About) -> dict[str, Any]:
    pair = [to_text(about.x), to_text(about.y)]
    return {"sum": "moment", "centre": pair} if about.sum == "moment" else {"sum": "force", "direction": pair}


def verdict_lines(check: MemberCheck, places: int = 3) -> list[str]:
    """Return the summary as aligned lines for a terminal: members, reactions, what to look at.

    Parameters
    ----------
    check : MemberCheck
        The result.
    places : int
        Decimal places; rounded once from the exact value, half to even.
    """
    unit = check.truss.force
    head = ["member or reaction", "exact", f"decimal, {unit}", "T/C", f"stiffness, {unit}", "verdict"]
    rows = [head] + [_verdict_row(check, item, places) for item in (*check.members.values(), *check.reactions.values())]
    lines = aligned(rows, right=(1, 2, 4))
    notes = [
        f"{item.name}: {item.reason}" for item in (*check.members.values(), *check.reactions.values()) if item.reason
    ]
    notes += [f"joint {joint} is out of balance" for joint in check.residuals]
    asked = len(check.members)
    told = "all agree" if check.agreed else "not all agree"
    return [*lines, *notes, f"{asked} of {check.statics.members} members checked: {told}", CAUTION]


def short_exact(value: Exact) -> str:
    """Return an exact value for a terminal."""
    text = to_text(value)
    return text if len(text) <= WIDEST_EXACT else "(long)"


def aligned(rows: Sequence[Sequence[str]], right: Collection[int]) -> list[str]:
    """Return rows of cells as lines of text with columns of even width, some of them aligned right."""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    return [
        "  ".join(
            cell.rjust(width) if column in right else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(row, widths, strict=True))
        ).rstrip()
        for row in rows
    ]


def _verdict_row(check: MemberCheck, item: ForceCheck, places: int) -> list[str]:
    if item.exact is None:
        return [item.name, "", "", "", "", item.verdict]
    exact = short_exact(item.exact)
    decimal = str(rounded(check.value(item.exact), places))
    numeric = "" if item.stiffness is None else f"{item.stiffness:.{places}f}"
    return [item.name, exact, decimal, item.sense or "", numeric, item.verdict]
