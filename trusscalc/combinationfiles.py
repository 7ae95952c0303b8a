"""Combinations as files state them: the tables of a truss file, and tables of their own in TOML or CSV.

A file of combinations is untrusted text like a truss file; every fault found is reported, each with its place.
"""

from __future__ import annotations

import csv
import io
import os
import re
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any, Final

from trusscalc.errors import FileFormatError, InexactNumberError, InputError
from trusscalc.exact import ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.filetext import LARGEST_FILE, capped, data_of, faulty, one_line, text_of
from trusscalc.loads import OPTIONAL, PAIR, Combination
from trusscalc.project import title_fault

Factor = Exact | tuple[Exact, ...]

MOST_COMBINATIONS: Final = 1_000
FORMAT: Final = 1
HEAD: Final = "combination"
PAIR_MARK: Final = "/"
_HEAD_START: Final = re.compile(rf'\s*"?{HEAD}"? *([,;\t])', re.IGNORECASE)


def combinations_in(tables: Mapping[str, Any], problems: list[str]) -> list[Combination]:
    """Return what the tables under ``[combinations]`` state; what is wrong is added to the problems.

    Parameters
    ----------
    tables : mapping of name to table
        Each a table of case = factor, a factor being a number or a list of two; ``optional`` lists cases.
    problems : list of str
        Where faults are added; a combination with a wrong factor is returned with 1 for every factor, so that
        cases that are not there can still be found.
    """
    combinations = []
    for name, table in tables.items():
        if fault := title_fault(name):
            problems.append(f"[combinations] {name}: {fault}")
        stated = table if isinstance(table, dict) else {}
        factors = {case: factor for case, factor in stated.items() if case != OPTIONAL}
        if not factors:
            problems.append(f'[combinations] {name}: a table of case = factor is needed, such as dead = "1.2"')
            continue
        try:
            combinations.append(Combination(name, factors, optional=stated.get(OPTIONAL, ())))
        except InputError as fault:
            problems += fault.problems
            combinations.append(Combination(name, dict.fromkeys(factors, 1)))
    return combinations


def read_combinations(path: str | os.PathLike[str]) -> tuple[Combination, ...]:
    """Return the combinations of a table of the user's own.

    Parameters
    ----------
    path : path
        A TOML file (suffix ``.toml``) with ``[combinations.NAME]`` as in a truss file; or a table in text, parted
        by commas, semicolons or tabs: its head is ``combination`` and a column for each case, each row a name and
        the factors. An empty cell: the case is not in it; ``1.25/0.90``: a pair; ``(1.6)``: optional. Where
        commas do not part the cells, a decimal comma is taken too.

    Raises
    ------
    FileFormatError
        With every fault found in ``problems``: each names the file, the row and the column (or the line of a TOML
        file), what is wrong and what to do.
    """
    source = one_line(os.fspath(path))
    text = text_of(path)
    if Path(path).suffix.lower() == ".toml":
        return _of_toml(text, source)
    problems: list[str] = []
    combinations = _of_table(text, problems)
    if not problems and not combinations:
        problems.append("states no combinations; write one on each row below the head")
    if problems:
        raise FileFormatError(capped(problems), source=source)
    return tuple(combinations)


def _of_toml(text: str, source: str) -> tuple[Combination, ...]:
    data = data_of(text, source)
    problems = [
        f"{key}: unknown key; only [combinations.NAME] is read here"
        for key in data
        if key not in ("format", "combinations")
    ]
    if data.get("format", FORMAT) != FORMAT or isinstance(data.get("format"), bool):
        problems.append(f"format: is not known to this version, which reads format = {FORMAT}")
    tables = data.get("combinations")
    if not isinstance(tables, dict) or not tables:
        problems.append('combinations: none are stated; write [combinations.NAME] with case = "1.2" below')
        tables = {}
    if len(tables) > MOST_COMBINATIONS:
        problems.append(_too_many(len(tables)))
        tables = {}
    combinations = combinations_in(tables, problems)
    if problems:
        raise faulty(problems, text, source)
    return tuple(combinations)


def _too_many(count: int) -> str:
    return f"too many combinations: {count:,}, and at most {MOST_COMBINATIONS:,} are read"


# --- tables in text ---------------------------------------------------------------------------------------


