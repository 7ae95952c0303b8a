"""Influence lines: against printed ordinates, single checks, an independent solution, and spoilt routes."""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Sequence
from dataclasses import replace
from itertools import pairwise
from typing import Any

import pytest
import replay
import trade_trusses as trade
from case_files import CASES, FOLDER, LINES, PublishedLine
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from random_trusses import trusses
from stated_truss import Stated

from trusscalc import influence, membercheck, stiffness
from trusscalc.chains import Chain
from trusscalc.decimals import approximate
from trusscalc.errors import InputError, UndecidedError, UnknownNameError, UnstableTrussError
from trusscalc.exact import ZERO, Exact
from trusscalc.exacttext import parse, to_text
from trusscalc.influence import InfluenceLine, influence_line, influence_lines, unit_load
from trusscalc.membercheck import check_members
from trusscalc.statics.plan import PlannedStep
from trusscalc.truss import Truss

PRATT = trade.pratt(6)
DECK = [f"L{place}" for place in range(7)]
TRUSS = PRATT.truss


def texts(values: Sequence[Exact]) -> list[str]:
    """Return exact numbers as texts."""
    return [to_text(value) for value in values]


def exacts(*written: str) -> tuple[Exact, ...]:
    """Return texts as exact numbers."""
    return tuple(map(parse, written))


# --- published ordinates ----------------------------------------------------------------------------------


def line_id(value: object) -> str | None:
    """Return the id under which a failing test names its source."""
    return value.id if isinstance(value, PublishedLine) else None


def is_printed(printed: str, value: Exact) -> bool:
    """Return whether a value rounds to what is printed, or is it where that is no decimal."""
    if "." not in printed:
        return parse(printed) == value
    places = len(printed.partition(".")[2])
    return abs(approximate(value - parse(printed), 20)).scaleb(places) <= approximate(parse("1/2"), 5)


@pytest.mark.parametrize("case", LINES.values(), ids=line_id)
def test_ordinates_are_the_expected_ones(case: PublishedLine) -> None:
    """Each line by hand, exactly; the two routes agree."""
    for target, expected in case.expected.items():
        line = influence_line(case.truss, target, case.data["chain"])
        assert line.target == target
        assert line.ordinates == expected
        assert line.agreed


@pytest.mark.parametrize("case", LINES.values(), ids=line_id)
def test_ordinates_are_the_printed_ones(case: PublishedLine) -> None:
    """To every digit printed; so are the straight lines between them."""
    for name, printed in case.data["printed"].items():
        target, times = case.target_of(name)
        line = influence_line(case.truss, target, case.data["chain"])
        for joint, text in printed.items():
            assert is_printed(text, line.ordinate(joint) * times), joint
    for name, pieces in case.data.get("printed_lines", {}).items():
        target, times = case.target_of(name)
        line = influence_line(case.truss, target, case.data["chain"])
        for piece in pieces:
            start, end, slope, height = map(parse, (piece["from"], piece["to"], piece["slope"], piece["start"]))
            for position in (start, (start + 2 * end) / 3, end):
                assert line.at(position) * times == slope * position + height


@pytest.mark.parametrize("name", ["hicks_deck_warren_leftward", "hicks_deck_warren_rightward"])
def test_loads_times_ordinates_are_printed_forces(name: str) -> None:
    """Hicks (editor), pp. 1.73-1.75, read in the source: the chord force under two axles, and every other force."""
    case = CASES[name]
    chain = ["T0", "T1", "T2", "T3", "T4"]
    lines = {line.target: line for line in influence_lines(case.truss, list(case.expected), chain)}
    assert all(not load.fx for load in case.loads.loads)
    for target, expected in case.expected.items():
        assert sum((lines[target].ordinate(load.joint) * -load.fy for load in case.loads.loads), start=ZERO) == expected
    chord = sum((lines["T1-T2"].ordinate(load.joint) * -load.fy for load in case.loads.loads), start=ZERO)
    for printed_name, printed in case.data["printed"].items():
        member, times = case.member_of(printed_name)
        assert member == "T1-T2"
        assert is_printed(printed, chord * times)


