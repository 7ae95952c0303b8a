"""What an influence line can be asked for: the force of one bar, or the shear in a panel of the chain."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final, Literal

from trusscalc.chains import Chain
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.statics.cuts import SUM_Y, Cut, Structure, cut_of
from trusscalc.statics.matrix import Bar
from trusscalc.statics.steps import Step, Term, write_equation
from trusscalc.stiffness import StiffnessResult
from trusscalc.truss import LONGEST_NAME, did_you_mean

Kind = Literal["member", "reaction", "shear"]

SHEAR: Final = re.compile(r"V\s*\((.*)\)")
MOST_NAMED: Final = 30


@dataclass(frozen=True, slots=True)
class BarForce:
    """The axial force of a member, or a reaction along its written direction.

    Attributes
    ----------
    name : str
        As the truss spells it.
    kind : str
        ``member`` or ``reaction``.
    length : Exact
        Of the bar, worked out once.
    """

    name: str
    kind: Kind
    length: Exact

    @property
    def rests_on(self) -> tuple[str, ...]:
        """The bars whose forces it is made of."""
        return (self.name,)

    def exact(self, tensions: Mapping[str, Exact], joint: str) -> Exact:  # noqa: ARG002 - of a shear the load is a part
        """Return its value from all tension coefficients under a unit load at a joint."""
        return self.length * tensions[self.name]

    def numeric(self, run: StiffnessResult, joint: str) -> float:  # noqa: ARG002
        """Return its value in a numeric run."""
        return (run.forces if self.kind == "member" else run.reactions).get(self.name, math.nan)

    def by_hand(self, structure: Structure, steps: Sequence[Step], tensions: Mapping[str, Exact]) -> Exact:  # noqa: ARG002
        """Return its value as the last step that solves it gives it."""
        return next(step.results[self.name] for step in reversed(steps) if self.name in step.results)


@dataclass(frozen=True, slots=True)
class PanelSection:
    """A vertical section through a panel of a chain that parts the truss in two bodies.

    Attributes
    ----------
    panel : (str, str)
        The panel's joints in the chain's order.
    cut : Cut
        The left body and the members cut; links among its bars are the reactions on it.
    between : (Exact, Exact)
        The section lies anywhere between these two x.
    """

    panel: tuple[str, str]
    cut: Cut
    between: tuple[Exact, Exact]


@dataclass(frozen=True, slots=True)
class PanelShear:
    """The sum of all upward forces, loads and reactions, on the body left of a section.

    Attributes
    ----------
    section : PanelSection
        The section.
    links : tuple of Bar
        Reactions on the left body that are not horizontal.
    members : tuple of (str, float)
        Members cut, and the vertical part of the force each puts on the left body when its force is 1.
    """

    section: PanelSection
    links: tuple[Bar, ...]
    members: tuple[tuple[str, float], ...]
    kind: Kind = "shear"

    @property
    def name(self) -> str:
        """Such as ``V(L2-L3)``."""
        return shear_name(self.section.panel)

    @property
    def rests_on(self) -> tuple[str, ...]:
        """The reactions it is made of."""
        return tuple(link.name for link in self.links)

    def exact(self, tensions: Mapping[str, Exact], joint: str) -> Exact:
        """Return its value from all tension coefficients under a unit load at a joint."""
        total = -ONE if joint in self.section.cut.kept else ZERO
        for link in self.links:
            total = total + tensions[link.name] * link.dy
        return total

    def numeric(self, run: StiffnessResult, joint: str) -> float:  # noqa: ARG002
        """Return its value in a numeric run, from the other side: what the members cut have to balance."""
        return -sum(run.forces.get(name, math.nan) * upward for name, upward in self.members)

    def by_hand(self, structure: Structure, steps: Sequence[Step], tensions: Mapping[str, Exact]) -> Exact:  # noqa: ARG002
        """Return the sum of its terms."""
        return sum((term.product for term in self.terms(structure, tensions)), start=ZERO)

    def terms(self, structure: Structure, tensions: Mapping[str, Exact]) -> tuple[Term, ...]:
        """Return the reactions and loads it is the sum of, as terms of a vertical force sum on the left body."""
        cut = self.section.cut
        known = {name: tensions.get(name, ZERO) for name in cut.bars}
        return tuple(term for term in write_equation(structure, cut, SUM_Y, known).terms if term.kind != "member")


Target = BarForce | PanelShear


def shear_name(panel: tuple[str, str]) -> str:
    """Return what the shear in a panel is called."""
    return f"V({panel[0]}-{panel[1]})"


def target_of(structure: Structure, chain: Chain, text: str) -> Target:
    """Return what is asked for by name: a member, a reaction or the shear in a panel.

    Raises
    ------
    UnknownNameError
        For a member or reaction that is not there.
    InputError
        For a shear in what is no panel of the chain, or in one without a clear vertical section.
    """
    name = text.strip()
    ends = frozenset(part.strip() for part in name.split("-"))
    for bar in structure.bars.values():
        if bar.name == name or (not bar.is_link and {bar.start, bar.end} == ends):
            return BarForce(bar.name, "reaction" if bar.is_link else "member", bar.length)
    asked = SHEAR.fullmatch(name)
    if asked is not None:
        return _panel_shear(structure, chain, [part.strip() for part in asked[1].split("-")])
    reactions = [bar.name for bar in structure.bars.values() if bar.is_link]
    members = [bar for bar in structure.bars.values() if not bar.is_link]
    known = reactions if "." in name else [way for m in members for way in (m.name, f"{m.end}-{m.start}")]
    what = "reaction" if "." in name else "member"
    message = f"there is no {what} {name[: 3 * LONGEST_NAME]!r}{did_you_mean(name, known)}"
    raise UnknownNameError(message, name=name)


# --- panel shear ------------------------------------------------------------------------------------------


def _panel_shear(structure: Structure, chain: Chain, ends: Sequence[str]) -> PanelShear:
    panels = list(pairwise(chain.joints))
    panel = next((each for each in panels if sorted(each) == sorted(ends)), None)
    if panel is None:
        shown = ", ".join(f"{a}-{b}" for a, b in panels[:MOST_NAMED]) + (" ..." if len(panels) > MOST_NAMED else "")
        asked = "-".join(ends)[: 3 * LONGEST_NAME]
        message = f"V({asked}): that is no panel of the chain {chain.name}; its panels are {shown}"
        raise InputError(message)
    section = _section(structure, panel)
    left = set(section.cut.kept)
    bars = [structure.bars[name] for name in section.cut.bars]
    links = tuple(bar for bar in bars if bar.is_link and bar.dy)
    members = tuple((bar.name, _upward(bar, left)) for bar in bars if not bar.is_link)
    return PanelShear(section, links, members)


def _upward(member: Bar, left: set[str]) -> float:
    """Return the vertical part of a unit pull on the end that lies left of the section."""
    rise = float(member.dy) / math.hypot(float(member.dx), float(member.dy))
    return rise if member.start in left else -rise


def _section(structure: Structure, panel: tuple[str, str]) -> PanelSection:
    """Return the vertical section through a panel that cuts the fewest members, the leftmost of equals.

    Joints inside the panel (a Warren truss has some above its middle) bear neither load nor support, so that
    the shear is the same left and right of them.
    """
    name = shear_name(panel)
    low, high = sorted(structure.joints[end].x for end in panel)
    inside = [joint for joint in structure.joints.values() if low < joint.x < high]
    held = {bar.start for bar in structure.bars.values() if bar.is_link}
    supported = [joint.name for joint in inside if joint.name in held]
    if supported:
        message = (
            f"{name}: the support at {', '.join(supported)} stands inside the panel, so that the shear is not the same "
            "everywhere in it; ask for the shear in a panel of a chain that has that joint"
        )
        raise InputError(message)
    lines = sorted({low, high, *(joint.x for joint in inside)})
    found = []
    for start, end in pairwise(lines):
        left = {joint.name for joint in structure.joints.values() if joint.x <= start}
        if _in_one_piece(structure, left) and _in_one_piece(structure, set(structure.joints) - left):
            found.append(PanelSection(panel, cut_of(structure, left), (start, end)))
    if not found:
        message = (
            f"{name}: no vertical section through the panel parts the truss in two bodies, a left and a right one; "
            "ask for the members in it"
        )
        raise InputError(message)
    return min(found, key=lambda section: len(section.cut.bars))


def _in_one_piece(structure: Structure, joints: set[str]) -> bool:
    """Return whether members among some joints hold them together."""
    waiting = [next(iter(joints))]
    reached = set(waiting)
    while waiting:
        for name in structure.bars_at[waiting.pop()]:
            new = {structure.bars[name].start, structure.bars[name].end} & joints - reached
            reached |= new
            waiting += new
    return reached == joints
