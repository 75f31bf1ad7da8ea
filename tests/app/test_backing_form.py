"""The form of a backing drawing, and what placing one does to document and history."""

from __future__ import annotations

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QImage, QPainter
from PySide6.QtWidgets import QStyleOptionGraphicsItem
from reportlab.pdfgen.canvas import Canvas

from app import backing
from app.document import Document
from app.panels.backing import BackingForm
from app.panels.item import ItemPanel
from app.theme import DARK, LIGHT
from app.view_state import ViewState
from app.views.backing_item import BackingItem
from app.views.drawing_view import DrawingView
from app.views.picking import picked_shapes
from engine.calibration import calibrated
from engine.edits import replaced
from engine.errors import UserError
from engine.layout import Layout


@pytest.fixture
def sheets(tmp_path):
    path = tmp_path / "floors.pdf"
    canvas = Canvas(str(path), pagesize=(300, 200))
    for _ in range(3):
        canvas.rect(10, 10, 50, 50)
        canvas.showPage()
    canvas.save()
    return path


@pytest.fixture
def document(qapp, sheets):
    made = Document(Layout())
    backing.place_backing_file(made, sheets, 2)
    return made


@pytest.fixture
def form(qtbot, document):
    made = BackingForm(document, document.committed.backing_drawings[0].id)
    qtbot.addWidget(made)
    made.show()
    return made


def drawing_of(document):
    return document.committed.backing_drawings[0]


def test_a_placed_file_is_selected_and_one_step(document):
    assert document.undo_stack.undoText() == "Place floors.pdf, page 2"
    assert document.selection == {drawing_of(document).id}
    document.undo_stack.undo()
    assert document.committed == Layout()


def test_no_picture_on_the_clipboard_is_told(document):
    with pytest.raises(UserError, match="holds no picture"):
        backing.place_backing_picture(document, QImage())


def test_the_form_shows_the_drawing(form):
    assert form.page.value() == 2
    assert form.page.maximum() == 3
    assert form.opacity.value() == 50
    assert form.about.text() == "floors.pdf · 1250 × 834 px · not calibrated"
    assert not form.fault.isVisible()


def test_another_page_of_the_same_file_is_shown(form, document):
    before = drawing_of(document)
    form.page.setValue(3)
    after = drawing_of(document)
    assert (after.page, after.sha256) == (3, before.sha256)
    assert document.undo_stack.undoText() == "Show page 3 in floors.pdf, page 2"


def test_a_page_is_out_of_reach_without_its_file(form, document, sheets, monkeypatch):
    monkeypatch.setattr(backing, "_known", {})
    sheets.unlink()
    form.page.setValue(3)
    assert drawing_of(document).page == 2
    assert form.page.value() == 2
    assert "choose it again" in form.fault.text()


def test_the_file_is_found_beside_the_layout(form, document, sheets, monkeypatch):
    monkeypatch.setattr(backing, "_known", {})
    assert backing.pages_of(document, drawing_of(document)) is None
    document.set_path(sheets.parent / "room.json")
    assert backing.pages_of(document, drawing_of(document)) == 3


def test_a_dragged_opacity_is_one_step(form, document):
    steps = document.undo_stack.count()
    form.opacity.setSliderDown(True)
    form.opacity.setValue(40)
    form.opacity.setValue(25)
    assert document.layout.backing_drawings[0].opacity == 0.25
    assert document.undo_stack.count() == steps
    form.opacity.setSliderDown(False)
    assert drawing_of(document).opacity == 0.25
    assert document.undo_stack.count() == steps + 1
    assert document.undo_stack.undoText().endswith("to 25 %")


def test_turn_lock_and_view_are_edited(form, document, qtbot):
    form.turn.line.setFocus()
    form.turn.line.selectAll()
    qtbot.keyClicks(form.turn.line, "-15")
    qtbot.keyClick(form.turn.line, Qt.Key.Key_Return)
    assert drawing_of(document).turn == 345.0
    form.locked.setChecked(True)
    assert drawing_of(document).locked
    assert not form.calibrate.isEnabled()
    form.view.setCurrentIndex(2)
    form.view.activated.emit(2)
    assert drawing_of(document).view == "looking +y"


