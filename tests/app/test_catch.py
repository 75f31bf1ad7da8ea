"""A pointer near an exact place means that place."""

from __future__ import annotations

import time

import numpy as np
import pytest

from app.tools.catch import NO_TARGETS, catch, held, joined, targets

SQUARE = ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.0, 3.0))
ROOM = targets(outlines=[SQUARE])


def test_a_vertex_wins_over_the_edges_it_ends():
    found = catch((0.05, 0.02), ROOM, 0.1)
    assert (found.at, found.caught) == ((0.0, 0.0), "vertex")


def test_the_middle_of_an_edge_wins_over_the_edge():
    found = catch((2.04, 0.03), ROOM, 0.1)
    assert (found.at, found.caught) == ((2.0, 0.0), "midpoint")


def test_an_edge_catches_at_the_foot_of_the_perpendicular():
    found = catch((1.0, 0.06), ROOM, 0.1)
    assert (found.at, found.caught) == ((1.0, 0.0), "edge")


def test_the_last_edge_of_an_outline_closes_it():
    found = catch((0.05, 1.0), ROOM, 0.1)
    assert (found.at, found.caught) == ((0.0, 1.0), "edge")
    open_line = targets(lines=[SQUARE])
    assert catch((0.05, 1.0), open_line, 0.1).caught == ""


def test_the_grid_catches_where_nothing_else_does():
    found = catch((1.28, 1.31), ROOM, 0.1, grid=0.1)
    assert (found.at, found.caught) == ((1.3, 1.3), "grid")
    assert catch((0.02, 0.02), ROOM, 0.1, grid=0.1).caught == "vertex"


def test_without_a_grid_a_pointer_in_the_open_stays_where_it_is():
    assert catch((1.28, 1.31), ROOM, 0.1).at == (1.28, 1.31)
    assert catch((1.28, 1.31), NO_TARGETS, 0.1).caught == ""


def test_conductors_count_only_where_nothing_drawn_is_as_near():
    both = joined([ROOM, targets(minor=[[(0.02, 0.0), (2.5, 1.5)]])])
    assert catch((0.03, 0.0), both, 0.1).at == (0.0, 0.0)
    assert catch((2.52, 1.5), both, 0.1).at == (2.5, 1.5)


@pytest.mark.parametrize(
    ("raw", "expected"),
    [
        ((3.0, 1.1), (3.0, 1.0)),
        ((1.1, 4.0), (1.0, 4.0)),
        ((3.0, 2.8), (2.9, 2.9)),
        ((-1.0, 3.1), (-1.05, 3.05)),
        ((-4.0, 0.8), (-4.0, 1.0)),
        ((-1.0, -1.2), (-1.1, -1.1)),
        ((1.0, 1.0), (1.0, 1.0)),
    ],
)
def test_hold_keeps_to_multiples_of_45_degrees(raw, expected):
    assert held(raw, (1.0, 1.0)) == pytest.approx(expected)


def test_a_held_line_ends_beside_the_vertex_that_it_passes():
    corner = targets(points=[(4.0, 3.0)])
    found = catch((4.02, 2.9), corner, 0.2, anchor=(0.0, 2.95))
    assert found.caught == "vertex"
    assert found.at == pytest.approx((4.0, 2.95))


def test_a_held_line_ends_where_it_crosses_an_edge():
    found = catch((3.98, 1.94), ROOM, 0.1, anchor=(2.0, 0.0))
    assert found.caught == "edge"
    assert found.at == pytest.approx((4.0, 2.0))


def test_a_held_line_meets_the_grid_along_its_own_direction():
    found = catch((1.28, 0.52), NO_TARGETS, 0.1, grid=0.1, anchor=(0.0, 0.53))
    assert (found.at, found.caught) == ((1.3, 0.53), "grid")
    diagonal = catch((1.28, 1.33), NO_TARGETS, 0.1, grid=0.1, anchor=(0.0, 0.0))
    assert diagonal.at == pytest.approx((1.3, 1.3))


def test_an_edge_of_no_length_is_no_trouble():
    point = targets(lines=[[(1.0, 1.0), (1.0, 1.0)]])
    assert catch((1.01, 1.0), point, 0.1).at == (1.0, 1.0)
    assert catch((1.01, 1.0), point, 0.1, anchor=(0.0, 1.0)).at == (1.0, 1.0)


def test_three_thousand_conductors_are_caught_in_a_blink():
    rng = np.random.default_rng(1)
    paths = rng.uniform(0, 50, (3000, 6, 2))
    many = targets(lines=paths.tolist(), minor=paths.tolist())
    started = time.perf_counter()
    for _ in range(10):
        catch((25.0, 25.0), many, 0.05, grid=0.1)
    assert (time.perf_counter() - started) / 10 < 0.02
