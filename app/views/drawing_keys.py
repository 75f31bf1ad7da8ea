"""Keys of the drawing: arrows as ways, and what marks a command rather than a text."""

from __future__ import annotations

from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent

from app.tools.tool import Tool

ARROWS = {
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Down: (0.0, -1.0),
    Qt.Key.Key_Up: (0.0, 1.0),
}

#: What a number begins with.
NUMBERS = frozenset("0123456789+-.,−")

COMMANDS = (
    Qt.KeyboardModifier.ControlModifier
    | Qt.KeyboardModifier.AltModifier
    | Qt.KeyboardModifier.MetaModifier
)


def is_entry(event: QEvent, tool: Tool | None) -> bool:
    """Whether a key begins words, or a number of what is under way."""
    if tool is None or not isinstance(event, QKeyEvent):
        return False
    if event.modifiers() & COMMANDS:
        return False
    text = event.text()
    return text.isalpha() or (text in NUMBERS and tool.takes_numbers())
