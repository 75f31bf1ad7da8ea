"""The scale of the height rail: slabs, floors, runs, the curve and the marker."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from PySide6.QtCore import QEvent, QLineF, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import (
    QBrush,
    QColor,
    QFont,
    QHelpEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QPolygonF,
)
from PySide6.QtWidgets import QSizePolicy, QToolTip, QWidget

from app.document import Document
from app.height_curve import HeightCurve
from app.map_request import height_figures, heights_of, zone_of
from app.theme import SMALL, Theme, theme_for
from app.view_state import ViewState
from app.views.rail_contents import RailContents, Tick, rail_contents
from engine.layout import Layout

#: How near to a tick a click means the tick. [px]
_REACH = 7.0

#: Steps of the arrow keys and of a drag. [m]
_KEY_STEP, _DRAG_STEP = 0.05, 0.01

_PAD = 10.0


class RailScale(QWidget):
    """The scale of heights itself."""

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._curve: HeightCurve | None = None
        self._curve_is_old = False
        self._contents = rail_contents(document.layout)
        self._is_dragged = False
        self._shows_figures = False
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMouseTracking(True)
        self.setAccessibleName("Height rail")
        self.setToolTip("Height of the map above the datum; click a tick or drag")
        self.setAccessibleDescription(
            "Up and Down move the height of the map, Page Up and Page Down go to the "
            "next tick, Home shows the largest over heights."
        )
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Expanding)
        document.changed.connect(self._on_changed)
        view_state.changed.connect(lambda _look: self.update())

    def set_width(self, width: int, *, shows_figures: bool) -> None:
        """Another width, for whole texts or for their figures alone."""
        self._shows_figures = shows_figures
        self.setFixedWidth(width)
        self.update()

    def minimumSizeHint(self) -> QSize:
        return QSize(self.width(), 120)

    @property
    def contents(self) -> RailContents:
        return self._contents

    def set_curve(self, curve: HeightCurve | None) -> None:
        self._curve, self._curve_is_old = curve, False
        self.update()

    def pixel_of(self, z: float) -> float:
        """Where a height is, from the top. [px]"""
        low, high = self._contents.low, self._contents.high
        inner = self.height() - 2 * _PAD
        return _PAD + (high - z) / (high - low) * inner

    def height_at(self, pixel: float) -> float:
        """The height at a place on the rail, a whole centimetre. [m]"""
        low, high = self._contents.low, self._contents.high
        inner = max(1.0, self.height() - 2 * _PAD)
        z = high - (pixel - _PAD) / inner * (high - low)
        return round(min(max(z, low), high) / _DRAG_STEP) * _DRAG_STEP

    def tick_at(self, pixel: float) -> Tick | None:
        """The tick of a zone under the pointer."""
        return self._nearest(self._contents.ticks, pixel)

    def _nearest(self, ticks: Sequence[Tick], pixel: float) -> Tick | None:
        near = [(abs(self.pixel_of(t.z) - pixel), k) for k, t in enumerate(ticks)]
        distance, k = min(near, default=(math.inf, 0))
        return ticks[k] if distance <= _REACH else None

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton:
            return
        y = event.position().y()
        self._is_dragged = True
        tick = self.tick_at(y)
        if tick is None:
            self._choose(self.height_at(y))
        else:
            self._choose(tick.z, tick.zone)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        y = event.position().y()
        if self._is_dragged:
            tick = self.tick_at(y)
            self._choose(self.height_at(y) if tick is None else tick.z)
        on_tick = self.tick_at(y) is not None
        self.setCursor(
            Qt.CursorShape.PointingHandCursor
            if on_tick
            else Qt.CursorShape.SizeVerCursor
        )

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        self._is_dragged = False

    def keyPressEvent(self, event: QKeyEvent) -> None:
        look, layout = self._view_state.look, self._document.layout
        now = look.height if look.height is not None else heights_of(layout, look)[0][0]
        key = event.key()
        ticks = [tick.z for tick in self._contents.ticks]
        if key == Qt.Key.Key_Up:
            self._choose(round(now + _KEY_STEP, 6))
        elif key == Qt.Key.Key_Down:
            self._choose(round(now - _KEY_STEP, 6))
        elif key == Qt.Key.Key_PageUp:
            self._choose(min((z for z in ticks if z > now + 1e-6), default=now))
        elif key == Qt.Key.Key_PageDown:
            self._choose(max((z for z in ticks if z < now - 1e-6), default=now))
        elif key == Qt.Key.Key_Home:
            self._view_state.set(height=None)
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        if isinstance(event, QHelpEvent) and event.type() == QEvent.Type.ToolTip:
            QToolTip.showText(event.globalPos(), self.text_at(event.pos().y()), self)
            return True
        return super().event(event)

    def text_at(self, pixel: float) -> str:
        """What stands at a place on the rail, in words."""
        # In full: what is written on the rail may be shortened.
        held = self._contents
        near = [self._nearest(ticks, pixel) for ticks in (held.ticks, held.floors)]
        if any(near):
            return " · ".join(tick.text for tick in near if tick is not None)
        z, unit = self.height_at(pixel), self._document.layout.settings.length_unit
        bands = (*held.slabs, *held.runs)
        names = [band.name for band in bands if band.low <= z <= band.high]
        gap = "" if self._curve is None else self._curve.gap_text(z)
        told = [f"z {height_figures(z, unit)} {unit}", *names, *filter(None, [gap])]
        return " · ".join(told)

    def _choose(self, z: float, zone: str = "") -> None:
        if zone:
            self._view_state.set(height=z, zone=zone)
        else:
            self._view_state.set(height=z)

    def _on_changed(self, layout: Layout, _ids: object) -> None:
        self._contents = rail_contents(layout)
        self._curve_is_old = True
        self.update()

    # -- painting ---------------------------------------------------------------

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = theme_for(self.palette())
        font = QFont(self.font())
        font.setPixelSize(SMALL)
        painter.setFont(font)
        self._paint_bands(painter, theme)
        self._paint_curve(painter, theme)
        self._paint_ticks(painter, theme)
        self._paint_marker(painter, theme)
        if self.hasFocus():
            painter.setPen(QPen(QColor(theme.accent), 1.0))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5))
        painter.end()

    def _band(self, low: float, high: float) -> QRectF:
        top, bottom = self.pixel_of(high), self.pixel_of(low)
        return QRectF(0.0, top, self.width(), max(1.5, bottom - top))

    def _paint_bands(self, painter: QPainter, theme: Theme) -> None:
        shade = QColor(theme.accent)
        shade.setAlpha(46)
        for run in self._contents.runs:
            painter.fillRect(self._band(run.low, run.high), shade)
        for slab in self._contents.slabs:
            rect = self._band(slab.low, slab.high)
            painter.fillRect(rect, QColor(theme.window))
            hatch = QBrush(QColor(theme.line), Qt.BrushStyle.BDiagPattern)
            painter.fillRect(rect, hatch)

    def _paint_curve(self, painter: QPainter, theme: Theme) -> None:
        """The zone's largest value against height, on the map's scale."""
        curve = self._curve
        if curve is None:
            return
        places = self._along(curve.values)
        ink = QColor(theme.muted if self._curve_is_old else theme.text)
        painter.setPen(QPen(ink, 1.5))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        ends = np.flatnonzero(~curve.joined) + 1
        for heights, own in zip(
            np.split(curve.heights, ends), np.split(places, ends), strict=True
        ):
            piece = [
                QPointF(2.0 + place * (self.width() - 6.0), self.pixel_of(float(z)))
                for z, place in zip(heights, own, strict=True)
                if math.isfinite(place)
            ]
            # A piece of one height is a dot.
            painter.drawPolyline(QPolygonF(piece))
            painter.drawPoints(QPolygonF(piece[:1]))

    def _along(self, values: np.ndarray) -> np.ndarray:
        """Values as 0 to 1 along the map's range; nan stays."""
        settings = self._document.layout.settings
        low, high = settings.map_low, settings.map_high
        if settings.map_scale == "linear":
            return np.clip((values - low) / (high - low), 0.0, 1.0)
        logs = np.log10(np.maximum(values, 1e-15) / low)
        return np.clip(logs / math.log10(high / low), 0.0, 1.0)

    def _paint_ticks(self, painter: QPainter, theme: Theme) -> None:
        """Zones' heights first; a text that finds no room is left to the tooltip."""
        zone = zone_of(self._document.layout, self._view_state.look.zone)
        chosen = "" if zone is None else zone.id
        shown = sorted(self._contents.ticks, key=lambda t: t.zone != chosen)
        taken: list[float] = []
        slabs = [Tick(0.5 * (b.low + b.high), b.name) for b in self._contents.slabs]
        for tick in (*shown, *self._contents.floors, *slabs):
            y = self.pixel_of(tick.z)
            if tick not in slabs:
                is_floor = not tick.zone
                painter.setPen(QPen(QColor(theme.line), 2.0 if is_floor else 1.0))
                end = self.width() if is_floor else 10.0
                painter.drawLine(QLineF(0.0, y, end, y))
            if all(abs(y - other) >= SMALL + 2 for other in taken):
                taken.append(y)
                ink = theme.text if tick.zone == chosen else theme.muted
                text = tick.figures if self._shows_figures else tick.text
                self._write(painter, theme, text, y, ink)

    def _write(
        self, painter: QPainter, theme: Theme, text: str, y: float, ink: str
    ) -> None:
        """A line of text on a little paper, so that hatching does not eat it."""
        metrics = painter.fontMetrics()
        room = self.width() - 26.0
        line = metrics.elidedText(text, Qt.TextElideMode.ElideMiddle, int(room))
        box = QRectF(13.0, y - 0.5 * metrics.height(), room, metrics.height())
        box.setWidth(metrics.horizontalAdvance(line) + 4.0)
        paper = QColor(theme.window)
        paper.setAlpha(215)
        painter.fillRect(box, paper)
        painter.setPen(QColor(ink))
        painter.drawText(
            box.translated(2.0, 0.0),
            Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter,
            line,
        )

    def _paint_marker(self, painter: QPainter, theme: Theme) -> None:
        """A wedge at the height shown; outlined ones at all that are taken together."""
        look, layout = self._view_state.look, self._document.layout
        heights, _ = heights_of(layout, look)
        painter.setPen(QPen(QColor(theme.accent), 1.5))
        for z in heights:
            y, right = self.pixel_of(z), float(self.width()) - 1.0
            wedge = QPolygonF(
                [
                    QPointF(right - 11.0, y),
                    QPointF(right, y - 6.0),
                    QPointF(right, y + 6.0),
                ]
            )
            is_one = look.height is not None
            painter.setBrush(
                QBrush(QColor(theme.accent)) if is_one else Qt.BrushStyle.NoBrush
            )
            painter.drawPolygon(wedge)
            if is_one:
                painter.drawLine(QLineF(0.0, y, right - 11.0, y))
