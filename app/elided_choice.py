"""A choice whose text is shortened in its middle where there is no room for it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QPaintEvent
from PySide6.QtWidgets import QComboBox, QStyle, QStyleOptionComboBox, QStylePainter

from app.theme import STEP


class ElidedChoice(QComboBox):
    """Never cuts a letter: where text is left out, an ellipsis says so."""

    def width_of_text(self) -> int:
        """As wide as what is chosen needs to be read whole. [px]"""
        metrics = self.fontMetrics()
        texts = [self.itemText(i) for i in range(self.count())]
        longest = max(map(metrics.horizontalAdvance, texts), default=0)
        own = metrics.horizontalAdvance(self.currentText())
        return self.sizeHint().width() - longest + own + STEP

    def showPopup(self) -> None:
        # Every entry is read whole, however narrow the box is.
        self.view().setMinimumWidth(self.sizeHint().width())
        super().showPopup()

    def paintEvent(self, _event: QPaintEvent) -> None:
        painter = QStylePainter(self)
        option = QStyleOptionComboBox()
        self.initStyleOption(option)
        painter.drawComplexControl(QStyle.ComplexControl.CC_ComboBox, option)
        room = self.style().subControlRect(
            QStyle.ComplexControl.CC_ComboBox,
            option,
            QStyle.SubControl.SC_ComboBoxEditField,
            self,
        )
        option.currentText = self.fontMetrics().elidedText(  # type: ignore[attr-defined]
            self.currentText(), Qt.TextElideMode.ElideMiddle, room.width() - STEP
        )
        painter.drawControl(QStyle.ControlElement.CE_ComboBoxLabel, option)
        painter.end()
