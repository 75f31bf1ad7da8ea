"""The RMS of several components: exact where they add as phasors, else the worst.

Sources of one frequency whose angle to each other is unknown add to at most

    max over θ of |B₁ + e^{jθ} B₂| = √(|B₁|² + |B₂|² + 2 |B₁·B₂*|)

which is reached at some angle; of three and more, the sum of the resultants bounds it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.currents import Component
from engine.field.quantities import common_frequency, ellipse, resultant

Floats = NDArray[np.float64]
Phasors = NDArray[np.complex128]

WORST_OF_TWO = "worst over an unknown phase relation"
WORST_SHIFT = "worst over an unknown time shift"
SUM_OF_SOURCES = "sum of the resultants of sources whose phase relations are unknown"

#: Instants per period of the highest frequency in the search for the worst shift.
_SHIFTS = 128

_MOST_SAMPLES = 4_000_000  # held at once


@dataclass(frozen=True, eq=False)
class Combined:
    """Resultants of all components together.

    Attributes
    ----------
    total_ac : (n,) float64 or None
        RMS over all frequencies above zero; None when there is none. [T]
    dc : (n,) float64 or None
        Magnitude at 0 Hz; None when there is none. [T]
    by_frequency : mapping of float to (n,) float64
        By frequency in ascending order, 0 included. [T]
    is_bound : bool
        Whether some value is the worst over unknown angles, or an upper bound.
    reason : str
        Which one; empty otherwise.
    """

    total_ac: Floats | None
    dc: Floats | None
    by_frequency: Mapping[float, Floats]
    is_bound: bool
    reason: str


def combined(b: Phasors, components: Sequence[Component]) -> Combined:
    """Combine components into resultants by frequency and in total.

    At 0 Hz everything adds with its sign. The total of one circuit that is shifted by
    an unknown time against everything else is the worst over that shift, the same at
    all its harmonics; otherwise the worst values by frequency are taken together.

    Parameters
    ----------
    b : (c, n, 3) complex
        RMS phasors. [T]
    components : sequence of Component
        c of them.

    Raises
    ------
    ValueError
        When the shapes disagree.
    """
    if b.ndim != 3 or b.shape[0] != len(components) or b.shape[2] != 3:
        raise ValueError(f"b must be ({len(components)}, n, 3), not {b.shape}")
    by_frequency: dict[float, Floats] = {}
    reasons: set[str] = set()
    pairs: dict[float, tuple[Phasors, Phasors]] = {}
    # Without what two sources add by being together; larger where a sum bounds them.
    squares = np.zeros(b.shape[1])
    for frequency in sorted({c.frequency for c in components}):
        if frequency == 0.0:
            still = [i for i, c in enumerate(components) if c.frequency == 0.0]
            by_frequency[0.0] = resultant(b[still].sum(axis=0))
            continue
        sources = _sources(b, components, frequency)
        fields = list(sources.values())
        if len(fields) <= 2:
            squares += np.sum([resultant(x) ** 2 for x in fields], axis=0)
        if len(fields) == 1:
            by_frequency[frequency] = resultant(fields[0])
        elif len(fields) == 2:
            by_frequency[frequency] = _worst_of_two(*fields)
            pairs[frequency] = (fields[0], fields[1])
            reasons.add(WORST_OF_TWO)
        else:
            by_frequency[frequency] = np.sum([resultant(x) for x in fields], axis=0)
            squares += by_frequency[frequency] ** 2
            reasons.add(SUM_OF_SOURCES)
    dc = by_frequency.get(0.0)
    alternating = [values for f, values in by_frequency.items() if f > 0]
    total = None
    if alternating:
        total = np.sqrt(np.sum([values**2 for values in alternating], axis=0))
        if len(pairs) > 1 and _one_shift(components, set(pairs)):
            worst = _worst_over_shift(squares, pairs)
            if worst is not None:
                # Below the combination by frequency but for rounding.
                total = np.minimum(total, worst)
                reasons.add(WORST_SHIFT)
    return Combined(total, dc, by_frequency, bool(reasons), "; ".join(sorted(reasons)))


def _sources(
    b: Phasors, components: Sequence[Component], frequency: float
) -> dict[tuple[float, str], Phasors]:
    """Fields (n, 3) at a frequency that add among themselves, by base and group."""
    sources: dict[tuple[float, str], Phasors] = {}
    for field, component in zip(b, components, strict=True):
        if component.frequency == frequency:
            key = (component.base, component.group)
            sources[key] = sources[key] + field if key in sources else field
    return dict(sorted(sources.items(), key=lambda item: item[0]))


def _worst_of_two(first: Phasors, second: Phasors) -> Floats:
    shared = np.abs((first * second.conj()).sum(axis=-1))
    squares = resultant(first) ** 2 + resultant(second) ** 2
    worst: Floats = np.sqrt(squares + 2.0 * shared)
    return worst


def worst_semi_major(first: Phasors, second: Phasors) -> Floats:
    """Largest semi-major axis of two sources over the unknown angle between them.

    Parameters
    ----------
    first, second : (n, 3) complex
        RMS phasors of one frequency. [T]

    Returns
    -------
    (n,) float
        RMS; never below the largest of ``ellipse(first + exp(jθ) second).semi_major``
        and above it by 0.03 % of the second source's at most. [T]

    Notes
    -----
    The best of 128 angles. At an instant and in a direction the sum is a constant and
    a cosine of θ with the second source's semi-major axis at most, so that what lies
    between two samples is below ½ (π/128)² of that axis.
    """
    largest = np.zeros(first.shape[0])
    step = max(1, _MOST_SAMPLES // _SHIFTS)
    turns = np.exp(2j * np.pi * np.arange(_SHIFTS) / _SHIFTS)[:, None, None]
    for start in range(0, len(largest), step):
        part = slice(start, start + step)
        sampled = ellipse(first[part] + turns * second[part]).semi_major
        largest[part] = sampled.max(axis=0)
    missed = 0.5 * (np.pi / _SHIFTS) ** 2 * ellipse(second).semi_major
    worst: Floats = largest + missed
    return worst


def _one_shift(components: Sequence[Component], shared: set[float]) -> bool:
    """Whether a single unknown time shift explains every unknown angle.

    That needs one base, and at all shared frequencies the same two sources: what adds
    normally and one circuit, or two circuits. A group that is not its circuit's id has
    an unknown angle of its own at each frequency.
    """
    among = [c for c in components if c.frequency in shared]
    return (
        len({c.base for c in among}) == 1
        and len({c.group for c in among}) == 2
        and all(c.group == c.circuit for c in among)
    )


def _worst_over_shift(
    squares: Floats, pairs: Mapping[float, tuple[Phasors, Phasors]]
) -> Floats | None:
    """Total at the worst time shift, or None without a common period.

    `squares` (n,) is the sum over all frequencies and sources, without what two
    sources add by being together. [T²]
    """
    frequencies = list(pairs)
    common = common_frequency(frequencies)
    if common is None:
        return None
    products = np.stack(
        [(first * second.conj()).sum(axis=-1) for first, second in pairs.values()]
    )
    orders = np.rint(np.array(frequencies) / common)
    step = max(1, int(_MOST_SAMPLES / (_SHIFTS * orders.max())))
    gain = np.empty(products.shape[1])
    for start in range(0, len(gain), step):
        part = slice(start, start + step)
        gain[part] = _largest(products[:, part], orders)
    worst: Floats = np.sqrt(np.maximum(squares + 2.0 * gain, 0.0))
    return worst


def _largest(products: Phasors, orders: Floats) -> Floats:
    """(n,) largest value over θ of Σ Re(x_k e^{j k θ}), products (c, n).

    The best sample, raised by the bound of what lies between two samples, so that the
    worst is never missed: by a thirtieth of a per cent of Σ |x_k| at most.
    """
    count = int(_SHIFTS * orders.max())
    angles = 2.0 * np.pi * np.arange(count) / count
    turns = np.exp(1j * angles[:, None] * orders)
    samples = turns.real @ products.real - turns.imag @ products.imag
    # At a maximum the slope vanishes: what is missed is below half the largest
    # second derivative times half a step squared.
    half = np.pi / count
    missed = 0.5 * half**2 * (orders[:, None] ** 2 * np.abs(products)).sum(axis=0)
    largest: Floats = samples.max(axis=0) + missed
    return largest
