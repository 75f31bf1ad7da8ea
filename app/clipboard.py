"""Copy and paste of items between windows, as text of our own kind.

The text holds the chosen items and what they depend on (circuits, storeys, reference
levels, source documents). Pasted items get new ids and keep naming each other; what
they depend on is taken from the target where it is there already.
"""

from __future__ import annotations

import json
from collections.abc import Collection

import msgspec
from msgspec.structs import replace
from PySide6.QtCore import QMimeData
from PySide6.QtGui import QGuiApplication

from app.document import Document
from engine.copies import copies, renamed, with_joints
from engine.criteria import ReferenceLevel
from engine.edits import added, unused_id
from engine.equipment import Board, ConductorLoop
from engine.errors import UserError
from engine.items import Item
from engine.layout import Layout
from engine.layout_file import decode, encode
from engine.places import Receptor, Room, Zone
from engine.runs import FreeSection, Run, Section
from engine.shaping import counted, moved

MIME_TYPE = "application/x-lodestead-items+json"

#: How far a copy lies from its original in the same layout. [m]
_STEP = (0.5, -0.5)


def copied_text(layout: Layout, ids: Collection[str]) -> str:
    """The items with these ids and what they depend on, as JSON.

    Raises
    ------
    UserError
        When there is nothing to copy.
    """
    chosen = with_joints(layout, ids)
    if not chosen:
        raise UserError("Nothing is selected to copy: click an item first.")
    by_id = layout.by_id()
    own = {item.id for item in chosen}
    needed: dict[str, Item] = {}
    open_ends = list(chosen)
    while open_ends:
        for id in _conditions(open_ends.pop()):
            if id in by_id and id not in own and id not in needed:
                needed[id] = by_id[id]
                open_ends.append(by_id[id])
    part = added(Layout(settings=layout.settings), *chosen, *needed.values())
    return json.dumps(
        {
            "lodestead items": 1,
            "chosen": [item.id for item in chosen],
            "layout": json.loads(encode(part)),
        },
        ensure_ascii=False,
    )


def pasted(
    layout: Layout, text: str, shift: tuple[float, float] = (0.0, 0.0)
) -> tuple[Layout, tuple[str, ...]]:
    """The layout with the items of a copied text, and their new ids.

    A sample's reference level loses its source: outside the sample it has none.

    Parameters
    ----------
    layout : Layout
        Where to.
    text : str
        From `copied_text`.
    shift : (2,) float
        From where the items lay. [m]

    Raises
    ------
    UserError
        When the text holds no items.
    """
    part, chosen = _read(text)
    taken = layout.by_id()
    new: dict[str, str] = {}
    conditions: list[Item] = []
    for item in part.items():
        if item.id in chosen or item.id in (part.title.id, part.settings.id):
            continue
        if taken.get(item.id) == item:
            continue
        item = _without_invented_source(item)
        new[item.id] = unused_id(added(layout, *conditions), item.id)
        conditions.append(replace(item, id=new[item.id]))
    items = [_without_invented_source(i) for i in part.items() if i.id in chosen]
    everything = added(layout, *(renamed(item, new, ties=()) for item in conditions))
    ties = {unit.id for unit in part.equipment}
    bound = [renamed(item, new, ties=ties) for item in items]
    made = copies(bound, {item.id for item in everything.items()})
    names = tuple(item.id for item in made)
    return moved(added(everything, *made), names, *shift), names


def copy(document: Document) -> None:
    """Put the selection on the clipboard."""
    text = copied_text(document.committed, document.selection)
    data = QMimeData()
    data.setData(MIME_TYPE, text.encode())
    data.setText(text)
    QGuiApplication.clipboard().setMimeData(data)


def has_items() -> bool:
    """Whether the clipboard holds items."""
    data = QGuiApplication.clipboard().mimeData()
    return data is not None and data.hasFormat(MIME_TYPE)


def paste(document: Document) -> None:
    """Add the clipboard's items as one step of the history, and select them."""
    data = QGuiApplication.clipboard().mimeData()
    if data is None or not data.hasFormat(MIME_TYPE):
        raise UserError("The clipboard holds no items of a layout: copy some first.")
    text = bytes(data.data(MIME_TYPE).data()).decode("utf-8", "replace")
    _, chosen = _read(text)
    known = {item.id for item in document.committed.items()}
    shift = _STEP if chosen & known else (0.0, 0.0)
    layout, names = pasted(document.committed, text, shift)
    by_id = layout.by_id()
    document.edit(f"Paste {counted([by_id[name] for name in names])}", layout)
    document.select(names)


def _read(text: str) -> tuple[Layout, frozenset[str]]:
    try:
        found = msgspec.json.decode(text.encode(), type=_Copied)
    except msgspec.DecodeError:
        raise UserError(
            "The clipboard's text holds no items of a layout: copy some first."
        ) from None
    layout = decode(bytes(found.layout), "The clipboard")
    known = {item.id for item in layout.items()}
    return layout, frozenset(found.chosen) & known


class _Copied(
    msgspec.Struct, rename={"version": "lodestead items"}, forbid_unknown_fields=True
):
    version: int
    chosen: tuple[str, ...]
    layout: msgspec.Raw


def _conditions(item: Item) -> set[str]:
    """Ids of what an item depends on besides its place."""
    found = {origin.document for origin in item.origins if origin.document}
    match item:
        case Run():
            found |= _carried(item.section)
        case Board():
            found |= {share.circuit for way in item.ways for share in way.circuits}
        case ConductorLoop():
            found.add(item.circuit)
        case Room() if item.storey:
            found.add(item.storey)
        case Zone():
            found |= {*item.levels, *([item.storey] if item.storey else [])}
        case Receptor():
            found |= set(item.levels)
    return found


def _carried(section: Section) -> set[str]:
    if isinstance(section, FreeSection):
        return {load.circuit for slot in section.slots for load in slot.loads}
    return {share.circuit for share in section.circuits}


def _without_invented_source(item: Item) -> Item:
    if isinstance(item, ReferenceLevel) and "(invented)" in item.name:
        return replace(item, source="")
    return item
