"""Stiff joints in place of hinges, as they fit printed results best.

Sections are not known to an ideal truss, so a few plain rules for them are tried: one radius of gyration for all
members, one slenderness, one radius for members that run on through a joint (chords) and one for the others, one for
each group of the truss file.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Final

import numpy as np

from trusscalc.alterations import Compared, plain
from trusscalc.altered import Alteration
from trusscalc.fitting import Forward, fitted, nearest
from trusscalc.frame import Frame, frame
from trusscalc.screening import Flags, Floats, Screen

SLENDERNESS: Final = (300.0, 150.0, 80.0, 40.0, 20.0, 10.0, 5.0)
"""Mean length of the members over the radius of gyration, as starts of the fit."""
SLIMMEST, STOUTEST = 400.0, 2.0
"""Beyond these no fitted radius is one of a member; a hinge, or rounding elsewhere, is the better explanation."""
STEPS_APART: Final = (0.0, -1.2)
"""Logarithms of the ratios of several radii, as starts."""
MOST_GROUPS: Final = 4
COLLINEAR: Final = 1e-6


@dataclass(frozen=True, slots=True)
class _Rule:
    """Members' bending stiffness by one or more radii of gyration.

    ``patterns`` (radii, members) float is each member's EI for radii of one; ``words`` has a place for each radius.
    """

    patterns: Floats
    words: str
    strain: int


def of_stiff_joints(look: Screen, what: Compared) -> Iterator[Alteration]:
    """Yield stiff joints after each rule for the sections, with the radii that fit best."""
    model = frame(look.truss, what.case)
    for rule in _rules(look, what, model):
        radii = _radii(look, model, rule.patterns)
        mean = float(model.lengths.mean())
        if radii.min() < mean / SLIMMEST or radii.max() > mean / STOUTEST:
            continue
        bending = (radii**2) @ rule.patterns
        listed = [(name, float(size)) for name, size in zip(look.members, bending.tolist(), strict=True) if size]
        told = [f"{plain(radius)} {what.truss.length}" for radius in radii.tolist()]
        yield Alteration(
            explanation="stiff-joints",
            where=(),
            words=f"stiff joints, {rule.words.format(*told)}",
            bending=tuple(listed),
            strain=rule.strain,
            fitted=len(radii),
        )


def _rules(look: Screen, what: Compared, model: Frame) -> list[_Rule]:
    every = np.ones((1, len(look.members)))
    slender = (model.lengths / model.lengths.mean())[None] ** 2
    found = [
        _Rule(every, "the radius of gyration {} for all members", 4),
        _Rule(slender, "the same slenderness for all members, a radius of gyration of {} at the mean length", 5),
    ]
    through = _running_through(look)
    if through.any() and not through.all():
        both = np.stack((through, ~through)).astype(np.float64)
        words = "the radius of gyration {} for members that run on through a joint, "
        found += [_Rule(both[:1], f"{words}the others hinged", 4), _Rule(both, f"{words}{{}} for the others", 6)]
    groups = tuple(dict.fromkeys(member.group for member in what.truss.members))
    if 1 < len(groups) <= MOST_GROUPS:
        mine = np.array([[member.group == group for member in what.truss.members] for group in groups])
        words = ", ".join(f"{{}} for {_escaped(group) or 'the members of no group'}" for group in groups)
        found.append(_Rule(mine.astype(np.float64), f"radii of gyration of {words}", 7))
    return found


def _escaped(group: str) -> str:
    return group.replace("{", "{{").replace("}", "}}")


def _radii(look: Screen, model: Frame, patterns: Floats) -> Floats:
    """Return the radii of gyration that fit best, by their logarithms, so that they stay positive."""
    mean = float(model.lengths.mean())

    def forward(logarithms: Floats) -> Floats:
        return model.axial(np.exp(2 * logarithms) @ patterns)

    return np.asarray(np.exp(fitted(look, forward, _start(look, forward, mean, len(patterns)), 1e-4, 1.0)))


def _start(look: Screen, forward: Forward, mean: float, radii: int) -> Floats:
    equal = [np.full(radii, np.log(mean / ratio)) for ratio in SLENDERNESS]
    best = nearest(look, forward, equal)
    apart: Sequence[tuple[float, ...]] = list(product(STEPS_APART, repeat=radii)) if radii > 1 else [(0.0,)]
    return nearest(look, forward, [best + np.array(steps) for steps in apart])


def _running_through(look: Screen) -> Flags:
    """Return which members go on in a straight line at one of their ends."""
    model = look.flexibility
    found = np.zeros(len(look.members), dtype=np.bool_)
    for joint in range(len(model.places)):
        mine = np.flatnonzero((model.start == joint) | (model.end == joint))
        outward = model.cosines[mine] * np.where(model.start[mine] == joint, 1.0, -1.0)[:, None]
        found[mine] |= (outward @ outward.T < -1 + COLLINEAR).any(axis=1)
    return found
