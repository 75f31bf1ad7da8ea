"""`map`: the field on horizontal planes, as a picture or as numbers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from engine.circuits import LoadCase
from engine.conductors import conductors
from engine.drawing import plan
from engine.errors import Cancelled, Progress, UserError
from engine.exchange.map_export import write_csv, write_png
from engine.exchange.svg import svg
from engine.layout import Layout
from engine.maps import Extent, extent, field_map
from engine.picture import OffsetLines, map_picture, map_subjects
from engine.written_file import write_file

#: Endings of a file name that say what a map is written as.
KINDS = (".png", ".svg", ".csv")

#: Left around lines that reach beyond what is drawn. [m]
_AROUND = 0.5


def map_kind(out: Path) -> str:
    """The ending that says what a map is written as; a `UserError` for another."""
    kind = out.suffix.lower()
    if kind not in KINDS:
        raise UserError(
            f"{out.name} was not written: a map is written as .png, .svg or .csv, "
            "by the ending of the file's name."
        )
    return kind


def write_map(
    layout: Layout,
    case: LoadCase,
    heights: Sequence[float],
    out: Path,
    *,
    unit: str | None = None,
    shown: str = "",
    offsets: OffsetLines | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the map at a height above the datum, or the largest over several.

    The ending of `out` says its kind. Numbers are written for one height only. `shown`
    is said first under the title of a picture: "variant Bond removed". `offsets` are
    drawn on a picture, which then reaches as far as they do.

    Raises
    ------
    UserError
        When the ending is of no known kind, when the layout cannot be evaluated, or
        when the file cannot be written.
    """
    kind = map_kind(out)
    if not heights or not np.all(np.isfinite(heights)):
        raise UserError("The height must be a finite number of metres above the datum.")
    step = layout.settings.grid_step if kind == ".csv" else None
    if kind == ".csv" and len(heights) > 1:
        raise UserError("Numbers are written for one height: choose one for the map.")
    area = None if offsets is None or kind == ".csv" else _reaching(layout, offsets)
    result = field_map(
        layout, case, heights, area=area, step=step, progress=progress,
        cancelled=cancelled,
    )  # fmt: skip
    subjects = map_subjects(layout, case, result, unit=unit)
    if kind == ".csv":
        write_csv(out, subjects, np.full(result.values.size, heights[0]))
        return
    # AC, or the direct field where no other flows; the caption says which.
    subject = subjects[0]
    if shown:
        said = f"{shown[:1].upper()}{shown[1:]}."
        subject = replace(subject, lines=(said, *subject.lines))
    if offsets is not None:
        lines = (offsets.sentence, *subject.lines)
        subject = replace(subject, offsets=offsets, lines=lines)
    drawn = plan(layout, conductors(layout))
    if kind == ".png":
        write_png(out, subject, drawn)
    else:
        picture = map_picture(subject, drawn, width=277.0, height=190.0)
        write_file(out, svg(picture).encode("utf-8"))


def _reaching(layout: Layout, offsets: OffsetLines) -> Extent:
    """The area of a map that shows lines and dimension whole. [m]"""
    x0, y0, x1, y1 = extent(layout)
    points = [*offsets.lines, offsets.measured_from]
    if offsets.dimension is not None:
        points.append(np.array(offsets.dimension[:2]))
    places = np.concatenate([p.reshape(-1, 2) for p in points])
    if not len(places):
        return (x0, y0, x1, y1)
    low, high = places.min(axis=0) - _AROUND, places.max(axis=0) + _AROUND
    return (
        min(x0, float(low[0])), min(y0, float(low[1])),
        max(x1, float(high[0])), max(y1, float(high[1])),
    )  # fmt: skip
