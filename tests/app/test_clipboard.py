"""Copy and paste between layouts: new ids, references kept, nothing overwritten."""

from __future__ import annotations

import pytest
from msgspec.structs import replace
from pytestqt.qtbot import QtBot

from app import clipboard
from app.clipboard import copied_text, pasted
from app.document import Document
from engine.circuits import BalancedCurrent
from engine.criteria import ReferenceLevel
from engine.edits import added, replaced
from engine.errors import UserError
from engine.faults import faults
from engine.layout import Layout
from engine.starters import transformer_link_board

CHAIN = ("transformer-1", "board-1", "busbar-1")


def test_pasted_in_an_empty_layout_it_is_whole() -> None:
    """What the items depend on comes along, and the currents close."""
    layout = transformer_link_board()
    after, names = pasted(Layout(), copied_text(layout, CHAIN))
    assert set(names) == set(CHAIN)
    assert after.circuits == layout.circuits
    assert after.runs == layout.runs
    assert faults(after, after.cases[0]) == ()


def test_pasted_again_it_has_new_ids_that_name_each_other() -> None:
    layout = transformer_link_board()
    after, names = pasted(layout, copied_text(layout, CHAIN), (0.0, 9.0))
    assert not set(names) & set(CHAIN)
    run = after.runs[1]
    assert {run.start.equipment, run.end.equipment} < set(names)
    assert run.section.circuits[0].circuit == "circuit-1"
    assert len(after.circuits) == 1
    assert run.route[0] == (1.5, 12.0, 2.0)
    assert faults(after, after.cases[0]) == ()


def test_another_circuit_of_the_same_id_is_left_alone() -> None:
    layout = transformer_link_board()
    other = replaced(
        layout,
        replace(layout.circuits[0], demand=BalancedCurrent(rms=1.0)),
    )
    after, names = pasted(other, copied_text(layout, ("busbar-1",)))
    assert after.circuits[0] == other.circuits[0]
    assert after.circuits[1].demand == layout.circuits[0].demand
    run = after.by_id()[names[0]]
    assert run.section.circuits[0].circuit == after.circuits[1].id


def test_a_run_copied_without_its_equipment_is_free() -> None:
    layout = transformer_link_board()
    after, (name,) = pasted(Layout(), copied_text(layout, ("busbar-1",)))
    assert after.by_id()[name].start is None


def test_an_invented_level_loses_its_source_elsewhere() -> None:
    level = ReferenceLevel(id="a", name="Example A (invented)", source="A sample")
    text = copied_text(Layout(levels=(level,)), ("a",))
    after, _ = pasted(Layout(), text)
    assert after.levels[0].source == ""
    own = replace(level, name="Client target")
    after, _ = pasted(Layout(), copied_text(Layout(levels=(own,)), ("a",)))
    assert after.levels[0].source == "A sample"


@pytest.mark.parametrize(
    "text", ["", "hello", "{}", '{"lodestead items": 1, "chosen": []}', "[1, 2]"]
)
def test_other_text_is_refused_with_a_sentence(text: str) -> None:
    with pytest.raises(UserError, match=r"holds no items .*\.$"):
        pasted(Layout(), text)


def test_a_damaged_item_is_named() -> None:
    layout = transformer_link_board()
    text = copied_text(layout, ("busbar-1",)).replace('"busbar"', '"balloon"')
    with pytest.raises(UserError, match="balloon"):
        pasted(Layout(), text)


def test_nothing_selected_is_nothing_to_copy() -> None:
    with pytest.raises(UserError, match="Nothing is selected"):
        copied_text(Layout(), ())
    with pytest.raises(UserError, match="Nothing is selected"):
        copied_text(Layout(), ("title", "settings"))


def test_from_one_window_to_another(qtbot: QtBot) -> None:
    here, there = Document(transformer_link_board()), Document()
    here.select(["office", "office-zone"])
    clipboard.copy(here)
    assert clipboard.has_items()
    clipboard.paste(there)
    assert there.undo_stack.undoText() == "Paste 2 items"
    assert there.selection == {"office", "office-zone"}
    assert there.layout.rooms[0].outline == here.layout.rooms[1].outline
    assert there.layout.rooms[0].storey == there.layout.storeys[0].id
    clipboard.paste(here)
    x, y = here.layout.rooms[1].outline[0]
    assert here.layout.rooms[-1].outline[0] == (x + 0.5, y - 0.5)
    here.undo_stack.undo()
    assert here.layout == transformer_link_board()


def test_an_empty_clipboard_says_so(qtbot: QtBot) -> None:
    from PySide6.QtGui import QGuiApplication

    QGuiApplication.clipboard().clear()
    with pytest.raises(UserError, match="clipboard holds no items"):
        clipboard.paste(Document())


def test_copies_of_a_taken_name_are_numbered() -> None:
    layout = transformer_link_board()
    layout = added(layout, replace(layout.rooms[0], id="office-2"))
    _, names = pasted(layout, copied_text(layout, ("office",)))
    assert names == ("office-3",)
