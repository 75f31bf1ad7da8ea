"""Edges of masks: where a point that a mask hides comes out of it.

A field is largest close to its conductors, so that a maximum over places where people
can be often lies on the very edge of a mask. A grid comes near that edge; points that
are moved onto it lie on it.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import shapely
from numpy.typing import NDArray

from engine.case_fields import CaseFields
from engine.masks import Keepout
from engine.regions import Region
from engine.sampling import held_inside
from engine.surface_cells import Cells, joined

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

_ROUNDS = 6  # of Newton's method
#: For the slope of the distance. [m]
_APART = 1e-6
#: Points are set this far outside of the edge. [m]
_OUTSIDE = 1e-7
#: Where the distance rises less per metre, no way out is looked for.
_LEAST_SLOPE = 0.05
#: Points of a grid deeper in a mask than so many steps have no edge beside them.
_STEPS = 1.5


class MaskEdges:
    """The edges of a region's masks.

    Parameters
    ----------
    fields : CaseFields
        Their conductors keep people at the region's clearance.
    region : Region
        Of a volume, points move freely; otherwise they keep their height.
    closed
        Enclosures that nobody can be in; a volume has their faces in its first grid.
    """

    def __init__(
        self, fields: CaseFields, region: Region, closed: Sequence[Keepout]
    ) -> None:
        self._fields, self._region = fields, region
        self._is_volume = region.rule == "maximum over volume"
        self._closed = () if self._is_volume else tuple(closed)

    def variants(self, places: Floats) -> Floats:
        """The places with the hidden ones on the edges of what hides them.

        Parameters
        ----------
        places : (n, 3) float
            [m]

        Returns
        -------
        (v, n, 3) float
            Of a mean over heights the places themselves, then one row for each height
            that some mask hides: a place counts there as long as one height does.
        """
        if self._region.rule != "three-height mean":
            return self._moved(places)[None]
        rows = [places]
        for offset in self._region.offsets:
            up = np.array([0.0, 0.0, offset])
            moved = self._moved(places + up) - up
            if np.any(moved[:, :2] != places[:, :2]):
                rows.append(np.column_stack([moved[:, :2], places[:, 2]]))
        return np.stack(rows)

    def beside(self, cells: Cells) -> Cells:
        """Places on the edges beside a grid, as pieces without area."""
        found = []
        for offset in self._region.offsets:
            up = np.array([0.0, 0.0, offset])
            points = cells.points + up
            moved = self._moved(points, _STEPS * cells.steps)
            out = np.any(moved != points, axis=1)
            found.append(
                Cells(moved[out] - up, np.zeros(int(out.sum())), cells.steps[out])
            )
        return joined(found)

    def _moved(self, points: Floats, deepest: Floats | None = None) -> Floats:
        """(n, 3) points, the hidden ones moved out; `deepest` limits how far."""
        moved = points.copy()
        clearance = self._region.clearance
        distances = self._fields.distances(points)
        hidden = (distances < clearance) & (distances > 0)
        if deepest is not None:
            hidden &= clearance - distances <= deepest
        if np.any(hidden):
            moved[hidden] = self._at_clearance(points[hidden])
        for keepout in self._closed:
            inside = keepout.masks(moved)
            if np.any(inside):
                limit = None if deepest is None else deepest[inside]
                moved[inside] = _beside(keepout, moved[inside], limit)
        changed = np.any(moved != points, axis=1)
        held = held_inside(self._region.outline, moved[changed])
        if self._is_volume:
            low, high = (self._region.floor + h for h in self._region.volume)
            held = np.column_stack([held[:, :2], np.clip(held[:, 2], low, high)])
        moved[changed] = held
        return moved

    def _at_clearance(self, points: Floats) -> Floats:
        """The points at the clearance of conductors; as they are where none is near."""
        target = self._region.clearance + _OUTSIDE
        axes = np.eye(3)[: 3 if self._is_volume else 2]
        moved = points.copy()
        for _ in range(_ROUNDS):
            sides = [moved + _APART * axis for axis in axes]
            at = self._fields.distances(np.concatenate([moved, *sides]))
            here, *beside = at.reshape(len(axes) + 1, -1)
            slope = (np.array(beside) - here).T / _APART
            steepness = np.linalg.norm(slope, axis=1)
            rising = steepness > _LEAST_SLOPE
            step = np.where(rising, target - here, 0.0) / np.where(
                rising, steepness**2, 1.0
            )
            # No further than the mask is wide.
            length = np.abs(step) * steepness
            step *= np.minimum(1.0, target / np.maximum(length, target))
            moved += (step[:, None] * slope) @ axes
        arrived = self._fields.distances(moved) >= self._region.clearance
        return np.where(arrived[:, None], moved, points)


def _beside(keepout: Keepout, points: Floats, deepest: Floats | None) -> Floats:
    """Points in an enclosure, on the nearest side of its outline on plan."""
    ring = shapely.boundary(keepout.outline)
    lines = shapely.shortest_line(shapely.points(points[:, :2]), ring)
    starts, ends = shapely.get_coordinates(lines).reshape(-1, 2, 2).swapaxes(0, 1)
    way = ends - starts
    length = np.linalg.norm(way, axis=1)
    # A hair further: the side itself may count as inside after rounding.
    part = (length + _OUTSIDE) / np.maximum(length, _OUTSIDE)
    moved = points.copy()
    moved[:, :2] = starts + part[:, None] * way
    if deepest is not None:
        moved = np.where((length <= deepest)[:, None], moved, points)
    return moved
