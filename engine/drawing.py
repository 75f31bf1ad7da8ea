"""The plan as shapes, for screen and paper: plain values in metres, no colours.

x runs to the right and y upwards, as in the layout. What lies above what, and in which
ink, is the painter's business; what is where, and how wide, is settled here once.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np
import shapely
from shapely.geometry import MultiPoint, Polygon

from engine.conductor import Conductor
from engine.equipment import Board, ConductorLoop, Equipment, Transformer
from engine.layout import Layout
from engine.places import Enclosure, Receptor, Room, Zone
from engine.runs import Bar, Run

Point = tuple[float, float]
Line = tuple[Point, ...]

#: A leg that moves less than this on plan is drawn as a rise or a fall. [m]
_VERTICAL = 1e-3

_CIRCLE = np.linspace(0.0, 2.0 * math.pi, 16, endpoint=False)


@dataclass(frozen=True)
class Area:
    """A filled shape on plan: its outline and the holes in it. [m]"""

    outline: Line
    holes: tuple[Line, ...] = ()


@dataclass(frozen=True)
class Place:
    """A room, an enclosure, a zone or the footprint of equipment."""

    item: str
    title: str
    kind: Literal["room", "enclosure", "zone", "equipment"]
    area: Area
    #: Lowest and highest level where they are stated. [m above the datum]
    levels: tuple[float, float] | None = None
    #: A closed enclosure: nobody stands in it.
    closed: bool = False

    @property
    def label_place(self) -> Point:
        """A point well inside the outline."""
        inside = Polygon(self.area.outline).buffer(0).representative_point()
        return (float(inside.x), float(inside.y))


@dataclass(frozen=True)
class Rise:
    """A vertical leg, seen from above: going up or down along the current."""

    at: Point
    z_from: float
    z_to: float

    @property
    def goes_up(self) -> bool:
        """Whether the current's direction is upwards."""
        return self.z_to > self.z_from


@dataclass(frozen=True)
class Strand:
    """One conductor in its true width."""

    key: str
    item: str
    #: What it carries, "L1"; "N + PE" when several; empty when nothing.
    letters: str
    role: Literal["run", "joint link", "closing link", "equipment"]
    line: Line
    areas: tuple[Area, ...]
    levels: tuple[float, float]


@dataclass(frozen=True)
class RunShape:
    """A run: its route, its true outline, its conductors, its rises and falls."""

    item: str
    title: str
    kind: str
    route: Line
    areas: tuple[Area, ...]
    strands: tuple[Strand, ...]
    rises: tuple[Rise, ...]
    levels: tuple[float, float]

    @property
    def label_place(self) -> Point:
        """The middle of the longest leg on plan."""
        legs = [(math.dist(a, b), a, b) for a, b in pairwise(self.route)]
        _, a, b = max(legs, key=lambda leg: leg[0])
        return (0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1]))


@dataclass(frozen=True)
class Mark:
    """A receptor. [m]"""

    item: str
    title: str
    at: tuple[float, float, float]


@dataclass(frozen=True)
class Plan:
    """Everything of a layout that shows on plan."""

    rooms: tuple[Place, ...]
    enclosures: tuple[Place, ...]
    equipment: tuple[Place, ...]
    equipment_strands: tuple[Strand, ...]
    runs: tuple[RunShape, ...]
    #: Links of joints, and assumed closing links at free ends.
    links: tuple[Strand, ...]
    zones: tuple[Place, ...]
    receptors: tuple[Mark, ...]

    def bounds(self) -> tuple[float, float, float, float] | None:
        """x and y from and to of everything; None when nothing is drawn. [m]"""
        points = [*self._points()]
        if not points:
            return None
        low = np.min(points, axis=0)
        high = np.max(points, axis=0)
        return float(low[0]), float(low[1]), float(high[0]), float(high[1])

    def _points(self) -> Iterable[Point]:
        for place in (*self.rooms, *self.enclosures, *self.equipment, *self.zones):
            yield from place.area.outline
        for strand in (*self.equipment_strands, *self.links):
            yield from strand.line
        for run in self.runs:
            yield from run.route
            for area in run.areas:
                yield from area.outline
        for mark in self.receptors:
            yield mark.at[:2]


def plan(layout: Layout, conductors: Sequence[Conductor]) -> Plan:
    """The plan of a layout.

    Parameters
    ----------
    layout : Layout
    conductors : sequence of Conductor
        The conductors of that layout; without them, runs show as routes only.
    """
    of_item: dict[str, list[Conductor]] = {}
    for conductor in conductors:
        of_item.setdefault(conductor.item, []).append(conductor)
    return Plan(
        rooms=tuple(_room(room) for room in layout.rooms),
        enclosures=tuple(_enclosure(enclosure) for enclosure in layout.enclosures),
        equipment=tuple(
            place
            for unit in layout.equipment
            if (place := _footprint(unit)) is not None
        ),
        equipment_strands=tuple(
            _strand(c) for c in conductors if c.role == "equipment"
        ),
        runs=tuple(_run(run, of_item.get(run.id, ())) for run in layout.runs),
        links=tuple(_strand(c) for c in conductors if c.role.endswith("link")),
        zones=tuple(_zone(zone, layout) for zone in layout.zones),
        receptors=tuple(_mark(receptor) for receptor in layout.receptors),
    )


