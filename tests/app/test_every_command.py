"""Every command of every menu, whatever is selected: one step, or a whole sentence."""

from __future__ import annotations

import re
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QAction, QGuiApplication, QImage
from PySide6.QtWidgets import QApplication, QFileDialog, QPushButton
from pytestqt.qtbot import QtBot

from app import field_store, library, preferences, recompute, recovery
from app.document import Document
from app.files import empty_layout
from app.jobs import Jobs
from app.main_window import MainWindow
from app.messages import Messages
from engine import layout_file
from engine.layout import Layout

SAMPLES = Path(__file__).parents[2] / "sample_layouts"
OFFICE, SMALL = "office-over-switch-room", "small-switch-room"

#: Samples, and what is selected in them; "empty" is a layout of nothing instead.
STATES = (
    (OFFICE, "nothing"), (OFFICE, "a run"), (OFFICE, "a zone"), (OFFICE, "a receptor"),
    (SMALL, "a run"), (SMALL, "empty"),
)  # fmt: skip

#: A sentence: a capital, a sign or the name of a file to begin with, and an end.
SENTENCE = re.compile(r"(?:[^a-z\s]|\S+\.json ).*[.?]", re.DOTALL)

#: Menus whose commands do the same whatever is selected.
ALIKE = ("&File", "&View", "&Help")

# Offscreen, windows have no order.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support", extend=True)


class Walk:
    """A window on a copy of a sample, and what it told."""

    def __init__(self, window: MainWindow, path: Path) -> None:
        self.window, self.path = window, path
        self.layout = layout_file.read(path)
        self.told: list[str] = []
        window.messages.told.connect(lambda _kind, text: self.told.append(text))
        window.messages.failed.connect(lambda *text: pytest.fail("\n".join(text)))
        window.jobs.refused.connect(self.told.append)

    def begin(self, state: str) -> Layout:
        """Show the copy as it was read, with something selected."""
        w, layout = self.window, self.layout
        if state == "empty":
            layout = empty_layout(preferences.Preferences())
        if w.document.whole is not layout:
            w.document.open(layout, self.path)
        kinds = {"a run": "runs", "a zone": "zones", "a receptor": "receptors"}
        items = getattr(layout, kinds[state]) if state in kinds else ()
        w.document.select(item.id for item in items[:1])
        w.toolbox.activate(w.toolbox.tools[0])
        w.show_drawing()
        return layout

    def commands(self) -> list[tuple[str, ...]]:
        """Where every command stands: the names on the way to it."""
        menus = self.window.menuBar().actions()
        return [*ways(menus), *((a.text(),) for a in self.window.tool_row.actions())]

    def run(self, way: tuple[str, ...]) -> None:
        """Trigger a command, answer what it asks, and see what became of it."""
        action = self._find(way)
        if action is None or not action.isEnabled():
            return
        action.trigger()
        QApplication.processEvents()
        bar = self.window.ask_bar
        if bar.isVisible():
            buttons = bar.findChildren(QPushButton)
            apply, leave = [b for b in buttons if b.isVisible()][:2]
            apply.click()
            if bar.isVisible():
                self.told.append(bar._fault.text())
                leave.click()
        QApplication.processEvents()

    def _find(self, way: tuple[str, ...]) -> QAction | None:
        actions = [*self.window.menuBar().actions(), *self.window.tool_row.actions()]
        for depth, name in enumerate(way):
            named = [a for a in actions if plain(a.text()) == plain(name)]
            if not named:
                return None
            if depth == len(way) - 1:
                return named[0]
            menu = named[0].menu()
            assert menu is not None
            actions = menu.actions()
        return None


def plain(text: str) -> str:
    # The steps of the history stand in the menu.
    return re.sub(r"^(Undo|Redo):.*", r"\1", text.replace("&", ""))


def ways(
    actions: list[QAction], before: tuple[str, ...] = ()
) -> Iterator[tuple[str, ...]]:
    for action in actions:
        menu = action.menu()
        here = (*before, action.text())
        if menu is not None:
            yield from ways(menu.actions(), here)
        elif not action.isSeparator():
            yield here


