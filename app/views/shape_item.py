"""What every item of the drawing has: a shape, a look, places to catch and to grip."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from itertools import pairwise

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QPainter, QPainterPath, QPolygonF
from PySide6.QtWidgets import (
    QGraphicsItem,
    QStyleOptionGraphicsItem,
    QWidget,
)

from app.tools.catch import NO_TARGETS, Targets
from app.views.camera import Camera
from app.views.inks import Inks
from app.views.labels import Label
from engine.drawing import Area, Line, Point, Strand

#: So that a line along an axis is not culled as an empty box. [m]
_MARGIN = 0.02

#: Under this width in pixels a conductor shows as part of its band only.
THINNEST = 1.6
#: From this width in pixels a conductor is drawn on its own, nearest last.
SINGLE = 6.0


class ShapeItem(QGraphicsItem):
    """An item of the layout in the picture.

    Attributes
    ----------
    item_id : str
    layer : str
        One of `app.view_state.LAYERS`.
    is_selected : bool
    scale_now : float
        Pixels per metre, kept by the view.
    """

    layer = ""

    def __init__(self, item_id: str, inks: Inks) -> None:
        super().__init__()
        self.item_id = item_id
        self.inks = inks
        self.is_selected = False
        self.scale_now = 1.0
        self._box = QRectF()
        self._targets: Targets | None = None
        self._revision = 0

    def set_box(self, points: Iterable[Point]) -> None:
        """Take the bounding box of what is shown, which is another shape now."""
        self._targets = None
        self._revision += 1
        xs, ys = zip(*points, strict=True)
        self.prepareGeometryChange()
        self._box = QRectF(min(xs), min(ys), max(xs) - min(xs), max(ys) - min(ys))
        self._box.adjust(-_MARGIN, -_MARGIN, _MARGIN, _MARGIN)

    def look(self) -> tuple[object, ...]:
        """Differs when the item looks different in the same view and inks."""
        return (self._revision, self.is_selected)

    def boundingRect(self) -> QRectF:
        return self._box

    def shape(self) -> QPainterPath:
        path = QPainterPath()
        path.addRect(self._box)
        return path

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        raise NotImplementedError

    def decorate(self, painter: QPainter, camera: Camera) -> list[QRectF]:
        """Draw what has a size in pixels; return the boxes that it fills. [px]"""
        return []

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        """Texts to be placed; heights in the length unit `unit`.

        Where it is crowded, only the most important one, with few places.
        """
        return []

    def distance(self, at: Point) -> float:
        """How far a place is from what a click on the item means. [m]"""
        raise NotImplementedError

    def grips(self) -> tuple[Point, ...]:
        """Vertices that show a handle when the item alone is selected. [m]"""
        return ()

    def targets(self) -> Targets:
        """What can be caught of it, made once for each shape."""
        if self._targets is None:
            self._targets = self._made_targets()
        return self._targets

    def _made_targets(self) -> Targets:
        return NO_TARGETS


def area_path(areas: Iterable[Area]) -> QPainterPath:
    """Filled shapes with their holes."""
    path = QPainterPath()
    for area in areas:
        for ring in (area.outline, *area.holes):
            path.addPolygon(polygon(ring))
            path.closeSubpath()
    return path


def polygon(line: Sequence[Point]) -> QPolygonF:
    """A line as Qt takes it."""
    return QPolygonF([QPointF(x, y) for x, y in line])


def distance_to_line(at: Point, line: Line) -> float:
    """From a place to the nearest of a line. [m]"""
    if len(line) == 1:
        return math.dist(at, line[0])
    return min(_distance(at, a, b) for a, b in pairwise(line))


def _distance(at: Point, a: Point, b: Point) -> float:
    dx, dy = b[0] - a[0], b[1] - a[1]
    length = dx * dx + dy * dy
    part = 0.0
    if length > 0:
        part = ((at[0] - a[0]) * dx + (at[1] - a[1]) * dy) / length
        part = min(1.0, max(0.0, part))
    return math.hypot(a[0] + part * dx - at[0], a[1] + part * dy - at[1])


def thickness(strands: Sequence[Strand]) -> float:
    """A typical width of conductors as seen. [m]"""
    if not strands:
        return 0.0
    strand = strands[0]
    return across(strand.line, strand.areas)


def across(line: Line, areas: Iterable[Area]) -> float:
    """How wide areas along a line are, about; end-on, their size. [m]"""
    length = sum(math.dist(a, b) for a, b in pairwise(line))
    area = sum(_ring_area(part.outline) for part in areas)
    return area / length if length * length > area else math.sqrt(area)


def _ring_area(ring: Line) -> float:
    sides = pairwise((*ring, ring[0]))
    return 0.5 * abs(sum(x0 * y1 - x1 * y0 for (x0, y0), (x1, y1) in sides))
