"""The engineer's own cut, and leaning to sections or joints."""

from __future__ import annotations

import pytest
from trade_trusses import k_truss, pratt

import trusscalc
from trusscalc.errors import InputError, NoCutError, UnknownNameError
from trusscalc.exacttext import parse, to_text
from trusscalc.membercheck import check_members
from trusscalc.statics.cutreport import cut_equation, cut_report
from trusscalc.statics.owncuts import own_cut

K = k_truss(8)
PRATT = pratt(8)


def test_keeping_joints_and_cutting_members_give_the_same_cut() -> None:
    """The cut named by its joints equals the cut named by its members."""
    kept = own_cut(PRATT.truss, keep=["U2", "L0", "L1", "L2", "U1"])
    through = own_cut(PRATT.truss, through=["U3-U2", "L2-L3", "U2-L3"])
    assert kept == through
    assert set(kept.bars) == {"L2-L3", "U2-U3", "U2-L3", "L0.x", "L0.y"}


def test_the_side_to_keep_can_be_named() -> None:
    """Any joint of the right part keeps the right part."""
    right = own_cut(PRATT.truss, through=["U2-U3", "L2-L3", "U2-L3"], keep="L8")
    assert set(right.kept) == {"L3", "L4", "L5", "L6", "L7", "L8", "U3", "U4", "U5", "U6", "U7"}


def test_a_list_that_does_not_part_the_truss_names_what_holds_it() -> None:
    """Forgetting the diagonal is told by its name."""
    with pytest.raises(InputError, match=r"does not part the truss: U2-L3 still holds it together"):
        own_cut(PRATT.truss, through=["U2-U3", "L2-L3"])


def test_a_member_too_many_is_named() -> None:
    """A member with both ends on one side has no place in the cut."""
    with pytest.raises(InputError, match=r"L4-L5: both ends lie on one side"):
        own_cut(PRATT.truss, through=["U2-U3", "L2-L3", "U2-L3", "L4-L5"])


def test_joints_of_both_sides_cannot_be_kept() -> None:
    """The cut parts them, so the request contradicts itself."""
    with pytest.raises(InputError, match="the cut parts L0 from L8"):
        own_cut(PRATT.truss, through=["U2-U3", "L2-L3", "U2-L3"], keep=["L0", "L8"])


def test_nothing_named_and_unknown_names() -> None:
    """An empty cut and unknown joints or members are refused by name."""
    with pytest.raises(InputError, match="joints to keep"):
        own_cut(PRATT.truss)
    with pytest.raises(UnknownNameError, match="no joint 'L99'"):
        own_cut(PRATT.truss, keep=["L99"])
    with pytest.raises(UnknownNameError, match="no member 'U2-U9'"):
        own_cut(PRATT.truss, through=["U2-U9"])


def test_a_panel_section_of_a_pratt_solves_all_its_bars() -> None:
    """Three bars not through one point: each has its own equation."""
    report = cut_report(own_cut(PRATT.truss, through=["U2-U3", "L2-L3", "U2-L3"]), PRATT.case)
    assert set(report.solves) == {"U2-U3", "L2-L3", "U2-L3"}
    assert report.reason == ""
    assert report.possibilities[0].unknown


def test_a_vertical_cut_through_a_k_panel_solves_nothing_and_says_why() -> None:
    """Four bars, no point on three of them: told, with the nearest cut that does solve one."""
    report = cut_report(own_cut(K.truss, keep=["L0", "L1", "M1", "U1"]), K.case)
    assert report.solves == () == report.together
    assert "4 unknown forces" in report.reason
    near = cut_report(own_cut(K.truss, keep=report.nearest), K.case)
    assert near.solves


def test_two_bars_of_a_joint_are_solved_together() -> None:
    """At a joint with two oblique unknowns neither axis sum has one unknown, but both together decide them."""
    truss = trusscalc.Truss(
        {"A": (0, 0), "B": (6, 1), "C": (2, 4)}, ["A-C", "B-C", "A-B"], {"A": "pin", "B": {"reaction": (0, 1)}}
    )
    report = cut_report(own_cut(truss, keep="C"), trusscalc.LoadCase("x", {"C": (3, -5)}))
    assert report.together == ("A-C", "B-C")


def test_a_chosen_cut_is_used_for_its_member() -> None:
    """The derivation uses the chosen body, and the value stays what it is."""
    usual = check_members(PRATT.truss, PRATT.case, ["U2-L3"])
    right = own_cut(PRATT.truss, through=["U2-U3", "L2-L3", "U2-L3"], keep="L8")
    chosen = check_members(PRATT.truss, PRATT.case, [], cuts={"L3-U2": right})
    assert chosen.steps[-1].cut.kept == right.kept != usual.steps[-1].cut.kept
    assert chosen.members["U2-L3"].exact == usual.members["U2-L3"].exact
    assert chosen.agreed


