"""Readings of a level's basis and component where phase relations are unknown."""

from __future__ import annotations

import numpy as np
import pytest

from engine.currents import Component
from engine.field import ellipse
from engine.readings import reading

ROOT_TWO = np.sqrt(2.0)
RANDOM = np.random.default_rng(41)
B = RANDOM.normal(size=(3, 5, 3)) + 1j * RANDOM.normal(size=(3, 5, 3))
SOURCES = [Component(50, 50), Component(50, 50, "a"), Component(50, 50, "b")]


def at_worst_by_trial(evaluated):
    """The largest over half-degree steps of the angle between two sources."""
    angles = np.linspace(0, 2 * np.pi, 721)
    return np.max([evaluated(B[0] + np.exp(1j * a) * B[1]) for a in angles], axis=0)


def test_a_peak_of_one_circuit_of_unknown_angle_is_its_worst():
    found = reading(B[:2], SOURCES[:2], "peak", "resultant")
    trial = ROOT_TWO * at_worst_by_trial(lambda b: ellipse(b).semi_major)
    # Half a degree between the trials; the search adds 0.03 % of one source.
    assert found.by_frequency[50] == pytest.approx(trial, rel=4e-4)
    assert (found.by_frequency[50] >= trial * (1 - 1e-12)).all()
    assert found.is_bound
    assert found.reason == "worst over an unknown phase relation"


@pytest.mark.parametrize(("basis", "factor"), [("RMS", 1.0), ("peak", ROOT_TWO)])
def test_an_axis_of_one_circuit_of_unknown_angle_is_its_worst(basis, factor):
    # Of each axis alone |B1| + |B2| is reached; the sum of the largest is no less.
    found = reading(B[:2], SOURCES[:2], basis, "axis").by_frequency[50]
    trial = factor * at_worst_by_trial(lambda b: np.abs(b).max(axis=1))
    assert (found >= trial * (1 - 1e-12)).all()


@pytest.mark.parametrize("basis", ["RMS", "peak"])
def test_several_circuits_of_unknown_angle_are_bounded_by_a_named_sum(basis):
    found = reading(B, SOURCES, basis, "resultant")
    assert found.is_bound
    assert "sum" in found.reason
    pair = reading(B[:2], SOURCES[:2], basis, "resultant").by_frequency[50]
    assert (found.by_frequency[50] > pair).all()


def test_what_is_known_is_no_bound():
    found = reading(B[:2], [Component(50, 50), Component(150, 50)], "peak", "resultant")
    assert not found.is_bound
    assert found.by_frequency[150] == pytest.approx(ROOT_TWO * ellipse(B[1]).semi_major)
