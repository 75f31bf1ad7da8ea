"""The table of places by base and variants: values, how they changed, their state."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import (
    QAbstractTableModel,
    QModelIndex,
    QPersistentModelIndex,
    QRectF,
    QSize,
    Qt,
)
from PySide6.QtGui import (
    QColor,
    QFont,
    QKeyEvent,
    QPainter,
    QPen,
    QPolygonF,
    QResizeEvent,
)
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from app.panels.panel import plain_tip
from app.theme import BODY, SMALL, STEP, Theme, theme_for
from app.variant_values import TableAnswer
from app.variant_words import (
    Held,
    against_text,
    cell_sentence,
    change_text,
    has_cases,
    is_raised,
    state_text,
    value_text,
    was_text,
)
from engine.variant_comparison import Cell, Row

_Index = QModelIndex | QPersistentModelIndex

#: Of the sign of a change. [logical pixels]
_SIGN = 11

#: Of a column of values. [logical pixels]
_WIDTH = 34 * STEP


class VariantModel(QAbstractTableModel):
    """A row for each place and level: the place, the base, the variants."""

    def __init__(self) -> None:
        super().__init__()
        self.answer: TableAnswer | None = None
        self.held: Held = {}

    def show(self, answer: TableAnswer | None, held: Held) -> None:
        """Take another table."""
        self.beginResetModel()
        self.answer, self.held = answer, held
        self.endResetModel()

    def row_at(self, index: int) -> Row:
        assert self.answer is not None
        return self.answer.table.rows[index]

    def cell(self, index: _Index) -> Cell | None:
        """None in the column of places."""
        if index.column() == 0:
            return None
        return self.row_at(index.row()).cells[index.column() - 1]

    def was(self, index: _Index) -> str:
        """What a value was, where it is held as before."""
        assert self.answer is not None
        cell = self.cell(index)
        if cell is None:
            return ""
        row = self.row_at(index.row())
        column = self.answer.table.columns[index.column() - 1]
        held = self.held.get((row.place, row.level, row.kind, column.variant))
        return was_text(cell, held, column.assessment.layout)

    def lines(self, index: _Index) -> tuple[str, str, str]:
        """What stands in a cell: large, then two small lines."""
        assert self.answer is not None
        row, columns = self.row_at(index.row()), self.answer.table.columns
        base = columns[0].assessment.layout
        if index.column() == 0:
            kind = "zone" if row.is_zone else "receptor"
            return row.title, against_text(row, base), kind
        k = index.column() - 1
        cell, layout = row.cells[k], columns[k].assessment.layout
        value = value_text(cell, layout)
        state = state_text(cell, layout, with_case=has_cases(layout))
        if k == 0:
            return value, state, ""
        return value, change_text(cell) or cell.reason, state

    def rowCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        if parent.isValid() or self.answer is None:
            return 0
        return len(self.answer.table.rows)

    def columnCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        if parent.isValid() or self.answer is None:
            return 0
        return 1 + len(self.answer.table.columns)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = 0
    ) -> Any:
        if orientation is Qt.Orientation.Vertical or self.answer is None:
            return None
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return int(
                Qt.AlignmentFlag.AlignLeft
                | Qt.AlignmentFlag.AlignVCenter
                | Qt.TextFlag.TextWordWrap
            )
        if role not in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.ToolTipRole):
            return None
        title = "Place"
        if section > 0:
            title = self.answer.table.columns[section - 1].title
        return plain_tip(title) if role == Qt.ItemDataRole.ToolTipRole else title

    def data(self, index: _Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        if self.answer is None:
            return None
        if role == Qt.ItemDataRole.DisplayRole:
            return self._text(index)
        if role in (
            Qt.ItemDataRole.ToolTipRole,
            Qt.ItemDataRole.AccessibleTextRole,
        ):
            text = self._text(index)
            if index.column():
                row = self.row_at(index.row())
                text = cell_sentence(self.answer, row, index.column() - 1)
                was = self.was(index)
                text += f" It {was}." if was else ""
            if role == Qt.ItemDataRole.ToolTipRole:
                return plain_tip(text)
            return text
        return None

    def _text(self, index: _Index) -> str:
        first, *others = self.lines(index)
        was = self.was(index)
        return "\n".join(t for t in (f"{first}, {was}" if was else first, *others) if t)


class VariantTable(QTableView):
    """Signs and tones: a rising wedge for higher, a falling one for lower."""

    def __init__(self) -> None:
        super().__init__()
        self.contents = VariantModel()
        self.setModel(self.contents)
        self.setItemDelegate(_CellPainter(self))
        self.setAccessibleName("Base and variants, place by place")
        self.setToolTip("Value, ratio and state of every place, base and variants")
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.verticalHeader().hide()
        self.horizontalHeader().setHighlightSections(False)
        self.horizontalHeader().setStretchLastSection(True)
        self.horizontalHeader().setFixedHeight(2 * BODY + 4 * STEP)
        self.verticalHeader().setDefaultSectionSize(BODY + 2 * SMALL + 7 * STEP)
        self._places = _Places(self)
        self.horizontalHeader().sectionResized.connect(lambda *_: self._place())

    def _place(self) -> None:
        """Lay the column of places over the left edge, however far one has scrolled."""
        places, frame = self._places, self.frameWidth()
        places.keep_one_column(self.columnWidth(0))
        height = self.horizontalHeader().height() + self.viewport().height()
        places.setGeometry(frame, frame, self.columnWidth(0), height)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._place()

    def scrollTo(
        self,
        index: _Index,
        hint: QAbstractItemView.ScrollHint = QAbstractItemView.ScrollHint.EnsureVisible,
    ) -> None:
        """Bring a cell to where the column of places does not cover it."""
        super().scrollTo(index, hint)
        covered = self.columnWidth(0) - self.visualRect(index).left()
        if index.column() > 0 and covered > 0:
            bar = self.horizontalScrollBar()
            bar.setValue(bar.value() - covered)

    def show_answer(self, answer: TableAnswer | None, held: Held) -> None:
        """Show another table; the chosen cell stays chosen."""
        chosen, across = self.currentIndex(), self.horizontalScrollBar().value()
        columns = self.contents.columnCount()
        self.contents.show(answer, held)
        if self.contents.columnCount() != columns:
            self.setColumnWidth(0, 46 * STEP)
            for column in range(1, self.contents.columnCount()):
                self.setColumnWidth(column, _WIDTH)
        self._place()
        self.setCurrentIndex(self.contents.index(chosen.row(), chosen.column()))
        self.horizontalScrollBar().setValue(across)

    def show_whole(self) -> None:
        """Become as large as everything in it, to be printed."""
        across, down = self.horizontalHeader(), self.verticalHeader()
        off = Qt.ScrollBarPolicy.ScrollBarAlwaysOff
        self.setHorizontalScrollBarPolicy(off)
        self.setVerticalScrollBarPolicy(off)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setFixedSize(across.length(), across.height() + down.length())
        self._places.hide()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            event.ignore()
        else:
            super().keyPressEvent(event)


class _Places(QTableView):
    """The first column once more, over the table: it stays when the others scroll."""

    def __init__(self, table: VariantTable) -> None:
        super().__init__(table)
        self._table = table
        self.setModel(table.contents)
        self.setSelectionModel(table.selectionModel())
        self.setItemDelegate(table.itemDelegate())
        # The table itself is what is reached, heard and read out.
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setFocusProxy(table)
        self.setAccessibleName("Places")
        self.setToolTip(table.toolTip())
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        off = Qt.ScrollBarPolicy.ScrollBarAlwaysOff
        self.setHorizontalScrollBarPolicy(off)
        self.setVerticalScrollBarPolicy(off)
        self.setVerticalScrollMode(table.verticalScrollMode())
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(
            table.verticalHeader().defaultSectionSize()
        )
        across, theirs = self.horizontalHeader(), table.horizontalHeader()
        across.setFixedHeight(theirs.height())
        across.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        across.setHighlightSections(False)
        mine, other = self.verticalScrollBar(), table.verticalScrollBar()
        other.valueChanged.connect(mine.setValue)
        mine.valueChanged.connect(other.setValue)

    def keep_one_column(self, width: int) -> None:
        """Show the column of places alone."""
        for column in range(self.model().columnCount()):
            self.setColumnHidden(column, column > 0)
        self.setColumnWidth(0, width)


class _CellPainter(QStyledItemDelegate):
    """Three lines a cell; what is raised stands on a tone of its own."""

    def sizeHint(self, option: QStyleOptionViewItem, index: _Index) -> QSize:
        return QSize(_WIDTH, BODY + 2 * SMALL + 7 * STEP)

    def paint(
        self, painter: QPainter, option: QStyleOptionViewItem, index: _Index
    ) -> None:
        table = self.parent()
        assert isinstance(table, VariantTable)
        theme = theme_for(table.palette())
        box = QRectF(option.rect)
        cell = table.contents.cell(index)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        raised = cell is not None and is_raised(cell)
        if raised:
            tone = QColor(theme.above)
            tone.setAlphaF(0.16)
            painter.fillRect(box.adjusted(1, 1, -1, -1), tone)
        painter.setPen(QPen(QColor(theme.hairline), 1.0))
        painter.drawLine(box.bottomLeft(), box.bottomRight())
        if cell is None:
            painter.drawLine(box.topRight(), box.bottomRight())
        if table.currentIndex() == index:
            colour = theme.accent if table.hasFocus() else theme.line
            painter.setPen(QPen(QColor(colour), 1.5))
            painter.drawRect(box.adjusted(1.5, 1.5, -1.5, -2.5))
        lines, was = table.contents.lines(index), table.contents.was(index)
        self._write(painter, box, lines, was, cell, theme, table)
        painter.restore()

    def _write(
        self,
        painter: QPainter,
        box: QRectF,
        lines: tuple[str, str, str],
        was: str,
        cell: Cell | None,
        theme: Theme,
        widget: QWidget,
    ) -> None:
        x, y = box.left() + 2 * STEP, box.top() + 1.5 * STEP
        width = box.width() - 3 * STEP
        change = None if cell is None else cell.change
        if cell is not None and is_raised(cell):
            change = "higher"
        for k, text in enumerate(lines):
            font = QFont(widget.font())
            font.setPixelSize(BODY if k == 0 else SMALL)
            is_change = k == 1 and change is not None
            font.setBold(k == 0 or (is_change and change == "higher"))
            painter.setFont(font)
            height = painter.fontMetrics().height()
            left = x
            if is_change and change in _TONES:
                sign = QRectF(x, y + (height - _SIGN) / 2, _SIGN, _SIGN)
                draw_change(painter, sign, change, theme)
                left = x + _SIGN + 1.5 * STEP
            colour = theme.text if k == 0 else theme.muted
            if is_change and change in ("higher", "lower"):
                colour = change_colour(theme, change)
            painter.setPen(QColor(colour))
            room = x + width - left
            shown = painter.fontMetrics().elidedText(
                text, Qt.TextElideMode.ElideRight, int(room)
            )
            painter.drawText(
                QRectF(left, y, room, height), Qt.AlignmentFlag.AlignLeft, shown
            )
            if k == 0 and was:
                taken = painter.fontMetrics().horizontalAdvance(shown) + 1.5 * STEP
                beside = QRectF(left + taken, y, room - taken, height)
                _write_was(painter, beside, was, theme)
            y += height + 1


def _write_was(painter: QPainter, box: QRectF, was: str, theme: Theme) -> None:
    font = QFont(painter.font())
    font.setPixelSize(SMALL)
    font.setBold(False)
    painter.setFont(font)
    painter.setPen(QColor(theme.muted))
    painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, was)


_TONES = ("higher", "lower", "same within 1 %")


def change_colour(theme: Theme, change: str) -> str:
    """Orange tones for higher, blue for lower, grey for the same."""
    return {"higher": theme.above, "lower": theme.below}.get(
        change, theme.not_evaluable
    )


def draw_change(painter: QPainter, box: QRectF, change: str, theme: Theme) -> None:
    """A wedge that rises or falls to the right, or a level bar."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(change_colour(theme, change)))
    if change == "higher":
        painter.drawPolygon(
            QPolygonF([box.bottomLeft(), box.bottomRight(), box.topRight()])
        )
    elif change == "lower":
        # Hatched would be lost at this size: an outline tells it from the filled one.
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(change_colour(theme, change)), 1.5))
        painter.drawPolygon(
            QPolygonF([box.topLeft(), box.bottomLeft(), box.bottomRight()])
        )
    else:
        middle = box.center().y()
        painter.drawRect(QRectF(box.left(), middle - 1.5, box.width(), 3.0))
