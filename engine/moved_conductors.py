"""Conductors with one item a little elsewhere, or its spacings a little wider.

What is joined to the item's ends follows with its nearest vertex, so that currents that
closed still close. Directions across the conductors are kept: moves are small.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.run_conductors import Same

Floats = NDArray[np.float64]

#: Ends whose coordinates are alike to so many decimals meet.
_DECIMALS = 7
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


def shifted(conductors: tuple[Conductor, ...], item: str, by: Floats) -> Moved:
    """All conductors of an item moved by a vector (3,). [m]"""
    return _moved(conductors, item, lambda path, _of: path + by)


def respaced(conductors: tuple[Conductor, ...], item: str, factor: float) -> Moved:
    """The slots of a run `factor` times as far from their middle, at every vertex.

    Raises
    ------
    ValueError
        When the conductors of the item have no common middle line.
    """
    own = (conductors[k] for k in _ties(Same(conductors)).items.get(item, ()))
    paths = [c.path for c in own if c.role == "run"]
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


def has_middle_line(conductors: tuple[Conductor, ...], item: str) -> bool:
    """Whether an item is a run of several conductors with the same vertices."""
    own = (conductors[k] for k in _ties(Same(conductors)).items.get(item, ()))
    counts = [len(c.path) for c in own if c.role == "run"]
    return len(counts) > 1 and len(set(counts)) == 1


@dataclass(frozen=True, eq=False)
class _Ties:
    """Where conductors meet, and which switch discretisation together.

    Attributes
    ----------
    ends : dict
        By place, the conductors that end there: pairs of index and 0 or −1.
    groups, items : dict
        Indices by group and by item.
    """

    ends: dict[tuple[float, ...], list[tuple[int, int]]]
    groups: dict[str, list[int]]
    items: dict[str, list[int]]


@lru_cache(maxsize=4)
def _ties(same: Same[tuple[Conductor, ...]]) -> _Ties:
    ends: dict[tuple[float, ...], list[tuple[int, int]]] = {}
    groups: dict[str, list[int]] = {}
    items: dict[str, list[int]] = {}
    for k, conductor in enumerate(same.value):
        groups.setdefault(conductor.group, []).append(k)
        items.setdefault(conductor.item, []).append(k)
        for end in (0, -1):
            ends.setdefault(_place(conductor.path[end]), []).append((k, end))
    return _Ties(ends, groups, items)


def _place(point: Floats) -> tuple[float, ...]:
    # Zero added, so that minus zero is the same place.
    return tuple(round(x, _DECIMALS) + 0.0 for x in point.tolist())


def _moved(
    conductors: tuple[Conductor, ...],
    item: str,
    new_path: Callable[[Floats, Conductor], Floats],
) -> Moved:
    ties = _ties(Same(conductors))
    own = [k for k in ties.items.get(item, ()) if conductors[k].role != "joint link"]
    moving = frozenset(own)
    paths = {k: new_path(conductors[k].path, conductors[k]) for k in own}
    for k in own:
        for end in (0, -1):
            before = conductors[k].path[end]
            for other, its_end in ties.ends[_place(before)]:
                if other not in moving:
                    path = paths.setdefault(other, conductors[other].path.copy())
                    path[its_end] = conductors[other].path[its_end] + (
                        paths[k][end] - before
                    )
    indices = sorted({j for k in paths for j in ties.groups[conductors[k].group]})
    made = [_with_path(conductors[k], paths.get(k)) for k in indices]
    return Moved(np.array(indices, np.int64), tuple(made))


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
