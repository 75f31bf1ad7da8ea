"""Legs of many conductors in bundles, with what bounds their derivatives.

The conductors of a group that run beside each other carry currents that cancel, and a
bound of what they do together must cancel too. A bundle of straight filaments I_j, from
P_j to P_j + L_j, lies around a middle one, from P to P + L. Per length of that one

    n₀ = |Σ I_j| + Σ |I_j| |L_j − L| / |L|      what flows on,
    n₁ = Σ |I_j| |D_j|                          what lies D_j off the middle,
    n  = Σ |I_j| |L_j| / |L|                    its filaments one by one.

All derivatives of 1/r of order k, along whichever k unit vectors, are at most
k! / r^(k+1): along one and the same vector it is a Legendre polynomial, and a symmetric
multilinear form is largest there ([1]_). So derivatives of order k of the flux density,
along whichever directions, are at most µ₀/4π times the integral along the middle of

    n (k + 1)! / d^(k+2)    or    n₀ (k + 1)! / d^(k+2) + n₁ (k + 2)! / d^(k+3),

d being the distance to the nearest of the filaments and of all that lies between them
and the middle: Σ I_j L_j K(r_j) is split into Σ I_j L K(r), Σ I_j (L_j − L) K(r_j) and
L Σ I_j (K(r_j) − K(r)), K the gradient of 1/r.

Sections are the filaments of `filaments.far_orders`, good from a distance on that is
kept beside each bundle.

References
----------
.. [1] S. Banach, Über homogene Polynome in (L²), Studia Mathematica 7 (1938) 36-44.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.filaments import far_orders, section_points
from engine.field.kernel import Floats, Integers
from engine.field.legs import Legs, legs_of

Complexes = NDArray[np.complex128]

#: Columns of `Bundles.table`: middle filament, farthest that a filament lies from it,
#: distance of its surface from it at most, distance at which filaments will do. [m]
START, STOP, SPREAD, SURFACE, NEED = 0, 3, 6, 7, 8
_COLUMNS = 9
#: Columns of `Bundles.flows`.
NET, DIPOLE, ALONE = 0, 1, 2

#: Middles of legs that are farther apart than this part of their length have no bundle.
_APART = 0.25
#: A section in a mitre plane of the sharpest bend is so much wider.
_MITRE = 2.62


@dataclass(frozen=True, eq=False)
class Bundles:
    """The legs of the m conductors that carry current, in b bundles.

    Attributes
    ----------
    conductors, legs, currents
        Of those that carry any; currents (c, m) complex [A].
    group : (m,) int
        Conductors of one number switch discretisation together.
    table : (b, 9) float64
        See the columns' names.
    flows : (b, c, 3) float64
        n₀ [A], n₁ [A m], n [A].
    group_of : (b,) int
    first_leg : (b + 1,) int
        Bundle i is the rows first_leg[i] to first_leg[i + 1] of `leg_rows`.
    leg_rows : (k, 2) int
        Conductor and number of its leg.
    first : (b + 1,) int
        Bundle i is the segments first[i] to first[i + 1].
    segments : (s, 7) float64
        Start, stop [m], share of the conductor's current.
    owners : (s,) int
        Conductors.
    """

    conductors: tuple[Conductor, ...]
    legs: Legs
    currents: Complexes
    group: Integers
    table: Floats
    flows: Floats
    group_of: Integers
    first_leg: Integers
    leg_rows: Integers
    first: Integers
    segments: Floats
    owners: Integers


def bundles_of(conductors: Sequence[Conductor], currents: Complexes) -> Bundles:
    """Bundle the legs of the conductors in which currents (c, m) flow. [A]"""
    flowing = np.flatnonzero(currents.any(axis=0))
    carrying = tuple(conductors[k] for k in flowing.tolist())
    own = np.ascontiguousarray(currents[:, flowing])
    legs = legs_of(carrying)
    names = {name: k for k, name in enumerate(dict.fromkeys(c.group for c in carrying))}
    group = np.array([names[c.group] for c in carrying], np.int64)
    members, sizes = _together(carrying, legs)
    orders, needs = far_orders(carrying, legs)
    rows = legs.first[members[:, 0]] + members[:, 1]
    segments, owners, counts = filaments_of_legs(carrying, members, orders[rows])
    first_leg = np.concatenate([[0], np.cumsum(sizes)])
    first = np.concatenate([[0], np.cumsum(counts)])[first_leg]
    table = np.zeros((len(sizes), _COLUMNS))
    flows = np.zeros((len(sizes), len(own), 3))
    _measure(first, segments, owners, own, table, flows)
    half = _MITRE * np.hypot(*legs.sides[rows].T) / 2
    table[:, SURFACE] = table[:, SPREAD]
    table[:, SURFACE] += np.maximum.reduceat(half, first_leg[:-1])
    table[:, NEED] = np.maximum.reduceat(needs[rows], first_leg[:-1])
    return Bundles(
        carrying, legs, own, group, table, flows, group[members[first_leg[:-1], 0]],
        first_leg, members, first, segments, owners,
    )  # fmt: skip


def _together(
    conductors: tuple[Conductor, ...], legs: Legs
) -> tuple[Integers, list[int]]:
    """Conductors and legs (k, 2), bundle after bundle, and the bundles' sizes."""
    alike: dict[tuple[str, str, int], list[int]] = defaultdict(list)
    for i, conductor in enumerate(conductors):
        alike[conductor.group, conductor.role, len(conductor.path)].append(i)
    rows: list[tuple[int, int]] = []
    sizes: list[int] = []
    for members in alike.values():
        paths = np.array([conductors[i].path for i in members])
        steps = np.diff(paths, axis=1)
        middles = (paths[:, 1:] + paths[:, :-1]) / 2
        longest = np.linalg.norm(steps, axis=2).max(axis=0)
        across = np.linalg.norm(np.ptp(middles, axis=0), axis=1)
        # Those of another direction, either way along, do not belong.
        cosine = np.abs(np.einsum("ikx,kx->ik", steps, steps[0])).min(axis=0)
        near = (across < _APART * longest) & (cosine > 0.25 * longest**2)
        for leg, one in enumerate(near.tolist()):
            rows += [(i, leg) for i in members]
            sizes += [len(members)] if one else [1] * len(members)
    return np.array(rows, np.int64).reshape(-1, 2), sizes