@pytest.fixture
def walk(
    sample: str,
    qtbot: QtBot,
    monkeypatch: pytest.MonkeyPatch,
    tmp_path: Path,
) -> Walk:
    monkeypatch.setattr(preferences, "folder", lambda: tmp_path)
    monkeypatch.setattr(recovery, "folder", lambda: tmp_path / "unsaved")
    monkeypatch.setattr(library, "default_path", lambda: tmp_path / "library.json")
    # What is computed and written has tests of its own.
    monkeypatch.setattr(recompute._Results, "compute", lambda *_: None)
    monkeypatch.setattr(field_store, "load_kernels", lambda: None)
    monkeypatch.setattr("app.answers.Answers._compute", lambda *_: None)
    monkeypatch.setattr(Jobs, "start", lambda *_: None)
    path = tmp_path / "copy.json"
    shutil.copy(SAMPLES / f"{sample}.json", path)
    preferences.save(preferences.Preferences().with_recent(path))
    window = MainWindow(Document(layout_file.read(path), path), Messages())
    # Asking before work is lost has tests of its own; here the window stays.
    monkeypatch.setattr(window.files, "may_leave", lambda: True)
    monkeypatch.setattr(window, "closeEvent", QEvent.ignore)
    qtbot.addWidget(
        window, before_close_func=lambda w: w.document.undo_stack.setClean()
    )
    window.show()
    return Walk(window, path)


@pytest.fixture
def choose(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Callable[[bool], None]:
    """Answers every question for a file: with none, or with one there is."""
    picture = tmp_path / "picture.png"
    image = QImage(40, 30, QImage.Format.Format_RGB32)
    image.fill(Qt.GlobalColor.white)
    assert image.save(str(picture))
    layout = tmp_path / "other.json"
    shutil.copy(SAMPLES / f"{SMALL}.json", layout)

    def answer(some: bool) -> None:
        def opened(*asked: object, **_: object) -> tuple[str, str]:
            kinds = str(asked[3]) if len(asked) > 3 else ""
            found = layout if "json" in kinds else picture
            return (str(found), kinds) if some else ("", "")

        def saved(*asked: object, **_: object) -> tuple[str, str]:
            kinds = str(asked[3]) if len(asked) > 3 else ""
            ending = re.search(r"\*(\.\w+)", kinds)
            name = tmp_path / f"written{ending[1] if ending else ''}"
            return (str(name), kinds) if some else ("", "")

        monkeypatch.setattr(QFileDialog, "getOpenFileName", staticmethod(opened))
        monkeypatch.setattr(QFileDialog, "getSaveFileName", staticmethod(saved))
        monkeypatch.setattr(
            QFileDialog,
            "getExistingDirectory",
            staticmethod(lambda *_a, **_k: str(tmp_path) if some else ""),
        )

    return answer


@pytest.mark.parametrize(("sample", "state"), STATES)
def test_every_command_is_one_step_or_a_sentence(
    walk: Walk, choose: Callable[[bool], None], state: str
) -> None:
    choose(state != "nothing")
    QGuiApplication.clipboard().clear()
    document = walk.window.document
    commands = walk.commands()
    assert len(commands) > 70
    if state not in ("nothing", "empty"):
        commands = [way for way in commands if way[0] not in ALIKE]
    for way in commands:
        before = walk.begin(state)
        step = document.undo_stack.index()
        walk.told.clear()
        walk.run(way)
        name = " > ".join(way)
        for text in walk.told:
            assert SENTENCE.fullmatch(text), (name, text)
        if way[0] == "&File":
            # Other layouts are opened there.
            continue
        steps = document.undo_stack.index() - step
        if document.whole is before:
            assert steps == 0, name
            continue
        assert steps == 1, name
        assert document.undo_stack.undoText(), name
        changed = document.whole
        document.undo_stack.undo()
        assert document.whole == before, name
        document.undo_stack.redo()
        assert document.whole == changed, name
        document.undo_stack.undo()
