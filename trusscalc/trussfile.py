"""What a truss file holds, as one consistent record: structure, cases, combinations, title block."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from trusscalc.chains import Chain, chain_faults, chain_of
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.loads import Combination, JointLoad, LoadCase, combine, twice
from trusscalc.project import Project
from trusscalc.truss import Truss, did_you_mean

if TYPE_CHECKING:  # most files state nothing of these, and then they are not loaded
    from trusscalc.combinationtables import PublishedChoice
    from trusscalc.loadrules import Rule
    from trusscalc.panelloads import Spread
    from trusscalc.trains import LoadModel, MovingLoad, Train


@dataclass(frozen=True, slots=True)
class TrussFile:
    """What a truss file states; one that exists is consistent.

    Attributes
    ----------
    truss : Truss
        The structure.
    cases : tuple of LoadCase
        Loads at joints, case by case in the order stated; each carries all symbols of the file.
    combinations : tuple of Combination
        Sums of factored cases.
    project : Project
        The title block.
    chains : tuple of Chain
        Paths of loads.
    trains : tuple of Train or LoadModel
        Trains, single and published ones, in the file's units.
    moving : tuple of MovingLoad
        Trains on their chains, each a load case that moves.
    panel_loads : tuple of Rule
        Loads that are put on the joints by statics: line loads, self-weight and the like.
    published : PublishedChoice or None
        The table of combinations taken from a standard.
    acting : tuple of LoadCase
        The load cases with their panel loads put on the joints.
    all_combinations : tuple of Combination
        The stated ones, then those of the published table.

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
    chains: tuple[Chain, ...] = ()
    trains: tuple[Train | LoadModel, ...] = ()
    moving: tuple[MovingLoad, ...] = ()
    panel_loads: tuple[Rule, ...] = ()
    published: PublishedChoice | None = None
    acting: tuple[LoadCase, ...] = field(init=False, repr=False, compare=False)
    all_combinations: tuple[Combination, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        symbols: dict[str, Exact] = dict(self.truss.symbols)
        problems = []
        for case in self.cases:
            for name, value in case.symbols:
                if symbols.setdefault(name, value) != value:
                    problems.append(f"[symbols] {name}: has different values in different cases; use two symbols")
        names = case_names(self.cases, self.panel_loads, self.moving)
        problems += case_faults([joint.name for joint in self.truss.joints], self.cases)
        still = case_names(self.cases, self.panel_loads, ())
        problems += moving_faults(still, self.chains, self.trains, self.moving)
        problems += [f"[trains] {name}: stated twice; rename one" for name in twice(each.name for each in self.trains)]
        problems += path_faults(self.truss, self.chains, self.panel_loads)
        problems += [fault for load in self.moving for fault in chain_faults(self.truss, load.along)]
        combinations = self.combinations
        if self.published is not None:
            try:
                combinations = (*combinations, *self.published.combinations(names))
            except InputError as fault:
                problems += fault.problems
        problems += combination_faults(names, combinations)
        problems += name_faults(self.truss, self.project)
        if problems:
            raise InputError(problems)
        cases = tuple(LoadCase(case.name, case.loads, symbols=list(symbols.items())) for case in self.cases)
        object.__setattr__(self, "cases", cases)
        object.__setattr__(self, "acting", self._acting(symbols))
        object.__setattr__(self, "all_combinations", combinations)

    def _acting(self, symbols: Mapping[str, Exact]) -> tuple[LoadCase, ...]:
        if not self.panel_loads:
            return self.cases
        loads: dict[str, list[JointLoad]] = {case.name: list(case.loads) for case in self.cases}
        for each in self.spreads():
            loads.setdefault(each.rule.case, []).extend(each.loads)
        return tuple(LoadCase(name, its, symbols=list(symbols.items())) for name, its in loads.items())

    def spreads(self) -> tuple[Spread, ...]:
        """Return what became of each panel load, in the order stated."""
        if not self.panel_loads:
            return ()
        from trusscalc.panelloads import spread  # noqa: PLC0415 - most files have none

        return tuple(spread(rule, self.truss, self.chains) for rule in self.panel_loads)

    def case(self, name: str) -> LoadCase:
        """Return a load case with its panel loads, or a combination added up, by name.

        Raises
        ------
        UnknownNameError
            When there is neither.
        InputError
            When it moves, or leaves a choice of factors: an envelope is needed then.
        """
        moving = [load.name for load in self.moving]
        for case in self.acting:
            if case.name == name:
                return case
        for combination in self.all_combinations:
            if combination.name == name:
                moves = [case for case, _ in combination.factors if case in moving]
                if moves:
                    message = f"combination {name!r} holds the moving load {moves[0]!r}: ask for its envelope"
                    raise InputError(message)
                return combine(combination, self.acting)
        if name in moving:
            message = f"{name!r} moves: ask for influence lines or an envelope, or state its joint loads as a case"
            raise InputError(message)
        known = [case.name for case in self.acting] + [each.name for each in self.all_combinations]
        near = did_you_mean(name, known)
        if not near:
            near = f"; there are {', '.join(known[:12])}" if known else "; the file states no cases"
        message = f"there is no case or combination {name[:90]!r}{near}"
        raise UnknownNameError(message, name=name)

    def chain(self, name_or_joints: str | Sequence[str]) -> Chain:
        """Return a chain by name, or the one that joints such as ``L0,L1,L2`` make (InputError where they do not)."""
        return chain_of(self.truss, name_or_joints, self.chains)

    def train(self, name: str) -> tuple[Train, ...]:
        """Return a train by name, of a published load model all; or a shipped one, in the file's units.

        Raises
        ------
        UnknownNameError
            When there is neither.
        """
        for train in self.trains:
            if train.name == name:
                return trains_of(train)
        from trusscalc.publishedtrains import PUBLISHED, published  # noqa: PLC0415 - read when needed

        try:
            return published(name, self.truss.force, self.truss.length).trains
        except UnknownNameError:
            known = [train.name for train in self.trains] + list(PUBLISHED)
        near = did_you_mean(name, known) or f"; there are {', '.join(known)}"
        message = f"there is no train {name[:90]!r}{near}"
        raise UnknownNameError(message, name=name)


def trains_of(train: Train | LoadModel) -> tuple[Train, ...]:
    """Return the trains of which the worst governs: of a single one itself."""
    return getattr(train, "trains", None) or (train,)  # type: ignore[return-value] # only a load model has several


def case_names(cases: Iterable[LoadCase], panel_loads: Iterable[Rule], moving: Iterable[MovingLoad]) -> list[str]:
    """Return the names that a combination may use, in the order stated."""
    names = (*(case.name for case in cases), *(rule.case for rule in panel_loads), *(load.name for load in moving))
    return list(dict.fromkeys(names))


def path_faults(truss: Truss, chains: Sequence[Chain], panel_loads: Sequence[Rule]) -> list[str]:
    """Return chains that do not fit the truss, chains named twice, panel loads that do not fit truss or chain."""
    problems = [fault for chain in chains for fault in chain_faults(truss, chain, may_rise=True)]
    problems += [f"[chains] {name}: stated twice; rename one" for name in twice(chain.name for chain in chains)]
    if problems or not panel_loads:
        return problems
    from trusscalc.panelloads import rule_faults  # noqa: PLC0415 - most files have none

    return [fault for rule in panel_loads for fault in rule_faults(rule, truss, chains)]


def moving_faults(
    still: Collection[str],
    chains: Collection[Chain],
    trains: Iterable[Train | LoadModel],
    moving: Sequence[MovingLoad],
) -> list[str]:
    """Return moving loads named twice or as a case that stands still, or whose train or chain is not stated."""
    names = [load.name for load in moving]
    problems = [f"[moving] {name}: is also the name of a load case; rename one" for name in names if name in still]
    problems += [f"[moving] {name}: stated twice; rename one" for name in twice(names)]
    stated = [trains_of(train) for train in trains]
    for load in moving:
        if load.trains not in stated:
            problems.append(f"[moving.{load.name}] train: is not among the trains; state it under [trains]")
        if load.along not in chains:
            problems.append(f"[moving.{load.name}] along: is not among the chains; state it under [chains]")
    return problems


def case_faults(joints: Sequence[str], cases: Sequence[LoadCase]) -> list[str]:
    """Return loads on joints that are not there, and case names stated twice."""
    missing = _missing(((case.name, load.joint) for case in cases for load in case.loads), joints)
    problems = [f"[cases.{case}] {joint}: there is no such joint{near}" for case, joint, near in missing]
    return problems + [f"[cases] {name}: stated twice; rename one" for name in twice(case.name for case in cases)]


def combination_faults(
    cases: Sequence[str], combinations: Sequence[Combination], *, moving: Sequence[str] = ()
) -> list[str]:
    """Return names that are also a case's, names stated twice, and cases, standing or moving, that are not there."""
    known = (*cases, *moving)
    missing = _missing(((each.name, case) for each in combinations for case, _ in each.factors), known)
    problems = [f"[combinations.{name}] {case}: there is no such case{near}" for name, case, near in missing]
    names = [each.name for each in combinations]
    problems += [f"[combinations] {name}: is also the name of a case; rename one" for name in names if name in known]
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
