"""The text a current cell shows of a demand, and what the program makes of it.

`current_text` gives back what could be typed; `made_of_it` says what it means in
amperes and degrees. Import place: after `typed_currents`.
"""

from __future__ import annotations

import math
import re

from engine.circuits import (
    RETURNS,
    BalancedCurrent,
    Circuit,
    DirectCurrents,
    EnteredNetCurrent,
    LineLoad,
    LineLoads,
    MeasuredCurrents,
    NeutralShare,
    Power,
    Sense,
    Unbalance,
)
from engine.demands import fundamental
from engine.errors import UserError
from engine.typed_numbers import NUMBER, number_text, plain_text, typed_number
from engine.units import significant

NetCurrent = NeutralShare | EnteredNetCurrent

#: Above this a current is written in kA. [A]
_KILO = 10_000.0

_SHARE = re.compile(rf"^({NUMBER})\s*%(?:\s*of\s*\S+)?$", re.IGNORECASE)
_NET = re.compile(rf"^({NUMBER})\s*(mA|A|kA)?\s*(?:[∠<]\s*([+\-]?\s*{NUMBER})\s*°?)?$")
_NET_UNITS = {None: 1.0, "A": 1.0, "mA": 1e-3, "kA": 1e3}


def current_text(circuit: Circuit, decimal: str = ".") -> str:
    """The circuit's demand as `typed_current` would read it back.

    Examples
    --------
    >>> circuit = Circuit(id="F1", demand=BalancedCurrent(rms=800))
    >>> current_text(circuit)
    '800 A 0.9 lag'
    """
    demand = circuit.demand

    def number(value: float) -> str:
        return number_text(value, decimal, 12)

    match demand:
        case None:
            return ""
        case BalancedCurrent():
            factor = "" if circuit.supply == "dc" else _factor(demand, decimal)
            return f"{_amperes(demand.rms, decimal)} {factor}".strip()
        case Power():
            factor = "" if circuit.supply == "dc" else _factor(demand, decimal)
            volts = "" if circuit.voltage is None else f"{number(circuit.voltage)} V"
            return f"{_power(demand, decimal)} {volts} {factor}".strip()
        case LineLoads():
            return _loads(demand, decimal)
        case DirectCurrents():
            return " / ".join(
                f"{c.label} {number(c.rms)}∠{number(c.angle)}" for c in demand.currents
            )
        case MeasuredCurrents():
            parts = [f"{x.label} {number(x.rms)}" for x in demand.lines]
            if demand.neutral is not None:
                back = RETURNS.get(circuit.supply, "N")
                parts.append(f"{back} {number(demand.neutral)}")
            if demand.net is not None:
                parts.append(f"net {number(demand.net)}")
            factor = "" if demand.cos_phi is None else f" {_factor(demand, decimal)}"
            return f"measured {' / '.join(parts)}{factor}"


def power_factor_text(circuit: Circuit, decimal: str = ".") -> str:
    """The demand's power factor or angle of lag; empty where it states none."""
    demand = circuit.demand
    if circuit.supply == "dc":
        return ""
    if isinstance(demand, LineLoads):
        angles = {_behind(load, decimal) for load in demand.loads}
        return angles.pop() if len(angles) == 1 else f"{len(angles)} values"
    if isinstance(demand, BalancedCurrent | Power):
        return _factor(demand, decimal)
    if isinstance(demand, MeasuredCurrents) and demand.cos_phi is not None:
        return _factor(demand, decimal)
    return ""


def made_of_it(circuit: Circuit, decimal: str = ".") -> str:
    """What the program makes of the demand: amperes, and how far they lag.

    Raises
    ------
    UserError
        When the demand does not determine the currents.

    Examples
    --------
    >>> demand = Power(apparent=250e3)
    >>> made_of_it(Circuit(id="F1", voltage=400, demand=demand))
    '361 A at 0.90 lagging'
    """
    demand = circuit.demand
    if demand is None:
        return "no current entered"
    lines = fundamental(circuit).lines
    amperes = {x: _shown(p.rms, decimal) for x, p in lines.items()}
    if isinstance(demand, BalancedCurrent | Power):
        if circuit.supply == "dc":
            return f"{next(iter(amperes.values()))} A direct current"
        factor = f"at {_two(demand.cos_phi, decimal)} {demand.sense}"
        if demand.unbalance is None:
            return f"{next(iter(amperes.values()))} A {factor}"
        listed = ", ".join(f"{x} {a} A" for x, a in amperes.items())
        return f"{listed}; {factor}, {_unbalance(demand.unbalance, decimal)}"
    if isinstance(demand, DirectCurrents) or circuit.supply == "dc":
        listed = ", ".join(
            f"{x} {amperes[x]} A {_degrees(p.angle, decimal)}" for x, p in lines.items()
        )
        return listed or "no line named"
    if isinstance(demand, LineLoads):
        return _made_of_loads(demand, amperes, decimal)
    listed = ", ".join(f"{x} {a} A" for x, a in amperes.items())
    if demand.cos_phi is None:
        return f"{listed} as clamped, power factor assumed 1, sequence assumed"
    factor = f"{_two(demand.cos_phi, decimal)} {demand.sense}"
    return f"{listed} as clamped, at {factor}, sequence assumed"


