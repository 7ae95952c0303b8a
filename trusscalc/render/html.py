"""A sheet as one HTML file: no script, nothing fetched, mathematics and drawings inside, its own input included.

Every name and title is somebody's free text and is escaped where it is written. What is for the eye alone stands in
the style sheet beside this module; printed, the page gives the order of the other formats.
"""

from __future__ import annotations

import html as entities
import json
import re
from collections.abc import Callable, Iterable, Sequence
from importlib.resources import files
from typing import Final

from trusscalc.errors import RenderError
from trusscalc.render.draw import svg
from trusscalc.render.inlinesvg import inline_svg
from trusscalc.render.mathml import formula, mathml
from trusscalc.render.mathtree import Digits, Sum, tree
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
    Power,
    Run,
    Seal,
    Sheet,
    Table,
    TitleBlock,
    Value,
)
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.marks import Figure

Svg = Callable[[Figure], str]

INPUT_ID: Final = "truss-file"
RECORD_ID: Final = "record"
NARROW_FIGURE: Final = 85.0
"""Millimetres up to which a free body stands beside its equations."""
SHORT_TABLE: Final = 8
"""Rows of a table that is never split between two pages."""
MOST_TURNED: Final = 3
"""Results of a step that are told one column each."""
WIDE_FIELDS: Final = ("Project", "Structure")
POLICY: Final = "default-src 'none'; style-src 'unsafe-inline'"
"""What a browser may load for this page: nothing."""
_JOINED: Final = re.compile(r"((?<![^\s(])[^\s()–.,;:]{1,12}–[^\s()–.,;:]{1,12}(?![^\s).,;:]))")
RUNNING: Final = (("Project", "Location", "Contract"), ("Calculation", "Revision", "Date", "Prepared"))


