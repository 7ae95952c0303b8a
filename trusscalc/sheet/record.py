"""What a reader needs to repeat the check: basis, input, loads, reactions, cross-check, cautions, revisions."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from importlib.metadata import version
from typing import Final

from trusscalc.exact import ZERO, Exact
from trusscalc.membercheck import TOLERANCE, MemberCheck
from trusscalc.project import Project
from trusscalc.sheet.blocks import (
    Block,
    Column,
    Decimals,
    Heading,
    Inline,
    Items,
    Paragraph,
    Power,
    Run,
    Table,
)
from trusscalc.sheet.compact import together
from trusscalc.sheet.derivation import RESULT_COLUMNS, Writer, tension_of, without_sense
from trusscalc.sheet.front import MOST_NAMED, unchecked
from trusscalc.sheet.values import decimal_text, printed, scientific
from trusscalc.sheet.words import bar, counted, listed
from trusscalc.truss import Truss

ASSUMPTIONS = (
    ("Members meet in frictionless hinges at their ends.", "Stiff joints add bending; axial forces change a little."),
    ("Loads and reactions act at joints only.", "A load between joints bends its member and is missing here."),
    ("Members are straight, their axes meet in the joints.", "Eccentric connections add bending."),
    ("Weight, where included, is put on the joints.", "A member's own weight between its joints bends it."),
    (
        "Displacements are small; equilibrium is written on the undeformed truss.",
        "Slender trusses carry more than shown.",
    ),
    (
        "Linear elastic material, the same EA in all members of the stiffness route.",
        "Without effect on a statically determinate truss.",
    ),
    ("The truss is plane and held sideways by others.", "Wind, skew and lateral buckling are not seen."),
    (
        "Supports are as stated, without friction or settlement.",
        "A stuck bearing adds forces that are missing here.",
    ),
)
NEVER_FED_ON = "no rounded number is calculated with"
SIGNS = "tension positive; x to the right, y upwards; moments anticlockwise positive; every unknown is drawn as tension"
SYMBOLS = "N axial force, R reaction on the truss, P load as drawn; subscripts name member, joint or support"
METHOD = (
    "by hand: joints and sections, one equation for one unknown where there is one, in exact arithmetic; "
    "independently: displacement method in floating point. The two share the stated truss and loads only"
)
NO_CODES: Final = (("Codes", (Run("none applied: loads and combinations are taken as stated"),)),)
WELL_CONDITIONED = "what double precision keeps of a well-conditioned truss; more is a mistake, not a tolerance"
ILL_CONDITIONED = "ten times the rounding error to be expected of the numeric route at the condition told below"

INDEPENDENCE = "the two routes share no arithmetic; they share geometry, supports and loads"

AXIAL_ONLY = (
    "This sheet checks axial forces of an ideal truss only. It says nothing about the strength, stability, "
    "connections, fatigue or serviceability of any member."
)
LICENSED = (
    "A licensed engineer has to check it, decide whether its assumptions hold for the structure, and take "
    "responsibility for its use under the law of the place."
)
CODES = (
    "Loads, load factors and combinations are the engineer's input. Local codes, in the editions adopted where the "
    "structure stands, govern; this sheet gives no opinion on them."
)
NOT_ELSEWHERE = "Prepared for the project, load case and revision named above; not for use elsewhere."
CAUTIONS = (AXIAL_ONLY, LICENSED, CODES, NOT_ELSEWHERE)


def program() -> str:
    """Return program and version."""
    return f"trusscalc {version('trusscalc')}"


def digest(truss_text: str) -> str:
    """Return the SHA-256 of the truss file's text."""
    return hashlib.sha256(truss_text.encode()).hexdigest()


def basis(
    truss: Truss,
    tolerance: float,
    truss_text: str,
    places: int,
    *,
    method: str = METHOD,
    codes: Sequence[tuple[str, tuple[Inline, ...]]] = NO_CODES,
) -> list[Block]:
    """Return assumptions, conventions, rounding, tolerance, program and digest."""
    rows = tuple((Run(str(place)), Run(a), Run(b)) for place, (a, b) in enumerate(ASSUMPTIONS, 1))
    table = Table((Column("no.", "right"), Column("assumption"), Column("consequence where it fails")), rows)
    length, force = truss.length, truss.force
    units = f"lengths in {length}, forces in {force}, moments in {force} {length}"
    rounding = f"round half to even, once, from the exact value, to {places} decimal places; {NEVER_FED_ON}"
    reason = WELL_CONDITIONED if tolerance <= TOLERANCE else ILL_CONDITIONED
    apart = (
        Run("the two routes agree within "),
        scientific(tolerance, 2),
        Run(f" of the largest force: {reason}"),
    )
    items: list[tuple[str, tuple[Inline, ...]]] = [
        ("Units", (Run(units),)),
        ("Signs", (Run(SIGNS),)),
        ("Symbols", (Run(SYMBOLS),)),
        ("Rounding", (Run(rounding),)),
        ("Tolerance", apart),
        ("Method", (Run(method),)),
        *codes,
        ("Program", (Run(program()),)),
        ("Input digest", (Run(f"SHA-256 of the truss file: {digest(truss_text)}"),)),
    ]
    return [Heading(2, "Basis"), table, Items(tuple(items))]


