"""Trains over influence lines: rules, exactness, published values, and searches that share nothing with the package.

Two searches stand against it: one in floats over thousands of positions (with every vertex among them, and a hair to
either side), and one in fractions over every critical position of a rigid train, which tells the first of equal ones.
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest
from case_files import CASES
from hypothesis import given, settings
from hypothesis import strategies as st

from trusscalc import travel
from trusscalc.chains import Chain
from trusscalc.criticalpositions import courses, rigid_groups
from trusscalc.decimals import rounded
from trusscalc.errors import InexactNumberError, InputError
from trusscalc.exact import ZERO, Exact, exact, rational, symbol
from trusscalc.exacttext import parse
from trusscalc.loadedline import LoadedLine, ordinates_of
from trusscalc.loads import JointLoad
from trusscalc.passage import Passage
from trusscalc.publishedtrains import PUBLISHED
from trusscalc.trains import Train
from trusscalc.travel import Extreme, Stand, TravelError, extremes, placed

PAIR = Train("pair", (6, 24), (14,))


def line_of(positions: Sequence[object], ordinates: Sequence[object]) -> SimpleNamespace:
    """Return an influence line; numbers as text, whole numbers or fractions."""

    def number(value: object) -> Exact:
        return parse(value) if isinstance(value, str) else exact(value)

    return SimpleNamespace(positions=tuple(map(number, positions)), ordinates=tuple(map(number, ordinates)))


def chain_for(line: SimpleNamespace) -> Chain:
    """Return a chain of as many joints as the line has positions."""
    return Chain("deck", tuple(f"L{index}" for index in range(len(line.positions))))


def loads_of(line: SimpleNamespace, extreme: Extreme, train: Train) -> dict[str, Exact]:
    """Return the downward joint loads of an extreme."""
    return {load.joint: -load.fy for load in placed(extreme, line.positions, chain_for(line), train)}


# --- published --------------------------------------------------------------------------------------------

PANELS = [0, 30, 60, 90, 120]
MOMENT = line_of(PANELS, [0, "18.75", "22.5", "11.25", 0])
TOP_CHORD = line_of(PANELS, [0, "-15/16", "-9/8", "-9/16", 0])


class TestHicks:
    """Two axles over a deck Warren truss.

    T. G. Hicks (editor), Handbook of Civil Engineering Calculations, 2nd ed., section 1, pp. 1.73-1.75, figures 50 and
    51 (read in the source): moment about the lower joint 664.5 ft kip moving from right to left, 643.5 from left to
    right (printed 6435, converted there to 872.59 kN m, which is 643.5), and 33.2 kip of compression in the chord.
    """

    def test_moment(self) -> None:
        """The larger one comes from the right: the heavy axle over the second joint, the light one before it."""
        largest, least = extremes(MOMENT, [PAIR])
        assert largest.value == rational(6645, 10)
        assert largest.stand == Stand(
            "pair", "backward", exact(46), (exact(46), exact(60)), (exact(14),), at_limit=False
        )
        assert (least.value, least.stand) == (0, None)

    def test_direction_of_travel(self) -> None:
        """From left to right it is less."""
        forward, backward = courses(MOMENT.positions, PAIR)
        for course, ordinates, printed in (
            (forward, MOMENT.ordinates, 643.5),
            (backward, MOMENT.ordinates[::-1], 664.5),
        ):
            line = LoadedLine(course.way, ordinates_of(ordinates), 1)
            assert Passage(course, line, line, PAIR).near_best() == pytest.approx(printed, abs=1e-9)

    def test_chord(self) -> None:
        """-33.2 kip, exactly -33.225."""
        largest, least = extremes(TOP_CHORD, [PAIR])
        assert (largest.value, largest.stand) == (0, None)
        assert least.value == rational(-33225, 1000)
        assert rounded(least.value, 1) == rounded(exact(-33.2), 1)
        assert least.stand
        assert (least.stand.direction, least.stand.lead_axle_at) == ("backward", 46)

    def test_joint_loads(self) -> None:
        """Those of the published hand check: 24 kip and 16/30 of 6 on one joint, the rest on the next."""
        case = CASES["hicks_deck_warren_leftward"]
        _, least = extremes(TOP_CHORD, [PAIR])
        chain = Chain("deck", ("T0", "T1", "T2", "T3", "T4"))
        assert placed(least, TOP_CHORD.positions, chain, PAIR) == case.loads.loads
        assert case.expected["T1-T2"] == least.value


class TestCooperOverATruss:
    """E80 on a six-panel Pratt truss of 120 ft, 25 ft deep, per rail, in both directions.

    The train's published simple-span moments are in test_publishedtrains; these forces were found from them by a
    separate program that searched positions in floats (recomputed, not published).
    """

    train = replace(PUBLISHED["Cooper E80"].trains[0], share=rational(1, 2))
    diagonal = "sqrt(41)/5"

    @pytest.mark.parametrize(
        ("ordinates", "largest", "least"),
        [
            # L2-L3: moment about U2 over the depth; U2-U3: about L3
            ([0, "8/15", "16/15", "4/5", "8/15", "4/15", 0], "336.4", "0.0"),
            ([0, "-2/5", "-4/5", "-6/5", "-4/5", "-2/5", 0], "0.0", "-367.7"),
            # U1-L2 and U2-L3: shear of the panel; L0-U1: reaction less what stands on L0
            ([0, "-{d}/6", "4*{d}/6", "3*{d}/6", "2*{d}/6", "{d}/6", 0], "227.5", "-17.1"),
            ([0, "-{d}/6", "-2*{d}/6", "3*{d}/6", "2*{d}/6", "{d}/6", 0], "130.1", "-64.4"),
            ([0, "-5*{d}/6", "-4*{d}/6", "-3*{d}/6", "-2*{d}/6", "-{d}/6", 0], "0.0", "-344.4"),
        ],
    )
    def test_forces(self, ordinates: list[object], largest: str, least: str) -> None:
        """To the digits of the separate program; the loads as placed give them again."""
        texts = [value.format(d=self.diagonal) if isinstance(value, str) else value for value in ordinates]
        line = line_of([0, 20, 40, 60, 80, 100, 120], texts)
        found = extremes(line, [self.train])
        assert [str(rounded(extreme.value, 1)) for extreme in found] == [largest, least]
        for extreme in found:
            total = sum(
                (load * ordinate for load, ordinate in zip(self.all_loads(line, extreme), line.ordinates, strict=True)),
                ZERO,
            )
            assert total == extreme.value

    def all_loads(self, line: SimpleNamespace, extreme: Extreme) -> list[Exact]:
        """Return the load of every joint."""
        loads = loads_of(line, extreme, self.train)
        return [loads.get(joint, ZERO) for joint in chain_for(line).joints]


# --- rules ------------------------------------------------------------------------------------------------

TRIANGLE = line_of([0, 10, 20], [0, 5, 0])
MIXED = line_of([0, 10, 20, 30], [0, -2, 3, 0])


def largest_of(line: SimpleNamespace, train: Train) -> Extreme:
    """Return the largest effect."""
    return extremes(line, [train])[0]


def test_nothing_adverse() -> None:
    """Value zero and no stand, in both senses for a line of zeros; no position of a train that only helps."""
    for extreme in extremes(line_of([0, 10], [0, 0]), [PAIR]):
        assert (extreme.value, extreme.stand, extreme.patches, extreme.train) == (0, None, (), "pair")
        assert extreme.parts == (("axles", ZERO),)
    _, least = extremes(TRIANGLE, [Train("t", (1,), lane=2, follow=(1, 1), beside=(1, 1))])
    assert (least.value, least.stand) == (0, None)
    assert [name for name, _ in least.parts] == ["axles", "lane", "follow", "beside"]


def test_helping_axles_stay_or_are_left_out() -> None:
    """Between deep flanks only one axle can stand well: then the others help, or are left out and shown as such."""
    flanks = line_of([0, 10, 11, 12, 30], [-9, -9, 1, -9, -9])
    stay, omit = Train("t", (2, 30, 2), (1, 1)), Train("t", (2, 30, 2), (1, 1), omit=True)
    assert largest_of(flanks, stay).stand is None
    omitted = largest_of(flanks, omit)
    assert omitted.value == 30
    assert omitted.stand
    assert omitted.stand.axles_at == (None, exact(11), None)
    assert omitted.stand.lead_axle_at == 10
    assert loads_of(flanks, omitted, omit) == {"L2": exact(30)}
    shallow = line_of([0, 10, 11, 12, 30], [0, -1, 1, -1, 0])
    kept = largest_of(shallow, stay)
    assert kept.value == 30 - 2 - 2
    assert kept.stand
    assert kept.stand.axles_at == (exact(10), exact(11), exact(12))


def test_no_adverse_position_but_lane_load() -> None:
    """Wherever the axles stand they help more than they harm: only the lane load is left, on its length."""
    flanks = line_of([0, 10, 11, 12, 30], [-9, -9, 1, -9, -9])
    train = Train("t", (5, 1, 5), (1, 1), lane=2)
    largest = largest_of(flanks, train)
    assert largest.stand is None
    assert dict(largest.parts) == {"axles": ZERO, "lane": rational(2, 10)}
    assert largest.patches == ((rational(109, 10), rational(111, 10), exact(2)),)
    assert sum(loads_of(flanks, largest, train).values(), ZERO) == rational(4, 10)


def test_impact_on_axles_only_and_share_on_everything() -> None:
    """1.33 on axles, 1 on lane, following and accompanying load; then half of all."""
    loaded = largest_of(TRIANGLE, Train("t", (40,), follow=(2, 1), beside=(1, 1)))
    heavier = largest_of(TRIANGLE, Train("t", (40,), follow=(2, 1), beside=(1, 1), impact="0.5"))
    assert loaded.stand == heavier.stand
    assert dict(heavier.parts) == {**dict(loaded.parts), "axles": dict(loaded.parts)["axles"] * rational(3, 2)}
    fixed = Train("t", (10,), lane=1)
    whole, loaded = largest_of(TRIANGLE, fixed), largest_of(TRIANGLE, replace(fixed, impact=rational(33, 100)))
    assert dict(whole.parts) == {"axles": exact(50), "lane": exact(50)}
    assert dict(loaded.parts) == {"axles": rational(665, 10), "lane": exact(50)}
    half = largest_of(TRIANGLE, replace(fixed, impact=rational(33, 100), share=rational(1, 2)))
    assert dict(half.parts) == {"axles": rational(3325, 100), "lane": exact(25)}
    assert half.patches == ((exact(0), exact(20), rational(1, 2)),)
    assert largest_of(TRIANGLE, replace(fixed, share=0)).value == 0


def test_lane_load_on_adverse_lengths() -> None:
    """Cut at the zero point, for each sense on its own; a line that touches zero is not cut."""
    train = Train("t", (0,), lane=1)
    largest, least = extremes(MIXED, [train])
    assert largest.patches == ((exact(14), exact(30), exact(1)),)
    assert least.patches == ((exact(0), exact(14), exact(1)),)
    assert (largest.value, least.value) == (24, -14)
    assert (largest.stand, least.stand) == (None, None)
    touching = line_of([0, 1, 2, 3, 4, 5], [0, 1, 0, 1, -1, 1])
    assert [patch[:2] for patch in largest_of(touching, train).patches] == [
        (exact(0), rational(7, 2)),
        (rational(9, 2), exact(5)),
    ]


def test_axles_off_the_chain_count_nothing() -> None:
    """A long train over a short line: only what fits; the leading axle's position lies beyond the chain."""
    largest = largest_of(line_of([0, 10], [1, 1]), Train("t", (1, 1, 7), (100, 100)))
    assert largest.value == 7
    assert largest.stand == Stand(
        "t", "backward", exact(-200), (None, None, exact(0)), (exact(100), exact(100)), at_limit=False
    )


