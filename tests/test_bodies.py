"""Free bodies that are proposed, the fast incidence tests behind them, and the bridges that leave none out."""

from __future__ import annotations

import itertools
import random
from fractions import Fraction

import pytest
import trade_trusses as trade
from random_trusses import random_truss
from stated_truss import Stated

from trusscalc.exacttext import parse
from trusscalc.statics import bodies
from trusscalc.statics.bridges import bridge_bodies
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.incidence import AXIS_X, AXIS_Y, Layout, Residues, bits, layout_of


def layout(stated: Stated) -> Layout:
    """Return a truss as numbers."""
    return layout_of(structure_of(stated.truss, stated.case), stated.case.as_floats())


def names(found: Layout, mask: int) -> set[str]:
    """Return the joints of a mask."""
    return {found.joints[joint] for joint in bits(mask)}


# --- incidence --------------------------------------------------------------------------------------------


def test_bits() -> None:
    """The places of the ones, ascending."""
    assert bits(0) == []
    assert bits(0b1011) == [0, 1, 3]
    assert bits(1 << 300 | 1) == [0, 300]


def test_residues_respect_arithmetic() -> None:
    """Sums and products of numbers with roots have the sums and products of their images, and zero is zero."""
    texts = ["2/3", "sqrt(2)", "5-sqrt(6)/7", "sqrt(3)+sqrt(2)", "sqrt(2+sqrt(3))", "sqrt(10+2*sqrt(5))/4"]
    numbers = [parse(text) for text in texts]
    residues = Residues(numbers)
    image = residues.of
    for a, b in itertools.product(numbers[:4], repeat=2):
        assert image(a * b) == image(a) * image(b) % residues.prime
        assert image(a + b) == (image(a) + image(b)) % residues.prime
        assert image(a - a) == 0
    for nested in numbers[4:]:
        assert image(nested * nested) == image(nested) ** 2 % residues.prime


@pytest.mark.parametrize("numbers", ["rational", "surd"])
def test_incidence_against_exact_arithmetic(numbers: str) -> None:
    """Which lines pass through which joints and meeting points: as the exact numbers say."""
    stated = random_truss(random.Random(5), 7, numbers)  # type: ignore[arg-type]
    exact, found = structure_of(stated.truss, stated.case), layout(stated)
    for bar, name in enumerate(found.bars):
        line = exact.bars[name]
        start = exact.joints[line.start]
        for joint, point in zip(found.joints, found.points, strict=True):
            place = exact.joints[joint]
            on_line = not (place.x - start.x) * line.dy - (place.y - start.y) * line.dx
            assert found.passes(bar, point) == on_line
        assert found.passes(bar, AXIS_X) == (not line.dx)
        assert found.passes(bar, AXIS_Y) == (not line.dy)
        assert found.passes(bar, found.across(bar))


def test_meetings_and_normal_points() -> None:
    """Two bars meet in a point both pass through; parallels in their direction; one line in no point."""
    found = layout(trade.fink())
    index = {name: place for place, name in enumerate(found.bars)}
    assert found.meeting(index["A-D"], index["D-C"]) is None
    assert found.meeting(index["A-D"], index["A-P"]) == found.points[found.joints.index("A")]
    parallel = layout(trade.pratt(6))
    index = {name: place for place, name in enumerate(parallel.bars)}
    point = parallel.meeting(index["L1-L2"], index["U2-U3"])
    assert point is not None
    assert point[2] == 0
    assert point == parallel.across(index["L1-L2"]) == parallel.normal(AXIS_Y)
    for first, second in itertools.combinations(range(len(found.bars)), 2):
        crossing = found.meeting(first, second)
        assert crossing is None or (found.passes(first, crossing) and found.passes(second, crossing))


def test_joints_are_counted_from_the_left_then_from_below() -> None:
    """Whatever their names and order in the file."""
    stated = trade.pratt(4).shuffled(random.Random(2).shuffle)
    assert layout(stated).joints == ["L0", "L1", "U1", "L2", "U2", "L3", "U3", "L4"]


# --- windows and bodies -----------------------------------------------------------------------------------


def test_a_window_leaves_nothing_out() -> None:
    """Near joints and far groups make up the truss, and boundaries through groups are the plain ones."""
    found = layout(trade.pratt(60))
    bar = found.bars.index("U20-L21")
    window = bodies.window_round(found, sum(1 << joint for joint in found.ends[bar]), 28)
    far = [group.joints for group in window.far]
    assert window.near.bit_count() >= 28
    assert all(window.near >> joint & 1 for joint in found.ends[bar])
    total = window.near
    for mask in far:
        assert not total & mask
        total |= mask
    assert total == bodies.everything(found)
    assert len(far) == 2
    for kept in (far[0], far[1], far[0] | window.near, 0b11 << 42 & window.near | far[0], window.near):
        assert bodies.boundary(found, kept, window) == bodies.boundary(found, kept)
        assert sorted(bodies.pieces_of(found, kept, window)) == sorted(bodies.pieces_of(found, kept))


def test_pieces() -> None:
    """What hangs together by members."""
    found = layout(trade.pratt(6))
    place = {name: 1 << joint for joint, name in enumerate(found.joints)}
    kept = place["L0"] | place["L1"] | place["U3"] | place["L3"] | place["L6"]
    assert [names(found, piece) for piece in bodies.pieces_of(found, kept)] == [{"L0", "L1"}, {"L3", "U3"}, {"L6"}]