# --- loads and reactions ----------------------------------------------------------------------------------


def loads(writer: Writer) -> list[Block]:
    """Return the load inventory with its totals."""
    check = writer.check
    case, force = check.case, check.truss.force
    symbolic = any(part.symbols for load in case.loads for part in (load.fx, load.fy))
    rows: list[tuple[Inline | None, ...]] = [
        (Run(load.joint), *_force_cells(writer, load.fx, load.fy, symbolic)) for load in case.loads
    ]
    fx = sum((load.fx for load in case.loads), start=ZERO)
    fy = sum((load.fy for load in case.loads), start=ZERO)
    rows = [*together(rows), (Run("total"), *_force_cells(writer, fx, fy, symbolic))]
    columns = [Column("joint"), Column(f"Fx, {force}", "right"), Column(f"Fy, {force}", "right")]
    if symbolic:
        columns += [Column("Fx at values", "right"), Column("Fy at values", "right")]
    count = counted(len(case.loads), "loaded joint")
    caption = f"Load case “{case.name}”, {count}. Positive to the right and upwards."
    if not case.loads:
        caption = f"Load case “{case.name}” states no loads."
    return [Heading(2, "Loads"), Table(tuple(columns), tuple(rows), caption, totals=1)]


def _near(value: Exact, places: int) -> Decimals:
    return Decimals(decimal_text(value, places))


def _force_cells(writer: Writer, fx: Exact, fy: Exact, symbolic: bool) -> tuple[Inline, ...]:
    case = writer.check.case
    exact = (printed(fx, case), printed(fy, case))
    if not symbolic:
        return exact
    return (*exact, _near(case.value(fx), writer.places), _near(case.value(fy), writer.places))


def reactions(writer: Writer, *, steps: bool = True) -> list[Block]:
    """Return the reactions and the proof that they balance the loads; ``steps`` says whether it may point at them."""
    return [Heading(2, "Reactions"), *reaction_tables(writer, steps=steps)]


def reaction_tables(writer: Writer, *, steps: bool = True) -> list[Block]:
    """Return the same without a heading."""
    check = writer.check
    by_number = {step.number: step for step in check.steps}
    rows, strong = [], []
    for place, (name, found) in enumerate(check.reactions.items()):
        cells = writer.result_cells(name, found.exact, found)
        source = f"step {found.steps[-1]}" if found.steps else "not decided by statics"
        if found.steps and not steps:
            source = writer.teller.found_by(by_number[found.steps[-1]])
        rows.append((Run(bar(name)), Run(source), *cells))
        if found.verdict == "differs":
            strong.append(place)
    columns, rows = without_sense((Column("reaction"), Column("derived by"), *RESULT_COLUMNS), rows)
    table = Table(columns, tuple(rows), f"Forces on the truss in {check.truss.force}.", tuple(strong))
    return [table, *balance(writer)]


def balance(writer: Writer) -> list[Block]:
    """Return the sums of loads and reactions, which are zero."""
    check = writer.check
    tensions = {link.name: tension_of(check, link.name) for link in check.truss.links}
    acting = []
    for link in check.truss.links:
        tension = tensions[link.name]
        if tension is None:
            text = (
                "Statics alone does not decide every reaction: the balance of the whole truss cannot be closed exactly."
            )
            return [Paragraph((Run(text),))]
        acting.append((link.joint, tension * link.dx, tension * link.dy))
    loads_sum = _resultant([(load.joint, load.fx, load.fy) for load in check.case.loads], check)
    reaction_sum = _resultant(acting, check)
    total = tuple(a + b for a, b in zip(loads_sum, reaction_sum, strict=True))
    rows = tuple(
        (Run(word), *(writer.equations.printed(value) for value in values))
        for word, values in (("loads", loads_sum), ("reactions", reaction_sum), ("sum", total))
    )
    force, length = check.truss.force, check.truss.length
    columns = (
        Column("whole truss"),
        Column(f"forces in x, {force}", "right"),
        Column(f"forces in y, {force}", "right"),
        Column(f"moments about (0, 0), {force} {length}", "right"),
    )
    zero = not any(total)
    caption = "The sums are exactly zero." if zero else "The sums are NOT zero: the reactions do not balance the loads."
    return [Table(columns, rows, caption, () if zero else (2,), totals=1)]


