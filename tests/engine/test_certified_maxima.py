"""Proven maxima of zones, on wires whose field is Ampère's and on traps.

A wire's return lies 5 km below, which takes less than 0.1 % off the field near it.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from engine.assessment import assess
from engine.certified import bounds, certified_maxima, certified_maximum
from engine.circuits import (
    Circuit,
    ConductorCurrent,
    DirectCurrents,
    SpectrumLine,
)
from engine.comparisons import quantities
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.equipment import ConductorLoop
from engine.errors import ComputationCancelled
from engine.evaluations import Quantity, evaluations
from engine.layout import Layout
from engine.loaded_layout import loaded_layout
from engine.places import Uncertainty, Zone
from engine.regions import Region
from engine.runs import Round
from engine.sampling import area_of
from engine.zone_search import search

AMPERES = 100.0
RADIUS = 0.01
FAR = 5000.0


def ampere(distance, current=AMPERES):
    return 2e-7 * current / distance


def circuit(id, rms=AMPERES, angle=0.0, **fields):
    current = ConductorCurrent(label="a", rms=rms, angle=angle)
    demand = DirectCurrents(currents=(current,))
    stated = {"supply": "free", "base_frequency": 50.0, "neutral": "none"} | fields
    return Circuit(id=id, demand=demand, **stated)


def loop(id, circuit, path, radius=RADIUS):
    return ConductorLoop(
        id=id, path=path, circuit=circuit, label="a", shape=Round(diameter=2 * radius)
    )


def wire(id, circuit, y=0.0, z=0.0):
    """Along x, at y and z."""
    path = ((-FAR, y, z), (FAR, y, z), (FAR, y, z - FAR), (-FAR, y, z - FAR))
    return loop(id, circuit, path)


def riser(id, circuit, x, y):
    """Upright, at x and y, its return 5 km aside."""
    path = ((x, y, -FAR), (x, y, FAR), (x + FAR, y, FAR), (x + FAR, y, -FAR))
    return loop(id, circuit, path)


def level(value, **fields):
    values = LevelRanges(ranges=(LevelRange(f_from=1, f_to=1e5, coefficient=value),))
    stated = {"source": "Example rule (invented)", "category": "workers"} | fields
    return ReferenceLevel(id="level", values=values, **stated)


def zone(**fields):
    stated = {
        "id": "zone",
        "outline": ((-2, 1), (2, 1), (2, 3), (-2, 3)),
        "floor_level": 0.0,
        "heights": (0.5, 1.0, 1.5),
        "category": "workers",
    }
    return Zone(**(stated | fields))


def room(*zones, **fields):
    stated = {"circuits": (circuit("c"),), "equipment": (wire("w", "c"),)}
    return Layout(zones=zones, **(stated | fields))


def searched(layout):
    """What `certified_maxima` takes: fields, region, quantities, found."""
    loaded = loaded_layout(layout, layout.cases, None, None)
    (z,) = layout.zones
    region = Region(
        area_of(z.outline), z.floor_level, z.heights,
        z.volume or (min(z.heights), max(z.heights)), z.rule, z.clearance,
    )  # fmt: skip
    wanted = quantities(loaded, z)
    found = [f for f in search(loaded.fields, region, wanted).found if f is not None]
    return loaded.fields, region, wanted, found


def proven(layout, **options):
    """The only certificate of a layout."""
    fields, region, wanted, found = searched(layout)
    (only,), (first,) = wanted, found
    return certified_maximum(fields, region, only, first, **options)


def test_the_bound_of_a_wire_beside_the_zone_is_ampere():
    exact = ampere(math.hypot(1, 0.5))
    for tolerance in (0.1, 0.01, 0.001):
        certificate, _ = proven(room(zone()), tolerance=tolerance)
        assert certificate.reached
        assert exact * (1 - 1e-3) <= certificate.upper <= exact * (1 + 1.01 * tolerance)


def test_the_bound_holds_on_the_edge_of_a_clearance():
    around = zone(outline=((-2, -1), (2, -1), (2, 1), (-2, 1)), heights=(0.0,))
    certificate, _ = proven(room(around))
    exact = ampere(0.2 + RADIUS)
    assert certificate.reached
    assert exact * (1 - 1e-3) <= certificate.upper <= exact * 1.011


def test_the_bound_holds_on_the_surface_of_a_clearance_in_a_volume():
    around = zone(
        outline=((-2, -1), (2, -1), (2, 1), (-2, 1)), heights=(0.5,),
        volume=(-1.0, 1.0), rule="maximum over volume",
    )  # fmt: skip
    certificate, _ = proven(room(around))
    exact = ampere(0.2 + RADIUS)
    assert certificate.reached
    assert exact * (1 - 1e-3) <= certificate.upper <= exact * 1.011


def test_the_bound_holds_where_a_wire_crosses_a_wall_of_the_volume():
    """The wire ends its way through the volume at the walls x = ±2."""
    crossing = zone(
        outline=((-2, 0.15), (2, 0.15), (2, 1), (-2, 1)), heights=(0.5,),
        volume=(-0.5, 0.5), rule="maximum over volume", clearance=0.05,
    )  # fmt: skip
    certificate, _ = proven(room(crossing))
    exact = ampere(0.15)
    assert exact * (1 - 1e-3) <= certificate.upper <= exact * 1.011


def test_a_cable_that_crosses_between_grid_points_is_not_missed():
    """Told of nothing but the field in a far corner, the proof finds the cable."""
    hall = zone(
        outline=((0, 0), (40, 0), (40, 30), (0, 30)), heights=(1.0,), clearance=0.05
    )
    layout = room(hall, equipment=(riser("w", "c", 17.234, 11.871),))
    fields, region, (only,), (true,) = searched(layout)
    (corner,) = evaluations(fields, region, np.array([[39.9, 0.1, 1.0]]))
    low = float(corner.score(only)[0])
    told = replace(true, position=np.array([39.9, 0.1, 1.0]), score=low)
    certificate, found = certified_maximum(fields, region, only, told)
    exact = ampere(0.05 + RADIUS)
    assert low < 0.01 * exact
    assert certificate.reached
    assert certificate.upper >= exact * (1 - 1e-3)
    assert found.score == pytest.approx(exact, rel=0.011)
    away = np.linalg.norm(found.position[:2] - np.array([17.234, 11.871]))
    assert away == pytest.approx(0.05 + RADIUS, abs=1e-3)
    assert found.score > told.score
    assert certificate.found == found.score


def test_two_opposed_cables_that_nearly_cancel_are_bounded_tightly():
    """The field of the pair is 2·10⁻⁷ I s/d², a hundredth of each one's."""
    pair = (wire("go", "c", y=0.0), wire("back", "d", y=0.02))
    both = (circuit("c"), circuit("d", angle=180.0))
    layout = room(zone(), circuits=both, equipment=pair)
    certificate, _ = proven(layout)
    square = 1.0 + 0.25
    apart = ampere(math.sqrt(square)) * 0.02 / math.sqrt(square)
    assert certificate.reached
    assert certificate.upper == pytest.approx(apart, rel=0.03)


