"""Solids as triangles: upright prisms, level sheets, conductors in their true section.

Corners go counter-clockwise seen from outside, so that normals point outwards.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry import MultiPolygon, Polygon
from shapely.geometry.polygon import orient

from engine.conductor import Conductor
from engine.run_conductors import N_KEPT, Same
from engine.runs import Bar

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

#: Sides of a round conductor.
N_SIDES = 12

_ANGLES = np.linspace(0.0, 2.0 * np.pi, N_SIDES, endpoint=False)
_AROUND = np.stack([np.cos(_ANGLES), np.sin(_ANGLES)], axis=1)
_CORNERS = np.array([(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)])


@dataclass(frozen=True, eq=False)
class Solid:
    """Triangles.

    Attributes
    ----------
    vertices : (n, 3) float
        [m]
    faces : (m, 3) int
        Places of the corners in `vertices`.
    """

    vertices: Floats
    faces: Integers

    @property
    def corners(self) -> Floats:
        """(m, 3, 3) corners of the triangles. [m]"""
        return self.vertices[self.faces]

    @property
    def normals(self) -> Floats:
        """(m, 3) unit normals, outwards; zero for a triangle without area."""
        return normals(self.corners)

    @property
    def volume(self) -> float:
        """Enclosed by a closed surface; negative where it is inside out. [m³]"""
        a, b, c = np.moveaxis(self.corners, 1, 0)
        return float(np.sum(a * np.cross(b, c)) / 6.0)


def normals(corners: Floats) -> Floats:
    """(m, 3) unit normals of (m, 3, 3) triangles; zero without area."""
    a, b, c = np.moveaxis(corners, 1, 0)
    across = np.cross(b - a, c - a)
    lengths = np.linalg.norm(across, axis=1, keepdims=True)
    found: Floats = across / np.where(lengths > 0, lengths, 1.0)
    return found


def joined(solids: list[Solid]) -> Solid:
    """Several solids as one set of triangles."""
    if not solids:
        return Solid(np.zeros((0, 3)), np.zeros((0, 3), np.int64))
    starts = np.cumsum([0, *(len(solid.vertices) for solid in solids[:-1])])
    faces = [solid.faces + start for solid, start in zip(solids, starts, strict=True)]
    vertices = np.concatenate([solid.vertices for solid in solids])
    return Solid(vertices, np.concatenate(faces))


def sheet(area: Polygon | MultiPolygon, z: float) -> Solid:
    """A level area, seen from above; nothing where it has none."""
    flat = shapely.get_parts(shapely.constrained_delaunay_triangles(area))
    if not len(flat) or area.area <= 0:
        return joined([])
    rings = shapely.get_coordinates([orient(triangle) for triangle in flat])
    points = rings.reshape(-1, 4, 2)[:, :3].reshape(-1, 2)
    vertices = np.column_stack([points, np.full(len(points), z)])
    return Solid(vertices, np.arange(len(points)).reshape(-1, 3))


def walls(area: Polygon | MultiPolygon, z_from: float, z_to: float) -> Solid:
    """The upright faces over the outline of an area, holes included."""
    found = []
    for part in shapely.get_parts(area):
        turned = orient(part)
        for ring in (turned.exterior, *turned.interiors):
            points = shapely.get_coordinates(ring)[:-1]
            n = len(points)
            low = np.column_stack([points, np.full(n, z_from)])
            high = np.column_stack([points, np.full(n, z_to)])
            found.append(Solid(np.concatenate([low, high]), _band(n)))
    return joined(found)


def prism(area: Polygon | MultiPolygon, z_from: float, z_to: float) -> Solid:
    """An upright prism; without any height a sheet."""
    if z_to <= z_from:
        return sheet(area, z_from)
    top, bottom = sheet(area, z_to), sheet(area, z_from)
    under = Solid(bottom.vertices, bottom.faces[:, ::-1])
    return joined([walls(area, z_from, z_to), top, under])


def conductor_solid(conductor: Conductor) -> Solid:
    """A conductor in its true section along its path; the identical one again."""
    return _conductor_solid(Same(conductor))


@lru_cache(maxsize=2 * N_KEPT)
def _conductor_solid(same: Same[Conductor]) -> Solid:
    conductor = same.value
    shape = conductor.shape
    if isinstance(shape, Bar):
        around = 0.5 * np.array([shape.width, shape.thickness]) * _CORNERS
    else:
        around = 0.5 * shape.diameter * _AROUND
    along = conductor.path[1] - conductor.path[0]
    width, thickness = conductor.axes[0]
    if np.cross(width, thickness) @ along < 0:
        around = around[::-1]
    rings = conductor.path[:, None] + np.einsum("ka,nax->nkx", around, conductor.axes)
    n, k = rings.shape[:2]
    bands = [_band(k) + leg * k for leg in range(n - 1)]
    # A section is convex: a fan closes each end.
    fan = np.column_stack([np.zeros(k - 2, int), np.arange(1, k - 1), np.arange(2, k)])
    ends = [fan[:, ::-1], fan + (n - 1) * k]
    return Solid(rings.reshape(-1, 3), np.concatenate([*bands, *ends]))


def _band(n: int) -> Integers:
    """(2 n, 3) faces between a ring of n vertices and the next ring of as many."""
    here = np.arange(n)
    following = (here + 1) % n
    lower = np.column_stack([here, following, following + n])
    upper = np.column_stack([here, following + n, here + n])
    return np.concatenate([lower, upper])
