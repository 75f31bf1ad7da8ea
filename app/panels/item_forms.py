"""Which form belongs to which items: of several kinds, what they have in common."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from app.panels import equipment_forms, layout_forms, place_forms, run_forms
from app.panels.parts import Group, Part
from engine.equipment import Board, ConductorLoop, Transformer
from engine.items import Item
from engine.layout import Layout
from engine.places import (
    BackingDrawing,
    Enclosure,
    Profile,
    Receptor,
    Room,
    Storey,
    Zone,
)
from engine.runs import Joint, Run

Parts = tuple[Part, ...]

#: By type of item: what one and what several are called, and the parts.
_FORMS: dict[type[Item], tuple[str, str, Parts | Callable[[Any], Parts]]] = {
    Storey: ("storey", "storeys", place_forms.STOREY_FORM),
    Room: ("room", "rooms", place_forms.ROOM),
    Enclosure: ("enclosure", "enclosures", place_forms.ENCLOSURE),
    Transformer: ("transformer", "transformers", equipment_forms.TRANSFORMER),
    Board: ("board", "boards", equipment_forms.BOARD),
    ConductorLoop: ("loop", "loops", equipment_forms.LOOP),
    Run: ("run", "runs", run_forms.run),
    Joint: ("joint", "joints", run_forms.JOINT),
    Zone: ("zone", "zones", place_forms.zone),
    Receptor: ("receptor", "receptors", place_forms.receptor),
    Profile: ("profile", "profiles", place_forms.PROFILE),
    BackingDrawing: ("backing drawing", "backing drawings", place_forms.BACKING),
}


def editable(layout: Layout, ids: frozenset[str]) -> tuple[Item, ...]:
    """The chosen items that have a form, in the order of the layout."""
    return tuple(i for i in layout.items() if i.id in ids and type(i) in _FORMS)


def heading(items: tuple[Item, ...]) -> str:
    """What the panel says above the form."""
    if not items:
        return "Layout"
    kinds = {type(item) for item in items}
    if len(items) == 1:
        one, _, _ = _FORMS[type(items[0])]
        title = items[0].title
        # "Room 1" says what it is.
        is_said = title.lower().startswith(one)
        return title if is_said else f"{one.capitalize()} {title}"
    if len(kinds) == 1:
        return f"{len(items)} {_FORMS[kinds.pop()][1]}"
    return f"{len(items)} items"


def groups(layout: Layout, items: tuple[Item, ...]) -> tuple[Group, ...]:
    """The form of the items; of none, that of the layout."""
    if not items:
        return layout_forms.layout_groups(layout)
    names = (place_forms.NAME, place_forms.NOTE)
    currents = run_forms.current_groups(layout, items)
    kind = heading(items[:1]).split()[0] if len({type(i) for i in items}) == 1 else ""
    own = Group(kind if currents else "", items, _parts(items))
    first = Group("", items, names[:1])
    return (first, *currents, own, Group("", items, names[1:]))


def _parts(items: tuple[Item, ...]) -> Parts:
    by_kind: dict[type[Item], list[Item]] = {}
    for item in items:
        by_kind.setdefault(type(item), []).append(item)
    forms = [_parts_of(kind, tuple(held)) for kind, held in by_kind.items()]
    first, *others = forms
    return tuple(
        part
        for part in first
        if all((part.path, part.kind) in _keys(parts) for parts in others)
    )


def _parts_of(kind: type[Item], items: tuple[Item, ...]) -> Parts:
    parts = _FORMS[kind][2]
    return parts if isinstance(parts, tuple) else parts(items)


def _keys(parts: Parts) -> list[tuple[str, object]]:
    return [(part.path, part.kind) for part in parts]
