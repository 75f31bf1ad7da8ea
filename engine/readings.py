"""What a field says in a basis and component: values per frequency, whole or bound."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.currents import Component

Floats = NDArray[np.float64]
Basis = Literal["RMS", "peak"]
Axis = Literal["resultant", "axis"]


@dataclass(frozen=True, eq=False)
class Reading:
    """Values per frequency, and whether they are only an upper bound.

    Attributes
    ----------
    by_frequency : (n,) float by frequency [Hz]
        [T]
    is_bound : bool
        The true values may be smaller.
    reason : str
        Why it is a bound; empty where it is none.
    """

    by_frequency: dict[float, Floats]
    is_bound: bool
    reason: str


def reading(
    b: NDArray[np.complex128],
    components: Sequence[Component],
    basis: Basis,
    axis: Axis,
) -> Reading:
    """Values of a field per frequency in the basis and component of a level.

    Parameters
    ----------
    b : (c, n, 3) complex
        RMS phasors, one row per component. [T]
    components : c components
        Their frequency, and what adds as phasors.
    basis
        "peak": the largest ``|b(t)|`` of one frequency over its period, √2 times the
        ellipse's semi-major axis; at 0 Hz the value itself.
    axis
        "axis": the largest of the x, y and z components, at each frequency.

    Returns
    -------
    Reading
        Components of one frequency that have no known angle to each other are taken
        at their worst; where that is no closed form, as their sum.
    """
    if not components:
        return Reading({}, False, "")
    if basis == "RMS" and axis == "resultant":
        whole = field.combined(b, components)
        return Reading(dict(whole.by_frequency), whole.is_bound, whole.reason)
    return _summed(b, components, basis, axis)


def _summed(
    b: NDArray[np.complex128], components: Sequence[Component], basis: Basis, axis: Axis
) -> Reading:
    """Per frequency the worst of two components, or the sum, which no angle exceeds."""
    frequencies = sorted({c.frequency for c in components})
    by_frequency: dict[float, Floats] = {}
    several, pairs = [], []
    for f in frequencies:
        rows = [k for k, c in enumerate(components) if c.frequency == f]
        if f == 0:
            # Direct currents have a sign and no angle: they add.
            rows_of_f = np.sum(b[rows], axis=0, keepdims=True)
        else:
            rows_of_f = b[rows]
            if len(rows) == 2 and axis == "resultant" and basis == "peak":
                by_frequency[f] = np.sqrt(2.0) * field.worst_semi_major(*rows_of_f)
                pairs.append(f)
                continue
            if len(rows) > 1:
                several.append(f)
        by_frequency[f] = sum(
            (_one(row, basis, axis, f) for row in rows_of_f), np.zeros(b.shape[1])
        )
    # On one axis some angle lines the parts up, but not at every frequency at once.
    is_bound = len(several) > 1 or (bool(several) and axis == "resultant")
    listed = ", ".join(f"{f:g}" for f in several)
    reasons = [f"sum of currents of unknown angle at {listed} Hz"] if is_bound else []
    reasons += [field.WORST_OF_TWO] if pairs else []
    return Reading(by_frequency, bool(reasons), "; ".join(reasons))


def _one(
    b: NDArray[np.complex128], basis: Basis, axis: Axis, frequency: float
) -> Floats:
    """(n,) values of one component, (n, 3) complex. [T]"""
    factor = np.sqrt(2.0) if basis == "peak" and frequency > 0 else 1.0
    if axis == "axis":
        largest: Floats = factor * np.max(np.abs(b), axis=1)
        return largest
    if frequency == 0 or basis == "RMS":
        return factor * field.resultant(b)
    semi_major: Floats = factor * field.ellipse(b).semi_major
    return semi_major
