"""The band above the drawing that says which variant is shown and edited."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QWidget

from app.document import Document
from app.messages import Messages
from app.panels.panel import Words, button, plain_tip
from app.theme import STEP, theme_for
from app.variant_acts import count_text, move_to_base
from engine.variants import ids_of


class VariantBand(QWidget):
    """Shows only while a variant is chosen.

    Signals
    -------
    opened()
        The list of variants is wanted.
    """

    opened = Signal()

    def __init__(self, document: Document, messages: Messages) -> None:
        super().__init__()
        self._document, self._messages = document, messages
        self.text = Words("", "plain")
        self.text.setWordWrap(False)
        self.text.setSizePolicy(
            QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred
        )
        self.this: QPushButton = button(
            "Move this change to base",
            "What the variant does to the selected items is done in the base, for all "
            "variants",
            self._move_selected,
        )
        self.all: QPushButton = button(
            "Move all", "Everything the variant changes is done in the base",
            self._move_all,
        )  # fmt: skip
        self.list: QPushButton = button(
            "Variants …", "List, table and maps of all variants", self.opened.emit
        )
        self.back: QPushButton = button(
            "Back to base", "Show and edit the base again; the variant is kept",
            lambda: document.choose(None),
        )  # fmt: skip
        row = QHBoxLayout(self)
        row.setContentsMargins(4 * STEP, STEP, 2 * STEP, STEP)
        row.setSpacing(2 * STEP)
        row.addWidget(self.text, 1)
        for widget in (self.this, self.all, self.list, self.back):
            row.addWidget(widget)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Maximum)
        document.whole_changed.connect(self._fill)
        document.selection_changed.connect(self._fill)
        self._fill()

    def _fill(self, *_: object) -> None:
        variant = self._document.variant
        self.setVisible(variant is not None)
        if variant is None:
            return
        text = f"Variant “{variant.title}” · {count_text(variant)} · edits go into it"
        self.text.setText(text)
        self.text.setToolTip(plain_tip(text))
        self.setAccessibleName(text)
        own = ids_of(variant)
        self.this.setEnabled(any(id in self._document.selection for id in own))
        self.all.setEnabled(bool(own))

    def _move_selected(self) -> None:
        self._move(self._document.selection)

    def _move_all(self) -> None:
        self._move(None)

    def _move(self, ids: frozenset[str] | None) -> None:
        variant = self._document.variant
        if variant is not None:
            with self._messages.shown():
                move_to_base(self._document, variant.id, ids)

    def resizeEvent(self, event: QResizeEvent) -> None:
        # What is also on the page of variants gives way to the variant's name.
        for widget, width in ((self.list, 190 * STEP), (self.all, 150 * STEP)):
            widget.setVisible(self.width() >= width)
        super().resizeEvent(event)

    def paintEvent(self, event: QPaintEvent) -> None:
        # A stripe of the accent at the left: what is shown is not the base.
        painter = QPainter(self)
        theme = theme_for(self.palette())
        painter.fillRect(self.rect(), Qt.GlobalColor.transparent)
        painter.fillRect(0, 0, STEP, self.height(), theme.accent)
        painter.end()
