"""What stays on file: the static form of an exploration, which reads in full without a kernel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from trusscalc.envelopes import Envelope
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.render.notebook import Bundle, bundle
from trusscalc.sheet import compose as composing
from trusscalc.sheet.blocks import Block, Heading, Paragraph, Picture, Run
from trusscalc.sheet.detail import shown
from trusscalc.sheet.elevation import cut_figure, truss_figure
from trusscalc.truss import Truss
from trusscalc.widgets.answers import Answer
from trusscalc.widgets.choices import Choices
from trusscalc.widgets.cutblocks import answer_blocks, in_one_sentence, note
from trusscalc.widgets.envelopeblocks import envelope_blocks

ON_FILE: Final = "What stands here stays on file, and reads without a kernel."


@dataclass(frozen=True, slots=True)
class Present:
    """Everything there is at one moment of an exploration: what was chosen, and what it gives.

    Attributes
    ----------
    truss : Truss
        The truss.
    case : LoadCase
        The loads of the case chosen.
    choices : Choices
        What was chosen.
    answer : Answer or None
        What the cut gives.
    check : MemberCheck or None
        The check of the members chosen.
    envelope : Envelope or None
        The envelope last worked out.
    """

    truss: Truss
    case: LoadCase
    choices: Choices
    answer: Answer | None
    check: MemberCheck | None
    envelope: Envelope | None = None


def frozen_bundle(present: Present) -> Bundle:
    """Return the static form: what was chosen, the cut in its figure, its equations, and the check."""
    return bundle(frozen_blocks(present))


def frozen_blocks(present: Present) -> list[Block]:
    """Return the static form as blocks."""
    truss, answer, check = present.truss, present.answer, present.check
    blocks: list[Block] = [Heading(4, f"{truss.title or 'Truss'}: {present.case.name}")]
    if answer is not None:
        blocks += [Paragraph((Run(in_one_sentence(answer)),)), Picture((cut_figure(truss, answer.cut.kept),))]
        blocks += answer_blocks(answer, drawings=True)
    else:
        fault = present.choices.fault
        told = f"What was drawn is no cut: {fault}." if fault else "No cut has been chosen."
        blocks.append(Paragraph((Run(told),)))
        if check is None:
            blocks.append(Picture((truss_figure(truss.at_values(), present.case),)))
    if check is not None:
        blocks += [Heading(4, "Check"), *check_blocks(present, drawings=True)]
    if present.envelope is not None:
        blocks += envelope_blocks(present.envelope)
    return [*blocks, note(ON_FILE)]


def check_blocks(present: Present, *, drawings: bool = False) -> list[Block]:
    """Return the check: conclusion and table, and the derivations that the detail chosen asks for."""
    check, detail = present.check, present.choices.detail
    if check is None:
        return []
    blocks = list(composing.summary(check))
    if detail == "summary":
        return blocks
    numbers = shown(check, detail).main
    return [*blocks, *(composing.derivation(check, number, drawings=drawings) for number in numbers)]
