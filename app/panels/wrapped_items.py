"""A list whose items are whole sentences, wrapped to the width and never cut."""

from __future__ import annotations

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QRect, QSize, Qt
from PySide6.QtGui import QBrush, QFontMetrics, QPainter, QPalette, QResizeEvent
from PySide6.QtWidgets import (
    QApplication,
    QListWidget,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
)

from app.theme import STEP

_FLAGS = int(Qt.TextFlag.TextWordWrap | Qt.AlignmentFlag.AlignLeft)


class WrappedList(QListWidget):
    """The list; its items keep their text as `text()`."""

    def __init__(self) -> None:
        super().__init__()
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        # The width for the text must not depend on the height that it needs.
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOn)
        self.setVerticalScrollMode(QListWidget.ScrollMode.ScrollPerPixel)
        self.setItemDelegate(_Sentence(self))

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.scheduleDelayedItemsLayout()


class _Sentence(QStyledItemDelegate):
    """Draws the whole text; Qt's own elides the last line at some widths."""

    def __init__(self, shown_in: QListWidget) -> None:
        super().__init__(shown_in)
        self._list = shown_in

    def sizeHint(
        self, option: QStyleOptionViewItem, index: QModelIndex | QPersistentModelIndex
    ) -> QSize:
        self.initStyleOption(option, index)
        width = self._list.viewport().width()
        box = QRect(0, 0, width - 4 * STEP, 100_000)
        needed = QFontMetrics(option.font).boundingRect(box, _FLAGS, option.text)
        return QSize(width, needed.height() + 3 * STEP)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionViewItem,
        index: QModelIndex | QPersistentModelIndex,
    ) -> None:
        self.initStyleOption(option, index)
        text, option.text = option.text, ""
        style = option.widget.style() if option.widget else QApplication.style()
        style.drawControl(
            QStyle.ControlElement.CE_ItemViewItem, option, painter, option.widget
        )
        is_chosen = bool(option.state & QStyle.StateFlag.State_Selected)
        painter.save()
        painter.setFont(option.font)
        if is_chosen:
            role = QPalette.ColorRole.HighlightedText
            painter.setPen(option.palette.color(role))
        else:
            brush = index.data(Qt.ItemDataRole.ForegroundRole)
            colour = option.palette.color(QPalette.ColorRole.Text)
            painter.setPen(brush.color() if isinstance(brush, QBrush) else colour)
        painter.drawText(
            option.rect.adjusted(2 * STEP, STEP, -2 * STEP, 0), _FLAGS, text
        )
        painter.restore()
