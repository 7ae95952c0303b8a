"""What a reader needs to repeat the check: basis, input, loads, reactions, cross-check, cautions, revisions."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from importlib.metadata import version

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
    Listing,
    Paragraph,
    Power,
    Run,
    Table,
)
from trusscalc.sheet.compact import ends_within, is_blank, together, without_columns
from trusscalc.sheet.derivation import RESULT_COLUMNS, Writer, tension_of, without_sense
from trusscalc.sheet.front import MOST_NAMED, unchecked
from trusscalc.sheet.values import decimal_text, is_readable, printed, scientific
from trusscalc.sheet.words import bar, capital, counted, listed

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
WELL_CONDITIONED = "what double precision keeps of a well-conditioned truss; more is a mistake, not a tolerance"
ILL_CONDITIONED = "ten times the rounding error to be expected of the numeric route at the condition told below"

INPUT = "Input"
NOT_VERBATIM = (
    "The truss file is not printed word by word: these tables, with the loads and the title block, say all that it "
    "states of this load case. Its digest stands under Basis."
)
UNGROUPED = "members"
"""What members are called that were stated without groups."""

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


def basis(check: MemberCheck, truss_text: str, places: int) -> list[Block]:
    """Return assumptions, conventions, rounding, tolerance, program and digest."""
    rows = tuple((Run(str(place)), Run(a), Run(b)) for place, (a, b) in enumerate(ASSUMPTIONS, 1))
    table = Table((Column("no.", "right"), Column("assumption"), Column("consequence where it fails")), rows)
    length, force = check.truss.length, check.truss.force
    units = f"lengths in {length}, forces in {force}, moments in {force} {length}"
    rounding = f"round half to even, once, from the exact value, to {places} decimal places; {NEVER_FED_ON}"
    reason = WELL_CONDITIONED if check.tolerance <= TOLERANCE else ILL_CONDITIONED
    tolerance = (
        Run("the two routes agree within "),
        scientific(check.tolerance, 2),
        Run(f" of the largest force: {reason}"),
    )
    items: list[tuple[str, tuple[Inline, ...]]] = [
        ("Units", (Run(units),)),
        ("Signs", (Run(SIGNS),)),
        ("Symbols", (Run(SYMBOLS),)),
        ("Rounding", (Run(rounding),)),
        ("Tolerance", tolerance),
        ("Method", (Run(METHOD),)),
        ("Codes", (Run("none applied: loads and combinations are taken as stated"),)),
        ("Program", (Run(program()),)),
        ("Input digest", (Run(f"SHA-256 of the truss file: {digest(truss_text)}"),)),
    ]
    return [Heading(2, "Basis"), table, Items(tuple(items))]


# --- input ------------------------------------------------------------------------------------------------


def input_echo(writer: Writer, project: Project, truss_text: str, *, verbatim: bool = True) -> list[Block]:
    """Return joints, members with their lengths, supports, other names, and, ``verbatim``, the truss file itself."""
    check = writer.check
    truss = check.truss
    other = project.names
    joints = tuple(
        (Run(joint.name), *_both(writer, joint.x), *_both(writer, joint.y), Run(other.get(joint.name, "")))
        for joint in truss.joints
    )
    bars = writer.teller.structure.bars
    members = []
    for member in truss.members:
        length = bars[member.name].length
        others = next((other[n] for n in (member.name, f"{member.end}-{member.start}") if n in other), "")
        cells = (Run(bar(member.name)), Run(member.group), *_both(writer, length), Run(others))
        members.append((*cells, Run(_behaviour(check, member.name))))
    unit = truss.length
    joint_table = Table(
        (
            Column("joint"),
            Column(f"x exact, {unit}", "right"),
            Column("decimal", "right"),
            Column(f"y exact, {unit}", "right"),
            Column("decimal", "right"),
            Column("name elsewhere"),
        ),
        joints,
        f"{capital(counted(len(joints), 'joint'))}.",
    )
    member_table = Table(
        (
            Column("member"),
            Column("group"),
            Column(f"length exact, {unit}", "right"),
            Column("decimal", "right"),
            Column("name elsewhere"),
            Column("stated behaviour"),
        ),
        together(members),
        f"{capital(counted(len(members), 'member'))}; lengths calculated from the joints.",
    )
    stated = [part for joint in truss.joints for part in (joint.x, joint.y)]
    directions = [part for link in truss.links for part in (link.dx, link.dy)]
    forces = [part for load in check.case.loads for part in (load.fx, load.fy)]
    whole = all(map(is_readable, (*stated, *directions, *forces)))
    blocks: list[Block] = [
        Heading(2, INPUT),
        _close(joint_table, stated, writer.places),
        _close(member_table, [bars[member.name].length for member in truss.members], writer.places),
        _supports(check),
    ]
    if verbatim or not whole:
        blocks.append(Listing(truss_text, "The truss file, as read"))
    else:
        blocks.append(Paragraph((Run(NOT_VERBATIM),), "note"))
    return blocks


def _close(table: Table, values: Sequence[Exact], places: int) -> Table:
    """Return a table without what tells nothing: empty columns, one group for all, decimals of short decimals."""
    exact = all(ends_within(value, places) for value in values)

    def idle(place: int, cells: Sequence[Inline | None]) -> bool:
        head = table.columns[place].head
        ungrouped = head == "group" and set(cells) == {Run(UNGROUPED)}
        return is_blank(cells) or ungrouped or (head == "decimal" and exact)

    return without_columns(table, idle)


def _both(writer: Writer, value: Exact) -> tuple[Inline, Inline]:
    return printed(value, writer.check.case), _near(writer.check.value(value), writer.places)


def _near(value: Exact, places: int) -> Decimals:
    return Decimals(decimal_text(value, places))


def _behaviour(check: MemberCheck, name: str) -> str:
    listed_names = {check.truss.member(other).name for other in check.truss.tension_only}
    return "tension only" if name in listed_names else ""


def _supports(check: MemberCheck) -> Table:
    rows = []
    for support in check.truss.supports:
        kind = {"pin": "pin", "roller": "roller"}.get(support.kind, counted(len(support.links), "link"))
        for place, link in enumerate(support.links):
            head = (Run(support.joint), Run(kind)) if place == 0 else (None, None)
            uplift = "no uplift" if place == 0 and support.joint in check.truss.no_uplift else ""
            direction = (printed(link.dx, check.case), printed(link.dy, check.case))
            rows.append((*head, Run(bar(link.name)), *direction, Run(uplift)))
    columns = (
        Column("support"),
        Column("kind"),
        Column("reaction"),
        Column("direction x", "right"),
        Column("direction y", "right"),
        Column("stated behaviour"),
    )
    return Table(columns, tuple(rows), "A reaction is positive when it acts on the truss along its direction.")


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


def _force_cells(writer: Writer, fx: Exact, fy: Exact, symbolic: bool) -> tuple[Inline, ...]:
    case = writer.check.case
    exact = (printed(fx, case), printed(fy, case))
    if not symbolic:
        return exact
    return (*exact, _near(case.value(fx), writer.places), _near(case.value(fy), writer.places))


def reactions(writer: Writer, *, steps: bool = True) -> list[Block]:
    """Return the reactions and the proof that they balance the loads; ``steps`` says whether it may point at them."""
    check = writer.check
    rows, strong = [], []
    for place, (name, found) in enumerate(check.reactions.items()):
        cells = writer.result_cells(name, found.exact, found)
        source = f"step {found.steps[-1]}" if found.steps else "not decided by statics"
        if found.steps and not steps:
            source = writer.teller.found_by(check.steps[found.steps[-1] - 1])
        rows.append((Run(bar(name)), Run(source), *cells))
        if found.verdict == "differs":
            strong.append(place)
    columns, rows = without_sense((Column("reaction"), Column("derived by"), *RESULT_COLUMNS), rows)
    table = Table(columns, tuple(rows), f"Forces on the truss in {check.truss.force}.", tuple(strong))
    return [Heading(2, "Reactions"), table, *_balance(writer)]


def _balance(writer: Writer) -> list[Block]:
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
        (Run(word), *(printed(value, check.case) for value in values))
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
        *_shared(check),
        ("No force in this case", (Run(_idle(check)),)),
        (
            "Stiffness route",
            (Run("imbalance at the worst joint "), _small(check.stiffness_residual), Run(" of the largest force")),
        ),
        ("Condition", (Run("estimated condition number "), _size(check.condition))),
        *_not_checked(check),
        ("Independence", (Run("the two routes share no arithmetic; they share geometry, supports and loads"),)),
    ]
    return [Heading(2, "Cross-check"), Items(tuple(items))]


def _not_checked(check: MemberCheck) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return the members the scope counts without naming them."""
    names = unchecked(check)
    return [("Members not checked", (Run(listed(map(bar, names))),))] if len(names) > MOST_NAMED else []


def _shared(check: MemberCheck) -> list[tuple[str, tuple[Inline, ...]]]:
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


def _small(size: float) -> Inline:
    """Return a float's noise as a bound that is the same on every machine."""
    if size < 1e-12:  # noqa: PLR2004 - what double precision leaves
        return Power("", -12, below=True)
    return scientific(size, 1) if size < float("inf") else Run("not a number")


def _size(condition: float) -> Inline:
    if not condition < float("inf"):
        return Run("infinite")
    return scientific(condition, 1) if condition >= 1000 else Decimals(f"{condition:.0f}")  # noqa: PLR2004


def cautions() -> list[Block]:
    """Return what every user of the sheet has to be told."""
    return [Heading(2, "Cautions"), *(Paragraph((Run(text),), "caution") for text in CAUTIONS)]


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
    "input_echo",
    "loads",
    "program",
    "reactions",
    "revisions",
]
