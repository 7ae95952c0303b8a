"""The command line: check a truss file, write its calculation sheet, derive a filed sheet again.

Exit codes: 0 all agree; 1 something disagrees, is undecided or was altered; 2 bad input or an unstable truss, told on
stderr, and nothing written.
"""

from __future__ import annotations

import argparse
import json
import sys
import warnings
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from trusscalc.comparecommand import add_compare
from trusscalc.errors import InputError, TrusscalcError, TrusscalcWarning

if TYPE_CHECKING:
    from trusscalc.chains import Chain
    from trusscalc.envelopes import Envelope
    from trusscalc.influence import InfluenceLine
    from trusscalc.membercheck import MemberCheck
    from trusscalc.sheet.blocks import Sheet
    from trusscalc.trains import Train
    from trusscalc.trussfile import TrussFile

AGREED, DISAGREED, REFUSED = 0, 1, 2


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code."""
    try:
        arguments = _parser().parse_args(argv)
    except SystemExit as leaving:  # --help, or arguments that argparse has already complained about
        return int(leaving.code or AGREED)
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always", TrusscalcWarning)
        try:
            code = int(arguments.run(arguments))
        except (TrusscalcError, OSError) as problem:
            _tell(str(problem))
            code = REFUSED
    for warning in caught:
        if issubclass(warning.category, TrusscalcWarning):
            _tell(f"warning: {warning.message}")
    return code


def _print(text: str) -> None:
    """Print a result; characters the terminal does not have are escaped rather than fatal."""
    encoding = sys.stdout.encoding or "utf-8"
    print(text.encode(encoding, errors="backslashreplace").decode(encoding))  # noqa: T201


def _prints(text: str) -> bool:
    try:
        text.encode(sys.stdout.encoding or "utf-8")
    except UnicodeEncodeError:
        return False
    return True


def _tell(problems: str) -> None:
    """Print each problem on a line of its own."""
    for problem in problems.split("\n"):
        print(f"trusscalc: {problem}", file=sys.stderr)  # noqa: T201


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="trusscalc", description="Independent hand checks of truss member forces.")
    commands = parser.add_subparsers(dest="command", required=True)
    check = commands.add_parser("check", help="derive chosen members by hand methods and compare with stiffness")
    sheet = commands.add_parser("sheet", help="write the calculation sheet of chosen members")
    for command in (check, sheet):
        command.add_argument("file", metavar="FILE.toml", help="the truss file")
    check.add_argument("--json", action="store_true", help="print the whole result as JSON")
    check.set_defaults(run=_check)
    sheet.add_argument("--out", required=True, help="the sheet; its suffix says how it is written")
    sheet.add_argument("--paper", choices=("A4", "US Letter"), default="A4", help="of a PDF")
    sheet.set_defaults(run=_sheet)
    recheck = commands.add_parser("recheck", help="derive a filed sheet again and compare it with what it shows")
    recheck.add_argument("file", metavar="SHEET", help="a filed notebook (.ipynb), page (.html) or PDF")
    recheck.add_argument("--against", metavar="FILE.toml", help="for a PDF: the truss file or filed page it goes with")
    recheck.add_argument("--member", default="", help="for a PDF of an influence line: its force, with --along")
    recheck.add_argument("--along", default="", help="for a PDF of an influence line: its chain")
    recheck.add_argument("--train", default="", help="for a PDF of an influence line: the train on it")
    recheck.set_defaults(run=_recheck)
    _add_loads(commands)
    add_compare(commands, _result, _tell)
    for command, needed in ((check, True), (sheet, True), (recheck, False)):
        command.add_argument("--case", required=needed, help="a load case or a combination")
        command.add_argument("--members", required=needed, help="A-B,C-D or all")
        command.add_argument(
            "--keep",
            action="append",
            default=[],
            metavar="A-B=J1,J2,...",
            help="derive member A-B from the cut that keeps these joints (may be given again for other members)",
        )
        command.add_argument("--prefer", choices=("sections", "joints"), default="", help="what to lean to")
    for command in (sheet, recheck):
        command.add_argument(
            "--detail",
            choices=("members", "all", "summary"),
            default="members",
            help="derivations: of more than twelve members those that govern first, all in one place, or none",
        )
        command.add_argument(
            "--graphics",
            action="store_true",
            help="an appendix of force polygons and, where it exists, Maxwell's diagram",
        )
    return parser


def _add_loads(commands: Any) -> None:
    """Add the commands for loads that move and combinations that vary."""
    influence = commands.add_parser("influence", help="influence line of a member or reaction, and a train on it")
    influence.add_argument("--member", required=True, help="a member such as A-B, or a reaction such as L0.y")
    influence.add_argument("--along", required=True, help="a chain of the file, or joints such as L0,L1,L2")
    influence.add_argument("--train", default="", help="a train of the file, or a published one by its name")
    influence.set_defaults(run=_influence)
    envelope = commands.add_parser("envelope", help="largest and least forces over all combinations")
    envelope.add_argument("--members", required=True, help="A-B,C-D or all")
    envelope.add_argument("--combinations", metavar="TABLE", help="further combinations, a TOML or CSV table")
    envelope.set_defaults(run=_envelope)
    envelope.add_argument(
        "--detail",
        choices=("members", "all", "summary"),
        default="members",
        help="of the sheet: derivations of more than twelve members those that govern first, all in one place, or none",
    )
    for command in (influence, envelope):
        command.add_argument("file", metavar="FILE.toml", help="the truss file")
        command.add_argument("--json", action="store_true", help="print the whole result as JSON")
        command.add_argument("--out", default="", help="write the calculation sheet too; its suffix says how")
        command.add_argument("--paper", choices=("A4", "US Letter"), default="A4", help="of a PDF")


def _names(text: str) -> list[str] | Literal["all"]:
    return "all" if text.strip() == "all" else [name.strip() for name in text.split(",") if name.strip()]


def _checked(arguments: argparse.Namespace) -> tuple[TrussFile, MemberCheck]:
    from trusscalc.files import read  # noqa: PLC0415
    from trusscalc.membercheck import check_members  # noqa: PLC0415
    from trusscalc.statics.owncuts import own_cut  # noqa: PLC0415

    stated = read(arguments.file)
    cuts = {}
    for text in arguments.keep:
        member, _, joints = text.partition("=")
        kept = [name.strip() for name in joints.split(",") if name.strip()]
        cuts[member.strip()] = own_cut(stated.truss, keep=kept)
    case = stated.case(arguments.case)
    names = _names(arguments.members)
    own_checks = arguments.command != "check"  # only a sheet shows them
    return stated, check_members(stated.truss, case, names, cuts=cuts, prefer=arguments.prefer, own_checks=own_checks)


def _check(arguments: argparse.Namespace) -> int:
    from trusscalc.report import check_data, verdict_lines  # noqa: PLC0415

    _, check = _checked(arguments)
    _result(arguments, lambda: check_data(check), lambda: verdict_lines(check))
    return AGREED if check.agreed else DISAGREED


def _result(
    arguments: argparse.Namespace, data: Callable[[], dict[str, Any]], lines: Callable[[], Sequence[str]]
) -> None:
    """Print a result as JSON or as lines."""
    if arguments.json:
        _print(json.dumps(data(), ensure_ascii=not _prints("é√"), indent=1))
    else:
        _print("\n".join(lines()))


def _sheet(arguments: argparse.Namespace) -> int:
    from trusscalc.display import refuse_unwritable, save  # noqa: PLC0415

    refuse_unwritable(arguments.out)
    stated, check = _checked(arguments)
    place = save(_composed(arguments, stated, check), arguments.out, paper=arguments.paper)
    told = "all agree" if check.agreed else "not all agree: see its first lines"
    _print(f"{place}: {len(check.members)} of {check.statics.members} members, {told}")
    return AGREED if check.agreed else DISAGREED


def _composed(arguments: argparse.Namespace, stated: TrussFile, check: MemberCheck) -> Sheet:
    """Return the sheet; it echoes the truss file as it stands, so that its digest on the sheet is the file's own."""
    from trusscalc.sheet.compose import compose  # noqa: PLC0415

    text = _text_of(arguments.file)
    return compose(check, stated.project, truss_text=text, detail=arguments.detail, graphics=arguments.graphics)


