"""Largest tension and compression of each member over all combinations, and which combination it is.

Forces add: the force under a combination is the sum of the factored case forces, so all cases are solved once,
exactly, and every combination is a sum. Of a pair of factors the adverse one is taken, an optional case and a moving
load stay away where they would help, for each member and either sense on its own. What governs is then a load case
like any other, and the ordinary hand check is written for it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

from trusscalc import stiffness
from trusscalc.convenience import Convenient
from trusscalc.errors import InputError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.influence import InfluenceLine, influence_lines
from trusscalc.loads import Combination, JointLoad, LoadCase
from trusscalc.membercheck import members_named
from trusscalc.roots import sqrt
from trusscalc.statics import matrix
from trusscalc.superposition import Choice, Effect, MemberEnvelope, Sense, extremes_over, furthest
from trusscalc.trains import MovingLoad
from trusscalc.travel import Extreme, extremes
from trusscalc.truss import Link, Truss
from trusscalc.trussfile import TrussFile
from trusscalc.verdicts import largest_confirmed, tolerance_at, undecided_reason

__all__ = [
    "CaseForces",
    "Choice",
    "Envelope",
    "MemberEnvelope",
    "MovingForces",
    "Progress",
    "Sense",
    "at_values",
    "envelope",
    "furthest",
    "teller",
]

Progress = Callable[[int, int, str], None]
"""Told what has been done, of how much, and what comes next; may raise to stop, nothing is left half done."""


@dataclass(frozen=True, slots=True)
class CaseForces:
    """Forces under a load case that stands still, by both routes.

    Attributes
    ----------
    name : str
        The case.
    exact : dict of str to Exact
        Members asked for and reactions, from the exact solution of all joint equations.
    numeric : dict of str to float
        The same by the stiffness route.
    differing : tuple of str
        Those for which the routes differ by more than the tolerance.
    condition : float
        Of the numeric route.
    bound : float
        How far apart the routes may be: tolerance times the largest force.
    """

    name: str
    exact: Mapping[str, Exact]
    numeric: Mapping[str, float]
    differing: tuple[str, ...]
    condition: float
    bound: float


@dataclass(frozen=True, slots=True)
class MovingForces:
    """Extremes under a moving load.

    Attributes
    ----------
    name : str
        The moving load.
    lines : dict of str to InfluenceLine
        By member asked for, reaction and bearing.
    extremes : dict of str to (Extreme, Extreme)
        Largest and least.
    differing : tuple of str
        Those whose influence line differs between the routes.
    condition : float
        Of the numeric route.
    """

    name: str
    lines: Mapping[str, InfluenceLine]
    extremes: Mapping[str, tuple[Extreme, Extreme]]
    differing: tuple[str, ...]
    condition: float


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
    reactions : dict of str to MemberEnvelope
        Every reaction that statics decides.
    bearings : dict of str to MemberEnvelope
        For the bearings that must not lift the vertical reaction, upwards positive, as far as statics decides it.
    """

    stated: TrussFile
    combinations: tuple[Combination, ...]
    asked: tuple[str, ...]
    members: Mapping[str, MemberEnvelope]
    undecided: Mapping[str, str]
    cases: Mapping[str, CaseForces]
    moving: Mapping[str, MovingForces]
    tolerance: float
    reactions: Mapping[str, MemberEnvelope] = field(default_factory=dict)
    bearings: Mapping[str, MemberEnvelope] = field(default_factory=dict)

    @property
    def differing(self) -> tuple[tuple[str, str], ...]:
        """Load cases, and members or reactions for which the two routes differ."""
        every: list[CaseForces | MovingForces] = [*self.cases.values(), *self.moving.values()]
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
    links = [link for link in truss.links if link.name in solved[0].tensions]
    bearings = _bearings(truss, links)
    names = [*decided, *(link.name for link in links)]
    cases = [_of_case(truss, case, equilibrium, names, tell) for case, equilibrium in zip(still, solved, strict=False)]
    moves = [_of_moving(truss, load, names, bearings, tell) for load in moving]

    def over_all(name: str) -> MemberEnvelope:
        effects = {each.name: _effects_of_case(each, bearings.get(name, {name: ONE})) for each in cases}
        effects |= {each.name: _effects_of_moving(each, name) for each in moves}
        return extremes_over(name, combinations, effects)

    found = {}
    for name in decided:
        tell(f"member {name}")
        found[name] = over_all(name)
    every: list[CaseForces | MovingForces] = [*cases, *moves]
    condition = max((each.condition for each in every), default=0.0)
    return Envelope(
        stated=stated,
        combinations=tuple(combinations),
        asked=wanted,
        members=found,
        undecided=undecided,
        cases={each.name: each for each in cases},
        moving={each.name: each for each in moves},
        tolerance=tolerance_at(condition),
        reactions={link.name: over_all(link.name) for link in links},
        bearings={joint: over_all(joint) for joint in bearings},
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
    truss: Truss, case: LoadCase, equilibrium: matrix.Equilibrium, names: Sequence[str], tell: Callable[[str], None]
) -> CaseForces:
    tell(f"load case {case.name}")
    bars = {bar.name: bar for bar in equilibrium.bars}
    exact = {name: equilibrium.tensions[name] * bars[name].length for name in names}
    run = stiffness.solve(truss, case)
    numeric = {**run.reactions, **stiffness.member_forces(truss, case)}
    loads = [abs(part) for pair in case.as_floats().values() for part in pair]
    largest = max([largest_confirmed(numeric, equilibrium, bars, lambda amount: amount), *loads])
    bound = tolerance_at(run.condition) * largest
    # written so that a value that is no number differs
    differing = tuple(name for name, force in exact.items() if not abs(float(force) - numeric[name]) <= bound)
    return CaseForces(case.name, exact, {name: numeric[name] for name in names}, differing, run.condition, bound)