def typed_net_current(text: str, decimal: str = ".") -> NetCurrent | None:
    """The net current that `text` states: `5 % of N`, `2 A`, `2 A ∠ 30`; empty: none.

    Raises
    ------
    UserError
        When it is none of these.
    """
    plain = plain_text(text)
    if not plain or plain.lower() in ("none", "none entered"):
        return None
    if found := _SHARE.match(plain):
        share = typed_number(found[1], decimal) / 100
        if share > 1:
            raise UserError(
                "At most 100 % of the neutral current can leave the cable; type "
                "a share from 0 to 100 %."
            )
        return NeutralShare(share=share)
    found = _NET.match(plain)
    if found is None:
        raise UserError(
            f"“{plain[:40]}” is no net current; type for example 2 A, 2 A ∠ 30 or "
            "5 % of N."
        )
    rms = typed_number(found[1], decimal) * _NET_UNITS[found[2]]
    angle = None if found[3] is None else typed_number(found[3], decimal)
    return EnteredNetCurrent(rms=rms, angle=angle)


def net_current_text(net: NetCurrent | None, decimal: str = ".") -> str:
    """A net current as `typed_net_current` would read it back."""
    if net is None:
        return ""
    if isinstance(net, NeutralShare):
        return f"{number_text(net.share * 100, decimal)} % of N"
    angle = "" if net.angle is None else f" ∠ {number_text(net.angle, decimal)}"
    return f"{number_text(net.rms, decimal)} A{angle}"


def _amperes(rms: float, decimal: str) -> str:
    if rms >= _KILO:
        return f"{number_text(rms / 1e3, decimal, 12)} kA"
    return f"{number_text(rms, decimal, 12)} A"


def _power(demand: Power, decimal: str) -> str:
    value, letters = (
        (demand.apparent, "VA") if demand.apparent is not None else (demand.active, "W")
    )
    if value is None:
        return "no power"
    return f"{number_text(value / 1e3, decimal, 12)} k{letters}"


def _factor(demand: BalancedCurrent | Power | MeasuredCurrents, decimal: str) -> str:
    if demand.cos_phi is None:
        return ""
    return _factor_text(demand.cos_phi, demand.sense, decimal)


def _factor_text(cos_phi: float, sense: Sense, decimal: str) -> str:
    if cos_phi == 1 and sense == "lagging":
        return "1"
    word = "lag" if sense == "lagging" else "lead"
    return f"{number_text(cos_phi, decimal, 12)} {word}"


def _behind(load: LineLoad, decimal: str) -> str:
    """What a line's current is followed by."""
    if load.lag is not None:
        return f"@ {number_text(load.lag, decimal, 12)}"
    assert load.cos_phi is not None
    return _factor_text(load.cos_phi, load.sense, decimal)


def _loads(demand: LineLoads, decimal: str) -> str:
    currents = [number_text(load.rms, decimal, 12) for load in demand.loads]
    behind = [_behind(load, decimal) for load in demand.loads]
    if len(set(behind)) == 1:
        listed = currents[:1] if len(set(currents)) == 1 else currents
        return f"{' / '.join(listed)} A {behind[0]}"
    return " / ".join(f"{c} {b}" for c, b in zip(currents, behind, strict=True))


def _made_of_loads(demand: LineLoads, amperes: dict[str, str], decimal: str) -> str:
    def angle(load: LineLoad) -> str:
        if load.lag is None:
            assert load.cos_phi is not None
            return f"at {_two(load.cos_phi, decimal)} {load.sense}"
        word = "leading" if load.lag < 0 else "lagging"
        return f"{number_text(abs(load.lag), decimal, 3)}° {word}"

    angles = [angle(load) for load in demand.loads]
    if len(set(angles)) == 1:
        if len(set(amperes.values())) == 1:
            return f"{next(iter(amperes.values()))} A {angles[0]}"
        return f"{', '.join(f'{x} {a} A' for x, a in amperes.items())}; {angles[0]}"
    listed = (
        f"{x} {a} A {b}" for (x, a), b in zip(amperes.items(), angles, strict=True)
    )
    return ", ".join(listed)


def _unbalance(unbalance: Unbalance, decimal: str) -> str:
    parts = (
        f"{number_text(100 * ratio, decimal, 3)} % {name} sequence"
        for name, ratio in (
            ("negative", unbalance.negative_ratio),
            ("zero", unbalance.zero_ratio),
        )
        if ratio
    )
    return " and ".join(parts) or "no unbalance"


def _two(value: float, decimal: str) -> str:
    return f"{value:.2f}".replace(".", decimal)


def _shown(amperes: float, decimal: str) -> str:
    return significant(amperes).replace(".", decimal)


def _degrees(radians: float, decimal: str) -> str:
    return f"∠{number_text(math.degrees(radians), decimal, 4)}°"
