"""Complex trusses: forces carried as X, Y, ... and closed."""

from __future__ import annotations

import random

import pytest
from random_trusses import random_truss
from replay import faults
from stated_truss import Stated

from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.statics import carrying
from trusscalc.statics.cuts import SUM_X, SUM_Y, cut_of, structure_of
from trusscalc.statics.derivations import Derivations
from trusscalc.statics.incidence import layout_of
from trusscalc.statics.matrix import solve
from trusscalc.statics.prices import Prices
from trusscalc.statics.steps import StepError, carried_letter, write_close

HEXAGON = Stated(
    {"A": ("0", "0"), "B": ("3", "-2"), "C": ("7", "-1"), "D": ("9", "3"), "E": ("4", "5"), "F": ("-1", "4")},
    ("A-B", "B-C", "C-D", "D-E", "E-F", "F-A", "A-D", "B-E", "C-F"),
    {"B": "pin", "C": "roller"},
    {"E": ("5", "-20"), "F": ("-3", "-10")},
)
"""The classical complex truss: a hexagon with its three long diagonals, made irregular so that it is stable."""


def test_hexagon_is_derived_with_one_carried_force() -> None:
    """Every force of the hexagon is right, and its derivation replays with one carried bar."""
    data = HEXAGON.data()
    assert faults(HEXAGON, data, HEXAGON.members) == []
    assert [len(step["carries"]) for step in data["steps"] if "carries" in step] == [1]
    assert [step["kind"] for step in data["steps"]].count("close") == 1


def test_carried_values_hold_the_letter_and_the_story_is_told_in_order() -> None:
    """X is introduced, used, closed, and only then do its bars get numbers."""
    check = HEXAGON.check("all")
    (first,) = [step for step in check.steps if step.carries]
    (closing,) = [step for step in check.steps if step.kind == "close"]
    assert list(first.carries.values()) == ["X"]
    assert first.number < closing.number
    for step in check.steps[first.number - 1 : closing.number - 1]:
        assert all("X" in force.symbols for force in step.partial.values())
    assert closing.solves == tuple(first.carries)
    assert not any(force.symbols for force in closing.results.values())
    # the closing equation holds X with a coefficient that is not zero, and its value solves it
    (equation,) = closing.equations
    at_zero, at_one = (equation.residual.substitute({"X": parse(text)}) for text in "01")
    assert at_one != at_zero
    (force,) = closing.results.values()
    assert equation.residual.substitute({"X": force}) == parse("0")


@pytest.mark.parametrize("seed", range(24))
def test_wholly_complex_random_trusses_are_solved(seed: int) -> None:
    """Trusses grown by complex moves alone are solved, agreed and replayed (seeds 0 to 23, 8 to 19 joints)."""
    stated = random_truss(random.Random(seed), 8 + seed % 12, complex_share=1.0, base="span")
    assert faults(stated, stated.data(), stated.members) == []


@pytest.mark.parametrize("seed", [100, 101, 102, 103, 104, 105, 106, 108])
def test_mixed_random_trusses_are_solved(seed: int) -> None:
    """Half the moves complex, some coordinates surds, up to 32 joints (seeds 100 to 108 without 107)."""
    numbers = "surd" if seed % 4 == 0 else "rational"
    joints = 8 + 3 * (seed - 100) if numbers == "rational" else 10
    stated = random_truss(random.Random(seed), joints, numbers, complex_share=0.5, base="span")
    assert faults(stated, stated.data(), stated.members) == []


def test_letters_go_on_after_z() -> None:
    """The fourth carried force and later ones have letters too."""
    assert [carried_letter(count) for count in range(5)] == ["X", "Y", "Z", "X4", "X5"]


def test_an_equation_in_which_x_vanishes_is_refused() -> None:
    """0 X = 0 occurs: closing with the sum of all forces on the whole truss decides no bar, and is caught."""
    structure = structure_of(HEXAGON.truss, HEXAGON.case)
    known: dict[str, Exact] = dict(solve(HEXAGON.truss, HEXAGON.case).tensions)
    bodies = ((cut_of(structure, structure.joints), SUM_Y),)
    with pytest.raises(StepError, match="do not decide"):
        write_close(structure, 1, bodies, {"A-D": "X"}, known)
    assert SUM_X != SUM_Y


def test_nothing_to_carry_gives_nothing() -> None:
    """When everything is known already there is no bar to carry."""
    structure = structure_of(HEXAGON.truss, HEXAGON.case)
    layout = layout_of(structure, {})
    everything = (1 << len(layout.bars)) - 1
    assert carrying.carry(Derivations(Prices(layout, 0), everything), everything) is None
