"""Load cases, their symbols, and combinations."""

from __future__ import annotations

from typing import Any

import pytest

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.loads import Combination, JointLoad, LoadCase, combine, factor_text
from trusscalc.truss import Truss


def test_loads_are_exact_and_in_order() -> None:
    """Numbers as everywhere: text, whole numbers, shortest decimals."""
    case = LoadCase("dead", {"B": (0, -120), "A": ("-5*sqrt(3)/2", 2.37)})
    assert [load.joint for load in case.loads] == ["B", "A"]
    assert case.loads[1] == JointLoad("A", parse("-5*sqrt(3)/2"), parse("237/100"))
    assert case.as_floats() == {"B": (0.0, -120.0), "A": (pytest.approx(-5 * 3**0.5 / 2), 2.37)}


def test_symbols_stand_in_loads() -> None:
    """They stay symbols in the exact loads and get their values for decimals."""
    case = LoadCase("snow", {"C": ("P*sqrt(3)/2", "-P/2 - q")}, symbols={"P": 12, "q": "1/4"})
    assert case.loads[0].fx == parse("P*sqrt(3)/2", ("P",))
    assert case.value(case.loads[0].fy) == parse("-6.25")
    assert case.as_floats()["C"] == pytest.approx((6 * 3**0.5, -6.25))


@pytest.mark.parametrize(
    ("loads", "symbols", "message"),
    [
        ({"A": (1,)}, {}, r"\[cases.dead\] A: two numbers are needed"),
        ({"A": "12"}, {}, r"\[cases.dead\] A: two numbers are needed"),
        ({"A": 7}, {}, r"\[cases.dead\] A: two numbers are needed"),
        ({"A": (1, "two")}, {}, r"\[cases.dead\] A Fy: 'two'"),
        ({"A": ("P", 0)}, {}, "A Fx: 'P': 'P' is not known here"),
        ({"A": ("P*P*P*P*P*P*P", 0)}, {"P": 1}, "too many different products of symbols"),
        ({"A": ("1/P", 0)}, {"P": 0}, "A Fx: division by zero at the values"),
        ({"A": ("1/(P - Q)", 0)}, {"P": 2, "Q": 2}, "A Fx: division by zero at the values"),
        ({"A": ("P^6", 0)}, {"P": 1e200}, "A Fx: numbers beyond"),
        ({}, {"P": "x"}, r"\[symbols\] P: 'x'"),
        ({}, {"P": True}, r"\[symbols\] P: True is not a number"),
        ({}, {"2P": 1}, r"\[symbols\] '2P': a symbol is a word"),
        ({}, {"sqrt": 1}, "that is not taken"),
        ({}, {"pi": 1}, "that is not taken"),
        ({}, {"a b": 1}, "a symbol is a word"),
        ({}, {"P" * 41: 1}, "a symbol is a word"),
        ({}, {"": 1}, "a symbol is a word"),
    ],
)
def test_each_fault_is_named(loads: dict[str, Any], symbols: dict[str, Any], message: str) -> None:
    """What, where, and what to do."""
    with pytest.raises(InputError, match=message):
        LoadCase("dead", loads, symbols=symbols)


def test_all_faults_come_together() -> None:
    """Symbols and loads in one report."""
    with pytest.raises(InputError) as caught:
        LoadCase("dead", {"A": (1, "x"), "B": (1,)}, symbols={"P": "y"})
    assert len(caught.value.problems) == 3


def test_a_load_on_no_joint_is_a_fault_of_the_pair() -> None:
    """Found when the case meets the truss."""
    truss = Truss({"A": (0, 0), "U8": (1, 0), "C": (0, 1)}, ["A-U8", "U8-C", "C-A"], {"A": "pin", "C": "roller"})
    assert LoadCase("dead", {"U8": (0, -1)}).faults(truss) == []
    assert LoadCase("dead", {"U9": (0, -1)}).faults(truss) == [
        "[cases.dead] U9: there is no such joint; did you mean U8?",
    ]


def test_loads_on_one_joint_add_up() -> None:
    """Otherwise one route would see both and the other only the last."""
    load = JointLoad("A", parse("1"), parse("-2"))
    case = LoadCase("dead", [load, JointLoad("B", parse("0"), parse("1")), load])
    assert case.loads == (JointLoad("A", parse("2"), parse("-4")), JointLoad("B", parse("0"), parse("1")))
    assert case.as_floats() == {"A": (2.0, -4.0), "B": (0.0, 1.0)}


