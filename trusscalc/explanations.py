"""Explanations of differing results: what was tried, how well it fits, in words that claim no more than that."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Final

from trusscalc.alterations import plain
from trusscalc.altered import Alteration
from trusscalc.fits import ALLOWED, APART, Fit

MOST_TOLD: Final = 10
"""Explanations listed."""
MOST_PLACES: Final = 4
"""Joints named in an unexplained difference."""
PER_NUMBER: Final = 1.5
"""A remainder counts so many times for every number fitted to the values, and for every step of strain a little."""
PER_BLUNDER: Final = 3.0
"""A second blunder must make the remainder that much smaller to come first."""
LEAST_TOLD: Final = 0.001
"""Per cent of the largest force."""
MOSTLY: Final = 0.1
"""What leaves less than this share of the difference explains most of it."""

Name = tuple[str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Explanation:
    """One explanation of the differences between printed results and ours.

    Attributes
    ----------
    explanation : str
        ``sign``, ``scale``, ``case-missing``, ``case-doubled``, ``load-missing``, ``load-doubled``, ``load-moved``,
        ``load-reversed``, ``support-exchanged``, ``support-extra``, ``support-turned``, ``mirrored``,
        ``rows-exchanged``, ``member-missing``, ``joint-displaced``, ``wrong-combination``, ``stiff-joints`` or
        ``unexplained``.
    where : tuple of str
        Joints, members, cases or the factor concerned.
    text : str
        What the results are consistent with, how well, and what remains.
    remainder : float
        The largest difference between member forces left, over the largest force.
    fits : bool
        Whether every value is reproduced within its rounding.
    ties : tuple of (explanation, where)
        Others that reproduce the values as well: nothing in the table tells them apart.
    second : (explanation, where) or None
        A second blunder this one goes together with.
    """

    explanation: str
    where: tuple[str, ...]
    text: str
    remainder: float
    fits: bool
    ties: tuple[Name, ...] = ()
    second: Name | None = None


@dataclass(frozen=True, slots=True)
class Trial:
    """One alteration, or two together, and how well the altered model reproduces the printed results."""

    blunders: tuple[Alteration, ...]
    fit: Fit

    @property
    def name(self) -> tuple[Name, ...]:
        """Kinds and places of the blunders."""
        return tuple((one.explanation, one.where) for one in self.blunders)

    @property
    def strain(self) -> int:
        """How far-fetched, two blunders far more than one."""
        return sum(one.strain for one in self.blunders) + 10 * (len(self.blunders) - 1)

    @property
    def cost(self) -> float:
        """The remainder, made worse by freedom, for what does not fit."""
        fitted = sum(one.fitted for one in self.blunders)
        return self.fit.remainder * PER_NUMBER**fitted * PER_BLUNDER ** (len(self.blunders) - 1)


def ranked(trials: Sequence[Trial]) -> list[Trial]:
    """Return the trials, the best first: by closeness; then, if they fit, by simplicity, else by what they leave."""
    best: dict[tuple[Name, ...], Trial] = {}
    for trial in sorted(trials, key=_order):
        best.setdefault(trial.name, trial)
    return list(best.values())


def _order(trial: Trial) -> tuple[int, float, float]:
    closeness = trial.fit.closeness
    if closeness >= ALLOWED:
        return closeness, trial.cost, trial.strain
    return closeness, trial.strain, trial.fit.remainder


def explanations(trials: Sequence[Trial], before: Fit, nothing: Explanation) -> tuple[Explanation, ...]:
    """Return what is told of the trials, the best first.

    Parameters
    ----------
    trials : sequence of Trial
        All that was run.
    before : Fit
        Of the unaltered model.
    nothing : Explanation
        What to say where nothing explains the results.
    """
    listed = ranked(trials)
    told = [_told(trial, before) for trial in listed[:MOST_TOLD]]
    if not listed or listed[0].fit.closeness == APART:
        mostly = [one for one in told if one.remainder <= MOSTLY * before.remainder]
        partly = [one for one in told if MOSTLY * before.remainder < one.remainder < before.remainder]
        return (*mostly, nothing, *partly)
    equals = [trial for trial in listed if trial.fit.closeness == listed[0].fit.closeness]
    equals = equals if listed[0].fit.closeness < ALLOWED else []
    # two blunders are no tie of one: more freedom fits more
    fewest = min((len(trial.blunders) for trial in equals), default=0)
    names = [trial.name for trial in equals if len(trial.blunders) == fewest]
    return tuple(_with_ties(one, trial, names) for one, trial in zip(told, listed, strict=False))


def _with_ties(one: Explanation, trial: Trial, names: Sequence[tuple[Name, ...]]) -> Explanation:
    if trial.name not in names or len(names) == 1:
        return one
    others = [name for name in names if name != trial.name]
    told = ", ".join(dict.fromkeys(" with ".join(_short(*each) for each in name) for name in others[:MOST_TOLD]))
    more = f" and {len(others) - MOST_TOLD} more" if len(others) > MOST_TOLD else ""
    text = f"{one.text}; the same values come from {told}{more}: the table does not tell them apart"
    return replace(one, text=text, ties=tuple(name[0] for name in others))


def _short(explanation: str, where: tuple[str, ...]) -> str:
    return f"{explanation} ({', '.join(where)})" if where else explanation


def _told(trial: Trial, before: Fit) -> Explanation:
    first, *rest = trial.blunders
    words = ", and ".join(one.words for one in trial.blunders)
    left = share(trial.fit.remainder)
    values = "1 value" if trial.fit.left == 1 else f"{trial.fit.left} values"
    if trial.fit.fits:
        text = f"consistent with {words}: every value within its rounding, the largest difference left {left}"
    elif trial.fit.closeness == ALLOWED:
        text = f"consistent with {words} within the tolerance: {values} off by more than rounding, at most by {left}"
    else:
        text = f"{words}: would bring the largest difference from {share(before.remainder)} down to {left}"
        text += f" and leave {values} unexplained"
    second = (rest[0].explanation, rest[0].where) if rest else None
    return Explanation(first.explanation, first.where, text, trial.fit.remainder, trial.fit.fits, second=second)


def share(part: float) -> str:
    """Return a part of the largest force in words."""
    percent = 100 * part
    return f"{plain(float(f'{percent:.2g}'))} % of the largest force" if percent >= LEAST_TOLD else "under 0.001 %"