def bar_footprint(conductor: Conductor) -> tuple[Area, ...]:
    """The true outline of a conductor on plan, over all its legs."""
    return _areas(_leg_hulls(_corners(conductor)))


def _room(room: Room) -> Place:
    levels = (room.floor_level, room.ceiling_level)
    return Place(room.id, room.title, "room", Area(room.outline), levels)


def _enclosure(enclosure: Enclosure) -> Place:
    return Place(
        enclosure.id,
        enclosure.title,
        "enclosure",
        Area(enclosure.footprint),
        (enclosure.z_from, enclosure.z_to),
        enclosure.state == "closed",
    )


def _zone(zone: Zone, layout: Layout) -> Place:
    floor = zone.floor_level
    if floor is None:
        floor = next(
            (s.floor_level for s in layout.storeys if s.id == zone.storey), None
        )
    levels = None
    if floor is not None:
        levels = (floor + min(zone.heights), floor + max(zone.heights))
    return Place(zone.id, zone.title, "zone", Area(zone.outline), levels)


def _mark(receptor: Receptor) -> Mark:
    return Mark(receptor.id, receptor.title, receptor.at)


def _footprint(unit: Equipment) -> Place | None:
    if isinstance(unit, ConductorLoop):
        outline: Line = tuple((x, y) for x, y, _ in unit.path)
        levels = (min(p[2] for p in unit.path), max(p[2] for p in unit.path))
        return Place(unit.id, unit.title, "equipment", Area(outline), levels)
    assert isinstance(unit, Transformer | Board)
    if len(unit.footprint) < 3:
        return None
    return Place(unit.id, unit.title, "equipment", Area(unit.footprint))


def _run(run: Run, conductors: Sequence[Conductor]) -> RunShape:
    own = [c for c in conductors if c.role == "run"]
    heights = [float(z) for c in own for z in c.path[:, 2]] or [p[2] for p in run.route]
    return RunShape(
        item=run.id,
        title=run.title,
        kind=run.kind,
        route=tuple((x, y) for x, y, _ in run.route),
        areas=_run_areas(own),
        strands=tuple(_strand(c) for c in own),
        rises=tuple(_rises(run)),
        levels=(min(heights), max(heights)),
    )


def _rises(run: Run) -> Iterable[Rise]:
    for a, b in pairwise(run.route):
        if math.dist(a[:2], b[:2]) < _VERTICAL and abs(b[2] - a[2]) > _VERTICAL:
            yield Rise((a[0], a[1]), a[2], b[2])


def _strand(conductor: Conductor) -> Strand:
    labels = dict.fromkeys(load.label for load in conductor.loads)
    z = conductor.path[:, 2]
    return Strand(
        key=conductor.key,
        item=conductor.item,
        letters=" + ".join(labels),
        role=conductor.role,
        line=tuple((float(x), float(y)) for x, y in conductor.path[:, :2]),
        areas=bar_footprint(conductor),
        levels=(float(z.min()), float(z.max())),
    )


def _corners(conductor: Conductor) -> np.ndarray:
    """Outline of the section at every vertex, on plan: (n, k, 2)."""
    shape = conductor.shape
    if isinstance(shape, Bar):
        half = 0.5 * np.array([shape.width, shape.thickness])
        around = half * np.array([(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)])
    else:
        around = 0.5 * shape.diameter * np.stack([np.cos(_CIRCLE), np.sin(_CIRCLE)], 1)
    offsets = np.einsum("ka,nax->nkx", around, conductor.axes)
    return np.asarray((conductor.path[:, None, :] + offsets)[:, :, :2])


def _leg_hulls(corners: np.ndarray) -> list[Polygon]:
    """Convex outline of each leg, given the points of the section at its ends."""
    hulls = []
    for start, end in pairwise(corners):
        hull = MultiPoint(np.concatenate([start, end])).convex_hull
        if isinstance(hull, Polygon):
            hulls.append(hull)
    return hulls


def _run_areas(conductors: Sequence[Conductor]) -> tuple[Area, ...]:
    """The band that all conductors of a run fill together."""
    if not conductors:
        return ()
    corners = [_corners(c) for c in conductors]
    if len({len(c) for c in corners}) > 1:
        return _areas([hull for c in corners for hull in _leg_hulls(c)])
    return _areas(_leg_hulls(np.concatenate(corners, axis=1)))


def _areas(polygons: Sequence[Polygon]) -> tuple[Area, ...]:
    if not polygons:
        return ()
    merged = shapely.union_all(polygons)
    return tuple(
        Area(
            _ring(part.exterior.coords), tuple(_ring(h.coords) for h in part.interiors)
        )
        for part in shapely.get_parts(merged)
        if isinstance(part, Polygon)
    )


def _ring(coordinates: Iterable[Sequence[float]]) -> Line:
    """The points of a ring without its repeated last one."""
    points = [(float(p[0]), float(p[1])) for p in coordinates]
    return tuple(points[:-1])
