"""A train over an influence line on the screen: drawing, form, what they report, and the form on file."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import ipywidgets

from trusscalc.errors import InputError
from trusscalc.exacttext import number
from trusscalc.loads import factor_text
from trusscalc.render.notebook import bundle
from trusscalc.widgets.onscreen import OnScreen, button, control, show_in
from trusscalc.widgets.pagedata import truss_data
from trusscalc.widgets.traindata import line_data, train_data
from trusscalc.widgets.travelling import DIRECTIONS, Travel
from trusscalc.widgets.views import TrainDrawing


class TrainScreen(OnScreen):
    """Drawing and form of one train on its chain.

    Parameters
    ----------
    travel : Travel
        What they show and change.
    """

    def __init__(self, travel: Travel) -> None:
        self.travel = travel
        drawing = TrainDrawing(truss=truss_data(travel.line.truss), line=line_data(travel.line))
        super().__init__(drawing, travel.frozen, travel.lock)
        self.train = self.control(
            ipywidgets.Dropdown, "Train", self.set_train, options=[train.name for train in travel.trains]
        )
        self.direction = self.control(ipywidgets.Dropdown, "Direction", self.set_direction, options=DIRECTIONS)
        self.lead = self.control(ipywidgets.Text, "Leading axle at", self.set_lead, continuous_update=False)
        self.spacing = self.control(ipywidgets.Text, "Axle spacings", self.set_spacing, continuous_update=False)
        self.largest = button("To the largest force", lambda: self.act(travel.to_largest))
        self.least = button("To the least force", lambda: self.act(travel.to_least))
        self.answer = ipywidgets.Output()
        self.answer.add_class("tc-answer")
        controls = ipywidgets.HBox(
            [self.train, self.direction, self.lead, self.spacing, self.largest, self.least],
            layout={"flex_flow": "row wrap"},
        )
        self.box.children = (self.drawing, controls, self.answer)
        travel.watchers.append(self.show)
        self.show()

    def control(self, kind: Any, description: str, change: Callable[[Any], None], **options: Any) -> Any:
        """Return a control whose changes make a move."""
        return control(kind, description, lambda value: self.changed(lambda: change(value)), **options)

    # --- moves --------------------------------------------------------------------------------------------

    def set_train(self, name: str) -> None:
        """Choose the train."""
        self.travel.train = name

    def set_direction(self, direction: str) -> None:
        """Choose the direction of travel."""
        self.travel.direction = direction

    def set_lead(self, text: str) -> None:
        """Put the leading axle where it was typed."""
        self.travel.lead_axle_at = text

    def set_spacing(self, text: str) -> None:
        """Take the spacings that were typed."""
        self.travel.spacing = [part.strip() for part in text.split(",") if part.strip()]

    def move(self, content: Any) -> None:
        """Make the move that the page reports."""
        travel = self.travel
        match content:
            case {"event": "place", "at": float(at) | int(at)}:
                travel.lead_axle_at = number(at)
            case {"event": "over", "axle": int(axle), "joint": int(joint)}:
                travel.put(axle, joint)
            case {"event": "turn"}:
                travel.direction = DIRECTIONS[travel.direction == "forward"]
            case {"event": "largest"}:
                travel.to_largest()
            case {"event": "least"}:
                travel.to_least()
            case _:
                message = f"the page sent a message that is no move: {str(content)[:80]}"
                raise InputError(message)

    # --- showing ------------------------------------------------------------------------------------------

    def state(self) -> dict[str, Any]:
        """Return where the train stands, and what that gives in words."""
        return {**train_data(self.travel), "status": self.travel.words()}

    def show_form(self) -> None:
        """Set every control to where the train stands, and show the table."""
        travel = self.travel
        show_in(self.answer, bundle(travel.blocks(drawings=False)))
        self.train.value, self.direction.value = travel.train.name, travel.direction
        self.lead.value = factor_text(travel.lead_axle_at)
        self.spacing.value = ", ".join(map(factor_text, travel.spacing))
        self.spacing.disabled = all(low == high for low, high in travel.train.spacing)
