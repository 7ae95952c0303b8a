"""How much a sheet holds: three details, what governs, the appendix of graphic statics, and deriving it all again."""

from __future__ import annotations

import dataclasses
from collections.abc import Sequence
from pathlib import Path

import drawn_trusses
import pytest
import sheet_cases

from trusscalc.__main__ import main
from trusscalc.errors import InputError
from trusscalc.exact import rational
from trusscalc.exacttext import parse, to_text
from trusscalc.files import write
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.recheck import recheck
from trusscalc.render.html import html
from trusscalc.render.notebook import notebook
from trusscalc.render.text import text
from trusscalc.sheet.blocks import Block, Derivation, Heading, Items, Listing, Picture, Run, Sheet, Table
from trusscalc.sheet.compact import ends_within
from trusscalc.sheet.compose import compose
from trusscalc.sheet.detail import MOST_IN_FULL, governing, shown
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile


def pratt(members: object = "all") -> MemberCheck:
    """Return twelve panels with every member asked for, or some."""
    truss, case, _ = drawn_trusses.pratt(12)
    return check_members(truss, case, members)  # type: ignore[arg-type]


@pytest.fixture(scope="module")
def whole() -> MemberCheck:
    """Twelve panels, all 45 members."""
    return pratt()


def parts(blocks: Sequence[Block]) -> dict[str, list[int]]:
    """Return the numbers of the steps under each heading of the second level."""
    found: dict[str, list[int]] = {}
    head = ""
    for block in blocks:
        if isinstance(block, Heading) and block.level == 2:
            head = block.text
            found[head] = []
        elif isinstance(block, Derivation):
            found[head].append(int(block.heading.number))
    return found


def scope(sheet: Sheet) -> dict[str, str]:
    """Return what the scope says, by its terms."""
    items = next(block for block in sheet.blocks if isinstance(block, Items))
    return {term: "".join(run.text for run in content if isinstance(run, Run)) for term, content in items.items}


# --- what governs -----------------------------------------------------------------------------------------


def test_up_to_twelve_members_stand_in_the_main_part() -> None:
    """No appendix, nothing to be said in the scope."""
    truss, _, _ = drawn_trusses.pratt(12)
    names = [member.name for member in truss.members]
    check = pratt(names[:MOST_IN_FULL])
    sheet = compose(check, drawings=False)
    assert "Further derivations" not in parts(sheet.blocks)
    assert "Derivations" not in scope(sheet)
    assert sum(map(len, parts(sheet.blocks).values())) == len(check.steps)
    more = compose(pratt(names[: MOST_IN_FULL + 1]), drawings=False)
    assert "Further derivations" in parts(more.blocks)


def test_of_many_those_that_govern_come_first_and_none_is_lost(whole: MemberCheck) -> None:
    """Every step once; main part in order, complete in itself; the others after the revisions."""
    sheet = compose(whole, drawings=False)
    found = parts(sheet.blocks)
    heads = list(found)
    assert heads[-2:] == ["Revisions", "Further derivations"]
    main = found["Derivation of the reactions"] + found["Derivation of the members"]
    further = found["Further derivations"]
    assert sorted(main + further) == [step.number for step in whole.steps]
    assert main == sorted(main)
    assert further == sorted(further)
    chosen = governing(whole)
    assert len(chosen) == MOST_IN_FULL
    for name in chosen:
        assert set(whole.members[name].steps) <= set(main)
    for item in whole.reactions.values():
        assert set(item.steps) <= set(main)
    told = scope(sheet)["Derivations"]
    assert all(name.replace("-", "–") in told for name in chosen)


