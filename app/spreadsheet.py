"""Cells as a spreadsheet puts them on the clipboard, and back.

Tabs separate cells, or semicolons where there is no tab. Decimal signs are told from
all numbers together, because one alone ("1,625") could be read in two ways.
"""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from engine.errors import UserError

#: More than a person pastes; keeps a wrong clipboard from filling the layout.
MOST_ROWS, MOST_COLUMNS = 5000, 100

_GROUPED = {
    ",": re.compile(r"(?<![\d.,])\d{1,3}(?:[. \u00a0\u202f']\d{3})+,\d+(?![\d.,])"),
    ".": re.compile(r"(?<![\d.,])\d{1,3}(?:[, \u00a0\u202f']\d{3})+\.\d+(?![\d.,])"),
}
_DECIMAL = {
    ",": re.compile(r"(?<![\d.,])\d+,(?:\d{1,2}|\d{4,})(?![\d.,])"),
    ".": re.compile(r"(?<![\d.,])\d+\.(?:\d{1,2}|\d{4,})(?![\d.,])"),
}


@dataclass(frozen=True)
class Cells:
    """Rows of cells as text, and the decimal sign of their numbers."""

    rows: tuple[tuple[str, ...], ...]
    decimal: str


def cells(text: str, decimal: str = ".") -> Cells:
    """The cells of a copied table; `decimal` counts where the numbers do not tell.

    Raises
    ------
    UserError
        When there is nothing in it, or far too much.
    """
    text = text.replace("\r\n", "\n").replace("\r", "\n").strip("\n")
    if not text.strip():
        raise UserError("There is no text to paste; copy cells of a table first.")
    separator = "\t" if "\t" in text else ";"
    try:
        read = csv.reader(io.StringIO(text), delimiter=separator)
        rows = [tuple(cell.strip() for cell in row) for row in read]
    except csv.Error as error:
        raise UserError(f"The copied cells cannot be read: {error}.") from error
    if len(rows) > MOST_ROWS or max(map(len, rows)) > MOST_COLUMNS:
        raise UserError(
            f"There are more than {MOST_ROWS} rows or {MOST_COLUMNS} columns to paste; "
            "copy only the cells that belong here."
        )
    sign = _decimal_sign(text, decimal)
    plain = tuple(tuple(_without_groups(cell, sign) for cell in row) for row in rows)
    return Cells(plain, sign)


def copied(rows: Iterable[Iterable[str]]) -> str:
    """Rows of cells as text that a spreadsheet takes."""
    out = io.StringIO()
    csv.writer(out, delimiter="\t", lineterminator="\n").writerows(rows)
    return out.getvalue()


def placed(
    rows: Sequence[Any],
    pasted: Cells,
    at: tuple[int, int],
    columns: Sequence[tuple[str, Callable[[Any, str, str], Any] | None]],
    new_row: Callable[[tuple[Any, ...]], Any] | None = None,
) -> tuple[Any, ...]:
    """The rows of a table after cells were pasted into it.

    Parameters
    ----------
    rows
        Rows before; not changed.
    at
        Row and column of the cell that the first pasted cell goes to.
    columns
        Title of every column in turn, and what gives the row after a text was entered
        in it: a function of row, text and decimal sign. None: what is pasted there is
        left out, because the column shows a result.
    new_row
        Gives a fresh row after the present ones; None: there are no more rows.

    Raises
    ------
    UserError
        At the first cell that is refused, naming its row and column. Nothing is to be
        kept then.
    """
    found = list(rows)
    first_row, first_column = at
    for i, texts in enumerate(pasted.rows):
        index = first_row + i
        if index >= len(found):
            if new_row is None:
                raise UserError(
                    f"There are {len(pasted.rows)} rows to paste and only "
                    f"{len(rows) - first_row} in the table from here on; copy fewer."
                )
            found.append(new_row(tuple(found)))
        for j, text in enumerate(texts):
            if first_column + j >= len(columns):
                if not text:
                    continue
                raise UserError(
                    f"Row {i + 1} has more cells than the table has columns from here "
                    "on; paste further left, or copy fewer columns."
                )
            title, enter = columns[first_column + j]
            if enter is None:
                continue
            try:
                found[index] = enter(found[index], text, pasted.decimal)
            except UserError as error:
                raise UserError(
                    f"Nothing was pasted. Row {i + 1}, {title}: {error}"
                ) from error
    return tuple(found)


def _decimal_sign(text: str, default: str) -> str:
    """The sign that the numbers of a table have before their decimals."""
    told = {
        sign
        for sign in (".", ",")
        if _GROUPED[sign].search(text) or _DECIMAL[sign].search(text)
    }
    return told.pop() if len(told) == 1 else default


def _without_groups(cell: str, sign: str) -> str:
    def joined(found: re.Match[str]) -> str:
        whole, _, fraction = found[0].rpartition(sign)
        return re.sub(r"\D", "", whole) + sign + fraction

    return _GROUPED[sign].sub(joined, cell)
