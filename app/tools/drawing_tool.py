"""What the tools that edit have in common: document, storey, choices, one way to end.

`Points` collects clicked places; the tools of this package say what they make of them.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from math import atan2, degrees, dist, hypot

from PySide6.QtCore import Signal

from app.document import Document
from app.messages import Messages
from app.tools.tool import Dimension, Entry, Overlay, Point, Pointer, Tool
from app.view_state import ViewState
from engine.edits import checked
from engine.errors import UserError
from engine.items import Point3
from engine.layout import Layout
from engine.motions import neat
from engine.new_places import floor_of
from engine.units import LENGTH_UNITS

#: Places nearer than this are one place. [m]
SAME = 1e-6


@dataclass(frozen=True)
class Choice:
    """A choice that a tool offers in the entry strip.

    Attributes
    ----------
    name : str
        What is chosen: "kind".
    values : tuple of str
        What there is to choose from, as shown.
    value : str
        The one chosen now.
    """

    name: str
    values: tuple[str, ...]
    value: str


class DrawingTool(Tool):
    """A tool that edits a document.

    Signals
    -------
    choices_changed()
    """

    choices_changed = Signal()

    #: Whether the tool works on elevations too.
    on_elevations = False

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages | None = None,
    ) -> None:
        super().__init__()
        self._document = document
        self._view_state = view_state
        self._messages = messages or Messages()
        self._chosen: dict[str, str] = {}

    def choices(self) -> tuple[Choice, ...]:
        """What the entry strip offers to choose."""
        return ()

    def choose(self, name: str, value: str) -> None:
        """Take another of a choice's values."""
        known = {choice.name: choice.values for choice in self.choices()}
        if value not in known.get(name, ()):
            raise ValueError(f"{name} cannot be {value}")
        if self._chosen.get(name) != value:
            self._chosen[name] = value
            self._choice_made()
            self.choices_changed.emit()
            self.overlay_changed.emit()

    def heading(self) -> str:
        """What the entry strip says about the tool's height; empty for nothing."""
        return ""

    def _choice_made(self) -> None:
        """Another choice holds from now on."""

    def _choice(self, name: str, values: tuple[str, ...]) -> Choice:
        return Choice(name, values, self._chosen.get(name, values[0]))

    @property
    def _storey(self) -> str:
        return self._view_state.look.storey

    @property
    def _floor(self) -> float:
        return floor_of(self._document.committed, self._storey)

    @property
    def _unit(self) -> str:
        return self._document.committed.settings.length_unit

    def _length_text(self, metres: float) -> str:
        unit = self._unit
        places = {"m": 2, "ft": 2, "in": 1}.get(unit, 0)
        return f"{metres / LENGTH_UNITS[unit]:.{places}f} {unit}"

    @contextmanager
    def _shown(self) -> Iterator[None]:
        """Turn a `UserError` into a message; what was asked for does not happen."""
        try:
            yield
        except UserError as error:
            self._messages.refuse(str(error))

    def _commit(self, text: str, layout: Layout, ids: Sequence[str]) -> None:
        """End with one step of the history, and select what was made.

        Raises
        ------
        UserError
            When a value is outside what a layout may hold.
        """
        by_id = layout.by_id()
        for id in ids:
            checked(by_id[id])
        self._document.edit(text, layout)
        self._document.select(ids)

    def _refuses(self, pointer: Pointer) -> bool:
        """Whether the pointer is in a view that the tool does not work in."""
        if pointer.plane == "plan" or self.on_elevations:
            return False
        self._messages.inform(f"{self.name} is drawn on the plan: point there.")
        return True


