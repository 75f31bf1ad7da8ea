"""Surfaces on which a maximum can lie, covered by boxes that are cut ever smaller."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Protocol

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.affinity import affine_transform
from shapely.geometry import LineString, Polygon, box

from engine.case_fields import CaseFields
from engine.certified.boxes import Boxes, halved
from engine.certified.masking import slopes_of
from engine.certified.tubes import Tube
from engine.field.legs import legs_of
from engine.regions import Region

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

#: A side this much longer than the other is cut alone.
_SLENDER = 1.5


class Cover(Protocol):
    """A surface, covered by boxes."""

    def start(self) -> Boxes:
        """Boxes that hold all of it."""

    def split(self, boxes: Boxes) -> tuple[Boxes, Integers]:
        """Smaller boxes that hold what the boxes hold, and whose parts they are."""

    def tight(self, boxes: Boxes) -> Boxes:
        """Boxes in which the surface lies inside those boxes."""


class Flat:
    """A plane piece with an outline in its own two axes.

    Parameters
    ----------
    number : int
        Of the cover.
    origin : (3,) float
        [m]
    frame : (3, 3) float
        Orthonormal; the first two rows lie in the plane.
    outline : Polygon
        In the plane's axes from the origin. [m]
    """

    def __init__(
        self, number: int, origin: Floats, frame: Floats, outline: Polygon
    ) -> None:
        self._number, self._origin, self._frame = number, origin, frame
        self._outline = outline
        shapely.prepare(outline)
        whole = box(*outline.bounds)
        self._is_whole = bool(outline.area >= whole.area * (1 - 1e-12))

    def start(self) -> Boxes:
        u0, v0, u1, v1 = self._outline.bounds
        middle = np.array([(u0 + u1) / 2, (v0 + v1) / 2])
        halves = np.array([[(u1 - u0) / 2, (v1 - v0) / 2, 0.0]])
        return self._made(middle[None], halves)

    def _made(self, uv: Floats, halves: Floats) -> Boxes:
        centres = self._origin + uv @ self._frame[:2]
        frames = np.broadcast_to(self._frame, (len(uv), 3, 3)).copy()
        return Boxes(centres, frames, halves, np.full(len(uv), self._number))

    def split(self, boxes: Boxes) -> tuple[Boxes, Integers]:
        children, parents = halved(boxes, _sides_to_cut(boxes.halves))
        if self._is_whole:
            return children, parents
        return self._clipped(children, parents)

    def _clipped(self, boxes: Boxes, parents: Integers) -> tuple[Boxes, Integers]:
        """Boxes drawn in to what of the outline lies in them."""
        uv = (boxes.centres - self._origin) @ self._frame[:2].T
        low, high = uv - boxes.halves[:, :2], uv + boxes.halves[:, :2]
        cells = shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1])
        cut = ~shapely.contains(self._outline, cells)
        pieces = shapely.bounds(shapely.intersection(cells[cut], self._outline))
        low[cut], high[cut] = pieces[:, :2], pieces[:, 2:]
        there = np.isfinite(low).all(axis=1)
        low, high = low[there], high[there]
        halves = np.column_stack([(high - low) / 2, np.zeros(len(low))])
        return self._made((low + high) / 2, halves), parents[there]

    def tight(self, boxes: Boxes) -> Boxes:
        return boxes


def _sides_to_cut(halves: Floats) -> NDArray[np.bool_]:
    """(n, 3) which sides of flat boxes are cut in two."""
    a, b = halves[:, 0], halves[:, 1]
    return np.stack([a * _SLENDER >= b, b * _SLENDER >= a, np.zeros(len(a))], 1) > 0


def covers_of(fields: CaseFields, region: Region) -> list[Cover]:
    """The surfaces on which the largest value of a region must lie.

    Level areas for the rules over heights. The volume rule needs its skin and the
    surfaces of the masks in it: in between RMS² and the like are subharmonic. Faces
    of what is closed in one case only do no harm in another.
    """
    if region.rule == "three-height mean":
        return [_level(0, region.outline, region.floor)]
    if region.rule == "maximum at heights":
        return [
            _level(k, region.outline, region.floor + height)
            for k, height in enumerate(sorted(set(region.heights)))
        ]
    if region.rule != "maximum over volume":
        raise ValueError(f"{region.rule} has no largest place")
    low, high = (region.floor + height for height in region.volume)
    covers: list[Cover] = [_level(0, region.outline, low)]
    if not low < high:
        return covers
    covers.append(_level(1, region.outline, high))
    _add_walls(covers, region.outline, (low, high))
    _add_enclosures(covers, fields, region.outline, (low, high))
    table = legs_of(fields.conductors).table
    for leg, slope in zip(table, slopes_of(table), strict=True):
        tube = Tube(
            len(covers), leg, float(slope), region.clearance, region.outline,
            (low, high),
        )  # fmt: skip
        if len(tube.start()):
            covers.append(tube)
    return covers


def _level(number: int, outline: Polygon, z: float) -> Flat:
    """A level area, cut along its outline's longest direction."""
    around = shapely.get_coordinates(shapely.minimum_rotated_rectangle(outline))
    edges = np.diff(around, axis=0)
    longest = edges[int(np.argmax(np.linalg.norm(edges, axis=1)))]
    c, s = longest / np.linalg.norm(longest)
    x0, y0 = around[0]
    frame = np.array([(c, s, 0.0), (-s, c, 0.0), (0.0, 0.0, 1.0)])
    turned = affine_transform(outline, (c, s, -s, c, -c * x0 - s * y0, s * x0 - c * y0))
    return Flat(number, np.array([x0, y0, z]), frame, turned)


