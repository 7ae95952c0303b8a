"""The numeric route's runs behind a check: at the stated values, under unit values of symbols, at other samples."""

from __future__ import annotations

from collections.abc import Mapping

from trusscalc import stiffness
from trusscalc.errors import InexactNumberError, InputError, UnstableTrussError
from trusscalc.exact import Exact
from trusscalc.loads import LoadCase
from trusscalc.samples import at_sample, samples
from trusscalc.statics import matrix
from trusscalc.symbolparts import Monomial, numeric_parts
from trusscalc.truss import Truss
from trusscalc.verdicts import Runs


def runs_of(truss: Truss, case: LoadCase) -> tuple[Runs, float]:
    """Return all numeric runs of a case, and the largest joint imbalance of the first over the largest force."""
    numeric = stiffness.solve(truss, case)
    values = {**numeric.reactions, **stiffness.member_forces(truss, case)}
    runs = Runs(values, numeric.condition, _unit_runs(truss, case), _sample_runs(truss, case))
    return runs, numeric.residual


def _sample_runs(truss: Truss, case: LoadCase) -> tuple[tuple[Mapping[str, Exact], Mapping[str, float], float], ...]:
    """Return (values, forces, condition) for every sample of symbolic dimensions at which the truss is stable."""
    if not truss.symbols:
        return ()
    runs = []
    for values in samples(truss, case):
        try:
            numbers, loads = at_sample(truss, case, values)
            matrix.solve(numbers, loads)
        except (InputError, UnstableTrussError):
            continue  # a sample that happens to be critical; the stated values have been refused before this
        found = stiffness.solve(numbers, loads)
        forces = {**found.reactions, **stiffness.member_forces(numbers, loads)}
        runs.append((values, forces, found.condition))
    return tuple(runs)


def _unit_runs(truss: Truss, case: LoadCase) -> dict[Monomial, dict[str, float]]:
    """Return the numeric route's forces for each product of symbols in the loads, {} without symbols."""
    if truss.symbols or not any(load.fx.symbols or load.fy.symbols for load in case.loads):
        return {}
    try:
        parts = numeric_parts(case)
    except InexactNumberError:
        return {}  # not a polynomial in its symbols: compared at their values only
    return {
        monomial: {**stiffness.solve(truss, part).reactions, **stiffness.member_forces(truss, part)}
        for monomial, part in parts.items()
    }
