"""The layout: one immutable value that holds everything a user can edit.

Every edit makes a new layout; items that did not change keep their identity.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

from msgspec import Meta

from engine.circuits import ENTERED_CURRENTS, Circuit, LoadCase
from engine.criteria import ReferenceLevel
from engine.equipment import Equipment
from engine.items import (
    ConfirmedRemark,
    Hertz,
    Id,
    IssuedRevision,
    Item,
    Length,
    SourceDocument,
    TitleData,
    Value,
)
from engine.places import (
    BackingDrawing,
    DecisionRule,
    Enclosure,
    Profile,
    Receptor,
    Room,
    Storey,
    Tolerances,
    Uncertainty,
    Zone,
)
from engine.runs import Joint, Run
from engine.variant import Variant

FluxDensityUnit = Literal["µT", "mT", "nT", "mG", "G", "A/m"]


class Settings(Item, frozen=True, kw_only=True):
    """What holds for the whole layout: units, map range, uncertainty, rule."""

    id: Id = "settings"
    frequency: Hertz = 50.0
    flux_density_unit: FluxDensityUnit = "µT"
    length_unit: Literal["m", "mm", "ft", "in"] = "m"
    paper: Literal["A4", "A3", "Letter", "Tabloid"] = "A4"
    #: Range of every map. [T]
    map_low: Annotated[float, Meta(gt=0, le=100)] = 1e-7
    map_high: Annotated[float, Meta(gt=0, le=100)] = 1e-3
    map_scale: Literal["logarithmic", "linear"] = "logarithmic"
    #: Step of exported grids. [m]
    grid_step: Length = 0.25
    uncertainty: Uncertainty = Uncertainty()
    #: What budgets of uncertainty are made of.
    tolerances: Tolerances = Tolerances()
    decision_rule: DecisionRule = DecisionRule()
    #: Direction of north on plan, counter-clockwise from +x. None: not stated.
    north: float | None = None


class Layout(Value, frozen=True, kw_only=True):
    """Everything that a user can edit, as tuples of items with unique ids."""

    title: TitleData = TitleData(id="title")
    settings: Settings = Settings()
    documents: Annotated[tuple[SourceDocument, ...], Meta(max_length=1000)] = ()
    storeys: Annotated[tuple[Storey, ...], Meta(max_length=200)] = ()
    rooms: Annotated[tuple[Room, ...], Meta(max_length=1000)] = ()
    enclosures: Annotated[tuple[Enclosure, ...], Meta(max_length=2000)] = ()
    circuits: Annotated[tuple[Circuit, ...], Meta(max_length=5000)] = ()
    equipment: Annotated[tuple[Equipment, ...], Meta(max_length=2000)] = ()
    runs: Annotated[tuple[Run, ...], Meta(max_length=20_000)] = ()
    joints: Annotated[tuple[Joint, ...], Meta(max_length=20_000)] = ()
    zones: Annotated[tuple[Zone, ...], Meta(max_length=2000)] = ()
    receptors: Annotated[tuple[Receptor, ...], Meta(max_length=5000)] = ()
    levels: Annotated[tuple[ReferenceLevel, ...], Meta(max_length=500)] = ()
    load_cases: Annotated[tuple[LoadCase, ...], Meta(max_length=200)] = ()
    profiles: Annotated[tuple[Profile, ...], Meta(max_length=500)] = ()
    variants: Annotated[tuple[Variant, ...], Meta(max_length=50)] = ()
    backing_drawings: Annotated[tuple[BackingDrawing, ...], Meta(max_length=50)] = ()
    revisions: Annotated[tuple[IssuedRevision, ...], Meta(max_length=500)] = ()
    confirmed_remarks: Annotated[
        tuple[ConfirmedRemark, ...], Meta(max_length=5000)
    ] = ()

    def items(self) -> Iterator[Item]:
        """Every item, in the order of the file."""
        for name in self.__struct_fields__:
            value = getattr(self, name)
            if isinstance(value, tuple):
                yield from value
            else:
                yield value

    def by_id(self) -> dict[str, Item]:
        """Items by their id; of two with the same id, the last."""
        return {item.id: item for item in self.items()}

    @property
    def cases(self) -> tuple[LoadCase, ...]:
        """The load cases, or the one that every layout has."""
        return self.load_cases or (ENTERED_CURRENTS,)
