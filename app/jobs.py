"""Long work off the main thread, one job at a time, with progress and cancel.

A job is a function of (cancelled, progress). What it may tell the user comes back as
a signal on the main thread.
"""

from __future__ import annotations

import threading
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QObject, QThread, Signal

from engine.errors import Cancelled, ComputationCancelled, Progress, UserError

Work = Callable[[Cancelled, Progress], Any]


class _Thread(QThread):
    """Runs one function; keeps what came of it."""

    progressed = Signal(float, str)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self._work = work
        self._stop = threading.Event()
        self.result: Any = None
        self.error: BaseException | None = None

    def cancel(self) -> None:
        self._stop.set()

    def run(self) -> None:
        try:
            self.result = self._work(self._stop.is_set, self.progressed.emit)
        except BaseException as error:  # handed to the main thread, see `Jobs`
            self.error = error


class Jobs(QObject):
    """The job that runs, if any.

    Signals
    -------
    started(title)
    progressed(share, doing)
    ended()
        Whatever came of it.
    refused(sentence)
        The job ended with a `UserError`, or another one is still running.
    """

    started = Signal(str)
    progressed = Signal(float, str)
    ended = Signal()
    refused = Signal(str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._thread: _Thread | None = None
        self._title = ""
        self._done: Callable[[Any], None] | None = None

    @property
    def is_running(self) -> bool:
        return self._thread is not None

    def start(self, title: str, work: Work, done: Callable[[Any], None]) -> None:
        """Run `work` in the background, then `done(result)` on the main thread."""
        if self._thread is not None:
            self.refused.emit(
                f"{self._title} is still running; wait for it or cancel it first."
            )
            return
        thread = _Thread(work)
        self._thread, self._title, self._done = thread, title, done
        thread.progressed.connect(self.progressed)
        thread.finished.connect(self._on_finished)
        self.started.emit(title)
        thread.start()

    def cancel(self) -> None:
        """Ask the job to stop; nothing it wrote stays."""
        if self._thread is not None:
            self._thread.cancel()

    def wait(self) -> None:
        """Cancel and wait: the program is about to end."""
        if self._thread is not None:
            self._thread.cancel()
            self._thread.wait()

    def _on_finished(self) -> None:
        thread, done = self._thread, self._done
        assert thread is not None
        assert done is not None
        thread.wait()
        self._thread = self._done = None
        self.ended.emit()
        if thread.error is None:
            done(thread.result)
        elif isinstance(thread.error, UserError):
            self.refused.emit(str(thread.error))
        elif not isinstance(thread.error, ComputationCancelled):
            raise thread.error
