"""Starters are whole: they close, and nothing blocks but what the user must enter."""

from __future__ import annotations

import pytest

from engine.assessment import assess
from engine.edits import checked
from engine.faults import faults
from engine.layout import Layout
from engine.layout_file import decode, encode
from engine.places import Room
from engine.starters import (
    STARTERS,
    riser_past_room,
    run_past_room,
    transformer_link_board,
)

MADE = {
    "transformer, link and board": transformer_link_board(),
    "at 60 Hz, short": transformer_link_board(link=2.0, current=100.0, frequency=60.0),
    "over": run_past_room("over", kind="cable ladder"),
    "under": run_past_room("under"),
    "beside": run_past_room("beside", kind="busbar"),
    "riser": riser_past_room(),
    "cables up a riser": riser_past_room(kind="cable tray"),
}


@pytest.mark.parametrize("layout", MADE.values(), ids=MADE.keys())
def test_nothing_blocks_the_field(layout: Layout) -> None:
    for case in layout.cases:
        assert faults(layout, case) == ()


@pytest.mark.parametrize("layout", MADE.values(), ids=MADE.keys())
def test_every_item_can_be_written_and_read(layout: Layout) -> None:
    for item in layout.items():
        checked(item)
    assert decode(encode(layout), "a starter") == layout


@pytest.mark.parametrize("layout", MADE.values(), ids=MADE.keys())
def test_the_user_chooses_category_and_level(layout: Layout) -> None:
    (zone,) = layout.zones
    assert (zone.category, zone.levels, layout.levels) == ("", (), ())
    assert all(origin.kind == "assumed" for i in layout.items() for origin in i.origins)


def test_the_link_ends_at_transformer_and_board() -> None:
    (run,) = transformer_link_board().runs
    assert (run.start.equipment, run.end.equipment) == ("transformer-1", "board-1")


def test_the_run_lies_where_it_is_said_to_lie() -> None:
    def parts(where: str) -> tuple[Room, tuple[float, float, float]]:
        layout = run_past_room(where, distance=0.7)
        return layout.rooms[0], layout.runs[0].route[0]

    room, (_, _, z) = parts("over")
    assert z == pytest.approx(room.ceiling_level + 0.7)
    room, (_, _, z) = parts("under")
    assert z == pytest.approx(room.floor_level - 0.7)
    room, (_, y, z) = parts("beside")
    assert y == pytest.approx(max(y for _, y in room.outline) + 0.7)
    assert room.floor_level < z < room.ceiling_level


def test_a_starter_can_be_assessed() -> None:
    assessment = assess(run_past_room("under"))
    assert assessment is not None


def test_starters_have_names() -> None:
    assert all(isinstance(make(), Layout) for make in STARTERS.values())
