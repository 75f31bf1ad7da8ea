"""The page: paper, margins, fonts, and the title block with sheet x of y."""

from __future__ import annotations

import io
from dataclasses import dataclass
from functools import partial
from typing import Any

from reportlab.lib.pagesizes import A3, A4, LETTER, TABLOID, landscape
from reportlab.lib.units import mm
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import BaseDocTemplate, Flowable, Frame, PageTemplate

import engine
from engine.items import TitleData
from engine.layout import Layout
from engine.printed_text import BOLD, REGULAR, fitted, one_line

FONT = "Lodestead Sans"
BOLD_FONT = "Lodestead Sans Bold"

#: White edge around everything that is printed. [mm]
MARGIN = 15.0

#: Height of the title block at the foot of each page. [mm]
TITLE_BLOCK = 20.0

PAPERS: dict[str, tuple[float, float]] = {
    "A4": A4,
    "A3": landscape(A3),
    "Letter": LETTER,
    "Tabloid": landscape(TABLOID),
}

Cell = tuple[str, str, float]


@dataclass(frozen=True)
class Paper:
    """Size of the sheet and of the space for text. [mm]"""

    width: float
    height: float

    @property
    def text_width(self) -> float:
        """[mm]"""
        return self.width - 2 * MARGIN

    @property
    def text_height(self) -> float:
        """[mm]"""
        return self.height - 2 * MARGIN - TITLE_BLOCK - 4.0


def paper(layout: Layout) -> Paper:
    """The paper that the layout's settings ask for."""
    width, height = PAPERS[layout.settings.paper]
    return Paper(width / mm, height / mm)


def register_fonts() -> None:
    """Make the program's fonts known to the PDF library, once."""
    known = pdfmetrics.getRegisteredFontNames()
    for name, path in ((FONT, REGULAR), (BOLD_FONT, BOLD)):
        if name not in known:
            pdfmetrics.registerFont(TTFont(name, str(path)))
    pdfmetrics.registerFontFamily(
        FONT, normal=FONT, bold=BOLD_FONT, italic=FONT, boldItalic=BOLD_FONT
    )


def pdf(layout: Layout, story: list[Flowable]) -> bytes:
    """The PDF of a story, with the title block on each page.

    The bytes depend on the layout and the story only: no clock, no random id.
    """
    sheet = paper(layout)
    file = io.BytesIO()
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
    title = layout.title
    document = BaseDocTemplate(
        file,
        pagesize=(sheet.width * mm, sheet.height * mm),
        title=one_line(title.project or "Magnetic field assessment")[:300],
        author=one_line(title.prepared_by)[:300],
        subject="Power-frequency magnetic flux density, calculated",
        creator=f"Lodestead {engine.__version__}",
        lang="en",
        invariant=1,
        pageCompression=1,
        initialFontName=FONT,
    )
    document.addPageTemplates([PageTemplate(id="sheet", frames=[frame])])
    document.build(
        story, canvasmaker=partial(_NumberedCanvas, title=title, paper=sheet)
    )
    return file.getvalue()


class _NumberedCanvas(Canvas):  # type: ignore[misc]
    """Keeps the pages until their number is known, then adds the title block."""

    def __init__(
        self, *arguments: Any, title: TitleData, paper: Paper, **options: Any
    ) -> None:
        super().__init__(*arguments, **options)
        self._title = title
        self._paper = paper
        self._kept: list[dict[str, Any]] = []

    def showPage(self) -> None:  # noqa: N802
        self._kept.append(dict(self.__dict__))
        self._startPage()

    def save(self) -> None:
        kept = self._kept
        for number, page in enumerate(kept, start=1):
            self.__dict__.update(page)
            _draw_title_block(self, self._title, self._paper, number, len(kept))
            super().showPage()
        super().save()


def _draw_title_block(
    canvas: Canvas, title: TitleData, sheet: Paper, number: int, count: int
) -> None:
    """Two rows of cells at the foot, each a small heading over its value."""
    rows: tuple[tuple[Cell, ...], ...] = (
        (
            ("Project", title.project, 0.5),
            ("Client", title.client, 0.3),
            ("Calculated with", f"Lodestead {engine.__version__}", 0.2),
        ),
        (
            ("Document", title.document_number, 0.18),
            ("Revision", title.revision, 0.09),
            ("Status", title.status, 0.14),
            ("Date", title.date, 0.12),
            ("Prepared", title.prepared_by, 0.12),
            ("Checked", title.checked_by, 0.12),
            ("Approved", title.approved_by, 0.12),
            ("Sheet", f"{number} of {count}", 0.11),
        ),
    )
    tall = 0.5 * TITLE_BLOCK
    for row, cells in enumerate(rows):
        left = MARGIN
        bottom = MARGIN + TITLE_BLOCK - (row + 1) * tall
        for heading, value, share in cells:
            width = share * sheet.text_width
            _draw_cell(canvas, (left, bottom, width, tall), heading, value)
            left += width


def _draw_cell(
    canvas: Canvas, box: tuple[float, float, float, float], heading: str, value: str
) -> None:
    left, bottom, width, height = box
    canvas.setLineWidth(0.4)
    canvas.setStrokeColorRGB(0.35, 0.38, 0.41)
    canvas.rect(left * mm, bottom * mm, width * mm, height * mm)
    canvas.setFillColorRGB(0.35, 0.38, 0.41)
    canvas.setFont(FONT, 5.5)
    canvas.drawString((left + 1.2) * mm, (bottom + height - 3.0) * mm, heading)
    canvas.setFillColorRGB(0.08, 0.09, 0.11)
    canvas.setFont(FONT, 7.5)
    shown = fitted(value or "–", 7.5, (width - 2.4) * mm)
    canvas.drawString((left + 1.2) * mm, (bottom + 2.4) * mm, shown)
