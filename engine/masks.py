"""Places where nobody is: inside conductors, too near to them, in closed enclosures.

At an enclosure that is open for work nobody is within its front clearance, where one
is typed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry import Polygon

from engine import field
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.layout import Layout
from engine.motions import cos_sin
from engine.places import Enclosure
from engine.reach import within_reach
from engine.runs import Bar, Round
from engine.sampling import area_of
from engine.surface_cells import Cells, Fineness, cells_in_outline, joined, walls

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: A point this near to a mask's surface lies on it, and is not masked. [m]
_ON_SURFACE = 1e-9

#: Cosine to the front's way of a side that belongs to the front: up to 45° off it.
_FACING = 0.5**0.5


@dataclass(frozen=True, eq=False)
class Keepout:
    """An upright prism that masks the points strictly inside it.

    Attributes
    ----------
    outline : Polygon
        On plan. [m]
    z_from, z_to : float
        [m]
    is_open : bool
        What is kept clear of an enclosure open for work, its footprint included; else
        the footprint of a closed one.
    """

    item: str
    title: str
    outline: Polygon
    z_from: float
    z_to: float
    is_open: bool = False

    @property
    def key(self) -> tuple[str, bool]:
        """Equal for equal prisms of the cases of one layout."""
        return self.item, self.is_open

    @property
    def words(self) -> str:
        """What a place inside lies in."""
        if self.is_open:
            return f"the front clearance of “{self.title}”, open for work"
        return f"the closed enclosure “{self.title}”"

    def masks(self, points: Floats) -> Bools:
        """(n,) whether each point lies inside; its faces do not count."""
        found: Bools = (points[:, 2] > self.z_from + _ON_SURFACE) & (
            points[:, 2] < self.z_to - _ON_SURFACE
        )
        if np.any(found):
            inner = points[found]
            inside = shapely.contains_xy(self.outline, inner[:, 0], inner[:, 1])
            found[found] = inside
        return found


def open_for_work(enclosure: Enclosure, case: LoadCase | None) -> bool:
    """Whether people can reach into the enclosure, in general or in this case."""
    in_case = case is not None and enclosure.id in case.open_enclosures
    return enclosure.state == "open for work" or in_case


def keepouts(layout: Layout, case: LoadCase | None = None) -> tuple[Keepout, ...]:
    """Closed enclosures, and what is kept clear of those that are open for work."""
    found = []
    for e in layout.enclosures:
        is_open = open_for_work(e, case)
        if is_open and not e.front_clearance:
            continue
        area = area_of(e.footprint)
        outline = _kept_clear(area, e) if is_open else area
        shapely.prepare(outline)
        found.append(Keepout(e.id, e.title, outline, e.z_from, e.z_to, is_open))
    return tuple(found)


def _kept_clear(area: Polygon, enclosure: Enclosure) -> Polygon:
    """The footprint and the band of the clearance before its front.

    Before every side where no front is stated. The band stands straight before the
    sides that face the front's way: beside them the panels stay closed.
    """
    by = enclosure.front_clearance or 0.0
    if enclosure.front is None or area.is_empty:
        return area.buffer(by, quad_segs=16)
    corners = shapely.get_coordinates(shapely.orient_polygons(area).exterior)
    # Outside is to the right of a side walked counter-clockwise.
    out = np.diff(corners, axis=0)[:, ::-1] * (1.0, -1.0)
    out /= np.linalg.norm(out, axis=1, keepdims=True)
    facing = out @ np.array(cos_sin(enclosure.front))
    is_front = facing >= min(_FACING, float(facing.max())) - 1e-9
    bands = [
        Polygon([a, b, b + by * n, a + by * n])
        for (a, b), n, is_one in zip(pairwise(corners), out, is_front, strict=True)
        if is_one
    ]
    made = shapely.union_all([area, *bands])
    # Bands share a side with the footprint; should rounding part them, it alone masks.
    return made if isinstance(made, Polygon) else area


def masked(
    conductors: Sequence[Conductor],
    closed: Sequence[Keepout],
    points: Floats,
    clearance: float = 0.0,
) -> Bools:
    """Where no value counts.

    Parameters
    ----------
    conductors
        Their inside is always masked.
    closed
        Enclosures that are closed.
    points : (n, 3) float
        [m]
    clearance : float
        Kept from every conductor's surface; a point at just this distance counts. [m]

    Returns
    -------
    (n,) bool
    """
    near = within_reach(conductors, points, clearance)
    return masked_at(distances_to(near, points), closed, points, clearance)


def distances_to(conductors: Sequence[Conductor], points: Floats) -> Floats:
    """(n,) to the nearest conductor's surface, infinite without any. [m]"""
    if not conductors:
        return np.full(len(points), np.inf)
    return field.surface_distance(conductors, points)


