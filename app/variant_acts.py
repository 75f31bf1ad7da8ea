"""Variants as commands: made, copied, named, removed, moved to the base."""

from __future__ import annotations

from collections.abc import Collection

from msgspec import structs

from app.document import Document
from engine.edits import added, checked, removed, replaced, unused_id
from engine.errors import UserError
from engine.items import Item
from engine.layout import Layout
from engine.variant import Variant
from engine.variants import (
    dropped_from_variant,
    ids_of,
    kept_over_base,
    moved_to_base,
    variant_called,
)


def shown_text(document: Document) -> str:
    """ "base" or "variant Bond removed", as captions say it; empty without variants."""
    if document.variant is not None:
        return f"variant {document.variant.title}"
    return "base" if document.whole.variants else ""


def with_shown(document: Document, caption: str) -> str:
    """A caption that says whether base or variant is shown."""
    return " · ".join(text for text in (caption, shown_text(document)) if text)


def new_variant(document: Document) -> None:
    """Add an empty variant, and show it."""
    whole = document.whole
    name = _free_name(whole, f"Variant {len(whole.variants) + 1}")
    variant = Variant(id=unused_id(whole, name.lower()), name=name)
    document.edit_whole(f"Add {name}", added(whole, variant), variant.id)


def duplicate(document: Document, variant_id: str) -> None:
    """Add a variant with the same changes, and show it."""
    whole = document.whole
    variant = variant_called(whole, variant_id)
    name = _free_name(whole, f"{variant.title}, copy")
    copy = structs.replace(variant, id=unused_id(whole, name), name=name)
    text = f"Duplicate variant {variant.title}"
    document.edit_whole(text, added(whole, checked(copy)), copy.id)


def rename(document: Document, variant_id: str, name: str) -> None:
    """Give a variant another name.

    Raises
    ------
    UserError
        When the name is empty, too long, or that of another one.
    """
    whole = document.whole
    variant = variant_called(whole, variant_id)
    name = name.strip()
    if not name:
        raise UserError("A variant needs a name: type what it changes.")
    if any(v.title == name for v in whole.variants if v.id != variant.id):
        raise UserError(f"There is a variant “{name}” already; choose another name.")
    named = checked(structs.replace(variant, name=name))
    text = f"Rename variant {variant.title}"
    document.edit_whole(text, replaced(whole, named), _chosen(document))


def remove(document: Document, variant_id: str) -> None:
    """Remove a variant with its changes; the base stays as it is."""
    whole = document.whole
    variant = variant_called(whole, variant_id)
    text = f"Remove variant {variant.title}"
    document.edit_whole(text, removed(whole, variant.id), _chosen(document))


def move_to_base(
    document: Document, variant_id: str, items: Collection[str] | None = None
) -> None:
    """Make changes of a variant in the base, as one step; None: all of them.

    Raises
    ------
    UserError
        When the variant changes none of the items, or the base cannot take one.
    """
    variant = variant_called(document.whole, variant_id)
    own = ids_of(variant)
    chosen = list(own) if items is None else [id for id in own if id in items]
    if not chosen:
        which = "anything" if items is None else "what is selected"
        raise UserError(
            f"“{variant.title}” does not change {which}: select an item that it "
            "changes, or choose a change in the list of variants."
        )
    whole = document.whole
    for item_id in chosen:
        whole = moved_to_base(whole, variant.id, item_id)
    what = _named(document, variant, chosen)
    text = f"Move the change of {what} to the base"
    document.edit_whole(text, whole, _chosen(document))


def drop(document: Document, variant_id: str, item_id: str) -> None:
    """Let a variant leave an item as it is in the base."""
    variant = variant_called(document.whole, variant_id)
    after = dropped_from_variant(document.whole, variant.id, item_id)
    what = _named(document, variant, [item_id])
    text = f"Drop the change of {what} from {variant.title}"
    document.edit_whole(text, after, _chosen(document))


def keep(document: Document, variant_id: str, item_id: str) -> None:
    """Let a change stand although the base has changed under it."""
    variant = variant_called(document.whole, variant_id)
    after = kept_over_base(document.whole, variant.id, item_id)
    what = _named(document, variant, [item_id])
    text = f"Keep the change of {what} in {variant.title}"
    document.edit_whole(text, after, _chosen(document))


def changes_of(whole: Layout, variant: Variant) -> list[tuple[str, str]]:
    """Ids of what a variant changes, each with what it does to it in words."""
    base = whole.by_id()
    found = [
        *(
            (x.id, f"replaced: {kind_of(x)} {x.title}")
            for x in variant.replaced.items()
        ),
        *((x.id, f"added: {kind_of(x)} {x.title}") for x in variant.added.items()),
    ]
    for item_id in variant.removed:
        item = base.get(item_id)
        name = item_id if item is None else f"{kind_of(item)} {item.title}"
        found.append((item_id, f"removed: {name}"))
    return found


def kind_of(item: Item) -> str:
    """The kind of an item in words: "load case".

    Examples
    --------
    >>> from engine.circuits import LoadCase
    >>> kind_of(LoadCase(id="a"))
    'load case'
    """
    name = type(item).__name__
    return "".join(f" {c.lower()}" if c.isupper() else c for c in name).strip()


def count_text(variant: Variant) -> str:
    """ "changes 2 items"."""
    n = len(ids_of(variant))
    if n == 0:
        return "as the base so far"
    return f"changes {n} item{'' if n == 1 else 's'}"


def _chosen(document: Document) -> str | None:
    return None if document.variant is None else document.variant.id


def _free_name(whole: Layout, name: str) -> str:
    taken = {v.title for v in whole.variants}
    found, number = name, 2
    while found in taken:
        found, number = f"{name} {number}", number + 1
    return found


def _named(document: Document, variant: Variant, ids: list[str]) -> str:
    if len(ids) > 1:
        return f"{len(ids)} items"
    items = document.whole.by_id()
    items.update((x.id, x) for x in variant.replaced.items())
    items.update((x.id, x) for x in variant.added.items())
    return items[ids[0]].title if ids[0] in items else ids[0]
