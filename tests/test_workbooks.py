"""The workbooks an engineer copies: run from top to bottom in fresh kernels, they show what is stored.

When a figure, a sheet or a sentence has changed on purpose, store the outputs again and read what changed::

    python tests/test_workbooks.py --store                    # all
    python tests/test_workbooks.py --store chosen-members     # one

Text, tables and mathematics must be equal to the letter. Drawings are compared as SVG: every line, sign and label, with
numbers equal to 0.02 points, because another release of the drawing library may round its last digit otherwise, and
shapes its letters itself. The pixels beside an SVG are not compared again.
"""

from __future__ import annotations

import base64
import difflib
import hashlib
import os
import re
import shutil
import sys
from collections.abc import Iterator
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any
from unittest.mock import patch

import nbformat
import pytest
from nbclient import NotebookClient
from nbclient.exceptions import CellExecutionError

import trusscalc

ROOT = Path(__file__).parents[1]
FOLDER = ROOT / "workbooks"
WORKBOOKS = sorted(FOLDER.glob("*.ipynb"))
CAUTION = ("licensed engineer", "local codes")
LIVE = "application/vnd.jupyter.widget-view+json"
KERNEL = {
    "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
    "language_info": {"name": "python"},
}
TOLERANCE = 0.02
"""Points in a drawing that make no difference on paper: 7 micrometres."""
FROM_HERE = re.compile(r"/(?:tmp|home|root|var|usr|work|Users|private)/|[A-Z]:\\|0x[0-9a-f]{6,}|site-packages")
"""What only one machine or one run would show."""
EMBEDDED = re.compile(r'data:image/svg\+xml;base64,([^"]+)')
NUMBER = re.compile(r"-?\d+(?:\.\d+)?(?:e[-+]?\d+)?")
LETTER_SHAPES = re.compile(r"<metadata>.*?</metadata>|<defs>.*?</defs>|<!DOCTYPE.*?>|<\?xml.*?\?>", re.DOTALL)
NAMES_OF_SHAPES = re.compile(r'((?:xlink:)?href="#|id=")[^"]*"')

Shown = dict[str, str]
"""What one cell shows, by kind: ``1 text/markdown`` and so on."""


# --- running ----------------------------------------------------------------------------------------------


def run(path: Path) -> Any:
    """Return a workbook after a run from top to bottom, in a copy of its folder that is thrown away."""
    with TemporaryDirectory() as place, patch.dict(os.environ, IPYTHONDIR=place):
        there = Path(place, "workbooks")
        shutil.copytree(FOLDER, there, ignore=shutil.ignore_patterns(".*"))
        book = nbformat.read(there / path.name, as_version=4)
        for cell in book.cells:
            if cell.cell_type == "code":
                cell.outputs, cell.execution_count = [], None
        before = sorted(file.name for file in there.iterdir())
        client = NotebookClient(
            book, timeout=300, kernel_name="python3", record_timing=False, resources={"metadata": {"path": str(there)}}
        )
        try:
            client.execute()
        except CellExecutionError as problem:
            name = next(
                name for name, cell in cells(book) if "error" in [o.output_type for o in cell.get("outputs", [])]
            )
            message = f"{path.name}, {name}, does not run: {problem.ename}: {problem.evalue}"
            raise AssertionError(message) from None
        left = sorted(file.name for file in there.iterdir())
        assert before == left, f"{path.name} leaves files behind: {sorted(set(left) - set(before))}"
    return book


def stored_form(book: Any) -> str:
    """Return the text a workbook is stored as: ids from place and content, nothing of this machine."""
    for place, cell in enumerate(book.cells):
        cell["id"] = cell_id(place, cell.source)
        cell["metadata"] = {}
        if cell.cell_type == "code":
            cell["outputs"] = filed(cell.outputs)
    book["metadata"] = KERNEL
    nbformat.validate(book)
    return str(nbformat.writes(book)).rstrip("\n") + "\n"


def filed(outputs: list[Any]) -> list[Any]:
    """Return outputs as they stay on file: nothing live, and what was printed in one piece, however it was cut."""
    joined: list[Any] = []
    for output in outputs:
        if LIVE in output.get("data", {}):
            continue  # its static form stands beside it
        if joined and output.output_type == "stream" == joined[-1].output_type and output.name == joined[-1].name:
            joined[-1]["text"] += output.text
        else:
            joined.append(output)
    return joined


