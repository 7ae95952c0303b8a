"""Drawings under a checker of accessibility, in the light and in the dark theme."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import axe_playwright_python
import pytest
from parts import KHOO_CELL, TRAIN_CELL, Sheet
from playwright.sync_api import expect

pytestmark = pytest.mark.browser
CHECKER = Path(axe_playwright_python.__file__).with_name("axe.min.js")
"""axe-core, which comes inside that package."""
RUN = """async () => {
  const options = { rules: { 'target-size': { enabled: true }, 'color-contrast': { enabled: true } } };
  const found = await axe.run('.tc-drawing', options);
  const nodes = (entry) => entry.nodes.slice(0, 3).map((node) => node.html).join(' | ');
  const told = (entries) => entries.map((entry) => `${entry.id}: ${nodes(entry)}`);
  return { violations: told(found.violations), passes: found.passes.map(({ id }) => id) };
}"""


@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_no_violations(page: Any, notebook: Any, theme: str) -> None:
    """With a section drawn, a centre chosen, a member checked, a problem told, and a train beside it."""
    book = notebook(KHOO_CELL, TRAIN_CELL)
    page.evaluate("(theme) => window.jupyterapp.commands.execute('apputils:change-theme', { theme })", theme)
    light = str("Light" in theme).lower()
    page.wait_for_selector(f"body[data-jp-theme-light='{light}']", state="attached")
    sheet = Sheet(page, book.locator(".tc-drawing").first)
    sheet.drag(sheet.between("p", "q", up=-45), sheet.between("c", "d", up=45))
    sheet.svg.locator("[data-member='b-c']").click()
    sheet.svg.locator("[data-joint='p']").click()
    expect(book.get_by_role("textbox", name="Moment centre")).to_have_value("p")
    book.get_by_text("Pointer and keys").first.click()
    book.get_by_role("textbox", name="Moment centre").fill("nowhere")
    page.keyboard.press("Enter")
    expect(book.get_by_role("alert").first).to_be_visible()
    page.add_script_tag(content=CHECKER.read_text(encoding="utf-8"))
    found = page.evaluate(RUN)
    assert found["violations"] == []
    assert len(found["passes"]) >= 10
