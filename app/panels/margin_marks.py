"""The state's sign and the ratio's bar: pattern first, then colour."""

from __future__ import annotations

from PySide6.QtCore import QLineF, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.margin_values import MarginRow
from app.theme import Theme, theme_for

#: Where the level's mark stands, and the ratio at which the bar breaks.
MARK, BREAK = 2.0 / 3.0, 1.5

_SIGN = 16


def state_colour(theme: Theme, state: str) -> str:
    """Blue tones below, orange tones above, grey where nothing can be said."""
    if state.startswith("below"):
        return theme.below
    if state.startswith("above"):
        return theme.above
    return theme.not_evaluable


def draw_sign(painter: QPainter, box: QRectF, state: str, theme: Theme) -> None:
    """A column beside the line of the level: how high it stands, what U reaches.

    Filled is the value, hatched what the uncertainty reaches, the line is the level.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    ink = QColor(state_colour(theme, state))
    level = box.top() + 0.42 * box.height()
    left, width = box.left() + 0.28 * box.width(), 0.44 * box.width()
    bottom = box.bottom() - 1
    pen = QPen(ink, 1.5)
    painter.setPen(pen)
    if state not in _HEIGHTS:
        pen.setStyle(Qt.PenStyle.DotLine)
        painter.setPen(pen)
        painter.drawRect(QRectF(left, box.top() + 2, width, bottom - box.top() - 2))
    else:
        solid, reached = _HEIGHTS[state]
        top = bottom - solid * box.height()
        painter.fillRect(QRectF(left, top, width, bottom - top), ink)
        if reached:
            high = bottom - reached * box.height()
            column = QRectF(left, high, width, top - high)
            painter.fillRect(column, QBrush(ink, Qt.BrushStyle.Dense5Pattern))
            painter.setPen(QPen(ink, 1.0))
            painter.drawRect(column)
    painter.setPen(QPen(QColor(theme.text), 1.5))
    painter.drawLine(QLineF(box.left() + 1, level, box.right() - 1, level))
    painter.restore()


#: Parts of the sign's height: the value, and up to where its uncertainty reaches.
_HEIGHTS = {
    "below": (0.32, 0.0),
    "below, U reaches": (0.44, 0.80),
    "above, U reaches": (0.70, 0.90),
    "above": (0.92, 0.0),
}


class StateSign(QWidget):
    """The sign of a state as a widget."""

    def __init__(self) -> None:
        super().__init__()
        self._state = ""
        self.setFixedSize(_SIGN, _SIGN)

    def set_state(self, state: str) -> None:
        self._state = state
        self.setVisible(bool(state))
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        draw_sign(painter, QRectF(self.rect()), self._state, theme_for(self.palette()))
        painter.end()


class RatioBar(QWidget):
    """Value over level as a bar; the level's mark stands at two thirds."""

    def __init__(self) -> None:
        super().__init__()
        self._row: MarginRow | None = None
        self._is_sampled = False
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setMinimumWidth(72)
        self.setMaximumWidth(260)

    def sizeHint(self) -> QSize:
        return QSize(160, _SIGN)

    def set_row(self, row: MarginRow | None, is_sampled: bool) -> None:
        self._row, self._is_sampled = row, is_sampled
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        row = self._row
        painter = QPainter(self)
        theme = theme_for(self.palette())
        box = QRectF(self.rect()).adjusted(1, 3, -1, -3)
        painter.fillRect(box, QColor(theme.hairline))
        if row is not None and row.ratio is not None:
            state = "" if self._is_sampled else row.state
            draw_bar(painter, box, row.ratio, _spread(row), state, theme)
        mark = box.left() + MARK * box.width()
        painter.setPen(QPen(QColor(theme.text), 2.0))
        painter.drawLine(QLineF(mark, 0.0, mark, self.height()))
        painter.end()


def _spread(row: MarginRow) -> float:
    """U in the measure of the ratio."""
    if row.uncertainty is None or not row.value or row.ratio is None:
        return 0.0
    return row.ratio * row.uncertainty / row.value


def draw_bar(
    painter: QPainter,
    box: QRectF,
    ratio: float,
    spread: float,
    state: str,
    theme: Theme,
) -> None:
    """The bar of a ratio, what U reaches hatched, with a break beyond 1.5."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    ink = QColor(state_colour(theme, state))
    unit = MARK * box.width()
    end = min(ratio, BREAK) * unit
    painter.fillRect(QRectF(box.left(), box.top(), end, box.height()), ink)
    reached = min(ratio + spread, BREAK) * unit
    if state and reached > end:
        rest = QRectF(box.left() + end, box.top(), reached - end, box.height())
        painter.fillRect(rest, QBrush(ink, Qt.BrushStyle.BDiagPattern))
    if ratio > BREAK:
        _draw_break(painter, box, QColor(theme.panel))
    painter.restore()


def _draw_break(painter: QPainter, box: QRectF, paper: QColor) -> None:
    """Two slanted gaps near the end: the bar goes on beyond the paper."""
    painter.setPen(QPen(paper, 2.5))
    for back in (9.0, 15.0):
        x = box.right() - back
        painter.drawLine(
            QPointF(x - 2, box.bottom() + 1), QPointF(x + 3, box.top() - 1)
        )
