"""Sections as filaments: how many a tile of points needs, and where they lie.

A bar is filled with Gauss-Legendre points, a round conductor with rings; the field of
the section is the weighted sum. Whether the axis alone will do, or how many points,
follows from the distance, so that the error stays below a thousandth of the resultant
of a closed group. The currents of a group cancel, so that this asks far more of each
conductor than a thousandth of its own field. There are two ways, and the cheaper one
is taken for each group and tile:

* All conductors have the same section and the same number of filaments. Then the
  error is a differential operator on the group's field and falls like (side/distance)
  to the power 2n, whatever cancels.
* Each leg is exact enough by itself, with a margin (1 + distance/thickness)² for what
  cancels in the group.

The error of n Gauss points over a side e, seen from d away, falls like ϱ^(−2n) with
ϱ = x + √(1 + x²), x = 2d/e ([1]_, theorem 4.5); of N filaments on a circle of radius R
like (R/(R + d))^N, seen across. The field of a straight round conductor is that of its
axis, so that rings matter only near bends and ends.

References
----------
.. [1] L. N. Trefethen, Is Gauss quadrature better than Clenshaw-Curtis?, SIAM Review
   50 (2008), 67-87.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.field.kernel import TILE, Floats, Integers
from engine.field.legs import Legs, tile_distances
from engine.field.pool import on_pool
from engine.runs import Bar, Round

Orders = NDArray[np.int16]

#: Points nearer to a surface are computed as if at this distance. [m]
NEAREST = 1e-3

#: Half of the thousandth; the other half is the margin of the estimates.
_TOLERANCE = 5e-4

#: Numbers of points in use, so that tiles share their filaments.
_LADDER = np.array(
    (1, 2, 3, 4, 5, 6, 8, 10, 12, 16, 20, 24, 32, 40, 48, 64, 80, 96, 128, 160, 192,
     256, 320, 384, 512, 640, 768, 1024),
    dtype=np.int16,
)  # fmt: skip

#: Distance over side at which 1, 2, 3 ... points leave half a thousandth of a field
#: that falls with the fourth power of distance (Gauss-Legendre remainder).
_SAME_SECTION = np.array((41.0, 4.4, 2.0, 1.3, 1.0, 0.82))

#: Tiles times legs that are measured sooner than a thread is started.
_FEW = 2_000

#: Distance over diameter at which the axes of equal round conductors will do, whatever
#: ends are near: from the error in `_round_alike`.
_ROUND_AXIS = 0.5 * (2.5 / _TOLERANCE) ** 0.5

#: Distance over the widest side from which one choice of filaments is to do.
_FAR_AWAY = 8.0

#: A closed loop shorter than so many sides is wider or narrower than its axis by more
#: than the tolerance, however far away.
_SHORT_LOOP = 250.0


@dataclass(frozen=True, eq=False)
class Filaments:
    """Polylines that stand for conductors, as the kernel takes them.

    Attributes
    ----------
    vertices : (v, 3) float64
        One polyline after the other. [m]
    offsets : (p + 1,) int64
        Where each polyline begins.
    weights : (p,) float64
        Share of the conductor's current.
    owners : (p,) int64
        Position of the conductor among those asked for; equal ones in a row.
    """

    vertices: Floats
    offsets: Integers
    weights: Floats
    owners: Integers

    @property
    def segments(self) -> int:
        """Number of straight segments."""
        return len(self.vertices) - len(self.weights)

    def only(self, which: Integers) -> Filaments:
        """Some of the filaments, by their positions, rising."""
        if len(which) == len(self.weights):
            return self
        sizes = np.diff(self.offsets)
        kept = np.zeros(len(sizes), bool)
        kept[which] = True
        return Filaments(
            vertices=self.vertices[np.repeat(kept, sizes)],
            offsets=np.concatenate([[0], np.cumsum(sizes[which])]),
            weights=self.weights[which],
            owners=self.owners[which],
        )


def axes_of(conductors: Sequence[Conductor]) -> Filaments:
    """Conductors as their axes: one filament each."""
    sizes = [len(conductor.path) for conductor in conductors]
    return Filaments(
        vertices=np.concatenate([conductor.path for conductor in conductors]),
        offsets=np.concatenate([[0], np.cumsum(sizes)]),
        weights=np.ones(len(sizes)),
        owners=np.arange(len(sizes)),
    )


def orders_of(conductors: Sequence[Conductor], legs: Legs, points: Floats) -> Orders:
    """Numbers of filaments for each leg and tile of points.

    Parameters
    ----------
    legs : Legs
        Of the conductors.
    points : (n, 3) float64
        In the order in which they are tiled. [m]

    Returns
    -------
    (tiles, legs, 2) int16
        Bars: along width and thickness. Round: rings and filaments per ring; 1, 1 is
        the axis.
    """
    exact_within = 4.0 * legs.sides.max(axis=1, initial=0.0)
    distances = _distances(legs.table, exact_within, points)
    orders = np.ones((len(distances), len(legs.table), 2), np.int16)
    for members in _members(conductors).values():
        where = _legs_among(legs, members)
        group = _Group(
            distances[:, where, 0],
            distances[:, where, 1],
            legs.sides[where],
            legs.round[where],
            any(_short_loop(conductors[i]) for i in members),
        )
        orders[:, where] = _group_orders(group)
    return orders


def _distances(table: Floats, exact_within: Floats, points: Floats) -> Floats:
    """`tile_distances`, by several threads where there is much to measure."""
    count = -(-len(points) // TILE)
    step = count if count * len(table) < _FEW else max(1, count // 16)
    if step == count:
        return tile_distances(table, exact_within, points, TILE, NEAREST)
    out = np.empty((count, len(table), 2))

    def run(part: int) -> None:
        own = points[part * step * TILE : (part + 1) * step * TILE]
        found = tile_distances(table, exact_within, own, TILE, NEAREST)
        out[part * step : (part + 1) * step] = found

    on_pool(-(-count // step), run)
    return out


def far_orders(conductors: Sequence[Conductor], legs: Legs) -> tuple[Orders, Floats]:
    """Numbers of filaments that will do everywhere from a distance on.

    Returns
    -------
    (legs, 2) int16
        As `orders_of`, for each leg.
    (legs,) float64
        The distance, of the surfaces of all legs of the group. [m]
    """
    orders = np.ones((len(legs.table), 2), np.int16)
    needs = np.zeros(len(legs.table))
    for members in _members(conductors).values():
        where = _legs_among(legs, members)
        sides, is_round = legs.sides[where], legs.round[where]
        short = any(_short_loop(conductors[i]) for i in members)
        widest = float(sides.max())
        need = _FAR_AWAY * widest
        distances = np.repeat(need * 2.0 ** np.arange(16)[:, None], len(where), axis=1)
        group = _Group(distances, distances, sides, is_round, short)
        if group.alike and not short:
            # Round to be on the safe side: rules compare rounded numbers.
            axis = _ROUND_AXIS * widest if is_round[0] else _SAME_SECTION[0] * widest
            needs[where] = 1.0001 * axis
            continue
        orders[where] = _own_orders(group).max(axis=0)
        needs[where] = need
    return orders, needs


def _members(conductors: Sequence[Conductor]) -> dict[str, list[int]]:
    found: dict[str, list[int]] = {}
    for i, conductor in enumerate(conductors):
        found.setdefault(conductor.group, []).append(i)
    return found


def _legs_among(legs: Legs, members: Sequence[int]) -> Integers:
    return np.concatenate(
        [np.arange(legs.first[i], legs.first[i + 1]) for i in members]
    )


@dataclass(frozen=True, eq=False)
class _Group:
    """Legs (k) of a group, with distances of tiles to surfaces and to axis ends."""

    near: Floats
    end: Floats
    sides: Floats
    round: NDArray[np.bool_]
    short_loop: bool

    @property
    def alike(self) -> bool:
        """Whether all legs have the same section."""
        return bool((self.sides == self.sides[0]).all() and len(set(self.round)) == 1)


@lru_cache(maxsize=32_768)
def _short_loop(conductor: Conductor) -> bool:
    path, shape = conductor.path, conductor.shape
    if not np.allclose(path[0], path[-1], rtol=0, atol=1e-6):
        return False
    side = shape.width if isinstance(shape, Bar) else shape.diameter
    length = float(np.linalg.norm(np.diff(path, axis=0), axis=1).sum())
    return length < _SHORT_LOOP * side


def _group_orders(group: _Group) -> Orders:
    if not group.alike or group.short_loop:
        return _own_orders(group)
    same = _round_alike(group) if group.round[0] else _bars_alike(group)
    orders = np.repeat(same[:, None, :], len(group.sides), axis=1)
    # Nothing is cheaper than one filament for each leg.
    open_tiles = np.flatnonzero((same != 1).any(axis=1))
    if not len(open_tiles):
        return orders
    there = replace(group, near=group.near[open_tiles], end=group.end[open_tiles])
    own, same = _own_orders(there), same[open_tiles]
    cost_own = own.astype(np.int64).prod(axis=2).sum(axis=1)
    cost_same = same.astype(np.int64).prod(axis=1) * len(group.sides)
    # 0 says that the same number for all is not enough.
    dearer = (cost_same == 0) | (cost_same > cost_own)
    orders[open_tiles[dearer]] = own[dearer]
    return orders


def _bars_alike(group: _Group) -> Orders:
    """(tiles, 2) numbers for all legs of equal bars; 0 where there is none."""
    ratio = group.near.min(axis=1)[:, None] / group.sides[0]
    enough = ratio[:, :, None] >= _SAME_SECTION
    number = np.where(enough.any(axis=2), enough.argmax(axis=2) + 1, 0)
    return number.astype(np.int16)


def _round_alike(group: _Group) -> Orders:
    """(tiles, 2) ones where the axes of equal round conductors are enough, else 0."""
    radius = group.sides[0, 0] / 2
    beside = np.minimum(1.0, (group.near + radius) / group.end)
    error = (2.5 * (radius / group.end) ** 2 * beside).max(axis=1)
    one = (error <= _TOLERANCE).astype(np.int16)
    return np.stack([one, one], axis=1)


def _own_orders(group: _Group) -> Orders:
    """(tiles, k, 2) numbers that make each leg exact enough by itself."""
    thin = group.sides.min()
    margin = 1.0 + group.near.min(axis=1)[:, None] / thin
    digits = np.log(4.0 * margin**2 / _TOLERANCE)
    near, end = group.near, group.end
    x = 2.0 * near[:, :, None] / group.sides
    number = digits[:, :, None] / (2.0 * np.arcsinh(x))
    one = (2.0 / x) ** 2 / 6.0 * margin[:, :, None] <= _TOLERANCE / 2
    number[one & (not group.short_loop)] = 1.0
    if group.round.any():
        radius = group.sides[:, 0] / 2
        beside = np.minimum(1.0, (near + radius) / end)
        axis = (radius / end) ** 2 / 4.0 * beside * margin <= _TOLERANCE / 2
        axis &= not group.short_loop
        away = np.maximum(near, end - radius) / radius
        rings = digits / (2.0 * np.arccosh(2.0 * (1.0 + away) ** 2 - 1.0))
        per_ring = np.maximum(6.0, digits / np.log1p(near / radius))
        of_round = np.stack(
            [np.where(axis, 1.0, rings), np.where(axis, 1.0, per_ring)], axis=2
        )
        number = np.where(group.round[:, None], of_round, number)
    step = np.searchsorted(_LADDER, number - 1e-9)
    orders: Orders = _LADDER[np.minimum(step, len(_LADDER) - 1)]
    return orders


@lru_cache(maxsize=256)
def _gauss(n: int) -> tuple[Floats, Floats]:
    nodes, weights = np.polynomial.legendre.leggauss(n)
    return nodes, weights / 2.0


@lru_cache(maxsize=128)
def section_points(
    shape: Round | Bar, first: int, second: int
) -> tuple[Floats, Floats]:
    """Offsets (k, 2) in the section [m] and weights (k,) of sum 1."""
    if isinstance(shape, Bar):
        a, wa = _gauss(first)
        b, wb = _gauss(second)
        across, up = np.meshgrid(a * shape.width / 2, b * shape.thickness / 2)
        weights = np.outer(wb, wa)
        return np.stack([across.ravel(), up.ravel()], axis=1), weights.ravel()
    if second == 1:
        return np.zeros((1, 2)), np.ones(1)
    # Even weights in the square of the radius are even current; alternate rings are
    # turned by half a step.
    radius = shape.diameter / 2
    nodes, weights = _gauss(first)
    radii = radius * np.sqrt((nodes + 1.0) / 2.0)
    turns = np.arange(second) + 0.5 * (np.arange(first)[:, None] % 2)
    angles = 2.0 * np.pi / second * turns
    offsets = radii[:, None, None] * np.stack([np.cos(angles), np.sin(angles)], axis=2)
    return offsets.reshape(-1, 2), np.repeat(weights / second, second)


def filaments_of(
    conductors: Sequence[Conductor], orders: Sequence[Orders]
) -> Filaments:
    """Filaments of conductors with the numbers (legs, 2) for each one's legs."""
    return joined([_filaments(*one) for one in zip(conductors, orders, strict=True)])


