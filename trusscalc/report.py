"""The result of a check as plain data, in the promised JSON form."""

from __future__ import annotations

from typing import Any

from trusscalc.exacttext import to_text
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.statics.cuts import About, Cut
from trusscalc.statics.steps import Equation, Step

FORMAT = 1


def check_data(check: MemberCheck, step_text: dict[int, str] | None = None) -> dict[str, Any]:
    """Return a MemberCheck as the dictionary that ``check --json`` prints.

    Parameters
    ----------
    check : MemberCheck
        The result.
    step_text : dict of int to str, optional
        Each step's lines as plain text, by number.
    """
    statics = check.statics
    return {
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
        "steps": [_step_data(step, (step_text or {}).get(step.number, "")) for step in check.steps],
        "agreed": check.agreed,
    }


def _reaction_data(item: ForceCheck) -> dict[str, Any]:
    data: dict[str, Any] = {
        "exact": None if item.exact is None else to_text(item.exact),
        "exactness": item.exactness,
        "decimal": item.decimal,
        "stiffness": item.stiffness,
        "verdict": item.verdict,
        "steps": list(item.steps),
    }
    if item.reason:
        data["reason"] = item.reason
    return data


def _member_data(item: ForceCheck) -> dict[str, Any]:
    return {**_reaction_data(item), "sense": item.sense}


def _step_data(step: Step, text: str) -> dict[str, Any]:
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
        "text": text,
    }
    return data


def _cut_data(cut: Cut) -> dict[str, Any]:
    return {"kept": list(cut.kept), "cut": list(cut.bars)}


def _about_data(about: About) -> dict[str, Any]:
    pair = [to_text(about.x), to_text(about.y)]
    return {"sum": "moment", "centre": pair} if about.sum == "moment" else {"sum": "force", "direction": pair}


def verdict_lines(check: MemberCheck, places: int = 3) -> list[str]:
    """Return the summary as lines of text for a terminal."""
    from trusscalc.exact import rounded  # noqa: PLC0415

    del places, rounded
    return [f"{item.name}: {item.verdict}" for item in check.members.values()]


def equation_data(equation: Equation) -> dict[str, Any]:
    """Return one equation as data, with its body."""
    return {**_about_data(equation.about), **_cut_data(equation.cut)}
