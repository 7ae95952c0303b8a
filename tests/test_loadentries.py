"""Entries of panel loads in a truss file: read, refused, and stated again."""

from __future__ import annotations

import re
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from trusscalc.errors import InputError
from trusscalc.exact import Exact, rational
from trusscalc.exacttext import number, parse, to_text
from trusscalc.filetext import data_of
from trusscalc.loadentries import KEYS, rule_of, stated
from trusscalc.loadrules import Beside, LineLoad, PointLoad, Rule, SelfWeight

WHERE = "[panel_loads.dead]"
SYMBOLS = {"w": number(3), "zero": number(0)}

STATED: dict[str, Rule] = {
    'line = "2.4"\nalong = "deck"': LineLoad("dead", "deck", parse("2.4"), parse("2.4")),
    'line = ["2", "5"]\nalong = ["L0", "L1"]\nfrom = 0\nto = 24\nper = "slope"\ndirection = "up"': LineLoad(
        "dead", ("L0", "L1"), number(2), number(5), None, number(0), number(24), "slope", "up"
    ),
    'area = "1.2"\nwidth = "5"\nalong = "deck"\nbeside = { offset = "1.2", spacing = "6" }': LineLoad(
        "dead", "deck", parse("1.2"), parse("1.2"), number(5), beside=Beside(parse("1.2"), number(6))
    ),
    'line = -0.75\nalong = "A,C"\ndirection = "normal"': LineLoad(
        "dead", "A,C", parse("-3/4"), parse("-3/4"), per="slope", direction="normal"
    ),
    'line = 1\nalong = "A,C"\ndirection = "normal"\nper = "plan"': LineLoad(
        "dead", "A,C", number(1), number(1), per="plan", direction="normal"
    ),
    'line = ["w", "2*w"]\nalong = "deck"\ndirection = ["sqrt(3)", -1]': LineLoad(
        "dead", "deck", parse("w", ["w"]), parse("2*w", ["w"]), direction=(parse("sqrt(3)"), number(-1))
    ),
    'point = 12\nalong = "deck"\nat = "7.5"\ndirection = "left"': PointLoad(
        "dead", "deck", number(12), parse("7.5"), direction="left"
    ),
    'point = "w"\nalong = "deck"\nat = "2*sqrt(5)"\nper = "slope"': PointLoad(
        "dead", "deck", parse("w", ["w"]), parse("2*sqrt(5)"), "slope"
    ),
    'self_weight = "0.85"\nmembers = ["lower chord", "U1-U2"]': SelfWeight(
        "dead", parse("0.85"), members=("lower chord", "U1-U2")
    ),
    'self_weight = 0\nbeside = { offset = -1, spacing = "6" }': SelfWeight(
        "dead", number(0), beside=Beside(number(-1), number(6))
    ),
    'density = "78.5"\nsection = "0.0123"\nmembers = ["diagonals"]': SelfWeight(
        "dead", None, parse("78.5"), parse("0.0123"), members=("diagonals",)
    ),
    'density = 490\ndensity_unit = "lbf/ft3"\nsection = "7.5"\nsection_unit = "in2"': SelfWeight(
        "dead", None, number(490), parse("7.5"), "lbf/ft3", "in2"
    ),
}


def read(entry: dict[str, Any]) -> tuple[Rule | None, list[str]]:
    """Return the rule of an entry and what is wrong with it."""
    problems: list[str] = []
    return rule_of("dead", entry, WHERE, problems, SYMBOLS), problems


def as_text(value: object) -> Any:
    """Return a stated value as a file holds it."""
    if isinstance(value, Exact):
        return to_text(value)
    if isinstance(value, list):
        return [as_text(each) for each in value]
    if isinstance(value, dict):
        return {key: as_text(each) for key, each in value.items()}
    return value


