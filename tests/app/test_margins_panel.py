"""The margins at the foot, the readout and the height rail, driven as a user would."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import msgspec
import pytest
from PySide6.QtCore import QPoint, Qt
from pytestqt.qtbot import QtBot

from app.document import Document
from app.field_store import FieldStore
from app.height_curve import curve_heights, height_curve
from app.margin_values import (
    MarginRow,
    Margins,
    exact_margins,
    sampled_margins,
    seeds_of,
)
from app.panels import margin_words as words
from app.panels.margins import MarginsPanel
from app.panels.readout import ReadoutLine, readout_text
from app.readout_values import ReadoutRequest, readout
from app.view_state import Look, ViewState
from app.views.height_rail import HeightRail
from engine import field
from engine.conductors import conductors
from engine.currents import case_phasors, conductor_currents
from engine.edits import replaced
from engine.layout import Layout
from engine.layout_file import read
from engine.report.wording import CAUTIONS
from engine.results import NetCurrentEffect

SAMPLES = Path(__file__).parents[2] / "sample_layouts"
LEFT = Qt.MouseButton.LeftButton


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLES / "office-over-switch-room.json")


@pytest.fixture(scope="module")
def exact(layout: Layout) -> Margins:
    return exact_margins(layout)


@pytest.fixture
def panel(qtbot: QtBot, layout: Layout) -> MarginsPanel:
    made = MarginsPanel(Document(layout))
    qtbot.addWidget(made)
    made.resize(1200, 120)
    made.show()
    return made


def row(state: str, ratio: float, place: str = "a") -> MarginRow:
    return MarginRow(
        place, place, "l", "Target", "c", "Case", state, "", 1e-6, None, ratio
    )


def test_empty_layout_says_what_to_do_next(qtbot: QtBot, layout: Layout) -> None:
    document = Document(Layout())
    panel = MarginsPanel(document)
    qtbot.addWidget(panel)
    assert panel.empty.text() == "Draw a zone where people are"
    document.edit("Draw zones", msgspec.structs.replace(Layout(), zones=layout.zones))
    assert panel.empty.text() == "Enter a reference level and its source to see margins"
    assert panel.tile.isHidden()


def test_tile_shows_the_worst_comparison(panel: MarginsPanel, exact: Margins) -> None:
    panel.set_margins(exact)
    worst = max(exact.rows, key=lambda r: r.ratio or 0.0)
    assert panel.tile.row == worst
    assert panel.tile.title.whole.startswith(f"{worst.place_title} · ")
    assert panel.tile.state.whole == "above"
    assert "µT" in panel.tile.value.whole
    assert panel.tile.case.whole == worst.case_title
    assert panel.table.rows[0] == worst


def test_while_sampled_no_state_word_stands_anywhere(
    panel: MarginsPanel, layout: Layout, exact: Margins
) -> None:
    panel.set_margins(exact)
    order = [(r.place, r.level) for r in panel.table.rows]
    panel.set_margins(sampled_margins(layout, FieldStore(), seeds_of(exact)))
    assert panel.tile.value.whole.startswith("≈")
    assert panel.tile.state.whole == ""
    assert panel.tile.sign.isHidden()
    assert "above" not in panel.counts.text()
    assert "above" not in panel.tile.accessibleName()
    assert [(r.place, r.level) for r in panel.table.rows] == order


def test_sampled_margins_come_near_the_exact_ones(
    layout: Layout, exact: Margins
) -> None:
    sampled = sampled_margins(layout, FieldStore(), seeds_of(exact))
    for rough, true in zip(sampled.rows, exact.rows, strict=True):
        assert (rough.place, rough.level) == (true.place, true.level)
        assert rough.ratio == pytest.approx(true.ratio, rel=0.02)
        assert rough.value == pytest.approx(true.value, rel=0.02)
        assert rough.case == true.case


def test_click_on_the_tile_goes_to_the_place(
    qtbot: QtBot, panel: MarginsPanel, exact: Margins
) -> None:
    panel.set_margins(exact)
    worst = panel.tile.row
    assert worst is not None
    with qtbot.waitSignal(panel.go_to) as heard:
        qtbot.mouseClick(panel.tile, LEFT)
    assert heard.args == [worst]


def test_keyboard_reaches_the_place_too(
    qtbot: QtBot, panel: MarginsPanel, exact: Margins
) -> None:
    panel.set_margins(exact)
    with qtbot.waitSignal(panel.go_to):
        qtbot.keyClick(panel.tile, Qt.Key.Key_Space)


def test_counts_open_the_full_table_and_escape_closes_it(
    qtbot: QtBot, panel: MarginsPanel, exact: Margins
) -> None:
    panel.set_margins(exact)
    with qtbot.waitSignal(panel.opened):
        qtbot.mouseClick(panel.counts, LEFT)
    assert panel.is_open
    assert panel.table.model().rowCount() == len(exact.rows)
    qtbot.keyClick(panel, Qt.Key.Key_Escape)
    assert not panel.is_open


def test_row_of_the_table_goes_to_its_place(
    qtbot: QtBot, panel: MarginsPanel, exact: Margins
) -> None:
    panel.set_margins(exact)
    qtbot.mouseClick(panel.counts, LEFT)
    with qtbot.waitSignal(panel.go_to) as heard:
        panel.table.clicked.emit(panel.table.model().index(2, 1))
    assert heard.args == [panel.table.rows[2]]


def test_caution_line_stands_and_opens_every_caution(
    qtbot: QtBot, panel: MarginsPanel
) -> None:
    assert words.CAUTION_LINE in panel.caution.text()
    qtbot.mouseClick(panel.caution, LEFT)
    assert panel.is_open
    for caution in CAUTIONS:
        assert caution in panel.cautions.text.text()


def test_counts_name_each_state_once() -> None:
    rows = [row("above", 2), row("below", 0.1), row("below", 0.2)]
    rows.append(row("not evaluable", 0.0))
    assert words.counts_text(rows) == "1 above · 1 not evaluable · 2 below"


def test_not_evaluable_asks_for_more_than_below(layout: Layout) -> None:
    unknown = replace(row("not evaluable", 0.0, "b"), ratio=None, reason="No source.")
    margins = Margins(layout, (row("below", 0.9), unknown), False)
    assert margins.worst is unknown
    assert words.state_text(unknown) == "not evaluable: No source."
    assert words.sentence(unknown, Layout(), False).endswith("evaluable: No source")


def test_figures_show_the_side_of_the_level(layout: Layout) -> None:
    close = replace(
        row("below, U reaches", 0.99995), value=7.4996e-6, level_value=7.5e-6
    )
    assert words.value_text(close, layout, False) == "7.4996 µT"
    assert words.value_text(close, layout, True) == "≈7.5 µT"


def test_net_current_is_told_per_ampere(layout: Layout) -> None:
    circuit = layout.circuits[0]
    effect = NetCurrentEffect(circuit.id, ("N",), 1.5e-7)
    text = words.net_current_text(
        replace(row("below", 0.5), net_current=effect), layout
    )
    assert text == (
        f"1 A of net current in {circuit.title} alone would give 0.150 µT there"
    )


def test_open_board_beside_workers_adds_its_sentence(layout: Layout) -> None:
    assert not words.is_at_open_board(layout)
    zone = next(z for z in layout.zones if z.category == "workers")
    board = layout.enclosures[0]
    opened = msgspec.structs.replace(
        board, state="open for work", footprint=zone.outline
    )
    assert words.is_at_open_board(replaced(layout, opened))


def test_no_word_of_the_panel_is_a_verdict(panel: MarginsPanel, exact: Margins) -> None:
    panel.set_margins(exact)
    said = " ".join(
        [panel.tile.accessibleName(), panel.tile.toolTip(), panel.counts.text()]
    ).lower()
    for word in ("safe", "complian", "pass", "fail", "hot spot", "✓", "✗"):
        assert word not in said


@pytest.fixture
def view_state(qapp: object) -> ViewState:
    return ViewState()


@pytest.fixture
def line(qtbot: QtBot, layout: Layout, view_state: ViewState) -> Iterator[ReadoutLine]:
    made = ReadoutLine(Document(layout), view_state)
    qtbot.addWidget(made)
    yield made
    made.close_worker()


def test_readout_is_the_engine_s_value(layout: Layout) -> None:
    found = readout(ReadoutRequest(layout, Look(height=5.1), 3.0, 2.0))
    parts = conductors(layout)
    phasors = case_phasors(layout, layout.cases[0])
    b = field.flux_density(parts, conductor_currents(phasors, parts), [[3.0, 2.0, 5.1]])
    whole = field.combined(b, phasors.components)
    assert whole.total_ac is not None
    assert found.resultant == pytest.approx(whole.total_ac[0], rel=1e-12)
    assert found.components is not None
    squares = sum(c * c for c in found.components)
    assert squares**0.5 == pytest.approx(found.resultant, rel=1e-12)
    assert found.above_floor == pytest.approx(1.0)
    assert found.floor_name == "Office"
    assert found.level_title == "Example A (invented)"


def test_readout_in_a_closed_enclosure_gives_no_value(layout: Layout) -> None:
    board = layout.enclosures[0]
    x = sum(p[0] for p in board.footprint) / len(board.footprint)
    y = sum(p[1] for p in board.footprint) / len(board.footprint)
    look = Look(height=0.5 * (board.z_from + board.z_to))
    found = readout(ReadoutRequest(layout, look, x, y))
    assert found.resultant is None
    assert board.title in readout_text(found, layout)


def test_readout_follows_the_pointer_and_forgets_it(
    qtbot: QtBot, line: ReadoutLine
) -> None:
    with qtbot.waitSignal(line.shown, timeout=20_000) as heard:
        line.show_at(3.0, 2.0)
    assert heard.args[0].at[:2] == (3.0, 2.0)
    assert "µT" in line.text()
    assert " of Example A (invented)" in line.text()
    line.clear_place()
    assert line.text() == ""


@pytest.fixture
def rail(qtbot: QtBot, layout: Layout, view_state: ViewState) -> HeightRail:
    made = HeightRail(Document(layout), view_state)
    qtbot.addWidget(made)
    made.resize(made.width(), 620)
    made.show()
    return made


def test_click_on_a_tick_shows_the_map_at_that_height(
    qtbot: QtBot, rail: HeightRail, view_state: ViewState
) -> None:
    tick = next(t for t in rail.scale.contents.ticks if t.text.endswith("Office +1.00"))
    assert tick.text == "z 5.10 · Office +1.00"
    place = QPoint(5, round(rail.scale.pixel_of(tick.z)) + 2)
    qtbot.mouseClick(rail.scale, LEFT, pos=place)
    assert view_state.look.height == tick.z
    assert view_state.look.zone == tick.zone
    assert rail.entry.text() == "5.10 m"
    qtbot.mouseClick(rail.largest, LEFT, pos=QPoint(8, rail.largest.height() // 2))
    assert view_state.look.height is None


def test_drag_goes_to_any_height(
    qtbot: QtBot, rail: HeightRail, view_state: ViewState
) -> None:
    scale = rail.scale
    start = QPoint(5, round(scale.pixel_of(5.1)))
    end = QPoint(5, round(scale.pixel_of(6.3)))
    qtbot.mousePress(scale, LEFT, pos=start)
    qtbot.mouseMove(scale, end)
    qtbot.mouseRelease(scale, LEFT, pos=end)
    assert view_state.look.height == pytest.approx(6.3, abs=0.03)


def test_typed_height_in_any_unit(
    qtbot: QtBot, rail: HeightRail, view_state: ViewState
) -> None:
    qtbot.keyClicks(rail.entry, "320cm")
    qtbot.keyClick(rail.entry, Qt.Key.Key_Return)
    assert view_state.look.height == pytest.approx(3.2)


def test_typed_nonsense_changes_nothing_and_says_why(
    qtbot: QtBot, rail: HeightRail, view_state: ViewState
) -> None:
    qtbot.keyClicks(rail.entry, "high")
    with qtbot.waitSignal(rail.refused) as heard:
        qtbot.keyClick(rail.entry, Qt.Key.Key_Return)
    assert heard.args[0].endswith(".")
    assert view_state.look.height is None


def test_arrow_keys_move_the_height(
    qtbot: QtBot, rail: HeightRail, view_state: ViewState
) -> None:
    view_state.set(height=5.0)
    qtbot.keyClick(rail.scale, Qt.Key.Key_Up)
    assert view_state.look.height == pytest.approx(5.05)
    qtbot.keyClick(rail.scale, Qt.Key.Key_PageUp)
    assert view_state.look.height == pytest.approx(5.1)


def test_rail_spans_everything_and_names_slabs_and_runs(rail: HeightRail) -> None:
    contents = rail.scale.contents
    assert contents.low < 0.0
    assert contents.high > 9.0
    assert [(b.low, b.high, b.name) for b in contents.slabs] == [(3.6, 3.9, "slab")]
    assert any(band.low < 3.0 < band.high for band in contents.runs)


def test_rail_tells_floors_in_full(rail: HeightRail) -> None:
    scale = rail.scale
    floor = max(scale.contents.floors, key=lambda tick: tick.z)
    assert floor.text in scale.text_at(scale.pixel_of(floor.z))


def test_curve_is_largest_where_the_runs_pass(rail: HeightRail, layout: Layout) -> None:
    zone = layout.zones[0]
    curve = height_curve(layout, "", zone.id, curve_heights(layout))
    rail.set_curve(curve)
    assert rail.grab().size().width() > 0
    peak = curve.heights[curve.values == max(curve.values)]
    assert any(b.low - 0.3 <= peak[0] <= b.high + 0.3 for b in rail.scale.contents.runs)
