"""A slip of paper beneath a bar, over what lies there: nothing moves when it comes."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QObject, QPoint, Qt
from PySide6.QtWidgets import QFrame, QWidget

from app.theme import STEP

#: Part of the bar's width that a slip takes at most, so that its sides stay free.
_WIDEST = 0.8


class Slip(QFrame):
    """Lies over the window, under the middle of its bar; comes and goes with it."""

    def __init__(self, bar: QWidget) -> None:
        super().__init__(bar)
        self._bar = bar
        self._is_wanted = False
        self.setFrameShape(QFrame.Shape.StyledPanel)
        self.setAutoFillBackground(True)
        self.hide()
        bar.installEventFilter(self)

    def come(self) -> None:
        """Show it, as large as its words need."""
        self._is_wanted = True
        self._lie()

    def go(self) -> None:
        """Take it away."""
        self._is_wanted = False
        self.hide()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        kind = event.type()
        if kind == QEvent.Type.Hide:
            self.hide()
        elif kind in (QEvent.Type.Show, QEvent.Type.Resize, QEvent.Type.Move):
            self._lie()
        return super().eventFilter(watched, event)

    def _lie(self) -> None:
        if not self._is_wanted or not self._bar.isVisible():
            return
        window = self._bar.window()
        if self.parentWidget() is not window:
            self.setParent(window)
            self._take_turn()
        full = self._bar.width()
        widest = max(round(_WIDEST * full), 1)
        width, height = min(self.sizeHint().width(), widest), self.sizeHint().height()
        if self.hasHeightForWidth():
            # As few lines as there can be, and no wider than they need.
            height = self.heightForWidth(widest)
            wider = range(width, widest, 2 * STEP)
            enough = (w for w in wider if self.heightForWidth(w) <= height)
            width = next(enough, widest)
        left = (full - width) // 2
        at = self._bar.mapTo(window, QPoint(left, self._bar.height() + STEP))
        self.setGeometry(at.x(), at.y(), width, height)
        self.show()
        self.raise_()

    def _take_turn(self) -> None:
        """Come in the order of Tab where the bar would, and not last of all."""
        tab = Qt.FocusPolicy.TabFocus
        before: QWidget = self._bar
        while not before.focusPolicy() & tab or self.isAncestorOf(before):
            further = before.previousInFocusChain()
            if further is None or further is self._bar:
                return
            before = further
        for child in self.findChildren(QWidget):
            if child.focusPolicy() & tab:
                QWidget.setTabOrder(before, child)
                before = child
