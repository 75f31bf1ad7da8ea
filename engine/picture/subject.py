"""What a picture of a map shows, and the words that say what it is."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from engine.colour_ramp import Scale
from engine.picture.marks import Box
from engine.units import FLUX_DENSITY_UNITS, significant

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]


@dataclass(frozen=True)
class ReferenceLine:
    """A reference level as it shows on a map: its name and its value there. [T]"""

    name: str
    value: float


@dataclass(frozen=True, eq=False)
class OffsetLines:
    """Where a value equals a reference level, searched for on all of a plane.

    Unlike a `ReferenceLine` it counts every frequency by the level's own rule.

    Attributes
    ----------
    name : str
        The level and where it holds, for its label.
    sentence : str
        The result in words, for the caption.
    lines : tuple of (n, 2) float
        Closed where first and last agree. [m]
    measured_from : (m, 2) float
        What the dimension starts from; empty without one. [m]
    dimension : tuple or None
        Start and end on plan, and its text. [m]
    """

    name: str
    sentence: str
    lines: tuple[Floats, ...]
    measured_from: Floats
    dimension: tuple[tuple[float, float], tuple[float, float], str] | None = None


@dataclass(frozen=True, eq=False)
class MapSubject:
    """What a picture shows: the values, and the words that say what they are.

    Attributes
    ----------
    xs, ys : (nx,), (ny,) float
        Axes of the grid. [m]
    values : (ny, nx) float
        Not negative. [T]
    mask : (ny, nx) bool
        True where nothing can be assessed.
    title : str
        Case and height, for people.
    quantity : str
        What the values are.
    unit : str
        Display unit of flux density.
    low, high : float
        Range of the colours. [T]
    references : tuple of ReferenceLine
        Drawn bold.
    reference_note : str
        At which frequency the levels were taken, or why none is drawn.
    lines : tuple of str
        Further lines of the caption.
    length_unit : str
        Unit of axes and scale bar.
    north : float or None
        Direction of north from +x, counter-clockwise. [degrees]
    largest : pair of float or None
        Where on plan the largest value of a zone was found; drawn as a ring. [m]
    offsets : OffsetLines or None
        Drawn over everything, with their dimension.
    names : pair of str
        What the axes to the right and upwards stand for, as `draw_axes` takes them.
    """

    xs: Floats
    ys: Floats
    values: Floats
    mask: Bools
    title: str
    quantity: str = "RMS resultant"
    unit: str = "µT"
    low: float = 1e-7
    high: float = 1e-3
    scale: Scale = "logarithmic"
    references: tuple[ReferenceLine, ...] = ()
    reference_note: str = ""
    lines: tuple[str, ...] = ()
    length_unit: str = "m"
    north: float | None = None
    largest: tuple[float, float] | None = None
    offsets: OffsetLines | None = None
    names: tuple[str, str] = ("x", "y")

    def world(self) -> Box:
        """Left, bottom, right, top of the grid with half a step around it. [m]"""
        dx = 0.5 * _step(self.xs)
        dy = 0.5 * _step(self.ys)
        return (
            float(self.xs[0]) - dx,
            float(self.ys[0]) - dy,
            float(self.xs[-1]) + dx,
            float(self.ys[-1]) + dy,
        )


def _step(axis: Floats) -> float:
    return float(axis[-1] - axis[0]) / (len(axis) - 1) if len(axis) > 1 else 1.0


def value_text(tesla: float, unit: str) -> str:
    """A round value as a map prints it, "0.5 µT"."""
    figures = significant(tesla / FLUX_DENSITY_UNITS[unit], 4)
    if "." in figures and "e" not in figures:
        figures = figures.rstrip("0").rstrip(".")
    return f"{figures} {unit}"
