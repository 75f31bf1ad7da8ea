"""What is read off flux-density phasors: resultant, ellipse, cycle and peak.

Phasors are complex RMS values at e^{+jωt}: b(t) = √2 Re(B e^{jωt}). A direct current
has b(t) = B, without √2.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import gcd, lcm

import numpy as np
from numpy.typing import NDArray

from engine.currents import Component

Floats = NDArray[np.float64]
Phasors = NDArray[np.complex128]

#: Instants per period of the highest frequency, before the maximum is refined.
_INSTANTS = 64

#: Longest common period, in periods of the highest frequency.
_LONGEST = 5000

#: Frequencies are compared as fractions of a hertz with at most this denominator.
_DENOMINATOR = 1000

#: Crests of a cycle that are refined.
_CRESTS = 6

_MOST_SAMPLES = 4_000_000  # held at once


@dataclass(frozen=True, eq=False)
class Ellipse:
    """Polarisation ellipse of one frequency; the semi-axes are RMS values.

    Attributes
    ----------
    semi_major, semi_minor : (...) float64
        The field's largest value over the cycle is √2 times `semi_major`. [T]
    axes : (..., 2, 3) float64
        Unit vectors along the major and the minor axis; zero where the axis is not
        defined (no field; the minor axis of a field along a line).
    """

    semi_major: Floats
    semi_minor: Floats
    axes: Floats


@dataclass(frozen=True, eq=False)
class Cycle:
    """The field vector over one common period.

    Attributes
    ----------
    times : (k,) float64
        [s]
    vectors : (k, 3) float64
        Instantaneous values. [T]
    """

    times: Floats
    vectors: Floats


@dataclass(frozen=True, eq=False)
class Peak:
    """Largest instantaneous magnitude of the alternating field.

    Attributes
    ----------
    values : (n,) float64
        [T]
    is_bound : bool
        Whether it is an upper bound instead of the value itself.
    reason : str
        Why it is a bound; empty otherwise.
    """

    values: Floats
    is_bound: bool
    reason: str


def resultant(b: Phasors) -> Floats:
    """RMS resultant of components (..., 3): the root of the sum of squares. [T]"""
    root: Floats = np.sqrt((b.real**2 + b.imag**2).sum(axis=-1))
    return root


def ellipse(b: Phasors) -> Ellipse:
    """Ellipse that the field of one frequency draws over a cycle.

    With P = B·B (no conjugate) the semi-axes squared are (|B|² ± |P|)/2; the minor one
    is taken as |Re B × Im B| over the major one, which does not cancel.

    Parameters
    ----------
    b : (..., 3) complex
        RMS phasors. [T]
    """
    size = np.abs(b).max(axis=-1)
    present = size > 0
    scale = np.where(present, size, 1.0)[..., None]
    x, y = b.real / scale, b.imag / scale
    p = (x * x - y * y).sum(axis=-1) + 2j * (x * y).sum(axis=-1)
    major = np.sqrt(((x * x + y * y).sum(axis=-1) + np.abs(p)) / 2)
    normal = np.cross(x, y)
    area = np.sqrt((normal * normal).sum(axis=-1))
    divisor = np.where(present, major, 1.0)
    minor = area / divisor
    # Turned back by half the angle of P, the real part lies along the major axis.
    half = np.exp(-0.5j * np.angle(p))[..., None]
    along = ((x + 1j * y) * half).real / divisor[..., None]
    defined = area > 1e-14 * divisor**2
    normal = normal / np.where(defined, area, 1.0)[..., None]
    across = np.where(defined[..., None], np.cross(normal, along), 0.0)
    scale = scale[..., 0]
    return Ellipse(major * scale, minor * scale, np.stack([along, across], axis=-2))


def common_frequency(frequencies: Sequence[float]) -> float | None:
    """Frequency of the common period of alternating components, or None. [Hz]

    None when there is no alternating component, or when the period is longer than
    5000 periods of the highest frequency.
    """
    alternating = [f for f in frequencies if f > 0]
    if not alternating:
        return None
    exact = [Fraction(f).limit_denominator(_DENOMINATOR) for f in alternating]
    if any(
        abs(float(q) - f) > 1e-9 * f for q, f in zip(exact, alternating, strict=True)
    ):
        return None
    below = lcm(*(q.denominator for q in exact))
    common = Fraction(gcd(*(int(q * below) for q in exact)), below)
    if max(exact) > _LONGEST * common:
        return None
    return float(common)


def cycle(b: Phasors, components: Sequence[Component], n: int) -> Cycle:
    """Field vector at n even instants of the common period.

    Components whose angle to each other is unknown are drawn at the angles they have.

    Parameters
    ----------
    b : (c, 3) complex
        RMS phasors at one point. [T]
    components : sequence of Component
        c of them.
    n : int
        Number of instants, at least one.

    Raises
    ------
    ValueError
        When the shapes disagree or the frequencies have no common period.
    """
    if b.shape != (len(components), 3) or n < 1:
        raise ValueError(f"b must be ({len(components)}, 3), not {b.shape}")
    frequencies = np.array([c.frequency for c in components])
    if not (frequencies > 0).any():
        return Cycle(np.zeros(n), np.tile(b.real.sum(axis=0), (n, 1)))
    common = common_frequency([c.frequency for c in components])
    if common is None:
        raise ValueError("the frequencies have no common period")
    times = np.arange(n) / (n * common)
    factor = np.where(frequencies > 0, np.sqrt(2.0), 1.0)
    turns = np.exp(2j * np.pi * times[:, None] * frequencies) * factor
    return Cycle(times, (turns @ b).real)


def peak(
    b: Phasors, components: Sequence[Component], *, unknown_angles: str = ""
) -> Peak:
    """Peak over a cycle of the alternating part.

    One component: √2 times the semi-major axis. Several: sampled over the common
    period, then refined around the largest sample. Where angles between them are
    unknown or there is no common period: the sum of √2 times the semi-major axes, an
    upper bound.

    Parameters
    ----------
    b : (c, n, 3) complex
        RMS phasors. [T]
    components : sequence of Component
        c of them.
    unknown_angles : str, optional
        A reason to give the bound that the components do not show, such as the
        unknown offset of a harmonic that is alone at its frequency.

    Raises
    ------
    ValueError
        When the shapes disagree.
    """
    if b.ndim != 3 or b.shape[0] != len(components) or b.shape[2] != 3:
        raise ValueError(f"b must be ({len(components)}, n, 3), not {b.shape}")
    which = [i for i, c in enumerate(components) if c.frequency > 0]
    if not which:
        return Peak(np.zeros(b.shape[1]), False, "")
    alternating = [components[i] for i in which]
    largest = np.sqrt(2.0) * ellipse(b[which]).semi_major
    if len(which) == 1:
        return Peak(largest[0], False, "")
    frequencies = [c.frequency for c in alternating]
    common = common_frequency(frequencies)
    reason = unknown_angles or _why_bound(alternating, common)
    if reason or common is None:
        return Peak(largest.sum(axis=0), True, reason)
    orders = np.rint(np.array(frequencies) / common)
    values = np.empty(b.shape[1])
    step = max(1, int(_MOST_SAMPLES / (3 * _INSTANTS * orders.max())))
    for first in range(0, b.shape[1], step):
        part = slice(first, first + step)
        values[part] = _sampled_peak(np.sqrt(2.0) * b[which, part], orders)
    return Peak(values, False, "")


def _why_bound(components: Sequence[Component], common: float | None) -> str:
    if len({c.base for c in components}) > 1:
        return "sources of different base frequencies are not synchronised"
    if any(c.group for c in components):
        return "the angles between some components are unknown"
    if common is None:
        return "the frequencies have no common period"
    return ""


def _sampled_peak(amplitudes: Phasors, orders: Floats) -> Floats:
    """(n,) largest |b(t)| of amplitudes (c, n, 3) at whole orders (c,)."""
    count = int(_INSTANTS * orders.max())
    angles = 2.0 * np.pi * np.arange(count) / count
    turns = np.exp(1j * angles[:, None] * orders)
    flat = amplitudes.reshape(len(orders), -1)
    parts = np.concatenate([turns.real, -turns.imag], axis=1)
    samples = parts @ np.concatenate([flat.real, flat.imag])
    squares = (samples.reshape(count, -1, 3) ** 2).sum(axis=2)
    largest = squares.max(axis=0)
    # Several crests may be nearly equal: each of the highest is climbed.
    crest = (squares >= np.roll(squares, 1, 0)) & (squares >= np.roll(squares, -1, 0))
    squares[~crest] = -1.0
    for start in np.argpartition(-squares, _CRESTS - 1, axis=0)[:_CRESTS]:
        largest = np.maximum(largest, _climbed(amplitudes, orders, angles[start]))
    root: Floats = np.sqrt(largest)
    return root


def _climbed(amplitudes: Phasors, orders: Floats, angle: Floats) -> Floats:
    """(n,) |b|² at the crest near the angles (n,)."""
    largest = np.zeros(len(angle))
    k = orders[:, None, None]
    furthest = 2.0 * np.pi / (_INSTANTS * orders.max())
    for _ in range(4):
        turned = amplitudes * np.exp(1j * orders[:, None] * angle)[:, :, None]
        value = turned.real.sum(axis=0)
        slope = (1j * k * turned).real.sum(axis=0)
        bend = (-(k**2) * turned).real.sum(axis=0)
        largest = np.maximum(largest, (value * value).sum(axis=1))
        # Newton on the slope of |b|²; uphill only, never further than one sample.
        first = (value * slope).sum(axis=1)
        second = (slope * slope + value * bend).sum(axis=1)
        curved = second < 0
        step = np.where(curved, -first / np.where(curved, second, 1.0), 0.0)
        angle = angle + np.clip(step, -furthest, furthest)
    return largest
