"""Published combinations: their numbers against the standards, their writing out against brute force."""

from __future__ import annotations

import itertools
import re
from collections.abc import Iterable, Mapping, Sequence
from fractions import Fraction
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trusscalc import filewriting
from trusscalc.combinationsums import variants_of
from trusscalc.combinationtables import TABLES, PublishedChoice, choice_of, combinations_of, stated
from trusscalc.errors import InputError
from trusscalc.exacttext import parse
from trusscalc.filetext import data_of
from trusscalc.loads import Combination, factor_text
from trusscalc.publishedcombinations import MEMORY, READ, PublishedRow

STRENGTH = "ASCE/SEI 7-22 strength"
ALLOWABLE = "ASCE/SEI 7-22 allowable stress"
EUROCODE = "EN 1990:2002 6.10 set B"
EUROCODE_AB = "EN 1990:2002 6.10a/b set B"
LETTERS = ("D", "L", "Lr", "S", "R", "W", "W_T", "Ev", "Eh")
WHERE = "[published_combinations]"

BESIDES = """psi0 = { snow = "1/2" }
categories = { "a, b" = "wind", c = "wind" }
own = { gamma_Q = "1.6", xi = 0.9 }
"""

Sums = set[frozenset[tuple[str, str]]]

# Typed by hand, not taken from the package. Strength 1a to 5a: ASCE/SEI 7-22 2.3.1, read in a secondary transcription;
# 6 and 7: 2.3.6, from memory.
STRENGTH_ROWS = {
    "1a": ["1.4 D"],
    "2a": [f"1.2 D, 1.6 L, {companion}" for companion in ("0.5 Lr", "0.3 S", "0.5 R")],
    "3a": [f"1.2 D, {roof}, {other}" for roof in ("1.6 Lr", "1 S", "1.6 R") for other in ("1 L", "0.5 W")],
    "4a": [f"1.2 D, 1 {wind}, 1 L, {companion}" for wind in ("W", "W_T") for companion in ("0.5 Lr", "0.3 S", "0.5 R")],
    "5a": ["0.9 D, 1 W", "0.9 D, 1 W_T"],
    "6": ["1.2 D, 1 Ev, 1 Eh, 1 L, 0.15 S"],
    "7": ["0.9 D, -1 Ev, 1 Eh"],
}
# 3a, 4a, 6a: ASCE/SEI 7-22 2.4.1, read in STRUCTURE magazine, "ASCE 7-22 flat roof snow load versus minimum snow load";
# the others, with 2.4.5, from memory.
ALLOWABLE_ROWS = {
    "1a": ["1 D"],
    "2a": ["1 D, 1 L"],
    "3a": ["1 D, 1 Lr", "1 D, 0.7 S", "1 D, 1 R"],
    "4a": ["1 D, 0.75 L, 0.75 Lr", "1 D, 0.75 L, 0.525 S", "1 D, 0.75 L, 0.75 R"],
    "5a": ["1 D, 0.6 W", "1 D, 0.6 W_T"],
    "6a": [
        f"1 D, 0.75 L, 0.45 {wind}, {companion}"
        for wind in ("W", "W_T")
        for companion in ("0.75 Lr", "0.525 S", "0.75 R")
    ],
    "7a": ["0.6 D, 0.6 W", "0.6 D, 0.6 W_T"],
    "8": ["1 D, 0.7 Ev, 0.7 Eh"],
    "9": ["1 D, 0.525 Ev, 0.525 Eh, 0.75 L, 0.1 S"],
    "10": ["0.6 D, -0.7 Ev, 0.7 Eh"],
}


def sum_of(text: str) -> frozenset[tuple[str, str]]:
    """Return a sum typed as ``1.2 D, 1.6 L``."""
    return frozenset((case, factor) for factor, case in (term.split(" ", 1) for term in text.split(", ")))


def sums(combinations: Iterable[Combination], number: str) -> Sums:
    """Return the sums of one row, pairs as ``1.35/1``."""
    return {
        frozenset((case, "/".join(map(factor_text, factors))) for case, factors in each.factors)
        for each in combinations
        if each.name.startswith(f"{number}: ")
    }


def names(table: str, cases: Mapping[str, Any], **stated_besides: Any) -> list[str]:
    """Return the names of a table's combinations."""
    return [each.name for each in combinations_of(table, cases, **stated_besides)]


