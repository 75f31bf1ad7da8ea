"""A picture under the drawing, scaled and turned by its two calibration points."""

from __future__ import annotations

import base64
import binascii
import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import (
    QGuiApplication,
    QImage,
    QPainter,
    QPolygonF,
    QTransform,
)
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.theme import theme_for
from app.views.inks import pen
from app.views.shape_item import distance_to_line
from engine.places import BackingDrawing


class BackingItem(QGraphicsItem):
    """Shows a `BackingDrawing`; pixels run down, metres up."""

    def __init__(self, drawing: BackingDrawing) -> None:
        super().__init__()
        self._drawing: BackingDrawing | None = None
        self._image = QImage()
        self._is_selected = False
        self.show_drawing(drawing)

    @property
    def drawing(self) -> BackingDrawing | None:
        return self._drawing

    def show_drawing(self, drawing: BackingDrawing) -> None:
        """Take another picture or place; the same drawing is no work."""
        before = self._drawing
        if drawing is before:
            return
        self.prepareGeometryChange()
        if before is None or drawing.picture != before.picture:
            self._image = _decoded(drawing.picture)
        self._drawing = drawing
        self.setOpacity(drawing.opacity)
        self.setTransform(placement(drawing))

    def set_selected(self, is_selected: bool) -> None:
        """Show whether the drawing is selected, by its frame."""
        if is_selected != self._is_selected:
            self._is_selected = is_selected
            self.update()

    def edge_distance(self, at: tuple[float, float]) -> float:
        """From a place to the nearest edge of the picture. [m]"""
        corners = self.corners()
        return distance_to_line(at, (*corners, corners[0]))

    def boundingRect(self) -> QRectF:
        return QRectF(self._image.rect())

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
        painter.drawImage(QPointF(0.0, 0.0), self._image)
        if self._is_selected:
            painter.setOpacity(1.0)
            painter.setPen(pen(theme_for(QGuiApplication.palette()).accent, 2.5))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(self.boundingRect())

    def corners(self) -> list[tuple[float, float]]:
        """Where the picture's corners lie. [m]"""
        shown = self.transform().map(QPolygonF(self.boundingRect())).toList()
        return [(p.x(), p.y()) for p in shown]


def placement(drawing: BackingDrawing) -> QTransform:
    """From picture pixels to metres in the view's plane.

    The line from `first` to `second` keeps the direction that it has in the picture,
    turned by `turn` degrees counter-clockwise.
    """
    apart = math.dist(drawing.first, drawing.second)
    scale = drawing.distance / apart if apart > 0 else 1.0
    made = QTransform()
    made.translate(*drawing.origin)
    made.rotate(drawing.turn)
    made.scale(scale, -scale)
    made.translate(-drawing.first[0], -drawing.first[1])
    return made


def _decoded(picture: str) -> QImage:
    """The embedded picture; empty when it cannot be read."""
    try:
        data = base64.b64decode(picture, validate=True)
    except (binascii.Error, ValueError):
        return QImage()
    return QImage.fromData(data) if data else QImage()