@pytest.mark.parametrize("case", LINES.values(), ids=line_id)
def test_every_published_line_says_where_it_comes_from(case: PublishedLine) -> None:
    """Author, title, provenance, derivation; and nothing else lies in the folder."""
    assert {path.stem for path in (FOLDER / "influence").iterdir()} == set(LINES)
    assert case.data["id"] == case.id
    assert case.data["source"]["author"]
    assert case.data["source"]["title"]
    assert case.data["provenance"] in {"from memory", "read in the source"}
    assert case.data["derived_by"]


@pytest.mark.parametrize("case", LINES.values(), ids=line_id)
def test_a_spoilt_truss_gives_other_ordinates(case: PublishedLine) -> None:
    """A support moved to the next joint is noticed."""
    first, last = case.data["chain"][0], case.data["chain"][-1]
    supports = case.data["supports"]
    moved = first if supports[first] == "roller" else last
    inner = case.data["chain"][1] if moved == first else case.data["chain"][-2]
    spoilt = {inner if joint == moved else joint: kind for joint, kind in supports.items()}
    wrong = PublishedLine(case.id, {**case.data, "supports": spoilt})
    for target, expected in case.expected.items():
        if target != "C-G":  # a hanger carries the load at its foot, wherever the supports stand
            assert influence_line(wrong.truss, target, case.data["chain"]).ordinates != expected


# --- against single checks --------------------------------------------------------------------------------


def rightward(stated: Stated) -> list[str]:
    """Return the longest chain to the right from some joint, by members; its joints' places as floats suffice."""
    joints = {joint.name: float(joint.x) for joint in stated.truss.joints}
    beside: dict[str, set[str]] = {}
    for member in stated.truss.members:
        beside.setdefault(member.start, set()).add(member.end)
        beside.setdefault(member.end, set()).add(member.start)
    best: dict[str, list[str]] = {}
    for name in sorted(joints, key=lambda joint: (-joints[joint], joint)):
        onward = [best[other] for other in sorted(beside[name]) if joints[other] > joints[name] + 1e-9]
        best[name] = [name, *max(onward, key=len, default=[])]
    return max(best.values(), key=len)


def drawn(examples: int) -> settings:
    """Return settings: the same examples on every run, as long as each takes."""
    slow = [HealthCheck.too_slow, HealthCheck.data_too_large]
    return settings(max_examples=examples, deadline=None, derandomize=True, suppress_health_check=slow, database=None)


def assert_ordinates_are_forces_under_unit_loads(stated: Stated, targets: Sequence[str], chain: list[str]) -> None:
    """Compare each line, by hand and all at once, with the ordinary check under each unit load."""
    truss = stated.truss
    lines = influence_lines(truss, targets, chain)
    for target, at_once in zip(targets, lines, strict=True):
        line = influence_line(truss, target, chain)
        assert line.ordinates == at_once.ordinates
        assert line.positions == at_once.positions
        assert (line.zeros, line.positive_area, line.negative_area) == (
            at_once.zeros,
            at_once.positive_area,
            at_once.negative_area,
        )
        assert line.agreed, line.differing
        assert at_once.agreed, at_once.differing
        for joint, ordinate in zip(chain, line.ordinates, strict=True):
            check = check_members(truss, unit_load(joint), [target if "." not in target else stated.members[0]])
            found = check.reactions[target] if "." in target else check.members[target]
            assert found.exact == ordinate
            assert found.verdict == "agrees"


@pytest.mark.filterwarnings("ignore:.*runs through joint:trusscalc.errors.TrusscalcWarning")
@drawn(20)
@given(
    st.one_of(
        trusses(most_joints=9, complex_share=0.3), trusses("surd", most_joints=7), trusses("angle", most_joints=6)
    ),
    st.integers(0, 1000),
)
def test_an_ordinate_is_the_force_under_a_unit_load(stated: Stated, seed: int) -> None:
    """For members and reactions of random trusses, complex ones and such with roots too."""
    chain = rightward(stated)
    choose = random.Random(seed)
    targets = [*choose.sample(stated.members, 2), choose.choice(stated.truss.links).name]
    assert_ordinates_are_forces_under_unit_loads(stated, targets, chain)


