"""Square roots of exact numbers, and the towers of nested roots they live in."""

from __future__ import annotations

import math
from collections.abc import Mapping
from fractions import Fraction
from functools import lru_cache
from typing import Any

from sympy.polys.domains import QQ

from trusscalc.errors import InexactNumberError
from trusscalc.exact import ONE, UNIT_KEY, ZERO, Exact, Key, conjugate, plain
from trusscalc.wholenumbers import a_prime_of, prime_factors, take_for_new, without_squares

MOST_NESTED_ROOTS = 3


def same_tower(left: Exact, right: Exact) -> tuple[Exact, Exact]:
    """Return two numbers written with the same nested roots."""
    if not right.tower:
        return left, Exact(right.terms, left.tower, rounded=right.rounded)
    if not left.tower:
        return Exact(left.terms, right.tower, rounded=left.rounded), right
    left, right = trimmed(left), trimmed(right)
    if left.tower == right.tower or not left.tower or not right.tower:
        tower = left.tower or right.tower
        return Exact(left.terms, tower, rounded=left.rounded), Exact(right.terms, tower, rounded=right.rounded)
    tower, images = _merged(left.tower, right.tower)
    total = Exact({}, tower)
    for (n, mask), coefficient in right.terms.items():
        piece = Exact({(n, 0): coefficient}, tower)
        for index, image in enumerate(images):
            if mask >> index & 1:
                piece = piece * Exact(image.terms, tower)
        total = total + piece
    return (
        Exact(left.terms, tower, rounded=left.rounded),
        Exact(total.terms, tower, rounded=right.rounded),
    )


def trimmed(value: Exact) -> Exact:
    """Return a number without the nested roots of its tower that have cancelled."""
    masks = 0
    for _, mask in value.terms:
        masks |= mask
    if masks.bit_count() == len(value.tower):
        return value
    tower, places = _trimmed_tower(value.tower, masks)
    return Exact(_moved(value.terms, places), tower, rounded=value.rounded)


@lru_cache(maxsize=1024)
def _trimmed_tower(tower: tuple[Exact, ...], masks: int) -> tuple[tuple[Exact, ...], dict[int, int]]:
    """Return the tower of the roots that these, and the radicands of these, are made of, and their new places."""
    for index in reversed(range(len(tower))):
        if masks >> index & 1:
            for _, mask in tower[index].terms:
                masks |= mask
    kept: tuple[Exact, ...] = ()
    places: dict[int, int] = {}
    for index, radicand in enumerate(tower):
        if masks >> index & 1:
            places[index] = len(kept)
            kept = (*kept, Exact(_moved(radicand.terms, places), kept, rounded=radicand.rounded))
    return kept, places


def _moved(terms: Mapping[Key, Any], places: Mapping[int, int]) -> dict[Key, Any]:
    """Return terms whose nested roots stand at other places of the tower."""
    return {
        (n, sum(1 << new for old, new in places.items() if mask >> old & 1)): coefficient
        for (n, mask), coefficient in terms.items()
    }


@lru_cache(maxsize=256)
def _merged(left: tuple[Exact, ...], right: tuple[Exact, ...]) -> tuple[tuple[Exact, ...], tuple[Exact, ...]]:
    """Return a tower that holds both, and the images of right's roots in it."""
    tower = left
    images: list[Exact] = []
    for radicand in right:
        moved = Exact({}, tower)
        for (n, mask), coefficient in radicand.terms.items():
            piece = Exact({(n, 0): coefficient}, tower)
            for index, image in enumerate(images):
                if mask >> index & 1:
                    piece = piece * Exact(image.terms, tower)
            moved = moved + piece
        tower, root = _root_in(tower, moved)
        images.append(root)
    return tower, tuple(images)


def _root_in(tower: tuple[Exact, ...], radicand: Exact) -> tuple[tuple[Exact, ...], Exact]:
    """Return a tower that holds the positive root of radicand, and that root.

    By Kummer's theorem the root lies in the field (any whole-number roots adjoined) exactly when radicand
    times some product of the tower's radicands is a square there.
    """
    for subset in range(1 << len(tower)):
        scaled = radicand
        for index, step in enumerate(tower):
            if subset >> index & 1:
                scaled = scaled * Exact(step.terms, tower)
        root = _known_root(Exact(scaled.terms, tower))
        if root is not None:
            root = root / Exact({(1, subset): QQ(1)}, tower)
            return tower, Exact(root.terms, tower) if root.sign() > 0 else Exact((-root).terms, tower)
    if len(tower) >= MOST_NESTED_ROOTS:
        message = f"more than {MOST_NESTED_ROOTS} independent nested roots in one number; use fewer"
        raise InexactNumberError(message)
    content, primitive = _without_content(radicand)
    try:
        outside = _rational_root(content, proven=True)
    except InexactNumberError:  # it stays inside, which reads worse and is as right
        outside, primitive = ONE, radicand
    higher = (*tower, Exact(primitive.terms, tower))
    return higher, Exact({(1, 1 << len(tower)): QQ(1)}, higher) * outside


def _without_content(value: Exact) -> tuple[Fraction, Exact]:
    """Return (q, rest) with value = q * rest and rest of coprime whole coefficients: sqrt(2 + sqrt(2))/2 reads best."""
    numerators = [int(c.numerator) for c in value.terms.values()]
    denominators = [int(c.denominator) for c in value.terms.values()]
    content = Fraction(math.gcd(*numerators), math.lcm(*denominators))
    return content, value * (1 / content)


