"""What an envelope costs: 40 members, 60 combinations of six cases and a five-axle train, 24 panels.

    python tests/bench/enveloping.py            as said
    python tests/bench/enveloping.py --quick    six panels, to see that it runs

Times are without the import, on the clock and of the processor, which a busy machine spoils less; beside them how often
the check of as many members under one case would fit in.
"""

from __future__ import annotations

import argparse
import random
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

import trade_trusses as trade

from trusscalc.chains import Chain
from trusscalc.envelopes import envelope
from trusscalc.loads import Combination, LoadCase
from trusscalc.membercheck import check_members
from trusscalc.trains import MovingLoad, Train
from trusscalc.trussfile import TrussFile


def stated(panels: int, height: str) -> TrussFile:
    """Return a Pratt with six cases, a train along its lower chord, and sixty combinations of them."""
    drawn = trade.pratt(panels, height=height)
    draw = random.Random(3)
    deck = Chain("deck", tuple(f"L{place}" for place in range(panels + 1)))
    train = Train("five axles", (10, 20, 20, 20, 20), (4, 4, 4, 4))
    cases = tuple(
        LoadCase(f"case {place}", {name: (draw.randint(-9, 9), draw.randint(-9, 9)) for name in drawn.joints})
        for place in range(6)
    )
    combinations = []
    for place in range(60):
        first, second, third = (f"case {(place + step) % 6}" for step in range(3))
        factors = {first: ("1.25", "0.9"), second: "1.1", third: f"1.{place:02}", "live": "1.75"}
        combinations.append(Combination(f"no. {place}", factors, optional=[third]))
    moving = (MovingLoad("live", (train,), deck),)
    return TrussFile(drawn.truss, cases, tuple(combinations), chains=(deck,), trains=(train,), moving=moving)


def timed(work: Callable[[], object]) -> tuple[float, float]:
    """Return what the work takes on the clock, and of the processor."""
    clock, busy = time.perf_counter(), time.process_time()
    work()
    return time.perf_counter() - clock, time.process_time() - busy


def main(argv: list[str] | None = None) -> int:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--quick", action="store_true", help="six panels, to see that it runs")
    panels = 6 if parser.parse_args(argv).quick else 24
    for height in ("6", "3*sqrt(3)"):
        file = stated(panels, height)
        members = [member.name for member in file.truss.members[:40]]
        check_members(file.truss, file.cases[0], members[:1])  # what is imported late
        _, one = timed(lambda: check_members(file.truss, file.cases[0], members))  # noqa: B023 - called at once
        clock, busy = timed(lambda: envelope(file, members))  # noqa: B023 - called at once
        print(f"height {height}: {clock:.2f} s, {busy:.2f} s of the processor, {busy / one:.1f} checks of one case")  # noqa: T201
    return 0


if __name__ == "__main__":
    sys.exit(main())
