"""The sheet as a notebook: valid, harmless, complete without a kernel, equal when run again."""

from __future__ import annotations

import hashlib
import html
import json
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import nbformat
import pytest
import sheet_cases
from nbclient import NotebookClient
from test_text import Unknown

import trusscalc.display
from trusscalc import stiffness
from trusscalc.errors import RenderError
from trusscalc.files import reads
from trusscalc.membercheck import check_members
from trusscalc.render.markdown import escaped, markdown
from trusscalc.render.notebook import as_literal, bundle, figure_bundle, notebook, step_bundle
from trusscalc.render.text import text
from trusscalc.sheet import blocks
from trusscalc.sheet.compose import compose, derivation
from trusscalc.sheet.figures import truss_figure
from trusscalc.sheet.marks import Figure

GOLDEN = Path(__file__).parent / "golden"
HERE = Path(__file__).parent


def no_drawing(figure: Figure) -> str:
    """Stand in for the drawing of a figure."""
    return f"<svg>{html.escape(figure.alt)}</svg>"


def cells(sheet: blocks.Sheet, kind: str) -> list[str]:
    """Return the sources of a notebook's cells of one kind."""
    book = nbformat.reads(notebook(sheet, draw=no_drawing), as_version=4)
    return [cell.source for cell in book.cells if cell.cell_type == kind]


def test_golden_notebook() -> None:
    """One whole notebook without drawings, read once by eye."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False)
    assert notebook(sheet) == (GOLDEN / "warren.ipynb").read_text(encoding="utf-8")


def test_valid_with_distinct_ids_and_a_record() -> None:
    """Version 4.5, ids from place and content, and what the sheet was derived from."""
    sheet = compose(sheet_cases.roof())
    book = nbformat.reads(notebook(sheet, draw=no_drawing), as_version=4)
    nbformat.validate(book)
    assert (book.nbformat, book.nbformat_minor) == (4, 5)
    assert len({cell.id for cell in book.cells}) == len(book.cells)
    record = book.metadata["trusscalc"]
    assert record["input"] == hashlib.sha256(record["truss"].encode()).hexdigest()
    assert reads(record["truss"]).truss.title == "Store roof"
    assert record["agreed"] is True


def test_every_step_is_a_card_with_its_figure() -> None:
    """One Markdown cell for each step, its figures inside as images with words."""
    check = sheet_cases.k_truss()
    cards = [source for source in cells(compose(check, detail="all"), "markdown") if source.startswith("<div")]
    assert len(cards) == len(check.steps)
    for card in cards:
        assert re.search(r'<img alt="[^"]{20,}" src="data:image/svg\+xml;base64,', card)
        assert "<svg" not in card
        assert "<math" not in card


def test_every_number_is_in_the_markdown_too() -> None:
    """Decimals of all members, reactions and steps are read without a kernel."""
    for make in (sheet_cases.arch, sheet_cases.hexagon, sheet_cases.many_loads):
        check = make()
        written = "\n".join(cells(compose(check, drawings=False), "markdown"))
        for step in check.steps:
            for force in step.results.values():
                assert f"{float(check.case.value(force)):.3f}".replace("-", "−").replace("−0.000", "0.000") in written


# --- hostile names ----------------------------------------------------------------------------------------


def outside_mathematics(source: str) -> str:
    """Return Markdown without its formulas and without text that is kept from MathJax."""
    without = re.sub(r'<span class="mathjax_ignore">[^<]*</span>', "", source)
    return re.sub(r"\$[^$]*\$", "", without)


def test_hostile_names_stay_text() -> None:
    """No markup of a name survives; tables keep their columns; dollars are in pairs."""
    sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT)
    for source in cells(sheet, "markdown"):
        assert not re.search(r"<(?!/?(?:div|span|strong|em|br|img)\b)[a-zA-Z/!]", source), source
        assert (
            "onerror=" not in re.sub(r'alt="[^"]*"', "", source).replace("onerror=alert", "")
            or "<img src" not in source
        )
        assert source.replace("data:image/svg+xml;base64,", "").count("$") % 2 == 0
        assert "$" not in outside_mathematics(source)
        assert "\\" not in outside_mathematics(source)
        for table in re.findall(r"(?m)(?:^\|.*\|$\n?)+", source):
            columns = {len(re.findall(r"(?<!\\)\|", line)) for line in table.strip().splitlines()}
            assert len(columns) == 1, table


def test_hostile_names_are_still_read() -> None:
    """What a browser shows is the name as it was given."""
    sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT, drawings=False)
    shown = html.unescape(re.sub(r"<[^>]+>", "", "\n".join(cells(sheet, "markdown"))))
    for name in sheet_cases.HOSTILE:
        assert name in shown
    assert sheet_cases.HOSTILE_PROJECT.project in shown


@pytest.mark.parametrize(
    "given",
    [
        "1. x",
        "- x",
        "# x",
        "> x",
        "a *b* _c_ `d`",
        "[x](javascript:y)",
        "~~x~~",
        "![x](y)",
        "http://x",
        "&lt;",
        "a  b",
        "💥",
    ],
)
def test_escaped_text_holds_no_markup(given: str) -> None:
    """Only letters, digits, references and harmless signs are left; a browser reads the text given."""
    written = escaped(given)
    assert html.unescape(written) == given
    assert not set('*_`[]|<>~"{}^@') & set(written)
    paragraph = markdown([blocks.Paragraph((blocks.Run(given),))], no_drawing)
    assert not re.match(r"\s*(?:[-+>#=]|\d+[.)])", paragraph)


# --- run again --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "given", ["format = 1\n", "a = 'x'", "'''", "x\\", "a\r\nb\n", 'q = """\n', "\\u0041\n\n'\n", "", "'"]
)
def test_the_truss_text_survives_its_literal(given: str) -> None:
    """The literal in the first code cell is the text, byte for byte."""
    assert eval(as_literal(given), {"__builtins__": {}}) == given  # noqa: S307 - literals only


