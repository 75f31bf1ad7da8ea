"""How a section is drawn: paper with its grid, conductors, letters, scale bar."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import (
    QBrush,
    QColor,
    QFont,
    QFontMetricsF,
    QPainter,
    QPainterPath,
    QPen,
    QTransform,
)

from app.panels.panel import decimal_sign
from app.theme import BODY, SMALL, STEP, Theme, contrast
from app.views.inks import TWO_COLOURED, YELLOW, conductor_colour
from engine.errors import UserError
from engine.formations import label_of
from engine.runs import Bar, FreeSection, Multicore, Round, Slot
from engine.sections import single_conductors
from engine.typed_numbers import number_text
from engine.units import LENGTH_UNITS

#: Fine grid lines nearer than this are left out. [logical pixels]
_FINEST = 5.0

#: From one stronger line of the grid to the next, by unit. [m]
STRONG = {"mm": 0.05, "in": 0.0254}

#: Lengths that a scale bar may have, by unit. [mm], [in]
_BARS = {
    "mm": (1, 2, 5, 10, 20, 50, 100, 200, 500, 1000, 2000, 5000, 10_000),
    "in": (0.125, 0.25, 0.5, 1, 2, 5, 10, 20, 50, 100, 200),
}


class SectionPainter:
    """Draws one picture of a section with a painter, at `scale` pixels per metre.

    Lengths are written in `unit`, "mm" or "in".
    """

    def __init__(
        self, painter: QPainter, theme: Theme, scale: float, unit: str = "mm"
    ) -> None:
        self._painter = painter
        self._theme = theme
        self._scale = scale
        self._unit = unit
        self._font = QFont(painter.font())
        #: Boxes of letters that stand beside their conductors. [px]
        self._letters: list[QRectF] = []

    def paper(self, area: QRectF, middle: QPointF, grid: float) -> None:
        """The paper with grid lines through the route; stronger at 50 mm, or inches."""
        painter = self._painter
        painter.fillRect(area, QColor(self._theme.paper))
        strong = STRONG[self._unit]
        for step, alpha in ((grid, 0.35), (strong, 0.9)):
            pixels = step * self._scale
            if pixels < _FINEST:
                continue
            colour = QColor(self._theme.hairline)
            colour.setAlphaF(alpha)
            painter.setPen(QPen(colour, 1))
            x = area.left() + (middle.x() - area.left()) % pixels
            while x < area.right():
                painter.drawLine(QPointF(x, area.top()), QPointF(x, area.bottom()))
                x += pixels
            y = area.top() + (middle.y() - area.top()) % pixels
            while y < area.bottom():
                painter.drawLine(QPointF(area.left(), y), QPointF(area.right(), y))
                y += pixels

    def route(self, at: QPointF) -> None:
        """A cross where the route runs."""
        self._painter.setPen(QPen(QColor(self._theme.muted), 1.5))
        arm = 2.0 * STEP
        self._painter.drawLine(at - QPointF(arm, 0), at + QPointF(arm, 0))
        self._painter.drawLine(at - QPointF(0, arm), at + QPointF(0, arm))

    def slot(self, slot: Slot, at: QPointF, flip: QTransform, is_chosen: bool) -> None:
        """One conductor, with its cores where it has some, and its letter."""
        path = flip.map(self._outline(slot))
        path.translate(at)
        if isinstance(slot.shape, Multicore):
            self._sheath(path, is_chosen)
            if not self._cores(slot, at, flip):
                box = path.boundingRect()
                self._letter(QRectF(box.topLeft(), box.topRight()), label_of(slot))
            return
        label = label_of(slot)
        self._conductor(path, label, is_chosen)
        self._letter(path.boundingRect(), label)

    def scale_bar(self, area: QRectF) -> None:
        """A length to compare with, in the lower left corner."""
        wanted = min(area.width() / 4, 160.0)
        pixels = self._scale * LENGTH_UNITS[self._unit]
        bars = _BARS[self._unit]
        length = max((bar for bar in bars if bar * pixels <= wanted), default=bars[0])
        start = QPointF(area.left() + 4 * STEP, area.bottom() - 4 * STEP)
        end = start + QPointF(length * pixels, 0)
        self._painter.setPen(QPen(QColor(self._theme.line), 1.5))
        self._painter.drawLine(start, end)
        for point in (start, end):
            self._painter.drawLine(point - QPointF(0, STEP), point + QPointF(0, STEP))
        text = bar_text(length, self._unit)
        self._text(start + QPointF(0, -2 * STEP), text, SMALL)

    def place(self, slot: Slot, at: QPointF) -> None:
        """The coordinates of a conductor that is being dragged."""
        text = place_text(slot, self._unit)
        self._text(at + QPointF(5 * STEP, -5 * STEP), text, BODY)

    def _outline(self, slot: Slot) -> QPainterPath:
        """The shape about its middle in pixels, v upwards."""
        path = QPainterPath()
        shape = slot.shape
        if isinstance(shape, Bar):
            width, height = shape.width * self._scale, shape.thickness * self._scale
            path.addRect(QRectF(-width / 2, -height / 2, width, height))
            return QTransform().rotate(shape.turn).map(path)
        across = shape.diameter if isinstance(shape, Round) else shape.outside_diameter
        radius = across / 2 * self._scale
        path.addEllipse(QPointF(0, 0), radius, radius)
        return path

    def _conductor(self, path: QPainterPath, label: str, is_chosen: bool) -> None:
        painter = self._painter
        colour = QColor(conductor_colour(label, self._theme))
        painter.fillPath(path, QBrush(colour))
        if label.partition(" ")[0] in TWO_COLOURED:
            painter.save()
            painter.setClipPath(path, Qt.ClipOperation.IntersectClip)
            box = path.boundingRect()
            width = box.width() / 5
            for i in (1, 3):
                stripe = QRectF(box.left() + i * width, box.top(), width, box.height())
                painter.fillRect(stripe, QColor(YELLOW))
            painter.restore()
        self._edge(path, is_chosen)

    def _edge(self, path: QPainterPath, is_chosen: bool) -> None:
        painter = self._painter
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(self._theme.line), 1.2))
        painter.drawPath(path)
        if is_chosen:
            box = path.boundingRect().adjusted(-5, -5, 5, 5)
            painter.setPen(QPen(QColor(self._theme.accent), 2.5))
            painter.drawRoundedRect(box, 4, 4)

    def _sheath(self, path: QPainterPath, is_chosen: bool) -> None:
        self._painter.fillPath(path, QBrush(QColor(self._theme.panel)))
        self._edge(path, is_chosen)

    def _cores(self, slot: Slot, at: QPointF, flip: QTransform) -> bool:
        """Draw the cores; whether their letters fit into them."""
        fit = True
        try:
            cores = single_conductors(FreeSection(slots=(slot,)))
        except UserError:
            cores = ()
        for core in cores:
            away = flip.map(QPointF(core.u - slot.u, core.v - slot.v)) * self._scale
            path = flip.map(self._outline(core))
            path.translate(at + away)
            label = core.name.rpartition("/")[2].partition(".")[0]
            self._conductor(path, label, False)
            fit = fit and self._fits(path.boundingRect(), label)
            if fit:
                self._letter(path.boundingRect(), label)
        return fit and bool(cores)

    def _fits(self, box: QRectF, label: str) -> bool:
        self._font.setPixelSize(BODY)
        self._font.setBold(True)
        metrics = QFontMetricsF(self._font)
        wide = metrics.horizontalAdvance(label) + 4
        return box.width() >= wide and box.height() >= metrics.height()

    def _letter(self, box: QRectF, label: str) -> None:
        """The letters inside where they fit, else above the conductor."""
        self._font.setPixelSize(BODY)
        self._font.setBold(True)
        metrics = QFontMetricsF(self._font)
        width = metrics.horizontalAdvance(label)
        self._painter.setFont(self._font)
        middle = box.center()
        fits = self._fits(box, label)
        if fits and label.partition(" ")[0] not in TWO_COLOURED:
            fill = conductor_colour(label, self._theme)
            inks = ("#ffffff", "#101214")
            ink = max(inks, key=lambda ink: contrast(ink, fill))
            self._painter.setPen(QColor(ink))
            at = QPointF(middle.x() - width / 2, middle.y() + metrics.capHeight() / 2)
            self._painter.drawText(at, label)
            return
        at = QPointF(middle.x() - width / 2, middle.y() + metrics.capHeight() / 2)
        if not fits:
            at = self._free_place(box, label, metrics)
        self._patch(at, label, metrics)

    def _free_place(self, box: QRectF, label: str, metrics: QFontMetricsF) -> QPointF:
        """Above or below a conductor, off the letters of its neighbours."""
        left = box.center().x() - metrics.horizontalAdvance(label) / 2
        line = metrics.capHeight() + STEP
        above = box.top() - 2 * STEP
        below = box.bottom() + 2 * STEP + metrics.capHeight()
        baselines = (above, below, above - line, below + line, above - 2 * line)
        places = [QPointF(left, baseline) for baseline in baselines]
        text = metrics.tightBoundingRect(label).adjusted(-2, -1, 2, 1)
        free = (
            at
            for at in places
            if not any(text.translated(at).intersects(b) for b in self._letters)
        )
        at = next(free, places[0])
        self._letters.append(text.translated(at))
        return at

    def _text(self, at: QPointF, text: str, size: int) -> None:
        self._font.setPixelSize(size)
        self._font.setBold(False)
        self._painter.setFont(self._font)
        self._patch(at, text, QFontMetricsF(self._font))

    def _patch(self, at: QPointF, text: str, metrics: QFontMetricsF) -> None:
        """Text on a patch of paper, so that lines beneath do not disturb it."""
        box = metrics.tightBoundingRect(text).translated(at).adjusted(-2, -2, 2, 2)
        patch = QColor(self._theme.paper)
        patch.setAlphaF(0.85)
        self._painter.fillRect(box, patch)
        self._painter.setPen(QColor(self._theme.text))
        self._painter.drawText(at, text)


def bar_text(length: float, unit: str) -> str:
    """What stands at a scale bar of that length in "mm" or "in"; long ones in m."""
    if unit == "mm" and length >= 1000:
        return f"{number_text(length / 1000, decimal_sign())} m"
    return f"{number_text(length, decimal_sign())} {unit}"


def place_text(slot: Slot, unit: str) -> str:
    """Where a conductor is, as it is dragged: "u −150  v 50 mm"."""
    size, places = LENGTH_UNITS[unit], 2 if unit == "mm" else 3
    u, v = (
        number_text(round(x / size, places) + 0.0, decimal_sign()).replace("-", "−")
        for x in (slot.u, slot.v)
    )
    return f"u {u}  v {v} {unit}"
