"""What a first visitor stumbled over, each once and not again."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import msgspec
import pytest
from hands import Hands
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent, QImage
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from reportlab.pdfgen.canvas import Canvas

from app import commands, preferences, recovery, start
from app.backing import place_backing_file
from app.caption_bar import CaptionBar, case_text
from app.document import Document
from app.files import SAMPLES, empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.panels.item_forms import heading
from app.theme import DARK, LIGHT
from app.view_state import ViewState
from app.views.cut_mark import cut_place
from app.views.inks import Inks
from engine import layout_file
from engine.circuits import LoadCase
from engine.edits import added, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.new_sources import with_new_run
from engine.places import Room, Storey

SMALL = SAMPLES / "small-switch-room.json"
KEY = Qt.Key


@pytest.fixture
def settings(monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")


@pytest.fixture
def window(qtbot, settings):
    made = MainWindow(Document(empty_layout(preferences.Preferences())), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.show()
    return made


def run_tool(window: MainWindow):
    tool = window.toolbox.tools[4]
    window.toolbox.activate(tool)
    return tool


def drawn_run(document: Document, *route: tuple[float, float, float]) -> str:
    layout, made = with_new_run(document.committed, route, "cable tray", "")
    document.edit("Draw a run", layout)
    document.select((made,))
    return made


# -- words ----------------------------------------------------------------------------


def test_caption_without_zone_names_the_height_and_shows_no_stray_dots(window):
    caption = window.caption
    assert caption._height.currentText() == "z 1.00 m (Ground floor +1.00)"
    hidden = [c for c in caption._dots if not c.isVisibleTo(caption)]
    assert hidden
    assert not any(caption._dots[choice].isVisibleTo(caption) for choice in hidden)


def test_a_title_that_says_case_is_not_called_case_again():
    named = Layout(load_cases=(LoadCase(id="a", name="Load case 1"),))
    assert case_text(named, "a") == "Load case 1"
    other = Layout(load_cases=(LoadCase(id="a", name="Highest operation"),))
    assert case_text(other, "a") == "case Highest operation"


def test_a_room_called_room_is_not_a_room_room():
    outline = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))
    room = Room(
        id="r", name="Room 1", outline=outline, floor_level=0.0, ceiling_level=3.0
    )
    assert heading((room,)) == "Room 1"
    assert heading((msgspec.structs.replace(room, name="Office"),)) == "Room Office"


def test_the_hint_belongs_to_what_is_shown(window):
    run_tool(window)
    drawing_hint = window.hint.sentence
    window.open_section(drawn_run(window.document, (0, 0, 2), (4, 0, 2)))
    assert "Esc goes back to the drawing" in window.hint.sentence
    window.show_drawing()
    assert window.hint.sentence == drawing_hint


# -- keys -----------------------------------------------------------------------------


def test_every_menu_opens_by_a_key_of_its_own(window):
    titles = [action.text() for action in window.menuBar().actions()]
    keys = [title[title.index("&") + 1].lower() for title in titles]
    assert len(set(keys)) == len(keys)


def test_the_draw_menu_shows_the_keys_of_the_tools(window):
    draw = next(a for a in window.menuBar().actions() if a.text() == "&Draw").menu()
    keys = [action.shortcut().toString() for action in draw.actions()[:9]]
    assert keys == [str(number) for number in range(1, 10)]


def test_tab_leads_from_a_begun_drawing_to_the_entry_strip(window, qtbot):
    run_tool(window)
    window.drawings.take_keyboard()
    QTest.keyClick(window.drawings.plan, KEY.Key_Tab)
    assert window.strip.fields[0].hasFocus()


def test_words_typed_on_the_drawing_go_into_the_entry_strip(window, qtbot):
    tool = run_tool(window)
    window.drawings.take_keyboard()
    QTest.keyClicks(window.drawings.plan, "t")
    QTest.keyClicks(window.strip.words, "o 1 2 z 3")
    QTest.keyClick(window.strip.words, KEY.Key_Return)
    assert tool._points == [(1.0, 2.0, 3.0)]


def test_a_new_layout_is_chosen_by_keys_at_once(window, qtbot):
    window.show_page(window.new_page)
    assert QApplication.focusWidget() in window.new_page.buttons


# -- risers and cuts ------------------------------------------------------------------


def test_a_riser_leads_to_the_next_floor(window):
    document = window.document
    first = Storey(id="first", name="First floor", floor_level=4.0)
    document.edit("Add a storey", added(document.committed, first))
    made = drawn_run(document, (0, 0, 2.5), (5, 0, 2.5))
    commands.raise_selected_run(document)
    assert document.committed.by_id()[made].route[-1] == (5.0, 0.0, 4.0)
    commands.raise_selected_run(document)
    assert document.committed.by_id()[made].route[-2:] == ((5, 0, 2.5), (5, 0, 7.5))


def test_a_connected_end_is_not_led_on(window):
    sample = layout_file.read(SAMPLES / "office-over-switch-room.json")
    window.document.open(sample, None)
    run = next(run for run in sample.runs if run.end is not None)
    window.document.select((run.id,))
    with pytest.raises(UserError, match="connected"):
        commands.raise_selected_run(window.document)


def test_the_run_tool_rises_from_its_last_vertex(window):
    tool = run_tool(window)
    assert not tool.rise()
    tool._add((1.0, 1.0, 2.0))
    window.menus.acts.rise(down=False)
    assert tool._points[-1] == (1.0, 1.0, 5.5)


def test_the_cut_looks_along_the_first_leg_that_shows():
    route = [(1.0, 1.0), (1.0, 1.0), (1.0, 7.0)]
    assert cut_place(route, from_end=False) == ((1.0, 2.0), (0.0, 1.0))
    assert cut_place(route, from_end=True) == ((1.0, 2.0), (-0.0, -1.0))
    assert cut_place(route[:2], from_end=False) is None


# -- results --------------------------------------------------------------------------


def test_margins_held_as_before_stand_beside_the_new_ones(window):
    window.document.open(layout_file.read(SMALL), None)
    assert window.recompute.wait_until_idle(60)
    before = window.margins.tile.row
    window.menus._held.trigger()
    circuit = next(c for c in window.document.committed.circuits if c.demand)
    doubled = msgspec.structs.replace(circuit, demand=None)
    window.document.edit(
        "Take the current", replaced(window.document.committed, doubled)
    )
    assert window.recompute.wait_until_idle(60)
    assert before is not None
    assert "was " in window.margins.tile.value.whole
    window.document.open(layout_file.read(SMALL), None)
    assert window.recompute.wait_until_idle(60)
    assert "was" not in window.margins.tile.value.whole
    assert not window.menus._held.isChecked()


def test_nothing_is_held_where_there_is_no_margin(window):
    window.menus._held.trigger()
    assert not window.menus._held.isChecked()
    assert "no margin to hold" in window.message_bar.sentence


def test_a_result_is_copied_as_sentence_and_as_picture(window):
    window.document.open(layout_file.read(SMALL), None)
    assert window.recompute.wait_until_idle(60)
    action = next(a for a in window.actions() if a.text() == "Copy as sentence")
    action.trigger()
    copied = QApplication.clipboard().text()
    row = window.margins.tile.row
    assert row is not None
    assert copied.startswith(row.place_title)
    assert copied.endswith(".")
    next(a for a in window.actions() if a.text() == "Copy picture").trigger()
    picture = QApplication.clipboard().image()
    assert picture.height() > window.drawings.height()


# -- files ----------------------------------------------------------------------------


def test_the_first_sample_cannot_be_saved_over(qtbot, settings):
    window = start.started(None)
    qtbot.addWidget(
        window, before_close_func=lambda w: w.document.undo_stack.setClean()
    )
    assert window.document.layout.runs
    assert window.document.path is None
    assert not window.document.is_modified


def test_work_brought_back_is_kept_before_its_copy_goes(qtbot, settings, tmp_path):
    layout = added(Layout(), Storey(id="ground", floor_level=0.0))
    copy = tmp_path / "unsaved" / "work-1.json"
    copy.parent.mkdir()
    layout_file.write(copy, layout)
    ended = subprocess.Popen([sys.executable, "-c", ""])
    ended.wait()
    note = {"path": "", "process": ended.pid}
    copy.with_suffix(".note").write_bytes(msgspec.json.encode(note))
    window = start.started(None)
    qtbot.addWidget(
        window, before_close_func=lambda w: w.document.undo_stack.setClean()
    )
    assert window.document.committed == layout
    assert window.autosave.copy.exists()
    assert not copy.exists()


def test_what_was_told_of_another_layout_goes_with_it(window):
    window.message_bar.offer("The file was changed.", "Read it again", lambda: None)
    assert window.message_bar.isVisible()
    window.document.open(layout_file.read(SMALL), None)
    assert not window.message_bar.isVisible()


def test_a_file_changed_outside_is_read_again_by_one_button(window, tmp_path):
    path = tmp_path / "room.json"
    layout_file.write(path, empty_layout(preferences.Preferences()))
    assert window.files.open(path)
    path.write_bytes(SMALL.read_bytes())
    window.files.changed_outside.emit(path)
    window.message_bar._offer.click()
    assert window.document.committed == layout_file.read(SMALL)


def test_a_layout_opened_from_a_page_shows_its_drawing(window):
    window.show_page(window.guide)
    assert window.files.open(SMALL)
    assert window.pages.currentWidget() is window.drawings


def test_a_recent_file_that_is_gone_says_so(window, tmp_path):
    window.menus.acts.open_recent(str(tmp_path / "gone.json"))
    assert "not there any more" in window.message_bar.sentence


def test_a_dropped_layout_opens(window):
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(SMALL))])
    event = QDropEvent(
        QPointF(10, 10),
        Qt.DropAction.CopyAction,
        data,
        Qt.MouseButton.LeftButton,
        Qt.KeyboardModifier.NoModifier,
    )
    window.dropEvent(event)
    assert window.document.path == Path(SMALL)


# -- look -----------------------------------------------------------------------------


def test_state_and_load_case_follow_the_colours_of_the_window(window):
    window.document.open(layout_file.read(SMALL), None)
    assert window.recompute.wait_until_idle(60)
    row = window.margins.tile.row
    assert row is not None
    assert row.state == "below"
    for theme in (DARK, LIGHT):
        window.set_theme(theme)
        QApplication.processEvents()
        assert theme.below in window.margins.tile.state.styleSheet()
        assert theme.muted in window.margins.tile.case.styleSheet()
        assert window.levels.table.model._muted.name() == theme.muted


def test_the_readout_is_whole_where_the_window_is_narrow(window, qtbot):
    window.resize(1024, 576)
    window.readout.setText("7.86 4.04 4.60 m (Office +0.50) · 12.2 µT " * 2)
    qtbot.waitUntil(lambda: window.readout.width() >= window.readout.sizeHint().width())
    window.hint.say("A sentence that is long enough to need more room " * 3)
    assert window.hint.text().endswith("…")
    assert window.hint.toolTip() == window.hint.sentence


def test_a_narrow_view_keeps_the_legend_narrow(window):
    window.document.open(layout_file.read(SMALL), None)
    window.resize(1024, 576)
    assert window.recompute.wait_until_idle(60)
    plan = window.drawings.plan
    assert plan._legend.width() < 0.35 * plan.viewport().width()


def test_lines_are_as_wide_on_a_fine_screen_as_on_a_coarse_one():
    assert Inks(LIGHT, 1.0, 2.0).room.widthF() == 2 * Inks(LIGHT).room.widthF()


def test_the_first_window_fits_the_screen(window):
    room = window.screen().availableGeometry()
    assert window.width() <= max(room.width(), window.minimumWidth())
    assert window.height() <= max(room.height(), window.minimumHeight())


def test_items_are_selected_one_after_the_other_by_key(window):
    document = window.document
    with pytest.raises(UserError, match="Nothing is drawn"):
        commands.select_next(document)
    document.open(layout_file.read(SMALL), None)
    ids = [item.id for item in commands.drawn(document.layout)]
    seen = []
    for _ in ids:
        commands.select_next(document)
        seen += list(document.selection)
    assert seen == ids
    commands.select_next(document)
    assert document.selection == {ids[0]}
    commands.select_next(document, -1)
    assert document.selection == {ids[-1]}


def test_largest_over_heights_is_offered_only_with_a_zone(window):
    assert not window.rail.largest.isVisible()
    window.document.open(layout_file.read(SMALL), None)
    assert window.rail.largest.isVisible()


def test_a_drawing_placed_is_calibrated_at_once_under_the_view_in_front(
    window, qtbot, tmp_path
):
    picture = QImage(40, 30, QImage.Format.Format_RGB32)
    picture.fill(0xFFFFFF)
    path = tmp_path / "plan.png"
    assert picture.save(str(path))
    window.drawings.show_view("Looking +x")
    with qtbot.waitSignal(window.jobs.ended):
        window.menus.acts.open_dropped([str(path)])
    (drawing,) = window.document.committed.backing_drawings
    assert drawing.view == "looking +x"
    assert window.toolbox.active is window.toolbox.calibrate
    assert "first of two points" in window.hint.sentence


def test_of_a_drawing_of_several_pages_one_is_asked_for(window, qtbot, tmp_path):
    path = tmp_path / "floors.pdf"
    canvas = Canvas(str(path), pagesize=(300, 200))
    for number in range(3):
        canvas.rect(10, 10, 50 + 10 * number, 50)
        canvas.showPage()
    canvas.save()
    told = []
    window.jobs.progressed.connect(lambda _share, doing: told.append(doing))
    with qtbot.waitSignal(window.jobs.ended):
        window.menus.acts.open_dropped([str(path)])
    assert window.ask_bar.isVisible()
    (field,) = window.ask_bar.fields
    assert field.accessibleName() == "page, 1 to 3"
    field.setText("4")
    QTest.keyClick(field, KEY.Key_Return)
    assert window.ask_bar.isVisible()
    assert not window.document.committed.backing_drawings
    field.setText("3")
    with qtbot.waitSignal(window.jobs.ended):
        QTest.keyClick(field, KEY.Key_Return)
    (drawing,) = window.document.committed.backing_drawings
    assert drawing.page == 3
    assert "Drawing page 3" in told
    assert window.toolbox.active is window.toolbox.calibrate


def test_a_page_chosen_later_is_drawn_in_the_background(window, qtbot, tmp_path):
    path = tmp_path / "floors.pdf"
    canvas = Canvas(str(path), pagesize=(300, 200))
    for _ in range(2):
        canvas.rect(10, 10, 50, 50)
        canvas.showPage()
    canvas.save()
    place_backing_file(window.document, path)
    form = window.item._picture
    with qtbot.waitSignal(window.jobs.ended):
        form.page.setValue(2)
        assert window.document.committed.backing_drawings[0].page == 1
    assert window.document.committed.backing_drawings[0].page == 2
    assert form.page.value() == 2


def test_a_file_that_is_no_drawing_says_so_after_the_job(window, qtbot, tmp_path):
    path = tmp_path / "notes.png"
    path.write_text("no picture")
    with qtbot.waitSignal(window.jobs.ended):
        window.menus.acts.open_dropped([str(path)])
    assert "neither a PDF nor a PNG" in window.message_bar.sentence


def test_a_height_is_not_cut_where_names_give_way(qtbot):
    layout = layout_file.read(SAMPLES / "office-over-switch-room.json")
    caption = CaptionBar(Document(layout), ViewState())
    qtbot.addWidget(caption)
    caption.setFixedWidth(600)
    caption.show()
    assert caption._height.width() >= caption._height.width_of_text()
    assert caption._case.width() < caption._case.width_of_text()


@pytest.mark.parametrize("width", [420, 560, 654, 800, 1100])
def test_every_part_of_the_caption_lies_in_it(qtbot, width):
    layout = layout_file.read(SAMPLES / "office-over-switch-room.json")
    caption = CaptionBar(Document(layout), ViewState())
    qtbot.addWidget(caption)
    caption.show()
    caption.resize(width, caption.heightForWidth(width))

    def all_lie_inside():
        return all(
            caption._choices.rect().contains(group.geometry())
            and group.rect().contains(part.geometry())
            for part, group in caption._groups.items()
            if group.isVisible()
        )

    qtbot.waitUntil(all_lie_inside)
    assert caption._case.isVisible()


def test_pages_show_of_the_caption_what_they_follow(window):
    window.show_page(window.guide)
    assert not window.caption.isVisible()
    window.show_page(window.section)
    assert window.caption._case.isVisible()
    assert not window.caption._height.isVisible()
    window.show_drawing()
    assert window.caption._height.isVisible()


def test_nothing_moves_when_something_is_told(window, qtbot):
    """The drawing stays under the pointer, whatever message or fault comes."""
    drawing = window.drawings
    before = (drawing.mapTo(window, drawing.rect().topLeft()), drawing.size())
    window.messages.warn("The layout has no place for what was typed. " * 6)
    window.strip.words.setText("put 3 4")
    window.strip.words.returnPressed.emit()
    QTest.qWait(1)
    assert window.message_bar.slip.isVisible()
    assert window.strip.fault.isVisible()
    assert (drawing.mapTo(window, drawing.rect().topLeft()), drawing.size()) == before
    slip = window.message_bar.slip
    assert slip.height() >= slip.heightForWidth(slip.width())
    assert window.rect().contains(slip.geometry())
    window.message_bar.hide()
    assert not slip.isVisible()


def test_a_refusal_goes_when_the_work_goes_on(window):
    layout = layout_file.read(SMALL)
    window.document.open(layout, None)
    run = msgspec.structs.replace(layout.runs[0], name="Another")
    window.messages.refuse("Enter both x and y of the place.")
    assert window.message_bar.isVisible()
    window.document.preview(replaced(layout, run))
    window.document.revert()
    assert window.message_bar.isVisible()
    window.toolbox.activate(window.toolbox.tools[1])
    assert not window.message_bar.isVisible()
    window.messages.refuse("Enter both x and y of the place.")
    window.document.edit("Name a run", replaced(layout, run))
    assert not window.message_bar.isVisible()
    window.messages.warn("The file was changed by another program.")
    window.document.undo_stack.undo()
    assert window.message_bar.isVisible()


@pytest.mark.parametrize("width", [1024, 1280, 1600])
def test_a_change_of_tool_moves_nothing(window, width):
    window.resize(width, 700)
    heights = set()
    for tool in window.toolbox.tools:
        window.toolbox.activate(tool)
        QTest.qWait(1)
        heights.add(window.strip.height())
    assert len(heights) == 1


def test_the_drawing_keeps_its_width_beside_a_narrow_rail(window):
    window.resize(1360, 860)
    QTest.qWait(1)
    assert window.rail.largest.text() == "Largest over heights"
    window.resize(1024, 576)
    QTest.qWait(1)
    assert window.drawings.plan.width() >= 560
    assert window.rail.largest.text() == "Largest"


def test_a_number_goes_on_with_what_is_half_drawn(window, qtbot):
    """It chose another tool before, and the half-drawn run was gone."""
    hands = Hands(qtbot, window)
    window.document.open(layout_file.read(SMALL), None)
    hands.plan.setFocus()
    hands.type("5")
    assert window.toolbox.active.name == "Run"
    hands.point(1.0, 1.0)
    hands.type("3.5")
    hands.key(Qt.Key.Key_Tab)
    hands.type("1")
    hands.key(Qt.Key.Key_Return)
    assert window.toolbox.active.name == "Run"
    _, second = window.toolbox.active.points
    assert second[:2] == (3.5, 1.0)
    hands.plan.setFocus()
    for _ in range(2):
        hands.key(Qt.Key.Key_Escape)
    hands.type("2")
    assert window.toolbox.active.name == "Room"


def test_tab_comes_to_a_message_before_what_lies_beneath(window):
    window.messages.warn("Something is to be told.")
    order = [window.strip.catch]
    while order[-1] is not window.strip.catch or len(order) == 1:
        order.append(order[-1].nextInFocusChain())
    assert window.message_bar._close in order
    assert order.index(window.message_bar._close) < order.index(window.rail.entry)
    assert order.index(window.message_bar._close) < order.index(window.drawings.plan)
