"""Figures of loads, influence lines, trains and envelopes: nothing collides, all is drawn as the records say."""

import itertools
import math
import os
import re
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import replace
from functools import cache

import drawn_trusses
import pytest
import trade_trusses
from stated_truss import Stated
from test_figures import arrows, crossed, labels, texts

from trusscalc.chains import chain_of
from trusscalc.decimals import rounded
from trusscalc.envelopes import Envelope, envelope
from trusscalc.exact import ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.influence import InfluenceLine, influence_line, influence_lines
from trusscalc.loads import Combination, JointLoad, LoadCase
from trusscalc.panelloads import LineLoad, PointLoad, Rule, SelfWeight, Spread, spread
from trusscalc.publishedtrains import published
from trusscalc.render.draw import svg
from trusscalc.sheet.arranging import aligned
from trusscalc.sheet.board import Board
from trusscalc.sheet.envelopeelevation import envelope_elevation
from trusscalc.sheet.envelopefigure import envelope_diagrams
from trusscalc.sheet.hatching import hatched, interrupted
from trusscalc.sheet.influencefigure import influence_figure
from trusscalc.sheet.lettering import SMALLEST, Box, boxes_of, overlaps
from trusscalc.sheet.loadfigure import load_figure
from trusscalc.sheet.marks import Arrow, Figure, Label, Ring, Stroke
from trusscalc.sheet.ordinates import areas
from trusscalc.sheet.traindrawing import axles_on
from trusscalc.trains import MovingLoad, Train
from trusscalc.travel import Extreme, Stand, extremes
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile


def built(stated: Stated) -> Truss:
    """Return a stated truss."""
    return Truss(stated.joints, stated.members, stated.supports)


def upper(last: int, first: int = 0) -> tuple[str, ...]:
    """Return the joints of an upper chord."""
    return tuple(f"U{i}" for i in range(first, last + 1))


def lower(last: int) -> tuple[str, ...]:
    """Return the joints of a lower chord."""
    return tuple(f"L{i}" for i in range(last + 1))


TRUSSES = {
    "pratt": (built(trade_trusses.pratt(6)), lower(6), ("U2-L3", "L2-L3", "L0.y")),
    "long pratt": (built(trade_trusses.pratt(24)), lower(24), ("U7-L8", "U11-U12")),
    "deck warren": (built(trade_trusses.warren(6)), upper(5), ("U2-L3", "L2-L3", "L6.y")),
    "parker": (built(trade_trusses.parker(8)), lower(8), ("U1-U2", "U2-L3", "V(L2-L3)")),
    "cantilever": (drawn_trusses.cantilever()[0], ("W1", "A", "C", "E"), ("B-C", "A-C")),
    "k": (built(trade_trusses.k_truss(8)), lower(8), ("M1-U2", "L2-M2", "U3-U4")),
    "roof": (drawn_trusses.fink()[0], ("A", "E", "T", "F", "B"), ("E-T", "C-D")),
    "backwards": (built(trade_trusses.pratt(6)), tuple(reversed(lower(6))), ("U2-L3",)),
}
NAMES = sorted(TRUSSES)
TRUCK = Train("truck", (35, 145, 145), ("4.3", "4.3"), impact="0.33", lane="9.3")
SINGLE = Train("single axle", (100,))
DOZEN = Train("dozen", (10,) * 12, ("1.2",) * 11, beside=("0.8", 5))
RAIL = published("Cooper E80", "kN", "m").trains[0]
TRAINS = (TRUCK, SINGLE, DOZEN, RAIL)


@cache
def lines_of(name: str) -> tuple[InfluenceLine, ...]:
    """Return the influence lines of a truss."""
    truss, joints, targets = TRUSSES[name]
    return influence_lines(truss, targets, joints)


@cache
def extremes_of(name: str) -> list[tuple[InfluenceLine, Extreme, Train]]:
    """Return what each train makes of each line, largest and least."""
    return [
        (line, extreme, train) for line in lines_of(name) for train in TRAINS for extreme in extremes(line, [train])
    ]


