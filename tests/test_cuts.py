"""Cuts: the boundary of what is kept, and what each bar and load does in an equation."""

from __future__ import annotations

import itertools
import random
from typing import Any

import pytest
import replay
import trade_trusses as trade
from random_trusses import random_truss
from stated_truss import Stated

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import ZERO, rational
from trusscalc.exacttext import to_text
from trusscalc.statics.cuts import (
    GROUND,
    SUM_X,
    SUM_Y,
    About,
    Structure,
    about_joint,
    across,
    bar_lever,
    complement,
    cut_of,
    meeting_point,
    structure_of,
)

FINK = trade.fink()


def structure(stated: Stated) -> Structure:
    """Return a truss and its loads indexed for cutting."""
    return structure_of(stated.truss, stated.case)


def test_the_cut_is_the_boundary_of_what_is_kept() -> None:
    """All sets of joints of a roof truss: everything with exactly one end inside, once, members before links."""
    bars, indexed = replay.bars_of(FINK), structure(FINK)
    for size in range(1, len(FINK.joints) + 1):
        for kept in itertools.combinations(FINK.joints, size):
            cut = cut_of(indexed, reversed(kept))
            assert set(cut.bars) == bars.boundary(set(kept))
            assert list(cut.bars) == [name for name in indexed.bars if name in set(cut.bars)]
            assert cut.kept == kept
            assert cut.kind == {1: "joint", len(FINK.joints): "whole"}.get(size, "section")
            assert set(complement(indexed, cut)) == set(FINK.joints) - set(kept)


def test_small_bodies_of_large_trusses() -> None:
    """The short way round a small body gives the same order as the long one."""
    stated = trade.pratt(40)
    bars, indexed = replay.bars_of(stated), structure(stated)
    for kept in (["L20"], ["U20", "L20"], ["L0"], ["L40", "U39"]):
        cut = cut_of(indexed, kept)
        assert set(cut.bars) == bars.boundary(set(kept))
        assert list(cut.bars) == [name for name in indexed.bars if name in set(cut.bars)]


def test_cuts_that_are_none() -> None:
    """No joint, or one that is not there."""
    with pytest.raises(InputError, match="at least one joint"):
        cut_of(structure(FINK), [])
    with pytest.raises(UnknownNameError, match="there is no joint 'Z'"):
        cut_of(structure(FINK), ["A", "Z"])


def test_the_structure_holds_what_acts() -> None:
    """Bars at every joint; loads that are not zero; the ground apart from all joints."""
    stated = FINK.under({"C": ("0", "-10"), "D": ("0", "0"), "P": ("3", "0")})
    indexed = structure(stated)
    assert indexed.loads == {"C": (0, -10), "P": (3, 0)}
    assert set(indexed.bars_at["A"]) == {"A-D", "A-P", "A.x", "A.y"}
    assert set(indexed.bars_at["C"]) == {"D-C", "P-C", "D'-C", "P'-C"}
    assert GROUND not in indexed.joints
    assert [bar.name for bar in indexed.bars.values() if bar.is_link] == ["A.x", "A.y", "B.y"]


def equations(stated: Stated) -> list[tuple[About, dict[str, Any]]]:
    """Return centres and directions, ours and as the JSON has them."""
    sums: list[About] = [SUM_X, SUM_Y, *(about_joint(structure(stated), name) for name in stated.joints)]
    sums += [across(bar) for bar in structure(stated).bars.values()]
    found = []
    for about in sums:
        pair = [to_text(about.x), to_text(about.y)]
        key = "centre" if about.sum == "moment" else "direction"
        found.append((about, {"sum": about.sum, key: pair}))
    return found


@pytest.mark.parametrize("numbers", ["rational", "surd"])
def test_levers_against_the_independent_coefficients(numbers: Any) -> None:
    """What a pulled bar puts into any equation of any body: times N / L it is the coefficient of N."""
    stated = random_truss(random.Random(3), 6, numbers)
    indexed, bars = structure(stated), replay.bars_of(stated)
    for about, equation in equations(stated):
        for kept in ({"N0"}, {"N0", "N1", "N2"}, set(stated.joints)):
            for name in cut_of(indexed, kept).bars:
                bar = indexed.bars[name]
                lever = replay.value(to_text(bar_lever(indexed, bar, kept, about)))
                length = replay.mp.sqrt(replay.value(to_text(bar.length_squared)))
                assert replay.close(lever / length, bars.coefficient(name, kept, equation), 100)


def test_levers_of_loads() -> None:
    """A unit force along x or y at a place, moments anticlockwise positive."""
    about = About("moment", rational(3), rational(-2))
    assert about.axis_lever("y", rational(8), rational(7)) == 5
    assert about.axis_lever("x", rational(8), rational(7)) == -9
    assert about.lever(rational(8), rational(7), rational(2), rational(10)) == 5 * 10 - 9 * 2
    assert SUM_X.axis_lever("x", rational(8), rational(7)) == 1
    assert SUM_Y.axis_lever("x", rational(8), rational(7)) == 0


def test_a_sum_across_a_bar_drops_the_bar_and_its_parallels() -> None:
    """To the left of the bar or up, so that the direction reads the same from either end."""
    indexed = structure(FINK)
    rafter = indexed.bars["A-D"]
    about = across(rafter)
    assert (about.sum, about.x, about.y, about.along) == ("force", rational(-9, 2), 6, "A-D")
    assert about.axis == ""
    for name in ("A-D", "D-C"):
        assert bar_lever(indexed, indexed.bars[name], {"D"}, about) == ZERO
    tie = across(indexed.bars["A-P"])
    assert (tie.x, tie.axis) == (0, "y")
    assert tie.y > 0
    assert (SUM_X.axis, SUM_Y.axis, about_joint(indexed, "A").axis) == ("x", "y", "")
    reverse = structure(FINK.reversed_spelling())
    assert (across(reverse.bars["D-A"]).x, across(reverse.bars["D-A"]).y) == (about.x, about.y)


def test_meeting_points() -> None:
    """Of two lines, anywhere; parallels have none."""
    indexed = structure(FINK)
    assert meeting_point(indexed, indexed.bars["A-D"], indexed.bars["B-D'"]) == (12, 9)
    assert meeting_point(indexed, indexed.bars["D-P"], indexed.bars["D'-P'"]) == (12, rational(-7, 2))
    assert meeting_point(indexed, indexed.bars["A-P"], indexed.bars["P-P'"]) is None
    assert meeting_point(indexed, indexed.bars["A.x"], indexed.bars["A.y"]) == (0, 0)


def test_a_pin_is_two_parallel_edges_to_the_ground() -> None:
    """Both are cut with the joint."""
    cut = cut_of(structure(FINK), ["A"])
    assert cut.bars[-2:] == ("A.x", "A.y")
