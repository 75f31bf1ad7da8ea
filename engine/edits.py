"""Edits: a layout with items added, replaced or removed, and what differs after it.

An edit never changes a layout: it gives a new one in which every other item is the same
object. References of other items are not followed; `faults` names what dangles.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Collection, Iterator
from functools import cache
from numbers import Real
from typing import TypeVar, get_args, get_type_hints

import msgspec
from msgspec import inspect, structs

from engine.errors import UserError
from engine.items import Item
from engine.layout import Layout
from engine.value_faults import faults, told

AnyItem = TypeVar("AnyItem", bound=Item)

#: An id may have 80 characters; some are left for a number.
_LONGEST_STEM = 70


@cache
def collections() -> dict[type[Item], str]:
    """The field of `Layout` that holds the items of each type, from its annotations."""
    found: dict[type[Item], str] = {}
    for name, annotation in get_type_hints(Layout).items():
        entry = get_args(annotation)[0] if get_args(annotation) else annotation
        for kind in get_args(entry) or (entry,):
            found[kind] = name
    return found


def checked(item: AnyItem) -> AnyItem:
    """`item` with its values as a file would hold them: tuples, plain numbers.

    Raises
    ------
    UserError
        When a value is outside what a layout may hold; every fault is named.
    """
    kind = type(item)
    plain = msgspec.to_builtins(item, enc_hook=_as_number)
    found = faults(kind, plain)
    if found:
        name = item.id if isinstance(item.id, str) and item.id else "The new item"
        raise told(f"{name} cannot be entered", found)
    return msgspec.convert(plain, kind)


def added(layout: Layout, *items: Item) -> Layout:
    """The layout with `items` at the end of their kind.

    Raises
    ------
    UserError
        When an id is taken already, or the layout would hold too many of a kind.
    ValueError
        When an item is of a kind that a layout holds exactly one of.
    """
    taken = {item.id for item in layout.items()}
    changes: dict[str, tuple[Item, ...]] = {}
    for item in items:
        name = _collection(item)
        if name in _singles():
            raise ValueError(f"a layout has exactly one {name}; replace it")
        if item.id in taken:
            raise UserError(
                f'There is an item with the id "{item.id}" already; choose another id.'
            )
        taken.add(item.id)
        held = changes.get(name, getattr(layout, name))
        changes[name] = (*held, item)
    for name, held in changes.items():
        most = _most().get(name)
        if most is not None and len(held) > most:
            kind = name.replace("_", " ")
            raise UserError(f"A layout can hold at most {most:,} {kind}.")
    return structs.replace(layout, **changes)


def replaced(layout: Layout, *items: Item) -> Layout:
    """The layout with `items` in the places of those that have their ids.

    An item that equals the present one changes nothing; if none differs, the layout
    itself is returned.

    Raises
    ------
    ValueError
        When the layout has no item of that kind with that id.
    """
    new: dict[str, dict[str, Item]] = {}
    for item in items:
        new.setdefault(_collection(item), {})[item.id] = item
    changes: dict[str, object] = {}
    for name, by_id in new.items():
        held = getattr(layout, name)
        before = (held,) if name in _singles() else held
        unknown = by_id.keys() - {item.id for item in before}
        if unknown:
            raise ValueError(f"no {name} with the id {', '.join(sorted(unknown))}")
        after = tuple(_newer(item, by_id.get(item.id)) for item in before)
        if any(a is not b for a, b in zip(before, after, strict=True)):
            changes[name] = after[0] if name in _singles() else after
    return structs.replace(layout, **changes) if changes else layout


def removed(layout: Layout, *ids: str) -> Layout:
    """The layout without the items that have these ids.

    Raises
    ------
    ValueError
        When an id is unknown, or belongs to what every layout has.
    """
    leaving = set(ids)
    changes: dict[str, tuple[Item, ...]] = {}
    found: set[str] = set()
    for name in sorted(set(collections().values()) - _singles()):
        held = getattr(layout, name)
        staying = tuple(item for item in held if item.id not in leaving)
        if len(staying) < len(held):
            found.update(item.id for item in held if item.id in leaving)
            changes[name] = staying
    if found != leaving:
        missing = ", ".join(sorted(leaving - found))
        raise ValueError(f"no item to remove with the id {missing}")
    return structs.replace(layout, **changes) if changes else layout


def changed_ids(before: Layout, after: Layout) -> frozenset[str]:
    """Ids of the items that are new, gone or different in `after`.

    An item that only stands at another place of its collection has not changed.
    """
    if before is after:
        return frozenset()
    old: dict[str, Item] = {}
    new: dict[str, Item] = {}
    for name in dict.fromkeys(collections().values()):
        held_before, held_after = getattr(before, name), getattr(after, name)
        if held_before is not held_after:
            old.update((item.id, item) for item in _each(held_before))
            new.update((item.id, item) for item in _each(held_after))
    return frozenset(
        item_id
        for item_id in old.keys() | new.keys()
        if _differ(old.get(item_id), new.get(item_id))
    )


def unused_id(layout: Layout, stem: str) -> str:
    """A readable id that no item of the layout or its variants has, from `stem`."""
    taken = {item.id for item in layout.items()}
    for variant in layout.variants:
        taken.update(item.id for item in variant.added.items())
    return readable_id(stem, taken)


def readable_id(stem: str, taken: Collection[str]) -> str:
    """An id made from `stem` that is not in `taken`: itself, or with a number.

    Examples
    --------
    >>> readable_id("Bär/3 #1", {"Bar-3-1"}), readable_id("", ())
    ('Bar-3-1-2', 'item')
    """
    ascii_text = unicodedata.normalize("NFKD", stem).encode("ascii", "ignore").decode()
    plain = re.sub(r"[^A-Za-z0-9_.:+\- ]+", "-", ascii_text.replace("/", "-"))
    plain = re.sub(r"-?\s+-+|-{2,}", "-", plain).strip(" -_.:+")[:_LONGEST_STEM]
    plain = plain.rstrip(" -_.:+") or "item"
    if plain not in taken:
        return plain
    number = 2
    while f"{plain}-{number}" in taken:
        number += 1
    return f"{plain}-{number}"


def _collection(item: Item) -> str:
    try:
        return collections()[type(item)]
    except KeyError:
        raise ValueError(f"a layout holds no {type(item).__name__}") from None


@cache
def _singles() -> frozenset[str]:
    """Fields of which a layout holds exactly one item."""
    hints = get_type_hints(Layout)
    return frozenset(name for name in hints if not get_args(hints[name]))


@cache
def _most() -> dict[str, int]:
    """How many items a field may hold, where there is a limit."""
    kind = inspect.type_info(Layout)
    assert isinstance(kind, inspect.StructType)
    return {
        field.name: field.type.max_length
        for field in kind.fields
        if isinstance(field.type, inspect.VarTupleType)
        and field.type.max_length is not None
    }


def _each(held: Item | tuple[Item, ...]) -> Iterator[Item]:
    if isinstance(held, tuple):
        yield from held
    else:
        yield held


def _newer(present: Item, new: Item | None) -> Item:
    return present if new is None or new == present else new


def _differ(one: Item | None, other: Item | None) -> bool:
    return one is not other and one != other


def _as_number(value: object) -> float:
    """Numbers of other libraries, as of arrays, are numbers too."""
    if isinstance(value, Real):
        return float(value)
    raise UserError(
        f"A value of type {type(value).__name__} cannot be entered in a layout."
    )
