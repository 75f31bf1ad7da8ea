"""Overhead lines, buried cables and the far-field law of parallel conductors."""

from __future__ import annotations

import math
from functools import partial

import numpy as np
from numpy.typing import ArrayLike

from engine.field import ellipse
from engine.validation.check import Check
from engine.validation.shapes import (
    BALANCED,
    crossing,
    long_wires,
    phasors,
    resultant_at,
    slope,
)

_OPERATORS = "UK electricity network operators, public information pages (emfs.info)"
_FAR_LAW = "EMF von Stromtechnologien (FSM/FAMES for the Swiss SFOE, 2023)"
_GUIDE = "CEI 106-11, coefficients"
_PUBLIC_QUESTION = "Energiforsk, public question and answer page"

_WOOD_POLE = (-1.15, 0.0, 1.15)


def _wood_pole(height: float, amperes: float, x: float) -> float:
    """Flat three-phase line, evaluated 1 m above ground. [µT]"""
    wires = long_wires([(place, height) for place in _WOOD_POLE])
    return resultant_at(wires, amperes * BALANCED, (x, 1.0, 0.0)) * 1e6


def _buried_pair(x: float) -> float:
    """DC pair 0.5 m apart and 1 m deep, evaluated 1 m above ground. [µT]"""
    wires = long_wires([(-0.25, -1.0), (0.25, -1.0)])
    return resultant_at(wires, [2000, -2000], (x, 1.0, 0.0)) * 1e6


def _flat(pitch: float) -> list[tuple[float, float]]:
    return [(-pitch, 0.0), (0.0, 0.0), (pitch, 0.0)]


def _trefoil(pitch: float) -> list[tuple[float, float]]:
    radius = pitch / math.sqrt(3)
    angles = np.radians([90.0, -30.0, 210.0])
    return [(radius * math.cos(a), radius * math.sin(a)) for a in angles]


def _far(places: list[tuple[float, float]], amperes: float, r: float) -> float:
    """Resultant of a balanced set at a distance straight above it. [µT]"""
    wires = long_wires(places)
    return resultant_at(wires, amperes * BALANCED, (0.0, r, 0.0)) * 1e6


def _slope(places: list[tuple[float, float]], currents: ArrayLike) -> float:
    """Exponent of the decay between 20 m and 60 m. [1]"""
    wires = long_wires(places)
    return slope(
        lambda r: resultant_at(wires, currents, (0.0, r, 0.0)), near=20.0, far=60.0
    )


def _semi_major_share(places: list[tuple[float, float]], x: float, y: float) -> float:
    """Semi-major axis over resultant of a balanced set of 1 A. [1]"""
    field = phasors(long_wires(places), BALANCED, (x, y, 0.0))
    total = float(np.sqrt(np.sum(np.abs(field[0]) ** 2)))
    return float(ellipse(field).semi_major[0]) / total


def line_checks() -> tuple[Check, ...]:
    """Checks B1 to B3, the far-field law, slopes of decay, and the ellipse."""
    return (
        *_operator_checks(),
        *_far_field_checks(),
        *_slope_checks(),
        *_ellipse_checks(),
    )


def _operator_checks() -> tuple[Check, ...]:
    x = (0, 10, 25, 50, 100)
    unit = "one unit of the last printed digit"
    rows = (
        ("B1", "11 kV wood pole, 200 A, height 5.5 m", 5.5, 200.0,
         (3.744, 0.668, 0.124, 0.032, 0.008), 0.001),
        ("B2", "11 kV wood pole, 50 A, height 8 m", 8.0, 50.0,
         (0.399, 0.134, 0.030, 0.008, 0.002), 0.001),
    )  # fmt: skip
    lines = [
        Check(
            id=f"{name} at {place} m", source=_OPERATORS, case=f"{case}, x = {place} m",
            published=value, unit="µT",
            tolerance=0.004 * value if place == 0 else digit,
            reason="geometry printed rounded: 0.4 %" if place == 0 else unit,
            compute=partial(_wood_pole, height, amperes, place),
        )
        for name, case, height, amperes, values, digit in rows
        for place, value in zip(x, values, strict=True)
    ]  # fmt: skip
    pair = [
        Check(
            id=f"B3 at {place} m", source=_OPERATORS,
            case=f"buried DC pair, 0.5 m apart, 1 m deep, 2000 A, x = {place} m",
            published=value, unit="µT", tolerance=0.01, reason=unit,
            compute=partial(_buried_pair, place),
        )
        for place, value in ((0, 49.23), (5, 6.91), (10, 1.92), (20, 0.50))
    ]  # fmt: skip
    return (*lines, *pair)


