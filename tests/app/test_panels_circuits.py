"""Circuits panel: cells, form, paste, spectrum; each edit is one undo step."""

from __future__ import annotations

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QLineEdit

from app.document import Document
from app.panels.circuits import CircuitsPanel
from app.panels.spectrum import bars, with_size
from app.view_state import ViewState
from engine.circuits import (
    BalancedCurrent,
    Circuit,
    CircuitFactor,
    EnteredNetCurrent,
    LineLoad,
    LineLoads,
    LoadCase,
    Power,
    SpectrumLine,
)
from engine.edits import replaced
from engine.items import ValueOrigin
from engine.layout import Layout
from engine.origins import assumptions

UNEQUAL = LineLoads(
    loads=tuple(
        LineLoad(label=x, rms=r, lag=0.0)
        for x, r in (("L1", 100.0), ("L2", 100.0), ("L3", 40.0))
    )
)
LAYOUT = Layout(
    circuits=(
        Circuit(id="F1", name="Office", demand=UNEQUAL, voltage=400.0),
        Circuit(id="F2", name="Plant", net_current=EnteredNetCurrent(rms=2.0)),
    ),
    load_cases=(
        LoadCase(id="half", factors=(CircuitFactor(circuit="F1", factor=0.5),)),
        LoadCase(id="full"),
    ),
)


@pytest.fixture
def document():
    return Document(LAYOUT)


@pytest.fixture
def look():
    state = ViewState()
    state.set(case="full")
    return state


@pytest.fixture
def panel(qtbot, document, look):
    made = CircuitsPanel(document, look)
    qtbot.addWidget(made)
    made.resize(360, 700)
    made.show()
    return made


def cell(panel, row, title):
    columns = [column.title for column in panel.table.model.columns]
    return panel.table.model.index(row, columns.index(title))


def typed(panel, row, title, text):
    return panel.table.model.setData(cell(panel, row, title), text)


def test_a_typed_current_is_one_undo_step(panel, document):
    assert typed(panel, 1, "Current", "250 kVA 400 V 0.8 lag")
    circuit = document.layout.circuits[1]
    assert circuit.demand == Power(apparent=250e3, cos_phi=0.8)
    assert circuit.voltage == 400
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText() == "Change Current of Plant"
    document.undo_stack.undo()
    assert document.layout == LAYOUT
    assert cell(panel, 1, "Current").data() == ""


def test_neutral_and_net_are_shown_as_they_come_out(panel, look):
    # 100∠0 + 100∠-120 + 40∠120 leaves 60 A, minus that in N.
    assert cell(panel, 0, "N").data() == "60.0 A"
    assert cell(panel, 1, "Net").data() == "2.00 A"
    look.set(case="half")
    assert cell(panel, 0, "N").data() == "30.0 A"
    assert "half" in panel.caption.text()


def test_a_refused_cell_changes_nothing_and_says_why(panel, document):
    assert not typed(panel, 0, "Current", "a lot")
    assert document.layout is LAYOUT
    assert "Nothing can be made" in panel.table.reason.text()
    assert panel.table.reason.isVisible()
    here = cell(panel, 0, "Current")
    assert here.data(Qt.ItemDataRole.BackgroundRole) is not None
    typed(panel, 0, "Current", "800")
    assert not panel.table.reason.isVisible()
    assert here.data(Qt.ItemDataRole.BackgroundRole) is None


def test_pasted_rows_are_one_step_and_add_circuits(panel, document):
    panel.table.set_current(0, 0)
    panel.table.paste("Hall\t1,6 kA\t\t\t0,8\nYard\t80\t\t\t0,9\nGate\t5,5\t\t\t1")
    names = [circuit.name for circuit in document.layout.circuits]
    assert names == ["Hall", "Yard", "Gate"]
    first = document.layout.circuits[0].demand
    assert first == BalancedCurrent(rms=1600, cos_phi=0.8) or first.loads
    assert document.undo_stack.count() == 1
    document.undo_stack.undo()
    assert document.layout == LAYOUT


def test_a_refused_paste_changes_nothing(panel, document):
    panel.table.set_current(0, 0)
    panel.table.paste("Hall\t1.6 kA\nYard\tmuch")
    assert document.layout is LAYOUT
    assert "Row 2, Current" in panel.table.reason.text()


