"""Finds the remarks of a layout in the background, so that no edit waits for them."""

from __future__ import annotations

import contextlib
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QObject, Qt, Signal

from app.worker import Outdated, Worker
from engine.exchange.linked_drawings import link_remarks
from engine.items import ConfirmedRemark
from engine.layout import Layout
from engine.origins import Assumption, assumptions
from engine.remarks import Remark, confirmation, confirmed_remarks, remarks
from engine.results import Assessment


@dataclass(frozen=True, eq=False)
class Found:
    """What is to be said about a layout.

    Attributes
    ----------
    open : tuple of Remark
        Those on the chosen variant; then blocking ones, warnings, notes.
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


def found_in(
    layout: Layout,
    assessment: Assessment | None,
    of_variant: tuple[Remark, ...] = (),
    folder: Path | None = None,
) -> Found:
    """Remarks and assumptions; an assessment of another layout says nothing here.

    `of_variant` are those on the chosen variant, whose layout knows no base. Linked
    files are looked for from the layout's `folder`.
    """
    if assessment is not None and assessment.layout != layout:
        assessment = None
    beside = (*of_variant, *link_remarks(layout, folder))
    stood = [(r, confirmation(layout, r)) for r in beside]
    return Found(
        layout,
        (*(r for r, by in stood if by is None), *remarks(layout, assessment)),
        (
            *((r, by) for r, by in stood if by is not None),
            *confirmed_remarks(layout, assessment),
        ),
        assumptions(layout),
        assessment is not None,
    )


#: A layout, its results, what is said of it as a variant, and its file's folder.
_Task = tuple[Layout, Assessment | None, tuple[Remark, ...], Path | None]


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
        self._worker: Worker[_Task] | None = None
        self._handed_over.connect(self.found, Qt.ConnectionType.QueuedConnection)

    def ask(
        self,
        layout: Layout,
        assessment: Assessment | None,
        of_variant: tuple[Remark, ...] = (),
        folder: Path | None = None,
    ) -> None:
        """Look for the remarks of a layout; those on its variant are known."""
        if self._worker is None:
            self._worker = Worker("remarks", self._work)
        self._worker.ask((layout, assessment, of_variant, folder))

    def close(self) -> None:
        """End the search."""
        if self._worker is not None:
            self._worker.close()
            self._worker = None

    def _work(self, task: _Task, outdated: Outdated) -> None:
        found = found_in(*task)
        if not outdated():
            # The window may be gone by now, and with it what would listen.
            with contextlib.suppress(RuntimeError):
                self._handed_over.emit(found)
