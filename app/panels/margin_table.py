"""Every place against every reference level it names, as a table."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import (
    QAbstractTableModel,
    QModelIndex,
    QPersistentModelIndex,
    QRectF,
    QSize,
    Qt,
    Signal,
)
from PySide6.QtGui import QColor, QPainter, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from app.margin_values import MarginRow, Margins, concern
from app.panels.margin_marks import draw_sign, state_colour
from app.panels.margin_words import (
    level_text,
    measured_text,
    ratio_text,
    sentence,
    state_text,
    value_text,
    was_text,
)
from app.theme import STEP, scaled, theme_for, theme_shown
from engine.layout import Layout
from engine.units import flux_density_text

_Index = QModelIndex | QPersistentModelIndex

_HEADINGS = (
    (
        "",
        "The state: the line is the reference level, hatched is what U reaches",
    ),
    ("Place", "Zone or receptor"),
    ("Reference level", "As entered by the user, with its value at one frequency"),
    ("Value", "Largest RMS value by the place's spatial rule"),
    ("Ratio", "Value over reference level, over all frequencies by its rule"),
    ("U", "Expanded uncertainty of the value"),
    ("State", "Where value and uncertainty stand to the reference level"),
    ("Load case", "The worst of the counted load cases"),
    ("Measured", "Of a receptor: the value measured on site over the calculated one"),
)
_NUMBERS = (3, 4, 5)
#: Shown only where something was measured.
MEASURED = 8

#: Columns of names, and how they share the width that figures leave.
_NAMES = {1: 1.0, 2: 1.1, 6: 1.0, 7: 1.1, MEASURED: 1.0}


class MarginModel(QAbstractTableModel):
    """Rows of margins; keeps their order while they are only sampled."""

    def __init__(self) -> None:
        super().__init__()
        self.rows: tuple[MarginRow, ...] = ()
        self._layout_shown = Layout()
        self._is_sampled = False
        self._held: Margins | None = None
        self._theme = theme_shown()

    def set_margins(self, margins: Margins, held: Margins | None = None) -> None:
        """Show other margins: sorted when exact, else in the order they had."""
        self._held = held
        self._layout_shown, self._is_sampled = margins.layout, margins.is_sampled
        if margins.is_sampled:
            places = {(r.place, r.level): k for k, r in enumerate(self.rows)}
            last = len(places)
            rows = sorted(
                margins.rows, key=lambda r: places.get((r.place, r.level), last)
            )
        else:
            rows = sorted(margins.rows, key=concern, reverse=True)
        if len(rows) == len(self.rows) and rows:
            self.rows = tuple(rows)
            end = self.index(len(rows) - 1, len(_HEADINGS) - 1)
            self.dataChanged.emit(self.index(0, 0), end)
            return
        self.beginResetModel()
        self.rows = tuple(rows)
        self.endResetModel()

    def rowCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(_HEADINGS)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = 0
    ) -> Any:
        if orientation is Qt.Orientation.Vertical:
            return None
        if role == Qt.ItemDataRole.DisplayRole:
            return _HEADINGS[section][0]
        return _HEADINGS[section][1] if role == Qt.ItemDataRole.ToolTipRole else None

    def data(self, index: _Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        row, column = self.rows[index.row()], index.column()
        if role == Qt.ItemDataRole.DisplayRole:
            return self._texts(row)[column]
        if role == Qt.ItemDataRole.ToolTipRole:
            return sentence(row, self._layout_shown, self._is_sampled)
        if role == Qt.ItemDataRole.TextAlignmentRole and column in _NUMBERS:
            return Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        if role == Qt.ItemDataRole.ForegroundRole:
            if self._is_sampled and column in _NUMBERS:
                return QColor(self._theme.muted)
            if column == 6:
                return QColor(state_colour(self._theme, row.state))
        return None

    def _texts(self, row: MarginRow) -> tuple[str, ...]:
        shown, sampled = self._layout_shown, self._is_sampled
        unit = shown.settings.flux_density_unit
        spread = row.uncertainty
        return (
            "",
            row.place_title,
            level_text(row, shown),
            value_text(row, shown, sampled) + was_text(row, self._held),
            ratio_text(row, sampled),
            "–" if spread is None else flux_density_text(spread, unit),
            "" if sampled else state_text(row),
            row.case_title,
            measured_text(row.measured_ratio),
        )


class _Sign(QStyledItemDelegate):
    """Draws the state's sign in the first column."""

    def paint(
        self, painter: QPainter, option: QStyleOptionViewItem, index: _Index
    ) -> None:
        super().paint(painter, option, index)
        model = index.model()
        assert isinstance(model, MarginModel)
        state = model.rows[index.row()].state
        if not state:
            return
        rect = QRectF(option.rect)  # type: ignore[attr-defined]
        box = QRectF(0, 0, 16, 16)
        box.moveCenter(rect.center())
        draw_sign(painter, box, state, theme_for(option.palette))  # type: ignore[attr-defined]

    def sizeHint(self, option: QStyleOptionViewItem, index: _Index) -> QSize:
        return QSize(28, 24)