def _add_walls(covers: list[Cover], outline: Polygon, z: tuple[float, float]) -> None:
    for ring in (outline.exterior, *outline.interiors):
        xy = shapely.get_coordinates(ring)
        for a, b in pairwise(xy):
            if np.any(a != b):
                covers.append(_wall(len(covers), a, b, z))


def _wall(number: int, a: Floats, b: Floats, z: tuple[float, float]) -> Flat:
    """The upright face over a line on plan."""
    length = float(np.linalg.norm(b - a))
    c, s = (b - a) / length
    frame = np.array([(c, s, 0.0), (0.0, 0.0, 1.0), (s, -c, 0.0)])
    origin = np.array([a[0], a[1], z[0]])
    return Flat(number, origin, frame, box(0.0, 0.0, length, z[1] - z[0]))


def _add_enclosures(
    covers: list[Cover], fields: CaseFields, outline: Polygon, z: tuple[float, float]
) -> None:
    """The faces of closed enclosures inside the volume."""
    closed = {keepout.key: keepout for case in fields.cases for keepout in case.closed}
    for keepout in closed.values():
        low, high = max(z[0], keepout.z_from), min(z[1], keepout.z_to)
        if not low < high or keepout.outline.is_empty:
            continue
        rings = (keepout.outline.exterior, *keepout.outline.interiors)
        for ring in rings:
            for a, b in pairwise(shapely.get_coordinates(ring)):
                line = shapely.intersection(LineString([a, b]), outline)
                for piece in _pieces(line, LineString):
                    xy = shapely.get_coordinates(piece)
                    covers.append(_wall(len(covers), xy[0], xy[-1], (low, high)))
        for level in (keepout.z_from, keepout.z_to):
            if z[0] < level < z[1]:
                common = shapely.intersection(keepout.outline, outline)
                for piece in _pieces(common, Polygon):
                    covers.append(_level(len(covers), piece, level))


def _pieces(shape: object, kind: type) -> Sequence[object]:
    """The parts of a shape that have a length or an area."""
    parts = getattr(shape, "geoms", [shape])
    return [p for p in parts if isinstance(p, kind) and not p.is_empty]  # type: ignore[attr-defined]
