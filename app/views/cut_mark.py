"""Where the section of a run is cut, and which way one looks, marked on the plan."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.views.camera import Camera
from app.views.inks import Inks
from engine.runs import Run

Point = tuple[float, float]

#: How far the mark stands out on both sides, and its arrows. [px]
_SIDE, _SHAFT, _HEAD = 26.0, 16.0, 8.0


def cut_place(route: Sequence[Point], from_end: bool) -> tuple[Point, Point] | None:
    """Where a run is cut on plan and the direction one looks; None for a riser alone.

    Parameters
    ----------
    route : sequence of (x, y)
        The run's vertices. [m]
    from_end : bool
        Whether one looks from its end to its start.

    Returns
    -------
    (x, y), (dx, dy)
        A sixth along the first leg that shows on plan, and a unit vector. [m]
    """
    for a, b in pairwise(route):
        length = math.dist(a, b)
        if length < 1e-6:
            continue
        way = ((b[0] - a[0]) / length, (b[1] - a[1]) / length)
        at = (a[0] + way[0] * length / 6, a[1] + way[1] * length / 6)
        return at, (-way[0], -way[1]) if from_end else way
    return None


def draw_cut(
    painter: QPainter, run: object, from_end: bool, camera: Camera, inks: Inks
) -> None:
    """Draw where a run is cut; of anything else nothing."""
    if isinstance(run, Run):
        found = cut_place([(x, y) for x, y, _ in run.route], from_end)
        if found is not None:
            _draw(painter, *found, camera, inks)


def _draw(painter: QPainter, at: Point, way: Point, camera: Camera, inks: Inks) -> None:
    """A line across the run with an arrow at both ends."""
    middle = camera.pixel(at)
    ahead = camera.pixel((at[0] + way[0], at[1] + way[1])) - middle
    length = math.hypot(ahead.x(), ahead.y()) or 1.0
    along = ahead / length
    side = QPointF(-along.y(), along.x())
    for colour, width in ((inks.theme.paper, 5.0), (inks.theme.accent, 2.0)):
        painter.setPen(QPen(QColor(colour), width))
        for sign in (-1.0, 1.0):
            foot = middle + side * (sign * _SIDE)
            painter.drawLine(middle + side * (sign * 0.5 * _SIDE), foot)
            painter.drawLine(foot, foot + along * _SHAFT)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(inks.theme.accent))
    for sign in (-1.0, 1.0):
        tip = middle + side * (sign * _SIDE) + along * (_SHAFT + _HEAD)
        back = tip - along * _HEAD * 1.5
        painter.drawPolygon(
            QPolygonF([tip, back + side * _HEAD * 0.6, back - side * _HEAD * 0.6])
        )
