"""Samples cut into tiles, and their computation on a pool of threads."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from threading import Lock

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.errors import Cancelled, Progress, stop_if
from engine.field.filaments import (
    Filaments,
    Orders,
    axes_of,
    filaments_of,
    joined,
    orders_of,
)
from engine.field.kernel import TILE, Floats, Integers
from engine.field.legs import Legs, legs_of
from engine.field.points import as_points, compact_order
from engine.field.pool import on_pool

#: Tiles times conductors that are done sooner than a thread is started.
_FEW = 400

#: Segments of the filament sets that one request keeps for its next tiles.
_MOST_SEGMENTS = 2_000_000

#: What one tile computes: its filaments, its points, and the rows they have.
Work = Callable[[Filaments, Floats, Integers], None]


@dataclass(frozen=True, eq=False)
class Tiling:
    """Points in compact tiles, with the filament numbers of every leg in each tile.

    Attributes
    ----------
    points : (n, 3) float64
        In the caller's order. [m]
    order : (n,) int64
        Tile j holds the points ``order[j * TILE:(j + 1) * TILE]``.
    orders : (tiles, legs, 2) int16
        See `filaments.orders_of`.
    """

    conductors: tuple[Conductor, ...]
    legs: Legs
    points: Floats
    order: Integers
    orders: Orders

    def numbers(self, tile: int, conductor: int) -> Orders:
        """(legs, 2) filament numbers of one conductor in one tile."""
        first, last = self.legs.first[conductor : conductor + 2]
        return self.orders[tile, first:last]


def tiling_of(conductors: Sequence[Conductor], points: Floats) -> Tiling:
    """Cut the points into tiles and choose the filaments for each."""
    checked = as_points(points)
    order = compact_order(checked)
    legs = legs_of(conductors)
    orders = orders_of(conductors, legs, checked[order])
    return Tiling(tuple(conductors), legs, checked, order, orders)


def over_tiles(
    tiling: Tiling,
    which: Sequence[int],
    work: Work,
    cancelled: Cancelled | None,
    progress: Progress | None,
) -> None:
    """Do the work for every tile, with the filaments of the conductors `which`.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so; it is asked, as `progress` is told, by the caller's
        thread.
    """
    count = len(tiling.orders)
    stop_if(cancelled)
    if count == 0 or not which:
        return
    shared = _SharedFilaments(tiling, which)
    if count * len(which) <= _FEW:
        for tile in range(count):
            rows = tiling.order[tile * TILE : (tile + 1) * TILE]
            work(shared.of(tile), tiling.points[rows], rows)
            stop_if(cancelled)
        if progress is not None:
            progress(1.0, "summing the field")
        return
    batch = max(1, min(8, count // 32))

    def run(index: int) -> None:
        for tile in range(index * batch, min(count, (index + 1) * batch)):
            rows = tiling.order[tile * TILE : (tile + 1) * TILE]
            work(shared.of(tile), tiling.points[rows], rows)

    on_pool(-(-count // batch), run, cancelled, progress)


class _SharedFilaments:
    """Filaments of each conductor by their numbers, which many tiles have in common."""

    def __init__(self, tiling: Tiling, which: Sequence[int]) -> None:
        self._tiling = tiling
        self._which = which
        self._kept: OrderedDict[tuple[int, bytes], Filaments] = OrderedDict()
        self._segments = 0
        self._lock = Lock()
        mine = np.isin(tiling.legs.conductor, np.array(which))
        self._orders = tiling.orders[:, mine]
        # Of each leg, where its conductor stands among `which`.
        self._owner = np.searchsorted(which, tiling.legs.conductor[mine])
        self._axes = axes_of([tiling.conductors[i] for i in which])
        self._last: tuple[bytes, Filaments] | None = None

    def of(self, tile: int) -> Filaments:
        """Filaments of all conductors in one tile."""
        key = self._orders[tile].tobytes()
        # Read once: another thread may put its own there.
        last = self._last
        if last is not None and last[0] == key:
            return last[1]
        made = self._joined(tile)
        self._last = (key, made)
        return made

    def _joined(self, tile: int) -> Filaments:
        """Conductors that are their axes all at once, then the others one by one."""
        refined = self._orders[tile].max(axis=1, initial=1) > 1
        several = np.zeros(len(self._which), bool)
        several[self._owner[refined]] = True
        rest = np.flatnonzero(several)
        if len(rest) == len(several):
            return joined([self._of_one(tile, i) for i in self._which])
        plain = self._axes.only(np.flatnonzero(~several))
        if not len(rest):
            return plain
        other = joined([self._of_one(tile, self._which[k]) for k in rest.tolist()])
        return Filaments(
            vertices=np.concatenate([plain.vertices, other.vertices]),
            offsets=np.concatenate(
                [plain.offsets, plain.offsets[-1] + other.offsets[1:]]
            ),
            weights=np.concatenate([plain.weights, other.weights]),
            owners=np.concatenate([plain.owners, rest[other.owners]]),
        )

    def _of_one(self, tile: int, conductor: int) -> Filaments:
        numbers = self._tiling.numbers(tile, conductor)
        key = (conductor, numbers.tobytes())
        with self._lock:
            found = self._kept.get(key)
            if found is not None:
                self._kept.move_to_end(key)
                return found
        made = filaments_of([self._tiling.conductors[conductor]], [numbers])
        with self._lock:
            if key not in self._kept:
                self._kept[key] = made
                self._segments += made.segments
            while self._segments > _MOST_SEGMENTS and len(self._kept) > 1:
                _, dropped = self._kept.popitem(last=False)
                self._segments -= dropped.segments
        return made


def complex_currents(
    conductors: Sequence[Conductor], currents: NDArray[np.complex128]
) -> NDArray[np.complex128]:
    """Check currents (c, m) against the conductors (m). [A]

    Raises
    ------
    ValueError
        When the shape is another or a current is not finite.
    """
    array = np.asarray(currents, dtype=np.complex128)
    if array.ndim != 2 or array.shape[1] != len(conductors):
        raise ValueError(
            f"currents must be (components, {len(conductors)}), not {array.shape}"
        )
    if not np.isfinite(array).all():
        raise ValueError("currents must be finite")
    return array