def html(sheet: Sheet, *, draw: Svg = svg) -> str:
    """Return the whole page; the same text for the same sheet.

    Parameters
    ----------
    sheet : Sheet
        What to write.
    draw : callable
        Figure to SVG document.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    page = _Page(sheet, draw)
    fields = next((block.fields for block in sheet.blocks if isinstance(block, TitleBlock)), ())
    style = files("trusscalc.render").joinpath("sheet.css").read_text(encoding="utf-8")
    lines = [
        "<!DOCTYPE html>",
        '<html lang="en">',
        "<head>",
        '<meta charset="utf-8">',
        '<meta name="viewport" content="width=device-width, initial-scale=1">',
        f'<meta http-equiv="Content-Security-Policy" content="{POLICY}">',
        f'<meta name="generator" content="{escaped(sheet.origin.program)}">',
        f"<title>{escaped(sheet.title)}</title>",
        f"<style>\n{style}{_running_head(fields)}</style>",
        "</head>",
        "<body>",
        '<a class="skip" href="#sheet">to the sheet</a>',
        *page.body(),
        "</body>",
        "</html>",
        "",
    ]
    return "\n".join(lines)


def escaped(text: str, *, quote: bool = True) -> str:
    r"""Return free text that is text and nothing else, in elements and in quoted attributes.

    Examples
    --------
    >>> escaped("A<b> & 'c'\r")
    'A&lt;b&gt; &amp; &#x27;c&#x27;&#13;'
    """
    return entities.escape(text, quote=quote).replace("\r", "&#13;")


def _running_head(fields: Sequence[tuple[str, str]]) -> str:
    """Return the style that repeats the title block, and sheet x of y, on every printed page."""
    told = dict(fields)
    lines = ["   ".join(f"{name} {told[name]}" for name in names if told.get(name)) for names in RUNNING]
    lines[-1] += "   Checked ____________"
    text = "\\A ".join(_css_text(line) for line in lines)
    left = f'content: "{text}"; white-space: pre; text-align: left; width: 80%;'
    count = 'content: "Sheet " counter(page) " of " counter(pages); font-weight: bold; text-align: right; width: 20%;'
    look = 'font: 8pt/1.5 "STIX Two Text", STIXGeneral, "Times New Roman", serif; vertical-align: middle;'
    first = "@page :first { @top-left { content: none; } @top-right { vertical-align: bottom; } }\n"
    return f"@page {{ @top-left {{ {left} {look} }} @top-right {{ {count} {look} }} }}\n{first}"


def _css_text(text: str) -> str:
    return re.sub(r"[^A-Za-z0-9 ]", lambda found: f"\\{ord(found[0]):06x}", text)


class _Page:
    """Writes the blocks one after the other and knows where on the page it is."""

    def __init__(self, sheet: Sheet, draw: Svg) -> None:
        self.sheet = sheet
        self.draw = draw
        self.heads = [block.text for block in sheet.blocks if isinstance(block, Heading) and block.level == 2]  # noqa: PLR2004
        self.heads.append("Record")
        self.part = 0
        self.figures = 0
        self.place = "Summary"
        self.holds_input = False

    def body(self) -> list[str]:
        """Return title block, sheet and record."""
        blocks = list(self.sheet.blocks)
        lines = []
        if blocks and isinstance(blocks[0], TitleBlock):
            lines += [self.block(blocks.pop(0))]
        lines.append('<main id="sheet">')
        for block in blocks:
            if isinstance(block, Heading) and block.level == 2:  # noqa: PLR2004
                lines += self.contents() if self.part == 0 else ["</section>"]
            lines.append(self.block(block))
        lines += ["</section>" if self.part else "", "</main>", *self.record()]
        return [line for line in lines if line]

    def contents(self) -> list[str]:
        """Return the index of the parts."""
        rows = [f'<li><a href="#part-{n}">{n} {escaped(head)}</a></li>' for n, head in enumerate(self.heads, 1)]
        return ['<nav aria-label="Parts of this sheet">', "<ol>", *rows, "</ol>", "</nav>"]

    def record(self) -> list[str]:
        """Return what the sheet was derived from, as ``recheck`` reads it."""
        record = record_of(self.sheet)
        text = json.dumps(record, ensure_ascii=False, indent=1)
        told = (
            f"Content digest, SHA-256 of everything shown above: {record['content']}. "
            "What follows, with the truss file, is all it takes to derive this sheet again."
        )
        lines = [self.heading(Heading(2, "Record")).replace("<section", '<footer class="record"', 1)]
        lines.append(f"<p>{escaped(told)}</p>")
        if not self.holds_input:
            lines.append(_verbatim(INPUT_ID, self.sheet.origin.truss_text))
        return [*lines, _verbatim(RECORD_ID, text), "</footer>"]

    # --- blocks -------------------------------------------------------------------------------------------

    def block(self, block: Block) -> str:  # noqa: C901, PLR0911 - one line for each kind of block
        """Return one block."""
        match block:
            case Heading():
                return self.heading(block)
            case Paragraph():
                return _paragraph(block)
            case Items(items):
                return _items(items)
            case Lines():
                return _lines(block)
            case Table():
                return _table(block, self.place)
            case TitleBlock(fields):
                return _title_block(fields)
            case Seal():
                return _seal(block)
            case Picture(figures):
                return self.picture(figures)
            case Listing(text, caption):
                return self.listing(text, caption)
            case Derivation():
                return self.derivation(block)
        message = f"{type(block).__name__} is a block this version cannot write as HTML"
        raise RenderError(message)

    def heading(self, block: Heading) -> str:
        """Return a heading; one of the second level opens a part."""
        self.place = block.text if block.level > 1 else "Summary"
        number = f'<span class="number">{escaped(block.number)}</span> ' if block.number else ""
        right = f' <span class="value">{escaped(block.right)}</span>' if block.right else ""
        words = f'{number}<span class="what">{escaped(block.text)}</span>{right}'
        if block.level != 2:  # noqa: PLR2004
            return f"<h{block.level}>{words}</h{block.level}>"
        self.part += 1
        head = f'id="part-{self.part}"'
        words += f' <span class="part">part {self.part} of {len(self.heads)}</span>'
        return f'<section aria-labelledby="part-{self.part}">\n<h2 {head}>{words}</h2>'

    def picture(self, figures: Sequence[Figure]) -> str:
        """Return figures, several of them side by side where there is room."""
        written = [self.figure(figure) for figure in figures]
        return written[0] if len(written) == 1 else "\n".join(['<div class="pictures">', *written, "</div>"])

    def figure(self, figure: Figure) -> str:
        """Return one figure with its caption; wider than a narrow screen, it can be moved sideways."""
        self.figures += 1
        drawing = inline_svg(self.draw(figure), figure, self.figures)
        fits = figure.width <= NARROW_FIGURE
        if fits:
            drawing = drawing.replace("<svg ", '<svg class="fits" ', 1)
        turning = "" if fits else f' tabindex="0" role="group" aria-label="Figure {self.figures}"'
        caption = f"\n<figcaption>{escaped(figure.caption)}</figcaption>" if figure.caption else ""
        return f'<figure id="figure-{self.figures}">\n<div class="drawing"{turning}>{drawing}</div>{caption}\n</figure>'

    def listing(self, text: str, caption: str) -> str:
        """Return verbatim text; the truss file under the name by which it is read again."""
        own = text == self.sheet.origin.truss_text and not self.holds_input
        self.holds_input = self.holds_input or own
        written = _verbatim(INPUT_ID if own else "", text)
        return f'<figure class="listing">\n<figcaption>{escaped(caption)}</figcaption>\n{written}\n</figure>'

    def derivation(self, block: Derivation) -> str:
        """Return one step: heading, reason and free body together, equations beside a narrow one."""
        name = f"step-{block.heading.number}"
        self.place = f"step {block.heading.number}"
        heading = self.heading(block.heading).replace("<h3>", f'<h3 id="{name}">', 1)
        self.place = f"step {block.heading.number}"
        figures = block.picture.figures if block.picture else ()
        beside = bool(figures) and all(figure.width <= NARROW_FIGURE for figure in figures)
        tables = [_table(table, self.place) for table in block.tables]
        lines_and_result = [_lines(block.lines), self.result(block.result)]
        lines = [f'<article class="step" aria-labelledby="{name}">', '<div class="body">', heading]
        lines.append(f'<p class="reason">{inline(block.reason.content)}</p>')
        check = ['<div class="check">', _lines(block.check), "</div>"] if block.check else []
        if beside:
            lines += ['<div class="beside">', f"<div>{self.picture(figures)}</div>", "<div>"]
            lines += [*tables, *lines_and_result, *check, "</div>", "</div>", "</div>"]
        else:
            lines += [*([self.picture(figures)] if figures else []), *tables]
            lines += ['<div class="under">', *lines_and_result, "</div>", "</div>", *check]
        return "\n".join([*lines, *map(_paragraph, block.notes), "</article>"])

    def result(self, table: Table) -> str:
        """Return a step's result, one column for each force, as long as they are few."""
        if len(table.rows) > MOST_TURNED or len(table.columns) < 3:  # noqa: PLR2004 - nothing to turn
            return _table(table, f"result of {self.place}")
        return _turned(table, f"result of {self.place}")


