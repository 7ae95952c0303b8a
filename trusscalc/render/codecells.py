"""The three code cells of a filed notebook: its input, what is derived from it again, and the comparison of both.

What they hold is Python that an engineer can read; every piece of somebody's free text in it is a literal.
"""

from __future__ import annotations

from typing import Final

from trusscalc.sheet.blocks import Origin, SubmittedTable

PLACES: Final = 3
"""Decimal places of a check shown in a notebook without further words."""
IMPORTS: Final = {
    "check": "check_members, reads",
    "envelope": "envelope, governing_checks, reads",
    "influence": "influence_line, reads",
    "comparison": "compare_submitted, read_submitted, reads",
}


def file_source(origin: Origin) -> str:
    """Return the cell that holds the truss file."""
    literal = as_literal(origin.truss_text)
    imports = f"from trusscalc import {IMPORTS[origin.task]}\n\n"
    if origin.task == "check":
        return f"{imports}truss_file = reads({literal})"
    table = f"\nsubmitted_table = {as_literal(origin.submitted.content)}" if origin.submitted else ""
    return f"{imports}truss_text = {literal}\ntruss_file = reads(truss_text){table}"


def result_source(origin: Origin) -> str:
    """Return the cell that derives everything again and shows the summary."""
    if origin.task == "envelope":
        return _envelope_source(origin)
    if origin.task == "influence":
        return _influence_source(origin)
    if origin.submitted is not None:
        return _comparison_source(origin, origin.submitted)
    return _check_source(origin)


def _envelope_source(origin: Origin) -> str:
    names = "".join(f"    {name!r},\n" for name in origin.members)
    detail = f", detail={origin.detail!r}" if origin.detail != "members" else ""
    return (
        f"members = [\n{names}]\n"
        "found = envelope(truss_file, members)\n"
        "checks = governing_checks(found)\n"
        f"found.sheet(checks=checks, truss_text=truss_text, places={origin.places}, drawings=False{detail})"
    )


def _influence_source(origin: Origin) -> str:
    leaning = f", prefer={origin.prefer!r}" if origin.prefer else ""
    lines = [f"line = influence_line(truss_file.truss, {origin.target!r}, truss_file.chain({origin.along!r}){leaning})"]
    wishes = ""
    if origin.train:
        lines += ["", f"train = {origin.train!r}", "trains = truss_file.train(train)"]
        wishes = "trains=trains, train=train, "
    lines.append(f"sheet = line.sheet({wishes}truss_text=truss_text, places={origin.places}, drawings=False)")
    return "\n".join([*lines, "sheet"])


def _comparison_source(origin: Origin, table: SubmittedTable) -> str:
    names = "".join(f"    {name!r},\n" for name in origin.members)
    options = {
        "columns": dict(table.columns),
        "names": None if table.renamed is None else dict(table.renamed),
        "convention": table.convention,
        "unit": table.unit,
        "case": table.case,
        "decimal": table.decimal,
        "others": table.others,
    }
    reading = "".join(f"    {key!r}: {value!r},\n" for key, value in options.items() if value)
    asked = f"members=members, relative={table.relative!r}, absolute={table.absolute!r}"
    lines = [f"members = [\n{names}]", f"reading = {{\n{reading}}}"]
    source = f"kept_again({table.kind!r}, submitted_table, {table.name!r})"
    if table.blind == "no":
        wanted = f"truss_file, submitted, {origin.case!r}, theirs={table.theirs!r}, {asked}"
        lines.append(f"submitted = read_submitted({source}, truss_file.truss, **reading)")
        lines.append(f"comparison = compare_submitted(\n    {wanted}\n)")
    else:
        lines += _frozen_lines(origin, table, source, asked)
    wishes = f"truss_text=truss_text, places={origin.places}, drawings=False"
    wishes += f", derive={list(table.derived)!r}" if table.derived else ""
    if origin.cuts:
        cuts = ", ".join(f"{name!r}: truss_file.truss.cut(keep={list(joints)!r})" for name, joints in origin.cuts)
        wishes += f", cuts={{{cuts}}}"
    wishes += f", prefer={origin.prefer!r}" if origin.prefer else ""
    wishes += ", verbatim=True" if origin.detail == "all" else ""
    lines += [f"sheet = comparison.sheet({wishes})", "sheet"]
    return "\n".join(["from trusscalc.submitted.kept import kept_again\n", *lines])


def _frozen_lines(origin: Origin, table: SubmittedTable, source: str, asked: str) -> list[str]:
    """Return the lines that compare in blind mode, in the order in which it was done."""
    frozen = f"frozen(truss_file, {origin.case!r}, {asked})"
    lines = ["from trusscalc.blind import frozen, reveal\n"]
    if table.frozen_members:
        checked = f"check_members(truss_file.truss, truss_file.case({origin.case!r}), {list(table.frozen_members)!r})"
        lines = ["from trusscalc import check_members", *lines, f"check = {checked}"]
        frozen = f"frozen(check, {asked})"
    noted = ", written_down=ours.digest" if table.written_down else ""
    lines.append(f"ours = {frozen}")
    if table.blind == "in order":
        return [*lines, f"comparison = reveal(ours, {source}, theirs={table.theirs!r}{noted}, **reading)"]
    read = f"read_submitted({source}, truss_file.truss, **reading)"
    return [*lines, f"submitted = {read}", f"comparison = reveal(ours, submitted, theirs={table.theirs!r}{noted})"]


