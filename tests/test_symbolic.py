"""Symbols in loads and in dimensions."""

from __future__ import annotations

import pytest

from trusscalc import stiffness
from trusscalc.errors import InputError, UnstableTrussError
from trusscalc.exact import rational
from trusscalc.exacttext import parse, to_text
from trusscalc.files import reads, writes
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.report import check_data
from trusscalc.samples import sign_depends, vanishing
from trusscalc.symbolparts import by_monomial
from trusscalc.truss import Truss

DIMENSIONS = {"a": 4, "h": 3}


def king_post() -> Truss:
    """Return a king-post truss of half span a and height h."""
    joints = {"A": (0, 0), "B": ("a", 0), "C": ("2*a", 0), "D": ("a", "h")}
    return Truss(joints, ["A-B", "B-C", "A-D", "B-D", "C-D"], {"A": "pin", "C": "roller"}, symbols=DIMENSIONS)


def test_formula_of_a_king_post() -> None:
    """Tie P a / 2 h, rafters -P sqrt(a^2 + h^2) / 2 h (statics of the joint by hand)."""
    check = check_members(king_post(), LoadCase("x", {"D": (0, "-P")}, symbols={"P": 10}), "all")
    names = ("P", "a", "h")
    assert check.members["A-B"].exact == parse("P*a/(2*h)", names)
    assert check.members["B-D"].exact == rational(0)
    rafter = check.members["A-D"].exact
    assert rafter is not None
    assert to_text(rafter) == "-P/(2*h)*sqrt(a^2 + h^2)"
    assert rafter * rafter == parse("P^2*(a^2 + h^2)/(4*h^2)", names)
    assert check.members["A-D"].decimal == pytest.approx(-10 * 5 / 6, rel=1e-15)
    assert check.agreed
    assert check.unstable_where == ()


def test_formulas_are_compared_at_several_samples() -> None:
    """The stated values come first; every sample agrees, and is printed in the data."""
    check = check_members(king_post(), LoadCase("x", {"D": (0, "-P")}, symbols={"P": 10}), ["A-D"])
    samples = check.members["A-D"].samples
    assert len(samples) == 4
    assert dict(samples[0].values)["a"] == rational(4)
    assert len({sample.values for sample in samples}) == 4
    assert all(sample.agrees for sample in samples)
    assert check_data(check)["members"]["A-D"]["samples"][0]["values"] == {"a": "4", "h": "3", "P": "10"}


def test_a_wrong_number_at_another_sample_is_seen(monkeypatch: pytest.MonkeyPatch) -> None:
    """Negative control: a numeric route that is right at the stated values only makes the verdict differ."""
    right = stiffness.member_forces
    wrong_side = rational(4)

    def only_there(truss: Truss, case: LoadCase) -> dict[str, float]:
        forces = right(truss, case)
        at_stated = truss.at_values().joint("B").x == wrong_side
        return forces if at_stated else {name: 1.01 * force for name, force in forces.items()}

    monkeypatch.setattr(stiffness, "member_forces", only_there)
    check = check_members(king_post(), LoadCase("x", {"D": (0, "-P")}, symbols={"P": 10}), ["A-D"])
    assert check.members["A-D"].verdict == "differs"
    assert "another sample" in check.members["A-D"].reason


def two_bars(h: object, k: object) -> Truss:
    """Return two bars that rise h - k in the half span a."""
    symbols = {"a": 4, "h": h, "k": k}
    return Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h-k")}, ["A-C", "B-C"], {"A": "pin", "B": "pin"}, symbols=symbols
    )


def test_where_sign_and_stability_turn_is_told() -> None:
    """Two flat bars are a mechanism at h = k, and pull or push on either side of it."""
    check = check_members(two_bars(6, 2), LoadCase("x", {"C": (0, -1)}), "all")
    assert check.unstable_where == ("h - k",)
    assert check.members["A-C"].sign_depends
    assert check.members["A-C"].sense == "C"
    below = check_members(two_bars(2, 6), LoadCase("x", {"C": (0, -1)}), "all")
    assert below.members["A-C"].sense == "T"
    with pytest.raises(UnstableTrussError, match="C"):
        check_members(two_bars(3, 3), LoadCase("x", {"C": (0, -1)}), "all")


