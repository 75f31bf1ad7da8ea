"""A row of widgets that goes on in a further row where the width does not suffice."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QRect, QSize, Qt
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLayout,
    QLayoutItem,
    QSizePolicy,
    QWidget,
)

from app.theme import STEP

_ACROSS = Qt.Orientation.Horizontal


class WrappingRow(QLayout):
    """Lays widgets out like words in a text; hidden ones take no place."""

    def __init__(self, parent: QWidget, gap: int, margin: int) -> None:
        super().__init__(parent)
        self._items: list[QLayoutItem] = []
        self._gap, self._row_gap = gap, min(gap, STEP)
        self.setContentsMargins(margin, margin // 2, margin, margin // 2)

    def addItem(self, item: QLayoutItem) -> None:
        self._items.append(item)

    def count(self) -> int:
        return len(self._items)

    def itemAt(self, index: int) -> QLayoutItem | None:
        return self._items[index] if 0 <= index < len(self._items) else None

    def takeAt(self, index: int) -> QLayoutItem | None:
        if 0 <= index < len(self._items):
            item = self._items.pop(index)
            self.invalidate()
            return item
        return None

    def expandingDirections(self) -> Qt.Orientation:
        return Qt.Orientation(0)

    def hasHeightForWidth(self) -> bool:
        return True

    def heightForWidth(self, width: int) -> int:
        return self._laid_out(QRect(0, 0, width, 0), moves=False)

    def setGeometry(self, rect: QRect) -> None:
        super().setGeometry(rect)
        self._laid_out(rect, moves=True)

    def sizeHint(self) -> QSize:
        """All in one row."""
        margins = self.contentsMargins()
        sizes = [item.sizeHint() for item in self._items if not item.isEmpty()]
        gaps = self._gap * max(0, len(sizes) - 1)
        return QSize(
            sum(s.width() for s in sizes) + gaps + margins.left() + margins.right(),
            max((s.height() for s in sizes), default=0)
            + margins.top()
            + margins.bottom(),
        )

    def minimumSize(self) -> QSize:
        """The widest widget in each row alone."""
        size = QSize()
        for item in self._items:
            if not item.isEmpty():
                size = size.expandedTo(item.minimumSize())
        margins = self.contentsMargins()
        return size + QSize(
            margins.left() + margins.right(), margins.top() + margins.bottom()
        )

    def _laid_out(self, rect: QRect, *, moves: bool) -> int:
        """Place the widgets in the rectangle's width; the height that they take."""
        inner = rect.marginsRemoved(self.contentsMargins())
        rows: list[list[QLayoutItem]] = []
        x = 0
        for item in self._items:
            if item.isEmpty():
                continue
            width = min(item.sizeHint().width(), inner.width())
            if not rows or x + width > inner.width():
                rows.append([])
                x = 0
            rows[-1].append(item)
            x += width + self._gap
        y = inner.top()
        for row in rows:
            height = max(item.sizeHint().height() for item in row)
            if moves:
                self._place(row, QRect(inner.left(), y, inner.width(), height))
            y += height + self._row_gap
        margins = self.contentsMargins()
        return (
            y
            - (self._row_gap if rows else 0)
            - inner.top()
            + (margins.top() + margins.bottom())
        )

    def _place(self, row: list[QLayoutItem], rect: QRect) -> None:
        """One row, each widget in the middle of its height."""
        x = rect.left()
        for item in row:
            hint = item.sizeHint()
            width = min(hint.width(), rect.width())
            if item is row[-1] and item.expandingDirections() & _ACROSS:
                width = rect.right() + 1 - x
            top = rect.top() + (rect.height() - hint.height()) // 2
            item.setGeometry(QRect(QPoint(x, top), QSize(width, hint.height())))
            x += width + self._gap


class ReservedRow(QWidget):
    """Asks for the same room whatever it holds, and takes more where there is more."""

    def __init__(self, width: int, height: int) -> None:
        super().__init__()
        self._room = QSize(width, height)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.row = QHBoxLayout(self)
        self.row.setContentsMargins(0, 0, 0, 0)
        self.row.setSpacing(STEP)

    def sizeHint(self) -> QSize:
        return self._room

    def minimumSizeHint(self) -> QSize:
        return QSize(1, self._room.height())


def wrapped(*widgets: QWidget) -> QWidget:
    """Widgets in a row that goes on below where a panel is narrow."""
    whole = QWidget()
    row = WrappingRow(whole, gap=STEP, margin=0)
    for widget in widgets:
        row.addWidget(widget)
    return whole


def group_in_row() -> tuple[QWidget, QHBoxLayout]:
    """Widgets that stay together in a row."""
    group = QWidget()
    row = QHBoxLayout(group)
    row.setContentsMargins(0, 0, 0, 0)
    row.setSpacing(STEP)
    return group, row
