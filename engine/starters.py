"""Starters: small layouts to begin with, every value of them there to be edited.

Each is a plain room with one circuit whose conductors close, and a zone where people
are. The zone's category and a reference level are left to be entered.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Literal

from msgspec.structs import replace

from engine.circuits import BalancedCurrent, Circuit
from engine.edits import added, replaced
from engine.items import Item, Point3
from engine.layout import Layout, Settings
from engine.motions import neat
from engine.new_places import rectangle, with_room_above, zone_filling
from engine.new_sources import (
    new_board,
    new_transformer,
    with_new_run,
)
from engine.places import Enclosure, Room, Storey
from engine.runs import RunKind

Where = Literal["over", "under", "beside"]


def transformer_link_board(
    *, current: float = 800.0, link: float = 5.0, frequency: float = 50.0
) -> Layout:
    """A transformer, a busbar link under the ceiling, a board; an office next door.

    Parameters
    ----------
    current : float
        RMS of each line, cos φ 0.90 lagging. [A]
    link : float
        Length of the link's level part; at least 2 m. [m]
    frequency : float
        [Hz]
    """
    width = link + 4.0
    layout = _started(current, frequency)
    layout = added(
        layout,
        _room("switch-room", "Switch room", (0.0, 0.0), (width, 5.0)),
        _room("office", "Office", (0.0, 5.2), (width, 10.2)),
    )
    transformer = new_transformer(layout, (1.5, 3.0), "", turn=90.0)
    board = new_board(layout, (1.5 + link, 3.0), (3.5 + link, 3.0), "")
    cubicle = Enclosure(
        id="cubicle",
        name="Cubicle of the board",
        footprint=board.footprint,
        z_from=0.0,
        z_to=2.1,
    )
    layout = added(layout, transformer, board, cubicle)
    over_board = (
        1.5 + link + sum(pole.fed_at for pole in board.poles) / len(board.poles)
    )
    layout, run = with_new_run(
        layout,
        (
            (1.5, 3.0, 2.0),
            (1.5, 3.0, 2.7),
            (neat(over_board), 3.0, 2.7),
            (neat(over_board), 3.0, 2.2),
        ),
        "busbar",
    )
    return _with_zone(_named(layout, run, "LV link"), "office")


def run_past_room(
    where: Where = "under",
    *,
    current: float = 400.0,
    distance: float = 0.5,
    kind: RunKind = "cable tray",
    frequency: float = 50.0,
) -> Layout:
    """A run over, under or beside an office of 6 × 5 m.

    Parameters
    ----------
    where : "over", "under" or "beside"
        Over the slab's soffit, under the floor, or behind a wall at 1.00 m.
    current : float
        RMS of each line, cos φ 0.90 lagging. [A]
    distance : float
        From the office's ceiling, floor or wall to the middle of the run. [m]
    kind : RunKind
        What runs there.
    frequency : float
        [Hz]
    """
    layout = _started(current, frequency)
    layout = added(layout, _room("office", "Office", (0.0, 0.0), (6.0, 5.0)))
    y, z = {
        "over": (2.5, 3.0 + distance),
        "under": (2.5, -distance),
        "beside": (5.0 + distance, 1.0),
    }[where]
    y, z = neat(y), neat(z)
    layout, run = with_new_run(layout, ((-3.0, y, z), (9.0, y, z)), kind)
    return _with_zone(_named(layout, run, f"Run {where} the office"), "office")


def riser_past_room(
    *,
    current: float = 400.0,
    distance: float = 0.6,
    kind: RunKind = "busbar trunking",
    frequency: float = 50.0,
) -> Layout:
    """A riser over three storeys behind the wall of an office on the middle one.

    Parameters
    ----------
    current : float
        RMS of each line, cos φ 0.90 lagging. [A]
    distance : float
        From the office's wall to the middle of the riser. [m]
    kind : RunKind
        What rises there.
    frequency : float
        [Hz]
    """
    layout = _started(current, frequency)
    layout = added(layout, _room("plant-room", "Plant room", (0.0, 0.0), (6.0, 5.0)))
    layout, office = with_room_above(layout, "plant-room", 0.25)
    layout, top = with_room_above(layout, office, 0.25)
    layout = _named(_named(layout, office, "Office"), top, "Office above")
    for number, storey in enumerate(layout.storeys[1:], 1):
        layout = _named(layout, storey.id, f"Storey {number}")
    x = neat(6.0 + distance)
    route: tuple[Point3, ...] = (
        (2.0, 2.5, 2.5),
        (x, 2.5, 2.5),
        (x, 2.5, 9.0),
    )
    layout, run = with_new_run(layout, route, kind)
    return _with_zone(_named(layout, run, "Riser"), office)


#: The starters by what a person calls them.
STARTERS: Mapping[str, Callable[[], Layout]] = {
    "Transformer, link and board": transformer_link_board,
    "Run over, under or beside a room": run_past_room,
    "Riser past a room": riser_past_room,
}


def _started(current: float, frequency: float) -> Layout:
    """A ground floor and a circuit."""
    circuit = Circuit(
        id="circuit-1",
        name="Circuit 1",
        base_frequency=frequency,
        voltage=400.0,
        demand=BalancedCurrent(rms=current),
    )
    return Layout(
        settings=Settings(frequency=frequency),
        storeys=(Storey(id="ground", name="Ground floor", floor_level=0.0),),
        circuits=(circuit,),
    )


def _room(
    id: str, name: str, corner: tuple[float, float], opposite: tuple[float, float]
) -> Room:
    return Room(
        id=id,
        name=name,
        outline=rectangle(corner, opposite),
        storey="ground",
        floor_level=0.0,
        ceiling_level=3.0,
    )


def _named(layout: Layout, id: str, name: str) -> Layout:
    item: Item = layout.by_id()[id]
    return replaced(layout, replace(item, name=name))


def _with_zone(layout: Layout, room_id: str) -> Layout:
    room = next(room for room in layout.rooms if room.id == room_id)
    return added(layout, zone_filling(layout, room))