@pytest.mark.parametrize("text", STATED)
def test_an_entry_is_read_and_stated_again(text: str) -> None:
    """As the reader of truss files hands it over; the same keys and no others are stated again."""
    entry = data_of(text, "")
    assert read(entry) == (STATED[text], [])
    again = stated(STATED[text])
    assert set(again) == set(entry)
    assert read(again) == (STATED[text], [])
    assert read(as_text(again)) == (STATED[text], [])


def test_only_numbers_lists_and_texts_are_stated() -> None:
    """What the writer of files knows."""
    for rule in STATED.values():
        for value in stated(rule).values():
            assert isinstance(value, (Exact, list, str, dict))


def test_the_usual_is_left_out() -> None:
    """Down, per plan length, and per true length for a load at right angles."""
    assert set(stated(LineLoad("x", "deck", number(1), number(1), per="plan"))) == {"line", "along"}
    usual = LineLoad("x", "deck", number(1), number(1), direction="normal")
    assert usual.per == "slope"
    assert set(stated(usual)) == {"line", "along", "direction"}
    assert set(stated(PointLoad("x", "deck", number(1), number(1), direction="normal"))) == {
        "point",
        "along",
        "at",
        "direction",
    }


NUMBERS = st.integers(-999, 999).map(lambda count: rational(count, 7))
POSITIVE = st.integers(1, 999).map(lambda count: rational(count, 8))
DIRECTIONS = st.sampled_from(["down", "up", "left", "right", "normal"]) | st.tuples(POSITIVE, NUMBERS)
MAYBE_BESIDE = st.none() | st.builds(Beside, NUMBERS, POSITIVE)
CHAINS = st.sampled_from(["deck", "L0,L1", ("L0", "L1")])
MEASURES = st.sampled_from(["plan", "slope"])
RULES = st.one_of(
    st.builds(
        LineLoad,
        case=st.just("dead"),
        along=CHAINS,
        start=NUMBERS,
        end=NUMBERS,
        width=st.none() | POSITIVE,
        begins=st.none() | st.just(parse("1/10")),
        ends=st.none() | POSITIVE,
        per=MEASURES,
        direction=DIRECTIONS,
        beside=MAYBE_BESIDE,
    ),
    st.builds(
        PointLoad,
        case=st.just("dead"),
        along=CHAINS,
        force=NUMBERS,
        at=POSITIVE,
        per=MEASURES,
        direction=DIRECTIONS,
        beside=MAYBE_BESIDE,
    ),
)


@given(RULES)
def test_any_rule_is_read_back_from_its_text(rule: Rule) -> None:
    """Equal in every field."""
    assert read(as_text(stated(rule))) == (rule, [])


LINE = {"line": 1, "along": "deck"}
POINT = {"point": 1, "along": "deck", "at": 1}


