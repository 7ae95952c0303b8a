"""The sheet as one HTML file: nothing fetched, nothing run, complete for eyes and ears, the same bytes every time."""

from __future__ import annotations

import html as entities
import os
import re
import subprocess
import sys
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import pytest
import sheet_cases
from test_text import Unknown

from trusscalc.display import save
from trusscalc.errors import RenderError
from trusscalc.render.html import html
from trusscalc.render.inlinesvg import inline_svg
from trusscalc.sheet import blocks
from trusscalc.sheet.compose import compose
from trusscalc.sheet.marks import Figure

HERE = Path(__file__).parent
GOLDEN = HERE / "golden" / "warren.html"
EMPTY = {"meta", "br", "link", "img", "path", "use", "input", "hr"}
CASES = tuple(sheet_cases.ALL)


def no_drawing(figure: Figure) -> str:
    """Stand in for the drawing of a figure."""
    return f'<svg viewBox="0 0 1 1"><path d="M {len(figure.marks)} 0"/></svg>'


def page(case: str) -> str:
    """Return the page of a case, its drawings replaced by stand-ins."""
    project = sheet_cases.HOSTILE_PROJECT if case == "hostile" else None
    return html(compose(sheet_cases.ALL[case](), project), draw=no_drawing)


class Reader(HTMLParser):
    """Reads a page as a browser would: elements in order, with their attributes and the text inside."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.open: list[int] = []
        self.elements: list[tuple[str, dict[str, str | None], list[str], tuple[str, ...]]] = []
        self.text: list[str] = []
        self.feed(text)
        self.close()
        assert not self.open

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """Take down an element."""
        assert len({name for name, _ in attrs}) == len(attrs), "an attribute given twice"
        above = tuple(self.elements[place][0] for place in self.open)
        self.elements.append((tag, dict(attrs), [], above))
        if tag not in EMPTY:
            self.open.append(len(self.elements) - 1)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """Take down an element that closes itself."""
        above = tuple(self.elements[place][0] for place in self.open)
        self.elements.append((tag, dict(attrs), [], above))

    def handle_endtag(self, tag: str) -> None:
        """Close the innermost element."""
        assert self.elements[self.open.pop()][0] == tag, "elements closed in another order than opened"

    def handle_data(self, data: str) -> None:
        """Take down text; a style sheet's is not read."""
        if not self.open or self.elements[self.open[-1]][0] != "style":
            self.text.append(data)
        for place in self.open:
            self.elements[place][2].append(data)

    def named(self, *tags: str) -> list[tuple[str, dict[str, str | None], str]]:
        """Return the elements of some names with their text."""
        return [(tag, attrs, "".join(data)) for tag, attrs, data, _ in self.elements if tag in tags]


@pytest.mark.parametrize("case", CASES)
def test_nothing_runs_and_nothing_is_fetched(case: str) -> None:
    """No script, handler, frame, form, link or address outside the page."""
    reader = Reader(page(case))
    tags = {tag for tag, *_ in reader.elements}
    assert not tags & {"script", "iframe", "object", "embed", "link", "base", "form", "img", "foreignobject", "image"}
    for _, attrs, _, _ in reader.elements:
        for name, value in attrs.items():
            assert not name.startswith("on")
            if name in {"href", "src", "xlink:href", "action", "data", "poster", "srcset"}:
                assert (value or "").startswith("#")
    styles = "".join(text for _, _, text in reader.named("style"))
    assert not re.search(r"@import|url\(|https?:|expression", styles)
    policy = [attrs for _, attrs, _ in reader.named("meta") if attrs.get("http-equiv") == "Content-Security-Policy"]
    assert (policy[0]["content"] or "").startswith("default-src 'none'")


def test_a_real_page_holds_no_address_at_all() -> None:
    """With the drawings in it: not even the namespaces' names, which nobody fetches."""
    text = html(compose(sheet_cases.warren()))
    assert not re.search(r"https?:|//\w|javascript:|<\?xml|<!DOCTYPE svg|<!--", text, re.IGNORECASE)
    Reader(text)


