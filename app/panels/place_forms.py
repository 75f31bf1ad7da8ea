"""What can be edited of places: rooms, zones, receptors and the rest."""

from __future__ import annotations

from typing import Any, get_args

from app.panels.kinds import (
    AMPERES,
    DEGREES,
    PERCENT,
    Amount,
    Choice,
    Column,
    Distance,
    Distances,
    FluxDensity,
    Lines,
    Numbers,
    Option,
    Rows,
    Several,
    Words,
    YesNo,
    one_of,
)
from app.panels.parts import Part
from engine.edits import replaced
from engine.entered_values import with_value
from engine.items import Item
from engine.layout import Layout
from engine.places import (
    Category,
    MeasuredValue,
    Receptor,
    SpatialRule,
    Uncertainty,
    Zone,
)

NAME = Part("name", "Name", Words(), "What the item is called in lists and in print")
NOTE = Part("note", "Note", Lines(), "Anything worth knowing; printed with the item")


def between(rows: tuple[Any, ...], at: int, *, is_closed: bool) -> tuple[float, ...]:
    """A place half way to the next vertex, or a metre on behind the last."""
    here = rows[at]
    if at + 1 < len(rows) or is_closed:
        there = rows[(at + 1) % len(rows)]
        return tuple((a + b) / 2 for a, b in zip(here, there, strict=True))
    before = rows[at - 1]
    length = sum((a - b) ** 2 for a, b in zip(here, before, strict=True)) ** 0.5 or 1.0
    return tuple(a + (a - b) / length for a, b in zip(here, before, strict=True))


def plan_table(path: str, label: str, tip: str, *, fewest: int = 3) -> Part:
    """A part for an outline on plan."""
    columns = tuple(
        Column(str(i), axis, Distance(), f"{axis} of the corner", 24)
        for i, axis in enumerate("xy")
    )

    def further(_layout: Layout, rows: tuple[Any, ...], at: int) -> tuple[float, ...]:
        return between(rows, at, is_closed=True) if rows else (0.0, 0.0)

    return Part(path, label, Rows(columns, further, fewest, "corner"), tip)


def path_table(path: str, label: str, tip: str, *, fewest: int = 2) -> Part:
    """A part for vertices in space."""
    columns = tuple(
        Column(str(i), axis, Distance(), f"{axis} of the vertex", 19)
        for i, axis in enumerate("xyz")
    )

    def further(_layout: Layout, rows: tuple[Any, ...], at: int) -> tuple[float, ...]:
        return between(rows, at, is_closed=fewest == 3)

    return Part(path, label, Rows(columns, further, fewest, "vertex"), tip)


def _storeys(layout: Layout) -> list[Option]:
    return [(None, "no storey"), *((s.id, s.title) for s in layout.storeys)]


def _levels(layout: Layout) -> list[Option]:
    return [(level.id, level.title) for level in layout.levels]


def _named(values: tuple[str, ...]) -> Choice:
    return Choice(lambda _layout: [(v, v or "not chosen yet") for v in values])


STOREY = Part("storey", "Storey", Choice(_storeys), "The storey whose plan shows it")
_CATEGORY = Part(
    "category",
    "Category",
    _named(get_args(Category)),
    "For whom the exposure is evaluated. It must be chosen; none is preset",
)
_LEVELS = Part(
    "levels",
    "Reference levels",
    Several(_levels, "None yet: enter one, with its source, under Ref. levels."),
    "Reference levels that the values here are compared with",
)
_USE = Part("use", "Use", Words(), "What is done there, in the user's words")
_OUTLINE_TIP = "Corners of the outline on plan, in their order"

ROOM = (
    STOREY,
    Part("floor_level", "Floor level", Distance(), "Floor above the datum"),
    Part("ceiling_level", "Ceiling level", Distance(), "Ceiling above the datum"),
    Part(
        "soffit_level",
        "Soffit level",
        Distance(is_optional=True),
        "Underside of the slab above the datum, where it differs; may be empty",
    ),
    Part(
        "slab_above",
        "Slab above",
        Distance(is_optional=True),
        "Thickness of the slab above the room; may be empty",
    ),
    plan_table("outline", "Outline", _OUTLINE_TIP),
)

STOREY_FORM = (Part("floor_level", "Floor level", Distance(), "Floor above the datum"),)

ENCLOSURE = (
    Part("z_from", "From z", Distance(), "Lowest level above the datum"),
    Part("z_to", "To z", Distance(), "Highest level above the datum"),
    Part(
        "state",
        "State",
        one_of("closed", "open for work"),
        "Closed: nobody stands in it. Open for work: only conductors are left out",
    ),
    Part(
        "front_clearance",
        "Front clearance",
        Distance(is_optional=True),
        "What a worker's body keeps from the open front, while open for work; may be "
        "empty",
    ),
    Part(
        "front",
        "Front faces",
        Amount(DEGREES, "°", is_optional=True),
        "Where the open front faces, in degrees: 0 is +x, counter-clockwise; empty: "
        "every side opens",
    ),
    plan_table("footprint", "Footprint", _OUTLINE_TIP),
)


