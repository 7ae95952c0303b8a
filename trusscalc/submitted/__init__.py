"""Results of other software, read: member forces, reactions and joint displacements as a table prints them.

Each value is kept exactly as printed, turned into our unit and sign, beside half a unit of its last digit. What is
malformed, unknown or stated twice is an error that names row and column; what is skipped is told in the notes.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace

from trusscalc.errors import FileFormatError, InputError
from trusscalc.exact import Exact, rational
from trusscalc.filetext import capped
from trusscalc.submitted.blocks import Blocks, blocks_of, stated_in
from trusscalc.submitted.heads import ROLES, Unit
from trusscalc.submitted.kept import Reading
from trusscalc.submitted.names import NameMatch, Names, name_map
from trusscalc.submitted.numbers import FORCE_UNITS
from trusscalc.submitted.rows import RowReader
from trusscalc.submitted.tables import Source, opened
from trusscalc.submitted.values import (
    COMPRESSION,
    DETECT,
    TENSION,
    Convention,
    Value,
    of_case,
    once_each,
    signed,
    values_of,
)
from trusscalc.truss import Truss, did_you_mean


@dataclass(frozen=True, slots=True)
class SubmittedForce:
    """One submitted member force.

    Attributes
    ----------
    member : str
        Our member.
    case : str
        Their case, '' when the table has no cases.
    force : Exact
        As printed, in our unit, tension positive.
    digits : Exact
        Half a unit of its last printed digit, in our unit.
    row : int
        Where it stands.
    theirs : str
        The member as they name it.
    printed : str
        The number as it stands in the table.
    """

    member: str
    case: str
    force: Exact
    digits: Exact
    row: int
    theirs: str
    printed: str = ""


@dataclass(frozen=True, slots=True)
class SubmittedReaction:
    """One submitted reaction, on the truss; ``name`` is ours (``L0.x``), else as for a force."""

    name: str
    joint: str
    axis: str
    case: str
    force: Exact
    digits: Exact
    row: int
    printed: str = ""


@dataclass(frozen=True, slots=True)
class SubmittedDisplacement:
    """One submitted displacement of a joint along x or y, in our unit of length, else as for a force."""

    joint: str
    axis: str
    case: str
    amount: Exact
    digits: Exact
    row: int
    printed: str = ""


@dataclass(frozen=True, slots=True)
class Submitted:
    """A submitted table, read.

    Attributes
    ----------
    source : str
        The file's name, without its folder.
    digest : str
        SHA-256 of its bytes.
    rows : tuple of SubmittedForce
        Member forces, in the order of the table.
    reactions : tuple of SubmittedReaction
        Reactions where given.
    displacements : tuple of SubmittedDisplacement
        Joint displacements where given.
    convention : str
        How the printed signs were meant.
    unit : str
        The unit the forces were printed in.
    notes : tuple of str
        What was assumed, detected and skipped on reading.
    table : Source
        The table itself.
    reading : Reading
        How it was asked to be read.
    """

    source: str
    digest: str
    rows: tuple[SubmittedForce, ...]
    reactions: tuple[SubmittedReaction, ...]
    displacements: tuple[SubmittedDisplacement, ...]
    convention: Convention
    unit: str
    notes: tuple[str, ...]
    table: Source
    reading: Reading

    @property
    def cases(self) -> tuple[str, ...]:
        """Their cases, in the order of the table."""
        found = [row.case for row in self.rows]
        found += [reaction.case for reaction in self.reactions]
        found += [displacement.case for displacement in self.displacements]
        return tuple(dict.fromkeys(found))

    def turned(self, convention: Convention, note: str) -> Submitted:
        """Return the table with every member force reversed, the convention and the reason noted."""
        rows = tuple(replace(row, force=-row.force) for row in self.rows)
        return replace(self, rows=rows, convention=convention, notes=(*self.notes, note))


def read_submitted(
    path_or_table: object,
    truss: Truss,
    *,
    columns: Mapping[str, str | int] | str | None = None,
    names: Names | None = None,
    convention: str = "",
    unit: str = "",
    case: str = "",
    decimal: str = "",
    others: Collection[str] = (),
) -> Submitted:
    r"""Return a submitted table of results.

    Parameters
    ----------
    path_or_table : path, text of a CSV file, bytes, mapping, sequence of mappings or data frame
        See ``submitted.tables.opened``. Needed are columns of members (or of their start and end joints) and
        forces; cases, T/C, reactions and displacements of joints where there are any.
    truss : Truss
        Our truss, whose members are meant.
    columns : mapping or str, optional
        Columns that are not recognised: ``{"member": "Bar", "force": "Axial"}`` or ``"member=Bar,force=Axial"``;
        a whole number is the place of a column, from 1.
    names : mapping or path, optional
        Our joint or member name to theirs, as ``[project.names]``, or a table of two columns.
    convention : str
        ``tension positive``, ``compression positive``, or ``detect``: compare decides from the senses. Left out:
        what the table says, else tension positive.
    unit : str
        Their unit of force, when the table does not state it; left out: what it states, else the truss's.
    case : str
        The case to read, of several; of a table without cases, the case its rows belong to.
    decimal : str
        ``.`` or ``,`` where the numbers alone do not tell.
    others : collection of str
        Names in the table that belong to other structures; they are left out, and noted.

    Raises
    ------
    FileFormatError
        With every fault found in ``problems``: each names the row, the column and what was expected.
    InputError
        When an option or the name map is wrong.

    Examples
    --------
    >>> roof = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> table = read_submitted("Bar;N [kN]\nA-B;2,00\nC-A;-2,24\n", roof)
    >>> [(row.member, row.force, row.digits) for row in table.rows]
    [('A-B', Exact('2'), Exact('1/200')), ('A-C', Exact('-56/25'), Exact('1/200'))]
    """
    theirs = _options(convention, unit, decimal)
    named, mapped = columns_of(columns), name_map(names, truss)
    source = opened(path_or_table)
    blocks = blocks_of(source, named)
    stated, titled = stated_in(blocks)
    reader, remarks = _rows_read(blocks, truss, mapped, {name.strip().casefold() for name in others})
    values, unit_name, notes, problems = values_of(reader.found, truss, decimal=decimal, unit=theirs, titled=titled)
    problems = [*reader.problems, *problems]
    values, means, *told = signed(values, convention, stated)
    values, *more = once_each(values)
    kept, *last = of_case(values, case)
    for noted, wrong in (told, more, last):
        notes += noted
        problems += wrong
    if not (problems or kept):
        problems = ["holds a head but no values"]
    if problems:
        raise FileFormatError(capped(problems), source=source.name)
    records = _records(kept)
    notes = [*blocks.notes, *remarks, *reader.notes(), *notes]
    reading = Reading(
        columns=tuple(named.items()),
        names=None if mapped is None else tuple(mapped.items()),
        convention=convention,
        unit=unit,
        case=case,
        decimal=decimal,
        others=tuple(others),
    )
    return Submitted(source.name, source.digest, *records, means, unit_name, tuple(notes), source, reading)


def _rows_read(
    blocks: Blocks, truss: Truss, names: Mapping[str, str] | None, others: Collection[str]
) -> tuple[RowReader, list[str]]:
    """Return the rows read under the name map, or under our own names where the map fits none of theirs."""
    match = NameMatch(truss, names)
    reader = RowReader(match, others)
    reader.read(blocks.blocks)
    if names and reader.problems and match.ours_are_plain:
        plain = RowReader(NameMatch(truss), others)
        plain.read(blocks.blocks)
        if not plain.problems:
            return plain, ["the table uses our own names: the name map was not needed"]
    return reader, []


def _records(
    values: Sequence[Value],
) -> tuple[tuple[SubmittedForce, ...], tuple[SubmittedReaction, ...], tuple[SubmittedDisplacement, ...]]:
    rows: list[SubmittedForce] = []
    reactions: list[SubmittedReaction] = []
    displacements: list[SubmittedDisplacement] = []
    halves = {half: rational(half) for half in {item.half for item in values}}
    for item in values:
        raw, value, half = item.raw, rational(item.value), halves[item.half]
        if raw.kind == "force":
            rows.append(SubmittedForce(raw.name, raw.case, value, half, raw.row, raw.theirs, raw.printed.text))
        elif raw.kind == "reaction":
            of = (raw.what, raw.name, raw.axis, raw.case)
            reactions.append(SubmittedReaction(*of, value, half, raw.row, raw.printed.text))
        else:
            at = (raw.name, raw.axis, raw.case)
            displacements.append(SubmittedDisplacement(*at, value, half, raw.row, raw.printed.text))
    return tuple(rows), tuple(reactions), tuple(displacements)


# --- options ----------------------------------------------------------------------------------------------


def columns_of(columns: Mapping[str, str | int] | str | None) -> dict[str, str | int]:
    """Return columns as the user names them: role to head, or to a place from 1.

    Parameters
    ----------
    columns : mapping, str or None
        ``{"member": "Bar"}``, or ``"member=Bar,force=Axial"`` as on a command line.

    Raises
    ------
    InputError
        For a role that is none, or a text that is no list of role=column.

    Examples
    --------
    >>> columns_of("member=Bar, force=2")
    {'member': 'Bar', 'force': 2}
    """
    problems = []
    if isinstance(columns, str):
        pairs = [part.partition("=") for part in columns.split(",") if part.strip()]
        problems = [f"columns: {name.strip()[:40]!r} is not role=column" for name, sign, _ in pairs if not sign]
        columns = {name.strip(): column.strip() for name, _, column in pairs}
    found: dict[str, str | int] = {}
    for role, column in (columns or {}).items():
        if role not in ROLES:
            near = did_you_mean(str(role), ROLES)
            problems.append(
                f"columns: {str(role)[:40]!r} is not what a column can be; known are {', '.join(ROLES)}{near}"
            )
        elif isinstance(column, str) and column.isascii() and column.isdigit():
            found[role] = int(column)
        else:
            found[role] = column
    if problems:
        raise InputError(problems)
    return found


def _options(convention: str, unit: str, decimal: str) -> Unit | None:
    """Return the unit that the user states, after refusing options that are none."""
    problems = []
    for name, value, known in (
        ("convention", convention, (TENSION, COMPRESSION, DETECT)),
        ("unit", unit, tuple(FORCE_UNITS)),
        ("decimal", decimal, (".", ",")),
    ):
        if value and value not in known:
            problems.append(f"{name}: {value[:40]!r} is not known; write one of {', '.join(known)}")
    if problems:
        raise InputError(problems)
    return FORCE_UNITS[unit] if unit else None
