"""Iso-lines lie where the value is, and nowhere under a mask."""

from __future__ import annotations

import numpy as np
import pytest

from engine.iso_lines import IsoLine, iso_lines, round_values

XS = np.linspace(-3.0, 3.0, 61)
YS = np.linspace(0.5, 4.0, 36)


def test_round_values_include_both_ends():
    assert round_values(1e-7, 1e-6) == (1e-7, 2e-7, 5e-7, 1e-6)
    assert round_values(0.3, 0.4) == ()
    assert round_values(3, 1) == ()


def test_lines_of_a_power_law_are_circles():
    grid = 2.0 / (XS[None, :] ** 2 + YS[:, None] ** 2)
    lines = iso_lines(XS, YS, grid, None, (0.5,))
    assert len(lines) == 1
    radii = np.hypot(*lines[0].points.T)
    assert radii == pytest.approx(2.0, rel=2e-3)


def test_no_line_enters_a_mask():
    grid = 2.0 / (XS[None, :] ** 2 + YS[:, None] ** 2)
    mask = np.broadcast_to(XS[None, :] > 0, grid.shape)
    lines = iso_lines(XS, YS, grid, mask, (0.5,))
    assert max(line.points[:, 0].max() for line in lines) <= 0


def test_values_that_are_not_there_draw_nothing():
    nothing = np.full((36, 61), np.nan)
    assert iso_lines(XS, YS, nothing, None, (1.0,)) == ()
    assert iso_lines(XS, YS, np.zeros((36, 61)), None, (1.0,)) == ()


def test_a_label_sits_on_its_line_and_reads_from_below():
    line = IsoLine(1.0, np.array([[2.0, 1.0], [1.0, 1.0], [0.0, 1.0]]))
    x, y, turn = line.label_place()
    assert (x, y, turn) == pytest.approx((1.0, 1.0, 0.0))
    assert line.length == pytest.approx(2.0)
