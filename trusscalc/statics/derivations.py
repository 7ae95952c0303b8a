"""The cheapest derivation of each bar from the loads and what is known, among proposed equations.

First every bar takes its best equation that holds nothing else unknown; a natural one is settled. Then, in
rounds, equations with one more unknown than known bars are used, a value costing its whole derivation (each
ancestor once) and a little for its depth; an unnatural result may be replaced by a cheaper one. Every bar's
derivation rests on the loads and reactions alone, not on what else was asked for, so a question's answer
does not depend on its neighbours.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from trusscalc.statics.prices import DEPTH, Candidate, Prices

MOST_ROUNDS = 400


@dataclass(frozen=True, slots=True)
class Choice:
    """How a bar is found: the equation, what it needs, its own price."""

    candidate: Candidate
    needs: int
    price: float


class Derivations:
    """The growing table of chosen equations."""

    def __init__(self, prices: Prices, given: int) -> None:
        """Start from bars that are given (reactions already on the sheet)."""
        self.prices = prices
        self.given = given
        self.chosen: dict[int, Choice] = {}
        self.settled = 0
        self.solved = 0
        self.candidates: list[Candidate] = []
        self._totals: dict[int, float] = {}

    def propose(self, candidates: Iterable[Candidate]) -> None:
        """Add equations to choose from."""
        self.candidates.extend(candidates)

    def run(self) -> None:
        """Choose until a whole round changes nothing."""
        self._direct()
        for _ in range(MOST_ROUNDS):
            if not self._round():
                return

    def _direct(self) -> None:
        """Take the best equation that needs only what is given."""
        best: dict[int, tuple[float, tuple[float, ...], Candidate]] = {}
        for candidate in self.candidates:
            unknown = candidate.live & ~self.given
            if not unknown or unknown & (unknown - 1):
                continue
            bar = unknown.bit_length() - 1
            if self.solved >> bar & 1:
                continue
            price = candidate.price + self.prices.of_live(candidate.live, bar)
            rank = (price, candidate.place)
            if bar not in best or rank < best[bar][:2]:
                best[bar] = (*rank, candidate)
        for bar, (price, _, candidate) in best.items():
            self.chosen[bar] = Choice(candidate, 0, price)
            self.solved |= 1 << bar
            if candidate.natural:
                self.settled |= 1 << bar
        self._totals.clear()

    def _round(self) -> bool:
        """Find or improve every unsettled bar once, from the results of earlier rounds."""
        known = self.given | self.solved
        free = ~(self.given | self.settled)
        best: dict[int, tuple[float, tuple[float, ...], Choice]] = {}
        for candidate in self.candidates:
            unknown = candidate.live & ~known
            if unknown & (unknown - 1):
                continue
            for bar in self._bits(unknown or candidate.live & free):
                self._weigh(candidate, bar, best)
        changed = False
        for bar in sorted(best, key=lambda b: best[b][:2]):
            total, _, choice = best[bar]
            # choices of the same round may lean on each other: look again before taking one
            if bar in self.chosen and (self._leans_on(choice.needs, bar) or total >= self.total(bar) - 1e-9):
                continue
            self.chosen[bar] = choice
            self.solved |= 1 << bar
            self._totals.clear()
            changed = True
        return changed

    def _weigh(self, candidate: Candidate, bar: int, best: dict[int, tuple[float, tuple[float, ...], Choice]]) -> None:
        limit = best[bar][0] if bar in best else self.total(bar) if bar in self.chosen else float("inf")
        price = candidate.price + self.prices.of_live(candidate.live, bar)
        if price > limit + 1e-9:
            return
        needs = candidate.live & ~self.given & ~(1 << bar)
        if bar in self.chosen and self._leans_on(needs, bar):
            return
        total = price + self._cost_of(needs)
        rank = (total, candidate.place)
        if total < limit - 1e-9 or (bar in best and rank < best[bar][:2]):
            best[bar] = (*rank, Choice(candidate, needs, price))

    # --- what a choice rests on -------------------------------------------------------------------------

    def ancestors(self, needs: int) -> int:
        """Return everything the needed bars rest on, themselves included."""
        found, waiting = needs, needs
        while waiting:
            low = waiting & -waiting
            waiting ^= low
            more = self.chosen[low.bit_length() - 1].needs & ~found
            found |= more
            waiting |= more
        return found

    def _leans_on(self, needs: int, bar: int) -> bool:
        return bool(self.ancestors(needs) >> bar & 1)

    def _cost_of(self, needs: int) -> float:
        """Return the whole cost of the needed bars: each ancestor once, and the depth of the chain."""
        if not needs:
            return 0.0
        total = sum(self.chosen[bar].price for bar in self._bits(self.ancestors(needs)))
        return total + DEPTH * (1 + max(self._depth(bar) for bar in self._bits(needs)))

    def _depth(self, bar: int) -> int:
        needs = self.chosen[bar].needs
        return 1 + max(self._depth(other) for other in self._bits(needs)) if needs else 0

    def total(self, bar: int) -> float:
        """Return the price of a bar's whole derivation."""
        if bar not in self._totals:
            choice = self.chosen[bar]
            self._totals[bar] = choice.price + self._cost_of(choice.needs)
        return self._totals[bar]

    def order(self, wanted: Sequence[int]) -> list[int]:
        """Return the bars to solve, each after what it needs, nothing twice."""
        done: list[int] = []
        seen = 0
        for bar in wanted:
            stack = [bar]
            while stack:
                top = stack[-1]
                if seen >> top & 1 or self.given >> top & 1:
                    stack.pop()
                    continue
                missing = [b for b in self._bits(self.chosen[top].needs) if not seen >> b & 1]
                if missing:
                    stack.extend(reversed(missing))
                else:
                    seen |= 1 << top
                    done.append(top)
                    stack.pop()
        return done

    @staticmethod
    def _bits(mask: int) -> list[int]:
        found = []
        while mask:
            low = mask & -mask
            found.append(low.bit_length() - 1)
            mask ^= low
        return found
