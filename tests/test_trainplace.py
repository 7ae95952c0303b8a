"""A train put anywhere over an influence line, and moved by hand."""

from __future__ import annotations

import random
from fractions import Fraction
from typing import Any

import pytest
from trade_trusses import pratt

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import ZERO, exact, rational
from trusscalc.exacttext import parse
from trusscalc.influence import InfluenceLine, influence_line
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.trains import Train
from trusscalc.travel import extremes, placed
from trusscalc.widgets import explore
from trusscalc.widgets.trainplace import standing
from trusscalc.widgets.travelling import Travel

DECK = ",".join(f"L{n}" for n in range(9))
BRIDGE = pratt(8)
"""Panels of 5, 6 high, span 40."""
TRAINS = (
    Train("pair", (6, 24), (14,), impact="0.33"),
    Train("three", (8, 32, 32), (14, (14, 30)), lane="0.64", share="1/2"),
    Train("heavy", (40, 80, 80, 80, 80), (8, 5, 5, 5), follow=(5, 8)),
    Train("model", (250, 250, 250, 250), ("1.6", "1.6", "1.6"), beside=("0.8", 80)),
    Train("helped", (10, 20, 10), (7, 9), omit=True, lane=1),
)


def line_of(target: str) -> InfluenceLine:
    """Return an influence line of the bridge."""
    return influence_line(BRIDGE.truss, target, DECK.split(","))


@pytest.mark.parametrize("train", TRAINS, ids=lambda train: train.name)
@pytest.mark.parametrize("target", ["U3-L4", "L3-L4", "U2-U3", "L0.y"])
def test_at_the_governing_stand_it_gives_the_governing_force(target: str, train: Train) -> None:
    """Two ways to the same number: what travel finds, and what is worked out for that place."""
    line = line_of(target)
    for place, found in enumerate(extremes(line, [train])):
        stand = found.stand
        if stand is None or stand.at_limit:
            continue
        here = standing(line, train, stand.lead_axle_at, stand.direction, stand.spacing)[place]
        assert here.value == found.value
        assert dict(here.parts) == dict(found.parts)
        assert placed(here, line.positions, line.chain, train) == placed(found, line.positions, line.chain, train)


@pytest.mark.parametrize("train", TRAINS, ids=lambda train: train.name)
def test_no_place_gives_more_than_the_governing_one(train: Train) -> None:
    """Three hundred places, both directions: never above the largest, never below the least."""
    draw = random.Random(5)
    line = line_of("U3-L4")
    largest, least = extremes(line, [train])
    for _ in range(150):
        lead = exact(Fraction(draw.randint(-400, 900), 10))
        for direction in ("forward", "backward"):
            high, low = standing(line, train, lead, direction)
            assert low.value <= high.value
            assert least.value <= low.value or low.value == ZERO
            assert high.value <= largest.value or high.value == ZERO


def test_the_force_at_a_place_is_that_of_an_ordinary_check() -> None:
    """The loads as they stand, shared to the joints, checked by sections and joints: the same force, exactly."""
    line, train = line_of("U3-L4"), TRAINS[0]
    here, _ = standing(line, train, rational(137, 10))
    loads = LoadCase("train", placed(here, line.positions, line.chain, train))
    assert check_members(BRIDGE.truss, loads, ["U3-L4"]).members["U3-L4"].exact == here.value


def test_axles_off_the_chain_count_nothing_its_ends_do() -> None:
    """One axle beyond the end, one exactly on it."""
    line = line_of("L0.y")
    single = Train("pair", (1, 1), (10,))
    high, low = standing(line, single, exact(10))
    assert high.value == low.value == line.at(exact(10)) + line.at(exact(0))
    beyond, _ = standing(line, single, exact(9))
    assert beyond.stand is not None
    assert beyond.stand.axles_at == (exact(9), None)
    assert beyond.value == line.at(exact(9))


