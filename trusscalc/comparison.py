"""A comparison as a record: criterion, every force of ours beside theirs, and the joint loads that theirs imply."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.convenience import Convenient
from trusscalc.exact import ZERO, Exact, rational
from trusscalc.implied import implied_loads, rounding_bounds
from trusscalc.loads import LoadCase
from trusscalc.ourforces import OurForces
from trusscalc.submitted import Submitted
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

RELATIVE: Final = rational(1, 1000)
"""Share of ours."""
ABSOLUTE: Final = rational(1, 10_000)
"""Share of the largest force."""
REASON: Final = (
    "the same ideal truss in two programs differs by rounding alone: coordinates to the millimetre and conversion "
    "factors to four figures change a force by less than a thousandth; no published figure was found (common practice)"
)

Verdict = Literal["agrees", "differs", "missing"]
Sense = Literal["T", "C", "0"]


@dataclass(frozen=True, slots=True)
class Criterion:
    """What agrees: a share of ours and a share of the largest force, besides the rounding of the printed digits."""

    relative: Exact
    absolute: Exact

    @property
    def is_default(self) -> bool:
        """Whether it is the tool's own."""
        return self.relative == RELATIVE and self.absolute == ABSOLUTE

    def text(self, largest: float, unit: str) -> str:
        """Return the criterion in words, with its reason."""
        parts = (f"{float(self.relative * 100):g} % of ours", f"{float(self.absolute * 100):g} % of the largest force")
        reason = REASON if self.is_default else "as stated by the user"
        return (
            f"a value agrees within {parts[0]}, plus {parts[1]} (which is {largest:.6g} {unit}), plus half a unit of "
            f"its last printed digit; a flipped sense always differs. Reason: {reason}"
        )


@dataclass(frozen=True, slots=True)
class ComparedForce:
    """One member force or reaction, ours beside theirs.

    Attributes
    ----------
    name : str
        Member as the truss spells it, or reaction.
    exact : Exact or None
        Ours, symbols at their values, tension positive; None where statics alone does not decide it.
    ours : float
        Its nearest float, or the value of the stiffness route.
    theirs, digits : Exact or None
        As printed, in our unit and sign, and half a unit of its last digit; None where missing.
    difference : float or None
        theirs - ours.
    tolerance : float
        What it may differ by besides the rounding of its digits.
    our_sense, their_sense : str or None
        ``T``, ``C`` or ``0``; None for reactions, and for what is missing.
    flipped : bool
        Whether one is tension and the other compression (a reaction: opposite in sense).
    verdict : str
        ``agrees``, ``differs`` or ``missing``.
    note : str
        What else is to be said; ''.
    row : int
        Where theirs stands, 0 where missing.
    called : str
        Of a member: what they call it.
    printed : str
        Theirs as it stands in the table.
    """

    name: str
    exact: Exact | None
    ours: float
    theirs: Exact | None
    digits: Exact | None
    difference: float | None
    tolerance: float
    our_sense: Sense | None
    their_sense: Sense | None
    flipped: bool
    verdict: Verdict
    note: str = ""
    row: int = 0
    called: str = ""
    printed: str = ""


@dataclass(frozen=True, slots=True)
class ComparedDisplacement:
    """One displacement: ours for EA = 1 times the one factor that fits theirs best, beside theirs."""

    joint: str
    axis: str
    ours: float
    theirs: Exact
    difference: float
    in_proportion: bool


@dataclass(frozen=True, slots=True)
class ImpliedLoad:
    """What their member forces say that one joint carries.

    Attributes
    ----------
    joint : str
        The joint.
    theirs : (Exact, Exact)
        Implied load plus reaction (Fx, Fy).
    ours : (float, float)
        Our load plus reaction.
    bound : (float, float)
        How far theirs may be off by the rounding of the printed digits alone.
    is_support : bool
        Whether the joint is supported.
    differs : bool
        Whether it differs by more than the bound and the absolute part of the criterion.
    """

    joint: str
    theirs: tuple[Exact, Exact]
    ours: tuple[float, float]
    bound: tuple[float, float]
    is_support: bool
    differs: bool

    @property
    def difference(self) -> tuple[float, float]:
        """Theirs minus ours."""
        return float(self.theirs[0]) - self.ours[0], float(self.theirs[1]) - self.ours[1]


