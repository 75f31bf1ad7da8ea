"""A section at true scale: conductors with letters and colours, dragged with catch.

The canvas edits nothing: it says what was chosen and where conductors were dragged to.
Looking from the other end mirrors the picture, never the data.
"""

from __future__ import annotations

from math import cos, hypot, radians, sin

from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPixmap,
    QResizeEvent,
    QTransform,
    QWheelEvent,
)
from PySide6.QtWidgets import QWidget

from app.panels.section_painter import SectionPainter
from app.theme import STEP, theme_for
from engine.formations import extent
from engine.runs import Slot

#: Places that a dragged conductor is caught on, by the unit of dimensions. [m]
GRIDS = {"mm": 0.005, "in": 0.00635}

#: Blank around the conductors. [logical pixels]
_MARGIN = 14 * STEP

#: How far the pointer goes before a press becomes a drag. [logical pixels]
_DRAG = 4.0

#: Keys that lead to the next conductor.
_FORWARD = (Qt.Key.Key_Right, Qt.Key.Key_Down)


class SectionCanvas(QWidget):
    """Conductors across a route.

    Signals
    -------
    chosen(names)
        Other conductors are chosen: a frozenset of slot names.
    dragged(places)
        Chosen conductors are being dragged: (u, v) by name. [m]
    dropped()
        The drag ended where it is.
    cancelled()
        The drag was given up.
    nudged(du, dv)
        Arrow keys. [m]
    """

    chosen = Signal(object)
    dragged = Signal(object)
    dropped = Signal()
    cancelled = Signal()
    nudged = Signal(float, float)

    def __init__(self) -> None:
        super().__init__()
        self.setMinimumSize(240, 120)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMouseTracking(True)
        self.setAccessibleName("Section across the run")
        self.catches = True
        self._unit = ""
        self.set_unit("mm")
        self._slots: tuple[Slot, ...] = ()
        self._names: frozenset[str] = frozenset()
        self._sign = 1.0
        self._scale = 1000.0
        self._middle = (0.0, 0.0)
        self._fits = True
        self._press: QPointF | None = None
        self._grabbed = ""
        self._from: dict[str, tuple[float, float]] = {}
        self._is_dragging = False
        self._grid: tuple[object, QPixmap] | None = None

    @property
    def is_dragging(self) -> bool:
        return self._is_dragging

    @property
    def grid(self) -> float:
        """Step of the places that a dragged conductor is caught on. [m]"""
        return GRIDS[self._unit]

    @property
    def grid_text(self) -> str:
        """The step as it is read: "5 mm"."""
        return "5 mm" if self._unit == "mm" else "1/4 in"

    def set_unit(self, unit: str) -> None:
        """Measure in "mm" or "in" from now on."""
        if unit == self._unit:
            return
        self._unit = unit
        self.setToolTip(
            "Click a conductor, Shift adds, Ctrl with arrow keys goes on to the next; "
            f"drag or use the arrow keys to move it in steps of {self.grid_text}; the "
            "wheel zooms, Home fits"
        )
        self.update()

    @property
    def names(self) -> frozenset[str]:
        """The chosen conductors."""
        return self._names

    def show_slots(self, slots: tuple[Slot, ...], *, from_end: bool) -> None:
        """Show conductors; the scale stays while one is dragged."""
        self._slots = slots
        self._sign = -1.0 if from_end else 1.0
        left = self._names & {slot.name for slot in slots}
        if left != self._names:
            self._names = left
            self.chosen.emit(left)
        if self._fits and not self._is_dragging:
            self.fit()
        self.update()

    def choose(self, names: frozenset[str]) -> None:
        """Make conductors the chosen ones."""
        known = names & {slot.name for slot in self._slots}
        if known != self._names:
            self._names = known
            self.setAccessibleDescription(
                f"Chosen: {', '.join(sorted(known)) or 'none'}"
            )
            self.update()
            self.chosen.emit(known)

    def fit(self) -> None:
        """Show all conductors as large as they fit."""
        self._fits = True
        if not self._slots:
            return
        boxes = [(s.u, s.v, *extent(s.shape)) for s in self._slots]
        low_u = min(u - w / 2 for u, _, w, _ in boxes)
        high_u = max(u + w / 2 for u, _, w, _ in boxes)
        low_v = min(v - h / 2 for _, v, _, h in boxes)
        high_v = max(v + h / 2 for _, v, _, h in boxes)
        self._middle = ((low_u + high_u) / 2, (low_v + high_v) / 2)
        margin = min(_MARGIN, self.width() / 8, self.height() / 5)
        wide, high = self.width() - 2 * margin, self.height() - 2 * margin
        self._scale = min(
            wide / max(high_u - low_u, 0.02), high / max(high_v - low_v, 0.02)
        )
        self.update()

    def to_pixels(self, u: float, v: float) -> QPointF:
        """Where a place of the section is drawn."""
        x = self.width() / 2 + self._sign * (u - self._middle[0]) * self._scale
        y = self.height() / 2 - (v - self._middle[1]) * self._scale
        return QPointF(x, y)

    def to_metres(self, at: QPointF) -> tuple[float, float]:
        """The place of the section that is drawn there."""
        u = self._sign * (at.x() - self.width() / 2) / self._scale + self._middle[0]
        v = (self.height() / 2 - at.y()) / self._scale + self._middle[1]
        return u, v

    def slot_at(self, at: QPointF) -> str:
        """Name of the conductor there, or nothing; a few pixels beside still count."""
        u, v = self.to_metres(at)
        reach = 5.0 / self._scale
        for slot in reversed(self._slots):
            if _covers(slot, u, v, 0.0):
                return slot.name
        near = (s for s in self._slots if _covers(s, u, v, reach))
        return next((slot.name for slot in near), "")

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        theme = theme_for(self.palette())
        drawing = SectionPainter(painter, theme, self._scale, self._unit)
        painter.drawPixmap(0, 0, self._paper())
        drawing.route(self.to_pixels(0.0, 0.0))
        flip = QTransform.fromScale(self._sign, -1.0)
        for slot in self._slots:
            at = self.to_pixels(slot.u, slot.v)
            drawing.slot(slot, at, flip, slot.name in self._names)
        drawing.scale_bar(QRectF(self.rect()))
        if self._is_dragging and self._grabbed:
            for slot in self._slots:
                if slot.name == self._grabbed:
                    drawing.place(slot, self.to_pixels(slot.u, slot.v))
        if self.hasFocus():
            painter.setPen(QColor(theme.accent))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5))

    def _paper(self) -> QPixmap:
        """The grid: it takes ten times as long as all conductors and seldom changes."""
        theme, ratio = theme_for(self.palette()), self.devicePixelRatioF()
        middle = self.to_pixels(0.0, 0.0)
        key = (theme.name, ratio, self.size(), self._scale, middle, self.grid)
        if self._grid is None or self._grid[0] != key:
            pixmap = QPixmap(self.size() * ratio)
            pixmap.setDevicePixelRatio(ratio)
            painter = QPainter(pixmap)
            drawing = SectionPainter(painter, theme, self._scale, self._unit)
            drawing.paper(QRectF(self.rect()), middle, self.grid)
            painter.end()
            self._grid = (key, pixmap)
        return self._grid[1]

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        if self._fits:
            self.fit()

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self.update()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton:
            return
        name = self.slot_at(event.position())
        adds = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if not name:
            if not adds:
                self.choose(frozenset())
            return
        if adds:
            self.choose(self._names ^ {name})
        elif name not in self._names:
            self.choose(frozenset({name}))
        self._press, self._grabbed = event.position(), name
        chosen = [slot for slot in self._slots if slot.name in self._names]
        self._from = {slot.name: (slot.u, slot.v) for slot in chosen}

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        over = self.slot_at(event.position())
        shape = Qt.CursorShape.OpenHandCursor if over else Qt.CursorShape.ArrowCursor
        self.setCursor(shape)
        if self._press is None or self._grabbed not in self._from:
            return
        away = event.position() - self._press
        if not self._is_dragging and away.manhattanLength() < _DRAG:
            return
        self._is_dragging = True
        du = self._sign * away.x() / self._scale
        dv = -away.y() / self._scale
        u, v = self._from[self._grabbed]
        free = bool(event.modifiers() & Qt.KeyboardModifier.AltModifier)
        if self.catches and not free:
            grid = self.grid
            du, dv = caught(u + du, grid) - u, caught(v + dv, grid) - v
        self.dragged.emit(
            {name: (neat(a + du), neat(b + dv)) for name, (a, b) in self._from.items()}
        )

    def mouseReleaseEvent(self, _event: QMouseEvent) -> None:
        was_dragging = self._is_dragging
        self._end_drag()
        if was_dragging:
            self.dropped.emit()

    def wheelEvent(self, event: QWheelEvent) -> None:
        factor = 1.2 ** (event.angleDelta().y() / 120)
        before = self.to_metres(event.position())
        self._scale = min(max(self._scale * factor, 50.0), 60_000.0)
        after = self.to_metres(event.position())
        self._middle = (
            self._middle[0] + before[0] - after[0],
            self._middle[1] + before[1] - after[1],
        )
        self._fits = False
        self.update()
        event.accept()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        steps = {
            Qt.Key.Key_Left: (-self._sign, 0.0),
            Qt.Key.Key_Right: (self._sign, 0.0),
            Qt.Key.Key_Up: (0.0, 1.0),
            Qt.Key.Key_Down: (0.0, -1.0),
        }
        step = steps.get(Qt.Key(event.key()))
        control = event.modifiers() & Qt.KeyboardModifier.ControlModifier
        if step is not None and (control or not self._names):
            self._choose_beside(1 if event.key() in _FORWARD else -1, event)
        elif step is not None:
            self.nudged.emit(self.grid * step[0], self.grid * step[1])
        elif event.key() == Qt.Key.Key_Escape and self._is_dragging:
            self._end_drag()
            self.cancelled.emit()
        elif event.key() == Qt.Key.Key_Escape and self._names:
            self.choose(frozenset())
        elif event.key() == Qt.Key.Key_Home:
            self.fit()
        elif event.matches(QKeySequence.StandardKey.SelectAll):
            self.choose(frozenset(slot.name for slot in self._slots))
        else:
            super().keyPressEvent(event)

    def _choose_beside(self, step: int, event: QKeyEvent) -> None:
        """Choose the conductor beside the chosen ones, as they are seen."""
        seen = sorted(self._slots, key=lambda s: (self._sign * s.u, -s.v))
        names = [slot.name for slot in seen]
        if not names:
            return
        places = [i for i, name in enumerate(names) if name in self._names]
        at = (max(places) if step > 0 else min(places)) + step if places else 0
        chosen = frozenset({names[at % len(names)]})
        adds = event.modifiers() & Qt.KeyboardModifier.ShiftModifier
        self.choose(self._names | chosen if adds else chosen)

    def _end_drag(self) -> None:
        self._press, self._grabbed, self._from = None, "", {}
        self._is_dragging = False
        self.update()


def caught(value: float, grid: float) -> float:
    """The nearest place of a grid. [m]"""
    return neat(round(value / grid) * grid)


def neat(value: float) -> float:
    """To a hundredth of a millimetre, and no negative zero. [m]"""
    return round(value, 5) + 0.0


def _covers(slot: Slot, u: float, v: float, reach: float) -> bool:
    """Whether a place lies in a conductor, or that near to it."""
    turn = radians(getattr(slot.shape, "turn", 0.0))
    du, dv = u - slot.u, v - slot.v
    along = du * cos(turn) + dv * sin(turn)
    across = -du * sin(turn) + dv * cos(turn)
    width = getattr(slot.shape, "width", None)
    if width is not None:
        half = getattr(slot.shape, "thickness", 0.0) / 2
        return abs(along) <= width / 2 + reach and abs(across) <= half + reach
    return hypot(du, dv) <= extent(slot.shape)[0] / 2 + reach