def run_again(source: str, tmp_path: Path) -> Any:
    """Return a notebook after a run from top to bottom in a fresh kernel."""
    book = nbformat.reads(source, as_version=4)
    return NotebookClient(
        book, timeout=120, kernel_name="python3", resources={"metadata": {"path": str(tmp_path)}}
    ).execute()


def test_runs_again_with_equal_outputs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Every stored output is what a run gives, and the last cell proves every value."""
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT, drawings=False)
    source = notebook(sheet)
    stored = nbformat.reads(source, as_version=4)
    again = run_again(source, tmp_path)
    for before, after in zip(stored.cells, again.cells, strict=True):
        assert before.get("outputs") == after.get("outputs")
    assert "equal to what this sheet states" in again.cells[-1].outputs[0]["text"]


def test_a_sheet_that_states_something_else_fails_when_run(monkeypatch: pytest.MonkeyPatch) -> None:
    """Negative control, in this process: a changed value or verdict trips the last cell."""
    honest = stiffness.member_forces
    monkeypatch.setattr(stiffness, "member_forces", lambda t, c: {n: f + 1 for n, f in honest(t, c).items()})
    wrong = compose(sheet_cases.roof(), drawings=False)
    monkeypatch.undo()
    with pytest.raises(AssertionError, match="verdict"):
        run_here(cells(wrong, "code"))
    right = compose(sheet_cases.roof(), drawings=False)
    sources = cells(right, "code")
    run_here(sources)
    with pytest.raises(AssertionError, match="value"):
        run_here([*sources[:-1], sources[-1].replace("'D-C': '9*sqrt(5)/4'", "'D-C': '9*sqrt(5)/5'")])


def test_steps_on_another_way_prove_the_same_values() -> None:
    """Forces met only on another way are proven by the joint equations."""
    check = sheet_cases.k_truss()
    other = check_members(check.truss, check.case, ["U2-U3"], prefer="joints")
    sources = cells(compose(other, drawings=False), "code")
    run_here([*sources[:1], sources[1].replace(", prefer='joints'", ""), sources[2]])


def run_here(sources: list[str]) -> None:
    """Run code cells one after the other."""
    names: dict[str, Any] = {}
    for source in sources:
        exec(source, names)  # noqa: S102 - cells this package wrote


def test_other_places_are_shown_when_run() -> None:
    """A sheet with five places shows five places again."""
    sheet = compose(sheet_cases.roof(), places=5, drawings=False)
    sources = cells(sheet, "code")
    assert "places=5" in sources[1]
    names: dict[str, Any] = {}
    exec("\n".join(sources[:2]).rsplit("\n", 1)[0], names)  # noqa: S102 - cells this package wrote
    again = names["check"].sheet(places=5, drawings=False)
    assert bundle(again.summary) == bundle(sheet.summary)


PROGRAM = """
import hashlib, sheet_cases
from trusscalc.sheet.compose import compose
from trusscalc.render.notebook import notebook
from trusscalc.render.text import text
sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT)
print(hashlib.sha256((notebook(sheet) + text(sheet)).encode()).hexdigest())
"""


def test_two_processes_write_equal_bytes() -> None:
    """With different hash seeds: no order of a set, no clock, no random id."""
    digests = set()
    for seed in ("1", "2"):
        environment = os.environ | {"PYTHONHASHSEED": seed, "PYTHONPATH": str(HERE)}
        done = subprocess.run(
            [sys.executable, "-c", PROGRAM], env=environment, capture_output=True, text=True, check=True
        )
        digests.add(done.stdout.strip())
    assert len(digests) == 1


# --- every block in every renderer ------------------------------------------------------------------------


def test_every_kind_of_block_is_on_the_golden_sheet_and_in_every_renderer() -> None:
    """A new block cannot be forgotten: it has to appear here, and each renderer has to know it."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, detail="all")
    kinds = {type(block) for block in sheet.blocks}
    step = next(block for block in sheet.blocks if isinstance(block, blocks.Derivation))
    kinds |= {type(step.lines)}
    assert kinds == set(blocks.Block.__args__)
    assert text(sheet)
    assert json.loads(notebook(sheet, draw=no_drawing))
    for block in (*sheet.blocks, step.lines):
        assert markdown([block], no_drawing)


def test_an_unknown_block_is_refused() -> None:
    """In a filed sheet a skipped piece is a wrong sheet."""
    with pytest.raises(RenderError, match="Unknown"):
        markdown([Unknown()], no_drawing)  # type: ignore[list-item]


# --- what results look like in a notebook -----------------------------------------------------------------


def test_rich_display() -> None:
    """Markdown and words for results, an image with words for figures; nothing that hides or gets flattened."""
    check = sheet_cases.roof()
    card = derivation(check, 4)
    for shown in (
        trusscalc.display.CONVENIENCES[type(check)]["_repr_mimebundle_"](check),
        step_bundle(card, no_drawing),
        trusscalc.display.CONVENIENCES[type(check.steps[0])]["_repr_mimebundle_"](check.steps[3], include=None),
        trusscalc.display.CONVENIENCES[type(check.steps[0].cut)]["_repr_mimebundle_"](check.steps[3].cut),
    ):
        assert set(shown) == {"text/markdown", "text/plain"}
    figure = figure_bundle(truss_figure(check.truss))
    assert set(figure) == {"text/html", "image/svg+xml", "image/png", "text/plain"}
    assert "<svg" not in figure["text/html"]
    assert re.search(r'<img alt="[^"]{10,}"', figure["text/html"])
