"""Published trains: the figures, what is said of where they come from, and printed tables they must reproduce.

Marked "read" here: read in a secondary source (a copied page of the standard, published summaries, an agency's
manual). Everything else is from memory, and the data say so to the reader of a sheet.
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from types import SimpleNamespace
from typing import Any

import pytest

from trusscalc.decimals import rounded
from trusscalc.errors import UnitError, UnknownNameError
from trusscalc.exact import ZERO, Exact, exact, rational
from trusscalc.publishedtrains import PUBLISHED, published
from trusscalc.trains import LoadModel, Train
from trusscalc.travel import extremes
from trusscalc.units import FORCES, LENGTHS, factor

ENGINE = ("40", "80", "80", "80", "80", "52", "52", "52", "52")
ENGINE_SPACING = ("8", "5", "5", "5", "9", "5", "6", "5")


def fixed(*spacing: str) -> tuple[tuple[Exact, Exact], ...]:
    """Return fixed spacings."""
    return tuple((exact(Fraction(each)), exact(Fraction(each))) for each in spacing)


def amounts(*texts: str) -> tuple[Exact, ...]:
    """Return exact numbers."""
    return tuple(exact(Fraction(text)) for text in texts)


FIGURES = [
    # read: US figures in published summaries, metric ones in a copy of the metric page of 3.6.1.2
    ("HL-93", 0, "kip", "ft", ("8", "32", "32"), (("14", "14"), ("14", "30")), "0.64", "0.33"),
    ("HL-93", 1, "kip", "ft", ("25", "25"), (("4", "4"),), "0.64", "0.33"),
    ("HL-93 metric", 0, "kN", "m", ("35", "145", "145"), (("4.3", "4.3"), ("4.3", "9.0")), "9.3", "0.33"),
    ("HL-93 metric", 1, "kN", "m", ("110", "110"), (("1.2", "1.2"),), "9.3", "0.33"),
    # from memory
    ("HL-93 fatigue", 0, "kip", "ft", ("8", "32", "32"), (("14", "14"), ("30", "30")), "0", "0.15"),
    ("HS20-44", 0, "kip", "ft", ("8", "32", "32"), (("14", "14"), ("14", "30")), "0", "0"),
    ("HS20-44", 1, "kip", "ft", ("18",), (), "0.64", "0"),
    ("HS20-44", 2, "kip", "ft", ("26",), (), "0.64", "0"),
    # read: axles and 1.6 m
    ("LM71", 0, "kN", "m", ("250",) * 4, (("1.6", "1.6"),) * 3, "0", "0"),
    # from memory
    ("AREMA alternate", 0, "kip", "ft", ("100",) * 4, (("5", "5"), ("6", "6"), ("5", "5")), "0", "0"),
    ("EV2", 0, "kip", "ft", ("24", "33.5"), (("15", "15"),), "0", "0"),
    ("EV3", 0, "kip", "ft", ("24", "31", "31"), (("15", "15"), ("4", "4")), "0", "0"),
    ("Type 3", 0, "kip", "ft", ("16", "17", "17"), (("15", "15"), ("4", "4")), "0", "0"),
]


@pytest.mark.parametrize("figures", FIGURES, ids=lambda row: f"{row[0]} {row[1]}")
def test_figures_in_published_units(figures: tuple[Any, ...]) -> None:
    """As printed; the mark stands at the list of figures."""
    name, which, force, length, axles, spacing, lane, impact = figures
    model = PUBLISHED[name]
    train = model.trains[which]
    assert (model.force, model.length) == (force, length)
    assert train.axles == amounts(*axles)
    assert train.spacing == tuple(amounts(*pair) for pair in spacing)
    assert (train.lane, train.impact, train.share) == (*amounts(lane, impact), 1)


def test_metric_figures_are_no_conversions() -> None:
    """The trap of HL-93: converted, the US truck is lighter and the axles stand otherwise than the metric text says."""
    converted = published("HL-93", "kN", "m").trains[0]
    metric = published("HL-93 metric", "kN", "m").trains[0]
    assert [rounded(axle, 2) for axle in converted.axles] == [rounded(exact(x), 2) for x in (35.59, 142.34, 142.34)]
    assert metric.axles == amounts("35", "145", "145")
    assert converted.axles[1] == 32 * exact(Fraction("4.4482216152605"))
    assert (rounded(converted.lane, 3), metric.lane) == (rounded(exact(9.340), 3), exact(Fraction("9.3")))
    assert converted.spacing[1][1] == exact(Fraction("9.144"))
    assert metric.spacing[1][1] == 9


def test_the_rule_of_hl_93() -> None:
    """Truck with lane or tandem with lane (read); 33 % on the axles only (read); axles that help left out."""
    for name in ("HL-93", "HL-93 metric"):
        model = PUBLISHED[name]
        assert len(model.trains) == 2
        assert all(train.impact == rational(33, 100) and train.lane and train.omit for train in model.trains)
        assert not any(train.follow or train.beside for train in model.trains)
        assert "multiple presence" in model.rule or "As HL-93" in model.rule


def test_two_trucks_carry_nine_tenths() -> None:
    """90 % of two trucks with 14 ft (from memory), 50 ft or more between them (read), 90 % of the lane load."""
    (train,) = PUBLISHED["HL-93 two trucks"].trains
    truck = PUBLISHED["HL-93"].trains[0]
    assert train.axles == tuple(axle * rational(9, 10) for axle in truck.axles * 2)
    assert train.lane == truck.lane * rational(9, 10)
    assert [low for low, _ in train.spacing] == [14, 14, 50, 14, 14]
    assert [low != high for low, high in train.spacing] == [False, False, True, False, False]
    assert "negative moment" in PUBLISHED["HL-93 two trucks"].rule


def test_lm71_has_uniform_load_beside_its_axles() -> None:
    """80 kN/m (read) from 0.8 m beside the end axles (from memory); alpha and dynamic factor are not in it."""
    (train,) = PUBLISHED["LM71"].trains
    assert train.beside == amounts("0.8", "80")
    assert train.omit
    assert "alpha" in PUBLISHED["LM71"].rule


class TestCooper:
    """The E-series: two engines and uniform load, in proportion to the driving axle."""

    def test_e80(self) -> None:
        """Driving axles and 8 kip/ft read; tender axles and spacings from memory."""
        model = PUBLISHED["Cooper E80"]
        (train,) = model.trains
        assert train.axles == amounts(*ENGINE, *ENGINE)
        assert train.spacing == fixed(*ENGINE_SPACING, "8", *ENGINE_SPACING)
        assert train.follow == amounts("5", "8")
        assert not train.omit
        assert "one track" in model.rule
        assert "share" in model.rule

    def test_sums(self) -> None:
        """568 kip an engine, 1136 kip over 109 ft: 10.42 kip/ft (computed; "about 10.3" read in a forum thread)."""
        (train,) = PUBLISHED["Cooper E80"].trains
        assert train.follow
        weight = sum(train.axles, ZERO)
        length = sum((low for low, _ in train.spacing), train.follow[0])
        assert (sum(train.axles[:9], ZERO), weight, length) == (568, 1136, 109)
        assert rounded(weight / length, 2) == rounded(exact(10.42), 2)

    @pytest.mark.parametrize("axle", ["10", "20", "30", "40", "50", "60", "70", "72.5", "90"])
    def test_other_classes_scale_linearly(self, axle: str) -> None:
        """Loads in proportion, distances as they are (read: E-loads prorate)."""
        (train,), (stated,) = published(f"Cooper E{axle}", "kip", "ft").trains, PUBLISHED["Cooper E80"].trains
        part = exact(Fraction(axle) / 80)
        assert train.follow
        assert stated.follow
        assert train.axles == tuple(load * part for load in stated.axles)
        assert max(train.axles) == exact(Fraction(axle))
        assert train.spacing == stated.spacing
        assert train.follow == (stated.follow[0], stated.follow[1] * part)
        assert train.name == f"Cooper E{axle}"
        assert f"E80 times {Fraction(axle)}/80" in train.source

    def test_the_shipped_classes(self) -> None:
        """E10 to E80 by tens."""
        classes = [name for name in PUBLISHED if name.startswith("Cooper")]
        assert classes == [f"Cooper E{axle}" for axle in range(10, 90, 10)]


@pytest.mark.parametrize("name", ["Cooper E5", "Cooper E500", "Cooper", "Cooper E-80", "HL93", "hs20", ""])
def test_unknown_names(name: str) -> None:
    """Said, with the nearest or the list."""
    with pytest.raises(UnknownNameError, match="there is no published train"):
        published(name, "kN", "m")


def test_unknown_units() -> None:
    """Of force and of length."""
    with pytest.raises(UnitError, match="unknown unit 'kips'"):
        published("LM71", "kips", "ft")
    with pytest.raises(UnitError, match="measure different things"):
        published("LM71", "kN", "kip")


@pytest.mark.parametrize("model", PUBLISHED.values(), ids=PUBLISHED)
def test_every_model_says_where_it_is_from(model: LoadModel) -> None:
    """Edition and clause, what is read and what is from memory, how it is applied; one name for one train."""
    assert model.published == model.name
    assert model.source.endswith(")") or "E80 times" in model.source
    assert "from memory" in model.source
    assert len(model.rule) > 20
    assert model.force in FORCES
    assert model.length in LENGTHS
    assert len({train.name for train in model.trains}) == len(model.trains) > 0
    assert all(train.source == model.source for train in model.trains)


# --- simple spans -----------------------------------------------------------------------------------------


def moment_at(section: Exact, span: Exact) -> SimpleNamespace:
    """Return the influence line of the moment of a simple span."""
    return SimpleNamespace(positions=(ZERO, section, span), ordinates=(ZERO, section * (span - section) / span, ZERO))


def largest_moment(trains: tuple[Train, ...], span: int, *, reach: int, steps: int) -> Exact:
    """Return the largest moment anywhere in a simple span: sections up to ``reach`` before midspan are tried."""
    middle = rational(span, 2)
    return max(
        extremes(moment_at(middle - rational(reach * step, steps), exact(span)), trains)[0].value
        for step in range(steps + 1)
    )


def shear_at_end(trains: tuple[Train, ...], span: int) -> Exact:
    """Return the largest end shear of a simple span."""
    line = SimpleNamespace(positions=(ZERO, exact(span)), ordinates=(exact(1), ZERO))
    return extremes(line, trains)[0].value


# AASHTO Standard Specifications, appendix A: maximum moments and end shears of one lane of HS20-44, simple spans,
# kip ft and kip, without impact (from memory; in two places the last digit is one off what the loads give, 58.56 kip at
# 50 ft and 1523.92 kip ft at 100 ft)
HS20_TABLE = [
    (40, "449.8", "55.2"),
    (50, "627.9", "58.5"),
    (60, "806.5", "60.8"),
    (70, "985.6", "62.4"),
    (80, "1164.9", "63.6"),
    (90, "1344.4", "64.5"),
    (100, "1524.0", "65.3"),
    (120, "1883.3", "66.4"),
]


@pytest.mark.parametrize(("span", "moment", "shear"), HS20_TABLE)
def test_hs20_table_of_simple_spans(span: int, moment: str, shear: str) -> None:
    """The truck governs; the greatest moment is 2 1/3 ft from midspan, which steps of 1/3 ft meet."""
    found = largest_moment(PUBLISHED["HS20-44 moment"].trains, span, reach=4, steps=12)
    shears = shear_at_end(PUBLISHED["HS20-44 shear"].trains, span)
    assert abs(found - exact(Fraction(moment))) < rational(1, 12)
    assert abs(shears - exact(Fraction(shear))) < rational(1, 12)
    assert (
        found == rational(72 * (3 * span - 14) ** 2, 36 * span) - 112
    )  # by hand: resultant and axle equally far from midspan


def test_hs20_long_span_is_the_lane_loading() -> None:
    """200 ft: 4100.0 kip ft and 90.0 kip in the table (from memory); wL^2/8 + PL/4 and wL/2 + P."""
    assert largest_moment(PUBLISHED["HS20-44 moment"].trains, 200, reach=1, steps=1) == 4100
    assert shear_at_end(PUBLISHED["HS20-44 shear"].trains, 200) == 90
    assert extremes(moment_at(exact(100), exact(200)), PUBLISHED["HS20-44"].trains)[0].train.endswith("for shear")


# AREMA Manual for Railway Engineering, chapter 15, table of maximum moments of E80, kip ft per rail (from memory)
E80_TABLE = [(20, "412.5"), (40, "1311.3"), (50, "1901.8"), (60, "2597.8")]


@pytest.mark.parametrize(("span", "moment"), E80_TABLE)
def test_cooper_e80_table_of_simple_spans(span: int, moment: str) -> None:
    """The greatest moment of the span, per rail: half the track's loads."""
    (train,) = PUBLISHED["Cooper E80"].trains
    found = largest_moment((replace(train, share=rational(1, 2)),), span, reach=3, steps=40)
    assert rounded(found, 1) == rounded(exact(Fraction(moment)), 1)


