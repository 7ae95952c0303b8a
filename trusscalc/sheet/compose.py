"""A check as a calculation sheet: every part in its order, nothing computed that the check does not hold."""

from __future__ import annotations

import warnings
from collections.abc import Collection, Sequence
from dataclasses import replace

from trusscalc.errors import InputError, TrusscalcWarning
from trusscalc.exacttext import to_text
from trusscalc.files import reads, writes
from trusscalc.membercheck import MemberCheck
from trusscalc.project import LINES, Project
from trusscalc.sheet import figures, front, record
from trusscalc.sheet.appendix import graphic_statics
from trusscalc.sheet.atvalues import at_values
from trusscalc.sheet.blocks import Block, Derivation, Heading, Origin, Picture, Sheet
from trusscalc.sheet.derivation import Writer, writer_of
from trusscalc.sheet.detail import DETAILS, Detail, bodies_drawn_once, shown
from trusscalc.sheet.figures import Figure
from trusscalc.sheet.inputecho import input_echo
from trusscalc.sheet.sameinput import same_loads, same_truss
from trusscalc.sheet.words import found_in
from trusscalc.trussfile import TrussFile

MOST_PLACES = 12


def compose(
    check: MemberCheck,
    project: Project | None = None,
    *,
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    detail: Detail = "members",
    graphics: bool = False,
) -> Sheet:
    """Return the calculation sheet of a check.

    Parameters
    ----------
    check : MemberCheck
        What was found.
    project : Project, optional
        The title block; without it, that of ``truss_text``.
    truss_text : str
        The truss file as it was read, for echo and digest; '' writes one from the check.
    places : int
        Decimal places, 0 to 12.
    drawings : bool
        Whether figures are drawn.
    detail : str
        ``members``: all derivations in the main part; of more than twelve members those that govern, the others in
        an appendix. ``all``: all in the main part, each with its own free body, and the truss file word by word.
        ``summary``: none, and the scope says so.
    graphics : bool
        Whether an appendix of graphic statics is added: force polygons and, where it exists, Maxwell's diagram.

    Raises
    ------
    InputError
        When ``truss_text`` states another truss or other loads than were checked, places are out of range, or for
        another detail.

    Examples
    --------
    >>> from trusscalc.loads import LoadCase
    >>> from trusscalc.membercheck import check_members
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> sheet = compose(check_members(truss, LoadCase("dead", {"C": (0, -2)}), ["A-C"]))
    >>> [block.text for block in sheet.blocks if isinstance(block, Heading) and block.level == 2][:3]
    ['Scope', 'Basis', 'Input']
    """
    if not check.own_checks:
        message = "this check was made without the steps' own checks, which a sheet shows; make it with own_checks=True"
        raise InputError(message)
    proven_options(places, detail)
    stated = _stated(check, truss_text) if truss_text else None
    project = project or (stated.project if stated else Project())
    text = truss_text or writes(TrussFile(check.truss, (check.case,), (), project))
    check = replace(check, truss=(stated or read_again(text)).truss)  # the echo is of the text, groups and all
    writer = writer_of(check, places)
    drawn = at_values(check)
    told = detail != "summary"
    steps = shown(check, detail)
    summary = tuple(front.summary(writer, steps=told))
    blocks: list[Block] = [
        front.title_block(check.truss, project),
        *front.opening(check, project),
        *summary,
        *([Picture((figures.elevation(drawn if told else replace(drawn, steps=())),))] if drawings else []),
        *front.scope(check, detail),
        *record.basis(check.truss, check.tolerance, text, places),
        *input_echo(
            check.truss,
            check.case,
            project,
            text,
            places,
            verbatim=detail == "all",
            amounts=[part for load in check.case.loads for part in (load.fx, load.fy)],
        ),
        *record.loads(writer),
        *record.reactions(writer, steps=told),
        *derivations(writer, steps.main, drawings=drawings, each_drawn=detail == "all"),
        *record.cross_check(check),
        *([Picture((figures.result_drawing(drawn),))] if drawings else []),
        *record.cautions(),
        *record.revisions(project),
        *further_derivations(writer, steps.further, drawings=drawings),
        *(graphic_statics(check, places) if graphics else []),
    ]
    title = f"{front.TITLE}: {check.truss.title}" if check.truss.title else front.TITLE
    origin = _origin(check, project, text, places, drawings=drawings)
    return Sheet(title, tuple(blocks), summary, replace(origin, detail=detail, graphics=graphics))


