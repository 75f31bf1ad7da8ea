"""Maps of a variant against the base: the difference and the ratio, place by place."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.circuits import LoadCase
from engine.errors import Cancelled, Progress, UserError
from engine.field import ResponseCache
from engine.layout import Layout
from engine.maps import Extent, MapResult, extent, field_map
from engine.variants import layout_of

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class DifferenceMap:
    """How the field of a variant differs from that of the base on one grid.

    Attributes
    ----------
    base, variant : MapResult
        The two maps, on the same grid.
    difference : (ny, nx) float
        Variant less base, RMS resultant of all frequencies above 0 Hz; 0 where either
        is masked. [T]
    ratio : (ny, nx) float
        Variant over base; 1 where it has no value.
    has_ratio : (ny, nx) bool
        Where the base's field is not zero and neither is masked.
    dc_difference : (ny, nx) float or None
        At 0 Hz, of the resultants; None where no direct current flows in either. [T]
    mask : (ny, nx) bool
        Masked in one of the two.
    is_bound : bool
        One of the two is an upper bound: the difference is none.
    """

    base: MapResult
    variant: MapResult
    difference: Floats
    ratio: Floats
    has_ratio: Bools
    dc_difference: Floats | None
    mask: Bools
    is_bound: bool


def difference_map(base: MapResult, variant: MapResult) -> DifferenceMap:
    """The difference of two maps of one load case.

    Raises
    ------
    ValueError
        When they are not on the same grid at the same heights.
    """
    same = (
        np.array_equal(base.xs, variant.xs)
        and np.array_equal(base.ys, variant.ys)
        and base.heights == variant.heights
        and base.plane == variant.plane
    )
    if not same:
        raise ValueError("maps of a difference need the same grid and heights")
    mask = base.mask | variant.mask
    difference = np.where(mask, 0.0, variant.values - base.values)
    has_ratio = ~mask & (base.values > 0)
    ratio = np.ones_like(difference)
    np.divide(variant.values, base.values, out=ratio, where=has_ratio)
    dc = None
    if base.dc is not None or variant.dc is not None:
        zeros = np.zeros_like(difference)
        before = zeros if base.dc is None else base.dc
        after = zeros if variant.dc is None else variant.dc
        dc = np.where(mask, 0.0, after - before)
    bound = base.is_bound or variant.is_bound
    return DifferenceMap(base, variant, difference, ratio, has_ratio, dc, mask, bound)


def variant_map(
    layout: Layout,
    variant: str,
    case: str,
    heights: Sequence[float],
    *,
    against: str | None = None,
    area: Extent | None = None,
    step: float | None = None,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> DifferenceMap:
    """The difference of a variant to the base, or to another variant.

    Parameters
    ----------
    layout : Layout
        The base with its variants.
    variant, case : str
        Ids.
    heights
        Levels above the datum, at least one. [m]
    against : str or None
        Another variant in place of the base.
    area, step
        As of `maps.field_map`; the area is that of the base for both.

    Raises
    ------
    UserError
        When there is no such variant or load case, or the field cannot be computed.
    """
    place = extent(layout) if area is None else area

    def made(which: str | None) -> MapResult:
        own = layout_of(layout, which)
        return field_map(
            own,
            _case(own, case),
            heights,
            area=place,
            step=step,
            cache=cache,
            cancelled=cancelled,
            progress=progress,
        )

    return difference_map(made(against), made(variant))


def _case(layout: Layout, case: str) -> LoadCase:
    for known in layout.cases:
        if known.id == case:
            return known
    raise UserError(
        f"There is no load case “{case}” in one of the two layouts; choose one that "
        "both have."
    )
