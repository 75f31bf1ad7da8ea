"""The ramp of changes: two arms of one lightness, blue falling and orange rising."""

from __future__ import annotations

import numpy as np
import pytest

from engine.colour_ramp import (
    N_ARM,
    _linear_rgb,
    lab_two_sided,
    ratio_position,
    rgb_two_sided,
    signed_position,
    two_sided_colours,
)
from engine.iso_lines import signed_lines


def test_both_arms_are_equally_dark_at_the_same_distance_from_the_middle():
    lightness = lab_two_sided()[:, 0]
    assert lightness == pytest.approx(lightness[::-1], abs=0.01)
    assert lightness.argmax() == N_ARM - 1
    steps = np.diff(lightness[N_ARM - 1 :])
    assert steps == pytest.approx(steps.mean(), abs=0.01)


def test_every_colour_exists_on_a_screen():
    linear = _linear_rgb(lab_two_sided())
    assert linear.min() >= 0
    assert linear.max() <= 1


def test_the_middle_is_grey_and_the_arms_are_blue_and_orange():
    rgb = rgb_two_sided().astype(int)
    assert np.ptp(rgb[N_ARM - 1]) <= 1
    blue, orange = rgb[N_ARM // 2], rgb[-N_ARM // 2]
    assert blue[2] > blue[1] > blue[0]
    assert orange[0] > orange[1] > orange[2]


def test_arms_are_told_apart_without_red_and_green():
    """The b* axis, yellow to blue, is what dichromats without red or green keep."""
    b = lab_two_sided()[:, 2]
    far = np.abs(np.arange(len(b)) - (N_ARM - 1)) > 12
    assert (b[far][: far.sum() // 2] < -3).all()
    assert (b[far][far.sum() // 2 :] > 5).all()


def test_changes_lie_on_two_scales_of_the_map():
    placed = signed_position([-1e-3, -1e-5, -1e-8, 0.0, 1e-5, 5.0, np.nan], 1e-7, 1e-3)
    assert placed[:6] == pytest.approx([-1.0, -0.5, 0.0, 0.0, 0.5, 1.0])
    assert np.isnan(placed[6])


def test_ratios_and_their_inverses_lie_opposite():
    placed = ratio_position([0.0, 0.1, 0.5, 1.0, 2.0, 10.0, 99.0], 10.0)
    assert placed == pytest.approx([-1, -1, -0.30103, 0, 0.30103, 1, 1], abs=1e-5)
    with pytest.raises(ValueError, match="no range"):
        ratio_position(1.0, 1.0)


def test_what_has_no_place_is_clear():
    rgba = two_sided_colours([-1.0, 0.0, 1.0, np.nan])
    rgb = rgb_two_sided()
    assert rgba[0].tolist() == [*rgb[0], 255]
    assert rgba[1].tolist() == [*rgb[N_ARM - 1], 255]
    assert rgba[2].tolist() == [*rgb[-1], 255]
    assert rgba[3].tolist() == [0, 0, 0, 0]


def test_signed_lines_lie_where_the_change_is():
    xs, ys = np.linspace(-2.0, 2.0, 41), np.linspace(0.0, 1.0, 5)
    values = np.sinh(np.broadcast_to(xs, (5, 41)))
    lines = signed_lines(xs, ys, values, None, (-1.0, 0.0, 2.0), 1.0)
    found = {line.value: float(line.points[:, 0].mean()) for line in lines}
    assert found == pytest.approx(
        {-1.0: -np.arcsinh(1.0), 0.0: 0.0, 2.0: np.arcsinh(2)}
    )
