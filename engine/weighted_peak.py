"""Weighted peak of several frequencies against a level: by spectrum, by waveform.

ICNIRP 2010 (Health Physics 99(6):818-836), eq. 7:

    | Σ (A_i / EL_i) cos(2π f_i t + θ_i + φ_i) | ≤ 1

A_i and EL_i are both amplitudes; φ is 180, 90, 0, −90° where the level falls with 1/f²,
1/f, is flat, rises with f: 90° times the exponent, the phase of a filter whose gain is
the inverse of the level.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import product

import numpy as np
from msgspec import structs
from numpy.typing import NDArray

from engine import field
from engine.criteria import LevelRanges, ReferenceLevel
from engine.currents import Component
from engine.levels import level_at

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

NO_PHASES = "a table of levels states no phases: sum of the amplitudes' ratios"
UNKNOWN = "sum of the weighted peaks of currents of unknown angle to each other"
MANY_CORNERS = "too many frequencies at corners of the level: sum of the ratios"
NO_PERIOD = "the frequencies have no common period: sum of the ratios"

#: At corners the phases of both ranges are tried, for so many choices in all.
_MOST_CHOICES = 16

#: What the samples of a cycle can leave out: 64 a period of the highest frequency, and
#: the second derivative of a trigonometric sum is at most its square of order times
#: its largest value (Bernstein). Relative.
SAMPLING_SLACK = 0.5 * (math.pi / 64) ** 2 / (1 - 0.5 * (math.pi / 64) ** 2)

#: Bins of a waveform below this part of the largest are rounding.
_ROUNDING = 1e-11

#: A weighted waveform is read at so many times the instants that it was sampled at.
_OVERSAMPLED = 16


def weighted_peak(
    b: Complexes, components: Sequence[Component], level: ReferenceLevel
) -> field.Peak:
    """Weighted peak of the alternating field by its spectrum.

    Parameters
    ----------
    b : (c, n, 3) complex
        RMS phasors, one row per component. [T]
    components : c components
        Those at 0 Hz are left out.
    level : ReferenceLevel
        Its component says whether the length of the weighted vector counts or the
        largest of its x, y and z components. An RMS level times √2 is its amplitude;
        a peak level is one.

    Returns
    -------
    Peak
        1 where the level is reached. Exact for known angles. Currents of unknown angle
        to each other, of other bases, or levels without phases: an upper bound that
        is never above the sum of the amplitudes' ratios, with the reason.

    Raises
    ------
    ValueError
        When the level states nothing at a frequency above 0 Hz.

    Notes
    -----
    One linear sinusoid gives B/level; a circular one, taken as vector length, 0.707 of
    resultant/level.
    """
    rows = [k for k, c in enumerate(components) if c.frequency > 0]
    alternating = [components[k] for k in rows]
    gains = np.array([_gain(level, c.frequency) for c in alternating])
    weighted = b[rows] * gains[:, None, None]
    phases = [_exponents(level, c.frequency) for c in alternating]
    if len({c.frequency for c in alternating}) == 1:
        if len(rows) == 2 and level.component == "resultant":
            worst = field.worst_semi_major(*weighted)
            return field.Peak(worst, True, field.WORST_OF_TWO)
        # All turn alike, which changes no length.
        return _of_sources(weighted, alternating, level, [np.ones(len(rows), complex)])
    if not all(phases):
        return _sum_of_parts(weighted, alternating, level, NO_PHASES)
    turns = list(_turns(alternating, phases))
    if len(turns) > _MOST_CHOICES:
        return _sum_of_parts(weighted, alternating, level, MANY_CORNERS)
    return _of_sources(weighted, alternating, level, turns)


def of_waveform(waveform: Floats, period: float, level: ReferenceLevel) -> float:
    """Weighted peak of a field sampled over one period, by its Fourier series.

    Parameters
    ----------
    waveform : (k, 3) float
        Instantaneous values at k even instants, more than two a period of the highest
        frequency. [T]
    period : float
        [s]
    level : ReferenceLevel
        Ranges; as in `weighted_peak`.

    Raises
    ------
    ValueError
        When the level states nothing at a frequency that the waveform has, or has no
        phase there; when there are too few instants.

    Notes
    -----
    Read at 16 times the instants, so that at 16 instants a period of the highest
    frequency 0.03 % of a crest may be missed.
    """
    k = len(waveform)
    lines = np.fft.rfft(waveform, axis=0) / k
    lines[0] = 0.0
    sizes = np.abs(lines).max(axis=1)
    lines[sizes < _ROUNDING * sizes.max(initial=0.0)] = 0.0
    if k % 2 == 0 and lines[-1].any():
        raise ValueError("the waveform has too few instants for its frequencies")
    for order in np.flatnonzero(np.abs(lines).any(axis=1)).tolist():
        frequency = order / period
        exponents = _exponents(level, frequency)
        if not exponents:
            raise ValueError(f"the level has no phase at {frequency:g} Hz")
        # _gain is per RMS tesla; the series has amplitudes.
        turn = np.exp(0.5j * math.pi * exponents[0])
        lines[order] *= _gain(level, frequency) / math.sqrt(2.0) * turn
    n = _OVERSAMPLED * k
    weighted = np.fft.irfft(lines, n, axis=0) * n
    if level.component == "axis":
        return float(np.abs(weighted).max(initial=0.0))
    return float(np.linalg.norm(weighted, axis=1).max(initial=0.0))


def as_ratio_sum(level: ReferenceLevel) -> ReferenceLevel:
    """The same level by the sum of ratios, which no weighted peak exceeds."""
    return structs.replace(level, sum_rule="ratio sum")


def _gain(level: ReferenceLevel, frequency: float) -> float:
    """Amplitude over the level's amplitude, of 1 T RMS along a line. [1/T]"""
    value = level_at(level, frequency)
    if value is None:
        raise ValueError(f"the level states no value at {frequency:g} Hz")
    return math.sqrt(2.0) / value if level.basis == "peak" else 1.0 / value


