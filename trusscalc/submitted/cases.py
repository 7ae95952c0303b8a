"""The part of a submitted table that belongs to one of our cases, whatever the table calls it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.errors import InputError
from trusscalc.filetext import one_line
from trusscalc.submitted import Submitted, SubmittedDisplacement, SubmittedForce, SubmittedReaction
from trusscalc.truss import did_you_mean

MOST_NAMED: Final = 12


@dataclass(frozen=True, slots=True)
class Part:
    """What the table says of one case."""

    case: str
    rows: tuple[SubmittedForce, ...]
    reactions: tuple[SubmittedReaction, ...]
    displacements: tuple[SubmittedDisplacement, ...]
    notes: tuple[str, ...]


def parts_of(submitted: Submitted, named: Mapping[str, str]) -> dict[str, Part]:
    """Return for each of our cases what the table says of it."""
    rows: dict[str, list[SubmittedForce]] = {}
    reactions: dict[str, list[SubmittedReaction]] = {}
    displacements: dict[str, list[SubmittedDisplacement]] = {}
    for row in submitted.rows:
        rows.setdefault(row.case, []).append(row)
    for reaction in submitted.reactions:
        reactions.setdefault(reaction.case, []).append(reaction)
    for displacement in submitted.displacements:
        displacements.setdefault(displacement.case, []).append(displacement)
    found = {}
    for name, stated in named.items():
        case, notes = _their_case(submitted.cases, name, stated)
        others = [other for other in submitted.cases if other != case]
        if others and len(named) == 1:
            notes.append(f"other load cases of the table, not compared here: {_shown(others)}")
        lists = (rows.get(case, ()), reactions.get(case, ()), displacements.get(case, ()))
        found[name] = Part(case, tuple(lists[0]), tuple(lists[1]), tuple(lists[2]), tuple(notes))
    return found


def _their_case(cases: Sequence[str], name: str, stated: str) -> tuple[str, list[str]]:
    """Return the case of the table that is meant by one of ours, and what is to be said about that."""
    wanted = stated or name
    if wanted in cases:
        return wanted, []
    alike = [case for case in cases if case.strip().casefold() == wanted.strip().casefold()]
    if len(alike) == 1:
        return alike[0], []
    if len(cases) == 1 and not stated:
        (only,) = cases
        return only, [f"the table's only case is called {only[:60]!r}: compared with {name}"] if only else []
    near = did_you_mean(wanted, cases)
    message = f"the table has no case {wanted[:60]!r}; it has {_shown(cases)}{near}; say what it calls {name[:60]!r}"
    raise InputError(one_line(message))


def _shown(cases: Sequence[str]) -> str:
    shown = ", ".join(repr(case[:40]) for case in cases[:MOST_NAMED])
    return f"{shown} and {len(cases) - MOST_NAMED} more" if len(cases) > MOST_NAMED else shown
