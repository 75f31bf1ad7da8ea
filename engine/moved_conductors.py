"""Conductors with one item a little elsewhere, or its spacings a little wider.

What is joined to the item's ends follows with its nearest vertex, so that currents that
closed still close. Directions across the conductors are kept: moves are small.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor

Floats = NDArray[np.float64]

#: Ends that are this near meet. [m]
_SAME_PLACE = 1e-7
#: Shorter pieces are none. [m]
_SHORTEST = 1e-9


@dataclass(frozen=True, eq=False)
class Moved:
    """The conductors that a move concerns.

    Attributes
    ----------
    indices : (k,) int
        Which of all conductors: those that move, and those that switch discretisation
        with them.
    conductors : k conductors or None
        As they are then; None for one that has shrunk to nothing.
    """

    indices: NDArray[np.int64]
    conductors: tuple[Conductor | None, ...]


def shifted(conductors: Sequence[Conductor], item: str, by: Floats) -> Moved:
    """All conductors of an item moved by a vector (3,). [m]"""
    return _moved(conductors, item, lambda path, _of: path + by)


def respaced(conductors: Sequence[Conductor], item: str, factor: float) -> Moved:
    """The slots of a run `factor` times as far from their middle, at every vertex.

    Raises
    ------
    ValueError
        When the conductors of the item have no common middle line.
    """
    paths = [c.path for c in conductors if c.item == item and c.role == "run"]
    if not has_middle_line(conductors, item):
        raise ValueError(f"the conductors of {item} have no common middle line")
    middle: Floats = np.mean(paths, axis=0)

    def spread(path: Floats, of: Conductor) -> Floats:
        if of.role == "run":
            wider: Floats = middle + factor * (path - middle)
            return wider
        # A closing link lies across one of the ends.
        ends = np.linalg.norm(middle[[0, -1]] - path.mean(axis=0), axis=1)
        end = middle[0 if ends[0] <= ends[1] else -1]
        link: Floats = end + factor * (path - end)
        return link

    return _moved(conductors, item, spread)


def has_middle_line(conductors: Sequence[Conductor], item: str) -> bool:
    """Whether an item is a run of several conductors with the same vertices."""
    own = [c for c in conductors if c.item == item and c.role == "run"]
    return len(own) > 1 and len({len(c.path) for c in own}) == 1


def _moved(
    conductors: Sequence[Conductor],
    item: str,
    new_path: Callable[[Floats, Conductor], Floats],
) -> Moved:
    paths: dict[int, Floats] = {}
    ends: list[Floats] = []
    by: list[Floats] = []
    for k, conductor in enumerate(conductors):
        if conductor.item == item and conductor.role != "joint link":
            path = new_path(conductor.path, conductor)
            paths[k] = path
            for end in (0, -1):
                ends.append(conductor.path[end])
                by.append(path[end] - conductor.path[end])
    if ends:
        _follow(conductors, np.array(ends), np.array(by), paths)
    groups = {conductors[k].group for k in paths}
    indices = [k for k, c in enumerate(conductors) if c.group in groups]
    made = [_with_path(conductors[k], paths.get(k)) for k in indices]
    return Moved(np.array(indices, np.int64), tuple(made))


def _follow(
    conductors: Sequence[Conductor], ends: Floats, by: Floats, paths: dict[int, Floats]
) -> None:
    """Add the paths of other conductors whose ends meet those that moved."""
    for k, conductor in enumerate(conductors):
        if k in paths:
            continue
        for end in (0, -1):
            away = np.abs(ends - conductor.path[end]).max(axis=1)
            nearest = int(away.argmin())
            if away[nearest] <= _SAME_PLACE:
                path = paths.setdefault(k, conductor.path.copy())
                path[end] = conductor.path[end] + by[nearest]


def _with_path(conductor: Conductor, path: Floats | None) -> Conductor | None:
    """The conductor along another path; pieces of no length are left out."""
    if path is None:
        return conductor
    steps = np.linalg.norm(np.diff(path, axis=0), axis=1)
    kept = np.concatenate([[True], steps > _SHORTEST])
    if np.count_nonzero(kept) < 2:
        return None
    new = np.ascontiguousarray(path[kept])
    new.flags.writeable = False
    return replace(conductor, path=new, axes=conductor.axes[kept])
