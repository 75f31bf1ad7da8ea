"""Variants on the screen: the band, the list, and the table that hides nothing."""

from __future__ import annotations

from pathlib import Path

import pytest
from msgspec import structs
from PySide6.QtCore import Qt

from app.document import Document
from app.messages import Messages
from app.pages.variants_page import VariantsPage
from app.panels.readout import ReadoutLine
from app.variant_acts import move_to_base, rename, with_shown
from app.variant_band import VariantBand
from app.variant_words import change_text, is_raised, percent, table_cells
from app.view_state import ViewState
from engine import layout_file
from engine.edits import removed, replaced
from engine.errors import UserError
from engine.variant_comparison import Cell
from engine.variants import layout_of

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "imaging-corridor.json"


@pytest.fixture
def document(qapp):
    return Document(layout_file.read(SAMPLE))


@pytest.fixture
def page(qtbot, document):
    made = VariantsPage(document, ViewState(), Messages())
    qtbot.addWidget(made)
    made.resize(1000, 700)
    made.show()
    yield made
    made.close_worker()


def wait(qtbot, page):
    def answered():
        assert page.is_idle
        assert page.answer is not None
        assert page.answer.request.whole is page._document.whole
        assert page.answer.request.held is page._held

    qtbot.waitUntil(answered, timeout=60_000)


def test_removing_the_second_bond_stands_out_where_it_raises_the_bed(qtbot, page):
    wait(qtbot, page)
    assert page.raised.text() == (
        "“Second bond removed” raises Stress-test bed (zone) by 9.9 % and Stress-test "
        "bed (receptor) by 14 %; it lowers 8 other places."
    )
    receptors = [row for row in page.answer.table.rows if not row.is_zone]
    raised = [row.place for row in receptors if is_raised(row.cells[1])]
    assert raised == ["stress-test-bed"]
    lower = [row.cells[1].change for row in receptors if row.place not in raised]
    assert set(lower) == {"lower"}
    model = page.table.contents
    shown = {model.row_at(k).place: k for k in range(model.rowCount())}
    cell = model.index(shown["stress-test-bed"], 2)
    assert model.data(cell) == "16.0 mG\nhigher, +14 %\nabove"
    tip = model.data(cell, Qt.ItemDataRole.ToolTipRole)
    assert "worst counted load case As logged" in tip


def test_places_stay_in_sight_when_the_table_is_scrolled(qtbot, page):
    wait(qtbot, page)
    table, places = page.table, page.table._places
    assert table.horizontalScrollBar().maximum() > 0
    table.setCurrentIndex(table.model().index(7, table.model().columnCount() - 1))
    bar = table.horizontalScrollBar()
    bar.setValue(bar.maximum())
    assert places.isVisible()
    assert places.columnViewportPosition(0) == 0
    assert places.width() == table.columnWidth(0)
    # Row by row beside the values, whatever has been scrolled.
    for k in range(table.model().rowCount()):
        assert places.rowViewportPosition(k) == table.rowViewportPosition(k)
    # A cell that is chosen does not hide behind them.
    table.setCurrentIndex(table.model().index(0, 1))
    left = table.visualRect(table.currentIndex()).left()
    assert left >= table.columnWidth(0)


def test_an_edit_of_a_variant_computes_its_column_anew_and_no_other(qtbot, page):
    wait(qtbot, page)
    before = page.answer.table.columns
    document = page._document
    document.choose("bond-removed")
    bed = next(r for r in document.layout.receptors if r.id == "stress-test-bed")
    x, y, z = bed.at
    moved = structs.replace(bed, at=(x, y, z + 0.2))
    document.edit("Move the bed", replaced(document.layout, moved))
    wait(qtbot, page)
    kept = [
        a.assessment is b.assessment
        for a, b in zip(before, page.answer.table.columns, strict=True)
    ]
    assert kept == [True, False, True, True, True]
    row = next(r for r in page.answer.table.rows if r.place == "stress-test-bed")
    assert row.cells[1].place_differs


def test_held_values_stand_beside_the_new_ones(qtbot, page):
    wait(qtbot, page)
    document = page._document
    page.hold(True)
    document.choose("bond-removed")
    circuit = next(c for c in document.layout.circuits if c.id == "R3")
    document.edit("Rest R3", removed(document.layout, circuit.id))
    wait(qtbot, page)
    values = [
        page.table.contents.data(page.table.contents.index(0, k)).splitlines()[0]
        for k in (1, 2)
    ]
    assert values[0] == "694 mG"
    assert values[1].endswith(" mG, was 636")
    assert not values[1].startswith("636")
    page.hold(False)
    wait(qtbot, page)
    text = page.table.contents.data(page.table.contents.index(0, 1))
    assert text.splitlines()[0] == "694 mG"


