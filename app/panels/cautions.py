"""The cautions in full: what the figures are, and what they are not."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from app.panels.panel import Words, scrolled
from app.theme import STEP
from engine.report.wording import CAUTIONS, NOT_MODELLED


def cautions_text() -> str:
    """All cautions as plain text, for this panel, About and Help."""
    listed = "\n".join(f"–  {item}" for item in NOT_MODELLED)
    return "\n\n".join([*CAUTIONS, f"Not modelled:\n{listed}"])


class CautionsPanel(QWidget):
    """The full text, scrolled, with a way back.

    Signals
    -------
    closed()
    """

    closed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        title = Words("Cautions", "title")
        close = QPushButton("Close")
        close.setToolTip("Close the cautions (Esc)")
        close.clicked.connect(self.closed)
        head = QHBoxLayout()
        head.addWidget(title, 1)
        head.addWidget(close)
        self.text = Words(cautions_text(), "plain")
        self.text.setAccessibleName("Cautions")
        self.text.setMaximumWidth(190 * STEP)
        box = QVBoxLayout(self)
        box.setContentsMargins(2 * STEP, STEP, 2 * STEP, STEP)
        box.addLayout(head)
        box.addWidget(scrolled(self.text, "Cautions"), 1)