SHAPES = {
    "Pratt": (trade.pratt(8), ["U2-U3", "U2-L3", "L4-U4", "L0.y"]),
    "Howe, height with a root": (trade.howe(6, height="7*sqrt(3)/2"), ["L2-L3", "L2-U3", "L0-U1"]),
    "Parker": (trade.parker(), ["U2-U3", "U2-L3", "L2-U2"]),
    "Warren": (trade.warren(6, height="3*sqrt(3)"), ["U2-U3", "L2-U2", "L6.y"]),
    "K truss": (trade.k_truss(8), ["U2-U3", "M2-U3", "M2-L3", "L2-M2"]),
    "Baltimore": (trade.baltimore(), ["U2-U4", "U2-M3", "M3-L4", "L3-M3"]),
    "cantilever": (trade.cantilever(), ["U1-U2", "U1-L2", "U0.x"]),
    "girder with hinges": (trade.hinged_spans(), ["U3-U4", "L5-L6", "L3.y", "L1-U1"]),
}


@pytest.mark.parametrize("shape", SHAPES)
def test_trade_trusses(shape: str) -> None:
    """Members of every kind, loads along the lower and the upper chord, against an independent solution too."""
    stated, targets = SHAPES[shape]
    for letter in "LU":
        chain = [name for name in stated.joints if name.startswith(letter)]
        chain.sort(key=lambda name: int(name[1:]))
        joined = {frozenset(member.split("-")) for member in stated.members}
        while not all(frozenset(pair) in joined for pair in pairwise(chain)):
            gap = next(place for place, pair in enumerate(pairwise(chain)) if frozenset(pair) not in joined)
            chain = chain[: gap + 1] if gap + 1 > len(chain) / 2 else chain[gap + 1 :]
        lines = [influence_line(stated.truss, target, chain) for target in targets]
        assert [line.agreed for line in lines] == [True] * len(lines)
        assert [line.ordinates for line in influence_lines(stated.truss, targets, chain)] == [
            line.ordinates for line in lines
        ]
        for place, joint in enumerate(chain):
            forces = replay.forces_of(stated.under({joint: ("0", "-1")}))
            for line in lines:
                assert replay.close(replay.value(to_text(line.ordinates[place])), forces[line.target], 1)


def test_every_member_of_a_bridge_with_the_load_on_either_chord() -> None:
    """Both ways of asking, for all members, reactions and panels."""
    stated = trade.pratt(6)
    targets = [*stated.members, "L0.x", "L0.y", "L6.y", *(f"V(L{i}-L{i + 1})" for i in range(6))]
    lines = influence_lines(stated.truss, targets, DECK)
    assert all(line.agreed for line in lines)
    for target, line in zip(targets, lines, strict=True):
        by_hand = influence_line(stated.truss, target, DECK)
        assert by_hand.target == target
        assert replace(by_hand, shown_joint="", steps=(), found=(), shear_terms=()) == line


@pytest.mark.parametrize("target", ["B-C", "A-D", "C-F", "E.y"])
def test_a_complex_truss_is_derived_with_a_carried_force(target: str) -> None:
    """No section helps: the same carried force and the same closing equation at every joint."""
    joints = {"A": ("0", "0"), "B": ("0", "3"), "C": ("4", "7"), "D": ("8", "3"), "E": ("8", "0"), "F": ("4", "3")}
    members = ("A-B", "B-C", "C-D", "D-E", "C-F", "A-F", "E-F", "A-D", "B-E")
    stated = Stated(joints, members, {"A": "pin", "E": "roller"}, {})
    chain = ["A", "F", "E"]
    assert_ordinates_are_forces_under_unit_loads(stated, [target], chain)
    line = influence_line(stated.truss, target, chain)
    assert any(step.kind == "close" for step in line.steps) == ("-" in target)
    assert target in line.found[0]


# --- targets ----------------------------------------------------------------------------------------------


def test_names_are_taken_as_the_truss_spells_them() -> None:
    """Ends in either order, blanks at the ends of what was typed; a chain as record, list or text."""
    chain = Chain("deck", tuple(DECK))
    line = influence_line(TRUSS, " L3-U2 ", chain)
    assert (line.target, line.kind, line.chain) == ("U2-L3", "member", chain)
    assert influence_line(TRUSS, "L0.y", ",".join(DECK)).kind == "reaction"
    shear = influence_line(TRUSS, "V( L3-L2 )", chain)
    assert (shear.target, shear.kind) == ("V(L2-L3)", "shear")


