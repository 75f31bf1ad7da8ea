"""Two thousand random acts of a user on the window: no exception, no lost step."""

from __future__ import annotations

import random

import pytest
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QGuiApplication, QMouseEvent, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QApplication,
    QComboBox,
    QFileDialog,
    QLineEdit,
    QPlainTextEdit,
    QTabBar,
    QTableView,
    QToolButton,
    QWidget,
)

from app import library, preferences, recompute, recovery
from app.document import Document
from app.files import empty_layout
from app.main_window import MainWindow
from app.messages import Messages
from app.theme import DARK, LIGHT
from engine import layout_file

ACTS = 2000
SEEDS = (11,)

#: More items than this are deleted, and the walk goes on.
MOST = 40
LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
CONTROL = Qt.KeyboardModifier.ControlModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier
Key = Qt.Key

KEYS = (
    Key.Key_Return, Key.Key_Backspace, Key.Key_Escape, Key.Key_Delete, Key.Key_Left,
    Key.Key_Right, Key.Key_Up, Key.Key_Down, Key.Key_Home, Key.Key_Plus, Key.Key_Minus,
    Key.Key_Tab, Key.Key_F2, Key.Key_Space,
)  # fmt: skip

#: What is typed into the entry strip: most of it has a meaning, some has none.
WORDS = (
    "to 1 1", "to 4.2 -0.35 z 2.6", "by 1.2 -0.4", "by 0 0 2", "go 2.4 toward 90",
    "go 500mm toward 30 up 0.3", "size 3 2", "size -2 10ft6in", "z 2", "to", "go far",
    "by 0 0", "size 0 1", "12", "to 1e9 0", "by 1,5 2", "to z 3", "by dz -1",
)  # fmt: skip

#: What is typed into fields and cells.
TEXTS = (
    "1", "0.5", "2.4", "-3", "0", "800 A", "1.6 kA 0.9 lag", "250 kVA 400 V", "50 Hz",
    "", "Name <b>&", "L1 L2 L3 N", "L1", "90", "320mm", "1.0 1.5", "1e400", "abc", "30",
    "circuit-1", "7.5 µT", "45%", "nan", "10ft6in",
)  # fmt: skip


class History:
    """What the undo stack should lead to at each of its indices."""

    def __init__(self, document):
        self.document = document
        self.stack = document.undo_stack
        self.layouts = [document.committed]
        self.made = 0
        self.stack.indexChanged.connect(self.note)

    def note(self, index):
        now = self.document.committed
        known = index < len(self.layouts) and self.layouts[index] is now
        if not known:
            assert index == self.stack.count(), "a step in the middle is another one"
            del self.layouts[index:]
            self.layouts.append(now)
            self.made += 1

    def check(self):
        assert len(self.layouts) == self.stack.count() + 1, "a step is lost"
        assert self.document.committed is self.layouts[self.stack.index()], (
            "the layout changed without a step"
        )

    def check_back_and_forth(self):
        before, stack = self.document.committed, self.stack
        if stack.canUndo():
            stack.undo()
            self.check()
            stack.redo()
        assert self.document.committed is before
        self.check()

    def check_all(self):
        """Undo everything and redo it; every state is met again."""
        at = self.stack.index()
        for index in [*range(at, -1, -1), *range(self.stack.count() + 1), at]:
            self.stack.setIndex(index)
            self.check()


