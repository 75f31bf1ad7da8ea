"""Maps of two variants and of what changes between them, as plain panes to show."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from app.map_request import case_of
from engine.colour_ramp import (
    Scale,
    colours,
    position,
    ratio_position,
    signed_position,
    two_sided_colours,
)
from engine.conductors import conductors
from engine.difference_maps import DifferenceMap, variant_map
from engine.drawing import Plan, plan
from engine.errors import Cancelled
from engine.field import ResponseCache
from engine.iso_lines import IsoLine, iso_lines, round_values, signed_lines
from engine.layout import Layout
from engine.maps import extent
from engine.units import FLUX_DENSITY_UNITS, in_unit, significant
from engine.variants import layout_of, variant_called

Floats = npt.NDArray[np.float64]
Bytes = npt.NDArray[np.uint8]

#: Pieces along the longer side of a map.
_PIECES = 120

#: Ratios from one over this to this have colours of their own.
REACH = 10.0
_RATIOS = (0.1, 0.2, 0.5, 0.8, 0.9, 1.0, 1.1, 1.25, 2.0, 5.0, 10.0)
_RATIO_TICKS = (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0)

SIDES, DIFFERENCE, RATIO = "Two maps", "Difference", "Ratio"


@dataclass(frozen=True)
class ChangeRequest:
    """Two maps of one load case: of a variant, and of what it is held against.

    Attributes
    ----------
    variant, against : str or None
        Ids; None: the base.
    heights : tuple of float
        The largest over them. [m above the datum]
    heights_name : str
    """

    whole: Layout
    variant: str
    against: str | None
    case: str
    heights: tuple[float, ...]
    heights_name: str


@dataclass(frozen=True, eq=False)
class Change:
    """The maps, and the plans that lie over them."""

    request: ChangeRequest
    maps: DifferenceMap
    before: Plan
    after: Plan

    @property
    def titles(self) -> tuple[str, str]:
        """What is held against, and the variant."""
        request = self.request
        return (
            title_of(request.whole, request.against),
            title_of(request.whole, request.variant),
        )

    @property
    def area(self) -> tuple[float, float, float, float]:
        """x and y from and to of the grid, half a step around it. [m]"""
        xs, ys = self.maps.base.xs, self.maps.base.ys
        dx, dy = 0.5 * (xs[1] - xs[0]), 0.5 * (ys[1] - ys[0])
        return (
            float(xs[0] - dx), float(ys[0] - dy),
            float(xs[-1] + dx), float(ys[-1] + dy),
        )  # fmt: skip


@dataclass(frozen=True, eq=False)
class PaneLine:
    """A labelled line of equal value; bold where nothing changes."""

    line: IsoLine
    text: str
    bold: bool = False


@dataclass(frozen=True, eq=False)
class PaneMap:
    """What one pane shows.

    Attributes
    ----------
    rgba : (ny, nx, 4) uint8
        Row 0 at the lowest y.
    legend : str
        Quantity and unit over the bar of colours.
    bar : (n, 4) uint8
        From below.
    ticks : pairs of place from 0 to 1, and text
    foot : tuple of str
        What is not coloured, in words under the bar.
    """

    title: str
    rgba: Bytes
    area: tuple[float, float, float, float]
    lines: tuple[PaneLine, ...]
    plan: Plan
    legend: str
    bar: Bytes
    ticks: tuple[tuple[float, str], ...]
    foot: tuple[str, ...]


def title_of(whole: Layout, variant: str | None) -> str:
    """ "Base", or the variant's name."""
    return "Base" if variant is None else variant_called(whole, variant).title


class ChangeMaps:
    """Makes maps in a thread of its own; responses are kept for the next."""

    def __init__(self) -> None:
        self._cache = ResponseCache(192 * 2**20)

    def change(self, request: ChangeRequest, cancelled: Cancelled) -> Change:
        """Compute both maps.

        Raises
        ------
        UserError
            When a layout cannot be evaluated.
        ComputationCancelled
            When `cancelled` says so.
        """
        whole = request.whole
        base = layout_of(whole, None)
        x0, y0, x1, y1 = extent(base)
        maps = variant_map(
            whole,
            request.variant,
            case_of(base, request.case).id,
            request.heights,
            against=request.against,
            area=(x0, y0, x1, y1),
            step=max(x1 - x0, y1 - y0) / _PIECES,
            cache=self._cache,
            cancelled=cancelled,
        )
        plans = [
            plan(made, conductors(made))
            for made in (
                layout_of(whole, request.against),
                layout_of(whole, request.variant),
            )
        ]
        return Change(request, maps, *plans)