def test_the_largest_the_flagged_and_the_disagreeing_govern(whole: MemberCheck) -> None:
    """Found by hand from the list of forces; each asked for last, so that order alone would not take it."""
    forces = {name: item.decimal or 0.0 for name, item in whole.members.items()}
    largest, least = max(forces, key=forces.__getitem__), min(forces, key=forces.__getitem__)
    last = list(whole.members)[-3:]
    pressed = next(name for name in reversed(list(whole.members)) if forces[name] < 0 and name != least)
    extreme = {forces[largest], forces[least]}  # members as far loaded are left out, so that it is clear which is meant
    order = [n for n in whole.members if n not in {pressed, *last} and forces[n] not in extreme]
    members = {name: whole.members[name] for name in [*order, largest, least, pressed, *last]}
    wrong = dataclasses.replace(members[last[-1]], verdict="differs")
    joints = {joint.name: (joint.x, joint.y) for joint in whole.truss.joints}
    supports = {"L0": "pin", "L12": "roller"}
    flagged = Truss(joints, [member.name for member in whole.truss.members], supports, tension_only=[pressed])
    check = dataclasses.replace(whole, truss=flagged, members=members | {last[-1]: wrong})
    chosen = governing(check)
    assert {largest, least, pressed, last[-1]} <= set(chosen)
    assert [name for name in chosen if name in order] == order[: MOST_IN_FULL - 4]


def test_all_and_summary(whole: MemberCheck) -> None:
    """All in the main part with the file word by word; or none, and the scope says so."""
    every = compose(whole, drawings=False, detail="all")
    found = parts(every.blocks)
    assert "Further derivations" not in found
    assert len(found["Derivation of the reactions"] + found["Derivation of the members"]) == len(whole.steps)
    assert any(isinstance(block, Listing) for block in every.blocks)
    short = compose(whole, drawings=False, detail="summary")
    assert not any(isinstance(block, Derivation) for block in short.blocks)
    assert scope(short)["Derivations"].startswith("none on this sheet")
    written = text(short)
    heads = [column.head for block in short.summary if isinstance(block, Table) for column in block.columns]
    assert heads[:2] == ["member", "exact"]
    assert "step" not in written.split("Scope")[1]
    for item in (*whole.members.values(), *whole.reactions.values()):
        assert item.exact is not None
        assert f"{item.decimal:.3f}".replace("-", "−").replace("−0.000", "0.000") in written
    assert not shown(whole, "summary").main


def test_another_detail_is_refused() -> None:
    """With what there is to choose from."""
    with pytest.raises(InputError, match="choose members, all or summary"):
        compose(sheet_cases.roof(), detail="short")  # type: ignore[arg-type]


# --- the input echo ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", sorted(sheet_cases.ALL))
def test_the_tables_say_all_that_the_file_states(name: str) -> None:
    """Without the file word by word: every coordinate, member, group, support, load exactly, or else the file."""
    check = sheet_cases.ALL[name]()
    sheet = compose(check, sheet_cases.PROJECT if name == "warren" else None, drawings=False)
    if any(isinstance(block, Listing) for block in sheet.blocks):
        assert name == "rounded_angle"
        return
    tables = [block for block in sheet.blocks if isinstance(block, Table)]
    cells = [
        [getattr(c, "text", None) or (to_text(c.value) if hasattr(c, "value") else "") for c in row]  # type: ignore[union-attr]
        for table in tables
        for row in table.rows
    ]
    # rows that differ in their first cell only are one row, which lists these cells
    cells = [[name, *rest] for first, *rest in cells for name in names_in(first)]
    for joint in check.truss.joints:
        assert any(row[0] == joint.name and {to_text(joint.x), to_text(joint.y)} <= set(row) for row in cells)
    for member in check.truss.members:
        label = member.name.replace("-", "–").replace(".", ",")
        assert any(row[0] == label and (member.group in row or member.group in ("", "members")) for row in cells)
    for load in check.case.loads:
        assert any(row[:3] == [load.joint, to_text(load.fx), to_text(load.fy)] for row in cells)
    for link in check.truss.links:
        label = link.name.replace("-", "–").replace(".", ",")
        assert any(row[2:5] == [label, to_text(link.dx), to_text(link.dy)] for row in cells if len(row) > 4)


def names_in(cell: str) -> list[str]:
    """Return what a first cell lists: ``A, B and C, each``."""
    listed = cell.removesuffix(", each")
    if listed == cell:
        return [cell]
    *most, last = listed.split(", ")
    return [*most, *last.split(" and ")]


def test_decimals_are_left_out_only_where_they_say_nothing() -> None:
    """A whole number or short decimal needs no second column; a root or a third does."""
    assert ends_within(rational(5, 8), 3)
    assert not ends_within(rational(5, 16), 3)
    assert not ends_within(rational(1, 3), 12)
    assert not ends_within(parse("sqrt(2)"), 12)


