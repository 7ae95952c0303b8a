"""Submitted results against ours: books' own tables with their misprints, planted blunders, and every verdict."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any, NamedTuple

import pytest
import trade_trusses
from case_files import CASES, PublishedCase
from hypothesis import given
from hypothesis import strategies as st

from trusscalc import stiffness
from trusscalc.blind import Frozen, frozen, reveal
from trusscalc.compare import compare_cases, compare_submitted
from trusscalc.comparereport import compare_data, comparison_lines
from trusscalc.comparison import ABSOLUTE, RELATIVE, ComparedForce, Comparison
from trusscalc.errors import InputError, UnknownNameError, UnstableTrussError
from trusscalc.exact import exact
from trusscalc.exacttext import parse
from trusscalc.loads import Combination, LoadCase
from trusscalc.membercheck import check_members
from trusscalc.ourforces import our_forces
from trusscalc.submitted import read_submitted
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

ROOF = Truss(
    {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"}, title="Mill roof"
)
SNOW = LoadCase("snow", {"C": (0, -12)})
"""A-B 8, A-C and C-B -10, reactions 6 each."""


def roof(table: object, case: LoadCase = SNOW, truss: Truss = ROOF, **options: Any) -> Comparison:
    """Return a table compared with the roof under snow; options of reading and of comparing."""
    reading = {key: options.pop(key) for key in ("convention", "columns", "names", "unit") if key in options}
    return compare_submitted(TrussFile(truss, (case,)), read_submitted(table, truss, **reading), case.name, **options)


def verdicts(comparison: Comparison) -> dict[str, str]:
    """Return the verdict on each member and reaction."""
    return {name: item.verdict for name, item in {**comparison.members, **comparison.reactions}.items()}


# --- published tables, as submitted -------------------------------------------------------------------------

PRINTED = re.compile(r"-?\d+(\.\d+)?")


def as_submitted(case: PublishedCase) -> dict[str, str]:
    """Return what the source prints of members, misprints as they stand, as signed numbers."""
    found = {
        name: printed
        for name, printed in case.data["printed"].items()
        if name in case.data["members"] and PRINTED.fullmatch(printed)
    }
    for wrong in case.data.get("erratum", []):
        size = re.match(r"(-?[\d.]+)(?: ?\(?([TC])\)?)?", wrong["printed"])
        if wrong["name"] in case.data["members"] and size:
            found[wrong["name"]] = f"-{size[1]}" if size[2] == "C" else size[1]
    return found


TABLES = [case for case in CASES.values() if case.route != "unstable" and as_submitted(case)]
MISPRINTS = {
    "companion_3_6": {"F-G": True},
    "holtz_2d": {"c-g": True},
    "holtz_j1": {"b-g": True},
    "khoo_t5": {"c-d": False, "c-j": True},
}
"""Members that the sources print wrongly (see ``erratum`` in their files), and whether the sense is flipped."""


@pytest.mark.parametrize("case", TABLES, ids=lambda case: case.id)
def test_published_tables_agree_but_for_their_misprints(case: PublishedCase) -> None:
    """At the digits printed and with no tolerance besides; c-d of Khoo T5 is off in its third decimal only."""
    printed = as_submitted(case)
    table = "member,force\n" + "".join(f"{name},{value}\n" for name, value in printed.items())
    stated = TrussFile(case.truss, (case.loads,))
    cut_off = set(case.data.get("last_digit", {}))
    found = compare_submitted(
        stated, read_submitted(table, case.truss), "published", members=set(printed) - cut_off, relative=0, absolute=0
    )
    assert {name: item.flipped for name, item in found.members.items() if item.verdict == "differs"} == MISPRINTS.get(
        case.id, {}
    )
    assert found.agreed == (case.id not in MISPRINTS)


@pytest.mark.parametrize("case", [case for case in TABLES if case.id in MISPRINTS], ids=lambda case: case.id)
def test_a_flipped_misprint_fails_at_any_tolerance(case: PublishedCase) -> None:
    """However much is allowed."""
    table = dict(as_submitted(case))
    found = compare_submitted(
        TrussFile(case.truss, (case.loads,)), read_submitted(table, case.truss), "published", relative=10, absolute=10
    )
    flipped = {name for name, wrong in MISPRINTS[case.id].items() if wrong}
    assert set(found.differing) == flipped
    assert not found.agreed


# --- the criterion ------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("printed", "verdict"),
    [
        ("8.000", "agrees"),
        ("8.009", "agrees"),
        ("8.0092", "agrees"),
        ("8.0093", "differs"),
        ("8.010", "differs"),
        ("7.990", "differs"),
        ("8.01", "agrees"),
        ("8.02", "differs"),
        ("8.1", "differs"),
        ("8", "agrees"),
        ("9", "differs"),
        ("-8", "differs"),
        ("0", "differs"),
    ],
)
def test_share_of_ours_share_of_the_largest_and_half_a_digit(printed: str, verdict: str) -> None:
    """8 +- (0.008 + 0.0012 + half a unit of the last digit); the largest force here is the load of 12."""
    found = roof({"A-B": printed, "A-C": "-10.0", "C-B": "-10.0"})
    assert found.members["A-B"].verdict == verdict
    assert found.agreed == (verdict == "agrees")
    assert found.members["A-B"].tolerance == pytest.approx(0.0092)
    assert found.largest == 12


def test_the_bound_itself_is_decided_exactly() -> None:
    """Ours 1/8 of a unit, printed half to even and half up: both within half a digit, and not one more."""
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    case = LoadCase("snow", {"C": (0, "-12.1875")})  # A-B 8.125
    for printed, verdict in (("8.12", "agrees"), ("8.13", "agrees"), ("8.11", "differs"), ("8.14", "differs")):
        found = roof({"A-B": printed}, case, truss, members=["A-B"], relative=0, absolute=0)
        assert found.members["A-B"].verdict == verdict


def test_a_surd_on_the_edge_is_decided_exactly() -> None:
    """Ours 10 sqrt(2): floats cannot tell a bound missed by 1e-15, exact numbers can."""
    truss = Truss({"A": (0, 0), "B": (2, 0), "C": (1, 1)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    case = LoadCase("snow", {"C": (0, -20)})
    ours = parse("10*sqrt(2)")
    just = parse("14.142135623730951") - ours
    table = read_submitted({"A-C": "-14.142135623730951"}, truss)
    (row,) = table.rows
    for digits, verdict in ((just, "agrees"), (just * parse("1 - 1/10^12"), "differs")):
        given_table = replace(table, rows=(replace(row, digits=digits),))
        found = compare_submitted(
            TrussFile(truss, (case,)), given_table, "snow", members=["A-C"], relative=0, absolute=0
        )
        assert found.members["A-C"].verdict == verdict


def test_the_criterion_is_printed_with_its_reason() -> None:
    """The tool's own, and the user's."""
    own = roof({"A-B": 8}).criterion.text(12, "kN")
    assert own.startswith("a value agrees within 0.1 % of ours, plus 0.01 % of the largest force (which is 12 kN)")
    assert "no published figure was found (common practice)" in own
    assert roof({"A-B": 8}, relative="0.05").criterion.text(12, "kN").endswith("Reason: as stated by the user")
    assert exact(0.001) == RELATIVE
    assert exact(0.0001) == ABSOLUTE


@pytest.mark.parametrize("options", [{"relative": -1}, {"absolute": "-0.1"}])
def test_a_negative_tolerance_is_refused(options: dict[str, Any]) -> None:
    """It would fail everything."""
    with pytest.raises(InputError, match="a tolerance is not negative"):
        roof({"A-B": 8}, **options)


# --- senses -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("size", [10000, 100, 1, "0.01", "0.0001"])
def test_a_flipped_sense_fails_however_small(size: object) -> None:
    """Far below the absolute part: a wall of 1000 kN beside a member with next to nothing."""
    truss = Truss(
        {"A": (0, 0), "B": (8, 0), "C": (4, 3), "D": (12, 0), "E": (10, 3)},
        ["A-B", "A-C", "C-B", "B-D", "B-E", "D-E", "C-E"],
        {"A": "pin", "D": "roller"},
    )
    case = LoadCase("snow", {"C": (0, -100_000), "D": (size, 0)})
    ours = compare_submitted(TrussFile(truss, (case,)), read_submitted({"A-B": 0}, truss), "snow")
    table = {name: item.exact for name, item in ours.members.items()}
    assert compare_submitted(TrussFile(truss, (case,)), read_submitted(table, truss), "snow").agreed
    for name, value in table.items():
        assert value is not None
        found = compare_submitted(TrussFile(truss, (case,)), read_submitted({**table, name: -value}, truss), "snow")
        assert found.differing == ((name,) if value else ())
        assert found.members[name].flipped == bool(value)


def test_nothing_is_not_flipped() -> None:
    """Our zero against their noise of either sign, their zero against our little."""
    idle = LoadCase("wind", {"B": (1000, 0)})
    for noise in ("-1.2E-10", "1.2E-10", "-0.0", "0"):
        found = roof({"A-B": "1000.0", "A-C": noise, "C-B": "0.00"}, idle)
        assert found.agreed
        assert (found.members["A-C"].our_sense, found.members["A-C"].flipped) == ("0", False)
    small = LoadCase("wind", {"B": (1000, 0), "C": (0, "-0.01")})
    found = roof({"A-B": "1000.0", "A-C": "0.0", "C-B": "-0.0"}, small)
    assert found.agreed
    assert [found.members["A-C"].our_sense, found.members["A-C"].their_sense] == ["C", "0"]


@pytest.mark.parametrize("noise", ["1E-13", "-1E-13"])
def test_a_rounded_angle_leaves_no_sense(noise: str) -> None:
    """40 degrees, and twice 20: the load runs along A-C but for the rounding of angles to 30 digits."""
    truss = Truss(
        {"A": (0, 0), "B": (4, 0), "C": ("4*cos(20)^2 - 4*sin(20)^2", "8*sin(20)*cos(20)")},
        ["A-B", "A-C", "B-C"],
        {"A": "pin", "B": "roller"},
    )
    case = LoadCase("wind", {"C": ("-10*cos(40)", "-10*sin(40)")})
    found = roof({"A-B": noise, "A-C": "-10.0", "B-C": noise}, case, truss)
    assert found.members["B-C"].exact
    assert found.members["B-C"].our_sense == "0"
    assert found.agreed


@pytest.mark.parametrize("noise", [1e-14, -1e-14])
def test_stiffness_noise_has_no_sense(monkeypatch: pytest.MonkeyPatch, noise: float) -> None:
    """What is not exact is only as good as the numeric route, in size too."""
    right = stiffness.solve_all

    def noisy(truss: Truss, cases: Any) -> Any:
        return tuple(replace(run, forces={**run.forces, "A-D": noise}) for run in right(truss, cases))

    monkeypatch.setattr(stiffness, "solve_all", noisy)
    case = LoadCase("lamp", {"E": (0, -12)})
    found = roof({"A-D": "1E-13"}, case, propped(), members=["A-D"])
    assert found.members["A-D"].exact is None
    assert (found.members["A-D"].our_sense, found.agreed) == ("0", True)
    exactly = {"A-D": exact(1e-13)}
    assert roof(exactly, case, propped(), members=["A-D"], relative=0, absolute=0).agreed


def test_letters_of_both_sides_are_told() -> None:
    """Beside the signed difference, theirs minus ours."""
    item = roof({"A-C": "10.5 T"}).members["A-C"]
    assert (item.our_sense, item.their_sense, item.flipped, item.difference) == ("C", "T", True, 20.5)


# --- what is missing ----------------------------------------------------------------------------------------


def test_members_missing_on_either_side() -> None:
    """Listed; the verdict does not call a part the whole, unless only a part was asked for."""
    table = {"A-B": "8.0", "A-C": "-10.0"}
    found = roof(table)
    assert verdicts(found) == {"A-B": "agrees", "A-C": "agrees", "C-B": "missing"}
    assert found.missing == ("C-B",)
    assert not found.agreed
    assert "the table does not give C-B; to compare only some members, name them" in found.notes
    some = roof(table, members=["B-A"])
    assert some.agreed
    assert list(some.members) == ["A-B"]
    assert "given, but not asked for: A-C" in some.notes
    with pytest.raises(UnknownNameError, match="there is no member 'A-X'"):
        roof(table, members=["A-X"])


# --- sign conventions ---------------------------------------------------------------------------------------

REVERSED = {"A-B": "-8.0", "A-C": "10.0", "C-B": "10.0"}


def test_a_reversed_table_fails_and_says_so() -> None:
    """Signs are not turned behind the user's back."""
    found = roof(REVERSED)
    assert set(verdicts(found).values()) == {"differs"}
    assert all(item.flipped for item in found.members.values())
    assert found.notes[0] == (
        "100% of the force agrees in size with ours, and 100% of that is reversed in sense: the table may mean the "
        "other sign; if so, state its convention or have it detected"
    )


