"""What the active tool shows on top of the drawing, and the mark of the catch."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.tools.tool import Dimension, Overlay, Pointer
from app.views.camera import Camera
from app.views.inks import Inks, shade
from app.views.labels import draw_text, text_box

_CATCH = 6.0

#: Side of a handle. [px]
HANDLE = 10.0


def draw_overlay(
    painter: QPainter, overlay: Overlay, camera: Camera, inks: Inks
) -> None:
    """Draw a tool's overlay in pixels."""
    painter.setBrush(Qt.BrushStyle.NoBrush)
    for lines, pen in (
        (overlay.lines, inks.overlay),
        (overlay.dashed, inks.suggestion),
    ):
        painter.setPen(pen)
        for line in lines:
            painter.drawPolyline(QPolygonF([camera.pixel(p) for p in line]))
    if overlay.box is not None:
        first, second = (camera.pixel(p) for p in overlay.box)
        painter.setPen(inks.overlay)
        painter.setBrush(shade(inks.theme.accent, 0.1))
        painter.drawRect(QRectF(first, second).normalized())
    for point in overlay.points:
        draw_handle(painter, camera.pixel(point), inks)
    for dimension in overlay.dimensions:
        _draw_dimension(painter, dimension, camera, inks)
    for at, text in overlay.labels:
        middle = camera.pixel(at) + QPointF(0.0, -18.0)
        box = _inside(text_box(text, inks, middle), camera)
        draw_text(painter, box, text, inks)


def draw_handle(painter: QPainter, at: QPointF, inks: Inks) -> QRectF:
    """A square that can be gripped."""
    x, y = round(at.x()), round(at.y())
    box = QRectF(x - HANDLE / 2, y - HANDLE / 2, HANDLE, HANDLE)
    painter.setPen(QPen(QColor(inks.theme.accent), 2.0))
    painter.setBrush(QColor(inks.theme.paper))
    painter.drawRect(box.adjusted(1, 1, -1, -1))
    return box


def draw_catch(painter: QPainter, pointer: Pointer, camera: Camera, inks: Inks) -> None:
    """A mark of its own for each kind of catch, with its word."""
    if not pointer.caught:
        return
    at = camera.pixel(pointer.at)
    for pen in (QPen(QColor(inks.theme.paper), 4.0), inks.catch_mark):
        painter.setPen(pen)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        if pointer.caught == "vertex":
            painter.drawRect(QRectF(at.x() - _CATCH, at.y() - _CATCH, 12.0, 12.0))
        elif pointer.caught == "midpoint":
            corners = [(-_CATCH, 5.0), (_CATCH, 5.0), (0.0, -_CATCH)]
            painter.drawPolygon(QPolygonF([at + QPointF(*c) for c in corners]))
        elif pointer.caught == "edge":
            painter.drawEllipse(at, 5.0, 5.0)
        else:
            painter.drawLine(at + QPointF(-4.0, 0.0), at + QPointF(4.0, 0.0))
            painter.drawLine(at + QPointF(0.0, -4.0), at + QPointF(0.0, 4.0))
    if pointer.caught != "grid":
        middle = at + QPointF(34.0, 16.0)
        draw_text(painter, text_box(pointer.caught, inks, middle), pointer.caught, inks)


def _draw_dimension(
    painter: QPainter, dimension: Dimension, camera: Camera, inks: Inks
) -> None:
    start, end = camera.pixel(dimension.start), camera.pixel(dimension.end)
    along = end - start
    length = math.hypot(along.x(), along.y())
    if length < 1.0:
        return
    across = QPointF(-along.y(), along.x()) / length * 5.0
    painter.setPen(QPen(QColor(inks.theme.accent), 1.2))
    painter.drawLine(start, end)
    for at in (start, end):
        painter.drawLine(at - across, at + across)
    box = text_box(dimension.text, inks, (start + end) / 2, bold=True)
    draw_text(painter, box, dimension.text, inks, bold=True)


def _inside(box: QRectF, camera: Camera) -> QRectF:
    """A box moved into the view."""
    x = min(max(box.left(), 2.0), camera.width - box.width() - 2.0)
    y = min(max(box.top(), 2.0), camera.height - box.height() - 2.0)
    return QRectF(x, y, box.width(), box.height())
