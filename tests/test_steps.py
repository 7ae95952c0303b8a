"""Written steps: their terms, what they drop, what they prove, and that spoilt derivations are noticed."""

from __future__ import annotations

import copy
import random
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
import replay
import trade_trusses as trade
from random_trusses import random_truss
from stated_truss import Stated

from trusscalc.exact import ONE, ZERO, Exact, rational
from trusscalc.exacttext import parse, to_text
from trusscalc.roots import sqrt
from trusscalc.statics import matrix
from trusscalc.statics.cuts import (
    SUM_X,
    SUM_Y,
    About,
    Cut,
    Structure,
    about_joint,
    across,
    cut_of,
    structure_of,
)
from trusscalc.statics.steps import (
    Equation,
    Step,
    StepError,
    Term,
    section_letter,
    solved_for,
    unused_check,
    write_equation,
    write_step,
)

PRATT = trade.pratt(6, "4", "3")
TRUSSES = {
    "Pratt": PRATT,
    "K": trade.k_truss(8),
    "Fink of eight panels": trade.fink(eight=True),
    "three-hinged arch": trade.three_hinged_arch(),
    "tied arch": trade.three_hinged_arch(tied=True),
    "cantilever": trade.cantilever(),
    "turned": trade.pratt(6).turned(),
    "with roots": trade.warren(4, height="3*sqrt(3)"),
    "complex": random_truss(random.Random(4), 8, complex_share=1.0),
}


def structure(stated: Stated) -> Structure:
    """Return a truss and its loads indexed for cutting."""
    return structure_of(stated.truss, stated.case)


def tensions(stated: Stated) -> dict[str, Exact]:
    """Return the tension coefficient of every bar, from all joint equations."""
    return dict(matrix.solve(stated.truss, stated.case).tensions)


def panel(stated: Stated) -> tuple[Structure, Cut]:
    """Return a structure and the section through its third panel, left part kept."""
    indexed = structure(stated)
    return indexed, cut_of(indexed, ["L0", "L1", "L2", "U1", "U2"])


# --- terms ------------------------------------------------------------------------------------------------


def test_terms_of_a_moment_equation() -> None:
    """Reactions, loads, known members, the unknown last; arms as coefficients; what passes the centre is dropped."""
    indexed, cut = panel(PRATT)
    about = about_joint(indexed, "L3")
    equation = write_equation(indexed, cut, about, tensions(PRATT), ("U2-U3",))
    assert [(term.kind, term.name, term.axis) for term in equation.terms] == [
        ("reaction", "L0.y", ""),
        ("load", "L1", "y"),
        ("load", "L2", "y"),
        ("member", "U2-U3", ""),
    ]
    assert set(equation.dropped) == {"L2-L3", "U2-L3", "L0.x"}
    arms = {term.name: term.coefficient for term in equation.terms}
    assert arms == {"L0.y": -12, "L1": 8, "L2": 4, "U2-U3": -3}
    # by hand, loads of 80 at five joints: N = -(200 * 12 - 80 * 8 - 80 * 4) / 3
    assert {term.name: term.force for term in equation.terms} == {"L0.y": 200, "L1": 80, "L2": 80, "U2-U3": -480}
    assert equation.residual == ZERO


def test_terms_of_a_force_sum() -> None:
    """Cosines as coefficients."""
    indexed, cut = panel(PRATT)
    equation = write_equation(indexed, cut, SUM_Y, tensions(PRATT), ("U2-L3",))
    assert [term.name for term in equation.terms] == ["L0.y", "L1", "L2", "U2-L3"]
    assert [term.coefficient for term in equation.terms] == [1, -1, -1, rational(-3, 5)]
    assert equation.terms[-1].force == rational(200, 3)
    assert equation.residual == ZERO


def test_an_oblique_sum_is_scaled_to_true_cosines() -> None:
    """Across a rafter of slope 3 in 4: a vertical load has the cosine 4/5."""
    fink = trade.fink()
    indexed = structure(fink)
    about = across(indexed.bars["A-D"])
    equation = write_equation(indexed, cut_of(indexed, ["D"]), about, tensions(fink), ("D-P",))
    assert set(equation.dropped) == {"A-D", "D-C"}
    assert {term.name: term.coefficient for term in equation.terms} == {"D": rational(-4, 5), "D-P": -1}
    assert {term.name: term.force for term in equation.terms} == {"D": 10, "D-P": -8}


def test_a_direction_of_nested_length_is_left_as_it_is() -> None:
    """Its square is no rational number, so cosines would hold a root under a root; the sum holds all the same."""
    indexed, cut = panel(PRATT)
    about = About("force", parse("1+sqrt(2)"), rational(1))
    equation = write_equation(indexed, cut, about, tensions(PRATT))
    assert equation.residual == ZERO
    assert {term.name: term.coefficient for term in equation.terms}["L0.y"] == 1


