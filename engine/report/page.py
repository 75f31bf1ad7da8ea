"""The page: paper, orientations, fonts, and the building of the document."""

from __future__ import annotations

import io
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from reportlab.lib.units import mm
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.platypus import BaseDocTemplate, Flowable, Frame, PageTemplate

import engine
from engine.errors import Cancelled, Progress, stop_if
from engine.items import TitleData
from engine.printed_text import BOLD, REGULAR, one_line
from engine.report.attachments import Attachment, attach
from engine.report.choices import MARGIN, TITLE_BLOCK, Paper
from engine.report.structure import DraftCanvas, StructuredCanvas
from engine.report.title_block import draw_title_block

FONT = "Lodestead Sans"
BOLD_FONT = "Lodestead Sans Bold"

#: Times the document is laid out until page references agree with the pages.
_MOST_PASSES = 4

#: Pages by the name of what begins on them.
Pages = Mapping[str, int]
MakeStory = Callable[[Pages], list[Flowable]]


def register_fonts() -> None:
    """Make the program's fonts known to the PDF library, once."""
    known = pdfmetrics.getRegisteredFontNames()
    for name, path in ((FONT, REGULAR), (BOLD_FONT, BOLD)):
        if name not in known:
            pdfmetrics.registerFont(TTFont(name, str(path)))
    pdfmetrics.registerFontFamily(
        FONT, normal=FONT, bold=BOLD_FONT, italic=FONT, boldItalic=BOLD_FONT
    )


@dataclass(frozen=True)
class Watch:
    """What a long document asks and tells while it is laid out."""

    cancelled: Cancelled | None = None
    progress: Progress | None = None


#: Nobody asks and nobody is told.
UNWATCHED = Watch()


@dataclass(frozen=True)
class Laid:
    """One laying out: the bytes, on which page what begins, and how many pages."""

    content: bytes
    pages: dict[str, int]
    count: int


@dataclass(frozen=True)
class Frontispiece:
    """What the document says of itself: its title data, its variant, its subject.

    `shown` names the variant; `subject` is for the document's metadata.
    """

    title: TitleData
    shown: str
    subject: str


def pdf(
    front: Frontispiece,
    sheet: Paper,
    make_story: MakeStory,
    *,
    attachments: Sequence[Attachment] = (),
    watch: Watch = UNWATCHED,
) -> Laid:
    """The PDF of a story, with the title block on each page.

    Parameters
    ----------
    make_story : callable
        Gives the flowables anew, from the pages on which things begin; these are not
        known (empty) the first time.

    Notes
    -----
    The bytes depend on the arguments only: no clock, no random id. The story is laid
    out again until the pages it names are those on which things stand.
    """
    laid = Laid(b"", {}, 0)
    for k in range(_MOST_PASSES):
        part = replace(watch, progress=_share(watch.progress, k))
        new = _laid_out(front, sheet, make_story, laid, attachments, part)
        if (new.pages, new.count) == (laid.pages, laid.count):
            return new
        laid = new
    return laid


def _share(progress: Progress | None, attempt: int) -> Progress | None:
    if progress is None:
        return None
    tell = progress
    start = min(attempt, 2) / 3

    def told(share: float, text: str) -> None:
        tell(start + share / 3, text)

    return told


def _laid_out(
    front: Frontispiece,
    sheet: Paper,
    make_story: MakeStory,
    before: Laid,
    attachments: Sequence[Attachment],
    watch: Watch,
) -> Laid:
    file = io.BytesIO()
    title = front.title
    document = _Document(
        file,
        watch,
        pagesize=(sheet.width * mm, sheet.height * mm),
        title=one_line(title.project or title.name or "Magnetic field")[:300],
        author=one_line(title.prepared_by)[:300],
        subject=front.subject,
        keywords=one_line(f"{title.document_number} {title.revision}")[:300],
        creator=f"Lodestead {engine.__version__}",
        producer=f"Lodestead {engine.__version__}",
        lang="en",
        invariant=1,
        pageCompression=1,
        initialFontName=FONT,
    )
    count = before.count
    document.addPageTemplates(
        [_template(each, front, count) for each in (sheet, sheet.turned)]
    )
    document.attached = attachments
    story = make_story(before.pages)
    document.expected = max(1, len(story))
    # Nobody reads the first laying out: it only tells the pages.
    maker = StructuredCanvas if count else DraftCanvas
    document.build(story, canvasmaker=maker)
    return Laid(file.getvalue(), document.begun, document.page)


def _template(sheet: Paper, front: Frontispiece, count: int) -> PageTemplate:
    frame = Frame(
        MARGIN * mm,
        (MARGIN + TITLE_BLOCK + 4.0) * mm,
        sheet.text_width * mm,
        sheet.text_height * mm,
        leftPadding=0,
        rightPadding=0,
        topPadding=0,
        bottomPadding=0,
    )

    def draw(canvas: StructuredCanvas, document: BaseDocTemplate) -> None:
        area = (MARGIN, MARGIN, sheet.text_width)
        told = (front.shown, f"{document.page} of {count}")
        with canvas.artifact("Pagination"):
            draw_title_block(canvas, front.title, area, told, (FONT, BOLD_FONT))

    return PageTemplate(
        id=sheet.orientation,
        frames=[frame],
        onPage=draw,
        pagesize=(sheet.width * mm, sheet.height * mm),
    )


class _Document(BaseDocTemplate):  # type: ignore[misc]
    """Notes on which page things begin, and can be cancelled between flowables."""

    def __init__(self, file: io.BytesIO, watch: Watch, **options: Any) -> None:
        super().__init__(file, **options)
        self.begun: dict[str, int] = {}
        self.attached: Sequence[Attachment] = ()
        self.expected = 1
        self._watch = watch
        self._done = 0

    def beforeDocument(self) -> None:  # noqa: N802
        self.canv.setViewerPreference("DisplayDocTitle", "true")
        self.canv.showOutline()
        attach(self.canv, self.attached)

    def afterFlowable(self, flowable: Flowable) -> None:  # noqa: N802
        stop_if(self._watch.cancelled)
        key = getattr(flowable, "begins", "")
        if key:
            self.begun.setdefault(key, self.page)
        self._done += 1
        if self._watch.progress is not None and self._done % 20 == 0:
            done = min(1.0, self._done / self.expected)
            self._watch.progress(done, "Laying out the report")
