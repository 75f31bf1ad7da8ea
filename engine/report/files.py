"""The files inside the report: the layout, tables of results, values of the maps."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from engine.errors import UserError
from engine.exchange.map_export import grid_csv
from engine.layout_file import encode
from engine.picture import MapSubject
from engine.printed_text import printable
from engine.profile_table import csv_text as profile_csv
from engine.profile_table import profile_table
from engine.report.attachments import Attachment
from engine.report.matter import HeightMap, Matter, ProfileResult
from engine.report.words import length
from engine.result_tables import csv_text, result_tables
from engine.retrace import csv_text as retrace_csv


def attached_files(matter: Matter) -> tuple[Attachment, ...]:
    """The layout file first, then tables of results, then the grids of the maps."""
    files = []
    try:
        content = encode(matter.source)
    except UserError:
        pass  # A layout that no file can hold: the report is all there is.
    else:
        about = "The layout with everything that was entered"
        files.append(Attachment("layout.json", "application/json", about, content))
    tables = result_tables(matter.assessment, matter.remarks, matter.unit)
    for table in tables:
        text = csv_text(table).encode("utf-8")
        name = f"table-{table.name}.csv"
        files.append(Attachment(name, "text/csv", table.about, text))
    for k, each in enumerate(matter.maps, start=1):
        files.append(_grid(matter, each, k))
    for k, traced in enumerate(matter.traced, start=1):
        unit = matter.layout.settings.length_unit
        shares = retrace_csv(traced.found, unit=matter.unit, length_unit=unit)
        about = f"{traced.title} taken apart by conductor"
        name = f"retraced-{k:02d}.csv"
        data = printable(shares).encode("utf-8")
        files.append(Attachment(name, "text/csv", about[:300], data))
    for k, result in enumerate(matter.profiles, start=1):
        files.append(_profile(matter, result, k))
    return tuple(files)


def _profile(matter: Matter, result: ProfileResult, number: int) -> Attachment:
    layout = matter.layout
    names = {item.id: item.title for item in layout.items()}
    names.update({case.id: case.title for case in layout.cases})
    unit = layout.settings.length_unit
    table = profile_table(result.found, names, unit=matter.unit, length_unit=unit)
    text = printable(profile_csv(table)).encode("utf-8")
    about = f"Values along the profile {result.profile.title}"
    return Attachment(f"profile-{number:02d}.csv", "text/csv", about[:300], text)


def _grid(matter: Matter, each: HeightMap, number: int) -> Attachment:
    step = matter.layout.settings.grid_step
    thinned = [_thinned(subject, step) for subject in each.subjects]
    xs = thinned[0].xs
    spacing = abs(float(xs[1] - xs[0])) if len(xs) > 1 else 0.0
    n = thinned[0].values.size
    text = grid_csv(thinned, np.full(n, each.z)).encode("utf-8")
    unit = matter.layout.settings.length_unit
    about = (
        f"Values of the map {each.case.title}, z {length(each.z, unit)} {unit}, "
        f"{spacing:.3g} m apart"
    )
    return Attachment(f"map-{number:02d}.csv", "text/csv", about[:300], text)


def _thinned(subject: MapSubject, step: float) -> MapSubject:
    """Every k-th point of the picture's own grid, at most `step` apart. [m]"""

    def every(axis: NDArray[np.float64]) -> int:
        if len(axis) < 2:
            return 1
        return max(1, math.floor(step / abs(float(axis[1] - axis[0])) + 1e-9))

    i, j = every(subject.ys), every(subject.xs)
    return replace(
        subject,
        xs=subject.xs[::j],
        ys=subject.ys[::i],
        values=subject.values[::i, ::j],
        mask=subject.mask[::i, ::j],
    )
