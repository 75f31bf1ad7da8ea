"""Load cases panel: factors, own currents, clamp surveys, counting, open enclosures."""

from __future__ import annotations

import math

import pytest
from PySide6.QtCore import Qt

from app.document import Document
from app.panels.load_cases import LoadCasesPanel
from app.view_state import ViewState
from engine.circuits import (
    BalancedCurrent,
    Circuit,
    CircuitFactor,
    LoadCase,
    MeasuredCurrents,
    MeasuredLine,
    OwnCurrents,
    SpectrumLine,
)
from engine.layout import Layout
from engine.places import Enclosure

SQUARE = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))
LAYOUT = Layout(
    circuits=(
        Circuit(id="F1", name="Office", demand=BalancedCurrent(rms=100.0)),
        Circuit(id="F2", name="Plant", demand=BalancedCurrent(rms=50.0)),
    ),
    enclosures=(Enclosure(id="E1", name="Board", footprint=SQUARE, z_from=0, z_to=2),),
    load_cases=(LoadCase(id="day", name="Day"), LoadCase(id="night", name="Night")),
)


@pytest.fixture
def document():
    return Document(LAYOUT)


@pytest.fixture
def look():
    return ViewState()


@pytest.fixture
def panel(qtbot, document, look):
    made = LoadCasesPanel(document, look)
    qtbot.addWidget(made)
    made.resize(360, 700)
    made.show()
    return made


def typed(panel, row, column, text):
    model = panel.circuits.model
    return model.setData(model.index(row, column), text)


def shown(panel, row, column):
    return panel.circuits.model.index(row, column).data()


def entered(field, text, qtbot):
    field.line.setText(text)
    qtbot.keyClick(field.line, Qt.Key.Key_Return)


def test_a_factor_is_one_step_and_in_brackets_where_none_is_stated(panel, document):
    assert shown(panel, 0, 1) == "(1)"
    assert typed(panel, 0, 1, "80 %")
    assert document.layout.load_cases[0].factors == (
        CircuitFactor(circuit="F1", factor=0.8),
    )
    assert document.undo_stack.count() == 1
    typed(panel, 0, 1, "")
    assert document.layout.load_cases[0].factors == ()
    panel.others._on_activated(1)
    assert shown(panel, 1, 1) == "(0)"


def test_a_factor_out_of_range_changes_nothing(panel, document):
    assert not typed(panel, 0, 1, "-0.5")
    assert "between 0 and 1000" in panel.circuits.reason.text()
    assert document.layout is LAYOUT


def test_factors_are_pasted_as_one_step(panel, document):
    panel.circuits.set_current(0, 1)
    panel.circuits.paste("0,5\n0,25")
    factors = [f.factor for f in document.layout.load_cases[0].factors]
    assert factors == [0.5, 0.25]
    assert document.undo_stack.count() == 1


def test_an_own_current_takes_the_place_of_the_circuits(panel, document):
    typed(panel, 1, 2, "80 A 0.8 lag")
    own = document.layout.load_cases[0].own
    assert own == (
        OwnCurrents(circuit="F2", demand=BalancedCurrent(rms=80.0, cos_phi=0.8)),
    )
    typed(panel, 1, 2, "")
    assert document.layout.load_cases[0].own == ()
    assert not typed(panel, 1, 2, "20 kVA 400 V")
    assert "belongs to the circuit" in panel.circuits.reason.text()


def test_measured_and_computed_neutral_stand_side_by_side(panel, document, qtbot):
    for label, amperes in (("L1", "60"), ("L2", "60 A"), ("L3", "0.03 kA")):
        entered(panel.measured.lines[label], amperes, qtbot)
    entered(panel.measured.neutral, "45", qtbot)
    entered(panel.measured.net, "400 mA", qtbot)
    entered(panel.measured.date, "2024-02-05", qtbot)
    entered(panel.measured.instrument, "Clamp 7", qtbot)
    demand = document.layout.load_cases[0].own[0].demand
    assert demand == MeasuredCurrents(
        lines=tuple(
            MeasuredLine(label=x, rms=r)
            for x, r in (("L1", 60.0), ("L2", 60.0), ("L3", 30.0))
        ),
        neutral=45.0,
        net=0.4,
        date="2024-02-05",
        instrument="Clamp 7",
    )
    # 60∠0 + 60∠-120 + 30∠120 leaves 30 A; the clamp said 45 A. Both stand.
    assert panel.measured.computed_value.text() == "30.0 A"
    assert panel.measured.measured_value.text() == "45.0 A"
    assert panel.measured.net_value.text() == "0.400 A"
    assert "nothing is reconciled" in panel.measured.note.text()
    assert "clamped net current does not flow" in panel.measured.note.text()
    assert document.undo_stack.count() == 7
    assert math.isclose(document.layout.circuits[0].demand.rms, 100.0)


def test_an_emptied_survey_is_none(panel, document, qtbot):
    entered(panel.measured.lines["L1"], "60", qtbot)
    entered(panel.measured.lines["L1"], "", qtbot)
    assert document.layout.load_cases[0].own == ()


def test_a_measured_current_below_zero_is_refused(panel, document, qtbot):
    entered(panel.measured.lines["L1"], "-5", qtbot)
    assert panel.measured.lines["L1"].reason.text() == (
        "The current of L1 must be at least 0 A."
    )
    assert document.layout is LAYOUT


def test_counting_and_names(panel, document, qtbot):
    panel.counts.set_value("information")
    panel.counts._on_activated(1)
    assert not document.layout.load_cases[0].counted
    entered(panel.basis, "highest operation", qtbot)
    assert document.layout.load_cases[0].basis == "highest operation"
    assert document.undo_stack.undoText() == "Change basis of load case Day"


def test_an_enclosure_is_opened_for_a_case(panel, document):
    item = panel.enclosures.item(0)
    item.setCheckState(Qt.CheckState.Checked)
    assert document.layout.load_cases[0].open_enclosures == ("E1",)
    document.undo_stack.undo()
    assert panel.enclosures.item(0).checkState() == Qt.CheckState.Unchecked


def test_a_case_has_its_own_spectrum_until_it_is_taken_back(panel, document):
    panel.spectrum._on_add()
    own = document.layout.load_cases[0].own[0]
    assert own.spectrum == (SpectrumLine(frequency=150.0, ratio=0.0),)
    assert "its own" in panel.spectrum_words.text()
    panel._on_as_circuit()
    assert document.layout.load_cases[0].own == ()


def test_add_duplicate_remove_and_show(panel, document, look):
    panel.add()
    assert document.layout.load_cases[-1].name == "Load case 3"
    panel.duplicate()
    panel.show_in_drawing()
    assert look.look.case == document.layout.load_cases[-1].id
    panel.remove()
    panel.remove()
    assert document.layout.load_cases == LAYOUT.load_cases


def test_a_layout_without_cases_says_what_holds(qtbot, look):
    panel = LoadCasesPanel(Document(Layout()), look)
    qtbot.addWidget(panel)
    panel.show()
    assert panel.empty.isVisible()
    assert "as entered" in panel.empty.text()
    assert not panel.cases.isVisible()
