"""Loads on chords and members, shared to the joints: hand values, published ones, and properties of any chain.

"Beam table" is the table of shears, moments and deflections of the AISC Steel Construction Manual (14th edition, Table
3-23, from memory): its simple beams are how a panel shares what stands on it.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from case_files import CASES
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from trusscalc import panelshares
from trusscalc.chains import Chain, chain_of, positions
from trusscalc.errors import InputError
from trusscalc.exact import ZERO, Exact, rational
from trusscalc.exacttext import number, parse
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.panelloads import (
    BENDING,
    HALVED,
    SHARED,
    Beside,
    LineLoad,
    PointLoad,
    Rule,
    SelfWeight,
    Spread,
    SpreadError,
    rule_faults,
    rule_of,
    spread,
)
from trusscalc.panelshares import path_of
from trusscalc.roots import sqrt
from trusscalc.statics import matrix
from trusscalc.truss import Truss

DECK = Chain("deck", ("L0", "L1", "L2", "L3", "L4"))
BRIDGE = Truss(
    {f"L{i}": (6 * i, 0) for i in range(5)} | {f"U{i}": (6 * i, 8) for i in (1, 2, 3)},
    {
        "lower chord": ["L0-L1", "L1-L2", "L2-L3", "L3-L4"],
        "upper chord": ["U1-U2", "U2-U3"],
        "diagonals": ["L0-U1", "U1-L2", "L2-U3", "U3-L4"],
        "posts": ["U1-L1", "U2-L2", "U3-L3"],
    },
    {"L0": "pin", "L4": "roller"},
)
ROOF = Truss(
    {"A": (0, 0), "B": (4, 3), "C": (8, 6), "D": (12, 3), "E": (16, 0), "F": (8, 0)},
    ["A-B", "B-C", "C-D", "D-E", "A-F", "F-E", "B-F", "C-F", "D-F"],
    {"A": "pin", "E": "roller"},
)


def read(entry: Mapping[str, Any], symbols: Mapping[str, object] | None = None) -> Rule:
    """Return the rule of an entry that has no faults."""
    problems: list[str] = []
    values = {name: number(value) for name, value in (symbols or {}).items()}
    rule = rule_of("dead", entry, "[panel_loads.dead]", problems, values)
    assert problems == []
    assert rule is not None
    return rule


def on_joints(entry: Mapping[str, Any], truss: Truss = BRIDGE) -> dict[str, tuple[Exact, Exact]]:
    """Return the joint loads of an entry."""
    return {load.joint: (load.fx, load.fy) for load in spread(read(entry), truss, [DECK]).loads}


def pairs(**loads: tuple[object, object]) -> dict[str, tuple[Exact, Exact]]:
    """Return joint loads as exact pairs."""
    return {joint: (number(fx), number(fy)) for joint, (fx, fy) in loads.items()}


def beam(length: object) -> Truss:
    """Return a truss with one panel of a length between L0 and L1."""
    joints = {"L0": (0, 0), "L1": (length, 0), "U": (1, 1)}
    return Truss(joints, ["L0-L1", "L0-U", "L1-U"], {"L0": "pin", "L1": "roller"})


class TestHandValues:
    """Values anybody can find with a pencil."""

    def test_a_uniform_load_gives_half_to_the_end_joints(self) -> None:
        """2.4 kN/m on panels of 6 m: 14.4 kN on each inner joint (tributary length, common practice, no source)."""
        assert on_joints({"line": "2.4", "along": "deck"}) == pairs(
            L0=(0, "-7.2"), L1=(0, "-14.4"), L2=(0, "-14.4"), L3=(0, "-14.4"), L4=(0, "-7.2")
        )
        lines = spread(read({"line": "2.4", "along": "deck", "from": 1}), BRIDGE, [DECK]).lines
        assert [line.at for line in lines] == [number("3.5"), 9, 15, 21]

    def test_part_of_a_panel(self) -> None:
        """Beam table, case 4: w b (2c + b) / 2l and w b (2a + b) / 2l with a, b, c, l = 2, 3, 5, 10 and w = 4."""
        entry = {"line": 4, "along": ["L0", "L1"], "from": 2, "to": 5}
        assert on_joints(entry, beam(10)) == pairs(L0=(0, "-7.8"), L1=(0, "-4.2"))

    def test_a_triangle(self) -> None:
        """Beam table, case 2: a third and two thirds of W."""
        assert on_joints({"line": [0, 6], "along": "L0,L1"}, beam(9)) == pairs(L0=(0, -9), L1=(0, -18))

    def test_the_centre_of_a_trapezoid(self) -> None:
        """At h (a + 2b) / 3 (a + b) from the side a (any text on statics): 6 (2 + 10) / 21."""
        (line,) = spread(read({"line": [2, 5], "along": "L0,L1"}), beam(6)).lines
        assert line.resultant == 21
        assert line.at == rational(6 * 12, 3 * 7)
        assert line.intensities == (2, 5)
        assert line.shares == (("L0", number(9)), ("L1", number(12)))

    def test_a_trapezoid_over_several_panels(self) -> None:
        """From 1 to 7 kN/m between 3 and 15 m: 2.5 at 6, 5.5 at 12; each panel's piece by its two triangles."""
        lines = spread(read({"line": [1, 7], "along": "deck", "from": 3, "to": 15}), BRIDGE, [DECK]).lines
        assert [(line.stands_on, line.start, line.end, line.reach) for line in lines] == [
            ("L0-L1", 3, 6, (0, 6)),
            ("L1-L2", 6, 12, (6, 12)),
            ("L2-L3", 12, 15, (12, 18)),
        ]
        assert [line.intensities for line in lines] == [
            (1, number("2.5")),
            (number("2.5"), number("5.5")),
            (number("5.5"), 7),
        ]
        # 1.5 at a distance of 4 from L0 and 3.75 at 5: (1.5 x 4 + 3.75 x 5) / 6
        assert lines[0].shares == (("L0", number("1.125")), ("L1", number("4.125")))
        assert lines[1].shares == (("L1", number("10.5")), ("L2", number("13.5")))
        # 8.25 at 1 and 10.5 at 2 from L2
        assert lines[2].shares == (("L2", number("13.875")), ("L3", number("4.875")))

    def test_a_load_that_adds_up_to_nothing_is_a_couple(self) -> None:
        """From -2 to 2 over 6 m: two triangles of 3 x 2 / 2 at 4 m, a couple of 12, carried by 2 and -2."""
        (line,) = spread(read({"line": [-2, 2], "along": "L0,L1"}), beam(6)).lines
        assert line.at is None
        assert not line.resultant
        assert line.shares == (("L0", number(-2)), ("L1", number(2)))

    def test_a_force_between_panel_points(self) -> None:
        """Beam table, case 8: P b / l and P a / l."""
        entry = {"point": 12, "along": "deck", "at": "7.5"}
        (line,) = spread(read(entry), BRIDGE, [DECK]).lines
        assert line.shares == (("L1", number(9)), ("L2", number(3)))
        assert on_joints(entry) == pairs(L1=(0, -9), L2=(0, -3))

    @pytest.mark.parametrize(("at", "joint"), [(0, "L0"), (12, "L2"), (24, "L4")])
    def test_a_force_on_a_panel_point(self, at: int, joint: str) -> None:
        """All of it, and nothing bends."""
        made = spread(read({"point": 5, "along": "deck", "at": at}), BRIDGE, [DECK])
        assert made.loads == (JointLoad(joint, ZERO, number(-5)),)
        assert made.lines[0].stands_on == joint
        assert made.note == ""

    def test_snow_counts_on_plan_and_cladding_along_the_slope(self) -> None:
        """A 3-4-5 rafter: 4 m of snow and 5 m of slates for each panel (common practice, no source)."""
        rafter = {"line": 2, "along": "A,B,C"}
        assert on_joints(rafter, ROOF) == pairs(A=(0, -4), B=(0, -8), C=(0, -4))
        assert on_joints({**rafter, "per": "slope"}, ROOF) == pairs(A=(0, -5), B=(0, -10), C=(0, -5))

    def test_places_are_measured_as_the_load_is(self) -> None:
        """Half of the second panel: from 4 to 6 m on plan is from 5 to 7.5 m along the slope."""
        plan = {"line": 5, "along": "A,B,C", "from": 4, "to": 6}
        assert on_joints(plan, ROOF) == pairs(B=(0, "-7.5"), C=(0, "-2.5"))
        slope = {"line": 4, "along": "A,B,C", "from": 5, "to": "7.5", "per": "slope"}
        assert on_joints(slope, ROOF) == pairs(B=(0, "-7.5"), C=(0, "-2.5"))
        assert on_joints({"point": 8, "along": "A,B,C", "at": 6}, ROOF) == pairs(B=(0, -4), C=(0, -4))
        assert on_joints({"point": 8, "along": "A,B,C", "at": "7.5", "per": "slope"}, ROOF) == pairs(
            B=(0, -4), C=(0, -4)
        )

    def test_an_area_load_times_its_width(self) -> None:
        """1.2 kN/m2 on 5 m: 6 kN/m."""
        area = {"area": "1.2", "width": 5, "along": "deck"}
        assert on_joints(area) == on_joints({"line": 6, "along": "deck"})
        drift = {"area": [0, "1.2"], "width": 5, "along": "deck", "from": 6}
        assert on_joints(drift) == on_joints({"line": [0, 6], "along": "deck", "from": 6})

    def test_wind_at_right_angles(self) -> None:
        """Positive presses on the side that lies to the left; per true length unless stated otherwise."""
        wind = {"line": 2, "along": "A,B,C", "direction": "normal"}
        # each panel takes 2 x 5 = 10, of which 6 to the right and 8 down
        assert on_joints(wind, ROOF) == pairs(A=(3, -4), B=(6, -8), C=(3, -4))
        assert on_joints({**wind, "along": "C,B,A"}, ROOF) == pairs(C=(-3, 4), B=(-6, 8), A=(-3, 4))
        assert on_joints({**wind, "along": "C,D,E"}, ROOF) == pairs(C=(-3, -4), D=(-6, -8), E=(-3, -4))
        suction = {**wind, "line": -2, "along": "C,D,E"}
        assert on_joints(suction, ROOF) == pairs(C=(3, 4), D=(6, 8), E=(3, 4))
        assert on_joints({**wind, "per": "plan"}, ROOF)["A"] == (number("2.4"), number("-3.2"))

    @pytest.mark.parametrize(
        ("direction", "force"),
        [
            ("down", (0, -10)),
            ("up", (0, 10)),
            ("left", (-10, 0)),
            ("right", (10, 0)),
            ("normal", (0, -10)),
            ([3, -4], (6, -8)),
            (["-1/2", "sqrt(3)/2"], (-5, "5*sqrt(3)")),
            ([1, 1], ("5*sqrt(2)", "5*sqrt(2)")),
        ],
    )
    def test_directions(self, direction: object, force: tuple[object, object]) -> None:
        """The length of a stated direction has no meaning."""
        entry = {"point": 10, "along": "deck", "at": 6, "direction": direction}
        assert on_joints(entry) == pairs(L1=force)

    def test_a_force_at_right_angles_takes_the_direction_of_its_panel(self) -> None:
        """Also on a joint where the chain goes on straight, and on its ends."""
        force = {"point": 5, "along": "A,B,C,D", "direction": "normal"}
        assert on_joints({**force, "at": 2}, ROOF) == pairs(A=("3/2", -2), B=("3/2", -2))
        assert on_joints({**force, "at": 4}, ROOF) == pairs(B=(3, -4))
        assert on_joints({**force, "at": 12}, ROOF) == pairs(D=(-3, -4))

    def test_weight_of_members(self) -> None:
        """Half to each end; 8 m posts and 10 m diagonals of 0.5 kN/m (common practice, no source)."""
        weight = {"self_weight": "0.5", "members": ["diagonals", "L1-U1"]}
        assert on_joints(weight) == pairs(
            L0=(0, "-2.5"), U1=(0, -7), L2=(0, -5), U3=(0, -5), L4=(0, "-2.5"), L1=(0, -2)
        )
        everything = spread(read({"self_weight": "0.5"}), BRIDGE)
        assert everything.applied[:2] == (0, number("-0.5") * (4 * 6 + 2 * 6 + 4 * 10 + 3 * 8))
        assert everything.applied[2] == everything.applied[1] * 12  # by symmetry
        assert len(everything.lines) == len(BRIDGE.members)

    @pytest.mark.parametrize(
        ("length", "force", "entry", "per_length"),
        [
            ("m", "kN", {"density": "78.5", "section": "0.0123"}, "0.96555"),
            ("m", "kN", {"density": "78.5", "section": 12300, "section_unit": "mm2"}, "0.96555"),
            ("m", "kN", {"density": "78.5", "section": 123, "section_unit": "cm2", "density_unit": "kN/m3"}, "0.96555"),
            # 7850 kg/m3 of steel under 9.80665 m/s2 (standard gravity, CGPM 1901, from memory)
            ("m", "kN", {"density": 7850, "density_unit": "kg/m3", "section": 1}, "76.9822025"),
            ("mm", "N", {"density": 7850, "density_unit": "kg/m3", "section": 1000}, "0.0769822025"),
            # 490 lb/ft3, so 3.40 lb/ft for each square inch (AISC manual, from memory: 490/144)
            ("ft", "lbf", {"density": 490, "density_unit": "lb/ft3", "section": 1, "section_unit": "in2"}, "490/144"),
            ("ft", "kip", {"density": 490, "density_unit": "lbf/ft3", "section": 36, "section_unit": "in2"}, "0.1225"),
            ("in", "kip", {"density": 490, "density_unit": "lbf/ft3", "section": 36}, "490*36/(1000*1728)"),
            (
                "ft",
                "kip",
                {"density": "0.49", "density_unit": "kip/ft3", "section": "1/4", "section_unit": "ft2"},
                "0.1225",
            ),
        ],
    )
    def test_weight_from_density_and_section(
        self, length: str, force: str, entry: dict[str, Any], per_length: str
    ) -> None:
        """Whatever the units, exactly."""
        truss = Truss(
            {"A": (0, 0), "B": (4, 0), "C": (2, 1)},
            ["A-B", "A-C", "B-C"],
            {"A": "pin", "B": "roller"},
            length=length,
            force=force,
        )
        (line,) = spread(read({**entry, "members": ["A-B"]}), truss).lines
        assert line.intensities == (parse(per_length), parse(per_length))
        assert line.resultant == 4 * parse(per_length)

    @pytest.mark.parametrize(
        ("offset", "share", "words"),
        [
            ("1.2", "0.8", r"1\.2 m from this truss, towards the other one at 6 m; .* \(6 - 1\.2\)/6 = 0\.8 of it\."),
            (0, 1, "= 1 of it"),
            (6, 0, "= 0 of it"),
            (
                "-1.5",
                "1.25",
                r"1\.5 m from this truss, away from .* \(6 \+ 1\.5\)/6 = 1\.25 of it: more than the whole",
            ),
            (9, "-0.5", r"= -0\.5 of it: the load stands beyond the other truss, and loads this one in the opposite"),
        ],
    )
    def test_lever_rule(self, offset: object, share: object, words: str) -> None:
        """Shares of two girders by moments about the other one (AASHTO LRFD 4.6.2.2, from memory); also outside."""
        entry = {"point": 100, "along": "deck", "at": 6, "beside": {"offset": offset, "spacing": 6}}
        made = spread(read(entry), BRIDGE, [DECK])
        assert made.carried == number(share)
        assert made.loads == (JointLoad("L1", ZERO, -100 * number(share)),)
        assert made.applied == made.at_joints == (0, -100 * number(share), -600 * number(share))
        assert re.search(words, made.note)

    def test_the_lever_rule_holds_for_every_kind_of_load(self) -> None:
        """Four fifths of everything."""
        beside = {"offset": "1.2", "spacing": 6}
        entries = [
            {"line": [2, 5], "along": "deck", "from": 1, "to": 20},
            {"area": 2, "width": 3, "along": "deck"},
            {"point": 5, "along": "deck", "at": 4},
            {"self_weight": 2},
            {"density": 2, "section": 3, "members": ["posts"]},
        ]
        for entry in entries:
            whole, part = on_joints(entry), on_joints({**entry, "beside": beside})
            assert part == {joint: (fx * 4 / 5, fy * 4 / 5) for joint, (fx, fy) in whole.items()}

    def test_two_lanes_on_an_outer_girder(self) -> None:
        """Wheels 20, 14, 8 and 2 ft from the hinge of a 16 ft deck, half an axle each: 1.375 axles.

        Moments about the hinge, as any text on the lever rule has it.
        """
        shares = [Beside(number(16 - arm), number(16)).share for arm in (20, 14, 8, 2)]
        assert sum(shares, ZERO) / 2 == number("1.375")

    def test_symbols_stand_in_amounts(self) -> None:
        """And in the joint loads."""
        rule = read({"line": ["w", "2*w"], "along": "deck", "to": 6}, {"w": 3})
        made = spread(rule, BRIDGE, [DECK])
        assert made.loads[0] == JointLoad("L0", ZERO, parse("-4*w", ["w"]))
        assert made.loads[1] == JointLoad("L1", ZERO, parse("-5*w", ["w"]))
        assert made.lines[0].at == rational(6 * 5, 9)

    def test_symbols_of_the_truss_stay_symbols(self) -> None:
        """A truss with panels of length a and height h."""
        truss = Truss(
            {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h")},
            ["A-B", "A-C", "B-C"],
            {"A": "pin", "B": "roller"},
            symbols={"a": 3, "h": 4},
        )
        names = ("a", "h")
        assert on_joints({"line": 2, "along": "A,C,B"}, truss)["C"] == (0, parse("-2*a", names))
        wind = on_joints({"line": 2, "along": "A,C", "direction": "normal"}, truss)
        assert wind == {joint: (parse("h", names), parse("-a", names)) for joint in "AC"}
        weight = spread(read({"self_weight": 1}), truss).loads
        assert weight[2] == JointLoad("C", ZERO, -parse("sqrt(a^2 + h^2)", names))
        assert weight[2].fx.symbols == ()
        assert truss.value(spread(read({"line": [1, 3], "along": "A,C,B", "per": "slope"}), truss).applied[1]) == -20


class TestPublished:
    """Against loads that others worked out."""

    def test_wind_on_a_rafter(self) -> None:
        """Cyclopedia of Architecture, Carpentry, and Building (American Technical Society), vol. 3, part IV, art. 20.

        Half a span of 21 ft, 30 degrees, trusses 14 ft apart, 32 lb per square foot at right angles: 10,864 pounds
        with the rafter taken as 24 1/4 ft; half of it at the middle joint, a quarter at either end.
        """
        truss = Truss(
            {"1": (0, 0), "2": ("21/2", "21*tan(30)/2"), "4": (21, "21*tan(30)"), "T": (42, 0)},
            ["1-2", "2-4", "4-T", "1-T", "2-T"],
            {"1": "pin", "T": "roller"},
            length="ft",
            force="lbf",
        )
        entry = {"area": 32, "width": 14, "along": "1,2,4", "direction": "normal"}
        made = spread(read(entry), truss)
        whole = sum((line.resultant for line in made.lines), ZERO)
        assert whole == 32 * 14 * parse("14*sqrt(3)")
        assert abs(float(whole) - 10864) < 10864 * 0.0025 / 24.25  # the rafter's length to 0.0025 ft: 24.2487
        sizes = {load.joint: sqrt(load.fx * load.fx + load.fy * load.fy) for load in made.loads}
        assert sizes == {"1": whole / 4, "2": whole / 2, "4": whole / 4}

    def test_wind_loads_of_a_roof_truss(self) -> None:
        """Joint loads of a published problem (tests/cases/holtz_2d.json) are those of 4 sqrt(5) kN/m on the rafter."""
        case = CASES["holtz_2d"]
        entry = {"line": "4*sqrt(5)", "along": "a,b,c", "direction": "normal"}
        assert spread(read(entry), case.truss).loads == case.loads.loads

    def test_the_chord_force_is_the_moment_of_the_spread_load_over_the_height(self) -> None:
        """N = M / h with M = w l^2 / 8 of the load as it stands (beam table, case 1): shared loads do not change M."""
        load = spread(read({"line": "2.4", "along": "deck"}), BRIDGE, [DECK])
        forces = matrix.solve(BRIDGE, LoadCase("dead", load.loads)).forces
        assert forces["U1-U2"] == -number("2.4") * 24 * 24 / 8 / 8

    def test_reactions_are_those_of_the_load_as_it_stands(self) -> None:
        """A triangle over the whole span: W / 3 and 2 W / 3 (beam table, case 2)."""
        load = spread(read({"line": [0, "2.4"], "along": "deck"}), BRIDGE, [DECK])
        forces = matrix.solve(BRIDGE, LoadCase("dead", load.loads)).forces
        assert forces["L0.y"] == number("2.4") * 12 / 3
        assert forces["L4.y"] == number("2.4") * 12 * 2 / 3


# --- any chain --------------------------------------------------------------------------------------------

SIZES = st.integers(1, 36).map(lambda count: Fraction(count, 4))
AMOUNTS = st.integers(-36, 36).map(lambda count: Fraction(count, 4))
PLACES = st.integers(0, 12).map(lambda count: Fraction(count, 12))
INSIDE = st.integers(1, 11).map(lambda count: rational(count, 12))


@st.composite
def chained(draw: st.DrawFn) -> Truss:
    """Draw a truss whose joints C0, C1, ... are a chain up and down, to either side, with or without roots."""
    panels = draw(st.integers(1, 4))
    side = draw(st.sampled_from([1, -1]))
    root = draw(st.sampled_from(["1", "sqrt(3)", "sqrt(2)"]))
    x = parse(str(draw(AMOUNTS)))
    joints: dict[str, tuple[object, object]] = {}
    for count in range(panels + 1):
        joints[f"C{count}"] = (x, parse(root) * rational(draw(AMOUNTS)))
        x = x + side * rational(draw(SIZES))
    joints["Z"] = (0, -40)
    members = [f"{a}-{b}" for a, b in pairwise(list(joints)[:-1])]
    return Truss(joints, [*members, "C0-Z", f"C{panels}-Z"], {"C0": "pin", f"C{panels}": "roller"})


@st.composite
def line_loads(draw: st.DrawFn, truss: Truss) -> LineLoad:
    """Draw a line load on the chain of a drawn truss."""
    per = draw(st.sampled_from(["plan", "slope"]))
    joints = chain(truss)
    end = path_of(truss, Chain("", joints), per).at[-1]
    first, last = sorted((draw(PLACES), draw(PLACES)))
    assume(first < last)
    direction: Any = draw(
        st.sampled_from(["down", "up", "left", "right", "normal", (number(2), number(-1)), (number(-3), number(4))])
    )
    return LineLoad(
        "dead",
        joints,
        rational(draw(AMOUNTS)),
        rational(draw(AMOUNTS)),
        width=draw(st.none() | SIZES.map(rational)),
        begins=draw(st.just(first * end) | st.none()) if first else None,
        ends=draw(st.just(last * end) | st.none()),
        per=per,
        direction=direction,
        beside=draw(st.none() | st.builds(Beside, AMOUNTS.map(rational), SIZES.map(rational))),
    )


def chain(truss: Truss) -> tuple[str, ...]:
    """Return the chain of a drawn truss."""
    return tuple(joint.name for joint in truss.joints if joint.name != "Z")


def quadrature(rule: LineLoad, truss: Truss) -> tuple[float, float, float]:
    """Return the sums of a line load by Gauss' rule with floats, in steps of its own over the plane."""
    joints = {joint.name: (float(joint.x), float(joint.y)) for joint in truss.joints}
    points = [np.array(joints[name]) for name in rule.along]
    tangents = [(b - a) / np.hypot(*(b - a)) for a, b in pairwise(points)]
    measures = [abs(b[0] - a[0]) if rule.per == "plan" else float(np.hypot(*(b - a))) for a, b in pairwise(points)]
    starts = np.concatenate([[0.0], np.cumsum(measures)])
    begins = float(rule.begins) if rule.begins is not None else 0.0
    ends = float(rule.ends) if rule.ends is not None else starts[-1]
    factor = float(rule.width if rule.width is not None else 1)
    factor *= 1 - float(rule.beside.offset) / float(rule.beside.spacing) if rule.beside else 1
    fixed = {"down": (0, -1), "up": (0, 1), "left": (-1, 0), "right": (1, 0)}
    total = np.zeros(3)
    nodes, weights = np.polynomial.legendre.leggauss(4)
    for panel, measure in enumerate(measures):
        low, high = max(begins, starts[panel]), min(ends, starts[panel + 1])
        if low >= high:
            continue
        if rule.direction == "normal":
            unit = np.array([tangents[panel][1], -tangents[panel][0]])
        else:
            named = isinstance(rule.direction, str)
            pair = fixed[rule.direction] if named else tuple(map(float, rule.direction))  # type: ignore[index,arg-type]
            unit = np.array(pair) / np.hypot(*pair)
        for node, weight in zip(nodes, weights, strict=True):
            place = (low + high) / 2 + node * (high - low) / 2
            part = (place - begins) / (ends - begins)
            amount = factor * (float(rule.start) * (1 - part) + float(rule.end) * part) * weight * (high - low) / 2
            x, y = points[panel] + (points[panel + 1] - points[panel]) * (place - starts[panel]) / measure
            fx, fy = amount * unit
            total += (fx, fy, x * fy - y * fx)
    return float(total[0]), float(total[1]), float(total[2])


class TestAnyChain:
    """What holds for every load on every chain."""

    @settings(max_examples=30)
    @given(st.data())
    def test_the_sums_are_those_of_the_load_as_it_stands(self, data: st.DataObject) -> None:
        """Exactly by themselves, and within floats by a quadrature that knows nothing of them."""
        truss = data.draw(chained())
        rule = data.draw(line_loads(truss))
        made = spread(rule, truss)
        assert made.applied == made.at_joints
        expected = quadrature(rule, truss)
        size = 1 + max(map(abs, expected))
        assert [float(part) for part in made.at_joints] == pytest.approx(expected, abs=1e-9 * size)

    @settings(max_examples=15)
    @given(st.data())
    def test_every_panel_is_in_balance(self, data: st.DataObject) -> None:
        """Shares add up to the resultant and have its moment; joints off the load get nothing."""
        truss = data.draw(chained())
        made = spread(data.draw(line_loads(truss)), truss)
        for line in made.lines:
            near, far = (share for _, share in line.shares)
            assert near + far == line.resultant
            if line.at is not None:
                assert far * (line.reach[1] - line.reach[0]) == line.resultant * (line.at - line.reach[0])
            assert line.reach[0] <= line.start < line.end <= line.reach[1]
        assert {load.joint for load in made.loads} == {joint for line in made.lines for joint, _ in line.shares}

    @settings(max_examples=15)
    @given(st.data())
    def test_a_load_in_two_parts_is_the_load(self, data: st.DataObject) -> None:
        """Cut anywhere."""
        truss = data.draw(chained())
        rule = data.draw(line_loads(truss))
        end = path_of(truss, Chain("", chain(truss)), rule.per).at[-1]
        first = rule.begins or ZERO
        last = rule.ends or end
        part = data.draw(INSIDE)
        middle = rule.start + part * (rule.end - rule.start)
        place = first + part * (last - first)
        pieces = [replace(rule, end=middle, ends=place), replace(rule, start=middle, begins=place)]
        loads = [load for piece in pieces for load in spread(piece, truss).loads]
        assert by_joint(loads) == by_joint(spread(rule, truss).loads)

    @settings(max_examples=15)
    @given(st.data())
    def test_a_chain_read_backwards_carries_the_same(self, data: st.DataObject) -> None:
        """With its places counted from the other end; what presses from the left then pulls."""
        truss = data.draw(chained())
        rule = data.draw(line_loads(truss))
        end = path_of(truss, Chain("", chain(truss)), rule.per).at[-1]
        sign = -1 if rule.direction == "normal" else 1
        backwards = replace(
            rule,
            along=tuple(reversed(chain(truss))),
            start=sign * rule.end,
            end=sign * rule.start,
            begins=None if rule.ends is None else end - rule.ends,
            ends=None if rule.begins is None else end - rule.begins,
        )
        assert by_joint(spread(backwards, truss).loads) == by_joint(spread(rule, truss).loads)

    @settings(max_examples=15)
    @given(st.data())
    def test_a_force_is_the_limit_of_a_short_load(self, data: st.DataObject) -> None:
        """The same shares as a uniform load of any length about it, as long as one panel holds it all."""
        truss = data.draw(chained())
        path = path_of(truss, Chain("", chain(truss)), "plan")
        panel = data.draw(st.integers(0, len(path.at) - 2))
        low, high = path.at[panel : panel + 2]
        part = data.draw(INSIDE)
        at, half = low + part * (high - low), (high - low) / 20
        direction = data.draw(st.sampled_from(["down", "right", "normal"]))
        force = PointLoad("dead", chain(truss), number(7), at, direction=direction)
        amount = 7 / (2 * half)
        short = LineLoad(
            "dead", chain(truss), amount, amount, begins=at - half, ends=at + half, per="plan", direction=direction
        )
        assert by_joint(spread(force, truss).loads) == by_joint(spread(short, truss).loads)

    @settings(max_examples=15)
    @given(chained())
    def test_a_weight_hangs_at_the_middle(self, truss: Truss) -> None:
        """Half at either end has the moment of the whole at the middle; weights of parts add up."""
        weight = spread(SelfWeight("dead", number("0.85")), truss)
        for member, line in zip(truss.members, weight.lines, strict=True):
            a, b = truss.joint(member.start), truss.joint(member.end)
            assert line.resultant * line.resultant == number("0.85") ** 2 * ((a.x - b.x) ** 2 + (a.y - b.y) ** 2)
        names = [member.name for member in truss.members]
        parts = [SelfWeight("dead", number("0.85"), members=tuple(each)) for each in (names[:1], names[1:])]
        loads = [load for part in parts for load in spread(part, truss).loads]
        assert by_joint(loads) == by_joint(weight.loads)

    def test_nested_roots(self) -> None:
        """Coordinates whose distances are roots of sums of roots: the proof holds in that field too."""
        joints = {"A": (0, 0), "B": (2, "1 + sqrt(3)"), "C": ("4 + sqrt(2)", "sqrt(3)"), "D": (3, -5)}
        truss = Truss(joints, ["A-B", "B-C", "A-D", "C-D"], {"A": "pin", "C": "roller"})
        lengths = [parse("sqrt(8 + 2*sqrt(3))"), parse("sqrt(4*sqrt(2) + 7)")]
        for entry in (
            {"line": [2, 5], "along": "A,B,C", "per": "slope", "from": 1, "to": 5},
            {"line": [2, 5], "along": "A,B,C", "per": "slope", "direction": "normal"},
            {"line": [2, 5], "along": "A,B,C", "per": "plan", "direction": [1, 2]},
            {"self_weight": 2, "members": ["A-B", "B-C"]},
        ):
            made = spread(read(entry), truss)
            assert made.applied == made.at_joints
        assert made.loads[1] == JointLoad("B", ZERO, -lengths[0] - lengths[1])

    @settings(max_examples=15)
    @given(chained())
    def test_places_on_plan_are_those_of_the_chain(self, truss: Truss) -> None:
        """One measure for loads that stand and loads that travel."""
        there = chain_of(truss, chain(truss))
        assert path_of(truss, there, "plan").at == positions(truss, there)


def by_joint(loads: Any) -> dict[str, tuple[Exact, Exact]]:
    """Return joint loads added up, those that are nothing left out."""
    case = LoadCase("sum", loads)
    return {load.joint: (load.fx, load.fy) for load in case.loads if load.fx or load.fy}


# --- controls and faults ----------------------------------------------------------------------------------


class TestControls:
    """The proof has been seen failing."""

    made = spread(read({"line": [2, 5], "along": "deck", "from": 1}), BRIDGE, [DECK])

    def again(self, **changes: Any) -> Spread:
        """Return the spread made again with something changed."""
        return replace(self.made, **changes)

    def test_an_honest_spread_is_made_again(self) -> None:
        """Nothing else is refused."""
        assert self.again() == self.made

    def test_a_share_that_was_changed(self) -> None:
        """By one part in a million million."""
        first, *rest = self.made.lines
        (near, share), far = first.shares
        changed = replace(first, shares=((near, share + rational(1, 10**12)), far))
        with pytest.raises(SpreadError, match=r"line 2 to 5: the joint loads are not the sums of the shares"):
            self.again(lines=(changed, *rest))

    @pytest.mark.parametrize(("place", "what"), [(0, "ΣFx"), (1, "ΣFy"), (2, "ΣM")])
    def test_a_sum_that_differs(self, place: int, what: str) -> None:
        """Each of the three is looked at."""
        sums = list(self.made.applied)
        sums[place] = sums[place] + rational(1, 10**12)
        with pytest.raises(SpreadError, match=f"{what} of the joint loads differs"):
            self.again(applied=tuple(sums))

    @pytest.mark.parametrize(
        ("entry", "what"),
        [
            ({"line": 2, "along": "deck"}, "ΣM"),
            ({"line": 2, "along": "deck", "direction": "left"}, "ΣFx"),
            ({"line": 2, "along": "deck", "direction": "up"}, "ΣFy"),
        ],
    )
    def test_wrong_shares_do_not_pass(self, entry: dict[str, Any], what: str, monkeypatch: pytest.MonkeyPatch) -> None:
        """An error in sharing out, planted: shares the wrong way round, or of the wrong size, have other sums."""
        honest = panelshares._on_panel

        def planted(load: Any, path: Any, panel: int, direction: Any) -> Any:
            line = honest(load, path, panel, direction)
            (near, first), (far, second) = line.shares
            if what == "ΣM":
                return replace(line, shares=((near, first + 1), (far, second - 1)))
            return replace(line, shares=((near, first + 1), (far, second)))

        monkeypatch.setattr(panelshares, "_on_panel", planted)
        with pytest.raises(SpreadError, match=f"{what} of the joint loads differs"):
            spread(read(entry), BRIDGE, [DECK])

    def test_a_piece_left_out_does_not_pass(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """The sums are found without the panels."""
        honest = panelshares.of_line

        def planted(*stated: Any) -> Any:
            lines, sums = honest(*stated)
            return lines[:-1], sums

        monkeypatch.setattr("trusscalc.panelloads.of_line", planted)
        with pytest.raises(SpreadError, match="ΣFy of the joint loads differs"):
            spread(read({"line": 2, "along": "deck"}), BRIDGE, [DECK])

    def test_half_a_weight_lost_does_not_pass(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Neither for members."""
        honest = panelshares.of_weight

        def planted(*stated: Any) -> Any:
            lines, sums = honest(*stated)
            return [*lines[:-1], replace(lines[-1], shares=lines[-1].shares[:1])], sums

        monkeypatch.setattr("trusscalc.panelloads.of_weight", planted)
        with pytest.raises(SpreadError, match=r"\[panel_loads.dead\] self_weight 2: ΣFy"):
            spread(read({"self_weight": 2}), BRIDGE)


@pytest.mark.parametrize(
    ("entry", "message"),
    [
        ({"line": 2, "along": "dek"}, r"line 2: along: there is no chain 'dek'; did you mean deck"),
        ({"line": 2, "along": "L0,L2"}, r"line 2: along: chain L0 to L2: no member joins L0 and L2"),
        ({"line": 2, "along": ["L0", "X"]}, r"line 2: along: chain L0 to X: there is no joint 'X'"),
        (
            {"line": [2, "5/3"], "along": "deck", "to": 25},
            r"line 2 to 5/3: to: 25 is off the chain, which is 24 long on",
        ),
        ({"area": 2, "width": 1, "along": "deck", "to": 25}, "area 2: to: .* leave it out for the whole chain"),
        ({"line": 2, "along": "deck", "from": 24}, r"line 2: from: 24 is off the chain, which is 24 long on plan$"),
        ({"line": 2, "along": "deck", "from": 30, "per": "slope"}, "from: 30 is off the chain.* long along its slope$"),
        ({"point": 2, "along": "deck", "at": "24.1"}, r"point 2 at 24\.1: at: 24\.1 is off the chain"),
        ({"self_weight": 2, "members": ["postes"]}, "self_weight 2: members 'postes': .*; did you mean posts"),
        (
            {"density": 2, "section": 1, "members": ["L1-U2"]},
            "density 2: members 'L1-U2': there is no such group or mem",
        ),
        (
            {"self_weight": 2, "members": ["posts", "L1-U1"]},
            "'L1-U1': U1-L1 would count twice, also by 'posts'; remove",
        ),
        (
            {"self_weight": 2, "members": ["posts", "posts"]},
            "'posts': U1-L1 would count twice, also by 'posts'; remove",
        ),
        (
            {"area": 1e300, "width": "1e9", "along": "deck"},
            "exactly: numbers beyond 1e300 .* state these loads at the j",
        ),
    ],
)
def test_each_fault_is_told(entry: dict[str, Any], message: str) -> None:
    """With the case and the rule it is about."""
    rule = read(entry)
    (problem,) = rule_faults(rule, BRIDGE, [DECK])
    assert problem.startswith("[panel_loads.dead] ")
    with pytest.raises(InputError, match=message) as raised:
        spread(rule, BRIDGE, [DECK])
    assert raised.value.problems == (problem,)


def test_faults_come_together() -> None:
    """Both ends off the chain."""
    rule = read({"line": 2, "along": "deck", "from": 25, "to": 30})
    assert len(rule_faults(rule, BRIDGE, [DECK])) == 2
    assert len(rule_faults(read({"self_weight": 1, "members": ["x", "y"]}), BRIDGE)) == 2
    assert rule_faults(read({"line": 2, "along": "deck"}), BRIDGE, [DECK]) == []


def test_a_force_at_right_angles_to_a_kink_is_refused() -> None:
    """Nobody can say which way it acts."""
    force = read({"point": 5, "along": "A,B,C,D", "at": 8, "direction": "normal"})
    (problem,) = rule_faults(force, ROOF)
    assert problem.startswith("[panel_loads.dead] point 5 at 8: direction: at C the chain bends, and no one direction ")
    assert problem.endswith("is at right angles to it; write [dx, dy]")


def test_places_on_a_chain_of_symbols_are_refused() -> None:
    """Which panel holds them depends on the symbol's value."""
    truss = Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", 3)},
        ["A-B", "A-C", "B-C"],
        {"A": "pin", "B": "roller"},
        symbols={"a": 3},
    )
    problems = rule_faults(read({"line": 5, "along": "A,C,B", "from": 1, "to": 2}), truss)
    assert problems == [
        "[panel_loads.dead] line 5: from and to: the chain's coordinates hold the symbol a; write numbers there"
    ]


def test_a_group_that_is_called_like_a_member() -> None:
    """Is understood where it holds just that member, and refused where it does not."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (2, 1)}
    supports = {"A": "pin", "B": "roller"}
    rule = read({"self_weight": 1, "members": ["A-B"]})
    same = Truss(joints, {"A-B": ["A-B"], "rafters": ["A-C", "B-C"]}, supports)
    assert [line.stands_on for line in spread(rule, same).lines] == ["A-B"]
    other = Truss(joints, {"A-B": ["A-C", "B-C"], "tie": ["A-B"]}, supports)
    assert rule_faults(rule, other) == [
        "[panel_loads.dead] self_weight 1: members 'A-B': is a group, and a member that is not in it; rename the group"
    ]


def test_too_many_roots_are_told() -> None:
    """A sum of more than 64 different lengths has no exact form here."""
    joints: dict[str, tuple[object, object]] = {f"C{i}": (i, f"{i * i}/101") for i in range(71)}
    joints["Z"] = (0, -9)
    members = [f"C{i}-C{i + 1}" for i in range(70)]
    truss = Truss(joints, [*members, "C0-Z", "C70-Z"], {"C0": "pin", "C70": "roller"})
    (problem,) = rule_faults(read({"self_weight": 1}), truss)
    assert "cannot be worked out exactly: the number needs more than 64" in problem
    assert problem.endswith(
        "state these loads at the joints, or, where coordinates hold roots, state those as decimals"
    )


def test_remarks() -> None:
    """What was done, and what is not covered."""
    assert spread(read({"line": 2, "along": "deck"}), BRIDGE, [DECK]).note == SHARED
    assert spread(read({"point": 2, "along": "deck", "at": 1}), BRIDGE, [DECK]).note == SHARED
    assert spread(read({"self_weight": 2}), BRIDGE).note == HALVED
    assert BENDING in SHARED
    assert BENDING in HALVED
    both = spread(read({"line": 2, "along": "deck", "beside": {"offset": 1, "spacing": 4}}), BRIDGE, [DECK]).note
    assert both.startswith(f"{SHARED} Lever rule: ")


def test_wind_on_a_leg_that_stands_upright() -> None:
    """Measured along the slope, a chain may rise; measured on plan, or travelled by a train, it may not."""
    tower = Truss({"A": (0, 0), "B": (3, 0), "C": (0, 4)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    wind = LineLoad("wind", "A,C", number(2), number(2), per="slope", direction="right")
    assert [(load.joint, load.fx, load.fy) for load in spread(wind, tower).loads] == [("A", 4, 0), ("C", 4, 0)]
    pressed = LineLoad("wind", "A,C", number(2), number(2), direction="normal")
    assert [(load.fx, load.fy) for load in spread(pressed, tower).loads] == [(4, 0), (4, 0)]
    faults = rule_faults(LineLoad("snow", "A,C", number(2), number(2)), tower)
    assert len(faults) == 1
    assert "A and C stand one above the other" in faults[0]
