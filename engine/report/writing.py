"""The report, or the note, from a layout to a file."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from engine.assessment import assess
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.field import ResponseCache
from engine.layout import Layout
from engine.program_identity import program_identity
from engine.remarks import confirmed_remarks, remarks
from engine.report.computed import NOTHING_FURTHER, further_results
from engine.report.document import DocumentKind, report_pdf
from engine.report.maps import MOST_MAPS, computed_maps, wanted_maps
from engine.report.matter import Matter
from engine.report.page import Watch
from engine.results import Assessment
from engine.units import flux_density_unit
from engine.validation import Outcome, checks, outcome
from engine.written_file import write_file

#: Part of the work done when assessment, checks, maps and everything is there.
_ASSESSED, _CHECKED, _DRAWN, _MAPPED = 0.4, 0.5, 0.7, 0.85


def write_report(
    layout: Layout,
    path: Path | str,
    *,
    kind: DocumentKind = "report",
    validate: bool = True,
    assessment: Assessment | None = None,
    unit: str | None = None,
    cache: ResponseCache | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the report or the note of a layout as PDF.

    Parameters
    ----------
    layout : Layout
    path : path
        Where to; a file that is there is replaced only by a whole one.
    kind
        "report", or "note" for one to two pages.
    validate : bool
        Whether the outside checks are run and printed; they take some seconds the
        first time. A note has none.
    assessment : Assessment, optional
        Of this very layout, whole; None: it is made here.
    unit : str, optional
        Display unit of flux density; None: the layout's.

    Raises
    ------
    UserError
        When the results are not those of this layout, or of a part of it only, or when
        the file cannot be written.
    ValueError
        When the unit is not known.
    ComputationCancelled
        When `cancelled` says so; nothing is written then.
    """
    matter = computed_matter(
        layout,
        with_checks=validate and kind == "report",
        with_further=kind == "report",
        assessment=assessment,
        unit=unit,
        cache=cache,
        cancelled=cancelled,
        progress=_part(progress, 0.0, _MAPPED),
    )
    stop_if(cancelled)
    told = _part(progress, _MAPPED, 0.99)
    content = report_pdf(matter, kind=kind, watch=Watch(cancelled, told))
    stop_if(cancelled)
    write_file(path, content)
    if progress is not None:
        progress(1.0, "Report written")


def computed_matter(
    layout: Layout,
    *,
    with_checks: bool = True,
    with_further: bool = True,
    assessment: Assessment | None = None,
    unit: str | None = None,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Matter:
    """Everything that the report prints, computed; parameters as `write_report`.

    `with_further`: profiles, options and budgets too, which a note has not.
    """
    shown = flux_density_unit(unit or layout.settings.flux_density_unit)
    cache = ResponseCache() if cache is None else cache
    if assessment is None:
        told = _part(progress, 0.0, _ASSESSED)
        assessment = assess(
            layout, certify=True, cache=cache, cancelled=cancelled, progress=told
        )
    elif assessment.layout is not layout and assessment.layout != layout:
        raise UserError(
            "The report was not written: its results are of another layout or of an "
            "earlier state of this one. Let them be computed anew, then write it again."
        )
    outcomes = None
    if with_checks:
        outcomes = _checked(cancelled, _part(progress, _ASSESSED, _CHECKED))
    wanted = wanted_maps(assessment)
    maps = computed_maps(
        assessment,
        wanted[:MOST_MAPS],
        unit=shown,
        cache=cache,
        cancelled=cancelled,
        progress=_part(progress, _CHECKED, _DRAWN),
    )
    told = _part(progress, _DRAWN, 1.0)
    further = NOTHING_FURTHER
    if with_further:
        further = further_results(layout, assessment, cache, cancelled, told)
    return Matter(
        assessment=assessment,
        remarks=remarks(layout, assessment, unit=shown),
        unit=shown,
        conductors=_conductors(layout),
        maps=maps,
        left_out=max(0, len(wanted) - MOST_MAPS),
        confirmed=confirmed_remarks(layout, assessment, unit=shown),
        outcomes=outcomes,
        identity=program_identity(),
        profiles=further.profiles,
        comparison=further.comparison,
        budgets=further.budgets,
        traced=further.traced,
    )


def _conductors(layout: Layout) -> tuple[Conductor, ...]:
    try:
        return conductors(layout)
    except UserError:
        return ()  # The remarks name the geometry that cannot be; the rest is drawn.


def _checked(
    cancelled: Cancelled | None, progress: Progress | None
) -> tuple[Outcome, ...]:
    """Every outside check, run by this program; once is enough for a process."""
    every = checks()
    found = []
    for k, check in enumerate(every):
        stop_if(cancelled)
        if progress is not None:
            progress(k / len(every), "Running the outside checks")
        found.append(_outcome(check.id))
    return tuple(found)


@cache
def _outcome(id: str) -> Outcome:
    return outcome(next(check for check in checks() if check.id == id))


def _part(progress: Progress | None, start: float, end: float) -> Progress | None:
    """The progress of a part of the work, as progress of the whole."""
    if progress is None:
        return None
    tell = progress

    def told(share: float, text: str) -> None:
        tell(start + share * (end - start), text)

    return told
