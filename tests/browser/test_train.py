"""A train moved in a real notebook, by keys and by drag."""

from __future__ import annotations

from typing import Any

import pytest
from parts import KHOO_CELL, TRAIN_CELL, in_kernel
from playwright.sync_api import expect

pytestmark = pytest.mark.browser


@pytest.fixture
def book(notebook: Any) -> Any:
    """Open a notebook with a pair of axles over the influence line of a diagonal of the published K truss."""
    return notebook(KHOO_CELL, TRAIN_CELL)


def test_a_train_is_moved_by_keys(page: Any, book: Any) -> None:
    """Home, a joint on, turned, to where it governs; the force told is the one Python has, and the exact one."""
    train = book.get_by_role("slider", name="Leading axle")
    status = book.locator(".tc-train").get_by_role("status")
    answer = book.locator(".tc-answer").last
    train.focus()
    expect(status).to_contain_text("pair, backward")  # where it governs
    page.keyboard.press("t")
    page.keyboard.press("Home")
    expect(status).to_contain_text("pair, forward, leading axle at 0 m: the force in i–c is 0.000 kN.")
    page.keyboard.press("PageUp")
    expect(status).to_contain_text("leading axle at 3 m")
    page.keyboard.press("PageUp")
    expect(status).to_contain_text("leading axle at 4 m")
    assert in_kernel(page, "print(go.here[0].value == 6*go.line.at(4) + 24*go.line.at(1))") == "True"
    page.keyboard.press("ArrowRight")
    expect(train).to_have_attribute("aria-valuenow", "4.1")
    page.keyboard.press("Shift+ArrowRight")
    expect(status).to_contain_text("leading axle at 5.1 m")
    page.keyboard.press("t")
    expect(status).to_contain_text("pair, backward, leading axle at 5.1 m")
    page.keyboard.press("l")
    expect(answer).to_contain_text("largest of all")
    largest = in_kernel(page, "print(f'{float(go.largest.value):.3f}')")
    expect(status).to_contain_text(f"{largest} kN")
    assert in_kernel(page, "print(go.here[0].value == go.largest.value)") == "True"
    page.keyboard.press("s")
    least = in_kernel(page, "print(f'{abs(float(go.least.value)):.3f}')")
    expect(status).to_contain_text(f"−{least} kN")


def test_a_train_is_dragged(page: Any, book: Any) -> None:
    """It follows the pointer at once, an axle comes to rest over a joint, and the exact force follows."""
    status = book.locator(".tc-train").get_by_role("status")
    hold = book.locator(".tc-grip-train .tc-hit")
    hold.scroll_into_view_if_needed()
    page.keyboard.press("Escape")
    box = hold.bounding_box()
    start = (box["x"] + box["width"] / 2, box["y"] + box["height"] / 2)
    before = in_kernel(page, "print(go.lead_axle_at)")
    page.mouse.move(*start)
    page.mouse.down()
    page.mouse.move(start[0] - 60, start[1], steps=6)
    moved = hold.bounding_box()
    assert abs(moved["x"] - (box["x"] - 60)) < 12  # at once, but for the last pixels to a joint
    page.mouse.move(start[0] - 61, start[1])
    page.mouse.up()
    expect(book.locator(".tc-train")).not_to_have_class("tc-waiting")
    after = in_kernel(page, "print(go.lead_axle_at)")
    assert after != before
    value = in_kernel(page, "print(f'{float(go.here[0].value):.3f}'.replace('-', '−'))")
    expect(status).to_contain_text(f"{value} kN")
    book.get_by_label("Leading axle at").fill("7/2")
    page.keyboard.press("Enter")
    expect(status).to_contain_text("leading axle at 3.5 m")
    book.get_by_label("Leading axle at").fill("nowhere")
    page.keyboard.press("Enter")
    expect(book.locator(".tc-train").get_by_role("alert")).to_be_visible()
    expect(status).to_contain_text("leading axle at 3.5 m")
