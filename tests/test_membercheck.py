"""Verdicts: when the routes agree, when they differ, when nobody can judge, and that spoilt values are noticed."""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
import replay
import trade_trusses as trade
from stated_truss import Stated

from trusscalc import membercheck, stiffness
from trusscalc.__main__ import main
from trusscalc.errors import InputError, UnknownNameError, UnstableTrussError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.report import check_data
from trusscalc.verdicts import WIDEST_TOLERANCE

PRATT = trade.pratt(6)
SQUARE = {"A": ("0", "0"), "B": ("4", "0"), "C": ("4", "3"), "D": ("0", "3")}


def verdicts(check: MemberCheck) -> dict[str, str]:
    """Return the verdict of everything."""
    return {name: item.verdict for name, item in {**check.members, **check.reactions}.items()}


def not_agreed(check: MemberCheck) -> list[str]:
    """Return what does not agree."""
    return [name for name, verdict in verdicts(check).items() if verdict != "agrees"]


def spoil(monkeypatch: pytest.MonkeyPatch, change: Callable[[dict[str, float]], dict[str, float]]) -> None:
    """Let the numeric route return changed member forces."""
    right = stiffness.member_forces
    monkeypatch.setattr(stiffness, "member_forces", lambda truss, case: change(dict(right(truss, case))))


# --- agreement --------------------------------------------------------------------------------------------


def test_everything_agrees_on_a_sound_truss() -> None:
    """Verdict, difference, sense and steps of every member and reaction."""
    check = PRATT.check()
    assert check.agreed
    assert not_agreed(check) == []
    assert check.residuals == {}
    assert check.tolerance == membercheck.TOLERANCE
    assert check.statics.determinate
    assert check.statics.stable
    assert (check.statics.joints, check.statics.members, check.statics.reactions, check.statics.rank) == (12, 21, 3, 24)
    for item in {**check.members, **check.reactions}.values():
        assert item.reason == ""
        assert item.decimal is not None
        assert item.stiffness is not None
        assert item.difference == item.decimal - item.stiffness
        assert abs(item.difference) <= check.tolerance * check.largest_force
        assert item.exactness == "exact"
    assert all(item.sense is None for item in check.reactions.values())
    assert {item.sense for item in check.members.values()} == {"T", "C", "0"}


def test_zero_force_members_are_named() -> None:
    """Members whose force is exactly zero."""
    check = PRATT.check(["L2-L3"])
    zero = set(check.zero_members)
    assert {str(item) for item in zero} == {"L3-U3"} or any("L3-U3" in str(item) for item in zero)


def test_the_largest_force_is_that_of_the_whole_truss() -> None:
    """Not only of the members asked for."""
    assert PRATT.check(["L3-U3"]).largest_force == PRATT.check().largest_force


def test_spelling_duplicates_and_order_of_a_request() -> None:
    """Keys as the truss spells them, in the order asked, each once."""
    check = PRATT.check(["U1-L0", "L0-L1", " L1 - L0", "L0-U1"])
    assert list(check.members) == ["L0-U1", "L0-L1"]
    assert list(PRATT.check("L1-L0").members) == ["L0-L1"]
    assert list(PRATT.check("all").members) == list(PRATT.members)


def test_requests_that_cannot_be_met() -> None:
    """Unknown members with a suggestion; nothing; loads on joints that are not there."""
    with pytest.raises(UnknownNameError, match="no member 'L0-U9'; did you mean"):
        PRATT.check(["L0-L1", "L0-U9"])
    with pytest.raises(UnknownNameError, match="no member 'L0'"):
        PRATT.check(["L0"])
    with pytest.raises(UnknownNameError, match="no member 'L0-L0'"):
        PRATT.check(["L0-L0"])
    with pytest.raises(UnknownNameError, match=r"no member 'L0\.x'"):
        PRATT.check(["L0.x"])
    with pytest.raises(InputError, match="no member was asked for"):
        PRATT.check([])
    with pytest.raises(InputError, match=r"\[cases.load\] L9: there is no such joint; did you mean L"):
        check_members(PRATT.truss, LoadCase("load", {"L9": (0, 1)}), "all")


def test_no_load_at_all() -> None:
    """Every force is zero, and that agrees."""
    check = PRATT.under({}).check()
    assert check.agreed
    assert {item.decimal for item in check.members.values()} == {0.0}
    assert {item.sense for item in check.members.values()} == {"0"}


