"""The line at the foot that says what can be done; it gives way to what is read."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QLabel, QSizePolicy


class HintLine(QLabel):
    """Shows a sentence, shortened where there is no room; the tip has it whole."""

    def __init__(self) -> None:
        super().__init__()
        self._sentence = ""
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.setMinimumWidth(120)

    @property
    def sentence(self) -> str:
        """The whole sentence."""
        return self._sentence

    def say(self, sentence: str) -> None:
        """Show another sentence."""
        self._sentence = sentence
        self.setToolTip(sentence)
        self.setAccessibleName(sentence)
        self._shorten()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._shorten()

    def _shorten(self) -> None:
        mode = Qt.TextElideMode.ElideRight
        self.setText(self.fontMetrics().elidedText(self._sentence, mode, self.width()))
