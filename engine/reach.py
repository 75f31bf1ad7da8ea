"""Which conductors can be near some points at all, told by boxes around bundles."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Bundled, Conductor
from engine.run_conductors import N_KEPT, Same
from engine.runs import Bar

Floats = NDArray[np.float64]

#: Lowest and highest x, y, z of all surfaces, and the largest width. [m]
_Box = tuple[list[float], list[float], float]


def within_reach(
    conductors: Sequence[Conductor],
    points: Floats,
    distance: float = 0.0,
    *,
    widths: float = 0.0,
) -> Sequence[Conductor]:
    """Conductors without those that are farther from all of the points, for certain.

    Of conductors that come in bundles (`Bundled`), the bundles whose box, grown by the
    distance, touches the box of the points; of others, all.

    Parameters
    ----------
    points : (n, 3) float
        [m]
    distance : float
        Surfaces as near as that are kept. [m]
    widths : float
        The distance is larger by so many times a conductor's width or diameter.
    """
    if not isinstance(conductors, Bundled) or not len(points):
        return conductors
    low, high = points.min(axis=0).tolist(), points.max(axis=0).tolist()
    found: list[Conductor] = []
    for bundle in conductors.bundles:
        first, last, width = _box(Same(bundle))
        reach = distance + widths * width
        if all(
            first[k] - reach <= high[k] and low[k] <= last[k] + reach for k in range(3)
        ):
            found.extend(bundle)
    return found


@lru_cache(maxsize=4 * N_KEPT)
def _box(same: Same[tuple[Conductor, ...]]) -> _Box:
    low, high, widest = np.full(3, np.inf), np.full(3, -np.inf), 0.0
    for conductor in same.value:
        shape = conductor.shape
        sides = (
            (shape.width, shape.thickness)
            if isinstance(shape, Bar)
            else (shape.diameter, shape.diameter)
        )
        # At a mitre plane the section is longer than at a right angle to the leg.
        stretch = np.linalg.norm(conductor.axes, axis=2).max(axis=0)
        reach = float(np.maximum(1.0, stretch) @ np.array(sides)) / 2
        low = np.minimum(low, conductor.path.min(axis=0) - reach)
        high = np.maximum(high, conductor.path.max(axis=0) + reach)
        widest = max(widest, *sides)
    return low.tolist(), high.tolist(), widest
