"""Both routes together: what was asked for, derived by hand, checked by stiffness, judged.

A disagreement is a verdict, never an exception: the caller, the sheet and the exit code all see it.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

from trusscalc.convenience import Convenient
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact, symbol
from trusscalc.loads import LoadCase
from trusscalc.numericruns import runs_of
from trusscalc.samples import at_sample, samples, vanishing
from trusscalc.statics import matrix
from trusscalc.statics.cuts import Structure, structure_of
from trusscalc.statics.owncuts import OwnCut
from trusscalc.statics.plan import PlannedStep, plan
from trusscalc.statics.prices import Preference
from trusscalc.statics.steps import Step, carried_letter, section_letter, write_close, write_step
from trusscalc.statics.zeroforce import zero_force_members
from trusscalc.truss import Truss
from trusscalc.verdicts import TOLERANCE, ForceCheck, Judge

__all__ = [
    "TOLERANCE",
    "ForceCheck",
    "MemberCheck",
    "Redundancy",
    "Statics",
    "check_members",
    "check_reactions",
    "check_steps",
]


@dataclass(frozen=True, slots=True)
class Statics:
    """The count and the rank: joints, members, reactions, rank of the equilibrium matrix, and what follows."""

    joints: int
    members: int
    reactions: int
    rank: int
    stable: bool
    determinate: bool


@dataclass(frozen=True, slots=True)
class Redundancy:
    """Why statics alone does not decide everything.

    Attributes
    ----------
    degree, external, internal : int
        Degree of static indeterminacy, and its parts: what the reactions bring in, and self-stress of the
        members alone.
    sharing : tuple of tuple of str
        Groups of members and reactions that share redundancies.
    """

    degree: int
    external: int
    internal: int
    sharing: tuple[tuple[str, ...], ...]


@dataclass(frozen=True, slots=True)
class MemberCheck(Convenient):
    """The result of a check.

    Attributes
    ----------
    truss, case
        What was checked; the case knows the symbols of the dimensions too.
    statics : Statics
        Count and rank.
    members : dict of str to ForceCheck
        What was asked for, in the order asked.
    reactions : dict of str to ForceCheck
        All reactions.
    steps : tuple of Step
        The derivation, every step only after what it uses.
    residuals : dict of str to (Exact, Exact)
        Load plus bar forces at every joint where they are not exactly zero; empty when all is well.
    largest_force : float
        Largest size of any load, and of any member force or reaction of the numeric route that the exact solution
        confirms.
    tolerance : float
        Share of the largest force up to which the routes agree.
    condition : float
        Condition estimate of the numeric route.
    stiffness_residual : float
        Largest joint imbalance of the numeric route over the largest force.
    agreed : bool
        True only if every member asked for, every reaction and every joint agree.
    zero_members : dict of str to str
        Members whose force is exactly zero, each with the reason.
    redundancy : Redundancy or None
        For a statically indeterminate truss: the degree, and who shares it.
    unstable_where : tuple of str
        For symbolic dimensions: expressions whose vanishing makes the truss a mechanism.
    cuts : dict of str to tuple of str
        For some members the joints of the cut the engineer chose.
    prefer : str
        What the engineer leaned to: ``sections``, ``joints`` or ''.
    own_checks : bool
        Whether the steps have their checks by unused equations; a sheet is made only with them.
    """

    truss: Truss
    case: LoadCase
    statics: Statics
    members: Mapping[str, ForceCheck]
    reactions: Mapping[str, ForceCheck]
    steps: tuple[Step, ...]
    residuals: Mapping[str, tuple[Exact, Exact]]
    largest_force: float
    tolerance: float
    condition: float
    stiffness_residual: float
    agreed: bool
    zero_members: Mapping[str, str] = field(default_factory=dict)
    redundancy: Redundancy | None = None
    unstable_where: tuple[str, ...] = ()
    cuts: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    prefer: Preference = ""
    own_checks: bool = True

    def value(self, amount: Exact) -> Exact:
        """Return an amount with all symbols, of dimensions and of loads, replaced by their stated values."""
        return self.case.value(amount)


def check_members(
    truss: Truss,
    case: LoadCase,
    members: Iterable[str] | Literal["all"],
    *,
    cuts: Mapping[str, OwnCut] | None = None,
    prefer: Preference = "",
    own_checks: bool = True,
) -> MemberCheck:
    """Return the forces of chosen members by hand methods, each beside an independent stiffness value.

    Parameters
    ----------
    truss : Truss
        The truss.
    case : LoadCase
        Its loads.
    members : iterable of str, or "all"
        Member names, ends in either order; duplicates count once.
    cuts : mapping of str to OwnCut, optional
        For some members the cut to derive them from (``truss.cut(...)``); they need not be named in
        ``members`` again.
    prefer : str
        ``sections`` or ``joints``: what to lean to where both are possible.
    own_checks : bool
        Whether each step gets a check by an equation not used before, as a sheet needs it.

    Raises
    ------
    UnknownNameError
        For a member that is not there.
    InputError
        For several members that are not there, loads on joints that are not there, or nothing asked for.
    UnstableTrussError
        When the truss cannot resist every load.
    NoCutError
        When a cut given for a member cannot give it.

    Examples
    --------
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> check = check_members(truss, LoadCase("dead", {"C": (0, -2)}), ["C-A"])
    >>> check.members["A-C"].exact, check.members["A-C"].sense, check.agreed
    (Exact('-sqrt(5)'), 'C', True)
    """
    _refuse_loads_off(truss, case)
    own = {truss.member(name).name: cut.kept for name, cut in (cuts or {}).items()}
    wanted = tuple(dict.fromkeys((*members_named(truss, members, also=bool(own)), *own)))
    return _planned(truss, case, wanted, own, prefer, own_checks=own_checks)


def check_reactions(truss: Truss, case: LoadCase, *, prefer: Preference = "", own_checks: bool = True) -> MemberCheck:
    """Return all reactions by hand methods, each beside an independent stiffness value; no member is asked for.

    Parameters and errors are those of ``check_members``.
    """
    _refuse_loads_off(truss, case)
    return _planned(truss, case, (), {}, prefer, own_checks=own_checks)


def check_steps(truss: Truss, case: LoadCase, steps: Sequence[Step], members: Sequence[str]) -> MemberCheck:
    """Return the check of a derivation that is already written, such as that of an influence line's largest ordinate.

    Parameters
    ----------
    truss, case
        What the steps are about; without symbols in the dimensions.
    steps : sequence of Step
        Each after what it uses, with its check.
    members : sequence of str
        Members to be judged, as the truss spells them.

    Raises
    ------
    UnstableTrussError
        When the truss cannot resist every load.
    """
    equilibrium = matrix.solve(truss, case)
    structure = structure_of(truss, case, equilibrium.bars)
    found = {name: force for step in steps for name, force in step.results.items()}
    tensions = {name: force / structure.bars[name].length for name, force in found.items()}
    return _judged(case, members, _Derived(truss, structure, equilibrium, tuple(steps), tensions))


def _refuse_loads_off(truss: Truss, case: LoadCase) -> None:
    faults = case.faults(truss)
    if faults:
        raise InputError(faults)


def _planned(
    truss: Truss,
    case: LoadCase,
    wanted: tuple[str, ...],
    own: Mapping[str, tuple[str, ...]],
    prefer: Preference,
    *,
    own_checks: bool,
) -> MemberCheck:
    """Plan, write and judge."""
    if truss.symbols:
        faults = _different_values(truss, case)
        if faults:
            raise InputError(faults)
        case = LoadCase(case.name, case.loads, symbols=[*truss.symbols, *dict(case.symbols).items()])
        matrix.solve(*at_sample(truss, case, samples(truss, case)[0]))  # stable at the stated values
    equilibrium = matrix.solve(truss, case)
    structure = structure_of(truss, case, equilibrium.bars)
    decided = [name for name in wanted if name in equilibrium.tensions]
    steps, tensions = _derivation(structure, equilibrium, decided, case, own, prefer, own_checks=own_checks)
    check = _judged(case, wanted, _Derived(truss, structure, equilibrium, steps, tensions))
    return replace(check, cuts=own, prefer=prefer, own_checks=own_checks)


@dataclass(frozen=True, slots=True)
class _Derived:
    """What the hand route gave: steps, and t = N / L of every force found in them."""

    truss: Truss
    structure: Structure
    equilibrium: matrix.Equilibrium
    steps: tuple[Step, ...]
    tensions: Mapping[str, Exact]


def _judged(case: LoadCase, wanted: Sequence[str], derived: _Derived) -> MemberCheck:
    """Set the numeric route beside what was derived."""
    truss, structure, equilibrium = derived.truss, derived.structure, derived.equilibrium
    runs, residual = runs_of(truss, case)
    judge = Judge(case, structure, equilibrium, derived.steps, derived.tensions, runs)
    checked = {name: judge.verdict(name) for name in wanted}
    reactions = {link.name: judge.verdict(link.name) for link in truss.links}
    residuals = _residuals(equilibrium, case, derived.tensions)
    agreed = not residuals and all(item.verdict == "agrees" for item in (*checked.values(), *reactions.values()))
    determinate = equilibrium.degree == 0
    counts = (len(truss.joints), len(truss.members), len(truss.links), equilibrium.rank)
    return MemberCheck(
        truss=truss,
        case=case,
        statics=Statics(*counts, stable=True, determinate=determinate),
        members=checked,
        reactions=reactions,
        steps=derived.steps,
        residuals=residuals,
        largest_force=judge.largest,
        tolerance=judge.tolerance,
        condition=runs.condition,
        stiffness_residual=residual,
        agreed=agreed,
        zero_members=zero_force_members(structure, equilibrium),
        redundancy=None if determinate else _redundancy(equilibrium),
        unstable_where=vanishing(equilibrium.tensions.values()) if truss.symbols else (),
    )


def _different_values(truss: Truss, case: LoadCase) -> list[str]:
    stated = dict(case.symbols)
    return [
        f"[symbols] {name}: truss and load case give it different values"
        for name, value in truss.symbols
        if name in stated and stated[name] != value
    ]


def _redundancy(equilibrium: matrix.Equilibrium) -> Redundancy:
    degrees = (equilibrium.degree, equilibrium.external_degree, equilibrium.internal_degree)
    return Redundancy(*degrees, equilibrium.sharing)


def members_named(truss: Truss, members: Iterable[str] | Literal["all"], *, also: bool = False) -> tuple[str, ...]:
    """Return the members asked for as the truss spells them, each once.

    Parameters
    ----------
    truss : Truss
        The truss.
    members : iterable of str, or "all"
        Their ends in either order.
    also : bool
        Whether something else was asked for too, so that no member may be named.

    Raises
    ------
    UnknownNameError, InputError
        For one member that is not there; for several, or when nothing was asked for.
    """
    if isinstance(members, str):
        if members == "all":
            return tuple(member.name for member in truss.members)
        members = [members]
    by_ends = {frozenset((member.start, member.end)): member.name for member in truss.members}
    found, unknown = [], []
    for name in members:
        ends = frozenset(part.strip() for part in name.split("-"))
        try:
            found.append(by_ends[ends] if ends in by_ends else truss.member(name).name)
        except UnknownNameError as problem:
            unknown.append(problem)
    if len(unknown) > 1:
        raise InputError(tuple(dict.fromkeys(map(str, unknown))))
    if unknown:
        raise unknown[0]
    if not found and not also:
        message = "no member was asked for; name some, or say all"
        raise InputError(message)
    return tuple(dict.fromkeys(found))


def _derivation(  # noqa: PLR0917 - called in one place
    structure: Structure,
    equilibrium: matrix.Equilibrium,
    wanted: list[str],
    case: LoadCase,
    own: Mapping[str, tuple[str, ...]],
    prefer: Preference,
    *,
    own_checks: bool = True,
) -> tuple[tuple[Step, ...], dict[str, Exact]]:
    """Write the planned steps one after the other; a value enters an equation only after its own step."""
    writer = Writer(structure, own_checks=own_checks)
    usable = {name: kept for name, kept in own.items() if name in equilibrium.tensions}
    for planned in plan(structure, equilibrium, wanted, case.as_floats(), cuts=usable, prefer=prefer):
        writer.write(planned)
    return tuple(writer.steps), writer.tensions


class Writer:
    """Writes steps one after the other: letters of sections, letters of carried forces, values found so far."""

    def __init__(self, structure: Structure, *, own_checks: bool) -> None:
        """Begin with nothing found; ``own_checks`` asks for a check of each step by an unused equation."""
        self.structure = structure
        self.own_checks = own_checks
        self.steps: list[Step] = []
        self.tensions: dict[str, Exact] = {}
        self.sections: dict[frozenset[str], str] = {}
        self.carried: dict[str, str] = {}

    def write(self, planned: PlannedStep) -> None:
        """Write one step and take over what it finds."""
        letter = ""
        for cut, _ in planned.bodies:
            if cut.kind == "section":
                # the left and the right part of one section share its letter, so support links do not count
                members = frozenset(name for name in cut.bars if not self.structure.bars[name].is_link)
                letter = self.sections.setdefault(members, section_letter(len(self.sections)))
        carries = {name: carried_letter(len(self.carried) + place) for place, name in enumerate(planned.carries)}
        self.carried |= carries
        for name, force in carries.items():
            self.tensions[name] = symbol(force) / self.structure.bars[name].length
        number = len(self.steps) + 1
        if planned.closes:
            carried = {name: self.carried[name] for name in planned.solves}
            step, found = write_close(
                self.structure, number, planned.bodies, carried, self.tensions, letter=letter, carries=carries
            )
            values = {carried[name]: force for name, force in step.results.items()}
            self.tensions = {name: tension.substitute(values) for name, tension in self.tensions.items()}
        else:
            step, found = write_step(
                self.structure,
                number,
                planned.bodies,
                planned.solves,
                self.tensions,
                letter=letter,
                carries=carries,
                with_check=self.own_checks,
            )
        self.steps.append(step)
        self.tensions.update(found)


def _residuals(
    equilibrium: matrix.Equilibrium, case: LoadCase, tensions: Mapping[str, Exact]
) -> dict[str, tuple[Exact, Exact]]:
    """Return joints out of balance when the hand values replace those of the whole solution."""
    everything = {**equilibrium.tensions, **tensions}
    if len(everything) < len(equilibrium.bars):
        return {}  # an indeterminate truss: single joints cannot be closed without the undecided bars
    residuals = matrix.joint_residuals(equilibrium.bars, case, everything)
    return {joint: sums for joint, sums in residuals.items() if sums[0] or sums[1]}
