"""Two texts that should be one: where they part, and what stands there."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from difflib import SequenceMatcher
from typing import Final

SHORT: Final = 72
"""Characters shown in full."""
BEFORE: Final = 24
"""Characters shown before the first one that differs."""
MOST_COMPARED: Final = 4_000_000
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
    for a, b, c, d in _blocks(one, other):
        if b - a == d - c:
            for place in range(b - a):
                if one[a + place] != other[c + place]:
                    first, second = start + a + place, start + c + place
                    yield first, first + 1, second, second + 1
        else:
            yield start + a, start + b, start + c, start + d


def _blocks(one: Sequence[str], other: Sequence[str]) -> Iterator[Span]:
    if len(one) == len(other) or not one or not other or len(one) * len(other) > MOST_COMPARED:
        if one or other:
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
    >>> excerpts("a" * 100 + " 5 kN" + "b" * 99, "a" * 100 + " 6 kN" + "b" * 99)[0]
    '… 5 kNbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbbb…'
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
