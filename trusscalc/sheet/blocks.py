"""The document model: what is on a sheet, without a word of markup.

A sheet is a tuple of blocks; a block holds typed content (text runs, mathematics, tables, figures). Each
renderer is a function with one case for every block, and raises on a block it does not know: in a filed
sheet a skipped piece is a wrong sheet.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Final, Literal

from trusscalc.exact import Exact
from trusscalc.sheet.marks import Figure

ADDED: Final = MappingProxyType({"added": True})
"""Marks a field that is newer than sheets already filed: unset, it does not count in their digest."""

# --- mathematics ------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Value:
    """An exact number, printed in full.

    ``role`` says how it reads best: an amount or an arm as a short decimal where that is exact (2.5), a cosine as
    a fraction (4/5); arms and cosines with their root below (3/√13), as on a slope triangle.
    """

    value: Exact
    role: Literal["amount", "arm", "cosine"] = "amount"


@dataclass(frozen=True, slots=True)
class Decimals:
    """A decimal already rounded, as text with a true minus sign left to the renderer: ``-600.000``."""

    text: str


@dataclass(frozen=True, slots=True)
class Power:
    """A size told by its power of ten: ``6.0 * 10^-7``; without mantissa the power alone; ``below``: less than it."""

    mantissa: str
    exponent: int
    below: bool = False


@dataclass(frozen=True, slots=True)
class Name:
    """A force in symbols: ``N`` with subscript ``U3–U4``; ``sought`` marks what the step solves for."""

    base: str
    subscript: str
    sought: bool = False


@dataclass(frozen=True, slots=True)
class Bracket:
    """A sum in brackets, as a factor: (4 + 8 + 12)."""

    terms: tuple[Product, ...]


@dataclass(frozen=True, slots=True)
class Product:
    """A signed product in a sum: sign, then factors, a raised dot between numbers.

    ``factors`` are printed in order, at least one; a factor 1 is left out by whoever makes the list, not by the
    renderer.
    """

    negative: bool
    factors: tuple[Value | Decimals | Name | Bracket, ...]


@dataclass(frozen=True, slots=True)
class Formula:
    """One written line: a sum on the left and, unless ``right`` is empty, one relation sign and a sum on the right.

    Without a left side it is a number marked as rounded: ``≈ 0.79``.

    ``approximately`` says that a rounded decimal stands in the line, so that it holds to its digits only.
    """

    left: tuple[Product, ...]
    right: tuple[Product, ...]
    approximately: bool = False


# --- text -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Run:
    """A piece of running text; ``style`` is plain, strong or emphasis."""

    text: str
    style: Literal["plain", "strong", "emphasis"] = "plain"


Inline = Run | Formula | Value | Name | Decimals | Power | Bracket


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
    """Short statements, each with what it is about: (``Not covered``, ...); the term may be ''."""

    items: tuple[tuple[str, tuple[Inline, ...]], ...]


@dataclass(frozen=True, slots=True)
class Labelled:
    """One labelled line of a derivation: which sum, with values, hence. A continued line has no label."""

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
    """A table; a row in ``strong_rows`` is set bold (a disagreement), the last ``totals`` rows under a rule.

    ``role``: ``result`` is the result of one step, which a narrow column may set turned by ninety degrees.
    """

    columns: tuple[Column, ...]
    rows: tuple[tuple[Inline | None, ...], ...]
    caption: str = ""
    strong_rows: tuple[int, ...] = ()
    totals: int = 0
    role: Literal["plain", "result"] = "plain"


@dataclass(frozen=True, slots=True)
class TitleBlock:
    """The title block: (field, entry) pairs, entries possibly empty, never absent."""

    fields: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Seal:
    """Room for a seal, kept clear, and beside it the lines to sign on."""

    lines: tuple[str, ...] = ("signature", "date")
    side: float = 55.0


@dataclass(frozen=True, slots=True)
class Picture:
    """A figure on the sheet; several side by side when more than one."""

    figures: tuple[Figure, ...]


@dataclass(frozen=True, slots=True)
class Listing:
    """Verbatim text: the truss file the sheet was derived from."""

    text: str
    caption: str


@dataclass(frozen=True, slots=True)
class Derivation:
    """One step: never parted from its heading, breaks allowed only before ``check``.

    Attributes
    ----------
    heading : Heading
        Number, what is found, and its value.
    reason : Paragraph
        Why this cut.
    picture : Picture or None
        The free bodies.
    lines : Lines
        Which sum, with values, hence.
    tables : tuple of Table
        Loads collected to their resultant, names of the symbols.
    result : Table
        Exact, decimal, sense, stiffness value, difference, verdict.
    check : Lines or None
        An equation not used before; None when there is none left, which ``notes`` then say.
    notes : tuple of Paragraph
        What a reader with a pencil has to know.
    """

    heading: Heading
    reason: Paragraph
    picture: Picture | None
    lines: Lines
    tables: tuple[Table, ...]
    result: Table
    check: Lines | None
    notes: tuple[Paragraph, ...] = ()


Block = Heading | Paragraph | Items | Lines | Table | TitleBlock | Seal | Picture | Listing | Derivation


@dataclass(frozen=True, slots=True)
class SubmittedTable:
    """A table of submitted results on a sheet, and how it was read and compared: enough to do it again.

    Attributes
    ----------
    name : str
        The file's name.
    kind, content : str
        The table as ``submitted.kept.kept`` writes it.
    columns : tuple of (str, str)
        Columns as named by the user: what they are, and their head or place.
    renamed : tuple of (str, str) or None
        Our joint or member to its name in the table; None for no map.
    convention, unit, case, decimal : str
        Options of ``read_submitted``.
    others : tuple of str
        Names of other structures.
    theirs : str
        What the table was said to call the case.
    relative, absolute : str
        The criterion as exact text.
    blind : str
        ``no``; else whether ours were frozen before the table was read, ``in order``, or after, ``read before``.
    written_down : bool
        Whether their digest had been written down.
    frozen_members : tuple of str
        In blind mode: the members that were checked, where not all were.
    derived : tuple of str
        Members derived on the sheet.
    """

    name: str
    kind: Literal["text", "base64", "cells"]
    content: str
    columns: tuple[tuple[str, str], ...]
    renamed: tuple[tuple[str, str], ...] | None
    convention: str
    unit: str
    case: str
    decimal: str
    others: tuple[str, ...]
    theirs: str
    relative: str
    absolute: str
    blind: Literal["no", "in order", "read before"]
    written_down: bool
    frozen_members: tuple[str, ...]
    derived: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Origin:
    """What a sheet was derived from, enough to derive it again.

    Attributes
    ----------
    truss_text : str
        The truss file.
    case : str
        Load case or combination.
    members : tuple of str
        The members asked for.
    places : int
        Decimal places printed.
    project : tuple of (str, str)
        The filled fields of the title block.
    stated : tuple of (str, str)
        Every member force and reaction found, as exact text.
    agreed : bool
        Whether everything agreed.
    program : str
        Program and version.
    cuts : tuple of (str, tuple of str)
        Members derived from a cut of the engineer's own, each with the joints kept.
    prefer : str
        What the plan leaned to, '' for nothing.
    names : tuple of (str, str)
        Joints and members with their names elsewhere.
    drawings : bool
        Whether figures are drawn.
    detail : str
        Which derivations the sheet holds: ``members``, ``all`` or ``summary``.
    graphics : bool
        Whether it has the appendix of graphic statics.
    task : str
        What it is of: ``check``, ``envelope``, ``influence`` or ``comparison``.
    target : str
        Of an influence line: the force.
    along : str
        Its chain, a name of the file or the joints.
    train : str
        The name of the train that stands on it, '' for none.
    submitted : SubmittedTable or None
        Of a comparison: the submitted table.
    """

    truss_text: str
    case: str
    members: tuple[str, ...]
    places: int
    project: tuple[tuple[str, str], ...]
    stated: tuple[tuple[str, str], ...]
    agreed: bool
    program: str
    cuts: tuple[tuple[str, tuple[str, ...]], ...] = ()
    prefer: str = ""
    names: tuple[tuple[str, str], ...] = ()
    drawings: bool = True
    detail: Literal["members", "all", "summary"] = "members"
    graphics: bool = False
    task: Literal["check", "envelope", "influence", "comparison"] = field(default="check", metadata=ADDED)
    target: str = field(default="", metadata=ADDED)
    along: str = field(default="", metadata=ADDED)
    train: str = field(default="", metadata=ADDED)
    submitted: SubmittedTable | None = field(default=None, metadata=ADDED)


@dataclass(frozen=True, slots=True)
class Sheet:
    """A calculation sheet.

    Attributes
    ----------
    title : str
        What it is called.
    blocks : tuple of Block
        Everything on it, in order.
    summary : tuple of Block
        Conclusion and summary table alone.
    origin : Origin
        What it was derived from.
    """

    title: str
    blocks: tuple[Block, ...]
    summary: tuple[Block, ...]
    origin: Origin
