"""A submitted table parted into blocks: each a head and the rows below it, with what stands between named in notes.

How a text is cut into cells is not asked but tried: the delimiter is the one with which a head makes most sense.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

from trusscalc.errors import FileFormatError
from trusscalc.submitted.heads import (
    Head,
    Unit,
    convention_in,
    has_number,
    head_by_cases,
    head_of,
    is_units,
    looks_like_head,
    suffices,
    unit_in,
)
from trusscalc.submitted.tables import DELIMITERS, Row, Source, blank_lines, split
from trusscalc.truss import did_you_mean

ROWS_BEFORE_HEAD: Final = 100
"""A head is looked for in so many rows."""
ROWS_TO_A_NUMBER: Final = 4
"""Between a head and its first number may stand units or a line."""
MOST_TITLES: Final = 8
_SEPARATOR_LINE: Final = re.compile(r"sep=(.)")

Named = Mapping[str, str | int]


@dataclass(frozen=True, slots=True)
class Block:
    """A head and the rows below it."""

    head: Head
    rows: tuple[Row, ...]


@dataclass(frozen=True, slots=True)
class Blocks:
    """All blocks of a table.

    Attributes
    ----------
    blocks : tuple of Block
        In their order.
    titles : tuple of str
        Lines above heads.
    notes : tuple of str
        How the table was cut, and every line that is neither head nor row.
    """

    blocks: tuple[Block, ...]
    titles: tuple[str, ...]
    notes: tuple[str, ...]


def blocks_of(source: Source, named: Named) -> Blocks:
    """Return a source parted into heads and rows.

    Parameters
    ----------
    source : Source
        What was handed over.
    named : mapping of str to str or int
        The columns that the user names: role to head, or to place from 1.

    Raises
    ------
    FileFormatError
        When no head is found, a column that the user names is not there, or two columns could be the same.
    """
    notes = list(source.notes)
    if source.table:
        rows = list(source.table)
    else:
        rows = _cut(source, named, notes)
        blank = blank_lines(source)
        if blank:
            notes.append(f"{blank} blank line{'s' if blank > 1 else ''} skipped")
    parting = _Parting(named)
    parting.read(rows)
    if parting.problems:
        raise FileFormatError(parting.problems, source=source.name)
    if not parting.blocks:
        raise FileFormatError(_no_head(rows, named), source=source.name)
    absent = [
        f"there is no column {name!r}{did_you_mean(str(name), [t for b in parting.blocks for t in b.head.texts if t])}"
        for role, name in named.items()
        if not any(role in block.head.columns for block in parting.blocks)
    ]
    if absent:
        raise FileFormatError(absent, source=source.name)
    return Blocks(tuple(parting.blocks), tuple(parting.titles), (*notes, *parting.notes()))


# --- cutting a text ---------------------------------------------------------------------------------------


def _cut(source: Source, named: Named, notes: list[str]) -> list[Row]:
    """Return the rows of a text, cut with the delimiter under which a head has most columns that are understood."""
    stated = _SEPARATOR_LINE.fullmatch(source.text.split("\n", 1)[0].strip().strip('"'))
    if stated and stated[1] in DELIMITERS:
        notes.append(f"row 1 states the delimiter and is no row: {stated[0]!r}")
        return [row for row in split(source, stated[1]) if row.number > 1]
    best, most = ",", (False, 0)
    for delimiter in DELIMITERS:
        try:
            rows = split(source, delimiter, ROWS_BEFORE_HEAD)
        except FileFormatError:
            continue  # quotation marks that do not fit: another delimiter, or told when the whole text is cut
        understood = max((_understood(rows, place, named) for place in range(len(rows))), default=most)
        if understood > most:
            best, most = delimiter, understood
    if most[1]:
        notes.append(f"cells are parted by {DELIMITERS[best]}")
    return split(source, best)


def _with_next(rows: Sequence[Row]) -> list[tuple[Row, Row]]:
    return list(zip(rows, [*rows[1:], *rows[-1:]], strict=True))


def _understood(rows: Sequence[Row], place: int, named: Named) -> tuple[bool, int]:
    """Return whether a row is a head with numbers below, and how many of its columns are understood."""
    found = head_of(rows[place], named)
    if isinstance(found, list):
        return False, 1
    following = rows[place + 1 : place + 1 + ROWS_TO_A_NUMBER]
    head = found or (head_by_cases(rows[place], following[0], named) if following else None)
    if head is None:
        return False, 0
    return any(has_number(row, head) for row in following), len(head.columns) + len(head.cases)


# --- heads and rows ---------------------------------------------------------------------------------------


class _Parting:
    """Goes through the rows once; what belongs to no block is kept for the notes."""

    def __init__(self, named: Named) -> None:
        self.named = named
        self.blocks: list[Block] = []
        self.titles: list[str] = []
        self.problems: list[str] = []
        self.repeated: list[int] = []
        self.title_rows: list[Row] = []
        self.units_rows: list[int] = []

    def read(self, rows: Sequence[Row]) -> None:
        """Part all rows; a table with a column for each case is tried when there is no other head."""
        self._read(rows)
        if not self.blocks and not self.problems:
            for place, (row, following) in enumerate(_with_next(rows[:ROWS_BEFORE_HEAD])):
                head = head_by_cases(row, following, self.named)
                if head:
                    self._titles(rows[:place])
                    self._begin(head, list(rows[place + 1 :]))
                    return
        if not self.blocks and not self.problems and self.named:
            # a table without a head, its columns named by their places
            places = {role: name - 1 for role, name in self.named.items() if isinstance(name, int)}
            if suffices(places):
                self._begin(Head(0, (), places), list(rows))

    def _read(self, rows: Sequence[Row]) -> None:
        head: Head | None = None
        below: list[Row] = []
        by_place = any(isinstance(name, int) for name in self.named.values())
        for place, row in enumerate(rows):
            may_be = self._may_be_head(row) or (by_place and head is None)
            found = head_of(row, self.named) if may_be else None
            if isinstance(found, list):
                self.problems += found
            elif found and head and found.texts == head.texts:
                self.repeated.append(row.number)
            elif found:
                self._end(head, below, rows[:place])
                head, below = found, []
            elif head:
                below.append(row)
            elif place > ROWS_BEFORE_HEAD:
                return
        if head:
            self._begin(head, below)

    def _end(self, head: Head | None, below: list[Row], above: Sequence[Row]) -> None:
        """Close a block where another head begins: lines of text between them are titles of what follows."""
        if head and below:
            while below and _is_line(below[-1]):
                self._titles([below.pop()])
            self._begin(head, below)
        elif not self.blocks:  # what has looked like a head so far was a title
            self.title_rows.clear()
            self.titles.clear()
            self._titles(above)
        elif head:
            self._titles([Row(head.row, head.texts)])

    def _may_be_head(self, row: Row) -> bool:
        return looks_like_head(row.cells) or any(name in row.cells for name in self.named.values())

    def _begin(self, head: Head, rows: list[Row]) -> None:
        units = is_units(rows[0].cells, head) if rows else None
        if units is not None:
            self.units_rows.append(rows[0].number)
            head = replace(head, units={**head.units, **units})
            again = [row.number for row in rows[1:] if row.cells == rows[0].cells]  # below a repeated head
            self.units_rows += again
            rows = [row for row in rows[1:] if row.number not in again]
        self.blocks.append(Block(head, tuple(rows)))

    def _titles(self, rows: Sequence[Row]) -> None:
        self.title_rows += rows
        self.titles += [" ".join(cell for cell in row.cells if isinstance(cell, str) and cell) for row in rows]

    def notes(self) -> list[str]:
        """Return what was skipped."""
        found = []
        for row, title in list(zip(self.title_rows, self.titles, strict=True))[:MOST_TITLES]:
            found.append(f"row {row.number} is a title and no row: {title[:60]!r}")
        if len(self.titles) > MOST_TITLES:
            found.append(f"and {len(self.titles) - MOST_TITLES} more title lines")
        for what, numbers in (("repeats the head", self.repeated), ("states units", self.units_rows)):
            if numbers:
                found.append(f"{numbered(numbers)} {what} and is no row")
        return found


def _is_line(row: Row) -> bool:
    """Return whether a row is a line of text rather than a row of a table."""
    return sum(1 for cell in row.cells if cell != "") == 1


def numbered(numbers: Sequence[int]) -> str:
    """Return rows by their numbers, such as ``rows 3, 4 and 7 more``."""
    shown = ", ".join(map(str, numbers[:MOST_TITLES]))
    more = f" and {len(numbers) - MOST_TITLES} more" if len(numbers) > MOST_TITLES else ""
    return f"row{'s' if len(numbers) > 1 else ''} {shown}{more}"


def _no_head(rows: Sequence[Row], named: Named) -> str:
    first = " | ".join(str(cell) if isinstance(cell, str) else "number" for cell in rows[0].cells)[:90] if rows else ""
    shown = f"; it begins with {first!r}" if first else "; it is empty"
    if named:
        wanted = ", ".join(f"{role}={name}" for role, name in named.items())
        return f"no head has the columns named ({wanted}) and all that is needed{shown}"
    return (
        "no head is recognised: a row with 'member' (or 'start' and 'end') and 'force', or with 'joint' and reactions "
        f"or displacements is expected; or name the columns, such as member=Bar,force=Axial{shown}"
    )


def stated_in(blocks: Blocks) -> tuple[str, Unit | None]:
    """Return the sign convention and the unit of force that title lines and heads state, '' and None if nothing."""
    heads = [text for block in blocks.blocks for text in block.head.texts]
    convention = convention_in([*heads, *blocks.titles])
    return convention, unit_in(blocks.titles)