def cell_id(place: int, source: str) -> str:
    """Return the id of a cell."""
    return f"{place:02d}-{hashlib.sha256(source.encode()).hexdigest()[:12]}"


# --- what is shown ----------------------------------------------------------------------------------------


def shown(cell: Any) -> Shown:
    """Return everything a cell shows."""
    found: Shown = {}
    for output in filed(cell.get("outputs", [])):
        if output.output_type == "stream":
            found[f"{len(found)} {output.name}"] = output.text
        elif output.output_type == "error":
            found["error"] = output.evalue
        else:
            place = len(found)
            found |= {f"{place} {kind}": output.data[kind] for kind in sorted(output.data)}
    return found


def difference(stored: Shown, again: Shown) -> str:
    """Return the first difference in a few lines, or ''."""
    if list(stored) != list(again):
        return f"stored are {list(stored)}, a run shows {list(again)}"
    for kind, text in stored.items():
        if kind.endswith("image/png") and any(other.endswith("svg+xml") for other in stored):
            continue
        found = text_difference(*(EMBEDDED.sub("(drawing)", each) for each in (text, again[kind])))
        if not found:
            pairs = zip(drawings(kind, text), drawings(kind, again[kind]), strict=True)
            found = next((told for one, other in pairs if (told := drawing_difference(one, other))), "")
        if found:
            return f"{kind}:\n{found}"
    return ""


def text_difference(stored: str, again: str) -> str:
    """Return how two texts differ, or ''; drawings are compared otherwise."""
    if stored == again or (stored.lstrip().startswith("<?xml") and again.lstrip().startswith("<?xml")):
        return ""
    lines = difflib.unified_diff(stored.split("\n"), again.split("\n"), "stored", "again", n=0, lineterm="")
    return "\n".join(line[:300] for _, line in zip(range(12), lines, strict=False))


def drawings(kind: str, text: str) -> list[str]:
    """Return the drawings in an output."""
    if kind.endswith("svg+xml"):
        return [text]
    return [base64.b64decode(data).decode() for data in EMBEDDED.findall(text)]


def drawing_difference(stored: str, again: str) -> str:
    """Return how two drawings differ, or ''."""
    if stored == again:
        return ""
    one, other = (NAMES_OF_SHAPES.sub(r"\1", LETTER_SHAPES.sub("", each)) for each in (stored, again))
    for line, changed in zip(one.split("\n"), other.split("\n"), strict=False):
        numbers = list(zip(NUMBER.findall(line), NUMBER.findall(changed), strict=False))
        moved = any(abs(float(a) - float(b)) > TOLERANCE for a, b in numbers)
        if moved or NUMBER.sub("#", line) != NUMBER.sub("#", changed):
            return f"drawing, stored {line.strip()[:120]!r}, again {changed.strip()[:120]!r}"
    same_length = one.count("\n") == other.count("\n")
    return "" if same_length else "drawing: one has more marks than the other"


def cells(book: Any) -> Iterator[tuple[str, Any]]:
    """Yield each cell with a name a person can find it by."""
    for place, cell in enumerate(book.cells, 1):
        first = cell.source.strip().split("\n")[0][:60]
        yield f"cell {place} ({first!r})", cell


# --- tests ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", WORKBOOKS, ids=lambda path: path.stem)
def test_a_run_shows_what_is_stored(path: Path) -> None:
    """In a fresh kernel, every cell gives its stored outputs and leaves no file behind."""
    stored = nbformat.read(path, as_version=4)
    again = run(path)
    told = []
    for (name, before), (_, after) in zip(cells(stored), cells(again), strict=True):
        found = difference(shown(before), shown(after))
        if found:
            told.append(f"{path.name}, {name}, {found}")
    assert not told, "\n\n".join([*told, f"If that is meant: python tests/test_workbooks.py --store {path.stem}"])


