"""Receptor: one click marks a point that matters, 1.00 m above its floor."""

from __future__ import annotations

from app.tools.drawing_tool import Points
from app.tools.tool import Point
from engine.edits import added
from engine.motions import neat
from engine.new_places import new_receptor, room_at

#: Above the floor. [m]
HEIGHT = 1.0


class ReceptorTool(Points):
    """Places receptors; a height typed before the click holds for it."""

    name, key, icon = "Receptor", "7", "receptor"
    _fewest = 1
    _most = 1

    def heading(self) -> str:
        at = self._hover or (0.0, 0.0)
        z = self._height(at) if self._typed_z is None else self._typed_z
        return f"z {self._length_text(z)}"

    def _height(self, at: Point) -> float:
        room = room_at(self._document.committed, at, self._storey)
        return neat((self._floor if room is None else room.floor_level) + HEIGHT)

    def _finish(self) -> None:
        layout = self._document.committed
        receptor = new_receptor(layout, self._points[0])
        self._commit(f"Place {receptor.title}", added(layout, receptor), (receptor.id,))

    def _next_hint(self) -> str:
        return (
            "Click the place that matters, or enter it with its height: “to 1 2 z 1”."
        )
