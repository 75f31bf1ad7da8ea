"""Values of a reference level as rows of cells, in a display unit. No Qt.

A range reads as its formula does in print: level = c · f^(−n), f in Hz, c in the unit
times Hz to the n.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any

from engine.criteria import (
    LevelPoint,
    LevelRange,
    LevelRanges,
    LevelTable,
    ReferenceLevel,
)
from engine.edits import checked
from engine.errors import UserError
from engine.typed_numbers import number_text, typed_number, typed_quantity
from engine.units import FLUX_DENSITY_UNITS, TYPED_UNITS, significant

Values = LevelRanges | LevelTable

_HERTZ = {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6}
_FIELDS = FLUX_DENSITY_UNITS | {
    typed: FLUX_DENSITY_UNITS[unit] for typed, unit in TYPED_UNITS.items()
}


def frequency(text: str, decimal: str) -> float:
    """A frequency from 0 Hz to 1 GHz. [Hz]

    Raises
    ------
    UserError
        When it is none.
    """
    value = typed_quantity(text, _HERTZ, "Hz", decimal)
    if not 0 <= value <= 1e9:
        raise UserError("A frequency lies between 0 Hz and 1 GHz.")
    return value


def field(text: str, unit: str, decimal: str) -> float:
    """A flux density above zero. [T]

    Raises
    ------
    UserError
        When it is none.
    """
    value = typed_quantity(text, _FIELDS, unit, decimal)
    if not 0 < value <= 100:
        raise UserError("A level lies above 0 and up to 100 T.")
    return value


@dataclass(frozen=True)
class RangeRow:
    """A range as it is being entered; None is still to come. [Hz, T·Hzⁿ]"""

    f_from: float | None = None
    f_to: float | None = None
    coefficient: float | None = None
    exponent: float = 0.0

    @property
    def value(self) -> LevelRange | None:
        """The range, once nothing is missing."""
        if self.f_from is None or self.f_to is None or self.coefficient is None:
            return None
        return LevelRange(
            f_from=self.f_from,
            f_to=self.f_to,
            coefficient=self.coefficient,
            exponent=self.exponent,
        )


@dataclass(frozen=True)
class PointRow:
    """A row of a table as it is being entered; None is still to come. [Hz, T]"""

    frequency: float | None = None
    level: float | None = None

    @property
    def value(self) -> LevelPoint | None:
        """The row, once nothing is missing."""
        if self.frequency is None or self.level is None:
            return None
        return LevelPoint(frequency=self.frequency, level=self.level)


Row = RangeRow | PointRow


def rows_of(values: Values | None) -> tuple[Row, ...]:
    """The rows of entered values."""
    if isinstance(values, LevelRanges):
        return tuple(
            RangeRow(r.f_from, r.f_to, r.coefficient, r.exponent) for r in values.ranges
        )
    if isinstance(values, LevelTable):
        return tuple(PointRow(p.frequency, p.level) for p in values.points)
    return ()


def values_of(rows: Iterable[Row], kind: type[Values]) -> Values:
    """The values that complete rows make.

    Raises
    ------
    UserError
        When one is out of range.
    """
    complete = [row.value for row in rows if row.value is not None]
    if kind is LevelRanges:
        ranges = tuple(v for v in complete if isinstance(v, LevelRange))
        return checked_values(LevelRanges(ranges=ranges))
    points = tuple(v for v in complete if isinstance(v, LevelPoint))
    return checked_values(LevelTable(points=points))


def with_frequency(name: str) -> Callable[[Row, str, str], Row]:
    """What enters the frequency that a row calls `name`."""

    def enter(row: Row, text: str, decimal: str) -> Row:
        changed: dict[str, Any] = {
            name: frequency(text, decimal) if text.strip() else None
        }
        return replace(row, **changed)

    return enter


def with_coefficient(unit: str) -> Callable[[RangeRow, str, str], RangeRow]:
    """What enters c in `unit` times Hz to the n."""

    def enter(row: RangeRow, text: str, decimal: str) -> RangeRow:
        if not text.strip():
            return replace(row, coefficient=None)
        value = typed_number(text, decimal) * FLUX_DENSITY_UNITS[unit]
        if not 0 < value <= 1e12:
            raise UserError("The coefficient c must be more than 0.")
        return replace(row, coefficient=value)

    return enter


def with_exponent(row: RangeRow, text: str, decimal: str) -> RangeRow:
    """The range with another n.

    Raises
    ------
    UserError
        When it is none from -4 to 4.
    """
    value = typed_number(text, decimal) if text.strip() else 0.0
    if not -4 <= value <= 4:
        raise UserError("The exponent n lies between -4 and 4.")
    return replace(row, exponent=value)


def with_level(unit: str) -> Callable[[PointRow, str, str], PointRow]:
    """What enters a row's level in `unit`."""

    def enter(row: PointRow, text: str, decimal: str) -> PointRow:
        level = field(text, unit, decimal) if text.strip() else None
        return replace(row, level=level)

    return enter