@cache
def enveloped(name: str, members: tuple[str, ...] = ()) -> Envelope:
    """Return the envelope of all or some members under dead load, wind and a truck."""
    truss, joints, _ = TRUSSES[name]
    chain = chain_of(truss, joints)
    cases = (
        LoadCase("dead", dict.fromkeys(joints[1:-1], (0, -20))),
        LoadCase("wind", dict.fromkeys(joints[1:-1], (3, "8.5"))),
    )
    combinations = (
        Combination("1.4D", {"dead": "1.4"}),
        Combination("1.2D+1.6L", {"dead": "1.2", "live": "1.6"}),
        Combination("uplift", {"dead": ("1.25", "0.9"), "wind": 4}, optional=["wind"]),
    )
    moving = (MovingLoad("live", (TRUCK,), chain),)
    stated = TrussFile(truss, cases, combinations, chains=(chain,), trains=(TRUCK,), moving=moving)
    return envelope(stated, members or "all")


def rules_on(name: str) -> list[Rule]:
    """Return rules of every kind on a truss's chain."""
    along = TRUSSES[name][1]
    half = number("0.5")
    return [
        LineLoad("c", along, number("2.4"), number("2.4")),
        LineLoad("c", along, number(2), number(5), begins=number("3.5"), ends=number(9)),
        LineLoad("c", along, half, half, direction="normal"),
        LineLoad("c", along, half, half, direction="left"),
        PointLoad("c", along, number(12), number(7)),
        SelfWeight("c", number("0.85")),
    ]


def loaded(truss: Truss, rules: list[Rule], *stated: JointLoad) -> tuple[Figure, LoadCase, list[Spread]]:
    """Return the load figure of rules and loads at joints, with the case and what became of the rules."""
    spreads = [spread(rule, truss) for rule in rules]
    case = LoadCase("c", [*stated, *(load for each in spreads for load in each.loads)])
    return load_figure(truss, case, spreads), case, spreads


def figures_of(name: str) -> Iterator[Figure]:
    """Yield every kind of figure of a truss."""
    for line in lines_of(name):
        yield influence_figure(line)
    for line, extreme, train in extremes_of(name):
        yield influence_figure(line, extreme, train)
    few = tuple(member.name for member in TRUSSES[name][0].members[:5])
    for found in (enveloped(name), enveloped(name, few)):
        yield from envelope_diagrams(found)
        yield envelope_elevation(found)
    truss, rules = TRUSSES[name][0], rules_on(name)
    for chosen in (rules, rules[:1], rules[2:4], [*rules[:2], *rules[4:]]):
        yield loaded(truss, chosen)[0]


# --- what every figure keeps ------------------------------------------------------------------------------


@pytest.mark.parametrize("name", NAMES)
def test_nothing_collides_and_nothing_is_cut_off(name: str) -> None:
    """No label on another or on a line, every mark on the figure, no letter under 7 points, captions that end."""
    for figure in figures_of(name):
        assert overlaps(figure) == ()
        assert [label.text for label in crossed(figure)] == []
        assert figure.width <= 170.001
        assert figure.height <= 190
        assert figure.height % 5 == pytest.approx(0)
        for box in (box for mark in figure.marks for box in boxes_of(mark)):
            left, low, right, high = box.bounds
            assert min(left, low) >= -0.01
            assert right <= figure.width + 0.01
            assert high <= figure.height + 0.01
        assert all(label.size >= SMALLEST for label in labels(figure))
        assert figure.caption.endswith(".")
        assert figure.alt.endswith(".")
        assert ".." not in figure.caption + figure.alt


def test_no_colour_carries_a_meaning() -> None:
    """All is black and grey but a reaction sought, which is an arrow of its own with its name."""
    for name in ("pratt", "k"):
        for figure in figures_of(name):
            coloured = [mark for mark in figure.marks if mark.ink == "accent"]
            assert all(isinstance(mark, Arrow | Label) for mark in coloured)
            assert bool(coloured) == ("Influence line of the reaction" in figure.caption)


def test_figures_become_pictures() -> None:
    """The renderer draws them, names that read as markup included."""
    truss = drawn_trusses.hostile()[0]
    line = influence_line(truss, "$x$-\\frac", ["\\frac", "north end post"])
    assert svg(influence_figure(line, extremes(line, [SINGLE])[0], SINGLE)).startswith("<?xml")
    assert "north end post" in texts(influence_figure(line))


# --- influence lines --------------------------------------------------------------------------------------


