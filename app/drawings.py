"""The drawing's place: the plan, and the elevations beside it or instead of it."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QSplitter, QVBoxLayout, QWidget

from app.document import EVERYTHING, Document
from app.elevation_map import ElevationMap
from app.elevation_plane import (
    ALONG,
    ELEVATIONS,
    PLAN_VIEW,
    drawn_lines,
    line_of,
    plane_text,
    upright_of,
)
from app.linked_pictures import LinkedPictures
from app.map_picture import MapPicture
from app.map_request import heights_of
from app.plane_places import PlanePlaces
from app.theme import Theme
from app.tools.look import LookTool
from app.tools.measure import MeasureTool
from app.tools.select import SelectTool
from app.tools.tool import Overlay, Tool
from app.view_state import ViewState
from app.views.along_view import AlongView
from app.views.drawing_view import DrawingView
from app.views.elevation_strip import ElevationStrip
from app.views.projection import PLAN, Sight, to_view
from engine.exchange.backing import View
from engine.items import Point3

#: Names of the views that are always there, as the View menu says them.
VIEWS = {PLAN_VIEW: PLAN, **ELEVATIONS}

#: What stands beside the plan where there is room for two.
_BESIDE = "Looking +y"


PLANES: dict[str, View] = {
    PLAN_VIEW: "plan", "Looking +y": "looking +y", "Looking +x": "looking +x",
}  # fmt: skip


class Drawings(QWidget):
    """Plan and elevations of one layout; an elevation has its map's upright plane.

    Which view is in front, and where the planes stand, is held by the view state.

    Signals
    -------
    area_changed(rect, pixels)
        What of the plan shows: (x0, y0, x1, y1) in metres, and on how many pixels;
        None for the rectangle while the plan does not show.
    pointed(x, y, z)
        The pointer is there; z is None on the plan. [m]
    pointer_left()
    entry_wanted(text)
        What was typed on the drawing and belongs into the entry strip.
    map_told(MapPicture)
        The view in front shows this map now.
    problem(sentence)
        Why the elevation in front has no map; empty when it has one again.
    hint_changed()
        `hint` is another one.
    """

    area_changed = Signal(object, object)
    pointed = Signal(float, float, object)
    pointer_left = Signal()
    entry_wanted = Signal(str)
    map_told = Signal(object)
    problem = Signal(str)
    hint_changed = Signal()

    def __init__(self, document: Document, view_state: ViewState, theme: Theme) -> None:
        super().__init__()
        self._document, self._view_state, self._theme = document, view_state, theme
        self._tool: Tool | None = None
        self._look_tool = LookTool(document)
        self._is_wide = False
        self._look = view_state.look
        self._split = QSplitter(Qt.Orientation.Horizontal)
        self._split.setChildrenCollapsible(False)
        self.views: dict[str, DrawingView] = {}
        self.strips: dict[str, ElevationStrip] = {}
        self._frames: dict[str, QWidget] = {}
        for name, sight in VIEWS.items():
            self._add(name, sight)
        self.plan = self.views[PLAN_VIEW]
        self.plan.camera_changed.connect(self._tell_area)
        self.planes = PlanePlaces(
            document, view_state, self.plan, lambda: self._may_drag_plane
        )
        self.elevation_map = ElevationMap(document, view_state)
        self.elevation_map.map_ready.connect(self._on_elevation_map)
        self.elevation_map.problem.connect(self._on_problem)
        self.linked_pictures = LinkedPictures(document)
        self.linked_pictures.came.connect(self._on_linked_picture)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(self._split)
        document.changed.connect(self._on_changed)
        view_state.changed.connect(self._on_look)
        self._arrange()

    def _add(self, name: str, sight: Sight) -> None:
        """Build a view; an elevation with the strip above it."""
        kind = AlongView if name == ALONG else DrawingView
        view = kind(self._document, self._view_state, self._theme, sight)
        view.pointer_left.connect(self.pointer_left)
        view.entry_wanted.connect(self.entry_wanted)
        view.pointer_moved.connect(lambda x, y, shown=name: self._point(shown, x, y))
        view.has_pointer = name == PLAN_VIEW
        if name == ALONG:
            # One that is built late begins as the others are.
            view.drawing.select(self._document.selection)
            view.holds_directions = self.plan.holds_directions
            view.catches_places = self.plan.catches_places
        self.views[name] = view
        frame = QWidget()
        box = QVBoxLayout(frame)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        if name != PLAN_VIEW:
            strip = self.strips[name] = ElevationStrip(name)
            strip.depth_typed.connect(lambda z, shown=name: self.planes.put(shown, z))
            strip.stepped.connect(
                lambda way, shown=name: self.planes.step(shown, way, view.grid)
            )
            strip.through_requested.connect(
                lambda shown=name: self.planes.put_through_selection(shown)
            )
            strip.line_chosen.connect(self.look_along)
            view.camera_changed.connect(self._tell_elevation)
            box.addWidget(strip)
        box.addWidget(view, 1)
        self._frames[name] = frame
        self._split.addWidget(frame)

    # -- which view -------------------------------------------------------------

    @property
    def shown(self) -> str:
        """Name of the view in front."""
        if self._look.view == ALONG and not drawn_lines(self._document.layout):
            return PLAN_VIEW
        return self._look.view

    @property
    def front(self) -> DrawingView:
        """The view in front."""
        return self.views[self.shown]

    @property
    def elevation(self) -> str:
        """Name of the elevation that shows, in front or beside the plan; or empty."""
        if self.shown != PLAN_VIEW:
            return self.shown
        return _BESIDE if self._is_wide else ""

    @property
    def plane(self) -> View:
        """The plane of the view in front, as backing drawings name it."""
        return PLANES.get(self.shown, "plan")

    @property
    def picture(self) -> MapPicture | None:
        """The map of the view in front."""
        return self.front.drawing.map_layer.picture

    @property
    def beside(self) -> str:
        """Where the map of the view beside the one in front is; empty without one."""
        layout = self._document.layout
        if not self._is_wide:
            return ""
        if self.shown == PLAN_VIEW:
            return plane_text(layout, self._look, self.elevation)
        return f"plan, {heights_of(layout, self._look)[1]}"

    @property
    def hint(self) -> str:
        """What can be done in the view in front where no tool works; empty where."""
        return self._look_tool.hint if self._looks_only else ""

    @property
    def _looks_only(self) -> bool:
        return self.shown == ALONG and not isinstance(self._tool, MeasureTool)

    def show_view(self, name: str) -> None:
        """Bring a view to the front; the plan where no line is drawn to look along."""
        if name == ALONG and line_of(self._document.layout, self._look) is None:
            name = PLAN_VIEW
        self._view_state.set(view=name)

    def look_along(self, profile: str, leg: int = 0) -> None:
        """Bring the view along a part of a profile to the front."""
        self._view_state.set(view=ALONG, line=profile, leg=leg)

    def set_wide(self, wide: bool) -> None:
        """With room for two, the plan and an elevation stand side by side."""
        if wide != self._is_wide:
            self._is_wide = wide
            self._arrange()

    def set_tool(self, tool: Tool | None) -> None:
        """Work with a tool; along a line only what looks and measures can."""
        self._tool = tool
        draws = tool is not None and not isinstance(tool, SelectTool | MeasureTool)
        if draws and self.shown == ALONG:
            self.show_view(PLAN_VIEW)
        for name in self.views:
            self._hand_tool(name)
        self.hint_changed.emit()

    def _hand_tool(self, name: str) -> None:
        looks = name == ALONG and not isinstance(self._tool, MeasureTool)
        self.views[name].set_tool(self._look_tool if looks else self._tool)

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        for view in self.views.values():
            view.set_theme(theme)

    def set_holds(self, holds: bool) -> None:
        for view in self.views.values():
            view.holds_directions = holds

    def set_catches(self, catches: bool) -> None:
        for view in self.views.values():
            view.catches_places = catches

    def set_map(self, picture: MapPicture) -> None:
        """Show a map on the plan."""
        self.plan.set_map(picture)
        if self.shown == PLAN_VIEW:
            self.map_told.emit(picture)

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
        self.front.setFocus()

    def fit(self) -> None:
        """Show everything in every view."""
        for view in self.views.values():
            view.fit()

    def look_at(self, at: Point3) -> None:
        """Bring a place into the middle of the views, and their planes through it."""
        if self.elevation in ELEVATIONS:
            self.planes.put_through(self.elevation, at)
        for view in self.views.values():
            view.look_at(*to_view(view.sight, at))

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        self._view_state.changed.disconnect(self._on_look)
        self.elevation_map.close()
        self.linked_pictures.close()

    # -- following --------------------------------------------------------------

    def _on_changed(self, _layout: object, ids: object) -> None:
        if ids == EVERYTHING:
            # Planes and lines of another layout mean nothing here.
            self.planes.forget()
        if self.shown == ALONG and not drawn_lines(self._document.layout):
            self.show_view(PLAN_VIEW)
        if ids == EVERYTHING or self.shown == ALONG:
            self._arrange()
        else:
            self._fill_strips()

    def _on_look(self, look: object) -> None:
        before, self._look = self._look, self._view_state.look
        if before.view != self._look.view:
            self.hint_changed.emit()
        self._arrange()

    def _arrange(self) -> None:
        """Show the views that the look asks for, their planes and their strips."""
        elevation = self.elevation
        if elevation == ALONG:
            self._prepare_line()
        elif elevation and self.planes.depth(elevation) is None:
            # The look changes, which arranges the views.
            self.planes.put_through_selection(elevation)
            return
        for name, frame in self._frames.items():
            both = self._is_wide and name in (PLAN_VIEW, elevation)
            frame.setVisible(name == self.shown or both)
        self._fill_strips()
        self._tell_area()
        self._tell_elevation()

    def _fill_strips(self) -> None:
        """Say where the planes stand, above the elevations and on the plan."""
        layout = self._document.layout
        for name, strip in self.strips.items():
            upright = upright_of(layout, self._look, name)
            if name == ALONG:
                strip.show_lines(drawn_lines(layout), line_of(layout, self._look))
            elif upright is not None:
                strip.show_depth(upright.depth, layout.settings.length_unit)
        self.planes.show(self.elevation)

    def _prepare_line(self) -> None:
        """The view along a line looks along the line that is meant."""
        line = line_of(self._document.layout, self._look)
        if line is None:
            return
        view = self.views.get(ALONG)
        if isinstance(view, AlongView):
            view.set_sight(line.sight)
        else:
            self._add(ALONG, line.sight)
            self._hand_tool(ALONG)
            self.views[ALONG].fit()

    @property
    def _may_drag_plane(self) -> bool:
        return isinstance(self._tool, SelectTool) and not self._tool.catches()

    # -- maps and the pointer ---------------------------------------------------

    def _on_elevation_map(self, name: str, picture: MapPicture) -> None:
        if name in self.views:
            self.views[name].set_map(picture)
        if name == self.shown:
            self.map_told.emit(picture)

    def _on_linked_picture(self) -> None:
        """A linked drawing that could not show yet shows now."""
        for view in self.views.values():
            view.drawing.show_layout(self._document.layout, self._look)
            view.drawing.set_scale(view.camera().scale)
            if view.is_fitted:
                view.fit()

    def _on_problem(self, sentence: str) -> None:
        if self.shown != PLAN_VIEW:
            self.problem.emit(sentence)

    def _point(self, name: str, x: float, y: float) -> None:
        for other, view in self.views.items():
            if view.has_pointer != (other == name):
                view.has_pointer = other == name
                view.viewport().update()
        if name == PLAN_VIEW:
            self.pointed.emit(x, y, None)
            return
        upright = upright_of(self._document.layout, self._look, name)
        if upright is not None:
            self.pointed.emit(*upright.places((x, y)).tolist())

    def _tell_area(self) -> None:
        camera = self.plan.camera()
        if self._frames[PLAN_VIEW].isHidden():
            self.area_changed.emit(None, (1, 1))
        elif self.plan.isVisible() and camera.width >= 2:
            self.area_changed.emit(*_seen(self.plan))

    def _tell_elevation(self) -> None:
        name = self.elevation
        if not name:
            self.elevation_map.rest()
        elif self.views[name].isVisible() and self.views[name].width() >= 2:
            self.elevation_map.set_view(name, *_seen(self.views[name]))


def _seen(
    view: DrawingView,
) -> tuple[tuple[float, float, float, float], tuple[int, int]]:
    """What a view shows [m], and on how many pixels."""
    camera = view.camera()
    seen = camera.visible
    rect = (seen.left(), seen.top(), seen.right(), seen.bottom())
    return rect, (round(camera.width), round(camera.height))
