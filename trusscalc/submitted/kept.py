"""A submitted table kept with what was made of it: its content and how it was read, so that it can be read again."""

from __future__ import annotations

import base64
import binascii
import json
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Final, Literal

from trusscalc.errors import FileFormatError
from trusscalc.filetext import one_line
from trusscalc.submitted.numbers import Amount
from trusscalc.submitted.tables import MOST_CELLS, MOST_ROWS, Cell, Row, Source, of_bytes, of_rows

Kind = Literal["text", "base64", "cells"]
KINDS: Final[tuple[Kind, ...]] = ("text", "base64", "cells")
AMOUNT: Final = 2
"""A number among the cells is a pair: its value, and half a unit of its last digit."""
LONGEST_FRACTION: Final = 3000
"""Characters of such a number."""


@dataclass(frozen=True, slots=True)
class Reading:
    """How a table was asked to be read: the options of ``read_submitted``, the name map written out."""

    columns: tuple[tuple[str, str | int], ...] = ()
    names: tuple[tuple[str, str], ...] | None = None
    convention: str = ""
    unit: str = ""
    case: str = ""
    decimal: str = ""
    others: tuple[str, ...] = ()

    @property
    def options(self) -> dict[str, Any]:
        """As ``read_submitted`` takes them."""
        return {
            "columns": dict(self.columns),
            "names": None if self.names is None else dict(self.names),
            "convention": self.convention,
            "unit": self.unit,
            "case": self.case,
            "decimal": self.decimal,
            "others": self.others,
        }


def kept(source: Source) -> tuple[Kind, str]:
    r"""Return a source's content as text, and what kind of text: that of the file, its bytes in base64, or cells.

    Examples
    --------
    >>> kept(of_bytes(b"member,force\nA-B,2\n", "a.csv"))
    ('text', 'member,force\nA-B,2\n')
    """
    if source.table:
        rows = [[row.number, [_plain(cell) for cell in row.cells]] for row in source.table]
        return "cells", json.dumps(rows, ensure_ascii=False, separators=(",", ":"))
    try:
        text = source.content.decode("utf-8")
    except UnicodeDecodeError:
        text = "\0"
    if all(character.isprintable() or character in "\n\r\t" for character in text):
        return "text", text
    return "base64", base64.b64encode(source.content).decode("ascii")


def kept_again(kind: str, content: str, name: str) -> Source:
    """Return the source that ``kept`` has written out; the content is untrusted.

    Raises
    ------
    FileFormatError
        When it is nothing that ``kept`` writes.
    """
    name = one_line(name)
    try:
        if kind == "cells":
            return of_rows(_rows(json.loads(content)), name)
        if kind in KINDS:
            return of_bytes(content.encode() if kind == "text" else base64.b64decode(content, validate=True), name)
        problem = f"{kind[:40]!r} is none of {', '.join(KINDS)}"
    except (ValueError, TypeError, KeyError, ArithmeticError, RecursionError, binascii.Error):
        problem = f"its content is not what is kept of a table as {kind}"
    raise FileFormatError(problem, source=name)


def _plain(cell: Cell) -> str | list[str]:
    return cell if isinstance(cell, str) else [str(cell.value), str(cell.half)]


def _rows(data: Any) -> list[Row]:
    if not isinstance(data, list) or len(data) > MOST_ROWS:
        raise TypeError
    return [Row(_whole(number), tuple(_cell(cell) for cell in cells[:MOST_CELLS])) for number, cells in data]


def _whole(number: Any) -> int:
    if type(number) is not int:
        raise TypeError
    return number


def _cell(cell: Any) -> Cell:
    if isinstance(cell, str):
        return cell
    value, half = cell
    if len(cell) != AMOUNT or max(len(value), len(half)) > LONGEST_FRACTION:
        raise ValueError
    return Amount(Fraction(value), Fraction(half))
