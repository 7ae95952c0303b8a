"""Tables without the columns that say nothing. No row and no number is lost."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from fractions import Fraction

from trusscalc.exact import Exact
from trusscalc.sheet.blocks import Inline, Run, Table
from trusscalc.sheet.words import listed


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


def together(rows: Sequence[tuple[Inline | None, ...]]) -> tuple[tuple[Inline | None, ...], ...]:
    """Return rows that differ in their first cell only put into one, which lists these cells.

    Where that saves less than half of the rows they stay as they are: a long narrow table is then read more easily.

    Parameters
    ----------
    rows : sequence of tuple
        The first cell of each is a ``Run``.
    """
    alike: dict[tuple[Inline | None, ...], list[str]] = {}
    for first, *rest in rows:
        alike.setdefault(tuple(rest), []).append(first.text if isinstance(first, Run) else "")
    if 2 * len(alike) > len(rows):
        return tuple(rows)
    return tuple(
        (Run(f"{listed(names)}, each" if len(names) > 1 else names[0]), *rest) for rest, names in alike.items()
    )
