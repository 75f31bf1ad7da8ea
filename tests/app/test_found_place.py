"""The mark at the place of a margin: on every view, until a click or Esc."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import QPoint, Qt
from pytestqt.qtbot import QtBot

from app import preferences, recovery
from app.document import Document
from app.found_place import MARK, mark_text
from app.main_window import MainWindow
from app.margin_values import MarginRow
from app.messages import Messages
from engine.layout_file import read

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "small-switch-room.json"
LEFT = Qt.MouseButton.LeftButton


@pytest.fixture
def window(qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> MainWindow:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path / "settings")
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    made = MainWindow(Document(read(SAMPLE)), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.show()
    return made


def row(window: MainWindow) -> MarginRow:
    zone = window.document.layout.zones[0]
    return MarginRow(
        zone.id, zone.title, "level", "Level",
        state="below", value=61.2e-6, at=(1.25, 2.5, 5.1), height=5.1,
    )  # fmt: skip


def marked(window: MainWindow) -> bool:
    return any(MARK in view.marks for view in window.drawings.views.values())


def test_the_mark_stands_where_each_view_sees_the_place(window: MainWindow) -> None:
    window.margins.go_to.emit(row(window))
    views = window.drawings.views
    text = mark_text(row(window), window.document.layout)
    for name, seen in (
        ("Plan", (1.25, 2.5)), ("Looking +y", (1.25, 5.1)), ("Looking +x", (-2.5, 5.1)),
    ):  # fmt: skip
        mark = views[name].marks[MARK]
        assert mark.points == (seen,)
        assert mark.labels == ((seen, text),)
    assert window.view_state.look.height == 5.1


def test_the_mark_says_zone_value_and_height(window: MainWindow) -> None:
    layout, found = window.document.layout, row(window)
    title = layout.zones[0].title
    assert mark_text(found, layout) == f"Largest in {title} · 61.2 µT · z 5.10 m"
    mean = replace(layout.zones[0], rule="area mean")
    layout = replace(layout, zones=(mean, *layout.zones[1:]))
    assert mark_text(found, layout).startswith(f"Mean over {title}, largest here · ")
    receptor = MarginRow("R", "Desk", "level", "Level", at=(0.0, 0.0, 1.0))
    assert mark_text(receptor, layout) == "Desk · – · z 1.00 m"


def test_escape_takes_the_mark_and_nothing_else(
    window: MainWindow, qtbot: QtBot
) -> None:
    window.document.select([window.document.layout.runs[0].id])
    window.margins.go_to.emit(row(window))
    qtbot.keyClick(window.drawings.front, Qt.Key.Key_Escape)
    assert not marked(window)
    assert window.document.selection
    qtbot.keyClick(window.drawings.front, Qt.Key.Key_Escape)
    assert not window.document.selection


def test_a_click_and_an_edit_take_the_mark(window: MainWindow, qtbot: QtBot) -> None:
    window.margins.go_to.emit(row(window))
    assert marked(window)
    qtbot.mouseClick(window.drawings.front.viewport(), LEFT, pos=QPoint(30, 30))
    assert not marked(window)
    window.margins.go_to.emit(row(window))
    layout = window.document.layout
    title = replace(layout.title, project="Another")
    window.document.edit("Rename the project", replace(layout, title=title))
    assert not marked(window)


def test_another_load_case_takes_the_mark(window: MainWindow) -> None:
    window.margins.go_to.emit(row(window))
    window.view_state.set(height=None)
    assert marked(window)
    window.view_state.set(case="another")
    assert not marked(window)
