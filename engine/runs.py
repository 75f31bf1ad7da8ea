"""Runs: a route through the room with a section across it, and joints between ends.

Looking along the route, u is to the right and v is up; slots lie at (u, v). The
formations describe a section by its dimensions; `sections.slots` gives their slots.
"""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta

from engine.circuits import Share
from engine.items import (
    Coordinate,
    Degrees,
    Distance,
    Id,
    Item,
    Label,
    Length,
    Name,
    Point3,
    Value,
)

Order = Annotated[tuple[Label, ...], Meta(min_length=1, max_length=50)]
Count = Annotated[int, Meta(ge=1, le=20)]


class Round(Value, tag="round", frozen=True, kw_only=True):
    """A round conductor or single-core cable; the default size is an assumption."""

    diameter: Length = 0.02


class Bar(Value, tag="bar", frozen=True, kw_only=True):
    """A rectangular bar; `turn` 0 lays its width along u, 90 stands it on edge."""

    width: Length
    thickness: Length
    turn: Degrees = 0.0


class Multicore(Value, tag="multicore", frozen=True, kw_only=True):
    """A cable of several cores, straight (conservative) or as its net current only.

    The cores stand evenly on a circle through their centres, the first one at the
    top turned by `turn`, the others following clockwise looking along the route.
    """

    outside_diameter: Length
    core_diameter: Length
    core_circle_diameter: Length
    cores: Order = ("L1", "L2", "L3", "N")
    model: Literal["straight cores", "net current only"] = "straight cores"
    turn: Degrees = 0.0


Shape = Round | Bar | Multicore


class SlotLoad(Value, frozen=True, kw_only=True):
    """A share of one circuit conductor's current, carried by a slot."""

    circuit: Id
    label: Label
    share: Annotated[float, Meta(ge=-1, le=1)] = 1.0


class Slot(Value, frozen=True, kw_only=True):
    """A place in the section. Its current is the sum of its loads.

    In a multicore slot each core carries the loads of its own label.
    """

    name: Name
    u: Coordinate
    v: Coordinate
    shape: Shape = Round()
    loads: tuple[SlotLoad, ...] = ()


class CircuitShare(Value, frozen=True, kw_only=True):
    """A circuit that a formation or a board's way carries, whole or in part."""

    circuit: Id
    share: Share = 1.0


Carried = tuple[CircuitShare, ...]


class FreeSection(Value, tag="free", frozen=True, kw_only=True):
    """Slots placed one by one."""

    slots: Annotated[tuple[Slot, ...], Meta(min_length=1, max_length=200)]


class Flat(Value, tag="flat", frozen=True, kw_only=True):
    """Conductors side by side, in order from left to right, centred on the route."""

    circuits: Carried
    order: Order = ("L1", "L2", "L3", "N")
    pitch: Length = 0.1
    shape: Round | Bar = Bar(width=0.1, thickness=0.01, turn=90)


class Vertical(Value, tag="vertical", frozen=True, kw_only=True):
    """Conductors one above another, in order from top to bottom."""

    circuits: Carried
    order: Order = ("L1", "L2", "L3", "N")
    pitch: Length = 0.1
    shape: Round | Bar = Bar(width=0.1, thickness=0.01)


class Trefoil(Value, tag="trefoil", frozen=True, kw_only=True):
    """Three conductors on an equilateral triangle, centred on the route.

    `order` starts at the apex and goes clockwise looking along the route; a fourth
    label stands beside the triangle, `neutral_pitch` to the right of its lower right
    conductor (or of the right one of an apex-down triangle). Touching when `pitch`
    is the diameter.
    """

    circuits: Carried
    order: Annotated[tuple[Label, ...], Meta(min_length=3, max_length=4)] = (
        "L1", "L2", "L3",
    )  # fmt: skip
    pitch: Length = 0.028
    neutral_pitch: Length = 0.028
    apex: Literal["up", "down"] = "up"
    shape: Round = Round(diameter=0.028)


