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

ONE_OF: Final = {
    "chords": "chord",
    "diagonals": "diagonal",
    "verticals": "vertical",
    "posts": "post",
    "hangers": "hanger",
    "struts": "strut",
    "ties": "tie",
    "rafters": "rafter",
    "braces": "brace",
    "webs": "web",
    "members": "member",
    "bars": "bar",
    "legs": "leg",
    "rods": "rod",
    "counters": "counter",
    "purlins": "purlin",
    "stays": "stay",
}
"""Trade words in the plural and for one of them."""

NUMBERS: Final = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten")


def bar(name: str) -> str:
    """Return a member's or reaction's name as it is printed: ``U3–U4``, ``L0,y``."""
    return name.replace("-", "–").replace(".", ",")


def counted(count: int, one: str, several: str = "") -> str:
    """Return ``one member``, ``two members``, ``12 members``."""
    word = NUMBERS[count] if count < len(NUMBERS) else str(count)
    return f"{word} {one if count == 1 else several or one + 's'}"


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
        return Name("R" if term.kind == "reaction" else "N", self._subscript(term.name), sought)

    def _subscript(self, name: str) -> str:
        return f"({self.numbers[name]})" if name in self.numbers else bar(name)


def symbols_of(structure: Structure) -> Symbols:
    """Return the symbols of all forces of a truss under its loads."""
    names = [*structure.bars, *structure.joints]
    numbered = [name for name in names if len(name) > LONGEST_SUBSCRIPT or not _is_plain(name)]
    both = {name for name, (fx, fy) in structure.loads.items() if fx and fy}
    return Symbols({name: place for place, name in enumerate(numbered, 1)}, frozenset(both))


def _is_plain(name: str) -> bool:
    return all(c in " '’′_-." or unicodedata.category(c)[0] in "LMN" for c in name)


# --- bodies and sums --------------------------------------------------------------------------------------


def part(structure: Structure, kept: Sequence[str]) -> str:
    """Return which part of the truss a body is: ``left part``, ``upper part``, ..."""
    inside = set(kept)
    middles = []
    for names in (inside, set(structure.joints) - inside):
        places = [(float(structure.joints[name].x), float(structure.joints[name].y)) for name in structure.joints]
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
            sense = senses[about.axis][(about.x + about.y).sign() < 0]
        elif about.along:
            sense = senses["y"][about.y.sign() < 0] if about.y else senses["x"][about.x.sign() < 0]
        else:
            sense = "that way"
        sense += " positive"
    length = about.x * about.x + about.y * about.y
    scaled = about.sum == "force" and length != ONE and all(term.scale == ONE for term in equation.terms)
    times = ", times the length of the direction" if scaled else ""
    return capital(f"{where}, {about_words(about)}, {sense}{times}")


# --- why this cut -----------------------------------------------------------------------------------------


def found_in(step: Step) -> tuple[str, ...]:
    """Return what a step finds, also where only in terms of a carried force."""
    return (*step.solves, *step.solves_in)