def _known_root(value: Exact) -> Exact | None:
    """Return a root of value made of whole-number roots and the nested roots value already has, or None.

    With value = a + b*s, s one of its roots over the field below, the root exists exactly when the norm
    a^2 - b^2 s^2 is a square n^2 below and (a + n)/2 has such a root itself.
    """
    if value.sign() < 0:
        return None
    if value.is_rational:
        fraction = value.as_fraction()
        try:
            return _rational_root(fraction, proven=True)
        except InexactNumberError:  # too large to factor: a root of its own, unless one in use says otherwise
            if take_for_new(fraction.numerator * fraction.denominator):
                return None
            raise
    other = conjugate(value)
    a = (value + other) / 2
    rest = (value - other) / 2
    norm = value * other
    # n has to lie in the field below, or the descent would not end
    below = _group(value) - {_outermost_root(value)}
    n = _root_over(norm.as_fraction(), below) if norm.is_rational else _known_root(norm)
    if n is None or not _group(n) <= below:
        return None
    for half in ((a + n) / 2, (a - n) / 2):
        root = _known_root(half) if half else None
        if root is not None:
            return root + rest / (root * 2)
    return None


def _outermost_root(value: Exact) -> int:
    """Return the root that conjugate turns: a prime, or -1 - index for a nested root."""
    masks = 0
    for _, mask in value.terms:
        masks |= mask
    return -masks.bit_length() if masks else a_prime_of(next(n for n, _ in value.terms if n > 1))


def _group(value: Exact) -> set[int]:
    """Return the primes (and, as -1 - index, the nested roots) that value's terms and their radicands are made of."""
    found: set[int] = set()
    for n, mask in value.terms:
        found |= set(prime_factors(n))
        for index in range(mask.bit_length()):
            if mask >> index & 1:
                found |= {-1 - index} | _group(value.tower[index])
    return found


def _root_over(value: Fraction, group: set[int]) -> Exact | None:
    """Return the root of a fraction if the roots of the group's primes suffice for it; nothing is factored."""
    rest, kept = value.numerator * value.denominator, 1
    for prime in group:
        if prime > 1:
            while rest and rest % (prime * prime) == 0:
                rest //= prime * prime
            if rest % prime == 0:
                rest, kept = rest // prime, kept * prime
    if rest < 0 or math.isqrt(rest) ** 2 != rest:
        return None
    factor = math.isqrt(value.numerator * value.denominator // kept)
    return Exact({(kept, 0): QQ(factor, value.denominator)}) if factor else ZERO


def _rational_root(value: Fraction, *, proven: bool) -> Exact:
    """Return the root of a fraction, not negative, as factor * sqrt(whole number)."""
    factor, n = without_squares(value.numerator * value.denominator, proven)
    return Exact({(n, 0): QQ(factor, value.denominator)}) if factor else ZERO


def sqrt(value: Exact, *, proven: bool = True) -> Exact:
    """Return the non-negative square root.

    Parameters
    ----------
    value : Exact
        Not negative.
    proven : bool
        True: the result may be computed with. False: it is only to be printed or evaluated (a member's
        length, say), and large factors are not searched for squares.

    Raises
    ------
    InexactNumberError
        Below zero, or when a huge number would have to be factored.

    Notes
    -----
    Symbols stand for positive numbers. The root of an expression in symbols is taken out as far as it is a
    square of single products, and is otherwise kept as it is; it is meant for printing and evaluating.

    Examples
    --------
    >>> from trusscalc.exact import rational
    >>> sqrt(rational(12)) == 2 * sqrt(rational(3))
    True
    """
    if value.symbols:
        return _symbolic_root(value)
    if value.sign() < 0:
        message = "the root of a negative number"
        raise InexactNumberError(message)
    if value.is_rational:
        root = _rational_root(value.as_fraction(), proven=proven)
    else:
        value = trimmed(value)
        root = _root_in(value.tower, value)[1]
    return Exact(root.terms, root.tower, rounded=value.rounded)


def _symbolic_root(value: Exact) -> Exact:
    """Return sqrt(p / q) as s/q sqrt(k), where p q = s^2 k and s is a product of symbols (which are positive)."""
    if set(value.terms) != {UNIT_KEY}:
        return Exact({(1, 1 << len(value.tower)): QQ(1)}, (*value.tower, value), rounded=value.rounded)
    fraction = value.terms[UNIT_KEY]
    below = fraction.denom
    content, factors = (fraction.numer * below).sqf_list()
    if content < 0:
        message = "the root of a negative number"
        raise InexactNumberError(message)
    field = fraction.field
    outside, inside = field.one, field.one
    for monic, power in factors:
        cleared, factor = monic.clear_denoms()
        content = content / cleared**power
        single = len(factor.terms()) == 1
        outside *= field(factor) ** (power // 2) if single else field.one
        inside *= field(factor) ** (power % 2 if single else power)
    root = _rational_root(Fraction(int(content.numerator), int(content.denominator)), proven=True)
    result = root * Exact({UNIT_KEY: plain(outside / field(below))}, rounded=value.rounded)
    if inside == field.one:
        return result
    return result * Exact({(1, 1): QQ(1)}, (Exact({UNIT_KEY: inside}),))
