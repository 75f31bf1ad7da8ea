"""The field at fixed points while a layout is edited: only what changed is computed.

Conductors that switch their filaments together (`Conductor.group`) are kept together.
What is kept is known by geometry and points alone, so an undone edit finds it again.
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from threading import Lock

import numpy as np
import numpy.typing as npt

from engine import field
from engine.conductor import Conductor
from engine.errors import Cancelled, stop_if
from engine.field.points import digest
from engine.runs import Bar

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

#: Columns of one matrix product: its result stays in the cache of the processor.
_BLOCK = 12_288

#: Samples whose last sums are remembered, and their groups that did not change.
_MOST_SAMPLES = 8

#: A sample of a drag has no more points.
_FEW = 6000

#: Groups that may move together and still count as "the moved ones".
_MOST_MOVED = 4


@dataclass(frozen=True, eq=False)
class Sample:
    """Points that stay the same from edit to edit.

    Attributes
    ----------
    points : (n, 3) float
        [m]
    key : bytes
        Digest of the points.
    """

    points: Floats
    key: bytes


def sample_of(points: Floats) -> Sample:
    """Points with their digest."""
    checked = np.ascontiguousarray(points, np.float64)
    return Sample(checked, digest(checked))


@dataclass(frozen=True)
class _Part:
    """A group: its conductors' places in the layout, its geometry and its currents."""

    rows: tuple[int, ...]
    geometry: bytes
    currents: bytes


_Signature = tuple[bytes, bytes]


@dataclass(eq=False)
class _Last:
    """Of a sample: what was summed last, and the sum of the groups that stood still."""

    signatures: dict[str, _Signature]
    still: frozenset[tuple[str, _Signature]] = frozenset()
    still_sum: Complexes | None = None


