"""A filed sheet derived again: whatever was altered, by hand, by version or by a faulty program, is found and named."""

from __future__ import annotations

import base64
import inspect
import json
import re
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import nbformat
import pytest
import sheet_cases
from nbclient import NotebookClient

import trusscalc
import trusscalc.sheet.derivation
from trusscalc import membercheck, recheck, stiffness
from trusscalc.__main__ import main
from trusscalc.display import save
from trusscalc.errors import FileFormatError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members
from trusscalc.project import Project
from trusscalc.recheck import notebooks, pages
from trusscalc.recheck.differences import Difference, differing, excerpts
from trusscalc.render.html import html
from trusscalc.render.notebook import notebook
from trusscalc.sheet import record
from trusscalc.sheet.blocks import Sheet
from trusscalc.sheet.compose import compose
from trusscalc.sheet.digest import content_digest, record_of
from trusscalc.truss import Truss

FILE = """\
format = 1
title = "Jib"
[joints]
A = [0, 0]
B = [4, 0]
C = [2, "2*sqrt(3)"]
[members]
rafters = ["A-C", "C-B"]
tie = ["A-B"]
[supports]
A = "pin"
B = "roller"
[cases.snow]
C = [0, -12]
[combinations.heavy]
snow = "1.5"
[project]
project = "Wharf"
revision = "B"
[project.names]
A = "N7"
"""
KINDS = (".html", ".ipynb")


def small(*, drawings: bool = True, members: tuple[str, ...] = ("A-C",)) -> Sheet:
    """Return the sheet of a triangle."""
    stated = trusscalc.reads(FILE)
    check = check_members(stated.truss, stated.case("snow"), members)
    return compose(check, stated.project, truss_text=FILE, drawings=drawings)


def altered(path: Path, change: Callable[[str], str]) -> recheck.RecheckReport:
    """Return what recheck says of a file after a change."""
    text = path.read_text(encoding="utf-8")
    changed = change(text)
    assert changed != text
    path.write_text(changed, encoding="utf-8")
    return recheck.recheck(path)


def told(report: recheck.RecheckReport) -> str:
    """Return the report as one text."""
    return "\n".join(report.lines())


# --- nothing changed --------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", KINDS)
@pytest.mark.parametrize("case", sheet_cases.ALL)
def test_an_unaltered_sheet_passes(case: str, suffix: str, tmp_path: Path) -> None:
    """Written from records without a truss file, with the drawings."""
    project = sheet_cases.HOSTILE_PROJECT if case == "hostile" else None
    path = save(compose(sheet_cases.ALL[case](), project), tmp_path / f"sheet{suffix}")
    report = recheck.recheck(path)
    assert report.matches, told(report)
    assert report.compared["figures"]
    assert report.compared["steps"]


@pytest.mark.parametrize("suffix", KINDS)
def test_every_option_is_derived_again(suffix: str, tmp_path: Path) -> None:
    """Own cut, leaning, decimal places, no drawings, a combination, another title block, a group without a name."""
    joints = {f"L{i}": (4 * i, 0) for i in range(5)} | {f"U{i}": (4 * i, 3) for i in (1, 2, 3)}
    web = ["L0-U1", "L1-U1", "U1-L2", "L2-U2", "L2-U3", "L3-U3", "U3-L4"]
    chords = [f"L{i}-L{i + 1}" for i in range(4)] + ["U1-U2", "U2-U3"]
    truss = Truss(joints, {"web": web, "": chords}, {"L0": "pin", "L4": "roller"})
    cuts = {"U1-L2": truss.cut(through=["L1-L2", "U1-L2", "U1-U2"])}  # type: ignore[attr-defined]
    case = LoadCase("uneven", {"L1": (1, -3), "L3": (0, "-P")}, symbols={"P": 7})
    check = check_members(truss, case, "all", cuts=cuts, prefer="joints")
    project = Project(revision="C", names={"U1": "17", "L1-U1": "post 1", "L1": "16"})
    path = save(compose(check, project, places=5, drawings=False), tmp_path / f"sheet{suffix}")
    report = recheck.recheck(path)
    assert report.matches, told(report)


