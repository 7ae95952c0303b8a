"""The sheet as plain text: 100 columns, nothing lost, nothing cut."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest
import sheet_cases

import trusscalc.display
from trusscalc.errors import RenderError
from trusscalc.render import text as renderer
from trusscalc.sheet.blocks import Column, Listing, Paragraph, Run, Table
from trusscalc.sheet.compose import compose

GOLDEN = Path(__file__).parent / "golden"


@dataclass(frozen=True)
class Unknown:
    """A block no renderer knows."""


def test_golden_text() -> None:
    """One whole sheet, read once by eye."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False)
    assert renderer.text(sheet) == (GOLDEN / "warren.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize("name", sorted(sheet_cases.ALL))
def test_lines_fit_in_a_hundred_columns(name: str) -> None:
    """All but the truss file's own lines, which are verbatim."""
    sheet = compose(sheet_cases.ALL[name](), sheet_cases.HOSTILE_PROJECT if name == "hostile" else None, drawings=False)
    kept = [block for block in sheet.blocks if not isinstance(block, Listing)]
    assert max(map(renderer.width, renderer.blocks_text(kept).splitlines())) <= renderer.WIDTH


def test_figures_are_told_in_words() -> None:
    """With drawings, the text holds their descriptions."""
    written = renderer.text(compose(sheet_cases.roof(), detail="all"))
    assert written.count("[Figure: ") >= 2 + len(sheet_cases.roof().steps)


def test_an_unknown_block_is_refused() -> None:
    """In a filed sheet a skipped piece is a wrong sheet."""
    with pytest.raises(RenderError, match="Unknown"):
        renderer.blocks_text([Unknown()])  # type: ignore[list-item]


def test_a_disagreeing_row_is_marked() -> None:
    """What cannot be bold gets a mark in the margin."""
    table = Table(
        (Column("member"), Column("verdict")),
        ((Run("A–B"), Run("agrees")), (Run("B–C"), Run("differs"))),
        strong_rows=(1,),
    )
    lines = renderer.blocks_text([table]).splitlines()
    assert lines[2].startswith("  A–B")
    assert lines[3].startswith("» B–C")


def test_long_words_and_wide_letters_are_kept() -> None:
    """A word longer than the line is cut, not lost; wide letters count twice."""
    word = "x" * 250
    assert renderer.blocks_text([Paragraph((Run(word),))]).replace("\n", "") == word
    assert renderer.width("桁") == 2
    assert renderer.width("é") == 1


def test_long_formulas_break_before_a_sign_only() -> None:
    """Every later line hangs and starts with a sign."""
    formula = " + ".join(f"{n} · (1 − {n})" for n in range(10, 30)) + " = 0"
    lines = renderer.broken(formula, 60)
    assert len(lines) > 2
    assert " ".join(line.strip() for line in lines) == formula
    assert all(line.strip()[0] in "+−=" for line in lines[1:])
    assert max(map(len, lines)) <= 60


def test_save_writes_whole_files_only(tmp_path: Path) -> None:
    """By suffix; a suffix that cannot be written leaves the file there as it was."""
    sheet = compose(sheet_cases.roof(), drawings=False)
    place = trusscalc.display.save(sheet, tmp_path / "sheet.txt")
    assert place.read_text(encoding="utf-8") == renderer.text(sheet)
    old = tmp_path / "sheet.doc"
    old.write_text("old")
    with pytest.raises(RenderError, match=r"cannot be saved as .\.doc.; it can be as .*\.ipynb"):
        trusscalc.display.save(sheet, old)
    assert old.read_text() == "old"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["sheet.doc", "sheet.txt"]


def test_step_texts() -> None:
    """Every step has its lines as text."""
    check = sheet_cases.roof()
    told = trusscalc.display.step_texts(check)
    assert list(told) == [step.number for step in check.steps]
    assert "(4/√5) N_D–C" in told[4]