def test_other_spacings_are_refused() -> None:
    """A variable spacing within its limits only."""
    line = line_of("U3-L4")
    with pytest.raises(InputError, match="not its axle spacings"):
        standing(line, TRAINS[1], exact(20), "forward", (exact(14), exact(31)))
    with pytest.raises(InputError, match="not its axle spacings"):
        standing(line, TRAINS[0], exact(20), "forward", ())[0] and standing(
            line, TRAINS[0], exact(20), "forward", (exact(3),)
        )


# --- moved by hand ----------------------------------------------------------------------------------------


@pytest.fixture
def travel() -> Travel:
    """Return a pair of axles under a diagonal, on the demo of the trade."""
    return explore(BRIDGE.truss, BRIDGE.case).travel("U3-L4", TRAINS[0], DECK)


def test_a_train_begins_where_it_governs_and_is_put_anywhere(travel: Travel) -> None:
    """Place, direction, axle over a joint, back to where it governs; errors change nothing."""
    assert travel.here[0].value == travel.largest.value
    travel.lead_axle_at = "12.5"
    assert travel.lead_axle_at == parse("12.5")
    assert travel.here[0].value < travel.largest.value
    travel.direction = "backward"
    travel.put(1, 3)
    assert travel.lead_axle_at == parse("15 - 14")
    travel.to_least()
    assert travel.here[1].value == travel.least.value
    place = travel.place
    moves: list[tuple[Any, Any, str]] = [
        (lambda: setattr(travel, "direction", "sideways"), InputError, "forward or backward"),
        (lambda: setattr(travel, "lead_axle_at", "here"), Exception, "here"),
        (lambda: setattr(travel, "train", "ghost"), UnknownNameError, "no train 'ghost'"),
        (lambda: setattr(travel, "spacing", (1,)), InputError, "not its axle spacings"),
        (lambda: travel.put(5, 0), InputError, "no axle 5"),
    ]
    for move, error, message in moves:
        with pytest.raises(error, match=message):
            move()
        assert travel.place == place
    travel.to_largest()
    assert travel.place != place


def test_its_form_on_file_names_force_and_governing_places(travel: Travel) -> None:
    """Figure, place, force here, largest and least of all."""
    form = travel.frozen()
    assert "data:image/svg+xml;base64," in form["text/markdown"]
    for words in ("largest of all", "least of all", "leading axle at", "agree"):
        assert words in form["text/plain"]


def test_no_adverse_position_is_said() -> None:
    """A lower chord is never pressed by loads on the deck: no least, and an error that says so."""
    found = explore(BRIDGE.truss, BRIDGE.case).travel("L3-L4", TRAINS[0], DECK)
    with pytest.raises(InputError, match="no position of the train brings the force below zero"):
        found.to_least()


def test_page_and_form_move_the_train(travel: Travel) -> None:
    """Dragged, over a joint, turned, typed: one place, shown by all; what goes wrong is told."""
    pytest.importorskip("anywidget")
    from trusscalc.widgets.trainscreen import TrainScreen  # noqa: PLC0415

    screen = TrainScreen(travel)
    screen.received({"event": "place", "at": 12.5})
    assert screen.lead.value == "12.5"
    assert screen.drawing.state["lead"] == 12.5
    screen.received({"event": "over", "axle": 1, "joint": 2})
    assert travel.lead_axle_at == parse("24")
    screen.received({"event": "turn"})
    assert screen.direction.value == travel.direction
    screen.lead.value = "7/2"
    assert travel.lead_axle_at == parse("7/2")
    screen.lead.value = "somewhere"
    assert screen.drawing.state["problem"]
    assert travel.lead_axle_at == parse("7/2")
    screen.received({"event": "over", "axle": 9, "joint": 2})
    assert "no axle 9" in screen.drawing.state["problem"]
    screen.largest.click()
    assert travel.here[0].value == travel.largest.value
    assert screen.drawing.state["problem"] == ""
    screen.box.close()
