"""Pictures of a PDF's pages, drawn in a thread and kept while there is room."""

from __future__ import annotations

import logging
from collections import OrderedDict
from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QImage

from app.worker import Outdated, Worker
from engine.errors import UserError
from engine.exchange.pdf_pages import page_picture

#: Memory for pictures that are not in sight. [bytes]
ROOM = 160 * 2**20

#: A page, from 0, and the width of its picture in pixels.
Key = tuple[int, int]


@dataclass(frozen=True, eq=False)
class _Task:
    content: bytes
    keys: tuple[Key, ...]


class PagePictures(QObject):
    """Draws the pages that are wanted, the newest wish first.

    Signals
    -------
    ready(page)
        A picture of this page came.
    refused(sentence)
        A page cannot be drawn.
    """

    ready = Signal(int)
    refused = Signal(str)
    _drawn = Signal(object, object, object)

    def __init__(self, parent: QObject | None = None, room: int = ROOM) -> None:
        super().__init__(parent)
        self._room = room
        self._content = b""
        self._kept: OrderedDict[Key, QImage] = OrderedDict()
        self._wanted: tuple[Key, ...] = ()
        self._drawn.connect(self._on_drawn, Qt.ConnectionType.QueuedConnection)
        self._worker: Worker[_Task] = Worker("pages", self._work)

    @property
    def is_idle(self) -> bool:
        """All that is wanted is there."""
        return all(key in self._kept for key in self._wanted)

    def show_pdf(self, content: bytes) -> None:
        """Draw the pages of another PDF from now on."""
        self._content = content
        self._kept.clear()
        self._wanted = ()

    def want(self, keys: Sequence[Key]) -> None:
        """Draw these, in this order, unless they are there."""
        self._wanted = tuple(keys)
        for key in keys:
            if key in self._kept:
                self._kept.move_to_end(key)
        missing = tuple(key for key in keys if key not in self._kept)
        if missing:
            self._worker.ask(_Task(self._content, missing))

    def picture(self, page: int, width: int) -> QImage | None:
        """The page's picture, of another width until that one is there."""
        exact = self._kept.get((page, width))
        if exact is not None:
            return exact
        others = [w for p, w in self._kept if p == page]
        if not others:
            return None
        return self._kept[page, max(others)]

    def close(self) -> None:
        """Stop the thread, before the window goes."""
        self._worker.close()

    def _work(self, task: _Task, outdated: Outdated) -> None:
        """In the thread."""
        for page, width in task.keys:
            if outdated():
                return
            found: object
            try:
                drawn = page_picture(task.content, page, width)
                # A copy: the picture holds no memory of its own.
                found = QImage(
                    drawn.pixels,
                    drawn.width,
                    drawn.height,
                    drawn.stride,
                    QImage.Format.Format_RGB32,
                ).copy()
            except UserError as error:
                found = str(error)
            except Exception:
                logging.getLogger(__name__).exception("drawing a page failed")
                found = f"Page {page + 1} could not be drawn."
            self._drawn.emit(task.content, (page, width), found)

    def _on_drawn(self, content: object, key: object, found: object) -> None:
        if content is not self._content or not isinstance(key, tuple):
            return
        if not isinstance(found, QImage):
            self.refused.emit(str(found))
            return
        self._kept[key] = found
        self._drop()
        self.ready.emit(key[0])

    def _drop(self) -> None:
        used = sum(image.sizeInBytes() for image in self._kept.values())
        for key in list(self._kept):
            if used <= self._room:
                return
            if key not in self._wanted:
                used -= self._kept.pop(key).sizeInBytes()