class TestStandards:
    """Every number that is shipped, against the standard's text."""

    @pytest.mark.parametrize(("table", "rows"), [(STRENGTH, STRENGTH_ROWS), (ALLOWABLE, ALLOWABLE_ROWS)])
    def test_asce_7_22_row_by_row(self, table: str, rows: dict[str, list[str]]) -> None:
        """All alternatives of each row, with a case for every letter, and no row besides."""
        found = combinations_of(table, {letter: letter for letter in LETTERS})
        assert [row.number for row in TABLES[table].rows] == list(rows)
        for number, typed in rows.items():
            assert sums(found, number) == {sum_of(text) for text in typed}, number
        assert len(found) == sum(map(len, rows.values()))

    def test_asce_7_22_snow_is_not_that_of_the_edition_before(self) -> None:
        """Snow at strength level: 1.0, 0.3 and 0.15, not 1.6, 0.5 and 0.2; 0.7 and not 1 in allowable stress.

        1.2D + 1.0S: Maguire et al., "Ground Snow Loads for ASCE 7-22", STRUCTURE, February 2022, Eq. 1.
        """

        def snow(table: str) -> set[str]:
            found = combinations_of(table, {letter: letter for letter in LETTERS})
            return {factor_text(factors[0]) for each in found for case, factors in each.factors if case == "S"}

        assert snow(STRENGTH) == {"1", "0.3", "0.15"}
        assert snow(ALLOWABLE) == {"0.7", "0.525", "0.1"}
        assert "3a: 1.2 dead + 1.0 snow" in names(STRENGTH, {"D": "dead", "S": "snow"})

    def test_en_1990_worked_forms(self) -> None:
        """1.35G + 1.5S + 0.9W and 1.35G + 1.5W + 0.75S.

        Steel Buildings in Europe, Multi-storey Part 3: Actions, p. 3-5, expression (6.10); snow or wind leading.
        """
        cases = {"G": ["G"], "Q": ["S", "W"]}
        found = combinations_of(EUROCODE, cases, psi0={"S": "0.5", "W": "0.6"})
        assert sums(found, "6.10") == {
            sum_of("1.35/1 G, 1.5 S, 0.9 W"),
            sum_of("1.35/1 G, 1.5 W, 0.75 S"),
        }
        assert sums(combinations_of(EUROCODE, cases, categories={"S": "snow", "W": "wind"}), "6.10") == sums(
            found, "6.10"
        )

    def test_en_1990_expressions_a_and_b(self) -> None:
        """Set B with xi = 0.85: 0.85 x 1.35 = 1.1475 on unfavourable permanent actions alone (same source, p. 3-5)."""
        found = combinations_of(EUROCODE_AB, {"G": "G", "Q": ["S", "W"]}, psi0={"S": "0.5", "W": "0.6"})
        assert sums(found, "6.10a") == {sum_of("1.35/1 G, 0.75 S, 0.9 W")}
        assert sums(found, "6.10b") == {
            sum_of("1.1475/1 G, 1.5 S, 0.9 W"),
            sum_of("1.1475/1 G, 1.5 W, 0.75 S"),
        }

    def test_en_1990_psi0(self) -> None:
        """Table A1.1 of EN 1990:2002, from memory; H, snow and wind also in Steel Buildings in Europe as above."""
        typed = dict.fromkeys("ABCDFG", "0.7") | {"E": "1", "H": "0", "wind": "0.6", "temperature": "0.6"}
        typed |= {"snow": "0.5", "snow above 1000 m": "0.7", "snow Nordic": "0.7"}
        for table in (EUROCODE, EUROCODE_AB):
            assert {each.name: factor_text(each.psi0) for each in TABLES[table].categories} == typed

    def test_edition_clause_and_mark(self) -> None:
        """What is read in a secondary source says so, and so does what is from memory."""
        marked = {(table.name, row.number): (row.clause, row.mark) for table in TABLES.values() for row in table.rows}
        strength = {(STRENGTH, number): ("2.3.1", READ) for number in ("1a", "2a", "3a", "4a", "5a")}
        strength |= {(STRENGTH, number): ("2.3.6", MEMORY) for number in ("6", "7")}
        allowable = {(ALLOWABLE, f"{number}a"): ("2.4.1", MEMORY) for number in (1, 2, 5, 7)}
        allowable |= {(ALLOWABLE, f"{number}a"): ("2.4.1", READ) for number in (3, 4, 6)}
        allowable |= {(ALLOWABLE, number): ("2.4.5", MEMORY) for number in ("8", "9", "10")}
        eurocode = {(EUROCODE, "6.10"): ("6.4.3.2(3)", READ)}
        eurocode |= {(EUROCODE_AB, number): ("6.4.3.2(3)", READ) for number in ("6.10a", "6.10b")}
        assert marked == strength | allowable | eurocode
        assert all("2022" in TABLES[name].edition for name in (STRENGTH, ALLOWABLE))
        assert all("EN 1990:2002" in TABLES[name].edition for name in (EUROCODE, EUROCODE_AB))
        assert all(MEMORY in table.mark and READ in table.mark and table.notes for table in TABLES.values())

    def test_each_combination_says_where_it_is_from(self) -> None:
        """Table, clause, number, the expression as printed, and the mark."""
        one, *_, last = combinations_of(STRENGTH, {"D": "dead", "L": "live", "Eh": "quake"})
        assert one.source == "ASCE/SEI 7-22 strength, 2.3.1, 1a: 1.4D (read in a secondary source)"
        assert last.source == "ASCE/SEI 7-22 strength, 2.3.6, 7: 0.9D − Ev + Eh (from memory)"
        first, second = combinations_of(
            EUROCODE, {"G": "dead", "Q": ["snow", "wind"]}, psi0={"snow": "0.5"}, categories={"wind": "wind"}
        )
        printed = (
            "EN 1990:2002 6.10 set B, 6.4.3.2(3), 6.10: Σ γG,j Gk,j + γQ,1 Qk,1 + Σ(i>1) γQ,i ψ0,i Qk,i "
            "(read in a secondary source)"
        )
        assert first.source == f"{printed}; psi0 of wind 0.6, Table A1.1, wind (from memory)"
        assert second.source == f"{printed}; psi0 of snow 0.5, the user's own"


