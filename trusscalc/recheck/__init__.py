"""A filed sheet, derived again from the input it carries, and compared with what it shows.

No digest is trusted: the truss file in the sheet goes through the same reader, the same derivation and the same
renderer as when a sheet is written, and every word, number, equation and drawing of the file is held against the
result. What was altered by hand, what came from another version, and what a faulty program once wrote all show.
"""

from __future__ import annotations

import hashlib
import json
import os
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

from trusscalc.errors import FileFormatError, TrusscalcError, TrusscalcWarning
from trusscalc.filetext import one_line
from trusscalc.recheck import notebooks, pages
from trusscalc.recheck.deriving import derive, must_be_known
from trusscalc.recheck.differences import Difference
from trusscalc.render.html import INPUT_ID, RECORD_ID, html
from trusscalc.render.notebook import notebook
from trusscalc.sheet.blocks import Sheet
from trusscalc.sheet.digest import record_of

LARGEST_SHEET: Final = 100_000_000
"""Bytes of a filed sheet that are read."""
PDF: Final = (
    "a PDF carries no input to derive it from again; give the truss file it was written from, with the same case and "
    "members (python -m trusscalc recheck sheet.pdf --against FILE.toml --case NAME --members A-B,C-D), or the "
    "notebook or page filed with it (--against sheet.html)"
)


@dataclass(frozen=True, slots=True)
class RecheckReport:
    """What came of deriving a filed sheet again.

    Attributes
    ----------
    source : str
        The file.
    differences : tuple of Difference
        Every place where it does not show what is derived, in its own order.
    compared : dict of str to int
        How many steps, equations, table rows, figures and so on were held against the derivation.
    written_by, rechecked_by : str
        Program and version that the sheet names, and those that derived it again.
    content : str
        Digest of everything derived.
    """

    source: str
    differences: tuple[Difference, ...]
    compared: Mapping[str, int]
    written_by: str
    rechecked_by: str
    content: str

    @property
    def matches(self) -> bool:
        """Whether the sheet shows exactly what is derived."""
        return not self.differences

    def lines(self) -> list[str]:
        """Return the report as lines for a terminal."""
        told = ", ".join(f"{count} {name}" for name, count in self.compared.items())
        lines = [f"{self.source}: written by {self.written_by}, derived again by {self.rechecked_by}"]
        lines += [f"compared: {told}"] if told else []
        lines += [f"content digest, derived: {self.content}"] if self.content else []
        if self.matches:
            return [*lines, "everything shown is as derived again"]
        count = len(self.differences)
        lines.append(f"{count} difference{'s' * (count != 1)}:")
        lines += [f"  {one_line(str(each))}" for each in self.differences]
        if all("figure" in each.where for each in self.differences):
            lines.append("only drawings differ: altered, or drawn by another version of matplotlib")
        return lines


def recheck(path: str | os.PathLike[str]) -> RecheckReport:
    """Derive a filed sheet again and compare it with what the file shows.

    Parameters
    ----------
    path : path
        A notebook (``.ipynb``) or a page (``.html``) that this program wrote; untrusted.

    Returns
    -------
    RecheckReport
        Input that cannot be derived from at all is a difference too: somebody altered it.

    Raises
    ------
    FileFormatError
        When the file cannot be read, or is no filed sheet.
    """
    source = one_line(os.fspath(path))
    place = Path(path)
    kind = place.suffix.lower()
    if kind not in RECORDS:
        message = PDF if kind == ".pdf" else "only a filed .ipynb or .html can be derived again"
        raise FileFormatError(message, source=source)
    text = _text(place, source)
    again = _Again(*RECORDS[kind](text, source))
    if again.sheet is None:
        return again.report(source, {}, [])
    if kind == ".ipynb":
        book = json.loads(notebook(again.sheet))
        found = notebooks.notebook_differences(_data(text, source), book, again.warned)
        return again.report(source, notebooks.counts(book), found)
    page = html(again.sheet)
    return again.report(source, pages.counts(page), pages.page_differences(text, page))


def derived_again(path: str | os.PathLike[str]) -> Sheet:
    """Return the sheet derived again from the record of a filed notebook or page, whatever that shows.

    Raises
    ------
    FileFormatError
        When the file cannot be read or is no filed sheet, or its input cannot be right.
    """
    source, place = one_line(os.fspath(path)), Path(path)
    if place.suffix.lower() not in RECORDS:
        message = "a filed .ipynb or .html is needed, which holds its own input"
        raise FileFormatError(message, source=source)
    again = _Again(*RECORDS[place.suffix.lower()](_text(place, source), source))
    if again.sheet is None:
        raise FileFormatError(str(again.problem), source=source)
    return again.sheet


