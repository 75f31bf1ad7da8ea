"""The drawing's place: the plan, and the elevations beside it or instead of it."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from PySide6.QtCore import QPointF, Qt, Signal
from PySide6.QtWidgets import QSplitter, QVBoxLayout, QWidget

from app.document import Document
from app.map_picture import MapPicture
from app.theme import Theme
from app.tools.tool import Overlay, Tool
from app.view_state import ViewState
from app.views.drawing_view import DrawingView
from app.views.projection import LOOKING_X, LOOKING_Y, PLAN, Sight, to_layout, to_view
from engine.exchange.backing import View
from engine.items import Point3

#: Names of the views as the View menu says them.
VIEWS = {"Plan": PLAN, "Looking +y": LOOKING_Y, "Looking +x": LOOKING_X}


PLANES: dict[str, View] = {
    "Plan": "plan", "Looking +y": "looking +y", "Looking +x": "looking +x",
}  # fmt: skip


class Drawings(QWidget):
    """Plan and elevations of one layout.

    Signals
    -------
    area_changed(rect, pixels)
        What of the plan shows: (x0, y0, x1, y1) in metres, and on how many pixels.
    pointed(x, y, z)
        The pointer is there; z is None on the plan. [m]
    pointer_left()
    entry_wanted(text)
        What was typed on the drawing and belongs into the entry strip.
    """

    area_changed = Signal(object, object)
    pointed = Signal(float, float, object)
    pointer_left = Signal()
    entry_wanted = Signal(str)

    def __init__(self, document: Document, view_state: ViewState, theme: Theme) -> None:
        super().__init__()
        self._split = QSplitter(Qt.Orientation.Horizontal)
        self._split.setChildrenCollapsible(False)
        self.views: dict[str, DrawingView] = {}
        for name, sight in VIEWS.items():
            view = DrawingView(document, view_state, theme, sight)
            view.pointer_left.connect(self.pointer_left)
            view.entry_wanted.connect(self.entry_wanted)
            view.pointer_moved.connect(
                lambda x, y, shown=name: self._point(shown, x, y)
            )
            self._split.addWidget(view)
            self.views[name] = view
        self.plan = self.views["Plan"]
        self.plan.camera_changed.connect(self._tell_area)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(self._split)
        self._shown = "Plan"
        self._is_wide = False
        self._arrange()

    @property
    def shown(self) -> str:
        """Name of the view in front."""
        return self._shown

    @property
    def plane(self) -> View:
        """The plane of the view in front, as backing drawings name it."""
        return PLANES[self._shown]

    def show_view(self, name: str) -> None:
        """Bring a view to the front."""
        self._shown = name
        self._arrange()

    def set_wide(self, wide: bool) -> None:
        """With room for two, the plan and an elevation stand side by side."""
        if wide != self._is_wide:
            self._is_wide = wide
            self._arrange()

    def set_tool(self, tool: Tool | None) -> None:
        for view in self.views.values():
            view.set_tool(tool)

    def set_theme(self, theme: Theme) -> None:
        for view in self.views.values():
            view.set_theme(theme)

    def set_holds(self, holds: bool) -> None:
        for view in self.views.values():
            view.holds_directions = holds

    def set_catches(self, catches: bool) -> None:
        for view in self.views.values():
            view.catches_places = catches

    def set_map(self, picture: MapPicture) -> None:
        self.plan.set_map(picture)

    def set_marks(self, name: str, mark: Callable[[Sight], Overlay | None]) -> None:
        """Show a mark of a result on every view, as it is seen there."""
        for view in self.views.values():
            view.set_mark(name, mark(view.sight))

    def set_notes(self, notes: Mapping[str, str]) -> None:
        """Write something beside the names of receptors, by their ids."""
        for view in self.views.values():
            view.drawing.set_notes(notes)

    def set_cut(self, run: str, from_end: bool) -> None:
        """Mark on the plan where that run is cut."""
        self.plan.set_cut(run, from_end)

    def take_keyboard(self) -> None:
        """Let the view in front have the keys."""
        self.views[self._shown].setFocus()

    def fit(self) -> None:
        """Show everything in every view."""
        for view in self.views.values():
            view.fit()

    def look_at(self, at: Point3) -> None:
        """Bring a place into the middle of the views."""
        for view in self.views.values():
            view.look_at(*to_view(view.sight, at))

    def _arrange(self) -> None:
        beside = "Looking +y" if self._shown == "Plan" else self._shown
        for name, view in self.views.items():
            both = self._is_wide and name in ("Plan", beside)
            view.setVisible(name == self._shown or both)
        self._tell_area()

    def _point(self, name: str, x: float, y: float) -> None:
        view = self.views[name]
        if name == "Plan":
            self.pointed.emit(x, y, None)
            return
        camera = self.plan.camera()
        middle = camera.metres(QPointF(camera.width / 2, camera.height / 2))
        place = to_layout(view.sight, (x, y), (middle[0], middle[1], 0.0))
        self.pointed.emit(*place)

    def _tell_area(self) -> None:
        camera = self.plan.camera()
        if not self.plan.isVisible() or camera.width < 2:
            return
        seen = camera.visible
        rect = (seen.left(), seen.top(), seen.right(), seen.bottom())
        self.area_changed.emit(rect, (round(camera.width), round(camera.height)))