def test_loads_at_supports_only() -> None:
    """They go straight into the supports."""
    stated = PRATT.under({"L0": ("3", "-5"), "L6": ("0", "-7")})
    check = stated.check()
    assert check.agreed
    assert {name: item.decimal for name, item in check.reactions.items()} == {"L0.x": -3.0, "L0.y": 5.0, "L6.y": 7.0}


# --- negative controls: the numeric route -----------------------------------------------------------------


@pytest.mark.parametrize(
    ("wrong", "verdict"),
    [
        (lambda force: force * (1 + 1e-6), "differs"),
        (lambda force: -force, "differs"),
        (lambda _: 0.0, "differs"),
        (lambda force: force * 1000, "differs"),
        (lambda _: math.nan, "differs"),
        (lambda _: math.inf, "differs"),
        (lambda _: -math.inf, "differs"),
        (lambda force: force * (1 + 1e-13), "agrees"),
    ],
    ids=["a little off", "sign turned", "lost", "in other units", "nan", "inf", "minus inf", "rounding"],
)
def test_one_wrong_member_of_the_numeric_route(
    monkeypatch: pytest.MonkeyPatch, wrong: Callable[[float], float], verdict: str
) -> None:
    """It alone differs, whatever its value; the others' tolerance does not widen."""
    spoil(monkeypatch, lambda forces: {**forces, "L2-L3": wrong(forces["L2-L3"])})
    check = PRATT.check()
    assert check.members["L2-L3"].verdict == verdict
    assert not_agreed(check) == (["L2-L3"] if verdict == "differs" else [])
    assert check.agreed == (verdict == "agrees")
    data = check_data(check)
    assert data["agreed"] == (verdict == "agrees")
    json.dumps(data, allow_nan=False)


def test_a_missing_member_of_the_numeric_route(monkeypatch: pytest.MonkeyPatch) -> None:
    """No value to compare with: undecided, and not agreed."""
    spoil(monkeypatch, lambda forces: {name: force for name, force in forces.items() if name != "L2-L3"})
    check = PRATT.check(["L2-L3", "U2-U3"])
    item = check.members["L2-L3"]
    assert (item.verdict, item.stiffness, item.difference) == ("undecided", None, None)
    assert item.reason
    assert item.decimal is not None
    assert not check.agreed
    assert check.members["U2-U3"].verdict == "agrees"


def test_wrong_values_of_all_members(monkeypatch: pytest.MonkeyPatch) -> None:
    """All infinite, all doubled, all zero: nothing agrees that should not."""
    for change in (lambda _: math.inf, lambda force: 2 * force, lambda _: 0.0, lambda force: -force):
        spoil(monkeypatch, lambda forces, change=change: {name: change(force) for name, force in forces.items()})
        check = PRATT.check()
        assert not check.agreed
        agree = {name for name, item in check.members.items() if item.verdict == "agrees"}
        assert all(check.members[name].decimal == 0 for name in agree)
        monkeypatch.undo()


def test_a_wrong_reaction_of_the_numeric_route(monkeypatch: pytest.MonkeyPatch) -> None:
    """Reactions are compared like members, and turn the whole verdict."""
    right = stiffness.solve

    def spoilt(truss: Any, case: Any) -> stiffness.StiffnessResult:
        found = right(truss, case)
        return replace(found, reactions={**found.reactions, "L6.y": found.reactions["L6.y"] + 0.01})

    monkeypatch.setattr(stiffness, "solve", spoilt)
    check = PRATT.check(["L2-L3"])
    assert not_agreed(check) == ["L6.y"]
    assert not check.agreed


