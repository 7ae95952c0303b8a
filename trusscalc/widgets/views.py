"""The views in the page, on top of a general base for widgets; imported when the first of them is shown."""

from __future__ import annotations

from typing import Any

import anywidget
import traitlets

from trusscalc.widgets.pagefiles import javascript, stylesheet

__all__ = ["TrainDrawing", "TrussDrawing"]


class TrussDrawing(anywidget.AnyWidget):
    """The truss on the page: shows a state, and sends what pointer and keys did as messages.

    Attributes
    ----------
    truss : dict
        What is drawn, sent once; see ``pagedata.truss_data``.
    state : dict
        Everything that a move changes, replaced as a whole; see ``pagedata.state_data``.
    """

    _esm = javascript("drawing.js")
    _css = stylesheet("drawing.css")
    truss: Any = traitlets.Dict().tag(sync=True)
    state: Any = traitlets.Dict().tag(sync=True)

    def __repr__(self) -> str:
        """Return what a front end shows that has no live view."""
        return f"Drawing of {self.truss.get('title') or 'a truss'}; its static form stands beside it."


class TrainDrawing(anywidget.AnyWidget):
    """A train over an influence line: shows where it stands, and sends where pointer and keys have moved it.

    Attributes
    ----------
    truss, line : dict
        What is drawn, sent once; see ``pagedata.truss_data`` and ``traindata.line_data``.
    state : dict
        Where the train stands and what that gives; see ``traindata.train_data``.
    """

    _esm = javascript("train.js")
    _css = stylesheet("drawing.css")
    truss: Any = traitlets.Dict().tag(sync=True)
    line: Any = traitlets.Dict().tag(sync=True)
    state: Any = traitlets.Dict().tag(sync=True)

    def __repr__(self) -> str:
        """Return what a front end shows that has no live view."""
        return f"Influence line of {self.line.get('words')} with a train; its static form stands beside it."
