"""Diagnosis: planted blunders come first, sound results are never accused, and no text claims more than the fit."""

from __future__ import annotations

import random
from dataclasses import replace
from pathlib import Path

import pytest
import trade_trusses as trade
from other_analyses import FAMILIES, Project, Table, project, solved
from planted import BLUNDERS, as_printed, explained, half_unit, plant

from trusscalc.alterations import compared
from trusscalc.compare import compare_submitted
from trusscalc.diagnosis import diagnose, explain
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.explanations import Explanation
from trusscalc.files import read
from trusscalc.fits import Printed
from trusscalc.loads import LoadCase
from trusscalc.stiffness import member_forces
from trusscalc.submitted import read_submitted
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

NAMES = {*BLUNDERS, "unexplained"}


def printed_of(table: Table, style: str = ".4g") -> Printed:
    """Return a table as printed."""
    texts = {name: format(force, style) for name, force in table.items()}
    return Printed(
        {name: float(text) for name, text in texts.items()}, {name: half_unit(text) for name, text in texts.items()}
    )


def named(found: tuple[Explanation, ...]) -> list[str]:
    """Return the kind that comes first and those tied with it."""
    return [found[0].explanation, *(kind for kind, _ in found[0].ties)] if found else []


# --- planted blunders -------------------------------------------------------------------------------------


@pytest.mark.parametrize("family", FAMILIES)
@pytest.mark.parametrize("kind", BLUNDERS)
def test_a_planted_blunder_comes_first(kind: str, family: str) -> None:
    """Or ties with the first; its place is among those told, and it fits. Rates are in bench/DIAGNOSIS.md."""
    for number in range(3):
        planted = plant(random.Random(f"{kind}, {family}, {number}"), kind, family)
        found = planted.explain()
        assert kind in named(found), planted.told
        assert found[0].fits
        assert found[0].remainder < 2e-3
        places = [found[0].where, *(where for name, where in found[0].ties if name == kind)]
        assert kind == "scale" or {*planted.where[0]} in [{*where} for where in places]


@pytest.mark.parametrize(
    "kinds",
    [
        "load-missing+sign",
        "load-missing+rows-exchanged",
        "joint-displaced+load-missing",
        "joint-displaced+joint-displaced",
        "support-extra+load-reversed",
    ],
)
def test_two_blunders_at_once(kinds: str) -> None:
    """One alone leaves a remainder; both together fit."""
    planted = plant(random.Random(kinds), kinds, "trade")
    first = planted.explain()[0]
    assert first.fits
    assert first.second is not None
    assert sorted((first.explanation, first.second[0])) == sorted(kinds.split("+"))


# --- nothing to accuse ------------------------------------------------------------------------------------


@pytest.mark.parametrize("style", [".4g", ".3g", ".2f", ".0f", ".15g"])
@pytest.mark.parametrize("family", FAMILIES)
def test_sound_results_are_never_accused(family: str, style: str) -> None:
    """However they are rounded."""
    for number in range(4):
        draw = random.Random(f"{family} {number}")
        given = project(draw, family, extra=number % 2)
        table = solved(given.stated, given.total())
        assert table
        assert explained(given, {name: format(force, style) for name, force in table.items()}) == ()


def test_within_the_tolerance_nothing_is_accused() -> None:
    """Differences beyond the roundings, but of the size that the tolerance allows."""
    given = pratt()
    table = {name: 1.0008 * force for name, force in right(given).items()}
    assert explained(given, as_printed(table)) == ()
    assert explain(given.file, "dead", printed_of(table))[0].explanation == "scale"


def test_noise_is_unexplained() -> None:
    """Values that no blunder gives; what comes second is told as a part."""
    draw, given = random.Random(4), pratt()
    found = explained(given, as_printed({name: force * draw.gauss(1, 0.03) for name, force in right(given).items()}))
    assert found[0].explanation == "unexplained"
    assert not any(one.fits for one in found)
    assert "none of the blunders tried" in found[0].text
    assert all("would bring" in one.text and "unexplained" in one.text for one in found[1:])


