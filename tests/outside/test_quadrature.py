"""Straight segments against adaptive quadrature of the Biot–Savart integrand.

The integrand µ₀ I/4π · dl × r/|r|³ is textbook (Griffiths, Introduction to
Electrodynamics, sec. 5.2). scipy integrates in double precision, mpmath with 40
digits where the engine's closed form could cancel.
"""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import quad

from engine.field import flux_density, vector_potential
from engine.runs import Round
from engine.validation.shapes import conductor, phasors

MU0 = 4e-7 * math.pi
Vector = NDArray[np.float64]

#: Thinner than the nearest point is far.
FINE = Round(diameter=1e-7)

RANDOM = np.random.default_rng(20240607)
SEGMENTS = [
    (RANDOM.uniform(-3, 3, 3), RANDOM.uniform(-3, 3, 3), RANDOM.uniform(-4, 4, 3))
    for _ in range(12)
]


def integrated(start: Vector, end: Vector, point: Vector) -> Vector:
    """Field of 1 A from start to end by adaptive quadrature. [T]"""
    leg = end - start

    def component(t: float, axis: int) -> float:
        r = point - start - t * leg
        return float(np.cross(leg, r)[axis] / np.linalg.norm(r) ** 3)

    # The integrand peaks at the foot of the perpendicular.
    foot = float(np.clip((point - start) @ leg / (leg @ leg), 0.01, 0.99))
    return np.array(
        [
            MU0 / (4 * math.pi)
            * quad(component, 0, 1, args=(axis,), points=[foot], epsabs=0,
                   epsrel=1e-12, limit=400)[0]
            for axis in range(3)
        ]
    )  # fmt: skip


@pytest.mark.parametrize(("start", "end", "point"), SEGMENTS)
def test_segment_equals_quadrature_of_biot_savart(
    start: Vector, end: Vector, point: Vector
) -> None:
    wire = conductor("wire", [start, end], across=np.cross(end - start, point - start))
    expected = integrated(start, end, point)
    # 1e-9: the quadrature's own error.
    np.testing.assert_allclose(
        phasors((wire,), [1.0], point)[0].real, expected,
        rtol=0, atol=1e-9 * np.linalg.norm(expected),
    )  # fmt: skip


@pytest.mark.parametrize(("start", "end", "point"), SEGMENTS[:6])
def test_vector_potential_equals_quadrature_of_inverse_distance(
    start: Vector, end: Vector, point: Vector
) -> None:
    # A = µ₀ I/4π ∫ dl/|r|, Griffiths sec. 5.4.
    leg = end - start
    integral, _ = quad(
        lambda t: 1 / np.linalg.norm(point - start - t * leg), 0, 1,
        epsabs=0, epsrel=1e-12, limit=400,
    )  # fmt: skip
    wire = conductor("wire", [start, end], across=np.cross(leg, point - start))
    a = vector_potential((wire,), np.ones((1, 1), dtype=complex), point[np.newaxis])
    np.testing.assert_allclose(a[0, 0].real, 1e-7 * leg * integral, rtol=1e-9)


def exact(start: Vector, end: Vector, point: Vector) -> Vector:
    """Field of 1 A by the angles' form with 40 digits. [T]

    B = µ₀ I/4πd (cos α₁ − cos α₂), any textbook; d and the cosines are taken from the
    given doubles without rounding.
    """
    with mpmath.workdps(40):
        p, s, e = ([mpmath.mpf(float(x)) for x in v] for v in (point, start, end))
        a = [p[i] - s[i] for i in range(3)]
        b = [p[i] - e[i] for i in range(3)]
        leg = [e[i] - s[i] for i in range(3)]

        def dot(u: list[mpmath.mpf], v: list[mpmath.mpf]) -> mpmath.mpf:
            return mpmath.fsum(u[i] * v[i] for i in range(3))

        length = mpmath.sqrt(dot(leg, leg))
        cross = [
            leg[1] * a[2] - leg[2] * a[1],
            leg[2] * a[0] - leg[0] * a[2],
            leg[0] * a[1] - leg[1] * a[0],
        ]
        distance_squared = dot(cross, cross) / length**2
        cosines = (
            dot(leg, a) / mpmath.sqrt(dot(a, a)) - dot(leg, b) / mpmath.sqrt(dot(b, b))
        ) / length
        factor = mpmath.mpf("1e-7") * cosines / (distance_squared * length)
        return np.array([float(factor * c) for c in cross])


@pytest.mark.parametrize(
    ("name", "start", "end", "point"),
    [
        ("a micrometre beside the middle", (0, 0, 0), (2, 0, 0), (0.9, 1e-6, 0)),
        ("a micrometre beside the end", (0, 0, 0), (2, 0, 0), (2.0, 1e-6, 0)),
        ("beyond the end, almost in line", (0, 0, 0), (2, 0, 0), (3.0, 1e-6, 2e-6)),
        ("before the start, almost in line", (0, 0, 0), (2, 0, 0), (-4.0, 0, 1e-5)),
        ("a millimetre segment at 50 m", (0, 0, 0), (1e-3, 0, 0), (30, 40, 1)),
        ("a kilometre beside a table", (-500, 0, 0), (500, 0, 0), (0.3, 0.1, 0.9)),
        ("askew", (0.1, 0.2, 0.3), (1.7, -2.2, 0.9), (0.4, 0.5, -0.6)),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_closed_form_does_not_cancel(
    name: str,
    start: tuple[float, float, float],
    end: tuple[float, float, float],
    point: tuple[float, float, float],
) -> None:
    wire = conductor("wire", [start, end], FINE, across=(0.1, 0.7, 1))
    field = phasors((wire,), [1.0], point)[0].real
    expected = exact(np.array(start), np.array(end), np.array(point))
    # 1e-9: double precision and the difference of µ₀ to 4π·10⁻⁷.
    np.testing.assert_allclose(
        field, expected, rtol=0, atol=1e-9 * np.linalg.norm(expected)
    )


def test_opposed_wires_keep_nine_digits_after_cancellation() -> None:
    # 1000 A each way, 20 mm apart, seen from 20 m: a millionth of one wire's field
    # would be a thousandth of the pair's.
    a = (np.array([-0.01, 0.0, -3.0]), np.array([-0.01, 0.0, 3.0]))
    b = (np.array([0.01, 0.0, -3.0]), np.array([0.01, 0.0, 3.0]))
    point = np.array([1.0, 20.0, 0.4])
    pair = (conductor("go", a), conductor("return", b))
    field = flux_density(pair, np.array([[1000.0, -1000.0]], complex), point[None])
    expected = 1000 * (exact(*a, point) - exact(*b, point))
    np.testing.assert_allclose(
        field[0, 0].real, expected, rtol=0, atol=1e-9 * np.linalg.norm(expected)
    )