def test_copied_cells_are_tab_text(panel):
    panel.table.view.selectAll()
    lines = panel.table.copied().splitlines()
    assert lines[0].startswith("Office\t100 / 100 / 40 A @ 0\t60.0 A")


def test_the_form_edits_and_shows_what_was_made(panel, document, qtbot):
    document.select(("F2",))
    line = panel.form.current.line
    line.setFocus()
    line.selectAll()
    qtbot.keyClicks(line, "180 kW 400 V 0.92")
    qtbot.keyClick(line, Qt.Key.Key_Return)
    assert document.layout.circuits[1].demand == Power(active=180e3, cos_phi=0.92)
    assert panel.form.made.text() == "282 A at 0.92 lagging"
    assert document.undo_stack.count() == 1


def test_the_form_refuses_with_a_reason_and_escape_restores(panel, document, qtbot):
    panel._show_one()
    line = panel.form.voltage.line
    line.setText("0 V")
    qtbot.keyClick(line, Qt.Key.Key_Return)
    assert panel.form.voltage.is_refused
    assert "more than 0 V" in panel.form.voltage.reason.text()
    assert document.layout is LAYOUT
    qtbot.keyClick(line, Qt.Key.Key_Escape)
    assert line.text() == "400 V"
    assert not panel.form.voltage.is_refused


def test_dc_and_back_leave_a_frequency_that_fits(panel, document):
    typed(panel, 1, "Supply", "DC")
    assert document.layout.circuits[1].base_frequency == 0
    typed(panel, 1, "Supply", "3-phase 4-wire")
    assert document.layout.circuits[1].base_frequency == 50


def test_a_changed_value_is_assumed_again(qtbot, look):
    origin = ValueOrigin(field="voltage", kind="confirmed", by="A. Tester")
    demand = BalancedCurrent(rms=100.0)
    circuit = Circuit(id="F1", voltage=400.0, demand=demand, origins=(origin,))
    document = Document(Layout(circuits=(circuit,)))
    panel = CircuitsPanel(document, look)
    qtbot.addWidget(panel)
    panel.show()
    mark = panel.form._marks["voltage"]
    assert not mark.is_assumed
    assert "confirmed by A. Tester" in mark.toolTip()
    typed(panel, 0, "V", "690")
    assert document.layout.circuits[0].origins == ()


def test_an_origin_is_set_from_the_mark(panel, document):
    mark = panel.form._marks["demand"]
    assert mark.is_assumed
    assert mark.text() == "A"
    mark.open_form()
    form = mark.form
    form.kind.set_value("document")
    form._on_kind("document")
    form.apply()
    assert form.reason.text().startswith("Choose the document")
    form.source.setEditText("Load list")
    form.lines["page"].setText("F1")
    form.apply()
    assert document.layout.documents[0].name == "Load list"
    assert not [a for a in assumptions(document.layout) if a == ("F1", "demand")]
    assert not mark.is_assumed
    assert "from Load list, F1" in mark.toolTip()
    assert document.undo_stack.count() == 1


def test_add_duplicate_and_remove(panel, document):
    panel.add()
    assert document.layout.circuits[-1].name == "Circuit 3"
    assert document.layout.circuits[-1].demand is None
    panel.duplicate()
    assert len(document.layout.circuits) == 4
    panel.remove()
    panel.remove()
    assert document.undo_stack.count() == 4
    panel.table.set_current(0)
    panel.remove()
    assert "still named by half" in panel.table.reason.text()
    while document.undo_stack.canUndo():
        document.undo_stack.undo()
    assert document.layout == LAYOUT


def test_choosing_a_row_selects_the_circuit_and_opening_does_not(panel, document):
    assert document.selection == frozenset()
    panel.table.view.setCurrentIndex(cell(panel, 1, "Name"))
    assert document.selection == {"F2"}
    document.select(("F1",))
    assert panel.circuit.id == "F1"
    assert panel.title.text() == "Office"


def test_a_new_frequency_has_the_keyboard(panel, document, qtbot):
    panel.show()
    panel.activateWindow()
    panel.spectrum.add_button.setFocus()
    panel.spectrum.add_button.click()
    assert panel.focusWidget() is panel.spectrum.table.view