def test_a_convention_is_detected_when_asked() -> None:
    """From senses, only where sizes agree; the reason is noted."""
    found = roof(REVERSED, convention="detect")
    assert found.agreed
    assert found.submitted.convention == "compression positive"
    assert any(
        "detected: compression positive; 100% of the force agrees in size" in note for note in found.submitted.notes
    )
    straight = roof({"A-B": "8.0", "A-C": "-10.0", "C-B": "-10.0"}, convention="detect")
    assert straight.agreed
    assert any("sign convention detected: tension positive" in note for note in straight.submitted.notes)


def test_detection_says_nothing_where_sizes_differ() -> None:
    """Half of the force is wrong in size: the senses are then no evidence."""
    found = roof({"A-B": "-8.0", "A-C": "20.0", "C-B": "20.0"}, convention="detect")
    assert not found.agreed
    assert found.submitted.convention == "tension positive"
    assert any("not detected (only 29% of the force agrees in size" in note for note in found.submitted.notes)
    mixed = roof({"A-B": "8.0", "A-C": "10.0", "C-B": "-10.0"}, convention="detect")
    assert mixed.differing == ("A-C",)
    assert any("but 36% of that is reversed" in note for note in mixed.submitted.notes)


def test_one_flipped_member_is_no_convention() -> None:
    """No advice to turn signs where one row is wrong."""
    found = roof({"A-B": "8.0", "A-C": "10.0", "C-B": "-10.0"})
    assert found.differing == ("A-C",)
    assert not any("state its convention" in note for note in found.notes)


