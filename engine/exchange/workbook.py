"""Tables as a workbook of a spreadsheet (XLSX), equal tables giving equal bytes."""

from __future__ import annotations

import datetime
import io
import re
import zipfile
from collections.abc import Sequence

from openpyxl import Workbook
from openpyxl.cell import Cell as SheetCell
from openpyxl.styles import Font
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from engine.printed_text import printable
from engine.result_tables import Cell, ResultTable

#: What stands for the time of writing: the earliest that the format knows.
_NO_CLOCK = (1980, 1, 1, 0, 0, 0)

#: Characters that a cell may have.
_LONGEST = 32_767

_WIDEST = 60


def workbook(tables: Sequence[ResultTable], title: str = "") -> bytes:
    """A workbook with a sheet for each table.

    Text is never taken for a formula; what a sheet cannot hold is made visible.
    """
    book = Workbook()
    book.properties.title = printable(title)[:200]
    book.properties.creator = "Lodestead"
    clock = datetime.datetime(*_NO_CLOCK[:3])
    book.properties.created = book.properties.modified = clock
    book.remove(book.active)
    for table in tables:
        _fill(book.create_sheet(table.name[:31]), table)
    if not tables:
        book.create_sheet("empty")
    file = io.BytesIO()
    book.save(file)
    return _without_clock(file.getvalue())


def _fill(sheet: Worksheet, table: ResultTable) -> None:
    for row, cells in enumerate((table.heads, *table.rows), start=1):
        for column, value in enumerate(cells, start=1):
            _set(sheet.cell(row, column), value)
    for cell in sheet[1]:
        cell.font = Font(bold=True)
    sheet.freeze_panes = "A2"
    for column, head in enumerate(table.heads, start=1):
        texts = [head, *(str(row[column - 1]) for row in table.rows[:200])]
        wide = min(_WIDEST, 2 + max(len(text) for text in texts))
        sheet.column_dimensions[get_column_letter(column)].width = wide


def _set(cell: SheetCell, value: Cell) -> None:
    if isinstance(value, str):
        cell.value = printable(value)[:_LONGEST]
        # A text that begins with "=" would be a formula otherwise.
        cell.data_type = "s"
    else:
        cell.value = value


def _without_clock(content: bytes) -> bytes:
    """The same archive without the times at which its parts were written."""
    made = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as old,
        zipfile.ZipFile(made, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in sorted(
            old.namelist(), key=lambda n: (n != "[Content_Types].xml", n)
        ):
            part = old.read(name)
            if name == "docProps/core.xml":
                part = _fixed_times(part)
            entry = zipfile.ZipInfo(name, _NO_CLOCK)
            entry.compress_type = zipfile.ZIP_DEFLATED
            new.writestr(entry, part)
    return made.getvalue()


def _fixed_times(part: bytes) -> bytes:
    """The properties with the time of writing replaced: saving sets it anew."""
    pattern = rb"(<dcterms:(?:created|modified)[^>]*>)[^<]*"
    return re.sub(pattern, rb"\g<1>1980-01-01T00:00:00Z", part)