def _text_of(path: str) -> str:
    return Path(path).read_bytes().decode("utf-8-sig")


def _recheck(arguments: argparse.Namespace) -> int:
    from trusscalc.recheck import derived_again, recheck, recheck_pdf  # noqa: PLC0415

    if arguments.against is None:
        report = recheck(arguments.file)
    else:
        holds_input = arguments.against.lower().endswith((".html", ".htm", ".ipynb"))
        if not (arguments.file.lower().endswith(".pdf") and (holds_input or arguments.members or arguments.member)):
            message = (
                "--against is for a PDF: the notebook or page filed with it; or its truss file, together with --case "
                "and --members (an envelope has no case; an influence line has --member, --along and --train)"
            )
            raise InputError(message)
        filed, arguments.file = arguments.file, arguments.against
        report = recheck_pdf(filed, derived_again(arguments.file) if holds_input else _written_again(arguments))
    _print("\n".join(report.lines()))
    return AGREED if report.matches else DISAGREED


def _written_again(arguments: argparse.Namespace) -> Sheet:
    """Return the sheet that a PDF should hold."""
    if arguments.member:
        return _influence_sheet(arguments, *_found_line(arguments))
    if arguments.case:
        return _composed(arguments, *_checked(arguments))
    arguments.combinations = None
    return _envelope_sheet(arguments, _found_envelope(arguments))


