"""Every shape is determinate and stable, lies where its name says, and carries what statics says it must.

The rank here is numpy's, of equilibrium equations written in this file alone.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest

from trusscalc import shapes
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import rational
from trusscalc.exacttext import parse
from trusscalc.truss import Truss

SURD = "5*sqrt(3)/2"

TRUSSES = {
    **{f"pratt {n}": (lambda n=n: shapes.pratt(n, 4, 6)) for n in (3, 4, 5, 6, 7, 8, 13, 20)},
    **{f"howe {n}": (lambda n=n: shapes.howe(n, "7/2", SURD)) for n in (3, 4, 5, 6, 7, 8, 13, 20)},
    **{f"parker {n}": (lambda n=n: shapes.parker(n, 6, 9)) for n in (4, 5, 6, 7, 8, 13)},
    **{f"parker high ends {n}": (lambda n=n: shapes.parker(n, 6, 9, end_height=5)) for n in (4, 5, 6, 7, 8, 13)},
    "parker sagging": lambda: shapes.parker(6, 5, heights=[8, "3", 1.5, 3, 20]),
    **{f"warren {n}": (lambda n=n: shapes.warren(n, 4, SURD)) for n in (4, 6, 8, 14)},
    **{f"warren bare {n}": (lambda n=n: shapes.warren(n, 4, 3, verticals=False)) for n in (2, 3, 4, 7, 12)},
    **{f"k {n}": (lambda n=n: shapes.k_truss(n, 4, 6)) for n in (4, 5, 6, 7, 8, 9, 10, 15, 16)},
    **{f"baltimore {n}": (lambda n=n: shapes.baltimore(n, 3, 7)) for n in (6, 8, 10, 12, 14, 16, 24)},
    **{f"fink {n}": (lambda n=n: shapes.fink(n, 12, "2*sqrt(3)")) for n in (4, 8)},
    "fan": lambda: shapes.fan(15, 4),
    "scissors": lambda: shapes.scissors(10, 4),
    **{f"bracket {n}": (lambda n=n: shapes.bracket(n, 2, 3)) for n in (1, 2, 3, 4, 9)},
    **{f"arch {n}": (lambda n=n: shapes.three_hinged_arch(n, 5, 6, 8)) for n in (4, 6, 8, 10, 20)},
}


EVEN = [
    name
    for name in TRUSSES
    if name.split()[-1] in ("4", "6", "8", "12", "16") and "bracket" not in name and name != "baltimore 6"
]


def equilibrium(truss: Truss) -> np.ndarray:
    """Return the matrix of two equations a joint against all bars and links, from coordinates alone."""
    place = {joint.name: np.array([float(joint.x), float(joint.y)]) for joint in truss.joints}
    row = {joint.name: 2 * index for index, joint in enumerate(truss.joints)}
    columns = []
    for member in truss.members:
        unit = place[member.end] - place[member.start]
        unit = unit / np.hypot(*unit)
        column = np.zeros(2 * len(row))
        column[row[member.start] : row[member.start] + 2] = unit
        column[row[member.end] : row[member.end] + 2] = -unit
        columns.append(column)
    for link in truss.links:
        column = np.zeros(2 * len(row))
        unit = np.array([float(link.dx), float(link.dy)])
        column[row[link.joint] : row[link.joint] + 2] = unit / np.hypot(*unit)
        columns.append(column)
    return np.array(columns).T


def forces(truss: Truss, loads: dict[str, tuple[float, float]]) -> dict[str, float]:
    """Return bar forces and reactions by numpy, tension positive."""
    right = np.zeros(2 * len(truss.joints))
    row = {joint.name: 2 * index for index, joint in enumerate(truss.joints)}
    for joint, (fx, fy) in loads.items():
        right[row[joint] : row[joint] + 2] -= (fx, fy)
    solved = np.linalg.solve(equilibrium(truss), right)
    names = [member.name for member in truss.members] + [link.name for link in truss.links]
    return dict(zip(names, solved, strict=True))


@pytest.mark.parametrize("name", TRUSSES)
def test_every_shape_is_determinate_and_stable(name: str) -> None:
    """Bars and links are twice the joints in number, and the equilibrium matrix has full rank."""
    truss = TRUSSES[name]()
    matrix = equilibrium(truss)
    assert len(truss.members) + len(truss.links) == 2 * len(truss.joints)
    assert np.linalg.matrix_rank(matrix) == 2 * len(truss.joints)
    assert np.linalg.cond(matrix) < 1e6


def test_the_rank_check_sees_a_mechanism() -> None:
    """Negative control: the count may be right while a panel without diagonal sways."""
    truss = shapes.pratt(6, 4, 6)
    groups: dict[str, list[str]] = {}
    for member in truss.members:
        groups.setdefault(member.group, []).append(member.name)
    groups["diagonals"] = ["L1-U2", "U1-L2", *groups["diagonals"][2:]]  # two in one panel, none in another
    swaying = Truss({j.name: (j.x, j.y) for j in truss.joints}, groups, {"L0": "pin", "L6": "roller"})
    assert len(swaying.members) + len(swaying.links) == 2 * len(swaying.joints)
    assert np.linalg.matrix_rank(equilibrium(swaying)) < 2 * len(swaying.joints)


@pytest.mark.parametrize("name", EVEN)
def test_even_trusses_are_their_own_mirror_image(name: str) -> None:
    """Mirrored about midspan, the same joints are there with the same bars."""
    truss = TRUSSES[name]()
    span = truss.joint(truss.supports[-1].joint).x
    at = {(joint.x, joint.y): joint.name for joint in truss.joints}
    twin = {joint.name: at[span - joint.x, joint.y] for joint in truss.joints}
    bars = {frozenset((member.start, member.end)) for member in truss.members}
    assert {frozenset((twin[member.start], twin[member.end])) for member in truss.members} == bars


def test_pratt_diagonals_pull_and_howe_diagonals_push() -> None:
    """Under equal panel loads: what the two trusses are built for (common practice, no source)."""
    for shape, sign in ((shapes.pratt, 1), (shapes.howe, -1)):
        truss = shape(8, 4, 6)
        found = forces(truss, shapes.panel_loads(truss, "L", (0, -100)).as_floats())
        diagonals = [member.name for member in truss.members if member.group == "diagonals"]
        assert len(diagonals) == 6
        assert all(sign * found[name] > 1 for name in diagonals)


def test_chord_force_of_a_pratt_truss_is_moment_over_height() -> None:
    """Six panels of 4 m, 5 m high, 100 kN a panel: M at L2 = 250 * 8 - 100 * 4 = 1600 kNm; U2-U3's centre is L3."""
    truss = shapes.pratt(6, 4, 5)
    found = forces(truss, shapes.panel_loads(truss, "L", (0, -100)).as_floats())
    assert found["L2-L3"] == pytest.approx(1600 / 5)
    assert found["U2-U3"] == pytest.approx(-(250 * 12 - 100 * 8 - 100 * 4) / 5)
    assert found["U2-L3"] == pytest.approx((250 - 200) * np.hypot(4, 5) / 5)


