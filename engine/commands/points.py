"""`field`: the field at points, of a layout or a conductor schedule."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from engine import units
from engine.circuits import LoadCase
from engine.conductors import conductors
from engine.currents import Component, case_phasors, conductor_currents
from engine.errors import UserError
from engine.field import combined, ellipse, flux_density, inside, peak
from engine.layout import Layout

#: Ten times as far as a conductor can be. [m]
FARTHEST = 1e6


@dataclass(frozen=True)
class FrequencyValue:
    """The field of one frequency at one point. [T]

    `components` are the RMS phasors of x, y, z; None where currents of unknown
    relation meet, so that only the largest possible resultant can be said.
    """

    resultant: float
    semi_major: float | None
    semi_minor: float | None
    components: tuple[complex, complex, complex] | None


@dataclass(frozen=True)
class PointValue:
    """The field at one point; None where it lies inside a conductor. [T]"""

    at: tuple[float, float, float]
    resultant: float | None
    peak: float | None
    by_frequency: dict[float, FrequencyValue | None]
    #: Why resultant or peak are bounds and not values; empty when they are values.
    bound: str = ""


def field_at_points(
    layout: Layout, case: LoadCase, points: list[tuple[float, float, float]]
) -> tuple[PointValue, ...]:
    """The field of one load case at points.

    Raises
    ------
    UserError
        When geometry or currents of the layout cannot be evaluated.
    """
    wires = conductors(layout)
    phasors = case_phasors(layout, case)
    at = np.asarray(points, dtype=float).reshape(-1, 3)
    field = flux_density(wires, conductor_currents(phasors, wires), at)
    masked = inside(wires, at)
    return tuple(
        _point(points[i], field[:, i, :], phasors.components, bool(masked[i]))
        for i in range(len(points))
    )


def _point(
    at: tuple[float, float, float],
    field: np.ndarray,
    components: tuple[Component, ...],
    masked: bool,
) -> PointValue:
    frequencies = sorted({c.frequency for c in components})
    if masked:
        return PointValue(at, None, None, dict.fromkeys(frequencies))
    total = combined(field[:, None, :], components)
    highest = peak(field[:, None, :], components)
    reasons = [
        text
        for is_bound, text in (
            (total.is_bound, total.reason),
            (highest.is_bound, f"peak: {highest.reason}"),
        )
        if is_bound
    ]
    by_frequency: dict[float, FrequencyValue | None] = {
        f: _frequency(
            field[[c.frequency == f for c in components]],
            float(total.by_frequency[f][0]),
        )
        for f in frequencies
    }
    return PointValue(
        at,
        0.0 if total.total_ac is None else float(total.total_ac[0]),
        float(highest.values[0]),
        by_frequency,
        "; ".join(reasons),
    )


def _frequency(field: np.ndarray, resultant: float) -> FrequencyValue:
    if len(field) > 1:
        return FrequencyValue(resultant, None, None, None)
    shape = ellipse(field[0])
    x, y, z = (complex(value) for value in field[0])
    return FrequencyValue(
        resultant, float(shape.semi_major), float(shape.semi_minor), (x, y, z)
    )


def parsed_point(text: str) -> tuple[float, float, float]:
    """A point from "X,Y,Z" in metres.

    Raises
    ------
    UserError
        When these are not three numbers within `FARTHEST`.
    """
    try:
        numbers = [float(part) for part in text.split(",")]
    except ValueError:
        numbers = []
    if len(numbers) != 3 or not np.all(np.abs(numbers) <= FARTHEST):
        raise UserError(
            f"--at={text} is no point: give three numbers in metres, none beyond "
            f"{FARTHEST:,.0f} m, as --at=1.2,3,0.5."
        )
    return (numbers[0], numbers[1], numbers[2])


def as_json(values: tuple[PointValue, ...]) -> dict[str, Any]:
    """The points as plain values for `--json`; numbers in tesla."""
    return {"points": [_point_json(value) for value in values]}


def _point_json(value: PointValue) -> dict[str, Any]:
    plain: dict[str, Any] = {
        "at_m": list(value.at),
        "assessable": value.resultant is not None,
        "resultant_T": value.resultant,
        "peak_T": value.peak,
        "by_frequency": {
            # Frequencies are told apart to a millionth of a hertz.
            f"{frequency:.12g}": _frequency_json(part)
            for frequency, part in value.by_frequency.items()
        },
    }
    if value.bound:
        plain["bound"] = value.bound
    return plain


def _frequency_json(part: FrequencyValue | None) -> dict[str, Any]:
    if part is None:
        return {
            "resultant_T": None,
            "semi_major_T": None,
            "semi_minor_T": None,
            "components_T": None,
        }
    return {
        "resultant_T": part.resultant,
        "semi_major_T": part.semi_major,
        "semi_minor_T": part.semi_minor,
        "components_T": None
        if part.components is None
        else [[value.real, value.imag] for value in part.components],
    }


def as_text(values: tuple[PointValue, ...], unit: str) -> str:
    """The points as printed lines."""
    lines = []
    for value in values:
        place = ", ".join(f"{c:g}" for c in value.at)
        if value.resultant is None or value.peak is None:
            lines.append(f"({place}) m: inside a conductor, not assessable")
            continue
        resultant = units.flux_density_text(value.resultant, unit, 5)
        highest = units.flux_density_text(value.peak, unit, 5)
        lines.append(f"({place}) m: resultant {resultant} (AC, RMS), peak {highest}")
        for frequency, part in value.by_frequency.items():
            if part is not None:
                lines.append(_frequency_text(frequency, part, unit))
        if value.bound:
            lines.append(f"    upper bound: {value.bound}")
    return "\n".join(lines) + "\n"


def _frequency_text(frequency: float, part: FrequencyValue, unit: str) -> str:
    def text(tesla: float) -> str:
        return units.significant(units.in_unit(tesla, unit), 5)

    line = f"    {frequency:.12g} Hz: resultant {text(part.resultant)} {unit}"
    if part.components is None or part.semi_major is None or part.semi_minor is None:
        return line + " (largest over the unknown phase relation)"
    if frequency == 0:
        axes = ", ".join(text(c.real) for c in part.components)
        return f"{line}; x, y, z: {axes} {unit}"
    axes = ", ".join(
        f"{text(abs(c))}∠{np.degrees(np.angle(c)):.1f}°" for c in part.components
    )
    return (
        f"{line}; semi-axes {text(part.semi_major)} and {text(part.semi_minor)} {unit};"
        f" x, y, z: {axes} {unit}"
    )
