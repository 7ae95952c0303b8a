"""Altered models as trusses and cases of their own, slips of typing, and what is tried."""

from __future__ import annotations

import math

import pytest
import trade_trusses as trade

from trusscalc.alterations import compared, neighbours, of_loads, of_places, of_supports, plain
from trusscalc.altered import Alteration, altered, in_turn, tabulated
from trusscalc.errors import InputError
from trusscalc.exact import rational
from trusscalc.fits import ALLOWED, APART, PRINTED, SHARP, Printed, fit, reactions_by_name
from trusscalc.loads import Combination, LoadCase
from trusscalc.mirrors import of_mirrors
from trusscalc.ratios import known_ratios
from trusscalc.slips import slips
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

ROOF = Truss(
    {"A": (0, 0), "B": (8, 0), "C": ("4", "5*sqrt(3)/2")},
    {"tie": ["A-B"], "rafters": ["A-C", "C-B"]},
    {"A": "pin", "B": {"reaction": [1, 3]}},
    tension_only=["A-B"],
    no_uplift=["B"],
)
SNOW = LoadCase("snow", {"C": (0, "-P")}, symbols={"P": "12*sqrt(2)"})


def alteration(**changes: object) -> Alteration:
    """Return an alteration of no particular kind."""
    return Alteration(explanation="unexplained", where=(), words="", **changes)  # type: ignore[arg-type]


class TestAltered:
    """A truss and loads of their own; what is not altered stays exact."""

    def test_nothing_altered(self) -> None:
        """The same truss at its values, the loads with their symbols at their values."""
        truss, case = altered(alteration(), ROOF, SNOW)
        assert truss is ROOF
        assert case.as_floats() == {"C": (0.0, pytest.approx(-12 * math.sqrt(2)))}
        assert case.loads[0].fy * case.loads[0].fy == rational(288)

    def test_loads_are_added(self) -> None:
        """On loaded joints and others."""
        _, case = altered(alteration(loads=(("C", 1.5, 2.0), ("B", 0.0, -3.0))), ROOF, SNOW)
        assert case.as_floats()["C"] == (1.5, pytest.approx(2 - 12 * math.sqrt(2)))
        assert case.as_floats()["B"] == (0.0, -3.0)

    def test_a_joint_elsewhere_leaves_the_others_exact(self) -> None:
        """And groups and supports as they were."""
        truss, _ = altered(alteration(places=(("B", 80.0, 0.25),)), ROOF, SNOW)
        assert (truss.joint("B").x, truss.joint("B").y) == (rational(80), rational(1, 4))
        assert truss.joint("C") == ROOF.joint("C")
        assert truss.members == ROOF.members
        assert truss.supports == ROOF.supports

    def test_supports_are_restated(self) -> None:
        """Pins, rollers, links; a joint without links is free."""
        changed = alteration(supports=(("A", ((0.0, 1.0),)), ("B", ()), ("C", ((1.0, 0.0), (0.0, 1.0)))))
        truss, _ = altered(changed, ROOF, SNOW)
        assert [(support.joint, support.kind) for support in truss.supports] == [("A", "roller"), ("C", "pin")]
        truss, _ = altered(alteration(supports=(("B", ((-2.0, 1.0),)),)), ROOF, SNOW)
        assert [(link.name, float(link.dx)) for link in truss.links] == [("A.x", 1), ("A.y", 0), ("B.r", -2)]

    def test_a_member_left_out(self) -> None:
        """Of an indeterminate truss; one that leaves a joint hanging is refused."""
        truss, _ = altered(alteration(without="A-C"), ROOF, SNOW)
        assert [member.name for member in truss.members] == ["A-B", "C-B"]
        posts = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "B-C"], {"A": "pin", "B": "pin"})
        with pytest.raises(InputError, match="C"):
            altered(alteration(without="B-C"), posts, LoadCase("x", {}))

    def test_joints_that_fall_together_are_refused(self) -> None:
        """As in any truss."""
        with pytest.raises(InputError, match="same place"):
            altered(alteration(places=(("B", 0.0, 0.0),)), ROOF, SNOW)

    def test_the_table(self) -> None:
        """Multiplied, rows exchanged."""
        table = {"A-B": 2.0, "A-C": 3.0, "C-B": -5.0}
        rows = (("A-B", "C-B"), ("C-B", "A-B"))
        assert tabulated(alteration(factor=-10.0, rows=rows), table) == {"A-B": 50.0, "A-C": -30.0, "C-B": -20.0}

    def test_two_in_turn(self) -> None:
        """Loads add up, the second support or place stands, factors multiply."""
        one = alteration(loads=(("C", 1.0, 0.0),), factor=2.0, strain=1)
        other = alteration(loads=(("C", 1.0, 0.0),), factor=-1.0, places=(("B", 9.0, 0.0),), strain=2)
        both = in_turn(one, other)
        assert altered(both, ROOF, SNOW)[1].as_floats()["C"][0] == 2.0
        assert altered(both, ROOF, SNOW)[0].joint("B").x == rational(9)
        assert (both.factor, both.strain) == (-2.0, 3)


