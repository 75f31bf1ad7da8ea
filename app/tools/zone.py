"""Zone: where people or equipment are; drawn, or a room filled by one click."""

from __future__ import annotations

from collections.abc import Sequence

from app import commands
from app.tools.outline_tool import POLYGON, RECTANGLE, OutlineTool
from app.tools.tool import Pointer
from engine.edits import added
from engine.errors import UserError
from engine.items import Point2, Point3
from engine.new_places import new_zone, room_at

FILL = "fill a room"


class ZoneTool(OutlineTool):
    """Draws zones; their category is left to be chosen."""

    name, key, icon = "Zone", "6", "zone"
    _shapes = (RECTANGLE, POLYGON, FILL)

    def press(self, pointer: Pointer) -> None:
        if self.shape != FILL:
            super().press(pointer)
            return
        if self._refuses(pointer):
            return
        with self._shown():
            room = room_at(self._document.committed, pointer.raw, self._storey)
            if room is None:
                raise UserError("There is no room at that place: click inside one.")
            commands.fill_room(self._document, room.id)

    def _make(self, corners: Sequence[Point2], first: Point3) -> None:
        layout = self._document.committed
        zone = new_zone(layout, corners, self._storey)
        self._commit(f"Draw {zone.title}", added(layout, zone), (zone.id,))

    def _next_hint(self) -> str:
        if self.shape == FILL:
            return "Click inside a room to fill it with a zone, 0.20 m from its walls."
        return super()._next_hint()
