"""The proven bound of a weighted peak is never below any value of known angles."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from msgspec import structs
from test_bounds_hold import (
    FIELD_ERROR,
    TOLERANCE,
    loaded_with,
    random_layout,
    random_places,
    region_of,
)

from engine.case_fields import CaseFields
from engine.certified import certified_maxima
from engine.currents import Component
from engine.evaluations import Quantity, evaluations
from engine.zone_search import search

BASE = 50.0


def with_harmonics(fields: CaseFields, seed: int) -> CaseFields:
    """The same conductors with currents of known angles at 50, 150 and 250 Hz."""
    rng = np.random.default_rng(seed)
    (case,) = fields.cases
    m = len(fields.conductors)
    loops = {c.item: k for k, c in enumerate(fields.conductors)}
    size = np.array([[400.0], [90.0], [40.0]])
    of_loop = size * np.exp(2j * np.pi * rng.uniform(size=(3, m)))
    # All conductors of one loop carry the same.
    currents = np.array([of_loop[:, loops[c.item]] for c in fields.conductors]).T
    components = tuple(Component(f, BASE) for f in (50.0, 150.0, 250.0))
    return CaseFields(
        fields.conductors, (replace(case, components=components, currents=currents),)
    )


@pytest.mark.parametrize("component", ["resultant", "axis"])
@pytest.mark.parametrize("rule", ["maximum at heights", "three-height mean"])
@pytest.mark.parametrize("seed", range(2))
def test_no_weighted_peak_exceeds_its_bound(seed: int, rule: str, component: str):
    layout = random_layout(seed, rule=rule)
    _, fields = loaded_with(layout, bars=False)
    fields = with_harmonics(fields, seed)
    region = region_of(layout.zones[0])
    level = structs.replace(
        layout.levels[0], sum_rule="weighted peak", component=component
    )
    quantity = Quantity(0, "AC", level)
    (found,) = search(fields, region, [quantity]).found
    assert found is not None
    assert not found.is_bound
    ((certificate, now),) = certified_maxima(
        fields, region, [quantity], [found], tolerance=TOLERANCE
    )
    places = random_places(region, np.random.default_rng(seed + 9), 6000)
    (evaluation,) = evaluations(fields, region, places)
    brute = float(np.max(evaluation.score(quantity)))
    by_ratios = Quantity(0, "AC", structs.replace(level, sum_rule="ratio sum"))
    assert brute < float(np.max(evaluation.score(by_ratios)))
    assert certificate.upper is not None
    assert certificate.upper >= brute / (1 + FIELD_ERROR)
    assert certificate.upper <= now.score * (1 + 1.001 * TOLERANCE)
