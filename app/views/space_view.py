"""The layout in space: seen from anywhere, picked, moved along axes, with its maps.

Where OpenGL is missing the page says so in a sentence and touches nothing of it.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
from PySide6.QtCore import QEvent, Qt, QTimer
from PySide6.QtGui import QImage, QKeyEvent, QPainter, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QVBoxLayout, QWidget

from app.caption_bar import case_title, quantity
from app.chosen_file import ask_where_to_write
from app.document import EVERYTHING, Document
from app.figures import png, with_caption
from app.map_picture import MapPicture
from app.messages import Messages
from app.page import Page
from app.panels.panel import Words, decimal_sign
from app.theme import LIGHT, STEP, Theme, theme_for
from app.variant_acts import with_shown
from app.view_state import ViewState
from app.views.inks import Inks
from app.views.legend import Legend
from app.views.opengl import opengl_obstacle
from app.views.space_camera import SpaceCamera
from app.views.space_controls import SpaceControls
from app.views.space_desk import SpaceDesk
from app.views.space_drawn import outline
from app.views.space_hand import Grip, SpaceHand
from app.views.space_items import SpaceItems
from app.views.space_letters import (
    paint_axes,
    paint_dimension,
    paint_handles,
    paint_letters,
    paint_way,
)
from app.views.space_move import AXES, AxisMove
from app.views.space_planes import heights_text
from engine.errors import UserError
from engine.typed_lengths import typed_length
from engine.units import in_unit
from engine.written_file import write_file

_HINT = (
    "Drag turns, the right button shifts, the wheel zooms. Click selects, Shift adds. "
    "Drag a disc to shift a map."
)


def opengl_canvas() -> QWidget:
    """The picture; only where `opengl_obstacle` names none."""
    from app.views.space_canvas import SpaceCanvas

    return SpaceCanvas()


class SpaceView(Page):
    """Follows document and view; shows the scene in OpenGL.

    Parameters
    ----------
    document : Document
    view_state : ViewState
    messages : Messages
    canvas : callable
        Makes the widget that draws, once it is needed.
    obstacle : callable
        Says why there can be none; empty when there can.
    """

    followed = frozenset({"zone", "case", "variant", "layers"})

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages,
        *,
        canvas: Callable[[], Any] = opengl_canvas,
        obstacle: Callable[[], str] = opengl_obstacle,
    ) -> None:
        super().__init__("Space")
        self._document, self._view_state = document, view_state
        self._messages = messages
        self._make_canvas, self._obstacle = canvas, obstacle
        self.canvas: Any = None
        self.camera = SpaceCamera()
        self.items = SpaceItems()
        self.mover = AxisMove(document)
        self.desk: SpaceDesk | None = None
        self._is_fitted = self._is_exporting = False
        self.inks = Inks(LIGHT)
        self.reason, self.hint = Words(style="plain"), Words(_HINT)
        self.controls = SpaceControls()
        self.legend = Legend(self.inks)
        self._place = QWidget()
        box = QVBoxLayout(self._place)
        box.setContentsMargins(0, 0, 0, 0)
        self.column.setSpacing(STEP)
        self.column.addWidget(self.controls)
        self.column.addWidget(self.reason)
        self.column.addWidget(self._place, 1)
        self.column.addWidget(self.hint)
        self.reason.hide()
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._follow)
        self._connect()

    # -- following ----------------------------------------------------------------

    def _connect(self) -> None:
        controls = self.controls
        controls.sight_chosen.connect(self.look)
        controls.fit_asked.connect(self.fit)
        controls.export_asked.connect(self.export)
        controls.axis_chosen.connect(self.choose_axis)
        controls.way_typed.connect(self._on_way)
        self._document.changed.connect(self._on_changed)
        self._document.selection_changed.connect(self._later)
        self._view_state.changed.connect(self._later)

    def _on_changed(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            self._is_fitted = False
            if self.desk is not None:
                self.desk.reset()
        self._later()

    def _later(self, _: object = None) -> None:
        if self.isVisible():
            self._soon.start()

    @property
    def is_idle(self) -> bool:
        """All that is shown belongs to the layout."""
        return not self._soon.isActive() and (
            self.desk is None or self.desk.maps.is_idle
        )

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._soon.stop()
        if self.desk is not None:
            self.desk.maps.close_worker()

    def showEvent(self, event: QShowEvent) -> None:
        self._start()
        self._soon.start()
        super().showEvent(event)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "_soon"):
            self._later()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._later()

    def _start(self) -> None:
        """Make the picture when it is first to be seen, where that can be."""
        if self.canvas is not None:
            return
        sentence = self._obstacle()
        if sentence:
            self._tell(sentence)
            for widget in (self.controls, self.hint):
                widget.hide()
            return
        self.canvas = self._make_canvas()
        self.canvas.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.canvas.setAccessibleName("The layout in space")
        self.canvas.setMinimumSize(80 * STEP, 60 * STEP)
        self.canvas.paint_over = self._paint_over
        box = self._place.layout()
        assert box is not None
        box.addWidget(self.canvas)
        self.legend.setParent(self.canvas)
        self.hand = SpaceHand(self.canvas, lambda: self.camera, self._grip)
        self.hand.camera_wanted.connect(self.set_camera)
        self.hand.clicked.connect(self._on_click)
        self.hand.dragged.connect(self._later)
        self.hand.fit_wanted.connect(self.fit)
        self.hand.refused.connect(self._messages.warn)
        self.setFocusProxy(self.canvas)
        self.desk = desk = SpaceDesk(
            self._document, self._view_state, self._messages, lambda: self.items.levels
        )
        desk.changed.connect(self._later)
        desk.ready.connect(self._show_maps)
        desk.problem.connect(self._tell)
        controls = self.controls
        controls.heights_typed.connect(desk.type_heights)
        controls.all_heights_asked.connect(desk.all_heights)
        controls.upright_chosen.connect(desk.choose_upright)
        controls.place_typed.connect(desk.type_place)

    def _follow(self) -> None:
        """Bring picture, maps and fields in step with document and view."""
        if self.canvas is None or self.desk is None:
            return
        theme = theme_for(self.palette())
        if theme is not self.inks.theme:
            self._dress(theme)
        self._draw(theme)
        if not self._is_fitted:
            self._is_fitted = True
            self.fit()
        if self.items.problem:
            self._tell(self.items.problem)
        self.desk.want()
        layout, look = self._document.layout, self._view_state.look
        decimal, planes = decimal_sign(), self.desk.planes
        self.controls.show_planes(
            heights_text(planes, layout, look, decimal),
            planes.upright,
            planes.field_text(layout, decimal),
        )
        self._place_legend()

    def _dress(self, theme: Theme) -> None:
        self.inks = Inks(theme)
        self.legend.set_inks(self.inks)

    def _draw(self, theme: Theme) -> None:
        document, look = self._document, self._view_state.look
        self.items.show(document.layout, look, document.selection, theme)
        self.canvas.show_theme(theme)
        self.canvas.reach = self.items.reach(self.camera.target)
        self.canvas.show_drawn(self.items.drawn)

    def _show_maps(self) -> None:
        assert self.desk is not None
        self.canvas.show_maps(self.desk.shown, self.inks.theme)
        self._place_legend()

    def _place_legend(self) -> None:
        settings = self._document.layout.settings
        unit = settings.flux_density_unit
        maps = () if self.desk is None else self.desk.shown
        picture = MapPicture(
            QImage(), (0.0, 0.0, 1.0, 1.0), unit=unit,
            low=in_unit(settings.map_low, unit), high=in_unit(settings.map_high, unit),
            scale=settings.map_scale, is_direct=any(m.is_direct for m in maps),
        )  # fmt: skip
        has_map = bool(maps)
        self.legend.set_picture(picture if has_map else None)
        self.legend.move(
            self.canvas.width() - self.legend.width() - 2 * STEP,
            self.canvas.height() - self.legend.height() - 2 * STEP,
        )

    def _tell(self, sentence: str) -> None:
        self.reason.setText(sentence)
        self.reason.setVisible(bool(sentence))

    # -- looking ------------------------------------------------------------------

    def set_camera(self, camera: SpaceCamera) -> None:
        """Look from somewhere else."""
        self.camera = camera.sized(self.canvas.width(), self.canvas.height())
        self.canvas.reach = self.items.reach(self.camera.target)
        self.canvas.look(self.camera)

    def look(self, sight: str) -> None:
        """Look in one of the directions of `SIGHTS`, at everything."""
        self.camera = self.camera.looking(sight)
        self.fit()

    def fit(self) -> None:
        """Show everything."""
        if self.canvas is not None:
            size = (self.canvas.width(), self.canvas.height())
            shown = self.desk.shown if self.desk is not None else ()
            maps = [outline(one.place.plane) for one in shown]
            points = np.concatenate([self.items.outline, *maps])
            self.set_camera(self.camera.sized(*size).fitted(points))

    def _paint_over(self, painter: QPainter) -> None:
        camera = self.camera.sized(self.canvas.width(), self.canvas.height())
        look = self._view_state.look
        if "labels" not in look.hidden:
            paint_letters(painter, camera, self.items.drawn.letters, self.inks)
        paint_axes(painter, camera, self.inks)
        middle = self.mover.middle
        if self.mover.axis and middle is not None and not self._is_exporting:
            paint_way(painter, camera, middle, AXES[self.mover.axis], self.inks)
        desk = self.desk
        if desk is not None and not self._is_exporting:
            paint_handles(painter, camera, desk.handles(), desk.held, self.inks)
            for dimension in (self.mover.dimension(), desk.dimension()):
                if dimension is not None:
                    paint_dimension(painter, camera, dimension, self.inks)

    # -- selecting and moving -------------------------------------------------------

    def choose_axis(self, axis: str) -> None:
        """Let drags of the selection move it along an axis; empty: turn the view."""
        self.mover.axis = axis
        self.controls.show_axis(axis)
        self._later()

    def _grip(self, x: float, y: float) -> Grip | None:
        if self.desk is not None and self.desk.grip(self.camera, x, y):
            return self.desk
        if not self.mover.axis:
            return None
        found = self.items.pick(self.camera, x, y)
        if found is None:
            return None
        if found not in self._document.selection:
            self._document.select({found})
        try:
            self.mover.begin(self.camera, x, y)
        except UserError as error:
            self._messages.warn(str(error))
            return None
        return self.mover

    def _on_click(self, x: float, y: float, adds: bool) -> None:
        found = self.items.pick(self.camera, x, y)
        picked = frozenset(() if found is None else (found,))
        before = self._document.selection
        # Picking what is selected already, with Shift, takes it out again.
        self._document.select(before ^ picked if adds else picked)

    def _on_way(self, text: str) -> None:
        unit = self._document.layout.settings.length_unit
        with self._messages.shown():
            self.mover.by(typed_length(text, unit, decimal_sign()))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        axis = {Qt.Key.Key_X: "x", Qt.Key.Key_Y: "y", Qt.Key.Key_Z: "vertical"}.get(
            Qt.Key(event.key())
        )
        if axis is not None and not event.modifiers():
            self.choose_axis("" if axis == self.mover.axis else axis)
        elif event.key() == Qt.Key.Key_Escape and self.mover.axis:
            self.choose_axis("")
        else:
            super().keyPressEvent(event)

    # -- exporting ------------------------------------------------------------------

    def caption(self) -> str:
        """What the picture shows, in one line."""
        where = self.desk.words() if self.desk is not None else ""
        layout, chosen = self._document.layout, self._view_state.look.case
        case, shown = case_title(layout, chosen), quantity(layout, chosen)
        parts = [f"{shown} · {where}" if where else "Layout in space"]
        return with_shown(self._document, " · ".join([*parts, f"case {case}"]))

    def export(self) -> None:
        """Ask where to, and write the picture."""
        path = ask_where_to_write(
            self, "Export the picture", "space.png", "Picture (*.png)"
        )
        if path is not None:
            with self._messages.shown():
                self.write(path)
                self._messages.inform(f"{path} was written.")

    def write(self, path: Path) -> None:
        """Write the picture as PNG with its caption, light as on paper.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        if self.canvas is None:
            raise UserError(self._obstacle())
        before, self._is_exporting = self.inks.theme, True
        try:
            self._dress(LIGHT)
            self._draw(LIGHT)
            picture = self.canvas.image()
            if self.legend.isVisible():
                painter = QPainter(picture)
                self.legend.render(
                    painter, self.legend.pos(), renderFlags=QWidget.RenderFlag(0)
                )
                painter.end()
        finally:
            self._is_exporting = False
            self._dress(before)
            self._draw(before)
        write_file(path, png(with_caption(picture, self.caption(), LIGHT)))
