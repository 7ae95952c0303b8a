"""An influence line as a calculation sheet: its derivation, its ordinates, and a train on it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from trusscalc.errors import InputError
from trusscalc.exacttext import to_text
from trusscalc.files import writes
from trusscalc.influence import InfluenceLine
from trusscalc.influencechecks import TrainCheck, shown_check, train_checks
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.project import LINES, Project
from trusscalc.sheet import front, influencefront, record
from trusscalc.sheet.blocks import (
    Block,
    Column,
    Heading,
    Inline,
    Items,
    Labelled,
    Lines,
    Name,
    Origin,
    Paragraph,
    Picture,
    Run,
    Sheet,
    Table,
    Value,
)
from trusscalc.sheet.compose import derivations, proven_options, read_again
from trusscalc.sheet.derivation import Writer, writer_of
from trusscalc.sheet.envelopesheet import CAUTIONS
from trusscalc.sheet.equations import plus
from trusscalc.sheet.influencefigure import influence_figure, target_words
from trusscalc.sheet.influencefront import Study, sense_words
from trusscalc.sheet.inputecho import input_echo
from trusscalc.sheet.marks import Figure
from trusscalc.sheet.numbering import numbered_through
from trusscalc.sheet.sameinput import same_truss
from trusscalc.sheet.traintables import RULES, effect_table, rules, share_table, train_table
from trusscalc.sheet.values import decimal_text, formula, in_a_row
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.statics.cuts import SUM_Y
from trusscalc.statics.steps import Equation
from trusscalc.trains import Train
from trusscalc.travel import Extreme
from trusscalc.travel import extremes as extremes_of
from trusscalc.trussfile import TrussFile

MOST_FORCES = 6
"""Columns of forces in one table of what the equations gave."""
METHOD = (
    "by hand: one set of cuts, chosen once, and the same equations with the unit load at each joint in turn, in exact "
    "arithmetic; beside it the exact equilibrium of all joints, and independently one displacement-method run for each "
    "position in floating point. The routes share the stated truss only"
)
NOT_VERBATIM = (
    "The truss file is not printed word by word: these tables, with chain, train and the title block, say all that it "
    "states of them. Its digest stands under Basis."
)
OTHERS = "The same equations for the other positions"


def compose_influence(
    line: InfluenceLine,
    trains: Sequence[Train] = (),
    extremes: tuple[Extreme, Extreme] | None = None,
    project: Project | None = None,
    *,
    train: str = "",
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
) -> Sheet:
    """Return the calculation sheet of an influence line, with a train on it if one is given.

    Parameters
    ----------
    line : InfluenceLine
        Derived by hand (``influence_line``).
    trains : sequence of Train
        One train, or those of a load model.
    extremes : (Extreme, Extreme), optional
        What they cause at most; found anew without.
    project : Project, optional
        The title block; without it, that of ``truss_text``.
    train : str
        The name under which the truss file has the trains, or a published one; '' for the name of a single train.
    truss_text : str
        The truss file as it was read, for echo and digest; '' writes one.
    places : int
        Decimal places of forces, 0 to 12.
    drawings : bool
        Whether figures are drawn.

    Raises
    ------
    InputError
        For a line without derivation, when ``truss_text`` states another truss, chain or train, or places are out of
        range.

    Examples
    --------
    >>> from trusscalc.influence import influence_line
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> sheet = compose_influence(influence_line(truss, "A-B", "A,C,B"), drawings=False)
    >>> [block.text for block in sheet.blocks if isinstance(block, Heading) and block.level == 2][3:5]
    ['Derivation of the largest ordinate', 'The same equations for the other positions']
    """
    proven_options(places)
    if not line.shown_joint:
        message = "this line was found without its derivation; make it with influence_line"
        raise InputError(message)
    trains = tuple(trains)
    train = train or (trains[0].name if len(trains) == 1 else "")
    text = truss_text or _written(line, trains, train, project or Project())
    stated = read_again(text)
    along = _proven(stated, line, trains, train)
    project = project or stated.project
    line = replace(line, truss=stated.truss.at_values())  # the echo is of the text, groups and all
    found = (extremes or extremes_of(line, trains)) if trains else None
    checks = train_checks(line, trains, found) if found else ()
    shown, *numbered = numbered_through((shown_check(line), *(check.check for check in checks)))
    study = Study(line, shown, train, trains, found, checks)
    summary = tuple(influencefront.summary(study, places))
    blocks: list[Block] = [
        front.title_block(stated.truss, project),
        *influencefront.opening(study, project),
        *summary,
        *([Picture((_figure(study, _larger(study)),))] if drawings else []),
        *influencefront.scope(study),
        *record.basis(stated.truss, line.tolerance, text, places, method=METHOD, codes=_references(trains)),
        *_echo(stated, project, text, places),
        *_largest_ordinate(study, places, drawings=drawings),
        *_others(study),
        *_with_train(study, stated, numbered, places, drawings=drawings),
        *_cross_check(study),
        *record.cautions(CAUTIONS if trains else (CAUTIONS[0], CAUTIONS[1], CAUTIONS[3])),
        *record.revisions(project),
    ]
    title = f"{influencefront.TITLE}: {stated.truss.title}" if stated.truss.title else influencefront.TITLE
    return Sheet(title, tuple(blocks), summary, _origin(study, project, text, along, places, drawings=drawings))


def _written(line: InfluenceLine, trains: tuple[Train, ...], train: str, project: Project) -> str:
    """Return a truss file that states what was looked at."""
    named = line.chain.name != f"{line.chain.joints[0]} to {line.chain.joints[-1]}"
    file = TrussFile(line.truss, project=project, chains=(line.chain,) if named else ())
    if trains and (len(trains) == 1 and not trains[0].source):
        file = replace(file, trains=trains)
    elif trains and not train:
        message = (
            "several trains: say by `train` under which name they are published, or give the text of the truss file"
        )
        raise InputError(message)
    return writes(file)


def _proven(stated: TrussFile, line: InfluenceLine, trains: tuple[Train, ...], train: str) -> str:
    """Return how the file calls the chain, once it is sure to state truss, chain and trains as they were looked at."""
    if not same_truss(stated.truss.at_values(), line.truss):
        message = "the text of the truss file states another truss than was looked at; give the text it was read from"
        raise InputError(message)
    along = line.chain.name if line.chain in stated.chains else ",".join(line.chain.joints)
    if stated.chain(along) != line.chain:
        message = f"the text of the truss file states no chain {line.chain.name!r} of these joints"
        raise InputError(message)
    if trains and stated.train(train) != trains:
        message = f"the text of the truss file states other trains under {train!r} than were looked at"
        raise InputError(message)
    return along


def _references(trains: Sequence[Train]) -> Sequence[tuple[str, tuple[Inline, ...]]]:
    by_source: dict[str, list[str]] = {}
    for each in trains:
        by_source.setdefault(each.source or "the user's own", []).append(each.name)
    items = [("Trains", (Run(f"{listed(names)}: {source}"),)) for source, names in by_source.items()]
    return items or record.NO_CODES


def _echo(stated: TrussFile, project: Project, text: str, places: int) -> list[Block]:
    case = LoadCase("", {}, symbols=list(stated.truss.symbols))
    return input_echo(stated.truss, case, project, text, places, verbatim=False, not_verbatim=NOT_VERBATIM)


def _larger(study: Study) -> TrainCheck | None:
    """Return the worst position with the larger force, None without a train or without an adverse position."""
    return max(study.checks, key=lambda check: abs(float(check.extreme.value)), default=None)


def _figure(study: Study, check: TrainCheck | None) -> Figure:
    if check is None:
        return influence_figure(study.line)
    return influence_figure(study.line, check.extreme, check.train)


# --- the line ---------------------------------------------------------------------------------------------


def _largest_ordinate(study: Study, places: int, *, drawings: bool) -> list[Block]:
    """Return the derivation with the unit load at the joint of the largest ordinate."""
    line = study.line
    writer = replace(writer_of(study.shown, places), sums="the sums above")
    unit = line.truss.force
    text = (
        f"A load of 1 {unit} downwards stands at {line.shown_joint}, where the ordinate is largest; forces in {unit} "
        "are then ordinates. All reactions come first; each step has a check by an equation not used before, as far as "
        "there is one."
    )
    steps = {step.number for step in study.shown.steps}
    return [
        Heading(2, "Derivation of the largest ordinate"),
        Paragraph((Run(text),)),
        *record.balance(writer),
        *derivations(writer, steps, drawings=drawings, headed=False),
        *_shear(study, writer),
    ]


def _shear(study: Study, writer: Writer) -> list[Block]:
    """Return a shear as the sum of the upward forces left of its section."""
    line = study.line
    if line.section is None:
        return []
    equation = Equation(SUM_Y, line.section.cut, line.shear_terms, ())
    entries, _ = writer.equations.entries(equation)
    panel = "–".join(line.section.panel)
    symbols = writer.equations.in_symbols(equation, entries)
    values = tuple(term.product for term in writer.equations.with_values(equation, entries))
    ordinate = line.ordinate(line.shown_joint)
    shear = (plus(Name("V", panel)),)
    label = f"Shear in panel {panel}: forces in y left of the section, upwards positive"
    lines = (
        Labelled(label, formula(shear, symbols)),
        Labelled("with values", formula(shear, values)),
        Labelled("hence", formula(shear, (plus(Value(ordinate)),))),
    )
    return [Lines(lines)]


def _others(study: Study) -> list[Block]:
    """Return what the same equations gave for every position of the unit load, in their order."""
    line = study.line
    names = list(line.found[line.chain.joints.index(line.shown_joint)]) if line.found else []
    if not names and line.section is None:
        return []
    blocks: list[Block] = [Heading(2, OTHERS)]
    parts = [names[start : start + MOST_FORCES] for start in range(0, len(names), MOST_FORCES)] or [[]]
    for place, part in enumerate(parts):
        last = place == len(parts) - 1 and line.section is not None
        rows = []
        for joint, forces, ordinate in zip(line.chain.joints, line.found, line.ordinates, strict=True):
            cells: list[Inline | None] = [in_a_row(forces[name]) if name in forces else None for name in part]
            rows.append((Run(joint), *cells, *([in_a_row(ordinate)] if last else [])))
        heads = [Column(bar(name), "right") for name in part]
        heads += [Column(bar(line.target), "right")] if last else []
        caption = (
            "Unit load downwards at each joint: the forces that the steps above give when its place is changed and "
            "nothing else, in the order of the steps."
        )
        blocks.append(Table((Column("unit load at"), *heads), tuple(rows), caption if place == len(parts) - 1 else ""))
    return blocks


# --- a train on it ----------------------------------------------------------------------------------------


def _with_train(
    study: Study, stated: TrussFile, numbered: Sequence[MemberCheck], places: int, *, drawings: bool
) -> list[Block]:
    """Return the train, how its force comes of the ordinates, and the hand checks with its axles placed."""
    if not study.trains or study.extremes is None:
        return []
    truss = study.line.truss
    blocks: list[Block] = [
        Heading(2, f"{study.name} on the line"),
        *([Items(tuple(told))] if (told := rules(stated, study.trains)) else []),
        train_table(study.trains, truss.force, truss.length),
        Paragraph((Run(RULES),), "note"),
    ]
    idle = [influencefront.extreme_sentence(study, extreme, places) for extreme in study.extremes if not extreme.value]
    blocks += [Paragraph((Run(sentence),)) for sentence in idle]
    for check in study.checks:
        what = f"{bar(study.line.target)}, {sense_words(study, check.extreme)}"
        blocks.append(effect_table(study.line, check.extreme, check.train, places, what))
        if drawings and check is not _larger(study):
            blocks.append(Picture((_figure(study, check),)))
    for check, own in zip(study.checks, numbered, strict=True):
        blocks += _placed(study, check, own, places, drawings=drawings)
    return blocks


def _placed(study: Study, check: TrainCheck, numbered: MemberCheck, places: int, *, drawings: bool) -> list[Block]:
    """Return the ordinary hand check of one worst position."""
    line = study.line
    writer = replace(writer_of(numbered, places, brief=True), sums="the sums above")
    value = (
        "nothing"
        if check.value is None
        else f"{decimal_text(check.value, places)} {line.truss.force}".replace("-", "−")
    )
    same = "as the ordinates gave, exactly" if check.value == check.extreme.value else "NOT what the ordinates gave"
    style = "plain" if check.value == check.extreme.value else "strong"
    return [
        Heading(2, f"Hand check with the train placed: {sense_words(study, check.extreme)}"),
        share_table(line, check.extreme, check.train, places),
        *record.balance(writer),
        *derivations(writer, {step.number for step in numbered.steps}, drawings=drawings, headed=False),
        Paragraph((Run(f"{_of_steps(study)}: {value}, {same}.", style),)),  # type: ignore[arg-type]
    ]


def _of_steps(study: Study) -> str:
    line = study.line
    if line.section is None:
        return f"{bar(line.target)} by these steps"
    return f"The shear in panel {'–'.join(line.section.panel)}, from these reactions and the loads left of the section"


def _cross_check(study: Study) -> list[Block]:
    line = study.line
    count = counted(len(line.ordinates), "position")
    ordinates = (
        f"{count}: by hand and by the equilibrium of all joints the same, exactly; by stiffness within the tolerance"
    )
    if not line.agreed:
        ordinates = f"NOT agreed at {listed(line.differing)}"
    items: list[tuple[str, tuple[Inline, ...]]] = [
        ("Count and rank", (Run(record.count_and_rank(study.shown)),)),
        *record.shared_redundancy(study.shown),
        ("Ordinates", (Run(ordinates),)),
    ]
    if study.checks:
        wrong = [sense_words(study, check.extreme) for check in study.checks if not check.agreed]
        told = f"do NOT agree: {listed(wrong)}" if wrong else "ordinates, ordinary hand check and stiffness route agree"
        items.append(("Train", (Run(told),)))
    stiffness = (Run("estimated condition number "), record.condition_size(line.condition))
    items += [("Stiffness route", stiffness), ("Independence", (Run(record.INDEPENDENCE),))]
    return [Heading(2, "Cross-check"), Items(tuple(items))]


def _origin(study: Study, project: Project, text: str, along: str, places: int, *, drawings: bool) -> Origin:
    line = study.line
    stated = [(joint, to_text(ordinate)) for joint, ordinate in zip(line.chain.joints, line.ordinates, strict=True)]
    words = zip(("train, largest", "train, least"), study.extremes or (), strict=False)
    stated += [(word, to_text(extreme.value)) for word, extreme in words]
    return Origin(
        truss_text=text,
        case="",
        members=(),
        places=places,
        project=tuple((key, getattr(project, key)) for key in LINES if getattr(project, key)),
        stated=tuple(stated),
        agreed=study.agreed,
        program=record.program(),
        prefer=line.prefer,
        names=tuple(sorted(project.names.items())),
        drawings=drawings,
        task="influence",
        target=line.target,
        along=along,
        train=study.name,
    )


__all__ = ["compose_influence", "target_words"]
