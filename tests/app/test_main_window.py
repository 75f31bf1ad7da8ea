"""The window: opens, shows the sample's map and margins, and closes."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from app import preferences, recovery
from app.document import Document
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.theme import DARK, LIGHT
from engine import layout_file
from engine.errors import UserError

SAMPLES = Path(__file__).parents[2] / "sample_layouts"


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


def open_sample(window: MainWindow, name: str) -> None:
    path = SAMPLES / f"{name}.json"
    window.document.open(layout_file.read(path), path)
    assert window.recompute.wait_until_idle(60)


def test_a_sample_opens_with_its_map_and_margins(window):
    open_sample(window, "small-switch-room")
    picture = window.drawings.plan.drawing.map_layer.picture
    assert picture is not None
    assert not picture.is_coarse
    assert not picture.is_stale
    assert window.margins.tile.row is not None
    assert window.margins.tile.row.state == "below"
    assert "small-switch-room.json" in window.windowTitle()


def test_the_caution_line_always_shows(window):
    assert "licensed practice decide" in window.margins.caution.text()
    assert window.margins.caution.isVisible()


def test_an_empty_layout_says_what_to_do(window):
    assert window.hint.text()
    assert window.margins.empty.isVisible()
    assert "zone" in window.margins.empty.text()


def test_escape_returns_from_a_page_to_the_drawing(window, qtbot):
    window.show_page(window.guide)
    qtbot.keyClick(window.guide, Qt.Key.Key_Escape)
    assert window.pages.currentWidget() is window.drawings


def test_escape_leaves_a_tool(window, qtbot):
    room = window.toolbox.tools[1]
    window.toolbox.activate(room)
    window.drawings.take_keyboard()
    qtbot.keyClick(window.drawings.plan, Qt.Key.Key_Escape)
    assert window.toolbox.active is window.toolbox.tools[0]


def test_both_themes_show(window, qtbot):
    open_sample(window, "small-switch-room")
    for theme in (DARK, LIGHT):
        window.set_theme(theme)
        qtbot.waitUntil(
            lambda wanted=theme.window: (
                window.palette().window().color().name() == wanted
            )
        )


def test_undo_says_what_it_takes_back(window):
    open_sample(window, "small-switch-room")
    window.document.select(["reception"])
    window.menus._show_unit("mG")
    assert window.menus._undo.text() == "Undo: Show mG"
    window.document.undo_stack.undo()
    assert window.menus._undo.text() == "Undo"


@pytest.mark.parametrize("size", [(1024, 576), (1280, 720), (1920, 1080)])
def test_the_drawing_keeps_its_room(window, size):
    window.resize(*size)
    assert window.width() <= size[0]
    assert window.height() <= size[1]
    if size[0] >= 1280:
        assert window.drawings.plan.width() >= 560
    assert window.drawings.plan.height() >= 280


def test_a_long_state_leaves_the_caption_in_one_row(window):
    open_sample(window, "small-switch-room")
    window.resize(1300, 800)
    QApplication.processEvents()
    # The map of the new size tells its own state.
    assert window.recompute.wait_until_idle(60)
    height = window.caption.height()
    sentence = "Circuit “Circuit 1”: enter the current of each conductor. " * 3
    window.caption.tell(sentence)
    QApplication.processEvents()
    assert window.caption.height() == height
    assert window.caption._state.text().endswith("…")
    assert window.caption._state.toolTip() == sentence
    window.caption.tell("coarse")
    assert window.caption._state.text() == "coarse"
    assert window.caption._state.toolTip() == ""


def test_fit_range_takes_what_the_map_shows(window):
    open_sample(window, "small-switch-room")
    picture = window.drawings.plan.drawing.map_layer.picture
    window.menus.acts.fit_range()
    settings = window.document.layout.settings
    assert settings.map_high == picture.extent[1]
    assert 0 < settings.map_low < settings.map_high
    assert window.menus._undo.text() == "Undo: Fit the map's range"


def test_fit_range_without_a_map_says_so(window):
    window.drawings.plan.drawing.map_layer.set_picture(None)
    with pytest.raises(UserError, match="no settled map"):
        window.menus.acts.fit_range()


def test_the_hint_speaks_of_the_table_that_takes_the_drawings_place(window):
    window.resize(1024, 576)
    open_sample(window, "small-switch-room")
    assert "select" in window.hint.text()
    window.margins.counts.click()
    assert window.hint.text().startswith("Click a row to see its place.")
    window.margins.caution.click()
    assert window.hint.text() == "Esc goes back to the drawing."
    window.margins.close_opened()
    assert "select" in window.hint.text()


@pytest.mark.parametrize(
    ("names", "said"),
    [
        (["notes.txt"], "notes.txt was not opened: it is neither a layout (.json)"),
        (["a.json", "b.json"], "Nothing was opened: several files were dropped."),
    ],
)
def test_what_is_dropped_and_cannot_be_opened_is_said(window, qtbot, names, said):
    told = []
    window.messages.told.connect(lambda _kind, text: told.append(text))
    before = window.document.layout
    window.menus.acts.open_dropped(names)
    assert window.document.layout is before
    assert told[-1].startswith(said)
