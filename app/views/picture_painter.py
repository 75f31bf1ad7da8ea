"""Paints the picture of a view into pixels: paper, grid, map, items, labels, scale."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QPainter, QPixmap

from app.theme import TITLE
from app.views.camera import Camera
from app.views.drawing_scene import DrawingScene
from app.views.ground import Ground
from app.views.inks import Inks
from app.views.labels import (
    Label,
    PlacedLabel,
    draw_labels,
    draw_text,
    placed,
    text_box,
)
from app.views.overlay_painter import draw_handle
from app.views.picking import selected
from app.views.projection import Sight
from app.views.scale_bar import draw_scale_bar
from app.views.shape_item import ShapeItem
from app.views.still_items import StillItems
from engine.layout import Layout

#: With more items in sight, only their names are written.
_CROWDED = 120

EMPTY = "Draw the room, or place a backing drawing"


class PicturePainter:
    """Paints one scene.

    Attributes
    ----------
    labels : list of PlacedLabel
        Those of the last picture; a click on one means its item.
    """

    def __init__(self, scene: DrawingScene, sight: Sight, inks: Inks) -> None:
        self.inks = inks
        self.labels: list[PlacedLabel] = []
        self._scene = scene
        self._sight = sight
        self._ground = Ground(scene)
        self._items = StillItems()
        self._label_state: tuple[object, ...] = ()
        self._item_labels: dict[ShapeItem, tuple[object, list[Label]]] = {}

    def set_sight(self, sight: Sight) -> None:
        """Name the axes of another side."""
        self._sight = sight

    def paint(
        self, pixels: QPixmap, camera: Camera, layout: Layout, legend: QRectF
    ) -> None:
        """Paint everything but the tool's overlay, keeping the legend's box free."""
        settings = layout.settings
        unit = settings.length_unit
        painter = QPainter(pixels)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        ratio = pixels.devicePixelRatio()
        self._ground.paint(painter, camera, self.inks, unit, ratio)
        visible = self._visible(camera)
        self.inks.over_map = self._scene.map_layer.is_coloured
        boxes = self._items.paint(painter, camera, self.inks, ratio, visible)
        bar = draw_scale_bar(
            painter, camera, self.inks, self._sight, unit, settings.north
        )
        taken = [legend, bar] if not legend.isEmpty() else [bar]
        taken += self._paint_notices(painter, camera)
        taken += boxes
        # Along a line nothing can be moved exactly, so nothing offers to be gripped.
        gripped = () if self._sight.is_along_line else selected(self._scene)
        for item in gripped:
            for grip in item.grips():
                taken.append(draw_handle(painter, camera.pixel(grip), self.inks))
        self._paint_labels(painter, camera, visible, unit, taken)
        painter.end()

    def _visible(self, camera: Camera) -> list[ShapeItem]:
        """The shapes in sight, top first."""
        window = camera.visible
        return [i for i in self._scene.shapes() if i.boundingRect().intersects(window)]

    def _paint_labels(
        self,
        painter: QPainter,
        camera: Camera,
        visible: list[ShapeItem],
        unit: str,
        taken: list[QRectF],
    ) -> None:
        self.labels = []
        if not self._scene.shows_labels:
            return
        is_crowded = len(visible) > _CROWDED
        found = self._scene.map_layer.labels(camera)
        state = (camera, unit, is_crowded, self.inks)
        before = self._item_labels if state == self._label_state else {}
        self._label_state, self._item_labels = state, {}
        for item in visible:
            look = item.look()
            kept = before.get(item)
            if kept is None or kept[0] != look:
                kept = (look, item.labels(camera, unit, is_crowded=is_crowded))
            self._item_labels[item] = kept
            found += kept[1]
        frame = camera.frame.adjusted(4, 4, -4, -4)
        self.labels = placed(found, self.inks, frame, taken)
        draw_labels(painter, self.labels, self.inks)

    def _paint_notices(self, painter: QPainter, camera: Camera) -> list[QRectF]:
        """What the user must know of the picture as a whole."""
        inks, taken = self.inks, []
        picture = self._scene.map_layer.picture
        if picture is not None and picture.is_stale:
            box = text_box("Map out of date", inks, QPointF(camera.width / 2, 18.0))
            draw_text(painter, box, "Map out of date", inks, colour=inks.theme.warning)
            taken.append(box)
        if self._scene.problem:
            text = inks.small_metrics.elidedText(
                "Some runs show as routes only: " + self._scene.problem,
                Qt.TextElideMode.ElideRight,
                camera.width - 40.0,
            )
            box = text_box(text, inks, QPointF(camera.width / 2, 40.0))
            draw_text(painter, box, text, inks, colour=inks.theme.warning)
            taken.append(box)
        if self._scene.is_empty:
            font = QFont()
            font.setPixelSize(round(TITLE * inks.text_factor))
            painter.setFont(font)
            painter.setPen(QColor(inks.theme.muted))
            painter.drawText(camera.frame, Qt.AlignmentFlag.AlignCenter, EMPTY)
        return taken
