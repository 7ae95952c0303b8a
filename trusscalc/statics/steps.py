"""Each step written and solved: the equation in terms of our own, the unknown, and the proof that it holds.

An equation is a list of terms, each with the coefficient it is written with. Terms are summed exactly in
the number field as lever times tension coefficient, lever N / L, so that a length which is a nested root
never enters the proof; only the printed coefficient lever / L and force N = t L hold it.
"""

from __future__ import annotations

from collections import ChainMap
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Literal

from trusscalc.convenience import Convenient
from trusscalc.errors import TrusscalcError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.roots import sqrt
from trusscalc.statics.cuts import (
    SUM_X,
    SUM_Y,
    About,
    Cut,
    Structure,
    about_joint,
    bar_lever,
    complement,
    cut_of,
)

TermKind = Literal["reaction", "load", "member"]
StepKind = Literal["joint", "section", "whole", "pair", "close"]


class StepError(TrusscalcError, ArithmeticError):
    """A step that does not hold: an error in this program, never in the input."""


@dataclass(frozen=True, slots=True)
class Term:
    """One term of an equation: coefficient times force.

    Attributes
    ----------
    kind : str
        ``reaction``, ``load`` or ``member``.
    name : str
        Member or reaction name; for a load the joint.
    axis : str
        For a load, ``x`` or ``y``: the component; '' otherwise.
    lever : Exact
        What the force's t = 1 adds to the sum (length for moments times length; for a load its arm).
    length_squared : Exact
        Square of the bar's length (1 for a load).
    tension : Exact
        t = N / L. For a load its size: positive for the direction it is drawn in.
    scale : Exact
        Square of what the whole sum is divided by: 1, or the squared length of an oblique direction.
    """

    kind: TermKind
    name: str
    axis: str
    lever: Exact
    length_squared: Exact
    tension: Exact
    scale: Exact = ONE

    @property
    def coefficient(self) -> Exact:
        """What the force is multiplied by: its arm (moments) or its cosine (force sums)."""
        return self.lever / self.length_squared / self.scale * sqrt(self.length_squared * self.scale, proven=False)

    @property
    def force(self) -> Exact:
        """The axial force, reaction or load, N = t L."""
        return self.tension * sqrt(self.length_squared, proven=False)

    @property
    def product(self) -> Exact:
        """What the term adds to the sum, in the field (without ``scale``)."""
        return self.lever * self.tension


@dataclass(frozen=True, slots=True)
class Equation:
    """One equilibrium equation of one free body.

    Attributes
    ----------
    about : About
        Moments about a point, or forces along a direction.
    cut : Cut
        The free body.
    terms : tuple of Term
        Reactions, loads, known members, then what the step solves for; no zero coefficients.
    dropped : tuple of str
        Cut bars without a coefficient: their lines pass through the centre or are square to the direction.
    """

    about: About
    cut: Cut
    terms: tuple[Term, ...]
    dropped: tuple[str, ...]

    @property
    def residual(self) -> Exact:
        """The exact sum of all terms: zero in equilibrium."""
        total = ZERO
        for term in self.terms:
            total = total + term.product
        return total


@dataclass(frozen=True, slots=True)
class Step(Convenient):
    """One step of a derivation.

    Attributes
    ----------
    number : int
        1, 2, 3, in the order written.
    kind : str
        ``joint``, ``section``, ``whole``; ``pair`` for two equations on two bodies.
    equations : tuple of Equation
        As many as the step solves forces.
    solves, uses : tuple of str
        Members and reactions found here, and known ones with a coefficient.
    results : dict of str to Exact
        The axial force or reaction of everything in ``solves``.
    letter : str
        The section's letter, '' for joints and the whole truss.
    check : Equation or None
        An equation not used before, with all values known, that sums to zero.
    carries : dict of str to str
        Members whose force is called X, Y, ... from this step on.
    solves_in : tuple of str
        Members found here only in terms of carried forces.
    partial : dict of str to Exact
        Their forces, with the symbols X, Y, ... in them.
    """

    number: int
    kind: StepKind
    equations: tuple[Equation, ...]
    solves: tuple[str, ...]
    uses: tuple[str, ...]
    results: Mapping[str, Exact]
    letter: str = ""
    check: Equation | None = None
    carries: Mapping[str, str] = field(default_factory=dict)
    solves_in: tuple[str, ...] = ()
    partial: Mapping[str, Exact] = field(default_factory=dict)

    @property
    def cut(self) -> Cut:
        """The free body of the step's first equation."""
        return self.equations[0].cut


