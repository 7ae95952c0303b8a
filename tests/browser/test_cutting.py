"""Drawing a section in a real notebook: by pointer, by keys alone, and in the form."""

from __future__ import annotations

from typing import Any

import pytest
from parts import KHOO_CELL, Sheet, in_kernel, spoken, typeset
from playwright.sync_api import expect

pytestmark = pytest.mark.browser


@pytest.fixture
def book(notebook: Any) -> Any:
    """Open a notebook with the published K truss to explore."""
    return notebook(KHOO_CELL)


@pytest.fixture
def sheet(page: Any, book: Any) -> Sheet:
    """Return its drawing."""
    drawing = book.locator(".tc-drawing")
    expect(drawing.locator("svg.tc-sheet")).to_be_visible()
    return Sheet(page, drawing)


def test_a_section_dragged_across_a_k_panel(page: Any, book: Any, sheet: Sheet) -> None:
    """Straight it gives nothing; round the joint it gives the printed chords; kept, they open the straight one.

    H. A. Khoo, Example T-4 prints 320 and -320 in the chords, 44.72 and -44.72, that is 20 sqrt 5, in the diagonals.
    """
    status = book.get_by_role("status")
    answer = book.locator(".tc-answer").first
    across = sheet.between("p", "q", up=-45), sheet.between("c", "d", up=45)
    sheet.drag(*across)
    expect(status).to_contain_text(
        "Section a–a goes through c–d, p–q, j–d and j–q. It gives nothing: it leaves 4 unknown"
    )
    expect(answer).to_contain_text("Why nothing")

    # pulled round joint j, where it cuts the posts instead of the diagonals
    middle = ((across[0][0] + across[1][0]) / 2, (across[0][1] + across[1][1]) / 2)
    sheet.drag(middle, sheet.between("i", "j", 0.7))
    expect(status).to_contain_text("goes through c–d, p–q, c–j and j–p.")
    expect(status).to_contain_text("c–d = −320.000 kN C (agrees)")
    expect(answer.locator("mjx-container").first).to_be_visible()
    expect(answer.locator("mjx-assistive-mml").filter(has_text="4Np–q=1280")).to_have_count(1)
    assert "4Nc–d=−1280" in [text.replace("-", "−") for text in spoken(answer)]

    book.get_by_role("button", name="Keep this cut").click()
    expect(book.locator(".tc-answer").nth(1)).to_contain_text("p–q")
    page.keyboard.press("Escape")  # not in the drawing, so nothing to it
    book.get_by_role("button", name="No cut").click()
    expect(status).to_contain_text("Drag across members")
    sheet.drag(*across)
    expect(status).to_contain_text("It gives j–d = −44.721 kN C (agrees) and j–q = 44.721 kN T (agrees).")
    expect(answer).to_contain_text("44.721")
    assert any("<mn>20</mn><msqrt><mn>5</mn></msqrt>" in line for line in typeset(answer))
    assert in_kernel(page, "print(*map(str, sorted(trial.answer.solved)), trial.cut.kept[-1])") == "j-d j-q j"


def test_a_curved_cut_by_keys_alone(page: Any, book: Any, sheet: Sheet) -> None:
    """From joint to joint with the arrow keys, kept with K: the section runs round j, and the chords are found."""
    cells = book.locator(".jp-Cell").count()
    keys = page.keyboard
    sheet.svg.locator("[data-joint='a']").focus()
    for name in ("a", "h", "n"):
        expect(sheet.svg.locator(f"[data-joint='{name}']")).to_be_focused()
        keys.press("k")
        keys.press("ArrowDown")
    keys.press("ArrowRight")
    for name, way in (("o", "ArrowUp"), ("i", "ArrowUp"), ("b", "ArrowRight"), ("c", "")):
        expect(sheet.svg.locator(f"[data-joint='{name}']")).to_be_focused()
        keys.press("k")
        if way:
            keys.press(way)
    keys.press("ArrowDown")
    keys.press("ArrowDown")
    expect(sheet.svg.locator("[data-joint='p']")).to_be_focused()
    keys.press("k")
    status = book.get_by_role("status")
    expect(status).to_contain_text("goes through c–d, p–q, c–j and j–p. It gives")
    expect(sheet.svg.locator(".tc-line")).to_be_visible()
    keys.press("m")  # moments about p: the other chord alone
    expect(status).to_have_text(
        "Section a–a goes through c–d, p–q, c–j and j–p. It gives c–d = −320.000 kN C (agrees)."
    )
    expect(sheet.svg.locator("[data-joint='p']")).to_have_attribute("aria-label", "Joint p, kept, moment centre")
    answer = book.locator(".tc-answer").first
    expect(answer.locator("mjx-assistive-mml").filter(has_text="4Nc–d=−1280")).to_have_count(1)
    keys.press("o")  # the other part gives the same
    expect(status).to_contain_text("c–d = −320.000 kN C (agrees)")
    expect(sheet.svg.locator("[data-joint='q']")).to_have_attribute("aria-pressed", "true")
    # the notebook's own one-key commands must not act while the drawing has the focus
    for key in ("a", "x", "d", "d"):
        keys.press(key)
    assert book.locator(".jp-Cell").count() == cells
    keys.press("Escape")
    expect(status).to_contain_text("Drag across members")


