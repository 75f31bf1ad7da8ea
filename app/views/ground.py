"""The ground of the drawing: paper, grid, backing drawings and map, kept as pixels.

While the view is only panned, or something above changes, the ground is not drawn
again: its iso-lines cost more than all runs together.
"""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import QPointF, QSizeF
from PySide6.QtGui import QColor, QPainter, QPixmap
from PySide6.QtWidgets import QStyleOptionGraphicsItem

from app.views.camera import Camera
from app.views.drawing_scene import DrawingScene
from app.views.inks import Inks
from app.views.scale_bar import draw_grid

#: Drawn around the view once it has stopped zooming. [px]
_AROUND = 160


class Ground:
    """Paints what lies below the layout's items."""

    def __init__(self, scene: DrawingScene) -> None:
        self._scene = scene
        self._pixels = QPixmap()
        self._camera: Camera | None = None
        self._state: tuple[object, ...] = ()

    def paint(
        self, painter: QPainter, camera: Camera, inks: Inks, unit: str, ratio: float
    ) -> None:
        """Paint the ground of a view whose pixels are `ratio` to a logical one."""
        state = (inks, unit, ratio, camera.scale, *self._scene.ground_state())
        if state != self._state:
            # The first picture at a zoom may be the only one: no more than is seen.
            self._draw(camera, inks, unit, ratio, around=0)
        elif not self._covers(camera):
            self._draw(camera, inks, unit, ratio, around=_AROUND)
        self._state = state
        painter.drawPixmap(self._place(camera), self._pixels)

    def _place(self, camera: Camera) -> QPointF:
        assert self._camera is not None
        return QPointF(camera.left - self._camera.left, camera.top - self._camera.top)

    def _covers(self, camera: Camera) -> bool:
        held = self._camera
        if held is None:
            return False
        at = self._place(camera)
        return (
            at.x() <= 0.0
            and at.y() <= 0.0
            and at.x() + held.width >= camera.width
            and at.y() + held.height >= camera.height
        )

    def _draw(
        self, camera: Camera, inks: Inks, unit: str, ratio: float, *, around: int
    ) -> None:
        wide = replace(
            camera,
            left=camera.left + around,
            top=camera.top + around,
            width=camera.width + 2 * around,
            height=camera.height + 2 * around,
        )
        self._camera = wide
        size = QSizeF(wide.width, wide.height) * ratio
        self._pixels = QPixmap(size.toSize())
        self._pixels.setDevicePixelRatio(ratio)
        self._pixels.fill(QColor(inks.theme.paper))
        painter = QPainter(self._pixels)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        draw_grid(painter, wide, inks, unit)
        option = QStyleOptionGraphicsItem()
        to_pixels = wide.transform()
        for backing in self._scene.backings.values():
            if backing.isVisible():
                painter.setTransform(backing.transform() * to_pixels)
                painter.setOpacity(backing.opacity())
                backing.paint(painter, option)
        painter.setOpacity(1.0)
        painter.setTransform(to_pixels)
        self._scene.map_layer.paint(painter, option)
        painter.end()
