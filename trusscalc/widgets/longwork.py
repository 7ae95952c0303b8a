"""Work that takes a while: how far it is, a way to stop it, and its result as a whole or not at all.

It runs beside the notebook, so that the rest goes on. Whatever does the work tells its progress from time to time; a
stop takes effect there. Nothing is handed on before everything is done, and those who watch are told in the thread
that began the work, where a notebook's other callbacks run, so that the two never meet.
"""

from __future__ import annotations

import asyncio
import contextlib
import threading
import time
from collections.abc import Callable
from typing import Any, Final, Generic, Literal, TypeVar

from trusscalc.errors import InputError, TrusscalcError

Result = TypeVar("Result")
Progress = Callable[[int, int, str], None]
"""Told what has been done, of how much, and what comes next; may raise to stop."""
State = Literal["waiting", "running", "finished", "stopped", "failed"]

OFTEN: Final = 0.1
"""Seconds between two words to those who watch."""


class StoppedError(TrusscalcError, RuntimeError):
    """The work was stopped before it was done; nothing was changed."""


class LongWork(Generic[Result]):
    """One piece of work in the background.

    Parameters
    ----------
    title : str
        What is done.
    work : callable
        Does it, and tells its progress to what it is given.
    finished : callable, optional
        Takes the result, once, when all is done.
    screen_of : callable, optional
        Makes what is shown in a cell.

    Attributes
    ----------
    title : str
        What is done.
    state : str
        ``waiting``, ``running``, ``finished``, ``stopped`` or ``failed``.
    done, total : int
        How far it is.
    what : str
        What comes next.
    problem : Exception or None
        Why it failed.

    Examples
    --------
    >>> work = LongWork("Counting", lambda progress: [progress(n, 3, "a number") for n in range(3)])
    >>> len(work.start().result()), work.state
    (3, 'finished')
    """

    def __init__(
        self,
        title: str,
        work: Callable[[Progress], Result],
        finished: Callable[[Result], None] | None = None,
        *,
        screen_of: Callable[[LongWork[Result]], Any] | None = None,
    ) -> None:
        self.title = title
        self.state: State = "waiting"
        self.done, self.total, self.what = 0, 0, ""
        self.problem: Exception | None = None
        self.watchers: list[Callable[[], None]] = []
        self._work, self._finished = work, finished
        self._found: list[Result] = []
        self._stop = threading.Event()
        self._told = 0.0
        self._thread: threading.Thread | None = None
        self._loop: asyncio.AbstractEventLoop | None = None
        self._awaited = False
        self._screen_of = screen_of

    def start(self) -> LongWork[Result]:
        """Begin, once; return the work itself."""
        if self._thread is None:
            self.state = "running"
            with contextlib.suppress(RuntimeError):  # outside a notebook nothing else runs meanwhile
                self._loop = asyncio.get_running_loop()
            self._thread = threading.Thread(target=self._run, name=self.title, daemon=True)
            self._thread.start()
        return self

    def stop(self) -> None:
        """Stop at the next word of progress; what was there before stays."""
        self._stop.set()

    def result(self) -> Result:
        """Wait for the result; an interruption of the waiting cell stops the work.

        Raises
        ------
        StoppedError
            When it was stopped.
        InputError
            When it was never started.
        """
        if self._thread is None:
            message = f"{self.title} has not been started; call start()"
            raise InputError(message)
        self._awaited = True
        try:
            while self._thread.is_alive():
                self._thread.join(OFTEN)
                self._tell_now()
        except KeyboardInterrupt:
            self.stop()
            self._thread.join()
            self._tell_now()
            raise
        finally:
            self._awaited = False
        if self.problem is not None:
            raise self.problem
        if not self._found:
            message = f"{self.title} was stopped before it was done; nothing was changed"
            raise StoppedError(message)
        return self._found[0]

    def _run(self) -> None:
        """Do the work; the result is taken whole, or not at all."""
        try:
            found = self._work(self._progress)
            self._progress(self.total, self.total, "")  # a stop after the last word still counts
            if self._finished is not None:
                self._finished(found)
        except StoppedError:
            self.state = "stopped"
        except Exception as problem:  # noqa: BLE001 - raised again where the result is asked for, and shown
            self.state, self.problem = "failed", problem
        else:
            self._found.append(found)
            self.state = "finished"
        self._tell()

    def _progress(self, done: int, total: int, what: str) -> None:
        if self._stop.is_set():
            message = f"{self.title} was stopped"
            raise StoppedError(message)
        self.done, self.total, self.what = done, total, what
        if time.monotonic() - self._told >= OFTEN:
            self._told = time.monotonic()
            self._tell()

    def _tell(self) -> None:
        """Have those who watch told, in the thread that began the work where it has a loop."""
        if self._awaited:
            return  # whoever waits tells them
        if self._loop is not None and self._loop.is_running():
            self._loop.call_soon_threadsafe(self._tell_now)
        else:
            self._tell_now()

    def _tell_now(self) -> None:
        for watcher in tuple(self.watchers):
            watcher()

    def words(self) -> str:
        """Return how far the work is, in a sentence."""
        far = f"{self.done} of {self.total}" if self.total else "begun"
        match self.state:
            case "finished":
                return f"{self.title}: done."
            case "stopped":
                return f"{self.title}: stopped after {far}; nothing was changed."
            case "failed":
                return f"{self.title}: {self.problem}"
            case "waiting":
                return f"{self.title}: not begun."
        return f"{self.title}: {far}{f', {self.what}' if self.what else ''}."

    def _ipython_display_(self) -> None:
        """Show progress and a way to stop, if there is a screen for it, else how far it is."""
        from IPython.display import display  # noqa: PLC0415 - only where there are cells

        shown = self._screen_of(self) if self._screen_of is not None else {"text/plain": self.words()}
        display(shown, raw=isinstance(shown, dict))