def curve(figure: Figure) -> list[Stroke]:
    """Return the strokes of the influence line itself, left to right."""
    return [mark for mark in figure.marks if isinstance(mark, Stroke) and mark.width == 0.45]


def joint_abscissas(figure: Figure) -> list[float]:
    """Return where the joints of the loaded chain stand, left to right."""
    rings = [mark for mark in figure.marks if isinstance(mark, Ring) and mark.fill == "black"]
    return sorted(ring.centre[0] for ring in rings)


def left_to_right(line: InfluenceLine) -> list[Exact]:
    """Return the ordinates in the order in which their joints stand on the paper."""
    places = {joint.name: joint.x for joint in line.truss.joints}
    pairs = zip(line.chain.joints, line.ordinates, strict=True)
    return [ordinate for _, ordinate in sorted(pairs, key=lambda pair: places[pair[0]])]


def height_of_one(figure: Figure) -> float:
    """Return the height of an ordinate of 1 as the caption states it, mm."""
    stated = re.search(r"ordinates 1 cm = ([0-9.]*[0-9])", figure.caption)
    assert stated is not None
    return 10.0 / float(stated[1])


@pytest.mark.parametrize("name", NAMES)
def test_the_line_is_drawn_to_scale_below_its_truss(name: str) -> None:
    """Every vertex stands straight below its joint, as high above the next as the stated scale has it."""
    for line in lines_of(name):
        figure = influence_figure(line)
        points = {point for stroke in curve(figure) for point in stroke.points}
        found = []
        inner = list(zip(joint_abscissas(figure), left_to_right(line), strict=True))[1:-1]
        for x, ordinate in inner:
            (height,) = {y for at, y in points if abs(at - x) < 0.01}
            found.append((float(ordinate), height))
        one = height_of_one(figure)
        for (ordinate, height), (other, its_height) in itertools.combinations(found, 2):
            assert height - its_height == pytest.approx(one * (ordinate - other), abs=0.01)


def test_the_member_sought_is_heavy_and_the_chain_is_marked() -> None:
    """One heavy bar, as many filled joints as the chain has; a panel's shear has a chain line instead."""
    for line in (*lines_of("k"), *lines_of("parker")):
        figure = influence_figure(line)
        heavy = [mark for mark in figure.marks if isinstance(mark, Stroke) and mark.width == 0.7]
        panel = [mark for mark in figure.marks if isinstance(mark, Stroke) and mark.dash == "section"]
        assert (len(heavy), len(panel)) == ((0, 1) if line.kind == "shear" else (1, 0))
        assert len(joint_abscissas(figure)) == len(line.chain.joints)


def test_ordinates_areas_and_zero_points_are_lettered() -> None:
    """The figure letters what hand calculation gives for a 6-panel Pratt: U2-L3 takes the panel's shear, over sin."""
    line = lines_of("pratt")[0]
    figure = influence_figure(line)
    sine = 6 / math.sqrt(61)  # panels of 5 m, 6 m deep
    shears = [0, -1 / 6, -2 / 6, 3 / 6, 2 / 6, 1 / 6, 0]
    expected = [f"{shear / sine:.3f}".replace("-", "−") if shear else "0" for shear in shears]
    assert all(texts(figure).count(text) >= expected.count(text) for text in expected)
    # similar triangles: the shear changes sign at 2/5 of the third panel
    assert {"12 m", "T, area +5.858 m", "C, area −2.603 m"} <= set(texts(figure))
    assert pytest.approx(18 * 0.5 / 2 / sine, abs=5e-4) == 5.858
    assert pytest.approx(12 / 3 / 2 / sine, abs=5e-4) == 2.603
    assert "12 m from L0" in figure.alt
    assert set(lower(6)) | {"5", "10", "15", "20", "25", "30"} <= set(texts(figure))


@pytest.mark.parametrize("name", NAMES)
def test_areas_of_one_sign_add_up(name: str) -> None:
    """The stretches of one sign have together the areas of the record, and no two alike stand side by side."""
    for line in lines_of(name):
        found = areas(line)
        assert sum((area.size for area in found if area.size.sign() > 0), start=ZERO) == line.positive_area
        assert sum((area.size for area in found if area.size.sign() < 0), start=ZERO) == line.negative_area
        for first, second in itertools.pairwise(found):
            assert first.end <= second.start
            assert first.end < second.start or first.size.sign() != second.size.sign()