# --- text -------------------------------------------------------------------------------------------------


def inline(content: Iterable[Inline | None]) -> str:
    """Return running text with its mathematics."""
    return "".join(_piece(piece) for piece in content if piece is not None)


def _piece(piece: Inline) -> str:
    match piece:
        case Run(text, style):
            if style == "plain" or not text.strip():
                return _words(text)
            tag = "strong" if style == "strong" else "em"
            return f"<{tag}>{_words(text)}</{tag}>"
        case Decimals(text):
            return escaped(text.replace("-", "−"))
        case Power(mantissa, exponent, below):
            size = f"{escaped(mantissa)} · 10" if mantissa else "10"
            return f"{'&lt; ' if below else ''}{size}<sup>{escaped(str(exponent).replace('-', '−'))}</sup>"
        case Value():
            return _number(piece)
    return mathml(piece)


def _words(text: str) -> str:
    """Return text; a member's name, U3–U4, is not to be broken at the end of a line."""
    pieces = _JOINED.split(text)
    return "".join(
        f"<span>{escaped(piece)}</span>" if place % 2 else escaped(piece) for place, piece in enumerate(pieces)
    )


def _number(value: Value) -> str:
    """Return an exact number; without root, fraction or symbol it is plain text."""
    node = tree(value)
    if isinstance(node, Digits):
        return node.text
    if isinstance(node, Sum) and len(node.terms) == 1 and isinstance(node.terms[0][1], Digits):
        return f"{'−' if node.terms[0][0] else ''}{node.terms[0][1].text}"
    return mathml(value)


def _paragraph(block: Paragraph) -> str:
    if block.role in ("conclusion", "caution"):
        return f'<p class="{block.role}"><strong>{block.role.capitalize()}.</strong> {inline(block.content)}</p>'
    mark = ' class="note"' if block.role == "note" else ""
    return f"<p{mark}>{inline(block.content)}</p>"


