"""Sentences in the words of the trade: what a member is called, what an equation sums, why a cut was chosen.

Everything here is told from the facts of a step (which bars are cut, which drop out of the sum, what was
known before), so that the sentence cannot say more than the step does.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.exact import ONE
from trusscalc.exacttext import to_text
from trusscalc.sheet.blocks import Name
from trusscalc.statics.cuts import About, Cut, Structure
from trusscalc.statics.steps import Equation, Step, Term

LONGEST_SUBSCRIPT: Final = 12
"""Characters of a name beyond which a force is numbered instead."""

NUMBERS: Final = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten")


def bar(name: str) -> str:
    """Return a member's or reaction's name as it is printed: ``U3–U4``, ``L0,y``."""
    return name.replace("-", "–").replace(".", ",")


def counted(count: int, one: str, several: str = "") -> str:
    """Return ``one member``, ``two members``, ``12 members``."""
    return f"{number_word(count)} {one if count == 1 else several or one + 's'}"


def number_word(count: int) -> str:
    """Return ``one``, ``two``, ``12``."""
    return NUMBERS[count] if count < len(NUMBERS) else str(count)


def listed(items: Iterable[str]) -> str:
    """Return ``a, b and c``."""
    words = list(items)
    return " and ".join(words) if len(words) < 3 else f"{', '.join(words[:-1])} and {words[-1]}"  # noqa: PLR2004


def capital(text: str) -> str:
    """Return a sentence with its first letter large; names keep theirs."""
    return text[:1].upper() + text[1:]


# --- forces in symbols ------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Symbols:
    """What each force is called in equations.

    Attributes
    ----------
    numbers : dict of str to int
        Members, reactions and joints whose names are too long for a subscript or hold signs that would read
        as mathematics, numbered in the truss's order.
    both_ways : frozenset of str
        Joints loaded in x and in y, whose loads tell the axis.
    """

    numbers: Mapping[str, int]
    both_ways: frozenset[str]

    def of(self, term: Term, *, sought: bool = False) -> Name:
        """Return the symbol of a term's force."""
        if term.kind == "load":
            axis = f",{term.axis}" if term.name in self.both_ways else ""
            return Name("P", self._subscript(term.name) + axis)
        return self.of_bar(term.name, is_link=term.kind == "reaction", sought=sought)

    def of_bar(self, name: str, *, is_link: bool, sought: bool = False) -> Name:
        """Return the symbol of a member's force or a reaction."""
        return Name("R" if is_link else "N", self._subscript(name), sought)

    def _subscript(self, name: str) -> str:
        return f"({self.numbers[name]})" if name in self.numbers else bar(name)


def symbols_of(structure: Structure) -> Symbols:
    """Return the symbols of all forces of a truss under its loads."""
    both = {name for name, (fx, fy) in structure.loads.items() if fx and fy}
    return Symbols(numbered((*structure.bars, *structure.joints)), frozenset(both))


def numbered(names: Iterable[str]) -> dict[str, int]:
    """Return numbers for those names that do not fit a subscript, or hold signs that would read as mathematics."""
    unfit = [name for name in names if len(name) > LONGEST_SUBSCRIPT or not _is_plain(name)]
    return {name: place for place, name in enumerate(unfit, 1)}


def _is_plain(name: str) -> bool:
    return all(c in " '’′_-." or unicodedata.category(c)[0] in "LMN" for c in name)


# --- bodies and sums --------------------------------------------------------------------------------------


def part(structure: Structure, kept: Sequence[str]) -> str:
    """Return which part of the truss a body is: ``left part``, ``upper part``, ..."""
    inside = set(kept)
    middles = []
    for names in (inside, set(structure.joints) - inside):
        places = [(structure.near(joint.x), structure.near(joint.y)) for joint in structure.joints.values()]
        chosen = [place for place, name in zip(places, structure.joints, strict=True) if name in names]
        middles.append([sum(axis) / len(chosen) for axis in zip(*chosen, strict=True)])
    dx, dy = (here - there for here, there in zip(*middles, strict=True))
    size = abs(dx) + abs(dy)
    if size == 0:
        return "part"
    if abs(dx) >= abs(dy):
        return "left part" if dx < 0 else "right part"
    return "lower part" if dy < 0 else "upper part"


def letters_of(structure: Structure, steps: Iterable[Step]) -> dict[frozenset[str], str]:
    """Return the letter of every section, by the members it cuts."""
    found: dict[frozenset[str], str] = {}
    for step in steps:
        for equation in step.equations:
            if equation.cut.kind == "section" and step.letter:
                found.setdefault(members_cut(structure, equation.cut), step.letter)
    return found


def members_cut(structure: Structure, cut: Cut) -> frozenset[str]:
    """Return the members a cut goes through, without support links."""
    return frozenset(name for name in cut.bars if not structure.bars[name].is_link)


def section(letter: str) -> str:
    """Return ``a–a``."""
    return f"{letter}–{letter}"


def body(structure: Structure, cut: Cut, letters: Mapping[frozenset[str], str]) -> str:
    """Return what a free body is called: ``joint M1``, ``left part of a–a``, ``whole truss``."""
    if cut.kind == "joint":
        return f"joint {cut.kept[0]}"
    if cut.kind == "whole":
        return "whole truss"
    letter = letters.get(members_cut(structure, cut), "")
    if letter:
        return f"{part(structure, cut.kept)} of {section(letter)}"
    inside = set(cut.kept)
    left_out = [name for name in structure.joints if name not in inside]
    if len(left_out) == 1:
        return f"all joints but {left_out[0]}"
    return f"{part(structure, cut.kept)} with joints {listed(cut.kept)}"


def about_words(about: About) -> str:
    """Return what is summed, without its sense: ``moments about L3``, ``forces in y``."""
    if about.sum == "moment":
        return f"moments about {centre(about)}"
    if about.axis:
        return f"forces in {about.axis}"
    if about.along:
        return f"forces square to {bar(about.along)}"
    return f"forces along ({to_text(about.x)}, {to_text(about.y)})"


def centre(about: About) -> str:
    """Return the name of a moment centre."""
    return about.joint or f"the point ({to_text(about.x)}, {to_text(about.y)})"


def sum_label(equation: Equation, where: str) -> str:
    """Return the label of an equation: body, sum and positive sense."""
    about = equation.about
    sense = "anticlockwise positive"
    if about.sum == "force":
        senses = {"x": ("to the right", "to the left"), "y": ("upwards", "downwards")}
        if about.axis:
            sense = senses[about.axis][(about.x + about.y).reads_negative()]
        elif about.along:
            sense = senses["y"][about.y.reads_negative()] if about.y else senses["x"][about.x.reads_negative()]
        else:
            sense = "that way"
        sense += " positive"
    length = about.x * about.x + about.y * about.y
    scaled = about.sum == "force" and length != ONE and all(term.scale == ONE for term in equation.terms)
    times = ", times the length of the direction" if scaled else ""
    return capital(f"{where}, {about_words(about)}, {sense}{times}")


def found_in(step: Step) -> tuple[str, ...]:
    """Return what a step finds, also where only in terms of a carried force."""
    return (*step.solves, *step.solves_in)
