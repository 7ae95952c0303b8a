"""The form beside the drawing: every action of the pointer once more, in controls that keyboard and voice reach.

Form and drawing are bound to one exploration; neither knows of the other.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import ipywidgets

from trusscalc.loads import factor_text
from trusscalc.render.notebook import bundle
from trusscalc.sheet.detail import DETAILS
from trusscalc.sheet.words import about_words, capital
from trusscalc.statics.cutreport import Possibility
from trusscalc.statics.cuts import About
from trusscalc.widgets.choices import typed_centre, typed_direction, typed_line
from trusscalc.widgets.cutblocks import answer_blocks, possibility_words
from trusscalc.widgets.envelopeblocks import envelope_blocks
from trusscalc.widgets.exploration import Exploration
from trusscalc.widgets.frozen import check_blocks
from trusscalc.widgets.onscreen import button, control, show_in
from trusscalc.widgets.workscreen import work_box

Act = Callable[[Callable[[], None]], None]
"""Makes a move, and tells what went wrong with it."""

LEFT_TO_THE_TOOL = "the simplest for each force"
DETAIL_WORDS = {"summary": "summary only", "members": "with derivations", "all": "with every step"}


class Form:
    """Controls and typeset answers.

    Parameters
    ----------
    exploration : Exploration
        What they show and change.
    act, changed : callable
        Make a move and show its errors; ``changed`` only when a person has changed a control.
    """

    def __init__(self, exploration: Exploration, act: Act, changed: Act) -> None:
        self.exploration = exploration
        self.act = act
        self.changed = changed
        truss = exploration.truss
        members = [(member.name.replace("-", "–"), member.name) for member in truss.members]
        joints = [joint.name for joint in truss.joints]
        self.case = self.control(ipywidgets.Dropdown, "Load case", self.set_case, options=exploration.names)
        self.members = self.control(
            ipywidgets.SelectMultiple, "Check members", self.set_members, options=members, rows=7
        )
        self.kept = self.control(ipywidgets.SelectMultiple, "Keep joints", self.set_kept, options=joints, rows=4)
        self.through = self.control(ipywidgets.SelectMultiple, "Cut through", self.set_through, options=members, rows=4)
        self.line = self.typed("Section points", self.set_line, "2.7, -1; 2.7, 8")
        self.equation = self.control(ipywidgets.Dropdown, "Equation", self.set_equation, options=[LEFT_TO_THE_TOOL])
        self.centre = self.typed("Moment centre", self.set_centre, "a joint, or a point such as 8, 0")
        self.direction = self.typed("Sum of forces", self.set_direction, "x, y, or a direction such as 3, 4")
        self.detail = self.control(
            ipywidgets.Dropdown, "Show check", self.set_detail, options=[(DETAIL_WORDS[each], each) for each in DETAILS]
        )
        self.side = self.button("Keep the other part", exploration.other_side)
        self.nearest = self.button("Take the nearest cut", exploration.take_nearest)
        self.keep = self.button("Keep this cut", exploration.keep)
        self.clear = self.button("No cut", exploration.clear)
        self.forget = self.button("Empty the check", exploration.forget)
        self.envelope = self.button("Envelope of all combinations", self.begin_envelope)
        self.work = ipywidgets.VBox()
        self.answer, self.check = ipywidgets.Output(), ipywidgets.Output()
        self.answer.add_class("tc-answer")
        self.check.add_class("tc-answer")
        self.options: tuple[Possibility, ...] = ()
        self.box = self.laid_out()

    # --- controls -----------------------------------------------------------------------------------------

    def control(self, kind: Any, description: str, change: Callable[[Any], None], **options: Any) -> Any:
        """Return a control whose changes make a move."""
        return control(kind, description, lambda value: self.changed(lambda: change(value)), **options)

    def typed(self, description: str, change: Callable[[str], None], example: str) -> Any:
        """Return a line to type in, read when Enter is pressed or it is left."""
        return self.control(ipywidgets.Text, description, change, placeholder=example, continuous_update=False)

    def button(self, text: str, move: Callable[[], None]) -> Any:
        """Return a button that makes a move."""
        return button(text, lambda: self.act(move))

    def laid_out(self) -> Any:
        """Return everything in its place: what to do with a cut, then the choices, then the answers."""
        buttons = ipywidgets.HBox(
            [self.side, self.nearest, self.keep, self.clear, self.forget, self.envelope],
            layout={"flex_flow": "row wrap"},
        )
        columns = (
            [self.case, self.members, self.detail],
            [self.kept, self.through],
            [self.line, self.equation, self.centre, self.direction],
        )
        boxes = [ipywidgets.VBox(column, layout={"min_width": "21.4em"}) for column in columns]
        controls = ipywidgets.HBox(boxes, layout={"flex_flow": "row wrap"})
        return ipywidgets.VBox([buttons, self.work, controls, self.answer, self.check])

    # --- moves --------------------------------------------------------------------------------------------

    def set_case(self, name: str) -> None:
        """Choose a load case."""
        self.exploration.case = name

    def set_members(self, names: tuple[str, ...]) -> None:
        """Choose the members to check."""
        self.exploration.members = names

    def set_kept(self, joints: tuple[str, ...]) -> None:
        """Choose the joints kept."""
        self.exploration.cut = joints

    def set_through(self, members: tuple[str, ...]) -> None:
        """Choose the members cut."""
        truss = self.exploration.truss
        self.exploration.change(lambda choices: choices.going_through(truss, members))

    def set_line(self, text: str) -> None:
        """Draw the section whose points were typed."""
        self.exploration.draw(typed_line(text))

    def set_equation(self, place: int) -> None:
        """Choose one of the equations offered; 0 leaves it to the tool."""
        self.exploration.about = self.options[place - 1].about if 0 < place <= len(self.options) else None

    def set_centre(self, text: str) -> None:
        """Choose the moment centre that was typed."""
        self.exploration.about = typed_centre(self.exploration.truss, text)

    def set_direction(self, text: str) -> None:
        """Choose the direction that was typed."""
        self.exploration.about = typed_direction(text)

    def set_detail(self, detail: str) -> None:
        """Choose how much of the check is shown."""
        self.exploration.detail = detail

    def begin_envelope(self) -> None:
        """Begin with the envelope of all members; while one is being worked out, no other."""
        work = self.exploration.work_out_envelope()
        self.envelope.disabled = True

        def done() -> None:
            self.envelope.disabled = work.state == "running"

        work.watchers.append(done)
        self.work.children = [work_box(work)]
        done()

    # --- showing ------------------------------------------------------------------------------------------

    def show(self) -> None:
        """Show the present state in every control, and the typeset answer first."""
        present = self.exploration.present
        show_in(self.answer, bundle(answer_blocks(present.answer)) if present.answer else {})
        self.show_choices()
        blocks = check_blocks(present)
        blocks += envelope_blocks(present.envelope) if present.envelope else []
        show_in(self.check, bundle(blocks) if blocks else {})

    def show_choices(self) -> None:
        """Set every control to what was chosen."""
        exploration, choices, answer = self.exploration, self.exploration.choices, self.exploration.answer
        self.case.value, self.detail.value = choices.case, choices.detail
        self.members.value, self.kept.value = choices.members, choices.kept
        self.through.value = choices.cut_members(exploration.truss)
        self.line.value = "; ".join(f"{factor_text(x)}, {factor_text(y)}" for x, y in choices.line)
        self.options = answer.possibilities if answer else ()
        abouts = [way.about for way in self.options]
        words = [(LEFT_TO_THE_TOOL, 0), *((possibility_words(way), n) for n, way in enumerate(self.options, 1))]
        place = 0
        if choices.about is not None:
            place = abouts.index(choices.about) + 1 if choices.about in abouts else len(words)
            words += [(capital(about_words(choices.about)), place)] if place == len(words) else []
        if self.equation.options != tuple(words):
            self.equation.options = words
        self.equation.value = place
        self.centre.value, self.direction.value = _typed(choices.about)
        self.keep.disabled = not (answer and set(answer.solved) & set(answer.members))
        self.side.disabled = not choices.kept
        self.nearest.disabled = not (answer and answer.nearest)
        self.forget.disabled = not choices.members


def _typed(about: About | None) -> tuple[str, str]:
    """Return moment centre and direction as they would be typed."""
    if about is None:
        return "", ""
    pair = f"{factor_text(about.x)}, {factor_text(about.y)}"
    if about.sum == "moment":
        return about.joint or pair, ""
    positive = not (about.x + about.y).reads_negative()
    return "", about.axis if about.axis and positive else pair
