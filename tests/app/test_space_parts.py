"""Parts of the view in space without OpenGL: planes, moving, the hand, the maps."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QWidget
from pytestqt.qtbot import QtBot

from app.document import Document
from app.map_request import heights_of
from app.space_maps import SpaceMapRequest, SpaceMaps, level_places, space_maps
from app.view_state import Look, ViewState
from app.views.space_camera import SpaceCamera
from app.views.space_hand import SpaceHand
from app.views.space_move import AXES, AxisMove
from app.views.space_planes import (
    UPRIGHT,
    SpacePlanes,
    typed_heights,
    typed_line,
    typed_place,
)
from engine.colour_ramp import colours
from engine.errors import UserError
from engine.field import ResponseCache
from engine.layout import Layout
from engine.layout_file import read
from engine.maps import extent, plane_map
from engine.places import Profile
from engine.sampling import vertical

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


# -- planes -------------------------------------------------------------------------


def test_typed_heights_take_the_unit_that_ends_them() -> None:
    assert typed_heights("500 1000 mm", "m", ".") == (0.5, 1.0)
    assert typed_heights("1.5 0.5 1.5", "m", ".") == (0.5, 1.5)
    assert typed_heights("500mm 1 m", "m", ".") == (0.5, 1.0)
    assert typed_heights("0,5 1", "m", ",") == (0.5, 1.0)
    assert typed_heights("", "m", ".") is None


def test_typed_line_is_two_places() -> None:
    assert typed_line("0 1.35 to 9 1.35", "m", ".") == ((0.0, 1.35), (9.0, 1.35))
    assert typed_line("from x 0 y 1 to x 2 y 3 m", "m", ".") == ((0, 1), (2, 3))
    with pytest.raises(UserError, match="two places"):
        typed_line("0 1.35 9", "m", ".")
    with pytest.raises(UserError):
        typed_place("somewhere", "m", ".")


def test_level_maps_follow_the_plan_until_heights_are_typed(layout: Layout) -> None:
    look = Look(height=4.6)
    planes = SpacePlanes()
    assert planes.level(layout, look) == (4.6,)
    heights, _ = heights_of(layout, Look())
    assert planes.level(layout, Look())[0] in heights
    typed = SpacePlanes(heights=(0.5, 1.0))
    assert typed.level(layout, look) == (0.5, 1.0)
    assert len(typed.places(layout, look, (0.0, 3.0))) == 2


def test_hidden_map_layer_hides_every_plane(layout: Layout) -> None:
    look = Look(hidden=frozenset({"map"}))
    planes = SpacePlanes(upright=UPRIGHT[1])
    assert planes.places(layout, look, (0.0, 3.0)) == ()
    assert planes.handles(layout, look, (0.0, 3.0)) == ()


def test_upright_plane_stands_at_its_place_over_the_whole_extent(
    layout: Layout,
) -> None:
    planes = SpacePlanes(heights=(1.0,), upright="at one x", at=3.25)
    place = planes.places(layout, Look(), (-1.0, 6.0))[-1]
    _, y0, _, y1 = extent(layout)
    assert place.plane == vertical((3.25, y0), (3.25, y1), (-1.0, 6.0))
    handle = planes.handles(layout, Look(), (-1.0, 6.0))[-1]
    assert handle.axis == (1, 0, 0)
    assert planes.dragged("upright", 4.5, layout, Look()).at == 4.5
    assert planes.dragged("level 0", 2.0, layout, Look()).heights == (2.0,)


def _with_profile(layout: Layout, *path: tuple[float, float, float]) -> Layout:
    return replace(layout, profiles=(Profile(id="cut", name="Cut", path=path),))


def test_upright_maps_stand_on_the_legs_of_a_profile(layout: Layout) -> None:
    path = ((1.0, 1.0, 1.0), (4.0, 1.0, 1.0), (4.0, 1.0, 3.0), (4.0, 5.0, 3.0))
    drawn = _with_profile(layout, *path)
    planes = SpacePlanes(heights=(1.0,), upright="along a profile")
    _, *upright = planes.places(drawn, Look(), (0.0, 3.0))
    assert [place.plane for place in upright] == [
        vertical((1.0, 1.0), (4.0, 1.0), (0.0, 3.0)),
        vertical((4.0, 1.0), (4.0, 5.0), (0.0, 3.0)),
    ]
    assert {place.name for place in upright} == {"along Cut"}
    assert planes.field_text(drawn, ".") == "Cut"
    # Several legs have no one way to go.
    assert [h.name for h in planes.handles(drawn, Look(), (0.0, 3.0))] == ["level 0"]
    with pytest.raises(UserError, match="no profile to stand a map on: draw one"):
        planes.places(replace(layout, profiles=()), Look(), (0.0, 3.0))
    steep = _with_profile(layout, (1.0, 1.0, 0.0), (1.0, 1.0, 3.0))
    with pytest.raises(UserError, match="“Cut” has no length on plan"):
        planes.places(steep, Look(), (0.0, 3.0))


def test_upright_map_is_dragged_across_its_line(layout: Layout) -> None:
    # A line towards 3 : 4: across it is (0.8, −0.6).
    drawn = _with_profile(layout, (0.0, 0.0, 1.0), (3.0, 4.0, 1.0))
    planes = SpacePlanes(heights=(1.0,), upright="along a profile")
    handle = planes.handles(drawn, Look(), (0.0, 3.0))[-1]
    assert handle.at == (1.5, 2.0, 3.0)
    assert handle.axis == pytest.approx((0.8, -0.6, 0.0))
    # From 0 along the axis to 0.5.
    moved = planes.dragged("upright", 0.5, drawn, Look())
    assert moved.upright == "along a line"
    assert moved.line is not None
    assert moved.line[0] == pytest.approx((0.4, -0.3))
    assert moved.line[1] == pytest.approx((3.4, 3.7))
    again = moved.dragged("upright", 0.0, drawn, Look())
    assert again.line is not None
    assert again.line[1] == pytest.approx((3.0, 4.0))


# -- moving along an axis -------------------------------------------------------------


@pytest.mark.parametrize("axis", AXES)
def test_drag_moves_the_selection_along_one_axis_in_one_step(
    layout: Layout, axis: str
) -> None:
    document = Document(layout)
    run = layout.runs[0]
    document.select({run.id})
    move = AxisMove(document)
    move.axis = axis
    camera = SpaceCamera(target=run.route[0])
    start = move.middle
    assert start is not None
    step = np.array(AXES[axis])
    ((x, y), (to_x, to_y)), _ = camera.pixels([start, np.array(start) + 1.0 * step])
    move.begin(camera, x, y)
    move.drag(camera, to_x, to_y, freely=False)
    assert document.is_previewing
    dimension = move.dimension()
    assert dimension is not None
    assert dimension.text.startswith("+1.00 m ")
    move.end()
    moved_run = document.committed.by_id()[run.id]
    way = np.array(moved_run.route[0]) - np.array(run.route[0])  # type: ignore[attr-defined]
    assert way == pytest.approx(step)
    assert document.undo_stack.count() == 1
    document.undo_stack.undo()
    assert document.layout == layout


def test_cancelled_move_leaves_everything(layout: Layout) -> None:
    document = Document(layout)
    document.select({layout.runs[0].id})
    move = AxisMove(document)
    move.axis = "x"
    camera = SpaceCamera(target=layout.runs[0].route[0])
    move.begin(camera, 400, 300)
    move.drag(camera, 500, 300, freely=True)
    assert document.layout != layout
    move.cancel()
    assert document.layout == layout
    assert document.undo_stack.count() == 0


def test_axis_seen_end_on_is_refused_with_a_sentence(layout: Layout) -> None:
    document = Document(layout)
    document.select({layout.runs[0].id})
    move = AxisMove(document)
    move.axis = "vertical"
    with pytest.raises(UserError, match="end-on"):
        move.begin(SpaceCamera().looking("From above"), 10, 10)
    move.by(0.25)
    z = document.committed.runs[0].route[0][2] - layout.runs[0].route[0][2]
    assert z == pytest.approx(0.25)


# -- the hand -------------------------------------------------------------------------


class _Grip:
    """Writes down what is done to it."""

    def __init__(self) -> None:
        self.done: list[str] = []

    def drag(self, camera: SpaceCamera, x: float, y: float, *, freely: bool) -> None:
        self.done.append(f"drag {x:.0f} {y:.0f}{' freely' if freely else ''}")

    def end(self) -> None:
        self.done.append("end")

    def cancel(self) -> None:
        self.done.append("cancel")


class _Place(QWidget):
    """A widget with a camera that its hand may replace."""

    def __init__(self) -> None:
        super().__init__()
        self.resize(400, 300)
        self.camera = SpaceCamera(width=400, height=300)
        self.grip: _Grip | None = None
        self.clicks: list[tuple[float, float, bool]] = []
        self.hand = SpaceHand(self, lambda: self.camera, lambda _x, _y: self.grip)
        self.hand.camera_wanted.connect(lambda c: setattr(self, "camera", c))
        self.hand.clicked.connect(lambda *click: self.clicks.append(click))


@pytest.fixture
def place(qtbot: QtBot) -> _Place:
    made = _Place()
    qtbot.addWidget(made)
    made.show()
    return made


def _drag(
    place: QWidget, button: Qt.MouseButton, *ways: QPoint,
    keys: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier,
) -> None:  # fmt: skip
    QTest.mousePress(place, button, keys, QPoint(100, 100))
    for way in ways:
        QTest.mouseMove(place, QPoint(100, 100) + way)
    QTest.mouseRelease(place, button, keys, QPoint(100, 100) + ways[-1])


def test_left_drag_turns_and_right_drag_shifts(place: _Place) -> None:
    before = place.camera
    _drag(place, Qt.MouseButton.LeftButton, QPoint(30, 10))
    assert place.camera.azimuth != before.azimuth
    assert place.camera.target == before.target
    turned = place.camera
    _drag(place, Qt.MouseButton.RightButton, QPoint(30, 10))
    assert place.camera.azimuth == turned.azimuth
    assert place.camera.target != turned.target
    assert place.clicks == []


def test_click_is_told_and_leaves_the_camera(place: _Place) -> None:
    before = place.camera
    QTest.mouseClick(place, Qt.MouseButton.LeftButton, pos=QPoint(50, 60))
    shift = Qt.KeyboardModifier.ShiftModifier
    QTest.mouseClick(place, Qt.MouseButton.LeftButton, shift, QPoint(51, 60))
    assert place.clicks == [(50.0, 60.0, False), (51.0, 60.0, True)]
    assert place.camera == before


def test_grip_is_dragged_instead_of_the_camera(place: _Place) -> None:
    place.grip = _Grip()
    before = place.camera
    _drag(place, Qt.MouseButton.LeftButton, QPoint(30, 10))
    assert place.grip.done == ["drag 130 110", "end"]
    assert place.camera == before


def test_escape_puts_back_what_is_gripped(place: _Place) -> None:
    place.grip = _Grip()
    QTest.mousePress(place, Qt.MouseButton.LeftButton, pos=QPoint(100, 100))
    QTest.mouseMove(place, QPoint(140, 100))
    QTest.keyClick(place, Qt.Key.Key_Escape)
    QTest.mouseRelease(place, Qt.MouseButton.LeftButton, pos=QPoint(140, 100))
    assert place.grip.done == ["drag 140 100", "cancel"]


def test_wheel_and_keys_bring_nearer(place: _Place) -> None:
    before = place.camera.distance
    event = QWheelEvent(
        QPointF(200, 150), QPointF(200, 150), QPoint(), QPoint(0, 120),
        Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier,
        Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(place, event)
    assert place.camera.distance == pytest.approx(before / 1.2)
    QTest.keyClick(place, Qt.Key.Key_Minus)
    assert place.camera.distance == pytest.approx(before)
    QTest.keyClick(place, Qt.Key.Key_Left)
    assert place.camera.azimuth != SpaceCamera().azimuth


# -- maps -----------------------------------------------------------------------------


def test_map_in_space_has_the_colours_of_the_engines_values(layout: Layout) -> None:
    planes = SpacePlanes(heights=(5.1,), upright="at one x", at=3.0)
    places = planes.places(layout, Look(), (3.9, 6.5))
    request = SpaceMapRequest(layout, "", places, False)
    settings = layout.settings
    for found, place in zip(space_maps(request, ResponseCache()), places, strict=True):
        rows, columns = found.rgba.shape[:2]
        result = plane_map(
            layout, layout.cases[0], place.plane, step=max(map(max, (
                place.plane.first, place.plane.second))) / 40,
        )  # fmt: skip
        expected = colours(
            result.values, settings.map_low, settings.map_high, settings.map_scale
        )
        ny, nx = result.values.shape
        for j, i in ((ny // 3, nx // 3), (ny // 2, nx // 2), (2 * ny // 3, nx // 4)):
            row = min(rows - 1, int(rows * j / (ny - 1)))
            column = min(columns - 1, int(columns * i / (nx - 1)))
            shown = found.rgba[row, column, :3].astype(int)
            assert np.abs(shown - expected[j, i, :3]).max() <= 6


def test_closed_enclosures_are_clear_in_maps(layout: Layout) -> None:
    closed = next(e for e in layout.enclosures if e.state == "closed")
    z = 0.5 * (closed.z_from + closed.z_to)
    places = level_places(layout, (z,), Look())
    (found,) = space_maps(SpaceMapRequest(layout, "", places, False), ResponseCache())
    x0, y0, x1, y1 = extent(layout)
    xs, ys = zip(*closed.footprint, strict=True)
    rows, columns = found.rgba.shape[:2]
    column = int(columns * (np.mean(xs) - x0) / (x1 - x0))
    row = int(rows * (np.mean(ys) - y0) / (y1 - y0))
    assert found.rgba[row, column, 3] == 0
    assert found.rgba[..., 3].max() == round(255 * 0.7)


@pytest.fixture
def maps(layout: Layout) -> Iterator[SpaceMaps]:
    made = SpaceMaps(Document(layout), ViewState())
    yield made
    made.close_worker()


def test_maps_come_from_the_thread_coarse_first(
    qtbot: QtBot, maps: SpaceMaps, layout: Layout
) -> None:
    found: list[int] = []
    maps.ready.connect(lambda shown: found.extend(m.rgba.shape[0] for m in shown))
    maps.want(level_places(layout, (5.1,), Look()))
    qtbot.waitUntil(lambda: len(found) == 2, timeout=30_000)
    assert found[0] < found[1]
    maps.want(())
    qtbot.waitUntil(lambda: maps.is_idle)