# --- loads that move and combinations that vary -----------------------------------------------------------


def _influence(arguments: argparse.Namespace) -> int:
    from trusscalc.display import refuse_unwritable, save  # noqa: PLC0415
    from trusscalc.influence import UndecidedError  # noqa: PLC0415
    from trusscalc.loadreport import influence_data, influence_text, undecided_influence_data  # noqa: PLC0415
    from trusscalc.travel import extremes  # noqa: PLC0415

    if arguments.out:
        refuse_unwritable(arguments.out)
    try:
        stated, line, trains = _found_line(arguments)
    except UndecidedError as problem:
        reason = str(problem)
        joints = _stated_chain(arguments).joints
        data = undecided_influence_data(problem.name, joints, reason, arguments.train)
        _result(arguments, lambda: data, lambda: [reason])
        return DISAGREED
    found = extremes(line, trains) if trains else None
    agreed = line.agreed
    lines: list[str] = []
    if arguments.out:
        sheet = _influence_sheet(arguments, stated, line, trains)
        agreed = sheet.origin.agreed
        lines.append(_told_of(save(sheet, arguments.out, paper=arguments.paper), sheet))
    units = (stated.truss.force, stated.truss.length)
    _result(
        arguments,
        lambda: influence_data(line, arguments.train, found),
        lambda: lines or influence_text(line, units, arguments.train, found),
    )
    return AGREED if agreed else DISAGREED


def _stated_chain(arguments: argparse.Namespace) -> Chain:
    from trusscalc.files import read  # noqa: PLC0415

    return read(arguments.file).chain(arguments.along)


def _found_line(arguments: argparse.Namespace) -> tuple[TrussFile, InfluenceLine, tuple[Train, ...]]:
    from trusscalc.files import read  # noqa: PLC0415
    from trusscalc.influence import influence_line  # noqa: PLC0415

    stated = read(arguments.file)
    chain = stated.chain(arguments.along)
    trains = stated.train(arguments.train) if arguments.train else ()
    return stated, influence_line(stated.truss, arguments.member, chain), trains


def _influence_sheet(
    arguments: argparse.Namespace, stated: TrussFile, line: InfluenceLine, trains: tuple[Train, ...]
) -> Sheet:
    from trusscalc.sheet.influencesheet import compose_influence  # noqa: PLC0415

    text = _text_of(arguments.file)
    return compose_influence(line, trains, None, stated.project, train=arguments.train, truss_text=text)


def _envelope(arguments: argparse.Namespace) -> int:
    from trusscalc.display import refuse_unwritable, save  # noqa: PLC0415
    from trusscalc.loadreport import envelope_data, envelope_text  # noqa: PLC0415

    if arguments.out:
        refuse_unwritable(arguments.out)
    found = _found_envelope(arguments)
    agreed = found.agreed
    lines: list[str] = []
    if arguments.out:
        sheet = _envelope_sheet(arguments, found)
        agreed = sheet.origin.agreed
        lines.append(_told_of(save(sheet, arguments.out, paper=arguments.paper), sheet))
    _result(arguments, lambda: envelope_data(found), lambda: lines or envelope_text(found))
    return AGREED if agreed else DISAGREED


def _found_envelope(arguments: argparse.Namespace) -> Envelope:
    from dataclasses import replace  # noqa: PLC0415

    from trusscalc.combinationfiles import read_combinations  # noqa: PLC0415
    from trusscalc.envelopes import envelope  # noqa: PLC0415
    from trusscalc.files import read  # noqa: PLC0415

    stated = read(arguments.file)
    if arguments.combinations:
        further = read_combinations(arguments.combinations)
        stated = replace(stated, combinations=(*stated.combinations, *further))
    return envelope(stated, _names(arguments.members))


def _envelope_sheet(arguments: argparse.Namespace, found: Envelope) -> Sheet:
    """Return the sheet; with further combinations it echoes a truss file that holds them too."""
    from trusscalc.governing import governing_checks  # noqa: PLC0415
    from trusscalc.sheet.envelopesheet import compose_envelope  # noqa: PLC0415

    text = "" if arguments.combinations else _text_of(arguments.file)
    project = found.stated.project
    return compose_envelope(found, governing_checks(found), project, truss_text=text, detail=arguments.detail)


def _told_of(place: Path, sheet: Sheet) -> str:
    told = "all agree" if sheet.origin.agreed else "not all agree: see its first lines"
    return f"{place}: {told}"


if __name__ == "__main__":
    sys.exit(main())