def _exponents(level: ReferenceLevel, frequency: float) -> tuple[float, ...]:
    """Exponents of the strictest ranges, two at a corner; none of a table."""
    if not isinstance(level.values, LevelRanges):
        return ()
    strictest = level_at(level, frequency)
    assert strictest is not None, "the gain was asked for before"
    found = []
    for power_law in level.values.ranges:
        alone = structs.replace(level, values=LevelRanges(ranges=(power_law,)))
        value = level_at(alone, frequency)
        if value is not None and math.isclose(value, strictest, rel_tol=1e-9):
            found.append(power_law.exponent)
    return tuple(dict.fromkeys(found))


def _turns(
    components: Sequence[Component], exponents: Sequence[tuple[float, ...]]
) -> Iterator[Complexes]:
    """(c,) factors e^{jφ} for every choice at corners, one choice a frequency."""
    of = {c.frequency: e for c, e in zip(components, exponents, strict=True)}
    count = math.prod(len(e) for e in of.values())
    if count > _MOST_CHOICES:
        yield from [np.ones(len(components), np.complex128)] * (_MOST_CHOICES + 1)
        return
    for choice in product(*of.values()):
        chosen = dict(zip(of, choice, strict=True))
        angles = np.array([chosen[c.frequency] for c in components])
        yield np.exp(0.5j * math.pi * angles)


def _of_sources(
    weighted: Complexes,
    components: Sequence[Component],
    level: ReferenceLevel,
    turns: Sequence[Complexes],
) -> field.Peak:
    """The largest over the choices of phases; sources of unknown angle are added."""
    sources: dict[tuple[float, str], list[int]] = {}
    for row, component in enumerate(components):
        sources.setdefault((component.base, component.group), []).append(row)
    values = np.zeros(weighted.shape[1])
    reasons = {UNKNOWN: None} if len(sources) > 1 else {}
    for turn in turns:
        turned = weighted * turn[:, None, None]
        total = np.zeros(weighted.shape[1])
        for rows in sources.values():
            # Within a source all angles are known.
            own = [replace(components[k], group="") for k in rows]
            peak = _lengths(turned[rows], own, level)
            total += peak.values
            if peak.is_bound:
                reasons[NO_PERIOD] = None
        values = np.maximum(values, total)
    return field.Peak(values, bool(reasons), "; ".join(reasons))


def _sum_of_parts(
    weighted: Complexes,
    components: Sequence[Component],
    level: ReferenceLevel,
    reason: str,
) -> field.Peak:
    """Sum of every component's largest weighted value, which no angle exceeds."""
    total = np.zeros(weighted.shape[1])
    for row, component in zip(weighted, components, strict=True):
        total += _lengths(row[None], [component], level).values
    return field.Peak(total, True, reason)


def _lengths(
    weighted: Complexes, components: Sequence[Component], level: ReferenceLevel
) -> field.Peak:
    """Peak of the vector's length, or the largest of its axes' peaks."""
    # `peak` takes RMS phasors; these are amplitudes.
    b = weighted / math.sqrt(2.0)
    if level.component != "axis":
        return field.peak(b, components)
    peaks = [
        field.peak(np.where(np.arange(3) == axis, b, 0.0), components)
        for axis in range(3)
    ]
    largest = np.max([peak.values for peak in peaks], axis=0)
    return field.Peak(largest, peaks[0].is_bound, peaks[0].reason)