class FieldStore:
    """Responses of groups and sums of what stands still; used by one thread at a time.

    Parameters
    ----------
    limit_bytes : int
        Memory for the responses of groups. A sum that needs more keeps none.
    """

    def __init__(self, limit_bytes: int = 256 * 2**20) -> None:
        self._limit = limit_bytes
        self._kept: OrderedDict[tuple[bytes, bytes], Floats] = OrderedDict()
        self._bytes = 0
        # Of a moved group only the conductors that moved are computed again; a long
        # drag over few points must not push out what belongs to many.
        self._few = field.ResponseCache(limit_bytes // 6)
        self._many = field.ResponseCache(limit_bytes // 2)
        self._last: OrderedDict[bytes, _Last] = OrderedDict()
        self._lock = Lock()

    @property
    def bytes_used(self) -> int:
        """Memory of the responses kept by group. [bytes]"""
        return self._bytes

    def clear(self) -> None:
        """Forget everything."""
        with self._lock:
            self._kept.clear()
            self._last.clear()
            self._few.clear()
            self._many.clear()
            self._bytes = 0

    def flux_density(
        self,
        conductors: Sequence[Conductor],
        currents: Complexes,
        sample: Sample,
        *,
        cancelled: Cancelled | None = None,
    ) -> Complexes:
        """Flux-density phasors at the sample, as `engine.field.flux_density`.

        Parameters
        ----------
        conductors : m conductors
        currents : (c, m) complex
            RMS phasors. [A]
        sample : Sample
            n points.

        Returns
        -------
        (c, n, 3) complex
            RMS phasors. [T]
        """
        out = np.zeros((len(currents), len(sample.points), 3), np.complex128)
        if not len(currents) or not len(conductors) or not len(sample.points):
            return out
        with self._lock:
            parts = _parts(conductors, currents)
            last = self._last.pop(sample.key, None) or _Last({})
            moved = [
                name
                for name, part in parts.items()
                if last.signatures.get(name) != (part.geometry, part.currents)
            ]
            still: list[str] = []
            if last.signatures and 0 < len(moved) <= _MOST_MOVED:
                still = [name for name in parts if name not in moved]
            work = _Work(conductors, currents, sample, cancelled)
            if still:
                out += self._still_sum(work, last, {n: parts[n] for n in still})
                for name in moved:
                    out += self._moved_sum(work, parts[name])
            else:
                out += self._sum(work, parts.values())
            last.signatures = {n: (p.geometry, p.currents) for n, p in parts.items()}
            self._last[sample.key] = last
            while len(self._last) > _MOST_SAMPLES:
                self._last.popitem(last=False)
        return out

    def _still_sum(
        self, work: _Work, last: _Last, parts: Mapping[str, _Part]
    ) -> Complexes:
        """Sum of the groups that stand still, computed once in a drag."""
        names = frozenset((n, (p.geometry, p.currents)) for n, p in parts.items())
        if last.still_sum is None or last.still != names:
            last.still_sum = self._sum(work, parts.values())
            last.still = names
        return last.still_sum

    def _moved_sum(self, work: _Work, part: _Part) -> Complexes:
        """(c, n, 3) field of a group that moved, or whose currents did.

        Nothing is kept of it as a group: the next place of a drag is another.
        """
        if (part.geometry, work.sample.key) in self._kept:
            return self._sum(work, [part])
        return field.flux_density(
            [work.conductors[row] for row in part.rows],
            work.currents[:, list(part.rows)],
            work.sample.points,
            cache=self._cache(work.sample),
            cancelled=work.cancelled,
        )

    def _cache(self, sample: Sample) -> field.ResponseCache:
        return self._few if len(sample.points) <= _FEW else self._many

    def _sum(self, work: _Work, parts: Iterable[_Part]) -> Complexes:
        """(c, n, 3) field of some groups."""
        chosen = list(parts)
        n, c = len(work.sample.points), len(work.currents)
        needed = 24 * n * sum(len(part.rows) for part in chosen)
        if needed > self._limit:
            return self._direct(work, chosen)
        flat = np.zeros((2 * c, 3 * n))
        responses = [(part, self._responses(work, part)) for part in chosen]
        stop_if(work.cancelled)
        weights = [
            np.concatenate([own.real, own.imag])
            for own in (work.currents[:, list(part.rows)] for part, _ in responses)
        ]
        for first in range(0, 3 * n, _BLOCK):
            columns = slice(first, first + _BLOCK)
            for weight, (_, response) in zip(weights, responses, strict=True):
                flat[:, columns] += weight @ response[:, columns]
        return (flat[:c] + 1j * flat[c:]).reshape(c, n, 3)

    def _direct(self, work: _Work, parts: Iterable[_Part]) -> Complexes:
        rows = sorted(row for part in parts for row in part.rows)
        return field.flux_density(
            [work.conductors[row] for row in rows],
            work.currents[:, rows],
            work.sample.points,
            cancelled=work.cancelled,
        )

    def _responses(self, work: _Work, part: _Part) -> Floats:
        """(m, 3 n) field per ampere of a group's conductors. [T/A]"""
        key = (part.geometry, work.sample.key)
        found = self._kept.get(key)
        if found is not None:
            self._kept.move_to_end(key)
            return found
        made = field.responses(
            [work.conductors[row] for row in part.rows],
            work.sample.points,
            cache=self._cache(work.sample),
            cancelled=work.cancelled,
        ).reshape(len(part.rows), -1)
        self._keep(key, made)
        return made

    def _keep(self, key: tuple[bytes, bytes], response: Floats) -> None:
        self._kept[key] = response
        self._bytes += response.nbytes
        while self._bytes > self._limit and len(self._kept) > 1:
            _, dropped = self._kept.popitem(last=False)
            self._bytes -= dropped.nbytes


@dataclass(frozen=True, eq=False)
class _Work:
    """What one call is about."""

    conductors: Sequence[Conductor]
    currents: Complexes
    sample: Sample
    cancelled: Cancelled | None


def _parts(conductors: Sequence[Conductor], currents: Complexes) -> dict[str, _Part]:
    rows: dict[str, list[int]] = {}
    for row, conductor in enumerate(conductors):
        rows.setdefault(conductor.group, []).append(row)
    return {
        name: _Part(
            tuple(own),
            b"".join(_geometry(conductors[row]) for row in own),
            np.ascontiguousarray(currents[:, own]).tobytes(),
        )
        for name, own in rows.items()
    }


@lru_cache(maxsize=8192)
def _geometry(conductor: Conductor) -> bytes:
    """Digest of path, axes and shape: never of a name, a circuit or a share."""
    shape = conductor.shape
    sides = (
        (shape.width, shape.thickness) if isinstance(shape, Bar) else (shape.diameter,)
    )
    return digest(conductor.path, conductor.axes, np.array(sides))


def load_kernels() -> None:
    """Have the compiled functions in memory before the first layout needs them."""
    path = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0]])
    axes = np.tile(np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]), (2, 1, 1))
    for array in (path, axes):
        array.setflags(write=False)
    bar = Conductor(
        "", "", "", "run", path, axes, Bar(width=0.1, thickness=0.01), (), ""
    )
    point = np.array([[0.5, 0.5, 0.5]])
    field.responses([bar], point)
    field.flux_density([bar], np.ones((1, 1), np.complex128), point)
    field.surface_distance([bar], point)
    field.near_field([bar], point)
