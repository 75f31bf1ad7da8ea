"""Rooms, zones, enclosures, equipment and receptors in the drawing."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPainterPath, QPen
from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

from app.tools.catch import Targets, targets
from app.views.camera import Camera
from app.views.heights import range_text
from app.views.inks import Inks
from app.views.labels import Importance, Label, around, shortened
from app.views.shape_item import ShapeItem, area_path, distance_to_line, polygon
from app.views.strand_painter import StrandPainter
from engine.drawing import Line, Mark, Place, Point, Strand

#: Half the size of a receptor's mark. [px]
_MARK = 6.0

_IMPORTANCE = {
    "room": Importance.ROOM,
    "zone": Importance.ZONE,
    "enclosure": Importance.ROOM,
    "equipment": Importance.EQUIPMENT,
}

_LAYERS = {
    "room": "rooms",
    "zone": "zones",
    "enclosure": "enclosures",
    "equipment": "equipment",
}


class PlaceItem(ShapeItem):
    """A room, a zone, an enclosure or equipment, with conductors of its own."""

    def __init__(self, place: Place, strands: Sequence[Strand], inks: Inks) -> None:
        super().__init__(place.item, inks)
        self.layer = _LAYERS[place.kind]
        self.is_on_storey = True
        self.show_shape(place, strands)

    def show_shape(self, place: Place, strands: Sequence[Strand]) -> None:
        """Take another shape."""
        self.place = place
        self.strands = tuple(strands)
        self._path = area_path([place.area])
        self._painter = StrandPainter(strands)
        self._label_place = place.label_place
        points = [*place.area.outline, *(p for s in strands for p in s.line)]
        self.set_box(points)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        painter.setBrush(self._brush())
        if self.is_selected:
            painter.setPen(self.inks.selected_halo)
            painter.drawPath(self._path)
        painter.setPen(self._pen())
        painter.drawPath(self._path)
        self._painter.paint(painter, self.inks, self.scale_now)

    def look(self) -> tuple[object, ...]:
        return (*super().look(), self.is_on_storey)

    def _pen(self) -> QPen:
        if self.is_selected:
            return self.inks.selected
        if self.place.kind == "room" and not self.is_on_storey:
            return self.inks.other_storey
        pens = {
            "room": self.inks.room,
            "zone": self.inks.zone,
            "enclosure": self.inks.enclosure,
            "equipment": self.inks.equipment,
        }
        return pens[self.place.kind]

    def _brush(self) -> QBrush:
        if self.inks.over_map:
            return QBrush()
        closed = self.inks.enclosure_fill if self.place.closed else QBrush()
        brushes = {
            "enclosure": closed,
            "equipment": self.inks.equipment_fill,
            "zone": self.inks.zone_fill,
        }
        return brushes.get(self.place.kind, QBrush())

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        title = shortened(self.place.title)
        if self.place.closed:
            title += ", closed"
        if self.place.kind == "zone" and self.place.levels is not None:
            title += "  " + range_text(self.place.levels, unit)
        box = self._path.boundingRect()
        if self.place.kind in ("room", "zone") and box.width() * camera.scale < 60:
            return []
        importance = _IMPORTANCE[self.place.kind]
        found = [
            Label(
                title,
                self._label_places(camera, title),
                Importance.SELECTED if self.is_selected else importance,
                self.item_id,
                bold=self.is_selected,
                colour="" if self.is_on_storey else self.inks.theme.muted,
            )
        ]
        return found + self._painter.letters(camera, self.item_id)

    def _label_places(
        self, camera: Camera, title: str
    ) -> tuple[tuple[float, float], ...]:
        """In the corners of what shows of a room or zone; else in the middle."""
        shown = camera.transform().mapRect(self._path.boundingRect())
        shown = shown.intersected(camera.frame)
        metrics = self.inks.bold_metrics
        across = 0.5 * self.inks.width(title, bold=True) + 8.0
        down = 0.5 * metrics.height() + 6.0
        x0, x1 = shown.left() + across, shown.right() - across
        y0, y1 = shown.top() + down, shown.bottom() - down
        centre = shown.center()
        middle = camera.pixel(self._label_place)
        if self.place.kind == "room":
            return ((x0, y0), (x1, y0), (x0, y1), (x1, y1), (centre.x(), y0))
        if self.place.kind == "zone":
            return ((x1, y1), (x0, y1), (x1, y0), (x0, y0), (centre.x(), y1))
        if self.place.kind == "enclosure":
            return (
                (x0, y0), (x1, y0), (x0, y1), (x1, y1),
                (centre.x(), shown.bottom() + down), (centre.x(), shown.top() - down),
            )  # fmt: skip
        at = (middle.x(), middle.y())
        return (
            at,
            (centre.x(), shown.top() - down),
            (centre.x(), shown.bottom() + down),
            (shown.right() + across, centre.y()),
            (shown.left() - across, centre.y()),
        )

    def distance(self, at: Point) -> float:
        outline = self.place.area.outline
        if self.place.kind in ("enclosure", "equipment") and self._path.contains(
            QPointF(*at)
        ):
            return 0.0
        edge = distance_to_line(at, (*outline, outline[0]))
        return min([edge, *(distance_to_line(at, s.line) for s in self.strands)])

    def grips(self) -> tuple[Point, ...]:
        return self.place.area.outline

    def _made_targets(self) -> Targets:
        return targets(
            outlines=[self.place.area.outline],
            minor=[strand.line for strand in self.strands],
        )


class LooseStrandsItem(ShapeItem):
    """Conductors of equipment that has no footprint, and links of joints."""

    layer = "equipment"

    def __init__(
        self, item_id: str, title: str, strands: Sequence[Strand], inks: Inks
    ) -> None:
        super().__init__(item_id, inks)
        self.show_shape(title, strands)

    def show_shape(self, title: str, strands: Sequence[Strand]) -> None:
        """Take other conductors."""
        self.title = title
        self.strands = tuple(strands)
        self._painter = StrandPainter(strands)
        self.set_box([p for strand in strands for p in strand.line])

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(self.inks.selected if self.is_selected else self.inks.link)
        for strand in self.strands:
            painter.drawPolyline(polygon(strand.line))
        self._painter.paint(painter, self.inks, self.scale_now)

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        if self._box.width() * camera.scale < 30:
            return []
        middle = camera.pixel((self._box.center().x(), self._box.center().y()))
        places = ((middle.x(), middle.y()), *around(middle.x(), middle.y(), 40, 8))
        name = Label(shortened(self.title), places, Importance.EQUIPMENT, self.item_id)
        return [name, *self._painter.letters(camera, self.item_id)]

    def distance(self, at: Point) -> float:
        return min(distance_to_line(at, strand.line) for strand in self.strands)

    def _made_targets(self) -> Targets:
        lines: list[Line] = [strand.line for strand in self.strands]
        return targets(minor=lines)


class ReceptorItem(ShapeItem):
    """A point that matters: a mark of constant size."""

    layer = "receptors"

    def __init__(self, mark: Mark, inks: Inks) -> None:
        super().__init__(mark.item, inks)
        self.note = ""
        self.show_shape(mark)

    def show_shape(self, mark: Mark) -> None:
        """Take another place."""
        self.mark = mark
        self.set_box([mark.seen])

    def look(self) -> tuple[object, ...]:
        return (*super().look(), self.note)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        """Nothing in metres."""

    def decorate(self, painter: QPainter, camera: Camera) -> list[QRectF]:
        at = camera.pixel(self.mark.seen)
        theme = self.inks.theme
        path = QPainterPath()
        path.moveTo(at + QPointF(0, -_MARK))
        path.lineTo(at + QPointF(_MARK, 0))
        path.lineTo(at + QPointF(0, _MARK))
        path.lineTo(at + QPointF(-_MARK, 0))
        path.closeSubpath()
        painter.setPen(QPen(QColor(theme.paper), 4.0))
        painter.setBrush(QColor(theme.paper))
        painter.drawPath(path)
        painter.setPen(
            QPen(QColor(theme.accent if self.is_selected else theme.text), 2)
        )
        painter.drawPath(path)
        painter.drawPoint(at)
        return [QRectF(at.x() - _MARK, at.y() - _MARK, 2 * _MARK, 2 * _MARK)]

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        at = camera.pixel(self.mark.seen)
        z = self.mark.at[2]
        text = f"{shortened(self.mark.title)}  {range_text((z, z), unit)}"
        if self.note:
            text += f" · {self.note}"
        half = 0.5 * self.inks.width(text) + 4.0
        importance = Importance.SELECTED if self.is_selected else Importance.RECEPTOR
        places = around(at.x(), at.y(), half, _MARK + 4.0)
        return [Label(text, places, importance, self.item_id, bold=self.is_selected)]

    def distance(self, at: Point) -> float:
        return distance_to_line(at, (self.mark.seen,))

    def _made_targets(self) -> Targets:
        return targets(points=[self.mark.seen])
