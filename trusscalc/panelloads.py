"""Loads as engineers state them, turned into forces on joints by statics, exactly.

What stands on one panel is shared to its two joints like the reactions of a simple beam, and half of a member's weight
acts at either end: common practice, and what a truss with frictionless hinges calls for. The joint loads have the same
forces and the same moments as the load they stand for. That is proven for every rule when it is spread.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.chains import Chain, chain_of
from trusscalc.errors import InexactNumberError, InputError, TrusscalcError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.loadentries import rule_of, stated
from trusscalc.loadrules import Beside, LineLoad, PointLoad, Rule, SelfWeight
from trusscalc.loads import JointLoad, factor_text
from trusscalc.panelshares import (
    Point,
    SpreadLine,
    Sums,
    moved,
    of_force,
    of_line,
    of_weight,
    path_of,
    place_faults,
    total,
    weighed,
)
from trusscalc.roots import trimmed
from trusscalc.truss import Truss

__all__ = [
    "Beside",
    "LineLoad",
    "PointLoad",
    "Rule",
    "SelfWeight",
    "Spread",
    "SpreadError",
    "SpreadLine",
    "rule_faults",
    "rule_of",
    "spread",
    "stated",
]

BENDING: Final = "the bending of members loaded between their joints is not covered"
SHARED: Final = f"What stands between joints is shared to them as by simple beams; {BENDING}."
HALVED: Final = f"Half of a member's weight acts at either end; {BENDING}."


class SpreadError(TrusscalcError, ArithmeticError):
    """Joint loads that do not equal the load they stand for: a fault of the program, never of the input."""


@dataclass(frozen=True, slots=True)
class Spread:
    """What became of one rule; one that exists is reconciled.

    Attributes
    ----------
    rule : LineLoad, PointLoad or SelfWeight
        What was stated.
    loads : tuple of JointLoad
        One for each joint that takes a share.
    lines : tuple of SpreadLine
        Panel by panel, or member by member.
    applied : (Exact, Exact, Exact)
        ΣFx, ΣFy, and ΣM about (0, 0) anticlockwise, of the load as it stands (its part that this truss carries).
    at_joints : (Exact, Exact, Exact)
        The same of ``loads``.
    carried : Exact
        Part of the stated load that this truss carries by the lever rule; 1 for a load in its plane.
    note : str
        Remark to be printed; '' for none.

    Raises
    ------
    SpreadError
        When ``applied`` and ``at_joints`` differ, or the shares of the lines do not add up to ``loads``.
    """

    rule: Rule
    loads: tuple[JointLoad, ...]
    lines: tuple[SpreadLine, ...]
    applied: Sums
    at_joints: Sums
    carried: Exact = ONE
    note: str = ""

    def __post_init__(self) -> None:
        for what, there, here in zip(("ΣFx", "ΣFy", "ΣM"), self.applied, self.at_joints, strict=True):
            if there - here:
                message = f"{_where(self.rule)} {what} of the joint loads differs from that of the load as it stands"
                raise SpreadError(message)
        if _joint_loads(self.lines) != self.loads:
            message = f"{_where(self.rule)} the joint loads are not the sums of the shares"
            raise SpreadError(message)


def spread(rule: Rule, truss: Truss, chains: Sequence[Chain] = ()) -> Spread:
    """Return the joint loads that stand for a rule, with every share, proven to have the same forces and moments.

    Parameters
    ----------
    rule : LineLoad, PointLoad or SelfWeight
        What acts.
    truss : Truss
        Where.
    chains : sequence of Chain
        The chains that have names.

    Raises
    ------
    InputError
        With every fault that ``rule_faults`` finds.

    Examples
    --------
    >>> from trusscalc.exacttext import number
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> snow = LineLoad("snow", "A,C,B", number(2), number(2))
    >>> [(load.joint, load.fy) for load in spread(snow, roof).loads]
    [('A', Exact('-4')), ('C', Exact('-8')), ('B', Exact('-4'))]
    >>> wind = LineLoad("wind", "A,C", number(2), number(2), direction="normal")
    >>> spread(wind, roof).loads[0]
    JointLoad(joint='A', fx=Exact('3'), fy=Exact('-4'))
    """
    made = _spread_or_faults(rule, truss, chains)
    if isinstance(made, Spread):
        return made
    raise InputError(made)


def rule_faults(rule: Rule, truss: Truss, chains: Sequence[Chain] = ()) -> list[str]:
    """Return why a rule cannot be spread over a truss, each fault with what, where and what to do; [] when it can."""
    made = _spread_or_faults(rule, truss, chains)
    return [] if isinstance(made, Spread) else made


def _spread_or_faults(rule: Rule, truss: Truss, chains: Sequence[Chain]) -> Spread | list[str]:
    problems: list[str] = []
    try:
        found = _shares(rule, truss, chains, problems)
        if found is not None:
            return _reconciled(rule, truss, *found)
    except InputError as fault:
        problems += [f"along: {problem}" for problem in fault.problems]
    except InexactNumberError as fault:
        remedy = "state these loads at the joints, or, where coordinates hold roots, state those as decimals"
        problems.append(f"cannot be worked out exactly: {fault}; {remedy}")
    return [f"{_where(rule)} {problem}" for problem in problems]


def _shares(
    rule: Rule, truss: Truss, chains: Sequence[Chain], problems: list[str]
) -> tuple[list[SpreadLine], Sums] | None:
    """Return the lines of a rule and the sums of its load as it stands, or None with the faults noted."""
    carried = rule.beside.share if rule.beside else ONE
    if isinstance(rule, SelfWeight):
        members = weighed(rule, truss, problems)
        return None if problems else of_weight(rule, truss, members, carried)
    chain = chain_of(truss, rule.along, chains, may_rise=rule.per == "slope")
    path = path_of(truss, chain, rule.per)
    problems += place_faults(rule, path)
    if problems:
        return None
    return of_line(rule, path, carried) if isinstance(rule, LineLoad) else of_force(rule, path, carried)


def _where(rule: Rule) -> str:
    """Return words that tell a rule from the others of its case."""
    if isinstance(rule, SelfWeight):
        kind, amount = ("self_weight", rule.weight) if rule.weight is not None else ("density", rule.density)
        text = factor_text(ZERO if amount is None else amount)
    elif isinstance(rule, PointLoad):
        kind, text = "point", f"{factor_text(rule.force)} at {factor_text(rule.at)}"
    else:
        kind, text = ("line" if rule.width is None else "area"), factor_text(rule.start)
        text += "" if rule.start == rule.end else f" to {factor_text(rule.end)}"
    return f"[panel_loads.{rule.case}] {kind} {text}:"


def _reconciled(rule: Rule, truss: Truss, lines: Sequence[SpreadLine], applied: Sums) -> Spread:
    loads = _joint_loads(lines)
    for load in loads:
        for part in (load.fx, load.fy):
            number(part)  # refused where no float could hold it
    places = {joint.name: (joint.x, joint.y) for joint in truss.joints}
    at_joints = total(moved((load.fx, load.fy), places[load.joint]) for load in loads)
    carried = rule.beside.share if rule.beside else ONE
    return Spread(rule, loads, tuple(lines), applied, at_joints, carried, _note(rule, lines, truss.length))


def _joint_loads(lines: Iterable[SpreadLine]) -> tuple[JointLoad, ...]:
    """Return the sum of the shares at each joint."""
    forces: dict[str, Point] = {}
    for line in lines:
        dx, dy = line.direction
        for joint, share in line.shares:
            fx, fy = forces.get(joint, (ZERO, ZERO))
            forces[joint] = (fx + share * dx, fy + share * dy)
    # a root that has cancelled must not leave its symbols behind
    return tuple(JointLoad(joint, trimmed(fx), trimmed(fy)) for joint, (fx, fy) in forces.items())


def _note(rule: Rule, lines: Sequence[SpreadLine], length: str) -> str:
    notes = []
    if isinstance(rule, SelfWeight):
        notes.append(HALVED)
    elif any(len(line.shares) > 1 for line in lines):
        notes.append(SHARED)
    if rule.beside:
        notes.append(_lever_note(rule.beside, length))
    return " ".join(notes)


def _lever_note(beside: Beside, length: str) -> str:
    """Return the lever rule with its numbers, and what a share outside 0 to 1 means."""
    offset, spacing, share = (factor_text(value) for value in (beside.offset, beside.spacing, beside.share))
    side, arm, outside = "towards", f"{spacing} - {offset}", ""
    if beside.offset.sign() < 0:
        offset = factor_text(-beside.offset)
        side, arm = "away from", f"{spacing} + {offset}"
        outside = ": more than the whole, for the other truss is loaded in the opposite sense"
    elif beside.offset > beside.spacing:
        outside = ": the load stands beyond the other truss, and loads this one in the opposite sense"
    return (
        f"Lever rule: the load stands {offset} {length} from this truss, {side} the other one at {spacing} {length}; "
        f"this truss carries ({arm})/{spacing} = {share} of it{outside}."
    )
