"""Equilibrium of all joints at once: values, rank, what is undecided, what moves."""

from __future__ import annotations

import random
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest
import replay
import trade_trusses as trade
from random_trusses import random_truss
from stated_truss import Stated

from trusscalc.errors import UnstableTrussError
from trusscalc.exact import ONE, Exact
from trusscalc.exacttext import parse, to_text
from trusscalc.loads import LoadCase
from trusscalc.statics import matrix

Loads = dict[str, tuple[str, str]]

SQUARE = {"A": ("0", "0"), "B": ("4", "0"), "C": ("4", "3"), "D": ("0", "3")}
SIDES = ("A-B", "B-C", "C-D", "D-A")


def solve(stated: Stated) -> matrix.Equilibrium:
    """Return the exact solution of a truss."""
    return matrix.solve(stated.truss, stated.case)


def differences(stated: Stated, forces: Mapping[str, Exact], digits: int = 40) -> list[str]:
    """Return the forces that are not those of the independent solution."""
    expected = replay.forces_of(stated)
    scale = max(abs(force) for force in expected.values())
    wrong = [
        name
        for name, force in forces.items()
        if not replay.close(replay.value(to_text(force), stated.symbols), expected[name], scale, digits)
    ]
    return wrong + sorted(set(expected) ^ set(forces))


ROOTS = {
    "rational": trade.pratt(8),
    "one root, scaled away": trade.warren(6, height="3*sqrt(3)"),
    "the same root in both directions": trade.pratt(6, "2*sqrt(2)", "3*sqrt(2)"),
    "different roots in x and y": trade.pratt(6, "sqrt(5)", "sqrt(7)"),
    "a root added to a whole number": trade.k_truss(8, height="(2+sqrt(2))"),
    "a root under a root": trade.pratt(6, height="sqrt(2+sqrt(3))"),
    "sines of angles": trade.howe(6, height="5*tan(36)"),
}


@pytest.mark.parametrize("kind", ROOTS)
def test_forces_in_every_kind_of_field(kind: str) -> None:
    """Every force to forty digits, whether roots are scaled away or stay in the elimination."""
    assert differences(ROOTS[kind], solve(ROOTS[kind]).forces) == []


def test_only_where_roots_can_be_scaled_away_is_the_elimination_rational(monkeypatch: pytest.MonkeyPatch) -> None:
    """The fast way and the general way give the same; the general way alone does too."""
    fast = {kind: solve(stated).tensions for kind, stated in ROOTS.items()}
    monkeypatch.setattr(matrix, "_rational_solution", lambda *_: None)
    for kind, stated in ROOTS.items():
        assert solve(stated).tensions == fast[kind]
    monkeypatch.undo()
    general: list[str] = []
    right = matrix._field_solution
    monkeypatch.setattr(matrix, "_field_solution", lambda *given: general.append("used") or right(*given))
    for kind, stated in ROOTS.items():
        solve(stated)
        assert general == ["used"] * (kind == "sines of angles"), kind
        general.clear()
    solve(random_truss(random.Random(0), 6, "surd"))
    assert general == ["used"]


def test_roots_in_loads_alone() -> None:
    """A rational truss under loads with roots, one of them under another."""
    stated = trade.pratt(6).under({"L2": ("sqrt(2)", "-3*sqrt(5)"), "U3": ("sqrt(1+sqrt(2))", "-1")})
    assert differences(stated, solve(stated).forces) == []


MANY_LOADS: dict[str, Loads] = {
    "whole numbers": {"L2": ("0", "-1")},
    "a root": {"L3": ("sqrt(7)", "-1/3")},
    "none": {},
    "a root under a root": {"L4": ("0", "-sqrt(1+sqrt(2))")},
    "a symbol": {"L2": ("0", "-P"), "U3": ("2*Q", "0")},
    "another symbol": {"L2": ("R", "-P^2")},
    "an angle rounded": {"L5": ("sin(20)", "0")},
}


@pytest.mark.parametrize("kind", ROOTS)
@pytest.mark.parametrize("left_out", ["", *(name for name in MANY_LOADS if name != "none")])
def test_many_load_cases_from_one_elimination(kind: str, left_out: str) -> None:
    """Each as if it were solved alone, whatever numbers the others are made of, with what was rounded still told."""
    truss = ROOTS[kind].truss
    values = {"P": 3, "Q": 4, "R": 5}
    cases = [LoadCase(name, loads, symbols=values) for name, loads in MANY_LOADS.items() if name != left_out]
    together = matrix.solve_all(truss, cases)
    assert len(together) == len(cases)
    for case, found in zip(cases, together, strict=True):
        alone = matrix.solve(truss, case)
        assert found == alone
        assert any(t.rounded for t in found.tensions.values()) == any(t.rounded for t in alone.tensions.values())


