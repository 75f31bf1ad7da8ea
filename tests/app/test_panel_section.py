"""The Section view: what is seen, what buttons and drags do, and the net current."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from app.document import Document
from app.panels.phasor_drawing import ring_value
from app.panels.section import SectionPanel
from app.panels.section_painter import STRONG, bar_text, place_text
from app.theme import BODY
from app.view_state import ViewState
from engine.circuits import CircuitFactor, LoadCase
from engine.edits import added, replaced
from engine.formations import FORMATIONS, as_free
from engine.items import ValueOrigin
from engine.layout_file import read
from engine.runs import FreeSection, Joint, ParallelSets, Round, SlotEnd
from engine.sections import slots

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"


@pytest.fixture
def document() -> Document:
    return Document(read(SAMPLE))


@pytest.fixture
def view_state() -> ViewState:
    return ViewState()


@pytest.fixture
def panel(document, view_state, qtbot) -> SectionPanel:
    panel = SectionPanel(document, view_state)
    qtbot.addWidget(panel)
    panel.resize(1100, 720)
    panel.show()
    document.select(["riser"])
    qtbot.waitUntil(lambda: panel.canvas.width() > 300)
    panel.canvas.fit()
    return panel


def section(document: Document):
    return document.layout.by_id()["riser"].section


def at(panel: SectionPanel, name: str) -> QPoint:
    slot = next(s for s in slots(panel.run.section) if s.name == name)
    return panel.canvas.to_pixels(slot.u, slot.v).toPoint()


def drag(panel: SectionPanel, name: str, by: QPoint, *, drop: bool = True) -> None:
    canvas, start = panel.canvas, at(panel, name)
    QTest.mousePress(canvas, Qt.MouseButton.LeftButton, pos=start)
    QTest.mouseMove(canvas, start + by / 2)
    QTest.mouseMove(canvas, start + by)
    if drop:
        QTest.mouseRelease(canvas, Qt.MouseButton.LeftButton, pos=start + by)


def test_the_direction_and_the_order_are_stated(document, panel):
    assert panel._direction.text() == (
        "looking from Main distribution board to Riser top, "
        "left to right: L1 L2 L3 N L1 L2 L3 N"
    )


def test_the_other_end_turns_the_view_and_not_the_data(document, panel, qtbot):
    before = at(panel, "L1.1")
    layout = document.layout
    with qtbot.waitSignal(panel.turned, check_params_cb=lambda r, on: on):
        panel._other_end.click()
    assert (
        "looking from Riser top to Main distribution board" in panel._direction.text()
    )
    assert panel._direction.text().endswith("N L3 L2 L1 N L3 L2 L1")
    after = at(panel, "L1.1")
    assert after.x() > panel.canvas.width() / 2 > before.x()
    assert document.layout is layout
    assert document.undo_stack.count() == 0


@pytest.mark.parametrize("turned", [False, True])
def test_a_dragged_conductor_is_caught_and_frees_the_section(document, panel, turned):
    panel._other_end.setChecked(turned)
    start = next(s for s in slots(section(document)) if s.name == "L2.1")
    assert isinstance(section(document), ParallelSets)
    drag(panel, "L2.1", QPoint(37, -61))
    moved = next(s for s in slots(section(document)) if s.name == "L2.1")
    assert isinstance(section(document), FreeSection)
    scale = panel.canvas._scale
    sign = -1 if turned else 1
    assert moved.u - start.u == pytest.approx(sign * 37 / scale, abs=0.0036)
    assert moved.v - start.v == pytest.approx(61 / scale, abs=0.0036)
    assert moved.u * 200 == pytest.approx(round(moved.u * 200), abs=1e-9)
    assert moved.v * 200 == pytest.approx(round(moved.v * 200), abs=1e-9)
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText().startswith("Move L2.1 in the section of F1")
    document.undo_stack.undo()
    assert isinstance(section(document), ParallelSets)


def test_in_a_layout_in_feet_sections_are_measured_in_inches(document, panel, qtbot):
    assert panel._catch.text() == "Catch on 5 mm"
    settings = replace(document.layout.settings, length_unit="ft")
    document.edit("Change the unit", replace(document.layout, settings=settings))
    assert panel._catch.text() == "Catch on 1/4 in"
    assert "1/4 in" in panel.canvas.toolTip()
    assert STRONG["in"] / panel.canvas.grid == pytest.approx(4)
    slot = slots(panel.run.section)[0]
    panel.canvas.choose(frozenset({slot.name}))
    with qtbot.waitSignal(panel.canvas.nudged) as nudged:
        QTest.keyClick(panel.canvas, Qt.Key.Key_Up)
    assert nudged.args == pytest.approx([0.0, 0.0254 / 4])
    moved = replace(slot, u=-0.0381, v=0.00635)
    assert place_text(moved, "in") == "u −1.5  v 0.25 in"
    assert place_text(moved, "mm") == "u −38.1  v 6.35 mm"
    assert (bar_text(0.25, "in"), bar_text(2000, "mm")) == ("0.25 in", "2 m")


def test_escape_gives_a_drag_up(document, panel):
    before = document.layout
    drag(panel, "L2.1", QPoint(40, 40), drop=False)
    assert document.is_previewing
    QTest.keyClick(panel.canvas, Qt.Key.Key_Escape)
    assert document.layout == before
    assert not document.is_previewing
    assert document.undo_stack.count() == 0


def test_arrow_keys_move_as_one_sees_it(document, panel):
    panel._other_end.setChecked(True)
    panel.canvas.choose(frozenset({"N.2"}))
    before = next(s for s in slots(section(document)) if s.name == "N.2")
    QTest.keyClick(panel.canvas, Qt.Key.Key_Right)
    after = next(s for s in slots(section(document)) if s.name == "N.2")
    assert after.u == pytest.approx(before.u - 0.005)


def test_conductors_are_chosen_by_keyboard_as_they_are_seen(panel):
    QTest.keyClick(panel.canvas, Qt.Key.Key_Right)
    assert panel.canvas.names == {"L1.1"}
    control = Qt.KeyboardModifier.ControlModifier
    QTest.keyClick(panel.canvas, Qt.Key.Key_Right, control)
    assert panel.canvas.names == {"L2.1"}
    both = control | Qt.KeyboardModifier.ShiftModifier
    QTest.keyClick(panel.canvas, Qt.Key.Key_Right, both)
    assert panel.canvas.names == {"L2.1", "L3.1"}


def test_the_view_fits_the_smallest_drawing(panel):
    assert panel.minimumSizeHint().width() <= 560
    assert panel.minimumSizeHint().height() <= 360


def test_a_hint_goes_when_a_run_is_cut(panel):
    assert panel.reason.isHidden()


def test_two_chosen_conductors_swap(document, panel):
    QTest.mouseClick(panel.canvas, Qt.MouseButton.LeftButton, pos=at(panel, "L1.1"))
    assert not panel.acts.buttons["swap"].isEnabled()
    shift = Qt.KeyboardModifier.ShiftModifier
    QTest.mouseClick(panel.canvas, Qt.MouseButton.LeftButton, shift, at(panel, "L3.1"))
    assert panel.canvas.names == {"L1.1", "L3.1"}
    panel.acts.buttons["swap"].click()
    assert section(document).orders[0] == ("L3", "L2", "L1", "N")
    assert document.undo_stack.undoText() == (
        f"Swap L1.1 and L3.1 in {panel.run.title}"
    )


def test_a_mirrored_order_keeps_its_joints(document, panel):
    ends = {(e.item, e.slot) for j in document.layout.joints for e in j.ends}
    panel.acts.buttons["left-right"].click()
    assert section(document).orders == (("N", "L3", "L2", "L1"),) * 2
    after = {(e.item, e.slot) for j in document.layout.joints for e in j.ends}
    assert after == ends


def test_what_changes_nothing_says_so(document, panel):
    panel.acts.buttons["top-bottom"].click()
    assert panel.reason.text().startswith("Nothing changes")
    assert document.undo_stack.count() == 0


def test_sets_come_and_go(document, panel):
    panel.acts.buttons["more"].click()
    assert len(section(document).orders) == 3
    panel.acts.buttons["fewer"].click()
    panel.acts.buttons["fewer"].click()
    assert len(section(document).orders) == 1
    assert not panel.acts.buttons["fewer"].isEnabled()


@pytest.mark.parametrize("formation", FORMATIONS)
def test_every_formation_can_be_chosen_and_has_a_form(document, panel, formation):
    box = panel.form.editor("section.formation").box
    box.activated.emit(FORMATIONS.index(formation))
    if formation != "parallel sets":
        assert document.undo_stack.undoText() == (
            f"Set the formation of {panel.run.title} to {formation}"
        )
    assert len(panel.form.paths()) >= 1
    names = frozenset(slot.name for slot in slots(panel.run.section))
    panel.canvas.choose(names)
    assert "slot.u" in panel.form.paths()
    document.undo_stack.undo()
    assert isinstance(section(document), ParallelSets)


def test_dimensions_are_typed_in_millimetres(document, panel):
    line = panel.form.editor("section.pitch").field.line
    line.setFocus()
    line.selectAll()
    QTest.keyClicks(line, "75")
    QTest.keyClick(line, Qt.Key.Key_Return)
    assert section(document).pitch == 0.075
    assert isinstance(section(document), ParallelSets)


def test_what_a_formation_cannot_take_is_refused_beside_the_field(document, panel):
    line = panel.form.editor("section.pitch").field.line
    line.setFocus()
    line.selectAll()
    QTest.keyClicks(line, "0")
    QTest.keyClick(line, Qt.Key.Key_Return)
    assert "greater than 0" in panel.form.editor("section.pitch").field.reason.text()
    box = panel.form.editor("section.orders.0").field.line
    box.setFocus()
    box.selectAll()
    before = document.layout
    panel.form.editor("section.formation").box.activated.emit(FORMATIONS.index("free"))
    assert document.layout is not before


def test_the_shape_of_one_conductor_frees_the_section(document, panel):
    panel.canvas.choose(frozenset({"N.1"}))
    panel.form.editor("slot.shape").box.activated.emit(1)
    kinds = {s.name: type(s.shape).__name__ for s in slots(section(document))}
    assert kinds["N.1"] == "Bar"
    assert kinds["N.2"] == "Round"


def test_a_conductor_takes_another_circuit_and_label(document, panel):
    panel.canvas.choose(frozenset({"N.1"}))
    model = panel.form.editor("slot.loads").table.model
    other = document.layout.circuits[1]
    assert model.setData(model.index(0, 0), other.title)
    (load,) = next(s for s in slots(section(document)) if s.name == "N.1").loads
    assert load.circuit == other.id


def test_the_net_current_follows_the_load_case(document, panel, view_state):
    assert "30.8 A RMS in all" in panel.net_current.net.text()
    circuit = document.layout.by_id()["riser"].section.circuits[0].circuit
    case = LoadCase(
        id="half", factors=(CircuitFactor(circuit=circuit, factor=0.5),), others="off"
    )
    cases = (*document.layout.load_cases, case)
    document.edit("Add a case", replace(document.layout, load_cases=cases))
    view_state.set(case="half")
    assert "half" in panel.net_current.net.text()
    assert "30.8 A" not in panel.net_current.net.text()


def test_a_removed_line_shows_in_the_net_current(document, panel):
    panel.canvas.choose(frozenset({"L1.1", "L1.2"}))
    panel.acts.buttons["remove"].click()
    assert "L1" not in {s.name.partition(".")[0] for s in slots(section(document))}
    net = panel.net_current._currents[0].net
    assert abs(net) > 500


def test_without_a_run_the_view_says_what_to_do(qtbot, document, view_state):
    panel = SectionPanel(document, view_state)
    qtbot.addWidget(panel)
    panel.show()
    assert panel.reason.text().startswith("Select one run")


def test_a_removed_run_leaves_the_view(document, panel):
    document.edit("Remove", replace(document.layout, runs=(), joints=()))
    assert panel.run is None
    assert panel.reason.text().startswith("Select one run")


def test_escape_leads_back_to_the_drawing(panel, qtbot):
    with qtbot.waitSignal(panel.closed):
        QTest.keyClick(panel, Qt.Key.Key_Escape)


def test_clicks_beside_the_conductors_choose_nothing(panel):
    panel.canvas.choose(frozenset({"L1.1"}))
    QTest.mouseClick(panel.canvas, Qt.MouseButton.LeftButton, pos=QPoint(3, 3))
    assert panel.canvas.names == frozenset()


def test_the_ring_of_the_phasors_is_a_round_value():
    assert [ring_value(x) for x in (575.0, 1.0, 0.19)] == pytest.approx(
        [500.0, 1.0, 0.1]
    )


def test_bars_are_caught_by_the_pointer_in_their_own_shape(document, panel):
    document.select(["link-L1"])
    canvas = panel.canvas
    slot = slots(panel.run.section)[0]
    tip = canvas.to_pixels(slot.u, slot.v + 0.05)
    beside = canvas.to_pixels(slot.u - 0.03, slot.v + 0.05)
    assert canvas.slot_at(tip) == slot.name
    assert canvas.slot_at(beside) == ""
    assert not isinstance(slot.shape, Round)


def test_a_dragged_conductor_leaves_the_other_origins(document, panel):
    run = document.layout.by_id()["riser"]
    held = ("route", "section.circuits", "section.shape", "section.width")
    origins = tuple(ValueOrigin(field=f, kind="confirmed", by="A. P.") for f in held)
    layout = replaced(document.layout, replace(run, origins=origins))
    document.edit("Confirm values", layout)
    drag(panel, slots(run.section)[0].name, QPoint(60, 0))
    kept = {origin.field for origin in document.layout.by_id()["riser"].origins}
    assert "route" in kept
    assert any(field.startswith("section.slots.0.shape") for field in kept)


def test_a_renamed_conductor_stays_in_its_joints(document, panel):
    run = document.layout.by_id()["riser"]
    free = as_free(run.section)
    one = free.slots[0].name
    ends = tuple(SlotEnd(item="riser", slot=s.name, end="end") for s in free.slots[:2])
    joint = Joint(id="tie", ends=ends)
    layout = replaced(document.layout, replace(run, section=free))
    document.edit("Join", added(layout, joint))
    panel.canvas.choose(frozenset({one}))
    panel.refresh()
    line = panel.form.editor("slot.name").field.line
    line.setText("first")
    line.editingFinished.emit()
    joints = {joint.id: joint for joint in document.layout.joints}
    assert joints["tie"].ends[0].slot == "first"


def test_names_of_phasors_stand_apart(panel, document, qtbot):
    # One conductor alone: its phasor is the net current too.
    document.select(["link-L1"])
    qtbot.waitUntil(lambda: panel.run.id == "link-L1")
    drawing = panel.net_current.phasors
    drawing.grab()
    boxes = drawing._taken
    assert len(boxes) == 3
    for k, box in enumerate(boxes):
        assert not any(box.intersects(other) for other in boxes[:k])


def test_a_small_section_cuts_no_button_and_no_title(panel):
    panel.resize(570, 420)
    QTest.qWait(1)
    for button in panel.acts.buttons.values():
        assert button.width() >= button.sizeHint().width()
    assert panel._title.width() >= panel._title.sizeHint().width()
    words = panel.net_current.net
    assert words.width() >= 16 * BODY
