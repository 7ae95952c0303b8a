"""Chains of joints: the paths of loads."""

from __future__ import annotations

import re
from typing import Any

import pytest

from trusscalc.chains import Chain, chain_faults, chain_of, positions
from trusscalc.errors import InputError
from trusscalc.exacttext import parse
from trusscalc.truss import Truss

TRUSS = Truss(
    {"L0": (0, 0), "L1": (3, 0), "L2": ("3 + 2*sqrt(3)", 0), "L3": (10, 0), "U1": (3, 4), "U2": ("3 + 2*sqrt(3)", 4)},
    ["L0-L1", "L2-L1", "L2-L3", "L0-U1", "U1-U2", "U2-L3", "U1-L1", "U2-L2", "U1-L2"],
    {"L0": "pin", "L3": "roller"},
)
DECK = Chain("deck", ("L0", "L1", "L2", "L3"))


def test_a_chain_is_named_or_listed() -> None:
    """By its name, by its joints in one text or in a list, or as a record."""
    assert chain_of(TRUSS, "deck", [DECK]) == DECK
    assert chain_of(TRUSS, DECK) == DECK
    assert chain_of(TRUSS, "L0, L1,L2,L3") == Chain("L0 to L3", DECK.joints)
    assert chain_of(TRUSS, ["L0", "U1", "U2"], [DECK]) == Chain("L0 to U2", ("L0", "U1", "U2"))


def test_positions_are_horizontal_and_increase_in_the_order_of_travel() -> None:
    """Sloping pieces count with their plan length, and a chain may go to the left."""
    assert positions(TRUSS, DECK) == (parse("0"), parse("3"), parse("3 + 2*sqrt(3)"), parse("10"))
    assert positions(TRUSS, chain_of(TRUSS, "U2,U1,L0")) == (parse("0"), parse("2*sqrt(3)"), parse("3 + 2*sqrt(3)"))


def test_symbols_are_taken_at_their_stated_values() -> None:
    """A panel of length a is measured as it is drawn."""
    truss = Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h")},
        ["A-B", "A-C", "B-C"],
        {"A": "pin", "B": "roller"},
        symbols={"a": 3, "h": 2},
    )
    assert positions(truss, chain_of(truss, "A,C,B")) == (parse("0"), parse("3"), parse("6"))


@pytest.mark.parametrize(
    ("joints", "messages"),
    [
        ((), ["two joints or more"]),
        (("L0",), ["two joints or more"]),
        ((1, 2), ["a list of joint names is needed"]),
        (("L0", "L4", "L1"), ["there is no joint 'L4'; did you mean L"]),
        (("L0", "L1", "L0"), ["L0 stands in it twice", "L1 and L0 go back"]),
        (("L0", "L0", "L1"), ["L0 stands in it twice"]),
        (("L0", "L2", "L3"), [r"no member joins L0 and L2; .* was L1 or U1 left out\?"]),
        (("L1", "U2"), ["no member joins L1 and U2"]),
        (("L0", "L3"), ["no member joins L0 and L3; list every joint on the way of the load$"]),
        (("L0", "L1", "U1", "U2"), ["L1 and U1 stand one above the other"]),
        (("L3", "L2", "L1", "U1", "U2"), ["L1 and U1 stand one above the other", "U1 and U2 go back"]),
        (("L0", "X", "L2", "U2"), ["no joint 'X'", "L2 and U2 stand one above the other"]),
    ],
)
def test_every_fault_is_told(joints: tuple[Any, ...], messages: list[str]) -> None:
    """Together, each with the place it stands in the file."""
    with pytest.raises(InputError) as raised:
        chain_of(TRUSS, "deck", [Chain("deck", joints)])
    assert len(raised.value.problems) == len(messages)
    for problem, message in zip(raised.value.problems, messages, strict=True):
        assert problem.startswith("[chains.deck] joints: ")
        assert re.search(message, problem), problem


def test_a_listed_chain_is_named_by_its_ends_in_messages() -> None:
    """It stands in no file."""
    assert chain_faults(TRUSS, Chain("L0 to L2", ("L0", "L2")))[0].startswith("chain L0 to L2: no member joins")


def test_an_unknown_name_asks_for_joints_or_suggests_a_chain() -> None:
    """A typing error is not taken for a joint."""
    with pytest.raises(InputError, match="there is no chain 'dek'; did you mean deck"):
        chain_of(TRUSS, "dek", [DECK])
    with pytest.raises(InputError, match="there is no chain 'L0'; name one, or list its joints"):
        chain_of(TRUSS, "L0")
