"""The rows of a conductor schedule: CSV text as people's programs write it.

Comma or semicolon between the cells, decimal point or comma, UTF-8 or UTF-16; every
fault is named with its line. Grouping rows into conductors is `schedule`'s matter.
"""

from __future__ import annotations

import codecs
import csv
import io
import math
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from engine.errors import UserError
from engine.items import Point3
from engine.runs import Bar, Round
from engine.value_faults import MOST_GATHERED, told

#: Largest schedule that is read. [bytes]
MAX_BYTES = 50_000_000
MAX_ROWS = 200_000

NEEDED = (
    "conductor", "circuit", "label", "frequency_Hz", "current_A", "angle_deg",
    "x_m", "y_m", "z_m",
)  # fmt: skip
SIZES = ("diameter_m", "width_m", "thickness_m", "turn_deg")

#: Lowest and highest value of each column of numbers, as in the layout.
_RANGES = {
    "frequency_Hz": (0.0, 1e6),
    "current_A": (0.0, 1e9),
    "angle_deg": (-36_000.0, 36_000.0),
    "x_m": (-1e5, 1e5),
    "y_m": (-1e5, 1e5),
    "z_m": (-1e5, 1e5),
    "diameter_m": (1e-9, 1e5),
    "width_m": (1e-9, 1e5),
    "thickness_m": (1e-9, 1e5),
    "turn_deg": (-36_000.0, 36_000.0),
}
_LONGEST = {"conductor": 400, "circuit": 400, "label": 40}
_NUMBER = re.compile(r"[+-]?(\d+([.,]\d*)?|[.,]\d+)([eE][+-]?\d{1,4})?", re.ASCII)


@dataclass(frozen=True)
class Row:
    """One vertex of a conductor, and the current it is stated to carry.

    `frequency` [Hz] is rounded to a millionth, `current` is RMS [A], `angle` is in
    degrees, `at` in metres; `shape` is None where no size is given.
    """

    line: int
    conductor: str
    circuit: str
    label: str
    frequency: float
    current: float
    angle: float
    at: Point3
    shape: Round | Bar | None


@dataclass
class _Reading:
    """What is found while reading: faults, and which decimal marks stand where."""

    columns: dict[str, int] = field(default_factory=dict)
    faults: list[str] = field(default_factory=list)
    #: Decimal mark -> line of its first use.
    marks: dict[str, int] = field(default_factory=dict)


def rows(data: bytes, where: str) -> tuple[Row, ...]:
    """The rows of the schedule that is called `where` in messages.

    An empty circuit counts as a circuit named "circuit", an empty label as the name
    of the conductor; every other cell of the nine needed columns must be filled.

    Raises
    ------
    UserError
        Names every fault with its line.
    """
    opening = f"{where} was not read"
    lines = _lines(_text(data, opening), opening)
    header = next(lines, None)
    if header is None:
        raise UserError(
            f"{opening}: it is empty; its first line must be {','.join(NEEDED)}."
        )
    reading = _Reading()
    _read_header(reading, *header)
    if reading.faults:
        raise told(opening, reading.faults)
    found: list[Row] = []
    for line, cells in lines:
        row = _row(reading, line, cells)
        if row is not None:
            found.append(row)
        if len(found) > MAX_ROWS:
            reading.faults.append(f"line {line}: more than {MAX_ROWS:,} rows")
        if len(found) > MAX_ROWS or len(reading.faults) >= MOST_GATHERED:
            break
    if len(reading.marks) > 1:
        reading.faults.append(
            f"a decimal point stands in line {reading.marks['.']} and a comma within "
            f"a number in line {reading.marks[',']}; use one decimal mark throughout"
        )
    if reading.faults:
        raise told(opening, reading.faults)
    if not found:
        raise UserError(f"{opening}: there is no row below the header.")
    return tuple(found)


def _text(data: bytes, opening: str) -> str:
    if len(data) > MAX_BYTES:
        raise UserError(f"{opening}: it is larger than {MAX_BYTES // 1_000_000} MB.")
    is_utf16 = data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE))
    encoding = "utf-16" if is_utf16 else "utf-8-sig"
    try:
        return data.decode(encoding)
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise UserError(
            f"{opening}: line {line}: it is not UTF-8 text; save it as CSV in UTF-8."
        ) from error


def _lines(text: str, opening: str) -> Iterator[tuple[int, list[str]]]:
    """Line number and cells of every row that is not blank."""
    first = next((line for line in text.splitlines() if line.strip(" \t,;")), "")
    delimiter = ";" if ";" in first else ","
    reader = csv.reader(
        io.StringIO(text, newline=""),
        delimiter=delimiter,
        skipinitialspace=True,
        strict=True,
    )
    while True:
        line = reader.line_num + 1
        try:
            cells = next(reader, None)
        except csv.Error as error:
            raise UserError(f"{opening}: line {line}: {error}.") from error
        if cells is None:
            return
        stripped = [cell.strip() for cell in cells]
        if any(stripped):
            yield line, stripped


