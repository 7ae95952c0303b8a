"""What the engineer has chosen: case, members, cut, equation, cuts kept. Every move gives a new record or an error.

The drawing, the form and code all make the same moves, so none of them can do what another cannot.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Final

from trusscalc.errors import InputError
from trusscalc.exacttext import number
from trusscalc.loads import LoadCase
from trusscalc.membercheck import members_named
from trusscalc.sheet.detail import DETAILS, Detail
from trusscalc.statics.cuts import SUM_X, SUM_Y, About, about_joint, structure_of
from trusscalc.statics.owncuts import OwnCut, own_cut
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile
from trusscalc.widgets.crossings import Point, drawn_section

PLANE: Final = 2
AXES: Final = {"x": SUM_X, "y": SUM_Y}


@dataclass(frozen=True, slots=True)
class Choices:
    """What has been chosen so far.

    Attributes
    ----------
    case : str
        Load case or combination.
    members : tuple of str
        Members to be checked.
    line : tuple of (Exact, Exact)
        The section as it was drawn; empty when the cut was chosen by joints or members.
    closed : bool
        Whether that line returns to its first point.
    through : tuple of str
        Members the cut goes through, when it was chosen by members.
    kept : tuple of str
        The joints of the free body; empty without a cut.
    fault : str
        Why the line or the members give no cut, '' when they do or nothing was chosen.
    about : About or None
        The equation to write; None leaves it to the tool.
    cuts : tuple of (str, tuple of str)
        Members derived from a cut that was kept, each with its joints.
    detail : str
        How much of the check is shown: ``summary``, ``members`` or ``all``.
    """

    case: str
    members: tuple[str, ...] = ()
    line: tuple[Point, ...] = ()
    closed: bool = False
    through: tuple[str, ...] = ()
    kept: tuple[str, ...] = ()
    fault: str = ""
    about: About | None = None
    cuts: tuple[tuple[str, tuple[str, ...]], ...] = ()
    detail: Detail = "summary"

    # --- the cut ------------------------------------------------------------------------------------------

    def drawn(self, truss: Truss, points: Sequence[Point], *, closed: bool = False) -> Choices:
        """Return the choices with a section as drawn; of its two parts the left one of the truss is kept."""
        section = drawn_section(truss, points, closed=closed)
        kept = _first_choice(truss, section.left, section.right, closed=closed)
        through = section.crossed if section.fault else ()
        return self._with_cut(line=section.points, closed=closed, through=through, kept=kept, fault=section.fault)

    def going_through(self, truss: Truss, members: Iterable[str]) -> Choices:
        """Return the choices with a cut through members; while they do not part the truss, with the reason."""
        names = tuple(dict.fromkeys(truss.member(name).name for name in members))
        if not names:
            return self.cleared()
        try:
            return self._with_cut(through=names, kept=own_cut(truss, through=names).kept)
        except InputError as problem:
            return self._with_cut(through=names, fault=str(problem))

    def keeping(self, truss: Truss, joints: Iterable[str]) -> Choices:
        """Return the choices with a cut round joints."""
        names = tuple(joints)
        return self._with_cut(kept=own_cut(truss, keep=names).kept) if names else self.cleared()

    def with_joint(self, truss: Truss, joint: str) -> Choices:
        """Return the choices with a joint added to the free body, or taken from it."""
        name = truss.joint(joint).name
        kept = [other for other in self.kept if other != name]
        return self.keeping(truss, kept if name in self.kept else [*kept, name])

    def with_member_cut(self, truss: Truss, member: str) -> Choices:
        """Return the choices with a member added to those the cut goes through, or taken from them."""
        name = truss.member(member).name
        cut = self.cut_members(truss)
        return self.going_through(truss, [n for n in cut if n != name] if name in cut else [*cut, name])

    def other_side(self, truss: Truss) -> Choices:
        """Return the choices with the other part kept."""
        if not self.kept:
            message = "there is no cut yet whose other side could be kept"
            raise InputError(message)
        inside = set(self.kept)
        rest = tuple(joint.name for joint in truss.joints if joint.name not in inside)
        if not rest:
            message = "the whole truss is kept: there is nothing on the other side"
            raise InputError(message)
        return replace(self, kept=rest)

    def cleared(self) -> Choices:
        """Return the choices without a cut and without an equation chosen."""
        return self._with_cut()

    def cut_members(self, truss: Truss) -> tuple[str, ...]:
        """Return the members the cut goes through, or those chosen while they do not part the truss."""
        inside = set(self.kept)
        if not inside:
            return self.through
        return tuple(m.name for m in truss.members if (m.start in inside) != (m.end in inside))

    def _with_cut(
        self,
        *,
        line: tuple[Point, ...] = (),
        closed: bool = False,
        through: tuple[str, ...] = (),
        kept: tuple[str, ...] = (),
        fault: str = "",
    ) -> Choices:
        """Return the choices with another cut, its equation left to the tool again."""
        return replace(self, line=line, closed=closed, through=through, kept=kept, fault=fault, about=None)

    # --- the equation -------------------------------------------------------------------------------------

    def with_about(self, about: About | None) -> Choices:
        """Return the choices with an equation."""
        return replace(self, about=about)

    def about_joint(self, truss: Truss, joint: str) -> Choices:
        """Return the choices with moments about a joint; chosen twice, the equation is left to the tool again."""
        about = about_joint(structure_of(truss, LoadCase("", {})), truss.joint(joint).name)
        return replace(self, about=None if self.about == about else about)

    # --- members, cuts kept, the rest ---------------------------------------------------------------------

    def checking(self, truss: Truss, members: Iterable[str]) -> Choices:
        """Return the choices with other members to check; members with a cut of their own stay."""
        names = members_named(truss, members, also=True)
        return replace(self, members=tuple(dict.fromkeys((*names, *dict(self.cuts)))))

    def checking_only(self, truss: Truss, members: Iterable[str]) -> Choices:
        """Return the choices with just these members to check; cuts kept for others go."""
        names = members_named(truss, members, also=True)
        return replace(self, members=names, cuts=tuple((name, kept) for name, kept in self.cuts if name in names))

    def with_member(self, truss: Truss, member: str) -> Choices:
        """Return the choices with a member added to those checked, or taken from them with its cut."""
        name = truss.member(member).name
        if name not in self.members:
            return replace(self, members=(*self.members, name))
        return self.without([name])

    def without(self, members: Iterable[str]) -> Choices:
        """Return the choices without members, and without the cuts kept for them."""
        gone = set(members)
        return replace(
            self,
            members=tuple(name for name in self.members if name not in gone),
            cuts=tuple((name, kept) for name, kept in self.cuts if name not in gone),
        )

    def keeping_cut(self, members: Iterable[str]) -> Choices:
        """Return the choices with the present cut kept for members."""
        names = tuple(dict.fromkeys(members))
        cuts = {**dict(self.cuts), **dict.fromkeys(names, self.kept)}
        return replace(self, members=tuple(dict.fromkeys((*self.members, *names))), cuts=tuple(cuts.items()))

    def with_case(self, case: str) -> Choices:
        """Return the choices under another load case."""
        return replace(self, case=case)

    def with_detail(self, detail: str) -> Choices:
        """Return the choices with more or less of the check shown."""
        for known in DETAILS:
            if detail == known:
                return replace(self, detail=known)
        message = f"detail {detail!r}: choose {', '.join(DETAILS[:-1])} or {DETAILS[-1]}"
        raise InputError(message)

    def own_cuts(self, truss: Truss) -> dict[str, OwnCut]:
        """Return the cuts kept, as ``check_members`` takes them."""
        return {name: own_cut(truss, keep=kept) for name, kept in self.cuts}


def _first_choice(truss: Truss, left: Sequence[str], right: Sequence[str], *, closed: bool) -> tuple[str, ...]:
    """Return the part kept at first: what a closed line holds, else the part with the leftmost joint."""
    if not left or not right:
        return ()
    if closed:
        return tuple(left if len(left) <= len(right) else right)
    outer = min(truss.joints, key=lambda joint: (float(truss.value(joint.x)), float(truss.value(joint.y)))).name
    return tuple(left if outer in left else right)


def names_of(stated: TrussFile) -> tuple[str, ...]:
    """Return the cases and combinations of a truss file that are one load case each."""
    moving = {load.name for load in stated.moving}
    single = [
        each.name
        for each in stated.all_combinations
        if all(len(factors) == 1 and case not in moving for case, factors in each.factors)
    ]
    return (*(case.name for case in stated.acting), *single)


def point_of(values: Sequence[object]) -> Point:
    """Return two numbers as a point (InputError for anything else)."""
    if isinstance(values, str) or len(values) != PLANE:
        message = f"{values!r}: two numbers are needed, such as (8, 0)"
        raise InputError(message)
    return number(values[0]), number(values[1])


# --- what was typed ---------------------------------------------------------------------------------------


def typed_centre(truss: Truss, text: str) -> About | None:
    """Return the moment centre that was typed: a joint's name, or a point such as ``8, 0``; None for nothing.

    Raises
    ------
    InputError, UnknownNameError, InexactNumberError
        For what is neither.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> typed_centre(truss, "(2, sqrt(3))").y, typed_centre(truss, "C").joint
    (Exact('sqrt(3)'), 'C')
    """
    text = text.strip()
    if not text:
        return None
    if "," not in text:
        return about_joint(structure_of(truss, LoadCase("", {})), truss.joint(text).name)
    x, y = typed_point(text)
    return About("moment", x, y)


def typed_direction(text: str) -> About | None:
    """Return the direction that was typed: ``x``, ``y``, or one such as ``3, 4``; None for nothing.

    Raises
    ------
    InputError, InexactNumberError
        For what is neither, or no direction at all.
    """
    text = text.strip()
    if not text or text in AXES:
        return AXES.get(text)
    x, y = typed_point(text)
    if not x and not y:
        message = f"{text}: forces cannot be summed along no direction; give x, y, or two numbers such as 3, 4"
        raise InputError(message)
    return About("force", x, y)


def typed_point(text: str) -> Point:
    """Return two numbers that were typed, with or without brackets round them.

    Raises
    ------
    InputError, InexactNumberError
        For anything else.
    """
    stripped = text.strip()
    if stripped.startswith("(") and stripped.endswith(")"):
        stripped = stripped[1:-1]
    parts = stripped.split(",")
    if len(parts) != PLANE:
        message = f"{text[:60]!r}: two numbers with a comma between them are needed, such as 8, 0"
        raise InputError(message)
    return number(parts[0].strip()), number(parts[1].strip())


def typed_line(text: str) -> tuple[Point, ...]:
    """Return the points that were typed, with a semicolon between them: ``1.8, -1; 1.8, 8``."""
    return tuple(typed_point(part) for part in text.split(";") if part.strip())
