"""Profile: a line along which the field is plotted, at the height that is shown."""

from __future__ import annotations

from app.tools.drawing_tool import Points
from app.tools.tool import Point
from engine.edits import added
from engine.motions import neat
from engine.new_places import new_profile, room_at

#: Above the floor where no height is shown. [m]
HEIGHT = 1.0


class ProfileTool(Points):
    """Draws profiles of two or more vertices."""

    name, key, icon = "Profile", "8", "profile"

    def heading(self) -> str:
        at = self._hover or (0.0, 0.0)
        z = self._points[-1][2] if self._points else self._height(at)
        if self._typed_z is not None:
            z = self._typed_z
        return f"z {self._length_text(z)}"

    def _height(self, at: Point) -> float:
        shown = self._view_state.look.height
        if shown is not None:
            return neat(shown)
        room = room_at(self._document.committed, at, self._storey)
        return neat((self._floor if room is None else room.floor_level) + HEIGHT)

    def _finish(self) -> None:
        layout = self._document.committed
        profile = new_profile(layout, self._points)
        self._commit(f"Draw {profile.title}", added(layout, profile), (profile.id,))

    def _next_hint(self) -> str:
        if not self._points:
            return "Click where the profile begins."
        if len(self._points) == 1:
            return "Click where it ends or bends; Esc goes one step back."
        return "Enter or a double click ends the profile; a click adds a bend."