def test_positive_and_negative_areas_differ_in_direction() -> None:
    """Hatching is upright above the base line and oblique below it, in grey."""
    line = lines_of("pratt")[0]
    figure = influence_figure(line)
    hatching = [m for m in figure.marks if isinstance(m, Stroke) and m.ink == "grey" and m.width == 0.18]
    upright = [m for m in hatching if abs(m.points[0][0] - m.points[1][0]) < 0.01]
    oblique = [m for m in hatching if m not in upright]
    assert len(upright) > 20
    assert len(oblique) > 20
    assert min(y for m in upright for _, y in m.points) >= max(y for m in oblique for _, y in m.points) - 0.01
    for mark in oblique:
        (x0, y0), (x1, y1) = mark.points
        assert abs(y1 - y0) == pytest.approx(abs(x1 - x0), abs=0.01)


def test_routes_that_differ_open_the_caption() -> None:
    """A line on which the routes do not agree says so before anything else."""
    line = lines_of("pratt")[0]
    spoilt = replace(line, reasons=("differs", *line.reasons[1:]))
    assert influence_figure(spoilt).caption.startswith("The routes do not agree")
    assert not influence_figure(line).caption.startswith("The routes do not agree")


# --- trains -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", NAMES)
def test_axles_stand_at_their_places_on_the_line_and_on_the_truss(name: str) -> None:
    """Two arrows for each axle on the chain, straight above each other, as far from the first joint as stated."""
    for line, extreme, train in extremes_of(name):
        figure = influence_figure(line, extreme, train)
        ends = joint_abscissas(figure)
        first, last = (ends[0], ends[-1]) if line.chain.joints[0] != "L6" else (ends[-1], ends[0])
        paper = (last - first) / float(line.positions[-1])
        expected = sorted(first + paper * float(axle.position) for axle in axles_on(train, extreme.stand))
        down = [a for a in arrows(figure) if a.ink == "black" and a.tail[0] == a.tip[0] and not a.open_head]
        on_line = sorted(a.tip[0] for a in down if a.head_length == 2.2)
        on_truss = sorted(a.tip[0] for a in down if a.head_length == 1.8)
        assert on_line == pytest.approx(expected, abs=0.01)
        assert on_truss == pytest.approx(expected, abs=0.01)
        assert all(a.tail[1] > a.tip[1] for a in down)


def test_loads_distances_and_travel_are_lettered() -> None:
    """A truck stated by hand over a Pratt: loads with impact, spacings, distance to the leading axle, lane load."""
    line = lines_of("pratt")[0]
    lead = number("23.6")
    places = (lead, lead - number("4.3"), lead - number("8.6"))
    stand = Stand("truck", "forward", lead, places, (number("4.3"),) * 2, False)  # noqa: FBT003
    lane = (number(12), number(30), number("9.3"))
    figure = influence_figure(line, Extreme(number("227.9"), stand, (), (lane,), "truck"), TRUCK)
    written = texts(figure)
    assert written.count("192.85") == 2  # 1.33 times 145
    assert {"46.55", "23.6 m", "9.3 kN/m, 12 to 30 m", "travel"} <= set(written)
    for axle in (places[0], places[1]):  # the ordinate under each axle between joints, lettered or in the caption
        under = f"{rounded(line.at(axle), 3):f}"
        assert under in written or f"{under} at" in figure.caption
    assert written.count("4.3") == 2
    level = [a for a in arrows(figure) if a.tail[1] == a.tip[1]]
    assert [a.tip[0] > a.tail[0] for a in level] == [True]
    assert "leading axle 23.6 m from L0" in figure.caption
    assert "impact 0.33" in figure.caption
    assert "46.55 kN at 23.6 m, 192.85 kN at 19.3 m, 192.85 kN at 15 m" in figure.alt
    back = influence_figure(line, Extreme(number(1), replace(stand, direction="backward"), (), (), "truck"), TRUCK)
    assert [a.tip[0] > a.tail[0] for a in arrows(back) if a.tail[1] == a.tip[1]] == [False]


