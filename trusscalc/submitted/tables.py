"""Tables that somebody else has made, as rows of cells.

Text files are read in all the ways spreadsheets save them, tables already in memory (mappings, lists of mappings, data
frames) as they are. Nothing is understood here yet: cells of a file stay text, numbers handed over as numbers become
amounts. The text is untrusted, so size, rows and cells are capped, and every character of it is only ever read.
"""

from __future__ import annotations

import codecs
import csv
import hashlib
import io
import os
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from itertools import islice
from numbers import Integral, Real
from pathlib import Path
from typing import Any, Final

from trusscalc.decimals import approximate
from trusscalc.errors import FileFormatError
from trusscalc.exact import Exact
from trusscalc.filetext import one_line
from trusscalc.submitted.numbers import Amount

LARGEST_FILE: Final = 20_000_000
"""Bytes."""
MOST_ROWS: Final = 250_000
MOST_CELLS: Final = 1_000
"""In one row."""
LONGEST_CELL: Final = 1_000
KEPT_DIGITS: Final = 40
"""Of a number handed over exactly that is no fraction."""
DELIMITERS: Final = {
    ";": "semicolons",
    "\t": "tabulators",
    ",": "commas",
    "  ": "two blanks or more",
    " ": "blanks",
}
"""In the order of preference where several would do."""

Cell = str | Amount


@dataclass(frozen=True, slots=True)
class Row:
    """A row with cells that are not all empty, and where it starts: line of the file, or place in the table from 1."""

    number: int
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True)
class Source:
    """What was handed over: a text that is still to be cut into cells, or rows that are cells already.

    Attributes
    ----------
    name : str
        The file's name without its folder, or what kind of table it was.
    digest : str
        SHA-256 of the file's bytes, or of the table written out cell by cell.
    text : str
        Of a file, lines ended by a line feed; '' for a table.
    table : tuple of Row
        Of a table, its head (number 0) first; () for a file.
    notes : tuple of str
        What was noticed on the way.
    content : bytes
        Of a file, as it is; empty for a table.
    """

    name: str
    digest: str
    text: str = ""
    table: tuple[Row, ...] = ()
    notes: tuple[str, ...] = ()
    content: bytes = b""


def opened(given: object) -> Source:
    """Return a file, a text, bytes or a table in memory as a source.

    Parameters
    ----------
    given : path, str, bytes, table or Source
        A str without line break is a path; with one, or bytes, the content of a file. A table is a mapping of
        names to columns, a mapping of members to forces, a sequence of mappings, or a data frame: anything with
        ``columns`` and ``rows``, or with ``to_dict("records")``. A source is taken as it is.

    Raises
    ------
    FileFormatError
        When it cannot be read, is no text, or is too large.
    """
    if isinstance(given, Source):
        return given
    if isinstance(given, str) and "\n" not in given:
        given = Path(given)
    if isinstance(given, os.PathLike):
        path = Path(given)
        return of_bytes(_content(path), one_line(path.name))
    if isinstance(given, str):
        given = given.encode("utf-8", errors="surrogatepass")
    if isinstance(given, (bytes, bytearray, memoryview)):
        return of_bytes(bytes(given), "the table handed over")
    return _of_table(given)


# --- files ------------------------------------------------------------------------------------------------


def _content(path: Path) -> bytes:
    try:
        if not path.is_file():
            message = "there is no such file; check the name and the folder"
        else:
            with path.open("rb") as file:
                return file.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as problem:
        message = f"cannot be read: {one_line(getattr(problem, 'strerror', None) or str(problem))}"
    raise FileFormatError(message, source=one_line(os.fspath(path)))


def of_bytes(content: bytes, name: str) -> Source:
    """Return the content of a file as a source (FileFormatError when it is no text, or too large)."""
    digest = hashlib.sha256(content).hexdigest()
    if len(content) > LARGEST_FILE:
        message = f"too large: more than {LARGEST_FILE:,} bytes"
        raise FileFormatError(message, source=name)
    text, note = _decoded(content)
    if "\0" in text or content[:4] in (b"PK\3\4", b"%PDF"):
        message = "is no text; save the table as comma-separated values (CSV)"
        raise FileFormatError(message, source=name)
    lines = text.replace("\r\n", "\n").replace("\r", "\n")
    return Source(name, digest, text=lines, notes=(note,) if note else (), content=content)


