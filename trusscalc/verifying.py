"""From a comparison to its sheet: our reactions by hand, what would explain the differences, and the page itself."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Literal

from trusscalc.comparison import Comparison
from trusscalc.diagnosis import diagnose
from trusscalc.explanations import Explanation
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members, check_reactions
from trusscalc.ourforces import without_symbols
from trusscalc.project import Project
from trusscalc.sheet.blocks import Block, Picture, Sheet
from trusscalc.sheet.comparisonfront import Verification, summary
from trusscalc.sheet.comparisonsheet import compose_comparison
from trusscalc.sheet.diagnosisblocks import diagnosis
from trusscalc.sheet.impliedfigure import implied_figure
from trusscalc.sheet.sameinput import same_loads
from trusscalc.statics.owncuts import OwnCut
from trusscalc.statics.prices import Preference


def explained(comparison: Comparison) -> tuple[Explanation, ...]:
    """Return what would explain the differences of a comparison.

    Nothing where what was asked for agrees, whatever else the table holds, and where our own two routes disagree.
    """
    return () if comparison.agreed or comparison.own_faults else diagnose(comparison, comparison.stated)


def verification(
    comparison: Comparison,
    project: Project | None = None,
    *,
    explanations: Sequence[Explanation] | None = None,
    derive: Iterable[str] | Literal["all", "differing"] = (),
    cuts: Mapping[str, OwnCut] | None = None,
    prefer: Preference = "",
    truss_text: str = "",
    places: int = 3,
    drawings: bool = True,
    verbatim: bool = False,
) -> Sheet:
    """Return the verification sheet of a comparison.

    Parameters
    ----------
    comparison : Comparison
        Submitted results beside ours.
    project : Project, optional
        The title block; without it, that of the truss file.
    explanations : sequence of Explanation, optional
        What ``explained`` found before; without it, it is looked for.
    derive : iterable of str, "all" or "differing"
        Members whose derivation by sections and joints is put on the sheet.
    cuts, prefer
        As for ``check_members``.
    truss_text, places, drawings, verbatim
        As for ``sheet.comparisonsheet.compose_comparison``.

    Raises
    ------
    TrusscalcError
        As ``check_members`` and ``compose_comparison``.
    """
    truss, case = comparison.stated.truss, _stated_case(comparison)
    wanted = derive if derive in ("all", "differing") or not isinstance(derive, str) else [derive]
    if wanted == "differing":
        wanted = [name for name in comparison.differing if name in comparison.members]
    elif wanted != "all":
        wanted = list(wanted)
    if wanted or cuts:
        check = check_members(truss, case, wanted, cuts=cuts, prefer=prefer)
    else:
        check = check_reactions(truss, case, prefer=prefer)
    return compose_comparison(
        comparison,
        explained(comparison) if explanations is None else explanations,
        check,
        project,
        truss_text=truss_text,
        places=places,
        drawings=drawings,
        verbatim=verbatim,
    )


def short_blocks(comparison: Comparison, places: int = 3) -> list[Block]:
    """Return conclusion, table, joint loads drawn and the diagnosis: the sheet in short."""
    check = check_reactions(comparison.stated.truss, _stated_case(comparison), own_checks=False)
    found = Verification(comparison, explained(comparison), check)
    blocks = [*summary(found, places), Picture((implied_figure(comparison),))]
    return [*blocks, *diagnosis(comparison, found.explanations, own_faults=bool(found.own_faults))]


def _stated_case(comparison: Comparison) -> LoadCase:
    """Return the loads with their symbols, as they are stated; loads of the user's own as they were compared."""
    stated, compared = comparison.stated, comparison.case
    known = [case.name for case in stated.acting] + [each.name for each in stated.all_combinations]
    if compared.name not in known:
        return compared
    case = stated.case(compared.name)
    return case if same_loads(without_symbols(case, dict(stated.truss.symbols)), compared) else compared
