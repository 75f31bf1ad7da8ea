"""Lines on a plane where a ratio is 1: found on a grid that is fine where they pass.

A coarse grid first; then only what the line passes, or what is so near to a conductor
that a small line could hide there, is looked at again four times as closely.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from contourpy import LineType, contour_generator
from numpy.typing import NDArray

from engine.profile_sampling import bisected

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]
Bools = NDArray[np.bool_]

#: Pieces of the coarse grid along the longer side; each is parted by four, twice.
_PIECES = 64
_PARTED = 4
_TIMES = 2
#: A vertex is looked for so many fine steps along the normal, either way.
_REACH = 2.0
_TRIES = 8
#: Where the line lies, to within this. [m]
_WITHIN = 2.5e-4
_LEAST_RATIO = 1e-30


@dataclass(frozen=True, eq=False)
class Used:
    """What is known at places on the plane: ratio, mask, distance to a surface. [m]"""

    ratios: Floats
    masked: Bools
    distances: Floats


#: Looks at (n, 2) places in the axes of the plane.
Use = Callable[[Floats], Used]


@dataclass(frozen=True, eq=False)
class Traced:
    """Lines where the ratio is 1, and how they were found.

    Attributes
    ----------
    lines : tuple of (n, 2) float
        Closed where first and last agree. [m]
    step : float
        Of the finest grid: a closed line smaller than this may be missed. [m]
    unrefined : int
        Vertices left where the grid put them, because the ratio does not pass 1 there.
    any_above, any_below : bool
        Whether any place that counts is above, or at or below, the level.
    """

    lines: tuple[Floats, ...]
    step: float
    unrefined: int
    any_above: bool
    any_below: bool


def traced(width: float, height: float, use: Use) -> Traced:
    """The lines of ratio 1 on a rectangle from (0, 0) to (width, height). [m]"""
    grid = _Grid(width, height, use)
    grid.look(np.ones((grid.rows, grid.columns), bool), 0)
    for level in range(1, _TIMES + 1):
        grid.look_closer(level)
    finest = _PARTED ** -float(_TIMES)
    step = max(width / grid.columns, height / grid.rows) * finest
    lines, unrefined = [], 0
    for line in grid.contours():
        moved, left = refined_line(line, step, use)
        unrefined += left
        if len(moved) > 1:
            lines.append(moved)
    counts = grid.known & ~grid.masked
    above = grid.ratios > 1
    return Traced(
        tuple(lines), step, unrefined,
        bool(np.any(above & counts)), bool(np.any(~above & counts)),
    )  # fmt: skip


class _Grid:
    """Nodes of the finest grid, of which only those looked at are known."""

    def __init__(self, width: float, height: float, use: Use) -> None:
        piece = max(width, height) / _PIECES
        self.columns = max(1, round(width / piece))
        self.rows = max(1, round(height / piece))
        self.fine = _PARTED**_TIMES
        self.xs = np.linspace(0.0, width, self.columns * self.fine + 1)
        self.ys = np.linspace(0.0, height, self.rows * self.fine + 1)
        shape = (len(self.ys), len(self.xs))
        self.use = use
        self.known = np.zeros(shape, bool)
        self.ratios = np.zeros(shape)
        self.masked = np.zeros(shape, bool)
        self.distances = np.zeros(shape)
        self.diagonal = float(np.hypot(width / self.columns, height / self.rows))

    def look(self, cells: Bools, level: int) -> None:
        """Look at the corners of cells of a level that are not known yet."""
        every = self.fine // _PARTED**level
        rows, columns = cells.shape
        corners = np.zeros((rows + 1, columns + 1), bool)
        for down in (0, 1):
            for right in (0, 1):
                corners[down : down + rows, right : right + columns] |= cells
        wanted = np.zeros_like(self.known)
        wanted[::every, ::every] = corners
        j, i = np.nonzero(wanted & ~self.known)
        if not len(j):
            return
        used = self.use(np.column_stack([self.xs[i], self.ys[j]]))
        self.known[j, i] = True
        self.ratios[j, i] = used.ratios
        self.masked[j, i] = used.masked
        self.distances[j, i] = used.distances

    def look_closer(self, level: int) -> None:
        """Part the cells that a line passes or may hide in, and those it goes on to."""
        parts = np.kron(self._concerned(level - 1), np.ones((_PARTED, _PARTED), bool))
        while True:
            self.look(parts, level)
            # On the finer grid the line may pass beside what the coarser one showed.
            passed = _widened(self._passed(level) & parts) & ~parts
            if not np.any(passed):
                return
            parts |= passed

    def _at(self, level: int) -> slice:
        return slice(None, None, self.fine // _PARTED**level)

    def _passed(self, level: int) -> Bools:
        """Cells with known corners on both sides of the level, or half masked."""
        every = self._at(level)
        known = self.known[every, every]
        above = (self.ratios[every, every] > 1) & ~self.masked[every, every]
        found: Bools = _all(known) & _any(above) & ~_all(above)
        return found

    def _concerned(self, level: int) -> Bools:
        every = self._at(level)
        reach = self.diagonal / _PARTED**level
        near = self.distances[every, every] < reach
        near &= self.known[every, every]
        hidden = _any(near) & ~_all(self.masked[every, every])
        found: Bools = (_widened(self._passed(level)) | hidden) & _all(
            self.known[every, every]
        )
        return found

    def contours(self) -> list[Floats]:
        """Lines of ratio 1 on the finest grid, in the logarithm of the ratio."""
        hidden = ~self.known | self.masked
        if np.all(hidden):
            return []
        logs = np.log(np.maximum(self.ratios, _LEAST_RATIO))
        made = contour_generator(
            self.xs, self.ys, np.ma.masked_array(logs, mask=hidden),
            line_type=LineType.Separate, corner_mask=False,
        )  # fmt: skip
        return [np.asarray(line, np.float64) for line in made.lines(0.0)]


def _corners(nodes: Bools) -> tuple[Bools, Bools, Bools, Bools]:
    return nodes[:-1, :-1], nodes[1:, :-1], nodes[:-1, 1:], nodes[1:, 1:]


def _any(nodes: Bools) -> Bools:
    a, b, c, d = _corners(nodes)
    return a | b | c | d


def _all(nodes: Bools) -> Bools:
    a, b, c, d = _corners(nodes)
    return a & b & c & d


def _widened(cells: Bools) -> Bools:
    """The cells and their eight neighbours."""
    padded = np.pad(cells, 1)
    rows, columns = cells.shape
    found = np.zeros_like(cells)
    for down in range(3):
        for right in range(3):
            found |= padded[down : down + rows, right : right + columns]
    return found


def refined_line(line: Floats, step: float, use: Use) -> tuple[Floats, int]:
    """A line's vertices moved along its normals to where the ratio is 1.

    Parameters
    ----------
    line : (n, 2) float
        Closed where first and last agree. [m]
    step : float
        The line is within about this already. [m]

    Returns
    -------
    (n, 2) float, int
        To a quarter of a millimetre, and how many vertices stayed.
    """
    line = _thinned(line, step / 2)
    if len(line) < 2:
        return line, 0
    closed = bool(np.all(line[0] == line[-1]))
    ends = (line[[-2]], line[[1]]) if closed else (line[[0]], line[[-1]])
    around = np.concatenate([ends[0], line, ends[1]])
    along = around[2:] - around[:-2]
    normals = np.column_stack([-along[:, 1], along[:, 0]])
    sizes = np.linalg.norm(normals, axis=1)
    normals /= np.where(sizes > 0, sizes, 1.0)[:, None]
    moved, left = on_level(line, normals, _REACH * step, use)
    if closed:
        moved[-1] = moved[0]
    return moved, int(np.sum(left))


def _thinned(line: Floats, least: float) -> Floats:
    """Without vertices that crowd together where the line crosses a grid's corner."""
    kept = [0]
    for k in range(1, len(line)):
        if np.linalg.norm(line[k] - line[kept[-1]]) >= least:
            kept.append(k)
    if kept[-1] != len(line) - 1:
        if len(kept) > 2:
            kept.pop()
        kept.append(len(line) - 1)
    return line[kept]


