"""Conductors left out by their boxes are farther away than what is asked for."""

from __future__ import annotations

import numpy as np
import pytest

from engine import field
from engine.circuits import BalancedCurrent, Circuit
from engine.conductors import conductors
from engine.layout import Layout
from engine.masks import distances_to, masked
from engine.reach import within_reach
from engine.runs import Bar, CircuitShare, Flat, Run


@pytest.fixture
def found():
    """Bars of 100 mm on a bent route, at several places."""
    section = Flat(
        circuits=(CircuitShare(circuit="C"),),
        order=("L1", "L2", "L3"),
        pitch=0.2,
        shape=Bar(width=0.1, thickness=0.01, turn=30.0),
    )
    runs = tuple(
        Run(
            id=f"r{i}",
            kind="busbar",
            route=((3.0 * i, 0, 1), (3.0 * i + 1, 0, 1), (3.0 * i + 0.3, 0.8, 1.6)),
            section=section,
        )
        for i in range(5)
    )
    circuit = Circuit(id="C", demand=BalancedCurrent(rms=100.0))
    return conductors(Layout(circuits=(circuit,), runs=runs))


@pytest.mark.parametrize("distance", [0.0, 0.05, 0.6])
def test_what_is_left_out_is_farther_than_asked(found, distance):
    generator = np.random.default_rng(3)
    left_out = 0
    for _ in range(60):
        middle = generator.uniform((-1, -1, 0.5), (14, 2, 2))
        points = middle + generator.uniform(-0.3, 0.3, (8, 3))
        near = within_reach(found, points, distance)
        gone = [c for c in found if not any(c is other for other in near)]
        left_out += len(gone)
        if gone:
            assert field.surface_distance(gone, points).min() > distance
    assert left_out > 0


def test_masks_are_those_of_all_conductors(found):
    points = np.random.default_rng(4).uniform((-1, -1, 0.5), (14, 2, 2), (4000, 3))
    points[:20] = [c.path.mean(axis=0) for c in found[:20]]
    for clearance in (0.0, 0.1):
        distances = distances_to(found, points)
        expected = (distances == 0) | (distances < clearance * (1 - 1e-9))
        assert expected.any()
        by_parts = [
            masked(found, (), part, clearance) for part in np.split(points, 100)
        ]
        assert np.array_equal(np.concatenate(by_parts), expected)


def test_two_widths_count_each_conductor_by_its_own(found):
    generator = np.random.default_rng(5)
    points = generator.uniform((-1, -1, 0.5), (14, 2, 2), (300, 3))
    for point in points:
        near = within_reach(found, point[None], widths=2.0)
        expected = field.near_field(found, point[None])[0]
        assert expected == (bool(near) and field.near_field(near, point[None])[0])


def test_conductors_without_bundles_are_all_kept(found):
    plain = list(found)
    assert within_reach(plain, np.array([[1e3, 0, 0]])) is plain
    assert within_reach(found, np.array([[1e3, 0.0, 0.0]])) == []