class TestCombine:
    """Combinations are sums, exactly."""

    dead = LoadCase("dead", {"A": (0, -10), "B": (0, "-P")}, symbols={"P": 3})
    live = LoadCase("live", {"B": (0, -5), "C": (1, 0)})

    def test_joint_by_joint(self) -> None:
        """1.2 D + 1.6 L of ASCE 7 (from memory), as fractions."""
        total = combine(Combination("1.2D+1.6L", {"dead": "1.2", "live": 1.6}), [self.dead, self.live])
        assert total.name == "1.2D+1.6L"
        assert {load.joint: (load.fx, load.fy) for load in total.loads} == {
            "A": (parse("0"), parse("-12")),
            "B": (parse("0"), parse("-6*P/5 - 8", ("P",))),
            "C": (parse("8/5"), parse("0")),
        }
        assert total.as_floats() == {"A": (0.0, -12.0), "B": (0.0, -11.6), "C": (1.6, 0.0)}

    def test_loads_that_cancel_stay_listed(self) -> None:
        """As zero, so that the inventory shows them."""
        total = combine(Combination("x", {"live": 1, "lift": 1}), [self.live, LoadCase("lift", {"C": (-1, 0)})])
        assert [load.joint for load in total.loads] == ["B", "C"]
        assert not total.loads[1].fx

    def test_an_unknown_case(self) -> None:
        """Named, with the nearest."""
        with pytest.raises(UnknownNameError, match="combination 'x': there is no case 'deed'; did you mean dead"):
            combine(Combination("x", {"deed": 1}), [self.dead, self.live])

    def test_one_symbol_of_two_values(self) -> None:
        """Would give the sum a value that neither case states."""
        other = LoadCase("wind", {"A": ("P", 0)}, symbols={"P": 4})
        with pytest.raises(InputError, match="give 'P' different values"):
            combine(Combination("x", {"dead": 1, "wind": 1}), [self.dead, other])

    def test_wrong_factors(self) -> None:
        """All together."""
        with pytest.raises(InputError, match=r"\[combinations.x\] dead: 'a'") as caught:
            Combination("x", {"dead": "a", "live": None, "wind": 1})
        assert len(caught.value.problems) == 2

    def test_factors_may_be_surds(self) -> None:
        """Unusual, but exact like everything else."""
        total = combine(Combination("x", [("live", "sqrt(2)")]), [self.live])
        assert isinstance(total.loads[0].fy, Exact)
        assert total.loads[0].fy == parse("-5*sqrt(2)")

    def test_optional_cases_are_taken_as_written(self) -> None:
        """Trying them absent is the envelope's work."""
        total = combine(Combination("x", {"dead": 1, "live": 2}, optional=["live"]), [self.dead, self.live])
        assert total == combine(Combination("x", {"dead": 1, "live": 2}), [self.dead, self.live])

    def test_a_pair_is_not_decided_here(self) -> None:
        """Which factor is adverse depends on the member."""
        message = (
            "combination 'x': 'dead' has the pair of factors 1.25 or 0.9, and which one is adverse differs from member "
            "to member; name the factor in a combination of its own, or ask for the envelope"
        )
        with pytest.raises(InputError, match=message):
            combine(Combination("x", {"live": 1, "dead": ["1.25", "0.90"]}), [self.dead, self.live])


class TestCombination:
    """Pairs of factors and optional cases."""

    def test_pairs_keep_their_order(self) -> None:
        """As a list or a tuple, of any exact numbers; no source unless it is said."""
        stated = Combination("x", {"dead": ("1.25", 0.9), "live": 2, "earth": [1, "sqrt(2)"]}, optional=["live"])
        assert stated.factors == (
            ("dead", (parse("5/4"), parse("9/10"))),
            ("live", (parse("2"),)),
            ("earth", (parse("1"), parse("sqrt(2)"))),
        )
        assert (stated.optional, stated.source) == (("live",), "")
        assert Combination("x", {"dead": 1}, source="somewhere").source == "somewhere"
        assert Combination("x", stated.factors, optional=stated.optional) == stated
        assert Combination("x", {"dead": 1, "live": 1}, optional=["live", "live"]).optional == ("live",)

    @pytest.mark.parametrize(
        ("factors", "optional", "message"),
        [
            ({"dead": []}, (), r"\[combinations.x\] dead: one factor is needed, or a pair such as"),
            ({"dead": ["1.2"]}, (), r"\[combinations.x\] dead: one factor is needed, or a pair"),
            ({"dead": (1, 2, 3)}, (), r"\[combinations.x\] dead: one factor is needed, or a pair"),
            ({"dead": ("1.25", "o.9")}, (), r"\[combinations.x\] dead: 'o.9'"),
            ({"dead": ([1], 2)}, (), r"\[combinations.x\] dead: .*is not a number"),
            ({"dead": 1, "optional": 2}, (), r"\[combinations.x\] optional: lists cases .*; rename that case"),
            ({"dead": 1}, "dead", r"\[combinations.x\] optional: a list of case names is needed, such as \[\"live\"\]"),
            ({"dead": 1}, {"dead": 1}, r"\[combinations.x\] optional: a list of case names"),
            ({"dead": 1}, 7, r"\[combinations.x\] optional: a list of case names"),
            ({"dead": 1}, [7], r"\[combinations.x\] optional: a list of case names"),
            ({"dead": 1}, ["deed"], r"optional 'deed': is not among the factors .*; did you mean dead\?"),
            ([("dead", 1), ("dead", 2)], (), r"\[combinations.x\] dead: stated twice; add its factors up"),
        ],
    )
    def test_each_fault_is_named(self, factors: Any, optional: Any, message: str) -> None:
        """What, where, and what to do."""
        with pytest.raises(InputError, match=message):
            Combination("x", factors, optional=optional)

    def test_faults_come_together(self) -> None:
        """Factors and optional cases in one report."""
        with pytest.raises(InputError) as caught:
            Combination("x", {"dead": ["a", "b"], "live": [1]}, optional=["wind"])
        assert len(caught.value.problems) == 4

    @pytest.mark.parametrize(
        ("factor", "written"),
        [
            ("1.20", "1.2"),
            ("3", "3"),
            ("200", "200"),
            ("0", "0"),
            ("-1.5", "-1.5"),
            ("0.9225*1.35", "1.245375"),
            ("1e-7", "1/10000000"),
            ("1/3", "1/3"),
            ("sqrt(2)", "sqrt(2)"),
        ],
    )
    def test_factors_as_engineers_write_them(self, factor: str, written: str) -> None:
        """Never a rounded one."""
        assert factor_text(parse(factor)) == written
