"""Tables of results: as values, as CSV, and as a workbook."""

from __future__ import annotations

import csv
import io

import openpyxl
import pytest
from reported_room import assessment, layout, remark

from engine.commands.tables import write_tables
from engine.errors import UserError
from engine.exchange.workbook import workbook
from engine.result_tables import ResultTable, csv_text, result_tables

FORMULA = '=HYPERLINK("http://x.example","x")'


def tables(text="", unit="µT"):
    return result_tables(assessment(layout(text), text), (remark(text),), unit)


def named(name, **options):
    return next(table for table in tables(**options) if table.name == name)


def test_comparisons_hold_the_engines_numbers_in_full():
    table = named("comparisons")
    row = dict(zip(table.heads, table.rows[0], strict=True))
    assert row["place"] == "Office"
    assert row["B [µT]"] == pytest.approx(7.4996, rel=1e-12)
    assert row["B/L"] == 0.99995
    assert (row["x [m]"], row["height above floor [m]"]) == (1.25, 1.5)


def test_every_value_follows_the_unit():
    table = named("largest-values", unit="mG")
    row = dict(zip(table.heads, table.rows[0], strict=True))
    assert row["largest B [mG]"] == pytest.approx(74.996, rel=1e-12)


def test_currents_are_phasors_that_sum_with_the_neutral():
    rows = named("currents").rows
    assert {row[2] for row in rows} >= {"L1", "L2", "L3"}
    (first,) = (r for r in rows if r[2] == "L1" and r[3] == 50)
    assert first[4] == pytest.approx(575.0)
    assert first[5] == pytest.approx(-25.842, abs=1e-3)


def test_all_rows_fit_their_heads():
    for table in tables():
        assert all(len(row) == len(table.heads) for row in table.rows), table.name


def test_csv_reads_back_and_holds_no_formula():
    table = ResultTable("t", "", ("a", "b"), ((FORMULA, 1.5), ("+1", None)))
    rows = [*csv.reader(io.StringIO(csv_text(table)))]
    assert rows == [["a", "b"], ["'" + FORMULA, "1.5"], ["'+1", ""]]


def test_a_workbook_holds_the_same_tables_as_text_and_numbers():
    book = openpyxl.load_workbook(io.BytesIO(workbook(tables(), "Room")))
    assert book.sheetnames == [table.name for table in tables()]
    sheet = book["comparisons"]
    table = named("comparisons")
    for row, wanted in zip(sheet.iter_rows(min_row=2), table.rows, strict=True):
        for cell, value in zip(row, wanted, strict=True):
            if isinstance(value, float):
                assert cell.value == pytest.approx(value, rel=1e-14)
            else:
                assert (cell.value or "") == (value or "")


def test_text_in_a_workbook_is_never_a_formula():
    table = ResultTable("t", "", ("a",), ((FORMULA,), ("a\x00b",), ("x" * 40_000,)))
    book = openpyxl.load_workbook(io.BytesIO(workbook((table,))))
    cells = [row[0] for row in book["t"].iter_rows(min_row=2)]
    assert [cell.data_type for cell in cells] == ["s", "s", "s"]
    assert cells[0].value == FORMULA
    assert cells[1].value == "a�b"


def test_equal_tables_give_equal_bytes():
    assert workbook(tables()) == workbook(tables())


def test_tables_are_written_by_the_ending(tmp_path):
    found, remarks = assessment(layout()), (remark(),)
    write_tables(found, remarks, "µT", tmp_path / "out.xlsx")
    write_tables(found, remarks, "µT", tmp_path / "folder")
    assert (tmp_path / "out.xlsx").read_bytes().startswith(b"PK")
    names = {path.name for path in (tmp_path / "folder").iterdir()}
    assert "comparisons.csv" in names
    with pytest.raises(UserError, match=r"written as \.xlsx, or as CSV files"):
        write_tables(found, remarks, "µT", tmp_path / "out.ods")
