"""A user's hands in tests: mouse and keyboard on the real widgets, nothing else."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QApplication,
    QComboBox,
    QLineEdit,
    QListWidget,
    QScrollArea,
    QTabBar,
    QWidget,
)

LEFT = Qt.MouseButton.LeftButton
NONE = Qt.KeyboardModifier.NoModifier


class Hands:
    """Works a main window as a person would."""

    def __init__(self, qtbot, window):
        self.qtbot = qtbot
        self.window = window
        self.plan = window.drawings.plan

    # -- keyboard ---------------------------------------------------------------

    def key(self, key, modifier=NONE):
        """Press a key where the keyboard is."""
        QTest.keyClick(QApplication.focusWidget() or self.window, key, modifier)

    def control(self, key):
        self.key(key, Qt.KeyboardModifier.ControlModifier)

    def type(self, text):
        """Type where the keyboard is, which the first key may move."""
        for sign in text:
            QTest.keyClicks(QApplication.focusWidget(), sign)

    # -- mouse ------------------------------------------------------------------

    def click(self, widget, at=None):
        QApplication.processEvents()
        assert widget.isVisible(), f"{widget} cannot be seen"
        assert widget.isEnabled(), f"{widget} cannot be clicked"
        QTest.mouseClick(widget, LEFT, NONE, at or widget.rect().center())

    def pixel(self, x, y, view=None):
        """Pixel of a place on the plan. [m]"""
        return (view or self.plan).camera().pixel((x, y)).toPoint()

    def point(self, x, y, modifier=NONE):
        """Click a place on the plan. [m]"""
        at = self.pixel(x, y)
        assert self.plan.viewport().rect().contains(at), f"({x}, {y}) is out of sight"
        QTest.mouseMove(self.plan.viewport(), at)
        QTest.mouseClick(self.plan.viewport(), LEFT, modifier, at)

    def drag(self, start, end, steps=4):
        """Drag on the plan from place to place. [m]"""
        viewport = self.plan.viewport()
        a, b = QPointF(self.pixel(*start)), QPointF(self.pixel(*end))
        QTest.mousePress(viewport, LEFT, NONE, a.toPoint())
        for k in range(1, steps + 1):
            QTest.mouseMove(viewport, (a + (b - a) * k / steps).toPoint())
        QTest.mouseRelease(viewport, LEFT, NONE, b.toPoint())

    # -- the parts of the window --------------------------------------------------

    def say(self, words):
        """Enter a line of words in the entry strip."""
        line = self.window.strip.words
        self.click(line)
        assert line.hasFocus()
        self.type(words)
        self.key(Qt.Key.Key_Return)
        assert not self.window.strip.fault.text(), self.window.strip.fault.text()

    def choose(self, box: QComboBox, text):
        """Open a choice and click one of its entries."""
        row = box.findText(text)
        assert row >= 0, (
            f"{text} is not among {[box.itemText(i) for i in range(box.count())]}"
        )
        self.click(box)
        entries = box.view()
        self.qtbot.waitUntil(entries.isVisible)
        index = entries.model().index(row, box.modelColumn(), box.rootModelIndex())
        entries.scrollTo(index)
        at = entries.visualRect(index).center()
        QTest.mouseMove(entries.viewport(), at)
        # A popup takes no click at once, lest the one that opened it choose.
        self.qtbot.wait(QApplication.doubleClickInterval() + 20)
        QTest.mouseClick(entries.viewport(), LEFT, NONE, at)
        self.qtbot.waitUntil(lambda: not entries.isVisible())

    def write(self, line: QLineEdit, text):
        """Type over a field and leave it with Enter."""
        self.show(line)
        self.click(line)
        self.control(Qt.Key.Key_A)
        self.type(text)
        self.key(Qt.Key.Key_Return)

    def cell(self, table, row, column, text):
        """Type into the cell of a table with that heading."""
        titles = [c.title for c in table.model.columns]
        index = table.model.index(row, titles.index(column))
        self.show(table)
        table.view.scrollTo(index)
        at = table.view.visualRect(index).center()
        QTest.mouseClick(table.view.viewport(), LEFT, NONE, at)
        self.type(text)
        self.key(Qt.Key.Key_Return)
        QApplication.processEvents()
        assert not table.reason.text(), table.reason.text()

    def tab(self, name):
        """Bring a side panel to the front."""
        bar: QTabBar = self.window.panels.findChild(QTabBar)
        index = next(i for i in range(bar.count()) if bar.tabText(i).startswith(name))
        QTest.mouseClick(bar, LEFT, NONE, bar.tabRect(index).center())

    def tick(self, entries: QListWidget, row):
        """Tick a line of a check list."""
        self.show(entries)
        entries.setCurrentRow(row)
        entries.setFocus()
        self.key(Qt.Key.Key_Space)

    def show(self, widget: QWidget):
        """Scroll until a widget is in sight, as one does with the wheel."""
        parent = widget.parentWidget()
        while parent is not None:
            if isinstance(parent, QScrollArea):
                QApplication.processEvents()
                parent.ensureWidgetVisible(widget)
            parent = parent.parentWidget()

    def menu(self, title, text):
        """Click an entry of a menu in the menu bar."""
        bar = self.window.menuBar()
        top = next(a for a in bar.actions() if a.text().replace("&", "") == title)
        QTest.mouseClick(bar, LEFT, NONE, bar.actionGeometry(top).center())
        menu = top.menu()
        self.qtbot.waitUntil(menu.isVisible)
        action = next(a for a in menu.actions() if a.text().replace("&", "") == text)
        at: QPoint = menu.actionGeometry(action).center()
        QTest.mouseMove(menu, at)
        QTest.mouseClick(menu, LEFT, NONE, at)
        QApplication.processEvents()
