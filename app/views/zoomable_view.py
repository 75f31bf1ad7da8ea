"""A view of a plane in metres that is zoomed at the pointer and panned by dragging."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QPoint, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import (
    QInputDevice,
    QMouseEvent,
    QNativeGestureEvent,
    QTransform,
    QWheelEvent,
)
from PySide6.QtWidgets import QFrame, QGraphicsView, QWidget

from app.views.camera import Camera

#: [px/m]
_FARTHEST, _NEAREST = 0.02, 5000.0

#: Around what is fitted. [px]
_MARGIN = 56.0

_ZOOM_STEP = 1.25
_PAN_BUTTONS = (Qt.MouseButton.RightButton, Qt.MouseButton.MiddleButton)


class ZoomableView(QGraphicsView):
    """Wheel and pinch zoom, two fingers and the right or middle button pan.

    Attributes
    ----------
    is_fitted : bool
        Nothing was zoomed or panned since all of the drawing was shown.

    Signals
    -------
    camera_changed()
        Another part of the plane shows, or at another zoom.
    """

    camera_changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.is_fitted = True
        self._pan_from: QPoint | None = None
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setViewportUpdateMode(QGraphicsView.ViewportUpdateMode.NoViewportUpdate)
        self.setTransformationAnchor(QGraphicsView.ViewportAnchor.NoAnchor)
        self.setResizeAnchor(QGraphicsView.ViewportAnchor.AnchorViewCenter)
        self.setMouseTracking(True)
        self.viewport().setMouseTracking(True)

    @property
    def is_panning(self) -> bool:
        """Whether the plane is being dragged."""
        return self._pan_from is not None

    @property
    def is_put_away(self) -> bool:
        """Hidden on purpose, itself or what it stands in: nobody sees it."""
        on_purpose = Qt.WidgetAttribute.WA_WState_ExplicitShowHide
        widget: QWidget | None = self
        while widget is not None:
            if widget.isHidden() and widget.testAttribute(on_purpose):
                return True
            widget = None if widget.isWindow() else widget.parentWidget()
        return False

    def camera(self) -> Camera:
        """Where the view looks."""
        made = self.viewportTransform()
        size = self.viewport().size()
        return Camera(made.m11(), made.dx(), made.dy(), size.width(), size.height())

    def set_scale(self, scale: float) -> None:
        """Zoom about the middle of the view. [px/m]"""
        self.zoom(scale / self.camera().scale, self._middle())

    def fit_box(self, box: QRectF, beside: float = 0.0) -> None:
        """Show a box [m] with a margin, keeping so many pixels free at the right."""
        whole = self.viewport().size()
        margin = min(_MARGIN, 0.08 * min(whole.width(), whole.height()))
        width = max(60.0, whole.width() - 2 * margin - beside)
        height = max(60.0, whole.height() - 2 * margin)
        scale = min(width / max(box.width(), 0.5), height / max(box.height(), 0.5))
        self.set_transform(scale)
        self.centerOn(box.center() + QPointF(0.5 * beside / scale, 0.0))
        self.is_fitted = True
        self.camera_changed.emit()

    def look_at(self, x: float, y: float) -> None:
        """Bring a place into the middle. [m]"""
        self.is_fitted = False
        self.centerOn(x, y)
        self.camera_changed.emit()

    def zoom_step(self, steps: float) -> None:
        """Zoom about the middle by steps of the wheel."""
        self.is_fitted = False
        self.zoom(_ZOOM_STEP**steps, self._middle())

    def zoom(self, factor: float, at: QPointF) -> None:
        """Zoom so that the place under a pixel stays there."""
        place = self.camera().metres(at)
        self.set_transform(self.camera().scale * factor)
        moved = self.camera().pixel(place) - at
        self.pan(round(moved.x()), round(moved.y()))
        self.camera_changed.emit()

    def set_transform(self, scale: float) -> None:
        """Take a scale within what makes sense, wherever that leads. [px/m]"""
        scale = min(max(scale, _FARTHEST), _NEAREST)
        self.setTransform(QTransform(scale, 0.0, 0.0, -scale, 0.0, 0.0))

    def pan(self, dx: int, dy: int) -> None:
        """Let the view look further right and down. [px]"""
        bar = self.horizontalScrollBar()
        bar.setValue(bar.value() + dx)
        bar = self.verticalScrollBar()
        bar.setValue(bar.value() + dy)

    def wheelEvent(self, event: QWheelEvent) -> None:
        is_pad = event.device().type() == QInputDevice.DeviceType.TouchPad
        zooms = not is_pad or event.modifiers() & Qt.KeyboardModifier.ControlModifier
        self.is_fitted = False
        if zooms:
            steps = event.angleDelta().y() / 120.0
            self.zoom(_ZOOM_STEP**steps, event.position())
        else:
            moved = event.pixelDelta() or event.angleDelta()
            self.pan(-moved.x(), -moved.y())
            self.camera_changed.emit()
        event.accept()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() in _PAN_BUTTONS:
            self._pan_from = event.position().toPoint()
            self.viewport().setCursor(Qt.CursorShape.ClosedHandCursor)
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._pan_from is not None:
            here = event.position().toPoint()
            moved, self._pan_from = self._pan_from - here, here
            self.is_fitted = False
            self.pan(moved.x(), moved.y())
            self.camera_changed.emit()
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if event.button() in _PAN_BUTTONS:
            self._pan_from = None
            self.viewport().unsetCursor()
        event.accept()

    def viewportEvent(self, event: QEvent) -> bool:
        if (
            isinstance(event, QNativeGestureEvent)
            and event.gestureType() == Qt.NativeGestureType.ZoomNativeGesture
        ):
            self.is_fitted = False
            self.zoom(1.0 + event.value(), event.position())
            return True
        return super().viewportEvent(event)

    def _middle(self) -> QPointF:
        return QPointF(self.viewport().width() / 2, self.viewport().height() / 2)
