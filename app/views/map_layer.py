"""The map under the drawing: colours, iso-lines, masked areas, how current it is."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QByteArray, QDataStream, QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QImage, QPainter, QPainterPath, QPolygonF
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.map_picture import DrawnIsoLine, MapPicture
from app.views.camera import Camera
from app.views.inks import Inks, shade
from app.views.labels import Importance, Label
from engine.colour_ramp import OPACITY

#: Labels of an iso-line shorter than this would hide it. [px]
_SHORTEST = 70.0

_OUT_OF_DATE = 0.45


class MapLayer(QGraphicsItem):
    """Draws one `MapPicture`; the map and its iso-lines can be hidden apart."""

    def __init__(self, inks: Inks) -> None:
        super().__init__()
        self.inks = inks
        self.shows_colours = True
        self.shows_lines = True
        self._picture: MapPicture | None = None
        self._image = QImage()
        self._lines: list[tuple[DrawnIsoLine, QPolygonF]] = []
        self._places: list[_Along] | None = None
        self._box = QRectF()

    @property
    def picture(self) -> MapPicture | None:
        return self._picture

    def set_picture(self, picture: MapPicture | None) -> None:
        """Show another map, or none."""
        self.prepareGeometryChange()
        self._picture = picture
        self._lines, self._places = [], None
        self._box = QRectF()
        if picture is None:
            return
        x0, y0, x1, y1 = picture.rect
        self._box = QRectF(x0, y0, x1 - x0, y1 - y0)
        self._image = _greyed(picture.image) if picture.is_stale else picture.image
        self._lines = [(line, _polygon(line.points)) for line in picture.iso_lines]

    @property
    def is_coloured(self) -> bool:
        """Whether a map shows under the drawing."""
        return self._picture is not None and self.shows_colours

    def boundingRect(self) -> QRectF:
        return self._box

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,
    ) -> None:
        if self._picture is None:
            return
        if self.shows_colours:
            painter.setOpacity(OPACITY * (_OUT_OF_DATE if self._is_stale else 1.0))
            painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
            painter.drawImage(self._box, self._image)
            painter.setOpacity(1.0)
            self._hatch(painter)
        if self.shows_lines:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            strokes = {bold: self._strokes(bold=bold) for bold in (False, True)}
            for line, polygon in self._lines:
                for stroke in strokes[line.bold]:
                    painter.setPen(stroke)
                    painter.drawPolyline(polygon)

    @property
    def _is_stale(self) -> bool:
        return self._picture is not None and self._picture.is_stale

    def _strokes(self, *, bold: bool) -> list:
        """Pens of an iso-line: paper below, so that it reads on any colour."""
        theme = self.inks.theme
        fade = 0.45 if self._is_stale else 1.0
        assert self._picture is not None
        dashes = (5.0, 3.0) if self._picture.is_coarse else ()
        if bold:
            return [
                self.inks.pen(theme.paper, 4.6, alpha=0.75 * fade),
                self.inks.pen(theme.text, 2.4, dashes, alpha=fade),
            ]
        # One pixel and no more: Qt draws wider lines ten times more slowly.
        return [self.inks.pen(theme.text, 1.0, dashes, alpha=0.85 * fade)]

    def _hatch(self, painter: QPainter) -> None:
        """Masked areas, hatched at a constant distance in pixels."""
        assert self._picture is not None
        if not self._picture.masked:
            return
        to_pixels = painter.worldTransform()
        painter.save()
        painter.resetTransform()
        theme = self.inks.theme
        painter.setPen(self.inks.pen(theme.line, 1.0))
        for area in self._picture.masked:
            path = QPainterPath()
            path.addPolygon(
                to_pixels.map(QPolygonF([QPointF(x, y) for x, y in area.outline]))
            )
            path.closeSubpath()
            painter.fillPath(path, shade(theme.paper, 0.6))
            painter.setBrush(QBrush(shade(theme.line, 0.8), Qt.BrushStyle.BDiagPattern))
            painter.drawPath(path)
        painter.restore()

    def labels(self, camera: Camera) -> list[Label]:
        """Values of the iso-lines, and why areas are masked."""
        picture = self._picture
        if picture is None:
            return []
        found = []
        if self.shows_lines and not picture.is_stale:
            if self._places is None:
                self._places = [_along(line) for line, _ in self._lines if line.text]
            named = [line for line, _ in self._lines if line.text]
            for line, places in zip(named, self._places, strict=True):
                label = self._line_label(line, places, camera)
                if label is not None:
                    found.append(label)
        if self.shows_colours:
            for area in picture.masked:
                low, high = area.outline.min(axis=0), area.outline.max(axis=0)
                if (high - low).min() * camera.scale < 40.0:
                    continue
                at = camera.pixel(0.5 * (low + high))
                spots = tuple((at.x(), at.y() + dy) for dy in (18.0, -18.0, 36.0))
                found.append(
                    Label(
                        area.reason,
                        spots,
                        Importance.ISO_LINE,
                        colour=self.inks.theme.muted,
                    )
                )
        return found

    def _line_label(
        self, line: DrawnIsoLine, places: _Along, camera: Camera
    ) -> Label | None:
        assert self._picture is not None
        if places.length * camera.scale < _SHORTEST:
            return None
        pixels = tuple((p.x(), p.y()) for p in map(camera.pixel, places.at))
        is_coarse = self._picture.is_coarse
        return Label(
            line.text,
            pixels,
            Importance.REFERENCE_LEVEL if line.bold else Importance.ISO_LINE,
            bold=line.bold,
            colour=self.inks.theme.muted if is_coarse else "",
        )


@dataclass(frozen=True)
class _Along:
    """How long a line is, and places on it for its label, best first. [m]"""

    length: float
    at: tuple[tuple[float, float], ...]


def _along(line: DrawnIsoLine) -> _Along:
    points = line.points
    steps = np.hypot(*np.diff(points, axis=0).T)
    walked = np.concatenate([[0.0], np.cumsum(steps)])
    wanted = np.array([0.5, 0.25, 0.75, 0.1, 0.9, 0.4, 0.6]) * walked[-1]
    xs = np.interp(wanted, walked, points[:, 0])
    ys = np.interp(wanted, walked, points[:, 1])
    first = (float(line.label_place[0]), float(line.label_place[1]))
    places = (first, *zip(xs.tolist(), ys.tolist(), strict=True))
    return _Along(float(walked[-1]), places)


def _polygon(points: npt.NDArray[np.float64]) -> QPolygonF:
    """A line (n, 2) as Qt takes it, read at once instead of point by point."""
    data = len(points).to_bytes(4, "big") + points.astype(">f8").tobytes()
    found = QPolygonF()
    QDataStream(QByteArray(data)) >> found
    return found


def _greyed(image: QImage) -> QImage:
    """The image without colour, as opaque as before."""
    made = image.convertToFormat(QImage.Format.Format_RGBA8888_Premultiplied).copy()
    pixels = np.frombuffer(made.bits(), np.uint8)
    pixels = pixels.reshape(made.height(), made.bytesPerLine())[:, : 4 * made.width()]
    rgba = pixels.reshape(made.height(), made.width(), 4)
    grey = rgba[..., :3] @ np.array([0.2126, 0.7152, 0.0722])
    rgba[..., :3] = np.round(grey)[..., None]
    return made
