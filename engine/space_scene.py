"""The layout in space as data: solids by role, labels, planes of maps.

Everything of one role is one mesh, whatever the number of items, since each mesh costs
the screen about as much as a hundred boxes. No colours: a role is a name for one.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from shapely.geometry import box

from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.equipment import Board, Equipment, Transformer
from engine.items import Point3
from engine.layout import Layout
from engine.maps import MapResult, extent
from engine.masks import open_for_work
from engine.places import Room, Zone
from engine.runs import Run
from engine.sampling import Plane, area_of, horizontal
from engine.solids import Solid, conductor_solid, joined, normals, prism, sheet, walls
from engine.zone_assessment import zone_floor

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

Kind = Literal[
    "storey", "room", "slab", "closed enclosure", "open enclosure", "equipment",
    "conductor", "joint link", "closing link", "zone",
]  # fmt: skip

#: What one sees through; a click goes to what lies behind, if anything does.
CLEAR: frozenset[Kind] = frozenset({"storey", "room", "slab", "open enclosure", "zone"})

#: Labels of which several share a conductor, and of none.
SEVERAL, NOTHING = "several", "nothing"


@dataclass(frozen=True, eq=False)
class Mesh:
    """All triangles of one role.

    Attributes
    ----------
    kind : Kind
    label : str
        Of conductors: "L1", "N", "stray", …; SEVERAL or NOTHING. Empty otherwise.
    vertices : (n, 3) float
        [m]
    faces : (m, 3) int
        Counter-clockwise seen from outside.
    owners : (m,) int
        Of each triangle, the place of its item in `items`.
    items : tuple of str
        Ids.
    """

    kind: Kind
    label: str
    vertices: Floats
    faces: Integers
    owners: Integers
    items: tuple[str, ...]

    @property
    def is_clear(self) -> bool:
        """Whether one sees through it."""
        return self.kind in CLEAR

    @property
    def corners(self) -> Floats:
        """(m, 3, 3) corners of the triangles. [m]"""
        return self.vertices[self.faces]

    @property
    def normals(self) -> Floats:
        """(m, 3) unit normals, outwards."""
        return normals(self.corners)

    def of(self, item: str) -> Integers:
        """(k,) places of an item's triangles, to mark it."""
        if item not in self.items:
            return np.zeros(0, np.int64)
        return np.flatnonzero(self.owners == self.items.index(item))


@dataclass(frozen=True)
class Label:
    """A text at a place in space. [m]

    `kind` "run" and "conductor" stand in the middle of the longest leg; of conductors
    the text is their letters. `length` is that of what the text names.
    """

    kind: Literal["run", "conductor", "zone", "receptor", "equipment", "room"]
    item: str
    text: str
    at: Point3
    length: float


@dataclass(frozen=True)
class MapQuad:
    """A rectangle in space for the picture of a map.

    Attributes
    ----------
    corners : four Point3
        Of the first row's first and last value, then of the last row's last and first:
        rows of the picture run along corner 0 to 1, upwards to corner 3. [m]
    heights : tuple of float
        Of a level plane, those over which the map is the largest. [m]
    """

    corners: tuple[Point3, Point3, Point3, Point3]
    heights: tuple[float, ...] = ()

    @property
    def normal(self) -> Point3:
        """Unit vector across the plane; upwards where it is level."""
        a, b, _, d = np.array(self.corners)
        across = np.cross(b - a, d - a)
        x, y, z = across / np.linalg.norm(across)
        return (float(x), float(y), float(z))


