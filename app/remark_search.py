"""Finds the remarks of a layout in the background, so that no edit waits for them."""

from __future__ import annotations

import contextlib
from dataclasses import dataclass

from PySide6.QtCore import QObject, Qt, Signal

from app.worker import Outdated, Worker
from engine.items import ConfirmedRemark
from engine.layout import Layout
from engine.origins import Assumption, assumptions
from engine.remarks import Remark, confirmed_remarks, remarks
from engine.results import Assessment


@dataclass(frozen=True, eq=False)
class Found:
    """What is to be said about a layout.

    Attributes
    ----------
    open : tuple of Remark
        Blocking ones first, then warnings, then notes.
    confirmed : tuple of pairs
        Remarks that a person lets stand.
    assumed : tuple of Assumption
    has_results : bool
        Whether the results of this layout were looked at as well.
    """

    layout: Layout
    open: tuple[Remark, ...] = ()
    confirmed: tuple[tuple[Remark, ConfirmedRemark], ...] = ()
    assumed: tuple[Assumption, ...] = ()
    has_results: bool = False


def found_in(layout: Layout, assessment: Assessment | None) -> Found:
    """Remarks and assumptions; an assessment of another layout says nothing here."""
    if assessment is not None and assessment.layout != layout:
        assessment = None
    return Found(
        layout,
        remarks(layout, assessment),
        confirmed_remarks(layout, assessment),
        assumptions(layout),
        assessment is not None,
    )


class RemarkSearch(QObject):
    """Answers the newest question.

    Signals
    -------
    found(Found)
        Sent from the window's own thread.
    """

    found = Signal(object)
    _handed_over = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self._worker: Worker[tuple[Layout, Assessment | None]] | None = None
        self._handed_over.connect(self.found, Qt.ConnectionType.QueuedConnection)

    def ask(self, layout: Layout, assessment: Assessment | None) -> None:
        """Look for the remarks of a layout."""
        if self._worker is None:
            self._worker = Worker("remarks", self._work)
        self._worker.ask((layout, assessment))

    def close(self) -> None:
        """End the search."""
        if self._worker is not None:
            self._worker.close()
            self._worker = None

    def _work(self, task: tuple[Layout, Assessment | None], outdated: Outdated) -> None:
        found = found_in(*task)
        if not outdated():
            # The window may be gone by now, and with it what would listen.
            with contextlib.suppress(RuntimeError):
                self._handed_over.emit(found)
