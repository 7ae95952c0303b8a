"""The first sheet: title block, conclusion, summary table, flags, scope. What has to be seen first stands first."""

from __future__ import annotations

from trusscalc.exact import ZERO, Exact
from trusscalc.membercheck import ForceCheck, MemberCheck
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
    Seal,
    Table,
    TitleBlock,
)
from trusscalc.sheet.compact import without_columns
from trusscalc.sheet.derivation import RESULT_COLUMNS, Writer, sense, tension_of
from trusscalc.sheet.detail import Detail, shown
from trusscalc.sheet.values import DIGITS, bound, decimal_text, difference, is_readable, printed, scientific
from trusscalc.sheet.words import bar, capital, counted, listed, number_word
from trusscalc.truss import Truss

TITLE = "Independent check of truss member forces"
MOST_NAMED = 24
"""More members than this that were not checked are listed further back, so that the first sheet keeps its drawing."""

LIMIT = (
    "both routes use the same geometry, supports and loads: an error there passes both. Compare the input with the "
    "drawings."
)
NOT_COVERED = "strength, buckling, connections, fatigue, bracing, foundations, deflection"
NOT_DERIVED = (
    "none on this sheet: forces and verdicts are stated, and how they were derived is not shown. By itself it is no "
    "hand check that can be followed; a sheet with derivations comes from the same truss file"
)
FURTHER = "Further derivations"
FIELDS = (
    "project",
    "structure",
    "location",
    "contract",
    "calculation",
    "revision",
    "date",
    "prepared",
    "checked",
    "approved",
)


def title_block(truss: Truss, project: Project) -> TitleBlock:
    """Return the title block; the structure's name comes from the truss when the project has none."""
    entries = {field: getattr(project, field) for field in FIELDS}
    entries["structure"] = entries["structure"] or truss.title
    return TitleBlock(tuple((capital(field), entries[field]) for field in FIELDS))


def opening(check: MemberCheck, project: Project) -> list[Block]:
    """Return title and the line that says what loads these are."""
    text = f"Load case “{check.case.name}”: {loads_words(project)}. Forces in {check.truss.force}, tension positive."
    return [Heading(1, TITLE), Paragraph((Run(text),)), *_symbol_values(check)]


def loads_words(project: Project) -> str:
    """Return whether the loads are service or factored ones, and self-weight is in or out."""
    loads = {"": "service or factored not stated", "service": "service loads", "factored": "factored loads"}
    weight = f"self-weight {project.self_weight}" if project.self_weight else "self-weight in or out not stated"
    return f"{loads[project.basis]}, {weight}"


def _symbol_values(check: MemberCheck) -> list[Block]:
    used = {name for load in check.case.loads for part in (load.fx, load.fy) for name in part.symbols}
    dimensions = {name for name, _ in check.truss.symbols}
    used |= dimensions
    told = [(name, value) for name, value in check.case.symbols if name in used]
    if not told:
        return []
    whose = "of dimensions, which are positive, and of loads" if dimensions else "of the loads"
    content: list[Inline] = [
        Run(f"Exact values hold the symbols {whose}; drawings, decimals, senses and verdicts are at "),
    ]
    for place, (name, value) in enumerate(told):
        content += [Run(f"{', ' if place else ''}{name} = "), printed(value, check.case)]
    content.append(Run("."))
    if _has_coefficients(check):
        content.append(Run(" Formulas were compared with the stiffness route coefficient by coefficient as well."))
    tried = max((len(item.samples) for item in (*check.members.values(), *check.reactions.values())), default=0)
    if tried > 1:
        text = f" Formulas were compared with the stiffness route at {counted(tried, 'set')} of values."
        content.append(Run(text))
    return [Paragraph(tuple(content)), *_turning(check)]


def _turning(check: MemberCheck) -> list[Block]:
    """Return where the stability of the truss, or the sense of a force, depends on the symbols' values."""
    statements = []
    if check.unstable_where:
        zero = " or ".join(f"{text} = 0" for text in check.unstable_where)
        statements.append(f"The truss is a mechanism where {zero}.")
    turning = [bar(name) for name, item in check.members.items() if item.sign_depends]
    if turning:
        statements.append(f"Whether {listed(turning)} pull or push depends on the values of the symbols.")
    return [Paragraph((Run(" ".join(statements)),))] if statements else []


def _has_coefficients(check: MemberCheck) -> bool:
    return any(found.coefficients for found in (*check.members.values(), *check.reactions.values()))


def summary(writer: Writer, *, steps: bool = True) -> list[Block]:
    """Return conclusion, table and notes: the sheet in short; ``steps`` says whether it may point at them."""
    check = writer.check
    return [Paragraph(tuple(_conclusion(writer)), "conclusion"), summary_table(writer, steps=steps), *_notes(check)]


