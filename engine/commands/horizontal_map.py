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
from engine.maps import field_map
from engine.picture import map_picture, map_subjects
from engine.written_file import write_file

#: Endings of a file name that say what a map is written as.
KINDS = (".png", ".svg", ".csv")


def write_map(
    layout: Layout,
    case: LoadCase,
    heights: Sequence[float],
    out: Path,
    *,
    unit: str | None = None,
    shown: str = "",
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the map at a height above the datum, or the largest over several.

    The ending of `out` says its kind. Numbers are written for one height only. `shown`
    is said first under the title of a picture: "variant Bond removed".

    Raises
    ------
    UserError
        When the ending is of no known kind, when the layout cannot be evaluated, or
        when the file cannot be written.
    """
    kind = out.suffix.lower()
    if kind not in KINDS:
        raise UserError(
            f"{out.name} was not written: a map is written as .png, .svg or .csv, "
            "by the ending of the file's name."
        )
    if not heights or not np.all(np.isfinite(heights)):
        raise UserError("The height must be a finite number of metres above the datum.")
    step = layout.settings.grid_step if kind == ".csv" else None
    if kind == ".csv" and len(heights) > 1:
        raise UserError("Numbers are written for one height: choose one for the map.")
    result = field_map(
        layout, case, heights, step=step, progress=progress, cancelled=cancelled
    )
    subjects = map_subjects(layout, case, result, unit=unit)
    if kind == ".csv":
        write_csv(out, subjects, np.full(result.values.size, heights[0]))
        return
    # AC, or the direct field where no other flows; the caption says which.
    subject = subjects[0]
    if shown:
        said = f"{shown[:1].upper()}{shown[1:]}."
        subject = replace(subject, lines=(said, *subject.lines))
    drawn = plan(layout, conductors(layout))
    if kind == ".png":
        write_png(out, subject, drawn)
    else:
        picture = map_picture(subject, drawn, width=277.0, height=190.0)
        write_file(out, svg(picture).encode("utf-8"))