@dataclass(frozen=True, slots=True)
class Comparison(Convenient):
    """The result of a comparison.

    Attributes
    ----------
    stated : TrussFile
        Our truss, cases and combinations as stated.
    truss : Truss
        Our truss, symbols at their values.
    case : LoadCase
        Our loads, symbols at their values.
    submitted : Submitted
        Their table, signs as they were found to be meant.
    theirs, their_case : str
        What the table was said to call the case, '' for nothing; and what it does call it, ''.
    members : dict of str to ComparedForce
        Every member asked for, in the truss's order.
    reactions : dict of str to ComparedForce
        Reactions that the table gives.
    displacements : tuple of ComparedDisplacement
        Displacements that the table gives. They are compared in proportion only and do not enter ``agreed``: EA is
        not stated.
    criterion : Criterion
        What agrees.
    largest : float
        The largest force, of which the criterion's absolute part is a share.
    ours : OurForces
        Our side.
    own_faults : tuple of str
        Where our own two routes disagree; said before anything else.
    notes : tuple of str
        What was assumed, detected, left out.
    agreed : bool
        Whether our routes agree with each other, and every member asked for and every reaction given with theirs.
    frozen : str
        In blind mode: the digest of our values, frozen before the submitted ones were revealed.
    order : str
        In blind mode: what was done in which order.
    read_before : bool
        In blind mode: whether the table had been read already, so that the record does not show the order.
    written_down : bool
        In blind mode: whether the digest had been written down before, and was the same.
    """

    stated: TrussFile
    truss: Truss
    case: LoadCase
    submitted: Submitted
    theirs: str
    their_case: str
    members: Mapping[str, ComparedForce]
    reactions: Mapping[str, ComparedForce]
    displacements: tuple[ComparedDisplacement, ...]
    criterion: Criterion
    largest: float
    ours: OurForces
    own_faults: tuple[str, ...]
    notes: tuple[str, ...]
    agreed: bool
    frozen: str = ""
    order: str = ""
    read_before: bool = False
    written_down: bool = False

    @property
    def missing(self) -> tuple[str, ...]:
        """Members that the table does not give."""
        return tuple(name for name, item in self.members.items() if item.verdict == "missing")

    @property
    def differing(self) -> tuple[str, ...]:
        """Members and reactions that differ."""
        both = {**self.members, **self.reactions}
        return tuple(name for name, item in both.items() if item.verdict == "differs")

    @property
    def implied(self) -> tuple[ImpliedLoad, ...]:
        """What their member forces say that each joint carries, worked out when asked for."""
        return _implied(self)


def _implied(comparison: Comparison) -> tuple[ImpliedLoad, ...]:
    rows = comparison.submitted.rows
    theirs = implied_loads(comparison.truss, {row.member: row.force for row in rows})
    bounds = rounding_bounds(comparison.truss, {row.member: row.digits for row in rows})
    loads = {load.joint: (load.fx, load.fy) for load in comparison.case.loads}
    supports = {support.joint for support in comparison.truss.supports}
    slack = float(comparison.criterion.absolute) * comparison.largest
    found = []
    for joint, implied in theirs.items():
        fx, fy = (float(part) for part in loads.get(joint, (ZERO, ZERO)))
        if joint in supports:
            fx, fy = fx + comparison.ours.reaction(joint, "x")[1], fy + comparison.ours.reaction(joint, "y")[1]
        apart = (abs(float(implied[0]) - fx), abs(float(implied[1]) - fy))
        differs = any(part > bound + slack for part, bound in zip(apart, bounds[joint], strict=True))
        found.append(ImpliedLoad(joint, implied, (fx, fy), bounds[joint], joint in supports, differs))
    return tuple(found)
