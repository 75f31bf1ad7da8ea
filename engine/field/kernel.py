"""Field of straight current segments at a tile of points: the inner loops, compiled.

For one segment, with a and b the vectors from its ends to the point and L from start
to end ([1]_, sec. 5.2, finite straight wire, written without angles),

    B = µ₀ I / 4π · (L × a) (|a| + |b|) / (|a||b| (|a||b| + a·b))
    A = µ₀ I / 4π · L/|L| · ln((|a| + |b| + |L|) / (|a| + |b| − |L|))

Where a·b < 0 the sum |a||b| + a·b cancels; there it is |a × b|² / (|a||b| − a·b).
L × a stands for a × b, which would cancel for short far segments. A point nearer than
a nanometre to a segment is on the wire: that segment adds zero there and the point is
flagged.

Balanced bundles live on cancellation: double precision, and of the fast-math flags
only contraction.

References
----------
.. [1] D. J. Griffiths, Introduction to Electrodynamics.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from engine.compiled import compiled, contracted

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

#: Points of one tile: the scratch of a tile stays in the first-level cache.
TILE = 256

#: µ₀ / 4π. [T·m/A] 1e-7 to a relative 1.5e-10 since 2019 (CODATA).
MU0_OVER_4PI = 1e-7

# A literal: the square of a nanometre. [m²]
ON_WIRE_SQUARED = 1e-18

_ROWS = 8  # of the scratch: x, y, z, |a|, three sums, flag


@contracted
def _add_flux_density(s: Floats, vertices: Floats, weight: float) -> None:
    """Add one polyline's field for `weight` amperes to the sums in the scratch."""
    x0, y0, z0 = vertices[0, 0], vertices[0, 1], vertices[0, 2]
    for i in range(TILE):
        ax = s[i] - x0
        ay = s[TILE + i] - y0
        az = s[2 * TILE + i] - z0
        s[3 * TILE + i] = np.sqrt(ax * ax + ay * ay + az * az)
    scale = weight * MU0_OVER_4PI
    for k in range(1, vertices.shape[0]):
        x1, y1, z1 = vertices[k, 0], vertices[k, 1], vertices[k, 2]
        lx, ly, lz = x1 - x0, y1 - y0, z1 - z0
        limit = ON_WIRE_SQUARED * (lx * lx + ly * ly + lz * lz)
        for i in range(TILE):
            ax = s[i] - x0
            ay = s[TILE + i] - y0
            az = s[2 * TILE + i] - z0
            bx = s[i] - x1
            by = s[TILE + i] - y1
            bz = s[2 * TILE + i] - z1
            ra = s[3 * TILE + i]
            rb = np.sqrt(bx * bx + by * by + bz * bz)
            s[3 * TILE + i] = rb
            cx = ly * az - lz * ay
            cy = lz * ax - lx * az
            cz = lx * ay - ly * ax
            cross = cx * cx + cy * cy + cz * cz
            dot = ax * bx + ay * by + az * bz
            product = ra * rb
            beside = dot <= 0.0
            on_wire = (beside & (cross <= limit)) | (product * product <= limit)
            total = ra + rb
            over = total * (product - dot) if beside else total
            under = product * (cross if beside else product + dot)
            over = 0.0 if on_wire else scale * over
            under = 1.0 if on_wire else under
            factor = over / under
            s[4 * TILE + i] += factor * cx
            s[5 * TILE + i] += factor * cy
            s[6 * TILE + i] += factor * cz
            s[7 * TILE + i] = 1.0 if on_wire else s[7 * TILE + i]
        x0, y0, z0 = x1, y1, z1


@compiled
def _add_vector_potential(s: Floats, vertices: Floats, weight: float) -> None:
    """Add one polyline's vector potential for `weight` amperes to the sums."""
    for k in range(1, vertices.shape[0]):
        x0, y0, z0 = vertices[k - 1, 0], vertices[k - 1, 1], vertices[k - 1, 2]
        lx = vertices[k, 0] - x0
        ly = vertices[k, 1] - y0
        lz = vertices[k, 2] - z0
        length = np.sqrt(lx * lx + ly * ly + lz * lz)
        limit = ON_WIRE_SQUARED * length * length
        for i in range(TILE):
            ax, ay, az = s[i] - x0, s[TILE + i] - y0, s[2 * TILE + i] - z0
            bx, by, bz = ax - lx, ay - ly, az - lz
            ra = np.sqrt(ax * ax + ay * ay + az * az)
            rb = np.sqrt(bx * bx + by * by + bz * bz)
            cx, cy, cz = ly * az - lz * ay, lz * ax - lx * az, lx * ay - ly * ax
            cross = cx * cx + cy * cy + cz * cz
            dot = ax * bx + ay * by + az * bz
            product = ra * rb
            if product * product <= limit or (dot <= 0.0 and cross <= limit):
                s[7 * TILE + i] = 1.0
                continue
            # (|a|+|b|)² − |L|² = 2 (|a||b| + a·b) takes the cancelling difference away.
            half = cross / (product - dot) if dot <= 0.0 else product + dot
            logarithm = np.log1p(length * (ra + rb + length) / half)
            factor = weight * MU0_OVER_4PI * logarithm / length
            s[4 * TILE + i] += factor * lx
            s[5 * TILE + i] += factor * ly
            s[6 * TILE + i] += factor * lz


