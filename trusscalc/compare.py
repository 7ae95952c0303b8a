"""Results of other software against ours: member by member, within a tolerance that is stated, never hidden.

Ours is exact wherever statics decides, and has been checked by our own second route before it is held against anything.
A value agrees when it is no further from ours than a share of ours, a share of the largest force, and half a unit of
its last printed digit together. A flipped sense never agrees, however small the force.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final, Literal

from trusscalc.comparison import (
    ABSOLUTE,
    RELATIVE,
    ComparedDisplacement,
    ComparedForce,
    Comparison,
    Criterion,
    Sense,
)
from trusscalc.errors import InputError
from trusscalc.exact import Exact, exact
from trusscalc.exacttext import number
from trusscalc.loads import LoadCase
from trusscalc.ourforces import SAME_EA, OurForces, our_forces
from trusscalc.submitted import Submitted, SubmittedDisplacement, SubmittedForce, SubmittedReaction
from trusscalc.submitted.cases import Part, parts_of
from trusscalc.submitted.values import COMPRESSION, DETECT, TENSION
from trusscalc.trussfile import TrussFile

MOST_OF: Final = 0.8
"""Share of all force that must agree in size before senses say anything about the sign convention."""
NEARLY_ALL: Final = 0.95
"""Share of the force agreeing in size whose senses must say the same."""
SURELY: Final = 1e-9
"""Beyond this part of the bound floats decide; nearer to it exact numbers do."""
MOST_NAMED: Final = 12
SENSES: Final[tuple[Sense, Sense, Sense]] = ("0", "T", "C")
"""By sign: zero, plus, minus."""


def compare_submitted(
    stated: TrussFile,
    submitted: Submitted,
    case: str | LoadCase,
    *,
    theirs: str = "",
    members: Iterable[str] | Literal["all"] = "all",
    relative: object = RELATIVE,
    absolute: object = ABSOLUTE,
) -> Comparison:
    """Return submitted results beside ours, for one case or combination.

    Parameters
    ----------
    stated : TrussFile
        Our truss and loads.
    submitted : Submitted
        Their table, see ``read_submitted``.
    case : str or LoadCase
        Our case or combination.
    theirs : str
        What the table calls it; left out: the same, or its only case.
    members : iterable of str, or "all"
        The members that must be there and agree.
    relative, absolute : number
        The criterion: a share of ours, and a share of the largest force.

    Raises
    ------
    UnknownNameError
        For a case or member that is not there.
    InputError
        When the table does not have the case, or the criterion is negative.
    UnstableTrussError
        When our truss cannot resist every load.

    Examples
    --------
    >>> from trusscalc.submitted import read_submitted
    >>> from trusscalc.truss import Truss
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> stated = TrussFile(roof, (LoadCase("snow", {"C": (0, -12)}),))
    >>> found = compare_submitted(stated, read_submitted({"A-B": 8.01, "A-C": 10.0}, roof), "snow")
    >>> [(item.name, item.verdict, item.flipped) for item in found.members.values()]
    [('A-B', 'agrees', False), ('A-C', 'differs', True), ('C-B', 'missing', False)]
    """
    loads = stated.case(case) if isinstance(case, str) else case
    (ours,) = our_forces(stated.truss, [loads])
    criterion = criterion_of(relative, absolute)
    return confronted(stated, ours, submitted, theirs=theirs, members=members, criterion=criterion)


def compare_cases(
    stated: TrussFile,
    submitted: Submitted,
    cases: Mapping[str, str] | Iterable[str] | None = None,
    *,
    relative: object = RELATIVE,
    absolute: object = ABSOLUTE,
) -> dict[str, Comparison]:
    """Return a comparison for each of several cases, ours from one elimination.

    Parameters
    ----------
    stated, submitted, relative, absolute
        As for ``compare_submitted``.
    cases : mapping of str to str, or iterable of str, optional
        Our cases or combinations (with what the table calls them); left out: every case of the table.
    """
    wanted = submitted.cases if cases is None else cases
    named = dict(wanted) if isinstance(wanted, Mapping) else dict.fromkeys(wanted, "")
    criterion = criterion_of(relative, absolute)
    ours = our_forces(stated.truss, [stated.case(name) for name in named])
    parts = parts_of(submitted, named)
    settled = _settled(submitted, ours, parts, criterion)
    if settled is not submitted:
        parts = parts_of(settled, named)
    return {
        name: _confronted(Asked(stated, named[name], criterion), one, part, settled, _members(one, "all"))
        for one, (name, part) in zip(ours, parts.items(), strict=True)
    }


@dataclass(frozen=True, slots=True)
class Asked:
    """What a comparison was asked with: what is stated, what the table calls the case ('' left open), what agrees."""

    stated: TrussFile
    theirs: str
    criterion: Criterion


def confronted(
    stated: TrussFile,
    ours: OurForces,
    submitted: Submitted,
    *,
    theirs: str,
    members: Iterable[str] | Literal["all"],
    criterion: Criterion,
) -> Comparison:
    """Return our side, worked out before, and theirs in one record; as ``compare_submitted``."""
    named = {ours.case.name: theirs}
    (part,) = parts_of(submitted, named).values()
    settled = _settled(submitted, [ours], {ours.case.name: part}, criterion)
    if settled is not submitted:
        (part,) = parts_of(settled, named).values()
    return _confronted(Asked(stated, theirs, criterion), ours, part, settled, _members(ours, members))


def criterion_of(relative: object, absolute: object) -> Criterion:
    """Return the criterion that two shares state (InputError when one is negative)."""
    made = Criterion(number(relative), number(absolute))
    for name, share in (("relative", made.relative), ("absolute", made.absolute)):
        if share.sign() < 0:
            message = f"{name}: a tolerance is not negative"
            raise InputError(message)
    return made


def _members(ours: OurForces, members: Iterable[str] | Literal["all"]) -> tuple[str, ...]:
    there = [member.name for member in ours.truss.members if member.name in ours.decimal]
    if members == "all":
        return tuple(there)
    asked = [members] if isinstance(members, str) else list(members)
    wanted = {ours.truss.member(name).name for name in asked}
    return tuple(name for name in there if name in wanted)


# --- the sign convention ----------------------------------------------------------------------------------


def _settled(
    submitted: Submitted, ours: Sequence[OurForces], parts: Mapping[str, Part], criterion: Criterion
) -> Submitted:
    """Return the table with its signs as they are meant, where that was to be detected."""
    if submitted.convention != DETECT:
        return submitted
    means, why = _shown(ours, list(parts.values()), criterion)
    if means == COMPRESSION:
        return submitted.turned(COMPRESSION, f"sign convention detected: compression positive; {why}")
    told = f"detected: tension positive; {why}" if means else f"not detected ({why}): read as tension positive"
    return replace(submitted, convention=TENSION, notes=(*submitted.notes, f"sign convention {told}"))


def _shown(ours: Sequence[OurForces], parts: Sequence[Part], criterion: Criterion) -> tuple[str, str]:
    """Return which convention the senses show ('' for none), and why.

    Senses say nothing unless most of the force agrees in size: else the tables differ in more than signs.
    """
    total = alike = reversed_ = 0.0
    for one, part in zip(ours, parts, strict=True):
        absolute = float(criterion.absolute) * one.largest
        for row in part.rows:
            mine, theirs = one.decimal.get(row.member, 0.0), float(row.force)
            total += abs(mine)
            allowed = float(criterion.relative) * abs(mine) + absolute + float(row.digits)
            if abs(abs(theirs) - abs(mine)) <= allowed:
                alike += abs(mine)
                reversed_ += abs(mine) if theirs * mine < 0 else 0.0
    if not total or alike < MOST_OF * total:
        part_alike = alike / total if total else 0.0
        return "", f"only {part_alike:.0%} of the force agrees in size with ours, so senses tell nothing"
    share, against = f"{alike / total:.0%} of the force agrees in size with ours", reversed_ / alike
    if against >= NEARLY_ALL:
        return COMPRESSION, f"{share}, and {against:.0%} of that is reversed in sense"
    if against <= 1 - NEARLY_ALL:
        return TENSION, f"{share}, and {1 - against:.0%} of that in sense too"
    return "", f"{share}, but {against:.0%} of that is reversed in sense"


# --- verdicts ---------------------------------------------------------------------------------------------


def _confronted(asked: Asked, ours: OurForces, part: Part, submitted: Submitted, members: Sequence[str]) -> Comparison:
    criterion = asked.criterion
    judge = _Judge(ours, criterion)
    given = {row.member: row for row in part.rows}
    compared = {name: judge.member(name, given.get(name)) for name in members}
    reactions = {reaction.name: judge.reaction(reaction) for reaction in part.reactions}
    displacements = _displacements(ours, part.displacements, criterion)
    items = (*compared.values(), *reactions.values())
    notes = [*part.notes, *_said(ours, compared, reactions, displacements, given)]
    if any(item.flipped for item in compared.values()):
        means, why = _shown([ours], [part], criterion)
        if means == COMPRESSION:
            notes.insert(
                0, f"{why}: the table may mean the other sign; if so, state its convention or have it detected"
            )
    return Comparison(
        stated=asked.stated,
        truss=ours.truss,
        case=ours.case,
        submitted=replace(submitted, rows=part.rows, reactions=part.reactions, displacements=part.displacements),
        theirs=asked.theirs,
        their_case=part.case,
        members=compared,
        reactions=reactions,
        displacements=displacements,
        criterion=criterion,
        largest=ours.largest,
        ours=ours,
        own_faults=ours.faults,
        notes=tuple(notes),
        agreed=not ours.faults and all(item.verdict == "agrees" for item in items),
    )


class _Judge:
    """Holds one value of theirs against ours; floats decide what is clear, exact numbers what is not."""

    def __init__(self, ours: OurForces, criterion: Criterion) -> None:
        self.ours = ours
        self.criterion = criterion
        self.relative = float(criterion.relative)
        self.absolute = float(criterion.absolute) * ours.largest

    def member(self, name: str, row: SubmittedForce | None) -> ComparedForce:
        value, decimal = self.ours.exact.get(name), self.ours.decimal[name]
        reason = self.ours.reasons.get(name)
        note = f"{reason}; ours is from the stiffness route, {SAME_EA}" if reason else ""
        if row is None:
            return ComparedForce(
                name=name,
                exact=value,
                ours=decimal,
                theirs=None,
                digits=None,
                difference=None,
                tolerance=self._tolerance(decimal),
                our_sense=self._sense(value, decimal),
                their_sense=None,
                flipped=False,
                verdict="missing",
                note=note,
            )
        return self._compared(name, value, decimal, row, note)

    def reaction(self, reaction: SubmittedReaction) -> ComparedForce:
        value, decimal = self.ours.reaction(reaction.joint, reaction.axis)
        note = "" if value is not None else f"statics alone does not decide it; ours is by stiffness, {SAME_EA}"
        return self._compared(reaction.name, value, decimal, reaction, note)

    def _compared(
        self,
        name: str,
        value: Exact | None,
        decimal: float,
        theirs: SubmittedForce | SubmittedReaction,
        note: str,
    ) -> ComparedForce:
        force, digits = theirs.force, theirs.digits
        near = float(force)
        senses = (self._sense(value, decimal), SENSES[force.sign()])
        flipped = "0" not in senses and senses[0] != senses[1]
        is_member = isinstance(theirs, SubmittedForce)
        tolerance = self._tolerance(decimal)
        apart, allowed = abs(near - decimal), tolerance + float(digits)
        if value is None:
            agrees = apart <= allowed + self.ours.noise
        elif abs(apart - allowed) > SURELY * (allowed + abs(decimal)):
            agrees = apart < allowed
        else:
            bound = self.criterion.relative * abs(value) + self.criterion.absolute * exact(self.ours.largest) + digits
            agrees = abs(force - value) <= bound
        return ComparedForce(
            name=name,
            exact=value,
            ours=decimal,
            theirs=force,
            digits=digits,
            difference=near - decimal,
            tolerance=tolerance,
            our_sense=senses[0] if is_member else None,
            their_sense=senses[1] if is_member else None,
            flipped=flipped,
            verdict="agrees" if agrees and not flipped else "differs",
            note=note,
            row=theirs.row,
            called=theirs.theirs if isinstance(theirs, SubmittedForce) else "",
            printed=theirs.printed,
        )

    def _sense(self, value: Exact | None, decimal: float) -> Sense:
        """Return the sense of our value: of an exact one its sign, of one that was rounded none within the noise."""
        if value is not None and not value.rounded:
            return SENSES[value.sign()]
        return "0" if abs(decimal) <= self.ours.noise else "T" if decimal > 0 else "C"

    def _tolerance(self, decimal: float) -> float:
        """Return what a value may differ by, besides the rounding of its digits."""
        return self.relative * abs(decimal) + self.absolute


def _displacements(
    ours: OurForces, given: Sequence[SubmittedDisplacement], criterion: Criterion
) -> tuple[ComparedDisplacement, ...]:
    """Return displacements beside ours times the factor (1 / EA) that fits best, by least squares."""
    mine = [ours.displacements[item.joint][0 if item.axis == "x" else 1] for item in given]
    theirs = [float(item.amount) for item in given]
    squares = sum(value * value for value in mine)
    factor = sum(a * b for a, b in zip(mine, theirs, strict=True)) / squares if squares else 0.0
    largest = max((abs(value * factor) for value in mine), default=0.0)
    found = []
    for item, value, amount in zip(given, mine, theirs, strict=True):
        fitted = value * factor
        allowed = float(criterion.relative) * (abs(fitted) + largest) + float(item.digits)
        near = factor > 0 and abs(amount - fitted) <= allowed
        found.append(ComparedDisplacement(item.joint, item.axis, fitted, item.amount, amount - fitted, near))
    return tuple(found)


# --- what else is to be said ------------------------------------------------------------------------------


def _said(
    ours: OurForces,
    members: Mapping[str, ComparedForce],
    reactions: Mapping[str, ComparedForce],
    displacements: Sequence[ComparedDisplacement],
    given: Mapping[str, SubmittedForce],
) -> list[str]:
    notes = []
    missing = [name for name, item in members.items() if item.verdict == "missing"]
    if missing:
        notes.append(f"the table does not give {_listed(missing)}; to compare only some members, name them")
    beyond = [name for name in given if name not in members]
    if beyond:
        notes.append(f"given, but not asked for: {_listed(beyond)}")
    from_stiffness = [name for name in members if name in ours.reasons]
    if from_stiffness:
        notes.append(
            f"statics alone does not decide {_listed(from_stiffness)}: ours is from the stiffness route, {SAME_EA}; "
            "other areas would give other forces"
        )
    if reactions and all(item.flipped or not item.theirs for item in reactions.values()):
        notes.append("every reaction is reversed: they may be the forces on the supports; ours act on the truss")
    if displacements:
        out = [f"{item.joint}.{item.axis}" for item in displacements if not item.in_proportion]
        told = f"out of proportion: {_listed(out)}" if out else "all in proportion"
        notes.append(
            f"displacements are compared in proportion only, since EA is not stated: {told}; different areas, stiff "
            "joints or moving supports would show so, and the verdict does not rest on it"
        )
    return notes


def _listed(names: Sequence[str]) -> str:
    shown = ", ".join(names[:MOST_NAMED])
    return f"{shown} and {len(names) - MOST_NAMED} more" if len(names) > MOST_NAMED else shown
