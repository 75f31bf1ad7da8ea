"""A quantity at places: ratio to a level or resultant, averaged where the rule says."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.criteria import ReferenceLevel
from engine.levels import Kind, is_kind, ratios
from engine.readings import reading
from engine.regions import Region
from engine.weighted_peak import weighted_peak

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Bools = NDArray[np.bool_]


@dataclass(frozen=True)
class Quantity:
    """What is to be largest: the ratio to a level, or the RMS resultant without one."""

    case: int
    kind: Kind
    level: ReferenceLevel | None = None

    @property
    def is_weighted(self) -> bool:
        """Whether it is a weighted peak, which values by frequency do not give."""
        level = self.level
        return (
            level is not None
            and self.kind == "AC"
            and level.sum_rule == "weighted peak"
        )

    def same_place_as(self, frequencies: Sequence[float]) -> tuple[object, ...]:
        """Quantities of equal key are proportional, so largest at the same place."""
        own = [f for f in frequencies if is_kind(f, self.kind)]
        if len(own) != 1:
            return (self.case, self.kind, None if self.level is None else self.level.id)
        if self.level is None:
            return (self.case, self.kind, "RMS", "resultant")
        # The weighted peak of one frequency is its peak over the cycle.
        basis = "peak" if self.is_weighted else self.level.basis
        return (self.case, self.kind, basis, self.level.component)


class Evaluation:
    """One case's field at positions, averaged over the heights of each.

    Parameters
    ----------
    b : (c, q p, 3) complex
        RMS phasors, offset by offset. [T]
    masked : (q p,) bool
        Left out of the means; a position is masked where all of its heights are.
    q : int
        Heights over each position.
    """

    def __init__(self, case: CaseCurrents, b: Complexes, masked: Bools, q: int) -> None:
        self._case, self._b = case, b
        self._counts = ~masked.reshape(q, -1)
        self._readings: dict[
            tuple[str, str], tuple[dict[float, Floats], bool, str]
        ] = {}
        self._peaks: dict[ReferenceLevel, tuple[Floats, bool, str]] = {}

    @property
    def masked(self) -> Bools:
        """(p,) positions without a value."""
        nowhere: Bools = ~np.any(self._counts, axis=0)
        return nowhere

    def _mean(self, values: Floats) -> Floats:
        """(p,) means of (q p,) values over the heights where somebody can be."""
        counts = self._counts
        if len(counts) == 1:
            return values
        sums = np.sum(np.where(counts, values.reshape(counts.shape), 0.0), axis=0)
        means: Floats = sums / np.maximum(1, np.sum(counts, axis=0))
        return means

    def by_frequency(
        self, level: ReferenceLevel | None
    ) -> tuple[dict[float, Floats], bool, str]:
        """(p,) values per frequency in the level's basis; whether they are a bound."""
        basis = "RMS" if level is None else level.basis
        axis = "resultant" if level is None else level.component
        if (basis, axis) not in self._readings:
            read = reading(self._b, self._case.components, basis, axis)
            means = {f: self._mean(values) for f, values in read.by_frequency.items()}
            self._readings[basis, axis] = (means, read.is_bound, read.reason)
        return self._readings[basis, axis]

    def total(self, kind: Kind) -> tuple[Floats, bool, str]:
        """(p,) RMS resultant of AC or DC, zeros where none flows."""
        whole = field.combined(self._b, self._case.components)
        values = whole.dc if kind == "DC" else whole.total_ac
        if values is None:
            return np.zeros(self._counts.shape[1]), False, ""
        return self._mean(values), whole.is_bound, whole.reason

    def _weighted(self, level: ReferenceLevel) -> tuple[Floats, bool, str]:
        """(p,) weighted peaks; whether they are a bound."""
        if level not in self._peaks:
            peak = weighted_peak(self._b, self._case.components, level)
            means = self._mean(peak.values)
            self._peaks[level] = (means, peak.is_bound, peak.reason)
        return self._peaks[level]

    def bound(self, quantity: Quantity) -> tuple[bool, str]:
        """Whether a quantity is an upper bound for unknown angles, and why."""
        if quantity.level is None:
            return self.total(quantity.kind)[1:]
        if quantity.is_weighted:
            return self._weighted(quantity.level)[1:]
        return self.by_frequency(quantity.level)[1:]

    def unmasked_score(self, quantity: Quantity) -> Floats:
        """(p,) ratio or resultant, masks left aside."""
        if quantity.level is None:
            return self.total(quantity.kind)[0]
        if quantity.is_weighted:
            return self._weighted(quantity.level)[0]
        compared = ratios(quantity.level, self.by_frequency(quantity.level)[0])
        values = compared.dc if quantity.kind == "DC" else compared.ac
        assert values is not None, "asked for a comparison that cannot be made"
        return values

    def score(self, quantity: Quantity) -> Floats:
        """(p,) ratio or resultant, −inf where masked."""
        scores: Floats = np.where(self.masked, -np.inf, self.unmasked_score(quantity))
        return scores

    def part(self, positions: slice) -> Evaluation:
        """The same at some of the positions."""
        q, p = self._counts.shape
        b = self._b.reshape(len(self._b), q, p, 3)[:, :, positions]
        masked = ~self._counts[:, positions]
        return Evaluation(self._case, b.reshape(len(b), -1, 3), masked.reshape(-1), q)


def points_over(region: Region, positions: Floats) -> Floats:
    """(q p, 3) points over the positions, offset by offset."""
    up = region.offsets[:, None, None] * np.array([0.0, 0.0, 1.0])
    points: Floats = (positions[None] + up).reshape(-1, 3)
    return points


def evaluations(
    fields: CaseFields, region: Region, positions: Floats, *, keep: bool = False
) -> tuple[Evaluation, ...]:
    """Every case at (p, 3) positions of a region, masked there."""
    points = points_over(region, positions)
    q = len(region.offsets)
    return tuple(
        Evaluation(case, b, masked, q)
        for case, b, masked in zip(
            fields.cases,
            fields.flux_densities(points, keep=keep),
            fields.masked(points, region.clearance),
            strict=True,
        )
    )


def evaluation_at(
    fields: CaseFields, region: Region, case: CaseCurrents, position: Floats
) -> Evaluation:
    """One case at one position (3,), of which everything is remembered."""
    points = points_over(region, position[None])
    b = fields.flux_density_at(case, points)
    masked = fields.masked_at(case, points, region.clearance)
    return Evaluation(case, b, masked, len(region.offsets))
