"""The page that takes a value apart: the engine's shares, summing to the value."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from pathlib import Path

import pytest
from msgspec.structs import replace
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication, QImage
from pytestqt.qtbot import QtBot

from app.document import Document
from app.messages import Messages
from app.pages.why_page import WhyPage
from app.readout_values import ReadoutRequest, readout
from app.view_state import Look, ViewState
from app.why_values import (
    Why,
    WhyPlace,
    WhyRequest,
    head_text,
    sentence,
    shares_csv,
    why_at,
)
from engine.conductors import conductors
from engine.edits import replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.layout_file import read
from engine.places import MeasuredValue
from engine.shaping import moved

SAMPLES = Path(__file__).parents[2] / "sample_layouts"


@pytest.fixture(scope="module")
def layout() -> Layout:
    return read(SAMPLES / "imaging-corridor.json")


def _receptor(layout: Layout, k: int = 0) -> WhyPlace:
    found = layout.receptors[k]
    return WhyPlace(found.at, found.id)


@pytest.fixture(scope="module")
def why(layout: Layout) -> Why:
    return why_at(WhyRequest(layout, "", _receptor(layout)))


@pytest.fixture
def page(qtbot: QtBot, layout: Layout) -> Iterator[WhyPage]:
    made = WhyPage(Document(layout), ViewState(), Messages())
    qtbot.addWidget(made)
    made.resize(1000, 420)
    made.show()
    _wait(qtbot, made)
    yield made
    made.close_worker()


def _wait(qtbot: QtBot, page: WhyPage) -> None:
    document = page._document
    qtbot.waitUntil(
        lambda: (
            page.is_idle
            and page.why is not None
            and page.why.request == page._answers.asked
            and page.why.request.layout is document.layout
        ),
        timeout=30_000,
    )


def test_shares_and_retrace_sum_to_the_value_of_the_pointer(
    layout: Layout, why: Why
) -> None:
    found = readout(ReadoutRequest(layout, Look(), *layout.receptors[0].at))
    assert why.shares.shown == pytest.approx(found.resultant, rel=1e-9)
    total = sum(s.share for s in why.shares.shares) + why.shares.unclosed_share
    assert total == pytest.approx(why.shares.total, rel=1e-9)
    assert sum(r.share for r in why.retraced.rows) == pytest.approx(total, rel=1e-9)


def test_load_times_its_factor_makes_the_value_equal_the_level(
    layout: Layout, why: Why
) -> None:
    factor = why.factors[0]
    assert factor.title == "Example A (invented)"
    assert f"{1 / factor.ratio:.3g} × this case" in head_text(why)
    found = readout(ReadoutRequest(layout, Look(), *layout.receptors[0].at))
    assert factor.ratio == pytest.approx(found.ratio, rel=1e-9)


def test_sentence_names_value_shares_and_what_matters_most(why: Why) -> None:
    text = sentence(why)
    assert text.startswith("Corridor centre, 7.50 1.20 1.00 m, load case As logged")
    first = why.shares.shares[0]
    assert f"R3 UPS supply {first.acts} {first.share / 1e-7:.0f} mG" in text
    assert "1 A of net current matters most in R2 Essential supply" in text


def test_table_of_shares_sums_to_its_last_row(why: Why) -> None:
    rows = list(csv.reader(io.StringIO(shares_csv(why))))
    whole = [float(row[2]) for row in rows[2:-1] if row[1] == "all"]
    assert sum(whole) == pytest.approx(float(rows[-1][2]), rel=1e-6)
    assert rows[1][2] == "share [mG]"


def test_measured_value_stands_beside_the_calculated(layout: Layout) -> None:
    receptor = layout.receptors[0]
    calculated = why_at(WhyRequest(layout, "", _receptor(layout))).shares.shown
    measured = replace(receptor, measured=MeasuredValue(flux_density=1.3 * calculated))
    changed = replaced(layout, measured)
    found = why_at(WhyRequest(changed, "", _receptor(changed)))
    assert "measured / calculated = 1.3" in head_text(found)


def test_a_place_inside_a_conductor_has_a_sentence(layout: Layout) -> None:
    part = next(c for c in conductors(layout) if c.role == "run")
    middle = 0.5 * (part.path[0] + part.path[1])
    at = (float(middle[0]), float(middle[1]), float(middle[2]))
    with pytest.raises(UserError, match="inside a conductor"):
        why_at(WhyRequest(layout, "", WhyPlace(at)))


def test_direct_current_is_taken_apart_on_its_own() -> None:
    layout = read(SAMPLES / "battery-laboratory.json")
    found = why_at(WhyRequest(layout, layout.cases[1].id, _receptor(layout), "DC"))
    assert found.kinds == ("AC", "DC")
    assert found.shares.kind == "DC"
    assert {row.frequency for row in found.retraced.rows} == {0.0}


def test_page_lists_each_circuit_with_its_frequencies(page: WhyPage, why: Why) -> None:
    names = [
        page.tree.topLevelItem(k).text(0) for k in range(page.tree.topLevelItemCount())
    ]
    assert names == ["R3 UPS supply", "R2 Essential supply", "R1 Normal supply",
                     "All together"]  # fmt: skip
    first = page.tree.topLevelItem(0)
    assert [first.child(k).text(0) for k in range(first.childCount())] == [
        f"{part.frequency:g} Hz" for part in why.shares.shares[0].by_frequency
    ]
    assert page.table.contents.rowCount() == len(why.retraced.rows) + 1


def test_page_follows_selection_receptor_and_case(qtbot: QtBot, page: WhyPage) -> None:
    document = page._document
    bed = document.layout.receptors[2]
    document.select([bed.id])
    _wait(qtbot, page)
    assert page.why is not None
    assert page.why.request.place.receptor == bed.id
    before = page.why.shares.total
    document.edit("Move", moved(document.committed, [bed.id], 0.0, -1.0))
    _wait(qtbot, page)
    assert page.why.shares.at == pytest.approx((4.0, 3.4, 0.8))
    assert page.why.shares.total > before
    page._view_state.set(case=document.layout.cases[1].id)
    _wait(qtbot, page)
    assert page.why.shares.case == document.layout.cases[1].id


def test_sentence_and_tables_are_copied(qtbot: QtBot, page: WhyPage) -> None:
    assert page.why is not None
    page.copy_sentence()
    assert QGuiApplication.clipboard().text() == sentence(page.why)
    page.tabs.setCurrentIndex(1)
    page.table.setFocus()
    qtbot.keyClick(page.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().splitlines()
    assert len(lines) == len(page.why.retraced.rows) + 2
    assert lines[1].startswith("All together\t")


def test_escape_closes_the_page_from_the_list(qtbot: QtBot, page: WhyPage) -> None:
    page.tree.setFocus()
    with qtbot.waitSignal(page.closed):
        qtbot.keyClick(page.tree, Qt.Key.Key_Escape)


def test_page_is_exported_as_picture_vectors_and_numbers(
    page: WhyPage, tmp_path: Path
) -> None:
    for ending in ("png", "svg", "csv"):
        page.write(tmp_path / f"why.{ending}")
    image = QImage(str(tmp_path / "why.png"))
    assert image.height() > page.shares.height()
    assert "Corridor centre" in (tmp_path / "why.svg").read_text("utf-8")
    page.tabs.setCurrentIndex(1)
    page.write(tmp_path / "retrace.csv")
    text = (tmp_path / "retrace.csv").read_text("utf-8")
    assert text.startswith("conductor,role,frequency [Hz]")
