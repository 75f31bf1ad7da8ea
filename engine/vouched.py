"""Origins after an edit: what changed is no longer what somebody vouched for.

A document, an instrument or a person stood for the value as it was. Whoever changes
it, by typing or by dragging, has an assumption again until it is confirmed anew.
"""

from __future__ import annotations

from msgspec.structs import replace

from engine.edits import changed_ids, replaced
from engine.entered_values import part_at, value_at, with_part
from engine.items import Item
from engine.layout import Layout


def with_true_origins(before: Layout, after: Layout) -> Layout:
    """`after` without the origins whose values changed since `before`.

    An origin that is new in `after` was given with the change and stays; `assumed`
    origins give a reason and stay too. An origin of a whole stays where all that
    changed in it is said to be assumed.
    """
    old = before.by_id()
    new = after.by_id()
    stripped = [
        item
        for item_id in changed_ids(before, after)
        if item_id in old and item_id in new and new[item_id].origins
        for item in (_stripped(old[item_id], new[item_id]),)
        if item is not new[item_id]
    ]
    return replaced(after, *stripped) if stripped else after


def _stripped(old: Item, new: Item) -> Item:
    kept = tuple(
        origin
        for origin in new.origins
        if origin.kind == "assumed"
        or origin not in old.origins
        or _is_vouched(old, new, origin.field)
    )
    return new if len(kept) == len(new.origins) else replace(new, origins=kept)


def _is_vouched(old: Item, new: Item, field: str) -> bool:
    """Whether a value is as it was, apart from parts said to be assumed."""
    before, now = value_at(old, field), value_at(new, field)
    for origin in new.origins:
        if origin.kind != "assumed" or not origin.field.startswith(f"{field}."):
            continue
        path = origin.field.removeprefix(f"{field}.")
        known = part_at(before, path)
        if known is not None and part_at(now, path) is not None:
            now = with_part(now, path, known)
    return bool(before == now)