def proven_options(places: int, detail: str = "members") -> None:
    """Raise an InputError for decimal places or a detail that no sheet has."""
    if not 0 <= places <= MOST_PLACES:
        message = f"{places} decimal places: give a number from 0 to {MOST_PLACES}"
        raise InputError(message)
    if detail not in DETAILS:
        message = f"detail {detail!r}: choose {', '.join(DETAILS[:-1])} or {DETAILS[-1]}"
        raise InputError(message)


def derivations(
    writer: Writer,
    numbers: Collection[int],
    *,
    drawings: bool = True,
    each_drawn: bool = False,
    headed: bool = True,
) -> list[Block]:
    """Return steps in their order; ``headed``: those that find reactions first stand under their own heading."""
    blocks: list[Block] = []
    heading = ""
    drawn = at_values(writer.check)
    once = {} if each_drawn or not drawings else bodies_drawn_once(writer.check)
    for step in writer.check.steps:
        if step.number not in numbers:
            continue
        links = all(writer.teller.is_link(name) for name in found_in(step))
        wanted = "Derivation of the reactions" if links and heading != "Derivation of the members" else ""
        wanted = wanted or "Derivation of the members"
        if headed and wanted != heading:
            heading = wanted
            blocks.append(Heading(2, heading))
        beside, drawn_as = once.get(step.number, (step.number, step.number))
        own: Sequence[Figure] = ()
        if drawings and beside == step.number:
            own = figures.free_body(drawn, next(other for other in drawn.steps if other.number == drawn_as))
        if own and drawn_as != beside:
            own = tuple(replace(figure, caption=f"{figure.caption} As step {drawn_as} uses it.") for figure in own)
        blocks.append(writer.derivation(step, own, drawn_with=beside if beside != step.number else 0))
    return blocks


def further_derivations(writer: Writer, numbers: Collection[int], *, drawings: bool = True) -> list[Block]:
    """Return the appendix of steps that no governing member rests on, [] when there are none."""
    blocks = derivations(writer, numbers, drawings=drawings)
    return [Heading(2, front.FURTHER), *(block for block in blocks if isinstance(block, Derivation))] if blocks else []


def derivation(check: MemberCheck, number: int, *, places: int = 3, drawings: bool = True) -> Derivation:
    """Return one step of a check as a block.

    Raises
    ------
    InputError
        When there is no step of that number.
    """
    drawn = at_values(check)
    for step, other in zip(check.steps, drawn.steps, strict=True):
        if step.number == number:
            return writer_of(check, places).derivation(step, figures.free_body(drawn, other) if drawings else ())
    message = f"there is no step {number}; the steps are 1 to {len(check.steps)}"
    raise InputError(message)


def summary(check: MemberCheck, places: int = 3) -> tuple[Block, ...]:
    """Return conclusion, summary table and notes alone."""
    return tuple(front.summary(writer_of(check, places)))


def _stated(check: MemberCheck, truss_text: str) -> TrussFile:
    """Return what the text states, once it is sure to be what was checked."""
    stated = read_again(truss_text)
    if not same_truss(stated.truss, check.truss):
        message = "the text of the truss file states another truss than was checked; give the text it was read from"
        raise InputError(message)
    if not same_loads(stated.case(check.case.name), check.case):
        message = f"the text of the truss file states other loads for {check.case.name!r} than were checked"
        raise InputError(message)
    return stated


def read_again(text: str) -> TrussFile:
    """Read a truss file that was read before, without its warnings."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", TrusscalcWarning)  # told when the truss was made
        return reads(text)


def _origin(check: MemberCheck, project: Project, text: str, places: int, *, drawings: bool) -> Origin:
    results = {name: value for step in check.steps for name, value in step.results.items()}
    return Origin(
        truss_text=text,
        case=check.case.name,
        members=tuple(check.members),
        places=places,
        project=tuple((key, getattr(project, key)) for key in LINES if getattr(project, key)),
        stated=tuple((name, to_text(value)) for name, value in results.items()),
        agreed=check.agreed,
        program=record.program(),
        cuts=tuple((name, tuple(kept)) for name, kept in sorted(check.cuts.items())),
        prefer=check.prefer,
        names=tuple(sorted(project.names.items())),
        drawings=drawings,
    )