# --- cases --------------------------------------------------------------------------------------------------

FILE = TrussFile(
    ROOF,
    (SNOW, LoadCase("wind", {"C": (5, 0)})),
    (Combination("1.2S+0.5W", {"snow": "1.2", "wind": "0.5"}),),
)


class Row(NamedTuple):
    """A member's force in a case, as a table has it."""

    member: str
    case: str
    force: str


def rows_of(stated: TrussFile, cases: Mapping[str, str]) -> str:
    """Return a table of cases of theirs, each one of ours, five figures."""
    lines = ["member,case,force"]
    for theirs, name in cases.items():
        forces = stiffness.member_forces(stated.truss, stated.case(name))
        lines += [",".join(Row(member, theirs, f"{force:.5g}")) for member, force in forces.items()]
    return "\n".join(lines) + "\n"


def test_several_cases_at_once() -> None:
    """Cases and combinations, by their names in any capitals, or by the names the table gives."""
    table = read_submitted(rows_of(FILE, {"Snow": "snow", "WIND": "wind", "1.2S+0.5W": "1.2S+0.5W"}), ROOF)
    found = compare_cases(FILE, table, ["snow", "wind", "1.2S+0.5W"])
    assert {name: item.agreed for name, item in found.items()} == {"snow": True, "wind": True, "1.2S+0.5W": True}
    assert found["wind"].their_case == "WIND"
    assert {row.case for row in found["wind"].submitted.rows} == {"WIND"}
    single = compare_submitted(FILE, table, "wind")
    assert single.members == found["wind"].members
    assert "other load cases of the table, not compared here: 'Snow', '1.2S+0.5W'" in single.notes
    assert not any("not compared here" in note for note in found["wind"].notes)
    other = read_submitted(rows_of(FILE, {"LC1": "snow", "LC2": "wind"}), ROOF)
    assert all(item.agreed for item in compare_cases(FILE, other, {"snow": "LC1", "wind": "LC2"}).values())
    swapped = compare_cases(FILE, other, {"snow": "LC2", "wind": "LC1"})
    assert not any(item.agreed for item in swapped.values())
    assert compare_submitted(FILE, other, "wind", theirs="LC2").agreed


