"""What Select makes of items: a vertex elsewhere, another size, a place to count from.

Values in, values out; places are in space. [m]
"""

from __future__ import annotations

from math import dist

from msgspec.structs import replace

from app.tools.tool import Point
from engine.edits import checked
from engine.errors import UserError
from engine.items import Item, Point3
from engine.motions import neat
from engine.new_places import rectangle
from engine.places import Enclosure, Room, Zone
from engine.routes import SHORTEST
from engine.vertices import extent, is_closed, vertices, with_vertex


def way(start: Point3, end: Point3) -> Point3:
    """The way from one place to another. [m]"""
    x, y, z = (neat(b - a) for a, b in zip(start, end, strict=True))
    return (x, y, z)


def first_place(items: tuple[Item, ...]) -> Point3:
    """The first vertex of the items that have a place. [m]

    Raises
    ------
    UserError
        When none of them has one.
    """
    for item in items:
        places = vertices(item) or extent(item)
        if places:
            return places[0]
    raise UserError("What is selected has no place on the drawing.")


def sized(items: tuple[Item, ...], size: Point) -> Item:
    """The only item, a rectangle, with other sides. [m]

    Raises
    ------
    UserError
        When there are several, or it is no rectangle.
    """
    item = items[0]
    if len(items) != 1 or not isinstance(item, Room | Enclosure | Zone):
        raise UserError("Select one room, enclosure or zone to give it a size.")
    corners = [place[:2] for place in vertices(item)]
    xs, ys = zip(*corners, strict=True)
    box = rectangle((min(xs), min(ys)), (max(xs), max(ys)))
    if set(corners) != set(box) or len(corners) != 4:
        raise UserError(f"“{item.title}” is no rectangle: move its vertices.")
    x, y = box[0]
    new = rectangle((x, y), (x + size[0], y + size[1]))
    if isinstance(item, Enclosure):
        return checked(replace(item, footprint=new))
    return checked(replace(item, outline=new))


def with_checked_vertex(item: Item, index: int, to: Point3) -> Item:
    """The item with a vertex elsewhere, but not on its neighbour.

    Raises
    ------
    UserError
        When it would lie on a neighbouring vertex.
    """
    made = with_vertex(item, index, to)
    places = vertices(made)
    n = len(places)
    neighbours = {index - 1, index + 1}
    if is_closed(item):
        neighbours = {k % n for k in neighbours}
    for k in neighbours - {index}:
        if 0 <= k < n and dist(places[k], places[index]) < SHORTEST:
            raise UserError(
                f"That vertex of “{item.title}” would lie on its neighbour: delete it "
                "instead."
            )
    return made
