"""A map with the plan over it and its legend: to look at, to pan and to zoom."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QFont,
    QFontMetricsF,
    QImage,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QPolygonF,
    QWheelEvent,
)
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.theme import BODY, SMALL, STEP, Theme, scaled, theme_for
from app.variant_maps import PaneMap
from engine.colour_ramp import OPACITY

#: Middle of the picture, and pixels to the metre.
Sight = tuple[float, float, float]

_HEAD = 7 * STEP

#: Of the legend. [logical pixels]
_LEGEND = scaled(33 * STEP)


class MapPane(QWidget):
    """One map.

    Signals
    -------
    moved(sight)
        It was panned or zoomed by hand.
    pointed(x, y)
        [m]
    left()
        The pointer went away.
    """

    moved = Signal(object)
    pointed = Signal(float, float)
    left = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setAccessibleName("Map")
        self._map: PaneMap | None = None
        self._image = QImage()
        self._sight: Sight | None = None
        self._grip: QPointF | None = None
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setToolTip("Wheel zooms at the pointer, dragging shifts, Home shows all")
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumSize(QSize(40 * STEP, 25 * STEP))

    def show_map(self, shown: PaneMap | None) -> None:
        """Show another map in the same sight."""
        self._map = shown
        self._image = QImage()
        if shown is not None:
            rows, columns = shown.rgba.shape[:2]
            pixels = np.ascontiguousarray(shown.rgba[::-1])
            self._image = QImage(
                pixels.data, columns, rows, 4 * columns, QImage.Format.Format_RGBA8888
            ).copy()
            self.setAccessibleName(f"Map: {shown.title}")
        self.update()

    def set_sight(self, sight: Sight | None) -> None:
        """Look there; None: at everything."""
        self._sight = sight
        self.update()

    # -- metres and pixels --------------------------------------------------------

    @property
    def sight(self) -> Sight:
        """Where it looks now."""
        if self._sight is not None:
            return self._sight
        if self._map is None:
            return (0.0, 0.0, 50.0)
        x0, y0, x1, y1 = self._map.area
        across, up = self.width() - 2 * STEP, self.height() - _HEAD - 2 * STEP
        scale = min(across / max(x1 - x0, 1e-6), up / max(y1 - y0, 1e-6))
        return (0.5 * (x0 + x1), 0.5 * (y0 + y1), max(scale, 1e-3))

    def _pixel(self, x: float, y: float) -> QPointF:
        cx, cy, scale = self.sight
        middle = 0.5 * (self.height() + _HEAD)
        return QPointF(0.5 * self.width() + scale * (x - cx), middle - scale * (y - cy))

    def _metres(self, at: QPointF) -> tuple[float, float]:
        cx, cy, scale = self.sight
        middle = 0.5 * (self.height() + _HEAD)
        return (
            cx + (at.x() - 0.5 * self.width()) / scale,
            cy - (at.y() - middle) / scale,
        )

    # -- hands --------------------------------------------------------------------

    def wheelEvent(self, event: QWheelEvent) -> None:
        x, y = self._metres(event.position())
        cx, cy, scale = self.sight
        factor = 1.0015 ** event.angleDelta().y()
        if 1.0 <= scale * factor <= 20_000.0:
            new = (x + (cx - x) / factor, y + (cy - y) / factor, scale * factor)
            self._move(new)
        event.accept()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        self._grip = event.position()
        super().mousePressEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._grip is not None and event.buttons() != Qt.MouseButton.NoButton:
            cx, cy, scale = self.sight
            step = event.position() - self._grip
            self._grip = event.position()
            self._move((cx - step.x() / scale, cy + step.y() / scale, scale))
        self.pointed.emit(*self._metres(event.position()))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        self._grip = None
        super().mouseReleaseEvent(event)

    def leaveEvent(self, event: object) -> None:
        self.left.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        cx, cy, scale = self.sight
        part = 0.1 * self.width() / scale
        match event.key():
            case Qt.Key.Key_Home:
                self._move(None)
            case Qt.Key.Key_Plus:
                self._move((cx, cy, min(1.25 * scale, 20_000.0)))
            case Qt.Key.Key_Minus:
                self._move((cx, cy, max(0.8 * scale, 1.0)))
            case Qt.Key.Key_Left:
                self._move((cx - part, cy, scale))
            case Qt.Key.Key_Right:
                self._move((cx + part, cy, scale))
            case Qt.Key.Key_Up:
                self._move((cx, cy + part, scale))
            case Qt.Key.Key_Down:
                self._move((cx, cy - part, scale))
            case _:
                super().keyPressEvent(event)

    def _move(self, sight: Sight | None) -> None:
        self.set_sight(sight)
        self.moved.emit(sight)

    # -- painting -----------------------------------------------------------------

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        theme = theme_for(self.palette())
        painter.fillRect(self.rect(), QColor(theme.paper))
        shown = self._map
        if shown is not None:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
            self._paint_map(painter, shown)
            self._paint_lines(painter, shown, theme)
            _Marks(self, painter, theme).paint(shown)
            self._paint_labels(painter, shown, theme)
            self._paint_title(painter, shown, theme)
        if self.hasFocus():
            painter.setPen(QPen(QColor(theme.accent), 1.5))
            painter.drawRect(QRectF(self.rect()).adjusted(1, 1, -1, -1))
        painter.end()

    def _paint_map(self, painter: QPainter, shown: PaneMap) -> None:
        x0, y0, x1, y1 = shown.area
        painter.setOpacity(OPACITY)
        painter.drawImage(QRectF(self._pixel(x0, y1), self._pixel(x1, y0)), self._image)
        painter.setOpacity(1.0)

    def _paint_lines(self, painter: QPainter, shown: PaneMap, theme: Theme) -> None:
        for drawn in shown.lines:
            painter.setPen(QPen(QColor(theme.text), 2.2 if drawn.bold else 0.8))
            painter.drawPolyline(self._polygon(drawn.line.points.tolist()))

    def _polygon(self, points: Iterable[Iterable[float]]) -> QPolygonF:
        return QPolygonF([self._pixel(*point) for point in points])

    def _paint_labels(self, painter: QPainter, shown: PaneMap, theme: Theme) -> None:
        font = _font(SMALL)
        painter.setFont(font)
        metrics = QFontMetricsF(font)
        taken: list[QRectF] = []
        bold_first = sorted(shown.lines, key=lambda x: (not x.bold, -x.line.length))
        names = [(self._pixel(*m.seen), m.title) for m in shown.plan.receptors]
        labels = [(at + QPointF(8, 0), text, True) for at, text in names]
        scale = self.sight[2]
        for drawn in bold_first:
            if drawn.line.length * scale >= 60:
                x, y, _ = drawn.line.label_place()
                labels.append((self._pixel(x, y), drawn.text, False))
        frame = QRectF(self.rect()).adjusted(2, _HEAD, -2, -2)
        for at, text, beside in labels:
            width, height = metrics.horizontalAdvance(text) + 6, metrics.height()
            left = at.x() if beside else at.x() - width / 2
            box = QRectF(left, at.y() - height / 2, width, height)
            if frame.contains(box) and not any(box.intersects(b) for b in taken):
                taken.append(box)
                patch = QColor(theme.paper)
                patch.setAlphaF(0.8)
                painter.fillRect(box, patch)
                painter.setPen(QColor(theme.text))
                painter.drawText(box, Qt.AlignmentFlag.AlignCenter, text)

    def _paint_title(self, painter: QPainter, shown: PaneMap, theme: Theme) -> None:
        box = QRectF(0, 0, self.width(), _HEAD)
        painter.fillRect(box, QColor(theme.panel))
        font = _font(BODY, bold=True)
        painter.setFont(font)
        painter.setPen(QColor(theme.text))
        room = box.adjusted(2 * STEP, 0, -2 * STEP, 0)
        text = QFontMetricsF(font).elidedText(
            shown.title, Qt.TextElideMode.ElideRight, room.width()
        )
        painter.drawText(room, Qt.AlignmentFlag.AlignVCenter, text)


class _Marks:
    """Rooms, zones, equipment, runs and receptors over the map."""

    def __init__(self, pane: MapPane, painter: QPainter, theme: Theme) -> None:
        self._pane, self._painter = pane, painter
        self._theme = theme

    def paint(self, shown: PaneMap) -> None:
        painter, theme, pane = self._painter, self._theme, self._pane
        painter.setBrush(Qt.BrushStyle.NoBrush)
        dashed = QPen(QColor(theme.text), 1.0, Qt.PenStyle.DashLine)
        for places, pen in (
            (shown.plan.rooms, QPen(QColor(theme.text), 1.2)),
            (shown.plan.zones, dashed),
            (shown.plan.enclosures, QPen(QColor(theme.text), 1.0)),
            (shown.plan.equipment, QPen(QColor(theme.text), 1.0)),
        ):
            painter.setPen(pen)
            for place in places:
                painter.drawPolygon(pane._polygon(place.area.outline))
        painter.setPen(QPen(QColor(theme.text), 1.8))
        for run in shown.plan.runs:
            painter.drawPolyline(pane._polygon(run.route))
            for rise in run.rises:
                at = pane._pixel(*rise.at)
                painter.drawEllipse(at, 5.0, 5.0)
                if rise.comes_nearer:
                    painter.setBrush(QColor(theme.text))
                    painter.drawEllipse(at, 1.2, 1.2)
                    painter.setBrush(Qt.BrushStyle.NoBrush)
                else:
                    painter.drawLine(at - QPointF(3.5, 3.5), at + QPointF(3.5, 3.5))
                    painter.drawLine(at - QPointF(3.5, -3.5), at + QPointF(3.5, -3.5))
        painter.setPen(QPen(QColor(theme.text), 1.4))
        painter.setBrush(QColor(theme.paper))
        for mark in shown.plan.receptors:
            x, y = pane._pixel(*mark.seen).toTuple()
            painter.drawPolygon(
                QPolygonF(
                    [QPointF(x + dx, y + dy) for dx, dy in
                     ((-4, 0), (0, -4), (4, 0), (0, 4))]
                )
            )  # fmt: skip


class MapLegend(QWidget):
    """The bar of colours with its ticks, and what is not coloured."""

    def __init__(self) -> None:
        super().__init__()
        self._map: PaneMap | None = None
        self.setFixedWidth(_LEGEND)

    def show_map(self, shown: PaneMap | None) -> None:
        """Explain another map."""
        self._map = shown
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        theme = theme_for(self.palette())
        painter.fillRect(self.rect(), QColor(theme.panel))
        if self._map is not None:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            _paint_legend(painter, QRectF(self.rect()), self._map, theme)
        painter.end()


def _paint_legend(painter: QPainter, box: QRectF, shown: PaneMap, theme: Theme) -> None:
    inner = box.adjusted(2 * STEP, 1.5 * STEP, -STEP, -2 * STEP)
    painter.setFont(_font(SMALL, bold=True))
    painter.setPen(QColor(theme.text))
    painter.drawText(inner, Qt.AlignmentFlag.AlignTop, shown.legend)
    painter.setFont(_font(SMALL))
    line = QFontMetricsF(_font(SMALL)).height()
    top = inner.top() + line + 3 * STEP
    room = inner.bottom() - line * (len(shown.foot) + 0.5) - top
    bar = QRectF(inner.left(), top, 3.5 * STEP, max(4 * line, min(room, 90 * STEP)))
    pixels = np.ascontiguousarray(shown.bar[::-1, None, :])
    image = QImage(
        pixels.data, 1, len(shown.bar), 4, QImage.Format.Format_RGBA8888
    ).copy()
    painter.fillRect(bar, QColor(theme.paper))
    painter.setOpacity(OPACITY)
    painter.drawImage(bar, image)
    painter.setOpacity(1.0)
    written: list[float] = []
    for place, text in shown.ticks:
        y = bar.bottom() - place * bar.height()
        painter.setPen(QPen(QColor(theme.text), 1.0))
        painter.drawLine(QPointF(bar.right(), y), QPointF(bar.right() + STEP, y))
        if all(abs(y - other) >= line for other in written):
            written.append(y)
            painter.drawText(QPointF(bar.right() + 2 * STEP, y + line / 3), text)
    painter.setPen(QColor(theme.muted))
    y = bar.bottom() + 2 * STEP + line
    for text in shown.foot:
        painter.drawText(QPointF(inner.left(), y), text)
        y += line


def _font(size: int, *, bold: bool = False) -> QFont:
    font = QFont()
    font.setPixelSize(size)
    font.setBold(bold)
    return font
