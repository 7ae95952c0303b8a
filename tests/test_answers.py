"""What a cut gives: against printed values of a book, the equilibrium of all joints, and when it gives nothing."""

from __future__ import annotations

import random

import pytest
from case_files import CASES
from random_trusses import random_truss
from trade_trusses import k_truss, pratt

from trusscalc.errors import UnstableTrussError
from trusscalc.exact import exact
from trusscalc.exacttext import parse, to_text
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.statics import matrix
from trusscalc.statics.cuts import SUM_X, SUM_Y, About, about_joint, structure_of
from trusscalc.statics.owncuts import own_cut
from trusscalc.truss import Truss
from trusscalc.widgets.answers import answer
from trusscalc.widgets.cutblocks import in_one_sentence

KHOO = CASES["khoo_t4"]
"""A K truss of six panels; its source prints the chords by a curved cut, then the diagonals by a straight one."""
CURVED = own_cut(KHOO.truss, keep=["n", "h", "a", "o", "i", "b", "c", "p"])
STRAIGHT = own_cut(KHOO.truss, keep=[*CURVED.kept, "j"])


def about(name: str) -> About:
    """Return moments about a joint of the K truss."""
    return about_joint(structure_of(KHOO.truss, KHOO.loads), name)


def test_the_curved_cut_of_a_k_truss_gives_the_printed_chords() -> None:
    """H. A. Khoo, Example T-4: 320 in the lower chord, -320 in the upper one."""
    found = answer(CURVED, KHOO.loads)
    printed = {name: parse(KHOO.data["printed"][name]) for name in ("p-q", "c-d")}
    assert found.solved == printed
    assert set(found.members) == {"c-d", "p-q", "c-j", "j-p"}
    assert {name: found.force(name).verdict for name in printed} == {"p-q": "agrees", "c-d": "agrees"}
    assert found.reason == ""


def test_the_straight_cut_gives_nothing_and_names_one_that_does() -> None:
    """Four unknowns, no three of which meet; the nearest body is asked, and answers."""
    found = answer(STRAIGHT, KHOO.loads)
    assert found.solved == {}
    assert "4 unknown forces" in found.reason
    nearer = answer(own_cut(KHOO.truss, keep=found.nearest), KHOO.loads)
    assert set(nearer.solved) & set(found.members)


def test_with_the_chords_kept_the_straight_cut_gives_the_printed_diagonals() -> None:
    """H. A. Khoo, Example T-4: 44.72 and -44.72, which is 20 sqrt 5."""
    before = check_members(KHOO.truss, KHOO.loads, [], cuts={"c-d": CURVED, "p-q": CURVED})
    found = answer(STRAIGHT, KHOO.loads, earlier=before)
    assert {name: to_text(value) for name, value in found.solved.items()} == {
        "j-d": "-20*sqrt(5)",
        "j-q": "20*sqrt(5)",
    }
    for name, value in found.solved.items():
        assert round(float(value), 2) == float(KHOO.data["printed"][name])
    assert [step.number for step in found.steps] == [len(before.steps) + 1, len(before.steps) + 2]
    assert set(found.unknown) == {"j-d", "j-q"}


def test_the_centre_decides_what_is_left() -> None:
    """About q the posts and the lower chord drop out; about a point of no meaning, three forces stay."""
    alone = answer(CURVED, KHOO.loads, about("p"))
    assert list(alone.solved) == ["c-d"]
    assert set(alone.dropped) >= {"p-q"}
    crowd = answer(CURVED, KHOO.loads, About("moment", exact(1), exact(1)))
    assert crowd.solved == {}
    assert crowd.equation is not None
    assert "one equation gives one force" in crowd.reason
    along = answer(CURVED, KHOO.loads, SUM_X)
    assert {term.name for term in along.equation.terms if term.kind == "member"} == {"c-d", "p-q"}  # type: ignore[union-attr]


def test_what_was_kept_counts_as_known() -> None:
    """A sum along x holds both chords; with one of them kept it gives the other."""
    before = check_members(KHOO.truss, KHOO.loads, [], cuts={"c-d": CURVED})
    found = answer(CURVED, KHOO.loads, SUM_X, earlier=before)
    assert found.solved == {"p-q": parse("320")}