def test_all_cases_of_the_table() -> None:
    """When none is named they must be ours."""
    table = read_submitted(rows_of(FILE, {"snow": "snow", "wind": "wind"}), ROOF)
    assert list(compare_cases(FILE, table)) == ["snow", "wind"]
    with pytest.raises(UnknownNameError, match="there is no case or combination 'LC1'"):
        compare_cases(FILE, read_submitted(rows_of(FILE, {"LC1": "snow"}), ROOF))


def test_the_case_of_the_table() -> None:
    """Its only case is taken and noted; of several one has to fit."""
    only = read_submitted(rows_of(FILE, {"LC1": "snow"}), ROOF)
    found = compare_submitted(FILE, only, "snow")
    assert found.agreed
    assert "the table's only case is called 'LC1': compared with snow" in found.notes
    two = read_submitted(rows_of(FILE, {"LC1": "snow", "winds": "wind"}), ROOF)
    with pytest.raises(InputError, match="has no case 'wind'; it has 'LC1', 'winds'; did you mean winds"):
        compare_submitted(FILE, two, "wind")
    with pytest.raises(InputError, match="has no case 'LC3'; it has 'LC1'"):
        compare_submitted(FILE, only, "snow", theirs="LC3")
    with pytest.raises(UnknownNameError, match="'rain'"):
        compare_submitted(FILE, only, "rain")


def test_a_convention_is_detected_over_all_cases() -> None:
    """And the table is turned once."""
    forces = {name: stiffness.member_forces(ROOF, FILE.case(name)) for name in ("snow", "wind")}
    lines = [f"{member},{name},{-force:.5g}" for name, each in forces.items() for member, force in each.items()]
    table = read_submitted("\n".join(["member,case,force", *lines]) + "\n", ROOF, convention="detect")
    assert all(item.agreed for item in compare_cases(FILE, table).values())


def test_loads_of_no_case_of_the_file() -> None:
    """A load case made on the spot will do as well."""
    assert compare_submitted(
        FILE, read_submitted({"A-B": 16, "A-C": -20, "C-B": -20}, ROOF), LoadCase("2S", {"C": (0, -24)})
    ).agreed


