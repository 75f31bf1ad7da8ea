"""Questions answered in a thread of its own: the newest counts, words for failures."""

from __future__ import annotations

import logging
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QObject, Qt, Signal

from app.field_store import load_kernels
from app.worker import Outdated, Worker
from engine.errors import Cancelled, ComputationCancelled, UserError

Work = Callable[[Any, Cancelled], Any]


class Answers(QObject):
    """Computes answers off the window's thread.

    Parameters
    ----------
    name : str
        What is computed, for the thread and in sentences.
    work : callable
        Gets the question, and a callable that says whether to stop.

    Signals
    -------
    ready(question, answer)
        In the window's thread; the answer is a sentence where there is none.
    """

    ready = Signal(object, object)
    _found = Signal(object, object)

    def __init__(self, name: str, work: Work, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._name, self._work = name, work
        self.asked: object = None
        self._found.connect(self._on_found, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[object] = Worker(name, self._compute, load_kernels)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits."""
        return self._worker.is_idle

    def ask(self, question: object) -> bool:
        """Answer this next; False when it was the last one asked."""
        if question == self.asked:
            return False
        self.asked = question
        self._worker.ask(question)
        return True

    def forget(self) -> None:
        """What was asked is of no interest any more."""
        self.asked = None

    def close(self) -> None:
        """Stop the thread, before the window goes."""
        self._worker.close()

    def _compute(self, question: object, outdated: Outdated) -> None:
        """In the thread."""
        try:
            answer = self._work(question, outdated)
        except ComputationCancelled:
            return
        except UserError as error:
            answer = str(error)
        except Exception:
            logging.getLogger(__name__).exception("%s failed", self._name)
            answer = f"{self._name.capitalize()} could not be computed."
        self._found.emit(question, answer)

    def _on_found(self, question: object, answer: object) -> None:
        if self.asked is not None:
            self.ready.emit(question, answer)