MARKS: Final = (
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF32_LE, "utf-32-le"),
    (codecs.BOM_UTF32_BE, "utf-32-be"),
    (codecs.BOM_UTF16_LE, "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16-be"),
)
"""Byte-order marks, those that begin like another one first."""


def _decoded(content: bytes) -> tuple[str, str]:
    """Return the text of a file, and a remark where the encoding had to be guessed."""
    for mark, encoding in MARKS:
        if content.startswith(mark):
            return content[len(mark) :].decode(encoding, errors="replace"), ""
    start = content[:1000]
    for encoding, zeros in (("utf-16-le", start[1::2]), ("utf-16-be", start[::2])):
        # Latin text in two bytes a character: every other byte is zero
        if len(zeros) > 1 and zeros.count(0) * 10 > len(zeros) * 9:
            return content.decode(encoding, errors="replace"), f"no byte-order mark: read as {encoding.upper()}"
    try:
        return content.decode("utf-8"), ""
    except UnicodeDecodeError:
        pass
    for encoding, told in (("cp1252", "Windows-1252"), ("latin-1", "Latin-1")):
        try:
            return content.decode(
                encoding
            ), f"the file is not UTF-8: read as {told}; check names with accents or dashes"
        except UnicodeDecodeError:
            continue
    raise AssertionError  # Latin-1 has a character for every byte


def split(source: Source, delimiter: str, most: int | None = None) -> list[Row]:
    """Return the rows of a text that are not blank, cut at a delimiter of ``DELIMITERS``; the first ``most`` of them.

    Raises
    ------
    FileFormatError
        For quotation marks that do not fit, too many rows, or too long ones.
    """
    found: list[Row] = []
    lines = _cut_at_blanks(source.text, delimiter) if delimiter.isspace() and delimiter != "\t" else None
    for number, cells in lines or _cut_by_quotes(source, delimiter):
        stripped = tuple(cell.strip() for cell in cells)
        if not any(stripped):
            continue
        if len(stripped) > MOST_CELLS or any(len(cell) > LONGEST_CELL for cell in stripped):
            message = f"row {number}: more than {MOST_CELLS} cells, or a cell of more than {LONGEST_CELL} characters"
            raise FileFormatError(message, source=source.name)
        found.append(Row(number, stripped))
        if most is not None and len(found) == most:
            break
        if len(found) > MOST_ROWS:
            message = f"has more than {MOST_ROWS:,} rows"
            raise FileFormatError(message, source=source.name)
    return found


def _cut_at_blanks(text: str, delimiter: str) -> Iterator[tuple[int, list[str]]]:
    pattern = re.compile(r"\s{2,}|\t" if delimiter == "  " else r"\s+")
    for number, line in enumerate(text.split("\n"), 1):
        yield number, pattern.split(line.strip())


def _cut_by_quotes(source: Source, delimiter: str) -> Iterator[tuple[int, list[str]]]:
    reader = csv.reader(io.StringIO(source.text, newline=""), delimiter=delimiter, strict=True, skipinitialspace=True)
    number = 1
    try:
        for cells in reader:
            yield number, cells
            number = reader.line_num + 1
    except csv.Error as problem:
        message = f"row {number}: {problem}; a quotation mark opens a cell that it does not close"
        raise FileFormatError(message, source=source.name) from None


def blank_lines(source: Source) -> int:
    """Return how many lines of a text hold nothing (or only delimiters), those at its end apart."""
    return sum(1 for line in source.text.rstrip("\n").split("\n") if not line.strip(" \t;,"))


# --- tables in memory -------------------------------------------------------------------------------------


def _of_table(given: object) -> Source:
    kind, names, records = _records(given)
    if len(records) > MOST_ROWS or len(names) > MOST_CELLS:
        message = f"has more than {MOST_ROWS:,} rows or {MOST_CELLS:,} columns"
        raise FileFormatError(message, source=kind)
    rows = [[_cell(value) for value in record] for record in records]
    halves = [_finest(row[place] for row in rows) for place in range(len(names))]
    made = [Row(0, tuple(names))]
    for number, row in enumerate(rows, 1):
        cells = tuple(
            Amount(cell.value, halves[place]) if isinstance(cell, Amount) and cell.half else cell
            for place, cell in enumerate(row)
        )
        if any(cell != "" for cell in cells):
            made.append(Row(number, cells))
    return of_rows(made, kind)