@pytest.mark.parametrize(
    ("target", "error", "message"),
    [
        ("U2-L4", UnknownNameError, r"there is no member 'U2-L4'; did you mean"),
        ("L0.z", UnknownNameError, r"there is no reaction 'L0.z'; did you mean L0.[xy]\?"),
        ("U2", UnknownNameError, "there is no member 'U2'"),
        ("", UnknownNameError, "there is no member ''"),
        ("V(L2-L4)", InputError, r"V\(L2-L4\): that is no panel of the chain L0 to L6; its panels are L0-L1, L1-L2"),
        ("V(U2-U3)", InputError, "no panel of the chain"),
        ("V(L2)", InputError, "no panel of the chain"),
        ("V()", InputError, "no panel of the chain"),
    ],
)
def test_what_is_not_there_is_told(target: str, error: type[Exception], message: str) -> None:
    """By both ways of asking."""
    with pytest.raises(error, match=message):
        influence_line(TRUSS, target, DECK)
    with pytest.raises(error, match=message):
        influence_lines(TRUSS, ["L0-L1", target], DECK)


def test_a_chain_that_does_not_fit_and_a_truss_that_moves_are_refused() -> None:
    """As everywhere."""
    with pytest.raises(InputError, match="no member joins L0 and L2"):
        influence_line(TRUSS, "L0-L1", ["L0", "L2"])
    loose = replace(PRATT, members=tuple(name for name in PRATT.members if name != "U1-L2"))
    with pytest.raises(UnstableTrussError):
        influence_line(loose.truss, "L0-L1", DECK)


def test_dimensions_in_symbols_are_taken_at_their_stated_values() -> None:
    """The line of a truss with a panel a and a height h is that of the truss as drawn."""
    symbolic = trade.pratt(6, "a", "h")
    truss = Truss(symbolic.joints, symbolic.members, symbolic.supports, symbols={"a": "5", "h": "2*sqrt(7)"})
    drawn_truss = trade.pratt(6, "5", "2*sqrt(7)").truss
    for target in ("U2-U3", "U2-L3", "V(L2-L3)"):
        line = influence_line(truss, target, DECK)
        assert line == replace(influence_line(drawn_truss, target, DECK), truss=line.truss)
        assert line.truss == truss.at_values()
        assert influence_lines(truss, [target], DECK)[0].ordinates == line.ordinates


# --- shear in a panel -------------------------------------------------------------------------------------


def test_the_shear_is_what_the_diagonal_carries() -> None:
    """Between level chords the diagonal's vertical part is the shear, for loads on either chord (3-4-5 diagonals)."""
    truss = trade.pratt(6, "3", "4").truss
    for chain in (DECK, [f"U{place}" for place in range(1, 6)]):
        for place in range(1, 5):
            panel = f"{chain[0][0]}{place}-{chain[0][0]}{place + 1}"
            diagonal = f"U{place}-L{place + 1}" if place < 3 else f"L{place}-U{place + 1}"
            shear = influence_line(truss, f"V({panel})", chain)
            sense = 1 if place < 3 else -1
            bar = influence_line(truss, diagonal, chain)
            assert shear.ordinates == tuple(sense * force * 4 / 5 for force in bar.ordinates)
            assert shear.agreed


def test_the_shear_does_not_depend_on_the_direction_of_travel() -> None:
    """It is always taken on the part to the left; only the order of the ordinates turns round."""
    there = influence_line(TRUSS, "V(L2-L3)", DECK)
    back = influence_line(TRUSS, "V(L2-L3)", DECK[::-1])
    assert texts(there.ordinates) == ["0", "-1/6", "-1/3", "1/2", "1/3", "1/6", "0"]
    assert back.ordinates == there.ordinates[::-1]
    assert back.target == "V(L3-L2)"
    assert back.section is not None
    assert there.section is not None
    assert back.section.cut == there.section.cut