def test_cooper_e80_at_100_ft() -> None:
    """6446.3 kip ft per rail in the table as remembered, within 0.01 %: its last digits are not certain."""
    (train,) = PUBLISHED["Cooper E80"].trains
    found = largest_moment((replace(train, share=rational(1, 2)),), 100, reach=3, steps=30)
    assert abs(found / exact(6446.3) - 1) < rational(1, 10_000)


def test_a_lost_axle_is_noticed() -> None:
    """Negative control: the same comparisons without one axle, or with one in a wrong place, fail."""
    (train,) = PUBLISHED["Cooper E80"].trains
    per_rail = replace(train, share=rational(1, 2))
    short = replace(
        per_rail, axles=train.axles[:12] + train.axles[13:], spacing=train.spacing[:12] + train.spacing[13:]
    )
    moved = replace(per_rail, spacing=(*train.spacing[:11], *fixed("6"), *train.spacing[12:]))
    span, moment = E80_TABLE[-1]
    for wrong in (short, moved):
        found = largest_moment((wrong,), span, reach=3, steps=20)
        assert abs(found - exact(Fraction(moment))) > 1


def test_hl_93_at_midspan_by_hand() -> None:
    """Truck at midspan of 100 ft with its heavy axles 14 ft apart, 1.33 times; lane load full: by hand, no source.

    32 x 25 + (32 + 8) x 18 = 1520; 0.64 x 100^2 / 8 = 800. The tandem gives 25 x 25 + 25 x 23 = 1200.
    """
    largest, least = extremes(moment_at(exact(50), exact(100)), PUBLISHED["HL-93"].trains)
    assert largest.value == exact(Fraction("1.33")) * 1520 + 800
    assert largest.train == "HL-93 truck with lane load"
    assert dict(largest.parts)["lane"] == 800
    assert largest.stand
    assert largest.stand.spacing == (14, 14)
    assert least.value == 0