def recheck_pdf(path: str | os.PathLike[str], sheet: Sheet) -> RecheckReport:
    """Write a sheet as PDF again and compare it, byte for byte, with a filed one.

    Parameters
    ----------
    path : path
        The filed PDF.
    sheet : Sheet
        Derived again from the truss file.

    Returns
    -------
    RecheckReport
        A PDF is compared as a whole, on either paper; where it differs is not told.

    Raises
    ------
    FileFormatError
        When the file cannot be read.
    RenderError
        Without the typesetter.
    """
    from trusscalc.render.pdf import PAPERS, pdf  # noqa: PLC0415 - an extra

    source = one_line(os.fspath(path))
    filed = _content(Path(path), source)
    derived = {paper: pdf(sheet, paper=paper) for paper in PAPERS}
    sums = [hashlib.sha256(content).hexdigest() for content in (filed, *derived.values())]
    where = "the file as a whole (SHA-256; another version of the typesetter changes it too)"
    found = () if filed in derived.values() else (Difference(where, sums[0], " or ".join(sums[1:])),)
    record = record_of(sheet)
    return RecheckReport(source, found, {"bytes": len(filed)}, "an unread PDF", record["program"], record["content"])


def _text(place: Path, source: str) -> str:
    try:
        return _content(place, source).decode("utf-8-sig").replace("\r\n", "\n")  # line ends change in the mail
    except UnicodeDecodeError:
        message = "is not UTF-8 text, so it is no filed sheet"
    raise FileFormatError(message, source=source)


def _content(place: Path, source: str) -> bytes:
    message = "there is no such file; check the name and the folder"
    try:
        if place.is_file():
            with place.open("rb") as file:
                content = file.read(LARGEST_SHEET + 1)
            if len(content) <= LARGEST_SHEET:
                return content
            message = f"too large: more than {LARGEST_SHEET:,} bytes"
    except (OSError, ValueError) as problem:
        message = f"cannot be read: {one_line(getattr(problem, 'strerror', None) or str(problem))}"
    raise FileFormatError(message, source=source)


# --- the two kinds of file --------------------------------------------------------------------------------


def _of_page(text: str, source: str) -> tuple[dict[str, Any], str]:
    """Return record and truss file of a filed page."""
    record_text, truss_text = pages.verbatim(text, RECORD_ID), pages.verbatim(text, INPUT_ID)
    if record_text is None or truss_text is None:
        message = "holds no record of what it was derived from, so it is no sheet filed as HTML by this program"
        raise FileFormatError(message, source=source)
    return _data(record_text, source), truss_text


def _of_notebook(text: str, source: str) -> tuple[dict[str, Any], str]:
    """Return record and truss file of a filed notebook."""
    metadata = _data(text, source).get("metadata")
    record = metadata.get("trusscalc") if isinstance(metadata, dict) else None
    truss_text = record.get("truss") if isinstance(record, dict) else None
    if not isinstance(record, dict) or not isinstance(truss_text, str):
        message = "holds no record of what it was derived from, so it is no notebook filed by this program"
        raise FileFormatError(message, source=source)
    return record, truss_text


RECORDS: Final[dict[str, Callable[[str, str], tuple[dict[str, Any], str]]]] = {
    ".ipynb": _of_notebook,
    ".html": _of_page,
    ".htm": _of_page,
}
"""How the record is found in each kind of file."""


def _data(text: str, source: str) -> dict[str, Any]:
    """Return a JSON object; one that says a thing twice could be read in two ways and is refused."""

    def once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        entries = dict(pairs)
        if len(entries) < len(pairs):
            message = "says the same thing twice"
            raise ValueError(message)
        return entries

    try:
        data = json.loads(text, object_pairs_hook=once)
    except (ValueError, RecursionError) as problem:
        message = f"its record is no valid JSON: {one_line(str(problem))}"
        raise FileFormatError(message, source=source) from None
    if not isinstance(data, dict):
        message = "its record is no JSON object"
        raise FileFormatError(message, source=source)
    return data


# --- deriving ---------------------------------------------------------------------------------------------


class _Again:
    """The sheet derived again from a record and a truss file; without a sheet, why not."""

    def __init__(self, record: Mapping[str, Any], truss_text: str) -> None:
        self.written_by = record.get("program", "")
        self.sheet: Sheet | None = None
        self.problem: Difference | None = None
        self.warned: list[str] = []
        with warnings.catch_warnings(record=True) as caught:
            warnings.simplefilter("always", TrusscalcWarning)
            try:
                must_be_known(record)
                self.sheet = derive(record, truss_text)
            except TrusscalcError as problem:
                self.problem = Difference("input", "a sheet", f"nothing, for this input cannot be right: {problem}")
        self.warned = [str(item.message) for item in caught if issubclass(item.category, TrusscalcWarning)]

    def report(self, source: str, compared: Mapping[str, int], found: list[Difference]) -> RecheckReport:
        """Return what came of it."""
        record = record_of(self.sheet) if self.sheet else {"program": "this version", "content": ""}
        differences = (*([self.problem] if self.problem else []), *found)
        written_by = one_line(str(self.written_by)) or "an unnamed program"
        return RecheckReport(source, differences, dict(compared), written_by, record["program"], record["content"])


__all__ = ["Difference", "RecheckReport", "derive", "derived_again", "recheck", "recheck_pdf"]