@dataclass(frozen=True, eq=False)
class SpaceScene:
    """Everything of a layout that shows in space."""

    meshes: tuple[Mesh, ...]
    labels: tuple[Label, ...]
    #: Receptors, which have no extent.
    points: tuple[tuple[str, Point3], ...]

    def mesh(self, kind: Kind, label: str = "") -> Mesh | None:
        """The mesh of a role, if anything has it."""
        for mesh in self.meshes:
            if (mesh.kind, mesh.label) == (kind, label):
                return mesh
        return None

    def bounds(self) -> tuple[Point3, Point3] | None:
        """Lowest and highest x, y, z of everything; None when there is nothing. [m]"""
        parts = [mesh.vertices for mesh in self.meshes]
        parts += [np.array([at]) for _, at in self.points]
        parts = [part for part in parts if len(part)]
        if not parts:
            return None
        every = np.concatenate(parts)
        (a, b, c), (d, e, f) = every.min(axis=0).tolist(), every.max(axis=0).tolist()
        return (a, b, c), (d, e, f)


def space_scene(
    layout: Layout, conductors: Sequence[Conductor], case: LoadCase | None = None
) -> SpaceScene:
    """The solids of a layout.

    Parameters
    ----------
    layout : Layout
    conductors : sequence of Conductor
        Of that layout; without them runs and bars do not show.
    case : LoadCase, optional
        Whose open enclosures are open too.
    """
    found: dict[tuple[Kind, str], list[tuple[str, Solid]]] = {}
    for kind, label, item, solid in _parts(layout, conductors, case):
        if len(solid.faces):
            found.setdefault((kind, label), []).append((item, solid))
    meshes = [_mesh(kind, label, parts) for (kind, label), parts in found.items()]
    return SpaceScene(
        tuple(meshes),
        tuple(_labels(layout, conductors)),
        tuple((receptor.id, receptor.at) for receptor in layout.receptors),
    )


def quad_of_plane(plane: Plane, heights: tuple[float, ...] = ()) -> MapQuad:
    """The rectangle of any plane, level or upright."""
    origin, first, second = (
        np.array(v) for v in (plane.origin, plane.first, plane.second)
    )
    places = (origin, origin + first, origin + first + second, origin + second)
    a, b, c, d = ((float(x), float(y), float(z)) for x, y, z in places)
    return MapQuad((a, b, c, d), heights)


def quads_of_map(result: MapResult) -> tuple[MapQuad, ...]:
    """Where a map lies: once for each of its heights, or on its own plane."""
    if not result.heights:
        return (quad_of_plane(result.plane),)
    x = (float(result.xs[0]), float(result.xs[-1]))
    y = (float(result.ys[0]), float(result.ys[-1]))
    return tuple(
        quad_of_plane(horizontal(x, y, z), result.heights) for z in result.heights
    )


def _mesh(kind: Kind, label: str, parts: Sequence[tuple[str, Solid]]) -> Mesh:
    whole = joined([solid for _, solid in parts])
    items = tuple(dict.fromkeys(item for item, _ in parts))
    place = {item: k for k, item in enumerate(items)}
    owners = np.repeat(
        [place[item] for item, _ in parts], [len(solid.faces) for _, solid in parts]
    )
    return Mesh(kind, label, whole.vertices, whole.faces, owners, items)


_Part = tuple[Kind, str, str, Solid]


def _parts(
    layout: Layout, conductors: Sequence[Conductor], case: LoadCase | None
) -> Iterator[_Part]:
    """Every solid with its kind, label and item."""
    x0, y0, x1, y1 = extent(layout)
    for storey in layout.storeys:
        yield "storey", "", storey.id, sheet(box(x0, y0, x1, y1), storey.floor_level)
    for room in layout.rooms:
        yield from _room(room)
    for enclosure in layout.enclosures:
        kind: Kind = (
            "open enclosure" if open_for_work(enclosure, case) else "closed enclosure"
        )
        area = area_of(enclosure.footprint)
        yield kind, "", enclosure.id, prism(area, enclosure.z_from, enclosure.z_to)
    heights: dict[str, list[float]] = {}
    for conductor in conductors:
        label = _label(conductor)
        role: Kind = "conductor"
        if conductor.role in ("joint link", "closing link"):
            role = conductor.role
        yield role, label, conductor.item, conductor_solid(conductor)
        heights.setdefault(conductor.item, []).extend(conductor.path[:, 2].tolist())
    for unit in layout.equipment:
        yield from _equipment(unit, heights.get(unit.id, []))
    for zone in layout.zones:
        yield from _zone(layout, zone)


