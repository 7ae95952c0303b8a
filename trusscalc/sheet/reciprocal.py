"""Maxwell's reciprocal diagram, exactly: a point for every space, a line for every force, and whether it closes.

From the point of one space to the next leads the force between them, so the lines round a joint are its force
polygon and every force is drawn once (Maxwell, On Reciprocal Figures and Diagrams of Forces, 1864; letters after Bow,
1873; both from memory).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from trusscalc.exact import ZERO, Exact
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.planar import crossing_members, is_in_one_piece
from trusscalc.sheet.spaces import (
    Force,
    Notation,
    bar_force,
    found_forces,
    loads_on,
    notation,
    numbers_of,
    outer_corners,
    outer_forces,
)
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.statics.cuts import Structure

Vector = tuple[Exact, Exact]
MOST_TOLD = 6


@dataclass(frozen=True, slots=True)
class Reciprocal:
    """The diagram of a truss in numbers.

    Attributes
    ----------
    notation : Notation
        Spaces, and the forces between them.
    points : dict of str to (Exact, Exact)
        Where the diagram has each space, in units of force; the first at (0, 0).
    outer_error : (Exact, Exact)
        What the loads and reactions, one after the other, miss their start by: (0, 0) in equilibrium.
    joint_errors : dict of str to (Exact, Exact)
        The same for the polygon of every joint that does not close; empty when all is well.
    """

    notation: Notation
    points: Mapping[str, Vector]
    outer_error: Vector
    joint_errors: Mapping[str, Vector]

    @property
    def closes(self) -> bool:
        """Whether every polygon closes exactly."""
        return not self.joint_errors and not any(self.outer_error)


def why_no_maxwell(check: MemberCheck) -> str:
    """Return in plain words why there is no Maxwell diagram of this check, '' where there is one.

    Examples
    --------
    >>> from trusscalc.loads import LoadCase
    >>> from trusscalc.membercheck import check_members
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> case = LoadCase("dead", {"C": (0, -2)})
    >>> why_no_maxwell(check_members(truss, case, "all"))
    ''
    >>> why_no_maxwell(check_members(truss, case, ["A-C"]))
    'No Maxwell diagram: it needs the forces of all members, and those of A–B and B–C are not on this sheet.'
    """
    reason = _reason(check, numbers_of(check), found_forces(check))
    return f"No Maxwell diagram: {reason}." if reason else ""


def _reason(  # noqa: PLR0911 - one return for each reason
    check: MemberCheck, structure: Structure, found: Mapping[str, Exact]
) -> str:
    if not check.statics.determinate:
        return "the truss is statically indeterminate, and statics alone does not give all its forces"
    missing = [bar(name) for name in structure.bars if name not in found]
    if missing:
        return f"it needs the forces of all members, and those of {_several(missing)} are not on this sheet"
    crossing = crossing_members(structure)
    if crossing:
        return f"members {listed(map(bar, crossing))} cross, so that they do not bound separate spaces"
    if not is_in_one_piece(structure):
        return "the truss is in several pieces that only the ground connects"
    forces = outer_forces(structure, found)
    if not forces:
        return "no loads act and all forces are zero"
    outside = outer_corners(structure)
    inside = [joint for joint in forces if joint not in outside]
    if inside:
        several = len(inside) > 1
        where = f"joint{'s' * several} {_several(inside)}"
        return f"a load or reaction acts at {where}, inside the truss, where it is between no two outer spaces"
    return ""


def _several(names: list[str]) -> str:
    if len(names) > MOST_TOLD:
        return f"{', '.join(names[:MOST_TOLD])} and {counted(len(names) - MOST_TOLD, 'other')}"
    return listed(names)


def reciprocal(check: MemberCheck) -> Reciprocal | None:
    """Return the reciprocal diagram of a check, None where there is none."""
    structure, found = numbers_of(check), found_forces(check)
    if _reason(check, structure, found):
        return None
    return _diagram(structure, found, notation(structure, found))


def _diagram(structure: Structure, found: Mapping[str, Exact], bow: Notation) -> Reciprocal:
    total = resultant(between.force for between in bow.outside)
    points: dict[str, Vector] = {bow.outside[0].after: (ZERO, ZERO)}
    ways: dict[str, list[tuple[str, Exact, Exact]]] = {}
    for between in (*bow.outside, *bow.members):
        force = between.force
        ways.setdefault(between.before, []).append((between.after, force.x, force.y))
        ways.setdefault(between.after, []).append((between.before, -force.x, -force.y))
    waiting = list(points)
    for space in waiting:
        for other, x, y in ways[space]:
            if other not in points:
                points[other] = (points[space][0] + x, points[space][1] + y)
                waiting.append(other)
    errors = {joint: resultant(joint_forces(structure, found, joint)) for joint in structure.joints}
    return Reciprocal(bow, points, total, {joint: error for joint, error in errors.items() if any(error)})


def joint_forces(structure: Structure, found: Mapping[str, Exact], joint: str) -> list[Force]:
    """Return all forces on a joint; those of its bars must all be found."""
    bars = [bar_force(structure, name, joint, found[name]) for name in structure.bars_at[joint]]
    return bars + loads_on(structure, joint)


def resultant(forces: Iterable[Force]) -> Vector:
    """Return the exact sum of forces."""
    x, y = ZERO, ZERO
    for force in forces:
        x, y = x + force.x, y + force.y
    return x, y


def bow_names(check: MemberCheck) -> dict[str, str]:
    """Return for every member the two spaces it lies between, as ``B–F``; {} where there is no Maxwell diagram."""
    diagram = reciprocal(check)
    if diagram is None:
        return {}
    return {between.force.name: f"{between.before}–{between.after}" for between in diagram.notation.members}
