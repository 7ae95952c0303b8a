"""The text layer of a PDF: what a search, a copy or a screen reader gets, and where it stands. For tests."""

from __future__ import annotations

import io
import re
from collections.abc import Iterator
from dataclasses import dataclass, field

import pikepdf


@dataclass
class Font:
    """A font of a page: its name, what each two-byte code stands for, and how wide it is."""

    name: str
    characters: dict[int, str] = field(default_factory=dict)
    widths: dict[int, float] = field(default_factory=dict)
    usual: float = 1000.0


@dataclass
class Shown:
    """A character on a page: the font's name and where its right end is, in points from the left."""

    text: str
    font: str
    right: float


def font_of(item: pikepdf.Object) -> Font:
    """Return a font, read by its ToUnicode table and its widths."""
    inner = item["/DescendantFonts"][0]
    font = Font(str(inner["/BaseFont"]).split("+")[-1])
    table = item["/ToUnicode"].read_bytes().decode("latin-1")
    for block in re.findall(r"beginbfchar(.*?)endbfchar", table, re.DOTALL):
        for code, text in re.findall(r"<([0-9a-fA-F]+)>\s*<([0-9a-fA-F]+)>", block):
            font.characters[int(code, 16)] = bytes.fromhex(text).decode("utf-16-be")
    font.usual = float(inner.get("/DW", 1000))
    widths = list(inner["/W"])
    while widths:
        start, given = int(widths.pop(0)), widths.pop(0)
        if isinstance(given, pikepdf.Array):
            font.widths |= {start + place: float(width) for place, width in enumerate(given)}
        else:
            font.widths |= dict.fromkeys(range(start, int(given) + 1), float(widths.pop(0)))
    return font


def characters_of(page: pikepdf.Page) -> Iterator[Shown]:  # noqa: C901 - one line for each operator
    """Return every character of a page in the order it is written."""
    fonts = {name: font_of(font) for name, font in page.resources.get("/Font", {}).items()}
    font, size = Font(""), 0.0
    outer, inner = pikepdf.Matrix(), pikepdf.Matrix()
    kept: list[pikepdf.Matrix] = []
    for operands, operator in pikepdf.parse_content_stream(page):
        match str(operator):
            case "q":
                kept.append(outer)
            case "Q":
                outer = kept.pop()
            case "cm":
                outer = pikepdf.Matrix(*map(float, operands)) @ outer
            case "Tm":
                inner = pikepdf.Matrix(*map(float, operands))
            case "Tf":
                font, size = fonts[str(operands[0])], float(operands[1])
            case "TJ" | "Tj" as shows:
                along = 0.0
                for piece in operands[0] if shows == "TJ" else operands:
                    if not isinstance(piece, pikepdf.String):
                        along -= float(piece) * size / 1000
                        continue
                    for code in _codes(bytes(piece)):
                        along += font.widths.get(code, font.usual) * size / 1000
                        place = (inner @ outer).transform((along, 0.0))
                        yield Shown(font.characters[code], font.name, place[0])


def _codes(written: bytes) -> list[int]:
    return [int.from_bytes(written[place : place + 2], "big") for place in range(0, len(written), 2)]


def pages_of(content: bytes) -> list[str]:
    """Return the text of each page, without any blanks."""
    with pikepdf.open(io.BytesIO(content)) as document:
        return [re.sub(r"\s", "", "".join(c.text for c in characters_of(page))) for page in document.pages]


def set_in(content: bytes, font: str) -> str:
    """Return everything set in one font."""
    with pikepdf.open(io.BytesIO(content)) as document:
        return "".join(c.text for page in document.pages for c in characters_of(page) if c.font == font)


def rightmost(content: bytes) -> float:
    """Return how far right any character that can be seen reaches, in points."""
    with pikepdf.open(io.BytesIO(content)) as document:
        return max(c.right for page in document.pages for c in characters_of(page) if c.text.strip())
