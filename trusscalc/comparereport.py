"""A comparison as plain data, in the promised JSON form, and as lines for a terminal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any, Protocol

from trusscalc.comparison import ComparedForce, Comparison, ImpliedLoad
from trusscalc.decimals import rounded
from trusscalc.exacttext import to_text
from trusscalc.report import CAUTION, aligned, short_exact


class Explained(Protocol):
    """An explanation of what differs: kind, places, words, and the largest difference left over the largest force."""

    @property
    def explanation(self) -> str:
        """Kind, such as ``load-missing``."""

    @property
    def where(self) -> tuple[str, ...]:
        """Joints, members or cases."""

    @property
    def text(self) -> str:
        """What it says."""

    @property
    def remainder(self) -> float:
        """The largest difference left, over the largest force."""


def compare_data(comparison: Comparison, diagnosis: Sequence[Explained] = ()) -> dict[str, Any]:
    """Return a comparison as the dictionary that ``compare --json`` prints.

    Parameters
    ----------
    comparison : Comparison
        The result.
    diagnosis : sequence of explanations
        Best first.

    Notes
    -----
    ``implied_loads`` are the loads (at supports: load plus reaction) that their forces say a joint carries, in our
    unit of force. Listed are joints that carry something in our model or in theirs, beyond rounding; joints of
    which the table lacks a member cannot be listed. ``reactions``, ``displacements``, ``own_routes`` (where our own
    two routes disagree) and ``frozen`` (the digest of blind mode) are there only when there is something to say.
    """
    data: dict[str, Any] = {
        "agreed": comparison.agreed,
        "members": {name: _force_data(item) for name, item in comparison.members.items()},
        "implied_loads": {load.joint: [float(part) for part in load.theirs] for load in loaded(comparison)},
        "diagnosis": [
            {"explanation": item.explanation, "where": list(item.where), "text": item.text, "remainder": item.remainder}
            for item in diagnosis
        ],
    }
    if comparison.own_faults:
        data["own_routes"] = list(comparison.own_faults)
    if comparison.reactions:
        data["reactions"] = {name: _force_data(item) for name, item in comparison.reactions.items()}
    if comparison.displacements:
        data["displacements"] = {
            f"{item.joint}.{item.axis}": {
                "ours": item.ours,
                "theirs": float(item.theirs),
                "in_proportion": item.in_proportion,
            }
            for item in comparison.displacements
        }
    if comparison.frozen:
        data["frozen"] = {"digest": comparison.frozen, "order": comparison.order}
    return data


def _force_data(item: ComparedForce) -> dict[str, Any]:
    return {
        "ours": {
            "exact": None if item.exact is None else to_text(item.exact),
            "decimal": item.ours if math.isfinite(item.ours) else None,
        },
        "theirs": None if item.theirs is None else float(item.theirs),
        "difference": item.difference if item.difference is not None and math.isfinite(item.difference) else None,
        "verdict": item.verdict,
    }


def loaded(comparison: Comparison) -> tuple[ImpliedLoad, ...]:
    """Return the joints that carry something in our model or in theirs, beyond what rounding leaves open."""
    slack = float(comparison.criterion.absolute) * comparison.largest
    found = []
    for load in comparison.implied:
        theirs = zip(load.theirs, load.bound, strict=True)
        carries = any(abs(float(part)) > bound + slack for part, bound in theirs)
        if carries or load.differs or any(abs(part) > comparison.ours.noise for part in load.ours):
            found.append(load)
    return tuple(found)


# --- lines for a terminal ---------------------------------------------------------------------------------


def comparison_lines(comparison: Comparison, diagnosis: Sequence[Explained] = (), places: int = 3) -> list[str]:
    """Return a comparison as aligned lines: disagreements of our own first, then table, joints, explanations, notes.

    Parameters
    ----------
    comparison : Comparison
        The result.
    diagnosis : sequence of explanations
        Best first.
    places : int
        Decimal places; rounded once from the exact value, half to even.
    """
    unit = comparison.truss.force
    lines = [f"our own two routes do not agree: {fault}" for fault in comparison.own_faults]
    head = [
        "member or reaction",
        "ours, exact",
        f"ours, {unit}",
        "T/C",
        f"theirs, {unit}",
        "T/C",
        "difference",
        "verdict",
    ]
    items = (*comparison.members.values(), *comparison.reactions.values())
    lines += aligned([head, *(_row(item, places) for item in items)], right=(1, 2, 4, 6))
    off = [load for load in comparison.implied if load.differs]
    lines += [_implied_line(load, unit, places) for load in off]
    lines += [f"possible: {item.text}" for item in diagnosis]
    lines.append(comparison.criterion.text(comparison.largest, unit))
    table = comparison.submitted
    lines.append(f"submitted: {table.source}, SHA-256 {table.digest}")
    lines += [*table.notes, *comparison.notes]
    if comparison.order:
        lines.append(f"{comparison.order}; SHA-256 of ours {comparison.frozen}")
    verdicts = [item.verdict for item in items]
    counts = ", ".join(
        f"{verdicts.count(word)} {word}" for word in ("agrees", "differs", "missing") if word in verdicts
    )
    told = "all agree" if comparison.agreed else "not all agree"
    return [*lines, f"{counts}: {told}", CAUTION]


def _row(item: ComparedForce, places: int) -> list[str]:
    exact = "by stiffness" if item.exact is None else short_exact(item.exact)
    decimal = f"{item.ours:.{places}f}" if item.exact is None else str(rounded(item.exact, places))
    theirs = "" if item.theirs is None else str(rounded(item.theirs, places))
    difference = "" if item.difference is None else f"{item.difference:+.{places}f}"
    verdict = f"{item.verdict} (flipped)" if item.flipped else item.verdict
    return [item.name, exact, decimal, item.our_sense or "", theirs, item.their_sense or "", difference, verdict]


def _implied_line(load: ImpliedLoad, unit: str, places: int) -> str:
    pairs = [f"({float(x):.{places}f}, {float(y):.{places}f})" for x, y in (load.theirs, load.ours, load.bound)]
    what = "load and reaction" if load.is_support else "a load"
    return (
        f"joint {load.joint}: their forces imply {what} of {pairs[0]} {unit}, ours is {pairs[1]}; "
        f"rounding leaves {pairs[2]} open"
    )
