"""Boxes that are cut where a quantity may be larger than what was found."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from engine.case_fields import CaseFields
from engine.certificate import Certificate
from engine.certified.boxes import Boxes, joined
from engine.certified.covers import Cover, covers_of
from engine.certified.expansions import Source
from engine.certified.masking import Masks
from engine.certified.upper_scores import (
    centre_scores,
    enclosure,
    unit_scores,
    upper_scores,
)
from engine.evaluations import Quantity, evaluation_at
from engine.regions import Region
from engine.sampling import held_inside
from engine.zone_search import Found, found_at

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: Boxes with a smaller half diagonal are not cut. [m]
SMALLEST = 2e-4

#: Smaller boxes without a bound lie at a conductor where there is no clearance. [m]
_TOUCHING = 2e-3

#: Part of the tolerance that the residues of filaments may take.
_RESIDUE_PART = 0.1

#: What a box takes besides its segments, in segments.
_BOX_WORK = 2000

_BATCH = 512
_TRIES = 4  # centres per batch that are looked at as places of the maximum

#: Rounding of the sums, far below. Relative.
_ROUNDING = 1e-9

NO_FIELD = "There is no field to bound."


def unproven(
    found: Sequence[Found], tolerance: float, reason: str
) -> list[tuple[Certificate, Found]]:
    """Certificates that prove nothing, and why."""
    return [
        (Certificate(None, f.score, _point(f.position), tolerance, False, 0, reason), f)
        for f in found
    ]


def _point(position: Floats) -> tuple[float, float, float]:
    x, y, z = (float(c) for c in position)
    return x, y, z


class Branching:
    """The boxes still open, and the bounds of those that are done.

    Quantities that are largest at the same place share one row, whose number is in
    `row_of`; `asked` has the first of each. `touches`: some small box has no bound.
    """

    def __init__(
        self,
        fields: CaseFields,
        region: Region,
        quantities: Sequence[Quantity],
        found: Sequence[Found],
        tolerance: float,
    ) -> None:
        self._fields, self._region, self._tolerance = fields, region, tolerance
        self._quantities, self._found = list(quantities), list(found)
        self.asked: list[int] = []
        self._row_of: list[int | None] = []
        self._share_rows()
        self._scores = np.array([found[k].score for k in self.asked])
        self._places: list[Floats | None] = [None] * len(self.asked)
        self._steps = np.zeros(len(self.asked))
        self._covers: list[Cover] = covers_of(fields, region)
        self._masks = Masks(fields.conductors, fields.cases, region.clearance)
        self._source = self._needed_source()
        self.open = joined([cover.start() for cover in self._covers])
        shape = (len(self.open), len(self.asked))
        self._upper, self._alive = np.full(shape, np.inf), np.ones(shape, np.bool_)
        self._settled, self._stuck = np.zeros((2, len(self.asked)))
        self.work, self._cells = 0, 0
        self.touches = False

    def _share_rows(self) -> None:
        rows: dict[tuple[object, ...], int] = {}
        for k, (quantity, found) in enumerate(
            zip(self._quantities, self._found, strict=True)
        ):
            if not found.score > 0:
                self._row_of.append(None)
                continue
            case = self._fields.cases[quantity.case]
            key = quantity.same_place_as(case.frequencies)
            if key not in rows:
                rows[key] = len(self.asked)
                self.asked.append(k)
            self._row_of.append(rows[key])

    def _rows_of_case(self, case: int) -> list[int]:
        return [
            row for row, k in enumerate(self.asked) if self._quantities[k].case == case
        ]

    def _slices(self) -> list[slice]:
        """Rows of each case's components in the currents of all."""
        ends = np.cumsum([0] + [len(case.components) for case in self._fields.cases])
        return [slice(a, b) for a, b in pairwise(ends.tolist())]

    def _needed_source(self) -> Source:
        """All currents, and how small the residue of each conductor has to be."""
        cases = self._fields.cases
        needs = np.zeros(len(self._fields.conductors))
        allowed = _RESIDUE_PART * self._tolerance * self._scores
        for k, case in enumerate(cases):
            for row in self._rows_of_case(k):
                per_tesla = unit_scores(case, self._quantities[self.asked[row]])
                need = per_tesla @ np.abs(case.currents) / allowed[row]
                needs = np.maximum(needs, need)
        currents = np.concatenate([case.currents for case in cases])
        return Source(self._fields.conductors, currents, needs)

    def step(self) -> None:
        """Cut the boxes that may hold the most, and bound their parts."""
        over = np.where(self._alive, self._upper / self._scores, 0.0).max(axis=1)
        count = min(_BATCH, len(over))
        chosen = np.argpartition(-over, count - 1)[:count]
        kept = np.ones(len(over), np.bool_)
        kept[chosen] = False
        boxes, parents = self._split(self.open[chosen])
        above, alive = self._upper[chosen][parents], self._alive[chosen][parents]
        self.open = self.open[kept]
        self._upper, self._alive = self._upper[kept], self._alive[kept]
        if len(boxes):
            self._bound(boxes, above, alive)

    def _split(self, boxes: Boxes) -> tuple[Boxes, NDArray[np.int64]]:
        parts, parents = [], [np.zeros(0, np.int64)]
        for number in np.unique(boxes.covers):
            own = np.flatnonzero(boxes.covers == number)
            made, whose = self._covers[number].split(boxes[own])
            parts.append(made)
            parents.append(own[whose])
        return joined(parts), np.concatenate(parents)

    def _tight(self, boxes: Boxes) -> Boxes:
        parts, order = [], [np.zeros(0, np.int64)]
        for number in np.unique(boxes.covers):
            own = np.flatnonzero(boxes.covers == number)
            parts.append(self._covers[number].tight(boxes[own]))
            order.append(own)
        back = np.argsort(np.concatenate(order))
        return joined(parts)[back]

    def _bound(self, boxes: Boxes, above: Floats, alive: Bools) -> None:
        tight = self._tight(boxes)
        raised = [tight.raised(float(by)) for by in self._region.offsets]
        masks = self._masks.of(raised)
        for row, k in enumerate(self.asked):
            alive[:, row] &= ~masks[self._quantities[k].case].hidden
        left: Bools = np.any(alive, axis=1)
        if not np.any(left):
            return
        boxes, tight, masks = boxes[left], tight[left], [m[left] for m in masks]
        above, alive = above[left], alive[left]
        expansions = [self._source.expansion(r[left]) for r in raised]
        self.work += sum(e.work for e in expansions) + _BOX_WORK * len(boxes)
        self._cells += len(boxes)
        enclosed = enclosure(tight, expansions)
        upper = above.copy()
        for k, which in enumerate(self._slices()):
            rows = self._rows_of_case(k)
            if not rows:
                continue
            own = enclosed.of_components(which)
            asked = [self._quantities[self.asked[row]] for row in rows]
            case = self._fields.cases[k]
            bounds = upper_scores(case, asked, own, masks[k]) * (1 + _ROUNDING)
            upper[:, rows] = np.minimum(upper[:, rows], bounds.T)
            middles = centre_scores(case, asked, own, masks[k])
            for row, scores in zip(rows, middles, strict=True):
                self._look(row, tight, np.where(alive[:, row], scores, 0.0))
        self._sort(boxes, upper, alive)

    def _sort(self, boxes: Boxes, upper: Floats, alive: Bools) -> None:
        """Keep what is to be cut further; note the bounds of the rest."""
        done = alive & (upper <= self._scores * (1 + self._tolerance))
        small = alive & ~done & (boxes.reaches < SMALLEST)[:, None]
        self._settled = np.maximum(self._settled, np.where(done, upper, 0).max(axis=0))
        self._stuck = np.maximum(self._stuck, np.where(small, upper, 0).max(axis=0))
        alive = alive & ~done & ~small
        unbounded = np.isinf(upper) & alive & (boxes.reaches < _TOUCHING)[:, None]
        self.touches |= bool(np.any(unbounded))
        left: Bools = np.any(alive, axis=1)
        self.open = joined([self.open, boxes[left]])
        self._upper = np.concatenate([self._upper, upper[left]])
        self._alive = np.concatenate([self._alive, alive[left]])
        # The value found may have grown.
        over = self._alive & (self._upper > self._scores * (1 + self._tolerance))
        fallen = self._alive & ~over
        highest = np.where(fallen, self._upper, 0.0).max(axis=0, initial=0.0)
        self._settled = np.maximum(self._settled, highest)
        kept: Bools = np.any(over, axis=1)
        self.open = self.open[kept]
        self._upper, self._alive = self._upper[kept], over[kept]

    def _look(self, row: int, boxes: Boxes, scores: Floats) -> None:
        """Take a centre as the place of the maximum where it is higher and open."""
        better = np.flatnonzero(scores > self._scores[row] * (1 + _ROUNDING))
        for i in better[np.argsort(-scores[better])][:_TRIES]:
            score = self._score_at(row, boxes.centres[i])
            if score > self._scores[row]:
                self._scores[row], self._places[row] = score, boxes.centres[i]
                self._steps[row] = boxes.reaches[i]
                return

    def _score_at(self, row: int, place: Floats) -> float:
        """As it is reported; −inf outside of the region or where nobody is."""
        region = self._region
        held = held_inside(region.outline, place[None])
        if np.abs(held - place).max() > _ROUNDING:
            return -np.inf
        if region.rule == "maximum over volume":
            low, high = (region.floor + height for height in region.volume)
            if not low - _ROUNDING <= place[2] <= high + _ROUNDING:
                return -np.inf
        quantity = self._quantities[self.asked[row]]
        case = self._fields.cases[quantity.case]
        evaluation = evaluation_at(self._fields, region, case, place)
        return float(evaluation.score(quantity)[0])

    def results(self) -> list[tuple[Certificate, Found]]:
        """What is proven so far of every quantity."""
        highest = np.where(self._alive, self._upper, 0.0).max(axis=0, initial=0.0)
        left: Bools = np.any(self._alive, axis=0)
        highest = np.maximum(highest, np.maximum(self._settled, self._stuck))
        results = []
        for k, row in enumerate(self._row_of):
            if row is None:
                results += unproven([self._found[k]], self._tolerance, NO_FIELD)
                continue
            better = self._better(k, row)
            share = self._found[k].score / self._found[self.asked[row]].score
            upper = max(float(highest[row]) * share, better.score)
            certificate = self._certificate(better, upper, bool(left[row]))
            results.append((certificate, better))
        return results

    def best(self) -> list[Found]:
        """The largest values so far."""
        return [
            self._found[k] if row is None else self._better(k, row)
            for k, row in enumerate(self._row_of)
        ]

    def _better(self, k: int, row: int) -> Found:
        """The value found, or the one at a centre that is higher."""
        place, before = self._places[row], self._found[k]
        if place is None:
            return before
        quantity = self._quantities[k]
        case = self._fields.cases[quantity.case]
        evaluation = evaluation_at(self._fields, self._region, case, place)
        step = float(self._steps[row])
        now = found_at(evaluation, quantity, place, step, before.area_above)
        return now if now.score > before.score else before

    def _certificate(self, found: Found, upper: float, is_left: bool) -> Certificate:
        reached = upper <= found.score * (1 + self._tolerance * (1 + 1e-6))
        reason = ""
        if not reached:
            reason = (
                "The limit of work came first."
                if is_left
                else (
                    f"Beside masked places boxes of {1000 * SMALLEST:g} mm are not "
                    "enough."
                )
            )
        known = upper if np.isfinite(upper) else None
        return Certificate(
            known, found.score, _point(found.position), self._tolerance, reached,
            self._cells, reason,
        )  # fmt: skip
