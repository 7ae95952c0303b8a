"""What a check costs: whole commands against an import, plans against the size of the truss, and a plain solver.

    python tests/bench/ratios.py            everything, some five minutes
    python tests/bench/ratios.py --quick    tiny sizes, to see that it runs

Whole commands run in processes of their own, in turn with ``python -c "import numpy, sympy"``, so that a busy
machine slows both; the ratio of medians is what counts, and beside it that of processor times, which a busy machine
spoils less. Nothing is cached on disk. RATIOS.md records a run.
"""

from __future__ import annotations

import argparse
import math
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from statistics import median
from typing import Any

sys.path.insert(0, str(Path(__file__).parents[1]))

import trade_trusses as trade
from stated_truss import Stated

IMPORT = [sys.executable, "-c", "import numpy, sympy"]


@dataclass(frozen=True)
class Command:
    """A whole command: what it checks, and how many times the import it may take (0: no promise)."""

    name: str
    stated: Stated
    members: str
    limit: float


def middle(panels: int) -> str:
    """Return three members near midspan of a Pratt."""
    half = panels // 2
    return f"U{half - 2}-U{half - 1},L{half - 2}-L{half - 1},U{half - 2}-L{half - 1}"


def commands(*, quick: bool) -> list[Command]:
    """Return the commands measured."""
    if quick:
        return [Command("Pratt, 21 members, three", trade.pratt(6), middle(6), 2)]
    surd = "7*sqrt(3)/2"
    k_members = "U4-U5,M4-U5,L4-M4"
    return [
        Command("K truss of 12 panels, three members", trade.k_truss(12), k_members, 2),
        Command("the same, height with a root", trade.k_truss(12, height="3*sqrt(3)"), k_members, 2),
        Command("Pratt, 201 members, all", trade.pratt(51), "all", 5),
        Command("the same, height with a root", trade.pratt(51, height=surd), "all", 5),
        Command("K truss, 209 members, all", trade.k_truss(36), "all", 5),
        Command("Baltimore, 221 members, all", trade.baltimore(56), "all", 5),
        Command("the same, height with a root", trade.baltimore(56, height="5*sqrt(3)"), "all", 5),
        Command("Pratt, 1,601 members, three", trade.pratt(401), middle(401), 5),
        Command("the same, height with a root", trade.pratt(401, height=surd), middle(401), 5),
        Command("K truss, 1,601 members, three", trade.k_truss(268), "U100-U101,M100-U101,L100-M100", 5),
        Command("Baltimore, 1,601 members, three", trade.baltimore(400), "U100-U102,M101-L102,U100-L100", 5),
    ]


def seconds(arguments: list[str]) -> tuple[float, float]:
    """Return how long a process takes, which must end well, and the processor time it takes."""
    before, start = os.times(), time.perf_counter()
    subprocess.run(arguments, check=True, capture_output=True)
    wall, after = time.perf_counter() - start, os.times()
    return wall, after.children_user + after.children_system - before.children_user - before.children_system


def whole_commands(*, quick: bool, repeats: int) -> list[tuple[str, ...]]:
    """Return a table of whole commands: members, seconds, ratio, limit."""
    rows = [("whole command (check --json)", "members", "seconds", "import", "ratio", "of processor time", "limit")]
    with tempfile.TemporaryDirectory() as folder:
        for count, command in enumerate(commands(quick=quick)):
            path = Path(folder) / f"{count}.toml"
            path.write_text(command.stated.file())
            arguments = [sys.executable, "-m", "trusscalc", "check", str(path), "--case", "load", "--json"]
            arguments += ["--members", command.members]
            runs = [(*seconds(IMPORT), *seconds(arguments)) for _ in range(repeats + 1)][1:]
            base, base_busy, whole, busy = (median(times) for times in zip(*runs, strict=True))
            size = f"{len(command.stated.members):,}"
            ratios = (f"{whole / base:.2f}", f"{busy / base_busy:.2f}", f"{command.limit:g}")
            rows.append((command.name, size, f"{whole:.2f}", f"{base:.2f}", *ratios))
    return rows


