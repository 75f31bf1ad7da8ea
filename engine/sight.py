"""From which side the layout is looked at: plan and elevations."""

from __future__ import annotations

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
        "plan", or the viewing direction: "looking +y".
    right, up, into : (3,) float
        Unit vectors of the layout that run to the right, upwards, and away from the
        viewer in the picture.
    """

    name: str
    right: Axis
    up: Axis
    into: Axis

    def seen(self, points: npt.ArrayLike) -> Floats:
        """(..., 2) places in the picture of (..., 3) points. [m]"""
        basis = np.array([self.right, self.up]).T
        return np.asarray(np.asarray(points, dtype=float) @ basis, dtype=float)

    def depth(self, points: npt.ArrayLike) -> Floats:
        """(...) how far away from the viewer (..., 3) points are. [m]"""
        return np.asarray(np.asarray(points, dtype=float) @ np.array(self.into))

    @property
    def axis(self) -> str:
        """The layout's axis along which one looks: "z" on plan."""
        return "xyz"[int(np.argmax(np.abs(self.into)))]


PLAN = Sight("plan", (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, -1.0))

#: One looks along +x: −y runs to the right.
LOOKING_X = Sight("looking +x", (0.0, -1.0, 0.0), (0.0, 0.0, 1.0), (1.0, 0.0, 0.0))

#: One looks along +y: +x runs to the right.
LOOKING_Y = Sight("looking +y", (1.0, 0.0, 0.0), (0.0, 0.0, 1.0), (0.0, 1.0, 0.0))

SIGHTS = {sight.name: sight for sight in (PLAN, LOOKING_X, LOOKING_Y)}
