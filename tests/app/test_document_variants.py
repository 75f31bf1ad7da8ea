"""Variants in the document: one truth, edits where they belong, undo that returns."""

from __future__ import annotations

import random
from pathlib import Path

import pytest
from msgspec import structs

from app.document import Document
from app.recovery import Autosave
from engine import layout_file
from engine.edits import added, removed, replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.places import Profile, Receptor, Storey
from engine.variant import Variant
from engine.variants import dropped_from_variant, layout_of, moved_to_base

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "imaging-corridor.json"

CHAIR = Receptor(id="chair", at=(1.0, 2.0, 1.0))
DESK = Receptor(id="desk", at=(4.0, 2.0, 1.0))
BASE = Layout(
    storeys=(Storey(id="ground", floor_level=0.0),),
    receptors=(CHAIR, DESK),
    variants=(Variant(id="one", name="One"), Variant(id="two", name="Two")),
)
SHIFTED = structs.replace(CHAIR, at=(2.0, 2.0, 1.0))


@pytest.fixture
def document(qapp):
    return Document(BASE)


def test_a_chosen_variant_is_the_layout_that_is_shown(document):
    document.choose("one")
    assert document.layout is document.committed is layout_of(BASE, "one")
    assert document.variant is BASE.variants[0]
    assert document.whole is BASE
    document.choose(None)
    assert document.layout is BASE
    assert document.variant is None


def test_choosing_is_no_edit_and_not_undone(document):
    document.choose("one")
    assert not document.is_modified
    assert document.undo_stack.count() == 0


def test_an_edit_goes_into_the_chosen_variant_and_leaves_the_base(document):
    document.choose("one")
    document.edit("Move chair", replaced(document.layout, SHIFTED))
    assert document.layout.receptors == (SHIFTED, DESK)
    assert document.whole.receptors == (CHAIR, DESK)
    assert document.variant.replaced.receptors == (SHIFTED,)
    assert document.undo_stack.undoText() == "Move chair · in One"
    document.choose("two")
    assert document.layout.receptors == (CHAIR, DESK)


def test_undo_shows_where_the_step_was_taken(document):
    document.choose("one")
    document.edit("Move chair", replaced(document.layout, SHIFTED))
    document.choose(None)
    document.undo_stack.undo()
    assert document.variant.id == "one"
    assert document.layout.receptors == (CHAIR, DESK)
    assert document.whole == BASE
    document.undo_stack.redo()
    assert document.layout.receptors == (SHIFTED, DESK)


def test_undoing_a_new_variant_goes_back_to_the_base(document):
    new = added(document.whole, Variant(id="three", name="Three"))
    document.edit_whole("Add variant Three", new, "three")
    assert document.variant.id == "three"
    document.undo_stack.undo()
    assert document.variant is None
    assert document.layout == BASE


def test_what_a_variant_cannot_hold_is_edited_in_the_base(document):
    document.choose("one")
    line = Profile(id="line", path=((0.0, 0.0, 1.0), (1.0, 0.0, 1.0)))
    document.edit("Draw a profile", added(document.layout, line))
    assert document.whole.profiles == document.layout.profiles == (line,)
    assert document.variant == BASE.variants[0]


def test_what_is_previewed_in_a_variant_is_the_very_layout_committed(document):
    heard = []
    document.choose("one")
    after = replaced(document.layout, SHIFTED)
    document.preview(after)
    document.changed.connect(lambda layout, ids: heard.append(ids))
    shown = document.layout
    document.edit("Move chair", after)
    assert document.layout is shown
    assert heard == []


def test_choosing_ends_a_drag(document):
    document.preview(replaced(BASE, SHIFTED))
    document.choose("one")
    assert not document.is_previewing
    assert document.layout.receptors == (CHAIR, DESK)


def test_a_change_moved_to_the_base_is_there_and_no_longer_in_the_variant(document):
    document.choose("one")
    document.edit("Move chair", replaced(document.layout, SHIFTED))
    moved = moved_to_base(document.whole, "one", "chair")
    document.edit_whole("Move the change of chair to the base", moved, None)
    assert document.layout.receptors == (SHIFTED, DESK)
    assert document.whole.variants[0].replaced.receptors == ()
    document.undo_stack.undo()
    assert document.variant.id == "one"
    assert document.whole.receptors == (CHAIR, DESK)


def test_copies_of_unsaved_work_hold_base_and_variants(document, tmp_path):
    document.choose("one")
    document.edit("Move chair", replaced(document.layout, SHIFTED))
    keeper = Autosave(document, tmp_path)
    keeper.keep()
    assert layout_file.read(keeper.copy) == document.whole
    keeper.forget()


@pytest.mark.parametrize("seed", range(12))
def test_random_edits_undo_to_the_same_layouts_and_survive_files(qapp, seed):
    """Edits in base and variants at random, all undone, redone and read back."""
    dice = random.Random(seed)
    document = Document(layout_file.read(SAMPLE))
    states = [(document.whole, document.layout)]
    while len(states) < 30:
        before = document.undo_stack.count()
        _anything(document, dice, len(states))
        if document.undo_stack.count() > before:
            states.append((document.whole, document.layout))
            assert layout_file.decode(layout_file.encode(document.whole), "here") == (
                document.whole
            )
    for whole, _ in reversed(states[:-1]):
        document.undo_stack.undo()
        assert document.whole is whole
        # The variant of the step is shown, whichever was looked at before it.
        chosen = document.variant
        shown = whole if chosen is None else layout_of(whole, chosen.id)
        assert document.layout is document.committed is shown
    for whole, layout in states[1:]:
        document.undo_stack.redo()
        assert document.whole is whole
        assert document.layout is layout


def _anything(document: Document, dice: random.Random, n: int) -> None:
    """One act of a user: choosing, or an edit of what is shown or of all."""
    whole, shown = document.whole, document.layout
    variants = [v.id for v in whole.variants]
    act = dice.choice(("choose", "move", "move", "add", "remove", "base", "drop"))
    movable = [*shown.receptors, *shown.runs]
    if act == "choose":
        document.choose(dice.choice([None, *variants]))
    elif act == "move":
        item = dice.choice(movable)
        if isinstance(item, Receptor):
            x, y, z = item.at
            item = structs.replace(item, at=(x + 0.1, y, z))
        else:
            route = tuple((x, y + 0.05, z) for x, y, z in item.route)
            item = structs.replace(item, route=route)
        document.preview(replaced(shown, item))
        document.edit(f"Move {item.title}", replaced(shown, item))
    elif act == "add":
        document.edit("Place", added(shown, Receptor(id=f"n{n}", at=(n, 0.0, 1.0))))
    elif act == "remove" and shown.receptors:
        document.edit("Delete", removed(shown, dice.choice(shown.receptors).id))
    elif act in ("base", "drop") and document.variant is not None:
        change = moved_to_base if act == "base" else dropped_from_variant
        try:
            after = change(whole, document.variant.id)
        except UserError:
            # What the base has lost meanwhile cannot be moved there.
            return
        document.edit_whole("Move all to the base", after, document.variant.id)
