"""What may have gone wrong in another analysis: the blunders that reproduce its printed results, ranked.

Every blunder of the trade is tried as a model of its own, solved by the numeric route, and judged by what it leaves
of the differences. The many are sifted by ``screening``; what is reported has been run by ``stiffness`` (or, for stiff
joints, by ``frame``). A table that agrees within roundings and tolerance is never accused of anything.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Final

from trusscalc import alterations, fitting, frame, screening, stiffness
from trusscalc.alterations import Compared, compared
from trusscalc.altered import Alteration, altered, in_turn, tabulated
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.explanations import Explanation, Trial, explanations, ranked, share
from trusscalc.fits import ALLOWED, APART, PRINTED, SHARP, Fit, Printed, fit, reactions_as_named
from trusscalc.ratios import known_ratios
from trusscalc.screening import Screen
from trusscalc.trussfile import TrussFile

MOST_JOINTS: Final = 600
"""Larger trusses are not searched."""
WORST_BALANCE: Final = 1e-6
"""An altered model whose joints are further from equilibrium is a mechanism."""


def diagnose(
    stated: TrussFile,
    name: str,
    forces: Mapping[str, float],
    half_units: Mapping[str, float],
    *,
    reactions: Mapping[str, float] | None = None,
    reaction_half_units: Mapping[str, float] | None = None,
    allowed: Mapping[str, float] | None = None,
) -> tuple[Explanation, ...]:
    """Return explanations of printed results that differ from ours, the best first; nothing where they agree.

    Parameters
    ----------
    stated : TrussFile
        Our truss, cases and combinations.
    name : str
        The case or combination the results are for.
    forces, half_units : mapping of member name to float
        The printed member forces, tension positive, in the truss's unit of force, and half a unit of the last digit
        printed. Members may be missing.
    reactions, reaction_half_units : mapping of link name to float
        Printed reactions where there are any, such as ``L0.x``.
    allowed : mapping of member or link name to float
        What a value may differ by besides its rounding.

    Raises
    ------
    UnknownNameError
        When a member or link, the case or the combination is not there.

    Notes
    -----
    Statically indeterminate trusses are taken with the same EA in all members.
    """
    what = compared(stated, name)
    printed = _printed(what, forces, half_units, reactions or {}, reaction_half_units or {}, allowed or {})
    before = _fit(what, printed, Alteration(explanation="", where=(), words=""))
    if before is None or before.closeness <= ALLOWED:
        return ()
    look = screening.screen(what, printed) if len(what.truss.joints) <= MOST_JOINTS else None
    if look is None:
        return (_unexplained(what, None, before),)
    trials = _single(what, printed, look, stated)
    return explanations(trials, before, _unexplained(what, look, before))


def _printed(
    what: Compared,
    forces: Mapping[str, float],
    half_units: Mapping[str, float],
    reactions: Mapping[str, float],
    reaction_half_units: Mapping[str, float],
    allowed: Mapping[str, float],
) -> Printed:
    spelled = {given: what.truss.member(given).name for given in {*forces, *half_units}}
    links = {link.name for link in what.truss.links}
    for given in reactions:
        if given not in links:
            message = f"there is no reaction {given!r}; there are {', '.join(sorted(links))}"
            raise UnknownNameError(message, name=given)
    return Printed(
        {spelled[given]: value for given, value in forces.items()},
        {spelled[given]: half_units[given] for given in forces},
        dict(reactions),
        {given: reaction_half_units[given] for given in reactions},
        {spelled.get(given, given): value for given, value in allowed.items()},
    )


# --- trials -----------------------------------------------------------------------------------------------


def _single(what: Compared, printed: Printed, look: Screen, stated: TrussFile) -> list[Trial]:
    """Return the trials of one blunder each."""
    listed = plain_blunders(what, printed)
    forces = screening.forces_of(look, listed)
    near = screening.shortlist(look, listed, forces)
    near += of_table(look, stated)
    trials = _run(what, printed, near)
    if min((trial.fit.closeness for trial in trials), default=APART) > SHARP:
        places = [one for one in near if one.explanation == "joint-displaced"]
        trials += _run(what, printed, fitted_blunders(look, what, places))
    return trials


def plain_blunders(what: Compared, printed: Printed) -> list[Alteration]:
    """Return all blunders of the model that need no fitting."""
    gone = [
        member.name
        for member in what.truss.members
        if abs(printed.forces.get(member.name, 0.0)) <= printed.half_units.get(member.name, 0.0)
    ]
    return [
        *alterations.of_cases(what),
        *alterations.of_loads(what),
        *alterations.of_supports(what.truss),
        *alterations.of_mirrors(what),
        *alterations.of_members(what.truss, gone),
        *alterations.of_places(what.truss),
    ]


def of_table(look: Screen, stated: TrussFile) -> list[Alteration]:
    """Return blunders of the table alone: a common ratio, rows exchanged."""
    factors = [float(f) for each in stated.combinations for _, given in each.factors for f in given]
    found = fitting.of_ratio(look, look.forces, known_ratios(factors))
    rows = screening.exchanged_rows(look, look.forces)
    if rows:
        names = tuple(member for member, _ in rows)
        words = f"the values of {' and '.join(names) if len(names) == 2 else ', '.join(names)} exchanged"
        strain = 2 if len(rows) == 2 else 7
        found.append(Alteration(explanation="rows-exchanged", where=names, words=words, rows=tuple(rows), strain=strain))
    return found


def fitted_blunders(look: Screen, what: Compared, slipped: Sequence[Alteration]) -> list[Alteration]:
    """Return blunders with a number fitted to the printed values."""
    return [
        *fitting.of_load_sizes(look, what),
        *fitting.of_directions(look, what),
        *fitting.of_free_places(look, what, slipped),
        *fitting.of_stiff_joints(look, what),
    ]


def _run(what: Compared, printed: Printed, listed: Iterable[Alteration]) -> list[Trial]:
    """Return a trial of each alteration whose model holds together."""
    found = []
    for one in listed:
        measured = _fit(what, printed, one)
        if measured is not None:
            found.append(Trial((one,), measured))
    return found


def _fit(what: Compared, printed: Printed, one: Alteration) -> Fit | None:
    """Return how well an altered model reproduces the printed results; None for one that cannot be."""
    try:
        truss, case = altered(one, what.truss, what.case)
    except InputError:
        return None
    if one.stiff:
        bending = dict.fromkeys(one.stiff, one.radius**2)
        return fit(printed, tabulated(one, frame.axial_forces(truss, case, bending)), {})
    found = stiffness.solve(truss, case)
    if not found.condition < float("inf") or found.residual > WORST_BALANCE:
        return None
    return fit(printed, tabulated(one, found.forces), reactions_as_named(what.truss, found.reactions, truss))


# --- nothing found ----------------------------------------------------------------------------------------


def _unexplained(what: Compared, look: Screen | None, before: Fit) -> Explanation:
    text = "none of the blunders tried reproduces the values"
    return Explanation("unexplained", (), text, before.remainder, fits=False)
