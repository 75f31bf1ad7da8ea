"""New rooms, enclosures, zones, receptors and profiles with the values drawn first.

Everything that is not drawn is an assumption until somebody confirms it. The category
of a zone is left open: it must be chosen.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Literal

from msgspec.structs import replace
from shapely.geometry import MultiPolygon, Point, Polygon
from shapely.geometry.polygon import orient

from engine.edits import added, replaced, unused_id
from engine.errors import UserError
from engine.items import Item, Point2, Point3
from engine.layout import Layout
from engine.motions import neat
from engine.places import Enclosure, Profile, Receptor, Room, Storey, Zone
from engine.units import LENGTH_UNITS
from engine.vertices import bounds

#: Floor to finished ceiling of a new room. [m]
ROOM_HEIGHT = 3.0

#: What a zone keeps from the walls of its room. [m]
FROM_WALLS = 0.2

#: Top of a new enclosure above its floor. [m]
ENCLOSURE_HEIGHT = 2.1

#: Levels nearer than this are one floor. [m]
_SAME_FLOOR = 0.01


def drawn_storey(layout: Layout, storey: str) -> Storey | None:
    """The storey with this id, or the lowest one; None when there is none."""
    known = {one.id: one for one in layout.storeys}
    lowest = min(layout.storeys, key=lambda one: one.floor_level, default=None)
    return known.get(storey, lowest)


def floor_of(layout: Layout, storey: str) -> float:
    """Level of the floor that is drawn upon; the datum without storeys. [m]"""
    drawn = drawn_storey(layout, storey)
    return 0.0 if drawn is None else drawn.floor_level


def room_at(layout: Layout, at: Point2, storey: str) -> Room | None:
    """The room of the storey that a place on plan lies in."""
    drawn = drawn_storey(layout, storey)
    floor = floor_of(layout, storey)
    for room in layout.rooms:
        on_storey = drawn is None or room.storey == drawn.id
        if room.storey is None:
            on_storey = room.floor_level - _SAME_FLOOR <= floor < room.ceiling_level
        if on_storey and Polygon(room.outline).intersects(Point(at)):
            return room
    return None


def rectangle(corner: Point2, opposite: Point2) -> tuple[Point2, ...]:
    """The four corners between two of them, counter-clockwise. [m]"""
    (x0, x1), (y0, y1) = (
        sorted((corner[0], opposite[0])),
        sorted((corner[1], opposite[1])),
    )
    x0, x1, y0, y1 = neat(x0), neat(x1), neat(y0), neat(y1)
    return ((x0, y0), (x1, y0), (x1, y1), (x0, y1))


def outline(points: Iterable[Point2]) -> tuple[Point2, ...]:
    """Corners of an area, counter-clockwise, without repeated ones. [m]

    Raises
    ------
    UserError
        When they enclose nothing, or the outline crosses itself.
    """
    corners: list[Point2] = []
    for x, y in points:
        corner = (neat(x), neat(y))
        if not corners or corner != corners[-1]:
            corners.append(corner)
    if len(corners) > 1 and corners[0] == corners[-1]:
        corners.pop()
    if len(corners) < 3 or Polygon(corners).area < 1e-6:
        raise UserError(
            "The outline encloses no area: give it at least three corners that do not "
            "lie on one line."
        )
    if not Polygon(corners).is_valid:
        raise UserError("The outline crosses itself: draw its corners in order.")
    if not Polygon(corners).exterior.is_ccw:
        corners = [corners[0], *reversed(corners[1:])]
    return tuple(corners)


def new_room(layout: Layout, corners: Sequence[Point2], storey: str) -> Room:
    """A room on the storey's floor, 3.00 m up to its ceiling."""
    floor = floor_of(layout, storey)
    drawn = drawn_storey(layout, storey)
    id, name = _called(layout, "room")
    return Room(
        id=id,
        name=name,
        outline=outline(corners),
        storey=None if drawn is None else drawn.id,
        floor_level=floor,
        ceiling_level=neat(floor + ROOM_HEIGHT),
    )


def new_enclosure(layout: Layout, corners: Sequence[Point2], storey: str) -> Enclosure:
    """A closed enclosure from the floor up, 2.10 m high."""
    footprint = outline(corners)
    room = room_at(layout, _inside(footprint), storey)
    floor = floor_of(layout, storey) if room is None else room.floor_level
    id, name = _called(layout, "enclosure")
    return Enclosure(
        id=id,
        name=name,
        footprint=footprint,
        z_from=floor,
        z_to=neat(floor + ENCLOSURE_HEIGHT),
    )


def new_zone(layout: Layout, corners: Sequence[Point2], storey: str) -> Zone:
    """A zone on the floor of its room, or of the storey; its category is open."""
    area = outline(corners)
    room = room_at(layout, _inside(area), storey)
    drawn = drawn_storey(layout, storey)
    id, name = _called(layout, "zone")
    return Zone(
        id=id,
        name=name,
        outline=area,
        storey=None if drawn is None else drawn.id,
        floor_level=floor_of(layout, storey) if room is None else room.floor_level,
    )