class Walk:
    """Random acts on the window's widgets."""

    def __init__(self, window, seed):
        self.window = window
        self.document = window.document
        self.dice = random.Random(seed)
        self.history = History(window.document)
        self.acts = [
            (self.tool, 6), (self.draw, 24), (self.click, 16), (self.drag, 16),
            (self.twice, 4), (self.key, 14), (self.words, 12), (self.choice, 5),
            (self.menu, 14), (self.undo, 5), (self.redo, 5), (self.select, 8),
            (self.panel, 4), (self.back, 12),
            (self.field, 12), (self.cell, 6), (self.box, 6), (self.button, 8),
            (self.answer, 10), (self.wheel, 3), (self.view, 2), (self.rail, 3),
            (self.caption, 2), (self.section, 5), (self.paste, 3), (self.size, 1),
            (self.foot, 2),
        ]  # fmt: skip

    def step(self):
        acts, weights = zip(*self.acts, strict=True)
        act = self.dice.choices(acts, weights)[0]
        if len(self.document.layout.by_id()) > MOST:
            act = self.clear
        act()
        return act.__name__

    # -- the drawing --------------------------------------------------------------

    def shown(self):
        drawings = self.window.drawings
        return drawings.views[drawings.shown]

    def somewhere(self, widget):
        """A random place, more often near one that is used already."""
        rect = widget.rect()
        grid = self.dice.choice((1, 40))
        x = self.dice.randrange(max(rect.width(), 1)) // grid * grid
        y = self.dice.randrange(max(rect.height(), 1)) // grid * grid
        return QPoint(x, y)

    def on_drawing(self):
        view = self.shown().viewport()
        return view if view.isVisible() else None

    def tool(self, first=Key.Key_1):
        self.window.drawings.take_keyboard()
        QTest.keyClick(self.shown(), Key(self.dice.randrange(first, Key.Key_9 + 1)))

    def draw(self):
        """Take a tool, click some places and end."""
        self.window.drawings.show_view("Plan")
        self.window.show_drawing()
        self.tool(Key.Key_2)
        for _ in range(self.dice.randint(2, 5)):
            self.click()
        QTest.keyClick(self.shown(), Key.Key_Return)

    def back(self):
        """Back to the drawing from wherever one is."""
        QTest.keyClick(self.window.pages.currentWidget(), Key.Key_Escape)
        QTest.keyClick(self.focus(), Key.Key_Escape)

    def clear(self):
        """Delete all that is drawn, so that the walk keeps its pace."""
        self.window.show_drawing()
        QTest.keyClick(self.shown(), Key.Key_1)
        QTest.keyClick(self.shown(), Key.Key_A, CONTROL)
        QTest.keyClick(self.shown(), Key.Key_Delete)
        if len(self.document.layout.by_id()) > MOST:
            self.document.undo_stack.setIndex(0)

    def click(self):
        view = self.on_drawing()
        if view is not None:
            at = self.somewhere(view)
            QTest.mouseMove(view, at)
            QTest.mouseClick(view, LEFT, self.dice.choice((NONE, NONE, SHIFT)), at)

    def twice(self):
        view = self.on_drawing()
        if view is not None:
            QTest.mouseDClick(view, LEFT, NONE, self.somewhere(view))

    def drag(self):
        view = self.on_drawing()
        if view is not None:
            self.drag_on(view)

    def drag_on(self, view, *, backs_out=True):
        a, b = self.somewhere(view), self.somewhere(view)
        button = self.dice.choice((LEFT, LEFT, LEFT, Qt.MouseButton.RightButton))
        QTest.mousePress(view, button, NONE, a)
        for k in (1, 2, 3):
            move(view, a + (b - a) * k / 3, button)
        if backs_out and self.dice.random() < 0.2:
            QTest.keyClick(self.focus(), Key.Key_Escape)
        QTest.mouseRelease(view, button, NONE, b)

    def key(self):
        QTest.keyClick(self.focus(), self.dice.choice(KEYS))

    def focus(self):
        return QApplication.focusWidget() or self.window

    def words(self):
        strip = self.window.strip
        if strip.isVisible():
            strip.take_focus()
            QTest.keyClicks(strip.words, self.dice.choice(WORDS))
            QTest.keyClick(strip.words, Key.Key_Return)

    def choice(self):
        boxes = list(self.window.strip.findChildren(QComboBox))
        self.turn(self.seen(boxes))

    # -- commands -----------------------------------------------------------------

    def menu(self):
        menus = [a.menu() for a in self.window.menuBar().actions()]
        entries = [entry for menu in menus for entry in every_action(menu)]
        self.trigger(self.dice.choice(entries))

    def trigger(self, action):
        if action.isEnabled():
            action.trigger()

    def undo(self):
        for _ in range(self.dice.choice((1, 1, 2, 3))):
            QTest.keyClick(self.shown(), Key.Key_Z, CONTROL)

    def redo(self):
        for _ in range(self.dice.choice((1, 2, 5))):
            self.trigger(self.window.menus._redo)

    def select(self):
        items = list(self.document.layout.by_id())
        self.document.select(self.dice.sample(items, min(len(items), 2)))

    def paste(self):
        if len(list(self.document.layout.items())) < 60:
            self.window.drawings.take_keyboard()
            QTest.keyClick(self.shown(), Key.Key_C, CONTROL)
            QTest.keyClick(self.shown(), Key.Key_V, CONTROL)

    # -- panels -------------------------------------------------------------------

    def panel(self):
        bar = self.window.panels.findChild(QTabBar)
        bar.setCurrentIndex(self.dice.randrange(bar.count()))

    def seen(self, widgets):
        found = [w for w in widgets if w.isVisible() and w.isEnabled()]
        return self.dice.choice(found) if found else None

    def area(self):
        page = self.window.pages.currentWidget()
        panels = [self.window.panels, self.window.panels]
        return self.dice.choice(
            [*panels, page] if page is self.window.section else panels
        )

    def field(self):
        fields = self.area().findChildren(QLineEdit)
        field = self.seen(fields + self.area().findChildren(QPlainTextEdit))
        if field is not None:
            field.setFocus()
            field.selectAll()
            QTest.keyClicks(field, self.dice.choice(TEXTS))
            end = self.dice.choice((Key.Key_Return, Key.Key_Tab, Key.Key_Escape))
            QTest.keyClick(field, end)

    def cell(self):
        table = self.seen(self.area().findChildren(QTableView))
        model = table.model() if table is not None else None
        if model is None or not model.rowCount():
            return
        row = self.dice.randrange(model.rowCount())
        column = self.dice.randrange(model.columnCount())
        table.setFocus()
        table.setCurrentIndex(model.index(row, column))
        if self.dice.random() < 0.2:
            QGuiApplication.clipboard().setText(self.dice.choice(TEXTS) + "\t1\nx\t2")
            QTest.keyClick(table, Key.Key_V, CONTROL)
            return
        for sign in self.dice.choice(TEXTS) or "\b":
            QTest.keyClicks(self.focus(), sign)
        QTest.keyClick(self.focus(), Key.Key_Return)
        QApplication.processEvents()

    def box(self):
        self.turn(self.seen(self.area().findChildren(QComboBox)))

    def turn(self, box):
        """Another entry of a choice, by the arrow keys."""
        if box is not None:
            box.setFocus()
            QTest.keyClick(box, self.dice.choice((Key.Key_Down, Key.Key_Up)))

    def button(self):
        buttons = self.area().findChildren(QAbstractButton)
        found = self.seen([b for b in buttons if not opens_menu(b)])
        if found is not None:
            QTest.mouseClick(found, LEFT, NONE, QPoint(8, found.height() // 2))

    def answer(self):
        """Answer the question of the bar, if one is asked."""
        bar = self.window.ask_bar
        if not bar.isVisible():
            return
        for field in bar.fields:
            if isinstance(field, QLineEdit) and self.dice.random() < 0.5:
                field.setFocus()
                field.selectAll()
                QTest.keyClicks(field, self.dice.choice(("1", "2", "45", "-0.5", "x")))
        found = self.seen(bar.findChildren(QAbstractButton))
        if found is not None:
            QTest.mouseClick(found, LEFT)

    # -- the view -----------------------------------------------------------------

    def wheel(self):
        view = self.on_drawing()
        if view is not None:
            at = QPointF(self.somewhere(view))
            turn = QPoint(0, self.dice.choice((-240, -120, 120, 240)))
            event = QWheelEvent(
                at, view.mapToGlobal(at), QPoint(), turn, Qt.MouseButton.NoButton,
                NONE, Qt.ScrollPhase.NoScrollPhase, False,
            )  # fmt: skip
            QApplication.sendEvent(view, event)

    def view(self):
        views = list(self.window.drawings.views)
        self.window.drawings.show_view(self.dice.choice(["Plan", "Plan", *views]))

    def rail(self):
        rail = self.window.rail
        if rail.isVisible():
            if self.dice.random() < 0.5:
                self.drag_on(rail)
            else:
                rail.setFocus()
                QTest.keyClick(rail, self.dice.choice((Key.Key_Up, Key.Key_Down)))

    def caption(self):
        caption = self.window.caption
        if self.dice.random() < 0.5:
            self.trigger(self.dice.choice(caption._layers.menu().actions()))
        else:
            self.turn(self.seen(caption.findChildren(QComboBox)))

    def section(self):
        """Cut the run that is selected, and drag in its section."""
        window = self.window
        if window.pages.currentWidget() is not window.section:
            runs = [run.id for run in self.document.layout.runs]
            self.document.select(runs[:1])
            QTest.keyClick(self.shown(), Key.Key_F6)
            return
        for _ in range(3):
            self.drag_on(window.section.canvas)
        if self.dice.random() < 0.3:
            QTest.keyClick(window.section, Key.Key_Escape)

    def size(self):
        self.window.resize(*self.dice.choice(((1024, 600), (1360, 860), (1920, 1000))))
        self.window.set_theme(self.dice.choice((LIGHT, DARK)))

    def foot(self):
        found = self.seen(self.window.margins.findChildren(QAbstractButton))
        if found is not None:
            QTest.mouseClick(found, LEFT)


def move(widget, at, button):
    """A move of the pointer with a button held, which QTest cannot send."""
    at = QPointF(at)
    event = QMouseEvent(
        QEvent.Type.MouseMove, at, widget.mapToGlobal(at), Qt.MouseButton.NoButton,
        button, NONE,
    )  # fmt: skip
    QApplication.sendEvent(widget, event)


def every_action(menu):
    """The entries of a menu and of those within it."""
    for action in menu.actions():
        if action.menu() is not None:
            yield from every_action(action.menu())
        elif not action.isSeparator():
            yield action


def opens_menu(button: QWidget):
    """Whether a click would wait for a choice in a menu."""
    return isinstance(button, QToolButton) and button.menu() is not None


@pytest.fixture
def window(qtbot, monkeypatch, tmp_path):
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    monkeypatch.setattr(library, "default_path", lambda: tmp_path / "library.json")
    for ask in ("getOpenFileName", "getSaveFileName"):
        monkeypatch.setattr(QFileDialog, ask, lambda *_args: ("", ""))
    monkeypatch.setattr(recompute._Results, "compute", lambda *_args: None)
    made = MainWindow(Document(empty_layout(preferences.Preferences())), Messages())
    # Asked what should become of unsaved work, the user goes back; but for the end.
    made.files.may_leave = lambda: False
    qtbot.addWidget(
        made, before_close_func=lambda w: setattr(w.files, "may_leave", lambda: True)
    )
    with qtbot.waitActive(made):
        made.show()
        made.activateWindow()
    return made


@pytest.mark.qt_log_ignore("This plugin does not support", extend=True)
@pytest.mark.parametrize("seed", SEEDS)
def test_no_act_breaks_anything(qtbot, window, seed):
    walk = Walk(window, seed)
    document, history = window.document, walk.history
    done: list[str] = []
    with qtbot.captureExceptions() as exceptions:
        for number in range(ACTS):
            done.append(walk.step())
            where = f"seed {seed}, act {number}: {done[-6:]}"
            assert not exceptions, f"{where}: {exceptions[-1]}"
            assert not document.is_previewing, where
            history.check()
            assert document.selection <= set(document.layout.by_id()), where
            if walk.dice.random() < 0.1:
                QApplication.processEvents()
                history.check_back_and_forth()
        QApplication.processEvents()
        history.check_all()
    history.stack.indexChanged.disconnect(history.note)
    assert not exceptions
    assert history.made > ACTS // 20, "hardly anything happened"
    layout = document.committed
    assert layout_file.decode(layout_file.encode(layout), "the walk") == layout