def test_the_ends_belong_to_the_chain() -> None:
    """A reaction: the axle over the support counts whole."""
    line = line_of([0, 10, 20], [1, "1/2", 0])
    largest = largest_of(line, Train("t", (4, 2), (5,)))
    assert largest.value == exact(4) + 2 * rational(3, 4)
    assert largest.stand
    assert (largest.stand.direction, largest.stand.lead_axle_at) == ("backward", 0)


def test_an_axle_just_off_the_end() -> None:
    """Where it would harm the effect on the end itself, the value is approached: said, and it counts nothing."""
    line = line_of([0, 4, 8], [-5, 1, 3])
    train = Train("t", (1, 2, 1), (8, 8))
    largest = largest_of(line, train)
    # the heavy axle over the far end, a light one 8 away over the end where the ordinate jumps to -5
    assert largest.value == 6
    assert largest.stand == Stand(
        "t", "backward", exact(0), (None, exact(8), None), (exact(8), exact(8)), at_limit=True
    )
    assert loads_of(line, largest, train) == {"L2": exact(2)}
    other = replace(train, spacing=((exact(8), exact(9)), (exact(8), exact(8))))
    attained = largest_of(line, other)
    assert attained.value == 6
    assert attained.stand == Stand(
        "t", "backward", exact(-1), (None, exact(8), None), (exact(9), exact(8)), at_limit=False
    )


