"""Files: what is saved comes back, what fails loses nothing."""

from __future__ import annotations

import os

import pytest
from PySide6.QtWidgets import QMessageBox, QWidget

from app import preferences
from app.document import Document
from app.files import Files, empty_layout
from app.messages import Messages
from engine import layout_file
from engine.edits import added
from engine.places import Receptor


@pytest.fixture
def told(monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    return []


@pytest.fixture
def files(qtbot, told):
    window = QWidget()
    qtbot.addWidget(window)
    document = Document(empty_layout(preferences.Preferences()))
    messages = Messages()
    messages.told.connect(lambda kind, sentence: told.append((kind, sentence)))
    return Files(document, messages, window)


def place(files: Files) -> None:
    document = files._document
    document.edit(
        "Place receptor chair",
        added(document.layout, Receptor(id="chair", at=(1.0, 2.0, 1.0))),
    )


def test_saved_work_comes_back(files, tmp_path, told):
    place(files)
    path = tmp_path / "room.json"
    files._document.set_path(path)
    assert files.save()
    assert not files._document.is_modified
    assert layout_file.read(path) == files._document.layout
    assert ("information", "room.json was saved.") in told
    assert preferences.load().recent == (str(path),)


def test_a_damaged_file_is_explained_and_the_open_layout_stays(files, tmp_path, told):
    path = tmp_path / "broken.json"
    path.write_text('{"lodestead_layout": 3, "layout": {"runs": 7}}', "utf-8")
    before = files._document.layout
    assert not files.open(path)
    assert files._document.layout is before
    ((kind, sentence),) = told
    assert kind == "error"
    assert "runs" in sentence


def test_a_save_that_fails_keeps_the_work_as_unsaved(files, tmp_path, told):
    place(files)
    files._document.set_path(tmp_path / "no folder" / "room.json")
    assert not files.save()
    assert files._document.is_modified
    assert told[0][0] == "error"


@pytest.mark.parametrize(
    ("button", "leaves"), [("Drop them", True), ("Go back", False)]
)
def test_unsaved_work_is_asked_about(files, monkeypatch, button, leaves):
    place(files)

    def answer(box):
        box.clickedButton = lambda: next(b for b in box.buttons() if b.text() == button)

    monkeypatch.setattr(QMessageBox, "exec", answer)
    assert files.may_leave() is leaves


def test_a_file_changed_by_another_program_is_noticed(files, tmp_path, qtbot):
    path = tmp_path / "room.json"
    files._document.set_path(path)
    files.save()
    with qtbot.waitSignal(files.changed_outside, timeout=5000):
        text = path.read_text("utf-8")
        other = tmp_path / "other.json"
        other.write_text(text + " \n", "utf-8")
        os.replace(other, path)


def test_our_own_save_is_no_change_from_outside(files, tmp_path, qtbot):
    path = tmp_path / "room.json"
    files._document.set_path(path)
    files.save()
    place(files)
    with qtbot.assertNotEmitted(files.changed_outside, wait=300):
        files.save()


def test_rescued_work_is_open_as_unsaved(files, tmp_path):
    place(files)
    copy = tmp_path / "copy.json"
    layout_file.write(copy, files._document.layout)
    layout = files._document.layout
    assert files.open_rescued(copy, None)
    assert files._document.layout == layout
    assert files._document.is_modified
