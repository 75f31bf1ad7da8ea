"""The drawing seen on the upright plane of a drawn line, which may be another soon."""

from __future__ import annotations

from app.views.drawing_view import DrawingView
from app.views.projection import Sight


class AlongView(DrawingView):
    """A view whose sight changes with the line."""

    def set_sight(self, sight: Sight) -> None:
        """Look from another side; its map comes anew."""
        if sight == self._sight:
            return
        self._sight = sight
        self._picture.set_sight(sight)
        self._scene.set_sight(sight)
        self._scene.map_layer.set_picture(None)
        self._on_changed(None, None)
