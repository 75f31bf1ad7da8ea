"""Where people are, as a region to search, and the first places looked at in it."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray
from shapely.geometry import Polygon

from engine.case_fields import CaseFields
from engine.masks import mask_surfaces
from engine.places import SpatialRule
from engine.sampling import held_inside
from engine.surface_cells import Cells, Fineness, cells_in_outline, joined, walls

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: Pieces along a side of an average zone, and the finest piece near conductors. [m]
_PIECES = 60
_COARSE_LEAST = 0.05
_FINEST = 0.02


@dataclass(frozen=True, eq=False)
class Region:
    """Where people are and how their exposure is evaluated there.

    Attributes
    ----------
    outline : Polygon
        On plan, not empty. [m]
    floor : float
        [m above the datum]
    heights : tuple of float
        Above the floor. [m]
    volume : (float, float)
        Lowest and highest height of the volume rule. [m]
    clearance : float
        Kept from every conductor's surface. [m]
    """

    outline: Polygon
    floor: float
    heights: tuple[float, ...]
    volume: tuple[float, float]
    rule: SpatialRule
    clearance: float

    @cached_property
    def step(self) -> float:
        """Coarsest step of the search on plan. [m]"""
        return max(_COARSE_LEAST, float(np.sqrt(self.outline.area)) / _PIECES)

    @property
    def offsets(self) -> Floats:
        """(q,) heights over one position whose values are averaged there. [m]"""
        if self.rule == "three-height mean":
            return np.array(self.heights)
        return np.zeros(1)


@dataclass(frozen=True, eq=False)
class Sample:
    """Positions of the first grid; layer −1 stands on no level area."""

    cells: Cells
    layers: NDArray[np.int64]


def first_sample(fields: CaseFields, region: Region) -> Sample:
    """The first grid: level areas; for a volume its skin and the masks' surfaces."""
    base = region.floor
    if region.rule == "maximum over volume":
        return _volume_sample(fields, region)
    heights = base + np.array(region.heights)

    def least_distance(points: Floats) -> Floats:
        over = [
            np.column_stack([points[:, :2], np.full(len(points), z)]) for z in heights
        ]
        least: Floats = np.min([fields.distances(p) for p in over], axis=0)
        return least

    fineness = Fineness(region.step, _FINEST, least_distance, region.clearance)
    plan = cells_in_outline(region.outline, base, fineness)
    if region.rule == "three-height mean":
        return Sample(plan, np.zeros(len(plan.areas), np.int64))
    return _layered(plan, heights)


def _layered(plan: Cells, levels: Floats) -> Sample:
    """The same plan at several levels."""
    layers = [
        Cells(np.column_stack([plan.points[:, :2], np.full(len(plan.areas), z)]),
              plan.areas, plan.steps)
        for z in levels
    ]  # fmt: skip
    return Sample(joined(layers), np.repeat(np.arange(len(levels)), len(plan.areas)))


def _volume_sample(fields: CaseFields, region: Region) -> Sample:
    """Bottom, top, walls and mask surfaces; the listed heights serve the areas only."""
    z = (region.floor + region.volume[0], region.floor + region.volume[1])
    inner = [region.floor + h for h in region.heights]
    levels = sorted({*z, *(level for level in inner if z[0] < level < z[1])})
    fineness = Fineness(region.step, _FINEST, fields.distances, region.clearance)
    parts = [cells_in_outline(region.outline, level, fineness) for level in levels]
    layers = [np.full(len(part.areas), k) for k, part in enumerate(parts)]
    skins = [walls(region.outline, z, fineness)] if z[0] < z[1] else []
    closed = {k.item: k for case in fields.cases for k in case.closed}
    skins.append(
        _within(
            mask_surfaces(
                fields.conductors, tuple(closed.values()), region.clearance, fineness
            ),
            region, z,
        )
    )  # fmt: skip
    layers += [np.full(len(skin.areas), -1) for skin in skins]
    return Sample(joined([*parts, *skins]), np.concatenate(layers))


def _within(cells: Cells, region: Region, z: tuple[float, float]) -> Cells:
    """The points inside the volume."""
    points = cells.points
    inside = (points[:, 2] >= z[0]) & (points[:, 2] <= z[1])
    inside[inside] = np.all(
        held_inside(region.outline, points[inside]) == points[inside], axis=1
    )
    return Cells(points[inside], cells.areas[inside], cells.steps[inside])
