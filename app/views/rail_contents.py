"""What the height rail shows, as plain values: slabs, floors, runs, ticks. No Qt."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from app.height_curve import drawn_levels
from app.map_request import height_figures
from engine.conductors import conductors
from engine.errors import UserError
from engine.layout import Layout
from engine.run_conductors import N_KEPT, Same, run_conductors
from engine.runs import Bar, Run
from engine.zone_assessment import zone_floor

#: A leg that rises more steeply passes heights instead of lying at one. [m/m]
_LEVEL = 0.2

#: Room above and below all that is drawn. [m]
_MARGIN = 0.3


@dataclass(frozen=True)
class Band:
    """A range of heights with a name. [m above the datum]"""

    low: float
    high: float
    name: str


@dataclass(frozen=True)
class Tick:
    """A height that a click chooses: of a zone, or a floor.

    Attributes
    ----------
    z : float
        [m above the datum]
    text : str
        "z 5.10 · Office +1.00".
    zone : str
        Id; empty for a floor.
    """

    z: float
    text: str
    zone: str = ""

    @property
    def figures(self) -> str:
        """What is read where there is no room for names: "z 5.10"; a slab's name."""
        return self.text.partition(" · ")[0]


@dataclass(frozen=True)
class RailContents:
    """All that stands on the rail."""

    low: float
    high: float
    slabs: tuple[Band, ...]
    floors: tuple[Tick, ...]
    runs: tuple[Band, ...]
    ticks: tuple[Tick, ...]


def rail_contents(layout: Layout) -> RailContents:
    """What the rail shows of a layout."""
    low, high = drawn_levels(layout)
    runs = _run_bands(layout)
    low = min([low, *(band.low for band in runs)])
    high = max([high, *(band.high for band in runs)])
    return RailContents(
        low - _MARGIN,
        high + _MARGIN,
        _slabs(layout),
        _floors(layout),
        runs,
        _ticks(layout),
    )


def _slabs(layout: Layout) -> tuple[Band, ...]:
    """Slabs above rooms, each once."""
    found: dict[tuple[float, float], Band] = {}
    for room in layout.rooms:
        if room.slab_above:
            low = room.soffit_level
            low = room.ceiling_level if low is None else low
            key = (round(low, 3), round(low + room.slab_above, 3))
            found.setdefault(key, Band(low, low + room.slab_above, "slab"))
    return tuple(found.values())


def _floors(layout: Layout) -> tuple[Tick, ...]:
    # Storeys come first: where there is no room for all names, theirs are written.
    named = {s.floor_level: s.title for s in layout.storeys}
    for room in layout.rooms:
        named.setdefault(room.floor_level, f"floor of {room.title}")
    unit = layout.settings.length_unit
    return tuple(
        Tick(z, f"z {height_figures(z, unit)} · {name}") for z, name in named.items()
    )


def _ticks(layout: Layout) -> tuple[Tick, ...]:
    """The heights of the zones, from below; of equal ones, the first."""
    found: dict[float, Tick] = {}
    unit = layout.settings.length_unit
    for zone in layout.zones:
        floor = zone_floor(layout, zone)
        if floor is None:
            continue
        for height in zone.heights:
            z = round(floor + height, 6)
            text = f"z {height_figures(z, unit)} · {zone.title} "
            text += f"+{height_figures(height, unit)}"
            found.setdefault(z, Tick(z, text, zone.id))
    return tuple(found[z] for z in sorted(found))


def _run_bands(layout: Layout) -> tuple[Band, ...]:
    """Where legs of runs lie, overlapping ones together."""
    try:
        conductors(layout)
    except UserError:
        return ()
    return _merged([band for run in layout.runs for band in _own_bands(Same(run))])


@lru_cache(maxsize=N_KEPT)
def _own_bands(same: Same[Run]) -> tuple[Band, ...]:
    """Where the level legs of one run lie, overlapping ones together."""
    run = same.value
    legs: list[Band] = []
    for part in run_conductors(run, run.id):
        shape = part.shape
        size = (
            max(shape.width, shape.thickness)
            if isinstance(shape, Bar)
            else shape.diameter
        )
        for a, b in zip(part.path[:-1], part.path[1:], strict=True):
            across = float(((a[:2] - b[:2]) ** 2).sum() ** 0.5)
            if abs(float(a[2] - b[2])) <= _LEVEL * across:
                low, high = sorted((float(a[2]), float(b[2])))
                legs.append(Band(low - size / 2, high + size / 2, run.title))
    return _merged(legs)


def _merged(bands: Sequence[Band]) -> tuple[Band, ...]:
    merged: list[Band] = []
    names: list[dict[str, None]] = []
    for band in sorted(bands, key=lambda b: b.low):
        last = merged[-1] if merged else None
        if last is not None and band.low <= last.high + 0.05:
            merged[-1] = Band(last.low, max(last.high, band.high), "")
            names[-1][band.name] = None
        else:
            merged.append(band)
            names.append({band.name: None})
    return tuple(
        Band(band.low, band.high, ", ".join(together))
        for band, together in zip(merged, names, strict=True)
    )