def test_hl_93_tandem_governs_a_short_span() -> None:
    """Midspan of 20 ft: tandem 25 x 5 + 25 x 3 = 200 against 32 x 5 of the truck (by hand, no source)."""
    largest, _ = extremes(moment_at(exact(10), exact(20)), PUBLISHED["HL-93"].trains)
    assert largest.train == "HL-93 tandem with lane load"
    assert largest.value == exact(Fraction("1.33")) * 200 + rational(64, 100) * 50


def test_lm71_at_midspan_by_hand() -> None:
    """Midspan of 10 m (by hand, no source): 500 x (2.1 + 1.3) while two axles stand on either side.

    The group stands 0.8 m out of the middle, where one uniform load is longer: 80 (2.6^2 + 1.0^2) / 4.
    """
    largest, _ = extremes(moment_at(exact(5), exact(10)), PUBLISHED["LM71"].trains)
    assert dict(largest.parts) == {"axles": exact(1700), "beside": exact(Fraction("155.2"))}
    assert largest.value == exact(Fraction("1855.2"))
    assert largest.stand
    assert (largest.stand.direction, largest.stand.lead_axle_at) == ("backward", exact(Fraction("1.8")))
    assert [tuple(map(float, patch)) for patch in largest.patches] == [(0, 1.0, 80), (7.4, 10, 80)]


def test_converted_trains_give_converted_forces() -> None:
    """The same bridge in metric units: the force in kN is the force in kip times the factor, exactly."""
    in_kip, _ = extremes(moment_at(exact(40), exact(100)), published("Cooper E60", "kip", "ft").trains)
    foot = exact(factor("ft", "m"))
    in_kn, _ = extremes(moment_at(40 * foot, 100 * foot), published("Cooper E60", "kN", "m").trains)
    assert in_kn.value == in_kip.value * exact(factor("kip", "kN")) * foot
