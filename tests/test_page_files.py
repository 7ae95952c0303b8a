"""The files the page is given: whole, put together without clashes, asking nothing of the world, and linted."""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
from collections import Counter
from pathlib import Path

import pytest

from trusscalc.widgets.pagefiles import OWN_IMPORT, PAGE, javascript, stylesheet

ROOT = Path(__file__).parents[1]
VIEWS = ("drawing.js", "train.js")
TOP_LEVEL_NAME = re.compile(r"^(?:const|let|class|function|async function) (\w+)", re.MULTILINE)
OUTSIDE = re.compile(r"https?:|//\w|\bimport\s*\(|@import|url\(|fetch\(|XMLHttpRequest|eval\(|innerHTML|new Function")
SVG = 'const SVG = "http://www.w3.org/2000/svg";'
"""The one address in them: a name of a kind of node, which nothing is ever asked of."""


@pytest.mark.parametrize("view", VIEWS)
def test_modules_are_put_together_in_order(view: str) -> None:
    """Each before those that use it, none twice, nothing imported any more, one thing exported."""
    text = javascript(view)
    assert not re.search(r"^import ", text, re.MULTILINE)
    assert re.findall(r"^export .*", text, re.MULTILINE) == ["export default { render };"]
    for name in OWN_IMPORT.findall((PAGE / view).read_text(encoding="utf-8")):
        first = next(line for line in (PAGE / name).read_text(encoding="utf-8").splitlines() if line.startswith("//"))
        assert text.count(first) == 1
        assert text.index(first) < text.index("function render(")


@pytest.mark.parametrize("view", VIEWS)
def test_names_of_modules_do_not_clash(view: str) -> None:
    """In one text, a second constant of the same name would stop the whole view."""
    twice = [name for name, times in Counter(TOP_LEVEL_NAME.findall(javascript(view))).items() if times > 1]
    assert twice == []


def test_nothing_is_asked_of_the_world() -> None:
    """No address, no import at run time, no markup made from text."""
    for path in PAGE.iterdir():
        text = path.read_text(encoding="utf-8").replace(SVG, "")
        code = re.sub(r"/\*.*?\*/", "", re.sub(r"(?m)(^|\s)//.*$", "", text), flags=re.DOTALL)
        assert OUTSIDE.search(code) is None, path.name


def test_files_go_with_the_package() -> None:
    """They lie inside it, and nowhere else is anything of the page."""
    assert {path.suffix for path in PAGE.iterdir()} == {".js", ".css"}
    assert stylesheet("drawing.css").count("{") == stylesheet("drawing.css").count("}")


def test_lint_and_format() -> None:
    """By a linter for pages that comes as a Python package."""
    linter = shutil.which("biome", path=str(Path(sys.executable).parent)) or shutil.which("biome")
    if linter is None:
        pytest.skip("the linter for pages comes with the extra 'browser'")
    command = [linter, "check", "--config-path=.ci/biome.json", "--error-on-warnings", "trusscalc/widgets/page"]
    found = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert found.returncode == 0, found.stdout + found.stderr
