"""A sheet as the data its PDF is set from: blocks as plain lists and dictionaries, figures apart.

What the typesetter gets is data and nothing else; ``sheet.typ`` has one function for every kind of block named
here. Decided here is what depends on meaning: which blocks share the first sheet, what may not be broken at the
end of a line, how a result is turned for a narrow column.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Sequence
from typing import Any, Final

from trusscalc.errors import RenderError
from trusscalc.render.typstmath import Piece, pieces
from trusscalc.sheet.blocks import (
    Block,
    Decimals,
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
from trusscalc.sheet.marks import Figure

LONGEST_WORD: Final = 16
"""Characters of a word beyond which it may be broken anywhere: no column holds every name."""
LISTING_WIDTHS: Final = {2: 49, 3: 30}
"""Characters of a line of the truss file, by the number of columns; a longer one is continued without a number."""
LEADS: Final = {"conclusion": "Conclusion.", "caution": "Caution."}

Data = dict[str, Any]


class Figures:
    """The figures of a sheet, each once, under the name by which the page asks for it."""

    def __init__(self) -> None:
        self.drawn: dict[str, Figure] = {}

    def named(self, figure: Figure) -> Data:
        """Return what the page has to know of a figure."""
        name = f"figure-{len(self.drawn) + 1}"
        self.drawn[name] = figure
        return {
            "name": name,
            "width": figure.width,
            "height": figure.height,
            "caption": text(figure.caption),
            "alt": f"{figure.alt} {figure.caption}".strip(),
        }


def sheet_data(sheet: Sheet, paper: str, figures: Figures) -> Data:
    """Return everything that is set, ready for JSON.

    Parameters
    ----------
    sheet : Sheet
        What is set.
    paper : str
        Paper, as the typesetter calls it.
    figures : Figures
        Takes up the figures met.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    front, rest = _front(sheet.blocks)
    fields = next((block.fields for block in sheet.blocks if isinstance(block, TitleBlock)), ())
    return {
        "paper": paper,
        "title": sheet.title,
        "fields": {field.lower(): entry for field, entry in fields},
        "front": None if front is None else _first_sheet(front, figures),
        "blocks": [block_data(block, figures) for block in rest],
    }


def _front(blocks: Sequence[Block]) -> tuple[Sequence[Block] | None, Sequence[Block]]:
    """Return the blocks of the first sheet, down to the seal, and the others; None where there is no seal."""
    for place, block in enumerate(blocks):
        if isinstance(block, Seal):
            return blocks[: place + 1], blocks[place + 1 :]
        if isinstance(block, Derivation):
            break
    return None, blocks


def _first_sheet(blocks: Sequence[Block], figures: Figures) -> Data:
    """Return the first sheet in its three parts: what comes first, the elevation, what stands at the foot."""
    scope = max((place for place, block in enumerate(blocks) if isinstance(block, Heading)), default=len(blocks) - 1)
    above = blocks[:scope]
    return {
        "above": [block_data(block, figures) for block in above if not isinstance(block, Picture)],
        "pictures": [block_data(block, figures) for block in above if isinstance(block, Picture)],
        "scope": [block_data(block, figures) for block in blocks[scope:-1]],
        "seal": block_data(blocks[-1], figures),
    }


def block_data(block: Block, figures: Figures) -> Data:  # noqa: C901, PLR0911 - one line for each kind of block
    """Return one block as data.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    match block:
        case Heading(level, words, number, right):
            return {"kind": "heading", "level": level, "text": text(words), "number": number, "right": right}
        case Paragraph(content, role):
            return {"kind": "paragraph", "role": role, "lead": LEADS.get(role, ""), "content": inline(content)}
        case Items(items):
            return {"kind": "items", "items": [[text(term), inline(content)] for term, content in items]}
        case Lines(lines):
            return {"kind": "lines", "lines": [[text(line.label), pieces(line.formula)] for line in lines]}
        case Table():
            return _table(block)
        case TitleBlock(fields):
            return {"kind": "title block", "fields": [[field, text(entry)] for field, entry in fields]}
        case Seal(lines, side):
            return {"kind": "seal", "lines": list(lines), "side": side}
        case Picture(drawings):
            return {"kind": "picture", "figures": [figures.named(figure) for figure in drawings]}
        case Listing(content, caption):
            return _listing(content, caption)
        case Derivation():
            return _derivation(block, figures)
    message = f"{type(block).__name__} is a block this version cannot write as PDF"
    raise RenderError(message)


def _derivation(block: Derivation, figures: Figures) -> Data:
    return {
        "kind": "derivation",
        "heading": block_data(block.heading, figures),
        "reason": block_data(block.reason, figures),
        "picture": None if block.picture is None else block_data(block.picture, figures),
        "lines": block_data(block.lines, figures),
        "tables": [block_data(table, figures) for table in block.tables],
        "result": block_data(block.result, figures),
        "turned": turned(block.result),
        "check": None if block.check is None else block_data(block.check, figures),
        "notes": [block_data(note, figures) for note in block.notes],
    }


# --- text -------------------------------------------------------------------------------------------------


def inline(content: Iterable[Inline | None]) -> list[Any]:
    """Return running text in pieces: text by how it may break, mathematics by its terms.

    Examples
    --------
    >>> inline([Run("see "), Run("U3–U4", "strong"), Decimals("-2.50")])
    [['text', '', 'see '], ['name', 'strong', 'U3–U4'], ['text', '', '−2.50']]
    """
    found: list[Any] = []
    for piece in content:
        match piece:
            case None:
                continue
            case Run(written, style):
                found += text(written, "" if style == "plain" else style)
            case Decimals(written):
                found.append(["text", "", written.replace("-", "−")])
            case _:
                found.append(_mathematics(pieces(piece)))
    return found


def _mathematics(found: list[Piece]) -> list[Any]:
    """Return mathematics in running text; a number that is digits alone is set as text, which looks the same."""
    match found:
        case [["", sign, ["digits", digits], _]]:
            return ["text", "", f"{sign}{digits}"]
        case _:
            return ["mathematics", found]


def text(written: str, style: str = "") -> list[Any]:
    """Return a text in pieces: ``name`` is never broken at a line's end, ``long`` may be broken anywhere."""
    found: list[Any] = []
    for word in re.split(r"(\s+)", written):
        if not word:
            continue
        kind = "text"
        if len(word) > LONGEST_WORD:
            kind = "long"
        elif "–" in word:
            kind = "name"
        if kind == "text" and found and found[-1][0] == "text":
            found[-1][2] += word
        else:
            found.append([kind, style, word])
    return found