def panes(change: Change, how: str) -> tuple[PaneMap, ...]:
    """What to show: two maps of one range, the difference, or the ratio."""
    if how == DIFFERENCE:
        return (_difference(change),)
    if how == RATIO:
        return (_ratio(change),)
    before, after = change.titles
    maps = change.maps
    return (
        _side(change, before, maps.base.values, maps.base.mask, change.before),
        _side(change, after, maps.variant.values, maps.variant.mask, change.after),
    )


def _range(change: Change) -> tuple[float, float, Scale, str]:
    settings = change.request.whole.settings
    unit = settings.flux_density_unit
    return settings.map_low, settings.map_high, settings.map_scale, unit


def _side(
    change: Change, title: str, values: Floats, mask: npt.NDArray[np.bool_], drawn: Plan
) -> PaneMap:
    low, high, scale, unit = _range(change)
    factor = FLUX_DENSITY_UNITS[unit]
    wanted = round_values(low / factor, high / factor)
    lines = _lines(change, values, mask, [v * factor for v in wanted])
    shown = np.where(mask, np.nan, values)
    ends = np.geomspace(low, high, 200)
    if scale == "linear":
        ends = np.linspace(low, high, 200)
    ticks = [v for v in wanted if f"{v:e}".startswith("1")]
    quantity = "B, RMS" + (", upper bound" if change.maps.is_bound else "")
    return PaneMap(
        title,
        colours(shown, low, high, scale),
        change.area,
        tuple(PaneLine(x, f"{_text(x.value, unit)} {unit}") for x in lines),
        drawn,
        f"{quantity} [{unit}]",
        colours(ends, low, high, scale),
        tuple((float(position(v * factor, low, high, scale)), f"{v:g}") for v in ticks),
        (f"under {_text(low, unit)} {unit}", "not coloured"),
    )


def _difference(change: Change) -> PaneMap:
    low, high, scale, unit = _range(change)
    factor = FLUX_DENSITY_UNITS[unit]
    maps = change.maps
    most = float(np.abs(maps.difference).max())
    wanted = [v * factor for v in round_values(low / factor, high / factor)]
    wanted = [v for v in wanted if v <= most]
    found: tuple[IsoLine, ...] = ()
    if most > 0:
        both = [*(-v for v in wanted), 0.0, *wanted]
        axes = (maps.base.xs, maps.base.ys)
        found = signed_lines(*axes, maps.difference, maps.mask, both, low)
    lines = [_changed(line, unit) for line in found]
    before, after = change.titles
    placed = signed_position(maps.difference, low, high, scale)
    placed[maps.mask] = np.nan
    decades = [v for v in round_values(low / factor, high / factor)]
    decades = [v for v in decades if f"{v:e}".startswith("1")]
    ticks = [(0.5, "0")]
    for v in decades[1:]:
        place = 0.5 * float(position(v * factor, low, high, scale))
        ticks += [(0.5 + place, f"+{v:g}"), (0.5 - place, f"−{v:g}")]
    return PaneMap(
        f"{after} less {before}",
        two_sided_colours(placed),
        change.area,
        tuple(lines),
        change.after,
        f"Change of B [{unit}]",
        two_sided_colours(np.linspace(-1.0, 1.0, 255)),
        tuple(ticks),
        ("orange: higher", "blue: lower", f"grey: under {_text(low, unit)} {unit}"),
    )


def _changed(line: IsoLine, unit: str) -> PaneLine:
    if line.value == 0.0:
        return PaneLine(line, "no change", bold=True)
    sign = "+" if line.value > 0 else "−"
    return PaneLine(line, f"{sign}{_text(abs(line.value), unit)} {unit}")


def _ratio(change: Change) -> PaneMap:
    maps = change.maps
    hidden = ~maps.has_ratio
    lines = _lines(change, maps.ratio, hidden, _RATIOS)
    before, after = change.titles
    placed = ratio_position(maps.ratio, REACH)
    placed[hidden] = np.nan
    ticks = [
        (0.5 + 0.5 * float(ratio_position(v, REACH)), f"{v:g}") for v in _RATIO_TICKS
    ]
    return PaneMap(
        f"{after} over {before}",
        two_sided_colours(placed),
        change.area,
        tuple(
            PaneLine(x, "no change" if x.value == 1 else f"× {x.value:g}", x.value == 1)
            for x in lines
        ),
        change.after,
        "Ratio of B",
        two_sided_colours(np.linspace(-1.0, 1.0, 255)),
        tuple(ticks),
        ("orange: higher", "blue: lower"),
    )


def _lines(
    change: Change,
    values: Floats,
    mask: npt.NDArray[np.bool_],
    wanted: Sequence[float],
) -> tuple[IsoLine, ...]:
    base = change.maps.base
    free = values[~mask]
    if free.size == 0 or free.min() == free.max():
        return ()
    return iso_lines(base.xs, base.ys, values, mask, wanted)


def _text(tesla: float, unit: str) -> str:
    return f"{float(significant(in_unit(tesla, unit), 4)):g}"
