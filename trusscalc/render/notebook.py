"""A sheet as a notebook that reads in full without a kernel, and proves itself again when it is run.

Everything a reader needs stands in Markdown cells. Three code cells hold the truss file, derive the members
again and compare every value with what the sheet states; their outputs are stored as a run gives them.
"""

from __future__ import annotations

import base64
import hashlib
import html
from collections.abc import Iterable
from typing import Any, Final

from trusscalc.render.draw import png, svg
from trusscalc.render.markdown import Svg, image, markdown
from trusscalc.render.text import blocks_text, step_text
from trusscalc.sheet.blocks import Block, Derivation, Heading, Listing, Origin, Sheet
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.inputecho import INPUT
from trusscalc.sheet.marks import Figure

PLACES: Final = 3
"""Decimal places of a check shown in a notebook without further words."""

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
            cells.append(_code(v4, check_source(sheet.origin), 2, [_result(v4, bundle(sheet.summary, draw), 2)]))
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


def file_source(origin: Origin) -> str:
    """Return the cell that holds the truss file."""
    return f"from trusscalc import check_members, reads\n\ntruss_file = reads({as_literal(origin.truss_text)})"


def check_source(origin: Origin) -> str:
    """Return the cell that derives the members again and shows the summary."""
    names = "".join(f"    {name!r},\n" for name in origin.members)
    show = "check" if origin.places == PLACES else f"check.sheet(places={origin.places}, drawings=False)"
    wishes = ""
    if origin.cuts:
        kept = ", ".join(f"{name!r}: truss_file.truss.cut(keep={list(joints)!r})" for name, joints in origin.cuts)
        wishes += f", cuts={{{kept}}}"
    if origin.prefer:
        wishes += f", prefer={origin.prefer!r}"
    return (
        f"members = [\n{names}]\n"
        f"case = truss_file.case({origin.case!r})\n"
        f"check = check_members(truss_file.truss, case, members{wishes})\n"
        f"{show}"
    )


def proof_source(origin: Origin) -> str:
    """Return the cell that compares what was derived again with what the sheet states."""
    rows = "".join(f"    {name!r}: {value!r},\n" for name, value in origin.stated)
    return (
        "from trusscalc.exacttext import to_text\n"
        "from trusscalc.statics.matrix import solve\n\n"
        f"stated = {{\n{rows}}}\n"
        "# all joint equations at once, then the steps: the same values by either way\n"
        "derived = {name: to_text(force) for name, force in solve(truss_file.truss, case).forces.items()}\n"
        "derived |= {name: to_text(force) for step in check.steps for name, force in step.results.items()}\n"
        "differing = [name for name in stated if derived.get(name) != stated[name]]\n"
        'assert not differing, f"derived again, a value differs from what this sheet states: {differing}"\n'
        f'assert check.agreed is {origin.agreed}, "derived again, the verdict differs from what this sheet states"\n'
        f"print({proof_output(origin)!r})"
    )


def proof_output(origin: Origin) -> str:
    """Return what the comparing cell prints when all is as stated."""
    values = f"{len(origin.stated)} value{'s' * (len(origin.stated) != 1)}"
    agreement = "the two routes agree" if origin.agreed else "the two routes do NOT agree, as the sheet says"
    return f"{values} derived again, equal to what this sheet states; {agreement}"


def as_literal(text: str) -> str:
    r"""Return a Python literal of a text, readable where that is safe.

    Examples
    --------
    >>> print(as_literal("format = 1\n"))
    '''format = 1
    '''
    >>> as_literal("a = 'b'''c'")
    '"a = \'b\'\'\'c\'"'
    """
    if "'''" not in text and "\\" not in text and "\r" not in text and not text.startswith("'") and text[-1:] != "'":
        return f"'''{text}'''"
    if text.count("\n") < 2:  # noqa: PLR2004 - one line reads best as one
        return repr(text)
    return "(\n" + "".join(f"    {line!r}\n" for line in text.splitlines(keepends=True)) + ")"


def _metadata(sheet: Sheet) -> dict[str, Any]:
    origin = sheet.origin
    stated = {"truss": origin.truss_text, "stated": dict(origin.stated), "agreed": origin.agreed}
    return {
        "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
        "language_info": {"name": "python"},
        "title": sheet.title,
        "trusscalc": {**record_of(sheet), **stated},
    }