def _room(room: Room) -> Iterator[_Part]:
    """Floor and walls, open above, so that one sees into it; and the slab above."""
    area = area_of(room.outline)
    floor = sheet(area, room.floor_level)
    around = walls(area, room.floor_level, room.ceiling_level)
    yield "room", "", room.id, joined([floor, around])
    if room.slab_above is not None:
        soffit = room.ceiling_level if room.soffit_level is None else room.soffit_level
        yield "slab", "", room.id, prism(area, soffit, soffit + room.slab_above)


def _equipment(unit: Equipment, heights: Sequence[float]) -> Iterator[_Part]:
    """The footprint over the heights of its conductors; loops show as conductors."""
    if isinstance(unit, Transformer | Board) and len(unit.footprint) >= 3 and heights:
        area = area_of(unit.footprint)
        yield "equipment", "", unit.id, prism(area, min(heights), max(heights))


def _zone(layout: Layout, zone: Zone) -> Iterator[_Part]:
    """From the lowest to the highest height that counts; nothing without a floor."""
    floor = zone_floor(layout, zone)
    if floor is None:
        return
    low, high = min(zone.heights), max(zone.heights)
    if zone.rule == "maximum over volume" and zone.volume is not None:
        low, high = zone.volume
    yield "zone", "", zone.id, prism(area_of(zone.outline), floor + low, floor + high)


def _label(conductor: Conductor) -> str:
    labels = dict.fromkeys(load.label for load in conductor.loads)
    if not labels:
        return NOTHING
    return next(iter(labels)) if len(labels) == 1 else SEVERAL


def _labels(layout: Layout, conductors: Sequence[Conductor]) -> Iterator[Label]:
    for run in layout.runs:
        yield _run_label(run)
    for conductor in conductors:
        if conductor.role == "run":
            letters = " + ".join(dict.fromkeys(x.label for x in conductor.loads))
            if letters:
                at, length = _middle(conductor.path)
                yield Label("conductor", conductor.item, letters, at, length)
    for receptor in layout.receptors:
        yield Label("receptor", receptor.id, receptor.title, receptor.at, 0.0)
    for zone in layout.zones:
        floor = zone_floor(layout, zone)
        if floor is not None:
            top = floor + max(zone.heights)
            yield _area_label("zone", zone.id, zone.title, zone.outline, top)
    for room in layout.rooms:
        yield _area_label("room", room.id, room.title, room.outline, room.floor_level)
    for unit in layout.equipment:
        own = [c.path for c in conductors if c.item == unit.id]
        if own:
            points = np.concatenate(own)
            x, y, _ = points.mean(axis=0).tolist()
            size = float(np.linalg.norm(np.ptp(points, axis=0)))
            at = (x, y, float(points[:, 2].max()))
            yield Label("equipment", unit.id, unit.title, at, size)


def _run_label(run: Run) -> Label:
    at, length = _middle(np.array(run.route))
    return Label("run", run.id, run.title, at, length)


def _area_label(
    kind: Literal["zone", "room"],
    item: str,
    title: str,
    outline: Sequence[tuple[float, float]],
    z: float,
) -> Label:
    points = np.array(outline)
    inside = area_of(tuple(outline)).representative_point()
    size = float(np.linalg.norm(np.ptp(points, axis=0)))
    if inside.is_empty:
        x, y = points.mean(axis=0).tolist()
        return Label(kind, item, title, (x, y, z), size)
    return Label(kind, item, title, (float(inside.x), float(inside.y), z), size)


def _middle(path: Floats) -> tuple[Point3, float]:
    """The middle of the longest leg, and its length. [m]"""
    steps = np.diff(path, axis=0)
    lengths = np.linalg.norm(steps, axis=1)
    k = int(lengths.argmax())
    x, y, z = (path[k] + 0.5 * steps[k]).tolist()
    return (x, y, z), float(lengths[k])