def summary_table(writer: Writer, *, steps: bool = True) -> Table:
    """Return one row for each member asked for."""
    check = writer.check
    by_number = {step.number: step for step in check.steps}
    rows, strong = [], []
    for place, (name, found) in enumerate(check.members.items()):
        step = by_number[found.steps[-1]] if found.steps else None
        source = Run(writer.teller.found_by(step)) if step else Run("not decided by statics")
        rows.append(
            (
                Run(bar(name)),
                source,
                Run(str(step.number)) if step else None,
                *writer.result_cells(name, found.exact, found),
            )
        )
        if found.verdict == "differs":
            strong.append(place)
    columns = (Column("member"), Column("derived by"), Column("step", "right"), *RESULT_COLUMNS)
    table = Table(columns, tuple(rows), strong_rows=tuple(strong))
    return table if steps else without_columns(table, lambda place, _: columns[place].head in ("derived by", "step"))


# --- conclusion -------------------------------------------------------------------------------------------


def _conclusion(writer: Writer) -> list[Inline]:
    check = writer.check
    bad = [*_disagreements(check), *_flags(writer)]
    content: list[Inline] = []
    for sentence in bad:
        content.append(Run(sentence, "strong"))
        content.append(Run(" "))
    good = [name for name, found in check.members.items() if found.verdict == "agrees"]
    if good:
        which = _which(len(good), len(check.members))
        many = len(good) > 1
        content.append(
            Run(
                f"The force{'s' if many else ''} of {which}, derived by sections and joints from the loads and "
                f"reactions, agree{'' if many else 's'} with a separate stiffness solution of the whole truss. "
            )
        )
        content.append(Run(_largest(writer, good)))
    if not any(text.startswith("Flag:") for text in bad):
        content.append(Run("No member or bearing is flagged."))
    return content


def _which(agreeing: int, total: int) -> str:
    """Return how the members that agree are called."""
    if agreeing == total:
        return "the member below" if total == 1 else f"the {counted(total, 'member')} below"
    return "the other member" if agreeing == 1 else f"the {counted(agreeing, 'other member')}"


def _disagreements(check: MemberCheck) -> list[str]:
    told = []
    for what, found in (("member", check.members), ("reaction", check.reactions)):
        for verdict in ("differs", "undecided"):
            names = [name for name, item in found.items() if item.verdict == verdict]
            if names:
                told.append(_one_verdict(check, what, verdict, names, found))
    if check.residuals:
        joints = listed(check.residuals)
        told.append(
            f"Not in equilibrium with the values found by hand: joint{'s' * (len(check.residuals) > 1)} {joints}."
        )
    if not check.agreed and not told:
        told.append("The check did not agree.")
    return told


def _one_verdict(check: MemberCheck, what: str, verdict: str, names: list[str], found: object) -> str:
    items: dict[str, ForceCheck] = dict(found)  # type: ignore[call-overload]
    several = len(names) > 1
    verb = {"differs": "differ" if several else "differs", "undecided": "are undecided" if several else "is undecided"}
    details = []
    for name in names:
        item = items[name]
        apart = ""
        if verdict == "differs" and item.difference is not None:
            text = difference(item.difference, check.tolerance * check.largest_force, 3)
            if isinstance(text, Decimals):
                apart = f" by {text.text.replace('-', '−')} {check.truss.force}"
        details.append(f"{bar(name)}{apart}")
    count = capital(counted(len(names), what))
    whole = f" of {counted(len(items), what)}" if len(items) > 1 else ""
    if whole:
        count = capital(number_word(len(names)))
        whole = f" of {counted(len(items), what)}"
    return f"{count}{whole} {verb[verdict]}: {listed(details)}."


def _flags(writer: Writer) -> list[str]:
    check = writer.check
    told = []
    pressed = [f"{bar(name)} is in compression" for name in check.truss.tension_only if _sense(check, name) == "C"]
    unseen = [bar(name) for name in check.truss.tension_only if _sense(check, name) is None]
    if pressed:
        told.append(f"Flag: stated to take tension only, but {listed(pressed)}.")
    lifted = [joint for joint in check.truss.no_uplift if _pulls_down(check, joint)]
    if lifted:
        told.append(f"Flag: stated not to take uplift, but the bearing at {listed(lifted)} would have to pull down.")
    if unseen:
        told.append(f"Flag: stated to take tension only and not checked here: {listed(unseen)}.")
    if _is_rounded(check):
        told.append(
            "Flag: angle rounded. An angle in the input has no sine and cosine in square roots; they were rounded "
            "once to 30 digits, and all that follows is exact from there on."
        )
    return told