class Points(DrawingTool):
    """A tool that collects places until it has enough.

    Places are points in space; on plan z is the tool's height. Subclasses set `_most`
    and override `_height`, `_finish` and `_first_hint`.
    """

    #: As many places as end the drawing by themselves; None: Enter ends it.
    _most: int | None = None
    #: Fewest places that make something.
    _fewest = 2
    #: Whether the outline is closed in the overlay.
    _closed = False

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages | None = None,
    ) -> None:
        super().__init__(document, view_state, messages)
        self._points: list[Point3] = []
        self._hover: Point | None = None
        self._typed_z: float | None = None
        self._say()

    @property
    def points(self) -> tuple[Point3, ...]:
        """Places so far. [m]"""
        return tuple(self._points)

    def activate(self) -> None:
        self._say()

    def deactivate(self) -> None:
        self._start_over()

    def anchor(self) -> Point | None:
        return self._points[-1][:2] if self._points else None

    def takes_numbers(self) -> bool:
        return bool(self._points)

    def press(self, pointer: Pointer) -> None:
        if not self._refuses(pointer):
            self._hover = pointer.at
            self._place_at(pointer.at, pointer)

    def move(self, pointer: Pointer) -> None:
        self._hover = pointer.at
        self.overlay_changed.emit()

    def double_click(self, pointer: Pointer) -> None:
        self.enter()

    def enter(self) -> None:
        if len(self._points) >= self._fewest:
            with self._shown():
                self._finish()
                self._start_over()
        elif self._points:
            self._messages.inform(self._too_few())

    def backspace(self) -> None:
        if self._points:
            self._points.pop()
            self._say()

    def back(self) -> bool:
        if not self._points:
            return False
        self.backspace()
        return True

    def entry(self, entry: Entry) -> None:
        with self._shown():
            if entry.kind == "size":
                self._take_size(entry)
                return
            if not self._points and entry.x is None and entry.y is None:
                if entry.z is None or entry.is_relative:
                    raise UserError("Enter the first place with x and y, or click it.")
                self.set_height(entry.z)
                return
            if not self._points and None in (entry.x, entry.y):
                raise UserError("Enter both x and y of the first place.")
            if not self._points and entry.is_relative:
                raise UserError(
                    "There is no place yet to count from: begin with “to”, or click."
                )
            self._add(self._meant(entry))

    def set_height(self, z: float) -> None:
        """Draw at this height from now on. [m]"""
        self._typed_z = neat(z)
        self._say()

    def overlay(self) -> Overlay:
        return line_overlay(
            [point[:2] for point in self._points],
            self._hover,
            self._length_text,
            closed=self._closed,
        )

    def _meant(self, entry: Entry) -> Point3:
        """The place of an entry in space. [m]"""
        if self._points:
            x, y, z = entry.point(self._points[-1])
            return (neat(x), neat(y), neat(z))
        assert entry.x is not None
        assert entry.y is not None
        at = (entry.x, entry.y)
        height = self._typed_z if entry.z is None else entry.z
        if height is None:
            height = self._height(at)
        return (neat(at[0]), neat(at[1]), neat(height))

    def _place_at(self, at: Point, pointer: Pointer) -> None:
        z = self._points[-1][2] if self._points else self._height(at)
        if self._typed_z is not None:
            z = self._typed_z
        with self._shown():
            self._add((neat(at[0]), neat(at[1]), z))

    def _add(self, place: Point3) -> None:
        """One more place; ends the drawing when there are enough."""
        if self._points and dist(place, self._points[-1]) < SAME:
            return
        if self._typed_z is not None and place[2] != self._typed_z:
            self._typed_z = None
        self._points.append(place)
        if self._most is not None and len(self._points) >= self._most:
            try:
                self._finish()
            except UserError:
                self._points.pop()
                raise
            self._start_over()
        self._say()

    def _take_size(self, entry: Entry) -> None:
        raise UserError(f"A size has no meaning for {self.name}: enter “to” or “by”.")

    def _height(self, at: Point) -> float:
        """Height of the first place when none is typed. [m]"""
        return self._floor

    def _finish(self) -> None:
        """Make the item from the places and commit it."""
        raise NotImplementedError

    def _start_over(self) -> None:
        self._points = []
        self._typed_z = None
        self._say()

    def _say(self) -> None:
        self.set_hint(self._next_hint())
        self.overlay_changed.emit()
        self.choices_changed.emit()

    def _next_hint(self) -> str:
        raise NotImplementedError

    def _too_few(self) -> str:
        return f"Place at least {self._fewest} points first."


def line_overlay(
    points: Sequence[Point],
    hover: Point | None,
    text: object,
    *,
    closed: bool = False,
) -> Overlay:
    """A line under construction with the length and direction of its last leg."""
    assert callable(text)
    shown = list(points)
    if hover is not None and points:
        shown.append(hover)
    if len(shown) < 2:
        return Overlay(points=tuple(points))
    a, b = shown[-2], shown[-1]
    dimensions: tuple[Dimension, ...] = ()
    if hypot(b[0] - a[0], b[1] - a[1]) > SAME:
        dimensions = (Dimension(a, b, f"{text(dist(a, b))} · {direction_text(a, b)}"),)
    dashed = ((shown[-1], shown[0]),) if closed and len(shown) > 2 else ()
    return Overlay(
        lines=(tuple(shown),),
        points=tuple(points),
        dimensions=dimensions,
        dashed=dashed,
    )


def direction_text(a: Point, b: Point) -> str:
    """The direction from one place to another, counter-clockwise from +x."""
    turn = degrees(atan2(b[1] - a[1], b[0] - a[0])) % 360.0
    return f"{round(turn, 1) % 360.0:g}°"
