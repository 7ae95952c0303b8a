"""Tables without the columns that say nothing. No row and no number is lost."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from fractions import Fraction

from trusscalc.exact import Exact
from trusscalc.sheet.blocks import Inline, Run, Table


def without_columns(table: Table, idle: Callable[[int, Sequence[Inline | None]], bool]) -> Table:
    """Return a table without the columns for which ``idle`` holds, asked with place and cells."""
    kept = [place for place in range(len(table.columns)) if not idle(place, [row[place] for row in table.rows])]
    columns = tuple(table.columns[place] for place in kept)
    return replace(table, columns=columns, rows=tuple(tuple(row[place] for place in kept) for row in table.rows))


def is_blank(cells: Sequence[Inline | None]) -> bool:
    """Return whether nothing stands in a column."""
    return all(cell is None or cell == Run("") for cell in cells)


def ends_within(value: Exact, places: int) -> bool:
    """Return whether a number is a decimal of no more than so many places, so that rounding it tells nothing new."""
    if not value.is_rational:
        return False
    scaled: Fraction = value.as_fraction() * 10**places
    return scaled.denominator == 1
