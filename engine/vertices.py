"""Vertices of items: where they can be taken hold of, moved, inserted and deleted.

Areas have theirs at their floor; only x and y of those are the item's own.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import atan2, degrees, dist, hypot
from typing import TypeVar

from msgspec.structs import replace

from engine.calibration import place_of
from engine.embedded_picture import picture_size
from engine.equipment import Board, ConductorLoop, Transformer
from engine.equipment_conductors import board_parts
from engine.errors import UserError
from engine.items import Item, Point2, Point3
from engine.motions import neat, tidy_turns
from engine.places import BackingDrawing, Enclosure, Profile, Receptor, Room, Zone
from engine.routes import SHORTEST, stations
from engine.runs import Run
from engine.sight import SIGHTS

AnyItem = TypeVar("AnyItem", bound=Item)

_Area = Room | Enclosure | Zone
_Line = Run | Profile | ConductorLoop


def vertices(item: Item) -> tuple[Point3, ...]:
    """Places of the item that can be moved one by one. [m]"""
    match item:
        case Run():
            return item.route
        case Profile() | ConductorLoop():
            return item.path
        case Receptor():
            return (item.at,)
        case Room() | Enclosure() | Zone():
            z = _floor(item)
            return tuple((x, y, z) for x, y in _outline(item))
    return ()


def is_closed(item: Item) -> bool:
    """Whether a line leads from the last vertex to the first."""
    return isinstance(item, Room | Enclosure | Zone | ConductorLoop)


def extent(item: Item) -> tuple[Point3, ...]:
    """Places between which the item lies: vertices, terminals, corners. [m]"""
    match item:
        case Transformer():
            floor = min(t.at[2] for t in item.terminals)
            corners = [(x, y, floor) for x, y in item.footprint]
            return (*(t.at for t in item.terminals), item.star, *corners)
        case Board():
            return _board_extent(item)
        case BackingDrawing():
            return _picture_corners(item)
        case Room():
            top = [(x, y, item.ceiling_level) for x, y in item.outline]
            return (*vertices(item), *top)
        case Enclosure():
            top = [(x, y, item.z_to) for x, y in item.footprint]
            return (*vertices(item), *top)
        case Zone():
            floor = item.floor_level or 0.0
            return tuple(
                (x, y, floor + h) for x, y in item.outline for h in item.heights
            )
    return vertices(item)


def bounds(items: Iterable[Item]) -> tuple[Point3, Point3] | None:
    """Least and greatest coordinates of the items; None when none has a place. [m]"""
    points = [point for item in items for point in extent(item)]
    if not points:
        return None
    xs, ys, zs = zip(*points, strict=True)
    return (min(xs), min(ys), min(zs)), (max(xs), max(ys), max(zs))


def with_vertex(item: AnyItem, index: int, to: Point3) -> AnyItem:
    """The item with one vertex elsewhere; an area keeps its heights. [m]"""
    points = list(vertices(item))
    points[index] = (neat(to[0]), neat(to[1]), neat(to[2]))
    return _with(item, points)


def with_inserted(item: AnyItem, leg: int, at: Point3) -> AnyItem:
    """The item with a vertex between the ends of a leg (from 0).

    Raises
    ------
    UserError
        When the item has no legs, or `at` lies on one of the leg's ends.
    """
    points = list(vertices(item))
    if isinstance(item, Receptor) or not points:
        raise UserError(f"“{item.title}” has no legs to put a vertex on.")
    ends = (points[leg], points[(leg + 1) % len(points)])
    if min(dist(end, at) for end in ends) < SHORTEST:
        raise UserError(
            f"There is a vertex of “{item.title}” at that place already: choose "
            "another one."
        )
    points.insert(leg + 1, (neat(at[0]), neat(at[1]), neat(at[2])))
    made = _with(item, points)
    if isinstance(item, Run) and item.turns:
        turns = (*item.turns[: leg + 1], *item.turns[leg:])
        made = replace(made, turns=turns)
    return made


def without_vertex(item: AnyItem, index: int) -> AnyItem:
    """The item without one vertex; a run's section stays as it lay on later legs.

    Raises
    ------
    UserError
        When too few vertices would be left.
    """
    points = list(vertices(item))
    fewest = 3 if is_closed(item) else 2
    if len(points) <= fewest:
        raise UserError(
            f"“{item.title}” has only {len(points)} vertices and needs them all: "
            "delete the whole item instead."
        )
    if isinstance(item, Run) and index == 0:
        part = with_route(item, 1, tuple(points[1:]))
        assert isinstance(part, type(item))
        return part
    del points[index]
    made = _with(item, points)
    if isinstance(item, Run) and item.turns:
        leg = min(index, len(item.turns) - 1)
        turns = item.turns[:leg] + item.turns[leg + 1 :]
        return replace(made, turns=turns)
    return made


def with_route(run: Run, leg: int, route: Sequence[Point3]) -> Run:
    """The part of a run from one of its legs on, its section lying as it did.

    Parameters
    ----------
    run : Run
        The whole run.
    leg : int
        The first leg of the part, from 0.
    route : points
        The part's vertices; its first leg lies on that leg. [m]

    Raises
    ------
    UserError
        When the run up to there cannot be built.
    """
    old = run.turns or (0.0,) * (len(run.route) - 1)
    try:
        frames = stations(run.route[: leg + 2])
        natural = stations(route[:2])
    except UserError as error:
        raise UserError(f"Run “{run.title}”: {error}") from None
    # At the end of the last leg the section stands square to it.
    u = frames.plain_axes[-1][0]
    along_u, along_v = (float(axis @ u) for axis in natural.plain_axes[0])
    turn = degrees(atan2(along_v, along_u))
    if abs(turn) < 1e-9:
        turn = 0.0
    turns = tidy_turns(one + turn for one in old[leg : leg + len(route) - 1])
    return replace(run, route=tuple(route), turns=turns)


def nearest_leg(
    points: Sequence[Point2], closed: bool, at: Point2
) -> tuple[int, Point2]:
    """The leg that passes nearest to a place on plan, and where it does. [m]"""
    ends = [*points[1:], points[0]] if closed else points[1:]
    found: list[tuple[float, int, Point2]] = []
    for leg, (a, b) in enumerate(zip(points, ends, strict=False)):
        dx, dy = b[0] - a[0], b[1] - a[1]
        length = hypot(dx, dy)
        along = 0.0
        if length > 0:
            along = ((at[0] - a[0]) * dx + (at[1] - a[1]) * dy) / length**2
        along = min(1.0, max(0.0, along))
        foot = (a[0] + along * dx, a[1] + along * dy)
        found.append((dist(foot, at), leg, foot))
    _, leg, foot = min(found)
    return leg, foot


def _with(item: AnyItem, points: Sequence[Point3]) -> AnyItem:
    flat = tuple((x, y) for x, y, _ in points)
    match item:
        case Run():
            return replace(item, route=tuple(points))
        case Profile() | ConductorLoop():
            return replace(item, path=tuple(points))
        case Receptor():
            return replace(item, at=points[0])
        case Enclosure():
            return replace(item, footprint=flat)
        case Room() | Zone():
            return replace(item, outline=flat)
    raise ValueError(f"{type(item).__name__} has no vertices")


def _outline(item: _Area) -> tuple[Point2, ...]:
    return item.footprint if isinstance(item, Enclosure) else item.outline


def _floor(item: _Area) -> float:
    match item:
        case Enclosure():
            return item.z_from
        case Room():
            return item.floor_level
    return item.floor_level or 0.0


def _picture_corners(drawing: BackingDrawing) -> tuple[Point3, ...]:
    """Corners of a backing drawing in the plane through the origin. [m]"""
    sight = SIGHTS[drawing.view]
    width, height = picture_size(drawing) or (0, 0)
    pixels = ((0, 0), (width, 0), (width, height), (0, height))
    has_scale = drawing.first != drawing.second
    seen = [place_of(drawing, p) for p in pixels] if has_scale else [drawing.origin]
    return tuple(
        (
            sight.right[0] * across + sight.up[0] * up,
            sight.right[1] * across + sight.up[1] * up,
            sight.right[2] * across + sight.up[2] * up,
        )
        for across, up in seen
    )


def _board_extent(board: Board) -> tuple[Point3, ...]:
    places = [socket.at for socket in board_parts(board).sockets.values()]
    floor = min(place[2] for place in places)
    return (*places, *((x, y, floor) for x, y in board.footprint))
