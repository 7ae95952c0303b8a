"""Whether two statements of a truss and its loads come to the same, however they are written down."""

from __future__ import annotations

from dataclasses import replace

from trusscalc.loads import LoadCase
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile


def same_truss(one: Truss, other: Truss) -> bool:
    """Return whether two trusses are the same but for the groups of their members."""
    return _without_groups(one) == _without_groups(other)


def same_loads(one: LoadCase, other: LoadCase) -> bool:
    """Return whether two cases have the same loads, and those symbols that stand in them the same values."""
    return _loads(one) == _loads(other)


def differences(one: TrussFile, other: TrussFile) -> list[str]:
    """Return in which of truss, loads, combinations and moving loads two files differ."""
    found = []
    if not same_truss(one.truss, other.truss):
        found.append("a truss")
    if [_named(case) for case in one.acting] != [_named(case) for case in other.acting]:
        found.append("loads")
    if one.all_combinations != other.all_combinations:
        found.append("combinations")
    if one.moving != other.moving:
        found.append("moving loads")
    return found


def _named(case: LoadCase) -> tuple[object, ...]:
    return case.name, *_loads(case)


def _without_groups(truss: Truss) -> tuple[object, ...]:
    members = tuple(replace(member, group="") for member in truss.members)
    return (truss.joints, members, truss.supports, truss.length, truss.force, truss.tension_only, truss.no_uplift)


def _loads(case: LoadCase) -> tuple[object, ...]:
    return case.loads, tuple((name, value) for name, value in case.symbols if _uses(case, name))


def _uses(case: LoadCase, name: str) -> bool:
    return any(name in part.symbols for load in case.loads for part in (load.fx, load.fy))
