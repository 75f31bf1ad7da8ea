"""The drawing shows the layout, and tells the tool where the pointer is in metres."""

from __future__ import annotations

from dataclasses import replace
from html import unescape
from pathlib import Path

import numpy as np
import pytest
from msgspec import structs
from PySide6.QtCore import QPoint, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QWheelEvent
from PySide6.QtTest import QTest

from app.document import Document
from app.map_picture import DrawnIsoLine, MapPicture, MaskedArea
from app.theme import DARK, LIGHT, contrast
from app.tools.select import SelectTool
from app.tools.tool import NOTHING, Dimension, Entry, Overlay, Tool
from app.view_state import ViewState
from app.views.camera import Camera
from app.views.drawing_view import DrawingView
from app.views.inks import Inks, conductor_colour
from app.views.labels import Importance, Label, placed, text_box
from app.views.overlay_painter import draw_overlay
from app.views.projection import LOOKING_X, LOOKING_Y, PLAN, SIGHTS, to_layout, to_view
from app.views.scale_bar import bar_text, grid_step
from engine.circuits import BalancedCurrent, Circuit
from engine.edits import added, removed, replaced
from engine.layout import Layout
from engine.layout_file import read
from engine.places import Receptor, Room, Zone
from engine.runs import CircuitShare, Flat, Run

SAMPLES = Path(__file__).parents[2] / "sample_layouts"
SQUARE = ((0.0, 0.0), (6.0, 0.0), (6.0, 4.0), (0.0, 4.0))
LEFT = Qt.MouseButton.LeftButton


def bars(y=2.0, item="bars", circuit="c"):
    return Run(
        id=item,
        name="Main bars",
        route=((1.0, y, 2.5), (5.0, y, 2.5)),
        section=Flat(circuits=(CircuitShare(circuit=circuit),)),
    )


def small_layout():
    return Layout(
        circuits=(
            Circuit(id="c", demand=BalancedCurrent(rms=100.0)),
            Circuit(id="idle"),
        ),
        rooms=(Room(id="room", outline=SQUARE, floor_level=0.0, ceiling_level=3.0),),
        runs=(bars(), bars(3.0, "idle bars", "idle")),
        zones=(Zone(id="zone", outline=SQUARE, floor_level=0.0),),
        receptors=(Receptor(id="desk", at=(2.0, 1.0, 1.0)),),
    )


class Notebook(Tool):
    """A tool that writes down what it is told."""

    def __init__(self):
        super().__init__()
        self.told = []
        self.held = None
        self.shown = NOTHING
        self.backs = True

    def anchor(self):
        return self.held

    def overlay(self):
        return self.shown

    def press(self, pointer):
        self.told.append(("press", pointer))

    def move(self, pointer):
        self.told.append(("move", pointer))

    def release(self, pointer):
        self.told.append(("release", pointer))

    def double_click(self, pointer):
        self.told.append(("double", pointer))

    def enter(self):
        self.told.append(("enter", None))

    def backspace(self):
        self.told.append(("backspace", None))

    def delete(self):
        self.told.append(("delete", None))

    def back(self):
        self.told.append(("back", None))
        return self.backs

    def nudge(self, dx, dy):
        self.told.append(("nudge", (dx, dy)))


@pytest.fixture
def shown(qtbot):
    document = Document(small_layout())
    view = DrawingView(document, ViewState())
    tool = Notebook()
    view.set_tool(tool)
    qtbot.addWidget(view)
    view.resize(800, 600)
    view.show()
    qtbot.waitExposed(view)
    return document, view, tool


def pixel(view, x, y):
    return view.camera().pixel((x, y)).toPoint()


def grabbed(view):
    return view.grab().toImage()


def test_everything_fits_at_the_start(shown):
    _, view, _ = shown
    assert view.camera().visible.contains(QRectF(0.0, 0.0, 6.0, 4.0))


def test_pixels_and_metres_agree_with_the_scene(shown):
    _, view, _ = shown
    at = view.mapFromScene(QPointF(2.0, 3.0))
    assert (at - pixel(view, 2.0, 3.0)).manhattanLength() <= 1
    assert pixel(view, 2.0, 3.0).y() < pixel(view, 2.0, 1.0).y()


