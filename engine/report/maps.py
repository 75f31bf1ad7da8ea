"""Which maps the report shows: one for each height and leading load case."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from engine.assessment import zone_floor
from engine.circuits import LoadCase
from engine.drawing import Plan
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.field import ResponseCache
from engine.layout import Layout
from engine.maps import Extent, extent, field_map
from engine.picture import MapSubject, map_subjects
from engine.places import Zone
from engine.report.drawn_parts import between
from engine.report.matter import HeightMap
from engine.report.words import length
from engine.results import STATES, Assessment, Maximum, ZoneResult

#: More maps than these are not printed; the report says how many are left out.
MOST_MAPS = 24

#: Heights nearer than this are the same plane. [m]
_SAME_HEIGHT = 1e-6

#: A receptor this near to a plane is shown on its map. [m]
_NEAR = 0.26

#: Zones that fill less than this part of everything get a map of their own area.
_SMALL = 0.25


@dataclass(frozen=True)
class Wanted:
    """A map to be computed: z above the datum, load case, zones, largest places."""

    z: float
    case: LoadCase
    zones: tuple[Zone, ...]
    largest: tuple[float, float] | None


def wanted_maps(assessment: Assessment) -> tuple[Wanted, ...]:
    """A map for each height of a zone, in the counted load case that leads there.

    The case that leads has the zone's comparison of most concern; without any, its
    largest value. Zones with one height above the datum and one leading case share a
    map.
    """
    layout = assessment.layout
    cases = {case.id: case for case in layout.cases}
    found: dict[tuple[float, str], list[tuple[Zone, Maximum]]] = {}
    for result in assessment.zones:
        floor = zone_floor(layout, result.zone)
        top = _leading(result, cases)
        if floor is None or top is None:
            continue
        for height in result.zone.heights:
            z = round((floor + height) / _SAME_HEIGHT) * _SAME_HEIGHT
            found.setdefault((z, top.case), []).append((result.zone, top))
    wanted = []
    for (z, case), entries in sorted(found.items(), key=lambda entry: entry[0]):
        tops = [m for _, m in entries if abs(m.details.at[2] - z) < 1e-3]
        best = max(tops, key=lambda m: m.value, default=None)
        at = None if best is None else best.details.at[:2]
        zones = tuple(dict.fromkeys(zone for zone, _ in entries))
        wanted.append(Wanted(z, cases[case], zones, at))
    return tuple(wanted)


def _leading(result: ZoneResult, cases: dict[str, LoadCase]) -> Maximum | None:
    known = [m for m in result.maxima if m.case in cases]
    compared = [c for c in result.comparisons if c.counted and c.ratio is not None]
    if compared:
        worst = max(compared, key=lambda c: (STATES.index(c.state), c.ratio or 0.0))
        for m in known:
            if (m.case, m.kind) == (worst.case, worst.kind):
                return m
    counted = [m for m in known if cases[m.case].counted]
    return max(counted or known, key=lambda m: m.value, default=None)


def computed_maps(
    assessment: Assessment,
    wanted: Sequence[Wanted],
    *,
    unit: str,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> tuple[HeightMap, ...]:
    """The maps of the report; none where the field is not determined."""
    layout = assessment.layout
    made: list[HeightMap] = []
    for k, want in enumerate(wanted):
        stop_if(cancelled)
        if progress is not None:
            progress(k / len(wanted), "Computing the maps of the report")
        try:
            result = field_map(
                layout,
                want.case,
                (want.z,),
                area=_area(layout, want.zones),
                cache=cache,
                cancelled=cancelled,
            )
        except UserError:
            # The zone tables carry the reason; a map cannot be drawn beside it.
            continue
        subjects = map_subjects(layout, want.case, result, unit=unit)
        titles = tuple(zone.title for zone in want.zones)
        shown = tuple(_worded(layout, want, subject) for subject in subjects)
        made.append(HeightMap(want.z, want.case, titles, shown))
    return tuple(made)


def _area(layout: Layout, zones: Sequence[Zone]) -> Extent:
    """Everything, or only the zones where they are a small part of it."""
    whole = extent(layout)
    xs = [x for zone in zones for x, _ in zone.outline]
    ys = [y for zone in zones for _, y in zone.outline]
    if not xs:
        return whole
    edge = max(1.0, 0.15 * max(max(xs) - min(xs), max(ys) - min(ys)))
    own = (min(xs) - edge, min(ys) - edge, max(xs) + edge, max(ys) + edge)
    if _size(own) < _SMALL * _size(whole):
        return own
    return whole


def _size(area: Extent) -> float:
    return (area[2] - area[0]) * (area[3] - area[1])


def _worded(layout: Layout, want: Wanted, subject: MapSubject) -> MapSubject:
    """The subject with the zones and their own heights in its caption."""
    unit = layout.settings.length_unit
    heights = []
    for zone in want.zones[:12]:
        floor = zone_floor(layout, zone)
        if floor is not None:
            above = length(want.z - floor, unit)
            heights.append(f"{zone.title}, {above} {unit} above its floor")
    more = len(want.zones) - 12
    text = "; ".join(heights) + (f"; and {more} more zones" if more > 0 else "")
    line = f"For {text}. The colour scale is that of every map of this report."
    return replace(subject, lines=(line, *subject.lines), largest=want.largest)


def plan_of_map(plan: Plan, want: HeightMap) -> Plan:
    """What shows on a map: rooms and zones at its height, receptors near to it.

    Runs and equipment show whatever their height: they are the sources.
    """
    shown = between(plan, want.z, want.z)
    return replace(
        plan,
        rooms=shown.rooms,
        enclosures=shown.enclosures,
        zones=tuple(zone for zone in plan.zones if zone.title in want.zones),
        receptors=tuple(m for m in plan.receptors if abs(m.at[2] - want.z) <= _NEAR),
    )
