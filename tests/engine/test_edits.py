"""Edits: what they change, and that they change nothing else."""

from __future__ import annotations

import re

import msgspec
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from listed_values import rich_layout
from msgspec.structs import replace

from engine.circuits import BalancedCurrent, Circuit
from engine.edits import (
    added,
    changed_ids,
    checked,
    collections,
    readable_id,
    removed,
    replaced,
    unused_id,
)
from engine.equipment import ConductorLoop, Terminal, Transformer
from engine.errors import UserError
from engine.items import Id, Item, TitleData
from engine.layout import Layout, Settings
from engine.places import Profile, Storey
from engine.runs import Bar, Flat, Run

GROUND = Storey(id="ground", floor_level=0.0)
FIRST = Storey(id="first", floor_level=3.2)
LINE = Profile(id="line", path=((0.0, 0.0, 1.0), (5.0, 0.0, 1.0)))
LAYOUT = Layout(storeys=(GROUND, FIRST), profiles=(LINE,))


def test_every_item_of_a_layout_has_its_field() -> None:
    layout = rich_layout()
    for item in layout.items():
        held = getattr(layout, collections()[type(item)])
        assert item is held or any(item is one for one in held)


def test_added_items_stand_last_and_others_stay_the_same_objects() -> None:
    second = Storey(id="second", floor_level=6.4)
    circuit = Circuit(id="pump")
    after = added(LAYOUT, second, circuit)
    assert after.storeys == (GROUND, FIRST, second)
    assert after.storeys[0] is GROUND
    assert after.profiles is LAYOUT.profiles
    assert after.circuits == (circuit,)
    assert LAYOUT.storeys == (GROUND, FIRST)
    assert changed_ids(LAYOUT, after) == {"second", "pump"}


def test_equipment_of_every_kind_goes_into_one_field() -> None:
    terminal = Terminal(label="L1", at=(0, 0, 0))
    star = Transformer(id="t", terminals=(terminal,), star=(0, 0, 1))
    loop = ConductorLoop(
        id="l", path=((0, 0, 0), (1, 0, 0), (0, 1, 0)), circuit="c", label="L1"
    )
    after = added(LAYOUT, checked(star), checked(loop))
    assert [item.id for item in after.equipment] == ["t", "l"]


def test_a_taken_id_is_refused_with_a_sentence() -> None:
    with pytest.raises(UserError, match=r'There is an item with the id "line" already'):
        added(LAYOUT, Circuit(id="line"))
    with pytest.raises(UserError, match='"x" already'):
        added(LAYOUT, Circuit(id="x"), Storey(id="x", floor_level=0))
    with pytest.raises(UserError, match='"title" already'):
        added(LAYOUT, Circuit(id="title"))


def test_no_more_items_are_added_than_a_file_may_hold() -> None:
    storeys = tuple(Storey(id=f"s{i}", floor_level=i) for i in range(200))
    full = Layout(storeys=storeys)
    with pytest.raises(UserError, match="at most 200 storeys"):
        added(full, Storey(id="roof", floor_level=700))


def test_a_replaced_item_keeps_its_place() -> None:
    lower = replace(GROUND, floor_level=-0.1)
    after = replaced(LAYOUT, lower)
    assert after.storeys == (lower, FIRST)
    assert after.storeys[1] is FIRST
    assert changed_ids(LAYOUT, after) == {"ground"}


def test_settings_and_title_are_replaced_like_any_item() -> None:
    after = replaced(LAYOUT, Settings(frequency=60), TitleData(id="title", client="A"))
    assert (after.settings.frequency, after.title.client) == (60, "A")
    assert changed_ids(LAYOUT, after) == {"settings", "title"}
    assert after.storeys is LAYOUT.storeys


def test_an_equal_item_changes_nothing() -> None:
    assert replaced(LAYOUT, Storey(id="ground", floor_level=0.0)) is LAYOUT
    assert replaced(LAYOUT) is LAYOUT
    assert removed(LAYOUT) is LAYOUT
    assert added(LAYOUT) == LAYOUT


