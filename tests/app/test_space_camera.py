"""The eye in space: pixels and rays agree, turns keep what they should."""

from __future__ import annotations

import math

import numpy as np
import pytest

from app.views.space_camera import SIGHTS, SpaceCamera, along_axis

EYES = [
    SpaceCamera((1.0, 2.0, 3.0), 12.0, -40.0, 25.0, parallel, 900.0, 500.0)
    for parallel in (False, True)
]


def _distance_to_ray(camera: SpaceCamera, point: np.ndarray) -> float:
    (pixel,), _ = camera.pixels(point)
    origin, sight = camera.ray(*pixel)
    away = point - origin
    return float(np.linalg.norm(away - (away @ sight) * sight))


@pytest.mark.parametrize("camera", EYES)
def test_ray_through_a_pixel_meets_what_is_seen_there(camera: SpaceCamera) -> None:
    points = np.random.default_rng(5).uniform(-3, 5, (40, 3))
    for point in points:
        assert _distance_to_ray(camera, point) < 1e-9 * 2000


def test_looking_from_above_has_x_to_the_right_and_y_upwards() -> None:
    camera = SpaceCamera(width=400, height=400).looking("From above")
    (middle, right, up), _ = camera.pixels([(0, 0, 0), (1, 0, 0), (0, 1, 0)])
    assert middle == pytest.approx((200, 200))
    assert right[0] > 200
    assert right[1] == pytest.approx(200)
    assert up[1] < 200
    assert up[0] == pytest.approx(200)


@pytest.mark.parametrize(
    ("sight", "to_the_right"),
    [
        ("Looking +y", (1, 0, 0)),
        ("Looking −y", (-1, 0, 0)),
        ("Looking +x", (0, -1, 0)),
        ("Looking −x", (0, 1, 0)),
    ],
)
def test_looking_along_an_axis_has_z_upwards(
    sight: str, to_the_right: tuple[float, ...]
) -> None:
    right, up, back = SpaceCamera().looking(sight).axes
    assert right == pytest.approx(to_the_right, abs=1e-12)
    assert up == pytest.approx((0, 0, 1), abs=1e-12)
    axis = {"x": 0, "y": 1}[sight[-1]]
    assert back[axis] == pytest.approx(-1 if "+" in sight else 1)


def test_axes_are_right_handed_in_every_sight() -> None:
    for sight in SIGHTS:
        assert np.linalg.det(SpaceCamera().looking(sight).axes) == pytest.approx(1)


@pytest.mark.parametrize("camera", EYES)
def test_matrices_place_points_where_pixels_say(camera: SpaceCamera) -> None:
    points = np.random.default_rng(7).uniform(-2, 4, (30, 3))
    matrix = camera.projection_matrix(20.0) @ camera.view_matrix()
    clip = np.column_stack([points, np.ones(30)]) @ matrix.T
    cube = clip[:, :3] / clip[:, 3:]
    flat, ahead = camera.pixels(points)
    assert 0.5 * camera.width * (1 + cube[:, 0]) == pytest.approx(flat[:, 0])
    assert 0.5 * camera.height * (1 - cube[:, 1]) == pytest.approx(flat[:, 1])
    assert np.all(np.abs(cube[:, 2]) < 1)
    order = np.argsort(ahead)
    assert np.all(np.diff(cube[order, 2]) > 0)


@pytest.mark.parametrize("camera", EYES)
def test_zooming_keeps_what_is_under_the_pointer(camera: SpaceCamera) -> None:
    right, up, _ = camera.axes
    point = np.asarray(camera.target) + 1.3 * right - 0.7 * up
    (pixel,), _ = camera.pixels(point)
    (after,), _ = camera.nearer(1.7, *pixel).pixels(point)
    assert after == pytest.approx(pixel)


@pytest.mark.parametrize("camera", EYES)
def test_shifting_takes_the_target_along_with_the_pointer(camera: SpaceCamera) -> None:
    (pixel,), _ = camera.shifted(31.0, -12.0).pixels(np.asarray(camera.target))
    assert pixel == pytest.approx((450 + 31, 250 - 12))


def test_turning_stops_at_the_poles_and_keeps_the_target() -> None:
    camera = EYES[0].turned(100.0, 10_000.0)
    assert camera.elevation == 90.0
    assert camera.target == EYES[0].target


@pytest.mark.parametrize("sight", SIGHTS)
@pytest.mark.parametrize("size", [(900, 500), (400, 800)])
def test_fitting_shows_all_of_a_box_and_not_much_else(
    sight: str, size: tuple[int, int]
) -> None:
    corners = [(x, y, z) for x in (-4, 9) for y in (0, 7) for z in (-1, 6)]
    camera = SpaceCamera().sized(*size).looking(sight).fitted(corners)
    flat, _ = camera.pixels(corners)
    share = np.abs(flat - np.array(size) / 2) / (np.array(size) / 2)
    assert 0.75 < share.max() < 1.0


@pytest.mark.parametrize("camera", EYES)
@pytest.mark.parametrize("axis", [(1, 0, 0), (0, 1, 0), (0, 0, 1)])
def test_moving_along_an_axis_follows_the_pointer(
    camera: SpaceCamera, axis: tuple[float, float, float]
) -> None:
    start = (0.5, 1.0, 2.5)
    (pixel,), _ = camera.pixels(np.array(start) + 1.25 * np.array(axis))
    found = along_axis(camera, start, axis, *pixel)
    assert found == pytest.approx(1.25, abs=1e-6)


def test_an_axis_seen_end_on_gives_no_way() -> None:
    camera = SpaceCamera().looking("From above")
    assert along_axis(camera, (0, 0, 0), (0, 0, 1), 10.0, 20.0) is None
    assert math.isclose(
        along_axis(camera, (0, 0, 0), (1, 0, 0), 400.0, 20.0) or 0.0, 0.0, abs_tol=1e-9
    )
