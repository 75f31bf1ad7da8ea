"""Straight legs of conductors as rows of one table, and distances to their surfaces.

A bar's leg is its rectangle swept between the planes that `Conductor.axes` spans at
both ends (mitre planes at bends). A round conductor's leg is a cylinder with round
joints. A leg over which the section twists counts as round, about its corners.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.kernel import Floats, Integers
from engine.runs import Bar

# Columns of the table.
_START, _TANGENT, _WIDTH, _THICKNESS = 0, 3, 6, 9
_LENGTH, _HALF_WIDTH, _HALF_THICKNESS, _FIRST, _LAST, _ROUND = 12, 13, 14, 15, 17, 19
_COLUMNS = 20

_BLOCK = 16  # points that share one sphere
_MANY = 256  # points that share a larger one

#: Times the distance within which legs are measured exactly: from there on tiles are
#: measured as a whole. At 48 sides one filament is enough for any equal sections.
_FAR = 12.0


@dataclass(frozen=True, eq=False)
class Legs:
    """Every straight leg of some conductors, in order.

    Attributes
    ----------
    table : (k, 20) float64
        Frame, size and end planes of each leg, for the compiled functions.
    conductor : (k,) int64
        Index of each leg's conductor.
    first : (m + 1,) int64
        Conductor i has the legs first[i] to first[i + 1].
    sides : (k, 2) float64
        Width and thickness, or the diameter twice. [m]
    round : (k,) bool
        Whether the leg's conductor is round.
    """

    table: Floats
    conductor: Integers
    first: Integers
    sides: Floats
    round: NDArray[np.bool_]


def sides_of(conductor: Conductor) -> tuple[float, float]:
    """Width and thickness of the section, or its diameter twice. [m]"""
    shape = conductor.shape
    if isinstance(shape, Bar):
        return shape.width, shape.thickness
    return shape.diameter, shape.diameter


def legs_of(conductors: Sequence[Conductor]) -> Legs:
    """Tabulate the legs of the conductors; of the same ones, once."""
    return _legs_of(tuple(conductors))


@lru_cache(maxsize=8)
def _legs_of(conductors: tuple[Conductor, ...]) -> Legs:
    tables = [_table(conductor) for conductor in conductors]
    counts = [len(table) for table in tables]
    sides = np.array([sides_of(c) for c in conductors]).reshape(-1, 2)
    is_round = np.array([not isinstance(c.shape, Bar) for c in conductors], bool)
    owner = np.repeat(np.arange(len(conductors)), counts)
    return Legs(
        table=np.concatenate([np.zeros((0, _COLUMNS)), *tables]),
        conductor=owner,
        first=np.concatenate([[0], np.cumsum(counts, dtype=np.int64)]),
        sides=sides[owner],
        round=is_round[owner],
    )


def legs_among(legs: Legs, which: Integers) -> Legs:
    """The legs of some of the conductors, by their positions."""
    counts = legs.first[which + 1] - legs.first[which]
    first = np.concatenate([[0], np.cumsum(counts)])
    rows = np.repeat(legs.first[which] - first[:-1], counts) + np.arange(first[-1])
    return Legs(
        table=legs.table[rows],
        conductor=np.repeat(np.arange(len(which)), counts),
        first=first,
        sides=legs.sides[rows],
        round=legs.round[rows],
    )


@lru_cache(maxsize=32_768)
def _table(conductor: Conductor) -> Floats:
    path, axes = conductor.path, conductor.axes
    steps = np.diff(path, axis=0)
    lengths = np.linalg.norm(steps, axis=1)
    tangents = steps / lengths[:, None]
    table = np.zeros((len(steps), _COLUMNS))
    table[:, _START : _START + 3] = path[:-1]
    table[:, _TANGENT : _TANGENT + 3] = tangents
    table[:, _LENGTH] = lengths
    width, thickness = sides_of(conductor)
    table[:, _HALF_WIDTH] = width / 2
    table[:, _HALF_THICKNESS] = thickness / 2
    if not isinstance(conductor.shape, Bar):
        table[:, _ROUND] = 1
        return table
    along = np.einsum("ikx,ix->ik", axes[:-1], tangents)
    ahead = np.einsum("ikx,ix->ik", axes[1:], tangents)
    frames = axes[:-1] - along[:, :, None] * tangents[:, None, :]
    ends = axes[1:] - ahead[:, :, None] * tangents[:, None, :]
    table[:, _FIRST : _FIRST + 2] = along
    table[:, _LAST : _LAST + 2] = ahead
    # Rounding of long routes is far below; a turn of the section is far above.
    twisted = np.abs(frames - ends).max(axis=(1, 2)) > 1e-6
    table[:, _WIDTH : _WIDTH + 3] = frames[:, 0]
    table[:, _THICKNESS : _THICKNESS + 3] = frames[:, 1]
    table[twisted, _ROUND] = 1
    table[twisted, _HALF_WIDTH] = np.hypot(width, thickness) / 2
    return table


@compiled
def leg_distance(leg: Floats, x: float, y: float, z: float) -> float:
    dx, dy, dz = x - leg[0], y - leg[1], z - leg[2]
    along = dx * leg[3] + dy * leg[4] + dz * leg[5]
    if leg[_ROUND] > 0:
        along = min(max(along, 0.0), leg[_LENGTH])
        dx -= along * leg[3]
        dy -= along * leg[4]
        dz -= along * leg[5]
        beyond = np.sqrt(dx * dx + dy * dy + dz * dz) - leg[_HALF_WIDTH]
        return max(float(beyond), 0.0)
    a = dx * leg[6] + dy * leg[7] + dz * leg[8]
    b = dx * leg[9] + dy * leg[10] + dz * leg[11]
    near_a = min(max(a, -leg[_HALF_WIDTH]), leg[_HALF_WIDTH])
    near_b = min(max(b, -leg[_HALF_THICKNESS]), leg[_HALF_THICKNESS])
    low = near_a * leg[15] + near_b * leg[16]
    high = leg[_LENGTH] + near_a * leg[17] + near_b * leg[18]
    near_along = max(min(along, high), low)
    a -= near_a
    b -= near_b
    along -= near_along
    return float(np.sqrt(a * a + b * b + along * along))


@compiled
def _spheres(points: Floats) -> Floats:
    """Centre and radius around each `_BLOCK` points in order."""
    n = points.shape[0]
    out = np.empty(((n + _BLOCK - 1) // _BLOCK, 4))
    for j in range(out.shape[0]):
        squares = 0.0
        for axis in range(3):
            low = high = points[j * _BLOCK, axis]
            for i in range(j * _BLOCK, min(n, (j + 1) * _BLOCK)):
                low = min(low, points[i, axis])
                high = max(high, points[i, axis])
            out[j, axis] = (low + high) / 2
            squares += (high - low) ** 2
        out[j, 3] = np.sqrt(squares) / 2
    return out


@compiled
def _around(points: Floats) -> tuple[float, float, float, float]:
    """Centre and radius of a sphere around all the points."""
    middle = np.empty(3)
    squares = 0.0
    for axis in range(3):
        low = points[:, axis].min()
        high = points[:, axis].max()
        middle[axis] = (low + high) / 2
        squares += (high - low) ** 2
    return middle[0], middle[1], middle[2], np.sqrt(squares) / 2


@compiled
def _skew(leg: Floats) -> float:
    """By how much more than its place moves a leg's distance may change. [m]

    Beside a mitre plane of the sharpest bend a bar's distance changes by the slope of
    the plane, 2.41, over its width and thickness.
    """
    if leg[_ROUND] > 0:
        return 0.0
    return 6.0 * float(leg[_HALF_WIDTH] + leg[_HALF_THICKNESS])


@compiled
def nearest_surface(table: Floats, points: Floats, out: Floats) -> None:
    """Write the distance of each point to the nearest leg's surface, 0 inside.

    Quick when points that follow each other are neighbours: then most legs are too far
    from a sphere around many points to be the nearest to any, and most of the others
    from spheres around some of them.
    """
    n, m = points.shape[0], table.shape[0]
    kept, lowest = np.empty(m, np.int64), np.empty(m)
    for start in range(0, n, _MANY):
        own = points[start : start + _MANY]
        spheres = _spheres(own)
        x, y, z, radius = _around(own)
        highest = np.inf
        for k in range(m):
            d = leg_distance(table[k], x, y, z)
            reach = radius + _skew(table[k])
            lowest[k] = d - reach
            highest = min(highest, d + reach)
        count = 0
        for k in range(m):
            if lowest[k] <= highest:
                kept[count] = k
                count += 1
        for j in range(spheres.shape[0]):
            first = start + j * _BLOCK
            last = min(n, first + _BLOCK)
            _nearest_of(table, kept[:count], spheres[j], points[first:last],
                        lowest, out[first:last])  # fmt: skip


@compiled
def _nearest_of(
    table: Floats,
    kept: Integers,
    sphere: Floats,
    points: Floats,
    lowest: Floats,
    out: Floats,
) -> None:
    """Of the legs that are kept, at the points of one sphere; `lowest` is scratch."""
    out[:] = np.inf
    highest = np.inf
    for c in range(len(kept)):
        leg = table[kept[c]]
        d = leg_distance(leg, sphere[0], sphere[1], sphere[2])
        reach = sphere[3] + _skew(leg)
        lowest[c] = d - reach
        highest = min(highest, d + reach)
    for c in range(len(kept)):
        if lowest[c] > highest:
            continue
        leg = table[kept[c]]
        for i in range(len(points)):
            d = leg_distance(leg, points[i, 0], points[i, 1], points[i, 2])
            out[i] = min(out[i], d)


@compiled
def any_nearer(table: Floats, limits: Floats, points: Floats) -> NDArray[np.bool_]:
    """Whether some leg's surface is nearer to the point than that leg's limit."""
    out = np.zeros(points.shape[0], np.bool_)
    for i in range(points.shape[0]):
        for k in range(table.shape[0]):
            d = leg_distance(table[k], points[i, 0], points[i, 1], points[i, 2])
            if d < limits[k] or d == 0.0:
                out[i] = True
                break
    return out


@compiled
def _end_distance(leg: Floats, x: float, y: float, z: float) -> float:
    dx, dy, dz = x - leg[0], y - leg[1], z - leg[2]
    first = dx * dx + dy * dy + dz * dz
    dx -= leg[_LENGTH] * leg[3]
    dy -= leg[_LENGTH] * leg[4]
    dz -= leg[_LENGTH] * leg[5]
    return float(np.sqrt(min(first, dx * dx + dy * dy + dz * dz)))


@compiled
def tile_distances(
    table: Floats, exact_within: Floats, points: Floats, tile: int, floor: float
) -> Floats:
    """Least distances of the points of each tile to each leg.

    Parameters
    ----------
    table : (k, 20) float64
        Legs.
    exact_within : (k,) float64
        Beyond it a lower bound, by spheres around some points, will do. [m]
    points : (n, 3) float64
        Tile i holds the points from i·tile on. [m]
    tile : int
        A multiple of 16.
    floor : float
        Nothing nearer is reported; points inside a leg do not count. [m]

    Returns
    -------
    (tiles, k, 2) float64
        To the leg's surface, and to the nearer end of its axis. [m]
    """
    n = points.shape[0]
    tiles = (n + tile - 1) // tile
    spheres = _spheres(points)
    blocks = tile // _BLOCK
    out = np.full((tiles, table.shape[0], 2), np.inf)
    far = np.zeros((tiles, table.shape[0]), np.bool_)
    for j in range(tiles):
        x, y, z, radius = _around(points[j * tile : (j + 1) * tile])
        for k in range(table.shape[0]):
            near = leg_distance(table[k], x, y, z) - radius
            if near < _FAR * exact_within[k] or near < 2 * radius:
                continue
            # So far that how far no longer matters: one bound for the whole tile.
            far[j, k] = True
            out[j, k, 0] = near
            out[j, k, 1] = _end_distance(table[k], x, y, z) - radius
    for j in range(spheres.shape[0]):
        x, y, z, radius = spheres[j, 0], spheres[j, 1], spheres[j, 2], spheres[j, 3]
        for k in range(table.shape[0]):
            if far[j // blocks, k]:
                continue
            nearest = out[j // blocks, k]
            near = leg_distance(table[k], x, y, z) - radius
            end = _end_distance(table[k], x, y, z) - radius
            # The bound is at least half of the distance, so that no tile pays for it.
            if near >= max(exact_within[k], 2 * radius):
                nearest[0] = min(nearest[0], near)
                nearest[1] = min(nearest[1], end)
                continue
            for i in range(j * _BLOCK, min(n, (j + 1) * _BLOCK)):
                px, py, pz = points[i, 0], points[i, 1], points[i, 2]
                near = leg_distance(table[k], px, py, pz)
                if near > 0.0:
                    nearest[0] = min(nearest[0], near)
                    nearest[1] = min(nearest[1], _end_distance(table[k], px, py, pz))
    for j in range(tiles):
        for k in range(table.shape[0]):
            if out[j, k, 0] == np.inf:
                # All points lie inside the leg; nothing depends on them.
                x, y, z = points[j * tile]
                out[j, k, 0] = floor
                out[j, k, 1] = _end_distance(table[k], x, y, z)
            for what in range(2):
                out[j, k, what] = max(out[j, k, what], floor)
    return out
