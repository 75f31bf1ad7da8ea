"""Zooming into the largest places of a grid until their maximum no longer changes."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseFields
from engine.evaluations import Quantity, evaluations
from engine.mask_edges import MaskEdges
from engine.regions import Region
from engine.sampling import held_inside
from engine.surface_cells import Cells

Floats = NDArray[np.float64]

#: Places that are zoomed into, at least two steps apart.
_CANDIDATES = 10
#: Zooming ends when the maximum changes by less, over the last step too beside a mask.
#: Relative.
_SETTLED = 1e-3
_MOST_ROUNDS = 12
#: Each round looks this much closer.
_CLOSER = 4.0
#: Candidates this far below the best are left. Relative.
_LEFT_BELOW = 0.9


class Zoom:
    """Candidates for the maximum of one quantity, and how near to it they are.

    Parameters
    ----------
    region : Region
        Places outside it are moved onto its edge.
    quantity : Quantity
        What is to be largest.
    cells : Cells
        The first grid of n places.
    score : (n,) float
        Of the grid's places, −inf where masked, somewhere finite.
    edges : MaskEdges
        Places that are hidden are moved onto them.
    """

    def __init__(
        self,
        region: Region,
        quantity: Quantity,
        cells: Cells,
        score: Floats,
        edges: MaskEdges,
    ) -> None:
        self.quantity = quantity
        self._edges = edges
        self._region = region
        self._grid = _grid(region)
        chosen = _candidates(cells, score)
        self._centres, self._values = cells.points[chosen], score[chosen]
        self._reach = cells.steps[chosen]
        self._rounds = 0
        self._step = float(np.max(self._reach))
        self.is_done = False
        self._places = self._next_places()

    @property
    def places(self) -> Floats:
        """(k, 3) places to score next. [m]"""
        return self._places.reshape(-1, 3)

    @property
    def end(self) -> tuple[Floats, float]:
        """The best position (3,) so far, and the last step. [m]"""
        return self._centres[int(np.argmax(self._values))], self._step

    def _next_places(self) -> Floats:
        """(candidates, k, 3) places around the candidates, inside the region."""
        around = self._reach[:, None, None] * self._grid
        places = (self._centres[:, None] + around).reshape(-1, 3)
        held = held_inside(self._region.outline, places)
        if _is_volume(self._region):
            low, high = (self._region.floor + h for h in self._region.volume)
            held = np.column_stack([held[:, :2], np.clip(held[:, 2], low, high)])
        variants = self._edges.variants(held)
        by_centre = variants.reshape(len(variants), len(self._centres), -1, 3)
        return by_centre.swapaxes(0, 1).reshape(len(self._centres), -1, 3)

    def take(self, scores: Floats) -> None:
        """Go on from the scores (k,) of the places."""
        best = float(np.max(self._values))
        tried = scores.reshape(len(self._centres), -1)
        pick = np.argmax(tried, axis=1)
        rows = np.arange(len(pick))
        better = tried[rows, pick] > self._values
        moved = self._places[rows, pick]
        self._centres = np.where(better[:, None], moved, self._centres)
        self._values = np.maximum(self._values, tried[rows, pick])
        self._step = float(np.max(self._reach)) * _spacing(self._region)
        self._rounds += 1
        reached = float(np.max(self._values))
        settled = reached - best < _SETTLED * reached and not self._is_at_mask(tried)
        if (self._rounds > 1 and settled) or self._rounds == _MOST_ROUNDS:
            self.is_done = True
            return
        kept = self._values >= _LEFT_BELOW * reached
        self._centres, self._values = self._centres[kept], self._values[kept]
        self._reach = self._reach[kept] / _CLOSER
        self._places = self._next_places()

    def _is_at_mask(self, tried: Floats) -> bool:
        """Whether a mask next to the best place may hide more than is settled.

        The mask's edge lies within a step; what is hidden there is about as much as
        the field changes over a step.
        """
        best = int(np.argmax(self._values))
        away = np.linalg.norm(self._places[best] - self._centres[best], axis=1)
        beside = tried[best][away <= 1.8 * self._step]
        open_beside = beside[np.isfinite(beside)]
        if len(open_beside) in (0, len(beside)):
            return False
        change = float(self._values[best] - np.min(open_beside))
        return change > _SETTLED * float(self._values[best])


def zoom_in(fields: CaseFields, region: Region, zooms: Sequence[Zoom]) -> None:
    """Take every zoom to its end, all of a round in one computation of the field."""
    while True:
        active = [zoom for zoom in zooms if not zoom.is_done]
        if not active:
            return
        in_case = evaluations(
            fields, region, np.concatenate([zoom.places for zoom in active])
        )
        start = 0
        for zoom in active:
            own = slice(start, start + len(zoom.places))
            start = own.stop
            evaluation = in_case[zoom.quantity.case].part(own)
            zoom.take(evaluation.score(zoom.quantity))


def _is_volume(region: Region) -> bool:
    return region.rule == "maximum over volume"


def _grid(region: Region) -> Floats:
    """(k, 3) places around a candidate, within ±1 of it either way."""
    if _is_volume(region):
        line = np.linspace(-1, 1, 7)
        return np.stack(np.meshgrid(line, line, line), axis=-1).reshape(-1, 3)
    line = np.linspace(-1, 1, 9)
    plan = np.stack(np.meshgrid(line, line), axis=-1).reshape(-1, 2)
    return np.column_stack([plan, np.zeros(len(plan))])


def _spacing(region: Region) -> float:
    """Distance of neighbours on the grid, of its reach."""
    return 1 / 3 if _is_volume(region) else 1 / 4


def _candidates(cells: Cells, score: Floats) -> NDArray[np.int64]:
    """Indices of the largest scores that lie at least two steps apart."""
    order = np.argsort(-score)[: int(np.count_nonzero(np.isfinite(score)))]
    points, steps = cells.points, cells.steps
    left = np.ones(len(order), bool)
    chosen: list[int] = []
    while len(chosen) < _CANDIDATES and np.any(left):
        first = order[int(np.argmax(left))]
        chosen.append(int(first))
        apart = np.linalg.norm(points[order] - points[first], axis=1)
        left &= apart >= 2 * np.maximum(steps[order], steps[first])
        left[order == first] = False
    return np.array(chosen, np.int64)
