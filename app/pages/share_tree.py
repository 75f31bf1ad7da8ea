"""Shares of circuits with bars: what adds to the right, what cancels to the left."""

from __future__ import annotations

from PySide6.QtCore import (
    QModelIndex,
    QPersistentModelIndex,
    QPoint,
    QPointF,
    QRectF,
    QSize,
    Qt,
)
from PySide6.QtGui import QBrush, QColor, QKeyEvent, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTreeWidget,
    QTreeWidgetItem,
)

from app.theme import STEP, scaled, theme_for
from app.why_values import (
    Why,
    circuits_text,
    percent,
    piece_text,
    share_before,
    signed,
)
from engine.place_shares import FrequencyShare, PlaceShare

_HEADS = (
    ("Circuit", "Closed circuits; circuits that close only together share a line"),
    ("cancels ◂   ▸ adds", "Share of the value: solid adds, hatched cancels"),
    ("Share", "Projection on the whole field; all shares sum to the value"),
    ("Part", "Share in per cent of the value; at one frequency, of its part"),
    ("Without it", "RMS value of everything else"),
    ("Alone", "RMS value of this circuit alone"),
    ("Per ampere", "Field alone per ampere of its largest conductor current"),
    ("Was", "Share in the layout that is held as before"),
)
_BAR, _ALONE, _PER, _WAS = 1, 5, 6, 7
#: [logical pixels]
_NARROW, _NARROWEST = 720, 600
_PRINTED = 960
_PART = Qt.ItemDataRole.UserRole
_THIN = Qt.ItemDataRole.UserRole + 1


class _Bars(QStyledItemDelegate):
    """Draws a share about a line of zero."""

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionViewItem,
        index: QModelIndex | QPersistentModelIndex,
    ) -> None:
        super().paint(painter, option, index)
        part = index.data(_PART)
        if part is None:
            return
        theme = theme_for(option.palette)
        rect = QRectF(option.rect).adjusted(STEP, 0, -STEP, 0)
        middle = rect.left() + rect.width() * _zero(self.parent())
        scale = rect.width() * (1.0 - _zero(self.parent())) / _reach(self.parent())
        length = min(max(part * scale, rect.left() - middle), rect.right() - middle)
        high = rect.height() * (0.28 if index.data(_THIN) else 0.5)
        box = QRectF(middle, rect.center().y() - high / 2, length, high).normalized()
        painter.save()
        colour, ink = QColor(theme.accent), QColor(theme.text)
        if option.state & QStyle.StateFlag.State_Selected:
            # On the accent of a chosen line, a bar of it would be lost.
            colour = ink = option.palette.highlightedText().color()
        if part < 0:
            painter.setPen(QPen(ink, 1.2))
            painter.setBrush(QBrush(ink, Qt.BrushStyle.BDiagPattern))
        else:
            painter.setPen(Qt.PenStyle.NoPen)
            colour.setAlphaF(0.6 if index.data(_THIN) else 1.0)
            painter.setBrush(colour)
        if box.width() > 0.5:
            painter.drawRect(box)
        painter.setPen(QPen(QColor(theme.line), 1))
        x = round(middle) + 0.5
        painter.drawLine(QPointF(x, rect.top()), QPointF(x, rect.bottom()))
        painter.restore()

    def sizeHint(
        self, option: QStyleOptionViewItem, index: QModelIndex | QPersistentModelIndex
    ) -> QSize:
        return QSize(40 * STEP, 5 * STEP)


def _zero(tree: object) -> float:
    assert isinstance(tree, ShareTree)
    return tree.zero


def _reach(tree: object) -> float:
    assert isinstance(tree, ShareTree)
    return tree.reach


