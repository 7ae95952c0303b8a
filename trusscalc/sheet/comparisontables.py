"""The tables of a comparison: forces beside each other, values as they were read, displacements, joint loads."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from fractions import Fraction
from typing import Final

from trusscalc.comparereport import loaded
from trusscalc.comparison import ComparedForce, Comparison, ImpliedLoad
from trusscalc.decimals import rounded
from trusscalc.exact import Exact, exact
from trusscalc.filetext import one_line
from trusscalc.loads import factor_text
from trusscalc.sheet.blocks import Column, Decimals, Inline, Power, Run, Table
from trusscalc.sheet.compact import ends_within, is_blank, without_columns
from trusscalc.sheet.values import decimal_text, float_text, in_a_row
from trusscalc.sheet.words import bar, capital, counted

MOST_PLACES: Final = 12
SIGNIFICANT: Final = 2
"""Digits of what is allowed."""
LONGEST_CELL: Final = 60
"""Characters shown of a submitted text."""
SOON: Final = 4
"""Decimal places up to which a decimal is written as one."""
BY_STIFFNESS: Final = "by stiffness"


# --- single values ----------------------------------------------------------------------------------------


def ours_text(comparison: Comparison, item: ComparedForce, places: int) -> str:
    """Return our decimal, rounded once from the exact value where there is one."""
    if item.exact is None:
        return float_text(item.ours, places, comparison.ours.noise)
    return decimal_text(item.exact, places)


def given_text(item: ComparedForce, places: int) -> str:
    """Return the submitted value in our unit with the digits it was printed with; '' where it is missing."""
    if item.theirs is None or item.digits is None:
        return ""
    return as_given(item.theirs, item.digits, places)


def as_given(value: Exact, half: Exact, places: int) -> str:
    """Return a value with as many decimals as half a unit of its last digit allows; with ``places`` when it is exact.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> [as_given(parse(value), parse(half), 3) for value, half in (("-12.5", "1/20"), ("480", "5"), ("1/3", "0"))]
    ['-12.5', '480', '0.333']
    """
    if not half:
        return decimal_text(value, places)
    return decimal_text(value, max(0, min(MOST_PLACES, math.ceil(-math.log10(2 * float(half)) - 1e-9))))


def cell_text(text: str) -> str:
    """Return somebody's text as it may stand on a sheet: what does not print told by number, and not too long."""
    return one_line(text if len(text) <= LONGEST_CELL else f"{text[:LONGEST_CELL]}…")


def difference_cell(item: ComparedForce, places: int) -> Inline | None:
    """Return submitted minus ours, signed; what would round to zero only as a bound."""
    if item.difference is None or item.theirs is None:
        return None
    if not math.isfinite(item.difference):
        return Run("not a number")
    if item.exact is None:
        apart = exact(float_decimal(item.difference))
    else:
        apart = item.theirs - item.exact
    return signed(apart, places)


def float_decimal(value: float) -> Fraction:
    """Return a float as the fraction it is."""
    return Fraction(value)


def signed(value: Exact, places: int) -> Inline:
    """Return a difference with its sign, or a bound where it would round to zero."""
    if not value:
        return Decimals("0")
    near = rounded(value, places)
    if not near:
        return Power("", -places, below=True)
    return Run(f"{near:+f}".replace("-", "−"))


def allowed_cell(size: float) -> Inline:
    """Return what a value may be off by, with two digits."""
    if not math.isfinite(size):
        return Run("not a number")
    if not size:
        return Decimals("0")
    places = max(0, SIGNIFICANT - 1 - math.floor(math.log10(size)))
    return (
        Decimals(f"{size:.{places}f}") if places <= MOST_PLACES else Power("", math.floor(math.log10(size)), below=True)
    )


# --- forces -----------------------------------------------------------------------------------------------

COLUMNS: Final = (
    Column("member"),
    Column("ours, exact", "right"),
    Column("ours", "right"),
    Column("T/C", "centre"),
    Column("submitted", "right"),
    Column("T/C", "centre"),
    Column("difference", "right"),
    Column("allowed", "right"),
    Column("verdict", "right"),
)


def force_table(comparison: Comparison, names: Iterable[str], places: int, *, brief: bool = False) -> Table:
    """Return members, ours beside theirs; those that do not agree strong; ``brief``: without what is allowed."""
    items = [comparison.members[name] for name in names]
    table = _forces(comparison, items, COLUMNS, places)
    return without_columns(table, lambda place, _: COLUMNS[place].head == "allowed") if brief else table


def reaction_table(comparison: Comparison, places: int) -> Table:
    """Return the submitted reactions beside ours."""
    table = _forces(comparison, list(comparison.reactions.values()), (Column("reaction"), *COLUMNS[1:]), places)
    table = without_columns(table, lambda place, _: COLUMNS[place].head == "T/C")
    caption = f"Forces on the truss in {comparison.truss.force}, to the right and upwards positive."
    return Table(table.columns, table.rows, caption, table.strong_rows)


