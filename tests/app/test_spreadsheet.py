"""Pasting from a spreadsheet: separators, decimal signs, all or nothing."""

from __future__ import annotations

import pytest

from app.spreadsheet import cells, copied, placed
from engine.errors import UserError
from engine.typed_numbers import typed_number


def enter(place):
    def entered(row, text, decimal):
        value = typed_number(text, decimal)
        return (*row[:place], value, *row[place + 1 :])

    return entered


COLUMNS = [("Current", enter(0)), ("Result", None), ("Voltage", enter(2))]


def test_tabs_separate_and_semicolons_where_there_is_none():
    assert cells("a\tb;c\r\nd\te\r\n").rows == (("a", "b;c"), ("d", "e"))
    assert cells("a;b\nc;d").rows == (("a", "b"), ("c", "d"))
    assert cells('"two\nlines"\tb').rows == (("two\nlines", "b"),)


def test_the_numbers_together_tell_the_decimal_sign():
    # "1,625" alone could be read in two ways; "0,9" beside it settles it.
    assert cells("1,625\t0,9", ".").decimal == ","
    assert cells("1.625\t0.95", ",").decimal == "."
    assert cells("1,625", ".").decimal == "."
    assert cells("1.234,5\t7").rows == (("1234,5", "7"),)
    assert cells("1,234.5", ",").decimal == "."
    assert cells("12 345,75").rows == (("12345,75",),)


def test_cells_go_to_their_places_and_results_are_left_out():
    rows = ((1.0, "r", 2.0), (3.0, "r", 4.0))
    found = placed(rows, cells("5\tx\t6\n7\tx\t8"), (0, 0), COLUMNS)
    assert found == ((5.0, "r", 6.0), (7.0, "r", 8.0))
    assert placed(rows, cells("9"), (1, 2), COLUMNS) == (rows[0], (3.0, "r", 9.0))


def test_rows_are_added_where_the_table_allows_it():
    rows = ((1.0, "r", 2.0),)
    more = placed(rows, cells("5\n6"), (0, 0), COLUMNS, lambda _: (0.0, "new", 0.0))
    assert more == ((5.0, "r", 2.0), (6.0, "new", 0.0))
    with pytest.raises(UserError, match="only 1 in the table"):
        placed(rows, cells("5\n6"), (0, 0), COLUMNS)


def test_a_refused_cell_names_its_place():
    rows = ((1.0, "r", 2.0),)
    with pytest.raises(UserError, match=r"Nothing was pasted\. Row 1, Voltage: "):
        placed(rows, cells("5\tx\tmuch"), (0, 0), COLUMNS)
    with pytest.raises(UserError, match="more cells than the table has columns"):
        placed(rows, cells("5\t6"), (0, 2), COLUMNS)
    with pytest.raises(UserError, match="no text to paste"):
        cells("\n")


def test_what_is_copied_can_be_pasted_again():
    rows = (("a", "1,5"), ("b\tc", 'say "d"'))
    assert cells(copied(rows)).rows == rows
