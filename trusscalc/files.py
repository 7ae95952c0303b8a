"""Truss files: TOML text to records and back.

A truss file is untrusted text: nothing in it is evaluated, and every fault found is reported together, each
in one line with the line number where that is certain. What is written is read back before it is handed out.
"""

from __future__ import annotations

import os
import warnings
from typing import Any, Final

from trusscalc.combinationfiles import MOST_COMBINATIONS, combinations_in
from trusscalc.errors import FileFormatError, InputError, TrusscalcWarning
from trusscalc.exact import ONE, Exact
from trusscalc.filetext import data_of, faulty, one_line, text_of
from trusscalc.filewriting import BEHAVIOUR, FORMAT, UNGROUPED, text_of_stated
from trusscalc.loads import LoadCase
from trusscalc.project import LINES, Project, line_fault, title_fault
from trusscalc.replacefile import replace_file
from trusscalc.truss import Truss, did_you_mean
from trusscalc.trussfile import TrussFile, case_faults, combination_faults, name_faults

MOST: Final = {
    "joints": 10_000,
    "members": 40_000,
    "links": 10_000,
    "symbols": 40,
    "loads": 100_000,
    "cases": 1_000,
    "combinations": MOST_COMBINATIONS,
}
LOAD_TABLES: Final = ("chains", "trains", "moving", "panel_loads", "published_combinations")
TABLES: Final = (
    *("units", "joints", "members", "supports", "symbols", "cases", "combinations", "behaviour", "project"),
    *LOAD_TABLES,
)
KEYS: Final = {
    "": ("format", "title", *TABLES),
    "units": ("length", "force"),
    "behaviour": BEHAVIOUR,
    "project": (*LINES, "names"),
}


# --- reading ----------------------------------------------------------------------------------------------


def read(path: str | os.PathLike[str]) -> TrussFile:
    """Return what a truss file states.

    Parameters
    ----------
    path : path
        A TOML file, see ``reads``.

    Raises
    ------
    FileFormatError
        When the file cannot be read or states something wrong; with every fault found in ``problems``.
    """
    return reads(text_of(path), one_line(os.fspath(path)))


def reads(text: str, source: str = "") -> TrussFile:
    """Return what the text of a truss file states.

    Parameters
    ----------
    text : str
        TOML 1.0, ``format = 1``.
    source : str
        Where the text is from, for messages.

    Raises
    ------
    FileFormatError
        With every fault found in ``problems``: each names the source, the line where that is certain, the
        key, what is wrong and what to do.

    Warns
    -----
    TrusscalcWarning
        As ``Truss`` does.

    Examples
    --------
    >>> stated = reads('''
    ... format = 1
    ... [joints]
    ... A = [0, 0]
    ... B = [4, 0]
    ... C = [2, "2*sqrt(3)"]
    ... [members]
    ... rafters = ["A-C", "B-C"]
    ... tie = ["A-B"]
    ... [supports]
    ... A = "pin"
    ... B = "roller"
    ... [cases.snow]
    ... C = [0, -12]
    ... ''')
    >>> [member.name for member in stated.truss.members], stated.case("snow").loads[0].joint
    (['A-C', 'B-C', 'A-B'], 'C')
    """
    data = data_of(text, source)
    problems: list[str] = []
    _check_format(data, source, problems)
    _unknown_keys(data, "", problems)
    tables = {name: _table(data, name, problems) for name in TABLES}
    for name in ("units", "behaviour", "project"):
        _unknown_keys(tables[name], name, problems)
    _check_counts(tables, problems)
    if problems and any("too many" in problem for problem in problems):
        raise faulty(problems, text, source)
    symbols = _symbols(tables["symbols"], problems)
    truss = _truss(data, tables, symbols, problems)
    cases = _cases(tables["cases"], symbols, problems)
    combinations = combinations_in(tables["combinations"], problems)
    project = _project(tables["project"], problems)
    loads = _load_tables(tables, symbols, truss, problems)
    if symbols and not cases and tables["panel_loads"]:  # a file's symbols travel with its cases
        cases = [LoadCase(next(iter(tables["panel_loads"])), {}, symbols=symbols)]
    stated_names = (*tables["cases"], *tables["panel_loads"])
    problems += case_faults(list(tables["joints"]), cases)
    problems += combination_faults(stated_names, combinations, moving=list(tables["moving"]))
    if truss is not None and project is not None:
        problems += name_faults(truss, project)
        if not problems:
            try:
                return TrussFile(truss, tuple(cases), tuple(combinations), project, **loads)
            except InputError as fault:
                problems += fault.problems
    raise faulty(problems, text, source)


def _load_tables(
    tables: dict[str, dict[str, Any]], symbols: dict[str, Exact], truss: Truss | None, problems: list[str]
) -> dict[str, Any]:
    """Return what the tables of loads state, as TrussFile's fields; most files have none of them."""
    if not any(tables[name] for name in LOAD_TABLES):
        return {}
    from trusscalc.filetables import load_tables  # noqa: PLC0415 - see above

    units = (truss.force, truss.length) if truss else ("kN", "m")
    return load_tables({name: tables[name] for name in LOAD_TABLES}, symbols, units, problems)


def _check_format(data: dict[str, Any], source: str, problems: list[str]) -> None:
    if "format" not in data:
        problems.append("format: is missing; write format = 1 at the top")
    elif type(data["format"]) is not int or data["format"] != FORMAT:
        shown = one_line(repr(data["format"]))[:40]
        message = f"format: {shown} is not known to this version, which reads format = {FORMAT}"
        raise FileFormatError(message, source=source)


