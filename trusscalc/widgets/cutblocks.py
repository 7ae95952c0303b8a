"""What a cut can do, as blocks: in an answer, in a report, and in the form that stays on file."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Final

from trusscalc.loads import LoadCase
from trusscalc.sheet import compose as composing
from trusscalc.sheet.blocks import Block, Column, Items, Labelled, Lines, Paragraph, Run, Table
from trusscalc.sheet.derivation import NOTHING, sense
from trusscalc.sheet.equations import times
from trusscalc.sheet.values import decimal_text, formula
from trusscalc.sheet.words import Symbols, about_words, bar, capital, counted, listed, numbered, section, sum_label
from trusscalc.statics.cutreport import Possibility
from trusscalc.statics.cuts import Cut
from trusscalc.statics.owncuts import OwnCut
from trusscalc.statics.steps import Equation
from trusscalc.widgets.answers import Answer

MOST_POSSIBILITIES: Final = 6
"""Equations of a cut that are shown, those with fewest unknowns first."""
PLACES: Final = 3


def facts(items: Iterable[tuple[str, str]]) -> Items:
    """Return short statements in plain words."""
    return Items(tuple((term, (Run(text),)) for term, text in items))


def kept_and_cut(cut: Cut | OwnCut) -> list[tuple[str, str]]:
    """Return what a cut keeps, and what holds it."""
    return [("Joints kept", listed(cut.kept)), ("Bars cut", listed(map(bar, cut.bars)) or "none")]


def why_nothing(reason: str, unknown: Iterable[str], nearest: Sequence[str]) -> list[tuple[str, str]]:
    """Return why a cut decides nothing, and the nearest one that does."""
    for name in unknown:
        reason = reason.replace(name, bar(name))
    told = [("Why nothing", reason)] if reason else []
    return told + ([("Nearest cut that does", f"keep {listed(nearest)}")] if nearest else [])


def possibility_table(possibilities: Sequence[Possibility]) -> Table:
    """Return equations of a cut, each with what it leaves unknown."""
    rows = tuple(
        (Run(about_words(way.about)), Run(listed(map(bar, way.unknown)) or "nothing"))
        for way in possibilities[:MOST_POSSIBILITIES]
    )
    return Table((Column("equation"), Column("leaves unknown")), rows)


def equation_blocks(equation: Equation) -> list[Block]:
    """Return an equation as a line in symbols, with what drops out of it."""
    loaded = [term.name for term in equation.terms if term.kind == "load"]
    symbols = Symbols(numbered((*equation.cut.bars, *loaded)), frozenset(loaded))
    unvalued = LoadCase("", {})
    sought = [(term, symbols.of(term, sought=term.kind == "member")) for term in equation.terms]
    products = tuple(times(equation, term.coefficient, symbol, unvalued) for term, symbol in sought)
    items = [("Joints kept", listed(equation.cut.kept)), ("Drop out", listed(map(bar, equation.dropped)) or "none")]
    items += [(f"({number})", bar(name)) for name, number in symbols.numbers.items()]
    line = Labelled(sum_label(equation, "part kept"), formula(products, NOTHING))
    return [Lines((line,)), facts(items)]


# --- an answer --------------------------------------------------------------------------------------------


def answer_blocks(answer: Answer, *, drawings: bool = False, places: int = PLACES) -> list[Block]:
    """Return an answer as blocks: what is cut, what each equation leaves, and what is solved, step by step."""
    items = [
        ("Members cut", listed(map(bar, answer.members)) or "none"),
        ("Free body", body_words(answer)),
        ("Unknown", listed(map(bar, answer.unknown)) or "none"),
        *why_nothing(answer.reason, answer.unknown, answer.nearest),
    ]
    blocks: list[Block] = [facts(items)]
    if answer.equation is not None:
        blocks += equation_blocks(answer.equation)
    blocks += [
        composing.derivation(answer.check, step.number, places=places, drawings=drawings) for step in answer.steps
    ]
    return [*blocks, possibility_table(answer.possibilities)]


def body_words(answer: Answer) -> str:
    """Return the joints kept and the reactions on them."""
    kept, joints = answer.cut.kept, listed(answer.cut.kept)
    if len(kept) == len(answer.cut.truss.joints):
        joints = "the whole truss"
    else:
        joints = f"joint{'s' if len(kept) > 1 else ''} {joints}"
    if not answer.reactions:
        return f"{joints}, no reactions on it"
    return f"{joints}, with the reaction{'s' if len(answer.reactions) > 1 else ''} {listed(map(bar, answer.reactions))}"


def in_one_sentence(answer: Answer, places: int = PLACES) -> str:
    """Return an answer as it is spoken: what is cut, and what that gives."""
    what = f"Section {section(answer.letter)}" if answer.letter else "The cut"
    cut = f"{what} goes through {listed(map(bar, answer.members))}" if answer.members else "The whole truss is kept"
    if answer.steps:
        told = [_told(answer, name, places) for name in answer.solved]
        return f"{cut}. It gives {listed(told)}."
    near = f" The nearest cut that does keeps {listed(answer.nearest)}." if answer.nearest else ""
    reason = why_nothing(answer.reason, answer.unknown, ())[0][1]
    return f"{cut}. It gives nothing: {reason}.{near}"


def _told(answer: Answer, name: str, places: int) -> str:
    force = answer.force(name)
    value = answer.check.case.value(answer.solved[name])
    words = f"{bar(name)} = {decimal_text(value, places).replace('-', '−')} {answer.cut.truss.force}"
    letter = sense(value) if name in answer.members else ""
    return " ".join(filter(None, (words, letter))) + f" ({force.verdict})"


def possibility_words(way: Possibility) -> str:
    """Return an equation and what it leaves, in a few words: ``moments about L3: U3–U4``."""
    left = listed(map(bar, way.unknown)) if len(way.unknown) < PLACES else counted(len(way.unknown), "unknown")
    return f"{about_words(way.about)}: {left or 'nothing unknown'}"


def chosen_words(answer: Answer) -> str:
    """Return which equation is written, and who chose it."""
    if answer.about is not None:
        return capital(about_words(answer.about))
    return "Left to the tool: the simplest equation for each force"


def note(text: str) -> Paragraph:
    """Return a small remark."""
    return Paragraph((Run(text),), "note")
