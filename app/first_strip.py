"""The strip of the first start: mains frequency, units and paper.

Filled in by the place, to be kept or changed. No dialog: the sample is open behind it,
and everything can be changed later.
"""

from __future__ import annotations

from typing import Any

from msgspec.structs import replace
from PySide6.QtCore import QEvent, Signal
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QPushButton,
    QSizePolicy,
    QToolButton,
    QWidget,
)

from app.panels.panel import Words
from app.preferences import Preferences
from app.theme import STEP, theme_for
from app.wrapping import WrappingRow

#: Field of the preferences, what it is called, and what there is to choose from.
_QUESTIONS: tuple[tuple[str, str, tuple[tuple[Any, str], ...], str], ...] = (
    (
        "frequency", "Mains frequency", ((50, "50 Hz"), (60, "60 Hz")),
        "Base frequency of new circuits",
    ),
    (
        "flux_density_unit", "Unit of the field", (("µT", "µT"), ("mG", "mG")),
        "Unit of magnetic flux density; 1 µT is 10 mG",
    ),
    (
        "length_unit", "Unit of lengths", (("m", "m"), ("ft", "ft")),
        "Unit of lengths typed without one; any unit can be typed",
    ),
    (
        "paper", "Paper", (("A4", "A4"), ("Letter", "Letter")),
        "Paper of reports and maps",
    ),
)  # fmt: skip


class FirstStrip(QWidget):
    """Four choices in one row, each already made by the place.

    Signals
    -------
    chosen(preferences)
    changed(preferences)
        Another one is chosen, not yet kept.
    """

    chosen = Signal(object)
    changed = Signal(object)

    def __init__(self, choices: Preferences, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._choices = choices
        self.buttons: dict[tuple[str, Any], QToolButton] = {}
        self.setAccessibleName("First choices")
        self.setAutoFillBackground(True)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        row = WrappingRow(self, 4 * STEP, 3 * STEP)
        row.addWidget(Words("New layouts use", "plain"))
        for field, name, options, tip in _QUESTIONS:
            row.addWidget(self._question(field, name, options, tip))
        self.keep = QPushButton("Keep these choices")
        self.keep.setToolTip(
            "They can be changed on the page New; of a layout, in Item"
        )
        self.keep.clicked.connect(lambda: self.chosen.emit(self.choices))
        row.addWidget(self.keep)
        self._paint()

    @property
    def choices(self) -> Preferences:
        """The preferences as they are chosen now."""
        return self._choices

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange:
            self._paint()

    def _question(
        self, field: str, name: str, options: tuple[tuple[Any, str], ...], tip: str
    ) -> QWidget:
        present = getattr(self._choices, field)
        if present not in [value for value, _ in options]:
            options = (*options, (present, str(present)))
        box = QWidget()
        row = QHBoxLayout(box)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(STEP)
        group = QButtonGroup(box)
        group.setExclusive(True)
        for value, text in options:
            button = QToolButton()
            button.setText(text)
            button.setCheckable(True)
            button.setChecked(value == present)
            button.setToolTip(f"{name}: {text}. {tip}.")
            button.setAccessibleName(f"{name} {text}")
            button.toggled.connect(
                lambda on, f=field, v=value: self._choose(f, v) if on else None
            )
            group.addButton(button)
            row.addWidget(button)
            self.buttons[field, value] = button
        return box

    def _choose(self, field: str, value: Any) -> None:
        self._choices = replace(self._choices, **{field: value})
        self.changed.emit(self._choices)

    def _paint(self) -> None:
        theme = theme_for(self.palette())
        style = (
            f"QToolButton {{ border: 1px solid {theme.line}; border-radius: {STEP}px;"
            f" padding: {STEP}px {2 * STEP}px; color: {theme.text}; }}"
            f"QToolButton:checked {{ background: {theme.accent};"
            f" border-color: {theme.accent}; color: {theme.on_accent}; }}"
            f"QToolButton:focus {{ border: 2px solid {theme.accent}; }}"
            f"QToolButton:checked:focus {{ border: 2px solid {theme.text}; }}"
        )
        for button in self.buttons.values():
            if button.styleSheet() != style:
                button.setStyleSheet(style)
