"""The entry strip by keyboard: fields, words, faults, choices and toggles."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

import pytest
from PySide6.QtCore import QLocale, Qt
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QWidget
from pytestqt.qtbot import QtBot

from app.backing import place_backing_picture
from app.document import Document
from app.entry_strip import EntryStrip
from app.tools.calibrate import SCALE, CalibrateTool
from app.tools.run import RunTool
from app.tools.tool import Entry, Pointer
from app.view_state import ViewState


@pytest.fixture
def strip(qtbot: QtBot) -> Iterator[EntryStrip]:
    QLocale.setDefault(QLocale(QLocale.Language.English))
    # A window without a layout of its own: offscreen there are no size hints.
    window = QWidget()
    qtbot.addWidget(window)
    made = EntryStrip(window)
    window.resize(1280, 48)
    made.resize(1280, 48)
    window.show()
    qtbot.waitExposed(window)
    yield made
    window.close()


def typed(qtbot: QtBot, widget: object, text: str) -> None:
    qtbot.keyClicks(widget, text)
    qtbot.keyClick(widget, Qt.Key.Key_Return)


def test_words_reach_the_tool(strip: EntryStrip, qtbot: QtBot) -> None:
    document = Document()
    tool = RunTool(document, ViewState())
    strip.set_tool(tool)
    typed(qtbot, strip.words, "to 3.2 -0.35 z 2.6")
    typed(qtbot, strip.words, "go 2 toward 90")
    assert tool.points == ((3.2, -0.35, 2.6), (3.2, 1.65, 2.6))
    assert strip.words.text() == ""
    assert strip.height_shown.text() == "z 2.60 m"


def test_an_empty_field_leaves_its_keys_to_the_tool(
    strip: EntryStrip, qtbot: QtBot
) -> None:
    document = Document()
    tool = RunTool(document, ViewState())
    strip.set_tool(tool)
    for words in ("to 0 0 z 3", "by 4 0", "by 0 2", "by 0 7"):
        typed(qtbot, strip.words, words)
    qtbot.keyClick(strip.words, Qt.Key.Key_Backspace)
    qtbot.keyClick(strip.fields[0], Qt.Key.Key_Return)
    (run,) = document.committed.runs
    assert run.route == ((0.0, 0.0, 3.0), (4.0, 0.0, 3.0), (4.0, 2.0, 3.0))
    assert strip.fault.text() == ""
    qtbot.keyClick(strip.words, Qt.Key.Key_Return)
    assert "Nothing is entered" in strip.fault.text()


def test_tab_walks_through_the_labelled_fields(strip: EntryStrip, qtbot: QtBot) -> None:
    strip.activateWindow()
    strip.fields[0].setFocus()
    with qtbot.waitSignal(strip.entered) as entered:
        qtbot.keyClicks(strip.fields[0], "3.2")
        qtbot.keyClick(strip.fields[0], Qt.Key.Key_Tab)
        qtbot.keyClicks(strip.fields[1], "320mm")
        qtbot.keyClick(strip.fields[1], Qt.Key.Key_Tab)
        typed(qtbot, strip.fields[2], "2.6")
    assert entered.args == [Entry("point", 3.2, 0.32, 2.6)]
    strip.way.setFocus()
    order = [strip.way, *strip.fields, strip.words]
    for one, other in pairwise(order):
        qtbot.keyClick(one, Qt.Key.Key_Tab)
        assert strip.focusWidget() is other


@pytest.mark.parametrize(
    ("way", "texts", "entry"),
    [
        ("by", ("1", "", "-0.5"), Entry("point", 1.0, None, -0.5, is_relative=True)),
        ("go", ("2", "180", ""), Entry("point", -2.0, 0.0, None, is_relative=True)),
        ("size", ("10", "6", ""), Entry("size", size=(10.0, 6.0))),
    ],
)
def test_every_way_has_its_fields(
    strip: EntryStrip, qtbot: QtBot, way: str, texts: tuple[str, ...], entry: Entry
) -> None:
    strip.way.setCurrentText(way)
    for field, text in zip(strip.fields, texts, strict=True):
        field.setText(text)
    with qtbot.waitSignal(strip.entered) as entered:
        qtbot.keyClick(strip.fields[0], Qt.Key.Key_Return)
    assert entered.args == [entry]


def test_a_fault_is_told_beside_its_field_and_changes_nothing(
    strip: EntryStrip, qtbot: QtBot
) -> None:
    with qtbot.assertNotEmitted(strip.entered):
        typed(qtbot, strip.fields[1], "wide")
        assert "“wide” is not a length" in strip.fault.text()
        assert strip.fields[1].styleSheet()
        qtbot.keyClicks(strip.fields[1], "r")
        assert strip.fault.text() == ""
        typed(qtbot, strip.words, "size 10")
        assert "takes two lengths" in strip.fault.text()


def test_numbers_are_in_the_unit_shown(strip: EntryStrip, qtbot: QtBot) -> None:
    strip.set_unit("mm")
    assert "[mm]" in strip.fields[0].toolTip()
    with qtbot.waitSignal(strip.entered) as entered:
        typed(qtbot, strip.words, "to 100 250")
    assert entered.args == [Entry("point", 0.1, 0.25)]


def test_the_tools_choices_are_shown_and_taken(strip: EntryStrip, qtbot: QtBot) -> None:
    tool = RunTool(Document(), ViewState())
    strip.set_tool(tool)
    combo = strip._combos["next leg"]
    combo.textActivated.emit("riser up")
    assert tool.next_leg == "riser up"
    tool.choose("next leg", "level")
    assert combo.currentText() == "level"
    strip.set_tool(None)
    assert strip._combos == {}


def test_it_takes_a_second_row_where_the_drawing_is_narrow(strip: EntryStrip) -> None:
    strip.set_tool(RunTool(Document(), ViewState()))
    assert strip.minimumSizeHint().width() <= 560
    assert strip.heightForWidth(560) > strip.heightForWidth(1400)


def test_toggles_say_so(strip: EntryStrip, qtbot: QtBot) -> None:
    assert strip.catch.isChecked()
    assert not strip.hold.isChecked()
    with qtbot.waitSignal(strip.hold_toggled) as held:
        strip.hold.click()
    assert held.args == [True]
    with qtbot.waitSignal(strip.catch_toggled) as caught:
        strip.catch.click()
    assert caught.args == [False]


def test_escape_gives_the_keyboard_back(strip: EntryStrip, qtbot: QtBot) -> None:
    qtbot.keyClicks(strip.words, "to 1")
    with qtbot.waitSignal(strip.left):
        qtbot.keyClick(strip.words, Qt.Key.Key_Escape)
    assert strip.words.text() == ""


def test_everything_is_named_and_explained(strip: EntryStrip) -> None:
    for widget in (strip.way, *strip.fields, strip.words, strip.hold, strip.catch):
        assert widget.accessibleName()
        assert widget.toolTip()


def test_a_bare_length_is_asked_for_and_only_then(
    strip: EntryStrip, qtbot: QtBot
) -> None:
    document = Document()
    image = QImage(800, 600, QImage.Format.Format_RGB32)
    image.fill(0xFFFFFFFF)
    place_backing_picture(document, image)
    tool = CalibrateTool(document, ViewState())
    strip.set_tool(tool)
    assert strip.way.currentText() == "to"
    for typed_in, text in ((strip.fields[0], "8400mm"), (strip.words, "8.4")):
        for x in (1.0, 5.0):
            tool.press(Pointer((x, 1.0), (x, 1.0)))
        assert strip.way.currentText() == "length"
        typed(qtbot, strip.fields[0], "0")
        assert strip.fault.text() == "Enter a distance greater than 0."
        strip.fields[0].clear()
        typed(qtbot, typed_in, text)
        assert document.committed.backing_drawings[0].distance == 8.4
        assert strip.way.findText("length") < 0
        document.undo_stack.undo()
        tool.choose("step", SCALE)