def test_symbols_are_compared_at_their_values() -> None:
    """In loads and in dimensions."""
    truss = Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h")},
        ["A-B", "A-C", "C-B"],
        {"A": "pin", "B": "roller"},
        symbols={"a": 4, "h": 3},
    )
    case = LoadCase("snow", {"C": (0, "-2*P")}, symbols={"P": 6})
    found = roof({"A-B": "8.0", "A-C": "-10.0", "C-B": "-10.0"}, case, truss)
    assert found.agreed
    assert found.members["A-B"].exact == parse("8")
    assert [tuple(map(float, load.theirs)) for load in found.implied if load.joint == "C"] == [(0, -12)]


def test_an_unstable_truss_is_refused() -> None:
    """There is nothing to compare with."""
    square = Truss(
        {"A": (0, 0), "B": (1, 0), "C": (1, 1), "D": (0, 1)}, ["A-B", "B-C", "C-D", "D-A"], {"A": "pin", "B": "roller"}
    )
    with pytest.raises(UnstableTrussError):
        roof({"A-B": 1}, LoadCase("snow", {"C": (0, -1)}), square)


# --- indeterminate trusses, and our own two routes ----------------------------------------------------------


def propped() -> Truss:
    """Return a cantilever panel with two diagonals, and a statically determinate tip."""
    return Truss(
        {"A": (0, 0), "B": (0, 3), "C": (4, 0), "D": (4, 3), "E": (8, 0)},
        ["A-C", "B-D", "C-D", "A-D", "B-C", "C-E", "D-E"],
        {"A": "pin", "B": "pin"},
    )


def test_what_statics_does_not_decide_comes_from_stiffness() -> None:
    """Said in the member's note; the tip stays exact."""
    case = LoadCase("lamp", {"E": (0, -12)})
    table = {name: f"{force:.6g}" for name, force in stiffness.member_forces(propped(), case).items()}
    found = roof(table, case, propped())
    assert found.agreed
    assert found.members["C-E"].exact == parse("-16")
    assert not found.members["C-E"].note
    assert found.members["A-D"].exact is None
    assert "statically indeterminate (degree 1)" in found.members["A-D"].note
    assert "from the stiffness route, the same EA in all members" in found.members["A-D"].note
    assert compare_data(found)["members"]["A-D"]["ours"]["exact"] is None
    assert any("other areas would give other forces" in note for note in found.notes)
    assert not roof({**table, "A-D": "1.0"}, case, propped()).agreed


def test_a_disagreement_of_our_own_is_said_first(monkeypatch: pytest.MonkeyPatch) -> None:
    """A numeric route gone wrong makes nothing agree, whatever the table says."""
    right = stiffness.solve_all

    def wrong(truss: Truss, cases: Any) -> Any:
        return tuple(replace(run, forces={**run.forces, "A-B": 8.1}) for run in right(truss, cases))

    monkeypatch.setattr(stiffness, "solve_all", wrong)
    found = roof({"A-B": "8.0", "A-C": "-10.0", "C-B": "-10.0"})
    assert set(verdicts(found).values()) == {"agrees"}
    assert not found.agreed
    assert len(found.own_faults) == 1
    assert comparison_lines(found)[0].startswith("our own two routes do not agree: A-B: the two routes differ")
    assert compare_data(found)["own_routes"] == list(found.own_faults)


def test_a_nearly_critical_truss_is_not_vouched_for() -> None:
    """Where our numeric route cannot judge, ours is not called checked."""
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, "1/10^9")}, ["A-C", "C-B"], {"A": "pin", "B": "pin"})
    case = LoadCase("snow", {"C": (0, -1)})
    found = roof({"A-C": -2e9, "C-B": -2e9}, case, truss)
    assert not found.agreed
    assert "close to a critical form" in found.own_faults[0]


# --- reactions and displacements ----------------------------------------------------------------------------

FORCES = "member,force\nA-B,8.0\nA-C,-10.0\nC-B,-10.0\n"


def test_reactions_are_compared() -> None:
    """By the names of links, or as components of a joint; a joint without support has none."""
    found = roof(f"{FORCES}A.x,0.0\nA.y,6.0\nB.y,6.1\n")
    assert verdicts(found)["A.y"] == "agrees"
    assert found.differing == ("B.y",)
    assert not found.agreed
    table = f"{FORCES}\njoint,Rx,Ry\nA,0.0,6.0\nB,0.0,6.0\nC,0.0,0.0\n"
    assert roof(table).agreed
    assert roof(table).reactions["C.y"].exact == parse("0")
    assert not roof(table.replace("B,0.0", "B,1.0")).agreed