def _of_moving(
    truss: Truss, load: MovingLoad, names: Sequence[str], bearings: Mapping[str, Parts], tell: Callable[[str], None]
) -> MovingForces:
    tell(f"moving load {load.name}")
    lines = {line.target: line for line in influence_lines(truss, names, load.along)}
    differing = tuple(name for name, line in lines.items() if not line.agreed)
    condition = max((line.condition for line in lines.values()), default=0)
    lines |= {joint: _of_bearing(joint, parts, lines) for joint, parts in bearings.items()}
    found = {name: extremes(line, load.trains) for name, line in lines.items()}
    return MovingForces(load.name, lines, found, differing, condition)


def _effects_of_case(forces: CaseForces, parts: Parts) -> tuple[Effect, Effect]:
    effect = Effect(sum((part * forces.exact[name] for name, part in parts.items()), ZERO), None)
    return effect, effect


def _effects_of_moving(forces: MovingForces, name: str) -> tuple[Effect, Effect]:
    largest, least = forces.extremes[name]
    return Effect(largest.value, largest), Effect(least.value, least)


# --- bearings ---------------------------------------------------------------------------------------------

Parts = Mapping[str, Exact]
"""Reactions, and the vertical part of each where it is 1."""


def _bearings(truss: Truss, decided: Sequence[Link]) -> dict[str, Parts]:
    """Return what the vertical reaction at each bearing that must not lift is made of, where statics decides it."""
    found: dict[str, Parts] = {}
    for joint in truss.no_uplift:
        links = [link for link in truss.links if link.joint == joint and link.dy]
        if all(link in decided for link in links):
            found[joint] = {link.name: link.dy / sqrt(link.dx * link.dx + link.dy * link.dy) for link in links}
    return found


def _of_bearing(joint: str, parts: Parts, lines: Mapping[str, InfluenceLine]) -> InfluenceLine:
    """Return the influence line of a bearing's vertical reaction."""
    if not parts:
        some = next(iter(lines.values()))
        return replace(some, target=joint, kind="reaction", ordinates=(ZERO,) * len(some.ordinates))
    ordinates = [
        sum((part * height for part, height in zip(parts.values(), heights, strict=True)), ZERO)
        for heights in zip(*(lines[name].ordinates for name in parts), strict=True)
    ]
    return replace(lines[next(iter(parts))], target=joint, kind="reaction", ordinates=tuple(ordinates))