def test_there_and_back_is_the_same_layout() -> None:
    moved = replaced(LAYOUT, replace(FIRST, floor_level=9))
    back = replaced(moved, FIRST)
    assert back == LAYOUT
    assert changed_ids(LAYOUT, back) == frozenset()
    assert removed(added(LAYOUT, Circuit(id="pump")), "pump") == LAYOUT


def test_removed_items_are_gone_and_others_stay_the_same_objects() -> None:
    after = removed(LAYOUT, "ground", "line")
    assert after.storeys == (FIRST,)
    assert after.storeys[0] is FIRST
    assert after.profiles == ()
    assert changed_ids(LAYOUT, after) == {"ground", "line"}


def test_what_cannot_be_is_the_callers_mistake() -> None:
    with pytest.raises(ValueError, match="no storeys with the id nowhere"):
        replaced(LAYOUT, Storey(id="nowhere", floor_level=0))
    with pytest.raises(ValueError, match="no circuits with the id ground"):
        replaced(LAYOUT, Circuit(id="ground"))
    with pytest.raises(ValueError, match="no item to remove with the id nowhere"):
        removed(LAYOUT, "ground", "nowhere")
    with pytest.raises(ValueError, match="no item to remove with the id title"):
        removed(LAYOUT, "title")
    with pytest.raises(ValueError, match="exactly one settings"):
        added(LAYOUT, Settings(id="more"))
    with pytest.raises(ValueError, match="holds no Item"):
        added(LAYOUT, Item(id="x"))


def test_an_id_that_changes_its_kind_has_changed() -> None:
    after = added(removed(LAYOUT, "line"), Circuit(id="line"))
    assert changed_ids(LAYOUT, after) == {"line"}
    assert changed_ids(LAYOUT, LAYOUT) == frozenset()


def test_a_new_order_is_no_change_of_items() -> None:
    assert changed_ids(LAYOUT, replace(LAYOUT, storeys=(FIRST, GROUND))) == frozenset()


def test_checked_turns_lists_and_foreign_numbers_into_a_files_values() -> None:
    route = np.array([[0, 0, 0], [0, 0, 2.5]])
    made = Run(id="riser", route=[list(p) for p in route], section=Flat(circuits=[]))  # type: ignore[arg-type]
    run = checked(made)
    assert run.route == ((0.0, 0.0, 0.0), (0.0, 0.0, 2.5))
    assert all(type(c) is float for vertex in run.route for c in vertex)
    assert run.section == Flat(circuits=())
    assert checked(run) == run


def test_checked_says_everything_that_is_wrong() -> None:
    made = Run(
        id="riser",
        kind="pipe",  # type: ignore[arg-type]
        route=((0, 0, 0), (0, 0, float("nan"))),
        section=Flat(circuits=(), pitch=-1, shape=Bar(width=0, thickness=0.01)),
    )
    with pytest.raises(UserError) as caught:
        checked(made)
    sentence = str(caught.value)
    assert sentence.startswith("riser cannot be entered for 4 reasons:")
    for path in ("kind", "route[1][2]", "section.pitch", "section.shape.width"):
        assert f"- {path}: expected" in sentence


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -1.0, "ten", None, 1j])
def test_checked_refuses_a_current_that_cannot_be(value: object) -> None:
    circuit = Circuit(id="c", demand=BalancedCurrent(rms=value))  # type: ignore[arg-type]
    with pytest.raises(UserError):
        checked(circuit)


def test_unused_ids_are_readable() -> None:
    assert unused_id(LAYOUT, "run") == "run"
    assert unused_id(LAYOUT, "ground") == "ground-2"
    more = added(LAYOUT, Storey(id="ground-2", floor_level=1))
    assert unused_id(more, "ground") == "ground-3"
    assert unused_id(LAYOUT, "Zähler/3 #1") == "Zahler-3-1"
    assert unused_id(LAYOUT, "磁場") == "item"


@given(st.text(max_size=200))
def test_any_text_gives_an_id_that_a_file_accepts(stem: str) -> None:
    made = readable_id(stem, {"item"})
    assert msgspec.convert(made, Id) == made
    assert made != "item"
    assert not re.search(r"\s$", made)
    again = readable_id(stem, {"item", made})
    assert msgspec.convert(again, Id) not in (made, "item")