def test_an_inclined_roller() -> None:
    """Its size along the written direction, or its components."""
    truss = Truss(
        {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": {"reaction": (-3, 4)}}
    )
    ours = roof({"A-B": 0}, truss=truss).ours
    assert ours.reaction("B", "r") == (parse("15/2"), 7.5)
    assert ours.reaction("B", "x") == (parse("-9/2"), -4.5)
    forces = {name: f"{force:.5g}" for name, force in stiffness.member_forces(truss, SNOW).items()}
    table = "member,force\n" + "".join(f"{name},{force}\n" for name, force in forces.items())
    assert roof(f"{table}B.r,7.5\nB.x,-4.5\nB.y,6.0\n", truss=truss).agreed
    assert roof(f"{table}B.r,-7.5\n", truss=truss).reactions["B.r"].flipped


def test_reactions_on_the_supports() -> None:
    """All reversed: the remark names the likely reason; they differ all the same."""
    found = roof(f"{FORCES}A.y,-6.0\nB.y,-6.0\n")
    assert found.differing == ("A.y", "B.y")
    assert any("they may be the forces on the supports" in note for note in found.notes)


def test_reactions_that_statics_does_not_decide() -> None:
    """Noted like members."""
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "pin"})
    item = roof("member,force\nA-C,-10.0\nA.x,4.57\n", truss=truss).reactions["A.x"]
    assert item.exact is None
    assert "ours is by stiffness" in item.note


def displaced(times: float, **changes: float) -> str:
    """Return forces, and displacements for some EA."""
    moves = stiffness.solve(ROOF, SNOW).displacements
    lines = [f"{joint},{x * times:.6g},{y * times:.6g}" for joint, (x, y) in moves.items()]
    table = "\n".join([FORCES, "joint,ux [mm],uy [mm]", *lines])
    for old, new in changes.items():
        table = table.replace(old, str(new))
    return f"{table}\n"


def test_displacements_in_proportion() -> None:
    """EA is unknown: only their ratios mean something, and the verdict does not rest on them."""
    found = roof(displaced(0.37))
    assert found.agreed
    assert all(item.in_proportion for item in found.displacements)
    assert any("all in proportion" in note for note in found.notes)
    table = displaced(0.37).splitlines()
    table[-1] = re.sub(r"-[\d.]+$", "-1.0", table[-1])
    off = roof("\n".join(table) + "\n")
    assert off.agreed
    assert [(item.joint, item.axis) for item in off.displacements if not item.in_proportion] != []
    assert any("out of proportion" in note and "the verdict does not rest on it" in note for note in off.notes)
    upward = roof(displaced(-0.37))
    assert not any(item.in_proportion for item in upward.displacements if item.theirs)


# --- planted blunders ---------------------------------------------------------------------------------------

PRATT = trade_trusses.pratt(8)


@given(st.data())
def test_one_wrong_row_is_found_and_nothing_else(data: st.DataObject) -> None:
    """A digit exchanged, a sign lost, a decimal point moved: exactly that member differs."""
    ours = {name: float(value) for name, value in our_forces(PRATT.truss, [PRATT.case])[0].decimal.items()}
    table = {member: f"{ours[member]:.4g}" for member in PRATT.members}
    member = data.draw(st.sampled_from([m for m in PRATT.members if abs(ours[m]) > 1]))
    change = data.draw(
        st.sampled_from([lambda v: -v, lambda v: v * 10, lambda v: v / 10, lambda v: v * 1.01, lambda v: v * 0.98])
    )
    table[member] = f"{change(ours[member]):.4g}"
    found = compare_submitted(TrussFile(PRATT.truss, (PRATT.case,)), read_submitted(table, PRATT.truss), "load")
    assert found.differing == (PRATT.truss.member(member).name,)
    assert not found.agreed


def test_exchanged_rows_are_found() -> None:
    """Both of them."""
    table = {name: f"{force:.4g}" for name, force in stiffness.member_forces(PRATT.truss, PRATT.case).items()}
    one, two = "U2-U3", "L2-L3"
    table[one], table[two] = table[two], table[one]
    found = compare_submitted(TrussFile(PRATT.truss, (PRATT.case,)), read_submitted(table, PRATT.truss), "load")
    assert set(found.differing) == {one, two}


@pytest.mark.parametrize(
    "stated",
    [trade_trusses.k_truss(8), trade_trusses.fink(), trade_trusses.three_hinged_arch(), trade_trusses.hinged_spans()],
    ids=["K", "Fink", "three-hinged arch", "hinged spans"],
)
@pytest.mark.parametrize("figures", [3, 4, 6, 15])
def test_faithful_tables_agree(stated: Any, figures: int) -> None:
    """At any number of figures, with no tolerance besides the digits (15 figures are short of a float's own)."""
    table = {name: f"{force:.{figures}g}" for name, force in stiffness.member_forces(stated.truss, stated.case).items()}
    table = {name: "0.000" if abs(float(force)) < 1e-9 else force for name, force in table.items()}
    share = 0 if figures < 15 else 1e-14
    found = compare_submitted(
        TrussFile(stated.truss, (stated.case,)), read_submitted(table, stated.truss), "load", relative=0, absolute=share
    )
    assert found.agreed, found.differing
    assert not any(load.differs for load in found.implied) or figures == 15