def masked_at(
    distances: Floats, closed: Sequence[Keepout], points: Floats, clearance: float
) -> Bools:
    """As `masked`, from the distances (n,) to the nearest conductor's surface."""
    found: Bools = (distances == 0) | (distances < clearance * (1 - 1e-9))
    for keepout in closed:
        found = found | keepout.masks(points)
    return found


def mask_surfaces(
    conductors: Sequence[Conductor],
    closed: Sequence[Keepout],
    clearance: float,
    fineness: Fineness,
) -> Cells:
    """Points on the surfaces that bound the masks, for the skin of a volume.

    Conductors have a surface at the clearance around every leg and vertex, enclosures
    their faces. Points may lie inside other masks: mask them again.
    """
    parts = [_around(conductor, clearance) for conductor in conductors]
    for keepout in closed:
        z = (keepout.z_from, keepout.z_to)
        if keepout.outline.is_empty or not z[0] < z[1]:
            continue
        parts.append(walls(keepout.outline, z, fineness))
        parts += [cells_in_outline(keepout.outline, level, fineness) for level in z]
    return joined(parts) if parts else Cells(np.zeros((0, 3)), np.zeros(0), np.zeros(0))


def _around(conductor: Conductor, clearance: float) -> Cells:
    """Rings around the legs and a ball about each vertex, at the clearance."""
    path, shape = conductor.path, conductor.shape
    distance = max(clearance, 1e-6)
    around = _section_ring(shape, distance)
    step = max(distance / 2, float(np.max(np.abs(around))) / 4)
    points = []
    for k, length in enumerate(np.linalg.norm(np.diff(path, axis=0), axis=1)):
        n = max(1, min(2000, int(np.ceil(length / step))))
        part = (np.arange(n + 1) / n)[:, None, None]
        u = (1 - part) * conductor.axes[k, 0] + part * conductor.axes[k + 1, 0]
        v = (1 - part) * conductor.axes[k, 1] + part * conductor.axes[k + 1, 1]
        middle = path[k] + part * (path[k + 1] - path[k])
        ring = middle + around[:, :1] * u + around[:, 1:] * v
        points.append(ring.reshape(-1, 3))
    # No end is nearer than the ball around the section's corners.
    ball = _ball() * np.max(np.linalg.norm(around, axis=1))
    points.append((path[[0, -1], None, :] + ball).reshape(-1, 3))
    all_points = np.concatenate(points)
    n = len(all_points)
    return Cells(all_points, np.zeros(n), np.full(n, step))


def _section_ring(shape: Round | Bar, distance: float) -> Floats:
    """(n, 2) places in the section around its shape, at `distance` and a hair more."""
    if isinstance(shape, Round):
        angle = np.arange(16) * (np.pi / 8)
        radius = shape.diameter / 2 + distance * (1 + 1e-6)
        return radius * np.column_stack([np.cos(angle), np.sin(angle)])
    w, t = shape.width / 2, shape.thickness / 2
    # The corners' chords lie inside their arcs by up to 0.0075 % of the distance.
    ring = (
        shapely.box(-w, -t, w, t).buffer(distance * (1 + 2e-4), quad_segs=64).exterior
    )
    part = np.arange(24) / 24
    places = shapely.line_interpolate_point(ring, part, normalized=True)
    xy: Floats = shapely.get_coordinates(places)
    return xy


def _ball(n: int = 32) -> Floats:
    """(n, 3) unit vectors, evenly spread (golden spiral)."""
    k = np.arange(n) + 0.5
    z = 1 - 2 * k / n
    angle = np.pi * (1 + np.sqrt(5)) * k
    r = np.sqrt(1 - z * z)
    return np.column_stack([r * np.cos(angle), r * np.sin(angle), z])
