"""Areas drawn as a rectangle by two corners, or as a polygon by its vertices."""

from __future__ import annotations

from collections.abc import Sequence
from math import dist

from app.tools.drawing_tool import Choice, Points
from app.tools.tool import Dimension, Entry, Overlay, Point, Pointer
from engine.errors import UserError
from engine.items import Point2, Point3
from engine.motions import neat
from engine.new_places import rectangle

RECTANGLE, POLYGON = "rectangle", "polygon"


class OutlineTool(Points):
    """A tool whose places are the corners of an area.

    Subclasses override `_make(corners)`.
    """

    _shapes: tuple[str, ...] = (RECTANGLE, POLYGON)

    def choices(self) -> tuple[Choice, ...]:
        return (self._choice("shape", self._shapes),)

    @property
    def shape(self) -> str:
        """ "rectangle" or "polygon"."""
        return self.choices()[0].value

    @property
    def _fewest(self) -> int:  # type: ignore[override]
        return 2 if self.shape == RECTANGLE else 3

    @property
    def _most(self) -> int | None:  # type: ignore[override]
        return 2 if self.shape == RECTANGLE else None

    @property
    def _closed(self) -> bool:  # type: ignore[override]
        return self.shape == POLYGON

    def anchor(self) -> Point | None:
        """A rectangle's diagonal is free; the legs of a polygon can be held."""
        return None if self.shape == RECTANGLE else super().anchor()

    def press(self, pointer: Pointer) -> None:
        first = self._points[0][:2] if self._points else None
        closes = len(self._points) > 2 and self.shape == POLYGON
        if closes and first is not None and dist(first, pointer.at) < pointer.reach:
            self.enter()
            return
        super().press(pointer)

    def release(self, pointer: Pointer) -> None:
        """A rectangle may be dragged from corner to corner."""
        if self.shape != RECTANGLE or len(self._points) != 1:
            return
        if dist(self._points[0][:2], pointer.at) > 2 * pointer.reach:
            self._place_at(pointer.at, pointer)

    def double_click(self, pointer: Pointer) -> None:
        if self.shape == POLYGON:
            super().double_click(pointer)

    def overlay(self) -> Overlay:
        if self.shape != RECTANGLE or not self._points or self._hover is None:
            return super().overlay()
        corners = rectangle(self._points[0][:2], self._hover)
        a, b, c, _ = corners
        return Overlay(
            lines=((*corners, corners[0]),),
            points=(self._points[0][:2],),
            dimensions=(
                Dimension(a, b, self._length_text(b[0] - a[0])),
                Dimension(b, c, self._length_text(c[1] - b[1])),
            ),
        )

    def _take_size(self, entry: Entry) -> None:
        assert entry.size is not None
        if self.shape != RECTANGLE:
            raise UserError("A size makes a rectangle: choose that shape first.")
        if not self._points:
            raise UserError(
                "Place the first corner before its size: click it, or enter “to”."
            )
        x, y, z = self._points[0]
        self._add((neat(x + entry.size[0]), neat(y + entry.size[1]), z))

    def _finish(self) -> None:
        if self.shape == RECTANGLE:
            first, second = self._points
            self._make(rectangle(first[:2], second[:2]), self._points[0])
        else:
            self._make([point[:2] for point in self._points], self._points[0])

    def _make(self, corners: Sequence[Point2], first: Point3) -> None:
        """Commit the area.

        Raises
        ------
        UserError
            When the corners make none.
        """
        raise NotImplementedError

    def _choice_made(self) -> None:
        self._start_over()

    def _next_hint(self) -> str:
        what = self.name.lower()
        if self.shape == RECTANGLE:
            if not self._points:
                return f"Click a corner of the {what}, or drag from corner to corner."
            return "Click the opposite corner, or enter a size; Esc goes one step back."
        if not self._points:
            return f"Click the first corner of the {what}."
        return "Click the next corner; Enter ends, Backspace takes the last one back."

    def _too_few(self) -> str:
        return "An outline needs at least three corners: click further ones."