@pytest.mark.parametrize(
    ("entry", "message"),
    [
        # keys
        ({}, ": states no load; write one of line, area, point, self_weight, density"),
        ({"along": "deck"}, ": states no load"),
        ({**LINE, "point": 1}, ": states line and point; make an entry of each"),
        ({**LINE, "form": 1}, " form: unknown key; did you mean from?"),
        ({**LINE, "at": 1}, " at: does not go with line; that takes along, from, to, per, direction, beside"),
        ({**LINE, "width": 1}, " width: does not go with line"),
        ({"self_weight": 1, "section": 1}, " section: does not go with self_weight; that takes members, beside"),
        ({"self_weight": 1, "direction": "up"}, " direction: does not go with self_weight"),
        ({"line": 1}, ' along: is missing; name a chain, or list its joints as ["L0", "L1"]'),
        ({"area": 1, "along": "deck"}, " width: is missing; write the tributary width"),
        ({"point": 1, "along": "deck"}, " at: is missing; write where the force stands, counted along the chain"),
        ({"density": 1}, " section: is missing; write the area of the members' section"),
        # amounts and places
        ({**LINE, "line": "two"}, " line: 'two': 'two' is not known here"),
        ({**LINE, "line": [1, "x", 3]}, ' line: one amount is needed, or two such as ["2", "5"]'),
        ({**LINE, "line": []}, " line: one amount is needed"),
        ({**LINE, "line": [1, "x"]}, " line: 'x': 'x' is not known here"),
        ({**LINE, "line": True}, " line: True is not a number"),
        ({**LINE, "line": "1/zero"}, " line: division by zero at the values under [symbols]"),
        ({**LINE, "line": {"a": 1}}, " line: {'a': 1} is not a number"),
        ({**LINE, "from": "w"}, " from: holds the symbol w; symbols stand in amounts of load only, write a number"),
        ({**POINT, "at": "2*w"}, " at: holds the symbol w"),
        ({"area": 1, "width": "w", "along": "deck"}, " width: holds the symbol w"),
        ({"density": 1, "section": "w"}, " section: holds the symbol w"),
        ({**LINE, "direction": ["w", 1]}, " direction: holds the symbol w"),
        ({**LINE, "beside": {"offset": "w", "spacing": 1}}, " beside offset: holds the symbol w"),
        ({**LINE, "beside": {"offset": 1, "spacing": "w"}}, " beside spacing: holds the symbol w"),
        ({**LINE, "from": -1}, " from: -1 is off the chain; places are counted from its first joint, from 0 on"),
        ({**LINE, "to": 0}, " to: 0 is off the chain"),
        ({**POINT, "at": "-0.5"}, " at: -0.5 is off the chain"),
        ({**LINE, "from": 5, "to": 2}, " from: 5 is not before to = 2; state the nearer place as from"),
        ({**LINE, "from": 5, "to": 5}, " from: 5 is not before to = 5"),
        ({"area": 1, "width": -5, "along": "deck"}, " width: must be positive, and is -5"),
        ({"area": 1, "width": 0, "along": "deck"}, " width: must be positive, and is 0"),
        # words
        ({**LINE, "per": "slop"}, ' per: \'slop\' is no measure; write "plan" or "slope"; did you mean slope?'),
        ({**LINE, "per": 1}, " per: text is needed, in quotes"),
        ({**LINE, "per": ""}, " per: text is needed, in quotes"),
        ({**LINE, "direction": "dwon"}, ' direction: \'dwon\' is no direction; write "down", "up", "left"'),
        ({**LINE, "direction": ""}, " direction: text is needed, in quotes"),
        ({**LINE, "direction": [1]}, " direction: two numbers are needed"),
        ({**LINE, "direction": 5}, " direction: two numbers are needed"),
        ({**LINE, "direction": [1, "x"]}, " direction y: 'x'"),
        ({**LINE, "direction": [0, 0]}, " direction: [0, 0] has no direction; write one that has"),
        ({**LINE, "along": 3}, " along: the name of a chain is needed, or a list of joints"),
        ({**LINE, "along": ""}, " along: the name of a chain is needed"),
        ({**LINE, "along": ["L0", 1]}, " along: the name of a chain is needed"),
        ({**LINE, "beside": 3}, ' beside: a table is needed, such as { offset = "1.2", spacing = "6" }'),
        ({**LINE, "beside": {"offset": 1}}, " beside spacing: is missing; write { offset ="),
        (
            {**LINE, "beside": {"offset": 1, "spacing": 1, "ofset": 1}},
            " beside ofset: unknown key; did you mean offset?",
        ),
        ({**LINE, "beside": {"offset": "x", "spacing": 1}}, " beside offset: 'x'"),
        (
            {**LINE, "beside": {"offset": 1, "spacing": 0}},
            " beside spacing: must be positive, and is 0; it is the dist",
        ),
        ({"self_weight": 1, "beside": {"offset": 1, "spacing": -6}}, " beside spacing: must be positive, and is -6"),
        # weights
        ({"self_weight": -1}, " self_weight: must not be negative, for weight acts down, and is -1"),
        ({"density": -1, "section": 1}, " density: must not be negative"),
        ({"density": 1, "section": 0}, " section: must be positive, and is 0"),
        (
            {"density": 1, "section": 1, "density_unit": "kN/m2"},
            " density_unit: unknown unit 'kN/m2'; known are N/m3, ",
        ),
        (
            {"density": 1, "section": 1, "section_unit": "m3"},
            " section_unit: unknown unit 'm3'; known are m2, mm2, cm2, ",
        ),
        (
            {"self_weight": 1, "members": "posts"},
            ' members: a list of groups and members is needed, such as ["lower ch',
        ),
        ({"self_weight": 1, "members": []}, " members: a list of groups and members is needed"),
        ({"self_weight": 1, "members": [1]}, " members: a list of groups and members is needed"),
    ],
)
def test_each_fault_is_told(entry: dict[str, Any], message: str) -> None:
    """What, where, and what to do; no rule comes of it."""
    rule, problems = read(entry)
    assert rule is None
    assert any(problem.startswith(WHERE + message) for problem in problems), problems