def _sense(check: MemberCheck, name: str) -> str | None:
    name = check.truss.member(name).name
    if name in check.members:
        return check.members[name].sense
    for step in check.steps:
        if name in step.results:
            return sense(check.case.value(step.results[name]))
    return "0" if name in check.zero_members else None


def _pulls_down(check: MemberCheck, joint: str) -> bool:
    """Return whether the reactions at a joint together pull it down."""
    total: Exact = ZERO
    for link in check.truss.links:
        if link.joint == joint:
            total = total + (tension_of(check, link.name) or ZERO) * link.dy
    return check.case.value(total).sign() < 0


def _is_rounded(check: MemberCheck) -> bool:
    found = [*check.members.values(), *check.reactions.values()]
    return any(item.exactness == "angle rounded" for item in found)


def _largest(writer: Writer, names: list[str]) -> str:
    check = writer.check
    told = []
    for letter, word in (("C", "compression"), ("T", "tension")):
        own = [name for name in names if check.members[name].sense == letter]
        if own:
            most = max(own, key=lambda name: abs(check.members[name].decimal or 0.0))
            size = decimal_text(check.case.value(check.members[most].exact or ZERO), writer.places).removeprefix("-")
            told.append(f"Largest {word}: {size} {check.truss.force} in {bar(most)}.")
    return "".join(f"{text} " for text in told)


def _notes(check: MemberCheck) -> list[Block]:
    force = check.truss.force
    content: list[Inline] = [
        Run(
            f"Forces in {force}. T tension, C compression, 0 no force. Decimals are rounded once, from the exact "
            f"value, half to even. "
        ),
    ]
    slack = check.tolerance * check.largest_force
    if 0 < slack < float("inf"):
        content += [
            Run("Agreement: difference not above "),
            scientific(slack, 2),
            Run(f" {force}, that is "),
            scientific(check.tolerance, 2),
            Run(" of the largest force; a difference below "),
            Power("", bound(slack).exponent),
            Run(" is not told digit by digit. "),
        ]
    if check.statics.determinate and not check.residuals:
        content.append(Run(f"Reactions and all {check.statics.joints} joints are in equilibrium exactly. "))
    if any(found.exact is not None and not is_readable(found.exact) for found in check.members.values()):
        content.append(Run(f"≈ marks a value too long to be read, given to {DIGITS} significant digits. "))
    rounded = [bar(name) for name, found in check.members.items() if found.exactness == "angle rounded"]
    if rounded:
        content.append(Run(f"Angle rounded, not exact: {listed(rounded)}."))
    notes: list[Block] = [Paragraph(tuple(content), "note")]
    reasons = [
        (bar(name), (Run(f"{found.verdict}: {found.reason}"),))
        for name, found in {**check.members, **check.reactions}.items()
        if found.reason
    ]
    return [*notes, Items(tuple(reasons))] if reasons else notes


# --- scope ------------------------------------------------------------------------------------------------


def unchecked(check: MemberCheck) -> list[str]:
    """Return the members no force is stated for."""
    checked = {name for name, found in check.members.items() if found.exact is not None}
    return [member.name for member in check.truss.members if member.name not in checked]


def scope(check: MemberCheck, detail: Detail = "members") -> list[Block]:
    """Return what was checked, what was not, and what no such check can see; with room to sign and to seal."""
    checked = [name for name, found in check.members.items() if found.exact is not None]
    rest = unchecked(check)
    told = ": " + listed(map(bar, rest)) if rest else ""
    if len(rest) > MOST_NAMED:
        told = ", listed under Cross-check"
    names = listed(map(bar, checked)) or "none"
    count = f"{len(checked)} of {len(check.truss.members)} members"
    balance = ", equilibrium of every joint" if check.statics.determinate else ""
    items = [
        (
            "Checked",
            f"axial force in {count} ({names}), all reactions{balance}; this load case only",
        ),
        (
            "Not checked",
            f"{counted(len(rest), 'member')}{told}; other load cases",
        ),
        ("Not covered", NOT_COVERED),
        *_derived(check, detail),
        ("Limit", LIMIT),
    ]
    return [Heading(2, "Scope"), Items(tuple((term, (Run(text),)) for term, text in items)), Seal()]


def _derived(check: MemberCheck, detail: Detail) -> list[tuple[str, str]]:
    """Return where derivations stand, unless all of them stand in the main part."""
    if detail == "summary":
        return [("Derivations", NOT_DERIVED)]
    steps = shown(check, detail)
    if not steps.further:
        return []
    text = f"of {listed(map(bar, steps.governing))} in the main part; of the others in the appendix “{FURTHER}”"
    return [("Derivations", text)]