def test_one_wrong_value_is_named() -> None:
    """A single value that nothing explains."""
    given = pratt()
    table = right(given)
    table["U2-L3"] *= 1.07
    found = explained(given, as_printed(table))
    assert (found[0].explanation, found[0].where) == ("unexplained", ("U2-L3",))
    assert found[0].text.endswith("all member forces agree but U2-L3")


def test_a_load_of_any_other_size_is_found_by_equilibrium() -> None:
    """It is no blunder of the list, but the joint and what it carries can be told."""
    given = pratt()
    table = solved(given.stated, given.total() | {"L2": (7.0, -93.0)})
    assert table
    found = explained(given, as_printed(table))
    assert (found[0].explanation, found[0].where) == ("unexplained", ("L2",))
    assert "L2 carries (7" in found[0].text
    assert "-13" in found[0].text


def test_stiffnesses_that_are_not_equal_are_unexplained() -> None:
    """In an indeterminate truss; the joints balance, and that is said."""
    stated = replace(trade.pratt(6), members=(*trade.pratt(6).members, "L2-U3"))
    given = Project(stated, {"dead": dict(stated.loads)}, {}, "dead")
    state = {name: 1.0 if name == "L2-U3" else 0.0 for name in stated.members}
    cut = solved(replace(stated, members=trade.pratt(6).members), given.total())
    whole = right(given)
    assert cut
    mixed = {name: 0.4 * cut.get(name, 0.0) + 0.6 * whole[name] for name in state}  # in equilibrium all the same
    found = explained(given, as_printed(mixed))
    assert found[0].explanation == "unexplained"
    assert "in equilibrium under the stated loads" in found[0].text


# --- single points ----------------------------------------------------------------------------------------


def pratt() -> Project:
    """Return a Pratt of six panels."""
    stated = trade.pratt(6)
    cases = {"dead": dict(stated.loads), "live": {"L1": ("0", "-50"), "L2": ("12", "-30")}}
    return Project(stated, cases, {"1.35G+1.5Q": {"dead": "1.35", "live": "1.5"}}, "dead")


def right(given: Project) -> Table:
    """Return the forces without a blunder."""
    found = solved(given.stated, given.total())
    assert found
    return found


def test_one_case_doubled_is_a_scale_of_two_as_well() -> None:
    """Printed as ties, in either's words."""
    given = pratt()
    found = explained(given, as_printed({name: 2 * force for name, force in right(given).items()}))
    assert {"scale", "case-doubled"} <= set(named(found))
    assert "the table does not tell them apart" in found[0].text
    assert {one.explanation for one in found[:2]} == {"scale", "case-doubled"}


@pytest.mark.parametrize(
    ("ratio", "words"),
    [(1000.0, "N for kN"), (1 / 12, "ft for in"), (4.4482216152605, "kN for kip"), (1.35, "a load factor 1.35")],
)
def test_ratios_are_named(ratio: float, words: str) -> None:
    """Units and load factors."""
    given = pratt()
    found = explained(given, as_printed({name: ratio * force for name, force in right(given).items()}))
    assert found[0].explanation == "scale"
    assert float(found[0].where[0]) == pytest.approx(ratio, rel=1e-5)
    assert words in found[0].text


def test_an_unknown_ratio_is_said_to_be_unknown() -> None:
    """1.137 is nobody's unit."""
    given = pratt()
    found = explained(given, as_printed({name: 1.137 * force for name, force in right(given).items()}))
    assert (found[0].explanation, found[0].fits) == ("scale", True)
    assert "no ratio of units or load factors that is known here" in found[0].text


def test_a_table_of_zeros_is_not_a_scale() -> None:
    """The case is missing."""
    given = pratt()
    found = explained(given, dict.fromkeys(right(given), "0.000"))
    assert found[0].explanation == "case-missing"
    assert "scale" not in named(found)


def test_part_of_a_table_is_enough() -> None:
    """A few critical members, and the truss is still found out."""
    given = pratt()
    loads = given.total() | {"L3": (0.0, 0.0)}
    table = solved(given.stated, loads)
    assert table
    few = {name: table[name] for name in ("U2-U3", "L2-L3", "U1-L2", "U2-L3", "L1-L2", "L0-U1")}
    found = explained(given, as_printed(few))
    assert ("load-missing", ("L3",)) in [(found[0].explanation, found[0].where), *found[0].ties]