class TestExpressions:
    """Printed expressions of numbers and letters."""

    def test_brackets_in_brackets(self) -> None:
        """Factors multiply inwards, signs too, exactly."""
        (one, two, three) = variants_of("D − 0.75(0.6(W or W_T) + 2Ev or S)")
        assert one == (("D", parse("1")), ("W", parse("-0.45")), ("Ev", parse("-1.5")))
        assert two == (("D", parse("1")), ("W_T", parse("-0.45")), ("Ev", parse("-1.5")))
        assert three == (("D", parse("1")), ("S", parse("-0.75")))

    @pytest.mark.parametrize("text", ["1.2D + ?", "D L", "D) + L", "1.2D + 1.6L!", "1.2D +", "1.2(D", ""])
    def test_what_cannot_be_read_is_an_error(self, text: str) -> None:
        """No part of an expression is passed over."""
        with pytest.raises(ValueError, match="cannot be read"):
            variants_of(text)

    def test_all_letters_are_known(self) -> None:
        """Of every expression in the tables of loads."""
        for name in (STRENGTH, ALLOWABLE):
            symbols = [letter.symbol for letter in TABLES[name].letters]
            assert symbols == list(LETTERS)
            used = {letter for row in TABLES[name].rows for each in variants_of(row.expression) for letter, _ in each}
            assert used == set(symbols)


