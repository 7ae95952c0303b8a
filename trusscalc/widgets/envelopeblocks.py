"""An envelope in short: largest tension and compression of each member, and what governs them."""

from __future__ import annotations

from typing import Final

from trusscalc.envelopes import Envelope
from trusscalc.loads import LoadCase
from trusscalc.sheet.blocks import Block, Column, Decimals, Heading, Inline, Paragraph, Run, Table
from trusscalc.sheet.values import decimal_text, told
from trusscalc.sheet.words import bar, listed
from trusscalc.superposition import Choice

PLACES: Final = 3
UNVALUED: Final = LoadCase("", {})


def envelope_blocks(found: Envelope) -> list[Block]:
    """Return an envelope as a table, with what both routes say of it."""
    rows = tuple(
        (Run(bar(name)), *_extreme(each.max), *_extreme(each.min), Run("reverses" if each.reversal else ""))
        for name, each in found.members.items()
    )
    extreme = (Column("exact", "right"), Column("decimal", "right"), Column("combination"))
    columns = (Column("member"), *extreme, *extreme, Column(""))
    force = found.stated.truss.force
    words = f"Largest force, then least, tension positive, in {force}, over {len(found.combinations)} combinations. "
    words += "Both routes agree on every case." if not found.differing else f"The routes DIFFER: {_where(found)}."
    if found.undecided:
        words += f" Not decided by statics: {listed(map(bar, found.undecided))}."
    return [Heading(4, "Envelope"), Paragraph((Run(words),)), Table(columns, rows)]


def _extreme(choice: Choice) -> tuple[Inline, ...]:
    decimal = Decimals(decimal_text(choice.value, PLACES))
    return told(choice.value, UNVALUED), decimal, Run(choice.combination)


def _where(found: Envelope) -> str:
    return listed(f"{bar(member)} under {case}" for case, member in found.differing)
