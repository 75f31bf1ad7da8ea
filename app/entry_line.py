"""Parts of the entry strip: a field that leaves some keys to the tool, and a look."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from app.theme import STEP, Theme


def explain(widget: QWidget, name: str, meaning: str) -> None:
    """Say what it is and what it takes, to the eye and to a screen reader."""
    widget.setAccessibleName(name)
    widget.setAccessibleDescription(meaning)
    widget.setToolTip(f"{name}: {meaning}" if name not in meaning else meaning)


def toggle_style(theme: Theme) -> str:
    """A toggle that is on is filled, so that it shows in every theme."""
    return (
        f"QToolButton {{ border: 1px solid {theme.line}; border-radius: {STEP}px;"
        f" padding: {STEP // 2}px {STEP}px; color: {theme.text}; }}"
        f"QToolButton:checked {{ background: {theme.accent};"
        f" border-color: {theme.accent}; color: {theme.on_accent}; }}"
        f"QToolButton:focus {{ border: 2px solid {theme.accent}; }}"
        f"QToolButton:checked:focus {{ border: 2px solid {theme.text}; }}"
    )


class EntryLine(QLineEdit):
    """Takes a number or words.

    Signals
    -------
    erased_nothing()
        Backspace in an empty field: the tool may take its last place back.
    """

    erased_nothing = Signal()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Backspace and not self.text():
            self.erased_nothing.emit()
        else:
            super().keyPressEvent(event)