def zone_filling(layout: Layout, room: Room) -> Zone:
    """A zone over a room's floor, 0.20 m from its walls; its category is open.

    Raises
    ------
    UserError
        When the room is too narrow for that, or falls into several parts.
    """
    inside = Polygon(room.outline).buffer(-FROM_WALLS, join_style="mitre")
    if inside.is_empty:
        raise UserError(
            f"Room “{room.title}” is narrower than twice {FROM_WALLS:.2f} m: draw the "
            "zone by hand."
        )
    if isinstance(inside, MultiPolygon):
        raise UserError(
            f"Room “{room.title}” less {FROM_WALLS:.2f} m along its walls falls into "
            "several parts: draw the zones by hand."
        )
    return Zone(
        id=unused_id(layout, f"{room.id}-zone"),
        name=room.title,
        outline=outline(list(orient(inside).exterior.coords)),
        storey=room.storey,
        floor_level=room.floor_level,
    )


def new_receptor(layout: Layout, at: Point3) -> Receptor:
    """A point that matters; why is left to be entered."""
    id, name = _called(layout, "receptor")
    return Receptor(id=id, name=name, at=(neat(at[0]), neat(at[1]), neat(at[2])))


def new_profile(layout: Layout, path: Sequence[Point3]) -> Profile:
    """A line along which the field is plotted."""
    id, name = _called(layout, "profile")
    return Profile(
        id=id,
        name=name,
        path=tuple((neat(x), neat(y), neat(z)) for x, y, z in path),
    )


def with_room_above(layout: Layout, room_id: str, slab: float) -> tuple[Layout, str]:
    """The layout with a room of the same outline on the slab above, and its id.

    Parameters
    ----------
    layout : Layout
        Holds the room below.
    room_id : str
        The room below; it gets the slab.
    slab : float
        Thickness between the soffit (the ceiling where none is stated) and the
        floor above. [m]

    Raises
    ------
    UserError
        When the slab has no thickness.
    """
    room = _room(layout, room_id)
    _check_slab(slab)
    top = room.ceiling_level if room.soffit_level is None else room.soffit_level
    floor = neat(top + slab)
    layout = replaced(layout, replace(room, slab_above=slab, soffit_level=top))
    return _with_room_beside(layout, room, floor, None, "above")


def with_room_below(layout: Layout, room_id: str, slab: float) -> tuple[Layout, str]:
    """The layout with a room of the same outline and height under the slab below.

    Raises
    ------
    UserError
        When the slab has no thickness.
    """
    room = _room(layout, room_id)
    _check_slab(slab)
    floor = neat(room.floor_level - slab - (room.ceiling_level - room.floor_level))
    return _with_room_beside(layout, room, floor, slab, "below")


def _with_room_beside(
    layout: Layout,
    room: Room,
    floor: float,
    slab: float | None,
    side: Literal["above", "below"],
) -> tuple[Layout, str]:
    height = room.ceiling_level - room.floor_level
    ceiling = neat(floor + height)
    if room.storey is None:
        layout, own = _with_storey(layout, room.floor_level)
        room = replace(_room(layout, room.id), storey=own)
        layout = replaced(layout, room)
    layout, storey = _with_storey(layout, floor)
    beside = Room(
        id=unused_id(layout, f"{room.id}-{side}"),
        name=f"{room.title}, {side}",
        outline=room.outline,
        storey=storey,
        floor_level=floor,
        ceiling_level=ceiling,
        soffit_level=None if slab is None else ceiling,
        slab_above=slab,
    )
    return added(layout, beside), beside.id


def _with_storey(layout: Layout, floor: float) -> tuple[Layout, str]:
    """The layout with a storey whose floor is there, and its id."""
    for storey in layout.storeys:
        if abs(storey.floor_level - floor) < _SAME_FLOOR:
            return layout, storey.id
    unit = layout.settings.length_unit
    places = 2 if unit in ("m", "ft") else 0
    storey = Storey(
        id=unused_id(layout, f"storey {floor:+.2f}"),
        name=f"Storey {floor / LENGTH_UNITS[unit]:+.{places}f} {unit}",
        floor_level=floor,
    )
    return added(layout, storey), storey.id


def _room(layout: Layout, id: str) -> Room:
    for room in layout.rooms:
        if room.id == id:
            return room
    raise ValueError(f"no room {id}")


def _check_slab(slab: float) -> None:
    if not slab > 0:
        raise UserError("Enter the thickness of the slab as more than 0 m.")


def _inside(corners: Sequence[Point2]) -> Point2:
    place = Polygon(corners).representative_point()
    return (float(place.x), float(place.y))


def _called(layout: Layout, kind: str) -> tuple[str, str]:
    """An unused id and the name that goes with it: ("room-2", "Room 2")."""
    id = unused_id(layout, f"{kind}-1")
    if id != f"{kind}-1":
        number = 2
        taken = {item.id for item in layout.items()}
        while f"{kind}-{number}" in taken:
            number += 1
        id = f"{kind}-{number}"
    return id, id.replace("-", " ").capitalize()


def middle(items: Iterable[Item]) -> Point2:
    """The middle of the items' bounds on plan; the origin when none has a place."""
    found = bounds(items)
    if found is None:
        return (0.0, 0.0)
    low, high = found
    return (neat((low[0] + high[0]) / 2), neat((low[1] + high[1]) / 2))