@pytest.mark.parametrize("case", CASES)
def test_headings_landmarks_and_tables_for_a_screen_reader(case: str) -> None:
    """One h1, no level left out, one main, every table with caption and scopes, references that lead somewhere."""
    reader = Reader(page(case))
    levels = [int(tag[1]) for tag, *_ in reader.named("h1", "h2", "h3", "h4")]
    assert levels.count(1) == 1
    assert levels[0] == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))
    assert len(reader.named("main")) == len(reader.named("header")) == len(reader.named("footer")) == 1
    assert reader.named("html")[0][1]["lang"] == "en"
    assert reader.named("title")[0][2]
    assert len(reader.named("table")) == len(reader.named("caption"))
    assert all(text for _, _, text in reader.named("caption"))
    assert {attrs.get("scope") for _, attrs, _ in reader.named("th")} == {"col", "row"}
    ids = [attrs["id"] for _, attrs, _, _ in reader.elements if "id" in attrs]
    assert len(ids) == len(set(ids))
    for _, attrs, _, _ in reader.elements:
        for name in ("aria-labelledby", "href"):
            if name in attrs:
                assert (attrs[name] or "").removeprefix("#") in ids
    for _, attrs, _ in reader.named("svg"):
        assert attrs["role"] == "img"
        assert len(attrs["aria-label"] or "") > 20
    assert len(reader.named("figcaption")) >= len(reader.named("svg"))


@pytest.mark.parametrize("case", CASES)
def test_every_number_is_on_the_page(case: str) -> None:
    """Decimals of the summary, of every step and reaction, verdicts, and sheet and part numbers."""
    check = sheet_cases.ALL[case]()
    text = "".join(Reader(page(case)).text)
    forces = [force for step in check.steps for force in step.results.values()]
    for force in forces:
        assert f"{float(check.value(force)):.3f}".replace("-", "−").replace("−0.000", "0.000") in text
    for step in check.steps:
        assert f"step-{step.number}" in page(case)
    parts = re.findall(r"part (\d+) of (\d+)", text)
    assert [int(number) for number, _ in parts] == list(range(1, len(parts) + 1))
    assert {int(total) for _, total in parts} == {len(parts)}
    assert 'counter(page) " of " counter(pages)' in page(case)


def test_every_text_of_the_sheet_is_on_the_page() -> None:
    """Each run of words, table head, label, caption and field, read as a browser reads them."""
    sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT)
    text = " ".join("".join(Reader(html(sheet, draw=no_drawing)).text).split())
    for words in _texts(sheet.blocks):
        assert " ".join(words.split()) in text, words


def _texts(item: object) -> list[str]:
    """Return every text in a block, at any depth, but those that only steer."""
    if isinstance(item, tuple):
        return [text for inner in item for text in _texts(inner)]
    if isinstance(item, str):
        return [item]
    if isinstance(item, (blocks.Run, blocks.Column)):
        return [item.text if isinstance(item, blocks.Run) else item.head]
    if isinstance(item, blocks.Figure):
        return [item.caption]
    if isinstance(item, (blocks.Formula, blocks.Value, blocks.Decimals, blocks.Power)):
        return []
    steering = {"role", "align", "style"}
    names = getattr(item, "__dataclass_fields__", {})
    return [text for name in names if name not in steering for text in _texts(getattr(item, name))]


def test_hostile_names_are_letters_only() -> None:
    """No element and no attribute comes from a name, in text, in the running head and in the record."""
    reader = Reader(page("hostile"))
    tags = {tag for tag, *_ in reader.elements}
    assert not tags & {"b", "i", "img", "script"}
    text = "".join(reader.text)
    for name in (*sheet_cases.HOSTILE, sheet_cases.HOSTILE_PROJECT.project, sheet_cases.HOSTILE_PROJECT.location):
        assert name in text
    style = reader.named("style")[0][2]
    assert "<" not in style
    assert "example" in style  # the location stands in the running head, its signs told by their numbers
    assert "https:" not in style


