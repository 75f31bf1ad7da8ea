"""Maps for use outside the program: a picture as PNG, and the numbers as CSV."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterable, Sequence
from itertools import pairwise
from pathlib import Path

import numpy as np
import numpy.typing as npt
from PIL import Image, ImageDraw, ImageFont
from PIL.PngImagePlugin import PngInfo

from engine.drawing import Plan
from engine.picture import (
    MapSubject,
    OffsetLines,
    Picture,
    Raster,
    Stroke,
    Words,
    map_picture,
)
from engine.picture.marks import WHITE, Points
from engine.printed_text import BOLD, REGULAR, one_line
from engine.units import FLUX_DENSITY_UNITS, LENGTH_UNITS
from engine.written_file import write_file

Floats = npt.NDArray[np.float64]

DOTS_PER_INCH = 160

#: The picture is drawn this much larger and then reduced, so that lines are smooth.
_OVERSIZE = 2


def write_png(
    path: Path | str,
    subject: MapSubject,
    plan: Plan,
    *,
    width: float = 277.0,
    height: float = 190.0,
) -> None:
    """Write a map as a picture, at most `width` × `height` millimetres on paper.

    Raises
    ------
    UserError
        When the file cannot be written; a file that was there stays as it was.
    """
    picture = map_picture(subject, plan, width=width, height=height)
    write_file(path, png(picture))


def write_csv(
    path: Path | str, subjects: Sequence[MapSubject], heights: Iterable[float]
) -> None:
    """Write the values of maps on one grid: x, y, z and the values, a point a row.

    Parameters
    ----------
    subjects : sequence of MapSubject
        On the same grid and in the same units; a column for each.
    heights : (ny · nx) float
        z of each point, row by row. [m]

    Raises
    ------
    UserError
        When the file cannot be written; a file that was there stays as it was.

    Notes
    -----
    The header names the units. Where nothing can be assessed the value is empty.
    """
    write_file(path, grid_csv(subjects, heights).encode("utf-8"))


def grid_csv(subjects: Sequence[MapSubject], heights: Iterable[float]) -> str:
    """The values of maps as CSV text, see `write_csv`."""
    first = subjects[0]
    plan = np.stack(np.meshgrid(first.xs, first.ys), axis=-1).reshape(-1, 2)
    levels = np.fromiter(heights, np.float64, len(plan))
    return _places_csv(subjects, np.column_stack([plan, levels]))


def write_plane_csv(
    path: Path | str, subjects: Sequence[MapSubject], places: Floats
) -> None:
    """Write the values of maps on one plane in space, a point a row.

    Parameters and errors as `write_csv`, but for the (ny · nx, 3) `places` of the
    points, row by row. [m]
    """
    write_file(path, _places_csv(subjects, places).encode("utf-8"))


def _places_csv(subjects: Sequence[MapSubject], places: Floats) -> str:
    """The values of maps at (ny · nx, 3) places as CSV text."""
    first = subjects[0]
    unit, length = first.unit, first.length_unit
    metres = LENGTH_UNITS[length]
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    heads = [f"{axis} [{length}]" for axis in "xyz"]
    writer.writerow([*heads, *(f"B {s.quantity} [{unit}]" for s in subjects)])
    n = len(first.xs)
    for k, place in enumerate(places.tolist()):
        figures = [f"{v / metres + 0.0:.9g}" for v in place]
        values = [_cell(subject, k // n, k % n) for subject in subjects]
        writer.writerow([*figures, *values])
    return file.getvalue()


def offsets_csv(offsets: OffsetLines, caption: str, length_unit: str) -> str:
    """Lines of a reference level as CSV text: the caption, then a vertex a row.

    The header names the unit. A closed line ends where it begins.
    """
    metres = LENGTH_UNITS[length_unit]
    file = io.StringIO()
    writer = csv.writer(file, lineterminator="\n")
    writer.writerow([one_line(caption)])
    writer.writerow([one_line(offsets.sentence)])
    writer.writerow(["line", *(f"{axis} [{length_unit}]" for axis in "xy")])
    for number, line in enumerate(offsets.lines, start=1):
        for place in line:
            writer.writerow([number, *(f"{v / metres + 0.0:.9g}" for v in place)])
    return file.getvalue()


def _cell(subject: MapSubject, row: int, column: int) -> str:
    value = float(subject.values[row, column])
    if subject.mask[row, column] or not math.isfinite(value):
        return ""
    return f"{value / FLUX_DENSITY_UNITS[subject.unit]:.9g}"


def png(picture: Picture, dots_per_inch: int = DOTS_PER_INCH) -> bytes:
    """A picture as the bytes of a PNG file."""
    factor = dots_per_inch * _OVERSIZE / 25.4
    size = (round(picture.width * factor), round(picture.height * factor))
    image = Image.new("RGB", size, WHITE)
    painter = _Painter(image, factor)
    for part in picture.parts:
        painter.paint(part)
    reduced = image.resize(
        (max(1, size[0] // _OVERSIZE), max(1, size[1] // _OVERSIZE)),
        Image.Resampling.BOX,
    )
    file = io.BytesIO()
    reduced.save(
        file,
        "PNG",
        dpi=(dots_per_inch, dots_per_inch),
        pnginfo=PngInfo(),
        optimize=True,
    )
    return file.getvalue()


class _Painter:
    """Paints parts of a picture on pixels."""

    def __init__(self, image: Image.Image, factor: float) -> None:
        self._image = image
        self._draw = ImageDraw.Draw(image)
        self._factor = factor

    def paint(self, part: Stroke | Raster | Words) -> None:
        if isinstance(part, Stroke):
            self._stroke(part)
        elif isinstance(part, Raster):
            self._raster(part)
        else:
            self._words(part)

    def _pixels(self, points: Points) -> list[tuple[float, float]]:
        top = self._image.height
        return [(x * self._factor, top - y * self._factor) for x, y in points]

    def _stroke(self, stroke: Stroke) -> None:
        width = max(1, round(stroke.width * self._factor))
        for piece in _dashed(stroke.points, stroke.dash):
            self._draw.line(
                self._pixels(piece), fill=stroke.colour, width=width, joint="curve"
            )

    def _raster(self, raster: Raster) -> None:
        left, bottom, right, top = raster.box
        (x0, y0), (x1, y1) = self._pixels(((left, top), (right, bottom)))
        size = (max(1, round(x1 - x0)), max(1, round(y1 - y0)))
        pixels = Image.fromarray(np.ascontiguousarray(raster.rgba[::-1]), "RGBA")
        larger = pixels.resize(size, Image.Resampling.NEAREST)
        self._image.paste(larger, (round(x0), round(y0)), larger)

    def _words(self, words: Words) -> None:
        font = _font(words.bold, words.size * self._factor)
        margin = 0.4 * self._factor if words.patch else 0.0
        box = font.getbbox(words.text or " ", anchor="ls")
        above, below = words.size * self._factor * 0.8, words.size * self._factor * 0.25
        width = math.ceil(max(box[2], 1) + 2 * margin)
        height = math.ceil(above + below + 2 * margin)
        tile = Image.new("RGBA", (width, height), (*WHITE, 215 if words.patch else 0))
        ImageDraw.Draw(tile).text(
            (margin, margin + above),
            words.text,
            font=font,
            fill=words.colour,
            anchor="ls",
        )
        if words.turn:
            tile = tile.rotate(words.turn, Image.Resampling.BICUBIC, expand=True)
        ((x, y),) = self._pixels((words.at,))
        shift = {"left": 0.0, "middle": -0.5, "right": -1.0}[words.anchor] * width
        turn = math.radians(words.turn)
        middle = shift + 0.5 * width
        x += middle * math.cos(turn)
        y -= middle * math.sin(turn)
        corner = (round(x - 0.5 * tile.width), round(y - 0.5 * tile.height))
        self._image.paste(tile, corner, tile)


def _font(bold: bool, size: float) -> ImageFont.FreeTypeFont:
    path = str(BOLD if bold else REGULAR)
    return ImageFont.truetype(path, size, layout_engine=ImageFont.Layout.BASIC)


def _dashed(points: Points, dash: tuple[float, float] | None) -> list[Points]:
    """The pieces of a line that are drawn."""
    if dash is None or len(points) < 2:
        return [points] if len(points) > 1 else []
    pieces: list[Points] = []
    left, drawing, piece = dash[0], True, [points[0]]
    for start, end in pairwise(points):
        length = math.dist(start, end)
        done = 0.0
        while length - done > left:
            done += left
            share = done / length
            at = (
                start[0] + share * (end[0] - start[0]),
                start[1] + share * (end[1] - start[1]),
            )
            if drawing:
                pieces.append((*piece, at))
            drawing = not drawing
            left = dash[0] if drawing else dash[1]
            piece = [at]
        left -= length - done
        piece.append(end)
    if drawing and len(piece) > 1:
        pieces.append(tuple(piece))
    return pieces