def filaments_of_legs(
    conductors: Sequence[Conductor], rows: Integers, orders: NDArray[np.int16]
) -> tuple[Floats, Integers, Integers]:
    """Legs as filaments.

    Parameters
    ----------
    rows : (k, 2) int
        Conductor and number of its leg.
    orders : (k, 2) int
        Numbers of filaments for `filaments.section_points`.

    Returns
    -------
    (s, 7) float64
        Start, stop [m] and share of the conductor's current.
    (s,) int
        Conductors.
    (k,) int
        How many segments each leg has.
    """
    counts = np.ones(len(rows), np.int64)
    plain = (orders == 1).all(axis=1)
    blocks: list[Floats] = []
    for k, ((i, leg), one) in enumerate(
        zip(rows.tolist(), plain.tolist(), strict=True)
    ):
        if one:
            block = np.ones((1, 7))
            block[0, :6] = conductors[i].path[leg : leg + 2].ravel()
        else:
            block = _leg_filaments(conductors[i], leg, *orders[k].tolist())
            counts[k] = len(block)
        blocks.append(block)
    return np.concatenate(blocks), np.repeat(rows[:, 0], counts), counts


def _leg_filaments(conductor: Conductor, leg: int, first: int, second: int) -> Floats:
    offsets, shares = section_points(conductor.shape, first, second)
    axes = conductor.axes[leg : leg + 2]
    lines = conductor.path[leg : leg + 2] + np.einsum("fk,vkx->fvx", offsets, axes)
    return np.column_stack([lines.reshape(-1, 6), shares])


