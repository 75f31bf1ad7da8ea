"""The document's bytes from finished results: no computing, no file, no clock."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from typing import Literal

from reportlab.platypus import Flowable

from engine.errors import UserError
from engine.report.attachments import Attachment
from engine.report.contents import drawn, story
from engine.report.files import attached_files
from engine.report.matter import Matter
from engine.report.names import Wording, wording
from engine.report.note import MOST_PAGES, ROOMS, Room, note_story
from engine.report.page import (
    UNWATCHED,
    Pages,
    Paper,
    Watch,
    paper,
    pdf,
    register_fonts,
)
from engine.units import flux_density_unit

DocumentKind = Literal["report", "note"]

SUBJECT = "Power-frequency magnetic flux density, calculated"


def report_pdf(
    matter: Matter, *, kind: DocumentKind = "report", watch: Watch = UNWATCHED
) -> bytes:
    """The report, or the note, as the bytes of a PDF file.

    Equal matter gives equal bytes.

    Raises
    ------
    UserError
        When the results are not those of the whole layout.
    ValueError
        When the unit is not known.
    ComputationCancelled
        When `watch` says so.
    """
    register_fonts()
    _refuse_partial(matter)
    layout = matter.layout
    sheet = paper(layout)
    words = wording(layout, flux_density_unit(matter.unit))
    attachments: Sequence[Attachment] = attached_files(matter)
    if kind == "note":
        return _note(matter, words, sheet, attachments[:1], watch)
    pictures = drawn(matter, sheet)
    return pdf(
        layout,
        lambda pages: story(matter, pictures, attachments, words, sheet, pages),
        subject=f"{SUBJECT}: report",
        attachments=attachments,
        watch=watch,
    ).content


def _note(
    matter: Matter,
    words: Wording,
    sheet: Paper,
    attachments: Sequence[Attachment],
    watch: Watch,
) -> bytes:
    """The note with as much as two pages hold."""
    for room in ROOMS:
        laid = pdf(
            matter.layout,
            partial(_note_pages, matter, words, sheet, room),
            subject=f"{SUBJECT}: note",
            attachments=attachments,
            watch=watch,
        )
        if laid.count <= MOST_PAGES:
            break
    return laid.content


def _note_pages(
    matter: Matter, words: Wording, sheet: Paper, room: Room, _pages: Pages
) -> list[Flowable]:
    return note_story(matter, words, sheet, room)


def _refuse_partial(matter: Matter) -> None:
    """A report says nothing of load cases, zones or receptors that are missing."""
    assessment, layout = matter.assessment, matter.layout
    done = (
        {result.case.id for result in assessment.cases},
        {result.zone.id for result in assessment.zones},
        {result.receptor.id for result in assessment.receptors},
    )
    whole = (
        {case.id for case in layout.cases},
        {zone.id for zone in layout.zones},
        {receptor.id for receptor in layout.receptors},
    )
    if done != whole:
        raise UserError(
            "The report was not written: its results are of a part of the layout only. "
            "Compute every load case, zone and receptor, then write it again."
        )
