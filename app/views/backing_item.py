"""A picture under the drawing, scaled and turned by its two calibration points."""

from __future__ import annotations

import base64
import binascii
import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import (
    QImage,
    QPainter,
    QPolygonF,
    QTransform,
)
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.theme import LIGHT, Theme
from app.views.inks import pen
from app.views.shape_item import distance_to_line
from engine.embedded_picture import shown_picture
from engine.places import BackingDrawing

#: A shade of grey from here on is paper, and how many samples a side tells that.
_PAPER, _SIDE = 200, 40


class BackingItem(QGraphicsItem):
    """Shows a `BackingDrawing`; pixels run down, metres up.

    On dark paper a line drawing shows light on dark, so that it does not glare.
    """

    def __init__(self, drawing: BackingDrawing, theme: Theme = LIGHT) -> None:
        super().__init__()
        self._theme = theme
        self._shown: QImage | None = None
        self._drawing: BackingDrawing | None = None
        self._image = QImage()
        self._picture = ""
        self._is_selected = False
        self.show_drawing(drawing)

    @property
    def drawing(self) -> BackingDrawing | None:
        return self._drawing

    @property
    def state(self) -> tuple[object, ...]:
        """What tells two looks of it apart."""
        return (self._drawing, self._image.cacheKey())

    def show_drawing(self, drawing: BackingDrawing) -> None:
        """Take another picture or place; the same drawing is no work."""
        picture = shown_picture(drawing)
        if drawing is self._drawing and picture is self._picture:
            return
        self.prepareGeometryChange()
        if picture != self._picture:
            self._image, self._picture = _decoded(picture), picture
            self._shown = None
        self._drawing = drawing
        self.setOpacity(drawing.opacity)
        self.setTransform(placement(drawing))

    def set_theme(self, theme: Theme) -> None:
        """Show the picture in another theme."""
        self._theme, self._shown = theme, None
        self.update()

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
        if self._shown is None:
            dark = self._theme.is_dark and _is_line_drawing(self._image)
            self._shown = _inverted(self._image) if dark else self._image
        painter.drawImage(QPointF(0.0, 0.0), self._shown)
        if self._is_selected:
            painter.setOpacity(1.0)
            painter.setPen(pen(self._theme.accent, 2.5))
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


def _is_line_drawing(image: QImage) -> bool:
    """Whether most of the picture is paper: near white."""
    if image.isNull():
        return False
    small = image.scaled(_SIDE, _SIDE).convertToFormat(QImage.Format.Format_Grayscale8)
    shades = [
        small.pixelColor(x, y).value() for x in range(_SIDE) for y in range(_SIDE)
    ]
    return sum(shade > _PAPER for shade in shades) > 0.6 * len(shades)


def _inverted(image: QImage) -> QImage:
    """The picture with light lines on dark paper."""
    made = image.convertToFormat(QImage.Format.Format_RGB32)
    made.invertPixels()
    return made


def _decoded(picture: str) -> QImage:
    """The embedded picture; empty when it cannot be read."""
    try:
        data = base64.b64decode(picture, validate=True)
    except (binascii.Error, ValueError):
        return QImage()
    return QImage.fromData(data) if data else QImage()
