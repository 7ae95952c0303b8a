"""The first sheet of an influence line: conclusion, ordinates, scope."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc.influence import InfluenceLine
from trusscalc.influencechecks import TrainCheck
from trusscalc.membercheck import MemberCheck
from trusscalc.project import Project
from trusscalc.sheet.blocks import Block, Heading, Inline, Items, Paragraph, Run, Seal
from trusscalc.sheet.front import LIMIT, loads_words
from trusscalc.sheet.influencefigure import target_words
from trusscalc.sheet.traintables import MORE_PLACES, ordinate_table, stand_words
from trusscalc.sheet.values import decimal_text
from trusscalc.sheet.words import capital, counted, listed
from trusscalc.trains import Train
from trusscalc.travel import Extreme

TITLE: Final = "Influence line of a truss force, independently derived"
NOT_COVERED: Final = (
    "strength, buckling, connections, fatigue, bracing, foundations, deflection; bending of members loaded between "
    "their joints; dynamic effects beyond the impact stated; sideways distribution beyond the share stated"
)


@dataclass(frozen=True, slots=True)
class Study:
    """An influence line with the train on it and the hand checks behind both.

    Attributes
    ----------
    line : InfluenceLine
        The line.
    shown : MemberCheck
        The derivation of its largest ordinate.
    name : str
        What the trains are called together, '' without any.
    trains : tuple of Train
        Of which the worst governs.
    extremes : (Extreme, Extreme) or None
        What they cause.
    checks : tuple of TrainCheck
        The hand checks of the worst positions.
    """

    line: InfluenceLine
    shown: MemberCheck
    name: str
    trains: tuple[Train, ...]
    extremes: tuple[Extreme, Extreme] | None
    checks: tuple[TrainCheck, ...]

    @property
    def agreed(self) -> bool:
        """Whether every ordinate and every check agrees."""
        return self.line.agreed and self.shown.agreed and all(check.agreed for check in self.checks)


def opening(study: Study, project: Project) -> list[Block]:
    """Return title and the line that says what this is."""
    line = study.line
    joints = line.chain.joints
    text = (
        f"{capital(target_words(line))} for a unit load downwards on the chain {line.chain.name}, joints {joints[0]} "
        f"to {joints[-1]}: force per force, without unit."
    )
    if study.name:
        text += f" With {study.name} on it: {loads_words(project)}, forces in {line.truss.force}."
    return [Heading(1, TITLE), Paragraph((Run(text),))]


def summary(study: Study, places: int) -> list[Block]:
    """Return conclusion and table of ordinates."""
    reasons = tuple((joint, (Run(reason),)) for joint, reason in study.line.differing.items())
    return [
        Paragraph(tuple(_conclusion(study, places)), "conclusion"),
        ordinate_table(study.line, places),
        *([Items(reasons)] if reasons else []),
    ]


def _conclusion(study: Study, places: int) -> list[Inline]:
    line = study.line
    content: list[Inline] = []
    for sentence in _disagreements(study):
        content += [Run(sentence, "strong"), Run(" ")]
    if line.agreed:
        content.append(
            Run(
                f"The {counted(len(line.ordinates), 'ordinate')}, derived by one set of cuts with the unit load at "
                "each joint in turn, equal the equilibrium of all joints exactly and agree with a separate stiffness "
                "solution for each position. "
            )
        )
    for word, pick in (("Largest", max), ("Least", min)):
        place = pick(range(len(line.ordinates)), key=lambda n: float(line.ordinates[n]))
        size = decimal_text(line.ordinates[place], places + MORE_PLACES).replace("-", "−")
        content.append(Run(f"{word} ordinate: {size} at {line.chain.joints[place]}. "))
    content += [Run(f"{extreme_sentence(study, extreme, places)} ") for extreme in study.extremes or ()]
    if study.checks and all(check.agreed for check in study.checks):
        several = len(study.checks) > 1
        which = "both values" if several else "this value"
        content.append(Run(f"With the axles placed there, the ordinary hand check gives {which} again, exactly."))
    return content


def extreme_sentence(study: Study, extreme: Extreme, places: int) -> str:
    """Return what the trains cause at most in one sense, and where they stand."""
    line = study.line
    if not extreme.value:
        return f"With {study.name} in the other sense no position is adverse, value 0."
    train = next(train for train in study.trains if train.name == extreme.train)
    size = decimal_text(extreme.value, places).replace("-", "−")
    where = f"{train.name}{stand_words(line, extreme, train)}"
    return f"{capital(sense_words(study, extreme))}: {size} {line.truss.force}, {where}."


def sense_words(study: Study, extreme: Extreme) -> str:
    """Return what an extreme is: ``largest tension``, or for other forces ``largest positive value``."""
    sign = extreme.value.sign()
    if study.line.kind == "member":
        return {1: "largest tension", -1: "largest compression", 0: "no force"}[sign]
    return {1: "largest positive value", -1: "largest negative value", 0: "no force"}[sign]


def _disagreements(study: Study) -> list[str]:
    line = study.line
    told = []
    if line.differing:
        told.append(f"Not agreed: the ordinate{'s' * (len(line.differing) > 1)} at {listed(line.differing)}.")
    if not study.shown.agreed:
        told.append(f"The derivation with the unit load at {line.shown_joint} does not agree with the other route.")
    for check in study.checks:
        if check.value != check.extreme.value:
            told.append(f"The hand check of the {sense_words(study, check.extreme)} gives another value.")
        if not check.check.agreed:
            told.append(f"The two routes do not agree on the {sense_words(study, check.extreme)}.")
    if line.exactness != "exact":
        told.append(
            "Flag: angle rounded. An angle in the input has no sine and cosine in square roots; they were rounded "
            "once to 30 digits, and all that follows is exact from there on."
        )
    return told


def scope(study: Study) -> list[Block]:
    """Return what was checked, what was not, and what no such check can see; with room to sign and to seal."""
    line = study.line
    checked = f"{target_words(line)} for a load at each of {counted(len(line.chain.joints), 'joint')} of the chain"
    if study.name:
        checked += f"; every position of {study.name}, in both directions, and by hand {_by_hand(study.checks)}"
    items = (
        ("Checked", checked),
        ("Not checked", "other forces, other chains, other loads, and what acts together with them"),
        ("Not covered", NOT_COVERED),
        ("Limit", LIMIT),
    )
    return [Heading(2, "Scope"), Items(tuple((term, (Run(text),)) for term, text in items)), Seal()]


def _by_hand(checks: Sequence[TrainCheck]) -> str:
    return counted(len(checks), "worst position") if checks else "nothing, for none is adverse"
