"""Commands on the selection, each one step of the history with a readable text.

Every command takes the document and works on its selection. A `UserError` says what
stands in the way; the caller shows it.
"""

from __future__ import annotations

import math
from itertools import pairwise
from typing import TypeVar

from msgspec.structs import replace

from app.document import Document
from engine.edits import added, checked, replaced
from engine.errors import UserError
from engine.items import Item, Point3
from engine.layout import Layout
from engine.new_places import middle, with_room_above, with_room_below, zone_filling
from engine.new_sources import riser_to
from engine.places import Room
from engine.runs import Run
from engine.shaping import (
    Alignment,
    aligned,
    counted,
    deleted,
    mirrored,
    moved,
    repeated,
    rotated,
    split_run,
)
from engine.vertices import with_inserted, without_vertex

AnItem = TypeVar("AnItem", bound=Item)


def selected(document: Document) -> tuple[Item, ...]:
    """The selected items of the committed layout.

    Raises
    ------
    UserError
        When nothing is selected.
    """
    found = tuple(
        item for item in document.committed.items() if item.id in document.selection
    )
    if not found:
        raise UserError("Nothing is selected: click an item, or draw a box around it.")
    return found


def drawn(layout: Layout) -> tuple[Item, ...]:
    """The items that can be selected on the drawing, in the order of the layout."""
    return (
        *layout.rooms, *layout.enclosures, *layout.equipment, *layout.runs,
        *layout.zones, *layout.receptors, *layout.profiles, *layout.backing_drawings,
    )  # fmt: skip


def select_next(document: Document, step: int = 1) -> None:
    """Select the item after the selected one, or before it, without a pointer.

    Raises
    ------
    UserError
        When nothing is drawn.
    """
    ids = [item.id for item in drawn(document.committed)]
    if not ids:
        raise UserError("Nothing is drawn yet that could be selected.")
    held = [k for k, id in enumerate(ids) if id in document.selection]
    held = held or ([-1] if step > 0 else [0])
    at = (held[-1] if step > 0 else held[0]) + step
    document.select((ids[at % len(ids)],))


def delete_selection(document: Document) -> None:
    """Delete the selected items, and what only held on to them."""
    items = selected(document)
    after = deleted(document.committed, [item.id for item in items])
    if after is document.committed:
        raise UserError("Title and settings belong to every layout and stay.")
    document.edit(f"Delete {counted(items)}", after)


def move_selection(
    document: Document, dx: float, dy: float, dz: float = 0.0, word: str = "Move"
) -> None:
    """Shift the selected items. [m]"""
    items = selected(document)
    after = moved(document.committed, _ids(items), dx, dy, dz)
    document.edit(f"{word} {counted(items)}", after)


def rotate_selection(document: Document, degrees: float) -> None:
    """Turn the selected items about their middle, counter-clockwise."""
    items = selected(document)
    after = rotated(document.committed, _ids(items), middle(items), degrees)
    document.edit(f"Turn {counted(items)} by {degrees:g}°", after)


def mirror_selection(document: Document, angle: float) -> None:
    """Mirror the selected items in a line through their middle.

    Parameters
    ----------
    document : Document
        Holds the selection.
    angle : float
        Of the line to +x: 90 swaps left and right, 0 up and down. [degrees]
    """
    items = selected(document)
    after = mirrored(document.committed, _ids(items), middle(items), angle)
    document.edit(f"Mirror {counted(items)}", after)


def repeat_selection(
    document: Document, count: int, dx: float, dy: float, dz: float = 0.0
) -> None:
    """Make copies of the selected items, each a step further, and select them. [m]"""
    items = selected(document)
    after, made = repeated(document.committed, _ids(items), count, dx, dy, dz)
    times = "" if count == 1 else f" {count} times"
    word = "Duplicate" if count == 1 else "Repeat"
    document.edit(f"{word} {counted(items)}{times}", after)
    document.select(made)


def align_selection(document: Document, how: Alignment) -> None:
    """Shift the selected items to one line or height."""
    items = selected(document)
    after = aligned(document.committed, _ids(items), how)
    document.edit(f"Align {counted(items)} at the {how}", after)


