"""Where one looks from in space: places to pixels, pixels to rays, and every turn.

Values in, values out; no Qt. x to the right, y away and z up when looking along +y;
pixels run to the right and downwards from the upper left corner.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Point3 = tuple[float, float, float]

#: Directions of sight by their words: azimuth and elevation of the eye. [degrees]
SIGHTS: dict[str, tuple[float, float]] = {
    "From above": (-90.0, 90.0),
    "Looking +y": (-90.0, 0.0),
    "Looking −y": (90.0, 0.0),
    "Looking +x": (180.0, 0.0),
    "Looking −x": (0.0, 0.0),
    "From a corner": (-60.0, 28.0),
}

#: Vertical angle of sight. [degrees]
ANGLE = 38.0
#: Turned by a drag of one pixel. [degrees]
_TURN = 0.35
#: Nearest and farthest the eye gets from what it looks at. [m]
NEAREST, FARTHEST = 0.05, 2000.0
#: An axis this close to the line of sight is seen end-on. [sine of the angle]
END_ON = 0.08
#: What is fitted leaves this much air about it.
_AIR = 1.08


@dataclass(frozen=True)
class SpaceCamera:
    """An eye that looks at a target.

    Attributes
    ----------
    target : Point3
        In the middle of the picture. [m]
    distance : float
        From eye to target. [m]
    azimuth, elevation : float
        Where the eye stands as seen from the target: azimuth counter-clockwise from
        +x on plan, elevation above level. [degrees]
    parallel : bool
        Parallel lines of sight, true to scale; otherwise as an eye sees.
    width, height : float
        Of the picture. [px]
    """

    target: Point3 = (0.0, 0.0, 0.0)
    distance: float = 10.0
    azimuth: float = -60.0
    elevation: float = 28.0
    parallel: bool = False
    width: float = 800.0
    height: float = 600.0

    @property
    def axes(self) -> Floats:
        """(3, 3) rows: to the right, upwards in the picture, and towards the eye."""
        a, e = math.radians(self.azimuth), math.radians(self.elevation)
        back = (math.cos(e) * math.cos(a), math.cos(e) * math.sin(a), math.sin(e))
        right = (-math.sin(a), math.cos(a), 0.0)
        return np.array([right, np.cross(back, right), back])

    @property
    def eye(self) -> Floats:
        """Where the eye is. [m]"""
        return np.asarray(self.target) + self.distance * self.axes[2]

    @property
    def metres_per_pixel(self) -> float:
        """At the target. [m/px]"""
        return 2.0 * self.distance * _slope() / self.height

    # -- between space and picture ------------------------------------------------

    def pixels(self, points: npt.ArrayLike) -> tuple[Floats, Floats]:
        """Pixels (n, 2) of points (n, 3), and how far before the eye they lie (n,).

        A point that is not before the eye has no pixel: nan.
        """
        seen = (np.asarray(points, float).reshape(-1, 3) - self.eye) @ self.axes.T
        ahead = -seen[:, 2]
        scale = 0.5 * self.height / _slope()
        divisor = np.full(len(seen), self.distance) if self.parallel else ahead
        shown = divisor > 1e-9 * self.distance
        flat = np.full((len(seen), 2), np.nan)
        flat[shown] = scale * seen[shown, :2] / divisor[shown, None]
        flat[:, 0] += 0.5 * self.width
        flat[:, 1] = 0.5 * self.height - flat[:, 1]
        return flat, ahead

    def ray(self, x: float, y: float) -> tuple[Floats, Floats]:
        """The line of sight through a pixel: where it begins, and its direction."""
        right, up, back = self.axes
        across = (x - 0.5 * self.width) * self.metres_per_pixel
        upward = (0.5 * self.height - y) * self.metres_per_pixel
        at = np.asarray(self.target) + across * right + upward * up
        if self.parallel:
            # Begins far behind the eye: parallel sight cuts nothing off.
            return at + FARTHEST * back, -back
        way = at - self.eye
        return self.eye, way / np.linalg.norm(way)

    def view_matrix(self) -> Floats:
        """(4, 4) from layout to eye, which looks along −z."""
        matrix = np.eye(4)
        matrix[:3, :3] = self.axes
        matrix[:3, 3] = -self.axes @ self.eye
        return matrix

    def projection_matrix(self, reach: float) -> Floats:
        """(4, 4) from eye to the cube of −1 to 1.

        Parameters
        ----------
        reach : float
            Radius about the target that holds everything. [m]
        """
        far = 1.05 * (self.distance + reach) + 1.0
        aspect = self.width / self.height
        matrix = np.zeros((4, 4))
        if self.parallel:
            near = min(-1.0, self.distance - reach)
            half = self.distance * _slope()
            matrix[0, 0], matrix[1, 1] = 1.0 / (half * aspect), 1.0 / half
            matrix[2, 2] = -2.0 / (far - near)
            matrix[2, 3] = -(far + near) / (far - near)
            matrix[3, 3] = 1.0
            return matrix
        near = max(0.01 * self.distance, 0.5 * (self.distance - reach))
        matrix[0, 0], matrix[1, 1] = 1.0 / (_slope() * aspect), 1.0 / _slope()
        matrix[2, 2] = -(far + near) / (far - near)
        matrix[2, 3] = -2.0 * far * near / (far - near)
        matrix[3, 2] = -1.0
        return matrix

    # -- moving ---------------------------------------------------------------------

    def sized(self, width: float, height: float) -> SpaceCamera:
        """In a picture of another size. [px]"""
        return replace(self, width=max(width, 1.0), height=max(height, 1.0))

    def looking(self, sight: str) -> SpaceCamera:
        """In one of the directions of `SIGHTS`; along an axis with parallel sight."""
        azimuth, elevation = SIGHTS[sight]
        parallel = sight != "From a corner"
        return replace(self, azimuth=azimuth, elevation=elevation, parallel=parallel)

    def turned(self, right: float, down: float) -> SpaceCamera:
        """Orbited about the target by a drag. [px]"""
        elevation = min(90.0, max(-90.0, self.elevation + _TURN * down))
        azimuth = (self.azimuth - _TURN * right + 180.0) % 360.0 - 180.0
        return replace(self, azimuth=azimuth, elevation=elevation, parallel=False)

    def shifted(self, right: float, down: float) -> SpaceCamera:
        """Moved so that what is seen goes along with a drag. [px]"""
        across, up, _ = self.axes
        way = (down * up - right * across) * self.metres_per_pixel
        return replace(self, target=_point(np.asarray(self.target) + way))

    def nearer(self, factor: float, x: float, y: float) -> SpaceCamera:
        """`factor` times as near; what lies under the pixel stays there."""
        distance = min(FARTHEST, max(NEAREST, self.distance / factor))
        right, up, _ = self.axes
        change = 1.0 - distance / self.distance
        way = (x - 0.5 * self.width) * right + (0.5 * self.height - y) * up
        target = np.asarray(self.target) + change * self.metres_per_pixel * way
        return replace(self, distance=distance, target=_point(target))

    def fitted(self, points: npt.ArrayLike) -> SpaceCamera:
        """Holding all points (n, 3), in the same direction. [m]"""
        places = np.asarray(points, float).reshape(-1, 3)
        right, up, back = self.axes
        seen = places @ self.axes.T
        slopes = np.array([_slope() * self.width / self.height, _slope()])
        if self.parallel:
            low, high = seen.min(axis=0), seen.max(axis=0)
            middle = 0.5 * (low + high)
            distance = float(np.max((high - low)[:2] / (2.0 * slopes)))
        else:
            middle, distance = _held(seen, slopes)
        target = middle[0] * right + middle[1] * up + middle[2] * back
        distance = min(FARTHEST, max(NEAREST, _AIR * distance))
        return replace(self, target=_point(target), distance=distance)


def _held(seen: Floats, slopes: Floats) -> tuple[Floats, float]:
    """Target and distance at which an eye sees points (n, 3) along its axes.

    An eye further back by z sees z times the slope more to every side: the planes
    that bound its sight touch the points, across and upwards each on its own.
    """
    depth = 0.5 * (seen[:, 2].min() + seen[:, 2].max())
    behind = seen[:, 2] - depth
    middle, distance = [], 0.0
    for side, slope in zip(seen[:, :2].T, slopes, strict=True):
        high = float(np.max(side + slope * behind))
        low = float(np.min(side - slope * behind))
        middle.append(0.5 * (low + high))
        distance = max(distance, (high - low) / (2.0 * slope))
    return np.array([*middle, depth]), distance


def along_axis(
    camera: SpaceCamera, start: Point3, axis: Point3, x: float, y: float
) -> float | None:
    """How far along an axis the line of sight through a pixel comes nearest. [m]

    Parameters
    ----------
    start : Point3
        Where the axis begins. [m]
    axis : Point3
        Of length 1.

    Returns
    -------
    float or None
        None when the axis is seen end-on, so that a pixel says nothing about it.
    """
    origin, sight = camera.ray(x, y)
    line = np.asarray(axis, float)
    cosine = float(line @ sight)
    sine = 1.0 - cosine * cosine
    if sine < END_ON**2:
        return None
    between = origin - np.asarray(start, float)
    return float((line @ between - cosine * (sight @ between)) / sine)


def _slope() -> float:
    return math.tan(math.radians(0.5 * ANGLE))


def _point(at: Floats) -> Point3:
    x, y, z = at.tolist()
    return (x, y, z)
