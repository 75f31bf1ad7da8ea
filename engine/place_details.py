"""What a report says about a place: heights, frequencies, circuits, net current."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents, CaseFields
from engine.circuits import Circuit
from engine.contributions import contributions, net_current_effect
from engine.criteria import ReferenceLevel
from engine.evaluations import Evaluation, Quantity, points_over
from engine.items import Point3
from engine.levels import Kind, is_kind, level_at
from engine.regions import Region
from engine.results import (
    AtFrequency,
    Contribution,
    NetCurrentEffect,
    PlaceDetails,
)
from engine.zone_search import Found

Floats = NDArray[np.float64]


class Surroundings:
    """The field's parts at places, each place looked at once.

    Parameters
    ----------
    fields : CaseFields
        Of the layout.
    circuits
        For the net current.
    """

    def __init__(self, fields: CaseFields, circuits: Sequence[Circuit]) -> None:
        self.fields = fields
        self._circuits = circuits
        self._effects: dict[Point3, NetCurrentEffect | None] = {}

    def contributions(
        self, case: CaseCurrents, at: Point3, kind: Kind
    ) -> tuple[Contribution, ...]:
        """The circuits' parts at a place, the largest first."""
        responses = self.fields.at(at).responses
        return contributions(case, self.fields.conductors, responses, kind)

    def net_current(self, at: Point3) -> NetCurrentEffect | None:
        """What 1 A of net current in the most sensitive circuit gives at a place."""
        if at not in self._effects:
            self._effects[at] = net_current_effect(
                self._circuits, self.fields.conductors, self.fields.at(at).responses
            )
        return self._effects[at]

    def look_around(self, region: Region, positions: Floats) -> None:
        """Look at all heights over (p, 3) positions and at their means' at once."""
        over = [_over(region, position) for position in positions]
        self.fields.look_at(
            np.concatenate([positions, points_over(region, positions), *over])
        )

    def details(self, region: Region, quantity: Quantity, found: Found) -> PlaceDetails:
        """Everything about the place where a quantity is largest in a region."""
        case = self.fields.cases[quantity.case]
        over = self._over_heights(region, case, quantity, found.position)
        x, y, z = (float(c) for c in found.position)
        height: float | None = z - region.floor
        if region.rule == "three-height mean":
            height = None
            largest = max(over, key=lambda pair: pair[1], default=(0.0, 0.0))
            z = region.floor + largest[0]
        at = (x, y, z)
        return self._at(at, height, over, quantity, found)

    def details_of_point(self, quantity: Quantity, found: Found) -> PlaceDetails:
        """Everything about a receptor."""
        x, y, z = (float(c) for c in found.position)
        return self._at((x, y, z), None, (), quantity, found)

    def _at(
        self,
        at: Point3,
        height: float | None,
        over: tuple[tuple[float, float], ...],
        quantity: Quantity,
        found: Found,
    ) -> PlaceDetails:
        case = self.fields.cases[quantity.case]
        return PlaceDetails(
            at=at,
            height=height,
            by_height=over,
            by_frequency=at_frequencies(found.by_frequency, quantity.level),
            near_field=self.fields.at(at).near,
            step=found.step,
            is_bound=found.is_bound,
            bound_reason=found.bound_reason,
            contributions=self.contributions(case, at, quantity.kind),
            net_current=self.net_current(at),
        )

    def _over_heights(
        self, region: Region, case: CaseCurrents, quantity: Quantity, position: Floats
    ) -> tuple[tuple[float, float], ...]:
        """Pairs of height and value over a place on plan, masked ones left out."""
        points = _over(region, position)
        b = self.fields.flux_density_at(case, points)
        masked = self.fields.masked_at(case, points, region.clearance)
        evaluation = Evaluation(case, b, masked, 1)
        values = _compared(evaluation, quantity)
        return tuple(
            (float(h), float(v))
            for h, v, m in zip(region.heights, values, masked, strict=True)
            if not m
        )


def _over(region: Region, position: Floats) -> Floats:
    """(h, 3) points at the region's heights over a position. [m]"""
    z = region.floor + np.array(region.heights)
    return np.column_stack([np.broadcast_to(position[:2], (len(z), 2)), z])


def _compared(evaluation: Evaluation, quantity: Quantity) -> Floats:
    """(n,) values in tesla: the resultant, or what is compared with the level."""
    if quantity.level is None:
        return evaluation.total(quantity.kind)[0]
    by_frequency = evaluation.by_frequency(quantity.level)[0]
    return root_sum_of_squares(
        [v for f, v in by_frequency.items() if is_kind(f, quantity.kind)]
    )


def root_sum_of_squares(values: Sequence[Floats] | Sequence[float]) -> Floats:
    """Of several frequencies together; one value stays exactly as it is."""
    if len(values) == 1:
        return np.asarray(values[0], np.float64)
    total: Floats = np.sqrt(np.sum(np.square(np.asarray(values)), axis=0))
    return total


def at_frequencies(
    by_frequency: Mapping[float, float], level: ReferenceLevel | None
) -> tuple[AtFrequency, ...]:
    """The field by frequency beside a level's values, rising."""
    rows = []
    for frequency in sorted(by_frequency):
        value = by_frequency[frequency]
        limit = None if level is None else level_at(level, frequency)
        ratio = None if limit is None else value / limit
        rows.append(AtFrequency(frequency, value, limit, ratio))
    return tuple(rows)
