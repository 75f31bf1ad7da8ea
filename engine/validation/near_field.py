"""Bars and cables of every ready formation against exact fields, by distance.

Straight and long, so that the field is that of two dimensions, which has a closed form
for a rectangle and for a circle of even current density.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache, partial
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from engine.conductor import Conductor
from engine.field import flux_density, surface_distance
from engine.runs import (
    Bar,
    Carried,
    CircuitShare,
    Flat,
    ParallelSets,
    Quad,
    Round,
    Sandwich,
    Section,
    Slot,
    StackedBars,
    Trefoil,
    Vertical,
)
from engine.sections import single_conductors
from engine.units import MU0
from engine.validation.check import Check
from engine.validation.shapes import BALANCED, HALF_LENGTH, conductor

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: On the surface: a nanometre off, so that no rounding puts a point inside. [m]
SURFACE = 1e-9

#: From a conductor's surface. [m]
DISTANCES = (
    SURFACE, 1e-4, 5e-4, 0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0, 3.0,
)  # fmt: skip

#: What the engine's choice of filaments promises of the resultant, and from which
#: distance on: nearer, filaments would be needed by the hundred thousand. [-], [m]
PROMISED, PROMISED_FROM = 1e-3, 0.001

#: What the table of errors by distance shows.
NEAR_FIELD = (
    "Largest deviation of the computed field from the exact one, in per cent of the "
    "exact resultant, around straight and long runs of every formation: off every face "
    "and corner where no other conductor is nearer, balanced current in L1 L2 L3, even "
    "over each section. Exact: closed form of the rectangle and of the circle. Nearer "
    f"than {1e3 * PROMISED_FROM:g} mm the program promises no accuracy beside bars."
)

_CARRIED: Carried = (CircuitShare(circuit="a"),)
_THREE = ("L1", "L2", "L3")

#: Usual sizes in the trade; those not stated are the program's own first sizes.
FORMATIONS: Mapping[str, Section] = MappingProxyType(
    {
        "flat, bars on edge": Flat(circuits=_CARRIED),
        "flat, cables": Flat(
            circuits=_CARRIED, order=_THREE, pitch=0.056, shape=Round(diameter=0.028)
        ),
        "vertical, bars flat": Vertical(circuits=_CARRIED),
        "trefoil, touching cables": Trefoil(circuits=_CARRIED),
        "quad, touching cables": Quad(circuits=_CARRIED),
        "parallel sets of cables": ParallelSets(
            circuits=_CARRIED, orders=(_THREE, _THREE[::-1]), formation="trefoil"
        ),
        "stacked bars, two a pole": StackedBars(circuits=_CARRIED, bars_per_pole=2),
        "sandwich": Sandwich(circuits=_CARRIED),
    }
)


def rectangle_field(
    current: complex, width: float, thickness: float, turn: float, points: Floats
) -> Complexes:
    """Exact field of a long bar of even current density along +z, outside and inside.

    Parameters
    ----------
    current : complex
        [A]
    width, thickness : float
        Sides of the rectangle. [m]
    turn : float
        From the x axis to the width, counter-clockwise. [rad]
    points : (n, 2) float
        x and y from the middle of the bar. [m]

    Returns
    -------
    (n, 2) complex
        x and y components. [T]

    Notes
    -----
    By = µ0 J/2π ∬ u/(u² + v²) du dv has the antiderivative
    ½ v ln(u² + v²) + u arctan(v/u); −Bx the same with u and v exchanged (Ampère's law
    of a thread, integrated). Cancels like (distance/side)²: 12 figures are left at
    30 sides.
    """
    along = np.array([[math.cos(turn), math.sin(turn)]])
    across = np.array([[-math.sin(turn), math.cos(turn)]])
    x, y = (points * along).sum(axis=1), (points * across).sum(axis=1)
    first, second = np.zeros(len(points)), np.zeros(len(points))
    for u, sign_u in ((x + width / 2, 1.0), (x - width / 2, -1.0)):
        for v, sign_v in ((y + thickness / 2, 1.0), (y - thickness / 2, -1.0)):
            first += sign_u * sign_v * _antiderivative(u, v)
            second += sign_u * sign_v * _antiderivative(v, u)
    factor = MU0 * current / (2 * math.pi * width * thickness)
    field: Complexes = factor * (first[:, None] * across - second[:, None] * along)
    return field


def _antiderivative(u: Floats, v: Floats) -> Floats:
    """Of u/(u² + v²) over both; its limits where u or both vanish. [m]"""
    squares = u * u + v * v
    logarithm = np.log(np.where(squares > 0, squares, 1.0))
    angle = np.arctan(v / np.where(u == 0, np.inf, u))
    whole: Floats = 0.5 * v * logarithm + u * angle
    return whole


def circle_field(current: complex, radius: float, points: Floats) -> Complexes:
    """Exact field (n, 2) of a long round conductor at and outside its surface. [T]

    Raises
    ------
    ValueError
        When a point lies inside.
    """
    squares = (points**2).sum(axis=1)
    if (squares < (radius * (1 - 1e-12)) ** 2).any():
        raise ValueError("a point lies inside the conductor")
    turned = np.stack([-points[:, 1], points[:, 0]], axis=1)
    field: Complexes = MU0 * current / (2 * math.pi * squares[:, None]) * turned
    return field


@dataclass(frozen=True, eq=False)
class LongSection:
    """A section's conductors along z with their currents and their exact field."""

    conductors: tuple[Conductor, ...]
    places: Floats
    turns: tuple[float, ...]
    currents: Complexes

    def exact(self, points: Floats) -> Complexes:
        """(n, 2) field at points (n, 2) of the plane z = 0. [T]"""
        field = np.zeros((len(points), 2), np.complex128)
        rows = zip(self.conductors, self.places, self.turns, self.currents, strict=True)
        for one, place, turn, current in rows:
            shape, there = one.shape, points - place
            field += (
                rectangle_field(current, shape.width, shape.thickness, turn, there)
                if isinstance(shape, Bar)
                else circle_field(current, shape.diameter / 2, there)
            )
        return field

    def computed(self, points: Floats) -> Complexes:
        """(n, 2) field of the engine at the same points. [T]"""
        spatial = np.column_stack([points, np.zeros(len(points))])
        field = flux_density(self.conductors, self.currents[None, :], spatial)
        plane: Complexes = np.asarray(field[0, :, :2], np.complex128)
        return plane

    def around(self, distance: float) -> Floats:
        """(n, 2) points that far from the nearest surface: off faces and corners."""
        rows = zip(self.conductors, self.places, self.turns, strict=True)
        points = np.concatenate([_off(p, c.shape, t, distance) for c, p, t in rows])
        spatial = np.column_stack([points, np.zeros(len(points))])
        away = surface_distance(self.conductors, spatial)
        kept: Floats = points[away > distance * (1 - 1e-6)]
        return kept


