"""An envelope in short: largest and least force of each member, what governs them, and what both routes say."""

from __future__ import annotations

from typing import Final

from trusscalc.envelopes import Envelope
from trusscalc.sheet.blocks import Block, Heading, Paragraph, Run
from trusscalc.sheet.envelopefront import extremes_table
from trusscalc.sheet.envelopetables import States
from trusscalc.sheet.words import bar, counted, listed

PLACES: Final = 3


def envelope_blocks(found: Envelope) -> list[Block]:
    """Return an envelope as a table, with what both routes say of it."""
    words = f"Over {counted(len(found.combinations), 'combination')}, in {found.stated.truss.force}. "
    words += "Both routes agree on every case." if not found.differing else f"The routes DIFFER: {_where(found)}."
    return [Heading(4, "Envelope"), Paragraph((Run(words),)), extremes_table(States(found, ()), PLACES)]


def _where(found: Envelope) -> str:
    return listed(f"{bar(member)} under {case}" for case, member in found.differing)
