"""The drawing: shows the layout from one side and gives the active tool its pointer.

The picture under the tool's overlay is kept as pixels until something in it changes,
so that following the pointer costs next to nothing.
"""

from __future__ import annotations

from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import (
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPixmap,
    QResizeEvent,
    QShowEvent,
)
from PySide6.QtWidgets import QWidget

from app.document import EVERYTHING, Document
from app.map_picture import MapPicture
from app.theme import LIGHT, Theme
from app.tools.catch import NO_TARGETS, Catch, catch, held
from app.tools.tool import Overlay, Pointer, Tool
from app.view_state import Look, ViewState
from app.views.camera import Camera
from app.views.cut_mark import draw_cut
from app.views.drawing_keys import ARROWS, is_entry
from app.views.drawing_scene import DrawingScene
from app.views.inks import Inks
from app.views.legend import Legend
from app.views.overlay_painter import draw_catch, draw_overlay
from app.views.picking import cursor_of, picked
from app.views.picture_painter import PicturePainter
from app.views.projection import PLAN, Sight
from app.views.scale_bar import grid_step
from app.views.zoomable_view import ZoomableView

#: Most of the width that is kept free for the legend.
_MOST_BESIDE = 0.35

#: How near is near enough. [px]
PICK_REACH = 5.0
CATCH_REACH = 8.0


