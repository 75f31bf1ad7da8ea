"""Rows of values as the cells of a table: what a cell shows, and rows after entering.

The model changes nothing itself. It tells the rows as they would be; a text that is
refused stays out.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from PySide6.QtCore import (
    QAbstractTableModel,
    QModelIndex,
    QPersistentModelIndex,
    Qt,
    Signal,
)
from PySide6.QtGui import QColor

from app.panels.panel import decimal_sign, plain_tip
from engine.errors import UserError

Index = QModelIndex | QPersistentModelIndex


@dataclass(frozen=True)
class Column:
    """One column of a table.

    Attributes
    ----------
    title : str
        Heading, with its unit.
    text : function of a row
        What the cell shows.
    enter : function of row, text and decimal sign, or None
        The row after a text was entered; raises `UserError`. None: a result.
    choices : tuple of str
        Offered instead of free text.
    tip : str
        What the column holds.
    made : function of a row
        A cell's own tooltip: what the program made of it.
    width : int
        In steps of 4 px.
    """

    title: str
    text: Callable[[Any], str]
    enter: Callable[[Any, str, str], Any] | None = None
    choices: tuple[str, ...] = ()
    tip: str = ""
    made: Callable[[Any], str] | None = None
    width: int = 18


class RowsModel(QAbstractTableModel):
    """Rows of values as cells.

    Signals
    -------
    entered(rows, row, column)
        A cell was entered: all rows as they would be, and where.
    refused(sentence)
        A cell was not taken.
    """

    entered = Signal(object, int, int)
    refused = Signal(str)

    def __init__(self, columns: Sequence[Column]) -> None:
        super().__init__()
        self.columns = tuple(columns)
        self.rows: tuple[Any, ...] = ()
        self._refused: tuple[int, int] | None = None
        self._muted = self._warning = QColor()

    def set_colours(self, muted: str, warning: str) -> None:
        self._muted, self._warning = QColor(muted), QColor(warning)

    def set_rows(self, rows: Sequence[Any]) -> None:
        """Show other rows; the count may differ."""
        new = tuple(rows)
        self._refused = None
        if len(new) == len(self.rows):
            self.rows = new
            if new:
                last = self.index(len(new) - 1, len(self.columns) - 1)
                self.dataChanged.emit(self.index(0, 0), last)
            return
        self.beginResetModel()
        self.rows = new
        self.endResetModel()

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.columns)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = 0
    ) -> Any:
        if orientation is Qt.Orientation.Vertical:
            return section + 1 if role == Qt.ItemDataRole.DisplayRole else None
        column = self.columns[section]
        if role == Qt.ItemDataRole.DisplayRole:
            return column.title
        return column.tip if role == Qt.ItemDataRole.ToolTipRole else None

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        row, column = self.rows[index.row()], self.columns[index.column()]
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.EditRole):
            return column.text(row)
        if role == Qt.ItemDataRole.ToolTipRole:
            said = column.made(row) if column.made is not None else ""
            return plain_tip(f"{column.tip}\n{said}".strip())
        if role == Qt.ItemDataRole.BackgroundRole:
            if self._refused == (index.row(), index.column()):
                colour = QColor(self._warning)
                colour.setAlpha(70)
                return colour
            return None
        if role == Qt.ItemDataRole.ForegroundRole and column.enter is None:
            return self._muted
        return None

    def flags(self, index: Index) -> Qt.ItemFlag:
        flags = super().flags(index)
        if self.columns[index.column()].enter is not None:
            flags |= Qt.ItemFlag.ItemIsEditable
        return flags

    def setData(
        self, index: Index, value: Any, role: int = Qt.ItemDataRole.EditRole
    ) -> bool:
        row, place = index.row(), index.column()
        column = self.columns[place]
        text = str(value)
        if column.enter is None or text == column.text(self.rows[row]):
            return False
        try:
            new = column.enter(self.rows[row], text, decimal_sign())
        except UserError as error:
            self.refuse(row, place, str(error))
            return False
        rows = (*self.rows[:row], new, *self.rows[row + 1 :])
        self.entered.emit(rows, row, place)
        return True

    def refuse(self, row: int, column: int, sentence: str) -> None:
        """Turn a cell and tell why it was not taken."""
        self._refused = (row, column)
        if row < len(self.rows):
            here = self.index(row, column)
            self.dataChanged.emit(here, here)
        self.refused.emit(sentence)
