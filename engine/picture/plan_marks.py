"""The plan as marks on a map: outlines, runs in their true width, receptors."""

from __future__ import annotations

import math

import numpy as np
from shapely.geometry import LineString, Polygon

from engine.drawing import Line, Plan, RunShape, Strand
from engine.picture.marks import BLACK, GREY, Colour, Picture, Stroke
from engine.picture.sheet import Sheet

#: A conductor narrower than this on paper shows only as part of its run. [mm]
LEAST_STRAND = 0.7


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
        sheet.note_line(piece)


def draw_plan(picture: Picture, sheet: Sheet, plan: Plan) -> None:
    """Draw everything of the plan that lies in the frame."""
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
        x, y = sheet.paper(*mark.seen)
        for dx, dy in ((1.2, 1.2), (1.2, -1.2)):
            for piece in sheet.clipped(((x - dx, y - dy), (x + dx, y + dy))):
                picture.add(Stroke(piece, 0.35, BLACK))


def _draw_run(picture: Picture, sheet: Sheet, run: RunShape) -> None:
    fine = any(_width(s) * sheet.factor < LEAST_STRAND for s in run.strands)
    shown = run.areas if fine else [area for s in run.strands for area in s.areas]
    for area in shown:
        for ring in (area.outline, *area.holes):
            _outline(picture, sheet, ring, 0.2 if fine else 0.12)
    if not run.strands:
        line = tuple(sheet.paper(x, y) for x, y in run.route)
        for piece in sheet.clipped(line):
            picture.add(Stroke(piece, 0.25, BLACK))
            sheet.note_line(piece)
    for rise in run.rises:
        x, y = sheet.paper(*rise.at)
        ring = tuple(
            (x + 1.3 * math.cos(a), y + 1.3 * math.sin(a))
            for a in np.linspace(0.0, 2.0 * math.pi, 25)
        )
        for piece in sheet.clipped(ring):
            picture.add(Stroke(piece, 0.25, BLACK))
            sheet.note_line(piece)


def _width(strand: Strand) -> float:
    """Mean width of a conductor on plan. [m]"""
    area = sum(Polygon(part.outline, part.holes).area for part in strand.areas)
    length = LineString(strand.line).length
    return float(area / max(length, math.sqrt(area), 1e-9))
