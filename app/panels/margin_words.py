"""Margins in words: values, states, counts and the standing sentences. No Qt."""

from __future__ import annotations

from collections.abc import Sequence

import shapely

from app.margin_values import MarginRow, Margins
from engine.layout import Layout
from engine.masks import open_for_work
from engine.places import Receptor, Zone
from engine.report.names import wording
from engine.report.wording import STATE_SENTENCES
from engine.results import STATES
from engine.sampling import area_of
from engine.units import flux_density_text, in_unit, significant, text_beside

NO_ZONES = "Draw a zone where people are"
NO_LEVELS = "Enter a reference level and its source to see margins"
NOT_NAMED = "Choose the compared places of a reference level to see their margins"
WAITING = "Margins follow once the field is computed"

CAUTION_LINE = (
    "Calculated from entered data · ref. levels entered by the user · "
    "local rules and licensed practice decide"
)

OPEN_BOARD = (
    "A zone of workers lies at an open board: these margins say nothing about electric "
    "shock, arc, live work, or persons with implants."
)

#: How near to an opened enclosure a zone counts as at it. [m]
_AT_BOARD = 1.5

#: From the one that asks for most attention.
_COUNTED = tuple(reversed(STATES))
_SHORT = {
    "above": "above",
    "above, U reaches": "above, U reaches",
    "below, U reaches": "below, U reaches",
    "below": "below",
    "not evaluable": "not evaluable",
}


def empty_text(layout: Layout, margins: Margins | None) -> str:
    """What to do next where there is no margin; empty where there is one."""
    if not layout.zones and not layout.receptors:
        return NO_ZONES
    if not layout.levels:
        return NO_LEVELS
    places: list[Zone | Receptor] = [*layout.zones, *layout.receptors]
    if not any(place.levels for place in places):
        return NOT_NAMED
    return WAITING if margins is None or not margins.rows else ""


def value_text(row: MarginRow, layout: Layout, sampled: bool) -> str:
    """The value with its unit, with "≈" while it comes from a few points."""
    unit = layout.settings.flux_density_unit
    if row.value is None:
        return "–"
    if sampled:
        return f"≈{significant(in_unit(row.value, unit), 2)} {unit}"
    return f"{wording(layout, unit).beside(row.value, row.level_value)} {unit}"


def was_text(row: MarginRow, held: Margins | None) -> str:
    """ ", was 61.2 µT" for a row whose value is held as before; else empty."""
    if held is None:
        return ""
    for before in held.rows:
        if (before.place, before.level) == (row.place, row.level):
            if before.value is None:
                break
            return f", was {value_text(before, held.layout, held.is_sampled)}"
    return "" if row.value is None else ", had no value before"


def measured_text(ratio: float | None) -> str:
    """ "measured / calculated = 1.3"; empty without a measured value."""
    if ratio is None:
        return ""
    return f"measured / calculated = {significant(ratio, 2)}"


def level_text(row: MarginRow, layout: Layout) -> str:
    """The level's name, with its value where one frequency is compared."""
    if row.level_value is None:
        return row.level_title
    unit = layout.settings.flux_density_unit
    value = f"{in_unit(row.level_value, unit):.6g}"
    return f"{row.level_title} {value} {unit}"


def ratio_text(row: MarginRow, sampled: bool) -> str:
    """Value over level: "0.79", as many figures as show the side of 1."""
    if row.ratio is None:
        return "–"
    if sampled:
        return f"≈{significant(row.ratio, 2)}"
    return text_beside(row.ratio, 1.0)


def state_text(row: MarginRow) -> str:
    """The state word; of one that is not evaluable, with its reason."""
    if row.state == "not evaluable":
        return f"not evaluable: {row.reason}" if row.reason else row.state
    return row.state


def sentence(row: MarginRow, layout: Layout, sampled: bool) -> str:
    """The whole comparison in words, for tooltips, screen readers and copying."""
    head = f"{row.place_title} against {level_text(row, layout)}"
    if row.value is None or row.ratio is None:
        # A reason is a sentence already; whoever takes this one ends it.
        return f"{head}: {state_text(row) or 'no value'}".removesuffix(".")
    text = f"{head}: {value_text(row, layout, sampled)}"
    text += f", ratio {ratio_text(row, sampled)}"
    if sampled:
        return f"{text}, from a few points while the layout is being changed"
    unit = layout.settings.flux_density_unit
    if row.uncertainty is not None:
        text += f", U {flux_density_text(row.uncertainty, unit)}"
    text += f"; {STATE_SENTENCES[row.state]}; load case {row.case_title}"
    if row.measured is not None and row.measured_ratio is not None:
        measured = flux_density_text(row.measured, unit)
        text += f"; measured {measured}, {measured_text(row.measured_ratio)}"
    return text


def counts_text(rows: Sequence[MarginRow]) -> str:
    """ "1 above · 14 below · 1 not evaluable": how many in each state that occurs."""
    found = {state: sum(row.state == state for row in rows) for state in _COUNTED}
    return " · ".join(f"{n} {_SHORT[state]}" for state, n in found.items() if n)


def net_current_text(row: MarginRow, layout: Layout) -> str:
    """What 1 A of net current alone would give at the place of the row."""
    effect = row.net_current
    if effect is None:
        return ""
    unit = layout.settings.flux_density_unit
    names = {circuit.id: circuit.title for circuit in layout.circuits}
    name = names.get(effect.circuit, effect.circuit)
    value = flux_density_text(effect.per_ampere, unit)
    return f"1 A of net current in {name} alone would give {value} there"


def is_at_open_board(layout: Layout) -> bool:
    """Whether a zone of workers lies at an enclosure that is open in a counted case."""
    opened = [
        area_of(enclosure.footprint).buffer(_AT_BOARD)
        for enclosure in layout.enclosures
        if any(open_for_work(enclosure, c) for c in layout.cases if c.counted)
    ]
    return any(
        shapely.intersects(area, area_of(zone.outline))
        for zone in layout.zones
        if zone.category == "workers"
        for area in opened
    )
