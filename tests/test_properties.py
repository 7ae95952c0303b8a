"""What must hold for any determinate truss: random ones, against the independent solution and replay of ``replay.py``.

Examples are derandomised, so every run draws the same trusses; a failing one is printed as its ``Stated`` record.
"""

from __future__ import annotations

import random
import warnings
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest
import replay
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from random_trusses import condition, random_truss, trusses
from stated_truss import Pair, Stated

from trusscalc import files
from trusscalc.errors import TrusscalcWarning
from trusscalc.membercheck import check_members
from trusscalc.report import check_data
from trusscalc.statics import matrix


def drawn(examples: int) -> settings:
    """Return settings: the same examples on every run, as long as each takes."""
    slow = [HealthCheck.too_slow, HealthCheck.data_too_large]
    return settings(max_examples=examples, deadline=None, derandomize=True, suppress_health_check=slow, database=None)


pytestmark = pytest.mark.filterwarnings("ignore:.*runs through joint:trusscalc.errors.TrusscalcWarning")
"""Random members may run through joints."""


# --- every member of every truss --------------------------------------------------------------------------


@drawn(40)
@given(trusses())
def test_rational_trusses(stated: Stated) -> None:
    """Values, senses, verdicts and derivation of all members of simple trusses with rational coordinates."""
    assert replay.faults(stated, stated.data(), stated.members) == []


@drawn(15)
@given(trusses("surd", most_joints=8))
def test_trusses_with_roots(stated: Stated) -> None:
    """The same with coordinates that hold roots."""
    assert replay.faults(stated, stated.data(), stated.members) == []


@drawn(6)
@given(trusses("angle", most_joints=6))
def test_trusses_with_angles(stated: Stated) -> None:
    """The same with coordinates that hold sines and cosines."""
    assert replay.faults(stated, stated.data(), stated.members) == []


@drawn(20)
@given(trusses(complex_share=1.0, most_joints=9))
def test_complex_trusses(stated: Stated) -> None:
    """The same made wholly of complex moves: carried forces, closed by equations that decide them."""
    assert replay.faults(stated, stated.data(), stated.members) == []


@drawn(10)
@given(trusses(complex_share=0.4, most_joints=12))
def test_mixed_trusses(stated: Stated) -> None:
    """The same of both kinds of moves."""
    assert replay.faults(stated, stated.data(), stated.members) == []


@pytest.mark.parametrize("base", ["span", "links", "wall", "hinge"])
def test_every_kind_of_support(base: str) -> None:
    """Pin and roller, three links, two pins at a wall, two parts with a hinge on two pins."""
    for seed in range(4):
        stated = random_truss(random.Random(seed), 7, base=base)
        assert replay.faults(stated, stated.data(), stated.members) == []


@drawn(20)
@given(trusses("surd", most_joints=9), st.data())
def test_some_members_only(stated: Stated, data: st.DataObject) -> None:
    """What is asked for is all there is, and it stands by itself."""
    asked = data.draw(st.lists(st.sampled_from(stated.members), min_size=1, max_size=3, unique=True))
    assert replay.faults(stated, stated.data(asked), asked) == []


# --- equilibrium ------------------------------------------------------------------------------------------


@drawn(30)
@given(st.one_of(trusses(), trusses("surd", most_joints=8), trusses(complex_share=0.5)))
def test_every_joint_is_in_equilibrium_exactly(stated: Stated) -> None:
    """Load plus tension coefficients times coordinate differences: zero, not nearly zero."""
    truss, case = stated.truss, stated.case
    solved = matrix.solve(truss, case)
    assert solved.degree == 0
    assert solved.undecided == ()
    assert solved.rank == 2 * len(stated.joints)
    sums = matrix.joint_residuals(solved.bars, case, solved.tensions)
    assert all(not fx and not fy for fx, fy in sums.values())
    assert check_members(truss, case, "all").residuals == {}


@drawn(25)
@given(trusses(), st.data())
def test_all_joint_equations_against_the_independent_solution(stated: Stated, data: st.DataObject) -> None:
    """With a bar taken out or one put in, rank and decided members are those of the independent elimination."""
    member = data.draw(st.sampled_from(stated.members))
    short = replace(stated, members=tuple(name for name in stated.members if name != member))
    held = {end for name in short.members for end in name.split("-")}
    if held == set(stated.joints):
        with pytest.raises(matrix.UnstableTrussError) as caught:
            matrix.solve(short.truss, short.case)
        assert set(caught.value.joints) == moving_joints(short)
    names = sorted(stated.joints)
    tied = {frozenset(name.split("-")) for name in stated.members}
    free = [f"{a}-{b}" for a in names for b in names if a < b and frozenset((a, b)) not in tied]
    if free:
        long = replace(stated, members=(*stated.members, data.draw(st.sampled_from(free))))
        solved = matrix.solve(long.truss, long.case)
        assert solved.degree == 1
        assert set(solved.undecided) == redundant_bars(long)


def _directions(stated: Stated) -> list[dict[str, Any]]:
    """Return the homogeneous joint equations as rows (name to coefficient)."""
    bars = replay.bars_of(stated)
    rows: dict[tuple[str, int], dict[str, Any]] = {(joint, axis): {} for joint in bars.places for axis in (0, 1)}
    for name, (start, end, fx, fy) in bars.bars.items():
        for axis, part in ((0, fx), (1, fy)):
            rows[start, axis][name] = part
            if end is not None:
                rows[end, axis][name] = -part
    return list(rows.values())


