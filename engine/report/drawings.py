"""The plan of every storey and the elevations, as figures to scale."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from engine.drawing import Plan, plan
from engine.elevation import elevation
from engine.layout import Layout
from engine.picture import Picture
from engine.picture.dimensions import Level
from engine.picture.room_drawing import RoomView, room_drawing, room_scale
from engine.report.choices import Orientation, Paper
from engine.report.drawn_parts import between
from engine.report.matter import Matter
from engine.report.words import length
from engine.sight import LOOKING_X, LOOKING_Y, Sight

#: Storeys of which a plan is printed.
MOST_PLANS = 12

#: Floors nearer than this are of one storey. [m]
_SAME_STOREY = 0.6

#: Another orientation must give a drawing this much larger to be worth a turned page.
_WORTH = 1.2

#: What the heading above a figure takes. [mm]
HEADING_ROOM = 11.0


@dataclass(frozen=True, eq=False)
class Sheeted:
    """A picture with the orientation of its page."""

    picture: Picture
    orientation: Orientation


def room_views(matter: Matter) -> tuple[RoomView, ...]:
    """The plans from below, then the elevations; none where nothing is drawn."""
    layout = matter.layout
    drawn = _lettered(plan(layout, matter.conductors), layout)
    if drawn.bounds() is None:
        return ()
    views = [_plan_view(layout, drawn, band) for band in _bands(layout)]
    sights = (LOOKING_Y, LOOKING_X)
    views += [_elevation_view(matter, sight) for sight in sights]
    return tuple(view for view in views if view.plan.bounds() is not None)


def receptor_marks(layout: Layout) -> dict[str, str]:
    """What stands at each receptor's mark: R1, R2, …"""
    return {r.id: f"R{k}" for k, r in enumerate(layout.receptors, start=1)}


def sheeted(view: RoomView, sheet: Paper) -> Sheeted:
    """The drawing on the page on which it becomes larger."""
    scales = [
        room_scale(view, width=p.text_width, height=p.text_height - HEADING_ROOM)
        for p in (sheet, sheet.turned)
    ]
    chosen = sheet.turned if _WORTH * scales[1] <= scales[0] else sheet
    picture = room_drawing(
        replace(view, title=""),
        width=chosen.text_width,
        height=chosen.text_height - HEADING_ROOM,
    )
    return Sheeted(picture, chosen.orientation)


Band = tuple[float, float, str]


def _bands(layout: Layout) -> tuple[Band | None, ...]:
    """Storeys from below: lowest floor, highest ceiling, name; None: everything."""
    bands: list[Band] = []
    for room in sorted(layout.rooms, key=lambda r: r.floor_level):
        low, high = room.floor_level, room.ceiling_level
        if bands and low - bands[-1][0] < _SAME_STOREY:
            bands[-1] = (bands[-1][0], max(bands[-1][1], high), bands[-1][2])
        else:
            bands.append((low, high, room.title))
    if len(bands) < 2:
        return (None,)
    return tuple(bands[:MOST_PLANS])


def _lettered(drawn: Plan, layout: Layout) -> Plan:
    """The plan with numbers at the receptors' marks."""
    marks = receptor_marks(layout)
    lettered = [replace(m, title=marks.get(m.item, m.title)) for m in drawn.receptors]
    return replace(drawn, receptors=tuple(lettered))


def _plan_view(layout: Layout, drawn: Plan, band: Band | None) -> RoomView:
    unit = layout.settings.length_unit
    shown, where = drawn, ""
    if band is not None:
        low, high, name = band
        shown = between(drawn, low, high)
        levels = f"z {length(low, unit)} to {length(high, unit)} {unit}"
        where = f", storey of {name}, {levels}"
    corners = [point for room in shown.rooms for point in room.area.outline]
    return RoomView(
        title=f"Plan{where}",
        plan=shown,
        length_unit=unit,
        north=layout.settings.north,
        across=tuple(x for x, _ in corners),
        up=tuple(y for _, y in corners),
        lines=(_DIRECTIONS.format(unit=unit), _north(layout), _backing(layout)),
    )


_DIRECTIONS = (
    "Dimensions and heights z above the datum in {unit}. Heavy lines: rooms; dashed: "
    "zones; crosses R1, R2, …: receptors, see their table; circles: rises and falls of "
    "runs; arrows: the direction in which current counts as positive. Runs show in the "
    "true width of their conductors."
)


def _north(layout: Layout) -> str:
    return "" if layout.settings.north is not None else "North is not stated."


def _backing(layout: Layout) -> str:
    if not layout.backing_drawings:
        return ""
    return "Backing drawings are not printed; they are listed with the documents."


def _elevation_view(matter: Matter, sight: Sight) -> RoomView:
    layout = matter.layout
    unit = layout.settings.length_unit
    shown = _lettered(elevation(layout, matter.conductors, sight), layout)
    across = sorted({x for room in shown.rooms for x, _ in room.area.outline})
    to_the_right = "+x" if sight is LOOKING_Y else "−y"
    names = ("x", "z") if sight is LOOKING_Y else ("−y", "z")
    return RoomView(
        title=f"Elevation {sight.name} ({to_the_right} to the right)",
        plan=shown,
        length_unit=unit,
        names=names,
        across=tuple(across),
        levels=tuple(_levels(layout, shown)),
        lines=(_DIRECTIONS.format(unit=unit), "Everything is drawn, near and far."),
    )


def _levels(layout: Layout, shown: Plan) -> Sequence[Level]:
    found: list[Level] = []
    for room in layout.rooms:
        found.append((room.floor_level, "floor", room.title))
        found.append((room.ceiling_level, "ceiling", room.title))
        if room.soffit_level is not None and room.soffit_level != room.ceiling_level:
            found.append((room.soffit_level, "soffit", room.title))
    for zone in shown.zones:
        if zone.levels is not None:
            found.append((zone.levels[0], "lowest height of zone", zone.title))
            found.append((zone.levels[1], "greatest height of zone", zone.title))
    return found
