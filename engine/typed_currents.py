"""What a current cell understands, and what it shows of a demand.

A cell takes a current (`1.6 kA`, `800 A 0.9 lag`, `575@18`), a power with its voltage
(`250 kVA 400 V 0.9 lag`), currents of the lines (`246 / 238 / 251 A @ 27`), conductors
with their angles (`L1 100∠0 / N 12∠-30`) and clamped ones (`measured 246 / 238 / 251 /
N 12 / net 0.4`). Import place: after `circuit_currents` and `typed_numbers`.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from msgspec.structs import replace

from engine.circuits import (
    LINES,
    RETURNS,
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    Demand,
    DirectCurrents,
    LineLoad,
    LineLoads,
    MeasuredCurrents,
    MeasuredLine,
    Power,
    Sense,
)
from engine.errors import UserError
from engine.typed_numbers import NUMBER, plain_text, typed_number

#: Power factor where neither the text nor the present demand says one (an assumption).
ASSUMED_POWER_FACTOR = 0.9

_CURRENTS = {"a": 1.0, "ka": 1e3, "ma": 1e-3, "": 1.0}
_APPARENT = {"va": 1.0, "kva": 1e3, "mva": 1e6}
_ACTIVE = {"w": 1.0, "kw": 1e3, "mw": 1e6}
_VOLTAGES = {"v": 1.0, "kv": 1e3}

_SENSES: dict[str, Sense] = {
    "lag": "lagging", "lagging": "lagging", "ind": "lagging", "inductive": "lagging",
    "lead": "leading", "leading": "leading", "cap": "leading", "capacitive": "leading",
}  # fmt: skip
_SENSE = "|".join(sorted(_SENSES, key=len, reverse=True))

_QUANTITY = re.compile(rf"^({NUMBER})\s*((?!cos|pf)[a-zA-Z]*)\s*", re.ASCII)
_FACTOR = re.compile(
    rf"^(?:(?:cos\s*(?:phi|φ|ϕ)|pf)\s*=?\s*)?({NUMBER})\s*({_SENSE})?$", re.IGNORECASE
)
_LAG = re.compile(rf"^@\s*([+\-]?)\s*({NUMBER})\s*°?\s*({_SENSE})?$", re.IGNORECASE)
_LABELLED = re.compile(
    rf"^([A-Za-z][\w+\-]*?)\s+({NUMBER})\s*(kA|A)?\s*[∠<]\s*([+\-]?\s*{NUMBER})\s*°?$"
)
_CLAMPED = re.compile(rf"^(?:([A-Za-z][\w+\-]*)\s+)?({NUMBER})\s*(kA|A)?\s*(.*)$")

#: What a sentence offers when a cell makes nothing of its text.
_EXAMPLES = "type for example 800 A, 1.6 kA 0.9 lag, 575@18 or 250 kVA 400 V"


@dataclass(frozen=True)
class TypedCurrent:
    """What was typed: a demand, and the voltage where the text states one. [V]"""

    demand: Demand | None
    voltage: float | None = None


@dataclass(frozen=True)
class _Angle:
    """How far a current lags: a power factor or an angle [degrees], never both."""

    cos_phi: float | None = None
    sense: Sense = "lagging"
    lag: float | None = None

    def line(self, label: str, rms: float) -> LineLoad:
        return LineLoad(
            label=label, rms=rms, cos_phi=self.cos_phi, sense=self.sense, lag=self.lag
        )


def typed_current(text: str, circuit: Circuit, decimal: str = ".") -> TypedCurrent:
    """The demand that `text` states for a circuit.

    Parameters
    ----------
    text : str
        As typed; empty: no current entered.
    circuit : Circuit
        Its supply names the lines; its present demand lends the power factor and the
        unbalance that the text does not state, its voltage the one of a power.
    decimal : str
        Decimal sign of the place.

    Raises
    ------
    UserError
        When nothing or two things can be made of it.
    """
    plain = plain_text(text)
    if not plain:
        return TypedCurrent(None)
    measured = re.match(r"^(?:as\s+)?measured:?\s+", plain, re.IGNORECASE)
    if measured:
        return TypedCurrent(_clamped(plain[measured.end() :], circuit, decimal))
    parts = [part.strip() for part in re.split(r"[/;|]", plain) if part.strip()]
    if parts and all(re.search("[∠<]", part) for part in parts):
        return TypedCurrent(_direct(parts, decimal))
    if len(parts) > 1:
        return TypedCurrent(_lines(parts, circuit, decimal))
    return _one(plain, circuit, decimal)


def typed_power_factor(text: str, circuit: Circuit, decimal: str = ".") -> Demand:
    """The circuit's demand with another power factor or lag: `0.92`, `0.9 lead`, `@18`.

    Raises
    ------
    UserError
        When it is no power factor, or the demand has none to change.
    """
    demand = circuit.demand
    if circuit.supply == "dc":
        raise UserError("A direct current has no power factor; leave the cell empty.")
    if demand is None or isinstance(demand, DirectCurrents):
        raise UserError(
            "There is no current that a power factor could belong to; type the current "
            "first, for example 800 A 0.9 lag."
        )
    if not plain_text(text):
        if isinstance(demand, MeasuredCurrents):
            return replace(demand, cos_phi=None, sense="lagging")
        raise UserError("A power factor is needed; type one such as 0.9 lag.")
    angle = _angle(plain_text(text), decimal)
    if isinstance(demand, LineLoads):
        loads = (angle.line(load.label, load.rms) for load in demand.loads)
        return LineLoads(loads=tuple(loads))
    if angle.lag is not None and isinstance(demand, BalancedCurrent):
        if demand.unbalance is None:
            labels = LINES[circuit.supply]
            return LineLoads(loads=tuple(angle.line(x, demand.rms) for x in labels))
        angle = _as_factor(angle)
    elif angle.lag is not None:
        angle = _as_factor(angle)
    assert angle.cos_phi is not None
    return replace(demand, cos_phi=angle.cos_phi, sense=angle.sense)


def _one(text: str, circuit: Circuit, decimal: str) -> TypedCurrent:
    """One current or one power for the whole circuit."""
    found = _QUANTITY.match(text)
    if found is None:
        raise UserError(f"Nothing can be made of “{_short(text)}”; {_EXAMPLES}.")
    number, unit, rest = found[1], found[2].lower(), text[found.end() :]
    value = typed_number(number, decimal)
    if found[2] == "mW" or found[2] == "mVA":
        raise UserError(f"“{found[2]}” is a thousandth; type M{found[2][1:]} or k.")
    if unit in _APPARENT or unit in _ACTIVE:
        return _power(value, unit, rest, circuit, decimal)
    if unit not in _CURRENTS:
        raise UserError(
            f"“{found[2]}” is no unit of a current or a power; use A, kA, kVA or kW."
        )
    _check_spread(circuit)
    rms = value * _CURRENTS[unit]
    angle = _stated_or_present(rest, circuit, decimal)
    if circuit.supply == "dc":
        return TypedCurrent(BalancedCurrent(rms=rms))
    if angle.lag is not None:
        lines = LINES[circuit.supply]
        return TypedCurrent(LineLoads(loads=tuple(angle.line(x, rms) for x in lines)))
    present = circuit.demand
    unbalance = (
        present.unbalance if isinstance(present, BalancedCurrent | Power) else None
    )
    assert angle.cos_phi is not None
    return TypedCurrent(
        BalancedCurrent(
            rms=rms, cos_phi=angle.cos_phi, sense=angle.sense, unbalance=unbalance
        )
    )


def _power(
    value: float, unit: str, rest: str, circuit: Circuit, decimal: str
) -> TypedCurrent:
    _check_spread(circuit)
    voltage = None
    found = _QUANTITY.match(rest)
    if found is not None and found[2].lower() in _VOLTAGES:
        voltage = typed_number(found[1], decimal) * _VOLTAGES[found[2].lower()]
        rest = rest[found.end() :]
        if not 0 < voltage <= 1e7:
            raise UserError("The voltage must be more than 0 V and at most 10,000 kV.")
    if voltage is None and circuit.voltage is None:
        kinds = {"single-phase": "from line to neutral", "dc": "between the poles"}
        where = kinds.get(circuit.supply, "between lines")
        raise UserError(
            f"A power gives no current without a voltage; add the voltage {where}, for "
            "example 250 kVA 400 V."
        )
    angle = _as_factor(_stated_or_present(rest, circuit, decimal))
    assert angle.cos_phi is not None
    present = circuit.demand
    power = Power(
        apparent=value * _APPARENT[unit] if unit in _APPARENT else None,
        active=value * _ACTIVE[unit] if unit in _ACTIVE else None,
        cos_phi=angle.cos_phi,
        sense=angle.sense,
        unbalance=(
            present.unbalance if isinstance(present, BalancedCurrent | Power) else None
        ),
    )
    return TypedCurrent(power, voltage)


def _lines(parts: list[str], circuit: Circuit, decimal: str) -> LineLoads:
    """Currents of the lines in their order; one angle at the end serves all."""
    labels = LINES[circuit.supply]
    if circuit.supply == "dc":
        raise UserError(
            "A DC circuit has one current; type it alone, or conductors with their "
            "direction, for example L+ 650∠0 / L- 650∠180."
        )
    if len(parts) != len(labels):
        raise UserError(
            f"There are {len(parts)} currents for {len(labels)} lines of a "
            f"{circuit.supply} supply; type one for each of {', '.join(labels)}."
            if labels
            else "A free circuit has no lines; type each conductor with its angle, for "
            "example a 100∠0 / b 100∠180."
        )
    split = [_line(part, decimal) for part in parts]
    last = split[-1][1]
    if last and not any(rest for _, rest in split[:-1]):
        split = [(rms, last) for rms, _ in split]
    loads = (
        _stated_or_present(rest, circuit, decimal).line(label, rms)
        for label, (rms, rest) in zip(labels, split, strict=True)
    )
    return LineLoads(loads=tuple(loads))


def _line(part: str, decimal: str) -> tuple[float, str]:
    """The current of one line [A] and what stands behind it."""
    found = _QUANTITY.match(part)
    if found is None or found[2].lower() not in _CURRENTS:
        raise UserError(
            f"“{_short(part)}” is not the current of a line; type for example "
            "246 / 238 / 251 A @ 27."
        )
    return typed_number(found[1], decimal) * _CURRENTS[found[2].lower()], part[
        found.end() :
    ]


def _direct(parts: list[str], decimal: str) -> DirectCurrents:
    currents = []
    for part in parts:
        found = _LABELLED.match(part)
        if found is None:
            raise UserError(
                f"“{_short(part)}” is not a conductor with its current and angle; type "
                "for example L1 100∠0 / N 12∠-30 (or < for ∠)."
            )
        rms = typed_number(found[2], decimal) * _CURRENTS[(found[3] or "").lower()]
        angle = typed_number(found[4], decimal)
        currents.append(ConductorCurrent(label=found[1], rms=rms, angle=angle))
    return DirectCurrents(currents=tuple(currents))


def _clamped(text: str, circuit: Circuit, decimal: str) -> MeasuredCurrents:
    """Clamped currents; date and instrument of a present survey are kept."""
    lines: list[MeasuredLine] = []
    others: dict[str, float] = {}
    factor = ""
    open_labels = list(LINES[circuit.supply])
    back = RETURNS.get(circuit.supply)
    for part in (x.strip() for x in re.split(r"[/;|]", text) if x.strip()):
        found = _CLAMPED.match(part)
        if found is None:
            raise UserError(
                f"“{_short(part)}” is not a clamped current; type for example "
                "measured 246 / 238 / 251 / N 12 / net 0.4."
            )
        label = found[1] or (open_labels[0] if open_labels else "")
        rms = typed_number(found[2], decimal) * _CURRENTS[(found[3] or "").lower()]
        factor = found[4].strip() or factor
        if label == back or label.lower() == "net":
            others["net" if label.lower() == "net" else "neutral"] = rms
            continue
        if not label:
            raise UserError(
                f"“{_short(part)}” names no conductor; put its label before it."
            )
        if label in open_labels:
            open_labels.remove(label)
        lines.append(MeasuredLine(label=label, rms=rms))
    angle = _as_factor(_angle(factor, decimal)) if factor else _Angle()
    present = circuit.demand
    kept = present if isinstance(present, MeasuredCurrents) else None
    return MeasuredCurrents(
        lines=tuple(lines),
        neutral=others.get("neutral"),
        net=others.get("net"),
        cos_phi=angle.cos_phi,
        sense=angle.sense,
        date=kept.date if kept else "",
        instrument=kept.instrument if kept else "",
    )


def _check_spread(circuit: Circuit) -> None:
    if circuit.supply == "free":
        raise UserError(
            "A free circuit has no lines to spread one current or power over; type "
            "each conductor with its angle, for example a 100∠0 / b 100∠180."
        )


def _stated_or_present(text: str, circuit: Circuit, decimal: str) -> _Angle:
    """The angle in `text`, else the one of the present demand, else the assumed one."""
    if text.strip():
        if circuit.supply == "dc":
            raise UserError(
                f"A direct current has no power factor; remove “{_short(text)}”."
            )
        return _angle(text.strip(), decimal)
    present = circuit.demand
    if isinstance(present, BalancedCurrent | Power):
        return _Angle(present.cos_phi, present.sense)
    if isinstance(present, LineLoads):
        angles = {_Angle(x.cos_phi, x.sense, x.lag) for x in present.loads}
        if len(angles) == 1:
            return angles.pop()
    return _Angle(ASSUMED_POWER_FACTOR)


def _angle(text: str, decimal: str) -> _Angle:
    found = _LAG.match(text)
    if found is not None:
        lag = typed_number(found[2], decimal)
        leads = _SENSES.get((found[3] or "").lower()) == "leading"
        if (found[1] == "-") != leads:
            lag = -lag
        if abs(lag) > 180:
            raise UserError("An angle of lag lies between -180° and 180°.")
        return _Angle(lag=lag)
    found = _FACTOR.match(text)
    if found is None:
        raise UserError(
            f"“{_short(text)}” is no power factor; type for example 0.9 lag, 0.95 lead "
            "or @ 18 for an angle of lag in degrees."
        )
    factor = typed_number(found[1], decimal)
    if not 0 < factor <= 1:
        raise UserError(
            f"A power factor lies above 0 and up to 1, not at {found[1]}; type an "
            "angle of lag as @ 18."
        )
    return _Angle(factor, _SENSES.get((found[2] or "lag").lower(), "lagging"))


def _as_factor(angle: _Angle) -> _Angle:
    """A lag as a power factor, where the demand can hold nothing else."""
    if angle.lag is None:
        return angle
    if abs(angle.lag) >= 90:
        raise UserError(
            f"A lag of {angle.lag:g}° means that the power flows back; type the "
            "currents of the lines with their angles instead."
        )
    factor = math.cos(math.radians(angle.lag))
    return _Angle(factor, "lagging" if angle.lag >= 0 else "leading")


def _short(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= 40 else text[:39] + "…"
