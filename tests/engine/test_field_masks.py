"""Masks: inside, near, and the distance to a conductor's surface."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from engine.conductor import Conductor
from engine.conductors import conductors
from engine.field import inside, near_field, surface_distance
from engine.layout import Layout
from engine.runs import Bar, CircuitShare, Flat, Round, Run


def along_y(shape: Round | Bar) -> Conductor:
    """From (0, 0, 0) to (0, 4, 0); a bar stands on edge: width along z."""
    axes = np.tile([[0.0, 0.0, 1.0], [-1.0, 0.0, 0.0]], (2, 1, 1))
    path = np.array([[0.0, 0, 0], [0, 4, 0]])
    return Conductor("c", "c", "c", "run", path, axes, shape, (), "c")


def corner(shape: Round | Bar) -> Conductor:
    """From (0, -4, 0) to the origin and on to (4, 0, 0), mitred; width along z."""
    path = np.array([[0.0, -4, 0], [0, 0, 0], [4, 0, 0]])
    axes = np.array(
        [[[0, 0, 1], [-1, 0, 0]], [[0, 0, 1], [-1, 1, 0]], [[0, 0, 1], [0, 1, 0]]],
        float,
    )
    return Conductor("c", "c", "c", "run", path, axes, shape, (), "c")


BAR = {"width": 0.1, "thickness": 0.02}
bar = Bar(**BAR)


@pytest.mark.parametrize(
    ("point", "distance"),
    [
        ([0.11, 2, 0], 0.10),
        ([0, 2, 0.15], 0.10),
        ([0.04, 2, 0.09], 0.05),  # 3, 4, 5 off the long edge
        ([0, 4.3, 0], 0.30),
        ([0.04, 4.04, 0.0], 0.05),
        ([0, -0.3, 0.45], 0.50),
        ([0.01 + 0.02, 4.1, 0.05 + 0.11], 0.15),  # 2, 10, 11, 15 off a corner
        ([0.009, 2, 0.049], 0.0),
        ([0, 0.001, 0], 0.0),
    ],
)
def test_distance_to_a_straight_bar(point: list[float], distance: float) -> None:
    found = surface_distance([along_y(bar)], np.array([point]))
    assert found == pytest.approx([distance], abs=1e-12)
    assert (inside([along_y(bar)], np.array([point])) == [distance == 0]).all()


@pytest.mark.parametrize(
    ("point", "distance"),
    [
        ([0.11, 2, 0], 0.09),
        ([0.03, 2, 0.04], 0.03),
        ([0, 4.12, 0], 0.10),
        ([0, 2, 0.019], 0.0),
    ],
)
def test_distance_to_a_round_conductor(point: list[float], distance: float) -> None:
    made = [along_y(Round(diameter=0.04))]
    found = surface_distance(made, np.array([point]))
    assert found == pytest.approx([distance], abs=1e-12)
    assert (inside(made, np.array([point])) == [distance == 0]).all()


@pytest.mark.parametrize(
    ("point", "distance"),
    [
        ([-0.01 - 0.03, 0.01 + 0.04, 0], 0.05),  # outer corner
        ([0.01 + 0.03, -0.01 - 0.05, 0], 0.03),  # inside of the bend
        ([-0.01 + 1e-6, 0.01 - 1e-6, 0], 0.0),  # in the outer corner
        ([-0.01 - 1e-3, 0.01 - 1e-6, 0], 1e-3),
        ([2, 0.06, 0.0], 0.05),
    ],
)
def test_distance_at_a_mitred_bend(point: list[float], distance: float) -> None:
    found = surface_distance([corner(bar)], np.array([point]))
    assert found == pytest.approx([distance], abs=1e-12)


def test_distance_is_that_of_the_nearest_conductor() -> None:
    made = [along_y(bar), corner(Round(diameter=0.02))]
    points = np.random.default_rng(2).uniform(-3, 3, (200, 3))
    apart = [surface_distance([one], points) for one in made]
    assert (surface_distance(made, points) == np.minimum(*apart)).all()


def test_many_points_at_once_have_the_distances_they_have_alone() -> None:
    # Bars with the sharpest mitres, whose distance changes fastest, and round ones.
    rng = np.random.default_rng(3)
    section = Flat(
        circuits=(CircuitShare(circuit="c"),), pitch=0.12, shape=Bar(**BAR, turn=20)
    )
    routes = [
        ((0.0, 0, z), (3.0, 0, z), (1.05, 2.0, z), (1.05, 2.0, z + 2))
        for z in (0.0, 1.0, 2.5)
    ]
    runs = tuple(
        Run(id=f"r{k}", route=route, section=section) for k, route in enumerate(routes)
    )
    made = [*conductors(Layout(runs=runs)), along_y(Round(diameter=0.04))]
    points = rng.uniform(-2, 5, (3000, 3))
    points[:1000] = 0.3 * points[:1000] + [2.4, 0.3, 0.5]
    each = [surface_distance([one], points) for one in made]
    assert surface_distance(made, points) == pytest.approx(
        np.min(each, axis=0), abs=1e-12
    )
    alone = [surface_distance(made, point[None])[0] for point in points[::40]]
    assert surface_distance(made, points)[::40] == pytest.approx(alone, abs=1e-12)


def test_distance_grows_no_faster_than_the_way() -> None:
    rng = np.random.default_rng(3)
    here = rng.uniform(-0.3, 0.3, (500, 3))
    there = here + rng.normal(size=(500, 3)) * 0.05
    way = np.linalg.norm(there - here, axis=1)
    made = [corner(bar)]
    change = np.abs(surface_distance(made, there) - surface_distance(made, here))
    assert (change <= way + 1e-12).all()


def test_near_field_reaches_two_widths_from_the_surface() -> None:
    points = np.array([[0.2099, 2, 0], [0.2101, 2, 0], [0, 2, 0], [0, 2, 0.2499]])
    assert near_field([along_y(bar)], points).tolist() == [True, False, True, True]
    cable = along_y(Round(diameter=0.03))
    points = np.array([[0.0749, 2, 0], [0.0751, 2, 0]])
    assert near_field([cable], points).tolist() == [True, False]


def test_without_conductors_nothing_is_near() -> None:
    points = np.zeros((2, 3))
    assert surface_distance([], points).tolist() == [np.inf, np.inf]
    assert not inside([], points).any()
    assert not near_field([], points).any()


def test_every_filament_lies_inside() -> None:
    """So that a point on a filament, where its field is zero, is always masked."""
    for made in (corner(bar), corner(Round(diameter=0.04))):
        for a, b in ((0, 0), (0.0099, 0.0099), (-0.019, 0.002)):
            line = made.path + a * made.axes[:, 0] + b * made.axes[:, 1]
            t = np.linspace(0, 1, 50)[1:-1, None]
            points = np.concatenate([s + t * (e - s) for s, e in pairwise(line)])
            # Mitred filaments of a round conductor leave its round joint, by little.
            if isinstance(made.shape, Round):
                points = points[np.linalg.norm(points, axis=1) > 0.05]
            assert inside([made], points).all()