def test_axles_off_the_chain_and_axles_left_out_are_told_apart() -> None:
    """Neither is drawn; the caption names them and why."""
    line = lines_of("pratt")[0]
    train = replace(TRUCK, omit=True)
    gap = number("4.3")
    stand = Stand("truck", "forward", number(32), (None, number("27.7"), None), (gap, gap), False)  # noqa: FBT003
    figure = influence_figure(line, Extreme(number(1), stand, (), (), "truck"), train)
    assert "Axle 1 is off the chain, not drawn." in figure.caption
    assert "Axle 3 is left out, for it helps." in figure.caption
    assert len([a for a in arrows(figure) if a.head_length == 1.8]) == 1
    assert "27.7 m" in texts(figure)  # to the first axle that stands on the chain


def test_no_adverse_position_is_said() -> None:
    """Without a stand no axle is drawn, and the caption says why."""
    line = lines_of("pratt")[2]
    least = extremes(line, [SINGLE])[1]
    assert least.stand is None
    figure = influence_figure(line, least, SINGLE)
    assert "no position of axles on L0 to L6 is adverse" in figure.caption
    assert [a for a in arrows(figure) if a.head_length == 1.8] == []


def test_uniform_loads_lie_apart() -> None:
    """Bands of uniform load that overlap along the chain stand in rows of their own."""
    line = lines_of("pratt")[0]
    patches = ((ZERO, number(20), number(5)), (number(10), number(30), number(8)), (number(22), number(30), number(3)))
    figure = influence_figure(line, Extreme(ZERO, None, (), patches, "truck"), TRUCK)
    bands = [m for m in figure.marks if isinstance(m, Stroke) and m.closed and m.width == 0.18 and len(m.points) == 4]
    spans = [(min(x for x, _ in m.points), max(x for x, _ in m.points), m.points[0][1]) for m in bands]
    assert len(spans) == 3
    assert len({round(level, 2) for _, _, level in spans}) == 2
    for (a, b, level), (c, d, other) in itertools.combinations(spans, 2):
        assert level != other or b <= c + 0.01 or d <= a + 0.01
    assert {"5 kN/m, 0 to 20 m", "8 kN/m, 10 to 30 m", "3 kN/m, 22 to 30 m"} <= set(texts(figure))


# --- envelopes --------------------------------------------------------------------------------------------


def bars_of(figure: Figure) -> list[tuple[float, float]]:
    """Return abscissa and signed length of each bar of a diagram, the legend's left out."""
    tension = [m for m in figure.marks if isinstance(m, Stroke) and m.width == 0.7 and m.points[0][0] == m.points[1][0]]
    hollow = [m for m in figure.marks if isinstance(m, Stroke) and m.closed and m.width == 0.27]
    found = [(m.points[0][0], m.points[1][1] - m.points[0][1]) for m in tension]
    found += [((m.points[0][0] + m.points[3][0]) / 2, m.points[1][1] - m.points[0][1]) for m in hollow]
    return sorted((x, size) for x, size in found if size > 0 or size < 0)


def test_bars_are_as_long_as_forces_are_large() -> None:
    """On the stated scale: tension upwards in a single line, compression downwards in a double one."""
    found = enveloped("pratt", ("U2-L3", "U2-U3", "L2-L3"))
    (figure,) = envelope_diagrams(found)
    stated = re.search(r"1 cm = (\d+) kN", figure.caption)
    assert stated is not None
    forces = [choice.value for name in found.members for choice in (found.members[name].max, found.members[name].min)]
    expected = [float(force) * 10 / float(stated[1]) for force in forces if force]
    assert sorted(size for _, size in bars_of(figure)) == pytest.approx(sorted(expected), abs=0.01)


def test_values_letters_and_combinations_are_lettered() -> None:
    """Each end bears the value, its letter and the number of its combination, which the caption names."""
    found = enveloped("pratt", ("U2-L3", "U2-U3"))
    (figure,) = envelope_diagrams(found)
    names = [combination.name for combination in found.combinations]
    for member in found.members.values():
        for choice in (member.max, member.min):
            place = names.index(choice.combination) + 1
            value = f"{rounded(choice.value, 1)}".replace("-", "−")
            assert f"{value} {'T' if choice.value > ZERO else 'C'} ({place})" in texts(figure)
            assert f"({place}) {choice.combination}" in figure.caption
            assert choice.combination in figure.alt
    assert "The force reverses in U2–L3 and U2–U3." in figure.caption
    assert all(member.reversal for member in found.members.values())


