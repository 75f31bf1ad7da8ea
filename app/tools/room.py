"""Room: two corners or a polygon; floor of the storey, ceiling 3.00 m above it."""

from __future__ import annotations

from collections.abc import Sequence

from app.tools.outline_tool import OutlineTool
from engine.edits import added
from engine.items import Point2, Point3
from engine.new_places import new_room


class RoomTool(OutlineTool):
    """Draws rooms."""

    name, key, icon = "Room", "2", "room"

    def _make(self, corners: Sequence[Point2], first: Point3) -> None:
        layout = self._document.committed
        room = new_room(layout, corners, self._storey)
        self._commit(f"Draw {room.title}", added(layout, room), (room.id,))