class DrawingView(ZoomableView):
    """The layout on plan or from a side.

    Signals
    -------
    pointer_moved(x, y)
        Place in the view's plane under the pointer, after the catch. [m]
    pointer_left()
    entry_wanted(text)
        Tab, a letter, or a number while something is under way: it belongs into the
        entry strip.
    """

    pointer_moved = Signal(float, float)
    pointer_left = Signal()
    entry_wanted = Signal(str)

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        theme: Theme = LIGHT,
        sight: Sight = PLAN,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._view_state = view_state
        self._sight = sight
        self._inks = Inks(theme, 1.0, self.devicePixelRatioF())
        self._scene = DrawingScene(sight, self._inks, self)
        self.setScene(self._scene)
        self._picture = PicturePainter(self._scene, sight, self._inks)
        self._pixels: QPixmap | None = None
        self._tool: Tool | None = None
        self._pointer: Pointer | None = None
        self._cut = ("", False)
        self.marks: dict[str, Overlay] = {}
        self.catches_places = True
        #: Of several views the tool speaks of the plane of the one last pointed at.
        self.has_pointer = True
        self.holds_directions = False
        self._is_behind = self._wants_all = False
        self._legend = Legend(self._inks, self.viewport())
        self._prepare_widget()
        self.camera_changed.connect(self._on_camera_changed)
        document.changed.connect(self._on_changed)
        document.selection_changed.connect(self._scene.select)
        view_state.changed.connect(self._on_look_changed)
        self._scene.touched.connect(self.refresh)
        self._scene.show_layout(document.layout, view_state.look)
        self.set_scale(60.0)

    def _prepare_widget(self) -> None:
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMinimumSize(280, 180)
        name = "Plan" if self._sight is PLAN else f"Elevation {self._sight.name}"
        self.setAccessibleName(name)
        self.setAccessibleDescription(
            "The drawing. Arrow keys move the selection by the grid, Home shows all."
        )

    # -- what is shown ----------------------------------------------------------

    @property
    def sight(self) -> Sight:
        return self._sight

    @property
    def drawing(self) -> DrawingScene:
        """The items shown."""
        return self._scene

    @property
    def tool(self) -> Tool | None:
        return self._tool

    @property
    def grid(self) -> float:
        """Step of the visible grid. [m]"""
        return grid_step(self.camera().scale, self._unit)

    @property
    def _unit(self) -> str:
        return self._document.layout.settings.length_unit

    def set_tool(self, tool: Tool | None) -> None:
        """Make a tool the active one; the caller activates it."""
        if self._tool is not None:
            self._tool.overlay_changed.disconnect(self._on_overlay_changed)
        self._tool = tool
        if tool is not None:
            tool.overlay_changed.connect(self._on_overlay_changed)
        self.viewport().update()

    def set_theme(self, theme: Theme, text_factor: float = 1.0) -> None:
        """Draw in another theme, or with larger text."""
        self._inks = Inks(theme, text_factor, self.devicePixelRatioF())
        self._picture.inks = self._inks
        self._legend.set_inks(self._inks)
        self._place_legend()
        self._scene.set_inks(self._inks)

    def set_map(self, picture: MapPicture | None) -> None:
        """Show another map under the drawing, or none."""
        was_shown = self._legend_shows
        self._scene.map_layer.set_picture(picture)
        self._legend.set_picture(picture)
        self._place_legend()
        if self.is_fitted and self._legend_shows != was_shown:
            self.fit()
        self.refresh()

    def set_cut(self, run: str, from_end: bool) -> None:
        """Mark where that run is cut while it is selected; an empty id for none."""
        self._cut = (run, from_end)
        self.viewport().update()

    def set_mark(self, name: str, mark: Overlay | None) -> None:
        """Show a mark of a result over the drawing, or none; the tools' lie above."""
        self.marks.pop(name, None)
        if mark is not None:
            self.marks[name] = mark
        self.viewport().update()

    def refresh(self) -> None:
        """Draw the picture anew."""
        self._pixels = None
        self.viewport().update()

    # -- what is in sight -------------------------------------------------------

    def fit(self) -> None:
        """Show everything that is drawn."""
        beside = self._legend.width() if self._legend_shows else 0
        if beside > _MOST_BESIDE * self.viewport().width():
            # Better under the legend than too small to be read.
            beside = 0
        self.fit_box(self._scene.everything(), beside)

    def _on_camera_changed(self) -> None:
        self._scene.set_scale(self.camera().scale)
        self.refresh()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._place_legend()
        if self.is_fitted:
            self.fit()
        else:
            self.camera_changed.emit()

    def _place_legend(self) -> None:
        self._legend.fit()
        room = self.viewport().size() - self._legend.size()
        self._legend.move(room.width() - 12, room.height() - 12)
        self._legend.setVisible(
            self._scene.map_layer.picture is not None
            and "map" not in self._view_state.look.hidden
        )

    # -- painting ---------------------------------------------------------------

    def paintEvent(self, event: QPaintEvent) -> None:
        ratio = self.viewport().devicePixelRatioF()
        size, held = self.viewport().size(), self._pixels
        camera = self.camera()
        if held is None or held.deviceIndependentSize() != size.toSizeF():
            legend = QRectF(self._legend.geometry()) if self._legend_shows else QRectF()
            self._pixels = QPixmap(size * ratio)
            self._pixels.setDevicePixelRatio(ratio)
            self._picture.paint(self._pixels, camera, self._document.layout, legend)
        painter = QPainter(self.viewport())
        assert self._pixels is not None
        painter.drawPixmap(0, 0, self._pixels)
        self._paint_cut(painter, camera)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for mark in self.marks.values():
            draw_overlay(painter, mark, camera, self._inks)
        if self._tool is not None and self.has_pointer:
            taken = [label.box for label in self._picture.labels]
            draw_overlay(painter, self._tool.overlay(), camera, self._inks, taken)
            if self._pointer is not None and self._tool.catches():
                draw_catch(painter, self._pointer, camera, self._inks, taken)
        painter.end()

    def _paint_cut(self, painter: QPainter, camera: Camera) -> None:
        run, from_end = self._cut
        if self._sight is PLAN and run in self._document.selection:
            item = self._document.layout.by_id().get(run)
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            draw_cut(painter, item, from_end, camera, self._inks)

    @property
    def _legend_shows(self) -> bool:
        return not self._legend.isHidden()

    # -- the pointer ------------------------------------------------------------

    def pointer_at(
        self,
        pixel: QPointF,
        modifiers: Qt.KeyboardModifier,
        under: tuple[str, ...] | None = None,
    ) -> Pointer:
        """What the tool is told of a pixel place; `under` if it is known already."""
        camera = self.camera()
        raw = camera.metres(pixel)
        found = self._caught(raw, camera)
        reach = PICK_REACH / camera.scale
        if under is None:
            under = picked(self._scene, self._picture.labels, raw, pixel, reach)
        return Pointer(
            at=found.at,
            raw=raw,
            caught=found.caught,
            shift=bool(modifiers & Qt.KeyboardModifier.ShiftModifier),
            control=bool(modifiers & Qt.KeyboardModifier.ControlModifier),
            pick=under[0] if under else None,
            beneath=under[1:],
            reach=reach,
            plane=self._sight.name,
        )

    def _caught(self, raw: tuple[float, float], camera: Camera) -> Catch:
        tool = self._tool
        if tool is None or not tool.catches():
            return Catch(raw, "")
        anchor = tool.anchor() if self.holds_directions else None
        if not self.catches_places:
            return Catch(raw if anchor is None else held(raw, anchor), "")
        return catch(
            raw,
            self._scene.targets(tool.moving()) if self._scene else NO_TARGETS,
            CATCH_REACH / camera.scale,
            grid=self.grid,
            anchor=anchor,
        )

    def mousePressEvent(self, event: QMouseEvent) -> None:
        super().mousePressEvent(event)
        if event.button() == Qt.MouseButton.LeftButton and self._tool is not None:
            self._pointer = self.pointer_at(event.position(), event.modifiers())
            self._tool.press(self._pointer)
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        super().mouseMoveEvent(event)
        if self.is_panning:
            return
        # What was taken stays taken: to look again at each step takes time.
        is_held = event.buttons() != Qt.MouseButton.NoButton
        under = self._pointer.under if self._pointer and is_held else None
        self._pointer = self.pointer_at(event.position(), event.modifiers(), under)
        self.pointer_moved.emit(*self._pointer.at)
        if self._tool is not None:
            self._tool.move(self._pointer)
            self.viewport().setCursor(cursor_of(self._tool, self._pointer))
        self.viewport().update()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        super().mouseReleaseEvent(event)
        if event.button() == Qt.MouseButton.LeftButton and self._tool is not None:
            self._pointer = self.pointer_at(event.position(), event.modifiers())
            self._tool.release(self._pointer)
        event.accept()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton and self._tool is not None:
            pointer = self.pointer_at(event.position(), event.modifiers())
            self._tool.double_click(pointer)
        event.accept()

    def viewportEvent(self, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Leave:
            self._pointer = None
            self.viewport().update()
            self.pointer_left.emit()
        return super().viewportEvent(event)

    # -- keys -------------------------------------------------------------------

    def event(self, event: QEvent) -> bool:
        # What is half drawn is not lost to the key of another tool.
        if event.type() == QEvent.Type.ShortcutOverride and is_entry(event, self._tool):
            event.accept()
            return True
        # While a tool awaits a place, Tab leads to where it can be typed.
        if (
            isinstance(event, QKeyEvent)
            and event.type() == QEvent.Type.KeyPress
            and event.key() == Qt.Key.Key_Tab
            and self._tool is not None
            and self._tool.catches()
        ):
            self.entry_wanted.emit("")
            return True
        if event.type() == QEvent.Type.DevicePixelRatioChange:
            self.set_theme(self._inks.theme, self._inks.text_factor)
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        key, tool = Qt.Key(event.key()), self._tool
        if key == Qt.Key.Key_Home:
            self.fit()
        elif key in (Qt.Key.Key_Plus, Qt.Key.Key_Minus):
            self.zoom_step(1.0 if key == Qt.Key.Key_Plus else -1.0)
        elif tool is None:
            event.ignore()
        elif key in ARROWS:
            dx, dy = ARROWS[key]
            tool.nudge(dx * self.grid, dy * self.grid)
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            tool.enter()
        elif key == Qt.Key.Key_Backspace:
            tool.backspace()
        elif key == Qt.Key.Key_Delete:
            tool.delete()
        elif is_entry(event, tool):
            self.entry_wanted.emit(event.text())
        elif key != Qt.Key.Key_Escape or not tool.back():
            event.ignore()

    # -- listening --------------------------------------------------------------

    def _on_changed(self, layout: object, ids: object) -> None:
        self._wants_all = self._wants_all or ids == EVERYTHING
        self._is_behind = True
        if not self.is_put_away:
            self._follow()

    def _follow(self) -> None:
        """Show the layout and the look of now."""
        was_empty = self._scene.is_empty
        self._scene.show_layout(self._document.layout, self._view_state.look)
        self._scene.set_scale(self.camera().scale)
        if self._wants_all or (was_empty and self.is_fitted):
            self.fit()
        self._wants_all = self._is_behind = False

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        if self._is_behind:
            self._follow()

    def _on_look_changed(self, look: Look) -> None:
        self._is_behind = self._is_behind or look.drawn != self._scene.look.drawn
        if self._is_behind and not self.is_put_away:
            self._follow()
        self._place_legend()

    def _on_overlay_changed(self) -> None:
        self.viewport().update()
