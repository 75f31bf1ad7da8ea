"""Values of a layout that nothing backs yet, and how to state where they come from."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtWidgets import QAbstractItemView, QHBoxLayout, QPushButton, QWidget

from app.document import Document
from app.panels.origin import OriginForm, field_words
from app.panels.panel import Words, column
from app.panels.table import Column, RowsTable
from engine.layout import Layout
from engine.origins import Assumption


@dataclass(frozen=True)
class _Row:
    """One assumption with the name of its item."""

    title: str
    assumption: Assumption


class AssumptionsPage(QWidget):
    """A table of assumptions; one origin can be stated for several at once."""

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self.form: OriginForm | None = None
        self.table = RowsTable(_columns(), name="Assumed values")
        self.table.view.setSelectionBehavior(
            QAbstractItemView.SelectionBehavior.SelectRows
        )
        self.table.view.setSelectionMode(
            QAbstractItemView.SelectionMode.ExtendedSelection
        )
        self.table.chosen.connect(self._on_chosen)
        self.none = Words(
            "Every value comes from a document, a measurement or a person."
        )
        self.state_button = QPushButton("State their origin")
        self.state_button.setToolTip(
            "Say where the selected values come from, as one step"
        )
        self.state_button.clicked.connect(self.open_form)
        row = QHBoxLayout()
        row.addWidget(self.state_button)
        row.addStretch(1)
        box = column(self)
        box.addWidget(self.none)
        box.addWidget(self.table, 1)
        box.addLayout(row)

    def show_assumptions(self, layout: Layout, assumed: tuple[Assumption, ...]) -> None:
        """Show the assumptions of a layout."""
        titles = {item.id: item.title for item in layout.items()}
        titles[layout.settings.id] = "the whole layout"
        self.table.set_rows([_Row(titles.get(a.item, a.item), a) for a in assumed])
        self.none.setVisible(not assumed)
        self.table.setVisible(bool(assumed))
        self.state_button.setVisible(bool(assumed))

    def targets(self) -> list[tuple[str, str]]:
        """Item and field of the selected rows."""
        chosen = self.table.view.selectionModel().selectedIndexes()
        rows = sorted({index.row() for index in chosen})
        present = self._document.committed.by_id()
        found = [self.table.rows[row].assumption for row in rows]
        return [(a.item, a.field) for a in found if a.item in present]

    def open_form(self) -> None:
        """Open the form for the selected values."""
        targets = self.targets()
        if not targets:
            self.table.refuse("Select the values first; Ctrl and Shift add rows.")
            return
        self.table.refuse("")
        self.form = OriginForm(self._document, targets)
        self.form.destroyed.connect(self._on_form_gone)
        self.form.open_under(self.state_button)

    def _on_chosen(self, row: int) -> None:
        self._document.select((self.table.rows[row].assumption.item,))

    def _on_form_gone(self) -> None:
        self.form = None


def _columns() -> tuple[Column, ...]:
    def made(row: _Row) -> str:
        return row.assumption.reason

    return (
        Column("Item", lambda r: r.title, tip="Item", made=made, width=26),
        Column(
            "Value of", lambda r: field_words(r.assumption.field),
            tip="What is assumed", made=made, width=24,
        ),
        Column(
            "Value", lambda r: r.assumption.value, tip="As it stands", width=34,
            made=lambda r: f"{r.assumption.value}\n{r.assumption.reason}".strip(),
        ),
    )  # fmt: skip
