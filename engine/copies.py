"""Copies of items with new ids; what they name among themselves is named anew.

A reference to what is not copied stays when it is a condition of the item (circuit,
storey, reference level, source document) and is dropped when it ties the item to a
place (a run's end at equipment that is not copied).
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from typing import TypeVar

from msgspec.structs import replace

from engine.circuits import LoadCase
from engine.edits import readable_id
from engine.equipment import Board, ConductorLoop
from engine.items import Item
from engine.layout import Layout
from engine.places import Receptor, Room, Zone
from engine.runs import Connection, FreeSection, Joint, Run, Section

AnyItem = TypeVar("AnyItem", bound=Item)


def with_joints(layout: Layout, ids: Collection[str]) -> tuple[Item, ...]:
    """The items with these ids, and the joints of which they are all the ends."""
    wanted = set(ids)
    held = {run.id for run in layout.runs} | {unit.id for unit in layout.equipment}
    for joint in layout.joints:
        if joint.id in wanted or {end.item for end in joint.ends} <= wanted & held:
            wanted.add(joint.id)
    singles = {layout.title.id, layout.settings.id}
    return tuple(i for i in layout.items() if i.id in wanted and i.id not in singles)


def copies(items: Collection[Item], taken: Collection[str]) -> tuple[Item, ...]:
    """The items with ids that are not in `taken`, naming each other by those.

    A joint that names what is not among the items is left out.
    """
    used = set(taken)
    new: dict[str, str] = {}
    for item in items:
        stem = item.id if item.id not in used else _stem(item.id)
        new[item.id] = readable_id(stem, used)
        used.add(new[item.id])
    return tuple(
        renamed(item, new, ties=new.keys())
        for item in items
        if not isinstance(item, Joint) or all(end.item in new for end in item.ends)
    )


def renamed(item: AnyItem, new: Mapping[str, str], *, ties: Collection[str]) -> AnyItem:
    """The item with its own id and the ids that it names replaced by the new ones.

    Parameters
    ----------
    item : Item
        Any item.
    new : mapping
        New ids by the old ones; others stay.
    ties : collection of str
        Old ids of the equipment that a run's end stays connected to.
    """
    made = replace(
        item,
        id=new.get(item.id, item.id),
        origins=tuple(
            replace(o, document=new.get(o.document, o.document)) if o.document else o
            for o in item.origins
        ),
    )
    referring = _referring(made, new, ties)
    assert isinstance(referring, type(item))
    return referring


def _referring(item: Item, new: Mapping[str, str], ties: Collection[str]) -> Item:
    match item:
        case Run():
            return replace(
                item,
                section=_section(item.section, new),
                start=_connection(item.start, new, ties),
                end=_connection(item.end, new, ties),
            )
        case Joint():
            return replace(
                item,
                ends=tuple(replace(e, item=new.get(e.item, e.item)) for e in item.ends),
            )
        case Board():
            ways = tuple(
                replace(
                    way,
                    circuits=tuple(
                        replace(c, circuit=new.get(c.circuit, c.circuit))
                        for c in way.circuits
                    ),
                )
                for way in item.ways
            )
            return replace(item, ways=ways)
        case ConductorLoop():
            return replace(item, circuit=new.get(item.circuit, item.circuit))
        case Room():
            return replace(item, storey=_id(item.storey, new))
        case Zone():
            return replace(
                item,
                storey=_id(item.storey, new),
                levels=tuple(new.get(level, level) for level in item.levels),
            )
        case Receptor():
            return replace(
                item, levels=tuple(new.get(level, level) for level in item.levels)
            )
        case LoadCase():
            return _load_case(item, new)
    return item


def _section(section: Section, new: Mapping[str, str]) -> Section:
    if isinstance(section, FreeSection):
        return replace(
            section,
            slots=tuple(
                replace(
                    slot,
                    loads=tuple(
                        replace(load, circuit=new.get(load.circuit, load.circuit))
                        for load in slot.loads
                    ),
                )
                for slot in section.slots
            ),
        )
    return replace(
        section,
        circuits=tuple(
            replace(c, circuit=new.get(c.circuit, c.circuit)) for c in section.circuits
        ),
    )


def _connection(
    connection: Connection | None, new: Mapping[str, str], ties: Collection[str]
) -> Connection | None:
    if connection is None or connection.equipment not in ties:
        return None
    return replace(
        connection, equipment=new.get(connection.equipment, connection.equipment)
    )


def _load_case(case: LoadCase, new: Mapping[str, str]) -> LoadCase:
    return replace(
        case,
        factors=tuple(
            replace(f, circuit=new.get(f.circuit, f.circuit)) for f in case.factors
        ),
        own=tuple(replace(o, circuit=new.get(o.circuit, o.circuit)) for o in case.own),
        open_enclosures=tuple(new.get(e, e) for e in case.open_enclosures),
    )


def _id(id: str | None, new: Mapping[str, str]) -> str | None:
    return None if id is None else new.get(id, id)


def _stem(id: str) -> str:
    """The id without the number that told it from another one."""
    stem, _, number = id.rpartition("-")
    return stem if stem and number.isdigit() else id
