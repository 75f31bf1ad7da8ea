"""A ring around what has the keyboard, where the style's own mark is hardly seen."""

from __future__ import annotations

import shiboken6
from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QRegion
from PySide6.QtWidgets import (
    QAbstractScrollArea,
    QApplication,
    QTabBar,
    QToolButton,
    QWidget,
)

from app.theme import theme_shown

_WEAK = (QAbstractScrollArea, QTabBar, QToolButton)

#: [px]
_THICK = 2


class FocusMark(QObject):
    """Follows the keyboard through all windows, once keys are used to get about.

    One for the application: whatever a window hears of it would keep that window.
    """

    def __init__(self, application: QApplication) -> None:
        super().__init__(application)
        self.ring: _Ring | None = None
        application.focusChanged.connect(self._on_focus)

    def _on_focus(self, _old: QWidget | None, new: QWidget | None) -> None:
        ring, self.ring = self.ring, None
        # What it lay on may have gone, and the ring with it.
        if ring is not None and shiboken6.isValid(ring):
            ring.hide()
            ring.deleteLater()
        by_key = Qt.WidgetAttribute.WA_KeyboardFocusChange
        if isinstance(new, _WEAK) and new.window().testAttribute(by_key):
            self.ring = _Ring(new)


class _Ring(QWidget):
    """Lies along the edge of a widget and takes nothing from it."""

    def __init__(self, widget: QWidget) -> None:
        super().__init__(widget)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        widget.installEventFilter(self)
        self._lie(widget)
        self.show()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Resize and isinstance(watched, QWidget):
            self._lie(watched)
        return super().eventFilter(watched, event)

    def _lie(self, widget: QWidget) -> None:
        whole = widget.rect()
        inner = whole.adjusted(_THICK, _THICK, -_THICK, -_THICK)
        self.setGeometry(whole)
        # What lies within is not drawn anew for its sake.
        self.setMask(QRegion(whole).subtracted(QRegion(inner)))
        self.raise_()

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.fillRect(self.rect(), QColor(theme_shown().accent))
        painter.end()
