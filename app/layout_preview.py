"""A small picture of a layout that is not open: plan above, seen from the side below.

Both are to one scale with x in line, so that a place on plan stands over its height.
"""

from __future__ import annotations

from itertools import pairwise

from PySide6.QtCore import QEvent, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QTransform
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.theme import STEP, theme_for
from app.views.inks import Inks
from app.views.shape_item import area_path, polygon
from app.views.strand_painter import StrandPainter
from engine.conductors import conductors
from engine.drawing import Plan, plan
from engine.elevation import elevation
from engine.layout import Layout
from engine.sight import LOOKING_Y

#: Around each of the two pictures. [logical pixels]
_MARGIN = 5 * STEP

#: Height of the line that names a picture. [logical pixels]
_NAME = 5 * STEP


class LayoutPreview(QWidget):
    """Draws a layout as plan and from the side."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._plans: tuple[tuple[str, Plan], ...] = ()
        self._inks = Inks(theme_for(self.palette()))
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Preview")

    def show_layout(self, layout: Layout) -> None:
        """Show another layout.

        Raises
        ------
        UserError
            When its conductors cannot be made.
        """
        made = conductors(layout)
        self._plans = (
            ("Plan", plan(layout, made)),
            ("Looking +y", elevation(layout, made, LOOKING_Y)),
        )
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(480, 420)

    def minimumSizeHint(self) -> QSize:
        return QSize(240, 200)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self._inks = Inks(theme_for(self.palette()))
            self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        theme = self._inks.theme
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.fillRect(self.rect(), QColor(theme.paper))
        drawn = [
            (name, shapes, box)
            for name, shapes in self._plans
            if (box := shapes.bounds()) is not None
        ]
        if not drawn:
            painter.setPen(QColor(theme.muted))
            painter.drawText(
                self.rect(), Qt.AlignmentFlag.AlignCenter, "An empty plan, to draw on"
            )
            return
        left = min(box[0] for *_, box in drawn)
        across = max(box[2] for *_, box in drawn) - left
        down = sum(box[3] - box[1] for *_, box in drawn)
        room = self.height() - len(drawn) * (2 * _MARGIN + _NAME)
        scale = min((self.width() - 2 * _MARGIN) / across, max(room, 1) / down)
        x = 0.5 * (self.width() - scale * across)
        top = max(0.0, 0.5 * (room - scale * down))
        for name, shapes, box in drawn:
            height = scale * (box[3] - box[1])
            painter.setPen(QColor(theme.muted))
            painter.setFont(self._inks.small)
            painter.drawText(
                QRectF(_MARGIN, top, self.width(), _NAME),
                Qt.AlignmentFlag.AlignVCenter,
                name,
            )
            top += _NAME + _MARGIN
            to_pixels = QTransform(
                scale, 0, 0, -scale, x - scale * left, top + scale * box[3]
            )
            self._draw(painter, shapes, to_pixels, scale)
            top += height + _MARGIN

    def _draw(
        self, painter: QPainter, shapes: Plan, to_pixels: QTransform, scale: float
    ) -> None:
        inks = self._inks
        painter.setTransform(to_pixels)
        for places, pen, brush in (
            (shapes.rooms, inks.room, None),
            (shapes.zones, inks.zone, inks.zone_fill),
            (shapes.enclosures, inks.enclosure, inks.enclosure_fill),
            (shapes.equipment, inks.equipment, inks.equipment_fill),
        ):
            painter.setPen(pen)
            painter.setBrush(brush if brush is not None else Qt.BrushStyle.NoBrush)
            for place in places:
                painter.drawPath(area_path([place.area]))
        StrandPainter(shapes.equipment_strands).paint(painter, inks, scale)
        for run in shapes.runs:
            painter.setPen(inks.band)
            painter.setBrush(inks.band_fill)
            painter.drawPath(area_path(run.areas))
            StrandPainter(run.strands).paint(painter, inks, scale)
            painter.setPen(inks.route)
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawPolyline(polygon(run.route))
        painter.resetTransform()
        # Names keep clear of equipment and of each leg of a run.
        taken = [
            to_pixels.mapRect(polygon(leg).boundingRect()).adjusted(
                -STEP, -STEP, STEP, STEP
            )
            for run in shapes.runs
            for leg in pairwise(run.route)
        ]
        for places in (shapes.equipment, shapes.rooms):
            # Places that show as one, such as rooms over each other, share a name.
            names: dict[tuple[float, ...], list[str]] = {}
            for place in places:
                box = to_pixels.mapRect(area_path([place.area]).boundingRect())
                corners = (box.left(), box.top(), box.width(), box.height())
                names.setdefault(tuple(round(c) for c in corners), []).append(
                    place.title
                )
            for box_of, titles in names.items():
                self._name(painter, " · ".join(titles), QRectF(*box_of), taken)
            taken += [QRectF(*box_of) for box_of in names]

    def _name(
        self, painter: QPainter, text: str, box: QRectF, taken: list[QRectF]
    ) -> None:
        """Write a name in a corner that is free, or leave it out."""
        inks = self._inks
        across = inks.width(text) + 2 * STEP
        down = inks.small_metrics.height() + 2
        if across > box.width() - STEP:
            return
        inner = box.adjusted(STEP, STEP, -STEP - across, -STEP - down)
        for corner in (
            inner.topLeft(), inner.topRight(), inner.bottomLeft(), inner.bottomRight()
        ):  # fmt: skip
            place = QRectF(corner.x(), corner.y(), across, down)
            if any(place.intersects(other) for other in taken):
                continue
            painter.fillRect(place, inks.patch)
            painter.setFont(inks.small)
            painter.setPen(QColor(inks.theme.text))
            painter.drawText(place, Qt.AlignmentFlag.AlignCenter, text)
            taken.append(place)
            return
