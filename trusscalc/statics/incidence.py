"""Which lines pass through which points, decided exactly and fast.

The search for cuts asks a hundred thousand times whether a bar's line passes through a point. Coordinates
are mapped from the number field into the whole numbers modulo a prime near 2^61 in which every root of the
truss exists; an incidence holds there whenever it holds in truth, and a false one has a chance of about
10^-18. The exact re-summing of every written line is the judge. One formula serves moments and force sums:
a direction (ux, uy) is the point (-uy, ux) at infinity, W = 0.

Order and nearness (which cut is left of which) use floats; no number of the derivation does.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Any

from sympy import isprime
from sympy.polys.fields import FracElement

from trusscalc.exact import Exact
from trusscalc.statics.cuts import GROUND, Structure
from trusscalc.wholenumbers import prime_factors

Point = tuple[int, int, int]
"""Homogeneous (X, Y, W) modulo the prime: W = 1 for a point, 0 for a direction."""

LARGEST_PRIME = 2**61 - 1
AXIS_X: Point = (0, 1, 0)
AXIS_Y: Point = (1, 0, 0)
"""The force sums along x and along y."""


def bits(mask: int) -> list[int]:
    """Return the indices of the bits set in a mask, ascending."""
    found = []
    while mask:
        low = mask & -mask
        found.append(low.bit_length() - 1)
        mask ^= low
    return found


class Residues:
    """The map from exact numbers to whole numbers modulo a prime."""

    def __init__(self, numbers: Iterable[Exact]) -> None:
        self.primes: set[int] = set()
        self.towers: list[tuple[Exact, ...]] = []
        for number in numbers:
            self._collect(number)
        self.prime = LARGEST_PRIME
        while not self._try():
            self.prime = _next_prime_below(self.prime)

    def _collect(self, number: Exact) -> None:
        for n, _ in number.terms:
            if n > 1:
                self.primes |= set(prime_factors(n))
        if number.tower and number.tower not in self.towers:
            self.towers.append(number.tower)
            for radicand in number.tower:
                self._collect(radicand)

    def _try(self) -> bool:
        """Find all roots modulo the prime; False when one does not exist there."""
        p = self.prime
        self.roots: dict[int, int] = {}
        for q in sorted(self.primes):
            root = pow(q, (p + 1) // 4, p)
            if root * root % p != q % p:
                return False
            self.roots[q] = root
        self.nested: dict[tuple[Exact, ...], list[int]] = {}
        for tower in self.towers:
            images: list[int] = []
            for radicand in tower:
                value = self._sum(radicand, images)
                root = pow(value, (p + 1) // 4, p)
                if root * root % p != value:
                    return False
                images.append(root)
            self.nested[tower] = images
        return True

    def _sum(self, number: Exact, nested: list[int]) -> int:
        p, total = self.prime, 0
        for (n, mask), coefficient in number.terms.items():
            term = self._coefficient(coefficient)
            if n > 1:
                for q in prime_factors(n):
                    term = term * self.roots[q] % p
            for index in range(mask.bit_length()):
                if mask >> index & 1:
                    term = term * nested[index] % p
            total += term
        return total % p

    def _coefficient(self, coefficient: Any) -> int:
        p = self.prime
        if isinstance(coefficient, FracElement):
            below = self._polynomial(coefficient.denom)
            return self._polynomial(coefficient.numer) * pow(below, -1, p) % p
        below = int(coefficient.denominator)
        return int(coefficient.numerator) * (pow(below, -1, p) if below != 1 else 1) % p

    def _polynomial(self, polynomial: Any) -> int:
        """Evaluate at a residue for each symbol: like the symbol, it satisfies no equation but by a rare chance."""
        p = self.prime
        values = [_symbol_residue(str(x)) for x in polynomial.ring.symbols]
        total = 0
        for powers, factor in polynomial.terms():
            term = self._coefficient(factor)
            for value, power in zip(values, powers, strict=True):
                term = term * pow(value, power, p) % p
            total += term
        return total % p

    def of(self, number: Exact) -> int:
        """Return the image of a number made of the roots given at the start."""
        return self._sum(number, self.nested.get(number.tower, []))


def _symbol_residue(name: str) -> int:
    """Return a residue that depends on the name alone, so that every run decides the same."""
    return int.from_bytes(hashlib.sha256(name.encode()).digest()[:7], "big")


def _next_prime_below(start: int) -> int:
    """Return the next smaller prime that is 3 modulo 4 (where roots are one power)."""
    candidate = start - 4
    while not isprime(candidate):
        candidate -= 4
    return candidate


@dataclass(slots=True)
class Layout:
    """A structure as numbers: joints and bars counted from the left, then from below.

    Nothing in it depends on names or on the order of the file.

    Attributes
    ----------
    prime : int
        The modulus.
    joints, bars : list of str
        Names by index.
    x, y : list of float
        Joint places, for order only.
    places : dict of Point to int
        The joint at a point.
    ends : list of (int, int)
        Joint indices of a bar; -1 is the ground.
    lines : list of (int, int, int)
        (x dy - y dx, dx, dy) of each bar modulo the prime.
    slopes : list of (float, float)
        Direction of each bar.
    members : int
        Bit mask of the bars that are members, not links.
    neighbours : list of int
        Bit mask of the joints tied to each joint by a member.
    at : list of int
        Bit mask of the bars at each joint.
    loads : list of (float, float)
        Load at each joint at the symbols' values.
    """

    prime: int
    joints: list[str]
    bars: list[str]
    x: list[float]
    y: list[float]
    points: list[Point]
    ends: list[tuple[int, int]]
    lines: list[tuple[int, int, int]]
    slopes: list[tuple[float, float]]
    loads: list[tuple[float, float]]
    places: dict[Point, int] = field(default_factory=dict)
    members: int = 0
    neighbours: list[int] = field(default_factory=list)
    at: list[int] = field(default_factory=list)

    def __post_init__(self) -> None:
        """Derive what follows from the lists."""
        self.places = {point: index for index, point in enumerate(self.points)}
        self.neighbours = [0] * len(self.joints)
        self.at = [0] * len(self.joints)
        for index, (start, end) in enumerate(self.ends):
            self.at[start] |= 1 << index
            if end >= 0:
                self.members |= 1 << index
                self.at[end] |= 1 << index
                self.neighbours[start] |= 1 << end
                self.neighbours[end] |= 1 << start

    def passes(self, bar: int, point: Point) -> bool:
        """Return whether the bar drops out of the sum about the point."""
        c, dx, dy = self.lines[bar]
        px, py, pw = point
        return not (pw * c - px * dy + py * dx) % self.prime

    def across(self, bar: int) -> Point:
        """Return the direction in whose sum the bar and its parallels drop out."""
        _, dx, dy = self.lines[bar]
        # summing along u = (-dy, dx) is the point (-dx, -dy) at infinity
        return self.normal((-dx, -dy, 0))

    def meeting(self, first: int, second: int) -> Point | None:
        """Return the point where two bars' lines meet, a direction for parallels, None for one line."""
        c1, dx1, dy1 = self.lines[first]
        c2, dx2, dy2 = self.lines[second]
        p = self.prime
        # the line of a bar is the triple (-dy, dx, c); two lines meet in their cross product
        px = (dx1 * c2 - c1 * dx2) % p
        py = (dy1 * c2 - c1 * dy2) % p
        pw = (dx1 * dy2 - dy1 * dx2) % p
        if not pw and not px and not py:
            return None
        return self.normal((px, py, pw))

    def normal(self, point: Point) -> Point:
        """Return the one representative of a homogeneous point."""
        p = self.prime
        px, py, pw = point[0] % p, point[1] % p, point[2] % p
        leading = pw or px or py
        if leading == 1:
            return px, py, pw
        factor = pow(leading, -1, p)
        return px * factor % p, py * factor % p, pw * factor % p