def test_loads_are_written_the_way_they_act() -> None:
    """A downward load is positive with a negative arm; so is a symbol with a minus sign; no arm, no term."""
    stated = replace(
        PRATT, loads={"L1": ("0", "-5"), "L2": ("-Q", "-2*P"), "U1": ("3", "0")}, symbols={"P": "1", "Q": "2"}
    )
    indexed, cut = panel(stated)
    equation = write_equation(indexed, cut, about_joint(indexed, "L2"), tensions(stated))
    loads = {
        (term.name, term.axis): (to_text(term.tension), term.lever) for term in equation.terms if term.kind == "load"
    }
    assert loads == {("L1", "y"): ("5", 4), ("U1", "x"): ("3", -3)}
    equation = write_equation(indexed, cut, SUM_X, tensions(stated))
    assert ("Q", -1) in [(to_text(term.tension), term.lever) for term in equation.terms]
    equation = write_equation(indexed, cut, SUM_Y, tensions(stated))
    assert ("2*P", -1) in [(to_text(term.tension), term.lever) for term in equation.terms]


def test_force_and_coefficient_of_a_bar_with_a_root() -> None:
    """The proof needs lever times t only; what is printed is lever / L and t L."""
    term = Term("member", "A-B", "", rational(6), rational(8), rational(5))
    assert term.product == 30
    assert term.force == 10 * sqrt(rational(2))
    assert term.coefficient * term.force == term.product


# --- steps ------------------------------------------------------------------------------------------------


def every_step(name: str) -> list[Step]:
    """Return the steps that derive all members of a truss."""
    return list(TRUSSES[name].check().steps)


@pytest.mark.parametrize("name", TRUSSES)
def test_every_equation_holds_and_says_what_it_uses(name: str) -> None:
    """Terms sum to exactly zero; terms and dropped bars make up the cut; uses and solves are its members."""
    stated = TRUSSES[name]
    values = tensions(stated)
    for step in every_step(name):
        live = set()
        for equation in step.equations:
            bars = [term for term in equation.terms if term.kind != "load"]
            assert {term.name for term in bars} | set(equation.dropped) == set(equation.cut.bars)
            assert not {term.name for term in bars} & set(equation.dropped)
            assert all(term.lever for term in equation.terms)
            live |= {term.name for term in bars}
            if not any(term.tension.symbols for term in bars):
                assert equation.residual == ZERO
                assert all(term.tension == values[term.name] for term in bars)
        assert live == {*step.uses, *step.solves, *step.solves_in, *step.carries}
        for each, force in step.results.items():
            assert force == values[each] * structure(stated).bars[each].length


@pytest.mark.parametrize("name", TRUSSES)
def test_every_check_is_an_equation_not_used_before_that_holds(name: str) -> None:
    """Other side or other centre; it sums to zero, and it holds what the step found."""
    checked = 0
    for step in every_step(name):
        if step.check is None:
            continue
        checked += 1
        used = [(equation.cut.kept, equation.about) for equation in step.equations]
        assert (step.check.cut.kept, step.check.about) not in used
        assert step.check.residual == ZERO
        assert {term.name for term in step.check.terms} & {*step.solves, *step.solves_in}, step.number
    assert checked > len(every_step(name)) / 2


def test_a_wrong_value_spoils_the_check() -> None:
    """A check that cannot fail would prove nothing."""
    (step,) = [step for step in every_step("Pratt") if "U2-U3" in step.solves]
    values = {**tensions(PRATT), "U2-U3": tensions(PRATT)["U2-U3"] + ONE}
    check = unused_check(structure(PRATT), step.equations, values)
    assert check is not None
    assert check.residual != ZERO


def test_the_unknown_must_have_a_coefficient() -> None:
    """A member through the centre cannot be solved by moments about it."""
    indexed, cut = panel(PRATT)
    about = about_joint(indexed, "L3")
    with pytest.raises(StepError, match="U2-L3 has no coefficient"):
        solved_for(write_equation(indexed, cut, about, tensions(PRATT)), "U2-L3")
    with pytest.raises(StepError, match="U2-L3 has no coefficient"):
        write_step(indexed, 1, ((cut, about),), ("U2-L3",), tensions(PRATT))


def test_two_unknowns_from_equations_that_do_not_decide_them() -> None:
    """The same equation twice, from both sides of the truss."""
    indexed, cut = panel(PRATT)
    known = {name: value for name, value in tensions(PRATT).items() if name not in ("U2-U3", "L2-L3")}
    other = cut_of(indexed, ["L3", "L4", "L5", "L6", "U3", "U4", "U5"])
    with pytest.raises(StepError, match="do not decide U2-U3, L2-L3"):
        write_step(indexed, 1, ((cut, SUM_X), (other, SUM_X)), ("U2-U3", "L2-L3"), known)


def test_a_wrong_known_value_stays_visible() -> None:
    """The step's own equation holds, but its result is not that of all joints."""
    indexed, cut = panel(PRATT)
    known = {"L0.x": ZERO, "L0.y": rational(201)}
    step, found = write_step(indexed, 1, ((cut, about_joint(indexed, "L3")),), ("U2-U3",), known)
    assert step.equations[0].residual == ZERO
    assert found["U2-U3"] != tensions(PRATT)["U2-U3"]