def _resultant(forces: list[tuple[str, Exact, Exact]], check: MemberCheck) -> tuple[Exact, Exact, Exact]:
    place = {joint.name: joint for joint in check.truss.joints}
    fx, fy, moment = ZERO, ZERO, ZERO
    for joint, x, y in forces:
        fx, fy = fx + x, fy + y
        moment = moment + place[joint].x * y - place[joint].y * x
    return fx, fy, moment


# --- cross-check, cautions, revisions ---------------------------------------------------------------------


def cross_check(check: MemberCheck) -> list[Block]:
    """Return what the independent route says of itself."""
    count = count_and_rank(check)
    statics = check.statics
    if not statics.determinate:
        joints = "not closed exactly: the truss is statically indeterminate"
    elif check.residuals:
        joints = f"NOT in equilibrium: {listed(check.residuals)}"
    else:
        forces = "loads, reactions and all member forces, those found above among them"
        joints = f"{forces}, sum to exactly zero at each of the {statics.joints} joints"
    items: list[tuple[str, tuple[Inline, ...]]] = [
        ("Count and rank", (Run(count),)),
        ("Joints", (Run(joints),)),
        *shared_redundancy(check),
        ("No force in this case", (Run(_idle(check)),)),
        (
            "Stiffness route",
            (Run("imbalance at the worst joint "), noise(check.stiffness_residual), Run(" of the largest force")),
        ),
        ("Condition", (Run("estimated condition number "), condition_size(check.condition))),
        *_not_checked(check),
        ("Independence", (Run(INDEPENDENCE),)),
    ]
    return [Heading(2, "Cross-check"), Items(tuple(items))]


def count_and_rank(check: MemberCheck) -> str:
    """Return the count of members, reactions and joints, the rank, and what follows."""
    statics = check.statics
    count = f"{statics.members} members + {statics.reactions} reactions against 2 × {statics.joints} joints"
    count += f", rank {statics.rank}"
    if statics.determinate:
        count += ": stable and statically determinate"
    else:
        degree = statics.members + statics.reactions - statics.rank
        count += f": stable, statically indeterminate to degree {degree}"
        if check.redundancy:
            count += f" ({check.redundancy.external} by the supports, {check.redundancy.internal} by the members)"
    return count


def _not_checked(check: MemberCheck) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return the members the scope counts without naming them."""
    names = unchecked(check)
    return [("Members not checked", (Run(listed(map(bar, names))),))] if len(names) > MOST_NAMED else []


def shared_redundancy(check: MemberCheck) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return who shares the redundancy of an indeterminate truss."""
    if not check.redundancy:
        return []
    groups = "; ".join(listed(map(bar, group)) for group in check.redundancy.sharing)
    return [("Not decided by statics", (Run(groups),))]


def _idle(check: MemberCheck) -> str:
    """Return the members without force, by the rule that shows it."""
    by_reason: dict[str, list[str]] = {}
    for name, reason in check.zero_members.items():
        by_reason.setdefault(reason, []).append(bar(name))
    return "; ".join(f"{listed(names)} ({reason})" for reason, names in by_reason.items()) or "none"


def noise(size: float) -> Inline:
    """Return a float's noise as a bound that is the same on every machine."""
    if size < 1e-12:  # noqa: PLR2004 - what double precision leaves
        return Power("", -12, below=True)
    return scientific(size, 1) if size < float("inf") else Run("not a number")


def condition_size(condition: float) -> Inline:
    """Return a condition estimate as it is printed."""
    if not condition < float("inf"):
        return Run("infinite")
    return scientific(condition, 1) if condition >= 1000 else Decimals(f"{condition:.0f}")  # noqa: PLR2004


def cautions(texts: Sequence[str] = CAUTIONS) -> list[Block]:
    """Return what every user of the sheet has to be told."""
    return [Heading(2, "Cautions"), *(Paragraph((Run(text),), "caution") for text in texts)]


def revisions(project: Project) -> list[Block]:
    """Return the revision table: this revision, and room for the reason."""
    heads = ("revision", "date", "prepared", "checked", "approved", "reason")
    row = tuple(Run(getattr(project, head, "")) for head in heads)
    return [Heading(2, "Revisions"), Table(tuple(Column(head) for head in heads), (row,))]


__all__ = [
    "basis",
    "cautions",
    "cross_check",
    "digest",
    "loads",
    "program",
    "reactions",
    "revisions",
]
