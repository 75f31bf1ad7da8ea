"""Backing drawings: where pixels lie, and what a new calibration leaves in place."""

from __future__ import annotations

import base64
import io
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace
from PIL import Image

from engine.calibration import (
    calibrated,
    is_calibrated,
    located,
    metres_per_pixel,
    pixel_at,
    place_of,
    turned,
)
from engine.errors import UserError
from engine.motions import carried, shift_by, turn_about
from engine.places import BackingDrawing
from engine.vertices import extent

PLAN = BackingDrawing(
    id="plan",
    first=(100.0, 200.0),
    second=(500.0, 200.0),
    distance=8.0,
    origin=(2.0, 1.0),
)

places = st.tuples(st.floats(-50, 50), st.floats(-50, 50))
pixels = st.tuples(st.floats(0, 4000), st.floats(0, 4000))


def test_pixels_run_down_and_metres_up() -> None:
    # 400 px are 8 m: 50 px are 1 m.
    assert metres_per_pixel(PLAN) == pytest.approx(0.02)
    assert place_of(PLAN, (100.0, 200.0)) == pytest.approx((2.0, 1.0))
    assert place_of(PLAN, (150.0, 200.0)) == pytest.approx((3.0, 1.0))
    assert place_of(PLAN, (100.0, 150.0)) == pytest.approx((2.0, 2.0))


def test_turn_is_counter_clockwise_about_the_origin() -> None:
    upright = replace(PLAN, turn=90.0)
    assert place_of(upright, (100.0, 200.0)) == pytest.approx((2.0, 1.0))
    # What was to the right is above; what was above is to the left.
    assert place_of(upright, (150.0, 200.0)) == pytest.approx((2.0, 2.0))
    assert place_of(upright, (100.0, 150.0)) == pytest.approx((1.0, 1.0))


@given(pixels, places, st.floats(-360, 360))
def test_pixel_and_place_are_inverse(
    pixel: tuple[float, float], origin: tuple[float, float], turn: float
) -> None:
    drawing = replace(PLAN, origin=origin, turn=turn)
    assert pixel_at(drawing, place_of(drawing, pixel)) == pytest.approx(pixel, abs=1e-6)


@given(pixels, pixels, st.floats(0.1, 500), st.floats(-360, 360))
def test_calibration_points_lie_their_distance_apart(
    first: tuple[float, float],
    second: tuple[float, float],
    distance: float,
    turn: float,
) -> None:
    if math.dist(first, second) < 3:
        return
    drawing = calibrated(replace(PLAN, turn=turn), first, second, distance)
    apart = math.dist(place_of(drawing, first), place_of(drawing, second))
    # Distances are kept to 0.1 mm.
    assert apart == pytest.approx(round(distance, 4), rel=1e-9, abs=1e-9)


def test_first_calibration_leaves_its_first_point_where_it_is() -> None:
    fresh = BackingDrawing(id="plan", origin=(0.0, 6.0))
    assert not is_calibrated(fresh)
    before = place_of(fresh, (300.0, 200.0))
    drawing = calibrated(fresh, (300.0, 200.0), (300.0, 500.0), 4.5)
    assert is_calibrated(drawing)
    assert place_of(drawing, (300.0, 200.0)) == pytest.approx(before)
    assert drawing.origin == pytest.approx(before)


def test_new_calibration_keeps_origin_and_turn() -> None:
    slanted = replace(PLAN, turn=30.0)
    drawing = calibrated(slanted, (700.0, 900.0), (100.0, 900.0), 11.0)
    assert drawing.turn == 30.0
    # The new first point is kept to 0.1 mm.
    assert place_of(drawing, slanted.first) == pytest.approx(slanted.origin, abs=1e-4)
    apart = math.dist(
        place_of(drawing, (700.0, 900.0)), place_of(drawing, (100.0, 900.0))
    )
    assert apart == pytest.approx(11.0)


