"""The field vector at a place over one common period, and the currents that make it.

Where angles between parts of the field are unknown there is no waveform of the whole:
each part that adds as phasors has its own, and the whole has a bound with its reason.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine import field
from engine.case_fields import CaseCurrents, CaseFields
from engine.currents import Component
from engine.items import Point3
from engine.profile_sampling import peaked

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: Instants per period of the highest frequency, and at least in all.
_PER_PERIOD = 32
_LEAST_INSTANTS = 360


@dataclass(frozen=True, eq=False)
class FieldEllipse:
    """What the field of one component draws over its period.

    Attributes
    ----------
    component : Component
        Frequency and what it adds with.
    phasor : (3,) complex
        RMS of x, y and z. [T]
    semi_major, semi_minor : float
        RMS; √2 times them are the largest and smallest length of the vector. [T]
    axes : (2, 3) float
        Unit vectors along both; zero where an axis is not defined.
    normal : (3,) float
        Of its plane; zero for a field along a line.
    """

    component: Component
    phasor: Complexes
    semi_major: float
    semi_minor: float
    axes: Floats
    normal: Floats


@dataclass(frozen=True, eq=False)
class Wave:
    """The vector of the components that add as phasors, over their common period.

    Attributes
    ----------
    components : tuple of Component
        Above 0 Hz, of one base and group.
    period : float
        [s]
    times : (k,) float
        From 0, the period left out; even. [s]
    vectors : (k, 3) float
        Instantaneous x, y and z. [T]
    magnitudes : (k,) float
        [T]
    rms : float
        Root of the mean square of the magnitude: the RMS resultant. [T]
    peak, peak_time : float
        Largest magnitude and when. [T, s]
    """

    components: tuple[Component, ...]
    period: float
    times: Floats
    vectors: Floats
    magnitudes: Floats
    rms: float
    peak: float
    peak_time: float


@dataclass(frozen=True)
class CurrentPhasor:
    """A circuit conductor's RMS current in one component. [A]"""

    circuit: str
    label: str
    component: Component
    current: complex


@dataclass(frozen=True, eq=False)
class CycleView:
    """The field at a place over time.

    Attributes
    ----------
    ellipses : tuple of FieldEllipse
        One for each component above 0 Hz.
    dc : (3,) float
        The constant field, not part of the waves. [T]
    waves : tuple of Wave
        One where all adds as phasors: then it is the true waveform. Several where
        angles are unknown; a part without a common period has none.
    rms : float
        RMS resultant of the alternating field; an upper bound where `rms_reason` says
        why. [T]
    peak : float
        Largest magnitude of the alternating field; an upper bound where `peak_reason`
        says why. [T]
    currents : tuple of CurrentPhasor
        That make it, in the order of the circuits.
    """

    at: Point3
    case: str
    ellipses: tuple[FieldEllipse, ...]
    dc: Floats
    waves: tuple[Wave, ...]
    rms: float
    rms_reason: str
    peak: float
    peak_reason: str
    currents: tuple[CurrentPhasor, ...]

    @property
    def is_waveform(self) -> bool:
        """Whether the one wave is the waveform of the whole alternating field."""
        return len(self.waves) == 1 and not self.peak_reason


def cycle_view(fields: CaseFields, case: CaseCurrents, at: Point3) -> CycleView:
    """The field at a place over one common period.

    Parameters
    ----------
    fields, case
        Of the layout.
    at
        Not inside a conductor. [m]
    """
    b = case.currents @ fields.at(at).responses
    components = case.components
    sources: dict[tuple[float, str], list[int]] = {}
    for k, component in enumerate(components):
        if component.frequency > 0:
            sources.setdefault((component.base, component.group), []).append(k)
    made = (wave(b[rows], [components[k] for k in rows]) for rows in sources.values())
    whole = field.combined(b[:, None, :], components)
    highest = field.peak(b[:, None, :], components)
    still = [k for k, c in enumerate(components) if c.frequency == 0]
    return CycleView(
        at=at,
        case=case.case.id,
        ellipses=tuple(
            field_ellipse(b[k], c) for k, c in enumerate(components) if c.frequency > 0
        ),
        dc=b[still].real.sum(axis=0),
        waves=tuple(found for found in made if found is not None),
        rms=0.0 if whole.total_ac is None else float(whole.total_ac[0]),
        rms_reason=whole.reason,
        peak=float(highest.values[0]),
        peak_reason=highest.reason,
        currents=tuple(
            CurrentPhasor(circuit, label, component, complex(values[k]))
            for (circuit, label), values in case.phasors.values.items()
            for k, component in enumerate(components)
            if values[k] != 0
        ),
    )


def field_ellipse(b: Complexes, component: Component) -> FieldEllipse:
    """The ellipse of one component from its (3,) RMS phasors. [T]"""
    found = field.ellipse(b)
    return FieldEllipse(
        component=component,
        phasor=b,
        semi_major=float(found.semi_major),
        semi_minor=float(found.semi_minor),
        axes=found.axes,
        normal=np.cross(found.axes[0], found.axes[1]),
    )


def wave(b: Complexes, components: Sequence[Component]) -> Wave | None:
    """The vector over the common period of components that add as phasors.

    Parameters
    ----------
    b : (c, 3) complex
        RMS phasors. [T]
    components : c components
        Above 0 Hz, of one base and group.

    Returns
    -------
    Wave or None
        None where they have no common period, or one of more than 5000 of theirs.
    """
    frequencies = np.array([c.frequency for c in components])
    common = field.common_frequency(frequencies.tolist())
    if common is None:
        return None
    orders = frequencies / common
    n = max(_LEAST_INSTANTS, int(_PER_PERIOD * np.rint(orders.max())))
    drawn = field.cycle(b, components, n)
    magnitudes = np.linalg.norm(drawn.vectors, axis=1)
    step = 1.0 / (n * common)

    def length(times: Floats, _: NDArray[np.int64]) -> Floats:
        turns = np.sqrt(2.0) * np.exp(2j * np.pi * times[:, None] * frequencies)
        return np.asarray(np.linalg.norm((turns @ b).real, axis=1), np.float64)

    # Several crests may be nearly equal: each of those within a sample's error.
    crest = (magnitudes >= np.roll(magnitudes, 1)) & (
        magnitudes >= np.roll(magnitudes, -1)
    )
    near = crest & (magnitudes >= magnitudes.max() * (1 - 0.02))
    starts = drawn.times[near]
    times = peaked(starts - step, starts + step, length, step * 1e-6)
    values = length(times, np.arange(len(times)))
    best = int(np.argmax(values))
    return Wave(
        components=tuple(components),
        period=1.0 / common,
        times=drawn.times,
        vectors=drawn.vectors,
        magnitudes=magnitudes,
        rms=float(np.linalg.norm(b)),
        peak=float(values[best]),
        peak_time=float(times[best] % (1.0 / common)),
    )