def test_the_section_of_a_panel_shear() -> None:
    """It cuts the fewest members and lies beside joints above the panel's middle; terms add up to the ordinate."""
    warren = trade.warren(6)
    line = influence_line(warren.truss, "V(L2-L3)", DECK)
    assert line.section is not None
    assert line.section.between == exacts("12", "15")
    assert line.section.cut.kept == ("L0", "L1", "L2", "U0", "U1")
    assert line.section.cut.bars == ("L2-L3", "U1-U2", "L2-U2", "L0.x", "L0.y")
    assert line.shown_joint == "L3"
    assert [(term.name, to_text(term.product)) for term in line.shear_terms] == [("L0.y", "1/2")]
    behind = influence_line(warren.truss, "V(L4-L5)", DECK)
    assert [(term.kind, term.name) for term in behind.shear_terms] == [("reaction", "L0.y"), ("load", "L4")]
    assert sum((term.product for term in behind.shear_terms), start=ZERO) == behind.ordinate("L4") == parse("-2/3")


def test_the_shear_in_a_cantilever() -> None:
    """From the wall the reactions carry all loads beyond; on the free side no reaction is needed, nor a step."""
    stated = trade.cantilever()
    chain = [f"L{place}" for place in range(6)]
    line = influence_line(stated.truss, "V(L2-L3)", chain)
    assert texts(line.ordinates) == ["0", "0", "0", "1", "1", "1"]
    mirrored = influence_line(stated.mirrored().truss, "V(L3-L2)", chain[::-1])
    assert texts(mirrored.ordinates) == ["-1", "-1", "-1", "0", "0", "0"]
    assert mirrored.steps == ()
    assert mirrored.agreed


def test_the_shear_beside_a_leaning_reaction() -> None:
    """Of a reaction along (1, 2) only the upward part counts, and only on its own side."""
    leaning = Truss(PRATT.joints, PRATT.members, {"L0": {"reaction": (1, 2)}, "L6": "pin"})
    line = influence_line(leaning, "V(L2-L3)", DECK)
    assert texts(line.ordinates) == ["0", "-1/6", "-1/3", "1/2", "1/3", "1/6", "0"]
    assert line.agreed
    assert texts([line.found[3]["L0.r"]]) == ["sqrt(5)/4"]
    other_side = Truss(PRATT.joints, PRATT.members, {"L0": "pin", "L6": {"reaction": (1, 2)}})
    assert influence_line(other_side, "V(L2-L3)", DECK).ordinates == line.ordinates


