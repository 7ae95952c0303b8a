"""Ordinary hand checks behind an influence line: its largest ordinate, and a train at its worst positions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from trusscalc.exact import ZERO, Exact
from trusscalc.influence import InfluenceLine, unit_load
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members, check_reactions, check_steps
from trusscalc.roots import sqrt
from trusscalc.standing import train_of
from trusscalc.superposition import Sense
from trusscalc.trains import Train
from trusscalc.travel import Extreme, placed


@dataclass(frozen=True, slots=True)
class TrainCheck:
    """The hand check of a train where it stands.

    Attributes
    ----------
    sense : str
        ``max`` or ``min``.
    extreme : Extreme
        What the influence line gave.
    train : Train
        The train that stands there.
    check : MemberCheck
        The ordinary hand check of the force under its joint loads.
    value : Exact or None
        What that gives for the force, None where it gives none.
    """

    sense: Sense
    extreme: Extreme
    train: Train
    check: MemberCheck
    value: Exact | None

    @property
    def agreed(self) -> bool:
        """Whether both routes agree, and the hand check gives what the influence line gave, exactly."""
        return self.check.agreed and self.value == self.extreme.value


def shown_check(line: InfluenceLine) -> MemberCheck:
    """Return the derivation of the largest ordinate as a check like any other, a unit load at its joint.

    Parameters
    ----------
    line : InfluenceLine
        One derived by hand (``influence_line``).
    """
    members = (line.target,) if line.kind == "member" else ()
    return check_steps(line.truss, unit_load(line.shown_joint), line.steps, members)


def train_checks(
    line: InfluenceLine, trains: Sequence[Train], extremes: tuple[Extreme, Extreme]
) -> tuple[TrainCheck, ...]:
    """Return the hand checks of the worst positions; none where nothing is adverse.

    Parameters
    ----------
    line : InfluenceLine
        The line.
    trains : sequence of Train
        Those the extremes were found with.
    extremes : (Extreme, Extreme)
        Largest and least.
    """
    senses: tuple[Sense, Sense] = ("max", "min")
    found = []
    for sense, extreme in zip(senses, extremes, strict=True):
        train = train_of(extreme, trains)
        loads = () if train is None else placed(extreme, line.positions, line.chain, train)
        if train is None or not loads:
            continue
        case = LoadCase(f"{train.name}, {'largest' if sense == 'max' else 'least'}", loads)
        if line.kind == "member":
            check = check_members(line.truss, case, [line.target])
        else:
            check = check_reactions(line.truss, case)
        found.append(TrainCheck(sense, extreme, train, check, target_value(line, check)))
    return tuple(found)


def target_value(line: InfluenceLine, check: MemberCheck) -> Exact | None:
    """Return what a check gives for the force that an influence line is of."""
    if line.section is None:
        forces = check.members if line.kind == "member" else check.reactions
        return forces[line.target].exact
    terms = shear_parts(line, check)
    return None if terms is None else sum((amount for _, amount in terms), ZERO)


def shear_parts(line: InfluenceLine, check: MemberCheck) -> tuple[tuple[str, Exact], ...] | None:
    """Return the upward forces left of a shear's section: reactions, then loads; None where one is not decided."""
    if line.section is None:
        return None
    found: list[tuple[str, Exact]] = []
    for link in check.truss.links:
        if link.name in line.section.cut.bars and link.dy:
            force = check.reactions[link.name].exact
            if force is None:
                return None
            found.append((link.name, force * link.dy / sqrt(link.dx * link.dx + link.dy * link.dy)))
    kept = set(line.section.cut.kept)
    return (*found, *((load.joint, load.fy) for load in check.case.loads if load.joint in kept and load.fy))
