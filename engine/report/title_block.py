"""The title block at the foot of every page."""

from __future__ import annotations

from reportlab.lib.units import mm
from reportlab.pdfgen.canvas import Canvas

import engine
from engine.items import TitleData
from engine.printed_text import fitted, one_line, text_width, wrapped
from engine.report.choices import TITLE_BLOCK

#: Sizes that a value may have until it fits. [pt]
_SIZES = (7.5, 6.5, 5.5)

#: Two lines of this size fit under the heading of a cell. [pt]
_SMALL, _LEADING = 5.0, 5.6

Cell = tuple[str, str, float]
Box = tuple[float, float, float, float]


def draw_title_block(
    canvas: Canvas,
    title: TitleData,
    area: tuple[float, float, float],
    told: tuple[str, str],
    fonts: tuple[str, str],
) -> None:
    """Two rows of cells, each a small heading over its value.

    Parameters
    ----------
    area : left, bottom and width
        [mm]
    told : two strings
        What is shown, "base" or a variant's name; and the sheet, "3 of 18".
    fonts : names of the regular and the bold font
    """
    shown, sheet = told
    rows: tuple[tuple[Cell, ...], ...] = (
        (
            ("Project", title.project, 0.36),
            ("Client", title.client, 0.29),
            ("Variant", shown, 0.2),
            ("Calculated with", f"Lodestead {engine.__version__}", 0.15),
        ),
        (
            ("Document", title.document_number, 0.18),
            ("Revision", title.revision, 0.09),
            ("Status", title.status, 0.14),
            ("Date", title.date, 0.12),
            ("Prepared", title.prepared_by, 0.12),
            ("Checked", title.checked_by, 0.12),
            ("Approved", title.approved_by, 0.12),
            ("Sheet", sheet, 0.11),
        ),
    )
    left_edge, foot, whole = area
    tall = 0.5 * TITLE_BLOCK
    for row, cells in enumerate(rows):
        left = left_edge
        bottom = foot + TITLE_BLOCK - (row + 1) * tall
        for heading, value, share in cells:
            width = share * whole
            _draw_cell(canvas, (left, bottom, width, tall), heading, value, fonts[0])
            left += width


def _draw_cell(canvas: Canvas, box: Box, heading: str, value: str, font: str) -> None:
    left, bottom, width, height = box
    canvas.setLineWidth(0.4)
    canvas.setStrokeColorRGB(0.35, 0.38, 0.41)
    canvas.rect(left * mm, bottom * mm, width * mm, height * mm)
    canvas.setFillColorRGB(0.35, 0.38, 0.41)
    canvas.setFont(font, 5.5)
    canvas.drawString((left + 1.2) * mm, (bottom + height - 3.0) * mm, heading)
    canvas.setFillColorRGB(0.08, 0.09, 0.11)
    room = (width - 2.4) * mm
    text = one_line(value) or "–"
    for size in _SIZES:
        if text_width(text, size) <= room:
            canvas.setFont(font, size)
            canvas.drawString((left + 1.2) * mm, (bottom + 2.4) * mm, text)
            return
    lines = wrapped(text, _SMALL, room)
    if len(lines) > 2:
        lines = (lines[0], fitted(" ".join(lines[1:]), _SMALL, room))
    canvas.setFont(font, _SMALL)
    for k, line in enumerate(lines):
        y = (bottom + 3.4) * mm - k * _LEADING
        canvas.drawString((left + 1.2) * mm, y, line)
