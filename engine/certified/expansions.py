"""Field of conductors around the centres of boxes, and how wrong it can be in them."""

from __future__ import annotations

import os
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.certified.boxes import Boxes
from engine.certified.bundles import add_bundles, bundles_of
from engine.certified.residues import (
    AXES,
    DISC_COUNTS,
    DISC_PLACES,
    DISC_WEIGHTS,
    FARTHEST,
    HALF_A,
    HALF_B,
    IS_BOX,
    IS_ROUND,
    LINE_COUNTS,
    LINE_NODES,
    LINE_WEIGHTS,
    SLOPE,
    START,
    STOP,
    axis_residue,
    disc_residue,
    leg_table,
    line_residue,
)
from engine.certified.segments import ROWS, add_segment, derivative_bounds
from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.leg_bundles import distance_to_line
from engine.field.legs import leg_distance, legs_of

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]
Complexes = NDArray[np.complex128]

#: Times that the residue a leg may have is cut by four to keep within what is asked.
_TRIES = 6

#: Boxes that one thread takes at a time.
_CHUNK = 64


@dataclass(frozen=True, eq=False)
class Expansion:
    """Phasors of c components around the centres of n boxes.

    Attributes
    ----------
    rows : (c, n, 7, 3) complex
        Field, slopes along the box's three axes, curvatures 11, 12 and 22 of one set
        of filaments per box. [T], [T/m], [T/m²]
    third, second : (c, n) float
        Bounds of all third and second derivatives in the box's ball. [T/m³], [T/m²]
    residue : (c, n) float
        Bound of what the filaments differ from the sections in the ball; infinite
        where the ball comes too near to a conductor. [T]
    work : int
        Segments that were expanded.
    """

    rows: Complexes
    third: Floats
    second: Floats
    residue: Floats
    work: int


class Source:
    """Conductors with the currents of c components, tabulated for `expansion`.

    Parameters
    ----------
    conductors
        m of them.
    currents : (c, m) complex
        [A]
    needs : (m,) float
        What a residue of 1 T/A in each conductor counts, so that Σ needs · residue
        is to stay below 1. [A/T]
    """

    def __init__(
        self, conductors: Sequence[Conductor], currents: Complexes, needs: Floats
    ) -> None:
        flowing = np.flatnonzero(np.any(currents != 0, axis=0))
        carrying = [conductors[k] for k in flowing.tolist()]
        legs = legs_of(carrying)
        self._frames = legs.table
        self._legs = leg_table(carrying, legs.table)
        self._owner = legs.conductor
        self._needs = np.ascontiguousarray(needs[flowing])
        self._real = np.ascontiguousarray(currents[:, flowing].real)
        self._imaginary = np.ascontiguousarray(currents[:, flowing].imag)
        self._size = np.abs(currents[:, flowing])
        self._bundles = bundles_of(carrying, self._legs, currents[:, flowing])

    def expansion(self, boxes: Boxes) -> Expansion:
        """Expand around the centre of every box, in the box's own axes."""
        n, c = len(boxes), len(self._real)
        rows = np.zeros((2, n, c, ROWS, 3))
        sizes = np.zeros((n, c, 3))
        work = np.zeros(n, np.int64)
        reach = np.linalg.norm(boxes.halves, axis=1)

        def run(start: int) -> None:
            part = slice(start, start + _CHUNK)
            _expand(
                boxes.centres[part], boxes.frames[part], reach[part],
                self._legs, self._frames, self._owner, self._needs,
                self._bundles.table, self._bundles.flows, self._bundles.of_leg,
                self._real, self._imaginary, self._size,
                rows[:, part], sizes[part], work[part],
            )  # fmt: skip

        with ThreadPoolExecutor(os.cpu_count() or 1) as pool:
            for done in [pool.submit(run, k) for k in range(0, n, _CHUNK)]:
                done.result()
        phasors = rows[0] + 1j * rows[1]
        return Expansion(
            np.moveaxis(phasors, 1, 0),
            sizes[:, :, 0].T,
            sizes[:, :, 1].T,
            sizes[:, :, 2].T,
            int(work.sum()),
        )


@compiled
def _expand(
    centres: Floats,
    frames: Floats,
    reach: Floats,
    legs: Floats,
    boxes: Floats,
    owner: Integers,
    needs: Floats,
    bundles: Floats,
    flows: Floats,
    of_leg: Integers,
    real: Floats,
    imaginary: Floats,
    size: Floats,
    rows: Floats,
    sizes: Floats,
    work: Integers,
) -> None:
    k = legs.shape[0]
    gaps, errors = np.empty((k, 3)), np.empty(k)
    rules = np.empty((k, 2), np.int64)
    own = np.zeros((ROWS, 3))
    together = np.zeros(bundles.shape[0], np.bool_)
    for i in range(centres.shape[0]):
        if not _gaps(centres[i], reach[i], legs, boxes, gaps):
            sizes[i] = np.inf
            continue
        _choose(legs, owner, needs, gaps, rules, errors)
        add_bundles(bundles, flows, centres[i], reach[i], sizes[i], together)
        third = second = error = 0.0
        for j in range(k):
            work[i] += _add_leg(legs[j], rules[j], centres[i], frames[i], own)
            error += errors[j]
            if of_leg[j] < 0 or not together[of_leg[j]]:
                bounds = _leg_bounds(legs[j], rules[j], centres[i], reach[i])
                third, second = third + bounds[0], second + bounds[1]
            if j + 1 < k and owner[j + 1] == owner[j]:
                continue
            m = owner[j]
            for c in range(real.shape[0]):
                for r in range(ROWS):
                    for x in range(3):
                        rows[0, i, c, r, x] += real[c, m] * own[r, x]
                        rows[1, i, c, r, x] += imaginary[c, m] * own[r, x]
                sizes[i, c, 0] += size[c, m] * third
                sizes[i, c, 1] += size[c, m] * second
                sizes[i, c, 2] += size[c, m] * error
            own[:] = 0.0
            third = second = error = 0.0


