"""Remarks on variants whose base has changed since they were drawn."""

from __future__ import annotations

from collections.abc import Iterator

from engine.edits import collections
from engine.faults import Remark
from engine.items import Item
from engine.layout import Layout
from engine.plain_values import digest
from engine.variant import Variant
from engine.variants import kinds_of


def variant_remarks(layout: Layout) -> Iterator[Remark]:
    """What a change of the base has done to the variants.

    Parameters
    ----------
    layout : Layout
        The base with its variants; a layout that `layout_of` made has none, and
        nothing to say.
    """
    for variant in layout.variants:
        yield from remarks_on(layout, variant)


def remarks_on(layout: Layout, variant: Variant) -> tuple[Remark, ...]:
    """The same of one of the base's variants."""
    items, kinds = layout.by_id(), kinds_of(layout)
    return (
        *_replaced(variant, items, kinds),
        *_removed(variant, items),
        *_added(variant, items, kinds),
    )


def _replaced(
    variant: Variant, items: dict[str, Item], kinds: dict[str, str]
) -> Iterator[Remark]:
    """W34: the base has changed under a replaced item; W35: it is gone."""
    against = {state.item: state.digest for state in variant.against}
    for item in variant.replaced.items():
        base = items.get(item.id)
        if base is None or kinds[item.id] != collections()[type(item)]:
            yield Remark(
                code="W35",
                severity="warning",
                sentence=f"Variant “{variant.title}” replaces “{item.title}”, which "
                "the base no longer has, so it is left out: drop the change from the "
                "variant, or add the item anew.",
                items=(variant.id, item.id),
            )
        elif base != item and against.get(item.id) != digest(base):
            yield Remark(
                code="W34",
                severity="warning",
                sentence=f"Variant “{variant.title}” replaces “{item.title}”, which "
                "has changed in the base since, and the variant does not follow: "
                "compare the two; then change the variant, drop the change or keep it.",
                items=(variant.id, item.id),
            )


def _removed(variant: Variant, items: dict[str, Item]) -> Iterator[Remark]:
    """W35: a removed item is gone from the base itself."""
    for item_id in variant.removed:
        if item_id not in items:
            yield Remark(
                code="W35",
                severity="warning",
                sentence=f"Variant “{variant.title}” removes “{item_id}”, which the "
                "base no longer has: drop the change from the variant.",
                items=(variant.id, item_id),
            )


def _added(
    variant: Variant, items: dict[str, Item], kinds: dict[str, str]
) -> Iterator[Remark]:
    """W36: the base has got another item with the id of an added one."""
    for item in variant.added.items():
        if item.id not in items or item.id in variant.removed:
            continue
        if kinds[item.id] == collections()[type(item)]:
            happens = "stands in its place"
        else:
            happens = "is left out"
        yield Remark(
            code="W36",
            severity="warning",
            sentence=f"Variant “{variant.title}” adds “{item.title}”, but the base "
            f"has another item with the id “{item.id}” by now, and the variant's "
            f"{happens}: copy one of them under another id.",
            items=(variant.id, item.id),
        )
