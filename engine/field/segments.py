"""Field of single straight segments, several at once for many components of current.

The formula is that of `kernel`, which walks polylines. Here segments come in any order,
each with a conductor of its own; the responses of a few of them are kept and multiplied
with the currents of all components together.
"""

from __future__ import annotations

import numpy as np

from engine.compiled import compiled, contracted
from engine.field.kernel import MU0_OVER_4PI, ON_WIRE_SQUARED, Floats, Integers

#: Points that are taken together: their scratch stays in the first-level cache.
BLOCK = 64

#: Segments whose responses are kept at once.
_TOGETHER = 4


@contracted
def _add_segments(
    points: Floats,
    segments: Floats,
    owners: Integers,
    parts: Floats,
    scratch: Floats,
    sums: Floats,
) -> None:
    """Add the flux density of segments at points (3, BLOCK) to sums (f, 3 * BLOCK)."""
    count = len(segments)
    for k in range(0, count, _TOGETHER):
        for t in range(_TOGETHER):
            if k + t < count:
                _response(points, segments[k + t], scratch[t])
            else:
                scratch[t] = 0.0
        last = count - 1
        o0, o1 = owners[k], owners[min(k + 1, last)]
        o2, o3 = owners[min(k + 2, last)], owners[min(k + 3, last)]
        for f in range(len(parts)):
            i0, i1, i2, i3 = parts[f, o0], parts[f, o1], parts[f, o2], parts[f, o3]
            _combine(scratch, i0, i1, i2, i3, sums[f])


@contracted
def _combine(
    rows: Floats, i0: float, i1: float, i2: float, i3: float, out: Floats
) -> None:
    one, two, three, four = rows[0], rows[1], rows[2], rows[3]
    for i in range(3 * BLOCK):
        out[i] += (i0 * one[i] + i1 * two[i]) + (i2 * three[i] + i3 * four[i])


@contracted
def _response(points: Floats, segment: Floats, out: Floats) -> None:
    """Write the field per ampere of the conductor."""
    x0, y0, z0 = segment[0], segment[1], segment[2]
    x1, y1, z1 = segment[3], segment[4], segment[5]
    lx, ly, lz = x1 - x0, y1 - y0, z1 - z0
    scale = segment[6] * MU0_OVER_4PI
    limit = ON_WIRE_SQUARED * (lx * lx + ly * ly + lz * lz)
    for i in range(BLOCK):
        ax, ay, az = points[0, i] - x0, points[1, i] - y0, points[2, i] - z0
        bx, by, bz = points[0, i] - x1, points[1, i] - y1, points[2, i] - z1
        ra = np.sqrt(ax * ax + ay * ay + az * az)
        rb = np.sqrt(bx * bx + by * by + bz * bz)
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
        out[i] = factor * cx
        out[BLOCK + i] = factor * cy
        out[2 * BLOCK + i] = factor * cz


@compiled
def sum_segments(
    points: Floats, rows: Floats, owners: Integers, parts: Floats, out: Floats
) -> None:
    """Write the flux density of segments at points.

    Parameters
    ----------
    points : (n, 3) float64
        On a segment it adds zero. [m]
    rows : (s, 7) float64
        Start and stop [m], and the share of its conductor's current.
    owners : (s,) int64
        Conductors of the segments.
    parts : (f, m) float64
        Real currents of the conductors, each row a source of its own. [A]
    out : (f, 3, n) float64
        Overwritten. [T]
    """
    n = len(points)
    places, scratch = np.empty((3, BLOCK)), np.zeros((_TOGETHER, 3 * BLOCK))
    sums = np.empty((len(parts), 3 * BLOCK))
    for start in range(0, n, BLOCK):
        for i in range(BLOCK):
            for axis in range(3):
                # A short block is filled up with the last point.
                places[axis, i] = points[min(start + i, n - 1), axis]
        sums[:] = 0.0
        _add_segments(places, rows, owners, parts, scratch, sums)
        for f in range(len(parts)):
            for axis in range(3):
                for i in range(min(BLOCK, n - start)):
                    out[f, axis, start + i] = sums[f, axis * BLOCK + i]
