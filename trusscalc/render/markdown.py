r"""Blocks as the Markdown of a notebook: ``$...$`` mathematics, tables, figures as images in the text.

A notebook from a colleague is untrusted, and what it shows must survive that: Markdown cells lose scripts,
styles sheets, MathML and inline SVG, but keep data-URI images, tables and inline styles (tried in JupyterLab
4). Every name and title is somebody's free text: each character that means something to Markdown, HTML or
MathJax is written as a character reference, and text with a dollar or a backslash is kept from MathJax, for
which a reference is no protection.
"""

from __future__ import annotations

import base64
import re
import unicodedata
from collections.abc import Callable, Iterable, Sequence
from typing import Final

from trusscalc.errors import RenderError
from trusscalc.render.mathtext import Latex, Plain
from trusscalc.sheet.blocks import (
    Block,
    Decimals,
    Derivation,
    Formula,
    Heading,
    Inline,
    Items,
    Labelled,
    Lines,
    Listing,
    Paragraph,
    Picture,
    Product,
    Run,
    Seal,
    Table,
    TitleBlock,
    Value,
)
from trusscalc.sheet.marks import Figure

Svg = Callable[[Figure], str]
"""What draws a figure; handed in, because drawing is slow and a test may do without."""

PIXELS: Final = 96 / 25.4
WIDEST_FORMULA: Final = 76
"""Characters of a line that is written in one piece; longer ones may be broken before each term."""
SAFE: Final = frozenset(" ,;:()–—−·'’′“”./?!%=+-≈√")
CARD: Final = "border: 1px solid #b8b8b4; padding: 12px 28px"
"""A step's card has no ground of its own: the front end's tables bring theirs, dark on a dark screen. Figures do."""
SMALL: Final = "font-size: 0.9em"

_latex, _plain = Latex(), Plain()