def split_selected_run(document: Document, leg: int, at: Point3) -> None:
    """Make two runs of the selected one, at a point of one of its legs. [m]"""
    run = _only(document, Run, "run")
    after = split_run(document.committed, run.id, leg, at)
    known = {one.id for one in document.committed.runs}
    document.edit(f"Split {counted((run,))}", after)
    document.select([run.id, *(one.id for one in after.runs if one.id not in known)])


def split_at_middle(document: Document) -> None:
    """Make two runs of the selected one, in the middle of its longest leg."""
    route = _only(document, Run, "run").route
    legs = [math.dist(a, b) for a, b in pairwise(route)]
    leg = legs.index(max(legs))
    x, y, z = (0.5 * (a + b) for a, b in zip(route[leg], route[leg + 1], strict=True))
    split_selected_run(document, leg, (x, y, z))


def raise_selected_run(document: Document, *, down: bool = False) -> None:
    """Lead the selected run from its end to the next floor above, or below.

    Raises
    ------
    UserError
        When not one run is selected, or its end is connected.
    """
    run = _only(document, Run, "run")
    is_joined = any(
        end.item == run.id and end.end == "end"
        for joint in document.committed.joints
        for end in joint.ends
    )
    if run.end is not None or is_joined:
        raise UserError(
            f"The end of {counted((run,))} is connected: free it first, or draw a "
            "riser of its own."
        )
    x, y, z = run.route[-1]
    top = (x, y, riser_to(document.committed, z, down=down))
    is_upright = run.route[-2][:2] == (x, y) and (top[2] > z) == (z > run.route[-2][2])
    before = run.route[:-1] if is_upright else run.route
    turns = run.turns if is_upright or not run.turns else (*run.turns, run.turns[-1])
    after = checked(replace(run, route=(*before, top), turns=turns))
    word = "Lower" if down else "Raise"
    document.edit(
        f"{word} the end of {counted((run,))} to the next floor",
        replaced(document.committed, after),
    )


def insert_vertex(document: Document, id: str, leg: int, at: Point3) -> None:
    """Put a vertex on a leg of an item. [m]"""
    item = document.committed.by_id()[id]
    after = replaced(document.committed, with_inserted(item, leg, at))
    document.edit(f"Insert a vertex in {counted((item,))}", after)


def delete_vertex(document: Document, id: str, index: int) -> None:
    """Take one vertex out of an item."""
    item = document.committed.by_id()[id]
    after = replaced(document.committed, without_vertex(item, index))
    document.edit(f"Delete a vertex of {counted((item,))}", after)


def fill_room(document: Document, room_id: str = "") -> str:
    """Fill a room, or the selected one, with a zone; its category is to be chosen."""
    room = _room(document, room_id)
    zone = zone_filling(document.committed, room)
    document.edit(f"Fill {counted((room,))} with a zone", _with(document, zone))
    document.select((zone.id,))
    return zone.id


def add_room_above(document: Document, slab: float, room_id: str = "") -> str:
    """Add a room on the slab of a room, or of the selected one. [m]"""
    room = _room(document, room_id)
    after, made = with_room_above(document.committed, room.id, slab)
    document.edit(f"Add a room above {counted((room,))}", after)
    document.select((made,))
    return made


def add_room_below(document: Document, slab: float, room_id: str = "") -> str:
    """Add a room under the slab of a room, or of the selected one. [m]"""
    room = _room(document, room_id)
    after, made = with_room_below(document.committed, room.id, slab)
    document.edit(f"Add a room below {counted((room,))}", after)
    document.select((made,))
    return made


def _with(document: Document, item: Item) -> Layout:
    return added(document.committed, item)


def _ids(items: tuple[Item, ...]) -> list[str]:
    return [item.id for item in items]


def _room(document: Document, room_id: str) -> Room:
    if room_id:
        room = document.committed.by_id().get(room_id)
        if not isinstance(room, Room):
            raise ValueError(f"no room {room_id}")
        return room
    return _only(document, Room, "room")


def _only(document: Document, kind: type[AnItem], word: str) -> AnItem:
    items = selected(document)
    if len(items) != 1 or not isinstance(items[0], kind):
        raise UserError(f"Select one {word} first.")
    return items[0]
