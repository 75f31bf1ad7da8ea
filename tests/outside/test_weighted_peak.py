"""Weighted peak: ICNIRP 2010, Health Physics 99(6):818-836, eq. 7 and its statements.

Levels are typed in as the source prints them. φ = 180, 90, 0, −90° where the level
falls with 1/f², 1/f, is flat, rises with f; A and EL are both amplitudes.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from msgspec import structs

from engine.criteria import (
    LevelPoint,
    LevelRange,
    LevelRanges,
    LevelTable,
    ReferenceLevel,
)
from engine.currents import Component
from engine.level_use import level_use
from engine.levels import ratios
from engine.readings import reading
from engine.weighted_peak import of_waveform, weighted_peak

MICRO = 1e-6
ROOT_TWO = math.sqrt(2.0)


def level_of(*rows, **others):
    made = tuple(
        LevelRange(f_from=a, f_to=b, coefficient=c * MICRO, exponent=n)
        for a, b, c, n in rows
    )
    return ReferenceLevel(
        id="published", source="Health Physics 99(6):818", category="general public",
        values=LevelRanges(ranges=made), sum_rule="weighted peak", **others,
    )  # fmt: skip


PUBLIC_ROWS = (
    (1, 8, 4e4, 2), (8, 25, 5e3, 1), (25, 400, 200, 0), (400, 3000, 8e4, 1),
)  # fmt: skip
PUBLIC = level_of(*PUBLIC_ROWS)
PUBLIC_AXIS = level_of(*PUBLIC_ROWS, component="axis")

LINEAR = np.array([0.0, 0.6, 0.8])
CIRCULAR = np.array([1.0, 1j, 0.0]) / ROOT_TWO


def field_of(*phasors):
    """(c, 1, 3) from (3,) RMS phasors in µT."""
    return np.array(phasors, complex)[:, None, :] * MICRO


def peak_of(level, b, *frequencies):
    return weighted_peak(b, [Component(f, 50.0) for f in frequencies], level)


@pytest.mark.parametrize(
    ("f", "limit"), [(5, 1600), (16, 312.5), (50, 200), (800, 100)]
)
def test_one_linear_sinusoid_is_its_field_over_the_level(f, limit):
    # Whatever its phase; the limits are the source's own table.
    found = peak_of(PUBLIC, field_of(150 * LINEAR * np.exp(0.7j)), f)
    assert found.values == pytest.approx([150 / limit], rel=1e-12)
    assert not found.is_bound


def test_one_circular_field_is_0_707_of_resultant_over_level():
    found = peak_of(PUBLIC, field_of(150 * CIRCULAR), 50)
    assert found.values == pytest.approx([150 / 200 / ROOT_TWO], rel=1e-12)


def test_a_level_stated_as_a_peak_is_an_amplitude():
    peaks = structs.replace(PUBLIC, basis="peak")
    found = peak_of(peaks, field_of(150 * LINEAR), 50)
    assert found.values == pytest.approx([ROOT_TWO * 150 / 200], rel=1e-12)


def test_by_axis_the_largest_component_counts():
    found = peak_of(PUBLIC_AXIS, field_of(150 * LINEAR), 50)
    assert found.values == pytest.approx([0.8 * 150 / 200], rel=1e-12)


def test_crests_that_meet_add_and_crests_that_oppose_do_not():
    # cos t + a cos 3t has its largest value 1 + a at t = 0; cos t − a cos 3t with
    # a = 1/9 is flat at t = 0: 1 − a there, and nowhere more (textbook algebra).
    meeting = peak_of(PUBLIC, field_of(180 * LINEAR, 20 * LINEAR), 50, 150)
    assert meeting.values == pytest.approx([(180 + 20) / 200], rel=1e-9)
    opposed = peak_of(PUBLIC, field_of(180 * LINEAR, -20 * LINEAR), 50, 150)
    assert opposed.values == pytest.approx([(180 - 20) / 200], rel=1e-9)


@pytest.mark.parametrize(
    ("row", "turn"),
    [
        ((100, 1000, 4e6, 2), 180), ((100, 1000, 4e4, 1), 90),
        ((100, 1000, 100, 0), 0), ((100, 1000, 0.25, -1), -90),
    ],
)  # fmt: skip
def test_the_phase_of_a_range_follows_its_slope(row, turn):
    # A second field turned back by φ has its crest with that of the first: 1 in all.
    level = level_of((25, 100, 200, 0), row)
    frequency = 150.0
    limit = row[2] * frequency ** -row[3]
    back = np.exp(-1j * math.radians(turn))
    b = field_of(100 * LINEAR, 0.5 * limit * back * LINEAR)
    assert peak_of(level, b, 50, 150).values == pytest.approx([1.0], rel=1e-9)
    if turn:
        other = field_of(100 * LINEAR, 0.5 * limit / back**0.5 * LINEAR)
        assert peak_of(level, other, 50, 150).values[0] < 0.99


def test_at_a_corner_the_worse_of_both_phases_counts():
    # At 400 Hz the level is flat below and falls above: φ is 0 or 90 degrees.
    for turn in (0.0, -90.0):
        second = 100 * LINEAR * np.exp(1j * math.radians(turn))
        found = peak_of(PUBLIC, field_of(100 * LINEAR, second), 50, 400)
        assert found.values == pytest.approx([1.0], rel=1e-9)


@settings(max_examples=30, deadline=None)
@given(st.integers(0, 2**32 - 1), st.sampled_from([PUBLIC, PUBLIC_AXIS]))
def test_spectrum_and_sampled_waveform_agree(seed, level):
    random = np.random.default_rng(seed)
    frequencies = [5.0, 15.0, 50.0, 150.0, 350.0, 650.0]
    b = (random.normal(size=(6, 1, 3)) + 1j * random.normal(size=(6, 1, 3))) * MICRO
    b *= random.uniform(1, 100, (6, 1, 1))
    k, period = 4096, 0.2
    times = np.arange(k) * period / k
    turns = np.exp(2j * np.pi * np.outer(times, frequencies))
    waveform = ROOT_TWO * (turns @ b[:, 0]).real
    found = peak_of(level, b, *frequencies)
    assert not found.is_bound
    # A crest between two of 65536 instants: ½ (π · 650 · 0.2/65536)² = 2e-5.
    assert of_waveform(waveform, period, level) == pytest.approx(
        found.values[0], rel=3e-5
    )
    summed = reading(b, [Component(f, 50.0) for f in frequencies], "RMS",
                     level.component)  # fmt: skip
    assert found.values[0] <= ratios(level, summed.by_frequency).ac[0] * (1 + 1e-12)


def test_a_constant_part_of_a_waveform_does_not_count():
    k = 64
    wave = np.outer(200 * ROOT_TWO * np.cos(2 * np.pi * np.arange(k) / k) + 1e4, LINEAR)
    found = of_waveform(wave * MICRO, 0.02, PUBLIC)
    assert found == pytest.approx(1.0, rel=1e-9)


def test_a_waveform_with_too_few_instants_is_refused():
    with pytest.raises(ValueError, match="too few"):
        of_waveform(np.outer([1.0, -1.0, 1.0, -1.0], LINEAR), 0.02, PUBLIC)


def test_unknown_angles_give_a_named_bound_that_some_angle_reaches():
    # On one line sources of unknown angle can meet at their crests.
    b = field_of(100 * LINEAR, 40 * LINEAR, 20 * LINEAR)
    components = [Component(50, 50), Component(50, 50, "a"), Component(150, 50, "a")]
    found = weighted_peak(b, components, PUBLIC)
    assert found.values == pytest.approx([0.8], rel=1e-9)
    assert found.is_bound
    assert "unknown angle" in found.reason
    trials = []
    for shift in np.linspace(0, 2 * np.pi, 720, endpoint=False):
        turned = [100 * LINEAR + 40 * LINEAR * np.exp(1j * shift),
                  20 * LINEAR * np.exp(3j * shift)]  # fmt: skip
        trials.append(peak_of(PUBLIC, field_of(*turned), 50, 150).values[0])
    assert max(trials) == pytest.approx(0.8, rel=1e-4)


def test_sources_of_other_bases_are_bounded_by_the_sum_of_their_peaks():
    b = field_of(100 * LINEAR, 60 * LINEAR)
    found = weighted_peak(b, [Component(50, 50), Component(60, 60)], PUBLIC)
    assert found.values == pytest.approx([0.8], rel=1e-12)
    assert found.is_bound


def test_a_table_states_no_phases_and_is_bounded():
    points = (
        LevelPoint(frequency=50, level=2e-4),
        LevelPoint(frequency=250, level=1e-4),
    )
    table = structs.replace(PUBLIC, values=LevelTable(points=points))
    found = peak_of(table, field_of(100 * LINEAR, -50 * LINEAR), 50, 250)
    assert found.values == pytest.approx([1.0], rel=1e-12)
    assert "no phases" in found.reason
    alone = peak_of(table, field_of(100 * LINEAR), 50)
    assert not alone.is_bound


def test_the_use_of_a_level_is_its_weighted_peak_and_direct_current_stays_apart():
    b = field_of(5000 * LINEAR, 180 * LINEAR, -20 * LINEAR)
    components = [Component(0, 0), Component(50, 50), Component(150, 50)]
    use = level_use(b, components, PUBLIC, "AC")
    assert use.ratios == pytest.approx([0.8], rel=1e-9)
    assert not use.is_bound


def test_a_frequency_without_a_level_is_refused():
    with pytest.raises(ValueError, match="5000 Hz"):
        peak_of(PUBLIC, field_of(LINEAR, LINEAR), 50, 5000)
    use = level_use(
        field_of(LINEAR, LINEAR), [Component(50, 50), Component(5000, 50)], PUBLIC, "AC"
    )
    assert use.ratios is None