def test_a_support_inside_the_panel_is_told() -> None:
    """There is no one shear in such a panel."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (8, 0), "D": (4, 3), "E": (2, 3), "F": (6, 3)}
    members = ["A-B", "B-C", "A-E", "E-B", "E-D", "D-B", "D-F", "B-F", "F-C"]
    truss = Truss(joints, members, {"A": "pin", "F": "roller"})
    with pytest.raises(InputError, match=r"V\(B-C\): the support at F stands inside the panel"):
        influence_line(truss, "V(B-C)", ["A", "B", "C"])
    assert influence_line(truss, "V(A-B)", ["A", "B", "C"]).agreed


def test_a_panel_without_a_section_in_two_bodies_is_told() -> None:
    """What lies left of the vertical line hangs together only through what lies right of it."""
    joints = {"A": (0, 0), "B": (2, 0), "C": (6, 0), "D": (8, 0), "E": (6, 4), "F": (1, 4)}
    members = ["A-B", "B-C", "C-D", "C-E", "D-E", "B-E", "E-F", "C-F", "A-E"]
    truss = Truss(joints, members, {"A": "pin", "D": "roller"})
    with pytest.raises(InputError, match=r"V\(B-C\): no vertical section through the panel parts the truss in two"):
        influence_line(truss, "V(B-C)", ["A", "B", "C", "D"])


# --- statically indeterminate -----------------------------------------------------------------------------

BOX = Stated(
    {"A": ("0", "0"), "B": ("4", "0"), "C": ("8", "0"), "D": ("0", "3"), "E": ("4", "3"), "F": ("8", "3")},
    ("A-B", "B-C", "D-E", "E-F", "A-D", "B-E", "C-F", "A-E", "B-D", "B-F"),
    {"A": "pin", "C": "roller"},
    {},
)


def test_what_statics_decides_has_its_line_in_an_indeterminate_truss() -> None:
    """The panel without crossed diagonals, reactions, and the shear in the crossed one."""
    targets = ["B-F", "E-F", "C.y", "V(A-B)"]
    for target, line in zip(targets, influence_lines(BOX.truss, targets, ["A", "B", "C"]), strict=True):
        by_hand = influence_line(BOX.truss, target, ["A", "B", "C"])
        assert by_hand.ordinates == line.ordinates
        assert by_hand.agreed


def test_what_statics_does_not_decide_is_told_with_the_reason() -> None:
    """An error of its own, with the name as the truss spells it and who shares the redundancy."""
    for ask in (influence_line, lambda truss, target, chain: influence_lines(truss, [target], chain)):
        with pytest.raises(
            UndecidedError, match=r"A-E: statics alone does not decide it: .*\(degree 1\).* D-E"
        ) as told:
            ask(BOX.truss, "E-A", ["A", "B", "C"])
        assert told.value.name == "A-E"
    propped = replace(BOX, members=tuple(set(BOX.members) - {"B-D"}), supports={**BOX.supports, "B": "roller"}).truss
    with pytest.raises(
        UndecidedError, match=r"V\(A-B\): it rests on A.y, and statics alone does not decide it"
    ) as told:
        influence_line(propped, "V(A-B)", ["A", "B", "C"])
    assert told.value.name == "V(A-B)"


# --- the line ---------------------------------------------------------------------------------------------


def test_zero_points_areas_and_ordinates_between_joints() -> None:
    """Panels of 5: the line of U1-L2 crosses inside a panel; all by hand from V sqrt(61)/6."""
    line = influence_line(TRUSS, "U1-L2", DECK)
    root = parse("sqrt(61)/6")
    assert line.ordinates == tuple(root * part for part in exacts("0", "-1/6", "2/3", "1/2", "1/3", "1/6", "0"))
    assert texts(line.zeros) == ["0", "6", "30"]
    assert line.negative_area == -root / 2
    assert line.positive_area == root * 8
    assert line.at(parse("6")) == 0
    assert line.at(parse("15/2")) == root / 4
    assert line.at(10) == root * parse("2/3")
    assert line.at(30) == line.at(0) == ZERO
    assert line.at(parse("-1/1000")) == line.at(parse("30001/1000")) == ZERO


def test_off_the_chain_there_is_nothing() -> None:
    """Also where the ordinate at the end of the chain is not zero."""
    line = influence_line(TRUSS, "L0.y", DECK)
    assert (line.at(0), line.at(parse("-1/10^9"))) == (parse("1"), ZERO)
    assert texts(line.zeros) == ["30"]
    assert (line.positive_area, line.negative_area) == exacts("15", "0")


def test_a_hanger_and_a_member_that_never_carries_anything() -> None:
    """Stretches of zeros: each joint of them is a zero point, and they have no area."""
    line = influence_line(TRUSS, "L1-U1", DECK)
    assert texts(line.ordinates) == ["0", "1", "0", "0", "0", "0", "0"]
    assert texts(line.zeros) == ["0", "10", "15", "20", "25", "30"]
    assert texts([line.positive_area, line.negative_area]) == ["5", "0"]
    idle = influence_line(TRUSS, "L0.x", DECK)
    assert set(idle.ordinates) == {ZERO}
    assert idle.shown_joint == "L0"
    assert idle.agreed


def test_an_area_is_the_force_under_a_uniform_load() -> None:
    """Unit load per length on all of a surd line: half a panel's load at each end of it, by an ordinary check."""
    stated = trade.warren(6, height="3*sqrt(3)")
    loads = {f"L{place}": ("0", "-3" if place in (0, 6) else "-6") for place in range(7)}
    check = stated.under(loads).check(["L2-U2", "U1-L2"])
    for name, found in check.members.items():
        line = influence_line(stated.truss, name, DECK)
        assert line.positive_area + line.negative_area == found.exact
        assert line.positive_area > 0 > line.negative_area


def test_an_angle_that_is_no_surd_is_told() -> None:
    """Rounded once on the way in, and said."""
    assert influence_line(trade.howe(6, height="5*tan(20)").truss, "L2-U3", DECK).exactness == "angle rounded"
    assert influence_line(TRUSS, "U2-L3", DECK).exactness == "exact"


# --- the derivation ---------------------------------------------------------------------------------------


