"""Keys of the drawing: arrows as ways, and what marks a command rather than a text."""

from __future__ import annotations

from PySide6.QtCore import Qt

ARROWS = {
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Down: (0.0, -1.0),
    Qt.Key.Key_Up: (0.0, 1.0),
}

COMMANDS = (
    Qt.KeyboardModifier.ControlModifier
    | Qt.KeyboardModifier.AltModifier
    | Qt.KeyboardModifier.MetaModifier
)
