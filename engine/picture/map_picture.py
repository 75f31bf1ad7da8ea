"""The picture of a map: colours, iso-lines, plan, axes, scale bar, legend, caption.

Legible without colours: every iso-line carries its value, masked areas are hatched.
All lengths on paper are in millimetres; the drawing is to scale.
"""

from __future__ import annotations

import math

import numpy as np

from engine.colour_ramp import colours, on_paper
from engine.drawing import Line, Place, Plan, Point, RunShape
from engine.iso_lines import IsoLine, iso_lines, round_values
from engine.picture.axes import draw_axes
from engine.picture.legend import caption_height, draw_caption, draw_legend
from engine.picture.marks import (
    BLACK,
    GREY,
    Colour,
    Picture,
    Points,
    Raster,
    Stroke,
    Words,
)
from engine.picture.sheet import Sheet, drawing_scale
from engine.picture.subject import MapSubject, value_text
from engine.printed_text import fitted, one_line, text_width
from engine.units import FLUX_DENSITY_UNITS

LEFT = 15.0
BOTTOM = 16.0
TOP = 3.0
LEAST_WIDTH = 120.0
LEGEND = 46.0
LABEL_SIZE = 2.2


def map_picture(
    subject: MapSubject, plan: Plan, *, width: float, height: float
) -> Picture:
    """The map with all that belongs to it, no larger than width × height. [mm]

    Raises
    ------
    ValueError
        When the grid and its values do not belong together.
    """
    shape = (len(subject.ys), len(subject.xs))
    if subject.values.shape != shape or subject.mask.shape != shape:
        raise ValueError(f"values {subject.values.shape} on a grid of {shape}")
    world = subject.world()
    below = BOTTOM + caption_height(subject, LEAST_WIDTH)
    scale = drawing_scale(world, width - LEFT - LEGEND, height - below - TOP)
    across = LEFT + LEGEND + 1000.0 * (world[2] - world[0]) / scale
    across = min(max(across, LEAST_WIDTH), width)
    below = BOTTOM + caption_height(subject, across)
    up = max(1000.0 * (world[3] - world[1]) / scale, min(height - below - TOP, 90.0))
    picture = Picture(across, below + up + TOP)
    corner = (LEFT, below + up - 1000.0 * (world[3] - world[1]) / scale)
    sheet = Sheet(world, scale, corner)
    _draw_field(picture, sheet, subject)
    _draw_plan(picture, sheet, plan)
    lines = _iso_lines(subject)
    for line, _, bold in lines:
        on_paper = tuple(sheet.paper(float(x), float(y)) for x, y in line.points)
        for piece in sheet.clipped(on_paper):
            picture.add(Stroke(piece, 0.55 if bold else 0.18, BLACK))
    _letter_plan(picture, sheet, plan)
    for line, text, bold in lines:
        _letter_line(picture, sheet, line, text, bold)
    draw_axes(picture, sheet, subject, scale)
    legend_left = sheet.left + sheet.width + 6.0
    draw_legend(picture, subject, legend_left, below + up, LEGEND - 8.0)
    draw_caption(picture, subject, picture.width)
    return picture


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
    thin = round_values(subject.low / factor, subject.high / factor)
    for line in iso_lines(*grid, [value * factor for value in thin]):
        found.append((line, value_text(line.value, subject.unit), False))
    return found


def _letter_line(
    picture: Picture, sheet: Sheet, line: IsoLine, text: str, bold: bool
) -> None:
    """Write the label of an iso-line where there is room on it."""
    length = line.length * sheet.factor
    text = fitted(text, LABEL_SIZE, 60.0, bold=bold)
    for fraction in (0.5, 0.3, 0.7, 0.15, 0.85, 0.4, 0.6):
        x, y, turn = line.label_place(fraction)
        words = Words(
            sheet.paper(x, y), text, LABEL_SIZE, BLACK, bold, "middle", turn, True
        )
        if length > 1.1 * words.width and sheet.has_room(words):
            picture.add(words)
            return


def _outline(
    picture: Picture,
    sheet: Sheet,
    outline: Line,
    width: float,
    colour: Colour = BLACK,
    dash: tuple[float, float] | None = None,
) -> None:
    ring = tuple(sheet.paper(x, y) for x, y in (*outline, outline[0]))
    for piece in sheet.clipped(ring):
        picture.add(Stroke(piece, width, colour, dash))


