"""The view in space without OpenGL: what it draws, picks, moves and says."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from msgspec.structs import replace
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QImage, QPainter
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QWidget
from pytestqt.qtbot import QtBot

from app.document import Document
from app.messages import Messages
from app.theme import DARK, LIGHT, contrast
from app.view_state import Look, ViewState
from app.views.opengl import opengl_obstacle
from app.views.space_camera import SpaceCamera
from app.views.space_drawn import lit
from app.views.space_items import SpaceItems, sharp_edges, space_colour
from app.views.space_view import SpaceView
from engine.conductors import conductors
from engine.edits import added, replaced
from engine.layout import Layout
from engine.layout_file import read
from engine.places import Profile
from engine.space_scene import space_scene

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


class _Flat(QWidget):
    """Stands for the picture where there is no OpenGL: remembers what it is shown."""

    def __init__(self) -> None:
        super().__init__()
        self.reach = 0.0
        self.paint_over: Callable[[QPainter], None] | None = None
        self.drawn: Any = None
        self.maps: Any = ()
        self.cameras: list[SpaceCamera] = []

    def show_theme(self, theme: object) -> None:
        self.theme = theme

    def show_drawn(self, drawn: object) -> None:
        self.drawn = drawn

    def show_maps(self, maps: object, _theme: object) -> None:
        self.maps = maps

    def look(self, camera: SpaceCamera) -> None:
        self.cameras.append(camera)

    def image(self) -> QImage:
        picture = QImage(self.size(), QImage.Format.Format_RGB32)
        picture.fill(0xFFFFFF)
        assert self.paint_over is not None
        painter = QPainter(picture)
        self.paint_over(painter)
        painter.end()
        return picture


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLE)


@pytest.fixture
def document(layout: Layout) -> Document:
    return Document(layout)


@pytest.fixture
def told() -> list[str]:
    return []


@pytest.fixture
def view(qtbot: QtBot, document: Document, told: list[str]) -> Iterator[SpaceView]:
    messages = Messages()
    messages.told.connect(lambda _kind, sentence: told.append(sentence))
    made = SpaceView(document, ViewState(), messages, canvas=_Flat, obstacle=lambda: "")
    qtbot.addWidget(made)
    made.resize(1000, 700)
    made.show()
    qtbot.waitUntil(
        lambda: made.is_idle and bool(made.desk and made.desk.shown), timeout=30_000
    )
    yield made
    made.close_worker()


def _items(layout: Layout, look: Look | None = None, *chosen: str) -> SpaceItems:
    items = SpaceItems()
    items.show(layout, look or Look(), frozenset(chosen), LIGHT)
    return items


# -- without OpenGL -----------------------------------------------------------------


def test_without_opengl_the_page_says_so_and_the_rest_works(
    qtbot: QtBot, document: Document
) -> None:
    assert "offers no OpenGL" in opengl_obstacle()
    page = SpaceView(document, ViewState(), Messages())
    qtbot.addWidget(page)
    page.show()
    assert "cannot be shown" in page.reason.text()
    assert page.canvas is None
    assert not page.controls.isVisible()
    document.select({document.layout.runs[0].id})
    page.look("Looking +y")
    page.close_worker()


# -- what is drawn ------------------------------------------------------------------


def test_all_solids_are_one_mesh_in_the_colours_of_their_letters(
    layout: Layout,
) -> None:
    items = _items(layout)
    opaque = items.drawn.opaque
    assert len(opaque.corners) == len(opaque.colours) > 1000
    assert np.all(opaque.colours[:, 3] == 1.0)
    assert np.all(items.drawn.clear.colours[:, 3] < 0.5)
    assert opaque.corners.flags["C_CONTIGUOUS"]
    corners = np.array([[[0, 0, 0], [1, 0, 0], [0, 1, 0]]], float)
    up = lit(corners, np.ones((1, 4)))
    down = lit(corners[:, ::-1], np.ones((1, 4)))
    assert 0.5 < down.colours[0, 0] < up.colours[0, 0] <= 1.0


def test_hidden_layers_are_neither_drawn_nor_hit(layout: Layout) -> None:
    camera = SpaceCamera(width=900, height=600).looking("From above")
    items = _items(layout)
    camera = camera.fitted(items.outline)
    run = next(r for r in layout.runs if r.id == "link-L1")
    middle = 0.5 * (np.array(run.route[1]) + np.array(run.route[2]))
    (pixel,), _ = camera.pixels(middle)
    assert items.pick(camera, *pixel) == run.id
    hidden = _items(layout, Look(hidden=frozenset({"runs"})))
    assert hidden.pick(camera, *pixel) != run.id
    assert len(hidden.drawn.opaque.corners) < len(items.drawn.opaque.corners)
    nothing = _items(layout, Look(hidden=frozenset({"receptors", "labels"})))
    receptor = layout.receptors[0]
    (pixel,), _ = camera.pixels(receptor.at)
    assert items.pick(camera, *pixel) == receptor.id
    assert nothing.pick(camera, *pixel) != receptor.id


def test_selected_items_are_marked(layout: Layout) -> None:
    before, after = _items(layout), _items(layout, None, "link-L1")
    changed = np.any(before.drawn.opaque.colours != after.drawn.opaque.colours, axis=1)
    mesh = after.scene.mesh("conductor", "L1")
    assert mesh is not None
    assert changed.sum() >= len(mesh.of("link-L1"))
    assert any(lines.on_top for lines in after.drawn.lines)


def test_edges_of_a_box_are_its_twelve(layout: Layout) -> None:
    scene = space_scene(layout, conductors(layout))
    mesh = scene.mesh("zone")
    assert mesh is not None
    ends, owners = sharp_edges(mesh)
    for zone in range(len(mesh.items)):
        assert np.sum(owners == zone) == 12
    lengths = np.linalg.norm(ends[:, 0] - ends[:, 1], axis=1)
    assert lengths.min() > 0.5


@pytest.mark.parametrize("theme", [LIGHT, DARK])
def test_no_conductor_has_the_colour_of_the_paper(theme: Any) -> None:
    for label in ("L1", "L2", "L3", "N", "PE", "PEN", "L+", "L-", "stray"):
        assert contrast(space_colour(label, theme), theme.paper) >= 1.6


def test_geometry_that_cannot_be_is_told_and_the_rooms_still_show(
    layout: Layout,
) -> None:
    run = layout.runs[0]
    back = replace(run, route=(*run.route[:2], run.route[0]), start=None, end=None)
    items = _items(replaced(layout, back))
    assert items.problem
    assert items.scene.mesh("room") is not None


# -- following, picking, moving -------------------------------------------------------


def test_view_fits_draws_and_has_its_map_once_it_shows(view: SpaceView) -> None:
    canvas = view.canvas
    assert len(canvas.drawn.opaque.corners)
    assert [m.place.is_level for m in canvas.maps] == [True]
    assert canvas.cameras[-1].width == canvas.width()
    flat, _ = canvas.cameras[-1].pixels(view.items.outline)
    assert np.all(flat >= 0)
    assert np.all(flat <= (canvas.width(), canvas.height()))


def test_click_selects_and_shift_adds_and_takes_out(
    qtbot: QtBot, view: SpaceView, document: Document
) -> None:
    view.look("From above")
    places = {}
    for receptor in document.layout.receptors[-2:]:
        (pixel,), _ = view.camera.pixels(receptor.at)
        places[receptor.id] = QPoint(round(pixel[0]), round(pixel[1]))
    first, second = places
    QTest.mouseClick(view.canvas, Qt.MouseButton.LeftButton, pos=places[first])
    assert document.selection == {first}
    shift = Qt.KeyboardModifier.ShiftModifier
    QTest.mouseClick(view.canvas, Qt.MouseButton.LeftButton, shift, places[second])
    assert document.selection == {first, second}
    QTest.mouseClick(view.canvas, Qt.MouseButton.LeftButton, shift, places[first])
    assert document.selection == {second}


def test_drag_on_an_axis_previews_with_a_dimension_and_is_one_step(
    qtbot: QtBot, view: SpaceView, document: Document
) -> None:
    receptor = document.layout.receptors[-1]
    view.look("Looking +y")
    view.setFocus()
    QTest.keyClick(view, Qt.Key.Key_X)
    assert view.controls.axes["x"].isChecked()
    ends = [receptor.at, (receptor.at[0] - 1.0, *receptor.at[1:])]
    (a, b), _ = view.camera.pixels(ends)
    start = QPoint(round(a[0]), round(a[1]))
    way = QPoint(round(b[0] - a[0]), 40)
    QTest.mousePress(view.canvas, Qt.MouseButton.LeftButton, pos=start)
    QTest.mouseMove(view.canvas, start + way)
    assert document.is_previewing
    dimension = view.mover.dimension()
    assert dimension is not None
    assert dimension.text.endswith("m along x")
    QTest.mouseRelease(view.canvas, Qt.MouseButton.LeftButton, pos=start + way)
    moved = next(r for r in document.layout.receptors if r.id == receptor.id)
    assert moved.at[0] == pytest.approx(receptor.at[0] - 1.0, abs=0.1)
    assert moved.at[1:] == receptor.at[1:]
    assert document.undo_stack.count() == 1
    view.controls.way.setText("0.5 m")
    view.controls.way.returnPressed.emit()
    again = next(r for r in document.layout.receptors if r.id == receptor.id)
    assert again.at[0] == pytest.approx(moved.at[0] + 0.5)


def test_typed_heights_and_places_make_maps(
    qtbot: QtBot, view: SpaceView, told: list[str]
) -> None:
    view.controls.heights_typed.emit("0.5 1.0 1.5 m")
    view.controls.upright_chosen.emit("along a line")
    view.controls.place_typed.emit("0 1.35 to 9 1.35")
    qtbot.waitUntil(lambda: view.is_idle and len(view.canvas.maps) == 4, timeout=30_000)
    upright = view.canvas.maps[-1].place.plane
    assert upright.origin[:2] == (0.0, 1.35)
    assert upright.first == (9.0, 0.0, 0.0)
    assert "z 0.50, 1.00, 1.50 m" in view.caption()
    assert "from x 0.00 y 1.35 to x 9.00 y 1.35 m" in view.caption()
    view.controls.heights_typed.emit("high")
    assert told
    assert view.desk is not None
    assert view.desk.planes.heights == (0.5, 1.0, 1.5)


def test_upright_map_stands_on_the_profile_that_is_selected(
    qtbot: QtBot, view: SpaceView, told: list[str]
) -> None:
    document = view._document
    lines = tuple(
        Profile(id=id, name=id, path=((0.0, y, 1.0), (4.0, y, 1.0)))
        for id, y in (("one", 1.0), ("two", 2.0))
    )
    document.edit("Draw", added(document.layout, *lines))
    document.select({"two"})
    view.controls.upright_chosen.emit("along a profile")
    qtbot.waitUntil(lambda: view.is_idle and "along two" in view.caption(),
                    timeout=30_000)  # fmt: skip
    assert view.controls.place.text() == "two"
    view.controls.place_typed.emit("one")
    qtbot.waitUntil(lambda: view.is_idle and "along one" in view.caption(),
                    timeout=30_000)  # fmt: skip
    assert document.selection == {"one"}
    view.controls.place_typed.emit("nowhere")
    assert "There is no profile “nowhere”" in told[-1]


def test_dragged_level_map_takes_the_height_of_the_plan_along(
    qtbot: QtBot, view: SpaceView
) -> None:
    assert view.desk is not None
    (handle,) = view.desk.handles()
    (a, b), _ = view.camera.pixels([handle.at, (*handle.at[:2], handle.at[2] + 0.5)])
    start, end = (QPoint(round(p[0]), round(p[1])) for p in (a, b))
    QTest.mousePress(view.canvas, Qt.MouseButton.LeftButton, pos=start)
    QTest.mouseMove(view.canvas, end)
    assert view.desk.held
    QTest.mouseRelease(view.canvas, Qt.MouseButton.LeftButton, pos=end)
    height = view._view_state.look.height
    assert height == pytest.approx(handle.at[2] + 0.5, abs=0.1)


def test_picture_is_written_with_its_caption(view: SpaceView, tmp_path: Path) -> None:
    view.write(tmp_path / "space.png")
    image = QImage(str(tmp_path / "space.png"))
    assert image.width() == view.canvas.width()
    assert image.height() > view.canvas.height()
    assert view.canvas.theme is view.inks.theme
    assert "case Highest simultaneous load" in view.caption()
