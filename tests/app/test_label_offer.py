"""Another supply offers to relabel the sections that it runs in, as one undo step."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec.structs import replace
from pytestqt.qtbot import QtBot

from app import preferences, recovery
from app.document import Document
from app.main_window import MainWindow
from app.messages import Messages
from engine.edits import replaced
from engine.formations import labels_of
from engine.starters import run_past_room


@pytest.fixture
def window(qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> MainWindow:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    made = MainWindow(Document(run_past_room()), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.show()
    return made


def supply(window: MainWindow, name: str) -> None:
    layout = window.document.committed
    hertz = 0.0 if name == "dc" else 50.0
    changed = replace(layout.circuits[0], supply=name, base_frequency=hertz)
    window.document.edit("Change supply", replaced(layout, changed))


def labels(window: MainWindow) -> tuple[str, ...]:
    return labels_of(window.document.layout.runs[0].section)


def test_sections_are_relabelled_in_one_step(window: MainWindow) -> None:
    before = labels(window)
    supply(window, "dc")
    bar = window.message_bar
    assert bar.isVisible()
    assert "has another supply now, but 1 section" in bar.sentence
    assert bar._offer.text() == "Relabel 1 section"
    bar._offer.click()
    assert {"L+", "L-"} <= set(labels(window))
    steps = window.document.undo_stack.count()
    window.document.undo_stack.undo()
    assert labels(window) == before
    assert (steps, window.document.layout.circuits[0].supply) == (2, "dc")


def test_where_labels_fit_nothing_is_offered(window: MainWindow) -> None:
    supply(window, "three-phase three-wire")
    assert not window.message_bar.isVisible()


def test_another_layout_offers_nothing(window: MainWindow) -> None:
    other = run_past_room()
    direct = replace(other.circuits[0], supply="dc", base_frequency=0.0)
    window.document.open(replaced(other, direct), None)
    assert not window.message_bar.isVisible()


def test_an_offer_taken_late_does_what_is_left_to_do(window: MainWindow) -> None:
    before = labels(window)
    supply(window, "dc")
    window.document.undo_stack.undo()
    window.message_bar._take_offer()
    assert labels(window) == before
