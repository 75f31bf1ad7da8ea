"""The program's look of plots: axes with words, ticks at 1, 2 and 5, plain labels."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import pyqtgraph as pg
from PySide6.QtGui import QFont, QPen

from app.theme import SMALL, Theme
from app.views.inks import shade
from engine.levels import Kind
from engine.profiles import ProfileCurve

#: Curves lie in this layer, what they are compared with below it.
CURVES = 10

#: Load cases by colour, apart in lightness too; heights by dashes.
_COLOURS = {
    "light": ("#0b6a6a", "#8a3a8f", "#1f4fa0", "#8a5a00", "#4a4f55"),
    "dark": ("#56b8b2", "#d79be0", "#9dbcf5", "#e3b45c", "#c3c9cf"),
}
_DASHES: tuple[tuple[float, ...], ...] = (
    (), (3.5, 2.0), (1.0, 2.0), (4.0, 1.5, 1.0, 1.5), (6.0, 1.5), (2.0, 4.0),
)  # fmt: skip


def curve_pen(colour: int, dash: int, theme: Theme) -> QPen:
    """A pen of its own for each colour and dash."""
    colours = _COLOURS[theme.name]
    made = pg.mkPen(colours[colour % len(colours)], width=2)
    dashes = _DASHES[dash % len(_DASHES)]
    if dashes:
        made.setDashPattern(list(dashes))
    return made


def as_before(pen: QPen) -> QPen:
    """The pen of a curve as it was: thin and pale."""
    made = QPen(pen)
    colour = pen.color()
    colour.setAlphaF(0.55)
    made.setColor(colour)
    made.setWidthF(1.0)
    return made


def value_range(
    curves: Sequence[ProfileCurve], kind: Kind, decades: float | None
) -> tuple[float, float]:
    """Smallest and largest value that counts; at most so many decades apart. [T]"""
    found = [
        v[v > 0] for c in curves if (v := np.asarray(c.values(kind))[~c.mask]).size
    ]
    values = np.concatenate(found) if found else np.zeros(0)
    if not len(values):
        return 1e-9, 1e-6
    low, high = float(values.min()), float(values.max())
    if decades is not None:
        low = max(low, high * 10**-decades)
    return low, high


def dress_axis(axis: pg.AxisItem, words: str, theme: Theme) -> None:
    """Give an axis its words and the theme's colours."""
    font = QFont()
    font.setPixelSize(SMALL)
    axis.setPen(pg.mkPen(theme.line, width=1))
    axis.setTextPen(theme.muted)
    axis.setTickFont(font)
    axis.enableAutoSIPrefix(False)
    axis.setLabel(words, color=theme.muted, **{"font-size": f"{SMALL}px"})
    axis.setTicks(None)


def rings(xs: list[float], ys: list[float], theme: Theme) -> pg.ScatterPlotItem:
    """Places as rings."""
    pen = pg.mkPen(theme.muted, width=1.2)
    return pg.ScatterPlotItem(xs, ys, size=7, brush=None, pen=pen)


def text_item(
    text: str, theme: Theme, anchor: tuple[float, float], *, bold: bool = False
) -> pg.TextItem:
    """Words on a plot, on a patch of paper."""
    item = pg.TextItem(
        text, color=theme.text, anchor=anchor, fill=shade(theme.paper, 0.8)
    )
    font = QFont()
    font.setPixelSize(SMALL)
    font.setBold(bold)
    item.setFont(font)
    item.setZValue(22 if bold else 8)
    return item


def plain_label(text: str) -> str:
    """A label of a legend is markup: users' text must not be."""
    return text.replace("&", "&amp;").replace("<", "&lt;")


def log_ticks(low: float, high: float) -> list[list[tuple[float, str]]]:
    """Ticks at 1, 2 and 5 of every decade, named; the other digits unnamed."""
    major: list[tuple[float, str]] = []
    minor: list[tuple[float, str]] = []
    named = (1, 2, 5) if high - low < 3 else (1,)
    for decade in range(math.floor(low), math.ceil(high) + 1):
        for digit in range(1, 10):
            y = decade + math.log10(digit)
            if low <= y <= high:
                text = f"{digit * 10.0**decade:.12g}"
                (major if digit in named else minor).append((y, text))
    return [major, [(y, "") for y, _ in minor]]
