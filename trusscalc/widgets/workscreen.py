"""Long work on the screen: a bar, how far it is in words, and a button that stops it."""

from __future__ import annotations

from typing import Any

import ipywidgets

from trusscalc.widgets.longwork import LongWork
from trusscalc.widgets.onscreen import button


def work_box(work: LongWork[Any]) -> Any:
    """Return bar, words and button of some work; they follow it."""
    bar = ipywidgets.IntProgress(min=0, layout={"width": "14em"})
    words = ipywidgets.Label()
    stop = button("Stop", work.stop)

    def show() -> None:
        bar.max, bar.value = max(1, work.total), work.done
        words.value = work.words()
        stop.disabled = work.state not in {"waiting", "running"}

    work.watchers.append(show)
    show()
    return ipywidgets.HBox([bar, stop, words], layout={"flex_flow": "row wrap"})
