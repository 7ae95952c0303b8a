"""Whole families of trusses against the closed forms of the trade, for sizes no table holds.

All forms are from memory, as taught in M. Merriman and H. S. Jacoby, A Text-Book on Roofs and Bridges, Part I, and in
the roof truss tables of the makers' pocket companions, unless a test says otherwise: a chord force is the moment about
the opposite joint over the depth, a web member's vertical part is the shear of its panel. With N panels p, depth h and
a load W at each inner joint of the loaded chord: shear of panel k V = W (N + 1 - 2k) / 2, moment at joint i
M = W p i (N - i) / 2.
"""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

import pytest
from case_files import CASES

from trusscalc.exact import Exact, rational
from trusscalc.exacttext import parse
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.roots import sqrt
from trusscalc.statics import matrix
from trusscalc.truss import Truss

PANEL = Fraction(7, 2)
DEPTH = Fraction(12, 5)
LOAD = Fraction(13)


def shear(panels: int, panel: int) -> Fraction:
    """Return the shear of a panel counted from 1."""
    return LOAD * (panels + 1 - 2 * panel) / 2


def chord(panels: int, joint: int) -> Fraction:
    """Return moment over depth at a joint counted from 0."""
    return LOAD * PANEL * joint * (panels - joint) / 2 / DEPTH


def cosecant() -> Exact:
    """Return the length of a diagonal over its rise."""
    return sqrt(rational(PANEL**2 + DEPTH**2)) / DEPTH


def through_truss(panels: int, diagonals: Mapping[int, str]) -> tuple[Truss, LoadCase]:
    """Return a through truss with inclined end posts; ``diagonals`` names the one of each inner panel."""
    last = panels
    joints = {f"L{i}": (i * PANEL, 0) for i in range(last + 1)}
    joints |= {f"U{i}": (i * PANEL, DEPTH) for i in range(1, last)}
    members = [f"L{i}-L{i + 1}" for i in range(last)] + [f"U{i}-U{i + 1}" for i in range(1, last - 1)]
    members += [f"L{i}-U{i}" for i in range(1, last)] + ["L0-U1", f"U{last - 1}-L{last}", *diagonals.values()]
    truss = Truss(joints, members, {"L0": "pin", f"L{last}": "roller"})
    return truss, LoadCase("W", {f"L{i}": (0, -LOAD) for i in range(1, last)})


def left_half(truss: Truss, loads: LoadCase, wanted: Mapping[str, object]) -> dict[str, Exact | None]:
    """Return the wanted members' forces by hand, after both routes have agreed."""
    check = check_members(truss, loads, list(wanted))
    assert check.agreed
    return {name: check.members[name].exact for name in wanted}


@pytest.mark.parametrize("panels", [4, 6, 10])
def test_pratt(panels: int) -> None:
    """Diagonals fall toward midspan and are pulled, verticals pushed, the hanger carries its joint's load."""
    middle = panels // 2
    diagonals = {k: f"U{k - 1}-L{k}" if k <= middle else f"L{k - 1}-U{k}" for k in range(2, panels)}
    truss, loads = through_truss(panels, diagonals)
    wanted: dict[str, object] = {"L0-U1": -shear(panels, 1) * cosecant(), "L1-U1": LOAD, "L0-L1": chord(panels, 1)}
    for k in range(2, middle + 1):
        wanted[f"U{k - 1}-L{k}"] = shear(panels, k) * cosecant()
        wanted[f"L{k - 1}-L{k}"] = chord(panels, k - 1)
        wanted[f"U{k - 1}-U{k}"] = -chord(panels, k)
    wanted |= {f"L{i}-U{i}": -shear(panels, i + 1) for i in range(2, middle)}
    wanted[f"L{middle}-U{middle}"] = 0
    assert left_half(truss, loads, wanted) == wanted


@pytest.mark.parametrize("panels", [4, 6, 10])
def test_howe(panels: int) -> None:
    """Diagonals rise toward midspan and are pushed, verticals pulled; the middle one carries its joint's load."""
    middle = panels // 2
    diagonals = {k: f"L{k - 1}-U{k}" if k <= middle else f"U{k - 1}-L{k}" for k in range(2, panels)}
    truss, loads = through_truss(panels, diagonals)
    wanted: dict[str, object] = {"L0-U1": -shear(panels, 1) * cosecant(), "L0-L1": chord(panels, 1)}
    for k in range(2, middle + 1):
        wanted[f"L{k - 1}-U{k}"] = -shear(panels, k) * cosecant()
        wanted[f"L{k - 1}-L{k}"] = chord(panels, k)
        wanted[f"U{k - 1}-U{k}"] = -chord(panels, k - 1)
    wanted |= {f"L{i}-U{i}": shear(panels, i) for i in range(1, middle)}
    wanted[f"L{middle}-U{middle}"] = LOAD
    assert left_half(truss, loads, wanted) == wanted


