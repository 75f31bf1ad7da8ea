"""Points on lines, planes, zones and the skin of volumes."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from shapely.geometry import Polygon

from engine.errors import UserError
from engine.sampling import (
    Plane,
    area_of,
    grid_in_outline,
    held_inside,
    horizontal,
    on_line,
    on_plane,
    vertical,
)
from engine.surface_cells import Fineness, cells_in_outline, cells_on_plane, walls

L_SHAPE = Polygon([(0, 0), (3, 0), (3, 1), (1, 1), (1, 2), (0, 2)])


def test_a_line_has_its_vertices_once_and_no_gap_above_the_step():
    line = on_line([(0, 0, 0), (1, 0, 0), (1, 0, 0.25)], 0.3)
    assert len(line.points) == 1 + 4 + 1
    assert line.points[4] == pytest.approx((1, 0, 0))
    assert line.along[-1] == pytest.approx(1.25)
    gaps = np.linalg.norm(np.diff(line.points, axis=0), axis=1)
    assert gaps.max() <= 0.3
    assert np.diff(line.along) == pytest.approx(gaps)


def test_a_level_plane_runs_rows_along_y():
    sample = on_plane(horizontal((0, 2), (0, 1), 1.5), 0.5)
    assert sample.shape == (3, 5)
    grid = sample.points.reshape(3, 5, 3)
    assert grid[0, -1] == pytest.approx((2, 0, 1.5))
    assert grid[-1, 0] == pytest.approx((0, 1, 1.5))


def test_a_whole_number_of_steps_is_kept_in_spite_of_rounding():
    assert on_plane(horizontal((0, 0.3), (0, 0.7), 0), 0.1).shape == (8, 4)


def test_an_upright_plane_runs_rows_upwards():
    grid = on_plane(vertical((0, 0), (3, 4), (1, 2)), 1.0)
    assert grid.shape == (2, 6)
    assert grid.points[5] == pytest.approx((3, 4, 1))
    assert grid.points[-1] == pytest.approx((3, 4, 2))
    assert grid.first[-1] == pytest.approx(5)


@pytest.mark.parametrize("second", [(1, 1, 0), (0, 0, 0), (0, float("nan"), 0)])
def test_edges_that_span_no_rectangle_are_refused(second):
    with pytest.raises(ValueError, match="plane"):
        Plane((0, 0, 0), (1, 0, 0), second)


@pytest.mark.parametrize(
    "ask",
    [
        lambda: on_plane(horizontal((0, 1e4), (0, 1e4), 0), 0.1),
        lambda: on_line([(0, 0, 0), (1e5, 0, 0)], 1e-3),
        lambda: grid_in_outline(Polygon([(0, 0), (1e5, 0), (0, 1e5)]), 0.1),
        lambda: cells_in_outline(L_SHAPE, 0, Fineness(1e-4, 1e-4)),
    ],
)
def test_too_many_points_are_refused_with_a_sentence(ask):
    with pytest.raises(UserError, match=r"points; the most is 5,000,000\. Choose"):
        ask()


def test_a_grid_in_an_outline_includes_its_boundary():
    points = grid_in_outline(Polygon([(0, 0), (1, 0), (0, 1)]), 0.25)
    # Of a 5 by 5 grid, those with x + y <= 1.
    assert len(points) == 15


def test_pieces_of_an_outline_add_up_to_its_area_and_lie_in_it():
    cells = cells_in_outline(L_SHAPE, 1.0, Fineness(0.17, 0.02))
    assert cells.areas.sum() == pytest.approx(L_SHAPE.area, rel=1e-9)
    assert np.all(
        shapely.intersects_xy(L_SHAPE, cells.points[:, 0], cells.points[:, 1])
    )
    assert np.all(cells.points[:, 2] == 1.0)


def test_the_outline_itself_is_sampled_corners_included():
    cells = cells_in_outline(L_SHAPE, 0.0, Fineness(0.5, 0.02))
    for corner in shapely.get_coordinates(L_SHAPE):
        assert np.min(np.linalg.norm(cells.points[:, :2] - corner, axis=1)) < 1e-12


def test_pieces_are_no_longer_than_half_the_distance_to_a_conductor():
    def from_a_wire(points):
        return np.hypot(points[:, 1] - 0.7, points[:, 2])

    cells = cells_in_outline(L_SHAPE, 0.0, Fineness(0.5, 0.01, from_a_wire))
    inner = cells.areas > 0
    distances = from_a_wire(cells.points[inner])
    assert np.all(cells.steps[inner] <= np.maximum(distances / 2, 0.02))
    assert cells.areas.sum() == pytest.approx(L_SHAPE.area, rel=1e-9)


def test_nothing_is_cut_finely_inside_a_mask():
    def from_a_wire(points):
        return np.hypot(points[:, 1] - 0.5, points[:, 2])

    fine = Fineness(0.5, 0.01, from_a_wire)
    masked = Fineness(0.5, 0.01, from_a_wire, masked_within=0.4)
    plane = horizontal((0, 1), (0, 1), 0)
    assert len(cells_on_plane(plane, masked).points) < 0.2 * len(
        cells_on_plane(plane, fine).points
    )


def test_walls_close_around_the_outline():
    cells = walls(L_SHAPE, (0.5, 1.5), Fineness(0.2, 0.02))
    assert cells.areas.sum() == pytest.approx(L_SHAPE.length * 1.0)
    edge = shapely.boundary(L_SHAPE)
    off = shapely.distance(edge, shapely.points(cells.points[:, :2]))
    assert off.max() < 1e-12


def test_points_outside_are_held_at_the_nearest_place_of_the_outline():
    points = np.array([[2.0, 5.0, 1.0], [0.5, 0.5, 1.0]])
    held = held_inside(L_SHAPE, points)
    assert held[0] == pytest.approx((1, 2, 1)) or held[0] == pytest.approx((2, 1, 1))
    assert held[1] == pytest.approx(points[1])


def test_an_outline_that_crosses_itself_gives_its_largest_piece():
    # Cross-overs are remarks elsewhere; here the larger triangle is what remains.
    assert area_of([(0, 0), (4, 0), (1, 1), (1, -1)]).area > 0
    assert area_of([(0, 0), (1, 0), (2, 0)]).is_empty
