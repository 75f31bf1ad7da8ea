"""Maps: the field of one load case on a plane, or the largest over several heights."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.adaptive_maps import FEWEST, Layer, adaptive_layer, direct_layer
from engine.case_fields import CaseFields, case_currents
from engine.circuits import LoadCase
from engine.conductors import Conductor, conductors
from engine.currents import case_phasors
from engine.errors import Cancelled, Progress
from engine.layout import Layout
from engine.masks import keepouts
from engine.sampling import Plane, PlaneSample, horizontal, on_plane

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: Pieces along the longer side of a map whose step is not stated.
_PIECES = 200
#: Left around what is drawn. [m]
_MARGIN = 1.0

#: x from, y from, x to, y to. [m]
Extent = tuple[float, float, float, float]


@dataclass(frozen=True, eq=False)
class MapResult:
    """Values on a grid, without a unit for display.

    Attributes
    ----------
    case : str
        Id of the load case.
    plane : Plane
        Where; of several heights, the lowest.
    heights : tuple of float
        Levels above the datum over which the values are the largest; empty for a plane
        that is not level. [m]
    xs, ys : (nx,), (ny,) float
        For a level plane x and y; otherwise distances along its edges. [m]
    values : (ny, nx) float
        RMS resultant of all frequencies above 0 Hz; 0 in masked places. [T]
    dc : (ny, nx) float or None
        At 0 Hz; None where no direct current flows. [T]
    mask : (ny, nx) bool
        Inside a conductor or a closed enclosure, at every height.
    frequencies : tuple of float
        Where current flows. [Hz]
    is_bound, bound_reason
        Whether the values are upper bounds because angles are unknown, and why.
    evaluations : int
        Points at which the field was summed.
    checked_error : float
        Largest deviation found between nodes of the map, of the local value; 0 where
        every point was evaluated. See `adaptive_maps`.
    """

    case: str
    plane: Plane
    heights: tuple[float, ...]
    xs: Floats
    ys: Floats
    values: Floats
    dc: Floats | None
    mask: Bools
    frequencies: tuple[float, ...]
    is_bound: bool
    bound_reason: str
    evaluations: int = 0
    checked_error: float = 0.0


def extent(layout: Layout) -> Extent:
    """A rectangle on plan around rooms, zones and receptors, or else the runs. [m]"""
    outlines = [room.outline for room in layout.rooms]
    outlines += [zone.outline for zone in layout.zones]
    points = [point for outline in outlines for point in outline]
    points += [receptor.at[:2] for receptor in layout.receptors]
    if not outlines:
        points += [vertex[:2] for run in layout.runs for vertex in run.route]
    if not points:
        return (0.0, 0.0, 10.0, 10.0)
    low, high = np.min(points, axis=0) - _MARGIN, np.max(points, axis=0) + _MARGIN
    return (float(low[0]), float(low[1]), float(high[0]), float(high[1]))


def field_map(
    layout: Layout,
    case: LoadCase,
    heights: Sequence[float],
    *,
    area: Extent | None = None,
    step: float | None = None,
    cache: field.ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> MapResult:
    """The field on a level plane, or the largest over several.

    Parameters
    ----------
    heights
        Levels above the datum, at least one. [m]
    area
        On plan; None: around everything that is placed. [m]
    step : float
        At most this far apart; None: 200 pieces along the longer side. [m]

    Raises
    ------
    UserError
        When the layout's geometry or the case's currents cannot be evaluated, or the
        map takes too many points.
    """
    if not heights:
        raise ValueError("a map needs at least one height")
    x0, y0, x1, y1 = extent(layout) if area is None else area
    planes = [horizontal((x0, x1), (y0, y1), z) for z in sorted(heights)]
    return _map(layout, case, planes, tuple(sorted(heights)), step, cache, cancelled,
                progress)  # fmt: skip


def plane_map(
    layout: Layout,
    case: LoadCase,
    plane: Plane,
    *,
    step: float | None = None,
    cache: field.ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> MapResult:
    """The field on any rectangle, along whose edges the map's axes run.

    Parameters and errors as `field_map`.
    """
    return _map(layout, case, [plane], (), step, cache, cancelled, progress)


def _map(
    layout: Layout,
    case: LoadCase,
    planes: Sequence[Plane],
    heights: tuple[float, ...],
    step: float | None,
    cache: field.ResponseCache | None,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> MapResult:
    parts: tuple[Conductor, ...] = conductors(layout)
    currents = case_currents(case_phasors(layout, case), parts, keepouts(layout, case))
    fields = CaseFields(parts, (currents,), cache, cancelled)
    edges = (planes[0].first, planes[0].second)
    longer = max(float(np.linalg.norm(edge)) for edge in edges)
    samples = [on_plane(plane, step or longer / _PIECES) for plane in planes]
    layers = [_layer(fields, sample) for sample in _told(samples, progress)]
    shape = samples[0].shape
    first, second = samples[0].first, samples[0].second
    if heights:
        first, second = first + planes[0].origin[0], second + planes[0].origin[1]
    reasons = sorted({layer.reason for layer in layers if layer.reason})
    dc = np.max([layer.dc for layer in layers], axis=0).reshape(shape)
    return MapResult(
        case=case.id,
        plane=planes[0],
        heights=heights,
        xs=first,
        ys=second,
        values=np.max([layer.ac for layer in layers], axis=0).reshape(shape),
        dc=dc if 0.0 in currents.frequencies else None,
        mask=np.all([layer.mask for layer in layers], axis=0).reshape(shape),
        frequencies=currents.frequencies,
        is_bound=bool(reasons),
        bound_reason="; ".join(reasons),
        evaluations=sum(layer.evaluations for layer in layers),
        checked_error=max(layer.checked_error for layer in layers),
    )


def _told(
    samples: Sequence[PlaneSample], progress: Progress | None
) -> Iterator[PlaneSample]:
    """The samples, telling how far the map is before each."""
    for k, sample in enumerate(samples):
        if progress is not None:
            progress(k / len(samples), "Computing the map")
        yield sample
    if progress is not None:
        progress(1.0, "Map computed")


def _layer(fields: CaseFields, sample: PlaneSample) -> Layer:
    """One plane: large ones by interpolation where the field is smooth."""
    if len(sample.points) < FEWEST:
        return direct_layer(fields, sample)
    return adaptive_layer(fields, sample)