def test_fixed_signs_need_no_statement() -> None:
    """Polynomials with coefficients of one sign neither vanish nor turn for positive symbols."""
    names = ("a", "h")
    assert not sign_depends(parse("-a/h - 2*a", names))
    assert sign_depends(parse("a - h", names))
    assert vanishing([parse("1/(a + h)", names), parse("1/(a*h)", names)]) == ()


def test_dimensions_must_be_positive_and_well_formed() -> None:
    """A length of zero or less, and joints that fall together at the stated values, are refused."""
    with pytest.raises(InputError, match="must be positive"):
        two_bars(6, -2)
    with pytest.raises(InputError, match=r"at the values of .*same place"):
        Truss({"A": (0, 0), "B": ("a", 0), "C": ("h", 0)}, ["A-B", "B-C"], {"A": "pin"}, symbols={"a": 2, "h": 2})


def test_two_values_for_one_symbol_are_refused() -> None:
    """Truss and loads share their symbols."""
    with pytest.raises(InputError, match="h: truss and load case give it different values"):
        check_members(king_post(), LoadCase("x", {"D": (0, "-h")}, symbols={"h": 9}), "all")


def test_symbols_in_a_truss_file_round_trip() -> None:
    """[symbols] serves coordinates and loads."""
    text = """
format = 1
[joints]
A = [0, 0]
B = ["2*a", 0]
C = ["a", "h"]
[members]
all = ["A-B", "A-C", "B-C"]
[supports]
A = "pin"
B = { reaction = ["h", "a"] }
[symbols]
a = 4
h = "sqrt(5)"
w = 2
[cases.snow]
C = [0, "-w*a"]
"""
    stated = reads(text)
    assert reads(writes(stated)) == stated
    check = check_members(stated.truss, stated.case("snow"), "all")
    assert check.agreed
    assert check.members["A-C"].exact is not None
    assert set(check.members["A-C"].exact.symbols) == {"a", "h", "w"}


def test_load_symbols_are_compared_coefficient_by_coefficient() -> None:
    """Each product of symbols has its own stiffness run under unit value."""
    truss = king_post().at_values()
    case = LoadCase("x", {"D": ("w/3", "-2*P-7")}, symbols={"P": 3, "w": "sqrt(2)"})
    parts = {part.symbols: part for part in check_members(truss, case, ["A-D"]).members["A-D"].coefficients}
    assert set(parts) == {"1", "P", "w"}
    assert parts["P"].exact == parse("-5/3")
    assert all(part.agrees for part in parts.values())


def test_a_wrong_coefficient_is_seen_even_where_its_symbol_is_zero(monkeypatch: pytest.MonkeyPatch) -> None:
    """Negative control: at w = 0 the stated values agree, the coefficient of w does not."""
    right = stiffness.member_forces
    case = LoadCase("x", {"D": ("w", "-P")}, symbols={"P": 3, "w": 0})
    tampered = {"A-D": 0.25}

    def off_by_a_little(truss: Truss, loads: LoadCase) -> dict[str, float]:
        forces = right(truss, loads)
        sideways = any(load.fx for load in loads.loads) and not any(load.fx.symbols for load in loads.loads)
        return {name: force + (tampered.get(name, 0.0) if sideways else 0.0) for name, force in forces.items()}

    monkeypatch.setattr(stiffness, "member_forces", off_by_a_little)
    check = check_members(king_post().at_values(), case, ["A-D"])
    assert check.members["A-D"].verdict == "differs"
    assert "coefficient of w" in check.members["A-D"].reason


def test_taking_an_expression_apart() -> None:
    """Coefficients of products of symbols, surds kept."""
    parts = by_monomial(parse("3*P*w - sqrt(2)*P + 1/7", ("P", "w")))
    assert parts[(("P", 1), ("w", 1))] == rational(3)
    assert parts[(("P", 1),)] == parse("-sqrt(2)")
    assert parts[()] == rational(1, 7)
