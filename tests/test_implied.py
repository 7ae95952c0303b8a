"""Joint loads that member forces imply: exactly ours from exact forces, and each blunder at its own joint."""

from __future__ import annotations

from collections.abc import Mapping

import pytest
import trade_trusses
from case_files import CASES, PublishedCase
from hypothesis import given, settings
from random_trusses import trusses
from stated_truss import Stated

from trusscalc import stiffness
from trusscalc.compare import compare_submitted
from trusscalc.comparison import Comparison
from trusscalc.exact import ZERO, Exact, exact
from trusscalc.exacttext import parse
from trusscalc.implied import directions, implied_loads, rounding_bounds
from trusscalc.loads import LoadCase
from trusscalc.statics import matrix
from trusscalc.submitted import read_submitted
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

STABLE = [case for case in CASES.values() if case.route != "unstable"]
NEAR = parse("1/10^20")
"""What a length rounded to 40 digits, or an angle to 30, leaves."""


def carried(truss: Truss, loads: LoadCase, tensions: Mapping[str, Exact]) -> dict[str, tuple[Exact, Exact]]:
    """Return load plus reaction at every joint, the reactions from t = R / length of the written direction."""
    totals = {joint.name: (ZERO, ZERO) for joint in truss.joints}
    for load in loads.loads:
        totals[load.joint] = (loads.value(load.fx), loads.value(load.fy))
    for link in truss.links:
        (x, y), tension = totals[link.joint], tensions[link.name]
        totals[link.joint] = (x + tension * link.dx, y + tension * link.dy)
    return totals


def everything(truss: Truss, loads: LoadCase) -> tuple[dict[str, Exact], dict[str, tuple[Exact, Exact]]]:
    """Return exact member forces, and what every joint carries."""
    at_values = LoadCase(loads.name, {e.joint: (loads.value(e.fx), loads.value(e.fy)) for e in loads.loads})
    solved = matrix.solve(truss, at_values)
    return solved.forces, carried(truss, at_values, solved.tensions)


@pytest.mark.parametrize("case", STABLE, ids=lambda case: case.id)
def test_published_trusses_give_back_their_loads(case: PublishedCase) -> None:
    """Exact forces imply load and reaction at every joint."""
    forces, expected = everything(case.truss, case.loads)
    found = implied_loads(case.truss, forces)
    assert set(found) == set(expected)
    for joint, pair in found.items():
        for part, right in zip(pair, expected[joint], strict=True):
            assert part == right or abs(part - right) < NEAR


@settings(max_examples=25)
@given(trusses())
def test_random_trusses_give_back_their_loads(stated: Stated) -> None:
    """Rational places, members at any angle: not a digit is lost."""
    forces, expected = everything(stated.truss, stated.case)
    assert implied_loads(stated.truss, forces) == expected


def test_directions_are_exact() -> None:
    """3-4-5, a diagonal of a square, and a length that is a root of roots (rounded, and marked so)."""
    truss = Truss(
        {"A": (0, 0), "B": (4, 3), "C": (5, 4), "D": ("1", "1 + sqrt(2)")},
        ["A-B", "B-C", "A-D", "D-B"],
        {"A": "pin", "B": "pin"},
    )
    found = directions(truss)
    assert found["A-B"] == (parse("4/5"), parse("3/5"))
    assert found["B-C"] == (parse("sqrt(2)/2"), parse("sqrt(2)/2"))
    assert found["A-D"][0].rounded
    assert abs(found["A-D"][0] - parse("sin(22.5)")) < NEAR


def test_joints_with_a_member_that_is_not_given_are_left_out() -> None:
    """The others are still told."""
    stated = trade_trusses.pratt(4)
    forces, expected = everything(stated.truss, stated.case)
    del forces["L1-U1"]
    found = implied_loads(stated.truss, forces)
    assert set(expected) - set(found) == {"L1", "U1"}
    assert all(found[joint] == expected[joint] for joint in found)


def test_bounds_add_up_the_halves_along_the_members() -> None:
    """|cos| and |sin| of each member times half a unit of its last digit."""
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    half = parse("1/20")
    found = rounding_bounds(truss, {"A-B": half, "A-C": half, "C-B": parse("1/2")})
    assert found["A"] == pytest.approx((0.05 + 0.04, 0.03))
    assert found["C"] == pytest.approx((0.04 + 0.4, 0.03 + 0.3))


# --- printed tables -----------------------------------------------------------------------------------------


def printed(forces: Mapping[str, float], digits: int = 4) -> str:
    """Return forces as a table of so many significant figures."""
    return "member,force\n" + "".join(f"{name},{force:.{digits}g}\n" for name, force in forces.items())


