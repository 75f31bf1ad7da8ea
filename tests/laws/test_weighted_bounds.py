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


KNOWN = tuple(Component(f, BASE) for f in (50.0, 150.0, 250.0))
TWO_SOURCES = (Component(50.0, BASE), Component(50.0, BASE, "a"))


def with_components(
    fields: CaseFields, seed: int, components: tuple[Component, ...]
) -> CaseFields:
    """The same conductors with random currents in the components."""
    rng = np.random.default_rng(seed)
    (case,) = fields.cases
    m = len(fields.conductors)
    loops = {c.item: k for k, c in enumerate(fields.conductors)}
    size = np.array([[400.0], [90.0], [40.0]])[: len(components)]
    of_loop = size * np.exp(2j * np.pi * rng.uniform(size=(len(size), m)))
    # All conductors of one loop carry the same.
    currents = np.array([of_loop[:, loops[c.item]] for c in fields.conductors]).T
    return CaseFields(
        fields.conductors, (replace(case, components=components, currents=currents),)
    )


@pytest.mark.parametrize("component", ["resultant", "axis"])
@pytest.mark.parametrize("rule", ["maximum at heights", "three-height mean"])
@pytest.mark.parametrize("seed", range(2))
def test_no_weighted_peak_exceeds_its_bound(seed: int, rule: str, component: str):
    layout = random_layout(seed, rule=rule)
    _, fields = loaded_with(layout, bars=False)
    fields = with_components(fields, seed, KNOWN)
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


@pytest.mark.parametrize("sum_rule", ["ratio sum", "weighted peak"])
def test_no_peak_of_two_sources_exceeds_its_bound(sum_rule: str):
    layout = random_layout(1, rule="maximum at heights")
    _, fields = loaded_with(layout, bars=False)
    fields = with_components(fields, 1, TWO_SOURCES)
    region = region_of(layout.zones[0])
    level = structs.replace(layout.levels[0], sum_rule=sum_rule, basis="peak")
    quantity = Quantity(0, "AC", level)
    (found,) = search(fields, region, [quantity]).found
    assert found is not None
    assert found.bound_reason == "worst over an unknown phase relation"
    ((certificate, now),) = certified_maxima(
        fields, region, [quantity], [found], tolerance=TOLERANCE
    )
    places = random_places(region, np.random.default_rng(5), 6000)
    (evaluation,) = evaluations(fields, region, places)
    assert certificate.upper is not None
    brute = float(np.max(evaluation.score(quantity)))
    assert certificate.upper >= brute / (1 + FIELD_ERROR)
    assert certificate.upper <= now.score * (1 + 1.001 * TOLERANCE)


def test_peak_levels_of_two_sources_are_proportional_by_either_rule():
    # They share one proof, as quantities that are largest at the same place.
    layout = random_layout(2, rule="maximum at heights")
    _, fields = loaded_with(layout, bars=False)
    fields = with_components(fields, 2, TWO_SOURCES)
    places = random_places(region_of(layout.zones[0]), np.random.default_rng(6), 500)
    (evaluation,) = evaluations(fields, region_of(layout.zones[0]), places)
    pair = [
        Quantity(0, "AC", structs.replace(layout.levels[0], sum_rule=rule, basis=basis))
        for rule, basis in (("ratio sum", "peak"), ("weighted peak", "RMS"))
    ]
    assert len({q.same_place_as((50.0,))[:-1] for q in pair}) == 1
    peak, weighted = (evaluation.unmasked_score(q) for q in pair)
    assert peak == pytest.approx(np.sqrt(2) * weighted, rel=1e-9)
