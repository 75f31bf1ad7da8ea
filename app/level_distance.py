"""How far a reference level reaches: asked, computed, and as marks on the drawings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from shapely.geometry import Polygon
from shapely.geometry.base import BaseGeometry

from app.map_request import case_of, height_figures
from app.tools.tool import Dimension, Overlay, Point
from engine.case_fields import CaseCurrents, CaseFields
from engine.criteria import ReferenceLevel
from engine.distance_to_level import (
    Extent,
    LevelDistance,
    LevelLines,
    edge_of,
    largest_distance,
    lines_on_plan,
    lines_on_plane,
    run_line,
    side_of,
)
from engine.equipment import Board
from engine.errors import Cancelled, UserError
from engine.items import Outline
from engine.layout import Layout
from engine.levels import Kind, is_kind, what_is_missing
from engine.loaded_layout import loaded_layout
from engine.sampling import Plane
from engine.sight import LOOKING_X, LOOKING_Y, PLAN, Sight
from engine.typed_lengths import length_text

#: Around everything drawn at first; doubled while a line runs out of the area. [m]
_AROUND = 3.0
_TIMES = 4
#: Reach of what lies behind a wall or a front. [m]
_BEHIND = 1e4


@dataclass(frozen=True)
class Target:
    """What a distance is measured from.

    Attributes
    ----------
    item : str
        Id of a run, zone, room or board.
    side : int or None
        Which side of the outline; None for the whole edge or a run.
    title : str
        In words: "wall 2 of Office".
    """

    item: str
    side: int | None
    title: str


@dataclass(frozen=True)
class DistanceRequest:
    """What is asked; `heights` above the datum. [m]"""

    layout: Layout
    case: str
    level: str
    target: Target | None
    heights: tuple[float, ...]
    heights_name: str = ""


@dataclass(frozen=True, eq=False)
class Reached:
    """The answer.

    Attributes
    ----------
    plan : LevelLines
    distance : LevelDistance or None
        None where no line counts for the target, or without one.
    elevations : pairs of sight and lines
        On the upright planes through `through`, where the distance ends.
    """

    request: DistanceRequest
    level: ReferenceLevel
    plan: LevelLines
    distance: LevelDistance | None
    elevations: tuple[tuple[Sight, LevelLines], ...]
    through: Point


def targets(layout: Layout) -> tuple[Target, ...]:
    """All that a distance can be measured from."""
    found = [Target(run.id, None, run.title) for run in layout.runs]
    found += [Target(z.id, None, f"edge of {z.title}") for z in layout.zones]
    for room in layout.rooms:
        for k in range(len(room.outline)):
            found.append(Target(room.id, k, f"wall {k + 1} of {room.title}"))
    for unit in layout.equipment:
        if isinstance(unit, Board) and len(unit.footprint) > 2:
            for k in range(len(unit.footprint)):
                found.append(Target(unit.id, k, f"side {k + 1} of {unit.title}"))
    return tuple(found)


def levels_of(layout: Layout) -> tuple[ReferenceLevel, ...]:
    """Levels that lack nothing."""
    return tuple(level for level in layout.levels if not what_is_missing(level))


def reached(request: DistanceRequest, cancelled: Cancelled | None = None) -> Reached:
    """Find where the value equals the level, and how far that is from the target.

    Raises
    ------
    UserError
        When nothing can be compared, or what is measured from is not there.
    ComputationCancelled
        When `cancelled` says so.
    """
    layout = request.layout
    level = next((v for v in levels_of(layout) if v.id == request.level), None)
    if level is None:
        raise UserError(
            "Choose a reference level with a source, a category and values; enter one "
            "under Ref. levels."
        )
    chosen = case_of(layout, request.case)
    loaded = loaded_layout(layout, [chosen], None, cancelled)
    if not loaded.fields.cases:
        raise UserError(f"No field in “{chosen.title}”: {loaded.cases[0].reason}")
    fields = loaded.fields
    case = fields.cases[loaded.index[chosen.id]]
    kind: Kind = "AC" if any(is_kind(f, "AC") for f in case.frequencies) else "DC"
    found = _lines(fields, case, level, request.heights, _extent(fields), kind)
    distance = None
    if request.target is not None:
        shape, beyond = _shape(layout, request.target)
        distance = largest_distance(
            fields, case, level, found, shape, request.target.title, beyond=beyond
        )
    through = _through(found) if distance is None else distance.end
    elevations = tuple(
        (sight, lines_on_plane(fields, case, level, plane, kind=kind))
        for sight, plane in _upright(found, fields, through)
    )
    return Reached(request, level, found, distance, elevations, through)


def _extent(fields: CaseFields) -> Extent:
    paths = np.concatenate([c.path[:, :2] for c in fields.conductors])
    low, high = paths.min(axis=0) - _AROUND, paths.max(axis=0) + _AROUND
    return (float(low[0]), float(low[1]), float(high[0]), float(high[1]))


def _lines(
    fields: CaseFields,
    case: CaseCurrents,
    level: ReferenceLevel,
    heights: Sequence[float],
    area: Extent,
    kind: Kind,
) -> LevelLines:
    """Lines on an area that grows while one runs out of it."""
    found = lines_on_plan(fields, case, level, heights, area, kind=kind)
    for _ in range(_TIMES):
        if not found.is_cut and found.everywhere != "above":
            break
        x0, y0, x1, y1 = area
        more = 0.5 * max(x1 - x0, y1 - y0)
        area = (x0 - more, y0 - more, x1 + more, y1 + more)
        found = lines_on_plan(fields, case, level, heights, area, kind=kind)
    return found


def _shape(layout: Layout, target: Target) -> tuple[BaseGeometry, Polygon | None]:
    """The target on plan, and the area where no place counts: inside, or behind."""
    for run in layout.runs:
        if run.id == target.item:
            return run_line(run), None
    for zone in layout.zones:
        if zone.id == target.item:
            return edge_of(zone.outline), Polygon(zone.outline)
    outlines: dict[str, Outline] = {room.id: room.outline for room in layout.rooms}
    for unit in layout.equipment:
        if isinstance(unit, Board):
            outlines[unit.id] = unit.footprint
    outline = outlines.get(target.item)
    if outline is None or target.side is None or target.side >= len(outline):
        raise UserError(f"{target.title} is not there any more: choose something else.")
    return side_of(outline, target.side), _behind(outline, target.side)


def _behind(outline: Outline, side: int) -> Polygon:
    """The half of the plane on the inner side of one side of an outline."""
    a = np.array(outline[side])
    b = np.array(outline[(side + 1) % len(outline)])
    along = (b - a) / np.linalg.norm(b - a)
    inwards = np.array([-along[1], along[0]])
    if Polygon(outline).exterior.is_ccw is False:
        inwards = -inwards
    a, b = a - _BEHIND * along, b + _BEHIND * along
    return Polygon([a, b, b + _BEHIND * inwards, a + _BEHIND * inwards])


def _through(found: LevelLines) -> Point:
    """The middle of the longest line; of the area where there is none."""
    if found.lines:
        line = max(found.lines, key=len)
        x, y = line.mean(axis=0)
    else:
        origin, first, second = (
            np.array(v) for v in (found.plane.origin, found.plane.first,
                                  found.plane.second)
        )  # fmt: skip
        x, y = (origin + 0.5 * (first + second))[:2]
    return (float(x), float(y))


def _upright(
    found: LevelLines, fields: CaseFields, through: Point
) -> list[tuple[Sight, Plane]]:
    """The planes of both elevations through a place of the plan."""
    x0, y0, _ = found.plane.origin
    width, depth = found.plane.first[0], found.plane.second[1]
    z = np.concatenate([c.path[:, 2] for c in fields.conductors])
    low = float(min(z.min(), *found.heights)) - _AROUND
    high = float(max(z.max(), *found.heights)) + _AROUND
    up = (0.0, 0.0, high - low)
    return [
        (LOOKING_Y, Plane((x0, through[1], low), (width, 0.0, 0.0), up)),
        (LOOKING_X, Plane((through[0], y0 + depth, low), (0.0, -depth, 0.0), up)),
    ]


# -- as marks and words -------------------------------------------------------------


def overlay_of(answer: Reached, sight: Sight) -> Overlay | None:
    """The lines and the dimension as a view shows them; None for other views."""
    unit = answer.request.layout.settings.length_unit
    title = answer.level.title
    if sight is PLAN:
        lines = _seen(answer.plan.lines, (0.0, 0.0))
        text = f"{title} · {answer.request.heights_name}"
        found = Overlay(lines=lines, labels=_names(lines, text))
        distance = answer.distance
        if distance is None:
            return found
        told = distance_text(distance, unit)
        return replace(
            found,
            points=(distance.start, distance.end),
            dimensions=(Dimension(distance.start, distance.end, told),),
        )
    for own, level_lines in answer.elevations:
        if own is sight:
            origin = np.array(level_lines.plane.origin)
            x, z = sight.seen(origin).tolist()
            lines = _seen(level_lines.lines, (x, z))
            k, axis = (1, "y") if sight is LOOKING_Y else (0, "x")
            at = f"{axis} {height_figures(answer.through[k], unit)} {unit}"
            return Overlay(lines=lines, labels=_names(lines, f"{title} · at {at}"))
    return None


def _seen(lines: Sequence[np.ndarray], origin: Point) -> tuple[tuple[Point, ...], ...]:
    return tuple(
        tuple((float(u) + origin[0], float(v) + origin[1]) for u, v in line)
        for line in lines
    )


def _names(
    lines: tuple[tuple[Point, ...], ...], text: str
) -> tuple[tuple[Point, str], ...]:
    """The name at the top of the longest line."""
    if not lines:
        return ()
    longest = max(lines, key=len)
    return ((max(longest, key=lambda p: p[1]), text),)


def distance_text(distance: LevelDistance, unit: str) -> str:
    """The distance and what it is measured from, in the display unit."""
    most = "at least " if distance.is_cut else ""
    rounded = round(distance.distance, 3)
    return f"{most}{length_text(rounded, unit)} from {distance.measured_from}"


def told(answer: Reached) -> str:
    """The result in one or two sentences."""
    title, where = answer.level.title, answer.request.heights_name
    unit = answer.request.layout.settings.length_unit
    if answer.plan.everywhere:
        side = answer.plan.everywhere
        return f"All of the area looked at is {side} {title} ({where}): no line."
    if not answer.plan.lines:
        return f"No place equals {title} ({where})."
    parts = []
    if answer.distance is not None:
        largest = distance_text(answer.distance, unit)
        parts.append(f"{title} reaches {largest} ({where})")
    elif answer.request.target is not None:
        parts.append(f"{title} does not reach beyond {answer.request.target.title}")
    if answer.plan.is_cut:
        parts.append("a line runs out of the area looked at")
    if answer.plan.is_bound:
        parts.append(f"upper bound, because {answer.plan.bound_reason}")
    step = length_text(round(answer.plan.step, 3), unit)
    parts.append(f"closed lines smaller than {step} may be missed")
    return " · ".join(parts)
