"""Small changes of a truss by corrections of low rank, and the frame with stiff joints, against whole solutions."""

from __future__ import annotations

import random
from dataclasses import replace

import numpy as np
import pytest
import trade_trusses as trade
from other_analyses import frame_forces
from random_trusses import random_truss
from stated_truss import Stated

from trusscalc import frame, stiffness
from trusscalc.flexibility import Flexibility, flexibility
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

TRUSSES = {
    "pratt": trade.pratt(6),
    "braced twice": replace(trade.pratt(6), members=(*trade.pratt(6).members, "L2-U3", "U3-L4")),
    "baltimore": trade.baltimore(8),
    "wall": trade.cantilever(4),
    "arch": trade.three_hinged_arch(),
    **{f"random {seed}": random_truss(random.Random(seed), 9, base="links") for seed in range(4)},
}


def model(stated: Stated) -> tuple[Flexibility, np.ndarray]:
    """Return the truss with its answers to unit loads, and its loads."""
    found = flexibility(stated.truss.as_floats())
    assert found is not None
    index = {name: place for place, name in enumerate(stated.joints)}
    loads = np.zeros((len(index), 2))
    for joint, force in stated.case.as_floats().items():
        loads[index[joint]] += force
    return found, loads.ravel()


def forces(stated: Stated) -> list[float]:
    """Return the member forces by the numeric route."""
    return list(stiffness.member_forces(stated.truss, stated.case).values())


def hangs_together(stated: Stated) -> bool:
    """Return whether every joint has a member."""
    return {*stated.joints} == {end for name in stated.members for end in name.split("-")}


@pytest.mark.parametrize("stated", TRUSSES.values(), ids=TRUSSES)
class TestFlexibility:
    """Each answer against a solution of its own."""

    def test_unit_loads_add_up(self, stated: Stated) -> None:
        """Forces are those of the stiffness route, and hold every joint in equilibrium."""
        found, loads = model(stated)
        expected = forces(stated)
        largest = max(map(abs, expected))
        assert found.forces @ loads == pytest.approx(expected, abs=1e-9 * largest)
        carried = found.implied(found.forces @ loads) - loads.reshape(-1, 2)
        assert np.abs(np.einsum("jxy,jy->jx", found.free_parts(), carried)).max() < 1e-9 * largest

    def test_a_joint_elsewhere(self, stated: Stated) -> None:
        """Several places at once, far and near."""
        found, loads = model(stated)
        names = list(stated.joints)
        for place in (0, len(names) // 2, len(names) - 1):
            x, y = found.places[place].tolist()
            spots = [(x + 0.25, y - 0.125), (x, y), (10.5 * x + 1, y + 3.25)]
            together = found.elsewhere(place, np.array(spots), loads)
            for column, spot in enumerate(spots):
                pair = (repr(spot[0]), repr(spot[1]))
                expected = forces(replace(stated, joints={**stated.joints, names[place]: pair}))
                assert together[:, column] == pytest.approx(expected, abs=1e-7 * max(map(abs, expected)))

    def test_a_member_taken_out(self, stated: Stated) -> None:
        """Where the others can do without it; nan where they cannot."""
        found, loads = model(stated)
        each = found.without_each(found.forces @ loads)
        for place, name in enumerate(stated.members):
            rest = replace(stated, members=tuple(other for other in stated.members if other != name))
            solved = stiffness.solve(rest.truss, rest.case) if hangs_together(rest) else None
            if solved is None or np.isinf(solved.condition):
                assert np.isnan(each[:, place]).all()
            else:
                expected = [solved.forces.get(other, 0.0) for other in stated.members]
                assert each[:, place] == pytest.approx(expected, abs=1e-7 * max(map(abs, expected)))

    def test_a_joint_held(self, stated: Stated) -> None:
        """Along an axis, where it was free."""
        found, loads = model(stated)
        each = found.holding_each(loads)
        for place, joint in enumerate(stated.joints):
            if joint not in stated.supports:
                for axis, link in enumerate((("1", "0"), ("0", "1"))):
                    held = replace(stated, supports={**stated.supports, joint: {"reaction": link}})
                    expected = forces(held)
                    assert each[:, 2 * place + axis] == pytest.approx(expected, abs=1e-7 * max(map(abs, expected)))

    def test_stiff_joints(self, stated: Stated) -> None:
        """Against whole member matrices added up; without bending it is the truss."""
        truss, case = stated.truss, stated.case
        for slenderness in (20.0, 100.0):
            places = {joint.name: np.array((float(joint.x), float(joint.y))) for joint in truss.joints}
            lengths = [np.linalg.norm(places[m.end] - places[m.start]) for m in truss.members]
            bending = dict.fromkeys(stated.members, float(np.mean(lengths) / slenderness) ** 2)
            expected = frame_forces(truss, case.as_floats(), slenderness)
            largest = max(map(abs, expected.values()))
            assert frame.axial_forces(truss, case, bending) == pytest.approx(expected, abs=1e-8 * largest)
        hinged = frame.axial_forces(truss, case, {})
        assert list(hinged.values()) == pytest.approx(forces(stated), abs=1e-8 * max(map(abs, hinged.values())))


def test_a_mechanism_has_no_flexibility() -> None:
    """A panel without a diagonal, and a member less than there are ways to move."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3), "E": (8, 0), "F": (8, 3)}
    members = ["A-B", "B-C", "C-D", "A-D", "B-E", "E-F", "C-F"]
    supports = {"A": "pin", "B": "roller"}
    assert flexibility(Truss(joints, members, supports).as_floats()) is None
    crossed = [*members, "A-C", "B-D"]
    assert flexibility(Truss(joints, crossed, supports).as_floats()) is None


def test_own_weight_is_half_to_each_end() -> None:
    """The 3-4-5 triangle."""
    roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    found = flexibility(roof.as_floats())
    assert found is not None
    assert found.own_weight().tolist() == [0, -6.5, 0, -6.5, 0, -5]


def test_a_frame_by_hand() -> None:
    """Two equal rafters with stiff joints, built in at neither foot, tied by a member without bending stiffness.

    By symmetry the apex does not turn, so each rafter bends as a cantilever from it. The rafters' feet move by u
    outwards, the apex by v down; with EA = EI/r2 = 1, length L, slope angle a: axial N = (v sin a - u cos a)/L
    compression, shear at the foot V = 3 r2 (v cos a + u sin a)/L^3, and 2 (N sin a + V cos a) = P, tie T = u/s with
    s its half length, T = N cos a - V sin a. Solved here for u and v by Cramer's rule.
    """
    s, h, r2, load = 4.0, 3.0, 0.09, 12.0
    length, sine, cosine = 5.0, 0.6, 0.8
    k, b = 1 / length, 3 * r2 / length**3
    # rows: vertical balance of the apex, horizontal balance of a foot; columns: u, v
    a11, a12 = 2 * (-k * cosine * sine + b * sine * cosine), 2 * (k * sine * sine + b * cosine * cosine)
    a21, a22 = 1 / s + k * cosine * cosine + b * sine * sine, -k * sine * cosine + b * cosine * sine
    determinant = a11 * a22 - a12 * a21
    u, v = load * a22 / determinant, -load * a21 / determinant
    rafter = -k * (v * sine - u * cosine)
    roof = Truss({"A": (0, 0), "B": (8, 0), "C": (s, h)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    found = frame.axial_forces(roof, LoadCase("snow", {"C": (0, -load)}), {"A-C": r2, "C-B": r2})
    assert found == pytest.approx({"A-B": u / s, "A-C": rafter, "C-B": rafter})
    assert found["A-B"] < 8  # the truss's
