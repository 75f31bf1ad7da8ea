"""What the active tool shows on top of the drawing, and the mark of the catch."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.tools.tool import Dimension, Overlay, Pointer
from app.views.camera import Camera
from app.views.inks import Inks, shade
from app.views.labels import text_box

_CATCH = 6.0

#: Lines of text that a dimension's text is tried at, past the middle of its line.
_ROWS = 6

#: Side of a handle. [px]
HANDLE = 10.0


def draw_overlay(
    painter: QPainter,
    overlay: Overlay,
    camera: Camera,
    inks: Inks,
    taken: list[QRectF] | None = None,
) -> None:
    """Draw a tool's overlay in pixels.

    Its texts keep off the boxes that are `taken`, and theirs are added.
    """
    taken = [] if taken is None else taken
    painter.setBrush(Qt.BrushStyle.NoBrush)
    for lines, pen in (
        (overlay.lines, inks.overlay),
        (overlay.dashed, inks.suggestion),
    ):
        painter.setPen(pen)
        for line in lines:
            painter.drawPolyline(QPolygonF([camera.pixel(p) for p in line]))
    if overlay.box is not None:
        first, second = (camera.pixel(p) for p in overlay.box)
        painter.setPen(inks.overlay)
        painter.setBrush(shade(inks.theme.accent, 0.1))
        painter.drawRect(QRectF(first, second).normalized())
    for point in overlay.points:
        draw_handle(painter, camera.pixel(point), inks)
    for dimension in overlay.dimensions:
        _draw_dimension(painter, dimension, camera, inks, taken)
    for at, text in overlay.labels:
        mark = camera.pixel(at)
        places = [mark + QPointF(*way) for way in _ways(text, inks)]
        _draw_note(painter, text, places, camera, inks, taken)


def draw_handle(painter: QPainter, at: QPointF, inks: Inks) -> QRectF:
    """A square that can be gripped."""
    x, y = round(at.x()), round(at.y())
    box = QRectF(x - HANDLE / 2, y - HANDLE / 2, HANDLE, HANDLE)
    painter.setPen(QPen(QColor(inks.theme.accent), 2.0))
    painter.setBrush(QColor(inks.theme.paper))
    painter.drawRect(box.adjusted(1, 1, -1, -1))
    return box


def draw_catch(
    painter: QPainter,
    pointer: Pointer,
    camera: Camera,
    inks: Inks,
    taken: list[QRectF] | None = None,
) -> None:
    """A mark of its own for each kind of catch, with its word off what is `taken`."""
    if not pointer.caught:
        return
    at = camera.pixel(pointer.at)
    for pen in (QPen(QColor(inks.theme.paper), 4.0), inks.catch_mark):
        painter.setPen(pen)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        if pointer.caught == "vertex":
            painter.drawRect(QRectF(at.x() - _CATCH, at.y() - _CATCH, 12.0, 12.0))
        elif pointer.caught == "midpoint":
            corners = [(-_CATCH, 5.0), (_CATCH, 5.0), (0.0, -_CATCH)]
            painter.drawPolygon(QPolygonF([at + QPointF(*c) for c in corners]))
        elif pointer.caught == "edge":
            painter.drawEllipse(at, 5.0, 5.0)
        else:
            painter.drawLine(at + QPointF(-4.0, 0.0), at + QPointF(4.0, 0.0))
            painter.drawLine(at + QPointF(0.0, -4.0), at + QPointF(0.0, 4.0))
    if pointer.caught != "grid":
        across = 12.0 + text_box(pointer.caught, inks, at).width() / 2
        places = [
            at + QPointF(side * across, down)
            for down in (16.0, -16.0, 32.0, -32.0, 48.0)
            for side in (1.0, -1.0)
        ]
        _draw_note(
            painter, pointer.caught, places, camera, inks,
            [] if taken is None else taken,
        )  # fmt: skip


def _draw_dimension(
    painter: QPainter,
    dimension: Dimension,
    camera: Camera,
    inks: Inks,
    taken: list[QRectF],
) -> None:
    start, end = camera.pixel(dimension.start), camera.pixel(dimension.end)
    along = end - start
    length = math.hypot(along.x(), along.y())
    if length < 1.0:
        return
    across = QPointF(-along.y(), along.x()) / length * 5.0
    painter.setPen(QPen(QColor(inks.theme.accent), 1.2))
    painter.drawLine(start, end)
    for at in (start, end):
        painter.drawLine(at - across, at + across)
    box = text_box(dimension.text, inks, start, bold=True)
    # Beside the line by as much as the text reaches that way, on either side.
    beside = across / 5.0
    away = abs(beside.x()) * box.width() / 2 + abs(beside.y()) * box.height() / 2 + 4.0
    places = [
        start + along * share + beside * away * side
        for side in (0.0, 1.0, -1.0, 2.5, -2.5)
        for share in (0.5, 0.35, 0.65, 0.2, 0.8)
    ]
    # Past its ends, where a short line stands in a crowd.
    places += [
        start + along / 2 + along / length * step + beside * away * side
        for row in range(1, _ROWS + 1)
        for step in (-row * (box.height() + 4.0), row * (box.height() + 4.0))
        for side in (1.0, -1.0)
    ]
    _draw_note(painter, dimension.text, places, camera, inks, taken, bold=True)


def _ways(text: str, inks: Inks) -> list[tuple[float, float]]:
    """From a place to the middles of a text about it: above first."""
    aside = 12.0 + text_box(text, inks, QPointF()).width() / 2
    return [
        (0.0, -18.0), (0.0, 18.0), (aside, 0.0), (-aside, 0.0), (aside, -18.0),
        (-aside, -18.0), (aside, 18.0), (-aside, 18.0), (0.0, -36.0), (0.0, 36.0),
    ]  # fmt: skip


def _draw_note(
    painter: QPainter,
    text: str,
    places: list[QPointF],
    camera: Camera,
    inks: Inks,
    taken: list[QRectF],
    *,
    bold: bool = False,
) -> None:
    """A text at the first of its places that is free, else at the best, on paper."""
    box, least = QRectF(), math.inf
    for at in places:
        tried = _inside(text_box(text, inks, at, bold=bold), camera)
        covered = _covered(tried, taken)
        if covered < least:
            box, least = tried, covered
        if covered == 0.0:
            break
    taken.append(box)
    # Where it has to lie over another text, that one does not shine through.
    painter.setPen(QPen(QColor(inks.theme.accent), 1.0))
    painter.setBrush(QColor(inks.theme.paper))
    painter.drawRoundedRect(box, 3.0, 3.0)
    painter.setFont(inks.bold if bold else inks.small)
    painter.setPen(QColor(inks.theme.text))
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, text)


def _covered(box: QRectF, taken: list[QRectF]) -> float:
    """How much of what is taken a box would cover. [px²]"""
    parts = [box.intersected(other) for other in taken if box.intersects(other)]
    return sum(part.width() * part.height() for part in parts)


def _inside(box: QRectF, camera: Camera) -> QRectF:
    """A box moved into the view."""
    x = min(max(box.left(), 2.0), camera.width - box.width() - 2.0)
    y = min(max(box.top(), 2.0), camera.height - box.height() - 2.0)
    return QRectF(x, y, box.width(), box.height())
