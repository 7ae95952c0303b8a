"""Figures on paper: marks in millimetres to SVG and PNG, by matplotlib without its global state.

The lettering is STIX General, which matplotlib carries; a character it lacks comes from DejaVu Sans, which
is carried too. Text is never read as mathematics: a joint named ``$x$`` is drawn as ``$x$``.
"""

from __future__ import annotations

import io
import math
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

from trusscalc.errors import RenderError
from trusscalc.sheet.lettering import box_of, runs
from trusscalc.sheet.marks import Arrow, Figure, Label, Ring, Stroke

if TYPE_CHECKING:
    from matplotlib.figure import Figure as Canvas

INKS = {"black": "#1a1a1a", "grey": "#595959", "accent": "#0b4f6c", "white": "#ffffff"}
DASHES = {"section": (4.0, 0.9, 0.5, 0.9), "dashed": (2.0, 1.0), "break": (1.2, 0.6)}
"""Dash lengths in mm; ``solid`` has none."""
INCH = 25.4
POINTS_IN_MM = 72 / INCH
FACES = ["STIXGeneral", "DejaVu Sans"]
SETTINGS = {
    "svg.fonttype": "path",
    "svg.hashsalt": "trusscalc",
    "path.simplify": False,
    "path.snap": False,
    "lines.scale_dashes": False,
    "text.usetex": False,
    "text.hinting": "none",  # letters stand where they were measured
    "font.family": FACES,
    "axes.unicode_minus": True,
}


def svg(figure: Figure) -> str:
    """Return a figure as an SVG document with its own white ground; the same text every time.

    Raises
    ------
    RenderError
        When a label holds a character that neither face can draw.
    """
    with _canvas(figure) as canvas:
        from matplotlib.backends.backend_svg import FigureCanvasSVG  # noqa: PLC0415 - heavy, only when drawing

        page = io.StringIO()
        FigureCanvasSVG(canvas).print_svg(page, metadata={"Date": None, "Creator": "trusscalc"})
        return page.getvalue()


def png(figure: Figure, *, dpi: int = 200) -> bytes:
    """Return a figure as a PNG picture with its own white ground; the same bytes every time.

    Raises
    ------
    RenderError
        When a label holds a character that neither face can draw.
    """
    with _canvas(figure) as canvas:
        from matplotlib.backends.backend_agg import FigureCanvasAgg  # noqa: PLC0415 - heavy, only when drawing

        canvas.set_dpi(dpi)
        page = io.BytesIO()
        FigureCanvasAgg(canvas).print_png(page, metadata={"Software": "trusscalc"})
        return page.getvalue()


@contextmanager
def _canvas(figure: Figure) -> Iterator[Canvas]:
    """Lay the marks on a matplotlib figure; settings hold only while it is in use."""
    import matplotlib as mpl  # noqa: PLC0415 - heavy, only when drawing
    from matplotlib.figure import Figure as Canvas  # noqa: PLC0415
    from matplotlib.transforms import Affine2D  # noqa: PLC0415

    with mpl.rc_context():
        mpl.rcdefaults()  # a style the user has set must not change a filed figure; the back end stays alone
        mpl.rcParams.update(SETTINGS)
        canvas = Canvas(figsize=(figure.width / INCH, figure.height / INCH), facecolor="white")
        millimetres = Affine2D().scale(1 / INCH) + canvas.dpi_scale_trans
        for order, mark in enumerate(figure.marks):
            for artist in _artists(mark, millimetres):
                artist.set_zorder(order)
                canvas.add_artist(artist)
        with warnings.catch_warnings():
            warnings.filterwarnings("error", message="Glyph .* missing from")
            try:
                yield canvas
            except UserWarning as problem:
                message = f"the figure's lettering cannot draw a character of a name: {problem}"
                raise RenderError(message) from None


