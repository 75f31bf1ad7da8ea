"""A circuit's demand as phasors of its lines at the base frequency.

Voltages are the reference: L1 0°, L2 −120°, L3 +120°. What the demand does not say (the
angle of a clamped current) is assumed here and named, never filled in silently.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal, NamedTuple

from engine.circuits import (
    LINES,
    RETURNS,
    STRAY,
    BalancedCurrent,
    Circuit,
    DirectCurrents,
    LineLoads,
    MeasuredCurrents,
    Power,
    Sense,
    Unbalance,
)
from engine.errors import UserError

#: Angle of the line's own voltage. [degrees]
VOLTAGE_ANGLES: dict[str, float] = {"L1": 0.0, "L2": -120.0, "L3": 120.0}

#: Conductors that a demand may name, besides those of a free circuit.
_AC_LABELS = ("L1", "L2", "L3", "N", "PE")
_DC_LABELS = ("L+", "L-", "M", "PE")

Assumption = Literal["sequence assumed", "power factor assumed"]


class Polar(NamedTuple):
    """An RMS current [A] and its angle [rad]; at 0 A the angle still counts."""

    rms: float
    angle: float


@dataclass(frozen=True)
class Fundamental:
    """What a demand says at the base frequency of its circuit.

    Attributes
    ----------
    lines
        Every conductor that the demand states except the return conductor, in the
        order of the demand.
    own_return
        RMS current of the return conductor (N, L-) as the demand states it. [A]
    own_return_angle
        Its angle, where the demand states one. [rad]
    own_net
        Net current as clamped. [A]
    assumptions
        Angles that the demand leaves open and that were assumed.
    """

    lines: Mapping[str, Polar]
    own_return: float | None = None
    own_return_angle: float | None = None
    own_net: float | None = None
    assumptions: tuple[Assumption, ...] = ()


def circuit_error(circuit: Circuit, field: str, sentence: str) -> UserError:
    """The error that names the circuit and the field before saying what to do."""
    return UserError(f"Circuit “{circuit.title}”, {field}: {sentence}")


def fundamental(circuit: Circuit) -> Fundamental:
    """The currents that a circuit's demand states at its base frequency.

    A circuit without a demand has lines without current.

    Raises
    ------
    UserError
        When the demand does not determine the currents.
    """
    _check_base_frequency(circuit)
    demand = circuit.demand
    match demand:
        case None:
            angles = ((x, VOLTAGE_ANGLES.get(x, 0.0)) for x in LINES[circuit.supply])
            lines = {label: Polar(0.0, math.radians(a)) for label, a in angles}
            return Fundamental(lines)
        case DirectCurrents():
            return _direct(circuit, demand)
        case LineLoads():
            return _line_loads(circuit, demand)
        case BalancedCurrent():
            _check_has_lines(circuit)
            lag = _lag(demand.cos_phi, demand.sense)
            return _balanced(circuit, demand.rms, lag, demand.unbalance)
        case Power():
            _check_has_lines(circuit)
            lag = _lag(demand.cos_phi, demand.sense)
            return _balanced(
                circuit, _power_rms(circuit, demand), lag, demand.unbalance
            )
        case MeasuredCurrents():
            return _measured(circuit, demand)


def check_direction(circuit: Circuit, field: str, degrees: float) -> None:
    """Refuse an angle of a direct current that is not a direction.

    Raises
    ------
    UserError
        When `degrees` is neither 0 nor 180, full turns apart.
    """
    if abs(math.remainder(degrees, 180.0)) > 1e-9:
        raise circuit_error(
            circuit,
            field,
            f"a direct current has no angle of {degrees:g}°; enter 0° for along the "
            "route or 180° for against it.",
        )


def sequence_currents(
    positive: complex, negative: complex, zero: complex
) -> tuple[complex, complex, complex]:
    """Line currents from their symmetrical components, all of line L1.

    Parameters
    ----------
    positive, negative, zero
        Positive-, negative- and zero-sequence components of L1. [A]

    Returns
    -------
    three complex
        Currents of L1, L2, L3; L2 lags L1 in the positive sequence. [A]

    References
    ----------
    .. [1] C. L. Fortescue, Method of symmetrical co-ordinates applied to the solution
       of polyphase networks, Trans. AIEE 37 (1918): I1 = I0 + I+ + I−,
       I2 = I0 + a² I+ + a I−, I3 = I0 + a I+ + a² I−, a = 1∠120°.
    """
    a = cmath.rect(1.0, math.radians(120.0))
    a2 = a.conjugate()
    return (
        zero + positive + negative,
        zero + a2 * positive + a * negative,
        zero + a * positive + a2 * negative,
    )


def _check_base_frequency(circuit: Circuit) -> None:
    if circuit.supply == "dc" and circuit.base_frequency != 0:
        raise circuit_error(
            circuit,
            "base frequency",
            f"a DC circuit has 0 Hz, not {circuit.base_frequency:g} Hz; enter 0 Hz or "
            "choose another supply.",
        )
    if circuit.supply not in ("dc", "free") and circuit.base_frequency == 0:
        raise circuit_error(
            circuit,
            "base frequency",
            f"0 Hz does not fit a {circuit.supply} supply; enter the frequency of the "
            "supply or choose DC.",
        )


def _check_has_lines(circuit: Circuit) -> None:
    if circuit.supply == "free":
        raise circuit_error(
            circuit,
            "demand",
            "a free circuit has no lines to spread one current or power over; enter "
            "the current of each conductor, or choose another supply.",
        )


def _check_labels(circuit: Circuit, field: str, labels: Iterable[str]) -> None:
    """Refuse a label that comes twice, or that the supply does not have."""
    known: tuple[str, ...] = _DC_LABELS if circuit.supply == "dc" else _AC_LABELS
    if circuit.supply == "three-phase three-wire":
        known = tuple(label for label in known if label != "N")
    seen: set[str] = set()
    for label in labels:
        if label in seen:
            raise circuit_error(
                circuit, field, f"{label} comes twice; enter each conductor once."
            )
        seen.add(label)
        if circuit.supply == "free":
            continue
        if label == STRAY:
            raise circuit_error(
                circuit,
                field,
                "the net current has a place of its own; enter it as net current of "
                "the circuit and remove it here.",
            )
        if label not in known:
            raise circuit_error(
                circuit,
                field,
                f"a {circuit.supply} supply has no conductor {label}; use "
                f"{', '.join(known)}, or choose the free supply.",
            )


def _direct(circuit: Circuit, demand: DirectCurrents) -> Fundamental:
    field = "demand.currents"
    _check_labels(circuit, field, (c.label for c in demand.currents))
    lines: dict[str, Polar] = {}
    for current in demand.currents:
        if circuit.base_frequency == 0:
            check_direction(circuit, f"{field} {current.label}", current.angle)
        lines[current.label] = Polar(current.rms, math.radians(current.angle))
    own = lines.pop(RETURNS.get(circuit.supply, ""), None)
    if own is None:
        return Fundamental(lines)
    return Fundamental(lines, own_return=own.rms, own_return_angle=own.angle)


def _line_loads(circuit: Circuit, demand: LineLoads) -> Fundamental:
    field = "demand.loads"
    if circuit.base_frequency == 0:
        raise circuit_error(
            circuit,
            field,
            "a direct current has no power factor; enter the currents directly.",
        )
    _check_labels(circuit, field, (load.label for load in demand.loads))
    lines: dict[str, Polar] = {}
    for load in demand.loads:
        voltage = _voltage_angle(circuit, field, load.label)
        if (load.cos_phi is None) == (load.lag is None):
            raise circuit_error(
                circuit,
                f"{field} {load.label}",
                "enter either the power factor or the angle of lag, not both and not "
                "neither.",
            )
        if load.lag is not None:
            lag = math.radians(load.lag)
        else:
            assert load.cos_phi is not None
            lag = _lag(load.cos_phi, load.sense)
        lines[load.label] = Polar(load.rms, voltage - lag)
    return Fundamental(lines)


def _voltage_angle(circuit: Circuit, field: str, label: str) -> float:
    if label not in VOLTAGE_ANGLES:
        raise circuit_error(
            circuit,
            field,
            f"{label} has no voltage of its own to lag behind; name L1, L2 and L3 "
            "only, or enter the currents directly.",
        )
    return math.radians(VOLTAGE_ANGLES[label])


def _lag(cos_phi: float, sense: Sense) -> float:
    """Displacement angle, positive lagging. [rad]"""
    angle = math.acos(cos_phi)
    return angle if sense == "lagging" else -angle


def _balanced(
    circuit: Circuit, rms: float, lag: float, unbalance: Unbalance | None
) -> Fundamental:
    """Lines of one current; with an unbalance `rms` is the positive sequence."""
    labels = LINES[circuit.supply]
    if unbalance is not None and len(labels) != 3:
        raise circuit_error(
            circuit,
            "demand.unbalance",
            f"a {circuit.supply} supply has no sequence components; remove the "
            "unbalance or choose a three-phase supply.",
        )
    if circuit.supply == "dc":
        return Fundamental({labels[0]: Polar(rms, 0.0)})
    if unbalance is None:
        angles = (math.radians(VOLTAGE_ANGLES[label]) - lag for label in labels)
        return Fundamental(
            dict(zip(labels, (Polar(rms, a) for a in angles), strict=True))
        )
    positive = cmath.rect(rms, -lag)
    negative = positive * cmath.rect(
        unbalance.negative_ratio, math.radians(unbalance.negative_angle)
    )
    zero = positive * cmath.rect(
        unbalance.zero_ratio, math.radians(unbalance.zero_angle)
    )
    phasors = sequence_currents(positive, negative, zero)
    polars = (Polar(abs(phasor), cmath.phase(phasor)) for phasor in phasors)
    return Fundamental(dict(zip(labels, polars, strict=True)))


def _power_rms(circuit: Circuit, demand: Power) -> float:
    """The current of one line from the power of the whole circuit. [A]

    I = S / (√3 U) with the voltage U between lines, I = S / U for one phase and for DC
    (common practice). At balanced voltages only the positive sequence carries power, so
    this is the positive sequence of an unbalanced circuit as well. At 0 Hz apparent
    and active power are the same and the power factor does not count.
    """
    if (demand.apparent is None) == (demand.active is None):
        raise circuit_error(
            circuit,
            "demand",
            "enter either the apparent power (kVA) or the active power (kW), not both "
            "and not neither.",
        )
    if circuit.voltage is None:
        kinds = {"single-phase": "from line to neutral", "dc": "between the poles"}
        kind = kinds.get(circuit.supply, "between lines")
        raise circuit_error(
            circuit,
            "voltage",
            f"a power gives no current without a voltage; enter the voltage {kind}.",
        )
    if demand.apparent is not None:
        power = demand.apparent
    else:
        assert demand.active is not None
        power = (
            demand.active if circuit.supply == "dc" else demand.active / demand.cos_phi
        )
    phases = math.sqrt(3.0) if len(LINES[circuit.supply]) == 3 else 1.0
    return power / (phases * circuit.voltage)


def _measured(circuit: Circuit, demand: MeasuredCurrents) -> Fundamental:
    """Clamped magnitudes at the angles of the voltages less one common lag."""
    field = "demand.lines"
    _check_labels(circuit, field, (line.label for line in demand.lines))
    back = RETURNS.get(circuit.supply)
    if back is None and demand.neutral is not None:
        raise circuit_error(
            circuit,
            "demand.neutral",
            f"a {circuit.supply} supply has no neutral; remove the value or choose "
            "another supply.",
        )
    lag = 0.0 if demand.cos_phi is None else _lag(demand.cos_phi, demand.sense)
    lines: dict[str, Polar] = {}
    for line in demand.lines:
        if line.label == back:
            raise circuit_error(
                circuit,
                field,
                f"{back} has a place of its own; enter it as the measured neutral.",
            )
        if circuit.base_frequency == 0:
            lines[line.label] = Polar(line.rms, 0.0)
        else:
            angle = _voltage_angle(circuit, field, line.label)
            lines[line.label] = Polar(line.rms, angle - lag)
    assumptions: list[Assumption] = []
    if len(lines) > 1:
        assumptions.append("sequence assumed")
    if circuit.base_frequency != 0 and demand.cos_phi is None:
        assumptions.append("power factor assumed")
    return Fundamental(
        lines,
        own_return=demand.neutral,
        own_net=demand.net,
        assumptions=tuple(assumptions),
    )
