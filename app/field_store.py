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
from engine.conductor import Conductor, bundles_of
from engine.errors import Cancelled, stop_if
from engine.field.points import digest
from engine.runs import Bar

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

#: Columns of one matrix product: its result stays in the cache of the processor.
_BLOCK = 12_288

#: Samples whose last sums are remembered.
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


@dataclass(frozen=True, eq=False)
class _Bundle:
    """Conductors made together, held so that their identity stays theirs."""

    conductors: tuple[Conductor, ...]
    geometry: bytes


class _Part:
    """A group: its conductors with their geometry, and their currents (k, c)."""

    def __init__(self, members: Sequence[tuple[_Bundle, Complexes]]) -> None:
        self._members = members
        self.count = sum(len(bundle.conductors) for bundle, _ in members)
        self.geometry = b"".join([bundle.geometry for bundle, _ in members])
        self._flowing = b"".join([rows.tobytes() for _, rows in members])

    def is_like(self, other: _Part | None) -> bool:
        """Whether both give the same field."""
        return (
            other is not None
            and self.geometry == other.geometry
            and self._flowing == other._flowing
        )

    @property
    def conductors(self) -> list[Conductor]:
        return [each for bundle, _ in self._members for each in bundle.conductors]

    @property
    def currents(self) -> Complexes:
        """(c, k) phasors along the conductors. [A]"""
        return np.concatenate([rows for _, rows in self._members]).T


@dataclass(frozen=True, eq=False)
class _Last:
    """Of a sample: what was summed last, and the part of it that stood still."""

    parts: Mapping[str, _Part]
    total: Complexes
    still: frozenset[str] = frozenset()
    rest: Complexes | None = None


class FieldStore:
    """Responses of groups and sums of what stands still; used by one thread at a time.

    Parameters
    ----------
    limit_bytes : int
        Memory for the responses of groups. A sum that needs more than half of it
        keeps none.
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
        self._known: dict[int, _Bundle] = {}
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
            self._known.clear()
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
        if not len(currents) or not len(conductors) or not len(sample.points):
            return np.zeros((len(currents), len(sample.points), 3), np.complex128)
        with self._lock:
            parts = self._parts(conductors, currents)
            work = _Work(len(currents), sample, cancelled)
            now = self._moved_from(work, self._last.get(sample.key), parts)
            if now is None:
                now = _Last(parts, self._sum(work, parts.values()))
            self._last[sample.key] = now
            self._last.move_to_end(sample.key)
            while len(self._last) > _MOST_SAMPLES:
                self._last.popitem(last=False)
            return now.total.copy()

    def _moved_from(
        self, work: _Work, last: _Last | None, parts: Mapping[str, _Part]
    ) -> _Last | None:
        """The field after a few groups moved; None where it is better summed anew.

        What stands still is what was there without the groups that moved, so that
        the first step of a drag costs no more than the others. Taking the old field
        of a group away leaves no more than the rounding of the sum: groups never
        share their filaments.
        """
        if last is None or len(last.total) != work.components:
            return None
        still = frozenset(
            n for n, part in parts.items() if part.is_like(last.parts.get(n))
        )
        gone = [name for name in last.parts if name not in still]
        new = [name for name in parts if name not in still]
        if max(len(gone), len(new)) > _MOST_MOVED or not still:
            return None
        if not gone and not new:
            return _Last(parts, last.total, last.still, last.rest)
        rest = last.rest
        if rest is None or still != last.still:
            rest = last.total.copy()
            for name in gone:
                rest -= self._moved_sum(work, last.parts[name])
        total = rest.copy()
        for name in new:
            total += self._moved_sum(work, parts[name])
        return _Last(parts, total, still, rest)

    def _parts(
        self, conductors: Sequence[Conductor], currents: Complexes
    ) -> dict[str, _Part]:
        """Groups by name; what was computed of a bundle stays while it is the same."""
        bundles = bundles_of(conductors)
        rows = np.ascontiguousarray(currents.T)
        members: dict[str, list[tuple[_Bundle, Complexes]]] = {}
        known, self._known = self._known, {}
        first = 0
        for bundle in bundles:
            found = known.get(id(bundle))
            if found is None:
                found = _Bundle(bundle, b"".join(map(_geometry, bundle)))
            self._known[id(bundle)] = found
            last = first + len(bundle)
            own = members.setdefault(bundle[0].group, [])
            own.append((found, rows[first:last]))
            first = last
        return {name: _Part(own) for name, own in members.items()}

    def _moved_sum(self, work: _Work, part: _Part) -> Complexes:
        """(c, n, 3) field of a group that moved, or whose currents did.

        Nothing is kept of it as a group: the next place of a drag is another.
        """
        if (part.geometry, work.sample.key) in self._kept:
            return self._sum(work, [part])
        return field.flux_density(
            part.conductors,
            part.currents,
            work.sample.points,
            cache=self._cache(work.sample),
            cancelled=work.cancelled,
        )

    def _cache(self, sample: Sample) -> field.ResponseCache:
        return self._few if len(sample.points) <= _FEW else self._many

    def _sum(self, work: _Work, parts: Iterable[_Part]) -> Complexes:
        """(c, n, 3) field of some groups."""
        chosen = list(parts)
        n, c = len(work.sample.points), work.components
        needed = 24 * n * sum(part.count for part in chosen)
        if needed > self._limit // 2:
            return self._direct(work, chosen)
        flat = np.zeros((2 * c, 3 * n))
        responses = [(part, self._responses(work, part)) for part in chosen]
        stop_if(work.cancelled)
        weights = [
            np.concatenate([part.currents.real, part.currents.imag])
            for part, _ in responses
        ]
        for first in range(0, 3 * n, _BLOCK):
            columns = slice(first, first + _BLOCK)
            for weight, (_, response) in zip(weights, responses, strict=True):
                flat[:, columns] += weight @ response[:, columns]
        return (flat[:c] + 1j * flat[c:]).reshape(c, n, 3)

    def _direct(self, work: _Work, parts: Sequence[_Part]) -> Complexes:
        return field.flux_density(
            [conductor for part in parts for conductor in part.conductors],
            np.concatenate([part.currents for part in parts], axis=1),
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
            part.conductors,
            work.sample.points,
            cache=self._cache(work.sample),
            cancelled=work.cancelled,
        ).reshape(part.count, -1)
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

    components: int
    sample: Sample
    cancelled: Cancelled | None


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
