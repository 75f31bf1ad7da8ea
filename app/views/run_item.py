"""A run in the drawing: route, band, conductors, direction, rises and falls, name."""

from __future__ import annotations

import math
from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen, QPolygonF
from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

from app.tools.catch import Targets, targets
from app.views.camera import Camera, Leg, longest
from app.views.heights import length_text, range_text
from app.views.inks import Inks
from app.views.labels import Importance, Label, around, shortened
from app.views.shape_item import (
    THINNEST,
    ShapeItem,
    across,
    area_path,
    distance_to_line,
    polygon,
)
from app.views.strand_painter import StrandPainter
from engine.drawing import Point, Rise, RunShape, Strand

#: Radius of the sign of a rise or fall, and size of the arrow. [px]
_SIGN = 7.0
_ARROW = 9.0

#: Shorter legs carry no arrow and no name of their own. [px]
_SHORT = 26.0


class RunItem(ShapeItem):
    """A run and the links that belong to it."""

    layer = "runs"

    def __init__(
        self, run: RunShape, links: Sequence[Strand], has_current: bool, inks: Inks
    ) -> None:
        super().__init__(run.item, inks)
        self.show_shape(run, links, has_current)

    def show_shape(
        self, run: RunShape, links: Sequence[Strand], has_current: bool
    ) -> None:
        """Take another shape."""
        self.run = run
        self.links = tuple(links)
        self.has_current = has_current
        self._legs: tuple[Camera, list[Leg]] | None = None
        self._route = polygon(run.route)
        self._band = area_path(run.areas)
        self._closing = QPainterPath()
        for link in links:
            if link.role == "closing link":
                self._closing.addPolygon(polygon(link.line))
        joining = [s for s in links if s.role != "closing link"]
        self._joining = QPainterPath()
        for link in joining:
            self._joining.addPolygon(polygon(link.line))
        self._link_painter = StrandPainter(joining)
        self._painter = StrandPainter(run.strands)
        self._half_band = 0.5 * across(run.route, run.areas)
        box = self._band.boundingRect() if run.areas else QRectF()
        points = [*run.route, *(p for link in links for p in link.line)]
        if run.areas:
            points += [(box.left(), box.top()), (box.right(), box.bottom())]
        self.set_box(points)

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        inks = self.inks
        is_wide = 2.0 * self._half_band * self.scale_now >= 4.0
        painter.setBrush(Qt.BrushStyle.NoBrush)
        if self.is_selected:
            painter.setPen(inks.selected_halo)
            painter.drawPolyline(self._route)
            if is_wide:
                painter.drawPath(self._band)
        painter.setPen(inks.link)
        painter.drawPath(self._joining)
        self._link_painter.paint(painter, inks, self.scale_now)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        if not is_wide:
            painter.setPen(self._route_pen())
            painter.drawPolyline(self._route)
            return
        painter.setPen(inks.assumed_link)
        painter.drawPath(self._closing)
        painter.setPen(inks.band if self.has_current else inks.band_without_current)
        if self.is_selected:
            painter.setPen(inks.selected)
        painter.setBrush(inks.band_fill)
        painter.drawPath(self._band)
        self._painter.paint(painter, inks, self.scale_now)
        if self._painter.width * self.scale_now < THINNEST or not self.run.strands:
            painter.setPen(self._route_pen())
            painter.drawPolyline(self._route)

    def _route_pen(self) -> QPen:
        if self.is_selected and self.has_current:
            return self.inks.selected
        if self.has_current:
            return self.inks.route
        return self.inks.route_without_current

    def _visible_legs(self, camera: Camera) -> list[Leg]:
        """Those of the route, found once for each picture. [px]"""
        if self._legs is None or self._legs[0] != camera:
            self._legs = (camera, camera.visible_legs(self.run.route))
        return self._legs[1]

    def decorate(self, painter: QPainter, camera: Camera) -> list[QRectF]:
        taken = []
        for rise in self.run.rises:
            at = camera.pixel(rise.at)
            box = QRectF(at.x() - _SIGN, at.y() - _SIGN, 2 * _SIGN, 2 * _SIGN)
            if camera.frame.intersects(box):
                self._draw_rise(painter, at, rise)
                taken.append(box)
        leg = longest(self._visible_legs(camera))
        if leg is not None and math.dist(*leg) >= _SHORT:
            taken.append(self._draw_arrow(painter, leg))
        return taken

    def _draw_rise(self, painter: QPainter, at: QPointF, rise: Rise) -> None:
        theme = self.inks.theme
        colour = QColor(theme.accent if self.is_selected else theme.text)
        pen = QPen(colour, 1.6)
        if not self.has_current:
            pen.setDashPattern([2.0, 1.6])
        painter.setPen(pen)
        painter.setBrush(QColor(theme.paper))
        painter.drawEllipse(at, _SIGN, _SIGN)
        if rise.comes_nearer:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(colour)
            painter.drawEllipse(at, 2.4, 2.4)
            return
        arm = _SIGN * 0.62
        painter.setPen(QPen(colour, 1.6))
        painter.drawLine(at + QPointF(-arm, -arm), at + QPointF(arm, arm))
        painter.drawLine(at + QPointF(-arm, arm), at + QPointF(arm, -arm))

    def _draw_arrow(self, painter: QPainter, leg: Leg) -> QRectF:
        """A head on the longest visible leg: the direction of positive current."""
        (x0, y0), (x1, y1) = leg
        length = math.dist(*leg)
        ux, uy = (x1 - x0) / length, (y1 - y0) / length
        part = 0.3 if length > 90.0 else 0.5
        x, y = x0 + part * (x1 - x0), y0 + part * (y1 - y0)
        half = 0.5 * _ARROW
        head = QPolygonF(
            [
                QPointF(x + ux * half, y + uy * half),
                QPointF(x - ux * half - uy * half, y - uy * half + ux * half),
                QPointF(x - ux * half + uy * half, y - uy * half - ux * half),
            ]
        )
        theme = self.inks.theme
        painter.setPen(QPen(QColor(theme.paper), 1.4))
        painter.setBrush(QColor(theme.accent if self.is_selected else theme.text))
        painter.drawPolygon(head)
        return head.boundingRect()

    def labels(self, camera: Camera, unit: str, *, is_crowded: bool) -> list[Label]:
        run = self.run
        text = shortened(run.title)
        if self.is_selected or not is_crowded:
            text += "  " + range_text(run.levels, unit)
        legs = sorted(self._visible_legs(camera), key=lambda leg: -math.dist(*leg))
        half = 0.5 * self.inks.width(text, bold=True) + 4.0
        places: list[tuple[float, float]] = []
        offset = self._half_band * camera.scale + 11.0
        if is_crowded and not self.is_selected:
            if not legs or math.dist(*legs[0]) < half:
                return []
            legs, places = [], _beside(legs[0], half, offset)[:2]
        for leg in legs[:2]:
            places += _beside(leg, half, offset)
        if not any(math.dist(*leg) >= _SHORT for leg in legs):
            for rise in run.rises:
                at = camera.pixel(rise.at)
                if camera.frame.contains(at):
                    places += around(at.x(), at.y(), half, _SIGN + 3.0)
        if not places:
            return []
        importance = Importance.SELECTED if self.is_selected else Importance.RUN
        name = Label(
            text, tuple(places), importance, self.item_id, bold=self.is_selected
        )
        if is_crowded:
            return [name]
        return [
            name,
            *self._rise_labels(camera, unit),
            *self._painter.letters(camera, self.item_id),
        ]

    def _rise_labels(self, camera: Camera, unit: str) -> list[Label]:
        found = []
        for rise in self.run.rises:
            at = camera.pixel(rise.at)
            if not camera.frame.contains(at):
                continue
            start, end = length_text(rise.z_from, unit), length_text(rise.z_to, unit)
            text = f"{rise.axis} {start} → {end}"
            half = 0.5 * self.inks.width(text) + 4.0
            places = around(at.x(), at.y(), half, _SIGN + 3.0)
            found.append(Label(text, places, Importance.HEIGHT, self.item_id))
        return found

    def distance(self, at: Point) -> float:
        if self._band.contains(QPointF(*at)):
            return 0.0
        lines = [self.run.route, *(s.line for s in self.run.strands)]
        return min(distance_to_line(at, line) for line in lines)

    def grips(self) -> tuple[Point, ...]:
        return self.run.route

    def _made_targets(self) -> Targets:
        return targets(
            lines=[self.run.route], minor=[strand.line for strand in self.run.strands]
        )


def _beside(leg: Leg, half: float, offset: float) -> list[tuple[float, float]]:
    """Places for a label on both sides of a leg: middle, then its thirds. [px]"""
    (x0, y0), (x1, y1) = leg
    length = math.dist(*leg)
    if length == 0.0:
        return []
    nx, ny = -(y1 - y0) / length, (x1 - x0) / length
    # A level leg needs half the height of the text, an upright one half its width.
    away = offset + abs(nx) * half
    return [
        (x0 + t * (x1 - x0) + side * away * nx, y0 + t * (y1 - y0) + side * away * ny)
        for t in (0.5, 0.7, 0.3)
        for side in (-1.0, 1.0)
    ]
