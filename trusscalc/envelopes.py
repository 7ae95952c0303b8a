"""Largest tension and compression of each member over all combinations, and which combination it is.

Forces add: the force under a combination is the sum of the factored case forces, so all cases are solved once,
exactly, and every combination is a sum. Of a pair of factors the adverse one is taken, an optional case and a moving
load stay away where they would help, for each member and either sense on its own. What governs is then a load case
like any other, and the ordinary hand check is written for it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from trusscalc import stiffness
from trusscalc.convenience import Convenient
from trusscalc.errors import InputError
from trusscalc.exact import ZERO, Exact
from trusscalc.influence import InfluenceLine, influence_lines
from trusscalc.loads import Combination, JointLoad, LoadCase
from trusscalc.membercheck import members_named
from trusscalc.statics import matrix
from trusscalc.trains import MovingLoad
from trusscalc.travel import Extreme, extremes
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile
from trusscalc.verdicts import largest_confirmed, tolerance_at, undecided_reason

Sense = Literal["max", "min"]
Progress = Callable[[int, int, str], None]
"""Told what has been done, of how much, and what comes next; may raise to stop, nothing is left half done."""

NEARLY = 1e-9
"""Share of the larger value within which two values are compared exactly instead of as floats."""


@dataclass(frozen=True, slots=True)
class Choice:
    """One state of one combination: what it adds up to for one member.

    Attributes
    ----------
    combination : str
        Its name.
    factors : tuple of (str, Exact)
        The cases as taken: the adverse factor of each pair; cases that stay away are missing.
    stands : tuple of (str, Exact, Extreme)
        For each moving load that acts: its factor, and where its train stands.
    value : Exact
        The member's force, tension positive.
    """

    combination: str
    factors: tuple[tuple[str, Exact], ...]
    stands: tuple[tuple[str, Exact, Extreme], ...]
    value: Exact


@dataclass(frozen=True, slots=True)
class CaseForces:
    """The members' forces under a load case that stands still, by both routes.

    Attributes
    ----------
    name : str
        The case.
    exact : dict of str to Exact
        Members asked for, from the exact solution of all joint equations.
    numeric : dict of str to float
        The same by the stiffness route.
    differing : tuple of str
        Members for which the routes differ by more than the tolerance.
    condition : float
        Of the numeric route.
    """

    name: str
    exact: Mapping[str, Exact]
    numeric: Mapping[str, float]
    differing: tuple[str, ...]
    condition: float


@dataclass(frozen=True, slots=True)
class MovingForces:
    """The members' extremes under a moving load.

    Attributes
    ----------
    name : str
        The moving load.
    lines : dict of str to InfluenceLine
        By member.
    extremes : dict of str to (Extreme, Extreme)
        Largest and least.
    differing : tuple of str
        Members whose influence line differs between the routes.
    condition : float
        Of the numeric route.
    """

    name: str
    lines: Mapping[str, InfluenceLine]
    extremes: Mapping[str, tuple[Extreme, Extreme]]
    differing: tuple[str, ...]
    condition: float


@dataclass(frozen=True, slots=True)
class MemberEnvelope:
    """A member's extremes.

    Attributes
    ----------
    member : str
        Its name.
    max, min : Choice
        Largest and least force, tension positive.
    largest_of, least_of : tuple of Choice
        For every combination its largest and its least, in the order stated.
    """

    member: str
    max: Choice
    min: Choice
    largest_of: tuple[Choice, ...]
    least_of: tuple[Choice, ...]

    @property
    def reversal(self) -> bool:
        """Whether the member is pulled in one state and pressed in another."""
        return self.max.value.sign() > 0 > self.min.value.sign()

    @property
    def governing(self) -> Sense:
        """Which of the two is larger in size; the tension where they are equal."""
        sizes = abs(self.max.value), abs(self.min.value)
        if sizes[0] == sizes[1]:
            return "max" if self.max.value.sign() >= 0 else "min"
        return "max" if sizes[1] < sizes[0] else "min"

    @property
    def senses(self) -> tuple[Sense, ...]:
        """The states to check by hand: the governing one, and the other one too where the force reverses."""
        if not self.reversal:
            return (self.governing,)
        return ("max", "min") if self.governing == "max" else ("min", "max")

    def state(self, sense: Sense) -> Choice:
        """Return one of the two extremes."""
        return self.max if sense == "max" else self.min

    def runners_up(self, sense: Sense) -> tuple[Choice, ...]:
        """Return the other combinations, the nearest to governing first."""
        governing = self.state(sense)
        others = [each for each in (self.largest_of if sense == "max" else self.least_of) if each is not governing]
        return tuple(sorted(others, key=lambda each: float(each.value), reverse=sense == "max"))


@dataclass(frozen=True, slots=True)
class Envelope(Convenient):
    """The extremes of chosen members over all combinations.

    Attributes
    ----------
    stated : TrussFile
        What was asked about.
    combinations : tuple of Combination
        Those looked through: the file's and the published ones it chose, or every case alone where it has none.
    asked : tuple of str
        The members asked for, in that order.
    members : dict of str to MemberEnvelope
        Those of them that statics decides.
    undecided : dict of str to str
        The others, each with the reason.
    cases : dict of str to CaseForces
        Load cases that stand still.
    moving : dict of str to MovingForces
        Loads that move.
    tolerance : float
        Share of the largest force up to which the two routes agree, at the worst condition met.
    """

    stated: TrussFile
    combinations: tuple[Combination, ...]
    asked: tuple[str, ...]
    members: Mapping[str, MemberEnvelope]
    undecided: Mapping[str, str]
    cases: Mapping[str, CaseForces]
    moving: Mapping[str, MovingForces]
    tolerance: float

    @property
    def differing(self) -> tuple[tuple[str, str], ...]:
        """Load cases and members for which the two routes differ."""
        every = (*self.cases.values(), *self.moving.values())
        return tuple((each.name, member) for each in every for member in each.differing)

    @property
    def agreed(self) -> bool:
        """True only if every member is decided and both routes agree on every case."""
        return not self.differing and not self.undecided


def envelope(
    stated: TrussFile, members: Iterable[str] | Literal["all"], *, progress: Progress | None = None
) -> Envelope:
    """Return the extremes of chosen members over all combinations of a truss file.

    Parameters
    ----------
    stated : TrussFile
        Truss, cases and combinations; symbols are taken at their stated values.
    members : iterable of str, or "all"
        Member names, ends in either order.
    progress : callable, optional
        Called with (done, of, what comes next); what it raises stops the work.

    Raises
    ------
    UnknownNameError, InputError
        For members that are not there, or a file without load cases.
    UnstableTrussError
        When the truss cannot resist every load.

    Examples
    --------
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> cases = (LoadCase("dead", {"C": (0, -2)}), LoadCase("uplift", {"C": (0, 3)}))
    >>> both = Combination("both", {"dead": ("1.2", "0.9"), "uplift": 1}, optional=["uplift"])
    >>> found = envelope(TrussFile(truss, cases, (both,)), ["A-B"]).members["A-B"]
    >>> found.max.value, found.min.value, found.reversal
    (Exact('12/5'), Exact('-6/5'), True)
    """
    wanted = members_named(stated.truss, members)
    truss = stated.truss.at_values()
    combinations = stated.all_combinations or _each_alone(stated)
    if not combinations:
        message = "the file states no load cases; an envelope needs at least one"
        raise InputError(message)
    used = {name for each in combinations for name, _ in each.factors}
    still = [at_values(case) for case in stated.acting if case.name in used]
    moving = [each for each in stated.moving if each.name in used]
    tell = teller(progress, len(still) + len(moving) + len(wanted))
    solved = matrix.solve_all(truss, still or [LoadCase("", {})])
    decided = [name for name in wanted if name in solved[0].tensions]
    undecided = {name: undecided_reason(solved[0], name) for name in wanted if name not in solved[0].tensions}
    cases = [
        _of_case(truss, case, equilibrium, decided, tell) for case, equilibrium in zip(still, solved, strict=False)
    ]
    moves = [_of_moving(truss, load, decided, tell) for load in moving]
    found = {}
    for name in decided:
        tell(f"member {name}")
        effects: dict[str, tuple[Effect, Effect]] = {}
        for of_case in cases:
            effect = Effect(of_case.exact[name], None)
            effects[of_case.name] = (effect, effect)
        for of_moving in moves:
            largest, least = of_moving.extremes[name]
            effects[of_moving.name] = (Effect(largest.value, largest), Effect(least.value, least))
        found[name] = _extremes_of(name, combinations, effects)
    condition = max((each.condition for each in (*cases, *moves)), default=0.0)
    return Envelope(
        stated=stated,
        combinations=tuple(combinations),
        asked=wanted,
        members=found,
        undecided=undecided,
        cases={each.name: each for each in cases},
        moving={each.name: each for each in moves},
        tolerance=tolerance_at(condition),
    )


def at_values(case: LoadCase) -> LoadCase:
    """Return a load case with its symbols at their stated values."""
    if not case.symbols:
        return case
    return LoadCase(case.name, [JointLoad(load.joint, case.value(load.fx), case.value(load.fy)) for load in case.loads])


def _each_alone(stated: TrussFile) -> tuple[Combination, ...]:
    names = [case.name for case in stated.acting] + [load.name for load in stated.moving]
    return tuple(Combination(name, {name: 1}) for name in names)


def teller(progress: Progress | None, total: int) -> Callable[[str], None]:
    """Return what tells the progress, step by step."""
    done = 0

    def tell(what: str) -> None:
        nonlocal done
        if progress is not None:
            progress(done, total, what)
        done += 1

    return tell


# --- what the cases give ----------------------------------------------------------------------------------


def _of_case(
    truss: Truss, case: LoadCase, equilibrium: matrix.Equilibrium, members: Sequence[str], tell: Callable[[str], None]
) -> CaseForces:
    tell(f"load case {case.name}")
    bars = {bar.name: bar for bar in equilibrium.bars}
    exact = {name: equilibrium.tensions[name] * bars[name].length for name in members}
    run = stiffness.solve(truss, case)
    numeric = {**run.reactions, **stiffness.member_forces(truss, case)}
    loads = [abs(part) for pair in case.as_floats().values() for part in pair]
    largest = max([largest_confirmed(numeric, equilibrium, bars, lambda amount: amount), *loads])
    bound = tolerance_at(run.condition) * largest
    # written so that a value that is no number differs
    differing = tuple(name for name, force in exact.items() if not abs(float(force) - numeric[name]) <= bound)
    return CaseForces(case.name, exact, {name: numeric[name] for name in members}, differing, run.condition)


def _of_moving(truss: Truss, load: MovingLoad, members: Sequence[str], tell: Callable[[str], None]) -> MovingForces:
    tell(f"moving load {load.name}")
    lines = {line.target: line for line in influence_lines(truss, members, load.along)}
    found = {name: extremes(line, load.trains) for name, line in lines.items()}
    differing = tuple(name for name, line in lines.items() if not line.agreed)
    return MovingForces(load.name, lines, found, differing, max((line.condition for line in lines.values()), default=0))


# --- combining --------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Effect:
    """A force under one load case, with the stand of its train where it moves."""

    value: Exact
    extreme: Extreme | None


@dataclass(frozen=True, slots=True)
class Share:
    """What a case brings into a combination: its factor as taken, its effect, their product; no factor: it is away."""

    case: str
    factor: Exact | None
    effect: Effect
    value: Exact


def _extremes_of(
    member: str, combinations: Sequence[Combination], effects: Mapping[str, tuple[Effect, Effect]]
) -> MemberEnvelope:
    shares: dict[tuple[str, tuple[Exact, ...], bool, Sense], Share] = {}

    def share(case: str, factors: tuple[Exact, ...], optional: bool, sense: Sense) -> Share:
        key = (case, factors, optional, sense)
        if key not in shares:
            shares[key] = _adverse(case, factors, effects[case], optional=optional, sense=sense)
        return shares[key]

    both: dict[Sense, list[Choice]] = {"max": [], "min": []}
    for each in combinations:
        for sense, choices in both.items():
            taken = [share(case, factors, case in each.optional, sense) for case, factors in each.factors]
            choices.append(_choice(each.name, taken))
    largest, least = both["max"], both["min"]
    return MemberEnvelope(member, _furthest(largest, "max"), _furthest(least, "min"), tuple(largest), tuple(least))


def _adverse(
    case: str, factors: tuple[Exact, ...], effects: tuple[Effect, Effect], *, optional: bool, sense: Sense
) -> Share:
    """Return the adverse share of a case; of equal ones the first written, and there rather than away."""
    offered = [
        Share(case, factor, effect, factor * effect.value) for factor in factors for effect in _different(effects)
    ]
    if optional:
        offered.append(Share(case, None, effects[0], ZERO))
    values = [each.value for each in offered]
    return offered[furthest(values, sense)]


def _different(effects: tuple[Effect, Effect]) -> tuple[Effect, ...]:
    return effects[:1] if effects[0] is effects[1] else effects


def _choice(combination: str, taken: Sequence[Share]) -> Choice:
    factors = tuple(
        (each.case, each.factor) for each in taken if each.factor is not None and each.effect.extreme is None
    )
    stands = tuple(
        (each.case, each.factor, each.effect.extreme)
        for each in taken
        if each.factor is not None and each.effect.extreme is not None
    )
    return Choice(combination, factors, stands, sum((each.value for each in taken), start=ZERO))


def _furthest(choices: Sequence[Choice], sense: Sense) -> Choice:
    return choices[furthest([choice.value for choice in choices], sense)]


def furthest(values: Sequence[Exact], sense: Sense) -> int:
    """Return the place of the largest or least value, the first of equal ones.

    Floats sort out what is far behind; what is near is compared exactly.
    """
    sign = 1.0 if sense == "max" else -1.0
    near = [sign * float(value) for value in values]
    best = max(near)
    slack = NEARLY * max(map(abs, near))
    place = -1
    for candidate, value in enumerate(near):
        if best - value > slack:
            continue
        if place < 0 or (values[candidate] - values[place]).sign() * sign > 0:
            place = candidate
    return place
