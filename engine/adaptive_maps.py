"""A plane of a map from few evaluations: tiles of Chebyshev nodes, pixels near metal.

Away from conductors the field is smooth. A tile of the grid that keeps its distance
from every conductor is evaluated at 8 x 8 Chebyshev nodes, and the complex phasors,
which are smooth where the resultant is not, are interpolated at its pixels. Each tile
is checked: by evaluation at places between the nodes, and by how far its Chebyshev
series has fallen. A tile that fails is split, and a small one is evaluated pixel by
pixel. What a tile is near to is measured from geometry, so that no conductor can hide
between nodes.

Interpolation converges like ϱ^(−n) with the nearest singularity, here a filament at the
distance d from a tile of half side h, at ϱ = d/h + √(1 + (d/h)²) ([1]_, ch. 8): what
has to be evaluated depends on distances, hardly on the number of pixels.

References
----------
.. [1] L. N. Trefethen, Approximation Theory and Approximation Practice, SIAM, 2013.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from dataclasses import field as dataclass_field
from functools import lru_cache
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseFields
from engine.field.kernel import TILE
from engine.field.legs import sides_of
from engine.sampling import PlaneSample

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Bools = NDArray[np.bool_]

#: Of the local resultant, at the places where a tile is checked: half of what a map
#: may be wrong by, because the worst place may lie between them.
TOLERANCE = 1e-3
#: Maps of fewer points are evaluated point by point.
FEWEST = 10_000

_NODES = 8  # along each side of a tile
#: Distance from the tile's middle to metal, over half its diagonal, that is tried.
_NEAREST = 1.25
#: Pixels of one tile at most, along a side: bounds the memory of its phasors.
_LONGEST = 128
#: Below this no relative error is meant. [T]
_NOTHING = 1e-15
#: Bytes that the choice of filaments takes per leg and tile of the kernel.
_BYTES_PER_LEG = 40
_BYTES_AT_ONCE = 150_000_000
_POINTS_AT_ONCE = 32_768
_MANY_AT_ONCE = 262_144
_VALUES_AT_ONCE = 1_000_000


@dataclass(frozen=True, eq=False)
class Layer:
    """Values (n,) on one plane, 0 where masked. [T]

    Attributes
    ----------
    ac : (n,) float
        RMS resultant of all frequencies above 0 Hz. [T]
    dc : (n,) float
        At 0 Hz. [T]
    mask : (n,) bool
        Inside a conductor or a closed enclosure.
    reason : str
        Why values are bounds; empty where they are not.
    evaluations : int
        Points at which the field was summed.
    checked_error : float
        Largest deviation found where accepted tiles were checked, of the local value.
    """

    ac: Floats
    dc: Floats
    mask: Bools
    reason: str
    evaluations: int
    checked_error: float = 0.0


def direct_layer(fields: CaseFields, sample: PlaneSample) -> Layer:
    """One plane of a map, evaluated at each of its points."""
    made = _Made.of(fields, sample)
    made.evaluate(np.arange(len(sample.points)), keep=True)
    return made.layer()


def adaptive_layer(
    fields: CaseFields, sample: PlaneSample, *, tolerance: float = TOLERANCE
) -> Layer:
    """One plane of a map, interpolated where the field is smooth enough.

    Parameters
    ----------
    fields : CaseFields
        Of one load case.
    sample : PlaneSample
        Its grid.
    tolerance : float
        Of the local resultant, where a tile is checked. [-]

    Returns
    -------
    Layer
        Masks are those of every single point.
    """
    if not tolerance > 0:
        raise ValueError(f"tolerance must be above 0, not {tolerance}")
    made = _Made.of(fields, sample)
    size = _nodes_per_tile()
    waiting, pixels = [_Tile(0, sample.shape[0], 0, sample.shape[1])], []
    while waiting:
        try_out, split = [], []
        for tile, distance in zip(waiting, made.distances(waiting), strict=True):
            half = made.half_diagonal(tile)
            if tile.count <= size:
                pixels.append(tile)
            elif distance < _NEAREST * half or tile.longest > _LONGEST:
                split.append(tile)
            else:
                try_out.append((tile, distance))
        split += made.interpolate(try_out, tolerance)
        waiting = [part for tile in split for part in made.halves(tile)]
    if pixels:
        made.evaluate(np.concatenate([made.rows(tile) for tile in pixels]), keep=False)
    return made.layer()


@dataclass(frozen=True)
class _Tile:
    """Rows and columns of the grid, the last ones not included."""

    row: int
    row_end: int
    column: int
    column_end: int

    @property
    def count(self) -> int:
        return (self.row_end - self.row) * (self.column_end - self.column)

    @property
    def longest(self) -> int:
        return max(self.row_end - self.row, self.column_end - self.column)


@lru_cache(maxsize=1)
def _nodes() -> Floats:
    """(8,) Chebyshev points of the first kind on −1 to 1."""
    k: Floats = np.cos((np.arange(_NODES) + 0.5) * np.pi / _NODES)
    return k


@lru_cache(maxsize=1)
def _to_coefficients() -> Floats:
    """(8, 8) from values at the nodes to coefficients of the Chebyshev series."""
    matrix = np.linalg.inv(np.polynomial.chebyshev.chebvander(_nodes(), _NODES - 1))
    return np.asarray(matrix, np.float64)


def _rows_at(places: Floats) -> Floats:
    """(k, 8) from values at the nodes to values at the places (k,) in −1 to 1."""
    series = np.polynomial.chebyshev.chebvander(places, _NODES - 1)
    return np.asarray(series @ _to_coefficients(), np.float64)


@lru_cache(maxsize=512)
def _rows_of(count: int) -> Floats:
    """As `_rows_at`, for `count` pixels from one end to the other."""
    return _rows_at(np.linspace(-1.0, 1.0, count) if count > 1 else np.zeros(1))


@lru_cache(maxsize=1)
def _checks() -> Floats:
    """(9, 2) places of a tile between its nodes: where the error swings widest.

    The corners and edges, beyond the outermost nodes, and places within.
    """
    inner = np.cos(np.arange(1, _NODES) * np.pi / _NODES)
    places = [(-1, -1), (-1, 1), (1, -1), (1, 1), (inner[0], inner[3])]
    places += [(inner[3], inner[0]), (inner[6], inner[3]), (inner[3], inner[6])]
    return np.array([*places, (inner[3], inner[3])], np.float64)


def _nodes_per_tile() -> int:
    return _NODES * _NODES + len(_checks())


@lru_cache(maxsize=1)
def _places() -> Floats:
    """(73, 2) nodes, the first coordinate varying fastest, and then checks."""
    nodes = _nodes()
    grid = np.stack(np.meshgrid(nodes, nodes), axis=-1).reshape(-1, 2)
    return np.concatenate([grid, _checks()])


@dataclass(frozen=True, eq=False)
class _Made:
    """A plane on the way: what it is computed from and what is known of it."""

    fields: CaseFields
    sample: PlaneSample
    ac: Floats
    dc: Floats
    mask: Bools
    slack: float
    reasons: set[str] = dataclass_field(default_factory=set)
    evaluations: list[int] = dataclass_field(default_factory=list)
    errors: list[float] = dataclass_field(default_factory=list)

    @classmethod
    def of(cls, fields: CaseFields, sample: PlaneSample) -> _Made:
        n = len(sample.points)
        # A bar's distance may change faster than its place beside a mitre plane.
        widest = max((sum(sides_of(c)) for c in fields.conductors), default=0.0)
        return cls(
            fields, sample, np.zeros(n), np.zeros(n), np.zeros(n, bool), 3.0 * widest
        )

    def layer(self) -> Layer:
        return Layer(
            self.ac,
            self.dc,
            self.mask,
            "; ".join(sorted(self.reasons - {""})),
            sum(self.evaluations),
            max(self.errors, default=0.0),
        )

    def rows(self, tile: _Tile) -> NDArray[np.int64]:
        """Positions of a tile's points, row by row."""
        rows = np.arange(tile.row, tile.row_end) * self.sample.shape[1]
        return (rows[:, None] + np.arange(tile.column, tile.column_end)).ravel()

    def frame(self, tile: _Tile) -> tuple[Floats, Floats, Floats]:
        """Middle of a tile and half its edges, (3,) each. [m]"""
        across, last = self.sample.shape[1], tile.row_end - 1
        points = self.sample.points
        corner = points[tile.row * across + tile.column]
        right = points[tile.row * across + tile.column_end - 1]
        up = points[last * across + tile.column]
        first, second = (right - corner) / 2, (up - corner) / 2
        return corner + first + second, first, second

    def half_diagonal(self, tile: _Tile) -> float:
        _, first, second = self.frame(tile)
        return float(np.sqrt(first @ first + second @ second))

    def distances(self, tiles: Sequence[_Tile]) -> Floats:
        """(k,) from the tiles' middles to the nearest conductor. [m]"""
        return self.fields.distances(np.array([self.frame(tile)[0] for tile in tiles]))

    def halves(self, tile: _Tile) -> Iterator[_Tile]:
        """A tile cut across its longer side, or across both where they are alike."""
        _, first, second = self.frame(tile)
        wide, high = float(np.linalg.norm(first)), float(np.linalg.norm(second))
        columns = [tile.column, tile.column_end]
        rows = [tile.row, tile.row_end]
        if wide >= 0.7 * high and columns[1] - columns[0] > 1:
            columns.insert(1, sum(columns) // 2)
        if high >= 0.7 * wide and rows[1] - rows[0] > 1:
            rows.insert(1, sum(rows) // 2)
        for low, top in pairwise(rows):
            for left, right in pairwise(columns):
                yield _Tile(low, top, left, right)

    def evaluate(self, rows: NDArray[np.int64], *, keep: bool) -> None:
        """Points one by one."""
        block = self._at_once()
        for start in range(0, len(rows), block):
            part = rows[start : start + block]
            points = self.sample.points[part]
            b = self.fields.flux_densities(points, keep=keep)[0]
            self._set(part, b, self.fields.masked(points, 0.0)[0])
            self.evaluations.append(len(part))

    def _at_once(self) -> int:
        """How many points the memory allows for."""
        values = _VALUES_AT_ONCE // max(1, len(self.fields.cases[0].components))
        if field.pays(self.fields.conductors, min(values, _MANY_AT_ONCE)):
            # Interpolated in boxes: the more at once, the better, and no leg counts.
            return max(2048, min(_MANY_AT_ONCE, values))
        legs = sum(len(c.path) - 1 for c in self.fields.conductors)
        tiles = _BYTES_AT_ONCE // (_BYTES_PER_LEG * max(1, legs))
        return max(2048, min(_POINTS_AT_ONCE, TILE * tiles, values))

    def _set(self, rows: NDArray[np.int64], b: Complexes, mask: Bools) -> None:
        whole = field.combined(b, self.fields.cases[0].components)
        self.mask[rows] = mask
        if whole.total_ac is not None:
            self.ac[rows] = np.where(mask, 0.0, whole.total_ac)
        if whole.dc is not None:
            self.dc[rows] = np.where(mask, 0.0, whole.dc)
        self.reasons.add(whole.reason)

    def interpolate(
        self, tiles: Sequence[tuple[_Tile, float]], tolerance: float
    ) -> list[_Tile]:
        """Fill tiles whose distances are known; those that fail the check."""
        failed, size = [], _nodes_per_tile()
        batch = max(1, self._at_once() // size)
        for start in range(0, len(tiles), batch):
            part = tiles[start : start + batch]
            points = np.concatenate([self._places_in(tile) for tile, _ in part])
            b = self.fields.flux_densities(points, keep=True)[0]
            self.evaluations.append(len(points))
            by_tile = b.reshape(len(b), len(part), size, 3)
            errors = self._errors(by_tile)
            for k, (tile, distance) in enumerate(part):
                if errors[k] <= tolerance:
                    self._fill(tile, distance, by_tile[:, k, : _NODES * _NODES])
                    self.errors.append(float(errors[k]))
                else:
                    failed.append(tile)
        return failed

    def _places_in(self, tile: _Tile) -> Floats:
        middle, first, second = self.frame(tile)
        places = _places()
        points: Floats = middle + places[:, :1] * first + places[:, 1:] * second
        return points

    def _errors(self, b: Complexes) -> Floats:
        """(k,) of tiles with values (c, k, 73, 3), of the local resultant."""
        c, k = b.shape[:2]
        nodes = b[:, :, : _NODES * _NODES].reshape(c, k, _NODES, _NODES, 3)
        true = b[:, :, _NODES * _NODES :]
        checks = _checks()
        across, up = _rows_at(checks[:, 0]), _rows_at(checks[:, 1])
        found = np.einsum("pi,pj,ckjix->ckpx", across, up, nodes, optimize=True)
        to = _to_coefficients()
        series = np.einsum("ai,bj,ckjix->ckbax", to, to, nodes, optimize=True)
        last = np.concatenate([series[:, :, -1], series[:, :, :-1, -1]], axis=2)
        worst = np.zeros(k)
        pairs = zip(self._sizes(true), self._sizes(found - true),
                    self._sizes(last), strict=True)  # fmt: skip
        for size, off, tail in pairs:
            least = np.maximum(size.min(axis=1), _NOTHING)
            # What follows the last terms falls by more than half from each to the next.
            worst = np.maximum(worst, 0.5 * tail.sum(axis=1) / least)
            worst = np.maximum(worst, (off / np.maximum(size, _NOTHING)).max(axis=1))
        return worst

    def _sizes(self, b: Complexes) -> list[Floats]:
        """(k, p) resultants of (c, k, p, 3), of alternating and of direct current.

        The size of a difference is no less than the difference of sizes, whichever
        way components combine.
        """
        c, k, p = b.shape[:3]
        whole = field.combined(b.reshape(c, k * p, 3), self.fields.cases[0].components)
        return [x.reshape(k, p) for x in (whole.total_ac, whole.dc) if x is not None]

    def _fill(self, tile: _Tile, distance: float, nodes: Complexes) -> None:
        """Interpolate the phasors (c, 64, 3) at every pixel of a tile."""
        c = len(nodes)
        up = _rows_of(tile.row_end - tile.row)
        across = _rows_of(tile.column_end - tile.column)
        # Real and imaginary parts apart: the matrices are real.
        flat = np.ascontiguousarray(nodes.transpose(1, 0, 2)).view(np.float64)
        lines = (up @ flat.reshape(_NODES, -1)).reshape(len(up), _NODES, 6 * c)
        pixels = np.matmul(across, lines).reshape(tile.count, c, 6)
        b = pixels.view(np.complex128).transpose(1, 0, 2)
        rows = self.rows(tile)
        points = self.sample.points[rows]
        if distance <= self.half_diagonal(tile) + self.slack:
            mask = self.fields.masked(points, 0.0)[0]
        else:
            mask = np.zeros(len(rows), bool)
            for keepout in self.fields.cases[0].closed:
                mask |= keepout.masks(points)
        self._set(rows, b, mask)
