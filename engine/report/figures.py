"""A picture of marks on paper as part of a PDF page, true to scale."""

from __future__ import annotations

import io
from collections.abc import Sequence

import numpy as np
from PIL.Image import fromarray
from reportlab.lib.units import mm
from reportlab.lib.utils import ImageReader
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import Flowable, Image

from engine.picture import Picture, Raster, Stroke, Words
from engine.picture.marks import Colour, Points
from engine.report.page import BOLD_FONT, FONT
from engine.report.structure import Element


class Figure(Flowable):  # type: ignore[misc]
    """A picture that keeps its size: a millimetre of it is one on paper.

    `alternative` says what it shows, for those who cannot see it.
    """

    def __init__(self, picture: Picture, alternative: str) -> None:
        super().__init__()
        self._element = Element("Figure", alternative)
        self.picture = picture
        self.width = picture.width * mm
        self.height = picture.height * mm

    def wrap(self, width: float, height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        with self.canv.drawn_for(self._element):
            _draw(self.canv, self.picture)


class Logo(Image):  # type: ignore[misc]
    """The picture of a house, a figure of the document."""

    def draw(self) -> None:
        with self.canv.drawn_for(Element("Figure", "Logo of the author's house")):
            super().draw()


class FigureRow(Flowable):  # type: ignore[misc]
    """Pictures side by side, their upper edges level, `gap` apart. [mm]"""

    def __init__(
        self, pictures: Sequence[Picture], gap: float, alternatives: Sequence[str]
    ) -> None:
        super().__init__()
        self._elements = [Element("Figure", text) for text in alternatives]
        self._pictures, self._gap = pictures, gap
        self.width = (sum(p.width + gap for p in pictures) - gap) * mm
        self.height = max(picture.height for picture in pictures) * mm

    def wrap(self, width: float, height: float) -> tuple[float, float]:
        return self.width, self.height

    def draw(self) -> None:
        canvas = self.canv
        left = 0.0
        for picture, element in zip(self._pictures, self._elements, strict=True):
            canvas.saveState()
            canvas.translate(left * mm, self.height - picture.height * mm)
            with canvas.drawn_for(element):
                _draw(canvas, picture)
            canvas.restoreState()
            left += picture.width + self._gap


def _draw(canvas: Canvas, picture: Picture) -> None:
    canvas.setLineCap(0)
    canvas.setLineJoin(1)
    for part in picture.parts:
        if isinstance(part, Stroke):
            _draw_stroke(canvas, part)
        elif isinstance(part, Raster):
            _draw_raster(canvas, part)
        else:
            _draw_words(canvas, part)


def _ink(colour: Colour) -> tuple[float, float, float]:
    red, green, blue = colour
    return red / 255.0, green / 255.0, blue / 255.0


def _path(canvas: Canvas, points: Points) -> object:
    path = canvas.beginPath()
    path.moveTo(points[0][0] * mm, points[0][1] * mm)
    for x, y in points[1:]:
        path.lineTo(x * mm, y * mm)
    return path


def _draw_stroke(canvas: Canvas, stroke: Stroke) -> None:
    if len(stroke.points) < 2:
        return
    canvas.setStrokeColorRGB(*_ink(stroke.colour))
    canvas.setLineWidth(stroke.width * mm)
    canvas.setDash(*((stroke.dash[0] * mm, stroke.dash[1] * mm) if stroke.dash else ()))
    canvas.drawPath(_path(canvas, stroke.points), stroke=1, fill=0)
    canvas.setDash()


def _draw_raster(canvas: Canvas, raster: Raster) -> None:
    """The pixels over white: no transparency is left in the file."""
    alpha = raster.rgba[::-1, :, 3:].astype(float) / 255.0
    over = raster.rgba[::-1, :, :3] * alpha + 255.0 * (1.0 - alpha)
    file = io.BytesIO()
    fromarray(np.round(over).astype(np.uint8)).save(file, "PNG")
    file.seek(0)
    left, bottom, right, top = raster.box
    canvas.drawImage(
        ImageReader(file),
        left * mm,
        bottom * mm,
        (right - left) * mm,
        (top - bottom) * mm,
    )


def _draw_words(canvas: Canvas, words: Words) -> None:
    size = words.size * mm
    width = words.width * mm
    shift = {"left": 0.0, "middle": -0.5, "right": -1.0}[words.anchor] * width
    canvas.saveState()
    canvas.translate(words.at[0] * mm, words.at[1] * mm)
    canvas.rotate(words.turn)
    if words.patch:
        canvas.setFillColorRGB(1, 1, 1)
        canvas.rect(
            shift - 0.3 * mm,
            -0.55 * size,
            width + 0.6 * mm,
            1.1 * size,
            stroke=0,
            fill=1,
        )
    canvas.setFillColorRGB(*_ink(words.colour))
    canvas.setFont(BOLD_FONT if words.bold else FONT, size)
    canvas.drawString(shift, -0.36 * size, words.text)
    canvas.restoreState()
