"""Uncertainty on the screen: ranked bars, percentiles, tolerances, and the switch."""

from __future__ import annotations

from math import sqrt
from pathlib import Path

import pytest

from app.document import Document
from app.messages import Messages
from app.pages.uncertainty_page import UncertaintyPage
from app.uncertainty_values import bars, place_name, used_text
from app.view_state import ViewState
from engine import layout_file
from engine.assessment import assess
from engine.layout import Layout

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "imaging-corridor.json"


@pytest.fixture
def document(qapp):
    return Document(layout_file.read(SAMPLE))


@pytest.fixture
def page(qtbot, document):
    made = UncertaintyPage(document, ViewState(), Messages())
    qtbot.addWidget(made)
    made.resize(1000, 700)
    made.show()
    made.show_place("stress-test-bed")
    yield made
    made.close_worker()


def wait(qtbot, page):
    def answered():
        assert page.is_idle
        assert page.answer is not None
        assert page.answer.request.layout is page._document.committed

    qtbot.waitUntil(answered, timeout=60_000)


def test_bars_are_ranked_and_come_to_the_whole(qtbot, page):
    wait(qtbot, page)
    shown = page.chart.shown
    own = [bar.standard for bar in shown if bar.told]
    assert own == sorted(own, reverse=True)
    assert sum(bar.share for bar in shown) == pytest.approx(1.0)
    whole = sqrt(sum(bar.standard**2 for bar in shown))
    assert whole == pytest.approx(page.budget.standard)
    assert shown[0].name == "Current of R3 UPS supply"


def test_u_stands_in_the_unit_and_in_per_cent_with_the_drawn_values(qtbot, page):
    wait(qtbot, page)
    budget = page.budget
    head = page.head.text()
    assert "14.1 mG ± 2.31 mG (U, k = 2; 16 %)" in head
    assert 2 * budget.standard / 1e-7 == pytest.approx(2.31, abs=0.005)
    for text in ("12.9 mG (P5)", "14.6 mG (P50)", "16.4 mG (P95)"):
        assert text in page.sampled.text()


def test_a_tolerance_is_one_step_and_changes_the_budget(qtbot, page, document):
    wait(qtbot, page)
    before = page.budget.standard
    editor = page.form.editor("tolerances.current")
    editor.field.line.setText("10 %")
    editor.field.line.editingFinished.emit()
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText() == (
        "Set the tolerance of currents of the layout to 10 %"
    )
    wait(qtbot, page)
    assert page.budget.standard > 1.2 * before
    document.undo_stack.undo()
    wait(qtbot, page)
    assert page.budget.standard == pytest.approx(before)


def test_the_switch_lets_comparisons_use_the_budget(qtbot, page, document):
    wait(qtbot, page)
    assert "25 %" in page.used.text()
    page.form.row("uncertainty.kind")._enter(True)
    settings = document.committed.settings.uncertainty
    assert settings.kind == "from the budget"
    assert settings.basis == "tolerances of the inputs"
    wait(qtbot, page)
    assert page.used.text() == (
        "Comparisons here use this budget (by the layout's uncertainty)."
    )
    budget = page.budget
    (compared,) = (
        c
        for c in assess(document.committed).comparisons
        if (c.place, c.case, c.level) == (budget.place, budget.case, budget.level)
    )
    assert compared.uncertainty == pytest.approx(budget.expanded(2.0), rel=1e-9)
    document.undo_stack.undo()
    assert document.committed.settings.uncertainty.kind == "entered"


def test_a_variant_has_budgets_of_its_own(qtbot, page, document):
    wait(qtbot, page)
    before = page.budget.value
    document.choose("bond-removed")
    wait(qtbot, page)
    assert page.budget.value == pytest.approx(1.137 * before, rel=1e-3)
    assert "variant Second bond removed" in page.sentence()


def test_all_lines_are_written(qtbot, page, tmp_path):
    wait(qtbot, page)
    for ending in (".png", ".svg", ".csv"):
        page.write(tmp_path / f"u{ending}")
    rows = (tmp_path / "u.csv").read_text(encoding="utf-8").splitlines()
    assert len(rows) == 1 + len(page.budget.lines) + 6
    assert len(bars(page.budget, page._document.committed)) <= 15


def test_without_places_it_says_what_to_draw(qtbot):
    page = UncertaintyPage(Document(Layout()), ViewState(), Messages())
    qtbot.addWidget(page)
    page.show()
    qtbot.waitUntil(lambda: page.is_idle)
    assert page.head.text().startswith("Draw a zone")
    page.close_worker()


def test_it_says_which_uncertainty_is_used(document):
    layout = document.committed
    bed = layout.by_id()["stress-test-bed"]
    assert place_name(bed) == "Stress-test bed (receptor)"
    assert used_text(layout, bed).startswith("Comparisons here use the layout's")


def test_a_held_budget_stands_beside_the_new_one(qtbot, page, document):
    wait(qtbot, page)
    page.hold(True)
    document.choose("bond-removed")
    wait(qtbot, page)
    assert "; was 14.1 mG ± 2.31 mG)" in page.head.text()
    page.hold(False)
    assert "was" not in page.head.text()