class TestSlips:
    """What a number may have become."""

    @pytest.mark.parametrize(
        ("value", "slipped"),
        [
            (12, [-12, 21, 120, 1.2, 12000]),
            (3.25, [-3.25, 2.35, 3.52, 5.23, 325, 32.5, 0.325, 3.205]),
            (-0.75, [0.75, -0.57, -7.05, -75, -7.5, -0.075]),
            (10, [1, 100, -10]),
            (55 / 7, [75 / 7 - 55 / 7 + 6.0142857142857, 8.7571428571429, 7.5871428571429]),
        ],
    )
    def test_each_slip_is_there(self, value: float, slipped: list[float]) -> None:
        """Sign, digits, decimal point."""
        found = [number for number, _ in slips(value)]
        for wanted in slipped[1:] if value == 55 / 7 else slipped:
            assert any(number == pytest.approx(wanted, rel=1e-9) for number in found), wanted

    def test_none_is_the_number_itself_and_none_comes_twice(self) -> None:
        """Equal digits exchanged are no slip."""
        for value in (11.0, 2.5, -144.0, 0.001, 33.33):
            found = [number for number, _ in slips(value)]
            assert value not in found
            assert len(found) == len(set(found))

    def test_zero_has_none(self) -> None:
        """There is nothing to mistype."""
        assert slips(0.0) == []


