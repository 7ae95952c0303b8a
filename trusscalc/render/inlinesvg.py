"""A drawing inside a page: what an SVG document needs only when it stands alone is taken off.

Several drawings share one page, so an identifier that is referred to is made the figure's own, and any other goes.
"""

from __future__ import annotations

import html
import re
from typing import Final

from trusscalc.errors import RenderError
from trusscalc.sheet.marks import Figure

_STANDING_ALONE: Final = re.compile(r"<!--.*?-->|<metadata>.*?</metadata>|<style\b.*?</style>", re.DOTALL)
_NAMESPACE: Final = re.compile(r'\sxmlns(?::\w+)?="[^"]*"')
_REFERENCE: Final = re.compile(r'(?:xlink:)?href="#([^"]*)"|url\(#([^)]*)\)')
_IDENTIFIER: Final = re.compile(r'\sid="([^"]*)"')
_ROOT: Final = re.compile(r"<svg\b([^>]*)>")
_VIEW: Final = re.compile(r'\bviewBox="([-0-9. ]+)"')
_JOINS: Final = "stroke-linejoin: round; stroke-linecap: butt"


def inline_svg(document: str, figure: Figure, number: int) -> str:
    """Return a drawing as an element of a page, at its size on paper, told in words to those who cannot see it.

    Parameters
    ----------
    document : str
        The drawing as an SVG document of our own.
    figure : Figure
        What was drawn.
    number : int
        Which drawing of the page it is.

    Raises
    ------
    RenderError
        When the document is none.
    """
    written = _STANDING_ALONE.sub("", document[max(0, document.find("<svg")) :])
    root = _ROOT.match(written)
    if root is None:
        message = "a drawing is no SVG document"
        raise RenderError(message)
    used = {first or second for first, second in _REFERENCE.findall(written)}
    mark = f"figure-{number}-"

    def identifier(found: re.Match[str]) -> str:
        return f' id="{mark}{found[1]}"' if found[1] in used else ""

    def reference(found: re.Match[str]) -> str:
        return f'href="#{mark}{found[1]}"' if found[1] is not None else f"url(#{mark}{found[2]})"

    inside = written[root.end() :].strip()
    inside = _REFERENCE.sub(reference, _IDENTIFIER.sub(identifier, _NAMESPACE.sub("", inside)))
    inside = re.sub(r"\s*\n\s*", "\n", inside.replace("<defs>\n  \n </defs>", ""))
    view = _VIEW.search(root[1])
    box = f' viewBox="{view[1]}"' if view else ""
    size = f'width="{figure.width:g}mm" height="{figure.height:g}mm"{box}'
    return f'<svg role="img" aria-label="{html.escape(figure.alt)}" {size} style="{_JOINS}">\n{inside}'
