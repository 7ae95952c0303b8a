"""Trains as engineers state them: what is taken, what is refused and in which words, other units, and back."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from typing import Any

import pytest

from trusscalc.chains import Chain
from trusscalc.errors import InputError, UnitError, UnknownNameError
from trusscalc.exact import exact, rational, symbol
from trusscalc.exacttext import parse
from trusscalc.publishedtrains import published
from trusscalc.trains import LoadModel, MovingLoad, Train, converted, stated, train_faults, train_of
from trusscalc.trainvalues import LARGEST_IMPACT, MOST_AXLES, MOST_VARIABLE

WHERE = "[trains.pair]"
FULL = {
    "axles": [6, "24"],
    "spacing": [["14", "30"]],
    "impact": "0.33",
    "lane": "0.64",
    "share": "1/2",
    "omit": True,
    "follow": {"after": 5, "per_length": 8},
    "beside": {"from": "0.8", "per_length": 80},
}


def read(table: object, name: str = "pair") -> tuple[Train | LoadModel | None, list[str]]:
    """Return what a table states, published ones in kN and m, and what is wrong with it."""
    problems: list[str] = []
    train = train_of(name, table, f"[trains.{name}]", problems, lambda wanted: published(wanted, "kN", "m"))
    return train, problems


def test_everything_that_can_be_stated() -> None:
    """Numbers as everywhere: whole, decimal, exact text."""
    train, problems = read(FULL)
    assert problems == []
    assert train == Train(
        "pair",
        (exact(6), exact(24)),
        ((exact(14), exact(30)),),
        impact=rational(33, 100),
        lane=rational(16, 25),
        share=rational(1, 2),
        omit=True,
        follow=(exact(5), exact(8)),
        beside=(rational(4, 5), exact(80)),
    )


def test_what_is_left_out() -> None:
    """No impact, no uniform loads, the whole train, every axle."""
    train, problems = read({"axles": [6, 24], "spacing": ["sqrt(3)"]})
    assert problems == []
    assert isinstance(train, Train)
    assert (train.impact, train.lane, train.share, train.omit, train.follow, train.beside, train.source) == (
        *(exact(0), exact(0), exact(1), False, None, None, ""),
    )
    assert train.spacing == ((parse("sqrt(3)"), parse("sqrt(3)")),)


def test_one_axle_needs_no_spacing() -> None:
    """A single concentrated load."""
    for table in ({"axles": [18]}, {"axles": [18], "spacing": []}):
        assert read(table) == (Train("pair", (exact(18),)), [])


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"axles": None}, "[trains.pair] axles: a list is needed, such as [6, 24]"),
        ({"axles": 30}, "[trains.pair] axles: a list is needed, such as [6, 24]"),
        ({"axles": "6, 24"}, "[trains.pair] axles: a list is needed, such as [6, 24]"),
        ({"axles": [6, -24]}, "[trains.pair] axles: axle 2 is negative; write axle loads without sign, they act"),
        ({"axles": [6, "P"]}, "[trains.pair] axles: 'P': 'P' is not known here"),
        ({"axles": [6, True]}, "[trains.pair] axles: True is not a number"),
        ({"axles": [1] * 201, "spacing": [1] * 200}, "[trains.pair] axles: too many: 201, and at most 200 are taken"),
        ({"spacing": [-14]}, "[trains.pair] spacing: spacing 1 is negative; write the distance from axle to axle"),
        ({"spacing": [0]}, "[trains.pair] spacing: spacing 1 is zero; write the distance from axle to axle"),
        ({"spacing": [[-14, 30]]}, "[trains.pair] spacing: spacing 1 is negative"),
        ({"spacing": [[30, 14]]}, "[trains.pair] spacing: spacing 1 has its low limit above its high one; write [low"),
        ({"spacing": [14, 30]}, "[trains.pair] spacing: 2 axles need 1 spacing, and 2 are stated; a variable one is a"),
        ({"spacing": []}, "[trains.pair] spacing: 2 axles need 1 spacing, and 0 are stated"),
        ({"axles": [6] * 4}, "[trains.pair] spacing: 4 axles need 3 spacings, and 1 is stated"),
        ({"spacing": 14}, "[trains.pair] spacing: a list is needed, such as [14], or [[14, 30]] for a variable one"),
        ({"spacing": [[14, 20, 30]]}, "[trains.pair] spacing: a variable spacing is [low, high], and 3 numbers are"),
        ({"spacing": [{"low": 14}]}, "[trains.pair] spacing: {'low': 14} is not a number"),
        ({"impact": "-0.1"}, "[trains.pair] impact: must not be negative"),
        ({"impact": 33}, "[trains.pair] impact: is added to the axles as a factor of them; write 33 percent as"),
        ({"lane": -1}, "[trains.pair] lane: must not be negative"),
        ({"share": "-1/2"}, "[trains.pair] share: must not be negative"),
        ({"share": "half"}, "[trains.pair] share: 'half'"),
        ({"omit": "yes"}, "[trains.pair] omit: true or false is needed, without quotes"),
        ({"omit": 1}, "[trains.pair] omit: true or false is needed, without quotes"),
        ({"follow": 8}, '[trains.pair] follow: a list is needed, such as follow = { after = "0.8", per_length = 80 }'),
        ({"follow": {"after": 5}}, "[trains.pair] follow: per_length is missing; write follow = {"),
        ({"follow": {"after": -5, "per_length": 8}}, "[trains.pair] follow after: must not be negative"),
        ({"follow": {"after": 5, "per_lenght": 8}}, "[trains.pair] follow per_lenght: unknown key; did you mean per"),
        ({"beside": {"from": 5, "per_length": -8}}, "[trains.pair] beside per_length: must not be negative"),
        ({"beside": {"from": "x", "per_length": 8}}, "[trains.pair] beside from: 'x'"),
        ({"spacings": [14]}, "[trains.pair] spacings: unknown key; did you mean spacing?"),
        ({"publish": "HL-93"}, "[trains.pair] publish: unknown key; did you mean published?"),
    ],
)
def test_each_fault_is_named(change: dict[str, Any], message: str) -> None:
    """What, where, and what to do."""
    train, problems = read({**FULL, **change})
    assert train is None
    assert any(problem.startswith(message) for problem in problems), problems


def test_what_cannot_be_left_out() -> None:
    """Axles, and spacings of several."""
    assert read({"spacing": [14]})[1] == [
        "[trains.pair]: axles are missing; list their loads, the leading axle first: axles = [6, 24]"
    ]
    assert read({"axles": [6, 24]})[1] == [
        "[trains.pair]: spacing is missing; list the distances from axle to axle: spacing = [14]"
    ]
    assert read({"axles": []})[1] == [
        "[trains.pair] axles: at least one axle load is needed, the leading axle first, such as [6, 24]"
    ]
    assert read([6, 24])[1] == ["[trains.pair]: a table is needed, with axles = [6, 24] and spacing = [14] below"]


def test_all_faults_come_together() -> None:
    """One typing error does not hide another."""
    table = {"axles": [6, "x"], "spacing": [-14], "share": -1, "impct": 1, "beside": {"frm": 1, "per_length": 2}}
    train, problems = read(table)
    assert train is None
    assert [problem.split(":")[0] for problem in problems] == [
        "[trains.pair] impct",
        "[trains.pair] axles",
        "[trains.pair] beside frm",
        "[trains.pair] beside",
        "[trains.pair] spacing",
        "[trains.pair] share",
    ]


def test_limits_of_size() -> None:
    """Up to the caps all is taken; beyond, it is said."""
    longest = Train("long", (1,) * MOST_AXLES, (1,) * (MOST_AXLES - 1))
    assert len(longest.axles) == MOST_AXLES
    varied = Train("v", (1,) * (MOST_VARIABLE + 1), ((1, 2),) * MOST_VARIABLE)
    assert len(varied.spacing) == MOST_VARIABLE
    with pytest.raises(InputError, match=f"{MOST_VARIABLE + 1} are variable, and at most {MOST_VARIABLE} may be"):
        Train("v", (1,) * (MOST_VARIABLE + 2), ((1, 2),) * (MOST_VARIABLE + 1))
    assert Train("t", (1,), impact=LARGEST_IMPACT).impact == LARGEST_IMPACT


def test_a_wrong_train_cannot_exist() -> None:
    """Made in Python, all its faults come together as well; one that exists has none."""
    with pytest.raises(InputError) as caught:
        Train("t", (1, -2), (0,), lane=-1)
    assert len(caught.value.problems) == 3
    with pytest.raises(InputError, match=r"\[trains.t\] axles: holds the symbol P; write a number"):
        Train("t", (symbol("P"),))
    assert train_faults(Train("t", (1, 2), (3,))) == []


class TestOtherUnits:
    """Exact factors, so the way back gives the same train."""

    train = Train(
        "t",
        (8, 32, 32),
        (14, (14, 30)),
        impact="0.33",
        lane="0.64",
        share="0.7",
        omit=True,
        follow=(5, 8),
        beside=(1, 2),
        source="somewhere",
    )

    def test_each_number_by_its_kind(self) -> None:
        """Forces, lengths, forces per length; factors and words as they are."""
        kip, foot = Fraction("4.4482216152605"), Fraction("0.3048")
        metric = converted(self.train, "kip", "ft", "kN", "m")
        assert metric == Train(
            "t",
            (8 * kip, 32 * kip, 32 * kip),
            (14 * foot, (14 * foot, 30 * foot)),
            impact="0.33",
            lane=Fraction("0.64") * kip / foot,
            share="0.7",
            omit=True,
            follow=(5 * foot, 8 * kip / foot),
            beside=(foot, 2 * kip / foot),
            source="somewhere",
        )

    def test_there_and_back(self) -> None:
        """Nothing is rounded on the way."""
        assert converted(converted(self.train, "kip", "ft", "tf", "mm"), "tf", "mm", "kip", "ft") == self.train

    def test_wrong_units(self) -> None:
        """Unknown, or of another kind, also when both are the same."""
        with pytest.raises(UnitError, match="unknown unit 'kips'"):
            converted(self.train, "kips", "ft", "kN", "m")
        with pytest.raises(UnitError, match="measure different things"):
            converted(self.train, "ft", "ft", "ft", "m")


class TestPublished:
    """A shipped one taken by name, with what may stand beside it."""

    def test_by_name_under_the_users_name(self) -> None:
        """In the file's units."""
        model, problems = read({"published": "HL-93 metric"}, "live")
        assert problems == []
        assert isinstance(model, LoadModel)
        assert (model.name, model.published, model.force, model.length) == ("live", "HL-93 metric", "kN", "m")
        assert model.trains == published("HL-93 metric", "kN", "m").trains

    def test_the_users_values_say_so(self) -> None:
        """Share is always the user's; another impact than the published one is told with the source."""
        model, problems = read({"published": "HL-93 metric", "share": "1/2", "impact": "0.75"})
        assert problems == []
        assert isinstance(model, LoadModel)
        for train in model.trains:
            assert (train.share, train.impact, train.omit) == (rational(1, 2), rational(3, 4), True)
            assert train.source.endswith("; impact: the user's, not the published value")
        assert model.source.endswith("; impact: the user's, not the published value")
        same, _ = read({"published": "HL-93 metric", "impact": "0.33", "omit": True})
        assert isinstance(same, LoadModel)
        assert same.trains == published("HL-93 metric", "kN", "m").trains

    @pytest.mark.parametrize(
        ("table", "message"),
        [
            (
                {"published": "HL-39"},
                "[trains.pair] published: there is no published train 'HL-39'; did you mean HL-93?",
            ),
            ({"published": 93}, '[trains.pair] published: a name in quotes is needed, such as "HL-93"'),
            (
                {"published": "LM71", "axles": [1]},
                "[trains.pair] axles: has no place beside published, which takes imp",
            ),
            ({"published": "LM71", "share": -1}, "[trains.pair] share: must not be negative"),
            ({"published": "LM71", "omit": 0}, "[trains.pair] omit: true or false is needed"),
        ],
    )
    def test_faults(self, table: dict[str, Any], message: str) -> None:
        """Of the name and of what stands beside it."""
        model, problems = read(table)
        assert model is None
        assert any(problem.startswith(message) for problem in problems), problems

    def test_where_none_are_at_hand(self) -> None:
        """The reader is handed in, as it needs the units of the file."""
        problems: list[str] = []
        assert train_of("t", {"published": "LM71"}, "[trains.t]", problems) is None
        assert problems == ["[trains.t] published: published trains are not read here; state axles and spacing"]