class TestCases:
    """How the cases of a letter act, and what is left of a row."""

    def test_names_say_number_and_factors(self) -> None:
        """In the user's letters; a factor of one as 1.0, a subtracted effect with its minus."""
        assert names(STRENGTH, {"D": "dead", "L": "live", "Lr": "men", "Ev": "up"}) == [
            "1a: 1.4 dead",
            "2a: 1.2 dead + 1.6 live + 0.5 men",
            "3a: 1.2 dead + 1.6 men + 1.0 live",
            "6: 1.2 dead + 1.0 up + 1.0 live",
            "7: 0.9 dead - 1.0 up",
        ]
        assert names(STRENGTH, {"Ev": "up"}) == ["6: 1.0 up", "7: -1.0 up"]

    def test_several_winds_are_tried_in_turn(self) -> None:
        """One of them or none; permanent cases act together, and so do live ones, each of which may stay away."""
        found = combinations_of(
            STRENGTH, {"D": ["steel", "deck"], "L": ["path", "crowd"], "W": ["left", "right"], "S": "snow"}
        )
        four = [each for each in found if each.name.startswith("4a")]
        assert [each.name for each in four] == [
            f"4a: 1.2 steel + 1.2 deck + 1.0 {wind} + 1.0 path + 1.0 crowd + 0.3 snow" for wind in ("left", "right")
        ]
        assert [each.optional for each in four] == [(wind, "path", "crowd", "snow") for wind in ("left", "right")]
        assert [each.name for each in found if each.name.startswith("5a")] == [
            "5a: 0.9 steel + 0.9 deck + 1.0 left",
            "5a: 0.9 steel + 0.9 deck + 1.0 right",
        ]

    @pytest.mark.parametrize("table", [STRENGTH, ALLOWABLE])
    def test_all_but_permanent_loads_may_stay_away(self, table: str) -> None:
        """Effects of loads not acting must be tried: ASCE/SEI 7-22 2.3.1, read in a secondary transcription."""
        for each in combinations_of(table, {letter: letter for letter in LETTERS}):
            assert set(each.optional) == {case for case, _ in each.factors} - {"D"}

    def test_rows_that_say_nothing_more_are_dropped_and_told(self) -> None:
        """Each with the letters it lacks."""
        choice = PublishedChoice(ALLOWABLE, {"D": "dead", "S": "snow"})
        assert [each.name for each in choice.expanded()] == ["1a: 1.0 dead", "3a: 1.0 dead + 0.7 snow"]
        assert [(each.number, each.reason) for each in choice.left_out()] == [
            ("2a", "without L it says no more than 1a"),
            ("4a", "without L, Lr, R it says no more than 3a"),
            ("5a", "without W, W_T it says no more than 1a"),
            ("6a", "without L, Lr, R, W, W_T it says no more than 3a"),
            ("7a", "without W, W_T it says no more than 1a"),
            ("8", "without Ev, Eh it says no more than 1a"),
            ("9", "without L, Ev, Eh it says no more than 3a"),
            ("10", "without Ev, Eh it says no more than 1a"),
        ]
        assert PublishedChoice(STRENGTH, {letter: letter for letter in LETTERS}).left_out() == ()

    def test_of_equal_rows_the_first_is_written(self) -> None:
        """And the later ones are told, whether the first is as printed or not."""
        choice = PublishedChoice(STRENGTH, {"W": "wind"})
        assert [each.name for each in choice.expanded()] == ["4a: 1.0 wind"]
        assert ("5a", "without D, W_T it says no more than 4a") in [
            (each.number, each.reason) for each in choice.left_out()
        ]
        choice = PublishedChoice(ALLOWABLE, {"D": "dead", "L": "live"}, own={"4a L": 1})
        assert [each.name for each in choice.expanded()] == ["1a: 1.0 dead", "2a: 1.0 dead + 1.0 live"]
        assert ("4a", "without Lr, S, R it says no more than 2a") in [
            (each.number, each.reason) for each in choice.left_out()
        ]

    def test_a_row_as_printed_is_never_dropped(self) -> None:
        """Even where another covers it: the reader looks for it."""
        assert names(ALLOWABLE, {"D": "dead", "L": "live"}) == ["1a: 1.0 dead", "2a: 1.0 dead + 1.0 live"]

    @settings(max_examples=60, deadline=None)
    @given(
        st.sampled_from([STRENGTH, ALLOWABLE]),
        st.sets(st.sampled_from(LETTERS), min_size=1),
        st.lists(st.integers(-9, 9), min_size=9, max_size=9),
    )
    def test_nothing_that_could_govern_is_dropped(self, table: str, letters: set[str], numbers: list[int]) -> None:
        """Largest and least effect over all printed sums, every load but D there or not, against the combinations.

        Sums are taken from the rows typed above. With permanent loads alone, a smaller factor of D is no effect of
        its own: zero counts as one.
        """
        effects = {letter: Fraction(number) for letter, number in zip(LETTERS, numbers, strict=True)}
        rows = STRENGTH_ROWS if table == STRENGTH else ALLOWABLE_ROWS
        typed = [dict(sum_of(text)) for texts in rows.values() for text in texts]
        allowed = list(
            itertools.chain.from_iterable(
                states({case: Fraction(factor) * effects[case] for case, factor in each.items() if case in letters})
                for each in typed
            )
        )
        found = list(
            itertools.chain.from_iterable(
                states({case: factors[0].as_fraction() * effects[case] for case, factors in each.factors})
                for each in combinations_of(table, {letter: letter for letter in letters})
            )
        )
        assert max(*found, 0) == max(*allowed, 0)
        assert min(*found, 0) == min(*allowed, 0)

    def test_names_are_unique(self) -> None:
        """With many cases for each letter."""
        cases = {letter: [f"{letter} {n}" for n in range(2)] for letter in LETTERS}
        for found in (
            names(STRENGTH, cases),
            names(ALLOWABLE, cases),
            names(EUROCODE_AB, {"G": "g", "Q": list("abcd")}, psi0=dict.fromkeys("abcd", "0.7")),
        ):
            assert len(set(found)) == len(found) > 4


def states(effects: dict[str, Fraction]) -> list[Fraction]:
    """Return the sum with every choice of loads other than D."""
    variable = [effect for case, effect in effects.items() if case != "D"]
    return [
        effects.get("D", Fraction(0)) + sum(chosen)
        for chosen in itertools.product(*((Fraction(0), effect) for effect in variable))
    ]


