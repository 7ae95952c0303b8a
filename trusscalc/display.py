"""What results look like in a notebook, and how a sheet is saved: conveniences that may import everything.

Importing this module hangs thin methods on the records (``check.sheet()``, ``sheet.save()``, rich display), so
that the records themselves need to know nothing of sheets and renderers.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any, Final, Literal

from trusscalc.comparison import Comparison
from trusscalc.envelopes import Envelope
from trusscalc.errors import RenderError, UnstableTrussError
from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.governing import GoverningCheck, governing_checks
from trusscalc.influence import InfluenceLine
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.project import Project
from trusscalc.render.html import html
from trusscalc.render.mathtext import Latex
from trusscalc.render.notebook import PLACES, Bundle, bundle, figure_bundle, notebook, step_bundle
from trusscalc.render.pdf import pdf
from trusscalc.render.text import step_text, text
from trusscalc.replacefile import replace_file
from trusscalc.sheet import compose as composing
from trusscalc.sheet.blocks import Derivation, Inline, Items, Picture, Run, Sheet, Value
from trusscalc.sheet.detail import Detail
from trusscalc.sheet.envelopeelevation import envelope_elevation
from trusscalc.sheet.envelopefigure import envelope_diagrams
from trusscalc.sheet.envelopefront import extremes_table
from trusscalc.sheet.envelopesheet import compose_envelope
from trusscalc.sheet.envelopetables import States
from trusscalc.sheet.figures import Figure, cut_figure, mechanism_figure, truss_figure
from trusscalc.sheet.influencefigure import influence_figure
from trusscalc.sheet.influencesheet import compose_influence
from trusscalc.sheet.traintables import ordinate_table
from trusscalc.sheet.values import decimal_text
from trusscalc.sheet.words import about_words, bar, listed
from trusscalc.statics.cutreport import CutReport, cut_equation, cut_report
from trusscalc.statics.cuts import Cut
from trusscalc.statics.owncuts import OwnCut, own_cut
from trusscalc.statics.prices import Preference
from trusscalc.statics.steps import Equation, Step
from trusscalc.trains import Train
from trusscalc.travel import Extreme
from trusscalc.truss import Truss
from trusscalc.widgets import explore
from trusscalc.widgets.answers import Answer
from trusscalc.widgets.cutblocks import (
    answer_blocks,
    equation_blocks,
    facts,
    kept_and_cut,
    possibility_table,
    why_nothing,
)

WRITERS: Final[dict[str, Callable[[Sheet], str | bytes]]] = {
    ".ipynb": notebook,
    ".html": html,
    ".pdf": pdf,
    ".txt": text,
}
"""What each suffix is written by."""


def save(sheet: Sheet, path: str | os.PathLike[str], *, paper: str = "A4") -> Path:
    """Write a sheet to a file; the file appears complete or not at all.

    Parameters
    ----------
    sheet : Sheet
        What to write.
    path : path
        Its suffix says how: ``.ipynb``, ``.html``, ``.pdf`` or ``.txt``.
    paper : str
        ``A4`` or ``US Letter``, for a PDF; the other formats have no paper.

    Raises
    ------
    RenderError
        For another suffix, or a sheet that cannot be written that way; an existing file is left as it was.
    OSError
        When the place cannot be written to.
    """
    place = Path(path)
    refuse_unwritable(place)
    writer = WRITERS[place.suffix.lower()]
    written = pdf(sheet, paper=paper) if writer is pdf else writer(sheet)
    replace_file(place, written.encode() if isinstance(written, str) else written)
    return place


def refuse_unwritable(path: str | os.PathLike[str]) -> None:
    """Raise a RenderError for a suffix no sheet can be written as (before any work is done)."""
    place = Path(path)
    if place.suffix.lower() not in WRITERS:
        message = f"a sheet cannot be saved as {place.suffix or place.name!r}; it can be as {' or '.join(WRITERS)}"
        raise RenderError(message)


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
    check: MemberCheck,
    project: Project | None = None,
    *,
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    detail: Detail = "members",
    graphics: bool = False,
) -> Sheet:
    """Return the calculation sheet of this check; see ``trusscalc.sheet.compose.compose``."""
    return composing.compose(
        check,
        project,
        truss_text=truss_text,
        places=places,
        drawings=drawings,
        detail=detail,
        graphics=graphics,
    )


def _derivation(check: MemberCheck, number: int, *, places: int = 3, drawings: bool = True) -> Derivation:
    """Return one step, written out with its free body; see ``trusscalc.sheet.compose.derivation``."""
    return composing.derivation(check, number, places=places, drawings=drawings)


def _envelope_sheet(
    found: Envelope,
    project: Project | None = None,
    *,
    checks: Sequence[GoverningCheck] | None = None,
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    detail: Detail = "members",
) -> Sheet:
    """Return the calculation sheet of this envelope; see ``trusscalc.sheet.envelopesheet.compose_envelope``."""
    return compose_envelope(
        found,
        governing_checks(found) if checks is None else checks,
        project,
        truss_text=truss_text,
        places=places,
        drawings=drawings,
        detail=detail,
    )


def _influence_sheet(
    line: InfluenceLine,
    project: Project | None = None,
    *,
    trains: Sequence[Train] = (),
    extremes: tuple[Extreme, Extreme] | None = None,
    train: str = "",
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
) -> Sheet:
    """Return the calculation sheet of this line; see ``trusscalc.sheet.influencesheet.compose_influence``."""
    return compose_influence(
        line,
        trains,
        extremes,
        project,
        train=train,
        truss_text=truss_text,
        places=places,
        drawings=drawings,
    )


def _comparison_sheet(
    comparison: Comparison,
    project: Project | None = None,
    *,
    derive: Iterable[str] | Literal["all", "differing"] = (),
    cuts: Mapping[str, OwnCut] | None = None,
    prefer: Preference = "",
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    verbatim: bool = False,
) -> Sheet:
    """Return the verification sheet of this comparison; see ``trusscalc.verifying.verification``."""
    from trusscalc.verifying import verification  # noqa: PLC0415 - the diagnosis costs as much as all of this

    return verification(
        comparison,
        project,
        derive=derive,
        cuts=cuts,
        prefer=prefer,
        truss_text=truss_text,
        places=places,
        drawings=drawings,
        verbatim=verbatim,
    )


def _comparison_bundle(comparison: Comparison, **_: Any) -> Bundle:
    """Return conclusion, table, joint loads drawn and the diagnosis as a notebook shows them."""
    from trusscalc.verifying import short_blocks  # noqa: PLC0415

    return bundle(short_blocks(comparison))


def _envelope_bundle(found: Envelope, **_: Any) -> Bundle:
    """Return the table of extremes and their diagram as a notebook shows them."""
    figures = (*envelope_diagrams(found), envelope_elevation(found)) if found.members else ()
    return bundle([extremes_table(States(found, ()), PLACES), *(Picture((figure,)) for figure in figures)])


def _line_bundle(line: InfluenceLine, **_: Any) -> Bundle:
    """Return an influence line drawn below its truss, and its ordinates."""
    return bundle([Picture((influence_figure(line),)), ordinate_table(line, PLACES)])


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
    return figure_bundle(truss_figure(truss.at_values()))


def _figure_bundle(figure: Figure, **_: Any) -> dict[str, Any]:
    """Return a figure as a notebook shows it."""
    return figure_bundle(figure)


def _number_bundle(number: Exact, **_: Any) -> Bundle:
    """Return an exact number typeset, and as the text that can be read in again."""
    return {"text/latex": rf"$\displaystyle {Latex().write(Value(number))}$", "text/plain": to_text(number)}


def _force_bundle(force: ForceCheck, **_: Any) -> Bundle:
    """Return everything about one force; decimals as the summary prints them."""
    items: list[tuple[str, Inline]] = [("Force", Run(bar(force.name)))]
    if force.exact is not None and force.decimal is not None:
        decimal = _decimal(force.decimal) if force.exact.symbols else decimal_text(force.exact, PLACES)
        items += [("Exact", Value(force.exact)), ("Decimal", Run(decimal.replace("-", "−")))]
    if force.sense is not None:
        items.append(("T/C", Run(force.sense)))
    if force.stiffness is not None:
        items.append(("Stiffness route", Run(_decimal(force.stiffness))))
    items.append(("Verdict", Run(f"{force.verdict}{f': {force.reason}' if force.reason else ''}")))
    items.append(("Rests on steps", Run(listed(map(str, force.steps)) or "none")))
    return bundle([Items(tuple((term, (content,)) for term, content in items))])


def _decimal(value: float) -> str:
    return f"{value:.{PLACES}f}".replace("-", "−")


def _equation_bundle(equation: Equation, **_: Any) -> Bundle:
    """Return an equation as a line in symbols, with what drops out of it."""
    return bundle(equation_blocks(equation))


def _step_bundle(step: Step, **_: Any) -> Bundle:
    """Return a step's facts; its card needs the check (``check.derivation(number)``)."""
    items = [(f"Step {step.number}", f"{step.kind}{f', section {step.letter}–{step.letter}' if step.letter else ''}")]
    items += [
        ("Equation", f"{about_words(equation.about)}, joints kept: {listed(equation.cut.kept)}")
        for equation in step.equations
    ]
    items += [(bar(name), to_text(value)) for name, value in step.results.items()]
    return bundle([facts(items)])


