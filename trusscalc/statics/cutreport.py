"""What a cut can do: the equations it allows, what each leaves unknown, what it decides, and if nothing, why."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from trusscalc.convenience import Convenient
from trusscalc.errors import InputError
from trusscalc.exact import ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.loads import LoadCase
from trusscalc.statics import matrix
from trusscalc.statics.cuts import About, about_joint, cut_of, structure_of
from trusscalc.statics.owncuts import OwnCut
from trusscalc.statics.plan import Search
from trusscalc.statics.steps import Equation, write_equation

PLANE = 2


@dataclass(frozen=True, slots=True)
class Possibility:
    """One equation of a cut: what it sums, and the forces unknown and known in it."""

    about: About
    unknown: tuple[str, ...]
    known: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class CutReport(Convenient):
    """What a cut can do.

    Attributes
    ----------
    cut : OwnCut
        The cut.
    unknown : tuple of str
        Cut bars not known beforehand (reactions found from the whole truss are known).
    possibilities : tuple of Possibility
        Equations worth writing, those with fewest unknowns first.
    solves : tuple of str
        What single equations of it decide.
    together : tuple of str
        Unknowns its equations decide together (two or three), when they do.
    reason : str
        If it decides nothing: why.
    nearest : tuple of str
        If it decides nothing: the joints of the nearest body that decides one of its bars.
    """

    cut: OwnCut
    unknown: tuple[str, ...]
    possibilities: tuple[Possibility, ...]
    solves: tuple[str, ...]
    together: tuple[str, ...]
    reason: str
    nearest: tuple[str, ...]


def cut_report(own: OwnCut, case: LoadCase) -> CutReport:
    """Return what a cut can do under a load case, the reactions known as far as the whole truss gives them.

    Raises
    ------
    UnstableTrussError
        When the truss cannot resist every load.
    """
    equilibrium = matrix.solve(own.truss, case)
    structure = structure_of(own.truss, case, equilibrium.bars)
    search = Search(structure, equilibrium, case.as_floats())
    ways = search.ways_of(own.kept)
    possibilities = tuple(Possibility(about, unknown, known) for about, unknown, known in ways.equations)
    solves = tuple(dict.fromkeys(p.unknown[0] for p in possibilities if len(p.unknown) == 1))
    useless = not solves and not ways.together
    nearest = search.nearest_body(own.kept) if useless else ()
    reason = ways.reason if useless else ""
    return CutReport(own, ways.unknown, possibilities, solves, ways.together, reason, nearest)


def cut_equation(
    own: OwnCut, case: LoadCase, *, centre: str | Sequence[object] = "", direction: Sequence[object] = ()
) -> Equation:
    """Return one equation of a cut, in symbols: moments about any point, or forces along any direction.

    Parameters
    ----------
    own : OwnCut
        The cut.
    case : LoadCase
        The loads on the body.
    centre : str or (x, y)
        A joint's name, or a point.
    direction : (x, y)
        Instead of a centre.

    Raises
    ------
    InputError
        When not exactly one of the two is given.
    UnknownNameError
        For a joint that is not there.
    """
    structure = structure_of(own.truss, case)
    if bool(centre) == bool(direction):
        message = "give a centre, such as centre='L3', or a direction, such as direction=(0, 1)"
        raise InputError(message)
    if isinstance(centre, str) and centre:
        about = about_joint(structure, own.truss.joint(centre).name)
    else:
        x, y = _pair(direction or centre)
        about = About("force", x, y) if direction else About("moment", x, y)
    cut = cut_of(structure, own.kept)
    return write_equation(structure, cut, about, dict.fromkeys(cut.bars, ZERO))


def _pair(values: object) -> tuple[Exact, Exact]:
    if isinstance(values, str) or not isinstance(values, Sequence) or len(values) != PLANE:
        message = "two numbers are needed, such as (8, 0)"
        raise InputError(message)
    return number(values[0]), number(values[1])
