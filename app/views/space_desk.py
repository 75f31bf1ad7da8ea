"""The maps of the view in space: which planes, typed or dragged, and what they show."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtCore import QObject, Signal

from app.document import Document
from app.map_request import height_figures, height_text, zone_of
from app.messages import Messages
from app.panels.panel import decimal_sign
from app.space_maps import SpaceMap, SpaceMaps
from app.view_state import ViewState
from app.views.space_camera import SpaceCamera, along_axis
from app.views.space_letters import SpaceDimension, SpaceHandle, handle_at
from app.views.space_move import caught_way
from app.views.space_planes import (
    LINE,
    PROFILE,
    SpacePlanes,
    profile_called,
    typed_heights,
    typed_line,
    typed_place,
    zone_heights,
)
from engine.errors import UserError

Levels = tuple[float, float]


class SpaceDesk(QObject):
    """Planes of maps; dragged by their handles like any grip.

    Signals
    -------
    changed()
        Other planes are wanted.
    ready(), problem(sentence)
        Other maps are there; why there are none.
    """

    changed = Signal()
    ready = Signal()
    problem = Signal(str)

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages,
        levels: Callable[[], Levels],
    ) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._messages, self._levels = messages, levels
        self.planes = SpacePlanes()
        self.shown: tuple[SpaceMap, ...] = ()
        self._before: SpacePlanes | None = None
        self._held: SpaceHandle | None = None
        self._gripped = 0.0
        self.maps = SpaceMaps(document, view_state)
        self.maps.ready.connect(self._show)
        self.maps.problem.connect(self.problem)

    # -- what is wanted -----------------------------------------------------------

    def want(self) -> None:
        """Ask for the maps on the planes as they are now."""
        chosen = self._selected_profile()
        if self.planes.upright == PROFILE and chosen:
            self.planes = replace(self.planes, profile=chosen)
        try:
            places = self.planes.places(
                self._document.layout, self._view_state.look, self._levels()
            )
        except UserError as error:
            self.problem.emit(str(error))
        else:
            self.maps.want(places, is_coarse=self._held is not None)

    def reset(self) -> None:
        """Another layout: as its plan shows."""
        self.planes = SpacePlanes()

    def take(self, planes: SpacePlanes) -> None:
        """Show other planes."""
        self.planes = planes
        self.changed.emit()

    def type_heights(self, text: str) -> None:
        """Take typed heights of level maps; none: as the plan shows."""
        with self._messages.shown():
            heights = typed_heights(text, self._unit, decimal_sign())
            self.take(replace(self.planes, heights=heights))

    def all_heights(self) -> None:
        """A map at every height of the zone."""
        layout, look = self._document.layout, self._view_state.look
        self.take(replace(self.planes, heights=zone_heights(layout, look)))

    def choose_upright(self, upright: str) -> None:
        """Show an upright map, or none."""
        profile = self._selected_profile() or self.planes.profile
        self.take(replace(self.planes, upright=upright, at=None, profile=profile))

    def _selected_profile(self) -> str:
        """Id of the profile that alone is selected; empty otherwise."""
        layout, chosen = self._document.layout, self._document.selection
        found = [profile.id for profile in layout.profiles if profile.id in chosen]
        return found[0] if len(found) == 1 == len(chosen) else ""

    def type_place(self, text: str) -> None:
        """Take the typed place of the upright map."""
        with self._messages.shown():
            if self.planes.upright == PROFILE:
                layout = self._document.layout
                self._document.select({profile_called(layout, text)})
            elif self.planes.upright == LINE:
                line = typed_line(text, self._unit, decimal_sign())
                self.take(replace(self.planes, line=line))
            else:
                at = typed_place(text, self._unit, decimal_sign())
                self.take(replace(self.planes, at=at))

    # -- dragging -----------------------------------------------------------------

    @property
    def held(self) -> str:
        """Name of the handle that is dragged."""
        return self._held.name if self._held is not None else ""

    def handles(self) -> tuple[SpaceHandle, ...]:
        """What can be dragged now."""
        layout, look = self._document.layout, self._view_state.look
        return self.planes.handles(layout, look, self._levels())

    def grip(self, camera: SpaceCamera, x: float, y: float) -> bool:
        """Grip the handle under a pixel; False where there is none that can move."""
        handle = handle_at(camera, self.handles(), x, y)
        if handle is None:
            return False
        gripped = along_axis(camera, handle.at, handle.axis, x, y)
        if gripped is None:
            return False
        self._held, self._gripped, self._before = handle, gripped, self.planes
        return True

    def drag(self, camera: SpaceCamera, x: float, y: float, *, freely: bool) -> None:
        """Shift the gripped plane towards a pixel."""
        held = self._held
        if held is None or self._before is None:
            return
        found = along_axis(camera, held.at, held.axis, x, y)
        if found is None:
            return
        start = sum(a * b for a, b in zip(held.at, held.axis, strict=True))
        to = start + found - self._gripped
        if not freely:
            to = caught_way(to, camera.metres_per_pixel)
        layout, look = self._document.layout, self._view_state.look
        self.take(self._before.dragged(held.name, to, layout, look))

    def end(self) -> None:
        """Leave the plane where it is; a single level one is the plan's height too."""
        heights, self._held = self.planes.heights, None
        before = self._before
        if (before is not None and before.heights is None and heights is not None
                and len(heights) == 1):  # fmt: skip
            self.planes = replace(self.planes, heights=None)
            self._view_state.set(height=heights[0])
        self.changed.emit()

    def cancel(self) -> None:
        """Put the plane back."""
        self._held = None
        if self._before is not None:
            self.take(self._before)

    def dimension(self) -> SpaceDimension | None:
        """Where the dragged plane is, from the datum or from where it was."""
        held = self._held
        if held is None:
            return None
        now = next((h for h in self.handles() if h.name == held.name), held)
        layout = self._document.layout
        if held.name == "upright":
            text = self.planes.upright_text(layout)
        else:
            zone = zone_of(layout, self._view_state.look.zone)
            text = height_text(layout, now.at[2], zone)
        return SpaceDimension(held.at, now.at, text)

    # -- what is shown ------------------------------------------------------------

    def words(self) -> str:
        """Where the shown maps are, for the caption."""
        layout = self._document.layout
        unit = layout.settings.length_unit
        levels = [m.place.plane.origin[2] for m in self.shown if m.place.is_level]
        parts = []
        if levels:
            figures = ", ".join(height_figures(z, unit) for z in levels)
            parts.append(f"z {figures} {unit}")
        # A profile of several legs has a map on each.
        parts += dict.fromkeys(m.place.name for m in self.shown if not m.place.is_level)
        if any(m.is_bound for m in self.shown):
            parts.append("upper bound")
        return " · ".join(parts)

    def _show(self, maps: tuple[SpaceMap, ...]) -> None:
        self.shown = maps
        self.ready.emit()

    @property
    def _unit(self) -> str:
        return self._document.layout.settings.length_unit
