"""Plots of the field over one period: the ellipse in its plane, and the curves."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import pyqtgraph as pg
from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QColor, QFont

from app.cycle_values import ellipse_curve, flux_text, plane_axes
from app.theme import SMALL, STEP, Theme
from app.views.inks import shade
from engine.cycle_view import FieldEllipse, Wave
from engine.units import in_unit

Floats = npt.NDArray[np.float64]

#: Colours of x, y and z on light and dark paper, apart in lightness too; x is drawn
#: dashed and z dotted so that colour is not needed.
AXIS_COLOURS = {
    "light": ("#1f5fa8", "#a8501f", "#3d6b2e"),
    "dark": ("#8ab8ee", "#f2a35c", "#9fce8c"),
}
AXIS_STYLES = (
    Qt.PenStyle.DashLine, Qt.PenStyle.SolidLine, Qt.PenStyle.DotLine,
)  # fmt: skip


class _Plot(pg.PlotWidget):
    """A plot in the program's look: its own axes, no menu, no mouse."""

    def __init__(self, name: str, tip: str) -> None:
        super().__init__(background=None)
        self.setAccessibleName(name)
        self.setToolTip(tip)
        self.setMouseEnabled(False, False)
        self.setMenuEnabled(False)
        self.hideButtons()
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)

    def sizeHint(self) -> QSize:
        # The base asks for a window of its own.
        return QSize(60 * STEP, 34 * STEP)

    def _dress(self, theme: Theme, bottom: str, left: str) -> None:
        """Empty the plot and give it axes with words."""
        self.clear()
        self.setBackground(theme.paper)
        font = QFont()
        font.setPixelSize(SMALL)
        for side, words in (("bottom", bottom), ("left", left)):
            axis = self.getAxis(side)
            axis.setPen(pg.mkPen(theme.line, width=1))
            axis.setTextPen(theme.muted)
            axis.setTickFont(font)
            axis.enableAutoSIPrefix(False)
            axis.setLabel(words, color=theme.muted, **{"font-size": f"{SMALL}px"})
        self.showGrid(x=True, y=True, alpha=0.12)

    def _words(
        self, text: str, theme: Theme, at: tuple[float, float],
        anchor: tuple[float, float] = (0.0, 1.0),
    ) -> None:  # fmt: skip
        item = pg.TextItem(
            text, color=theme.text, anchor=anchor, fill=shade(theme.paper, 0.8)
        )
        font = QFont()
        font.setPixelSize(SMALL)
        item.setFont(font)
        item.setPos(*at)
        item.setZValue(20)
        self.addItem(item)


class EllipsePlot(_Plot):
    """The ellipse of one component in its plane, and the vector as it turns."""

    def __init__(self) -> None:
        super().__init__(
            "Ellipse of the field vector",
            "The tip of the field vector over one period, seen square to the plane of "
            "the ellipse; instantaneous values. The semi-axes are given as RMS values",
        )
        self.setAspectLocked(True)
        self._projected: Floats = np.zeros((1, 2))
        self._arrow: pg.PlotDataItem | None = None
        self._tip: pg.ScatterPlotItem | None = None

    def show_ellipse(
        self, ellipse: FieldEllipse, wave: Wave | None, unit: str, theme: Theme
    ) -> None:
        """Draw an ellipse, and the path of the whole wave projected on its plane."""
        self._dress(theme, f"along the major axis [{unit}]", f"across [{unit}]")
        axes = plane_axes(ellipse)
        curve = np.array([[in_unit(v, unit) for v in row] for row in
                          ellipse_curve(ellipse)])  # fmt: skip
        reach = float(np.abs(curve).max(initial=0.0))
        if wave is not None:
            path = wave.vectors @ axes.T / _per(unit)
            self._projected = path
            reach = max(reach, float(np.abs(path).max(initial=0.0)))
            if len(wave.components) > 1:
                closed = np.vstack([path, path[:1]])
                pen = pg.mkPen(theme.text, width=1.4)
                self.plot(closed[:, 0], closed[:, 1], pen=pen)
        else:
            self._projected = np.zeros((1, 2))
        self.plot(curve[:, 0], curve[:, 1], pen=pg.mkPen(theme.accent, width=2))
        self._semi_axes(ellipse, unit, theme)
        self._arrow = self.plot([0, 0], [0, 0], pen=pg.mkPen(theme.above, width=2.5))
        self._arrow.setZValue(10)
        self._tip = pg.ScatterPlotItem(size=9, brush=QColor(theme.above), pen=None)
        self._tip.setZValue(11)
        self.addItem(self._tip)
        self.setRange(xRange=(-reach, reach), yRange=(-reach, reach), padding=0.12)

    def show_instant(self, index: int) -> None:
        """Turn the vector to one of the wave's instants."""
        if self._arrow is None or self._tip is None:
            return
        x, y = self._projected[min(index, len(self._projected) - 1)]
        self._arrow.setData([0, x], [0, y])
        self._tip.setData([x], [y])

    def _semi_axes(self, ellipse: FieldEllipse, unit: str, theme: Theme) -> None:
        pen = pg.mkPen(theme.accent, width=1.2, style=Qt.PenStyle.DashLine)
        major = math.sqrt(2.0) * in_unit(ellipse.semi_major, unit)
        minor = math.sqrt(2.0) * in_unit(ellipse.semi_minor, unit)
        self.plot([0, major], [0, 0], pen=pen)
        self.plot([0, 0], [0, minor], pen=pen)
        text = f"semi-major {flux_text(ellipse.semi_major, unit)} RMS"
        # In the middle, where a small plot has room for it.
        self._words(text, theme, (0.0, -minor), (0.5, -0.7))
        text = f"semi-minor {flux_text(ellipse.semi_minor, unit)} RMS"
        self._words(text, theme, (0.0, minor), (0.5, 1.7))


