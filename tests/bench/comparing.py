"""What a comparison of many cases costs: 10,000 rows (250 members in 40 cases) read, solved and judged.

    python tests/bench/comparing.py            10,000 rows
    python tests/bench/comparing.py --quick    a tenth of a truss, to see that it runs

Times are without the import; beside the time on the clock that of the processor, which a busy machine spoils less.
"""

from __future__ import annotations

import argparse
import random
import sys
import time
from collections.abc import Callable
from typing import TypeVar

from trusscalc import shapes, stiffness
from trusscalc.compare import compare_cases
from trusscalc.loads import LoadCase
from trusscalc.submitted import read_submitted
from trusscalc.trussfile import TrussFile

Result = TypeVar("Result")


def stated(panels: int, cases: int) -> TrussFile:
    """Return a Pratt truss under so many cases, most joints loaded in each."""
    truss = shapes.pratt(panels, 4, 5)
    draw = random.Random(7)
    names = [joint.name for joint in truss.joints]
    loads = [
        LoadCase(
            f"case {place}", {name: (draw.randint(-9, 9), -draw.randint(1, 99)) for name in draw.sample(names, panels)}
        )
        for place in range(cases)
    ]
    return TrussFile(truss, tuple(loads))


def table(file: TrussFile) -> str:
    """Return all forces of all cases as a table of four figures."""
    lines = ["member,case,force [kN]"]
    for case, run in zip(file.cases, stiffness.solve_all(file.truss, file.cases), strict=True):
        lines += [f"{member},{case.name},{force:.4g}" for member, force in run.forces.items()]
    return "\n".join(lines) + "\n"


def timed(what: str, work: Callable[[], Result]) -> Result:
    """Return what the work gives, after printing what it took."""
    clock, processor = time.perf_counter(), time.process_time()
    result = work()
    print(f"{what:24}{time.perf_counter() - clock:8.2f} s{time.process_time() - processor:8.2f} s")  # noqa: T201
    return result


def main(argv: list[str] | None = None) -> int:
    """Measure, and print a table."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--quick", action="store_true")
    quick = parser.parse_args(argv).quick
    file = stated(8 if quick else 64, 4 if quick else 40)
    text = table(file)
    print(f"{text.count(chr(10)) - 1} rows, {len(file.truss.members)} members, {len(file.cases)} cases")  # noqa: T201
    print(f"{'':24}{'clock':>10}{'processor':>10}")  # noqa: T201
    submitted = timed("read", lambda: read_submitted(text, file.truss))
    found = timed("solved and compared", lambda: compare_cases(file, submitted))
    return 0 if all(item.agreed for item in found.values()) else 1


if __name__ == "__main__":
    sys.exit(main())
