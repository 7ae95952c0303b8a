"""An exploration on the screen: drawing and form, what they report, what went wrong, and the form on file."""

from __future__ import annotations

import secrets
from collections.abc import Callable
from typing import Any

import ipywidgets
from IPython.display import display, update_display

from trusscalc.errors import InputError, TrusscalcError
from trusscalc.exacttext import number
from trusscalc.widgets.cutblocks import in_one_sentence
from trusscalc.widgets.exploration import Exploration
from trusscalc.widgets.form import Form
from trusscalc.widgets.pagedata import state_data, truss_data
from trusscalc.widgets.views import TrussDrawing

INVITATION = "Drag across members to draw a section, or choose joints to keep."


class Screen:
    """Drawing and form of one exploration.

    Parameters
    ----------
    exploration : Exploration
        What they show and change.
    """

    def __init__(self, exploration: Exploration) -> None:
        self.exploration = exploration
        self.problem = ""
        self.turn = 0
        self.displays = 0
        self.views = 0
        self.name = f"trusscalc-{secrets.token_hex(8)}"
        self.drawing = TrussDrawing(truss=truss_data(exploration.truss))
        self.form = Form(exploration, self.act)
        self.box = ipywidgets.VBox([self.drawing, self.form.box])
        self.drawing.on_msg(lambda _, content, __: self.received(content))
        exploration.watchers.append(self.show)
        self.show()

    def display(self) -> None:
        """Show drawing and form in the running cell, and beside them the form that stays on file."""
        self.displays += 1
        display(self.box)
        display(self.exploration.frozen(), raw=True, display_id=self.name)

    def show(self) -> None:
        """Show the present state: the answer at once, then the form on file."""
        self.problem = ""
        self.show_now()
        if self.displays:
            update_display(self.exploration.frozen(), raw=True, display_id=self.name)

    def show_now(self) -> None:
        """Show the present state in drawing and form."""
        present = self.exploration.present
        self.turn += 1  # the page draws anew even where nothing has changed: a line it drew itself may have to go
        state = state_data(present.truss, present.case, present.choices, present.answer, present.check)
        self.drawing.state = {**state, "status": self.status(), "problem": self.problem, "turn": self.turn}
        self.form.show()

    def status(self) -> str:
        """Return what a move has given, in a sentence."""
        present = self.exploration.present
        if present.answer is not None:
            told = in_one_sentence(present.answer)
        elif present.choices.fault:
            told = f"No cut: {present.choices.fault}."
        else:
            told = INVITATION
        if self.views > self.displays:
            told += " This page was loaded again: run the cell again to renew the form on file below."
        return told

    # --- moves --------------------------------------------------------------------------------------------

    def act(self, move: Callable[[], None]) -> None:
        """Make a move; what goes wrong is told in the drawing, and the state stays what it was."""
        try:
            move()
        except TrusscalcError as problem:
            self.tell(str(problem))
        except Exception as problem:  # noqa: BLE001 - shown nowhere else in a notebook
            self.tell(f"An error in this program ({type(problem).__name__}: {problem}). Nothing was changed.")

    def tell(self, problem: str) -> None:
        """Show what went wrong beside the state as it is."""
        self.problem = problem
        self.show_now()

    def received(self, content: Any) -> None:
        """Make the move that the page reports."""
        if content == {"event": "shown"}:
            self.views += 1
            self.act(self.show if self.views > self.displays else self.show_now)
        else:
            self.act(lambda: self.move(content))

    def move(self, content: Any) -> None:
        """Make the move that the page reports, or raise InputError for a message that is none."""
        exploration, truss = self.exploration, self.exploration.truss
        choices = exploration.choices
        match content:
            case {"event": "section", "points": list(points), "closed": bool(closed)}:
                line = [(number(x), number(y)) for x, y in points]
                exploration.choices = choices.drawn(truss, line, closed=closed)
            case {"event": "member", "member": str(member)}:
                exploration.choices = choices.with_member(truss, member)
            case {"event": "through", "member": str(member)}:
                exploration.choices = choices.with_member_cut(truss, member)
            case {"event": "keep", "joint": str(joint)}:
                exploration.choices = choices.with_joint(truss, joint)
            case {"event": "centre", "joint": str(joint)}:
                exploration.choices = choices.about_joint(truss, joint)
            case {"event": "side"}:
                exploration.other_side()
            case {"event": "nearest"}:
                exploration.take_nearest()
            case {"event": "clear"}:
                exploration.clear()
            case _:
                message = f"the page sent a message that is no move: {str(content)[:80]}"
                raise InputError(message)
