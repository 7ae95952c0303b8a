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
MOSTLY: Final = 0.05
"""What leaves less than this share of the difference explains most of it."""
STIFFLY: Final = 0.35
"""The same for stiff joints, whose sections are not known, where the differences are small."""
SMALL: Final = 0.2
"""A difference smaller than this share of the largest force may come from stiff joints."""
PARTLY: Final = 0.5
"""What leaves more than this share of the difference is not worth telling."""
MOST_PARTLY: Final = 3

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


def convincing(trial: Trial, before: Fit) -> bool:
    """Return whether a trial reproduces the values, or leaves hardly anything of the differences."""
    return trial.fit.fits or trial.cost <= MOSTLY * before.remainder


def _telling(trial: Trial, before: Fit) -> bool:
    """Return whether a trial comes before "unexplained"; stiff joints do with less, for their sections are guessed."""
    stiff = trial.blunders[0].bending and before.remainder <= SMALL and trial.cost <= STIFFLY * before.remainder
    return bool(stiff) or convincing(trial, before)


def explanations(trials: Sequence[Trial], before: Fit, nothing: Explanation) -> tuple[Explanation, ...]:
    """Return what is told of the trials, the best first.

    Where some reproduce the values within their roundings, only those are told; then those within the tolerance or
    nearly so; and where none does, that comes first, and what explains a part after it.

    Parameters
    ----------
    trials : sequence of Trial
        All that was run.
    before : Fit
        Of the unaltered model.
    nothing : Explanation
        What to say where nothing explains the results.
    """
    listed = _ranked(trials, before)
    fitting = [trial for trial in listed if trial.fit.fits]
    if fitting:
        alike = [trial for trial in fitting if trial.fit.closeness == fitting[0].fit.closeness]
        # two blunders are no tie of one: more freedom fits more
        names = [trial.name for trial in alike if len(trial.blunders) == len(alike[0].blunders)]
        return tuple(_with_ties(_told(trial, before), trial, names) for trial in fitting[:MOST_TOLD])
    nearly = [trial for trial in listed if _telling(trial, before)]
    partly = [trial for trial in listed if trial not in nearly and trial.cost < PARTLY * before.remainder]
    told = [_told(trial, before) for trial in nearly[:MOST_TOLD]]
    if nearly and nearly[0].fit.closeness == ALLOWED:
        return tuple(told)
    return (*told, nothing, *(_told(trial, before) for trial in partly[:MOST_PARTLY]))


def _ranked(trials: Sequence[Trial], before: Fit) -> list[Trial]:
    """Return the trials, the best first: by closeness; then, if they fit, by simplicity, else by what they leave."""

    def order(trial: Trial) -> tuple[int, float, float]:
        closeness = trial.fit.closeness if convincing(trial, before) else APART
        if closeness >= ALLOWED:
            return closeness, trial.cost, trial.strain
        return closeness, trial.strain, trial.fit.remainder

    best: dict[tuple[Name, ...], Trial] = {}
    for trial in sorted(trials, key=order):
        best.setdefault(trial.name, trial)
    return list(best.values())


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
