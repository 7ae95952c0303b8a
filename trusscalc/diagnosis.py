"""What may have gone wrong in another analysis: the blunders that reproduce its printed results, ranked.

Every blunder of the trade is tried as a model of its own, solved by the numeric route, and judged by what it leaves
of the differences. The many are sifted by ``screening``; what is reported has been run by ``stiffness`` (or, for stiff
joints, by ``frame``). A table that agrees within roundings and tolerance is never accused of anything.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

from trusscalc import alterations, fitting, frame, pairs, screening, stiffjoints, stiffness
from trusscalc.alterations import Compared, compared, plain
from trusscalc.altered import Alteration, altered, in_turn, tabulated
from trusscalc.comparison import Comparison
from trusscalc.errors import InputError
from trusscalc.explanations import Explanation, Trial, convincing, explanations
from trusscalc.fits import ALLOWED, SHARP, Fit, Printed, fit, reactions_by_name
from trusscalc.loads import LoadCase
from trusscalc.mirrors import of_mirrors
from trusscalc.ratios import known_ratios
from trusscalc.screening import MOST_EXCHANGED, PAIR, Screen
from trusscalc.trussfile import TrussFile

MOST_JOINTS: Final = 600
"""Larger trusses are not searched."""
MOST_TOLD: Final = 4
"""Values or joints named where nothing explains the results."""
WORST_BALANCE: Final = 1e-6
"""An altered model whose joints are further from equilibrium is a mechanism."""
NOTHING: Final = Alteration(explanation="", where=(), words="")

Ratios = Sequence[tuple[float, str]]


def diagnose(comparison: Comparison, stated: TrussFile) -> tuple[Explanation, ...]:
    """Return explanations of the differences a comparison shows, the best first; nothing where it shows none.

    Parameters
    ----------
    comparison : Comparison
        Their results beside ours; its criterion is the tolerance.
    stated : TrussFile
        Our truss, cases and combinations.
    """
    ours, criterion = comparison.ours.decimal, comparison.criterion
    shares = float(criterion.relative), float(criterion.absolute) * comparison.largest
    rows, reactions = comparison.submitted.rows, comparison.submitted.reactions
    allowed = {row.member: shares[0] * abs(ours.get(row.member, 0.0)) + shares[1] for row in rows}
    allowed |= {name: item.tolerance for name, item in comparison.reactions.items()}
    printed = Printed(
        {row.member: float(row.force) for row in rows},
        {row.member: float(row.digits) for row in rows},
        reactions={row.name: float(row.force) for row in reactions},
        reaction_half_units={row.name: float(row.digits) for row in reactions},
        allowed=allowed,
    )
    found = explain(stated, comparison.case, printed)
    if found or not comparison.differing:
        return found
    text = (
        f"{_listed(comparison.differing)} of another sense, within the tolerance: nothing that a blunder would explain"
    )
    return (Explanation("unexplained", comparison.differing, text, 0.0, fits=False),)


def explain(stated: TrussFile, case: str | LoadCase, printed: Printed) -> tuple[Explanation, ...]:
    """Return explanations of printed results that differ from ours, the best first; nothing where they agree.

    Parameters
    ----------
    stated : TrussFile
        Our truss, cases and combinations.
    case : str or LoadCase
        The case or combination the results are for.
    printed : Printed
        The results.

    Raises
    ------
    UnknownNameError
        When the case or the combination is not there.
    InputError
        When our truss is a mechanism.

    Notes
    -----
    Statically indeterminate trusses are taken with the same EA in all members.

    Examples
    --------
    >>> from trusscalc.truss import Truss
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> stated = TrussFile(roof, (LoadCase("snow", {"C": (3, -12)}),))
    >>> printed = Printed({"A-B": 9.5, "A-C": -8.13, "C-B": -11.88}, dict.fromkeys(("A-B", "A-C", "C-B"), 0.005))
    >>> explain(stated, "snow", printed)
    ()
    >>> on_the_right = Printed({"A-B": 6.5, "A-C": -8.13, "C-B": -11.88}, printed.half_units)
    >>> [(one.explanation, one.where) for one in explain(stated, "snow", on_the_right)][0]
    ('support-exchanged', ('A', 'B'))
    """
    what = compared(stated, case)
    before = _fit(what, printed, NOTHING)
    if before is None:
        message = "the truss itself cannot resist every load: nothing can be compared with it; check it first"
        raise InputError(message)
    if before.closeness <= ALLOWED:
        return ()
    if len(what.truss.joints) > MOST_JOINTS:
        text = f"not searched: the truss has more than {MOST_JOINTS} joints"
        return (Explanation("unexplained", (), text, before.remainder, fits=False),)
    look = screening.screen(what, printed)
    if look is None:
        return (_unexplained(what, None, before),)
    factors = [float(f) for each in stated.all_combinations for _, given in each.factors for f in given]
    ratios = known_ratios(factors, what.truss.force, what.truss.length)
    listed = plain_blunders(what, printed)
    sieve = Sieve(look, listed, screening.forces_of(look, listed), ratios)
    trials = _single(what, printed, sieve)
    if not any(trial.fit.closeness <= ALLOWED and convincing(trial, before) for trial in trials):
        trials += _double(what, printed, sieve)
    return explanations(trials, before, _unexplained(what, look, before))


# --- trials -----------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Sieve:
    """All plain blunders with what each leads to, roughly, (members, alterations) float."""

    look: Screen
    listed: Sequence[Alteration]
    forces: screening.Floats
    ratios: Ratios


def _single(what: Compared, printed: Printed, sieve: Sieve) -> list[Trial]:
    """Return the trials of one blunder each."""
    look = sieve.look
    near = screening.shortlist(look, sieve.listed, sieve.forces)
    near += of_table(look, look.forces, sieve.ratios)
    trials = _run(what, printed, ((one,) for one in near))
    if not any(trial.fit.closeness == SHARP and not trial.blunders[0].fitted for trial in trials):
        places = [one for one in near if one.explanation == "joint-displaced"]
        trials += _run(what, printed, ((one,) for one in fitted_blunders(look, what, places)))
    return trials


def _double(what: Compared, printed: Printed, sieve: Sieve) -> list[Trial]:
    """Return the trials of two blunders each."""
    look, listed, forces = sieve.look, sieve.listed, sieve.forces
    found = pairs.of_loads(look, listed, forces)
    for place in {*pairs.near_in_proportion(look, forces), *pairs.few_rows_off(look, forces, MOST_EXCHANGED)}:
        found += [(listed[place], one) for one in of_table(look, forces[:, place], sieve.ratios)]
    found += pairs.on_altered_models(look, listed, pairs.first_blunders(look, listed, forces))
    return _run(what, printed, found)


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
        *of_mirrors(what),
        *alterations.of_members(gone),
        *alterations.of_places(what.truss),
    ]


def of_table(look: Screen, forces: screening.Floats, ratios: Ratios) -> list[Alteration]:
    """Return blunders of the table that make a model's forces the printed ones: a common ratio, rows exchanged."""
    found = fitting.of_ratio(look, forces, ratios)
    rows = screening.exchanged_rows(look, forces)
    if rows:
        names = tuple(member for member, _ in rows)
        words = f"the values of {_listed(names)} exchanged"
        strain = 2 if len(rows) == PAIR else 7
        found.append(
            Alteration(explanation="rows-exchanged", where=names, words=words, rows=tuple(rows), strain=strain)
        )
    return found


