"""Surfaces cut into pieces that are finer near conductors, for searching maxima."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry import Polygon

from engine.sampling import Plane, check_count, intervals, vertical

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Fineness:
    """How finely surfaces are cut: coarse in general, finer near conductors.

    Attributes
    ----------
    step, finest : float
        Coarsest and finest piece. [m]
    distances : (n, 3) points -> (n,)
        To the nearest conductor's surface. None: no conductors. [m]
    masked_within : float
        Nearer to a conductor nothing is asked, so nothing is cut finely. [m]
    """

    step: float
    finest: float
    distances: Callable[[Floats], Floats] | None = None
    masked_within: float = 0.0

    def too_coarse(self, centres: Floats, side: float, reach: float) -> Bools:
        """Which pieces are longer than half the distance to a conductor.

        The distance is from the nearest place in the piece, `reach` from its centre.
        """
        coarse: Bools = np.zeros(len(centres), bool)
        if self.distances is None or side / 2 < self.finest:
            return coarse
        distances = self.distances(centres)
        coarse = side > (distances - reach) / 2
        coarse &= distances + reach > self.masked_within
        return coarse


@dataclass(frozen=True, eq=False)
class Cells:
    """Points that each stand for a piece of a surface.

    Attributes
    ----------
    points : (n, 3) float
        [m]
    areas : (n,) float
        Of the pieces; 0 for points on an edge that stand for no piece. [m²]
    steps : (n,) float
        Longest side of each piece. [m]
    """

    points: Floats
    areas: Floats
    steps: Floats


def joined(parts: Sequence[Cells]) -> Cells:
    """Several samples as one."""
    return Cells(
        np.concatenate([part.points for part in parts]),
        np.concatenate([part.areas for part in parts]),
        np.concatenate([part.steps for part in parts]),
    )


def cells_on_plane(plane: Plane, fineness: Fineness) -> Cells:
    """Pieces of a rectangle that are finer near conductors.

    A piece longer than half the distance to the nearest conductor is cut in four, down
    to the finest. The edges of the rectangle have points of their own.

    Raises
    ------
    UserError
        When it takes too many points.
    """
    a, b = np.array(plane.first, np.float64), np.array(plane.second, np.float64)
    origin = np.array(plane.origin)
    lengths = np.array([np.linalg.norm(a), np.linalg.norm(b)])

    def at(uv: Floats) -> Floats:
        return origin + uv[:, :1] * a + uv[:, 1:] * b

    uv, sizes = _subdivided(at, lengths, fineness)
    sides = sizes * lengths
    inner = Cells(at(uv), sides.prod(axis=1), sides.max(axis=1))
    corners = np.array([origin, origin + a, origin + a + b, origin + b, origin])
    return joined([inner, _edge(corners, fineness)])


def _subdivided(
    at: Callable[[Floats], Floats], lengths: Floats, fineness: Fineness
) -> tuple[Floats, Floats]:
    """Centres (n, 2) and sizes (n, 2) of pieces of the unit square."""
    n = np.array([intervals(float(length), fineness.step) for length in lengths])
    check_count(float(n[0]) * float(n[1]), "The search of a surface")
    u, v = ((np.arange(k) + 0.5) / k for k in n)
    centres = np.stack(np.meshgrid(u, v, indexing="xy"), axis=-1).reshape(-1, 2)
    size = 1.0 / n
    done, sizes, total = [], [], 0
    while len(centres):
        sides = size * lengths
        coarse = fineness.too_coarse(
            at(centres), float(np.max(sides)), float(np.hypot(*sides)) / 2
        )
        kept = centres[~coarse]
        total += len(kept)
        check_count(
            total + 4 * int(np.count_nonzero(coarse)), "The search of a surface"
        )
        done.append(kept)
        sizes.append(np.broadcast_to(size, (len(kept), 2)))
        size = size / 2
        quarters = np.array([(-0.5, -0.5), (0.5, -0.5), (-0.5, 0.5), (0.5, 0.5)]) * size
        centres = (centres[coarse, None, :] + quarters).reshape(-1, 2)
    return np.concatenate(done), np.concatenate(sizes)


def _edge(path: Floats, fineness: Fineness) -> Cells:
    """Points along a closed edge, finer near conductors, each standing for no area."""
    points, steps = [path[:-1]], [np.full(len(path) - 1, fineness.finest)]
    for a, b in pairwise(path):
        length = float(np.linalg.norm(b - a))
        if length > 0:
            middles, sizes = _subdivided_line(a, b, length, fineness)
            points.append(middles)
            steps.append(sizes)
    count = sum(len(part) for part in points)
    return Cells(np.concatenate(points), np.zeros(count), np.concatenate(steps))


def _subdivided_line(
    a: Floats, b: Floats, length: float, fineness: Fineness
) -> tuple[Floats, Floats]:
    """Middles (n, 3) and lengths (n,) of pieces of one side."""
    n = intervals(length, fineness.step)
    check_count(n, "The search of an edge")
    middles, size = (np.arange(n) + 0.5) / n, 1.0 / n
    done, sizes = [], []
    while len(middles):
        points = a + middles[:, None] * (b - a)
        coarse = fineness.too_coarse(points, size * length, size * length / 2)
        done.append(points[~coarse])
        sizes.append(np.full(np.count_nonzero(~coarse), size * length))
        size /= 2
        middles = (middles[coarse, None] + np.array([-0.5, 0.5]) * size).reshape(-1)
        check_count(len(middles), "The search of an edge")
    return np.concatenate(done), np.concatenate(sizes)


def cells_in_outline(outline: Polygon, z: float, fineness: Fineness) -> Cells:
    """Pieces of a level area, finer near conductors, its outline included.

    The pieces' areas add up to the outline's. A piece cut by the outline is sampled
    inside it.

    Parameters
    ----------
    outline : Polygon
        On plan, not empty. [m]
    z : float
        [m]
    fineness : Fineness
        Its distances are asked at this height.

    Raises
    ------
    UserError
        When it takes too many points.
    """
    x0, y0, x1, y1 = outline.bounds
    lengths = np.array([x1 - x0, y1 - y0])

    def at(uv: Floats) -> Floats:
        xy = np.array([x0, y0]) + uv * lengths
        return np.column_stack([xy, np.full(len(uv), z)])

    uv, sizes = _subdivided(at, lengths, fineness)
    sides = sizes * lengths
    points = at(uv)
    low, high = points[:, :2] - sides / 2, points[:, :2] + sides / 2
    boxes = shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1])
    shapely.prepare(outline)
    areas = sides.prod(axis=1)
    cut = ~shapely.contains(outline, boxes)
    pieces = shapely.intersection(boxes[cut], outline)
    areas[cut] = shapely.area(pieces)
    kept = areas > 0
    inside = shapely.intersects_xy(outline, points[:, 0], points[:, 1])
    moved = cut & kept & ~inside
    places = shapely.get_coordinates(shapely.point_on_surface(pieces[moved[cut]]))
    points[moved, :2] = places
    inner = Cells(points[kept], areas[kept], sides[kept].max(axis=1))
    edges = [
        _edge(_ring(ring, z), fineness)
        for ring in (outline.exterior, *outline.interiors)
    ]
    return joined([inner, *edges])


def _ring(ring: shapely.LinearRing, z: float) -> Floats:
    xy = shapely.get_coordinates(ring)
    return np.column_stack([xy, np.full(len(xy), z)])


def walls(outline: Polygon, z: tuple[float, float], fineness: Fineness) -> Cells:
    """Pieces of the upright faces over an outline, finer near conductors."""
    parts = []
    for ring in (outline.exterior, *outline.interiors):
        xy = shapely.get_coordinates(ring)
        for a, b in pairwise(xy):
            if np.any(a != b):
                face = vertical((a[0], a[1]), (b[0], b[1]), z)
                parts.append(cells_on_plane(face, fineness))
    return joined(parts)
