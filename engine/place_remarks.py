"""Remarks on places and levels: heights, enclosures, categories, missing statements."""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from engine.calibration import is_calibrated
from engine.criteria import ReferenceLevel
from engine.currents import CasePhasors
from engine.embedded_picture import picture_size
from engine.faults import Remark
from engine.items import Point3
from engine.layout import Layout
from engine.levels import covers, level_at, what_is_missing
from engine.masks import keepouts, open_for_work
from engine.origins import assumptions
from engine.places import Receptor, Zone
from engine.sampling import area_of
from engine.units import LENGTH_UNITS, significant

#: Heights above the floor at which people are usually assessed. [m]
LOWEST, HIGHEST = 0.2, 2.0

#: Overlaps below this are touching edges. [m²]
_NO_AREA = 1e-6

_AT_RISK = "persons at particular risk"


def place_remarks(layout: Layout) -> Iterator[Remark]:
    """What is to say on places and levels in any load case."""
    yield from _levels_without_statements(layout)
    yield from _receptor_heights(layout)
    yield from _missing_heights(layout)
    yield from _backing_drawings(layout)
    yield from _masked_zones(layout)
    yield from _idle_clearances(layout)
    yield from _particular_risk(layout)
    yield from _assumed_values(layout)


def level_remarks(layout: Layout, phasors: CasePhasors) -> Iterator[Remark]:
    """W19: levels at frequencies that flow in a load case."""
    alternating = sorted({c.frequency for c in phasors.components if c.frequency > 0})
    direct = [0.0] if any(c.frequency == 0 for c in phasors.components) else []
    for level in layout.levels:
        if what_is_missing(level) or not _is_used(layout, level):
            continue
        if covers(level, "AC"):
            yield from _uncovered(level, alternating)
            yield from _one_level_for_all(level, alternating)
        if covers(level, "DC"):
            yield from _uncovered(level, direct)


def zone_floor(layout: Layout, zone: Zone) -> float:
    """Level of the floor that a zone's heights start from. [m]"""
    if zone.floor_level is not None:
        return zone.floor_level
    levels = [s.floor_level for s in layout.storeys if s.id == zone.storey]
    return levels[0] if levels else 0.0


def floor_below(layout: Layout, point: Point3) -> float | None:
    """Level of the floor that a point stands above, or None where none is known. [m]

    That of the room that holds the point, else the highest floor not above it: of the
    rooms over the same place on plan, else of the storeys.
    """
    x, y, z = point
    at = shapely.Point(x, y)
    rooms = [r for r in layout.rooms if shapely.Polygon(r.outline).covers(at)]
    inside = [r.floor_level for r in rooms if r.floor_level <= z <= r.ceiling_level]
    below = [r.floor_level for r in rooms if r.floor_level <= z]
    storeys = [s.floor_level for s in layout.storeys if s.floor_level <= z]
    for levels in (inside, below, storeys):
        if levels:
            return max(levels)
    return None


def _is_used(layout: Layout, level: ReferenceLevel) -> bool:
    places: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
    return any(level.id in place.levels for place in places)


def _levels_without_statements(layout: Layout) -> Iterator[Remark]:
    """W18: no comparison is made with such a level; and places without a category."""
    for level in layout.levels:
        for sentence in what_is_missing(level):
            yield Remark(
                "W18",
                "warning",
                f"{sentence} Until then nothing is compared with it.",
                (level.id,),
            )
    for zone in layout.zones:
        if not zone.category:
            x, y = zone.outline[0]
            place = (x, y, zone_floor(layout, zone) + zone.heights[0])
            yield _no_category(f"Zone “{zone.title}”", zone.id, place)
    for receptor in layout.receptors:
        if not receptor.category:
            yield _no_category(f"Receptor “{receptor.title}”", receptor.id, receptor.at)


def _no_category(title: str, item: str, place: Point3) -> Remark:
    return Remark(
        "W18",
        "warning",
        f"{title} has no category: choose who or what is there.",
        (item,),
        place,
    )


def _uncovered(level: ReferenceLevel, frequencies: list[float]) -> Iterator[Remark]:
    missing = [f for f in frequencies if level_at(level, f) is None]
    if missing:
        shown = ", ".join(f"{f:g} Hz" for f in missing)
        yield Remark(
            "W19",
            "warning",
            f"Reference level “{level.title}” states no value at {shown}, where "
            "current flows: enter one; no value of another frequency is taken instead.",
            (level.id,),
        )


def _one_level_for_all(
    level: ReferenceLevel, frequencies: list[float]
) -> Iterator[Remark]:
    values = {level_at(level, f) for f in frequencies} - {None}
    if level.sum_rule == "root sum of squares" and len(values) > 1:
        yield Remark(
            "W19",
            "warning",
            f"Reference level “{level.title}” differs between the frequencies that "
            "flow and adds them by root sum of squares: check that its source says so, "
            "or choose the sum of ratios, which is never smaller.",
            (level.id,),
        )