class TestActions:
    """Variable actions of EN 1990: which cases are one, and each leading in turn."""

    def test_one_action_needs_no_psi0(self) -> None:
        """In (6.10); of the cases of Q1 one acts at a time."""
        assert names(EUROCODE, {"G": "g", "Q1": ["left", "right"]}) == [
            "6.10: 1.35/1.0 g + 1.5 left",
            "6.10: 1.35/1.0 g + 1.5 right",
        ]

    def test_without_variable_actions(self) -> None:
        """(6.10b) says no more than (6.10a)."""
        choice = PublishedChoice(EUROCODE_AB, {"G": ["steel", "deck"]})
        assert [each.name for each in choice.expanded()] == ["6.10a: 1.35/1.0 steel + 1.35/1.0 deck"]
        assert [(each.number, each.reason) for each in choice.left_out()] == [
            ("6.10b", "without Q it says no more than 6.10a")
        ]
        assert PublishedChoice(EUROCODE_AB, {"G": "g", "Q": "q"}, psi0={"q": 1}).left_out() == ()

    def test_winds_of_several_directions_exclude_each_other(self) -> None:
        """By their category; as actions of their own they would act together."""
        cases = {"G": "g", "Q": ["left", "snow", "right"]}
        kinds = {"left": "wind", "right": "wind", "snow": "snow"}
        assert names(EUROCODE, cases, categories=kinds) == [
            "6.10: 1.35/1.0 g + 1.5 left + 0.75 snow",
            "6.10: 1.35/1.0 g + 1.5 right + 0.75 snow",
            "6.10: 1.35/1.0 g + 1.5 snow + 0.9 left",
            "6.10: 1.35/1.0 g + 1.5 snow + 0.9 right",
        ]
        assert names(EUROCODE, {"G": "g", "Q": "snow", "Q2": ["left", "right"]}, categories=kinds) == [
            "6.10: 1.35/1.0 g + 1.5 snow + 0.9 left",
            "6.10: 1.35/1.0 g + 1.5 snow + 0.9 right",
            "6.10: 1.35/1.0 g + 1.5 left + 0.75 snow",
            "6.10: 1.35/1.0 g + 1.5 right + 0.75 snow",
        ]
        assert "6.10: 1.35/1.0 g + 1.5 left + 0.75 snow + 0.9 right" in names(
            EUROCODE, cases, psi0={"left": "0.6", "right": "0.6", "snow": "0.5"}
        )

    def test_a_stated_psi0_goes_before_that_of_the_category(self) -> None:
        """Which still says what excludes what; and the source names it as the user's."""
        found = combinations_of(
            EUROCODE,
            {"Q": ["left", "right", "snow"]},
            psi0={"left": "0.2"},
            categories={"left": "wind", "right": "wind", "snow": "snow"},
        )
        assert [each.name for each in found][2:] == ["6.10: 1.5 snow + 0.3 left", "6.10: 1.5 snow + 0.9 right"]
        assert found[2].source.endswith("; psi0 of left 0.2, the user's own")
        assert found[3].source.endswith("; psi0 of right 0.6, Table A1.1, wind (from memory)")

    def test_imposed_loads_are_one_action(self) -> None:
        """They lead together, or one of two floors would be reduced (EN 1991-1-1 3.3.1, from memory)."""
        found = combinations_of(
            EUROCODE,
            {"G": "g", "Q": ["office", "snow", "store"]},
            categories={"office": "B", "store": "E", "snow": "snow"},
        )
        assert [each.name for each in found] == [
            "6.10: 1.35/1.0 g + 1.5 office + 1.5 store + 0.75 snow",
            "6.10: 1.35/1.0 g + 1.5 snow + 1.05 office + 1.5 store",
        ]
        assert found[0].optional == ("office", "store", "snow")

    def test_an_action_with_psi0_of_zero_accompanies_none(self) -> None:
        """Roofs of category H; a sum that repeats another is written once."""
        found = combinations_of(
            EUROCODE_AB, {"G": "g", "Q": ["roof", "store"]}, categories={"roof": "H"}, psi0={"store": 1}
        )
        assert [each.name for each in found] == [
            "6.10a: 1.35/1.0 g + 1.5 store",
            "6.10b: 1.1475/1.0 g + 1.5 roof + 1.5 store",
            "6.10b: 1.1475/1.0 g + 1.5 store",
        ]
        assert "psi0 of roof 0, Table A1.1, H (from memory)" in found[0].source
        assert names(EUROCODE, {"Q": ["a", "b"]}, psi0={"a": 1, "b": 1}) == ["6.10: 1.5 a + 1.5 b"]


