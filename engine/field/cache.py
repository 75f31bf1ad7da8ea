"""Responses kept between computations: by geometry and sample points, nothing else."""

from __future__ import annotations

from collections import OrderedDict
from threading import Lock

from engine.field.kernel import Floats

#: Digests of a conductor's geometry with its filament numbers, and of the points.
Key = tuple[bytes, bytes]


class ResponseCache:
    """Responses of conductors, the least recently used dropped first; thread-safe.

    Attributes
    ----------
    limit : int
        Memory for the arrays that are kept. [bytes]
    """

    def __init__(self, limit_bytes: int = 512 * 2**20) -> None:
        if limit_bytes < 0:
            raise ValueError(f"limit_bytes must not be negative, not {limit_bytes}")
        self.limit = limit_bytes
        self._kept: OrderedDict[Key, Floats] = OrderedDict()
        self._bytes = 0
        self._lock = Lock()

    @property
    def bytes_used(self) -> int:
        """Memory of the arrays kept now. [bytes]"""
        return self._bytes

    def __len__(self) -> int:
        return len(self._kept)

    def find(self, key: Key) -> Floats | None:
        """The (n, 3) response kept for the key, read-only, or None. [T/A]"""
        with self._lock:
            found = self._kept.get(key)
            if found is not None:
                self._kept.move_to_end(key)
            return found

    def keep(self, key: Key, response: Floats) -> None:
        """Keep a response, which becomes read-only, unless it exceeds the limit."""
        response.setflags(write=False)
        with self._lock:
            old = self._kept.pop(key, None)
            if old is not None:
                self._bytes -= old.nbytes
            if response.nbytes > self.limit:
                return
            self._kept[key] = response
            self._bytes += response.nbytes
            while self._bytes > self.limit:
                _, dropped = self._kept.popitem(last=False)
                self._bytes -= dropped.nbytes

    def clear(self) -> None:
        """Drop everything."""
        with self._lock:
            self._kept.clear()
            self._bytes = 0