def test_of_equal_positions_the_smallest_forward_first() -> None:
    """A plateau, a symmetric line, a single axle."""
    plateau = line_of([0, 10, 20, 30], [0, 2, 2, 0])
    single = Train("t", (3,))
    found = largest_of(plateau, single).stand
    assert found
    assert (found.direction, found.lead_axle_at) == ("forward", 10)
    pair = Train("t", (3, 3), (4,))
    found = largest_of(plateau, pair).stand
    assert found
    assert (found.direction, found.lead_axle_at) == ("backward", 10)
    found = largest_of(line_of([0, 10, 20], [1, 1, 1]), Train("t", (3, 3), (20,))).stand
    assert found
    assert (found.direction, found.lead_axle_at) == ("backward", 0)


def test_of_equal_trains_the_first() -> None:
    """A load model may hold trains of equal effect; else the larger governs, in either sense on its own."""
    light, heavy, same = Train("light", (1,)), Train("heavy", (2,)), Train("same", (2,))
    assert [extreme.train for extreme in extremes(MIXED, [light, heavy, same])] == ["heavy", "heavy"]
    assert [extreme.train for extreme in extremes(MIXED, [same, light, heavy])] == ["same", "same"]
    spread, near = Train("spread", (2, 2), (10,)), Train("near", (3,))
    assert [extreme.train for extreme in extremes(MIXED, [spread, near])] == ["near", "near"]
    with pytest.raises(InputError, match="no train is given"):
        extremes(MIXED, [])


def test_following_load_is_whole_and_unlimited() -> None:
    """It helps where the line is of the other sign; light axles leave the chain to the load alone."""
    passed = largest_of(TRIANGLE, Train("t", (10,), follow=(2, 3)))
    assert passed.value == 150
    assert passed.stand
    assert (passed.stand.lead_axle_at, passed.stand.axles_at) == (-2, (None,))
    mixed = largest_of(MIXED, Train("t", (100,), follow=(1, 1)))
    assert mixed.stand
    assert dict(mixed.parts)["follow"] == mixed.value - dict(mixed.parts)["axles"]
    assert (mixed.stand.direction, mixed.stand.lead_axle_at) == ("backward", 20)