# --- growth with the size of the truss --------------------------------------------------------------------


def timed(work: Callable[[], object], repeats: int) -> float:
    """Return the median time of some work."""
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return median(times)


def exponent(sizes: list[int], times: list[float]) -> float:
    """Return the slope of log time against log size by least squares."""
    xs, ys = [math.log(size) for size in sizes], [math.log(each) for each in times]
    x0, y0 = sum(xs) / len(xs), sum(ys) / len(ys)
    return sum((x - x0) * (y - y0) for x, y in zip(xs, ys, strict=True)) / sum((x - x0) ** 2 for x in xs)


def growth(*, quick: bool, repeats: int) -> list[tuple[str, ...]]:
    """Return a table of exact solution, plan and steps, and whole check, against size, three members each."""
    from trusscalc.membercheck import _derivation, check_members  # noqa: PLC0415
    from trusscalc.statics import matrix  # noqa: PLC0415
    from trusscalc.statics.cuts import structure_of  # noqa: PLC0415

    panels = [6, 8] if quick else [14, 50, 150, 500, 1250]
    rows = [("three members of a", "members", "exact solution, s", "plan and steps, s", "whole check, s")]
    families: dict[str, Callable[[int], tuple[Stated, list[str]]]] = {
        "Pratt": lambda n: (trade.pratt(n), middle(n).split(",")),
        "Pratt, height with a root": lambda n: (trade.pratt(n, height="7*sqrt(3)/2"), middle(n).split(",")),
        "K truss": lambda n: _k_members(2 * (n // 3)),
        "Baltimore": lambda n: _baltimore_members(4 * (n // 4)),
    }
    for family, build in families.items():
        sizes, columns = [], ([], [], [])
        for count in panels:
            if count < 12 and family in ("K truss", "Baltimore"):
                continue
            stated, wanted = build(count)
            truss, case = stated.truss, stated.case
            solved = matrix.solve(truss, case)
            structure = structure_of(truss, case)

            sizes.append(len(stated.members))
            works = (
                partial(matrix.solve, truss, case),
                partial(_derivation, structure, solved, wanted, case, {}, ""),
                partial(check_members, truss, case, wanted),
            )
            for column, work in zip(columns, works, strict=True):
                column.append(timed(work, repeats))
            rows.append((family, f"{sizes[-1]:,}", *(f"{column[-1]:.4f}" for column in columns)))
        if len(sizes) > 1:
            rows.append(("", "exponent", *(f"{exponent(sizes, column):.2f}" for column in columns)))
    return rows


def _k_members(panels: int) -> tuple[Stated, list[str]]:
    near = panels // 3
    return trade.k_truss(panels), [f"U{near}-U{near + 1}", f"M{near}-U{near + 1}", f"L{near}-M{near}"]


def _baltimore_members(panels: int) -> tuple[Stated, list[str]]:
    near = 2 * (panels // 8)
    return trade.baltimore(panels), [f"U{near}-U{near + 2}", f"M{near + 1}-L{near + 2}", f"L{near}-U{near}"]


def all_members(*, quick: bool, repeats: int) -> list[tuple[str, ...]]:
    """Return a table of whole checks of all members against size."""
    from trusscalc.membercheck import check_members  # noqa: PLC0415

    rows = [("all members of a", "members", "whole check, s")]
    families: dict[str, Callable[[int], Stated]] = {"Pratt": trade.pratt, "K truss": trade.k_truss}
    for family, build in families.items():
        sizes, times = [], []
        for count in [6, 8] if quick else [12, 24, 50, 100]:
            stated = build(count)
            sizes.append(len(stated.members))
            times.append(timed(partial(check_members, stated.truss, stated.case, "all"), repeats))
            rows.append((family, f"{sizes[-1]:,}", f"{times[-1]:.3f}"))
        rows.append(("", "exponent", f"{exponent(sizes, times):.2f}"))
    return rows


# --- a plain solver for comparison ------------------------------------------------------------------------


def plain_solvers(*, quick: bool) -> list[tuple[str, ...]]:
    """Return a table of handing all joint equations to sympy, forces as unknowns, as one would at first."""
    import sympy  # noqa: PLC0415

    from trusscalc.membercheck import check_members  # noqa: PLC0415

    rows = [("all members of a Pratt", "unknowns", "whole check, s", "sympy.linsolve, s", "Matrix.LUsolve, s")]
    sizes, columns = [], ([], [], [])
    for panels in [4, 6] if quick else [4, 6, 10, 16]:
        stated = trade.pratt(panels, height="4*sqrt(3)")
        matrix, loads, unknowns = joint_equations(stated)
        sizes.append(len(unknowns))
        works = (
            partial(check_members, stated.truss, stated.case, "all"),
            partial(sympy.linsolve, (matrix, loads), *unknowns),
            partial(matrix.LUsolve, loads),
        )
        for column, work in zip(columns, works, strict=True):
            column.append(timed(work, 1))
        rows.append(("height with a root", str(sizes[-1]), *(f"{column[-1]:.3f}" for column in columns)))
    rows.append(("", "exponent", *(f"{exponent(sizes, column):.2f}" for column in columns)))
    return rows


def joint_equations(stated: Stated) -> tuple[Any, Any, list[Any]]:
    """Return matrix, right side and unknowns of a truss on pin and roller as sympy objects."""
    import sympy  # noqa: PLC0415

    places = {name: tuple(map(sympy.sympify, pair)) for name, pair in stated.joints.items()}  # our own texts
    index = {name: 2 * place for place, name in enumerate(places)}
    links = [(joint, axis) for joint, kind in stated.supports.items() for axis in ((0, 1) if kind == "pin" else (1,))]
    matrix = sympy.zeros(2 * len(places), len(stated.members) + len(links))
    for column, member in enumerate(stated.members):
        start, end = member.split("-")
        across, up = (b - a for a, b in zip(places[start], places[end], strict=True))
        length = sympy.sqrt(across**2 + up**2)
        for axis, part in enumerate((across / length, up / length)):
            matrix[index[start] + axis, column] = part
            matrix[index[end] + axis, column] = -part
    for column, (joint, axis) in enumerate(links, len(stated.members)):
        matrix[index[joint] + axis, column] = 1
    loads = sympy.zeros(2 * len(places), 1)
    for joint, pair in stated.loads.items():
        for axis in (0, 1):
            loads[index[joint] + axis] = -sympy.sympify(pair[axis])
    return matrix, loads, list(sympy.symbols(f"N0:{matrix.shape[1]}"))


def table(rows: list[tuple[str, ...]]) -> str:
    """Return rows as a Markdown table that also reads well as text."""
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    lines = [
        "| " + " | ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)) + " |" for row in rows
    ]
    return "\n".join([lines[0], "|" + "|".join("-" * (width + 2) for width in widths) + "|", *lines[1:]])


def main(argv: list[str] | None = None) -> int:
    """Measure and print all tables."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--quick", action="store_true", help="tiny sizes, to see that it runs")
    parser.add_argument("--repeats", type=int, default=5, help="runs of each, of which the median counts")
    options = parser.parse_args(argv)
    quick, repeats = options.quick, 1 if options.quick else options.repeats
    for make in (
        lambda: whole_commands(quick=quick, repeats=repeats),
        lambda: growth(quick=quick, repeats=min(repeats, 3)),
        lambda: all_members(quick=quick, repeats=1),
        lambda: plain_solvers(quick=quick),
    ):
        print(table(make()), end="\n\n", flush=True)  # noqa: T201
    return 0


if __name__ == "__main__":
    sys.exit(main())
