"""The plan as shapes, for screen and paper: plain values in metres, no colours.

x runs to the right and y upwards, as in the layout. What lies above what, and in which
ink, is the painter's business; what is where, and how wide, is settled here once.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from itertools import pairwise
from operator import is_
from typing import Literal, TypeVar

import numpy as np
import numpy.typing as npt
from shapely.geometry import Polygon

from engine.conductor import Conductor, bundles_of
from engine.equipment import Board, ConductorLoop, Equipment, Transformer
from engine.layout import Layout
from engine.outlines import Area, Line, Point, band, bar_footprint
from engine.places import Enclosure, Receptor, Room, Zone
from engine.runs import Run
from engine.sight import PLAN, SIGHTS, Sight

__all__ = [
    "Area",
    "Line",
    "Mark",
    "Place",
    "Plan",
    "Point",
    "Rise",
    "RunShape",
    "Strand",
    "bar_footprint",
    "parted",
    "plan",
    "run_shape",
]

#: A leg that moves less than this in the picture is drawn as a rise or a fall. [m]
_END_ON = 1e-3

# By identity, which a held value keeps from being used again. Plain dictionaries:
# a drag asks for hundreds of unchanged runs at every step.
_Key = tuple[int, str]
_AnyKey = TypeVar("_AnyKey")
_Kept = TypeVar("_Kept")
_N_KEPT = 6000
_RUNS: dict[_Key, tuple[Run, Sequence[Conductor], RunShape]] = {}
_STRANDS: dict[str, dict[int, tuple[Sequence[Conductor], tuple[Strand, ...]]]] = {}


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
        outline = Polygon(self.area.outline).buffer(0)
        if outline.is_empty:
            x, y = np.mean(self.area.outline, axis=0).tolist()
            return (x, y)
        inside = outline.representative_point()
        return (float(inside.x), float(inside.y))


@dataclass(frozen=True)
class Rise:
    """A leg seen end-on: on plan a vertical one, going up or down along the current.

    On an elevation `z_from` and `z_to` are coordinates along its `axis`; along a drawn
    line that is the "depth" behind it.
    """

    at: Point
    z_from: float
    z_to: float
    axis: str = "z"

    @property
    def goes_up(self) -> bool:
        """Whether the current's direction is that of the rising axis."""
        return self.z_to > self.z_from

    @property
    def comes_nearer(self) -> bool:
        """Whether the current flows towards the viewer."""
        return self.goes_up == (self.axis == "z")


@dataclass(frozen=True)
class Strand:
    """One conductor in its true width."""

    key: str
    item: str
    #: What it carries, "L1"; "N + PE" when several; empty when nothing.
    letters: str
    role: Literal["run", "joint link", "closing link", "equipment"]
    line: Line
    levels: tuple[float, float]
    #: Grows towards the viewer; what is nearer is drawn later. [m]
    nearness: float
    seen: tuple[Conductor, Sight] = field(repr=False, compare=False)

    @cached_property
    def areas(self) -> tuple[Area, ...]:
        """Its true outline; made when somebody is near enough to see it."""
        return bar_footprint(*self.seen)


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
    """A receptor: where it is, and where that shows in the picture. [m]"""

    item: str
    title: str
    at: tuple[float, float, float]
    seen: Point


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
            yield mark.seen


def plan(layout: Layout, conductors: Sequence[Conductor]) -> Plan:
    """The plan of a layout.

    Parameters
    ----------
    layout : Layout
    conductors : sequence of Conductor
        The conductors of that layout; without them, runs show as routes only.
    """
    parts = parted(conductors, PLAN)
    return Plan(
        rooms=tuple(_room(room) for room in layout.rooms),
        enclosures=tuple(_enclosure(enclosure) for enclosure in layout.enclosures),
        equipment=tuple(
            place
            for unit in layout.equipment
            if (place := _footprint(unit)) is not None
        ),
        equipment_strands=parts.equipment,
        runs=tuple(run_shape(run, parts.runs.get(run.id, ())) for run in layout.runs),
        links=parts.links,
        zones=tuple(_zone(zone, layout) for zone in layout.zones),
        receptors=tuple(_mark(receptor) for receptor in layout.receptors),
    )


@dataclass(frozen=True)
class Parted:
    """Conductors by what they stand for: those of runs, and shapes of the others."""

    runs: dict[str, tuple[Conductor, ...]]
    equipment: tuple[Strand, ...]
    links: tuple[Strand, ...]