def _far_field_checks() -> tuple[Check, ...]:
    pitch, amperes, r = 0.1, 1000.0, 5.0
    near = "the next order of the far field, (pitch/r)², at 50 pitches"
    flat = 0.2 * math.sqrt(3) * pitch * amperes / r**2
    trefoil = 0.1 * math.sqrt(6) * pitch * amperes / r**2
    case = f"{pitch} m pitch, {amperes:g} A balanced, {r:g} m"
    return (
        Check(
            id="far field, flat", source=_FAR_LAW, case=f"flat, {case}",
            published=flat, unit="µT", tolerance=1e-3 * flat, reason=near,
            compute=lambda: _far(_flat(pitch), amperes, r),
        ),
        Check(
            id="far field, trefoil", source=_FAR_LAW, case=f"trefoil, {case}",
            published=trefoil, unit="µT", tolerance=1e-3 * trefoil, reason=near,
            compute=lambda: _far(_trefoil(pitch), amperes, r),
        ),
        Check(
            id="3 µT distance, flat", source=_GUIDE, from_memory=True,
            case="distance to 3 µT, 0.34 √(S I), S = 0.1 m, I = 1000 A",
            published=3.4, unit="m", tolerance=0.05, reason="two-figure coefficient",
            compute=lambda: crossing(lambda d: _far(_flat(0.1), 1e3, d), 3.0, 1.0, 9.0),
        ),
        Check(
            id="3 µT distance, trefoil", source=_GUIDE, from_memory=True,
            case="distance to 3 µT, 0.286 √(S I), S = 0.1 m, I = 1000 A",
            published=2.86, unit="m", tolerance=0.01,
            reason="three-figure coefficient, 29 pitches away",
            compute=lambda: crossing(
                lambda d: _far(_trefoil(0.1), 1e3, d), 3.0, 1.0, 9.0
            ),
        ),
        Check(
            id="70 m from a line", source=_PUBLIC_QUESTION,
            case="350 A, spacing 5 m, 70 m to the side (0.1245 by exact filaments)",
            published=0.13, unit="µT", tolerance=0.01, reason="printed to two figures",
            compute=lambda: resultant_at(
                long_wires(_flat(5.0)), 350 * BALANCED, (70.0, 0.0, 0.0)
            ) * 1e6,
        ),
    )  # fmt: skip


def _slope_checks() -> tuple[Check, ...]:
    s = 0.1
    double = [(-s / 2, s / 2), (s / 2, s / 2), (-s / 2, -s / 2), (s / 2, -s / 2)]
    rows = (
        ("net current", [(0.0, 0.0)], [1.0], -1.0),
        ("pair", [(-s / 2, 0.0), (s / 2, 0.0)], [1.0, -1.0], -2.0),
        ("three-phase", _flat(s), BALANCED, -2.0),
        ("two opposed circuits", double, [1.0, -1.0, -1.0, 1.0], -3.0),
    )
    return tuple(
        Check(
            id=f"slope, {name}", source=_FAR_LAW,
            case=f"exponent of the decay from 20 m to 60 m: {name}",
            published=exponent, unit="1", tolerance=1e-3,
            reason="fitted at 200 spacings and more: next order (spacing/r)²",
            compute=partial(_slope, places, currents),
        )
        for name, places, currents, exponent in rows
    )  # fmt: skip


def _ellipse_checks() -> tuple[Check, ...]:
    source = "closed form of parallel filaments, own calculation"
    rows = (
        ("trefoil, 1.5 pitches", _trefoil(1.0), 1.5, 0.91),
        ("trefoil, 5 pitches", _trefoil(1.0), 5.0, 0.78),
        ("trefoil, 10 pitches", _trefoil(1.0), 10.0, 0.75),
        ("trefoil, far away", _trefoil(1.0), 2000.0, 0.71),
        ("flat, 1.5 pitches above", _flat(1.0), 1.5, 0.93),
        ("flat, far above", _flat(1.0), 2000.0, 1.00),
    )
    return tuple(
        Check(
            id=f"ellipse, {name}", source=source,
            case=f"semi-major axis over resultant: {name}",
            published=value, unit="1", tolerance=0.005,
            reason="half a unit of the last digit",
            compute=partial(_semi_major_share, places, 0.0, distance),
        )
        for name, places, distance, value in rows
    )  # fmt: skip
