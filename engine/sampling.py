"""Where the field is wanted: points on lines, planes, zones and the skin of volumes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import ArrayLike, NDArray
from shapely.geometry import Polygon

from engine.errors import UserError

Floats = NDArray[np.float64]

#: Points that one request may ask for.
MOST_POINTS = 5_000_000


def check_count(count: float, what: str) -> None:
    """Refuse more points than a request may ask for.

    Raises
    ------
    UserError
        When `count` exceeds `MOST_POINTS`.
    """
    if not count <= MOST_POINTS:
        raise UserError(
            f"{what} would take {count:,.0f} points; the most is {MOST_POINTS:,}. "
            "Choose a larger step or a smaller area."
        )


def _check_step(step: float) -> None:
    if not (math.isfinite(step) and step > 0):
        raise ValueError(f"step {step} m is not a distance above 0")


def intervals(length: float, step: float) -> int:
    """How many equal intervals of at most `step` make `length`; at least one.

    A length that is a whole number of steps but for rounding keeps that number.
    """
    _check_step(step)
    return max(1, math.ceil(length / step * (1 - 1e-12) - 1e-9))


@dataclass(frozen=True, eq=False)
class LineSample:
    """Points along a polyline, vertices included.

    Attributes
    ----------
    points : (n, 3) float
        [m]
    along : (n,) float
        Distance from the first vertex along the line. [m]
    """

    points: Floats
    along: Floats


def on_line(path: ArrayLike, step: float) -> LineSample:
    """Points along a polyline, at most `step` apart, each vertex once.

    Parameters
    ----------
    path : (v, 3) float
        At least two vertices. [m]
    step : float
        [m]

    Raises
    ------
    UserError
        When it takes too many points.
    """
    vertices = np.asarray(path, np.float64)
    if vertices.ndim != 2 or vertices.shape[0] < 2 or vertices.shape[1] != 3:
        raise ValueError("a line needs (n, 3) vertices, n at least 2")
    _check_step(step)
    lengths = np.linalg.norm(np.diff(vertices, axis=0), axis=1)
    check_count(1 + float(np.sum(np.ceil(lengths / step))), "The line")
    points, along = [vertices[:1]], [np.zeros(1)]
    start = 0.0
    for a, b, length in zip(vertices[:-1], vertices[1:], lengths, strict=True):
        if length > 0:
            part = np.arange(1, intervals(length, step) + 1) / intervals(length, step)
            points.append(a + part[:, None] * (b - a))
            along.append(start + part * length)
            start += float(length)
    return LineSample(np.concatenate(points), np.concatenate(along))


@dataclass(frozen=True)
class Plane:
    """A rectangle in space, from its origin along two edges at right angles.

    Attributes
    ----------
    origin : Point3
        The corner that both edges start from. [m]
    first, second : Point3
        The edges as vectors; columns of a map run along the first, rows along the
        second. [m]
    """

    origin: tuple[float, float, float]
    first: tuple[float, float, float]
    second: tuple[float, float, float]

    def __post_init__(self) -> None:
        a, b = np.array(self.first), np.array(self.second)
        lengths = float(np.linalg.norm(a)), float(np.linalg.norm(b))
        if not (np.all(np.isfinite([*self.origin, *a, *b])) and min(lengths) > 0):
            raise ValueError("a plane needs two edges longer than 0")
        if abs(a @ b) > 1e-9 * lengths[0] * lengths[1]:
            raise ValueError("the edges of a plane must be at right angles")


def horizontal(x: tuple[float, float], y: tuple[float, float], z: float) -> Plane:
    """A level rectangle over two ranges. [m]"""
    return Plane((x[0], y[0], z), (x[1] - x[0], 0, 0), (0, y[1] - y[0], 0))


def vertical(
    start: tuple[float, float], end: tuple[float, float], z: tuple[float, float]
) -> Plane:
    """An upright rectangle over a line on plan; rows go upwards. [m]"""
    return Plane(
        (start[0], start[1], z[0]),
        (end[0] - start[0], end[1] - start[1], 0),
        (0, 0, z[1] - z[0]),
    )


@dataclass(frozen=True, eq=False)
class PlaneSample:
    """A regular grid on a plane, edges included.

    Attributes
    ----------
    points : (rows * columns, 3) float
        Row by row, columns along the plane's first edge. [m]
    first, second : (columns,) float, (rows,) float
        Distances along the edges. [m]
    """

    points: Floats
    first: Floats
    second: Floats

    @property
    def shape(self) -> tuple[int, int]:
        """Rows and columns."""
        return (len(self.second), len(self.first))


def on_plane(plane: Plane, step: float) -> PlaneSample:
    """A regular grid on a plane, at most `step` apart either way.

    Raises
    ------
    UserError
        When it takes too many points.
    """
    a, b = np.array(plane.first, np.float64), np.array(plane.second, np.float64)
    lengths = float(np.linalg.norm(a)), float(np.linalg.norm(b))
    _check_step(step)
    check_count((lengths[0] / step + 1) * (lengths[1] / step + 1), "The plane")
    u = np.linspace(0.0, 1.0, intervals(lengths[0], step) + 1)
    v = np.linspace(0.0, 1.0, intervals(lengths[1], step) + 1)
    grid = v[:, None, None] * b + u[None, :, None] * a + np.array(plane.origin)
    return PlaneSample(grid.reshape(-1, 3), u * lengths[0], v * lengths[1])


def area_of(outline: Sequence[tuple[float, float]]) -> Polygon:
    """The polygon of an outline, or an empty one where it encloses nothing.

    An outline that crosses itself gives its largest piece.
    """
    found = shapely.make_valid(Polygon(outline))
    pieces = [
        p for p in getattr(found, "geoms", [found]) if isinstance(p, Polygon)
    ]  # fmt: skip
    return max(pieces, key=lambda piece: piece.area, default=Polygon())


def held_inside(outline: Polygon, points: Floats) -> Floats:
    """The points, those outside an outline moved to its nearest point on plan. [m]"""
    outside = ~shapely.intersects_xy(outline, points[:, 0], points[:, 1])
    if not np.any(outside):
        return points
    held = points.copy()
    stray = shapely.points(points[outside, :2])
    lines = shapely.shortest_line(outline, stray)
    held[outside, :2] = shapely.get_coordinates(lines)[::2]
    return held


def grid_in_outline(outline: Polygon, step: float) -> Floats:
    """(n, 2) points of a regular grid inside an outline or on it. [m]

    Raises
    ------
    UserError
        When it takes too many points.
    """
    x0, y0, x1, y1 = outline.bounds
    sample = on_plane(horizontal((x0, x1), (y0, y1), 0.0), step)
    xy = sample.points[:, :2]
    inside: Floats = xy[shapely.intersects_xy(outline, xy[:, 0], xy[:, 1])]
    return inside
