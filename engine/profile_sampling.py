"""Where a profile is sampled: dense where the field bends, at surfaces and extrema."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine.errors import UserError
from engine.sampling import on_line

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]
Bools = NDArray[np.bool_]

#: Pieces of the whole line before anything is known of the field.
_PIECES = 64
#: A piece is at most this part of the distance to the nearest conductor.
_PART_OF_DISTANCE = 0.5
#: Shortest piece. [m]
FINEST = 1e-3
#: A sample may differ this much from the straight line between its neighbours.
_BEND = 0.005
#: Values below this part of a curve's largest need no detail.
_DETAIL = 1e-3
_MOST_SAMPLES = 4000
_ROUNDS = 16

#: Rises and falls smaller than this are the field's own accuracy, no extrema.
_REVERSAL = 0.005

_GOLDEN = (np.sqrt(5.0) - 1.0) / 2.0


class Line:
    """A polyline with the distance along it.

    Parameters
    ----------
    path : (v, 3) float
        At least two vertices, not all in one place. [m]

    Raises
    ------
    UserError
        When it is no longer than a millimetre.
    ValueError
        When it has another shape or is not finite.
    """

    def __init__(self, path: ArrayLike) -> None:
        vertices = np.asarray(path, np.float64)
        if vertices.ndim != 2 or vertices.shape[0] < 2 or vertices.shape[1] != 3:
            raise ValueError("a line needs (n, 3) vertices, n at least 2")
        if not np.all(np.isfinite(vertices)):
            raise ValueError("the vertices of a line must be finite")
        steps = np.linalg.norm(np.diff(vertices, axis=0), axis=1)
        if not np.sum(steps) > FINEST:
            raise UserError(
                "The line has no length: all its vertices lie in one place. Draw it "
                "again, or give its vertices places that are apart."
            )
        kept = np.concatenate([[True], steps > 0])
        self.vertices: Floats = vertices[kept]
        self.stations: Floats = np.concatenate([[0.0], np.cumsum(steps[steps > 0])])

    @property
    def length(self) -> float:
        """[m]"""
        return float(self.stations[-1])

    def points(self, along: Floats) -> Floats:
        """(n, 3) places at the distances (n,) from the line's start. [m]"""
        return np.column_stack(
            [np.interp(along, self.stations, axis) for axis in self.vertices.T]
        )

    def pieces(self) -> Floats:
        """(n,) distances of the first samples, every vertex among them. [m]"""
        along: Floats = on_line(self.vertices, self.length / _PIECES).along
        return along


@dataclass(frozen=True, eq=False)
class Looked:
    """What is known at samples of a line.

    Attributes
    ----------
    values : (k, n) float
        Of k curves. [T]
    masked : (h, n) bool
        Whether nobody is there, at each height.
    distances : (n,) float
        To the nearest conductor's surface, the least over the heights. [m]
    """

    values: Floats
    masked: Bools
    distances: Floats


#: Looks at distances (n,) along the line.
Look = Callable[[Floats], Looked]


def refined(line: Line, look: Look) -> Floats:
    """(n,) distances so close that straight lines between them show every curve. [m]

    Between neighbours a curve bends by less than half a per cent of its value, and no
    piece is longer than half the distance to the nearest conductor, so that nothing
    is stepped over, down to a millimetre.
    """
    along = line.pieces()
    known = look(along)
    for _ in range(_ROUNDS):
        split = _to_split(along, known)
        if not np.any(split) or len(along) + np.sum(split) > _MOST_SAMPLES:
            break
        middles = (along[:-1][split] + along[1:][split]) / 2
        fresh = look(middles)
        order = np.argsort(np.concatenate([along, middles]), kind="stable")
        along = np.concatenate([along, middles])[order]
        known = Looked(
            np.concatenate([known.values, fresh.values], axis=1)[:, order],
            np.concatenate([known.masked, fresh.masked], axis=1)[:, order],
            np.concatenate([known.distances, fresh.distances])[order],
        )
    return along