@pytest.mark.parametrize("axle", [13, 14, 20, 27])
def test_a_level_summit(axle: int) -> None:
    """Between two vertices the effect with a following load is a parabola; its summit by hand.

    Beyond the vertex the slope is 3 (20 - (x - 2)) / 2 - axle / 2, zero at 22 - axle / 3; from the other end the same.
    """
    largest = largest_of(TRIANGLE, Train("t", (axle,), follow=(2, 3)))
    lead = rational(axle, 3) - 2
    assert largest.stand == Stand("t", "backward", lead, (lead,), (), at_limit=False)
    assert dict(largest.parts) == {"axles": axle * lead / 2, "follow": 3 * (50 - (lead + 2) ** 2 / 4)}
    assert largest.value == 150 + rational(axle * axle, 12) - axle
    assert largest.patches == ((lead + 2, exact(20), exact(3)),)


def test_a_level_summit_of_one_group() -> None:
    """Two triangles far apart: the leading axle over one vertex, the other and its load level on the other triangle."""
    line = line_of([0, 10, 20, 100, 110, 120], [0, 5, 0, 0, 5, 0])
    largest = largest_of(line, Train("t", (100, 20), ((60, 120),), follow=(2, 3)))
    assert largest.value == 500 + rational(490, 3)
    second = 120 - rational(46, 3)
    assert largest.stand == Stand("t", "backward", exact(10), (exact(10), second), (second - 10,), at_limit=False)


def test_a_summit_over_a_zero_point() -> None:
    """The last axle's load ends where the line changes its sign: level there, through a variable spacing too.

    Both axles beyond the chain, the following load full on 0 to 17/3 and the accompanying one on all adverse lengths.
    """
    line = line_of([0, 4, "22/3"], [2, 2, -2])
    for spacing in ((5, 5), (5, 6)):
        largest = largest_of(line, Train("t", (24, 39), (spacing,), follow=(5, 8), beside=(3, 7)))
        assert largest.value == 145
        assert largest.stand
        assert largest.stand.axles_at == (None, None)
        assert largest.stand.lead_axle_at == 5 + 5 + rational(17, 3)


def test_load_beside_the_group_on_adverse_lengths() -> None:
    """Before and behind, cut at the zero point; it may stand without the group."""
    train = Train("t", (1000, 1000), (2,), beside=(1, 1))
    largest = largest_of(MIXED, train)
    assert largest.patches == ((exact(14), exact(19), exact(1)), (exact(23), exact(30), exact(1)))
    flanks = line_of([0, 10, 11, 12, 30], [-9, -9, 1, -9, -9])
    alone = largest_of(flanks, Train("t", (5, 1, 5), (1, 1), beside=(1, 3)))
    assert alone.value == rational(3, 10)
    assert alone.stand == Stand("t", "backward", exact(-3), (None, None, None), (exact(1), exact(1)), at_limit=False)
    assert alone.patches == ((rational(109, 10), rational(111, 10), exact(3)),)


def test_variable_spacing_takes_what_is_worst() -> None:
    """Both heavy axles over a vertex each, or as near as the limits let them."""
    line = line_of([0, 10, 20, 30, 40, 50], [0, 4, 0, 0, 4, 0])
    train = Train("t", (1, 4, 4), (2, (20, 40)))
    largest = largest_of(line, train)
    assert largest.value == 4 * 4 * 2 + rational(16, 5)
    assert largest.stand
    assert largest.stand.spacing == (2, 30)
    assert (
        largest_of(line, replace(train, spacing=((exact(2), exact(2)), (exact(20), exact(24))))).stand.spacing[1] == 24
    )
    two = Train("t", (4, 1, 4), ((10, 20), (10, 14)))
    both = largest_of(line, two)
    assert both.value == 32
    assert both.stand
    assert sum(both.stand.spacing, ZERO) == 30


def test_smallest_spacing_of_equal_ones() -> None:
    """An axle that finds nothing anywhere stays as near as it may."""
    train = Train("t", (5, 1), ((30, 50),))
    largest = largest_of(TRIANGLE, train)
    assert largest.stand
    assert largest.stand.spacing == (30,)


# --- exactness --------------------------------------------------------------------------------------------


def test_a_difference_that_no_float_sees() -> None:
    """Two vertices that differ in the thirtieth digit: the exact comparison decides, either way round."""
    more = 1 + Fraction(1, 10**30)
    for ordinates, at in (([0, 1, 0, more, 0], 30), ([0, more, 0, 1, 0], 10)):
        largest = largest_of(line_of([0, 10, 20, 30, 40], ordinates), Train("t", (3,)))
        assert largest.stand
        assert largest.stand.lead_axle_at == at
        assert largest.value == 3 * exact(more)


def test_joints_nearer_than_floats_can_tell() -> None:
    """A chain with a panel of 1e-20: its joints are one point as floats, and yet two."""
    hair = Fraction(1, 10**20)
    line = line_of([0, 10, 10 + hair, 20], [0, 1, 2, 0])
    largest = largest_of(line, Train("t", (3, 2), (hair,)))
    assert largest.stand
    assert (largest.stand.direction, largest.stand.lead_axle_at) == ("backward", exact(10 + hair))
    assert largest.value == 3 * 2 + 2 * exact(2 * (10 - 2 * hair) / (10 - hair))
    for train in (Train("t", (3,), beside=(1, 1)), Train("t", (3,), follow=(1, 1), omit=True)):
        found = largest_of(line, train)
        assert found.value >= 6
        assert loads_of(line, found, train)


