"""One truss being explored: what is chosen, what that gives, and the check that goes on file.

An ``Exploration`` needs no page. Set and read in code it does what the drawing and the form do; shown in a cell it
brings them along. Every move works out everything first and then changes everything at once, so that an error or an
interruption leaves the state before it.
"""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any, Literal

from trusscalc import envelopes
from trusscalc.envelopes import Envelope
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members, members_named
from trusscalc.render.notebook import Bundle
from trusscalc.sheet.words import counted
from trusscalc.statics.cuts import About
from trusscalc.statics.owncuts import OwnCut, own_cut
from trusscalc.trains import Train
from trusscalc.truss import Truss, did_you_mean
from trusscalc.trussfile import TrussFile
from trusscalc.widgets.answers import Answer, answer, reactions_only
from trusscalc.widgets.choices import Choices, names_of, point_of, typed_centre
from trusscalc.widgets.crossings import Point
from trusscalc.widgets.frozen import Present, frozen_bundle
from trusscalc.widgets.longwork import LongWork

if TYPE_CHECKING:
    from trusscalc.widgets.travelling import Travel

Kept = tuple[tuple[str, tuple[str, ...]], ...]


class Exploration:
    """A truss with its load cases, a cut being tried, and the check made of what was kept.

    Parameters
    ----------
    stated : TrussFile
        Truss, cases and combinations.
    case : str
        The case or combination to begin with.
    members : iterable of str
        Members to be checked.
    cuts : mapping of str to OwnCut, optional
        For some members the cut to derive them from.
    screen_of, train_screen_of, work_screen_of : callable, optional
        Make what is shown in a cell, when it is first shown there; without them only the static forms are.

    Raises
    ------
    UnstableTrussError
        When the truss cannot resist every load.
    UnknownNameError
        For a case or a member that is not there.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> trial = Exploration(TrussFile(truss, (LoadCase("dead", {"C": (0, -2)}),)), case="dead")
    >>> trial.cut = ["A"]
    >>> trial.keep("A-C")
    >>> trial.members, trial.check.members["A-C"].exact
    (('A-C',), Exact('-sqrt(5)'))
    """

    def __init__(
        self,
        stated: TrussFile,
        *,
        case: str,
        members: Iterable[str] = (),
        cuts: Mapping[str, OwnCut] | None = None,
        screen_of: Callable[[Exploration], Any] | None = None,
        train_screen_of: Callable[[Travel], Any] | None = None,
        work_screen_of: Callable[[LongWork[Any]], Any] | None = None,
    ) -> None:
        self.stated = stated
        self._screen_of = screen_of
        self._train_screen_of = train_screen_of
        self._work_screen_of = work_screen_of
        self.watchers: list[Callable[[], None]] = []
        self.lock = threading.RLock()
        self._enveloped: Envelope | None = None
        self._screen: Any = None
        self._checks: dict[tuple[str, tuple[str, ...], Kept], MemberCheck] = {}
        own = tuple((self.truss.member(name).name, cut.kept) for name, cut in (cuts or {}).items())
        self._take(replace(Choices(case), cuts=own).checking(self.truss, members))

    # --- what is there ------------------------------------------------------------------------------------

    @property
    def truss(self) -> Truss:
        """The truss."""
        return self.stated.truss

    @property
    def choices(self) -> Choices:
        """Everything chosen, as one record; set, everything is worked out anew."""
        return self._present.choices

    @choices.setter
    def choices(self, choices: Choices) -> None:
        self.change(lambda _: choices)

    def change(self, move: Callable[[Choices], Choices]) -> None:
        """Make a move: from the present choices to others, with everything that follows from them.

        A notebook may run its callbacks in another thread than its cells, so moves wait for each other here.
        """
        with self.lock:
            self._take(move(self._present.choices))
            self._tell_watchers()

    @property
    def present(self) -> Present:
        """What was chosen and what it gives, as one record."""
        return replace(self._present, envelope=self._enveloped)

    @property
    def answer(self) -> Answer | None:
        """What the present cut gives, None without one."""
        return self._present.answer

    @property
    def check(self) -> MemberCheck | None:
        """The check of the members chosen, those with a kept cut derived from it; None while there are none."""
        return self._present.check

    @property
    def cuts(self) -> dict[str, OwnCut]:
        """The cuts kept, by the member each derives: what ``check_members(..., cuts=...)`` takes."""
        return self.choices.own_cuts(self.truss)

    @property
    def names(self) -> tuple[str, ...]:
        """The load cases and combinations that can be chosen."""
        return names_of(self.stated)

    # --- what can be set ----------------------------------------------------------------------------------

    @property
    def case(self) -> str:
        """The load case or combination, by its name."""
        return self.choices.case

    @case.setter
    def case(self, name: str) -> None:
        self.change(lambda choices: choices.with_case(name))

    @property
    def members(self) -> tuple[str, ...]:
        """The members to be checked."""
        return self.choices.members

    @members.setter
    def members(self, names: Iterable[str]) -> None:
        names = tuple(names)
        self.change(lambda choices: choices.checking_only(self.truss, names))

    @property
    def cut(self) -> OwnCut | None:
        """The cut being tried; set as a cut, as the joints to keep, or None for none."""
        return own_cut(self.truss, keep=self.choices.kept) if self.choices.kept else None

    @cut.setter
    def cut(self, cut: OwnCut | Iterable[str] | None) -> None:
        joints = cut.kept if isinstance(cut, OwnCut) else (cut,) if isinstance(cut, str) else tuple(cut or ())
        self.change(lambda choices: choices.keeping(self.truss, joints))

    @property
    def section(self) -> tuple[Point, ...]:
        """The section line as drawn; set as points, as (x, y) or as text such as ``("27/5", "-1")``."""
        return self.choices.line

    @section.setter
    def section(self, points: Sequence[Sequence[object]]) -> None:
        self.draw(points)

    @property
    def about(self) -> About | None:
        """The equation chosen, None where it is left to the tool."""
        return self.choices.about

    @about.setter
    def about(self, about: About | None) -> None:
        self.change(lambda choices: choices.with_about(about))

    @property
    def centre(self) -> str | Point | None:
        """The moment centre chosen: a joint, or a point; None for none."""
        about = self.choices.about
        if about is None or about.sum == "force":
            return None
        return about.joint or (about.x, about.y)

    @centre.setter
    def centre(self, centre: str | Sequence[object] | None) -> None:
        if centre is None or isinstance(centre, str):
            self.about = typed_centre(self.truss, centre or "")
        else:
            self.about = About("moment", *point_of(centre))

    @property
    def direction(self) -> Point | None:
        """The direction forces are summed along, None for none."""
        about = self.choices.about
        return (about.x, about.y) if about is not None and about.sum == "force" else None

    @direction.setter
    def direction(self, direction: Sequence[object] | None) -> None:
        about = None if direction is None else About("force", *point_of(direction))
        if about is not None and not about.x and not about.y:
            message = "forces cannot be summed along (0, 0); give a direction such as (0, 1)"
            raise InputError(message)
        self.about = about

    @property
    def detail(self) -> str:
        """How much of the check is shown: ``summary``, ``members`` or ``all``."""
        return self.choices.detail

    @detail.setter
    def detail(self, detail: str) -> None:
        self.change(lambda choices: choices.with_detail(detail))

    # --- moves --------------------------------------------------------------------------------------------

    def draw(self, points: Sequence[Sequence[object]], *, closed: bool = False) -> None:
        """Draw a section line; what it crosses is decided exactly.

        Parameters
        ----------
        points : sequence of (x, y)
            In the truss's unit of length; numbers as in ``Truss``.
        closed : bool
            Whether the last point is joined to the first.

        Raises
        ------
        InputError, InexactNumberError
            For points that are none, or too few or too many.
        """
        line = [point_of(point) for point in points]
        self.change(lambda now: now.drawn(self.truss, line, closed=closed) if line else now.cleared())

    def other_side(self) -> None:
        """Keep the other part (InputError when there is none)."""
        self.change(lambda choices: choices.other_side(self.truss))

    def take_nearest(self) -> None:
        """Take the nearest cut that gives something (InputError when none was named)."""
        with self.lock:
            nearest = self.answer.nearest if self.answer else ()
            if not nearest:
                message = "no nearer cut was named: the present one gives something, or there is none"
                raise InputError(message)
            self.cut = nearest

    def clear(self) -> None:
        """Give up the cut being tried; cuts kept stay."""
        self.change(Choices.cleared)

    def keep(self, *members: str) -> None:
        """Keep the present cut: derive members from it in the check.

        Parameters
        ----------
        *members : str
            Members cut; without any, those the present cut has just given.

        Raises
        ------
        InputError
            When there is no cut, or it gives nothing.
        NoCutError
            When it cannot give a member named.
        """
        with self.lock:
            if self.answer is None:
                message = "there is no cut to keep; draw one, or set .cut"
                raise InputError(message)
            found = [name for name in self.answer.solved if name in self.answer.members]
            names = [self.truss.member(name).name for name in members] or found
            if not names:
                message = f"this cut gives no member force to keep: {self.answer.reason or 'it gives reactions only'}"
                raise InputError(message)
            self.change(lambda choices: choices.keeping_cut(names))

    def forget(self, *members: str) -> None:
        """Take members, and the cuts kept for them, out of the check; without names, all of them."""
        names = [self.truss.member(name).name for name in members]
        self.change(lambda choices: choices.without(names or choices.members))

    # --- moving loads -------------------------------------------------------------------------------------

    def travel(self, target: str, train: str | Train, along: str | Sequence[str]) -> Travel:
        """Return a train on a chain over the influence line of one force; shown in a cell, it can be dragged.

        Parameters
        ----------
        target : str
            A member, a reaction such as ``L0.y``, or the shear in a panel, ``V(L2-L3)``.
        train : str or Train
            A train of the truss file, or a shipped one, by name; or a train.
        along : str or sequence of str
            A chain of the truss file by name, or joints such as ``"L0,L1,L2"``.

        Raises
        ------
        UnknownNameError, InputError
            For names that are not there, or a chain that does not fit the truss.
        UndecidedError
            When statics does not decide the force.
        """
        from trusscalc.influence import influence_line  # noqa: PLC0415 - most explorations have no train
        from trusscalc.widgets.travelling import Travel  # noqa: PLC0415

        line = influence_line(self.truss, target, self.stated.chain(along))
        trains = (train,) if isinstance(train, Train) else self.stated.train(train)
        return Travel(line, trains, screen_of=self._train_screen_of)

    # --- long work ----------------------------------------------------------------------------------------

    @property
    def envelope(self) -> Envelope | None:
        """The envelope last worked out, None before the first."""
        return self._enveloped

    def work_out_envelope(self, members: Iterable[str] | Literal["all"] = "all") -> LongWork[Envelope]:
        """Begin to work out the envelope of members over all combinations, in the background; return the work.

        ``.result()`` of it waits, ``.stop()`` gives it up; only when all is done does ``envelope`` change.

        Parameters
        ----------
        members : iterable of str, or "all"
            Whose forces.
        """
        wanted = members_named(self.truss, members)
        title = f"Envelope of {counted(len(wanted), 'member')}"
        work = LongWork(
            title,
            lambda progress: envelopes.envelope(self.stated, wanted, progress=progress),
            self._take_envelope,
            screen_of=self._work_screen_of,
        )
        work.watchers.append(lambda: self._tell_watchers() if work.state == "finished" else None)
        return work.start()

    def _take_envelope(self, found: Envelope) -> None:
        self._enveloped = found

    def _tell_watchers(self) -> None:
        with self.lock:
            for watcher in self.watchers:
                watcher()

    # --- on file ------------------------------------------------------------------------------------------

    def frozen(self) -> Bundle:
        """Return what stays on file: figure, equations and verdicts of now, as a notebook shows them."""
        return frozen_bundle(self.present)

    def _ipython_display_(self) -> None:
        """Show the drawing and the form, and beside them the static form, which follows them."""
        if self._screen is None and self._screen_of is not None:
            self._screen = self._screen_of(self)
        if self._screen is not None:
            self._screen.display()
            return
        from IPython.display import display  # noqa: PLC0415 - only where there are cells

        display(self.frozen(), raw=True)

    # --- worked out ---------------------------------------------------------------------------------------

    def _take(self, choices: Choices) -> None:
        """Work out what choices give, then change everything at once."""
        case = self._loads(choices.case)
        check = self._checked(case, choices.members, choices.cuts)
        found = None
        if choices.kept:
            inside = set(choices.kept)
            others = tuple(entry for entry in choices.cuts if set(entry[1]) not in (inside, self._rest(inside)))
            earlier = self._checked(case, (), others) or self._reactions(case)
            found = answer(own_cut(self.truss, keep=choices.kept), case, choices.about, earlier=earlier)
        elif check is None:
            self._reactions(case)  # stable, and the loads fit
        self._present = Present(self.truss, case, choices, found, check)

    def _loads(self, name: str) -> LoadCase:
        if name not in self.names:
            message = f"there is no case or combination {name!r}{did_you_mean(name, self.names)}"
            raise UnknownNameError(message, name=name)
        return self.stated.case(name)

    def _checked(self, case: LoadCase, members: tuple[str, ...], cuts: Kept) -> MemberCheck | None:
        """Return the check of members and kept cuts, worked out once for each; None for nothing to check."""
        if not members and not cuts:
            return None
        key = (case.name, members, cuts)
        if key not in self._checks:
            own = {name: own_cut(self.truss, keep=kept) for name, kept in cuts}
            self._checks[key] = check_members(self.truss, case, members, cuts=own)
        return self._checks[key]

    def _reactions(self, case: LoadCase) -> MemberCheck:
        """Return what is known before any member is, worked out once for each case."""
        key = (case.name, (), ())
        if key not in self._checks:
            self._checks[key] = reactions_only(self.truss, case)
        return self._checks[key]

    def _rest(self, joints: set[str]) -> set[str]:
        return {joint.name for joint in self.truss.joints} - joints
