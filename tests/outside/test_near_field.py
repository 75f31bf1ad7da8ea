"""Near bars and cables: the closed forms against scipy, the engine against both.

The flat strip is OpenStax, University Physics volume 2, Ampère's law; a thread of
current μ₀ I/2πr is Ampère's law itself (textbook); scipy integrates it over sections.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import dblquad

from engine.field import flux_density
from engine.runs import Bar
from engine.validation.near_field import (
    DISTANCES,
    FORMATIONS,
    PROMISED,
    PROMISED_FROM,
    circle_field,
    largest_errors,
    long_section,
    near_field_rows,
    rectangle_field,
)
from engine.validation.shapes import long_wires

MU0 = 4e-7 * math.pi
WIDTH, THICKNESS = 0.1, 0.01


def integrated(point, turn):
    """B of 1 A spread over the section, thread by thread. [T]"""

    def part(b, a, axis):
        x = a * math.cos(turn) - b * math.sin(turn)
        y = a * math.sin(turn) + b * math.cos(turn)
        rx, ry = point[0] - x, point[1] - y
        return (-ry, rx)[axis] / (rx * rx + ry * ry)

    w, t = WIDTH / 2, THICKNESS / 2
    sums = [
        dblquad(part, -w, w, -t, t, args=(axis,), epsabs=1e-12, epsrel=1e-10)[0]
        for axis in (0, 1)
    ]
    return MU0 / (2 * math.pi * WIDTH * THICKNESS) * np.array(sums)


@pytest.mark.parametrize("turn", [0.0, math.pi / 2, 0.4])
@pytest.mark.parametrize("point", [(0.08, 0.06), (-0.02, -0.065), (0.3, -0.1)])
def test_the_closed_form_of_a_bar_equals_quadrature_over_its_section(point, turn):
    exact = rectangle_field(1.0, WIDTH, THICKNESS, turn, np.array([point]))[0].real
    # 1e-8: the quadrature's own error.
    np.testing.assert_allclose(exact, integrated(point, turn), rtol=1e-8)


@pytest.mark.parametrize("x", [0.001, 0.01, 0.1, 3.0])
def test_a_thin_bar_is_the_flat_strip(x):
    strip = MU0 / (2 * math.pi * 0.1) * math.log((x + 0.1) / x)
    point = np.array([[0.05 + x, 0.0]])
    thin = rectangle_field(1.0, 0.1, 1e-5, 0.0, point)[0].real
    # A thickness of 1e-5 m raises the field by less than (thickness/x)²; 1e-4 at 1 mm.
    np.testing.assert_allclose(thin, [0.0, strip], rtol=2e-5, atol=1e-9 * strip)
    wire = long_wires([(0.0, 0.0)], Bar(width=0.1, thickness=1e-5))
    found = flux_density(wire, np.ones((1, 1), complex), np.array([[0.05 + x, 0, 0]]))
    assert found[0, 0, 1].real == pytest.approx(strip, rel=PROMISED)


def test_inside_a_bar_the_circulation_is_the_current_within():
    # Ampère's law around a quarter of the section about its middle.
    half_w, half_t, n = WIDTH / 4, THICKNESS / 4, 2000
    s = (np.arange(n) + 0.5) / n * 2 - 1
    around = 0.0
    for sign in (1, -1):
        level = np.column_stack([s * half_w, np.full(n, -sign * half_t)])
        upright = np.column_stack([np.full(n, sign * half_w), s * half_t])
        bx = rectangle_field(1.0, WIDTH, THICKNESS, 0.0, level)[:, 0].real
        by = rectangle_field(1.0, WIDTH, THICKNESS, 0.0, upright)[:, 1].real
        around += sign * (bx.mean() * 2 * half_w + by.mean() * 2 * half_t)
    assert around == pytest.approx(MU0 / 4, rel=1e-6)


def test_beyond_a_bar_its_field_falls_to_that_of_a_thread():
    far = np.array([[3.0, 4.0]])
    bar = rectangle_field(1.0, WIDTH, THICKNESS, 0.3, far)
    # Quadrupole of the section: (width/distance)²/12.
    np.testing.assert_allclose(bar, circle_field(1.0, 0.01, far), rtol=1e-4)


def test_a_point_inside_a_round_conductor_is_refused():
    with pytest.raises(ValueError, match="inside"):
        circle_field(1.0, 0.01, np.array([[0.0, 0.009]]))


@pytest.mark.parametrize("name", FORMATIONS)
def test_every_formation_keeps_its_promise_between_the_printed_distances(name):
    long = long_section(FORMATIONS[name])
    for distance in np.geomspace(PROMISED_FROM, 3.0, 24):
        points = long.around(distance)
        exact = long.exact(points)
        missed = np.linalg.norm(long.computed(points) - exact, axis=1)
        worst = (missed / np.linalg.norm(exact, axis=1)).max()
        assert worst < PROMISED, distance


@pytest.mark.parametrize("name", FORMATIONS)
def test_points_lie_off_faces_and_corners_at_every_distance(name):
    long = long_section(FORMATIONS[name])
    assert all(len(long.around(distance)) >= 8 for distance in DISTANCES)


def test_the_table_says_that_the_surface_of_bars_is_not_exact():
    # Filaments are as many as 1 mm needs: nearer the error must show, not vanish.
    heads, *rows = near_field_rows()
    assert heads[1] == "surface"
    by_name = {row[0]: row for row in rows}
    assert set(by_name) == set(FORMATIONS)
    assert float(by_name["sandwich"][1]) > 1.0
    assert largest_errors("sandwich")[0] == pytest.approx(
        float(by_name["sandwich"][1]) / 100, abs=1e-6
    )
