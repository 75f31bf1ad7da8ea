"""From which side the layout is looked at: plan, elevations, and along a line."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Axis = tuple[float, float, float]


@dataclass(frozen=True)
class Sight:
    """A viewing direction.

    Attributes
    ----------
    name : str
        "plan", or the viewing direction: "looking +y"; names no two sights alike.
    right, up, into : (3,) float
        Unit vectors of the layout that run to the right, upwards, and away from the
        viewer in the picture.
    origin : (3,) float
        What lies at (0, 0) in the picture, at the depth 0. [m]
    """

    name: str
    right: Axis
    up: Axis
    into: Axis
    origin: Axis = (0.0, 0.0, 0.0)

    def seen(self, points: npt.ArrayLike) -> Floats:
        """(..., 2) places in the picture of (..., 3) points. [m]"""
        basis = np.array([self.right, self.up]).T
        return np.asarray(self._from_origin(points) @ basis, dtype=float)

    def depth(self, points: npt.ArrayLike) -> Floats:
        """(...) how far away from the viewer (..., 3) points are. [m]"""
        return np.asarray(self._from_origin(points) @ np.array(self.into))

    def places(self, seen: npt.ArrayLike, depth: float) -> Floats:
        """(..., 3) points of the layout that show at (..., 2) at one depth. [m]"""
        basis = np.array([self.right, self.up])
        start = np.array(self.origin) + depth * np.array(self.into)
        return np.asarray(np.asarray(seen, dtype=float) @ basis + start, dtype=float)

    def _from_origin(self, points: npt.ArrayLike) -> Floats:
        found = np.asarray(points, dtype=float)
        return found - np.array(self.origin) if any(self.origin) else found

    @property
    def is_along_line(self) -> bool:
        """Whether its plane goes through a drawn line, see `along`."""
        return self not in (PLAN, LOOKING_X, LOOKING_Y)

    @property
    def axis(self) -> str:
        """The layout's axis along which one looks: "z" on plan; "depth" for others."""
        if self.is_along_line:
            return "depth"
        return "xyz"[int(np.argmax(np.abs(self.into)))]


PLAN = Sight("plan", (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, -1.0))

#: One looks along +x: −y runs to the right.
LOOKING_X = Sight("looking +x", (0.0, -1.0, 0.0), (0.0, 0.0, 1.0), (1.0, 0.0, 0.0))

#: One looks along +y: +x runs to the right.
LOOKING_Y = Sight("looking +y", (1.0, 0.0, 0.0), (0.0, 0.0, 1.0), (0.0, 1.0, 0.0))

SIGHTS = {sight.name: sight for sight in (PLAN, LOOKING_X, LOOKING_Y)}


def along(start: Axis, end: Axis) -> Sight:
    """The sight of the upright plane through a line: its start is at the left.

    In the picture the distance from the start on plan runs to the right, and z
    upwards; the depth is 0 on the line.

    Parameters
    ----------
    start, end : (3,) float
        Their heights do not count. [m]

    Raises
    ------
    ValueError
        When they are one above the other.
    """
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = math.hypot(dx, dy)
    if not length > 0:
        raise ValueError("a line to look along has no length on plan")
    c, s = dx / length, dy / length
    return Sight(
        f"along {start[0]:.17g} {start[1]:.17g} {end[0]:.17g} {end[1]:.17g}",
        (c, s, 0.0),
        (0.0, 0.0, 1.0),
        (-s, c, 0.0),
        (start[0], start[1], 0.0),
    )