def _draw_plan(picture: Picture, sheet: Sheet, plan: Plan) -> None:
    for room in plan.rooms:
        _outline(picture, sheet, room.area.outline, 0.5)
    for zone in plan.zones:
        _outline(picture, sheet, zone.area.outline, 0.3, BLACK, (2.0, 1.2))
    for enclosure in plan.enclosures:
        _outline(picture, sheet, enclosure.area.outline, 0.3)
    for unit in plan.equipment:
        _outline(picture, sheet, unit.area.outline, 0.3, GREY)
    for strand in (*plan.equipment_strands, *plan.links):
        for area in strand.areas:
            _outline(picture, sheet, area.outline, 0.1, GREY)
    for run in plan.runs:
        _draw_run(picture, sheet, run)
    for mark in plan.receptors:
        x, y = sheet.paper(mark.at[0], mark.at[1])
        for dx, dy in ((1.2, 1.2), (1.2, -1.2)):
            for piece in sheet.clipped(((x - dx, y - dy), (x + dx, y + dy))):
                picture.add(Stroke(piece, 0.35, BLACK))


def _draw_run(picture: Picture, sheet: Sheet, run: RunShape) -> None:
    for strand in run.strands:
        for area in strand.areas:
            for ring in (area.outline, *area.holes):
                _outline(picture, sheet, ring, 0.12)
    if not run.strands:
        line = tuple(sheet.paper(x, y) for x, y in run.route)
        for piece in sheet.clipped(line):
            picture.add(Stroke(piece, 0.25, BLACK))
    for rise in run.rises:
        x, y = sheet.paper(*rise.at)
        ring = tuple(
            (x + 1.3 * math.cos(a), y + 1.3 * math.sin(a))
            for a in np.linspace(0.0, 2.0 * math.pi, 25)
        )
        for piece in sheet.clipped(ring):
            picture.add(Stroke(piece, 0.25, BLACK))


def _letter_plan(picture: Picture, sheet: Sheet, plan: Plan) -> None:
    for mark in plan.receptors:
        _letter(picture, sheet, mark.title, _around(sheet.paper(*mark.at[:2]), 3.4))
    for place in plan.rooms:
        _letter(picture, sheet, place.title, _corners(sheet, place, 2.6), bold=True)
    for place in plan.zones:
        _letter(picture, sheet, place.title, _corners(sheet, place, -2.6), bold=True)
    for run in plan.runs:
        low, high = run.levels
        span = f"z {low:.2f}" if high - low < 0.005 else f"z {low:.2f}–{high:.2f}"
        at = _around(sheet.paper(*run.label_place), 4.0)[:10]
        _letter(picture, sheet, f"{fitted(run.title, LABEL_SIZE, 45.0)}, {span} m", at)
    for place in (*plan.enclosures, *plan.equipment):
        middle = sheet.paper(*place.label_place)
        _letter(picture, sheet, place.title, [middle, *_around(middle, 3.4)])


def _around(at: Point, step: float) -> list[Point]:
    """Places near a point, the nearest first, none on the point itself. [mm]"""
    x, y = at
    return [
        (x + dx, y + dy * step)
        for dy in (1, -1, 2, -2, 3, -3)
        for dx in (0.0, 9.0, -9.0, 18.0, -18.0)
    ]


def _corners(sheet: Sheet, place: Place, inset: float) -> list[Point]:
    """Along a place's upper edge (inset > 0) or lower one, then within. [mm]"""
    points = [sheet.paper(x, y) for x, y in place.area.outline]
    left, right = min(p[0] for p in points), max(p[0] for p in points)
    edge = max(p[1] for p in points) if inset > 0 else min(p[1] for p in points)
    half = 0.5 * text_width(one_line(place.title)[:60], LABEL_SIZE, bold=True)
    return [
        (left + half + 2.0, edge - inset),
        (right - half - 2.0, edge - inset),
        (left + half + 2.0, edge - 2.0 * inset),
        *_around(sheet.paper(*place.label_place), 3.4),
    ]


def _letter(
    picture: Picture,
    sheet: Sheet,
    text: str,
    places: list[Point],
    bold: bool = False,
) -> None:
    """Write a label at the first place where it covers no other one."""
    shown = fitted(text, LABEL_SIZE, 70.0, bold=bold)
    for at in places:
        words = Words(at, shown, LABEL_SIZE, BLACK, bold, "middle", 0.0, True)
        if sheet.has_room(words):
            picture.add(words)
            return
