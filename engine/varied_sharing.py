"""The field when parallel conductors share their current unequally, one by one.

Conductors are parallel where one run carries a label of a circuit in several of them,
or where several runs carry equal parts that make up all of it. What one takes more the
others carry less, each by its share, so that the whole current stays; it closes through
straight links between their ends.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents
from engine.conductor import Conductor
from engine.runs import Round

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: Parts that differ by less are equal.
_SAME = 1e-9
#: Ends nearer to each other than this need no link. [m]
_TOUCH = 1e-6
_LINK = Round(diameter=0.01)


@dataclass(frozen=True)
class Branch:
    """One of several parallel ways of a label's current.

    `rows` are its conductors, with the share that each carries; `share` their sum.
    """

    rows: tuple[tuple[int, float], ...]
    share: float


@dataclass(frozen=True)
class ParallelSet:
    """Parallel branches of one label of a circuit; `item` is the run named for them."""

    item: str
    circuit: str
    label: str
    branches: tuple[Branch, ...]

    @property
    def whole(self) -> float:
        """The share that all branches carry together."""
        return sum(branch.share for branch in self.branches)


def parallel_sets(conductors: Sequence[Conductor]) -> tuple[ParallelSet, ...]:
    """All parallel branches of runs, first within runs, then of whole runs."""
    carried: dict[tuple[str, str, str], list[tuple[int, float]]] = defaultdict(list)
    for row, conductor in enumerate(conductors):
        if conductor.role == "run":
            for load in conductor.loads:
                key = (conductor.item, load.circuit, load.label)
                carried[key].append((row, load.share))
    found = []
    by_label: dict[tuple[str, str], list[tuple[str, Branch]]] = defaultdict(list)
    for (item, circuit, label), rows in carried.items():
        if len(rows) > 1 and _same_sign([share for _, share in rows]):
            ways = tuple(Branch(((row, share),), share) for row, share in rows)
            found.append(ParallelSet(item, circuit, label, ways))
        whole = sum(share for _, share in rows)
        by_label[circuit, label].append((item, Branch(tuple(rows), whole)))
    for (circuit, label), runs in by_label.items():
        alike = _making_up_all(runs)
        if alike:
            ways = tuple(branch for _, branch in alike)
            found.append(ParallelSet(alike[0][0], circuit, label, ways))
    return tuple(found)


def _same_sign(shares: Sequence[float]) -> bool:
    return all(s > 0 for s in shares) or all(s < 0 for s in shares)


def _making_up_all(runs: list[tuple[str, Branch]]) -> list[tuple[str, Branch]]:
    """Runs whose equal parts sum to the whole current; empty where none do."""
    for _, first in runs:
        alike = [r for r in runs if abs(abs(r[1].share) - abs(first.share)) < _SAME]
        if len(alike) > 1 and abs(len(alike) * abs(first.share) - 1) < _SAME:
            return alike
    return []


class SharingAtPlace:
    """Fields of unequal sharing at q points.

    Parameters
    ----------
    responses : (m, q, 3) float
        Of all conductors. [T/A]
    points : (q, 3) float
        [m]
    """

    def __init__(
        self, conductors: Sequence[Conductor], responses: Floats, points: Floats
    ) -> None:
        self._conductors, self._responses = conductors, responses
        self._points = points

    def changes(
        self, parallel: ParallelSet, case: CaseCurrents, tolerance: float
    ) -> Complexes:
        """(v, c, q, 3) changes when each of v branches carries a part more. [T]

        With shares s of the sum S, the j-th of them by δ more makes them
        ``s_i (1 + δ) − δ s_j s_i / S`` for i = j, and ``s_i − δ s_j s_i / S`` for the
        others.
        """
        shares = np.array([abs(branch.share) for branch in parallel.branches])
        per_ampere = np.array([self._of_branch(b) for b in parallel.branches])
        per_ampere = per_ampere + self._links(parallel)
        moved = np.diag(shares) - np.outer(shares, shares) / shares.sum()
        phasor = case.phasors.values.get(
            (parallel.circuit, parallel.label),
            np.zeros(len(case.components), np.complex128),
        )
        # Per ampere of the branch's own positive share: the sign is in its conductors.
        found: Complexes = tolerance * np.einsum(
            "jk,kqx,c->jcqx", moved, per_ampere, phasor
        )
        return found

    def _of_branch(self, branch: Branch) -> Floats:
        """(q, 3) field of 1 A of the label in a branch. [T/A]"""
        rows = [row for row, _ in branch.rows]
        parts = np.array([share for _, share in branch.rows]) / abs(branch.share)
        found: Floats = np.einsum("m,mqx->qx", parts, self._responses[rows])
        return found

    def _links(self, parallel: ParallelSet) -> Floats:
        """(k, q, 3) field of 1 A that joins each branch at both of its ends. [T/A]"""
        ends = [self._ends(branch) for branch in parallel.branches]
        into, out = (np.array([e[k] for e in ends]) for k in range(2))
        paths = []
        for k in range(len(ends)):
            paths.append((into.mean(axis=0), into[k]))
            paths.append((out[k], out.mean(axis=0)))
        real = [k for k, (a, b) in enumerate(paths) if np.linalg.norm(b - a) > _TOUCH]
        per_ampere = np.zeros((len(paths), len(self._points), 3))
        if real:
            links = [_link(*paths[k]) for k in real]
            per_ampere[real] = field.responses(links, self._points)
        found: Floats = per_ampere[0::2] + per_ampere[1::2]
        return found

    def _ends(self, branch: Branch) -> tuple[Floats, Floats]:
        """Where its current comes in, and where it goes out. [m]"""
        paths = [self._conductors[row].path for row, _ in branch.rows]
        if branch.share < 0:
            paths = [path[::-1] for path in paths]
        return (
            np.mean([path[0] for path in paths], axis=0),
            np.mean([path[-1] for path in paths], axis=0),
        )


def _link(start: Floats, end: Floats) -> Conductor:
    path = np.array([start, end])
    along = (end - start) / np.linalg.norm(end - start)
    across = np.cross(along, np.eye(3)[int(np.argmin(np.abs(along)))])
    across /= np.linalg.norm(across)
    frame = np.array([across, np.cross(along, across)])
    return Conductor(
        key="link/sharing",
        item="",
        slot="",
        role="closing link",
        path=path,
        axes=np.array([frame, frame]),
        shape=_LINK,
        loads=(),
        group="sharing",
    )
