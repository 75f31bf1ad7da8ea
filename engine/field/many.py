"""Flux density at many points of many conductors: far ones interpolated in boxes.

The points are in nested boxes. At each, from the largest on, the bundles of legs that
are far enough for what is still allowed are summed at its Chebyshev nodes only; those
that are left go on to the boxes within, and in the smallest to the points themselves.
The cost grows with points plus conductors, not with their product.

What interpolation is wrong by has a proven bound (`nested_boxes`), up to rounding, of
the deviation from the sum over the same filaments. It is held below `PRECISION` of the
resultant found at every single point, for each component of the currents by itself, so
that it holds for whatever components combine to. Points where it is not, because less
is there than was expected, are done again with less allowed, in the end without any
interpolation.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from threading import Lock

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.errors import Cancelled, Progress
from engine.field.filaments import orders_of
from engine.field.kernel import Floats, Integers
from engine.field.leg_bundles import (
    Bundles,
    bundles_of,
    filaments_of_legs,
    gathered,
    too_near,
)
from engine.field.legs import legs_among
from engine.field.nested_boxes import (
    Box,
    frame_of,
    interpolation_errors,
)
from engine.field.points import as_points, compact_order
from engine.field.pool import on_pool
from engine.field.segments import BLOCK, sum_segments
from engine.field.tiles import complex_currents

Complexes = NDArray[np.complex128]

#: Of the resultant of each component, what interpolation may be wrong by: a fifth of
#: what the engine allows altogether.
PRECISION = 2e-4

#: Sizes from which it pays: legs, points, and both together; it takes 0.7 of the direct
#: sum's time at 4 000 legs, a half at 8 000, an eighth at 32 000.
FEWEST_LEGS, FEWEST_POINTS, FEWEST_PAIRS = 5_000, 1_024, 10_000_000

#: Points of a box that is not divided: two blocks of the kernel.
_LEAF = 2 * BLOCK
#: Of what is still allowed, what one box may use up.
_SHARE = 0.3
#: Places at which the field is looked at beforehand, to know what may be allowed.
_SAMPLES = 64
#: Times that points are done again before nothing is interpolated for them.
_ROUNDS = 3
#: Boxes that are enough to keep all threads busy until the end.
_ENOUGH = 64


@dataclass(frozen=True, eq=False)
class Interpolated:
    """Flux density and how far it may be from the sum over the same filaments.

    Attributes
    ----------
    b : (c, n, 3) complex
        RMS phasors. [T]
    bound : (c, n) float
        Of the length of the deviation of the three phasors together. [T]
    pairs : int
        Segment-point pairs that were summed, nodes and points.
    """

    b: Complexes
    bound: Floats
    pairs: int


def pays(conductors: Sequence[Conductor], count: int) -> bool:
    """Whether `count` points are enough, and the conductors."""
    if count < FEWEST_POINTS:
        return False
    legs = sum(len(conductor.path) - 1 for conductor in conductors)
    return legs >= FEWEST_LEGS and legs * count >= FEWEST_PAIRS


def interpolated_flux_density(
    conductors: Sequence[Conductor],
    currents: Complexes,
    points: Floats,
    *,
    precision: float = PRECISION,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Interpolated:
    """Flux-density phasors with far conductors interpolated.

    Parameters
    ----------
    conductors, currents, points, cancelled, progress
        As `sums.flux_density`.
    precision : float
        Largest bound, of each component's resultant at each point. [-]

    Raises
    ------
    ValueError
        When an array has another shape or is not finite.
    ComputationCancelled
        When `cancelled` says so.
    """
    checked, places = complex_currents(conductors, currents), as_points(points)
    if not precision > 0:
        raise ValueError(f"precision must be above 0, not {precision}")
    b = np.zeros((len(checked), len(places), 3), np.complex128)
    bound = np.zeros((len(checked), len(places)))
    if not len(places) or not checked.any():
        return Interpolated(b, bound, 0)
    work = _Work(_bundles(tuple(conductors), checked), places, precision, b, bound)
    rows = work.order
    expected = work.looked_at()
    for turn in range(_ROUNDS + 1):
        if turn == _ROUNDS:
            expected = np.zeros_like(expected)
        work.fill(rows, expected, cancelled, progress)
        sizes = _sizes(b[:, rows])
        bad = (bound[:, rows] > precision * sizes).any(axis=0)
        rows = rows[bad]
        if not len(rows):
            break
        expected = np.zeros_like(expected)
        expected[:, rows] = 0.7 * sizes[:, bad]
    return Interpolated(b, bound, work.pairs)


_kept: list[tuple[tuple[Conductor, ...], bytes, Bundles]] = []
_lock = Lock()


def _bundles(conductors: tuple[Conductor, ...], currents: Complexes) -> Bundles:
    """Of the last conductors and currents, once: a map asks many times."""
    key = currents.tobytes()
    with _lock:
        for known, own, made in _kept:
            if own == key and known == conductors:
                return made
    made = bundles_of(conductors, currents)
    with _lock:
        _kept[:] = [(conductors, key, made)]
    return made


@dataclass(frozen=True, eq=False)
class _Open:
    """A box still to be done.

    Attributes
    ----------
    near : (k,) int
        Bundles that no box around it has taken.
    around : Box or None
        The next larger one, with `values` (2 c, 3, size) at its nodes. [T]
    bound : (c,) float
        What those are wrong by. [T]
    """

    box: Box
    near: Integers
    around: Box | None
    values: Floats
    bound: Floats


class _Work:
    """All that the boxes have in common."""

    def __init__(
        self,
        bundles: Bundles,
        points: Floats,
        precision: float,
        b: Complexes,
        bound: Floats,
    ) -> None:
        self._bundles = bundles
        self._points = points
        self._precision = precision
        self._b, self._bound = b, bound
        self._parts = np.concatenate([bundles.currents.real, bundles.currents.imag])
        self._frame = frame_of(points)
        self._places = points @ self._frame
        self.order = compact_order(points)
        self.pairs = 0
        self._lock = Lock()

    def looked_at(self) -> Floats:
        """(c, n) of about the least field near each point. [T]"""
        n = len(self.order)
        step = max(1, n // _SAMPLES)
        some = self.order[::step]
        every = np.arange(len(self._bundles.table))
        sizes = _sizes(self._phasors(self._summed(self._points[some], every)))
        least = np.minimum(sizes, np.roll(sizes, -1, axis=1))
        least[:, -1] = sizes[:, -1]
        out = np.empty((len(sizes), n))
        out[:, self.order] = 0.5 * np.repeat(least, step, axis=1)[:, :n]
        return out

    def fill(
        self,
        rows: Integers,
        expected: Floats,
        cancelled: Cancelled | None,
        progress: Progress | None,
    ) -> None:
        """Compute the points of these rows, where (c, n) fields are expected."""
        c = len(self._b)
        every = np.arange(len(self._bundles.table))
        whole = Box.around(rows, self._places[rows])
        waiting = [
            _Open(whole, every, None, np.zeros((2 * c, 3, 1)), np.zeros(c)),
        ]
        while 0 < len(waiting) < _ENOUGH:
            waiting = self._level(waiting, expected, cancelled)

        def whole_branch(k: int) -> None:
            stack = [waiting[k]]
            while stack:
                stack += self._step(stack.pop(), expected)

        on_pool(len(waiting), whole_branch, cancelled, progress)

    def _level(
        self, boxes: list[_Open], expected: Floats, cancelled: Cancelled | None
    ) -> list[_Open]:
        """Do some boxes, and give all those within."""
        made: list[list[_Open]] = [[] for _ in boxes]

        def run(k: int) -> None:
            made[k] = self._step(boxes[k], expected)

        on_pool(len(boxes), run, cancelled)
        return [part for parts in made for part in parts]

    def _step(self, own: _Open, expected: Floats) -> list[_Open]:
        """Do a small box; of a large one, the far bundles, and give those within."""
        box, bundles = own.box, self._bundles
        parts = list(box.parts(self._places)) if len(box.rows) > _LEAF else []
        # All in one place cannot be divided; nor do few points pay for the nodes.
        if len(parts) < 2 or len(box.rows) <= box.size:
            self._finish(own)
            return []
        middle = self._frame @ box.middle
        errors = np.empty((len(own.near), len(own.bound)))
        interpolation_errors(
            middle, box.half, np.array(box.nodes), own.near, bundles.table,
            bundles.flows, errors,
        )  # fmt: skip
        allowed = self._precision * expected[:, box.rows].min(axis=1) - own.bound
        taken = _largest_part(errors, _SHARE * np.maximum(allowed, 0.0))
        values = self._from_around(own, box.places())
        if taken.any():
            points = box.places() @ self._frame.T
            values = values + self._summed(points, own.near[taken])
        bound = own.bound + errors[taken].sum(axis=0)
        near = own.near[~taken]
        return [_Open(part, near, box, values, bound) for part in parts]

    def _from_around(self, own: _Open, places: Floats) -> Floats:
        """(2 c, 3, k) at places in the frame, from the nodes of the box around."""
        if own.around is None:
            return np.zeros((*own.values.shape[:2], len(places)))
        flat = own.values.reshape(-1, own.values.shape[2])
        found = flat @ own.around.weights(places).T
        return found.reshape(*own.values.shape[:2], -1)

    def _finish(self, own: _Open) -> None:
        rows = own.box.rows
        points = self._points[rows]
        values = self._from_around(own, self._places[rows])
        values += self._near(points, own.near)
        self._b[:, rows] = self._phasors(values)
        self._bound[:, rows] = own.bound[:, None]

    def _phasors(self, values: Floats) -> Complexes:
        """(c, n, 3) of (2 c, 3, n)."""
        c = len(values) // 2
        both: Complexes = values[:c] + 1j * values[c:]
        return both.transpose(0, 2, 1)

    def _summed(self, points: Floats, which: Integers) -> Floats:
        """(2 c, 3, n) of bundles as the filaments that will do from afar."""
        own = self._bundles
        segments, owners = gathered(which, own.first, own.segments, own.owners)
        return self._of_segments(points, segments, owners)

    def _of_segments(self, points: Floats, rows: Floats, owners: Integers) -> Floats:
        out = np.empty((len(self._parts), 3, len(points)))
        sum_segments(points, rows, owners, self._parts, out)
        with self._lock:
            self.pairs += len(points) * len(rows)
        return out

    def _near(self, points: Floats, which: Integers) -> Floats:
        """(2 c, 3, n) of bundles, as many filaments each as these points need."""
        own = self._bundles
        near = too_near(points, which, own.table)
        groups = own.group_of[which]
        refined = np.isin(groups, np.unique(groups[near])) if near.any() else near
        values = self._summed(points, which[~refined])
        if refined.any():
            values += self._of_segments(points, *self._refined(points, which[refined]))
        return values

    def _refined(self, points: Floats, which: Integers) -> tuple[Floats, Integers]:
        own = self._bundles
        spans = [range(own.first_leg[b], own.first_leg[b + 1]) for b in which]
        rows = own.leg_rows[np.concatenate([np.array(span) for span in spans])]
        members = np.unique(rows[:, 0])
        legs = legs_among(own.legs, members)
        parts = [own.conductors[m] for m in members.tolist()]
        # One choice for all of the points.
        orders = orders_of(parts, legs, points).max(axis=0)
        at = legs.first[np.searchsorted(members, rows[:, 0])] + rows[:, 1]
        return filaments_of_legs(own.conductors, rows, orders[at])[:2]


def _sizes(b: Complexes) -> Floats:
    """(c, n) resultants."""
    size: Floats = np.sqrt((b.real**2 + b.imag**2).sum(axis=2))
    return size


def _largest_part(errors: Floats, allowed: Floats) -> NDArray[np.bool_]:
    """As many bundles with errors (k, c) as together stay within (c,)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        relative = np.where(errors == 0.0, 0.0, errors / allowed).max(axis=1, initial=0)
    order = np.argsort(relative, kind="stable")
    taken = np.zeros(len(errors), bool)
    taken[order] = np.cumsum(relative[order]) <= 1.0
    return taken
