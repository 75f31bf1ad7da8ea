"""Origins stay with the values they stand for when the section around them changes."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine.edits import added, replaced
from engine.formations import as_free, with_formation
from engine.items import ValueOrigin
from engine.layout import Layout
from engine.origins import is_assumed
from engine.runs import Bar, CircuitShare, Flat, Run, StackedBars
from engine.section_edits import (
    mirrored,
    swapped,
    with_section,
    with_shape,
    with_slot_at,
    without,
)
from engine.vouched import with_true_origins

FLAT = Flat(circuits=(CircuitShare(circuit="C1"),), pitch=0.1)
ROUTE = ((0.0, 0.0, 0.0), (1.0, 0.0, 0.0))


def confirmed(*paths: str) -> tuple[ValueOrigin, ...]:
    return tuple(ValueOrigin(field=p, kind="confirmed", by="A. Person") for p in paths)


def after(before, section, *paths: str, names=None) -> Run:
    """The run once the document has taken the edit."""
    run = Run(id="run", route=ROUTE, section=before, origins=confirmed(*paths))
    layout = added(Layout(), run)
    return with_true_origins(layout, with_section(layout, run, section, names)).runs[0]


def fields(run: Run) -> set[str]:
    return {origin.field for origin in run.origins if origin.kind != "assumed"}


def test_origins_outside_the_section_stay():
    run = after(FLAT, replace(FLAT, pitch=0.2), "route", "rated_current")
    assert fields(run) == {"route", "rated_current"}


def test_one_value_changes_and_the_others_keep_their_origins():
    held = ("section.pitch", "section.shape.width", "section.circuits")
    run = after(FLAT, replace(FLAT, pitch=0.2), *held)
    assert fields(run) == {"section.shape.width", "section.circuits"}


def test_an_origin_of_the_whole_stays_apart_from_what_changed():
    run = after(FLAT, replace(FLAT, pitch=0.2), "section")
    assert fields(run) == {"section"}
    assert is_assumed(run, "section.pitch")
    assert not is_assumed(run, "section.shape.thickness")
    assert not is_assumed(run, "section.order")


def test_what_changed_inside_a_vouched_part_is_named_alone():
    bar = Bar(width=0.12, thickness=0.01, turn=90)
    run = after(FLAT, with_shape(FLAT, bar), "section.shape", "section.pitch")
    assert fields(run) == {"section.shape", "section.pitch"}
    assert is_assumed(run, "section.shape.width")
    assert not is_assumed(run, "section.shape.thickness")


def test_another_formation_keeps_what_it_has_in_common():
    made = with_formation(FLAT, "vertical")
    run = after(FLAT, made, "section.pitch", "section.circuits")
    kept = {"section.circuits"} | ({"section.pitch"} if made.pitch == 0.1 else set())
    assert fields(run) == kept
    whole = after(FLAT, made, "section")
    assert "section" not in fields(whole)
    assert not is_assumed(whole, "section.circuits")


def test_freed_conductors_keep_the_size_that_was_confirmed():
    moved = with_slot_at(FLAT, "L2", 0.3, 0.0)
    run = after(FLAT, moved, "section.shape.width", "section.pitch")
    assert fields(run) == {f"section.slots.{i}.shape.width" for i in range(4)}
    bars = StackedBars(circuits=FLAT.circuits)
    run = after(bars, with_slot_at(bars, "L2", 0.3, 0.0), "section.thickness")
    assert not is_assumed(run, "section.slots.3.shape.thickness")
    assert is_assumed(run, "section.slots.3.shape.width")


def test_origins_of_a_conductor_follow_it_when_others_go():
    free = as_free(FLAT)
    run = after(free, without(free, ["L1"]), "section.slots.2.u", "section.slots.0.u")
    assert fields(run) == {"section.slots.1.u"}


def test_origins_of_a_conductor_follow_its_new_name():
    free = as_free(FLAT)
    named = tuple(replace(s, name=s.name.lower()) for s in free.slots)
    names = {a.name: b.name for a, b in zip(free.slots, named, strict=True)}
    run = after(free, replace(free, slots=named), "section.slots.1.shape", names=names)
    assert fields(run) == {"section.slots.1.shape"}


def test_conductors_that_change_places_lose_what_stood_for_their_places():
    free = as_free(FLAT)
    held = ("section.slots.0.u", "section.slots.0.v", "section.slots.2.u")
    run = after(free, swapped(free, "L1", "L2"), *held)
    assert fields(run) == {"section.slots.0.v", "section.slots.2.u"}


def test_a_mirrored_order_keeps_the_dimensions():
    made, names = mirrored(FLAT)
    run = after(FLAT, made, "section.order", "section.pitch", names=names)
    assert fields(run) == {"section.pitch"}


@pytest.mark.parametrize("path", ["section.pitch", "section"])
def test_the_reason_of_an_assumption_goes_with_its_value_only(path: str):
    reason = ValueOrigin(field=path, kind="assumed", note="from the sketch")
    run = Run(id="run", route=ROUTE, section=FLAT, origins=(reason,))
    layout = added(Layout(), run)
    changed = with_section(layout, run, replace(FLAT, order=("L1", "L2", "L3")))
    assert changed.runs[0].origins == (reason,)


def test_a_whole_whose_vertex_was_dragged_is_assumed_again():
    origins = confirmed("route")
    run = Run(id="run", route=ROUTE, section=FLAT, origins=origins)
    layout = added(Layout(), run)
    moved = replaced(layout, replace(run, route=(ROUTE[0], (2.0, 0.0, 0.0))))
    assert with_true_origins(layout, moved).runs[0].origins == ()