def section_letter(count: int) -> str:
    """Return the letter of the n-th section (0, 1, ...): a to z without i, l, o, then aa, bb, ..."""
    letters = "abcdefghjkmnpqrstuvwxyz"
    return letters[count % len(letters)] * (1 + count // len(letters))


def write_equation(
    structure: Structure, cut: Cut, about: About, tensions: Mapping[str, Exact], unknown: tuple[str, ...] = ()
) -> Equation:
    """Return the equation of a free body with every force's t from ``tensions``; unknowns are written last."""
    kept = frozenset(cut.kept)
    scale = about.x * about.x + about.y * about.y if about.sum == "force" else ONE
    if not scale.is_rational:  # a direction whose length is a nested root is left unscaled
        scale = ONE
    reactions, members, last, dropped = [], [], [], []
    for name in cut.bars:
        bar = structure.bars[name]
        lever = bar_lever(structure, bar, kept, about)
        if not lever:
            dropped.append(name)
            continue
        kind: TermKind = "reaction" if bar.is_link else "member"
        term = Term(kind, name, "", lever, bar.length_squared, tensions[name], scale)
        if name in unknown:
            last.append(term)
        elif bar.is_link:
            reactions.append(term)
        else:
            members.append(term)
    loads = _load_terms(structure, cut, about, scale)
    return Equation(about, cut, (*reactions, *loads, *members, *last), tuple(dropped))


def _load_terms(structure: Structure, cut: Cut, about: About, scale: Exact) -> list[Term]:
    found = []
    for name in cut.kept:
        if name not in structure.loads:
            continue
        joint = structure.joints[name]
        for axis, amount in zip("xy", structure.loads[name], strict=True):
            lever = about.axis_lever(axis, joint.x, joint.y) if amount else ZERO
            if not lever:
                continue
            if amount.reads_negative():
                amount, lever = -amount, -lever  # noqa: PLW2901 - drawn, and written, the way it acts
            found.append(Term("load", name, axis, lever, ONE, amount, scale))
    return found


def solved_for(equation: Equation, unknown: str) -> Exact:
    """Return t of the one unknown in an equation in which everything else is known."""
    rest, lever = ZERO, ZERO
    for term in equation.terms:
        if term.name == unknown and term.kind != "load":
            lever = term.lever
        else:
            rest = rest + term.product
    if not lever:
        message = f"{unknown} has no coefficient in the equation meant to give it"
        raise StepError(message)
    return -rest / lever


def write_step(
    structure: Structure,
    number: int,
    bodies: tuple[tuple[Cut, About], ...],
    solves: tuple[str, ...],
    known: dict[str, Exact],
    *,
    letter: str = "",
    carries: Mapping[str, str] | None = None,
    with_check: bool = True,
) -> tuple[Step, dict[str, Exact]]:
    """Return a step, and the tension coefficients it found.

    Parameters
    ----------
    structure : Structure
        Truss and loads.
    number : int
        The step's number.
    bodies : tuple of (Cut, About)
        One for each equation.
    solves : tuple of str
        As many unknowns.
    known : dict of str to Exact
        t of everything solved before.
    letter : str
        The section's letter.
    carries : mapping of str to str, optional
        Members carried from this step on, and the letters of their forces; ``known`` holds them already.
    with_check : bool
        Whether an equation not used before is written too.

    Raises
    ------
    StepError
        When an equation does not decide what it should, or its terms do not sum to zero: a defect of the
        program, caught before anything is printed.
    """
    blank = ChainMap(dict.fromkeys(solves, ZERO), known)
    drafts = [write_equation(structure, cut, about, blank, solves) for cut, about in bodies]
    found = _simultaneous(drafts, solves)
    values = ChainMap(found, known)
    equations = tuple(_completed(draft, found) for draft in drafts)
    for equation in equations:
        if equation.residual:
            message = f"step {number}: the terms do not sum to zero"
            raise StepError(message)
    carries = dict(carries or {})
    open_forces = {name for name in solves if set(found[name].symbols) & CARRIED_LETTERS}
    forces = {name: found[name] * structure.bars[name].length for name in solves}
    step = Step(
        number=number,
        kind=_kind(bodies),
        equations=equations,
        solves=tuple(name for name in solves if name not in open_forces),
        uses=_uses(structure, equations, {*solves, *carries}),
        results={name: force for name, force in forces.items() if name not in open_forces},
        letter=letter,
        check=unused_check(structure, equations, values) if with_check and not open_forces else None,
        carries=carries,
        solves_in=tuple(name for name in solves if name in open_forces),
        partial={name: force for name, force in forces.items() if name in open_forces},
    )
    return step, found


def carried_letter(count: int) -> str:
    """Return the letter of the n-th carried force (0, 1, ...): X, Y, Z, then X4, X5, ..."""
    return "XYZ"[count] if count < 3 else f"X{count + 1}"  # noqa: PLR2004 - the alphabet ends


CARRIED_LETTERS = frozenset(carried_letter(count) for count in range(100))
"""Symbols that stand for carried forces, and can stand for nothing else."""


def write_close(
    structure: Structure,
    number: int,
    bodies: tuple[tuple[Cut, About], ...],
    carried: Mapping[str, str],
    known: dict[str, Exact],
    *,
    letter: str = "",
    carries: Mapping[str, str] | None = None,
) -> tuple[Step, dict[str, Exact]]:
    """Return the step that solves for the carried forces, and their tension coefficients.

    Parameters
    ----------
    structure, number, bodies, letter, carries
        As in ``write_step``.
    carried : mapping of str to str
        The carried members and the letters of their forces.
    known : dict of str to Exact
        t of everything solved before, with the letters in it where they are still open.

    Raises
    ------
    StepError
        When the equations do not decide the carried forces: 0 X = 0 occurs, and is caught here.
    """
    equations = tuple(write_equation(structure, cut, about, known, tuple(carried)) for cut, about in bodies)
    rows = []
    for equation in equations:
        rest = equation.residual.substitute(dict.fromkeys(carried.values(), ZERO))
        row = []
        for sought in carried.values():
            unit = {other: ONE if other == sought else ZERO for other in carried.values()}
            row.append(equation.residual.substitute(unit) - rest)
        rows.append([*row, -rest])
    results = dict(zip(carried, eliminated(rows, tuple(carried)), strict=True))
    values = {carried[name]: force for name, force in results.items()}
    for equation in equations:
        if equation.residual.substitute(values):
            message = f"step {number}: the terms do not sum to zero"
            raise StepError(message)
    found = {name: force / structure.bars[name].length for name, force in results.items()}
    step = Step(
        number=number,
        kind="close",
        equations=equations,
        solves=tuple(carried),
        uses=_uses(structure, equations, set(carried)),
        results=results,
        letter=letter,
        carries=dict(carries or {}),
    )
    return step, found


def _kind(bodies: tuple[tuple[Cut, About], ...]) -> StepKind:
    return bodies[0][0].kind if len({cut.kept for cut, _ in bodies}) == 1 else "pair"


def _uses(structure: Structure, equations: tuple[Equation, ...], own: set[str]) -> tuple[str, ...]:
    used = {term.name for equation in equations for term in equation.terms if term.kind != "load"}
    return tuple(name for name in structure.bars if name in used and name not in own)


def _completed(draft: Equation, found: Mapping[str, Exact]) -> Equation:
    """Return the equation with the values just found in place of the unknowns."""
    terms = tuple(
        replace(term, tension=found[term.name]) if term.kind != "load" and term.name in found else term
        for term in draft.terms
    )
    return replace(draft, terms=terms)


def _simultaneous(drafts: list[Equation], solves: tuple[str, ...]) -> dict[str, Exact]:
    """Solve k equations for k unknowns by elimination in the field."""
    if len(solves) == 1:
        return {solves[0]: solved_for(drafts[0], solves[0])}
    rows = []
    for draft in drafts:
        levers = {term.name: term.lever for term in draft.terms if term.kind != "load" and term.name in solves}
        rest = ZERO
        for term in draft.terms:
            if term.kind == "load" or term.name not in solves:
                rest = rest + term.product
        rows.append([levers.get(name, ZERO) for name in solves] + [-rest])
    return dict(zip(solves, eliminated(rows, solves), strict=True))


def eliminated(rows: list[list[Exact]], names: tuple[str, ...]) -> list[Exact]:
    """Return the solution of k equations in k unknowns (coefficients, then the right side, in each row)."""
    for column in range(len(names)):
        pivot = next((row for row in range(column, len(rows)) if rows[row][column]), None)
        if pivot is None:
            message = f"the equations do not decide {', '.join(names)}"
            raise StepError(message)
        rows[column], rows[pivot] = rows[pivot], rows[column]
        head = rows[column][column].inverse()
        rows[column] = [entry * head for entry in rows[column]]
        for row in range(len(rows)):
            if row != column and rows[row][column]:
                factor = rows[row][column]
                rows[row] = [a - factor * b for a, b in zip(rows[row], rows[column], strict=True)]
    return [row[-1] for row in rows]


def unused_check(structure: Structure, equations: tuple[Equation, ...], values: Mapping[str, Exact]) -> Equation | None:
    """Return an equation not used in the step whose forces are all known, or None.

    The other side of the cut about the same centre comes first; for the whole truss, another centre or axis.
    """
    last = equations[-1]
    candidates: list[tuple[Cut, About]] = []
    other = complement(structure, last.cut)
    if other:
        candidates.append((cut_of(structure, other), last.about))
    ends = [end for name in last.cut.bars for end in (structure.bars[name].start, structure.bars[name].end)]
    centres = [about_joint(structure, end) for end in dict.fromkeys(ends) if end in structure.joints]
    candidates += [(last.cut, about) for about in (SUM_Y, SUM_X, *centres)]
    solved = {term.name for equation in equations for term in equation.terms}
    for cut, about in candidates:
        if any((cut.kept, about) == (equation.cut.kept, equation.about) for equation in equations):
            continue
        if about.sum == last.about.sum == "force" and about.axis and about.axis == last.about.axis and cut == last.cut:
            continue
        kept = frozenset(cut.kept)
        live = [n for n in cut.bars if bar_lever(structure, structure.bars[n], kept, about)]
        if live and all(name in values for name in live) and solved.intersection(live):
            return write_equation(structure, cut, about, values)
    return None
