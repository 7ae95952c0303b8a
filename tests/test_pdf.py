"""The sheet as PDF: profile, tags, fonts, text layer, equal bytes, pages, and harmless names."""

from __future__ import annotations

import hashlib
import io
import os
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import pdf_text
import pikepdf
import pytest
import sheet_cases

import trusscalc.display
from trusscalc import stiffness
from trusscalc.errors import RenderError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.project import Project
from trusscalc.render.pdf import UNDATED, pdf
from trusscalc.render.pdfdata import Figures, inline, listing, sheet_data, text
from trusscalc.sheet import blocks
from trusscalc.sheet.compose import compose
from trusscalc.sheet.digest import content_digest
from trusscalc.truss import Truss

HERE = Path(__file__).parent


@pytest.fixture(scope="module")
def sheet() -> blocks.Sheet:
    """Return one sheet with everything: pairs, roots, several figures, other names."""
    return compose(sheet_cases.k_truss(), sheet_cases.PROJECT)


@pytest.fixture(scope="module")
def written(sheet: blocks.Sheet) -> bytes:
    """Return its PDF."""
    return pdf(sheet)


@pytest.fixture
def document(written: bytes) -> Iterator[pikepdf.Pdf]:
    """Return its PDF, opened."""
    with pikepdf.open(io.BytesIO(written)) as opened:
        yield opened


def tagged(node: pikepdf.Object) -> Iterator[pikepdf.Object]:
    """Return every element of the structure below a node."""
    kids = node.get("/K", [])
    for kid in kids if isinstance(kids, pikepdf.Array) else [kids]:
        if isinstance(kid, pikepdf.Dictionary) and "/S" in kid:
            yield kid
            yield from tagged(kid)


def bookmarks(item: pikepdf.Object) -> Iterator[str]:
    """Return the titles of all bookmarks, in order."""
    child = item.get("/First")
    while child is not None:
        yield str(child["/Title"])
        yield from bookmarks(child)
        child = child.get("/Next")


# --- the document -----------------------------------------------------------------------------------------


def test_profile_title_and_language(document: pikepdf.Pdf) -> None:
    """ISO 19005-2 conformance B as the metadata names it (6.6.4 there), title, author, language, tags, no secrets."""
    metadata = document.open_metadata()
    assert metadata["pdfaid:part"] == "2"
    assert metadata["pdfaid:conformance"] == "B"
    assert metadata["dc:title"] == "Independent check of truss member forces: Yard gantry"
    assert metadata["dc:creator"] == ["A. Okafor"]
    assert str(document.Root["/Lang"]) == "en"
    assert document.Root["/MarkInfo"]["/Marked"]
    assert not document.is_encrypted
    assert document.Root["/OutputIntents"][0]["/S"] == "/GTS_PDFA1"


def test_all_fonts_are_embedded(document: pikepdf.Pdf) -> None:
    """Every font descriptor has its font file, and every font its table back to characters."""
    descriptors = [item for item in document.objects if isinstance(item, pikepdf.Dictionary)]
    descriptors = [item for item in descriptors if item.get("/Type") == "/FontDescriptor"]
    names = {str(item["/FontName"]).split("+")[-1] for item in descriptors}
    assert all({"/FontFile", "/FontFile2", "/FontFile3"} & set(item.keys()) for item in descriptors)
    assert any(name.startswith("STIXGeneral") for name in names)
    composite = [item for item in document.objects if isinstance(item, pikepdf.Dictionary)]
    composite = [item for item in composite if item.get("/Subtype") == "/Type0"]
    assert composite
    assert all("/ToUnicode" in item for item in composite)


def test_nothing_active_and_nothing_from_elsewhere(document: pikepdf.Pdf) -> None:
    """No script, no action, no link, no attachment."""
    keys = {key for item in document.objects if isinstance(item, pikepdf.Dictionary) for key in item.keys()}  # noqa: SIM118
    assert not keys & {"/JS", "/AA", "/OpenAction", "/EmbeddedFiles", "/URI", "/Launch", "/AcroForm"}


