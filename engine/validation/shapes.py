"""Conductors and fields of the simple shapes that published numbers speak of.

Long wires are straight conductors of finite length that stands in for infinity: at a
distance r from the middle of a wire of length 2h the shortfall is r²/2h², 5·10⁻⁷ at
100 m for h = 100 km.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine.conductor import Conductor
from engine.field import flux_density
from engine.runs import Bar, Round

#: Half the length of a wire that stands in for an infinite one. [m]
HALF_LENGTH = 1e5

#: Sides of the polygon that stands in for a circle; its field on the axis is lower
#: by about (π/sides)²/2 to (π/sides)²: 1.2·10⁻⁵.
CIRCLE_SIDES = 1440

#: Currents of a balanced set of 1 A, in the order L1 L2 L3.
BALANCED = np.exp(2j * math.pi * np.array([0.0, -1.0, 1.0]) / 3)

#: Thin enough for a filament wherever the checks look.
THIN = Round(diameter=1e-5)


def conductor(
    key: str,
    path: ArrayLike,
    shape: Round | Bar = THIN,
    across: ArrayLike = (1.0, 0.0, 0.0),
) -> Conductor:
    """A conductor along a polyline.

    Parameters
    ----------
    key : str
        Name of the conductor.
    path : (n, 3) array_like
        Vertices. [m]
    shape : Round or Bar
        Section.
    across : (3,) array_like
        Direction of the section's width on the first leg; its part along the leg is
        dropped.
    """
    vertices = np.array(path, dtype=np.float64)
    vertices.setflags(write=False)
    axes = _axes(vertices, np.asarray(across, dtype=np.float64))
    axes.setflags(write=False)
    return Conductor(
        key=key,
        item="check",
        slot=key,
        role="run",
        path=vertices,
        axes=axes,
        shape=shape,
        loads=(),
        group="check",
    )


def long_wires(
    places: ArrayLike,
    shape: Round | Bar = THIN,
    half_length: float = HALF_LENGTH,
) -> tuple[Conductor, ...]:
    """Straight conductors along z through places in the plane z = 0.

    Parameters
    ----------
    places : (m, 2) array_like
        x and y of each conductor; a bar's width lies along x. [m]
    """
    return tuple(
        conductor(str(i), [(x, y, -half_length), (x, y, half_length)], shape)
        for i, (x, y) in enumerate(np.asarray(places, dtype=np.float64))
    )


def circle(
    radius: float, z: float = 0.0, sides: int = CIRCLE_SIDES, key: str = "loop"
) -> Conductor:
    """A polygon in a circle about the z axis, positive counter-clockwise from +z."""
    angle = 2 * math.pi * np.arange(sides + 1) / sides
    path = np.column_stack(
        (radius * np.cos(angle), radius * np.sin(angle), np.full(sides + 1, z))
    )
    path[-1] = path[0]
    return conductor(key, path, across=(0.0, 0.0, 1.0))


def phasors(
    conductors: Sequence[Conductor], currents: ArrayLike, points: ArrayLike
) -> NDArray[np.complex128]:
    """Flux density of one set of RMS currents at points: (n, 3) phasors. [T]"""
    values = np.atleast_1d(np.asarray(currents, dtype=np.complex128))
    places = np.atleast_2d(np.asarray(points, dtype=np.float64))
    field = flux_density(tuple(conductors), values[np.newaxis, :], places)
    return np.asarray(field[0], dtype=np.complex128)


def resultant_at(
    conductors: Sequence[Conductor], currents: ArrayLike, point: ArrayLike
) -> float:
    """RMS resultant of one set of currents at one point. [T]"""
    field = phasors(conductors, currents, point)[0]
    return float(np.sqrt(np.sum(np.abs(field) ** 2)))


def crossing(
    value_of_distance: Callable[[float], float], target: float, near: float, far: float
) -> float:
    """Distance from `near` to `far` at which a monotonic function meets `target`."""
    rises = value_of_distance(far) > value_of_distance(near)
    for _ in range(40):
        middle = 0.5 * (near + far)
        if (value_of_distance(middle) < target) == rises:
            near = middle
        else:
            far = middle
    return 0.5 * (near + far)


def slope(
    value_of_distance: Callable[[float], float], near: float, far: float
) -> float:
    """Exponent of a power law fitted through 9 distances spaced evenly in logarithm."""
    distances = np.geomspace(near, far, 9)
    values = [value_of_distance(distance) for distance in distances]
    return float(np.polyfit(np.log(distances), np.log(values), 1)[0])


def _axes(
    path: NDArray[np.float64], across: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Section axes at every vertex, carried through bends by the mitre plane."""
    legs = np.diff(path, axis=0)
    legs /= np.linalg.norm(legs, axis=1)[:, np.newaxis]
    width = across - (across @ legs[0]) * legs[0]
    assert np.linalg.norm(width) > 1e-9, "the section's width lies along the first leg"
    width /= np.linalg.norm(width)
    thickness = np.cross(legs[0], width)
    axes = np.empty((len(path), 2, 3))
    axes[0] = width, thickness
    for i, leg in enumerate(legs):
        if i == len(legs) - 1:
            axes[i + 1] = width, thickness
            break
        normal = leg + legs[i + 1]
        normal /= np.linalg.norm(normal)
        for row, side in enumerate((width, thickness)):
            axes[i + 1, row] = side - leg * (side @ normal) / (leg @ normal)
        # The mirror of the frame in the mitre plane, with the leg turned over.
        mirrored = [side - 2 * (side @ normal) * normal for side in (width, thickness)]
        width, thickness = mirrored
    return axes
