"""Sections that are not thin, mutual inductance, and runs of a room's length."""

from __future__ import annotations

import math
from functools import partial

import numpy as np

from engine.conductor import Conductor
from engine.field import vector_potential
from engine.runs import Bar, Round
from engine.units import MU0
from engine.validation.check import Check
from engine.validation.shapes import BALANCED, conductor, long_wires, resultant_at

_OPENSTAX = "OpenStax, University Physics volume 2, Ampère's law"
_ROSA = "Rosa, self and mutual inductances of linear conductors, 1908"

#: Rings and round conductors per ring that stand in for a tube; the field between
#: two rings 2.5 mm apart ripples by exp(−2π · 1.25 mm / 0.8 mm).
_RINGS, _PER_RING = 8, 320


def _strip(x: float) -> float:
    """Field in the plane of a strip 0.1 m wide with 100 A, at x from its edge. [µT]"""
    width = 0.1
    strip = long_wires([(-width / 2, 0.0)], Bar(width=width, thickness=1e-5))
    return resultant_at(strip, [100], (x, 0.0, 0.0)) * 1e6


def _tube(radius: float) -> float:
    """Field of a tube of 3 to 5 cm radius with 50 A at a radius. [µT]"""
    inner, outer = 0.03, 0.05
    edges = np.linspace(inner, outer, _RINGS + 1)
    middles = 0.5 * (edges[:-1] + edges[1:])
    areas = edges[1:] ** 2 - edges[:-1] ** 2
    angles = 2 * math.pi * np.arange(_PER_RING) / _PER_RING
    places = [
        (r * math.cos(angle), r * math.sin(angle)) for r in middles for angle in angles
    ]
    currents = np.repeat(50 * areas / areas.sum() / _PER_RING, _PER_RING)
    wires = long_wires(places, Round(diameter=1e-6))
    return resultant_at(wires, currents, (radius, 0.0, 0.0)) * 1e6


def _mutual_inductance(length: float, distance: float) -> float:
    """Flux linkage of one filament by the vector potential of another. [µH]"""
    first = conductor("first", [(0, 0, 0), (0, 0, length)])
    nodes, weights = np.polynomial.legendre.leggauss(200)
    z = 0.5 * length * (nodes + 1)
    points = np.column_stack((np.full_like(z, distance), np.zeros_like(z), z))
    potential = vector_potential((first,), np.ones((1, 1), dtype=complex), points)
    along = np.asarray(potential)[0, :, 2].real
    return float(0.5 * length * np.sum(weights * along)) * 1e6


def _rosa(length: float, distance: float) -> float:
    """Mutual inductance of two equal parallel filaments. [µH]"""
    root = math.hypot(length, distance)
    return (
        MU0 / (2 * math.pi)
        * (length * math.asinh(length / distance) - root + distance) * 1e6
    )  # fmt: skip


def _flat_run(length: float, height: float) -> float:
    """Field above the middle of a flat run over that of an infinite one. [1]"""

    def wires(half: float) -> tuple[Conductor, ...]:
        return long_wires([(-0.1, 0), (0.0, 0), (0.1, 0)], half_length=half)

    point = (0.0, height, 0.0)
    infinite = resultant_at(wires(1e4), BALANCED, point)
    return resultant_at(wires(length / 2), BALANCED, point) / infinite


def bar_checks() -> tuple[Check, ...]:
    """Checks C1 to C3 and the factors of finite runs.

    C4 (skin effect) and C5 (geometric mean distance) concern quantities that the
    engine does not compute: its current is even over a section.
    """
    return (*_strip_checks(), *_tube_checks(), *_rosa_checks(), *_run_checks())


def _strip_checks() -> tuple[Check, ...]:
    def formula(x: float) -> float:
        return MU0 * 100 / (2 * math.pi * 0.1) * math.log((x + 0.1) / x) * 1e6

    return tuple(
        Check(
            id=f"C1 at {x * 1e3:g} mm", source=f"{_OPENSTAX}, flat strip",
            case=f"strip 0.1 m wide with 100 A, in its plane {x * 1e3:g} mm beside it",
            published=formula(x), unit="µT", tolerance=1e-3 * formula(x),
            reason="the engine's filaments for a bar: 0.1 %",
            compute=partial(_strip, x),
        )
        for x in (0.02, 0.05, 0.1, 0.5)
    )  # fmt: skip


def _tube_checks() -> tuple[Check, ...]:
    return tuple(
        Check(
            id=f"C2 at {radius * 100:g} cm", source=f"{_OPENSTAX}, hollow conductor",
            case=f"tube of 3 to 5 cm radius with 50 A, at {radius * 100:g} cm",
            published=value, unit="µT", tolerance=0.05,
            reason="half a unit of the last printed digit; tube of 2560 filaments",
            compute=partial(_tube, radius),
        )
        for radius, value in ((0.02, 0.0), (0.04, 109.4), (0.06, 166.7))
    )  # fmt: skip


def _rosa_checks() -> tuple[Check, ...]:
    return tuple(
        Check(
            id=f"C3 {length:g} m, {distance:g} m", source=_ROSA,
            case=f"mutual inductance, {length:g} m long, {distance:g} m apart",
            published=_rosa(length, distance), unit="µH",
            tolerance=1e-6 * _rosa(length, distance),
            reason="Gauss quadrature of 200 points along the second filament",
            compute=partial(_mutual_inductance, length, distance),
        )
        for length, distance in ((1.0, 0.1), (5.0, 0.3), (2.0, 4.0))
    )  # fmt: skip


def _run_checks() -> tuple[Check, ...]:
    return tuple(
        Check(
            id=f"run of {length:g} m at {height:g} m",
            source="closed form h/√(h² + r²), h half the length; common practice",
            case=f"flat run of {length:g} m, 0.1 m pitch, {height:g} m above its "
            "middle, over the infinite run",
            published=length / 2 / math.hypot(length / 2, height),
            unit="1", tolerance=5e-4,
            reason="the conductors' distances differ by (pitch/r)² in part",
            compute=partial(_flat_run, length, height),
        )
        for length, height in ((6.0, 3.0), (10.0, 2.0), (20.0, 5.0), (4.0, 3.0))
    )  # fmt: skip