def test_a_located_point_lies_there_and_stays_when_scaled_anew() -> None:
    column = (640.0, 480.0)
    drawing = located(replace(PLAN, turn=10.0), column, (12.5, -3.0))
    assert place_of(drawing, column) == pytest.approx((12.5, -3.0))
    assert metres_per_pixel(drawing) == pytest.approx(metres_per_pixel(PLAN))
    assert drawing.turn == 10.0
    again = calibrated(drawing, (0.0, 0.0), (1000.0, 0.0), 31.0)
    # The new first point is kept to 0.1 mm.
    assert place_of(again, column) == pytest.approx((12.5, -3.0), abs=1e-4)


def test_locating_does_not_count_as_calibrating() -> None:
    fresh = BackingDrawing(id="plan")
    drawing = located(fresh, (40.0, 40.0), (3.0, 4.0))
    assert place_of(drawing, (40.0, 40.0)) == pytest.approx((3.0, 4.0))
    assert not is_calibrated(drawing)


def test_turning_leaves_the_origin() -> None:
    drawing = turned(PLAN, -45.0)
    assert drawing.turn == 315.0
    assert place_of(drawing, PLAN.first) == pytest.approx(PLAN.origin)


@pytest.mark.parametrize("distance", [0.0, -1.0, math.nan, math.inf, 1e9])
def test_a_distance_that_cannot_be_is_refused(distance: float) -> None:
    with pytest.raises(UserError):
        calibrated(PLAN, (0.0, 0.0), (100.0, 0.0), distance)


def test_one_point_twice_is_refused() -> None:
    with pytest.raises(UserError, match="are the same"):
        calibrated(PLAN, (10.0, 10.0), (10.5, 10.0), 4.0)
    broken = replace(PLAN, second=PLAN.first)
    with pytest.raises(UserError, match="no scale"):
        place_of(broken, (0.0, 0.0))


def test_a_drawing_reaches_to_the_corners_of_its_picture() -> None:
    kept = io.BytesIO()
    Image.new("L", (400, 200), 255).save(kept, "PNG")
    picture = base64.b64encode(kept.getvalue()).decode("ascii")
    drawing = replace(PLAN, picture=picture, first=(0.0, 0.0), second=(400.0, 0.0))
    # 400 px are 8 m; the upper left corner lies at (2, 1).
    assert extent(drawing) == pytest.approx(
        np.array([(2, 1, 0), (10, 1, 0), (10, -3, 0), (2, -3, 0)])
    )
    behind = replace(drawing, view="looking +x")
    assert extent(behind)[2] == pytest.approx((0.0, -10.0, -3.0))


def test_a_drawing_under_an_elevation_follows_shifts_only() -> None:
    drawing = replace(PLAN, view="looking +x")
    # Looking along +x, +y is to the left.
    assert carried(drawing, shift_by(5.0, 2.0, 0.5), {}).origin == (0.0, 1.5)
    assert carried(drawing, turn_about((3.0, 3.0), 90.0), {}) == drawing
    ahead = replace(PLAN, view="looking +y")
    assert carried(ahead, shift_by(5.0, 2.0, 0.5), {}).origin == (7.0, 1.5)


def test_what_is_kept_has_no_more_decimals_than_a_tenth_of_a_millimetre() -> None:
    feet = 27.0 * 0.3048 + 6.0 * 0.0254
    drawing = calibrated(replace(PLAN, turn=7.0), (33.33, 41.07), (904.11, 38.5), feet)
    drawing = calibrated(drawing, (1.01, 2.02), (777.77, 333.33), 1.0 / 3.0)
    drawing = located(drawing, (10.1, 20.2), (1.0 / 3.0, -2.0 / 3.0))
    for value in (*drawing.origin, drawing.distance):
        assert value == round(value, 4)
    assert drawing.distance == 0.3333
    assert drawing.origin == (0.3333, -0.6667)
    assert drawing.second == (round(drawing.second[0], 4), round(drawing.second[1], 4))


def test_a_distance_too_short_to_be_kept_stays_a_distance() -> None:
    assert calibrated(PLAN, (0.0, 0.0), (900.0, 0.0), 1e-6).distance == 1e-4
