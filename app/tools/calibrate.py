"""Calibrate: give a backing drawing its scale by two points, and its place by one.

What is clicked in the picture is kept in its pixels, so that it stays with the picture
when that is scaled, moved or undone in between. Such clicks are not caught: the picture
has lines of its own.
"""

from __future__ import annotations

from math import dist

from app.document import Document
from app.messages import Messages
from app.tools.drawing_tool import Choice, DrawingTool
from app.tools.tool import NOTHING, Dimension, Entry, Overlay, Point, Pointer
from app.view_state import ViewState
from engine.calibration import calibrated, located, pixel_at, place_of
from engine.edits import replaced
from engine.embedded_picture import picture_size
from engine.errors import UserError
from engine.layout import Layout
from engine.motions import neat
from engine.places import BackingDrawing
from engine.sight import SIGHTS

SCALE, PLACE = "scale by two points", "place one point"

#: Points nearer than this on the screen are one click. [reaches of the pointer]
_APART = 1.0


class CalibrateTool(DrawingTool):
    """Two clicks and a distance; then a point of the picture and where it lies."""

    name, key, icon = "Calibrate", "", "calibrate"
    on_elevations = True

    def __init__(
        self,
        document: Document,
        view_state: ViewState,
        messages: Messages | None = None,
    ) -> None:
        super().__init__(document, view_state, messages)
        self._id = ""
        self._pixels: list[Point] = []
        self._hover: Point | None = None
        document.changed.connect(self._on_changed)
        self._say()

    def begin(self, item_id: str) -> None:
        """Calibrate this drawing from its first point."""
        self._start_over()
        self._id = item_id
        self._say()

    def activate(self) -> None:
        self._chosen.clear()
        self._start_over()

    def deactivate(self) -> None:
        self._id = ""
        self._start_over()

    def choices(self) -> tuple[Choice, ...]:
        return (self._choice("step", (SCALE, PLACE)),)

    def catches(self) -> bool:
        return self._wants_place()

    def takes_numbers(self) -> bool:
        return self._wants_place()

    def takes_length(self) -> bool:
        return self._wants_distance()

    def press(self, pointer: Pointer) -> None:
        with self._shown():
            if self._wants_distance():
                self._messages.inform(self.hint)
            elif self._wants_place():
                self._locate(pointer.at)
            else:
                self._pick(pointer)
        self._say()

    def move(self, pointer: Pointer) -> None:
        self._hover = pointer.at if self._wants_place() else pointer.raw
        self.overlay_changed.emit()

    def entry(self, entry: Entry) -> None:
        with self._shown():
            if self._wants_distance():
                way = (entry.x or 0.0, entry.y or 0.0, entry.z or 0.0)
                if entry.kind != "point" or not entry.is_relative:
                    raise UserError("Enter the distance of the two points: 8.40.")
                self.take_length(dist(way, (0.0, 0.0, 0.0)))
            elif self._wants_place():
                self._locate(self._meant(entry))
            else:
                raise UserError("Click the point in the picture; it cannot be typed.")
        self._say()

    def take_length(self, metres: float) -> None:
        """Take the distance of the two points. [m]"""
        with self._shown():
            if not self._wants_distance():
                raise UserError("Click two points of the picture first.")
            drawing = self._drawing()
            first, second = self._pixels
            after = calibrated(drawing, first, second, metres)
            distance = self._length_text(metres)
            self._finish(
                f"Calibrate {drawing.title}: {distance} between two points", after
            )
            self._chosen["step"] = PLACE
            self.choices_changed.emit()
        self._say()

    def backspace(self) -> None:
        self.back()

    def back(self) -> bool:
        if not self._pixels:
            return False
        self._pixels.pop()
        self._say()
        return True

    def overlay(self) -> Overlay:
        places, hover = self._places(), self._hover
        if not places:
            return NOTHING
        if self._wants_place():
            if hover is None:
                return Overlay(points=tuple(places))
            return Overlay(
                points=(places[0], hover),
                dashed=((places[0], hover), self._frame(places[0], hover)),
            )
        if len(places) == 1:
            lines = ((places[0], hover),) if hover is not None else ()
            return Overlay(lines=lines, points=tuple(places))
        return Overlay(
            points=tuple(places),
            dimensions=(Dimension(places[0], places[1], "distance?"),),
        )

    def _wants_distance(self) -> bool:
        return self._step == SCALE and len(self._pixels) == 2

    def _wants_place(self) -> bool:
        return self._step == PLACE and len(self._pixels) == 1

    @property
    def _step(self) -> str:
        return self.choices()[0].value

    def _choice_made(self) -> None:
        self._start_over()

    def _pick(self, pointer: Pointer) -> None:
        """One more point of the picture."""
        if not self._pixels:
            self._id = self._meant_drawing(pointer)
        drawing = self._drawing()
        if drawing.view != pointer.plane:
            raise UserError(
                f"“{drawing.title}” lies under another view: click both points there."
            )
        if self._pixels:
            before = place_of(drawing, self._pixels[0])
            if dist(before, pointer.raw) <= _APART * pointer.reach:
                raise UserError(
                    "The second point is the first: click one that is far from it."
                )
        x, y = pixel_at(drawing, pointer.raw)
        self._pixels.append((round(x, 2), round(y, 2)))

    def _locate(self, place: Point) -> None:
        drawing = self._drawing()
        after = located(drawing, self._pixels[0], (neat(place[0]), neat(place[1])))
        x, y = (self._length_text(value) for value in place)
        self._finish(f"Place a point of {drawing.title} at {x}, {y}", after)

    def _finish(self, text: str, drawing: BackingDrawing) -> None:
        layout = replaced(self._document.committed, drawing)
        self._pixels = []
        self._commit(text, layout, (drawing.id,))

    def _meant(self, entry: Entry) -> Point:
        """Where an entry lies in the plane of the drawing's view. [m]"""
        drawing = self._drawing()
        sight = SIGHTS[drawing.view]
        across, up = ("xz", "yz", "xy")[
            ("looking +y", "looking +x", "plan").index(drawing.view)
        ]
        if entry.kind != "point":
            raise UserError("A size has no meaning here: enter “to” and the place.")
        given = {"x": entry.x, "y": entry.y, "z": entry.z}
        if not entry.is_relative and (given[across] is None or given[up] is None):
            raise UserError(f"Enter both {across} and {up} of the place.")
        way = (entry.x or 0.0, entry.y or 0.0, entry.z or 0.0)
        x, y = sight.seen(way).tolist()
        if not entry.is_relative:
            return (x, y)
        before = place_of(drawing, self._pixels[0])
        return (before[0] + x, before[1] + y)

    def _meant_drawing(self, pointer: Pointer) -> str:
        """The drawing that a first click is for.

        The one begun with or selected; else the uppermost under the pointer, or the
        only one of the view.
        """
        there = [
            drawing
            for drawing in self._document.committed.backing_drawings
            if drawing.view == pointer.plane
        ]
        if not there:
            raise UserError(
                "There is no backing drawing under this view: place one first."
            )
        for chosen in ({self._id}, self._document.selection):
            named = [drawing.id for drawing in there if drawing.id in chosen]
            if named:
                return named[-1]
        under = [d for d in there if _covers(d, pointer.raw)]
        if not under and len(there) > 1:
            raise UserError("Click on the backing drawing that you mean.")
        return (under or there)[-1].id

    def _drawing(self) -> BackingDrawing:
        """The drawing being calibrated."""
        drawing = _found(self._document.committed, self._id)
        if drawing is None:
            self._start_over()
            raise UserError("The backing drawing is gone: begin with another one.")
        if drawing.locked:
            raise UserError(
                f"“{drawing.title}” is locked: unlock it in its form to calibrate it."
            )
        return drawing

    def _places(self) -> list[Point]:
        """Where the clicked points lie now. [m]"""
        drawing = _found(self._document.layout, self._id)
        if drawing is None:
            return []
        return [place_of(drawing, pixel) for pixel in self._pixels]

    def _frame(self, start: Point, end: Point) -> tuple[Point, ...]:
        """The picture's edge after a shift, as a closed line. [m]"""
        drawing = _found(self._document.layout, self._id)
        size = None if drawing is None else picture_size(drawing)
        if drawing is None or size is None:
            return ()
        dx, dy = end[0] - start[0], end[1] - start[1]
        w, h = size
        corners = ((0.0, 0.0), (w, 0.0), (w, h), (0.0, h), (0.0, 0.0))
        places = [place_of(drawing, corner) for corner in corners]
        return tuple((x + dx, y + dy) for x, y in places)

    def _start_over(self) -> None:
        self._pixels = []
        self._hover = None
        self._say()

    def _on_changed(self, layout: Layout, _ids: object) -> None:
        if self._pixels and _found(layout, self._id) is None:
            self._start_over()
        elif self._pixels:
            self.overlay_changed.emit()

    def _say(self) -> None:
        self.set_hint(self._next_hint())
        self.overlay_changed.emit()

    def _next_hint(self) -> str:
        if self._step == PLACE:
            if self._pixels:
                return (
                    "Click where this point lies, or enter “to” and the place; "
                    "Esc goes one step back."
                )
            return (
                "Click a point of the picture whose place you know, such as a column "
                "or a corner; Esc ends."
            )
        if not self._pixels:
            return "Click the first of two points whose distance you know."
        if len(self._pixels) == 1:
            return "Click the second point, far from the first; Esc goes one step back."
        return (
            "Type the distance of the two points into the entry strip, such as "
            "8.40m or 27ft6in; Esc goes one step back."
        )


def _found(layout: Layout, item_id: str) -> BackingDrawing | None:
    for drawing in layout.backing_drawings:
        if drawing.id == item_id:
            return drawing
    return None


def _covers(drawing: BackingDrawing, place: Point) -> bool:
    """Whether the picture shows at a place."""
    size = picture_size(drawing)
    if size is None:
        return False
    x, y = pixel_at(drawing, place)
    return 0 <= x <= size[0] and 0 <= y <= size[1]
