"""The window opens the field over one period on the place that is meant."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from app.cycle_values import CyclePlace
from app.document import Document
from app.main_window import MainWindow
from app.messages import Messages
from engine.layout_file import read

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


@pytest.fixture
def window(qtbot: QtBot) -> Iterator[MainWindow]:
    made = MainWindow(Document(read(SAMPLE)), Messages())
    qtbot.addWidget(made)
    made.show()
    yield made
    made.files.may_leave = lambda: True  # type: ignore[method-assign]
    made.close()


def test_period_opens_at_the_selected_receptor(
    qtbot: QtBot, window: MainWindow
) -> None:
    receptor = window.document.layout.receptors[-1]
    window.document.select({receptor.id})
    window.view_pages.open_cycle()
    page = window.view_pages.cycle
    assert window.pages.currentWidget() is page
    assert page.place == CyclePlace(receptor.at, receptor.id)
    qtbot.waitUntil(lambda: page.view is not None, timeout=30_000)
    qtbot.keyClick(page, Qt.Key.Key_Escape)
    assert window.pages.currentWidget() is window.drawings


def test_period_opens_at_the_place_pointed_at(qtbot: QtBot, window: MainWindow) -> None:
    window.document.select(())
    window.readout.show_at(2.0, 3.0, 4.5)
    qtbot.waitUntil(lambda: bool(window.readout.text()), timeout=30_000)
    # The pointer leaves the drawing on its way to the menu.
    window.readout.clear_place()
    window.view_pages.open_cycle()
    page = window.view_pages.cycle
    assert page.place == CyclePlace((2.0, 3.0, 4.5))
    assert "Pointed at" in page.places.currentText()


def test_space_opens_and_says_what_is_missing_here(window: MainWindow) -> None:
    window.view_pages.open_space()
    page = window.view_pages.space
    assert window.pages.currentWidget() is page
    assert "OpenGL" in page.reason.text()
