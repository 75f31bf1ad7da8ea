"""The legend of the map: its colours with values and unit, and the reference levels."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPixmap
from PySide6.QtWidgets import QWidget

from app.map_picture import MapPicture
from app.theme import SMALL, STEP
from app.views.inks import Inks, shade
from engine.colour_ramp import OPACITY, position, rgb_ramp
from engine.iso_lines import round_values
from engine.units import significant

_BAR_WIDTH, _BAR_HEIGHT = 14, 128

#: Two values on the bar are at least this far apart. [px]
_APART = 14.0

#: Room for the name of a reference level; the lines carry it in full. [px]
_NAME_WIDTH = 11.0 * SMALL

#: In narrower views a level is told by its value alone. [px]
_NARROW = 600


class Legend(QWidget):
    """A colour bar beside its values; as large as its words need."""

    def __init__(self, inks: Inks, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._inks = inks
        self._picture: MapPicture | None = None
        self._painted: tuple[tuple[object, ...], QPixmap] | None = None
        self.hide()

    def set_inks(self, inks: Inks) -> None:
        """Take another theme."""
        self._inks = inks
        self.fit()

    def set_picture(self, picture: MapPicture | None) -> None:
        """Explain another map, or none."""
        self._picture = picture
        self.setVisible(picture is not None)
        if picture is not None:
            kind = "DC" if picture.is_direct else "RMS"
            self.setAccessibleName(
                f"Legend: {kind} flux density from {significant(picture.low)} to "
                f"{significant(picture.high)} {picture.unit}"
            )
            told = [
                f"Resultant {kind} flux density in {picture.unit}; the range of "
                "colours is set in the Field menu",
                # Names in full: beside the bar they may be shortened.
                *(f"{significant(v)} {picture.unit}: {n}" for v, n in picture.marks),
            ]
            lines = "<br>".join(escape(line) for line in told)
            self.setToolTip(f"<qt>{lines}</qt>")
            self.fit()

    def sizeHint(self) -> QSize:
        metrics = self._inks.bold_metrics
        words = [*self._head(), *self._foot()]
        values = [text for _, text, _ in self._ticks()]
        beside = max((metrics.horizontalAdvance(text) for text in values), default=0.0)
        width = max(
            [_BAR_WIDTH + 3 * STEP + beside]
            + [self._inks.bold_metrics.horizontalAdvance(text) for text in words]
        )
        height = _BAR_HEIGHT + (len(words) + 0.5) * metrics.height() + 2 * STEP
        return QSize(round(width) + 4 * STEP, round(height) + 4 * STEP)

    def paintEvent(self, event: QPaintEvent) -> None:
        if self._picture is None:
            return
        state = self._state(self._picture)
        if self._painted is None or self._painted[0] != state:
            # Whatever moves below it asks for it again.
            pixels = QPixmap(self.size() * self.devicePixelRatioF())
            pixels.setDevicePixelRatio(self.devicePixelRatioF())
            pixels.fill(Qt.GlobalColor.transparent)
            self._paint(pixels)
            self._painted = (state, pixels)
        painter = QPainter(self)
        painter.drawPixmap(0, 0, self._painted[1])
        painter.end()

    def _state(self, picture: MapPicture) -> tuple[object, ...]:
        """All that the legend looks like depends on."""
        parent = self.parentWidget()
        return (
            picture.unit, picture.low, picture.high, picture.scale, picture.marks,
            picture.is_stale, picture.is_coarse, self._inks, self.size(),
            self.devicePixelRatioF(), parent is not None and parent.width() < _NARROW,
        )  # fmt: skip

    def _paint(self, pixels: QPixmap) -> None:
        inks, theme = self._inks, self._inks.theme
        painter = QPainter(pixels)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(theme.hairline), 1.0))
        painter.setBrush(shade(theme.paper, 0.93))
        painter.drawRoundedRect(
            QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5), 4, 4
        )
        line = inks.small_metrics.height()
        x, y = 2.0 * STEP, 2.0 * STEP
        for index, text in enumerate(self._head()):
            painter.setFont(inks.bold if index == 0 else inks.small)
            painter.setPen(QColor(theme.text))
            painter.drawText(QPointF(x, y + inks.small_metrics.ascent()), text)
            y += line
        y += STEP + 0.25 * line
        self._draw_bar(painter, x, y)
        y += _BAR_HEIGHT + STEP + 0.25 * line
        painter.setFont(inks.small)
        painter.setPen(QColor(theme.muted))
        for text in self._foot():
            painter.drawText(QPointF(x, y + inks.small_metrics.ascent()), text)
            y += line
        painter.end()

    def _draw_bar(self, painter: QPainter, x: float, y: float) -> None:
        ground = QColor(self._inks.theme.paper)
        paper = (ground.red(), ground.green(), ground.blue())
        stale = self._picture is not None and self._picture.is_stale
        ramp = rgb_ramp()
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
        for row in range(_BAR_HEIGHT):
            r, g, b = (float(v) for v in ramp[round(255 * (1 - row / _BAR_HEIGHT))])
            if stale:
                r = g = b = 0.2126 * r + 0.7152 * g + 0.0722 * b
            mixed = [
                round(OPACITY * c + (1 - OPACITY) * p)
                for c, p in zip((r, g, b), paper, strict=True)
            ]
            painter.fillRect(QRectF(x, y + row, _BAR_WIDTH, 1.0), QColor(*mixed))
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = self._inks.theme
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(theme.line), 1.0))
        painter.drawRect(QRectF(x, y, _BAR_WIDTH, _BAR_HEIGHT))
        metrics = self._inks.small_metrics
        for part, text, is_bold in self._ticks():
            down = y + _BAR_HEIGHT * (1.0 - part)
            painter.setPen(QPen(QColor(theme.text), 2.4 if is_bold else 1.0))
            start = x if is_bold else x + _BAR_WIDTH
            painter.drawLine(QPointF(start, down), QPointF(x + _BAR_WIDTH + 4, down))
            painter.setFont(self._inks.bold if is_bold else self._inks.small)
            at = QPointF(x + _BAR_WIDTH + 2 * STEP, down + 0.36 * metrics.ascent())
            painter.drawText(at, text)

    def _cut(self, name: str) -> str:
        """A name as long as there is room; its end tells the frequency."""
        parent = self.parentWidget()
        if parent is not None and parent.width() < _NARROW:
            return ""
        return self._inks.bold_metrics.elidedText(
            name, Qt.TextElideMode.ElideMiddle, _NAME_WIDTH
        )

    def _ticks(self) -> list[tuple[float, str, bool]]:
        """Part of the bar, text, and whether it is a reference level; none too near."""
        picture = self._picture
        if picture is None:
            return []
        wanted = [
            (value, f"{significant(value)} {self._cut(name)}".strip(), True)
            for value, name in picture.marks
            if picture.low <= value <= picture.high
        ]
        values = round_values(picture.low, picture.high)
        decades = [v for v in values if f"{v:e}".startswith("1.0")]
        if picture.scale == "linear":
            step = (picture.high - picture.low) / 5
            decades = [picture.low + i * step for i in range(6)]
        ends = [picture.low, picture.high]
        for value in (*ends, *decades, *values):
            wanted.append((value, f"{value:g}", False))
        found: list[tuple[float, str, bool]] = []
        for value, text, is_bold in wanted:
            part = float(position(value, picture.low, picture.high, picture.scale))
            if not 0.0 <= part <= 1.0:
                continue
            if all(abs(part - other) * _BAR_HEIGHT >= _APART for other, *_ in found):
                found.append((part, text, is_bold))
        return found

    def _head(self) -> list[str]:
        picture = self._picture
        if picture is None:
            return []
        words = [f"B, {'DC' if picture.is_direct else 'RMS'} [{picture.unit}]"]
        if picture.is_stale:
            words.append("out of date")
        elif picture.is_coarse:
            words.append("coarse preview")
        return words

    def _foot(self) -> list[str]:
        picture = self._picture
        if picture is None:
            return []
        return [f"under {picture.low:g} {picture.unit}", "not coloured"]

    def fit(self) -> None:
        """Be as large as the words need in this view."""
        self.resize(self.sizeHint())
        self.update()
