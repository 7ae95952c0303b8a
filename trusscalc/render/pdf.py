"""The sheet as PDF: paged, tagged, with embedded fonts, in the PDF/A-2b profile, the same bytes every time.

The typesetter is Typst. It gets a fixed page description (``sheet.typ``) and the sheet as data; it sees no file
of the user's, no font of the machine's and no clock. Fonts are STIX General and DejaVu, which matplotlib carries,
and the mathematics font built into Typst.
"""

from __future__ import annotations

import datetime as dt
import json
import re
from functools import cache
from importlib.resources import files
from importlib.util import find_spec
from pathlib import Path
from typing import Any, Final

from trusscalc.errors import RenderError
from trusscalc.render.draw import svg
from trusscalc.render.pdfdata import Data, Figures, sheet_data, text
from trusscalc.sheet.blocks import Sheet
from trusscalc.sheet.digest import record_of

PAPERS: Final = {"A4": "a4", "US Letter": "us-letter"}
"""What each paper is called by the typesetter."""
PROFILE: Final = "a-2b"
FACE: Final = "STIXGeneral"
UNDATED: Final = dt.date(1970, 1, 1)
"""The profile demands a date; where the title block holds none that can be read, this one, never the clock's."""


def pdf(sheet: Sheet, *, paper: str = "A4") -> bytes:
    """Return the sheet as PDF, the same bytes for the same sheet.

    Parameters
    ----------
    sheet : Sheet
        What is written.
    paper : str
        ``"A4"`` or ``"US Letter"``, both upright.

    Raises
    ------
    RenderError
        Without the extra ``pdf``; for another paper; for a block this version does not know; for a character no
        font at hand has; for a term or table too wide for the page.

    Notes
    -----
    Produced with the PDF/A-2b profile (ISO 19005-2); no validator has run. The document's date is the title
    block's where that is an ISO date, else 1970-01-01: the profile demands one, and a clock would make every
    copy different.
    """
    if paper not in PAPERS:
        message = f"{paper!r} is no paper this version knows; choose {' or '.join(PAPERS)}"
        raise RenderError(message)
    figures = Figures()
    data = sheet_data(sheet, PAPERS[paper], figures) | _identity(sheet)
    drawn = {name: svg(figure) for name, figure in figures.drawn.items()}
    return _compiled({"data": json.dumps(data, ensure_ascii=False, sort_keys=True), **drawn})


def _identity(sheet: Sheet) -> Data:
    """Return what names the document: author, date, program, digests."""
    project = dict(sheet.origin.project)
    record = record_of(sheet)
    lines = (
        f"Written by {sheet.origin.program} with the PDF/A-2b profile. The same input and program give the same sheet.",
        f"Input digest, SHA-256 of the truss file: {record['input']}",
        f"Content digest, SHA-256 of everything shown above: {record['content']}",
    )
    return {
        "language": "en",
        "author": [project["prepared"]] if project.get("prepared") else [],
        "date": _date(project.get("date", "")),
        "identity": [text(line) for line in lines],
    }


def _date(written: str) -> list[int]:
    try:
        date = dt.date.fromisoformat(written)
    except ValueError:
        date = UNDATED
    return [date.year, date.month, date.day]


# --- the typesetter ---------------------------------------------------------------------------------------


def _compiled(inputs: dict[str, str]) -> bytes:
    try:
        import typst  # noqa: PLC0415 - an extra, and only for this
    except ImportError as problem:
        message = "a PDF needs the typesetter, which is an extra: pip install 'trusscalc[pdf]'"
        raise RenderError(message) from problem
    compiler = typst.Compiler(
        input=_page_description(),
        root=Path(__file__).parent,  # nothing is read from it; without it the folder of the moment would be the root
        font_paths=_fonts(),
        ignore_system_fonts=True,
        sys_inputs=inputs,
    )
    try:
        made = compiler.compile(format="pdf", pdf_standards=[PROFILE])
    except typst.TypstError as problem:
        raise RenderError(_told(problem.message)) from problem
    if not isinstance(made, bytes):
        message = f"the typesetter returned {type(made).__name__} instead of one document"
        raise RenderError(message)
    return made


@cache
def _page_description() -> bytes:
    return files("trusscalc.render").joinpath("sheet.typ").read_bytes()


@cache
def _fonts() -> Any:
    """Return the fonts matplotlib carries; its folder is found without the cost of importing it."""
    import typst  # noqa: PLC0415

    found = find_spec("matplotlib")
    places = [] if found is None else [Path(place) for place in found.submodule_search_locations or ()]
    folders = [str(place / "mpl-data" / "fonts" / "ttf") for place in places]
    fonts = typst.Fonts(include_system_fonts=False, font_paths=folders)
    if FACE not in fonts.families():
        message = f"the face {FACE}, which matplotlib carries, was not found: pip install --force-reinstall matplotlib"
        raise RenderError(message)
    return fonts


def _told(problem: str) -> str:
    """Return a complaint of the typesetter in the words of the sheet."""
    missing = re.search(r'the text `"(.*?)"` could not be displayed', problem)
    if missing:
        characters = ", ".join(f"{c!r} (U+{ord(c):04X})" for c in dict.fromkeys(missing[1]))
        return f"no font at hand has {characters}; write the name or the entry that holds it with other letters"
    wide = re.search(r"too wide: (.*)", problem)
    if wide:
        return f"this does not fit the width of the page: {wide[1].rstrip(chr(34))}; save the sheet as HTML or notebook"
    return f"the sheet cannot be set as PDF: {problem}"