def test_k_truss_arms_share_the_panel_shear() -> None:
    """The two arms at M2 carry equal and opposite horizontal parts, so equal forces of opposite sign."""
    truss = shapes.k_truss(8, 4, 6)
    found = forces(truss, shapes.panel_loads(truss, "L", (0, -100)).as_floats())
    assert found["M2-U3"] == pytest.approx(-found["M2-L3"])
    assert abs(found["M2-L3"]) == pytest.approx((350 - 200) / 2 * 5 / 3)


def test_parabolic_bowstring_has_idle_diagonals() -> None:
    """A parabolic chord under equal panel loads is the funicular curve: constant tie force, no diagonal works.

    Classical result; from memory, found in any text on bowstring girders.
    """
    truss = shapes.parker(8, 5, 8)
    found = forces(truss, shapes.panel_loads(truss, "L", (0, -100)).as_floats())
    for member in truss.members:
        if member.group == "diagonals":
            assert found[member.name] == pytest.approx(0, abs=1e-9)
        if member.group == "lower chord":
            assert found[member.name] == pytest.approx(100 * 8 * 40 / (8 * 8))


def test_arch_thrust_is_moment_over_rise() -> None:
    """H = M / rise at the crown hinge: 4 panels of 5 m, 100 kN on the three upper panel points' halves."""
    truss = shapes.three_hinged_arch(4, 5, 4, 6)
    found = forces(truss, {"U1": (0, -100), "U3": (0, -100), "L2": (0, -100)})
    assert found["L0.x"] == pytest.approx((150 * 10 - 100 * 5) / 4)
    assert found["L4.x"] == pytest.approx(-found["L0.x"])


