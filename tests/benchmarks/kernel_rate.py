"""Rate of the kernel beside the best NumPy form of the same formula, one core each.

Run as a program: ``python tests/benchmarks/kernel_rate.py``. Both sum the same closed
polylines at the same points in the same run, and their results are compared before
anything is timed. Printed is the best of several rounds, in segment-point pairs per
second.
"""

# ruff: noqa: E402  One core each: that must be said before NumPy is imported.

from __future__ import annotations

import os

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[name] = "1"

import sys
import time
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

sys.path.insert(0, str(Path(__file__).parents[2]))

from engine.conductor import Conductor
from engine.field import flux_density
from engine.field.kernel import MU0_OVER_4PI, TILE, tile_responses
from engine.runs import Round

Floats = NDArray[np.float64]

CONDUCTORS = 40
CORNERS = 8
POINTS = 100 * TILE
ROUNDS = 5


def polylines(rng: np.random.Generator) -> Floats:
    """(m, k, 3) closed random routes of a room's size. [m]"""
    paths = rng.uniform(-5, 5, (CONDUCTORS, CORNERS, 3))
    return np.concatenate([paths, paths[:, :1]], axis=1)


def by_numpy(vertices: Floats, points: Floats) -> Floats:
    """(m, n, 3): whole arrays over points, segment by segment, in place.

    The fastest of the NumPy forms tried: blocks of points that stay in the cache,
    coordinates apart, |b| of one segment kept as |a| of the next.
    """
    out = np.zeros((len(vertices), len(points), 3))
    for first in range(0, len(points), 1024):
        block = np.ascontiguousarray(points[first : first + 1024].T)
        for row, path in zip(out, vertices, strict=True):
            row[first : first + 1024] = _polyline(path, block)
    return out


def _polyline(path: Floats, block: Floats) -> Floats:
    total = np.zeros_like(block)
    cross = np.empty_like(block)
    a = block - path[0][:, None]
    size_a = np.sqrt(np.einsum("xn,xn->n", a, a))
    for start, end in pairwise(path):
        lx, ly, lz = end - start
        b = block - end[:, None]
        size_b = np.sqrt(np.einsum("xn,xn->n", b, b))
        cross[0] = ly * a[2] - lz * a[1]
        cross[1] = lz * a[0] - lx * a[2]
        cross[2] = lx * a[1] - ly * a[0]
        product = size_a * size_b
        factor = np.einsum("xn,xn->n", a, b)
        factor += product
        factor *= product
        np.divide(size_a + size_b, factor, out=factor)
        cross *= factor
        total += cross
        a, size_a = b, size_b
    return (total * MU0_OVER_4PI).T


def by_kernel(vertices: Floats, points: Floats) -> Floats:
    """(m, n, 3): tile after tile in this thread."""
    count = vertices.shape[1]
    flat = vertices.reshape(-1, 3)
    offsets = np.arange(len(vertices) + 1) * count
    weights = np.ones(len(vertices))
    owners = np.arange(len(vertices))
    out = np.empty((len(vertices), len(points), 3))
    part = np.empty((len(vertices), TILE, 3))
    flags = np.zeros(TILE, bool)
    for first in range(0, len(points), TILE):
        tile = points[first : first + TILE]
        tile_responses(tile, flat, offsets, weights, owners, part, flags)
        out[:, first : first + TILE] = part
    return out


def best(work: Callable[[], object]) -> float:
    """Shortest of the rounds. [s]"""
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def main() -> None:
    if hasattr(os, "sched_setaffinity"):
        os.sched_setaffinity(0, {min(os.sched_getaffinity(0))})
    rng = np.random.default_rng(1)
    vertices = polylines(rng)
    points = rng.uniform(-5, 5, (POINTS, 3))
    pairs = CONDUCTORS * CORNERS * POINTS
    axes = np.tile(np.eye(3)[:2], (CORNERS + 1, 1, 1))
    conductors = [
        Conductor(
            f"{i}", f"{i}", "c", "run", path, axes, Round(diameter=1e-4), (), f"{i}"
        )
        for i, path in enumerate(vertices)
    ]
    currents = np.ones((1, CONDUCTORS), complex)
    kernel, reference = by_kernel(vertices, points), by_numpy(vertices, points)
    scale = np.abs(reference).max(axis=(0, 2))[:, None]
    difference = float((np.abs(kernel - reference) / scale).max())
    flux_density(conductors, currents, points)

    numpy_rate = pairs / best(lambda: by_numpy(vertices, points))
    kernel_rate = pairs / best(lambda: by_kernel(vertices, points))
    whole_rate = pairs / best(lambda: flux_density(conductors, currents, points))
    print(f"{CONDUCTORS} polylines of {CORNERS} segments at {POINTS} points, one core")
    print(f"largest relative difference   {difference:.1e}")
    print(f"NumPy                         {numpy_rate / 1e6:8.1f} million pairs/s")
    print(f"kernel                        {kernel_rate / 1e6:8.1f} million pairs/s")
    print(f"flux_density, all steps       {whole_rate / 1e6:8.1f} million pairs/s")
    print(f"kernel over NumPy             {kernel_rate / numpy_rate:8.1f}")


if __name__ == "__main__":
    main()