class TestOwnFactors:
    """The user's factors take the table's place, and are told as the user's."""

    def test_by_name(self) -> None:
        """In every combination they enter, and in no other."""
        cases = {"G": "g", "Q": "snow"}
        plain = combinations_of(EUROCODE_AB, cases, psi0={"snow": "0.5"})
        found = combinations_of(
            EUROCODE_AB, cases, psi0={"snow": "0.5"}, own={"gamma_Q": "1.6", "gamma_G_sup": "1.3", "xi": "0.925"}
        )
        assert [each.name for each in found] == ["6.10a: 1.3/1.0 g + 0.8 snow", "6.10b: 1.2025/1.0 g + 1.6 snow"]
        largest = "gamma_G_sup 1.3, the user's own in place of 1.35"
        reduction = "xi 0.925, the user's own in place of 0.85"
        variable = "gamma_Q 1.6, the user's own in place of 1.5"
        psi0 = "psi0 of snow 0.5, the user's own"
        assert found[0].source == f"{plain[0].source.split('; ')[0]}; {largest}; {variable}; {psi0}"
        assert found[1].source == f"{plain[1].source}; {largest}; {reduction}; {variable}"
        assert "user" not in plain[1].source

    def test_equal_factors_are_no_pair(self) -> None:
        """So that the combination can be added up as a case."""
        (found,) = combinations_of(EUROCODE, {"G": "g"}, own={"gamma_G_sup": 1})
        assert found.factors == (("g", (parse("1"),)),)
        assert found.name == "6.10: 1.0 g"

    def test_by_row_and_letter(self) -> None:
        """The exception of 2.3.1 for L in 3a and 4a (read in a secondary transcription), and a factor in brackets."""
        cases = {"D": "dead", "L": "live", "S": "snow", "W": "wind"}
        found = combinations_of(STRENGTH, cases, own={"3a L": "0.5", "4a L": "0.5"})
        said = {each.name: each.source.partition("; ")[2] for each in found}
        assert said == {
            "1a: 1.4 dead": "",
            "2a: 1.2 dead + 1.6 live + 0.3 snow": "",
            "3a: 1.2 dead + 1.0 snow + 0.5 live": "factor of L 0.5, the user's own in place of 1",
            "3a: 1.2 dead + 1.0 snow + 0.5 wind": "",
            "4a: 1.2 dead + 1.0 wind + 0.5 live + 0.3 snow": "factor of L 0.5, the user's own in place of 1",
            "5a: 0.9 dead + 1.0 wind": "",
        }
        (six,) = [each for each in combinations_of(ALLOWABLE, cases, own={"6a W": "0.5"}) if each.name[:2] == "6a"]
        assert six.name == "6a: 1.0 dead + 0.75 live + 0.5 wind + 0.525 snow"
        assert six.source.endswith("; factor of W 0.5, the user's own in place of 0.45")

    def test_a_factor_of_zero_leaves_the_case_out_and_is_told(self) -> None:
        """Otherwise the sheet would show a row as published that is not."""
        found = combinations_of(STRENGTH, {"D": "dead", "L": "live", "S": "snow"}, own={"3a L": 0})
        (three,) = [each for each in found if each.name.startswith("3a")]
        assert three.name == "3a: 1.2 dead + 1.0 snow"
        assert three.source.endswith("; factor of L 0, the user's own in place of 1")

    def test_a_row_made_larger_still_covers(self) -> None:
        """Dropping looks at the factors as they are: with L of 2 in 4a the row stays without its wind."""
        assert "4a: 1.2 dead + 2.0 live" in names(STRENGTH, {"D": "dead", "L": "live"}, own={"4a L": 2})


