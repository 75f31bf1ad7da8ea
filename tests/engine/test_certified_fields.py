"""Expansions of the field in boxes, and what is proven of what they leave out."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.certified.boxes import Boxes
from engine.certified.expansions import Source
from engine.certified.segments import add_segment, derivative_bounds
from engine.conductor import Conductor
from engine.field import flux_density
from engine.runs import Bar, Round

MU0 = 4e-7 * np.pi


def expansion_of_segment(start, stop, at, frame=None):
    out = np.zeros((7, 3))
    rows = np.eye(3) if frame is None else frame
    add_segment(np.array(start), np.array(stop), np.array(at), rows, 1.0, out)
    return out


def conductor(path, shape, axes=None):
    """Straight ends square to the path; bends in the plane z are mitred."""
    path = np.array(path, float)
    if axes is None:
        steps = np.diff(path, axis=0)
        t = steps / np.linalg.norm(steps, axis=1)[:, None]
        up = np.array([0.0, 0.0, 1.0])
        sides = np.cross(t, up)
        mitres = [sides[0]]
        for a, b in pairwise(sides):
            mitres.append((a + b) / (1 + a @ b))
        mitres.append(sides[-1])
        axes = np.array([[m, up] for m in mitres])
    return Conductor("c", "c", "c", "run", path, np.array(axes), shape, (), "c")


def box_at(centre, halves, frame=None):
    rows = np.eye(3) if frame is None else frame
    return Boxes(
        np.array([centre], float), rows[None], np.array([halves], float),
        np.zeros(1, np.int64),
    )  # fmt: skip


def test_a_long_segment_has_the_field_and_slopes_of_a_long_wire():
    """B = µ₀ I / (2π d) across, falling as 1/d: Ampère's law."""
    b = expansion_of_segment((0, 0, -1e4), (0, 0, 1e4), (0.5, 0, 0))
    field = MU0 / (2 * np.pi * 0.5)
    assert b[0] == pytest.approx([0, field, 0], rel=1e-6, abs=1e-15)
    assert b[1] == pytest.approx([0, -field / 0.5, 0], rel=1e-6, abs=1e-12)
    assert b[2] == pytest.approx([-field / 0.5, 0, 0], rel=1e-6, abs=1e-12)
    assert b[4] == pytest.approx([0, 2 * field / 0.25, 0], rel=1e-6, abs=1e-9)
    assert b[5] == pytest.approx([2 * field / 0.25, 0, 0], rel=1e-6, abs=1e-9)
    assert b[6] == pytest.approx([0, -2 * field / 0.25, 0], rel=1e-6, abs=1e-9)


def test_second_derivatives_stay_below_three_quarters_of_mu0_over_cubed_distance():
    """The bound of a whole line is 0.75 µ₀ I / d³, about twice what is there."""
    _, second = derivative_bounds(
        np.array([0, 0, -1e4]), np.array([0, 0, 1e4]), np.array([0.5, 0, 0]), 0.0
    )
    assert second == pytest.approx(0.75 * MU0 / 0.5**3, rel=1e-3)


points = st.tuples(*[st.floats(-1, 1)] * 3)


@settings(max_examples=200, deadline=None)
@given(points, points, points, points, st.floats(0.0, 0.3))
def test_no_third_derivative_in_the_ball_exceeds_its_bound(p, q, x, way, reach):
    """Differences of curvatures between two places, over their distance."""
    p, q, x, way = (np.array(a) for a in (p, q, x, way))
    length, size = np.linalg.norm(q - p), np.linalg.norm(way)
    if length < 1e-3 or size < 1e-3:
        return
    third, second = derivative_bounds(p, q, x, reach)
    if not np.isfinite(third) or third > 1e3:
        return
    other = x + way / size * reach
    here, there = (expansion_of_segment(p, q, at) for at in (x, other))
    for rows, bound in (((4, 5, 6), third), ((1, 2, 3), second)):
        for k in rows:
            change = np.linalg.norm(there[k] - here[k])
            slack = 1e-9 * np.abs(here[k]).max() + 1e-13
            assert change <= bound * reach * (1 + 1e-9) + slack
    assert np.linalg.norm(here[4]) <= second * (1 + 1e-9) + 1e-13