@compiled
def _scratch(points: Floats) -> Floats:
    s = np.zeros(_ROWS * TILE)
    for i in range(TILE):
        # A short tile is filled up with its last point.
        j = min(i, points.shape[0] - 1)
        for axis in range(3):
            s[axis * TILE + i] = points[j, axis]
    return s


@compiled
def _clear_sums(s: Floats) -> None:
    for i in range(4 * TILE, 7 * TILE):
        s[i] = 0.0


@compiled
def tile_responses(
    points: Floats,
    vertices: Floats,
    offsets: Integers,
    weights: Floats,
    owners: Integers,
    out: Floats,
    on_wire: NDArray[np.bool_],
) -> None:
    """Write the field per ampere of each conductor at up to `TILE` points.

    Parameters
    ----------
    points : (n, 3) float64
        At most `TILE` of them, at least one. [m]
    vertices : (v, 3) float64
        Of all filaments, one polyline after the other. [m]
    offsets : (p + 1,) int64
        Filament i is ``vertices[offsets[i]:offsets[i + 1]]``.
    weights : (p,) float64
        Share of its conductor's current that filament i carries.
    owners : (p,) int64
        Row of `out` of the conductor of filament i, equal ones in a row.
    out : (m, n, 3) float64
        Overwritten. [T/A]
    on_wire : (n,) bool
        Set where a filament passes through the point.
    """
    n = points.shape[0]
    s = _scratch(points)
    out[:] = 0.0
    for p in range(weights.shape[0]):
        _add_flux_density(s, vertices[offsets[p] : offsets[p + 1]], weights[p])
        if p + 1 == weights.shape[0] or owners[p + 1] != owners[p]:
            for i in range(n):
                for axis in range(3):
                    out[owners[p], i, axis] = s[(4 + axis) * TILE + i]
            _clear_sums(s)
    for i in range(n):
        on_wire[i] |= s[7 * TILE + i] > 0.0


@compiled
def tile_sum(
    points: Floats,
    vertices: Floats,
    offsets: Integers,
    weights: Floats,
    owners: Integers,
    real: Floats,
    imaginary: Floats,
    potential: bool,
    out: NDArray[np.complex128],
    on_wire: NDArray[np.bool_],
) -> None:
    """Write the sum over all conductors for the currents of c components.

    As `tile_responses`, with

    Parameters
    ----------
    real, imaginary : (c, m) float64
        Parts of the current phasors of the owners. [A]
    potential : bool
        The vector potential instead of the flux density.
    out : (c, n, 3) complex128
        Overwritten. [T], or [Wb/m]
    """
    n = points.shape[0]
    c = real.shape[0]
    s = _scratch(points)
    sums = np.zeros((c, 2, 3 * TILE))
    for p in range(weights.shape[0]):
        filament = vertices[offsets[p] : offsets[p + 1]]
        if potential:
            _add_vector_potential(s, filament, weights[p])
        else:
            _add_flux_density(s, filament, weights[p])
        if p + 1 == weights.shape[0] or owners[p + 1] != owners[p]:
            for j in range(c):
                re, im = real[j, owners[p]], imaginary[j, owners[p]]
                for i in range(3 * TILE):
                    sums[j, 0, i] += re * s[4 * TILE + i]
                    sums[j, 1, i] += im * s[4 * TILE + i]
            _clear_sums(s)
    for j in range(c):
        for i in range(n):
            for axis in range(3):
                k = axis * TILE + i
                out[j, i, axis] = complex(sums[j, 0, k], sums[j, 1, k])
    for i in range(n):
        on_wire[i] |= s[7 * TILE + i] > 0.0
