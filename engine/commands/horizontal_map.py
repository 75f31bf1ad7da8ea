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
from engine.maps import MapResult, field_map
from engine.picture import MapSubject
from engine.picture.references import reference_lines

CAUTION = "Local regulation and licensed, competent practice decide."


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
    subject = map_subject(layout, case, height, result, unit)
    if kind == ".csv":
        write_csv(out, subject, np.full(result.values.size, height))
    else:
        write_png(out, subject, plan(layout, conductors(layout)))


def map_subject(
    layout: Layout,
    case: LoadCase,
    height: float,
    result: MapResult,
    unit: str | None,
) -> MapSubject:
    """What the picture shows: AC, or the direct field where no other flows."""
    settings = layout.settings
    only_dc = result.dc is not None and not any(f > 0 for f in result.frequencies)
    references, note = reference_lines(layout, result.frequencies)
    kind = "flux density at 0 Hz" if only_dc else "RMS flux density"
    bound = f"upper bound: {result.bound_reason}" if result.is_bound else ""
    return MapSubject(
        xs=result.xs,
        ys=result.ys,
        values=result.dc if only_dc and result.dc is not None else result.values,
        mask=result.mask,
        title=f"{kind} · z {height:.2f} m · case {case.title}",
        unit=unit or settings.flux_density_unit,
        low=settings.map_low,
        high=settings.map_high,
        scale=settings.map_scale,
        references=references,
        reference_note=note,
        lines=tuple(line for line in (layout.title.project, bound, CAUTION) if line),
        length_unit=settings.length_unit,
        north=settings.north,
    )