def test_no_way_of_composing_is_forgotten() -> None:
    """Whatever a sheet can be asked for is recorded on it, or it could not be derived again."""
    asked = set(inspect.signature(compose).parameters) - {"check", "truss_text"}
    assert asked <= set(record_of(small(drawings=False)))
    # a check without its own checks makes no sheet
    asked = set(inspect.signature(check_members).parameters) - {"truss", "own_checks"}
    assert asked <= set(record_of(small(drawings=False)))


@pytest.mark.parametrize("suffix", KINDS)
def test_line_ends_of_another_system_pass(suffix: str, tmp_path: Path) -> None:
    """A file that went through mail or version control, and a truss file with such line ends."""
    text = FILE.replace("\n", "\r\n")
    stated = trusscalc.reads(text)
    check = check_members(stated.truss, stated.case("heavy"), "all")
    path = save(compose(check, stated.project, truss_text=text, drawings=False), tmp_path / f"sheet{suffix}")
    assert recheck.recheck(path).matches
    path.write_bytes(path.read_bytes().replace(b"\r\n", b"\n").replace(b"\n", b"\r\n"))
    assert recheck.recheck(path).matches


def test_a_notebook_that_was_run_again_passes(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Counts, times and what it says of the kernel may change; a truss that warns while it is read, too."""
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    joints = {"A": (0, 0), "B": (4, 0), "C": (2, 3), "D": (2, 0)}
    with pytest.warns(trusscalc.TrusscalcWarning, match="D"):
        truss = Truss(joints, ["A-B", "A-C", "C-B", "C-D", "A-D"], {"A": "pin", "B": "roller"})
    check = check_members(truss, LoadCase("pull", {"C": (3, -1)}), ["A-C"])
    path = save(compose(check), tmp_path / "sheet.ipynb")
    book = nbformat.read(path, as_version=4)
    book.metadata["kernelspec"]["display_name"] = "another kernel"
    NotebookClient(book, timeout=120, kernel_name="python3", resources={"metadata": {"path": str(tmp_path)}}).execute()
    assert "TrusscalcWarning" in json.dumps(book)
    book.metadata["language_info"]["version"] = "3.99"
    nbformat.write(book, path)
    report = recheck.recheck(path)
    assert report.matches, told(report)


# --- one digit --------------------------------------------------------------------------------------------


def digits(text: str) -> list[int]:
    """Return the places of all digits."""
    return [place for place, letter in enumerate(text) if letter in "0123456789"]


def with_other_digit(text: str, place: int) -> str:
    """Return a text with one digit raised by one."""
    return f"{text[:place]}{(int(text[place]) + 1) % 10}{text[place + 1 :]}"


def test_any_digit_of_a_page_is_found_where_it_is() -> None:
    """Every one in words, tables, equations, input and record: one difference, which names its place."""
    derived = html(small(drawings=False))
    start = derived.index("<body>")
    steps = [(found.start(), f"step {found[1]}") for found in re.finditer(r'<h3 id="step-(\d+)"', derived)]
    for place in digits(derived)[::3]:
        found = pages.page_differences(with_other_digit(derived, place), derived)
        assert found, derived[place - 20 : place + 20]
        if place < start:
            continue
        assert len(found) == 1
        expected = next((name for at, name in reversed(steps) if at < place), "")
        if expected and place < derived.rindex("<section", 0, derived.index("Cross-check</span>")):
            assert found[0].where.startswith((expected, "Derivation")), (found[0], expected)
        assert found[0].shown != found[0].derived


def test_digits_of_drawings_are_found_like_any_other() -> None:
    """Every 199th of a page with its drawings (every fifth was tried once)."""
    derived = html(small())
    for place in digits(derived)[::199]:
        assert pages.page_differences(with_other_digit(derived, place), derived)


def test_any_digit_of_a_notebook_is_found_where_it_is() -> None:
    """In every source and every stored output; the cell, and in it row, equation or figure, is named."""
    derived = json.loads(notebook(small(drawings=False)))
    tried = 0
    for number, cell in enumerate(derived["cells"]):
        source = "".join(cell["source"])
        for place in digits(source)[::2]:
            changed = json.loads(json.dumps(derived))
            changed["cells"][number]["source"] = with_other_digit(source, place)
            found = notebooks.notebook_differences(changed, derived)
            assert len(found) == 1, source[place - 20 : place + 20]
            assert cell["cell_type"] == "markdown" or found[0].where.startswith("code cell")
            tried += 1
        for output in cell.get("outputs", ()):
            for kind, text in output.get("data", {"text": output.get("text")}).items():
                whole = "".join(text)
                for place in digits(whole)[::2]:
                    changed = json.loads(json.dumps(derived))
                    mine = changed["cells"][number]["outputs"][0]
                    mine.get("data", mine)[kind] = with_other_digit(whole, place)
                    (found,) = notebooks.notebook_differences(changed, derived)
                    assert "output" in found.where
                    tried += 1
    assert tried > 250


@pytest.mark.parametrize(
    ("change", "where", "shown"),
    [
        (lambda t: t.replace("−6.928", "−6.929", 1), "row A–C, column decimal", "−6.929"),
        (lambda t: t.replace(">agrees<", ">differs<", 1), "row A–C, column verdict", "differs"),
        (lambda t: t.replace("kN C</span></h3>", "kN T</span></h3>", 1), "heading", "kN T"),
        (lambda t: t.replace('<mo form="infix">+</mo>', '<mo form="infix">−</mo>', 1), "step", "−"),
        (lambda t: t.replace("Stiff joints add", "Stiff joints never add", 1), "Basis, row 1", "never"),
        (lambda t: t.replace('aria-label="Free body', 'aria-label="free body', 1), "figure 2", "free"),
        (lambda t: t.replace("<h1>", "<h1 hidden>", 1), "heading", "hidden"),
        (lambda t: t.replace("</main>", '<p style="display:none">5 kN</p></main>', 1), "Revisions", "5 kN"),
        (lambda t: t.replace("</main>", "<!-- 5 kN --></main>", 1), "Revisions", "5 kN"),
        (lambda t: t.replace("</body>", "<script>alert(1)</script></body>", 1), "ecord", "alert"),
        (lambda t: t.replace("--ink: #1a1a1a", "--ink: #ffffff", 1), "style", "#ffffff"),
        (lambda t: t.replace('"places": 3', '"places": 4', 1), "", "4"),
        (lambda t: re.sub(r'(<tr><th scope="row"><span>C–B</span>.*?</tr>\n)', "", t, count=1), "Input", ""),
    ],
)
def test_alterations_of_a_page_are_named(change: Callable[[str], str], where: str, shown: str, tmp_path: Path) -> None:
    """Values, verdicts, senses, signs, sentences, alternative text, hidden text, styles, rows left out."""
    report = altered(save(small(), tmp_path / "sheet.html"), change)
    assert not report.matches
    assert any(where in each.where and shown in each.shown for each in report.differences), told(report)


@pytest.mark.parametrize("place", [0.1, 0.5, 0.9])
def test_any_byte_of_a_drawing_is_found(place: float, tmp_path: Path) -> None:
    """In a page and in a notebook, with the number of the figure."""
    sheet = small()

    def in_page(text: str) -> str:
        drawing = re.findall(r"<svg .*?</svg>", text, re.DOTALL)[2]
        at = min(digits(drawing), key=lambda n: abs(n - place * len(drawing)))
        return text.replace(drawing, with_other_digit(drawing, at), 1)

    def in_notebook(text: str) -> str:
        data = re.findall(r"base64,([A-Za-z0-9+/=]+)", text)[2]
        content = bytearray(base64.b64decode(data))
        content[int(place * len(content))] ^= 1
        return text.replace(data, base64.b64encode(content).decode(), 1)

    report = altered(save(sheet, tmp_path / "sheet.html"), in_page)
    assert [each.where.rsplit(", ")[-1] for each in report.differences] == ["figure 3"]
    report = altered(save(sheet, tmp_path / "sheet.ipynb"), in_notebook)
    assert len(report.differences) == 1
    assert "figure 1" in report.differences[0].where  # the figure of its own cell
    assert report.differences[0].where.startswith("step ")


# --- input, version, program ------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", KINDS)
def test_an_edited_input_is_found(suffix: str, tmp_path: Path) -> None:
    """The load in the truss file alone, everything else as it was."""
    path = save(small(), tmp_path / f"sheet{suffix}")
    report = altered(path, lambda text: text.replace("C = [0, -12]", "C = [0, -13]"))
    assert len(report.differences) > 10
    assert "−7.506" in told(report)  # 13/√3, by hand


@pytest.mark.parametrize("suffix", KINDS)
def test_an_input_that_cannot_be_is_a_difference(suffix: str, tmp_path: Path) -> None:
    """Altered so that nothing can be derived: told, with the reason, and exit code 1."""
    path = save(small(), tmp_path / f"sheet{suffix}")
    report = altered(path, lambda text: text.replace("B = [4, 0]", "B = [0, 0]"))
    assert report.differences[0].where == "input"
    assert main(["recheck", str(path)]) == 1


@pytest.mark.parametrize("suffix", KINDS)
def test_another_sheet_of_another_input_passes_with_another_digest(suffix: str, tmp_path: Path) -> None:
    """Edited and written anew it is simply another sheet; the printed digests differ."""
    stated = trusscalc.reads(FILE.replace("-12", "-13"))
    other = compose(check_members(stated.truss, stated.case("snow"), ["A-C"]), stated.project)
    assert recheck.recheck(save(other, tmp_path / f"sheet{suffix}")).matches
    assert content_digest(other) != content_digest(small())


@pytest.mark.parametrize("suffix", KINDS)
def test_another_version_is_found(suffix: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A sheet of version 0.0.9 is not what this version writes, and the report says who wrote it."""
    monkeypatch.setattr(record, "program", lambda: "trusscalc 0.0.9")
    path = save(small(), tmp_path / f"sheet{suffix}")
    monkeypatch.undo()
    report = recheck.recheck(path)
    assert not report.matches
    assert report.written_by == "trusscalc 0.0.9"
    assert "Program" in told(report) or "program" in told(report)


def wrong_stiffness(patch: pytest.MonkeyPatch) -> None:
    """Plant an error in the numeric route."""
    honest = stiffness.member_forces
    patch.setattr(stiffness, "member_forces", lambda t, c: {n: f * 1.001 for n, f in honest(t, c).items()})


def wrong_step(patch: pytest.MonkeyPatch) -> None:
    """Plant an error in the hand route: a step whose results are doubled."""
    honest = membercheck.write_step

    def doubled(*given: Any, **options: Any) -> Any:
        step, tensions = honest(*given, **options)
        results = {name: force + force for name, force in step.results.items()}
        return replace(step, results=results), {name: value + value for name, value in tensions.items()}

    patch.setattr(membercheck, "write_step", doubled)
    patch.setattr("trusscalc.sheet.hence.must_hold", lambda *_: None)
    patch.setattr(trusscalc.sheet.derivation, "must_hold", lambda *_: None)
    patch.setattr("trusscalc.sheet.equations.must_hold", lambda *_: None, raising=False)


def wrong_rounding(patch: pytest.MonkeyPatch) -> None:
    """Plant an error on the way to paper: one decimal that is cut instead of rounded."""
    patch.setattr(
        trusscalc.sheet.derivation, "decimal_text", lambda value, places: f"{float(value) - 0.0004:.{places}f}"
    )


@pytest.mark.parametrize("suffix", KINDS)
@pytest.mark.parametrize("plant", [wrong_stiffness, wrong_step, wrong_rounding])
def test_a_sheet_of_a_faulty_program_fails(
    plant: Callable[[pytest.MonkeyPatch], None], suffix: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Its record and digests are all in order; only deriving again shows it."""
    plant(monkeypatch)
    path = save(small(), tmp_path / f"sheet{suffix}")
    monkeypatch.undo()
    report = recheck.recheck(path)
    assert not report.matches
    assert any("A–C" in each.where or "step" in each.where for each in report.differences), told(report)


# --- notebooks only ---------------------------------------------------------------------------------------


def in_book(change: Callable[[dict[str, Any]], object]) -> Callable[[str], str]:
    """Return a change of a notebook's text from a change of its data."""

    def changed(text: str) -> str:
        book = json.loads(text)
        change(book)
        return json.dumps(book)

    return changed


FOREIGN = {"cell_type": "markdown", "id": "x", "metadata": {}, "source": ["The force is 5 kN."]}


@pytest.mark.parametrize(
    ("change", "where"),
    [
        (lambda book: book["cells"].insert(3, FOREIGN), "not the sheet's"),
        (lambda book: book["cells"].append({**FOREIGN, "cell_type": "raw"}), "not the sheet's"),
        (lambda book: book["cells"].pop(2), "missing"),
        (lambda book: book["cells"][0].update(attachments={"a.png": {"image/png": "AAAA"}}), "attachments"),
        (lambda book: book["cells"][0]["metadata"].update(jupyter={"source_hidden": True}), "metadata, jupyter"),
        (lambda book: book["metadata"].update(widgets={"x": 1}), "notebook metadata, widgets"),
        (lambda book: book["metadata"]["trusscalc"].update(agreed=False), "record, agreed"),
        (lambda book: book["metadata"].update(title="Another"), "title"),
        (lambda book: book["cells"][-1].update(outputs=[]), "output"),
        (
            lambda book: book["cells"][-1]["outputs"].append({"output_type": "stream", "name": "stderr", "text": "x"}),
            "output",
        ),
        (lambda book: book["cells"][-1].update(outputs="x"), "output"),
        (lambda book: book.update(cells="none"), "cells"),
        (lambda book: book.update(extra=1), "notebook, extra"),
        (lambda book: book.update(nbformat=3), "nbformat"),
    ],
)
def test_alterations_of_a_notebook_are_named(
    change: Callable[[dict[str, Any]], object], where: str, tmp_path: Path
) -> None:
    """Cells added, left out or hidden, attachments, widgets, outputs cleared or added, a broken structure."""
    report = altered(save(small(drawings=False), tmp_path / "sheet.ipynb"), in_book(change))
    assert any(where in each.where for each in report.differences), told(report)


def test_what_a_run_leaves_behind_is_left_out(tmp_path: Path) -> None:
    """Counts, times, kernel names, text kept as one piece."""

    def run(book: dict[str, Any]) -> None:
        for cell in book["cells"]:
            cell["source"] = "".join(cell["source"])
            cell["metadata"]["execution"] = {"iopub.status.busy": "2026-03-14T10:00:00Z"}
            if cell["cell_type"] == "code":
                cell["execution_count"] = 17
        book["metadata"]["kernelspec"] = {"name": "other", "display_name": "Other"}
        book["metadata"]["language_info"]["version"] = "3.12"

    assert altered(save(small(drawings=False), tmp_path / "sheet.ipynb"), in_book(run)).matches


# --- files that are no sheets -----------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "content", "told_of"),
    [
        ("a.html", b"<p>hello</p>", "no record"),
        ("a.html", b'<pre id="truss-file">\nx</pre><pre id="record">\n{"a": 1, "a": 2}</pre>', "twice"),
        ("a.html", b'<pre id="truss-file">\nx</pre><pre id="record">\n[1]</pre>', "no JSON object"),
        ("a.html", b'<pre id="truss-file">\nx</pre><pre id="record">\n' + b"[" * 100_000 + b"</pre>", "JSON"),
        ("a.html", b"\xff\xfe", "UTF-8"),
        ("a.ipynb", b"{", "JSON"),
        ("a.ipynb", b"{}", "no record"),
        ("a.ipynb", b'{"metadata": {"trusscalc": {"truss": 5}}}', "no record"),
        ("a.ipynb", b"[" * 100_000, "JSON"),
        ("a.ipynb", b'{"x": ' + b"1" * 6000 + b"}", "JSON"),
        ("a.pdf", b"%PDF", "--against"),
        ("a.txt", b"", "only a filed"),
    ],
)
def test_other_files_are_refused(
    name: str, content: bytes, told_of: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit code 2 and one message, never a traceback."""
    path = tmp_path / name
    path.write_bytes(content)
    with pytest.raises(FileFormatError, match=told_of):
        recheck.recheck(path)
    assert main(["recheck", str(path)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert len(err.splitlines()) == 1


def test_missing_and_too_large(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Neither a missing file, nor a folder, nor one that is too large is read."""
    with pytest.raises(FileFormatError, match="no such file"):
        recheck.recheck(tmp_path / "none.html")
    (tmp_path / "folder.html").mkdir()
    with pytest.raises(FileFormatError, match="no such file"):
        recheck.recheck(tmp_path / "folder.html")
    monkeypatch.setattr(recheck, "LARGEST_SHEET", 10)
    with pytest.raises(FileFormatError, match="too large"):
        recheck.recheck(save(small(drawings=False), tmp_path / "sheet.html"))


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("format", 2),
        ("format", True),
        ("case", "wind"),
        ("case", ["snow"]),
        ("members", []),
        ("members", ["A-Z"]),
        ("members", "all"),
        ("cuts", {"A-C": "A"}),
        ("cuts", {"A-C": ["Z"]}),
        ("prefer", "anything"),
        ("places", 99),
        ("places", "3"),
        ("drawings", 1),
        ("project", {"colour": "red"}),
        ("project", {"project": "a\nb"}),
        ("names", [1]),
    ],
)
def test_a_record_that_cannot_be_is_a_difference(field: str, value: object, tmp_path: Path) -> None:
    """Wrong kinds of entries, unknown names, values out of range: no crash, one difference."""

    def change(book: dict[str, Any]) -> None:
        book["metadata"]["trusscalc"][field] = value

    report = altered(save(small(drawings=False), tmp_path / "sheet.ipynb"), in_book(change))
    assert [each.where for each in report.differences] == ["input"]
    assert "nothing" in report.differences[0].derived


