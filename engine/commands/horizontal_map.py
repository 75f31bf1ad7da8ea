"""`map`: the field on a horizontal plane, as a picture or as numbers."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from engine.circuits import LoadCase
from engine.conductors import conductors
from engine.drawing import plan
from engine.errors import Progress, UserError
from engine.exchange.map_export import write_csv, write_png
from engine.layout import Layout
from engine.maps import field_map
from engine.picture import map_subjects


def write_map(
    layout: Layout,
    case: LoadCase,
    height: float,
    out: Path,
    unit: str | None,
    progress: Progress,
) -> None:
    """Write the map at `height` above the datum; the ending of `out` says its kind.

    Raises
    ------
    UserError
        When the ending is neither .png nor .csv, when the layout cannot be evaluated,
        or when the file cannot be written.
    """
    kind = out.suffix.lower()
    if kind not in (".png", ".csv"):
        raise UserError(
            f"{out.name} was not written: a map is written as .png or .csv, "
            "by the ending of the file's name."
        )
    if not np.isfinite(height):
        raise UserError("--height must be a finite number of metres above the datum.")
    step = layout.settings.grid_step if kind == ".csv" else None
    result = field_map(layout, case, (height,), step=step, progress=progress)
    subjects = map_subjects(layout, case, result, unit=unit)
    if kind == ".csv":
        write_csv(out, subjects, np.full(result.values.size, height))
    else:
        # AC, or the direct field where no other flows; the caption says which.
        write_png(out, subjects[0], plan(layout, conductors(layout)))
