"""Ranked bars of what an uncertainty is made of; a click chooses the item."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QFont,
    QFontMetricsF,
    QHelpEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
)
from PySide6.QtWidgets import QSizePolicy, QToolTip, QWidget

from app.panels.panel import plain_tip
from app.theme import BODY, SMALL, STEP, scaled, theme_for
from app.uncertainty_values import BudgetBar, bars, share_text, value_text
from engine.budget import Budget
from engine.layout import Layout

_ROW, _HEAD = scaled(9 * STEP), scaled(6 * STEP)
_HEADING = "standard uncertainty (k = 1) · share of the variance"


class BudgetChart(QWidget):
    """One row an input: what, its tolerance, a bar, what it comes to.

    Signals
    -------
    chosen(id)
        The item of a bar was clicked.
    """

    chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._bars: tuple[BudgetBar, ...] = ()
        self._layout: Layout | None = None
        self.setMouseTracking(True)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.setMinimumWidth(70 * STEP)

    @property
    def shown(self) -> tuple[BudgetBar, ...]:
        """The bars, the largest first."""
        return self._bars

    def show_budget(self, budget: Budget | None, shown: Layout) -> None:
        """Show another budget."""
        self._bars = () if budget is None else bars(budget, shown)
        self._layout = shown
        texts = [
            f"{bar.name}, {bar.told}: {value_text(bar.standard, shown)}, "
            f"{share_text(bar.share)} of the variance"
            for bar in self._bars
        ]
        self.setAccessibleName("What the uncertainty is made of")
        self.setAccessibleDescription("; ".join(texts))
        self.setFixedHeight(self.sizeHint().height())
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(150 * STEP, max(1, len(self._bars)) * _ROW + _HEAD + STEP)

    def _at(self, y: float) -> BudgetBar | None:
        k = int((y - _HEAD) // _ROW)
        return self._bars[k] if 0 <= k < len(self._bars) else None

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        bar = self._at(event.position().y())
        if bar is not None and bar.item:
            self.chosen.emit(bar.item)

    def event(self, event: object) -> bool:
        if isinstance(event, QHelpEvent) and self._layout is not None:
            bar = self._at(event.pos().y())
            if bar is not None:
                text = f"{bar.name}\n{bar.told}".strip()
                QToolTip.showText(event.globalPos(), plain_tip(text), self)
                return True
        return super().event(event)  # type: ignore[arg-type]

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = theme_for(self.palette())
        painter.fillRect(self.rect(), QColor(theme.panel))
        if not self._bars or self._layout is None:
            painter.end()
            return
        most = max(bar.standard for bar in self._bars)
        label = min(scaled(68 * STEP), 0.42 * self.width())
        value = float(scaled(38 * STEP))
        room = max(10.0, self.width() - label - value - 4 * STEP)
        large, small = QFont(self.font()), QFont(self.font())
        large.setPixelSize(BODY)
        small.setPixelSize(SMALL)
        for k, bar in enumerate(self._bars):
            top = _HEAD + k * _ROW
            for text, font, y, colour in (
                (bar.name, large, top, theme.text),
                (bar.told, small, top + BODY + STEP, theme.muted),
            ):
                painter.setFont(font)
                painter.setPen(QColor(colour))
                line = QRectF(STEP, y, label - 2 * STEP, QFontMetricsF(font).height())
                shown = QFontMetricsF(font).elidedText(
                    text, Qt.TextElideMode.ElideRight, line.width()
                )
                painter.drawText(line, Qt.AlignmentFlag.AlignLeft, shown)
            length = room * bar.standard / most
            box = QRectF(label, top + 2 * STEP, max(length, 1.0), _ROW - 5 * STEP)
            ink = QColor(theme.accent if bar.item or bar.told else theme.line)
            painter.fillRect(box, ink)
            painter.setFont(small)
            painter.setPen(QColor(theme.text))
            text = f"{value_text(bar.standard, self._layout)} · {share_text(bar.share)}"
            at = QRectF(box.right() + 1.5 * STEP, top, value, _ROW - STEP)
            painter.drawText(at, Qt.AlignmentFlag.AlignVCenter, text)
        painter.setPen(QPen(QColor(theme.line), 1.0))
        painter.drawLine(int(label), _HEAD, int(label), self.height() - STEP)
        painter.setFont(small)
        painter.setPen(QColor(theme.muted))
        head = QRectF(label, 0, self.width() - label - STEP, _HEAD)
        painter.drawText(head, Qt.AlignmentFlag.AlignVCenter, _HEADING)
        painter.end()
