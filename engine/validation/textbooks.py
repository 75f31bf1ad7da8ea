"""Worked examples and problems of textbooks: wires, segments, loops, a coil pair."""

from __future__ import annotations

import math
from functools import partial

from engine.field import ellipse
from engine.units import MU0
from engine.validation.check import Check
from engine.validation.shapes import (
    circle,
    conductor,
    crossing,
    long_wires,
    phasors,
    resultant_at,
)

_OPENSTAX = "OpenStax, University Physics volume 2"
_SADIKU = "Sadiku, Elements of Electromagnetics"
_POLYGON = "half a unit of the last printed digit; polygon of 1440 sides"


def _square_corner() -> tuple[float, float]:
    """Components of A1 at the fourth corner. [T]"""
    side = 0.01
    wires = long_wires([(0, 0), (side, 0), (side, side)])
    field = phasors(wires, [2, 2, 2], (0, side, 0))[0].real
    return float(field[0]), float(field[1])


def _current_for_8_microtesla() -> float:
    return 8.0e-6 / resultant_at(long_wires([(0, 0)]), [1], (0.5, 0, 0))


def _wire_and_uniform() -> float:
    wire = resultant_at(long_wires([(0, 0)]), [20], (0.2, 0, 0))
    return math.hypot(wire, 4.0e-5)


def _short_segment() -> float:
    segment = conductor("segment", [(-0.005, 0, 0), (0.005, 0, 0)], across=(0, 0, 1))
    return resultant_at((segment,), [2.0], (0, 1, 0))


def _square_loop() -> float:
    h = 0.1
    path = [(-h, -h, 0), (h, -h, 0), (h, h, 0), (-h, h, 0), (-h, -h, 0)]
    loop = conductor("square", path, across=(0, 0, 1))
    return resultant_at((loop,), [10], (0, 0, 0))


def _coaxial_loops(first_distance: float) -> float:
    """Axial field of A4 with the first loop at a distance from the point. [T]"""
    loops = (
        circle(0.5, z=-first_distance, key="first"),
        circle(1.0, z=-0.75, key="second"),
    )
    return float(phasors(loops, [0.01, -0.01], (0, 0, 0))[0, 2].real)


def _zero_of_coaxial_loops() -> float:
    return crossing(_coaxial_loops, 0.0, 0.25, 1.0)


def _sadiku_segment() -> float:
    segment = conductor("segment", [(0, 0, 0), (2, 0, 0)], across=(0, 0, 1))
    return float(phasors((segment,), [10], (0, 0, 5))[0, 1].real) / MU0 * 1e3


def _sadiku_loop(z: float) -> float:
    return float(phasors((circle(3.0),), [10], (0, 0, z))[0, 2].real) / MU0


def _helmholtz(z: float) -> float:
    """Axial field of a pair of loops of radius 1 m with 1 A each. [T]"""
    pair = (circle(1.0, z=-0.5, key="lower"), circle(1.0, z=0.5, key="upper"))
    return float(phasors(pair, [1, 1], (0, 0, z))[0, 2].real)


def _two_wire_line() -> float:
    wires = long_wires([(-0.5, 6), (0.5, 6)])
    return resultant_at(wires, [100, -100], (0, 0, 0)) * 1e6


def _two_wire_line_peak() -> float:
    wires = long_wires([(-0.5, 6), (0.5, 6)])
    semi_major = ellipse(phasors(wires, [100, -100], (0, 0, 0))).semi_major[0]
    return float(semi_major) * math.sqrt(2) * 1e6


def _net_current(amperes: float, distance: float) -> float:
    return resultant_at(long_wires([(0, 0)]), [amperes], (distance, 0, 0)) * 1e6


def textbook_checks() -> tuple[Check, ...]:
    """Checks A1 to A9."""
    return (*_openstax_checks(), *_sadiku_checks(), *_other_checks())


