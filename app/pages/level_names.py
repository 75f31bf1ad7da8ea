"""The names of reference levels on a plot: on their lines, and over nothing else."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
import pyqtgraph as pg
from PySide6.QtGui import QFont, QFontMetricsF

Floats = npt.NDArray[np.float64]

#: Places that are tried along a line.
_TRIED = 7
#: Rows that are tried: on the line, under it, over the first.
_ROWS = (0.0, -1.05, 1.0)
#: Of the distance of a crossing. [px]
_WIDE = 70


def place_names(
    view: pg.ViewBox,
    named: Sequence[tuple[pg.TextItem, Floats, Floats]],
    curves: Sequence[tuple[Floats, Floats]],
    distances: Sequence[tuple[float, float, bool]] = (),
) -> None:
    """Put names on their lines, lowest first, where they cover no curve or name.

    `named` are names with their lines, `curves` and the `distances` of crossings over
    their marks (to the left of them or not) are to be kept clear, all in the units of
    the axes.
    """
    (x0, x1), (y0, y1) = view.viewRange()
    across = (x1 - x0) / max(1.0, view.width())
    row = 1.5 * QFontMetricsF(QFont()).height() * (y1 - y0) / max(1.0, view.height())
    taken = [*curves]
    for x, y, is_left in distances:
        ends = np.linspace(x - _WIDE * across if is_left else x,
                           x if is_left else x + _WIDE * across, 9)  # fmt: skip
        taken += [(ends, np.full(9, y + part * row)) for part in (0.3, 0.9)]
    for item, xs, ys in sorted(named, key=lambda entry: float(entry[2][0])):
        width = item.boundingRect().width() * across
        first = max(float(xs[0]), x0) + 4 * across
        last = max(float(xs[-1]) - width - 4 * across, first)
        places = np.linspace(first, last, _TRIED)
        # Of lines that lie close, names stand one over the other.
        left, y = first, float(np.interp(first, xs, ys))
        for step in _ROWS:
            lows = np.interp(places, xs, ys) + step * row
            found = free_place(places, width, lows, row, taken)
            if found is not None:
                left, y = found, float(np.interp(found, xs, ys)) + step * row
                break
        taken.append((np.linspace(left, left + width, 9), np.full(9, y + row / 2)))
        item.setPos(left, y)


def free_place(
    places: Floats,
    width: float,
    heights: Floats,
    row: float,
    taken: Sequence[tuple[Floats, Floats]],
) -> float | None:
    """The first place where words of a width, a row high, cover nothing, if any.

    `taken` are lines (n,), (n,) of what is drawn, `heights` where the words stand.
    """
    for left, low in zip(places.tolist(), heights.tolist(), strict=True):
        covered = any(
            np.any((xs >= left) & (xs <= left + width) & (ys > low) & (ys < low + row))
            for xs, ys in taken
        )
        if not covered:
            return float(left)
    return None
