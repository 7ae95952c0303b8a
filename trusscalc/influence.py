"""Influence lines, exact: a force for a unit load that moves over a chain of joints, straight between them.

By hand as engineers do it: one set of cuts, chosen once for the target, and the same equations written with the unit
load at each joint of the chain in turn. Every ordinate stands beside the equilibrium of all joints, which it must
equal, and beside a stiffness run. For envelopes over many members ``influence_lines`` takes all ordinates from one
elimination with many right sides; both ways give the same, which a test proves.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from trusscalc import stiffness
from trusscalc.chains import Chain, chain_of, positions
from trusscalc.convenience import Convenient
from trusscalc.errors import UndecidedError
from trusscalc.exact import ONE, ZERO, Exact, exact
from trusscalc.influencetargets import Kind, PanelSection, PanelShear, Target, target_of
from trusscalc.loads import LoadCase
from trusscalc.membercheck import Writer
from trusscalc.statics import matrix
from trusscalc.statics.cuts import Structure, bar_lever, structure_of
from trusscalc.statics.plan import PlannedStep, plan
from trusscalc.statics.prices import Preference
from trusscalc.statics.steps import Step, Term
from trusscalc.truss import Truss
from trusscalc.verdicts import compared, largest_confirmed, tolerance_at, undecided_reason

__all__ = ["InfluenceLine", "UndecidedError", "influence_line", "influence_lines"]


@dataclass(frozen=True, slots=True)
class InfluenceLine(Convenient):
    """The influence line of one force, for loads along one chain of joints; force per force, so without unit.

    Attributes
    ----------
    target : str
        A member or reaction as the truss spells it, or ``V(L2-L3)``: the shear in that panel of the chain, the sum of
        all upward forces, loads and reactions, left of a vertical section through it.
    kind : str
        ``member``, ``reaction`` or ``shear``.
    truss : Truss
        With its symbols at their stated values.
    chain : Chain
        The path of the load.
    positions : tuple of Exact
        Horizontal distance of each joint of the chain from its first.
    ordinates : tuple of Exact
        The force for a unit load downward at each joint of the chain: tension, a reaction along its written direction,
        or a shear, positive.
    numeric : tuple of float
        The same by the stiffness route.
    reasons : tuple of str
        For each joint why its ordinate is not agreed, '' where it is.
    tolerance : float
        Share of the largest force up to which the routes agree.
    condition : float
        Condition estimate of the numeric route.
    shown_joint : str
        The joint of the largest ordinate, where the steps have the load; '' without steps.
    steps : tuple of Step
        The derivation of that ordinate, all reactions first, each step with its check where there is one; for the
        others the same equations were written, as far as the target rests on them.
    found : tuple of dict of str to Exact
        For each joint of the chain what those equations gave: every force the target rests on, in the order found.
    section : PanelSection or None
        For a shear, the section through the panel.
    shear_terms : tuple of Term
        For a shear, the loads and reactions left of the section with the load at ``shown_joint``; their products add up
        to the ordinate.
    prefer : str
        What the steps lean to, as asked for.
    """

    target: str
    kind: Kind
    truss: Truss
    chain: Chain
    positions: tuple[Exact, ...]
    ordinates: tuple[Exact, ...]
    numeric: tuple[float, ...]
    reasons: tuple[str, ...]
    tolerance: float
    condition: float
    shown_joint: str = ""
    steps: tuple[Step, ...] = ()
    found: tuple[Mapping[str, Exact], ...] = ()
    section: PanelSection | None = None
    shear_terms: tuple[Term, ...] = ()
    prefer: Preference = ""

    @property
    def agreed(self) -> bool:
        """True only if every ordinate agrees by all routes."""
        return not any(self.reasons)

    @property
    def differing(self) -> dict[str, str]:
        """The joints whose ordinates are not agreed, each with the reason."""
        return {joint: reason for joint, reason in zip(self.chain.joints, self.reasons, strict=True) if reason}

    @property
    def exactness(self) -> str:
        """``exact``, or ``angle rounded`` when an angle that is no surd was rounded on the way in."""
        return "angle rounded" if any(ordinate.rounded for ordinate in self.ordinates) else "exact"

    def ordinate(self, joint: str) -> Exact:
        """Return the ordinate at a joint of the chain (ValueError if it is not on it)."""
        return self.ordinates[self.chain.joints.index(joint)]

    def at(self, position: Exact | int) -> Exact:
        """Return the ordinate at a distance along the chain: straight between joints, 0 off the chain."""
        position = exact(position)
        if position < self.positions[0] or position > self.positions[-1]:
            return ZERO
        after = min(bisect_right(self.positions, position), len(self.positions) - 1)
        start, end = self.positions[after - 1], self.positions[after]
        low, high = self.ordinates[after - 1], self.ordinates[after]
        return low if position == start else low + (position - start) / (end - start) * (high - low)

    @property
    def zeros(self) -> tuple[Exact, ...]:
        """Positions where the line is zero: joints with ordinate zero, and points where it crosses the base line.

        Between two neighbouring joints with ordinate zero it is zero throughout.
        """
        return tuple(place for place, height in self.corners if not height)

    @property
    def positive_area(self) -> Exact:
        """The area above the base line: the force for a unit of load per length on all of it."""
        return sum((area for area in self._areas() if area.sign() > 0), start=ZERO)

    @property
    def negative_area(self) -> Exact:
        """The area below the base line, 0 or less."""
        return sum((area for area in self._areas() if area.sign() < 0), start=ZERO)

    @property
    def corners(self) -> tuple[tuple[Exact, Exact], ...]:
        """Position and ordinate of every joint of the chain and of every crossing of the base line, in order."""
        heights = list(zip(self.positions, self.ordinates, strict=True))
        found = heights[:1]
        for (start, low), (end, high) in pairwise(heights):
            if low.sign() * high.sign() < 0:
                found.append((start + (end - start) * low / (low - high), ZERO))
            found.append((end, high))
        return tuple(found)

    def _areas(self) -> Iterator[Exact]:
        for (start, low), (end, high) in pairwise(self.corners):
            yield (end - start) * (low + high) / 2


def unit_load(joint: str) -> LoadCase:
    """Return a load of one unit of force downward at a joint."""
    return LoadCase(f"unit load at {joint}", {joint: (0, -1)})


def influence_line(
    truss: Truss, target: str, chain: Chain | str | Sequence[str], *, prefer: Preference = ""
) -> InfluenceLine:
    """Return an influence line by the hand method: the same cuts for every position of the unit load.

    Parameters
    ----------
    truss : Truss
        The truss; symbols in it are taken at their stated values.
    target : str
        A member, its ends in either order, a reaction such as ``L0.y``, or ``V(L2-L3)``, the shear in that panel.
    chain : Chain, or joints
        The path of the load, as a chain, a list of joints or a text such as ``"L0,L1,L2"``.
    prefer : str
        ``sections`` or ``joints``: what to lean to where both are possible.

    Raises
    ------
    UnknownNameError
        For a member or reaction that is not there.
    InputError
        For a chain that does not fit, or a panel without a clear vertical section.
    UndecidedError
        When statics alone does not decide the target.
    UnstableTrussError
        When the truss cannot resist every load.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> line = influence_line(truss, "B-A", "A,C,B")
    >>> line.target, line.ordinates, line.positive_area, line.agreed
    ('A-B', (Exact('0'), Exact('1'), Exact('0')), Exact('2'), True)
    """
    runs = _UnitRuns(truss, chain)
    sought = runs.sought(target)
    planned, needed = _planned(runs, sought, prefer)
    places = range(len(runs.cases))
    written = [_written(runs.structure(place), needed) for place in places]
    ordinates = [
        sought.by_hand(runs.structure(place), writer.steps, writer.tensions) for place, writer in enumerate(written)
    ]
    reasons = [
        _hand_fault(runs, sought, place, written[place], ordinates[place])
        or runs.numeric_fault(sought, place, ordinates[place])
        for place in places
    ]
    shown = max(places, key=lambda place: abs(ordinates[place]))
    writer = _written(runs.structure(shown), planned if needed else (), own_checks=True)
    return replace(
        runs.line(sought, ordinates, reasons),
        shown_joint=runs.chain.joints[shown],
        steps=tuple(writer.steps),
        found=tuple(_forces_found(each.steps) for each in written),
        shear_terms=sought.terms(runs.structure(shown), writer.tensions) if isinstance(sought, PanelShear) else (),
        prefer=prefer,
    )


def influence_lines(
    truss: Truss, targets: Sequence[str], chain: Chain | str | Sequence[str]
) -> tuple[InfluenceLine, ...]:
    """Return many influence lines at once, from one exact elimination and one numeric factor, without derivation.

    Parameters
    ----------
    truss, chain
        As in ``influence_line``.
    targets : sequence of str
        Members, reactions and shears.

    Raises
    ------
    UnknownNameError, InputError, UndecidedError, UnstableTrussError
        As in ``influence_line``, for the first target at fault.
    """
    runs = _UnitRuns(truss, chain)
    lines = []
    for target in targets:
        sought = runs.sought(target)
        ordinates = [runs.exact(sought, place) for place in range(len(runs.cases))]
        reasons = [runs.numeric_fault(sought, place, ordinate) for place, ordinate in enumerate(ordinates)]
        lines.append(runs.line(sought, ordinates, reasons))
    return tuple(lines)


class _UnitRuns:
    """A unit load at each joint of a chain in turn, by all joint equations and by stiffness."""

    def __init__(self, truss: Truss, chain: Chain | str | Sequence[str]) -> None:
        self.truss = truss.at_values()
        self.chain = chain_of(self.truss, chain)
        self.cases = tuple(unit_load(joint) for joint in self.chain.joints)
        self.equilibria = matrix.solve_all(self.truss, self.cases)
        self.bars = self.equilibria[0].bars
        self.numeric = stiffness.solve_all(self.truss, self.cases)
        self.condition = max(run.condition for run in self.numeric)
        self.tolerance = tolerance_at(self.condition)
        self._structure = structure_of(self.truss, LoadCase("", {}), self.bars)
        self._lengths: dict[str, Exact] = {}
        self._largest = [
            max(1.0, largest_confirmed({**run.forces, **run.reactions}, exact_run, self._structure.bars, lambda x: x))
            for run, exact_run in zip(self.numeric, self.equilibria, strict=True)
        ]

    def sought(self, target: str) -> Target:
        """Return what is asked for, when statics decides it."""
        found = target_of(self._structure, self.chain, target)
        for name in found.rests_on:
            if name not in self.equilibria[0].tensions:
                through = "" if name == found.name else f"it rests on {name}, and "
                message = f"{found.name}: {through}{undecided_reason(self.equilibria[0], name)}"
                raise UndecidedError(message, name=found.name)
        return found

    def structure(self, place: int) -> Structure:
        """Return the truss with the unit load at one joint of the chain."""
        return replace(self._structure, loads={self.chain.joints[place]: (ZERO, -ONE)})

    def length(self, bar: str) -> Exact:
        """Return a bar's length, worked out once."""
        if bar not in self._lengths:
            self._lengths[bar] = self._structure.bars[bar].length
        return self._lengths[bar]

    def exact(self, sought: Target, place: int) -> Exact:
        """Return an ordinate from the equilibrium of all joints."""
        return sought.exact(self.equilibria[place].tensions, self.chain.joints[place])

    def numeric_fault(self, sought: Target, place: int, ordinate: Exact) -> str:
        """Return why an ordinate does not agree with the stiffness run, '' if it does."""
        numeric = sought.numeric(self.numeric[place], self.chain.joints[place])
        return compared(float(ordinate) - numeric, self.tolerance, self._largest[place])[1]

    def line(self, sought: Target, ordinates: Sequence[Exact], reasons: Sequence[str]) -> InfluenceLine:
        """Return the line of these ordinates, beside those of the stiffness runs."""
        pairs = zip(self.numeric, self.chain.joints, strict=True)
        return InfluenceLine(
            target=sought.name,
            kind=sought.kind,
            truss=self.truss,
            chain=self.chain,
            positions=positions(self.truss, self.chain),
            ordinates=tuple(ordinates),
            numeric=tuple(sought.numeric(run, joint) for run, joint in pairs),
            reasons=tuple(reasons),
            tolerance=self.tolerance,
            condition=self.condition,
            section=sought.section if isinstance(sought, PanelShear) else None,
        )