# --- the command ------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", KINDS)
def test_the_command_from_sheet_to_recheck(suffix: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit 0 as written, 1 after one digit; it prints what was compared, and each difference with its place."""
    truss, path = tmp_path / "jib.toml", tmp_path / f"sheet{suffix}"
    truss.write_text(FILE, encoding="utf-8")
    assert main(["sheet", str(truss), "--case", "heavy", "--members", "A-C,A-B", "--out", str(path)]) == 0
    capsys.readouterr()
    assert main(["recheck", str(path)]) == 0
    out, _ = capsys.readouterr()
    assert re.search(r"compared: .*\d+ steps, \d+ equations, \d+ table rows, \d+ figures", out)
    assert "everything shown is as derived again" in out
    path.write_text(path.read_text(encoding="utf-8").replace("10.392", "10.393", 1), encoding="utf-8")
    assert main(["recheck", str(path)]) == 1
    out, _ = capsys.readouterr()
    assert "1 difference:" in out
    assert "10.393" in out
    assert "10.392" in out


def test_a_pdf_against_its_truss_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Byte for byte the same when written again; one byte or another load is found; half an order is refused."""
    pytest.importorskip("typst")
    truss, path = tmp_path / "jib.toml", tmp_path / "sheet.pdf"
    truss.write_text(FILE, encoding="utf-8")
    asked = ["--case", "snow", "--members", "A-C"]
    if main(["sheet", str(truss), *asked, "--out", str(path)]):
        pytest.skip("sheets are not saved as PDF yet")
    order = ["recheck", str(path), "--against", str(truss), *asked]
    assert main(order) == 0
    path.write_bytes(path.read_bytes().replace(b"Wharf", b"Wherf", 1) + b"\n")
    assert main(order) == 1
    capsys.readouterr()
    assert main(["recheck", str(path), "--against", str(truss)]) == 2
    assert "--case" in capsys.readouterr().err


# --- where two texts part ---------------------------------------------------------------------------------


def test_pieces_added_left_out_and_changed() -> None:
    """Changed pieces one by one, others in one block."""
    assert list(differing("abcd", "abcd")) == []
    assert list(differing("abcd", "axcy")) == [(1, 2, 1, 2), (3, 4, 3, 4)]
    assert list(differing("abcd", "abxcd")) == [(2, 2, 2, 3)]
    assert list(differing("abcd", "ad")) == [(1, 3, 1, 1)]
    assert list(differing("", "ab")) == [(0, 0, 0, 2)]
    assert list(differing("a" * 3000, "b" * 2000)) == [(0, 3000, 0, 2000)]


def test_long_texts_are_cut_to_where_they_differ() -> None:
    """Both show the digit that matters."""
    one, other = excerpts("x " * 500 + "12.5" + " y" * 500, "x " * 500 + "12.6" + " y" * 500)
    assert "12.5" in one
    assert "12.6" in other
    assert len(one) < 80
    assert str(Difference("row 1", "", "5")) == "row 1: shown nothing, derived “5”"


def test_a_page_taken_to_pieces_is_the_page() -> None:
    """Whatever stands in it, well made or not."""
    for text in (html(small()), "<svg <math <a>b</svg", "a<b>>c<", "<math>x", "", "<svg>a</math></svg>b"):
        assert "".join(pages.pieces(text)) == text
    assert pages.page_differences("<math><mn>1</mn>", "<math><mn>1</mn></math>")
    assert pages.page_differences("", "<p>a</p>")