def _artists(mark: Stroke | Arrow | Ring | Label, millimetres: Any) -> list[Any]:
    if isinstance(mark, Stroke):
        return [_stroke(mark, millimetres)]
    if isinstance(mark, Arrow):
        return _arrow(mark, millimetres)
    if isinstance(mark, Ring):
        return [_ring(mark, millimetres)]
    if isinstance(mark, Label):
        return _lettering(mark, millimetres)
    message = f"a mark that cannot be drawn: {type(mark).__name__}"
    raise RenderError(message)


def _stroke(mark: Stroke, millimetres: Any) -> Any:
    from matplotlib.lines import Line2D  # noqa: PLC0415
    from matplotlib.patches import Polygon  # noqa: PLC0415

    ink, width = INKS[mark.ink], mark.width * POINTS_IN_MM
    if mark.closed or mark.filled:
        fill = ink if mark.filled else "none"
        return Polygon(
            mark.points, closed=True, facecolor=fill, edgecolor=ink, linewidth=width, transform=millimetres, zorder=1
        )
    style: Any = "solid"
    if mark.dash != "solid":
        style = (0, tuple(length * POINTS_IN_MM for length in DASHES[mark.dash]))
    x, y = zip(*mark.points, strict=True)
    return Line2D(
        x,
        y,
        color=ink,
        linewidth=width,
        linestyle=style,
        solid_capstyle="butt",
        dash_capstyle="butt",
        solid_joinstyle="round",
        dash_joinstyle="round",
        transform=millimetres,
    )


def _arrow(mark: Arrow, millimetres: Any) -> list[Any]:
    dx, dy = mark.tip[0] - mark.tail[0], mark.tip[1] - mark.tail[1]
    length = math.hypot(dx, dy)
    if not length:
        return []
    ux, uy = dx / length, dy / length
    head = min(mark.head_length, length)
    neck = (mark.tip[0] - head * ux, mark.tip[1] - head * uy)
    half = mark.head_width / 2
    corners = (mark.tip, (neck[0] - half * uy, neck[1] + half * ux), (neck[0] + half * uy, neck[1] - half * ux))
    # the shaft runs a little into a filled head, so that no seam shows
    end = neck if mark.open_head else (neck[0] + 0.4 * head * ux, neck[1] + 0.4 * head * uy)
    shaft = _stroke(Stroke((mark.tail, end), mark.width, mark.ink), millimetres)
    if not mark.open_head:
        return [shaft, _stroke(Stroke(corners, 0.0, mark.ink, closed=True, filled=True), millimetres)]
    ground = _stroke(Stroke(corners, 0.0, "white", closed=True, filled=True), millimetres)
    return [shaft, ground, _stroke(Stroke(corners, min(mark.width, 0.3), mark.ink, closed=True), millimetres)]


def _ring(mark: Ring, millimetres: Any) -> Any:
    from matplotlib.patches import Circle  # noqa: PLC0415

    return Circle(
        mark.centre,
        mark.diameter / 2,
        facecolor=INKS[mark.fill],
        edgecolor=INKS[mark.ink],
        linewidth=mark.width * POINTS_IN_MM,
        transform=millimetres,
    )


def _lettering(mark: Label, millimetres: Any) -> list[Any]:
    from matplotlib.font_manager import FontProperties  # noqa: PLC0415
    from matplotlib.text import Text  # noqa: PLC0415

    box = box_of(mark)
    found = []
    for run in runs(mark):
        face = FontProperties(
            family=FACES,
            size=run.size,
            style="italic" if "italic" in run.style else "normal",
            weight="bold" if "bold" in run.style else "normal",
        )
        found.append(
            Text(
                box.x + run.x * box.cos - run.y * box.sin,
                box.y + run.x * box.sin + run.y * box.cos,
                run.text,
                color=INKS[mark.ink],
                fontproperties=face,
                rotation=mark.angle,
                rotation_mode="anchor",
                horizontalalignment="left",
                verticalalignment="baseline",
                transform=millimetres,
                parse_math=False,
            )
        )
    return found