def joined(parts: Sequence[Filaments]) -> Filaments:
    """Filaments of several conductors, each made by itself, in their order."""
    counts = [len(part.weights) for part in parts]
    sizes = np.concatenate([np.diff(part.offsets) for part in parts])
    return Filaments(
        vertices=np.concatenate([part.vertices for part in parts]),
        offsets=np.concatenate([[0], np.cumsum(sizes)]),
        weights=np.concatenate([part.weights for part in parts]),
        owners=np.repeat(np.arange(len(parts)), counts),
    )


def _filaments(conductor: Conductor, numbers: Orders) -> Filaments:
    """Of one conductor: legs in a row with the same numbers share their polylines."""
    changes = np.flatnonzero((numbers[1:] != numbers[:-1]).any(axis=1)) + 1
    bounds = [0, *changes.tolist(), len(numbers)]
    blocks: list[Floats] = []
    sizes: list[int] = []
    weights: list[Floats] = []
    for start, stop in pairwise(bounds):
        first, second = numbers[start].tolist()
        offsets, shares = section_points(conductor.shape, first, second)
        path = conductor.path[start : stop + 1]
        axes = conductor.axes[start : stop + 1].transpose(1, 0, 2)
        shifts = (offsets @ axes.reshape(2, -1)).reshape(len(offsets), *path.shape)
        blocks.append((path + shifts).reshape(-1, 3))
        sizes += [stop + 1 - start] * len(shares)
        weights.append(shares)
    return Filaments(
        vertices=np.concatenate(blocks),
        offsets=np.concatenate([[0], np.cumsum(sizes)]),
        weights=np.concatenate(weights),
        owners=np.zeros(len(sizes), np.int64),
    )
