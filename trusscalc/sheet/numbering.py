"""Several checks on one sheet: their steps numbered through, the same section under the same letter everywhere."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace

from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.sheet.words import members_cut
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.steps import section_letter


def numbered_through(checks: Iterable[MemberCheck]) -> tuple[MemberCheck, ...]:
    """Return the checks with step numbers that go on from one to the next, and section letters in common."""
    letters: dict[frozenset[str], str] = {}
    found = []
    before = 0
    for check in checks:
        found.append(_numbered(check, before, letters))
        before += len(check.steps)
    return tuple(found)


def _numbered(check: MemberCheck, before: int, letters: dict[frozenset[str], str]) -> MemberCheck:
    structure = structure_of(check.truss, check.case)
    steps = []
    for step in check.steps:
        letter = step.letter
        for equation in step.equations:
            if step.letter and equation.cut.kind == "section":
                members = members_cut(structure, equation.cut)
                letter = letters.setdefault(members, section_letter(len(letters)))
        steps.append(replace(step, number=step.number + before, letter=letter))

    def moved(forces: Mapping[str, ForceCheck]) -> dict[str, ForceCheck]:
        return {
            name: replace(force, steps=tuple(number + before for number in force.steps))
            for name, force in forces.items()
        }

    return replace(check, steps=tuple(steps), members=moved(check.members), reactions=moved(check.reactions))
