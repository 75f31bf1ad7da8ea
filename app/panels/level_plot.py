"""A reference level against frequency on logarithmic axes."""

from __future__ import annotations

import math
from collections.abc import Sequence

import pyqtgraph as pg
from PySide6.QtCore import QEvent, Qt

from app.panels.level_values import curves
from app.panels.panel import decimal_sign
from app.theme import STEP, theme_for
from engine.criteria import ReferenceLevel
from engine.typed_numbers import number_text
from engine.units import FLUX_DENSITY_UNITS


class _Decades(pg.AxisItem):
    """A logarithmic axis whose ticks are plain numbers."""

    def tickValues(
        self, low: float, high: float, size: float
    ) -> list[tuple[float, list[float]]]:
        decades = range(math.floor(low), math.ceil(high) + 1)
        wide = high - low > 1.5
        steps = (1,) if wide else (1, 2, 5)
        values = [math.log10(s) + d for d in decades for s in steps]
        return [(1.0, [v for v in values if low - 1e-9 <= v <= high + 1e-9])]

    def tickStrings(
        self, values: Sequence[float], scale: float, spacing: float
    ) -> list[str]:
        return [_short(10**value) for value in values]


class LevelPlot(pg.PlotWidget):
    """Plots the values of one level in a display unit, and where currents flow."""

    def __init__(self) -> None:
        axes = {side: _Decades(side) for side in ("bottom", "left")}
        super().__init__(background=None, axisItems=axes)
        self._level: ReferenceLevel | None = None
        self._unit = "µT"
        self._frequencies: tuple[float, ...] = ()
        self.setFixedHeight(45 * STEP)
        self.setLogMode(True, True)
        self.setMouseEnabled(False, False)
        self.setMenuEnabled(False)
        self.hideButtons()
        self.setAccessibleName("Reference level against frequency")
        self.setToolTip(
            "Reference level against frequency on logarithmic axes; dashed lines: "
            "frequencies of the circuits"
        )

    def show_level(
        self, level: ReferenceLevel, unit: str, frequencies: Sequence[float]
    ) -> None:
        """Plot a level.

        Parameters
        ----------
        level : ReferenceLevel
        unit : str
            Display unit.
        frequencies : sequence of float
            Where currents flow. [Hz]
        """
        self._level, self._unit = level, unit
        self._frequencies = tuple(f for f in frequencies if f > 0)
        self._draw()

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "_frequencies"):
            self._draw()
        super().changeEvent(event)

    def _draw(self) -> None:
        theme = theme_for(self.palette())
        item = self.getPlotItem()
        item.clear()
        factor = FLUX_DENSITY_UNITS[self._unit]
        lines = curves(self._level.values) if self._level is not None else []
        for line in lines:
            item.plot(
                [f for f, _ in line],
                [value / factor for _, value in line],
                pen=pg.mkPen(theme.accent, width=2),
                symbol="o",
                symbolSize=5,
                symbolPen=pg.mkPen(theme.accent),
                symbolBrush=pg.mkBrush(theme.accent),
            )
        pen = pg.mkPen(theme.line, width=1, style=Qt.PenStyle.DashLine)
        for f in self._frequencies:
            item.addItem(pg.InfiniteLine(math.log10(f), angle=90, pen=pen))
        for side, title in (("bottom", "Hz"), ("left", self._unit)):
            axis = item.getAxis(side)
            axis.setPen(pg.mkPen(theme.line))
            axis.setTextPen(pg.mkPen(theme.text))
            axis.setLabel(title)
        points = [point for line in lines for point in line]
        self.setVisible(bool(points))
        if points:
            xs = [math.log10(f) for f, _ in points]
            ys = [math.log10(value / factor) for _, value in points]
            self.setXRange(min(xs) - 0.2, max(xs) + 0.2, padding=0)
            self.setYRange(min(ys) - 0.3, max(ys) + 0.3, padding=0)


def _short(value: float) -> str:
    """A tick's number: 10, 1k, 1M."""
    for size, letter in ((1e6, "M"), (1e3, "k")):
        if value >= size * (1 - 1e-9):
            return number_text(value / size, decimal_sign(), 3) + letter
    return number_text(value, decimal_sign(), 3)
