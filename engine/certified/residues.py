"""How far filaments are from the section they stand for, with proof, leg by leg.

The section's field is the mean of filaments over it. A filament at the offset (a, b)
runs from P₀ + D₀ to P₁ + D₁, where D₀ and D₁ are linear in the offset; with
D(t) = D₀ + t Δ, g(r) = r/|r|³ and L the axis, its field is

    µ₀ I / 4π · ∫₀¹ (L + Δ) × g(x − P₀ − t L − D(t)) dt .

Its m-th derivative along an offset is at most (see `segments`)

    µ₀ I / 4π · ( |D|^m (m+1)! ∫ dl/r^(m+2) + m |Δ| |D|^(m−1) m! ∫ dt/r^(m+1) ) ,

with |D| and |Δ| per metre of offset and r taken to the nearest filament. That bounds
the remainders of Gauss's rule in a bar,

    side^(2n) (n!)⁴ / ((2n+1) ((2n)!)³) · |f^(2n)|   ([1]_, 3.5.19, over the side) ,

and, in a round conductor, of rings that are exact below degree N, by Taylor's. For the
axis of a round conductor the bound is better: its straight filaments are shifted copies
of one harmonic field, so that the mean over the disc differs from the axis by
R²/8 · (−∂²/∂l²), which is a difference of the two ends, by what mitred ends add, and by
order R⁴.

References
----------
.. [1] NIST Digital Library of Mathematical Functions, https://dlmf.nist.gov/3.5.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import comb, gamma, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from engine.compiled import compiled
from engine.conductor import Conductor
from engine.field.filaments import section_points
from engine.field.kernel import MU0_OVER_4PI
from engine.field.legs import sides_of
from engine.runs import Bar, Round

Floats = NDArray[np.float64]

#: Columns of the table of legs.
START, STOP, AXES = 0, 3, 6  # axes: width at start, at stop, thickness at both
HALF_A, HALF_B, ACROSS_A, ACROSS_B, CHANGE_A, CHANGE_B = 18, 19, 20, 21, 22, 23
FARTHEST, SHORTEST, LONGEST, IS_ROUND, IS_BOX, SLOPE = 24, 25, 26, 27, 28, 29
SHEARED_ONLY, SHEAR_START, SHEAR_STOP = 30, 31, 32
_COLUMNS = 33

#: Panels along a side of a bar, and Gauss points in each.
_LINES = (
    (1, 1), (1, 2), (1, 3), (1, 4), (1, 5), (1, 6), (2, 4), (2, 6), (4, 6), (8, 6),
    (16, 6),
)  # fmt: skip

#: Rings and filaments per ring of a round conductor; exact below that degree.
_RINGS = ((1, 1), (1, 4), (2, 6), (2, 8), (3, 12), (4, 16), (6, 24), (8, 32))
_DEGREES = (2, 4, 6, 8, 12, 16, 24, 32)

#: ∫ dl / (1 + l²)^(m/2) over a whole line, by m.
_LINE = np.array(
    [0.0, 0.0, *(sqrt(pi) * gamma((m - 1) / 2) / gamma(m / 2) for m in range(2, 40))]
)
_PANELS = np.array([panels for panels, _ in _LINES], np.float64)
_POINTS = np.array([points for _, points in _LINES], np.int64)
_REMAINDERS = np.array([comb(2 * n, n) ** -2.0 for _, n in _LINES])
_DEGREE = np.array(_DEGREES, np.int64)


def _line_rules() -> tuple[NDArray[np.int64], Floats, Floats]:
    """Counts (k,), nodes and weights (k, most) of the rules along a side ±1."""
    counts = np.array([p * n for p, n in _LINES])
    nodes, weights = np.zeros((2, len(_LINES), counts.max()))
    for k, (panels, points) in enumerate(_LINES):
        x, w = np.polynomial.legendre.leggauss(points)
        middles = (2 * np.arange(panels) + 1) / panels - 1
        nodes[k, : counts[k]] = (middles[:, None] + x / panels).ravel()
        weights[k, : counts[k]] = np.tile(w / (2 * panels), panels)
    return counts, nodes, weights


def _disc_rules() -> tuple[NDArray[np.int64], Floats, Floats]:
    """Counts (k,), places (k, most, 2) and weights (k, most) in the unit disc."""
    counts = np.array([rings * around for rings, around in _RINGS])
    places = np.zeros((len(_RINGS), counts.max(), 2))
    weights = np.zeros((len(_RINGS), counts.max()))
    for k, (rings, around) in enumerate(_RINGS):
        offsets, shares = section_points(Round(diameter=2.0), rings, around)
        places[k, : counts[k]], weights[k, : counts[k]] = offsets, shares
    return counts, places, weights


LINE_COUNTS, LINE_NODES, LINE_WEIGHTS = _line_rules()
DISC_COUNTS, DISC_PLACES, DISC_WEIGHTS = _disc_rules()


def leg_table(conductors: Sequence[Conductor], legs: Floats) -> Floats:
    """(k, 33) what the bounds need to know of each leg, in the order of `legs`.

    Parameters
    ----------
    legs : (k, 20) float64
        `Legs.table` of the same conductors.
    """
    parts = [_of_conductor(conductor) for conductor in conductors]
    table = np.concatenate([np.zeros((0, _COLUMNS)), *parts])
    table[:, IS_BOX] = 1.0 - legs[:, 19]
    ends = legs[:, 15:19].reshape(-1, 2, 2)
    table[:, SLOPE] = np.sqrt(1.0 + (ends**2).sum(axis=2).max(axis=1, initial=0.0))
    return table


def _of_conductor(conductor: Conductor) -> Floats:
    path, axes = conductor.path, conductor.axes
    table = np.zeros((len(path) - 1, _COLUMNS))
    table[:, START : START + 3], table[:, STOP : STOP + 3] = path[:-1], path[1:]
    first, last = axes[:-1], axes[1:]
    table[:, AXES : AXES + 12] = np.stack(
        [first[:, 0], last[:, 0], first[:, 1], last[:, 1]], axis=1
    ).reshape(-1, 12)
    width, thickness = sides_of(conductor)
    table[:, HALF_A], table[:, HALF_B] = width / 2, thickness / 2
    lengths = np.linalg.norm(np.diff(path, axis=0), axis=1)
    if isinstance(conductor.shape, Bar):
        norms = np.linalg.norm([first, last], axis=3).max(axis=0)
        changes = np.linalg.norm(last - first, axis=2)
        corners = np.array([[1, 1], [1, -1]]) * (width / 2, thickness / 2)
        ends = np.stack([first, last, last - first])
        reach = np.linalg.norm(np.einsum("cs,ensx->encx", corners, ends), axis=3)
        farthest, change = reach[:2].max(axis=(0, 2)), reach[2].max(axis=1)
    else:
        _fill_round(table, conductor, lengths)
        norms = np.linalg.norm([first, last], ord=2, axis=(2, 3)).max(axis=0)
        norms = np.stack([norms, norms], axis=1)
        changes = np.linalg.norm(last - first, ord=2, axis=(1, 2))
        farthest, change = norms[:, 0] * width / 2, changes * width / 2
        changes = np.stack([changes, changes], axis=1)
    table[:, ACROSS_A : ACROSS_A + 2] = norms
    table[:, CHANGE_A : CHANGE_A + 2] = changes
    table[:, FARTHEST] = farthest
    table[:, SHORTEST], table[:, LONGEST] = lengths - change, lengths + change
    return table


def _fill_round(table: Floats, conductor: Conductor, lengths: Floats) -> None:
    """Whether the disc is carried along unturned, and how its ends are sheared."""
    table[:, IS_ROUND] = 1.0
    tangents = np.diff(conductor.path, axis=0) / lengths[:, None]
    first, last = conductor.axes[:-1], conductor.axes[1:]
    along = np.einsum("eksx,kx->eks", np.stack([first, last]), tangents)
    across = np.stack([first, last]) - along[..., None] * tangents[:, None, :]
    gram = np.einsum("ksx,krx->ksr", across[0], across[0])
    level = np.abs(gram - np.eye(2)).max(axis=(1, 2)) < 1e-9
    steady = np.abs(across[1] - across[0]).max(axis=(1, 2)) < 1e-9
    table[:, SHEARED_ONLY] = level & steady
    table[:, SHEAR_START : SHEAR_START + 2] = np.linalg.norm(along, axis=2).T


@compiled
def _over_length(m: int, gap: float, leg: Floats) -> float:
    """Bound of ∫ dl / r^m along a filament at least `gap` away."""
    line = _LINE[m] * gap
    return float(min(line, leg[LONGEST]) / gap**m)


@compiled
def _over_part(m: int, gap: float, leg: Floats) -> float:
    """Bound of ∫ dt / r^m, t from 0 to 1."""
    if leg[SHORTEST] <= 0.0:
        return float(1.0 / gap**m)
    return float(min(1.0, _LINE[m] * gap / leg[SHORTEST]) / gap**m)


@compiled
def line_residue(leg: Floats, side: int, rule: int, gap: float) -> float:
    """Bound for a rule along a bar's width (0) or thickness (1). [T/A]"""
    n = _POINTS[rule]
    across, change = leg[ACROSS_A + side], leg[CHANGE_A + side]
    size = 2.0 * leg[HALF_A + side] * across / _PANELS[rule]
    even = _over_length(2 * n + 2, gap, leg)
    if change > 0.0:
        even += 2 * n / (2 * n + 1) * change / across * _over_part(2 * n + 1, gap, leg)
    return float(MU0_OVER_4PI * size ** (2 * n) * _REMAINDERS[rule] * even)