def test_surds_and_nested_roots() -> None:
    """Ordinates and positions of any kind; the values stay exact."""
    root, nested = "sqrt(3)", "sqrt(5 + sqrt(5))"
    line = line_of([0, root, f"2*{root}", f"3*{root}"], [0, f"-{nested}/3", nested, 0])
    train = Train("t", (2, 3), (1,), impact="0.33", lane="1/7")
    largest, least = extremes(line, [train])
    lane = rational(1, 7) * parse(nested) * parse(root) * (rational(3, 4) + 1) / 2
    assert largest.value == parse("1.33") * parse(nested) * (3 + 2 * (1 - 1 / parse(root))) + lane
    assert least.value < 0
    for extreme in (largest, least):
        assert loads_of(line, extreme, train)


def test_symbols_are_refused() -> None:
    """An ordinate with a symbol has no sign."""
    line = SimpleNamespace(positions=(ZERO, exact(1)), ordinates=(symbol("h"), ZERO))
    with pytest.raises(InexactNumberError):
        extremes(line, [PAIR])


def test_sizes_beyond_floats_are_refused() -> None:
    """Screening needs a product that a float can hold."""
    line = line_of([0, 10, 20], [0, Fraction(10) ** 200, 0])
    with pytest.raises(InexactNumberError, match="train 't': loads, lengths and ordinates are together too large"):
        extremes(line, [Train("t", (Fraction(10) ** 200,))])


# --- joint loads ------------------------------------------------------------------------------------------