def test_a_refused_turn_changes_nothing(form, document, qtbot):
    steps = document.undo_stack.count()
    form.turn.line.selectAll()
    qtbot.keyClicks(form.turn.line, "a bit")
    qtbot.keyClick(form.turn.line, Qt.Key.Key_Return)
    assert form.turn.is_refused
    assert document.undo_stack.count() == steps


def test_replacing_says_when_the_calibration_is_lost(
    form, document, tmp_path, monkeypatch
):
    scaled = calibrated(drawing_of(document), (0.0, 0.0), (500.0, 0.0), 6.0)
    document.edit("Calibrate", replaced(document.committed, scaled))
    assert "15.00 m × 10.01 m" in form.about.text()
    image = QImage(40, 90, QImage.Format.Format_RGB32)
    image.fill(QColor("white"))
    other = tmp_path / "section.png"
    image.save(str(other))
    monkeypatch.setattr(backing, "chosen_file", lambda *_: str(other))
    form.replace_file.click()
    assert drawing_of(document).file_name == "section.png"
    assert document.undo_stack.undoText().endswith("no longer calibrated")


def test_a_bad_file_is_told_in_the_form(form, document, tmp_path, monkeypatch):
    bad = tmp_path / "bad.png"
    bad.write_text("no picture")
    before = document.committed
    monkeypatch.setattr(backing, "chosen_file", lambda *_: str(bad))
    form.replace_file.click()
    assert "neither a PDF nor a PNG or JPEG" in form.fault.text()
    assert document.committed is before


def test_a_damaged_copy_is_told(form, document):
    broken = replace(drawing_of(document), picture=drawing_of(document).picture[:99])
    document.edit("Break", replaced(document.committed, broken))
    assert form.fault.text() == "The picture is damaged: choose its file again."


def test_removing_and_undoing(form, document):
    before = document.committed
    form.remove.click()
    assert document.committed.backing_drawings == ()
    assert not form.isEnabled()
    document.undo_stack.undo()
    assert document.committed == before
    assert form.isEnabled()


def test_the_item_panel_holds_the_form(document, qtbot):
    panel = ItemPanel(document)
    qtbot.addWidget(panel)
    panel.show()
    form = panel.findChild(BackingForm)
    qtbot.waitUntil(form.isVisible)
    with qtbot.waitSignal(panel.calibrate_requested) as asked:
        form.calibrate.click()
    assert asked.args == [drawing_of(document).id]
    form.remove.click()
    assert document.selection == frozenset()
    qtbot.waitUntil(lambda: panel.findChild(BackingForm) is None)


def test_an_unlocked_drawing_is_taken_by_its_edge(document, qtbot):
    view = DrawingView(document, ViewState())
    qtbot.addWidget(view)
    view.resize(800, 600)
    view.show()
    scene = view.drawing
    # 1250 × 834 px at 100 px/m before it is calibrated.
    assert picked_shapes(scene, (12.5, 4.0), 0.05) == (drawing_of(document).id,)
    assert picked_shapes(scene, (6.0, 4.0), 0.05) == ()
    locked = replace(drawing_of(document), locked=True)
    document.edit("Lock", replaced(document.committed, locked))
    assert picked_shapes(scene, (12.5, 4.0), 0.05) == ()


@pytest.mark.parametrize(("theme", "paper"), [(LIGHT, "#ffffff"), (DARK, "#000000")])
def test_a_line_drawing_does_not_glare_on_dark_paper(document, theme, paper):
    opaque = replace(drawing_of(document), opacity=1.0)
    item = BackingItem(opaque, theme)
    image = QImage(50, 50, QImage.Format.Format_RGB32)
    image.fill(QColor("red"))
    painter = QPainter(image)
    item.paint(painter, QStyleOptionGraphicsItem())
    painter.end()
    assert image.pixelColor(5, 5).name() == paper


def test_a_dark_photograph_stays_as_it_is_on_dark_paper(document):
    image = QImage(60, 60, QImage.Format.Format_RGB32)
    image.fill(QColor("#405060"))
    backing.place_backing_picture(document, image)
    item = BackingItem(document.committed.backing_drawings[-1], DARK)
    shown = QImage(50, 50, QImage.Format.Format_RGB32)
    shown.fill(QColor("red"))
    painter = QPainter(shown)
    item.paint(painter, QStyleOptionGraphicsItem())
    painter.end()
    assert shown.pixelColor(5, 5).name() == "#405060"
