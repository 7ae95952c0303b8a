"""The result of a check as plain data, in the promised JSON form."""

from __future__ import annotations

from typing import Any

from trusscalc.exact import rounded
from trusscalc.exacttext import to_text
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.statics.cuts import About, Cut
from trusscalc.statics.steps import Step

FORMAT = 1
CAUTION = (
    "Axial forces of an ideal truss only, no strength or stability of members or connections; both routes share the "
    "input.\nLocal codes and the judgement of a licensed engineer govern."
)
WIDEST_EXACT = 48
"""Characters of an exact value in a terminal; JSON and sheets have all of them."""


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
        "steps": [_step_data(step, (step_text or {}).get(step.number, "")) for step in check.steps],
        "agreed": check.agreed,
    }
    if check.zero_members:
        data["zero_members"] = dict(check.zero_members)
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
        "stiffness": item.stiffness,
        "verdict": item.verdict,
        "steps": list(item.steps),
    }
    if item.coefficients:
        data["coefficients"] = {
            part.symbols: {
                "exact": to_text(part.exact),
                "decimal": part.decimal,
                "stiffness": part.stiffness,
                "agrees": part.agrees,
            }
            for part in item.coefficients
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
    widths = [max(len(row[column]) for row in rows) for column in range(len(head))]
    right = (1, 2, 4)
    lines = [
        "  ".join(
            cell.rjust(width) if column in right else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(row, widths, strict=True))
        ).rstrip()
        for row in rows
    ]
    notes = [
        f"{item.name}: {item.reason}" for item in (*check.members.values(), *check.reactions.values()) if item.reason
    ]
    notes += [f"joint {joint} is out of balance" for joint in check.residuals]
    asked = len(check.members)
    told = "all agree" if check.agreed else "not all agree"
    return [*lines, *notes, f"{asked} of {check.statics.members} members checked: {told}", CAUTION]


def _verdict_row(check: MemberCheck, item: ForceCheck, places: int) -> list[str]:
    if item.exact is None:
        return [item.name, "", "", "", "", item.verdict]
    text = to_text(item.exact)
    exact = text if len(text) <= WIDEST_EXACT else "(long)"
    decimal = str(rounded(check.case.value(item.exact), places))
    numeric = "" if item.stiffness is None else f"{item.stiffness:.{places}f}"
    return [item.name, exact, decimal, item.sense or "", numeric, item.verdict]