def _items(items: Sequence[tuple[str, tuple[Inline, ...]]]) -> str:
    if not any(term for term, _ in items):
        return "\n".join(["<ul>", *(f"<li>{inline(content)}</li>" for _, content in items), "</ul>"])
    rows = [f"<div><dt>{escaped(term)}</dt><dd>{inline(content)}</dd></div>" for term, content in items]
    return "\n".join(['<dl class="items">', *rows, "</dl>"])


def _title_block(fields: Sequence[tuple[str, str]]) -> str:
    rows = []
    for name, entry in fields:
        wide = ' class="wide-field"' if name in WIDE_FIELDS else ""
        rows.append(f"<div{wide}><dt>{escaped(name)}</dt><dd>{escaped(entry)}</dd></div>")
    return "\n".join(['<header class="title-block" aria-label="Title block">', "<dl>", *rows, "</dl>", "</header>"])


def _seal(block: Seal) -> str:
    lines = "".join(f'<div class="signature">{escaped(line)}</div>' for line in block.lines)
    seal = f'<div class="seal">seal, {block.side:g} mm square kept clear</div>'
    return f'<div class="signing"><div>{lines}</div>{seal}</div>'


def _verbatim(name: str, text: str) -> str:
    """Return text as it is; a browser leaves out the line end after the tag, so that one is put there."""
    mark = f' id="{name}"' if name else ""
    return f"<pre{mark}>\n{escaped(text, quote=False)}</pre>"


# --- mathematics and tables -------------------------------------------------------------------------------


def _lines(block: Lines) -> str:
    rows = []
    for line in block.lines:
        rows += [f'<p class="label">{escaped(line.label)}</p>'] if line.label else []
        rows.append(f'<div class="formula">{formula(line.formula)}</div>')
    return "\n".join(['<div class="lines">', *rows, "</div>"])


def _table(block: Table, name: str) -> str:
    """Return a table; the first cell of a row is its head."""
    head = "".join(f'<th scope="col"{_aligned(column.align)}>{escaped(column.head)}</th>' for column in block.columns)
    rows = []
    for place, row in enumerate(block.rows):
        strong = place in block.strong_rows
        kind = "strong" if strong else "total" if place >= len(block.rows) - block.totals else ""
        cells: list[str] = []
        for column, cell in zip(block.columns, row, strict=True):
            tag = 'th scope="row"' if not cells and cell is not None else "td"
            cells.append(f"<{tag}{_aligned(column.align)}>{_cell(cell, strong=strong)}</{tag[:2]}>")
        mark = f' class="{kind}"' if kind else ""
        rows.append(f"<tr{mark}>{''.join(cells)}</tr>")
    short = " short" if len(rows) <= SHORT_TABLE else ""
    lines = [f'<div class="table{short}" role="group" aria-label="{escaped(name)}" tabindex="0">', "<table>"]
    lines += [_caption(block, name), f"<thead><tr>{head}</tr></thead>", "<tbody>", *rows, "</tbody>"]
    return "\n".join([*lines, "</table>", "</div>"])


def _turned(block: Table, name: str) -> str:
    """Return a table turned by ninety degrees: its columns are rows."""
    strong = [place in block.strong_rows for place in range(len(block.rows))]
    first, *others = block.columns
    heads = [f'<th scope="col"><span class="unseen">{escaped(first.head)}</span></th>']
    heads += [
        f'<th scope="col" class="right">{_cell(row[0], strong=bold)}</th>'
        for row, bold in zip(block.rows, strong, strict=True)
    ]
    rows = []
    for place, column in enumerate(others, 1):
        cells = "".join(
            f'<td class="right">{_cell(row[place], strong=bold)}</td>'
            for row, bold in zip(block.rows, strong, strict=True)
        )
        rows.append(f'<tr><th scope="row">{escaped(column.head)}</th>{cells}</tr>')
    lines = ['<div class="table short result">', "<table>", _caption(block, name)]
    lines += [f"<thead><tr>{''.join(heads)}</tr></thead>", "<tbody>", *rows, "</tbody>", "</table>", "</div>"]
    return "\n".join(lines)


def _caption(block: Table, name: str) -> str:
    if block.caption:
        return f"<caption>{escaped(block.caption)}</caption>"
    return f'<caption class="unseen">{escaped(name)}</caption>'


def _cell(cell: Inline | None, *, strong: bool) -> str:
    written = "" if cell is None else inline([cell])
    return f"<strong>{written}</strong>" if strong and written else written


def _aligned(align: str) -> str:
    return "" if align == "left" else f' class="{align}"'