def test_a_bent_line_by_keys_alone(page: Any, book: Any, sheet: Sheet) -> None:
    """A straight line through a member, one more corner, moved with the arrow keys until it goes round the joint."""
    keys = page.keyboard
    status = book.get_by_role("status")
    sheet.svg.locator("[data-member='c-d']").focus()
    keys.press("s")
    expect(status).to_contain_text("goes through c–d, p–q, j–d and j–q")
    point = sheet.svg.locator("[data-point='0']")
    point.focus()
    keys.press("Insert")
    corner = sheet.svg.locator("[data-point='1']")
    corner.focus()
    left, middle = sheet.joints()["j"], sheet.between("c", "d")
    for _ in range(int((middle[0] - left[0]) / 25) + 1):
        keys.press("Shift+ArrowLeft")
    expect(status).to_contain_text("goes through c–d, p–q, c–j and j–p. It gives", timeout=15_000)
    expect(corner).to_be_focused()
    keys.press("Delete")
    expect(status).to_contain_text("goes through c–d, p–q, j–d and j–q")


def test_a_line_along_the_pointer_s_path(book: Any, sheet: Sheet) -> None:
    """Round joint j in one go; closed round a joint it cuts that joint out."""
    sheet.follow_the_pointer()
    inner = sheet.between("p", "q", up=12), sheet.between("i", "j", 0.7), sheet.between("c", "d", up=-12)
    sheet.drag(sheet.between("p", "q", up=-45), *inner, sheet.between("c", "d", up=45))
    status = book.get_by_role("status")
    expect(status).to_contain_text("goes through c–d, p–q, c–j and j–p.")
    book.get_by_role("button", name="No cut").click()
    expect(status).to_contain_text("Drag across members")
    x, y = sheet.joints()["j"]
    ring = [(x - 25, y - 25), (x + 25, y - 25), (x + 25, y + 25), (x - 25, y + 25), (x - 25, y - 24)]
    sheet.drag(*ring)
    expect(status).to_contain_text("The cut goes through c–j, j–p, j–d and j–q.")
    expect(sheet.svg.locator("[data-joint='j']")).to_have_attribute("aria-pressed", "true")


def test_members_and_centre_are_picked_by_pointer(page: Any, book: Any, sheet: Sheet) -> None:
    """A click has a member checked; a click on a joint takes moments about it, or keeps it, as chosen."""
    sheet.svg.locator("[data-member='b-c']").click()
    expect(sheet.svg.locator("[data-member='b-c']")).to_have_attribute("aria-pressed", "true")
    expect(book.locator(".tc-answer").nth(1)).to_contain_text("b–c")
    expect(book.get_by_label("Check members")).to_have_values(["b–c"])
    book.get_by_label("keeps it in the free body, or not").check()
    for joint in ("a", "h", "n"):
        sheet.svg.locator(f"[data-joint='{joint}']").click()
        expect(sheet.svg.locator(f"[data-joint='{joint}']")).to_have_attribute("aria-pressed", "true")
        sheet.settle()
    assert in_kernel(page, "print(*trial.cut.kept)") == "a n h"
    book.get_by_label("takes moments about it").check()
    sheet.svg.locator("[data-joint='o']").click()
    expect(book.get_by_role("textbox", name="Moment centre")).to_have_value("o")
    sheet.svg.locator("[data-side]").first.click()
    expect(sheet.svg.locator("[data-joint='g']")).to_have_attribute("aria-pressed", "true")


def test_the_form_is_the_twin_of_the_drawing(page: Any, book: Any, sheet: Sheet) -> None:
    """Points typed, an equation chosen, a slip told as an alert; nothing that went wrong changes anything."""
    book.get_by_label("Section points").fill("10, -1; 7, 2; 10, 5")
    page.keyboard.press("Enter")
    status = book.get_by_role("status")
    expect(status).to_contain_text("goes through c–d, p–q, c–j and j–p.")
    book.get_by_role("textbox", name="Moment centre").fill("nowhere")
    page.keyboard.press("Enter")
    alert = book.get_by_role("alert")
    expect(alert).to_contain_text("there is no joint 'nowhere'")
    book.get_by_label("Sum of forces").fill("x")
    page.keyboard.press("Enter")
    expect(alert).to_be_hidden()
    expect(status).to_contain_text("It gives nothing: forces in x leave c–d and p–q unknown")
    book.get_by_label("Equation").select_option(index=1)
    expect(status).to_contain_text("It gives")
    book.get_by_role("button", name="No cut").click()
    expect(status).to_contain_text("Drag across members")
    expect(sheet.svg.locator(".tc-section")).to_be_hidden()


def test_a_line_through_a_joint_is_told_as_that(book: Any, sheet: Sheet) -> None:
    """No guess which side was meant, and nothing of an earlier answer stays."""
    sheet.drag(sheet.between("p", "q", up=-45), sheet.between("c", "d", up=45))
    x, y = sheet.joints()["c"]
    book.get_by_label("Section points").fill("8, -1; 8, 5")
    book.get_by_label("Section points").press("Enter")
    expect(book.get_by_role("status")).to_have_text(
        "No cut: the line runs through joint c; draw it past that joint on one side."
    )
    expect(book.locator(".tc-answer").first).to_be_empty()
    assert (x, y) != (0, 0)