def redundant_bars(stated: Stated) -> set[str]:
    """Return the bars of a truss with one bar too many that self-stress moves: the null vector of its equations."""
    bars = list(replay.bars_of(stated).bars)
    rows = _directions(stated)
    for carried in bars:  # the bar given the force 1; it must take part in the self-stress
        moved = [
            {**{name: part for name, part in row.items() if name != carried}, "": -row.get(carried, replay.mp.mpf(0))}
            for row in rows
        ]
        try:
            found = replay.eliminated(moved, [name for name in bars if name != carried])
        except ValueError:
            continue
        live = {name for name, total in found.items() if abs(total.get("", 0)) > replay.TINY * 10**10}
        return live | {carried}
    message = "no bar is redundant"
    raise AssertionError(message)


def moving_joints(stated: Stated) -> set[str]:
    """Return the joints that move in the mechanism of a truss with one bar too few, by the equations of velocity."""
    bars = replay.bars_of(stated)
    unknowns = [f"{joint} {axis}" for joint in bars.places for axis in "xy"]
    rows = []
    for start, end, fx, fy in bars.bars.values():
        row = {f"{start} x": fx, f"{start} y": fy}
        if end is not None:
            row |= {f"{end} x": -fx, f"{end} y": -fy}
        rows.append(row)
    for carried in unknowns:
        moved = [
            {**{name: part for name, part in row.items() if name != carried}, "": -row.get(carried, replay.mp.mpf(0))}
            for row in rows
        ]
        try:
            found = replay.eliminated(moved, [name for name in unknowns if name != carried])
        except ValueError:
            continue
        live = {name for name, total in found.items() if abs(total.get("", 0)) > replay.TINY * 10**10} | {carried}
        return {name.rpartition(" ")[0] for name in live}
    message = "nothing moves"
    raise AssertionError(message)


# --- linearity --------------------------------------------------------------------------------------------


def exact_forces(stated: Stated) -> dict[str, Any]:
    """Return the exact force of every member and reaction by the hand route."""
    check = stated.check()
    return {name: item.exact for name, item in {**check.members, **check.reactions}.items()}


def loads_on(stated: Stated) -> st.SearchStrategy[dict[str, Pair]]:
    """Draw loads on some joints of a truss."""
    size = st.integers(-50, 50).map(str)
    return st.dictionaries(st.sampled_from(sorted(stated.joints)), st.tuples(size, size), min_size=1, max_size=4)


def summed(first: Mapping[str, Pair], second: Mapping[str, Pair]) -> dict[str, Pair]:
    """Return the sum of two sets of loads, as texts."""
    none = ("0", "0")

    def both(name: str, axis: int) -> str:
        return f"{first.get(name, none)[axis]}+({second.get(name, none)[axis]})"

    return {name: (both(name, 0), both(name, 1)) for name in sorted({*first, *second})}


@drawn(10)
@given(st.one_of(trusses(most_joints=8), trusses("surd", most_joints=7)), st.data())
def test_superposition_and_reversal(stated: Stated, data: st.DataObject) -> None:
    """Forces under two sets of loads add up exactly; reversed loads reverse all forces and no zero."""
    first, second = data.draw(loads_on(stated)), data.draw(loads_on(stated))
    one, two = exact_forces(stated.under(first)), exact_forces(stated.under(second))
    both = exact_forces(stated.under(summed(first, second)))
    assert both == {name: one[name] + two[name] for name in one}
    reversed_loads = {name: (f"-({fx})", f"-({fy})") for name, (fx, fy) in first.items()}
    assert exact_forces(stated.under(reversed_loads)) == {name: -force for name, force in one.items()}


@drawn(6)
@given(trusses(most_joints=7))
def test_influence_ordinates(stated: Stated) -> None:
    """A force is the sum over all joints of load times ordinate, the force under a unit load there."""
    forces = exact_forces(stated)
    total = dict.fromkeys(forces, 0 * next(iter(forces.values())))
    for joint, pair in stated.loads.items():
        for axis in (0, 1):
            unit = ("1", "0") if axis == 0 else ("0", "1")
            ordinates = exact_forces(stated.under({joint: unit}))
            total = {name: total[name] + int(pair[axis]) * ordinates[name] for name in total}
    assert total == forces


@drawn(10)
@given(trusses(most_joints=8))
def test_scaling_and_turning(stated: Stated) -> None:
    """Size changes nothing; turned by the 3-4-5 angle, members keep their forces."""
    forces = exact_forces(stated)
    assert exact_forces(stated.scaled("7/3")) == forces
    turned = stated.turned()
    found = turned.data()
    assert replay.faults(turned, found, turned.members) == []
    for name in stated.members:
        assert turned.check([name]).members[name].exact == forces[name]


# --- files ------------------------------------------------------------------------------------------------


@drawn(10)
@given(st.one_of(trusses(most_joints=8), trusses("surd", most_joints=7), trusses("angle", most_joints=6)))
def test_through_the_truss_file(stated: Stated) -> None:
    """Written to a truss file and read again, by the library's writer too: the same JSON."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", TrusscalcWarning)
        first = files.reads(stated.file())
        again = files.reads(files.writes(first))
        results = [check_data(check_members(each.truss, each.case("load"), "all")) for each in (first, again)]
    assert results[0] == results[1]
    assert results[0]["members"] == stated.data()["members"]


# --- the generator ----------------------------------------------------------------------------------------


def test_the_trusses_are_what_they_claim() -> None:
    """Well conditioned, determinate by count, and of all kinds."""
    kinds = set()
    for seed in range(30):
        stated = random_truss(random.Random(seed), 8, complex_share=seed % 2)
        bars = replay.bars_of(stated).bars
        assert len(bars) == 2 * len(stated.joints)
        assert condition(stated) < 2e3
        kinds |= {str(type(support)) for support in stated.supports.values()} | {len(stated.supports)}
    assert {"<class 'str'>", "<class 'dict'>", "<class 'list'>", 2, 3} <= kinds
