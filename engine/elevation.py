"""The layout seen from a side, as the same kind of shapes as the plan.

The horizontal axis runs to the right as seen, z upwards. What has no heights of its
own is given those of what belongs to it, for drawing only. An upright plane of a map
stands across the sight at one depth; its names are those of the layout.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely
from msgspec.structs import replace
from shapely.geometry import LineString, Polygon
from shapely.geometry import Point as Place2

from engine.conductor import Conductor
from engine.drawing import (
    Area,
    Mark,
    Place,
    Plan,
    Point,
    Strand,
    parted,
    plan,
    run_shape,
)
from engine.items import Point3
from engine.layout import Layout
from engine.places import Profile
from engine.sampling import Plane
from engine.sight import Sight, along

Floats = npt.NDArray[np.float64]

#: Left around what is drawn where a map's size is not stated. [m]
_MARGIN = 1.0

#: Legs shorter than this on plan have no upright plane of their own. [m]
_SHORTEST = 0.01

#: Left, bottom, right, top in the picture of a sight. [m]
Rect = tuple[float, float, float, float]


@dataclass(frozen=True)
class Upright:
    """An upright plane: all places at one depth of a horizontal sight.

    Attributes
    ----------
    sight : Sight
    depth : float
        Away from the viewer, see `Sight.depth`. [m]
    """

    sight: Sight
    depth: float

    def places(self, seen: npt.ArrayLike) -> Floats:
        """(..., 3) places of the layout of (..., 2) places in the picture. [m]"""
        return self.sight.places(seen, self.depth)

    def rectangle(self, rect: Rect) -> Plane:
        """The part of the plane that fills a rectangle of the picture. [m]"""
        x0, z0, x1, z1 = rect
        corner, right, top = self.places([(x0, z0), (x1, z0), (x0, z1)])
        return Plane(_point(corner), _point(right - corner), _point(top - corner))

    def cut(self, outline: shapely.Polygon, rect: Rect) -> list[tuple[float, float]]:
        """Where the plane cuts an outline on plan: from and to in the picture. [m]"""
        x0, z0, x1, _ = rect
        ends = self.places([(x0, z0), (x1, z0)])
        pieces = shapely.intersection(LineString(ends[:, :2]), outline)
        found = []
        for piece in getattr(pieces, "geoms", [pieces]):
            if piece.length > 0:
                corners = np.array(piece.coords)
                seen = self.sight.seen(np.column_stack([corners, 0.0 * corners[:, 0]]))
                across = seen[:, 0]
                found.append((float(across.min()), float(across.max())))
        return found


def plane_at(sight: Sight, at: Point3) -> Upright:
    """The upright plane of a sight that goes through a place. [m]

    Its depth is a coordinate of the layout on `LOOKING_X` and `LOOKING_Y`.
    """
    return Upright(sight, float(sight.depth(at)))


def lines_along(profile: Profile) -> tuple[Sight, ...]:
    """The sights along a profile: one for each of its legs that has a length on plan.

    Legs that go on in the same direction are one.
    """
    found: list[Sight] = []
    start = end = profile.path[0]
    for vertex in profile.path[1:]:
        dx, dy = vertex[0] - end[0], vertex[1] - end[1]
        length = float(np.hypot(dx, dy))
        if length < _SHORTEST:
            continue
        if start != end:
            last = along(start, end)
            turns = abs(last.right[0] * dy - last.right[1] * dx) > 1e-6 * length
            if turns or last.right[0] * dx + last.right[1] * dy < 0:
                found.append(last)
                start = end
        end = vertex
    if start != end:
        found.append(along(start, end))
    return tuple(found)


def extent_from_side(layout: Layout, sight: Sight) -> Rect:
    """A rectangle in the picture around rooms, zones and receptors, or else all. [m]"""
    shown = elevation(layout, (), sight)
    places = (*shown.rooms, *shown.zones)
    points = [point for place in places for point in place.area.outline]
    points += [mark.seen for mark in shown.receptors]
    bounds = shown.bounds()
    if points:
        (x0, z0), (x1, z1) = np.min(points, axis=0), np.max(points, axis=0)
    elif bounds is not None:
        x0, z0, x1, z1 = bounds
    else:
        return (0.0, 0.0, 10.0, 3.0)
    return (
        float(x0) - _MARGIN, float(z0) - _MARGIN,
        float(x1) + _MARGIN, float(z1) + _MARGIN,
    )  # fmt: skip


def elevation(layout: Layout, conductors: Sequence[Conductor], sight: Sight) -> Plan:
    """A layout as seen along `sight`.

    Parameters
    ----------
    layout : Layout
    conductors : sequence of Conductor
        The conductors of that layout; without them, runs show as routes only.
    sight : Sight
        A horizontal one: `LOOKING_X`, `LOOKING_Y`, or along a drawn line.

    Returns
    -------
    Plan
        Places are the rectangles that they fill from the side. A zone whose floor is
        not stated, and equipment without any height, are left out.
    """
    # Runs are drawn from the side, not on plan.
    on_plan = plan(replace(layout, runs=()), ())
    parts = parted(conductors, sight)
    equipment = tuple(
        _with_levels(place, _equipment_levels(place, layout, parts.equipment))
        for place in on_plan.equipment
    )
    return Plan(
        rooms=_from_side(on_plan.rooms, sight),
        enclosures=_from_side(on_plan.enclosures, sight),
        equipment=_from_side(equipment, sight),
        equipment_strands=parts.equipment,
        runs=tuple(run_shape(r, parts.runs.get(r.id, ()), sight) for r in layout.runs),
        links=parts.links,
        zones=_from_side(on_plan.zones, sight),
        receptors=tuple(
            Mark(mark.item, mark.title, mark.at, _seen(mark.at, sight))
            for mark in on_plan.receptors
        ),
    )


def _from_side(places: Iterable[Place], sight: Sight) -> tuple[Place, ...]:
    found = []
    for place in places:
        if place.levels is None:
            continue
        across = [_seen((x, y, 0.0), sight)[0] for x, y in place.area.outline]
        (low, high), left, right = place.levels, min(across), max(across)
        outline = ((left, low), (right, low), (right, high), (left, high))
        found.append(_with_area(place, Area(outline)))
    return tuple(found)


def _with_area(place: Place, area: Area) -> Place:
    return Place(place.item, place.title, place.kind, area, place.levels, place.closed)


def _with_levels(place: Place, levels: tuple[float, float] | None) -> Place:
    return Place(place.item, place.title, place.kind, place.area, levels, place.closed)


def _equipment_levels(
    place: Place, layout: Layout, strands: Sequence[Strand]
) -> tuple[float, float] | None:
    """From the floor of the room it stands in up to its highest conductor. [m]"""
    if place.levels is not None:
        return place.levels
    heights = [z for s in strands if s.item == place.item for z in s.levels]
    if not heights:
        return None
    low, high = min(heights), max(heights)
    middle = Place2(place.label_place)
    floors = [
        room.floor_level
        for room in layout.rooms
        if room.floor_level <= low and shapely.covers(Polygon(room.outline), middle)
    ]
    return (max(floors, default=low), high)


def _seen(at: tuple[float, float, float], sight: Sight) -> Point:
    x, y = sight.seen(at).tolist()
    return (x, y)


def _point(at: Floats) -> Point3:
    x, y, z = at.tolist()
    return (x, y, z)