def of_rows(rows: Sequence[Row], name: str) -> Source:
    """Return rows of cells, the head first, as a source; the digest is of their cells written out."""
    canonical = "\n".join(repr([_written(cell) for cell in row.cells]) for row in rows)
    digest = hashlib.sha256(canonical.encode(errors="surrogatepass")).hexdigest()
    return Source(name, digest, table=tuple(rows))


def _records(given: object) -> tuple[str, list[str], list[Sequence[object]]]:
    """Return what kind of table it is, the names of its columns, and its rows."""
    frame: Any = given
    if not isinstance(given, Mapping) and hasattr(given, "columns"):
        return "data frame", *_of_frame(frame)
    if isinstance(given, Mapping):
        columns = {str(name): column for name, column in given.items()}
        if columns and all(_is_column(column) for column in columns.values()):
            lengths = {len(column) for column in columns.values()}
            if len(lengths) > 1:
                message = f"columns of different lengths: {', '.join(map(str, sorted(lengths)))}"
                raise FileFormatError(message, source="table")
            return "table", list(columns), list(zip(*columns.values(), strict=True))
        return "table", ["member", "force"], list(columns.items())
    if isinstance(given, Iterable):
        records = list(islice(given, MOST_ROWS + 1))
        if all(isinstance(record, Mapping) for record in records):
            return "table", *_of_mappings(records)
    message = "is no table; give a path, the text of a CSV file, columns, a list of mappings or a data frame"
    raise FileFormatError(message, source=type(given).__name__)


def _of_frame(frame: Any) -> tuple[list[str], list[Sequence[object]]]:
    """Return columns and rows of a data frame; a named index counts as columns."""
    index = getattr(frame, "index", None)
    if any(name is not None for name in getattr(index, "names", ())) and hasattr(frame, "reset_index"):
        frame = frame.reset_index()
    names = [str(name) for name in frame.columns]
    if callable(getattr(frame, "to_dict", None)):
        try:
            records = frame.to_dict("records")
        except TypeError:  # another library's frame, whose to_dict takes no such word
            records = None
        if isinstance(records, list) and all(isinstance(record, Mapping) for record in records):
            return _of_mappings(records) if records else (names, [])
    rows = getattr(frame, "rows", None)
    rows = rows() if callable(rows) else rows
    if rows is None:
        message = "has columns, but neither rows nor to_dict('records')"
        raise FileFormatError(message, source="data frame")
    return names, [tuple(row) for row in rows]


def _of_mappings(records: Sequence[Mapping[Any, object]]) -> tuple[list[str], list[Sequence[object]]]:
    keys = list(dict.fromkeys(key for record in records for key in record))
    return [str(key) for key in keys], [tuple(record.get(key) for key in keys) for record in records]


def _is_column(value: object) -> bool:
    return hasattr(value, "__len__") and hasattr(value, "__iter__") and not isinstance(value, (str, bytes, Mapping))


def _cell(value: object) -> Cell:
    """Return a value as a cell: numbers as amounts, nothing and not-a-number as ''."""
    if value is None or (isinstance(value, Real) and value != value):  # noqa: PLR0124 - not-a-number
        return ""
    if isinstance(value, Exact):
        near = value.as_fraction() if value.is_rational else Fraction(approximate(value, KEPT_DIGITS))
        return Amount(near, Fraction(0))
    if isinstance(value, Fraction):
        return Amount(value, Fraction(0))
    if isinstance(value, (Real, Decimal)) and not isinstance(value, bool):
        shown = Decimal(int(value)) if isinstance(value, Integral) else Decimal(str(value))
        if shown.is_finite() and abs(shown.adjusted()) <= MOST_CELLS:
            exponent = shown.as_tuple().exponent
            return Amount(Fraction(shown), Fraction(10) ** min(int(exponent), 0) / 2)
    text = str(value).strip()[: LONGEST_CELL + 1]
    return "" if text in ("<NA>", "NaT") else text


def _finest(cells: Iterable[Cell]) -> Fraction:
    """Return the least half digit of a column of numbers: they were rounded, if at all, to one number of decimals."""
    return min((cell.half for cell in cells if isinstance(cell, Amount) and cell.half), default=Fraction(0))


def _written(cell: Cell) -> str:
    return cell if isinstance(cell, str) else str(cell.value)
