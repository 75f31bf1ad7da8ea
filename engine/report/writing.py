"""The report, or the note, from a layout to a file."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from engine.assessment import assess
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.errors import Cancelled, Progress, UserError, stop_if
from engine.faults import Remark
from engine.field import ResponseCache
from engine.layout import Layout
from engine.program_identity import program_identity
from engine.remarks import confirmation, confirmed_remarks, remarks
from engine.report.choices import USUAL, Choices
from engine.report.computed import NOTHING_FURTHER, further_results
from engine.report.document import report_pdf
from engine.report.maps import MOST_MAPS, computed_maps, wanted_maps
from engine.report.matter import Matter
from engine.report.page import Watch
from engine.results import Assessment
from engine.units import flux_density_unit
from engine.validation import Outcome, checks, outcome
from engine.variant import Variant
from engine.variant_remarks import variant_remarks
from engine.variants import layout_of, variant_called
from engine.written_file import write_file

#: Part of the work done when assessment, checks, maps and everything is there.
_ASSESSED, _CHECKED, _DRAWN, _MAPPED = 0.4, 0.5, 0.7, 0.85


def write_report(
    layout: Layout,
    path: Path | str,
    choices: Choices = USUAL,
    *,
    assessment: Assessment | None = None,
    cache: ResponseCache | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> None:
    """Write the report or the note of a layout as PDF; parameters as `report_bytes`.

    A file that is at `path` is replaced only by a whole one.

    Raises
    ------
    UserError
        As `report_bytes`, or when the file cannot be written.
    ValueError
        When the unit is not known.
    ComputationCancelled
        When `cancelled` says so; nothing is written then.
    """
    content = report_bytes(
        layout,
        choices,
        assessment=assessment,
        cache=cache,
        progress=_part(progress, 0.0, 0.99),
        cancelled=cancelled,
    )
    stop_if(cancelled)
    write_file(path, content)
    if progress is not None:
        progress(1.0, "Report written")


def report_bytes(
    layout: Layout,
    choices: Choices = USUAL,
    *,
    assessment: Assessment | None = None,
    cache: ResponseCache | None = None,
    progress: Progress | None = None,
    cancelled: Cancelled | None = None,
) -> bytes:
    """The report or the note of a layout as the bytes of a PDF file.

    Whoever tries several papers computes once: `computed_matter` gives all that the
    pages hold, and `document.report_pdf` lays it out in a second or so.

    Parameters
    ----------
    layout : Layout
        With its variants, whichever is chosen.
    assessment : Assessment, optional
        Of the very layout that is chosen (``layout_of(layout, choices.variant)``, or
        the layout itself for the base), whole; None: it is made here.

    Raises
    ------
    UserError
        When there is no such variant, or the results are not those of this layout, or
        of a part of it only.
    ValueError
        When the unit is not known.
    ComputationCancelled
        When `cancelled` says so.
    """
    matter = computed_matter(
        layout,
        choices,
        assessment=assessment,
        cache=cache,
        cancelled=cancelled,
        progress=_part(progress, 0.0, _MAPPED),
    )
    stop_if(cancelled)
    told = _part(progress, _MAPPED, 1.0)
    return report_pdf(matter, choices, watch=Watch(cancelled, told))


def computed_matter(
    layout: Layout,
    choices: Choices = USUAL,
    *,
    assessment: Assessment | None = None,
    cache: ResponseCache | None = None,
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> Matter:
    """Everything that the document prints, computed; parameters as `report_bytes`.

    Paper and orientation are of no account here. A note has neither outside checks
    nor profiles, options and budgets.
    """
    chosen, variant = layout, None
    if choices.variant is not None:
        variant = variant_called(layout, choices.variant)
        chosen = layout_of(layout, variant.id)
    shown = flux_density_unit(choices.unit or layout.settings.flux_density_unit)
    cache = ResponseCache() if cache is None else cache
    if assessment is None:
        told = _part(progress, 0.0, _ASSESSED)
        assessment = assess(
            chosen, certify=True, cache=cache, cancelled=cancelled, progress=told
        )
    elif assessment.layout is not chosen and assessment.layout != chosen:
        raise UserError(
            "The report was not written: its results are of another layout or of an "
            "earlier state of this one. Let them be computed anew, then write it again."
        )
    outcomes = None
    if choices.validate and choices.kind == "report":
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
    further = NOTHING_FURTHER
    if choices.kind == "report":
        told = _part(progress, _DRAWN, 1.0)
        own = None if variant is None else variant.id
        further = further_results(layout, own, assessment, cache, cancelled, told)
    return Matter(
        assessment=assessment,
        remarks=_remarks(layout, variant, assessment, shown),
        unit=shown,
        conductors=_conductors(chosen),
        maps=maps,
        left_out=max(0, len(wanted) - MOST_MAPS),
        confirmed=confirmed_remarks(chosen, assessment, unit=shown),
        outcomes=outcomes,
        identity=program_identity(),
        profiles=further.profiles,
        comparison=further.comparison,
        budgets=further.budgets,
        traced=further.traced,
        whole=layout,
        variant=variant,
    )


def _remarks(
    layout: Layout, variant: Variant | None, assessment: Assessment, unit: str
) -> tuple[Remark, ...]:
    """What is open; of a variant also what its base has done to it."""
    found = remarks(assessment.layout, assessment, unit=unit)
    if variant is None:
        return found
    own = [r for r in variant_remarks(layout) if variant.id in r.items]
    return (*found, *(r for r in own if confirmation(layout, r) is None))


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
