"""An issued layout opened with another program version: what its results are now."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

import engine
from app.answers import Answers
from app.document import EVERYTHING, Document
from app.report_revisions import names_of, recomputed_sentence
from engine.assessment import assess
from engine.errors import Cancelled
from engine.layout import Layout
from engine.revisions import as_issued, recomputed


class Reopened(QObject):
    """Computes again, in a thread, what another version issued.

    Signals
    -------
    found(sentence, moved)
        How far the results are from those issued, and whether any moved.
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
        """Compute the open layout again, where another version issued it."""
        self.sentence = ""
        whole = self._document.whole
        if self._answers is not None:
            self._answers.forget()
        last = whole.revisions[-1] if whole.revisions else None
        if last is None or last.program_version == engine.__version__:
            return
        if self._answers is None:
            self._answers = Answers("the issued layout", _computed, self)
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


def _computed(whole: Layout, cancelled: Cancelled) -> tuple[str, bool] | None:
    """In the thread; None where the layout was edited since it was issued."""
    if not as_issued(whole, whole.revisions[-1]):
        return None
    assessment = assess(whole, certify=True, cancelled=cancelled)
    again = recomputed(whole, assessment)
    if again is None:
        return None
    unit = whole.settings.flux_density_unit
    return recomputed_sentence(again, names_of(whole), unit), again.largest is not None