def test_a_section_solved_at_once() -> None:
    """Three unknowns from three equations of one body."""
    indexed, cut = panel(PRATT)
    known = {"L0.x": ZERO, "L0.y": rational(200)}
    wanted = ("U2-U3", "L2-L3", "U2-L3")
    bodies = ((cut, SUM_X), (cut, SUM_Y), (cut, about_joint(indexed, "U2")))
    step, found = write_step(indexed, 7, bodies, wanted, known, letter="b")
    assert (step.number, step.kind, step.letter) == (7, "section", "b")
    assert found == {name: tensions(PRATT)[name] for name in wanted}
    assert step.uses == ("L0.x", "L0.y")
    assert all(isinstance(equation, Equation) and not equation.residual for equation in step.equations)


def test_kinds_and_letters() -> None:
    """Pairs have two bodies; sections are lettered a to z without i, l and o, then doubled."""
    kinds = {step.kind for step in every_step("K")}
    assert kinds == {"joint", "section", "whole", "pair"}
    letters = [section_letter(count) for count in range(60)]
    assert letters[:9] == list("abcdefghj")
    assert len(set(letters)) == 60
    assert not {"i", "l", "o"} & set(letters)
    assert letters[23] == "aa"


# --- the replay notices -----------------------------------------------------------------------------------


Spoil = Callable[[list[dict[str, Any]]], object]


def of_chord(steps: list[dict[str, Any]]) -> dict[str, Any]:
    """Return the step of a chord member: a section that cuts three members and a support, and uses a reaction."""
    return next(step for step in steps if "U2-U3" in step["solves"])


def _exchange(steps: list[dict[str, Any]]) -> None:
    place = steps.index(of_chord(steps))
    steps[1], steps[place] = {**steps[place], "number": 2}, {**steps[1], "number": place + 1}


SPOILT: dict[str, Spoil] = {
    "a cut bar left out": lambda steps: of_chord(steps)["cut"].pop(),
    "a bar that is not cut": lambda steps: of_chord(steps)["cut"].append("L4-L5"),
    "a joint too many": lambda steps: of_chord(steps)["kept"].append("L5"),
    "a use left out": lambda steps: of_chord(steps)["uses"].pop(),
    "a use without coefficient": lambda steps: of_chord(steps)["uses"].append("L0.x"),
    "another centre": lambda steps: of_chord(steps)["equations"].__setitem__(
        0, {"sum": "moment", "centre": ["1", "1"]}
    ),
    "used before it is solved": _exchange,
    "solves nothing": lambda steps: of_chord(steps).update(solves=[], equations=[]),
    "one equation for two": lambda steps: of_chord(steps)["solves"].append("L3-U3"),
    "another kind": lambda steps: of_chord(steps).update(kind="joint"),
    "numbers out of order": lambda steps: of_chord(steps).update(number=99),
    "solved twice": lambda steps: steps.append({**of_chord(steps), "number": len(steps) + 1}),
}


@pytest.mark.parametrize("how", SPOILT)
def test_the_replay_notices_a_spoilt_derivation(how: str) -> None:
    """Negative controls of the replay that the other tests rest on."""
    data = copy.deepcopy(PRATT.data())
    assert replay.faults(PRATT, data, PRATT.members) == []
    assert (of_chord(data["steps"])["kind"], of_chord(data["steps"])["uses"]) == ("section", ["L0.y"])
    SPOILT[how](data["steps"])
    assert replay.faults(PRATT, data, PRATT.members) != []


@pytest.mark.parametrize(
    ("key", "wrong"),
    [
        ("exact", "-480+1/10^30"),
        ("exact", "-480.0"),
        ("decimal", -480.0000001),
        ("stiffness", -480.1),
        ("sense", "T"),
        ("verdict", "differs"),
        ("steps", [1, 2]),
    ],
)
def test_the_replay_notices_a_spoilt_value(key: str, wrong: object) -> None:
    """Every number and word of a member is looked at."""
    data = copy.deepcopy(PRATT.data())
    assert data["members"]["U2-U3"]["exact"] == "-480"
    data["members"]["U2-U3"][key] = wrong
    assert replay.faults(PRATT, data, PRATT.members) != []


def test_the_replay_notices_what_is_missing() -> None:
    """A member or reaction left out, or never asked for; agreement withheld."""
    for key, name in (("members", "U2-U3"), ("reactions", "L0.y")):
        data = copy.deepcopy(PRATT.data())
        del data[key][name]
        assert replay.faults(PRATT, data, PRATT.members) != []
    assert replay.faults(PRATT, PRATT.data(), PRATT.members[1:]) != []
    assert replay.faults(PRATT, {**PRATT.data(), "agreed": False}, PRATT.members) != []
