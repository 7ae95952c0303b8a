"""A sheet as a notebook that reads in full without a kernel, and proves itself again when it is run.

Everything a reader needs stands in Markdown cells. Three code cells hold the truss file, derive the members
again and compare every value with what the sheet states; their outputs are stored as a run gives them.
"""

from __future__ import annotations

import base64
import hashlib
import html
from collections.abc import Iterable
from typing import Any

from trusscalc.render.codecells import PLACES, as_literal, file_source, proof_output, proof_source, result_source
from trusscalc.render.draw import png, svg
from trusscalc.render.markdown import Svg, image, markdown
from trusscalc.render.text import blocks_text, step_text
from trusscalc.sheet.blocks import Block, Derivation, Heading, Listing, Sheet
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.inputecho import INPUT
from trusscalc.sheet.marks import Figure

Bundle = dict[str, str]


def notebook(sheet: Sheet, *, draw: Svg = svg) -> str:
    """Return the notebook's JSON text: valid version 4.5, the same bytes for the same sheet.

    Raises
    ------
    RenderError
        For a block this version does not know.
    """
    import nbformat  # noqa: PLC0415 - slow where JupyterLab is installed
    from nbformat import v4  # noqa: PLC0415

    cells: list[Any] = []
    parts = _parts(sheet.blocks)
    holder = _holder(parts)
    for part in parts:
        if not isinstance(part[0], Listing):  # a code cell holds the truss file instead
            cells.append(v4.new_markdown_cell(markdown(part, draw)))
        if part is holder:
            cells.append(_code(v4, file_source(sheet.origin), 1, []))
            cells.append(_code(v4, result_source(sheet.origin), 2, [_result(v4, bundle(sheet.summary, draw), 2)]))
    cells.append(v4.new_markdown_cell("## Derived again\n\nRun all cells: the last one compares every value."))
    said = v4.new_output("stream", name="stdout", text=proof_output(sheet.origin) + "\n")
    cells.append(_code(v4, proof_source(sheet.origin), 3, [said]))
    for place, cell in enumerate(cells):
        cell["id"] = f"{place:03d}-{hashlib.sha256(cell['source'].encode()).hexdigest()[:12]}"
    book = v4.new_notebook(cells=cells, metadata=_metadata(sheet))
    nbformat.validate(book)
    return str(nbformat.writes(book)).rstrip("\n") + "\n"


def bundle(blocks: Iterable[Block], draw: Svg = svg) -> Bundle:
    """Return blocks in the types a notebook shows, best first for the front ends that read Markdown."""
    blocks = tuple(blocks)
    return {"text/markdown": markdown(blocks, draw), "text/plain": blocks_text(blocks)}


def step_bundle(derivation: Derivation, draw: Svg = svg) -> Bundle:
    """Return one step as a card."""
    return {"text/markdown": markdown([derivation], draw), "text/plain": step_text(derivation)}


def figure_bundle(figure: Figure) -> dict[str, Any]:
    """Return a figure: an image with its words for readers of HTML, SVG and PNG for the rest."""
    caption = f"<figcaption>{_quoted(figure.caption)}</figcaption>" if figure.caption else ""
    return {
        "text/html": f"<figure>{image(figure, svg)}{caption}</figure>",
        "image/svg+xml": svg(figure),
        "image/png": base64.b64encode(png(figure)).decode(),
        "text/plain": f"{figure.alt} {figure.caption}".strip(),
    }


def _quoted(text: str) -> str:
    """Return text for HTML that MathJax leaves alone."""
    return f'<span class="mathjax_ignore">{html.escape(text)}</span>'


# --- cells ------------------------------------------------------------------------------------------------


def _parts(blocks: Iterable[Block]) -> list[list[Block]]:
    """Return the blocks cell by cell: a new one at every heading, step and listing."""
    parts: list[list[Block]] = []
    for block in blocks:
        alone = isinstance(block, (Derivation, Listing))
        begins = alone or not parts or isinstance(parts[-1][0], (Derivation, Listing))
        if begins or (isinstance(block, Heading) and block.level > 1):
            parts.append([])
        parts[-1].append(block)
    return parts


def _holder(parts: list[list[Block]]) -> list[Block]:
    """Return the part that the truss file belongs to: its listing, else the tables of the input, else the last."""
    listing = next((part for part in parts if isinstance(part[0], Listing)), None)
    tables = (part for part in parts if isinstance(part[0], Heading) and part[0].text == INPUT)
    return listing or next(tables, parts[-1])


def _code(v4: Any, source: str, count: int, outputs: list[Any]) -> Any:
    return v4.new_code_cell(source, execution_count=count, outputs=outputs)


def _result(v4: Any, data: Bundle, count: int) -> Any:
    return v4.new_output("execute_result", data=data, execution_count=count, metadata={})


def _metadata(sheet: Sheet) -> dict[str, Any]:
    origin = sheet.origin
    stated = {"truss": origin.truss_text, "stated": dict(origin.stated), "agreed": origin.agreed}
    return {
        "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
        "language_info": {"name": "python"},
        "title": sheet.title,
        "trusscalc": {**record_of(sheet), **stated},
    }


__all__ = ["PLACES", "Bundle", "as_literal", "bundle", "figure_bundle", "notebook", "step_bundle"]
