"""Texts and dimension lines over the picture in space, painted in pixels."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.views.inks import Inks, shade
from app.views.space_camera import Point3, SpaceCamera
from app.views.space_drawn import Letters

#: A text shows where what it belongs to is this long in the picture. [px]
_LEAST = 9.0
_HANDLE = 6.0
_ARM = 34.0


@dataclass(frozen=True)
class SpaceDimension:
    """A dimension line between two places, with its text."""

    start: Point3
    end: Point3
    text: str


@dataclass(frozen=True)
class SpaceHandle:
    """What can be dragged along an axis: a map's plane."""

    name: str
    at: Point3
    axis: Point3


def paint_letters(
    painter: QPainter, camera: SpaceCamera, letters: Sequence[Letters], inks: Inks
) -> None:
    """Paint texts from the lowest rank on; one that would overlap is left out."""
    if not letters:
        return
    flat, ahead = camera.pixels([text.at for text in letters])
    taken: list[QRectF] = []
    for k in sorted(range(len(letters)), key=lambda k: (letters[k].rank, ahead[k])):
        text, (x, y) = letters[k], flat[k]
        if not (0 <= x <= camera.width and 0 <= y <= camera.height):
            continue
        away = camera.distance if camera.parallel else ahead[k]
        pixels = text.room * camera.distance / (camera.metres_per_pixel * away)
        if text.room and pixels < _LEAST:
            continue
        metrics = inks.bold_metrics if text.bold else inks.small_metrics
        width = inks.width(text.text, bold=text.bold)
        y -= text.lift
        box = QRectF(x - width / 2 - 2, y - metrics.height() / 2, width + 4,
                     metrics.height())  # fmt: skip
        if any(box.intersects(other) for other in taken):
            continue
        taken.append(box)
        painter.setFont(inks.bold if text.bold else inks.small)
        painter.fillRect(box, shade(inks.theme.paper, 0.72))
        painter.setPen(QColor(text.colour))
        base = QPointF(x - width / 2, box.top() + metrics.ascent())
        painter.drawText(base, text.text)


def paint_dimension(
    painter: QPainter, camera: SpaceCamera, dimension: SpaceDimension, inks: Inks
) -> None:
    """Paint a line with an arrow at both ends and its text in the middle."""
    ends, _ = camera.pixels([dimension.start, dimension.end])
    if not np.isfinite(ends).all():
        return
    a, b = (QPointF(*end) for end in ends)
    colour = QColor(inks.theme.accent)
    painter.setPen(QPen(colour, 2.0))
    painter.setBrush(colour)
    painter.drawLine(a, b)
    length = math.hypot(b.x() - a.x(), b.y() - a.y())
    if length > 14:
        way = (b - a) / length
        across = QPointF(-way.y(), way.x())
        for tip, back in ((a, way), (b, -way)):
            corners = [
                tip,
                tip + back * 9 + across * 3.5,
                tip + back * 9 - across * 3.5,
            ]
            painter.drawPolygon(QPolygonF(corners))
    width, metrics = inks.width(dimension.text, bold=True), inks.bold_metrics
    middle = (a + b) * 0.5 + QPointF(0, -metrics.height())
    box = QRectF(middle.x() - width / 2 - 4, middle.y() - metrics.height() / 2,
                 width + 8, metrics.height())  # fmt: skip
    painter.fillRect(box, shade(inks.theme.paper, 0.9))
    painter.setFont(inks.bold)
    painter.setPen(QColor(inks.theme.text))
    painter.drawText(
        QPointF(box.left() + 4, box.top() + metrics.ascent()), dimension.text
    )


def paint_way(
    painter: QPainter, camera: SpaceCamera, at: Point3, axis: Point3, inks: Inks
) -> None:
    """Paint the line along which something can be moved, dashed."""
    reach = 0.4 * camera.distance
    ends = [
        np.array(at) - reach * np.array(axis),
        np.array(at) + reach * np.array(axis),
    ]
    flat, _ = camera.pixels(ends)
    if np.isfinite(flat).all():
        pen = QPen(QColor(inks.theme.accent), 1.4)
        pen.setDashPattern([5.0, 4.0])
        painter.setPen(pen)
        painter.drawLine(QPointF(*flat[0]), QPointF(*flat[1]))


def paint_handles(
    painter: QPainter,
    camera: SpaceCamera,
    handles: Sequence[SpaceHandle],
    held: str,
    inks: Inks,
) -> None:
    """Paint what can be dragged as discs; the held one filled."""
    for handle in handles:
        ((x, y),), _ = camera.pixels(handle.at)
        if not math.isfinite(x):
            continue
        painter.setPen(QPen(QColor(inks.theme.accent), 2.0))
        fill = inks.theme.accent if handle.name == held else inks.theme.paper
        painter.setBrush(QColor(fill))
        painter.drawEllipse(QPointF(x, y), _HANDLE, _HANDLE)


def paint_axes(painter: QPainter, camera: SpaceCamera, inks: Inks) -> None:
    """Paint the directions of x, y and z into the lower left corner."""
    middle = QPointF(11 * _HANDLE, camera.height - 11 * _HANDLE)
    right, up, _ = camera.axes
    painter.setFont(inks.small)
    for k, letter in enumerate("xyz"):
        way = QPointF(float(right[k]), -float(up[k]))
        if math.hypot(way.x(), way.y()) < 0.15:
            continue
        painter.setPen(QPen(QColor(inks.theme.line), 1.4))
        painter.drawLine(middle, middle + way * _ARM)
        at = middle + way * (_ARM + 9)
        painter.setPen(QColor(inks.theme.text))
        painter.drawText(at + QPointF(-3, 4), letter)


def handle_at(
    camera: SpaceCamera, handles: Sequence[SpaceHandle], x: float, y: float
) -> SpaceHandle | None:
    """The handle under a pixel, or None."""
    for handle in handles:
        ((left, top),), _ = camera.pixels(handle.at)
        if math.hypot(left - x, top - y) <= _HANDLE + 4:
            return handle
    return None
