"""The interactive workbook: draw a cut, see what it gives, keep what goes on file."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

from trusscalc.errors import InputError, RenderError
from trusscalc.loads import LoadCase
from trusscalc.statics.owncuts import OwnCut
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile
from trusscalc.widgets.choices import names_of
from trusscalc.widgets.exploration import Exploration
from trusscalc.widgets.longwork import LongWork

if TYPE_CHECKING:
    from trusscalc.widgets.travelling import Travel

__all__ = ["Exploration", "explore"]


def explore(
    truss: Truss | TrussFile,
    case: str | LoadCase | Iterable[LoadCase] = "",
    members: Iterable[str] = (),
    *,
    cuts: Mapping[str, OwnCut] | None = None,
) -> Exploration:
    """Return a truss to explore: shown in a notebook cell, cuts are drawn across it and answered.

    Parameters
    ----------
    truss : Truss or TrussFile
        The truss, or what a truss file states.
    case : str, LoadCase or iterable of LoadCase
        For a truss: its load case, or several to choose from, of which the first is shown. For a truss file: the name
        of the case or combination to begin with; the first one stated without it.
    members : iterable of str
        Members to be checked, to which others can be added.
    cuts : mapping of str to OwnCut, optional
        For some members the cut to derive them from.

    Raises
    ------
    InputError
        When there are no loads.
    UnknownNameError
        For a case or a member that is not there.
    UnstableTrussError
        When the truss cannot resist every load.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> trial = explore(truss, LoadCase("dead", {"C": (0, -2)}))
    >>> trial.draw([(1, -1), (1, 2)])
    >>> trial.answer.members, sorted(trial.answer.solved)
    (('A-B', 'A-C'), ['A-B', 'A-C'])
    """
    if isinstance(truss, TrussFile):
        if not isinstance(case, str):
            message = "for a truss file give the name of a case or combination that it states"
            raise InputError(message)
        stated, name = truss, case
    else:
        if isinstance(case, str):
            message = "give the loads: a LoadCase, or several of them"
            raise InputError(message)
        stated = TrussFile(truss, (case,) if isinstance(case, LoadCase) else tuple(case))
        name = ""
    names = names_of(stated)
    if not names:
        message = "there are no loads to explore: state a load case"
        raise InputError(message)
    screens: dict[str, Any] = {
        "screen_of": _screen_of,
        "train_screen_of": _train_screen_of,
        "work_screen_of": _work_screen_of,
    }
    return Exploration(stated, case=name or names[0], members=members, cuts=cuts, **screens)


def _screen_of(exploration: Exploration) -> Any:
    """Return drawing and form of an exploration."""
    with _told_what_is_missing():
        from trusscalc.widgets.screen import Screen  # noqa: PLC0415 - what it brings along is slow to import
    return Screen(exploration)


def _train_screen_of(travel: Travel) -> Any:
    """Return drawing and form of a train on its chain."""
    with _told_what_is_missing():
        from trusscalc.widgets.trainscreen import TrainScreen  # noqa: PLC0415
    return TrainScreen(travel)


def _work_screen_of(work: LongWork[Any]) -> Any:
    """Return bar, words and button of long work."""
    with _told_what_is_missing():
        from trusscalc.widgets.workscreen import work_box  # noqa: PLC0415
    return work_box(work)


@contextmanager
def _told_what_is_missing() -> Iterator[None]:
    """Turn a failed import into a RenderError that says what to install."""
    try:
        yield
    except ImportError as problem:
        need = f"the drawing needs {problem.name}, which is not installed"
        message = f"{need}: python -m pip install 'trusscalc[widgets]'"
        raise RenderError(message) from None