def markdown(blocks: Iterable[Block], svg: Svg) -> str:
    """Return blocks as Markdown.

    Parameters
    ----------
    blocks : iterable of Block
        Any but a listing, which a notebook has as a code cell.
    svg : callable
        Figure to SVG text.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    return "\n\n".join(_block(block, svg) for block in blocks)


def _block(block: Block, svg: Svg) -> str:  # noqa: C901, PLR0911 - one line for each kind of block
    match block:
        case Heading():
            return _heading(block)
        case Paragraph():
            return _paragraph(block)
        case Items(items):
            return "\n".join(f"- {f'*{escaped(term)}*: ' if term else ''}{inline(content)}" for term, content in items)
        case Lines(lines):
            return "\n\n".join(_labelled(line) for line in lines)
        case Table():
            return _table(block)
        case TitleBlock(fields):
            return _title_block(fields)
        case Seal(lines, side):
            rows = [f"{escaped(line)}: {'&#95;' * 30}" for line in lines]
            return "\n\n".join([*rows, _small(f"seal, {side:g} mm square kept clear on paper")])
        case Picture(figures):
            return "\n\n".join(_figure(figure, svg) for figure in figures)
        case Derivation():
            return _derivation(block, svg)
        case Listing(text, caption):
            fence = "`" * max(3, *(len(run) + 1 for run in re.findall("`+", text)), 3)
            return f"{escaped(caption)}:\n\n{fence}text\n{text}\n{fence}"
    message = f"{type(block).__name__} is a block this version cannot write as Markdown"
    raise RenderError(message)


# --- text -------------------------------------------------------------------------------------------------


def escaped(text: str) -> str:
    r"""Return free text that Markdown, HTML and MathJax leave alone.

    Examples
    --------
    >>> escaped("A<b>–L1")
    'A&#60;b&#62;–L1'
    >>> escaped("P$1$")
    '<span class="mathjax_ignore">P&#36;1&#36;</span>'
    """
    pieces = [character if _is_safe(character) else f"&#{ord(character)};" for character in text]
    written = "".join(pieces).replace("://", "&#58;//")
    return f'<span class="mathjax_ignore">{written}</span>' if "$" in text or "\\" in text else written


def _is_safe(character: str) -> bool:
    return character in SAFE or unicodedata.category(character)[0] in "LMN"


def _opening(written: str) -> str:
    """Return a paragraph whose first sign does not turn it into a list, a heading or a quotation."""
    return re.sub(r"^(\s*\d*)([-+=.)])", lambda found: f"{found[1]}&#{ord(found[2])};", written)


def inline(content: Iterable[Inline | None]) -> str:
    """Return running text with its mathematics."""
    return "".join(_piece(piece) for piece in content if piece is not None)


def _piece(piece: Inline) -> str:
    match piece:
        case Run(text, style):
            written = escaped(text)
            if style == "plain" or not text.strip():
                return written
            tag = "strong" if style == "strong" else "em"
            return f"<{tag}>{written}</{tag}>"
        case Decimals(text):
            return text.replace("-", "−")
        case Value():  # a stacked fraction in the size of running text is too small to read
            return rf"$\displaystyle {_latex.write(piece)}$"
    return f"${_latex.write(piece)}$"


def _small(written: str) -> str:
    return f'<span style="{SMALL}">{written}</span>'


def _heading(block: Heading) -> str:
    words = f"{escaped(block.number)}&ensp;{escaped(block.text)}" if block.number else escaped(block.text)
    right = f'&emsp;<span style="float: right">{escaped(block.right)}</span>' if block.right else ""
    return f"{'#' * block.level} {words}{right}"


def _paragraph(block: Paragraph) -> str:
    written = inline(block.content).strip()
    if block.role == "note":
        return _small(written)
    if block.role in ("conclusion", "caution"):
        return f"<strong>{block.role.capitalize()}.</strong> {written}"
    return _opening(written)


def _title_block(fields: Sequence[tuple[str, str]]) -> str:
    cells = [(f"*{escaped(field)}*", escaped(entry)) for field, entry in fields]
    rows = [cells[place : place + 2] for place in range(0, len(cells), 2)]
    lines = ["| | | | |", "|:--|:--|:--|:--|"]
    for row in rows:
        flat = [text for cell in row for text in cell]
        lines.append(f"| {' | '.join(flat + [''] * (4 - len(flat)))} |")
    return "\n".join(lines)


# --- mathematics ------------------------------------------------------------------------------------------


def _labelled(line: Labelled) -> str:
    label = f"*{escaped(line.label)}*<br>\n" if line.label else ""
    return label + formula(line.formula)


def formula(item: Formula) -> str:
    r"""Return a written line; a long one in pieces, between which a narrow page may break it."""
    if len(_plain.write(item)) <= WIDEST_FORMULA:
        return rf"$\displaystyle {_latex.write(item)}$"
    pieces = []
    for place, product in enumerate(item.left):
        text = _latex.write(Formula((Product(negative=False, factors=product.factors),), ()))
        sign = "-" if product.negative else "" if place == 0 else "+"
        pieces.append(f"{{}}{sign} {text}" if place else f"{sign}{text}")
    if item.right:
        relation = r"\approx" if item.approximately else "="
        pieces.append(f"{{}}{relation} {_latex.write(Formula(item.right, ()))}")
    return " ".join(rf"$\displaystyle {piece}$" for piece in pieces)


# --- tables, figures, steps -------------------------------------------------------------------------------


def _table(block: Table) -> str:
    rule = {"left": ":--", "right": "--:", "centre": ":-:"}
    lines = [
        f"| {' | '.join(escaped(column.head) for column in block.columns)} |",
        f"|{'|'.join(rule[column.align] for column in block.columns)}|",
    ]
    for place, row in enumerate(block.rows):
        cells = ["" if cell is None else inline([cell]) for cell in row]
        if place in block.strong_rows:
            cells = [f"<strong>{cell}</strong>" if cell else "" for cell in cells]
        elif block.totals and place >= len(block.rows) - block.totals:
            cells = [f"<em>{cell}</em>" if place == 0 else cell for place, cell in enumerate(cells)]
        lines.append(f"| {' | '.join(cells)} |")
    caption = ["", _small(escaped(block.caption))] if block.caption else []
    return "\n".join(lines + caption)


def _figure(figure: Figure, svg: Svg) -> str:
    return f"{image(figure, svg)}\n\n{_small(escaped(figure.caption))}" if figure.caption else image(figure, svg)


def image(figure: Figure, svg: Svg) -> str:
    """Return a figure as an image in the text, its size that on paper, its words in ``alt``."""
    data = base64.b64encode(svg(figure).encode()).decode()
    alt = "".join(c if _is_safe(c) else f"&#{ord(c)};" for c in figure.alt)
    size = round(figure.width * PIXELS)
    return f'<img alt="{alt}" src="data:image/svg+xml;base64,{data}" width="{size}" style="background-color: #ffffff">'


def _derivation(block: Derivation, svg: Svg) -> str:
    parts: list[Block] = [block.heading, block.reason]
    parts += [block.picture] if block.picture else []
    parts += [*block.tables, block.lines, block.result]
    parts += [block.check] if block.check else []
    parts += block.notes
    return f'<div style="{CARD}">\n\n{markdown(parts, svg)}\n\n</div>'