class TestFaults:
    """Each fault is named, with the key it stands under and what to do."""

    @pytest.mark.parametrize(
        ("table", "besides", "message"),
        [
            (
                "ASCE/SEI 7-16 strength",
                {},
                "table: 'ASCE/SEI 7-16 strength' is not known; did you mean ASCE/SEI 7-22 str",
            ),
            ("?", {}, "table: '?' is not known; there are ASCE/SEI 7-22 strength, ASCE"),
            (7, {}, "table: '7' is not known; there are ASCE"),
            (STRENGTH, {"cases": {}}, 'cases: none is assigned; write cases = { D = "dead"'),
            (STRENGTH, {"cases": {"D": []}}, "cases: none is assigned"),
            (STRENGTH, {"cases": {"LR": "x"}}, f"cases LR: is no letter of {STRENGTH}; did you mean"),
            (STRENGTH, {"cases": {"G": "x"}}, f"cases G: is no letter of {STRENGTH}; its letters are D, L, Lr, S, R"),
            (EUROCODE, {"cases": {"W": "x"}}, f"cases W: is no letter of {EUROCODE}; its letters are G, Q, Q1"),
            (STRENGTH, {"cases": {"D": 7}}, 'cases D: a case is needed, or a list of them such as ["wind left"]'),
            (STRENGTH, {"cases": {"D": ["a", 7]}}, "cases D: a case is needed, or a list"),
            (STRENGTH, {"cases": {"D": ""}}, "cases D: a case is needed, or a list"),
            (STRENGTH, {"cases": {"D": "x", "L": "x"}}, "cases 'x': is assigned twice; a case acts under one letter"),
            (STRENGTH, {"cases": {"W": ["x", "x"]}}, "cases 'x': is assigned twice"),
            (STRENGTH, {"cases": {"D": "optional"}}, "cases 'optional': no case of a combination may be called so"),
            (STRENGTH, {"cases": {"L": [f"l{n}" for n in range(101)]}}, "cases: 101 are assigned, and at most 100"),
            (
                STRENGTH,
                {"cases": {letter: [f"{letter}{n}" for n in range(14)] for letter in ("S", "W", "Ev", "Eh")}},
                "cases: these give 3,332 combinations, and at most 1,000 are written; assign fewer",
            ),
            (STRENGTH, {"psi0": {"dead": 1}}, f"psi0: has no place in {STRENGTH}; remove it"),
            (STRENGTH, {"categories": {"dead": "A"}}, f"categories: has no place in {STRENGTH}; remove it"),
            (EUROCODE, {"psi0": {"snwo": 1}}, "psi0 snwo: is no variable case here; did you mean snow?"),
            (EUROCODE, {"psi0": {"dead": 1}}, "psi0 dead: is no variable case here"),
            (
                EUROCODE,
                {"categories": {"snwo": "snow"}},
                "categories snwo: is no variable case here; did you mean snow",
            ),
            (EUROCODE, {"categories": {"snow": "snwo"}}, "categories snow: 'snwo' is no category; did you mean snow?"),
            (EUROCODE, {"categories": {"snow": "?"}}, "categories snow: '?' is no category; there are A, B, C"),
            (EUROCODE, {"categories": {"snow": 7}}, "categories snow: '7' is no category; there are A, B, C"),
            (EUROCODE, {"psi0": {"snow": "x"}}, "psi0 snow: 'x'"),
            (EUROCODE, {"psi0": {"snow": "-0.5"}}, "psi0 snow: -0.5 is less than 0; state a factor of 0 or more"),
            (EUROCODE, {"psi0": {"snow": 5}}, "psi0 snow: 5 is more than 1, which no psi0 is"),
            (EUROCODE, {}, "psi0 snow: is needed; state it, or under 'categories' one of A, B, C, D, E, F, G, H, snow"),
            (EUROCODE, {}, "psi0 wind: is needed"),
            (EUROCODE_AB, {"cases": {"Q": "q"}}, "psi0 q: is needed"),
            (EUROCODE, {"own": {"gamma_q": 1}}, f"own gamma_q: is no factor of {EUROCODE}; did you mean gamma_Q?"),
            (EUROCODE, {"own": {"xi": 1}}, f"own xi: is no factor of {EUROCODE}; there are gamma_G_sup, gamma_G_inf"),
            (EUROCODE_AB, {"own": {"xi": "1.85"}}, "own xi: 1.85 is more than 1, and xi reduces"),
            (EUROCODE, {"own": {"gamma_Q": "-1.5"}}, "own gamma_Q: -1.5 is less than 0"),
            (EUROCODE, {"own": {"gamma_Q": None}}, "own gamma_Q: None is not a number"),
            (STRENGTH, {"own": {"4a Lx": 1}}, f"own 4a Lx: is no factor of {STRENGTH}; did you mean 4a L"),
            (STRENGTH, {"own": {"wind": 1}}, f"own wind: is no factor of {STRENGTH}; there are 1a D, 2a D, 2a L"),
            (EUROCODE, {"cases": {"Q": "q"}, "own": {"gamma_Q": 0}}, "own: leaves no factor other than 0"),
        ],
    )
    def test_each_is_named(self, table: Any, besides: dict[str, Any], message: str) -> None:
        """From Python and from a file alike."""
        cases = {"G": "dead", "Q": ["snow", "wind"]} if table in (EUROCODE, EUROCODE_AB) else {"D": "dead"}
        with pytest.raises(InputError) as caught:
            PublishedChoice(table, **{"cases": cases} | besides)
        assert any(problem.startswith(f"{WHERE} {message}") for problem in caught.value.problems), caught.value
        problems: list[str] = []
        assert choice_of({"table": table, "cases": cases} | besides, WHERE, problems) is None
        assert tuple(problems) == caught.value.problems

    def test_faults_come_together(self) -> None:
        """Letters, psi0, categories and factors in one report."""
        with pytest.raises(InputError) as caught:
            PublishedChoice(
                EUROCODE,
                {"G": 1, "X": "y", "Q": "q"},
                psi0={"p": "x"},
                categories={"q": "Z"},
                own={"gamma": 1},
                where="[here]",
            )
        assert [problem.split(":")[0] for problem in caught.value.problems] == [
            "[here] cases G",
            "[here] cases X",
            "[here] psi0 p",
            "[here] psi0 p",
            "[here] categories q",
            "[here] own gamma",
        ]

    def test_a_case_that_is_not_there(self) -> None:
        """Named when the cases are known."""
        choice = PublishedChoice(STRENGTH, {"D": "dead", "W": ["wind left", "wind rihgt"]})
        with pytest.raises(InputError) as caught:
            choice.combinations(["dead", "wind left", "wind right"])
        assert caught.value.problems == (
            f"{WHERE} cases 'wind rihgt': there is no such case; did you mean wind right?",
        )
        choice = PublishedChoice(STRENGTH, {"D": "dead", "W": ["wind left", "wind right"]})
        found = choice.combinations(["dead", "wind left", "wind right", "another"])
        assert found == choice.expanded()
        assert len(found) == 5

    @pytest.mark.parametrize(
        ("stated_there", "message"),
        [
            ({"cases": {"D": "d"}}, "table: is missing; name one of ASCE/SEI 7-22 strength"),
            ({"table": STRENGTH, "case": {"D": "d"}}, "case: unknown key; did you mean cases?"),
            ({"table": STRENGTH, "cases": "d"}, 'cases: a table is needed, such as cases = { D = "dead", W = ['),
            ({"table": EUROCODE, "psi0": "0.5"}, 'psi0: a table is needed, such as psi0 = { snow = "0.5" }'),
            ({"table": EUROCODE, "categories": ["A"]}, "categories: a table is needed, such as categories = { snow"),
            ({"table": EUROCODE, "own": 1}, 'own: a table is needed, such as own = { gamma_Q = "1.6" }'),
        ],
    )
    def test_the_form_in_a_file(self, stated_there: dict[str, Any], message: str) -> None:
        """Keys and kinds of value."""
        problems: list[str] = []
        assert choice_of(stated_there, WHERE, problems) is None
        assert any(problem.startswith(f"{WHERE} {message}") for problem in problems), problems


