"""Carried unknowns: what to do when no equation with a single unknown is left.

In a complex truss (every joint three bars, no section) the force in one bar is called X and carried along
as if it were known; the derivation goes on until an equation holds X alone. That closes the chain: X is
solved, and the rest follows. Where one is not enough, Y, Z, ... are carried too, and closed together. The
classical alternative is a substitute bar.

Which bar: each is tried, the promising ones by their whole price; chosen is the one whose closing chain is
cheapest. An equation can turn out to hold X with the coefficient zero, so the coefficient is worked out
(modulo a prime here, exactly when the step is written).
"""

from __future__ import annotations

from dataclasses import dataclass

from trusscalc.statics.derivations import Derivations
from trusscalc.statics.incidence import Layout, bits
from trusscalc.statics.prices import Candidate, Prices

MOST_TRIED = 10
MOST_CARRIED = 20


@dataclass(frozen=True, slots=True)
class Carried:
    """What is carried, how the chain runs, and the equations that close it."""

    bars: tuple[int, ...]
    table: Derivations
    closing: tuple[Candidate, ...]


def carry(base: Derivations, decided: int) -> Carried | None:
    """Return the cheapest set of carried bars found, None when none closes.

    Parameters
    ----------
    base : Derivations
        Everything that equations with one unknown reach; left as it is.
    decided : int
        Mask of the bars statics decides.
    """
    prices, free = base.prices, base.solved
    carried: list[int] = []
    while len(carried) < MOST_CARRIED:
        open_bars = bits(decided & ~base.given & ~base.solved)
        if not open_bars:
            break
        best: tuple[float, int, Derivations, list[tuple[float, Candidate]]] | None = None
        for bar in _promising(prices.layout, base.given | base.solved, open_bars):
            table = _carrying(base, bar)
            closing = _closing(prices, table, (*carried, bar), free)
            # before anything closes, the bar that leads furthest is the best one to carry
            score = _chain_price(table, closing) if closing else 1e12 - 1e6 * table.solved.bit_count()
            if best is None or score < best[0]:
                best = (score, bar, table, closing)
        assert best is not None  # noqa: S101 - there is at least one open bar
        _, bar, base, closing = best
        carried.append(bar)
        if closing:
            return Carried(tuple(carried), base, tuple(candidate for _, candidate in closing))
    return None


def _carrying(base: Derivations, bar: int) -> Derivations:
    """Return the table that carries one bar more; what was found without it keeps its derivation."""
    table = Derivations(base.prices, base.given | 1 << bar)
    table.propose(base.candidates)
    table.chosen = dict(base.chosen)
    table.solved = table.settled = base.solved
    table.run(pairs=False)
    return table


def _chain_price(table: Derivations, closing: list[tuple[float, Candidate]]) -> float:
    needs = 0
    for _, candidate in closing:
        needs |= candidate.live & ~table.given
    chain = sum(table.chosen[bar].price for bar in bits(table.ancestors(needs)))
    return chain + sum(candidate.price for _, candidate in closing)


def _promising(layout: Layout, known: int, open_bars: list[int]) -> list[int]:
    """Return the bars worth trying, by how soon joints alone would close the chain (graph only, no numbers)."""
    scores = [(_closure(layout, known | 1 << bar), bar) for bar in open_bars]
    return [bar for _, bar in sorted(scores)[:MOST_TRIED]]


def _closure(layout: Layout, known: int) -> tuple[int, int]:
    """Return (0, bars until a joint has an equation to spare) or (1, minus the bars reached)."""
    count = 0
    open_joints = set(range(len(layout.joints)))
    while True:
        ready = [
            (unknown.bit_count(), joint)
            for joint in open_joints
            if (unknown := layout.at[joint] & ~known).bit_count() <= 2  # noqa: PLR2004
        ]
        if not ready:
            return 1, -count
        few, joint = min(ready)
        if few < 2 and layout.at[joint].bit_count() > few and count:  # noqa: PLR2004
            return 0, count
        open_joints.discard(joint)
        count += few
        known |= layout.at[joint]


def _closing(prices: Prices, table: Derivations, carried: tuple[int, ...], free: int) -> list[tuple[float, Candidate]]:
    """Return the cheapest equations that together decide all carried bars, [] when they do not."""
    p = prices.layout.prime
    shares = _Shares(prices, table, carried, free)
    found = []
    for candidate in table.candidates:
        needs = candidate.live & ~table.given
        if candidate.live & ~(table.given | table.solved):
            continue
        price = candidate.price + candidate.terms
        if needs:
            price += sum(table.chosen[bar].price for bar in bits(table.ancestors(needs)))
        found.append((price, candidate.place, candidate))
    found.sort(key=lambda item: item[:2])
    chosen: list[tuple[float, Candidate]] = []
    rows: list[list[int]] = []
    for price, _, candidate in found:
        row = reduced_row(shares.of_sum(candidate), rows, p)
        if any(row):
            rows.append(row)
            chosen.append((price, candidate))
            if len(rows) == len(carried):
                return chosen
    return []


def reduced_row(row: list[int], rows: list[list[int]], p: int) -> list[int]:
    """Return the row with the pivots of earlier rows removed, leading entry 1."""
    row = [entry % p for entry in row]
    for other in rows:
        pivot = next(place for place, entry in enumerate(other) if entry)
        if row[pivot]:
            factor = row[pivot]
            row = [(a - factor * b) % p for a, b in zip(row, other, strict=True)]
    lead = next((entry for entry in row if entry), 0)
    if lead > 1:
        inverse = pow(lead, -1, p)
        row = [entry * inverse % p for entry in row]
    return row


class _Shares:
    """How much of each carried bar is in a bar's tension, modulo the prime (loads left aside)."""

    def __init__(self, prices: Prices, table: Derivations, carried: tuple[int, ...], free: int) -> None:
        self.prices = prices
        self.table = table
        self.free = free
        self.width = len(carried)
        self.known: dict[int, list[int]] = {
            bar: [int(place == other) for other in range(self.width)] for place, bar in enumerate(carried)
        }

    def of(self, bar: int) -> list[int]:
        """Return the shares of a bar, following its derivation without recursion."""
        stack = [bar]
        while stack:
            top = stack[-1]
            if top in self.known:
                stack.pop()
                continue
            if (self.table.given | self.free) >> top & 1:
                self.known[top] = [0] * self.width
                continue
            candidate = self.table.chosen[top].candidates[0]
            missing = [b for b in bits(candidate.live & ~(1 << top)) if b not in self.known]
            if missing:
                stack.extend(missing)
                continue
            p = self.prices.layout.prime
            total = self._sum(candidate, candidate.live & ~(1 << top))
            factor = pow(-self.prices.coefficient(candidate, top), -1, p)
            self.known[top] = [entry * factor % p for entry in total]
        return self.known[bar]

    def of_sum(self, candidate: Candidate) -> list[int]:
        """Return the shares left in an equation whose bars are all known or carried."""
        for bar in bits(candidate.live):
            self.of(bar)
        return self._sum(candidate, candidate.live)

    def _sum(self, candidate: Candidate, mask: int) -> list[int]:
        p = self.prices.layout.prime
        total = [0] * self.width
        for bar in bits(mask):
            lever = self.prices.coefficient(candidate, bar)
            total = [(a + lever * b) % p for a, b in zip(total, self.known[bar], strict=True)]
        return total