def test_bookmarks_are_the_headings(sheet: blocks.Sheet, document: pikepdf.Pdf) -> None:
    """Title, parts and steps, each once and in order."""
    heads = [block.heading if isinstance(block, blocks.Derivation) else block for block in sheet.blocks]
    wanted = [f"{head.number}{head.text}" for head in heads if isinstance(head, blocks.Heading)]
    found = [re.sub(r"\s", "", title) for title in bookmarks(document.Root["/Outlines"])]
    assert found == [re.sub(r"\s", "", title) for title in wanted]


def test_figures_and_formulas_have_words(sheet: blocks.Sheet, document: pikepdf.Pdf) -> None:
    """Who cannot see a figure or an equation is told it; tables have head cells."""
    elements = list(tagged(document.Root["/StructTreeRoot"]))
    kinds: dict[str, list[pikepdf.Object]] = {}
    for element in elements:
        kinds.setdefault(str(element["/S"]), []).append(element)
    alts = [str(figure["/Alt"]) for figure in kinds["/Figure"]]
    drawn = [figure for picture in pictures(sheet) for figure in picture.figures]
    assert [alt.startswith(figure.alt) for alt, figure in zip(alts, drawn, strict=True)] == [True] * len(drawn)
    assert all(str(formula["/Alt"]) for formula in kinds["/Formula"])
    assert {"− (3/5) N_M1–L2", "= 0", "−100√13", "< 10^−7"} <= {str(formula["/Alt"]) for formula in kinds["/Formula"]}
    assert {"/H1", "/H2", "/H3", "/Table", "/TH", "/TD"} <= set(kinds)


def pictures(sheet: blocks.Sheet) -> list[blocks.Picture]:
    """Return all pictures of a sheet, those of the steps among them."""
    found = []
    for block in sheet.blocks:
        if isinstance(block, blocks.Picture):
            found.append(block)
        if isinstance(block, blocks.Derivation) and block.picture:
            found.append(block.picture)
    return found


def test_the_date_is_the_title_blocks(sheet: blocks.Sheet) -> None:
    """An ISO date is taken; any other text, or none, gives the fixed day."""

    def stated(date: str) -> str:
        project = tuple((key, value) for key, value in sheet.origin.project if key != "date")
        dated = replace(sheet, blocks=(), origin=replace(sheet.origin, project=(*project, ("date", date))))
        with pikepdf.open(io.BytesIO(pdf(dated))) as opened:
            return str(opened.open_metadata()["xmp:CreateDate"])

    assert stated("2026-03-14").startswith("2026-03-14")
    assert stated("14 March 2026").startswith(UNDATED.isoformat())


# --- text layer -------------------------------------------------------------------------------------------


def digits_in(data: Any) -> Iterator[str]:
    """Return every number that stands in the data for the page, in mathematics and in text."""
    match data:
        case ["digits", str(number)]:
            yield number
        case [("text" | "name" | "long"), str(), str(written)]:
            yield from re.findall(r"\d+(?:\.\d+)?", written)
        case dict():
            for inner in data.values():
                yield from digits_in(inner)
        case list():
            for inner in data:
                yield from digits_in(inner)


@pytest.mark.parametrize("name", ["k_truss", "warren", "roof", "arch", "hexagon", "many_loads", "rounded_angle"])
def test_every_number_is_in_the_text_layer(name: str) -> None:
    """Decimals of the summary and of every step, and each number of each equation, can be searched for."""
    sheet = compose(sheet_cases.ALL[name](), drawings=False)
    everything = "".join(pdf_text.pages_of(pdf(sheet)))
    wanted = set(digits_in(sheet_data(sheet, "a4", Figures())["blocks"]))
    wanted |= set(digits_in(sheet_data(replace(sheet, blocks=sheet.summary), "a4", Figures())["blocks"]))
    assert len(wanted) > 20
    assert {number for number in wanted if number not in everything} == set()
    for step in (block for block in sheet.blocks if isinstance(block, blocks.Derivation)):
        for row in step.result.rows:
            for cell in row:
                if isinstance(cell, blocks.Decimals):
                    assert cell.text.replace("-", "−") in everything


