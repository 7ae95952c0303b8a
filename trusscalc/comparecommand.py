"""The command ``compare``: submitted results against ours, what would explain the differences, and the sheet of it."""

from __future__ import annotations

import argparse
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final, Literal

from trusscalc.errors import InputError

if TYPE_CHECKING:
    from trusscalc.blind import Frozen
    from trusscalc.comparison import Comparison
    from trusscalc.explanations import Explanation
    from trusscalc.trussfile import TrussFile

Show = Callable[[argparse.Namespace, Callable[[], dict[str, Any]], Callable[[], Sequence[str]]], None]
"""Prints a result as JSON or as lines."""
Tell = Callable[[str], None]
"""Prints a remark beside the result."""

AGREED, DISAGREED = 0, 1
CONVENTIONS: Final = {"tension": "tension positive", "compression": "compression positive", "detect": "detect"}


def add_compare(commands: Any, show: Show, tell: Tell) -> None:
    """Add the command to a parser's commands."""
    compare = commands.add_parser("compare", help="hold submitted results against ours, and find what went wrong")
    compare.add_argument("file", metavar="FILE.toml", help="the truss file")
    compare.add_argument(
        "results", metavar="results.csv", nargs="?", default="", help="the submitted table (left out: see --blind)"
    )
    compare.add_argument("--case", required=True, help="a load case or a combination of the truss file")
    compare.add_argument("--members", default="all", help="A-B,C-D: the members that must be there and agree; or all")
    compare.add_argument("--json", action="store_true", help="print the whole result as JSON")
    _add_reading(compare)
    compare.add_argument(
        "--relative", metavar="SHARE", default="", help="what may differ, as a share of ours: 0.001 or 0.1%%"
    )
    compare.add_argument("--absolute", metavar="SHARE", default="", help="and as a share of the largest force")
    compare.add_argument(
        "--blind",
        action="store_true",
        help="freeze our values, and tell their digest, before the table is opened; without a table only that",
    )
    compare.add_argument("--written-down", metavar="DIGEST", default="", help="the digest as it was noted then; blind")
    compare.add_argument("--out", default="", help="write the verification sheet too; its suffix says how")
    compare.add_argument("--derive", default="", metavar="A-B,C-D", help="on the sheet: derive these, or 'differing'")
    compare.add_argument("--verbatim", action="store_true", help="on the sheet: truss file and table word by word")
    compare.add_argument("--paper", choices=("A4", "US Letter"), default="A4", help="of a PDF")
    compare.set_defaults(run=lambda arguments: _run(arguments, show, tell))


def _add_reading(compare: argparse.ArgumentParser) -> None:
    """Add the options that say how the table is to be read."""
    compare.add_argument(
        "--columns", default="", metavar="member=...,force=...", help="columns by head or place from 1"
    )
    compare.add_argument(
        "--names", metavar="MAP.csv", help="our names and theirs; left out: [project.names] of the file"
    )
    compare.add_argument("--theirs", metavar="NAME", default="", help="what the table calls the case")
    compare.add_argument("--convention", choices=sorted(CONVENTIONS), help="what their plus sign means, or detect")
    compare.add_argument("--unit", default="", help="their unit of force, when the table does not state it")
    compare.add_argument(
        "--decimal", choices=(".", ","), default="", help="their decimal sign, when numbers do not tell"
    )
    compare.add_argument("--others", default="", metavar="A,B", help="names in the table of other structures, left out")


def _run(arguments: argparse.Namespace, show: Show, tell: Tell) -> int:
    from trusscalc.comparereport import compare_data, comparison_lines  # noqa: PLC0415
    from trusscalc.files import read  # noqa: PLC0415
    from trusscalc.verifying import explained  # noqa: PLC0415

    blind = bool(arguments.blind or arguments.written_down)
    _refuse(arguments, blind=blind)
    stated = read(arguments.file)
    if not arguments.results:
        return _only_frozen(arguments, show, _frozen(arguments, stated))
    comparison = _blindly(arguments, stated, tell) if blind else _compared(arguments, stated)
    found = explained(comparison)
    agreed, written = comparison.agreed, list[str]()
    if arguments.out:
        agreed, told = _written(arguments, stated, comparison, found)
        written.append(told)
    show(
        arguments,
        lambda: compare_data(comparison, found),
        lambda: [*comparison_lines(comparison, found), *written],
    )
    return AGREED if agreed else DISAGREED


