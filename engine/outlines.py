"""True outlines of conductors as one looks at them, kept while they are the same."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry import Polygon

from engine.conductor import Conductor
from engine.run_conductors import N_KEPT, Same
from engine.runs import Bar
from engine.sight import PLAN, Sight

Floats = npt.NDArray[np.float64]
Point = tuple[float, float]
Line = tuple[Point, ...]

_CIRCLE = np.linspace(0.0, 2.0 * math.pi, 16, endpoint=False)
_AROUND = np.stack([np.cos(_CIRCLE), np.sin(_CIRCLE)], 1)
_CORNERS = np.array([(-1.0, -1.0), (1.0, -1.0), (1.0, 1.0), (-1.0, 1.0)])


@dataclass(frozen=True)
class Area:
    """A filled shape in the picture: its outline and the holes in it. [m]"""

    outline: Line
    holes: tuple[Line, ...] = ()


def bar_footprint(conductor: Conductor, sight: Sight = PLAN) -> tuple[Area, ...]:
    """The true outline of a conductor in the picture, over all its legs."""
    return _footprint(Same(conductor), sight)


def band(conductors: Sequence[Conductor], sight: Sight = PLAN) -> tuple[Area, ...]:
    """The band that all conductors of a run fill together."""
    if not conductors:
        return ()
    corners = [_seen_corners(c, sight) for c in conductors]
    if len({len(c) for c in corners}) == 1:
        return _areas(_leg_hulls(np.concatenate(corners, axis=1)))
    return _areas(np.concatenate([_leg_hulls(c) for c in corners]))


@lru_cache(maxsize=2 * N_KEPT)
def _footprint(same: Same[Conductor], sight: Sight) -> tuple[Area, ...]:
    return _areas(_leg_hulls(_seen_corners(same.value, sight)))


def _seen_corners(conductor: Conductor, sight: Sight) -> Floats:
    """(n, k, 2) outline of the section at every vertex, in the picture."""
    shape = conductor.shape
    if isinstance(shape, Bar):
        around = 0.5 * np.array([shape.width, shape.thickness]) * _CORNERS
    else:
        around = 0.5 * shape.diameter * _AROUND
    offsets = np.einsum("ka,nax->nkx", around, conductor.axes)
    return sight.seen(conductor.path[:, None, :] + offsets)


def _leg_hulls(corners: Floats) -> npt.NDArray[np.object_]:
    """Convex outline of each leg, given the points of the section at its ends."""
    legs = np.concatenate([corners[:-1], corners[1:]], axis=1)
    hulls = shapely.convex_hull(shapely.multipoints(legs))
    return np.asarray(hulls[shapely.area(hulls) > 0])


def _areas(polygons: npt.NDArray[np.object_]) -> tuple[Area, ...]:
    if not len(polygons):
        return ()
    merged = polygons[0] if len(polygons) == 1 else shapely.union_all(polygons)
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
