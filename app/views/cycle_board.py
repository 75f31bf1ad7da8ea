"""The board of the cycle page: ellipse, phasors and curves at one instant."""

from __future__ import annotations

import math

from PySide6.QtCore import QSize
from PySide6.QtWidgets import QGridLayout, QLabel, QVBoxLayout, QWidget

from app.cycle_values import component_text, ellipse_text, own_ellipse, wave_text
from app.panels.panel import Words
from app.theme import STEP, Theme
from app.views.cycle_plots import CurvesPlot, EllipsePlot
from app.views.turning_phasors import TurningPhasors
from engine.cycle_view import CycleView, FieldEllipse, Wave
from engine.layout import Layout

#: Smaller, its plots could not be read. [logical pixels]
_LEAST = QSize(140 * STEP, 110 * STEP)


class CycleBoard(QWidget):
    """Draws one component's ellipse and phasors, and the wave that it is part of."""

    def __init__(self) -> None:
        super().__init__()
        self.ellipse_plot, self.phasors = EllipsePlot(), TurningPhasors()
        self.components = CurvesPlot(magnitude=False)
        self.magnitude = CurvesPlot(magnitude=True)
        self.wave: Wave | None = None
        self.ellipse: FieldEllipse | None = None
        self._index = 0
        self._heads = {name: QLabel() for name in ("ellipse", "phasors", "wave")}
        self._shape = Words()
        self.setAutoFillBackground(True)
        self.setMinimumSize(_LEAST)
        left, right = QVBoxLayout(), QVBoxLayout()
        for box in (left, right):
            box.setSpacing(STEP)
        left.addWidget(self._heads["ellipse"])
        left.addWidget(self.ellipse_plot, 3)
        left.addWidget(self._shape)
        left.addWidget(self._heads["phasors"])
        left.addWidget(self.phasors, 3)
        right.addWidget(self._heads["wave"])
        right.addWidget(self.components, 3)
        right.addWidget(self.magnitude, 2)
        grid = QGridLayout(self)
        grid.setContentsMargins(2 * STEP, STEP, 2 * STEP, STEP)
        grid.setHorizontalSpacing(4 * STEP)
        grid.addLayout(left, 0, 0)
        grid.addLayout(right, 0, 1)
        grid.setColumnStretch(0, 2)
        grid.setColumnStretch(1, 3)

    @property
    def instants(self) -> int:
        """How many instants the wave has."""
        return 0 if self.wave is None else len(self.wave.times)

    def show_component(
        self, layout: Layout, view: CycleView, index: int, theme: Theme
    ) -> None:
        """Show the component of one of the view's ellipses."""
        self.ellipse = ellipse = view.ellipses[index]
        self.wave = next((w for w in view.waves if ellipse.component in w.components),
                         None)  # fmt: skip
        unit = layout.settings.flux_density_unit
        self.ellipse_plot.show_ellipse(ellipse, self.wave, unit, theme)
        self.components.show_wave(self.wave, unit, theme)
        self.magnitude.show_wave(self.wave, unit, theme)
        own = [c for c in view.currents if c.component == ellipse.component]
        several = len({c.circuit for c in own}) > 1
        titles = {c.id: c.title for c in layout.circuits}
        names = [
            f"{c.label} {titles.get(c.circuit, c.circuit)}" if several else c.label
            for c in own
        ]
        self.phasors.show_currents(own, names, theme)
        hertz = component_text(layout, ellipse.component)
        self._heads["ellipse"].setText(f"Ellipse at {hertz}")
        self._heads["phasors"].setText(f"Currents at {hertz}, RMS")
        self._heads["wave"].setText(_wave_head(layout, view, self.wave))
        self._shape.setText(f"{ellipse_text(layout, ellipse)}. {_normal(ellipse)}")
        self.show_instant(self._index)

    def show_instant(self, index: int) -> None:
        """Show one of the wave's instants."""
        self._index = min(max(index, 0), max(0, self.instants - 1))
        for plot in (self.ellipse_plot, self.components, self.magnitude):
            plot.show_instant(self._index)
        if self.wave is not None and self.ellipse is not None:
            time = self.wave.times[self._index]
            self.phasors.turn(360.0 * self.ellipse.component.frequency * time)


def _wave_head(layout: Layout, view: CycleView, wave: Wave | None) -> str:
    if wave is None:
        return "No waveform: these frequencies have no common period"
    name = wave_text(layout, wave)
    if view.is_waveform:
        return f"Waveform, {name}"
    if len(view.waves) == 1:
        return f"Waveform of one possible offset, {name}"
    return f"Part of the field, {name}"


def _normal(ellipse: FieldEllipse) -> str:
    """Where the ellipse lies in space."""
    along, normal = ellipse.axes[0], ellipse.normal
    text = f"Major axis along {_direction(along)}"
    if normal.any():
        tilt = math.degrees(math.acos(min(1.0, abs(float(normal[2])))))
        text += f"; its plane is tilted {tilt:.0f}° from level"
    return text + "."


def _direction(vector: object) -> str:
    return " ".join(
        f"{letter} {value:+.2f}".replace("-", "−")
        for letter, value in zip("xyz", vector, strict=True)  # type: ignore[call-overload]
    )


def first_component(view: CycleView) -> int:
    """The component with the largest ellipse of the largest wave."""
    if view.waves:
        best = own_ellipse(view, max(view.waves, key=lambda w: w.rms))
        return view.ellipses.index(best)
    return max(range(len(view.ellipses)), key=lambda k: view.ellipses[k].semi_major)
