"""Collects Python's garbage on the window's own thread, and nowhere else.

A collection starts wherever memory happens to be asked for. In a worker it would
delete widgets of a window that is gone there, and Qt ends the process for that.
"""

from __future__ import annotations

import gc
import time

from PySide6.QtCore import QObject, Qt, QTimer
from PySide6.QtGui import QGuiApplication

#: How often it is looked whether anything is due. [ms]
INTERVAL = 250

#: A collection of everything takes long: at most this often. [s]
WHOLE = 20.0


def due() -> int | None:
    """The oldest generation that is due by Python's own thresholds; None for none."""
    counts, thresholds = gc.get_count(), gc.get_threshold()
    if counts[0] <= thresholds[0]:
        return None
    return max(
        generation
        for generation in range(3)
        if generation == 0 or counts[generation] > thresholds[generation]
    )


class Collection(QObject):
    """Takes collecting over from Python for as long as the application runs."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        gc.disable()
        self._last_whole = time.monotonic()
        self._timer = QTimer(self)
        self._timer.setInterval(INTERVAL)
        self._timer.timeout.connect(self.collect_due)
        self._timer.start()

    def collect_due(self) -> None:
        """Collect what is due; never while a button is held, so that a drag is even."""
        generation = due()
        if generation is None:
            return
        if QGuiApplication.mouseButtons() != Qt.MouseButton.NoButton:
            return
        now = time.monotonic()
        if generation == 2:
            if now - self._last_whole < WHOLE:
                generation = 1
            else:
                self._last_whole = now
        gc.collect(generation)