def _refuse(arguments: argparse.Namespace, *, blind: bool) -> None:
    """Raise for options that do not go together, before any work is done."""
    if not (arguments.results or blind):
        message = "name the submitted table as well; only --blind does without one"
        raise InputError(message)
    if arguments.out and not arguments.results:
        if not arguments.out.lower().endswith(".txt"):
            message = f"{arguments.out}: frozen values are written as text; give a name that ends in .txt"
            raise InputError(message)
    elif arguments.out:
        from trusscalc.display import refuse_unwritable  # noqa: PLC0415

        refuse_unwritable(arguments.out)
    elif arguments.derive or arguments.verbatim:
        message = "--derive and --verbatim are for the sheet; name it with --out"
        raise InputError(message)


# --- comparing --------------------------------------------------------------------------------------------


def _compared(arguments: argparse.Namespace, stated: TrussFile) -> Comparison:
    from trusscalc.compare import compare_submitted  # noqa: PLC0415
    from trusscalc.submitted import read_submitted  # noqa: PLC0415

    submitted = read_submitted(Path(arguments.results), stated.truss, **_reading(arguments, stated))
    return compare_submitted(
        stated,
        submitted,
        arguments.case,
        theirs=arguments.theirs,
        members=_listed(arguments.members),
        **_criterion(arguments),
    )


def _blindly(arguments: argparse.Namespace, stated: TrussFile, tell: Tell) -> Comparison:
    from trusscalc.blind import reveal  # noqa: PLC0415

    ours = _frozen(arguments, stated)
    tell(f"our values are frozen, and {arguments.results} is not opened yet: SHA-256 {ours.digest}")
    return reveal(
        ours,
        Path(arguments.results),
        theirs=arguments.theirs,
        written_down=arguments.written_down,
        **_reading(arguments, stated),
    )


def _frozen(arguments: argparse.Namespace, stated: TrussFile) -> Frozen:
    from trusscalc.blind import frozen  # noqa: PLC0415

    return frozen(stated, arguments.case, _listed(arguments.members), **_criterion(arguments))


def _only_frozen(arguments: argparse.Namespace, show: Show, ours: Frozen) -> int:
    """Print our frozen values, or write them, without any table."""
    from trusscalc.replacefile import replace_file  # noqa: PLC0415

    lines = ours.text.splitlines()
    if arguments.out:
        replace_file(Path(arguments.out), ours.text.encode())
        lines = [f"{arguments.out}: our values, frozen"]
    data = {"frozen": {"digest": ours.digest, "text": ours.text}}
    show(arguments, lambda: data, lambda: [*lines, f"SHA-256, to be written down: {ours.digest}"])
    return DISAGREED if ours.ours.faults else AGREED


def _written(
    arguments: argparse.Namespace, stated: TrussFile, comparison: Comparison, found: tuple[Explanation, ...]
) -> tuple[bool, str]:
    """Write the sheet; return whether all agrees on it, and what to say of it."""
    from trusscalc.display import save  # noqa: PLC0415
    from trusscalc.verifying import verification  # noqa: PLC0415

    derive = _listed(arguments.derive) if arguments.derive else ()
    sheet = verification(
        comparison,
        stated.project,
        explanations=found,
        derive="differing" if arguments.derive.strip() == "differing" else derive,
        truss_text=Path(arguments.file).read_bytes().decode("utf-8-sig"),
        verbatim=arguments.verbatim,
    )
    place = save(sheet, arguments.out, paper=arguments.paper)
    return sheet.origin.agreed, f"{place}: the verification sheet"


# --- options ----------------------------------------------------------------------------------------------


def _reading(arguments: argparse.Namespace, stated: TrussFile) -> dict[str, Any]:
    """Return the options of ``read_submitted``."""
    return {
        "columns": arguments.columns or None,
        "names": Path(arguments.names) if arguments.names else stated.project.names or None,
        "convention": CONVENTIONS[arguments.convention] if arguments.convention else "",
        "unit": arguments.unit,
        "decimal": arguments.decimal,
        "others": [name.strip() for name in arguments.others.split(",") if name.strip()],
    }


def _criterion(arguments: argparse.Namespace) -> dict[str, str]:
    """Return those parts of the criterion that are stated; ``0.1%`` is a share too."""
    given = {"relative": arguments.relative.strip(), "absolute": arguments.absolute.strip()}
    return {
        name: f"({text.removesuffix('%')})/100" if text.endswith("%") else text for name, text in given.items() if text
    }


def _listed(text: str) -> list[str] | Literal["all"]:
    return "all" if text.strip() == "all" else [name.strip() for name in text.split(",") if name.strip()]