def test_a_disagreement_is_bold_and_first(monkeypatch: pytest.MonkeyPatch) -> None:
    """Its row is set strong, and so is the sentence that tells it."""
    from trusscalc import stiffness  # noqa: PLC0415

    honest = stiffness.member_forces
    monkeypatch.setattr(stiffness, "member_forces", lambda t, c: {n: f + (n == "D-C") for n, f in honest(t, c).items()})
    text = html(compose(sheet_cases.roof(), drawings=False))
    assert re.search(r'<tr class="strong"><th scope="row"><strong><span>D–C</span></strong>', text)
    assert re.search(r'<p class="conclusion"><strong>Conclusion.</strong> <strong>[^<]*differs', text)


def test_names_of_figures_do_not_clash() -> None:
    """The same drawing twice on a page: each refers to its own glyphs; unused names are gone."""
    drawing = (
        '<?xml version="1.0"?><!DOCTYPE svg><svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 9 9">'
        "<metadata>http://x</metadata>"
        '<defs><style type="text/css">*{fill: red}</style><path id="glyph" d="M 0 0"/></defs>'
        '<!-- a --><g id="idle"><use xlink:href="#glyph"/><path clip-path="url(#glyph)"/></g></svg>'
    )
    figure = Figure(30, 20, (), "", 'two "words" & <more>')
    one, other = inline_svg(drawing, figure, 1), inline_svg(drawing, figure, 2)
    assert set(re.findall(r'id="([^"]*)"', one + other)) == {"figure-1-glyph", "figure-2-glyph"}
    assert 'href="#figure-1-glyph"' in one
    assert "url(#figure-2-glyph)" in other
    assert "http" not in one
    assert "style type" not in one
    assert "idle" not in one
    assert entities.unescape(re.search(r'aria-label="([^"]*)"', one)[1]) == figure.alt  # type: ignore[index]
    with pytest.raises(RenderError, match="SVG"):
        inline_svg("a picture", figure, 1)


def test_every_kind_of_block_is_written_and_an_unknown_one_refused() -> None:
    """In a filed sheet a skipped piece is a wrong sheet."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False)
    step = next(block for block in sheet.blocks if isinstance(block, blocks.Derivation))
    for block in (*sheet.blocks, step.lines):
        assert html(blocks.Sheet("t", (block,), (), sheet.origin))
    with pytest.raises(RenderError, match="Unknown"):
        html(blocks.Sheet("t", (Unknown(),), (), sheet.origin))  # type: ignore[arg-type]


def test_golden_page() -> None:
    """One whole page without drawings, read once by eye; its style sheet is not part of it."""
    text = html(compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False))
    without = re.sub(r"<style>.*?</style>\n", "", text, flags=re.DOTALL)
    assert without == GOLDEN.read_text(encoding="utf-8")


def test_saved_by_suffix(tmp_path: Path) -> None:
    """``.html`` is one of the suffixes a sheet can be saved as."""
    sheet = compose(sheet_cases.roof(), drawings=False)
    assert save(sheet, tmp_path / "sheet.html").read_text(encoding="utf-8") == html(sheet)


PROGRAM = """
import hashlib, sheet_cases
from trusscalc.sheet.compose import compose
from trusscalc.sheet.digest import content_digest
from trusscalc.render.html import html
sheet = compose(sheet_cases.hostile(), sheet_cases.HOSTILE_PROJECT)
print(hashlib.sha256((html(sheet) + content_digest(sheet)).encode()).hexdigest())
"""


def test_two_processes_write_equal_bytes() -> None:
    """With different hash seeds, drawings and content digest included."""
    digests = set()
    for seed in ("1", "2"):
        environment = os.environ | {"PYTHONHASHSEED": seed, "PYTHONPATH": str(HERE)}
        done = subprocess.run(
            [sys.executable, "-c", PROGRAM], env=environment, capture_output=True, text=True, check=True
        )
        digests.add(done.stdout.strip())
    assert len(digests) == 1