@dataclass(frozen=True, slots=True)
class Teller:
    """Tells of steps; holds what all sentences need.

    Attributes
    ----------
    structure : Structure
        Truss and loads.
    letters : dict of frozenset to str
        Section letters by the members cut.
    solved_in : dict of str to int
        The step that found a member force or reaction.
    groups : dict of str to str
        Member to the group it was stated in.
    """

    structure: Structure
    letters: Mapping[frozenset[str], str]
    solved_in: Mapping[str, int]
    groups: Mapping[str, str]

    def is_link(self, name: str) -> bool:
        """Return whether a name is a reaction's."""
        return self.structure.bars[name].is_link

    def force(self, name: str) -> str:
        """Return how running text calls a force: ``U3–U4``, ``the reaction L0,y``."""
        return f"the reaction {bar(name)}" if self.is_link(name) else bar(name)

    def forces(self, names: Iterable[str]) -> str:
        """Return several forces: members first, then ``the reactions ...``."""
        names = list(names)
        links = [bar(name) for name in names if self.is_link(name)]
        words = [bar(name) for name in names if not self.is_link(name)]
        if links:
            words.append(f"the reaction{'s' if len(links) > 1 else ''} {listed(links)}")
        return listed(words)

    def title(self, step: Step) -> str:
        """Return a step's heading: what it finds, in trade words."""
        names = [bar(name) for name in found_in(step)]
        if all(self.is_link(name) for name in found_in(step)):
            return f"Reaction{'s' if len(names) > 1 else ''} {listed(names)}"
        groups = {self.groups.get(name, "") for name in found_in(step)}
        group = groups.pop() if len(groups) == 1 else ""
        if not group:
            return f"Member{'s' if len(names) > 1 else ''} {listed(names)}"
        *first, last = group.split(" ")
        if len(names) == 1:
            before, hyphen, plural = last.rpartition("-")
            last = before + hyphen + ONE_OF.get(plural.lower(), plural)
        return f"{capital(' '.join([*first, last]))} {listed(names)}"

    def found_by(self, step: Step) -> str:
        """Return how a step finds its forces: ``section a–a``, ``joint L0``, ``a–a and joint M1``."""
        words = []
        for equation in step.equations:
            cut = equation.cut
            letter = self.letters.get(members_cut(self.structure, cut), "")
            words.append(section(letter) if letter and cut.kind == "section" else self.body(cut))
        told = listed(dict.fromkeys(words))
        return f"section {told}" if len(words) == 1 and step.kind == "section" else told

    def body(self, cut: Cut) -> str:
        """Return what a free body is called."""
        return body(self.structure, cut, self.letters)

    def reason(self, step: Step) -> str:
        """Return why this cut: which forces it meets, which drop out, what is left."""
        carried = "".join(
            f"No equation gives another force alone, so the force in {bar(name)} is carried as {letter} until one decides it. "
            for name, letter in step.carries.items()
        )
        if step.kind == "close":
            return carried + self._reason_of_closing(step)
        if len(step.equations) > 1:
            return carried + self._reason_of_several(step)
        return carried + self._reason_of_one(step)

    def _reason_of_one(self, step: Step) -> str:
        equation = step.equations[0]
        dropped = self._dropped(equation, step)
        sought = self.force(found_in(step)[0])
        only = f"only {sought} is unknown"
        opening = self._opening(equation.cut)
        if dropped:
            text = f"{opening}{dropped}, so {_in_the_sum(equation.about)} {only}."
        elif equation.cut.kind == "joint":
            text = f"{opening}{only}; {_the_sum(equation.about)} gives it."
        else:
            text = f"{opening}{_in_the_sum(equation.about)} {only}."
        return text + self._known(step)

    def _reason_of_closing(self, step: Step) -> str:
        bodies = listed(dict.fromkeys(f"{_the_sum(e.about)} {self.found_by_one(e)}" for e in step.equations))
        names = listed(bar(name) for name in step.solves)
        verb = "decide" if len(step.equations) > 1 else "decides"
        return (
            f"Every force there is known by now, or told in terms of what is carried for {names}; "
            f"{bodies} {verb} it." + self._known(step)
        )

    def _opening(self, cut: Cut) -> str:
        if cut.kind == "joint":
            return f"At joint {cut.kept[0]}, "
        if cut.kind == "whole":
            return f"The whole truss is held by {self.forces(cut.bars)}; "
        letter = self.letters.get(members_cut(self.structure, cut), "")
        members = listed(bar(name) for name in cut.bars if not self.is_link(name))
        return f"{f'Section {section(letter)}' if letter else 'The cut'} goes through {members}; "

    def _dropped(self, equation: Equation, step: Step) -> str:
        """Return why the other members, and reactions not yet known, have no coefficient, or ''."""
        unknown = [
            name
            for name in equation.dropped
            if not self.is_link(name) or self.solved_in.get(name, step.number) >= step.number
        ]
        if not unknown:
            return ""
        about = equation.about
        several = len(unknown) > 1
        if about.sum == "moment":
            verb = "pass" if several else "passes"
            links_only = all(self.is_link(name) for name in unknown)
            if links_only:
                return f"{self.forces(unknown)} {'act' if several else 'acts'} through {centre(about)}"
            return f"the line{'s' if several else ''} of {self.forces(unknown)} {verb} through {centre(about)}"
        verb = "are" if several else "is"
        if about.axis:
            return f"{self.forces(unknown)} {verb} {'horizontal' if about.axis == 'y' else 'vertical'}"
        others = [name for name in unknown if name != about.along]
        if about.along and others:
            return f"{self.forces(others)} {'are' if len(others) > 1 else 'is'} parallel to {bar(about.along)}"
        if about.along:
            return f"{bar(about.along)} has no part in the forces square to it"
        return f"{self.forces(unknown)} {verb} square to the direction summed"

    def _known(self, step: Step) -> str:
        """Return where the members used come from, or ''."""
        used = [name for name in step.uses if not self.is_link(name)]
        if not used:
            return ""
        sources: dict[int, list[str]] = {}
        for name in used:
            sources.setdefault(self.solved_in[name], []).append(bar(name))
        told = [
            f"{listed(names)} {'are' if len(names) > 1 else 'is'} known from step {number}"
            for number, names in sorted(sources.items())
        ]
        return f" {listed(told)}."

    def _reason_of_several(self, step: Step) -> str:
        told = []
        for equation in step.equations:
            where = self.found_by_one(equation)
            dropped = self._dropped(equation, step)
            sums = _the_sum(equation.about)
            told.append(f"{where}, {dropped}, so {sums} holds no more unknowns" if dropped else f"{where}, {sums}")
        count = counted(len(told), "equation")
        return f"{_sentence(self.forces(found_in(step)))} are found together, from {count}: {'; '.join(told)}." + self._known(step)

    def found_by_one(self, equation: Equation) -> str:
        """Return where an equation is written: ``at joint M1``, ``for the left part of b–b``."""
        where = self.body(equation.cut)
        return f"at {where}" if equation.cut.kind == "joint" else f"for the {where}"


def _sentence(text: str) -> str:
    return f"The {text[4:]}" if text.startswith("the reaction") else text


def _the_sum(about: About) -> str:
    if about.sum == "moment":
        return f"the sum of moments about {centre(about)}"
    if about.axis:
        return "the vertical sum" if about.axis == "y" else "the horizontal sum"
    return f"the sum of {about_words(about)}"


def _in_the_sum(about: About) -> str:
    return f"about {centre(about)}" if about.sum == "moment" else f"in {_the_sum(about)}"
