"""The hand checks behind an envelope: each governing state as a load case like any other, derived and compared."""

from __future__ import annotations

from dataclasses import dataclass

from trusscalc.chains import positions
from trusscalc.envelopes import Choice, Envelope, Progress, Sense, at_values, teller
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.travel import placed
from trusscalc.trussfile import TrussFile


@dataclass(frozen=True, slots=True)
class GoverningCheck:
    """The hand check of a governing state.

    Attributes
    ----------
    members : tuple of (str, str)
        The members and senses (``max`` or ``min``) that this state governs.
    choice : Choice
        The state, as the first of them has it.
    check : MemberCheck
        The ordinary hand check of these members under it.
    differing : tuple of str
        Members for which the hand check does not give the envelope's value.
    """

    members: tuple[tuple[str, Sense], ...]
    choice: Choice
    check: MemberCheck
    differing: tuple[str, ...]

    @property
    def agreed(self) -> bool:
        """Whether both routes agree, and the hand check gives the envelope's value."""
        return self.check.agreed and not self.differing


def governing_case(stated: TrussFile, choice: Choice, name: str = "") -> LoadCase:
    """Return the load case of one state: all cases as taken and the trains where they stand, joint by joint.

    Parameters
    ----------
    stated : TrussFile
        Whose cases they are.
    choice : Choice
        The state.
    name : str
        What to call it; the combination's name without one.
    """
    cases = {case.name: at_values(case) for case in stated.acting}
    moving = {load.name: load for load in stated.moving}
    loads = [
        JointLoad(load.joint, factor * load.fx, factor * load.fy)
        for case, factor in choice.factors
        for load in cases[case].loads
    ]
    for case, factor, extreme in choice.stands:
        along = moving[case].along
        train = next((train for train in moving[case].trains if train.name == extreme.train), None)
        if train is None:
            continue  # no train of the load is adverse anywhere
        joint_loads = placed(extreme, positions(stated.truss.at_values(), along), along, train)
        loads += [JointLoad(load.joint, factor * load.fx, factor * load.fy) for load in joint_loads]
    return LoadCase(name or choice.combination, loads)


def governing_checks(found: Envelope, *, progress: Progress | None = None) -> tuple[GoverningCheck, ...]:
    """Return the hand checks of all governing states, members with the same state together.

    A member whose force reverses is checked in both senses.
    """
    together: dict[object, list[tuple[str, Sense]]] = {}
    for member in found.members.values():
        for sense in member.senses:
            choice = member.state(sense)
            together.setdefault((choice.combination, choice.factors, choice.stands), []).append((member.member, sense))
    tell = teller(progress, len(together))
    truss = found.stated.truss.at_values()
    checks = []
    for number, members in enumerate(together.values(), 1):
        choice = found.members[members[0][0]].state(members[0][1])
        tell(f"hand check under {choice.combination}")
        case = governing_case(found.stated, choice, f"state {number}: {choice.combination}")
        check = check_members(truss, case, list(dict.fromkeys(name for name, _ in members)))
        differing = [
            name for name, sense in members if check.members[name].exact != found.members[name].state(sense).value
        ]
        checks.append(GoverningCheck(tuple(members), choice, check, tuple(dict.fromkeys(differing))))
    return tuple(checks)
