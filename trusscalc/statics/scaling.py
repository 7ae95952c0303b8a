"""Factors for the rows and the columns of an equilibrium matrix that make every entry rational.

Where the roots in the coordinates come from one direction or one panel they can be scaled away, and the
elimination, by far the most work, is done in rationals. Where no scaling fits it is done in the number field.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from trusscalc.exact import ONE, UNIT_KEY, Exact


def scaled(value: Exact, scale: Exact) -> Exact:
    """Return a product that costs nothing for the usual scale 1."""
    return value if scale is ONE else value * scale


def scaling(rows: Sequence[Mapping[int, Exact]], width: int) -> tuple[list[Exact], list[Exact]] | None:
    """Return factors for rows and columns that make every entry rational, or None.

    Parameters
    ----------
    rows : sequence of mapping of int to Exact
        The entries of each row by column; zeros left out.
    width : int
        The number of columns.
    """
    if all(part.is_rational for row in rows for part in row.values()):
        return [ONE] * len(rows), [ONE] * width
    row_scale, column_scale = _spread_scales(rows, width)
    fits = all(
        (row_scale[index] * entry * column_scale[column]).is_rational
        for index, row in enumerate(rows)
        for column, entry in row.items()
    )
    if not fits:
        return None
    return [row_scale[index] for index in range(len(rows))], [column_scale.get(c, ONE) for c in range(width)]


def _spread_scales(rows: Sequence[Mapping[int, Exact]], width: int) -> tuple[dict[int, Exact], dict[int, Exact]]:
    """Return factors that make one entry of every row and column rational, passed on from entry to entry."""
    in_column: list[list[int]] = [[] for _ in range(width)]
    for index, row in enumerate(rows):
        for column in row:
            in_column[column].append(index)
    row_scale: dict[int, Exact] = {}
    column_scale: dict[int, Exact] = {}
    for start in range(len(rows)):
        waiting = [] if start in row_scale else [start]
        row_scale.setdefault(start, ONE)
        while waiting:
            index = waiting.pop()
            for column, entry in rows[index].items():
                if column in column_scale:
                    continue
                column_scale[column] = _root_part(row_scale[index] * entry).inverse()
                new = [other for other in in_column[column] if other not in row_scale]
                for other in new:
                    row_scale[other] = _root_part(rows[other][column] * column_scale[column]).inverse()
                waiting += new
    return row_scale, column_scale


def _root_part(value: Exact) -> Exact:
    """Return the root of a one-term number without its rational factor (other numbers as they are)."""
    if len(value.terms) == 1 and not value.symbols:
        return Exact({next(iter(value.terms)): ONE.terms[UNIT_KEY]}, value.tower)
    return value
