"""The numeric route against hand formulas, closed forms and dense linear algebra."""

from __future__ import annotations

import math
import time
from fractions import Fraction
from itertools import pairwise

import numpy as np
import pytest

from trusscalc import stiffness
from trusscalc.errors import InputError
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

EPS = float(np.finfo(np.float64).eps)


def bound(found: stiffness.StiffnessResult) -> float:
    """Return what a verdict allows, in the unit of force."""
    return max(1e-9, 10 * EPS * found.condition) * max(map(abs, found.forces.values()))


def pratt(panels: int, panel: Fraction, height: Fraction) -> Truss:
    """Return a Pratt bridge, an even number of panels, inclined end posts, diagonals falling to midspan."""
    joints = {f"L{i}": (panel * i, 0) for i in range(panels + 1)}
    joints |= {f"U{i}": (panel * i, height) for i in range(1, panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(1, panels - 1)]
    members += [f"U{i}-L{i}" for i in range(1, panels)] + ["L0-U1", f"U{panels - 1}-L{panels}"]
    members += [f"U{i}-L{i + 1}" for i in range(1, panels // 2)]
    members += [f"L{i}-U{i + 1}" for i in range(panels // 2, panels - 1)]
    return Truss(joints, members, {"L0": "pin", f"L{panels}": "roller"})


def pratt_by_hand(panels: int, panel: Fraction, height: Fraction, load: Fraction) -> dict[str, float]:
    """Return the left half's forces under equal loads on the lower joints: chords M / h, diagonals V / sin.

    Formulas of the method of sections; common practice, no source.
    """
    reaction = load * (panels - 1) / 2
    moment = [reaction * panel * i - load * panel * i * (i - 1) / 2 for i in range(panels // 2 + 1)]
    shear = [reaction - load * i for i in range(panels // 2)]
    slope = math.hypot(panel, height) / float(height)
    found = {"L0-L1": moment[1] / height, "U1-L1": load, "L0-U1": -float(shear[0]) * slope}
    for i in range(1, panels // 2):
        found[f"L{i}-L{i + 1}"] = moment[i] / height
        found[f"U{i}-U{i + 1}"] = -moment[i + 1] / height
        found[f"U{i}-L{i + 1}"] = float(shear[i]) * slope
        if i > 1:
            found[f"U{i}-L{i}"] = -shear[i]
    return {name: float(force) for name, force in found.items()}


def random_truss(seed: int, joints: int, extra: int = 0) -> tuple[Truss, LoadCase]:
    """Return a simple truss (each further joint on two members), members to spare, and loads on every joint."""
    rng = np.random.default_rng(seed)
    places = {"P0": (0, 0), "P1": (997, 13), "P2": (401, 811)}
    members = ["P0-P1", "P1-P2", "P2-P0"]
    while len(places) < joints:
        new = tuple(int(value) for value in rng.integers(-9999, 9999, 2))
        first, second = (f"P{value}" for value in rng.choice(len(places), 2, replace=False))
        arms = [np.subtract(new, places[end]) for end in (first, second)]
        if abs(arms[0][0] * arms[1][1] - arms[0][1] * arms[1][0]) > 0.3 * np.hypot(*arms[0]) * np.hypot(*arms[1]):
            members += [f"P{len(places)}-{first}", f"P{len(places)}-{second}"]
            places[f"P{len(places)}"] = new
    while extra:
        start, end = sorted(int(value) for value in rng.choice(joints, 2, replace=False))
        if not {f"P{start}-P{end}", f"P{end}-P{start}"} & set(members):
            members.append(f"P{start}-P{end}")
            extra -= 1
    supports = {"P0": "pin", "P1": {"reaction": (1, 5)}}
    loads = {name: tuple(int(value) for value in rng.integers(-99, 99, 2)) for name in places}
    return Truss(places, members, supports), LoadCase("random", loads)


def joint_equations(truss: Truss, case: LoadCase) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the dense equilibrium matrix (members, then links), loads, and member lengths, made here anew."""
    place = {joint.name: np.array((float(joint.x), float(joint.y))) for joint in truss.joints}
    row = {name: 2 * number for number, name in enumerate(place)}
    matrix = np.zeros((2 * len(row), len(truss.members) + len(truss.links)))
    lengths = np.zeros(len(truss.members))
    for column, member in enumerate(truss.members):
        along = place[member.end] - place[member.start]
        lengths[column] = np.hypot(*along)
        matrix[row[member.start] : row[member.start] + 2, column] = along / lengths[column]
        matrix[row[member.end] : row[member.end] + 2, column] = -along / lengths[column]
    for column, link in enumerate(truss.links, len(truss.members)):
        way = np.array((float(link.dx), float(link.dy)))
        matrix[row[link.joint] : row[link.joint] + 2, column] = way / np.hypot(*way)
    loads = np.zeros(len(matrix))
    for joint, force in case.as_floats().items():
        loads[row[joint] : row[joint] + 2] = force
    return matrix, loads, lengths


def dense_condition(truss: Truss) -> float:
    """Return cond_2 of G, its displacements restricted to those the links permit by a dense null space."""
    matrix, _, lengths = joint_equations(truss, LoadCase("none", {}))
    members = len(lengths)
    left, sizes, _ = np.linalg.svd(matrix[:, members:])
    free = left[:, int((sizes > 1e-12).sum()) :]
    return float(np.linalg.cond((matrix[:, :members].T @ free) / np.sqrt(lengths)[:, None]))


# --- by hand ----------------------------------------------------------------------------------------------


def test_two_bars_by_hand() -> None:
    """A bracket of two bars carries a lamp as the force triangle says, and sags as its bars stretch."""
    truss = Truss({"A": (0, 0), "B": (0, 3), "C": (4, 0)}, ["A-C", "C-B"], {"A": "pin", "B": "pin"})
    found = stiffness.solve(truss, LoadCase("lamp", {"C": (0, -6)}))
    assert found.forces == pytest.approx({"A-C": -8, "C-B": 10}, rel=1e-14)
    assert found.reactions == pytest.approx({"A.x": 8, "A.y": 0, "B.x": -8, "B.y": 6}, rel=1e-14, abs=1e-14)
    # A-C shortens by 8 * 4; C-B lengthens by 10 * 5 = (4 ux - 3 uy) / 5
    assert found.displacements["C"] == pytest.approx((-32, -126), rel=1e-14)
    assert found.displacements["A"] == (0, 0)
    assert stiffness.member_forces(truss, LoadCase("lamp", {"C": (0, -6)})) == found.forces


def test_three_bar_suspension() -> None:
    """The middle of three bars of equal EA takes P / (1 + 2 cos^3) (Timoshenko, Strength of Materials; memory)."""
    joints = {"A": (-3, 4), "B": (0, 4), "C": (3, 4), "D": (0, 0)}
    truss = Truss(joints, ["A-D", "B-D", "C-D"], dict.fromkeys("ABC", "pin"))
    found = stiffness.solve(truss, LoadCase("hoist", {"D": (0, -253)}))
    assert found.forces == pytest.approx({"A-D": 80, "B-D": 125, "C-D": 80}, rel=1e-14)
    assert found.displacements["D"] == pytest.approx((0, -125 * 4), abs=1e-11)


def test_skew_roller() -> None:
    """A roller on a slope takes what the moments about the pin demand, along its own direction."""
    roller = {"reaction": (-3, -3)}
    truss = Truss({"A": (0, 0), "B": (6, 0), "C": (2, 3)}, ["A-B", "B-C", "C-A"], {"A": "pin", "B": roller})
    found = stiffness.solve(truss, LoadCase("wind", {"C": (4, -10)}))
    expected = {"A.x": -4 - 32 / 6, "A.y": 10 - 32 / 6, "B.r": -32 * math.sqrt(2) / 6}
    assert found.reactions == pytest.approx(expected, rel=1e-14)
    assert sum(found.displacements["B"]) == pytest.approx(0, abs=1e-12)


def test_more_links_than_directions_share() -> None:
    """Three links on a joint take the least sum of squares, two of one direction half each."""
    three = [{"reaction": (1, 0)}, {"reaction": (0, 1)}, {"reaction": (2, 2)}]
    twice = [{"reaction": (0, 1)}, {"reaction": (0, 7)}]
    truss = Truss({"A": (0, 0), "B": (6, 0), "C": (3, 4)}, ["A-B", "B-C", "C-A"], {"A": three, "B": twice})
    found = stiffness.solve(truss, LoadCase("bearing", {"A": (0, -8), "B": (0, -5)}))
    expected = {"A.r1": -2, "A.r2": 6, "A.r3": 4 / math.sqrt(2), "B.r1": 2.5, "B.r2": 2.5}
    assert found.reactions == pytest.approx(expected, rel=1e-14)
    assert max(map(abs, found.forces.values())) < 1e-14


def test_two_slanting_links_are_a_pin() -> None:
    """Two links of different directions hold a joint, and their components add up to a pin's."""
    joints, members = {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "B-C", "C-A"]
    case = LoadCase("gust", {"C": (6, -12)})
    slanting = [{"reaction": (3, 4)}, {"reaction": (-5, 12)}]
    pinned = stiffness.solve(Truss(joints, members, {"A": "pin", "B": "roller"}), case)
    linked = stiffness.solve(Truss(joints, members, {"A": slanting, "B": "roller"}), case)
    assert linked.forces == pytest.approx(pinned.forces, rel=1e-13)
    first, second = linked.reactions["A.r1"], linked.reactions["A.r2"]
    assert first * 3 / 5 - second * 5 / 13 == pytest.approx(pinned.reactions["A.x"], rel=1e-13)
    assert first * 4 / 5 + second * 12 / 13 == pytest.approx(pinned.reactions["A.y"], rel=1e-13)


@pytest.mark.parametrize("panels", [4, 8, 400, 1250])
def test_pratt_bridge_by_hand(panels: int) -> None:
    """Chords M / h and web V / sin come out of bridges of 13 to 4,997 members, far inside the verdict's bound."""
    panel, height, load = Fraction("3.7"), Fraction("4.13"), Fraction(45, 2)
    truss = pratt(panels, panel, height)
    case = LoadCase("deck", {f"L{i}": (0, -load) for i in range(1, panels)})
    begun = time.perf_counter()
    found = stiffness.solve(truss, case)
    assert time.perf_counter() - begun < 2  # some ten times what it takes; a dense solver would need minutes
    largest = max(map(abs, found.forces.values()))
    expected = pratt_by_hand(panels, panel, height, load)
    error = max(abs(found.forces[name] - force) for name, force in expected.items())
    assert error < 1e-13 * largest
    assert error < bound(found) < 1e-6 * largest
    assert found.residual < 1e-14
    half = float(load * (panels - 1) / 2)
    assert found.reactions == pytest.approx({"L0.x": 0, "L0.y": half, f"L{panels}.y": half}, abs=1e-13 * largest)


# --- against dense linear algebra -------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(12))
def test_random_simple_trusses(seed: int) -> None:
    """A determinate truss's forces and reactions solve the joint equations."""
    truss, case = random_truss(seed, 10 + 7 * seed)
    found = stiffness.solve(truss, case)
    matrix, loads, _ = joint_equations(truss, case)
    expected = np.linalg.solve(matrix, -loads)
    assert [*found.forces.values(), *found.reactions.values()] == pytest.approx(expected, abs=bound(found))
    assert found.residual < 1e-12


@pytest.mark.parametrize("seed", range(6))
def test_random_indeterminate_trusses_by_least_work(seed: int) -> None:
    """Among all forces in equilibrium those found have the least strain energy (Menabrea's theorem)."""
    truss, case = random_truss(seed, 12 + 5 * seed, extra=1 + 2 * seed)
    found = stiffness.solve(truss, case)
    matrix, loads, lengths = joint_equations(truss, case)
    weights = np.concatenate((1 / np.sqrt(lengths), np.full(len(truss.links), 1e3)))  # rigid links work little
    expected = weights * np.linalg.lstsq(matrix * weights, -loads)[0]
    assert [*found.forces.values(), *found.reactions.values()] == pytest.approx(expected, abs=bound(found))
    assert found.residual < 1e-12


@pytest.mark.parametrize("seed", range(8))
def test_condition_of_random_trusses(seed: int) -> None:
    """The condition estimate is near the one of a dense singular value decomposition."""
    truss, case = random_truss(seed, 8 + 9 * seed, extra=seed)
    assert 0.5 < stiffness.solve(truss, case).condition / dense_condition(truss) < 4


@pytest.mark.parametrize("panels", [4, 20, 80])
@pytest.mark.parametrize("height", [Fraction(1, 4), Fraction(4), Fraction(30)])
def test_condition_of_slender_trusses(panels: int, height: Fraction) -> None:
    """The condition estimate is near the dense one in shallow and in high bridges, short and long."""
    truss = pratt(panels, Fraction(4), height)
    assert 0.5 < stiffness.solve(truss, LoadCase("none", {})).condition / dense_condition(truss) < 4


# --- properties -------------------------------------------------------------------------------------------


def test_superposition() -> None:
    """Forces, reactions and displacements of two cases add up to those of both together."""
    truss, case = random_truss(3, 30, extra=4)
    names = list(case.as_floats())
    parts = [LoadCase("odd", {n: case.as_floats()[n] for n in names[k::2]}) for k in (0, 1)]
    whole, first, second = (stiffness.solve(truss, part) for part in (case, *parts))
    for name, force in whole.forces.items():
        assert first.forces[name] + second.forces[name] == pytest.approx(force, abs=bound(whole))
    for name, reaction in whole.reactions.items():
        assert first.reactions[name] + second.reactions[name] == pytest.approx(reaction, abs=bound(whole))
    for name, move in whole.displacements.items():
        added = np.add(first.displacements[name], second.displacements[name])
        assert added == pytest.approx(move, rel=1e-9, abs=1e-4)


def test_reciprocal_displacements() -> None:
    """The displacement at one joint under a unit load at another is the same the other way (Maxwell)."""
    truss, _ = random_truss(5, 25, extra=3)
    here = stiffness.solve(truss, LoadCase("here", {"P20": (1, 0)}))
    there = stiffness.solve(truss, LoadCase("there", {"P9": (0, 1)}))
    assert here.displacements["P9"][1] == pytest.approx(there.displacements["P20"][0], rel=1e-9)


def test_order_of_joints_and_members_does_not_matter() -> None:
    """Joints and members stated in another order give the same forces."""
    truss, case = random_truss(7, 40, extra=2)
    joints = {joint.name: (joint.x, joint.y) for joint in reversed(truss.joints)}
    turned = Truss(joints, [member.name for member in truss.members[::-1]], {"P0": "pin", "P1": {"reaction": (1, 5)}})
    first, second = stiffness.solve(truss, case), stiffness.solve(turned, case)
    assert list(first.forces) == [member.name for member in truss.members]
    assert second.forces == pytest.approx(first.forces, abs=bound(first))


@pytest.mark.parametrize(("length", "force"), [(1000, 1000), (10**-5, 10**7), (10**200, 10**-200), (10**290, 10**290)])
def test_units_do_not_matter(length: float, force: float) -> None:
    """Other units of length and force change neither condition nor forces beyond the unit; nothing overflows."""
    joints = {"A": (0.0, 0.0), "B": (8.0, 0.0), "C": (4.0, 3.0), "D": (11.0, 5.0)}
    members, supports = ["A-B", "B-C", "C-A", "B-D", "C-D"], {"A": "pin", "B": "roller"}
    plain = stiffness.solve(Truss(joints, members, supports), LoadCase("snow", {"D": (1, -12)}))
    large = {name: (Fraction(x) * Fraction(length), Fraction(y) * Fraction(length)) for name, (x, y) in joints.items()}
    case = LoadCase("snow", {"D": (1 * Fraction(force), -12 * Fraction(force))})
    other = stiffness.solve(Truss(large, members, supports), case)
    assert other.condition == pytest.approx(plain.condition, rel=1e-12)
    for name, amount in plain.forces.items():
        assert other.forces[name] / force == pytest.approx(amount, rel=1e-12)


def test_separate_parts() -> None:
    """Two trusses in one model are solved as each would be alone."""
    joints = {"A": (0, 0), "B": (8, 0), "C": (4, 3)}
    second = {name * 2: (x + 20, y + 7) for name, (x, y) in joints.items()}
    members = ["A-B", "B-C", "C-A"]
    supports = {"A": "pin", "B": "roller"}
    twins = ["-".join(end * 2 for end in member.split("-")) for member in members]
    both = Truss(joints | second, members + twins, supports | {"AA": "pin", "BB": "roller"})
    alone = stiffness.solve(Truss(joints, members, supports), LoadCase("one", {"C": (2, -12)}))
    found = stiffness.solve(both, LoadCase("both", {"C": (2, -12), "CC": (4, -24)}))
    for member, twin in zip(members, twins, strict=True):
        assert found.forces[member] == pytest.approx(alone.forces[member], rel=1e-13)
        assert found.forces[twin] == pytest.approx(2 * alone.forces[member], rel=1e-13)
    assert found.condition < 10


def test_nothing_can_move() -> None:
    """A bar between two pins has no force, and a load on a pin goes straight to the ground."""
    truss = Truss({"A": (0, 0), "B": (4, 0)}, ["A-B"], {"A": "pin", "B": "pin"})
    found = stiffness.solve(truss, LoadCase("pull", {"B": (3, -1)}))
    assert found.forces == {"A-B": 0}
    assert found.reactions == pytest.approx({"A.x": 0, "A.y": 0, "B.x": -3, "B.y": 1})
    assert found.condition == 1


def test_no_load() -> None:
    """Without loads everything is zero, the residual too."""
    found = stiffness.solve(pratt(4, Fraction(4), Fraction(3)), LoadCase("none", {}))
    assert {*found.forces.values(), *found.reactions.values(), found.residual} == {0}


def test_load_on_a_joint_that_is_not_there() -> None:
    """A load on an unknown joint is refused, not dropped."""
    with pytest.raises(InputError, match="there is no such joint; did you mean L2"):
        stiffness.solve(pratt(4, Fraction(4), Fraction(3)), LoadCase("typing error", {"L22": (0, -1)}))


# --- hopeless forms and negative controls -----------------------------------------------------------------


def arch(rise: Fraction) -> stiffness.StiffnessResult:
    """Return the response of two bars with almost no rise under a load of 2."""
    truss = Truss({"A": (-1, 0), "B": (1, 0), "C": (0, rise)}, ["A-C", "B-C"], {"A": "pin", "B": "pin"})
    return stiffness.solve(truss, LoadCase("step", {"C": (0, -2)}))


def test_almost_flat_arch() -> None:
    """A condition about one over the rise is told, and the forces are right within what it allows."""
    for rise in (Fraction(1, 10**3), Fraction(1, 10**6), Fraction(1, 10**9)):
        found = arch(rise)
        assert 0.5 < found.condition * float(rise) < 4
        assert found.forces["A-C"] == pytest.approx(-math.hypot(1, rise) / float(rise), abs=bound(found))


@pytest.mark.parametrize("rise", [Fraction(1, 10**15), Fraction(1, 10**30)])
def test_flat_arch_in_floats(rise: Fraction) -> None:
    """A rise that floats can hardly see gives finite numbers, an unbounded condition and an open residual."""
    found = arch(rise)
    assert found.condition == math.inf
    assert found.residual == pytest.approx(1)
    assert all(map(math.isfinite, found.forces.values()))


def test_mechanism_is_told_by_the_condition() -> None:
    """A frame without diagonal has no finite condition, and a load it cannot resist stays as residual."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)}
    frame = Truss(joints, ["A-B", "B-C", "C-D", "D-A"], {"A": "pin", "B": "pin"})
    down, aside = (stiffness.solve(frame, LoadCase("x", {"C": load})) for load in ((0, -1), (1, 0)))
    assert down.condition == aside.condition == math.inf
    assert down.forces["B-C"] == pytest.approx(-1)
    assert down.residual < 1e-12
    assert aside.residual > 0.1


def test_member_lost_in_floats() -> None:
    """A bar between joints that floats cannot tell apart carries nothing, and the condition says so."""
    places = np.array([(1.0, 0.0), (1.0, 0.0), (3.0, 3.0), (5.0, 0.0)])
    ends, held = np.array([(0, 1), (1, 2), (2, 3)]), np.array([0, 0, 1, 1, 3, 3])
    directions = np.array([(1.0, 0.0), (0.0, 1.0)] * 3)
    loads = np.array([(0, 0), (0, 0), (0.0, -6.0), (0, 0)])
    found = stiffness.Factored(places, ends, held, directions).response(loads)
    assert found.forces == pytest.approx([0, -math.sqrt(13), -math.sqrt(13)], rel=1e-14)
    assert found.condition == math.inf


def levers(count: int, ratio: int) -> tuple[Truss, LoadCase]:
    """Return levers in a row, each pushing the next with ``ratio`` times the force it is pushed with."""
    joints: dict[str, tuple[int, int]] = {"E": (ratio * count - ratio + count, 10 * count)}
    supports = {"E": "pin"}
    members = []
    for k in reversed(range(count)):
        x = (ratio + 1) * k
        joints |= {f"P{k}": (x, 10 * k), f"T{k}": (x - ratio, 10 * k), f"S{k}": (x + 1, 10 * k + 1)}
        supports[f"P{k}"] = "pin"
        members += [f"P{k}-S{k}", f"P{k}-T{k}", f"S{k}-T{k}", f"S{k}-T{k + 1}" if k < count - 1 else f"S{k}-E"]
    return Truss(joints, members, supports), LoadCase("touch", {"T0": (0, 1)})


def test_levers() -> None:
    """Six levers of ten to one turn one unit of force into a million."""
    found = stiffness.solve(*levers(6, 10))
    assert abs(found.forces["S5-E"]) == pytest.approx(1e6, rel=1e-12)
    assert found.condition > 1e6


def test_overflow_is_told_by_the_condition(monkeypatch: pytest.MonkeyPatch) -> None:
    """Forces beyond any float end as zeros with an unbounded condition, without a warning."""
    monkeypatch.setattr(stiffness, "NO_PIVOT", 0.0)
    found = stiffness.solve(*levers(150, 1000))
    assert found.condition == math.inf
    assert all(map(math.isfinite, found.forces.values()))


def test_links_almost_parallel() -> None:
    """Two links a hair apart hold a joint, at a condition that says how badly."""
    links = [{"reaction": (0, 1)}, {"reaction": (Fraction(1, 10**7), 1)}]
    truss = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "B-C", "C-A"], {"A": links, "B": "roller"})
    found = stiffness.solve(truss, LoadCase("gust", {"C": (1, 0)}))
    assert found.reactions["A.r2"] == pytest.approx(-1e7, rel=1e-7)
    assert 1e7 < found.condition < 1e8


def test_many_load_cases_from_one_factor() -> None:
    """Each as if it were solved alone, digit by digit; a joint that is not there is told for whichever case."""
    truss, case = random_truss(11, 20)
    other = LoadCase("other", {truss.joints[-1].name: (3, -1)})
    assert stiffness.solve_all(truss, (case, other, case)) == tuple(
        stiffness.solve(truss, each) for each in (case, other, case)
    )
    assert stiffness.solve_all(truss, ()) == ()
    with pytest.raises(InputError, match="nowhere: there is no such joint"):
        stiffness.solve_all(truss, (case, LoadCase("lost", {"nowhere": (0, -1)})))


def test_a_wrong_force_shows_in_the_residual() -> None:
    """One member force off by a millionth of the largest is seen at its joints."""
    truss, case = random_truss(11, 20)
    model = truss.as_floats()
    index = {name: place for place, name in enumerate(model.joints)}
    bars = stiffness._bars(
        np.array([*model.joints.values()]), np.array([(index[a], index[b]) for _, a, b in model.members])
    )
    held, directions = (
        np.array(part) for part in zip(*((index[j], (x, y)) for _, j, x, y in model.links), strict=True)
    )
    supports = stiffness._supports(len(index), held, directions)
    loads = np.array([case.as_floats()[name] for name in index])
    forces = np.array([*stiffness.member_forces(truss, case).values()])
    assert stiffness._balance(bars, supports, forces, loads)[1] < 1e-14
    forces[-1] += 1e-6 * np.abs(forces).max()
    assert 1e-7 < stiffness._balance(bars, supports, forces, loads)[1] < 1e-5


def test_a_wrong_factor_shows_in_the_residual(monkeypatch: pytest.MonkeyPatch) -> None:
    """A factor off by one per cent leaves what two refinements cannot repair, and the residual tells."""
    right = stiffness._Factor.solve
    monkeypatch.setattr(stiffness._Factor, "solve", lambda factor, loads: 1.01 * right(factor, loads))
    truss, case = random_truss(11, 20)
    assert 1e-8 < stiffness.solve(truss, case).residual < 1e-5


def test_members_join_neighbouring_levels() -> None:
    """Levels differ by at most one along every member, and a long bridge has about as many as panels."""
    model = pratt(40, Fraction(4), Fraction(3)).as_floats()
    index = {name: place for place, name in enumerate(model.joints)}
    ends = np.array([(index[a], index[b]) for _, a, b in model.members])
    level = stiffness._levels(stiffness._bars(np.array([*model.joints.values()]), ends))
    assert np.abs(level[ends[:, 0]] - level[ends[:, 1]]).max() == 1
    assert level.max() >= 38
    assert all(later - earlier == 1 for earlier, later in pairwise(sorted(set(level.tolist()))))
