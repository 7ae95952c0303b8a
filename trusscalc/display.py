"""What results look like in a notebook, and how a sheet is saved: conveniences that may import everything.

Importing this module hangs thin methods on the records (``check.sheet()``, ``sheet.save()``, rich display), so
that the records themselves need to know nothing of sheets and renderers.
"""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any, Final

from trusscalc.errors import RenderError
from trusscalc.exacttext import to_text
from trusscalc.membercheck import MemberCheck
from trusscalc.project import Project
from trusscalc.render.notebook import Bundle, bundle, figure_bundle, notebook, step_bundle
from trusscalc.render.text import step_text, text
from trusscalc.replacefile import replace_file
from trusscalc.sheet import compose as composing
from trusscalc.sheet.blocks import Derivation, Items, Run, Sheet
from trusscalc.sheet.figures import truss_figure
from trusscalc.sheet.words import about_words, bar, listed
from trusscalc.statics.cuts import Cut
from trusscalc.statics.steps import Step
from trusscalc.truss import Truss

WRITERS: Final = {".ipynb": notebook, ".txt": text}
"""What each suffix is written by."""


def save(sheet: Sheet, path: str | os.PathLike[str]) -> Path:
    """Write a sheet to a file; the file appears complete or not at all.

    Parameters
    ----------
    sheet : Sheet
        What to write.
    path : path
        Its suffix says how: ``.ipynb`` or ``.txt``.

    Raises
    ------
    RenderError
        For another suffix, or a sheet that cannot be written that way; an existing file is left as it was.
    OSError
        When the place cannot be written to.
    """
    place = Path(path)
    writer = WRITERS.get(place.suffix.lower())
    if writer is None:
        message = f"a sheet cannot be saved as {place.suffix or place.name!r}; it can be as {' or '.join(WRITERS)}"
        raise RenderError(message)
    replace_file(place, writer(sheet).encode())
    return place


def step_texts(check: MemberCheck, places: int = 3) -> dict[int, str]:
    """Return every step's lines as plain text, by number."""
    return {
        step.number: step_text(composing.derivation(check, step.number, places=places, drawings=False))
        for step in check.steps
    }


def attach() -> None:
    """Hang the conveniences on the records; doing it twice does no harm."""
    for record, methods in CONVENIENCES.items():
        for name, method in methods.items():
            setattr(record, name, method)


# --- the methods ------------------------------------------------------------------------------------------


def _sheet(
    check: MemberCheck, project: Project | None = None, *, truss_text: str = "", places: int = 3, drawings: bool = True
) -> Sheet:
    """Return the calculation sheet of this check; see ``trusscalc.sheet.compose.compose``."""
    return composing.compose(check, project, truss_text=truss_text, places=places, drawings=drawings)


def _derivation(check: MemberCheck, number: int, *, places: int = 3, drawings: bool = True) -> Derivation:
    """Return one step, written out with its free body; see ``trusscalc.sheet.compose.derivation``."""
    return composing.derivation(check, number, places=places, drawings=drawings)


def _sheet_bundle(sheet: Sheet, **_: Any) -> Bundle:
    """Return conclusion and summary table as a notebook shows them."""
    return bundle(sheet.summary)


def _check_bundle(check: MemberCheck, **_: Any) -> Bundle:
    """Return conclusion and summary table as a notebook shows them."""
    return bundle(composing.summary(check))


def _derivation_bundle(derivation: Derivation, **_: Any) -> Bundle:
    """Return a step's card as a notebook shows it."""
    return step_bundle(derivation)


def _truss_bundle(truss: Truss, **_: Any) -> dict[str, Any]:
    """Return the truss's figure as a notebook shows it."""
    return figure_bundle(truss_figure(truss))


def _step_bundle(step: Step, **_: Any) -> Bundle:
    """Return a step's facts; its card needs the check (``check.derivation(number)``)."""
    items = [(f"Step {step.number}", f"{step.kind}{f', section {step.letter}–{step.letter}' if step.letter else ''}")]
    items += [
        ("Equation", f"{about_words(equation.about)}, joints kept: {listed(equation.cut.kept)}")
        for equation in step.equations
    ]
    items += [(bar(name), to_text(value)) for name, value in step.results.items()]
    return bundle([Items(tuple((term, (Run(text),)) for term, text in items))])


def _cut_bundle(cut: Cut, **_: Any) -> Bundle:
    """Return a cut's facts: what is kept, and which bars hold it."""
    items = (
        ("Kind", (Run(cut.kind),)),
        ("Joints kept", (Run(listed(cut.kept)),)),
        ("Bars cut", (Run(listed(map(bar, cut.bars)) or "none"),)),
    )
    return bundle([Items(items)])


CONVENIENCES: Final[dict[type, dict[str, Any]]] = {
    Sheet: {"save": save, "_repr_mimebundle_": _sheet_bundle},
    MemberCheck: {"sheet": _sheet, "derivation": _derivation, "_repr_mimebundle_": _check_bundle},
    Derivation: {"_repr_mimebundle_": _derivation_bundle},
    Step: {"_repr_mimebundle_": _step_bundle},
    Cut: {"_repr_mimebundle_": _cut_bundle},
    Truss: {"_repr_mimebundle_": _truss_bundle},
}
"""What ``attach`` hangs on which record."""

attach()
