"""The currents of circuits as phasors from one point, turned to an instant."""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.panels.phasor_drawing import ring_value
from app.theme import LIGHT, SMALL, STEP, Theme
from app.views.inks import conductor_colour
from engine.cycle_view import CurrentPhasor
from engine.units import significant

#: Arrows that are drawn; the smaller ones are left out, and that is said.
MOST = 12
_HEAD = 7.0


class TurningPhasors(QWidget):
    """Arrows of RMS phasors that turn counter-clockwise once in a period."""

    def __init__(self) -> None:
        super().__init__()
        self._currents: tuple[CurrentPhasor, ...] = ()
        self._names: tuple[str, ...] = ()
        self._turn = 0.0
        self._theme = LIGHT
        self.setMinimumSize(QSize(44 * STEP, 40 * STEP))
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Phasors of the currents")
        self.setToolTip(
            "RMS phasors of the circuits' currents in amperes, turned to the instant "
            "shown; at 0 ms 0° points to the right and leading angles run "
            "counter-clockwise. √2 times the horizontal part is the momentary current"
        )

    def show_currents(
        self, currents: Sequence[CurrentPhasor], names: Sequence[str], theme: Theme
    ) -> None:
        """Show phasors of one frequency, each with its name."""
        order = sorted(range(len(currents)), key=lambda k: -abs(currents[k].current))
        self._currents = tuple(currents[k] for k in order)
        self._names = tuple(names[k] for k in order)
        self._theme = theme
        self.update()

    def turn(self, degrees: float) -> None:
        """Turn all of them. [degrees]"""
        self._turn = degrees
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = self._theme
        painter.fillRect(self.rect(), QColor(theme.paper))
        middle = QPointF(self.width() / 2, self.height() / 2)
        radius = min(self.width(), self.height()) / 2 - 5 * STEP
        painter.setPen(QPen(QColor(theme.hairline), 1))
        arm = radius + 3 * STEP
        painter.drawLine(middle - QPointF(arm, 0), middle + QPointF(arm, 0))
        painter.drawLine(middle - QPointF(0, arm), middle + QPointF(0, arm))
        if not self._currents or radius <= 0:
            return
        largest = abs(self._currents[0].current)
        ring, scale = ring_value(largest), radius / largest
        painter.drawEllipse(middle, ring * scale, ring * scale)
        self._small(painter)
        painter.setPen(QColor(theme.muted))
        at = middle + QPointF(STEP, ring * scale - STEP / 2)
        painter.drawText(at, f"{significant(ring)} A")
        if len(self._currents) > MOST:
            rest = len(self._currents) - MOST
            words = f"the {MOST} largest; smaller ones not drawn: {rest}"
            painter.drawText(QPointF(2 * STEP, self.height() - 2 * STEP), words)
        turned = cmath.exp(1j * math.radians(self._turn))
        taken: list[QRectF] = []
        shown = zip(self._currents[:MOST], self._names[:MOST], strict=True)
        for current, name in shown:
            self._arrow(painter, middle, current, scale * turned, name, taken)

    def _arrow(
        self, painter: QPainter, start: QPointF, current: CurrentPhasor,
        scale: complex, name: str, taken: list[QRectF],
    ) -> None:  # fmt: skip
        value = current.current * scale
        if abs(value) < 1:
            return
        theme = self._theme
        colour = QColor(conductor_colour(current.label, theme))
        tip = start + QPointF(value.real, -value.imag)
        # A halo in the line colour keeps black legible on dark and white on light.
        for pen in (QPen(QColor(theme.line), 3.6), QPen(colour, 2.0)):
            pen.setCapStyle(Qt.PenCapStyle.FlatCap)
            painter.setPen(pen)
            painter.drawLine(start, tip)
            angle = cmath.phase(value)
            for turn in (2.7, -2.7):
                arm = QPointF(math.cos(angle + turn), -math.sin(angle + turn)) * _HEAD
                painter.drawLine(tip, tip + arm)
        self._small(painter)
        metrics = QFontMetricsF(painter.font())
        width, height = metrics.horizontalAdvance(name), metrics.height()
        beyond = value / abs(value) * (abs(value) + 3 * STEP)
        at = start + QPointF(beyond.real, -beyond.imag)
        left = at.x() - (width if beyond.real < 0 else 0)
        left = min(max(left, STEP), self.width() - width - STEP)
        box = QRectF(left, at.y() - height / 2, width, height)
        if any(box.intersects(other) for other in taken):
            return
        taken.append(box)
        painter.setPen(QColor(theme.text))
        painter.drawText(QPointF(box.left(), box.bottom() - metrics.descent()), name)

    def _small(self, painter: QPainter) -> None:
        font = QFont(painter.font())
        font.setPixelSize(SMALL)
        painter.setFont(font)
