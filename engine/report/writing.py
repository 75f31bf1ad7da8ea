"""The report from a layout to a file."""

from __future__ import annotations

from pathlib import Path

from engine.assessment import assess
from engine.conductors import conductors
from engine.drawing import plan
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.field import ResponseCache
from engine.layout import Layout
from engine.remarks import remarks
from engine.report.document import report_pdf
from engine.report.maps import MOST_MAPS, computed_maps, wanted_maps
from engine.results import Assessment
from engine.units import flux_density_unit
from engine.written_file import write_file

#: Part of the work done when the assessment is there, and when the maps are.
_ASSESSED, _MAPPED = 0.5, 0.9


def write_report(
    layout: Layout,
    path: Path | str,
    *,
    assessment: Assessment | None = None,
    unit: str | None = None,
    cache: ResponseCache | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the report of a layout as PDF.

    Parameters
    ----------
    layout : Layout
    path : path
        Where to; a file that is there is replaced only by a whole one.
    assessment : Assessment, optional
        Of this very layout; None: it is made here.
    unit : str, optional
        Display unit of flux density; None: the layout's.

    Raises
    ------
    UserError
        When the file cannot be written.
    ValueError
        When the assessment is of another layout, or the unit is not known.
    ComputationCancelled
        When `cancelled` says so; nothing is written then.
    """
    shown = flux_density_unit(unit or layout.settings.flux_density_unit)
    if assessment is None:
        told = _part(progress, 0.0, _ASSESSED)
        assessment = assess(
            layout, certify=True, cache=cache, cancelled=cancelled, progress=told
        )
    elif assessment.layout is not layout and assessment.layout != layout:
        raise ValueError("the assessment is of another layout")
    wanted = wanted_maps(assessment)
    maps = computed_maps(
        assessment,
        wanted[:MOST_MAPS],
        unit=shown,
        cache=cache,
        cancelled=cancelled,
        progress=_part(progress, _ASSESSED, _MAPPED),
    )
    stop_if(cancelled)
    if progress is not None:
        progress(_MAPPED, "Writing the report")
    try:
        drawn = plan(layout, conductors(layout))
    except UserError:
        # The remarks name the geometry that cannot be; the rest can be drawn.
        drawn = plan(layout, ())
    content = report_pdf(
        assessment,
        remarks=remarks(layout, assessment, unit=shown),
        maps=maps,
        plan=drawn,
        unit=shown,
        left_out=max(0, len(wanted) - MOST_MAPS),
    )
    stop_if(cancelled)
    write_file(path, content)
    if progress is not None:
        progress(1.0, "Report written")


def _part(progress: Progress | None, start: float, end: float) -> Progress | None:
    """The progress of a part of the work, as progress of the whole."""
    if progress is None:
        return None
    tell = progress

    def told(share: float, text: str) -> None:
        tell(start + share * (end - start), text)

    return told
