"""Which boxes lie in places where nobody is: wholly, in part, or not at all."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from engine.case_fields import CaseCurrents
from engine.certified.boxes import Boxes
from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.legs import leg_distance, legs_of
from engine.masks import Keepout

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

#: States of a box.
OPEN, PART, MASKED = 0, 1, 2

#: As for points: so near to a mask's surface a place lies on it. [m]
_ON_SURFACE = 1e-9


@dataclass(frozen=True, eq=False)
class Masked:
    """How n boxes at q heights are masked in one case.

    Attributes
    ----------
    states : (q, n) int8
        Open, masked in a part, or masked wholly.
    ties : (q, n) int64
        Heights of one box that are masked in a part and have the same number here are
        masked by the same upright things, so over each place on plan all or none.
    loose : (q, n) bool
        Masked in a part by something else besides, or only.
    """

    states: NDArray[np.int8]
    ties: NDArray[np.int64]
    loose: Bools

    def __getitem__(self, which: Bools) -> Masked:
        """Some of the boxes."""
        return Masked(self.states[:, which], self.ties[:, which], self.loose[:, which])

    @property
    def hidden(self) -> Bools:
        """(n,) boxes wholly masked at all heights."""
        hidden: Bools = np.all(self.states == MASKED, axis=0)
        return hidden


class Masks:
    """Conductors at their clearance, and what is closed in each case.

    A place counts from `clearance` on; conductors without current mask too.
    """

    def __init__(
        self,
        conductors: Sequence[Conductor],
        cases: Sequence[CaseCurrents],
        clearance: float,
    ) -> None:
        self._legs = legs_of(conductors).table
        self._slopes = slopes_of(self._legs)
        self._clearance = clearance
        self._closed = [case.closed for case in cases]
        items = dict.fromkeys(k.key for closed in self._closed for k in closed)
        # Sums of these stand for sets; two sets of one sum do not happen.
        marks = np.random.default_rng(1).integers(
            1, 2**62, len(self._legs) + len(items)
        )
        self._leg_marks = marks[: len(self._legs)]
        self._marks = dict(zip(items, marks[len(self._legs) :].tolist(), strict=True))

    def of(self, boxes_at_heights: Sequence[Boxes]) -> list[Masked]:
        """How the same boxes at q heights are masked, case by case."""
        at = list(
            zip(
                *(self._at(b, -1 - h) for h, b in enumerate(boxes_at_heights)),
                strict=True,
            )
        )
        return [
            Masked(*(np.stack([parts[k] for parts in of_what]) for of_what in at))
            for k in range(len(self._closed))
        ]

    def _at(
        self, boxes: Boxes, untied: int
    ) -> tuple[NDArray[np.int8], NDArray[np.int64], Bools]:
        """(cases, n) states, ties, or `untied`, and what is loose."""
        legs, reach = self._legs, boxes.reaches
        bound = self._clearance if self._clearance > 0 else 1e-12
        most, marks, loose = _to_legs(
            legs, self._slopes, self._leg_marks, boxes.centres, reach, bound
        )
        hidden = most < self._clearance * (1 - 1e-9)
        states = np.full((len(self._closed), len(boxes)), OPEN, np.int8)
        ties = np.full(states.shape, untied, np.int64)
        shadow = _shadow(boxes) if any(self._closed) else None
        heights = boxes.corners[:, :, 2]
        low, high = heights.min(axis=1), heights.max(axis=1)
        known: dict[tuple[str, bool], tuple[Bools, Bools]] = {}
        for row, tie, closed in zip(states, ties, self._closed, strict=True):
            whose = marks.copy()
            row[(marks != 0) | loose] = PART
            for keepout in closed:
                if keepout.key not in known:
                    known[keepout.key] = _in_prism(keepout, shadow, low, high)
                inside, near = known[keepout.key]
                row[near] = np.maximum(row[near], PART)
                row[inside] = MASKED
                whose[near] += self._marks[keepout.key]
            row[hidden] = MASKED
            tie[whose != 0] = whose[whose != 0]
        return states, ties, np.broadcast_to(loose, states.shape)


def slopes_of(legs: Floats) -> Floats:
    """(k,) most by which the distance to each leg grows per metre.

    It is measured along the leg to a mitre plane, askew to the shortest way.
    """
    ends = legs[:, 15:19].reshape(-1, 2, 2)
    askew = 1.0 + (ends**2).sum(axis=2).max(axis=1, initial=0.0)
    slopes: Floats = np.where(legs[:, 19] > 0, 1.0, np.sqrt(askew))
    return slopes


@compiled
def _to_legs(
    legs: Floats,
    slopes: Floats,
    leg_marks: NDArray[np.int64],
    centres: Floats,
    reach: Floats,
    clearance: float,
) -> tuple[Floats, NDArray[np.int64], Bools]:
    """Of each ball: most distance to the nearest surface, and the legs within reach.

    Those that are upright over the whole ball as the sum of their marks, and whether
    there are others.
    """
    n = centres.shape[0]
    most, marks = np.full(n, np.inf), np.zeros(n, np.int64)
    loose = np.zeros(n, np.bool_)
    for i in range(n):
        for k in range(legs.shape[0]):
            leg = legs[k]
            d = leg_distance(leg, centres[i, 0], centres[i, 1], centres[i, 2])
            most[i] = min(most[i], d + slopes[k] * reach[i])
            if d - slopes[k] * reach[i] >= clearance:
                continue
            along = (centres[i, 2] - leg[2]) * leg[5]
            first = abs(leg[15]) * leg[13] + abs(leg[16]) * leg[14] + reach[i]
            last = abs(leg[17]) * leg[13] + abs(leg[18]) * leg[14] + reach[i]
            if leg[3] == 0.0 and leg[4] == 0.0 and first <= along <= leg[12] - last:
                marks[i] += leg_marks[k]
            else:
                loose[i] = True
    return most, marks, loose


def _shadow(boxes: Boxes) -> NDArray[np.object_]:
    """(n,) what the boxes cover on plan."""
    corners = boxes.corners[:, :, :2]
    count = corners.shape[1]
    points = shapely.points(corners.reshape(-1, 2))
    groups = np.repeat(np.arange(len(boxes)), count)
    made: NDArray[np.object_] = shapely.convex_hull(
        shapely.multipoints(points, indices=groups)
    )
    return made


def _in_prism(
    keepout: Keepout, shadow: NDArray[np.object_] | None, low: Floats, high: Floats
) -> tuple[Bools, Bools]:
    """Which boxes lie wholly inside, and which may touch the inside."""
    assert shadow is not None, "where something is closed the shadows are known"
    bottom, top = keepout.z_from + _ON_SURFACE, keepout.z_to - _ON_SURFACE
    inside = (low > bottom) & (high < top)
    near = (high > bottom) & (low < top)
    shapely.prepare(keepout.outline)
    inside[inside] = shapely.contains_properly(keepout.outline, shadow[inside])
    near[near] = shapely.intersects(keepout.outline, shadow[near])
    return inside, near
