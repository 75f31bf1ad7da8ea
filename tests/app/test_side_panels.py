"""Side panels: built when first shown, taken out into windows, brought back."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QPushButton, QTabBar, QToolButton, QWidget
from pytestqt.qtbot import QtBot

from app import preferences, recovery, window_geometry
from app.document import Document
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.side_panels import SidePanels
from app.theme import LIGHT

# Offscreen, windows have no order.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support", extend=True)


@pytest.fixture
def panels(qtbot: QtBot) -> SidePanels:
    made = SidePanels()
    made.set_theme(LIGHT)
    built: list[str] = []

    def build(name: str) -> Callable[[], QLabel]:
        def run() -> QLabel:
            built.append(name)
            return QLabel(f"the panel {name}")

        return run

    for name in ("Item", "Circuits", "Remarks"):
        made.add(name, build(name), f"Shows {name}")
    made.built = built  # type: ignore[attr-defined]
    qtbot.addWidget(made)
    made.show()
    return made


@pytest.fixture
def make_window(
    qtbot: QtBot, monkeypatch: pytest.MonkeyPatch, tmp_path: object
) -> Callable[[], MainWindow]:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path)

    def make() -> MainWindow:
        made = MainWindow(Document(empty_layout(preferences.load())), Messages())
        window_geometry.restore(made)
        qtbot.addWidget(made)
        made.show()
        return made

    return make


def labels(panels: SidePanels) -> list[str]:
    return [label.text() for label in panels.findChildren(QLabel) if label.isVisible()]


def outside(panels: SidePanels) -> list[str]:
    """Titles of windows of their own that show."""
    return [
        child.windowTitle()
        for child in panels.findChildren(QWidget)
        if child.isWindow() and child.isVisible()
    ]


def test_a_panel_is_built_when_its_tab_is_first_shown(panels: SidePanels) -> None:
    assert panels.built == ["Item"]  # type: ignore[attr-defined]
    panels.show_panel("Remarks")
    panels.show_panel("Item")
    panels.show_panel("Remarks")
    assert panels.built == ["Item", "Remarks"]  # type: ignore[attr-defined]
    assert labels(panels) == ["the panel Remarks"]


def test_a_panel_leaves_and_comes_back_by_its_button(
    panels: SidePanels, qtbot: QtBot
) -> None:
    panels.show_panel("Circuits")
    leave = next(
        b for b in panels.findChildren(QToolButton) if "Circuits" in b.toolTip()
    )
    qtbot.mouseClick(leave, Qt.MouseButton.LeftButton)
    assert outside(panels) == ["Circuits"]
    assert set(labels(panels)) == {
        "“Circuits” stands in a window of its own.",
        "the panel Circuits",
    }
    back = next(b for b in panels.findChildren(QPushButton) if b.isVisible())
    qtbot.mouseClick(back, Qt.MouseButton.LeftButton)
    assert outside(panels) == []
    assert labels(panels) == ["the panel Circuits"]


def test_closing_its_window_brings_a_panel_back(panels: SidePanels) -> None:
    panels.show_panel("Circuits")
    panels.take_out()
    for label in panels.findChildren(QLabel):
        if label.text() == "the panel Circuits":
            assert label.window() is not panels
            label.window().close()
    assert labels(panels) == ["the panel Circuits"]
    assert panels.away() == {}


def test_other_tabs_show_their_panels_while_one_is_away(panels: SidePanels) -> None:
    panels.take_out()
    panels.show_panel("Remarks")
    assert set(labels(panels)) == {"the panel Item", "the panel Remarks"}
    # The tab of the one that left says where it is.
    bar = panels.findChild(QTabBar)
    assert bar is not None
    bar.setCurrentIndex(0)
    assert "“Item” stands in a window of its own." in labels(panels)


def test_a_tab_renamed_renames_the_window(panels: SidePanels) -> None:
    panels.show_panel("Remarks")
    panels.take_out()
    panels.rename("Remarks", "Remarks 3")
    assert outside(panels) == ["Remarks 3"]
    assert panels.current == "Remarks 3"


def test_panels_that_left_are_remembered(
    make_window: Callable[[], MainWindow],
) -> None:
    first = make_window()
    first.panels.show_panel("Circuits")
    first.panels.take_out()
    assert first.circuits.window() is not first
    first.close()
    assert not first.circuits.isVisible()
    assert list(preferences.load().away) == ["Circuits"]
    second = make_window()
    assert second.circuits.window() is not second
    assert second.item.window() is second
    second.panels.bring_back("Circuits")
    second.close()
    assert preferences.load().away == {}


def test_a_name_that_no_panel_has_is_no_error(
    make_window: Callable[[], MainWindow],
) -> None:
    preferences.save(replace(preferences.load(), away={"Gone": ""}))
    assert make_window().panels.away() == {}
