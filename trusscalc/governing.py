"""The hand checks behind an envelope: each governing state as a load case like any other, derived and compared."""

from __future__ import annotations

from dataclasses import dataclass

from trusscalc.chains import positions
from trusscalc.envelopes import Choice, Envelope, Progress, Sense, at_values, teller
from trusscalc.exact import Exact
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.standing import train_of
from trusscalc.travel import Extreme, placed
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


def factored_cases(stated: TrussFile, choice: Choice) -> tuple[tuple[str, Exact, LoadCase], ...]:
    """Return the cases of one state as they are taken: name, factor, and the factored joint loads.

    Parameters
    ----------
    stated : TrussFile
        Whose cases they are.
    choice : Choice
        The state; a moving load stands where its train does.
    """
    cases = {case.name: at_values(case) for case in stated.acting}
    found = [(case, factor, cases[case].loads) for case, factor in choice.factors]
    found += [(case, factor, standing_case(stated, case, extreme).loads) for case, factor, extreme in choice.stands]
    return tuple(
        (name, factor, LoadCase(name, [JointLoad(load.joint, factor * load.fx, factor * load.fy) for load in loads]))
        for name, factor, loads in found
    )


def standing_case(stated: TrussFile, case: str, extreme: Extreme) -> LoadCase:
    """Return the joint loads of a moving load where it stands."""
    load = next(load for load in stated.moving if load.name == case)
    train = train_of(extreme, load.trains)
    if train is None:
        return LoadCase(case, {})  # no train of the load is adverse anywhere
    along = positions(stated.truss.at_values(), load.along)
    return LoadCase(case, placed(extreme, along, load.along, train))


def governing_case(stated: TrussFile, choice: Choice, name: str = "") -> LoadCase:
    """Return the load case of one state: all cases as taken and the trains where they stand, joint by joint.

    Parameters
    ----------
    stated, choice
        As in ``factored_cases``.
    name : str
        What to call it; the combination's name without one.
    """
    loads = [load for _, _, case in factored_cases(stated, choice) for load in case.loads]
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
