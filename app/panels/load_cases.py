"""Load cases: which currents flow together, and which of them count."""

from __future__ import annotations

from typing import Any

from msgspec.structs import replace
from PySide6.QtCore import QEvent, Qt
from PySide6.QtWidgets import (
    QFormLayout,
    QHBoxLayout,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QTabWidget,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.panels import case_rows as rows_of
from app.panels import circuit_cells as cells
from app.panels.case_columns import case_columns, row_columns
from app.panels.case_rows import CaseRow
from app.panels.field import Choice, ValueField
from app.panels.measured import MeasuredForm
from app.panels.origin import OriginMark, assumed_fields
from app.panels.panel import Panel, Words, button, column, scrolled
from app.panels.spectrum import SpectrumEditor
from app.panels.table import RowsTable
from app.theme import STEP
from app.view_state import ViewState
from app.wrapping import wrapped
from engine.circuits import LoadCase, SpectrumLine
from engine.edits import added, checked, removed, replaced, unused_id
from engine.errors import UserError
from engine.origins import restated

COUNTS: tuple[tuple[str, str], ...] = (
    ("counted", "counted in the margins"),
    ("information", "for information"),
)
OTHERS: tuple[tuple[str, str], ...] = (
    ("as entered", "flow as entered"),
    ("off", "are switched off"),
)


class LoadCasesPanel(Panel):
    """The load cases of the layout, one of them in full below the list."""

    shows = ("load_cases", "circuits", "enclosures", "documents")

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__(document)
        self._view_state = view_state
        self._results: dict[str, cells.Live] = {}
        self.cases = RowsTable(
            case_columns(), name="Load cases", new_row=self._fresh_case
        )
        self.cases.entered.connect(self._on_cases)
        self.cases.chosen.connect(lambda _row: self._show_one())
        self.empty = Words(
            "No load case yet: all circuits flow together as entered, and that counts. "
            "Add one to say which currents flow together."
        )
        self.title = Words(style="title")
        self.circuits = RowsTable(row_columns(self._live), name="Circuits in the case")
        self.circuits.entered.connect(self._on_rows)
        self.circuits.chosen.connect(lambda _row: self._show_circuit())
        self.chosen_circuit = Words(style="plain")
        self.measured = MeasuredForm(self._on_row)
        self.spectrum = SpectrumEditor(self._on_spectrum)
        self.as_circuit = QPushButton("As the circuit says")
        self.as_circuit.setToolTip("Take back the spectrum of this case")
        self.as_circuit.clicked.connect(self._on_as_circuit)
        self.enclosures = QListWidget()
        self.enclosures.setAccessibleName("Enclosures open in this case")
        self.enclosures.setToolTip("Checked: open for work in this case, doors off")
        self.enclosures.itemChanged.connect(self._on_enclosure)
        self.no_enclosures = Words("There is no enclosure in the layout.")
        self.tabs = self._pages()
        content = QWidget()
        box = column(content, 3 * STEP)
        box.addWidget(self._buttons())
        box.addWidget(self.empty)
        box.addWidget(self.cases)
        box.addWidget(self.title)
        self._one = QWidget()
        one = column(self._one)
        one.addLayout(self._fields())
        one.addWidget(self.tabs)
        box.addWidget(self._one)
        box.addStretch(1)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.addWidget(scrolled(content))

    @property
    def case(self) -> LoadCase | None:
        """The load case shown below the list."""
        row, cases = self.cases.row, self._document.layout.load_cases
        return cases[row] if 0 <= row < len(cases) else None

    def refresh(self) -> None:
        layout = self._document.layout
        self._results = {}
        self.cases.set_rows(layout.load_cases)
        self.cases.fit_height(1, 5)
        self.empty.setVisible(not layout.load_cases)
        self.cases.setVisible(bool(layout.load_cases))
        if layout.load_cases and self.cases.row < 0:
            ids = [case.id for case in layout.load_cases]
            shown = self._view_state.look.case
            self.cases.set_current(ids.index(shown) if shown in ids else 0, 0)
        self._show_one()

    def follow_selection(self, ids: frozenset[str]) -> None:
        for row, case in enumerate(self._document.layout.load_cases):
            if case.id in ids and self.cases.row != row:
                self.cases.set_current(row)
                self._show_one()
                return

    def add(self) -> None:
        """Add a load case in which all circuits flow as entered."""
        new = self._fresh_case(())
        self._add(new, f"Add load case {new.title}")

    def duplicate(self) -> None:
        """Add the shown load case once more."""
        case = self.case
        if case is not None:
            layout = self._document.committed
            new = replace(
                case,
                id=unused_id(layout, case.id),
                name=f"{case.title} (copy)"[:400],
                origins=(),
            )
            self._add(new, f"Duplicate load case {case.title}")

    def remove(self) -> None:
        """Remove the shown load case."""
        case = self.case
        if case is not None:
            layout = removed(self._document.committed, case.id)
            self._document.edit(f"Remove load case {case.title}", layout)

    def show_in_drawing(self) -> None:
        """Look at the field of the shown load case."""
        if self.case is not None:
            self._view_state.set(case=self.case.id)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "circuits"):
            self.cases.colour()
            self.circuits.colour()
        super().changeEvent(event)

    def _buttons(self) -> QWidget:
        buttons = (
            ("Add", "Add a load case", self.add),
            ("Duplicate", "Add the chosen load case once more", self.duplicate),
            ("Remove", "Remove the chosen load case", self.remove),
            ("Show", "Show the field of the chosen load case", self.show_in_drawing),
        )
        return wrapped(*(button(*each) for each in buttons))

    def _fields(self) -> QFormLayout:
        form = QFormLayout()
        form.setSpacing(STEP)
        form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow)
        self.name = ValueField.words(
            lambda text: self._set("name", name=text), name="Name of the load case",
            tip="Name of the load case",
        )  # fmt: skip
        self.basis = ValueField.words(
            lambda text: self._set("basis", basis=text), name="Basis",
            tip="What the case stands for: rated, highest operation, measured, …",
            hint="not stated",
        )  # fmt: skip
        self.counts = Choice(
            COUNTS, lambda v: self._set("counting", counted=v == "counted"),
            name="Counting",
            tip="Margins show the worst counted case; others are for information",
        )  # fmt: skip
        self.others = Choice(
            OTHERS, lambda v: self._set("other circuits", others=v),
            name="Other circuits",
            tip="Circuits without a factor and without own currents",
        )  # fmt: skip
        self.marks = {name: OriginMark(self._document) for name in ("factors", "own")}
        form.addRow("Name", self.name)
        form.addRow("Basis", self.basis)
        form.addRow("The case is", self.counts)
        form.addRow("Other circuits", self.others)
        marks = QHBoxLayout()
        for name, words in (("factors", "Factors"), ("own", "Own currents")):
            marks.addWidget(Words(words))
            marks.addWidget(self.marks[name])
        marks.addStretch(1)
        form.addRow("Origin of", marks)
        return form

    def _pages(self) -> QTabWidget:
        tabs = QTabWidget()
        tabs.setAccessibleName("The load case")
        tabs.setDocumentMode(True)
        first = QWidget()
        box = column(first)
        box.addWidget(self.circuits)
        box.addWidget(
            Words(
                "Factor in brackets: not stated, what holds then. An own current takes "
                "the place of the circuit's; empty it to go back."
            )
        )
        box.addStretch(1)
        second = QWidget()
        box = column(second)
        box.addWidget(self.measured)
        third = QWidget()
        box = column(third)
        self.spectrum_words = Words(style="plain")
        box.addWidget(self.spectrum_words)
        box.addWidget(self.spectrum)
        box.addWidget(self.as_circuit)
        box.addStretch(1)
        fourth = QWidget()
        box = column(fourth)
        box.addWidget(self.no_enclosures)
        box.addWidget(self.enclosures)
        box.addStretch(1)
        for page, title, tip in (
            (first, "Circuits", "Factor and own current of every circuit"),
            (second, "Measured", "As measured: the chosen circuit as clamped"),
            (third, "Spectrum", "The chosen circuit's own spectrum in this case"),
            (fourth, "Open", "Enclosures that are open for work in this case"),
        ):
            tabs.addTab(page, title)
            tabs.setTabToolTip(tabs.count() - 1, tip)
        return tabs

    def _live(self, row: CaseRow) -> cells.Live:
        found = self._results.get(row.circuit.id)
        if found is None:
            case = self.case
            assert case is not None
            found = self._results[row.circuit.id] = cells.live(row.circuit, case)
        return found

    def _row(self) -> CaseRow | None:
        rows: tuple[CaseRow, ...] = self.circuits.rows
        at = max(self.circuits.row, 0)
        return rows[at] if at < len(rows) else None

    def _show_one(self) -> None:
        case = self.case
        self._results = {}
        self._one.setVisible(case is not None)
        self.title.setVisible(case is not None)
        if case is None:
            self.circuits.set_rows(())
            return
        self.title.setText(case.title)
        self.name.set_value(case.name)
        self.basis.set_value(case.basis)
        self.counts.set_value("counted" if case.counted else "information")
        self.others.set_value(case.others)
        assumed = assumed_fields(case)
        for name, mark in self.marks.items():
            mark.show_value(case, name, name in assumed)
        self.circuits.set_rows(rows_of.case_rows(self._document.layout, case))
        self.circuits.fit_height(2, 10)
        self._show_enclosures(case)
        self._show_circuit()

    def _show_circuit(self) -> None:
        row, case = self._row(), self.case
        if row is None or case is None:
            return
        self.measured.show_row(row, case)
        self.spectrum.show_circuit(row.stated, None)
        has_own = row.own is not None and row.own.spectrum is not None
        self.as_circuit.setVisible(has_own)
        which = "its own in this case" if has_own else "as the circuit says"
        self.spectrum_words.setText(f"Spectrum of {row.circuit.title}: {which}")

    def _show_enclosures(self, case: LoadCase) -> None:
        self.enclosures.blockSignals(True)
        self.enclosures.clear()
        for enclosure in self._document.layout.enclosures:
            item = QListWidgetItem(enclosure.title)
            item.setData(Qt.ItemDataRole.UserRole, enclosure.id)
            is_open = enclosure.id in case.open_enclosures
            item.setCheckState(
                Qt.CheckState.Checked if is_open else Qt.CheckState.Unchecked
            )
            if enclosure.state == "open for work":
                item.setText(f"{enclosure.title} (open in every case)")
            self.enclosures.addItem(item)
        self.enclosures.blockSignals(False)
        has = bool(self._document.layout.enclosures)
        self.enclosures.setVisible(has)
        self.no_enclosures.setVisible(not has)

    def _fresh_case(self, beside: tuple[Any, ...]) -> LoadCase:
        layout = self._document.committed
        taken = {item.id for item in layout.items()} | {one.id for one in beside}
        number = len(layout.load_cases) + 1
        while f"case-{number}" in taken:
            number += 1
        return LoadCase(id=f"case-{number}", name=f"Load case {number}")

    def _add(self, case: LoadCase, text: str) -> None:
        self._document.edit(text, added(self._document.committed, checked(case)))
        self.cases.set_current(len(self._document.layout.load_cases) - 1, 0)
        self._show_one()

    def _enter(self, case: LoadCase, sentence: str) -> None:
        after = replaced(self._document.committed, checked(case))
        self._document.edit(f"{sentence} of load case {case.title}", after)

    def _set(self, what: str, **values: object) -> None:
        case = self.case
        if case is not None:
            self._enter(restated(case, **values), f"Change {what}")

    def _on_cases(self, rows: tuple[LoadCase, ...], sentence: str) -> None:
        layout = self._document.committed
        present = {case.id: case for case in layout.load_cases}
        try:
            new = [checked(row) for row in rows if row.id not in present]
            changed = [checked(r) for r in rows if r.id in present]
            after = added(replaced(layout, *changed), *new)
        except UserError as error:
            self.cases.refuse(str(error))
            return
        self._document.edit(f"{sentence} of load cases", after)

    def _on_rows(self, rows: tuple[CaseRow, ...], sentence: str) -> None:
        case = self.case
        if case is None:
            return
        try:
            self._enter(rows_of.case_of(case, rows), sentence)
        except UserError as error:
            self.circuits.refuse(str(error))

    def _on_row(self, row: CaseRow, what: str) -> None:
        case = self.case
        if case is None:
            return
        rows = tuple(
            row if old.circuit.id == row.circuit.id else old
            for old in self.circuits.rows
        )
        sentence = f"Change {what} of {row.circuit.title}"
        self._enter(rows_of.case_of(case, rows), sentence)

    def _on_spectrum(self, lines: tuple[SpectrumLine, ...], _sentence: str) -> None:
        row = self._row()
        if row is not None:
            self._on_row(rows_of.with_own(row, spectrum=lines), "own spectrum")

    def _on_as_circuit(self) -> None:
        row = self._row()
        if row is not None:
            self._on_row(rows_of.with_own(row, spectrum=None), "own spectrum")

    def _on_enclosure(self, _item: QListWidgetItem) -> None:
        items = [self.enclosures.item(i) for i in range(self.enclosures.count())]
        chosen = tuple(
            item.data(Qt.ItemDataRole.UserRole)
            for item in items
            if item.checkState() == Qt.CheckState.Checked
        )
        self._set("open enclosures", open_enclosures=chosen)
