"""Load cases, their symbols, and combinations."""

from __future__ import annotations

from typing import Any

import pytest

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.loads import Combination, JointLoad, LoadCase, combine
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