def test_many_load_cases_on_trusses_nothing_is_known_of() -> None:
    """Unstable ones are refused with and without load cases; an indeterminate one tells each time who shares."""
    braced = Stated(SQUARE, (*SIDES, "A-C", "B-D"), {"A": "pin", "B": "roller"}, {})
    cases = [LoadCase("push", {"D": (1, 0)}), LoadCase("press", {"C": (0, -1)})]
    assert matrix.solve_all(braced.truss, cases) == tuple(matrix.solve(braced.truss, case) for case in cases)
    assert matrix.solve_all(braced.truss, ()) == ()
    for few in (cases, ()):
        with pytest.raises(UnstableTrussError, match="one bar or support link too few"):
            matrix.solve_all(replace(braced, members=SIDES).truss, few)


def test_symbols_in_loads() -> None:
    """Forces are formulas in the symbols."""
    stated = replace(
        trade.pratt(6), loads={"L2": ("w/2", "-P"), "L3": ("0", "-2*P+3")}, symbols={"P": "7/3", "w": "-5"}
    )
    forces = solve(stated).forces
    assert forces["U3-L3"] if "U3-L3" in forces else forces["L3-U3"] == 0
    assert set(forces["L1-L2"].symbols) == {"P", "w"}
    assert differences(stated, forces) == []


def test_bars_are_members_then_links() -> None:
    """Names, ends and directions; the written direction of a link, not the unit one."""
    stated = Stated(SQUARE, (*SIDES, "A-C"), {"A": "pin", "C": {"reaction": ("2", "-5")}}, {"C": ("1", "0")})
    bars = {bar.name: bar for bar in matrix.bars_of(stated.truss)}
    assert list(bars) == ["A-B", "B-C", "C-D", "D-A", "A-C", "A.x", "A.y", "C.r"]
    assert (bars["A-C"].start, bars["A-C"].end, bars["A-C"].dx, bars["A-C"].dy) == ("A", "C", 4, 3)
    assert bars["A-C"].length == 5
    assert not bars["A-C"].is_link
    assert bars["C.r"].is_link
    assert bars["C.r"].end == matrix.GROUND
    assert bars["C.r"].length_squared == 29
    assert differences(stated, solve(stated).forces) == []


def test_order_of_the_statement_does_not_matter() -> None:
    """The same forces from any order of joints, members and supports."""
    stated = trade.baltimore()
    forces = solve(stated).forces
    for seed in range(3):
        assert solve(stated.shuffled(random.Random(seed).shuffle)).forces == forces


def test_a_tall_truss_is_solved_like_a_long_one() -> None:
    """Standing on end (x and y exchanged, loads and supports too)."""
    stated = trade.pratt(8)
    tall = stated.moved(lambda x, y: (y, x), lambda x, y: (y, x))
    found, forces = solve(tall).forces, solve(stated).forces
    assert {name: found[name] for name in stated.members} == {name: forces[name] for name in stated.members}


def test_joint_residuals_show_what_is_out_of_balance() -> None:
    """One wrong force leaves exactly its two joints out of balance, by exactly its error."""
    stated = trade.pratt(6)
    truss, case = stated.truss, stated.case
    solved = matrix.solve(truss, case)
    sums = matrix.joint_residuals(solved.bars, case, solved.tensions)
    assert not any(part for pair in sums.values() for part in pair)
    wrong = {**solved.tensions, "U1-L2": solved.tensions["U1-L2"] + ONE}
    sums = matrix.joint_residuals(solved.bars, case, wrong)
    assert {joint: pair for joint, pair in sums.items() if any(pair)} == {"U1": (5, -6), "L2": (-5, 6)}
    assert sums["L0"] == (0, 0)


# --- rank -------------------------------------------------------------------------------------------------


def test_a_bar_too_many() -> None:
    """The count and the rank; only bars that share the redundancy are undecided."""
    stated = Stated(SQUARE, (*SIDES, "A-C", "B-D"), {"A": "pin", "B": "roller"}, {"C": ("7", "-2")})
    solved = solve(stated)
    assert (solved.degree, solved.rank) == (1, 8)
    assert set(solved.undecided) == {*SIDES, "A-C", "B-D"}
    assert solved.forces == {"A.x": -7, "A.y": parse("-21/4"), "B.y": parse("29/4")}


def test_links_in_one_line_are_shared() -> None:
    """Two horizontal supports in one line: their difference is undecided, all else is decided."""
    stated = replace(trade.pratt(6), supports={"L0": "pin", "L6": "pin"})
    solved = solve(stated)
    assert solved.degree == 1
    assert set(solved.undecided) == {"L0.x", "L6.x", *(f"L{i}-L{i + 1}" for i in range(6))}


