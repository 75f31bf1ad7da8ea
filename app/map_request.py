"""What map is wanted, and its values: frozen requests in, plain arrays out, no Qt."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from app.field_store import FieldStore, Sample, sample_of
from app.view_state import Look
from engine import field
from engine.case_fields import CaseCurrents, case_currents
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.criteria import ReferenceLevel
from engine.currents import case_phasors
from engine.elevation import Upright
from engine.errors import Cancelled
from engine.layout import Layout
from engine.levels import ratios, what_is_missing
from engine.masks import keepouts
from engine.places import Receptor, Zone
from engine.readings import reading
from engine.units import LENGTH_UNITS
from engine.weighted_peak import weighted_peak
from engine.zone_assessment import zone_floor

Floats = npt.NDArray[np.float64]
Rect = tuple[float, float, float, float]
Fineness = Literal["coarse", "fine"]

#: Nodes of one map, and its points over all heights.
_NODES = {"coarse": 1120, "fine": 14_000}
_POINTS = {"coarse": 3400, "fine": 18_000}
_FEWEST_NODES = 300

#: A zone's levels count up to here above its floor, a receptor's this near. [m]
_STANDING, _NEAR = 2.0, 0.5

#: Above the floor, where no zone says at what height people are. [m]
DEFAULT_HEIGHT = 1.0


@dataclass(frozen=True)
class MapRequest:
    """A map of a rectangle on plan, or on an upright plane.

    Attributes
    ----------
    layout : Layout
    case : str
        Id of the load case.
    heights : tuple of float
        The values are the largest over them; rising, at least one. On an upright plane
        they only tell which reference levels count. [m above the datum]
    rect : (x0, y0, x1, y1)
        In the picture. [m]
    pixels : (across, up)
        Of the view that shows it.
    fineness
        "coarse" while something is being dragged.
    heights_name : str
        The heights, or the upright plane, in words, for the caption.
    upright : Upright or None
        Where the map stands; None: on plan, at the heights.
    """

    layout: Layout
    case: str
    heights: tuple[float, ...]
    rect: Rect
    pixels: tuple[int, int]
    fineness: Fineness
    heights_name: str = ""
    upright: Upright | None = None

    @property
    def n_layers(self) -> int:
        """How many values each place of the picture has."""
        return 1 if self.upright is not None else len(self.heights)


@dataclass(frozen=True, eq=False)
class Loaded:
    """A layout's conductors with the currents of one load case."""

    case: LoadCase
    conductors: tuple[Conductor, ...]
    currents: CaseCurrents


@dataclass(frozen=True, eq=False)
class MapValues:
    """Values at the nodes of a map, layer by layer, masks left aside.

    Attributes
    ----------
    request : MapRequest
    loaded : Loaded
    xs, ys : (nx,), (ny,) float
        [m]
    values : (h, ny, nx) float
        RMS resultant of all frequencies above 0 Hz; at 0 Hz where only direct current
        flows. [T]
    level_ratios : pairs of level and (h, ny, nx) float
        Ratio to each reference level that can be compared in this case. [-]
    is_direct : bool
        Only direct current flows.
    is_bound : bool
        Some value is an upper bound, because angles are unknown.
    """

    request: MapRequest
    loaded: Loaded
    xs: Floats
    ys: Floats
    values: Floats
    level_ratios: tuple[tuple[ReferenceLevel, Floats], ...]
    is_direct: bool
    is_bound: bool


def case_of(layout: Layout, case: str) -> LoadCase:
    """The load case with that id, or the first."""
    return next((c for c in layout.cases if c.id == case), layout.cases[0])


def zone_of(layout: Layout, zone: str) -> Zone | None:
    """The zone with that id, or the first that states its floor, or None."""
    chosen = next((z for z in layout.zones if z.id == zone), None)
    if chosen is not None and zone_floor(layout, chosen) is not None:
        return chosen
    return next((z for z in layout.zones if zone_floor(layout, z) is not None), None)


def heights_of(layout: Layout, look: Look) -> tuple[tuple[float, ...], str]:
    """The heights of the map that a look asks for, and how to call them. [m]"""
    zone = zone_of(layout, look.zone)
    if look.height is not None:
        return (look.height,), height_text(layout, look.height, zone)
    if zone is not None:
        floor = zone_floor(layout, zone) or 0.0
        levels = tuple(sorted({floor + h for h in zone.heights}))
        return levels, f"largest over heights, {zone.title}"
    level = _lowest_floor(layout) + DEFAULT_HEIGHT
    return (level,), height_text(layout, level, None)


def _lowest_floor(layout: Layout) -> float:
    floors = [s.floor_level for s in layout.storeys]
    floors += [room.floor_level for room in layout.rooms]
    return min(floors, default=0.0)


def height_figures(metres: float, unit: str) -> str:
    """A height in the display unit `unit`, without its name.

    Examples
    --------
    >>> height_figures(5.1, "m"), height_figures(-0.25, "mm"), height_figures(-0.0, "m")
    ('5.10', '−250', '0.00')
    """
    places = {"m": 2, "mm": 0, "ft": 2, "in": 1}[unit]
    text = f"{metres / LENGTH_UNITS[unit]:.{places}f}"
    if float(text) == 0.0:
        text = text.removeprefix("-")
    return text.replace("-", "−")


def height_text(layout: Layout, z: float, zone: Zone | None = None) -> str:
    """A height as "z 5.10 m (Office +1.00)": above the datum and above a floor. [m]"""
    unit = layout.settings.length_unit
    text = f"z {height_figures(z, unit)} {unit}"
    name, floor = floor_below(layout, z, zone)
    if floor is None:
        return text
    return f"{text} ({name} +{height_figures(z - floor, unit)})"


