"""A table to read and to copy: heads, rows of texts, numbers to the right."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from PySide6.QtCore import (
    QAbstractTableModel,
    QModelIndex,
    QPersistentModelIndex,
    Qt,
)
from PySide6.QtGui import QGuiApplication, QKeyEvent, QKeySequence
from PySide6.QtWidgets import QAbstractItemView, QFrame, QTableView

from app.theme import STEP, scaled

_Index = QModelIndex | QPersistentModelIndex


class PlainModel(QAbstractTableModel):
    """Texts under heads; the first `words` columns are words, the others numbers."""

    def __init__(self) -> None:
        super().__init__()
        self.heads: tuple[str, ...] = ()
        self.rows: Sequence[Sequence[str]] = ()
        self.words = 0

    def show(
        self, heads: Sequence[str], rows: Sequence[Sequence[str]], words: int
    ) -> None:
        """Take other contents."""
        self.beginResetModel()
        self.heads, self.rows, self.words = tuple(heads), rows, words
        self.endResetModel()

    def rowCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.heads)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = 0
    ) -> Any:
        if orientation is Qt.Orientation.Vertical or section >= len(self.heads):
            return None
        shown = (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.ToolTipRole)
        return self.heads[section] if role in shown else None

    def data(self, index: _Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.ToolTipRole):
            return self.rows[index.row()][index.column()]
        if role == Qt.ItemDataRole.TextAlignmentRole and index.column() >= self.words:
            return Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        return None


class PlainTable(QTableView):
    """The table; copying takes the chosen rows, or all, with their heads."""

    def __init__(self, name: str) -> None:
        super().__init__()
        self.contents = PlainModel()
        self.setModel(self.contents)
        self.setAccessibleName(name)
        self.setToolTip(f"{name}; copying takes the chosen rows, or all of them")
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(scaled(6 * STEP))
        self.horizontalHeader().setHighlightSections(False)

    def show_rows(
        self, heads: Sequence[str], rows: Sequence[Sequence[str]], words: int = 0
    ) -> None:
        """Show other contents; columns fit what is at the top."""
        same = tuple(heads) == self.contents.heads
        self.contents.show(heads, rows, words)
        if not same:
            self.resizeColumnsToContents()
            for column in range(len(heads)):
                width = min(self.columnWidth(column) + 2 * STEP, 65 * STEP)
                self.setColumnWidth(column, width)

    def show_whole(self) -> None:
        """Become as large as everything in it, to be printed."""
        self.resizeColumnsToContents()
        self.setFrameShape(QFrame.Shape.NoFrame)
        off = Qt.ScrollBarPolicy.ScrollBarAlwaysOff
        self.setHorizontalScrollBarPolicy(off)
        self.setVerticalScrollBarPolicy(off)
        across, down = self.horizontalHeader(), self.verticalHeader()
        height = across.sizeHint().height() + down.length()
        self.setFixedSize(across.length(), height)

    def text(self) -> str:
        """Chosen rows, or all, as cells for a spreadsheet."""
        chosen = sorted({i.row() for i in self.selectionModel().selectedRows()})
        rows = [self.contents.rows[k] for k in chosen] or self.contents.rows
        return "\n".join("\t".join(row) for row in (self.contents.heads, *rows)) + "\n"

    def copy(self) -> None:
        """Put `text` on the clipboard."""
        QGuiApplication.clipboard().setText(self.text())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() == Qt.Key.Key_Escape:
            event.ignore()
        else:
            super().keyPressEvent(event)