@pytest.mark.parametrize(
    "table",
    [
        FULL,
        {"axles": [18]},
        {"axles": [6, 24], "spacing": [14]},
        {"published": "HL-93"},
        {"published": "Cooper E60", "share": "1/2", "omit": False},
        {"published": "LM71", "impact": "0.2", "omit": False},
    ],
)
def test_what_is_written_reads_back_the_same(table: dict[str, Any]) -> None:
    """Also for a shipped one with the user's values beside it."""
    train, problems = read(table)
    assert problems == []
    assert train is not None
    assert read(stated(train)) == (train, [])


def test_only_what_differs_is_written() -> None:
    """So that a file stays as short as it was."""
    assert stated(Train("t", (6, 24), (14,))) == {"axles": [exact(6), exact(24)], "spacing": [exact(14)]}
    model, _ = read({"published": "LM71", "share": "1/2"})
    assert model is not None
    assert stated(model) == {"published": "LM71", "share": rational(1, 2)}


def test_a_load_model_of_ones_own_is_not_written() -> None:
    """A truss file has no words for it."""
    model = LoadModel("mine", (Train("t", (1,)),))
    with pytest.raises(InputError, match="'mine' is not a published one; state its trains one by one"):
        stated(model)


def test_records() -> None:
    """A moving load holds its trains and their path; an unknown name tells what there is."""
    deck = Chain("deck", ("L0", "L1"))
    train = Train("t", (1,))
    assert MovingLoad("live", (train,), deck).trains == (train,)
    assert replace(train, lane="0.5").lane == rational(1, 2)
    with pytest.raises(UnknownNameError, match="there are HL-93, HL-93 metric"):
        published("zzz", "kN", "m")
