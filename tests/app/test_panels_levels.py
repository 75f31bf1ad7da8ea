"""Reference levels panel: what is missing, values in units, forms, places, library."""

from __future__ import annotations

import math
from html import unescape

import pytest
from PySide6.QtCore import Qt

from app.document import Document
from app.library import Library
from app.messages import Messages
from app.panels import level_values as values_of
from app.panels.levels import LevelsPanel
from engine.criteria import (
    LevelPoint,
    LevelRange,
    LevelRanges,
    LevelTable,
    ReferenceLevel,
)
from engine.edits import replaced
from engine.errors import UserError
from engine.layout import Layout, Settings
from engine.levels import level_at, what_is_missing
from engine.places import Zone

SQUARE = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))
ZONE = Zone(id="office", name="Office", outline=SQUARE, category="workers")


@pytest.fixture
def document():
    return Document(Layout(zones=(ZONE,)))


@pytest.fixture
def told():
    return []


@pytest.fixture
def panel(qtbot, document, told, tmp_path):
    messages = Messages()
    messages.told.connect(lambda kind, sentence: told.append((kind, sentence)))
    made = LevelsPanel(document, messages, Library(tmp_path / "library.json"))
    qtbot.addWidget(made)
    made.resize(360, 900)
    made.show()
    return made


def level(document):
    return document.layout.levels[0]


def entered(field, text, qtbot):
    field.line.setText(text)
    qtbot.keyClick(field.line, Qt.Key.Key_Return)


def typed(table, row, column, text):
    return table.model.setData(table.model.index(row, column), text)


def test_nothing_is_shipped_and_nothing_prefilled(panel, document):
    assert document.layout.levels == ()
    assert "source" in panel.empty.text()
    panel.add()
    assert level(document) == ReferenceLevel(id="level-1", name="Reference level 1")


def test_it_says_what_is_missing_until_nothing_is(panel, document, qtbot):
    panel.add()
    assert "no source" in panel.missing.text()
    assert "no category" in panel.missing.text()
    assert "no values" in panel.missing.text()
    entered(panel.source, "Contract, clause 7", qtbot)
    panel.category._on_activated(3)
    panel.values._on_add()
    for column, text in enumerate(("25", "400", "7.5")):
        typed(panel.values.ranges, 0, column, text)
    assert what_is_missing(level(document)) == ()
    assert not panel.missing.isVisible()
    assert level(document).category == "workers"
    assert level_at(level(document), 50.0) == pytest.approx(7.5e-6)


def test_a_row_counts_once_it_is_complete(panel, document):
    panel.add()
    steps = document.undo_stack.count()
    panel.values._on_add()
    typed(panel.values.ranges, 0, 0, "25")
    assert level(document).values is None
    assert document.undo_stack.count() == steps
    assert "once nothing in it is missing" in panel.values.note.text()
    typed(panel.values.ranges, 0, 1, "400 Hz")
    typed(panel.values.ranges, 0, 2, "200")
    assert document.undo_stack.count() == steps + 1
    assert level(document).values.ranges[0].coefficient == pytest.approx(2e-4)


def test_values_follow_the_unit_and_stay_what_they_are(panel, document, qtbot):
    settings = Settings(flux_density_unit="mG")
    document.edit("Use mG", replaced(document.layout, settings))
    panel.add()
    panel.values.kind._on_activated(1)
    panel.values._on_add()
    typed(panel.values.points, 0, 0, "50")
    typed(panel.values.points, 0, 1, "20")
    before = level(document).values
    assert before.points[0].level == pytest.approx(2e-6)
    panel.values.unit._on_activated(0)
    assert panel.values.points.model.index(0, 1).data() == "2"
    assert level(document).values == before
    typed(panel.values.points, 0, 1, "0.2 mT")
    assert level(document).values.points[0].level == pytest.approx(2e-4)


def test_a_range_reads_as_its_formula_in_print():
    # c · f^(−n) with c = 5000 µT·Hz and n = 1 is 100 µT at 50 Hz.
    row = values_of.RangeRow(50.0, 500.0)
    row = values_of.with_coefficient("µT")(row, "5000", ".")
    row = values_of.with_exponent(row, "1", ".")
    named = ReferenceLevel(id="a", values=LevelRanges(ranges=(row.value,)))
    assert level_at(named, 50.0) == pytest.approx(1e-4)
    assert values_of.range_gives(row, "µT", ".") == "100 → 10.0"
    assert values_of.range_gives(values_of.RangeRow(1.0), "µT", ".") == "incomplete"


