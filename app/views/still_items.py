"""Paints the items of a drawing; those that stay as they are, once, as pixels.

While one run is dragged or a map comes, hundreds of others look as they did in the
picture before. They are drawn together, and what changes is drawn above them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from PySide6.QtCore import QRectF, QSizeF, Qt
from PySide6.QtGui import QPainter, QPixmap
from PySide6.QtWidgets import QStyleOptionGraphicsItem

from app.views.camera import Camera
from app.views.inks import Inks
from app.views.shape_item import ShapeItem

#: So many more that stay as they are, and all that do are drawn together anew.
_MANY = 16


class StillItems:
    """Paints the items of one view."""

    def __init__(self) -> None:
        self._state: tuple[object, ...] = ()
        self._looks: dict[ShapeItem, object] = {}
        self._still: dict[ShapeItem, object] = {}
        self._pixels: QPixmap | None = None
        self._boxes: list[QRectF] = []

    def paint(
        self,
        painter: QPainter,
        camera: Camera,
        inks: Inks,
        ratio: float,
        visible: Sequence[ShapeItem],
    ) -> list[QRectF]:
        """Paint what is visible, top first; returns what has a size in pixels. [px]

        Parameters
        ----------
        ratio : float
            Pixels of the screen to a logical one.
        """
        before, self._looks = self._looks, {item: item.look() for item in visible}
        state = (camera, inks, inks.over_map, ratio)
        if state != self._state:
            # The first picture of a view may be the only one: a pan has many of them.
            self._state, self._still, self._pixels = state, {}, None
            return _painted(painter, camera, reversed(visible))
        looks = self._looks
        same = {item: look for item, look in looks.items() if before.get(item) == look}
        is_old = any(looks.get(item) != look for item, look in self._still.items())
        if is_old or len(same) > len(self._still) + _MANY:
            self._still = same
            self._draw(camera, ratio, [i for i in reversed(visible) if i in same])
        if self._pixels is not None:
            painter.drawPixmap(0, 0, self._pixels)
        rest = [item for item in reversed(visible) if item not in self._still]
        boxes = self._boxes if self._still else []
        return [*boxes, *_painted(painter, camera, rest)]

    def _draw(self, camera: Camera, ratio: float, items: Iterable[ShapeItem]) -> None:
        size = QSizeF(camera.width, camera.height) * ratio
        self._pixels = QPixmap(size.toSize())
        self._pixels.setDevicePixelRatio(ratio)
        self._pixels.fill(Qt.GlobalColor.transparent)
        painter = QPainter(self._pixels)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._boxes = _painted(painter, camera, items)
        painter.end()


def _painted(
    painter: QPainter, camera: Camera, items: Iterable[ShapeItem]
) -> list[QRectF]:
    """Paint items from the lowest, then what of them has a size in pixels. [px]"""
    option, upwards = QStyleOptionGraphicsItem(), list(items)
    painter.setTransform(camera.transform())
    for item in upwards:
        item.paint(painter, option)
    painter.resetTransform()
    boxes: list[QRectF] = []
    for item in upwards:
        boxes += item.decorate(painter, camera)
    return boxes
