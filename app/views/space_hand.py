"""Mouse and keys on the picture in space: turn, shift, zoom, click, and drag a grip."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Protocol

from PySide6.QtCore import QEvent, QObject, QPointF, Qt, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent, QWheelEvent
from PySide6.QtWidgets import QWidget

from app.views.space_camera import SpaceCamera
from engine.errors import UserError

#: The pointer moves this far before a press becomes a drag. [px]
_STILL = 4.0
#: A step of the wheel, and of the keys + and −, brings so much nearer.
_NEARER = 1.2
#: An arrow key turns or shifts as much as a drag this long. [px]
_KEY_STEP = 24.0

_ARROWS = {
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Up: (0.0, -1.0),
    Qt.Key.Key_Down: (0.0, 1.0),
}


class Grip(Protocol):
    """What a drag moves instead of the camera."""

    def drag(self, camera: SpaceCamera, x: float, y: float, *, freely: bool) -> None:
        """Show it moved towards a pixel."""

    def end(self) -> None:
        """Leave it there."""

    def cancel(self) -> None:
        """Put it back."""


class SpaceHand(QObject):
    """Turns events of a widget into cameras, clicks and drags.

    Parameters
    ----------
    widget : QWidget
        That shows the picture.
    camera : callable
        The camera in use.
    grip : callable
        Gets the pixel of a press, gives what is gripped there or None.

    Signals
    -------
    camera_wanted(SpaceCamera)
    clicked(x, y, adds)
        Without a drag. [px]
    dragged()
        What is gripped was moved, left, or put back.
    fit_wanted()
    refused(sentence)
        What is gripped could not be left where it is.
    """

    camera_wanted = Signal(object)
    clicked = Signal(float, float, bool)
    dragged = Signal()
    fit_wanted = Signal()
    refused = Signal(str)

    def __init__(
        self,
        widget: QWidget,
        camera: Callable[[], SpaceCamera],
        grip: Callable[[float, float], Grip | None],
    ) -> None:
        super().__init__(widget)
        self._camera, self._grips = camera, grip
        self._grip: Grip | None = None
        self._start: QPointF | None = None
        self._last = QPointF()
        self._is_drag = self._shifts = False
        widget.installEventFilter(self)

    @property
    def holds(self) -> Grip | None:
        """What is gripped."""
        return self._grip

    def let_go(self) -> bool:
        """Put back what is gripped; False when nothing is."""
        grip, self._grip = self._grip, None
        if grip is None:
            return False
        self._start = None
        grip.cancel()
        self.dragged.emit()
        return True

    def eventFilter(self, _watched: QObject, event: QEvent) -> bool:
        kind = event.type()
        if isinstance(event, QWheelEvent):
            self._wheel(event)
        elif kind == QEvent.Type.KeyPress and isinstance(event, QKeyEvent):
            return self._key(event)
        elif isinstance(event, QMouseEvent):
            if kind == QEvent.Type.MouseMove:
                self._move(event)
            elif kind == QEvent.Type.MouseButtonRelease:
                self._release(event)
            else:
                self._press(event)
        else:
            return False
        return True

    def _press(self, event: QMouseEvent) -> None:
        if self._start is not None:
            return
        self._start = self._last = event.position()
        left = event.button() == Qt.MouseButton.LeftButton
        shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        self._is_drag, self._shifts = False, shift or not left
        if left and not shift:
            self._grip = self._grips(self._start.x(), self._start.y())

    def _move(self, event: QMouseEvent) -> None:
        at = event.position()
        if self._start is None:
            return
        if not self._is_drag:
            if math.dist(_pair(at), _pair(self._start)) <= _STILL:
                return
            self._is_drag = True
        step = at - self._last
        self._last = at
        if self._grip is not None:
            freely = bool(event.modifiers() & Qt.KeyboardModifier.AltModifier)
            self._grip.drag(self._camera(), at.x(), at.y(), freely=freely)
            self.dragged.emit()
        elif self._shifts:
            self.camera_wanted.emit(self._camera().shifted(step.x(), step.y()))
        else:
            self.camera_wanted.emit(self._camera().turned(step.x(), step.y()))

    def _release(self, event: QMouseEvent) -> None:
        start, self._start = self._start, None
        grip, self._grip = self._grip, None
        if start is None:
            return
        if grip is not None:
            self._leave(grip)
        if not self._is_drag and event.button() == Qt.MouseButton.LeftButton:
            shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
            self.clicked.emit(start.x(), start.y(), shift)

    def _leave(self, grip: Grip) -> None:
        try:
            (grip.end if self._is_drag else grip.cancel)()
        except UserError as error:
            self.refused.emit(str(error))
        self.dragged.emit()

    def _wheel(self, event: QWheelEvent) -> None:
        turns = event.angleDelta().y() / 120.0
        at = event.position()
        if turns:
            nearer = self._camera().nearer(_NEARER**turns, at.x(), at.y())
            self.camera_wanted.emit(nearer)

    def _key(self, event: QKeyEvent) -> bool:
        camera, key = self._camera(), Qt.Key(event.key())
        if key in _ARROWS:
            right, down = (_KEY_STEP * part for part in _ARROWS[key])
            shift = event.modifiers() & Qt.KeyboardModifier.ShiftModifier
            moved = camera.shifted if shift else camera.turned
            self.camera_wanted.emit(moved(-right, -down))
        elif key in (Qt.Key.Key_Plus, Qt.Key.Key_Equal, Qt.Key.Key_Minus):
            factor = 1.0 / _NEARER if key == Qt.Key.Key_Minus else _NEARER
            middle = (0.5 * camera.width, 0.5 * camera.height)
            self.camera_wanted.emit(camera.nearer(factor, *middle))
        elif key == Qt.Key.Key_Home:
            self.fit_wanted.emit()
        elif key == Qt.Key.Key_Escape:
            return self.let_go()
        else:
            return False
        return True


def _pair(at: QPointF) -> tuple[float, float]:
    return (at.x(), at.y())