@compiled
def _apart(point: Floats, other: Floats) -> float:
    x, y, z = point[0] - other[0], point[1] - other[1], point[2] - other[2]
    return float(np.sqrt(x * x + y * y + z * z))


@compiled
def _gaps(
    centre: Floats, reach: float, legs: Floats, boxes: Floats, gaps: Floats
) -> bool:
    """Least distances of the ball to every leg's filaments and to their ends.

    False where the ball may touch a conductor.
    """
    for j in range(legs.shape[0]):
        leg = legs[j]
        within = leg[FARTHEST] + reach
        gap = distance_to_line(centre, leg) - within
        if leg[IS_ROUND] == 0.0 and leg[IS_BOX] > 0.0 and gap < 4.0 * leg[FARTHEST]:
            # The distance to a mitred bar grows by its slope at most per metre.
            to_bar = leg_distance(boxes[j], centre[0], centre[1], centre[2])
            gap = max(gap, to_bar / leg[SLOPE] - reach)
        if gap <= 0.0:
            return False
        gaps[j, 0] = gap
        gaps[j, 1] = _apart(centre, leg[START : START + 3]) - within
        gaps[j, 2] = _apart(centre, leg[STOP : STOP + 3]) - within
    return True


@compiled
def _choose(
    legs: Floats,
    owner: Integers,
    needs: Floats,
    gaps: Floats,
    rules: Integers,
    errors: Floats,
) -> None:
    """Rules for all legs so that the residues together count below 1, if they can."""
    # Most legs are far away and leave nearly nothing.
    share = 0.25
    errors[:] = np.inf
    for _ in range(_TRIES):
        total = 0.0
        for j in range(legs.shape[0]):
            need = needs[owner[j]]
            if need * errors[j] <= share:
                total += need * errors[j]
                continue
            allowed = share / need if need > 0.0 else np.inf
            errors[j] = _rule_of(legs[j], gaps[j], allowed, rules[j])
            total += need * errors[j]
        if total <= 1.0:
            return
        share /= 4.0


@compiled
def _rule_of(leg: Floats, gaps: Floats, allowed: float, rule: Integers) -> float:
    """The first rule whose residue is allowed, or the best; its residue. [T/A]"""
    if leg[IS_ROUND] > 0.0:
        rule[1] = 0
        rule[0] = 0
        best = axis_residue(leg, gaps[0], gaps[1], gaps[2])
        for r in range(1, DISC_COUNTS.shape[0]):
            if best <= allowed:
                break
            error = disc_residue(leg, r, gaps[0])
            if error < best:
                best, rule[0] = error, r
        return float(best)
    total = 0.0
    for side in range(2):
        best, rule[side] = np.inf, 0
        for r in range(LINE_COUNTS.shape[0]):
            error = line_residue(leg, side, r, gaps[0])
            if error < best:
                best, rule[side] = error, r
            if best <= 0.5 * allowed:
                break
        total += best
    return float(total)


@compiled
def _counts(leg: Floats, rule: Integers) -> tuple[int, int]:
    """How many filaments a rule has along the two sides of a section."""
    if leg[IS_ROUND] > 0.0:
        return DISC_COUNTS[rule[0]], 1
    return LINE_COUNTS[rule[0]], LINE_COUNTS[rule[1]]


@compiled
def _filament(
    leg: Floats, rule: Integers, f: int, g: int, p0: Floats, p1: Floats
) -> float:
    """Write the ends of one filament; the share of the current that it has."""
    if leg[IS_ROUND] > 0.0:
        a = leg[HALF_A] * DISC_PLACES[rule[0], f, 0]
        b = leg[HALF_A] * DISC_PLACES[rule[0], f, 1]
        weight = DISC_WEIGHTS[rule[0], f]
    else:
        a = leg[HALF_A] * LINE_NODES[rule[0], f]
        b = leg[HALF_B] * LINE_NODES[rule[1], g]
        weight = LINE_WEIGHTS[rule[0], f] * LINE_WEIGHTS[rule[1], g]
    for x in range(3):
        p0[x] = leg[x] + a * leg[AXES + x] + b * leg[AXES + 6 + x]
        p1[x] = leg[3 + x] + a * leg[AXES + 3 + x] + b * leg[AXES + 9 + x]
    return float(weight)


@compiled
def _add_leg(
    leg: Floats, rule: Integers, centre: Floats, frame: Floats, out: Floats
) -> int:
    """Add the expansions of a leg's filaments; how many there are."""
    p0, p1 = np.empty(3), np.empty(3)
    along, across = _counts(leg, rule)
    for f in range(along):
        for g in range(across):
            weight = _filament(leg, rule, f, g, p0, p1)
            add_segment(p0, p1, centre, frame, weight, out)
    return int(along * across)


@compiled
def _leg_bounds(
    leg: Floats, rule: Integers, centre: Floats, reach: float
) -> tuple[float, float]:
    """Bounds of third and second derivatives of a leg's filaments together."""
    p0, p1 = np.empty(3), np.empty(3)
    along, across = _counts(leg, rule)
    third = second = 0.0
    for f in range(along):
        for g in range(across):
            weight = _filament(leg, rule, f, g, p0, p1)
            bounds = derivative_bounds(p0, p1, centre, reach)
            third += weight * bounds[0]
            second += weight * bounds[1]
    return third, second
