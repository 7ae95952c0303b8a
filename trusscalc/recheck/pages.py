"""A filed HTML page against the page derived again: equal to the last byte, or told piece by piece where not.

Equality is decided on the text itself; taking it apart into tags, words, equations and drawings only serves to
say where it differs. So no trick of markup can hide a difference: it can at worst be named badly.
"""

from __future__ import annotations

import html
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import Final
from xml.etree import ElementTree as ET

from trusscalc.recheck.differences import Difference, differing, excerpts
from trusscalc.render.html import INPUT_ID, RECORD_ID

LONG: Final = 160
"""Characters of a text beyond which it is compared line by line."""
_PIECE: Final = re.compile(r"<[^<>]*>|[^<>]+|[<>]")
_WHOLE: Final = {"<svg": "</svg>", "<math": "</math>"}
_NAME: Final = re.compile(r"<(/?[A-Za-z][A-Za-z0-9]*)")
_MARKUP: Final = re.compile(r"<[^<>]*>")


def verbatim(page: str, name: str) -> str | None:
    """Return the text that a page holds verbatim under a name, None when there is none."""
    start_tag = f'<pre id="{name}">\n'
    start = page.find(start_tag)
    end = page.find("</pre>", start)
    return None if start < 0 or end < 0 else html.unescape(page[start + len(start_tag) : end])


def page_differences(shown: str, derived: str) -> list[Difference]:
    """Return where a filed page is not the derived one.

    Parameters
    ----------
    shown : str
        The filed page; untrusted.
    derived : str
        The page this program writes of the same input.
    """
    if shown == derived:
        return []
    one, other = pieces(shown), pieces(derived)
    places = _places(other)
    found = []
    for a, b, c, d in differing(one, other):
        where = places[min(c, len(places) - 1)]
        found.append(Difference(where, *_told("".join(one[a:b]), "".join(other[c:d]))))
    return found


def counts(derived: str) -> dict[str, int]:
    """Return how much of each kind a page has."""
    kinds = {"steps": '<article class="step"', "equations": '<div class="formula"', "table rows": "<tr"}
    return {name: derived.count(mark) for name, mark in kinds.items()} | {"figures": derived.count("<svg ")}


def pieces(page: str) -> list[str]:
    """Return a page as tags, texts, whole equations and whole drawings; joined they are the page again."""
    found: list[str] = []
    whole: list[str] = []
    end = ""
    for piece in _PIECE.findall(page):
        if end:
            whole.append(piece)
            if piece == end:
                found.append("".join(whole))
                whole, end = [], ""
        elif piece.split(" ", 1)[0].rstrip(">") in _WHOLE:
            whole, end = [piece], _WHOLE[piece.split(" ", 1)[0].rstrip(">")]
        elif len(piece) > LONG and "\n" in piece:
            found += piece.splitlines(keepends=True)
        else:
            found.append(piece)
    return found + whole


def _told(shown: str, derived: str) -> tuple[str, str]:
    """Return what is read in two pieces of markup, or the markup where they read the same."""
    one, other = _read(shown), _read(derived)
    seen = [[letter for letter in text if letter.isprintable()] for text in (one, other)]
    return excerpts(one, other) if seen[0] != seen[1] else excerpts(shown, derived)


def _read(markup: str) -> str:
    parts = []
    for piece in pieces(markup):
        if piece.startswith("<math"):
            parts.append(_formula(piece))
        elif not piece.startswith("<"):
            parts.append(html.unescape(piece))
        elif piece.startswith("<svg"):
            parts.append(piece)
    return "".join(parts).strip("\n")


def _formula(markup: str) -> str:
    """Return an equation in one line; one that is not well made, by its words."""
    if "<!" not in markup:
        try:
            return _line(ET.fromstring(markup))  # noqa: S314 - without "<!" there are no entities to grow
        except (ET.ParseError, RecursionError):
            pass
    return html.unescape(_MARKUP.sub(" ", markup))


