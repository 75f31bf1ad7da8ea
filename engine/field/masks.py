"""Where points lie against conductors: inside, near, or how far from the surface."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.field.kernel import Floats
from engine.field.legs import any_nearer, legs_of, nearest_surface
from engine.field.points import as_points, compact_order
from engine.field.pool import on_pool

#: Nearer than so many bar widths or diameters the even current is an assumption.
NEAR_WIDTHS = 2.0

#: Points that one thread measures at a time, and legs times points that are measured
#: sooner than a thread is started.
_PART, _FEW = 1024, 400_000


def surface_distance(conductors: Sequence[Conductor], points: Floats) -> Floats:
    """Distance to the surface of the nearest conductor.

    Exact outside of bars on every straight and at bends in the plane of a side, and
    outside of round conductors, whose joints and ends are round. At the outer edge of
    a bend that is askew to a bar's sides it may be too large by less than a thickness.

    Parameters
    ----------
    points : (n, 3) float64
        [m]

    Returns
    -------
    (n,) float64
        0 inside; inf when there is no conductor. [m]
    """
    checked = as_points(points)
    order = compact_order(checked)
    table, near = legs_of(conductors).table, np.empty(len(checked))
    ordered = checked[order]

    size = max(1, len(checked)) if len(table) * len(checked) < _FEW else _PART

    def run(part: int) -> None:
        rows = slice(part * size, (part + 1) * size)
        nearest_surface(table, ordered[rows], near[rows])

    on_pool(-(-len(checked) // size), run)
    distance = np.empty(len(checked))
    distance[order] = near
    return distance


def inside(conductors: Sequence[Conductor], points: Floats) -> NDArray[np.bool_]:
    """(n,) whether each point lies in a conductor, where the field is not assessable.

    A leg over which a bar's section twists counts as round, about its corners.
    """
    flags: NDArray[np.bool_] = surface_distance(conductors, points) == 0.0
    return flags


def near_field(conductors: Sequence[Conductor], points: Floats) -> NDArray[np.bool_]:
    """(n,) whether a surface is nearer than two of its widths or diameters.

    There real current, which crowds to the edges, differs from the even current that
    is assumed. Points inside a conductor are near.
    """
    legs = legs_of(conductors)
    limits = NEAR_WIDTHS * legs.sides.max(axis=1, initial=0.0)
    near: NDArray[np.bool_] = any_nearer(legs.table, limits, as_points(points))
    return near
