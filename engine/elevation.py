"""The layout seen from a side, as the same kind of shapes as the plan.

The horizontal axis runs to the right as seen, z upwards. What has no heights of its
own is given those of what belongs to it, for drawing only.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import shapely
from shapely.geometry import Point as Place2
from shapely.geometry import Polygon

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
from engine.layout import Layout
from engine.sight import Sight


def elevation(layout: Layout, conductors: Sequence[Conductor], sight: Sight) -> Plan:
    """A layout as seen along `sight`.

    Parameters
    ----------
    layout : Layout
    conductors : sequence of Conductor
        The conductors of that layout; without them, runs show as routes only.
    sight : Sight
        One of the horizontal ones of `engine.sight`.

    Returns
    -------
    Plan
        Places are the rectangles that they fill from the side. A zone whose floor is
        not stated, and equipment without any height, are left out.
    """
    on_plan = plan(layout, ())
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
