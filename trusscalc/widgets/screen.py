"""An exploration on the screen: the drawing and its form, bound to what is chosen."""

from __future__ import annotations

from typing import Any

from trusscalc.errors import InputError
from trusscalc.exacttext import number
from trusscalc.widgets.cutblocks import in_one_sentence
from trusscalc.widgets.exploration import Exploration
from trusscalc.widgets.form import Form
from trusscalc.widgets.onscreen import OnScreen
from trusscalc.widgets.pagedata import state_data, truss_data
from trusscalc.widgets.views import TrussDrawing

INVITATION = "Drag across members to draw a section, or choose joints to keep."


class Screen(OnScreen):
    """Drawing and form of one exploration.

    Parameters
    ----------
    exploration : Exploration
        What they show and change.
    """

    def __init__(self, exploration: Exploration) -> None:
        self.exploration = exploration
        drawing = TrussDrawing(truss=truss_data(exploration.truss))
        super().__init__(drawing, exploration.frozen, exploration.lock)
        self.form = Form(exploration, self.act, self.changed)
        self.box.children = (self.drawing, self.form.box)
        exploration.watchers.append(self.show)
        self.show()

    def state(self) -> dict[str, Any]:
        """Return everything that is drawn, and what the last move has given in a sentence."""
        present = self.exploration.present
        drawn = state_data(present.truss, present.case, present.choices, present.answer, present.check)
        if present.answer is not None:
            told = in_one_sentence(present.answer)
        else:
            told = f"No cut: {present.choices.fault}." if present.choices.fault else INVITATION
        return {**drawn, "status": told}

    def show_form(self) -> None:
        """Show the present state in every control, and the typeset answers."""
        self.form.show()

    def move(self, content: Any) -> None:
        """Make the move that the page reports, or raise InputError for a message that is none."""
        exploration, truss = self.exploration, self.exploration.truss
        match content:
            case {"event": "section", "points": list(points), "closed": bool(closed)}:
                line = [(number(x), number(y)) for x, y in points]
                exploration.change(lambda choices: choices.drawn(truss, line, closed=closed))
            case {"event": "member", "member": str(member)}:
                exploration.change(lambda choices: choices.with_member(truss, member))
            case {"event": "through", "member": str(member)}:
                exploration.change(lambda choices: choices.with_member_cut(truss, member))
            case {"event": "keep", "joint": str(joint)}:
                exploration.change(lambda choices: choices.with_joint(truss, joint))
            case {"event": "centre", "joint": str(joint)}:
                exploration.change(lambda choices: choices.about_joint(truss, joint))
            case {"event": "side"}:
                exploration.other_side()
            case {"event": "nearest"}:
                exploration.take_nearest()
            case {"event": "clear"}:
                exploration.clear()
            case _:
                message = f"the page sent a message that is no move: {str(content)[:80]}"
                raise InputError(message)
