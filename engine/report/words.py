"""Values of a layout as the report words them."""

from __future__ import annotations

from collections.abc import Iterable

from engine.circuits import (
    BalancedCurrent,
    Demand,
    DirectCurrents,
    LineLoads,
    MeasuredCurrents,
    Power,
)
from engine.places import Uncertainty
from engine.runs import Bar, FreeSection, Multicore, Section, Shape
from engine.units import LENGTH_UNITS, flux_density_text, significant


def length(metres: float, unit: str) -> str:
    """A length without its unit, with the digits that a drawing has."""
    digits = {"m": 3, "mm": 0, "ft": 2, "in": 1}[unit]
    text = f"{metres / LENGTH_UNITS[unit] + 0.0:.{digits}f}"
    if unit == "m" and text.endswith("0"):
        text = text[:-1]
    return text.replace("-", "−")


def frequency_text(hertz: float) -> str:
    """A frequency as tables have it: "DC" or "150 Hz"."""
    return "DC" if hertz == 0 else f"{hertz:g} Hz"


def place(point: Iterable[float], unit: str) -> str:
    """A point as "x, y, z", every coordinate with the same digits."""
    values = list(point)
    texts = [length(value, unit) for value in values]
    if unit == "m" and any(text[-4:-3] == "." for text in texts):
        texts = [f"{value + 0.0:.3f}".replace("-", "−") for value in values]
    return ", ".join(texts)


def demand_text(demand: Demand | None) -> str:
    """A demand in words, as it was entered."""
    if demand is None:
        return "no current entered"
    if isinstance(demand, DirectCurrents):
        return ", ".join(
            f"{c.label} {significant(c.rms, 4)} A ∠ {c.angle:g}°"
            for c in demand.currents
        )
    if isinstance(demand, LineLoads):
        return ", ".join(
            f"{load.label} {significant(load.rms, 4)} A "
            + (
                f"{load.lag:g}° lagging"
                if load.cos_phi is None and load.lag is not None
                else f"cos φ {load.cos_phi or 1:g} {load.sense}"
            )
            for load in demand.loads
        )
    if isinstance(demand, BalancedCurrent):
        text = (
            f"{significant(demand.rms, 4)} A, cos φ {demand.cos_phi:g} {demand.sense}"
        )
        return text + _unbalance(demand)
    if isinstance(demand, Power):
        power = (
            f"{significant((demand.apparent or 0) / 1e3, 4)} kVA"
            if demand.active is None
            else f"{significant(demand.active / 1e3, 4)} kW"
        )
        return f"{power}, cos φ {demand.cos_phi:g} {demand.sense}" + _unbalance(demand)
    return _measured(demand)


def _unbalance(demand: BalancedCurrent | Power) -> str:
    if demand.unbalance is None:
        return ""
    u = demand.unbalance
    return (
        f", negative sequence {100 * u.negative_ratio:g} % ∠ {u.negative_angle:g}°, "
        f"zero sequence {100 * u.zero_ratio:g} % ∠ {u.zero_angle:g}°"
    )


def _measured(demand: MeasuredCurrents) -> str:
    parts = [f"{line.label} {significant(line.rms, 4)} A" for line in demand.lines]
    if demand.neutral is not None:
        parts.append(f"N {significant(demand.neutral, 4)} A")
    if demand.net is not None:
        parts.append(f"net {significant(demand.net, 4)} A")
    if demand.cos_phi is not None:
        parts.append(f"cos φ {demand.cos_phi:g} {demand.sense}")
    how = " ".join(text for text in (demand.date, demand.instrument) if text)
    return "measured: " + ", ".join(parts) + (f" ({how})" if how else "")


def section_text(section: Section, names: dict[str, str], unit: str) -> str:
    """A section in words, with its dimensions."""
    if isinstance(section, FreeSection):
        lines = []
        for slot in section.slots:
            carried = " + ".join(
                f"{names.get(load.circuit, load.circuit)} {load.label}"
                + (f" × {load.share:g}" if load.share != 1 else "")
                for load in slot.loads
            )
            at = f"u {length(slot.u, unit)}, v {length(slot.v, unit)}"
            size = shape_text(slot.shape, unit)
            lines.append(f"{slot.name} at {at}: {size}, {carried or 'no current'}")
        return "\n".join(lines)
    kind = str(section.__struct_config__.tag)
    parts = [kind]
    order = getattr(section, "order", None)
    orders = getattr(section, "orders", None)
    if order is not None:
        parts.append(" ".join(order))
    if orders is not None:
        parts.append(" / ".join(" ".join(one) for one in orders))
    for field in ("pitch", "set_pitch", "neutral_pitch", "width", "thickness", "gap",
                  "insulation"):  # fmt: skip
        value = getattr(section, field, None)
        if value is not None:
            parts.append(f"{field.replace('_', ' ')} {length(value, unit)}")
    shape = getattr(section, "shape", None)
    if shape is not None:
        parts.append(shape_text(shape, unit))
    for field in ("bars_per_pole", "stand", "apex", "direction", "formation"):
        value = getattr(section, field, None)
        if value is not None:
            parts.append(f"{field.replace('_', ' ')} {value}")
    carried = ", ".join(
        names.get(c.circuit, c.circuit) + (f" × {c.share:g}" if c.share != 1 else "")
        for c in section.circuits
    )
    return ", ".join(parts) + f"; carries {carried or 'nothing'}"


def shape_text(shape: Shape, unit: str) -> str:
    """The shape of a conductor with its dimensions."""
    if isinstance(shape, Bar):
        size = f"bar {length(shape.width, unit)} × {length(shape.thickness, unit)}"
        return size + (f" turned {shape.turn:g}°" if shape.turn else "")
    if isinstance(shape, Multicore):
        outside = length(shape.outside_diameter, unit)
        return f"multicore {' '.join(shape.cores)}, outside {outside}, {shape.model}"
    return f"round {length(shape.diameter, unit)}"


def uncertainty_text(uncertainty: Uncertainty, unit: str) -> str:
    """An uncertainty in words."""
    text = f"{100 * uncertainty.relative:g} %"
    if uncertainty.kind == "from the budget":
        text = "by the budget of the place"
    if uncertainty.absolute:
        text += f" + {flux_density_text(uncertainty.absolute, unit)}"
    return f"{text}, k = {uncertainty.coverage:g} ({uncertainty.basis})"
