"""What a truss file holds, as one consistent record: structure, cases, combinations, title block."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.loads import Combination, LoadCase, combine
from trusscalc.project import Project
from trusscalc.truss import Truss, did_you_mean


@dataclass(frozen=True, slots=True)
class TrussFile:
    """What a truss file states; one that exists is consistent.

    Attributes
    ----------
    truss : Truss
        The structure.
    cases : tuple of LoadCase
        Load cases in the order stated; each carries all symbols of the file.
    combinations : tuple of Combination
        Sums of factored cases.
    project : Project
        The title block.

    Raises
    ------
    InputError
        When names clash, a load or a combination names what is not there, or two cases give one symbol
        different values.
    """

    truss: Truss
    cases: tuple[LoadCase, ...] = ()
    combinations: tuple[Combination, ...] = ()
    project: Project = field(default_factory=Project)

    def __post_init__(self) -> None:
        symbols: dict[str, Exact] = {}
        problems = []
        for case in self.cases:
            for name, value in case.symbols:
                if symbols.setdefault(name, value) != value:
                    problems.append(f"[symbols] {name}: has different values in different cases; use two symbols")
        problems += case_faults([joint.name for joint in self.truss.joints], self.cases)
        problems += combination_faults([case.name for case in self.cases], self.combinations)
        problems += name_faults(self.truss, self.project)
        if problems:
            raise InputError(problems)
        cases = tuple(LoadCase(case.name, case.loads, symbols=list(symbols.items())) for case in self.cases)
        object.__setattr__(self, "cases", cases)

    def case(self, name: str) -> LoadCase:
        """Return a load case, or a combination added up, by name.

        Raises
        ------
        UnknownNameError
            When there is neither.
        """
        for case in self.cases:
            if case.name == name:
                return case
        for combination in self.combinations:
            if combination.name == name:
                return combine(combination, self.cases)
        known = [case.name for case in self.cases] + [each.name for each in self.combinations]
        near = did_you_mean(name, known)
        if not near:
            near = f"; there are {', '.join(known[:12])}" if known else "; the file states no cases"
        message = f"there is no case or combination {name[:90]!r}{near}"
        raise UnknownNameError(message, name=name)


def case_faults(joints: Sequence[str], cases: Sequence[LoadCase]) -> list[str]:
    """Return loads on joints that are not there, and case names stated twice."""
    known = set(joints)
    return [
        f"[cases.{case.name}] {load.joint}: there is no such joint{did_you_mean(load.joint, joints)}"
        for case in cases
        for load in case.loads
        if load.joint not in known
    ] + [f"[cases] {name}: stated twice; rename one" for name in _twice(case.name for case in cases)]


def combination_faults(cases: Sequence[str], combinations: Sequence[Combination]) -> list[str]:
    """Return names that are also a case's, names stated twice, and cases that are not there."""
    known = set(cases)
    problems = [
        f"[combinations] {combination.name}: is also the name of a case; rename one"
        for combination in combinations
        if combination.name in known
    ]
    problems += [f"[combinations] {name}: stated twice; rename one" for name in _twice(c.name for c in combinations)]
    return problems + [
        f"[combinations.{combination.name}] {case}: there is no such case{did_you_mean(case, cases)}"
        for combination in combinations
        for case, _ in combination.factors
        if case not in known
    ]


def _twice(names: Iterable[str]) -> list[str]:
    return [name for name, times in Counter(names).items() if times > 1]


def name_faults(truss: Truss, project: Project) -> list[str]:
    """Return what the title block names that is no joint or member."""
    if not project.names:
        return []
    known = [joint.name for joint in truss.joints] + [member.name for member in truss.members]
    names = {*known, *(f"{member.end}-{member.start}" for member in truss.members)}
    return [
        f"[project.names] {name}: there is no such joint or member{did_you_mean(name, known)}"
        for name in project.names
        if name not in names
    ]
