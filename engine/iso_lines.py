"""Iso-lines of a map: round values, lines through the grid, and places for labels."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from contourpy import LineType, contour_generator

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]

#: Round values this near to a named one, relative to it, have no line beside its line.
_BESIDE = 0.02


@dataclass(frozen=True, eq=False)
class IsoLine:
    """One unbroken line of equal value.

    Attributes
    ----------
    value : float
        In the unit of the map it was taken from. [T]
    points : (n, 2) float
        The line, in the axes of the map; closed where first and last agree. [m]
    """

    value: float
    points: Floats

    @property
    def length(self) -> float:
        """[m]"""
        return float(np.linalg.norm(np.diff(self.points, axis=0), axis=1).sum())

    def label_place(
        self, fraction: float = 0.5, span: float = 0.0
    ) -> tuple[float, float, float]:
        """Where a label sits: x, y in metres and the line's direction in degrees.

        `fraction` is the part of the line before the label; the direction is that of
        the chord over `span` metres of it. It lies in (−90, 90], so that the label
        never stands on its head.
        """
        walked = self._walked()
        middle = fraction * walked[-1]
        reach = max(0.5 * span, 0.01 * walked[-1])
        x, y = _at(self.points, walked, middle)
        before = _at(self.points, walked, middle - reach)
        after = _at(self.points, walked, middle + reach)
        turn = math.degrees(math.atan2(after[1] - before[1], after[0] - before[0]))
        if turn > 90.0:
            turn -= 180.0
        elif turn <= -90.0:
            turn += 180.0
        return x, y, turn

    def straightness(self, fraction: float, span: float) -> float:
        """Chord over length of the `span` metres around a place: 1 where straight."""
        walked = self._walked()
        middle = fraction * walked[-1]
        before = _at(self.points, walked, middle - 0.5 * span)
        after = _at(self.points, walked, middle + 0.5 * span)
        return math.dist(before, after) / span

    def _walked(self) -> Floats:
        """Length of the line up to each of its points. [m]"""
        steps = np.linalg.norm(np.diff(self.points, axis=0), axis=1)
        return np.concatenate([[0.0], np.cumsum(steps)])


def _at(points: Floats, walked: Floats, where: float) -> tuple[float, float]:
    return (
        float(np.interp(where, walked, points[:, 0])),
        float(np.interp(where, walked, points[:, 1])),
    )


def round_values(
    low: float, high: float, named: Sequence[float] = ()
) -> tuple[float, ...]:
    """The values 1, 2, 5 times powers of ten from `low` to `high`, both included.

    Those within 2 % of a value that has a line with a name already are left out.

    Examples
    --------
    >>> round_values(0.2, 10)
    (0.2, 0.5, 1.0, 2.0, 5.0, 10.0)
    >>> round_values(0.2, 10, (1.98, 5.3))
    (0.2, 0.5, 1.0, 5.0, 10.0)
    """
    if not 0 < low <= high:
        return ()
    first = math.floor(math.log10(low)) - 1
    last = math.ceil(math.log10(high)) + 1
    values = [
        float(f"{step}e{power}")
        for power in range(first, last + 1)
        for step in (1, 2, 5)
    ]
    slack = 1.0 + 1e-9
    return tuple(
        v
        for v in values
        if low / slack <= v <= high * slack
        and not any(abs(v - other) <= _BESIDE * other for other in named)
    )


def iso_lines(
    xs: npt.ArrayLike,
    ys: npt.ArrayLike,
    values: npt.ArrayLike,
    mask: npt.ArrayLike | None,
    wanted: Sequence[float],
) -> tuple[IsoLine, ...]:
    """Lines of equal value on a grid; none through masked points.

    Parameters
    ----------
    xs, ys : (nx,), (ny,) float
        Axes of the grid, rising. [m]
    values : (ny, nx) float
        Values on the grid, not negative. [T]
    mask : (ny, nx) bool or None
        True where there is no value.
    wanted : sequence of float
        Positive values to draw. [T]

    Notes
    -----
    Interpolated between grid points in the logarithm of the value, which follows the
    power laws of the field far better than the value itself.
    """
    x, y = np.asarray(xs, dtype=float), np.asarray(ys, dtype=float)
    grid = np.asarray(values, dtype=float)
    hidden = ~np.isfinite(grid) | (grid <= 0)
    if mask is not None:
        hidden |= np.asarray(mask, dtype=bool)
    if min(grid.shape) < 2 or hidden.all():
        return ()
    logs = np.ma.masked_array(
        np.log10(np.where(hidden, 1.0, grid)), mask=hidden, dtype=float
    )
    return _drawn(x, y, logs, [(value, math.log10(value)) for value in wanted])


def signed_lines(
    xs: npt.ArrayLike,
    ys: npt.ArrayLike,
    values: npt.ArrayLike,
    mask: npt.ArrayLike | None,
    wanted: Sequence[float],
    small: float,
) -> tuple[IsoLine, ...]:
    """Lines of equal change on a grid, of either sign or none.

    As `iso_lines`, interpolated in asinh(value / small): in the logarithm where a
    change is large against `small`, in the change itself where it is not.

    Raises
    ------
    ValueError
        When `small` is not positive.
    """
    if not small > 0:
        raise ValueError(f"no scale of small changes in {small!r}")
    x, y = np.asarray(xs, dtype=float), np.asarray(ys, dtype=float)
    grid = np.asarray(values, dtype=float)
    hidden = ~np.isfinite(grid)
    if mask is not None:
        hidden |= np.asarray(mask, dtype=bool)
    if min(grid.shape) < 2 or hidden.all():
        return ()
    bent = np.ma.masked_array(
        np.arcsinh(np.where(hidden, 0.0, grid) / small), mask=hidden, dtype=float
    )
    return _drawn(x, y, bent, [(v, math.asinh(v / small)) for v in wanted])


def _drawn(
    x: Floats,
    y: Floats,
    grid: np.ma.MaskedArray[tuple[int, int], np.dtype[np.float64]],
    wanted: Sequence[tuple[float, float]],
) -> tuple[IsoLine, ...]:
    """Lines of values, each with what stands for it on the grid."""
    generator = contour_generator(
        x, y, grid, line_type=LineType.Separate, corner_mask=False
    )
    found: list[IsoLine] = []
    for value, level in wanted:
        for line in generator.lines(level):
            points = np.asarray(line, dtype=float)
            if len(points) > 1:
                found.append(IsoLine(value, points))
    return tuple(found)
