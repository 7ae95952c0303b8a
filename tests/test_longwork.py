"""Long work: it tells how far it is, stops when told to, and leaves nothing half done."""

from __future__ import annotations

import asyncio
import threading
from typing import Any

import pytest
from trade_trusses import pratt

from trusscalc.envelopes import envelope
from trusscalc.errors import InputError
from trusscalc.loads import Combination, LoadCase
from trusscalc.trussfile import TrussFile
from trusscalc.widgets import explore
from trusscalc.widgets.longwork import LongWork, StoppedError

BRIDGE = pratt(6)
STATED = TrussFile(
    BRIDGE.truss,
    (LoadCase("dead", BRIDGE.case.loads), LoadCase("wind", {"U2": (10, 0)})),
    (Combination("both", {"dead": ["1.35", "1"], "wind": "1.5"}, optional=["wind"]),),
)


def steps(progress: Any, gate: threading.Event, at: int = 5) -> list[int]:
    """Do ten steps, and wait at one of them."""
    found: list[int] = []
    for number in range(10):
        progress(number, 10, f"step {number}")
        if number == at:
            gate.wait(10)
        found.append(number)
    return found


def test_a_stop_leaves_no_result() -> None:
    """Told to stop in the middle: no result, nothing taken, and the words say how far it was."""
    gate, taken = threading.Event(), []
    work = LongWork("Ten steps", lambda progress: steps(progress, gate), taken.append).start()
    while work.what != "step 5":
        assert work.state == "running"
    work.stop()
    gate.set()
    with pytest.raises(StoppedError, match="stopped before it was done; nothing was changed"):
        work.result()
    assert (work.state, taken) == ("stopped", [])
    assert work.words() == "Ten steps: stopped after 5 of 10; nothing was changed."


def test_a_stop_after_the_last_word_still_counts() -> None:
    """Between the last step and the result there is no moment at which a stop is lost."""
    gate, taken = threading.Event(), []
    work = LongWork("Ten steps", lambda progress: steps(progress, gate, at=9), taken.append).start()
    work.stop()
    gate.set()
    with pytest.raises(StoppedError):
        work.result()
    assert taken == []


def test_an_interrupted_cell_stops_the_work(monkeypatch: pytest.MonkeyPatch) -> None:
    """The kernel's own interruption, while a cell waits for the result."""
    gate = threading.Event()
    work = LongWork("Ten steps", lambda progress: steps(progress, gate)).start()

    def interrupted() -> None:
        gate.set()
        monkeypatch.undo()
        raise KeyboardInterrupt

    monkeypatch.setattr(work, "_tell_now", interrupted)
    with pytest.raises(KeyboardInterrupt):
        work.result()
    assert work.state == "stopped"


def test_a_failure_is_raised_where_the_result_is_asked_for() -> None:
    """And told to those who watch; never swallowed."""
    told: list[str] = []

    def failing(progress: Any) -> None:
        progress(1, 2, "half")
        message = "a planted failure"
        raise InputError(message)

    work = LongWork("Failing", failing)
    work.watchers.append(lambda: told.append(work.state))
    with pytest.raises(InputError, match="has not been started"):
        work.result()
    work.start()
    with pytest.raises(InputError, match="a planted failure"):
        work.result()
    assert told[-1] == "failed"
    assert work.words() == "Failing: a planted failure"


def test_watchers_are_told_in_the_thread_that_began() -> None:
    """Where a notebook's other callbacks run, so that the two never meet."""

    async def notebook() -> list[str]:
        told: list[str] = []
        finished = asyncio.Event()
        work = LongWork("Steps", lambda progress: [progress(n, 3, "") for n in range(3)])
        work.watchers.append(lambda: told.append(threading.current_thread().name))
        work.watchers.append(lambda: finished.set() if work.state == "finished" else None)
        work.start()
        await asyncio.wait_for(finished.wait(), 10)
        return told

    assert set(asyncio.run(notebook())) == {threading.main_thread().name}


def test_an_envelope_in_the_background_equals_one_in_the_foreground() -> None:
    """The exploration takes it when all is done, and its form on file shows it."""
    trial = explore(STATED, "dead")
    assert trial.envelope is None
    work = trial.work_out_envelope(["U2-U3", "L2-L3"])
    assert work.result() == envelope(STATED, ["U2-U3", "L2-L3"])
    assert trial.envelope == work.result()
    assert "Envelope" in trial.frozen()["text/plain"]
    trial.case = "wind"
    assert trial.envelope == work.result()
    assert work.title == "Envelope of two members"


def test_a_stopped_envelope_changes_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    """The one before stays."""
    trial = explore(STATED, "dead")
    before = trial.work_out_envelope(["U2-U3"]).result()
    gate = threading.Event()

    def slow(*args: Any, progress: Any, **others: Any) -> Any:
        gate.wait(10)
        return envelope(*args, progress=progress, **others)

    monkeypatch.setattr("trusscalc.envelopes.envelope", slow)
    work = trial.work_out_envelope("all")
    work.stop()
    gate.set()
    with pytest.raises(StoppedError):
        work.result()
    assert trial.envelope is before


def test_bar_words_and_button_follow() -> None:
    """On the screen: how far, in a bar and in words, and a button that stops."""
    pytest.importorskip("ipywidgets")
    from trusscalc.widgets.workscreen import work_box  # noqa: PLC0415

    gate = threading.Event()
    work = LongWork("Ten steps", lambda progress: steps(progress, gate))
    box = work_box(work)
    bar, stop, words = box.children
    assert words.value == "Ten steps: not begun."
    work.start()
    stop.click()
    gate.set()
    with pytest.raises(StoppedError):
        work.result()
    assert words.value.startswith("Ten steps: stopped after")
    assert (bar.max, stop.disabled) == (10, True)