# --- blind --------------------------------------------------------------------------------------------------

UNTITLED = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
TABLE = "member,force\nA-B,8.0\nA-C,-10.0\nC-B,-10.0\n"


def test_frozen_before_the_table_is_opened() -> None:
    """The digest is of ours alone, and the comparison says in which order things were done."""
    kept = frozen(FILE, "snow")
    assert kept.digest == frozen(FILE, "snow").digest
    assert 'member "A-C" exact -10 decimal -10' in kept.text
    found = reveal(kept, TABLE)
    assert found.agreed
    assert found.frozen == kept.digest
    assert found.order == "our values and the criterion were frozen before the submitted table was opened"
    assert compare_data(found)["frozen"] == {"digest": kept.digest, "order": found.order}
    assert any(kept.digest in line for line in comparison_lines(found))


def test_a_table_read_before_is_not_called_blind() -> None:
    """The record claims no more than it shows."""
    found = reveal(frozen(FILE, "snow"), read_submitted(TABLE, ROOF))
    assert found.agreed
    assert "this record does not show which came first" in found.order


def test_a_digest_written_down_must_be_the_one_found_now() -> None:
    """As it was noted, blanks and capitals aside; else nothing is compared."""
    kept = frozen(FILE, "snow")
    noted = f" {kept.digest[:32].upper()} {kept.digest[32:]}"
    found = reveal(kept, TABLE, written_down=noted)
    assert found.written_down
    assert found.order.endswith("; their digest had been written down before, and is the same")
    assert not reveal(kept, TABLE).written_down
    with pytest.raises(InputError, match="is of other values: ours now have"):
        reveal(kept, TABLE, written_down=frozen(FILE, "wind").digest)


def test_options_of_reading_go_with_the_table() -> None:
    """Columns, conventions, their case."""
    table = "Stab;Kraft;Fall\nA-B;-8,0;LF1\nA-C;10,0;LF1\nC-B;10,0;LF1\nA-B;1,0;LF2\n"
    columns = "member=Stab,force=Kraft,case=Fall"
    found = reveal(frozen(FILE, "snow"), table, theirs="LF1", columns=columns, convention="compression positive")
    assert found.agreed


@pytest.mark.parametrize(
    ("other", "options"),
    [
        (FILE, {"relative": "0.01"}),
        (FILE, {"absolute": "0.01"}),
        (FILE, {"members": ["A-B"]}),
        (FILE, {"case": "wind"}),
        (TrussFile(ROOF, (LoadCase("snow", {"C": (0, "-12.0000001")}),)), {}),
        (TrussFile(UNTITLED, (SNOW,)), {}),
    ],
    ids=["relative", "absolute", "members", "case", "a load", "title"],
)
def test_the_digest_changes_with_everything_that_matters(other: TrussFile, options: dict[str, Any]) -> None:
    """Values, members, criterion, case, structure."""
    options = {"case": "snow", **options}
    assert frozen(other, **options).digest != frozen(FILE, "snow").digest


def test_frozen_values_that_were_changed_are_refused() -> None:
    """A looser criterion after the fact, say."""
    kept = frozen(FILE, "snow")
    looser = Frozen(kept.stated, kept.ours, kept.members, frozen(FILE, "snow", relative=1).criterion, kept.text)
    with pytest.raises(InputError, match="not those their digest was made of"):
        reveal(looser, TABLE)


def test_a_check_by_hand_can_be_frozen() -> None:
    """Then its members are compared, as they were derived."""
    check = check_members(ROOF, SNOW, ["A-C"])
    kept = frozen(check)
    assert kept.members == ("A-C",)
    found = reveal(kept, TABLE)
    assert list(found.members) == ["A-C"]
    assert found.agreed
    with pytest.raises(InputError, match="member A-B was not checked"):
        frozen(check, members=["A-B"])
    with pytest.raises(InputError, match="name the case"):
        frozen(FILE)


def test_a_check_that_disagrees_is_not_vouched_for(monkeypatch: pytest.MonkeyPatch) -> None:
    """Frozen with its disagreement."""
    monkeypatch.setattr(stiffness, "member_forces", lambda *_: {"A-B": 8.1, "A-C": -10.0, "C-B": -10.0})
    check = check_members(ROOF, SNOW, ["A-B"])
    monkeypatch.undo()
    assert not check.agreed
    found = reveal(frozen(check), TABLE)
    assert not found.agreed
    assert found.own_faults == ("A-B: the two routes differ by more than the tolerance",)