def _line(element: ET.Element) -> str:
    parts = [_line(inner) for inner in element]
    text = (element.text or "").strip().replace("\N{INVISIBLE TIMES}", "")
    if element.tag == "mfrac":
        return "/".join(f"({part})" if len(part) > 1 and not part.isdigit() else part for part in parts)
    if element.tag == "msqrt":
        return f"√({''.join(parts)})"
    joint = {"msub": "_", "msup": "^"}.get(element.tag, "")
    return text + joint.join(parts)


# --- where ------------------------------------------------------------------------------------------------


@dataclass(slots=True)
class _Reader:
    """Follows a page of our own and knows what a reader would call the place."""

    page: Sequence[str]
    heading: str = "top of the page"
    inside: str = ""
    columns: list[str] = field(default_factory=list)
    row: str = ""
    cell: int = 0
    figures: int = 0
    line: int = 0

    def at(self, number: int) -> str:
        """Return the name of a piece's place."""
        piece = self.page[number]
        found = _NAME.match(piece)
        if found:
            self.enter(found[1], number, piece)
        if piece.startswith("<svg"):
            self.figures += 1
            return f"{self.heading}, figure {self.figures}"
        if piece.startswith("<math") and self.inside == "text":
            return f"{self.heading}, equation"
        if self.inside == "table":
            column = self.columns[self.cell - 1] if 0 < self.cell <= len(self.columns) else ""
            return ", ".join(part for part in (self.heading, self.row, f"column {column}" if column else "") if part)
        if self.inside in ("truss file", "record"):
            self.line += piece.count("\n")
            return f"{self.inside}, line {max(1, self.line - 1 + (not piece.endswith(chr(10))))}"
        return f"{self.heading}, {self.inside}" if self.inside else self.heading

    def enter(self, name: str, number: int, piece: str) -> None:
        """Take note of a tag."""
        match name:
            case "h1" | "h2" | "h3":
                self.heading, self.inside = self._heading(number), "heading"
            case "p":
                self.inside = f"“{self._text(number, '</p>')}”" if 'class="label"' in piece else "text"
            case "style" | "title":
                self.inside = name
            case "li" | "/table" | "/pre" | "/style" | "/title":
                self.inside = "text"
            case "dt":
                self.inside = self._text(number, "</dt>")
            case "figcaption":
                self.inside = "caption"
            case "pre":
                names = {INPUT_ID: "truss file", RECORD_ID: "record"}
                self.inside = next((told for mark, told in names.items() if f'"{mark}"' in piece), "text")
                self.line = 0
            case _:
                self.enter_table(name, number, piece)

    def enter_table(self, name: str, number: int, piece: str) -> None:
        """Take note of a tag of a table."""
        match name:
            case "table":
                self.inside, self.columns, self.row, self.cell = "table", [], "head of the table", 0
            case "caption" | "thead":
                self.row = {"caption": "caption", "thead": "head of the table"}[name]
            case "tr":
                self.cell = 0
                if self.columns:
                    self.row = f"row {self._text(number, '</tr>', first=True)}"
            case "td" | "th":
                self.cell += 1
                if 'scope="col"' in piece:
                    self.columns.append(self._text(number, "</th>"))
            case _:
                pass

    def _heading(self, number: int) -> str:
        words = [word for word in self._words(number, (f"</{self.page[number][1:3]}>",)) if word.strip()]
        if 'id="step-' in self.page[number]:
            return f"step {words[0]} ({words[1]})"
        return words[0] if words else "heading"

    def _text(self, number: int, end: str, *, first: bool = False) -> str:
        words = list(self._words(number, (end, "</th>", "</td>") if first else (end,)))
        return "".join(words).strip()

    def _words(self, number: int, ends: tuple[str, ...]) -> Iterator[str]:
        for piece in self.page[number + 1 :]:
            if piece in ends:
                return
            if not piece.startswith("<"):
                yield html.unescape(piece)


def _places(page: Sequence[str]) -> list[str]:
    reader = _Reader(page)
    return [reader.at(number) for number in range(len(page))]