def test_the_tool_hears_of_a_click_in_metres(shown):
    _, view, tool = shown
    view.catches_places = False
    QTest.mouseClick(view.viewport(), LEFT, pos=pixel(view, 2.5, 1.5))
    (pressed, first), (released, _) = tool.told
    assert (pressed, released) == ("press", "release")
    assert first.raw == pytest.approx((2.5, 1.5), abs=1 / view.camera().scale)
    assert first.reach == pytest.approx(5 / view.camera().scale)
    assert first.plane == "plan"


def test_a_click_near_a_corner_means_the_corner(shown):
    _, view, tool = shown
    QTest.mouseClick(view.viewport(), LEFT, pos=pixel(view, 6, 4) + QPoint(3, -3))
    assert tool.told[0][1].at == (6.0, 4.0)
    assert tool.told[0][1].caught == "vertex"


def test_hold_needs_an_anchor(shown):
    _, view, tool = shown
    view.catches_places = False
    view.holds_directions = True
    tool.held = (1.0, 1.0)
    QTest.mouseClick(view.viewport(), LEFT, pos=pixel(view, 4.0, 1.1))
    assert tool.told[0][1].at[1] == 1.0
    tool.held = None
    QTest.mouseClick(view.viewport(), LEFT, pos=pixel(view, 4.0, 1.1))
    pointer = tool.told[2][1]
    assert pointer.at == pointer.raw


def test_a_run_is_meant_by_its_band_and_a_room_by_its_outline(shown):
    _, view, tool = shown
    for at in ((3.0, 2.0), (0.0, 1.2), (4.5, 1.2), (2.0, 1.0)):
        QTest.mousePress(view.viewport(), LEFT, pos=pixel(view, *at))
    picks = [pointer.pick for _, pointer in tool.told]
    assert picks[0] == "bars"
    assert picks[1] in ("room", "zone")
    assert picks[2] is None
    assert picks[3] == "desk"


@pytest.mark.parametrize("sight", ["plan", "looking +y"])
def test_clicks_go_down_through_runs_over_each_other(shown, sight):
    document, view, _ = shown
    higher = structs.replace(bars(item="higher"), name="Higher bars")
    document.edit("Draw", added(document.layout, higher))
    if sight != "plan":
        view = DrawingView(document, ViewState(), sight=SIGHTS[sight])
    select = SelectTool(document, ViewState())
    view.set_tool(select)
    chosen = []
    for _ in range(3):
        at = view.camera().pixel((3.0, 2.0 if sight == "plan" else 2.5)).toPoint()
        QTest.mouseClick(view.viewport(), LEFT, pos=at)
        chosen.append(next(iter(document.selection)))
    under = set(view.pointer_at(QPointF(at), Qt.KeyboardModifier.NoModifier).under)
    assert {"bars", "higher"} <= under
    assert len(set(chosen)) == min(3, len(under))
    assert f"of {len(under)} here" in select.hint


def test_a_label_means_its_item(shown):
    _, view, tool = shown
    grabbed(view)
    label = next(e for e in view._picture.labels if e.label.item == "room")
    QTest.mousePress(view.viewport(), LEFT, pos=label.box.center().toPoint())
    assert tool.told[-1][1].pick == "room"


