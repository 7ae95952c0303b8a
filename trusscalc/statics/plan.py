"""The order of steps that reaches the reactions and the wanted members.

Reactions come first, from the whole truss or its hinged parts; then each member on its own, from loads and
reactions. Proposed are the bodies of ``bodies``; where those do not reach a member, ``bridges`` finds every
bar that one equation can give, whatever its body looks like.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from trusscalc.errors import NoCutError
from trusscalc.statics.bodies import (
    Body,
    Window,
    bodies_in,
    boundary,
    everything,
    hinge_bodies,
    whole_window,
    window_round,
)
from trusscalc.statics.bridges import bridge_bodies
from trusscalc.statics.carrying import Carried, carry
from trusscalc.statics.cuts import (
    SUM_X,
    SUM_Y,
    About,
    Cut,
    Structure,
    about_joint,
    across,
    cut_of,
    meeting_point,
)
from trusscalc.statics.derivations import Derivations, Found, found_by
from trusscalc.statics.incidence import bits, layout_of
from trusscalc.statics.matrix import Equilibrium
from trusscalc.statics.prices import Candidate, Prices, all_candidates

SMALL_TRUSS = 150
"""Up to so many joints the whole truss is searched at once."""
WINDOW_JOINTS = 28


@dataclass(frozen=True, slots=True)
class PlannedStep:
    """What a step is to do: one (cut, about) for each equation, and as many unknowns."""

    bodies: tuple[tuple[Cut, About], ...]
    solves: tuple[str, ...]
    carries: tuple[str, ...] = ()
    """Bars whose force is first called X, Y, ... here."""
    provisional: bool = False
    """What it finds may still hold a carried force."""
    closes: bool = False
    """It solves for the carried forces."""


def plan(
    structure: Structure,
    equilibrium: Equilibrium,
    wanted: Sequence[str],
    loads: Mapping[str, tuple[float, float]],
) -> tuple[PlannedStep, ...]:
    """Return the steps, in order, that reach every reaction statics decides and every wanted member.

    Parameters
    ----------
    structure : Structure
        Truss and loads.
    equilibrium : Equilibrium
        Says which bars statics decides, and which forces are exactly zero.
    wanted : sequence of str
        Member names, each decided by statics.
    loads : mapping of str to (float, float)
        Loads at the symbols' values; they only enter prices.

    Raises
    ------
    NoCutError
        Naming the members that no equation with one unknown reaches.
    """
    search = _Search(structure, equilibrium, loads)
    return search.plan(wanted)


class _Search:
    """One search: the layout, the prices and the equations already priced."""

    def __init__(
        self, structure: Structure, equilibrium: Equilibrium, loads: Mapping[str, tuple[float, float]]
    ) -> None:
        self.structure = structure
        self.layout = layout_of(structure, dict(loads))
        self.index = {name: place for place, name in enumerate(self.layout.bars)}
        zero = sum(1 << self.index[name] for name, tension in equilibrium.tensions.items() if not tension)
        self.decided = sum(1 << self.index[name] for name in equilibrium.tensions)
        self.prices = Prices(self.layout, zero)
        self.priced: dict[int, list[Candidate]] = {}
        self.tables: dict[tuple[Window, int], Derivations] = {}

    def plan(self, wanted: Sequence[str]) -> tuple[PlannedStep, ...]:
        layout = self.layout
        links = [bar for bar in range(len(layout.bars)) if layout.ends[bar][1] < 0 and self.decided >> bar & 1]
        reactions = self._reactions(links)
        found = [step for bar in links if reactions.solved >> bar & 1 for step in reactions.steps_to(bar, 0)]
        found = list(dict.fromkeys(found))
        given = done = found_by(found)
        steps = [self._step(step) for step in found]
        goals = [*links, *(self.index[name] for name in wanted)]
        while goals:
            more, lost = self._reached(goals, given, done)
            steps += [self._step(step) for step in more]
            done |= found_by(more)
            if not lost:
                break
            carried = self._carried(given)
            if carried is None:
                raise _unreachable([layout.bars[bar] for bar in lost])
            steps += self._chain(carried, done)
            given |= sum(1 << bar for bar in carried.bars)
            done |= given
            goals = lost
        return tuple(steps)

    def _reached(self, goals: Sequence[int], given: int, done: int) -> tuple[list[Found], list[int]]:
        """Return the steps that reach what single equations and pairs reach, and the bars they do not reach."""
        steps: list[Found] = []
        lost = []
        for bar in goals:
            if done >> bar & 1:
                continue
            table = self._table_for(bar, given)
            if table is None:
                lost.append(bar)
                continue
            more = table.steps_to(bar, done)
            done |= found_by(more)
            steps += more
        return steps, lost

    # --- carried unknowns -------------------------------------------------------------------------------

    def _carried(self, given: int) -> Carried | None:
        base = self._table(whole_window(self.layout), given)
        while not base.exhausted:
            self._widen(base)
        return carry(base, self.decided)

    def _chain(self, carried: Carried, done: int) -> list[PlannedStep]:
        """Return the steps from the carried bars to the equations that close."""
        table = carried.table
        held = sum(1 << bar for bar in carried.bars)
        reached = done | held
        chain: list[Found] = []
        for candidate in carried.closing:
            for bar in bits(candidate.live & ~table.given):
                more = table.steps_to(bar, reached)
                reached |= found_by(more)
                chain += more
        chain.append(Found(carried.closing, carried.bars))
        steps, introduced = [], 0
        for step in chain:
            live = 0
            for candidate in step.candidates:
                live |= candidate.live
            new = live & held & ~introduced
            introduced |= new
            carries = tuple(self.layout.bars[bar] for bar in bits(new))
            steps.append(replace(self._step(step), carries=carries, provisional=step.solves != carried.bars))
        steps[-1] = replace(steps[-1], closes=True)
        return steps

    # --- reactions --------------------------------------------------------------------------------------

    def _reactions(self, links: list[int]) -> Derivations:
        """Find the reactions from the whole truss, then from its hinged parts."""
        layout = self.layout
        table = Derivations(self.prices, 0)
        whole = everything(layout)
        table.propose(self._priced([Body(whole, boundary(layout, whole), "whole")]))
        table.run()
        if any(not table.solved >> bar & 1 for bar in links):
            table.propose(self._priced(hinge_bodies(layout)))
            table.run()
        return table

    # --- members ----------------------------------------------------------------------------------------

    def _table_for(self, bar: int, given: int) -> Derivations | None:
        """Return a table that holds the bar: from a window round it, wider ones, and at last from bridges."""
        layout = self.layout
        size = WINDOW_JOINTS if len(layout.joints) > SMALL_TRUSS else len(layout.joints)
        while True:
            window = window_round(layout, bar, size) if size < len(layout.joints) else whole_window(layout)
            table = self._table(window, given)
            if table.solved >> bar & 1:
                return table
            if not window.far or size > SMALL_TRUSS:
                return self._with_bridges(table, bar)
            size *= 2

    def _table(self, window: Window, given: int) -> Derivations:
        """Return the derivations found in a window, worked out once."""
        key = (window, given)
        if key not in self.tables:
            table = Derivations(self.prices, given)
            table.propose(self._priced(bodies_in(self.layout, window)))
            table.run()
            self.tables[key] = table
        return self.tables[key]

    def _with_bridges(self, table: Derivations, bar: int) -> Derivations | None:
        """Widen a table by every bar that one equation of any body gives, until it holds the bar."""
        while not table.solved >> bar & 1:
            if table.exhausted:
                return None
            self._widen(table)
        return table

    def _widen(self, table: Derivations) -> None:
        """Add every bar that one equation of any body gives; the table is exhausted when there is none."""
        before = table.solved
        table.propose(self._priced(bridge_bodies(self.layout, table.given | before, self.decided)))
        table.run()
        table.exhausted = table.solved == before

    def _priced(self, bodies: Sequence[Body]) -> list[Candidate]:
        found: list[Candidate] = []
        for body in bodies:
            if body.kept not in self.priced:
                self.priced[body.kept] = all_candidates(self.prices, [body])
            found += self.priced[body.kept]
        return found

    # --- written exactly --------------------------------------------------------------------------------

    def _step(self, step: Found) -> PlannedStep:
        layout = self.layout
        bodies = []
        for candidate in step.candidates:
            cut = cut_of(self.structure, [layout.joints[j] for j in bits(candidate.body.kept)])
            bodies.append((cut, self._about(candidate)))
        return PlannedStep(tuple(bodies), tuple(layout.bars[bar] for bar in step.solves))

    def _about(self, candidate: Candidate) -> About:
        kind, first, second = candidate.recipe
        layout, structure = self.layout, self.structure
        if kind == "axis":
            return SUM_Y if first else SUM_X
        if kind == "joint":
            return about_joint(structure, layout.joints[first])
        if kind == "across":
            return across(structure.bars[layout.bars[first]])
        place = meeting_point(structure, structure.bars[layout.bars[first]], structure.bars[layout.bars[second]])
        assert place is not None  # noqa: S101 - parallels have the recipe "across"
        return About("moment", *place)


def _unreachable(lost: list[str]) -> NoCutError:
    message = (
        f"no equation with a single unknown reaches {', '.join(lost[:12])}{' and others' if len(lost) > 12 else ''}: "  # noqa: PLR2004
        "the truss is complex there, and a carried unknown would be needed, which is not supported yet"
    )
    return NoCutError(message, members=lost)
