"""A variant: what is replaced, added and removed over the base of a layout.

The base is everything else in the layout. Title, settings, documents, reference levels,
profiles, backing drawings and revisions belong to the base alone, so that variants are
compared by the same measure.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated

from msgspec import Meta
from msgspec.structs import fields

from engine.circuits import Circuit, LoadCase
from engine.equipment import Equipment
from engine.items import Digest, Id, Item, Value
from engine.places import Enclosure, Receptor, Room, Storey, Zone
from engine.runs import Joint, Run


class VariantItems(Value, frozen=True, kw_only=True):
    """Items of the kinds that a variant can hold, in the fields of the layout."""

    storeys: Annotated[tuple[Storey, ...], Meta(max_length=200)] = ()
    rooms: Annotated[tuple[Room, ...], Meta(max_length=1000)] = ()
    enclosures: Annotated[tuple[Enclosure, ...], Meta(max_length=2000)] = ()
    circuits: Annotated[tuple[Circuit, ...], Meta(max_length=5000)] = ()
    equipment: Annotated[tuple[Equipment, ...], Meta(max_length=2000)] = ()
    runs: Annotated[tuple[Run, ...], Meta(max_length=20_000)] = ()
    joints: Annotated[tuple[Joint, ...], Meta(max_length=20_000)] = ()
    zones: Annotated[tuple[Zone, ...], Meta(max_length=2000)] = ()
    receptors: Annotated[tuple[Receptor, ...], Meta(max_length=5000)] = ()
    load_cases: Annotated[tuple[LoadCase, ...], Meta(max_length=200)] = ()

    def items(self) -> Iterator[Item]:
        """Every item, in the order of the file."""
        for field in fields(type(self)):
            yield from getattr(self, field.name)


class BaseState(Value, frozen=True, kw_only=True):
    """What an item of the base was when the variant replaced it."""

    item: Id
    digest: Digest


class Variant(Item, frozen=True, kw_only=True):
    """A named set of changes over the base.

    An item of `replaced` stands for the one of the base that has its id; `against` says
    what that one was when it was replaced.
    """

    replaced: VariantItems = VariantItems()
    added: VariantItems = VariantItems()
    removed: Annotated[tuple[Id, ...], Meta(max_length=50_000)] = ()
    against: Annotated[tuple[BaseState, ...], Meta(max_length=100_000)] = ()
