"""The picture of a map: colours, iso-lines, plan, axes, scale bar, legend, caption.

Legible without colours: every iso-line carries its value, masked areas are hatched.
All lengths on paper are in millimetres; the drawing is to scale.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
from shapely.geometry import box

from engine.colour_ramp import colours, on_paper
from engine.drawing import Plan
from engine.iso_lines import IsoLine, iso_lines, round_values
from engine.picture.axes import draw_axes
from engine.picture.legend import (
    BESIDE,
    UNDER,
    caption_height,
    draw_caption,
    draw_legend_beside,
    draw_legend_under,
    height_beside,
    reference_strokes,
)
from engine.picture.lettering import (
    keep_clear,
    letter_line,
    letter_places,
    letter_references,
)
from engine.picture.marks import (
    BLACK,
    GREY,
    WHITE,
    Picture,
    Points,
    Raster,
    Stroke,
    Words,
)
from engine.picture.offset_lines import draw_offsets, letter_offsets
from engine.picture.plan_marks import draw_plan
from engine.picture.sheet import Sheet, drawing_scale
from engine.picture.source_labels import letter_sources
from engine.picture.subject import MapSubject, value_text
from engine.printed_text import one_line
from engine.units import FLUX_DENSITY_UNITS

LEFT = 14.0
BOTTOM = 16.0
TOP = 3.0
RIGHT = 4.0
LEAST_WIDTH = 120.0

#: Of the field, however little room is left.
LEAST_HEIGHT = 15.0


_Legend = Literal["beside", "beside all", "under"]


@dataclass(frozen=True)
class _Arrangement:
    """Where things go: the legend beside the map or under it, and the scale. [mm]"""

    width: float
    height: float
    sheet: Sheet
    scale: int
    legend_under: bool
    caption_width: float


def map_picture(
    subject: MapSubject, plan: Plan, *, width: float, height: float
) -> Picture:
    """The map with all that belongs to it, no larger than width × height. [mm]

    The legend stands where the map becomes larger: beside it or under it.

    Raises
    ------
    ValueError
        When the grid and its values do not belong together.
    """
    shape = (len(subject.ys), len(subject.xs))
    if subject.values.shape != shape or subject.mask.shape != shape:
        raise ValueError(f"values {subject.values.shape} on a grid of {shape}")
    arranged = _best(subject, width, height)
    picture, sheet = Picture(arranged.width, arranged.height), arranged.sheet
    _draw_field(picture, sheet, subject)
    draw_plan(picture, sheet, plan)
    lines = _iso_lines(subject)
    for line, _, bold in lines:
        on_sheet = tuple(sheet.paper(float(x), float(y)) for x, y in line.points)
        for piece in sheet.clipped(on_sheet):
            if bold:
                picture.add(*reference_strokes(piece))
            else:
                picture.add(Stroke(piece, 0.18, BLACK))
    keep_clear(sheet, plan)
    if subject.largest is not None:
        _mark_largest(picture, sheet, subject.largest)
    if subject.offsets is not None:
        draw_offsets(picture, sheet, subject.offsets)
        letter_offsets(picture, sheet, subject.offsets)
    letter_references(picture, sheet, [line[:2] for line in lines if line[2]])
    letter_places(picture, sheet, plan)
    for line, text, bold in lines:
        if not bold:
            letter_line(picture, sheet, line, text)
    letter_sources(picture, sheet, plan, subject.length_unit)
    draw_axes(
        picture,
        sheet,
        arranged.scale,
        length_unit=subject.length_unit,
        north=subject.north,
        names=subject.names,
    )
    if arranged.legend_under:
        draw_legend_under(picture, subject, LEFT, sheet.bottom - BOTTOM)
    else:
        left = sheet.left + sheet.width + RIGHT
        if arranged.caption_width < arranged.width:
            # It goes down past the caption.
            left = max(left, arranged.caption_width)
        draw_legend_beside(picture, subject, left, arranged.height - TOP)
    draw_caption(picture, subject, arranged.caption_width)
    return picture


def _best(subject: MapSubject, width: float, height: float) -> _Arrangement:
    """The legend beside the map, beside map and caption, or under the map.

    A caption as wide as the paper is tried too: it takes less of the height. Of equal
    scales the narrow picture is taken.
    """
    kinds: tuple[_Legend, ...] = ("beside", "beside all", "under")
    tried = [
        _arranged(subject, width, height, kind, least)
        for least in (LEAST_WIDTH, width)
        for kind in kinds
    ]
    fitting = [each for each in tried if each.height <= height + 0.01]
    if not fitting:
        return min(tried, key=lambda each: each.height)
    return min(fitting, key=lambda each: each.scale)


def _mark_largest(picture: Picture, sheet: Sheet, at: tuple[float, float]) -> None:
    """A ring with a dot where the largest value of a zone was found."""
    x, y = sheet.paper(*at)
    for radius, width in ((1.9, 0.9), (1.9, 0.4), (0.35, 0.7)):
        ring = tuple(
            (x + radius * math.cos(a), y + radius * math.sin(a))
            for a in np.linspace(0.0, 2.0 * math.pi, 33)
        )
        for piece in sheet.clipped(ring):
            picture.add(Stroke(piece, width, WHITE if width == 0.9 else BLACK))
    words = Words((x + 2.8, y), "largest", 2.2, bold=True, patch=True)
    placed = Words((x + 2.8 + 0.5 * words.width, y), "largest", 2.2, anchor="middle")
    sheet.occupy(box(x - 2.2, y - 2.2, x + 2.2, y + 2.2))
    if sheet.has_room(placed):
        picture.add(words)


def _arranged(
    subject: MapSubject, width: float, height: float, legend: _Legend, least: float
) -> _Arrangement:
    """The largest drawing scale that leaves room for legend and caption.

    `least` is how wide the picture is at least, so that its caption has room.
    """
    world = subject.world()
    aside = RIGHT if legend == "under" else RIGHT + BESIDE
    less = BESIDE if legend == "beside all" else 0.0
    under = UNDER[1] if legend == "under" else 0.0
    if legend == "under":
        least = max(least, LEFT + UNDER[0])
    least = min(least, width)
    below = BOTTOM + under + caption_height(subject, least - less)
    room_up = max(LEAST_HEIGHT, height - below - TOP)
    scale = drawing_scale(world, width - LEFT - aside, room_up)
    wide = 1000.0 * (world[2] - world[0]) / scale
    tall = 1000.0 * (world[3] - world[1]) / scale
    across = min(max(LEFT + wide + aside, least), width)
    below = BOTTOM + under + caption_height(subject, across - less)
    # Beside, the legend may go down to the caption, or past it.
    spare = {"under": 0.0, "beside": BOTTOM - 2.0, "beside all": below - 2.0}[legend]
    needed = 0.0 if legend == "under" else height_beside(subject) - spare
    room = max(tall, needed)
    sheet = Sheet(world, scale, (LEFT, below + room - tall))
    return _Arrangement(
        across, below + room + TOP, sheet, scale, legend == "under", across - less
    )


def _draw_field(picture: Picture, sheet: Sheet, subject: MapSubject) -> None:
    values = np.where(subject.mask, np.nan, subject.values)
    rgba = colours(values, subject.low, subject.high, subject.scale)
    rgba[..., :3] = on_paper(rgba[..., :3])
    area = (
        sheet.left, sheet.bottom, sheet.left + sheet.width, sheet.bottom + sheet.height,
    )  # fmt: skip
    picture.add(Raster(area, rgba))
    for line in _hatch(sheet, subject):
        picture.add(Stroke(line, 0.12, GREY))


def _hatch(sheet: Sheet, subject: MapSubject) -> list[Points]:
    """Diagonal lines over the masked part of the grid."""
    if not subject.mask.any():
        return []
    ny, nx = subject.mask.shape
    found: list[Points] = []
    reach = sheet.width + sheet.height
    along = np.arange(0.0, reach, 0.2)
    for offset in np.arange(-sheet.height, sheet.width, 1.6):
        x, y = offset + along, along
        column = np.floor(x / sheet.width * nx).astype(int)
        row = np.floor(y / sheet.height * ny).astype(int)
        on = (column >= 0) & (column < nx) & (row >= 0) & (row < ny)
        on[on] = subject.mask[row[on], column[on]]
        edges = np.flatnonzero(np.diff(np.concatenate([[False], on, [False]])))
        for start, end in zip(edges[::2], edges[1::2], strict=True):
            found.append(
                (
                    (sheet.left + float(x[start]), sheet.bottom + float(y[start])),
                    (sheet.left + float(x[end - 1]), sheet.bottom + float(y[end - 1])),
                )
            )
    return [line for line in found if line[0] != line[1]]


def _iso_lines(subject: MapSubject) -> list[tuple[IsoLine, str, bool]]:
    """Lines with their labels, those of reference levels bold and first."""
    factor = FLUX_DENSITY_UNITS[subject.unit]
    grid = (subject.xs, subject.ys, subject.values, subject.mask)
    found: list[tuple[IsoLine, str, bool]] = []
    for reference in subject.references:
        value = value_text(reference.value, subject.unit)
        for line in iso_lines(*grid, (reference.value,)):
            found.append((line, f"{one_line(reference.name)[:60]} {value}", True))
    named = [reference.value / factor for reference in subject.references]
    thin = round_values(subject.low / factor, subject.high / factor, named)
    for line in iso_lines(*grid, [value * factor for value in thin]):
        found.append((line, value_text(line.value, subject.unit), False))
    return found