def long_section(section: Section) -> LongSection:
    """A formation with 1 A balanced in L1 L2 L3, evenly shared; the rest carry none."""
    made = single_conductors(section)
    turns = tuple(_turn(slot) for slot in made)
    currents = np.array([_current(slot) for slot in made], np.complex128)
    places = np.array([(slot.u, slot.v) for slot in made], np.float64)
    wires = tuple(
        _wire(str(k), slot, turn)
        for k, (slot, turn) in enumerate(zip(made, turns, strict=True))
    )
    return LongSection(wires, places, turns, currents)


def _turn(slot: Slot) -> float:
    return math.radians(slot.shape.turn) if isinstance(slot.shape, Bar) else 0.0


def _current(slot: Slot) -> complex:
    of_label = dict(zip(_THREE, BALANCED, strict=True))
    return sum((load.share * of_label.get(load.label, 0j) for load in slot.loads), 0j)


def _wire(key: str, slot: Slot, turn: float) -> Conductor:
    assert isinstance(slot.shape, Bar | Round), "a cable was not taken apart"
    path = [(slot.u, slot.v, -HALF_LENGTH), (slot.u, slot.v, HALF_LENGTH)]
    return conductor(key, path, slot.shape, (math.cos(turn), math.sin(turn), 0.0))


def _off(place: Floats, shape: Bar | Round, turn: float, distance: float) -> Floats:
    """(8, 2) points off a shape: four faces and four corners, or every 45 degrees."""
    eighths = np.arange(8) * math.pi / 4
    outwards = np.stack([np.cos(eighths), np.sin(eighths)], axis=1)
    if isinstance(shape, Round):
        points: Floats = place + (shape.diameter / 2 + distance) * outwards
        return points
    half = np.array([shape.width / 2, shape.thickness / 2])
    own = np.rint(outwards) * half + distance * outwards
    axes = np.array(
        [[math.cos(turn), math.sin(turn)], [-math.sin(turn), math.cos(turn)]]
    )
    points = place + own @ axes
    return points


@lru_cache(maxsize=64)
def largest_errors(formation: str) -> tuple[float, ...]:
    """By distance the largest |B − exact| over the exact resultant, of one formation.

    Parameters
    ----------
    formation : str
        A key of `FORMATIONS`.

    Returns
    -------
    tuple of float
        One for each of `DISTANCES`. Relative; RMS over axes and phases.
    """
    long = long_section(FORMATIONS[formation])
    errors = []
    for distance in DISTANCES:
        points = long.around(distance)
        exact = long.exact(points)
        missed = np.linalg.norm(long.computed(points) - exact, axis=1)
        errors.append(float((missed / np.linalg.norm(exact, axis=1)).max()))
    return tuple(errors)


def near_field_checks() -> tuple[Check, ...]:
    """One check a formation: the largest error over the distances of the promise."""
    return tuple(
        Check(
            id=f"N{number}",
            source="closed form of a long bar or round conductor (Ampère's law, "
            "integrated over the section); textbook result",
            case=f"{formation}: largest deviation from the exact resultant, "
            f"{1e3 * PROMISED_FROM:g} mm to {DISTANCES[-1]:g} m from the surface",
            published=0.0,
            unit="%",
            tolerance=100 * PROMISED,
            reason="what the engine's choice of filaments promises",
            compute=partial(_largest, formation),
        )
        for number, formation in enumerate(FORMATIONS, start=1)
    )


def _largest(formation: str) -> float:
    errors = zip(DISTANCES, largest_errors(formation), strict=True)
    return 100 * max(e for distance, e in errors if distance >= PROMISED_FROM)


def near_field_rows() -> tuple[tuple[str, ...], ...]:
    """Heads, then one row a formation: its largest error by distance, in per cent."""
    heads = ("formation", *(_length(distance) for distance in DISTANCES))
    rows = [
        (formation, *(_percent(error) for error in largest_errors(formation)))
        for formation in FORMATIONS
    ]
    return (heads, *rows)


def _length(distance: float) -> str:
    if distance == SURFACE:
        return "surface"
    return f"{1e3 * distance:g} mm" if distance < 1 else f"{distance:g} m"


def _percent(error: float) -> str:
    """Four decimals; what they do not show is said to be less."""
    return "<0.0001" if error < 5e-7 else f"{100 * error:.4f}"
