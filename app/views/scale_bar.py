"""Grid, scale bar, axes and north: what gives the drawing its measure."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from app.views.camera import Camera
from app.views.inks import Inks
from app.views.projection import PLAN, Sight, across_text
from engine.units import LENGTH_UNITS

#: Grid lines are at least this far apart. [px]
_FINE = 12.0

#: Steps of grids in feet and inches under ten feet. [in]
_IN_INCHES = (1 / 16, 1 / 8, 1 / 4, 1 / 2, 1, 3, 6, 12, 24, 60)

_LONGEST_BAR = 140.0
_EDGE = 14.0


def grid_step(scale: float, unit: str, apart: float = _FINE) -> float:
    """Smallest round step of the length unit that shows at least `apart` px wide. [m]

    1-2-5 steps, under ten feet parts of a foot: 3 in and not 0.2 ft.

    Examples
    --------
    >>> grid_step(100.0, "m"), grid_step(60.0, "m")
    (0.2, 0.2)
    """
    if unit in ("ft", "in"):
        inch, unit = LENGTH_UNITS["in"], "ft"
        for count in _IN_INCHES:
            if count * inch * scale >= apart * (1 - 1e-9):
                return count * inch
    metres = 1.0 if unit == "mm" else LENGTH_UNITS[unit]
    least = apart / scale / metres
    power = math.floor(math.log10(least))
    for factor in (1, 2, 5, 10):
        step = float(f"{factor}e{power}")
        if step >= least * (1 - 1e-9):
            break
    return step * metres


def draw_grid(painter: QPainter, camera: Camera, inks: Inks, unit: str) -> None:
    """Fine and coarse grid lines in pixels."""
    fine = grid_step(camera.scale, unit)
    coarse = grid_step(camera.scale, unit, 5 * _FINE)
    # Filled boxes of one pixel: ten times as fast as lines.
    for step, colour in ((fine, inks.fine_grid), (coarse, inks.coarse_grid)):
        for box in _grid_lines(camera, step):
            painter.fillRect(box, colour)


def _grid_lines(camera: Camera, step: float) -> list[QRectF]:
    visible = camera.visible
    first = math.ceil(visible.left() / step)
    last = math.floor(visible.right() / step)
    lines = []
    for index in range(first, last + 1):
        x = round(camera.left + camera.scale * index * step)
        lines.append(QRectF(x, 0.0, 1.0, camera.height))
    first = math.ceil(visible.top() / step)
    last = math.floor(visible.bottom() / step)
    for index in range(first, last + 1):
        y = round(camera.top - camera.scale * index * step)
        lines.append(QRectF(0.0, y, camera.width, 1.0))
    return lines


def draw_scale_bar(
    painter: QPainter,
    camera: Camera,
    inks: Inks,
    sight: Sight,
    unit: str,
    north: float | None,
) -> QRectF:
    """The scale bar in the lower left corner; returns the box it fills. [px]"""
    length = grid_step(camera.scale, unit, 0.5 * _LONGEST_BAR)
    wide = length * camera.scale
    right, up = across_text(sight)
    # A line's name is told above the view.
    view = "Line" if sight.is_along_line else sight.name.capitalize()
    text = bar_text(length, unit)
    words = f"{view}:  {right} →  {up} ↑"
    metrics = inks.small_metrics
    line = metrics.height()
    across = max(wide + 10 + metrics.horizontalAdvance(text), _advance(inks, words))
    box = QRectF(
        _EDGE - 6, camera.height - _EDGE - 2 * line - 6, across + 14, 2 * line + 10
    )
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(inks.patch)
    painter.drawRoundedRect(box, 4, 4)
    painter.setFont(inks.small)
    painter.setPen(QColor(inks.theme.muted))
    painter.drawText(QPointF(_EDGE, box.top() + 3 + metrics.ascent()), words)
    y = box.bottom() - 5 - 0.35 * line
    painter.setPen(QPen(QColor(inks.theme.text), 1.6))
    painter.drawLine(QPointF(_EDGE, y), QPointF(_EDGE + wide, y))
    for x in (_EDGE, _EDGE + wide):
        painter.drawLine(QPointF(x, y - 4), QPointF(x, y + 4))
    painter.drawText(QPointF(_EDGE + wide + 8, y + 0.36 * metrics.ascent()), text)
    if sight is PLAN and north is not None:
        _draw_north(painter, QPointF(box.right() + 22, box.center().y()), inks, north)
        box = box.adjusted(0, 0, 40, 0)
    return box


def bar_text(length: float, unit: str) -> str:
    """The length of the bar: "2 m", in feet from one foot on and else in inches."""
    name = "m" if unit == "mm" else unit
    if unit in ("ft", "in"):
        name = "ft" if length >= LENGTH_UNITS["ft"] else "in"
    return f"{float(f'{length / LENGTH_UNITS[name]:.6g}'):g} {name}"


def _advance(inks: Inks, text: str) -> float:
    return inks.small_metrics.horizontalAdvance(text)


def _draw_north(painter: QPainter, at: QPointF, inks: Inks, north: float) -> None:
    turn = math.radians(north)
    tip = QPointF(math.cos(turn), -math.sin(turn))
    painter.setPen(QPen(QColor(inks.theme.text), 1.6))
    painter.drawLine(at - tip * 12, at + tip * 6)
    side = QPointF(-tip.y(), tip.x())
    painter.drawLine(at + tip * 6, at + tip * 1 + side * 4)
    painter.drawLine(at + tip * 6, at + tip * 1 - side * 4)
    middle = at + tip * 14
    box = QRectF(middle.x() - 8, middle.y() - 8, 16, 16)
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, "N")