def test_reactions_tell_what_member_forces_cannot() -> None:
    """A load on a supported joint taken twice: every member agrees, one reaction does not."""
    given = replace(pratt(), cases={"dead": {"L0": ("0", "-40"), "L3": ("0", "-80")}}, combinations={})
    printed = printed_of(right(given))
    reactions = {"L0.x": 0.0, "L0.y": 120.0, "L6.y": 40.0}
    halves = dict.fromkeys(reactions, 0.05)

    def first(reactions: Table) -> tuple[Explanation, ...]:
        return explain(given.file, "dead", replace(printed, reactions=reactions, reaction_half_units=halves))[:1]

    (found,) = first(reactions)
    assert (found.explanation, found.where, found.fits) == ("load-doubled", ("L0",), True)
    assert first(reactions | {"L0.y": 80.0}) == ()
    (found,) = first(reactions | {"L0.y": 93.0})
    assert found.explanation == "unexplained"
    assert found.text.endswith("all member forces agree, reactions do not")


def test_reactions_choose_among_ties() -> None:
    """A load left out or put on a pin: the same forces, not the same reactions."""
    given = pratt()
    loads = given.total()
    loads["L0"] = loads.pop("L1")
    table = solved(given.stated, loads)
    assert table
    printed = printed_of(table)
    assert {"load-missing", "load-moved"} <= set(named(explain(given.file, "dead", printed)))
    reactions = {"L0.y": 213.3, "L6.y": 186.7}
    told = replace(printed, reactions=reactions, reaction_half_units=dict.fromkeys(reactions, 0.05))
    found = explain(given.file, "dead", told)
    assert (found[0].explanation, found[0].where) == ("load-moved", ("L1", "L0"))
    assert "load-missing" not in named(found)


def test_self_weight_is_a_part_of_a_case(tmp_path: Path) -> None:
    """Stated as a rule beside joint loads: left out, it is told from the rest of its case."""
    path = tmp_path / "hut.toml"
    path.write_text(HUT, encoding="utf-8")
    stated = read(path)
    bare = {"L1": (0, "-13.5"), "U1": (0, "-27")}
    table = member_forces(stated.truss, LoadCase("without", bare))
    found = explain(stated, "fundamental", printed_of(table))
    assert (found[0].explanation, found[0].where) == ("case-missing", ("dead", "self-weight"))


HUT = """
format = 1
[joints]
L0 = [0, 0]
L1 = [4, 0]
L2 = [8, 0]
U1 = [4, 3]
[members]
all = ["L0-L1", "L1-L2", "L0-U1", "U1-L2", "L1-U1"]
[supports]
L0 = "pin"
L2 = "roller"
[cases.dead]
L1 = [0, -10]
[[panel_loads.dead]]
self_weight = "0.85"
[cases.snow]
U1 = [0, -18]
[combinations.fundamental]
dead = "1.35"
snow = "1.5"
"""


def test_weight_that_nobody_stated() -> None:
    """Every member weighs something in their model: found by its size, and said to be fitted."""
    given = pratt()
    heavier = given.total()
    truss = given.stated.truss
    places = {joint.name: (float(joint.x), float(joint.y)) for joint in truss.joints}
    for member in truss.members:
        (ax, ay), (bx, by) = places[member.start], places[member.end]
        for joint in (member.start, member.end):
            x, y = heavier.get(joint, (0.0, 0.0))
            heavier[joint] = (x, y - 0.9 * ((bx - ax) ** 2 + (by - ay) ** 2) ** 0.5 / 2)
    table = solved(given.stated, heavier)
    assert table
    found = explained(given, as_printed(table))
    assert (found[0].explanation, found[0].where) == ("case-doubled", ("self-weight",))
    assert "0.9" in found[0].text


