"""A sheet as plain text: 100 columns, tables aligned, figures told in words. Readable with nothing but a pager."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Sequence
from typing import Final

from trusscalc.errors import RenderError
from trusscalc.render.mathtext import Plain
from trusscalc.sheet.blocks import (
    Block,
    Column,
    Derivation,
    Heading,
    Inline,
    Items,
    Lines,
    Listing,
    Paragraph,
    Picture,
    Run,
    Seal,
    Sheet,
    Table,
    TitleBlock,
)

WIDTH: Final = 100
INDENT: Final = 4
GAP: Final = "  "
MOST_SHRUNK: Final = 12
"""A text column is not made narrower than this."""
MARK: Final = "»"
"""Stands before what other outputs set bold."""

_plain = Plain()


def text(sheet: Sheet) -> str:
    """Return the whole sheet as plain text.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    return "\n".join([*_lines(sheet.blocks), ""])


def step_text(derivation: Derivation) -> str:
    """Return one step's heading, reason, lines, result and check."""
    return "\n".join(_derivation(derivation)).strip("\n")


def blocks_text(blocks: Iterable[Block]) -> str:
    """Return some blocks as plain text."""
    return "\n".join(_lines(blocks)).strip("\n")


def _lines(blocks: Iterable[Block]) -> list[str]:
    lines: list[str] = []
    for block in blocks:
        written = _block(block)
        if lines and written:
            lines.append("")
        lines += written
    return lines


def _block(block: Block) -> list[str]:  # noqa: C901, PLR0911 - one line for each kind of block
    match block:
        case Heading():
            return _heading(block)
        case Paragraph():
            return _paragraph(block)
        case Items():
            return _items(block)
        case Lines():
            return _formulas(block)
        case Table():
            return _table(block)
        case TitleBlock(fields):
            return _title_block(fields)
        case Seal(lines, side):
            return [*(f"{line}: {'_' * 40}" for line in lines), f"seal: {side:g} mm square kept clear on paper"]
        case Picture(figures):
            told = [f"Figure: {figure.alt} {figure.caption}".strip() for figure in figures]
            return [line for text in told for line in _wrapped(f"[{text}]", WIDTH)]
        case Listing(content, caption):
            return [f"{caption}:", "", *(f"    {line}".rstrip() for line in content.splitlines())]
        case Derivation():
            return _derivation(block)
    message = f"{type(block).__name__} is a block this version cannot write as text"
    raise RenderError(message)


# --- text -------------------------------------------------------------------------------------------------


def inline(content: Iterable[Inline | None]) -> str:
    """Return running text; strong pieces are marked by the paragraph, not here."""
    pieces = []
    for piece in content:
        match piece:
            case None:
                continue
            case Run(written):
                pieces.append(written)
            case _:
                pieces.append(_plain.write(piece))
    return "".join(pieces)


def _heading(block: Heading) -> list[str]:
    words = f"{block.number}  {block.text}" if block.number else block.text
    if block.level == 1:
        return [words.upper(), "=" * min(WIDTH, width(words))]
    rule = "=" if block.level == 2 else "-"  # noqa: PLR2004 - sections and steps
    if block.right and width(words) + width(block.right) + 2 <= WIDTH:
        return [words + " " * (WIDTH - width(words) - width(block.right)) + block.right, rule * WIDTH]
    lines = _wrapped(words, WIDTH)
    if block.right:
        lines += [line.rjust(WIDTH) for line in _wrapped(block.right, WIDTH)]
    return [*lines, rule * WIDTH]


def _paragraph(block: Paragraph) -> list[str]:
    lead = {"conclusion": "Conclusion. ", "caution": "Caution. "}.get(block.role, "")
    strong = any(isinstance(piece, Run) and piece.style == "strong" for piece in block.content)
    return _wrapped(f"{MARK + ' ' if strong else ''}{lead}{inline(block.content)}", WIDTH)


def _items(block: Items) -> list[str]:
    lines: list[str] = []
    indent = min(24, max((width(term) for term, _ in block.items), default=0) + 2)
    for term, content in block.items:
        body = _wrapped(inline(content), WIDTH - indent)
        if width(term) + 2 > indent:
            lines.append(term)
            term = ""  # noqa: PLW2901 - a long term has a line of its own
        lines += [
            (term + " " * (indent - width(term)) if place == 0 else " " * indent) + line
            for place, line in enumerate(body)
        ]
    return [line.rstrip() for line in lines]


def _title_block(fields: Sequence[tuple[str, str]]) -> list[str]:
    indent = max(width(field) for field, _ in fields) + 2
    lines = ["-" * WIDTH]
    for field, entry in fields:
        body = _wrapped(entry, WIDTH - indent) or [""]
        lines += [(field.ljust(indent) if place == 0 else " " * indent) + line for place, line in enumerate(body)]
    return [line.rstrip() for line in [*lines, "-" * WIDTH]]


