"""Form parts: a line that holds its unit and explains itself, and a choice of words.

A value that cannot be turns the field, says why beneath it, and changes nothing.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtGui import QKeyEvent, QWheelEvent
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLineEdit,
    QSizePolicy,
    QWidget,
)

from app.panels.panel import Words, column, decimal_sign, plain_tip
from app.theme import STEP, theme_for
from engine.errors import UserError
from engine.typed_numbers import number_text, typed_quantity


@dataclass(frozen=True)
class Quantity:
    """A number with a unit and a range: how a field reads and writes it.

    Attributes
    ----------
    name : str
        As the sentences call it: "The voltage".
    unit : str
        The unit shown; empty for a plain number.
    units : mapping
        What one of each typed unit is in SI.
    low, high : float
        Range in SI, both included unless `above_low`.
    optional : bool
        An empty field gives None.
    """

    name: str
    unit: str = ""
    units: Mapping[str, float] = field(default_factory=dict)
    low: float = float("-inf")
    high: float = float("inf")
    above_low: bool = False
    optional: bool = False

    def read(self, text: str) -> float | None:
        """The value in SI.

        Raises
        ------
        UserError
            When it is no number, or out of range.
        """
        if not text.strip():
            if self.optional:
                return None
            raise UserError(f"{self.name} is needed; type a number{self._example()}.")
        units = self.units or {self.unit: 1.0}
        value = typed_quantity(text, units, self.unit, decimal_sign())
        if value < self.low or (self.above_low and value == self.low):
            word = "more than" if self.above_low else "at least"
            raise UserError(f"{self.name} must be {word} {self.write(self.low)}.")
        if value > self.high:
            raise UserError(f"{self.name} must be at most {self.write(self.high)}.")
        return value

    def write(self, value: float | None) -> str:
        """The value with its unit."""
        if value is None:
            return ""
        factor = self.units.get(self.unit, 1.0)
        gap = "" if self.unit == "°" else " "
        number = number_text(value / factor, decimal_sign())
        return f"{number}{gap}{self.unit}".rstrip()

    def _example(self) -> str:
        return f" in {self.unit}" if self.unit else ""


class ValueField(QWidget):
    """One editable value with its unit, its reason when refused, and perhaps a mark.

    Attributes
    ----------
    line : QLineEdit
        Where it is typed.
    reason : Words
        Why the typed text was refused; hidden while it was not.
    """

    def __init__(
        self,
        read: Callable[[str], Any],
        write: Callable[[Any], str],
        enter: Callable[[Any], None],
        *,
        name: str,
        tip: str = "",
        hint: str = "",
        mark: QWidget | None = None,
    ) -> None:
        """Parameters
        ----------
        read, write
            Text to value and back; `read` raises `UserError`.
        enter
            Called with a value that differs from the one shown; may raise `UserError`.
        name
            What screen readers call it.
        tip
            Tooltip, with the unit.
        hint
            Shown while it is empty.
        """
        super().__init__()
        self._read, self._write, self._enter = read, write, enter
        self._value: Any = None
        self._shown = ""
        self._tip = tip
        self.line = QLineEdit()
        self.line.setAccessibleName(name)
        self.line.setToolTip(tip)
        self.line.setPlaceholderText(hint)
        self.line.editingFinished.connect(self._on_finished)
        self.line.installEventFilter(self)
        self.reason = Words(style="warning")
        self.reason.hide()
        row = QHBoxLayout()
        row.setSpacing(STEP)
        row.addWidget(self.line, 1)
        if mark is not None:
            row.addWidget(mark)
        box = column(self)
        box.setSpacing(STEP // 2)
        box.addLayout(row)
        box.addWidget(self.reason)
        self.setFocusProxy(self.line)

    @classmethod
    def of(
        cls, quantity: Quantity, enter: Callable[[Any], None], *, name: str,
        tip: str = "", hint: str = "", mark: QWidget | None = None,
    ) -> ValueField:  # fmt: skip
        """A field for a number with a unit and a range."""
        return cls(
            quantity.read, quantity.write, enter,
            name=name, tip=tip, hint=hint, mark=mark,
        )  # fmt: skip

    @classmethod
    def words(
        cls, enter: Callable[[str], None], *, name: str, tip: str = "",
        hint: str = "", mark: QWidget | None = None, most: int = 400,
    ) -> ValueField:  # fmt: skip
        """A field for a short text."""
        made = cls(str.strip, str, enter, name=name, tip=tip, hint=hint, mark=mark)
        made.line.setMaxLength(most)
        return made

    def set_value(self, value: Any, *, keep_typing: bool = True) -> None:
        """Show a value, but not over what a person is typing just now."""
        text = self._write(value)
        is_typing = self.line.hasFocus() and self.line.text() != self._shown
        self._value, self._shown = value, text
        if keep_typing and is_typing:
            return
        self._show_shown()

    def set_mixed(self, text: str) -> None:
        """Say that several items have different values."""
        self._value, self._shown = None, ""
        self._show_shown()
        self.line.setPlaceholderText(text)

    def refuse(self, sentence: str) -> None:
        """Turn the field and say why."""
        colour = theme_for(self.palette()).warning
        self.line.setStyleSheet(f"border: 2px solid {colour};")
        self.line.setToolTip(plain_tip(sentence))
        self.reason.setText(sentence)
        self.reason.show()

    @property
    def is_refused(self) -> bool:
        return bool(self.reason.text())

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if (
            isinstance(event, QKeyEvent)
            and event.type() == QEvent.Type.KeyPress
            and event.key() == Qt.Key.Key_Escape
            and (self.is_refused or self.line.text() != self._shown)
        ):
            self._show_shown()
            return True
        return super().eventFilter(watched, event)

    def _show_shown(self) -> None:
        self._accept()
        self.line.setText(self._shown)
        self.line.setCursorPosition(0)

    def _accept(self) -> None:
        if self.is_refused:
            self.line.setStyleSheet("")
            self.line.setToolTip(self._tip)
            self.reason.setText("")
            self.reason.hide()

    def _on_finished(self) -> None:
        text = self.line.text()
        if text == self._shown:
            self._accept()
            return
        try:
            value = self._read(text)
            if value != self._value:
                self._enter(value)
        except UserError as error:
            self.refuse(str(error))
            return
        self._accept()
        self._value = value
        self._shown = self._write(value)
        self._show_shown()


class Choice(QComboBox):
    """One of several values, each in words."""

    def __init__(
        self,
        options: Sequence[tuple[Any, str]],
        enter: Callable[[Any], None],
        *,
        name: str,
        tip: str = "",
    ) -> None:
        super().__init__()
        self._enter = enter
        self.setAccessibleName(name)
        self.setToolTip(tip)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.setMinimumWidth(20 * STEP)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.set_options(options)
        self.activated.connect(self._on_activated)

    def set_options(self, options: Sequence[tuple[Any, str]]) -> None:
        """Offer other values; the chosen one is set anew with `set_value`."""
        self.clear()
        self._values = [value for value, _ in options]
        self.addItems([words for _, words in options])

    def set_value(self, value: Any) -> None:
        """Show a value; one that is not offered shows nothing."""
        index = self._values.index(value) if value in self._values else -1
        self.setCurrentIndex(index)

    @property
    def value(self) -> Any:
        index = self.currentIndex()
        return self._values[index] if index >= 0 else None

    def wheelEvent(self, event: QWheelEvent) -> None:
        # A wheel that passes over a panel must not change values.
        if self.hasFocus():
            super().wheelEvent(event)
        else:
            event.ignore()

    def _on_activated(self, index: int) -> None:
        self._enter(self._values[index])
