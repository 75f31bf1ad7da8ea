"""Sample points: checked arrays, their digest, an order that keeps tiles compact."""

from __future__ import annotations

from hashlib import blake2b

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]

_BITS = 21  # per axis of a Morton number


def as_points(points: ArrayLike) -> Floats:
    """Check and convert points to a contiguous (n, 3) float64 array.

    Raises
    ------
    ValueError
        When the shape is another or a coordinate is not finite.
    """
    array = np.ascontiguousarray(points, dtype=np.float64)
    if array.ndim != 2 or array.shape[1] != 3:
        raise ValueError(f"points must be (n, 3), not {array.shape}")
    if not np.isfinite(array).all():
        raise ValueError("points must be finite")
    return array


def digest(*arrays: NDArray[np.generic]) -> bytes:
    """Fingerprint of arrays: equal for equal values of equal shape and kind."""
    hasher = blake2b(digest_size=20)
    for array in arrays:
        hasher.update(f"{array.dtype.str}{array.shape}".encode())
        hasher.update(np.ascontiguousarray(array).data)
    return hasher.digest()


def compact_order(points: Floats) -> NDArray[np.int64]:
    """Order in which neighbours follow each other, by Morton number."""
    if len(points) == 0:
        return np.zeros(0, np.int64)
    low = points.min(axis=0)
    size = float((points.max(axis=0) - low).max())
    if size == 0.0:
        return np.arange(len(points))
    cells = ((points - low) * ((2**_BITS - 1) / size)).astype(np.uint64)
    number = np.zeros(len(points), np.uint64)
    for axis in range(3):
        number |= _spread(cells[:, axis]) << np.uint64(axis)
    return np.argsort(number, kind="stable")


def _spread(x: NDArray[np.uint64]) -> NDArray[np.uint64]:
    """Put two zero bits between the bits of 21-bit numbers."""
    for shift, mask in (
        (32, 0x1F00000000FFFF),
        (16, 0x1F0000FF0000FF),
        (8, 0x100F00F00F00F00F),
        (4, 0x10C30C30C30C30C3),
        (2, 0x1249249249249249),
    ):
        x = (x | (x << np.uint64(shift))) & np.uint64(mask)
    return x