def floor_below(
    layout: Layout, z: float, zone: Zone | None = None
) -> tuple[str, float | None]:
    """The highest floor not above a height, and its name; a zone's own goes first."""
    if zone is not None:
        floor = zone_floor(layout, zone)
        if floor is not None and floor <= z <= floor + max(zone.heights) + 1e-9:
            return zone.title, floor
    floors = [(s.floor_level, s.title) for s in layout.storeys]
    floors += [(room.floor_level, room.title) for room in layout.rooms]
    below = [(level, name) for level, name in floors if level <= z + 1e-9]
    if not below:
        return "", None
    level = max(level for level, _ in below)
    return next(name for at, name in below if at == level), level


def loaded(layout: Layout, case: str) -> Loaded:
    """Conductors and currents of a layout in one case.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated.
    """
    chosen = case_of(layout, case)
    parts = conductors(layout)
    phasors = case_phasors(layout, chosen)
    return Loaded(
        chosen, parts, case_currents(phasors, parts, keepouts(layout, chosen))
    )


def nodes(request: MapRequest) -> tuple[Floats, Floats, Sample]:
    """Axes of the map's grid, and its points height by height. [m]"""
    x0, y0, x1, y1 = request.rect
    across, up = max(x1 - x0, 1e-6), max(y1 - y0, 1e-6)
    count = max(
        _FEWEST_NODES,
        min(
            _NODES[request.fineness],
            _POINTS[request.fineness] // request.n_layers,
        ),
    )
    nx = int(min(max(8, round(math.sqrt(count * across / up))), count // 8))
    ny = max(8, count // nx)
    xs, ys = np.linspace(x0, x1, nx), np.linspace(y0, y1, ny)
    plan = np.stack(np.meshgrid(xs, ys), axis=-1).reshape(-1, 2)
    if request.upright is not None:
        return xs, ys, sample_of(request.upright.places(plan))
    points = np.concatenate(
        [np.column_stack([plan, np.full(len(plan), z)]) for z in request.heights]
    )
    return xs, ys, sample_of(points)


def map_values(
    request: MapRequest,
    store: FieldStore,
    *,
    cancelled: Cancelled | None = None,
) -> MapValues:
    """Compute the values of a map.

    Parameters
    ----------
    store : FieldStore
        Keeps what does not change from one request to the next.

    Raises
    ------
    UserError
        When the geometry or the currents cannot be evaluated.
    ComputationCancelled
        When `cancelled` says so.
    """
    ready = loaded(request.layout, request.case)
    xs, ys, sample = nodes(request)
    b = store.flux_density(
        ready.conductors,
        ready.currents.currents,
        sample,
        cancelled=cancelled,
    )
    shape = (request.n_layers, len(ys), len(xs))
    whole = field.combined(b, ready.currents.components)
    values = whole.total_ac if whole.total_ac is not None else whole.dc
    is_direct = whole.total_ac is None and whole.dc is not None
    return MapValues(
        request=request,
        loaded=ready,
        xs=xs,
        ys=ys,
        values=(np.zeros(len(sample.points)) if values is None else values).reshape(
            shape
        ),
        level_ratios=tuple(
            (level, found.reshape(shape))
            for level, found in ratios_at(
                ready, b, comparable_levels(request.layout, request.heights)
            )
        ),
        is_direct=is_direct,
        is_bound=whole.is_bound,
    )


def reaches(layout: Layout, zone: Zone, heights: tuple[float, ...]) -> bool:
    """Whether some of the heights are those of people in the zone. [m]"""
    floor = zone_floor(layout, zone)
    if floor is None:
        return False
    top = floor + max(*zone.heights, *(zone.volume or ()), _STANDING)
    return any(floor <= z <= top for z in heights)


def comparable_levels(
    layout: Layout, heights: tuple[float, ...]
) -> tuple[ReferenceLevel, ...]:
    """The levels that lack nothing and that are named at some of the heights.

    Of zones that reach them, and of receptors; where there is none, of all.
    """
    complete = [level for level in layout.levels if not what_is_missing(level)]
    low, high = min(heights) - _NEAR, max(heights) + _NEAR
    here: list[Zone | Receptor] = [
        *(zone for zone in layout.zones if reaches(layout, zone, heights)),
        *(place for place in layout.receptors if low <= place.at[2] <= high),
    ]
    every: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    for places in (here, every):
        named = {id for place in places for id in place.levels}
        found = tuple(level for level in complete if level.id in named)
        if found:
            return found
    return ()


def ratios_at(
    ready: Loaded,
    b: npt.NDArray[np.complex128],
    levels: tuple[ReferenceLevel, ...],
) -> list[tuple[ReferenceLevel, Floats]]:
    """Levels with the ratio (n,) of a field (c, n, 3) to each, AC or DC the larger."""
    found = []
    read = {}
    for level in levels:
        key = (level.basis, level.component)
        if key not in read:
            read[key] = reading(b, ready.currents.components, *key).by_frequency
        compared = ratios(level, read[key])
        alternating = compared.ac
        if alternating is not None and level.sum_rule == "weighted peak":
            alternating = weighted_peak(b, ready.currents.components, level).values
        known = [r for r in (alternating, compared.dc) if r is not None]
        if known and not compared.missing:
            found.append((level, np.max(known, axis=0)))
    return found