def test_members_come_in_rows_and_the_largest_only_when_very_many() -> None:
    """Up to 48 members on a figure in two rows; of more than 96 the largest, which is said."""
    found = enveloped("long pratt")
    figures = envelope_diagrams(found)
    assert len(found.members) == 93
    assert len(figures) == 2
    written = [text for figure in figures for text in texts(figure)]
    assert all(name.replace("-", "–") in written for name in found.members)
    many = {f"M{i}-N{i}": replace(each, member=f"M{i}-N{i}") for i, each in enumerate(found.members.values())}
    more = {name: replace(each, member=f"X{name}") for name, each in found.members.items()}
    drawn = envelope_diagrams(replace(found, members=many | more))
    assert all("Only the 96 of 186 members with the largest forces are drawn." in figure.caption for figure in drawn)


def test_undecided_members_and_differing_routes_are_said() -> None:
    """The caption opens with a disagreement, and names what statics does not decide."""
    found = enveloped("pratt", ("U2-L3", "U2-U3"))
    spoilt = {name: replace(each, differing=("U2-U3",)) for name, each in found.cases.items()}
    for figure in (*envelope_diagrams(replace(found, cases=spoilt)), envelope_elevation(replace(found, cases=spoilt))):
        assert figure.caption.startswith("The routes do not agree for U2–U3")
    lacking = replace(found, undecided={"L1-L2": "shares a redundancy"})
    assert "Not decided by statics: L1–L2." in envelope_diagrams(lacking)[0].caption
    assert envelope_diagrams(replace(found, members={})) == ()


@pytest.mark.parametrize("name", NAMES)
def test_every_member_bears_both_forces_on_the_truss(name: str) -> None:
    """Both values of each member stand on the elevation, or the caption says that they have no room."""
    found = enveloped(name)
    figure = envelope_elevation(found)
    written = [part for text in texts(figure) for part in text.split(", ")]
    missing = figure.caption.partition("No room in the drawing for the values of ")[2]
    for member in found.members.values():
        for choice in (member.max, member.min):
            value = f"{rounded(choice.value, 1)}".replace("-", "−")
            assert not choice.value or any(text.startswith(f"{value} ") for text in written) or missing
    assert not missing


# --- loads ------------------------------------------------------------------------------------------------


def bands_of(figure: Figure) -> list[Stroke]:
    """Return the bands of spread loads."""
    return [m for m in figure.marks if isinstance(m, Stroke) and m.closed and m.width == 0.18]


def test_a_band_covers_its_stretch_and_is_as_high_as_it_is_intense() -> None:
    """A trapezoid from 2 to 5 between 7.5 and 20 m on a scale of 1:200; beside it an even load of 2.5."""
    truss, along, _ = TRUSSES["pratt"]
    rules: list[Rule] = [
        LineLoad("c", along, number(2), number(5), begins=number("7.5"), ends=number(20)),
        LineLoad("c", along, number("2.5"), number("2.5")),
    ]
    figure, _, _ = loaded(truss, rules)
    assert "1:200" in figure.caption
    trapezoid, even = bands_of(figure)
    xs = [x for x, _ in trapezoid.points]
    assert max(xs) - min(xs) == pytest.approx(12.5 * 5)
    left = [y for x, y in trapezoid.points if x == min(xs)]
    right = [y for x, y in trapezoid.points if x == max(xs)]
    heights = [max(side) - min(side) for side in (left, right)]
    assert heights == pytest.approx([2 / 5 * 7, 7], abs=0.01)
    assert max(y for _, y in even.points) - min(y for _, y in even.points) == pytest.approx(3.5, abs=0.01)
    assert max(y for _, y in even.points) < min(left + right)  # beyond the other one, not on it
    assert {"(1) 2 to 5 kN/m", "(2) 2.5 kN/m"} <= set(texts(figure))


