"""How often a planted blunder is told first, kind by kind, and what is made of tables without one.

    python tests/bench/diagnosis_rates.py           50 of each kind in each family of trusses; some ten minutes
    python tests/bench/diagnosis_rates.py --quick   one of each, to see that it runs

Blunders are planted as in ``planted.py``: results of the altered model printed to four significant figures, where the
blunder changes some value by more than 20 roundings. Right is what is named first or printed as a tie with the first.
DIAGNOSIS.md records a run.
"""

from __future__ import annotations

import argparse
import os
import random
import sys
import time
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from statistics import mean, median

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only get in each other's way
sys.path.insert(0, str(Path(__file__).parents[1]))

import numpy as np
from other_analyses import FAMILIES, Project, Table, project, solved
from planted import BLUNDERS, Planted, as_printed, explained, plant
from ratios import table as as_table

from trusscalc.explanations import Explanation

PAIRS = (
    "load-missing+load-doubled",
    "load-missing+sign",
    "load-moved+scale",
    "load-missing+rows-exchanged",
    "case-missing+support-extra",
    "joint-displaced+load-missing",
    "joint-displaced+joint-displaced",
    "joint-displaced+rows-exchanged",
    "support-exchanged+load-missing",
    "support-extra+load-reversed",
    "member-missing+load-missing",
    "mirrored+load-doubled",
)


@dataclass(frozen=True)
class Told:
    """What was told of one planted table."""

    first: bool
    by_tie: bool
    ties: int
    seconds: float


def told(planted: Planted) -> Told:
    """Return whether the blunder planted is told first."""
    began = time.process_time()
    found = planted.explain()
    seconds = time.process_time() - began
    if not found:
        return Told(first=False, by_tie=False, ties=0, seconds=seconds)
    if len(planted.kinds) > 1:
        pairs = [{one.explanation, one.second[0]} for one in found[:1] if one.second]
        return Told(pairs == [{*planted.kinds}], by_tie=False, ties=len(found[0].ties), seconds=seconds)
    (kind,) = planted.kinds
    tied = kind in {name for name, _ in found[0].ties}
    plainly = found[0].explanation == kind
    return Told(plainly or tied, by_tie=tied and not plainly, ties=len(found[0].ties), seconds=seconds)


def rates(kinds: tuple[str, ...], number: int) -> list[tuple[str, ...]]:
    """Return a table of rates."""
    rows = [("planted", *(f"{family} trusses" for family in FAMILIES), "by a tie", "ties to a table", "s", "s at most")]
    for kind in kinds:
        found = {
            family: [told(plant(random.Random(f"{kind} {family} {count}"), kind, family)) for count in range(number)]
            for family in FAMILIES
        }
        every = [one for listed in found.values() for one in listed]
        right = [f"{sum(one.first for one in listed)} of {number}" for listed in found.values()]
        seconds = [one.seconds for one in every]
        ties = (str(sum(one.by_tie for one in every)), f"{mean(one.ties for one in every):.1f}")
        rows.append((kind, *right, *ties, f"{median(seconds):.2f}", f"{max(seconds):.2f}"))
    return rows


# --- tables without a blunder of the list -----------------------------------------------------------------


def _sound(style: str) -> Callable[[random.Random, Project, Table], dict[str, str]]:
    return lambda _, __, table: {name: format(force, style) for name, force in table.items()}


def _noise(draw: random.Random, _: Project, table: Table) -> dict[str, str]:
    return as_printed({name: force * draw.gauss(1, 0.03) for name, force in table.items()})


def _one_value(draw: random.Random, _: Project, table: Table) -> dict[str, str]:
    largest = max(map(abs, table.values()))
    name = draw.choice([name for name, force in table.items() if abs(force) > largest / 100])
    return as_printed({**table, name: table[name] * draw.choice([1.07, -1.3, 0.4])})


def _any_load(draw: random.Random, given: Project, table: Table) -> dict[str, str]:
    loads = given.total()
    joint = draw.choice(list(loads))
    loads[joint] = (loads[joint][0] + draw.uniform(5, 25), loads[joint][1] - draw.uniform(15, 40))
    return as_printed(solved(given.stated, loads) or table)


def _stiffnesses(draw: random.Random, given: Project, _: Table) -> dict[str, str]:
    """Return the forces with EA between one half and three times the usual, by springs in series and in parallel."""
    model = given.stated.truss.as_floats()
    index = {name: 2 * place for place, name in enumerate(model.joints)}
    matrix, rows = np.zeros((2 * len(index),) * 2), {}
    for name, start, end in model.members:
        vector = np.subtract(model.joints[end], model.joints[start])
        length = float(np.hypot(*vector))
        row = np.zeros(len(matrix))
        row[index[start] : index[start] + 2], row[index[end] : index[end] + 2] = -vector / length, vector / length
        rows[name] = draw.uniform(0.5, 3) / length * row
        matrix += np.outer(row, rows[name])
    links = np.zeros((len(model.links), len(matrix)))
    for row, (_, joint, dx, dy) in zip(links, model.links, strict=True):
        row[index[joint] : index[joint] + 2] = dx, dy
    loads = np.zeros(len(matrix) + len(links))
    for joint, pair in given.total().items():
        loads[index[joint] : index[joint] + 2] += pair
    moves = np.linalg.solve(np.block([[matrix, links.T], [links, np.zeros((len(links),) * 2)]]), loads)
    return as_printed({name: float(row @ moves[: len(matrix)]) for name, row in rows.items()})


OTHERS: dict[str, tuple[int, Callable[[random.Random, Project, Table], dict[str, str]]]] = {
    "sound, four figures": (0, _sound(".4g")),
    "sound, two decimals": (1, _sound(".2f")),
    "sound, whole numbers": (0, _sound(".0f")),
    "sound, all figures": (1, _sound(".15g")),
    "every value off by some 3 %": (0, _noise),
    "one value wrong": (0, _one_value),
    "one load of another size": (0, _any_load),
    "members of unequal EA, two redundant": (2, _stiffnesses),
}
"""How many members more than statics needs, and how the table is made."""


def others(names: Iterable[str], number: int) -> list[tuple[str, ...]]:
    """Return a table of what is told where no blunder of the list was made."""
    rows = [("table", "nothing told", "unexplained first", "some blunder fits", "some blunder nearly")]
    for name in names:
        extra, make = OTHERS[name]
        counts = [0, 0, 0, 0]
        for family in FAMILIES:
            for count in range(number):
                draw = random.Random(f"{name} {family} {count}")
                given = project(draw, family, extra=extra)
                right = solved(given.stated, given.total())
                if right:
                    counts[_verdict(explained(given, make(draw, given, right)))] += 1
        rows.append((name, *map(str, counts)))
    return rows


def _verdict(found: tuple[Explanation, ...]) -> int:
    if not found:
        return 0
    return 1 if found[0].explanation == "unexplained" else 2 if found[0].fits else 3


def main(argv: list[str] | None = None) -> int:
    """Measure and print all tables."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--quick", action="store_true", help="one of each, to see that it runs")
    options = parser.parse_args(argv)
    single, double = (1, 1) if options.quick else (50, 12)
    for make in (
        lambda: rates(tuple(BLUNDERS), single),
        lambda: rates(PAIRS[-2:] if options.quick else PAIRS, double),
        lambda: others(list(OTHERS)[:5] if options.quick else OTHERS, double),
    ):
        print(as_table(make()), end="\n\n", flush=True)  # noqa: T201
    return 0


if __name__ == "__main__":
    sys.exit(main())