class TestTried:
    """What is enumerated."""

    stated = trade.pratt(4)
    file = TrussFile(
        stated.truss,
        (stated.case, LoadCase("wind", {"U1": (9, 0)}), LoadCase("snow", {"U2": (0, -5)})),
        (Combination("all", {"load": 1, "wind": ["1.5", "0"], "snow": 2}, optional=["snow"]),),
    )

    def test_loads(self) -> None:
        """Each loaded joint left out, doubled, reversed, and moved to every other joint, neighbours first."""
        found = list(of_loads(compared(self.file, "load")))
        assert [one.where for one in found if one.explanation == "load-missing"] == [("L1",), ("L2",), ("L3",)]
        moved = {one.where: one for one in found if one.explanation == "load-moved"}
        assert len(moved) == 3 * 7
        assert moved["L1", "L2"].strain < moved["L1", "L4"].strain
        assert moved["L1", "L2"].loads == (("L1", 0.0, 80.0), ("L2", 0.0, -80.0))

    def test_a_pair_of_factors_stands_for_every_choice(self) -> None:
        """Two factors, the optional case present and absent."""
        others = compared(self.file, "load").others
        assert [part.where for part in others] == [("wind",), ("snow",)] + 4 * [("all",)]
        assert [part.loads.get("U2", (0, 0))[1] for part in others[2:]] == [-10, 0, -10, 0]
        assert "1.5 wind" in others[2].words

    def test_supports(self) -> None:
        """Exchanged, a second pin, turned, and joints held that are free."""
        found = list(of_supports(self.stated.truss))
        assert [one.where for one in found if one.explanation == "support-exchanged"] == [("L0", "L4")]
        extra = [one.where for one in found if one.explanation == "support-extra"]
        assert extra[0] == ("L4",)
        assert len(extra) == 1 + 2 * 6
        turned = [one.supports[0][1][0] for one in found if one.explanation == "support-turned"]
        assert (1.0, 0.0) in turned
        assert all(dx for dx, _ in turned)

    def test_mirrors(self) -> None:
        """A symmetrical truss has partners, a lopsided one only its own reflection."""
        assert len(list(of_mirrors(compared(self.file, "load")))) == 2 * 3 + 5
        lopsided = TrussFile(ROOF.at_values(), (SNOW,))
        assert len(list(of_mirrors(compared(lopsided, "snow")))) == 2 * 3 + 5
        skewed = Truss({"A": (0, 0), "B": (8, 0), "C": (3, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
        assert len(list(of_mirrors(compared(TrussFile(skewed, (SNOW,)), "snow")))) == 2 * 3

    def test_places(self) -> None:
        """Every joint by every slip of either coordinate."""
        found = [one for one in of_places(ROOF) if one.where == ("C",)]
        height = float(ROOF.joint("C").y)
        assert {("C", -4.0, height), ("C", 40.0, height), ("C", height, 4.0)} <= {one.places[0] for one in found}

    def test_neighbours(self) -> None:
        """The other ends of a joint's members."""
        assert set(neighbours(self.stated.truss)["L1"]) == {"L0", "L2", "U1"}

    @pytest.mark.parametrize(
        ("value", "text"), [(0.04567891, "0.04568"), (1e7, "10000000"), (-3.0, "-3"), (250, "250")]
    )
    def test_numbers_in_words(self, value: float, text: str) -> None:
        """Four figures, no exponent."""
        assert plain(value) == text

    def test_ratios_come_once_each(self) -> None:
        """In the words that fit the units of the truss."""
        found = dict(known_ratios([1.37], "kN", "m"))
        assert len(found) == len({round(math.log(ratio), 8) for ratio in found})
        assert 1.0 not in found
        assert found[1000.0].startswith("N for kN")
        assert any(words.startswith("kip for kN") for words in found.values())


class TestFit:
    """Closeness, remainder and what is left."""

    printed = Printed(
        {"a": 123.4, "b": 80.0, "c": 0.0}, {"a": 0.05, "b": 0.5, "c": 0.5}, allowed={"a": 1.0, "b": 1.0, "c": 1.0}
    )

    @pytest.mark.parametrize(
        ("forces", "closeness", "left"),
        [
            ({"a": 123.42, "b": 80.004, "c": 0.001}, SHARP, 0),
            ({"a": 123.42, "b": 80.3, "c": 0.001}, PRINTED, 0),
            ({"a": 123.42, "b": 81.2, "c": 0.001}, ALLOWED, 1),
            ({"a": 126, "b": 82, "c": 0.4}, APART, 2),
            ({"a": 123.4}, APART, 1),
        ],
    )
    def test_closeness(self, forces: dict[str, float], closeness: int, left: int) -> None:
        """80 among values of four figures is 80.00 first, and what is printed second."""
        found = fit(self.printed, forces, {})
        assert (found.closeness, found.left) == (closeness, left)

    def test_the_remainder_is_a_share_of_the_largest_force(self) -> None:
        """Of either table."""
        assert fit(self.printed, {"a": 123.4, "b": 80, "c": 246.8}, {}).remainder == 1.0
        assert fit(self.printed, {"a": 123.4, "b": 67.66, "c": 0}, {}).remainder == pytest.approx(0.1)
        assert fit(Printed({"a": 0.0}, {"a": 0.05}), {"a": 0.0}, {}).remainder == 0.0

    def test_reactions_under_the_names_they_are_printed_by(self) -> None:
        """Components at any joint, links where they still mean the same."""
        swapped, _ = altered(alteration(supports=(("A", ((1.0, 3.0),)), ("B", ((1.0, 0.0), (0.0, 1.0))))), ROOF, SNOW)
        found = reactions_by_name(
            ["A.x", "A.y", "B.r", "B.y", "C.y"], ROOF, swapped, {"A.r": math.sqrt(10), "B.x": 1.0, "B.y": 7.0}
        )
        assert found == pytest.approx({"A.x": 1, "A.y": 3, "B.r": 22 / math.sqrt(10), "B.y": 7, "C.y": 0})
