"""Layouts of variants: the base with changes applied, and edits that go into them.

`layout_of` gives a layout like any other, without variants of its own. What a variant
does not change is the identical item of the base.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from functools import lru_cache
from typing import Any

from msgspec import structs

from engine.edits import added as with_added
from engine.edits import changed_ids, collections
from engine.edits import removed as without
from engine.edits import replaced as with_replaced
from engine.errors import UserError
from engine.items import Item
from engine.layout import Layout
from engine.plain_values import digest
from engine.run_conductors import Same
from engine.variant import BaseState, Variant, VariantItems

#: Kinds of items that a variant can hold, by their field of the layout.
KINDS: tuple[str, ...] = VariantItems.__struct_fields__

_N_KEPT = 64


def variant_called(layout: Layout, name: str) -> Variant:
    """The variant that has this id or, if none has, this name.

    Raises
    ------
    UserError
        When there is none; the sentence names those there are.
    """
    for variant in layout.variants:
        if variant.id == name:
            return variant
    for variant in layout.variants:
        if variant.name == name:
            return variant
    known = ", ".join(f"“{variant.title}”" for variant in layout.variants)
    has = f"it has {known}" if known else "it has none"
    raise UserError(f"There is no variant “{name}” in this layout; {has}.")


def layout_of(layout: Layout, variant_id: str | None) -> Layout:
    """The base with a variant applied; None: the base alone.

    An item that the variant replaces but the base no longer has is left out, and so is
    one whose id another kind of item has taken; `variant_remarks` tells of both. An
    item that the variant adds stands before one that the base has got meanwhile.

    Parameters
    ----------
    layout : Layout
        The base with its variants.
    variant_id : str or None

    Returns
    -------
    Layout
        Without variants. The same base and variant give the identical layout again.

    Raises
    ------
    UserError
        When there is no such variant.
    """
    variant = None if variant_id is None else variant_called(layout, variant_id)
    return _applied(Same(layout), variant_id if variant is None else variant.id)


@lru_cache(maxsize=_N_KEPT)
def _applied(same: Same[Layout], variant_id: str | None) -> Layout:
    layout = same.value
    if variant_id is None:
        return structs.replace(layout, variants=()) if layout.variants else layout
    variant = variant_called(layout, variant_id)
    changes: dict[str, Any] = {"variants": ()}
    kinds = kinds_of(layout)
    removed = {id for id in variant.removed if kinds.get(id) in KINDS}
    for name in KINDS:
        held: tuple[Item, ...] = getattr(layout, name)
        own = (*getattr(variant.replaced, name), *getattr(variant.added, name))
        newer = {x.id: x for x in own if kinds.get(x.id) == name}
        new = tuple(
            x
            for x in getattr(variant.added, name)
            if x.id not in kinds or x.id in removed
        )
        kept = tuple(_newer(x, newer) for x in held if x.id not in removed)
        if new or len(kept) < len(held) or _differ(kept, held):
            changes[name] = (*kept, *new)
    return structs.replace(layout, **changes)


def edited_in_variant(layout: Layout, variant_id: str, after: Layout) -> Layout:
    """The layout whose variant says what was edited while it was chosen.

    Parameters
    ----------
    layout : Layout
        The base with its variants, before the edit.
    after : Layout
        What `layout_of(layout, variant_id)` became by the edit. What a variant cannot
        hold (settings, levels, profiles, …) is edited in the base; the variants are
        those of `layout`.

    Returns
    -------
    Layout
        `layout` itself when nothing was edited.

    Raises
    ------
    UserError
        When there is no such variant, or an item has the id of a variant.
    """
    variant = variant_called(layout, variant_id)
    before = layout_of(layout, variant.id)
    if not changed_ids(before, after):
        return layout
    taken = {v.id for v in layout.variants}
    for item in after.items():
        if item.id in taken:
            raise UserError(
                f"There is a variant with the id “{item.id}” already; "
                "choose another id."
            )
    in_base = {
        name: getattr(after, name)
        for name in dict.fromkeys(collections().values())
        if name not in KINDS and name != "variants"
    }
    base = structs.replace(layout, **in_base)
    edited = _difference(base, variant, after)
    return with_replaced(base, edited)


def _difference(base: Layout, variant: Variant, after: Layout) -> Variant:
    """The variant that makes `after` of `base`."""
    replaced: dict[str, tuple[Item, ...]] = {}
    added: dict[str, tuple[Item, ...]] = {}
    removed: list[str] = []
    gone = _gone(base, variant)
    for name in KINDS:
        old = {item.id: item for item in getattr(base, name)}
        new = {item.id: item for item in getattr(after, name)}
        stale = tuple(x for x in getattr(variant.replaced, name) if x.id in gone)
        changed = tuple(x for id, x in new.items() if id in old and _is_new(old[id], x))
        replaced[name] = (*changed, *(x for x in stale if x.id not in new))
        added[name] = tuple(x for id, x in new.items() if id not in old)
        removed.extend(id for id in old if id not in new)
    removed.extend(id for id in variant.removed if id in gone)
    return _with(base, variant, replaced, added, dict.fromkeys(removed))


def _with(
    base: Layout,
    variant: Variant,
    replaced: Mapping[str, tuple[Item, ...]],
    added: Mapping[str, tuple[Item, ...]],
    removed: Iterable[str],
) -> Variant:
    """A variant with other contents; what it was against is kept or stated anew."""
    known = {state.item: state for state in variant.against}
    items = base.by_id()
    own = VariantItems(**replaced)  # type: ignore[arg-type]
    against = []
    for item in own.items():
        if item.id in known:
            against.append(known[item.id])
        elif item.id in items:
            against.append(BaseState(item=item.id, digest=digest(items[item.id])))
    return structs.replace(
        variant,
        replaced=own,
        added=VariantItems(**added),  # type: ignore[arg-type]
        removed=tuple(removed),
        against=tuple(against),
    )


def ids_of(variant: Variant) -> tuple[str, ...]:
    """Ids of all that a variant replaces, adds or removes, in this order."""
    own = (*variant.replaced.items(), *variant.added.items())
    return tuple(dict.fromkeys([*(item.id for item in own), *variant.removed]))


def moved_to_base(
    layout: Layout, variant_id: str, item_id: str | None = None
) -> Layout:
    """The layout with a change of a variant made in the base; None: all of them.

    Other variants that replace the same item keep theirs, with a remark.

    Raises
    ------
    UserError
        When there is no such variant, the base has no item to replace any more, or has
        another one with the id of an added item.
    ValueError
        When the variant does not change the item.
    """
    variant = variant_called(layout, variant_id)
    chosen = _chosen(variant, item_id)
    kinds = kinds_of(layout)
    replaced = [x for x in variant.replaced.items() if x.id in chosen]
    added = [x for x in variant.added.items() if x.id in chosen]
    for item in replaced:
        if kinds.get(item.id) != collections()[type(item)]:
            raise UserError(
                f"“{item.title}” was not moved to the base: the base no longer has an "
                f"item “{item.id}” of its kind. Draw it there, or drop the change."
            )
    for item in added:
        if item.id in kinds or any(item.id == v.id for v in layout.variants):
            raise UserError(
                f"“{item.title}” was not moved to the base: the base has another item "
                f"with the id “{item.id}” by now. Copy it under another id."
            )
    leaving = [id for id in variant.removed if id in chosen and kinds.get(id) in KINDS]
    base = with_replaced(layout, *replaced)
    base = without(base, *leaving) if leaving else base
    base = with_added(base, *added) if added else base
    return with_replaced(base, _without(base, variant, chosen))


def dropped_from_variant(
    layout: Layout, variant_id: str, item_id: str | None = None
) -> Layout:
    """The layout whose variant no longer changes an item; None: nothing any more.

    Raises
    ------
    UserError
        When there is no such variant.
    ValueError
        When the variant does not change the item.
    """
    variant = variant_called(layout, variant_id)
    chosen = _chosen(variant, item_id)
    return with_replaced(layout, _without(layout, variant, chosen))


def kept_over_base(layout: Layout, variant_id: str, item_id: str) -> Layout:
    """The layout whose variant knows the item of the base as it is now.

    For a change that stands although the base has changed under it; raises as
    `dropped_from_variant`.
    """
    variant = variant_called(layout, variant_id)
    _chosen(variant, item_id)
    items = layout.by_id()
    against = [state for state in variant.against if state.item != item_id]
    if item_id in items:
        against.append(BaseState(item=item_id, digest=digest(items[item_id])))
    return with_replaced(layout, structs.replace(variant, against=tuple(against)))


def _chosen(variant: Variant, item_id: str | None) -> frozenset[str]:
    own = frozenset(ids_of(variant))
    if item_id is None:
        return own
    if item_id not in own:
        raise ValueError(f"variant {variant.id} does not change {item_id}")
    return frozenset({item_id})


def _without(base: Layout, variant: Variant, chosen: Collection[str]) -> Variant:
    def left(items: VariantItems) -> dict[str, tuple[Item, ...]]:
        return {
            name: tuple(x for x in getattr(items, name) if x.id not in chosen)
            for name in KINDS
        }

    removed = [id for id in variant.removed if id not in chosen]
    return _with(base, variant, left(variant.replaced), left(variant.added), removed)


def _gone(base: Layout, variant: Variant) -> frozenset[str]:
    """Ids that the variant replaces or removes and the base no longer has."""
    kinds = kinds_of(base)
    own = {x.id: collections()[type(x)] for x in variant.replaced.items()}
    lost = {id for id, kind in own.items() if kinds.get(id) != kind}
    return frozenset(lost | {id for id in variant.removed if id not in kinds})


def kinds_of(layout: Layout) -> dict[str, str]:
    """The field of the layout that holds each item, by id."""
    return {item.id: collections()[type(item)] for item in layout.items()}


def _newer(item: Item, newer: Mapping[str, Item]) -> Item:
    new = newer.get(item.id, item)
    return item if new == item else new


def _differ(one: tuple[Item, ...], other: tuple[Item, ...]) -> bool:
    return any(a is not b for a, b in zip(one, other, strict=True))


def _is_new(old: Item, new: Item) -> bool:
    return old is not new and old != new
