"""Equipment: sources placed in one go that close their currents by construction."""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta

from engine.circuits import Share
from engine.items import (
    Coordinate,
    Degrees,
    Id,
    Item,
    Label,
    Length,
    Name,
    Point2,
    Point3,
    Value,
    Volts,
)
from engine.runs import Bar, Carried, Round


class Terminal(Value, frozen=True, kw_only=True):
    """A terminal of a transformer."""

    label: Label
    at: Point3


class Transformer(Item, tag="transformer", frozen=True, kw_only=True):
    """Low-voltage terminals and their star closure.

    Each terminal is joined straight to `star`; its current is that of the runs that
    end there. Ends: one per terminal label, and "star". The stray field of core and
    windings is not modelled.
    """

    terminals: Annotated[tuple[Terminal, ...], Meta(min_length=1, max_length=12)]
    star: Point3
    #: [VA]
    rated_power: Annotated[float, Meta(gt=0, le=1e10)] | None = None
    #: Between lines, at the low-voltage side. [V]
    voltage: Volts | None = None
    #: What stands on the floor, for drawing; empty when unknown.
    footprint: Annotated[tuple[Point2, ...], Meta(max_length=1000)] = ()


class Pole(Value, frozen=True, kw_only=True):
    """One bar of a board: where it lies across the board, and where it is fed."""

    label: Label
    #: Across the board's direction on plan (to the left), and above the datum. [m]
    across: Coordinate = 0.0
    z: Coordinate
    #: Along the board, where the incoming conductor meets the bar. [m]
    fed_at: Coordinate
    shape: Round | Bar = Bar(width=0.1, thickness=0.01)


class Dropper(Value, frozen=True, kw_only=True):
    """The conductors that lead a way from the bars out of the board.

    From the bar to a row `setback` to the left of the board's direction, spread
    `pitch` apart in pole order about the way's position, then up or down to
    `foot_z`.
    """

    pitch: Length
    setback: Coordinate
    foot_z: Coordinate
    shape: Round | Bar = Round()


class Way(Value, frozen=True, kw_only=True):
    """An outgoing way: the circuits it carries leave the bars at `position`.

    `closed` joins the droppers at their foot, on the row at the way's position: the
    circuit goes on with no net current and is not drawn further.
    """

    name: Name
    position: Coordinate
    circuits: Carried = ()
    dropper: Dropper | None = None
    closed: bool = False


class Board(Item, tag="board", frozen=True, kw_only=True):
    """Bars along a line on plan; the current tapers at each way.

    Positions along the board are measured from `origin` in `direction` (0 is +x,
    counter-clockwise). Ends: "incoming/LABEL" and "WAY/LABEL", at the foot of the
    way's dropper or at the bar.
    """

    origin: Point2
    direction: Degrees = 0.0
    poles: Annotated[tuple[Pole, ...], Meta(min_length=1, max_length=12)]
    ways: Annotated[tuple[Way, ...], Meta(max_length=100)] = ()
    rated_current: Length | None = None
    footprint: Annotated[tuple[Point2, ...], Meta(max_length=1000)] = ()


class ConductorLoop(Item, tag="loop", frozen=True, kw_only=True):
    """A closed loop of one conductor: a battery string, a UPS loop, a coil turn.

    The path closes from its last vertex to its first.
    """

    kind: Literal["battery", "UPS", "coil", "other"] = "other"
    path: Annotated[tuple[Point3, ...], Meta(min_length=3, max_length=500)]
    circuit: Id
    label: Label
    share: Share = 1.0
    turns: Annotated[int, Meta(ge=1, le=100_000)] = 1
    shape: Round = Round()


Equipment = Transformer | Board | ConductorLoop
