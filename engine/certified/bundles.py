"""Parallel legs taken together, so that currents that cancel do so in the bounds too.

A filament from P₀ + D₀ to P₁ + D₁ differs from one from P₀ to P₁ by the integral over
s from 0 to 1 of the derivative along the displacement sD. Of that, third derivatives
in space are at most (see `segments`; L is the length, Δ = D₁ − D₀)

    µ₀ / 4π · ( |D| (1 + |Δ|/L) · 5! ∫ dl / r⁶ + |Δ|/L · 4! ∫ dl / r⁵ )   per ampere,

with r to the nearest of the filaments in between, and second ones the same with 4! and
3! and one power less. The legs of one bundle so count with their sum of phasors at the
middle of the bundle, and each alone only with how far it lies from there.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.certified.residues import FARTHEST, LONGEST, SHORTEST, START, STOP
from engine.certified.segments import derivative_bounds, power_integrals
from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.kernel import MU0_OVER_4PI

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]
Complexes = NDArray[np.complex128]

#: Columns of the table of bundles: ends of the middle, farthest filament, most change.
_START, _STOP, _REACH, _CHANGE = 0, 3, 6, 7
_COLUMNS = 8

#: Columns of what flows in a bundle: |Σ I|, Σ |I|, Σ |I| |D|, Σ |I| |Δ|.
_NET, _TOTAL, _SPREAD, _TWIST = 0, 1, 2, 3


@dataclass(frozen=True, eq=False)
class Bundles:
    """b bundles of parallel legs.

    Attributes
    ----------
    table : (b, 8) float
        Middle filament, the farthest that another lies from it, the most that its
        displacement changes over the length. [m]
    flows : (b, c, 4) float
        Of each component |Σ I| [A], Σ |I| [A], Σ |I| |D| [A m], Σ |I| |Δ| [A m].
    of_leg : (k,) int
        Bundle of each leg; -1 for a leg alone.
    """

    table: Floats
    flows: Floats
    of_leg: Integers


def bundles_of(
    conductors: Sequence[Conductor], legs: Floats, currents: Complexes
) -> Bundles:
    """Bundle legs that follow each other in conductors of one group and role.

    Parameters
    ----------
    legs : (k, 33) float
        `leg_table` of the conductors, leg after leg.
    currents : (c, m) complex
        [A]
    """
    members: dict[tuple[str, str, int, int], list[tuple[int, int]]] = defaultdict(list)
    row = 0
    for m, conductor in enumerate(conductors):
        count = len(conductor.path) - 1
        for leg in range(count):
            key = (conductor.group, conductor.role, count, leg)
            members[key].append((row, m))
            row += 1
    bundles = [rows for rows in members.values() if len(rows) > 1]
    table = np.zeros((len(bundles), _COLUMNS))
    flows = np.zeros((len(bundles), len(currents), 4))
    of_leg = np.full(row, -1)
    for b, rows in enumerate(bundles):
        own, whose = np.array(rows).T
        of_leg[own] = b
        table[b], flows[b] = _bundle(legs[own], currents[:, whose])
    return Bundles(table, flows, of_leg)


def _bundle(legs: Floats, currents: Complexes) -> tuple[Floats, Floats]:
    ends = np.stack([legs[:, START : START + 3], legs[:, STOP : STOP + 3]])
    middle = ends.mean(axis=1)
    away = ends - middle[:, None]
    sections = 0.5 * (legs[:, LONGEST] - legs[:, SHORTEST])
    reach = np.linalg.norm(away, axis=2).max(axis=0) + legs[:, FARTHEST]
    change = np.linalg.norm(away[1] - away[0], axis=1) + sections
    size = np.abs(currents)
    row = np.array([*middle.ravel(), reach.max(), change.max()])
    flows = [np.abs(currents.sum(axis=1)), size.sum(axis=1), size @ reach]
    return row, np.stack([*flows, size @ change], axis=1)


@compiled
def add_bundles(
    table: Floats,
    flows: Floats,
    centre: Floats,
    reach: float,
    sizes: Floats,
    together: NDArray[np.bool_],
) -> None:
    """Add the bounds of all bundles that are smaller than those of their legs.

    Parameters
    ----------
    table, flows
        Of `Bundles`.
    centre : (3,) float
        Of the ball. [m]
    reach : float
        Its radius. [m]
    sizes : (c, 3) float
        Bounds of third and second derivatives in the first two columns; added to.
    together : (b,) bool
        Written: which bundles were added; of the others the legs are to be.
    """
    bounds = np.empty((2, 3))
    for b in range(table.shape[0]):
        together[b] = _bounds(table[b], centre, reach, bounds)
        if not together[b]:
            continue
        whole = alone = 0.0
        for c in range(flows.shape[1]):
            flow = flows[b, c]
            alone += flow[_TOTAL] * bounds[0, 0]
            whole += flow[_NET] * bounds[0, 0] + flow[_SPREAD] * bounds[0, 1]
            whole += flow[_TWIST] * bounds[0, 2]
        if whole >= alone:
            together[b] = False
            continue
        for c in range(flows.shape[1]):
            flow = flows[b, c]
            for k in range(2):
                sizes[c, k] += flow[_NET] * bounds[k, 0] + flow[_SPREAD] * bounds[k, 1]
                sizes[c, k] += flow[_TWIST] * bounds[k, 2]


@compiled
def _bounds(bundle: Floats, centre: Floats, reach: float, out: Floats) -> bool:
    """Third and second derivatives: per A, per A m away, per A m of change.

    False where the ball may touch the bundle.
    """
    p0, p1 = bundle[_START : _START + 3], bundle[_STOP : _STOP + 3]
    x, y, z = p1[0] - p0[0], p1[1] - p0[1], p1[2] - p0[2]
    length = np.sqrt(x * x + y * y + z * z)
    if not length > 0.0:
        return False
    own = derivative_bounds(p0, p1, centre, reach)
    fourth, fifth, sixth = power_integrals(p0, p1, centre, reach + bundle[_REACH])
    if not np.isfinite(sixth):
        return False
    longer = 1.0 + bundle[_CHANGE] / length
    out[0, 0], out[1, 0] = own
    out[0, 1] = 120.0 * MU0_OVER_4PI * longer * sixth
    out[1, 1] = 24.0 * MU0_OVER_4PI * longer * fifth
    out[0, 2] = 24.0 * MU0_OVER_4PI * fifth / length
    out[1, 2] = 6.0 * MU0_OVER_4PI * fourth / length
    return True