def _receptor_heights(layout: Layout) -> Iterator[Remark]:
    """W23: receptors that are low, high, or above no floor."""
    for receptor in layout.receptors:
        floor = floor_below(layout, receptor.at)
        if floor is None:
            if layout.rooms or layout.storeys:
                yield Remark(
                    "W23",
                    "warning",
                    f"Receptor “{receptor.title}” is below every floor that is "
                    "entered: confirm its height.",
                    (receptor.id,),
                    receptor.at,
                )
            continue
        height = receptor.at[2] - floor
        if not LOWEST - 1e-9 <= height <= HIGHEST + 1e-9:
            unit = layout.settings.length_unit
            shown, low, high = (
                significant(value / LENGTH_UNITS[unit])
                for value in (height, LOWEST, HIGHEST)
            )
            yield Remark(
                "W23",
                "warning",
                f"Receptor “{receptor.title}” is {shown} {unit} above its floor, "
                f"outside {low} to {high} {unit}: confirm its height.",
                (receptor.id,),
                receptor.at,
            )


def _missing_heights(layout: Layout) -> Iterator[Remark]:
    """W24: no heights of floors."""
    has_places = bool(layout.zones or layout.receptors)
    if has_places and not layout.storeys and not layout.rooms:
        yield Remark(
            "W24",
            "warning",
            "Neither storeys nor rooms are entered: heights above the floor are "
            "heights above the datum. Enter the floor levels.",
        )
    for zone in layout.zones:
        if zone.floor_level is None and zone.storey is None:
            yield Remark(
                "W24",
                "warning",
                f"Zone “{zone.title}” has neither a storey nor a floor level: its "
                "heights are taken above the datum. Enter one of the two.",
                (zone.id,),
                (*zone.outline[0], zone.heights[0]),
            )


def _backing_drawings(layout: Layout) -> Iterator[Remark]:
    """W24: drawings without a scale, or without a picture that can be seen."""
    for drawing in layout.backing_drawings:
        title = f"Backing drawing “{drawing.title}”"
        if not is_calibrated(drawing):
            yield Remark(
                "W24",
                "warning",
                f"{title} is not calibrated: distances taken "
                "from it are not reliable. Give two of its points and their distance.",
                (drawing.id,),
            )
        # Of linked files `exchange.linked_drawings` tells: it takes looking at them.
        if not drawing.linked_file and picture_size(drawing) is None:
            fault = "is damaged" if drawing.picture else "is missing"
            yield Remark(
                "W24",
                "warning",
                f"{title} cannot be shown: its picture {fault}. Choose its file again.",
                (drawing.id,),
            )


def _masked_zones(layout: Layout) -> Iterator[Remark]:
    """W05: enclosures that take a part of a zone out of the evaluation."""
    closed = {k.key: k for case in layout.cases for k in keepouts(layout, case)}
    titles = {enclosure.id: enclosure.title for enclosure in layout.enclosures}
    for zone in layout.zones:
        area = area_of(zone.outline)
        floor = zone_floor(layout, zone)
        heights = zone.volume or (min(zone.heights), max(zone.heights))
        low, high = floor + heights[0], floor + heights[1]
        found = [
            keepout
            for keepout in closed.values()
            if keepout.z_from <= high
            and keepout.z_to >= low
            and keepout.outline.intersection(area).area > _NO_AREA
        ]
        if not found:
            continue
        names = ", ".join(
            f"“{titles[item]}”" for item in dict.fromkeys(k.item for k in found)
        )
        is_any_open = any(k.is_open for k in found)
        kept_clear = " or are kept clear before open ones" if is_any_open else ""
        masked = shapely.union_all([k.outline for k in found]).intersection(area)
        at = masked.representative_point()
        yield Remark(
            "W05",
            "note",
            f"Zone “{zone.title}”: {significant(masked.area)} m² of "
            f"{significant(area.area)} m² lie in closed enclosures{kept_clear} "
            f"({names}) and are not evaluated at their heights.",
            (zone.id, *dict.fromkeys(k.item for k in found)),
            (at.x, at.y, low),
        )


def _idle_clearances(layout: Layout) -> Iterator[Remark]:
    """W37: front clearances that count in no load case."""
    for enclosure in layout.enclosures:
        is_opened = any(open_for_work(enclosure, case) for case in layout.cases)
        if enclosure.front_clearance and not is_opened:
            yield Remark(
                "W37",
                "note",
                f"The front clearance of “{enclosure.title}” counts nowhere: it is "
                "what a worker's body keeps from the open front, and the enclosure is "
                "closed in every load case. Open it in a load case, or leave the "
                "clearance empty.",
                (enclosure.id,),
            )


def _particular_risk(layout: Layout) -> Iterator[Remark]:
    """W26: no level of a group decides for a person."""
    places: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
    for item in places:
        if item.category == _AT_RISK:
            place = item.at if isinstance(item, Receptor) else None
            yield Remark(
                "W26",
                "warning",
                f"“{item.title}” is meant for persons at particular risk: they need an "
                "assessment of the person and of any implant, and no state is shown.",
                (item.id,),
                place,
            )


def _assumed_values(layout: Layout) -> Iterator[Remark]:
    """W28: entered values that nothing confirms, counted."""
    found = assumptions(layout)
    items = tuple(dict.fromkeys(assumption.item for assumption in found))
    if found:
        values = "value is" if len(found) == 1 else "values are"
        of = "item" if len(items) == 1 else "items"
        yield Remark(
            "W28",
            "note",
            f"{len(found)} {values} still assumed, in {len(items)} {of}: give the "
            "document, the measurement or the name that confirms them.",
            items,
        )