def listing(content: str, width: int) -> list[list[Any]]:
    r"""Return the lines of a text with their numbers; what is longer than a line is continued under number 0.

    Examples
    --------
    >>> listing("a = 1\n\nbb = 22\n", 5)
    [[1, 'a = 1'], [2, ''], [3, 'bb = '], [0, '22']]
    """
    found: list[list[Any]] = []
    for number, line in enumerate(content.rstrip("\n").split("\n"), 1):
        rest = line.removesuffix("\r").expandtabs(4)
        size = _fitting(rest, width)
        found.append([number, rest[:size]])
        while rest := rest[size:]:
            size = _fitting(rest, width)
            found.append([0, rest[:size]])
    return found


def _fitting(line: str, width: int) -> int:
    """Return how much of a line is set: up to a blank where there is one in its second half."""
    if len(line) <= width:
        return len(line)
    return line.rfind(" ", width // 2, width) + 1 or width


def _listing(content: str, caption: str) -> Data:
    """Return a text in as many columns as make it shortest."""
    by_columns = {columns: listing(content, width) for columns, width in LISTING_WIDTHS.items()}
    best = min(by_columns, key=lambda columns: (-(-len(by_columns[columns]) // columns), columns))
    return {"kind": "listing", "caption": text(caption), "columns": best, "lines": by_columns[best]}


# --- tables -----------------------------------------------------------------------------------------------


def _table(block: Table) -> Data:
    rows = [[cell(piece) for piece in row] for row in block.rows]
    return {
        "kind": "table",
        "columns": [[text(column.head), column.align] for column in block.columns],
        "rows": rows,
        "upright": [_upright(row) for row in rows],
        "caption": text(block.caption),
        "strong": list(block.strong_rows),
        "totals": block.totals,
    }


def _upright(row: list[list[Any]]) -> str:
    """Return how a row's cells stand beside each other: on one base line, or in the middle where one is a fraction."""
    mathematics = [piece for content in row for piece in content if piece[0] == "mathematics"]
    if any('["over"' in json.dumps(piece) for piece in mathematics):
        return "middle"
    return "bottom" if mathematics else "top"


def cell(piece: Inline | None) -> list[Any]:
    """Return a table's cell as running text; an empty one is an empty list."""
    return [] if piece is None else inline([piece])


def turned(block: Table) -> Data:
    """Return a result turned by ninety degrees: one line for each column, one column for each force.

    Decimal and sense share a line, and so do difference and verdict.
    """
    heads = [column.head for column in block.columns]
    lines: list[tuple[str, list[list[Any]]]] = []
    for place, head in enumerate(heads[1:], 1):
        cells = [cell(row[place]) for row in block.rows]
        if head == "T/C":
            lines[-1] = ("decimal, sense", _joined(lines[-1][1], cells, "  "))
        elif head == "verdict":
            lines[-1] = (lines[-1][0], _joined(lines[-1][1], cells, ", "))
        elif any(cells):
            lines.append((head, cells))
    return {
        "heads": [cell(row[0]) for row in block.rows],
        "lines": [[text(head), cells] for head, cells in lines if any(cells)],
        "caption": text(block.caption),
        "strong": list(block.strong_rows),
    }


def _joined(first: list[list[Any]], second: list[list[Any]], between: str) -> list[list[Any]]:
    return [[*a, *([["text", "", between]] if a and b else []), *b] for a, b in zip(first, second, strict=True)]


__all__ = ["Data", "Figures", "Piece", "block_data", "inline", "listing", "sheet_data", "text", "turned"]
