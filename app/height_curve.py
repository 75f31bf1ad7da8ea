"""A zone's largest value against height, for the height rail; no Qt."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from app.map_request import loaded
from app.margin_values import positions
from engine import field
from engine.errors import Cancelled, UserError
from engine.layout import Layout
from engine.masks import masked
from engine.zone_assessment import zone_floor

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]

#: Heights of one curve.
_HEIGHTS = 41


@dataclass(frozen=True, eq=False)
class HeightCurve:
    """The largest value over a zone's plan against height.

    Attributes
    ----------
    zone, case : str
        Ids.
    heights : (h,) float
        [m above the datum]
    values : (h,) float
        RMS resultant above 0 Hz, or at 0 Hz where only direct current flows; nan where
        all of the zone is masked. [T]
    joined : (h - 1,) bool
        Whether the curve goes on from a height to the next: not where the place of the
        largest value at one of them is masked at the other.
    """

    zone: str
    case: str
    heights: Floats
    values: Floats
    joined: Bools

    def gap_text(self, z: float) -> str:
        """Why there is no curve at a height; empty where there is, or beyond it. [m]"""
        k = int(np.searchsorted(self.heights, z)) - 1
        if not 0 <= k < len(self.joined):
            return ""
        if not np.all(np.isfinite(self.values[k : k + 2])):
            return "no curve: all of the zone is masked here"
        if not self.joined[k]:
            return (
                "curve broken: here conductors with their clearance, or a closed "
                "enclosure, begin to mask the place of the largest value"
            )
        return ""


def drawn_levels(layout: Layout) -> tuple[float, float]:
    """Lowest and highest level of everything that is drawn. [m above the datum]"""
    levels = [storey.floor_level for storey in layout.storeys]
    for room in layout.rooms:
        levels += [room.floor_level, room.ceiling_level]
    for enclosure in layout.enclosures:
        levels += [enclosure.z_from, enclosure.z_to]
    levels += [vertex[2] for run in layout.runs for vertex in run.route]
    levels += [receptor.at[2] for receptor in layout.receptors]
    for zone in layout.zones:
        floor = zone_floor(layout, zone)
        if floor is not None:
            levels += [floor, floor + max(zone.heights)]
    if not levels:
        return 0.0, 3.0
    low, high = min(levels), max(levels)
    return (low, high) if high - low > 0.5 else (low, low + 3.0)


def curve_heights(layout: Layout) -> Floats:
    """Even heights over all that is drawn, and those of the zones. [m]"""
    even = np.linspace(*drawn_levels(layout), _HEIGHTS)
    own = [
        floor + h
        for zone in layout.zones
        if (floor := zone_floor(layout, zone)) is not None
        for h in zone.heights
    ]
    return np.unique(np.concatenate([even, own[:20]]))


def height_curve(
    layout: Layout,
    case: str,
    zone: str,
    heights: Sequence[float] | Floats,
    *,
    cancelled: Cancelled | None = None,
) -> HeightCurve:
    """A zone's largest value at each of some heights, from a grid over its plan.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated, or the zone has no floor.
    ComputationCancelled
        When `cancelled` says so.
    """
    chosen = next(z for z in layout.zones if z.id == zone)
    if zone_floor(layout, chosen) is None:
        raise UserError(
            f"The zone “{chosen.title}” states neither a floor level nor a storey; "
            "state one of them to see its field against height."
        )
    ready = loaded(layout, case)
    levels = np.asarray(heights, np.float64)
    plan = np.unique(positions(layout, chosen)[:, :2], axis=0)
    points = np.concatenate(
        [np.zeros((0, 3))]
        + [np.column_stack([plan, np.full(len(plan), z)]) for z in levels]
    )
    values = np.zeros(len(points))
    if len(points) and ready.conductors and len(ready.currents.components):
        b = field.flux_density(
            ready.conductors, ready.currents.currents, points, cancelled=cancelled
        )
        whole = field.combined(b, ready.currents.components)
        found = whole.total_ac if whole.total_ac is not None else whole.dc
        assert found is not None, "components flow"
        values = found
    hidden = masked(ready.conductors, ready.currents.closed, points, chosen.clearance)
    table = np.where(hidden, -np.inf, values).reshape(len(levels), len(plan))
    largest = table.max(axis=1, initial=-np.inf)
    shown = np.where(np.isfinite(largest), largest, np.nan)
    return HeightCurve(zone, ready.case.id, levels, shown, _joined(table))


def _joined(table: Floats) -> Bools:
    """(h - 1,) from values (h, n), −inf where masked: see `HeightCurve`."""
    count, width = table.shape
    if not width:
        return np.zeros(max(0, count - 1), np.bool_)
    places, rows = table.argmax(axis=1), np.arange(count - 1)
    seen = np.isfinite(table)
    joined: Bools = seen[rows + 1, places[:-1]] & seen[rows, places[1:]]
    return joined