def test_the_wheel_zooms_at_the_pointer(shown):
    _, view, _ = shown
    at = QPointF(200.0, 150.0)
    before, scale = view.camera().metres(at), view.camera().scale
    event = QWheelEvent(
        at, view.mapToGlobal(at), QPoint(), QPoint(0, 120), Qt.MouseButton.NoButton,
        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    view.wheelEvent(event)
    assert view.camera().scale == pytest.approx(1.25 * scale)
    assert view.camera().metres(at) == pytest.approx(before, abs=2 / scale)


@pytest.mark.parametrize(
    "button", [Qt.MouseButton.RightButton, Qt.MouseButton.MiddleButton]
)
def test_right_and_middle_button_pan(shown, button):
    _, view, tool = shown
    before = view.camera()
    QTest.mousePress(view.viewport(), button, pos=QPoint(100, 100))
    QTest.mouseMove(view.viewport(), QPoint(130, 80))
    QTest.mouseRelease(view.viewport(), button, pos=QPoint(130, 80))
    after = view.camera()
    assert (after.left - before.left, after.top - before.top) == (30, -20)
    assert tool.told == []
    QTest.keyClick(view, Qt.Key.Key_Home)
    assert view.camera() == before


def test_keys_reach_the_tool_in_metres(shown):
    _, view, tool = shown
    step = view.grid
    for key in (
        Qt.Key.Key_Up, Qt.Key.Key_Left, Qt.Key.Key_Return, Qt.Key.Key_Backspace,
        Qt.Key.Key_Delete, Qt.Key.Key_Escape,
    ):  # fmt: skip
        QTest.keyClick(view, key)
    assert [name for name, _ in tool.told] == [
        "nudge", "nudge", "enter", "backspace", "delete", "back",
    ]  # fmt: skip
    assert tool.told[0][1] == (0.0, step)
    assert tool.told[1][1] == (-step, 0.0)


def test_an_edit_touches_only_what_changed(shown):
    document, view, _ = shown
    items = dict(view.drawing.items_by_id)
    still = items["idle bars"].run
    document.edit("Move the bars", replaced(document.layout, bars(2.5)))
    assert view.drawing.items_by_id["bars"] is items["bars"]
    assert items["bars"].run.route[0] == (1.0, 2.5)
    assert items["idle bars"].run is still
    document.edit("Remove the bars", removed(document.layout, "bars"))
    assert "bars" not in view.drawing.items_by_id
    document.undo_stack.undo()
    assert "bars" in view.drawing.items_by_id


def test_a_run_without_current_is_told_apart(shown):
    _, view, _ = shown
    assert view.drawing.items_by_id["bars"].has_current
    assert not view.drawing.items_by_id["idle bars"].has_current


def test_a_selected_run_shows_handles_at_its_vertices(shown):
    document, view, _ = shown
    at = pixel(view, 1.0, 2.0)
    before = grabbed(view).pixelColor(at)
    document.select(["bars"])
    picture = grabbed(view)
    assert picture.pixelColor(at) == QColor(LIGHT.paper) != before
    assert picture.pixelColor(at + QPoint(-4, 0)) == QColor(LIGHT.accent)


def test_runs_that_cannot_be_built_show_as_routes_with_the_reason(shown):
    document, view, _ = shown
    bent = structs.replace(
        bars(), route=((1.0, 2.0, 2.5), (5.0, 2.0, 2.5), (1.0, 2.01, 2.5))
    )
    document.preview(replaced(document.layout, bent))
    assert view.drawing.problem
    assert view.drawing.items_by_id["bars"].run.strands == ()
    assert len(view.drawing.items_by_id["idle bars"].run.strands) == 4
    grabbed(view)
    document.revert()
    assert view.drawing.problem == ""


def test_an_empty_place_speaks(qtbot):
    document = Document()
    view = DrawingView(document, ViewState())
    qtbot.addWidget(view)
    view.resize(600, 400)
    assert view.drawing.is_empty
    middle = grabbed(view).copy(100, 185, 400, 30)
    document.edit("Draw the room", Layout(rooms=small_layout().rooms))
    assert not view.drawing.is_empty
    assert grabbed(view).copy(100, 185, 400, 30) != middle


def test_hidden_layers_are_not_drawn_and_not_picked(qtbot, shown):
    document, _, tool = shown
    state = ViewState()
    view = DrawingView(document, state)
    qtbot.addWidget(view)
    view.resize(800, 600)
    view.set_tool(tool)
    state.set(hidden=frozenset({"runs", "labels"}))
    QTest.mousePress(view.viewport(), LEFT, pos=pixel(view, 3.0, 2.0))
    assert tool.told[-1][1].pick is None
    assert view._picture.labels == []


def picture(**changes):
    image = QImage(2, 2, QImage.Format.Format_RGBA8888_Premultiplied)
    image.fill(QColor(0, 0, 200))
    image.setPixelColor(0, 0, QColor(200, 0, 0))
    line = np.array([[0.0, 0.5], [6.0, 0.5]])
    made = MapPicture(
        image,
        (0.0, 0.0, 6.0, 4.0),
        iso_lines=(DrawnIsoLine("7.5 µT", True, line, (3.0, 0.5, 0.0)),),
        masked=(MaskedArea(np.array(SQUARE) / 4, "closed enclosure"),),
        marks=((7.5, "Client target"),),
    )
    return replace(made, **changes)


def test_the_first_row_of_a_map_lies_at_its_lower_edge(shown):
    _, view, _ = shown
    view.set_map(picture(iso_lines=(), masked=()))
    seen = grabbed(view)
    low = seen.pixelColor(pixel(view, 0.6, 0.3))
    high = seen.pixelColor(pixel(view, 0.6, 3.6))
    assert low.red() > low.blue()
    assert high.blue() > high.red()


def test_the_legend_names_a_direct_field(shown):
    _, view, _ = shown
    view.set_map(picture())
    assert view._legend.accessibleName().startswith("Legend: RMS flux density")
    view.set_map(picture(is_direct=True))
    assert view._legend.accessibleName().startswith("Legend: DC flux density")
    assert view._legend._head() == ["B, DC [µT]"]


def test_a_stale_map_has_no_colour_and_says_so(shown):
    _, view, _ = shown
    view.set_map(picture(is_stale=True, masked=(), iso_lines=()))
    colour = grabbed(view).pixelColor(pixel(view, 4.6, 1.4))
    assert max(colour.getRgb()[:3]) - min(colour.getRgb()[:3]) <= 2
    assert "out of date" in view._legend._head()


def test_the_legend_comes_and_goes_with_the_map(shown):
    _, view, _ = shown
    assert view._legend.isHidden()
    view.set_map(picture())
    assert not view._legend.isHidden()
    assert "µT" in view._legend.accessibleName()
    name = "Level of <b>the house</b> at 50 Hz, long-term, for everybody"
    view.set_map(picture(marks=((2.0, name),)))
    assert name in unescape(view._legend.toolTip())
    view.set_map(None)
    assert view._legend.isHidden()


def test_the_theme_can_change_while_running(shown):
    _, view, _ = shown
    view.set_map(picture())
    light = grabbed(view).pixelColor(790, 5)
    view.set_theme(DARK, 1.3)
    assert light.lightness() > 200 > 60 > grabbed(view).pixelColor(790, 5).lightness()


def test_the_overlay_of_a_tool_is_drawn_when_it_changes(qtbot, shown):
    _, view, tool = shown
    before = grabbed(view)
    tool.shown = Overlay(lines=(((1.0, 1.0), (5.0, 3.4)),), box=((4, 1), (5, 2)))
    tool.overlay_changed.emit()
    assert grabbed(view) != before


@pytest.mark.parametrize("sample", sorted(p.name for p in SAMPLES.glob("*.json")))
@pytest.mark.parametrize("sight", [PLAN, LOOKING_X, LOOKING_Y], ids=lambda s: s.name)
def test_every_sample_is_drawn_from_every_side(qtbot, sample, sight):
    document = Document(read(SAMPLES / sample))
    view = DrawingView(document, ViewState(), sight=sight)
    qtbot.addWidget(view)
    view.resize(700, 500)
    grabbed(view)
    assert len(view._picture.labels) > 3
    view.set_scale(600.0)
    grabbed(view)


@pytest.mark.parametrize("name", sorted(SIGHTS))
def test_projections_lead_back_to_where_they_came_from(name):
    place = (1.0, 2.0, 3.0)
    assert to_layout(SIGHTS[name], to_view(SIGHTS[name], place), place) == place


def test_labels_never_cover_each_other(qtbot):
    inks = Inks(LIGHT)
    same = ((100.0, 100.0), (100.0, 130.0))
    labels = [Label(f"text {i}", same, Importance.LETTER) for i in range(5)]
    labels.append(Label("important", same, Importance.RUN))
    found = placed(labels, inks, QRectF(0, 0, 300, 200))
    assert len(found) == 2
    assert found[0].label.text == "important"
    assert not found[0].box.intersects(found[1].box)


def test_labels_stay_in_the_frame_and_off_what_is_taken(qtbot):
    inks = Inks(LIGHT)
    label = Label("text", ((1.0, 1.0), (100.0, 100.0), (100.0, 150.0)), Importance.RUN)
    taken = [QRectF(80, 90, 40, 20)]
    (found,) = placed([label], inks, QRectF(0, 0, 300, 200), taken)
    assert found.box.center() == QPointF(100.0, 150.0)


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda t: t.name)
@pytest.mark.parametrize("letters", ["L1", "L2", "L3", "N", "PE", "L+", "L-", "X"])
def test_every_conductor_stands_out_from_the_paper(qtbot, theme, letters):
    # Its fill, or else the line around it.
    fill = conductor_colour(letters, theme)
    outline = Inks(theme).strand.color().name()
    best = max(contrast(fill, theme.paper), contrast(outline, theme.paper))
    assert best >= 3.0