def _to_split(along: Floats, known: Looked) -> Bools:
    """(n − 1,) whether each piece needs a sample in its middle."""
    lengths = np.diff(along)
    nearer = np.minimum(known.distances[:-1], known.distances[1:])
    split = lengths > _PART_OF_DISTANCE * nearer
    split |= np.any(known.masked[:, :-1] != known.masked[:, 1:], axis=0)
    if len(along) > 2:
        part = lengths[:-1] / (lengths[:-1] + lengths[1:])
        v = known.values
        straight = v[:, :-2] + part * (v[:, 2:] - v[:, :-2])
        floor = _DETAIL * np.max(v, axis=1, initial=0.0)[:, None]
        off = np.abs(v[:, 1:-1] - straight) > _BEND * np.maximum(v[:, 1:-1], floor)
        bent = np.any(off, axis=0)
        split[:-1] |= bent
        split[1:] |= bent
    found: Bools = split & (lengths > 2 * FINEST)
    return found


def reversals(values: Floats, counted: Bools) -> list[tuple[int, bool]]:
    """Samples where a curve turns, and whether it is largest there.

    The ends of the curve and of its counted stretches are left out, and so are rises
    and falls of less than half a per cent.

    Examples
    --------
    >>> reversals(np.array([1.0, 3, 2, 2.001, 2, 4]), np.ones(6, bool))
    [(1, True), (4, False)]
    """
    found: list[tuple[int, bool]] = []
    edges = np.flatnonzero(np.diff(np.concatenate([[False], counted, [False]])))
    for first, stop in edges.reshape(-1, 2):
        found += _reversals(values, int(first), int(stop))
    return found


def _reversals(values: Floats, first: int, stop: int) -> list[tuple[int, bool]]:
    """As `reversals`, in one counted stretch of samples."""
    turns: list[tuple[int, bool]] = []
    high = low = first
    rising: bool | None = None
    for k in range(first, stop):
        if rising is not False and values[k] >= values[high]:
            high = k
        if rising is not True and values[k] <= values[low]:
            low = k
        if rising is not False and values[k] < values[high] * (1 - _REVERSAL):
            turns.append((high, True))
            rising, low = False, k
        elif rising is not True and values[k] > values[low] * (1 + _REVERSAL):
            turns.append((low, False))
            rising, high = True, k
    # Whether a flat start was a first turn shows only later: it is an end.
    return [turn for turn in turns if first < turn[0] < stop - 1]


def bisected(
    low: Floats,
    high: Floats,
    is_low: Callable[[Floats, Integers], Bools],
    width: float,
) -> tuple[Floats, Floats]:
    """Narrow (k,) intervals, at whose ends a statement differs, to a width.

    Parameters
    ----------
    low, high : (k,) float
        `is_low` holds at `low` and not at `high`, which may be smaller.
    is_low
        Of places (j,) in the intervals of the indices (j,).
    width
        The largest that may remain.
    """
    low, high = low.copy(), high.copy()
    while True:
        open_ = np.flatnonzero(np.abs(high - low) > width)
        if not len(open_):
            return low, high
        middle = (low[open_] + high[open_]) / 2
        holds = is_low(middle, open_)
        low[open_[holds]] = middle[holds]
        high[open_[~holds]] = middle[~holds]


def peaked(
    low: Floats,
    high: Floats,
    value: Callable[[Floats, Integers], Floats],
    width: float,
) -> Floats:
    """(k,) places of the largest value in intervals with one maximum each.

    Golden section search; `value` of places (j,) in the intervals of the indices (j,).
    """
    low, high = low.copy(), high.copy()
    indices = np.arange(len(low))
    left, right = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
    at_left, at_right = value(left, indices), value(right, indices)
    while len(low) and np.max(high - low) > width:
        down = at_left >= at_right
        high, low = np.where(down, right, high), np.where(down, low, left)
        probe = np.where(down, high - _GOLDEN * (high - low),
                         low + _GOLDEN * (high - low))  # fmt: skip
        fresh = value(probe, indices)
        left, right = np.where(down, probe, right), np.where(down, left, probe)
        at_left, at_right = (
            np.where(down, fresh, at_right),
            np.where(down, at_left, fresh),
        )
    return (low + high) / 2
