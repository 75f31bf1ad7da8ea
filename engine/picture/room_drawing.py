"""A plan or an elevation as a drawing to scale: outlines, dimensions, levels, notes.

Black on white, without any field. All lengths on paper are in millimetres.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from engine.drawing import Plan, RunShape
from engine.picture.axes import draw_axes
from engine.picture.dimensions import (
    Level,
    draw_chain_above,
    draw_chain_beside,
    draw_levels,
    levels_width,
)
from engine.picture.lettering import keep_clear, letter_places
from engine.picture.marks import BLACK, Box, Picture, Stroke, Words
from engine.picture.plan_marks import draw_plan
from engine.picture.sheet import Sheet, drawing_scale
from engine.picture.source_labels import letter_sources
from engine.printed_text import wrapped

LEFT = 14.0
BOTTOM = 16.0
TOP = 15.0
#: Room for dimensions beside a plan.
BESIDE = 15.0
SIZE, STEP = 2.2, 3.1

#: Around what is drawn. [m]
_EDGE = 0.4


@dataclass(frozen=True)
class RoomView:
    """What a drawing shows.

    Attributes
    ----------
    title : str
    plan : Plan
        As seen, receptors with the titles that are printed at their marks.
    length_unit : str
    names : pair of str
        Of the axes, as `draw_axes` takes them.
    north : float or None
        [degrees]
    across, up : tuple of float
        Places that the dimensions lead to, along both axes. [m]
    levels : tuple of level, its kind, its place
        Beside an elevation, instead of dimensions up. [m]
    lines : tuple of str
        Notes under the drawing.
    """

    title: str
    plan: Plan
    length_unit: str = "m"
    names: tuple[str, str] = ("x", "y")
    north: float | None = None
    across: tuple[float, ...] = ()
    up: tuple[float, ...] = ()
    levels: tuple[Level, ...] = ()
    lines: tuple[str, ...] = ()

    def world(self) -> Box:
        """What the frame holds: everything drawn, and a little around it. [m]"""
        x0, y0, x1, y1 = self.plan.bounds() or (0.0, 0.0, 1.0, 1.0)
        edge = max(_EDGE, 0.04 * max(x1 - x0, y1 - y0))
        return (x0 - edge, y0 - edge, x1 + edge, y1 + edge)


def room_scale(view: RoomView, *, width: float, height: float) -> int:
    """The scale 1 : n at which `room_drawing` draws in a space. [mm]"""
    aside = levels_width(view.levels, view.length_unit) if view.levels else BESIDE
    below = BOTTOM + _notes_height(view, width)
    return drawing_scale(view.world(), width - LEFT - aside, height - below - TOP)


def room_drawing(view: RoomView, *, width: float, height: float) -> Picture:
    """The drawing, no larger than width × height. [mm]"""
    world = view.world()
    scale = room_scale(view, width=width, height=height)
    below = BOTTOM + _notes_height(view, width)
    sheet = Sheet(world, scale, (LEFT, below))
    picture = Picture(width, below + sheet.height + TOP)
    draw_plan(picture, sheet, view.plan)
    for run in view.plan.runs:
        _draw_arrow(picture, sheet, run)
    keep_clear(sheet, view.plan)
    letter_places(picture, sheet, replace(view.plan, zones=()))
    letter_sources(picture, sheet, view.plan, view.length_unit)
    letter_places(picture, sheet, replace(view.plan, rooms=(), receptors=()))
    draw_axes(
        picture,
        sheet,
        scale,
        length_unit=view.length_unit,
        north=view.north,
        names=view.names,
    )
    draw_chain_above(picture, sheet, view.across, view.length_unit)
    if view.levels:
        room = levels_width(view.levels, view.length_unit)
        draw_levels(picture, sheet, view.levels, view.length_unit, room)
    else:
        draw_chain_beside(picture, sheet, view.up, view.length_unit)
    _write_notes(picture, view, width)
    return picture


def _note_lines(view: RoomView, width: float) -> list[tuple[str, bool]]:
    lines: list[tuple[str, bool]] = []
    if view.title:
        title = wrapped(view.title, 2.8, width - 4.0, bold=True)[:3]
        lines = [(line, True) for line in title]
    for text in filter(None, view.lines):
        lines += [(line, False) for line in wrapped(text, SIZE, width - 4.0)[:6]]
    return lines


def _notes_height(view: RoomView, width: float) -> float:
    return 2.0 + 3.4 * len(_note_lines(view, width))


def _write_notes(picture: Picture, view: RoomView, width: float) -> None:
    for k, (line, bold) in enumerate(reversed(_note_lines(view, width))):
        size = 2.8 if bold else SIZE
        picture.add(Words((2.0, 2.0 + 3.4 * k), line, size, bold=bold))


def _draw_arrow(picture: Picture, sheet: Sheet, run: RunShape) -> None:
    """The direction in which current counts as positive, on the longest leg."""
    legs = [(math.dist(a, b), a, b) for a, b in zip(run.route, run.route[1:])]  # noqa: B905
    if not legs:
        return
    length, a, b = max(legs, key=lambda leg: leg[0])
    if length * sheet.factor < 6.0:
        return
    turn = math.atan2(b[1] - a[1], b[0] - a[0])
    x, y = sheet.paper(a[0] + 0.72 * (b[0] - a[0]), a[1] + 0.72 * (b[1] - a[1]))
    wings: Sequence[float] = (turn + 2.7, turn - 2.7)
    for wing in wings:
        end = (x + 2.0 * math.cos(wing), y + 2.0 * math.sin(wing))
        for piece in sheet.clipped(((x, y), end)):
            picture.add(Stroke(piece, 0.35, BLACK))