def uncertainty_parts(start: str = "uncertainty") -> tuple[Part, ...]:
    """The parts of an expanded uncertainty."""
    return (
        Part(
            f"{start}.relative",
            "U, relative",
            Amount(PERCENT, "%"),
            "Expanded uncertainty in per cent of the value",
            "relative uncertainty",
        ),
        Part(
            f"{start}.absolute",
            "U, absolute",
            FluxDensity(),
            "Expanded uncertainty added to the relative part",
            "absolute uncertainty",
        ),
        Part(
            f"{start}.coverage",
            "Coverage factor",
            Amount(),
            "Coverage factor k of the expanded uncertainty, without unit",
        ),
        Part(
            f"{start}.basis",
            "Basis of U",
            Words(),
            "Where the uncertainty comes from",
            "basis of the uncertainty",
        ),
    )


def _own_uncertainty(layout: Layout, items: tuple[Item, ...], own: Any) -> Layout:
    value = layout.settings.uncertainty if own else None
    return replaced(layout, *(with_value(i, "uncertainty", value) for i in items))


def _uncertainty(items: tuple[Any, ...]) -> tuple[Part, ...]:
    toggle = Part(
        "own uncertainty",
        "Uncertainty",
        YesNo("Of its own"),
        "Whether an uncertainty other than the layout's holds here",
        "use of an own uncertainty",
        lambda _layout, item: getattr(item, "uncertainty", None) is not None,
        _own_uncertainty,
    )
    has_own = all(isinstance(item.uncertainty, Uncertainty) for item in items)
    return (toggle, *(uncertainty_parts() if has_own else ()))


def zone(items: tuple[Zone, ...]) -> tuple[Part, ...]:
    """The parts of zones."""
    rules = get_args(SpatialRule)
    return (
        _CATEGORY,
        STOREY,
        Part(
            "floor_level",
            "Own floor",
            Distance(is_optional=True),
            "Floor that heights count from, above the datum; empty: the storey's",
            "floor level",
        ),
        Part("heights", "Heights", Distances(), "Heights above the zone's floor"),
        Part(
            "rule",
            "Spatial rule",
            one_of(*rules),
            "How one value is made of all places of the zone",
        ),
        Part(
            "volume",
            "Volume range",
            Distances(2, is_optional=True),
            "Lowest and highest of the volume, above the zone's floor; empty: heights",
        ),
        Part("part_of_body", "Part of body", Words(), "Part of the body it is about"),
        _USE,
        Part("hours", "Hours", Words(), "How long people are there, in words"),
        Part(
            "clearance",
            "Clearance",
            Distance(),
            "Distance kept from the surface of every conductor",
        ),
        _LEVELS,
        *_uncertainty(items),
        plan_table("outline", "Outline", _OUTLINE_TIP),
    )


def _measured(layout: Layout, items: tuple[Item, ...], is_on: Any) -> Layout:
    value = MeasuredValue(flux_density=0.0) if is_on else None
    return replaced(layout, *(with_value(i, "measured", value) for i in items))


def receptor(items: tuple[Receptor, ...]) -> tuple[Part, ...]:
    """The parts of receptors."""
    measured = Part(
        "has measured",
        "Site value",
        YesNo("Measured on site"),
        "Whether a measured value stands beside the calculated one",
        "use of a measured value",
        lambda _layout, item: getattr(item, "measured", None) is not None,
        _measured,
    )
    return (
        Part("at", "Place x y z", Distances(3), "Where the point is", "place"),
        Part("reason", "Reason", Lines(), "Why this point matters"),
        _CATEGORY,
        _USE,
        _LEVELS,
        measured,
        *(_MEASURED if all(item.measured for item in items) else ()),
        *_uncertainty(items),
    )


_MEASURED = (
    Part(
        "measured.flux_density",
        "Measured",
        FluxDensity(),
        "RMS resultant as measured",
        "measured value",
    ),
    Part(
        "measured.kind",
        "Field measured",
        Choice(lambda _layout: (("", "AC, else DC"), ("AC", "AC"), ("DC", "DC"))),
        "Which field was measured: AC, all frequencies above 0 Hz; DC, 0 Hz without "
        "the earth's own",
        "kind of field measured",
    ),
    Part("measured.date", "Date", Words(), "When it was measured", "date measured"),
    Part("measured.instrument", "Instrument", Words(), "What it was measured with"),
    Part(
        "measured.load",
        "Load then",
        Amount(AMPERES, "A", is_optional=True),
        "Current of the source while measuring",
        "load while measuring",
    ),
    Part(
        "measured.load_note",
        "About the load",
        Lines(),
        "What is known of the load while measuring",
        "note on the load",
    ),
)

PROFILE = (path_table("path", "Line", "Vertices of the line plotted along"),)

#: File, page, view, turn, opacity and lock stand in the form of `app.panels.backing`.
BACKING = (
    Part("first", "First point", Numbers(2), "In the picture, in pixels"),
    Part("second", "Second point", Numbers(2), "In the picture, in pixels"),
    Part("distance", "Distance", Distance(), "Distance of the two points"),
    Part(
        "origin", "First point at", Distances(2), "Where it lies in the view", "place"
    ),
)
