"""Pages loaded again, kernels started again, cells run twice and out of order: no error, no double, nothing stale."""

from __future__ import annotations

from typing import Any

import pytest
from parts import CELL_ERRORS, KHOO_CELL, RUN_ALL, Sheet, in_kernel, ready
from playwright.sync_api import expect

pytestmark = pytest.mark.browser

STATIC = ".jp-OutputArea-output.jp-RenderedMarkdown"
RUN_CELL = """async (place) => {
  const { content } = window.jupyterapp.shell.currentWidget;
  content.activeCellIndex = place;
  await window.jupyterapp.commands.execute('notebook:run-cell');
  return true;
}"""


def sheet_of(page: Any, book: Any) -> Sheet:
    """Return the one drawing of a notebook."""
    expect(book.locator(".tc-drawing")).to_have_count(1)
    return Sheet(page, book.locator(".tc-drawing"))


def cut_straight(sheet: Sheet) -> None:
    """Draw the straight section through the panel of the K truss."""
    sheet.drag(sheet.between("p", "q", up=-45), sheet.between("c", "d", up=45))


def test_the_form_on_file_follows_and_is_saved(page: Any, notebook: Any, server: Any) -> None:
    """Beside the drawing stands an ordinary output with figure, equation and verdict; saved, it is in the file."""
    book = notebook(KHOO_CELL)
    static = book.locator(".jp-Cell").first.locator(STATIC).last
    expect(static).to_contain_text("No cut has been chosen")
    sheet = sheet_of(page, book)
    cut_straight(sheet)
    expect(static).to_contain_text("It gives nothing")
    page.keyboard.press("n")
    expect(static).to_contain_text("agrees")
    expect(static.locator("img")).not_to_have_count(0)
    page.evaluate("async () => { await window.jupyterapp.commands.execute('docmanager:save'); return true; }")
    (file,) = server.folder.glob("test_the_form_on_file*.ipynb")
    text = file.read_text(encoding="utf-8")
    assert "agrees" in text
    assert "data:image/svg+xml;base64," in text


def test_a_page_loaded_again(page: Any, notebook: Any) -> None:
    """The drawing comes back as it was, with its answer; the form on file, of an earlier run, is said to be old."""
    book = notebook(KHOO_CELL)
    page.evaluate("async () => { await window.jupyterapp.commands.execute('docmanager:save'); return true; }")
    cut_straight(sheet_of(page, book))
    told = book.get_by_role("status").inner_text()
    page.evaluate("async () => { await window.jupyterapp.commands.execute('docmanager:save'); return true; }")
    page.reload()
    ready(page)
    sheet = sheet_of(page, book)
    expect(book.get_by_role("status")).to_contain_text(told)
    expect(book.get_by_role("status")).to_contain_text("run the cell again to renew the form on file")
    page.keyboard.press("Escape")
    sheet.svg.locator("[data-joint='n']").focus()
    page.keyboard.press("k")
    expect(book.get_by_role("status")).to_contain_text("n–o")
    page.evaluate(RUN_ALL)
    sheet_of(page, book)
    expect(book.get_by_role("status")).to_contain_text("Drag across members")


def test_a_kernel_started_again(page: Any, notebook: Any) -> None:
    """The drawing says that nothing of it is current; run again, everything is there once, and works."""
    book = notebook(KHOO_CELL)
    sheet = sheet_of(page, book)
    cut_straight(sheet)
    page.evaluate(
        """async () => {
             await window.jupyterapp.shell.currentWidget.sessionContext.session.kernel.restart();
             return true;
           }"""
    )
    expect(book.get_by_text("Nothing here is current").first).to_be_visible()
    expect(sheet.svg).to_have_css("pointer-events", "none")
    ready(page)
    page.evaluate(RUN_ALL)
    assert page.evaluate(CELL_ERRORS) == []
    again = sheet_of(page, book)
    expect(book.get_by_text("Nothing here is current").first).to_be_hidden()
    cut_straight(again)
    expect(book.get_by_role("status")).to_contain_text("goes through c–d, p–q, j–d and j–q")


def test_cells_run_twice_and_out_of_order(page: Any, notebook: Any) -> None:
    """One drawing, one form on file, and both show what was chosen last, wherever that was done."""
    book = notebook(KHOO_CELL, 'trial.cut = ["n", "h", "a"]', "trial.cut = None\ntrial.members = ['b-c']")
    static = book.locator(".jp-Cell").first.locator(STATIC).last
    expect(book.get_by_role("status")).to_contain_text("Drag across members")
    expect(static).to_contain_text("b–c")
    page.evaluate(RUN_CELL, 1)
    expect(book.get_by_role("status")).to_contain_text("goes through a–b, n–o, h–b and h–o")
    expect(static).to_contain_text("goes through a–b, n–o, h–b and h–o")
    page.evaluate(RUN_CELL, 1)
    page.evaluate(RUN_CELL, 2)
    expect(static).not_to_contain_text("h–o")
    page.evaluate(RUN_CELL, 0)
    page.evaluate(RUN_CELL, 0)
    sheet_of(page, book)
    expect(book.locator(".jp-Cell").first.locator(STATIC).filter(has_text="reads without a kernel")).to_have_count(1)
    expect(book.get_by_role("status")).to_contain_text("Drag across members")
    assert in_kernel(page, "print(trial.members)") == "()"
    assert page.evaluate(CELL_ERRORS) == []


def test_a_failing_callback_is_shown(page: Any, notebook: Any) -> None:
    """A defect planted in the program: told in the drawing, in words, and the state is what it was."""
    book = notebook(
        KHOO_CELL,
        "import trusscalc.widgets.exploration as inside\n"
        "def broken(*_, **__): raise RuntimeError('a planted defect')\n"
        "inside.answer = broken",
    )
    sheet = sheet_of(page, book)
    sheet.drag(sheet.between("p", "q", up=-45), sheet.between("c", "d", up=45))
    expect(book.get_by_role("alert")).to_contain_text("An error in this program (RuntimeError: a planted defect)")
    expect(sheet.svg.locator(".tc-section")).to_be_hidden()
    told = page.evaluate("() => window.kernelErrors")  # so every test fails on one that it did not plant
    assert told
    assert all("a planted defect" in error for error in told)
    page.evaluate("() => { window.kernelErrors = []; document.querySelector('.tc-problem').remove(); return true; }")


def test_an_envelope_is_stopped_and_finished(page: Any, notebook: Any) -> None:
    """Progress in words, a stop that changes nothing, and the table when it is done."""
    book = notebook(KHOO_CELL)
    sheet_of(page, book)
    book.get_by_role("button", name="Envelope of all combinations").click()
    expect(book.get_by_text("Envelope of 37 members: done.")).to_be_visible()
    expect(book.locator(".tc-answer").nth(1)).to_contain_text("Both routes agree on every case")
