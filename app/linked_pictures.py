"""Linked files of backing drawings read in the background, so that they show."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QObject, Qt, Signal

from app.backing import folder_of
from app.document import Document
from app.worker import Outdated, Worker
from engine.embedded_picture import shown_picture
from engine.errors import ComputationCancelled, UserError
from engine.exchange.linked_drawings import link_fault, read_linked
from engine.layout import Layout
from engine.places import BackingDrawing

_Task = tuple[Layout, Path | None]


class LinkedPictures(QObject):
    """Follows the document; reads each linked file once, in a thread of its own.

    Signals
    -------
    came()
        A picture is at hand that was not before.
    missed(sentence)
        Of a layout just opened: a file is missing or has changed.
    """

    came = Signal()
    missed = Signal(str)
    _read = Signal()
    _failed = Signal(str)

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self._told: set[tuple[str, str]] = set()
        self._worker: Worker[_Task] | None = None
        queued = Qt.ConnectionType.QueuedConnection
        self._read.connect(self.came, queued)
        self._failed.connect(self.missed, queued)
        document.changed.connect(self._on_changed)

    @property
    def is_idle(self) -> bool:
        """Nothing is being read."""
        return self._worker is None or self._worker.is_idle

    def close(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        if self._worker is not None:
            self._worker.close()

    def _on_changed(self, layout: Layout, _ids: object) -> None:
        wanted = [d for d in layout.backing_drawings if _lacks(d)]
        if not wanted:
            return
        if self._worker is None:
            self._worker = Worker("linked drawings", self._work)
        self._worker.ask((layout, folder_of(self._document)))

    def _work(self, task: _Task, outdated: Outdated) -> None:
        layout, folder = task
        for drawing in filter(_lacks, layout.backing_drawings):
            fault = link_fault(drawing, folder)
            if not fault:
                try:
                    read_linked(drawing, folder, cancelled=outdated)
                except ComputationCancelled:
                    return
                except UserError as error:
                    fault = str(error)
            key = (drawing.id, fault)
            if not fault:
                self._read.emit()
            elif key not in self._told:
                self._told.add(key)
                self._failed.emit(fault)


def _lacks(drawing: BackingDrawing) -> bool:
    return bool(drawing.linked_file) and not shown_picture(drawing)
