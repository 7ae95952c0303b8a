"""Drawing: same bytes, own ground, letters as measured, nobody's settings touched."""

import io
import os
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree as ET

import matplotlib as mpl
import numpy as np
import pytest
from matplotlib import font_manager, image
from matplotlib.textpath import TextPath

from trusscalc.errors import RenderError
from trusscalc.render.draw import FACES, INKS, png, svg
from trusscalc.sheet.lettering import POINT, text_width
from trusscalc.sheet.marks import Arrow, Figure, Label, Ring, Stroke

MARKS = (
    Stroke(((5.0, 5.0), (60.0, 5.0)), 0.35),
    Stroke(((5.0, 8.0), (60.0, 8.0)), 0.25, dash="section"),
    Stroke(((40.0, 10.0), (44.0, 10.0), (42.0, 14.0)), 0.25, closed=True),
    Arrow((10.0, 20.0), (10.0, 12.0), 0.35),
    Arrow((20.0, 12.0), (20.0, 20.0), 0.35, open_head=True),
    Ring((5.0, 5.0), 1.5, 0.25),
    Label((40.0, 25.0), "N", 8.5, "U3–U4", ink="accent", style="italic"),
    Label((60.0, 20.0), "−420.0 C", 7.5, angle=40.0),
)
FIGURE = Figure(80.0, 35.0, MARKS, "A test.", "A test.")


def pixels(figure: Figure) -> np.ndarray:
    """Return a figure's picture as an array."""
    return image.imread(io.BytesIO(png(figure)))


def test_svg_has_the_size_on_paper() -> None:
    """The SVG document is as large as the figure: 80 mm are 226.77 points."""
    root = ET.fromstring(svg(FIGURE))  # noqa: S314 - our own text
    assert float(root.attrib["width"].removesuffix("pt")) == pytest.approx(80 / POINT, abs=0.01)
    assert float(root.attrib["height"].removesuffix("pt")) == pytest.approx(35 / POINT, abs=0.01)


def test_svg_carries_no_text_no_date_no_link() -> None:
    """Letters are outlines, so that they look the same everywhere; nothing tells the time."""
    text = svg(FIGURE)
    assert "<text" not in text
    assert "dc:date" not in text
    assert 'href="http' not in text


def test_same_bytes_in_any_process() -> None:
    """SVG and PNG are the same in two processes with different hash seeds."""
    program = (
        "import sys; sys.path.insert(0, sys.argv[1]); import test_draw as t, hashlib;"
        "print(hashlib.sha256(t.svg(t.FIGURE).encode() + t.png(t.FIGURE)).hexdigest())"
    )
    found = set()
    for seed in ("1", "2"):
        command = [sys.executable, "-c", program, str(Path(__file__).parent)]
        result = subprocess.run(command, env={**os.environ, "PYTHONHASHSEED": seed}, capture_output=True, check=True)
        found.add(result.stdout)
    assert len(found) == 1


def test_settings_come_back_and_do_not_matter() -> None:
    """A user's own style neither changes a figure nor is changed by it."""
    plain = svg(FIGURE)
    with mpl.rc_context({"font.family": ["monospace"], "lines.linewidth": 9, "svg.fonttype": "none"}):
        before = dict(mpl.rcParams)
        assert svg(FIGURE) == plain
        assert dict(mpl.rcParams) == before


def test_the_ground_is_white_and_opaque() -> None:
    """A dark screen shows a light card: every corner is opaque white."""
    picture = pixels(FIGURE)
    for corner in (picture[0, 0], picture[0, -1], picture[-1, 0], picture[-1, -1]):
        assert corner[:3].tolist() == [1, 1, 1]
        assert corner.size == 3 or corner[3] == 1


def test_a_picture_has_the_dots_asked_for() -> None:
    """At 200 dots an inch 80 mm are 630 dots."""
    assert pixels(FIGURE).shape[1] == pytest.approx(80 / 25.4 * 200, abs=1)


@pytest.mark.parametrize("text", ["$x^2$", "\\frac{1}{2}", "a & b", "<b>", "100%", "_{sub}"])
def test_markup_is_drawn_letter_by_letter(text: str) -> None:
    """Text that other programs would read as markup is as wide on paper as its letters."""
    picture = pixels(Figure(60.0, 10.0, (Label((30.0, 5.0), text, 10.0),), "", ""))
    dark = np.nonzero((picture[:, :, :3] < 0.5).any(axis=(0, 2)))[0]
    width = (dark[-1] - dark[0]) / 200 * 25.4
    assert width == pytest.approx(text_width(text, 10.0), abs=0.9)


@pytest.mark.parametrize(
    ("style", "weight", "name"),
    [("normal", "normal", "plain"), ("italic", "normal", "italic"), ("italic", "bold", "bold italic")],
)
def test_measured_widths_are_the_face_s(style: str, weight: str, name: str) -> None:
    """The table of advance widths agrees with the font file matplotlib carries, letter by letter."""
    face = font_manager.FontProperties(family="STIXGeneral", style=style, weight=weight)
    for letter in "0123456789ABCLMNPRUabcxy()–−/,.":
        pair = TextPath((0, 0), f"|{letter}|", size=100, prop=face).get_extents().width
        alone = TextPath((0, 0), "||", size=100, prop=face).get_extents().width
        assert text_width(letter, 100, name) / POINT == pytest.approx(pair - alone, abs=1.5)


def test_letters_beyond_the_face_come_from_the_second() -> None:
    """A letter STIX lacks is taken from DejaVu, and is no box."""
    assert FACES == ["STIXGeneral", "DejaVu Sans"]
    known = pixels(Figure(10.0, 10.0, (Label((5.0, 5.0), "\u0561", 10.0),), "", ""))
    assert (known[:, :, :3] < 0.5).any()


def test_a_letter_no_face_has_is_refused() -> None:
    """A joint name in a script without a face gives a clear error, not boxes."""
    with pytest.raises(RenderError, match="cannot draw a character"):
        svg(Figure(10.0, 10.0, (Label((5.0, 5.0), "節", 10.0),), "", ""))


def test_an_unknown_mark_is_refused() -> None:
    """A mark the drawing does not know raises: a skipped mark is a wrong figure."""
    with pytest.raises(RenderError, match="cannot be drawn"):
        svg(Figure(10.0, 10.0, ("mark",), "", ""))  # type: ignore[arg-type]


def test_the_accent_is_dark_in_grey() -> None:
    """Inks keep a contrast of at least 4.5 to white (relative luminance as WCAG 2 defines it, from memory)."""

    def luminance(ink: str) -> float:
        parts = [int(ink[i : i + 2], 16) / 255 for i in (1, 3, 5)]
        red, green, blue = (p / 12.92 if p <= 0.03928 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
        return 0.2126 * red + 0.7152 * green + 0.0722 * blue

    for name in ("black", "grey", "accent"):
        assert 1.05 / (luminance(INKS[name]) + 0.05) >= 4.5