def test_grid_steps_are_round_and_wide_enough():
    for scale in (0.5, 7.0, 60.0, 333.0, 4000.0):
        step = grid_step(scale, "m")
        assert 12.0 <= step * scale * (1 + 1e-9) <= 12.0 * 2.6
    assert grid_step(60.0, "ft") == pytest.approx(0.3048)


@pytest.mark.parametrize("unit", ["ft", "in"])
def test_grid_steps_in_feet_are_whole_parts_of_a_foot(unit):
    inch = 0.0254
    assert grid_step(160.0, unit) == pytest.approx(3 * inch)
    assert grid_step(13.0 / (0.25 * inch), unit) == pytest.approx(0.25 * inch)
    # Beyond five feet: 1-2-5 steps of a foot.
    assert grid_step(13.0 / (120 * inch), unit) == pytest.approx(120 * inch)
    assert grid_step(13.0 / (240 * inch), unit) == pytest.approx(240 * inch)
    assert bar_text(3 * inch, unit) == "3 in"
    assert bar_text(24 * inch, unit) == "2 ft"
    assert bar_text(2.0, "m") == bar_text(2.0, "mm") == "2 m"


def test_an_entry_keeps_what_it_does_not_say():
    last = (1.0, 2.0, 3.0)
    assert Entry("point", x=5.0).point(last) == (5.0, 2.0, 3.0)
    assert Entry("point", x=1.0, y=-1.0, is_relative=True).point(last) == (2, 1, 3)
    with pytest.raises(ValueError, match="no point"):
        Entry("point", x=5.0).point(None)
    with pytest.raises(ValueError, match="no point"):
        Entry("size", size=(2.0, 3.0)).point(last)