class ShareTree(QTreeWidget):
    """A line for each closed circuit, its frequencies below it.

    Attributes
    ----------
    zero : float
        Where on the bar's width nothing is, 0 to 1.
    reach : float
        Part of the value at the bar's right end.
    """

    def __init__(self) -> None:
        super().__init__()
        self.zero, self.reach = 0.1, 1.0
        self.setAccessibleName("Shares of the circuits")
        self.setColumnCount(len(_HEADS))
        self.setHeaderLabels([name for name, _ in _HEADS])
        for column, (_, tip) in enumerate(_HEADS):
            self.headerItem().setToolTip(column, tip)
            if column > _BAR:
                self.headerItem().setTextAlignment(
                    column, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
                )
        self.setItemDelegateForColumn(_BAR, _Bars(self))
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setUniformRowHeights(True)
        header = self.header()
        header.setStretchLastSection(False)
        for column, width in enumerate((180, 200, 88, 60, 88, 88, 104, 88)):
            header.resizeSection(column, scaled(width))
        header.setSectionResizeMode(_BAR, QHeaderView.ResizeMode.Stretch)
        header.setMinimumSectionSize(12 * STEP)
        # Beside the share of now.
        header.moveSection(_WAS, _BAR + 2)
        self.setColumnHidden(_WAS, True)

    def show_why(self, why: Why) -> None:
        """Show other shares; what was opened stays open."""
        opened = {
            item.text(0)
            for k in range(self.topLevelItemCount())
            if (item := self.topLevelItem(k)) is not None and item.isExpanded()
        }
        first = not self.topLevelItemCount()
        shares, unit = why.shares, why.request.layout.settings.flux_density_unit
        total = shares.total
        parts = [s.share / total for s in shares.shares if total > 0]
        parts += [
            f.share / whole
            for s in shares.shares
            for f in s.by_frequency
            if (whole := _whole(why, f.frequency)) > 0
        ]
        least, most = min([0.0, *parts]), max([1.0, *parts])
        self.reach = most
        self.zero = max(0.08, -least / (most - least))
        self.clear()
        for share in shares.shares:
            line = self._line(circuits_text(why, share.circuits), share, total, unit)
            per = share.per_ampere
            line.setText(_PER, "" if per is None else f"{signed(per, unit)}/A")
            was = share_before(why, share.circuits)
            line.setText(_WAS, "" if was is None else signed(was, unit))
            self.addTopLevelItem(line)
            if len(shares.shares[0].by_frequency) > 1 or len(share.by_frequency) > 1:
                for part in share.by_frequency:
                    whole = _whole(why, part.frequency)
                    below = self._line(f"{part.frequency:g} Hz", part, whole, unit)
                    below.setData(_BAR, _THIN, True)
                    line.addChild(below)
            line.setExpanded(line.text(0) in opened or (first and len(parts) <= 16))
        self._unclosed(why, total, unit)
        whole_line = QTreeWidgetItem(["All together", "", signed(total, unit), "100 %"])
        if why.before is not None:
            whole_line.setText(_WAS, signed(why.before.shares.total, unit))
        self.setColumnHidden(_WAS, why.before is None)
        self._align(whole_line)
        font = self.font()
        font.setBold(True)
        for column in range(len(_HEADS)):
            whole_line.setFont(column, font)
        self.addTopLevelItem(whole_line)

    def show_whole(self) -> None:
        """Become as large as everything in it, to be printed."""
        self.expandAll()
        self.setFrameShape(QFrame.Shape.NoFrame)
        off = Qt.ScrollBarPolicy.ScrollBarAlwaysOff
        self.setHorizontalScrollBarPolicy(off)
        self.setVerticalScrollBarPolicy(off)
        rows, index = 0, self.indexAt(QPoint(1, 1))
        while index.isValid():
            rows, index = rows + 1, self.indexBelow(index)
        height = rows * self.rowHeight(self.model().index(0, 0))
        self.setFixedSize(_PRINTED, self.header().sizeHint().height() + height)

    def _unclosed(self, why: Why, total: float, unit: str) -> None:
        shares = why.shares
        for piece in shares.unclosed:
            line = QTreeWidgetItem([piece_text(why, piece)])
            line.setToolTip(0, piece_text(why, piece))
            self.addTopLevelItem(line)
            line.setFirstColumnSpanned(True)
        if shares.unclosed:
            given = shares.unclosed_share
            line = QTreeWidgetItem(
                ["Unclosed pieces together", "", signed(given, unit),
                 percent(given, total)]
            )  # fmt: skip
            if total > 0:
                line.setData(_BAR, _PART, given / total)
            self._align(line)
            self.addTopLevelItem(line)

    def _line(
        self, name: str, share: PlaceShare | FrequencyShare, whole: float, unit: str
    ) -> QTreeWidgetItem:
        line = QTreeWidgetItem(
            [
                name,
                "",
                signed(share.share, unit),
                percent(share.share, whole),
                signed(share.without if share.without > 1e-9 * whole else 0.0, unit),
                signed(share.alone, unit),
            ]
        )
        if whole > 0:
            line.setData(_BAR, _PART, share.share / whole)
        said = f"{name} {share.acts} {signed(abs(share.share), unit)}"
        line.setToolTip(0, said)
        line.setToolTip(_BAR, said)
        line.setData(_BAR, Qt.ItemDataRole.AccessibleTextRole, said)
        self._align(line)
        return line

    def _align(self, line: QTreeWidgetItem) -> None:
        for column in range(_BAR + 1, len(_HEADS)):
            line.setTextAlignment(
                column, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
            )

    def resizeEvent(self, event: QResizeEvent) -> None:
        # Bars need some width: where there is little, columns can be done without.
        self.setColumnHidden(_ALONE, self.width() < scaled(_NARROW))
        is_narrow = self.width() < scaled(_NARROWEST)
        self.setColumnHidden(_PER, is_narrow)
        self.headerItem().setText(_BAR, "◂   ▸" if is_narrow else _HEADS[_BAR][0])
        self.header().resizeSection(0, scaled(130 if is_narrow else 170))
        super().resizeEvent(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            event.ignore()
        else:
            super().keyPressEvent(event)


def _whole(why: Why, frequency: float) -> float:
    """What all circuits together give at one frequency. [T]"""
    return sum(
        part.share
        for share in why.shares.shares
        for part in share.by_frequency
        if part.frequency == frequency
    )