@pytest.mark.parametrize(
    ("direction", "way"), [("down", (0, -1)), ("up", (0, 1)), ("left", (-1, 0)), ("right", (1, 0)), ("normal", None)]
)
def test_small_arrows_show_how_a_load_acts(direction: str, way: tuple[int, int] | None) -> None:
    """On a polygonal chord all arrows of a band point the way the load acts; a suction turns them round."""
    truss = TRUSSES["parker"][0]
    along = upper(7, 1)
    for size, sign in ((number(2), 1), (number(-2), -1)):
        figure, _, spreads = loaded(truss, [LineLoad("c", along, size, size, direction=direction)])
        small = [a for a in arrows(figure) if a.head_length == 1.5]
        assert len(small) >= 6
        units = [((a.tip[0] - a.tail[0]), (a.tip[1] - a.tail[1])) for a in small]
        units = [(dx / math.hypot(dx, dy), dy / math.hypot(dx, dy)) for dx, dy in units]
        allowed = [way] if way else [tuple(map(float, line.direction)) for line in spreads[0].lines]
        for dx, dy in units:
            assert any(math.dist((dx, dy), (sign * x, sign * y)) < 0.01 for x, y in allowed)


def test_a_load_that_changes_sign_turns_round() -> None:
    """A band from uplift to pressure is two triangles with arrows either way."""
    truss, along, _ = TRUSSES["deck warren"]
    figure, _, _ = loaded(truss, [LineLoad("c", along, number(-6), number(4))])
    assert len(bands_of(figure)) == 2
    small = [a for a in arrows(figure) if a.head_length == 1.5]
    assert {a.tip[1] > a.tail[1] for a in small} == {True, False}


def test_a_force_stands_between_its_joints() -> None:
    """A force at 17 m stands 17 m from the chain's start, drawn beyond the bands there."""
    truss, along, _ = TRUSSES["pratt"]
    rules: list[Rule] = [LineLoad("c", along, number(2), number(2)), PointLoad("c", along, number(12), number(17))]
    figure, _, _ = loaded(truss, rules)
    (force,) = [
        a for a in arrows(figure) if a.head_length == 2.2 and a.tip[1] < a.tail[1] and math.dist(a.tip, a.tail) > 10
    ]
    (band,) = bands_of(figure)
    assert force.tip[0] - min(x for x, _ in band.points) == pytest.approx(17 * 5, abs=0.01)
    assert force.tip[1] < min(y for _, y in band.points)
    assert "(2) 12 kN" in texts(figure)


def test_joint_loads_below_are_those_of_the_case() -> None:
    """Every joint load stands at the drawing below with its value; loads stated at joints stand above too."""
    truss, along, _ = TRUSSES["pratt"]
    stated = JointLoad("U2", ZERO, number(-7))
    figure, case, spreads = loaded(truss, [LineLoad("c", along, number("2.4"), number("2.4"))], stated)
    written = texts(figure)
    assert written.count("12") == 5  # 2.4 kN/m on panels of 5 m
    assert written.count("6") == 2
    assert written.count("7") == 2
    total = sum((load.fy for load in case.loads), start=ZERO)
    assert total - stated.fy == spreads[0].applied[1] == number(-72)
    assert "ΣFy −72 kN" in figure.caption
    assert "ΣM about (0, 0) −1080 kN m" in figure.caption
    assert "U2 (0, −7)" in figure.alt


def test_rules_are_told_in_words() -> None:
    """Area loads with their width, stretches, directions, weights and the measure of length stand in the caption."""
    truss, along, _ = TRUSSES["deck warren"]
    rules: list[Rule] = [
        LineLoad("c", along, number("1.2"), number("1.2"), width=number(5)),
        LineLoad("c", along, number("0.6"), number("0.6"), begins=number(6), ends=number(18), direction="normal"),
        PointLoad("c", along, number(12), number(17), direction=(number(3), number(-4))),
        SelfWeight("c", number("0.85"), members=("L0-L1", "L1-L2")),
    ]
    figure, _, _ = loaded(truss, rules)
    for words in (
        "(1) 1.2 kN/m² on 5 m of width of plan length on U0 to U5, downwards",
        "(2) 0.6 kN/m of true length on U1 to U3 from 6 to 18 m, at right angles to the chain",
        "(3) 12 kN on U2 to U3, 17 m from the start of the chain, along (3, −4)",
        "(4) self-weight of L0–L1 and L1–L2, 0.85 kN/m",
    ):
        assert words in figure.caption
    assert {"(1) 6 kN/m", "(2) 0.6 kN/m", "(3) 12 kN", "(4) 0.85 kN/m"} <= set(texts(figure))


