"""The field at the pointer: value, components and the highest ratio; no Qt."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely

from app.map_request import (
    Loaded,
    comparable_levels,
    floor_below,
    heights_of,
    loaded,
    ratios_at,
    reaches,
    zone_of,
)
from app.view_state import Look
from engine import field
from engine.comparability import blocking_sentences, obstacles
from engine.criteria import ReferenceLevel
from engine.errors import Cancelled
from engine.faults import Remark, case_faults, layout_faults
from engine.items import Point3
from engine.layout import Layout
from engine.masks import masked
from engine.places import Zone
from engine.reach import within_reach
from engine.sampling import area_of


@dataclass(frozen=True)
class ReadoutRequest:
    """What is asked: the field over a place on plan, as the look shows it.

    `z` is None for the height or heights of the look, where the largest is taken; an
    elevation states it. `held` is the layout whose value stands beside. [m]
    """

    layout: Layout
    look: Look
    x: float
    y: float
    z: float | None = None
    held: Layout | None = None


@dataclass(frozen=True)
class Readout:
    """The field at one place.

    Attributes
    ----------
    at : Point3
        [m above the datum]
    floor_name, above_floor
        The storey or zone, and the height above its floor; empty and None below all.
    reason : str
        Why there is no value; empty otherwise.
    resultant : float or None
        RMS above 0 Hz, or at 0 Hz where only direct current flows. [T]
    components : (x, y, z) or None
        RMS along the axes, over the same frequencies. [T]
    is_direct, is_bound, near_field : bool
    ratio : float or None
        The highest of the comparisons that can be made there.
    level_title : str
    was : float or None
        What `resultant` is in the layout that is held as before. [T]
    """

    at: Point3
    floor_name: str = ""
    above_floor: float | None = None
    reason: str = ""
    resultant: float | None = None
    components: tuple[float, float, float] | None = None
    is_direct: bool = False
    is_bound: bool = False
    near_field: bool = False
    ratio: float | None = None
    level_title: str = ""
    was: float | None = None


def readout(request: ReadoutRequest, *, cancelled: Cancelled | None = None) -> Readout:
    """The field where the pointer is.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated.
    """
    layout, look = request.layout, request.look
    ready = loaded(layout, look.case)
    heights = (request.z,) if request.z is not None else heights_of(layout, look)[0]
    points = np.array([(request.x, request.y, z) for z in heights], np.float64)
    hidden = masked(ready.conductors, ready.currents.closed, points)
    if hidden.all():
        return _placed(layout, look, points[0], reason=_why_masked(ready, points))
    points = points[~hidden]
    if not ready.conductors or not len(ready.currents.components):
        return _placed(layout, look, points[0], reason="no current flows")
    b = field.flux_density(
        ready.conductors, ready.currents.currents, points, cancelled=cancelled
    )
    whole = field.combined(b, ready.currents.components)
    values = whole.total_ac if whole.total_ac is not None else whole.dc
    assert values is not None, "components flow"
    best = int(np.argmax(values))
    is_direct = whole.total_ac is None
    rows = [
        k
        for k, c in enumerate(ready.currents.components)
        if (c.frequency == 0) == is_direct
    ]
    axes = np.sqrt(np.sum(np.abs(b[rows, best]) ** 2, axis=0))
    compared = ratios_at(ready, b, _levels(request, ready, heights))
    level, ratio = max(
        ((level, float(r.max())) for level, r in compared),
        key=lambda pair: pair[1],
        default=(None, None),
    )
    return _placed(
        layout,
        look,
        points[best],
        resultant=float(values[best]),
        components=(float(axes[0]), float(axes[1]), float(axes[2])),
        is_direct=is_direct,
        is_bound=whole.is_bound,
        near_field=_is_near(ready, points[[best]]),
        ratio=ratio,
        level_title="" if level is None else level.title,
    )


def _is_near(ready: Loaded, point: npt.NDArray[np.float64]) -> bool:
    """Whether one point (1, 3) is nearer to a conductor than two of its widths."""
    near = within_reach(ready.conductors, point, widths=2.0)
    return bool(near) and bool(field.near_field(near, point)[0])


def _placed(layout: Layout, look: Look, point: object, **values: object) -> Readout:
    x, y, z = (float(c) for c in np.asarray(point))
    name, floor = floor_below(layout, z, zone_of(layout, look.zone))
    above = None if floor is None else z - floor
    return Readout((x, y, z), name, above, **values)  # type: ignore[arg-type]


def _why_masked(ready: Loaded, points: object) -> str:
    grid = np.asarray(points)
    for keepout in ready.currents.closed:
        if keepout.masks(grid).any():
            return f"in {keepout.words}"
    return "inside a conductor"


def _levels(
    request: ReadoutRequest, ready: Loaded, heights: tuple[float, ...]
) -> tuple[ReferenceLevel, ...]:
    """Levels that can be compared here: of the zones around, else of the zone shown."""
    layout = request.layout
    around = [
        zone
        for zone in layout.zones
        if reaches(layout, zone, heights)
        and shapely.intersects_xy(area_of(zone.outline), request.x, request.y)
    ]
    shown = zone_of(layout, request.look.zone)
    zones: list[Zone] = around or ([] if shown is None else [shown])
    faults: tuple[Remark, ...] = (
        *layout_faults(layout),
        *case_faults(layout, ready.case),
    )
    named = {
        id
        for zone in zones
        if not blocking_sentences(layout, zone, faults)
        for id in zone.levels
        for level in layout.levels
        if level.id == id and not obstacles(zone, level, ready.currents.frequencies)
    }
    return tuple(x for x in comparable_levels(layout, heights) if x.id in named)