def parted(conductors: Sequence[Conductor], sight: Sight) -> Parted:
    """Conductors by what they stand for."""
    runs: dict[str, tuple[Conductor, ...]] = {}
    equipment: list[Strand] = []
    links: list[Strand] = []
    for bundle in bundles_of(conductors):
        role, item = bundle[0].role, bundle[0].item
        if role == "run":
            before = runs.get(item)
            runs[item] = bundle if before is None else before + bundle
        else:
            shapes = _bundle_strands(bundle, sight)
            (equipment if role == "equipment" else links).extend(shapes)
    return Parted(runs, tuple(equipment), tuple(links))


def _bundle_strands(bundle: Sequence[Conductor], sight: Sight) -> tuple[Strand, ...]:
    """The shapes of conductors made together; the identical ones for the same."""
    of_sight = _strands_of(sight)
    kept = of_sight.get(id(bundle))
    if kept is not None and kept[0] is bundle:
        return kept[1]
    made = tuple([_strand(conductor, sight) for conductor in bundle])
    _keep(of_sight, id(bundle), (bundle, made))
    return made


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
    return Mark(receptor.id, receptor.title, receptor.at, receptor.at[:2])


def _footprint(unit: Equipment) -> Place | None:
    if isinstance(unit, ConductorLoop):
        outline: Line = tuple((x, y) for x, y, _ in unit.path)
        levels = (min(p[2] for p in unit.path), max(p[2] for p in unit.path))
        return Place(unit.id, unit.title, "equipment", Area(outline), levels)
    assert isinstance(unit, Transformer | Board)
    if len(unit.footprint) < 3:
        return None
    return Place(unit.id, unit.title, "equipment", Area(unit.footprint))


def run_shape(
    run: Run, conductors: Sequence[Conductor], sight: Sight = PLAN
) -> RunShape:
    """A run as seen; the identical shape again while run and conductors are the same.

    Parameters
    ----------
    run : Run
    conductors : sequence of Conductor
        The run's own, without links; without any, it shows as its route.
    """
    kept = _RUNS.get((id(run), sight.name))
    if kept is not None and kept[0] is run and _same(kept[1], conductors):
        return kept[2]
    made = _run_shape(run, conductors, sight)
    _keep(_RUNS, (id(run), sight.name), (run, conductors, made))
    return made


def _run_shape(run: Run, own: Sequence[Conductor], sight: Sight) -> RunShape:
    heights = [float(z) for c in own for z in c.path[:, 2]] or [p[2] for p in run.route]
    return RunShape(
        item=run.id,
        title=run.title,
        kind=run.kind,
        route=_line(sight.seen(run.route)),
        areas=band(own, sight),
        strands=tuple([_strand(c, sight) for c in own]),
        rises=tuple(_rises(run, sight)),
        levels=(min(heights), max(heights)),
    )


def _rises(run: Run, sight: Sight) -> Iterable[Rise]:
    along = sight.axis
    if along == "depth":
        levels = sight.depth(run.route).tolist()
    else:
        levels = [vertex["xyz".index(along)] for vertex in run.route]
    seen = _line(sight.seen(run.route))
    for (a, b), (p, q) in zip(pairwise(levels), pairwise(seen), strict=True):
        if math.dist(p, q) < _END_ON and abs(b - a) > _END_ON:
            yield Rise(p, a, b, along)


def _strands_of(
    sight: Sight,
) -> dict[int, tuple[Sequence[Conductor], tuple[Strand, ...]]]:
    if sight.is_along_line and sight.name not in _STRANDS:
        # A line that is dragged is another sight at every step: the last one counts.
        for name in list(_STRANDS):
            if name not in SIGHTS:
                _STRANDS.pop(name, None)
    return _STRANDS.setdefault(sight.name, {})


def _strand(conductor: Conductor, sight: Sight) -> Strand:
    labels = dict.fromkeys(load.label for load in conductor.loads)
    z = conductor.path[:, 2]
    return Strand(
        key=conductor.key,
        item=conductor.item,
        letters=" + ".join(labels),
        role=conductor.role,
        line=_line(sight.seen(conductor.path)),
        levels=(float(z.min()), float(z.max())),
        nearness=-float(sight.depth(conductor.path).min()),
        seen=(conductor, sight),
    )


def _same(one: Sequence[object], other: Sequence[object]) -> bool:
    if one is other:
        return True
    return len(one) == len(other) and all(map(is_, one, other))


def _keep(kept: dict[_AnyKey, _Kept], key: _AnyKey, value: _Kept) -> None:
    """Remember a value, dropping the oldest ones when there are very many."""
    kept[key] = value
    while len(kept) > _N_KEPT:
        del kept[next(iter(kept))]


def _line(points: npt.NDArray[np.float64]) -> Line:
    return tuple((float(x), float(y)) for x, y in points)