class TestInAFile:
    """Read from TOML, written, and read again."""

    @pytest.mark.parametrize(
        "text",
        [
            f'table = "{STRENGTH}"\ncases = {{ D = "dead", L = "live", W = ["wind left", "wind right"] }}\n',
            f'table = "{STRENGTH}"\ncases = {{ D = ["dead"] }}\nown = {{ "1a D" = 1.35 }}\n',
            f'table = "{EUROCODE}"\ncases = {{ G = ["dead"], Q = ["a", "b"] }}\npsi0 = {{ a = "0.5", b = 0.6 }}\n',
            f'table = "{EUROCODE_AB}"\ncases = {{ Q1 = ["a, b", "c"], G = "dead", Q = ["snow"] }}\n{BESIDES}',
        ],
    )
    def test_round_trip(self, text: str) -> None:
        """Equal, and written the same a second time."""
        problems: list[str] = []
        choice = choice_of(data_of(text, ""), WHERE, problems)
        assert problems == []
        assert choice is not None
        written = filewriting._section("published_combinations", stated(choice))
        again = choice_of(data_of(written, "")["published_combinations"], WHERE, problems)
        assert (again, problems) == (choice, [])
        assert filewriting._section("published_combinations", stated(choice)) == written
        assert again is not None
        assert again.expanded() == choice.expanded() != ()

    def test_floats_of_a_file_are_exact(self) -> None:
        """A number with a point keeps its text on the way in."""
        problems: list[str] = []
        choice = choice_of(data_of(f'table = "{STRENGTH}"\ncases.D = "d"\nown = {{ "1a D" = 1.35 }}', ""), "", problems)
        assert choice is not None
        assert choice.own == (("1a D", parse("27/20")),)


def test_rows_and_letters_are_in_order() -> None:
    """The order of the standard, whatever order the cases are stated in."""
    shuffled = PublishedChoice(STRENGTH, {"W": "w", "D": "d", "L": "l"})
    assert shuffled == PublishedChoice(STRENGTH, {"D": "d", "L": "l", "W": "w"})
    numbers: Sequence[str] = [re.split(":", each.name)[0] for each in shuffled.expanded()]
    order = [row.number for row in TABLES[STRENGTH].rows]
    assert numbers == sorted(numbers, key=order.index)
    assert all(isinstance(row, PublishedRow) for table in TABLES.values() for row in table.rows)
