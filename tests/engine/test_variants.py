"""Variants: the base with changes, edits that go into them, moves to the base."""

from __future__ import annotations

import pytest
from msgspec.structs import replace

from engine import layout_file
from engine.circuits import BalancedCurrent, Circuit, LoadCase
from engine.edits import added, changed_ids, removed, replaced, unused_id
from engine.errors import UserError
from engine.items import ValueOrigin
from engine.layout import Layout
from engine.places import Profile, Receptor
from engine.plain_values import digest
from engine.remarks import remarks
from engine.runs import CircuitShare, Flat, Run
from engine.variant import Variant
from engine.variants import (
    dropped_from_variant,
    edited_in_variant,
    ids_of,
    kept_over_base,
    layout_of,
    moved_to_base,
    variant_called,
)

CIRCUIT = Circuit(id="C", demand=BalancedCurrent(rms=100.0))


def run(name: str, y: float) -> Run:
    return Run(
        id=name,
        route=((0.0, y, 2.0), (5.0, y, 2.0)),
        section=Flat(circuits=(CircuitShare(circuit="C"),)),
    )


A, B = run("a", 0.0), run("b", 1.0)
HEAD = Receptor(id="head", at=(1.0, 1.0, 1.0))
BASE = Layout(
    circuits=(CIRCUIT,),
    runs=(A, B),
    receptors=(HEAD,),
    variants=(Variant(id="v", name="Mended"), Variant(id="w", name="Moved")),
)


def edited(layout: Layout, variant: str, **values: object) -> Layout:
    """The layout after an edit of fields while a variant is chosen."""
    after = replace(layout_of(layout, variant), **values)
    return edited_in_variant(layout, variant, after)


def variant_codes(layout: Layout) -> list[tuple[str, tuple[str, ...]]]:
    found = remarks(layout)
    return [(r.code, r.items) for r in found if r.code in ("W34", "W35", "W36")]


WIDER = replace(A, name="wider")
SHIFTED = replace(A, route=((0.0, 0.5, 2.0), (5.0, 0.5, 2.0)))


# ---- applied


def test_an_empty_variant_is_the_base() -> None:
    assert layout_of(BASE, "v") == layout_of(BASE, None) == replace(BASE, variants=())


def test_the_same_variant_of_the_same_layout_is_the_identical_layout() -> None:
    changed = edited(BASE, "v", runs=(WIDER, B))
    assert layout_of(changed, "v") is layout_of(changed, "v")
    assert layout_of(changed, None) is layout_of(changed, None)


def test_what_a_variant_does_not_change_is_the_identical_item() -> None:
    changed = edited(BASE, "v", runs=(WIDER, B))
    made = layout_of(changed, "v")
    assert made.runs == (WIDER, B)
    assert made.runs[1] is B
    assert made.circuits is BASE.circuits
    assert made.receptors is BASE.receptors


def test_an_edit_replaces_adds_and_removes() -> None:
    more = run("more", 3.0)
    changed = edited(BASE, "v", runs=(WIDER, more), receptors=())
    variant = variant_called(changed, "v")
    assert variant.replaced.runs == (WIDER,)
    assert variant.added.runs == (more,)
    assert variant.removed == ("b", "head")
    assert ids_of(variant) == ("a", "more", "b", "head")
    assert layout_of(changed, "v").runs == (WIDER, more)
    assert layout_of(changed, "v").receptors == ()
    # The base and the other variant are as they were.
    assert layout_of(changed, None) == layout_of(BASE, None)
    assert changed.variants[1] is BASE.variants[1]


def test_an_edit_taken_back_leaves_the_variant_empty() -> None:
    changed = edited(BASE, "v", runs=(WIDER,), receptors=())
    again = edited(changed, "v", runs=BASE.runs, receptors=BASE.receptors)
    assert again.variants == BASE.variants


def test_no_edit_gives_the_identical_layout() -> None:
    assert edited_in_variant(BASE, "v", layout_of(BASE, "v")) is BASE


def test_what_a_variant_cannot_hold_goes_into_the_base() -> None:
    line = Profile(id="line", path=((0.0, 0.0, 1.0), (1.0, 0.0, 1.0)))
    settings = replace(BASE.settings, frequency=60.0)
    changed = edited(BASE, "v", settings=settings, profiles=(line,))
    assert changed.settings == settings
    assert changed.profiles == (line,)
    assert changed.variants == BASE.variants


def test_load_cases_can_differ() -> None:
    night = LoadCase(id="night")
    changed = edited(BASE, "v", load_cases=(night,))
    assert changed.load_cases == ()
    assert layout_of(changed, "v").load_cases == (night,)


def test_a_variant_is_found_by_id_before_name() -> None:
    named = replace(BASE, variants=(Variant(id="x", name="v"), Variant(id="v")))
    assert variant_called(named, "v").id == "v"
    assert variant_called(BASE, "Moved").id == "w"
    with pytest.raises(UserError, match=r"no variant “u”.*“Mended”, “Moved”"):
        layout_of(BASE, "u")


def test_an_item_cannot_take_the_id_of_a_variant() -> None:
    with pytest.raises(UserError, match="variant with the id “w”"):
        edited(BASE, "v", runs=(A, B, run("w", 4.0)))


def test_unused_ids_leave_out_what_a_variant_adds() -> None:
    changed = edited(BASE, "v", runs=(A, B, run("more", 4.0)))
    assert unused_id(changed, "more") == "more-2"