def test_the_table_is_written_whole(qtbot, page, tmp_path):
    wait(qtbot, page)
    for ending in (".png", ".svg", ".csv"):
        page.write(tmp_path / f"t{ending}")
        assert (tmp_path / f"t{ending}").stat().st_size > 1000
    cells = table_cells(page.answer)
    assert len(cells) == 11
    assert {len(row) for row in cells} == {3 + 5 * 5}


def test_the_list_chooses_adds_renames_and_removes(qtbot, page, document):
    page.list.list.setCurrentRow(2)
    assert document.variant.name == "Neutral of R3 beside its lines"
    page.list._new()
    assert document.variant.name == "Variant 5"
    page.list.list.currentItem().setText("Lower bed")
    assert document.variant.name == "Lower bed"
    page.list._copy()
    assert document.variant.name == "Lower bed, copy"
    page.list._remove()
    assert document.variant is None
    assert [v.name for v in document.whole.variants][-1] == "Lower bed"
    for _ in range(4):
        document.undo_stack.undo()
    assert document.whole == layout_file.read(SAMPLE)


def test_a_name_is_needed_and_is_not_taken(document):
    with pytest.raises(UserError, match="needs a name"):
        rename(document, "both", "  ")
    with pytest.raises(UserError, match="already"):
        rename(document, "both", "Second bond removed")


def test_a_change_is_moved_to_the_base_from_the_list(page, document):
    document.choose("bond-removed")
    shown = document.layout.circuits
    page.list._move_one()
    assert document.whole.circuits == shown
    assert layout_of(document.whole, "bond-removed").circuits == shown
    assert page.list.changes.count() == 0
    document.undo_stack.undo()
    assert document.whole == layout_file.read(SAMPLE)


def test_the_band_names_the_variant_and_leads_back(qtbot, document):
    band = VariantBand(document, Messages())
    qtbot.addWidget(band)
    assert band.isHidden()
    document.choose("both")
    assert not band.isHidden()
    assert "“Bond removed and neutral returned” · changes 2 items" in band.text.text()
    assert not band.this.isEnabled()
    document.select(["R3-neutral"])
    assert band.this.isEnabled()
    band.this.click()
    assert len(document.variant.replaced.runs) == 0
    assert len(document.variant.replaced.circuits) == 1
    band.back.click()
    assert document.variant is None
    assert band.isHidden()


def test_nothing_selected_has_no_change_to_move(document):
    with pytest.raises(UserError, match="does not change what is selected"):
        move_to_base(document, "both", ["stress-test-bed"])


def test_captions_name_what_is_shown(document):
    assert with_shown(document, "Map") == "Map · base"
    document.choose("both")
    assert (
        with_shown(document, "Map") == "Map · variant Bond removed and neutral returned"
    )
    document.open(structs.replace(document.whole, variants=()), None)
    assert with_shown(document, "Map") == "Map"


def test_a_higher_ratio_is_told_where_the_value_falls():
    cell = Cell(value=1e-6, change="lower", relative=-0.027, ratio_change="higher")
    assert is_raised(cell)
    assert change_text(cell) == "ratio higher"


@pytest.mark.parametrize(
    ("part", "text"),
    [(0.1372, "+14 %"), (-0.0249, "−2.5 %"), (0.0988, "+9.9 %"), (1.5, "+150 %")],
)
def test_changes_have_two_figures(part, text):
    assert percent(part) == text


def test_the_field_at_the_pointer_keeps_what_it_was(qtbot, document):
    line = ReadoutLine(document, ViewState())
    qtbot.addWidget(line)
    found = []
    line.shown.connect(found.append)
    line.hold(True)
    line.show_at(4.0, 4.4, 0.8)
    qtbot.waitUntil(lambda: len(found) == 1, timeout=60_000)
    assert found[0].was is None
    document.choose("bond-removed")
    qtbot.waitUntil(lambda: len(found) == 2, timeout=60_000)
    assert found[1].was == found[0].resultant
    assert f", was {line.text().split(', was ')[1][:4]}" == ", was 14.1"
    line.hold(False)
    qtbot.waitUntil(lambda: len(found) == 3, timeout=60_000)
    assert found[2].was is None
    line.close_worker()