def test_a_truss_far_from_the_origin() -> None:
    """On a map grid: coordinates count from the file's origin, slips too."""
    stated = trade.pratt(6).shifted("45210", "5731")
    given = Project(stated, {"dead": dict(stated.loads)}, {}, "dead")
    table = solved(replace(stated, joints={**stated.joints, "U2": ("45220", "5773")}), given.total())
    assert table
    found = explained(given, as_printed(table))
    assert (found[0].explanation, found[0].where) == ("joint-displaced", ("U2",))
    assert "digits 3 and 7 exchanged" in found[0].text


def test_symbols_stand_for_their_values() -> None:
    """In the loads and in the dimensions."""
    joints = {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "3*a/4")}
    truss = Truss(joints, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"}, symbols={"a": 4})
    stated = TrussFile(truss, (LoadCase("snow", {"C": ("P/4", "-P")}, symbols={"P": 12}),))
    found = explain(stated, "snow", printed_of({"A-B": 6.5, "A-C": -8.125, "C-B": -11.875}, ".2f"))
    assert (found[0].explanation, found[0].where) == ("support-exchanged", ("A", "B"))


def test_a_comparison_is_diagnosed_with_its_own_tolerance() -> None:
    """From a table as read to the explanation; an agreeing one gives nothing."""
    given = pratt()
    table = right(given)
    texts = as_printed(table)
    sound = compare_submitted(given.file, read_submitted(texts, given.stated.truss), "dead")
    assert sound.agreed
    assert diagnose(sound, given.file) == ()
    texts["U1-U2"], texts["L2-L3"] = texts["L2-L3"], texts["U1-U2"]
    found = diagnose(compare_submitted(given.file, read_submitted(texts, given.stated.truss), "dead"), given.file)
    assert found[0].explanation == "rows-exchanged"
    assert {*found[0].where} == {"U1-U2", "L2-L3"}


def test_loads_that_are_no_case_of_the_file() -> None:
    """A governing state superposed elsewhere: diagnosed all the same."""
    given = pratt()
    state = LoadCase("governing", {"L2": (0, -77), "L4": (3, -31)})
    table = member_forces(given.stated.truss, LoadCase("their", {"L2": (0, -77)}))
    found = explain(given.file, state, printed_of(table))
    assert ("load-missing", ("L4",)) in [(one.explanation, one.where) for one in found]


def test_an_unknown_case_is_an_error() -> None:
    """As everywhere."""
    given = pratt()
    with pytest.raises(UnknownNameError, match="no case or combination 'deed'"):
        explain(given.file, "deed", printed_of(right(given)))


def test_a_mechanism_of_ours_is_an_error() -> None:
    """It has no forces to explain others' by."""
    square = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)}, ["A-B", "B-C", "C-D", "A-D"], {"A": "pin", "B": "roller"}
    )
    stated = TrussFile(square, (LoadCase("push", {"D": (5, 0)}),))
    with pytest.raises(InputError, match="cannot resist every load"):
        explain(stated, "push", printed_of(dict.fromkeys(("A-B", "B-C", "C-D", "A-D"), 1.0)))


def test_words_claim_no_more_than_the_fit() -> None:
    """'Consistent with', never 'is'; kinds from the list; a remainder between 0 and 2."""
    for kind in ("load-moved", "stiff-joints", "joint-displaced", "support-turned"):
        for one in plant(random.Random(kind), kind, "trade").explain():
            assert one.explanation in NAMES
            assert 0 <= one.remainder <= 2
            assert one.text.startswith("consistent with ") is one.fits or "within the tolerance" in one.text
            assert "largest" in one.text


def test_the_same_input_gives_the_same_words() -> None:
    """No chance, no clock."""
    planted = plant(random.Random(11), "joint-displaced+load-missing", "trade")
    assert planted.explain() == planted.explain()


def test_parts_of_a_combination() -> None:
    """Cases with their factors; other states with every choice of factors."""
    what = compared(pratt().file, "1.35G+1.5Q")
    assert [(part.where, part.loads["L1"]) for part in what.parts] == [
        (("dead",), (0.0, pytest.approx(-108))),
        (("live",), (0.0, pytest.approx(-75))),
    ]
    assert [part.where for part in what.others] == [("dead",), ("live",)]
