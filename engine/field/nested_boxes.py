"""Points in nested boxes with Chebyshev nodes, and how wrong interpolation in them is.

Between n Chebyshev points on an edge of half length h a real function differs from its
interpolant by at most 2 (h/2)^n / n! times its largest n-th derivative ([1]_, ch. 6.2;
for a complex vector, that of its part along any unit vector). With the derivatives of
`leg_bundles`, and d the distance of the box to a current element,

    |ΔB| ≤ µ₀/4π · 2 (h/2)^n (n + 1) · ∫ dl [ n₀ / d^(n+2) + (n + 2) n₁ / d^(n+3) ].

In several dimensions the axes add, each times what interpolation along those before it
may enlarge: 1 + (2/π) ln n ([2]_). For a box in a ball of radius R, and a straight line
whose nearest place is p from the centre, 1/d^k is at most (1 − R/p)^(−k) / r^k, so that
the integral is no longer than p · ∫ (1 + s²)^(−k/2) ds, nor than the line.

A polynomial is its own interpolant: what a box has from the one around it comes to its
nodes without further error.

References
----------
.. [1] P. J. Davis, Interpolation and Approximation (from memory).
.. [2] T. J. Rivlin, The Chebyshev Polynomials (from memory).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from math import ceil, gamma, log, pi, sqrt

import numpy as np

from engine.compiled import compiled
from engine.field.kernel import MU0_OVER_4PI, Floats, Integers
from engine.field.leg_bundles import (
    ALONE,
    DIPOLE,
    NEED,
    NET,
    SPREAD,
    START,
    STOP,
    SURFACE,
    distance_to_line,
)

#: Nodes along the longest edge: their square fills two blocks of the kernel.
NODES = 11
#: Edges that are shorter than this part of the longest are not cut.
_SHORT = 0.6
#: Half length over distance at which shorter edges are to be as exact as the longest.
_TYPICAL = 0.3

#: ∫ (1 + s²)^(−k/2) ds over the whole line, by k.
_LINES = np.array(
    [np.inf, np.inf]
    + [sqrt(pi) * gamma((k - 1) / 2) / gamma(k / 2) for k in range(2, NODES + 4)]
)


@dataclass(frozen=True, eq=False)
class Box:
    """Points of one box, in the frame of the whole.

    Attributes
    ----------
    rows : (n,) int
        Of the points.
    middle, half : (3,) float
        In the frame. [m]
    nodes : 3 ints
        Along the axes of the frame.
    """

    rows: Integers
    middle: Floats
    half: Floats
    nodes: tuple[int, int, int]

    @classmethod
    def around(
        cls, rows: Integers, places: Floats, least: tuple[int, int, int] = (1, 1, 1)
    ) -> Box:
        """The smallest, with no fewer nodes than `least` where it is not flat."""
        low, high = places.min(axis=0), places.max(axis=0)
        half = (high - low) / 2
        widest = float(half.max())
        nodes = [
            max(_nodes_along(float(h), widest), m if h > 0 else 1)
            for h, m in zip(half, least, strict=True)
        ]
        return cls(rows, (low + high) / 2, half, (nodes[0], nodes[1], nodes[2]))

    @property
    def size(self) -> int:
        """How many nodes."""
        return int(np.prod(self.nodes))

    def places(self) -> Floats:
        """(size, 3) nodes in the frame. [m]"""
        axes = [
            m + h * chebyshev_nodes(n)
            for m, h, n in zip(self.middle, self.half, self.nodes, strict=True)
        ]
        return np.stack(np.meshgrid(*axes, indexing="ij"), axis=-1).reshape(-1, 3)

    def weights(self, places: Floats) -> Floats:
        """(k, size) from values at the nodes to values at places (k, 3) in the box."""
        whole = np.ones((len(places), 1))
        for axis, n in enumerate(self.nodes):
            h = self.half[axis]
            x = (places[:, axis] - self.middle[axis]) / h if h > 0 else 0 * places[:, 0]
            along = np.polynomial.chebyshev.chebvander(x, n - 1) @ _to_series(n)
            whole = (whole[:, :, None] * along[:, None, :]).reshape(len(places), -1)
        return whole

    def parts(self, places: Floats) -> Iterator[Box]:
        """Boxes of the points on either side of its middle; `places` of all points."""
        own = places[self.rows]
        cut = np.flatnonzero(self.half >= _SHORT * self.half.max())
        side = (own[:, cut] > self.middle[cut]) @ (1 << np.arange(len(cut)))
        for which in range(2 ** len(cut)):
            mine = side == which
            if mine.any():
                yield Box.around(self.rows[mine], own[mine], self.nodes)


def frame_of(points: Floats) -> Floats:
    """(3, 3) orthogonal, columns the axes in which the points are flattest."""
    extent = np.ptp(points, axis=0)
    if extent.min() <= 1e-9 * extent.max():
        return np.eye(3)
    away = points - points.mean(axis=0)
    return np.asarray(np.linalg.eigh(away.T @ away)[1], np.float64)


def _nodes_along(half: float, widest: float) -> int:
    if half == 0.0:
        return 1
    # Of shorter edges fewer nodes are as exact.
    ratio = log(_TYPICAL / 2) / log(_TYPICAL / 2 * half / widest)
    return max(1, ceil(NODES * ratio - 1e-9))


@lru_cache(maxsize=32)
def chebyshev_nodes(n: int) -> Floats:
    """(n,) of the first kind on −1 to 1."""
    k: Floats = np.cos((np.arange(n) + 0.5) * np.pi / n)
    return k


@lru_cache(maxsize=32)
def _to_series(n: int) -> Floats:
    matrix = np.linalg.inv(
        np.polynomial.chebyshev.chebvander(chebyshev_nodes(n), n - 1)
    )
    return np.asarray(matrix, np.float64)


@compiled
def interpolation_errors(
    middle: Floats,
    half: Floats,
    nodes: Integers,
    which: Integers,
    table: Floats,
    flows: Floats,
    out: Floats,
) -> None:
    """Write the bounds of what bundles are wrong by, interpolated in a box.

    Parameters
    ----------
    middle : (3,) float64
        Of the box, in space. [m]
    half, nodes
        Along its own axes.
    which : (k,) int64
        Bundles.
    table, flows
        Of `leg_bundles.Bundles`.
    out : (k, c) float64
        Overwritten; infinite where the box is too near for the filaments. [T]
    """
    radius = np.sqrt(half[0] ** 2 + half[1] ** 2 + half[2] ** 2)
    for i in range(len(which)):
        row = table[which[i]]
        p = distance_to_line(middle, row[START:SPREAD])
        d = p - radius - row[SPREAD]
        out[i] = np.inf
        if not (d > 0.0 and p - radius - row[SURFACE] >= row[NEED]):
            continue
        lx, ly, lz = row[STOP:SPREAD] - row[START:STOP]
        length = np.sqrt(lx * lx + ly * ly + lz * lz)
        out[i] = 0.0
        enlarged = 1.0
        for axis in range(3):
            n = nodes[axis]
            scale = (
                enlarged * MU0_OVER_4PI * 2.0 * (n + 1) * (half[axis] / (2 * d)) ** n
            )
            scale /= d * d
            one = scale * min(length, p * _LINES[n + 2])
            two = scale * (n + 2) / d * min(length, p * _LINES[n + 3])
            for c in range(flows.shape[1]):
                own = flows[which[i], c]
                together = own[NET] * one + own[DIPOLE] * two
                out[i, c] += min(own[ALONE] * one, together)
            enlarged *= 1.0 + 2.0 / np.pi * np.log(n)
