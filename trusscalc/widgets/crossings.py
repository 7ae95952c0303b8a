"""Which members a drawn section line cuts and which joints lie on either side of it, decided exactly.

The page sends the points of the line and nothing else. Every joint lies to the left, to the right or on the line
of each piece by the sign of an exact number, so a line that runs through a joint, or bends on a member, is told as
that and is never guessed.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from trusscalc.errors import InputError
from trusscalc.exact import Exact
from trusscalc.statics.owncuts import own_cut
from trusscalc.truss import Truss

Point = tuple[Exact, Exact]
Piece = tuple[Point, Point]

MOST_POINTS: Final = 40
"""Points of a line; a section with more corners is a slip of the pointer."""
FEWEST_POINTS: Final = 2
LEFT, RIGHT = 1, -1


@dataclass(frozen=True, slots=True)
class DrawnSection:
    """A section line as it was drawn.

    Attributes
    ----------
    points : tuple of (Exact, Exact)
        Its points, in the truss's unit of length.
    closed : bool
        Whether it returns to its first point.
    crossed : tuple of str
        Members it crosses an odd number of times: those it cuts.
    left, right : tuple of str
        The joints on either side, going along the line; empty when it parts nothing.
    fault : str
        Why it is no section, '' when it is one.
    """

    points: tuple[Point, ...]
    closed: bool
    crossed: tuple[str, ...]
    left: tuple[str, ...] = ()
    right: tuple[str, ...] = ()
    fault: str = ""


def drawn_section(truss: Truss, points: Sequence[Point], *, closed: bool = False) -> DrawnSection:
    """Return what a drawn line cuts, and the two parts it leaves.

    Parameters
    ----------
    truss : Truss
        What is cut; symbols in its coordinates count at their values.
    points : sequence of (Exact, Exact)
        The line, at least two points.
    closed : bool
        Whether its last point is joined to its first.

    Raises
    ------
    InputError
        For fewer than two different points, or more than forty.

    Examples
    --------
    >>> from trusscalc.exact import exact
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> found = drawn_section(truss, [(exact(1), exact(-1)), (exact(1), exact(2))])
    >>> found.crossed, found.left, found.right
    (('A-B', 'A-C'), ('A',), ('B', 'C'))
    """
    points = _without_repeats(points)
    if not FEWEST_POINTS <= len(points) <= MOST_POINTS:
        message = f"a section line has 2 to {MOST_POINTS} different points, this one has {len(points)}"
        raise InputError(message)
    places = {joint.name: (truss.value(joint.x), truss.value(joint.y)) for joint in truss.joints}
    met = _Meetings(places)
    for piece in pairwise([*points, points[0]] if closed else points):
        met.take(truss, piece)
    crossed = tuple(member.name for member in truss.members if met.crossings[member.name] % 2)
    section = DrawnSection(tuple(points), closed, crossed)
    fault = met.fault() or (_crosses_nothing(met.crossings) if not crossed else "")
    if fault:
        return _with(section, fault=fault)
    return _parted(truss, section, met.sides)


def _without_repeats(points: Sequence[Point]) -> list[Point]:
    return [point for place, point in enumerate(points) if place == 0 or point != points[place - 1]]


def turn(start: Point, end: Point, point: Point) -> Exact:
    """Return twice the area of the triangle start, end, point: positive when the point lies to the left."""
    return (end[0] - start[0]) * (point[1] - start[1]) - (end[1] - start[1]) * (point[0] - start[0])


class _Meetings:
    """What the pieces of a line meet, piece by piece."""

    def __init__(self, places: Mapping[str, Point]) -> None:
        self.places = places
        self.crossings: Counter[str] = Counter()
        self.sides: dict[str, dict[str, int]] = {}
        self.through: list[str] = []
        self.resting: list[str] = []

    def take(self, truss: Truss, piece: Piece) -> None:
        """Note what one piece crosses, which joints lie on it, and which members its ends lie on."""
        start, end = piece
        side = {name: turn(start, end, place).sign() for name, place in self.places.items()}
        self.through += [name for name, found in side.items() if not found and _between(piece, self.places[name])]
        for member in truss.members:
            a, b = self.places[member.start], self.places[member.end]
            if side[member.start] * side[member.end] >= 0:
                if not side[member.start] and not side[member.end] and _between((a, b), start):
                    self.resting.append(member.name)
                continue
            ends = turn(a, b, start).sign() * turn(a, b, end).sign()
            if ends < 0:
                self.crossings[member.name] += 1
                self.sides[member.name] = {member.start: side[member.start], member.end: side[member.end]}
            elif ends == 0:
                self.resting.append(member.name)

    def fault(self) -> str:
        """Return where the line meets the truss in a way that leaves its meaning open, or ''."""
        if self.through:
            return f"the line runs through joint {self.through[0]}; draw it past that joint on one side"
        if self.resting:
            return f"the line ends or bends on {self.resting[0]}; move that point off the member"
        return ""


def _between(piece: Piece, point: Point) -> bool:
    """Return whether a point on the piece's line lies on the piece itself, its ends included."""
    (ax, ay), (bx, by) = piece
    along = (point[0] - ax) * (point[0] - bx) + (point[1] - ay) * (point[1] - by)
    return along.sign() <= 0


def _crosses_nothing(crossings: Mapping[str, int]) -> str:
    twice = [name for name, times in crossings.items() if times]
    if twice:
        return f"the line crosses {', '.join(twice)} and comes back, which cuts nothing"
    return "the line crosses no member"


def _parted(truss: Truss, section: DrawnSection, sides: Mapping[str, Mapping[str, int]]) -> DrawnSection:
    """Return the section with its two parts; where it leaves the truss in one piece, with the reason."""
    side: dict[str, int] = {}
    for name in section.crossed:
        for joint, found in sides[name].items():
            side.setdefault(joint, found)
    waiting = list(side)
    neighbours = _uncut(truss, section.crossed)
    while waiting:
        joint = waiting.pop()
        for other in neighbours[joint]:
            if other not in side:
                side[other] = side[joint]
                waiting.append(other)
    left, right = (tuple(j.name for j in truss.joints if side.get(j.name) == way) for way in (LEFT, RIGHT))
    clean = left and right and set(_members_between(truss, left)) == set(section.crossed)
    return _with(section, left=left, right=right) if clean else _with(section, fault=_why_whole(truss, section))


def _uncut(truss: Truss, crossed: Sequence[str]) -> dict[str, list[str]]:
    found: dict[str, list[str]] = {joint.name: [] for joint in truss.joints}
    for member in truss.members:
        if member.name not in crossed:
            found[member.start].append(member.end)
            found[member.end].append(member.start)
    return found


def _members_between(truss: Truss, part: Sequence[str]) -> Iterator[str]:
    inside = set(part)
    return (member.name for member in truss.members if (member.start in inside) != (member.end in inside))


def _why_whole(truss: Truss, section: DrawnSection) -> str:
    try:
        own_cut(truss, through=section.crossed)
    except InputError as problem:
        return str(problem)
    return f"the line crosses itself round {', '.join(section.crossed)}; draw it without a loop"


def _with(
    section: DrawnSection, *, left: tuple[str, ...] = (), right: tuple[str, ...] = (), fault: str = ""
) -> DrawnSection:
    return DrawnSection(section.points, section.closed, section.crossed, left, right, fault)
