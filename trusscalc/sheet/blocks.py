"""The document model: what is on a sheet, without a word of markup.

A sheet is a tuple of blocks; a block holds typed content (text runs, mathematics, tables, figures). Each
renderer is a function with one case for every block, and raises on a block it does not know: in a filed
sheet a skipped piece is a wrong sheet.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from trusscalc.exact import Exact
from trusscalc.sheet.marks import Figure

# --- mathematics ------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Value:
    """An exact number, printed in full."""

    value: Exact


@dataclass(frozen=True, slots=True)
class Decimals:
    """A decimal already rounded, as text with a true minus sign left to the renderer: ``-600.000``."""

    text: str


@dataclass(frozen=True, slots=True)
class Name:
    """A force in symbols: ``N`` with subscript ``U3-U4``; ``sought`` marks what the step solves for."""

    base: str
    subscript: str
    sought: bool = False


@dataclass(frozen=True, slots=True)
class Factor:
    """A signed product in a sum: sign, then factors, a raised dot between numbers.

    ``factors`` are printed in order; a factor 1 is left out by whoever makes the list, not by the renderer.
    """

    negative: bool
    factors: tuple[Value | Decimals | Name, ...]


@dataclass(frozen=True, slots=True)
class Formula:
    """A sum of products on the left, a sum (usually one number) on the right of one equals sign."""

    left: tuple[Factor, ...]
    right: tuple[Factor, ...]
    unit: str = ""


# --- text -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Run:
    """A piece of running text; ``style`` is plain, strong or emphasis."""

    text: str
    style: Literal["plain", "strong", "emphasis"] = "plain"


Inline = Run | Formula | Value | Name | Decimals


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading with what stands at the right end of its line (decimal, unit, T or C)."""

    level: int
    text: str
    number: str = ""
    right: str = ""


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Running text; ``role`` is body, note (small), caution or conclusion."""

    content: tuple[Inline, ...]
    role: Literal["body", "note", "caution", "conclusion"] = "body"


@dataclass(frozen=True, slots=True)
class Items:
    """A list of short statements."""

    items: tuple[tuple[Inline, ...], ...]


@dataclass(frozen=True, slots=True)
class Labelled:
    """One labelled line of a derivation: which sum, with values, hence."""

    label: str
    formula: Formula


@dataclass(frozen=True, slots=True)
class Lines:
    """The labelled lines beside or below a free body."""

    lines: tuple[Labelled, ...]


@dataclass(frozen=True, slots=True)
class Column:
    """A table column: head and alignment."""

    head: str
    align: Literal["left", "right", "centre"] = "left"


@dataclass(frozen=True, slots=True)
class Table:
    """A table; a row in ``strong_rows`` is set bold (a disagreement)."""

    columns: tuple[Column, ...]
    rows: tuple[tuple[Inline | None, ...], ...]
    caption: str = ""
    strong_rows: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class TitleBlock:
    """The title block: (field, entry) pairs, entries possibly empty, never absent."""

    fields: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Picture:
    """A figure on the sheet; several side by side when more than one."""

    figures: tuple[Figure, ...]


@dataclass(frozen=True, slots=True)
class Code:
    """Program text of a notebook: a cell that can be run again; other renderers print it or leave it out."""

    source: str
    purpose: str


Block = Heading | Paragraph | Items | Lines | Table | TitleBlock | Picture | Code


@dataclass(frozen=True, slots=True)
class SheetContent:
    """Everything on a sheet, in order."""

    title: str
    blocks: tuple[Block, ...]
