"""The menus: every command with its words, key and explanation, as one table.

Keys of the platform (open, save, undo, copy …) are the platform's own.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMainWindow, QMenu

from app.messages import Messages
from engine.errors import UserError

Key = str | QKeySequence.StandardKey


@dataclass(frozen=True)
class Command:
    """One entry of a menu; a text of "" is a line between entries."""

    text: str = ""
    act: Callable[[], object] | None = None
    key: Key = ""
    tip: str = ""
    icon: str = ""


LINE = Command()


def add_menu(
    window: QMainWindow, title: str, entries: Sequence[Command], messages: Messages
) -> tuple[QMenu, dict[str, QAction]]:
    """A menu of commands; their `UserError`s are shown as messages."""
    menu = window.menuBar().addMenu(title)
    menu.setToolTipsVisible(True)
    actions: dict[str, QAction] = {}
    for entry in entries:
        if entry.act is None:
            menu.addSeparator()
            continue
        action = QAction(entry.text, window)
        if isinstance(entry.key, QKeySequence.StandardKey):
            # All that the platform knows: redo has several keys.
            action.setShortcuts(entry.key)
        elif entry.key:
            action.setShortcut(entry.key)
        action.setToolTip(entry.tip or entry.text)
        action.triggered.connect(_guarded(entry.act, messages))
        menu.addAction(action)
        window.addAction(action)
        actions[entry.text] = action
    return menu, actions


def _guarded(act: Callable[[], object], messages: Messages) -> Callable[[], None]:
    def run() -> None:
        try:
            act()
        except UserError as error:
            messages.refuse(str(error))

    return run