def test_a_wrong_value_turns_the_exit_code(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Any, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit 0 before, 1 after."""
    path = tmp_path / "truss.toml"
    path.write_text(PRATT.file())
    argv = ["check", str(path), "--case", "load", "--members", "L2-L3", "--json"]
    assert main(argv) == 0
    spoil(monkeypatch, lambda forces: {**forces, "L2-L3": -forces["L2-L3"]})
    assert main(argv) == 1
    assert capsys.readouterr().err == ""


# --- negative controls: the hand route --------------------------------------------------------------------


def corrupt(monkeypatch: pytest.MonkeyPatch, name: str, factor: int) -> None:
    """Let the step that solves a member or reaction return a wrong value."""
    right = membercheck.write_step

    def spoilt(*given: Any, **options: Any) -> Any:
        step, found = right(*given, **options)
        if name in step.solves:
            step = replace(step, results={**step.results, name: step.results[name] * factor})
            found = {**found, name: found[name] * factor}
        return step, found

    monkeypatch.setattr(membercheck, "write_step", spoilt)


@pytest.mark.parametrize("factor", [-1, 2, 0])
@pytest.mark.parametrize("name", ["U2-U3", "L0.y", "L1-U1"])
def test_a_corrupted_step_is_noticed(monkeypatch: pytest.MonkeyPatch, name: str, factor: int) -> None:
    """A wrong member or reaction of the hand route differs, and so does what rests on it."""
    corrupt(monkeypatch, name, factor)
    check = PRATT.check(["U2-U3", "L1-U1", "U1-L2"])
    assert not check.agreed
    assert name in not_agreed(check)
    assert set(check.residuals), "the joints at its ends are out of balance"
    if name == "L0.y":
        assert "U1-L2" in not_agreed(check)


def test_a_step_spoilt_in_its_result_alone_is_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The printed result is compared, not only the value carried on."""
    right = membercheck.write_step

    def spoilt(*given: Any, **options: Any) -> Any:
        step, found = right(*given, **options)
        results = {name: -force if name == "U2-U3" else force for name, force in step.results.items()}
        return replace(step, results=results), found

    monkeypatch.setattr(membercheck, "write_step", spoilt)
    check = PRATT.check(["U2-U3"])
    assert not_agreed(check) == ["U2-U3"]
    assert not check.agreed


def test_both_routes_spoilt_alike_are_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The exact solution of all joints is a third witness."""
    corrupt(monkeypatch, "U2-U3", 2)
    spoil(monkeypatch, lambda forces: {**forces, "U2-U3": 2 * forces["U2-U3"]})
    check = PRATT.check(["U2-U3"])
    assert check.members["U2-U3"].verdict == "differs"
    assert not check.agreed


# --- nobody can judge -------------------------------------------------------------------------------------


def test_a_nearly_critical_form_is_undecided() -> None:
    """Rise a ten-billionth of half the span: solved exactly, but floats cannot judge, and the check says so."""
    flat = Stated(
        {"A": ("0", "0"), "B": ("2", "0"), "C": ("1", "1/10^10")},
        ("A-C", "B-C"),
        {"A": "pin", "B": "pin"},
        {"C": ("0", "-1")},
    )
    check = flat.check()
    expected = replay.forces_of(flat)
    assert check.tolerance > WIDEST_TOLERANCE
    for name, item in check.members.items():
        assert item.verdict == "undecided"
        assert "critical" in item.reason
        assert abs(item.decimal / float(expected[name]) - 1) < 1e-15
        assert item.sense == "C"
    assert not check.agreed
    assert flat.moved(lambda x, y: (x, y.replace("10^10", "10")), lambda x, y: (x, y)).check().agreed


INDETERMINATE = {
    "crossed panel between plain ones": (
        Stated(
            {**SQUARE, "E": ("8", "0"), "F": ("8", "3"), "G": ("-4", "0")},
            ("A-B", "B-C", "C-D", "D-A", "A-C", "B-D", "B-E", "E-F", "C-F", "E-C", "G-A", "G-D"),
            {"G": "pin", "E": "roller"},
            {"B": ("0", "-12"), "D": ("3", "0"), "F": ("0", "-5")},
        ),
        {"B-E", "E-F", "C-F", "E-C", "G-A", "G-D", "G.x", "G.y", "E.y"},
    ),
    "two pins": (
        replace(PRATT, supports={"L0": "pin", "L6": "pin"}),
        {*PRATT.members, "L0.y", "L6.y"} - {f"L{i}-L{i + 1}" for i in range(6)},
    ),
    "three supports": (
        replace(PRATT, supports={"L0": "pin", "L3": "roller", "L6": "roller"}),
        {"L1-U1", "L5-U5", "L3-U3", "L0.x"},
    ),
}


@pytest.mark.parametrize("name", INDETERMINATE)
def test_an_indeterminate_truss(name: str) -> None:
    """What equilibrium alone decides is solved and agreed; the rest is undecided with a reason and without numbers."""
    stated, decided = INDETERMINATE[name]
    check = stated.check()
    found = verdicts(check)
    assert not check.statics.determinate
    assert check.statics.stable
    assert {name for name, verdict in found.items() if verdict == "agrees"} == decided
    for each, item in {**check.members, **check.reactions}.items():
        if each not in decided:
            assert (item.verdict, item.exact, item.decimal, item.sense) == ("undecided", None, None, None)
            assert "indeterminate" in item.reason
            assert item.steps == ()
    assert not check.agreed


def test_only_decided_members_of_an_indeterminate_truss() -> None:
    """All that was asked for agrees, and all reactions do: the whole agrees."""
    stated, decided = INDETERMINATE["crossed panel between plain ones"]
    assert stated.check([name for name in decided if "-" in name]).agreed


def test_a_mechanism_is_an_error_with_its_joints() -> None:
    """Nothing to judge: the joints that move, and how."""
    square = Stated(SQUARE, ("A-B", "B-C", "C-D", "D-A"), {"A": "pin", "B": "roller"}, {})
    with pytest.raises(UnstableTrussError, match="joints that can move: C, D") as caught:
        square.check()
    assert set(caught.value.joints) == {"C", "D"}
    assert {name for name, move in caught.value.mechanism.items() if any(move)} == {"C", "D"}


# --- symbols ----------------------------------------------------------------------------------------------


def test_symbols_in_loads() -> None:
    """Forces are formulas in the symbols; decimals, senses and the numeric route are at their values."""
    stated = replace(
        PRATT,
        loads={"L2": ("0", "-P"), "L3": ("H/2", "-2*P"), "U2": ("0", "-3")},
        symbols={"P": "7/2", "H": "-sqrt(2)"},
    )
    data = stated.data()
    assert replay.faults(stated, data, stated.members) == []
    assert "P" in data["members"]["U2-U3"]["exact"]


def test_symbols_whose_effects_cancel_at_their_values(monkeypatch: pytest.MonkeyPatch) -> None:
    """Two formulas alike at the chosen values but not in their coefficients are told apart."""
    stated = replace(PRATT, loads={"L2": ("0", "-P"), "L3": ("0", "-Q")}, symbols={"P": "1", "Q": "1"})
    check = stated.check(["U2-U3"])
    assert check.agreed
    right = stiffness.member_forces

    def exchanged(truss: Any, case: LoadCase) -> dict[str, float]:
        at = {load.joint: load for load in case.loads}
        if {"L2", "L3"} <= set(at):
            return right(truss, case)
        swapped = {"L3" if joint == "L2" else "L2": (load.fx, load.fy) for joint, load in at.items()}
        return right(truss, LoadCase(case.name, swapped))

    monkeypatch.setattr(stiffness, "member_forces", exchanged)
    check = stated.check(["U1-L2"])
    assert check.members["U1-L2"].verdict == "differs"
    assert "coefficient" in check.members["U1-L2"].reason


def test_a_rounded_angle_is_labelled() -> None:
    """An angle that is no surd of small degree: the label says so, for members and reactions that rest on it."""
    stated = Stated(
        {"A": ("0", "0"), "B": ("10*cos(20)", "10*sin(20)"), "C": ("3", "7")},
        ("A-B", "A-C", "B-C"),
        {"A": "pin", "B": "roller"},
        {"C": ("4", "-9")},
    )
    data = stated.data()
    assert {item["exactness"] for item in data["members"].values()} == {"angle rounded"}
    assert replay.faults(stated, data, stated.members) == []


def test_steps_that_a_value_rests_on() -> None:
    """Every number in ``steps`` is needed, and the last one solves the member."""
    check = trade.baltimore().check(["U4-L4", "L4-L5"])
    for name, item in check.members.items():
        last = check.steps[item.steps[-1] - 1]
        assert name in last.solves
        assert list(item.steps) == sorted(item.steps)
        needed = {each for number in item.steps for each in check.steps[number - 1].uses} | {name}
        for number in item.steps:
            assert needed & set(check.steps[number - 1].solves)


def test_every_unknown_member_is_told() -> None:
    """Not the first alone."""
    with pytest.raises(InputError) as caught:
        PRATT.check(["L0-L1", "L0-L9", "U1-X2"])
    assert [problem.split(";")[0] for problem in caught.value.problems] == [
        "there is no member 'L0-L9'",
        "there is no member 'U1-X2'",
    ]
