"""An issued layout opened: whether it was edited, else what its results are now."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

import engine
from app.answers import Answers
from app.document import EVERYTHING, Document
from engine.errors import Cancelled
from engine.layout import Layout
from engine.revisions import as_issued


class Reopened(QObject):
    """Says, by a thread, what became of an issued layout that is opened.

    Signals
    -------
    found(sentence, moved)
        That it was edited since; else how far the results are from those that another
        version issued, and whether any moved.
    """

    found = Signal(str, bool)

    def __init__(self, document: Document, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._answers: Answers | None = None
        #: What was found of the open layout; empty: nothing, or not yet.
        self.sentence = ""
        document.changed.connect(self._on_changed)

    def close(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        if self._answers is not None:
            self._answers.close()

    def look(self) -> None:
        """Look at the open layout, where it was issued."""
        self.sentence = ""
        whole = self._document.whole
        if self._answers is not None:
            self._answers.forget()
        if not whole.revisions:
            return
        if self._answers is None:
            self._answers = Answers("the issued layout", _found, self)
            self._answers.ready.connect(self._on_ready)
        self._answers.ask(whole)

    def _on_changed(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self.look()

    def _on_ready(self, _whole: object, answer: object) -> None:
        if isinstance(answer, str):
            self.sentence, moved = answer, True
        elif isinstance(answer, tuple):
            self.sentence, moved = answer
        else:
            return
        self.found.emit(self.sentence, moved)


def _found(whole: Layout, cancelled: Cancelled) -> tuple[str, bool] | None:
    """In the thread; None where this version issued the very layout."""
    # Here: it loads what draws on paper.
    from engine.commands.revisions import opening

    last = whole.revisions[-1]
    is_ours = last.program_version == engine.__version__
    if is_ours and as_issued(whole, last):
        return None
    found = opening(whole, cancelled=cancelled)
    return None if found is None else (found.sentence, found.moved)