class _Indented(QStyledItemDelegate):
    """Words with a little room before them, off the figures at their left."""

    def initStyleOption(self, option: QStyleOptionViewItem, index: _Index) -> None:
        super().initStyleOption(option, index)
        option.rect = option.rect.adjusted(2 * STEP, 0, 0, 0)  # type: ignore[attr-defined]


class MarginTable(QTableView):
    """The table; a row that is chosen shows its place.

    Signals
    -------
    chosen(MarginRow)
    """

    chosen = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._model = MarginModel()
        self._is_held = False
        self.setModel(self._model)
        self._sign = _Sign(self)
        self.setItemDelegateForColumn(0, self._sign)
        self._indented = _Indented(self)
        self.setItemDelegateForColumn(6, self._indented)
        self.setAccessibleName("Margins of all zones and receptors")
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(scaled(6 * STEP))
        header = self.horizontalHeader()
        header.setStretchLastSection(False)
        header.setSectionResizeMode(QHeaderView.ResizeMode.Interactive)
        header.setMinimumSectionSize(28)
        self.clicked.connect(self._on_chosen)
        self.activated.connect(self._on_chosen)

    def set_margins(self, margins: Margins, held: Margins | None = None) -> None:
        self._model._theme = theme_shown()
        self._model.set_margins(margins, held)
        has_measured = any(row.measured_ratio is not None for row in margins.rows)
        self.setColumnHidden(MEASURED, not has_measured)
        self._is_held = held is not None
        self._share_width()

    def resizeEvent(self, event: QResizeEvent) -> None:
        self._share_width()
        super().resizeEvent(event)

    def _share_width(self) -> None:
        """Figures as wide as they are; the names share the rest, states read whole."""
        header = self.horizontalHeader()
        header.resizeSection(0, 28)
        for column, width in ((3, 190 if self._is_held else 84), (4, 64), (5, 84)):
            header.resizeSection(column, scaled(width))
        names = [c for c in _NAMES if not self.isColumnHidden(c)]
        room = self.viewport().width() - sum(map(header.sectionSize, (0, 3, 4, 5)))
        shares = sum(_NAMES[c] for c in names)
        for column in names:
            wide = round(room * _NAMES[column] / shares) - 1
            header.resizeSection(column, max(wide, scaled(110)))

    @property
    def current(self) -> MarginRow | None:
        """The row that is chosen."""
        index = self.currentIndex()
        return self._model.rows[index.row()] if index.isValid() else None

    @property
    def rows(self) -> tuple[MarginRow, ...]:
        """As shown, from the top."""
        return self._model.rows

    def _on_chosen(self, index: QModelIndex) -> None:
        self.chosen.emit(self._model.rows[index.row()])