def _check_source(origin: Origin) -> str:
    names = "".join(f"    {name!r},\n" for name in origin.members)
    show = "check" if origin.places == PLACES else f"check.sheet(places={origin.places}, drawings=False)"
    wishes = ""
    if origin.cuts:
        kept = ", ".join(f"{name!r}: truss_file.truss.cut(keep={list(joints)!r})" for name, joints in origin.cuts)
        wishes += f", cuts={{{kept}}}"
    if origin.prefer:
        wishes += f", prefer={origin.prefer!r}"
    return (
        f"members = [\n{names}]\n"
        f"case = truss_file.case({origin.case!r})\n"
        f"check = check_members(truss_file.truss, case, members{wishes})\n"
        f"{show}"
    )


def proof_source(origin: Origin) -> str:
    """Return the cell that compares what was derived again with what the sheet states."""
    if origin.submitted is not None:
        return _proof_of_comparison(origin)
    if origin.task != "check":
        return _proof_of_loads(origin)
    rows = "".join(f"    {name!r}: {value!r},\n" for name, value in origin.stated)
    return (
        "from trusscalc.exacttext import to_text\n"
        "from trusscalc.statics.matrix import solve\n\n"
        f"stated = {{\n{rows}}}\n"
        "# all joint equations at once, then the steps: the same values by either way\n"
        "derived = {name: to_text(force) for name, force in solve(truss_file.truss, case).forces.items()}\n"
        "derived |= {name: to_text(force) for step in check.steps for name, force in step.results.items()}\n"
        "differing = [name for name in stated if derived.get(name) != stated[name]]\n"
        'assert not differing, f"derived again, a value differs from what this sheet states: {differing}"\n'
        f'assert check.agreed is {origin.agreed}, "derived again, the verdict differs from what this sheet states"\n'
        f"print({proof_output(origin)!r})"
    )


def _proof_of_loads(origin: Origin) -> str:
    """Return the same of an envelope or an influence line."""
    rows = "".join(f"    {name!r}: {value!r},\n" for name, value in origin.stated)
    if origin.task == "envelope":
        told = (
            "# superposition, which every hand check of a governing state has to equal\n"
            "derived = {}\n"
            "for name, each in found.members.items():\n"
            '    derived[f"{name} largest"] = to_text(each.max.value)\n'
            '    derived[f"{name} least"] = to_text(each.min.value)\n'
        )
        agreed = "found.agreed and all(check.agreed for check in checks)"
    else:
        told = (
            "# the ordinates, each by hand and by the equilibrium of all joints\n"
            "derived = dict(zip(line.chain.joints, map(to_text, line.ordinates)))\n"
        )
        told += (
            "for word, extreme in zip(('largest', 'least'), extremes(line, trains)):\n"
            "    derived[f'train, {word}'] = to_text(extreme.value)\n"
            if origin.train
            else ""
        )
        agreed = "sheet.origin.agreed"
    travel = "from trusscalc.travel import extremes\n" if origin.train else ""
    return (
        f"from trusscalc.exacttext import to_text\n{travel}\n"
        f"stated = {{\n{rows}}}\n"
        f"{told}"
        "differing = [name for name in stated if derived.get(name) != stated[name]]\n"
        'assert not differing, f"derived again, a value differs from what this sheet states: {differing}"\n'
        f'assert ({agreed}) is {origin.agreed}, "derived again, the verdict differs from what this sheet states"\n'
        f"print({proof_output(origin)!r})"
    )


def _proof_of_comparison(origin: Origin) -> str:
    """Return the same of a comparison: our exact values, and every verdict."""
    rows = "".join(f"    {name!r}: {value!r},\n" for name, value in origin.stated)
    return (
        "from trusscalc.exacttext import to_text\n\n"
        f"stated = {{\n{rows}}}\n"
        "items = {**comparison.members, **comparison.reactions}\n"
        "derived = {name: to_text(item.exact) for name, item in items.items() if item.exact is not None}\n"
        'derived |= {f"{name}, verdict": item.verdict for name, item in items.items()}\n'
        "differing = [name for name in stated if derived.get(name) != stated[name]]\n"
        'assert not differing, f"derived again, a value differs from what this sheet states: {differing}"\n'
        f'assert sheet.origin.agreed is {origin.agreed}, "derived again, the verdict differs from what is stated"\n'
        f"print({proof_output(origin)!r})"
    )


def proof_output(origin: Origin) -> str:
    """Return what the comparing cell prints when all is as stated."""
    values = f"{len(origin.stated)} value{'s' * (len(origin.stated) != 1)}"
    if origin.submitted is not None:
        values = f"{len(origin.stated)} values and verdicts"
        agreement = f"the submitted results {'agree' if origin.agreed else 'do NOT agree, as the sheet says'}"
        return f"{values} derived again, equal to what this sheet states; {agreement}"
    agreement = "the two routes agree" if origin.agreed else "the two routes do NOT agree, as the sheet says"
    return f"{values} derived again, equal to what this sheet states; {agreement}"


def as_literal(text: str) -> str:
    r"""Return a Python literal of a text, readable where that is safe.

    Examples
    --------
    >>> print(as_literal("format = 1\n"))
    '''format = 1
    '''
    >>> as_literal("a = 'b'''c'")
    '"a = \'b\'\'\'c\'"'
    """
    if "'''" not in text and "\\" not in text and "\r" not in text and not text.startswith("'") and text[-1:] != "'":
        return f"'''{text}'''"
    if text.count("\n") < 2:  # noqa: PLR2004 - one line reads best as one
        return repr(text)
    return "(\n" + "".join(f"    {line!r}\n" for line in text.splitlines(keepends=True)) + ")"
