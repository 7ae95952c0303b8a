"""A cut, the free body it leaves, and what each bar and load does in an equation about a centre.

The ground counts as a joint: a cut is any set of joints without it. The body is acted on by the loads on
its joints and by every bar (member or support link) with exactly one end in it. Joints, sections, reactions
and whole-structure equations are then one thing.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

from trusscalc.convenience import Convenient
from trusscalc.errors import InputError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.loads import LoadCase
from trusscalc.statics.matrix import GROUND, Bar, bars_of
from trusscalc.truss import Joint, Truss, unknown_joint

CutKind = Literal["joint", "section", "whole"]


@dataclass(frozen=True, slots=True)
class Structure:
    """The truss and one load case, indexed for cutting.

    Attributes
    ----------
    joints : dict of str to Joint
        In the order stated.
    bars : dict of str to Bar
        Members, then links.
    bars_at : dict of str to tuple of str
        Names of the bars at each joint.
    loads : dict of str to (Exact, Exact)
        Load on each loaded joint; zero loads left out.
    values : dict of str to Exact
        Values of the symbols in coordinates, for order and nearness only.
    """

    joints: Mapping[str, Joint]
    bars: Mapping[str, Bar]
    bars_at: Mapping[str, tuple[str, ...]]
    loads: Mapping[str, tuple[Exact, Exact]]
    values: Mapping[str, Exact] = field(default_factory=dict)

    def near(self, amount: Exact) -> float:
        """Return an amount as a float at the symbols' values, for order and nearness only."""
        return float(amount.substitute(self.values) if self.values else amount)


def structure_of(truss: Truss, case: LoadCase, bars: tuple[Bar, ...] = ()) -> Structure:
    """Return truss and case indexed for cutting; ``bars`` saves making them again."""
    bars = bars or bars_of(truss)
    at: dict[str, list[str]] = {joint.name: [] for joint in truss.joints}
    for bar in bars:
        at[bar.start].append(bar.name)
        if not bar.is_link:
            at[bar.end].append(bar.name)
    loads = {load.joint: (load.fx, load.fy) for load in case.loads if load.fx or load.fy}
    return Structure(
        {joint.name: joint for joint in truss.joints},
        {bar.name: bar for bar in bars},
        {name: tuple(names) for name, names in at.items()},
        loads,
        dict(truss.symbols),
    )


@dataclass(frozen=True, slots=True)
class Cut(Convenient):
    """A free body and the bars that hold it.

    Attributes
    ----------
    kept : tuple of str
        The body's joints, in the truss's order.
    bars : tuple of str
        Every member, then every link, with exactly one end in the body.
    kind : str
        ``joint`` (one joint kept), ``whole`` (all joints), else ``section``.
    """

    kept: tuple[str, ...]
    bars: tuple[str, ...]
    kind: CutKind


def cut_of(structure: Structure, kept: Iterable[str]) -> Cut:
    """Return the cut that leaves the given joints.

    Raises
    ------
    UnknownNameError
        For a joint that is not there.
    InputError
        For no joint at all.
    """
    inside = set(kept)
    for name in sorted(inside):
        if name not in structure.joints:
            raise unknown_joint(name, structure.joints)
    if not inside:
        message = "a cut has to keep at least one joint"
        raise InputError(message)
    if len(inside) * 4 < len(structure.joints):
        near = {name for joint in inside for name in structure.bars_at[joint]}
        place = {name: index for index, name in enumerate(structure.bars)}
        candidates = sorted(near, key=place.__getitem__)
    else:
        candidates = list(structure.bars)
    crossing = tuple(
        name for name in candidates if (structure.bars[name].start in inside) != (structure.bars[name].end in inside)
    )
    kind: CutKind = "section"
    if len(inside) == 1:
        kind = "joint"
    elif len(inside) == len(structure.joints):
        kind = "whole"
    return Cut(tuple(name for name in structure.joints if name in inside), crossing, kind)


