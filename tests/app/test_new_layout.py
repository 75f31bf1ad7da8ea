"""The page New layout by keyboard: what is chosen is what the engine makes."""

from __future__ import annotations

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor

from app import preferences
from app.files import empty_layout
from app.new_layout import NewLayoutPage
from app.preferences import Preferences
from app.starter_choices import BEGINNINGS
from app.theme import LIGHT, apply, theme_for
from engine.faults import faults
from engine.starters import run_past_room, transformer_link_board

AMERICAN = Preferences(
    frequency=60, flux_density_unit="mG", length_unit="ft", paper="Letter"
)


@pytest.fixture
def page(qtbot):
    made = NewLayoutPage(Preferences())
    qtbot.addWidget(made)
    made.resize(1000, 620)
    made.show()
    return made


def entered(qtbot, field, text):
    field.line.setFocus()
    field.line.selectAll()
    qtbot.keyClicks(field.line, text)
    qtbot.keyClick(field.line, Qt.Key.Key_Tab)


def test_starting_at_once_gives_the_first_starter(page, qtbot):
    with qtbot.waitSignal(page.chosen) as chosen:
        qtbot.keyClick(page, Qt.Key.Key_Return)
    assert chosen.args == [transformer_link_board()]


def test_typed_values_reach_the_layout(page, qtbot):
    page.buttons[2].setChecked(True)
    entered(qtbot, page.fields["current"], "1.6 kA")
    entered(qtbot, page.fields["distance"], "320mm")
    page.fields["where"].setCurrentIndex(0)
    page.fields["where"].activated.emit(0)
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    assert chosen.args == [run_past_room("over", current=1600.0, distance=0.32)]


def test_a_value_still_being_typed_counts(page, qtbot):
    page.activateWindow()
    page.fields["link"].line.setFocus()
    page.fields["link"].line.selectAll()
    qtbot.keyClicks(page.fields["link"].line, "3")
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    assert chosen.args == [transformer_link_board(link=3.0)]


def test_a_refused_value_starts_nothing(page, qtbot):
    entered(qtbot, page.fields["link"], "1")
    assert "at least 2 m" in page.fields["link"].reason.text()
    with qtbot.assertNotEmitted(page.chosen):
        page.start.click()


def test_empty_is_a_ground_floor_in_the_users_units(qtbot):
    page = NewLayoutPage(AMERICAN)
    qtbot.addWidget(page)
    page.show()
    page.buttons[0].setChecked(True)
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    assert chosen.args == [empty_layout(AMERICAN)]


@pytest.mark.parametrize("index", [1, 2, 3])
def test_starters_take_the_users_units(qtbot, index):
    page = NewLayoutPage(AMERICAN)
    qtbot.addWidget(page)
    page.show()
    page.buttons[index].setChecked(True)
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    (layout,) = chosen.args
    assert layout.settings.frequency == 60.0
    assert {circuit.base_frequency for circuit in layout.circuits} == {60.0}
    assert layout.settings.length_unit == "ft"
    assert layout.settings.paper == "Letter"
    codes = {remark.code for remark in faults(layout, layout.cases[0])}
    assert codes <= {"W18"}


def test_values_are_kept_when_another_way_was_looked_at(page, qtbot):
    entered(qtbot, page.fields["current"], "950")
    page.buttons[3].setChecked(True)
    page.buttons[1].setChecked(True)
    assert page.fields["current"].line.text() == "950 A"


def test_the_preview_draws_in_the_themes_colours(page, qtbot):
    apply(LIGHT)
    qtbot.waitUntil(lambda: theme_for(page.preview.palette()) is LIGHT)
    page.buttons[3].setChecked(True)
    image = page.preview.grab().toImage()
    colours = {
        image.pixelColor(x, y).name()
        for x in range(0, image.width(), 2)
        for y in range(0, image.height(), 2)
    }
    assert {LIGHT.paper, LIGHT.text} <= colours
    page.buttons[0].setChecked(True)
    blank = page.preview.grab().toImage()
    assert QColor(LIGHT.paper) == blank.pixelColor(10, 10)


def test_escape_goes_back(page, qtbot):
    with qtbot.waitSignal(page.closed):
        qtbot.keyClick(page.buttons[1], Qt.Key.Key_Escape)


def test_lengths_begin_round_in_feet(qtbot):
    page = NewLayoutPage(AMERICAN)
    qtbot.addWidget(page)
    page.show()
    assert page.fields["link"].line.text() == "16.50 ft"
    page.buttons[2].setChecked(True)
    assert page.fields["distance"].line.text() == "1.50 ft"
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    (made,) = chosen.args
    assert made.runs[0].route[0][2] == pytest.approx(-1.5 * 0.3048)
    page.buttons[3].setChecked(True)
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    names = [storey.name for storey in chosen.args[0].storeys]
    assert names == ["Ground floor", "Storey 1", "Storey 2"]


def test_arrow_keys_go_on_from_what_is_chosen(page, qtbot):
    page.activateWindow()
    page.setFocus()
    qtbot.keyClick(page.focusWidget(), Qt.Key.Key_Down)
    assert page.beginning.name == "Run past a room"
    page.start.setFocus()
    page.setFocus()
    qtbot.keyClick(page.focusWidget(), Qt.Key.Key_Down)
    assert page.beginning.name == "Riser past a room"


def test_what_new_layouts_use_can_be_chosen_again(qtbot, monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    page = NewLayoutPage()
    qtbot.addWidget(page)
    page.show()
    assert page.uses is None, "the first start asks for it"
    page.hide()
    preferences.save(replace(AMERICAN, chosen=True, recent=("room.json",)))
    page.show()
    assert page.fields["link"].line.text() == "16.50 ft"
    page.uses.buttons["length_unit", "m"].click()
    page.uses.buttons["frequency", 50].click()
    assert page.fields["link"].line.text() == "5.00 m"
    kept = preferences.load()
    assert (kept.length_unit, kept.frequency, kept.recent) == ("m", 50, ("room.json",))
    with qtbot.waitSignal(page.chosen) as chosen:
        page.start.click()
    settings = chosen.args[0].settings
    assert (settings.length_unit, settings.frequency) == ("m", 50.0)
    assert settings.flux_density_unit == "mG"


def test_in_feet_texts_and_the_exported_grid_are_too(qtbot):
    made = NewLayoutPage(AMERICAN)
    qtbot.addWidget(made)
    made.show()
    assert "an office of 19.7 × 16.4 ft." in made._abouts[2].text()
    assert "ft" in made.buttons[2].toolTip()
    for begun in BEGINNINGS:
        values = begun.defaults("ft")
        assert begun.layout(AMERICAN, values).settings.grid_step == 0.3048
        metric = begun.layout(Preferences(), begun.defaults("m"))
        assert metric.settings.grid_step == 0.25


def test_in_metres_the_office_is_said_in_metres(page):
    assert page._abouts[2].text().endswith("an office of 6 × 5 m.")