class TestPlaced:
    """Every load goes to the panel points by statics, and gives the force again."""

    line = line_of([0, 10, 16, 30], [0, "-2*sqrt(2)", "3*sqrt(2)", "sqrt(2)"])
    train = Train("t", (5, 9), (4,), impact="1/4", share="0.6", lane=2, follow=(1, 3), beside=(2, 1))

    def test_statically_equivalent(self) -> None:
        """Sum and moment of the joint loads are those of axles and uniform loads where they stand."""
        for extreme in extremes(self.line, [self.train]):
            loads = loads_of(self.line, extreme, self.train)
            at = dict(zip(chain_for(self.line).joints, self.line.positions, strict=True))
            assert extreme.stand
            axles = [
                (axle * rational(5, 4) * rational(6, 10), place)
                for axle, place in zip(self.train.axles, extreme.stand.axles_at, strict=True)
                if place is not None
            ]
            uniform = [((b - a) * amount, (a + b) / 2) for a, b, amount in extreme.patches]
            assert sum(loads.values(), ZERO) == sum((load for load, _ in axles + uniform), ZERO)
            moment = sum((load * at[joint] for joint, load in loads.items()), ZERO)
            assert moment == sum((load * place for load, place in axles + uniform), ZERO)

    def test_an_axle_between_two_joints(self) -> None:
        """Shared as a simple beam does: 6 over 10 at 4 from the left."""
        line = line_of([0, 10], [1, 1])
        train = Train("t", (6, 0), (4,))
        extreme = Extreme(
            exact(6), Stand("t", "forward", exact(4), (exact(4), None), (exact(4),), at_limit=False), (), (), "t",
            line.ordinates,
        )  # fmt: skip
        assert placed(extreme, line.positions, Chain("c", ("A", "B")), train) == (
            JointLoad("A", ZERO, rational(-36, 10)),
            JointLoad("B", ZERO, rational(-24, 10)),
        )

    def test_a_lost_axle_is_noticed(self) -> None:
        """Negative control: the loads no longer give the force, and no loads come back."""
        largest, _ = extremes(self.line, [self.train])
        assert largest.stand
        for axle in range(2):
            if largest.stand.axles_at[axle] is None:
                continue
            left = tuple(None if index == axle else at for index, at in enumerate(largest.stand.axles_at))
            broken = replace(largest, stand=replace(largest.stand, axles_at=left))
            with pytest.raises(TravelError, match="do not give the force they were found for"):
                loads_of(self.line, broken, self.train)
        shorter = replace(largest, patches=largest.patches[1:])
        with pytest.raises(TravelError):
            loads_of(self.line, shorter, self.train)
        outside = replace(largest, stand=replace(largest.stand, axles_at=(exact(-1), exact(3))))
        with pytest.raises(TravelError, match="stands off the chain"):
            loads_of(self.line, outside, self.train)

    def test_another_train_is_refused(self) -> None:
        """By its name; one of the same name and other loads by the force."""
        largest, _ = extremes(self.line, [self.train])
        with pytest.raises(InputError, match="is that of train 't' over 4 joints"):
            loads_of(self.line, largest, replace(self.train, name="other"))
        with pytest.raises(InputError, match="over 4 joints"):
            placed(largest, self.line.positions[:3], Chain("c", ("A", "B", "C")), self.train)
        with pytest.raises(TravelError):
            loads_of(self.line, largest, replace(self.train, axles=(5, 10)))

    def test_parts_that_do_not_add_up_are_noticed(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Negative control of the sum inside: the loads as placed against the effect found."""
        monkeypatch.setattr(travel, "_axle_effect", lambda *_: exact(1))
        with pytest.raises(TravelError, match="do not add up to the effect found"):
            extremes(self.line, [self.train])


# --- a search in floats -----------------------------------------------------------------------------------


class Search:
    """Axles and uniform loads over a line in floats: numpy's interpolation, areas summed over fine pieces."""

    def __init__(self, line: SimpleNamespace, train: Train, sense: int) -> None:
        self.positions = np.array([float(at) for at in line.positions])
        self.ordinates = sense * np.array([float(value) for value in line.ordinates])
        self.train = train
        knots, values = [self.positions[0]], [self.ordinates[0]]
        for (a, b), (left, right) in zip(
            itertools.pairwise(self.positions), itertools.pairwise(self.ordinates), strict=True
        ):
            if left * right < 0:
                knots.append(a + (b - a) * left / (left - right))
                values.append(0.0)
            knots.append(b)
            values.append(right)
        self.knots, self.values = np.array(knots), np.array(values)

    def area(self, until: np.ndarray, *, adverse: bool) -> np.ndarray:
        """Return the area up to each location."""
        values = np.maximum(self.values, 0) if adverse else self.values
        sums = np.concatenate([[0], np.cumsum((values[1:] + values[:-1]) / 2 * np.diff(self.knots))])
        at = np.clip(until, self.knots[0], self.knots[-1])
        piece = np.clip(np.searchsorted(self.knots, at, side="right") - 1, 0, len(self.knots) - 2)
        inward = at - self.knots[piece]
        slope = ((values[1:] - values[:-1]) / np.diff(self.knots))[piece]
        return sums[piece] + inward * (values[piece] + slope * inward / 2)

    def effect(self, lead: np.ndarray, spacing: Sequence[float], direction: str) -> np.ndarray:
        """Return share times axles, following and accompanying load, for each position of the leading axle."""
        train, back = self.train, -1 if direction == "forward" else 1
        total, at = np.zeros_like(lead), lead.copy()
        for index, axle in enumerate(train.axles):
            if index:
                at = at + back * spacing[index - 1]
            ordinate = np.interp(at, self.positions, self.ordinates, left=0.0, right=0.0)
            if train.omit:
                ordinate = np.maximum(ordinate, 0)
            total = total + float(axle) * (1 + float(train.impact)) * ordinate
        end = np.full_like(lead, self.knots[-1])
        for pair, adverse, front in ((train.follow, False, None), (train.beside, True, lead)):
            if pair is None:
                continue
            distance, amount = map(float, pair)
            total = total + amount * self.on_the_far_side(at + back * distance, -back, end, adverse=adverse)
            if front is not None:
                total = total + amount * self.on_the_far_side(front - back * distance, back, end, adverse=adverse)
        return float(train.share) * total

    def on_the_far_side(self, of: np.ndarray, forward: int, end: np.ndarray, *, adverse: bool) -> np.ndarray:
        """Return the area behind a location: before it along the chain when travelling forward."""
        until = self.area(of, adverse=adverse)
        return until if forward > 0 else self.area(end, adverse=adverse) - until

    def spacings(self, count: int) -> list[tuple[float, ...]]:
        """Return spacings to try: a grid of the variable ones, and those with two axles over joints."""
        choices: list[list[float]] = []
        limits = [(float(low), float(high)) for low, high in self.train.spacing]
        for gap, (low, high) in enumerate(limits):
            tried = {low, high}
            if low < high:
                tried |= set(np.linspace(low, high, count))
                for first, last in itertools.product(range(gap + 1), range(gap + 1, len(limits) + 1)):
                    others = sum(limits[index][0] for index in range(first, last) if index != gap)
                    for a, b in itertools.permutations(self.positions, 2):
                        if low <= a - b - others <= high:
                            tried.add(a - b - others)
            choices.append(sorted(tried))
        return list(itertools.product(*choices))

    def best(self, positions: int) -> float:
        """Return the largest effect of a search over so many positions, and over every vertex."""
        variable = sum(low != high for low, high in self.train.spacing)
        reach = sum(float(high) for _, high in self.train.spacing) + 8
        best = 0.0
        tried = self.spacings(5 if variable < 2 else 2)
        lead = np.linspace(-reach, self.positions[-1] + reach, max(positions // (2 * len(tried)), 40))
        for spacing, direction in itertools.product(tried, ("forward", "backward")):
            behind = np.concatenate([[0], np.cumsum(spacing)]) * (1 if direction == "forward" else -1)
            vertices = (self.positions[:, None] + behind[None, :]).ravel()
            at = np.concatenate([lead, vertices, vertices - 1e-12, vertices + 1e-12])
            best = max(best, self.effect(at, spacing, direction).max())
        return best


small = st.integers(-6, 6)
length = st.fractions(min_value=Fraction(1, 2), max_value=12, max_denominator=3)


@st.composite
def lines(draw: st.DrawFn) -> SimpleNamespace:
    """Return a line of up to six panels, often zero at its ends, sometimes with a surd in it."""
    panels = draw(st.lists(length, min_size=1, max_size=6))
    ordinates = draw(st.lists(small, min_size=len(panels) + 1, max_size=len(panels) + 1))
    if draw(st.booleans()):
        ordinates[0] = ordinates[-1] = 0
    root = parse(draw(st.sampled_from(["1", "1", "sqrt(3)", "sqrt(5 + sqrt(5))"])))
    positions = [Fraction(0), *itertools.accumulate(panels)]
    return SimpleNamespace(
        positions=tuple(exact(at) for at in positions), ordinates=tuple(root * value for value in ordinates)
    )


@st.composite
def trains(draw: st.DrawFn, *, uniform: bool, variable: int) -> Train:
    """Return a train of up to five axles."""
    axles = draw(st.lists(st.integers(0, 40), min_size=1, max_size=5))
    spacing: list[Any] = [draw(length) for _ in axles[1:]]
    for index in draw(st.lists(st.sampled_from(range(len(spacing))), max_size=variable)) if spacing else []:
        if not isinstance(spacing[index], tuple):
            spacing[index] = (spacing[index], spacing[index] + draw(length))
    loads = st.tuples(st.integers(0, 5), st.integers(0, 8))
    return Train(
        "t",
        tuple(axles),
        tuple(spacing),
        impact=draw(st.sampled_from([0, "0.33"])),
        lane=draw(st.sampled_from([0, 2])),
        share=draw(st.sampled_from([1, "0.6"])),
        omit=draw(st.booleans()),
        follow=draw(st.none() | loads) if uniform else None,
        beside=draw(st.none() | loads) if uniform else None,
    )


def moving_part(extreme: Extreme) -> float:
    """Return the size of what the train's own loads do, without its lane load."""
    return abs(float(sum((value for name, value in extreme.parts if name != "lane"), ZERO)))


def check_stand(line: SimpleNamespace, train: Train, extreme: Extreme, search: Search) -> None:
    """Assert that the stand keeps the rules and that its effect, by the search, is the extreme's: reached, no more."""
    assert extreme.value == sum((value for _, value in extreme.parts), ZERO)
    loads_of(line, extreme, train)
    if extreme.stand is None:
        assert moving_part(extreme) == 0
        return
    stand = extreme.stand
    assert all(low <= taken <= high for taken, (low, high) in zip(stand.spacing, train.spacing, strict=True))
    back = -1 if stand.direction == "forward" else 1
    at = [stand.lead_axle_at]
    for taken in stand.spacing:
        at.append(at[-1] + back * taken)
    assert all(counted in (None, place) for counted, place in zip(stand.axles_at, at, strict=True))
    if not stand.at_limit:
        spacing = [float(taken) for taken in stand.spacing]
        on_chain = [ZERO <= place <= line.positions[-1] for place in at]
        if train.omit:
            assert not any(counted is not None and not on for counted, on in zip(stand.axles_at, on_chain, strict=True))
        else:
            assert [counted is not None for counted in stand.axles_at] == on_chain
        nudged = float(stand.lead_axle_at) + np.array([-1e-13, 0.0, 1e-13])
        reached = search.effect(nudged, spacing, stand.direction)
        assert np.abs(reached - moving_part(extreme)).min() <= 1e-9 * (1 + abs(moving_part(extreme)))


class TestAgainstTheSearch:
    """Never below ten thousand positions, and reached by the stand that is named."""

    @settings(max_examples=120)
    @given(lines(), trains(uniform=False, variable=0))
    def test_rigid_trains(self, line: SimpleNamespace, train: Train) -> None:
        """The search visits every vertex: the same to 1e-9."""
        for sense, extreme in zip((1, -1), extremes(line, [train]), strict=True):
            search = Search(line, train, sense)
            found = search.best(10_000)
            assert moving_part(extreme) == pytest.approx(found, rel=1e-9, abs=1e-8)
            check_stand(line, train, extreme, search)

    @settings(max_examples=60)
    @given(lines(), trains(uniform=False, variable=1))
    def test_one_variable_spacing(self, line: SimpleNamespace, train: Train) -> None:
        """The search has the spacings with two axles over joints as well: the same to 1e-9."""
        for sense, extreme in zip((1, -1), extremes(line, [train]), strict=True):
            search = Search(line, train, sense)
            found = search.best(10_000)
            assert moving_part(extreme) == pytest.approx(found, rel=1e-9, abs=1e-8)
            check_stand(line, train, extreme, search)

    @settings(max_examples=60)
    @given(lines(), trains(uniform=True, variable=4))
    def test_everything_at_once(self, line: SimpleNamespace, train: Train) -> None:
        """Variable spacings and uniform loads: never below the search, and the stand has the value named."""
        for sense, extreme in zip((1, -1), extremes(line, [train]), strict=True):
            search = Search(line, train, sense)
            found = search.best(10_000)
            assert moving_part(extreme) >= found - 1e-9 * (1 + found)
            check_stand(line, train, extreme, search)

    @settings(max_examples=60)
    @given(lines(), trains(uniform=True, variable=0), st.booleans())
    def test_every_summit_is_a_critical_position(self, line: SimpleNamespace, train: Train, is_forward: bool) -> None:
        """Every summit of the effect over a fine grid, not only the highest, has a critical position beside it."""
        crossing = travel._crossing(line.positions, ordinates_of(line.ordinates), train)
        way = 0 if is_forward else 1
        train = replace(train, share=1)
        for sense in (1, -1):
            passage = Passage(
                crossing.courses[way],
                LoadedLine(*crossing.lines[way], sense),
                LoadedLine(*crossing.fine[way], sense),
                train,
            )
            (group,), (places,) = passage.course.groups, passage.course.places
            summits = passage._level_summits(group, places, passage._effects(group, places), -np.inf)
            known = np.array([float(at) for at in (*(spot.at for spot in places.spots), *summits)])
            search = Search(line, train, sense)
            at = np.linspace(known.min() - 1, known.max() + 1, 2_000)
            lead = at if is_forward else search.positions[-1] - at
            found = search.effect(lead, [float(low) for low, _ in train.spacing], ("forward", "backward")[way])
            inner = found[1:-1]
            is_summit = (inner > found[:-2] + 1e-9) & (inner > found[2:] + 1e-9)
            for summit in at[1:-1][is_summit]:
                assert np.abs(known - summit).min() <= 2 * (at[1] - at[0])

    def test_the_search_sees_a_lost_axle(self) -> None:
        """Negative control: against a train with one axle less it disagrees."""
        whole, short = Train("t", (6, 24, 9), (5, 5)), Train("t", (6, 24), (5,))
        largest, _ = extremes(TRIANGLE, [short])
        assert Search(TRIANGLE, whole, 1).best(10_000) > moving_part(largest) + 1


# --- a search in fractions --------------------------------------------------------------------------------


def ordinate(line: SimpleNamespace, at: Fraction) -> Fraction:
    """Return the ordinate of a rational line."""
    positions = [value.as_fraction() for value in line.positions]
    values = [value.as_fraction() for value in line.ordinates]
    for (a, b), (left, right) in zip(itertools.pairwise(positions), itertools.pairwise(values), strict=True):
        if a <= at <= b:
            return left + (right - left) * (at - a) / (b - a)
    return Fraction(0)


def first_stand(line: SimpleNamespace, train: Train, sense: int) -> tuple[Fraction, Fraction, str] | None:
    """Return the largest effect of all critical positions, the smallest of those that have it, forward first."""
    behind = [Fraction(0), *itertools.accumulate(low.as_fraction() for low, _ in train.spacing)]
    knots = [value.as_fraction() for value in line.positions]
    found = []
    for order, back in ((0, -1), (1, 1)):
        for knot, distance in itertools.product(knots, behind):
            lead = knot - back * distance
            effects = [sense * ordinate(line, lead + back * each) for each in behind]
            if train.omit:
                effects = [max(effect, Fraction(0)) for effect in effects]
            effect = sum(axle.as_fraction() * each for axle, each in zip(train.axles, effects, strict=True))
            found.append((-effect, lead, order))
    effect, lead, order = min(found)
    return (-effect, lead, ("forward", "backward")[order]) if effect < 0 else None


rational_lines = lines().filter(lambda line: all(value.is_rational for value in line.ordinates))


@settings(max_examples=150)
@given(rational_lines, trains(uniform=False, variable=0), st.booleans())
def test_of_equal_maxima_the_first_by_the_rules(line: SimpleNamespace, train: Train, ends_count: bool) -> None:
    """Exactly, in fractions: value, position and direction; where an end jumps only the value may be larger."""
    if not ends_count:
        line.ordinates = (ZERO, *line.ordinates[1:-1], ZERO)
    for sense, extreme in zip((1, -1), extremes(line, [replace(train, share=1, impact=0)]), strict=True):
        expected = first_stand(line, train, sense)
        axles = abs(dict(extreme.parts)["axles"].as_fraction())
        if extreme.stand is not None and extreme.stand.at_limit:
            assert axles > (expected[0] if expected else 0)
        elif expected is None:
            assert (axles, extreme.stand) == (0, None)
        else:
            assert extreme.stand
            assert (axles, extreme.stand.lead_axle_at.as_fraction(), extreme.stand.direction) == expected


# --- groups -----------------------------------------------------------------------------------------------


def test_rigid_groups() -> None:
    """Parted at the variable spacings; ends of uniform load move with the group beside them."""
    train = Train("t", (1, 2, 3, 4), (5, (6, 9), 7), follow=(2, 1), beside=(3, 1))
    groups, gaps = rigid_groups(train)
    assert [group.axles for group in groups] == [(0, 1), (2, 3)]
    assert [group.offsets for group in groups] == [(0, 5), (0, 7)]
    assert gaps == ((exact(11), exact(14)),)
    assert groups[0].ends == (("before", exact(-3)),)
    assert groups[1].ends == (("behind", exact(10)), ("follow", exact(9)))


def test_many_variable_spacings() -> None:
    """As many as a train may have: found, and as good as the best of a search over their limits."""
    line = line_of([0, 6, 12, 18, 24, 30, 36], [0, 1, -1, 2, 1, -2, 0])
    train = Train("t", (1, 2, 3, 1, 2), ((2, 5), (3, 7), (2, 8), (1, 6)))
    for sense, extreme in zip((1, -1), extremes(line, [train]), strict=True):
        search = Search(line, train, sense)
        assert moving_part(extreme) >= search.best(10_000) - 1e-9
        check_stand(line, train, extreme, search)