def test_a_check_out_of_balance_is_not_vouched_for() -> None:
    """Every fault of the check comes along."""
    check = check_members(ROOF, SNOW, ["A-B"])
    found = reveal(frozen(replace(check, residuals={"C": (parse("1"), parse("0"))})), TABLE)
    assert not found.agreed
    assert found.own_faults == ("joint C: is out of balance",)


# --- as data and as lines -----------------------------------------------------------------------------------


class Explanation(NamedTuple):
    """An explanation as the diagnosis makes them."""

    explanation: str
    where: tuple[str, ...]
    text: str
    remainder: float


def test_the_promised_data() -> None:
    """Key for key as the command prints it."""
    found = roof({"A-B": "8.0", "A-C": "-5.0"})
    told = [Explanation("load-missing", ("C",), "half of the load is missing", 0.5)]
    data = json.loads(json.dumps(compare_data(found, told)))
    assert data == {
        "agreed": False,
        "members": {
            "A-B": {"ours": {"exact": "8", "decimal": 8.0}, "theirs": 8.0, "difference": 0.0, "verdict": "agrees"},
            "A-C": {
                "ours": {"exact": "-10", "decimal": -10.0},
                "theirs": -5.0,
                "difference": 5.0,
                "verdict": "differs",
            },
            "C-B": {
                "ours": {"exact": "-10", "decimal": -10.0},
                "theirs": None,
                "difference": None,
                "verdict": "missing",
            },
        },
        "implied_loads": {"A": [-4.0, 3.0]},
        "diagnosis": [
            {"explanation": "load-missing", "where": ["C"], "text": "half of the load is missing", "remainder": 0.5}
        ],
    }


def test_implied_loads_in_the_data() -> None:
    """Joints that carry something in either model; idle joints of both are left out."""
    pratt = TrussFile(PRATT.truss, (LoadCase("load", {"L3": (0, -80), "L5": (0, -80)}),))
    theirs = LoadCase("theirs", {"L3": (0, -80), "U4": (0, -80)})
    table = {name: f"{force:.5g}" for name, force in stiffness.member_forces(PRATT.truss, theirs).items()}
    data = compare_data(compare_submitted(pratt, read_submitted(table, PRATT.truss), "load"))
    assert sorted(data["implied_loads"]) == ["L0", "L3", "L5", "L8", "U4"]
    assert data["implied_loads"]["L5"] == pytest.approx([0, 0], abs=0.01)
    assert data["implied_loads"]["U4"] == pytest.approx([0, -80], abs=0.01)


def test_reactions_and_displacements_in_the_data() -> None:
    """Only where the table gives them."""
    data = compare_data(roof(f"{displaced(0.37)}\nmember,force\nA.y,6.0\n"))
    assert data["reactions"]["A.y"]["verdict"] == "agrees"
    assert data["displacements"]["C.y"]["in_proportion"]
    assert set(compare_data(roof(FORCES))) == {"agreed", "members", "implied_loads", "diagnosis"}


def test_lines_for_a_terminal() -> None:
    """The table, flagged joints, explanations, the criterion, the file, the notes, the caution."""
    found = roof({"A-B": "8.0", "A-C": "5.0", "C-B": "-10.0"})
    lines = comparison_lines(found, [Explanation("unexplained", (), "nothing tried explains it", 1.25)])
    head = "member or reaction | ours, exact | ours, kN | T/C | theirs, kN | T/C | difference | verdict"
    assert re.split(r"  +", lines[0]) == head.split(" | ")
    row = "A-C | -10 | -10.000 | C | 5.000 | T | +15.000 | differs (flipped)"
    assert re.split(r"  +", lines[2]) == row.split(" | ")
    text = "\n".join(lines)
    for part in (
        "joint A: their forces imply load and reaction of (-12.000, -3.000) kN, ours is (0.000, 6.000)",
        "joint C: their forces imply a load of (12.000, -3.000) kN, ours is (0.000, -12.000)",
        "possible: nothing tried explains it",
        "a value agrees within 0.1 % of ours",
        f"submitted: table, SHA-256 {found.submitted.digest}",
        "the table states no unit of force: read in kN, as the truss",
        "2 agrees, 1 differs: not all agree",
        "licensed engineer",
    ):
        assert part in text


def test_what_is_said_of_each_force_is_complete() -> None:
    """Every field of the record."""
    item = roof({"A-B": "8.004"}).members["A-B"]
    assert item == ComparedForce(
        name="A-B",
        exact=parse("8"),
        ours=8.0,
        theirs=parse("8.004"),
        digits=parse("0.0005"),
        difference=pytest.approx(0.004),
        tolerance=pytest.approx(0.0092),
        our_sense="T",
        their_sense="T",
        flipped=False,
        verdict="agrees",
        note="",
        row=1,
        called="A-B",
        printed="8.004",
    )