UNSTABLE: dict[str, tuple[Stated, set[str], str]] = {
    "no diagonal": (Stated(SQUARE, SIDES, {"A": "pin", "B": "pin"}, {}), {"C", "D"}, "joints that can move: C, D"),
    "count right, one panel braced twice": (
        Stated(
            {**SQUARE, "E": ("8", "0"), "F": ("8", "3")},
            (*SIDES, "A-C", "B-D", "B-E", "E-F", "C-F"),
            {"A": "pin", "B": "roller"},
            {},
        ),
        {"E", "F"},
        "the count is right",
    ),
    "not held at all": (Stated(SQUARE, (*SIDES, "A-C"), {"A": "roller"}, {}), set(SQUARE), "2 bars or support links"),
    "three links through one point": (
        Stated(
            SQUARE,
            (*SIDES, "A-C"),
            {name: {"reaction": pair} for name, pair in (("A", ("8", "3")), ("B", ("-8", "3")), ("D", ("8", "-9")))},
            {},
        ),
        set(SQUARE),
        "the whole truss can move",
    ),
    "three parallel links": (
        Stated(SQUARE, (*SIDES, "A-C"), dict.fromkeys("ABC", "roller"), {}),
        set(SQUARE),
        "the whole truss can move",
    ),
    "hinges in a line": (
        Stated({"A": ("0", "0"), "B": ("6", "2"), "C": ("3", "1")}, ("A-C", "C-B"), {"A": "pin", "B": "pin"}, {}),
        {"C"},
        "the count is right",
    ),
    "a joint on two bars in one line": (
        Stated(
            {**SQUARE, "E": ("2", "3")}, (*SIDES[:2], "C-E", "E-D", "D-A", "A-C", "B-D"), {"A": "pin", "B": "pin"}, {}
        ),
        {"E"},
        "unstable",
    ),
    "a part that stands by itself": (
        Stated(
            {**SQUARE, "E": ("9", "0"), "F": ("12", "0"), "G": ("9", "4")},
            (*SIDES, "A-C", "E-F", "F-G", "G-E"),
            {"A": "pin", "B": "roller", "E": "pin"},
            {},
        ),
        {"F", "G"},
        "joints that can move: F, G",
    ),
}


@pytest.mark.parametrize("why", UNSTABLE)
def test_what_moves_is_named(why: str) -> None:
    """The exact rank decides, whatever the count; joints that move, their mechanism, and the cause in words."""
    stated, moving, words = UNSTABLE[why]
    with pytest.raises(UnstableTrussError, match=words) as caught:
        solve(stated)
    problem = caught.value
    assert set(problem.joints) == moving
    assert f"joints that can move: {', '.join(name for name in stated.joints if name in moving)}" in str(problem)
    assert set(problem.mechanism) <= moving
    assert max(abs(part) for move in problem.mechanism.values() for part in move) == 1
    assert no_bar_changes_length(stated, problem.mechanism)


def no_bar_changes_length(stated: Stated, mechanism: Mapping[str, Any]) -> bool:
    """Return whether a mechanism leaves every length and every link as it is, to first order."""
    still = (0.0, 0.0)
    for start, end, fx, fy in replay.bars_of(stated).bars.values():
        (ux, uy), (vx, vy) = mechanism.get(start, still), mechanism.get(end, still) if end else still
        if abs((ux - vx) * float(fx) + (uy - vy) * float(fy)) > 1e-12:
            return False
    return True


def test_a_hair_off_a_critical_form_is_no_mechanism() -> None:
    """Exact rank: a rise of 1e-40 is a rise."""
    flat = Stated(
        {"A": ("0", "0"), "B": ("2", "0"), "C": ("1", "1/10^20/10^20")},
        ("A-C", "C-B"),
        {"A": "pin", "B": "pin"},
        {"C": ("0", "-1")},
    )
    assert solve(flat).rank == 6
    with pytest.raises(UnstableTrussError):
        solve(replace(flat, joints={**flat.joints, "C": ("1", "0")}))


def test_long_trusses_take_little_time() -> None:
    """Twelve hundred unknowns in order along the truss; a wrong order would take minutes."""
    stated = trade.pratt(300).shuffled(random.Random(1).shuffle)
    solved = solve(stated)
    assert solved.rank == 2 * len(stated.joints)
    # the end shear, from the beam formula (common practice, no source)
    assert solved.forces["L0.y"] == 299 * 80 // 2


def test_random_trusses_with_roots() -> None:
    """General position: every force against the independent solution."""
    for seed in range(8):
        stated = random_truss(random.Random(seed), 6, "surd", complex_share=0.5)
        assert differences(stated, solve(stated).forces) == []