def _cut_bundle(cut: Cut, **_: Any) -> Bundle:
    """Return a cut's facts: what is kept, and which bars hold it."""
    return bundle([facts([("Kind", cut.kind), *kept_and_cut(cut)])])


def _own_cut_bundle(cut: OwnCut, **_: Any) -> Bundle:
    """Return an own cut drawn in its truss, and its facts."""
    return bundle([Picture((cut_figure(cut.truss, cut.kept),)), facts(kept_and_cut(cut))])


def _cut_report_bundle(report: CutReport, **_: Any) -> Bundle:
    """Return what a cut can do: what it decides or why not, and what each equation leaves unknown."""
    items = [
        *kept_and_cut(report.cut),
        ("Unknown", listed(map(bar, report.unknown)) or "none"),
        ("Solves alone", listed(map(bar, report.solves)) or "nothing"),
    ]
    if report.together:
        items.append(("Solves together", listed(map(bar, report.together))))
    items += why_nothing(report.reason, report.unknown, report.nearest)
    return bundle([facts(items), possibility_table(report.possibilities)])


def _answer_bundle(answer: Answer, **_: Any) -> Bundle:
    """Return what a cut gives: what is cut, each equation and what it leaves, what is solved, with free bodies."""
    return bundle(answer_blocks(answer, drawings=True))