def test_the_mean_over_heights_is_bounded():
    column = zone(rule="three-height mean")
    certificate, _ = proven(room(column))
    exact = np.mean([ampere(math.hypot(1, z)) for z in (0.5, 1.0, 1.5)])
    assert certificate.reached
    assert exact * (1 - 1e-3) <= certificate.upper <= exact * 1.011


def test_circuits_of_unknown_angle_and_their_harmonics_are_bounded():
    spectrum = (
        SpectrumLine(frequency=150.0, ratio=0.4, offset=20.0),
        SpectrumLine(frequency=250.0, ratio=0.3, offset=-50.0),
    )
    both = (
        circuit("c", spectrum=spectrum),
        circuit("d", spectrum=spectrum, phase_relation="unknown"),
    )
    layout = room(
        zone(levels=("level",)), circuits=both, levels=(level(1e-4, basis="peak"),),
        equipment=(wire("w", "c"), wire("v", "d", y=0.3)),
    )  # fmt: skip
    fields, region, wanted, found = searched(layout)
    assert any(f.is_bound for f in found)
    rng = np.random.default_rng(0)
    places = rng.uniform((-2, 1, 0.5), (2, 3, 0.5), (5000, 3))
    (evaluation,) = evaluations(fields, region, places)
    results = certified_maxima(fields, region, wanted, found)
    for quantity, (certificate, now) in zip(wanted, results, strict=True):
        assert certificate.reached
        assert evaluation.score(quantity).max() <= certificate.upper
        assert now.score <= certificate.upper


