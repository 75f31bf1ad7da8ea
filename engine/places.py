"""Places: storeys, rooms, enclosures, and where people and equipment are."""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta

from engine.items import (
    Amperes,
    Coordinate,
    Degrees,
    Digest,
    Distance,
    Id,
    Item,
    Length,
    Name,
    Outline,
    Point2,
    Point3,
    Text,
    Value,
)

#: The category must be chosen; empty stands for "not chosen yet".
Category = Literal[
    "",
    "general public, long stay",
    "general public, short stay",
    "workers",
    "persons at particular risk",
    "equipment",
]

SpatialRule = Literal[
    "maximum at heights", "maximum over volume", "three-height mean", "area mean"
]

Heights = Annotated[tuple[Coordinate, ...], Meta(min_length=1, max_length=50)]


#: Path of a file, with / between its parts where it is relative.
FilePath = Annotated[str, Meta(max_length=4000)]

#: A part of a value.
Tolerance = Annotated[float, Meta(ge=0, le=10)]


class Storey(Item, frozen=True, kw_only=True):
    """A storey of the building, by the level of its floor above the datum."""

    floor_level: Coordinate


class Room(Item, frozen=True, kw_only=True):
    """An outline on plan between a floor and a finished ceiling."""

    outline: Outline
    storey: Id | None = None
    floor_level: Coordinate
    ceiling_level: Coordinate
    soffit_level: Coordinate | None = None
    #: Thickness of the slab above. [m]
    slab_above: Length | None = None


class Enclosure(Item, frozen=True, kw_only=True):
    """A footprint and z range where nobody can stand.

    Closed: just the footprint is masked, since people walk and lean along its panels.
    Open for work: only conductors are masked, since hands reach in.

    `front_clearance` is the nearest distance that a worker's body keeps from the open
    front: the working distance of the trade, stated by who plans the work. It counts
    only while the enclosure is open for work; nobody's body is then nearer to the front
    nor inside, so that both are masked. Whoever assesses hands and arms leaves it
    empty.
    """

    footprint: Outline
    z_from: Coordinate
    z_to: Coordinate
    state: Literal["closed", "open for work"] = "closed"
    #: Typed by the user, never preset. [m]
    front_clearance: Length | None = None
    #: Where the open front faces on plan, 0 is +x; None: every side opens. [degrees]
    front: Degrees | None = None


class Uncertainty(Value, frozen=True, kw_only=True):
    """Expanded uncertainty U = relative · B + absolute, at coverage factor k."""

    relative: Annotated[float, Meta(ge=0, le=10)] = 0.25
    #: [T]
    absolute: Annotated[float, Meta(ge=0, le=10)] = 0.0
    coverage: Annotated[float, Meta(gt=0, le=10)] = 2.0
    basis: Text = "assumed"
    #: "from the budget": the coverage factor times the standard uncertainty of the
    #: place's own budget stands instead of the relative part.
    kind: Literal["entered", "from the budget"] = "entered"


class Tolerances(Value, frozen=True, kw_only=True):
    """Standard uncertainties (k = 1) of what a budget is made of.

    The defaults are assumed: 5 % of the current, 7 mm on 150 mm of spacing, 50 mm of
    distance (35 mm each of the run and of the place). Sharing of parallel conductors
    is not counted unless entered.
    """

    #: Of every circuit's current, as a part of it.
    current: Tolerance = 0.05
    #: Of every circuit's angle against the others. [degrees]
    angle: Annotated[float, Meta(ge=0, le=180)] = 3.0
    #: Of each line's current by itself, in step and across it, as a part of it.
    unbalance: Tolerance = 0.03
    #: Of an entered net current, as a part of it.
    net_current: Tolerance = 0.1
    #: Of what each of several parallel conductors carries, as a part of its share.
    sharing: Tolerance = 0.0
    #: Of the spacings in a section, as a part of them.
    pitch: Tolerance = 0.05
    #: Of a run or an equipment along each axis. [m]
    position: Annotated[float, Meta(ge=0, le=100)] = 0.035
    #: Of the place itself along each axis. [m]
    place: Annotated[float, Meta(ge=0, le=100)] = 0.035
    #: Of the calculation, steel and crowded current left out, as a part of the value.
    model: Tolerance = 0.03
    #: What is measured counts with this part of the tolerance.
    measured_part: Tolerance = 0.5


class DecisionRule(Value, frozen=True, kw_only=True):
    """How the summary counts the states; the states themselves are always printed."""

    kind: Literal["none chosen", "additive", "value only"] = "none chosen"
    chosen_by: Name = ""


class Zone(Item, frozen=True, kw_only=True):
    """Where people or equipment are, and how their exposure is evaluated.

    Heights and the volume's range are above the zone's own floor: `floor_level`, or
    the storey's.
    """

    outline: Outline
    storey: Id | None = None
    floor_level: Coordinate | None = None
    heights: Heights = (0.5, 1.0, 1.5)
    #: Lowest and highest of the volume rule; None: of the heights. [m]
    volume: tuple[Coordinate, Coordinate] | None = None
    rule: SpatialRule = "maximum at heights"
    category: Category = ""
    part_of_body: Name = ""
    use: Name = ""
    hours: Name = ""
    levels: tuple[Id, ...] = ()
    #: Kept from every conductor's surface. [m]
    clearance: Distance = 0.2
    #: None: the layout's.
    uncertainty: Uncertainty | None = None


class MeasuredValue(Value, frozen=True, kw_only=True):
    """A site measurement at a receptor, with what is known of the load then."""

    #: RMS resultant. [T]
    flux_density: Annotated[float, Meta(ge=0, le=100)]
    #: Of which field; empty: the alternating where any flows, else the direct.
    kind: Literal["", "AC", "DC"] = ""
    date: Name = ""
    instrument: Name = ""
    load_note: Text = ""
    load: Amperes | None = None


class Receptor(Item, frozen=True, kw_only=True):
    """A point that matters, with the reason why."""

    at: Point3
    reason: Text = ""
    use: Name = ""
    category: Category = ""
    levels: tuple[Id, ...] = ()
    measured: MeasuredValue | None = None
    uncertainty: Uncertainty | None = None


class Profile(Item, frozen=True, kw_only=True):
    """A line along which the field is plotted against distance."""

    path: Annotated[tuple[Point3, ...], Meta(min_length=2, max_length=200)]


class BackingDrawing(Item, frozen=True, kw_only=True):
    """A picture under the plan or an elevation, calibrated by two points.

    `picture` is the embedded copy (base64); `first` and `second` are picture points
    in pixels whose distance is `distance`; `origin` is where `first` lies.

    A linked one holds no copy, but the path of its file in `linked_file`, relative to
    the layout's file where it can be; it shows while that file has the SHA-256.
    """

    file_name: Name = ""
    sha256: Digest = ""
    view: Literal["plan", "looking +x", "looking +y"] = "plan"
    page: Annotated[int, Meta(ge=1, le=10_000)] = 1
    first: Point2 = (0.0, 0.0)
    second: Point2 = (100.0, 0.0)
    distance: Length = 1.0
    origin: Point2 = (0.0, 0.0)
    turn: float = 0.0
    opacity: Annotated[float, Meta(ge=0, le=1)] = 0.5
    locked: bool = False
    picture: Annotated[str, Meta(max_length=50_000_000)] = ""
    linked_file: FilePath = ""
