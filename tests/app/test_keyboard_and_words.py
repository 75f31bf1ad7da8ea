"""Every control of the window is named, explained and reachable; its words are ours."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QAccessible, QAction
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractScrollArea,
    QApplication,
    QComboBox,
    QLabel,
    QLineEdit,
    QScrollArea,
    QScrollBar,
    QTabBar,
    QTableView,
    QTabWidget,
    QTextEdit,
    QToolButton,
    QTreeView,
    QWidget,
)

from app import library, preferences, recompute, recovery
from app.document import Document
from app.focus_mark import FocusMark
from app.main_window import MainWindow
from app.messages import Messages
from engine import layout_file

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"

#: Words that would judge instead of compare.
JUDGING = re.compile(
    r"\b(safe|safely|safety|compliant|compliance|complies|comply|pass|passes|passed"
    r"|fail|fails|failed|hot ?spots?|hazard-free|harmless)\b",
    re.IGNORECASE,
)

#: A level that does not say which.
ALONE = re.compile(
    r"(?<!reference )(?<!ref\. )(?<!floor )(?<!ceiling )(?<!soffit )\blevels?\b",
    re.IGNORECASE,
)


@pytest.fixture
def window(qtbot, monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    monkeypatch.setattr(library, "default_path", lambda: tmp_path / "library.json")
    monkeypatch.setattr(recompute._Results, "compute", lambda *_args: None)
    made = MainWindow(Document(layout_file.read(SAMPLE)), Messages())
    qtbot.addWidget(made, before_close_func=lambda w: w.document.undo_stack.setClean())
    made.show()
    fill(made, qtbot)
    return made


def fill(window, qtbot):
    """Let every panel, page and form show something once."""
    layout = window.document.layout
    kinds = (
        layout.rooms, layout.enclosures, layout.equipment, layout.runs, layout.joints,
        layout.zones, layout.receptors, layout.storeys, layout.circuits,
        layout.levels, layout.profiles, layout.backing_drawings,
    )  # fmt: skip
    for name in reversed(window.panels.names):
        window.panels.show_panel(name)
    pages = window.view_pages
    assert all(
        (
            window.new_page, window.guide, window.cautions, window.about,
            pages.cycle, pages.space, pages.variants, pages.uncertainty,
        )
    )  # fmt: skip
    for items in kinds:
        if items:
            window.document.select((items[0].id,))
            qtbot.wait(1)
    window.open_section(layout.runs[0].id)


def named(window):
    """A widget by its name and place, for messages."""
    return f"{type(window).__name__} {window.objectName()} in " + " < ".join(
        type(p).__name__ for p in parents(window)[:3]
    )


def parents(widget):
    found = []
    while (widget := widget.parentWidget()) is not None:
        found.append(widget)
    return found


def all_widgets(window):
    return [window, *window.findChildren(QWidget)]


def is_inner(widget):
    """A part of another control, which has the name and the tooltip."""
    ups = parents(widget)
    return (
        isinstance(widget, QScrollBar)
        or any(isinstance(up, QComboBox | QTabBar) for up in ups)
        or (isinstance(ups[0], QAbstractScrollArea) and widget is ups[0].viewport())
        or widget.objectName().startswith("qt_")
    )


def takes_focus(widget):
    wanted = bool(widget.focusPolicy() & Qt.FocusPolicy.TabFocus)
    return wanted and not is_inner(widget)


def heads(view, role):
    """What the headings of a table or tree say in a role."""
    header = None
    if isinstance(view, QTableView):
        header = view.horizontalHeader()
    elif isinstance(view, QTreeView):
        header = view.header()
    if header is None or view.model() is None:
        return []
    model, across = view.model(), Qt.Orientation.Horizontal
    return [str(model.headerData(i, across, role) or "") for i in range(header.count())]


def is_explained(widget):
    """Whether a tooltip, or what stands in its place, says what a control is for."""
    if isinstance(widget, QTabWidget | QTabBar):
        count = range(widget.count())
        tips = [widget.tabToolTip(i) for i in count]
        return bool(widget.toolTip()) or all(tips)
    if isinstance(widget, QAbstractItemView):
        tips = heads(widget, Qt.ItemDataRole.ToolTipRole)
        if tips and all(tips):
            return True
    if isinstance(widget, QTextEdit) and widget.isReadOnly():
        return True
    if isinstance(widget, QScrollArea):
        return True
    # A tooltip over a drawing or a whole page would only be in the way.
    return bool(widget.toolTip() or widget.accessibleDescription() or widget.layout())


def test_every_shortcut_is_the_only_one(window):
    owners: dict[str, str] = {}
    for action in window.findChildren(QAction):
        for key in action.shortcuts():
            text = key.toString()
            assert owners.setdefault(text, action.text()) == action.text(), text
    assert len(owners) > 20


def test_every_control_has_a_name_and_is_explained(window):
    lacking = []
    for widget in window.findChildren(QWidget):
        if not takes_focus(widget):
            continue
        name = widget.accessibleName()
        if isinstance(widget, QAbstractButton):
            name = name or widget.text()
        if not name:
            lacking.append(f"no name: {named(widget)}")
        if not is_explained(widget):
            lacking.append(f"no tooltip: {named(widget)} {name}")
    assert not lacking, "\n".join(sorted(set(lacking)))


def test_what_takes_the_keyboard_has_a_name_for_those_who_hear_it(window):
    """As a reader of the screen is told it: by name, or by what stands in it."""
    lacking = set()
    for widget in all_widgets(window):
        if not takes_focus(widget):
            continue
        heard = QAccessible.queryAccessibleInterface(widget)
        assert heard is not None, named(widget)
        assert heard.isValid(), named(widget)
        said = heard.text(QAccessible.Text.Name) or heard.text(QAccessible.Text.Value)
        if not said.strip():
            lacking.add(named(widget))
    assert not lacking, "\n".join(sorted(lacking))


def texts(window):
    """All texts that the window may show, with where."""
    for widget in all_widgets(window):
        found = [
            widget.toolTip(), widget.accessibleName(), widget.accessibleDescription(),
            widget.statusTip(), widget.windowTitle(),
        ]  # fmt: skip
        if isinstance(widget, QLabel | QAbstractButton):
            found.append(widget.text())
        if isinstance(widget, QLineEdit):
            found += [widget.placeholderText()]
        if isinstance(widget, QTextEdit):
            found.append(widget.toPlainText())
        if isinstance(widget, QComboBox):
            found += [widget.itemText(i) for i in range(widget.count())]
        if isinstance(widget, QTabBar):
            found += [widget.tabText(i) for i in range(widget.count())]
            found += [widget.tabToolTip(i) for i in range(widget.count())]
        if isinstance(widget, QAbstractItemView):
            found += heads(widget, Qt.ItemDataRole.DisplayRole)
            found += heads(widget, Qt.ItemDataRole.ToolTipRole)
        for text in found:
            if text:
                yield named(widget), text
    for action in window.findChildren(QAction):
        yield "action", f"{action.text()} {action.toolTip()} {action.statusTip()}"
    for tool in window.toolbox.tools:
        window.toolbox.activate(tool)
        yield tool.name, tool.hint


def test_no_word_judges(window):
    # The cautions say that electrical safety is not served: that judges nothing.
    found = {
        f"{where}: {text}"
        for where, text in texts(window)
        if JUDGING.search(text.replace("electrical safety", ""))
    }
    assert not found, "\n".join(sorted(found))


def test_no_level_stands_alone(window):
    """A level alone could be a storey or a reference level.

    What stands under the heading of the reference levels is excused, and a text that
    says so itself.
    """
    excused = window.levels.findChildren(QWidget)
    own = {named(widget) for widget in excused}
    found = {
        f"{where}: {text}"
        for where, text in texts(window)
        if ALONE.search(text) and where not in own and "eference level" not in text
    }
    assert not found, "\n".join(sorted(found))


def test_the_keyboard_is_seen_where_it_is(window, qtbot):
    mark = FocusMark(QApplication.instance())
    window.show_drawing()
    with qtbot.waitActive(window):
        window.activateWindow()
    window.strip.words.setFocus()
    ringed = set()
    for _ in range(25):
        QTest.keyClick(QApplication.focusWidget(), Qt.Key.Key_Tab)
        widget = QApplication.focusWidget()
        if isinstance(widget, QLineEdit | QComboBox):
            # Their own outline shows it.
            assert mark.ring is None
        elif isinstance(widget, QToolButton | QTabBar | QAbstractScrollArea):
            assert mark.ring.parentWidget() is widget
            assert mark.ring.geometry() == widget.rect()
            ringed.add(type(widget))
    assert {QToolButton, QTabBar} <= ringed
    mark.deleteLater()
