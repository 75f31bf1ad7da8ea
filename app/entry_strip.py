"""The entry strip above the drawing: labelled fields, a line for words, the toggles.

Tab walks from the way of entering through its fields to the line of words. What is
entered goes to the active tool; what cannot be understood turns its field, says why
beside it, and changes nothing.
"""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QSizePolicy,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app import entry_words
from app.elided_choice import ElidedChoice
from app.entry_fields import FIELDS, LENGTH, MEANINGS
from app.entry_line import EntryLine, explain, toggle_style
from app.panels.panel import decimal_sign
from app.slip import Slip
from app.theme import BODY, STEP, theme_for
from app.tools.drawing_tool import DrawingTool
from app.tools.tool import Entry, Tool
from app.wrapping import ReservedRow, WrappingRow, group_in_row
from engine.errors import UserError
from engine.typed_lengths import typed_length

_EXAMPLE = "to 3.2 -0.35 z 2.6"

#: Width of the toggles and of what tools offer. [logical pixels]
_OFFERED = 36 * BODY


class EntryStrip(QWidget):
    """Takes exact places and sizes for the active tool.

    Signals
    -------
    entered(entry)
        An `Entry` that was understood; the active tool has it already.
    hold_toggled(on), catch_toggled(on)
    left()
        Escape in a field: the drawing should have the keyboard again.
    """

    entered = Signal(object)
    hold_toggled = Signal(bool)
    catch_toggled = Signal(bool)
    left = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._tool: Tool | None = None
        self._unit = "m"
        self._combos: dict[str, ElidedChoice] = {}
        self.setAccessibleName("Entry strip")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        self._parts = QWidget()
        row = WrappingRow(self._parts, gap=2 * STEP, margin=2 * STEP)
        row.addWidget(self._field_group())
        row.addWidget(self._second_group())
        column.addWidget(self._parts)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.setTextFormat(Qt.TextFormat.PlainText)
        self._slip = Slip(self)
        slip = QVBoxLayout(self._slip)
        slip.setContentsMargins(2 * STEP, STEP, 2 * STEP, STEP)
        slip.addWidget(self.fault)
        self.way.currentTextChanged.connect(self._show_way)
        self._show_way(self.way.currentText())
        self._paint_toggles()

    def _field_group(self) -> QWidget:
        """The way of entering and its labelled fields."""
        group, row = group_in_row()
        self.way = QComboBox()
        self.way.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
        self.way.addItems([way for way in FIELDS if way != LENGTH])
        explain(self.way, "Way of entering", "to a place, by a way, go, or size")
        row.addWidget(self.way)
        self.labels: list[QLabel] = []
        self.fields: list[QLineEdit] = []
        for _ in range(3):
            label, field = QLabel(), self._line(self._enter_fields)
            label.setBuddy(field)
            field.setFixedWidth(5 * BODY)
            row.addWidget(label)
            row.addWidget(field)
            self.labels.append(label)
            self.fields.append(field)
        row.addWidget(self._words_line())
        # Without a share in what is left of the row.
        group.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Preferred)
        return group

    def _words_line(self) -> QWidget:
        self.words = self._line(self._enter_words)
        self.words.setPlaceholderText(_EXAMPLE)
        self.words.setMinimumWidth(6 * BODY)
        self.words.setMaximumWidth(12 * BODY)
        explain(
            self.words,
            "Entry in words",
            "to x y z, by dx dy dz, go length toward degrees, size along-x along-y; "
            "units glued to their number, as in 320mm or 10ft6in",
        )
        return self.words

    def _line(self, enter: Callable[[], None]) -> EntryLine:
        """A field that `enter` is called for on Enter, unless that ends the drawing."""

        line = EntryLine()
        line.returnPressed.connect(lambda: None if self._ends() else enter())
        line.erased_nothing.connect(self._take_back)
        line.textEdited.connect(self._clear_fault)
        return line

    def _second_group(self) -> QWidget:
        """Toggles, the height of the active tool, and what it offers.

        Always as wide and high as with all that tools offer: whether it goes into a
        further row follows from the width alone, and the drawing stays in its place.
        """
        group = ReservedRow(_OFFERED, self.way.sizeHint().height())
        row = group.row
        self.hold = self._toggle(
            "Hold 0/45/90", "Legs run at multiples of 45°", self.hold_toggled.emit
        )
        self.catch = self._toggle(
            "Catch",
            "Places are caught by vertices, middles, edges and the grid",
            self.catch_toggled.emit,
        )
        self.catch.setChecked(True)
        self.height_shown = QLabel()
        self.height_shown.setToolTip("Height at which the tool draws")
        self.height_shown.hide()
        for widget in (self.hold, self.catch, self.height_shown):
            row.addWidget(widget)
        self._choices = QHBoxLayout()
        self._choices.setSpacing(STEP)
        row.addLayout(self._choices)
        row.addStretch(1)
        return group

    def set_unit(self, unit: str) -> None:
        """Take numbers without a unit in this one: "m", "mm", "ft" or "in"."""
        self._unit = unit
        self._show_way(self.way.currentText())

    def set_tool(self, tool: Tool | None) -> None:
        """Hand entries to this tool, and show what it offers to choose."""
        old = self._tool
        if old is tool:
            return
        if isinstance(old, DrawingTool):
            old.choices_changed.disconnect(self._show_choices)
            old.overlay_changed.disconnect(self._show_height)
        if old is not None:
            old.hint_changed.disconnect(self._offer_length)
        self._tool = tool
        if isinstance(tool, DrawingTool):
            tool.choices_changed.connect(self._show_choices)
            tool.overlay_changed.connect(self._show_height)
        if tool is not None:
            tool.hint_changed.connect(self._offer_length)
        self._clear_fault()
        self._offer_length()
        self._show_choices()

    def take_focus(self, text: str = "") -> None:
        """Go to the line of words with a first letter, else to the fields."""
        field = self.words if text.isalpha() else self.fields[0]
        # Not as by a key of its own: that would select what is typed already.
        field.setFocus(Qt.FocusReason.OtherFocusReason)
        if text:
            field.setText(text)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self._paint_toggles()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self._clear()
            self.left.emit()
        else:
            super().keyPressEvent(event)

    # -- entering ---------------------------------------------------------------

    def _ends(self) -> bool:
        """End what is being drawn, when nothing is entered; whether that was so."""
        tool = self._tool
        typed = any(field.text().strip() for field in (*self.fields, self.words))
        if typed or tool is None or tool.anchor() is None:
            return False
        self._clear_fault()
        tool.enter()
        return True

    def _take_back(self) -> None:
        if self._tool is not None:
            self._tool.backspace()

    def _enter_words(self) -> None:
        text = self.words.text().strip()
        if self.way.currentText() == LENGTH and not text[:1].isalpha():
            text = f"go {text} toward 0"
        try:
            found = entry_words.entry(text, unit=self._unit, decimal=decimal_sign())
        except UserError as error:
            self._show_fault(self.words, str(error))
            return
        self._hand_over(found)

    def _enter_fields(self) -> None:
        way = self.way.currentText()
        values: list[float | None] = []
        for label, field in zip(FIELDS[way], self.fields, strict=True):
            text = field.text().strip()
            if not label or not text:
                values.append(None)
                continue
            try:
                values.append(self._value(label, text))
            except UserError as error:
                self._show_fault(field, str(error))
                return
        try:
            found = self._entry(way, values)
        except UserError as error:
            blank = next(
                (f for f, v in zip(self.fields, values, strict=True) if v is None),
                self.fields[0],
            )
            self._show_fault(blank, str(error))
            return
        self._hand_over(found)

    def _value(self, label: str, text: str) -> float:
        if label == "toward":
            return entry_words.angle(text, decimal=decimal_sign())
        return typed_length(text, self._unit, decimal_sign())

    def _entry(self, way: str, values: list[float | None]) -> Entry:
        first, second, third = values
        if way == LENGTH:
            if first is None or first <= 0:
                raise UserError("Enter a distance greater than 0.")
            return entry_words.walked(first, 0.0)
        if way == "go":
            if first is None or second is None:
                raise UserError("Enter a length and a direction.")
            return entry_words.walked(first, second, third)
        if way == "size":
            if first is None or second is None:
                raise UserError("Enter both sides.")
            return entry_words.sized(first, second)
        if values == [None, None, None]:
            raise UserError("Enter a number.")
        return Entry("point", first, second, third, is_relative=way == "by")

    def _hand_over(self, found: Entry) -> None:
        had = next((field for field in self.fields if field.hasFocus()), None)
        self._clear()
        if had is not None:
            self.fields[0].setFocus(Qt.FocusReason.OtherFocusReason)
        if self._tool is not None:
            self._tool.entry(found)
        self.entered.emit(found)

    # -- showing ----------------------------------------------------------------

    def _show_way(self, way: str) -> None:
        for text, label, field in zip(
            FIELDS[way], self.labels, self.fields, strict=True
        ):
            label.setText(text)
            label.setVisible(bool(text))
            field.setVisible(bool(text))
            field.clear()
            field.setPlaceholderText("°" if text == "toward" else self._unit)
            unit = "" if text == "toward" else f" [{self._unit}]"
            if text:
                explain(field, f"{way} {text}", f"{MEANINGS[text]}{unit}")
        self._clear_fault()

    def _offer_length(self) -> None:
        """Ask for a bare length while the tool wants one, and then no more."""
        wanted = self._tool is not None and self._tool.takes_length()
        index = self.way.findText(LENGTH)
        if wanted and index < 0:
            self.way.insertItem(0, LENGTH)
            self.way.setCurrentIndex(0)
            self.words.setPlaceholderText("8.40")
            self.fields[0].setFocus(Qt.FocusReason.OtherFocusReason)
        elif not wanted and index >= 0:
            self.way.removeItem(index)
            self.words.setPlaceholderText(_EXAMPLE)
            self.way.setCurrentIndex(0)

    def _show_choices(self) -> None:
        tool = self._tool
        choices = tool.choices() if isinstance(tool, DrawingTool) else ()
        names = [choice.name for choice in choices]
        if names != list(self._combos):
            for combo in self._combos.values():
                self._choices.removeWidget(combo)
                combo.hide()
                combo.deleteLater()
            self._combos = {name: self._new_combo(name) for name in names}
            for combo in self._combos.values():
                self._choices.addWidget(combo)
        for choice in choices:
            combo = self._combos[choice.name]
            if combo.hasFocus() and combo.currentText() == choice.value:
                continue
            combo.blockSignals(True)
            combo.clear()
            combo.addItems(choice.values)
            combo.setCurrentText(choice.value)
            combo.blockSignals(False)
        self._show_height()

    def _new_combo(self, name: str) -> ElidedChoice:
        combo = ElidedChoice()
        combo.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
        combo.setMinimumWidth(6 * BODY)
        combo.setMaximumWidth(14 * BODY)
        explain(combo, name.capitalize(), "What the tool draws next")
        combo.textActivated.connect(lambda value: self._choose(name, value))
        return combo

    def _choose(self, name: str, value: str) -> None:
        if isinstance(self._tool, DrawingTool):
            self._tool.choose(name, value)

    def _show_height(self) -> None:
        tool = self._tool
        text = tool.heading() if isinstance(tool, DrawingTool) else ""
        if text != self.height_shown.text():
            self.height_shown.setText(text)
            self.height_shown.setVisible(bool(text))

    def _show_fault(self, field: QLineEdit, sentence: str) -> None:
        warning = theme_for(self.palette()).warning
        field.setStyleSheet(f"QLineEdit {{ border: 2px solid {warning}; }}")
        field.setFocus(Qt.FocusReason.OtherFocusReason)
        self.fault.setStyleSheet(f"color: {warning};")
        self.fault.setText(sentence)
        self.fault.setToolTip(sentence)
        self.fault.setAccessibleName(sentence)
        self._slip.come()

    def _clear_fault(self) -> None:
        if not self.fault.text():
            return
        for field in (*self.fields, self.words):
            field.setStyleSheet("")
        self.fault.clear()
        self._slip.go()
        self.fault.setToolTip("")

    def _clear(self) -> None:
        self._clear_fault()
        for field in (*self.fields, self.words):
            field.clear()

    def _paint_toggles(self) -> None:
        for button in (self.hold, self.catch):
            button.setStyleSheet(toggle_style(theme_for(self.palette())))

    def _toggle(
        self, text: str, meaning: str, heard: Callable[[bool], None]
    ) -> QToolButton:
        button = QToolButton()
        button.setText(text)
        button.setCheckable(True)
        button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        explain(button, text, meaning)
        button.toggled.connect(heard)
        return button
