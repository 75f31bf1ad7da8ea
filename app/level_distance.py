"""How far a reference level reaches: asked, computed, and as marks on the drawings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from shapely.geometry import Polygon
from shapely.geometry.base import BaseGeometry

from app.map_request import case_of
from app.tools.tool import Point
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
    load_factor,
    run_line,
    side_of,
)
from engine.equipment import Board
from engine.errors import Cancelled, UserError
from engine.items import Outline, Point3
from engine.layout import Layout
from engine.levels import Kind, is_kind, what_is_missing
from engine.loaded_layout import loaded_layout
from engine.results import Assessment
from engine.sampling import Plane
from engine.sight import LOOKING_X, LOOKING_Y, Sight
from engine.units import significant

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
    """What is asked; `heights` above the datum. [m]

    `held` is the layout whose distance stands beside, as before.
    """

    layout: Layout
    case: str
    level: str
    target: Target | None
    heights: tuple[float, ...]
    heights_name: str = ""
    held: Layout | None = None


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
    measured_from : points
        The target on plan. [m]
    before : LevelDistance or None
        Of the layout that is held.
    """

    request: DistanceRequest
    level: ReferenceLevel
    plan: LevelLines
    distance: LevelDistance | None
    elevations: tuple[tuple[Sight, LevelLines], ...]
    through: Point
    measured_from: tuple[Point, ...] = ()
    before: LevelDistance | None = None


def targets(layout: Layout) -> tuple[Target, ...]:
    """All that a distance can be measured from."""
    found = [Target(run.id, None, run.title) for run in layout.runs]
    found += [Target(z.id, None, f"edge of {z.title}") for z in layout.zones]
    for room in layout.rooms:
        for k in range(len(room.outline)):
            way = _facing(room.outline, k)
            found.append(Target(room.id, k, f"{way} wall of {room.title}"))
    for unit in layout.equipment:
        if isinstance(unit, Board) and len(unit.footprint) > 2:
            for k in range(len(unit.footprint)):
                way = _facing(unit.footprint, k)
                found.append(Target(unit.id, k, f"{way} front of {unit.title}"))
    return tuple(found)


def _facing(outline: Outline, side: int) -> str:
    """Which way a side faces: "+x", "+x (2)" for a second one, or its number."""
    ways = [_way(outline, k) for k in range(len(outline))]
    way = ways[side]
    if not way:
        return f"slanted ({side + 1})"
    count = ways[: side + 1].count(way)
    return way if count == 1 else f"{way} ({count})"


def _way(outline: Outline, side: int) -> str:
    """The axis that a side's outer face looks along; empty for slanted sides."""
    (x0, y0), (x1, y1) = outline[side], outline[(side + 1) % len(outline)]
    turn = 1.0 if Polygon(outline).exterior.is_ccw else -1.0
    out = (turn * (y1 - y0), -turn * (x1 - x0))
    for k, axis in enumerate("xy"):
        if abs(out[1 - k]) <= 1e-3 * abs(out[k]):
            return ("+" if out[k] > 0 else "−") + axis
    return ""


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
    distance: LevelDistance | None = None
    source: tuple[Point, ...] = ()
    if request.target is not None:
        shape, beyond = _shape(layout, request.target)
        distance = largest_distance(
            fields, case, level, found, shape, request.target.title, beyond=beyond
        )
        source = tuple((float(x), float(y)) for x, y in shape.coords)
    through = _through(found) if distance is None else distance.end
    elevations = tuple(
        (sight, lines_on_plane(fields, case, level, plane, kind=kind))
        for sight, plane in _upright(found, fields, through)
    )
    return Reached(request, level, found, distance, elevations, through, source)


def with_held(request: DistanceRequest, cancelled: Cancelled | None = None) -> Reached:
    """As `reached`, with the distance in the layout that is held, where it has one.

    Errors as `reached`.
    """
    answer = reached(request, cancelled)
    if request.held is None or request.held is request.layout:
        return answer
    try:
        before = reached(replace(request, layout=request.held, held=None), cancelled)
    except UserError:
        return answer
    return replace(answer, before=before.distance)


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


@dataclass(frozen=True)
class PlaceFactor:
    """All currents times `factor` make the value at a place equal a level. [m]"""

    title: str
    at: Point3 | None
    factor: float
    case: str

    @property
    def times(self) -> str:
        """The factor in figures."""
        return significant(self.factor)

    @property
    def text(self) -> str:
        """ "Corridor: 0.95 × this case"."""
        return f"{self.title}: {self.times} × this case"


def factors(assessment: Assessment, case: str, level: str) -> tuple[PlaceFactor, ...]:
    """Of zones and receptors that name a level, in one case; the smallest first."""
    titles = {item.id: item.title for item in assessment.layout.items()}
    found: dict[str, PlaceFactor] = {}
    comparisons = [c for zone in assessment.zones for c in zone.comparisons]
    comparisons += [c for place in assessment.receptors for c in place.comparisons]
    for comparison in comparisons:
        if (comparison.case, comparison.level) != (case, level):
            continue
        factor = None if comparison.ratio is None else load_factor(comparison.ratio)
        if factor is None:
            continue
        before = found.get(comparison.place)
        if before is None or factor.factor < before.factor:
            at = None if comparison.details is None else comparison.details.at
            title = titles.get(comparison.place, comparison.place)
            found[comparison.place] = PlaceFactor(title, at, factor.factor, case)
    return tuple(sorted(found.values(), key=lambda f: f.factor))
