"""Profiles: the field along lines, as charts with crossings and largest values."""

from __future__ import annotations

import numpy as np
from reportlab.platypus import Flowable

from engine.layout import Layout
from engine.levels import level_at, what_is_missing
from engine.picture import Picture
from engine.picture.line_chart import MOST_CURVES, Chart, ChartCurve, line_chart
from engine.profiles import KINDS, FieldProfile, ProfileCurve
from engine.report.figures import Figure
from engine.report.matter import Matter, ProfileResult
from engine.report.names import Wording
from engine.report.text import gap, paragraph, subheading, table
from engine.report.words import length, place
from engine.units import FLUX_DENSITY_UNITS, LENGTH_UNITS

HEIGHT = 92.0

#: Rows of one profile's table; the attached numbers have the rest.
_MOST_ROWS = 40


def profile_section(matter: Matter, words: Wording, width: float) -> list[Flowable]:
    """A chart and a table for each profile; empty without any."""
    made: list[Flowable] = []
    for result in matter.profiles:
        title = f"Profile {result.profile.title}"
        made += subheading(title, room=HEIGHT + 14.0)
        ends = (result.profile.path[0], result.profile.path[-1])
        listed = " to ".join(f"({place(end, words.length_unit)})" for end in ends)
        made.append(paragraph(f"From {listed} {words.length_unit}."))
        picture = _picture(matter.layout, result.found, words, width)
        if picture is None:
            made.append(paragraph("No current flows, or all of the line is masked."))
            continue
        shown = f"Chart of B along the profile {result.profile.title}. {listed}"
        made += [Figure(picture, shown), gap(1.0)]
        made += _table(result, words, width)
        count = sum(c.values(k) is not None for c in result.found.curves for k in KINDS)
        if count > MOST_CURVES:
            text = f"Curves without a line here: {count - MOST_CURVES}; see the file."
            made.append(paragraph(text))
    return made


def _picture(
    layout: Layout, found: FieldProfile, words: Wording, width: float
) -> Picture | None:
    factor = FLUX_DENSITY_UNITS[words.unit]
    curves = [
        ChartCurve(
            np.where(curve.mask, np.nan, values / factor),
            f"{words.name(curve.case)}, {kind}{_bound(curve)}",
        )
        for curve in found.curves
        for kind in KINDS
        if (values := curve.values(kind)) is not None
    ]
    if not any(np.any(curve.values > 0) for curve in curves):
        return None
    chart = Chart(
        along=found.along / LENGTH_UNITS[words.length_unit],
        curves=tuple(curves),
        unit=words.unit,
        length_unit=words.length_unit,
        is_logarithmic=layout.settings.map_scale == "logarithmic",
        levels=tuple(_levels(layout, found, words, factor)),
    )
    return line_chart(chart, width=width, height=HEIGHT)


def _bound(curve: ProfileCurve) -> str:
    return ", upper bound" if curve.is_bound else ""


def _levels(
    layout: Layout, found: FieldProfile, words: Wording, factor: float
) -> list[tuple[float, str]]:
    """Levels that one line can show: where a single frequency flows."""
    flowing = {f for curve in found.curves for f in curve.by_frequency}
    if len(flowing) != 1:
        return []
    (frequency,) = flowing
    lines = []
    for level in layout.levels:
        value = level_at(level, frequency)
        plain = level.basis == "RMS" and level.component == "resultant"
        if value is not None and plain and not what_is_missing(level):
            text = f"{level.title}, {words.limit(value)} {words.unit}"
            lines.append((value / factor, text))
    return lines[:4]


def _table(result: ProfileResult, words: Wording, width: float) -> list[Flowable]:
    rows = [
        (
            "largest value" if e.is_largest else "least value",
            f"{words.name(e.case)}, {e.kind}",
            words.value(e.value),
            length(e.along, words.length_unit),
            place(e.at, words.length_unit),
        )
        for e in result.found.extrema
    ]
    rows += [
        (
            f"crosses {words.name(c.level)}, {'rising' if c.rising else 'falling'}",
            f"{words.name(c.case)}, {c.kind}",
            "ratio 1",
            length(c.along, words.length_unit),
            place(c.at, words.length_unit),
        )
        for c in result.found.crossings
    ]
    if not rows:
        return []
    heads = (
        "What", "Load case", f"B [{words.unit}]", f"Along [{words.length_unit}]",
        f"x, y, z [{words.length_unit}]",
    )  # fmt: skip
    made: list[Flowable] = [
        table(heads, rows[:_MOST_ROWS], (34, 26, 10, 12, 18), width)
    ]
    if len(rows) > _MOST_ROWS:
        made.append(paragraph(f"Left out here: {len(rows) - _MOST_ROWS} rows."))
    return made