def test_a_joint_and_the_whole_truss_are_cuts_too() -> None:
    """At a support joint two sums give two bars; the whole truss has nothing left to give."""
    joint = answer(own_cut(KHOO.truss, keep=["n"]), KHOO.loads)
    assert set(joint.solved) == {"n-o", "h-n"}
    assert joint.letter == ""
    whole = answer(own_cut(KHOO.truss, keep=[joint.name for joint in KHOO.truss.joints]), KHOO.loads, SUM_Y)
    assert whole.solved == {}
    assert "known forces alone" in whole.reason
    assert in_one_sentence(whole).startswith("The whole truss is kept.")


def test_every_answer_of_random_cuts_is_the_force_of_equilibrium() -> None:
    """Whatever a random body of a random truss gives equals the solution of all joint equations, exactly."""
    draw = random.Random(12)
    given = 0
    for _ in range(100):
        stated = random_truss(draw, draw.randint(5, 10))
        truss, case = stated.truss, stated.case
        forces = matrix.solve(truss, case).forces
        names = [joint.name for joint in truss.joints]
        found = answer(own_cut(truss, keep=draw.sample(names, draw.randint(1, len(names) - 1))), case)
        for step in found.steps:
            assert not any(equation.residual for equation in step.equations)
        for name, value in found.solved.items():
            assert value == forces[name]
            given += 1
        assert bool(found.reason) == (not found.solved)
    assert given >= 20


def test_symbols_stay_symbols() -> None:
    """A chord by a section with symbols in dimensions and loads: P a / h."""
    truss = Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h"), "D": ("a", 0)},
        ["A-D", "D-B", "A-C", "C-B", "C-D"],
        {"A": "pin", "B": "roller"},
        symbols={"a": 3, "h": 2},
    )
    case = LoadCase("P", {"D": (0, "-P")}, symbols={"P": 40})
    found = answer(own_cut(truss, keep=["A"]), case)
    assert found.solved["A-D"] == parse("P*a/(2*h)", ("P", "a", "h"))
    assert "30.000 kN T" in in_one_sentence(found)


def test_an_unstable_truss_is_refused() -> None:
    """As everywhere, with the joints that move."""
    loose = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)},
        ["A-B", "B-C", "C-D", "A-D"],
        {"A": "pin", "B": "roller"},
    )
    with pytest.raises(UnstableTrussError):
        answer(own_cut(loose, keep=["A"]), LoadCase("", {"C": (1, 0)}))


def test_an_undecided_member_is_not_given() -> None:
    """In a crossed panel no body gives a diagonal, and the reason says how many stay unknown."""
    truss = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)},
        ["A-B", "B-C", "C-D", "A-D", "A-C", "B-D"],
        {"A": "pin", "B": "roller"},
    )
    found = answer(own_cut(truss, keep=["A", "D"]), LoadCase("", {"C": (10, 0)}))
    assert found.solved == {}
    assert found.reason


def test_letters_follow_the_sections_before() -> None:
    """A second section is b; the same one again keeps its letter."""
    case = pratt(8)
    first = own_cut(case.truss, through=["L2-L3", "U2-U3", "U2-L3"])
    second = own_cut(case.truss, through=["L1-L2", "U1-U2", "U1-L2"])
    before = check_members(case.truss, case.case, [], cuts={"L2-L3": first})
    assert answer(first, case.case).letter == "a"
    assert answer(second, case.case, earlier=before).letter == "b"
    assert answer(first, case.case, earlier=before).letter == "a"


def test_sixty_members_are_answered_while_a_hand_still_rests() -> None:
    """Sixty members: the answer itself takes a small part of the half second that a drawn cut may take."""
    stated = k_truss(12)
    assert len(stated.truss.members) >= 60
    found = answer(own_cut(stated.truss, keep=["L0", "L1", "U1", "M1", "L2", "U2"]), stated.case)
    assert set(found.solved) == {"L2-L3", "U2-U3"}
