"""How well a model reproduces printed results, roundings taken into account."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Final

from trusscalc.truss import Link, Truss

NOISE: Final = 1e-6
"""Share of the largest force within which analyses differ without a reason: single precision, stiff springs."""

AXES: Final = ("x", "y")

SHARP, PRINTED, ALLOWED, APART = range(4)
"""How closely: within the digits of the table as a whole, of every value as printed, within the tolerance, or not."""


@dataclass(frozen=True, slots=True)
class Printed:
    """Results as another analysis printed them.

    Attributes
    ----------
    forces : dict of str to float
        By member as the truss spells it, tension positive, in the truss's unit of force; members may be missing.
    half_units : dict of str to float
        Half a unit of the last digit printed.
    reactions, reaction_half_units : dict of str to float
        The same for reactions, by link or as components such as ``L0.x``, where they are given.
    allowed : dict of str to float
        What each value may differ by besides its rounding; 0 where nothing is stated.
    """

    forces: Mapping[str, float]
    half_units: Mapping[str, float]
    reactions: Mapping[str, float] = field(default_factory=dict)
    reaction_half_units: Mapping[str, float] = field(default_factory=dict)
    allowed: Mapping[str, float] = field(default_factory=dict)

    @property
    def largest(self) -> float:
        """The largest force in size."""
        return max(map(abs, self.forces.values()), default=0.0)

    def sharp(self) -> dict[str, float]:
        """Return half units as the table as a whole suggests them.

        A value printed as 80 may be 80.00 with its zeros cut. A table is rounded to so many figures or so many
        decimals: each value is taken to have the more of the two that the table shows, as far as it can.
        """
        noise = NOISE * self.largest
        known = {name: max(half, 1e-300) for name, half in self.half_units.items()}
        figures = max((_figures(self.forces[name], half) for name, half in known.items()), default=1)
        finest = min(known.values(), default=0.0)
        found = {}
        for name, half in known.items():
            size = abs(self.forces[name])
            by_figures = 0.5 * 10.0 ** (math.floor(math.log10(size)) + 1 - figures) if size else 0.0
            found[name] = noise + min(half, max(by_figures, finest))
        return found


def _figures(value: float, half: float) -> int:
    """Return how many significant figures a value shows."""
    return math.floor(math.log10(abs(value))) + 1 - round(math.log10(2 * half)) if value else 0


@dataclass(frozen=True, slots=True)
class Fit:
    """What a model leaves of printed results.

    Attributes
    ----------
    closeness : int
        ``SHARP``, ``PRINTED``, ``ALLOWED`` or ``APART``, of the value that fits worst.
    remainder : float
        The largest difference left between member forces, over the largest force of either.
    left : int
        Member forces and reactions that are not reproduced within their roundings.
    """

    closeness: int
    remainder: float
    left: int

    @property
    def fits(self) -> bool:
        """Whether every value is reproduced within its rounding."""
        return self.closeness <= PRINTED


def fit(printed: Printed, forces: Mapping[str, float], reactions: Mapping[str, float]) -> Fit:
    """Return how well forces and reactions reproduce the printed ones.

    Parameters
    ----------
    printed : Printed
        The results to reproduce; members without a printed value are not judged.
    forces, reactions : dict of str to float
        A model's; a member it does not have carries nothing, a reaction it cannot tell is not judged.
    """
    noise = NOISE * printed.largest
    sharp = printed.sharp()
    closeness, left, most, largest = SHARP, 0, 0.0, printed.largest
    for name, value in printed.forces.items():
        off = abs(value - forces.get(name, 0.0))
        most, largest = max(most, off), max(largest, abs(forces.get(name, 0.0)))
        near = _closeness(off, sharp[name], printed.half_units[name] + noise, printed.allowed.get(name, 0.0))
        closeness, left = max(closeness, near), left + (near > PRINTED)
    for name, value in printed.reactions.items():
        if name in reactions:
            half = printed.reaction_half_units[name] + noise
            near = _closeness(abs(value - reactions[name]), half, half, printed.allowed.get(name, 0.0))
            closeness, left = max(closeness, near), left + (near > PRINTED)
    return Fit(closeness, most / largest if largest else 0.0, left)


def _closeness(off: float, sharp: float, rounding: float, allowed: float) -> int:
    for closeness, bound in ((SHARP, sharp), (PRINTED, rounding), (ALLOWED, rounding + allowed)):
        if off <= bound * (1 + 1e-9):
            return closeness
    return APART


def reactions_by_name(
    names: Iterable[str], truss: Truss, altered: Truss, reactions: Mapping[str, float]
) -> dict[str, float]:
    """Return an altered model's reactions under the names they are printed by, as far as these have a meaning in it.

    Parameters
    ----------
    names : iterable of str
        Links of the truss, or ``L0.x`` and ``L0.y`` for the components of all that holds a joint.
    truss, altered : Truss
        Whose links the names are, and the truss that was solved.
    reactions : dict of str to float
        Of the altered truss, by its own link names.
    """
    totals: dict[str, tuple[float, float]] = {}
    for link in altered.links:
        dx, dy = _unit(link)
        x, y = totals.get(link.joint, (0.0, 0.0))
        totals[link.joint] = (x + reactions[link.name] * dx, y + reactions[link.name] * dy)
    links = {link.name: link for link in truss.links}
    kept = {support.joint: support.links for support in altered.supports}
    several = {support.joint for support in truss.supports if len(support.links) > 1}
    found = {}
    for name in names:
        joint, _, axis = name.rpartition(".")
        x, y = totals.get(joint, (0.0, 0.0))
        if axis in AXES:
            found[name] = x if axis == "x" else y
        elif name in links and links[name] in kept.get(joint, ()):
            found[name] = reactions[name]
        elif name in links and joint not in several:
            dx, dy = _unit(links[name])
            found[name] = x * dx + y * dy
    return found


def _unit(link: Link) -> tuple[float, float]:
    dx, dy = float(link.dx), float(link.dy)
    return dx / math.hypot(dx, dy), dy / math.hypot(dx, dy)