@dataclass(frozen=True, slots=True)
class About:
    """What an equation sums: moments about a point, or forces along a direction.

    Attributes
    ----------
    sum : str
        ``moment`` or ``force``.
    x, y : Exact
        The centre, or the direction summed along (its length has no meaning).
    joint : str
        The joint the centre lies at, or ''.
    along : str
        For an oblique force sum, the member it is taken across, or ''.
    """

    sum: Literal["moment", "force"]
    x: Exact
    y: Exact
    joint: str = ""
    along: str = ""

    @property
    def axis(self) -> str:
        """``x`` or ``y`` for an axis sum, else ''."""
        if self.sum == "force":
            if not self.y:
                return "x"
            if not self.x:
                return "y"
        return ""

    def lever(self, x: Exact, y: Exact, fx: Exact, fy: Exact) -> Exact:
        """Return what a force (fx, fy) at (x, y) adds to the sum (moments anticlockwise positive)."""
        if self.sum == "moment":
            return (x - self.x) * fy - (y - self.y) * fx
        return self.x * fx + self.y * fy

    def axis_lever(self, axis: str, x: Exact, y: Exact) -> Exact:
        """Return what a unit force along +x or +y at (x, y) adds to the sum."""
        if self.sum == "moment":
            return self.y - y if axis == "x" else x - self.x
        return self.x if axis == "x" else self.y


SUM_X = About("force", ONE, ZERO)
SUM_Y = About("force", ZERO, ONE)


def about_joint(structure: Structure, name: str) -> About:
    """Return moments about a joint."""
    joint = structure.joints[name]
    return About("moment", joint.x, joint.y, joint=name)


def across(bar: Bar) -> About:
    """Return the force sum across a bar, in which it and its parallels drop out (to the left of the bar, or up)."""
    x, y = -bar.dy, bar.dx
    if y.reads_negative() or (not y and x.reads_negative()):
        x, y = -x, -y
    return About("force", x, y, along=bar.name)


def bar_lever(structure: Structure, bar: Bar, kept: frozenset[str] | set[str], about: About) -> Exact:
    """Return what a pulled bar with t = 1 adds to the body's sum."""
    if bar.start in kept:
        joint, fx, fy = structure.joints[bar.start], bar.dx, bar.dy
    else:
        joint, fx, fy = structure.joints[bar.end], -bar.dx, -bar.dy
    return about.lever(joint.x, joint.y, fx, fy)


def meeting_point(structure: Structure, first: Bar, second: Bar) -> tuple[Exact, Exact] | None:
    """Return the point where the lines of two bars meet, None for parallels."""
    below = first.dx * second.dy - first.dy * second.dx
    if not below:
        return None
    a, b = structure.joints[first.start], structure.joints[second.start]
    share = ((b.x - a.x) * second.dy - (b.y - a.y) * second.dx) / below
    return a.x + share * first.dx, a.y + share * first.dy


def about_of(structure: Structure, bars: Sequence[str], joints: Sequence[str], recipe: tuple[str, int, int]) -> About:
    """Return what a recipe of the search stands for, exactly.

    Parameters
    ----------
    structure : Structure
        The truss.
    bars, joints : sequence of str
        Names by the search's indices.
    recipe : tuple
        ("axis", 0 or 1), ("joint", j), ("across", b) or ("meet", b, c).
    """
    kind, first, second = recipe
    if kind == "axis":
        return SUM_Y if first else SUM_X
    if kind == "joint":
        return about_joint(structure, joints[first])
    if kind == "across":
        return across(structure.bars[bars[first]])
    place = meeting_point(structure, structure.bars[bars[first]], structure.bars[bars[second]])
    if place is None:
        message = f"{bars[first]} and {bars[second]} are parallel and meet nowhere"
        raise InputError(message)
    return About("moment", *place)


def complement(structure: Structure, cut: Cut) -> tuple[str, ...]:
    """Return the joints on the other side of a cut."""
    inside = set(cut.kept)
    return tuple(name for name in structure.joints if name not in inside)


__all__ = [
    "GROUND",
    "SUM_X",
    "SUM_Y",
    "About",
    "Cut",
    "Structure",
    "about_joint",
    "about_of",
    "across",
    "bar_lever",
    "complement",
    "cut_of",
    "meeting_point",
    "structure_of",
]
