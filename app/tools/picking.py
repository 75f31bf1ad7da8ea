"""What can be taken hold of in a view: vertices near a place, items inside a box.

Pure functions on a layout and a viewing direction; places are in the view's plane.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator
from dataclasses import dataclass
from math import dist

from app.tools.catch import NO_TARGETS, catch, targets
from app.tools.tool import Point, Pointer
from app.view_state import Look
from engine.items import Item, Point3
from engine.layout import Layout
from engine.motions import neat
from engine.new_places import drawn_storey
from engine.places import BackingDrawing, Enclosure, Profile, Receptor, Room, Zone
from engine.runs import Run
from engine.sight import SIGHTS, Sight
from engine.vertices import extent, is_closed, nearest_leg, vertices

#: Step of the grid on plan. [m]
GRID = 0.1


@dataclass(frozen=True)
class Handle:
    """A vertex of an item. Places are in the view's plane. [m]"""

    item: str
    index: int
    at: Point


def sight(plane: str) -> Sight:
    """The viewing direction of a plane's name; the plan for others."""
    return SIGHTS.get(plane, SIGHTS["plan"])


def seen(view: Sight, place: Point3) -> Point:
    """Where a place shows. [m]"""
    x, y = view.seen(place).tolist()
    return (x, y)


def in_space(view: Sight, dx: float, dy: float) -> Point3:
    """A way in the view's plane as a way in space. [m]"""
    x, y, z = (neat(r * dx + u * dy) for r, u in zip(view.right, view.up, strict=True))
    return (x, y, z)


def handles(layout: Layout, ids: Collection[str], view: Sight) -> tuple[Handle, ...]:
    """Vertices of the items that can be moved one by one."""
    return tuple(
        Handle(item.id, index, seen(view, place))
        for item in layout.items()
        if item.id in ids
        for index, place in enumerate(vertices(item))
    )


def handle_near(
    layout: Layout, ids: Collection[str], view: Sight, at: Point, reach: float
) -> Handle | None:
    """The nearest vertex of the items within reach; of equal ones the last."""
    near = [h for h in handles(layout, ids, view) if dist(h.at, at) <= reach]
    if not near:
        return None
    least = min(dist(h.at, at) for h in near)
    return [h for h in near if dist(h.at, at) <= least + 1e-9][-1]


def leg_near(
    item: Item, view: Sight, at: Point, reach: float
) -> tuple[int, Point3] | None:
    """The leg of an item that passes within reach, and where it does in space."""
    places = vertices(item)
    if len(places) < 2:
        return None
    flat = [seen(view, place) for place in places]
    leg, foot = nearest_leg(flat, is_closed(item), at)
    if dist(foot, at) > reach:
        return None
    a, b = places[leg], places[(leg + 1) % len(places)]
    start, end = flat[leg], flat[(leg + 1) % len(places)]
    length = dist(start, end)
    along = dist(start, foot) / length if length > 0 else 0.5
    x, y, z = (neat(p + along * (q - p)) for p, q in zip(a, b, strict=True))
    return leg, (x, y, z)


def grip(item: Item, view: Sight, pointer: Pointer) -> Point:
    """The exact place of an item that a pointer takes hold of, in the view's plane.

    A vertex or the middle of a leg in reach; else the grid, on the leg where that
    runs along an axis. [m]
    """
    flat = [seen(view, place) for place in vertices(item) or extent(item)]
    wanted = targets(outlines=[flat]) if is_closed(item) else targets(lines=[flat])
    near = catch(pointer.raw, wanted, 2 * pointer.reach, grid=GRID)
    if near.caught != "edge":
        return near.at
    x, y = catch(near.at, NO_TARGETS, pointer.reach, grid=GRID).at
    leg, _ = nearest_leg(flat, is_closed(item), near.at)
    a, b = flat[leg], flat[(leg + 1) % len(flat)]
    return (a[0] if a[0] == b[0] else x, a[1] if a[1] == b[1] else y)


def inside_box(
    layout: Layout, look: Look, view: Sight, corner: Point, opposite: Point
) -> tuple[str, ...]:
    """Ids of the shown items that lie wholly inside a box, edges included."""
    (left, right), (low, high) = (
        sorted(pair) for pair in zip(corner, opposite, strict=True)
    )
    slack = 1e-9
    found: list[str] = []
    for item in selectable(layout, look, view):
        places = [seen(view, place) for place in extent(item)]
        if places and all(
            left - slack <= x <= right + slack and low - slack <= y <= high + slack
            for x, y in places
        ):
            found.append(item.id)
    return tuple(found)


def selectable(layout: Layout, look: Look, view: Sight) -> Iterator[Item]:
    """Items with a place whose layer is shown; on plan those of other storeys' rooms
    and zones are only outlines, and left out."""
    drawn = drawn_storey(layout, look.storey)
    for item in layout.items():
        layer = _layer(item)
        if layer is None or layer in look.hidden:
            continue
        other_storey = (
            isinstance(item, Room | Zone)
            and view.name == "plan"
            and drawn is not None
            and item.storey not in (None, drawn.id)
        )
        out_of_reach = isinstance(item, BackingDrawing) and (
            item.locked or item.view != view.name
        )
        if not other_storey and not out_of_reach:
            yield item


def _layer(item: Item) -> str | None:
    """The layer that an item is drawn on; None for one that is not drawn."""
    match item:
        case Room():
            return "rooms"
        case Zone():
            return "zones"
        case Enclosure():
            return "enclosures"
        case Run():
            return "runs"
        case Receptor() | Profile():
            return "receptors"
        case BackingDrawing():
            return "backing drawing"
    return "equipment" if extent(item) else None