@pytest.mark.parametrize("path", WORKBOOKS, ids=lambda path: path.stem)
def test_stored_as_it_should_be(path: Path) -> None:
    """Valid, run in order, the stored form to the byte, nothing live, nothing of one machine, and the caution."""
    text = path.read_text(encoding="utf-8")
    book = nbformat.reads(text, as_version=4)
    nbformat.validate(book)
    assert (book.nbformat, book.nbformat_minor) == (4, 5)
    assert stored_form(book) == text, f"{path.name}: store it by python tests/test_workbooks.py --store {path.stem}"
    code = [cell for cell in book.cells if cell.cell_type == "code"]
    assert [cell.execution_count for cell in code] == list(range(1, len(code) + 1)), f"{path.name}: not run in order"
    assert "widget" not in text
    for name, cell in cells(book):
        for kind, output in {"source": cell.source, **shown(cell)}.items():
            if not kind.endswith("image/png"):
                local = FROM_HERE.search(EMBEDDED.sub("", output).replace("http://www.w3.org", ""))
                assert local is None, f"{path.name}, {name}, {kind}: {local and local[0]!r} holds on one machine only"
    assert book.cells[0].source.startswith("# ")
    for words in CAUTION:
        assert words in book.cells[-1].source.lower().replace("\n", " "), f"{path.name}: the last cell is the caution"


def test_cells_are_short_enough_to_copy() -> None:
    """No code cell has more than 24 lines or a line wider than 120 signs."""
    for path in WORKBOOKS:
        for name, cell in cells(nbformat.read(path, as_version=4)):
            lines = cell.source.split("\n")
            if cell.cell_type == "code":
                assert len(lines) <= 24, f"{path.name}, {name}"
                assert max(map(len, lines)) <= 120, f"{path.name}, {name}"


def test_every_public_name_is_told() -> None:
    """Each name of the package stands in README or in a workbook."""
    books = [nbformat.read(path, as_version=4) for path in WORKBOOKS]
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    text += "\n".join(cell.source for book in books for cell in book.cells)
    missing = [name for name in trusscalc.__all__ if not re.search(rf"\b{name}\b", text)]
    assert not missing


def test_files_named_in_readme_are_there() -> None:
    """What README points to beside it exists."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    named = set(re.findall(r"\bworkbooks/[\w.-]+\w", text))
    assert len(named) >= 2
    assert [name for name in sorted(named) if not (ROOT / name).is_file()] == []


# --- the comparison is no formality -----------------------------------------------------------------------


def test_a_changed_digit_word_or_line_is_found() -> None:
    """Negative controls: text, mathematics, table, a label and a line of a drawing, a missing output."""
    drawing = '<?xml version="1.0"?>\n<svg>\n<!-- U4 -->\n<path d="M 1.5 2.25 L 10 20"/>\n</svg>\n'

    def image(text: str) -> Shown:
        return {"0 text/html": f'<img src="data:image/svg+xml;base64,{base64.b64encode(text.encode()).decode()}">'}

    assert difference({"stdout": "1.234 kN"}, {"stdout": "1.235 kN"})
    assert difference({"0 text/markdown": r"$\frac{1}{2}$"}, {"0 text/markdown": r"$\frac{1}{3}$"})
    assert difference({"0 text/plain": "T"}, {})
    assert not difference(image(drawing), image(drawing.replace("2.25", "2.2501")))
    for changed in (("2.25", "2.35"), ("U4", "U5"), ("L 10 20", "L 10 20 z"), ("</svg>", "<path/>\n</svg>")):
        assert difference(image(drawing), image(drawing.replace(*changed))), changed
        assert drawing_difference(drawing, drawing.replace(*changed)), changed


# --- storing ----------------------------------------------------------------------------------------------


def main(arguments: list[str]) -> int:
    """Store the outputs of all workbooks, or of those named, again."""
    if arguments[:1] != ["--store"]:
        print(__doc__)  # noqa: T201
        return 2
    wanted = [Path(name).stem for name in arguments[1:]]
    unknown = set(wanted) - {path.stem for path in WORKBOOKS}
    if unknown:
        print(f"no such workbook: {', '.join(sorted(unknown))}")  # noqa: T201
        return 2
    for path in WORKBOOKS:
        if wanted and path.stem not in wanted:
            continue
        before = path.read_text(encoding="utf-8")
        text = stored_form(run(path))
        path.write_text(text, encoding="utf-8", newline="\n")
        print(f"{path.name}: {'as before' if text == before else f'stored again, {len(text):,} characters'}")  # noqa: T201
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
