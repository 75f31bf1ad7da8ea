"""Unsaved work comes back after a crash, and only then."""

from __future__ import annotations

import subprocess
import sys

import msgspec
import pytest

from app import recovery
from app.document import Document
from engine import layout_file
from engine.edits import added
from engine.layout import Layout
from engine.places import Storey


@pytest.fixture
def document(qapp):
    return Document()


def edited(document: Document) -> Layout:
    layout = added(document.layout, Storey(id="ground", floor_level=0.0))
    document.edit("Add storey ground", layout)
    return layout


def finished_process() -> int:
    process = subprocess.Popen([sys.executable, "-c", ""])
    process.wait()
    return process.pid


def test_unsaved_work_is_kept_and_found_after_a_crash(document, tmp_path):
    layout = edited(document)
    autosave = recovery.Autosave(document, tmp_path)
    autosave.keep()
    assert recovery.rescues(tmp_path) == (), "the program still runs"
    note = autosave.copy.with_suffix(".note")
    note.write_bytes(msgspec.json.encode({"path": "", "process": finished_process()}))
    (rescue,) = recovery.rescues(tmp_path)
    assert layout_file.read(rescue.copy) == layout
    assert rescue.path is None
    recovery.give_up(rescue)
    assert recovery.rescues(tmp_path) == ()
    assert list(tmp_path.iterdir()) == []


def test_saved_work_leaves_no_copy(document, tmp_path):
    edited(document)
    autosave = recovery.Autosave(document, tmp_path)
    autosave.keep()
    assert autosave.copy.exists()
    document.undo_stack.setClean()
    autosave.keep()
    assert list(tmp_path.iterdir()) == []


def test_the_copy_is_written_by_the_clock(document, tmp_path, qtbot):
    autosave = recovery.Autosave(document, tmp_path, interval=10)
    edited(document)
    qtbot.waitUntil(autosave.copy.exists, timeout=5000)


def test_a_folder_that_cannot_be_written_stops_nothing(document, tmp_path):
    edited(document)
    (tmp_path / "file").write_text("in the way", encoding="utf-8")
    recovery.Autosave(document, tmp_path / "file" / "deeper").keep()
    assert document.is_modified