# --- free bodies of reactions -----------------------------------------------------------------------------


def test_reactions_on_one_body_share_its_drawing() -> None:
    """Drawn once, with its first step; the others say where. With all, each has its own."""
    check = pratt(["U5-U6"])
    sheet = compose(check)
    steps = [block for block in sheet.blocks if isinstance(block, Derivation)]
    reactions = steps[: len(parts(sheet.blocks)["Derivation of the reactions"])]
    first, *others = reactions
    assert first.picture is not None
    assert others
    for step in others:
        assert step.picture is None
        assert text_of(step).endswith(f"Free body: step {first.heading.number}.")
    assert all(step.picture for step in steps if step not in others)
    every = compose(check, detail="all")
    assert all(block.picture for block in every.blocks if isinstance(block, Derivation))


def text_of(step: Derivation) -> str:
    """Return why a step's cut was chosen."""
    return "".join(run.text for run in step.reason.content if isinstance(run, Run))


# --- graphic statics --------------------------------------------------------------------------------------


def test_the_appendix_of_graphic_statics() -> None:
    """Maxwell's diagram with the names of all members, and the polygons of joints and of the whole truss."""
    truss, case, _ = drawn_trusses.fink()
    check = check_members(truss, case, "all")
    sheet = compose(check, graphics=True)
    assert list(parts(sheet.blocks))[-1] == "Graphic statics"
    start = next(
        n for n, block in enumerate(sheet.blocks) if isinstance(block, Heading) and block.text == "Graphic statics"
    )
    appendix = sheet.blocks[start:]
    figures = [figure for block in appendix if isinstance(block, Picture) for figure in block.figures]
    assert figures[0].alt.startswith("Maxwell diagram")
    bodies = {step.cut.kept for step in check.steps if step.cut.kind != "section"}
    assert len(figures) == 1 + len(bodies)
    table = next(block for block in appendix if isinstance(block, Table))
    assert len(table.rows) == len(truss.members)
    assert "Graphic statics" not in parts(compose(check).blocks)


def test_where_there_is_no_diagram_the_appendix_says_why() -> None:
    """In words, not by silence."""
    sheet = compose(sheet_cases.roof(), drawings=False, graphics=True)
    assert "No Maxwell diagram: it needs the forces of all members" in " ".join(text(sheet).split())


# --- recorded, derived again, asked for on the command line -----------------------------------------------


@pytest.mark.parametrize(
    ("detail", "graphics", "suffix"),
    [("members", True, ".html"), ("all", False, ".ipynb"), ("summary", True, ".ipynb"), ("summary", False, ".html")],
)
def test_a_filed_sheet_is_derived_again_with_its_detail(
    detail: str, graphics: bool, suffix: str, tmp_path: Path
) -> None:
    """From the command line to a file and through recheck; with another detail or no graphics it differs."""
    truss, case, _ = drawn_trusses.fink()
    file, out = tmp_path / "roof.toml", tmp_path / f"sheet{suffix}"
    write(TrussFile(truss, (case,)), file)
    options = ["--detail", detail, *(["--graphics"] if graphics else [])]
    assert main(["sheet", str(file), "--case", "snow", "--members", "C-D,E-T", "--out", str(out), *options]) == 0
    assert recheck(out).matches
    written = out.read_text(encoding="utf-8")
    other = "members" if detail != "members" else "all"
    for stated, instead in (
        (f'"detail": "{detail}"', f'"detail": "{other}"'),
        ('"graphics": ', '"graphics": 1, "g": '),
    ):
        assert stated in written
        out.write_text(written.replace(stated, instead), encoding="utf-8")
        assert not recheck(out).matches


def test_every_detail_in_every_format() -> None:
    """Also without the file on the sheet a notebook holds it in a cell, and a page in its record."""
    check = sheet_cases.warren()
    for detail in ("members", "all", "summary"):
        sheet = compose(check, sheet_cases.PROJECT, drawings=False, detail=detail)
        assert "tension_only" in notebook(sheet)
        assert "tension_only" in html(sheet)
        assert ("tension_only" in text(sheet)) == (detail == "all")