def test_lines_are_set_term_by_term_in_order(sheet: blocks.Sheet, written: bytes) -> None:
    """The values of a line follow one another on the page as in the document."""
    everything = "".join(pdf_text.pages_of(written))
    assert "24·300−(4+8+12+16+20)·120" in everything
    for step in (block for block in sheet.blocks if isinstance(block, blocks.Derivation)):
        assert re.sub(r"\s", "", f"{step.heading.number}{step.heading.text}") in everything


def test_sheets_are_numbered(written: bytes) -> None:
    """Sheet x of y on every sheet; project and calculation too."""
    pages = pdf_text.pages_of(written)
    assert len(pages) > 4
    assert f"Sheet1of{len(pages)}" in pages[0]
    for number, page in enumerate(pages[1:], 2):
        assert f"Sheet{number}of{len(pages)}" in page
        assert "TanneryLanecrossing" in page
        assert "TLF-C-014,revisionB,14March2026" in page


def test_digests_and_program_are_printed(sheet: blocks.Sheet, written: bytes) -> None:
    """The last sheet says what to compare with when the truss file is derived again."""
    last = pdf_text.pages_of(written)[-1]
    assert content_digest(sheet) in last
    assert hashlib.sha256(sheet.origin.truss_text.encode()).hexdigest() in last
    assert sheet.origin.program.replace(" ", "") in last


def test_the_seal_is_on_the_first_sheet_whatever_its_length() -> None:
    """A summary longer than a sheet does not push seal and signature away."""
    check = warren_of(13)
    pages = pdf_text.pages_of(pdf(compose(check, Project(), drawings=False)))
    assert "seal,55mmsquarekeptclear" in pages[0]
    assert "signature" in pages[0]
    assert "U11–U12" in pages[1]
    assert "stiffnessroute" in pages[1]  # the head again