def test_a_cut_with_three_unknowns_of_one_body_is_solved_as_a_system() -> None:
    """Three hinged bars to a rigid block: no single equation, three equations for three unknowns."""
    truss = trusscalc.Truss(
        {"A": (0, 0), "B": (4, 0), "C": (0, 3), "P": (-3, -2), "Q": (5, -3), "R": (3, 7)},
        ["A-B", "B-C", "A-C", "A-P", "B-Q", "C-R"],
        {"P": "pin", "Q": "pin", "R": "pin"},
    )
    case = trusscalc.LoadCase("x", {"A": (2, -7), "B": (1, -3)})
    block = own_cut(truss, keep=["A", "B", "C"])
    assert cut_report(block, case).solves  # about the meeting of two of the bars each is found alone
    check = check_members(truss, case, ["A-P", "B-Q", "C-R"], cuts={"A-P": block})
    assert check.agreed


def test_a_cut_that_misses_its_member_is_refused() -> None:
    """The message names member, cut and a near cut that works."""
    far = own_cut(PRATT.truss, keep=["L7"])
    with pytest.raises(NoCutError, match=r"keeps L7 does not give U2-L3: it does not cut U2-L3"):
        check_members(PRATT.truss, PRATT.case, [], cuts={"U2-L3": far})


def test_leaning_to_joints_and_to_sections() -> None:
    """prefer= turns the derivation, not the value."""
    by_joints = check_members(PRATT.truss, PRATT.case, ["U2-L3"], prefer="joints")
    by_sections = check_members(PRATT.truss, PRATT.case, ["L1-U1"], prefer="sections")
    assert {step.kind for step in by_joints.steps} == {"whole", "joint"}
    assert {step.kind for step in by_sections.steps} == {"whole", "section"}
    assert by_joints.agreed
    assert by_sections.agreed
    assert by_joints.members["U2-L3"].exact == check_members(PRATT.truss, PRATT.case, ["U2-L3"]).members["U2-L3"].exact


def test_an_equation_about_any_point() -> None:
    """Moments of the panel section about a point off the truss: levers by hand."""
    cut = own_cut(PRATT.truss, keep=["L0", "L1", "L2", "U1", "U2"])
    equation = cut_equation(cut, PRATT.case, centre=(7, "1/2"))
    levers = {(term.kind, term.name): to_text(term.lever) for term in equation.terms if term.kind != "member"}
    assert levers[("reaction", "L0.y")] == "-7"
    assert levers[("reaction", "L0.x")] == "1/2"
    chord = next(term for term in equation.terms if term.name == "U2-U3")
    # panel 5, height 6: pulled along +x at y = 6, arm -(6 - 1/2)
    assert chord.coefficient == parse("-11/2")
    upwards = cut_equation(cut, PRATT.case, direction=(0, 1))
    assert {term.name for term in upwards.terms if term.kind == "member"} == {"U2-L3"}
    with pytest.raises(InputError, match="give a centre"):
        cut_equation(cut, PRATT.case)
    with pytest.raises(InputError, match="two numbers"):
        cut_equation(cut, PRATT.case, direction=(1,))


def test_conveniences_on_the_truss() -> None:
    """The public names reach the same functions, and show themselves."""
    truss = trusscalc.shapes.pratt(6, 4, 5)
    loads = trusscalc.shapes.panel_loads(truss, "L", (0, -10))
    cut = truss.cut(keep=["L0", "L1", "U1"])
    assert cut == own_cut(truss, keep=["L0", "L1", "U1"])
    assert "Solves alone" in cut.report(loads)._repr_mimebundle_()["text/plain"]
    assert "Bars cut" in cut._repr_mimebundle_()["text/plain"]


def test_three_bars_of_one_joint_are_not_decided_together() -> None:
    """A joint has two equations; force sums along three directions are still only two."""
    truss = trusscalc.Truss(
        {"A": (0, 0), "B": (6, 1), "C": (2, 5), "D": (3, 2), "E": (9, 4)},
        ["A-B", "B-C", "C-A", "A-D", "B-D", "D-C", "E-C", "E-B"],
        {"A": "pin", "E": {"reaction": (1, 3)}},
    )
    own = own_cut(truss, keep=["D"])
    report = cut_report(own, trusscalc.LoadCase("", {"C": (3, -4)}))
    assert len(report.unknown) == 3
    assert report.together == ()
    assert "meet in one point" in report.reason
