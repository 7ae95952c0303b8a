"""Our side of a comparison: every force of a load case by our own two routes, checked against each other first.

What statics decides is the exact solution of all joint equations; what it does not decide comes from the stiffness
route, with the same EA in all members. Many cases take one elimination.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc import stiffness
from trusscalc.errors import InputError
from trusscalc.exact import ZERO, Exact
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.statics import matrix
from trusscalc.statics.matrix import Bar, Equilibrium
from trusscalc.truss import Truss
from trusscalc.verdicts import WIDEST_TOLERANCE, compared, largest_confirmed, tolerance_at, undecided_reason

SAME_EA: Final = "the same EA in all members"


@dataclass(frozen=True, slots=True)
class OurForces:
    """Member forces and reactions of one case, symbols at their values.

    Attributes
    ----------
    truss, case
        The truss and the loads, without symbols.
    bars : dict of str to Bar
        Members and support links.
    exact : dict of str to Exact
        Members and reactions that statics decides.
    decimal : dict of str to float
        All of them: the nearest float of the exact value, else by stiffness.
    reasons : dict of str to str
        Why statics does not decide, by name.
    displacements : dict of str to (float, float)
        Of each joint, for EA = 1.
    largest : float
        The largest force: of the loads, and of all values of the stiffness route that the exact solution confirms.
    tolerance : float
        Share of the largest force up to which our two routes must agree.
    faults : tuple of str
        Where they do not.
    """

    truss: Truss
    case: LoadCase
    bars: Mapping[str, Bar]
    exact: Mapping[str, Exact]
    decimal: Mapping[str, float]
    reasons: Mapping[str, str]
    displacements: Mapping[str, tuple[float, float]]
    largest: float
    tolerance: float
    faults: tuple[str, ...]

    @property
    def noise(self) -> float:
        """The size below which a value that is not exact means nothing."""
        return self.tolerance * self.largest

    def reaction(self, joint: str, axis: str) -> tuple[Exact | None, float]:
        """Return a reaction as exact number (None where statics does not decide it) and as float.

        Parameters
        ----------
        joint : str
            The joint.
        axis : str
            The last part of a reaction's name, as in ``L0.x``; ``x`` or ``y`` at any joint is the component of all
            that the supports of that joint do, zero where there is none.
        """
        name = f"{joint}.{axis}"
        if name in self.decimal:
            return self.exact.get(name), self.decimal[name]
        exact: Exact | None = ZERO
        decimal = 0.0
        for bar in self.bars.values():
            if bar.is_link and bar.start == joint:
                share = (bar.dx if axis == "x" else bar.dy) / bar.length
                decimal += self.decimal[bar.name] * float(share)
                exact = exact + self.exact[bar.name] * share if exact is not None and bar.name in self.exact else None
        return exact, decimal if exact is None else float(exact)


def our_forces(truss: Truss, cases: Sequence[LoadCase]) -> tuple[OurForces, ...]:
    """Return all forces of load cases by both routes.

    Raises
    ------
    InputError
        When a case loads a joint that is not there.
    UnstableTrussError
        When the truss cannot resist every load.
    """
    faults = [fault for case in cases for fault in case.faults(truss)]
    if faults:
        raise InputError(faults)
    at_values = truss.at_values()
    loads = [without_symbols(case, dict(truss.symbols)) for case in cases]
    equilibria = matrix.solve_all(at_values, loads)
    runs = stiffness.solve_all(at_values, loads)
    lengths = {bar.name: bar.length for equilibrium in equilibria[:1] for bar in equilibrium.bars}
    found = []
    for case, equilibrium, run in zip(loads, equilibria, runs, strict=True):
        exact = {name: tension * lengths[name] for name, tension in equilibrium.tensions.items()}
        found.append(_by_both(at_values, case, equilibrium, exact, run))
    return tuple(found)


def of_check(check: MemberCheck) -> OurForces:
    """Return the forces of a check that has been made: the members asked for, by hand, and all reactions."""
    truss, case = check.truss.at_values(), without_symbols(check.case, dict(check.truss.symbols))
    (ours,) = our_forces(check.truss, [check.case])
    checked = {**check.members, **check.reactions}
    exact = {name: check.value(item.exact) for name, item in checked.items() if item.exact is not None}
    decimal = {name: float(exact[name]) if name in exact else ours.decimal[name] for name in checked}
    faults = [f"{item.name}: {item.reason}" for item in checked.values() if item.verdict == "differs"]
    faults += [f"joint {joint}: is out of balance" for joint in check.residuals]
    faults += [
        f"{name}: by hand it differs from the exact solution" for name in exact if exact[name] != ours.exact[name]
    ]
    reasons = {name: reason for name, reason in ours.reasons.items() if name in checked}
    return OurForces(
        truss=truss,
        case=case,
        bars=ours.bars,
        exact=exact,
        decimal=decimal,
        reasons=reasons,
        displacements=ours.displacements,
        largest=ours.largest,
        tolerance=ours.tolerance,
        faults=(*faults, *(fault for fault in ours.faults if fault not in faults)),
    )


def without_symbols(case: LoadCase, values: Mapping[str, Exact]) -> LoadCase:
    """Return a case with the symbols of its loads and of the dimensions at their values."""
    if not case.symbols and not values:
        return case
    at = {**values, **dict(case.symbols)}
    return LoadCase(
        case.name, [JointLoad(load.joint, load.fx.substitute(at), load.fy.substitute(at)) for load in case.loads]
    )


def _by_both(
    truss: Truss,
    case: LoadCase,
    equilibrium: Equilibrium,
    exact: Mapping[str, Exact],
    run: stiffness.StiffnessResult,
) -> OurForces:
    bars = {bar.name: bar for bar in equilibrium.bars}
    numeric = {**run.forces, **run.reactions}
    tolerance = tolerance_at(run.condition)
    loads = [abs(part) for pair in case.as_floats().values() for part in pair]
    confirmed = largest_confirmed(numeric, equilibrium, bars, lambda amount: amount)
    largest = max([confirmed, *loads])
    decimal = {name: float(exact[name]) if name in exact else numeric[name] for name in bars}
    return OurForces(
        truss=truss,
        case=case,
        bars=bars,
        exact=exact,
        decimal=decimal,
        reasons={name: undecided_reason(equilibrium, name) for name in equilibrium.undecided},
        displacements=run.displacements,
        largest=largest,
        tolerance=tolerance,
        faults=tuple(_faults(exact, decimal, numeric, tolerance, largest)),
    )


def _faults(
    exact: Mapping[str, Exact],
    decimal: Mapping[str, float],
    numeric: Mapping[str, float],
    tolerance: float,
    largest: float,
) -> list[str]:
    """Return where the two routes differ, or why the numeric one cannot judge."""
    if tolerance > WIDEST_TOLERANCE:
        return [compared(0.0, tolerance, largest)[1]]
    found = []
    for name, value in decimal.items():
        if name in exact:
            verdict, reason = compared(value - numeric[name], tolerance, largest)
            if verdict != "agrees":
                found.append(f"{name}: {reason}, {value:.6g} by hand and {numeric[name]:.6g} by stiffness")
        elif not math.isfinite(value):
            found.append(f"{name}: the stiffness route gives no value")
    return found