def test_a_file_keeps_variants() -> None:
    changed = edited(BASE, "v", runs=(WIDER, run("more", 3.0)), receptors=())
    data = layout_file.encode(changed)
    assert layout_file.decode(data, "again") == changed


# ---- moved to the base


def test_one_change_moves_to_the_base() -> None:
    more = run("more", 3.0)
    changed = edited(BASE, "v", runs=(WIDER, more))
    moved = moved_to_base(changed, "v", "a")
    assert moved.runs == (WIDER, B)
    assert variant_called(moved, "v").replaced.runs == ()
    assert variant_called(moved, "v").against == ()
    assert layout_of(moved, "v") == layout_of(changed, "v")


def test_all_changes_move_to_the_base() -> None:
    changed = edited(BASE, "v", runs=(WIDER, run("more", 3.0)), receptors=())
    moved = moved_to_base(changed, "v")
    assert layout_of(moved, None) == layout_of(changed, "v")
    assert moved.variants == BASE.variants
    assert changed_ids(changed, moved) == {"a", "b", "more", "head", "v"}


def test_a_change_that_is_none_cannot_be_moved() -> None:
    with pytest.raises(ValueError, match="does not change a"):
        moved_to_base(BASE, "v", "a")


def test_an_added_item_does_not_overwrite_one_of_the_base() -> None:
    changed = edited(BASE, "v", runs=(A, B, run("more", 3.0)))
    both = added(changed, run("more", 9.0))
    with pytest.raises(UserError, match="another item with the id “more”"):
        moved_to_base(both, "v", "more")


def test_a_replaced_item_that_is_gone_is_not_moved() -> None:
    changed = removed(edited(BASE, "v", runs=(WIDER, B)), "a")
    with pytest.raises(UserError, match="no longer has"):
        moved_to_base(changed, "v", "a")


def test_a_dropped_change_gives_the_base_again() -> None:
    changed = edited(BASE, "v", runs=(WIDER, run("more", 3.0)), receptors=())
    assert layout_of(dropped_from_variant(changed, "v", "head"), "v").receptors
    assert dropped_from_variant(changed, "v").variants == BASE.variants


# ---- the base changes


def test_w34_the_base_has_changed_under_a_replaced_item() -> None:
    changed = edited(BASE, "v", runs=(WIDER, B))
    assert variant_codes(changed) == []
    newer = replaced(changed, SHIFTED)
    assert variant_codes(newer) == [("W34", ("v", "a"))]
    assert layout_of(newer, "v").runs[0] == WIDER
    # Another edit of the item in the variant does not settle it; a decision does.
    further = edited(newer, "v", runs=(replace(WIDER, note="x"), B))
    assert variant_codes(further) == [("W34", ("v", "a"))]
    assert variant_codes(kept_over_base(further, "v", "a")) == []
    assert variant_codes(replaced(further, A)) == []


def test_w34_is_not_said_where_the_base_has_become_the_same() -> None:
    changed = replaced(edited(BASE, "v", runs=(WIDER, B)), WIDER)
    assert variant_codes(changed) == []


def test_a_move_to_the_base_is_told_to_other_variants() -> None:
    changed = edited(edited(BASE, "v", runs=(WIDER, B)), "w", runs=(SHIFTED, B))
    assert variant_codes(moved_to_base(changed, "v")) == [("W34", ("w", "a"))]


def test_w35_a_replaced_item_is_gone() -> None:
    changed = removed(edited(BASE, "v", runs=(WIDER, B)), "a")
    assert variant_codes(changed) == [("W35", ("v", "a"))]
    assert layout_of(changed, "v").runs == (B,)
    # It is not forgotten by the next edit, and not brought back by it.
    further = edited(changed, "v", receptors=())
    assert variant_codes(further) == [("W35", ("v", "a"))]


def test_w35_a_removed_item_is_gone() -> None:
    changed = removed(edited(BASE, "v", runs=(B,)), "a")
    assert variant_codes(changed) == [("W35", ("v", "a"))]
    assert variant_codes(dropped_from_variant(changed, "v", "a")) == []


def test_w36_the_base_has_got_the_id_of_an_added_item() -> None:
    more = run("more", 3.0)
    changed = added(edited(BASE, "v", runs=(A, B, more)), run("more", 9.0))
    assert variant_codes(changed) == [("W36", ("v", "more"))]
    assert layout_of(changed, "v").runs == (A, B, more)


def test_w36_an_id_that_another_kind_has_is_left_out() -> None:
    changed = edited(BASE, "v", runs=(A, B, run("more", 3.0)))
    changed = added(changed, Receptor(id="more", at=(0.0, 0.0, 0.0)))
    assert variant_codes(changed) == [("W36", ("v", "more"))]
    ids = [item.id for item in layout_of(changed, "v").items()]
    assert len(ids) == len(set(ids))


def test_a_layout_of_a_variant_says_nothing_of_variants() -> None:
    changed = replaced(edited(BASE, "v", runs=(WIDER, B)), SHIFTED)
    assert variant_codes(layout_of(changed, "v")) == []


# ---- digests


def test_digests_tell_items_apart_by_what_they_say() -> None:
    assert digest(A) == digest(run("a", 0))
    assert digest(A) == digest(replace(A, route=((0, -0.0, 2), (5, 0, 2))))
    origin = ValueOrigin(field="route", kind="measured")
    others = [WIDER, SHIFTED, replace(A, id="c"), replace(A, origins=(origin,))]
    assert len({digest(A), *map(digest, others)}) == 5