RANGES = LevelRanges(
    ranges=(
        LevelRange(f_from=0, f_to=0, coefficient=0.4),
        LevelRange(f_from=25, f_to=74, coefficient=3.87e-5),
        LevelRange(f_from=74, f_to=2000, coefficient=2.8638e-3, exponent=1),
    )
)


def test_another_form_is_the_same_function():
    table = values_of.as_table(RANGES)
    again = values_of.as_ranges(table)
    for f in (0.0, 25.0, 40.0, 74.0, 100.0, 999.0, 2000.0):
        expected = level_at(ReferenceLevel(id="a", values=RANGES), f)
        for values in (table, again):
            found = level_at(ReferenceLevel(id="a", values=values), f)
            assert math.isclose(found, expected, rel_tol=1e-9)


def test_a_gap_is_not_bridged():
    apart = LevelRanges(
        ranges=(
            LevelRange(f_from=25, f_to=50, coefficient=1e-5),
            LevelRange(f_from=100, f_to=200, coefficient=1e-5),
        )
    )
    with pytest.raises(UserError, match="do not join"):
        values_of.as_table(apart)


def test_a_table_is_pasted_as_one_step(panel, document):
    panel.add()
    panel.values.kind._on_activated(1)
    steps = document.undo_stack.count()
    panel.values.points.paste("50\t7,5\n150\t2,5")
    assert level(document).values == LevelTable(
        points=(
            LevelPoint(frequency=50.0, level=pytest.approx(7.5e-6)),
            LevelPoint(frequency=150.0, level=pytest.approx(2.5e-6)),
        )
    )
    assert document.undo_stack.count() == steps + 1
    assert panel.values.plot.isVisible()


def test_refused_values_change_nothing(panel, document):
    panel.add()
    panel.values._on_add()
    assert not typed(panel.values.ranges, 0, 2, "-3")
    assert "more than 0" in panel.values.ranges.reason.text()
    assert not typed(panel.values.ranges, 0, 0, "often")
    assert level(document).values is None


def test_a_level_is_assigned_and_removed_with_its_uses(panel, document):
    panel.add()
    item = panel.uses.list.item(0)
    rows = panel.uses.list
    height = rows.visualItemRect(item).height()
    assert height >= rows.fontMetrics().height() + 4
    assert rows.viewport().height() >= min(rows.count(), 8) * height
    assert item.text() in unescape(item.toolTip())
    item.setCheckState(Qt.CheckState.Checked)
    assert document.layout.zones[0].levels == ("level-1",)
    assert "Compare Office with" in document.undo_stack.undoText()
    panel.remove()
    assert document.layout.levels == ()
    assert document.layout.zones[0].levels == ()
    document.undo_stack.undo()
    assert document.layout.zones[0].levels == ("level-1",)


def test_direct_current_is_said_where_the_plot_cannot_show_it(qtbot):
    named = ReferenceLevel(id="a", values=RANGES)
    panel = LevelsPanel(Document(Layout(levels=(named,))))
    qtbot.addWidget(panel)
    panel.show()
    assert "At 0 Hz" in panel.values.note.text()
    assert len(panel.values.plot.getPlotItem().listDataItems()) == 2


def test_the_library_keeps_a_level_for_the_next_project(panel, document, told, qtbot):
    panel.add()
    entered(panel.name, "Target (invented)", qtbot)
    entered(panel.source, "Made up", qtbot)
    panel.library.keep()
    assert "source was left out" in told[-1][1]
    panel.library.fill()
    texts = [action.text() for action in panel.library.library_menu.actions()]
    assert "Add Target (invented)" in texts
    panel.library.library_menu.actions()[texts.index("Add Target (invented)")].trigger()
    assert len(document.layout.levels) == 2
    assert document.layout.levels[1].source == ""
    panel.library.forget("Target (invented)")
    assert panel.library._library.content().levels == ()


def test_libraries_are_exchanged_as_files(panel, told, tmp_path, qtbot):
    panel.add()
    panel.library.keep()
    panel.library.export_file(tmp_path / "mine.json")
    panel.library.forget("Reference level 1")
    panel.library.import_file(tmp_path / "mine.json")
    assert len(panel.library._library.content().levels) == 1
    (tmp_path / "bad.json").write_text("no")
    panel.library.import_file(tmp_path / "bad.json")
    assert told[-1][0] == "error"
