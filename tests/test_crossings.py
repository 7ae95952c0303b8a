"""A drawn section line: what it cuts and what it parts, decided exactly."""

from __future__ import annotations

import random
from fractions import Fraction
from itertools import pairwise

import pytest
from random_trusses import random_truss
from trade_trusses import k_truss, pratt

from trusscalc.errors import InputError
from trusscalc.exact import Exact, exact
from trusscalc.exacttext import number
from trusscalc.statics.owncuts import own_cut
from trusscalc.truss import Truss
from trusscalc.widgets.crossings import Point, drawn_section

K = k_truss(8, "4", "6").truss
PRATT = pratt(8).truss
"""Panels of 5, 6 high."""


def line(*points: tuple[object, object]) -> list[Point]:
    """Return points of exact numbers."""
    return [(number(x), number(y)) for x, y in points]


def test_a_straight_section_cuts_a_panel() -> None:
    """Both chords and the diagonal, the left part on the left going up."""
    found = drawn_section(PRATT, line((12, -1), (12, 7)))
    assert set(found.crossed) == {"L2-L3", "U2-U3", "U2-L3"}
    assert set(found.left) == {"L0", "L1", "L2", "U1", "U2"}
    assert found.fault == ""
    assert set(drawn_section(PRATT, line((12, 7), (12, -1))).right) == set(found.left)


def test_a_bent_section_goes_round_a_joint() -> None:
    """Round M2 of a K truss it cuts the posts instead of the diagonals, as the curved section of the books does."""
    bent = drawn_section(K, line((10, -1), (7, 3), (10, 7)))
    assert set(bent.crossed) == {"L2-L3", "U2-U3", "L2-M2", "M2-U2"}
    straight = drawn_section(K, line((10, -1), (10, 7)))
    assert set(straight.crossed) == {"L2-L3", "U2-U3", "M2-U3", "M2-L3"}


def test_a_closed_line_cuts_out_a_joint() -> None:
    """Going round it against the clock, the joint lies on the left."""
    found = drawn_section(PRATT, line((9, -1), (11, -1), (11, 1), (9, 1)), closed=True)
    assert found.left == ("L2",)
    assert set(found.crossed) == {"L1-L2", "L2-L3", "L2-U2", "U1-L2"}


@pytest.mark.parametrize(
    ("points", "fault"),
    [
        ([(10, -1), (10, 7)], "runs through joint L2"),
        ([(12, -1), (12, 0)], "ends or bends on L2-L3"),
        ([(12, -1), (12, 6), (13, 7)], "ends or bends on U2-U3"),
        ([(11, 0), (14, 0)], "ends or bends on L2-L3"),
        ([(12, -1), (12, 3)], "does not part the truss"),
        ([(-5, -1), (-5, 7)], "crosses no member"),
        ([(12, -1), (12, 1), (13, 1), (13, -1)], "crosses L2-L3 and comes back"),
        ([("sqrt(2)*5", "0"), (12, -3)], "ends or bends on L1-L2"),
    ],
)
def test_what_is_no_section_is_told(points: list[tuple[object, object]], fault: str) -> None:
    """Through a joint, on a member, past the truss, not through: each is named and nothing is kept."""
    found = drawn_section(PRATT, line(*points))
    assert fault in found.fault
    assert found.left == found.right == ()


def test_a_hair_beside_a_joint_is_beside_it() -> None:
    """Where floats would see the joint on the line, exact numbers see on which side it lies."""
    hair = Fraction(1, 10**40)
    left = drawn_section(PRATT, [(exact(10 - hair), exact(-1)), (exact(10 - hair), exact(7))])
    right = drawn_section(PRATT, [(exact(10 + hair), exact(-1)), (exact(10 + hair), exact(7))])
    assert "L2" in left.right
    assert "L2" in right.left


def test_roots_in_the_coordinates_are_no_obstacle() -> None:
    """A line through the very place of a joint at (2, 2 sqrt 3) meets it, a decimal near it does not."""
    truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, "2*sqrt(3)")}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    assert "through joint C" in drawn_section(truss, line((0, "2*sqrt(3)"), (5, "2*sqrt(3)"))).fault
    below, above = "3.4641016151377545", "3.4641016151377546"  # the joint's height lies between these decimals
    assert drawn_section(truss, line((0, below), (5, below))).crossed == ("A-C", "B-C")
    assert "crosses no member" in drawn_section(truss, line((0, above), (5, above))).fault


def test_too_few_and_too_many_points() -> None:
    """One place twice is no line; fifty corners are a slip."""
    with pytest.raises(InputError, match="2 to 40 different points, this one has 1"):
        drawn_section(PRATT, line((1, 1), (1, 1)))
    with pytest.raises(InputError, match="this one has 50"):
        drawn_section(PRATT, line(*[(n, n % 2) for n in range(50)]))


def test_random_lines_cut_what_they_part() -> None:
    """Crossings against a count in fractions of its own, parts against the cut of the joints kept."""
    draw = random.Random(7)
    parted = 0
    for _ in range(60):
        truss = random_truss(draw, draw.randint(6, 12)).truss
        places = {joint.name: (joint.x.as_fraction(), joint.y.as_fraction()) for joint in truss.joints}
        xs = [place[0] for place in places.values()]
        points = [(Fraction(draw.randint(-400, 400), 23) + sum(xs) / len(xs), Fraction(y, 7)) for y in (-300, 41, 300)]
        found = drawn_section(truss, [(exact(x), exact(y)) for x, y in points])
        if "joint" in found.fault or "bends" in found.fault:
            continue
        ends = {member.name: (places[member.start], places[member.end]) for member in truss.members}
        pieces = list(pairwise(points))
        odd = {name for name, bar in ends.items() if sum(_meets(piece, bar) for piece in pieces) % 2}
        assert set(found.crossed) == odd
        if not found.fault:
            parted += 1
            members = {member.name for member in truss.members}
            assert set(own_cut(truss, keep=found.left).bars) & members == odd
    assert parted >= 15


def _meets(piece: tuple[tuple[Fraction, Fraction], ...], bar: tuple[tuple[Fraction, Fraction], ...]) -> bool:
    """Return whether two pieces cross, by Cramer's rule in fractions."""
    (ax, ay), (bx, by) = piece
    (cx, cy), (dx, dy) = bar
    below = (bx - ax) * (dy - cy) - (by - ay) * (dx - cx)
    if not below:
        return False
    t = ((cx - ax) * (dy - cy) - (cy - ay) * (dx - cx)) / below
    s = ((cx - ax) * (by - ay) - (cy - ay) * (bx - ax)) / below
    return 0 < t < 1 and 0 < s < 1


def test_symbols_count_at_their_values() -> None:
    """A truss of panel a is cut where it stands at the stated a."""
    truss = Truss(
        {"A": (0, 0), "B": ("2*a", 0), "C": ("a", "h")},
        ["A-B", "A-C", "B-C"],
        {"A": "pin", "B": "roller"},
        symbols={"a": 3, "h": 2},
    )
    found = drawn_section(truss, line((1, -1), (1, 3)))
    assert found.crossed == ("A-B", "A-C")
    assert isinstance(found.points[0][0], Exact)