def layout_of(structure: Structure, loads: dict[str, tuple[float, float]]) -> Layout:
    """Return the structure as numbers.

    Parameters
    ----------
    structure : Structure
        The truss.
    loads : dict of str to (float, float)
        Loads at the symbols' values, used for prices only.
    """
    numbers = [part for joint in structure.joints.values() for part in (joint.x, joint.y)]
    numbers += [part for bar in structure.bars.values() if bar.is_link for part in (bar.dx, bar.dy)]
    residues = Residues(numbers)
    p = residues.prime
    floats = {name: (structure.near(joint.x), structure.near(joint.y)) for name, joint in structure.joints.items()}
    joints = sorted(structure.joints, key=floats.__getitem__)
    index = {name: place for place, name in enumerate(joints)}
    images = {name: (residues.of(joint.x), residues.of(joint.y)) for name, joint in structure.joints.items()}

    def direction(name: str) -> tuple[float, float]:
        bar = structure.bars[name]
        if bar.is_link:
            return structure.near(bar.dx), structure.near(bar.dy)
        (ax, ay), (bx, by) = floats[bar.start], floats[bar.end]
        return bx - ax, by - ay

    def order(name: str) -> tuple[int, list[int], float]:
        bar = structure.bars[name]
        dx, dy = direction(name)
        ends = sorted(index[end] for end in (bar.start, bar.end) if end != GROUND)
        return int(bar.is_link), ends, math.atan2(dy, dx) if bar.is_link else 0.0

    bars = sorted(structure.bars, key=order)
    ends, lines = [], []
    for name in bars:
        bar = structure.bars[name]
        (x, y), far = images[bar.start], images.get(bar.end)
        dx, dy = (residues.of(bar.dx), residues.of(bar.dy)) if far is None else ((far[0] - x) % p, (far[1] - y) % p)
        ends.append((index[bar.start], index.get(bar.end, -1)))
        lines.append(((x * dy - y * dx) % p, dx, dy))
    return Layout(
        prime=p,
        joints=joints,
        bars=bars,
        x=[floats[name][0] for name in joints],
        y=[floats[name][1] for name in joints],
        points=[(*images[name], 1) for name in joints],
        ends=ends,
        lines=lines,
        slopes=[direction(name) for name in bars],
        loads=[loads.get(name, (0.0, 0.0)) for name in joints],
    )