def test_the_steps_shown_are_those_of_the_largest_ordinate() -> None:
    """All reactions, then what the member rests on; every equation sums to zero, and so do the checks."""
    line = influence_line(TRUSS, "U2-U3", DECK)
    assert line.shown_joint == "L3"
    assert line.ordinate("L3") == max(line.ordinates, key=abs)
    assert [step.solves for step in line.steps] == [("L0.x",), ("L0.y",), ("L6.y",), ("U2-U3",)]
    assert [step.number for step in line.steps] == [1, 2, 3, 4]
    assert line.steps[-1].results["U2-U3"] == line.ordinate("L3")
    assert all(not equation.residual for step in line.steps for equation in step.equations)
    assert [step.check is not None for step in line.steps] == [False, False, True, True]
    assert all(not step.check.residual for step in line.steps if step.check)
    loads = {term.name for step in line.steps for eq in step.equations for term in eq.terms if term.kind == "load"}
    assert loads == {"L3"}


def test_what_the_same_equations_gave_at_every_joint() -> None:
    """For the table beside the derivation: a column for each force found on the way."""
    line = influence_line(TRUSS, "U2-L3", DECK)
    assert [list(found) for found in line.found] == [["L0.y", "U2-L3"]] * 7
    assert tuple(found["U2-L3"] for found in line.found) == line.ordinates
    assert texts([found["L0.y"] for found in line.found]) == ["1", "5/6", "2/3", "1/2", "1/3", "1/6", "0"]


def test_one_set_of_cuts_for_every_position(monkeypatch: pytest.MonkeyPatch) -> None:
    """The plan is made once, and every position is written with the same bodies and centres."""
    plans: list[object] = []
    right = influence.plan
    monkeypatch.setattr(influence, "plan", lambda *given, **options: plans.append(given) or right(*given, **options))
    bodies: dict[tuple[str, ...], set[object]] = {}
    write = membercheck.write_step

    def watched(structure: Any, number: int, cuts: Any, solves: Any, *given: Any, **options: Any) -> Any:
        bodies.setdefault(solves, set()).add(cuts)
        return write(structure, number, cuts, solves, *given, **options)

    monkeypatch.setattr(membercheck, "write_step", watched)
    influence_line(trade.k_truss(8).truss, "M2-U3", [f"L{place}" for place in range(9)])
    assert len(plans) == 1
    assert [len(seen) for seen in bodies.values()] == [1] * len(bodies)
    assert any("M2-U3" in solves for solves in bodies)


# --- negative controls ------------------------------------------------------------------------------------


def spoil(monkeypatch: pytest.MonkeyPatch, change: Callable[[str, float], float]) -> None:
    """Let the numeric route return changed member forces and reactions."""
    right = stiffness.solve_all

    def spoilt(truss: Truss, cases: Any) -> tuple[stiffness.StiffnessResult, ...]:
        return tuple(
            replace(
                run,
                forces={name: change(name, force) for name, force in run.forces.items()},
                reactions={name: change(name, force) for name, force in run.reactions.items()},
            )
            for run in right(truss, cases)
        )

    monkeypatch.setattr(stiffness, "solve_all", spoilt)


def both(target: str) -> tuple[InfluenceLine, InfluenceLine]:
    """Return a line by hand and from the elimination."""
    return influence_line(TRUSS, target, DECK), influence_lines(TRUSS, [target], DECK)[0]


@pytest.mark.parametrize(
    "wrong",
    [
        lambda force: -force - 1e-6,
        lambda force: force + 1e-8,
        lambda force: 1.001 * force + 1e-4,
        lambda _: math.inf,
        lambda _: math.nan,
    ],
)
@pytest.mark.parametrize("name", ["U2-L3", "L0.y"])
def test_a_wrong_stiffness_value_is_noticed(
    monkeypatch: pytest.MonkeyPatch, name: str, wrong: Callable[[float], float]
) -> None:
    """At every joint, by both ways of asking; lines of other members are not touched."""
    spoil(monkeypatch, lambda each, force: wrong(force) if each == name else force)
    for line in both(name):
        assert not line.agreed
        assert set(line.differing) == set(DECK)
        assert set(line.differing.values()) == {"the two routes differ by more than the tolerance"}
    assert all(line.agreed for line in both("U3-U4"))
    if name == "U2-L3":  # the numeric shear is that of the members cut
        assert not any(line.agreed for line in both("V(L2-L3)"))


