"""What a chosen cut gives: the free body, its equations, what each leaves unknown, and what is solved by them.

A pure function from truss, loads, kept joints and choice of equation to a record. Every value comes from a written
step, proven as on the sheet, and carries its verdict against the stiffness route; the page only shows it.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, replace

from trusscalc.convenience import Convenient
from trusscalc.errors import NoCutError
from trusscalc.exact import ZERO, Exact
from trusscalc.loads import LoadCase
from trusscalc.membercheck import ForceCheck, MemberCheck, check_members
from trusscalc.sheet.words import about_words, bar, letters_of, listed
from trusscalc.statics import matrix
from trusscalc.statics.cutreport import Possibility, cut_report
from trusscalc.statics.cuts import About, Cut, Structure, bar_lever, cut_of, structure_of
from trusscalc.statics.owncuts import OwnCut
from trusscalc.statics.steps import Equation, Step, StepError, section_letter, write_equation, write_step
from trusscalc.truss import Truss


@dataclass(frozen=True, slots=True)
class Answer(Convenient):
    """What a cut gives under a load case.

    Attributes
    ----------
    cut : OwnCut
        The cut.
    letter : str
        The section's letter, '' for a joint or the whole truss.
    members, reactions : tuple of str
        What holds the free body: members cut, and support reactions on it.
    unknown : tuple of str
        Those whose force is not known beforehand: not from the whole truss, nor from what was kept.
    possibilities : tuple of Possibility
        Equations worth writing, those with fewest unknowns first.
    about : About or None
        The equation the engineer chose, None for the tool's own choice.
    equation : Equation or None
        The chosen equation when it decides nothing, in symbols; its values have no meaning.
    steps : tuple of Step
        What is solved, each step written and proven.
    check : MemberCheck
        What the steps belong to: verdicts, and the steps they rest on before them.
    reason : str
        Why nothing is solved, '' when something is.
    nearest : tuple of str
        The joints of the nearest body that decides one of the cut bars, when nothing is solved.
    """

    cut: OwnCut
    letter: str
    members: tuple[str, ...]
    reactions: tuple[str, ...]
    unknown: tuple[str, ...]
    possibilities: tuple[Possibility, ...]
    about: About | None
    equation: Equation | None
    steps: tuple[Step, ...]
    check: MemberCheck
    reason: str = ""
    nearest: tuple[str, ...] = ()

    @property
    def solved(self) -> dict[str, Exact]:
        """The forces found, exactly."""
        return {name: value for step in self.steps for name, value in step.results.items()}

    @property
    def dropped(self) -> tuple[str, ...]:
        """Cut bars that drop out of the equation shown."""
        shown = self.equation or (self.steps[0].equations[0] if self.steps else None)
        return shown.dropped if shown else ()

    def force(self, name: str) -> ForceCheck:
        """Return the verdict on a force found."""
        return self.check.members[name] if name in self.check.members else self.check.reactions[name]


def answer(own: OwnCut, case: LoadCase, about: About | None = None, *, earlier: MemberCheck | None = None) -> Answer:
    """Return what a cut gives.

    Parameters
    ----------
    own : OwnCut
        The cut.
    case : LoadCase
        The loads on the truss.
    about : About, optional
        The one equation to write; without it, each force that a single equation gives is solved, or those that
        several equations of the body give together.
    earlier : MemberCheck, optional
        What has been derived before, of the same truss and loads: its results count as known. Without it, what
        ``reactions_only`` gives, which many answers can share.

    Raises
    ------
    UnstableTrussError
        When the truss cannot resist every load.

    Examples
    --------
    >>> from trusscalc.statics.owncuts import own_cut
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> found = answer(own_cut(truss, keep=["A"]), LoadCase("dead", {"C": (0, -2)}))
    >>> {name: str(found.force(name).sense) for name in found.solved}
    {'A-C': 'C', 'A-B': 'T'}
    """
    return _Answering(own, case, earlier).answer(about)


class _Answering:
    """One answer in the making: truss and loads indexed, what is known, what the cut goes through."""

    def __init__(self, own: OwnCut, case: LoadCase, earlier: MemberCheck | None) -> None:
        self.own = own
        self.earlier = earlier or reactions_only(own.truss, case)
        self.before = self.earlier.steps
        links = {link.name for link in own.truss.links}
        self.members = tuple(name for name in own.bars if name not in links)
        self.structure: Structure = structure_of(own.truss, self.earlier.case)
        tensions = matrix.solve(own.truss, self.earlier.case).tensions
        found = {name for step in self.before for name in step.results}
        self.known: Mapping[str, Exact] = {name: tensions[name] for name in self.structure.bars if name in found}
        self.cut: Cut = cut_of(self.structure, own.kept)
        self.letter = self._letter()

    def _letter(self) -> str:
        """Return the section's letter: its own if it had one before, else the next."""
        if self.cut.kind != "section":
            return ""
        letters = letters_of(self.structure, self.before)
        return letters.get(frozenset(self.members)) or section_letter(len(set(letters.values())))

    def answer(self, about: About | None) -> Answer:
        """Return the answer about the chosen centre or direction, or all that single equations give."""
        report = cut_report(self.own, self.earlier.case)
        ways = tuple(sorted((self._with_known(way) for way in report.possibilities), key=lambda p: len(p.unknown)))
        steps: tuple[Step, ...] = ()
        equation, reason = None, ""
        if about is not None:
            unknown = self._unknown_in(about)
            if len(unknown) == 1:
                steps = (self._step(1, about, unknown[0]),)
            else:
                equation = write_equation(self.structure, self.cut, about, self._blank(), unknown)
                reason = _why_not(about, unknown)
        else:
            steps = tuple(self._alone(ways)) or self._together(report.together)
            reason = "" if steps else report.reason or self._nothing_new()
        useless = not report.solves and not report.together
        return Answer(
            cut=self.own,
            letter=self.letter,
            members=self.members,
            reactions=tuple(name for name in self.own.bars if name not in self.members),
            unknown=tuple(name for name in self.own.bars if name not in self.known),
            possibilities=ways,
            about=about,
            equation=equation,
            steps=steps,
            check=self._checked(steps),
            reason=reason,
            nearest=report.nearest if useless and not steps else (),
        )

    def _with_known(self, way: Possibility) -> Possibility:
        """Return a possibility in which everything derived before counts as known."""
        unknown = tuple(name for name in way.unknown if name not in self.known)
        known = {*way.known, *way.unknown} - set(unknown)
        return Possibility(way.about, unknown, tuple(name for name in self.cut.bars if name in known))

    def _unknown_in(self, about: About) -> tuple[str, ...]:
        kept = frozenset(self.cut.kept)
        return tuple(
            name
            for name in self.cut.bars
            if name not in self.known and bar_lever(self.structure, self.structure.bars[name], kept, about)
        )

    def _alone(self, ways: Collection[Possibility]) -> Iterator[Step]:
        """Yield a step for each force that one equation gives, by the simplest of them."""
        done: set[str] = set()
        for way in ways:
            if len(way.unknown) == 1 and way.unknown[0] not in done:
                done.add(way.unknown[0])
                yield self._step(len(done), way.about, way.unknown[0])

    def _step(self, place: int, about: About, name: str) -> Step:
        number = len(self.before) + place
        step, _ = write_step(
            self.structure, number, ((self.cut, about),), (name,), dict(self.known), letter=self.letter
        )
        return step

    def _together(self, names: Collection[str]) -> tuple[Step, ...]:
        """Return the step that solves two or three forces of the body together, as a check with this cut writes it."""
        if not names:
            return ()
        first = next(name for name in names if name in self.members)
        found = check_members(self.own.truss, self.earlier.case, [first], cuts={first: self.own})
        step = next(step for step in found.steps if first in step.solves)
        return (replace(step, number=len(self.before) + 1, letter=self.letter),)

    def _nothing_new(self) -> str:
        open_forces = [name for name in self.own.bars if name not in self.known]
        if open_forces:
            return f"what is known already leaves {listed(map(bar, open_forces))} in its equations, never one alone"
        return "every force on this body is known already"

    def _blank(self) -> dict[str, Exact]:
        return {name: self.known.get(name, ZERO) for name in self.cut.bars}

    def _checked(self, steps: tuple[Step, ...]) -> MemberCheck:
        """Return the check with the new steps, once each of their results is what its verdict was made of."""
        found = {name: value for step in steps for name, value in step.results.items()}
        members = self._judged([name for name in found if name in self.members])
        for name, value in found.items():
            judged = members.get(name) or self.earlier.reactions[name]
            if judged.exact != value:
                message = f"{name}: this cut gives another force than the equilibrium of all joints"
                raise StepError(message)
        return replace(
            self.earlier,
            steps=(*self.before, *steps),
            members={**self.earlier.members, **members},
            own_checks=True,
        )

    def _judged(self, names: Collection[str]) -> dict[str, ForceCheck]:
        """Return the verdict on each force found, made where the force is derived once more from the same cut."""
        if not names:
            return {}
        truss, case = self.own.truss, self.earlier.case
        try:
            check = check_members(truss, case, [], cuts=dict.fromkeys(names, self.own), own_checks=False)
        except NoCutError:  # it takes what was kept before, so the tool derives it its own way
            check = check_members(truss, case, names, own_checks=False)
        return dict(check.members)


def reactions_only(truss: Truss, case: LoadCase) -> MemberCheck:
    """Return a check of which only the reactions are left: what is known before any member is.

    Raises
    ------
    UnstableTrussError
        When the truss cannot resist every load.
    """
    check = check_members(truss, case, [truss.members[0].name], own_checks=False)
    links = {link.name for link in truss.links}
    return replace(check, members={}, steps=tuple(_of_reactions(check, links)), own_checks=True)


def _of_reactions(check: MemberCheck, links: Collection[str]) -> Iterator[Step]:
    """Yield the steps that find reactions from the whole truss or its hinged parts: those before any member's."""
    for step in check.steps:
        if not set(step.solves) <= set(links):
            return
        yield step


def _why_not(about: About, unknown: Collection[str]) -> str:
    what = about_words(about)
    if not unknown:
        return f"{what} hold known forces alone: a check of what is known, no new force"
    return f"{what} leave {listed(map(bar, unknown))} unknown, and one equation gives one force"
