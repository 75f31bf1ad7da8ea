"""Boxes in space that hold pieces of a region: a centre, three axes, half sides."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]
Bools = NDArray[np.bool_]

#: Corners of a box and of a flat one, in half sides.
_SIGNS = np.array(
    [(x, y, z) for z in (1.0, -1.0) for x in (1.0, -1.0) for y in (1.0, -1.0)]
)


@dataclass(frozen=True, eq=False)
class Boxes:
    """n boxes; flat ones have no third side.

    Attributes
    ----------
    centres : (n, 3) float
        [m]
    frames : (n, 3, 3) float
        Orthonormal rows.
    halves : (n, 3) float
        Half sides along the rows. [m]
    covers : (n,) int
        Which cover each belongs to.
    """

    centres: Floats
    frames: Floats
    halves: Floats
    covers: Integers

    def __len__(self) -> int:
        return len(self.centres)

    def __getitem__(self, which: Bools | Integers) -> Boxes:
        """Some of them, by index or mask."""
        return Boxes(
            self.centres[which],
            self.frames[which],
            self.halves[which],
            self.covers[which],
        )

    @property
    def reaches(self) -> Floats:
        """(n,) half diagonals. [m]"""
        reaches: Floats = np.linalg.norm(self.halves, axis=1)
        return reaches

    @property
    def are_flat(self) -> bool:
        """Whether none has a third side."""
        return not np.any(self.halves[:, 2])

    @property
    def signs(self) -> Floats:
        """(k, 3) corners in half sides: four of flat boxes, else eight."""
        return _SIGNS[:4] if self.are_flat else _SIGNS

    @property
    def corners(self) -> Floats:
        """(n, k, 3) places of the corners. [m]"""
        steps = self.signs * self.halves[:, None, :]
        corners: Floats = self.centres[:, None] + np.einsum(
            "nks,nsx->nkx", steps, self.frames
        )
        return corners

    def raised(self, by: float) -> Boxes:
        """The same boxes higher up. [m]"""
        if by == 0.0:
            return self
        up = self.centres + np.array([0.0, 0.0, by])
        return Boxes(up, self.frames, self.halves, self.covers)


def joined(parts: Sequence[Boxes]) -> Boxes:
    """Several as one."""
    return Boxes(
        np.concatenate([np.zeros((0, 3)), *(part.centres for part in parts)]),
        np.concatenate([np.zeros((0, 3, 3)), *(part.frames for part in parts)]),
        np.concatenate([np.zeros((0, 3)), *(part.halves for part in parts)]),
        np.concatenate([np.zeros(0, np.int64), *(part.covers for part in parts)]),
    )


def halved(boxes: Boxes, cut: Bools) -> tuple[Boxes, Integers]:
    """Boxes with some sides (n, 3) cut in two, and whose parts they are."""
    parts, parents = [boxes], [np.arange(len(boxes))]
    for side in range(3):
        now, whose = joined(parts), np.concatenate(parents)
        yes = cut[whose, side]
        kept, mine = now[~yes], now[yes]
        halves = mine.halves.copy()
        halves[:, side] /= 2
        shift = halves[:, side, None] * mine.frames[:, side]
        parts = [kept]
        parents = [whose[~yes]]
        for sign in (1.0, -1.0):
            centres = mine.centres + sign * shift
            parts.append(Boxes(centres, mine.frames, halves, mine.covers))
            parents.append(whose[yes])
    return joined(parts), np.concatenate(parents)