def warren_of(panels: int) -> MemberCheck:
    """Return a Warren truss, every member checked."""
    joints = {f"L{i}": (4 * i, 0) for i in range(panels + 1)} | {f"U{i}": (4 * i + 2, 3) for i in range(panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(panels - 1)]
    members += [name for i in range(panels) for name in (f"L{i}-U{i}", f"U{i}-L{i + 1}")]
    truss = Truss(joints, members, {"L0": "pin", f"L{panels}": "roller"})
    return check_members(truss, LoadCase("w", {f"L{i}": (0, -i) for i in range(1, panels)}), "all")


def test_four_members_of_twelve_panels_stay_under_ten_sheets() -> None:
    """What is filed is read: a Pratt truss with a load at every lower joint."""
    joints = {f"L{i}": (4 * i, 0) for i in range(13)} | {f"U{i}": (4 * i, 5) for i in range(1, 12)}
    members = [f"L{i}-L{i + 1}" for i in range(12)] + [f"U{i}-U{i + 1}" for i in range(1, 11)]
    members += [f"L{i}-U{i}" for i in range(1, 12)] + ["L0-U1", "U11-L12"]
    members += [f"U{i}-L{i + 1}" for i in range(1, 6)] + [f"U{i}-L{i - 1}" for i in range(7, 12)]
    truss = Truss(joints, members, {"L0": "pin", "L12": "roller"}, title="Long bridge")
    case = LoadCase("dead", {f"L{i}": (0, -120) for i in range(1, 12)})
    check = check_members(truss, case, ["U5-U6", "U5-L6", "L5-L6", "L4-U4"])
    assert len(pdf_text.pages_of(pdf(compose(check, replace(sheet_cases.PROJECT, names={}))))) < 10


# --- disagreement -----------------------------------------------------------------------------------------


def test_a_disagreement_is_bold_and_first(monkeypatch: pytest.MonkeyPatch) -> None:
    """The row that differs is set in the bold face, and the conclusion opens with it."""
    right = stiffness.member_forces

    def wrong(*arguments: Any) -> Any:
        return {name: -force if name == "U2-U3" else force for name, force in right(*arguments).items()}

    monkeypatch.setattr(stiffness, "member_forces", wrong)
    content = pdf(compose(sheet_cases.k_truss(), drawings=False))
    first = pdf_text.pages_of(content)[0]
    assert "Conclusion.Oneoffivemembersdiffers:U2–U3by−640.000kN." in first
    assert "differs" in "".join(pdf_text.set_in(content, "STIXGeneral-Bold"))


# --- same input, same bytes -------------------------------------------------------------------------------


SCRIPT = """
import hashlib, sys
sys.path.insert(0, {here!r})
import sheet_cases
from trusscalc.render.pdf import pdf
from trusscalc.sheet.compose import compose
print(hashlib.sha256(pdf(compose(sheet_cases.warren(), sheet_cases.PROJECT))).hexdigest())
"""


def test_equal_bytes_in_two_processes(tmp_path: Path) -> None:
    """Another hash seed, another folder, another day by the clock's variable: the same file."""
    found = set()
    for seed in ("1", "2"):
        folder = tmp_path / seed
        folder.mkdir()
        environment = {**os.environ, "PYTHONHASHSEED": seed, "SOURCE_DATE_EPOCH": f"{seed}00000000", "TZ": f"X-{seed}"}
        run = [sys.executable, "-c", SCRIPT.format(here=str(HERE))]
        found.add(subprocess.run(run, cwd=folder, env=environment, capture_output=True, check=True).stdout)
        assert list(folder.iterdir()) == []
    assert len(found) == 1


# --- paper and refusals -----------------------------------------------------------------------------------


def test_us_letter(sheet: blocks.Sheet) -> None:
    """8.5 by 11 inches; A4 is 210 by 297 mm."""
    for paper, size in (("US Letter", (612.0, 792.0)), ("A4", (210 / 25.4 * 72, 297 / 25.4 * 72))):
        with pikepdf.open(io.BytesIO(pdf(sheet, paper=paper))) as opened:
            for page in opened.pages:
                assert [float(side) for side in page.mediabox[2:]] == pytest.approx(size, abs=0.01)


def test_other_paper_is_refused(sheet: blocks.Sheet) -> None:
    """The message says which there are."""
    with pytest.raises(RenderError, match="'A5' is no paper this version knows; choose A4 or US Letter"):
        pdf(sheet, paper="A5")


def test_a_missing_extra_names_the_command(
    sheet: blocks.Sheet, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """Without the typesetter: what to install; an existing file stays as it was."""
    monkeypatch.setitem(sys.modules, "typst", None)
    place = tmp_path / "sheet.pdf"
    place.write_bytes(b"before")
    with pytest.raises(RenderError, match=r"pip install 'trusscalc\[pdf\]'"):
        trusscalc.display.save(sheet, place)
    assert place.read_bytes() == b"before"


def test_saved_by_suffix(sheet: blocks.Sheet, written: bytes, tmp_path: Path) -> None:
    """``.pdf`` is this."""
    trusscalc.display.save(sheet, tmp_path / "sheet.PDF")
    assert (tmp_path / "sheet.PDF").read_bytes() == written


@dataclass(frozen=True)
class Unknown:
    """A block of a later version."""


def test_an_unknown_block_is_refused(sheet: blocks.Sheet) -> None:
    """A skipped piece would be a wrong sheet."""
    with pytest.raises(RenderError, match="Unknown is a block this version cannot write as PDF"):
        pdf(replace(sheet, blocks=(*sheet.blocks, Unknown())))  # type: ignore[arg-type]


def test_a_term_too_wide_is_refused_not_cut(sheet: blocks.Sheet) -> None:
    """Many terms are broken at their signs; one that cannot be broken is named."""
    short = blocks.Product(negative=True, factors=(blocks.Decimals("12345.678"),))
    long = blocks.Product(negative=True, factors=(blocks.Decimals("1234567890" * 12),))
    for terms, fits in (((short,) * 40, True), ((short, long), False)):
        lines = blocks.Lines((blocks.Labelled("a", blocks.Formula(terms, (short,))),))
        changed = tuple(
            replace(block, lines=lines) if isinstance(block, blocks.Derivation) else block for block in sheet.blocks
        )
        if fits:
            pdf(replace(sheet, blocks=changed))
            continue
        for wide in (changed, (lines,)):
            with pytest.raises(RenderError, match="does not fit the width of the page: the term − 12345678901234"):
                pdf(replace(sheet, blocks=wide))


def test_a_table_too_wide_is_refused() -> None:
    """Columns that cannot be made narrower any more."""
    columns = tuple(blocks.Column(f"head{n}") for n in range(12))
    row = tuple(blocks.Power("1234567.8901234", -12) for _ in columns)
    table = blocks.Table(columns, (row,))
    sheet = compose(sheet_cases.roof(), drawings=False)
    with pytest.raises(RenderError, match="does not fit the width of the page: a table"):
        pdf(replace(sheet, blocks=(table,)))


# --- names ------------------------------------------------------------------------------------------------


def test_hostile_names_come_out_literally() -> None:
    """Nothing in a name is markup, in text, in tables, in equations, in the title block."""
    sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT)
    everything = "".join(pdf_text.pages_of(pdf(sheet)))
    for name in (*sheet_cases.HOSTILE, sheet_cases.HOSTILE_PROJECT.project, "upper $chord$", "1. snow $x$ |"):
        assert name.replace(" ", "") in everything


@pytest.mark.parametrize(
    "name", ["Ü2", "ΔЖ′", "#x", "*b*", "_a_", "a//b", "/*c*/", "~", "@ref", "<l>", "$x$", "\\", "=="]
)
def test_signs_that_mean_something_to_the_typesetter(name: str) -> None:
    """Each as the name of a joint, in a subscript too."""
    truss = Truss(
        {name: (0, 0), "B": (4, 0), "C": (2, 1)}, [f"{name}-B", f"{name}-C", "B-C"], {name: "pin", "B": "roller"}
    )
    check = check_members(truss, LoadCase("dead", {"C": (0, -2)}), [f"{name}-C"])
    assert f"{name}–C" in pdf_text.pages_of(pdf(compose(check)))[0]


def test_names_of_forty_characters_stay_on_the_page() -> None:
    """They are broken, also without any blank; widths of columns follow."""
    wide, other = "W" * 40, "North abutment bearing, joint no 001".replace(",", "").ljust(40, "x")
    truss = Truss(
        {wide: (0, 0), other: (4, 0), "C": (2, 1)},
        [f"{wide}-{other}", f"{wide}-C", f"{other}-C"],
        {wide: "pin", other: "roller"},
    )
    content = pdf(compose(check_members(truss, LoadCase("dead", {"C": (0, -2)}), "all"), drawings=False))
    assert pdf_text.rightmost(content) <= (210 - 15) / 25.4 * 72 + 0.5


@pytest.mark.parametrize(
    ("name", "paper"),
    [
        ("k_truss", "A4"),
        ("arch", "A4"),
        ("hexagon", "A4"),
        ("many_loads", "A4"),
        ("hostile", "A4"),
        ("arch", "US Letter"),
    ],
)
def test_nothing_runs_off_the_page(name: str, paper: str) -> None:
    """No character that can be seen stands right of the margin."""
    content = pdf(compose(sheet_cases.ALL[name](), drawings=False), paper=paper)
    width = 210 / 25.4 * 72 if paper == "A4" else 612
    assert pdf_text.rightmost(content) <= width - 15 / 25.4 * 72 + 0.5


def test_a_character_no_font_has_is_named() -> None:
    """Never a box where a letter should be."""
    sheet = compose(sheet_cases.roof(), Project(location="橋"), drawings=False)
    with pytest.raises(RenderError, match=r"no font at hand has '橋' \(U\+6A4B\)"):
        pdf(sheet)


# --- the data ---------------------------------------------------------------------------------------------


def test_long_lines_of_the_truss_file_are_continued() -> None:
    """At a blank where there is one; the line's number stands once."""
    assert listing("ab cd ef\r\n\tx", 6) == [[1, "ab cd "], [0, "ef"], [2, "    x"]]
    assert listing("abcdefghij", 4) == [[1, "abcd"], [0, "efgh"], [0, "ij"]]


def test_names_are_not_broken_unless_they_are_long() -> None:
    """``U3–U4`` stays in one piece; forty letters may be broken anywhere."""
    assert text("see U3–U4 now") == [["text", "", "see "], ["name", "", "U3–U4"], ["text", "", " now"]]
    assert text("W" * 17) == [["long", "", "W" * 17]]
    assert inline([None, blocks.Decimals("-0.5")]) == [["text", "", "−0.5"]]
