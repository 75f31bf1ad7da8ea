"""One circuit's phasors in a load case: lines, neutral, net current, by frequency.

The neutral closes the lines' sum unless it is entered; net current leaves the cable
with the label `stray`. Values that contradict each other stand side by side, see
`neutral_comparison`.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Literal

from msgspec.structs import replace

from engine.circuits import (
    ENTERED_CURRENTS,
    RETURNS,
    STRAY,
    Circuit,
    EnteredNetCurrent,
    LoadCase,
    NeutralShare,
    OwnCurrents,
)
from engine.demands import (
    Fundamental,
    Polar,
    check_direction,
    circuit_error,
    fundamental,
)
from engine.errors import UserError
from engine.run_conductors import Same
from engine.spectra import frequency_key, harmonics, phasor

AngleKind = Literal[
    "offset unknown",
    "sequence assumed",
    "line offset assumed",
    "power factor assumed",
    "neutral angle assumed",
    "net current angle assumed",
    "relation unknown",
    "other base",
]

#: Sums of phasors below this part of their terms are rounding, and zero.
_ROUNDING = 1e-12


@dataclass(frozen=True)
class AngleNote:
    """An angle that is unknown or was assumed, for one circuit.

    "offset unknown", "relation unknown" and "other base" keep currents apart in the
    components. The assumed ones are angles inside one circuit, and are used as stated.
    """

    kind: AngleKind
    circuit: str
    #: None: at every frequency of the circuit. [Hz]
    frequency: float | None = None


@dataclass(frozen=True)
class NeutralComparison:
    """The neutral that the lines give, beside what was entered or measured.

    RMS over all frequencies; None where nothing was entered. Nothing is made to agree.

    Attributes
    ----------
    computed
        Minus the sum of the lines. [A]
    measured
        The demand's own neutral, entered directly or measured. [A]
    net
        The net current as clamped. [A]
    """

    computed: float
    measured: float | None
    net: float | None


@dataclass(frozen=True)
class CircuitCurrents:
    """One circuit's RMS phasors by label and frequency [Hz].

    Attributes
    ----------
    values
        With unknown offsets taken as 0°. [A]
    unknown
        Frequencies at which the offset to the fundamental is unknown. [Hz]
    notes
        What was assumed or is unknown inside the circuit.
    """

    values: Mapping[tuple[str, float], complex] = field(default_factory=dict)
    unknown: frozenset[float] = frozenset()
    notes: tuple[AngleNote, ...] = ()


class CaseTerms:
    """What a load case says, found by circuit.

    Raises
    ------
    UserError
        When the case names a circuit twice in one place.
    """

    def __init__(self, case: LoadCase) -> None:
        self._others_flow = case.others == "as entered"
        self._factors: dict[str, float] = {}
        self._own: dict[str, OwnCurrents] = {}
        for entry in case.factors:
            _check_once(case, "factors", entry.circuit, self._factors)
            self._factors[entry.circuit] = entry.factor
        for own in case.own:
            _check_once(case, "own currents", own.circuit, self._own)
            self._own[own.circuit] = own

    def stated(self, circuit: Circuit) -> tuple[Circuit, float]:
        """The circuit as the case states it, and the factor of all its currents."""
        own = self._own.get(circuit.id)
        if own is None:
            default = 1.0 if self._others_flow else 0.0
            return circuit, self._factors.get(circuit.id, default)
        kept = {
            name: value
            for name in ("demand", "spectrum", "neutral", "net_current")
            if (value := getattr(own, name)) is not None
        }
        return replace(circuit, **kept), self._factors.get(circuit.id, 1.0)

    def currents(self, circuit: Circuit) -> CircuitCurrents:
        """The circuit's currents in the case; nothing where it is switched off.

        Raises
        ------
        UserError
            When the circuit's entries do not determine its currents.
        """
        stated, factor = self.stated(circuit)
        if factor == 0:
            return CircuitCurrents()
        currents = circuit_currents(stated)
        if factor == 1:
            return currents
        values = {key: factor * value for key, value in currents.values.items()}
        return CircuitCurrents(values, currents.unknown, currents.notes)


def circuit_phasors(
    circuit: Circuit, case: LoadCase = ENTERED_CURRENTS
) -> dict[tuple[str, float], complex]:
    """RMS phasors of one circuit in a load case, by label and frequency [Hz]. [A]

    Unknown offsets count as 0° here; a circuit that is switched off gives nothing.

    Raises
    ------
    UserError
        When the circuit's entries do not determine its currents.
    """
    return dict(CaseTerms(case).currents(circuit).values)


def neutral_comparison(
    circuit: Circuit, case: LoadCase = ENTERED_CURRENTS
) -> NeutralComparison:
    """The neutral that the lines give beside the one entered or measured.

    Raises
    ------
    UserError
        When the circuit's entries do not determine its currents.
    """
    stated, factor = CaseTerms(case).stated(circuit)
    base = fundamental(stated)
    back = RETURNS.get(stated.supply)
    own = base.own_return
    sums: dict[float, list[complex]] = {}
    own_harmonics = 0.0
    for (label, frequency), value in circuit_currents(stated).values.items():
        if label in base.lines:
            sums.setdefault(frequency, []).append(value)
        elif label == back and frequency != frequency_key(stated.base_frequency):
            own_harmonics = math.hypot(own_harmonics, abs(value))
    computed = math.hypot(*(abs(_minus_sum(lines)) for lines in sums.values()))
    if own is not None and stated.neutral == "entered":
        own = math.hypot(own, own_harmonics)
    return NeutralComparison(
        computed=factor * computed,
        measured=None if own is None else factor * own,
        net=None if base.own_net is None else factor * base.own_net,
    )


def circuit_currents(circuit: Circuit) -> CircuitCurrents:
    """The currents of a circuit as it stands, identical while it is the same value.

    Raises
    ------
    UserError
        When the circuit's entries do not determine its currents.
    """
    return _currents(Same(circuit))


@lru_cache(maxsize=8192)
def _currents(same: Same[Circuit]) -> CircuitCurrents:
    circuit = same.value
    base = fundamental(circuit)
    base_frequency = frequency_key(circuit.base_frequency)
    stated, notes = _stated(circuit, base, base_frequency)
    lines = [label for label in base.lines if label != "PE" or circuit.supply == "free"]
    spectrum = harmonics(circuit, stated, lines)
    at_base = {label: phasor(x, base_frequency) for label, x in stated.items()}
    values: dict[tuple[str, float], complex] = {}
    for frequency, given in {base_frequency: at_base, **spectrum.values}.items():
        for label, value in _closed(circuit, given).items():
            values[label, frequency] = value
    notes += [AngleNote("offset unknown", circuit.id, f) for f in spectrum.unknown]
    notes += [AngleNote("line offset assumed", circuit.id, f) for f in spectrum.mixed]
    return CircuitCurrents(values, spectrum.unknown, tuple(notes))


def _check_once(
    case: LoadCase, place: str, circuit: str, found: Mapping[str, object]
) -> None:
    if circuit in found:
        raise UserError(
            f"Load case “{case.title}”, {place}: circuit {circuit} comes twice; "
            "keep one entry."
        )


def _stated(
    circuit: Circuit, base: Fundamental, base_frequency: float
) -> tuple[dict[str, Polar], list[AngleNote]]:
    """Conductors whose current at the base frequency is entered, not computed."""
    _check_return(circuit)
    notes = [AngleNote(kind, circuit.id) for kind in base.assumptions]
    stated = dict(base.lines)
    back = RETURNS.get(circuit.supply)
    computed = _minus_sum(phasor(x, base_frequency) for x in base.lines.values())
    if back is not None and circuit.neutral == "entered":
        if base.own_return is None:
            raise circuit_error(
                circuit,
                "neutral",
                f"it is said to be entered, but the demand states no {back}; enter it, "
                "or let it be computed.",
            )
        angle = base.own_return_angle
        if angle is None:
            angle = cmath.phase(computed)
            if base.own_return > 0:
                notes.append(AngleNote("neutral angle assumed", circuit.id))
        stated[back] = Polar(base.own_return, angle)
    net = circuit.net_current
    if isinstance(net, EnteredNetCurrent):
        if STRAY in stated:
            raise circuit_error(
                circuit,
                "net current",
                "the demand states a conductor “stray” as well; keep one of the two.",
            )
        if net.angle is None:
            angle = cmath.phase(computed)
            if net.rms > 0:
                notes.append(AngleNote("net current angle assumed", circuit.id))
        else:
            if base_frequency == 0:
                check_direction(circuit, "net current", net.angle)
            angle = math.radians(net.angle)
        stated[STRAY] = Polar(net.rms, angle)
    return stated, notes


def _check_return(circuit: Circuit) -> None:
    """Refuse a neutral or a share of it where the supply has none."""
    back = RETURNS.get(circuit.supply)
    if circuit.neutral == "entered" and circuit.supply == "three-phase three-wire":
        raise circuit_error(
            circuit,
            "neutral",
            "a three-wire supply has none to enter; choose “none”, or a four-wire "
            "supply.",
        )
    if isinstance(circuit.net_current, NeutralShare) and (
        back is None or circuit.neutral == "none"
    ):
        raise circuit_error(
            circuit,
            "net current",
            "there is no neutral to take a share of; enter the net current in amperes.",
        )


def _closed(circuit: Circuit, given: Mapping[str, complex]) -> dict[str, complex]:
    """The conductors of one frequency with neutral and net current."""
    values = dict(given)
    back = RETURNS.get(circuit.supply)
    if back is None or circuit.neutral == "none":
        return values
    if circuit.neutral == "computed":
        values[back] = _minus_sum(given.values())
    share = circuit.net_current
    if isinstance(share, NeutralShare):
        total = values.get(back, 0j)
        values[back] = (1.0 - share.share) * total
        values[STRAY] = share.share * total
    return values


def _minus_sum(phasors: Iterable[complex]) -> complex:
    """What closes a sum to zero; exactly zero where only rounding is left."""
    terms = tuple(phasors)
    total = -sum(terms, start=0j)
    if abs(total) <= _ROUNDING * sum(map(abs, terms)):
        return 0j
    return total