BENT = [(0, 0, 0), (1.0, 0, 0), (1.0, 0.8, 0), (1.6, 1.4, 0)]


@pytest.mark.parametrize(
    "shape",
    [Bar(width=0.1, thickness=0.01), Round(diameter=0.06)],
    ids=["bar", "round"],
)
@pytest.mark.parametrize("path", [BENT[:2], BENT], ids=["straight", "bent"])
def test_the_field_in_a_box_lies_within_expansion_and_residue(shape, path):
    """Against the field that the program sums, itself right to a thousandth."""
    rng = np.random.default_rng(3)
    made = conductor(path, shape)
    current = np.array([[100.0 + 50.0j]])
    turned, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    for need in (1e-4, 1e-1, 1e3, 1e6):
        source = Source([made], current, np.array([need]))
        for centre in rng.uniform((-0.3, -0.3, 0.12), (1.8, 1.6, 0.5), (12, 3)):
            halves = np.array([0.02, 0.015, 0.001])
            box = box_at(centre, halves, turned)
            e = source.expansion(box)
            if not np.isfinite(e.residue[0, 0]):
                continue
            steps = rng.uniform(-1, 1, (50, 3)) * halves
            exact = flux_density([made], current, centre + steps @ turned)[0]
            v, s1, s2, s3, h11, h12, h22 = e.rows[0, 0][:, None, :]
            a, b, c = steps.T[:, :, None]
            guess = v + a * s1 + b * s2 + c * s3
            guess = guess + a * a / 2 * h11 + a * b * h12 + b * b / 2 * h22
            reach = np.linalg.norm(halves)
            allowed = reach**3 / 6 * e.third[0, 0] + e.residue[0, 0]
            allowed += halves[2] * (np.hypot(0.02, 0.015) + 5e-4) * e.second[0, 0]
            off = np.linalg.norm(exact - guess, axis=1)
            own_error = 1e-3 * np.linalg.norm(exact, axis=1).max()
            assert off.max() <= allowed + own_error


@pytest.mark.parametrize(
    "shape",
    [Bar(width=0.1, thickness=0.01), Round(diameter=0.1)],
    ids=["bar", "round"],
)
def test_coarse_filaments_differ_from_fine_ones_by_less_than_the_residue(shape):
    made, current = conductor(BENT, shape), np.array([[1.0 + 0j]])
    rng = np.random.default_rng(4)
    ratios = []
    for centre in rng.uniform((-0.3, -0.3, 0.15), (1.8, 1.6, 0.6), (30, 3)):
        box = box_at(centre, (1e-6, 1e-6, 0.0))
        coarse, fine = (
            Source([made], current, np.array([need])).expansion(box)
            for need in (1e-6, 1e12)
        )
        off = np.linalg.norm(coarse.rows[0, 0, 0] - fine.rows[0, 0, 0])
        residue = coarse.residue[0, 0] + fine.residue[0, 0]
        assert off <= residue
        ratios.append(residue / off)
    # Not so loose that it would hide a factor of a hundred everywhere.
    assert min(ratios) < 30


def test_the_residue_is_as_small_as_was_asked():
    made = conductor(BENT, Bar(width=0.1, thickness=0.01))
    box = box_at((0.5, 0.4, 0.3), (0.01, 0.01, 0.0))
    for need in (1e3, 1e6, 1e9):
        e = Source([made], np.array([[1.0 + 0j]]), np.array([need])).expansion(box)
        assert e.residue[0, 0] * need <= 1.0


def test_a_ball_that_touches_a_conductor_is_not_bounded():
    made = conductor(BENT[:2], Round(diameter=0.06))
    source = Source([made], np.array([[1.0 + 0j]]), np.array([1.0]))
    e = source.expansion(box_at((0.5, 0.0, 0.035), (0.01, 0.01, 0.0)))
    assert np.isinf(e.residue[0, 0])
    assert np.isinf(e.third[0, 0])