@compiled
def disc_residue(leg: Floats, rule: int, gap: float) -> float:
    """Bound for a rule in a round conductor by its degree. [T/A]"""
    n = _DEGREE[rule]
    across, change = leg[ACROSS_A], leg[CHANGE_A]
    terms = (n + 1) * across**n * _over_length(n + 2, gap, leg)
    if change > 0.0:
        terms += n * change * across ** (n - 1) * _over_part(n + 1, gap, leg)
    # The mean of |offset|^n over the disc, and over the filaments of the rule.
    share = 2.0 / (n + 2) + (1.0 if rule > 0 else 0.0)
    return float(MU0_OVER_4PI * leg[HALF_A] ** n * share * terms)


@compiled
def axis_residue(leg: Floats, gap: float, start: float, stop: float) -> float:
    """Bound for the axis of a round conductor. [T/A]

    `start` and `stop` are least distances to what the ends of the filaments reach. [m]
    """
    plain = disc_residue(leg, 0, gap)
    if leg[SHEARED_ONLY] == 0.0:
        return float(plain)
    square = leg[HALF_A] * leg[HALF_A]
    ends = 0.0
    for k in range(2):
        r = max(gap, start if k == 0 else stop)
        shear = leg[SHEAR_START + k]
        ends += (0.1875 + 2.0 / np.pi * shear + 0.25 * shear * shear) / (r * r * r)
    fourth = 5.0 / 3.0 * square * _over_length(6, gap, leg)
    return float(min(plain, MU0_OVER_4PI * square * (ends + fourth)))
