"""Conductors in their true width and colours, with as much detail as can be seen."""

from __future__ import annotations

import math
from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtGui import QPainter, QPainterPath

from app.views.camera import Camera, longest
from app.views.inks import TWO_COLOURED, YELLOW, Inks, pen
from app.views.labels import Importance, Label
from app.views.shape_item import (
    SINGLE,
    THINNEST,
    area_path,
    polygon,
    thickness,
)
from engine.drawing import Strand

#: Letters of neighbouring conductors stand this far apart along the run. [px]
_LETTER_STEP = 22.0

#: Letters show from this width of a conductor on. [px]
_LETTERED = 4.0


class StrandPainter:
    """Draws some conductors; made once, used at every zoom."""

    def __init__(self, strands: Sequence[Strand]) -> None:
        self.strands = sorted(strands, key=lambda strand: strand.nearness)
        self.width = thickness(self.strands)
        self._paths: list[QPainterPath] | None = None
        self._together: dict[str, QPainterPath] | None = None

    def paint(self, painter: QPainter, inks: Inks, scale: float) -> None:
        """Draw in metres on a painter of `scale` pixels per metre."""
        width = self.width * scale
        if width < THINNEST or not self.strands:
            return
        if width < SINGLE:
            painter.setPen(Qt.PenStyle.NoPen)
            for letters, path in self._joined().items():
                painter.setBrush(inks.strand_brush(letters))
                painter.drawPath(path)
            return
        for strand, path in zip(self.strands, self._single(), strict=True):
            painter.setPen(inks.strand)
            painter.setBrush(inks.strand_brush(strand.letters))
            painter.drawPath(path)
            if strand.letters in TWO_COLOURED:
                painter.setBrush(Qt.BrushStyle.NoBrush)
                painter.setPen(pen(YELLOW, max(1.5, 0.35 * width), (3.0, 3.0)))
                painter.drawPolyline(polygon(strand.line))

    def letters(self, camera: Camera, item: str) -> list[Label]:
        """The letter of every conductor, side by side along the longest visible leg."""
        if self.width * camera.scale < _LETTERED:
            return []
        found = []
        count = len(self.strands)
        for index, strand in enumerate(self.strands):
            if not strand.letters:
                continue
            leg = longest(camera.visible_legs(strand.line))
            if leg is None:
                continue
            length = math.dist(*leg)
            places = []
            for shift in (0.0, 0.22, -0.22):
                along = (index - 0.5 * (count - 1)) * _LETTER_STEP
                part = 0.5 + shift
                if length > 0:
                    part += along / length
                if 0.0 <= part <= 1.0:
                    (x0, y0), (x1, y1) = leg
                    places.append((x0 + part * (x1 - x0), y0 + part * (y1 - y0)))
            found.append(Label(strand.letters, tuple(places), Importance.LETTER, item))
        return found

    def _single(self) -> list[QPainterPath]:
        if self._paths is None:
            self._paths = [area_path(strand.areas) for strand in self.strands]
        return self._paths

    def _joined(self) -> dict[str, QPainterPath]:
        """All conductors of a letter as one path: a fraction of the time."""
        if self._together is None:
            together: dict[str, QPainterPath] = {}
            for strand in self.strands:
                path = together.setdefault(strand.letters, QPainterPath())
                path.setFillRule(Qt.FillRule.WindingFill)
                path.addPath(area_path(strand.areas))
            self._together = together
        return self._together
