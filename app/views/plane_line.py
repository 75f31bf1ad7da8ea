"""The upright plane of an elevation as a line on the plan, to be seen and dragged."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QEvent, QObject, QPointF, Qt, Signal
from PySide6.QtGui import QMouseEvent

from app.tools.tool import Overlay, Point
from app.views.drawing_view import DrawingView
from engine.elevation import Upright
from engine.motions import neat
from engine.sight import LOOKING_Y

MARK = "vertical plane"

#: The handles stand this far from the edges, the arrows are so long, and the line is
#: gripped so near. [px]
_EDGE, _ARROW, _REACH = 26.0, 12.0, 6.0

#: The text stands this far beside the handle. [px]
_ASIDE = 90.0


class PlaneLine(QObject):
    """Shows the plane on the plan and moves it with the pointer.

    Signals
    -------
    dragged(float)
        Where the plane is to stand now. [m]
    """

    dragged = Signal(float)

    def __init__(self, plan: DrawingView, may_drag: Callable[[], bool]) -> None:
        """Parameters
        ----------
        plan : DrawingView
        may_drag : callable
            Whether the line can be gripped now, beside its handles.
        """
        super().__init__(plan)
        self._plan, self._may_drag = plan, may_drag
        self._upright: Upright | None = None
        self._text = ""
        self._is_dragging = False
        plan.camera_changed.connect(self._show)
        plan.viewport().installEventFilter(self)

    @property
    def is_shown(self) -> bool:
        return self._upright is not None

    def set_plane(self, upright: Upright | None, text: str = "") -> None:
        """Show a plane, or none."""
        if (upright, text) != (self._upright, self._text):
            self._upright, self._text = upright, text
            self._show()

    # -- drawing ----------------------------------------------------------------

    def handles(self) -> tuple[Point, Point] | None:
        """Where the line can be gripped whatever lies beneath, in the layout. [m]"""
        upright = self._upright
        camera = self._plan.camera()
        if upright is None or upright.sight.is_along_line or camera.width < 4 * _EDGE:
            return None
        if upright.sight is LOOKING_Y:
            y = camera.pixel((0.0, upright.depth)).y()
            ends = QPointF(_EDGE, y), QPointF(camera.width - _EDGE, y)
        else:
            x = camera.pixel((upright.depth, 0.0)).x()
            ends = QPointF(x, camera.height - _EDGE), QPointF(x, _EDGE)
        if not camera.frame.contains(ends[0]):
            return None
        return camera.metres(ends[0]), camera.metres(ends[1])

    def _show(self) -> None:
        upright = self._upright
        if upright is None:
            self._plan.set_mark(MARK, None)
            return
        if upright.sight.is_along_line:
            self._plan.set_mark(MARK, Overlay(lines=self._arrow((0.0, 0.0))))
            return
        ends = self.handles()
        if ends is None:
            self._plan.set_mark(MARK, None)
            return
        lines = tuple(line for end in ends for line in self._arrow(end))
        # At the right or upper end, where the drawing is rarely in the way.
        aside, (x, y) = _ASIDE / self._plan.camera().scale, ends[1]
        is_level = upright.sight is LOOKING_Y
        at = (x - aside, y) if is_level else (x + aside, y - 0.3 * aside)
        self._plan.set_mark(
            MARK,
            Overlay(lines=lines, points=ends, labels=((at, self._text),),
                    dashed=(ends,)),
        )  # fmt: skip

    def _arrow(self, at: Point) -> tuple[tuple[Point, ...], ...]:
        """Which way one looks, from a place of the line; of a drawn one, its start."""
        upright = self._upright
        assert upright is not None
        sight, step = upright.sight, _ARROW / self._plan.camera().scale
        x, y = at
        if sight.is_along_line:
            x, y = sight.origin[0], sight.origin[1]
        dx, dy = (2.0 * step * c for c in sight.into[:2])
        rx, ry = (0.4 * step * c for c in sight.right[:2])
        tip = (x + dx, y + dy)
        back = (x + 0.6 * dx, y + 0.6 * dy)
        wings = ((back[0] - rx, back[1] - ry), tip, (back[0] + rx, back[1] + ry))
        return ((at if not sight.is_along_line else (x, y), tip), wings)

    # -- hands ------------------------------------------------------------------

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if not isinstance(event, QMouseEvent) or self._upright is None:
            return False
        if event.type() == QEvent.Type.MouseButtonPress:
            is_left = event.button() == Qt.MouseButton.LeftButton
            self._is_dragging = is_left and self._grips(event.position())
            return self._is_dragging
        if event.type() == QEvent.Type.MouseMove and not event.buttons():
            if self._grips(event.position()):
                self._plan.viewport().setCursor(self._cursor())
                return True
        elif event.type() == QEvent.Type.MouseMove and self._is_dragging:
            self.dragged.emit(self._depth(event.position()))
            return True
        elif event.type() == QEvent.Type.MouseButtonRelease and self._is_dragging:
            self._is_dragging = False
            return True
        return False

    def _cursor(self) -> Qt.CursorShape:
        assert self._upright is not None
        if self._upright.sight is LOOKING_Y:
            return Qt.CursorShape.SizeVerCursor
        return Qt.CursorShape.SizeHorCursor

    def _grips(self, pixel: QPointF) -> bool:
        ends = self.handles()
        if ends is None:
            return False
        camera = self._plan.camera()
        pixels = [camera.pixel(end) for end in ends]
        if any((pixel - end).manhattanLength() <= 2 * _REACH for end in pixels):
            return True
        level = self._upright is not None and self._upright.sight is LOOKING_Y
        away = pixel.y() - pixels[0].y() if level else pixel.x() - pixels[0].x()
        if abs(away) > _REACH or not self._may_drag():
            return False
        none = Qt.KeyboardModifier.NoModifier
        return self._plan.pointer_at(pixel, none).pick is None

    def _depth(self, pixel: QPointF) -> float:
        assert self._upright is not None
        x, y = self._plan.camera().metres(pixel)
        found = y if self._upright.sight is LOOKING_Y else x
        grid = self._plan.grid
        return neat(round(found / grid) * grid if self._plan.catches_places else found)