@pytest.mark.parametrize("stated", [trade.k_truss(8), trade.fink(eight=True), trade.hinged_spans()], ids="KFH")
def test_proposed_bodies_are_bodies(stated: Stated) -> None:
    """Each once, never empty, its cut the boundary, surplus pieces counted, every joint and the whole among them."""
    found = layout(stated)
    proposed = bodies.bodies_in(found, bodies.whole_window(found))
    kept = [body.kept for body in proposed]
    assert len(set(kept)) == len(kept)
    assert {1 << joint for joint in range(len(found.joints))} <= set(kept)
    assert bodies.everything(found) in kept
    for body in proposed:
        assert body.cut == bodies.boundary(found, body.kept)
        assert len(bodies.pieces_of(found, body.kept)) == 1
        rest = bodies.everything(found) & ~body.kept
        assert body.surplus == (
            len(bodies.pieces_of(found, rest)) - 1 if rest and body.found not in ("joint", "whole") else 0
        )


def test_every_straight_section_is_proposed() -> None:
    """All ways of parting the joints of a fan roof by a line, found by turning a line round by small steps."""
    stated = trade.fan()
    found = layout(stated)
    proposed = {body.kept for body in bodies.bodies_in(found, bodies.whole_window(found))}
    whole = bodies.everything(found)
    for dx, dy in itertools.product(range(-7, 8), repeat=2):
        heights = [dx * y * 1.001 - dy * x + 1e-7 * x for x, y in zip(found.x, found.y, strict=True)]
        for level in sorted(heights):
            side = sum(1 << joint for joint, height in enumerate(heights) if height > level + 1e-9)
            near = bodies.boundary(found, side) & found.members
            if side and side != whole and near.bit_count() <= bodies.MOST_CUT and near.bit_count() <= 4:
                for piece in [*bodies.pieces_of(found, side), *bodies.pieces_of(found, whole & ~side)]:
                    assert piece in proposed, names(found, piece)


def test_hinges_part_a_truss() -> None:
    """The bodies that meet the rest in one joint, with it and without it."""
    found = layout(trade.three_hinged_arch())
    parted = [names(found, body.kept) for body in bodies.hinge_bodies(found)]
    left = {"A", "D", "E", "F", "G", "H"}
    for half in (left, left | {"C"}):
        assert half in parted
        assert {"C" if name == "C" else f"{name}'" for name in half} in parted
    assert bodies.hinge_bodies(layout(trade.pratt(6))) == []


# --- bridges ----------------------------------------------------------------------------------------------


def reachable_by_trying(found: Layout, known: int) -> set[int]:
    """Return the bars that one equation of some body gives, by trying all bodies and all centres of the graph."""
    unknown = [bar for bar in range(len(found.bars)) if not known >> bar & 1]
    points = {AXIS_X, AXIS_Y, *found.points, *(found.across(bar) for bar in unknown)}
    for first, second in itertools.combinations(unknown, 2):
        crossing = found.meeting(first, second)
        if crossing is not None:
            points.add(crossing)
    reached = set()
    for kept in range(1, bodies.everything(found) + 1):
        cut = bits(bodies.boundary(found, kept) & ~known)
        for point in points:
            live = [bar for bar in cut if not found.passes(bar, point)]
            if len(live) == 1:
                reached.add(live[0])
    return reached


def reachable_by_bridges(found: Layout, known: int) -> set[int]:
    """Return the bars that the bodies of the bridge search give by one equation about some centre."""
    unknown = [bar for bar in range(len(found.bars)) if not known >> bar & 1]
    everything = (1 << len(found.bars)) - 1
    points = {AXIS_X, AXIS_Y, *found.points, *(found.across(bar) for bar in unknown)}
    points |= {p for a, b in itertools.combinations(unknown, 2) if (p := found.meeting(a, b)) is not None}
    reached = set()
    for body in bridge_bodies(found, known, everything):
        assert body.cut == bodies.boundary(found, body.kept)
        for point in points:
            live = [bar for bar in bits(body.cut & ~known) if not found.passes(bar, point)]
            if len(live) == 1:
                reached.add(live[0])
    return reached


@pytest.mark.parametrize("seed", range(6))
def test_bridges_find_exactly_what_trying_everything_finds(seed: int) -> None:
    """Random trusses with some bars known: no bar that one equation gives is missed."""
    draw = random.Random(seed)
    stated = random_truss(draw, 6, complex_share=seed % 2)
    found = layout(stated)
    links = sum(1 << bar for bar, (_, end) in enumerate(found.ends) if end < 0)
    some = sum(1 << bar for bar in draw.sample(range(len(found.bars)), 2))
    for known in (0, links, links | some):
        assert reachable_by_bridges(found, known) == reachable_by_trying(found, known)


def test_coordinates_far_from_whole_numbers_do_not_matter() -> None:
    """Incidence is decided exactly: a joint a hair off a line is off it."""
    hair = Fraction(1, 10**18)
    stated = Stated(
        {"A": ("0", "0"), "B": ("4", "0"), "C": ("2", str(hair)), "D": ("2", "3")},
        ("A-D", "B-D", "C-D", "A-C", "C-B"),
        {"A": "pin", "B": "roller"},
        {"D": ("1", "-1")},
    )
    found = layout(stated)
    assert not found.passes(found.bars.index("A-C"), found.points[found.joints.index("B")])
    level = layout(stated.moved(lambda x, y: (x, "0" if y == str(hair) else y), lambda x, y: (x, y)))
    assert level.passes(level.bars.index("A-C"), level.points[level.joints.index("B")])
