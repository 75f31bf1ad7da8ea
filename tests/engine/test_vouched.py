"""A value that changes loses who vouched for it; one that does not keeps it."""

from __future__ import annotations

from msgspec.structs import replace

from engine.edits import added, replaced
from engine.items import ValueOrigin
from engine.layout import Layout
from engine.places import Receptor
from engine.vouched import with_true_origins

CONFIRMED = ValueOrigin(field="at", kind="confirmed", by="A. Person")
CHAIR = Receptor(id="chair", at=(1.0, 2.0, 1.0), use="chair", origins=(CONFIRMED,))
LAYOUT = added(Layout(), CHAIR)


def after(item: Receptor) -> Receptor:
    return with_true_origins(LAYOUT, replaced(LAYOUT, item)).receptors[0]


def test_a_moved_item_is_assumed_again():
    assert after(replace(CHAIR, at=(1.1, 2.0, 1.0))).origins == ()


def test_another_value_of_the_item_changes_nothing_for_this_one():
    assert after(replace(CHAIR, use="bed")).origins == (CONFIRMED,)


def test_an_origin_given_with_the_change_stays():
    anew = ValueOrigin(field="at", kind="measured", date="2026-01-01")
    item = replace(CHAIR, at=(1.1, 2.0, 1.0), origins=(anew,))
    assert after(item).origins == (anew,)


def test_the_reason_of_an_assumption_stays():
    reason = ValueOrigin(field="at", kind="assumed", note="from the sketch")
    layout = replaced(LAYOUT, replace(CHAIR, origins=(reason,)))
    moved = replaced(layout, replace(CHAIR, at=(0.0, 0.0, 0.0), origins=(reason,)))
    assert with_true_origins(layout, moved).receptors[0].origins == (reason,)


def test_an_edit_without_origins_is_the_same_layout():
    moved = replaced(LAYOUT, replace(CHAIR, origins=()))
    assert with_true_origins(LAYOUT, moved) is moved
