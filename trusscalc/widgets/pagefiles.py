"""The files the page is given: JavaScript modules as they stand in ``page/``, put one after the other, and the CSS.

A notebook front end takes one module for each view and resolves no names of files, so the imports among our own
modules are taken out and each module stands before those that use it. That is all; there is no build.
"""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path
from typing import Final

PAGE: Final = Path(__file__).with_name("page")
OWN_IMPORT: Final = re.compile(r'^import \{[^}]*\} from "\./([\w.]+)";\n', re.MULTILINE)
EXPORT: Final = re.compile(r"^export (?!default)", re.MULTILINE)


@cache
def javascript(name: str) -> str:
    """Return a module with everything it imports from its neighbours before it.

    Examples
    --------
    >>> text = javascript("drawing.js")
    >>> text.index("class Layout") < text.index("class Drawing"), 'from "./' in text
    (True, False)
    """
    return "\n".join(_text_of(each) for each in _in_order(name, []))


def _in_order(name: str, placed: list[str]) -> list[str]:
    """Return modules, each after what it imports, in the order of their imports."""
    for other in OWN_IMPORT.findall((PAGE / name).read_text(encoding="utf-8")):
        if other not in placed:
            _in_order(other, placed)
    if name not in placed:
        placed.append(name)
    return placed


def _text_of(name: str) -> str:
    return EXPORT.sub("", OWN_IMPORT.sub("", (PAGE / name).read_text(encoding="utf-8")))


@cache
def stylesheet(name: str) -> str:
    """Return a style sheet."""
    return (PAGE / name).read_text(encoding="utf-8")
