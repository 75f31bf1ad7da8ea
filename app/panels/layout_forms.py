"""What can be edited of the layout as a whole: title block and settings."""

from __future__ import annotations

from typing import Any, get_args

from msgspec.structs import replace

from app.panels.kinds import (
    DEGREES,
    HERTZ,
    Amount,
    Column,
    Distance,
    FluxDensity,
    Rows,
    Words,
    one_of,
)
from app.panels.parts import Group, Part
from app.panels.place_forms import uncertainty_parts
from app.panels.title_forms import DOCUMENT
from engine.edits import checked, unused_id
from engine.entered_values import with_value
from engine.items import Item
from engine.layout import FluxDensityUnit, Layout
from engine.new_sources import STOREY_HEIGHT
from engine.places import Storey

_UNITS = (
    Part(
        "frequency",
        "Frequency of new circuits",
        Amount(HERTZ, "Hz"),
        "Those that are there keep theirs, in hertz",
    ),
    Part(
        "flux_density_unit",
        "Flux density in",
        one_of(*get_args(FluxDensityUnit)),
        "Unit in which flux densities are shown and typed",
        "unit of flux density",
    ),
    Part(
        "length_unit",
        "Lengths in",
        one_of("m", "mm", "ft", "in"),
        "Unit in which lengths are shown and typed",
        "unit of length",
    ),
    Part("paper", "Paper", one_of("A4", "A3", "Letter", "Tabloid"), "Size of prints"),
    Part(
        "north",
        "North",
        Amount(DEGREES, "°", is_optional=True),
        "Direction of north on plan, counter-clockwise from +x, degrees; may be empty",
    ),
)

_MAP = (
    Part("map_low", "Map from", FluxDensity(), "Values under it are not coloured"),
    Part("map_high", "Map to", FluxDensity(), "Values over it have the last colour"),
    Part(
        "map_scale",
        "Scale",
        one_of("logarithmic", "linear"),
        "How colours follow values, the same in all maps",
        "scale of the map",
    ),
    Part("grid_step", "Grid step", Distance(), "Step of exported grids"),
)

_RULE = (
    Part(
        "decision_rule.kind",
        "Decision rule",
        one_of("none chosen", "additive", "value only"),
        "How the summary counts: additive takes the uncertainty in, value only does "
        "not. The states themselves are always printed",
    ),
    Part(
        "decision_rule.chosen_by",
        "Chosen by",
        Words(),
        "Who chose the rule",
        "chooser of the decision rule",
    ),
)


def _with_storeys(layout: Layout, _items: tuple[Item, ...], rows: Any) -> Layout:
    return replace(layout, storeys=tuple(checked(storey) for storey in rows))


def _next_storey(layout: Layout, rows: tuple[Any, ...], at: int) -> Storey:
    """A storey above the chosen one."""
    number = len(rows) + 1
    level = rows[at].floor_level + STOREY_HEIGHT if rows else 0.0
    return Storey(
        id=unused_id(layout, f"storey-{number}"),
        name=f"Storey {number}",
        floor_level=round(level, 5),
    )


_STOREYS = Part(
    "storeys",
    "Storeys",
    Rows(
        (
            Column("name", "name", Words(), "Name of the storey", 34),
            Column(
                "floor_level",
                "floor",
                Distance(),
                "Level of its floor above the datum",
                22,
                lambda storey, level: with_value(storey, "floor_level", level),
            ),
        ),
        _next_storey,
        0,
        "storey",
    ),
    "Storeys of the building by the level of their floor",
    read=lambda layout, _item: layout.storeys,
    change=_with_storeys,
)


def layout_groups(layout: Layout) -> tuple[Group, ...]:
    """Everything about the layout as a whole."""
    title, settings = (layout.title,), (layout.settings,)
    return (
        Group(
            "Title block",
            title,
            DOCUMENT[:1],
            note="All of it, the texts and the logo stand in Report · Report …",
        ),
        Group("Units and paper", settings, _UNITS),
        Group("Building", settings, (_STOREYS,)),
        Group("Maps", settings, _MAP),
        Group("Uncertainty and decision", settings, (*uncertainty_parts(), *_RULE)),
    )