def on_level(
    places: Floats, normals: Floats, reach: float, use: Use
) -> tuple[Floats, Bools]:
    """Places moved along unit normals to the nearest ratio of 1 within reach.

    Parameters
    ----------
    places, normals : (n, 2) float
        [m]

    Returns
    -------
    (n, 2) float, (n,) bool
        The places, and which stayed because the ratio does not pass 1 in reach.
    """
    n = len(places)
    tries = np.linspace(-reach, reach, 2 * _TRIES + 1)
    probes = places[:, None] + tries[:, None] * normals[:, None]
    used = use(probes.reshape(-1, 2))
    above = (used.ratios > 1).reshape(n, -1)
    masked = used.masked.reshape(n, -1)
    passes = (above[:, 1:] != above[:, :-1]) & ~masked[:, 1:] & ~masked[:, :-1]
    middles = np.abs(tries[1:] + tries[:-1]) / 2
    nearest = np.argmin(np.where(passes, middles, np.inf), axis=1)
    left = ~np.any(passes, axis=1)
    at = np.flatnonzero(~left)
    k = nearest[at]
    starts_above = above[at, k]
    low = np.where(starts_above, tries[k], tries[k + 1])
    high = np.where(starts_above, tries[k + 1], tries[k])

    def is_above(offsets: Floats, which: Integers) -> Bools:
        rows = at[which]
        found: Bools = use(places[rows] + offsets[:, None] * normals[rows]).ratios > 1
        return found

    low, high = bisected(low, high, is_above, _WITHIN)
    moved = places.copy()
    moved[at] += ((low + high) / 2)[:, None] * normals[at]
    return moved, left
