"""Circular loops against complete elliptic integrals, and how fast polygons converge.

Off the axis of a loop of radius a, with r the distance from the axis, z the height
and m = 4ar/((a+r)²+z²) (Smythe, Static and Dynamic Electricity, sec. 7.10; from
memory):

    B_z = µ₀I/2π · 1/√((a+r)²+z²) · [K(m) + (a²−r²−z²)/((a−r)²+z²) E(m)]
    B_r = µ₀I/2π · z/(r√((a+r)²+z²)) · [−K(m) + (a²+r²+z²)/((a−r)²+z²) E(m)]
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.special import ellipe, ellipk

from engine.field import vector_potential
from engine.validation.shapes import circle, phasors

MU0 = 4e-7 * math.pi


def loop_field(a: float, r: float, z: float) -> tuple[float, float]:
    """Radial and axial field of a loop with 1 A. [T]"""
    outer = (a + r) ** 2 + z**2
    inner = (a - r) ** 2 + z**2
    m = 4 * a * r / outer
    scale = MU0 / (2 * math.pi * math.sqrt(outer))
    axial = scale * (ellipk(m) + (a**2 - r**2 - z**2) / inner * ellipe(m))
    radial = scale * z / r * (-ellipk(m) + (a**2 + r**2 + z**2) / inner * ellipe(m))
    return float(radial), float(axial)


@pytest.mark.parametrize(
    ("radius", "r", "z"),
    [(0.5, 0.2, 0.1), (0.5, 0.4, -0.3), (1.0, 1.5, 0.0), (2.0, 0.7, 3.0), (1.0, 4, 2)],
)
def test_loop_off_axis_equals_elliptic_integrals(
    radius: float, r: float, z: float
) -> None:
    angle = math.radians(33)
    point = (r * math.cos(angle), r * math.sin(angle), z)
    field = phasors((circle(radius, sides=2880),), [1.0], point)[0].real
    radial = field[0] * math.cos(angle) + field[1] * math.sin(angle)
    around = -field[0] * math.sin(angle) + field[1] * math.cos(angle)
    expected = loop_field(radius, r, z)
    size = math.hypot(*expected)
    # 1e-5: the polygon's area is lower by (2π²/3)/sides² = 8·10⁻⁷, its sides lie
    # closer to points beside it.
    assert (radial, field[2]) == pytest.approx(expected, abs=1e-5 * size)
    assert abs(around) < 1e-5 * size


def test_mutual_inductance_of_coaxial_loops_is_maxwells() -> None:
    # M = µ₀ √(ab) [(2/k − k) K − (2/k) E], k² = 4ab/((a+b)²+d²); Maxwell, as quoted
    # by every textbook of the field.
    a, b, d = 0.5, 0.3, 0.4
    m = 4 * a * b / ((a + b) ** 2 + d**2)
    k = math.sqrt(m)
    maxwell = MU0 * math.sqrt(a * b) * ((2 / k - k) * ellipk(m) - 2 / k * ellipe(m))
    angles = 2 * math.pi * (np.arange(64) + 0.5) / 64
    points = np.column_stack((b * np.cos(angles), b * np.sin(angles), 0 * angles + d))
    potential = vector_potential(
        (circle(a, sides=2880),), np.ones((1, 1), dtype=complex), points
    )[0].real
    along = -potential[:, 0] * np.sin(angles) + potential[:, 1] * np.cos(angles)
    # 1e-5: the polygon, as above.
    assert 2 * math.pi * b * along.mean() == pytest.approx(maxwell, rel=1e-5)


def test_helmholtz_pair_of_polygons_converges_with_second_order() -> None:
    # Centre of a pair, textbook result: 0.8^1.5 µ₀ I / R.
    radius, exact = 0.7, 0.8**1.5 * MU0 / 0.7
    sides = np.array([16, 32, 64, 128, 256])
    errors = []
    for count in sides:
        pair = (
            circle(radius, -radius / 2, int(count), "lower"),
            circle(radius, radius / 2, int(count), "upper"),
        )
        field = phasors(pair, [1.0, 1.0], (0, 0, 0))[0, 2].real
        errors.append(abs(field - exact) / exact)
    order = -np.polyfit(np.log(sides), np.log(errors), 1)[0]
    assert order == pytest.approx(2.0, abs=0.05)  # the coarsest is not yet asymptotic
    assert errors[-1] < 1e-3


def test_far_loop_is_a_dipole() -> None:
    # On the axis B = µ₀ m / 2π z³, in the plane −µ₀ m / 4π r³, m = I π a² (textbook).
    a, far = 0.1, 20.0
    moment = math.pi * a**2
    loop = (circle(a, sides=2880),)
    axial = phasors(loop, [1.0], (0, 0, far))[0, 2].real
    beside = phasors(loop, [1.0], (far, 0, 0))[0, 2].real
    # 1e-4: next order 1.5 (a/z)² = 4·10⁻⁵.
    assert axial == pytest.approx(MU0 * moment / (2 * math.pi * far**3), rel=1e-4)
    assert beside == pytest.approx(-MU0 * moment / (4 * math.pi * far**3), rel=1e-4)
