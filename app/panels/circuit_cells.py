"""Cells of circuits as text, and circuits after a text was entered. No Qt.

A value that changes loses its origin: what vouched for it was the value before.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from msgspec.structs import replace

from engine.circuits import (
    ENTERED_CURRENTS,
    RETURNS,
    STRAY,
    Circuit,
    LoadCase,
)
from engine.currents import circuit_phasors
from engine.edits import checked, unused_id
from engine.errors import UserError
from engine.layout import Layout
from engine.origins import restated
from engine.shown_currents import made_of_it, typed_net_current
from engine.typed_currents import typed_current, typed_power_factor
from engine.typed_numbers import typed_quantity
from engine.units import significant

SUPPLIES: tuple[tuple[str, str], ...] = (
    ("three-phase four-wire", "3-phase 4-wire"),
    ("three-phase three-wire", "3-phase 3-wire"),
    ("single-phase", "single-phase"),
    ("dc", "DC"),
    ("free", "free conductors"),
)
NEUTRALS: tuple[tuple[str, str], ...] = (
    ("computed", "computed"),
    ("entered", "as entered"),
    ("none", "none"),
)
RELATIONS: tuple[tuple[str, str], ...] = (
    ("known", "known"),
    ("unknown", "unknown"),
)

HERTZ = {"Hz": 1.0, "kHz": 1e3}
VOLTS = {"V": 1.0, "kV": 1e3}


def words_of(options: tuple[tuple[str, str], ...], value: str) -> str:
    """The words for a value."""
    return dict(options)[value]


def value_of(options: tuple[tuple[str, str], ...], text: str, what: str) -> str:
    """The value for words, as a person may type or paste them.

    Raises
    ------
    UserError
        When it is none of the options.
    """
    wanted = " ".join(text.lower().split())
    for value, words in options:
        if wanted in (value.lower(), words.lower()):
            return value
    listed = ", ".join(words for _, words in options)
    raise UserError(f"“{text[:40]}” is no {what}; use one of {listed}.")


def with_name(circuit: Circuit, text: str, _decimal: str) -> Circuit:
    return checked(restated(circuit, name=text.strip()))


def with_current(circuit: Circuit, text: str, decimal: str) -> Circuit:
    """The circuit with the demand that a current cell states."""
    typed = typed_current(text, circuit, decimal)
    values: dict[str, Any] = {"demand": typed.demand}
    if typed.voltage is not None:
        values["voltage"] = typed.voltage
    return checked(restated(circuit, **values))


def with_power_factor(circuit: Circuit, text: str, decimal: str) -> Circuit:
    return checked(restated(circuit, demand=typed_power_factor(text, circuit, decimal)))


def with_supply(circuit: Circuit, text: str, _decimal: str) -> Circuit:
    """Another supply; a DC circuit has 0 Hz, and an AC one leaves it."""
    supply = value_of(SUPPLIES, text, "supply")
    values: dict[str, Any] = {"supply": supply}
    if supply == "dc":
        values["base_frequency"] = 0.0
    elif circuit.supply == "dc" and circuit.base_frequency == 0 and supply != "free":
        values["base_frequency"] = 50.0
    return checked(restated(circuit, **values))


def with_frequency(circuit: Circuit, text: str, decimal: str) -> Circuit:
    return checked(
        restated(circuit, base_frequency=typed_quantity(text, HERTZ, "Hz", decimal))
    )


def with_voltage(circuit: Circuit, text: str, decimal: str) -> Circuit:
    voltage = typed_quantity(text, VOLTS, "V", decimal) if text.strip() else None
    if voltage is not None and voltage <= 0:
        raise UserError("The voltage must be more than 0 V.")
    return checked(restated(circuit, voltage=voltage))


def with_neutral(circuit: Circuit, text: str, _decimal: str) -> Circuit:
    return checked(restated(circuit, neutral=value_of(NEUTRALS, text, "neutral")))


def with_net_current(circuit: Circuit, text: str, decimal: str) -> Circuit:
    return checked(restated(circuit, net_current=typed_net_current(text, decimal)))


def new_circuit(layout: Layout, *beside: Circuit) -> Circuit:
    """A circuit without a current, as the defaults say, beside others not yet in."""
    taken = {circuit.id for circuit in beside} | {i.id for i in layout.items()}
    number = len(layout.circuits) + 1
    while f"C{number}" in taken:
        number += 1
    return Circuit(
        id=f"C{number}",
        name=f"Circuit {number}",
        base_frequency=layout.settings.frequency,
    )


def duplicate(layout: Layout, circuit: Circuit) -> Circuit:
    """The circuit once more, under a name of its own and without origins."""
    return replace(
        circuit,
        id=unused_id(layout, circuit.id),
        name=f"{circuit.title} (copy)"[:400],
        origins=(),
    )


@dataclass(frozen=True)
class Live:
    """What a circuit carries in a load case.

    Attributes
    ----------
    neutral, net : float or None
        RMS over all frequencies; None where there is no such conductor. [A]
    fault : str
        Why nothing can be said, or empty.
    """

    neutral: float | None = None
    net: float | None = None
    fault: str = ""


def live(circuit: Circuit, case: LoadCase = ENTERED_CURRENTS) -> Live:
    """N and net current of a circuit in a load case, over all frequencies."""
    try:
        phasors = circuit_phasors(circuit, case)
    except UserError as error:
        return Live(fault=str(error))
    return Live(
        neutral=total(phasors, RETURNS.get(circuit.supply, "")),
        net=total(phasors, STRAY),
    )


def total(phasors: Mapping[tuple[str, float], complex], label: str) -> float | None:
    """RMS of one conductor over all frequencies, None where it carries nothing. [A]"""
    found = [abs(value) for (name, _), value in phasors.items() if name == label]
    return math.hypot(*found) if found else None


def amperes_text(amperes: float | None, decimal: str) -> str:
    """A result in amperes, or a dash where there is none."""
    if amperes is None:
        return "–"
    return f"{significant(amperes).replace('.', decimal)} A"


def made_text(circuit: Circuit, decimal: str) -> str:
    """What was made of the demand, or why nothing can be."""
    try:
        return made_of_it(circuit, decimal)
    except UserError as error:
        return str(error)