def _openstax_checks() -> tuple[Check, ...]:
    wires = f"{_OPENSTAX}, magnetic field due to a thin straight wire"
    square = "three parallel wires on the corners of a 1 cm square, 2 A each way alike"
    law = f"{_OPENSTAX}, the Biot–Savart law"
    loops = f"{_OPENSTAX}, magnetic field of a current loop"
    coaxial = "coaxial loops of 0.50 m and 1.00 m, 10 mA opposed"
    half = "half a unit of the last printed digit"
    return (
        Check(
            id="A1 x", source=f"{wires}, worked example",
            case=f"{square}: x component at the fourth corner",
            published=-6e-5, unit="T", tolerance=1e-9,
            reason="the printed digit is exact; long wires of finite length",
            compute=lambda: _square_corner()[0],
        ),
        Check(
            id="A1 y", source=f"{wires}, worked example",
            case=f"{square}: y component at the fourth corner",
            published=-6e-5, unit="T", tolerance=1e-9,
            reason="the printed digit is exact; long wires of finite length",
            compute=lambda: _square_corner()[1],
        ),
        Check(
            id="A1 net", source=f"{wires}, worked example",
            case=f"{square}: net field at the fourth corner (8.485·10⁻⁵ unrounded)",
            published=8e-5, unit="T", tolerance=0.5e-5,
            reason="printed to one figure",
            compute=lambda: math.hypot(*_square_corner()),
        ),
        Check(
            id="A2 current", source=f"{wires}, problems",
            case="8.0 µT at 50 cm from a long wire: its current",
            published=20.0, unit="A", tolerance=0.01,
            reason="the printed value is exact to its digits",
            compute=_current_for_8_microtesla,
        ),
        Check(
            id="A2 uniform", source=f"{wires}, problems",
            case="20 A at 20 cm with a perpendicular uniform field of 4.0·10⁻⁵ T",
            published=4.5e-5, unit="T", tolerance=0.05e-5, reason=half,
            compute=_wire_and_uniform,
        ),
        Check(
            id="A3 segment", source=law,
            case="segment of 1.0 cm with 2.0 A, 1 m away",
            published=2.0e-9, unit="T", tolerance=0.05e-9, reason=half,
            compute=_short_segment,
        ),
        Check(
            id="A3 square", source=law,
            case="square loop of 20 cm side with 10 A, at the centre",
            published=5.66e-5, unit="T", tolerance=0.005e-5, reason=half,
            compute=_square_loop,
        ),
        Check(
            id="A4 field", source=loops,
            case=f"{coaxial}, point 0.25 m and 0.75 m away",
            published=5.77e-9, unit="T", tolerance=0.01e-9,
            reason="one unit of the last printed digit (5.775 unrounded)",
            compute=lambda: _coaxial_loops(0.25),
        ),
        Check(
            id="A4 zero", source=loops,
            case=f"{coaxial}, the second at 0.75 m: distance of the first for zero",
            published=0.608, unit="m", tolerance=0.0005, reason=half,
            compute=_zero_of_coaxial_loops,
        ),
    )  # fmt: skip


def _sadiku_checks() -> tuple[Check, ...]:
    return (
        Check(
            id="A5", source=f"{_SADIKU}, example 7.1", from_memory=True,
            case="segment (0,0,0) to (2,0,0) with 10 A: H_y at (0,0,5)",
            published=-59.1, unit="mA/m", tolerance=0.05,
            reason="half a unit of the last printed digit",
            compute=_sadiku_segment,
        ),
        Check(
            id="A6 above", source=f"{_SADIKU}, example 7.3", from_memory=True,
            case="loop of radius 3 m with 10 A: H_z at (0,0,4)",
            published=0.36, unit="A/m", tolerance=0.00005, reason=_POLYGON,
            compute=lambda: _sadiku_loop(4.0),
        ),
        Check(
            id="A6 below", source=f"{_SADIKU}, example 7.3", from_memory=True,
            case="loop of radius 3 m with 10 A: H_z at (0,0,−4), not reversed",
            published=0.36, unit="A/m", tolerance=0.00005, reason=_POLYGON,
            compute=lambda: _sadiku_loop(-4.0),
        ),
    )  # fmt: skip


def _other_checks() -> tuple[Check, ...]:
    line = "100 A RMS opposed in two wires 1 m apart, 6 m above the point midway"
    return (
        Check(
            id="A7 centre", source="textbook result, Helmholtz pair",
            case="centre of a pair, R = 1 m, 1 A: B = 0.8^1.5 µ₀ N I / R",
            published=0.8**1.5 * MU0 * 1e6, unit="µT", tolerance=2e-5,
            reason="polygon of 1440 sides: 1.2·10⁻⁵ of the value at most",
            compute=lambda: _helmholtz(0.0) * 1e6,
        ),
        Check(
            id="A7 axis", source="textbook result, Helmholtz pair",
            case="B(0.1 R)/B(0) on the axis, 1 − (144/125)(z/R)⁴",
            published=0.99988, unit="1", tolerance=1e-5,
            reason="one unit of the last printed digit; the series gives 0.999885",
            compute=lambda: _helmholtz(0.1) / _helmholtz(0.0),
        ),
        Check(
            id="A8 RMS", source="textbook problem, two-wire line at 60 Hz",
            case=f"{line}: RMS", published=0.5517, unit="µT", tolerance=0.00005,
            reason="half a unit of the last digit",
            compute=_two_wire_line,
        ),
        Check(
            id="A8 peak", source="textbook problem, two-wire line at 60 Hz",
            case=f"{line}: the printed value, a peak",
            published=0.78, unit="µT", tolerance=0.005,
            reason="half a unit of the last printed digit",
            compute=_two_wire_line_peak,
        ),
        *(
            Check(
                id=f"A9 {amperes:g} A at {distance:g} m", source="common practice",
                case=f"net current of {amperes:g} A at {distance:g} m",
                published=value, unit="µT", tolerance=1e-6,
                reason="exact for an infinite wire with µ₀ = 4π·10⁻⁷ H/m",
                compute=partial(_net_current, amperes, distance),
            )
            for amperes, distance, value in (
                (1.0, 1.0, 0.2), (2.0, 1.0, 0.4), (1.0, 2.0, 0.1),
            )
        ),
    )  # fmt: skip
