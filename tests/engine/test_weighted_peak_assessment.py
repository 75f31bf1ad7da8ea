"""Zones and receptors judged by the weighted peak, from a layout to its states."""

from __future__ import annotations

import math

import pytest
from msgspec.structs import replace
from test_assessment import ampere, circuit, level, one, room, wire, zone

from engine.assessment import assess
from engine.circuits import SpectrumLine
from engine.criteria import LevelRange, LevelRanges
from engine.places import Receptor

#: Flat: no phase of its own at either frequency.
FLAT = LevelRanges(ranges=(LevelRange(f_from=25, f_to=400, coefficient=4e-5),))
WEIGHTED = replace(level(1.0, sum_rule="weighted peak"), values=FLAT)

#: Of the wire at (0, 1, 0.5), where the zone is nearest to it.
NEAREST = ampere(math.hypot(1, 0.5)) / 4e-5


def judged(weighting=WEIGHTED, offset=0.0, third=1 / 9, **fields):
    spectrum = (SpectrumLine(frequency=150, ratio=third, offset=offset),)
    layout = room(
        zone(**fields), levels=(weighting,), circuits=(circuit("c", spectrum=spectrum),)
    )
    return one(layout)


def test_crests_that_meet_count_in_full_and_opposed_crests_do_not():
    # cos t ± (1/9) cos 3t peaks at 1 ± 1/9 (textbook algebra). 0.1 %: filaments, and
    # the return 5 km below.
    assert judged(offset=0.0).ratio == pytest.approx(NEAREST * 10 / 9, rel=1e-3)
    assert judged(offset=180.0).ratio == pytest.approx(NEAREST * 8 / 9, rel=1e-3)
    by_ratios = replace(WEIGHTED, sum_rule="ratio sum")
    summed = judged(by_ratios, offset=180.0).ratio
    assert summed == pytest.approx(NEAREST * 10 / 9, rel=1e-3)


def test_an_unknown_offset_gives_the_named_bound():
    comparison = judged(offset=None)
    assert comparison.ratio == pytest.approx(NEAREST * 10 / 9, rel=1e-3)
    assert comparison.details.is_bound
    assert "unknown angle" in comparison.details.bound_reason
    assert not judged(offset=180.0).details.is_bound


def test_the_phase_of_the_level_moves_the_crests():
    # Falling with 1/f from 100 Hz on: the third harmonic is turned by 90 degrees, and
    # an offset of −90 degrees turns it back.
    falling = LevelRanges(
        ranges=(
            LevelRange(f_from=25, f_to=100, coefficient=4e-5),
            LevelRange(f_from=100, f_to=1000, coefficient=4e-3, exponent=1),
        )
    )
    rule = replace(WEIGHTED, values=falling)
    third = (1 / 9) * (100 / 150)
    back = judged(rule, offset=-90.0, third=third).ratio
    assert back == pytest.approx(NEAREST * 10 / 9, rel=1e-3)
    assert judged(rule, offset=90.0, third=third).ratio == pytest.approx(
        NEAREST * 8 / 9, rel=1e-3
    )


def test_three_heights_and_areas_are_means_of_the_weighted_peak():
    distances = [math.hypot(1, z) for z in (0.5, 1.0, 1.5)]
    mean = sum(ampere(d) for d in distances) / 3 / 4e-5
    found = judged(offset=180.0)
    of_heights = judged(offset=180.0, rule="three-height mean")
    of_areas = judged(offset=180.0, rule="area mean")
    summed = judged(
        replace(WEIGHTED, sum_rule="ratio sum"), offset=180.0, rule="area mean"
    )
    assert of_heights.ratio == pytest.approx(mean * 8 / 9, rel=1e-3)
    assert of_heights.ratio < found.ratio
    assert of_areas.ratio == pytest.approx(summed.ratio * 8 / 10, rel=1e-3)


def test_a_proven_bound_holds_for_the_weighted_peak():
    spectrum = (SpectrumLine(frequency=150, ratio=1 / 9, offset=180.0),)
    layout = room(
        zone(), levels=(WEIGHTED,), circuits=(circuit("c", spectrum=spectrum),)
    )
    comparison = one(layout, certify=True)
    assert comparison.details.certificate.reached
    assert comparison.ratio <= comparison.upper_ratio <= comparison.ratio * 1.0101


def test_a_receptor_is_judged_by_the_weighted_peak_too():
    receptor = Receptor(id="bed", at=(0, 1, 0.5), category="workers", levels=("level",))
    spectrum = (SpectrumLine(frequency=150, ratio=1 / 9, offset=180.0),)
    layout = room(
        levels=(WEIGHTED,), receptors=(receptor,), equipment=(wire("w", "c"),),
        circuits=(circuit("c", spectrum=spectrum),),
    )  # fmt: skip
    (comparison,) = assess(layout).comparisons
    assert comparison.ratio == pytest.approx(NEAREST * 8 / 9, rel=1e-3)