def test_faults_come_together() -> None:
    """Keys and values of any kind are looked through, whatever else is wrong."""
    entry = {"line": "x", "point": "y", "along": 1, "from": "z", "speed": 2, "members": 3, "beside": {"ofset": "v"}}
    _, problems = read(entry)
    assert [problem.removeprefix(WHERE).split(":")[0] for problem in problems] == [
        " speed",
        "",
        " point",
        " from",
        " line",
        " along",
        " members",
        " beside ofset",
        " beside offset",
        " beside spacing",
    ]


def test_places_that_cannot_be_compared_are_told() -> None:
    """Roots of roots by the dozen: a fault of the entry, not of the program."""
    entry = {**LINE, "from": "sqrt(5+sqrt(2)) + sqrt(5+sqrt(3))", "to": "sqrt(5+sqrt(7)) + sqrt(5+sqrt(11)) + 9"}
    _, problems = read(entry)
    assert re.search("more than 3 independent nested roots", problems[0])
    assert problems[0].startswith(f"{WHERE}: its places cannot be compared: ")


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: SelfWeight("dead"), "self-weight: state self_weight alone, or density with section"),
        (
            lambda: SelfWeight("dead", number(1), number(1), number(1)),
            "state self_weight alone, or density with section",
        ),
        (lambda: SelfWeight("dead", None, number(1)), "state self_weight alone, or density with section"),
        (lambda: SelfWeight("dead", number(1), density_unit="kN/m3"), "density_unit: belongs to density, which is not"),
        (lambda: LineLoad("dead", "deck", number(1), number(1), per="height"), "per: 'height' is no measure"),
        (lambda: PointLoad("dead", "deck", number(1), number(-1)), "at: -1 is off the chain"),
    ],
)
def test_records_refuse_by_themselves(make: Any, message: str) -> None:
    """A rule that exists is well formed, wherever it was made."""
    with pytest.raises(InputError, match=message) as raised:
        make()
    assert all(problem.startswith(f"{WHERE} ") for problem in raised.value.problems)


def test_every_key_of_a_kind_is_read() -> None:
    """The table of keys and the reader say the same."""
    everywhere: dict[str, Any] = {"beside": {"offset": 1, "spacing": 2}}
    chained = {"along": "deck", "per": "slope", "direction": "up", **everywhere}
    weight = {"members": ["x"], **everywhere}
    sizes = {"density_unit": "N/m3", "section": 1, "section_unit": "m2"}
    entries: list[dict[str, Any]] = [
        {"line": 7, "from": 1, "to": 2, **chained},
        {"area": 7, "width": 3, "from": 1, "to": 2, **chained},
        {"point": 7, "at": 1, **chained},
        {"self_weight": 7, **weight},
        {"density": 7, **sizes, **weight},
    ]
    for kind, entry in zip(KEYS, entries, strict=True):
        rule, problems = read(entry)
        assert problems == []
        assert rule is not None
        assert set(entry) == {kind, *KEYS[kind]}
        assert set(stated(rule)) == set(entry)
