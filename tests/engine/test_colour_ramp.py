"""The ramp is even, in order, inside the gamut, and honest at its ends."""

from __future__ import annotations

import numpy as np
import pytest

from engine.colour_ramp import _linear_rgb, colours, lab_ramp, position, rgb_ramp

# Full dichromacy in linear RGB: Machado, Oliveira, Fernandes, "A physiologically-based
# model for simulation of color vision deficiency", 2009, severity 1.0 (from memory).
DEUTAN = [
    [0.367322, 0.860646, -0.227968],
    [0.280085, 0.672501, 0.047413],
    [-0.011820, 0.042940, 0.968881],
]
PROTAN = [
    [0.152286, 1.052583, -0.204868],
    [0.114503, 0.786281, 0.099216],
    [-0.003882, -0.048116, 1.051998],
]
TRITAN = [
    [1.255528, -0.076749, -0.178779],
    [-0.078411, 0.930809, 0.147602],
    [0.004733, 0.691367, 0.303900],
]


def test_steps_are_equal_to_the_eye():
    steps = np.linalg.norm(np.diff(lab_ramp(), axis=0), axis=1)
    assert steps.std() / steps.mean() < 0.01


def test_lightness_falls_all_the_way():
    lightness = lab_ramp()[:, 0]
    assert (np.diff(lightness) < 0).all()
    # Both ends must be told from a light and a dark paper, which bounds the span.
    assert lightness[0] - lightness[-1] >= 59.9


def test_every_colour_exists_on_a_screen():
    linear = _linear_rgb(lab_ramp())
    assert linear.min() >= 0
    assert linear.max() <= 1


def test_white_and_middle_grey_of_the_standard():
    # White point and grey of CIELAB, IEC 61966-2-1: L* = 100 is white.
    assert _linear_rgb(np.array([[100.0, 0.0, 0.0]])) == pytest.approx(1.0, abs=2e-4)
    # L* = 53.585 is sRGB (128, 128, 128), linear 0.21586 (from memory).
    grey = _linear_rgb(np.array([[53.585, 0.0, 0.0]]))
    assert grey == pytest.approx(0.21586, abs=3e-4)


@pytest.mark.parametrize("matrix", [DEUTAN, PROTAN, TRITAN])
def test_order_survives_colour_blindness(matrix):
    seen = np.clip(_linear_rgb(lab_ramp()), 0, 1) @ np.array(matrix).T
    luminance = np.clip(seen, 0, 1) @ [0.2126, 0.7152, 0.0722]
    assert (np.diff(luminance[::4]) < 0).all()


def test_ends_of_the_range():
    low, high = 1e-7, 1e-3
    rgba = colours([0.99e-7, 1e-7, 1e-5, 1e-3, 5.0, np.nan], low, high)
    assert rgba[0].tolist() == [0, 0, 0, 0]
    assert rgba[1].tolist() == [*rgb_ramp()[0], 255]
    assert rgba[3].tolist() == rgba[4].tolist() == [*rgb_ramp()[-1], 255]
    assert rgba[5].tolist() == [0, 0, 0, 0]


def test_middle_of_a_logarithmic_and_a_linear_range():
    assert position(1e-5, 1e-7, 1e-3) == pytest.approx(0.5)
    assert position(5.0, 0.0, 10.0, "linear") == pytest.approx(0.5)


def test_empty_range_is_refused():
    with pytest.raises(ValueError, match="no logarithmic range"):
        position(1.0, 0.0, 1.0)
    with pytest.raises(ValueError, match="no linear range"):
        position(1.0, 1.0, 1.0, "linear")