def test_texts_of_a_tool_keep_off_the_labels(qtbot, shown):
    view = shown[1]
    inks = view._inks
    image = QImage(400, 300, QImage.Format.Format_RGB32)
    camera = view.camera()
    at = camera.metres(QPointF(200.0, 150.0))
    label = text_box("Far desk", inks, QPointF(200.0, 132.0))
    taken = [label]
    painter = QPainter(image)
    draw_overlay(painter, Overlay(labels=((at, "z 3.10 m"),) * 3), camera, inks, taken)
    painter.end()
    assert len(taken) == 4
    for k, box in enumerate(taken):
        assert not any(box.intersects(other) for other in taken[:k])


def test_the_text_of_a_short_dimension_keeps_off_labels_on_either_side(qtbot, shown):
    inks, camera = shown[1]._inks, Camera(50.0, 0.0, 600.0, 800.0, 600.0)
    image = QImage(800, 600, QImage.Format.Format_RGB32)
    painter = QPainter(image)
    start, end = (8.0, 6.0), (8.0, 5.2)
    at = camera.pixel(start)
    # A label across the line, and the one under it.
    labels = [QRectF(at.x() - 300, at.y() - 10 + 22 * row, 600, 20) for row in range(3)]
    taken = [*labels]
    dimension = Dimension(start, end, "0.800 m from the −y wall of Riser shaft")
    draw_overlay(painter, Overlay(dimensions=(dimension,)), camera, inks, taken)
    painter.end()
    assert not any(taken[-1].intersects(label) for label in labels)
    assert abs(taken[-1].center().x() - at.x()) < 300