def _read_header(reading: _Reading, line: int, cells: Sequence[str]) -> None:
    """Note which column is where, or what is wrong with the header."""
    for index, name in enumerate(cells):
        if not name and not any(cells[index:]):
            break
        if name not in NEEDED and name not in SIZES:
            reading.faults.append(
                f'line {line}: "{name[:60]}" is not a column of a schedule; the '
                f"columns are {','.join(NEEDED)} and perhaps {','.join(SIZES)}"
            )
        elif name in reading.columns:
            reading.faults.append(f"line {line}: the column {name} comes twice")
        reading.columns[name] = index
    missing = [name for name in NEEDED if name not in reading.columns]
    if missing:
        reading.faults.append(
            f"line {line}: the header lacks {','.join(missing)}; it must name "
            f"{','.join(NEEDED)}"
        )


def _row(reading: _Reading, line: int, cells: Sequence[str]) -> Row | None:
    """The row, or None after noting what is wrong with it."""
    before = len(reading.faults)
    filled = len(cells) - next((i for i, c in enumerate(reversed(cells)) if c), 0)
    if filled > len(reading.columns) or len(cells) < 9:
        reading.faults.append(
            f"line {line}: expected {len(reading.columns)} cells as in the header, got "
            f"{filled}; a decimal comma needs semicolons between the cells, or quotes"
        )
        return None
    cell = {
        name: cells[index] if index < len(cells) else ""
        for name, index in reading.columns.items()
    }
    if not cell["conductor"]:
        reading.faults.append(f"line {line}: conductor: a name is missing")
    for name, longest in _LONGEST.items():
        if len(cell[name]) > longest:
            reading.faults.append(
                f"line {line}: {name}: at most {longest} characters are possible"
            )
    number = {
        name: _number(reading, line, name, cell[name])
        for name in _RANGES
        if name in NEEDED or cell.get(name)
    }
    if len(reading.faults) == before:
        _check_current(reading, line, number)
        shape = _shape(reading, line, number)
    if len(reading.faults) > before:
        return None
    return Row(
        line=line,
        conductor=cell["conductor"],
        circuit=cell["circuit"] or "circuit",
        label=cell["label"] or cell["conductor"][: _LONGEST["label"]],
        frequency=round(number["frequency_Hz"], 6),
        current=number["current_A"],
        angle=number["angle_deg"],
        at=(number["x_m"], number["y_m"], number["z_m"]),
        shape=shape,
    )


def _number(reading: _Reading, line: int, name: str, text: str) -> float:
    lowest, highest = _RANGES[name]
    plain = text.replace("\u2212", "-")
    if not _NUMBER.fullmatch(plain):
        found = f'"{text[:60]}"' if text else "nothing"
        reading.faults.append(f"line {line}: {name}: expected a number, got {found}")
        return math.nan
    for mark in ".,":
        if mark in plain:
            reading.marks.setdefault(mark, line)
    value = float(plain.replace(",", "."))
    if lowest <= value <= highest:
        return value
    reading.faults.append(
        f"line {line}: {name}: expected a number from {lowest:g} to {highest:g}, "
        f"got {text[:60]}"
    )
    return math.nan


def _check_current(reading: _Reading, line: int, number: dict[str, float]) -> None:
    frequency, angle = number["frequency_Hz"], number["angle_deg"]
    if frequency == 0 and angle % 180 != 0:
        reading.faults.append(
            f"line {line}: angle_deg: at 0 Hz the angle is 0 or 180 (the other "
            f"direction), got {angle:g}"
        )
    if frequency > 0 and round(frequency, 6) == 0:
        reading.faults.append(
            f"line {line}: frequency_Hz: expected 0 or at least 0.000001, "
            f"got {frequency:g}"
        )


def _shape(
    reading: _Reading, line: int, number: dict[str, float]
) -> Round | Bar | None:
    diameter, turn = number.get("diameter_m"), number.get("turn_deg")
    width, thickness = number.get("width_m"), number.get("thickness_m")
    if diameter is not None and (width is not None or thickness is not None):
        reading.faults.append(
            f"line {line}: a conductor is round (diameter_m) or a bar (width_m and "
            "thickness_m), not both"
        )
    elif (width is None) != (thickness is None):
        reading.faults.append(f"line {line}: a bar needs both width_m and thickness_m")
    elif width is not None and thickness is not None:
        return Bar(width=width, thickness=thickness, turn=turn or 0.0)
    elif turn:
        reading.faults.append(
            f"line {line}: turn_deg: only a bar (width_m and thickness_m) has a turn"
        )
    elif diameter is not None:
        return Round(diameter=diameter)
    return None
