"""Paragraphs and tables; user text is escaped here and nowhere else."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from reportlab.lib.colors import Color
from reportlab.lib.enums import TA_LEFT
from reportlab.lib.styles import ParagraphStyle
from reportlab.lib.units import mm
from reportlab.platypus import (
    CondPageBreak,
    Flowable,
    Spacer,
    Table,
    TableStyle,
)

from engine.printed_text import fitted, one_line, printable, text_width, wrapped
from engine.report.flowing_text import flowing_text
from engine.report.page import BOLD_FONT, FONT
from engine.report.structure import Element, TableMarks

INK = Color(0.08, 0.09, 0.11)
HAIR = Color(0.62, 0.65, 0.68)
HEAD = Color(0.93, 0.94, 0.95)

#: Text of tables. [pt]
CELL_SIZE = 7.0
LEADING = 9.0
PADDING = 3.0

#: Characters of a heading, which may hold names of users.
MOST_IN_HEADING = 240

#: A table that is no taller stays in one piece. [mm]
WHOLE = 55.0

#: Lines of a cell before it goes on in a further row.
MOST_LINES = 24

BODY = ParagraphStyle(
    "body", fontName=FONT, bulletFontName=FONT, fontSize=8.5, leading=11.5,
    textColor=INK, alignment=TA_LEFT, spaceAfter=4, splitLongWords=1,
    allowWidows=0, allowOrphans=0,
)  # fmt: skip
STRONG = ParagraphStyle("strong", parent=BODY, fontName=BOLD_FONT)
HEADING = ParagraphStyle(
    "heading", parent=BODY, fontName=BOLD_FONT, fontSize=12, leading=15,
    spaceBefore=10, spaceAfter=5,
)  # fmt: skip
SUBHEADING = ParagraphStyle(
    "subheading", parent=HEADING, fontSize=9.5, leading=12, spaceBefore=7, spaceAfter=3
)
#: A note has no sections: its parts are what sections are elsewhere.
PART = ParagraphStyle("part", parent=SUBHEADING)
TITLE = ParagraphStyle("title", parent=HEADING, fontSize=17, leading=21, spaceBefore=0)
NOTE = ParagraphStyle("note", parent=BODY, fontSize=7.5, leading=10)
BULLET = ParagraphStyle("bullet", parent=BODY, leftIndent=10, bulletIndent=0)
SMALL_BULLET = ParagraphStyle(
    "small bullet", parent=BULLET, fontSize=7.5, leading=10, spaceAfter=2.5
)


#: Kinds of elements, by the name of the style.
_KINDS = {"title": "H1", "heading": "H2", "part": "H2", "subheading": "H3"}


def paragraph(text: str, style: ParagraphStyle = BODY) -> Flowable:
    """Text as a paragraph; what looks like markup in it is printed as it stands."""
    return flowing_text(text, style, _KINDS.get(style.name, "P"))


def introduced(text: str, made: Table) -> list[Flowable]:
    """A table with a sentence before it, which never stands alone below a page."""
    return [CondPageBreak((least_height(made) + 12.0) * mm), paragraph(text), made]


def paragraphs(text: str) -> list[Flowable]:
    """A text of any length, each of its lines a paragraph."""
    return [paragraph(line) for line in printable(text).split("\n") if line.strip()]


class Heading(Flowable):  # type: ignore[misc]
    """A heading that is a bookmark; `begins` names it for page references."""

    def __init__(self, text: str, style: ParagraphStyle, level: int, key: str) -> None:
        super().__init__()
        line = one_line(text)
        self._text = (
            line if len(line) <= MOST_IN_HEADING else line[: MOST_IN_HEADING - 1] + "…"
        )
        self._inner = paragraph(self._text, style)
        self.begins, self._level = key, level

    def getSpaceBefore(self) -> float:  # noqa: N802
        return float(self._inner.getSpaceBefore())

    def getSpaceAfter(self) -> float:  # noqa: N802
        return float(self._inner.getSpaceAfter())

    def wrap(self, width: float, height: float) -> tuple[float, float]:
        self.width, self.height = self._inner.wrap(width, height)
        return self.width, self.height

    def draw(self) -> None:
        canvas: Any = self.canv
        canvas.bookmarkHorizontal(self.begins, 0, self.height)
        canvas.addOutlineEntry(self._text, self.begins, self._level, False)
        self._inner.drawOn(canvas, 0, 0)


def heading(text: str, key: str, *, room: float = 32.0) -> list[Flowable]:
    """A heading of a section, with `room` below it. [mm]"""
    return [CondPageBreak(room * mm), Heading(text, HEADING, 0, key)]


def subheading(text: str, key: str = "", *, room: float = 32.0) -> list[Flowable]:
    """A heading within a section; with a key it is a bookmark too."""
    if key:
        return [CondPageBreak(room * mm), Heading(text, SUBHEADING, 1, key)]
    return [CondPageBreak(room * mm), paragraph(text[:MOST_IN_HEADING], SUBHEADING)]


def part_heading(text: str) -> list[Flowable]:
    """A heading of a part of a note."""
    return [CondPageBreak(20.0 * mm), paragraph(text, PART)]


def bullets(texts: Sequence[str], style: ParagraphStyle = BULLET) -> list[Flowable]:
    """Texts as a list."""
    return [flowing_text(text, style, "LI", "–") for text in texts]


class ContentsLine(Flowable):  # type: ignore[misc]
    """A line of the table of contents: a title, dots, the page; a click goes there."""

    def __init__(self, text: str, key: str, page: int | None) -> None:
        super().__init__()
        self._text, self._key = text, key
        self._page = "" if page is None else str(page)
        self._element = Element("TOCI")
        self.height = 13.5

    def wrap(self, width: float, _height: float) -> tuple[float, float]:
        self.width = width
        return width, self.height

    def draw(self) -> None:
        with self.canv.drawn_for(self._element):
            self._draw(self.canv)

    def _draw(self, canvas: Any) -> None:
        size = BODY.fontSize
        canvas.setFillColor(INK)
        canvas.setFont(FONT, size)
        room = self.width - 16 * mm
        text = fitted(self._text, size, room)
        canvas.drawString(0, 3, text)
        canvas.drawRightString(self.width, 3, self._page)
        start = text_width(text, size) + 4
        end = self.width - text_width(self._page, size) - 4
        dots = max(0, int((end - start) / 4))
        canvas.setFillColor(HAIR)
        for k in range(dots):
            canvas.circle(end - 4 * k, 5, 0.35, stroke=0, fill=1)
        if self._page:
            area = (0, 0, self.width, self.height)
            canvas.linkRect("", self._key, area, relative=1, thickness=0)


class Lines(Flowable):  # type: ignore[misc]
    """Lines of text as they are, in columns; each is kept on one line.

    Lines wider than a column must be broken before. The columns of a page are read
    one after the other.
    """

    SIZE, LEADING = 6.0, 7.6

    def __init__(
        self, lines: Sequence[str], columns: int = 1, element: Element | None = None
    ) -> None:
        super().__init__()
        self._lines, self._columns = lines, columns
        self._element = Element("P") if element is None else element

    def wrap(self, width: float, _height: float) -> tuple[float, float]:
        self.width, self.height = width, self.LEADING * self._rows()
        return self.width, self.height

    def _rows(self) -> int:
        return -(-len(self._lines) // self._columns)

    def split(self, _width: float, height: float) -> list[Flowable]:
        fit = int(height / self.LEADING) * self._columns
        if fit < 1:
            return []
        return [
            Lines(part, self._columns, self._element)
            for part in (self._lines[:fit], self._lines[fit:])
        ]

    def draw(self) -> None:
        canvas: Any = self.canv
        rows = self._rows()
        with canvas.drawn_for(self._element):
            canvas.setFillColor(INK)
            canvas.setFont(FONT, self.SIZE)
            for k, line in enumerate(self._lines):
                column, row = divmod(k, rows)
                x = column * self.width / self._columns
                canvas.drawString(x, self.height - self.SIZE - row * self.LEADING, line)


def gap(height: float = 2.0) -> Spacer:
    """Empty space. [mm]"""
    return Spacer(1, height * mm)


def table(
    heads: Sequence[str],
    rows: Sequence[Sequence[str]],
    shares: Sequence[float],
    width: float,
) -> Table:
    """A table whose cells wrap and whose head comes again on each page.

    Parameters
    ----------
    shares : sequence of float
        Widths of the columns, in any common measure.
    width : float
        Of the whole table. [mm]

    Notes
    -----
    Cells are broken into lines here and handed on as plain text, which no markup can
    reach. A cell longer than a part of the page goes on in a further row, so that
    every table can be split between rows.
    """
    assert len(heads) == len(shares), heads
    assert all(len(row) == len(heads) for row in rows), heads
    columns = [share / sum(shares) * width * mm for share in shares]
    cells = [
        [_lines(head, room, bold=True) for head, room in _with_room(heads, columns)]
    ]
    ends, owners = [0], [0]
    for k, row in enumerate(rows, start=1):
        wrapped_row = [_lines(text, room) for text, room in _with_room(row, columns)]
        parts = _parts(wrapped_row)
        cells += parts
        owners += [k] * len(parts)
        ends.append(len(cells) - 1)
    heights = [max(len(cell) for cell in row) * LEADING + 2 * PADDING for row in cells]
    made = Table(
        [["\n".join(cell) for cell in row] for row in cells],
        colWidths=columns,
        rowHeights=heights,
        repeatRows=1,
        splitByRow=int(sum(heights) > WHOLE * mm),
        hAlign="LEFT",
        spaceBefore=2,
        spaceAfter=6,
        renderCB=TableMarks(owners),
    )
    made.setStyle(TableStyle([*_CELLS, *_rules(ends)]))
    return made


#: How cells look; the first row is the head.
_CELLS = (
    ("FONT", (0, 0), (-1, 0), BOLD_FONT, CELL_SIZE, LEADING),
    ("FONT", (0, 1), (-1, -1), FONT, CELL_SIZE, LEADING),
    ("TEXTCOLOR", (0, 0), (-1, -1), INK),
    ("VALIGN", (0, 0), (-1, -1), "TOP"),
    ("BACKGROUND", (0, 0), (-1, 0), HEAD),
    ("LINEBELOW", (0, 0), (-1, 0), 0.6, INK),
    ("LEFTPADDING", (0, 0), (-1, -1), PADDING),
    ("RIGHTPADDING", (0, 0), (-1, -1), PADDING),
    ("TOPPADDING", (0, 0), (-1, -1), PADDING - 0.8),
    ("BOTTOMPADDING", (0, 0), (-1, -1), PADDING),
)


def _rules(ends: Sequence[int]) -> list[tuple[object, ...]]:
    """A hairline under each row, however many rows of cells it takes."""
    return [("LINEBELOW", (0, end), (-1, end), 0.25, HAIR) for end in ends[1:]]


def least_height(made: Table) -> float:
    """What of a table must stand together: all of a small one, or head and row. [mm]"""
    whole = whole_height(made)
    return whole if whole <= WHOLE else float(sum(made._rowHeights[:2]) / mm)


def whole_height(made: Table) -> float:
    """Of a table on one page. [mm]"""
    return float(sum(made._rowHeights) / mm)


def _with_room(
    texts: Sequence[str], columns: Sequence[float]
) -> Iterator[tuple[str, float]]:
    """Each cell's text with the room for it. [pt]"""
    for text, column in zip(texts, columns, strict=True):
        yield text, column - 2 * PADDING


def _lines(text: str, room: float, *, bold: bool = False) -> tuple[str, ...]:
    return wrapped(text or "–", CELL_SIZE, room, bold=bold)


def _parts(row: Sequence[tuple[str, ...]]) -> list[list[tuple[str, ...]]]:
    """A row as one or more, none with more lines than a page can hold."""
    tallest = max(len(cell) for cell in row)
    return [
        [cell[first : first + MOST_LINES] for cell in row]
        for first in range(0, tallest, MOST_LINES)
    ]


def fact_table(facts: Sequence[tuple[str, str]], width: float) -> Table:
    """Pairs of a matter and what holds for it."""
    return table(("Matter", "Stated"), facts, (0.28, 0.72), width)
