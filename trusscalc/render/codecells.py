"""The three code cells of a filed notebook: its truss file, what is derived from it again, and the comparison.

What they hold is Python that an engineer can read; every piece of somebody's free text in it is a literal.
"""

from __future__ import annotations

from typing import Final

from trusscalc.sheet.blocks import Origin

PLACES: Final = 3
"""Decimal places of a check shown in a notebook without further words."""
IMPORTS: Final = {
    "check": "check_members, reads",
    "envelope": "envelope, governing_checks, reads",
    "influence": "influence_line, reads",
}


def file_source(origin: Origin) -> str:
    """Return the cell that holds the truss file."""
    literal = as_literal(origin.truss_text)
    imports = f"from trusscalc import {IMPORTS[origin.task]}\n\n"
    if origin.task == "check":
        return f"{imports}truss_file = reads({literal})"
    return f"{imports}truss_text = {literal}\ntruss_file = reads(truss_text)"


def result_source(origin: Origin) -> str:
    """Return the cell that derives everything again and shows the summary."""
    if origin.task == "envelope":
        return _envelope_source(origin)
    if origin.task == "influence":
        return _influence_source(origin)
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


def proof_output(origin: Origin) -> str:
    """Return what the comparing cell prints when all is as stated."""
    values = f"{len(origin.stated)} value{'s' * (len(origin.stated) != 1)}"
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
