"""Factors of whole numbers: primes, and squares taken out."""

from __future__ import annotations

import math
from functools import lru_cache

from sympy import factorint

from trusscalc.errors import InexactNumberError

SMALL_PRIMES = tuple(n for n in range(2, 1000) if all(n % d for d in range(2, math.isqrt(n) + 1)))
LARGEST_LEFT_TO_FACTOR = 10**15
_LARGE_PRIMES: set[int] = set()
"""Primes above 1000 met so far, so that products of them need no second search."""
_UNFACTORED: set[int] = set()
"""Numbers whose roots were taken to be new, because no prime met so far makes them squares."""


@lru_cache(maxsize=4096)
def a_prime_of(n: int) -> int:
    """Return a prime factor of a number above 1, the smallest where it is below 1000."""
    for prime in SMALL_PRIMES:
        if n % prime == 0:
            return prime
    # radicands are products of roots taken one by one: their large primes were found then
    for prime in sorted(_LARGE_PRIMES):
        if n % prime == 0:
            return prime
    return int(min(factorint(n)))


@lru_cache(maxsize=4096)
def prime_factors(n: int) -> tuple[int, ...]:
    """Return the primes of a number without square factor, ascending where small."""
    found = []
    while n > 1:
        found.append(a_prime_of(n))
        n //= found[-1]
    return tuple(found)


@lru_cache(maxsize=4096)
def without_squares(n: int, proven: bool) -> tuple[int, int]:
    """Return (s, k) with n = s^2 k; k is proven free of squares when asked for, else freed of small ones."""
    if n == 0:
        return 0, 1
    factor, kept = 1, 1
    for prime in SMALL_PRIMES:
        if prime * prime > n:
            break
        while n % (prime * prime) == 0:
            n //= prime * prime
            factor *= prime
        if n % prime == 0:
            n //= prime
            kept *= prime
    whole = math.isqrt(n)
    if whole * whole == n:
        return factor * whole, kept
    # what is left has no factor below 1000 and is no square: below 10^9 it has no square factor either
    if not proven:
        return factor, kept * n
    if n > LARGEST_LEFT_TO_FACTOR:
        message = f"the root of a number with so large prime factors ({len(str(n))} digits) is not supported"
        raise InexactNumberError(message)
    for prime, power in factorint(n).items():
        _meet(int(prime))
        factor *= int(prime) ** (power // 2)
        kept *= int(prime) ** (power % 2)
    return factor, kept


def take_for_new(n: int) -> bool:
    """Return whether the root of a number too large to factor is none of the roots met so far, and keep it so.

    Its part free of squares is unknown. Should a prime met later show that its root was no new one, computing with
    both is refused then.
    """
    if _is_square_but_for(n, _LARGE_PRIMES):
        return False
    _UNFACTORED.add(n)
    return True


def _meet(prime: int) -> None:
    if prime in _LARGE_PRIMES:
        return
    if any(n % prime == 0 and _is_square_but_for(n, {prime, *_LARGE_PRIMES}) for n in _UNFACTORED):
        message = f"the root of a number with the prime factor {prime} is not supported beside such large numbers"
        raise InexactNumberError(message)
    _LARGE_PRIMES.add(prime)


def _is_square_but_for(n: int, primes: set[int]) -> bool:
    """Return whether a number becomes a square once small primes and these are taken out."""
    for prime in (*SMALL_PRIMES, *primes):
        while n % prime == 0:
            n //= prime
    return math.isqrt(n) ** 2 == n
