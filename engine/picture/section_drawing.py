"""The section of a run at a true scale: shapes, letters, dimensions, the route."""

from __future__ import annotations

import math
from dataclasses import dataclass

from shapely.geometry import Polygon, box
from shapely.ops import unary_union

from engine.formations import label_of
from engine.picture.dimensions import (
    dimension_text,
    draw_chain_above,
    draw_chain_beside,
)
from engine.picture.marks import BLACK, GREY, Picture, Points, Stroke, Words
from engine.picture.sheet import Sheet
from engine.printed_text import fitted, text_width, wrapped
from engine.runs import Bar, Multicore, Slot

LEFT, BOTTOM, TOP, RIGHT = 4.0, 7.0, 15.0, 15.0
SIZE, STEP = 2.2, 3.1

#: Scales that a section may have, 1 : n, and n times as large.
SECTION_SCALES = (
    1, 2, 5, 10, 15, 20, 25, 30, 40, 50, 75, 100, 150, 200, 250, 500, 1000, 2000, 5000,
)  # fmt: skip


@dataclass(frozen=True)
class SectionView:
    """What a drawing of a section shows: its slots, its title, the words under it."""

    title: str
    slots: tuple[Slot, ...]
    length_unit: str = "m"
    lines: tuple[str, ...] = ()


def section_drawing(view: SectionView, *, width: float, height: float) -> Picture:
    """The section looking along the route, u to the right, v up. [mm]

    No wider than `width`; of the height, the scale is the largest of a list that fits.
    """
    outlines = [_outline(slot) for slot in view.slots]
    u0, v0, u1, v1 = unary_union(outlines).bounds
    edge = 0.05 * max(u1 - u0, v1 - v0)
    world = (u0 - edge, v0 - edge, u1 + edge, v1 + edge)
    notes = [line for text in view.lines for line in wrapped(text, SIZE, width - 4.0)]
    notes = notes[:12]
    below = BOTTOM + STEP * len(notes)
    across, up = width - LEFT - RIGHT, height - below - TOP - 6.0
    needed = 1000.0 * max((world[2] - world[0]) / across, (world[3] - world[1]) / up)
    scale = next((s for s in SECTION_SCALES if s >= needed), math.ceil(needed))
    wide = 1000.0 * (world[2] - world[0]) / scale
    sheet = Sheet(world, scale, (LEFT + 0.5 * max(0.0, across - wide), below))
    picture = Picture(width, below + sheet.height + TOP + 6.0)
    for slot, outline in zip(view.slots, outlines, strict=True):
        _draw_shape(picture, sheet, slot, outline)
    _draw_route(picture, sheet)
    for outline in outlines:
        at = [sheet.paper(u, v) for u, v in outline.exterior.coords]
        sheet.occupy(Polygon(at))
    _draw_letters(picture, sheet, view.slots, outlines)
    us = {round(slot.u, 6) for slot in view.slots}
    vs = {round(slot.v, 6) for slot in view.slots}
    draw_chain_above(picture, sheet, us, view.length_unit, (u0, u1))
    draw_chain_beside(picture, sheet, vs, view.length_unit, (v0, v1))
    top = picture.height - 2.0
    title = fitted(f"{view.title}, scale 1:{scale}", 2.6, width - 4.0, bold=True)
    picture.add(Words((2.0, top), title, 2.6, bold=True))
    for k, line in enumerate(notes):
        picture.add(Words((2.0, below - BOTTOM + 1.0 - STEP * k), line, SIZE))
    return picture


def overall_text(slots: tuple[Slot, ...], unit: str) -> str:
    """Width and height over all conductors."""
    u0, v0, u1, v1 = unary_union([_outline(slot) for slot in slots]).bounds
    wide, high = dimension_text(u1 - u0, unit), dimension_text(v1 - v0, unit)
    return f"over all {wide} × {high} {unit}"


