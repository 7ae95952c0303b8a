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
    stretches,
    whole_window,
    window_round,
)
from trusscalc.statics.bridges import bridge_bodies
from trusscalc.statics.carrying import Carried, carry, reduced_row
from trusscalc.statics.cuts import About, Cut, Structure, about_of, cut_of
from trusscalc.statics.derivations import Derivations, Found, found_by
from trusscalc.statics.incidence import bits, layout_of
from trusscalc.statics.matrix import Equilibrium
from trusscalc.statics.prices import Candidate, Preference, Prices, all_candidates

SMALL_TRUSS = 150
"""Up to so many joints the whole truss is searched at once."""
STRETCH = 10
WINDOW_JOINTS = 32
"""In a longer truss so many joints are searched round a stretch of so many."""


MOST_TOGETHER = 3
"""A plane body has three equations, so no more unknowns than that can be solved together."""


@dataclass(frozen=True, slots=True)
class Ways:
    """A body's equations (what is summed, unknown, known), and what they decide together."""

    unknown: tuple[str, ...]
    equations: tuple[tuple[About, tuple[str, ...], tuple[str, ...]], ...]
    together: tuple[str, ...]
    reason: str


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
    *,
    cuts: Mapping[str, tuple[str, ...]] | None = None,
    prefer: Preference = "",
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
    cuts : mapping of str to tuple of str, optional
        For some wanted members the joints of the free body to use.
    prefer : str
        ``sections`` or ``joints`` to lean that way where both are possible.

    Raises
    ------
    NoCutError
        When a given cut cannot give its member, or (never seen) a member is beyond all methods.
    """
    search = Search(structure, equilibrium, loads, prefer)
    return search.plan(wanted, cuts or {})


class Search:
    """One search: the layout, the prices and the equations already priced."""

    def __init__(
        self,
        structure: Structure,
        equilibrium: Equilibrium,
        loads: Mapping[str, tuple[float, float]],
        prefer: Preference = "",
    ) -> None:
        """Lay out the structure and its prices."""
        self.structure = structure
        self.layout = layout_of(structure, dict(loads))
        self.index = {name: place for place, name in enumerate(self.layout.bars)}
        zero = sum(1 << self.index[name] for name, tension in equilibrium.tensions.items() if not tension)
        self.decided = sum(1 << self.index[name] for name in equilibrium.tensions)
        self.prices = Prices(self.layout, zero, prefer)
        self.priced: dict[int, list[Candidate]] = {}
        self.tables: dict[tuple[Window, int], Derivations] = {}
        self.stretches: list[int] = []
        self.windows: dict[tuple[int, int], Window] = {}

    def plan(self, wanted: Sequence[str], cuts: Mapping[str, tuple[str, ...]]) -> tuple[PlannedStep, ...]:
        """Return the steps to all reactions and all wanted members."""
        reactions = self.reactions()
        given = done = found_by(reactions)
        steps = [self._step(step) for step in reactions]
        own = {self.index[name]: kept for name, kept in cuts.items()}
        goals = [*self._links(), *(self.index[name] for name in wanted if self.index[name] not in own)]
        for bar, kept in own.items():
            if not done >> bar & 1:
                found = self._through_own_cut(bar, kept, given, done)
                steps += [self._step(step) for step in found]
                done |= found_by(found)
        while goals:
            more, lost = self._reached(goals, given, done)
            steps += [self._step(step) for step in more]
            done |= found_by(more)
            if not lost:
                break
            carried = self._carried(given)
            if carried is None:
                raise _unreachable([self.layout.bars[bar] for bar in lost])
            steps += self._chain(carried, done)
            given |= sum(1 << bar for bar in carried.bars)
            done |= given
            goals = lost
        return tuple(steps)

    def _links(self) -> list[int]:
        layout = self.layout
        return [bar for bar in range(len(layout.bars)) if layout.ends[bar][1] < 0 and self.decided >> bar & 1]

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

    def reactions(self) -> list[Found]:
        """Return the steps to the reactions that the whole truss, then its hinged parts, give."""
        layout, links = self.layout, self._links()
        table = Derivations(self.prices, 0)
        whole = everything(layout)
        table.propose(self._priced([Body(whole, boundary(layout, whole), "whole")]))
        table.run()
        if any(not table.solved >> bar & 1 for bar in links):
            table.propose(self._priced(hinge_bodies(layout)))
            table.run()
        found = [step for bar in links if table.solved >> bar & 1 for step in table.steps_to(bar, 0)]
        return list(dict.fromkeys(found))

    # --- members ----------------------------------------------------------------------------------------

    def _table_for(self, bar: int, given: int) -> Derivations | None:
        """Return a table that holds the bar: from a window round it, wider ones, and at last from bridges."""
        layout = self.layout
        size = WINDOW_JOINTS if len(layout.joints) > SMALL_TRUSS else len(layout.joints)
        while True:
            window = self._window(bar, size)
            table = self._table(window, given)
            if table.solved >> bar & 1:
                return table
            if not window.far or size > SMALL_TRUSS:
                return self._with_bridges(table, bar)
            size *= 2

    def _window(self, bar: int, size: int) -> Window:
        """Return the window for a bar: round the stretch its first joint lies in, or everything."""
        layout = self.layout
        if size >= len(layout.joints):
            return whole_window(layout)
        if not self.stretches:
            self.stretches = stretches(layout, STRETCH)
        key = (self.stretches[layout.ends[bar][0]], size)
        if key not in self.windows:
            self.windows[key] = window_round(layout, *key)
        return self.windows[key]

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

    # --- the engineer's own cut -------------------------------------------------------------------------

    def _own_body(self, kept: tuple[str, ...]) -> Body:
        place = {name: index for index, name in enumerate(self.layout.joints)}
        mask = sum(1 << place[name] for name in kept)
        found = "joint" if len(kept) == 1 else "whole" if len(kept) == len(place) else "own"
        return Body(mask, boundary(self.layout, mask), found)

    def _through_own_cut(self, bar: int, kept: tuple[str, ...], given: int, done: int) -> list[Found]:
        """Return the steps that find a bar from the body its engineer chose."""
        body = self._own_body(kept)
        candidates = self.prices.candidates(body)
        singles = [c for c in candidates if c.live & ~given == 1 << bar]
        if singles:
            return [Found((min(singles, key=lambda c: (c.price + c.terms, c.place)),), (bar,))]
        unknown = body.cut & ~given
        if unknown >> bar & 1 and unknown.bit_count() <= MOST_TOGETHER:
            together = self._together(candidates, unknown)
            if together:
                return [Found(together, tuple(bits(unknown)))]
        later = self._with_earlier_results(candidates, bar, given, done)
        if later:
            return later
        name = self.layout.bars[bar]
        reason = self.ways_of(kept).reason if body.cut >> bar & 1 else f"it does not cut {name}"
        near = ", ".join(self.nearest_body(kept))
        message = f"the cut that keeps {', '.join(kept)} does not give {name}: {reason}. A near one keeps {near}"
        raise NoCutError(message, members=[name])

    def _together(self, candidates: list[Candidate], unknown: int) -> tuple[Candidate, ...]:
        """Return as many independent equations as unknowns, short ones first, () if the body has not so many."""
        p = self.layout.prime
        chosen: list[Candidate] = []
        rows: list[list[int]] = []
        for candidate in sorted(candidates, key=lambda c: (c.recipe[0] != "axis", c.price + c.terms, c.place)):
            levers = [
                self.prices.coefficient(candidate, bar) if candidate.live >> bar & 1 else 0 for bar in bits(unknown)
            ]
            row = reduced_row(levers, rows, p)
            if any(row):
                rows.append(row)
                chosen.append(candidate)
            if len(chosen) == unknown.bit_count():
                return tuple(chosen)
        return ()

    def _with_earlier_results(self, candidates: list[Candidate], bar: int, given: int, done: int) -> list[Found]:
        """Return the steps that find a bar from one of the equations, after what else is unknown in it."""
        table = self._table(whole_window(self.layout), given)
        best: tuple[float, tuple[float, ...], Candidate] | None = None
        for candidate in candidates:
            needs = candidate.live & ~given & ~(1 << bar)
            if not candidate.live >> bar & 1 or needs & ~table.solved or table.ancestors(needs) >> bar & 1:
                continue
            chain = sum(table.chosen[other].price for other in bits(table.ancestors(needs)))
            rank = (self.prices.solving(candidate, bar) + chain, candidate.place, candidate)
            if best is None or rank[:2] < best[:2]:
                best = rank
        if best is None:
            return []
        steps: list[Found] = []
        for other in bits(best[2].live & ~given & ~(1 << bar)):
            steps += table.steps_to(other, done | found_by(steps))
        return [*steps, Found((best[2],), (bar,))]

    def ways_of(self, kept: tuple[str, ...]) -> Ways:
        """Return what a body's equations leave unknown, the reactions known as far as the whole truss gives them."""
        layout = self.layout
        given = found_by(self.reactions())
        body = self._own_body(kept)
        candidates = sorted(
            self.prices.candidates(body), key=lambda c: ((c.live & ~given).bit_count(), c.price, c.place)
        )

        def names(mask: int) -> tuple[str, ...]:
            return tuple(layout.bars[bar] for bar in bits(mask))

        equations = tuple(
            (
                about_of(self.structure, layout.bars, layout.joints, candidate.recipe),
                names(candidate.live & ~given),
                names(candidate.live & given),
            )
            for candidate in candidates
        )
        unknown = body.cut & ~given
        several = 1 < unknown.bit_count() <= MOST_TOGETHER
        together = names(unknown) if several and self._together(candidates, unknown) else ()
        return Ways(names(unknown), equations, together, _why_nothing(names(unknown)))

    def nearest_body(self, kept: tuple[str, ...]) -> tuple[str, ...]:
        """Return the joints of the body, among those that give one of the cut bars, that differs least from the cut."""
        layout = self.layout
        body = self._own_body(kept)
        table = self._table(whole_window(layout), found_by(self.reactions()))
        bodies = [
            candidate.body.kept
            for bar in bits(body.cut & table.solved)
            if not table.chosen[bar].partner
            for candidate in table.chosen[bar].candidates
        ]
        near = min(bodies, key=lambda other: ((other ^ body.kept).bit_count(), other), default=0)
        return tuple(layout.joints[joint] for joint in bits(near))

    # --- written exactly --------------------------------------------------------------------------------

    def _step(self, step: Found) -> PlannedStep:
        layout = self.layout
        bodies = []
        for candidate in step.candidates:
            cut = cut_of(self.structure, [layout.joints[j] for j in bits(candidate.body.kept)])
            bodies.append((cut, about_of(self.structure, layout.bars, layout.joints, candidate.recipe)))
        return PlannedStep(tuple(bodies), tuple(layout.bars[bar] for bar in step.solves))


def _why_nothing(unknown: tuple[str, ...]) -> str:
    if not unknown:
        return "it cuts no bar whose force is unknown"
    if len(unknown) <= MOST_TOGETHER:
        return (
            f"its {len(unknown)} unknown forces ({', '.join(unknown)}) meet in one point or are parallel, "
            "so that its equations do not tell them apart"
        )
    return (
        f"it leaves {len(unknown)} unknown forces ({', '.join(unknown)}) for three equations, "
        "and no point or direction lets all of them but one drop out"
    )


def _unreachable(lost: list[str]) -> NoCutError:
    message = (
        f"no equation with a single unknown reaches {', '.join(lost[:12])}{' and others' if len(lost) > 12 else ''}: "  # noqa: PLR2004
        "not even with carried unknowns; please report this truss"
    )
    return NoCutError(message, members=lost)