def test_a_wrong_or_missing_value_at_one_joint_is_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """That joint alone is named."""
    right = stiffness.solve_all

    def spoilt(truss: Truss, cases: Any) -> tuple[stiffness.StiffnessResult, ...]:
        runs = list(right(truss, cases))
        runs[2] = replace(runs[2], forces={name: f for name, f in runs[2].forces.items() if name != "U1-L2"})
        return tuple(runs)

    monkeypatch.setattr(stiffness, "solve_all", spoilt)
    for line in both("U1-L2"):
        assert list(line.differing) == ["L2"]
        assert not line.agreed


def corrupt(monkeypatch: pytest.MonkeyPatch, name: str, factor: int, *, in_result_alone: bool = False) -> None:
    """Let the step that solves a member or reaction return a wrong value."""
    right = membercheck.write_step

    def spoilt(*given: Any, **options: Any) -> Any:
        step, found = right(*given, **options)
        if name in step.solves:
            step = replace(step, results={**step.results, name: step.results[name] * factor})
            found = found if in_result_alone else {**found, name: found[name] * factor}
        return step, found

    monkeypatch.setattr(membercheck, "write_step", spoilt)


@pytest.mark.parametrize("factor", [-1, 2, 0])
@pytest.mark.parametrize("in_result_alone", [True, False])
def test_a_wrong_step_is_noticed(monkeypatch: pytest.MonkeyPatch, factor: int, *, in_result_alone: bool) -> None:
    """Where the value is not zero it differs, though the exact elimination and stiffness are right."""
    corrupt(monkeypatch, "U2-L3", factor, in_result_alone=in_result_alone)
    line = influence_line(TRUSS, "U2-L3", DECK)
    assert list(line.differing) == DECK[1:-1]
    assert all("of U2-L3 by hand differs from the exact solution" in reason for reason in line.differing.values())


def test_a_wrong_reaction_is_noticed_in_all_that_rests_on_it(monkeypatch: pytest.MonkeyPatch) -> None:
    """Members and shears alike."""
    corrupt(monkeypatch, "L0.y", 2)
    for target in ("L0.y", "U2-L3", "V(L2-L3)"):
        line = influence_line(TRUSS, target, DECK)
        assert list(line.differing) == DECK[:-1]
        assert f"L0.y, {target} by hand" in line.differing["L1"] or target == "L0.y"


def test_both_routes_spoilt_alike_are_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The equilibrium of all joints is a third witness."""
    corrupt(monkeypatch, "U2-L3", 2)
    spoil(monkeypatch, lambda name, force: 2 * force if name == "U2-L3" else force)
    assert not influence_line(TRUSS, "U2-L3", DECK).agreed


def test_a_wrong_cut_is_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """A cut that forgets a known reaction: its terms sum to zero, but the result is not the truss's."""
    right = influence.plan

    def forgetful(*given: Any, **options: Any) -> tuple[PlannedStep, ...]:
        return tuple(
            replace(
                step,
                bodies=tuple(
                    (replace(cut, bars=tuple(name for name in cut.bars if name != "L0.y")), about)
                    if "U2-L3" in step.solves
                    else (cut, about)
                    for cut, about in step.bodies
                ),
            )
            for step in right(*given, **options)
        )

    assert influence_line(TRUSS, "U2-L3", DECK).agreed
    monkeypatch.setattr(influence, "plan", forgetful)
    line = influence_line(TRUSS, "U2-L3", DECK)
    assert not line.agreed
    assert list(line.differing) == DECK[:-1]


def test_nobody_can_judge_a_nearly_critical_form() -> None:
    """Solved exactly, but floats are too poor, and the line says so and is not agreed."""
    flat = Truss({"A": (0, 0), "B": (2, 0), "C": (1, "1/10^10")}, ["A-C", "B-C"], {"A": "pin", "B": "pin"})
    line = influence_line(flat, "A-C", ["A", "C", "B"])
    assert not line.agreed
    assert "so close to a critical form" in line.differing["C"]
    assert influence_lines(flat, ["A-C"], ["A", "C", "B"])[0].reasons == line.reasons