class CurvesPlot(_Plot):
    """The components over one period, or the magnitude with RMS and peak."""

    def __init__(self, *, magnitude: bool) -> None:
        words = (
            ("Magnitude of the field over one period",
             "Length of the field vector over time, with its RMS value and its peak")
            if magnitude else
            ("Components of the field over one period",
             "Instantaneous x, y and z over time: x dashed, y solid, z dotted")
        )  # fmt: skip
        super().__init__(*words)
        self._magnitude = magnitude
        self._times: Floats = np.zeros(1)
        self._now: pg.InfiniteLine | None = None

    def show_wave(self, wave: Wave | None, unit: str, theme: Theme) -> None:
        """Draw the curves of a wave, or nothing."""
        name = "|B|" if self._magnitude else "B"
        self._dress(theme, "time [ms]", f"{name} [{unit}]")
        self._now = None
        if wave is None:
            return
        self._times = 1e3 * np.append(wave.times, wave.period)
        if self._magnitude:
            self._draw_magnitude(wave, unit, theme)
        else:
            self._draw_components(wave, unit, theme)
        self._now = pg.InfiniteLine(0.0, pen=pg.mkPen(theme.above, width=1.5))
        self.addItem(self._now)
        self.setXRange(0.0, self._times[-1], padding=0.0)

    def show_instant(self, index: int) -> None:
        """Mark one of the wave's instants."""
        if self._now is not None:
            self._now.setValue(self._times[min(index, len(self._times) - 1)])

    def _draw_components(self, wave: Wave, unit: str, theme: Theme) -> None:
        curves = _closed(wave.vectors) / _per(unit)
        top = max(float(np.abs(curves).max()), 1e-12)
        colours = AXIS_COLOURS[theme.name]
        taken: list[int] = []
        for k, letter in enumerate("xyz"):
            pen = pg.mkPen(colours[k], width=1.8, style=AXIS_STYLES[k])
            self.plot(self._times, curves[:, k], pen=pen)
            crests = [int(np.argmax(curves[:-1, k])), int(np.argmin(curves[:-1, k]))]
            if np.ptp(curves[:, k]) < 0.1 * top:
                crests = [int(place * (len(curves) - 1)) for place in (0.97, 0.03)]
            best = max(
                crests, key=lambda at: min((abs(at - t) for t in taken), default=0)
            )
            taken.append(best)
            below = curves[best, k] < 0
            at = (self._times[best], curves[best, k])
            self._words(letter, theme, at, (0.5, 0.1 if below else 0.9))
        self.setYRange(-1.2 * top, 1.2 * top, padding=0.0)

    def _draw_magnitude(self, wave: Wave, unit: str, theme: Theme) -> None:
        sizes = np.append(wave.magnitudes, wave.magnitudes[0]) / _per(unit)
        peak, rms = in_unit(wave.peak, unit), in_unit(wave.rms, unit)
        self.plot(self._times, sizes, pen=pg.mkPen(theme.text, width=1.8))
        dashed = pg.mkPen(theme.accent, width=1.4, style=Qt.PenStyle.DashLine)
        self.addItem(pg.InfiniteLine(rms, angle=0, pen=dashed))
        end = self._times[-1]
        self._words(f"RMS {flux_text(wave.rms, unit)}", theme, (0.01 * end, rms))
        at = 1e3 * wave.peak_time
        mark = pg.ScatterPlotItem(
            [at], [peak], size=9, brush=None, pen=pg.mkPen(theme.text, width=1.6)
        )
        self.addItem(mark)
        right = at > 0.6 * end
        text = f"peak {flux_text(wave.peak, unit)} at {at:.3g} ms"
        self._words(text, theme, (at, peak), (1.0 if right else 0.0, 1.1))
        self.setYRange(0.0, 1.3 * max(peak, 1e-12), padding=0.0)


def _per(unit: str) -> float:
    """Tesla per display unit. [T]"""
    return 1.0 / in_unit(1.0, unit)


def _closed(rows: Floats) -> Floats:
    """A period with its first instant again at the end."""
    return np.vstack([rows, rows[:1]])
