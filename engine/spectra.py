"""The currents of a circuit besides its base frequency, from its spectrum.

A line at order h has the angle h · (angle of that line's fundamental) + offset: the
angles of one wave shape shifted in time from line to line. So third harmonics come
in phase in all lines, the fifth in reversed and the seventh in forward sequence.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from engine.circuits import STRAY, Circuit, SpectrumLine
from engine.demands import Polar, check_direction, circuit_error


@dataclass(frozen=True)
class Harmonics:
    """Currents over frequency, and the frequencies at which the offset is unknown.

    Attributes
    ----------
    values
        RMS phasors by frequency [Hz] and label. [A]
    unknown
        Frequencies at which at least one line has no offset; the angles of the
        circuit's conductors to each other hold, their common angle does not.
    mixed
        Those of them at which other lines have one: a line without an offset is taken
        with 0°, so the angles between the lines are assumed too.
    """

    values: Mapping[float, Mapping[str, complex]]
    unknown: frozenset[float]
    mixed: frozenset[float] = frozenset()


def frequency_key(frequency: float) -> float:
    """The frequency to a millionth of a hertz, so that 3 · 50 Hz meets 150 Hz."""
    return round(frequency, 6)


def phasor(current: Polar, frequency: float) -> complex:
    """RMS phasor of a current; at 0 Hz its signed value. [A]"""
    if frequency == 0:
        return complex(math.copysign(current.rms, math.cos(current.angle)), 0.0)
    return cmath.rect(current.rms, current.angle)


def harmonics(
    circuit: Circuit, stated: Mapping[str, Polar], lines: Iterable[str]
) -> Harmonics:
    """The currents that a circuit's spectrum states.

    A spectrum line that names its conductor replaces, for that conductor, the one for
    every line at the same frequency. The fundamental's angle is taken between −180° and
    180°, which matters between whole orders only. A DC circuit has no order: there
    the angle is that of the direction (0° or 180°) plus the offset.

    Parameters
    ----------
    circuit : Circuit
        Its spectrum and base frequency are used.
    stated
        Conductors whose current at the base frequency is stated, whatever computes
        the others.
    lines
        Those of them that a spectrum line without a label means.

    Raises
    ------
    UserError
        When a spectrum line names a conductor that has no stated current, a frequency
        twice, the base frequency, not exactly one of ratio and current, or a direct
        current without direction.
    """
    every = tuple(lines)
    named: dict[float, dict[str, SpectrumLine]] = {}
    for line in circuit.spectrum:
        frequency = _checked_frequency(circuit, line)
        at_frequency = named.setdefault(frequency, {})
        if line.label in at_frequency:
            raise circuit_error(
                circuit,
                _field(line),
                "the frequency comes twice; keep one entry.",
            )
        at_frequency[line.label] = line
    values: dict[float, dict[str, complex]] = {}
    unknown: set[float] = set()
    known: set[float] = set()
    for frequency, by_label in named.items():
        applied = dict.fromkeys(every, by_label.pop("")) if "" in by_label else {}
        applied |= by_label
        found = values[frequency] = {}
        for label, line in applied.items():
            found[label] = _line_phasor(circuit, stated, label, line, frequency)
            if found[label] != 0:
                (unknown if line.offset is None else known).add(frequency)
    return Harmonics(values, frozenset(unknown), frozenset(unknown & known))


def _field(line: SpectrumLine) -> str:
    return f"spectrum {line.frequency:g} Hz" + (f" {line.label}" if line.label else "")


def _checked_frequency(circuit: Circuit, line: SpectrumLine) -> float:
    frequency = frequency_key(line.frequency)
    if frequency == frequency_key(circuit.base_frequency):
        raise circuit_error(
            circuit,
            _field(line),
            "this is the base frequency; enter its current as the demand and remove "
            "it from the spectrum.",
        )
    if (line.ratio is None) == (line.rms is None):
        raise circuit_error(
            circuit,
            _field(line),
            "enter either a ratio or a current, not both and not neither.",
        )
    return frequency


def _line_phasor(
    circuit: Circuit,
    stated: Mapping[str, Polar],
    label: str,
    line: SpectrumLine,
    frequency: float,
) -> complex:
    base = stated.get(label)
    if base is None:
        if circuit.supply != "free" or line.rms is None or label == STRAY:
            raise _no_current(circuit, label, line)
        base = Polar(0.0, 0.0)
    if line.rms is not None:
        rms = line.rms
    else:
        assert line.ratio is not None
        rms = line.ratio * base.rms
    if frequency == 0 and line.offset is None:
        raise circuit_error(
            circuit,
            _field(line),
            "a direct current needs a direction; enter an offset of 0° for along the "
            "route or 180° for against it.",
        )
    offset = 0.0 if line.offset is None else line.offset
    if frequency == 0:
        check_direction(circuit, _field(line), offset)
    order = frequency / circuit.base_frequency if circuit.base_frequency else 1.0
    principal = math.remainder(base.angle, math.tau)
    return phasor(Polar(rms, order * principal + math.radians(offset)), frequency)


def _no_current(circuit: Circuit, label: str, line: SpectrumLine) -> Exception:
    if label == STRAY:
        what = "enter the net current as such, then its harmonics"
    else:
        what = (
            f"enter the current of {label} at {circuit.base_frequency:g} Hz, or remove "
            "this entry; a computed neutral gets its harmonics from the lines"
        )
    return circuit_error(
        circuit, _field(line), f"no current of {label} is entered; {what}."
    )