def optional_text(value: float | None, factor: float, decimal: str) -> str:
    """A number in its display unit, or nothing where it is still to come."""
    return "" if value is None else number_text(value / factor, decimal)


def range_gives(row: RangeRow, unit: str, decimal: str) -> str:
    """The values at both ends of a range: "200 → 50"."""
    if row.value is None:
        return "incomplete"
    ends = []
    for f in (row.value.f_from, row.value.f_to):
        if f == 0 and row.exponent != 0:
            ends.append("–")
            continue
        value = row.value.coefficient * (f**-row.exponent if f else 1.0)
        ends.append(significant(value / FLUX_DENSITY_UNITS[unit]).replace(".", decimal))
    return ends[0] if ends[0] == ends[1] else " → ".join(ends)


def checked_values(values: Values) -> Values:
    """The values as a layout may hold them.

    Raises
    ------
    UserError
        When one is out of range.
    """
    found = checked(ReferenceLevel(id="values", values=values)).values
    assert found is not None
    return found


def as_table(values: LevelRanges) -> LevelTable:
    """Ranges as a table of their ends: the same function, for no frequency another.

    Raises
    ------
    UserError
        When there is a gap between ranges, which a table would bridge.
    """
    ranges = sorted(values.ranges, key=lambda r: (r.f_from, r.f_to))
    points: list[LevelPoint] = []
    for before, after in pairwise(ranges):
        if before.f_to != after.f_from and before.f_to != 0:
            raise UserError(
                f"The ranges do not join at {before.f_to:g} and {after.f_from:g} Hz, "
                "and a table would draw a line across; join them, or enter the table "
                "anew."
            )
    for r in ranges:
        for f in dict.fromkeys((r.f_from, r.f_to)):
            value = r.coefficient * (f**-r.exponent if f else 1.0)
            points.append(LevelPoint(frequency=f, level=value))
    return LevelTable(points=tuple(dict.fromkeys(points)))


def as_ranges(values: LevelTable) -> LevelRanges:
    """A table as ranges between its rows: the same function.

    Raises
    ------
    UserError
        When it is steeper somewhere than a range can be.
    """
    points = sorted(values.points, key=lambda p: p.frequency)
    found = [
        LevelRange(f_from=0.0, f_to=0.0, coefficient=p.level)
        for p in points
        if p.frequency == 0
    ]
    positive = [p for p in points if p.frequency > 0]
    if len(positive) == 1:
        only = positive[0]
        found.append(
            LevelRange(
                f_from=only.frequency, f_to=only.frequency, coefficient=only.level
            )
        )
    for low, high in pairwise(positive):
        if low.frequency == high.frequency:
            continue
        n = -math.log(high.level / low.level) / math.log(high.frequency / low.frequency)
        n = round(n, 12)
        if not -4 <= n <= 4:
            raise UserError(
                f"Between {low.frequency:g} and {high.frequency:g} Hz the table is "
                "steeper than a range can be; keep the table."
            )
        found.append(
            LevelRange(
                f_from=low.frequency,
                f_to=high.frequency,
                coefficient=low.level * low.frequency**n,
                exponent=n,
            )
        )
    return LevelRanges(ranges=tuple(found))


def curves(values: Values | None) -> list[list[tuple[float, float]]]:
    """What to plot on logarithmic axes: polylines of frequency [Hz] and level [T]."""
    if isinstance(values, LevelRanges):
        return [
            [(f, r.coefficient * f**-r.exponent) for f in (r.f_from, r.f_to)]
            for r in values.ranges
            if 0 < r.f_from <= r.f_to
        ]
    if isinstance(values, LevelTable):
        points = sorted(
            (p for p in values.points if p.frequency > 0), key=lambda p: p.frequency
        )
        return [[(p.frequency, p.level) for p in points]] if points else []
    return []


def direct_value(values: Values | None) -> float | None:
    """The value at 0 Hz, which logarithmic axes cannot show. [T]"""
    levels: Iterable[float] = ()
    if isinstance(values, LevelRanges):
        levels = [r.coefficient for r in values.ranges if r.f_to == 0 == r.exponent]
    elif isinstance(values, LevelTable):
        levels = [p.level for p in values.points if p.frequency == 0]
    return min(levels, default=None)
