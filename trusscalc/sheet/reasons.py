"""Why this cut: a step told in sentences, from its facts.

Which bars are cut, which of them drop out of the sum and why, what was known before: the sentence says what
the step holds and cannot say more.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Final

from trusscalc.sheet.words import (
    about_words,
    bar,
    body,
    capital,
    centre,
    counted,
    found_in,
    listed,
    members_cut,
    section,
)
from trusscalc.statics.cuts import About, Cut, Structure
from trusscalc.statics.steps import Equation, Step

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


IN_TERMS: Final = "told in terms of what is carried"


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
        The step from which on a member force or reaction is known.
    told_in : dict of str to int
        The step that told a force in terms of a carried one, before that was decided.
    carried : dict of str to str
        Letters of carried forces by member.
    groups : dict of str to str
        Member to the group it was stated in.
    """

    structure: Structure
    letters: Mapping[frozenset[str], str]
    solved_in: Mapping[str, int]
    told_in: Mapping[str, int]
    carried: Mapping[str, str]
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
            f"No equation gives another force alone, so the force in {bar(name)} is carried as {letter} until one "
            f"decides it. "
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
        if equation.about.sum == "moment":
            return self._through(unknown, equation.about)
        return self._square(unknown, equation.about)

    def _through(self, names: list[str], about: About) -> str:
        """Return that lines pass through a moment centre."""
        several = len(names) > 1
        if all(self.is_link(name) for name in names):
            return f"{self.forces(names)} {'act' if several else 'acts'} through {centre(about)}"
        lines, verb = ("lines", "pass") if several else ("line", "passes")
        return f"the {lines} of {self.forces(names)} {verb} through {centre(about)}"

    def _square(self, names: list[str], about: About) -> str:
        """Return that bars are square to the direction summed."""
        verb = "are" if len(names) > 1 else "is"
        if about.axis:
            return f"{self.forces(names)} {verb} {'horizontal' if about.axis == 'y' else 'vertical'}"
        others = [name for name in names if name != about.along]
        if about.along and others:
            return f"{self.forces(others)} {'are' if len(others) > 1 else 'is'} parallel to {bar(about.along)}"
        if about.along:
            return f"{bar(about.along)} has no part in the forces square to it"
        return f"{self.forces(names)} {verb} square to the direction summed"

    def _known(self, step: Step) -> str:
        """Return where the members used come from, or ''."""
        sources: dict[str, list[str]] = {}
        for name in step.uses:
            if not self.is_link(name):
                sources.setdefault(self._source(name, step), []).append(name)
        if not sources:
            return ""
        told = []
        for source, names in sources.items():
            steps = ""
            if source == IN_TERMS:
                numbers = sorted({self.told_in[name] for name in names})
                steps = f" (step{'s' if len(numbers) > 1 else ''} {listed(map(str, numbers))})"
            told.append(f"{listed(map(bar, names))} {'are' if len(names) > 1 else 'is'} {source}{steps}")
        return f" {listed(told)}."

    def _source(self, name: str, step: Step) -> str:
        if self.solved_in[name] < step.number:
            return f"known from step {self.solved_in[name]}"
        return IN_TERMS if name in self.told_in else f"carried as {self.carried[name]}"

    def _reason_of_several(self, step: Step) -> str:
        told = []
        for equation in step.equations:
            where = self.found_by_one(equation)
            dropped = self._dropped(equation, step)
            sums = _the_sum(equation.about)
            told.append(f"{where}, {dropped}, so {sums} holds no more unknowns" if dropped else f"{where}, {sums}")
        count = counted(len(told), "equation")
        found = _sentence(self.forces(found_in(step)))
        return f"{found} are found together, from {count}: {'; '.join(told)}." + self._known(step)

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
