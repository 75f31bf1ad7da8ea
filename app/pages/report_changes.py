"""What changed since a revision: a sentence, a table to copy, and the way back."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QHBoxLayout, QVBoxLayout, QWidget

from app.pages.plain_table import PlainTable
from app.panels.panel import Words, button
from app.report_revisions import HEADS, FoundChanges
from app.theme import STEP


class ReportChangesView(QWidget):
    """Stands in the place of the pages.

    Signals
    -------
    left()
    """

    left = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.found: FoundChanges | None = None
        self.head, self.again = Words("", "plain"), Words("", "plain")
        font = self.head.font()
        font.setBold(True)
        self.head.setFont(font)
        self.table = PlainTable("Changes since a revision")
        row = QHBoxLayout()
        row.setSpacing(2 * STEP)
        row.addWidget(
            button("Back to the pages", "Back to the pages (Esc)", self.left.emit)
        )
        row.addWidget(
            button(
                "Copy the table",
                "The chosen rows, or all of them, as cells for a spreadsheet",
                self.table.copy,
            )
        )
        row.addStretch(1)
        box = QVBoxLayout(self)
        box.setContentsMargins(2 * STEP, 0, 0, 0)
        box.setSpacing(2 * STEP)
        box.addLayout(row)
        for words in (self.head, self.again):
            box.addWidget(words)
        box.addWidget(self.table, 1)
        self.setFocusProxy(self.table)

    def show_changes(self, found: FoundChanges) -> None:
        """Show what was found."""
        self.found = found
        self.head.setText(found.sentence())
        self.again.setText(found.again_sentence())
        self.again.setVisible(bool(self.again.text()))
        self.table.show_rows((), ())
        self.table.show_rows(HEADS, found.rows(), len(HEADS))

    def set_stale(self) -> None:
        """The layout was edited after this was found."""
        if self.found is not None:
            self.head.setText(f"Out of date. {self.found.sentence()}")

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
        else:
            super().keyPressEvent(event)
