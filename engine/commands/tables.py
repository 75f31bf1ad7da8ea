"""`assess --tables`: the tables of the report as a workbook, or CSV in a folder."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from engine.errors import UserError
from engine.exchange.workbook import workbook
from engine.faults import Remark
from engine.result_tables import csv_text, result_tables
from engine.results import Assessment
from engine.written_file import write_file


def write_tables(
    assessment: Assessment, remarks: Sequence[Remark], unit: str, out: Path
) -> None:
    """Write a workbook where `out` ends with .xlsx, else CSV files in that folder.

    Raises
    ------
    UserError
        When a file cannot be written.
    """
    tables = result_tables(assessment, remarks, unit)
    if out.suffix.lower() == ".xlsx":
        title = assessment.layout.title
        write_file(out, workbook(tables, title.project or title.name))
        return
    if out.suffix:
        raise UserError(
            f"{out.name} was not written: tables are written as .xlsx, or as CSV files "
            "into a folder, whose name has no ending."
        )
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise UserError(
            f"The folder {out.name} was not made: {error.strerror}. Choose a place "
            "that you may write to."
        ) from error
    for table in tables:
        write_file(out / f"{table.name}.csv", csv_text(table).encode("utf-8-sig"))
