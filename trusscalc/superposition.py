"""What each combination adds up to for one force, with the adverse choice of all it leaves open.

Of a pair of factors the adverse one is taken, an optional case and a moving load stay away where they would help.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from trusscalc.exact import ZERO, Exact
from trusscalc.loads import Combination
from trusscalc.travel import Extreme

Sense = Literal["max", "min"]

NEARLY = 1e-9
"""Share of the larger value within which two values are compared exactly instead of as floats."""


@dataclass(frozen=True, slots=True)
class Choice:
    """One state of one combination: what it adds up to for one member.

    Attributes
    ----------
    combination : str
        Its name.
    factors : tuple of (str, Exact)
        The cases as taken: the adverse factor of each pair; cases that stay away are missing.
    stands : tuple of (str, Exact, Extreme)
        For each moving load that acts: its factor, and where its train stands.
    value : Exact
        The member's force, tension positive.
    """

    combination: str
    factors: tuple[tuple[str, Exact], ...]
    stands: tuple[tuple[str, Exact, Extreme], ...]
    value: Exact


@dataclass(frozen=True, slots=True)
class MemberEnvelope:
    """The extremes of a member, a reaction or a bearing.

    Attributes
    ----------
    member : str
        Its name.
    max, min : Choice
        Largest and least force, tension positive.
    largest_of, least_of : tuple of Choice
        For every combination its largest and its least, in the order stated.
    """

    member: str
    max: Choice
    min: Choice
    largest_of: tuple[Choice, ...]
    least_of: tuple[Choice, ...]

    @property
    def reversal(self) -> bool:
        """Whether the member is pulled in one state and pressed in another."""
        return self.max.value.sign() > 0 > self.min.value.sign()

    @property
    def governing(self) -> Sense:
        """Which of the two is larger in size; the tension where they are equal."""
        sizes = abs(self.max.value), abs(self.min.value)
        if sizes[0] == sizes[1]:
            return "max" if self.max.value.sign() >= 0 else "min"
        return "max" if sizes[1] < sizes[0] else "min"

    @property
    def senses(self) -> tuple[Sense, ...]:
        """The states to check by hand: the governing one, and the other one too where the force reverses."""
        if not self.reversal:
            return (self.governing,)
        return ("max", "min") if self.governing == "max" else ("min", "max")

    def state(self, sense: Sense) -> Choice:
        """Return one of the two extremes."""
        return self.max if sense == "max" else self.min

    def runners_up(self, sense: Sense) -> tuple[Choice, ...]:
        """Return the other combinations, the nearest to governing first."""
        governing = self.state(sense)
        others = [each for each in (self.largest_of if sense == "max" else self.least_of) if each is not governing]
        return tuple(sorted(others, key=lambda each: float(each.value), reverse=sense == "max"))


# --- combining --------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Effect:
    """A force under one load case, with the stand of its train where it moves."""

    value: Exact
    extreme: Extreme | None


@dataclass(frozen=True, slots=True)
class Share:
    """What a case brings into a combination: its factor as taken, its effect, their product; no factor: it is away."""

    case: str
    factor: Exact | None
    effect: Effect
    value: Exact


def extremes_over(
    member: str, combinations: Sequence[Combination], effects: Mapping[str, tuple[Effect, Effect]]
) -> MemberEnvelope:
    """Return a force's largest and least over combinations.

    Parameters
    ----------
    member : str
        Member, reaction or bearing.
    combinations : sequence of Combination
        In the order in which the first of equal ones governs.
    effects : mapping of case to (Effect, Effect)
        Largest and least under each case; the same one twice for a case that stands still.
    """
    shares: dict[tuple[str, tuple[Exact, ...], bool, Sense], Share] = {}

    def share(case: str, factors: tuple[Exact, ...], optional: bool, sense: Sense) -> Share:
        key = (case, factors, optional, sense)
        if key not in shares:
            shares[key] = _adverse(case, factors, effects[case], optional=optional, sense=sense)
        return shares[key]

    both: dict[Sense, list[Choice]] = {"max": [], "min": []}
    for each in combinations:
        for sense, choices in both.items():
            taken = [share(case, factors, case in each.optional, sense) for case, factors in each.factors]
            choices.append(_choice(each.name, taken))
    largest, least = both["max"], both["min"]
    return MemberEnvelope(member, _furthest(largest, "max"), _furthest(least, "min"), tuple(largest), tuple(least))


def _adverse(
    case: str, factors: tuple[Exact, ...], effects: tuple[Effect, Effect], *, optional: bool, sense: Sense
) -> Share:
    """Return the adverse share of a case; of equal ones the first written, and there rather than away."""
    offered = [
        Share(case, factor, effect, factor * effect.value) for factor in factors for effect in _different(effects)
    ]
    if optional:
        offered.append(Share(case, None, effects[0], ZERO))
    values = [each.value for each in offered]
    return offered[furthest(values, sense)]


def _different(effects: tuple[Effect, Effect]) -> tuple[Effect, ...]:
    return effects[:1] if effects[0] is effects[1] else effects


def _choice(combination: str, taken: Sequence[Share]) -> Choice:
    factors = tuple(
        (each.case, each.factor) for each in taken if each.factor is not None and each.effect.extreme is None
    )
    stands = tuple(
        (each.case, each.factor, each.effect.extreme)
        for each in taken
        if each.factor is not None and each.effect.extreme is not None
    )
    return Choice(combination, factors, stands, sum((each.value for each in taken), start=ZERO))


def _furthest(choices: Sequence[Choice], sense: Sense) -> Choice:
    return choices[furthest([choice.value for choice in choices], sense)]


def furthest(values: Sequence[Exact], sense: Sense) -> int:
    """Return the place of the largest or least value, the first of equal ones.

    Floats sort out what is far behind; what is near is compared exactly.
    """
    sign = 1.0 if sense == "max" else -1.0
    near = [sign * float(value) for value in values]
    best = max(near)
    slack = NEARLY * max(map(abs, near))
    place = -1
    for candidate, value in enumerate(near):
        if best - value > slack:
            continue
        if place < 0 or (values[candidate] - values[place]).sign() * sign > 0:
            place = candidate
    return place