class Quad(Value, tag="quad", frozen=True, kw_only=True):
    """Four conductors on a square: top left, top right, bottom right, bottom left."""

    circuits: Carried
    order: Annotated[tuple[Label, ...], Meta(min_length=4, max_length=4)] = (
        "L1", "L2", "L3", "N",
    )  # fmt: skip
    pitch: Length = 0.028
    shape: Round = Round(diameter=0.028)


class ParallelSets(Value, tag="parallel sets", frozen=True, kw_only=True):
    """Several sets of the same formation, each with a phase order of its own.

    Sets follow each other to the right (or downwards), `set_pitch` from centre to
    centre. Equal sharing between the sets is an assumption.
    """

    circuits: Carried
    orders: Annotated[tuple[Order, ...], Meta(min_length=1, max_length=20)]
    formation: Literal["flat", "vertical", "trefoil", "quad"] = "flat"
    pitch: Length = 0.028
    set_pitch: Length = 0.112
    direction: Literal["right", "down"] = "right"
    shape: Round | Bar = Round(diameter=0.028)


class StackedBars(Value, tag="stacked bars", frozen=True, kw_only=True):
    """One or several bars per pole, on edge or flat, poles beside or above each other.

    The bars of a pole lie face to face, `gap` apart, their middle at the pole's place.
    """

    circuits: Carried
    order: Order = ("L1", "L2", "L3", "N")
    bars_per_pole: Count = 1
    width: Length = 0.1
    thickness: Length = 0.01
    gap: Distance = 0.01
    pitch: Length = 0.1
    stand: Literal["on edge", "flat"] = "on edge"
    direction: Literal["right", "down"] = "right"


class Sandwich(Value, tag="sandwich", frozen=True, kw_only=True):
    """Insulated bars face to face, as in compact busbar trunking.

    The bars stand on edge and follow each other to the right, or lie flat and follow
    each other downwards; `insulation` is the gap between neighbouring faces.
    """

    circuits: Carried
    order: Order = ("L1", "L2", "L3", "N")
    width: Length = 0.1
    thickness: Length = 0.006
    insulation: Distance = 0.002
    direction: Literal["right", "down"] = "right"


Section = (
    FreeSection
    | Flat
    | Vertical
    | Trefoil
    | Quad
    | ParallelSets
    | StackedBars
    | Sandwich
)

RunKind = Literal[
    "busbar",
    "busbar trunking",
    "cable tray",
    "cable ladder",
    "conduit",
    "free conductor",
    "stray path",
]


class Connection(Value, frozen=True, kw_only=True):
    """Where a run's end fans out to: an equipment's terminals, or a way of a board.

    Each slot goes straight to the terminal of its first load's label, unless `terminal`
    names one for all of them.
    """

    equipment: Id
    way: Name = ""
    terminal: Name = ""


class Run(Item, frozen=True, kw_only=True):
    """A route with a section; current is positive from first vertex to last."""

    kind: RunKind = "free conductor"
    route: Annotated[tuple[Point3, ...], Meta(min_length=2, max_length=500)]
    section: Section
    #: Turn of the section about each leg; empty: none. [degrees]
    turns: Annotated[tuple[Degrees, ...], Meta(max_length=499)] = ()
    start: Connection | None = None
    end: Connection | None = None
    #: Rated current of one pole, all its conductors together. [A]
    rated_current: Length | None = None
    containment: Literal["not stated", "steel", "not steel"] = "not stated"


class SlotEnd(Value, frozen=True, kw_only=True):
    """One end of a slot of a run, or a terminal of an equipment."""

    item: Id
    slot: Name
    end: Literal["start", "end", "terminal"]


class Joint(Item, frozen=True, kw_only=True):
    """Slot ends that meet: each runs straight to `at`; their currents sum to zero."""

    ends: Annotated[tuple[SlotEnd, ...], Meta(min_length=2, max_length=400)]
    #: None: the middle of the ends.
    at: Point3 | None = None
