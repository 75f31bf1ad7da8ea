"""A bar above the drawing that asks for what a command still needs: no dialog."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QSizePolicy,
    QWidget,
)

from app.theme import STEP, scaled, theme_for
from engine.errors import UserError


@dataclass(frozen=True)
class Question:
    """One field of the bar.

    Attributes
    ----------
    label : str
        With the unit, "slab thickness [m]".
    default : str
    tip : str
    choices : tuple of str
        Where not empty, the answer is one of these.
    """

    label: str
    default: str
    tip: str
    choices: tuple[str, ...] = ()


class AskBar(QWidget):
    """Asks, and hands the answers over when the button is pressed.

    Signals
    -------
    closed()
        Answered or put aside.
    """

    closed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._fields: list[QLineEdit | QComboBox] = []
        self._done: Callable[[list[str]], None] | None = None
        self._row = QHBoxLayout(self)
        self._row.setContentsMargins(3 * STEP, STEP, 2 * STEP, STEP)
        self._row.setSpacing(2 * STEP)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Maximum)
        self.setAccessibleName("Question")
        self.hide()

    def ask(
        self,
        title: str,
        questions: Sequence[Question],
        button: str,
        done: Callable[[list[str]], None],
    ) -> None:
        """Show the questions; `done(answers)` may raise `UserError`, shown beside."""
        while (item := self._row.takeAt(0)) is not None:
            widget = item.widget()
            if widget is not None:
                widget.hide()
                widget.deleteLater()
        self._done = done
        self._fields = []
        self._row.addWidget(QLabel(title))
        for question in questions:
            self._row.addWidget(QLabel(question.label))
            self._row.addWidget(self._field(question))
        self._fault = QLabel()
        self._fault.setTextFormat(Qt.TextFormat.PlainText)
        self._fault.setStyleSheet(f"color: {theme_for(self.palette()).warning};")
        apply, leave = QPushButton(button), QPushButton("Leave it")
        apply.clicked.connect(self._apply)
        leave.clicked.connect(self._leave)
        self._row.addWidget(apply)
        self._row.addWidget(leave)
        self._row.addWidget(self._fault, 1)
        self.show()
        (self._fields[0] if self._fields else apply).setFocus()

    @property
    def fields(self) -> list[QLineEdit | QComboBox]:
        """The fields of the question shown, in order."""
        return self._fields

    def _field(self, question: Question) -> QLineEdit | QComboBox:
        field: QLineEdit | QComboBox
        if question.choices:
            field = QComboBox()
            field.addItems(question.choices)
            field.setCurrentText(question.default)
        else:
            field = QLineEdit(question.default)
            field.setMaximumWidth(scaled(120))
            field.selectAll()
            field.returnPressed.connect(self._apply)
        field.setToolTip(question.tip)
        field.setAccessibleName(question.label)
        self._fields.append(field)
        return field

    def _apply(self) -> None:
        answers = [
            f.currentText() if isinstance(f, QComboBox) else f.text()
            for f in self._fields
        ]
        assert self._done is not None
        try:
            self._done(answers)
        except UserError as error:
            self._fault.setText(str(error))
            return
        self._leave()

    def _leave(self) -> None:
        self.hide()
        self.closed.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self._leave()
        else:
            super().keyPressEvent(event)
