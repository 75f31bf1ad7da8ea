"""The Item panel: what it shows, what entering does, and what it refuses."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.document import Document
from app.panels import layout_forms
from app.panels.item import ItemPanel
from app.panels.kinds import Distances, Terms
from app.panels.origin import OriginForm
from app.panels.source_kinds import CarriedCircuits, SolidShape
from engine.edits import removed
from engine.errors import UserError
from engine.layout import Layout, Settings
from engine.layout_file import read
from engine.places import Room
from engine.runs import Bar, CircuitShare, Round, Run

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"
SAMPLES = sorted(SAMPLE.parent.glob("*.json"))


@pytest.fixture
def document() -> Document:
    return Document(read(SAMPLE))


@pytest.fixture
def panel(document, qtbot) -> ItemPanel:
    panel = ItemPanel(document)
    qtbot.addWidget(panel)
    panel.resize(360, 900)
    panel.show()
    return panel


def type_in(panel: ItemPanel, path: str, text: str) -> None:
    line = panel.form.editor(path).field.line
    line.setFocus()
    line.selectAll()
    QTest.keyClicks(line, text)
    QTest.keyClick(line, Qt.Key.Key_Return)


def item(document: Document, item_id: str):
    return document.layout.by_id()[item_id]


def test_a_typed_length_is_one_undo_step_with_a_sentence(document, panel):
    document.select(["switch-room"])
    type_in(panel, "ceiling_level", "3450mm")
    assert item(document, "switch-room").ceiling_level == 3.45
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText() == (
        "Set the ceiling level of Main switch room to 3.45 m"
    )
    document.undo_stack.undo()
    assert panel.form.editor("ceiling_level").field.line.text() == "3.60 m"


def test_what_cannot_be_turns_the_field_and_changes_nothing(document, panel):
    document.select(["switch-room"])
    before = document.layout
    type_in(panel, "ceiling_level", "high")
    field = panel.form.editor("ceiling_level").field
    assert "is not a length" in field.reason.text()
    type_in(panel, "slab_above", "-1")
    assert panel.form.editor("slab_above").field.reason.text() == (
        "Expected a number greater than 0 and not greater than 100000 or nothing, "
        "got -1.0 (in m)."
    )
    assert document.layout is before
    assert document.undo_stack.count() == 0
    QTest.keyClick(field.line, Qt.Key.Key_Escape)
    assert field.line.text() == "3.60 m"
    assert not field.is_refused


def test_different_values_are_summed_up_and_set_together(document, panel):
    ids = [run.id for run in document.layout.runs[:4]]
    document.select(ids)
    line = panel.form.editor("rated_current").field.line
    assert line.text() == ""
    assert line.placeholderText() == "2 values, 1250–2500 A"
    assert panel.title == "4 runs"
    type_in(panel, "rated_current", "2 kA")
    assert {item(document, i).rated_current for i in ids} == {2000.0}
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText() == (
        "Set the rated current of 4 items to 2000 A"
    )


def test_different_kinds_share_what_they_have_in_common(document, panel):
    document.select(["switch-room", "office-zone"])
    assert panel.form.paths() == ["name", "storey", "note"]
    assert panel.title == "2 items"


def test_the_current_of_a_runs_circuit_is_edited_in_place(document, panel):
    document.select(["riser"])
    type_in(panel, "demand", "1.2 kA 0.9 lag")
    circuit = document.layout.by_id()[
        document.layout.runs[4].section.circuits[0].circuit
    ]
    assert circuit.demand.rms == 1200
    assert document.undo_stack.undoText().startswith(
        f"Set the current of {circuit.title}"
    )
    assert panel.form.row("demand")._note.text() == "Shared by 6 runs."


def test_an_edit_takes_the_origin_of_the_value_away(document, panel):
    document.select(["switch-room"])
    assert not panel.form.row("ceiling_level").mark.is_assumed
    type_in(panel, "ceiling_level", "3.5")
    assert panel.form.row("ceiling_level").mark.is_assumed
    assert not panel.form.row("ceiling_level").mark.isHidden()


def test_vertices_come_and_go_with_the_turns_of_their_legs(document, panel):
    riser = item(document, "riser")
    turns = (0.0, 10.0, 20.0, 30.0)
    document.edit("Turn", replace(document.layout, runs=(replace(riser, turns=turns),)))
    document.select(["riser"])
    table = panel.form.editor("route")
    table.table.set_current(1, 0)
    table.add.click()
    added = item(document, "riser")
    assert len(added.route) == len(riser.route) + 1
    assert added.turns == (0.0, 10.0, 10.0, 20.0, 30.0)
    assert added.route[2] == tuple(
        (a + b) / 2 for a, b in zip(riser.route[1], riser.route[2], strict=True)
    )
    table.table.set_current(2, 0)
    table.remove.click()
    assert item(document, "riser").route == riser.route
    assert item(document, "riser").turns == pytest.approx(turns)


def test_a_cell_of_a_table_is_one_step(document, panel):
    document.select(["riser"])
    model = panel.form.editor("route").table.model
    assert model.setData(model.index(0, 2), "650mm")
    assert item(document, "riser").route[0][2] == 0.65
    assert document.undo_stack.undoText().startswith("Change the route of F1 riser")
    assert not model.setData(model.index(0, 2), "up")
    assert item(document, "riser").route[0][2] == 0.65


def test_ends_are_connected_with_a_likely_way(document, panel):
    document.select(["riser"])
    box = panel.form.editor("start.equipment").box
    box.activated.emit(0)
    assert item(document, "riser").start is None
    assert "start.way" not in panel.form.paths()
    panel.form.editor("start.equipment").box.activated.emit(2)
    assert item(document, "riser").start.equipment == "MDB"
    assert item(document, "riser").start.way == "F1"


def test_an_own_uncertainty_begins_as_the_layouts(document, panel):
    document.select(["office-zone"])
    assert "uncertainty.relative" not in panel.form.paths()
    panel.form.editor("own uncertainty").box.click()
    zone = item(document, "office-zone")
    assert zone.uncertainty == document.layout.settings.uncertainty
    type_in(panel, "uncertainty.relative", "30 %")
    assert item(document, "office-zone").uncertainty.relative == 0.3
    panel.form.editor("own uncertainty").box.click()
    assert item(document, "office-zone").uncertainty is None


def test_nothing_selected_shows_the_layout(document, panel):
    document.select([])
    assert panel.title == "Layout"
    assert {"project", "frequency", "map_low", "decision_rule.chosen_by"} <= set(
        panel.form.paths()
    )
    type_in(panel, "map_high", "2 mT")
    assert document.layout.settings.map_high == 2e-3
    type_in(panel, "uncertainty.relative", "20")
    assert document.layout.settings.uncertainty.relative == 0.2


def test_storeys_are_a_table_of_the_layout(document, panel):
    document.select([])
    table = panel.form.editor("storeys")
    before = document.layout.storeys
    table.table.set_current(len(before) - 1, 0)
    table.add.click()
    assert document.layout.storeys[:-1] == before
    assert document.layout.storeys[-1].floor_level > before[-1].floor_level
    model = panel.form.editor("storeys").table.model
    assert model.setData(model.index(len(before), 1), "9.5 m")
    assert document.layout.storeys[-1].floor_level == 9.5
    assert document.undo_stack.undoText() == "Change the storeys of the layout"


def test_a_joint_takes_conductors_that_are_still_free(document, panel):
    joint = document.layout.joints[0]
    few = replace(joint, ends=joint.ends[:2])
    document.edit("Fewer", replace(document.layout, joints=(few,)))
    document.select([joint.id])
    panel.form.editor("ends").add.click()
    ends = item(document, joint.id).ends
    assert len(set(ends)) == 3
    assert ends[2].item == ends[1].item


def test_lengths_follow_the_layouts_unit(document, panel):
    settings = replace(document.layout.settings, length_unit="ft")
    document.edit("Feet", replace(document.layout, settings=settings))
    document.select(["switch-room"])
    assert panel.form.editor("slab_above").field.line.text().endswith(" ft")
    type_in(panel, "ceiling_level", "10ft6in")
    assert item(document, "switch-room").ceiling_level == pytest.approx(3.2004)


@pytest.mark.parametrize("path", SAMPLES, ids=lambda p: p.stem)
def test_every_item_has_its_form_and_each_field_its_tip(path, qtbot):
    document = Document(read(path))
    panel = ItemPanel(document)
    qtbot.addWidget(panel)
    panel.show()
    for held in document.layout.items():
        document.select([held.id])
        for name in panel.form.paths():
            assert panel.form.row(name).part.tip, name
    assert document.undo_stack.count() == 0


def test_a_removed_item_leaves_the_panel(document, panel):
    document.select(["switch-room"])
    document.edit("Remove", replace(document.layout, rooms=()))
    assert panel.title == "Layout"


def test_text_of_the_user_is_never_markup(document, panel):
    room = replace(item(document, "switch-room"), name="<b>x</b>")
    document.edit("Name", replace(document.layout, rooms=(room,)))
    document.select(["switch-room"])
    assert panel.title == "Room <b>x</b>"
    assert panel._title.textFormat() == Qt.TextFormat.PlainText


@pytest.mark.parametrize("unit", ["m", "mm", "ft", "in"])
def test_values_read_as_they_are_written(document, unit):
    settings = Settings(length_unit=unit)
    terms = Terms(replace(document.layout, settings=settings))
    circuit = document.layout.circuits[0].id
    for kind, value in [
        (Distances(3), (1.25, -0.35, 2.0)),
        (SolidShape(), Bar(width=0.1, thickness=0.0125, turn=90.0)),
        (SolidShape(), Round(diameter=0.028)),
        (CarriedCircuits(), (CircuitShare(circuit=circuit, share=0.5),)),
    ]:
        again = kind.read(kind.text(value, terms), terms)
        assert kind.text(again, terms) == kind.text(value, terms)


def test_unknown_circuits_are_refused_by_name(document):
    with pytest.raises(UserError, match="no circuit “F99”"):
        CarriedCircuits().read("F99", Terms(document.layout))


def test_a_form_of_an_empty_layout_is_editable(qtbot):
    document = Document(
        Layout(
            rooms=(
                Room(
                    id="r",
                    outline=((0, 0), (1, 0), (1, 1)),
                    floor_level=0,
                    ceiling_level=3,
                ),
            )
        )
    )
    panel = ItemPanel(document)
    qtbot.addWidget(panel)
    panel.show()
    document.select(["r"])
    type_in(panel, "name", "Plant room")
    assert document.layout.rooms[0].name == "Plant room"
    assert not any(isinstance(i, Run) for i in document.layout.items())


def test_an_origin_of_what_is_gone_is_refused(document, qtbot):
    room = document.layout.rooms[0]
    form = OriginForm(document, [(room.id, "outline")])
    qtbot.addWidget(form)
    document.edit("Delete", removed(document.layout, room.id))
    form.source.setEditText("Drawing 7")
    form.apply()
    assert "gone" in form.reason.text()
    assert document.undo_stack.count() == 1


def test_the_frequency_of_a_layout_is_that_of_new_circuits(document):
    (part,) = (p for p in layout_forms._UNITS if p.path == "frequency")
    assert part.label == "Frequency of new circuits"
    settings = document.layout.settings
    made = part.entered(document.layout, (settings,), 60.0)
    assert made.settings.frequency == 60.0
    assert made.circuits == document.layout.circuits
