"""A profile in the drawing: its line, with ticks at both ends and its name."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QPainter, QPen
from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

from app.tools.catch import Targets, targets
from app.views.camera import Camera
from app.views.heights import range_text
from app.views.inks import Inks, pen
from app.views.labels import Importance, Label, around, shortened
from app.views.shape_item import ShapeItem, distance_to_line, polygon
from engine.drawing import Line, Point
from engine.places import Profile
from engine.sight import Sight

#: Half the length of the tick at an end, and the arrow of its direction. [px]
_TICK = 6.0


class ProfileItem(ShapeItem):
    """The line along which the field is plotted."""

    layer = "profiles"

    def __init__(self, profile: Profile, sight: Sight, inks: Inks) -> None:
        super().__init__(profile.id, inks)
        self._sight = sight
        self.show_shape(profile)

    def show_shape(self, profile: Profile) -> None:
        """Take another line."""
        self.profile = profile
        seen = self._sight.seen(profile.path).tolist()
        self._line: Line = tuple((x, y) for x, y in seen)
        self._polygon = polygon(self._line)
        self.set_box(self._line)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        if self.is_selected:
            painter.setPen(self.inks.selected_halo)
            painter.drawPolyline(self._polygon)
        painter.setPen(pen(self.inks.theme.paper, 4.0))
        painter.drawPolyline(self._polygon)
        painter.setPen(self._pen())
        painter.drawPolyline(self._polygon)

    def _pen(self) -> QPen:
        theme = self.inks.theme
        return pen(theme.accent if self.is_selected else theme.text, 1.4, (8.0, 3.0))

    def decorate(self, painter: QPainter, camera: Camera) -> list[QRectF]:
        """A tick where it begins, an arrow where it ends."""
        theme = self.inks.theme
        painter.setPen(pen(theme.accent if self.is_selected else theme.text, 1.8))
        start, end = camera.pixel(self._line[0]), camera.pixel(self._line[-1])
        side = _across(camera.pixel(self._line[1]) - start)
        painter.drawLine(start - side, start + side)
        along = end - camera.pixel(self._line[-2])
        side = _across(along)
        back = QPointF(-side.y(), side.x())
        painter.drawLine(end, end + back + side * 0.6)
        painter.drawLine(end, end + back - side * 0.6)
        return []

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        heights = [z for _, _, z in self.profile.path]
        text = f"{shortened(self.profile.title)}  "
        text += range_text((min(heights), max(heights)), unit)
        half = 0.5 * self.inks.width(text, bold=self.is_selected) + 4.0
        places: list[tuple[float, float]] = []
        for at in (self._line[-1], self._line[0]):
            pixel = camera.pixel(at)
            places += around(pixel.x(), pixel.y(), half, _TICK + 4.0)
        importance = Importance.SELECTED if self.is_selected else Importance.ROOM
        return [
            Label(text, tuple(places), importance, self.item_id, bold=self.is_selected)
        ]

    def distance(self, at: Point) -> float:
        return distance_to_line(at, self._line)

    def grips(self) -> tuple[Point, ...]:
        return self._line

    def _made_targets(self) -> Targets:
        return targets(lines=[self._line])


def _across(way: QPointF) -> QPointF:
    """Half a tick at right angles to a way. [px]"""
    length = math.hypot(way.x(), way.y()) or 1.0
    return QPointF(-way.y(), way.x()) / length * _TICK
