"""Page New layout: empty or a starter, its few values, and what that looks like."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

from msgspec.structs import replace
from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent, QShowEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QRadioButton,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from app import preferences
from app.first_strip import FirstStrip
from app.layout_preview import LayoutPreview
from app.page import Page
from app.panels.field import Choice, Quantity, ValueField
from app.panels.panel import Words, decimal_sign, scrolled
from app.starter_choices import BEGINNINGS, Asked, Beginning, Offered
from app.theme import STEP, scaled
from engine.errors import UserError
from engine.layout import Layout
from engine.typed_lengths import length_text
from engine.units import LENGTH_UNITS

#: Width of the choices beside the picture. [logical pixels]
_CHOICES = scaled(340)

_AMPERES = {"A": 1.0, "kA": 1000.0}
_LENGTHS = {**LENGTH_UNITS, "cm": 0.01}


class NewLayoutPage(Page):
    """Offers what to begin with.

    Signals
    -------
    chosen(layout)
    """

    chosen = Signal(object)

    def __init__(self, choices: preferences.Preferences | None = None) -> None:
        super().__init__("New layout")
        self._given = choices
        self._choices = choices or preferences.Preferences()
        self._values: dict[str, dict[str, Any]] = {}
        self._begin_anew()
        self._layout: Layout | None = None
        self.fields: dict[str, ValueField | Choice] = {}
        self.preview = LayoutPreview()
        self.start = QPushButton("Start with this")
        self.start.setToolTip("Opens it as a new layout (Enter)")
        self.start.clicked.connect(self._on_start)
        self.buttons: list[QRadioButton] = []
        self._abouts: list[Words] = []
        self._asks = QGridLayout()
        self._asks.setHorizontalSpacing(2 * STEP)
        self._asks.setVerticalSpacing(STEP)
        self._asks.setColumnStretch(1, 1)
        self._uses = QVBoxLayout()
        self.uses: FirstStrip | None = None
        left = scrolled(self._beginnings())
        left.setMaximumWidth(_CHOICES)
        left.setMinimumWidth(_CHOICES // 2)
        left.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        row = QHBoxLayout()
        row.setSpacing(4 * STEP)
        row.addWidget(left, 3)
        row.addWidget(self.preview, 2)
        self.column.addLayout(row, 1)
        self.column.addLayout(self._uses)
        self.buttons[1].setChecked(True)

    def showEvent(self, event: QShowEvent) -> None:
        if self._given is None:
            before, self._choices = self._choices, preferences.load()
            if self._choices.length_unit != before.length_unit:
                self._begin_anew()
            self._offer_uses()
        self._show_asks()
        super().showEvent(event)

    def _offer_uses(self) -> None:
        """Units and paper of new layouts, unless the first start still asks."""
        if self.uses is not None:
            self._uses.removeWidget(self.uses)
            self.uses.deleteLater()
            self.uses = None
        if self._choices.chosen:
            self.uses = FirstStrip(self._choices)
            self.uses.keep.hide()
            self.uses.changed.connect(self._use)
            self._uses.addWidget(self.uses)

    def _use(self, choices: preferences.Preferences) -> None:
        is_other_unit = choices.length_unit != self._choices.length_unit
        # What else was kept meanwhile stays.
        self._choices = replace(
            preferences.load(),
            frequency=choices.frequency,
            flux_density_unit=choices.flux_density_unit,
            length_unit=choices.length_unit,
            paper=choices.paper,
        )
        preferences.save(self._choices)
        if is_other_unit:
            self._begin_anew()
        self._show_asks()

    def _begin_anew(self) -> None:
        unit = self._choices.length_unit
        self._values = {each.name: each.defaults(unit) for each in BEGINNINGS}

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.start.click()
        else:
            super().keyPressEvent(event)

    @property
    def beginning(self) -> Beginning:
        """The one chosen now."""
        return next(
            each
            for each, button in zip(BEGINNINGS, self.buttons, strict=True)
            if button.isChecked()
        )

    def _beginnings(self) -> QWidget:
        whole = QWidget()
        # A low page scrolls; nothing in it is squeezed.
        whole.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Minimum)
        box = QVBoxLayout(whole)
        box.setContentsMargins(0, 0, 2 * STEP, 0)
        box.setSpacing(STEP)
        group = QButtonGroup(whole)
        for each in BEGINNINGS:
            button = QRadioButton(each.name)
            button.toggled.connect(partial(self._on_toggled, button))
            group.addButton(button)
            self.buttons.append(button)
            about = Words()
            self._abouts.append(about)
            about.setContentsMargins(6 * STEP, 0, 0, 2 * STEP)
            box.addWidget(button)
            box.addWidget(about)
        box.addSpacing(2 * STEP)
        box.addLayout(self._asks)
        box.addSpacing(2 * STEP)
        box.addWidget(self.start)
        note = Words("Every value can be changed afterwards, and counts as assumed.")
        box.addWidget(note)
        box.addStretch(1)
        return whole

    def _on_toggled(self, button: QRadioButton, on: bool) -> None:
        if on:
            # Arrow keys go on from the one that is chosen.
            self.setFocusProxy(button)
            self._show_asks()

    def _show_asks(self) -> None:
        while (held := self._asks.takeAt(0)) is not None:
            widget = held.widget()
            if widget is not None:
                widget.hide()
                widget.deleteLater()
        self.fields = {}
        for each, button, words in zip(
            BEGINNINGS, self.buttons, self._abouts, strict=True
        ):
            about = each.about_in(self._choices.length_unit)
            button.setToolTip(about)
            button.setAccessibleDescription(about)
            words.setText(about)
        for at, ask in enumerate(self.beginning.asks):
            field = self._field(ask)
            field.setMinimumSize(40 * STEP, field.sizeHint().height())
            label = QLabel(ask.label)
            label.setBuddy(field)
            label.setToolTip(ask.tip)
            label.setMinimumHeight(field.sizeHint().height())
            self._asks.addWidget(label, at, 0, Qt.AlignmentFlag.AlignTop)
            self._asks.addWidget(field, at, 1)
            self.fields[ask.key] = field
        self._make()

    def _field(self, ask: Asked | Offered) -> ValueField | Choice:
        value = self._values[self.beginning.name][ask.key]
        enter: Callable[[Any], None] = partial(self._enter, ask.key)
        if isinstance(ask, Offered):
            options = [(option, option) for option in ask.options]
            choice = Choice(options, enter, name=ask.label, tip=ask.tip)
            choice.set_value(value)
            return choice
        unit = self._choices.length_unit if ask.is_length else "A"
        quantity = Quantity(
            f"The {ask.label.lower()}",
            unit,
            _LENGTHS if ask.is_length else _AMPERES,
            low=ask.low,
            high=ask.high,
        )
        write = quantity.write
        if ask.is_length:
            write = partial(length_text, unit=unit, decimal=decimal_sign())
        tip = f"{ask.tip}, in {unit}"
        field = ValueField(quantity.read, write, enter, name=ask.label, tip=tip)
        field.set_value(value, keep_typing=False)
        return field

    def _enter(self, key: str, value: Any) -> None:
        values = self._values[self.beginning.name]
        before = values[key]
        values[key] = value
        try:
            self._make()
        except UserError:
            values[key] = before
            raise

    def _make(self) -> None:
        """Make the layout and show it."""
        made = self.beginning.layout(self._choices, self._values[self.beginning.name])
        self.preview.show_layout(made)
        self._layout = made

    def _on_start(self) -> None:
        # A value that was typed and not yet entered counts.
        self.start.setFocus()
        refused = [
            field
            for field in self.fields.values()
            if isinstance(field, ValueField) and field.is_refused
        ]
        if refused:
            refused[0].line.setFocus()
        elif self._layout is not None:
            self.chosen.emit(self._layout)
