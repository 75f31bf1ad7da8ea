"""A table whose rows are values: direct editing, choices, copy and paste as one step.

The table changes nothing itself. It hands the rows as they would be to its owner, who
makes one edit of them; a text that is refused stays out and its reason is told.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from PySide6.QtCore import (
    QAbstractItemModel,
    QEvent,
    QModelIndex,
    Qt,
    Signal,
)
from PySide6.QtGui import QGuiApplication, QKeyEvent, QKeySequence
from PySide6.QtWidgets import (
    QAbstractItemView,
    QComboBox,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from app.panels.panel import Words, decimal_sign
from app.panels.rows_model import Column, Index, RowsModel
from app.spreadsheet import Cells, cells, copied, placed
from app.theme import STEP, scaled, theme_shown
from engine.errors import UserError

#: What may be held down while text is typed.
_TYPING = (
    Qt.KeyboardModifier.NoModifier,
    Qt.KeyboardModifier.ShiftModifier,
    Qt.KeyboardModifier.KeypadModifier,
)


class _Cell(QStyledItemDelegate):
    """Edits a cell as text, or as a choice where the column offers some."""

    def createEditor(
        self, parent: QWidget, option: QStyleOptionViewItem, index: Index
    ) -> QWidget:
        model = index.model()
        assert isinstance(model, RowsModel)
        choices = model.columns[index.column()].choices
        if not choices:
            return super().createEditor(parent, option, index)
        editor = QComboBox(parent)
        editor.addItems(list(choices))
        editor.activated.connect(lambda _index: self.commitData.emit(editor))
        return editor

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        if isinstance(editor, QComboBox):
            editor.setCurrentText(str(index.data(Qt.ItemDataRole.EditRole)))
            return
        super().setEditorData(editor, index)

    def setModelData(
        self, editor: QWidget, model: QAbstractItemModel, index: Index
    ) -> None:
        if isinstance(editor, QComboBox):
            model.setData(index, editor.currentText())
            return
        super().setModelData(editor, model, index)


#: Height of a row. [logical pixels]
_ROW = scaled(7 * STEP)


class RowsTable(QWidget):
    """The table with its reason beneath.

    Attributes
    ----------
    new_row : function of all rows, or None
        Gives a fresh row where pasted cells need one.

    Signals
    -------
    entered(rows, sentence)
        All rows as they would be, and what was done.
    chosen(row)
        A person made another row the current one.
    """

    entered = Signal(object, str)
    chosen = Signal(int)

    def __init__(
        self,
        columns: Sequence[Column],
        *,
        name: str,
        new_row: Callable[[tuple[Any, ...]], Any] | None = None,
    ) -> None:
        super().__init__()
        self.new_row = new_row
        self._is_quiet = False
        self.model = RowsModel(columns)
        self.view = _View(self)
        self.view.setModel(self.model)
        self.view.setItemDelegate(_Cell(self.view))
        self.view.setAccessibleName(name)
        self.view.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.view.setEditTriggers(
            QAbstractItemView.EditTrigger.AnyKeyPressed
            | QAbstractItemView.EditTrigger.EditKeyPressed
            | QAbstractItemView.EditTrigger.DoubleClicked
        )
        self.view.verticalHeader().hide()
        self.view.verticalHeader().setDefaultSectionSize(_ROW)
        header = self.view.horizontalHeader()
        header.setSectionResizeMode(QHeaderView.ResizeMode.Interactive)
        header.setHighlightSections(False)
        header.setStretchLastSection(True)
        header.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft)
        for i, column in enumerate(columns):
            header.resizeSection(i, scaled(column.width * STEP))
        self.view.setShowGrid(False)
        self.view.setWordWrap(False)
        self.view.setAlternatingRowColors(True)
        self.view.setTabKeyNavigation(False)
        self.reason = Words(style="warning")
        self.reason.hide()
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        box.addWidget(self.view, 1)
        box.addWidget(self.reason)
        self.model.entered.connect(self._on_entered)
        self.model.refused.connect(self.refuse)
        self.view.selectionModel().currentRowChanged.connect(self._on_current)
        self.colour()

    @property
    def rows(self) -> tuple[Any, ...]:
        return self.model.rows

    @property
    def row(self) -> int:
        """The current row, -1 for none."""
        return self.view.currentIndex().row()

    def set_rows(self, rows: Sequence[Any]) -> None:
        """Show rows; the current cell stays where it is if it can."""
        at = self.view.currentIndex()
        row, column = at.row(), at.column()
        self._tell("")
        self.model.set_rows(rows)
        if row >= 0 and not self.view.currentIndex().isValid() and rows:
            self.set_current(min(row, len(rows) - 1), column)

    def set_current(self, row: int, column: int | None = None) -> None:
        """Make a row the current one without telling `chosen`."""
        if not 0 <= row < len(self.rows):
            return
        place = max(self.view.currentIndex().column(), 0) if column is None else column
        if (row, place) != (self.row, self.view.currentIndex().column()):
            self._is_quiet = True
            self.view.setCurrentIndex(self.model.index(row, place))
            self._is_quiet = False

    def fit_height(self, fewest: int, most: int) -> None:
        """Be as high as the rows need, between two counts of rows."""
        shown = min(max(len(self.rows), fewest), most)
        height = self.view.horizontalHeader().sizeHint().height() + _ROW * shown
        bar = self.view.horizontalScrollBar().sizeHint().height()
        self.view.setFixedHeight(height + bar + 2)

    def refuse(self, sentence: str) -> None:
        """Say why something was not taken."""
        self._tell(sentence)

    def colour(self) -> None:
        """Take the colours of the palette."""
        theme = theme_shown()
        self.model.set_colours(theme.muted, theme.warning)

    def paste(self, text: str) -> None:
        """Enter copied cells from the current cell on, all or none of them."""
        at = self.view.currentIndex()
        try:
            pasted: Cells = cells(text, decimal_sign())
            rows = placed(
                self.rows,
                pasted,
                (at.row(), at.column()) if at.isValid() else (len(self.rows), 0),
                [(column.title, column.enter) for column in self.model.columns],
                self.new_row,
            )
        except UserError as error:
            self._tell(str(error))
            return
        self._tell("")
        count = len(pasted.rows)
        self.entered.emit(rows, f"Paste {count} row{'s' if count != 1 else ''}")

    def copied(self) -> str:
        """The selected cells as text that a spreadsheet takes."""
        chosen = self.view.selectionModel().selectedIndexes()
        if not chosen:
            return ""
        rows = sorted({index.row() for index in chosen})
        columns = sorted({index.column() for index in chosen})
        return copied(
            [str(self.model.index(r, c).data() or "") for c in columns] for r in rows
        )

    def clear_cells(self) -> None:
        """Empty the selected cells, all or none of them."""
        rows = list(self.rows)
        for index in self.view.selectionModel().selectedIndexes():
            column = self.model.columns[index.column()]
            if column.enter is None:
                continue
            try:
                rows[index.row()] = column.enter(rows[index.row()], "", decimal_sign())
            except UserError as error:
                self.model.refuse(index.row(), index.column(), str(error))
                return
        if tuple(rows) != self.rows:
            self.entered.emit(tuple(rows), "Empty cells")

    def _on_entered(self, rows: tuple[Any, ...], _row: int, column: int) -> None:
        self._tell("")
        title = self.model.columns[column].title
        self.entered.emit(rows, f"Change {title}")

    def _on_current(self, current: QModelIndex, _before: QModelIndex) -> None:
        if not self._is_quiet and current.isValid():
            self.chosen.emit(current.row())

    def _tell(self, sentence: str) -> None:
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))


class _View(QTableView):
    """Keys of a table: copy, paste, empty."""

    def __init__(self, owner: RowsTable) -> None:
        super().__init__()
        self._owner = owner

    def event(self, event: QEvent) -> bool:
        """A key that begins a cell is not the key of a tool."""
        if (
            isinstance(event, QKeyEvent)
            and event.type() == QEvent.Type.ShortcutOverride
            and event.modifiers() in _TYPING
            and event.text().isprintable()
            and event.text()
        ):
            event.accept()
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        clipboard = QGuiApplication.clipboard()
        if event.matches(QKeySequence.StandardKey.Paste):
            self._owner.paste(clipboard.text())
        elif event.matches(QKeySequence.StandardKey.Copy):
            clipboard.setText(self._owner.copied())
        elif event.matches(QKeySequence.StandardKey.Delete):
            self._owner.clear_cells()
        else:
            super().keyPressEvent(event)