def _forces(comparison: Comparison, items: Sequence[ComparedForce], columns: tuple[Column, ...], places: int) -> Table:
    rows, strong = [], []
    for place, item in enumerate(items):
        given = given_text(item, places)
        digits = 0.0 if item.digits is None else float(item.digits)
        rows.append(
            (
                Run(bar(item.name)),
                Run(BY_STIFFNESS) if item.exact is None else _exact(item.exact),
                Decimals(ours_text(comparison, item, places)),
                Run(item.our_sense or ""),
                Decimals(given) if given else None,
                Run(item.their_sense) if item.their_sense else None,
                difference_cell(item, places),
                None if item.theirs is None else allowed_cell(item.tolerance + digits),
                Run(item.verdict),
            )
        )
        if item.verdict != "agrees":
            strong.append(place)
    return Table(columns, tuple(rows), strong_rows=tuple(strong))


def _exact(value: Exact) -> Inline:
    """Return an exact value for a long table: a decimal that ends soon, else on one line."""
    return Decimals(factor_text(value)) if ends_within(value, SOON) else in_a_row(value)


def reading_table(comparison: Comparison, places: int) -> Table:
    """Return every submitted value as it stands in the table and as it was read."""
    members, reactions = comparison.submitted.rows, comparison.submitted.reactions
    unit = comparison.truss.force
    rows = [
        (
            Run(bar(row.member)),
            Run(cell_text(row.theirs)),
            Run(str(row.row)),
            Run(cell_text(row.printed)),
            *_read(row.force, row.digits, places),
        )
        for row in members
    ]
    rows += [
        (
            Run(bar(row.name)),
            Run(""),
            Run(str(row.row)),
            Run(cell_text(row.printed)),
            *_read(row.force, row.digits, places),
        )
        for row in reactions
    ]
    columns = (
        Column("member or reaction" if reactions else "member"),
        Column("called there"),
        Column("row", "right"),
        Column("as printed", "right"),
        Column(f"read as, {unit}", "right"),
    )
    same = all(row.theirs == row.member for row in members)
    table = Table(columns, tuple(rows))
    table = without_columns(
        table, lambda place, cells: columns[place].head == "called there" and (same or is_blank(cells))
    )
    values = counted(len(rows), "value")
    return Table(table.columns, table.rows, f"{capital(values)} of this load case; rows counted as in the file.")


def _read(value: Exact, half: Exact, places: int) -> tuple[Inline]:
    return (Decimals(as_given(value, half, places)),)


# --- joints -----------------------------------------------------------------------------------------------


def displacement_table(comparison: Comparison) -> Table:
    """Return the submitted displacements beside ours times the factor that fits best."""
    unit = comparison.truss.length
    rows, strong = [], []
    for place, item in enumerate(comparison.displacements):
        given = next(
            row for row in comparison.submitted.displacements if (row.joint, row.axis) == (item.joint, item.axis)
        )
        places = max(0, min(MOST_PLACES, math.ceil(-math.log10(2 * float(given.digits))))) if given.digits else 6
        rows.append(
            (
                Run(f"{item.joint},{item.axis}"),
                Decimals(float_text(item.ours, places + 1, 0.0)),
                Decimals(as_given(item.theirs, given.digits, 6)),
                signed(exact(float_decimal(item.difference)), places + 1),
                Run("in proportion" if item.in_proportion else "out of proportion"),
            )
        )
        if not item.in_proportion:
            strong.append(place)
    columns = (
        Column("displacement"),
        Column(f"ours, fitted, {unit}", "right"),
        Column(f"submitted, {unit}", "right"),
        Column("difference", "right"),
        Column("shape", "right"),
    )
    caption = (
        "Ours for one EA in all members, times the one factor that fits the submitted ones best, since EA is not "
        "stated. The verdict does not rest on them."
    )
    return Table(columns, tuple(rows), caption, tuple(strong))


def implied_table(comparison: Comparison, places: int) -> Table:
    """Return the joint loads that the submitted forces imply beside ours, component by component."""
    slack = float(comparison.criterion.absolute) * comparison.largest
    rows: list[tuple[Inline | None, ...]] = []
    strong = []
    for load in loaded(comparison):
        told = False
        for axis in (0, 1):
            open_ = load.bound[axis] + slack
            theirs, ours = load.theirs[axis], load.ours[axis]
            if max(abs(float(theirs)), abs(ours)) <= open_:
                continue
            differs = abs(float(theirs) - ours) > open_
            strong += [len(rows)] if differs else []
            rows.append(
                (
                    None if told else Run(_joint(load)),
                    Run("xy"[axis]),
                    Decimals(decimal_text(theirs, places)),
                    Decimals(float_text(ours, places, comparison.ours.noise)),
                    signed(exact(float_decimal(float(theirs) - ours)), places),
                    allowed_cell(open_),
                    Run("differs" if differs else "agrees"),
                )
            )
            told = True
    unit = comparison.truss.force
    columns = (
        Column("joint"),
        Column("along"),
        Column(f"implied, {unit}", "right"),
        Column(f"stated here, {unit}", "right"),
        Column("difference", "right"),
        Column("left open", "right"),
        Column("verdict", "right"),
    )
    caption = (
        "To the right and upwards positive; at supports load and reaction together. Left open: what the rounding of "
        "the printed forces and the absolute part of the criterion allow. Components that are zero in both are not "
        "listed."
    )
    return Table(columns, tuple(rows), caption, tuple(strong))


def _joint(load: ImpliedLoad) -> str:
    return f"{load.joint}, support" if load.is_support else load.joint
