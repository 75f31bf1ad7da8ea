"""The surface at a distance around a leg of a conductor, covered by boxes."""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry import Polygon

from engine.certified.boxes import Boxes, halved
from engine.compiled import compiled
from engine.field.legs import leg_distance

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]


class Tube:
    """Where a leg is as far away as the clearance, inside a volume.

    Boxes that the surface may cross are cut ever smaller. Where the leg is convex and
    the distance to it the shortest, the surface in a box lies within half the square
    of its size over the distance of a plane; there the box is drawn in to a thin one.

    Parameters
    ----------
    number : int
        Of the cover.
    leg : (20,) float
        A row of `Legs.table`.
    slope : float
        Most by which its distance grows per metre.
    clearance : float
        [m]
    outline : Polygon
        Of the volume on plan.
    z : (float, float)
        Of the volume. [m]
    """

    def __init__(
        self,
        number: int,
        leg: Floats,
        slope: float,
        clearance: float,
        outline: Polygon,
        z: tuple[float, float],
    ) -> None:
        self._number, self._leg, self._slope = number, leg, slope
        self._clearance, self._outline, self._z = clearance, outline, z
        shapely.prepare(outline)

    def start(self) -> Boxes:
        leg = self._leg
        tangent = leg[3:6]
        first = leg[6:9] if leg[19] == 0 else _across(tangent)
        frame = np.array([tangent, first, np.cross(tangent, first)])
        wide, thick = leg[13], leg[14] if leg[19] == 0 else leg[13]
        # Mitred ends reach out by their slopes.
        ends = np.abs(leg[15:19]).reshape(2, 2) @ np.array([wide, thick])
        ends = ends if leg[19] == 0 else np.full(2, leg[13])
        sides = np.array([leg[12] / 2 + ends.max(), wide, thick])
        centre = leg[:3] + tangent * leg[12] / 2
        boxes = Boxes(
            centre[None],
            frame[None],
            (sides + self._clearance * self._slope)[None],
            np.array([self._number]),
        )
        return boxes[self._crossed(boxes)]

    def split(self, boxes: Boxes) -> tuple[Boxes, Integers]:
        longest = boxes.halves.max(axis=1)
        children, parents = halved(boxes, boxes.halves >= 0.7 * longest[:, None])
        kept = self._crossed(children)
        return children[kept], parents[kept]

    def _crossed(self, boxes: Boxes) -> NDArray[np.bool_]:
        """(n,) whether the surface may cross a box, inside the volume."""
        distances = _to_leg(self._leg, boxes.centres)
        within = self._slope * boxes.reaches
        crossed: NDArray[np.bool_] = np.abs(distances - self._clearance) <= within
        corners = boxes.corners
        heights = corners[:, :, 2]
        crossed &= heights.max(axis=1) >= self._z[0]
        crossed &= heights.min(axis=1) <= self._z[1]
        low, high = corners[:, :, :2].min(axis=1), corners[:, :, :2].max(axis=1)
        shadows = shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1])
        crossed &= shapely.intersects(self._outline, shadows)
        return crossed

    def _is_shortest(self, boxes: Boxes) -> NDArray[np.bool_]:
        """(n,) whether the distance that is told is the shortest one around a box.

        Beside a leg it is, at mitred ends it may be longer.
        """
        leg, reach = self._leg, boxes.reaches
        along = (boxes.centres - leg[:3]) @ leg[3:6]
        ends = np.abs(leg[15:19]).reshape(2, 2) @ leg[13:15]
        beside = (along - reach >= ends[0]) & (along + reach <= leg[12] - ends[1])
        shortest: NDArray[np.bool_] = beside | (self._slope <= 1.0)
        return shortest

    def tight(self, boxes: Boxes) -> Boxes:
        reach = boxes.reaches
        distances = _to_leg(self._leg, boxes.centres)
        nearest = self._clearance - reach
        # The distance is convex, bent by at most one over itself, and on the way from
        # the centre to the surface nowhere less than the clearance less the reach.
        can = self._is_shortest(boxes) & (nearest > 0) & (distances > 0)
        room = np.where(can, reach**2 / (2 * np.where(can, nearest, 1.0)), 0.0)
        high = self._clearance - distances
        low = np.maximum(high - room, -reach)
        high = np.minimum(high, reach)
        can &= (high >= low) & (high - low < reach)
        which = np.flatnonzero(can)
        centres, frames = boxes.centres.copy(), boxes.frames.copy()
        halves = boxes.halves.copy()
        normals = _normals(self._leg, boxes.centres[which])
        for i, normal in zip(which, normals, strict=True):
            frame = _frame_on(normal, boxes.frames[i])
            shares = np.abs(frame @ boxes.frames[i].T)
            halves[i] = shares @ boxes.halves[i]
            halves[i, 2] = (high[i] - low[i]) / 2
            frames[i] = frame
            centres[i] += normal * (high[i] + low[i]) / 2
        return Boxes(centres, frames, halves, boxes.covers)


def _across(tangent: Floats) -> Floats:
    """A unit vector across the tangent."""
    axis = np.eye(3)[int(np.argmin(np.abs(tangent)))]
    across: Floats = np.cross(tangent, axis)
    return across / float(np.linalg.norm(across))


def _frame_on(normal: Floats, frame: Floats) -> Floats:
    """Axes whose third is the normal and whose first is near one of the frame."""
    along = frame @ normal
    kept = int(np.argmin(np.abs(along)))
    first = frame[kept] - along[kept] * normal
    first = first / np.linalg.norm(first)
    return np.array([first, np.cross(normal, first), normal])


@compiled
def _to_leg(leg: Floats, points: Floats) -> Floats:
    out = np.empty(points.shape[0])
    for i in range(points.shape[0]):
        out[i] = leg_distance(leg, points[i, 0], points[i, 1], points[i, 2])
    return out


def _normals(leg: Floats, points: Floats) -> Floats:
    """(n, 3) unit vectors away from the nearest place of a convex leg."""
    local = points - leg[:3]
    along = local @ leg[3:6]
    away = local - np.clip(along, 0.0, leg[12])[:, None] * leg[3:6]
    if leg[19] == 0:
        for axis, half in ((leg[6:9], leg[13]), (leg[9:12], leg[14])):
            across = local @ axis
            away = away - np.clip(across, -half, half)[:, None] * axis
    unit: Floats = away / np.linalg.norm(away, axis=1)[:, None]
    return unit
