"""Editors of the values of one or several items, one for each kind of value.

An editor shows values and calls `enter` with another one; `enter` raises `UserError`
when the items cannot have it, and the editor turns and says why.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFocusEvent
from PySide6.QtWidgets import (
    QCheckBox,
    QHBoxLayout,
    QPlainTextEdit,
    QPushButton,
    QSizePolicy,
    QWidget,
)

from app.panels import field, table
from app.panels.kinds import (
    Choice,
    Column,
    Kind,
    Lines,
    Rows,
    Several,
    Terms,
    YesNo,
    mixed_text,
)
from app.panels.panel import Words, column, plain_tip
from app.theme import STEP, scaled
from engine.entered_values import part_at, with_part
from engine.errors import UserError
from engine.layout import Layout

Enter = Callable[[Any], None]

#: Rows of a table shown before it scrolls.
_MOST_ROWS = 8


class Editor(QWidget):
    """What all editors answer to."""

    def __init__(self, enter: Enter) -> None:
        super().__init__()
        self._enter = enter
        self._values: Sequence[Any] = ()
        self._terms = Terms(Layout())

    def show_values(self, values: Sequence[Any], kind: Kind, terms: Terms) -> None:
        """Show what the items have."""
        self._values, self._kind, self._terms = values, kind, terms
        self._show()

    def refuse(self, sentence: str) -> None:
        """Turn, and say why."""
        raise NotImplementedError

    def _show(self) -> None:
        raise NotImplementedError

    @property
    def _is_mixed(self) -> bool:
        return len(set(self._values)) > 1

    @property
    def _mixed(self) -> str:
        return mixed_text(self._values, self._kind, self._terms)


class LineEditor(Editor):
    """A line of text that is read as a value."""

    def __init__(self, enter: Enter, name: str, tip: str) -> None:
        super().__init__(enter)
        self.field = field.ValueField(
            self._read, self._write, enter, name=name, tip=tip
        )
        column(self).addWidget(self.field)
        self.setFocusProxy(self.field)

    def refuse(self, sentence: str) -> None:
        self.field.refuse(sentence)

    def _show(self) -> None:
        if self._is_mixed:
            self.field.set_mixed(self._mixed)
        else:
            self.field.line.setPlaceholderText("")
            self.field.set_value(self._values[0])

    def _read(self, text: str) -> Any:
        return self._kind.read(text, self._terms)

    def _write(self, value: Any) -> str:
        return self._kind.text(value, self._terms)


class _Reasoned(Editor):
    """An editor with its reason beneath."""

    def __init__(self, enter: Enter) -> None:
        super().__init__(enter)
        self.reason = Words(style="warning")
        self.reason.hide()
        self._box = column(self)
        self._box.setSpacing(STEP)

    def refuse(self, sentence: str) -> None:
        self.reason.setText(sentence)
        self.reason.show()

    def show_values(self, values: Sequence[Any], kind: Kind, terms: Terms) -> None:
        self.reason.hide()
        super().show_values(values, kind, terms)

    def _give(self, value: Any) -> None:
        try:
            self._enter(value)
        except UserError as error:
            self._show()
            self.refuse(str(error))


class ChoiceEditor(_Reasoned):
    """One of several values, in words."""

    def __init__(self, enter: Enter, name: str, tip: str) -> None:
        super().__init__(enter)
        self._options: list[tuple[Any, str]] = []
        self.box = field.Choice((), self._give, name=name, tip=tip)
        self._box.addWidget(self.box)
        self._box.addWidget(self.reason)
        self.setFocusProxy(self.box)

    def _show(self) -> None:
        assert isinstance(self._kind, Choice)
        options = list(self._kind.options(self._terms.layout))
        held = None if self._is_mixed else self._values[0]
        if not self._is_mixed and held not in [value for value, _ in options]:
            options.append((held, f"{held} (not there)"))
        if options != self._options:
            self._options = options
            self.box.set_options(options)
        self.box.setPlaceholderText(self._mixed if self._is_mixed else "")
        if self._is_mixed:
            self.box.setCurrentIndex(-1)
        else:
            self.box.set_value(held)


class YesNoEditor(_Reasoned):
    """A statement with a box to tick."""

    def __init__(self, enter: Enter, name: str, tip: str, statement: str) -> None:
        super().__init__(enter)
        self.box = QCheckBox(statement)
        self.box.setAccessibleName(name)
        self.box.setToolTip(tip)
        self.box.clicked.connect(lambda _on: self._give(self.box.isChecked()))
        self._box.addWidget(self.box)
        self._box.addWidget(self.reason)
        self.setFocusProxy(self.box)

    def _show(self) -> None:
        _tick(self.box, set(map(bool, self._values)))


class LinesEditor(_Reasoned):
    """Text of several lines, entered when it is left."""

    def __init__(self, enter: Enter, name: str, tip: str) -> None:
        super().__init__(enter)
        self.text = _Lines()
        self.text.setTabChangesFocus(True)
        self.text.setFixedHeight(scaled(16 * STEP))
        self.text.setAccessibleName(name)
        self.text.setToolTip(tip)
        self.text.left.connect(self._on_left)
        self._box.addWidget(self.text)
        self._box.addWidget(self.reason)
        self.setFocusProxy(self.text)

    def _show(self) -> None:
        if self.text.hasFocus() and self.text.document().isModified():
            return
        shown = "" if self._is_mixed else self._kind.text(self._values[0], self._terms)
        self.text.setPlaceholderText(self._mixed if self._is_mixed else "")
        if shown != self.text.toPlainText():
            self.text.setPlainText(shown)
        self.text.document().setModified(False)

    def _on_left(self) -> None:
        if self.text.document().isModified():
            self.text.document().setModified(False)
            self._give(self._kind.read(self.text.toPlainText(), self._terms))


class SeveralEditor(_Reasoned):
    """Any number of the options, each with a box to tick."""

    def __init__(self, enter: Enter, name: str, tip: str) -> None:
        super().__init__(enter)
        self.setToolTip(tip)
        self._name = name
        self._options: list[tuple[Any, str]] = []
        self.boxes: list[QCheckBox] = []
        self._nothing = Words()
        self._box.addWidget(self._nothing)
        self._box.addWidget(self.reason)

    def _show(self) -> None:
        assert isinstance(self._kind, Several)
        options = list(self._kind.options(self._terms.layout))
        if options != self._options:
            self._rebuild(options)
        self._nothing.setText(self._kind.nothing)
        self._nothing.setVisible(not options)
        for (value, _), box in zip(self._options, self.boxes, strict=True):
            _tick(box, {value in (held or ()) for held in self._values})

    def _rebuild(self, options: list[tuple[Any, str]]) -> None:
        for box in self.boxes:
            box.hide()
            box.deleteLater()
        self._options, self.boxes = options, []
        for place, (_, words) in enumerate(options):
            box = QCheckBox(words.replace("&", "&&"))
            box.setToolTip(plain_tip(f"{words}: {self.toolTip()}"))
            # A long name is cut short rather than widening the panel.
            box.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
            box.setAccessibleName(f"{self._name}: {words}")
            box.clicked.connect(self._on_clicked)
            self._box.insertWidget(place, box)
            self.boxes.append(box)

    def _on_clicked(self) -> None:
        checked = Qt.CheckState.Checked
        self._give(
            tuple(
                value
                for (value, _), box in zip(self._options, self.boxes, strict=True)
                if box.checkState() == checked
            )
        )


class TableEditor(_Reasoned):
    """Rows and columns; rows come behind the chosen one and go by button."""

    def __init__(self, enter: Enter, name: str, tip: str, kind: Rows) -> None:
        super().__init__(enter)
        self._kind: Rows = kind
        self.setToolTip(tip)
        self.table = table.RowsTable(
            [self._column(c, tip) for c in kind.columns], name=name
        )
        self.table.view.verticalHeader().show()
        self.table.view.horizontalHeader().setStretchLastSection(True)
        self.table.entered.connect(lambda rows, _sentence: self._give(rows))
        self.table.chosen.connect(lambda _row: self._enable())
        self._words = Words()
        self.add = _button(f"Add {kind.row_name}", f"Behind the chosen {kind.row_name}")
        self.add.clicked.connect(self._on_add)
        self.remove = _button(f"Remove {kind.row_name}", f"The chosen {kind.row_name}")
        self.remove.clicked.connect(self._on_remove)
        buttons = QHBoxLayout()
        buttons.setSpacing(STEP)
        buttons.addWidget(self.add)
        buttons.addWidget(self.remove)
        buttons.addStretch(1)
        for widget in (self._words, self.table, self.reason):
            self._box.addWidget(widget)
        self._box.addLayout(buttons)

    def _show(self) -> None:
        assert isinstance(self._kind, Rows)
        self._words.setVisible(self._is_mixed)
        for widget in (self.table, self.add, self.remove):
            widget.setVisible(not self._is_mixed)
        if self._is_mixed:
            self._words.setText(f"{self._mixed}: select one item to edit its table.")
            return
        tip = self.toolTip()
        self.table.model.columns = tuple(
            self._column(c, tip) for c in self._kind.columns
        )
        self.table.set_rows(self._values[0] or ())
        self.table.fit_height(1, _MOST_ROWS)
        self._enable()

    def _column(self, shown: Column, tip: str) -> table.Column:
        def text(row: Any) -> str:
            return shown.kind.text(part_at(row, shown.path), self._terms)

        def enter(row: Any, typed: str, _decimal: str) -> Any:
            value = shown.kind.read(typed, self._terms)
            if shown.change is not None:
                return shown.change(row, value)
            return with_part(row, shown.path, value)

        choices: tuple[str, ...] = ()
        if isinstance(shown.kind, Choice):
            choices = tuple(w for _, w in shown.kind.options(self._terms.layout))
        return table.Column(
            title=shown.heading,
            text=text,
            enter=enter,
            choices=choices,
            tip=f"{shown.tip or tip}",
            width=shown.width,
        )

    def _enable(self) -> None:
        assert isinstance(self._kind, Rows)
        self.remove.setEnabled(len(self.table.rows) > self._kind.fewest)

    def _chosen(self) -> int:
        last = len(self.table.rows) - 1
        return last if self.table.row < 0 else min(self.table.row, last)

    def _on_add(self) -> None:
        assert isinstance(self._kind, Rows)
        rows, at = self.table.rows, self._chosen()
        try:
            row = self._kind.further(self._terms.layout, rows, at)
        except UserError as error:
            self.refuse(str(error))
            return
        self._give((*rows[: at + 1], row, *rows[at + 1 :]))
        self.table.set_current(at + 1, 0)

    def _on_remove(self) -> None:
        rows, at = self.table.rows, self._chosen()
        self._give((*rows[:at], *rows[at + 1 :]))


class _Lines(QPlainTextEdit):
    left = Signal()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self.left.emit()


def editor_for(kind: Kind, enter: Enter, name: str, tip: str) -> Editor:
    """The editor of a kind of value."""
    match kind:
        case Choice():
            return ChoiceEditor(enter, name, tip)
        case YesNo():
            return YesNoEditor(enter, name, tip, kind.statement)
        case Several():
            return SeveralEditor(enter, name, tip)
        case Rows():
            return TableEditor(enter, name, tip, kind)
        case Lines():
            return LinesEditor(enter, name, tip)
    return LineEditor(enter, name, tip)


def is_wide(kind: Kind) -> bool:
    """Whether an editor needs the whole width of a form."""
    return isinstance(kind, Rows | Lines)


def _button(text: str, tip: str) -> QPushButton:
    button = QPushButton(text)
    button.setToolTip(tip)
    button.setAutoDefault(False)
    return button


def _tick(box: QCheckBox, states: set[bool]) -> None:
    box.setTristate(len(states) > 1)
    if len(states) > 1:
        box.setCheckState(Qt.CheckState.PartiallyChecked)
    else:
        box.setChecked(states == {True})
