"""The cheapest derivation of each bar from the loads and what is known, among proposed equations.

First every bar takes its best equation that holds nothing else unknown; a natural one is settled. A bar
without one may be found together with another from two natural equations (a K joint's horizontal sum with
its panel's vertical one). Then, in rounds, equations with earlier results in them are used, a result
costing its whole derivation (each ancestor once) and a little for its depth; an unnatural result may be
replaced by a cheaper one. Every derivation rests on the loads and reactions alone, not on what else was
asked for, so a question's answer does not depend on its neighbours.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from trusscalc.statics.incidence import AXIS_X, AXIS_Y, bits
from trusscalc.statics.prices import DEPTH, PAIR, Candidate, Prices

MOST_ROUNDS = 400
SMALL = 1e-9
Rank = tuple[float, tuple[float, ...]]


@dataclass(frozen=True, slots=True)
class Choice:
    """How a bar is found.

    Attributes
    ----------
    candidates : tuple of Candidate
        One equation, or the two of a pair.
    needs : int
        Earlier results in it.
    price : float
        Its own price (half of a pair's).
    partner : int
        Mask of the other bar of a pair.
    """

    candidates: tuple[Candidate, ...]
    needs: int
    price: float
    partner: int = 0


@dataclass(frozen=True, slots=True)
class Found:
    """One step to be written: its equations and what they solve."""

    candidates: tuple[Candidate, ...]
    solves: tuple[int, ...]


class Derivations:
    """The growing table of chosen equations."""

    def __init__(self, prices: Prices, given: int) -> None:
        """Start from bars that are given (reactions already on the sheet)."""
        self.prices = prices
        self.given = given
        self.chosen: dict[int, Choice] = {}
        self.settled = 0
        self.solved = 0
        self.exhausted = False
        self.candidates: list[Candidate] = []
        self._totals: dict[int, float] = {}
        self._depths: dict[int, int] = {}
        self._families: dict[int, int] = {}

    def propose(self, candidates: Iterable[Candidate]) -> None:
        """Add equations to choose from."""
        self.candidates.extend(candidates)

    def run(self, *, pairs: bool = True) -> None:
        """Choose until a whole round changes nothing."""
        self._direct()
        if pairs:
            self._pairs()
        for _ in range(MOST_ROUNDS):
            if not self._round():
                return

    def _take(self, bar: int, choice: Choice, *, natural: bool) -> None:
        self.chosen[bar] = choice
        self.solved |= 1 << bar
        if natural:
            self.settled |= 1 << bar
        for memory in (self._totals, self._depths, self._families):
            memory.clear()

    def _direct(self) -> None:
        """Take the best equation that needs only what is given."""
        best: dict[int, tuple[Rank, Candidate]] = {}
        for candidate in self.candidates:
            unknown = candidate.live & ~self.given
            if not unknown or unknown & (unknown - 1):
                continue
            bar = unknown.bit_length() - 1
            rank = (self.prices.solving(candidate, bar), candidate.place)
            if not self.solved >> bar & 1 and (bar not in best or rank < best[bar][0]):
                best[bar] = (rank, candidate)
        for bar, ((price, _), candidate) in best.items():
            self._take(bar, Choice((candidate,), 0, price), natural=candidate.natural)

    def _pairs(self) -> None:
        """Give bars without a natural equation a pair of natural ones, when there is one."""
        by_unknowns: dict[int, list[Candidate]] = {}
        for candidate in self.candidates:
            unknown = candidate.live & ~self.given
            if candidate.natural and unknown.bit_count() == 2 and not unknown & self.settled:  # noqa: PLR2004
                by_unknowns.setdefault(unknown, []).append(candidate)
        best: dict[int, tuple[Rank, tuple[Candidate, Candidate], int]] = {}
        for unknown, candidates in by_unknowns.items():
            found = self._best_pair(unknown, candidates)
            if found is None:
                continue
            for bar in bits(unknown):
                if bar not in best or found[0] < best[bar][0]:
                    best[bar] = (*found, unknown)
        for bar, (rank, pair, unknown) in best.items():
            partner = unknown & ~(1 << bar)
            if best[partner.bit_length() - 1][2] == unknown:
                self._take(bar, Choice(pair, 0, rank[0] / 2, partner), natural=True)

    def _best_pair(self, unknown: int, candidates: list[Candidate]) -> tuple[Rank, tuple[Candidate, Candidate]] | None:
        first_bar, last_bar = bits(unknown)
        ranked = sorted(candidates, key=lambda c: (c.price, c.place))[:8]
        best: tuple[Rank, tuple[Candidate, Candidate]] | None = None
        for place, first in enumerate(ranked):
            for second in ranked[place + 1 :]:
                axes = first.point in (AXIS_X, AXIS_Y) and second.point in (AXIS_X, AXIS_Y)
                if first.body.kept == second.body.kept and not axes:
                    continue
                price = PAIR + sum(
                    self.prices.solving(c, first_bar) - self.prices.terms[last_bar] for c in (first, second)
                )
                rank = (price, min(first.place, second.place))
                if (best is None or rank < best[0]) and self.prices.independent(first, second, first_bar, last_bar):
                    ordered = sorted(
                        (first, second), key=lambda c: (c.body.found != "joint", -len(c.recipe[0]), c.place)
                    )
                    best = (rank, (ordered[0], ordered[1]))
        return best

    def _round(self) -> bool:
        """Find or improve every unsettled bar once, from the results of earlier rounds."""
        known = self.given | self.solved
        free = ~(self.given | self.settled)
        best: dict[int, tuple[Rank, Choice]] = {}
        for candidate in self.candidates:
            unknown = candidate.live & ~known
            if unknown & (unknown - 1):
                continue
            mask = unknown or candidate.live & free
            while mask:
                low = mask & -mask
                mask ^= low
                self._weigh(candidate, low.bit_length() - 1, best)
        changed = False
        for bar in sorted(best, key=lambda b: best[b][0]):
            (total, _), choice = best[bar]
            # choices of the same round may lean on each other: look again before taking one
            if bar in self.chosen and (self._leans_on(choice.needs, bar) or total >= self.total(bar) - SMALL):
                continue
            self._take(bar, choice, natural=False)
            changed = True
        return changed

    def _weigh(self, candidate: Candidate, bar: int, best: dict[int, tuple[Rank, Choice]]) -> None:
        here = best.get(bar)
        if here is not None:
            limit = here[0][0]
        else:
            limit = self.total(bar) if bar in self.chosen else float("inf")
        price = self.prices.solving(candidate, bar)
        if price > limit + SMALL:
            return
        needs = candidate.live & ~self.given & ~(1 << bar)
        # a whole derivation costs at least its own price and that of the dearest result in it
        if price + max((self.total(other) for other in bits(needs)), default=0.0) > limit + SMALL:
            return
        family = self.ancestors(needs)
        if family >> bar & 1:
            return
        total = price + self._cost_of(needs, family)
        rank = (total, candidate.place)
        if total < limit - SMALL or (here is not None and rank < here[0]):
            best[bar] = (rank, Choice((candidate,), needs, price))

    # --- what a choice rests on -------------------------------------------------------------------------

    def ancestors(self, needs: int) -> int:
        """Return everything the needed bars rest on, themselves included."""
        found = 0
        for bar in bits(needs):
            found |= self._family(bar)
        return found

    def _family(self, bar: int) -> int:
        """Return a bar and everything it rests on."""
        if bar not in self._families:
            found = waiting = 1 << bar
            while waiting:
                low = waiting & -waiting
                waiting ^= low
                choice = self.chosen[low.bit_length() - 1]
                more = (choice.needs | choice.partner) & ~found
                found |= more
                waiting |= more
            self._families[bar] = found
        return self._families[bar]

    def _leans_on(self, needs: int, bar: int) -> bool:
        return bool(self.ancestors(needs) >> bar & 1)

    def _cost_of(self, needs: int, family: int) -> float:
        """Return the whole cost of the needed bars: each ancestor once, and the depth of the chain."""
        if not needs:
            return 0.0
        total = sum(self.chosen[bar].price for bar in bits(family))
        return total + DEPTH * (1 + max(self._depth(bar) for bar in bits(needs)))

    def _depth(self, bar: int) -> int:
        if bar not in self._depths:
            needs = self.chosen[bar].needs
            self._depths[bar] = 1 + max(self._depth(other) for other in bits(needs)) if needs else 0
        return self._depths[bar]

    def total(self, bar: int) -> float:
        """Return the price of a bar's whole derivation."""
        if bar not in self._totals:
            choice = self.chosen[bar]
            family = self.ancestors(choice.needs)
            pair = 2 if choice.partner else 1
            self._totals[bar] = pair * choice.price + self._cost_of(choice.needs, family)
        return self._totals[bar]

    def steps_to(self, bar: int, done: int) -> list[Found]:
        """Return the steps that reach a bar from what is done, each after what it needs."""
        steps: list[Found] = []
        stack = [bar]
        while stack:
            top = stack[-1]
            if done >> top & 1:
                stack.pop()
                continue
            missing = bits(self.chosen[top].needs & ~done)
            if missing:
                stack.extend(reversed(missing))
                continue
            stack.pop()
            choice = self.chosen[top]
            if choice.partner & ~done:
                solves = tuple(sorted((top, choice.partner.bit_length() - 1)))
                steps.append(Found(choice.candidates, solves))
            else:  # of a pair whose other bar is known, one equation is enough
                steps.append(Found((next(c for c in choice.candidates if c.live >> top & 1),), (top,)))
            for solved in steps[-1].solves:
                done |= 1 << solved
        return steps


def found_by(steps: Sequence[Found]) -> int:
    """Return the mask of everything the steps solve."""
    mask = 0
    for step in steps:
        for bar in step.solves:
            mask |= 1 << bar
    return mask
