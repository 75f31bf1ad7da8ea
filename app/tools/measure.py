"""Measure: distance, its parts along the axes, and direction between two places."""

from __future__ import annotations

from math import dist

from app.tools.drawing_tool import SAME, DrawingTool, direction_text
from app.tools.tool import NOTHING, Dimension, Entry, Overlay, Point, Pointer
from engine.motions import neat


class MeasureTool(DrawingTool):
    """Shows a distance; edits nothing."""

    name, key, icon = "Measure", "9", "measure"
    on_elevations = True

    def __init__(self, *args: object, **kwargs: object) -> None:
        super().__init__(*args, **kwargs)  # type: ignore[arg-type]
        self._start: Point | None = None
        self._end: Point | None = None
        self._fixed = False
        self._plane = "plan"
        self._say()

    def activate(self) -> None:
        self._say()

    def deactivate(self) -> None:
        self._clear()

    def anchor(self) -> Point | None:
        return None if self._fixed else self._start

    def takes_numbers(self) -> bool:
        return self.anchor() is not None

    def press(self, pointer: Pointer) -> None:
        if self._start is None or self._fixed or pointer.plane != self._plane:
            self._start, self._end, self._fixed = pointer.at, None, False
            self._plane = pointer.plane
        elif dist(self._start, pointer.at) > SAME:
            self._end, self._fixed = pointer.at, True
        self._say()

    def move(self, pointer: Pointer) -> None:
        is_open = self._start is not None and not self._fixed
        if is_open and pointer.plane == self._plane:
            self._end = pointer.at
            self.overlay_changed.emit()

    def release(self, pointer: Pointer) -> None:
        """Dragging from place to place measures too."""
        if self._start is None or self._fixed:
            return
        if dist(self._start, pointer.at) > 2 * pointer.reach:
            self._end, self._fixed = pointer.at, True
            self._say()

    def backspace(self) -> None:
        self.back()

    def back(self) -> bool:
        if self._start is None:
            return False
        self._clear()
        return True

    def entry(self, entry: Entry) -> None:
        if entry.kind == "size" or entry.x is None or entry.y is None:
            self._messages.refuse("Enter a place or a way with x and y.")
            return
        at = (entry.x, entry.y)
        if entry.is_relative:
            if self._start is None:
                self._messages.refuse("There is no place yet to measure from.")
                return
            at = (neat(self._start[0] + at[0]), neat(self._start[1] + at[1]))
        self.press(Pointer(at=at, raw=at, plane=self._plane))

    def text(self) -> str:
        """What is measured, in words; empty for nothing."""
        a, b = self._start, self._end
        if a is None or b is None or dist(a, b) <= SAME:
            return ""
        across = "x" if self._plane != "looking +x" else "y"
        upwards = "y" if self._plane == "plan" else "z"
        dx, dy = b[0] - a[0], b[1] - a[1]
        if self._plane == "looking +x":
            dx = -dx
        return (
            f"{self._length_text(dist(a, b))} · {direction_text(a, b)} · "
            f"d{across} {self._length_text(dx)} · d{upwards} {self._length_text(dy)}"
        )

    def overlay(self) -> Overlay:
        if self._start is None:
            return NOTHING
        if self._end is None or not self.text():
            return Overlay(points=(self._start,))
        return Overlay(
            points=(self._start, self._end),
            dimensions=(Dimension(self._start, self._end, self.text()),),
        )

    def _clear(self) -> None:
        self._start = self._end = None
        self._fixed = False
        self._say()

    def _say(self) -> None:
        if self._start is None:
            self.set_hint("Click the place to measure from.")
        elif not self._fixed:
            self.set_hint("Click the place to measure to; Esc starts over.")
        else:
            self.set_hint(f"{self.text()}. Click to measure again.")
        self.overlay_changed.emit()
