"""The currents of a section as phasors from one point, and their sum."""

from __future__ import annotations

from math import atan2, cos, floor, log10, sin

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.theme import BODY, SMALL, STEP, Theme, theme_for
from app.views.inks import conductor_colour
from engine.section_currents import SectionCurrents
from engine.units import significant

_HEAD = 7.0


class PhasorDrawing(QWidget):
    """Arrows of RMS phasors; a positive angle, counter-clockwise, leads."""

    def __init__(self) -> None:
        super().__init__()
        self._currents: SectionCurrents | None = None
        #: Boxes of names drawn already. [px]
        self._taken: list[QRectF] = []
        self.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Maximum)
        self.setMinimumSize(28 * STEP, 28 * STEP)
        self.setAccessibleName("Phasors of the currents in the section")
        self.setToolTip(
            "RMS phasors in amperes, along the route; 0° to the right, leading "
            "angles counter-clockwise. The thick arrow is their sum, the net current"
        )

    def sizeHint(self) -> QSize:
        return QSize(44 * STEP, 42 * STEP)

    def show_currents(self, currents: SectionCurrents | None) -> None:
        """Show the currents of one component, or none."""
        self._currents = currents
        self.update()

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = theme_for(self.palette())
        painter.fillRect(self.rect(), QColor(theme.paper))
        middle = QPointF(self.width() / 2, self.height() / 2)
        radius = min(self.width(), self.height()) / 2 - 6 * STEP
        painter.setPen(QPen(QColor(theme.hairline), 1))
        arm = radius + 2 * STEP
        painter.drawLine(middle - QPointF(arm, 0), middle + QPointF(arm, 0))
        painter.drawLine(middle - QPointF(0, arm), middle + QPointF(0, arm))
        if self._currents is None:
            return
        values: dict[str, complex] = {}
        for _, label, value in self._currents.terms:
            values[label] = values.get(label, 0j) + value
        largest = max(map(abs, [*values.values(), self._currents.net]))
        if largest == 0:
            return
        ring = ring_value(largest)
        scale = radius / largest
        painter.drawEllipse(middle, ring * scale, ring * scale)
        foot = middle + QPointF(0, ring * scale)
        self._taken = [self._ring_text(painter, theme, foot, ring)]
        for label, value in values.items():
            colour = QColor(conductor_colour(label, theme))
            self._arrow(painter, theme, middle, value * scale, colour, 2.0, label)
        net = self._currents.net * scale
        accent = QColor(theme.accent)
        if abs(net) > 2 * _HEAD:
            self._arrow(painter, theme, middle, net, accent, 4.0, "net")
        else:
            painter.setPen(QPen(accent, 2))
            painter.setBrush(accent)
            painter.drawEllipse(middle, 3, 3)

    def _arrow(
        self, painter: QPainter, theme: Theme, start: QPointF, value: complex,
        colour: QColor, width: float, name: str,
    ) -> None:  # fmt: skip
        """An arrow from `start`; `value` in pixels, the imaginary axis upwards."""
        if abs(value) < 1:
            return
        tip = start + QPointF(value.real, -value.imag)
        # A halo in the line colour keeps black legible on dark and white on light.
        for pen in (QPen(QColor(theme.line), width + 1.6), QPen(colour, width)):
            pen.setCapStyle(Qt.PenCapStyle.FlatCap)
            painter.setPen(pen)
            painter.drawLine(start, tip)
            angle = atan2(value.imag, value.real)
            for turn in (2.7, -2.7):
                arm = QPointF(cos(angle + turn), -sin(angle + turn)) * _HEAD
                painter.drawLine(tip, tip + arm)
        font = QFont(painter.font())
        font.setPixelSize(BODY)
        font.setBold(True)
        painter.setFont(font)
        metrics = QFontMetricsF(font)
        box = self._free_box(metrics, name, start, value)
        self._taken.append(box)
        painter.setPen(QColor(theme.text))
        painter.drawText(box, Qt.AlignmentFlag.AlignCenter, name)

    def _free_box(
        self, metrics: QFontMetricsF, name: str, start: QPointF, value: complex
    ) -> QRectF:
        """Where a name stands about the tip of its arrow, off other names."""
        width, height = metrics.horizontalAdvance(name), metrics.capHeight() + 4
        away = value / abs(value)
        boxes = []
        for turn in (0.0, 0.9, -0.9, 1.6, -1.6, 2.3, -2.3):
            side = complex(cos(turn), sin(turn)) * away
            # As far as the name reaches that way, and a little.
            reach = abs(side.real) * width / 2 + abs(side.imag) * height / 2 + 6
            at = value + side * reach
            middle = start + QPointF(at.real, -at.imag)
            box = QRectF(0, 0, width, height)
            box.moveCenter(middle)
            boxes.append(box)
        inside = QRectF(self.rect())
        free = (
            box
            for box in boxes
            if inside.contains(box) and not any(map(box.intersects, self._taken))
        )
        return next(free, boxes[0])

    def _ring_text(
        self, painter: QPainter, theme: Theme, at: QPointF, ring: float
    ) -> QRectF:
        font = QFont(painter.font())
        font.setPixelSize(SMALL)
        font.setBold(False)
        painter.setFont(font)
        painter.setPen(QColor(theme.muted))
        text, corner = f"{significant(ring)} A", at + QPointF(STEP, -STEP / 2)
        painter.drawText(corner, text)
        return QFontMetricsF(font).boundingRect(text).translated(corner)


def ring_value(largest: float) -> float:
    """A round value near the largest: 1, 2 or 5 times a power of ten.

    >>> ring_value(575.0), ring_value(0.19)
    (500.0, 0.1)
    """
    decade = 10.0 ** floor(log10(largest))
    return max(f * decade for f in (1.0, 2.0, 5.0) if f * decade <= largest)
