"""Remarks panel: groups and counts, going there, confirming, stating origins."""

from __future__ import annotations

import pytest
from msgspec import structs

from app.document import Document
from app.panels.remarks import RemarksPanel, counts_text, is_confirmable
from app.remark_search import Found, found_in
from engine.circuits import BalancedCurrent, Circuit
from engine.faults import Remark
from engine.layout import Layout
from engine.origins import Assumption, assumptions
from engine.places import Zone
from engine.runs import CircuitShare, Flat, Run
from engine.variant import BaseState, Variant, VariantItems

LAYOUT = Layout(
    circuits=(Circuit(id="F1", name="Office", demand=BalancedCurrent(rms=100.0)),),
    runs=(
        Run(
            id="R1",
            name="Riser",
            route=((0.0, 0.0, 1.0), (4.0, 0.0, 1.0)),
            section=Flat(circuits=(CircuitShare(circuit="F1"),)),
        ),
    ),
    zones=(Zone(id="Z1", outline=((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))),),
)
REMARKS = (
    Remark(
        "W01", "blocking", "Net current ends in the open.", ("R1",), (4.0, 0.0, 1.0)
    ),
    Remark("F03", "blocking", "The run bends too sharply.", ("R1",)),
    Remark("W08", "note", "Equal sharing <b>assumed</b>.", ("R1", "F1")),
)


@pytest.fixture
def document():
    return Document(LAYOUT)


@pytest.fixture
def panel(qtbot, document):
    made = RemarksPanel(document)
    qtbot.addWidget(made)
    made.resize(360, 700)
    made.show()
    yield made
    made.close_search()


def show(panel, document, remarks=REMARKS):
    panel.close_search()
    panel.show_found(Found(document.committed, remarks, (), assumptions(LAYOUT)))


def texts(panel):
    return [panel.list.item(i).text() for i in range(panel.list.count())]


def row(panel, start):
    return next(i for i, text in enumerate(texts(panel)) if text.startswith(start))


def test_remarks_come_by_themselves(panel, document, qtbot):
    qtbot.waitUntil(lambda: panel.list.count() > 0, timeout=20_000)
    found = found_in(document.committed, None)
    assert panel.head.text() == counts_text(found)
    assert "assumed value" in panel.head.text()
    assert any(text.startswith("W02") for text in texts(panel))


def test_groups_have_counts(panel, document):
    show(panel, document)
    assert texts(panel)[0] == "2 block the assessment"
    assert "1 note" in texts(panel)
    count = len(assumptions(LAYOUT))
    assert panel.head.text() == (
        f"2 block the assessment · 1 note · {count} assumed values"
    )


def test_a_click_selects_and_goes_there(panel, document, qtbot):
    show(panel, document)
    with qtbot.waitSignal(panel.go_to) as gone:
        panel._on_item(panel.list.item(row(panel, "W01")))
    assert gone.args == [(4.0, 0.0, 1.0)]
    assert document.selection == {"R1"}
    panel._on_item(panel.list.item(row(panel, "W08")))
    assert document.selection == {"R1", "F1"}
    panel._on_item(panel.list.item(0))
    assert document.selection == {"R1", "F1"}


def test_what_blocks_has_to_be_mended(panel, document):
    assert [is_confirmable(remark) for remark in REMARKS] == [True, False, True]
    show(panel, document)
    panel.list.setCurrentRow(row(panel, "F03"))
    assert not panel.confirm_button.isVisible()
    assert "mended" in panel.why.text()
    panel.list.setCurrentRow(row(panel, "W08"))
    assert panel.confirm_button.isVisible()


def test_a_named_person_lets_a_remark_stand(panel, document):
    show(panel, document)
    panel.list.setCurrentRow(row(panel, "W08"))
    panel.confirm()
    assert panel.by.is_refused
    assert document.layout is LAYOUT
    panel.by.line.setText("A. Tester")
    panel.date.line.setText("2024-02-05")
    panel.note.line.setText("Checked with the maker")
    panel.confirm()
    (confirmed,) = document.layout.confirmed_remarks
    assert (confirmed.code, confirmed.items) == ("W08", ("R1", "F1"))
    assert (confirmed.by, confirmed.date) == ("A. Tester", "2024-02-05")
    assert document.undo_stack.count() == 1
    panel.close_search()
    panel.show_found(Found(document.committed, (), ((REMARKS[2], confirmed),)))
    assert "let stand by A. Tester, 2024-02-05: Checked" in texts(panel)[1]
    panel.list.setCurrentRow(1)
    panel.take_back()
    assert document.layout.confirmed_remarks == ()


def test_what_was_found_in_another_layout_is_not_shown(panel, document):
    show(panel, document)
    before = texts(panel)
    panel.show_found(Found(Layout(title=LAYOUT.title), ()))
    assert texts(panel) == before


def test_one_origin_is_stated_for_several_values_as_one_step(panel, document):
    show(panel, document)
    page = panel.assumed
    page.open_form()
    assert "Select the values first" in page.table.reason.text()
    page.table.view.selectAll()
    targets = page.targets()
    assert ("F1", "demand") in targets
    page.open_form()
    form = page.form
    form.kind.set_value("confirmed")
    form._on_kind("confirmed")
    form.apply()
    assert form.reason.text() == "State who confirms the value."
    form.lines["by"].setText("A. Tester")
    form.apply()
    assert assumptions(document.layout) == ()
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undoText() == (
        f"State where {len(targets)} values come from"
    )


def test_counts_are_words():
    nothing = Found(Layout())
    assert counts_text(nothing) == "No remark, and no value is assumed"
    one = Found(Layout(), REMARKS[1:2], (), (Assumption("a", "b", "c"),))
    assert counts_text(one) == "1 blocks the assessment · 1 assumed value"


def test_remarks_on_the_chosen_variant_are_listed(qtbot):
    moved = structs.replace(LAYOUT.zones[0], floor_level=1.0)
    variant = Variant(
        id="one", name="Raised", replaced=VariantItems(zones=(moved,)),
        against=(BaseState(item="Z1", digest="0" * 64),),
    )  # fmt: skip
    document = Document(structs.replace(LAYOUT, variants=(variant,)))
    panel = RemarksPanel(document)
    qtbot.addWidget(panel)
    panel.show()
    document.choose("one")
    qtbot.waitUntil(
        lambda: any(t.startswith("W34") for t in texts(panel)), timeout=9000
    )
    (told,) = (t for t in texts(panel) if t.startswith("W34"))
    assert "Variant “Raised” replaces" in told
    # A person may let it stand, as any warning.
    panel.list.setCurrentRow(row(panel, "W34"))
    panel.by.line.setText("A. Berg")
    panel.confirm()
    qtbot.waitUntil(
        lambda: any("W34" in t and "let stand by A. Berg" in t for t in texts(panel)),
        timeout=9000,
    )
    panel.close_search()
