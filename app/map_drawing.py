"""From the values of a map to its picture: smooth colours, exact masks, iso-lines."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import lru_cache
from typing import Protocol

import numpy as np
import numpy.typing as npt
from PySide6.QtGui import QImage

from app.map_picture import DrawnIsoLine, MapPicture, MaskedArea
from app.map_request import MapValues, height_figures
from engine import field
from engine.colour_ramp import N_COLOURS, Scale, rgb_ramp
from engine.conductor import Conductor
from engine.iso_lines import IsoLine, iso_lines, round_values
from engine.levels import level_at
from engine.masks import Keepout
from engine.runs import Bar
from engine.units import in_unit, significant, to_tesla

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]

#: Pixels along the longer side of the image.
_PIXELS = {"coarse": 240, "fine": 800}

#: Stands for no field at all, so that logarithms exist. [T]
_NOTHING = 1e-15

#: Iso-lines shorter than this part of the map's longer side have no label.
_LABELLED = 0.06


class Masks(Protocol):
    """Where nobody is, and what is left of values there."""

    def areas(self) -> tuple[MaskedArea, ...]:
        """What is hatched."""

    def largest(
        self, logs: Floats, xs: Floats, ys: Floats, *, with_conductors: bool = True
    ) -> Floats:
        """(rows, columns) largest over the layers (h, ny, nx); −inf where masked."""


def map_picture(values: MapValues, masks: Masks | None = None) -> MapPicture:
    """Draw a map: interpolated in the logarithm between nodes, masks pixel by pixel.

    Parameters
    ----------
    values : MapValues
    masks : Masks or None
        Those of an upright plane; None: those of the heights on plan.
    """
    request = values.request
    settings = request.layout.settings
    columns, rows = _image_size(values)
    x0, y0, x1, y1 = request.rect
    xs = x0 + (np.arange(columns) + 0.5) * (x1 - x0) / columns
    ys = y0 + (np.arange(rows) + 0.5) * (y1 - y0) / rows
    masks = masks or _Masks(values)
    logs = masks.largest(_logs(values.values), xs, ys)
    unit = settings.flux_density_unit
    return MapPicture(
        image=coloured(logs, settings.map_low, settings.map_high, settings.map_scale),
        rect=request.rect,
        iso_lines=_lines(values, masks, unit),
        masked=masks.areas(),
        caption=caption(values),
        unit=unit,
        low=in_unit(settings.map_low, unit),
        high=in_unit(settings.map_high, unit),
        scale=settings.map_scale,
        marks=_marks(values, unit),
        extent=None if request.fineness == "coarse" else _extent(logs),
        is_coarse=request.fineness == "coarse",
        is_direct=values.is_direct,
    )


def _extent(logs: Floats) -> tuple[float, float] | None:
    """Smallest and largest value of what is neither masked nor without field. [T]"""
    shown = logs[logs > math.log10(_NOTHING)]
    if not shown.size:
        return None
    return 10.0 ** float(shown.min()), 10.0 ** float(shown.max())


def caption(values: MapValues) -> str:
    """Quantity, heights and case in one line."""
    quantity = "Flux density, DC" if values.is_direct else "RMS flux density"
    if values.is_bound:
        quantity += ", upper bound"
    case = values.loaded.case.title
    return " · ".join(t for t in (quantity, values.request.heights_name, case) if t)


def _image_size(values: MapValues) -> tuple[int, int]:
    """Columns and rows: those of the view, but no more than serve."""
    across, up = values.request.pixels
    most = _PIXELS[values.request.fineness]
    factor = min(1.0, most / max(across, up, 1))
    return max(2, round(across * factor)), max(2, round(up * factor))


def _logs(values: Floats) -> Floats:
    return np.asarray(np.log10(np.maximum(values, _NOTHING)), np.float64)


def coloured(logs: Floats, low: float, high: float, scale: Scale) -> QImage:
    """An image of log10 values (rows, columns); clear under `low` and at −inf."""
    if scale == "logarithmic":
        place = (logs - math.log10(low)) / math.log10(high / low)
    else:
        place = (10.0**logs - low) / (high - low)
    index = np.clip(place, -1.0, 1.0) * (N_COLOURS - 1)
    chosen = np.where(place >= 0, np.rint(index) + 1, 0).astype(np.intp)
    pixels = np.ascontiguousarray(_table()[chosen])
    rows, columns = pixels.shape
    image = QImage(
        pixels.data, columns, rows, 4 * columns,
        QImage.Format.Format_ARGB32_Premultiplied,
    )  # fmt: skip
    # The array goes; the image must own its pixels.
    return image.copy()


@lru_cache(maxsize=1)
def _table() -> npt.NDArray[np.uint32]:
    """Clear, then the ramp, as 0xAARRGGBB."""
    rgb = rgb_ramp().astype(np.uint32)
    packed = 0xFF000000 | rgb[:, 0] << 16 | rgb[:, 1] << 8 | rgb[:, 2]
    return np.concatenate([np.zeros(1, np.uint32), packed.astype(np.uint32)])


@lru_cache(maxsize=32)
def _weights(n: int, first: float, step: float, count: int) -> Floats:
    """(count, n) cubic weights of n nodes, one apart, at `first` + k · `step`.

    Catmull-Rom: through the nodes, straight where they are.
    """
    at = first + step * np.arange(count)
    node = np.clip(np.floor(at).astype(int), 0, n - 2)
    t = np.clip(at - node, 0.0, 1.0)
    cubic = 0.5 * np.stack(
        [
            -t + 2 * t**2 - t**3,
            2 - 5 * t**2 + 3 * t**3,
            t + 4 * t**2 - 3 * t**3,
            -(t**2) + t**3,
        ]
    )
    weights = np.zeros((count, n))
    rows = np.arange(count)
    for k in range(4):
        column = node - 1 + k
        inside = (column >= 0) & (column < n)
        weights[rows[inside], column[inside]] += cubic[k, inside]
        # Beyond the edge the line through the two last nodes goes on.
        for outside, near, next_ in ((column < 0, 0, 1), (column >= n, n - 1, n - 2)):
            weights[rows[outside], near] += 2 * cubic[k, outside]
            weights[rows[outside], next_] -= cubic[k, outside]
    return weights


def interpolated(
    nodes: Floats, xs: Floats, ys: Floats, axes: tuple[Floats, Floats]
) -> Floats:
    """Values (ny, nx) of even `axes` (x, y), smoothly at the grid of `xs` and `ys`."""
    across = _weights(*_in_nodes(axes[0], xs))
    up = _weights(*_in_nodes(axes[1], ys))
    smooth: Floats = up @ nodes @ across.T
    return smooth


def _in_nodes(axis: Floats, at: Floats) -> tuple[int, float, float, int]:
    step = (axis[-1] - axis[0]) / (len(axis) - 1)
    apart = (at[-1] - at[0]) / max(1, len(at) - 1)
    first = float((at[0] - axis[0]) / step)
    return len(axis), round(first, 9), float(apart / step), len(at)


#: What masks a height: enclosures, conductors, and the height itself.
_Alike = tuple[tuple[Keepout, ...], tuple[Conductor, ...], float]


class _Masks:
    """Where nobody is, height by height, and the largest of what is left."""

    def __init__(self, values: MapValues) -> None:
        self._axes = (values.xs, values.ys)
        self._heights = values.request.heights
        self._closed = values.loaded.currents.closed
        fine = values.request.fineness == "fine"
        self._conductors = values.loaded.conductors if fine else ()

    def _at(self, z: float, with_conductors: bool) -> _Alike:
        closed = tuple(k for k in self._closed if k.z_from < z < k.z_to)
        crossing: tuple[Conductor, ...] = ()
        if with_conductors:
            crossing = tuple(c for c in self._conductors if _crosses(c, z))
        return closed, crossing, z

    def areas(self) -> tuple[MaskedArea, ...]:
        """Closed enclosures that mask every height of the map."""
        lowest, highest = min(self._heights), max(self._heights)
        return tuple(
            MaskedArea(np.array(k.outline.exterior.coords), f"closed: {k.title}")
            for k in self._closed
            if k.z_from < lowest and highest < k.z_to and not k.outline.is_empty
        )

    def largest(
        self, logs: Floats, xs: Floats, ys: Floats, *, with_conductors: bool = True
    ) -> Floats:
        """(rows, columns) largest over the heights (h, ny, nx); −inf where masked."""
        alike: dict[tuple[object, ...], tuple[_Alike, list[int]]] = {}
        for k, z in enumerate(self._heights):
            key = self._at(z, with_conductors)
            # Prisms mask all heights alike; conductors are cut anew at each.
            same = (key[0], key[1], z if key[1] else None)
            alike.setdefault(same, (key, []))[1].append(k)
        found: Floats | None = None
        for key, layers in alike.values():
            merged = logs[layers[0]] if len(layers) == 1 else logs[layers].max(axis=0)
            layer = interpolated(merged, xs, ys, self._axes)
            mask = self._mask(key, xs, ys)
            if mask is not None:
                layer[mask] = -np.inf
            found = layer if found is None else np.maximum(found, layer)
        assert found is not None, "a map has at least one height"
        return found

    def _mask(self, key: _Alike, xs: Floats, ys: Floats) -> Bools | None:
        closed, crossing, z = key
        if not closed and not crossing:
            return None
        mask = np.zeros((len(ys), len(xs)), np.bool_)
        for keepout in closed:
            _add(mask, xs, ys, keepout.outline.bounds, z, keepout.masks)
        _add_conductors(mask, xs, ys, z, crossing)
        return mask


def half_size(conductor: Conductor) -> float:
    """The farthest that a conductor reaches from its middle. [m]"""
    shape = conductor.shape
    if isinstance(shape, Bar):
        return math.hypot(shape.width, shape.thickness) / 2
    return shape.diameter / 2


def _crosses(conductor: Conductor, z: float) -> bool:
    low, high = _levels(conductor)
    return low < z < high


@lru_cache(maxsize=8192)
def _levels(conductor: Conductor) -> tuple[float, float]:
    """Lowest and highest level that a conductor can reach. [m]"""
    levels, reach = conductor.path[:, 2], half_size(conductor)
    return float(levels.min()) - reach, float(levels.max()) + reach


def _add_conductors(
    mask: Bools, xs: Floats, ys: Floats, z: float, crossing: Sequence[Conductor]
) -> None:
    """Mask what lies inside conductors; looked for around their legs only."""
    if not crossing:
        return
    around = np.zeros_like(mask)
    for conductor in crossing:
        # At a mitre a corner reaches further than the section.
        reach = 2.5 * half_size(conductor)
        low = np.minimum(conductor.path[:-1], conductor.path[1:]) - reach
        high = np.maximum(conductor.path[:-1], conductor.path[1:]) + reach
        for k in np.flatnonzero((low[:, 2] < z) & (z < high[:, 2])):
            across = slice(*np.searchsorted(xs, (low[k, 0], high[k, 0])))
            up = slice(*np.searchsorted(ys, (low[k, 1], high[k, 1])))
            around[up, across] = True
    rows, columns = np.nonzero(around)
    if len(rows):
        points = np.column_stack([xs[columns], ys[rows], np.full(len(rows), z)])
        mask[rows, columns] |= field.inside(crossing, points)


def _add(
    mask: Bools,
    xs: Floats,
    ys: Floats,
    bounds: Sequence[float],
    z: float,
    test: Callable[[Floats], Bools],
) -> None:
    """Mask the points of a grid that pass a test, looked for inside `bounds`."""
    if len(bounds) < 4 or not np.all(np.isfinite(bounds)):
        return
    across = slice(*np.searchsorted(xs, (bounds[0], bounds[2])))
    up = slice(*np.searchsorted(ys, (bounds[1], bounds[3])))
    part = mask[up, across]
    if part.size == 0:
        return
    plan = np.stack(np.meshgrid(xs[across], ys[up]), axis=-1).reshape(-1, 2)
    points = np.column_stack([plan, np.full(len(plan), z)])
    part |= test(points).reshape(part.shape)


def _lines(values: MapValues, masks: Masks, unit: str) -> tuple[DrawnIsoLine, ...]:
    """Thin lines at round values and bold ones at reference levels."""
    xs = np.linspace(values.xs[0], values.xs[-1], 2 * len(values.xs) - 1)
    ys = np.linspace(values.ys[0], values.ys[-1], 2 * len(values.ys) - 1)
    longest = max(xs[-1] - xs[0], ys[-1] - ys[0])

    def drawn(lines: Sequence[IsoLine], bold: bool, name: str) -> list[DrawnIsoLine]:
        made = []
        for line in lines:
            text = name or f"{in_unit(line.value, unit):.6g} {unit}"
            shown = text if line.length >= _LABELLED * longest else ""
            made.append(DrawnIsoLine(shown, bold, line.points, line.label_place()))
        return made

    wanted = _round_lines(values, unit)
    found: list[DrawnIsoLine] = []
    if np.any(values.values > 0):
        logs = masks.largest(_logs(values.values), xs, ys, with_conductors=False)
        found += drawn(_contours(xs, ys, logs, wanted), False, "")
    for level, ratios in values.level_ratios:
        if np.any(ratios > 0):
            logs = masks.largest(_logs(ratios), xs, ys, with_conductors=False)
            name = _level_text(values, level.id, unit)
            found += drawn(_contours(xs, ys, logs, (1.0,)), True, name)
    return tuple(found)


def _round_lines(values: MapValues, unit: str) -> tuple[float, ...]:
    """Round values of thin lines; none where the line of a level says the same. [T]"""
    settings = values.request.layout.settings
    low, high = (in_unit(b, unit) for b in (settings.map_low, settings.map_high))
    # Where frequencies add up, the line of a level is none of equal flux density.
    adds_up = len(values.loaded.currents.frequencies) > 1
    levels = [] if adds_up else [value for value, _ in _marks(values, unit)]
    return tuple(to_tesla(v, unit) for v in round_values(low, high, levels))


def _contours(
    xs: Floats, ys: Floats, logs: Floats, wanted: Sequence[float]
) -> tuple[IsoLine, ...]:
    masked = ~np.isfinite(logs)
    grid = 10.0 ** np.where(masked, 0.0, logs)
    return iso_lines(xs, ys, grid, masked, wanted)


def _level_text(values: MapValues, level: str, unit: str) -> str:
    """ "Client target 7.5 µT · at 1.00 m", or its ratio where frequencies add up."""
    found = next(x for x in values.request.layout.levels if x.id == level)
    heights = values.request.heights
    where = "largest over heights"
    if values.request.upright is not None:
        where = "on this plane"
    elif len(heights) == 1:
        kind = values.request.layout.settings.length_unit
        where = f"at z {height_figures(heights[0], kind)} {kind}"
    frequencies = values.loaded.currents.frequencies
    if len(frequencies) == 1:
        value = level_at(found, frequencies[0])
        if value is not None:
            return f"{found.title} {_typed(value, unit)} · {where}"
    return f"{found.title}, ratio 1 · {where}"


def _typed(tesla: float, unit: str) -> str:
    """A level as it was typed: 7.5 µT is 7.500000000000001 after conversion."""
    return f"{float(significant(in_unit(tesla, unit), 6)):g} {unit}"


def _marks(values: MapValues, unit: str) -> tuple[tuple[float, str], ...]:
    """Reference levels for the legend, at the lowest frequency that flows."""
    frequencies = values.loaded.currents.frequencies
    flowing = [f for f in frequencies if (f == 0) == values.is_direct]
    if not flowing:
        return ()
    lowest = min(flowing)
    named = "" if len(flowing) == 1 else f", {lowest:g} Hz"
    levels = [(level, level_at(level, lowest)) for level, _ in values.level_ratios]
    return tuple(
        (in_unit(value, unit), f"{level.title}{named}")
        for level, value in levels
        if value is not None
    )