def against(truss: Truss, ours: LoadCase, theirs: Mapping[str, float]) -> Comparison:
    """Return our loads compared with printed forces."""
    return compare_submitted(TrussFile(truss, (ours,)), read_submitted(printed(theirs), truss), ours.name)


def braced() -> Truss:
    """Return an indeterminate truss: a panel with two diagonals, three supports."""
    return Truss(
        {"L0": (0, 0), "L1": (4, 0), "L2": (8, 0), "U0": (0, 3), "U1": (4, 3), "U2": (8, 3)},
        ["L0-L1", "L1-L2", "U0-U1", "U1-U2", "L0-U0", "L1-U1", "L2-U2", "L0-U1", "U0-L1", "L1-U2", "U1-L2"],
        {"L0": "pin", "L1": "roller", "L2": "roller"},
    )


LOADS = {"U0": (10, -40), "U1": (0, -80), "U2": (0, -40)}


@pytest.mark.parametrize("truss", [trade_trusses.pratt(6).truss, braced()], ids=["determinate", "indeterminate"])
def test_a_faithful_table_is_never_accused(truss: Truss) -> None:
    """Rounded to four figures, every joint stays within its bound."""
    ours = LoadCase("wind", {joint: pair for joint, pair in LOADS.items() if joint in {j.name for j in truss.joints}})
    found = against(truss, ours, stiffness.member_forces(truss, ours)).implied
    assert len(found) == len(truss.joints)
    assert [load.joint for load in found if load.differs] == []


@pytest.mark.parametrize(
    ("theirs", "where", "implied"),
    [
        ({"U0": (10, -40), "U2": (0, -40)}, ["U1"], (0, 0)),
        ({**LOADS, "U1": (0, -160)}, ["U1"], (0, -160)),
        ({**LOADS, "U1": (0, 80)}, ["U1"], (0, 80)),
        ({**LOADS, "U0": (-10, -40)}, ["U0", "L0"], (-10, -40)),
        ({**LOADS, "U1": (-80, 0)}, ["U1", "L0"], (-80, 0)),
        ({"U0": (10, -40), "L1": (0, -80), "U2": (0, -40)}, ["U1"], (0, 0)),
    ],
    ids=["lost", "doubled", "reversed", "sense of wind", "turned", "moved"],
)
def test_a_wrong_load_shows_at_its_joint(
    theirs: Mapping[str, tuple[int, int]], where: list[str], implied: tuple[int, int]
) -> None:
    """In an indeterminate truss, from its printed forces alone; the supports differ besides."""
    ours = LoadCase("wind", LOADS)
    found = against(braced(), ours, stiffness.member_forces(braced(), LoadCase("theirs", theirs))).implied
    off = {load.joint: load for load in found if load.differs}
    assert set(where) <= set(off)
    assert {load.joint for load in found if not load.is_support and load.differs} == {where[0]}
    load = off[where[0]]
    assert tuple(map(float, load.theirs)) == pytest.approx(implied, abs=0.1)
    assert load.difference == pytest.approx(
        tuple(a - b for a, b in zip(implied, LOADS[where[0]], strict=True)), abs=0.1
    )


def test_a_second_pin_shows_as_thrust() -> None:
    """Our roller carries no horizontal reaction; their forces say that it does."""
    roof = {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"]
    ours, theirs = Truss(*roof, {"A": "pin", "B": "roller"}), Truss(*roof, {"A": "pin", "B": "pin"})
    snow = LoadCase("snow", {"C": (0, -12)})
    found = {load.joint: load for load in against(ours, snow, stiffness.member_forces(theirs, snow)).implied}
    assert [joint for joint, load in found.items() if load.differs] == ["A", "B"]
    assert tuple(map(float, found["B"].theirs)) == pytest.approx((-8, 6), abs=0.01)
    assert found["B"].ours == pytest.approx((0, 6))


def test_an_inclined_roller_is_compared_by_components() -> None:
    """Load plus the reaction along its direction."""
    truss = Truss(
        {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": {"reaction": (-3, 4)}}
    )
    snow = LoadCase("snow", {"C": (0, -12)})
    found = {load.joint: load for load in against(truss, snow, stiffness.member_forces(truss, snow)).implied}
    assert found["B"].ours == pytest.approx((-4.5, 6))
    assert not any(load.differs for load in found.values())


def test_forces_as_printed_are_taken_exactly() -> None:
    """Not as floats: thirds of a decimal stay what was printed."""
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    found = implied_loads(truss, {"A-B": exact(0.1), "A-C": exact(0.2), "C-B": exact(0.3)})
    assert found["A"] == (parse("-0.26"), parse("-0.12"))
    assert found["C"] == (parse("-0.08"), parse("0.3"))