@compiled
def distance_to_line(place: Floats, line: Floats) -> float:
    """From a place to a straight line from its start to its stop, (6,). [m]"""
    x, y, z = place[0] - line[0], place[1] - line[1], place[2] - line[2]
    lx, ly, lz = line[3] - line[0], line[4] - line[1], line[5] - line[2]
    along = (x * lx + y * ly + z * lz) / (lx * lx + ly * ly + lz * lz)
    along = min(max(along, 0.0), 1.0)
    x, y, z = x - along * lx, y - along * ly, z - along * lz
    return float(np.sqrt(x * x + y * y + z * z))


@compiled
def _length(v: Floats) -> float:
    return float(np.sqrt(v[0] * v[0] + v[1] * v[1] + v[2] * v[2]))


@compiled
def _measure(
    first: Integers,
    segments: Floats,
    owners: Integers,
    currents: Complexes,
    table: Floats,
    flows: Floats,
) -> None:
    """Fill in middles, spreads and flows."""
    for b in range(len(first) - 1):
        low, high = first[b], first[b + 1]
        along = segments[low, 3:6] - segments[low, :3]
        ends = np.empty((high - low, 2, 3))
        signs = np.empty(high - low)
        middle, total = np.zeros((2, 3)), 0.0
        for k in range(low, high):
            start, stop = segments[k, :3], segments[k, 3:6]
            # One that goes the other way is turned, and its current with it.
            same = np.dot(stop - start, along) >= 0.0
            signs[k - low] = segments[k, 6] if same else -segments[k, 6]
            ends[k - low, 0] = start if same else stop
            ends[k - low, 1] = stop if same else start
            size = abs(segments[k, 6]) * np.abs(currents[:, owners[k]]).sum()
            middle += size * ends[k - low]
            total += size
        middle /= total
        table[b, START:STOP], table[b, STOP:SPREAD] = middle[0], middle[1]
        length = _length(middle[1] - middle[0])
        for c in range(len(currents)):
            net = 0j
            for k in range(high - low):
                own = signs[k] * currents[c, owners[low + k]]
                one, two = ends[k, 0] - middle[0], ends[k, 1] - middle[1]
                # Along the segment the distance is no more than at the farther end.
                away = max(_length(one), _length(two))
                table[b, SPREAD] = max(table[b, SPREAD], away)
                net += own
                flows[b, c, NET] += abs(own) * _length(two - one) / length
                flows[b, c, DIPOLE] += abs(own) * away
                flows[b, c, ALONE] += abs(own) * _length(ends[k, 1] - ends[k, 0])
            flows[b, c, NET] += abs(net)
            flows[b, c, ALONE] /= length


@compiled
def too_near(points: Floats, which: Integers, table: Floats) -> NDArray[np.bool_]:
    """Which bundles' surfaces may be nearer than their filaments are good for."""
    middle = np.empty(3)
    for axis in range(3):
        middle[axis] = (points[:, axis].min() + points[:, axis].max()) / 2
    radius = 0.0
    for i in range(len(points)):
        x, y, z = points[i] - middle
        radius = max(radius, np.sqrt(x * x + y * y + z * z))
    out = np.zeros(len(which), np.bool_)
    for i in range(len(which)):
        row = table[which[i]]
        gap = distance_to_line(middle, row[START:SPREAD]) - radius - row[SURFACE]
        if gap >= row[NEED]:
            continue
        for k in range(len(points)):
            gap = distance_to_line(points[k], row[START:SPREAD]) - row[SURFACE]
            if gap < row[NEED]:
                out[i] = True
                break
    return out


@compiled
def gathered(
    which: Integers, first: Integers, segments: Floats, owners: Integers
) -> tuple[Floats, Integers]:
    """The segments of some bundles in a row."""
    count = 0
    for b in which:
        count += first[b + 1] - first[b]
    rows, own = np.empty((count, 7)), np.empty(count, np.int64)
    at = 0
    for b in which:
        for k in range(first[b], first[b + 1]):
            rows[at] = segments[k]
            own[at] = owners[k]
            at += 1
    return rows, own
