"""Two texts that should be one: where they part, and what stands there."""

from __future__ import annotations

from bisect import bisect_left
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from difflib import SequenceMatcher
from typing import Final

SHORT: Final = 72
"""Characters shown in full."""
BEFORE: Final = 24
"""Characters shown before the first one that differs."""
MOST_COMPARED: Final = 250_000
"""Pairs of pieces beyond which no alignment is looked for: a hostile file must not take all day."""


@dataclass(frozen=True, slots=True)
class Difference:
    """One place where a filed sheet is not what is derived.

    Attributes
    ----------
    where : str
        Step, table row, figure, line: what a reader looks for.
    shown : str
        What the filed sheet has there, '' for nothing.
    derived : str
        What is derived, '' for nothing.
    """

    where: str
    shown: str
    derived: str

    def __str__(self) -> str:
        """Return the difference as one line."""
        told = [f"“{text}”" if text else "nothing" for text in (self.shown, self.derived)]
        return f"{self.where}: shown {told[0]}, derived {told[1]}"


Span = tuple[int, int, int, int]


def differing(shown: Sequence[str], derived: Sequence[str]) -> Iterator[Span]:
    """Return where two sequences differ, as (from, to) in the first and (from, to) in the second.

    Pieces that were changed but neither added nor left out are told one by one.
    """
    start = 0
    while start < min(len(shown), len(derived)) and shown[start] == derived[start]:
        start += 1
    end = 0
    while end < min(len(shown), len(derived)) - start and shown[-1 - end] == derived[-1 - end]:
        end += 1
    one, other = shown[start : len(shown) - end], derived[start : len(derived) - end]
    for a, b, c, d in _gaps(one, other):
        for e, f, g, h in _blocks(one[a:b], other[c:d]):
            if f - e != h - g:
                yield start + a + e, start + a + f, start + c + g, start + c + h
                continue
            for first, second in zip(range(a + e, a + f), range(c + g, c + h), strict=True):
                if one[first] != other[second]:
                    yield start + first, start + first + 1, start + second, start + second + 1


def _gaps(one: Sequence[str], other: Sequence[str]) -> Iterator[Span]:
    """Return what lies between the pieces that stand once in each sequence and in the same order."""
    once = [{piece for piece, times in Counter(pieces).items() if times == 1} for pieces in (one, other)]
    places = {piece: place for place, piece in enumerate(other) if piece in once[1]}
    pairs = [(place, places[piece]) for place, piece in enumerate(one) if piece in once[0] and piece in places]
    a = c = 0
    for first, second in [*_rising(pairs), (len(one), len(other))]:
        if a < first or c < second:
            yield a, first, c, second
        a, c = first + 1, second + 1


def _rising(pairs: Sequence[tuple[int, int]]) -> list[tuple[int, int]]:
    """Return the longest part of a sequence whose second numbers rise (patience sorting)."""
    piles: list[int] = []
    tops: list[int] = []
    below: list[int] = []
    for number, (_, second) in enumerate(pairs):
        pile = bisect_left(piles, second)
        below.append(tops[pile - 1] if pile else -1)
        if pile == len(piles):
            piles.append(second)
            tops.append(number)
        else:
            piles[pile], tops[pile] = second, number
    found = []
    number = tops[-1] if tops else -1
    while number >= 0:
        found.append(pairs[number])
        number = below[number]
    return found[::-1]


def _blocks(one: Sequence[str], other: Sequence[str]) -> Iterator[Span]:
    if len(one) == len(other) or not one or not other or len(one) * len(other) > MOST_COMPARED:
        yield 0, len(one), 0, len(other)
        return
    for kind, a, b, c, d in SequenceMatcher(None, one, other, autojunk=False).get_opcodes():
        if kind != "equal":
            yield a, b, c, d


def excerpts(shown: str, derived: str) -> tuple[str, str]:
    """Return two texts, long ones cut to where they differ first.

    Examples
    --------
    >>> excerpts("-600", "-601")
    ('-600', '-601')
    >>> excerpts("a" * 99 + " 5 kN " + "b" * 99, "a" * 99 + " 6 kN " + "b" * 99)[1][:8]
    '… 6 kN b'
    """
    if max(len(shown), len(derived)) <= SHORT:
        return shown, derived
    length = min(len(shown), len(derived))
    first = next((place for place in range(length) if shown[place] != derived[place]), length)
    start = max(0, first - BEFORE)
    blank = shown.rfind(" ", start, first)
    start = blank if blank > start and first - blank < BEFORE else start
    return _cut(shown, start, first), _cut(derived, start, first)


def _cut(text: str, start: int, first: int) -> str:
    end = first + SHORT - BEFORE - 2
    return f"{'…' if start else ''}{text[start:end]}{'…' if end < len(text) else ''}"
