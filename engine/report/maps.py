"""Which maps the report shows: one per height of a zone, for the leading load case."""

from __future__ import annotations

from collections.abc import Sequence

from engine.assessment import zone_floor
from engine.circuits import LoadCase
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.field import ResponseCache
from engine.maps import field_map
from engine.picture import MapSubject, map_subjects
from engine.results import Assessment

#: More maps than these are not printed; the report says how many are left out.
MOST_MAPS = 24

#: Heights nearer than this are the same plane. [m]
_SAME_HEIGHT = 1e-6


def wanted_maps(assessment: Assessment) -> tuple[tuple[float, LoadCase], ...]:
    """Heights above the datum, each with the counted load case that leads there.

    The case that leads has the largest value in a zone with that height. [m]
    """
    layout = assessment.layout
    cases = {case.id: case for case in layout.cases}
    leading: dict[float, tuple[float, LoadCase]] = {}
    for result in assessment.zones:
        floor = zone_floor(layout, result.zone)
        counted = [
            m for m in result.maxima if m.case in cases and cases[m.case].counted
        ] or [m for m in result.maxima if m.case in cases]
        if floor is None or not counted:
            continue
        top = max(counted, key=lambda m: m.value)
        for height in result.zone.heights:
            z = round((floor + height) / _SAME_HEIGHT) * _SAME_HEIGHT
            if z not in leading or top.value > leading[z][0]:
                leading[z] = (top.value, cases[top.case])
    return tuple((z, leading[z][1]) for z in sorted(leading))


def computed_maps(
    assessment: Assessment,
    wanted: Sequence[tuple[float, LoadCase]],
    *,
    unit: str,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> tuple[MapSubject, ...]:
    """The maps of the report; none where the field is not determined."""
    layout = assessment.layout
    made: list[MapSubject] = []
    for k, (z, case) in enumerate(wanted):
        stop_if(cancelled)
        if progress is not None:
            progress(k / len(wanted), "Computing the maps of the report")
        try:
            result = field_map(layout, case, (z,), cache=cache, cancelled=cancelled)
        except UserError:
            # The zone tables carry the reason; a map cannot be drawn beside it.
            continue
        made += map_subjects(layout, case, result, unit=unit)
    return tuple(made)
