"""Parts of a form: what it shows of items, and what entering a value does.

No Qt. A part belongs to a value at a dotted name; `read` and `change` replace that for
values that live elsewhere (the current of a run's circuit) or take others along.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from app.panels.kinds import Kind, Rows, Terms
from engine.edits import checked, replaced
from engine.entered_values import value_at, with_value
from engine.items import Item
from engine.layout import Layout
from engine.origins import is_assumed, origin_of

#: Longest value that the sentence of an undo step tells.
_LONGEST = 40


@dataclass(frozen=True)
class Part:
    """One value that can be edited.

    Attributes
    ----------
    path : str
        Dotted name within the item.
    label : str
        What stands before the field.
    kind : Kind
    tip : str
        What the value means, with its unit.
    noun : str
        How the undo step calls it; empty: the label.
    read : callable or None
        (layout, item) → value.
    change : callable or None
        (layout, items, value) → layout. Raises `UserError`.
    note : str
        Stands under the field.
    """

    path: str
    label: str
    kind: Kind
    tip: str
    noun: str = ""
    read: Callable[[Layout, Item], Any] | None = None
    change: Callable[[Layout, tuple[Item, ...], Any], Layout] | None = None
    note: str = ""

    def value(self, layout: Layout, item: Item) -> Any:
        """The value that an item has."""
        if self.read is not None:
            return self.read(layout, item)
        return value_at(item, self.path)

    def is_assumed(self, items: Sequence[Item]) -> bool:
        """Whether nothing confirms the value of any of the items."""
        return any(is_assumed(item, self.path) for item in items)

    def has_origin(self, items: Sequence[Item]) -> bool:
        """Whether it is stated where the value of the one item comes from."""
        return len(items) == 1 and origin_of(items[0], self.path) is not None

    def entered(self, layout: Layout, items: tuple[Item, ...], value: Any) -> Layout:
        """The layout after the value was entered for all of the items.

        Raises
        ------
        UserError
            When an item cannot have the value.
        """
        if self.change is not None:
            return self.change(layout, items, value)
        return replaced(
            layout, *(checked(with_value(item, self.path, value)) for item in items)
        )

    def sentence(self, items: Sequence[Item], value: Any, terms: Terms) -> str:
        """The text of the undo step."""
        what = self.noun or self.label[:1].lower() + self.label[1:]
        text = " ".join(self.kind.text(value, terms).split())
        if not text:
            return f"Clear the {what} of {called(items)}"
        if len(text) > _LONGEST or isinstance(self.kind, Rows):
            return f"Change the {what} of {called(items)}"
        return f"Set the {what} of {called(items)} to {text}"


@dataclass(frozen=True)
class Group:
    """Parts under one heading that belong to the same items."""

    heading: str
    items: tuple[Item, ...]
    parts: tuple[Part, ...]
    #: Stands under the heading.
    note: str = ""


def called(items: Sequence[Item]) -> str:
    """How a sentence calls the items."""
    if len(items) != 1:
        return f"{len(items)} items"
    if items[0].id in ("settings", "title"):
        return "the layout"
    return items[0].title