# --- by hand ----------------------------------------------------------------------------------------------


def _planned(
    runs: _UnitRuns, sought: Target, prefer: Preference
) -> tuple[tuple[PlannedStep, ...], tuple[PlannedStep, ...]]:
    """Return the steps to all reactions and a target, and those of them that the target rests on.

    They are planned with a unit load at every joint of the chain at once; a bar counts as unloaded only if it is so in
    every position of the load.
    """
    loads = dict.fromkeys(runs.chain.joints, (ZERO, -ONE))
    structure = replace(runs.structure(0), loads=loads)
    equilibrium = runs.equilibria[0]
    ever = {
        name: next((each.tensions[name] for each in runs.equilibria if each.tensions[name]), ZERO)
        for name in equilibrium.tensions
    }
    wanted = [sought.name] if sought.kind == "member" else []
    as_floats = dict.fromkeys(loads, (0.0, -1.0))
    steps = plan(structure, replace(equilibrium, tensions=ever), wanted, as_floats, prefer=prefer)
    return steps, tuple(steps[place] for place in sorted(_needed(structure, steps, sought.rests_on)))


def _needed(structure: Structure, steps: Sequence[PlannedStep], wanted: Iterable[str]) -> set[int]:
    """Return the places of the steps that some bars rest on.

    A bar in an equation stands for the latest step before that gives it, or from which on it is carried; what is
    still open in a carried force rests on the step that closes, too.
    """
    sources: list[dict[str, int]] = [{}]
    for place, step in enumerate(steps):
        sources.append(sources[-1] | dict.fromkeys((*step.carries, *step.solves), place))
    closing = [place for place, step in enumerate(steps) if step.closes]
    waiting = [sources[-1][name] for name in wanted]
    needed: set[int] = set()
    while waiting:
        place = waiting.pop()
        if place in needed:
            continue
        needed.add(place)
        step = steps[place]
        live = {
            name
            for cut, about in step.bodies
            for name in cut.bars
            if bar_lever(structure, structure.bars[name], set(cut.kept), about)
        }
        known = live.union(step.solves) if step.closes else live.difference(step.solves, step.carries)
        waiting += [sources[place][name] for name in known if name in sources[place]]
        if step.provisional:
            waiting.append(next(after for after in closing if after >= place))
    return needed


def _written(structure: Structure, planned: Iterable[PlannedStep], *, own_checks: bool = False) -> Writer:
    """Write the steps for one position of the load."""
    writer = Writer(structure, own_checks=own_checks)
    for step in planned:
        writer.write(step)
    return writer


def _forces_found(steps: Iterable[Step]) -> dict[str, Exact]:
    return {name: force for step in steps for name, force in step.results.items()}


def _hand_fault(runs: _UnitRuns, sought: Target, place: int, writer: Writer, ordinate: Exact) -> str:
    """Return why what was written by hand is not the equilibrium of all joints, '' if it is, exactly."""
    tensions = runs.equilibria[place].tensions
    wrong = [name for name, tension in writer.tensions.items() if tension != tensions[name]]
    forces = _forces_found(writer.steps).items()
    wrong += [name for name, force in forces if name not in wrong and force != tensions[name] * runs.length(name)]
    if ordinate != runs.exact(sought, place) and sought.name not in wrong:
        wrong.append(sought.name)
    if not wrong:
        return ""
    return f"the value of {', '.join(wrong)} by hand differs from the exact solution of all joint equations"
