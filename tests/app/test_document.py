"""The document: one door for changes, and a history that loses nothing."""

from __future__ import annotations

import pytest

from app.document import EVERYTHING, Document
from engine.edits import added, removed, replaced
from engine.layout import Layout
from engine.places import Receptor, Storey


@pytest.fixture
def document(qapp):
    return Document(Layout(storeys=(Storey(id="ground", floor_level=0.0),)))


def with_receptor(layout: Layout, x: float = 1.0) -> Layout:
    return added(layout, Receptor(id="chair", at=(x, 2.0, 1.0)))


def test_an_edit_is_one_step_with_its_sentence(document):
    before = document.layout
    document.edit("Place receptor chair", with_receptor(before))
    assert document.undo_stack.undoText() == "Place receptor chair"
    document.undo_stack.undo()
    assert document.layout is before
    document.undo_stack.redo()
    assert document.layout.receptors[0].id == "chair"


def test_the_notice_names_the_ids_that_differ(document):
    heard = []
    document.changed.connect(lambda layout, ids: heard.append(ids))
    document.edit("Place receptor chair", with_receptor(document.layout))
    document.undo_stack.undo()
    assert heard == [frozenset({"chair"}), frozenset({"chair"})]


def test_a_preview_leaves_no_step_when_it_is_reverted(document):
    before = document.layout
    document.preview(with_receptor(before, 5.0))
    assert document.is_previewing
    assert document.committed is before
    document.revert()
    assert document.layout is before
    assert document.undo_stack.count() == 0


def test_a_drag_is_one_step(document):
    start = with_receptor(document.layout)
    document.edit("Place receptor chair", start)
    for x in (1.1, 1.2, 1.3):
        document.preview(replaced(start, Receptor(id="chair", at=(x, 2.0, 1.0))))
    document.edit("Move receptor chair", document.layout)
    assert document.undo_stack.count() == 2
    document.undo_stack.undo()
    assert document.layout.receptors[0].at == (1.0, 2.0, 1.0)


def test_an_edit_that_changes_nothing_leaves_no_step(document):
    document.edit("Move nothing", document.layout)
    assert document.undo_stack.count() == 0
    assert not document.is_modified


def test_the_selection_forgets_what_is_gone(document):
    document.edit("Place receptor chair", with_receptor(document.layout))
    document.select(["chair", "nobody"])
    assert document.selection == {"chair"}
    document.edit("Remove receptor chair", removed(document.layout, "chair"))
    assert document.selection == frozenset()


def test_opening_another_layout_starts_an_empty_history(document):
    heard = []
    document.changed.connect(lambda layout, ids: heard.append(ids))
    document.edit("Place receptor chair", with_receptor(document.layout))
    document.open(Layout(), None)
    assert document.undo_stack.count() == 0
    assert not document.is_modified
    assert heard[-1] == EVERYTHING
