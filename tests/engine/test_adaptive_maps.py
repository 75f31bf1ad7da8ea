"""Maps interpolated between few nodes: right, cheap, and never wrong at metal."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from engine.adaptive_maps import Layer, adaptive_layer, direct_layer
from engine.case_fields import CaseCurrents, CaseFields, case_currents
from engine.circuits import LoadCase
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.currents import CasePhasors, Component, case_phasors
from engine.errors import ComputationCancelled
from engine.iso_lines import iso_lines
from engine.layout_file import read
from engine.maps import extent, field_map
from engine.masks import keepouts
from engine.runs import Round, SlotLoad
from engine.sampling import PlaneSample, horizontal, on_plane
from engine.zone_assessment import zone_floor

SAMPLES = sorted((Path(__file__).parents[2] / "sample_layouts").glob("*.json"))

Floats = NDArray[np.float64]

#: What a map promises, of the local value.
PROMISED = 2e-3


def mitred(path: Floats) -> Floats:
    """(n, 2, 3): outwards across the corners of a rectangle, and off its plane."""
    outwards = np.sign(path - (path.min(axis=0) + path.max(axis=0)) / 2)
    off_plane = np.tile(np.all(outwards == 0, axis=0).astype(float), (len(path), 1))
    return np.stack([outwards, off_plane], axis=1)


def wires(*paths: list[list[float]], current: list[complex]) -> CaseFields:
    """Closed rectangles of 10 mm round with RMS phasors at 50 Hz. [A]"""
    parts = tuple(
        Conductor(
            key=f"{k}",
            item=f"{k}",
            slot="L1",
            role="run",
            path=np.array(path, float),
            axes=mitred(np.array(path, float)),
            shape=Round(diameter=0.01),
            loads=(SlotLoad(circuit="c", label=f"L{k + 1}"),),
            group="all",
        )
        for k, path in enumerate(paths)
    )
    values = {("c", f"L{k + 1}"): np.array([i]) for k, i in enumerate(current)}
    case = LoadCase(id="case")
    phasors = CasePhasors(case, (Component(50.0, 50.0, ""),), values, ())
    return CaseFields(parts, (case_currents(phasors, parts, ()),))


def loop(*, z: float = 0.0) -> CaseFields:
    """Three loops, one within the other, of a balanced three-phase current."""
    turn = np.exp(-2j * np.pi / 3)
    paths = [
        [[e, e, z], [4 - e, e, z], [4 - e, 2 - e, z], [e, 2 - e, z], [e, e, z]]
        for e in (0.0, 0.1, 0.2)
    ]
    return wires(*paths, current=[100, 100 * turn, 100 * turn**2])


def grid(z: float, step: float = 0.02) -> PlaneSample:
    return on_plane(horizontal((-1.0, 5.0), (-1.0, 3.0), z), step)


def worst(found: Layer, true: Layer) -> float:
    here = ~true.mask
    deviations = [
        np.abs(a - b)[here] / np.maximum(b[here], 1e-12)
        for a, b in ((found.ac, true.ac), (found.dc, true.dc))
    ]
    return float(np.max(deviations))


@pytest.mark.parametrize("z", [0.0, 0.008, 0.05, 0.5, 1.0])
def test_map_agrees_with_every_pixel_at_any_distance_from_metal(z: float) -> None:
    fields, sample = loop(), grid(z)
    found, true = adaptive_layer(fields, sample), direct_layer(fields, sample)
    np.testing.assert_array_equal(found.mask, true.mask)
    assert found.mask.any() == (z < 0.005)
    assert worst(found, true) < PROMISED
    assert found.checked_error <= 1e-3


def test_a_wire_between_the_nodes_of_a_large_tile_is_not_missed() -> None:
    # Upright and short: it meets the plane in a single spot of the map.
    post = [[2.03, 0.97, -0.02], [2.03, 0.97, 0.02], [2.05, 0.97, 0.02],
            [2.05, 0.97, -0.02], [2.03, 0.97, -0.02]]  # fmt: skip
    fields, sample = wires(post, current=[1000]), grid(0.0, 0.005)
    found, true = adaptive_layer(fields, sample), direct_layer(fields, sample)
    assert true.mask.any()
    np.testing.assert_array_equal(found.mask, true.mask)
    assert worst(found, true) < PROMISED
    assert found.evaluations < len(sample.points) / 10


def test_lines_of_equal_value_near_metal_are_those_of_every_pixel() -> None:
    fields, sample = loop(z=0.05), grid(0.0, 0.01)
    found, true = adaptive_layer(fields, sample), direct_layer(fields, sample)
    level = float(np.quantile(true.ac, 0.95))
    first, second = sample.first, sample.second
    lengths = []
    for layer in (found, true):
        grid_values = layer.ac.reshape(sample.shape)
        lines = iso_lines(first, second, grid_values, None, [level])
        lengths.append(sum(line.length for line in lines))
    assert lengths[0] == pytest.approx(lengths[1], rel=2e-3)
    above = (found.ac >= level) != (true.ac >= level)
    near_level = np.abs(true.ac / level - 1) < PROMISED
    assert not np.any(above & ~near_level)


def test_cost_hardly_depends_on_the_size_of_a_pixel() -> None:
    fields = loop()
    coarse = adaptive_layer(fields, grid(0.5, 0.01))
    fine = adaptive_layer(fields, grid(0.5, 0.005))
    assert len(fine.ac) > 3.9 * len(coarse.ac)
    assert fine.evaluations < 1.5 * coarse.evaluations


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.stem)
def test_samples_take_a_fifth_of_the_evaluations_at_working_height(path: Path) -> None:
    layout = read(path)
    parts = conductors(layout)
    zone = next(z for z in layout.zones if zone_floor(layout, z) is not None)
    z = (zone_floor(layout, zone) or 0.0) + 1.0
    x0, y0, x1, y1 = extent(layout)
    sample = on_plane(
        horizontal((x0, x1), (y0, y1), z), max((x1 - x0) / 999, (y1 - y0) / 799)
    )
    thinned = np.arange(0, len(sample.points), 37)
    for case in layout.cases:
        phasors = case_phasors(layout, case)
        currents: CaseCurrents = case_currents(phasors, parts, keepouts(layout, case))
        fields = CaseFields(parts, (currents,))
        found = adaptive_layer(fields, sample)
        assert 5 * found.evaluations <= len(sample.points)
        few = PlaneSample(sample.points[thinned], np.zeros(len(thinned)), np.zeros(1))
        true = direct_layer(fields, few)
        np.testing.assert_array_equal(found.mask[thinned], true.mask)
        here = ~true.mask
        assert found.ac[thinned][here] == pytest.approx(
            true.ac[here], rel=PROMISED, abs=1e-12
        )
        assert found.dc[thinned][here] == pytest.approx(
            true.dc[here], rel=PROMISED, abs=1e-12
        )


def test_maps_say_how_many_points_they_took_and_what_was_checked() -> None:
    layout = read(SAMPLES[-1])
    small = field_map(layout, layout.cases[0], (1.0,), step=0.25)
    large = field_map(layout, layout.cases[0], (1.0,), step=0.03)
    assert small.evaluations == small.values.size
    assert small.checked_error == 0.0
    assert large.evaluations < large.values.size
    assert 0.0 < large.checked_error <= 1e-3


def test_a_plane_without_any_conductor_is_zero() -> None:
    case = LoadCase(id="case")
    empty = case_currents(CasePhasors(case, (), {}, ()), (), ())
    layer = adaptive_layer(CaseFields((), (empty,)), grid(0.0))
    assert not layer.ac.any()
    assert not layer.mask.any()


def test_a_map_stops_when_told() -> None:
    fields = loop()
    told = CaseFields(fields.conductors, fields.cases, None, lambda: True)
    with pytest.raises(ComputationCancelled):
        adaptive_layer(told, grid(0.5))


def test_a_tolerance_that_is_none_is_refused() -> None:
    with pytest.raises(ValueError, match="tolerance"):
        adaptive_layer(loop(), grid(0.5), tolerance=0.0)
