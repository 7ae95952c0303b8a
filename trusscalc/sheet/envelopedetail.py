"""How much of an envelope's derivations a sheet holds, and which stand in the main part."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.detail import MOST_IN_FULL, Detail
from trusscalc.sheet.envelopetables import States


@dataclass(frozen=True, slots=True)
class ShownStates:
    """What of the governing states is derived where.

    Attributes
    ----------
    members : tuple of str
        Members told of in full in the main part.
    main, further : tuple of tuple of int
        For each state the numbers of the steps in the main part and in the appendix.
    """

    members: tuple[str, ...]
    main: tuple[tuple[int, ...], ...]
    further: tuple[tuple[int, ...], ...]


def shown_states(states: States, numbered: Sequence[MemberCheck], detail: Detail) -> ShownStates:
    """Return which steps a sheet shows, and where.

    Parameters
    ----------
    states : States
        The governing states.
    numbered : sequence of MemberCheck
        Their hand checks with the step numbers of the sheet.
    detail : str
        ``members``, ``all`` or ``summary``, as for the sheet of a check: of more than twelve members those that govern
        stand in the main part, the largest tension and compression, then the others in the order asked.
    """
    every = tuple(states.found.members)
    nothing = ((),) * len(numbered)
    if detail == "summary":
        return ShownStates(every, nothing, nothing)
    chosen = every if detail == "all" or len(every) <= MOST_IN_FULL else _chosen(states)
    main, further = [], []
    for check in numbered:
        own = [name for name in check.members if name in chosen]
        needed = {number for name in own for number in check.members[name].steps}
        needed |= {number for item in check.reactions.values() for number in item.steps} if own else set()
        numbers = [step.number for step in check.steps]
        main.append(tuple(number for number in numbers if number in needed))
        further.append(tuple(number for number in numbers if number not in needed))
    return ShownStates(chosen, tuple(main), tuple(further))


def _chosen(states: States) -> tuple[str, ...]:
    """Return what is not agreed or is flagged, what has the largest forces, then the others, twelve in all."""
    members = states.found.members
    truss = states.found.stated.truss
    rods = {truss.member(name).name for name in truss.tension_only}
    wrong = {member for _, member in states.found.differing}
    wrong |= {
        each.member for each, which in states.of_members if states.verdict(each.member, which) not in ("", "agrees")
    }
    found = [name for name, each in members.items() if name in wrong or (name in rods and each.min.value.sign() < 0)]
    found.append(max(members, key=lambda name: float(members[name].max.value)))
    found.append(min(members, key=lambda name: float(members[name].min.value)))
    chosen = dict.fromkeys(found)
    for name in members:
        if len(chosen) >= MOST_IN_FULL:
            break
        chosen[name] = None
    return tuple(name for name in members if name in chosen)
