"""What every tool answers to: pointer positions in metres, keys, and typed entries.

A tool draws nothing and knows no widget. It says what it would like shown as an
`Overlay`, and the view draws that. All places are in the plane of the view: x and y on
plan, the horizontal axis and z on an elevation.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from PySide6.QtCore import QObject, Signal

Point = tuple[float, float]

Caught = Literal["", "grid", "vertex", "edge", "midpoint"]


@dataclass(frozen=True)
class Pointer:
    """Where the pointer is, in metres.

    Attributes
    ----------
    at : (2,) float
        After catch and hold. [m]
    raw : (2,) float
        Under the pointer itself. [m]
    caught : str
        What `at` was caught by; empty for nothing.
    shift, control : bool
        Keys held down.
    pick : str or None
        Id of the item under the pointer, the uppermost.
    beneath : tuple of str
        Ids of the others there, from the top down.
    reach : float
        How far 5 px are. [m]
    plane : str
        Name of the view's plane, as in `app.views.projection`; "plan" for the plan.
    """

    at: Point
    raw: Point
    caught: Caught = ""
    shift: bool = False
    control: bool = False
    pick: str | None = None
    reach: float = 0.05
    plane: str = "plan"
    beneath: tuple[str, ...] = ()

    @property
    def under(self) -> tuple[str, ...]:
        """Ids of all items under the pointer, from the top down."""
        return self.beneath if self.pick is None else (self.pick, *self.beneath)


@dataclass(frozen=True)
class Dimension:
    """A length to be shown between two places."""

    start: Point
    end: Point
    text: str


@dataclass(frozen=True)
class Overlay:
    """What a tool wants drawn on top of everything.

    Attributes
    ----------
    lines : tuple of points
        Open lines; a closed one repeats its first point. [m]
    points : tuple of points
        Marked places. [m]
    labels : tuple of (point, text)
    box : (corner, opposite corner) or None
        A selection rectangle. [m]
    dimensions : tuple of Dimension
    dashed : tuple of points
        Lines that are only a suggestion, as `lines`. [m]
    """

    lines: tuple[tuple[Point, ...], ...] = ()
    points: tuple[Point, ...] = ()
    labels: tuple[tuple[Point, str], ...] = ()
    box: tuple[Point, Point] | None = None
    dimensions: tuple[Dimension, ...] = ()
    dashed: tuple[tuple[Point, ...], ...] = ()


NOTHING = Overlay()


@dataclass(frozen=True)
class Entry:
    """What was typed into the entry strip, in metres.

    Attributes
    ----------
    kind : "point" or "size"
    x, y, z : float or None
        The point, or the way to it; None keeps what the tool has. [m]
    is_relative : bool
        Whether x, y, z count from the tool's last point ("by", "go").
    size : (2,) float or None
        Along x and along y, for "size". [m]
    """

    kind: Literal["point", "size"]
    x: float | None = None
    y: float | None = None
    z: float | None = None
    is_relative: bool = False
    size: Point | None = None

    def point(
        self, last: tuple[float, float, float] | None
    ) -> tuple[float, float, float]:
        """The point meant, with what is missing taken from the `last` one. [m]

        Raises
        ------
        ValueError
            For a size, or when a point without a last one leaves something open.
        """
        given = (self.x, self.y, self.z)
        if self.kind != "point" or (last is None and (None in given)):
            raise ValueError("this entry gives no point")
        if last is None:
            last = (0.0, 0.0, 0.0)
        if self.is_relative:
            x, y, z = (b + (v or 0.0) for b, v in zip(last, given, strict=True))
        else:
            x, y, z = (b if v is None else v for b, v in zip(last, given, strict=True))
        return (x, y, z)


class Tool(QObject):
    """One way of working on the drawing.

    Subclasses set `name`, `key` and `icon` and override what they answer to. A tool
    edits through the document only, and calls `set_hint` and `overlay_changed.emit`
    when what it shows changes.

    Signals
    -------
    hint_changed(hint)
    overlay_changed()
    """

    hint_changed = Signal(str)
    overlay_changed = Signal()

    name = ""
    key = ""
    icon = ""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._hint = ""

    @property
    def hint(self) -> str:
        """What to do next, as a sentence."""
        return self._hint

    def set_hint(self, hint: str) -> None:
        """Say what to do next."""
        if hint != self._hint:
            self._hint = hint
            self.hint_changed.emit(hint)

    def overlay(self) -> Overlay:
        """What to draw on top of the layout now."""
        return NOTHING

    def anchor(self) -> Point | None:
        """The place from which Hold 0/45/90 counts; None holds nothing. [m]"""
        return None

    def moving(self) -> frozenset[str]:
        """Ids of items under way, which the catch leaves alone."""
        return frozenset()

    def catches(self) -> bool:
        """Whether the next click places something, so that catch marks make sense."""
        return True

    def activate(self) -> None:
        """Become the active tool."""

    def deactivate(self) -> None:
        """Stop being the active tool; nothing stays half done."""

    def press(self, pointer: Pointer) -> None:
        """The left button went down."""

    def move(self, pointer: Pointer) -> None:
        """The pointer moved, with or without the left button held."""

    def release(self, pointer: Pointer) -> None:
        """The left button came up."""

    def double_click(self, pointer: Pointer) -> None:
        """The left button went down twice; the first press came as `press`."""

    def enter(self) -> None:
        """Enter: end what is being drawn."""

    def backspace(self) -> None:
        """Backspace: take back the last vertex."""

    def back(self) -> bool:
        """Escape: go one step back; False when there is nothing to back out of."""
        return False

    def delete(self) -> None:
        """Delete: remove what is selected."""

    def nudge(self, dx: float, dy: float) -> None:
        """An arrow key: move what is selected. [m]"""

    def entry(self, entry: Entry) -> None:
        """Take what was typed into the entry strip."""

    def takes_numbers(self) -> bool:
        """Whether a number typed on the drawing belongs to what is under way.

        It goes into the entry strip then, and does not choose another tool.
        """
        return False

    def takes_length(self) -> bool:
        """Whether the entry strip should ask for a bare length.

        It comes as an entry that is a way of that length.
        """
        return False
