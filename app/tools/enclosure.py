"""Enclosure: where nobody can stand; closed, from the floor to 2.10 m above it."""

from __future__ import annotations

from collections.abc import Sequence

from app.tools.outline_tool import OutlineTool
from engine.edits import added
from engine.items import Point2, Point3
from engine.new_places import new_enclosure


class EnclosureTool(OutlineTool):
    """Draws enclosures."""

    name, key, icon = "Enclosure", "3", "enclosure"

    def _make(self, corners: Sequence[Point2], first: Point3) -> None:
        layout = self._document.committed
        enclosure = new_enclosure(layout, corners, self._storey)
        self._commit(
            f"Draw {enclosure.title}", added(layout, enclosure), (enclosure.id,)
        )