def _outline(slot: Slot) -> Polygon:
    """The slot's shape in (u, v). [m]"""
    shape = slot.shape
    if isinstance(shape, Bar):
        turn = math.radians(shape.turn)
        c, s = math.cos(turn), math.sin(turn)
        a, b = 0.5 * shape.width, 0.5 * shape.thickness
        corners = [(a, b), (-a, b), (-a, -b), (a, -b)]
        turned = [(x * c - y * s, x * s + y * c) for x, y in corners]
        return Polygon([(slot.u + x, slot.v + y) for x, y in turned])
    outside = shape.outside_diameter if isinstance(shape, Multicore) else shape.diameter
    return Polygon(_circle(slot.u, slot.v, 0.5 * outside))


def _circle(u: float, v: float, radius: float) -> Points:
    return tuple(
        (
            u + radius * math.cos(k * math.pi / 24),
            v + radius * math.sin(k * math.pi / 24),
        )
        for k in range(49)
    )


def _draw_shape(picture: Picture, sheet: Sheet, slot: Slot, outline: Polygon) -> None:
    ring = tuple(sheet.paper(u, v) for u, v in outline.exterior.coords)
    picture.add(Stroke(ring, 0.3, BLACK))
    shape = slot.shape
    if not isinstance(shape, Multicore):
        return
    n = len(shape.cores)
    for k in range(n):
        angle = math.radians(90.0 + shape.turn) - 2.0 * math.pi * k / n
        radius = 0.5 * shape.core_circle_diameter
        u, v = slot.u + radius * math.cos(angle), slot.v + radius * math.sin(angle)
        core = _circle(u, v, 0.5 * shape.core_diameter)
        picture.add(Stroke(tuple(sheet.paper(*p) for p in core), 0.2, BLACK))
        if shape.core_diameter * sheet.factor > 3.2:
            at = sheet.paper(u, v)
            picture.add(Words(at, shape.cores[k], 1.9, bold=True, anchor="middle"))


def _draw_route(picture: Picture, sheet: Sheet) -> None:
    """A cross of two thin lines where the route passes."""
    x, y = sheet.paper(0.0, 0.0)
    for dx, dy in ((2.5, 0.0), (0.0, 2.5)):
        for piece in sheet.clipped(((x - dx, y - dy), (x + dx, y + dy))):
            picture.add(Stroke(piece, 0.12, GREY, (0.8, 0.5)))


def _draw_letters(
    picture: Picture, sheet: Sheet, slots: tuple[Slot, ...], outlines: list[Polygon]
) -> None:
    """Each slot's label: inside its shape, or beside it with a line leading there."""
    for slot, outline in zip(slots, outlines, strict=True):
        if isinstance(slot.shape, Multicore) and (
            slot.shape.core_diameter * sheet.factor > 3.2
        ):
            continue
        text = fitted(label_of(slot), SIZE, 20.0, bold=True)
        x, y = sheet.paper(slot.u, slot.v)
        u0, v0, u1, v1 = outline.bounds
        wide, high = (u1 - u0) * sheet.factor, (v1 - v0) * sheet.factor
        room = text_width(text, SIZE, bold=True)
        if wide > room + 0.8 and high > SIZE + 0.6:
            words = Words((x, y), text, SIZE, bold=True, anchor="middle", patch=True)
            picture.add(words)
            continue
        half = 0.5 * wide + 0.5 * room + 1.2
        tall = 0.5 * high + 2.0
        for at in (
            (x, y - tall), (x, y + tall), (x + half, y), (x - half, y),
            (x, y - tall - 3.0), (x, y + tall + 3.0), (x + half + 4.0, y),
            (x, y - tall - 6.0), (x - half - 4.0, y),
        ):  # fmt: skip
            if _is_free(sheet, at, room):
                picture.add(Words(at, text, SIZE, bold=True, anchor="middle"))
                if math.dist(at, (x, y)) > max(half, tall) + 1.0:
                    picture.add(Stroke(((x, y), at), 0.1, GREY))
                break


def _is_free(sheet: Sheet, at: tuple[float, float], room: float) -> bool:
    """Whether a label covers nothing; it is taken then. It may leave the frame."""
    x, y = at
    area = box(
        x - 0.5 * room - 0.2, y - 0.5 * SIZE, x + 0.5 * room + 0.2, y + 0.5 * SIZE
    )
    if sheet.is_occupied(area):
        return False
    sheet.occupy(area)
    return True
