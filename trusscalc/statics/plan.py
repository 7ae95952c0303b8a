"""Temporary: joints only. Being replaced by the planner proper; same interface."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from trusscalc.errors import NoCutError
from trusscalc.statics.cuts import SUM_X, SUM_Y, About, Cut, Structure, about_joint, across, bar_lever, cut_of
from trusscalc.statics.matrix import Equilibrium


@dataclass(frozen=True, slots=True)
class PlannedStep:
    """What a step is to do: one (cut, about) for each equation, and as many unknowns."""

    bodies: tuple[tuple[Cut, About], ...]
    solves: tuple[str, ...]


def plan(structure: Structure, equilibrium: Equilibrium, wanted: Sequence[str]) -> tuple[PlannedStep, ...]:
    """Return the steps, in order, that reach every reaction and every wanted member."""
    del equilibrium
    steps = []
    whole = cut_of(structure, structure.joints)
    known: set[str] = set()
    for link in whole.bars:
        for about in (SUM_X, SUM_Y, *(about_joint(structure, n) for n in structure.joints)):
            live = [n for n in whole.bars if bar_lever(structure, structure.bars[n], frozenset(whole.kept), about)]
            if live == [link] or (set(live) - known) == {link}:
                steps.append(PlannedStep(((whole, about),), (link,)))
                known.add(link)
                break
    progress = True
    while progress and not set(wanted) <= known:
        progress = False
        for joint in structure.joints:
            unknown = [n for n in structure.bars_at[joint] if n not in known]
            if not 1 <= len(unknown) <= 2:
                continue
            cut = cut_of(structure, [joint])
            for name in unknown:
                others = [n for n in unknown if n != name and n not in known]
                for about in [across(structure.bars[n]) for n in others] or [SUM_X, SUM_Y]:
                    if others and not structure.bars[others[0]].dy:
                        about = SUM_Y
                    if others and not structure.bars[others[0]].dx:
                        about = SUM_X
                    if bar_lever(structure, structure.bars[name], {joint}, about):
                        steps.append(PlannedStep(((cut, about),), (name,)))
                        known.add(name)
                        progress = True
                        break
    missing = [n for n in wanted if n not in known]
    if missing:
        raise NoCutError("cannot reach", members=missing)
    return tuple(steps)
