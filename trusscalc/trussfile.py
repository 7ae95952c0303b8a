"""What a truss file holds, as one consistent record: structure, cases, combinations, title block."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.loads import Combination, LoadCase, combine, twice
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
        symbols: dict[str, Exact] = dict(self.truss.symbols)
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
    missing = _missing(((case.name, load.joint) for case in cases for load in case.loads), joints)
    problems = [f"[cases.{case}] {joint}: there is no such joint{near}" for case, joint, near in missing]
    return problems + [f"[cases] {name}: stated twice; rename one" for name in twice(case.name for case in cases)]


def combination_faults(cases: Sequence[str], combinations: Sequence[Combination]) -> list[str]:
    """Return names that are also a case's, names stated twice, and cases that are not there."""
    missing = _missing(((each.name, case) for each in combinations for case, _ in each.factors), cases)
    problems = [f"[combinations.{name}] {case}: there is no such case{near}" for name, case, near in missing]
    names = [each.name for each in combinations]
    problems += [f"[combinations] {name}: is also the name of a case; rename one" for name in names if name in cases]
    return problems + [f"[combinations] {name}: stated twice; rename one" for name in twice(names)]


def name_faults(truss: Truss, project: Project) -> list[str]:
    """Return what the title block names that is no joint or member."""
    known = [joint.name for joint in truss.joints] + [member.name for member in truss.members]
    turned = {f"{member.end}-{member.start}" for member in truss.members}
    missing = _missing((("project.names", name) for name in project.names if name not in turned), known)
    return [f"[{table}] {name}: there is no such joint or member{near}" for table, name, near in missing]


def _missing(asked: Iterable[tuple[str, str]], known: Sequence[str]) -> list[tuple[str, str, str]]:
    """Return (where, name, nearest known name) for each asked name that is not known."""
    there = set(known)
    missing = [(where, name) for where, name in asked if name not in there]
    return [(where, name, did_you_mean(name, known, told=told)) for told, (where, name) in enumerate(missing)]
