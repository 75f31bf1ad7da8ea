"""Field of a straight filament around a point: value, slopes, curvatures, remainder.

With L from start to end of the segment, a and b from its ends to the point, the field
is c f with c = L × a, which is linear in the point, and the number

    f = µ₀ I / 4π · S / (q (q + a·b)),  S = |a| + |b|,  q = |a||b|,

or S (q − a·b) / (q |c|²) where a·b < 0. First and second derivatives follow by the
rules of product and quotient from those of |a| and |b|, without differences.

Of what is left beyond second order the third derivative is the bound. The field of a
current element is that of ∇(1/r), and a derivative of order m of 1/r along any
directions is at most m!/r^(m+1) ([1]_), so that

    |∂³B| ≤ (µ₀ I / 4π) · 4! · ∫ dl / r⁵ ,  |∂²B| ≤ (µ₀ I / 4π) · 3! · ∫ dl / r⁴ .

References
----------
.. [1] Derivatives of 1/r along one direction are m! P_m(cos θ)/r^(m+1), |P_m| ≤ 1
   (O. D. Kellogg, Foundations of Potential Theory, ch. V); a symmetric multilinear
   form is largest on equal arguments (S. Banach, Studia Math. 7 (1938), 36-44).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from engine.compiled import compiled, contracted
from engine.field.kernel import MU0_OVER_4PI

Floats = NDArray[np.float64]

#: Rows of an expansion: value, slopes along three axes, curvatures 11, 12, 22.
ROWS = 7


#: A number with its slopes along three axes and its curvatures 11, 12, 22.
Jet = tuple[float, float, float, float, float, float, float]


@contracted
def _along(x: float, y: float, z: float, axis: Floats) -> float:
    return float(x * axis[0] + y * axis[1] + z * axis[2])


@contracted
def _distance(x: float, y: float, z: float, frame: Floats) -> Jet:
    """Length of a vector whose end is the point."""
    r = np.sqrt(x * x + y * y + z * z)
    i = 1.0 / r
    r1 = _along(x, y, z, frame[0]) * i
    r2 = _along(x, y, z, frame[1]) * i
    r3 = _along(x, y, z, frame[2]) * i
    return r, r1, r2, r3, (1.0 - r1 * r1) * i, -r1 * r2 * i, (1.0 - r2 * r2) * i


@contracted
def _product(p: Jet, q: Jet) -> Jet:
    return (
        p[0] * q[0],
        p[1] * q[0] + p[0] * q[1],
        p[2] * q[0] + p[0] * q[2],
        p[3] * q[0] + p[0] * q[3],
        p[4] * q[0] + 2.0 * p[1] * q[1] + p[0] * q[4],
        p[5] * q[0] + p[1] * q[2] + p[2] * q[1] + p[0] * q[5],
        p[6] * q[0] + 2.0 * p[2] * q[2] + p[0] * q[6],
    )


@contracted
def _quotient(n: Jet, d: Jet, scale: float) -> Jet:
    i = 1.0 / d[0]
    f = n[0] * i
    f1, f2, f3 = (n[1] - f * d[1]) * i, (n[2] - f * d[2]) * i, (n[3] - f * d[3]) * i
    f11 = (n[4] - 2.0 * f1 * d[1] - f * d[4]) * i
    f12 = (n[5] - f1 * d[2] - f2 * d[1] - f * d[5]) * i
    f22 = (n[6] - 2.0 * f2 * d[2] - f * d[6]) * i
    return (
        f * scale, f1 * scale, f2 * scale, f3 * scale,
        f11 * scale, f12 * scale, f22 * scale,
    )  # fmt: skip


@contracted
def _sum(p: Jet, q: Jet, sign: float) -> Jet:
    return (
        p[0] + sign * q[0],
        p[1] + sign * q[1],
        p[2] + sign * q[2],
        p[3] + sign * q[3],
        p[4] + sign * q[4],
        p[5] + sign * q[5],
        p[6] + sign * q[6],
    )


@contracted
def add_segment(
    p0: Floats, p1: Floats, centre: Floats, frame: Floats, weight: float, out: Floats
) -> None:
    """Add the expansion of one segment's field for `weight` amperes.

    Parameters
    ----------
    p0, p1, centre : (3,) float64
        Ends and the point, which lies off the segment. [m]
    frame : (3, 3) float64
        Orthonormal rows: the axes along which derivatives are taken.
    out : (7, 3) float64
        Field [T], slopes [T/m], curvatures [T/m²]; added to.
    """
    lx, ly, lz = p1[0] - p0[0], p1[1] - p0[1], p1[2] - p0[2]
    ax, ay, az = centre[0] - p0[0], centre[1] - p0[1], centre[2] - p0[2]
    bx, by, bz = ax - lx, ay - ly, az - lz
    ra, rb = _distance(ax, ay, az, frame), _distance(bx, by, bz, frame)
    q, total = _product(ra, rb), _sum(ra, rb, 1.0)
    dot = (
        ax * bx + ay * by + az * bz,
        _along(ax + bx, ay + by, az + bz, frame[0]),
        _along(ax + bx, ay + by, az + bz, frame[1]),
        _along(ax + bx, ay + by, az + bz, frame[2]),
        2.0, 0.0, 2.0,
    )  # fmt: skip
    u, v, w = frame[0], frame[1], frame[2]
    cx = (
        ly * az - lz * ay, ly * u[2] - lz * u[1], ly * v[2] - lz * v[1],
        ly * w[2] - lz * w[1], 0.0, 0.0, 0.0,
    )  # fmt: skip
    cy = (
        lz * ax - lx * az, lz * u[0] - lx * u[2], lz * v[0] - lx * v[2],
        lz * w[0] - lx * w[2], 0.0, 0.0, 0.0,
    )  # fmt: skip
    cz = (
        lx * ay - ly * ax, lx * u[1] - ly * u[0], lx * v[1] - ly * v[0],
        lx * w[1] - ly * w[0], 0.0, 0.0, 0.0,
    )  # fmt: skip
    if dot[0] > 0.0:
        over, under = total, _product(q, _sum(q, dot, 1.0))
    else:
        # |c|² = (q − a·b)(q + a·b) takes the place of the sum that cancels.
        square = _sum(_product(cx, cx), _product(cy, cy), 1.0)
        square = _sum(square, _product(cz, cz), 1.0)
        over, under = _product(total, _sum(q, dot, -1.0)), _product(q, square)
    f = _quotient(over, under, weight * MU0_OVER_4PI)
    bx_, by_, bz_ = _product(cx, f), _product(cy, f), _product(cz, f)
    for k in range(ROWS):
        out[k, 0] += bx_[k]
        out[k, 1] += by_[k]
        out[k, 2] += bz_[k]


@compiled
def derivative_bounds(
    p0: Floats, p1: Floats, centre: Floats, reach: float
) -> tuple[float, float]:
    """Bounds of third and second derivatives per ampere in a ball around the centre.

    Parameters
    ----------
    reach : float
        Radius of the ball; where it touches the segment both are infinite. [m]

    Returns
    -------
    third, second : float
        [T/A/m³], [T/A/m²]
    """
    fourth, fifth, _ = power_integrals(p0, p1, centre, reach)
    return 24.0 * MU0_OVER_4PI * fifth, 6.0 * MU0_OVER_4PI * fourth


@compiled
def power_integrals(
    p0: Floats, p1: Floats, centre: Floats, reach: float
) -> tuple[float, float, float]:
    """Bounds of ∫ dl / rⁿ along the segment for all places in a ball, n = 4, 5, 6.

    Parameters
    ----------
    reach : float
        Radius of the ball; where it touches the segment all are infinite. [m]

    Returns
    -------
    fourth, fifth, sixth : float
        [1/m³], [1/m⁴], [1/m⁵]
    """
    lx, ly, lz = p1[0] - p0[0], p1[1] - p0[1], p1[2] - p0[2]
    length = np.sqrt(lx * lx + ly * ly + lz * lz)
    ax, ay, az = centre[0] - p0[0], centre[1] - p0[1], centre[2] - p0[2]
    along = (ax * lx + ay * ly + az * lz) / length
    held = min(max(along, 0.0), length)
    part = held / length
    dx, dy, dz = ax - part * lx, ay - part * ly, az - part * lz
    d = np.sqrt(dx * dx + dy * dy + dz * dz) - reach
    if d <= 0.0:
        return np.inf, np.inf, np.inf
    # From the nearest place of the segment r² is at least d² + l², wherever in the
    # ball the point is; that place moves along the segment by the reach at most.
    before = min(length, max(0.0, along + reach))
    behind = min(length, max(0.0, length - along + reach))
    t = before / np.sqrt(d * d + before * before)
    u = behind / np.sqrt(d * d + behind * behind)
    cube, i = d * d * d, 1.0 / d
    over = before + behind
    fourth = min(0.5 * np.pi, over * i) / cube
    fifth = (t - t * t * t / 3.0 + u - u * u * u / 3.0) * i / cube
    # ∫ dl / (d² + l²)³ over the whole line is 3π/8 d⁻⁵, and at most l / d⁶.
    sixth = min(0.375 * np.pi, over * i, fifth * cube * d) * i * i / cube
    return fourth, fifth, sixth