def _unknown_keys(table: dict[str, Any], name: str, problems: list[str]) -> None:
    known = KEYS[name]
    problems += [
        f"{f'[{name}] ' if name else ''}{key}: unknown key{did_you_mean(key, known)}"
        for key in table
        if key not in known
    ]


def _table(data: dict[str, Any], name: str, problems: list[str]) -> dict[str, Any]:
    table = data.get(name, {})
    if isinstance(table, dict):
        return table
    problems.append(f"{name}: a table is needed; write [{name}] on a line of its own and its entries below")
    return {}


def _check_counts(tables: dict[str, dict[str, Any]], problems: list[str]) -> None:
    def inner(table: dict[str, Any]) -> int:
        return sum(len(item) for item in table.values() if isinstance(item, (dict, list)))

    counts = {
        "joints": len(tables["joints"]),
        "members": inner(tables["members"]),
        "links": len(tables["supports"]) + inner(tables["supports"]),
        "symbols": len(tables["symbols"]),
        "loads": inner(tables["cases"]) + inner(tables["combinations"]),
        "cases": len(tables["cases"]),
        "combinations": len(tables["combinations"]),
    }
    problems += [
        f"too many {name}: {count:,}, and at most {MOST[name]:,} are read"
        for name, count in counts.items()
        if count > MOST[name]
    ]


def _truss(
    data: dict[str, Any], tables: dict[str, dict[str, Any]], symbols: dict[str, Exact], problems: list[str]
) -> Truss | None:
    title = data.get("title", "")
    if fault := line_fault(title):
        problems.append(f"title: {fault}")
    units = {}
    for key, usual in (("length", "m"), ("force", "kN")):
        units[key] = tables["units"].get(key, usual)
        if type(units[key]) is not str:
            problems.append(f'[units] {key}: text is needed, in quotes, such as "{usual}"')
            units[key] = usual
    behaviour = {}
    for key in KEYS["behaviour"]:
        names = tables["behaviour"].get(key, [])
        if not isinstance(names, list) or not all(type(name) is str for name in names):
            problems.append(f"[behaviour] {key}: a list of names is needed")
            names = []
        behaviour[key] = names
    problems += [f"[members] {group}: {fault}" for group in tables["members"] if (fault := line_fault(group))]
    try:
        return Truss(
            tables["joints"],
            tables["members"],
            tables["supports"],
            title=title,
            length=units["length"],
            force=units["force"],
            tension_only=behaviour["tension_only"],
            no_uplift=behaviour["no_uplift"],
            symbols=symbols,
        )
    except InputError as fault:
        problems += fault.problems
    return None


def _symbols(table: dict[str, Any], problems: list[str]) -> dict[str, Exact]:
    """Return the symbols; a wrong value counts as 1 while the rest of the file is looked through."""
    values: dict[str, Exact] = {}
    for name, value in table.items():
        try:
            values |= dict(LoadCase("", {}, symbols={name: value}).symbols)
        except InputError as fault:
            problems += fault.problems
            if name.isidentifier():
                values[name] = ONE
    return values


def _cases(tables: dict[str, Any], symbols: dict[str, Exact], problems: list[str]) -> list[LoadCase]:
    cases = []
    for name, table in tables.items():
        if fault := title_fault(name):
            problems.append(f"[cases] {name}: {fault}")
        if not isinstance(table, dict):
            problems.append(f"[cases] {name}: a table is needed, such as [cases.dead] with L1 = [0, -120] below")
            continue
        try:
            cases.append(LoadCase(name, table, symbols=symbols))
        except InputError as fault:
            problems += fault.problems
            # loads on joints that are not there are still to be found
            cases.append(LoadCase(name, dict.fromkeys(table, (0, 0))))
    return cases


def _project(table: dict[str, Any], problems: list[str]) -> Project | None:
    try:
        return Project(**{key: value for key, value in table.items() if key in KEYS["project"]})
    except InputError as fault:
        problems += fault.problems
    return None


# --- writing ----------------------------------------------------------------------------------------------


def writes(truss_file: TrussFile) -> str:
    """Return the text of a truss file that reads back to an equal TrussFile.

    Parameters
    ----------
    truss_file : TrussFile
        Members without a group are written as one group, ``members``.

    Raises
    ------
    InputError
        When it holds something a truss file cannot hold: a number longer than the reader takes, say.
    """
    text = text_of_stated(truss_file)
    _prove(text, truss_file)
    return text


def write(truss_file: TrussFile, path: str | os.PathLike[str]) -> None:
    """Write a truss file; the file appears complete or not at all.

    Parameters
    ----------
    truss_file : TrussFile
        What to write.
    path : path
        Where; a file already there is replaced.

    Raises
    ------
    InputError
        As ``writes``; nothing is written then.
    OSError
        When the place cannot be written to.
    """
    replace_file(path, writes(truss_file).encode())


def _prove(text: str, truss_file: TrussFile) -> None:
    """Read the text back: what cannot be read again must not be filed."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", TrusscalcWarning)
            again = reads(text)
    except FileFormatError as problem:
        raise InputError([f"cannot be written to a truss file: {fault}" for fault in problem.problems]) from None
    if _compared(again) != _compared(truss_file):
        message = "cannot be written to a truss file: it would not read back the same"
        raise InputError(message)


def _compared(truss_file: TrussFile) -> tuple[object, ...]:
    truss = truss_file.truss
    groups = [member.group or UNGROUPED for member in truss.members]
    names = [member.name for member in truss.members]
    behaviour = (truss.tension_only, truss.no_uplift)
    head = (truss.title, truss.length, truss.force, truss.joints, names, groups, truss.supports, behaviour)
    loads = (truss_file.chains, truss_file.trains, truss_file.moving, truss_file.panel_loads, truss_file.published)
    return (*head, truss_file.cases, truss_file.combinations, truss_file.project, *loads)