def _of_table(text: str, problems: list[str]) -> list[Combination]:
    start = _HEAD_START.match(text)
    if not start or len(text) > LARGEST_FILE:
        problems.append(
            f"the head has to start with {HEAD!r} and name the cases, parted by commas, semicolons or tabs"
            if not start
            else f"too large: more than {LARGEST_FILE:,} characters"
        )
        return []
    rows = _rows(text, start[1], problems)
    top, head = next(rows, (1, [""]))
    cases = [cell.strip() for cell in head[1:]]
    problems += _head_faults(f"row {top}", cases)
    combinations: list[Combination] = []
    if problems:
        return combinations
    for row, cells in rows:
        if len(cells) != len(head):
            remedy = "write every delimiter" + (", and decimals with a point" if start[1] == "," else "")
            problems.append(f"row {row}: has {len(cells)} cells, and the head has {len(head)}; {remedy}")
            continue
        before = len(problems)
        name, factors, optional = _of_row(f"row {row}", cases, cells, start[1], problems)
        if len(problems) == before:
            combinations.append(Combination(name, factors, optional=optional))
            if name in [each.name for each in combinations[:-1]]:
                problems.append(f"row {row}, column 1: {name!r} is already the name of another row; rename one")
    return combinations


def _rows(text: str, delimiter: str, problems: list[str]) -> Iterator[tuple[int, list[str]]]:
    """Yield the line on which each row ends and its cells; rows without any text are passed over."""
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True)
    count = 0
    try:
        for cells in reader:
            if not any(cell.strip() for cell in cells):
                continue
            if count > MOST_COMBINATIONS:
                problems.append(f"row {reader.line_num}: at most {MOST_COMBINATIONS:,} combinations are read")
                return
            count += 1
            yield reader.line_num, cells
    except csv.Error as fault:
        problems.append(f"row {reader.line_num}: is no row of cells: {fault}; check its quotes")


def _head_faults(where: str, cases: Sequence[str]) -> list[str]:
    faults = []
    for column, case in enumerate(cases, 2):
        if fault := title_fault(case):
            faults.append(f"{where}, column {column}: {fault}; the head names a case over each column of factors")
        elif case == OPTIONAL:
            faults.append(
                f"{where}, column {column}: no case may be called {OPTIONAL!r} here; write (1.6) in the cells"
            )
        elif case in cases[: column - 2]:
            faults.append(f"{where}, column {column}: the case {case!r} has a column already; join the two")
    return faults


def _of_row(
    where: str, cases: Sequence[str], cells: Sequence[str], delimiter: str, problems: list[str]
) -> tuple[str, dict[str, Factor], list[str]]:
    """Return a row's name, its factors and the cases it has as optional."""
    name, *stated = (cell.strip() for cell in cells)
    if fault := title_fault(name):
        problems.append(f"{where}, column 1: {fault}")
    factors: dict[str, Factor] = {}
    optional = []
    for column, (case, cell) in enumerate(zip(cases, stated, strict=True), 2):
        if not cell:
            continue
        factors[case] = ZERO
        in_brackets = _in_brackets(cell)
        if in_brackets:
            optional.append(case)
        try:
            factors[case] = _factors(cell[1:-1] if in_brackets else cell, delimiter)
        except InexactNumberError as fault:
            problems.append(f"{where}, column {column} ({case}): {fault}")
    if not factors:
        problems.append(f"{where}: {name[:40]!r} has no factor; write one under a case")
    return name, factors, optional


def _in_brackets(cell: str) -> bool:
    """Return whether one pair of brackets holds a whole cell, which ``(1 + 1)*(2)`` has not."""
    depth = 0
    for place, character in enumerate(cell):
        depth += (character == "(") - (character == ")")
        if not depth:
            return place == len(cell) - 1 > 0
    return False


def _factors(text: str, delimiter: str) -> Factor:
    parts = text.split(PAIR_MARK)
    if len(parts) > PAIR:
        message = f"{text[:40]!r}: one factor is needed, or the two of a pair such as 1.25/0.90"
        raise InexactNumberError(message)
    read = tuple(number(_with_point(part.strip()) if delimiter != "," else part.strip()) for part in parts)
    return read if read[1:] else read[0]


def _with_point(text: str) -> str:
    """Return a number with a decimal comma as one with a point; any other text as it is."""
    return text.replace(",", ".") if text.count(",") == 1 and "." not in text else text