def _formulas(block: Lines) -> list[str]:
    lines: list[str] = []
    for labelled in block.lines:
        if labelled.label:
            lines += _wrapped(labelled.label + ":", WIDTH)
        lines += [" " * INDENT + line for line in broken(_plain.write(labelled.formula), WIDTH - INDENT)]
    return lines


def broken(formula: str, room: int) -> list[str]:
    """Return a formula in lines, broken before a plus, minus or relation sign only; the rest hangs."""
    if width(formula) <= room:
        return [formula]
    lines: list[str] = []
    pieces: list[str] = []
    line, depth, start = "", 0, 0
    for place, character in enumerate(formula):
        depth += (character == "(") - (character == ")")
        if character == " " and depth == 0 and formula[place + 1 : place + 2] in ("+", "−", "=", "≈"):
            pieces.append(formula[start:place])
            start = place
    pieces.append(formula[start:])
    for piece in pieces:
        limit = room if not lines else room - INDENT
        if line and width(line) + width(piece) > limit:
            lines.append(line)
            line = piece.lstrip()
        else:
            line += piece
    lines.append(line)
    return [lines[0], *(" " * INDENT + later for later in lines[1:])]


def _derivation(block: Derivation) -> list[str]:
    lines = _lines([block.heading, block.reason])
    if block.picture:
        lines += ["", *_block(block.picture)]
    for table in block.tables:
        lines += ["", *_table(table)]
    lines += ["", *_formulas(block.lines), "", *_table(block.result)]
    if block.check:
        lines += ["", *_formulas(block.check)]
    for note in block.notes:
        lines += _block(note)
    return lines


# --- tables -----------------------------------------------------------------------------------------------


def _table(block: Table) -> list[str]:
    heads = [column.head for column in block.columns]
    rows = [["" if cell is None else inline([cell]) for cell in row] for row in block.rows]
    marks = bool(block.strong_rows)
    room = WIDTH - (2 if marks else 0)
    widths = _widths(heads, rows, room)
    rule = "-" * (sum(widths) + len(GAP) * (len(widths) - 1))
    lines = [*_row(heads, widths, block.columns), rule]
    for place, row in enumerate(rows):
        if block.totals and place == len(rows) - block.totals:
            lines.append(rule)
        written = _row(row, widths, block.columns)
        if marks:
            mark = MARK if place in block.strong_rows else " "
            written = [f"{mark if n == 0 else ' '} {line}" for n, line in enumerate(written)]
        lines += written
    if marks:
        lines[:2] = [f"  {line}" for line in lines[:2]]
    lines.append(rule if not marks else f"  {rule}")
    lines += _wrapped(block.caption, WIDTH)
    return [line.rstrip() for line in lines]


def _widths(heads: list[str], rows: list[list[str]], room: int) -> list[int]:
    """Return column widths; when the table is too wide, the widest text columns are narrowed first."""
    widths = [max([width(head), *(width(row[place]) for row in rows)]) for place, head in enumerate(heads)]
    excess = sum(widths) + len(GAP) * (len(widths) - 1) - room
    while excess > 0:
        widest = max(range(len(widths)), key=lambda place: (widths[place], -place))
        if widths[widest] <= MOST_SHRUNK:
            break
        widths[widest] -= 1
        excess -= 1
    return widths


def _row(cells: Sequence[str], widths: Sequence[int], columns: Sequence[Column]) -> list[str]:
    wrapped = [_wrapped(cell, size) or [""] for cell, size in zip(cells, widths, strict=True)]
    lines = []
    for place in range(max(map(len, wrapped))):
        pieces = []
        for words, size, column in zip(wrapped, widths, columns, strict=True):
            piece = words[place] if place < len(words) else ""
            pieces.append(_aligned(piece, size, column.align))
        lines.append(GAP.join(pieces).rstrip())
    return lines


def _aligned(piece: str, size: int, align: str) -> str:
    spare = max(0, size - width(piece))
    if align == "right":
        return " " * spare + piece
    if align == "centre":
        return " " * (spare // 2) + piece + " " * (spare - spare // 2)
    return piece + " " * spare


# --- widths -----------------------------------------------------------------------------------------------


def width(written: str) -> int:
    """Return how many columns a text takes: wide letters two, combining marks none."""
    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in written)


def _wrapped(written: str, room: int) -> list[str]:
    """Return a text in lines; a word longer than the line is cut, never lost."""
    lines: list[str] = []
    line = ""
    for word in written.rstrip().split(" "):
        candidate = f"{line} {word}" if line else word
        if width(candidate) <= room:
            line = candidate
            continue
        if line:
            lines.append(line)
        line = word
        while width(line) > room:
            cut = max(1, _fitting(line, room))
            lines.append(line[:cut])
            line = line[cut:]
    if line:
        lines.append(line)
    return lines


def _fitting(word: str, room: int) -> int:
    total = 0
    for place, character in enumerate(word):
        total += width(character)
        if total > room:
            return place
    return len(word)
