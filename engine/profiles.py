"""Profiles: the field along a line against distance, over heights and load cases.

One sampling serves all curves, so that they stand in one table.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.criteria import ReferenceLevel
from engine.errors import UserError
from engine.items import Point3
from engine.level_use import level_use
from engine.levels import Kind
from engine.profile_sampling import (
    FINEST,
    Line,
    Looked,
    bisected,
    peaked,
    refined,
    reversals,
)

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Bools = NDArray[np.bool_]
Integers = NDArray[np.int64]

#: Crossings and extrema are found to within this. [m]
_WITHIN = FINEST / 4

KINDS: tuple[Kind, Kind] = ("AC", "DC")


@dataclass(frozen=True, eq=False)
class LevelCurve:
    """Ratio of one kind of field to one level along a profile; n samples.

    `ratios` is None with a reason where nothing can be compared; 0 where masked.
    """

    level: str
    kind: Kind
    ratios: Floats | None
    reason: str
    is_bound: bool
    bound_reason: str


@dataclass(frozen=True, eq=False)
class ProfileCurve:
    """The field of one load case at one height along a profile; n samples.

    Attributes
    ----------
    case : str
        Id of the load case.
    height : float or None
        Level above the datum; None: as the line is drawn. [m]
    points : (n, 3) float
        [m]
    ac, dc : (n,) float or None
        RMS resultant of all frequencies above 0 Hz; at 0 Hz. None where no such
        current flows; 0 where masked. [T]
    by_frequency : (n,) float by frequency [Hz]
        [T]
    levels : tuple of LevelCurve
    mask : (n,) bool
        Inside a conductor or a closed enclosure.
    is_bound, bound_reason
        Whether the values are upper bounds because angles are unknown, and why.
    """

    case: str
    height: float | None
    points: Floats
    ac: Floats | None
    dc: Floats | None
    by_frequency: Mapping[float, Floats]
    levels: tuple[LevelCurve, ...]
    mask: Bools
    is_bound: bool
    bound_reason: str

    def values(self, kind: Kind) -> Floats | None:
        """(n,) of AC or DC. [T]"""
        return self.ac if kind == "AC" else self.dc


@dataclass(frozen=True)
class Crossing:
    """Where a value equals a reference level, to a millimetre.

    `along` is the distance from the start of the line; `rising` says whether the
    value is above the level behind it. [m]
    """

    case: str
    height: float | None
    level: str
    kind: Kind
    along: float
    at: Point3
    rising: bool


@dataclass(frozen=True)
class Extremum:
    """Where a curve turns: its distance from the start of the line and value. [m, T]"""

    case: str
    height: float | None
    kind: Kind
    along: float
    at: Point3
    value: float
    is_largest: bool


@dataclass(frozen=True, eq=False)
class FieldProfile:
    """The field along a line.

    Attributes
    ----------
    path : (v, 3) float
        As drawn. [m]
    along : (n,) float
        Distance from the start, crossings and extrema among them. Of a line moved to
        a height, along its plan. [m]
    """

    path: Floats
    along: Floats
    curves: tuple[ProfileCurve, ...]
    crossings: tuple[Crossing, ...]
    extrema: tuple[Extremum, ...]


def profile(
    fields: CaseFields,
    path: ArrayLike,
    *,
    heights: Sequence[float] = (),
    levels: Sequence[ReferenceLevel] = (),
) -> FieldProfile:
    """The field along a polyline in every load case of `fields`, over the heights.

    Parameters
    ----------
    path : (v, 3) float
        [m]
    heights
        Levels above the datum that replace the line's own; none: as it is drawn. [m]
    levels
        Their crossings are found, AC and DC each on its own.

    Raises
    ------
    UserError
        When the line has no length, or stands upright and heights are given.
    ComputationCancelled
        When the fields' `cancelled` says so.

    Notes
    -----
    Crossings are found to 1 mm in the field as it is computed, which is within a
    thousandth of that of the drawn conductors.
    """
    drawn = np.asarray(path, np.float64)
    flat = drawn.copy()
    if heights and flat.ndim == 2 and flat.shape[1] == 3:
        flat[:, 2] = 0.0
    line = _line(drawn, flat)
    levels_z: tuple[float | None, ...] = tuple(sorted(set(heights))) or (None,)
    looking = _Looking(fields, line, levels_z, tuple(levels))
    along = refined(line, looking.look)
    extrema = looking.extrema(along, looking.curves(along))
    along = _with(along, [e.along for e in extrema])
    crossings = looking.crossings(along, looking.curves(along))
    along = _with(along, [c.along for c in crossings])
    curves = looking.curves(along)
    return FieldProfile(drawn, along, curves, crossings, extrema)


def _line(drawn: Floats, flat: Floats) -> Line:
    """The line at its heights; a sentence of its own where it stands upright."""
    own = Line(drawn)
    if np.array_equal(flat, drawn):
        return own
    if np.any(flat[:, :2] != flat[:1, :2]):
        return Line(flat)
    raise UserError(
        "The line stands upright and has no length at one height: plot it at its own "
        "heights, or draw it with some length on plan."
    )


def _with(along: Floats, more: Sequence[float]) -> Floats:
    """The distances with some more, each once, rising."""
    found: Floats = np.unique(np.concatenate([along, np.array(more, np.float64)]))
    return found


class _Looking:
    """Looks at places along a line, all heights and load cases at once."""

    def __init__(
        self,
        fields: CaseFields,
        line: Line,
        heights: tuple[float | None, ...],
        levels: tuple[ReferenceLevel, ...],
    ) -> None:
        self.fields, self.line, self.heights = fields, line, heights
        self.levels = {level.id: level for level in levels}

    def points(self, along: Floats, height: float | None) -> Floats:
        points = self.line.points(along)
        if height is not None:
            points[:, 2] = height
        return points

    def look(self, along: Floats) -> Looked:
        """Values of all cases and heights, AC and DC, without any level."""
        n = len(along)
        points = np.concatenate([self.points(along, z) for z in self.heights])
        distances = self.fields.distances(points).reshape(-1, n)
        rows: list[Floats] = []
        for case, b in zip(
            self.fields.cases, self.fields.flux_densities(points), strict=True
        ):
            whole = field.combined(b, case.components)
            rows += [
                v.reshape(-1, n) for v in (whole.total_ac, whole.dc) if v is not None
            ]
        masked = [mask.reshape(-1, n) for mask in self.fields.masked(points, 0.0)]
        return Looked(
            np.concatenate(rows) if rows else np.zeros((0, n)),
            np.concatenate(masked) if masked else np.zeros((1, n), bool),
            np.min(distances, axis=0),
        )

    def curves(self, along: Floats) -> tuple[ProfileCurve, ...]:
        """All curves at the samples, heights within cases."""
        n = len(along)
        if not self.fields.cases:
            return ()
        points = np.concatenate([self.points(along, z) for z in self.heights])
        fields = self.fields.flux_densities(points)
        masks = self.fields.masked(points, 0.0)
        found = []
        for case, b, mask in zip(self.fields.cases, fields, masks, strict=True):
            for k, height in enumerate(self.heights):
                part = slice(k * n, (k + 1) * n)
                found.append(
                    self._curve(case, height, points[part], b[:, part], mask[part])
                )
        return tuple(found)

    def _curve(
        self,
        case: CaseCurrents,
        height: float | None,
        points: Floats,
        b: Complexes,
        mask: Bools,
    ) -> ProfileCurve:
        def shown(values: Floats | None) -> Floats | None:
            return None if values is None else np.where(mask, 0.0, values)

        whole = field.combined(b, case.components)
        levels = []
        for level, kind in product(self.levels.values(), KINDS):
            use = level_use(b, case.components, level, kind)
            if use.ratios is None and not _flows(case, kind):
                continue
            levels.append(
                LevelCurve(level.id, kind, shown(use.ratios), use.reason,
                           use.is_bound, use.bound_reason)
            )  # fmt: skip
        return ProfileCurve(
            case=case.case.id,
            height=height,
            points=points,
            ac=shown(whole.total_ac),
            dc=shown(whole.dc),
            by_frequency={
                f: np.where(mask, 0.0, v) for f, v in whole.by_frequency.items()
            },
            levels=tuple(levels),
            mask=mask,
            is_bound=whole.is_bound,
            bound_reason=whole.reason,
        )

    def extrema(
        self, along: Floats, curves: Sequence[ProfileCurve]
    ) -> tuple[Extremum, ...]:
        """Where AC and DC turn, found again between the samples."""
        found: list[tuple[ProfileCurve, Kind, bool]] = []
        low, high = [], []
        for curve, kind in product(curves, KINDS):
            values = curve.values(kind)
            if values is None:
                continue
            for k, is_largest in reversals(values, ~curve.mask):
                found.append((curve, kind, is_largest))
                low.append(along[k - 1])
                high.append(along[k + 1])

        def value(places: Floats, which: Integers) -> Floats:
            sign = np.array([1.0 if found[i][2] else -1.0 for i in which])
            probes = [(found[i][0], found[i][1], "") for i in which]
            return sign * self._values(places, probes)

        places = peaked(np.array(low), np.array(high), value, _WITHIN)
        signed = value(places, np.arange(len(found)))
        return tuple(
            Extremum(curve.case, curve.height, kind, float(s),
                     self._place(s, curve.height), abs(float(v)), is_largest)
            for (curve, kind, is_largest), s, v in zip(
                found, places, signed, strict=True
            )
        )  # fmt: skip

    def crossings(
        self, along: Floats, curves: Sequence[ProfileCurve]
    ) -> tuple[Crossing, ...]:
        """Where ratios pass 1, none across a masked stretch."""
        found: list[tuple[ProfileCurve, LevelCurve, bool]] = []
        below, above = [], []
        for curve in curves:
            counted = ~(curve.mask[:-1] | curve.mask[1:])
            for level in curve.levels:
                if level.ratios is None:
                    continue
                over = level.ratios > 1.0
                for k in np.flatnonzero((over[:-1] != over[1:]) & counted):
                    rising = bool(over[k + 1])
                    found.append((curve, level, rising))
                    below.append(along[k] if rising else along[k + 1])
                    above.append(along[k + 1] if rising else along[k])

        def is_below(places: Floats, which: Integers) -> Bools:
            probes = [(found[i][0], found[i][1].kind, found[i][1].level) for i in which]
            below_1: Bools = self._values(places, probes) <= 1.0
            return below_1

        low, high = bisected(np.array(below), np.array(above), is_below, _WITHIN)
        return tuple(
            Crossing(curve.case, curve.height, level.level, level.kind, float(s),
                     self._place(s, curve.height), rising)
            for (curve, level, rising), s in zip(found, (low + high) / 2, strict=True)
        )  # fmt: skip

    def _values(
        self, along: Floats, probes: Sequence[tuple[ProfileCurve, Kind, str]]
    ) -> Floats:
        """(k,) each at its own distance, curve, kind and level; "" is the field. [T]"""
        values = np.zeros(len(along))
        if not len(along):
            return values
        points = self.line.points(along)
        for k, (curve, _, _) in enumerate(probes):
            if curve.height is not None:
                points[k, 2] = curve.height
        fields = self.fields.flux_densities(points)
        for case, b in zip(self.fields.cases, fields, strict=True):
            own = [k for k, p in enumerate(probes) if p[0].case == case.case.id]
            for kind, level in {(probes[k][1], probes[k][2]) for k in own}:
                rows = [k for k in own if probes[k][1:] == (kind, level)]
                part = b[:, rows]
                if level:
                    use = level_use(part, case.components, self.levels[level], kind)
                    found = use.ratios
                else:
                    whole = field.combined(part, case.components)
                    found = whole.total_ac if kind == "AC" else whole.dc
                assert found is not None, "a curve without values has no probes"
                values[rows] = found
        return values

    def _place(self, along: float, height: float | None) -> Point3:
        x, y, z = (float(v) for v in self.points(np.array([along]), height)[0])
        return (x, y, z)


def _flows(case: CaseCurrents, kind: Kind) -> bool:
    return any((f == 0) == (kind == "DC") for f in case.frequencies)
