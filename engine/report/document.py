"""The document's bytes from finished results: no computing, no file, no clock."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from reportlab.platypus import Flowable

from engine.errors import UserError
from engine.report.attachments import Attachment
from engine.report.choices import USUAL, Choices, Paper, paper
from engine.report.contents import drawn, story
from engine.report.files import attached_files
from engine.report.matter import Matter
from engine.report.names import Wording, wording
from engine.report.note import MOST_PAGES, ON_ONE_PAGE, ROOMS, Room, note_story
from engine.report.page import (
    UNWATCHED,
    Frontispiece,
    Laid,
    Pages,
    Watch,
    pdf,
    register_fonts,
)
from engine.units import flux_density_unit

SUBJECT = "Power-frequency magnetic flux density, calculated"


def report_pdf(
    matter: Matter, choices: Choices = USUAL, *, watch: Watch = UNWATCHED
) -> bytes:
    """The report, or the note, as the bytes of a PDF file.

    Equal matter and choices give equal bytes. Of the choices the kind, the paper and
    its orientation count here; variant and unit are those of the matter.

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
    sheet = paper(matter.layout, choices)
    words = wording(matter.layout, flux_density_unit(matter.unit))
    attachments: Sequence[Attachment] = attached_files(matter)
    if choices.kind == "note":
        front = _front(matter, choices)
        return _note(matter, front, words, sheet, attachments[:1], watch)
    pictures = drawn(matter, sheet)
    return pdf(
        _front(matter, choices),
        sheet,
        lambda pages: story(matter, pictures, attachments, words, sheet, pages),
        attachments=attachments,
        watch=watch,
    ).content


def _front(matter: Matter, choices: Choices) -> Frontispiece:
    subject = f"{SUBJECT}: {choices.kind}"
    return Frontispiece(matter.layout.title, matter.shown, subject)


def _note(
    matter: Matter,
    front: Frontispiece,
    words: Wording,
    sheet: Paper,
    attachments: Sequence[Attachment],
    watch: Watch,
) -> bytes:
    """The note with as much as two pages hold, or on one where little is cut for it."""

    def laid_out(room: Room) -> Laid:
        return pdf(
            front,
            sheet,
            partial(_note_pages, matter, words, sheet, room),
            attachments=attachments,
            watch=watch,
        )

    for room in ROOMS:
        laid = laid_out(room)
        if laid.count <= MOST_PAGES:
            break
    if room == ROOMS[0] and laid.count > 1 and sheet.orientation == "portrait":
        for room in ON_ONE_PAGE:
            shorter = laid_out(room)
            if shorter.count == 1:
                return shorter.content
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