def test_an_area_mean_a_zero_clearance_and_no_field_say_why():
    reasons = {
        bounds.AREA_MEAN: zone(rule="area mean"),
        bounds.AT_CONDUCTORS: zone(
            clearance=0.0, heights=(0.0,), outline=((-2, -1), (2, -1), (2, 1), (-2, 1))
        ),
    }
    for reason, asked in reasons.items():
        certificate, found = proven(room(asked))
        assert certificate.upper is None
        assert not certificate.reached
        assert certificate.reason == reason
        assert certificate.found == found.score


def test_a_zero_clearance_away_from_conductors_is_bounded():
    certificate, _ = proven(room(zone(clearance=0.0)))
    assert certificate.reached


def test_work_is_limited_and_the_bound_reached_is_told():
    certificate, found = proven(room(zone()), most_work=1)
    assert not certificate.reached
    assert certificate.upper > found.score * 1.01
    assert "limit of work" in certificate.reason


def test_a_proof_can_be_stopped_and_tells_how_far_it_is():
    layout = room(zone())
    with pytest.raises(ComputationCancelled):
        assess(layout, certify=True, cancelled=lambda: True)
    told = []
    fields, region, wanted, found = searched(layout)
    certified_maxima(
        fields, region, wanted, found, progress=lambda share, text: told.append(share)
    )
    assert told == sorted(told)
    assert 0 <= told[0] <= told[-1] <= 1


def test_a_tolerance_is_above_0():
    with pytest.raises(ValueError, match="tolerance"):
        proven(room(zone()), tolerance=0.0)


def judged(limit, **options):
    exact = ampere(math.hypot(1, 0.5))
    layout = room(
        zone(levels=("level",), uncertainty=Uncertainty(relative=0.0)),
        levels=(level(exact * limit),),
    )
    (comparison,) = assess(layout, **options).comparisons
    return comparison


def test_states_use_the_bound_where_it_is_proven():
    """The bound lies up to 1 % above; a level in between is not proven to be kept."""
    plain, certified = judged(1.0005), judged(1.0005, certify=True)
    assert plain.state == "below"
    assert plain.upper is None
    assert plain.upper_ratio is None
    assert certified.state == "above, U reaches"
    assert certified.ratio == pytest.approx(plain.ratio, rel=1e-3)
    assert 1.0 < certified.upper_ratio < 1.011
    assert certified.upper == pytest.approx(
        certified.upper_ratio * certified.level_value
    )
    closer = judged(1.0005 * 1.0012, certify=True, tolerance=1e-4)
    assert closer.state == "below"
    assert judged(1.02, certify=True).state == "below"
    assert judged(0.98, certify=True).state == "above"


def test_only_what_was_asked_is_proven():
    (plain,) = assess(room(zone())).zones
    assert plain.maxima[0].details.certificate is None
    assert plain.maxima[0].details.upper is None
    (certified,) = assess(room(zone()), certify=True).zones
    (maximum,) = certified.maxima
    assert maximum.value <= maximum.details.upper <= maximum.value * 1.011
    assert "proven in" in certified.searched


def test_quantities_at_one_place_share_their_proof():
    layout = room(zone(levels=("level",)), levels=(level(1e-4),))
    fields, region, wanted, found = searched(layout)
    assert [q.level is None for q in wanted] == [True, False]
    assert all(isinstance(q, Quantity) for q in wanted)
    (field, _), (ratio, _) = certified_maxima(fields, region, wanted, found)
    assert ratio.upper == pytest.approx(field.upper / 1e-4)
    assert ratio.cells == field.cells
