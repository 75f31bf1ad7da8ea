"""Linked backing drawings in the window: chosen, saved, opened, missed."""

from __future__ import annotations

import pytest
from msgspec.structs import replace
from PySide6.QtGui import QImage
from reportlab.pdfgen.canvas import Canvas

from app import backing, preferences, recovery
from app.document import Document
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.panels.backing import BackingForm
from engine import embedded_picture, layout_file
from engine.edits import replaced
from engine.embedded_picture import picture_size
from engine.layout import Layout


@pytest.fixture
def sheets(tmp_path):
    path = tmp_path / "plans" / "floors.pdf"
    path.parent.mkdir()
    canvas = Canvas(str(path), pagesize=(300, 200))
    for number in range(2):
        canvas.rect(10, 10, 50 + 20 * number, 50)
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
    made = BackingForm(document, drawing_of(document).id)
    qtbot.addWidget(made)
    made.show()
    return made


@pytest.fixture
def window(qtbot, monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    made = MainWindow(Document(empty_layout(preferences.Preferences())), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.show()
    return made


def drawing_of(document):
    return document.committed.backing_drawings[0]


def choose(form, kind):
    form.kept.set_value(kind)
    form.kept.activated.emit(form.kept.currentIndex())


def test_a_drawing_is_embedded_until_a_link_is_chosen(form, document, sheets):
    assert form.kept.currentText() == "Embedded copy"
    assert drawing_of(document).picture
    choose(form, "linked")
    drawing = drawing_of(document)
    assert (drawing.picture, drawing.linked_file) == ("", str(sheets))
    assert document.undo_stack.undoText() == f"Link {drawing.title}"
    assert picture_size(drawing) is not None
    assert f"linked to {sheets}" in form.about.text()
    assert not form.fault.isVisible()
    choose(form, "embedded")
    assert drawing_of(document).picture
    assert drawing_of(document).linked_file == ""
    document.undo_stack.undo()
    document.undo_stack.undo()
    assert drawing_of(document).picture
    assert form.kept.currentText() == "Embedded copy"


def test_a_pasted_picture_cannot_be_linked(qtbot, document):
    # Known files go by their bytes: no other test has a file of this picture.
    image = QImage(41, 29, QImage.Format.Format_RGB32)
    image.fill(0x123456)
    form = BackingForm(document, backing.place_backing_picture(document, image))
    qtbot.addWidget(form)
    form.show()
    choose(form, "linked")
    assert "is not at hand" in form.fault.text()
    assert form.kept.currentText() == "Embedded copy"


def test_a_file_that_has_changed_is_not_linked(form, document, sheets):
    sheets.write_bytes(sheets.read_bytes() + b"\n")
    choose(form, "linked")
    assert "has changed since it was placed" in form.fault.text()
    assert drawing_of(document).picture


def test_another_page_of_a_linked_file_stays_a_link(form, document):
    choose(form, "linked")
    form.page.setValue(1)
    drawing = drawing_of(document)
    assert drawing.page == 1
    assert drawing.picture == ""
    assert picture_size(drawing) is not None


def test_the_form_says_that_a_linked_file_is_missing(form, document, sheets):
    choose(form, "linked")
    sheets.unlink()
    form._fill()
    assert "there is no such file" in form.fault.text()


def test_saving_counts_links_from_the_layouts_folder(window, sheets, tmp_path):
    document = window.document
    item = backing.place_backing_file(document, sheets, 2)
    form = BackingForm(document, item)
    choose(form, "linked")
    assert window.files._write(tmp_path / "room.json")
    assert not document.is_modified
    assert drawing_of(document).linked_file == "plans/floors.pdf"
    assert layout_file.read(tmp_path / "room.json") == document.whole
    (tmp_path / "other").mkdir()
    assert window.files._write(tmp_path / "other" / "room.json")
    assert drawing_of(document).linked_file == "../plans/floors.pdf"
    form.deleteLater()


def saved(window, sheets, tmp_path):
    """A layout's file with a linked drawing that this run has not read yet."""
    made = Document(Layout())
    form = BackingForm(made, backing.place_backing_file(made, sheets, 2))
    choose(form, "linked")
    form.deleteLater()
    drawing = replace(drawing_of(made), linked_file="plans/floors.pdf")
    layout_file.write(tmp_path / "room.json", replaced(made.committed, drawing))
    embedded_picture._linked.clear()
    return tmp_path / "room.json"


def test_a_linked_file_shows_when_the_layout_is_opened(window, qtbot, sheets, tmp_path):
    path = saved(window, sheets, tmp_path)
    with qtbot.waitSignal(window.drawings.linked_pictures.came, timeout=20_000):
        assert window.files.open(path)
    item = window.drawings.plan.drawing.backings[drawing_of(window.document).id]
    qtbot.waitUntil(lambda: not item.boundingRect().isEmpty())
    assert not window.document.is_modified


def test_a_layout_whose_linked_file_is_missing_opens_and_says_so(
    window, qtbot, sheets, tmp_path
):
    path = saved(window, sheets, tmp_path)
    sheets.unlink()
    with qtbot.waitSignal(window.drawings.linked_pictures.missed, timeout=20_000):
        assert window.files.open(path)
    assert window.document.path == path
    assert "there is no such file" in window.message_bar.sentence
    qtbot.waitUntil(
        lambda: any(
            r.code == "W24" and "no such file" in r.sentence
            for r in (window.remarks._found.open if window.remarks._found else ())
        ),
        timeout=20_000,
    )
