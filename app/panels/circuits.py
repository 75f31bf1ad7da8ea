"""Circuits: all of them as a table with direct editing, one of them in full below."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QTabWidget,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.panels import circuit_cells as cells
from app.panels.circuit_form import (
    CURRENT_TIP,
    FREQUENCY_TIP,
    NET_TIP,
    NEUTRAL_TIP,
    VOLTAGE_TIP,
    CircuitForm,
)
from app.panels.origin import OriginMark, assumed_fields
from app.panels.panel import Panel, Words, button, column, decimal_sign, scrolled
from app.panels.spectrum import SpectrumEditor
from app.panels.table import Column, RowsTable
from app.theme import STEP
from app.view_state import ViewState
from app.wrapping import wrapped
from engine.circuits import Circuit, LoadCase, SpectrumLine
from engine.currents import circuit_phasors
from engine.edits import added, checked, removed, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.origins import restated
from engine.shown_currents import current_text, net_current_text, power_factor_text
from engine.typed_numbers import number_text


class CircuitsPanel(Panel):
    """The circuits of the layout, with N and net current as they come out."""

    shows = ("circuits", "load_cases", "settings", "documents")

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__(document)
        self._view_state = view_state
        view_state.changed.connect(self._on_look)
        self.table = RowsTable(
            _columns(self._live),
            name="Circuits",
            new_row=lambda rows: cells.new_circuit(document.committed, *rows),
        )
        self.table.entered.connect(self._on_entered)
        self.table.chosen.connect(self._on_chosen)
        self.caption = Words()
        self.empty = Words(
            "No circuit yet. Add one, or paste rows of name, current and cos φ from a "
            "spreadsheet into the table."
        )
        self.form = CircuitForm(document, self._enter)
        self.spectrum = SpectrumEditor(self._on_spectrum)
        self.spectrum_mark = OriginMark(document)
        self.tabs = QTabWidget()
        self.tabs.setAccessibleName("The circuit")
        self.tabs.setDocumentMode(True)
        self.tabs.addTab(self.form, "Values")
        self.tabs.addTab(self._spectrum_page(), "Spectrum")
        self.tabs.setTabToolTip(0, "Supply, current, neutral and net current")
        self.tabs.setTabToolTip(1, "Currents besides the base frequency [A, Hz]")
        self.title = Words(style="title")
        content = QWidget()
        box = column(content, 3 * STEP)
        box.addWidget(self._buttons())
        box.addWidget(self.empty)
        box.addWidget(self.table)
        box.addWidget(self.caption)
        box.addWidget(self.title)
        box.addWidget(self.tabs)
        box.addStretch(1)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.addWidget(scrolled(content))

    @property
    def circuit(self) -> Circuit | None:
        """The circuit whose values are shown below the table."""
        row = self.table.row
        circuits = self._document.layout.circuits
        return circuits[row] if 0 <= row < len(circuits) else None

    def refresh(self) -> None:
        layout = self._document.layout
        self._results: dict[str, cells.Live] = {}
        self.table.set_rows(layout.circuits)
        self.table.fit_height(2, 8)
        has = bool(layout.circuits)
        self.empty.setVisible(not has)
        self.caption.setVisible(has)
        self.caption.setText(
            f"N and Net: amperes over all frequencies in the load case "
            f"“{self._case().title}”."
        )
        if has and self.table.row < 0:
            self.table.set_current(0, 0)
        self._show_one()

    def follow_selection(self, ids: frozenset[str]) -> None:
        for row, circuit in enumerate(self._document.layout.circuits):
            if circuit.id in ids:
                current = self.circuit
                if current is None or current.id not in ids:
                    self.table.set_current(row)
                    self._show_one()
                return

    def add(self) -> None:
        """Add a circuit without a current."""
        layout = self._document.committed
        new = cells.new_circuit(layout)
        self._add(new, f"Add {new.title}")

    def duplicate(self) -> None:
        """Add the shown circuit once more."""
        circuit = self.circuit
        if circuit is not None:
            new = cells.duplicate(self._document.committed, circuit)
            self._add(new, f"Duplicate {circuit.title}")

    def remove(self) -> None:
        """Remove the shown circuit; what still names it is told."""
        circuit = self.circuit
        if circuit is None:
            return
        layout = self._document.committed
        users = _users(layout, circuit.id)
        self._document.edit(f"Remove {circuit.title}", removed(layout, circuit.id))
        if users:
            listed = ", ".join(users[:4]) + (" and more" if len(users) > 4 else "")
            self.table.refuse(
                f"“{circuit.title}” is removed but still named by {listed}. Remove it "
                "there, or undo."
            )

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "table"):
            self.table.colour()
        super().changeEvent(event)

    def _buttons(self) -> QWidget:
        buttons = (
            ("Add", "Add a circuit without a current", self.add),
            ("Duplicate", "Add the chosen circuit once more", self.duplicate),
            ("Remove", "Remove the chosen circuit", self.remove),
        )
        return wrapped(*(button(*each) for each in buttons))

    def _spectrum_page(self) -> QWidget:
        page = QWidget()
        row = QHBoxLayout()
        row.addWidget(Words("Currents besides the base frequency", "plain"), 1)
        row.addWidget(self.spectrum_mark)
        box = column(page)
        box.addLayout(row)
        box.addWidget(self.spectrum)
        box.addStretch(1)
        return page

    def _case(self) -> LoadCase:
        cases = self._document.layout.cases
        wanted = self._view_state.look.case
        return next((case for case in cases if case.id == wanted), cases[0])

    def _live(self, circuit: Circuit) -> cells.Live:
        found = self._results.get(circuit.id)
        if found is None:
            found = self._results[circuit.id] = cells.live(circuit, self._case())
        return found

    def _show_one(self) -> None:
        circuit = self.circuit
        self.title.setVisible(circuit is not None)
        self.tabs.setVisible(circuit is not None)
        if circuit is None:
            return
        self.title.setText(circuit.title)
        self.form.show_circuit(circuit)
        self.spectrum.show_circuit(circuit, _largest_line(circuit))
        self.spectrum_mark.show_value(
            circuit, "spectrum", "spectrum" in assumed_fields(circuit)
        )
        count = len(circuit.spectrum)
        self.tabs.setTabText(1, f"Spectrum ({count})" if count else "Spectrum")

    def _add(self, circuit: Circuit, text: str) -> None:
        self._document.edit(text, added(self._document.committed, checked(circuit)))
        self.table.set_current(len(self._document.layout.circuits) - 1, 0)
        self._show_one()
        self._document.select((circuit.id,))

    def _enter(self, circuit: Circuit, what: str) -> None:
        self._document.edit(
            f"Change {what} of {circuit.title}",
            replaced(self._document.committed, circuit),
        )

    def _on_look(self, _look: object) -> None:
        if self.isVisible():
            self.refresh()

    def _on_entered(self, rows: tuple[Circuit, ...], sentence: str) -> None:
        layout = self._document.committed
        present = {circuit.id: circuit for circuit in layout.circuits}
        new = [checked(row) for row in rows if row.id not in present]
        changed = [row for row in rows if row.id in present and row != present[row.id]]
        try:
            after = added(replaced(layout, *changed), *new)
        except UserError as error:
            self.table.refuse(str(error))
            return
        one = changed[0].title if len(changed) == 1 and not new else "circuits"
        self._document.edit(f"{sentence} of {one}", after)

    def _on_spectrum(self, lines: tuple[SpectrumLine, ...], sentence: str) -> None:
        circuit = self.circuit
        if circuit is not None:
            changed = checked(restated(circuit, spectrum=lines))
            self._document.edit(
                f"{sentence} in the spectrum of {circuit.title}",
                replaced(self._document.committed, changed),
            )

    def _on_chosen(self, _row: int) -> None:
        circuit = self.circuit
        self._show_one()
        if circuit is not None:
            self._document.select((circuit.id,))


def _users(layout: Layout, circuit: str) -> list[str]:
    """Titles of the items that name a circuit."""
    found = []
    for item in (*layout.runs, *layout.equipment, *layout.load_cases):
        if _names(item, circuit):
            found.append(item.title)
    return found


def _names(value: Any, circuit: str) -> bool:
    """Whether a value names the circuit anywhere inside it."""
    if isinstance(value, tuple):
        return any(_names(part, circuit) for part in value)
    fields = getattr(value, "__struct_fields__", ())
    return any(
        (name == "circuit" and getattr(value, name) == circuit)
        or _names(getattr(value, name), circuit)
        for name in fields
    )


def _largest_line(circuit: Circuit) -> float | None:
    """The largest current of a line at the base frequency. [A]"""
    try:
        phasors = circuit_phasors(circuit)
    except UserError:
        return None
    base = [abs(v) for (_, f), v in phasors.items() if f == circuit.base_frequency]
    return max(base, default=None)


def _columns(live: Callable[[Circuit], cells.Live]) -> tuple[Column, ...]:
    def made(circuit: Circuit) -> str:
        return cells.made_text(circuit, decimal_sign())

    def fault(circuit: Circuit) -> str:
        return live(circuit).fault

    return (
        Column(
            "Name", lambda c: c.name or c.id, cells.with_name,
            tip="Name of the circuit", width=24,
        ),
        Column(
            "Current", lambda c: current_text(c, decimal_sign()), cells.with_current,
            tip=CURRENT_TIP, made=made, width=26,
        ),
        Column(
            "N",
            lambda c: cells.amperes_text(live(c).neutral, decimal_sign()),
            tip="Neutral (or return) as it comes out [A RMS, all frequencies]",
            made=fault, width=14,
        ),
        Column(
            "Net",
            lambda c: cells.amperes_text(live(c).net, decimal_sign()),
            tip="Net current outside the cable as it comes out [A RMS]",
            made=fault, width=13,
        ),
        Column(
            "cos φ", lambda c: power_factor_text(c, decimal_sign()),
            cells.with_power_factor, tip="Power factor, lag or lead", width=16,
        ),
        Column(
            "Supply", lambda c: cells.words_of(cells.SUPPLIES, c.supply),
            cells.with_supply, tuple(words for _, words in cells.SUPPLIES),
            tip="Conductors that carry the load", width=27,
        ),
        Column(
            "V",
            lambda c: "" if c.voltage is None else number_text(
                c.voltage, decimal_sign()
            ),
            cells.with_voltage, tip=VOLTAGE_TIP, width=13,
        ),
        Column(
            "Hz", lambda c: number_text(c.base_frequency, decimal_sign()),
            cells.with_frequency, tip=FREQUENCY_TIP, width=11,
        ),
        Column(
            "Neutral", lambda c: cells.words_of(cells.NEUTRALS, c.neutral),
            cells.with_neutral, tuple(words for _, words in cells.NEUTRALS),
            tip=NEUTRAL_TIP, width=20,
        ),
        Column(
            "Net entered", lambda c: net_current_text(c.net_current, decimal_sign()),
            cells.with_net_current, tip=NET_TIP, width=22,
        ),
    )  # fmt: skip
