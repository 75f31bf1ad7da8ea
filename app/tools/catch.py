"""Catch: which exact place is meant by a pointer near it; Hold: which direction.

Pure functions on metres in the plane of a view. Vertices win over midpoints, those over
edges, and those over the grid. Conductors count where nothing drawn is as near.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from app.tools.tool import Caught, Point

Floats = npt.NDArray[np.float64]

_NONE = np.empty((0, 2))
_NO_EDGES = np.empty((0, 2, 2))

#: Directions of Hold. [radians]
_STEP = math.radians(45.0)


@dataclass(frozen=True, eq=False)
class Targets:
    """What can be caught.

    Attributes
    ----------
    vertices : (n, 2) float
        Of what the user drew. [m]
    edges : (m, 2, 2) float
        Start and end. [m]
    minor : (k, 2) float
        Vertices of single conductors. [m]
    """

    vertices: Floats
    edges: Floats
    minor: Floats


NO_TARGETS = Targets(_NONE, _NO_EDGES, _NONE)


@dataclass(frozen=True)
class Catch:
    """The place meant, and what it was caught by. [m]"""

    at: Point
    caught: Caught


def targets(
    lines: Iterable[Sequence[Point]] = (),
    outlines: Iterable[Sequence[Point]] = (),
    points: Iterable[Point] = (),
    minor: Iterable[Sequence[Point]] = (),
) -> Targets:
    """What can be caught of open lines, closed outlines, points, and conductors."""
    vertices = [np.asarray(list(points), dtype=float).reshape(-1, 2)]
    edges = [_NO_EDGES]
    for line in lines:
        array = np.asarray(line, dtype=float).reshape(-1, 2)
        vertices.append(array)
        edges.append(np.stack([array[:-1], array[1:]], axis=1))
    for outline in outlines:
        array = np.asarray(outline, dtype=float).reshape(-1, 2)
        vertices.append(array)
        edges.append(np.stack([array, np.roll(array, -1, axis=0)], axis=1))
    fine = [_NONE, *(np.asarray(line, dtype=float).reshape(-1, 2) for line in minor)]
    return Targets(
        np.concatenate(vertices), np.concatenate(edges), np.concatenate(fine)
    )


def joined(parts: Sequence[Targets]) -> Targets:
    """All targets of several items together."""
    if not parts:
        return NO_TARGETS
    return Targets(
        np.concatenate([part.vertices for part in parts]),
        np.concatenate([part.edges for part in parts]),
        np.concatenate([part.minor for part in parts]),
    )


def catch(
    raw: Point,
    found: Targets,
    reach: float,
    *,
    grid: float | None = None,
    anchor: Point | None = None,
) -> Catch:
    """The place that a pointer at `raw` means.

    Parameters
    ----------
    raw : (2,) float
        [m]
    found : Targets
        What may be caught; `NO_TARGETS` for the grid alone.
    reach : float
        How near is near enough. [m]
    grid : float or None
        Step of the grid; None catches no grid. [m]
    anchor : (2,) float or None
        Hold: the place lies at a multiple of 45° from here. [m]
    """
    if anchor is not None:
        return _on_ray(raw, found, reach, grid, anchor)
    for points in (found.vertices, found.minor):
        nearest = _nearest(points, raw, reach)
        if nearest is not None:
            return Catch(nearest, "vertex")
    near = _near_edges(found.edges, raw, reach)
    middle = _nearest(near.mean(axis=1), raw, reach) if len(near) else None
    if middle is not None:
        return Catch(middle, "midpoint")
    if len(near):
        on_edge = _nearest(_feet(near, np.asarray(raw)), raw, reach)
        if on_edge is not None:
            return Catch(on_edge, "edge")
    if grid is not None:
        return Catch((_rounded(raw[0], grid), _rounded(raw[1], grid)), "grid")
    return Catch(raw, "")


def held(raw: Point, anchor: Point) -> Point:
    """`raw` moved straight onto the nearest multiple of 45° from `anchor`. [m]

    Examples
    --------
    >>> held((3.0, 0.2), (0.0, 0.0))
    (3.0, 0.0)
    """
    direction = _direction(raw, anchor)
    along = (raw[0] - anchor[0]) * direction[0] + (raw[1] - anchor[1]) * direction[1]
    return (anchor[0] + along * direction[0], anchor[1] + along * direction[1])


def _on_ray(
    raw: Point, found: Targets, reach: float, grid: float | None, anchor: Point
) -> Catch:
    """Hold first; then what is caught is where the ray passes it."""
    place = held(raw, anchor)
    direction = np.asarray(_direction(raw, anchor))
    start = np.asarray(anchor)
    for points in (found.vertices, found.minor):
        near = points[_distances(points, np.asarray(place)) <= reach]
        if len(near):
            feet = start + ((near - start) @ direction)[:, None] * direction
            nearest = _nearest(feet, place, reach)
            if nearest is not None:
                return Catch(nearest, "vertex")
    crossing = _nearest(_crossings(found.edges, start, direction), place, reach)
    if crossing is not None:
        return Catch(crossing, "edge")
    if grid is not None:
        axis = 0 if abs(direction[0]) > 0.5 else 1
        wanted = _rounded(place[axis], grid)
        along = (wanted - anchor[axis]) / float(direction[axis])
        x, y = (start + along * direction).tolist()
        return Catch((x, y), "grid")
    return Catch(place, "")


def _direction(raw: Point, anchor: Point) -> Point:
    """Unit vector of the nearest multiple of 45°; exact along the axes."""
    turn = math.atan2(raw[1] - anchor[1], raw[0] - anchor[0])
    eighth = round(turn / _STEP) % 8
    x = (1, 1, 0, -1, -1, -1, 0, 1)[eighth]
    y = (0, 1, 1, 1, 0, -1, -1, -1)[eighth]
    length = math.hypot(x, y)
    return (x / length, y / length)


def _rounded(value: float, grid: float) -> float:
    # Twelve decimals: 3 × 0.1 is to read 0.3 in the layout file.
    return round(round(value / grid) * grid, 12)


def _distances(points: Floats, at: Floats) -> Floats:
    return np.asarray(np.hypot(points[:, 0] - at[0], points[:, 1] - at[1]))


def _nearest(points: Floats, at: Point, reach: float) -> Point | None:
    if not len(points):
        return None
    distances = _distances(points, np.asarray(at))
    index = int(distances.argmin())
    if distances[index] > reach:
        return None
    x, y = points[index].tolist()
    return (x, y)


def _near_edges(edges: Floats, at: Point, reach: float) -> Floats:
    """Edges whose foot of the perpendicular from `at` is within reach."""
    if not len(edges):
        return edges
    feet = _feet(edges, np.asarray(at))
    return np.asarray(edges[_distances(feet, np.asarray(at)) <= reach])


def _feet(edges: Floats, at: Floats) -> Floats:
    """(m, 2) nearest points of the edges to `at`."""
    start, along = edges[:, 0], edges[:, 1] - edges[:, 0]
    length = np.einsum("ij,ij->i", along, along)
    part = np.einsum("ij,ij->i", at - start, along)
    part = np.clip(np.divide(part, length, where=length > 0, out=part * 0.0), 0, 1)
    return np.asarray(start + part[:, None] * along)


def _crossings(edges: Floats, start: Floats, direction: Floats) -> Floats:
    """(k, 2) points where the line through `start` crosses the edges."""
    if not len(edges):
        return _NONE
    first, along = edges[:, 0], edges[:, 1] - edges[:, 0]
    across = np.array([-direction[1], direction[0]])
    slope = along @ across
    offset = (start - first) @ across
    parallel = np.abs(slope) <= 1e-9 * np.hypot(along[:, 0], along[:, 1])
    part = np.divide(offset, slope, where=~parallel, out=np.full(len(edges), -1.0))
    hit = (part >= -1e-9) & (part <= 1.0 + 1e-9)
    return np.asarray(first[hit] + part[hit, None] * along[hit])