@pytest.mark.parametrize("panels", [3, 5, 8])
def test_warren(panels: int) -> None:
    """Web bars carry plus and minus the panel shear times the cosecant, whatever their slope."""
    joints = {f"L{i}": (i * PANEL, Fraction(0)) for i in range(panels + 1)}
    joints |= {f"U{i}": ((i + Fraction(1, 2)) * PANEL, DEPTH) for i in range(panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(panels - 1)]
    members += [f"L{i}-U{i}" for i in range(panels)] + [f"U{i}-L{i + 1}" for i in range(panels)]
    truss = Truss(joints, members, {"L0": "pin", f"L{panels}": "roller"})
    loads = LoadCase("W", {f"L{i}": (0, -LOAD) for i in range(1, panels)})
    steep = sqrt(rational(PANEL**2 / 4 + DEPTH**2)) / DEPTH
    wanted: dict[str, object] = {}
    for k in range(1, panels + 1):
        wanted[f"L{k - 1}-U{k - 1}"] = -shear(panels, k) * steep
        wanted[f"U{k - 1}-L{k}"] = shear(panels, k) * steep
        # no load between the joints, so the moment under U is the mean of its neighbours'
        wanted[f"L{k - 1}-L{k}"] = (chord(panels, k - 1) + chord(panels, k)) / 2
    wanted |= {f"U{i - 1}-U{i}": -chord(panels, i) for i in range(1, panels)}
    assert left_half(truss, loads, wanted) == wanted


@pytest.mark.parametrize("pitch", ["3", "4", "5", "24/5", "2*sqrt(3)"])
def test_fink_of_four_panels(pitch: str) -> None:
    """The table's forms in n = span / rise, per panel load 1 (from memory; checked again by hand)."""
    n = parse(pitch)
    rafter = sqrt(n * n + 4)
    joints = {
        "A": (0, 0),
        "P": (n / 4, parse("1/2")),
        "C": (n / 2, 1),
        "Q": (3 * n / 4, parse("1/2")),
        "B": (n, 0),
        "D": (n / 4 + 1 / n, 0),
        "E": (3 * n / 4 - 1 / n, 0),
    }
    members = ["A-P", "P-C", "C-Q", "Q-B", "A-D", "D-E", "E-B", "P-D", "D-C", "C-E", "E-Q"]
    truss = Truss(joints, members, {"A": "pin", "B": "roller"})
    loads = LoadCase("W", dict.fromkeys("PCQ", (0, -1)))
    wanted: dict[str, object] = {
        "A-P": -3 * rafter / 4,
        "P-C": -(3 * n * n + 4) / (4 * rafter),
        "A-D": 3 * n / 4,
        "D-E": n / 2,
        "P-D": -n / rafter,
        "D-C": n / 4,
    }
    assert left_half(truss, loads, wanted) == wanted


def test_each_web_bar_of_a_k_panel_takes_half_the_shear() -> None:
    """Both bars of a K have the same slope, so they share the panel's shear (common practice, no source)."""
    case = CASES["khoo_t4"]
    webs = [("h-b", "h-o"), ("i-c", "i-p"), ("j-d", "j-q")]
    slope = sqrt(rational(4**2 + 2**2)) / 2
    wanted: dict[str, object] = {}
    for (upper, lower), panel_shear in zip(webs, (200, 120, 40), strict=True):
        wanted |= {upper: -slope * panel_shear / 2, lower: slope * panel_shear / 2}
    assert left_half(case.truss, case.loads, wanted) == wanted


def test_thrust_of_a_three_hinged_arch_is_moment_over_rise() -> None:
    """H = M / f with M the moment of the simple beam at the hinge (common practice, no source).

    The tied arch of R. C. Hibbeler, Structural Analysis, Example 5.5, on two pins instead of tie and roller: its
    thrust is the printed force of the tie.
    """
    tied = CASES["hibbeler_5_5"]
    members = [name for name in tied.data["members"] if name != "A-E"]
    arch = tied.with_data(members=members, supports={"A": "pin", "E": "pin"})
    check = check_members(arch.truss, arch.loads, members)
    moment, rise = 25 * 6 - 15 * 3, 5
    assert check.agreed
    assert check.reactions["A.x"].exact == Fraction(moment, rise) == Fraction(tied.data["printed"]["A-E"])
    assert check.reactions["E.x"].exact == -Fraction(moment, rise)
    assert {name: check.members[name].exact for name in members} == {name: tied.expected[name] for name in members}


def test_a_ring_of_nine_bars_is_critical_only_on_a_conic() -> None:
    """Nine bars between three and three joints: rank is lost on a circle and found again one joint off it.

    E. D. Bolker and B. Roth, When is a bipartite graph a rigid framework?, 1980 (from memory).
    """
    case = CASES["holtz_regular_hexagon"]
    moved = case.with_data(joints={**case.data["joints"], "c": ["0", "9/5"]})
    assert matrix.solve(moved.truss, moved.loads).rank == 12
