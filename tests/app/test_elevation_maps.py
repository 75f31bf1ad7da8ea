"""Elevations in the window: their map, their plane, the readout, views along lines."""

from __future__ import annotations

from pathlib import Path

import msgspec
import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest

from app import preferences, recovery
from app.document import Document
from app.elevation_plane import chosen_place, drawn_lines, plane_text, upright_of
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.tools.look import HINT
from app.view_state import Look
from app.views.projection import LOOKING_X, LOOKING_Y
from engine import layout_file
from engine.edits import added, removed, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.places import Profile

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"
LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier


@pytest.fixture(scope="module")
def layout() -> Layout:
    return layout_file.read(SAMPLE)


@pytest.fixture
def window(qtbot, monkeypatch, tmp_path, layout):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    made = MainWindow(Document(empty_layout(preferences.Preferences())), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.resize(1360, 860)
    made.show()
    made.document.open(layout, SAMPLE)
    settle(made)
    return made


def settle(window: MainWindow) -> None:
    assert window.recompute.wait_until_idle(60)
    assert window.drawings.elevation_map.wait_until_idle(60)


def shown_map(window: MainWindow):
    return window.drawings.picture


# -- which plane ----------------------------------------------------------------


def test_the_plane_is_called_by_its_coordinate(layout):
    look = Look(plane_y=3.2, plane_x=-0.5)
    assert plane_text(layout, look, "Looking +y") == "vertical plane y 3.20 m"
    assert plane_text(layout, look, "Looking +x") == "vertical plane x −0.50 m"
    assert plane_text(layout, look, "Plan") == ""
    assert upright_of(layout, look, "Looking +x").sight is LOOKING_X


def test_a_selected_receptor_or_the_worst_place_of_a_zone_is_meant(layout):
    receptor, zone = layout.receptors[0], layout.zones[0]
    worst = {zone.id: (1.0, 2.0, 3.0)}
    assert chosen_place(layout, frozenset({receptor.id}), worst) == receptor.at
    assert chosen_place(layout, frozenset({zone.id}), worst) == (1.0, 2.0, 3.0)
    assert chosen_place(layout, frozenset({zone.id}), {}) is None
    assert chosen_place(layout, frozenset({layout.runs[0].id}), worst) is None


# -- in the window --------------------------------------------------------------


def test_an_elevation_shows_its_map_and_says_where(window):
    window.drawings.show_view("Looking +y")
    settle(window)
    picture = shown_map(window)
    assert picture is not None
    assert not picture.is_coarse
    assert not picture.is_stale
    assert picture.iso_lines
    depth = window.view_state.look.plane_y
    assert f"vertical plane y {depth:.2f} m" in window.caption_text()
    assert f"vertical plane y {depth:.2f} m" in picture.caption
    assert window.caption._plane.isVisible()
    assert not window.caption._zone.isVisible()
    window.drawings.show_view("Plan")
    assert "largest over heights" in window.caption_text()
    assert window.caption._zone.isVisible()


def test_the_first_plane_goes_through_the_selected_receptor(window):
    receptor = next(r for r in window.document.layout.receptors if r.at[1] != 3.3)
    window.document.select({receptor.id})
    window.drawings.show_view("Looking +y")
    assert window.view_state.look.plane_y == pytest.approx(receptor.at[1])
    window.drawings.show_view("Looking +x")
    assert window.view_state.look.plane_x == pytest.approx(receptor.at[0])


def test_through_selection_takes_the_worst_place_of_a_zone(window):
    window.drawings.show_view("Looking +x")
    settle(window)
    row = window.margins.tile.row
    window.document.select({row.place})
    QTest.mouseClick(window.drawings.strips["Looking +x"].through, LEFT)
    assert window.view_state.look.plane_x == pytest.approx(row.at[0])


def test_a_typed_plane_is_taken_and_a_wrong_one_says_why(window):
    window.drawings.show_view("Looking +y")
    field = window.drawings.strips["Looking +y"].depth_field
    field.line.selectAll()
    QTest.keyClicks(field.line, "1.6")
    QTest.keyClick(field.line, Qt.Key.Key_Return)
    assert window.view_state.look.plane_y == 1.6
    field.line.selectAll()
    QTest.keyClicks(field.line, "west")
    QTest.keyClick(field.line, Qt.Key.Key_Return)
    assert field.is_refused
    assert window.view_state.look.plane_y == 1.6


def test_steps_move_the_plane_by_the_grid(window):
    window.drawings.show_view("Looking +y")
    settle(window)
    window.drawings.planes.put("Looking +y", 3.0)
    strip, grid = window.drawings.strips["Looking +y"], window.drawings.front.grid
    QTest.mouseClick(strip.more, LEFT)
    assert window.view_state.look.plane_y == pytest.approx(3.0 + grid)
    QTest.mouseClick(strip.less, LEFT)
    QTest.mouseClick(strip.less, LEFT)
    assert window.view_state.look.plane_y == pytest.approx(3.0 - grid)


def test_the_line_on_the_plan_drags_the_plane(window):
    window.drawings.show_view("Looking +y")
    window.drawings.show_view("Plan")
    settle(window)
    plan = window.drawings.plan
    assert "vertical plane" in plan.marks
    camera = plan.camera()
    grip = camera.pixel(window.drawings.planes.line.handles()[0]).toPoint()
    selection = window.document.selection
    QTest.mouseMove(plan.viewport(), grip)
    assert plan.viewport().cursor().shape() == Qt.CursorShape.SizeVerCursor
    QTest.mousePress(plan.viewport(), LEFT, NONE, grip)
    for step in range(1, 61):
        QTest.mouseMove(plan.viewport(), grip - QPoint(0, step))
    QTest.mouseRelease(plan.viewport(), LEFT, NONE, grip - QPoint(0, 60))
    expected = camera.metres(QPointF(grip - QPoint(0, 60)))[1]
    found = window.view_state.look.plane_y
    assert found == pytest.approx(expected, abs=0.51 * plan.grid)
    assert found / plan.grid == pytest.approx(round(found / plan.grid))
    assert window.document.selection == selection
    window.view_state.set(hidden=frozenset({"upright plane"}))
    assert "vertical plane" not in plan.marks


def test_the_readout_on_an_elevation_is_the_field_on_its_plane(window, qtbot):
    window.drawings.show_view("Looking +x")
    window.drawings.planes.put("Looking +x", 4.1)
    settle(window)
    view = window.drawings.front
    pixel = QPoint(200, 150)
    across, z = view.camera().metres(QPointF(pixel))
    heard = []
    window.drawings.pointed.connect(lambda *at: heard.append(at))
    view.catches_places = False
    QTest.mouseMove(view.viewport(), pixel + QPoint(5, 0))
    QTest.mouseMove(view.viewport(), pixel)
    assert heard[-1] == pytest.approx((4.1, -across, z))


def test_editing_keeps_the_plane_and_renews_the_map(window):
    window.drawings.show_view("Looking +y")
    settle(window)
    before, depth = shown_map(window), window.view_state.look.plane_y
    run = window.document.committed.runs[0]
    route = tuple((x + 0.5, y, z) for x, y, z in run.route)
    moved = replaced(
        window.document.committed, msgspec.structs.replace(run, route=route)
    )
    window.document.preview(moved)
    settle(window)
    assert shown_map(window).is_coarse
    window.document.edit("Move it", moved)
    settle(window)
    assert not shown_map(window).is_coarse
    assert shown_map(window).image != before.image
    assert window.view_state.look.plane_y == depth


def test_a_map_that_belongs_to_nothing_any_more_says_so(window):
    drawings = window.drawings
    drawings.show_view("Looking +y")
    settle(window)
    drawings.elevation_map._call_stale()
    assert shown_map(window).is_stale
    assert "out of date" in window.caption._state.text()


def test_while_the_plan_is_hidden_it_is_not_computed(window):
    heard = []
    window.recompute.map_ready.connect(heard.append)
    window.drawings.show_view("Looking +y")
    settle(window)
    heard.clear()
    window.document.edit("Remove", removed(window.document.committed, "far"))
    settle(window)
    assert heard == []
    window.drawings.show_view("Plan")
    settle(window)
    assert heard
    assert not heard[-1].is_coarse


def test_going_to_a_place_puts_the_plane_through_it(window):
    window.drawings.show_view("Looking +y")
    window.drawings.look_at((1.0, 2.25, 3.0))
    assert window.view_state.look.plane_y == 2.25


def test_another_layout_forgets_the_planes(window, layout):
    window.drawings.show_view("Looking +x")
    window.drawings.planes.put("Looking +x", 99.0)
    window.document.open(layout, SAMPLE)
    assert window.view_state.look.plane_x != 99.0


def test_a_wide_window_shows_both_maps(window):
    window.drawings.set_wide(True)
    settle(window)
    views = window.drawings.views
    assert views["Plan"].isVisible()
    assert views["Looking +y"].isVisible()
    assert views["Looking +y"].drawing.map_layer.picture is not None
    assert "vertical plane" in views["Plan"].marks


# -- along a line ---------------------------------------------------------------


def test_along_a_line_the_layout_shows_by_the_distance_along_it(window):
    diagonal = Profile(
        id="diagonal", name="Diagonal", path=((1.0, 1.0, 1.0), (4.0, 5.0, 1.0))
    )
    window.document.edit("Draw it", added(window.document.committed, diagonal))
    window.document.select({"diagonal"})
    window.menus.acts.look_along()
    settle(window)
    drawings = window.drawings
    assert drawings.shown == "Along a line"
    assert shown_map(window) is not None
    assert "vertical plane along Diagonal" in window.caption_text()
    assert window.caption._view.currentText() == "Along Diagonal"
    mark = next(m for m in drawings.front.drawing.plan.receptors if m.item == "far")
    x, y, z = mark.at
    assert mark.seen == pytest.approx((0.6 * (x - 1.0) + 0.8 * (y - 1.0), z))
    heard = []
    drawings.pointed.connect(lambda *at: heard.append(at))
    drawings._point("Along a line", 5.0, 2.5)
    assert heard[-1] == pytest.approx((4.0, 5.0, 2.5))


def test_along_a_line_a_click_selects_and_nothing_moves(window):
    window.menus.acts.look_along()
    settle(window)
    view = window.drawings.front
    assert window.hint.toolTip() == HINT or HINT.startswith(window.hint.text()[:20])
    before = window.document.committed
    item = view.drawing.items_by_id["far"]
    at = view.camera().pixel(item.mark.seen).toPoint()
    QTest.mousePress(view.viewport(), LEFT, NONE, at)
    QTest.mouseMove(view.viewport(), at + QPoint(60, 0))
    QTest.mouseRelease(view.viewport(), LEFT, NONE, at + QPoint(60, 0))
    assert window.document.selection == {"far"}
    assert window.document.committed is before


def test_a_drawing_tool_leads_back_to_the_plan(window):
    window.menus.acts.look_along()
    window.toolbox.activate(window.toolbox.tools[8])  # measuring works there too
    assert window.drawings.shown == "Along a line"
    window.toolbox.activate(window.toolbox.tools[4])
    assert window.drawings.shown == "Plan"
    assert window.hint.text() != HINT


def test_the_view_follows_the_line_and_ends_with_it(window):
    window.menus.acts.look_along()
    layout = window.document.committed
    (profile, *_) = layout.profiles
    turned = msgspec.structs.replace(profile, path=((0.0, 0.0, 1.0), (1.0, 0.0, 1.0)))
    window.document.edit("Turn it", replaced(layout, turned))
    assert window.drawings.front.sight.right == (1.0, 0.0, 0.0)
    for each in layout.profiles:
        window.document.edit("Remove", removed(window.document.committed, each.id))
    assert window.drawings.shown == "Plan"
    with pytest.raises(UserError, match="no line to look along"):
        window.menus.acts.look_along()


def test_a_bent_profile_offers_each_part(layout):
    bent = Profile(
        id="bent", name="Bent", path=((0.0, 0.0, 1.0), (2.0, 0.0, 1.0), (2.0, 3.0, 1.0))
    )
    lines = drawn_lines(msgspec.structs.replace(layout, profiles=(bent,)))
    assert [line.title for line in lines] == ["Bent, part 1", "Bent, part 2"]
    assert np.allclose(lines[1].sight.right, (0.0, 1.0, 0.0))


def test_the_two_elevations_keep_planes_of_their_own(window):
    window.drawings.planes.put("Looking +y", 1.0)
    window.drawings.planes.put("Looking +x", 2.0)
    layout, look = window.document.layout, window.view_state.look
    assert upright_of(layout, look, "Looking +y").depth == 1.0
    assert upright_of(layout, look, "Looking +y").sight is LOOKING_Y
    assert upright_of(layout, look, "Looking +x").depth == 2.0


def test_the_exported_map_is_that_of_the_elevation_in_front(window, qtbot, tmp_path):
    window.drawings.show_view("Looking +x")
    window.drawings.planes.put("Looking +x", 4.1)
    with qtbot.waitSignal(window.jobs.ended, timeout=60_000):
        window.exports.map(tmp_path / "map.svg")
    text = (tmp_path / "map.svg").read_text(encoding="utf-8")
    assert "vertical plane x 4.10 m" in text


def test_what_a_tool_shows_stays_in_the_view_that_is_pointed_at(window):
    window.drawings.show_view("Looking +y")
    settle(window)
    views = window.drawings.views
    QTest.mouseMove(views["Looking +y"].viewport(), QPoint(200, 200))
    assert [v.has_pointer for v in views.values()] == [False, True, False]
    window.document.select({"riser"})
    window.drawings.show_view("Plan")
    settle(window)
    # Arrows pressed on the plan move on the plan.
    QTest.mouseMove(views["Plan"].viewport(), QPoint(200, 200))
    assert views["Plan"].has_pointer
    before = window.document.committed.by_id()["far"].at
    window.document.select({"far"})
    QTest.keyClick(views["Plan"], Qt.Key.Key_Up)
    x, y, z = window.document.committed.by_id()["far"].at
    assert (x, z) == (before[0], before[2])
    assert y > before[1]


def test_a_view_built_late_shows_the_selection(window):
    window.document.select({"far"})
    window.menus.acts.look_along()
    assert window.drawings.front.drawing.items_by_id["far"].is_selected


def test_the_caption_of_a_copied_picture_names_both_maps(window, monkeypatch):
    told = []
    monkeypatch.setattr(
        "app.window_acts.copy_picture", lambda _drawing, caption: told.append(caption)
    )
    window.drawings.planes.put("Looking +y", 3.2)
    window.menus.acts.put_picture()
    window.drawings.set_wide(True)
    window.menus.acts.put_picture()
    window.drawings.show_view("Looking +y")
    window.menus.acts.put_picture()
    alone, plan, elevation = told
    assert "beside" not in alone
    assert plan.endswith("· beside: vertical plane y 3.20 m")
    assert "vertical plane y 3.20 m" in elevation
    assert "· beside: plan, largest over heights, Office" in elevation