def test_rules_of_other_cases_are_passed_over() -> None:
    """A rule of another case is not drawn; a case without rules is drawn once."""
    truss, along, _ = TRUSSES["pratt"]
    other = spread(LineLoad("snow", along, number(2), number(2)), truss)
    case = LoadCase("dead", {"L1": (0, -5)})
    figure = load_figure(truss, case, [other])
    assert bands_of(figure) == []
    assert texts(figure).count("5") == 1
    assert "as stated at joints" in figure.caption


def test_symbols_stay_symbols() -> None:
    """A load in symbols is lettered with them, drawn at their values."""
    truss, along, _ = TRUSSES["pratt"]
    symbols = {"q": number(3)}
    each = spread(LineLoad("c", along, number("2*q", symbols), number("2*q", symbols)), truss)
    figure = load_figure(truss, LoadCase("c", each.loads, symbols=symbols), [each])
    assert "(1) 2q kN/m" in texts(figure)
    assert "10q" in texts(figure)
    assert "ΣFy −60q kN" in figure.caption


# --- parts ------------------------------------------------------------------------------------------------


def test_hatching_fills_and_gives_way() -> None:
    """Lines cover an area that is not convex, and keep from a turned box."""
    arrowhead = [(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (5.0, 2.0), (0.0, 10.0)]
    lines = list(hatched(arrowhead, 90.0, 0.1))
    assert sum(math.dist(*line) for line in lines) * 0.1 == pytest.approx(60.0, rel=0.02)
    box = Box(5.0, 1.0, 1.0, 0.5, math.cos(0.5), math.sin(0.5))
    pieces = [piece for line in lines for piece in interrupted(line, [box], gap=0.2)]
    assert sum(math.dist(*line) for line in lines) - sum(math.dist(*piece) for piece in pieces) > 0
    for (x0, y0), (x1, y1) in pieces:
        dx, dy = (x0 + x1) / 2 - box.x, (y0 + y1) / 2 - box.y
        assert abs(dx * box.cos + dy * box.sin) > 1.19 or abs(-dx * box.sin + dy * box.cos) > 0.69


def test_boards_are_aligned() -> None:
    """What has one abscissa on two boards has one on the figure, however far each board reaches."""
    boards = [Board(), Board()]
    boards[0].line((0.0, 0.0), (0.0, 8.0), width=0.3)
    boards[0].line((0.0, 0.0), (90.0, 0.0), width=0.3)
    boards[1].line((0.0, 0.0), (0.0, 12.0), width=0.3)
    boards[1].line((0.0, 0.0), (-30.0, 0.0), width=0.3)
    figure = aligned(boards, "", "")
    upright = [m for m in figure.marks if isinstance(m, Stroke) and m.points[0][0] == m.points[1][0]]
    assert upright[0].points[0][0] == pytest.approx(upright[1].points[0][0], abs=0.002)
    assert min(y for _, y in upright[0].points) > max(y for _, y in upright[1].points)


def test_figures_are_quick() -> None:
    """A figure of a 24-panel truss takes a small part of a second (measured 0.1 to 0.3 s on a busy machine)."""
    line, extreme, train = extremes_of("long pratt")[0]
    found = enveloped("long pratt")
    for draw in (lambda: influence_figure(line, extreme, train), lambda: envelope_diagrams(found)):
        spent = []
        for _ in range(3):
            start = time.perf_counter()
            draw()
            spent.append(time.perf_counter() - start)
        assert min(spent) < 1.0


def test_same_input_same_marks_in_any_process() -> None:
    """Two processes with different hash seeds draw the same marks."""
    program = (
        "import sys; sys.path.insert(0, sys.argv[1]); import test_load_figures as t, hashlib;"
        "print(hashlib.sha256(repr(list(t.figures_of('cantilever'))).encode()).hexdigest())"
    )
    found = set()
    for seed in ("1", "2"):
        here = os.path.dirname(__file__)  # noqa: PTH120 - handed to another process as text
        command = [sys.executable, "-c", program, here]
        result = subprocess.run(command, env={**os.environ, "PYTHONHASHSEED": seed}, capture_output=True, check=True)
        found.add(result.stdout)
    assert len(found) == 1
