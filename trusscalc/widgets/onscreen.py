"""What every live view has: moves with their errors shown, a view that may be lost and found, and the form on file."""

from __future__ import annotations

import asyncio
import secrets
from collections.abc import Callable
from contextlib import AbstractContextManager
from typing import Any, Final

import ipywidgets
from IPython.display import display, update_display

from trusscalc.errors import TrusscalcError
from trusscalc.render.notebook import Bundle

REPLACING: Final = frozenset({"section", "place", "over"})
"""Moves of which a later one takes the place of an earlier one."""
REST: Final = 0.4
"""Seconds without a move after which the form on file is renewed."""
LOADED_AGAIN: Final = " This page was loaded again: run the cell again to renew the form on file below."


class OnScreen:
    """A drawing with its controls, bound to something that moves.

    A subclass gives ``state`` (what the drawing shows), ``show_form`` (controls and answers) and ``move`` (what the
    page reports).

    Parameters
    ----------
    drawing : widget
        The view; it sends messages, and has a trait ``state``.
    frozen : callable
        Returns the static form of now.
    lock : context manager
        Held while a move is made and shown: callbacks may come in several threads.
    """

    def __init__(self, drawing: Any, frozen: Callable[[], Bundle], lock: AbstractContextManager[Any]) -> None:
        self.drawing = drawing
        self.lock = lock
        self.told: dict[str, int] = {}
        self.frozen = frozen
        self.problem = ""
        self.turn = 0
        self.showing = False
        self.acting = False
        self.waiting: asyncio.TimerHandle | None = None
        self.displays = 0
        self.views = 0
        self.name = f"trusscalc-{secrets.token_hex(8)}"
        self.box = ipywidgets.VBox([drawing])
        self.box.add_class("tc-exploration")
        drawing.on_msg(lambda _, content, __: self.received(content))

    def state(self) -> dict[str, Any]:
        """Return what the drawing shows."""
        raise NotImplementedError

    def show_form(self) -> None:
        """Show the present state in controls and answers."""
        raise NotImplementedError

    def move(self, content: Any) -> None:
        """Make the move that the page reports, or raise InputError for a message that is none."""
        raise NotImplementedError

    # --- showing ------------------------------------------------------------------------------------------

    def display(self) -> None:
        """Show drawing and controls in the running cell, and beside them the form that stays on file."""
        self.displays += 1
        display(self.box)
        display(self.frozen(), raw=True, display_id=self.name)

    def show(self) -> None:
        """Show the present state: the answer at once, then the form on file.

        After a move in the page the form on file waits until the hand rests, so that its figures keep no next move
        waiting; after one in a cell it is renewed before the cell ends.
        """
        self.problem = ""
        self.show_now()
        if self.waiting is not None:
            self.waiting.cancel()
            self.waiting = None
        loop = _running_loop() if self.acting else None
        if loop is None:
            self.renew()
        else:
            self.waiting = loop.call_later(REST, lambda: self.act(self.renew))

    def renew(self) -> None:
        """Renew the form on file."""
        with self.lock:
            self.waiting = None
            if self.displays:
                update_display(self.frozen(), raw=True, display_id=self.name)

    def show_now(self) -> None:
        """Show the present state in drawing and controls."""
        self.turn += 1  # the page draws anew even where nothing has changed: what it drew itself may have to go
        state = self.state()
        if self.views > self.displays:
            state["status"] += LOADED_AGAIN
        self.drawing.state = {**state, "problem": self.problem, "turn": self.turn}
        self.showing = True
        try:
            self.show_form()
        finally:
            self.showing = False

    # --- moves --------------------------------------------------------------------------------------------

    def act(self, move: Callable[[], None]) -> None:
        """Make a move; what goes wrong is told in the drawing, and the state stays what it was."""
        with self.lock:
            self.acting = True
            try:
                move()
            except TrusscalcError as problem:
                self.tell(str(problem))
            except Exception as problem:  # noqa: BLE001 - shown nowhere else in a notebook
                self.tell(f"An error in this program ({type(problem).__name__}: {problem}). Nothing was changed.")
            finally:
                self.acting = False

    def tell(self, problem: str) -> None:
        """Show what went wrong beside the state as it is."""
        self.problem = problem
        self.show_now()

    def changed(self, move: Callable[[], None]) -> None:
        """Make the move of a control that a person has changed; what the program sets itself is no move."""
        if not self.showing:
            self.act(move)

    def received(self, content: Any) -> None:
        """Make the move that the page reports; the first word of a view is that it is there."""
        if isinstance(content, dict) and content.get("event") == "shown":
            self.views += 1
            self.act(self.show if self.views > self.displays else self.show_now)
        else:
            self.act(lambda: None if self.is_late(content) else self.move(content))

    def is_late(self, content: Any) -> bool:
        """Return whether a place of line or train arrives after a later one of the same view; only the last counts."""
        match content:
            case {"event": str(event), "view": str(view), "number": int(number)}:
                late = event in REPLACING and number < self.told.get(view, 0)
                self.told[view] = max(number, self.told.get(view, 0))
                return late
        return False


def _running_loop() -> asyncio.AbstractEventLoop | None:
    """Return the loop that runs the callbacks of this thread, None outside of one."""
    try:
        return asyncio.get_running_loop()
    except RuntimeError:
        return None


# --- controls ---------------------------------------------------------------------------------------------


def control(kind: Any, description: str, changed: Callable[[Any], None], **options: Any) -> Any:
    """Return a control, and have its changes told."""
    made = kind(description=description, style={"description_width": "8.6em"}, layout={"width": "21em"}, **options)
    made.observe(lambda event: changed(event["new"]), names="value")
    return made


def button(text: str, pressed: Callable[[], None]) -> Any:
    """Return a button, and have it told when it is pressed."""
    made = ipywidgets.Button(description=text, layout={"width": "auto", "min_height": "28px"})
    made.on_click(lambda _: pressed())
    return made


def show_in(output: Any, data: Bundle) -> None:
    """Show a bundle in an output area, or nothing."""
    output.outputs = ({"output_type": "display_data", "data": data, "metadata": {}},) if data else ()