def _mechanism_bundle(error: UnstableTrussError, **_: Any) -> dict[str, Any]:
    """Return the mechanism of a caught error as a notebook shows it: the truss thin, its moving joints with arrows."""
    if not isinstance(error.truss, Truss):
        return {"text/plain": str(error)}
    return figure_bundle(mechanism_figure(error.truss.at_values(), error))


CONVENIENCES: Final[dict[type, dict[str, Any]]] = {
    Sheet: {"save": save, "_repr_mimebundle_": _sheet_bundle},
    MemberCheck: {"sheet": _sheet, "derivation": _derivation, "_repr_mimebundle_": _check_bundle},
    Envelope: {"sheet": _envelope_sheet, "_repr_mimebundle_": _envelope_bundle},
    Comparison: {"sheet": _comparison_sheet, "_repr_mimebundle_": _comparison_bundle},
    InfluenceLine: {"sheet": _influence_sheet, "_repr_mimebundle_": _line_bundle},
    Derivation: {"_repr_mimebundle_": _derivation_bundle},
    Step: {"_repr_mimebundle_": _step_bundle},
    Equation: {"_repr_mimebundle_": _equation_bundle},
    ForceCheck: {"_repr_mimebundle_": _force_bundle},
    Exact: {"_repr_mimebundle_": _number_bundle},
    Figure: {"_repr_mimebundle_": _figure_bundle},
    Cut: {"_repr_mimebundle_": _cut_bundle},
    Truss: {"cut": own_cut, "explore": explore, "_repr_mimebundle_": _truss_bundle},
    OwnCut: {"report": cut_report, "equation": cut_equation, "_repr_mimebundle_": _own_cut_bundle},
    Answer: {"_repr_mimebundle_": _answer_bundle},
    CutReport: {"_repr_mimebundle_": _cut_report_bundle},
    UnstableTrussError: {"_repr_mimebundle_": _mechanism_bundle},
}
"""What ``attach`` hangs on which record."""

attach()
