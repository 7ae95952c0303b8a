"""What statics alone does not decide, who shares it, and members that are idle."""

from __future__ import annotations

from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.report import check_data
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.matrix import solve
from trusscalc.statics.zeroforce import BY_EQUILIBRIUM, zero_force_members
from trusscalc.truss import Truss

BOX = {"A": (0, 0), "B": (4, 0), "C": (8, 0), "D": (0, 3), "E": (4, 3), "F": (8, 3)}
CHORDS = ["A-B", "B-C", "D-E", "E-F", "A-D", "B-E", "C-F"]


def test_one_crossed_panel_is_internally_indeterminate() -> None:
    """The six bars of the crossed panel share one redundancy; the other panel is decided and agrees."""
    truss = Truss(BOX, [*CHORDS, "A-E", "B-D", "B-F"], {"A": "pin", "C": "roller"})
    check = check_members(truss, LoadCase("x", {"E": (0, -10)}), "all")
    assert check.redundancy is not None
    assert (check.redundancy.degree, check.redundancy.external, check.redundancy.internal) == (1, 0, 1)
    assert check.redundancy.sharing == (("A-B", "D-E", "A-D", "B-E", "A-E", "B-D"),)
    undecided = {name for name, item in check.members.items() if item.verdict == "undecided"}
    assert undecided == set(check.redundancy.sharing[0])
    assert {item.verdict for name, item in check.members.items() if name not in undecided} == {"agrees"}
    assert "shares the redundancy with D-E" in check.members["A-B"].reason
    assert check.members["A-B"].exact is None
    assert not check.agreed


def test_two_pins_are_externally_indeterminate() -> None:
    """The thrust between two pins runs through the straight lower chord alone."""
    truss = Truss(BOX, [*CHORDS, "A-E", "B-F"], {"A": "pin", "C": "pin"})
    check = check_members(truss, LoadCase("x", {"E": (3, -10)}), "all")
    assert check.redundancy is not None
    assert (check.redundancy.degree, check.redundancy.external, check.redundancy.internal) == (1, 1, 0)
    assert check.redundancy.sharing == (("A-B", "B-C", "A.x", "C.x"),)
    assert check.members["A-E"].verdict == "agrees"
    assert check.reactions["A.y"].verdict == "agrees"
    assert check_data(check)["redundancy"]["external"] == 1


def test_separate_redundancies_are_told_apart() -> None:
    """Two crossed panels make two groups, unless a thrust ties them together."""
    truss = Truss(BOX, [*CHORDS, "A-E", "B-D", "B-F", "C-E"], {"A": "pin", "C": "roller"})
    groups = solve(truss, LoadCase("x", {})).sharing
    assert len(groups) == 1  # the post they have in common takes part in both
    assert solve(truss, LoadCase("x", {})).internal_degree == 2


def test_the_two_inspection_rules() -> None:
    """Two members in a corner, and the third member at a straight chord, are idle at sight."""
    truss = Truss(BOX, [*CHORDS, "A-E", "B-F"], {"A": "pin", "C": "roller"})
    case = LoadCase("x", {"B": (0, -10)})
    reasons = zero_force_members(structure_of(truss, case), solve(truss, case))
    assert "two members not in line meet at D" in reasons["D-E"]
    assert "two members not in line meet at D" in reasons["A-D"]
    idle_post = Truss({**BOX}, [*CHORDS, "A-E", "C-E"], {"A": "pin", "C": "roller"})
    reasons = zero_force_members(
        structure_of(idle_post, LoadCase("x", {"E": (0, -1)})), solve(idle_post, LoadCase("x", {"E": (0, -1)}))
    )
    assert reasons["B-E"] == "at B, without load or support, the other members are in line"


def test_idle_by_equilibrium_only() -> None:
    """A web member that a symmetric load leaves idle is named without a rule it does not obey."""
    truss = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (8, 0), "D": (12, 0), "E": (4, 3), "F": (8, 3)},
        ["A-B", "B-C", "C-D", "A-E", "E-F", "F-D", "B-E", "C-F", "B-F"],
        {"A": "pin", "D": "roller"},
    )
    case = LoadCase("x", {"E": (0, -5), "F": (0, -5), "B": (0, -1), "C": (0, -1)})
    reasons = zero_force_members(structure_of(truss, case), solve(truss, case))
    assert reasons["B-F"] == BY_EQUILIBRIUM


def test_no_false_zero() -> None:
    """A loaded joint never passes for an idle corner."""
    truss = Truss(BOX, [*CHORDS, "A-E", "B-F"], {"A": "pin", "C": "roller"})
    case = LoadCase("x", {"D": (1, -1), "F": (2, -3)})
    reasons = zero_force_members(structure_of(truss, case), solve(truss, case))
    forces = solve(truss, case).tensions
    assert all(not forces[name] for name in reasons)
    assert "D-E" not in reasons
