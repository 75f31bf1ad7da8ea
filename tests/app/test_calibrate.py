"""Calibrating without a window: clicks in metres and a distance in, a drawing out."""

from __future__ import annotations

import math

import pytest
from msgspec.structs import replace
from PySide6.QtGui import QColor, QImage

from app.backing import place_backing_picture
from app.document import Document
from app.entry_words import entry
from app.messages import Messages
from app.tools.calibrate import PLACE, CalibrateTool
from app.tools.tool import Pointer
from app.view_state import ViewState
from engine.calibration import is_calibrated, metres_per_pixel, pixel_at, place_of
from engine.edits import replaced
from engine.layout import Layout


class Desk:
    """A document with one picture of 800 × 600 px, 8 × 6 m before it has a scale."""

    def __init__(self, view: str = "plan") -> None:
        self.document = Document(Layout())
        messages = Messages()
        self.told: list[str] = []
        messages.told.connect(lambda _kind, sentence: self.told.append(sentence))
        image = QImage(800, 600, QImage.Format.Format_RGB32)
        image.fill(QColor("white"))
        place_backing_picture(self.document, image, view)
        self.document.select([])
        self.tool = CalibrateTool(self.document, ViewState(), messages)
        self.tool.activate()
        self.view = view

    @property
    def drawing(self):
        return self.document.committed.backing_drawings[0]

    @property
    def undo_text(self) -> str:
        return self.document.undo_stack.undoText()

    def click(self, x: float, y: float) -> None:
        # The catch would say otherwise; the picture has lines of its own.
        pointer = Pointer(
            at=(round(x), round(y)), raw=(x, y), reach=0.05, plane=self.view
        )
        self.tool.move(pointer)
        self.tool.press(pointer)
        self.tool.release(pointer)


@pytest.fixture
def desk(qapp) -> Desk:
    return Desk()


def test_two_clicks_and_a_distance_give_the_scale(desk):
    assert not is_calibrated(desk.drawing)
    desk.click(1.25, 2.25)
    desk.click(5.25, 5.25)
    assert desk.tool.takes_length()
    steps = desk.document.undo_stack.count()
    desk.tool.take_length(10.0)
    # 400 px across and 300 px up are 500 px.
    assert metres_per_pixel(desk.drawing) == pytest.approx(0.02)
    assert place_of(desk.drawing, desk.drawing.first) == pytest.approx((1.25, 2.25))
    assert desk.drawing.second == pytest.approx((525.0, 75.0))
    assert desk.document.undo_stack.count() == steps + 1
    assert desk.undo_text == "Calibrate Pasted picture: 10.00 m between two points"
    desk.document.undo_stack.undo()
    assert not is_calibrated(desk.drawing)


def test_then_a_point_of_the_picture_is_placed(desk):
    desk.click(1.25, 2.25)
    desk.click(5.25, 2.25)
    desk.tool.take_length(8.0)
    scale = metres_per_pixel(desk.drawing)
    pixel = pixel_at(desk.drawing, (3.4, 3.6))
    desk.click(3.4, 3.6)
    assert "where this point lies" in desk.tool.hint
    desk.click(0.2, -0.3)
    assert place_of(desk.drawing, pixel) == pytest.approx((0.0, 0.0))
    assert metres_per_pixel(desk.drawing) == pytest.approx(scale)
    assert desk.undo_text == "Place a point of Pasted picture at 0.00 m, 0.00 m"


def test_the_place_can_be_typed(desk):
    desk.tool.choose("step", PLACE)
    desk.click(4.0, 3.0)
    desk.tool.entry(entry("to 12.5 -3"))
    assert place_of(desk.drawing, (400.0, 300.0)) == pytest.approx((12.5, -3.0))
    desk.click(12.5, -3.0)
    desk.tool.entry(entry("by 0.5 0"))
    assert place_of(desk.drawing, (400.0, 300.0)) == pytest.approx((13.0, -3.0))


def test_on_an_elevation_the_place_has_a_height(qapp):
    desk = Desk("looking +x")
    desk.tool.choose("step", PLACE)
    desk.click(4.0, 3.0)
    desk.tool.entry(entry("to 2 5"))
    assert desk.told == ["Enter both y and z of the place."]
    desk.tool.entry(entry("to y 5 z 1.5"))
    # Looking along +x, +y is to the left.
    assert place_of(desk.drawing, (400.0, 300.0)) == pytest.approx((-5.0, 1.5))


def test_the_way_between_the_points_is_their_distance_too(desk):
    desk.click(1.0, 1.0)
    desk.click(5.0, 1.0)
    desk.tool.entry(entry("go 8.4 toward 30"))
    assert desk.drawing.distance == pytest.approx(8.4)


def test_escape_takes_back_one_click_and_then_nothing(desk):
    desk.click(1.0, 1.0)
    desk.click(5.0, 1.0)
    assert desk.tool.back()
    assert desk.tool.back()
    assert not desk.tool.back()
    assert desk.document.undo_stack.count() == 1


def test_clicks_stay_with_the_picture(desk):
    desk.click(1.0, 1.0)
    moved = replace(desk.drawing, origin=(10.0, desk.drawing.origin[1]))
    desk.document.edit("Move", replaced(desk.document.committed, moved))
    assert desk.tool.overlay().points[0] == pytest.approx((11.0, 1.0))
    desk.document.undo_stack.undo()
    desk.document.undo_stack.undo()
    assert desk.tool.overlay().points == ()
    assert desk.tool.hint.startswith("Click the first")


@pytest.mark.parametrize("distance", [0.0, -2.0, math.nan, 1e7])
def test_a_distance_that_cannot_be_is_told(desk, distance):
    desk.click(1.0, 1.0)
    desk.click(5.0, 1.0)
    desk.tool.take_length(distance)
    assert len(desk.told) == 1
    assert not is_calibrated(desk.drawing)
    assert desk.tool.takes_length()


def test_one_point_twice_is_told(desk):
    desk.click(1.0, 1.0)
    desk.click(1.01, 1.0)
    assert "far from it" in desk.told[0]
    assert not desk.tool.takes_length()


def test_a_locked_drawing_and_an_empty_view_are_told(desk):
    locked = replace(desk.drawing, locked=True)
    desk.document.edit("Lock", replaced(desk.document.committed, locked))
    desk.click(1.0, 1.0)
    assert "is locked" in desk.told[-1]
    desk.view = "looking +y"
    desk.click(1.0, 1.0)
    assert "There is no backing drawing under this view" in desk.told[-1]


def test_the_selected_one_of_two_is_meant(desk):
    image = QImage(100, 100, QImage.Format.Format_RGB32)
    image.fill(QColor("white"))
    place_backing_picture(desk.document, image)
    first = desk.document.committed.backing_drawings[0].id
    desk.document.select([first])
    desk.click(0.5, 0.5)
    desk.click(0.9, 0.5)
    desk.tool.take_length(3.0)
    one, other = desk.document.committed.backing_drawings
    assert (is_calibrated(one), is_calibrated(other)) == (True, False)
    desk.tool.deactivate()
    desk.tool.activate()
    desk.document.select([])
    desk.click(0.5, 0.5)
    assert desk.tool.overlay().points
    desk.click(0.8, 0.5)
    desk.tool.take_length(3.0)
    assert all(map(is_calibrated, desk.document.committed.backing_drawings))