def test_fink_struts_stand_square_on_the_rafters() -> None:
    """The strut of each rafter is square to it, and its foot as far from the heel as from the ridge."""
    for panels, strut in ((4, "U1-L1"), (8, "U2-L2")):
        truss = shapes.fink(panels, 14, 3)
        top, foot = (truss.joint(name) for name in strut.split("-"))
        ridge = truss.joint(f"U{panels // 2}")
        assert (top.x - foot.x) * ridge.x + (top.y - foot.y) * ridge.y == 0
        assert (ridge.x - foot.x) ** 2 + ridge.y**2 == foot.x**2
    truss = shapes.fink(8, 14, 3)
    for strut in ("U1-L1", "U3-M1"):
        top, foot = (truss.joint(name) for name in strut.split("-"))
        assert (top.x - foot.x) * 7 + (top.y - foot.y) * 3 == 0


def test_heights_are_exact() -> None:
    """A surd stays a surd, and a parabola has fractions, not decimals."""
    assert shapes.warren(4, 5, SURD).joint("U1").y == parse(SURD)
    assert shapes.parker(7, 5, 9).joint("U2").y == rational(Fraction(9 * 4 * 2 * 5, 49))
    assert shapes.parker(8, 5, 9, end_height=6).joint("U1").y == 6
    assert shapes.parker(8, 5, 9, end_height=6).joint("U4").y == 9
    assert shapes.baltimore(8, 3, SURD).joint("M3").y == parse(SURD) / 2


def test_title_and_units_pass_through() -> None:
    """What Truss takes beside the shape."""
    truss = shapes.howe(4, 15, 20, title="Mill footbridge", length="ft", force="kip")
    assert (truss.title, truss.length, truss.force) == ("Mill footbridge", "ft", "kip")


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: shapes.pratt(2, 4, 6), "panels: 2; a whole number from 3"),
        (lambda: shapes.pratt(panels=True, panel=4, height=6), "panels: True"),
        (lambda: shapes.pratt(6.0, 4, 6), r"panels: 6\.0"),
        (lambda: shapes.pratt(10**9, 4, 6), "to 1000 is needed"),
        (lambda: shapes.pratt(6, 0, 6), "panel: .*a length above zero"),
        (lambda: shapes.howe(6, 4, "-sqrt(2)"), "height: .*a length above zero"),
        (lambda: shapes.howe(6, 4, "six"), "height: 'six'"),
        (lambda: shapes.howe(6, 4, float("nan")), "height: NaN is not a finite number"),
        (lambda: shapes.warren(5, 4, 6), "an even number from 4"),
        (lambda: shapes.warren(1, 4, 6, verticals=False), "a whole number from 2"),
        (lambda: shapes.k_truss(3, 4, 6), "a whole number from 4"),
        (lambda: shapes.baltimore(7, 4, 6), "an even number from 6"),
        (lambda: shapes.parker(6, 4, heights=[1, 2, 3]), "5 heights are needed"),
        (lambda: shapes.parker(6, 4, 9, heights=[1, 2, 3, 2, 1]), "no height besides"),
        (lambda: shapes.parker(4, 4, heights=[1, 0, 1]), "heights, U2: .*above zero"),
        (lambda: shapes.parker(6, 4), "height: None"),
        (lambda: shapes.fink(6, 12, 3), "4 or 8 panels"),
        (lambda: shapes.fink(4, 12, 6), "less than half the span"),
        (lambda: shapes.fan(12, 7), "less than half the span"),
        (lambda: shapes.three_hinged_arch(6, 4, 5, 5), "more than the rise"),
        (lambda: shapes.three_hinged_arch(5, 4, 5, 6), "an even number from 4"),
        (lambda: shapes.bracket(0, 4, 5), "a whole number from 1"),
    ],
)
def test_what_cannot_be_is_refused(make: Callable[[], Truss], message: str) -> None:
    """With the argument's name and what is possible."""
    with pytest.raises(InputError, match=message):
        make()


def test_panel_loads_reach_every_joint_of_a_chord_but_supports() -> None:
    """Supports are left out, numbers count as numbers, other chords stay free."""
    truss = shapes.pratt(12, 4, 6)
    case = shapes.panel_loads(truss, "U", (1, "-sqrt(2)"), name="wind")
    assert case.name == "wind"
    assert [load.joint for load in case.loads] == [f"U{i}" for i in range(1, 12)]
    assert {load.fy for load in case.loads} == {parse("-sqrt(2)")}
    with pytest.raises(UnknownNameError, match="chord 'M' can be loaded; there are L, U"):
        shapes.panel_loads(truss, "M", (0, -1))
    with pytest.raises(InputError, match="two numbers"):
        shapes.panel_loads(truss, "L", (0,))