def test_an_unbalance_is_typed_into_an_empty_field(panel, document, qtbot):
    even = replace(LAYOUT.circuits[0], demand=BalancedCurrent(rms=800.0))
    document.edit("Even out", replaced(LAYOUT, even))
    field = panel.form.negative.line
    assert (field.text(), field.placeholderText()) == ("", "none")
    qtbot.keyClicks(field, "5 %")
    qtbot.keyClick(field, Qt.Key.Key_Return)
    demand = document.layout.circuits[0].demand
    assert demand.unbalance.negative_ratio == pytest.approx(0.05)


def test_spectrum_is_edited_and_unknown_offsets_are_told(panel, document):
    panel.spectrum._on_add()
    assert document.layout.circuits[0].spectrum == (
        SpectrumLine(frequency=150.0, ratio=0.0),
    )
    table = panel.spectrum.table
    assert table.model.setData(table.model.index(0, 2), "12")
    assert table.model.setData(table.model.index(0, 3), "30")
    line = document.layout.circuits[0].spectrum[0]
    assert (line.ratio, line.offset) == (0.12, 30)
    assert panel.spectrum.words.text() == ""
    table.model.setData(table.model.index(0, 3), "unknown")
    assert "unknown" in panel.spectrum.words.text()
    table.paste("250\tall lines\t5 A\tunknown\n350\tL1\t3 %\t0")
    assert len(document.layout.circuits[0].spectrum) in (2, 3)


def test_bars_are_relative_to_the_largest_line():
    lines = (
        SpectrumLine(frequency=150.0, ratio=0.2),
        SpectrumLine(frequency=250.0, rms=5.0, offset=0.0),
    )
    circuit = Circuit(id="F1", spectrum=lines)
    assert bars(circuit, 50.0) == [(150.0, 20.0, False), (250.0, 10.0, True)]
    assert bars(circuit, None) == [(150.0, 20.0, False)]
    assert with_size(lines[0], "3 A", ".").rms == 3
    assert with_size(lines[1], "3", ".").ratio == 0.03


def test_a_hidden_panel_waits(panel, document):
    panel.hide()
    document.edit("Rename", Layout(circuits=(Circuit(id="Z", name="Other"),)))
    assert len(panel.table.rows) == 2
    panel.show()
    assert [circuit.name for circuit in panel.table.rows] == ["Other"]


def test_what_users_type_is_never_markup(panel, document):
    typed(panel, 0, "Name", "<b>Bold</b> & co")
    assert panel.title.text() == "<b>Bold</b> & co"
    assert panel.title.textFormat() is Qt.TextFormat.PlainText
    panel.form.voltage.refuse("“<img src=x>” is no number.")
    assert "&lt;img" in panel.form.voltage.line.toolTip()


def test_cells_are_typed_and_pasted_by_keyboard_alone(panel, document, qtbot):
    view = panel.table.view
    view.setFocus()
    panel.table.set_current(1, 1)
    qtbot.keyClicks(view, "8")
    editor = view.viewport().findChild(QLineEdit)
    qtbot.keyClicks(editor, "00 A 0.8 lag")
    qtbot.keyClick(editor, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: document.layout.circuits[1].demand is not None)
    demand = document.layout.circuits[1].demand
    assert demand == BalancedCurrent(rms=800.0, cos_phi=0.8)
    QGuiApplication.clipboard().setText("1,6 kA\n90")
    panel.table.set_current(0, 1)
    qtbot.keyClick(view, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    assert document.layout.circuits[1].demand.rms == 90
    assert document.undo_stack.undoText() == "Paste 2 rows of circuits"
    panel.table.set_current(1, 1)
    qtbot.keyClick(view, Qt.Key.Key_Delete)
    assert document.layout.circuits[1].demand is None


def test_typing_is_kept_while_the_document_changes(panel, document):
    panel._show_one()
    line = panel.form.voltage.line
    line.setFocus()
    line.setText("41")
    other = replace(LAYOUT.circuits[1], name="Pumps")
    document.edit("Rename Plant", replaced(document.layout, other))
    assert line.text() == ("41" if line.hasFocus() else "400 V")