def fitted_blunders(look: Screen, what: Compared, slipped: Sequence[Alteration]) -> list[Alteration]:
    """Return blunders with a number fitted to the printed values."""
    return [
        *fitting.of_load_sizes(look, what),
        *fitting.of_directions(look, what),
        *fitting.of_free_places(look, what, slipped),
        *stiffjoints.of_stiff_joints(look, what),
    ]


def _run(what: Compared, printed: Printed, listed: Iterable[tuple[Alteration, ...]]) -> list[Trial]:
    """Return a trial of each blunder or pair whose model holds together."""
    found = []
    for blunders in listed:
        one = blunders[0] if len(blunders) == 1 else in_turn(*blunders)
        measured = _fit(what, printed, one)
        if measured is not None:
            found.append(Trial(blunders, measured))
    return found


def _fit(what: Compared, printed: Printed, one: Alteration) -> Fit | None:
    """Return how well an altered model reproduces the printed results; None for one that cannot be."""
    try:
        truss, case = altered(one, what.truss, what.case)
    except InputError:
        return None
    if one.bending:
        return fit(printed, tabulated(one, frame.axial_forces(truss, case, dict(one.bending))), {})
    found = stiffness.solve(truss, case)
    if not found.condition < float("inf") or found.residual > WORST_BALANCE:
        return None
    reactions = reactions_by_name(printed.reactions, what.truss, truss, found.reactions)
    return fit(printed, tabulated(one, found.forces), reactions)


# --- nothing found ----------------------------------------------------------------------------------------


def _unexplained(what: Compared, look: Screen | None, before: Fit) -> Explanation:
    """Return what can be said all the same: which values differ, if they are few, and which joints do not balance."""
    text, where = "none of the blunders tried reproduces the values", tuple[str, ...]()
    if look is not None:
        rows = screening.rows_off(look, look.forces)
        joints = fitting.implied_otherwise(look)
        if not rows:
            text += "; all member forces agree, reactions do not"
        elif len(rows) <= PAIR:
            where = tuple(rows)
            text += f"; all member forces agree but {_listed(where)}"
        elif 0 < len(joints) <= MOST_TOLD:
            where = tuple(joint for joint, *_ in joints)
            unit = what.truss.force
            told = [f"{joint} carries ({plain(x)}, {plain(y)}) {unit} more than stated" for joint, x, y in joints]
            text += f"; by their own equilibrium, {_listed(told)}, and all other joints what is stated"
        elif not joints:
            text += "; the joints are in equilibrium under the stated loads, so that supports or stiffnesses may differ"
        else:
            text += f"; {len(joints)} joints are not in equilibrium under the stated loads"
    return Explanation("unexplained", where, text, before.remainder, fits=False)


def _listed(names: Sequence[str]) -> str:
    """Return names as a list in words."""
    shown = [*names[:MOST_TOLD], *([f"{len(names) - MOST_TOLD} more"] if len(names) > MOST_TOLD else [])]
    return shown[0] if len(shown) == 1 else f"{', '.join(shown[:-1])} and {shown[-1]}"
